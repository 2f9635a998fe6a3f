"""Polytopes that trajectories are drawn into, at exact equality (proofs/polytope.md)."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_absorbed_boundaries import PLAIN, along, bent, on_region, table
from tests.checker.test_boundaries import BASE, GONE, Case, Entries, Question, but, sealed
from tests.checker.test_several_boundaries import ONE, Lines, claim, hair, without

CASES: dict[str, Question] = {}


def accept(name: str, entries: Entries) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "valid")


def reject(name: str, entries: Entries, place: str, reason: str) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "invalid", place, reason)


# tables of numbers: one line each reads better
# fmt: off

LED, RESTS = "a leaf is not shown to lead into the polytope", "attracting rests on the invariant set, then a bound, then how targets move"
EMPTY, OUTSIDE = "the polytope is empty, or unbounded", "a vertex is not shown to lie in the set"


def drawn(d: Lines, uses: Sequence[int], low: Sequence[str], high: Sequence[str], x: str, y: str, rows: Any = ONE, trees: Sequence[str] = ("d",)) -> int:
    witness = {"bits": 0, "trees": list(trees), "rows": rows, "low": list(low), "high": list(high)}
    return d.line("attracting", "attracting", uses, witness, x=x, y=y)


def by_hair(name: str, entries: Entries, line: int, key: str, by: int) -> None:
    """Every end of a polytope is exact: a hair further in is refused."""
    for n, x in enumerate(entries["proof"][line - 1]["witness"][key]):
        ends = list(entries["proof"][line - 1]["witness"][key])
        ends[n] = hair(x, by)
        reject(f"{name}: {key} {n}", but(entries, f"proof {line - 1} witness {key}", ends), f"proof line {line}", LED)


def asked(x: str, y: str) -> list[tuple[str, str]]:
    return [(f"bound(x) <= {x}", "proved"), (f"bound(x) < {x}", "undecided"), (f"bound(y) <= {y}", "proved"), (f"bound(y) < {y}", "undecided")]


# x/2 + y/4 + p and y/4 + q: 1/12 of y in the end, and 2 (1/48 + 1/8) of x

def boxes() -> None:
    want = asked("7/24", "1/12")
    d = on_region("x/2 + y/4 + p", "y/4 + q", "3/4", "1/8", [("-7/8", "7/8"), ("-5/16", "5/16")], [that for that, _ in want])
    drawn(d, [7, 11], ["-7/24", "-1/12"], ["7/24", "1/12"], "7/24", "1/12")
    good = d.found("region", want, PLAIN)
    accept("a box", good)
    full = but(good, "results states x bound", {"lower": None, "upper": "7/24"}, "results states y bound", {"lower": None, "upper": "1/12"})
    accept("a box, bounds", full)
    for s, value in (("x", "7/24"), ("y", "1/12")):
        reject(f"a box, bound of {s}", but(full, f"results states {s} bound upper", hair(value, -1)), "results", "upper: more is claimed")
        reject(f"a box, {s} concluded", but(good, f"proof 11 concludes {s}", hair(value, -1)), "proof line 12", f"{s}: less than the polytope reaches")
    for n, (that, v) in enumerate(want):
        for other in sorted({"proved", "refuted"} - {v}):
            reject(f"a box: {that} {other}", but(good, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {v} was derived")
    by_hair("a box", good, 12, "low", 1)
    by_hair("a box", good, 12, "high", -1)
    few, concludes = "rows: at least as many as states, with one number for each state", "concludes: a bound for each state"
    for n, (key, value, reason) in enumerate((
        ("uses", [], RESTS), ("uses", [7], RESTS), ("uses", [11, 7], RESTS), ("uses", [4, 11], RESTS), ("uses", [7, 10], RESTS), ("uses", [7, 8], RESTS), ("uses", [7, 11, 2], RESTS), ("uses", [7, 7, 11], RESTS), ("proves", "absorbed", RESTS), ("proves", "invariant", RESTS),
        ("witness rows", [["1", "0"]], "low: a list of 1 numbers"), ("witness rows", [], "low: a list of 0 numbers"), ("witness rows", "", "rows: a list of rows"), ("witness", {"bits": 0, "trees": ["d"], "rows": [["1", "0"]], "low": ["-1"], "high": ["1"]}, few), ("witness rows", [["1", "0"], ["0"]], few), ("witness rows", [["1", "0"], ["0", "1", "0"]], few), ("witness rows", [["1", "0"]] * 2, EMPTY), ("witness rows", [["1", "2"], ["2", "4"]], EMPTY), ("witness rows", [["0", "0"]] * 2, EMPTY),
        ("witness low", ["-7/24"], "low: a list of 2 numbers"), ("witness high", ["1", "1", "1"], "high: a list of 2 numbers"), ("witness low", ["1/2", "-1/12"], EMPTY), ("witness high", ["7/24", hair("-1/12", -1)], EMPTY),
        ("concludes x", GONE, concludes), ("concludes z", "1", concludes),
    )):
        reject(f"a box, {n} {key}", but(good, f"proof 11 {key}", value), "proof line 12", reason)
    for n, (rows, reason) in enumerate((([["1", "0"]] * 64 + [["0", "1"]], few), ([["1", "0"]] * 63 + [["0", "1"]], ""))):
        # 64 rows: 2016 pairs, 4 sides each
        witness = {"bits": 0, "trees": ["d"], "rows": rows, "low": ["-7/24"] * (len(rows) - 1) + ["-1/12"], "high": ["7/24"] * (len(rows) - 1) + ["1/12"]}
        entries = but(good, "proof 11 witness", witness)
        accept(f"many rows, {n}", entries) if not reason else reject(f"many rows, {n}", entries, "proof line 12", reason)
    # no wider than the region: x may be as wide as that, as only y is wanted
    for end, inside in (("1", True), (hair("1", 1), False)):
        for side, (low, high) in enumerate(((f"-{end}", "1"), ("-1", end))):
            entries = but(good, "proof 11 witness low", [low, "-1/12"], "proof 11 witness high", [high, "1/12"], "proof 11 concludes x", "2", "results requirements 0 verdict", "undecided")
            accept(f"as wide as the region, {side}", entries) if inside else reject(f"wider than the region, {side}", entries, "proof line 12", OUTSIDE)
    # comparisons contract as well; what is proved of another set does not
    d = on_region("x/2 + y/4 + p", "y/4 + q", "3/4", "1/8", [("-7/8", "7/8"), ("-5/16", "5/16")], [that for that, _ in want])
    table(d, "slopes", ["1/2", "1/4", "0", "1/4"], ["1/2", "1/4", "0", "1/4"], [7])
    table(d, "misses", ["1/8", "1/16"], ["-1/8", "-1/16"], [7])
    d.line("componentwise", "componentwise", [7, 12, 13], {"about": ["0", "0"], "p": ["1", "1"], "b": ["1/2", "1/12"]}, x="1/2", y="1/12")
    drawn(d, [7, 14], ["-7/24", "-1/12"], ["7/24", "1/12"], "7/24", "1/12")
    accept("a box, by a comparison", d.found("region", want, PLAIN))
    d = on_region("x/2 + y/4 + p", "y/4 + q", "3/4", "1", [("-7/8", "7/8"), ("-5/16", "5/16")], top="horizon = 2\n")
    drawn(d, [7, 11], ["-7/24", "-1/12"], ["7/24", "1/12"], "7/24", "1/12")
    reject("a box of two steps", d.found("region", [("settles", "proved")], PLAIN), "proof line 12", "a polytope that attracts is known for single steps only")


# a turn by 45 degrees, shrinking, whose entries' magnitudes do not contract: an octagon is kept

def octagons() -> None:
    rows = [*ONE, ["1", "1"], ["1", "-1"]]
    want = [("bound(x) <= 1/2", "proved"), ("bound(y) <= 1/2", "proved"), ("bound(x) < 1/2", "undecided")]
    d = along(asked=[that for that, _ in want])
    del d.proof[11:]
    ends = ["1/2", "1/2", "3/4", "3/4"]
    drawn(d, [10, 11], [f"-{x}" for x in ends], ends, "1/2", "1/2", rows)
    good = d.found("ball", want, {"kind": "ellipsoid", "matrix": ONE})
    accept("an octagon", good)
    by_hair("an octagon", good, 12, "low", 1)
    by_hair("an octagon", good, 12, "high", -1)
    for n, keep in enumerate(([0, 1], [2, 3])):
        some = {"rows": [rows[k] for k in keep], "low": [f"-{ends[k]}" for k in keep], "high": [ends[k] for k in keep]}
        reject(f"a square, {n}", but(good, *(x for key, value in some.items() for x in (f"proof 11 witness {key}", value)), "proof 11 concludes", {"x": "3/4", "y": "3/4"}), "proof line 12", LED)
    # turned back by half: only what the rows say counts
    reject("an octagon of other rows", but(good, "proof 11 witness rows", [*ONE, ["1", "1"], ["1", "1"]]), "proof line 12", LED)
    # in the ball, which its vertices at (1/2, 1/4) are, and larger ones are not
    for scale, inside in (("1", True), ("3/2", True), ("2", False)):
        low, high = ([str(Q(x) * Q(scale) * sign) for x in ends] for sign in (-1, 1))
        x = str(Q(scale) / 2)
        entries = but(good, "proof 11 witness low", low, "proof 11 witness high", high, "proof 11 concludes", {"x": x, "y": x}, "results requirements 0 verdict", "undecided", "results requirements 1 verdict", "undecided")
        if not inside:
            reject(f"an octagon {scale} times as large", entries, "proof line 12", OUTSIDE)
        elif scale == "1":
            accept(f"an octagon {scale} times as large", but(entries, "results requirements 0 verdict", "proved", "results requirements 1 verdict", "proved"))


# w (1/4 − x): the Jacobian −w and the miss w/4 have one w; from [0, 1/8] every step leads into it

def correlated() -> None:
    want = asked("1/8", "1/12")
    for sign, low, high, images in (("", "0", "1/8", ("-3/8", "5/8")), ("-", "-1/8", "0", ("-5/8", "3/8"))):
        name = f"under the same values, {low} to {high}"
        d = on_region(f"w*({sign}1/4 - x)", "y/4 + q", "1/2", "1/8", [images, ("-5/16", "5/16")], [that for that, _ in want], noise='w = [0, "1/2"]\nq = ["-1/16", "1/16"]')
        drawn(d, [7, 11], [low, "-1/12"], [high, "1/12"], "1/8", "1/12", trees=("c",))
        good = d.found("region", want, PLAIN)
        accept(name, good)
        by_hair(name, good, 12, "low", 1)
        by_hair(name, good, 12, "high", -1)
        reject(f"{name}: x", but(good, "proof 11 concludes x", hair("1/8", -1)), "proof line 12", "x: less than the polytope reaches")
        reject(f"{name}: values of their own", but(good, "proof 11 witness trees", ["d"]), "proof line 12", LED)
        for n, trees in enumerate((["c", "c"], [], ["0 c c"], "c", ["m"], [1])):
            entries = but(good, "proof 11 witness trees", trees)
            accept(f"{name}: trees, {n}", entries) if n == 2 else reject(f"{name}: trees, {n}", entries, "proof line 12", "")
        CASES[f"{name}: leaves"] = Case(sealed(but(good, "proof 11 witness trees", ["0 c c"])), "valid", leaves=8)


# targets of x that move: h/8 with |h⁺ − h| <= 1/2

def moving() -> None:
    want = asked("3/8", "1/12")
    d = Lines(claim("h/8 + (x - h/8)/2 + p", "y/4 + q", uncertain='p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]\nh = { range = [-1, 1], held = true, change = "1/2" }', target=("h/8", "0"), asked=[that for that, _ in want]))
    d.metric("box", ONE, ONE)
    d.range("target[x]", "-1/8", "1/8")
    d.range("target[y]", "0", "0")
    d.theorem("smaller-ball", "ball", [1, 2, 3], radius="1/2")
    d.range("image[x]", "-13/16", "13/16")
    d.range("image[y]", "-5/16", "5/16")
    d.theorem("invariant-region", "invariant", [1, 2, 3, 5, 6])
    d.matrix("slopes", "1/2", [7])
    d.matrix("misses", "1/8", [7])
    d.range("target-slope[x,h]", "1/8", "1/8")
    d.theorem("slope", "slope", [8, 9, 10], gain="1/2", residual="3/16")
    d.theorem("ultimate-bound", "bound[slope]", [7, 11], bound="3/8")
    drawn(d, [7, 12, 10], ["-3/8", "-1/12"], ["3/8", "1/12"], "3/8", "1/12")
    good = d.found("region", want, PLAIN)
    accept("as targets move", good)
    by_hair("as targets move", good, 13, "low", 1)
    by_hair("as targets move", good, 13, "high", -1)
    turned = but(good, "proof 12 witness rows", [["-1", "0"], ["0", "1"]])
    accept("as targets move, a row turned", turned)
    by_hair("as targets move, a row turned", turned, 13, "low", 1)
    by_hair("as targets move, a row turned", turned, 13, "high", -1)
    reject("as if targets stood still", but(good, "proof 12 uses", [7, 12]), "proof line 13", RESTS)
    # from targets 1/8 to either side of 0, the ends of the region are 7/8 away
    for end, inside in (("7/8", True), (hair("7/8", 1), False)):
        for side, (low, high) in enumerate(((f"-{end}", "7/8"), ("-7/8", end))):
            entries = but(good, "proof 12 witness low", [low, "-1/12"], "proof 12 witness high", [high, "1/12"], "proof 12 concludes x", "1")
            accept(f"as wide as targets leave, {side}", entries) if inside else reject(f"wider than targets leave, {side}", entries, "proof line 13", OUTSIDE)


# x²/4 + p: over the box |x| <= 1/2 slopes are at most 1/4, and 1/6 is left

def in_boxes() -> None:
    want = [("bound(x) <= 1/6", "proved"), ("bound(x) < 1/6", "undecided"), ("bound(y) <= 1/12", "proved")]
    d = bent([that for that, _ in want])
    del d.proof[13:]
    drawn(d, [13, 11], ["-1/6", "-1/12"], ["1/6", "1/12"], "1/6", "1/12")
    good = without(d.found("region", want, PLAIN), 12)
    accept("in a box", good)
    by_hair("in a box", good, 13, "low", 1)
    by_hair("in a box", good, 13, "high", -1)
    for x, inside in (("1/2", True), (hair("1/2", 1), False)):
        entries = but(good, "proof 12 witness low", [f"-{x}", "-1/12"], "proof 12 witness high", [x, "1/12"], "proof 12 concludes x", "1", "results requirements 0 verdict", "undecided")
        accept(f"as wide as the box: {x}", entries) if inside else reject(f"wider than the box: {x}", entries, "proof line 13", OUTSIDE)
    # in the smallest box, where it is 1/4 wide but for a hair
    for x in ("1/4", hair("1/4", 1)):
        d = bent(box=(hair("1/4", 1), "1/2"))
        del d.proof[13:]
        drawn(d, [13, 11], [f"-{x}", "-1/12"], [x, "1/12"], x, "1/12")
        entries = without(d.found("region", [("bound(y) <= 1/12", "proved")], PLAIN), 12)
        entries["claim"]["text"] = entries["claim"]["text"].replace("settles", "bound(y) <= 1/12")
        accept(f"in the smallest box: {x}", entries)
    # boxes rest on polytopes
    d = bent([that for that, _ in want])
    del d.proof[13:]
    drawn(d, [13, 11], ["-1/6", "-1/12"], ["1/6", "1/12"], "1/6", "1/12")
    d.line("absorbed", "absorbed", [14], {}, x="3/16", y="1/10")
    drawn(d, [15, 11], ["-4/29", "-1/12"], ["4/29", "1/12"], "4/29", "1/12")
    again = but(without(d.found("region", want, PLAIN), 12), "proof 12 concludes y", "1/11", "results requirements 1 verdict", "proved")
    accept("in a box of a polytope", again)
    for key, value in (("x", "1/6"), ("y", "1/11")):
        reject(f"in a box of a polytope, {key}", but(again, f"proof 13 concludes {key}", value), "proof line 14", f"{key}: no more than the bounds show")
    reject("by another polytope, which is no ground for contraction", but(again, "proof 14 uses", [14, 13]), "proof line 15", RESTS)
    # a comparison on the box itself contracts there, and says nothing of a smaller one
    d = bent([that for that, _ in want])
    d.proof[14]["concludes"] = {"x": "1/4", "y": "1/12"}
    drawn(d, [13, 15], ["-1/6", "-1/12"], ["1/6", "1/12"], "1/6", "1/12")
    accept("in a box, by a comparison there", d.found("region", want, PLAIN))
    d = bent(rounds=2)
    drawn(d, [16, 15], ["-4/29", "-1/12"], ["4/29", "1/12"], "4/29", "1/12")
    reject("in a box, by a comparison on a larger one", d.found("region", [("settles", "proved")], PLAIN), "proof line 19", "the bound is of another set")


def elsewhere() -> None:
    """Claims of which no polytope is known."""
    line = {"rule": "attracting", "proves": "attracting", "uses": [], "witness": {"bits": 0, "trees": ["d"], "rows": [["1"]], "low": ["0"], "high": ["1"]}, "concludes": {"v": "1"}}
    reject("a single state", but(BASE, "proof 0", line), "proof line 1", "attracting: the claim has a single state")
    gust = '[dynamics]\nduration = 1\n[dynamics.start]\nX = "x"\n[dynamics.rate]\nX = "g - X"\n'
    d = Lines(claim("X/4", "y/4", uncertain="g = { range = [0, 1], within = true }", rest=gust))
    drawn(d, [], ["-1", "-1"], ["1", "1"], "1", "1")
    reject("signals within a stance", d.found("region", [("settles", "proved")], PLAIN), "proof line 1", "a polytope that attracts is not known under signals within a stance")


boxes()
elsewhere()
octagons()
correlated()
moving()
in_boxes()


def test_attracting_boundaries() -> None:
    all_hold(CASES)
