"""Claims of two states at exact equality: norms, balls, matrices, comparisons, and what they amount to.

As in `test_boundaries.py`, whose way of writing certificates this shares; the maps are linear and rational, but for
one, so that every number is known and a hair less of it is refused.
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import BASE, GONE, STEP, Draft, Entries, Questions, but, derivation, limited, refuses
from tests.checker.test_stance_boundaries import STILL

CASES = Questions()
unit, accept, reject = CASES.unit, CASES.accept, CASES.reject


# tables of numbers: one line each reads better
# fmt: off

ONE = [["1", "0"], ["0", "1"]]
WEIGHTS, UNWEIGHTED = [["1", "0"], ["0", "2"]], [["1", "0"], ["0", "1/2"]]
SLANTED, UPRIGHT = [["2", "1"], ["2", "-1"]], [["1/4", "1/4"], ["1/2", "-1/2"]]


def claim(x: str, y: str, ends: tuple[str, str] = ("[-1, 1]", "[-1, 1]"), uncertain: str = 'p = ["-1/8", "1/8"]', target: tuple[str, str] = ("0", "0"),
          asked: Sequence[str] = ("settles",), top: str = "", rest: str = "") -> str:
    wanted = "".join(f"[[require]]\nthat = {r}\n" if r.startswith('"') else f'[[require]]\nthat = "{r}"\n' for r in asked)
    return (f'format = 1\n{top}\n[state]\nx = {ends[0]}\ny = {ends[1]}\n[uncertain]\n{uncertain}\n[next]\nx = "{x}"\ny = "{y}"\n'
            f'[target]\nx = "{target[0]}"\ny = "{target[1]}"\n{rest}\n{wanted}')


class Lines(Draft):
    """A certificate about two states being written."""

    prefix = ""

    def line(self, rule: str, proves: str, uses: Sequence[int], witness: dict[str, Any], **concludes: str) -> int:
        return super().line(rule, self.prefix + proves, uses, witness, **concludes)

    def metric(self, kind: str, rows: Sequence[Sequence[str]], inverse: Sequence[Sequence[str]]) -> int:
        return self.line("metric", "metric", [], {"kind": kind, "rows": rows, "inverse": inverse})

    def matrix(self, proves: str, norm: str, uses: Sequence[int], trees: Sequence[str] = ("d",), bits: int = 0) -> int:
        return self.line("matrix", proves, uses, {"bits": bits, "scales": [], "trees": list(trees)}, norm=norm)

    def table(self, proves: str, values: Sequence[str], uses: Sequence[int], rows: Any = ONE, inverse: Any = ONE, trees: Sequence[str] = ("d",)) -> int:
        """`entries`: row by row."""
        wide = len(rows) if proves.endswith("slopes") else 1
        found = both({f"{i // wide + 1},{i % wide + 1}": x for i, x in enumerate(values)})
        return self.line("entries", proves, uses, {"beside": [], "bits": 0, "trees": list(trees), "rows": rows, "inverse": inverse}, **found)

    def stretch(self, proves: str, at: dict[str, str], direction: Sequence[str], lower: str, uses: Sequence[int], bits: int = 0) -> int:
        return self.line("stretch", proves, uses, {"at": at, "bits": bits, "direction": list(direction)}, lower=lower)

    def compared(self, uses: Sequence[int], p: Sequence[str], b: Sequence[str], x: str, y: str) -> int:
        return self.line("componentwise", "componentwise", uses, {"about": ["0"] * len(p), "p": list(p), "b": list(b)}, x=x, y=y)

    def found(self, kind: str | None, asked: Sequence[tuple[str, str]], metric: dict[str, Any], sensitivities: Sequence[Any] = ()) -> Entries:
        entries = self.entries(kind, asked, sensitivities, "x")
        results = entries["results"]
        results["states"]["y"] = dict(results["states"]["x"])
        if kind:
            results["set"]["centre"]["y"] = None
        results["metric"] = metric
        return entries


def both(upper: dict[str, str]) -> dict[str, str]:
    """Entries with the lower ends opposite to the upper ones."""
    return upper | {f"-{at}": str(-Q(x)) for at, x in upper.items()}


BOX = {"kind": "box", "weights": {"x": "1", "y": "2"}}
POLYTOPE = {"kind": "polytope", "matrix": SLANTED}


def hair(text: str, by: int) -> str:
    return str(Q(text) + by * Q("1" + STEP))


def judged(name: str, entries: Entries, place: str = "results") -> None:
    """Nothing else is derived of any requirement, and undecided may be said of all."""
    accept(name, entries)
    for n, r in enumerate(entries["results"]["requirements"]):
        for other in sorted({"proved", "refuted"} - {r["verdict"]}):
            reject(f"{name}: {r['that']} {other}", but(entries, f"results requirements {n} verdict", other), place, f"[{n + 1}].verdict: {other} is claimed, {r['verdict']} was derived")


def tight(name: str, entries: Entries, lines: dict[int, tuple[tuple[str, int, str], ...]]) -> None:
    """Of these lines every conclusion is exact: a hair in the direction given is refused."""
    for number, ends in lines.items():
        for key, by, reason in ends:
            old = entries["proof"][number - 1]["concludes"][key]
            reject(f"{name}: line {number} {key}", but(entries, f"proof {number - 1} concludes {key}", hair(old, by)), f"proof line {number}", reason)


def exact(name: str, entries: Entries, figures: dict[str, tuple[str | None, str | None]]) -> Entries:
    """Every figure of the results as derived; wider is accepted, a hair less is not."""
    full = entries
    for path, (low, high) in figures.items():
        full = but(full, f"results {path}", {"lower": low, "upper": high})
    accept(f"{name}: exactly", full)
    for path, ends in figures.items():
        for end, value, by in zip(("lower", "upper"), ends, (1, -1), strict=True):
            at = "results" + (f".{path}".replace(" ", ".") if not path.startswith("requirements") else "")
            at = ".".join(at.split(".")[:3]) if path.startswith("set centre") else at
            if value is None:
                reject(f"{name}: {path} {end}", but(full, f"results {path} {end}", "1"), "results", f"{end}: nothing was derived" if path.startswith("requirements") else f"{at}.{end}: nothing was derived")
            else:
                accept(f"{name}: {path} {end}, wider", but(full, f"results {path} {end}", hair(value, -by)))
                reject(f"{name}: {path} {end}", but(full, f"results {path} {end}", hair(value, by)), "results", f"{end}: more is claimed")
    return full


# the region is mapped into itself: [[1/2, 1/4], [1/4, 1/4]] and misses of 1/8 and 1/16, in the largest of |x|, 2|y|

PAIR = ("x/2 + y/4 + p", "x/4 + y/4 + q")
NOISE = 'p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]'
STATED = "[metric]\nweights = { y = 2 }"


def region(asked: Sequence[str] = ("settles",), **other: str) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 point, 5 ball, 6 7 images, 8 invariant, 9 10 matrices, 11 pair, 12 bound, 13 14 entries,
    15 comparison, 16 17 stretches, 18 point."""
    d = Lines(claim(*PAIR, uncertain=NOISE, asked=asked, rest=other.get("rest", STATED), top=other.get("top", "")))
    return in_region(d)


def in_region(d: Lines, kind: str = "box") -> Lines:
    first = len(d.proof)

    def of(*numbers: int) -> list[int]:
        return [first + n for n in numbers]

    d.metric(kind, WEIGHTS, UNWEIGHTED)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.point("target[x]", {}, "0")
    d.theorem("largest-ball", "ball", of(1, 2, 3, 4), radius="1", outer="1")
    d.range("image[x]", "-7/8", "7/8")
    d.range("image[y]", "-9/16", "9/16")
    d.theorem("invariant-region", "invariant", of(1, 2, 3, 6, 7))
    d.matrix("slopes", "3/4", of(8))
    d.matrix("misses", "1/8", of(8))
    d.theorem("slope", "slope", of(9, 10), gain="3/4", residual="1/8")
    d.theorem("ultimate-bound", "bound[slope]", of(8, 11), bound="1/2")
    d.table("slopes", ["1/2", "1/4", "1/4", "1/4"], of(8))
    d.table("misses", ["1/8", "1/16"], of(8))
    d.compared(of(8, 13, 14), ["2", "1"], ["7/20", "1/5"], "7/20", "1/5")
    d.stretch("slopes", {"x": "1", "y": "-1", "p": "1/16", "q": "0"}, ["1", "1/2"], "3/4", of(8))
    d.stretch("misses", {"p": "1/16", "q": "1/16"} if d.prefix else {"p": "1/8", "q": "0"}, ["1"], "1/8", of(8))
    d.point("target[y]", {}, "0")
    return d


IN_REGION = [
    ("settles", "proved"), ("gain <= 0.75", "proved"), ("gain < 0.75", "refuted"), (f"gain <= 3/4 - 1{STEP}", "refuted"), (f"gain < 3/4 + 1{STEP}", "proved"),
    ("residual <= 1/8", "proved"), ("residual < 1/8", "refuted"), (f"residual <= 1/8 - 1{STEP}", "refuted"), (f"residual < 1/8 + 1{STEP}", "proved"),
    ("bound <= 1/2", "proved"), ("bound < 1/2", "undecided"), ("bound < 1/4", "undecided"),
    ("bound(x) <= 7/20", "proved"), ("bound(x) < 7/20", "undecided"), (f"bound(x) < 7/20 + 1{STEP}", "proved"), ("bound(y) <= 1/5", "proved"), ("bound(y) < 1/5", "undecided"),
    ("sharp_bound(x) <= 7/20", "proved"), ("sharp_bound(x) < 7/20", "undecided"), ("sharp_bound(y) < 1/5", "undecided"), ("sharp_bound(y) <= 1/5", "proved"),
    ("radius(x) >= 1", "proved"), ("radius(x) > 1", "undecided"), ("radius(y) >= 1", "proved"), (f"radius(y) > 1 - 1{STEP}", "proved"), ("radius(y) > 1", "undecided"),
    ("push(x) >= 13/20", "undecided"), (f"push(x) >= 13/20 - 1{STEP}", "proved"), ("push(y) > 4/5", "undecided"), (f"push(y) >= 4/5 - 1{STEP}", "proved"),
    # from ‖e‖ = 1 by e -> 3/4 e + 1/8: 7/8, 25/32, 91/128, 337/512
    ("steps(x, 1, 7/8) <= 1", "proved"), ("steps(x, 1, 7/8) < 1", "undecided"), (f"steps(x, 1, 7/8 - 1{STEP}) <= 1", "undecided"), ("steps(x, 1, 337/512) <= 4", "proved"),
    ("steps(x, 1, 1/2) <= 999", "undecided"), ("steps(x, 1, 1/2) <= 20000", "undecided"), (f"steps(x, 1 + 1{STEP}, 1) <= 9", "undecided"), ("steps(x, 1/2, 1/2) <= 0", "proved"), ("steps(x, 1/2, 499/1000) <= 99", "undecided"),
    # y: ‖u‖ = 2, |y| <= ‖e‖/2
    ("steps(y, 1/2, 7/16) <= 1", "proved"), (f"steps(y, 1/2, 7/16 - 1{STEP}) <= 1", "undecided"), (f"steps(y, 1/2 + 1{STEP}, 7/16) <= 1", "undecided"), ("steps(y, 1, 7/16) <= 5", "proved"), ("steps(y, 1, 7/16) < 5", "undecided"), ("steps(y, 1/4, 1/4) < 1", "proved"),
    ("value(next(x)) <= 7/8", "proved"), ("value(next(x)) < 7/8", "refuted"), ("always(x <= 1)", "proved"), ("always(y < 1)", "refuted"), ("sensitivity(y, q) >= 1", "proved"), ("value(2) <= 2", "proved"),
]
REGION_FIGURES: dict[str, tuple[str | None, str | None]] = {
    "gain": ("3/4", "3/4"), "residual": ("1/8", "1/8"), "bound": ("1/2", "1/2"), "radius": ("1", "1"), "set radius": ("1", "1"), "set centre x": ("0", "0"), "set centre y": ("0", "0"), "sharp_bound": (None, None),
    "states x bound": (None, "7/20"), "states y bound": (None, "1/5"), "states x radius": ("1", "1"), "states y radius": ("1", "1"), "states x push": ("13/20", None), "states y push": ("4/5", None),
    "states x sharp_bound": (None, "7/20"), "states y sharp_bound": (None, "1/5"), "routes slope gain": ("3/4", "3/4"), "routes slope residual": ("1/8", "1/8"), "routes slope bound": ("1/2", "1/2"), "requirements 0 value": (None, "2/5"),
}


def asked_of(d: Lines, asked: Sequence[tuple[str, str]], on: int) -> list[dict[str, str]]:
    """Lines of the requirements about ranges; what `sensitivities` says of them."""
    bands = []
    for n, (that, _) in enumerate(asked, 1):
        if that.startswith("value(next(x))"):
            d.range(f"require[{n}]", "-7/8", "7/8", [on])
            d.point(f"require[{n}]", {"x": "1", "y": "1", "p": "1/8"}, "7/8", uses=[on])
        if that.startswith("always("):
            d.range(f"require[{n}]", "-2", "0", [on])
            d.point(f"require[{n}]", {that[7]: "1"}, "0", uses=[on])
        if that.startswith("value(2)"):
            d.range(f"require[{n}]", "2", "2", [on])
        if that.startswith("sensitivity"):
            d.range(f"require[{n}]", "1", "1", [on])
            bands.append({"of": "y", "by": "q", "lower": "1", "upper": "1"})
    return bands


def touching() -> None:
    d = region([that for that, _ in IN_REGION])
    bands = asked_of(d, IN_REGION, 8)
    judged("region", d.found("region", IN_REGION, BOX, bands))


touching()
PLAIN = region().found("region", [("settles", "proved")], BOX)
FULL = exact("region", PLAIN, REGION_FIGURES)
WIDER = "the range shown is wider than what is concluded"
tight("region", PLAIN, {
    2: (("lower", 1, WIDER), ("upper", -1, WIDER)), 4: (("lower", 1, WIDER),), 6: (("lower", 1, WIDER), ("upper", -1, WIDER)), 7: (("lower", 1, WIDER), ("upper", -1, WIDER)),
    5: (("radius", 1, "radius: the ball is not shown to lie in the region of x"), ("outer", -1, "outer: larger balls are not shown to leave the region")),
    9: (("norm", -1, "slopes: a leaf is not shown to stay within the norm"),), 10: (("norm", -1, "misses: a leaf is not shown to stay within the norm"),),
    11: (("gain", -1, "gain or residual: less than what the lines used show"), ("residual", -1, "gain or residual: less")), 12: (("bound", -1, "bound: less than residual / (1 - gain)"),),
    13: tuple((f"{i},{j}", -1, f"slopes: entry {i},{j} is less than what the leaves show") for i in (1, 2) for j in (1, 2)),
    14: tuple((f"{i},1", -1, f"misses: entry {i},1 is less than what the leaves show") for i in (1, 2)),
    15: (("x", -1, "x: less than what the comparison shows"), ("y", -1, "y: less than what the comparison shows")),
    16: (("lower", 1, "slopes: the direction is not shown to be stretched by so much"),), 17: (("lower", 1, "misses: the direction is not shown"),),
})


def by_scales() -> None:
    """The same in |(x, 2y)|, of which the rests of direct leaves are shared by scales: misses of 1/4, slopes below 4/5."""
    tiny = Q(1, 10**20)
    d = in_region(Lines(claim(*PAIR, uncertain=NOISE, rest="[metric]\nkind = 'ellipsoid'")), "ellipsoid")
    residual = str(Q(1, 4) + tiny)
    good = but(
        d.found("region", [("settles", "proved")], {"kind": "ellipsoid", "matrix": [["1", "0"], ["0", "4"]]}),
        "proof 8 witness scales", [["2", "1"], ["1", "2"]], "proof 8 concludes norm", "4/5", "proof 9 witness scales", [["1"], ["1", "1"]], "proof 9 concludes norm", residual,
        "proof 10 concludes", {"gain": "4/5", "residual": residual}, "proof 11 concludes bound", str(Q(residual) * 5), "proof 15 concludes lower", "1/2", "proof 16 concludes lower", "1/8",
    )
    accept("by scales", good)
    reject("by scales, less", but(good, "proof 9 concludes norm", str(Q(1, 4) - tiny)), "proof line 10", "misses: a leaf is not shown to stay within the norm")
    reject("by scales, much less", but(good, "proof 8 concludes norm", "1/2"), "proof line 9", "slopes: a leaf is not shown to stay within the norm")
    accept("by other scales", but(good, "proof 8 witness scales", [["200", "100"], ["101", "200"]]))
    reject("by scales that do not suit", but(good, "proof 9 witness scales", [["1"], ["9", "1"]]), "proof line 10", "misses: a leaf is not shown to stay within the norm")
    reject("by scales of rows and columns exchanged", but(good, "proof 9 witness scales", [["1", "1"], ["1"]]), "proof line 10", "scales: a list of 1 numbers")
    for value, reason in (
        ("", "scales: none, or"), (None, "scales: none, or"), ([["1", "1"]], "scales: none, or"), ([["1", "1"]] * 3, "scales: none, or"), ([["1"], ["1", "1"]], "scales: a list of 2 numbers"), ([["1", "1"], ["1"]], "scales: a list of 2 numbers"),
        ([["1", "1"], ["1", "1", "1"]], "scales: a list of 2 numbers"), ([["1", "1"], "11"], "scales: "), ([["1", 1], ["1", "1"]], "scales: "), ([["0", "1"], ["1", "1"]], "scales: 2 and 2 positive numbers"), ([["1", "1"], ["1", "-1"]], "scales: 2 and 2 positive numbers"),
        (GONE, "witness: the keys of matrix are bits, scales, trees"),
    ):
        reject(f"scales {value}", but(good, "proof 8 witness scales", value), "proof line 9", reason)
    reject("scales of a box", but(PLAIN, "proof 8 witness scales", [["1", "1"], ["1", "1"]]), "proof line 9", "scales: none, or of an ellipsoid")


by_scales()


def two_metrics() -> None:
    """The ball of one norm, the invariant region of another: a bound of 1 in it would be read in the first."""
    d = Lines(claim(*PAIR, uncertain=NOISE))
    d.metric("box", WEIGHTS, UNWEIGHTED)
    d.metric("box", [["1/10", "0"], ["0", "1/5"]], [["10", "0"], ["0", "5"]])
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.theorem("smaller-ball", "ball", [1, 3, 4], radius="1")
    d.range("image[x]", "-7/8", "7/8")
    d.range("image[y]", "-9/16", "9/16")
    d.theorem("invariant-region", "invariant", [2, 3, 4, 6, 7])
    d.matrix("slopes", "3/4", [8])
    d.matrix("misses", "1/80", [8])
    d.theorem("slope", "slope", [9, 10], gain="3/4", residual="1/80")
    d.theorem("ultimate-bound", "bound[slope]", [8, 11], bound="1/20")
    entries = d.found("region", [("settles", "proved")], BOX)
    reject("two metrics", entries, "results", "the ball and the invariant set are of different metrics")
    again = but(entries, "proof 1", entries["proof"][0], "proof 9 concludes norm", "1/8", "proof 10 concludes residual", "1/8", "proof 11 concludes bound", "1/2")
    accept("one metric on two lines", again)


two_metrics()


def corrections() -> None:
    """A correction told apart might show a smaller gain: then none is refuted, but for the route slope alone; the residual is."""
    asked = ["gain < 3/4", "residual < 1/8"]
    for top, verdict in (('correction = ["f"]\n', "undecided"), ('correction = ["f"]\nroute = "slope"\n', "refuted"), ("", "refuted")):
        d = region(asked, rest=STATED + '\n[define]\nf = "x"\n', top=top)
        judged(f"correction {top!r}", d.found("region", [(asked[0], verdict), (asked[1], "refuted")], BOX))


corrections()

# told apart from two corrections: x + y/4 + p and x/4 + y + q without them, and 1 − 1/2, 1 − 3/4 of what they leave

TOLD = ("x + y/4 - f + p", "y + x/4 - h + q")
CORRECTED, TWO_NAMES = 'correction = ["f", "h"]\n', '\n[define]\nf = "x/2"\nh = "3*y/4"\n'


def apart(asked: Sequence[str] = ("settles",), top: str = "", names: str = TWO_NAMES, rest: str = STATED) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 point, 5 ball, 6 7 images, 8 invariant, 9 10 matrices, 11 pair, 12 bound, 13 14 entries, 15 comparison, 16 17 stretches of slope,
    18 19 matrices, 20 pair, 21 bound, 22 23 entries, 24 comparison, 25 26 stretches of split, 27 28 products of both."""
    d = in_region(Lines(claim(*TOLD, uncertain=NOISE, asked=asked, rest=rest + names, top=top + CORRECTED)))
    d.proof.pop()
    d.proof[11]["concludes"]["bound"], d.proof[14]["concludes"]["y"] = "5/4", "1"  # more than they might say: split says as much, and less
    for line in d.proof:
        if "trees" in line["witness"]:
            line["witness"]["trees"] = ["c"]
    d.matrix("split-slopes", "1/2", [8], ["c"])
    d.matrix("split-residuals", "5/8", [8], ["c"])
    d.theorem("split", "split", [18, 19], gain="1/2", residual="5/8")
    d.theorem("ultimate-bound", "bound[split]", [8, 20], bound="5/4")
    d.table("split-slopes", ["1/2", "0", "0", "1/4"], [8], trees=("c",))
    d.table("split-residuals", ["3/8", "5/16"], [8], trees=("c",))
    d.line("componentwise", "split-componentwise", [8, 22, 23], {"about": ["0", "0"], "p": ["1", "1"], "b": ["3/4", "5/12"]}, x="3/4", y="5/12")
    d.stretch("split-slopes", {"x": "0", "y": "0"}, ["1", "0"], "1/2", [8])
    d.stretch("split-residuals", {"x": "1", "y": "0", "p": "0", "q": "1/16"}, ["1"], "5/8", [8])
    nothing = {"x": "0", "y": "0"}
    d.line("product", "slopes", [8], {"bits": 0, "points": [{**nothing, "p": "0", "q": "0"}], "power": 1}, lower="3/8")
    d.line("product", "split-slopes", [8], {"bits": 0, "points": [nothing], "power": 1}, lower="3/8")
    return d


def told(d: Lines, asked: Sequence[tuple[str, str]], route: str = "slope", metric: dict[str, Any] = BOX) -> Entries:
    entries = d.found("region", asked, metric)
    return but(entries, "results route", route, "results routes", {x: {"gain": None, "residual": None, "bound": None} for x in ("slope", "split") if any(line["rule"] == x for line in d.proof)})


TOLD_APART = [
    ("settles", "proved"), ("gain <= 1/2", "proved"), ("gain < 1/2", "refuted"), (f"gain <= 1/2 - 1{STEP}", "refuted"), ("residual <= 1/8", "proved"), ("residual < 1/8", "refuted"), ("bound <= 5/4", "proved"), ("bound < 5/4", "undecided"), ("bound(x) <= 7/20", "proved"), ("bound(x) < 7/20", "undecided"), ("bound(y) <= 5/12", "proved"), ("bound(y) < 5/12", "undecided"),
    # by slope 7/8, 25/32; by split 9/8: from 1 no count at all
    ("steps(x, 1, 7/8) <= 1", "proved"), ("steps(x, 1, 25/32) <= 2", "proved"), (f"steps(x, 1, 25/32 - 1{STEP}) <= 2", "undecided"),
]
ASKED_FOR = [
    ("settles", "proved"), ("gain <= 1/2", "proved"), ("gain < 1/2", "refuted"), ("residual <= 5/8", "proved"), ("residual < 5/8", "undecided"), ("residual < 1/8", "refuted"), ("residual <= 1/8", "undecided"), ("bound <= 5/4", "proved"), ("bound < 5/4", "undecided"), ("bound(x) <= 7/20", "proved"),
]
APART_FIGURES: dict[str, tuple[str | None, str | None]] = {
    "gain": ("3/4", "3/4"), "residual": ("1/8", "1/8"), "bound": ("1/2", "5/4"), "routes split gain": ("1/2", "1/2"), "routes split residual": ("5/8", "5/8"), "routes split bound": ("5/4", "5/4"), "routes slope gain": ("3/4", "3/4"), "states x bound": (None, "7/20"), "states y bound": (None, "5/12"),
}


def told_apart() -> None:
    judged("told apart", told(apart([that for that, _ in TOLD_APART]), TOLD_APART))
    judged("split is asked for", told(apart([that for that, _ in ASKED_FOR], top='route = "split"\n'), ASKED_FOR, "split"))
    good = told(apart(), [("settles", "proved")])
    exact("told apart", good, APART_FIGURES)
    for name, change in (("the other route", ("results route", "split")), ("a route less", ("results routes split", GONE))):
        reject(f"told apart: {name}", but(good, *change), "results", "results.route")
    leaf, short, far = "a leaf is not shown to stay within the norm", "gain or residual: less than what the lines used show", "the direction is not shown to be stretched by so much"
    tight("told apart", good, {
        18: (("norm", -1, f"split-slopes: {leaf}"),), 19: (("norm", -1, f"split-residuals: {leaf}"),), 20: (("gain", -1, short), ("residual", -1, short)), 21: (("bound", -1, "bound: less than residual / (1 - gain)"),), 22: (("1,1", -1, "entry 1,1 is less"), ("2,2", -1, "entry 2,2 is less")),
        23: (("1,1", -1, "entry 1,1 is less"), ("2,1", -1, "entry 2,1 is less")), 24: (("x", -1, "x: less than what the comparison shows"), ("y", -1, "y: less than what")), 25: (("lower", 1, far),), 26: (("lower", 1, far),), 27: (("lower", 1, "the trace is not shown"),), 28: (("lower", 1, "the trace is not shown"),),
    })
    orbit = {"bits": 0, "held": {}, "start": {"x": "0", "y": "0"}, "steps": [{"p": "0", "q": "0"}]}
    for number, changes, reason in (
        (20, ("uses", [9, 19]), "split rests on matrix split-slopes, matrix split-residuals"), (20, ("uses", [18, 10]), "split rests on"), (20, ("uses", [18]), "split rests on"), (20, ("rule", "slope"), "slope rests on"), (20, ("proves", "slope"), "split rests on"), (20, ("rule", "slope", "proves", "slope"), "slope rests on matrix slopes"), (20, ("proves", "split@1"), "split rests on"),
        (21, ("proves", "bound[slope]"), "gain and residual of another route"), (21, ("uses", [8, 11]), "gain and residual of another route"), (24, ("proves", "componentwise"), "componentwise rests on entries slopes, entries misses"), (24, ("uses", [8, 22, 14]), "split-componentwise rests on"), (24, ("uses", [8, 13, 23]), "split-componentwise rests on"), (24, ("proves", "split"), "componentwise rests on the invariant set"),
        (18, ("proves", "split-slopes@1"), "after fewer steps"), (18, ("proves", "split-slope"), "a matrix proves slopes or misses"), (28, ("proves", "split-residuals"), "a product of slopes rests on"), (28, ("proves", "misses"), "a product of slopes rests on"), (28, ("proves", "split-slopes@1"), "a product of slopes rests on"),
    ):
        paths = [x if k % 2 else f"proof {number - 1} {x}" for k, x in enumerate(changes)]
        reject(f"told apart: {number} {changes}", but(good, *paths), f"proof line {number}", reason)
    plain = but(good, "claim text", good["claim"]["text"].replace(CORRECTED, ""))
    reject("told apart: no correction", plain, "proof line 18", "split-slope[x,x] is no obligation of this claim")
    # what needs two trajectories to come closer is not for this route, a box that absorbs is
    for uses, reason in (([8, 21], "attracting rests on the invariant set, then a bound"), ([8, 24], "attracting rests on"), ([8, 12], ""), ([8, 15], "")):
        line = {"rule": "attracting", "proves": "attracting", "uses": uses, "witness": {"bits": 0, "trees": ["c"], "rows": ONE, "low": ["-7/20", "-1/5"], "high": ["7/20", "1/5"]}, "concludes": {"x": "7/20", "y": "1/5"}}
        if reason:
            reject(f"drawn in, {uses}", but(good, "proof", [*good["proof"], line]), "proof line 29", reason)
        else:
            accept(f"drawn in, {uses}", but(without(good, 22, 23, 24), "proof", [*without(good, 22, 23, 24)["proof"], line]))
    for uses, reason in (([8, 20], "a periodic orbit rests on the invariant set, and the gain on it"), ([8, 11], "")):
        entries = but(good, "proof", [*good["proof"], {"rule": "periodic", "proves": "periodic", "uses": uses, "witness": orbit, "concludes": {"x": "0", "y": "0"}}])
        if reason:
            reject(f"an orbit, {uses}", entries, "proof line 29", reason)
        else:
            accept(f"an orbit, {uses}", entries)
    # 5/4 of the norm, 3/4 and 5/12 by comparison, each above what it is of
    for uses, x, y, reason in (([24], hair("3/4", 1), hair("5/12", 1), ""), ([24], "3/4", "1/2", "x: no more than the bounds show"), ([24], "4/5", "5/12", "y: no more than"), ([21], "1", "1", "x: no more than the bounds show")):
        lines = [{"rule": "absorbed", "proves": "absorbed", "uses": uses, "witness": {}, "concludes": {"x": x, "y": y}}, *({**good["proof"][n - 1], "uses": [29]} for n in (13,)), {**good["proof"][14], "uses": [29, 30, 14], "concludes": {"x": "7/20", "y": "1/5"}}]
        entries = but(good, "proof", [*good["proof"], *lines])
        if reason:
            reject(f"absorbed by {uses} in {x}, {y}", entries, "proof line 29", reason)
        else:
            accept(f"absorbed by {uses} in {x}, {y}", entries)
    # refuted where both routes are shown not to be below: in this norm, or in any
    asked = [("gain < 1/2", "refuted"), ("gain < 3/8", "refuted")]
    both_ = told(apart([that for that, _ in asked]), asked)
    accept("refuted by both", both_)
    free = told(apart([that for that, _ in asked], rest=""), [("gain < 1/2", "undecided"), asked[1]])
    judged("refuted in any norm", free)
    for gone, first, second in (((25,), "undecided", "refuted"), ((16,), "undecided", "refuted"), ((25, 28), "undecided", "undecided"), ((16, 27), "undecided", "undecided"), ((27, 28), "refuted", "refuted"), ((16, 28), "undecided", "refuted")):
        judged(f"without {gone}", but(without(both_, *gone), "results requirements 0 verdict", first, "results requirements 1 verdict", second))
    for gone in ((27,), (28,)):
        judged(f"in any norm without {gone}", but(without(free, *gone), "results requirements 1 verdict", "undecided"))
    one = 'route = "split"\n'
    for gone, first in (((16, 27), "refuted"), ((25, 28), "undecided")):
        entries = told(apart([that for that, _ in asked], top=one), [("gain < 1/2", first), ("gain < 3/8", first)], "split")
        judged(f"split alone, without {gone}", without(entries, *gone))


@unit
def combinations_of_cells(checker: Any) -> None:
    """Each entry has few cells, all of them together too many: told before they are listed."""
    text = claim("u/2", "w/2", rest='[library]\nfile = "t.csv"\nat = { p_ = "x" }\n[[library]]\nfile = "s.csv"\nat = { q_ = "y" }\n'.replace("[library]\nf", "[[library]]\nf", 1))
    tables = {"t.csv": "p_,u\n-1,0\n0,1\n1,2\n", "s.csv": "q_,w\n-1,0\n0,1\n0.5,1\n1,2\n"}
    d = derivation(checker, text, tables)
    one = tuple(tuple(Q(x) for x in row) for row in ONE)
    domain = checker.derive.Domain(False, Q(0), (Q(0), Q(0)), targets=((Q(0), Q(0)),) * 2, metric=checker.matrices.Metric("box", one, one))
    module = checker.jacobians
    with limited(module, MOST_CELLS=6):
        assert [len(v.cells) for v in module.Table(d, "slopes", domain, 0, None).variables] == [2, 3]
    with limited(module, MOST_CELLS=5), refuses(checker.calculus.Unprovable, "more than 5 combinations of library cells and listed values"):
        module.Table(d, "slopes", domain, 0, None)


# a ball: [[1/2, 3/8], [1/2, 0]] and a miss of 1/8 of x, in 2|x| + |y|, on [-1, 1] x [-2, 2]; (1, 2) leads to 5/4

BALL = ("x/2 + 3*y/8 + p", "x/2")
ENDS = ("[-1, 1]", "[-2, 2]")


def ball(asked: Sequence[str] = ("settles",), invariant: str = "invariant-ball") -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 5 points, 6 ball, 7 escape, 8 9 matrices, 10 pair, 11 12 entries in the slanted basis,
    13 invariant, 14 bound, 15 16 entries, 17 comparison, 18 19 stretches."""
    d = Lines(claim(*BALL, ends=ENDS, asked=asked))
    d.metric("polytope", SLANTED, UPRIGHT)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.point("target[x]", {}, "0")
    d.point("target[y]", {}, "0")
    d.theorem("largest-ball", "ball", [1, 2, 3, 4, 5], radius="2", outer="2")
    d.point("image[x]", {"x": "1", "y": "2", "p": "0"}, "5/4")
    d.matrix("slopes", "3/4", [6])
    d.matrix("misses", "1/4", [6])
    d.theorem("slope", "slope", [8, 9], gain="3/4", residual="1/4")
    d.table("slopes", ["3/4", "0", "1/2", "1/4"], [6], SLANTED, UPRIGHT)
    d.table("misses", ["1/4", "1/4"], [6], SLANTED, UPRIGHT)
    d.theorem(invariant, "invariant", [6, 10] if invariant == "invariant-ball" else [6, 11, 12])
    d.theorem("ultimate-bound", "bound[slope]", [13, 10], bound="1")
    d.table("slopes", ["1/2", "3/8", "1/2", "0"], [13])
    d.table("misses", ["1/8", "0"], [13])
    d.compared([13, 15, 16], ["1", "1"], ["2/5", "1/5"], "2/5", "1/5")
    d.stretch("slopes", {"x": "1/2", "y": "1", "p": "0"}, ["1", "0"], "3/4", [6])
    d.stretch("misses", {"p": "-1/8"}, ["-2"], "1/4", [6])
    return d


def without(entries: Entries, *numbers: int) -> Entries:
    """Without these lines, and with the others' numbers moved up."""
    kept = [n for n in range(1, len(entries["proof"]) + 1) if n not in numbers]
    found = but(entries, "proof", [entries["proof"][n - 1] for n in kept])
    for line in found["proof"]:
        line["uses"] = [kept.index(n) + 1 for n in line["uses"] if n in kept]
    if "slope" not in [line["rule"] for line in found["proof"]]:
        found["results"]["routes"] = {}
    return found


ON_BALL = [
    ("settles", "proved"), ("gain <= 3/4", "proved"), ("gain < 3/4", "undecided"), ("gain < 1/2", "undecided"), ("residual <= 1/4", "proved"), ("residual < 1/4", "undecided"), ("residual < 1/8", "undecided"),
    ("bound <= 1", "proved"), ("bound < 1", "undecided"), ("bound(x) <= 2/5", "proved"), ("bound(x) < 2/5", "undecided"), ("bound(y) <= 1/5", "proved"), ("bound(y) < 1/5", "undecided"), ("sharp_bound(x) < 2/5", "undecided"), ("sharp_bound(x) <= 2/5", "proved"),
    ("radius(x) >= 1", "proved"), ("radius(x) > 1", "undecided"), ("radius(y) >= 2", "proved"), ("radius(y) > 2", "undecided"), (f"radius(y) >= 2 + 1{STEP}", "undecided"),
    ("push(x) >= 1/2", "undecided"), (f"push(x) >= 1/2 - 1{STEP}", "proved"), ("push(y) >= 1", "undecided"), (f"push(y) >= 1 - 1{STEP}", "proved"),
    # e -> 3/4 e + 1/4 from 2: 7/4, 25/16; |x| <= ‖e‖/2
    ("steps(x, 1, 7/8) <= 1", "proved"), (f"steps(x, 1, 7/8 - 1{STEP}) <= 1", "undecided"), (f"steps(x, 1 + 1{STEP}, 1) <= 1", "undecided"), ("steps(y, 2, 25/16) <= 2", "proved"), (f"steps(y, 2, 25/16 - 1{STEP}) <= 2", "undecided"), ("steps(x, 1/2, 1/2) < 1", "proved"),
]
BALL_FIGURES: dict[str, tuple[str | None, str | None]] = {
    "gain": ("3/4", "3/4"), "residual": ("1/4", "1/4"), "bound": ("1", "1"), "radius": ("2", "2"), "set radius": ("2", "2"), "set centre x": ("0", "0"), "set centre y": ("0", "0"),
    "states x bound": (None, "2/5"), "states y bound": (None, "1/5"), "states x radius": ("1", "1"), "states y radius": ("2", "2"), "states x push": ("1/2", None), "states y push": ("1", None), "requirements 0 value": (None, "1"),
    "routes slope gain": ("3/4", "3/4"), "routes slope residual": ("1/4", "1/4"), "routes slope bound": ("1", "1"),
}


def on_ball() -> None:
    entries = without(ball([that for that, _ in ON_BALL]).found("ball", ON_BALL, POLYTOPE), 5, 11, 12)
    judged("ball", entries)
    plain = without(ball().found("ball", [("settles", "proved")], POLYTOPE), 11, 12)
    exact("ball", without(plain, 5), BALL_FIGURES)
    rows = ball(invariant="invariant-rows").found("ball", [("settles", "proved")], POLYTOPE)
    accept("ball by rows", rows)
    tight("ball by rows", rows, {
        6: (("radius", 1, "radius: the ball is not shown to lie in the region of x"), ("outer", -1, "outer: larger balls are not shown to leave the region")),
        7: (("lower", 1, WIDER),), 8: (("norm", -1, "slopes: a leaf is not shown to stay within the norm"),), 9: (("norm", -1, "misses: a leaf"),), 10: (("gain", -1, "gain or residual"), ("residual", -1, "gain or residual")),
        11: tuple((at, -1 if at[0] != "-" else 1, f"slopes: entry {at} is less") for at in ("1,1", "2,1", "-2,2")), 12: tuple((f"{i},1", -1, f"misses: entry {i},1 is less") for i in (1, 2)),
        14: (("bound", -1, "bound: less than"),), 18: (("lower", 1, "slopes: the direction"),), 19: (("lower", 1, "misses: the direction"),),
    })
    # invariant exactly: 3/4 2 + 1/2, or 1/2 2 + 1/4 2 + 1/2
    for value, good in (("1/2", True), (hair("1/2", 1), False)):
        changed = but(plain, "proof 9 concludes residual", value, "proof 11 concludes bound", str(4 * Q(value)))
        changed = but(changed, "proof 14 concludes x", "2/5") if good else changed
        in_norm = "gain times radius plus residual exceeds the radius"
        if good:
            accept("ball, invariant at equality", changed)
        else:
            reject("ball, not invariant by a hair", changed, "proof line 11", in_norm)
        for i in (1, 2):
            changed = but(rows, f"proof 11 concludes {i},1", value)
            if good:
                accept(f"rows, invariant at equality, {i}", changed)
            else:
                reject(f"rows, not invariant by a hair, {i}", changed, "proof line 13", "a row exceeds the radius")
    # a bound as large as the radius settles nothing; in the norm, or by states
    for value, good in (("2", False), (hair("2", -1), True)):
        bounded = without(plain, 13, 14, 15)
        changed = but(bounded, "proof 11 concludes bound", value, "results requirements 0 verdict", "proved")
        if good:
            accept("ball, settled by a hair", changed)
        else:
            reject("ball, not settled", changed, "results", "[1].verdict: proved is claimed, undecided was derived")
            accept("ball, undecided", but(changed, "results requirements 0 verdict", "undecided"))
    for x, good in (("4/5", False), (hair("4/5", -1), True)):
        by_states = without(rows, 8, 9, 10, 14, 18, 19)
        changed = but(by_states, "proof 12 witness b", [x, "2/5"], "proof 12 concludes x", x, "proof 12 concludes y", "2/5")
        if good:
            accept("ball by rows, settled by a hair", changed)
        else:
            reject("ball by rows, not settled", changed, "results", "[1].verdict: proved is claimed, undecided was derived")
            accept("ball by rows, undecided", but(changed, "results requirements 0 verdict", "undecided"))

on_ball()


# a ball about a moving target: c + 1/8 and 2c (or turned round), c in [-1/4, 1/4] moving by 1/64; the same Jacobian, a miss of 1/32

def led(turned: bool = False) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 point, 5 ball, 6 escape, 7 8 matrices, 9 10 target slopes, 11 pair, 12 13 slanted entries,
    14 invariant, 15 bound, 16 17 entries, 18 comparison, 19 comparison in the slanted basis, 20 21 stretches."""
    way = "-" if turned else ""
    at = ("-(c + 1/8)", "-2*c") if turned else ("c + 1/8", "2*c")
    step = (f"target(x) + (x - target(x))/2 + 3*(y - target(y))/8 + {way}p", "target(y) + (x - target(x))/2")
    d = Lines(claim(*step, ends=ENDS, uncertain='p = ["-1/32", "1/32"]\nc = { range = ["-1/4", "1/4"], held = true, change = "1/64" }', target=at))

    def of(low: str, high: str) -> tuple[str, str]:
        return (str(-Q(high)), str(-Q(low))) if turned else (low, high)

    d.metric("polytope", SLANTED, UPRIGHT)
    d.range("target[x]", *of("-1/8", "3/8"))
    d.range("target[y]", "-1/2", "1/2")
    d.point("target[x]", {"c": "1/4"}, of("3/8", "3/8")[0])
    d.theorem("largest-ball", "ball", [1, 2, 3, 4], radius="5/4", outer="5/4")
    d.point("image[x]", {"x": way + "1", "y": way + "2", "c": "1/4", "p": "0"}, way + "5/4")
    d.matrix("slopes", "3/4", [5], ["c"])
    d.matrix("misses", "1/16", [5], ["c"])
    d.range("target-slope[x,c]", *of("1", "1"))
    d.range("target-slope[y,c]", *of("2", "2"))
    d.theorem("slope", "slope", [7, 8, 9, 10], gain="3/4", residual="1/8")
    d.table("slopes", ["3/4", "0", "1/2", "1/4"], [5], SLANTED, UPRIGHT, ["c"])
    d.table("misses", ["1/16", "1/16"], [5], SLANTED, UPRIGHT, ["c"])
    d.theorem("invariant-rows", "invariant", [5, 12, 13, 9, 10])
    d.theorem("ultimate-bound", "bound[slope]", [14, 11], bound="1/2")
    d.table("slopes", ["1/2", "3/8", "1/2", "0"], [5], trees=["c"])
    d.table("misses", ["1/32", "0"], [5], trees=["c"])
    d.compared([14, 16, 17, 9, 10], ["1", "1"], ["3/16", "1/8"], "3/16", "1/8")
    d.stretch("slopes", {"error(x)": "5/8", "error(y)": "0", "c": "0", "p": "0"}, ["1", "0"], "3/4", [5])
    d.stretch("misses", {"p": "1/32", "c": "1/4"}, ["1"], "1/16", [5])
    return d


def on_moving_ball() -> None:
    for turned in (False, True):
        name = f"led{' the other way' if turned else ''}"
        entries = led(turned).found("ball", [("settles", "proved")], POLYTOPE)
        centre = ("-3/8", "1/8") if turned else ("-1/8", "3/8")
        accept(name, entries)
        tight(name, entries, {
            2: (("lower", 1, WIDER), ("upper", -1, WIDER)), 3: (("lower", 1, WIDER), ("upper", -1, WIDER)), 5: (("radius", 1, "radius: the ball is not shown to lie in the region of x"), ("outer", -1, "outer: larger balls are not shown")),
            7: (("norm", -1, "slopes: a leaf"),), 8: (("norm", -1, "misses: a leaf"),), 9: (("lower", 1, WIDER),), 10: (("upper", -1, WIDER),), 11: (("gain", -1, "gain or residual"), ("residual", -1, "gain or residual")),
            18: (("x", -1, "x: less than what the comparison shows"), ("y", -1, "y: less than what the comparison shows")), 19: (("lower", 1, "slopes: the direction"),), 20: (("lower", 1, "misses: the direction"),),
        })
        exact(name, entries, {
            "gain": ("3/4", "3/4"), "residual": ("1/16", "1/8"), "bound": ("1/4", "1/2"), "radius": ("5/4", "5/4"), "set centre x": centre, "set centre y": ("-1/2", "1/2"), "states x bound": (None, "3/16"), "states y bound": (None, "1/8"),
            "states x radius": ("5/8", "5/8"), "states y radius": ("5/4", "5/4"), "states x push": ("3/8", None), "states y push": ("3/4", None),
        })
        for b in (["3/16", hair("1/8", -1)], [hair("3/16", -1), "1/8"]):
            reject(f"{name}: b {b[0][:5]} {b[1][:5]}", but(entries, "proof 17 witness b", b), "proof line 18", "p, b: K p < p, K b + residual <= b and p > 0 are not all met")
        for x, y, good in (("5/16", "5/8", True), ("5/16", hair("5/8", 1), False), (hair("5/16", 1), "5/8", False), ("-5/16", "-5/8", True), ("-5/16", hair("-5/8", -1), False), ("5/8", "0", True), ("-5/16", "5/8", True)):
            changed = but(entries, "proof 18 witness at error(x)", x, "proof 18 witness at error(y)", y)
            if good:
                accept(f"{name}: a point at {x}, {y}", changed)
            else:
                reject(f"{name}: a point at {x[:6]}, {y[:6]}", changed, "proof line 19", "at: not shown to be in the set")
        reject(f"{name}: a point beyond the ball's width", but(entries, "proof 18 witness at error(x)", hair("5/8", 1)), "proof line 19", "at.error(x): outside the range")
        # without the movement the rows and the residual would be less
        reject(f"{name}: movement forgotten", but(entries, "proof 10 concludes residual", "1/16"), "proof line 11", "gain or residual")
        # 3/4 5/4 + e + 1/16 = 5/4 and 1/2 5/4 + 1/4 5/4 + e + 1/16 = 5/4 at e = 1/4
        for i in (1, 2):
            accept(f"{name}: rows at equality {i}", but(entries, f"proof 12 concludes {i},1", "1/4"))
            reject(f"{name}: rows beyond {i}", but(entries, f"proof 12 concludes {i},1", hair("1/4", 1)), "proof line 14", "a row exceeds the radius")
        # in the slanted basis: b = (1/2, 1/2), |x| <= 1/4, |y| <= 1/2
        slanted = but(entries, "proof 17 uses", [14, 12, 13, 9, 10], "proof 17 witness b", ["1/2", "1/2"], "proof 17 concludes", {"x": "1/4", "y": "1/2"})
        slanted = without(slanted, 15, 16, 17)
        accept(f"{name}: slanted comparison", slanted)
        tight(f"{name}: slanted comparison", slanted, {15: (("x", -1, "x: less than what the comparison shows"), ("y", -1, "y: less than what the comparison shows"))})
        for b in (["1/2", hair("1/2", -1)], [hair("1/2", -1), "1/2"]):
            reject(f"{name}: slanted b {b[0][:5]} {b[1][:5]}", but(slanted, "proof 14 witness b", b), "proof line 15", "p, b: K p < p")


on_moving_ball()


# what lines may use, prove, hold

def malformed() -> None:
    region_, rows, moving = PLAIN, ball(invariant="invariant-rows").found("ball", [("settles", "proved")], POLYTOPE), led().found("ball", [("settles", "proved")], POLYTOPE)
    uses: Any
    value: Any
    for uses, reason in (([], "uses: the one line that gives the set"), ([8, 8], "uses: the one line"), ([1], "uses: the one line"), ([2], "uses: the one line"), ([8, 1], "uses: the one line")):
        for n in (9, 10, 13, 14, 16, 17):
            reject(f"line {n} uses {uses}", but(region_, f"proof {n - 1} uses", uses), f"proof line {n}", reason)
    for uses in ([1], [2]):
        reject(f"metric uses {uses}", but(region_, "proof 17", {**region_["proof"][0], "uses": uses}), "proof line 18", "a metric rests on no other line")
    reject("metric of another name", but(region_, "proof 0 proves", "norm"), "proof line 1", "a metric rests on no other line")
    for n, of in ((5, "ball"), (8, "invariant"), (11, "slope"), (12, "bound[slope]"), (15, "componentwise")):
        reject(f"line {n} proves another", but(region_, f"proof {n - 1} proves", "more"), f"proof line {n}", "invariant set, then entries" if n == 15 else f"{of} rests on" if n != 12 else "another route than more")
    for n in (9, 13, 16):
        reject(f"line {n} proves another", but(region_, f"proof {n - 1} proves", "slope[x,x]"), f"proof line {n}", "a matrix proves slopes or misses")
    for n, several in ((5, ([1, 2, 4, 3], [1, 3, 2, 4], [2, 3, 4], [1, 2, 3], [1, 2, 3, 1], [1, 2, 3, 4, 2], [])), (8, ([1, 2, 3, 7, 6], [1, 3, 2, 6, 7], [1, 2, 3, 6], [2, 3, 6, 7], [1, 2, 3, 6, 7, 7], [], [1, 6, 7, 2, 3])),
                       (11, ([9], [10, 9], [9, 9], [9, 10, 10], [])), (15, ([8, 13], [13, 14], [8, 14, 13], [5, 13, 14], [8, 13, 14, 2], [], [8, 9, 14])), (12, ([8], [8, 9], [11, 8], [5, 11]))):
        for uses in several:
            wanted = {5: "outer: " if uses in ([1, 2, 3, 1], [1, 2, 3, 4, 2], [1, 2, 3]) else "ball rests on metric metric, range target[x], range target[y]", 8: "invariant rests on metric metric, range target[x], range target[y], range image[x], range image[y]",
                      11: "slope rests on matrix slopes, matrix misses", 15: "componentwise rests on entries slopes, entries misses" if uses[:1] == [8] else "componentwise rests on the invariant set, then entries", 12: "uses: the invariant set, then gain and residual of a route"}[n]
            reject(f"line {n} uses {uses}", but(region_, f"proof {n - 1} uses", uses), f"proof line {n}", wanted)
    for uses, reason in (([11, 12], "invariant rests on the ball, then entries"), ([6, 12, 11], "invariant rests on entries slopes, entries misses"), ([6, 11], "invariant rests on entries"), ([6], "invariant rests on entries"), ([], "invariant rests on the ball"), ([6, 11, 12, 2], "invariant rests on entries"), ([6, 8, 9], "invariant rests on entries")):
        reject(f"rows use {uses}", but(rows, "proof 12 uses", uses), "proof line 13", reason)
    reject("rows prove another", but(rows, "proof 12 proves", "ball"), "proof line 13", "invariant rests on the ball, then entries")
    for n, uses, reason in ((11, [7, 8, 10, 9], "slope rests on"), (11, [7, 8, 9], "slope rests on"), (11, [7, 8], "slope rests on"), (14, [5, 12, 13], "invariant rests on entries"), (14, [5, 12, 13, 10, 9], "invariant rests on entries"), (18, [14, 16, 17], "componentwise rests on entries"), (18, [14, 16, 17, 10, 9], "componentwise rests on entries")):
        reject(f"led: line {n} uses {uses}", but(moving, f"proof {n - 1} uses", uses), f"proof line {n}", reason)
    # bases that differ, and the ball's own
    reject("slopes and misses in different bases", but(moving, "proof 17 uses", [14, 16, 13, 9, 10]), "proof line 18", "entries in different bases")
    reject("misses and slopes in different bases", but(moving, "proof 17 uses", [14, 12, 17, 9, 10]), "proof line 18", "entries in different bases")
    for n in (11, 12):
        reject(f"rows in another basis, {n}", but(rows, f"proof {n - 1} witness rows", ONE, f"proof {n - 1} witness inverse", ONE, f"proof {n - 1} concludes", both({"1,1": "1/2", "1,2": "1", "2,1": "1", "2,2": "1"} if n == 11 else {"1,1": "1", "2,1": "1"})), "proof line 13", "entries of another set, or in another basis")
    # shapes of witnesses
    for path, value, n, reason in (
        ("8 witness trees", "d", 9, "trees: a list of texts"), ("8 witness trees", [1], 9, "trees: a list of texts"), ("8 witness trees", None, 9, "trees: a list of texts"), ("8 witness trees", [], 9, "0 trees for 1 cells"), ("8 witness trees", ["d", "d"], 9, "2 trees for 1 cells"),
        ("8 witness trees", ["m"], 9, "unknown form 'm'"), ("8 witness trees", ["s"], 9, "unknown form 's'"), ("8 witness trees", [""], 9, "unknown form ''"), ("8 witness trees", ["0 d"], 9, "a tree ends before all of its box is covered"), ("8 witness trees", ["d d"], 9, "a tree goes on after its last leaf"),
        ("8 witness trees", ["0 d x"], 9, "unknown form 'x'"), ("8 witness trees", ["4 d d"], 9, "unknown form '4'"), ("8 witness bits", 1, 9, "bits: 0 for exact rationals"), ("12 witness bits", True, 13, "bits: 0 for exact"), ("15 witness bits", None, 16, "bits: 0 for exact"),
        ("12 witness trees", ["0 d"], 13, "a tree ends before"), ("12 witness rows", "1", 13, "rows: a list of rows"), ("12 witness rows", ["1", "0"], 13, "rows: a list of rows"), ("12 witness rows", [["1", "0"]], 13, "the inverse has one row for each state"), ("12 witness inverse", None, 13, "inverse: a list of rows"),
        ("12 witness inverse", [["1", "0"], ["1", "1"]], 13, "the inverse times the matrix is not 1"), ("12 witness rows", [[1, "0"], ["0", "1"]], 13, "rows: a proved number is written as text"), ("0 witness kind", "ball", 1, "the kind is one of box, polytope, ellipsoid"), ("0 witness kind", ["box"], 1, "the kind is one of"),
        ("0 witness kind", "polytope", 1, "rows: the weight of x is not the one the claim states, exactly"), ("0 witness rows", [["1", "1"], ["0", "2"]], 1, "a box has positive weights"), ("0 witness inverse", ONE, 1, "the inverse times the matrix is not 1"),
        ("12 concludes 1,2", GONE, 13, "slopes: two conclusions an entry"), ("12 concludes 3,1", "1", 13, "slopes: two conclusions an entry"), ("12 concludes -1,2", GONE, 13, "slopes: two conclusions an entry"), ("13 concludes 1,2", "1", 14, "misses: two conclusions an entry"), ("13 concludes 2,1", GONE, 14, "misses: two conclusions an entry"), ("14 concludes z", "1", 15, "concludes: a bound for each state"),
        ("14 concludes y", GONE, 15, "concludes: a bound for each state"), ("14 witness p", ["2"], 15, "p: a list of 2 numbers"), ("14 witness p", ["2", "1", "1"], 15, "p: a list of 2 numbers"), ("14 witness b", "11", 15, "b: a list of 2 numbers"), ("14 witness b", [1, 1], 15, "b: a proved number is written as text"),
        ("14 witness p", ["1", "2"], 15, "p, b: K p < p"), ("14 witness p", ["1", "1/3"], 15, "p, b: K p < p"), ("14 witness p", ["0", "0"], 15, "p, b: K p < p"), ("14 witness p", ["-1", "-1"], 15, "p, b"), ("14 witness b", ["7/20", hair("1/5", -1)], 15, "p, b"), ("14 witness b", [hair("7/20", -1), "1/5"], 15, "p, b"),
        ("15 witness direction", ["1"], 16, "direction: a list of 2 numbers"), ("15 witness direction", ["1", "1", "1"], 16, "direction: a list of 2"), ("15 witness direction", "11", 16, "direction: a list of 2"), ("15 witness direction", ["0", "0"], 16, "slopes: the direction is not shown to be stretched by so much"),
        ("16 witness direction", ["1", "1"], 17, "direction: a list of 1 numbers"), ("16 witness direction", ["0"], 17, "misses: the direction is not shown"), ("15 witness at", {}, 16, "at: one value for each variable"), ("15 witness at x", hair("1", 1), 16, "at.x: outside the range"), ("16 witness at p", hair("1/8", 1), 17, "at.p: outside the range"),
        ("16 witness at", [], 17, "at: one value for each variable"), ("16 witness at x", "0", 17, "at: one value for each variable"),
    ):
        reject(f"{path} {value}", but(region_, f"proof {path}", value), f"proof line {n}", reason)
    accept("p at its least", but(region_, "proof 14 witness p", ["1", "1"]))
    for direction, lower in ((["-1", "-1/2"], "3/4"), (["-2", "-1"], "3/4"), (["1", "-1/2"], "3/8"), (["0", "1"], "1/4"), (["1", "0"], "1/2")):
        changed = but(region_, "proof 15 witness direction", direction, "proof 15 concludes lower", lower)
        accept(f"direction {direction}", changed)
        reject(f"direction {direction}, more", but(changed, "proof 15 concludes lower", hair(lower, 1)), "proof line 16", "slopes: the direction")
    for direction in (["-1"], ["7"], ["-1/3"]):
        accept(f"direction {direction} of a miss", but(region_, "proof 16 witness direction", direction))
    accept("nothing stretched", but(region_, "proof 15 concludes lower", "-1", "proof 16 concludes lower", "0"))
    zero = but(region_, "proof 15 concludes lower", "-1", "results gain", {"lower": "0", "upper": None})
    accept("a lower end of nothing", zero)
    reject("a lower end below nothing", but(zero, "results gain lower", hair("0", 1)), "results", "results.gain.lower: more is claimed")
    reject("a direction of nothing", but(region_, "proof 15 witness direction", ["0", "0"], "proof 15 concludes lower", "-1"), "proof line 16", "slopes: the direction")
    # a tree of two leaves
    accept("two leaves", but(region_, "proof 8 witness trees", ["0 d c"], "proof 12 witness trees", ["2 1 c d d"]), leaves=11)
    for n in (1, 2, 3):
        reject(f"line {n} is idle", but(region_, "proof 17", region_["proof"][n - 1]), "proof", "serves no later line")

malformed()


# halves of the way to the target: a region of any ends, targets anywhere, any norm

ROOT_HALF = "0.7071067811865475244"  # of 2, from below


def little(kind: str, rows: Any, inverse: Any, radius: str, outer: str, ends: tuple[tuple[str, str], tuple[str, str]] = (("-1", "1"), ("-1", "1")), at: tuple[str, str] = ("0", "0"),
           first: Sequence[int] = (0,), rest: str = "") -> Entries:
    """Lines: 1 metric, 2 3 targets, 4 5 points of them, 6 ball (from the points of these ranks), 7 8 images, 9 invariant."""
    d = Lines(claim(f"(x + ({at[0]}))/2", f"(y + ({at[1]}))/2", ends=tuple(f'["{a}", "{b}"]' for a, b in ends), target=at, rest=rest))  # type: ignore[arg-type]  # two ends, two of a target
    d.metric(kind, rows, inverse)
    d.range("target[x]", at[0], at[0])
    d.range("target[y]", at[1], at[1])
    d.point("target[x]", {}, at[0])
    d.point("target[y]", {}, at[1])
    d.theorem("largest-ball", "ball", [1, 2, 3, *(4 + n for n in first)], radius=radius, outer=outer)
    for s, (low, high), target in zip("xy", ends, at, strict=True):
        d.range(f"image[{s}]", str((Q(low) + Q(target)) / 2), str((Q(high) + Q(target)) / 2))
    d.theorem("invariant-region", "invariant", [1, 2, 3, 7, 8])
    entries = d.found("region", [("settles", "undecided")], {})
    entries["results"]["metric"] = shown(kind, rows)
    return entries


def shown(kind: str, rows: Any) -> dict[str, Any]:
    if kind == "box":
        return {"kind": "box", "weights": {"x": rows[0][0], "y": rows[1][1]}}
    if kind == "polytope":
        return {"kind": kind, "matrix": rows}
    return {"kind": kind, "matrix": [[str(sum(Q(row[i]) * Q(row[j]) for row in rows)) for j in (0, 1)] for i in (0, 1)]}


THIRDS, OF_THIRDS = [["3", "0"], ["4", "5"]], [["1/3", "0"], ["-4/15", "1/5"]]  # reaches to 1/3 along both states
SHEAR, OF_SHEAR = [["1", "1"], ["0", "1"]], [["1", "-1"], ["0", "1"]]  # to the root of 2, and to 1


def balls() -> None:
    inside_, outside = "radius: the ball is not shown to lie in the region of ", "outer: larger balls are not shown to leave the region"

    def both(name: str, *of: Any, s: str, **other: Any) -> None:
        kind, rows, inverse, radius, outer = of
        accept(f"ball {name}", little(kind, rows, inverse, radius, outer, **other))
        accept(f"ball {name}, looser", little(kind, rows, inverse, hair(radius, -1) if Q(radius) > 0 else radius, hair(outer, 1), **other))
        reject(f"ball {name}, larger", little(kind, rows, inverse, hair(radius, 1), outer, **other), "proof line 6", inside_ + s)
        reject(f"ball {name}, outer less", little(kind, rows, inverse, radius, hair(outer, -1), **other), "proof line 6", outside)

    # each of the four edges in turn is the nearest
    near = ((("-1", "3"), ("-2", "3"), "x"), (("-3", "1"), ("-2", "3"), "x"), (("-2", "3"), ("-1", "3"), "y"), (("-2", "3"), ("-3", "1"), "y"))
    for x, y, s in near:
        rank = "xy".index(s)
        both(f"in a box, {x} {y}", "box", ONE, ONE, "1", "1", s=s, ends=(x, y), first=(rank,))
        both(f"in thirds, {x} {y}", "ellipsoid", THIRDS, OF_THIRDS, "3", "3", s=s, ends=(x, y), first=(rank,))
        both(f"slanted, {x} {y}", "polytope", SLANTED, UPRIGHT, "2" if s == "x" else "1", "2" if s == "x" else "1", s=s, ends=(x, y), first=(rank,))
        both(f"in a box, both points, {x} {y}", "box", ONE, ONE, "1", "1", s=s, ends=(x, y), first=(0, 1))
        reject(f"outer by the point of the other state, {x} {y}", little("box", ONE, ONE, "1", "1", ends=(x, y), first=(1 - rank,)), "proof line 6", outside)
        exact(f"edges, {x} {y}", little("box", ONE, ONE, "1", "1", ends=(x, y), first=(rank,)), {f"states {s} radius": ("1", "1"), f"states {'xy'[1 - rank]} radius": ("2", "2"), "radius": ("1", "1"), "states y bound": (None, None)})
    for at, s in ((("1/2", "0"), "x"), (("-1/2", "0"), "x"), (("0", "-1/2"), "y"), (("0", "1/2"), "y")):
        rank = "xy".index(s)
        both(f"about {at}", "box", ONE, ONE, "1/2", "1/2", s=s, at=at, first=(rank,))
        exact(f"edges about {at}", little("box", ONE, ONE, "1/2", "1/2", at=at, first=(rank,)), {f"states {s} radius": ("1/2", "1/2"), f"states {'xy'[1 - rank]} radius": ("1", "1"), "set centre x": (at[0], at[0]), "set centre y": (at[1], at[1])})
    # a root: as far as its rounded value, and no further
    last = "0.0000000000000000001"
    for first in ((0,), (0, 1)):
        root = little("ellipsoid", SHEAR, OF_SHEAR, ROOT_HALF, str(Q(ROOT_HALF) + Q(last)), first=first)
        accept(f"ball of a root {first}", root)
        reject(f"ball of a root, larger {first}", but(root, "proof 5 concludes radius", str(Q(ROOT_HALF) + Q(last))), "proof line 6", inside_ + "x")
        reject(f"ball of a root, outer less {first}", but(root, "proof 5 concludes outer", ROOT_HALF), "proof line 6", outside)
    # nothing is the largest ball about a target on the edge, and none is below nothing
    edge = little("ellipsoid", THIRDS, OF_THIRDS, "0", "0", at=("1", "0"))
    accept("ball of nothing", edge)
    reject("ball below nothing", but(edge, "proof 5 concludes radius", hair("0", -1)), "proof line 6", "radius: below nothing")
    reject("ball of an outer radius below nothing", but(little("ellipsoid", THIRDS, OF_THIRDS, "3", "3"), "proof 5 concludes outer", "-3"), "proof line 6", outside)
    # three rows: a hexagon that reaches as far as a square
    rows, inverse = [*ONE, ["1", "1"]], [["1", "0", "0"], ["0", "1", "0"]]
    three = little("polytope", rows, inverse, "1", "1")
    accept("three rows, largest", three)
    reject("three rows, largest, less", but(three, "proof 5 concludes outer", hair("1", -1), "proof 5 concludes radius", hair("1", -1)), "proof line 6", outside)
    reject("three rows, largest, by a hair", but(three, "proof 5 concludes radius", hair("1", 1)), "proof line 6", inside_ + "x")
    smaller = but(three, "proof 5", {**three["proof"][5], "rule": "smaller-ball", "uses": [1, 2, 3], "concludes": {"radius": "1"}})
    accept("three rows, smaller", smaller)
    reject("three rows, smaller, by a hair", but(smaller, "proof 5 concludes radius", hair("1", 1)), "proof line 6", inside_ + "x")
    for uses in ([1, 2, 3, 4], [1, 2, 3, 4, 5]):
        reject(f"smaller ball uses {uses}", but(smaller, "proof 5 uses", uses), "proof line 6", "a smaller ball rests on the metric and the targets")
    one = little("box", ONE, ONE, "1", "1")
    for uses, reason in (([1, 2, 3, 2], "outer: points of the targets"), ([1, 2, 3], outside), ([1, 2, 3, 4, 3], "outer: points"), ([1, 3, 2, 4], "ball rests on metric")):
        reject(f"largest ball uses {uses}", but(one, "proof 5 uses", uses), "proof line 6", reason)
    # images and targets up to the edges
    for n, s in ((7, "x"), (8, "y"), (2, "x"), (3, "y")):
        for key, value, by in (("lower", "-1", -1), ("upper", "1", 1)):
            changed = but(one, f"proof {n - 1} concludes {key}", value)
            if n < 4:
                changed = but(changed, "proof 5 concludes radius", "0")
            accept(f"{'image' if n > 4 else 'target'} of {s} to the edge, {key}", changed)
            reject(f"{'image' if n > 4 else 'target'} of {s} beyond the edge, {key}", but(changed, f"proof {n - 1} concludes {key}", hair(value, by)), "proof line 9" if n > 4 else "proof line 6", f"image[{s}] is not shown to stay in the region" if n > 4 else inside_ + s)
    # two balls, or none
    reject("two balls", but(one, "proof 8", {**one["proof"][5], "rule": "smaller-ball", "uses": [1, 2, 3], "concludes": {"radius": "1"}}), "results", "the proof has not exactly one ball about the target")
    reject("no ball", without(one, 6), "results", "the proof has not exactly one ball about the target")
    reject("two largest balls", but(one, "proof 8", one["proof"][5]), "results", "ball is proved more than once by largest-ball")


def beyond_the_edge() -> None:
    """A target shown up to beyond the edge by a line of its own: the ball uses another."""
    one = little("box", ONE, ONE, "1", "1")
    for s, n in (("x", 2), ("y", 3)):
        for key, value, by in (("lower", "-1", -1), ("upper", "1", 1)):
            wide = but(one, f"proof {n - 1} concludes {key}", value)
            order = [*wide["proof"][:5], one["proof"][n - 1], *wide["proof"][5:]]
            moved_up = but(wide, "proof", order)
            moved_up["proof"][6]["uses"] = [1, 6 if n == 2 else 2, 6 if n == 3 else 3, 4]
            moved_up["proof"][9]["uses"] = [1, 2, 3, 8, 9]
            accept(f"region, target of {s} to the edge, {key}", moved_up)
            reject(f"region, target of {s} beyond the edge, {key}", but(moved_up, f"proof {n - 1} concludes {key}", hair(value, by)), "proof line 10", f"target[{s}] is not shown to stay in the region")


balls()
beyond_the_edge()


def metrics_asked_for() -> None:
    """The kind and the weights that the claim states, exactly; auto is any."""
    kinds = {"box": (WEIGHTS, UNWEIGHTED, "1", "1"), "polytope": (SLANTED, UPRIGHT, "1", "1"), "ellipsoid": (THIRDS, OF_THIRDS, "3", "3")}
    for asked in ("auto", "box", "polytope", "ellipsoid"):
        for kind, (rows, inverse, radius, outer) in kinds.items():
            first = (1,) if kind == "polytope" else (0,)
            entries = little(kind, rows, inverse, radius, outer, first=first, rest=f'[metric]\nkind = "{asked}"' + ("\nweights = { y = 2 }" if asked == "box" else ""))
            if asked in ("auto", kind):
                accept(f"{kind} where {asked} is asked for", entries)
            else:
                reject(f"{kind} where {asked} is asked for", entries, "proof line 1", f"kind: the claim asks for {asked}")
    for kind in ("auto", "box"):
        for weights, good in (("x = 1, y = 2", ""), ("y = 2", ""), ('y = "sqrt(4)"', ""), ('y = "2 + 1/10**30"', "y"), ('y = "2 - 1/10**30"', "y"), ("x = 2", "x"), ("y = 1", "y"), ('y = "sqrt(2)*sqrt(2)"', "y"), ("x = 1", "y")):
            entries = little("box", WEIGHTS, UNWEIGHTED, "1", "1", rest=f'[metric]\nkind = "{kind}"\nweights = {{ {weights} }}')
            if good:
                reject(f"{kind} of weights {weights}", entries, "proof line 1", f"rows: the weight of {good} is not the one the claim states, exactly")
            else:
                accept(f"{kind} of weights {weights}", entries)
    reject("a box without weights", little("box", WEIGHTS, UNWEIGHTED, "1", "1", rest='[metric]\nkind = "box"'), "proof line 1", "rows: the weight of y")
    accept("a box of ones", little("box", ONE, ONE, "1", "1", rest='[metric]\nkind = "box"'))
    rows = little("ellipsoid", THIRDS, OF_THIRDS, "3", "3")
    for path, value in (("matrix", THIRDS), ("matrix", [["25", "20"], ["20", "24"]]), ("kind", "polytope"), ("matrix", None)):
        reject(f"metric shown as {path} {value}", but(rows, f"results metric {path}", value), "results", "results.metric: ")


metrics_asked_for()


@unit
def affine_parts(checker: Any) -> None:
    """Middle, slopes and rest of entries of y + 2px, x, py and px about y = 2 and p = 0; of what jumps, only the ends.

    2p is never more than it varies: x stays in [0, 1] in its column. Of py, 2 told apart and 2 left cost 3, as much as its ends.
    """
    one = tuple(tuple(Q(x) for x in row) for row in ONE)
    domain = checker.derive.Domain(False, Q(0), (Q(0), Q(0)), targets=((Q(0), Q(0)),) * 2, metric=checker.matrices.Metric("box", one, one))

    def leaf(x: str, y: str, box: dict[str, tuple[Any, Any]], form: str, proves: str = "slopes") -> Any:
        d = derivation(checker, claim(x, y, ends=("[-4, 4]", "[-4, 4]"), uncertain="p = [-1, 1]"))
        table = checker.jacobians.Table(d, proves, domain, 0, None)
        return [v.name for v in table.variables], table.leaf([tuple(map(Q, box[v.name])) for v in table.variables], form)

    box: dict[str, tuple[Any, Any]] = {"x": (0, 1), "y": (1, 3), "p": (-1, 1)}
    names, found = leaf("x*y + p*x**2", "p*x*y/1", box, "c")
    assert found.centre == ((2, Q(1, 2)), (0, 0)), found
    assert found.rest == ((1, 0), (3, 1)), found
    slopes = dict(zip(names, found.slopes, strict=True))
    assert slopes == {"x": ((0, Q(1, 2)), (0, 0)), "y": ((1, 0), (0, 0)), "p": ((1, 0), (0, 0))}, slopes
    # what falls by a variable is told apart as what rises is
    names, found = leaf("-x*y - p*x**2", "-p*x*y/1", box, "c")
    assert found.centre == ((-2, -Q(1, 2)), (0, 0)) and found.rest == ((1, 0), (3, 1)), found
    falling = dict(zip(names, found.slopes, strict=True))
    assert falling == {n: tuple(tuple(-x for x in row) for row in g) for n, g in slopes.items()}, falling
    names, found = leaf("x*y + p*x**2", "p*x*y/1", box, "d")
    assert found.centre == ((2, Q(1, 2)), (0, 0)) and found.rest == ((3, Q(1, 2)), (3, 1)) and found.slopes == (), found
    # p x over x as wide as it is: p about 0
    for middle, half in ((1, 1), (2, 1)):
        names, found = leaf("x*y*p", "0*x", {**box, "x": (middle - half, middle + half)}, "c")
        assert found.centre[0] == (0, 0)
        assert found.rest[0][1] == 1, found
        got = {n: g[0][1] for n, g in zip(names, found.slopes, strict=False)}
        assert got == {"p": middle}, got
    # corners: of one side, of two
    names, found = leaf("abs(x)*y", "0*x", {**box, "x": (1, 3)}, "c")
    assert found.centre[0] == (2, 2) and found.rest[0] == (0, 0), found
    names, found = leaf("abs(x)*y", "0*x", {**box, "x": (-1, 2)}, "c")
    assert found.centre[0][0] == 0 and found.rest[0][0] == 3, found
    # misses: p**2 + 3p on [0, 1]; |p| on [-1, 3], where the ends are closer
    names, found = leaf("x + p**2 + 3*p", "abs(p)", {"p": (0, 1)}, "c", "misses")
    assert found.centre == ((Q(7, 4),), (Q(1, 2),)) and found.rest == ((Q(1, 2),), (0,)) and found.slopes == (((2,), (Q(1, 2),)),), found
    names, found = leaf("x", "abs(p)", {"p": (-1, 1)}, "c", "misses")
    assert found.centre == ((0,), (Q(1, 2),)) and found.rest == ((0,), (Q(1, 2),)), found
    d = derivation(checker, claim("x/2", "y/2"))
    with refuses(checker.numerals.Rejected, "a matrix proves slopes or misses"):
        checker.jacobians.Table(d, "norms", domain, 0, None)


@unit
def points_and_balls(checker: Any) -> None:
    """An error is a state less its target, wherever in its range that is: middles and half widths."""
    inside, rejected = checker.jacobians.inside, checker.numerals.Rejected
    rows, inverse = (tuple(tuple(Q(x) for x in row) for row in m) for m in (SLANTED, UPRIGHT))
    norm = checker.matrices.Metric("polytope", rows, inverse)
    d = derivation(checker, claim("x/2", "y/2"))
    domain = checker.derive.Domain(True, Q(3, 2), (Q(-1, 8), Q(1, 4)), targets=((Q(-1, 8), Q(1, 4)), (Q(0), Q(1, 4))), metric=norm)
    # |x - 1/16| 2 + 3/8 + |y - 1/8| + 1/8 <= 3/2
    tiny = Q("1" + STEP)
    for x, y in ((Q(1, 16), Q(9, 8)), (Q(1, 16), Q(-7, 8)), (Q(9, 16), Q(1, 8)), (Q(-7, 16), Q(1, 8)), (Q(5, 16), Q(5, 8)), (Q(-3, 16), Q(-3, 8))):
        inside(d, domain, {"x": (x, x), "y": (y, y)})
        for dx, dy in ((0, 1 if y >= Q(1, 8) else -1), (1 if x >= Q(1, 16) else -1, 0)):
            if (dx and x != Q(1, 16)) or (dy and y != Q(1, 8)):
                with refuses(rejected, "at: not shown to be in the set"):
                    inside(d, domain, {"x": (x + dx * tiny,) * 2, "y": (y + dy * tiny,) * 2})
    # one on its target, the other at its error; a point that is known to ends only
    inside(d, domain, {"error(x)": (Q(3, 4), Q(3, 4))})
    inside(d, domain, {"error(x)": (Q(1, 4), Q(3, 4)), "error(y)": (Q(0), Q(0))})
    inside(d, domain, {"error(y)": (Q(-3, 2), Q(1))})
    inside(d, domain, {})
    for at in ({"error(x)": (Q(1, 4), Q(3, 4) + tiny)}, {"error(y)": (Q(-3, 2) - tiny, Q(1))}, {"error(x)": (Q(1, 4), Q(1, 4)), "error(y)": (Q(1) + tiny,) * 2}):
        with refuses(rejected, "at: not shown to be in the set"):
            inside(d, domain, at)
    for other in (None, checker.derive.Domain(False, Q(0), (Q(0), Q(0)), targets=domain.targets, metric=norm), checker.derive.Domain(True, Q(1, 9), (Q(0), Q(0)))):
        inside(d, other, {"x": (Q(9), Q(9)), "y": (Q(9), Q(9))})


@unit
def cuts_of_all(checker: Any) -> None:
    """Variables of several obligations, in the order met, cut wherever one of them is."""
    ranged, meaning = checker.derive.Ranged, checker.derive.Meaning
    a = ranged("a", ((Q(0), Q(1)), (Q(1), Q(3))), (Q(0), Q(3)), False)
    b = ranged("a", ((Q(0), Q(2)), (Q(2), Q(3))), (Q(0), Q(3)), False)
    c = ranged("c", ((Q(5), Q(5)), (Q(1), Q(1))), (Q(5), Q(5)), True)
    e = ranged("c", ((Q(5), Q(5)),), (Q(5), Q(5)), True)
    found = checker.jacobians.together([meaning(0, "", [c, a], True), meaning(0, "", [b], True), meaning(0, "", [e, b], True)])
    assert [(v.name, v.cells, v.listed) for v in found] == [("c", c.cells, True), ("a", ((0, 1), (1, 2), (2, 3)), False)], found
    assert checker.jacobians.together([meaning(0, "", [a], True), meaning(0, "", [a], True)]) == [a]


# other sets, other rules

def other_sets() -> None:
    gain, comparison = "gain and residual of slope refer to another set", "entries of another set"
    for uses, n, reason in (({9: [5]}, 11, "the residual refers to another set"), ({10: [5]}, 11, "the residual refers to another set"), ({9: [5], 10: [5]}, 12, "the gain refers to another set"), ({13: [5]}, 15, comparison), ({14: [5]}, 15, comparison), ({13: [5], 14: [5]}, 15, comparison)):
        reject(f"of the ball: {sorted(uses)}", but(PLAIN, *[x for k, to in uses.items() for x in (f"proof {k - 1} uses", to)]), f"proof line {n}", reason)
    reject("a gain over another set", without(but(PLAIN, "proof 8 uses", [5], "proof 9 uses", [5]), 12), "results", gain)
    for n in (16, 17):
        reject(f"a stretch over another set, {n}", but(PLAIN, f"proof {n - 1} uses", [5], "proof 15 witness at y", "0"), "proof", f"line {n} serves no later line and no result")
    # a comparison over the ball that is mapped into itself, where the region is the set
    two = PLAIN["proof"]
    ball_ = [{"rule": "entries", "proves": of, "uses": [5], "witness": {**two[12]["witness"], "rows": WEIGHTS, "inverse": UNWEIGHTED}, "concludes": both(values)}
             for of, values in (("slopes", {"1,1": "1/2", "1,2": "1/8", "2,1": "1/2", "2,2": "1/4"}), ("misses", {"1,1": "1/8", "2,1": "1/8"}))]
    rows = {"rule": "invariant-rows", "proves": "invariant", "uses": [5, 19, 20], "witness": {}, "concludes": {}}
    compared = {**two[14], "uses": [21, 19, 20], "witness": {"about": ["0", "0"], "p": ["1", "1"], "b": ["1/2", "1/2"]}, "concludes": {"x": "1/2", "y": "1/4"}}
    reject("a comparison over another set", without(but(PLAIN, "proof", [*two, *ball_, rows, compared]), 13, 14, 15), "results", "the comparison refers to another set")
    accept("a comparison over the ball", but(without(but(PLAIN, "proof", [*two, *ball_, rows, {**compared, "concludes": {"x": "7/20", "y": "1/5"}, "witness": {"about": ["0", "0"], "p": ["1", "1"], "b": ["7/20", "2/5"]}}]), 8, 9, 10, 11, 12, 13, 14, 15, 6, 7, 16, 17, 18),
                                            "results set kind", "smaller ball", "results requirements 0 verdict", "undecided"))
    reject("an invariant ball by a pair of the region", but(PLAIN, "proof 17", {"rule": "invariant-ball", "proves": "invariant", "uses": [5, 11], "witness": {}, "concludes": {}}), "proof line 18", "the gain refers to another set")


def smaller(radius: str, top: str = "", asked: Sequence[str] = ("settles",), stated: bool = False) -> Lines:
    """A smaller ball of the first map: 1 metric, 2 3 targets, 4 ball, 5 6 matrices, 7 pair, 8 invariant, 9 bound, 10 11 entries, 12 comparison, 13 14 stretches."""
    d = Lines(claim(*PAIR, uncertain=NOISE, asked=asked, rest=STATED if stated else "", top=top))
    d.metric("box", WEIGHTS, UNWEIGHTED)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.theorem("smaller-ball", "ball", [1, 2, 3], radius=radius)
    d.matrix("slopes", "3/4", [4])
    d.matrix("misses", "1/8", [4])
    d.theorem("slope", "slope", [5, 6], gain="3/4", residual="1/8")
    d.theorem("invariant-ball", "invariant", [4, 7])
    d.theorem("ultimate-bound", "bound[slope]", [8, 7], bound="1/2")
    d.table("slopes", ["1/2", "1/4", "1/4", "1/4"], [8])
    d.table("misses", ["1/8", "1/16"], [8])
    d.compared([8, 10, 11], ["2", "1"], ["7/20", "1/5"], "7/20", "1/5")
    d.stretch("slopes", {"x": "0", "y": "0", "p": "0", "q": "0"}, ["1", "1/2"], "3/4", [4])
    d.stretch("misses", {"p": "1/8", "q": "0"}, ["1"], "1/8", [4])
    return d


def smaller_balls() -> None:
    """Only radius and steps without `shrink`; with it all, but nothing is refuted by one ball."""
    tables: dict[bool, list[tuple[str, str]]] = {
        False: [("settles", "undecided"), ("gain <= 3/4", "undecided"), ("gain < 3/4", "refuted"), ("residual <= 1/8", "undecided"), ("residual < 1/8", "refuted"), ("bound <= 1/2", "undecided"), ("bound(x) <= 1", "undecided"), ("push(x) > 0.01", "undecided"),
                ("radius(x) >= 1/2", "proved"), ("radius(x) > 1/2", "undecided"), ("radius(y) >= 1/4", "proved"), (f"radius(y) >= 1/4 + 1{STEP}", "undecided"), ("steps(x, 1/2, 1/2) <= 0", "proved"), (f"steps(x, 1/2 + 1{STEP}, 1/2) <= 9", "undecided"), ("steps(y, 1/4, 1/4) <= 0", "proved")],
        True: [("settles", "proved"), ("gain <= 3/4", "proved"), ("gain < 3/4", "undecided"), ("residual <= 1/8", "proved"), ("residual < 1/8", "undecided"), ("bound <= 1/2", "proved"), ("bound < 1/2", "undecided"), ("bound(x) <= 7/20", "proved"), ("push(x) > 1/10", "undecided"), ("push(x) > 0.0999999", "proved"), ("push(y) >= 0.05", "undecided"), ("push(y) >= 0.04999", "proved"), ("radius(x) >= 1/2", "proved")],
    }
    for shrink, asked in tables.items():
        d = smaller("1/2", "shrink = true\n" if shrink else "", [that for that, _ in asked], stated=True)
        judged(f"smaller ball, shrink {shrink}", d.found("smaller ball", asked, BOX))
    plain = smaller("1/2", "shrink = true\n").found("smaller ball", [("settles", "proved")], BOX)
    accept("smaller ball that just fits", plain)
    reject("smaller ball that just does not", but(plain, "proof 3 concludes radius", hair("1/2", -1)), "proof line 8", "gain times radius plus residual exceeds the radius")
    exact("smaller ball", plain, {"radius": ("1/2", None), "set radius": ("1/2", None), "states x radius": ("1/2", None), "states y radius": ("1/4", None), "states x push": ("1/10", None), "states y push": ("1/20", None), "states x bound": (None, "7/20"), "gain": ("3/4", "3/4"), "requirements 0 value": (None, "2/5")})
    # not mapped into itself: of the largest ball, gain and residual; of a smaller one nothing
    whole = smaller("1", stated=True, asked=["gain < 3/4", "gain <= 3/4", "residual < 1/8", "settles", "radius(x) >= 0.1"])
    asked = [("gain < 3/4", "refuted"), ("gain <= 3/4", "undecided"), ("residual < 1/8", "refuted"), ("settles", "undecided"), ("radius(x) >= 0.1", "undecided")]
    open_ = without(whole.found(None, asked, BOX), 8, 9, 10, 11, 12)
    largest = but(open_, "proof 3", {**open_["proof"][3], "rule": "largest-ball", "uses": [1, 2, 3, 10], "concludes": {"radius": "1", "outer": "1"}})
    point = {"rule": "point", "proves": "target[x]", "uses": [], "witness": {"bits": 0, "at": {}}, "concludes": {"lower": "0", "upper": "0"}}
    order = [*largest["proof"][:3], point, *largest["proof"][3:]]
    for line in order[5:]:
        line["uses"] = [n + (n > 3) for n in line["uses"]]
    order[4]["uses"] = [1, 2, 3, 4]
    largest = but(largest, "proof", order)
    judged("largest ball, open", largest)
    exact("largest ball, open", largest, {"gain": ("3/4", "3/4"), "residual": ("1/8", "1/8"), "routes slope gain": ("3/4", "3/4")})
    for path, value in (("radius", {"lower": "0", "upper": None}), ("states x radius", {"lower": "0", "upper": None}), ("states x radius", {"lower": None, "upper": None}), ("states x push", {"lower": None, "upper": None}), ("states x bound", {"lower": None, "upper": "9"})):
        reject(f"largest ball, open: {path} {value}", but(largest, f"results {path}", value), "results", f"results.{path}".replace(" ", "."))
    reject("largest ball, open: a set", but(largest, "results set", PLAIN["results"]["set"]), "results", "results.set.kind: 'region' is claimed, None was derived")
    reject("smaller ball, open", open_, "results", "results.routes: the keys are")
    reject("smaller ball, open, with its lines", but(open_, "results routes", {}, "results requirements 0 verdict", "undecided", "results requirements 2 verdict", "undecided"), "proof", "serves no later line")
    bare = without(but(open_, "results routes", {}, "results requirements 0 verdict", "undecided", "results requirements 2 verdict", "undecided"), 5, 6, 7, 8, 9)
    accept("smaller ball, open, alone", bare)


def refused_rules() -> None:
    """What is known of several states only, or of a single one."""
    proof = PLAIN["proof"]
    for rule, witness, concludes in (("sector", {}, {"gain": "1", "residual": "1"}), ("curve", {}, {"gain": "1", "residual": "1", "sharp": "1"}), ("shells", {"radii": ["1"], "slope": "0"}, {}), ("orbit", {"bits": 0, "held": {}, "start": [], "steps": []}, {"distance": "0", "highest": "0", "lowest": "0"}),
                                     ("path", {"bits": 0, "held": {}, "start": [], "steps": []}, {"distance": "0", "from": "0", "steps": "1"})):
        reject(f"{rule} of two states", but(PLAIN, "proof 17", {"rule": rule, "proves": rule, "uses": [8], "witness": witness, "concludes": concludes}), "proof line 18", f"{rule}: {'of one of the states x, y' if rule == 'path' else 'known for a single state only'}")
    accept("a single state", BASE)
    for n in (1, 9, 13, 15, 16):
        line = {**proof[n - 1], "uses": []}
        reject(f"{line['rule']} of a single state", but(BASE, "proof 0", line), "proof line 1", f"{line['rule']}: the claim has a single state")
    reject("invariant-rows of a single state", but(BASE, "proof 3 rule", "invariant-rows"), "proof line 4", "invariant-rows: the claim has a single state")
    for name in ("shell[1]", "line[x]", "growth[x]", "growth[x,x]", "split-slope[x,x]", "split-residual[x]", "slope[x]", "slope[x,z]", "target[z]", "target-slope[x,c]", "support[1]", "image[z]"):
        line = {"rule": "range", "proves": name, "uses": [8], "witness": {"bits": 0, "trees": ["d"]}, "concludes": {"lower": "0", "upper": "0"}}
        reject(f"{name} of two states", but(PLAIN, "proof 17", line), "proof line 18", f"{name} is no obligation of this claim")


def escapes() -> None:
    plain = without(ball().found("ball", [("settles", "proved")], POLYTOPE), 5, 11, 12)
    for x, y, value, good in (("1", "2", "5/4", True), ("-1", "-2", "-5/4", True), ("1", "4/3", "1", False), ("-1", "-4/3", "-1", False), ("1", hair("4/3", 8), hair("1", 3), True), ("-1", hair("-4/3", -8), hair("-1", -3), True), ("0", "0", "0", False)):
        changed = but(plain, "proof 5 witness at", {"x": x, "y": y, "p": "0"}, "proof 5 concludes", {"lower": value, "upper": value})
        if good:
            accept(f"out at {x[:5]} {y[:9]}", changed)
        else:
            reject(f"not out at {x[:5]} {y[:9]}", changed, "results", "results.set.kind: 'ball' is claimed, 'smaller ball' was derived")
    reject("nothing leads out", without(plain, 6), "results", "results.set.kind: 'ball' is claimed, 'smaller ball' was derived")
    accept("one is enough to be ends of", but(plain, "proof 5 concludes lower", hair("1", 1)))
    reject("ends that touch", but(plain, "proof 5 concludes lower", "1"), "results", "results.set.kind")
    # points of what is asked for lie in the ball
    for at, value, good in (({"x": "1/2", "y": "1"}, "3/2", True), ({"x": "1/2", "y": hair("1", 1)}, hair("3/2", 1), False), ({"x": hair("1/2", 1), "y": "1"}, hair("3/2", 1), False), ({"x": "0", "y": "2"}, "2", True)):
        asked = [("value(x + y) < 3/2", "undecided")]  # another norm's ball might leave the point out
        d = ball([asked[0][0]])
        d.range("require[1]", "-3", "3", [13])
        d.point("require[1]", at, value, uses=[13])
        entries = without(d.found("ball", asked, POLYTOPE), 5, 11, 12)
        if good:
            judged(f"a value at {at}", entries)
        else:
            reject(f"a value at {at}", entries, "proof line 18", "at: not shown to be in the set")


def of_no_use() -> None:
    """The line that a figure rests on is the one that counts; the other one serves as the name of the set."""
    asked = [("value(2) <= 2", "proved")]
    d = region([asked[0][0]])
    d.stretch("slopes", {"x": "0", "y": "0", "p": "0", "q": "0"}, ["0", "1"], "1/4", [8])
    d.range("require[1]", "2", "2", [19])
    two = d.found("region", asked, BOX)
    exact("two stretches", two, {"gain": ("3/4", "3/4"), "bound": ("1/2", "1/2")})
    # the larger one last
    lines = [*two["proof"][:15], two["proof"][18], two["proof"][16], two["proof"][17], two["proof"][15], {**two["proof"][19], "uses": [16]}]
    exact("two stretches, turned", but(two, "proof", lines), {"gain": ("3/4", "3/4"), "bound": ("1/2", "1/2")})
    # of two points of a target the nearer to the edge counts, the ball rests on the other one
    for ends, near, far in ((("-1/4", "1/2"), "1/2", "-1/4"), (("-1/2", "1/4"), "-1/2", "1/4")):
        d = Lines(claim("(x + c)/2", "y/2", uncertain=f'c = {{ range = ["{ends[0]}", "{ends[1]}"], held = true }}', target=("c", "0")))
        d.metric("box", ONE, ONE)
        d.range("target[x]", *ends)
        d.range("target[y]", "0", "0")
        d.point("target[x]", {"c": far}, far)
        d.point("target[x]", {"c": near}, near)
        d.theorem("largest-ball", "ball", [1, 2, 3, 4], radius="1/2", outer="3/4")
        d.range("image[x]", str((Q(ends[0]) - 1) / 2), str((Q(ends[1]) + 1) / 2))
        d.range("image[y]", "-1/2", "1/2")
        d.theorem("invariant-region", "invariant", [1, 2, 3, 7, 8])
        entries = d.found("region", [("settles", "undecided")], {"kind": "box", "weights": {"x": "1", "y": "1"}})
        exact(f"two points of a target in {ends}", entries, {"states x radius": ("1/2", "1/2"), "radius": ("1/2", "3/4"), "set radius": ("1/2", "3/4"), "set centre x": ends})
    # no points: no upper end
    lone = but(without(little("box", ONE, ONE, "1", "1"), 4, 5), "proof 3 rule", "smaller-ball", "proof 3 concludes", {"radius": "1"})
    exact("no point of a target", lone, {"states x radius": ("1", None), "states y radius": ("1", None), "radius": ("1", None)})


def at_the_edges() -> None:
    """By comparison alone: a bound at the edge settles nothing and leaves no push; each state in its turn."""
    alone = without(PLAIN, 9, 10, 11, 12, 16, 17)
    less = hair("1", -1)
    for x, y in (("1", "1"), ("1", less), (less, "1"), (less, less)):
        changed = but(alone, "proof 10 witness b", [x, y], "proof 10 concludes", {"x": x, "y": y}, "results requirements 0 verdict", "proved")
        if x == y == less:
            accept("settled by a hair", changed)
        else:
            reject(f"not settled {x[:5]} {y[:5]}", changed, "results", "[1].verdict: proved is claimed, undecided was derived")
            accept(f"undecided {x[:5]} {y[:5]}", but(changed, "results requirements 0 verdict", "undecided"))
        for s, b in (("x", x), ("y", y)):
            pushed = but(changed, "results requirements 0 verdict", "undecided", f"results states {s} push", {"lower": "0" if b == "1" else str(1 - Q(b)), "upper": None})
            if b == "1":
                reject(f"no push {s} {x[:5]} {y[:5]}", pushed, "results", f"results.states.{s}.push.lower: nothing was derived")
            else:
                accept(f"a push of a hair {s} {x[:5]} {y[:5]}", pushed)
    # without a bound of one state there is none of all
    none = without(PLAIN, 12, 13, 14, 15)
    accept("without any bound", but(none, "results requirements 0 verdict", "undecided"))
    reject("without any bound, settled", none, "results", "[1].verdict: proved is claimed, undecided was derived")
    by_norm = without(PLAIN, 13, 14, 15)
    exact("by the norm alone", by_norm, {"states x bound": (None, "1/2"), "states y bound": (None, "1/4"), "states x push": ("1/2", None), "requirements 0 value": (None, "1/2")})


def over_ranges() -> None:
    """A requirement over ranges of its own has lines of its own; of the others', none."""
    asked = ['"bound(x) < 7/20"', '"bound(x) <= 7/20"\nover = { p = ["-1/16", "1/16"] }', '"bound(x) <= 9"\nover = { p = ["-1/32", "1/32"] }', '"gain < 3/4"\nover = { p = ["-1/16", "1/16"] }', '"settles"\nover = { x = ["-1", "1"] }']
    told = [("bound(x) < 7/20", "undecided"), ("bound(x) <= 7/20", "proved"), ("bound(x) <= 9", "undecided"), ("gain < 3/4", "refuted"), ("settles", "proved")]
    d = region(asked)
    for n in (2, 4, 5):
        d.prefix = f"over[{n}]:"
        in_region(d)
    entries = d.found("region", told, BOX)
    judged("over", entries)
    for n, line in enumerate(entries["proof"][18:36], 19):
        if line["uses"]:
            own = but(entries, f"proof {n - 1} uses", [u - 18 for u in line["uses"]])
            reject(f"over: line {n} rests on the claim's own", own, f"proof line {n}", "uses: lines about other ranges")


def rounding_lines(asked: Sequence[str] = ("settles",)) -> Lines:
    """X and Y stand still for a second; their start is the first map. Lines: 1 flow, 2 to 19 as of `region`, 20 support."""
    still = {"cuts": {}, "pieces": ["0", "1"], "degrees": [1, 0], "bits": 24, "cells": [["16777216 0 0 0 0 0 16777216 0"]]}
    assert STILL["degrees"] == still["degrees"]
    rest = STATED + f'\n[dynamics]\nduration = 1\n[dynamics.start]\nX = "{PAIR[0]}"\nY = "{PAIR[1]}"\n[dynamics.rate]\nX = "0*Y"\nY = "0*X"\n'
    d = Lines(claim("X", "Y", uncertain=NOISE, rest=rest, asked=asked))
    in_region(d)
    proof = [{"rule": "trajectory", "proves": "flow", "uses": [], "witness": still, "concludes": {"error": "0"}}]
    for line in d.proof:
        on_flow = line["proves"].startswith(("image", "slopes", "misses"))
        new = {**line, "uses": [n + 1 for n in line["uses"]] + ([1] if on_flow else [])}
        if on_flow:
            new["witness"] = {**line["witness"], "bits": 24}
        proof.append(new)
    proof.append({"rule": "range", "proves": "support[1]", "uses": [9], "witness": {"bits": 0, "trees": ["d"]}, "concludes": {"lower": "1", "upper": "1"}})
    d.proof = proof
    return d


def rounding_of_stances() -> None:
    entries = rounding_lines().found("region", [("settles", "proved")], BOX)
    judged("a stance of two states", entries)
    exact("a stance of two states", entries, {"gain": ("3/4", "3/4"), "residual": ("1/8", "1/8"), "bound": ("1/2", "1/2"), "states x bound": (None, "7/20"), "states y radius": ("1", "1")})
    accept("a stance that may be short", but(entries, "proof 19 concludes lower", hair("0", 1)))
    for lower in ("0", "-1"):
        reject(f"a stance that may not last {lower}", but(entries, "proof 19 concludes lower", lower), "results", "results.set.kind: 'region' is claimed, None was derived")
    reject("a stance that may not last", without(entries, 20), "results", "results.set.kind: 'region' is claimed, None was derived")
    for n in (7, 8, 10, 11, 14, 15, 17, 18):
        reject(f"a stance without its flow, {n}", but(entries, f"proof {n - 1} uses", entries["proof"][n - 1]["uses"][:-1]), f"proof line {n}", "no trajectory is proved")
    reject("a flow first", but(entries, "proof 9 uses", [1, 9]), "proof line 10", "uses: the one line that gives the set")
    bare = but(without(entries, 10, 11, 12, 13, 14, 15, 16, 17, 18, 19, 20), "results set", None, "results routes", {}, "results requirements 0 verdict", "undecided")
    accept("a stance of which nothing is shown", bare)
    reject("a stance of which nothing is shown, and stretches", but(without(entries, 10, 11, 12, 13, 14, 15, 16, 19, 20), "results set", None, "results routes", {}, "results requirements 0 verdict", "undecided"), "proof", "serves no later line")


def beyond_the_ball() -> None:
    """Suprema over the outer radius, points within the inner one."""
    asked = [("value(y) <= 3/4", "undecided"), ("value(y) >= 0", "undecided")]
    d = Lines(claim("x/2", "y/2", ends=('["-3/4", "3/4"]', "[-1, 1]"), asked=[that for that, _ in asked]))
    d.metric("box", ONE, ONE)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.point("target[x]", {}, "0")
    d.theorem("largest-ball", "ball", [1, 2, 3, 4], radius="1/2", outer="3/4")
    d.range("require[1]", "-3/4", "3/4", [5])
    d.range("require[2]", "-3/4", "3/4", [5])
    d.point("require[2]", {"y": "-1/2"}, "-1/2", uses=[5])
    entries = d.found(None, asked, shown("box", ONE))
    judged("beyond the ball", entries)
    reject("beyond the ball, less", but(entries, "proof 5 concludes upper", hair("3/4", -1)), "proof line 6", WIDER)
    reject("beyond the ball, a point", but(entries, "proof 7 witness at y", hair("-1/2", -1)), "proof line 8", "at.y: outside the range")


def rounded_stretches() -> None:
    """With 24 bits 1/3 is known to a unit: half of it is taken off, whatever the sign of the direction."""
    unit_ = 1 << 24
    d = Lines(claim("x/3", "y/3 - x/3"))
    d.metric("box", ONE, ONE)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.theorem("smaller-ball", "ball", [1, 2, 3], radius="1")
    d.range("image[x]", "-1/3", "1/3")
    d.range("image[y]", "-2/3", "2/3")
    d.theorem("invariant-region", "invariant", [1, 2, 3, 5, 6])
    d.matrix("slopes", "2/3", [7])
    d.matrix("misses", "0", [7])
    d.theorem("slope", "slope", [8, 9], gain="2/3", residual="0")
    d.theorem("ultimate-bound", "bound[slope]", [7, 10], bound="0")
    d.stretch("slopes", {"x": "0", "y": "0"} , ["1", "-1"], str(Q(unit_ // 3 * 2, unit_)), [7], bits=24)
    entries = d.found("region", [("settles", "proved")], shown("box", ONE))
    for direction in (["1", "-1"], ["-1", "1"], ["-3", "3"]):
        changed = but(entries, "proof 11 witness direction", direction)
        accept(f"rounded stretch {direction}", changed)
        reject(f"rounded stretch {direction}, more", but(changed, "proof 11 concludes lower", hair(str(Q(unit_ // 3 * 2, unit_)), 1)), "proof line 12", "slopes: the direction")


beyond_the_ball()
rounded_stretches()
def units_of_lengths() -> None:
    """In a norm of the prover's choice any length can be made small: it has to be at least the error of every state."""
    asked = ["bound <= 5/8", "residual <= 1/8", "gain <= 4/5", "bound(x) <= 7/20"]
    for rest in ("", "[metric]\nkind = \"auto\"", STATED, "[metric]\nkind = \"box\"\nweights = { y = 2 }"):
        judged(f"lengths in {rest!r}", region(asked, rest=rest).found("region", [(that, "proved") for that in asked], BOX))
    plain = region(asked, rest="").found("region", [(that, "undecided" if n < 2 else "proved") for n, that in enumerate(asked)], BOX)
    less = hair("1", -1)
    for i, (x, y, r) in enumerate(((less, "2", less), ("1", hair("2", 0), "1"))):
        rows, inverse = [[x, "0"], ["0", y]], [[str(1 / Q(x)), "0"], ["0", str(1 / Q(y))]]
        entries = but(plain, "proof 0 witness", {"kind": "box", "rows": rows, "inverse": inverse}, "proof 4 concludes", {"radius": r, "outer": "1"}, "proof 8 concludes norm", "4/5", "proof 10 concludes gain", "4/5",
                      "proof 11 concludes bound", "5/8", "results metric", {"kind": "box", "weights": {"x": x, "y": y}})
        entries = without(entries, 16, 17)
        if i:
            accept("lengths in a norm as large as every state", but(entries, "results requirements 0 verdict", "proved", "results requirements 1 verdict", "proved"))
        else:
            judged("lengths in a norm a hair smaller", entries)


told_apart()
units_of_lengths()
smaller_balls()
other_sets()
refused_rules()
escapes()
of_no_use()
at_the_edges()
over_ranges()
rounding_of_stances()
# fmt: on


def test_several_boundaries() -> None:
    all_hold(CASES)
