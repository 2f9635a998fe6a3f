"""Boxes that trajectories end up in, comparisons about a point and along a map, at exact equality (proofs/several.md (3), (8))."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import GONE, Questions, but
from tests.checker.test_several_boundaries import ONE, Lines, ball, claim, hair, without

CASES = Questions()
accept, reject = CASES.accept, CASES.reject


# tables of numbers: one line each reads better
# fmt: off

PLAIN = {"kind": "box", "weights": {"x": "1", "y": "1"}}
NOISE = 'p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]'


def signed(upper: Sequence[str], lower: Sequence[str], wide: int) -> dict[str, str]:
    places = [f"{i // wide + 1},{i % wide + 1}" for i in range(len(upper))]
    return dict(zip(places, upper, strict=True)) | {f"-{at}": x for at, x in zip(places, lower, strict=True)}


def table(d: Lines, proves: str, upper: Sequence[str], lower: Sequence[str], uses: Sequence[int], rows: Any = ONE, inverse: Any = ONE, beside: Any = ()) -> int:
    found = signed(upper, lower, len(rows) if proves == "slopes" else 1)
    return d.line("entries", proves, uses, {"beside": list(beside), "bits": 0, "trees": ["d"], "rows": rows, "inverse": inverse}, **found)


def compared(d: Lines, uses: Sequence[int], p: Sequence[str], b: Sequence[str], about: Sequence[str], x: str, y: str) -> int:
    return d.line("componentwise", "componentwise", uses, {"about": list(about), "p": list(p), "b": list(b)}, x=x, y=y)


def on_region(x: str, y: str, gain: str, miss: str, images: Sequence[tuple[str, str]], asked: Sequence[str] = ("settles",), noise: str = NOISE, ends: tuple[str, str] = ("[-1, 1]", "[-1, 1]"), **other: str) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 ball, 5 6 images, 7 invariant, 8 9 matrices, 10 pair, 11 bound."""
    d = Lines(claim(x, y, uncertain=noise, asked=asked, ends=ends, **other))
    d.metric("box", ONE, ONE)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.theorem("smaller-ball", "ball", [1, 2, 3], radius="1/2")
    for s, (low, high) in zip("xy", images, strict=True):
        d.range(f"image[{s}]", low, high)
    d.theorem("invariant-region", "invariant", [1, 2, 3, 5, 6])
    d.matrix("slopes", gain, [7])
    d.matrix("misses", miss, [7])
    d.theorem("slope", "slope", [8, 9], gain=gain, residual=miss)
    d.theorem("ultimate-bound", "bound[slope]", [7, 10], bound=str(Q(miss) / (1 - Q(gain))))
    return d


# x²/4 + p and y/4 + q: slopes of x/2, 1/2 at most on the region; where |x| <= 1/2 half of that

def bent(asked: Sequence[str] = ("settles",), rounds: int = 1, box: tuple[str, str] = ("1/2", "1/2"), **other: Any) -> Lines:
    """Lines: 12 misses, 13 box, 14 slopes, 15 comparison; of a second round 16 to 18."""
    d = on_region("x*x/4 + p", "y/4 + q", "1/2", "1/8", [("-3/8", "3/8"), ("-5/16", "5/16")], asked, **other)
    table(d, "misses", ["1/8", "1/16"], ["-1/8", "-1/16"], [7])
    d.line("absorbed", "absorbed", [11], {}, x=box[0], y=box[1])
    half = Q(box[0]) / 2
    part = str(half if half.denominator < 10**6 else half + Q(1, 10**40))  # entries are rounded outward to 160 bits
    table(d, "slopes", [part, "0", "0", "1/4"], [f"-{part}", "0", "0", "1/4"], [13])
    x = Q(1, 8) / (1 - Q(part))
    compared(d, [13, 14, 12], ["1", "1"], [str(x), "1/12"], ["0", "0"], str(x), "1/12")
    if rounds == 2:
        d.line("absorbed", "absorbed", [15], {}, x="3/16", y="1/10")
        table(d, "slopes", ["3/32", "0", "0", "1/4"], ["-3/32", "0", "0", "1/4"], [16])
        compared(d, [16, 17, 12], ["1", "1"], ["4/29", "1/12"], ["0", "0"], "4/29", "1/12")
    return d


def boxes() -> None:
    for name, rounds, x in (("one box", 1, "1/6"), ("a box in a box", 2, "4/29")):
        asked = [(f"bound(x) <= {x}", "proved"), (f"bound(x) < {x}", "undecided"), ("bound(y) <= 1/12", "proved"), ("bound(y) < 1/12", "undecided"), ("settles", "proved")]
        d = bent([that for that, _ in asked], rounds)
        entries = d.found("region", asked, PLAIN)
        if rounds == 2:
            entries = but(entries, "proof 14 concludes y", "1/12")
        accept(name, entries)
        for n, (that, v) in enumerate(asked):
            for other in sorted({"proved", "refuted"} - {v}):
                reject(f"{name}: {that} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {v} was derived")
        full = but(entries, "results states x bound", {"lower": None, "upper": x}, "results states y bound", {"lower": None, "upper": "1/12"})
        accept(f"{name}, bounds", full)
        for s, value in (("x", x), ("y", "1/12")):
            reject(f"{name}, bound of {s}", but(full, f"results states {s} bound upper", hair(value, -1)), "results", "upper: more is claimed")
        last = len(entries["proof"])
        for s, value in (("x", x), ("y", "1/12")):
            reject(f"{name}: {s} by a hair less", but(entries, f"proof {last - 1} concludes {s}", hair(value, -1)), f"proof line {last}", f"{s}: less than what the comparison shows")
        # slopes over the box, no smaller one
        at = last - 2
        for key in ("1,1", "-1,1"):
            reject(f"{name}: slopes {key}", but(entries, f"proof {at} concludes {key}", hair(entries["proof"][at]["concludes"][key], 1 if key[0] == "-" else -1)), f"proof line {at + 1}", f"slopes: entry {key} is less than what the leaves show")
    good = bent().found("region", [("settles", "proved")], PLAIN)
    rests, low = "a box that absorbs rests on bounds", "no more than the bounds show"
    for n, (key, value, reason) in enumerate((
        ("uses", [], rests), ("uses", [10], rests), ("uses", [7], rests), ("uses", [11, 7], rests), ("uses", [12], rests), ("proves", "invariant", rests), ("proves", "ball", rests),
        ("concludes x", "1/4", f"x: {low}"), ("concludes x", hair("1/4", -1), f"x: {low}"), ("concludes y", "1/4", f"y: {low}"), ("concludes y", "0", f"y: {low}"), ("concludes y", "-1/2", f"y: {low}"),
        ("concludes x", hair("1", 1), "x: the box is not shown to lie in the region"), ("concludes y", hair("1", 1), "y: the box is not shown to lie in the region"),
        ("concludes x", GONE, "concludes: half a width for each state"), ("concludes z", "1/2", "concludes: half a width for each state"),
    )):
        reject(f"box, {n} {key}", but(good, f"proof 12 {key}", value), "proof line 13", reason)
    # as narrow and as wide as may be: the slope is half of that
    for x in (hair("1/4", 1), "1"):
        accept(f"a box of {x}", but(bent(box=(x, "1/2")).found("region", [("settles", "proved")], PLAIN), *(("proof 14 concludes y", "1/12"))))
    accept("a box as high as may be", bent(box=("1/2", "1")).found("region", [("settles", "proved")], PLAIN))
    accept("a box as low as may be", bent(box=("1/2", hair("1/4", 1))).found("region", [("settles", "proved")], PLAIN))
    # where the region is narrower below its target, or above it
    for ends in ('["-1/2", 1]', '[-1, "1/2"]'):
        for x, inside in (("1/2", True), (hair("1/2", 1), False)):
            d = on_region("x*x/4 + p", "y/4 + q", "1/2", "1/8", [("-3/8", "3/8"), ("-5/16", "5/16")], ends=(ends, "[-1, 1]"))
            table(d, "misses", ["1/8", "1/16"], ["-1/8", "-1/16"], [7])
            d.line("absorbed", "absorbed", [11], {}, x=x, y="1/2")
            table(d, "slopes", ["1/4", "0", "0", "1/4"], ["-1/4", "0", "0", "1/4"], [13])
            compared(d, [13, 14, 12], ["1", "1"], ["1/6", "1/12"], ["0", "0"], "1/6", "1/12")
            entries = d.found("region", [("settles", "proved")], PLAIN)
            accept(f"a box in {ends}", entries) if inside else reject(f"a box beyond {ends}", entries, "proof line 13", "x: the box is not shown to lie in the region")
    for x, inside in (("3/4", True), (hair("3/4", 1), False)):
        d = on_region("1/4 + (x - 1/4)**2/4 + p", "y/4 + q", "5/8", "1/8", [("-1", "1"), ("-1", "1")], target=("1/4", "0"))
        d.proof[1]["concludes"] = {"lower": "1/4", "upper": "1/4"}
        table(d, "misses", ["1/8", "1/16"], ["-1/8", "-1/16"], [7])
        d.line("absorbed", "absorbed", [11], {}, x=x, y="1/2")
        table(d, "slopes", ["3/8", "0", "0", "1/4"], ["-3/8", "0", "0", "1/4"], [13])
        compared(d, [13, 14, 12], ["1", "1"], ["1/5", "1/12"], ["0", "0"], "1/5", "1/12")
        entries = d.found("region", [("settles", "proved")], PLAIN)
        accept("a box about a quarter", entries) if inside else reject("a box about a quarter, beyond", entries, "proof line 13", "x: the box is not shown to lie in the region")
    # the bound of one line for x, of another for y: both are bounds, and the box is above one of each
    d = bent()
    d.proof[12]["uses"] = [11, 11]
    accept("a bound twice", d.found("region", [("settles", "proved")], PLAIN))
    nested = but(bent(rounds=2).found("region", [("settles", "proved")], PLAIN), "proof 15 uses", [11, 15])
    accept("a box by either bound", nested)
    accept("a box by either bound, turned", but(nested, "proof 15 uses", [15, 11]))
    for key, value in (("x", "1/6"), ("y", "1/12")):
        reject(f"a box by either bound, {key}", but(nested, f"proof 15 concludes {key}", value), "proof line 16", f"{key}: {low}")
    # comparisons rest on slopes of their own box, and on misses of it or of the set it is in
    wrong = bent(rounds=2).found("region", [("settles", "proved")], PLAIN)
    for uses, reason in (([13, 17, 12], "entries of another set"), ([16, 14, 12], "entries of another set"), ([7, 17, 12], "entries of another set"), ([7, 14, 12], "entries of another set"), ([11, 17, 12], "componentwise rests on the invariant set")):
        reject(f"a comparison on {uses}", but(wrong, "proof 17 uses", uses), "proof line 18", reason)
    own = but(wrong, "proof 11 uses", [4])
    reject("misses of a ball", own, "proof line 15", "entries of another set")
    d = bent()
    table(d, "misses", ["1/8", "1/16"], ["-1/8", "-1/16"], [13])
    compared(d, [13, 14, 16], ["1", "1"], ["1/6", "1/12"], ["0", "0"], "1/6", "1/12")
    accept("misses of the box itself", without(d.found("region", [("settles", "proved")], PLAIN), 12, 15))
    d = bent(rounds=2)
    table(d, "misses", ["1/8", "1/16"], ["-1/8", "-1/16"], [13])
    compared(d, [16, 17, 19], ["1", "1"], ["4/29", "1/12"], ["0", "0"], "4/29", "1/12")
    reject("misses of the box around it", without(d.found("region", [("settles", "proved")], PLAIN), 18), "proof line 19", "entries of another set")
    # nothing else rests on a box
    d = bent()
    d.matrix("slopes", "1/4", [13])
    d.matrix("misses", "1/4", [13])
    d.theorem("slope", "slope", [16, 17], gain="1/4", residual="1/4")
    entries = d.found("region", [("settles", "proved")], PLAIN)
    reject("a pair of a box", entries, "results", "slope is proved more than once by slope")
    reject("a pair of a box alone", without(but(entries, "proof 12 uses", [11]), 0), "results", "slope is proved more than once")
    bound_ = but(entries, "proof 17", {"rule": "ultimate-bound", "proves": "bound[slope]", "uses": [13, 10], "witness": {}, "concludes": {"bound": "1/4"}})
    reject("a bound on a box", without(bound_, 16, 17), "proof line 16", "uses: the invariant set, then gain and residual of a route")
    for top in ("", "horizon = 2\n"):
        d = on_region("x*x/4 + p", "y/4 + q", "1/2", "1/4", [("-1", "1"), ("-1", "1")], top=top)
        d.line("absorbed", "absorbed", [11], {}, x="3/4", y="3/4")
        entries = d.found("region", [("settles", "proved")], PLAIN)
        place, reason = ("proof line 12", "a box that absorbs is known for single steps only") if top else ("proof", "line 12 serves no later line and no result")
        reject(f"a box, {top!r}", entries, place, reason)


def sets() -> None:
    """A box of a smaller ball, where the region is the set; bounds of two sets."""
    d = bent()
    table(d, "slopes", ["1/4", "0", "0", "1/4"], ["-1/4", "0", "0", "1/4"], [4])
    table(d, "misses", ["1/8", "1/16"], ["-1/8", "-1/16"], [4])
    d.theorem("invariant-rows", "invariant", [4, 16, 17])
    compared(d, [18, 16, 17], ["1", "1"], ["1/6", "1/12"], ["0", "0"], "1/6", "1/12")
    d.line("absorbed", "absorbed", [11, 19], {}, x="1/2", y="1/2")
    reject("bounds of two sets", d.found("region", [("settles", "proved")], PLAIN), "proof line 20", "bounds of different sets")
    d.proof[19]["uses"] = [19, 11]
    reject("bounds of two sets, turned", d.found("region", [("settles", "proved")], PLAIN), "proof line 20", "bounds of different sets")
    d.proof[19] = {**d.proof[19], "uses": [19], "concludes": {"x": "1/4", "y": "1/8"}}
    table(d, "slopes", ["1/8", "0", "0", "1/4"], ["-1/8", "0", "0", "1/4"], [20])
    compared(d, [20, 21, 17], ["1", "1"], ["1/7", "1/12"], ["0", "0"], "1/7", "1/12")
    reject("a box of another set", without(d.found("region", [("settles", "proved")], PLAIN), 12, 13, 14, 15), "results", "the comparison refers to another set")
    # the ball of a slanted norm: its bound along each state is half of 1, and 1
    d = ball()
    d.line("absorbed", "absorbed", [14], {}, x=hair("1/2", 1), y=hair("1", 1))
    table(d, "slopes", ["1/2", "3/8", "1/2", "0"], ["1/2", "3/8", "1/2", "0"], [20])
    compared(d, [20, 21, 16], ["1", "1"], ["2/5", "1/5"], ["0", "0"], "2/5", "1/5")
    entries = without(d.found("ball", [("settles", "proved")], {"kind": "polytope", "matrix": [["2", "1"], ["2", "-1"]]}), 5, 11, 12, 15, 17)
    accept("a box of a ball", entries)
    at = next(n for n, x in enumerate(entries["proof"]) if x["rule"] == "absorbed")
    for s, value in (("x", "1/2"), ("y", "1")):
        reject(f"a box of a ball, {s}", but(entries, f"proof {at} concludes {s}", value), f"proof line {at + 1}", f"{s}: no more than the bounds show")


# -x/2 + p and y/4 + q, p in [0, 1/8]: about (1/24, 0) half as much is left as about 0, 1/8 and not 1/4

def turned(about: Sequence[str] = ("1/24", "0"), b: Sequence[str] = ("1/8", "1/12"), x: str = "1/6", y: str = "1/12", spread: str = "0") -> Lines:
    step = f"-x/2 + {spread}*q*x + p" if spread != "0" else "-x/2 + p"
    half = Q(spread) / 16
    d = on_region(step, "y/4 + q", str(Q(1, 2) + half), "1/8", [(str(-Q(1, 2) - half), str(Q(5, 8) + half)), ("-5/16", "5/16")], noise='p = [0, "1/8"]\nq = ["-1/16", "1/16"]')
    table(d, "slopes", [str(half - Q(1, 2)), "0", "0", "1/4"], [str(-half - Q(1, 2)), "0", "0", "1/4"], [7])
    table(d, "misses", ["1/8", "1/16"], ["0", "-1/16"], [7])
    compared(d, [7, 12, 13], ["1", "1"], b, about, x, y)
    return d


def abouts() -> None:
    told = [("settles", "proved")]
    good = turned().found("region", told, PLAIN)
    accept("about a point", good)
    for s, value in (("x", "1/6"), ("y", "1/12")):
        reject(f"about a point: {s}", but(good, f"proof 13 concludes {s}", hair(value, -1)), "proof line 14", f"{s}: less than what the comparison shows")
    little = "p, b: K p < p, K b + residual <= b"
    for n, (key, value) in enumerate((("b", [hair("1/8", -1), "1/12"]), ("b", ["1/8", hair("1/12", -1)]), ("about", ["0", "0"]), ("about", [hair("1/24", 1), "0"]), ("about", [hair("1/24", -1), "0"]), ("about", ["1/24", hair("0", 1)]), ("about", ["-1/24", "0"]))):
        reject(f"about a point, {n} {key}", but(good, f"proof 13 witness {key}", value), "proof line 14", little)
    for n, value in enumerate((["1/24"], ["1/24", "0", "0"], "0", [1, 0])):
        reject(f"about no point, {n}", but(good, "proof 13 witness about", value), "proof line 14", "about: a")
    accept("about 0", turned(("0", "0"), ("1/4", "1/12"), "1/4").found("region", told, PLAIN))
    # about a: off by |−a/2 − a + 1/16|, and 1/16 is left: twice both
    for a in ("1/8", "-1/16"):
        off = abs(Q(1, 16) - Q(a) * Q(3, 2))
        b = str(2 * (off + Q(1, 16)))
        entries = turned((a, "0"), (b, "1/12"), str(abs(Q(a)) + Q(b))).found("region", told, PLAIN)
        # a larger bound than that of the norm serves nothing; the verdict of the line itself is what counts
        if Q(b) + abs(Q(a)) <= Q(1, 4):
            accept(f"about {a}", entries)
        reject(f"about {a}, a hair less", but(entries, "proof 13 witness b", [hair(b, -1), "1/12"]), "proof line 14", little)
        reject(f"about {a}, {a} less", but(entries, "proof 13 concludes x", hair(str(abs(Q(a)) + Q(b)), -1)), "proof line 14", "x: less than what the comparison shows")
    # slopes that vary by 1/16 add as much of where it rests: (1/16 + 1/24/16) / (1/2 - 1/16)
    b = str((Q(1, 16) + Q(1, 24) / 16) / (Q(1, 2) - Q(1, 16)))
    varied = turned(("1/24", "0"), (b, "1/12"), str(Q(1, 24) + Q(b)), spread="1").found("region", told, PLAIN)
    accept("about a point, slopes that vary", varied)
    reject("about a point, slopes that vary, a hair less", but(varied, "proof 13 witness b", [hair(b, -1), "1/12"]), "proof line 14", little)
    for n, key, by in ((11, "1,1", -1), (11, "-1,1", 1), (12, "1,1", -1), (12, "-1,1", 1), (12, "-2,1", 1), (11, "-2,2", 1), (11, "2,2", -1)):
        reject(f"ends, {n} {key}", but(varied, f"proof {n} concludes {key}", hair(varied["proof"][n]["concludes"][key], by)), f"proof line {n + 1}", f"entry {key} is less than what the leaves show")
        accept(f"ends, {n} {key}, wider", but(varied, f"proof {n} concludes {key}", hair(varied["proof"][n]["concludes"][key], -by), "proof 13 witness b", [str(Q(b) + Q(1, 10**6)), str(Q(1, 12) + Q(1, 10**6))], "proof 13 concludes", {"x": str(Q(1, 24) + Q(b) + Q(1, 10**6)), "y": str(Q(1, 12) + Q(1, 10**6))}))


# a turn by 45 degrees, shrinking: [[1/2, 1/2], [-1/2, 1/2]] has |A| of spectral radius 1; its square [[0, 1/2], [-1/2, 0]]

TURN = [["1/2", "1/2"], ["-1/2", "1/2"]]
ROWS, LEFT = [*ONE, *TURN], [["1", "0", "0", "0"], ["0", "1", "0", "0"]]
ZEROS = ["0"] * 4
BESIDE = [["-1/2", "-1/2", "1", "0"], ["1/2", "-1/2", "0", "1"], ZEROS, ZEROS]


def along(beside: Any = BESIDE, b: Sequence[str] = ("1/2", "1/2", "3/8", "3/8"), slopes: Sequence[str] | None = None, asked: Sequence[str] = ("settles",)) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 point, 5 ball, 6 escape, 7 8 matrices, 9 pair, 10 invariant, 11 bound, 12 13 entries, 14 comparison."""
    d = Lines(claim("x/2 + y/2 + p", "y/2 - x/2 + q", uncertain='p = ["-1/8", "1/8"]\nq = ["-1/8", "1/8"]', asked=asked))
    d.metric("ellipsoid", ONE, ONE)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.point("target[x]", {}, "0")
    d.theorem("largest-ball", "ball", [1, 2, 3, 4], radius="1", outer="1")
    d.point("image[x]", {"x": "1", "y": "1", "p": "1/8"}, "9/8")
    d.matrix("slopes", "3/4", [5])
    d.matrix("misses", "1/5", [5])
    d.theorem("slope", "slope", [7, 8], gain="3/4", residual="1/5")
    d.theorem("invariant-ball", "invariant", [5, 9])
    d.theorem("ultimate-bound", "bound[slope]", [10, 9], bound="4/5")
    plain = ["0", "0", "1", "0", "0", "0", "0", "1", "0", "1/2", "0", "0", "-1/2", "0", "0", "0"]
    if beside != BESIDE:
        plain = ["1/2", "1/2", "0", "0", "-1/2", "1/2", "0", "0", *plain[8:]]
    table(d, "slopes", slopes or plain, slopes or plain, [10], ROWS, LEFT, beside)
    table(d, "misses", ["1/8"] * 4, ["-1/8"] * 4, [10], ROWS, LEFT)
    compared(d, [10, 12, 13], ["2", "2", "3/2", "3/2"], b, ZEROS, "1/2", "1/2")
    return d


def chains() -> None:
    asked = [("bound(x) <= 1/2", "proved"), ("bound(y) <= 1/2", "proved"), ("bound(x) < 1/2", "undecided")]
    round_ = {"kind": "ellipsoid", "matrix": ONE}
    good = along(asked=[that for that, _ in asked]).found("ball", asked, round_)
    accept("along a turn", good)
    little = "p, b: K p < p, K b + residual <= b"
    for n, x in enumerate(("1/2", "1/2", "3/8", "3/8")):
        b = ["1/2", "1/2", "3/8", "3/8"]
        b[n] = hair(x, -1)
        reject(f"along a turn, b {n}", but(good, "proof 13 witness b", b), "proof line 14", little)
    for key, value in good["proof"][11]["concludes"].items():
        reject(f"along a turn, slopes {key}", but(good, f"proof 11 concludes {key}", hair(value, 1 if key[0] == "-" else -1)), "proof line 12", f"slopes: entry {key} is less than what the leaves show")
    reject("without what is beside it", along([], asked=[that for that, _ in asked]).found("ball", asked, round_), "proof line 14", little)
    shape, nil = "beside: of slopes, a row and a column for each row of the basis", "beside: times the rows it is not 0"
    for n, (at, value, reason) in enumerate((
        (11, BESIDE[:3], shape), (11, [*BESIDE, ZEROS], shape), (11, [row[:3] for row in BESIDE], shape), (11, [BESIDE[0][:3], *BESIDE[1:]], shape), (11, "", "beside: a list of rows"), (11, None, "beside: a list of rows"), (11, {}, "beside: a list of rows"), (11, ["0"], "beside: a list of rows"),
        (11, [[hair("-1/2", 1), *BESIDE[0][1:]], *BESIDE[1:]], nil), (11, [*BESIDE[:3], ["0", "0", "0", hair("0", 1)]], nil), (11, [[x.replace("1", "2") if x == "1" else x for x in row] for row in BESIDE], nil), (12, [ZEROS] * 4, shape), (12, BESIDE, shape),
    )):
        reject(f"beside, {n}", but(good, f"proof {at} witness beside", value), f"proof line {at + 1}", reason)
    # what vanishes may stand anywhere: added to the last rows it is no use, and counts
    more = but(good, "proof 11 witness beside", [*BESIDE[:2], BESIDE[0], ZEROS])
    reject("beside, of the third row", more, "proof line 12", "slopes: entry 3,3 is less than what the leaves show")
    # with a square basis only 0 vanishes
    plain = along([]).found("ball", [("settles", "proved")], round_)
    square = but(plain, "proof 11 witness rows", ONE, "proof 11 witness inverse", ONE, "proof 11 witness beside", [["0", "0"], ["0", "0"]], "proof 11 concludes", signed(["1/2", "1/2", "-1/2", "1/2"], ["1/2", "1/2", "-1/2", "1/2"], 2))
    reject("a square basis, 0 beside it", square, "proof line 14", "entries in different bases")
    reject("a square basis, more beside it", but(square, "proof 11 witness beside", [["0", "0"], ["0", hair("0", 1)]]), "proof line 12", nil)


boxes()
sets()
abouts()
chains()


def test_absorbed_boundaries() -> None:
    all_hold(CASES)
