"""Several steps through stances taken together, at exact equality (proofs/graph.md (10)).

The maps of `test_graph_boundaries.py`, two steps at a time: their bounds are the same where single steps lose nothing.
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import GONE, STEP, Entries, Questions, but, refuses
from tests.checker.test_graph_boundaries import NORMS, Steps, balls, claim, hair, regions, two

CASES = Questions()
unit, accept, reject = CASES.unit, CASES.accept, CASES.reject


# tables of numbers: one line each reads better
# fmt: off

LRL, RLR = "left>right>left", "right>left>right"


def judged(name: str, entries: Entries) -> None:
    """Nothing else is derived of any requirement."""
    accept(name, entries)
    for n, r in enumerate(entries["results"]["requirements"]):
        for other in sorted({"proved", "refuted"} - {r["verdict"]}):
            reject(f"{name}: {n} {r['that']} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {r['verdict']} was derived")


def ways(d: Steps, on: Sequence[int], norms: Sequence[int], figures: Sequence[tuple[str, str, str]], bounds: tuple[str, str], moves: Sequence[int] = ()) -> list[int]:
    """Lines: two matrices and a pair of each way, the bound, entries of both, the comparison. `figures`: gain, miss and residual of each way."""
    pairs, tables = [], []
    for way, where, norm, (k, miss, residual), move in zip((LRL, RLR), on, norms, figures, [[m] for m in moves] or ([], []), strict=True):
        pairs.append(d.theorem("slope", f"{way}:slope", [d.matrix(f"{way}:slopes", k, [where, norm]), d.matrix(f"{way}:misses", miss, [where, norm]), *move], gain=k, residual=residual))
    b = dict(zip(("left", "right"), bounds, strict=True))
    d.bound([on[0], *pairs], {"left": "1", "right": "1"}, b, **b)
    for way, where, norm, (k, miss, _) in zip((LRL, RLR), on, norms, figures, strict=True):
        tables += [d.table(f"{way}:slopes", {"1,1": k}, [where, norm]), d.table(f"{way}:misses", {"1,1": miss}, [where, norm])]
    d.line("graph-componentwise", "componentwise", [on[0], *tables, *moves], {"p": {s: ["1"] for s in b}, "b": {s: [x] for s, x in b.items()}}, **{f"{s}:x": x for s, x in b.items()})
    return pairs


# (3/2 x + p)/4 + q' from left to left, 3/2 (x/4 + q) + p' from right to right: 3/8, with 1/32 + 1/16 and 3/32 + 1/8 left over

TWICE = ("3/8", "3/32", "3/32"), ("3/8", "7/32", "7/32")


def twice(asked: Sequence[str] = ("settles",), top: str = "", horizon: str = "2") -> Steps:
    """Lines: 1 to 11 as in `regions`, 12 13 15 16 matrices, 14 17 pairs, 18 bound, 19 to 22 entries, 23 comparison, 24 to 27 stretches."""
    d = regions(asked, top=f"horizon = {horizon}\n{top}")
    del d.proof[11:]
    ways(d, (11, 11), (1, 6), TWICE, ("3/20", "7/20"))
    for way, norm, fresh, (k, e, _) in zip((LRL, RLR), (1, 6), (("p", "q@2"), ("q", "p@2")), TWICE, strict=True):
        one, two = fresh
        d.stretch(f"{way}:slopes", {"x": "1", one: "0", two: "0"}, k, [11, norm])
        d.stretch(f"{way}:misses", {one: "1/8" if one == "p" else "1/16", two: "1/16" if two == "q@2" else "1/8"}, e, [11, norm])
    return d


ASKED = [
    ("settles", "proved"), ("gain <= 3/8", "proved"), ("gain < 3/8", "refuted"), ('"gain < 3/8"\nin = "left"', "refuted"), ("residual <= 7/32", "proved"), ("residual < 7/32", "refuted"), ('"residual <= 3/32"\nin = "left"', "proved"), ('"residual < 3/32"\nin = "left"', "refuted"),
    ("bound <= 7/20", "proved"), ("bound(x) <= 7/20", "proved"), ("bound(x) < 7/20", "undecided"), ('"bound(x) <= 3/20"\nin = "left"', "proved"), ("radius(x) >= 1", "proved"), (f"push(x) >= 17/20 - 1{STEP}", "proved"), ("push(x) >= 17/20", "undecided"), ("steps(x, 1, 1) <= 9", "undecided"), ("steps(x, 0, 1) <= 99", "undecided"),
]


def two_steps() -> None:
    judged("two steps", twice([a for a, _ in ASKED]).found("region", ASKED))
    good = twice().found("region", [("settles", "proved")])
    for number, ends in {12: {"norm": "a leaf is not shown"}, 13: {"norm": "a leaf is not shown"}, 14: dict.fromkeys(("gain", "residual"), "less than what the lines used show"), 15: {"norm": "a leaf is not shown"}, 16: {"norm": "a leaf is not shown"}, 18: {"left": "no less than b", "right": "no less than b"},
                         19: {"1,1": "less than what the leaves show"}, 22: {"1,1": "less than what the leaves show"}, 23: {"left:x": "less than what the comparison shows", "right:x": "less than what the comparison shows"}}.items():
        for key, reason in ends.items():
            old = good["proof"][number - 1]["concludes"][key]
            reject(f"two steps: {number} {key} a hair less", but(good, f"proof {number - 1} concludes {key}", hair(old, -1)), f"proof line {number}", reason)
    for number in (24, 25, 26, 27):
        reject(f"two steps: {number} a hair more", but(good, f"proof {number - 1} concludes lower", hair(good["proof"][number - 1]["concludes"]["lower"], 1)), f"proof line {number}", "not shown to be stretched")
    for line, key, value in ((18, "b left", hair("3/20", -1)), (18, "b right", hair("7/20", -1)), (23, "b left", hair("3/20", -1)), (23, "b right", hair("7/20", -1))):
        reject(f"two steps: {line} {key}", but(good, f"proof {line - 1} witness {key} 0", value), f"proof line {line}", "K p < p and K b + residual <= b")
    for number, uses, reason in ((12, [11, 6], "the metric of the next"), (15, [11, 1], "the metric of the next"), (12, [9, 1], "the metric of the next"), (18, [11, 17, 14], "lines about left>right>left"), (18, [11, 14], "rests on"), (18, [11, 14, 14], "lines about left>right>left"), (17, [15, 13], "lines about right>left>right"), (23, [11, 21, 22, 19, 20], "lines about left>right>left")):
        reject(f"two steps: uses of {number}: {uses}", but(good, f"proof {number - 1} uses", uses), f"proof line {number}", reason)
    for proves in ("left>left>right:slopes", "left>right>left>right:slopes", "left>right>right:slopes", "left>right>up:slopes", "left>right>left:target[x]", "left>right>left:image[x]"):
        reject(f"two steps: {proves}", but(good, "proof 11 proves", proves), "proof line 12", "no stance of the claim, nor a step" if proves.endswith("slopes") else "a matrix proves")
    reject("two steps: of one step", but(good, "proof 11 proves", "left>right:slopes"), "proof line 12", "the metric of the next")
    reject("a range of a way", but(good, "proof 11 rule", "range", "proof 11 witness scales", GONE, "proof 11 concludes", {"lower": "0", "upper": "1"}), "proof line 12", "not known of a step")
    text = good["claim"]["text"]
    for horizon, place, reason in (("1", "proof line 12", "no stance of the claim, nor a step"), ("3", "proof line 12", "no stance of the claim, nor a step")):
        reject(f"two steps, and a horizon of {horizon}", but(good, "claim text", text.replace("horizon = 2", f"horizon = {horizon}")), place, reason)
    # where left may follow left too there are more ways, and regions are not kept
    reject("two steps, and another way", but(good, "claim text", text.replace('then = "right"', 'then = ["right", "left"]')), "proof line 11", "not shown to stay in the region")


def corrections_of_two_steps() -> None:
    """Where a correction is named, another route may show a smaller gain, but for the route slope alone."""
    asked = ["gain < 3/8", "residual < 7/32"]
    for top, verdict in (('correction = ["f"]', "undecided"), ('route = "slope"\ncorrection = ["f"]', "refuted"), ('route = "slope"', "refuted"), ("", "refuted")):
        names = '\n[define]\nf = "x"' if "correction" in top else ""
        judged(f"two steps, a correction {top}", twice(asked, f"{top}{names}").found("region", list(zip(asked, (verdict, "refuted"), strict=True))))


def more_ways() -> None:
    """Any order: every way counts, in the order in which stances and what follows them are named."""
    spans = '["-13/8", "13/8"]'
    for horizon in ("1", "2"):
        d = Steps(claim("x/2 + p", "x/4 + q", (spans, spans), ["settles", "gain <= 1/2"], then=('["right", "left"]', '"left"'), top=f"horizon = {horizon}"))
        sets: list[int] = []
        for name, image in (("left", "15/16"), ("right", "15/32")):
            norm, target, point = d.metric(name), d.range(f"{name}:target[x]", "0", "0"), d.point(f"{name}:target[x]", {}, "0")
            d.theorem("largest-ball", f"{name}:ball", [norm, target, point], radius="13/8", outer="13/8")
            sets += [norm, target, d.range(f"{name}:image[x]", f"-{image}", image)]
        kept = d.theorem("graph-regions", "invariant", sets)
        norms, k, e = {"left": sets[0], "right": sets[3]}, {"left": Q(1, 2), "right": Q(1, 4)}, {"left": Q(1, 8), "right": Q(1, 16)}
        names = ["left>right", "left>left", "right>left"] if horizon == "1" else ["left>right>left", "left>left>right", "left>left>left", "right>left>right", "right>left>left"]
        pairs = []
        for way in names:
            *steps, last = way.split(">")
            gain, residual = Q(1), Q(0)
            for s in steps:
                gain, residual = gain * k[s], residual * k[s] + e[s]
            one, two = d.matrix(f"{way}:slopes", str(gain), [kept, norms[last]]), d.matrix(f"{way}:misses", str(residual), [kept, norms[last]])
            pairs.append(d.theorem("slope", f"{way}:slope", [one, two], gain=str(gain), residual=str(residual)))
        # left again and again: 1/8/(1/2), as right to left asks for less
        d.bound([kept, *pairs], {"left": "2", "right": "2"}, {"left": "1/4", "right": "1/4"}, left="1/4", right="1/4")
        entries = d.found("region", [("settles", "proved"), ("gain <= 1/2", "proved")])
        entries["results"]["routes"] = {"slope": {"gain": None, "residual": None, "bound": None}}
        judged(f"any order, {horizon}", entries)
        bound = len(entries["proof"])
        for n in range(len(pairs)):
            fewer = [p for m, p in enumerate(pairs) if m != n]
            reject(f"any order, {horizon}: without {names[n]}", but(entries, f"proof {bound - 1} uses", [kept, *fewer]), f"proof line {bound}", "rests on")
        reject(f"any order, {horizon}: in another order", but(entries, f"proof {bound - 1} uses", [kept, pairs[1], pairs[0], *pairs[2:]]), f"proof line {bound}", "lines about")
        for key in ("left", "right"):
            reject(f"any order, {horizon}: {key} a hair less", but(entries, f"proof {bound - 1} witness b {key} 0", hair("1/4", -1)), f"proof line {bound}", "K p < p and K b + residual <= b")


def on_balls() -> None:
    """Balls are kept by single steps; two of them gain 3/16 and leave 1/8, and 45/128 about a target that lies aside."""
    asked = [("settles", "proved"), ("bound(x) <= 45/104", "proved"), ("bound(x) < 45/104", "undecided"), ('"bound(x) <= 2/13"\nin = "left"', "proved"), ("gain <= 3/16", "proved"), (f"push(x) >= 3/4 - 45/104 - 1{STEP}", "proved")]
    d = balls([a for a, _ in asked], top="horizon = 2")
    d.proof.pop()
    kept, norms = len(d.proof), [n for n, x in enumerate(d.proof, 1) if x["rule"] == "metric"]
    ways(d, (kept, kept), norms, (("3/16", "1/8", "1/8"), ("3/16", "45/128", "45/128")), ("2/13", "45/104"))
    entries = d.found("ball", asked)
    judged("balls, two steps", entries)
    single = [n for n, x in enumerate(entries["proof"], 1) if x["rule"] == "slope"]
    reject("balls, kept by two steps", but(entries, f"proof {kept - 1} uses", [*entries["proof"][kept - 1]["uses"][:2], 1, 1]), f"proof line {kept}", "invariant rests on")
    bound = next(n for n, x in enumerate(entries["proof"], 1) if x["rule"] == "graph-bound")
    reject("balls, a bound by single steps", but(entries, f"proof {bound - 1} uses", [kept, *single[:2]]), f"proof line {bound}", "lines about left>right>left")
    residual = bound - 1
    reject("balls, a miss by a hair less", but(entries, f"proof {residual - 2} concludes norm", hair("45/128", -1)), f"proof line {residual - 1}", "a leaf is not shown")


def moving() -> None:
    """c moves by up to 1/16 at either step: p/4 + q' + c'/2 from left to left, q/2 + p' - c'/2 from right to right, and a step of the target."""
    d = Steps(claim("-2*c + (x - c)/2 + p", "c + (x + 2*c)/4 + q", ("[-1, 1]", "[-1, 1]"), ("settles",), ("c", "-2*c"), top="horizon = 2",
                    rest='p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]\nc = { range = [0, "1/8"], held = true, change = "1/16" }'))
    sets: list[int] = []
    d.form = "c"
    for name, ends, at, room, image in (("left", ("0", "1/8"), "1/8", "7/8", ("-15/16", "5/8")), ("right", ("-1/4", "0"), "-1/4", "3/4", ("-5/16", "1/2"))):
        norm, target = d.metric(name), d.range(f"{name}:target[x]", *ends)
        d.theorem("largest-ball", f"{name}:ball", [norm, target, d.point(f"{name}:target[x]", {"c": "1/8"}, at)], radius=room, outer=room)
        sets += [norm, target, d.range(f"{name}:image[x]", *image)]
    kept = d.theorem("graph-regions", "invariant", sets)
    moves = [d.range("left:target-slope[x,c]", "1", "1"), d.range("right:target-slope[x,c]", "-2", "-2")]
    pairs = ways(d, (kept, kept), (sets[0], sets[3]), (("1/8", "1/8", "3/16"), ("1/8", "3/16", "5/16")), ("3/14", "5/14"), moves)
    entries = d.found("region", [("settles", "proved")])
    accept("a target that moves on the way", entries)
    for line, residual in zip(pairs, ("3/16", "5/16"), strict=True):
        reject(f"a target that moves on the way, {residual}", but(entries, f"proof {line - 1} concludes residual", hair(residual, -1)), f"proof line {line}", "less than what the lines used show")
        reject(f"a target that moves on the way, a miss before {residual}", but(entries, f"proof {line - 2} concludes norm", hair(entries["proof"][line - 2]["concludes"]["norm"], -1)), f"proof line {line - 1}", "a leaf is not shown")
        uses = entries["proof"][line - 1]["uses"]
        reject(f"a target that moves on the way, the other's move {residual}", but(entries, f"proof {line - 1} uses", [*uses[:2], moves[0] if uses[2] == moves[1] else moves[1]]), f"proof line {line}", "lines about")


def in_two_norms() -> None:
    """Two states, seen in the norms of the first and the last stance of each way, whatever lies between."""
    d = two(["gain <= 1/2", "gain < 1/2", '"bound(x) <= 7/16"\nin = "left"'], top="horizon = 2")
    del d.proof[15:]
    pairs = []
    for way, norm, residual in ((LRL, 1, "7/32"), (RLR, 8, "33/64")):
        pairs.append(d.theorem("slope", f"{way}:slope", [d.matrix(f"{way}:slopes", "1/2", [15, norm]), d.matrix(f"{way}:misses", residual, [15, norm])], gain="1/2", residual=residual))
    b = {"left": "7/16", "right": "33/32"}
    d.bound([15, *pairs], {"left": "1", "right": "1"}, b, **b)
    entries = d.found("region", [("gain <= 1/2", "proved"), ("gain < 1/2", "undecided"), ('"bound(x) <= 7/16"\nin = "left"', "proved")], NORMS, "xy")
    entries["results"]["routes"] = {"slope": {"gain": None, "residual": None, "bound": None}}
    judged("in two norms", entries)
    for line in (16, 17, 19, 20):
        reject(f"in two norms: {line} a hair less", but(entries, f"proof {line - 1} concludes norm", hair(entries["proof"][line - 1]["concludes"]["norm"], -1)), f"proof line {line}", "a leaf is not shown")
        reject(f"in two norms: {line} in the other", but(entries, f"proof {line - 1} uses", [15, 8 if line < 18 else 1]), f"proof line {line}", "the metric of the next")


def round_and_round() -> None:
    """An orbit of several states counts whole horizons, and shows what is at their ends; a product is one of single steps."""
    d = twice(["bound(x) < 7/20", '"bound(x) < 3/20"\nin = "left"'])
    del d.proof[23:]
    for stances, start, far in ((["left", "right"], "3/20", {"left:x": "3/20"}), (["right", "left"], "7/20", {"right:x": "7/20"})):
        steps = [{"p": "1/8"} if s == "left" else {"q": "1/16"} for s in stances]
        d.line("graph-periodic", "periodic", [11, 14, 17], {"bits": 0, "held": {}, "stances": stances, "start": {"x": start}, "steps": steps}, **far)
    entries = d.found("region", [("bound(x) < 7/20", "refuted"), ('"bound(x) < 3/20"\nin = "left"', "refuted")])
    judged("two steps, round", entries)
    for n, far in ((23, "left:x"), (24, "right:x")):
        reject(f"two steps, round, farther {far}", but(entries, f"proof {n} concludes {far}", hair(entries["proof"][n]["concludes"][far], 1)), f"proof line {n + 1}", f"{far}: more than what the orbit shows")
        other = "right:x" if far == "left:x" else "left:x"
        reject(f"two steps, round, on the way {other}", but(entries, f"proof {n} concludes {other}", "0"), f"proof line {n + 1}", "concludes: a distance for each state")
    near = but(entries, "proof 23 witness start x", "0", "proof 23 concludes left:x", "-3/20", "results requirements 1 verdict", "undecided")  # to 3/32, so within 3/32/(5/8)
    accept("two steps, round, from near by", near)
    reject("two steps, round, from near by, farther", but(near, "proof 23 concludes left:x", hair("-3/20", 1)), "proof line 24", "left:x: more than what the orbit shows")
    loop = twice(horizon="2")
    del loop.proof[23:]
    loop.line("graph-periodic", "periodic", [11, 14, 17], {"bits": 0, "held": {}, "stances": ["left", "right"] * 2, "start": {"x": "3/20"}, "steps": [{"p": "1/8"}, {"q": "1/16"}] * 2}, **{"left:x": "3/20"})
    accept("two steps, twice round", loop.found("region", [("settles", "proved")]))
    odd = but(loop.found("region", [("settles", "proved")]), "proof 23 witness stances", ["left", "right", "left"])
    reject("two steps, a step more", odd, "proof line 24", "stances: a step that is not allowed")
    grows = twice(["gain < 3/8"])
    del grows.proof[23:]
    grows.line("graph-product", "slopes", [11], {"bits": 0, "held": {}, "stances": ["left", "right"], "points": [{"x": "0", "p": "0"}, {"x": "0", "q": "0"}], "power": 1}, lower="1/2")
    reject("two steps, a product", grows.found("region", [("gain < 3/8", "undecided")]), "proof line 24", "a product of slopes proves slopes, of single steps")
    by_interval = twice(["bound(x) < 7/20"])
    del by_interval.proof[23:]
    by_interval.line("graph-orbit", "orbit", [11], {"bits": 0, "held": {}, "stances": ["left", "right"], "start": ["3/20", "3/20"], "steps": [{"p": "1/8"}, {"q": "1/16"}]}, **{"left:x": "3/20", "right:x": "7/20"})
    accept("two steps, an orbit by its interval", by_interval.found("region", [("bound(x) < 7/20", "refuted")]))


@unit
def seen_across(checker: Any) -> None:
    """Of Jacobians the norm before and the norm after count, of misses the one after alone."""
    box, other = (checker.matrices.metric("box", ((Q(w), Q(0)), (Q(0), Q(1))), ((1 / Q(w), Q(0)), (Q(0), Q(1))), 2) for w in (2, 3))
    one = (Q(1), Q(0)), (Q(0), Q(1))
    assert checker.graph.across(box, other, "slopes") == checker.matrices.Metric("box", other.rows, box.inverse, own=False)
    assert checker.graph.across(box, other, "misses") == checker.matrices.Metric("box", other.rows, one, own=False)


@unit
def what_is_not_taken_together(checker: Any) -> None:
    read, graph = checker.statement.read_statement, checker.graph

    def text(horizon: int, count: int = 2, rest: str = "") -> str:
        names = [f"s{k}" for k in range(count)]
        found = f'format = 1\nhorizon = {horizon}\n[state]\nx = [-1, 1]\n[next]\nx = "x/2"\n[target]\nx = 0\n{rest}'
        return found + "".join(f"[stance.{s}]\nthen = {names!r}\n".replace("'", '"') for s in names)

    assert len(graph.graph_of(read(text(5), {}, {})).walks) == 64 and len(graph.graph_of(read(text(1, 16), {}, {})).walks) == 256
    assert graph.graph_of(read(text(2), {}, {})).walks == [(a, b, c) for a in ("s0", "s1") for b in ("s0", "s1") for c in ("s0", "s1")]
    with refuses(checker.calculus.Unprovable, "more than 64 ways"):
        graph.graph_of(read(text(6), {}, {}))
    stance = '[dynamics]\nduration = 1\n[dynamics.start]\nX = "x"\n[dynamics.rate]\nX = "0*X"\n'
    graph.graph_of(read(text(1, rest=stance), {}, {}))
    with refuses(checker.calculus.Unprovable, "of stances in closed form, without a library"):
        graph.graph_of(read(text(2, rest=stance), {}, {}))
    library, table = '[uncertain]\na = [0, 1]\n[library]\nfile = "t.csv"\nat = { p = "a" }\n', {"t.csv": "p,q\n0,1\n1,2\n"}
    graph.graph_of(read(text(1, rest=library), {}, table))
    with refuses(checker.calculus.Unprovable, "of stances in closed form, without a library"):
        graph.graph_of(read(text(2, rest=library), {}, table))
    listed = "[uncertain]\na = { values = [0, 1], held = true, change = 1 }\n"
    graph.graph_of(read(text(1, rest=listed), {}, {}))
    with refuses(checker.calculus.Unprovable, "a held quantity of a finite list that changes"):
        graph.graph_of(read(text(2, rest=listed), {}, {}))


two_steps()
corrections_of_two_steps()
more_ways()
on_balls()
moving()
in_two_norms()
round_and_round()


def test_ways_boundaries() -> None:
    all_hold(CASES)
