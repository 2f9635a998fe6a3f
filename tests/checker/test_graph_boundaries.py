"""Claims of named stances at exact equality: what is kept on every step, bounds, and what they amount to.

As in `test_several_boundaries.py`, whose way of writing certificates this shares: every number is known, and a hair
less of it is refused.
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from functools import partial
from types import SimpleNamespace
from typing import Any

import pytest

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import BASE, GONE, STEP, Draft, Entries, Questions, but, refuses

CASES = Questions()
unit, accept, reject = CASES.unit, CASES.accept, CASES.reject


# fmt: off


def hair(text: str, by: int) -> str:
    return str(Q(text) + by * Q("1" + STEP))


def claim(left: str, right: str, spans: tuple[str, str], asked: Sequence[str], targets: tuple[str, str] = ("0", "0"), then: tuple[str, str] = ('"right"', '"left"'),
          top: str = "", rest: str = 'p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]') -> str:
    text = f"format = 1\n{top}\n[uncertain]\n{rest}\n"
    for name, step, span, target, after in zip(("left", "right"), (left, right), spans, targets, then, strict=True):
        text += f'[stance.{name}]\nthen = {after}\nstate = {{ x = {span} }}\ntarget = {{ x = "{target}" }}\nnext = {{ x = "{step}" }}\n'
    return text + "".join(f"[[require]]\nthat = {r}\n" if r.startswith('"') else f'[[require]]\nthat = "{r}"\n' for r in asked)


class Steps(Draft):
    """A certificate about stances being written."""

    def metric(self, stance: str, kind: str = "box", rows: Any = (("1",),), inverse: Any = (("1",),)) -> int:
        return self.line("metric", f"{stance}:metric", [], {"kind": kind, "rows": [list(r) for r in rows], "inverse": [list(r) for r in inverse]})

    form = "d"

    def matrix(self, proves: str, norm: str, uses: Sequence[int]) -> int:
        return self.line("matrix", proves, uses, {"bits": 0, "scales": [], "trees": [self.form]}, norm=norm)

    def table(self, proves: str, values: dict[str, str], uses: Sequence[int], before: Any = None, after: Any = None) -> int:
        one = {"rows": [["1"]], "inverse": [["1"]]}
        return self.line("graph-entries", proves, uses, {"bits": 0, "trees": [self.form], "before": before or one, "after": after or one}, **values)

    def stretch(self, proves: str, at: dict[str, str], lower: str, uses: Sequence[int], direction: Sequence[str] = ("1",)) -> int:
        return self.line("stretch", proves, uses, {"at": at, "bits": 0, "direction": list(direction)}, lower=lower)

    def bound(self, uses: Sequence[int], p: dict[str, str], b: dict[str, str], **concludes: str) -> int:
        witness = {x: {s: [q] for s, q in v.items()} for x, v in (("p", p), ("b", b))}
        return self.line("graph-bound", "bound[slope]", uses, witness, **concludes)

    def found(self, kind: str | None, asked: Sequence[tuple[str, str]], metrics: tuple[Any, Any] | None = None, states: Sequence[str] = ("x",)) -> Entries:
        """`asked`: text and verdict; with "left: " or "right: " before it where the claim says `in`."""
        plain = [(that.split(": ")[-1].split('"')[0 if not that.startswith('"') else 1], verdict) for that, verdict in asked]
        entries = self.entries(kind, plain, (), "x")
        results = entries["results"]
        norms = metrics or ({"kind": "box", "weights": {"x": "1"}},) * 2
        centre = dict.fromkeys(states)

        def by_state() -> Entries:
            return {s: {"bound": None, "sharp_bound": None, "radius": None, "push": None} for s in states}

        if kind:
            results["set"]["centre"] = dict(centre)
        results["states"], results["metric"] = by_state(), norms[0] if norms[0] == norms[1] else None
        proved = {x["proves"].partition(":")[2] for x in self.proof if ">" in x["proves"]}
        results["routes"] = {route: {"gain": None, "residual": None, "bound": None} for route in ("slope", "split") if route in proved}
        results["stances"] = {name: {"set": {"kind": kind, "centre": dict(centre), "radius": None} if kind else None, "metric": norm, "states": by_state()}
                              for name, norm in zip(("left", "right"), norms, strict=True)}
        return entries


def judged(name: str, entries: Entries) -> None:
    """Nothing else is derived of any requirement, and undecided may be said of all."""
    accept(name, entries)
    for n, r in enumerate(entries["results"]["requirements"]):
        for other in sorted({"proved", "refuted"} - {r["verdict"]}):
            reject(f"{name}: {n} {r['that']} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {r['verdict']} was derived")


def exact(name: str, entries: Entries, figures: dict[str, tuple[str | None, str | None]]) -> None:
    """Every figure of the results as derived; wider is accepted, a hair less is not."""
    full = entries
    for path, (low, high) in figures.items():
        full = but(full, f"results {path}", {"lower": low, "upper": high})
    accept(f"{name}: exactly", full)
    for path, ends in figures.items():
        for end, value, by in zip(("lower", "upper"), ends, (1, -1), strict=True):
            if value is None:
                reject(f"{name}: {path} {end}", but(full, f"results {path} {end}", "1"), "results", f"{end}: nothing was derived")
            else:
                accept(f"{name}: {path} {end}, wider", but(full, f"results {path} {end}", hair(value, -by)))
                reject(f"{name}: {path} {end}", but(full, f"results {path} {end}", hair(value, by)), "results", f"{end}: more is claimed")


def tight(name: str, entries: Entries, lines: dict[int, tuple[tuple[str, int, str], ...]]) -> None:
    """Of these lines every conclusion is exact: a hair in the direction given is refused."""
    for number, ends in lines.items():
        for key, by, reason in ends:
            old = entries["proof"][number - 1]["concludes"][key]
            reject(f"{name}: line {number} {key}", but(entries, f"proof {number - 1} concludes {key}", hair(old, by)), f"proof line {number}", reason)


# regions: x -> 3/2 x + p from [-1, 1] into [-13/8, 13/8], x -> x/4 + q back

MAPS, SPANS = ("3*x/2 + p", "x/4 + q"), ("[-1, 1]", '["-13/8", "13/8"]')


def regions(asked: Sequence[str] = ("settles",), top: str = "", spans: tuple[str, str] = SPANS) -> Steps:
    """Lines: 1 6 metrics, 2 7 targets, 3 8 points, 4 9 balls, 5 10 images, 11 invariant, 12 13 15 16 matrices, 14 17 pairs, 18 bound, 19 to 22 entries,
    23 comparison, 24 to 27 stretches."""
    d = Steps(claim(*MAPS, spans, asked, top=top))
    for name, most, image in (("left", "1", "13/8"), ("right", "13/8", "15/32")):
        first = len(d.proof)
        d.metric(name)
        d.range(f"{name}:target[x]", "0", "0")
        d.point(f"{name}:target[x]", {}, "0")
        d.theorem("largest-ball", f"{name}:ball", [first + 1, first + 2, first + 3], radius=most, outer=most)
        d.range(f"{name}:image[x]", f"-{image}", image)
    invariant = d.theorem("graph-regions", "invariant", [1, 2, 5, 6, 7, 10])
    slopes = [(">", "left", "right", "3/2", "1/8", 6), (">", "right", "left", "1/4", "1/16", 1)]
    pairs = []
    for _, s, t, k, e, norm in slopes:
        one, two = d.matrix(f"{s}>{t}:slopes", k, [invariant, norm]), d.matrix(f"{s}>{t}:misses", e, [invariant, norm])
        pairs.append(d.theorem("slope", f"{s}>{t}:slope", [one, two], gain=k, residual=e))
    d.bound([invariant, *pairs], {"left": "1", "right": "2"}, {"left": "3/20", "right": "7/20"}, left="3/20", right="7/20")
    tables = [d.table(f"{s}>{t}:{x}", {"1,1": v}, [invariant, norm]) for _, s, t, k, e, norm in slopes for x, v in (("slopes", k), ("misses", e))]
    d.line("graph-componentwise", "componentwise", [invariant, *tables], {"p": {"left": ["1"], "right": ["2"]}, "b": {"left": ["3/20"], "right": ["7/20"]}}, **{"left:x": "3/20", "right:x": "7/20"})
    for _, s, t, k, e, norm in slopes:
        name = "p" if s == "left" else "q"
        d.stretch(f"{s}>{t}:slopes", {"x": "1", name: "0"}, k, [invariant, norm])
        d.stretch(f"{s}>{t}:misses", {name: e}, e, [invariant, norm])
    return d


IN_REGIONS = [
    ("settles", "proved"), ("gain <= 3/2", "proved"), ("gain < 3/2", "refuted"), (f"gain <= 3/2 - 1{STEP}", "refuted"), ('"gain <= 1/4"\nin = "right"', "proved"), ('"gain < 1/4"\nin = "right"', "refuted"), ('"gain < 3/2"\nin = "left"', "refuted"),
    ("residual <= 1/8", "proved"), ("residual < 1/8", "refuted"), ('"residual <= 1/16"\nin = "right"', "proved"), ('"residual < 1/16"\nin = "right"', "refuted"),
    ("bound <= 7/20", "proved"), ("bound < 7/20", "undecided"), ('"bound <= 3/20"\nin = "left"', "proved"), ('"bound < 3/20"\nin = "left"', "undecided"), ("bound < 1/100", "undecided"),
    ("bound(x) <= 7/20", "proved"), ("bound(x) < 7/20", "undecided"), ('"bound(x) <= 3/20"\nin = "left"', "proved"), ('"bound(x) <= 3/20"\nin = "right"', "undecided"), ("sharp_bound(x) <= 7/20", "proved"), ("sharp_bound(x) < 7/20", "undecided"), ("sharp_bound <= 9", "undecided"),
    ("radius(x) >= 1", "proved"), ("radius(x) > 1", "undecided"), ('"radius(x) >= 13/8"\nin = "right"', "proved"), ('"radius(x) > 13/8"\nin = "right"', "undecided"), ("radius >= 1", "proved"), ("radius > 1", "undecided"),
    ("push(x) >= 17/20", "undecided"), (f"push(x) >= 17/20 - 1{STEP}", "proved"), ('"push(x) >= 51/40"\nin = "right"', "undecided"), (f'"push(x) >= 51/40 - 1{STEP}"\nin = "right"', "proved"),
    # from 1: on the left 1, 13/8, 15/32, 53/64, 69/256; on the right 1, 5/16, 19/32, 27/128: levels d with 3/2 d + 1/8 <= d' and d'/4 + 1/16 <= d
    ("steps(x, 1, 13/8) <= 0", "proved"), (f"steps(x, 1, 13/8 - 1{STEP}) <= 0", "undecided"), ('"steps(x, 1, 1) <= 2"\nin = "left"', "proved"), ('"steps(x, 1, 1) <= 1"\nin = "left"', "undecided"), ('"steps(x, 1, 1) <= 1"\nin = "right"', "proved"),
    ('"steps(x, 1, 53/64) <= 2"\nin = "left"', "proved"), (f'"steps(x, 1, 53/64 - 1{STEP}) <= 2"\nin = "left"', "undecided"), ('"steps(x, 1, 19/32) <= 1"\nin = "right"', "proved"), (f'"steps(x, 1, 19/32 - 1{STEP}) <= 1"\nin = "right"', "undecided"),
    ("steps(x, 1, 7/20) <= 99", "undecided"), ("steps(x, 3/20, 7/20) <= 0", "proved"), (f"steps(x, 3/20 + 1{STEP}, 7/20) <= 0", "undecided"), ('"steps(x, 3/20, 7/20) <= 0"\nin = "left"', "proved"), (f"steps(x, 1 + 1{STEP}, 13/8) <= 9", "undecided"), (f'"steps(x, 1 + 1{STEP}, 13/8) <= 9"\nin = "right"', "proved"),
    ("steps(x, 1, 1/10) <= 20000", "undecided"), ('"push(x) >= 0"\nover = { p = [0, 0] }', "undecided"), ('"settles"\nin = "left"', "proved"), ('"settles"\nin = "right"', "proved"), ("value(2) <= 2", "proved"), ('"value(2) < 3"\nin = "left"', "proved"), ('"value(2) < 3"\nin = "right"', "undecided"),
]
FIGURES: dict[str, tuple[str | None, str | None]] = {
    "gain": ("3/2", "3/2"), "residual": ("1/8", "1/8"), "radius": ("1", "1"), "set radius": ("1", "1"), "set centre x": ("0", "0"), "sharp_bound": (None, None),
    "states x bound": (None, "7/20"), "states x radius": ("1", "1"), "states x push": ("17/20", None), "routes slope gain": ("3/2", "3/2"), "routes slope residual": ("1/8", "1/8"),
    "stances left states x bound": (None, "3/20"), "stances right states x bound": (None, "7/20"), "stances left states x radius": ("1", "1"), "stances right states x radius": ("13/8", "13/8"),
    "stances left states x push": ("17/20", None), "stances right states x push": ("51/40", None), "stances left set radius": ("1", "1"), "stances right set radius": ("13/8", "13/8"), "stances right set centre x": ("0", "0"),
    "requirements 0 value": (None, "7/20"), "states x sharp_bound": (None, "7/20"),
}
NEARLY = str(Q(7, 20) - Q(1, 10**40))  # the bound from below, as far as the steps are added up


def value_lines(d: Steps, asked: Sequence[tuple[str, str]], on: int) -> None:
    for n, (that, _) in enumerate(asked, 1):
        if "value(2)" in that:
            for name in ("left", "right") if that.startswith("value") else ("left",) if "left" in that else ():
                d.range(f"{name}:require[{n}]", "2", "2", [on])


def in_regions() -> None:
    d = regions([that for that, _ in IN_REGIONS])
    value_lines(d, IN_REGIONS, 11)
    judged("regions", d.found("region", IN_REGIONS))
    good = regions().found("region", [("settles", "proved")])
    exact("regions", good, FIGURES)
    below = but(good, "results bound", {"lower": NEARLY, "upper": "7/20"}, "results routes slope bound", {"lower": NEARLY, "upper": "7/20"})
    accept("the bound from below", below)
    for path in ("bound", "routes slope bound"):
        reject(f"the bound from below, {path}", but(below, f"results {path} lower", hair("7/20", 0)), "results", "lower: more is claimed")
        reject(f"the bound, {path}", but(below, f"results {path} upper", hair("7/20", -1)), "results", "upper: more is claimed")
    short = "less than what the lines used show"
    tight("regions", good, {
        12: (("norm", -1, "a leaf is not shown to stay within the norm"),), 13: (("norm", -1, "a leaf is not shown"),), 14: (("gain", -1, short), ("residual", -1, short)),
        17: (("gain", -1, short), ("residual", -1, short)), 18: (("left", -1, "no less than b"), ("right", -1, "no less than b")), 19: (("1,1", -1, "less than what the leaves show"),), 20: (("1,1", -1, "less than what the leaves show"),),
        23: (("left:x", -1, "less than what the comparison shows"), ("right:x", -1, "less than what the comparison shows")), 24: (("lower", 1, "not shown to be stretched"),), 25: (("lower", 1, "not shown to be stretched"),),
    })
    for key, value, reason in (("p left", "4/3", ""), ("p left", hair("4/3", -1), "ok"), ("p right", "3/2", ""), ("p right", hair("3/2", 1), "ok"), ("p left", "1/2", ""), ("p left", hair("1/2", 1), "ok"), ("p left", "0", "p > 0"), ("p right", "-2", "p > 0"),
                               ("b left", hair("3/20", -1), ""), ("b right", hair("7/20", -1), ""), ("b left", "-1", "b >= 0")):
        for line, rule in ((17, "bound"), (22, "comparison")):
            entries = but(good, f"proof {line} witness {key} 0", value)
            if key == "p right" and reason == "ok":
                entries = but(entries, f"proof {line} witness p left 0", "1")
            if reason == "ok":
                accept(f"{rule}: {key} {value}", entries)
            else:
                reject(f"{rule}: {key} {value}", entries, f"proof line {line + 1}", f"{reason or 'K p < p and K b + residual <= b'}")
    for line, rule in ((17, "bound"), (22, "comparison")):
        for key in ("p", "b"):
            reject(f"{rule}: a stance without {key}", but(good, f"proof {line} witness {key} right", GONE), f"proof line {line + 1}", "a list for each stance")
            reject(f"{rule}: two numbers of {key}", but(good, f"proof {line} witness {key} right", ["1", "1"]), f"proof line {line + 1}", "a list of 1 numbers")
    reject("a bound of one stance alone", but(good, "proof 17 concludes right", GONE), "proof line 18", "a bound for each stance")
    reject("a comparison of one stance alone", but(good, "proof 22 concludes right:x", GONE), "proof line 23", "a bound for each state in each stance")


def what_is_kept() -> None:
    good = regions().found("region", [("settles", "proved")])
    for number, key, value, reason in ((4, "upper", hair("13/8", 1), "left: image[x] is not shown to stay"), (4, "lower", hair("-13/8", -1), "left: image[x] is not shown to stay"), (9, "upper", hair("1", 1), "right: image[x] is not shown to stay"), (9, "upper", "1", "ok"),
                                       (1, "upper", hair("1", 1), ""), (6, "lower", "-2", "")):
        entries = but(good, f"proof {number} concludes {key}", value)
        if reason == "ok":
            accept("an image up to the edge", entries)
        else:
            place = 11 if reason else {1: 4, 6: 9}[number]
            reject(f"kept: {number} {key} {value}", entries, f"proof line {place}", reason or "the ball is not shown to lie")
    for number, old, reason in ((11, [1, 2, 5, 6, 7], "invariant rests on"), (11, [6, 7, 10, 1, 2, 5], "lines about left"), (11, [1, 2, 5, 6, 7, 5], "lines about"), (12, [11, 1], "the metric of the next"), (12, [11, 6, 6], "the metric of the next"),
                                (12, [4, 1], "the metric of the next"), (12, [9, 6], "the metric of the next"), (12, [11], "the metric of the next"), (17, [12, 16], "lines about"), (17, [15, 13], "lines about"), (14, [12, 12], "slope rests on"),
                                (18, [14, 17], "first the sets"), (18, [11, 17, 14], "lines about"), (18, [11, 14], "rests on"), (18, [11, 14, 14], "lines about"), (23, [11, 19, 20, 21], "rests on"), (23, [11, 21, 22, 19, 20], "lines about"), (23, [19, 19, 20, 21, 22], "first the sets"),
                                (9, [1, 7, 8], "lines about right only"), (9, [6, 2, 8], "lines about right only")):
        reject(f"uses of {number}: {old}", but(good, f"proof {number - 1} uses", old), f"proof line {number}", reason)
    loop = regions().found("region", [("settles", "proved")])
    looped = but(loop, "claim text", loop["claim"]["text"].replace('then = "right"', 'then = ["right", "left"]'))
    reject("a step more, left to left", looped, "proof line 11", "left: image[x] is not shown to stay in the region")
    reject("a step that is not allowed", but(good, "proof 11 proves", "left>left:slopes"), "proof line 12", "no stance of the claim, nor a step")
    reject("no such stance", but(good, "proof 0 proves", "up:metric"), "proof line 1", "no stance of the claim")
    for number, rule, proves, reason in ((1, "metric", "metric", "not known of all stances together"), (2, "range", "target[x]", "not known of all stances together"), (12, "matrix", "slopes", "not known of all stances together"), (12, "matrix", "left:slopes", "not known of one stance alone"),
                                         (11, "graph-regions", "left:invariant", "not known of one stance alone"), (11, "graph-regions", "left>right:invariant", "not known of a step"), (4, "largest-ball", "left>right:ball", "not known of a step"), (18, "graph-bound", "bound[split]", "rests on"),
                                         (23, "graph-componentwise", "compared", "rests on"), (11, "graph-regions", "kept", "rests on"), (1, "metric", "over[1]:left:metric", "over[1]: no requirement that sets ranges"), (12, "matrix", "left>right:slope", "proves slopes or misses")):
        reject(f"{number} as {rule} of {proves}", but(good, f"proof {number - 1} rule", rule, f"proof {number - 1} proves", proves), f"proof line {number}", reason)
    reject("weights of a single state", but(good, "proof 0 witness", {"kind": "box", "rows": [["2"]], "inverse": [["1/2"]]}), "proof line 1", "the weight of x")
    reject("an ellipsoid of a single state", but(good, "proof 0 witness kind", "ellipsoid"), "proof line 1", "the weight of x")
    bad = {"rows": [["1"]], "inverse": [["2"]]}
    for end in ("before", "after"):
        reject(f"no basis {end}", but(good, f"proof 18 witness {end}", bad), "proof line 19", "the inverse times the matrix is not 1")
        reject(f"a basis {end} without rows", but(good, f"proof 18 witness {end} rows", GONE), "proof line 19", "rows and inverse")
        reject(f"entries in another basis {end}", but(good, f"proof 18 witness {end}", {"rows": [["2"]], "inverse": [["1/2"]]}, "proof 18 concludes 1,1", "3"), "proof line 23", "different bases")
    for top, said in (('route = "sector"', "only the routes slope and split"), ('horizon = 2\nroute = "split"', "split between stances can be checked over one step only")):
        wrong = regions(top=f'{top}\ncorrection = ["f"]\n[define]\nf = "x"').found("region", [("settles", "proved")])
        reject(f"another route, {top[:9]}", wrong, "claim", said)
    reject("a horizon", regions(top="horizon = 2").found("region", [("settles", "proved")]), "proof line 18", "lines about left>right>left, right>left>right")


# balls: R = 1 and 3/4; 3/8 x + p leads from 1 to 3/8 + 3/8 about 1/4, x/2 + q from 3/4 to 9/16 about 0


def balls(asked: Sequence[str] = ("settles",), top: str = "", escape: bool = True, small: bool = False) -> Steps:
    """Lines: 1 6 metrics, 2 7 targets, 3 8 points, 4 9 balls (5: a point of the image), then 10 11 13 14 matrices, 12 15 pairs, 16 invariant, 17 bound; a line fewer without the point."""
    d = Steps(claim("3*x/8 + p", "x/2 + q", ("[-1, 3]", "[-1, 1]"), asked, ("0", "1/4"), top=top))
    left, lt = d.metric("left"), d.range("left:target[x]", "0", "0")
    at = d.point("left:target[x]", {}, "0")
    one = d.theorem("largest-ball", "left:ball", [left, lt, at], radius="1", outer="1")
    if escape:
        d.point("left:image[x]", {"x": "3", "p": "1/8"}, "5/4")
    right, rt = d.metric("right"), d.range("right:target[x]", "1/4", "1/4")
    if small:
        two = d.theorem("smaller-ball", "right:ball", [right, rt], radius="3/4")
    else:
        at = d.point("right:target[x]", {}, "1/4")
        two = d.theorem("largest-ball", "right:ball", [right, rt, at], radius="3/4", outer="3/4")
    pairs = []
    for s, t, k, e, on, norm in (("left", "right", "3/8", "3/8", one, right), ("right", "left", "1/2", "3/16", two, left)):
        first, second = d.matrix(f"{s}>{t}:slopes", k, [on, norm]), d.matrix(f"{s}>{t}:misses", e, [on, norm])
        pairs.append(d.theorem("slope", f"{s}>{t}:slope", [first, second], gain=k, residual=e))
    kept = d.theorem("graph-balls", "invariant", [one, two, *pairs])
    # b_left = b_right/2 + 3/16, b_right = 3/8 b_left + 3/8: 6/13 (= 3/8 + 3/32 ... over 13/16), 57/104
    d.bound([kept, *pairs], {"left": "1", "right": "1"}, {"left": "6/13", "right": "57/104"}, left="6/13", right="57/104")
    return d


IN_BALLS = [
    ("settles", "proved"), ("gain <= 1/2", "proved"), ("bound(x) <= 57/104", "proved"), ("bound(x) < 57/104", "undecided"), ('"bound(x) <= 6/13"\nin = "left"', "proved"), ("radius(x) >= 3/4", "proved"), ("radius(x) > 3/4", "undecided"), ('"radius(x) >= 1"\nin = "left"', "proved"),
    ("push(x) >= 21/104", "undecided"), (f"push(x) > 21/104 - 1{STEP}", "proved"), ('"push(x) >= 7/13"\nin = "left"', "undecided"), (f'"push(x) >= 7/13 - 1{STEP}"\nin = "left"', "proved"),
]


def in_balls() -> None:
    judged("balls", balls([that for that, _ in IN_BALLS]).found("ball", IN_BALLS))
    small = [(that, "proved" if that.startswith("radius(x) >= 3/4") or "radius(x) >= 1" in that else "undecided") for that, _ in IN_BALLS]
    for name, options in (("no point that leaves", {"escape": False}), ("one of them smaller", {"small": True, "escape": False})):
        judged(f"smaller balls: {name}", balls([that for that, _ in IN_BALLS], **options).found("smaller ball", small))
        judged(f"smaller balls that count: {name}", balls([that for that, _ in IN_BALLS], top="shrink = true", **options).found("smaller ball", IN_BALLS))
    edges = balls(escape=False)
    for n, (at, value) in enumerate((({"x": "7/3", "p": "1/8"}, "1"), ({"x": "-1", "p": "-1/8"}, "-1/2"))):
        d = balls(escape=False)
        d.point("left:image[x]", at, value)
        reject(f"a point on the edge or inside leads nowhere {n}", d.found("ball", [("settles", "proved")]), "results", "'ball' is claimed, 'smaller ball' was derived")
    d = Steps(edges.text.replace('3*x/8 + p', '-3*x/8 + p'))
    d.proof = [*edges.proof]
    for at, value in (({"x": "7/3", "p": "-1/8"}, "-1"),):
        d.point("left:image[x]", at, value)
    reject("a point on the lower edge leads nowhere", d.found("ball", [("settles", "proved")]), "results", "'ball' is claimed, 'smaller ball' was derived")
    below = Steps(d.text)
    below.proof = [*edges.proof]
    below.point("left:image[x]", {"x": "3", "p": "-1/8"}, "-5/4")
    accept("a point below the lower edge", below.found("ball", [("settles", "proved")]))
    good = balls().found("ball", [("settles", "proved")])
    exact("balls", good, {"set radius": ("3/4", "3/4"), "set centre x": ("0", "1/4"), "stances right set centre x": ("1/4", "1/4"), "stances left states x bound": (None, "6/13"), "stances right states x push": ("21/104", None), "requirements 0 value": (None, "57/104")})
    where = next(n for n, line in enumerate(good["proof"]) if line["rule"] == "graph-balls")
    pair = next(n for n, line in enumerate(good["proof"]) if line["proves"] == "left>right:slope")
    for key in ("gain", "residual"):
        reject(f"balls: {key} a hair more", but(good, f"proof {pair} concludes {key}", hair("3/8", 1)), f"proof line {where + 1}", "left>right: gain times radius plus residual exceeds the radius")
    reject("balls: a larger ball is not ruled out", but(good, "proof 3 concludes outer", hair("1", 1)), f"proof line {where + 1}", "exceeds the radius")
    reject("balls: the other first", but(good, f"proof {where} uses", [9, 4, *good["proof"][where]["uses"][2:]]), f"proof line {where + 1}", "lines about left")
    reject("balls: a region", but(good, "proof 15 uses", [4, 9, 12, 12]), "proof line 16", "lines about")


def stepping_where() -> None:
    """Points of another set, pairs in another norm, sets of other stances."""
    good = balls().found("ball", [("settles", "proved")])
    more = Steps(good["claim"]["text"])
    more.proof = list(good["proof"])
    more.stretch("left>right:slopes", {"x": "1", "p": "0"}, "3/8", [4, 6])
    more.stretch("left>right:misses", {"p": "-1/8"}, "3/8", [4, 6])
    more.stretch("right>left:slopes", {"x": "1", "q": "0"}, "1/2", [9, 1])
    more.stretch("right>left:misses", {"q": "1/16"}, "3/16", [9, 1])
    asked = [("gain <= 1/2", "proved"), ("gain < 1/2", "refuted"), ('"gain < 3/8"\nin = "left"', "refuted"), ("residual < 3/8", "refuted"), (f"residual <= 3/8 - 1{STEP}", "refuted"), ('"residual < 3/16"\nin = "right"', "refuted"), ("residual <= 3/8", "proved")]
    for name, top, wanted in (("stretched", "", asked), ("stretched, any smaller set", "shrink = true", [(a, "proved" if v == "proved" else "undecided") for a, v in asked])):
        d = balls([a for a, _ in asked], top=top)
        d.proof += more.proof[len(good["proof"]):]
        judged(name, d.found("ball", wanted))
    exact("stretched", more.found("ball", [("settles", "proved")]), {"gain": ("1/2", "1/2"), "residual": ("3/8", "3/8")})


@unit
def least_and_most(checker: Any) -> None:
    o, span = checker.graph_outcomes, checker.results.Span
    assert o.most([span(1, 2), span(0, 3)]) == span(1, 3) and o.most([span(None, 2), span(0, None)]) == span(0, None) and o.most([]) == span(None, None)
    assert o.least([span(1, 2), span(0, 3)]) == span(0, 2) and o.least([span(None, 2), span(0, None)]) == span(None, 2) and o.least([]) == span(None, None)
    assert o.hull([span(1, 2), span(0, 3)]) == span(0, 3) and o.hull([span(None, 2), span(0, 1)]) == span(None, 2) and o.hull([span(1, None), span(0, 1)]) == span(0, None)
    out = checker.results.Outcome
    proved, refuted, open_ = (out(v, span(0, 1), span(0, 1)) for v in ("proved", "refuted", "undecided"))
    assert [o.together(x).verdict for x in ([proved, proved], [proved, open_], [open_, refuted], [proved, refuted])] == ["proved", "undecided", "refuted", "refuted"]
    assert o.together([out("undecided", None, None), proved]) == out("undecided", None, span(0, 1))
    assert o.together([out("proved", span(0, 1), span(1, 3)), out("proved", span(2, 4), span(0, 2))]) == out("proved", span(0, 4), span(0, 3))


@unit
def too_many_stances(checker: Any) -> None:
    def text(count: int) -> str:
        found = 'format = 1\n[state]\nx = [-1, 1]\n[next]\nx = "x/2"\n[target]\nx = 0\n'
        return found + "".join(f'[stance.s{k}]\nthen = "s{(k + 1) % count}"\n' for k in range(count))

    read = checker.statement.read_statement
    assert len(checker.graph.graph_of(read(text(16), {}, {})).steps) == 16
    with refuses(checker.calculus.Unprovable, "at most 16 stances"):
        checker.graph.graph_of(read(text(17), {}, {}))


@unit
def rounded_up(checker: Any) -> None:
    o = checker.graph_outcomes
    exact, long = Q(1, 3), Q(1, 3**1300)
    assert o.rounded(exact) == exact and long < o.rounded(long) <= Q(1, 2**160) and o.rounded(Q(1, 2**480)) > Q(1, 2**480) and o.rounded(Q(1, 2**479)) == Q(1, 2**479)


# two states, norms of their own: max(|x|, 2|y|) on the left, |2x + y| and |2x − y| on the right, where y is named first

WEIGHTS, UNWEIGHTED = [["1", "0"], ["0", "2"]], [["1", "0"], ["0", "1/2"]]
SLANTED, UPRIGHT = [["2", "1"], ["2", "-1"]], [["1/4", "1/4"], ["1/2", "-1/2"]]
ONE = [["1", "0"], ["0", "1"]]
NORMS = {"kind": "box", "weights": {"x": "1", "y": "2"}}, {"kind": "polytope", "matrix": SLANTED}


def two(asked: Sequence[str] = ("settles",), top: str = "") -> Steps:
    """Lines: 1 8 metrics, 2 3 9 10 targets, 4 11 points, 5 12 balls, 6 7 13 14 images, 15 invariant, 16 17 19 20 matrices, 18 21 pairs, 22 bound, 23 to 26 entries, 27 comparison,
    28 to 31 stretches."""
    text = f'format = 1\n{top}\n[uncertain]\np = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]\n[next]\nx = "x/2 + y/4 + p"\ny = "x/4 + y/4 + q"\n[target]\nx = 0\ny = 0\n'
    text += '[stance.left]\nthen = "right"\nstate = { x = [-1, 1], y = [-1, 1] }\n[stance.right]\nthen = "left"\nstate = { y = [-1, 1], x = [-1, 1] }\n'
    d = Steps(text + "".join(f"[[require]]\nthat = {r}\n" if r.startswith('"') else f'[[require]]\nthat = "{r}"\n' for r in asked))
    sets: list[int] = []
    for name, kind, rows, inverse, edge in (("left", "box", WEIGHTS, UNWEIGHTED, "x"), ("right", "polytope", SLANTED, UPRIGHT, "y")):
        norm = d.metric(name, kind, rows, inverse)
        targets = [d.range(f"{name}:target[{s}]", "0", "0") for s in "xy"]
        at = d.point(f"{name}:target[{edge}]", {}, "0")
        d.theorem("largest-ball", f"{name}:ball", [norm, *targets, at], radius="1", outer="1")
        sets += [norm, *targets, d.range(f"{name}:image[x]", "-7/8", "7/8"), d.range(f"{name}:image[y]", "-9/16", "9/16")]
    invariant = d.theorem("graph-regions", "invariant", sets)
    pairs, tables = [], []
    for e, k, miss, norm in (("left>right", "13/8", "5/16", sets[5]), ("right>left", "1/2", "1/8", sets[0])):
        pairs.append(d.theorem("slope", f"{e}:slope", [d.matrix(f"{e}:slopes", k, [invariant, norm]), d.matrix(f"{e}:misses", miss, [invariant, norm])], gain=k, residual=miss))
    d.bound([invariant, *pairs], {"left": "1", "right": "7/4"}, {"left": "3/2", "right": "11/4"}, left="3/2", right="11/4")
    plain = {"rows": ONE, "inverse": ONE}
    for e, norm in (("left>right", sets[5]), ("right>left", sets[0])):
        tables.append(d.table(f"{e}:slopes", {"1,1": "1/2", "1,2": "1/4", "2,1": "1/4", "2,2": "1/4"}, [invariant, norm], plain, plain))
        tables.append(d.table(f"{e}:misses", {"1,1": "1/8", "2,1": "1/16"}, [invariant, norm], plain, plain))
    p, b = ["2", "1"], ["7/20", "1/5"]
    d.line("graph-componentwise", "componentwise", [invariant, *tables], {"p": {"left": p, "right": p}, "b": {"left": b, "right": b}}, **{f"{s}:{x}": y for s in ("left", "right") for x, y in (("x", "7/20"), ("y", "1/5"))})
    d.stretch("left>right:slopes", {"x": "1", "y": "1", "p": "0", "q": "0"}, "13/8", [invariant, sets[5]], ["1", "1/2"])
    d.stretch("left>right:misses", {"p": "1/8", "q": "1/16"}, "5/16", [invariant, sets[5]])
    d.stretch("right>left:slopes", {"x": "1", "y": "1", "p": "0", "q": "0"}, "1/2", [invariant, sets[0]], ["0", "1"])
    d.stretch("right>left:misses", {"p": "1/8", "q": "0"}, "1/8", [invariant, sets[0]])
    return d


def two_states() -> None:
    asked = [("settles", "proved"), ("gain <= 13/8", "proved"), ("gain < 13/8", "undecided"), ("residual <= 5/16", "proved"), ("residual < 5/16", "undecided"), ("bound <= 11/4", "proved"), ("bound < 11/4", "undecided"), ("bound(x) <= 7/20", "proved"), ("bound(x) < 7/20", "undecided"),
             ("bound(y) <= 1/5", "proved"), ('"bound(y) < 1/5"\nin = "right"', "undecided"), ("radius(y) >= 1", "proved"), ("push(y) >= 4/5", "undecided"), (f"push(y) > 4/5 - 1{STEP}", "proved"), ("steps(y, 1, 1) <= 0", "undecided")]
    judged("two states", two([a for a, _ in asked]).found("region", asked, NORMS, "xy"))
    good = two().found("region", [("settles", "proved")], NORMS, "xy")
    exact("two states", good, {"gain": ("13/8", "13/8"), "residual": ("5/16", "5/16"), "states x bound": (None, "7/20"), "states y bound": (None, "1/5"), "stances right states y push": ("4/5", None), "requirements 0 value": (None, "9/10")})
    other = but(good, "results stances left metric", NORMS[1])
    reject("another norm on the left", other, "results", "results.stances.left.metric")
    reject("one norm for both", but(good, "results metric", NORMS[0]), "results", "results.metric")
    reject("no stances", but(good, "results stances", GONE), "results", "the keys are")
    reject("one stance", but(good, "results stances right", GONE), "results", "results.stances: the keys are left, right")
    reject("a stance without its set", but(good, "results stances right set", None), "results", "results.stances.right.set: the keys are")
    by_norm = without(good, 27, 26, 25, 24, 23)
    exact("two states by the norm", but(by_norm, "results requirements 0 verdict", "undecided"), {"stances left states x bound": (None, "3/2"), "stances left states y bound": (None, "3/4"), "stances right states x bound": (None, "11/8"), "stances right states y bound": (None, "11/4")})
    reject("not settled by the norm", by_norm, "results", "[1].verdict: proved is claimed, undecided was derived")
    other = {"kind": "ellipsoid", "rows": SLANTED, "inverse": UPRIGHT}
    mixed = next(n for n, x in enumerate(good["proof"]) if x["proves"] == "right:metric")
    reject("lengths of two kinds", but(good, f"proof {mixed} witness", other, "proof 11 concludes outer", "2"), f"proof line {next(n for n, x in enumerate(good['proof'], 1) if x['rule'] == 'matrix')}", "Euclidean lengths and largest magnitudes")


def not_kept() -> None:
    """Of the largest balls gain and residual are known even where they are not kept; of smaller ones nothing is."""
    for small in (False, True):
        entries = balls(small=small, escape=False).found(None, [("settles", "undecided")])
        last = len(entries["proof"])
        bare = without(entries, last, last - 1)
        if small:
            bare = but(bare, "results routes", {})
            reject("smaller balls that are not kept", bare, "proof", "serves no later line")
            reject("a gain over smaller balls that are not kept", but(bare, "results gain", {"lower": None, "upper": "1/2"}), "results", "results.gain.upper: nothing was derived")
        else:
            exact("the largest balls, not kept", bare, {"gain": (None, "1/2"), "residual": (None, "3/8"), "routes slope gain": (None, "1/2")})


def of_another_set() -> None:
    """Gain and residual over the balls, where the regions are the sets; of several stretches the largest serves."""
    good = regions().found("region", [("settles", "undecided")])
    bare = without(good, 27, 26, 25, 24, 23, 22, 21, 20, 19, 18)
    accept("gain and residual over the regions", bare)
    for e, lines, uses in (("left>right", (12, 13), [4, 6]), ("right>left", (15, 16), [9, 1])):
        reject(f"gain and residual over a ball, {e}", but(bare, *(x for n in lines for x in (f"proof {n - 1} uses", uses))), "results", f"{e}: gain and residual refer to another set or norm")
    d = regions()
    d.stretch("left>right:slopes", {"x": "1", "p": "0"}, "1", [11, 6])
    reject("a stretch that says less", d.found("region", [("settles", "proved")]), "proof", "line 28 serves no later line")
    d = regions()
    d.proof.append({**d.proof[22], "concludes": {"left:x": "1", "right:x": "1"}})
    reject("a comparison that says less", d.found("region", [("settles", "proved")]), "proof", "line 28 serves no later line")
    d = regions()
    d.proof[23], more = {**d.proof[23], "concludes": {"lower": "1"}}, d.proof[23]
    d.proof.append(more)
    reject("a stretch that says less first", d.found("region", [("settles", "proved")]), "proof", "line 24 serves no later line")


def moving() -> None:
    """Held c, which moves by up to 1/16 a step: the target c of the left by 1/16, that of the right, −2c, by 1/8."""
    d = Steps(claim("-2*c + (x - c)/2 + p", "c + (x + 2*c)/4 + q", ("[-1, 1]", "[-1, 1]"), ("settles",), ("c", "-2*c"),
                    rest='p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]\nc = { range = [0, "1/8"], held = true, change = "1/16" }'))
    sets: list[int] = []
    d.form = "c"
    for name, ends, at, room, image in (("left", ("0", "1/8"), "1/8", "7/8", ("-15/16", "5/8")), ("right", ("-1/4", "0"), "-1/4", "3/4", ("-5/16", "1/2"))):
        norm, target = d.metric(name), d.range(f"{name}:target[x]", *ends)
        d.theorem("largest-ball", f"{name}:ball", [norm, target, d.point(f"{name}:target[x]", {"c": "1/8"}, at)], radius=room, outer=room)
        sets += [norm, target, d.range(f"{name}:image[x]", *image)]
    kept = d.theorem("graph-regions", "invariant", sets)
    moves = [d.range("left:target-slope[x,c]", "1", "1"), d.range("right:target-slope[x,c]", "-2", "-2")]
    pairs, tables = [], []
    for e, k, miss, residual, norm, move in (("left>right", "1/2", "1/8", "1/4", sets[3], moves[1]), ("right>left", "1/4", "1/16", "1/8", sets[0], moves[0])):
        pairs.append(d.theorem("slope", f"{e}:slope", [d.matrix(f"{e}:slopes", k, [kept, norm]), d.matrix(f"{e}:misses", miss, [kept, norm]), move], gain=k, residual=residual))
        tables += [d.table(f"{e}:slopes", {"1,1": k}, [kept, norm]), d.table(f"{e}:misses", {"1,1": miss}, [kept, norm])]
    b = {"left": "3/14", "right": "5/14"}
    d.bound([kept, *pairs], {"left": "1", "right": "1"}, b, **b)
    d.line("graph-componentwise", "componentwise", [kept, *tables, *moves], {"p": {s: ["1"] for s in b}, "b": {s: [x] for s, x in b.items()}}, **{f"{s}:x": x for s, x in b.items()})
    good = d.found("region", [("settles", "proved")])
    exact("a target that moves", good, {"gain": (None, "1/2"), "residual": (None, "1/4"), "stances left states x bound": (None, "3/14"), "stances right states x bound": (None, "5/14"), "set radius": ("3/4", "3/4"), "stances left set radius": ("7/8", "7/8")})
    tight("a target that moves", good, dict.fromkeys(pairs, (("residual", -1, "less than what the lines used show"),)))
    for e, line in zip(("left>right", "right>left"), pairs, strict=True):
        uses = good["proof"][line - 1]["uses"]
        reject(f"the move of the other target, {e}", but(good, f"proof {line - 1} uses", [*uses[:2], moves[0] if uses[2] == moves[1] else moves[1]]), f"proof line {line}", "lines about")
        reject(f"no move, {e}", but(good, f"proof {line - 1} uses", uses[:2]), f"proof line {line}", "slope rests on")
    last = len(good["proof"])
    for s in ("left", "right"):
        reject(f"a comparison by a hair less, {s}", but(good, f"proof {last - 1} witness b {s} 0", hair(b[s], -1)), f"proof line {last}", "K p < p and K b + residual <= b")
        reject(f"a bound by a hair less, {s}", but(good, f"proof {last - 2} witness b {s} 0", hair(b[s], -1)), f"proof line {last - 1}", "K p < p and K b + residual <= b")
    reject("moves in another order", but(good, f"proof {last - 1} uses", [kept, *tables, *moves[::-1]]), f"proof line {last}", "lines about")


def slower(entries: Entries, maps: tuple[str, str], figures: dict[str, tuple[str, str]], b: dict[str, str]) -> Entries:
    """The regions with maps of other gains and residuals, and the bounds that they have."""
    found = but(entries, "claim text", entries["claim"]["text"].replace(MAPS[0], maps[0]).replace(MAPS[1], maps[1]))
    for line in found["proof"]:
        part, _, name = line["proves"].rpartition(":")
        if part in figures:
            gain, residual = figures[part]
            line["concludes"] = {"gain": gain, "residual": residual} if name == "slope" else dict.fromkeys(line["concludes"], gain if name == "slopes" else residual)
        elif "b" in line["witness"]:
            line["witness"]["b"] = {s: [x] for s, x in b.items()}
            line["concludes"] = {key: b[key.partition(":")[0]] for key in line["concludes"]}
    return found


def at_rest() -> None:
    """No residual, and so a bound of 0."""
    asked = [("settles", "proved"), ("steps(x, 0, 0) <= 0", "proved"), ("steps(x, 1, 0) <= 2", "proved"), ("steps(x, 1, 0) <= 1", "undecided"), ('"steps(x, 1, 0) <= 1"\nin = "right"', "proved"), ('"steps(x, 1, 0) <= 0"\nin = "right"', "undecided"),
             (f"steps(x, 0, 0 - 1{STEP}) <= 9", "undecided")]
    good = regions([that for that, _ in asked]).found("region", asked)
    still = slower(good, ("3*x/2 + 0*p", "0*x + 0*q"), {"left>right": ("3/2", "0"), "right>left": ("0", "0")}, {"left": "0", "right": "0"})
    judged("at rest", still)
    exact("at rest", still, {"bound": ("0", "0"), "gain": ("3/2", "3/2"), "residual": ("0", "0"), "states x push": ("1", None)})


def pushed_anew() -> None:
    """A state that is forgotten on one step: what pushes it there decides alone whether it stays within a level."""
    asked = [('"steps(x, 0, 1/16) <= 0"\nin = "right"', "proved"), (f'"steps(x, 0, 1/16 - 1{STEP}) <= 0"\nin = "right"', "undecided")]
    good = regions([that for that, _ in asked]).found("region", asked)
    judged("pushed anew", slower(good, ("x/4 + 0*p", "0*x + q"), {"left>right": ("1/4", "0"), "right>left": ("0", "1/16")}, {"left": "1/16", "right": "1/64"}))


def of_no_width() -> None:
    """A ball of radius 0, kept as the next step leads onto the target, leaves nothing to ask about; one of a hair does."""
    asked = ["settles", "bound(x) <= 1", "gain <= 1/2", "radius(x) >= 0"]
    for top in ("", "shrink = true"):
        for room, edge, kind in (("0", "0", "smaller ball"), (hair("0", 1), hair("0", -1), "ball")):
            d = Steps(claim("x/2", "0*x", (f'["{edge}", 3]', "[-1, 1]"), asked, top=top))
            left, lt, at = d.metric("left"), d.range("left:target[x]", "0", "0"), d.point("left:target[x]", {}, "0")
            one = d.theorem("largest-ball", "left:ball", [left, lt, at], radius=room, outer=room)
            right, rt, at = d.metric("right"), d.range("right:target[x]", "0", "0"), d.point("right:target[x]", {}, "0")
            two = d.theorem("largest-ball", "right:ball", [right, rt, at], radius="1", outer="1")
            if kind == "ball":
                d.point("left:image[x]", {"x": "3"}, "3/2")
            pairs = []
            for e, k, on, norm in (("left>right", "1/2", one, right), ("right>left", "0", two, left)):
                pairs.append(d.theorem("slope", f"{e}:slope", [d.matrix(f"{e}:slopes", k, [on, norm]), d.matrix(f"{e}:misses", "0", [on, norm])], gain=k, residual="0"))
            kept = d.theorem("graph-balls", "invariant", [one, two, *pairs])
            d.bound([kept, *pairs], {"left": "1", "right": "1"}, {"left": "0", "right": "0"}, left="0", right="0")
            judged(f"a ball of radius {room} {top}", d.found(kind, [(a, "proved" if kind == "ball" or a.startswith("radius") else "undecided") for a in asked]))
            if kind != "ball":
                d.point("left:image[x]", {"x": "3"}, "3/2")
                reject(f"a point that leaves, and a ball of radius 0 {top}", d.found("ball", [(a, "undecided") for a in asked]), "results", "'ball' is claimed, 'smaller ball' was derived")


def turned() -> None:
    """The step from left to right with a falling slope: the larger magnitude of an entry is at its lower end."""
    good = regions().found("region", [("settles", "proved")])
    down = but(good, "claim text", good["claim"]["text"].replace("3*x/2 + p", "-3*x/2 + p"))
    accept("a falling slope", down)
    tight("a falling slope", down, {19: (("1,1", -1, "less than what the leaves show"),), 12: (("norm", -1, "a leaf is not shown"),)})


def short_lengths() -> None:
    """A norm of the proof's own in which a state may be twice its length: a gain is one all the same."""
    asked = [("settles", "proved"), ("gain <= 13/4", "proved"), (f"gain <= 13/4 - 1{STEP}", "undecided"), ("residual <= 5/16", "undecided"), ("bound <= 11/4", "undecided"), ("bound(x) <= 7/20", "proved")]
    lines = two([a for a, _ in asked])
    for number, figures in {5: {"radius": "1/2", "outer": "1/2"}, 16: {"norm": "13/4"}, 18: {"gain": "13/4"}, 19: {"norm": "1/4"}, 20: {"norm": "1/16"}, 21: {"gain": "1/4", "residual": "1/16"},
                            22: {"left": "3/4"}, 28: {"lower": "13/4"}, 30: {"lower": "1/4"}, 31: {"lower": "1/16"}}.items():
        lines.proof[number - 1]["concludes"] |= figures
    lines.proof[0]["witness"] = {"kind": "box", "rows": [["1/2", "0"], ["0", "1"]], "inverse": [["2", "0"], ["0", "1"]]}
    lines.proof[21]["witness"] = {"p": {"left": ["1/2"], "right": ["7/4"]}, "b": {"left": ["3/4"], "right": ["11/4"]}}
    norms = {"kind": "box", "weights": {"x": "1/2", "y": "1"}}, NORMS[1]
    judged("short lengths", lines.found("region", asked, norms, "xy"))


def corrected() -> None:
    """Where a correction is named, another route may show a smaller gain; residuals are the same by all."""
    asked = ["gain <= 3/2", "gain < 3/2", "residual < 1/8", "residual <= 1/8"]
    for top, verdict in (("", "undecided"), ('route = "slope"\n', "refuted")):
        found = list(zip(asked, ("proved", verdict, "refuted", "proved"), strict=True))
        judged(f"a correction {top}", regions(asked, top=f'{top}correction = ["f"]\n[define]\nf = "x"').found("region", found))


@unit
def steps_gone_through(checker: Any) -> None:
    """At most 20000 of them, with three at a time 6666: from level 6666 down by 1 each is one too many."""
    pairs = {step: (Q(1), Q(-1)) for step in ("ab", "bc", "ca")}
    results, wanted = SimpleNamespace(pairs=lambda route: pairs), dict.fromkeys("abc", Q(0))
    counts = [checker.graph_outcomes.GraphResults.count_of(results, {"a": Q(n)}, wanted, "slope") for n in (0, 6665, 6666)]
    assert counts == [0, 6665, None]


@unit
def levels_below(checker: Any) -> None:
    """Of a, which nothing leads to, the level is b's less 1: none below 0, where b's alone would be kept."""
    results = SimpleNamespace(each=("a", "b"), pairs=lambda route: {("a", "b"): (Q(1), Q(1)), ("b", "b"): (Q(0), Q(0))})
    below, hairs = partial(checker.graph_outcomes.GraphResults.below, route="slope"), Q("1" + STEP)
    assert below(results, {"a": Q(1), "b": Q(1)}) == {"a": 0, "b": 1}
    assert below(results, {"a": Q(1), "b": 1 - hairs}) is None and below(results, {"a": -hairs, "b": Q(1)}) is None


def without(entries: Entries, *lines: int) -> Entries:
    """A certificate without some lines, which nothing else rests on; later ones renumbered."""
    found = but(entries)
    for gone in sorted(lines, reverse=True):
        del found["proof"][gone - 1]
        for line in found["proof"]:
            line["uses"] = [n - (n > gone) for n in line["uses"]]
    return found


STILL = {"cuts": {}, "pieces": ["0", "1"], "degrees": [1, 0], "bits": 24, "cells": [["16777216 0"]]}


def grounded(plain: Entries) -> Entries:
    """The same regions, x standing still for a second on either foot: the flows are lines 1 and 2, the sets that are kept line 13."""
    text = plain["claim"]["text"].replace("3*x/2 + p", "3*X/2 + p").replace("x/4 + q", "X/4 + q")
    text = text.replace("[stance.left]", '[dynamics]\nduration = 1\n[dynamics.start]\nX = "x"\n[dynamics.rate]\nX = "0*X"\n[stance.left]')
    proof = [{"rule": "trajectory", "proves": f"{s}:flow", "uses": [], "witness": STILL, "concludes": {"error": "0"}} for s in ("left", "right")]
    flows = {"left": 1, "right": 2}
    for line in plain["proof"]:
        part, _, name = line["proves"].rpartition(":")
        flow = [flows[part.partition(">")[0]]] if name.startswith(("image", "slopes", "misses")) else []
        witness = {**line["witness"], "bits": 24} if flow else line["witness"]
        proof.append({**line, "uses": [n + 2 for n in line["uses"]] + flow, "witness": witness})
    for s in ("left", "right"):
        proof.append({"rule": "range", "proves": f"{s}:support[1]", "uses": [13], "witness": {"bits": 0, "trees": ["d"]}, "concludes": {"lower": "1", "upper": "1"}})
    return but(plain, "claim text", text, "proof", proof)


def of_the_ground() -> None:
    good = grounded(regions().found("region", [("settles", "proved")]))
    proof = good["proof"]
    judged("on the ground", good)
    exact("on the ground", good, {"gain": ("3/2", "3/2"), "residual": ("1/8", "1/8"), "stances left states x bound": (None, "3/20")})
    for n, line in enumerate(proof, 1):
        _, _, name = line["proves"].rpartition(":")
        if name.startswith(("image", "slopes", "misses")):
            other = 2 if line["uses"][-1] == 1 else 1
            reject(f"the flow of another stance, {n}", but(good, f"proof {n - 1} uses", [*line["uses"][:-1], other]), f"proof line {n}", "lines about" if "image" in name else "uses: the set of the stance")
            reject(f"without the flow, {n}", but(good, f"proof {n - 1} uses", line["uses"][:-1]), f"proof line {n}", "no trajectory is proved")
    for n in (len(proof) - 1, len(proof)):
        for lower in ("0", "-1"):
            reject(f"a stance that may not last, {n} {lower}", but(good, f"proof {n - 1} concludes lower", lower), "results", "results.set.kind: 'region' is claimed, None was derived")
        accept(f"a stance that may be short, {n}", but(good, f"proof {n - 1} concludes lower", hair("0", 1)))
        none = but(without(good, n), "results set", None, "results stances left set", None, "results stances right set", None, "results requirements 0 verdict", "undecided", "results routes", {})
        reject(f"steps of a stance that may not last, {n}", none, "proof", "serves no later line")
        reject(f"a stance that may not last, {n}", without(good, n), "results", "results.set.kind: 'region' is claimed, None was derived")


# told apart from its correction: x -> -9/8 x + 3/4 e + p, e = x - 1/4, from [-1, 3/2], and + q, e = x + 1/4, back; without it -9/8 x, turned round -x and x/8 astray

BOTH = ('mirror = ["x"]\n', 'mirror = ["x"]\n')
ASTRAY = [("left", "right", "3/8", "5/32", "1/4", "5/16", "p", "1/8"), ("right", "left", "3/8", "3/32", "1/4", "1/4", "q", "1/16")]


def apart(asked: Sequence[str] = ("settles",), top: str = "", mirrors: tuple[str, str] = BOTH, routes: Sequence[str] = ("slope", "split")) -> Steps:
    """Lines: 1 6 metrics, 2 7 targets, 3 8 points, 4 9 balls, 5 10 images, 11 invariant, 12 13 15 16 matrices of slope, 14 17 its pairs, 18 its bound, 19 to 22 stretches,
    23 24 26 27 matrices of split, 25 28 its pairs, 29 its bound, 30 to 33 entries, 34 comparison, 35 to 38 stretches."""
    text = claim("-9*x/8 - f + p", "-9*x/8 - f + q", ('[-1, "3/2"]', '["-3/2", 1]'), asked, targets=("1/4", "-1/4"), top=f'{top}correction = ["f"]')
    text = text.replace("[stance.left]", '[define]\nf = "-3/4*(x - target(x))"\n[stance.left]')
    for name, mirror in zip(("left", "right"), mirrors, strict=True):
        text = text.replace(f"[stance.{name}]\n", f"[stance.{name}]\n{mirror}")
    d = Steps(text)
    for name, target, low, high in (("left", "1/4", "-7/8", "5/16"), ("right", "-1/4", "-1/4", "13/16")):
        first = len(d.proof)
        d.metric(name)
        d.range(f"{name}:target[x]", target, target)
        d.point(f"{name}:target[x]", {}, target)
        d.theorem("largest-ball", f"{name}:ball", [first + 1, first + 2, first + 3], radius="5/4", outer="5/4")
        d.range(f"{name}:image[x]", low, high, trees=("c",))
    invariant, d.form = d.theorem("graph-regions", "invariant", [1, 2, 5, 6, 7, 10]), "c"
    for route, matrices, b in (("slope", ("slopes", "misses"), ("39/220", "49/220")), ("split", ("split-slopes", "split-residuals"), ("7/20", "2/5"))):
        if route not in routes:
            continue
        pairs, tables = [], []
        for s, t, *known in ASTRAY:
            k, e = known[:2] if route == "slope" else known[2:4]
            norm = 6 if s == "left" else 1
            lines = [d.matrix(f"{s}>{t}:{x}", v, [invariant, norm]) for x, v in zip(matrices, (k, e), strict=True)]
            pairs.append(d.theorem(route, f"{s}>{t}:{route}", lines, gain=k, residual=e))
        ones = {"left": "1", "right": "1"}
        d.line("graph-bound", f"bound[{route}]", [invariant, *pairs], {"p": {s: [x] for s, x in ones.items()}, "b": {"left": [b[0]], "right": [b[1]]}}, left=b[0], right=b[1])
        if route == "split":
            for s, t, *known in ASTRAY:
                tables += [d.table(f"{s}>{t}:{x}", {"1,1": v}, [invariant, 6 if s == "left" else 1]) for x, v in zip(matrices, known[2:4], strict=True)]
            d.line("graph-componentwise", "split-componentwise", [invariant, *tables], {"p": {s: [x] for s, x in ones.items()}, "b": {"left": [b[0]], "right": [b[1]]}}, **{"left:x": b[0], "right:x": b[1]})
        for s, t, *known in ASTRAY:
            k, e = known[:2] if route == "slope" else known[2:4]
            norm, (name, most), side = 6 if s == "left" else 1, known[4:], "-" if s == "left" else ""
            astray = {name: f"{side}{most}"} | ({"x": "3/2" if s == "left" else "-3/2"} if route == "split" else {})
            d.stretch(f"{s}>{t}:{matrices[0]}", {"x": "0", name: "0"} if route == "slope" else {"x": "0"}, k, [invariant, norm])
            d.stretch(f"{s}>{t}:{matrices[1]}", astray, e, [invariant, norm])
    return d


TOLD_APART = [
    ("settles", "proved"), ("gain <= 1/4", "proved"), ("gain < 1/4", "refuted"), ('"gain < 1/4"\nin = "right"', "refuted"), (f"gain <= 1/4 - 1{STEP}", "refuted"),
    ("residual <= 5/32", "proved"), ("residual < 5/32", "refuted"), ("bound <= 49/220", "proved"), ("bound < 49/220", "undecided"), ("bound(x) <= 49/220", "proved"), ('"bound(x) <= 39/220"\nin = "left"', "proved"), ('"bound(x) < 39/220"\nin = "left"', "undecided"),
    # by slope 5/4 -> 15/32 + 5/32 = 5/8 -> 15/64 + 3/32 = 21/64; by split 5/8, 13/32: levels d = 1/2 are kept by both
    ("steps(x, 5/4, 1/2) <= 2", "proved"), ("steps(x, 5/4, 1/2) <= 1", "undecided"), ("steps(x, 5/4, 21/50) <= 2", "proved"), ("steps(x, 5/4, 21/50) < 2", "undecided"),
]
ALONE = [
    ("settles", "proved"), ("gain <= 1/4", "proved"), ("gain < 1/4", "refuted"), ('"gain < 1/4"\nin = "left"', "refuted"), ("residual <= 5/16", "proved"), ("residual < 5/16", "undecided"), ("residual < 5/32", "refuted"), ("residual <= 5/32", "undecided"),
    ('"residual <= 1/4"\nin = "right"', "proved"), ('"residual < 1/4"\nin = "right"', "undecided"), ('"residual < 3/32"\nin = "right"', "refuted"), ("bound <= 2/5", "proved"), ("bound < 2/5", "undecided"), ("bound(x) <= 49/220", "proved"),
]
APART_FIGURES: dict[str, tuple[str | None, str | None]] = {
    "gain": ("3/8", "3/8"), "residual": ("5/32", "5/32"), "routes slope gain": ("3/8", "3/8"), "routes slope residual": ("5/32", "5/32"), "routes split gain": ("1/4", "1/4"), "routes split residual": ("5/16", "5/16"),
    "states x bound": (None, "49/220"), "stances left states x bound": (None, "39/220"), "requirements 0 value": (None, "49/220"),
}


def told_apart() -> None:
    asked = [that for that, _ in TOLD_APART]
    judged("told apart", apart(asked).found("region", TOLD_APART))
    alone = [that for that, _ in ALONE]
    judged("split alone", apart(alone, top='route = "split"\n').found("region", ALONE))
    good = apart().found("region", [("settles", "proved")])
    exact("told apart", good, APART_FIGURES)
    least = str(Q(2, 5) - Q(1, 10**40))
    below = but(good, "results routes split bound", {"lower": least, "upper": "2/5"})
    accept("the bound of split from below", below)
    reject("the bound of split, less", but(below, "results routes split bound upper", hair("2/5", -1)), "results", "upper: more is claimed")
    reject("the bound of split, from below", but(below, "results routes split bound lower", hair("2/5", 0)), "results", "lower: more is claimed")
    reject("the route with the larger bound", but(good, "results route", "split"), "results", "results.route: 'split' is claimed, 'slope' was derived")
    reject("a route less", but(good, "results routes split", GONE), "results", "results.routes: the keys are")
    short, leaf = "less than what the lines used show", "a leaf is not shown to stay within the norm"
    tight("told apart", good, {
        23: (("norm", -1, leaf),), 24: (("norm", -1, leaf),), 25: (("gain", -1, short), ("residual", -1, short)), 28: (("gain", -1, short), ("residual", -1, short)), 29: (("left", -1, "no less than b"), ("right", -1, "no less than b")),
        26: (("norm", -1, leaf),), 27: (("norm", -1, leaf),), 35: (("lower", 1, "not shown to be stretched"),), 36: (("lower", 1, "not shown to be stretched"),), 37: (("lower", 1, "not shown to be stretched"),), 38: (("lower", 1, "not shown to be stretched"),),
    })
    for number, old, reason in ((25, [23, 13], "split rests on matrix split-slopes, matrix split-residuals"), (25, [12, 24], "split rests on"), (28, [23, 27], "lines about"), (28, [26, 24], "lines about"), (28, [26, 16], "split rests on"), (29, [11, 25, 17], "rests on"), (29, [11, 14, 17], "bound[slope] rests on"), (29, [11, 14, 28], "bound[slope] rests on")):
        reject(f"uses of {number}: {old}", but(good, f"proof {number - 1} uses", old), f"proof line {number}", reason)
    for number, rule, proves, reason in ((25, "slope", "left>right:slope", "slope rests on"), (25, "slope", "left>right:split", "slope rests on"), (25, "split", "left>right:slope", "split rests on"), (23, "matrix", "left>right:split-slope", "proves slopes or misses"), (23, "matrix", "left>right:split-slopes@1", "after fewer steps"),
                                         (25, "split", "left:split", "not known of one stance alone"), (25, "split", "split", "not known of all stances together"), (29, "graph-bound", "bound[slope]", "bound[split] rests on"), (29, "graph-bound", "bound[curve]", "bound[split] rests on")):
        reject(f"{number} as {rule} of {proves}", but(good, f"proof {number - 1} rule", rule, f"proof {number - 1} proves", proves), f"proof line {number}", reason)
    plain = but(good, "claim text", good["claim"]["text"].replace('correction = ["f"]', ""))
    reject("no correction is named", plain, "proof line 23", "split-slope[x,x] is no obligation of this claim")
    # without the turn 1 + 3/4 = 7/4; where it is of the stance before that counts
    for n, mirrors in enumerate(((*BOTH[:1], ""), ("", BOTH[1]))):
        reject(f"not turned, {n}", apart(mirrors=mirrors).found("region", [("settles", "proved")]), f"proof line {26 if n == 0 else 23}", leaf)
    # of a comparison entries of one route alone
    compared = but(good, "proof 33 concludes left:x", "39/220")
    reject("a comparison of less", compared, "proof line 34", "less than what the comparison shows")
    reject("entries of split as of slope", but(good, "proof 33 proves", "componentwise"), "proof line 34", "componentwise rests on")
    reject("an entry of less", but(good, "proof 29 concludes 1,1", hair("1/4", -1)), "proof line 30", "less than what the leaves show")
    # a gain is refuted where every route is shown not to be below, on one and the same step
    undecided = but(good, "results requirements 0 verdict", "undecided")
    both = apart(["gain < 1/4"]).found("region", [("gain < 1/4", "refuted")])
    accept("refuted by both", both)
    for gone, verdict in (((35, 37), "undecided"), ((35,), "refuted"), ((37,), "refuted"), ((19, 21), "undecided"), ((19, 37), "undecided"), ((21, 35), "undecided"), ((19, 35), "refuted")):
        entries = but(without(both, *gone), "results requirements 0 verdict", verdict)
        (accept if verdict == "refuted" else judged)(f"without {gone}", entries)
    accept("undecided", undecided)
    least_of_both = [("gain < 5/16", "undecided"), ("gain < 1/4", "refuted"), ("gain <= 3/8", "proved")]
    shown = without(apart([that for that, _ in least_of_both]).found("region", least_of_both), *range(23, 35))
    del shown["results"]["routes"]["split"]
    judged("split by what is taken alone", shown)


@unit
def where_the_gait_ought_to_lead(checker: Any) -> None:
    """x - 1/2 keeps the error on the way from 1/4 to -1/4, and on the way back leads 1 astray; to a target of its own no less than 1/2."""
    text = claim("x - 1/2 - f + p", "x - 1/2 - f + q", ("[-1, 1]", "[-1, 1]"), [], targets=("1/4", "-1/4"), then=('["right", "left"]', '"left"'), top='correction = ["f"]')
    text = text.replace("[stance.left]", '[define]\nf = "x - target(x)"\n[stance.left]')
    graph = checker.graph.Graph(checker.statement.read_statement(text, {}, {}))
    whole = checker.derive.Domain(False, Q(0), (Q(0), Q(0)))
    for step, name, astray in (("left>right", "p", Q(0)), ("right>left", "q", Q(-1)), ("left>left", "p", Q(-1, 2))):
        table = checker.jacobians.Table(graph.between[step], "split-residuals", whole, 0, None)
        assert table.at({name: "1/16"}) == [[(astray + Q(1, 16),) * 2]], step


@unit
def signals_that_follow_a_state(checker: Any) -> None:
    """Slopes of a route at constant signals only are no upper end of a gain; nobody asks for those of a route that is not shown."""
    line = checker.theorems.Line("split", "split", (1,), {"gain": Q(1, 2), "residual": Q(1)}, part="a>b")
    for lines, loose, upper in (({2: line}, {"split": False}, Q(1, 2)), ({2: line}, {"split": True}, None), ({}, {}, None)):
        derivation, proof = SimpleNamespace(loose=loose.__getitem__), SimpleNamespace(lines=lines)
        before = SimpleNamespace(part="a", domain=None, lasting=True, derivation=derivation, proof=proof, variant=checker.theorems.OWN)
        step = checker.graph_outcomes.StepResults("a>b", before, SimpleNamespace(part="b", metric=None), "split")
        assert (step.gain.upper, step.shown) == (upper, (Q(1, 2), Q(1)) if lines else None)


def kept_apart() -> None:
    """Balls of radius 5/4: 1/4 · 5/4 + 5/16 = 5/8 is kept, in the ball of a stance where just that is left too."""
    d = apart()
    for line in d.proof:
        line["uses"] = [n if n != 11 else 4 if line["proves"].startswith("left") else 9 for n in line["uses"]]
    proof = d.proof
    balls = {"rule": "graph-balls", "proves": "invariant", "uses": [4, 9, 25, 28], "witness": {}, "concludes": {}}
    order = [n for n in range(1, 39) if n not in (11, 18, 29, 30, 31, 32, 33, 34, 5, 10)]
    number = {old: new for new, old in enumerate(order, 1)}
    lines = [{**proof[n - 1], "uses": [number[u] for u in proof[n - 1]["uses"]]} for n in order]
    good = but(d.found("smaller ball", [("settles", "undecided")]), "proof", [*lines, {**balls, "uses": [number[n] for n in (4, 9, 25, 28)]}])
    accept("balls by split", good)
    last = len(lines) + 1
    for name, old, reason in (("by slope", [4, 9, 14, 17], ""), ("by one of each", [4, 9, 14, 28], "rests on"), ("by one of each, the other way", [4, 9, 25, 17], "rests on")):
        entries = but(good, f"proof {last - 1} uses", [number[n] for n in old])
        if reason:
            reject(f"balls {name}", entries, f"proof line {last}", reason)
        else:
            accept(f"balls {name}", entries)

def over_ranges() -> None:
    """A requirement over ranges of its own has lines of its own, about all stances; of a state in those it is about."""
    narrow, same = "over = { p = [\"-1/16\", \"1/16\"] }", 'over = { x = [-1, 1] }\nin = "left"'
    asked = [("bound(x) < 7/20", "undecided"), (f'"bound(x) <= 7/20"\n{narrow}', "proved"), (f'"bound(x) < 7/20"\n{narrow}', "undecided"), (f'"settles"\n{same}', "proved"), (f'"bound(x) <= 9"\n{narrow}', "undecided"),
             (f'"bound(x) <= 3/20"\n{narrow}\nin = "left"', "proved"), (f'"push(x) > 0.84"\n{narrow}', "proved")]
    d = regions([that for that, _ in asked])
    own = d.proof[:23]  # but for what is taken, which narrower ranges may leave out
    for n in (2, 3, 4, 6, 7):
        first = len(d.proof)
        d.proof += [{**line, "proves": f"over[{n}]:{line['proves']}", "uses": [first + u for u in line["uses"]]} for line in own]
    good = d.found("region", asked)
    judged("over", good)
    for n in range(28, 51):
        if good["proof"][n - 1]["uses"]:
            reject(f"over: line {n} rests on the claim's own", but(good, f"proof {n - 1} uses", [u - 27 for u in good["proof"][n - 1]["uses"]]), f"proof line {n}", "uses: lines about other ranges")
    for n in range(2, len(asked) + 1):
        if n != 5:
            kept = [line for line in good["proof"] if not line["proves"].startswith(f"over[{n}]:")]
            shift = [k for k, line in enumerate(good["proof"], 1) if not line["proves"].startswith(f"over[{n}]:")]
            kept = [{**line, "uses": [shift.index(u) + 1 for u in line["uses"]]} for line in kept]
            judged(f"over: no lines of {n}", but(good, "proof", kept, f"results requirements {n - 1} verdict", "undecided"))
    first = good["proof"][27]
    assert first["proves"] == "over[2]:left:metric"
    for name, reason in (("over[1]:left:metric", "over[1]: no requirement that sets ranges for a proof of its own"), ("over[8]:left:metric", "over[8]: no requirement that sets ranges for a proof of its own"), ("over[2]:middle:metric", "middle: no stance of the claim, nor a step from one to the next"),
                         ("left:over[2]:metric", "a metric rests on no other line"), ("gains[1]:left:metric", "pieces of gains are not known between stances"), ("gains[1]:over[2]:left:metric", "pieces of gains are not known between stances")):
        reject(f"over: {name}", but(good, "proof 27 proves", name), "proof line 28", reason)
    # of x on both sides: what the left leads to would leave the right
    both = [("settles", "proved"), ('"settles"\nover = { x = [-1, 1] }', "proved")]
    d = regions([that for that, _ in both])
    first_ = len(d.proof)
    d.proof += [{**line, "proves": f"over[2]:{line['proves']}", "uses": [first_ + u for u in line["uses"]]} for line in own]
    reject("over: of both stances", d.found("region", both), "proof line 36", "radius: the ball is not shown to lie in the region of x")
    d.proof = [*d.proof[:35], {**d.proof[35], "concludes": {"radius": "1", "outer": "1"}}, *d.proof[36:]]
    reject("over: of both stances, a smaller ball", d.found("region", both), "proof line 38", "left: image[x] is not shown to stay in the region")


@unit
def of_ranges(checker: Any) -> None:
    """Constants and gains become uncertain, uncertain quantities keep what else is said of them, states are those of the stances it is about."""
    text = claim("k*x + p", "x/4 + q + c", SPANS, ['"settles"\nover = { x = [0, 1], k = [1, 2], c = [3, 4], p = [5, 6] }\nin = "right"', '"settles"\nover = { x = [0, 1] }', "settles", '"value(x)"\nover = { x = [0, 1] }'],
                 rest='p = { range = [0, 1], held = true, change = 0.1 }\nq = [0, 1]\n[gains]\nk = 1\nm = 2\n[constants]\nc = 1\ne = 3')
    whole = checker.statement.read_statement(text, {}, {})
    one, two = (checker.graph.of_ranges(whole, n) for n in (1, 2))

    def span(q: Any) -> tuple[Q, Q]:
        return tuple(checker.grammar.constant(e, whole.values)[0] for e in (q.range.lower, q.range.upper))

    assert [[span(s.states["x"]) for s in w.stances] for w in (one, two)] == [[(-1, 1), (0, 1)], [(0, 1), (0, 1)]]
    assert (set(one.constants), set(one.gains), set(two.constants), set(two.gains)) == ({"e"}, {"m"}, {"c", "e"}, {"k", "m"})
    assert {n: (span(q), q.held, q.change is not None) for n, q in one.uncertain.items()} == {"p": ((5, 6), True, True), "q": ((0, 1), False, False), "k": ((1, 2), True, False), "c": ((3, 4), True, False)}
    assert two.uncertain == whole.uncertain and [s.name for s in one.stances] == ["left", "right"] and [s.then for s in one.stances] == [("right",), ("left",)]
    assert [[bool(r.over) for r in w.requirements] for w in (one, two)] == [[False, True, False, True], [True, False, False, True]] and [r.stance for r in one.requirements] == ["right", None, None, None]
    for n in (0, 3, 4, 5):
        with refuses(checker.calculus.Unprovable, f"over[{n}]: no requirement that sets ranges"):
            checker.graph.of_ranges(whole, n)


accept("one map for every step", BASE)
in_regions()
told_apart()
kept_apart()
what_is_kept()
two_states()
not_kept()
of_another_set()
moving()
at_rest()
pushed_anew()
of_no_width()
turned()
short_lengths()
corrected()
of_the_ground()
over_ranges()
in_balls()
stepping_where()
# fmt: on


@pytest.mark.usefixtures("lines_verified_once")
def test_graph_boundaries() -> None:
    all_hold(CASES)
