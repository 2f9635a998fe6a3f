"""Several steps taken together, at exact equality: maps of N steps, courses on the way, bounds of all steps.

As in `test_boundaries.py`, whose way of writing certificates this shares (proofs/horizon.md).
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import GONE, STEP, Draft, Entries, Questions, but, claim, derivation, refuses
from tests.checker.test_several_boundaries import Lines, hair, without
from tests.checker.test_several_boundaries import claim as claim_of_two
from tests.stances import stance

CASES = Questions()
unit, accept, reject = CASES.unit, CASES.accept, CASES.reject


def judged(name: str, entries: Entries) -> None:
    """Nothing else is derived of any requirement, and undecided may be said of all."""
    accept(name, entries)
    for n, r in enumerate(entries["results"]["requirements"]):
        for other in sorted({"proved", "refuted"} - {r["verdict"]}):
            changed = but(entries, f"results requirements {n} verdict", other)
            reject(
                f"{name}: {r['that']} {other}",
                changed,
                "results",
                f"[{n + 1}].verdict: {other} is claimed, {r['verdict']} was derived",
            )


def figures(name: str, entries: Entries, wanted: dict[str, tuple[str | None, str | None]]) -> None:
    """Figures of the results as derived; a hair less is not."""
    full = entries
    for path, (low, high) in wanted.items():
        full = but(full, f"results {path}", {"lower": low, "upper": high})
    accept(f"{name}: figures", full)
    for path, ends in wanted.items():
        for end, value, by in zip(("lower", "upper"), ends, (1, -1), strict=True):
            changed = but(full, f"results {path} {end}", "1" if value is None else hair(value, by))
            reject(
                f"{name}: {path} {end}",
                changed,
                "results",
                f"{end}: {'nothing was derived' if value is None else 'more is claimed'}",
            )


# tables of numbers: one line each reads better
# fmt: off

FEWER = "gain or residual: less than what the lines used show"
WIDER = "the range shown is wider than what is concluded"
LEAVES = "a step on the way is not shown to stay in the region of "

# one state, v⁺ = -v/2 + p, |p| <= 1/4, over the ball of radius 1 in [-1, 4]; 4 leads to -2.
# N steps: k = 2⁻ᴺ, ε = (1/2)(1 - 2⁻ᴺ), ε/(1 - k) = 1/2; the first step: 1/2 + 1/4 <= 1

TURNING = "-v/2 + p"
QUARTER = 'p = ["-1/4", "1/4"]'


def powers(n: int) -> tuple[Q, Q]:
    return Q(1, 2**n), Q(1, 2) * (1 - Q(1, 2**n))


def steps_of(n: int) -> list[str]:
    """Names of the fresh values of n steps."""
    return ["p", *(f"p@{j}" for j in range(2, n + 1))]


def turning(n: int, asked: Sequence[str] = ("settles",), early: Sequence[int] = (1,), top: str = "", used: int = 0) -> Draft:
    """Lines: 1 target, 2 point, 3 ball, 4 escape, then slope, miss and pair of each early step and of the horizon, the course,
    invariant, bound; points of slope and miss."""
    d = Draft(claim(TURNING, "[-1, 4]", QUARTER, requires=asked, top=f"horizon = {n}\n{top}"))
    d.range("target[v]", "0", "0")
    d.point("target[v]", {}, "0")
    d.theorem("largest-ball", "ball", [1, 2], radius="1", outer="1")
    d.point("image[v]", {"v": "4", "p": "0"}, "-2")
    pairs = [pair_of(d, j, f"@{j}") for j in early]
    last = pair_of(d, n, "")
    d.theorem("course", "course", [3, *(pairs[:used] if used else pairs)])
    invariant = d.theorem("invariant-ball", "invariant", [3, last])
    d.theorem("ultimate-bound", "bound[slope]", [invariant, last], bound="1/2")
    d.point("slope[v,v]", {"v": "0", **dict.fromkeys(steps_of(n), "0")}, str((-1) ** n * powers(n)[0]), uses=[3])
    d.point("target-miss[v]", {p: "1/4" if (n - j) % 2 == 0 else "-1/4" for j, p in enumerate(steps_of(n), 1)}, str(powers(n)[1]))
    return d


def pair_of(d: Draft, n: int, on: str) -> int:
    k, e = powers(n)
    slope = d.range(f"slope{on}[v,v]", str((-1) ** n * k), str((-1) ** n * k), [3])
    miss = d.range(f"target-miss{on}[v]", str(-e), str(e))
    return d.theorem("slope", f"slope{on}", [slope, miss], gain=str(k), residual=str(e))


def kept_by_the_first_step() -> None:
    """proofs/horizon.md (2b), and what is known of every step: (3), (4)."""
    asked = [
        ("settles", "proved"), ("gain <= 1/4", "proved"), ("gain < 1/4", "refuted"), ("residual <= 3/8", "proved"), ("residual < 3/8", "refuted"), ("bound <= 1/2", "proved"), ("bound(v) < 1/2", "undecided"), (f"bound(v) < 1/2 + 1{STEP}", "proved"),
        ("radius >= 1", "proved"), ("push(v) >= 1/2", "undecided"), (f"push(v) >= 1/2 - 1{STEP}", "proved"),
        # two phases from within 1 and 3/4; e -> e/4 + 3/8: 5/8, 17/32
        ("steps(v, 1, 1) <= 0", "proved"), (f"steps(v, 1, 1 - 1{STEP}) <= 1", "undecided"), ("steps(v, 1, 5/8) <= 2", "proved"), ("steps(v, 1, 5/8) < 2", "undecided"), ("steps(v, 1, 17/32) <= 4", "proved"), (f"steps(v, 1, 17/32 - 1{STEP}) <= 5", "undecided"),
        (f"steps(v, 1 + 1{STEP}, 1) <= 99", "undecided"), ("steps(v, 1/2, 1/2) <= 0", "proved"), ("steps(v, 1/2, 499/1000) <= 99", "undecided"),
    ]
    d = turning(2, [that for that, _ in asked])
    judged("turning", d.entries("ball", asked))
    plain = turning(2).entries("ball", [("settles", "proved")])
    figures("turning", plain, {
        "gain": ("1/4", "1/4"), "residual": ("3/8", "3/8"), "bound": ("1/2", "1/2"), "radius": ("1", "1"), "states v bound": (None, "1/2"), "states v push": ("1/2", None), "routes slope bound": ("1/2", "1/2"),
    })
    for number, key, by, reason in (
        (5, "upper", -1, WIDER), (6, "upper", -1, WIDER), (7, "gain", -1, FEWER), (7, "residual", -1, FEWER), (8, "lower", 1, WIDER), (9, "lower", 1, WIDER), (10, "gain", -1, FEWER), (10, "residual", -1, FEWER), (13, "bound", -1, "bound: less than"), (14, "lower", 1, WIDER), (15, "lower", 1, WIDER),
    ):
        old = plain["proof"][number - 1]["concludes"][key]
        reject(f"turning: line {number} {key}", but(plain, f"proof {number - 1} concludes {key}", hair(old, by)), f"proof line {number}", reason)
    # 1/2 + 1/2 = 1, and 3/4 + 1/4
    for key, value in (("residual", "1/2"), ("gain", "3/4")):
        accept(f"turning: the first step keeps the ball, {key}", but(plain, f"proof 6 concludes {key}", value))
        reject(f"turning: the first step does not, {key}", but(plain, f"proof 6 concludes {key}", hair(value, 1)), "proof line 11", LEAVES + "v")
    three = turning(3, early=(1, 2), used=1).entries("ball", [("settles", "proved")])
    reject("turning, three steps: of the second nothing is used", three, "proof", "line 8 serves no later line and no result")


def of_each_step() -> None:
    """Where a horizon of three leads in between: by its own lines, or by the first step again."""
    for early, used in (((1,), 0), ((1, 2), 0), ((1, 2), 1)):
        for start, to, steps in (("0", "1/2", 0), ("0", "3/8", None), ("1", "9/16", 3), ("1", "1", 0), ("3/4", "3/4", 0), ("1", f"9/16 - 1{STEP}", 6)):
            name = f"three steps, {early} {used}: from {start} to {to}"
            asked = [(f"steps(v, {start}, {to}) <= {steps if steps is not None else 99}", "undecided" if steps is None else "proved"), (f"steps(v, {start}, {to}) < {steps or 99}", "undecided" if steps != 0 else "proved")]
            d = turning(3, [that for that, _ in asked], early, used=used)
            judged(name, d.entries("ball", asked))
    # from 0: 1/2 after one step and, by the first again, 3/4 after two; by its own line 3/8
    for own, to, verdict in ((False, "3/4", "proved"), (False, hair("3/4", -1), "undecided"), (True, "1/2", "proved"), (True, hair("1/2", -1), "undecided")):
        asked = [(f"steps(v, 0, {to}) <= 0", verdict)]
        d = turning(3, [that for that, _ in asked], (1, 2) if own else (1,))
        judged(f"three steps, {own}: from 0 to {to[:5]}", but(d.entries("ball", asked), "proof 6 concludes residual", "1/2"))
    # what is led beyond the radius is not followed: 3/4 + 1/4 (1 + 1/1000...) > 1, though the course has its own lines
    for residual, verdict in (("3/4", "proved"), (hair("3/4", 1), "undecided")):
        asked = [("steps(v, 1, 1) <= 0", verdict)]
        d = turning(3, [that for that, _ in asked], (1, 2))
        judged(f"three steps: the second to {residual[:5]}", but(d.entries("ball", asked), "proof 9 concludes residual", residual))


kept_by_the_first_step()
of_each_step()


# one state, mapped into itself: v⁺ = v/2 + p on [-1, 1], and the same figures for two steps


def whole(asked: Sequence[str], early: bool, top: str = "") -> Draft:
    """Lines: 1 target, 2 ball, 3 image, 4 invariant, 5 6 7 slope, miss and pair, 8 bound, and the same of one step."""
    d = Draft(claim("v/2 + p", "[-1, 1]", QUARTER, requires=asked, top=f"horizon = 2\n{top}"))
    d.range("target[v]", "0", "0")
    d.theorem("smaller-ball", "ball", [1], radius="1")
    d.range("image[v]", "-3/4", "3/4")
    d.theorem("invariant-region", "invariant", [1, 3])
    for on, k, e in (("", "1/4", "3/8"), ("@1", "1/2", "1/4"))[: 1 + early]:
        slope, miss = d.range(f"slope{on}[v,v]", k, k, [4]), d.range(f"target-miss{on}[v]", f"-{e}", e)
        pair = d.theorem("slope", f"slope{on}", [slope, miss], gain=k, residual=e)
        if not on:
            d.theorem("ultimate-bound", "bound[slope]", [4, pair], bound="1/2")
    return d


def in_the_region() -> None:
    """proofs/horizon.md (2a): no course; how far a step within a horizon leads is known from its own line alone."""
    for early in (True, False):
        asked = [("settles", "proved"), ("bound(v) <= 1/2", "proved"), ("steps(v, 1, 5/8) <= 2", "proved" if early else "undecided"), ("steps(v, 1, 5/8) < 2", "undecided"), ("steps(v, 0, 3/8) <= 9", "undecided")]
        judged(f"region, early {early}", whole([that for that, _ in asked], early).entries("region", asked))
    # from 0 to 1/4 after one step; more is claimed of it: e -> e/4 + 3/8 from 3/2 to 3/4, beyond the radius and in the region all the same
    for residual, to, verdict in (("1/4", "1/2", "proved"), ("3/2", "3/4", "proved"), ("3/2", hair("3/4", -1), "undecided")):
        asked = [(f"steps(v, 0, {to}) <= 2", verdict)]
        entries = whole([that for that, _ in asked], True).entries("region", asked)
        judged(f"region, a first step of {residual} to {to[:4]}", but(entries, "proof 10 concludes residual", residual))
    idle = whole([], True).entries("region", [("settles", "proved")])
    reject("region, a first step that serves nothing", idle, "proof", "line 9 serves no later line and no result")
    d = whole([], False)
    pair = pair_of(d, 1, "@1")
    d.theorem("course", "course", [2, pair])
    entries = but(d.entries("region", [("settles", "proved")]), "proof 8 uses", [2], "proof 8 concludes", {"lower": "1/2", "upper": "1/2"})
    entries = but(entries, "proof 10 uses", [9, 10])
    reject("region, a course of the ball", entries, "proof", "line 9 serves no later line and no result")


in_the_region()


# one state that leaves the ball of radius 5/8 for a step: v⁺ = v/4 + 2 max(v - 1/2, 0) + p, |p| <= 1/16; one step has k = 9/4, ε = 1/16,
# so it leads to 47/32 at most, and then the slope is 1/4: two have k = 9/16, ε = 5/64, three 9/64 and 21/256; 5/28 and 21/220 in the end

KINKED = "v/4 + 2*max(v - 1/2, 0) + p"
SIXTEENTH = 'p = ["-1/16", "1/16"]'
KINKS = {1: ("1/4", "9/4", "1/16"), 2: ("1/16", "9/16", "5/64"), 3: ("1/64", "9/64", "21/256")}
BOUNDS = {2: "5/28", 3: "21/220"}


def kinked(n: int = 2, asked: Sequence[str] = ("settles",), x: str = "47/32", early: Sequence[int] = (), gain: str = "9/4", top: str = "shrink = true", rest: str = "", residual: str = "1/16") -> Draft:
    """Lines: 1 target, 2 ball, 3 4 5 slope, miss and pair of the first step, of each other early one and of the horizon, the course, invariant, bound."""
    d = Draft(claim(KINKED, f'["-{x}", "{x}"]', SIXTEENTH, requires=asked, top=f"horizon = {n}\n{top}", rest=rest))
    d.range("target[v]", "0", "0")
    d.theorem("smaller-ball", "ball", [1], radius="5/8")
    pairs = []
    for j in (*(early or range(1, n)), n):
        on, (low, k, e) = f"@{j}" if j < n else "", KINKS[j]
        slope, miss = d.range(f"slope{on}[v,v]", low, k, [2]), d.range(f"target-miss{on}[v]", f"-{e}", e)
        pairs.append(d.theorem("slope", f"slope{on}", [slope, miss], gain=gain if j == 1 else k, residual=residual if j == 1 else e))
    d.theorem("course", "course", [2, *pairs[:-1]])
    invariant = d.theorem("invariant-ball", "invariant", [2, pairs[-1]])
    d.theorem("ultimate-bound", "bound[slope]", [invariant, pairs[-1]], bound=BOUNDS[n])
    return d


def beyond_the_ball() -> None:
    """proofs/horizon.md (2c): all steps on the way stay in the region; at its edge, and not a hair beyond."""
    asked = [
        ("settles", "proved"), ("bound(v) <= 5/28", "proved"), ("bound <= 5/28", "proved"), ("bound(v) < 5/28", "undecided"), ("gain <= 9/16", "proved"), ("radius >= 5/8", "proved"), ("push(v) >= 25/56", "undecided"), (f"push(v) >= 25/56 - 1{STEP}", "proved"),
        # from 1/4 to 5/8 after one step; then 9/16 5/8 + 5/64
        ("steps(v, 1/4, 55/128) <= 2", "proved"), ("steps(v, 1/4, 55/128) < 2", "undecided"), (f"steps(v, 1/4, 55/128 - 1{STEP}) <= 3", "undecided"), (f"steps(v, 1/4 + 1{STEP}, 5/8) <= 99", "undecided"), ("steps(v, 1/4, 5/8) <= 0", "proved"),
    ]
    for top in ("shrink = true", ""):
        found = [(that, v if top or that.startswith(("radius", "steps")) else "undecided") for that, v in asked]
        judged(f"kinked {top}", kinked(asked=[that for that, _ in found], top=top).entries("smaller ball", found))
    good = kinked().entries("smaller ball", [("settles", "proved")])
    for key in ("gain", "residual"):
        old = good["proof"][4]["concludes"][key]
        reject(f"kinked: {key} of the first step less", but(good, f"proof 4 concludes {key}", hair(old, -1)), "proof line 5", FEWER)
        reject(f"kinked: a step leaves the region by a hair, {key}", but(good, f"proof 4 concludes {key}", hair(old, 1)), "proof line 9", LEAVES + "v")
    for ends in (f'["-47/32 + 1{STEP}", "47/32"]', f'["-47/32", "47/32 - 1{STEP}"]'):
        changed = but(good, "claim text", good["claim"]["text"].replace('["-47/32", "47/32"]', ends))
        reject(f"kinked in {ends}", changed, "proof line 9", LEAVES + "v")
    about = but(good, "proof 0 concludes", {"lower": "1/8", "upper": "1/8"}, "claim text", claim("1/8 + (v - 1/8)/4 + 2*max(v - 5/8, 0) + p", '["-43/32", "51/32"]', SIXTEENTH, "1/8", top="horizon = 2\nshrink = true"))
    accept("kinked about 1/8", about)
    for ends in (f'["-43/32 + 1{STEP}", "51/32"]', f'["-43/32", "51/32 - 1{STEP}"]'):
        changed = but(about, "claim text", about["claim"]["text"].replace('["-43/32", "51/32"]', ends))
        reject(f"kinked about 1/8 in {ends}", changed, "proof line 9", LEAVES + "v")
    three = kinked(3).entries("smaller ball", [("settles", "proved")])
    accept("kinked, three steps", three)
    for n, (uses, reason) in enumerate((
        ([2, 5], "the first step does not keep the ball, and of later ones nothing is shown"), ([2, 8, 5], "course rests on slope slope@1, slope slope@2"), ([2, 8], "course rests on slope slope@1"), ([2, 5, 8, 11], "course rests on slope slope@1, slope slope@2"), ([2, 5, 11], "course rests on"),
        ([2], "course rests on slope slope@1"), ([], "course rests on slope slope@1"), ([2, 5, 5], "course rests on"), ([1, 5, 8], "a course rests on the ball, then gain and residual of steps on the way"), ([5, 5, 8], "a course rests on the ball"), ([2, 3, 8], "course rests on"),
    )):
        reject(f"kinked, three steps: course {n} {uses}", but(three, "proof 11 uses", uses), "proof line 12", reason)
    reject("kinked: a course by another name", but(three, "proof 11 proves", "ball"), "proof line 12", "course rests on")
    # of the second step more may be claimed as well, to the edge: 2 5/8 + 7/32
    for residual, ok in (("7/32", True), (hair("7/32", 1), False)):
        changed = but(three, "proof 7 concludes", {"gain": "2", "residual": residual})
        if ok:
            accept("kinked: the second step at the edge", changed)
        else:
            reject("kinked: the second step beyond the edge", changed, "proof line 12", LEAVES + "v")
    for rule, number, reason in (("invariant-ball", 13, "the gain refers to another set"), ("ultimate-bound", 14, "the gain refers to another set, or to fewer steps")):
        for pair in (5, 8):
            uses = [*three["proof"][number - 1]["uses"][:1], pair]
            reject(f"kinked: {rule} by fewer steps, {pair}", but(three, f"proof {number - 1} uses", uses), f"proof line {number}", reason)
    reject("kinked: invariant by a course", but(three, "proof 12 uses", [12, 11]), "proof line 13", "invariant rests on the ball, then a gain and residual")
    reject("kinked: bound on a course", but(three, "proof 13 uses", [12, 11]), "proof line 14", "uses: the invariant set, then gain and residual of a route")
    reject("kinked: no course", without(three, 12), "results", "results.set.kind: 'smaller ball' is claimed, None was derived")
    again = but(good, "proof", [*good["proof"], {**good["proof"][8]}])
    reject("kinked: two courses", again, "results", "course is proved more than once by course")


def courses_of_other_sets() -> None:
    """A course of steps from another set: of a course's own, larger ball, or of shells."""
    d = Draft(kinked(x="5/2").text)
    d.proof = kinked(x="5/2").proof[:9]  # up to the course
    slope = d.range("slope@1[v,v]", "1/4", "9/4", [9])
    pair = d.theorem("slope", "slope@1", [slope, 4], gain="9/4", residual="1/16")
    d.theorem("course", "course", [2, pair])
    reject("a course of steps from the course's own ball", d.entries(None, [("settles", "undecided")]), "proof line 12", "a course rests on the ball, then gain and residual of steps on the way")
    d = Draft(kinked(x="5/2").text)
    d.proof = kinked(x="5/2").proof[:8]
    d.line("shells", "shells", [2], {"radii": ["5/8"], "slope": "0"})
    slope = d.range("slope@1[v,v]", "1/4", "9/4", [9])
    pair = d.theorem("slope", "slope@1", [slope, 4], gain="9/4", residual="1/16")
    d.theorem("course", "course", [2, pair])
    reject("a course of steps from shells", d.entries(None, [("settles", "undecided")]), "proof line 12", "a course rests on the ball")
    d = Draft(kinked().text)
    d.proof = kinked().proof
    d.proof[5]["uses"] = [9]  # two steps from the course's ball
    d.proof.insert(5, d.proof.pop(8))
    for line in d.proof[6:]:
        line["uses"] = [{6: 7, 7: 8, 8: 9, 9: 6}.get(n, n) for n in line["uses"]]
    d.proof[6]["concludes"] = {"lower": "0", "upper": "81/16"}
    d.proof[8]["concludes"]["gain"] = "81/16"
    reject("invariant by two steps from elsewhere", d.entries("smaller ball", [("settles", "proved")]), "proof line 10", "the gain refers to another set")


def the_largest_ball_on_its_way() -> None:
    """v⁺ = v/8 - 2 max(v - 1/4, 0) on [-1, 1]: two steps contract by 15/64, and from 8/15 one leads to -1 at most; but the largest ball
    has 1 as well, from where a step leads to -11/8, so that the state is not always above -1."""
    asked = ["settles", "always(v >= -1)"]
    d = Draft(claim("v/8 - 2*max(v - 1/4, 0)", "[-1, 1]", "p = [0, 1]", requires=asked, top="horizon = 2"))
    d.range("target[v]", "0", "0")
    d.point("target[v]", {}, "0")
    d.theorem("largest-ball", "ball", [1, 2], radius="8/15", outer="1")
    d.point("image[v]", {"v": "1"}, "-11/8")
    pairs = []
    for on, low, high in (("@1", "-15/8", "1/8"), ("", "-15/64", "1/64")):
        slope, miss = d.range(f"slope{on}[v,v]", low, high, [3]), d.range(f"target-miss{on}[v]", "0", "0")
        pairs.append(d.theorem("slope", f"slope{on}", [slope, miss], gain=low[1:], residual="0"))
    d.theorem("course", "course", [3, pairs[0]])
    d.theorem("invariant-ball", "invariant", [3, pairs[1]])
    d.theorem("ultimate-bound", "bound[slope]", [12, pairs[1]], bound="0")
    d.range("require[2]", "0", "2", [11])
    reject("the largest ball, known from 8/15 to 1", d.entries("ball", [(that, "proved") for that in asked]), "proof line 11", LEAVES + "v")
    # where all of it is known to stay, an outer radius is no matter
    d = turning(2)
    d.proof[2]["concludes"]["radius"] = "3/4"
    d.proof[5]["concludes"] = {"lower": "-1/4", "upper": "1/4"}
    d.proof[6]["concludes"] = {"gain": "1/2", "residual": "7/16"}
    accept("the largest ball, known from 3/4: 7/8 and 15/16 stay", but(d.entries("ball", [("settles", "proved")]), "results requirements 0 verdict", "undecided"))
    reject("the largest ball: 1 leads beyond by a hair", but(d.entries("ball", [("settles", "undecided")]), "proof 6 concludes residual", hair("1/2", 1)), "proof line 11", LEAVES + "v")


def in_the_end() -> None:
    """proofs/horizon.md (3): a bound holds at all steps if k_1 β + ε_1 < R; at equality, at the ends of horizons alone."""
    asked = ["settles", "bound(v) <= 5/28", "bound <= 5/28", "bound(v) <= 5/8", "bound <= 5/8", f"bound(v) <= 5/8 - 1{STEP}", "sharp_bound(v) <= 5/8", "sharp_bound(v) <= 5/28", "push(v) > 0"]
    for gain, phased in (("63/20", False), (hair("63/20", -1), True)):
        verdicts = ["proved" if phased or n in (3, 4, 6) else "undecided" for n in range(len(asked))]
        entries = kinked(asked=asked, x="5/2", gain=gain).entries("smaller ball", list(zip(asked, verdicts, strict=True)))
        judged(f"in the end, {phased}", entries)
        most = "5/28" if phased else "5/8"
        if phased:
            figures("in the end, a push", entries, {"states v push": ("25/56", None)})
        figures(f"in the end, {phased}", entries, {"bound": (None, most), "states v bound": (None, most), "sharp_bound": (None, most), "routes slope bound": (None, most), "gain": (None, "9/16"), "residual": (None, "5/64")})
    # further: 7/2 5/28 + 1/16 = 11/16
    entries = kinked(asked=["bound(v) <= 11/16", f"bound(v) <= 11/16 - 1{STEP}"], x="5/2", gain="7/2").entries("smaller ball", [("bound(v) <= 11/16", "proved"), (f"bound(v) <= 11/16 - 1{STEP}", "undecided")])
    judged("beyond the ball in the end", entries)
    # a bound at the ends of horizons as large as the radius
    entries = kinked(asked=["settles"]).entries("smaller ball", [("settles", "undecided")])
    judged("a bound of the radius", but(entries, "proof 10 concludes bound", "5/8"))
    judged("a bound above what leads back", but(kinked(asked=["settles"]).entries("smaller ball", [("settles", "proved")]), "proof 10 concludes bound", hair("1/4", -1)))
    judged("a bound that leads to the radius", but(entries, "proof 10 concludes bound", "1/4"))
    # the second of three steps counts as well: 9/16 β + ... with more claimed of it
    for residual, verdict in ((hair("1/2", -1), "proved"), ("1/2", "undecided")):
        entries = kinked(3, x="5/2").entries("smaller ball", [("settles", verdict)])
        changed = but(entries, "proof 7 concludes", {"gain": "9/8", "residual": residual}, "proof 13 concludes bound", "1/9")
        judged(f"in the end, the second step {verdict}", changed)


def around_the_curve() -> None:
    """The error curve of two steps: shells of radii 1/4 and 5/8 lead to 3/32 and 23/128; in the end at 3/32."""
    for gain, sharp in (("9/4", "3/32"), ("6", "5/8"), (hair("6", -1), "3/32")):
        asked = [("settles", "undecided" if sharp == "5/8" else "proved"), (f"sharp_bound(v) <= {sharp}", "proved"), (f"sharp_bound(v) < {sharp}", "undecided"), ("steps(v, 0, 3/32) <= 99", "proved"), ("gain <= 9", "undecided")]
        d = Draft(kinked(asked=[that for that, _ in asked], x="4").text)
        d.proof = kinked(x="4", gain=gain).proof[:5]
        d.theorem("course", "course", [2, 5])
        d.line("shells", "shells", [2], {"radii": ["1/4", "5/8"], "slope": "1/2"})
        shells = [d.range(f"shell[{j}]", low, high, [7], ["d", "d"]) for j, (low, high) in enumerate((("-3/32", "3/32"), ("-15/128", "23/128")), 1)]
        shells.append(d.range("line[v]", "-5/16", "23/128", [7]))
        pair = d.theorem("curve", "curve", [7, *shells], gain="1/2", residual="23/128", sharp="3/32")
        d.theorem("invariant-ball", "invariant", [2, pair])
        entries = but(d.entries("smaller ball", asked), "results route", "curve", "results routes slope", GONE)
        judged(f"curve, {gain[:4]}", entries)
        figures(f"curve, {gain[:4]}", entries, {"sharp_bound": (None, sharp), "states v bound": (None, sharp)})
        for number, key, reason in ((8, "upper", WIDER), (9, "upper", WIDER), (10, "upper", WIDER), (11, "sharp", "sharp: less than what the shells show"), (11, "residual", "gain or residual: less than what the line shows")):
            old = entries["proof"][number - 1]["concludes"][key]
            reject(f"curve, {gain[:4]}: line {number} {key}", but(entries, f"proof {number - 1} concludes {key}", hair(old, -1)), f"proof line {number}", reason)


def names_of_fewer_steps() -> None:
    """Steps on the way are counted from 1, below the horizon, and only slopes and misses have them."""
    good = turning(3, early=(1, 2)).entries("ball", [("settles", "proved")])
    counted = "steps on the way are counted from 1 to the horizon, and below it"
    for on in ("@0", "@3", "@4", "@01", "@1 ", "@", "@-1", "@1@2", "@²", "@1.0", "1", "@one"):
        reason = counted if on not in ("@", "1") else "is no obligation of this claim"
        reject(f"slope{on}[v,v]", but(good, "proof 4 proves", f"slope{on}[v,v]"), "proof line 5", reason)
        reject(f"target-miss{on}[v]", but(good, "proof 5 proves", f"target-miss{on}[v]"), "proof line 6", reason if reason == counted else "needs a line that gives its set")
        reject(f"slope{on}", but(good, "proof 6 proves", f"slope{on}"), "proof line 7", "slope" + (on if on.startswith("@") else "") + " rests on range")
    for name in ("target@1[v]", "image@1[v]", "target-slope@1[v,p]", "split-slope@1[v,v]", "shell@1[1]", "line@1[v]", "require@1[1]", "slope[v,v]@1", "slope@1[v,p]", "slope@1[p,v]", "slope@1[v]", "target-miss@1[v,v]", "support@1[1]"):
        reject(f"an obligation {name}", but(good, "proof 4 proves", name), "proof line 5", "is no obligation of this claim")
    one = but(good, "claim text", good["claim"]["text"].replace("horizon = 3", "horizon = 1"))
    reject("slope@1 of a single step", one, "proof line 5", "@1: " + counted)
    two = but(good, "claim text", good["claim"]["text"].replace("horizon = 3", "horizon = 2"))
    reject("slope@2 of two steps", two, "proof line 8", "@2: " + counted)
    for n in (7, 10):  # each of its own steps
        for a, b in ((f"proof {n - 1} uses", [n - 2, 12]), (f"proof {n - 1} uses", [11, n - 1])):
            if max(b) < n:
                reject(f"pair {n} of {b}", but(good, a, b), f"proof line {n}", f"slope@{n // 3 - 1} rests on range")
    reject("a pair of fewer steps from those of another", but(good, "proof 9 uses", [5, 6]), "proof line 10", "slope@2 rests on range slope@2[v,v], range target-miss@2[v]")
    reject("a pair from those of fewer", but(good, "proof 12 uses", [8, 9]), "proof line 13", "slope rests on range slope[v,v], range target-miss[v]")
    for number, name in ((5, "slope@1[v,v]"), (6, "target-miss@1[v]")):
        at = {"v": "0", "p": "1/4"} if number == 5 else {"p": "1/4"}
        value = "-1/2" if number == 5 else "1/4"
        line = {"rule": "point", "proves": name, "uses": [3] if number == 5 else [], "witness": {"at": at, "bits": 0}, "concludes": {"lower": value, "upper": value}}
        reject(f"a point of {name} serves nothing", but(good, "proof", [*good["proof"], line]), "proof", "line 19 serves no later line")


beyond_the_ball()
courses_of_other_sets()
the_largest_ball_on_its_way()
in_the_end()
around_the_curve()
names_of_fewer_steps()


# what may stand in the steps of a horizon: a target that moves, values of a list, a library, a correction

def figured(text: str, of: Sequence[tuple[str, str, str, Sequence[int], Sequence[str]]], ball: tuple[str, str, str] = ("0", "0", "1"), data: dict[str, str] | None = None) -> Draft:
    """A target, a smaller ball and these ranges."""
    d = Draft(text, data)
    d.range("target[v]", ball[0], ball[1])
    d.theorem("smaller-ball", "ball", [1], radius=ball[2])
    for proves, low, high, uses, trees in of:
        d.range(proves, low, high, uses, trees)
    return d


def led(residual: str = "9/32", asked: Sequence[str] = ("settles",)) -> Draft:
    """v⁺ - c⁺ = -(v - c)/2 + p less what c moves, by 1/8 at most: two steps 1/4, 1/16 + 1/32 + 1/16 of the first movement, and 1/8 of the last."""
    text = claim("c - (v - c)/2 + p", '["-5/4", "3"]', SIXTEENTH + '\nc = { range = ["-1/4", "1/4"], held = true, change = "1/8" }', "c", asked, "horizon = 2")
    d = Draft(text)
    d.range("target[v]", "-1/4", "1/4")
    d.point("target[v]", {"c": "-1/4"}, "-1/4")
    d.theorem("largest-ball", "ball", [1, 2], radius="1", outer="1")
    d.point("image[v]", {"v": "3", "c": "-1/4", "p": "0"}, "-15/8")
    d.range("target-slope[v,c]", "1", "1")
    pairs = []
    for on, k, miss, e in (("@1", "-1/2", "1/16", "3/16"), ("", "1/4", "5/32", residual)):
        used = [d.range(f"slope{on}[v,v]", k, k, [3]), d.range(f"target-miss{on}[v]", f"-{miss}", miss, trees=["c"]), 5]
        pairs.append(d.theorem("slope", f"slope{on}", used, gain=k.strip("-"), residual=e))
    d.theorem("course", "course", [3, pairs[0]])
    d.theorem("invariant-ball", "invariant", [3, pairs[1]])
    d.theorem("ultimate-bound", "bound[slope]", [13, pairs[1]], bound="3/8")
    d.point("slope[v,v]", {"error(v)": "1", "c": "1/4", "c@2": "0", "p": "1/16", "p@2": "0"}, "1/4", uses=[3])
    d.point("target-miss[v]", {"c": "1/4", "c@2": "0", "p": "-1/16", "p@2": "1/16"}, "3/32")
    return d


def moving_targets() -> None:
    """proofs/horizon.md (1): what the target moves between the steps is taken off, and one movement counted."""
    good = led().entries("ball", [("settles", "proved")])
    accept("led", good)
    # (3/32 + 1/8)/(1 - 1/4), and 9/32 over the same
    figures("led", good, {"gain": ("1/4", "1/4"), "residual": ("7/32", "9/32"), "bound": ("7/24", "3/8"), "states v bound": (None, "3/8"), "states v push": ("5/8", None)})
    for number, key, by, reason in ((6, "lower", 1, WIDER), (7, "lower", 1, WIDER), (7, "upper", -1, WIDER), (8, "residual", -1, FEWER), (9, "upper", -1, WIDER), (10, "lower", 1, WIDER), (10, "upper", -1, WIDER), (11, "residual", -1, FEWER), (15, "lower", 1, WIDER), (16, "lower", 1, WIDER)):
        old = good["proof"][number - 1]["concludes"][key]
        reject(f"led: line {number} {key}", but(good, f"proof {number - 1} concludes {key}", hair(old, by)), f"proof line {number}", reason)
    for value in (hair("0", 1), hair("0", -1), "1/8"):
        reject(f"led: a point that moves by {value[:4]}", but(good, "proof 14 witness at c@2", value), "proof line 15", "at.c@2: outside the range")
    for key in ("c@2", "p@2"):
        reject(f"led: a point without {key}", but(good, f"proof 14 witness at {key}", GONE), "proof line 15", "at: one value for each variable of the obligation")
        reject(f"led: a point of one step with {key}", but(good, f"proof 3 witness at {key}", "0"), "proof line 4", "at: one value for each variable of the obligation")
    for uses in ([6, 7], [6, 7, 5, 5]):
        reject(f"led: the first step rests on {len(uses)}", but(good, "proof 7 uses", uses), "proof line 8", "slope@1 rests on range slope@1[v,v], range target-miss@1[v], range target-slope[v,c]")


def lists() -> None:
    """Values of a list are fresh at every step, held ones are not."""
    for held, trees, k, e in ((False, 4, "1/4", "3/4"), (True, 2, "1/4", "3/4")):
        text = claim("v/2 + w/2", "[-1, 1]", f"w = {{ values = [-1, 1]{', held = true' if held else ''} }}", top="horizon = 2")
        d = figured(text, [("image[v]", "-1", "1", [], ["d"] * 2)])
        d.theorem("invariant-region", "invariant", [1, 3])
        slope, miss = d.range("slope[v,v]", k, k, [4], ["d"] * trees), d.range("target-miss[v]", f"-{e}", e, trees=["d"] * trees)
        pair = d.theorem("slope", "slope", [slope, miss], gain=k, residual=e)
        d.theorem("ultimate-bound", "bound[slope]", [4, pair], bound="1")
        at = {"w": "#1"} if held else {"w": "#1", "w@2": "#1"}
        d.point("target-miss[v]", at, e)
        good = d.entries("region", [("settles", "undecided")])
        accept(f"a list, held {held}", good)
        figures(f"a list, held {held}", good, {"residual": (e, e)})
        for n in (trees - 1, trees + 1):
            reject(f"a list, held {held}, {n} trees", but(good, "proof 5 witness trees", ["d"] * n), "proof line 6", "trees")
    reject("a list that changes", but(good, "claim text", good["claim"]["text"].replace("held = true", "held = true, change = 1")), "claim", "horizon: a held quantity of a finite list that changes")
    for change in ('"1/2"', "0", "3"):  # of a range, by any amount; no more than its width
        text = claim("v/2 + w/2", "[-1, 1]", f"w = {{ range = [-1, 1], held = true, change = {change} }}", top="horizon = 2")
        far = str(Q(3, 4) + Q(1, 2) * min(Q(change.strip('"')), 2))
        d = figured(text, [("image[v]", "-1", "1", [], ["d"])])
        d.theorem("invariant-region", "invariant", [1, 3])
        used = [d.range("slope[v,v]", "1/4", "1/4", [4]), d.range("target-miss[v]", f"-{far}", far)]
        d.theorem("slope", "slope", used, gain="1/4", residual=far)
        good = d.entries("region", [("settles", "undecided")])
        accept(f"a range that changes by {change}", good)
        for end, by in (("lower", 1), ("upper", -1)):
            reject(f"a range that changes by {change}: {end}", but(good, f"proof 5 concludes {end}", hair(good["proof"][5]["concludes"][end], by)), "proof line 6", WIDER)


def libraries() -> None:
    """A library is read where the step before leads, clipped to the region; without one nothing is clipped."""
    rest = '[library]\nfile = "t.csv"\nat = { v_node = "v" }'
    table = "v_node,r\n-1,-0.5\n0,0\n1,0.5\n"
    # v - r leads to v/2, but may seem to lead to 3/2, beyond the grid: where it is clipped the slope is 1/2, or 0
    text = claim("v - r + p", "[-1, 1]", QUARTER, top="horizon = 2", rest=rest)
    d = figured(text, [("image[v]", "-3/4", "3/4", [], ["c", "c"])], data={"t.csv": table})
    d.theorem("invariant-region", "invariant", [1, 3])
    used = [d.range("slope[v,v]", "-1/4", "1/2", [4], ["d", "d"]), d.range("target-miss[v]", "-5/8", "5/8")]
    d.theorem("slope", "slope", used, gain="1/2", residual="5/8")
    good = d.entries("region", [("settles", "undecided")])
    accept("a library on the way", good)
    for number, end, by in ((5, "lower", 1), (5, "upper", -1), (6, "lower", 1), (6, "upper", -1)):
        reject(f"a library on the way: line {number} {end}", but(good, f"proof {number - 1} concludes {end}", hair(good["proof"][number - 1]["concludes"][end], by)), f"proof line {number}", WIDER)


def corrections() -> None:
    """proofs/horizon.md (1): the correction is 0 in every step; v + f + p with f = -v/2, two steps keep v/4."""
    text = claim("v + f + p", "[-1, 1]", QUARTER, top='horizon = 2\ncorrection = ["f"]', rest='[define]\nf = "-v/2"')
    d = figured(text, [("image[v]", "-3/4", "3/4", [], ["c"])])
    d.theorem("invariant-region", "invariant", [1, 3])
    used = [d.range("split-slope[v,v]", "1/4", "1/4", [4]), d.range("split-residual[v]", "-3/8", "3/8", [4], ["c"])]
    pair = d.theorem("split", "split", used, gain="1/4", residual="3/8")
    d.theorem("ultimate-bound", "bound[split]", [4, pair], bound="1/2")
    good = d.entries("region", [("settles", "proved")])
    accept("a correction", good)
    for number, key, by, reason in ((5, "lower", 1, WIDER), (5, "upper", -1, WIDER), (6, "lower", 1, WIDER), (6, "upper", -1, WIDER), (7, "gain", -1, FEWER), (7, "residual", -1, FEWER)):
        old = good["proof"][number - 1]["concludes"][key]
        reject(f"a correction: line {number} {key}", but(good, f"proof {number - 1} concludes {key}", hair(old, by)), f"proof line {number}", reason)


def requirements() -> None:
    """proofs/horizon.md (2c): ranges are taken over all that a step may start from, points from the set."""
    asked = ["settles", "value(v) <= 47/32", f"value(v) <= 47/32 - 1{STEP}", "always(v >= -47/32)", "value(p) <= 1/16", "radius(v) >= 5/8"]
    for top in ("shrink = true", ""):
        # a point of a set refutes nothing where any smaller set would do; where it is not the set asked for, nothing is proved either
        verdicts = ["proved", "proved", "undecided", "proved", "proved", "proved"] if top else ["undecided", "undecided", "undecided", "undecided", "proved", "proved"]
        d = kinked(asked=asked, top=top)
        for n, (low, high) in ((2, ("-47/32", "47/32")), (3, ("-47/32", "47/32")), (4, ("0", "47/16"))):
            d.range(f"require[{n}]", low, high, [9])
        d.point("require[2]", {"v": "5/8"}, "5/8", uses=[2])
        d.range("require[5]", "-1/16", "1/16", [9])
        good = d.entries("smaller ball", list(zip(asked, verdicts, strict=True)))
        judged(f"ranges {top}", good)
        for n in (12, 13, 14, 16):
            reject(f"ranges {top}: line {n} over the set alone", but(good, f"proof {n - 1} uses", [2]), "results", f"require[{n - 10 if n < 16 else 5}]: over another set than the gain")
        reject(f"ranges {top}: a point from elsewhere", but(good, "proof 14 uses", [9]), "results", "require[2]: a point of another set")
        reject(f"ranges {top}: a point beyond the set", but(good, "proof 14 witness at v", hair("5/8", 1)), "proof line 15", "at.v: outside the range")
        for number, end, by in ((12, "lower", 1), (12, "upper", -1), (14, "lower", 1)):
            reject(f"ranges {top}: line {number} {end}", but(good, f"proof {number - 1} concludes {end}", hair(good["proof"][number - 1]["concludes"][end], by)), f"proof line {number}", WIDER)
    d = kinked(asked=["value(v) <= 47/32"], x="5/2")
    d.range("require[1]", "-47/32", "47/32", [9])
    judged("ranges within the region", d.entries("smaller ball", [("value(v) <= 47/32", "proved")]))
    # kept by the first step: over the set itself, by whichever line gives it
    for on in (3, 11, 12):
        d = turning(2, ["value(v) <= 1", "value(v) < 1"])
        d.range("require[1]", "-1", "1", [on])
        d.range("require[2]", "-1", "1", [on])
        d.point("require[2]", {"v": "1"}, "1", uses=[on])
        judged(f"ranges over the ball, {on}", d.entries("ball", [("value(v) <= 1", "proved"), ("value(v) < 1", "refuted")]))
    # without a course nothing is known of points, and nothing of the set
    d = turning(2, ["value(v) < 1", "value(p) <= 1/4"])
    d.range("require[2]", "-1/4", "1/4", [3])
    gone = without(d.entries(None, [("value(v) < 1", "undecided"), ("value(p) <= 1/4", "proved")]), 2, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15)
    gone = but(gone, "proof 1", {**gone["proof"][1], "rule": "smaller-ball", "uses": [1], "concludes": {"radius": "1"}})
    judged("without a course", gone)


moving_targets()
lists()
libraries()
corrections()
requirements()

# two states, x⁺ = 2y + p, y⁺ = x/8 + q, |p| <= 1/8, |q| <= 1/16: two steps are x/4 + 2q + p', y/4 + p/8 + q'; in the end |x| <= 1/3, |y| <= 5/48

CROSSED = ("2*y + p", "x/8 + q")
NOISE = 'p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]'
SQUARE, FLAT = ([["1", "0"], ["0", "1"]],) * 2, ([["1", "0"], ["0", "4"]], [["1", "0"], ["0", "1/4"]])


def weighed(y: str) -> dict[str, Any]:
    return {"kind": "box", "weights": {"x": "1", "y": y}}


def square(radius: str = "1", ends: tuple[str, str] = ('["-17/8", "17/8"]', '["-17/8", "17/8"]'), asked: Sequence[str] = ("settles",), top: str = "shrink = true", compared: bool = True) -> Lines:
    """In the largest of |x|, |y| a step has k = 2, ε = 1/8, two have 1/4 and 1/4. Lines: 1 metric, 2 3 targets, 4 ball, 5 6 7 slopes, misses and pair of the
    first step, 8 9 10 of the horizon, 11 course, 12 invariant, 13 bound, 14 15 entries, 16 comparison."""
    d = Lines(claim_of_two(*CROSSED, ends=ends, uncertain=NOISE, asked=asked, top=f"horizon = 2\n{top}", rest="[metric]\nkind = 'box'"))
    d.metric("box", *SQUARE)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.theorem("smaller-ball", "ball", [1, 2, 3], radius=radius)
    return steps_in(d, 4, ("2", "1/8", "1/4", "1/4"), "1/3", compared)


def flat(asked: Sequence[str] = ("settles",)) -> Lines:
    """In the largest of |x|, 4|y| a step has k = 1/2, ε = 1/4: it keeps the largest ball, of radius 1/2; two have 1/4 and 5/16.
    Lines: 1 metric, 2 3 targets, 4 point, 5 ball, 6 escape, 7 to 18 as 5 to 16 above, 19 20 stretches."""
    d = Lines(claim_of_two(*CROSSED, ends=('["-1/2", "1/2"]', "[-2, 2]"), uncertain=NOISE, asked=asked, top="horizon = 2", rest="[metric]\nweights = { y = 4 }"))
    d.metric("box", *FLAT)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.point("target[x]", {}, "0")
    d.theorem("largest-ball", "ball", [1, 2, 3, 4], radius="1/2", outer="1/2")
    d.point("image[x]", {"y": "2", "p": "0"}, "4")
    steps_in(d, 5, ("1/2", "1/4", "1/4", "5/16"), "5/12", True)
    d.stretch("slopes", {"x": "0", "y": "0", "p": "0", "p@2": "0", "q": "0", "q@2": "0"}, ["1", "0"], "1/4", [5])
    d.stretch("misses", {"p": "1/8", "p@2": "0", "q": "0", "q@2": "1/16"}, ["1"], "5/16", [5])
    return d


def steps_in(d: Lines, ball: int, norms: Sequence[str], bound: str, compared: bool) -> Lines:
    pairs = []
    for on, k, e in (("@1", *norms[:2]), ("", *norms[2:])):
        used = [d.matrix(f"slopes{on}", k, [ball]), d.matrix(f"misses{on}", e, [ball])]
        pairs.append(d.theorem("slope", f"slope{on}", used, gain=k, residual=e))
    d.theorem("course", "course", [ball, pairs[0]])
    invariant = d.theorem("invariant-ball", "invariant", [ball, pairs[1]])
    d.theorem("ultimate-bound", "bound[slope]", [invariant, pairs[1]], bound=bound)
    if compared:
        used = [d.table("slopes", ["1/4", "0", "0", "1/4"], [ball]), d.table("misses", ["1/4", "5/64"], [ball])]
        d.compared([invariant, *used], ["1", "1"], ["1/3", "5/48"], "1/3", "5/48")
    return d


def two_states() -> None:
    """proofs/horizon.md (2b) in a norm: bounds by comparison of two steps hold at all of them."""
    asked = [
        ("settles", "proved"), ("gain <= 1/4", "proved"), ("gain < 1/4", "refuted"), ("residual <= 5/16", "proved"), ("residual < 5/16", "refuted"), ("bound <= 5/12", "proved"), ("bound(x) <= 1/3", "proved"), ("bound(x) < 1/3", "undecided"), ("bound(y) <= 5/48", "proved"), ("bound(y) < 5/48", "undecided"),
        ("push(x) >= 1/12", "undecided"), (f"push(x) >= 1/12 - 1{STEP}", "proved"), ("radius(y) >= 1/8", "proved"),
        # from 1/2 to 1/2 after one step; 1/4 1/2 + 5/16 = 7/16 after two
        ("steps(x, 1/2, 1/2) <= 0", "proved"), ("steps(x, 1/2, 7/16) <= 2", "proved"), (f"steps(x, 1/2, 7/16 - 1{STEP}) <= 3", "undecided"), ("steps(y, 1/8, 7/64) <= 2", "proved"), ("steps(x, 0, 5/12) < 1", "proved"), (f"steps(x, 1/2 + 1{STEP}, 1/2) <= 9", "undecided"),
    ]
    judged("flat", flat([that for that, _ in asked]).found("ball", asked, weighed("4")))
    good = flat().found("ball", [("settles", "proved")], weighed("4"))
    figures("flat", good, {
        "gain": ("1/4", "1/4"), "residual": ("5/16", "5/16"), "bound": ("5/12", "5/12"), "radius": ("1/2", "1/2"), "states x bound": (None, "1/3"), "states y bound": (None, "5/48"), "states x push": ("1/12", None), "states y push": ("1/48", None),
    })
    for number, key, by, reason in (
        (7, "norm", -1, "slopes@1: a leaf is not shown"), (8, "norm", -1, "misses@1: a leaf is not shown"), (9, "gain", -1, FEWER), (9, "residual", -1, FEWER), (10, "norm", -1, "slopes: a leaf is not shown"), (11, "norm", -1, "misses: a leaf is not shown"), (12, "gain", -1, FEWER), (12, "residual", -1, FEWER), (15, "bound", -1, "bound: less"),
        (16, "1,1", -1, "slopes: entry 1,1"), (16, "1,2", -1, "slopes: entry 1,2"), (17, "1,1", -1, "misses: entry 1,1"), (17, "2,1", -1, "misses: entry 2,1"), (18, "x", -1, "x: less than"), (18, "y", -1, "y: less than"), (19, "lower", 1, "slopes: the direction"), (20, "lower", 1, "misses: the direction"),
    ):
        old = good["proof"][number - 1]["concludes"][key]
        reject(f"flat: line {number} {key}", but(good, f"proof {number - 1} concludes {key}", hair(old, by)), f"proof line {number}", reason)
    for key, old in (("gain", "1/2"), ("residual", "1/4")):
        reject(f"flat: the first step does not keep the ball, {key}", but(good, f"proof 8 concludes {key}", hair(old, 1)), "proof line 13", LEAVES + "x")
    for on in ("@0", "@2", "@01", "@", "@1@2", "2"):
        for number, kind in ((7, "slopes"), (8, "misses")):
            reason = "a matrix proves slopes or misses, or these after fewer steps" if on == "2" else "is no obligation of this claim" if on == "@" else "steps on the way are counted from 1"
            reject(f"flat: {kind}{on}", but(good, f"proof {number - 1} proves", f"{kind}{on}"), f"proof line {number}", reason)
    uses: Sequence[int]
    for number, uses, reason in (
        (9, [7, 11], "slope@1 rests on matrix slopes@1, matrix misses@1"), (9, [8, 7], "slope@1 rests on"), (12, [7, 8], "slope rests on matrix slopes, matrix misses"), (14, [5, 9], "the gain refers to another set"), (15, [14, 9], "the gain refers to another set, or to fewer steps"),
    ):
        if max(uses) < number:
            reject(f"flat: line {number} uses {uses}", but(good, f"proof {number - 1} uses", uses), f"proof line {number}", reason)
    for number, kind in ((16, "slopes"), (17, "misses")):
        wide = {f"{sign}{key}": f"{sign}2" for key in (("1,1", "1,2", "2,1", "2,2") if kind == "slopes" else ("1,1", "2,1")) for sign in ("", "-")}
        early = but(good, f"proof {number - 1} proves", f"{kind}@1", f"proof {number - 1} concludes", wide)
        reject(f"flat: a comparison of {kind} of fewer steps", early, "proof line 18", "componentwise rests on entries slopes, entries misses")
    rows = but(good, "proof 13", {"rule": "invariant-rows", "proves": "invariant", "uses": [5, 16, 17], "witness": {}, "concludes": {}})
    reject("flat: rows of entries yet to come", rows, "proof line 14", "uses: earlier line numbers only")


def beyond_a_box() -> None:
    """proofs/horizon.md (2c), (3) in a norm: 2 + 1/8 is the edge of the region; in the end 2/3 + 1/8 = 19/24 < 1, and at the radius itself."""
    good = square().found("smaller ball", [("settles", "proved")], weighed("1"))
    figures("square", good, {"bound": (None, "1/3"), "states x bound": (None, "1/3"), "states y bound": (None, "5/48"), "states x push": ("2/3", None)})
    for key in ("gain", "residual"):
        old = good["proof"][6]["concludes"][key]
        reject(f"square: {key} less", but(good, f"proof 6 concludes {key}", hair(old, -1)), "proof line 7", FEWER)
        reject(f"square: a step leaves the region, {key}", but(good, f"proof 6 concludes {key}", hair(old, 1)), "proof line 11", LEAVES + "x")
    for s, ends in (("x", ('["-17/8", "9"]', "[-9, 9]")), ("x", ('["-9", "17/8"]', "[-9, 9]")), ("y", ("[-9, 9]", '["-17/8", "9"]')), ("y", ("[-9, 9]", '["-9", "17/8"]'))):
        edge = square(ends=ends).found("smaller ball", [("settles", "proved")], weighed("1"))
        accept(f"square: the edge of {s} in {ends}", edge)
        for sign in ("", "-"):
            if f'"{sign}17/8"' in edge["claim"]["text"]:
                changed = but(edge, "claim text", edge["claim"]["text"].replace(f'"{sign}17/8"', f'"{sign}(17/8 - 1{STEP})"'))
                reject(f"square: beyond the edge of {s} in {ends}", changed, "proof line 11", LEAVES + s)
    reject("square: no course", without(good, 11), "results", "results.set.kind: 'smaller ball' is claimed, None was derived")
    for radius, phased in (("19/24", False), (hair("19/24", 1), True), ("1/2", False)):
        for compared in (True, False):
            asked = ["settles", "bound(x) <= 1/3", "bound(x) <= 19/24", f"bound(x) <= 19/24 - 1{STEP}", "bound(y) <= 5/48", "bound(y) <= 1/3", "bound(y) <= 19/24", f"bound(y) <= 19/24 - 1{STEP}", "bound <= 1/3", "bound <= 19/24", "push(x) > 0"]
            verdicts = ["proved" if (phased and not (n == 4 and not compared)) or n in (2, 6, 9) else "undecided" for n in range(len(asked))]
            d = square(radius, asked=asked, compared=compared)
            entries = d.found("smaller ball", list(zip(asked, verdicts, strict=True)), weighed("1"))
            judged(f"square of {radius[:6]} {len(radius)}, compared {compared}", entries)
    # bounds by states alone: the largest of them is what a step leads on from
    for b, phased in (("7/16", False), (hair("7/16", -1), True)):
        asked = ["settles", f"bound(x) <= {b}", "bound(x) <= 1", f"bound(x) <= 1 - 2{STEP}", "bound(y) <= 5/48", f"bound(y) <= 1 - 2{STEP}", "bound(y) <= 1"]
        verdicts = ["proved" if phased or n in (2, 6) else "undecided" for n in range(len(asked))]
        entries = without(square(asked=asked).found("smaller ball", list(zip(asked, verdicts, strict=True)), weighed("1")), 13)
        entries = but(entries, "proof 14 witness b", [b, "5/48"], "proof 14 concludes x", b)
        judged(f"square by states, {phased}", entries)


def rounds() -> None:
    """proofs/horizon.md (5): a round has whole horizons, contracts by the gain of each, and shows the errors at their ends."""
    up, still = {"p": "1/8", "q": "1/16"}, {"p": "0", "q": "0"}
    found: dict[str, tuple[tuple[str, str], list[dict[str, str]], tuple[str, str]]] = {
        "at rest": (("1/3", "5/48"), [up] * 2, ("1/3", "5/48")),
        # from 0: to (1/4, 5/64), 5/16 in the norm, over 3/4; after four (5/16, 25/256), 25/64 over 15/16, with 1/4 on the way
        "near": (("0", "0"), [up] * 2, ("-5/12", "-5/48")), "near, four steps": (("0", "0"), [up] * 4, ("-1/6", str(Q(5, 64) - Q(5, 48)))),
        # x: 0, 1/3, 0; y: 1/3 (p/8 + q')... = 5/48 at the ends, 0 between
        "alternating": (("0", "5/48"), [{"p": "1/8", "q": "0"}, {"p": "0", "q": "1/16"}], ("0", "5/48")), "the other way": (("1/3", "0"), [{"p": "0", "q": "1/16"}, {"p": "1/8", "q": "0"}], ("1/3", "0")),
    }
    for name, (start, steps, far) in found.items():
        d = flat()
        d.line("periodic", "periodic", [14, 12], {"bits": 0, "held": {}, "start": dict(zip("xy", start, strict=True)), "steps": steps}, x=far[0], y=far[1])
        good = d.found("ball", [("settles", "proved")], weighed("4"))
        accept(f"round {name}", good)
        for s, x in zip("xy", far, strict=True):
            reject(f"round {name}: {s} farther", but(good, f"proof 20 concludes {s}", hair(x, 1)), "proof line 21", f"{s}: more than what the orbit shows")
        for n in (1, 3):
            reject(f"round {name}: {n} steps", but(good, "proof 20 witness steps", [still] * n), "proof line 21", "steps: a whole number of horizons")
        reject(f"round {name}: by the gain of one step", but(good, "proof 20 uses", [14, 9]), "proof line 21", "a periodic orbit rests on the invariant set, and the gain on it")


def elsewhere() -> None:
    """A requirement over ranges of its own has a course of its own."""
    wanted = "radius(x) >= 1/2"
    text = claim_of_two(*CROSSED, ends=('["-1/2", "1/2"]', "[-2, 2]"), uncertain=NOISE, asked=["settles", wanted], top="horizon = 2", rest="[metric]\nweights = { y = 4 }") + 'over = { p = ["-1/8", "1/8"] }\n'
    d = flat()
    d.text = text
    first, d.prefix = len(d.proof), "over[2]:"
    own = flat().proof[:14]
    for line in own:
        d.line(line["rule"], line["proves"], [n + first for n in line["uses"]], line["witness"], **line["concludes"])
    good = without(d.found("ball", [("settles", "proved"), (wanted, "proved")], weighed("4")), first + 6)
    judged("elsewhere", good)
    at = next(n for n, line in enumerate(good["proof"]) if line["proves"] == "over[2]:course")
    for n, uses in enumerate(([5, 9], [first + 5, 9], [5, good["proof"][at]["uses"][1]])):
        reject(f"elsewhere: a course of other ranges {n}", but(good, f"proof {at} uses", uses), f"proof line {at + 1}", "uses: lines about other ranges")
    reject("elsewhere: no course", without(good, at + 1), "results", "[2].verdict: proved is claimed, undecided was derived")
    reject("elsewhere: the claim's own course alone", but(without(good, at + 1), "results requirements 1 verdict", "undecided"), "proof", "serves no later line and no result")


@unit
def what_is_put_together(checker: Any) -> None:
    """Names at later steps; nothing is clipped in closed form, and in a stance it is."""
    text = claim("v/2 + w + c + u", "[-1, 1]", 'w = [0, 1]\nc = { range = [0, 1], held = true, change = "1/2" }\nu = { range = [0, 1], held = true }', "c/4", top="horizon = 3")
    d = derivation(checker, text)
    domain = checker.derive.Domain(False, Q(0), (Q(0), Q(0)))
    met = {name: [v.name for v in d.meaning(name, domain).variables] for name in ("image[v]", "slope@1[v,v]", "slope@2[v,v]", "slope[v,v]", "target-miss@1[v]", "target-miss[v]")}
    assert met["image[v]"] == ["c", "u", "v", "w"] == met["slope@1[v,v]"]
    assert met["slope@2[v,v]"] == ["c", "c@2", "u", "v", "w", "w@2"]
    assert met["slope[v,v]"] == ["c", "c@2", "c@3", "u", "v", "w", "w@2", "w@3"]
    assert met["target-miss@1[v]"] == ["c", "u", "w"]
    ends = {v.name: (v.cells, v.inside) for v in d.meaning("slope[v,v]", domain).variables}
    assert ends["c"] == (((Q(0), Q(1)),), (Q(0), Q(1))) and ends["c@3"] == (((Q(-1, 2), Q(1, 2)),), (Q(0), Q(0))) and ends["w@3"] == (((Q(0), Q(1)),), (Q(0), Q(1)))
    terms = d.terms.all
    assert not any(op in ("min", "max") for op, _, _ in terms)
    x = d.terms.put("variable", (), "x")
    assert d.stays(x, "v") == x
    moving = derivation(checker, "horizon = 2\n" + stance())
    y = moving.stays(moving.terms.put("variable", (), "y"), "v")
    op, (inner, high), _ = moving.terms.all[y]
    assert op == "min" and moving.terms.all[inner][0] == "max"
    low, most = moving.region("v")[0]
    assert moving.terms.all[high][2] == most and moving.terms.all[moving.terms.all[inner][1][1]][2] == low


@unit
def what_is_not_put_together(checker: Any) -> None:
    """Signals within a stance, and held values of a list that change: of single steps alone."""
    gust = stance(rates='x = "xd"\nxd = "16*x + gust"', uncertain="T = [0.4, 0.4]\nloss = [0, 0]\nv_cmd = { range = [0.5, 0.5], held = true }\ngust = { range = [0, 1], within = true }")
    listed = claim("v/2 + w", "[-1, 1]", "w = { values = [0, 1], held = true, change = 1 }")
    for text, reason in ((gust, "a signal within the stance is followed for one step at a time only"), (listed, "a held quantity of a finite list that changes is followed for one step")):
        assert derivation(checker, text)
        assert derivation(checker, "horizon = 1\n" + text)
        with refuses(checker.calculus.Unprovable, f"horizon: {reason}"):
            derivation(checker, "horizon = 2\n" + text)
    for text in (listed.replace(", change = 1", ""), listed.replace("values = [0, 1]", "range = [0, 1]"), stance()):
        assert derivation(checker, "horizon = 2\n" + text)


@unit
def what_has_to_stay_positive(checker: Any) -> None:
    """Throughout the stances of all steps on the way, not of those from the set alone."""
    results = checker.results
    ball = checker.derive.Domain(True, Q(1), (Q(0), Q(0)))
    wider = checker.derive.Domain(True, Q(2), (Q(0), Q(0)))
    for domain, lower, ok in ((wider, Q(1), True), (wider, Q("1" + STEP), True), (ball, Q(1), False), (None, Q(1), False), (wider, Q(0), False)):
        found = object.__new__(results.Results)
        line = results.Line("range", "support[1]", (), {"lower": lower, "upper": Q(2)}, domain)
        found.variant, found.needed, found.domain, found.way, found.proof = results.OWN, set(), ball, wider, checker.rules.Proof(None, {1: line})
        assert found.above(1) is ok and found.above(2) is False


two_states()
beyond_a_box()
rounds()
elsewhere()
# fmt: on


def test_horizon_boundaries() -> None:
    all_hold(CASES)
