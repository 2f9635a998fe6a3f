"""Balls of more sides than a box in a basis, known and kept by their vertices, at exact equality.

proofs/matrix.md (7), proofs/polytope.md (5)
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import BASE, GONE, Case, Entries, Question, but, sealed
from tests.checker.test_several_boundaries import ONE, PLAIN, STEP, Lines, claim, hair, without

CASES: dict[str, Question] = {}


def accept(name: str, entries: Entries) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "valid")


def reject(name: str, entries: Entries, place: str, reason: str) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "invalid", place, reason)


# tables of numbers: one line each reads better
# fmt: off

# w [[1, 1], [-1, 0]], which turns the hexagon of |x|, |y|, |x + y| by a side, and a miss of (3/4 - w) 5/8 of x: under the same w no
# more than 3/4 in all, each on its own 3/4 and 5/16, which is too much

HEXAGON, LEFT = [*ONE, ["1", "1"]], [["1", "0", "0"], ["0", "1", "0"]]
TURNED, WAY = ("w*(x + y) + (3/4 - w)*5/8", "-w*x"), 'w = ["1/4", "3/4"]'
NORM = {"kind": "polytope", "matrix": HEXAGON}
LED, RESTS = "a leaf is not shown to lead into the polytope", "invariant rests on the ball, then how targets move"


def hexagon(asked: Sequence[str] = ("settles",), radius: str = "1", bound: str = "3/4", **other: Any) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 point, 5 ball, 6 escape, 7 8 matrices, 9 pair, 10 invariant, 11 bound, 12 13 stretches."""
    d = Lines(claim(*other.pop("step", TURNED), uncertain=other.pop("uncertain", WAY), asked=asked, **other))
    d.metric("polytope", HEXAGON, LEFT)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.point("target[x]", {}, "0")
    d.theorem("largest-ball", "ball", [1, 2, 3, 4], radius=radius, outer=radius)
    d.point("image[x]", {"x": "1", "y": "1", "w": "3/4"}, "3/2")
    d.matrix("slopes", "3/4", [5], ["c"])
    d.matrix("misses", "5/16", [5], ["c"])
    d.theorem("slope", "slope", [7, 8], gain="3/4", residual="5/16")
    d.line("invariant-vertices", "invariant", [5], {"bits": 0, "trees": ["c"]}, bound=bound)
    d.theorem("ultimate-bound", "bound[slope]", [10, 9], bound="5/4")
    d.stretch("slopes", {"x": "0", "y": "0", "w": "3/4"}, ["1", "0"], "3/4", [5])
    d.stretch("misses", {"w": "1/4"}, ["1"], "5/16", [5])
    return d


ASKED = [
    ("settles", "proved"), ("gain <= 3/4", "proved"), ("gain < 3/4", "undecided"), ("bound(x) <= 5/4", "proved"), ("bound(x) < 5/4", "undecided"),
    ("radius(x) >= 1", "proved"), ("radius(y) > 1", "undecided"), ("push(x) >= 1/4", "undecided"), (f"push(x) >= 1/4 - 1{STEP}", "proved"), (f"push(y) >= 1/4 - 1{STEP}", "proved"),
]


def kept() -> None:
    good = hexagon([that for that, _ in ASKED]).found("ball", ASKED, NORM)
    accept("a hexagon", good)
    for n, (that, v) in enumerate(ASKED):
        for other in sorted({"proved", "refuted"} - {v}):
            reject(f"a hexagon: {that} {other}", but(good, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {v} was derived")
    for line, key, by, reason in (
        (5, "radius", 1, "radius: the ball is not shown to lie in the region of x"), (5, "outer", -1, "outer: larger balls are not shown to leave the region"), (7, "norm", -1, "slopes: a leaf is not shown to stay within the norm"),
        (8, "norm", -1, "misses: a leaf"), (10, "bound", -1, LED), (12, "lower", 1, "slopes: the direction"), (13, "lower", 1, "misses: the direction"),
    ):
        reject(f"a hexagon: line {line} {key}", but(good, f"proof {line - 1} concludes {key}", hair(good["proof"][line - 1]["concludes"][key], by)), f"proof line {line}", reason)
    # a bound inside the ball settles; its own radius keeps it only
    some = [("settles", "undecided"), ("bound(x) <= 5/4", "proved")]
    for bound, holds in (("1", True), (hair("1", 1), False)):
        entries = hexagon([that for that, _ in some], bound=bound).found("ball", some, NORM)
        accept("a hexagon, no more than kept", entries) if holds else reject("a hexagon led beyond itself", entries, "proof line 10", "bound: more than the radius")
    one = hexagon(bound=hair("1", -1)).found("ball", [("settles", "proved")], NORM)
    accept("a hexagon, settled by a hair", one)
    reject("a hexagon, settled by nothing", but(one, "proof 9 concludes bound", "1"), "results", "[1].verdict: proved is claimed, undecided was derived")
    reject("a hexagon led to less than nothing", but(one, "proof 9 concludes bound", "-3/4"), "proof line 10", "bound: more than the radius")
    # a smaller ball, down to 5/8 at w = 1/4 and a little at w = 3/4: w R + (3/4 - w) 5/8
    for radius, bound in (("1/2", "7/16"), ("3/4", "9/16"), ("5/12", "5/12")):
        entries = hexagon(radius=radius, bound=bound).found("smaller ball", [("settles", "undecided")], NORM)
        entries = without(but(entries, "proof 4 rule", "smaller-ball", "proof 4 uses", [1, 2, 3], "proof 4 concludes", {"radius": radius}), 4, 6)
        accept(f"a hexagon of {radius}", entries)
        reject(f"a hexagon of {radius}, led to less", but(entries, "proof 7 concludes bound", hair(bound, -1)), "proof line 8", LED)
    # the same without what J and m have in common, and by gain and residual
    reject("a hexagon by direct leaves", but(good, "proof 9 witness trees", ["d"], "proof 9 concludes bound", "1"), "proof line 10", LED)
    reject("a hexagon by gain and residual", but(good, "proof 9", {"rule": "invariant-ball", "proves": "invariant", "uses": [5, 9], "witness": {}, "concludes": {}}), "proof line 10", "gain times radius plus residual exceeds the radius")
    uses: Any
    for uses, reason in (([], RESTS), ([1], RESTS), ([9], RESTS), ([5, 5], "invariant rests on"), ([5, 2], "invariant rests on")):
        reject(f"a hexagon: uses {uses}", but(good, "proof 9 uses", uses), "proof line 10", reason)
    for key, value, reason in (("proves", "ball", RESTS), ("witness trees", "c", "trees: a list of texts"), ("witness", {"bits": 0}, "witness: the keys of invariant-vertices are bits, trees"), ("concludes bound", GONE, "concludes: the keys of invariant-vertices are bound")):
        reject(f"a hexagon: {key}", but(good, f"proof 9 {key}", value), "proof line 10", reason)


def turning() -> None:
    """The same about a target that moves, by 1/16 a step: 23/32 of 7/8."""
    step = ("h + w*(x - h + y) + (3/4 - w)*5/8", "-w*(x - h)")
    for sign in ("", "-"):
        d = Lines(claim(*(x.replace("h", f"({sign}h)") for x in step), uncertain=WAY + '\nh = { range = ["-1/8", "1/8"], held = true, change = "1/16" }', target=(f"{sign}h", "0"), asked=("settles",)))
        d.metric("polytope", HEXAGON, LEFT)
        d.range("target[x]", "-1/8", "1/8")
        d.range("target[y]", "0", "0")
        d.point("target[x]", {"h": "1/8"}, sign + "1/8")
        d.theorem("largest-ball", "ball", [1, 2, 3, 4], radius="7/8", outer="7/8")
        d.point("image[x]", {"x": "1", "y": "1", "h": f"{sign}1/8", "w": "3/4"}, "49/32")
        d.matrix("slopes", "3/4", [5], ["c"])
        d.matrix("misses", "5/16", [5], ["c"])
        d.range("target-slope[x,h]", *([sign + "1"] * 2))
        d.theorem("slope", "slope", [7, 8, 9], gain="3/4", residual="3/8")
        d.line("invariant-vertices", "invariant", [5, 9], {"bits": 0, "trees": ["c"]}, bound="23/32")
        d.theorem("ultimate-bound", "bound[slope]", [11, 10], bound="3/2")
        good = d.found("ball", [("settles", "proved")], NORM)
        accept(f"led by {sign}h", good)
        reject(f"led by {sign}h, less", but(good, "proof 10 concludes bound", hair("23/32", -1)), "proof line 11", LED)
        reject(f"led by {sign}h, movement forgotten", but(good, "proof 10 uses", [5]), "proof line 11", "invariant rests on")


def others() -> None:
    """Balls of other norms, and claims of which the theorem says nothing."""
    good = hexagon().found("ball", [("settles", "proved")], NORM)
    square = {"kind": "polytope", "matrix": ONE}
    box = but(good, "proof 0 witness", {"kind": "polytope", "rows": ONE, "inverse": ONE}, "results metric", square)
    reject("a square is not led into itself", but(box, "proof 6 concludes norm", "3/2", "proof 8 concludes gain", "3/2"), "proof line 10", LED)
    box = hexagon(step=("w*y + (3/4 - w)*5/8", "-w*x + w*y/16")).found(None, [("settles", "undecided")], square)
    box = without(but(box, "proof 0 witness", {"kind": "polytope", "rows": ONE, "inverse": ONE}, "proof 4 rule", "smaller-ball", "proof 4 uses", [1, 2, 3], "proof 4 concludes", {"radius": "1"}, "proof 9 concludes bound", "51/64"), 4, 6, 7, 8, 9, 11, 12, 13)
    box["results"]["set"] = {"kind": "smaller ball", "centre": {"x": None, "y": None}, "radius": None}
    accept("a square by its vertices", box)
    reject("a square by its vertices, less", but(box, "proof 4 concludes bound", hair("51/64", -1)), "proof line 5", LED)
    nothing = but(box, "claim text", claim("0", "0", uncertain=WAY), "proof 4 concludes bound", "0")
    accept("a square led to its middle", nothing)
    reject("a square led to less than nothing", but(nothing, "proof 4 concludes bound", hair("0", -1)), "proof line 5", "bound: more than the radius")
    round_ = but(good, "proof 0 witness", {"kind": "ellipsoid", "rows": ONE, "inverse": ONE}, "results metric", {"kind": "ellipsoid", "matrix": ONE}, "proof 6 concludes norm", "2", "proof 8 concludes gain", "2")
    reject("an ellipse has no vertices", round_, "proof line 10", "the ball has no vertices")
    line = {"rule": "invariant-vertices", "proves": "invariant", "uses": [], "witness": {"bits": 0, "trees": ["d"]}, "concludes": {"bound": "1"}}
    reject("two steps", but(hexagon(top="horizon = 2\n").found("ball", [("settles", "proved")], NORM), "proof 0", line), "proof line 1", "vertices of a ball are known to be kept over single steps only")
    reject("of a single state, on nothing", but(BASE, "proof 0", line), "proof line 1", RESTS)
    reject("of a single state", but(BASE, "proof 3", line | {"uses": [2]}), "proof line 4", "the ball has no vertices")
    gust = '[dynamics]\nduration = 1\n[dynamics.start]\nX = "x"\n[dynamics.rate]\nX = "g - X"\n'
    d = Lines(claim("X/4", "y/4", uncertain="g = { range = [0, 1], within = true }", rest=gust))
    d.proof.append(line)
    reject("signals within a stance", d.found("ball", [("settles", "proved")], NORM), "proof line 1", "vertices of a ball are not known to be kept under signals within a stance")


def beside() -> None:
    """Of a region that is kept the ball says nothing; beside gain and residual it counts."""
    line = {"rule": "invariant-vertices", "proves": "invariant", "uses": [5], "witness": {"bits": 0, "trees": ["c"]}, "concludes": {"bound": "7/8"}}
    region = but(PLAIN, "proof", [*PLAIN["proof"], line])
    reject("a ball in a region", region, "proof", "line 19 serves no later line and no result")
    settled = but(PLAIN, "results requirements 0 value", {"lower": None, "upper": "2/5"})
    accept("a region settled", settled)
    reject("a region settled by a ball", but(settled, "proof", region["proof"], "results requirements 0 value upper", hair("2/5", -1)), "results", "upper: more is claimed")
    both = hexagon(step=("w*(x + y) + (3/4 - w)/8", "-w*x")).found("ball", [("settles", "proved")], NORM)
    both = but(both, "proof 7 concludes norm", "1/16", "proof 8 concludes residual", "1/16", "proof 10 concludes bound", "1/4", "proof 12 concludes lower", "1/16")
    both = but(both, "proof", [*both["proof"], {"rule": "invariant-ball", "proves": "invariant", "uses": [5, 9], "witness": {}, "concludes": {}}], "results requirements 0 value", {"lower": None, "upper": "1/4"})
    accept("a ball kept by either", both)


# fmt: on
beside()
kept()
turning()
others()


def test_vertices_boundaries() -> None:
    all_hold(CASES)


def test_hexagon_is_turned() -> None:
    """What the cases rest on, by arithmetic of their own."""
    tips = [(Q(1), Q(0)), (Q(0), Q(1)), (Q(1), Q(-1))]
    for w in (Q(1, 4), Q(1, 2), Q(3, 4)):
        for sign in (1, -1):
            for x, y in tips:
                u, v = w * sign * (x + y) + (Q(3, 4) - w) * Q(5, 8), -w * sign * x
                assert max(abs(u), abs(v), abs(u + v)) <= Q(3, 4)
