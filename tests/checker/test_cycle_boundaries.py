"""Closed walks of stances at exact equality: orbits around them, products of Jacobians along them (proofs/graph.md (8), (9)).

The certificates are those of `test_graph_boundaries.py`, with a line more.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import GONE, STEP, Entries, Questions, but
from tests.checker.test_graph_boundaries import (
    NORMS,
    ONE,
    Steps,
    balls,
    claim,
    grounded,
    hair,
    regions,
    slower,
    two,
    without,
)

CASES = Questions()
accept, reject = CASES.accept, CASES.reject


# tables of numbers: one line each reads better
# fmt: off

LR, RL = ["left", "right"], ["right", "left"]
UP, DOWN, STILL = [{"p": "1/8"}, {"q": "1/16"}], [{"p": "-1/8"}, {"q": "-1/16"}], [{"p": "0"}, {"q": "0"}]
MORE, OPPOSITE = "more than what the orbit shows", "start: the ends are not led to opposite sides"


def judged(name: str, entries: Entries) -> None:
    """Nothing else is derived of any requirement."""
    accept(name, entries)
    for n, r in enumerate(entries["results"]["requirements"]):
        for other in sorted({"proved", "refuted"} - {r["verdict"]}):
            reject(f"{name}: {n} {r['that']} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {r['verdict']} was derived")


def below(name: str, entries: Entries, figures: dict[str, str]) -> None:
    """Lower ends of these figures are exactly so large."""
    for path, low in figures.items():
        full = but(entries, f"results {path}", {"lower": low, "upper": None})
        accept(f"{name}: {path}", full)
        reject(f"{name}: {path} more", but(full, f"results {path} lower", hair(low, 1)), "results", "lower: more is claimed")


def orbit(d: Steps, start: Sequence[str], steps: Sequence[dict[str, str]], far: dict[str, str], stances: Sequence[str] = LR, uses: Sequence[int] = (11,), held: dict[str, str] | None = None, bits: int = 0) -> int:
    witness = {"bits": bits, "held": held or {}, "stances": list(stances), "start": list(start), "steps": list(steps)}
    return d.line("graph-orbit", "orbit", uses, witness, **{f"{s}:x": x for s, x in far.items()})


# left 3/20 -> 3/2 3/20 + 1/8 = 7/20 right -> 7/80 + 1/16 = 3/20; up and down again from x: (3/2 x + 1/8)/4 + 1/16 = y and back with both signs turned: y = -x
AT_REST = ("3/20", "3/20"), UP, {"left": "3/20", "right": "7/20"}
ORBITS: dict[str, tuple[Any, ...]] = {
    "at rest": AT_REST,
    "below": (("-3/20", "-3/20"), DOWN, {"left": "3/20", "right": "7/20"}),
    "from the right": (("7/20", "7/20"), UP[::-1], {"right": "7/20", "left": "3/20"}, RL),
    "two rounds": (("3/20", "3/20"), UP * 2, {"left": "3/20", "right": "7/20"}, LR * 2),
    "an interval": (("0", "1"), UP, {"left": "0", "right": "1/8"}),
    "all of the region": (("-1", "1"), UP, {"left": "0", "right": "0"}),
    "from the right, all of the region": (("-13/8", "13/8"), UP[::-1], {"right": "0", "left": "0"}, RL),
    "up and down": (("-3/44", "-3/44"), UP + DOWN, {"left": "3/44", "right": "1/44"}, LR * 2),
    # 9/220 -> 41/220 -> 6/55 -> 9/55 -> 9/220
    "up and on": (("9/220", "9/220"), [*UP, *STILL], {"left": "6/55", "right": "41/220"}, LR * 2),
    "on and up": (("6/55", "6/55"), [*STILL, *UP], {"left": "6/55", "right": "41/220"}, LR * 2),
}


def round_and_round() -> None:
    for name, (start, steps, far, *stances) in ORBITS.items():
        d = regions()
        orbit(d, start, steps, far, *stances)
        entries = d.found("region", [("settles", "proved")])
        accept(f"orbit {name}", entries)
        for s, x in far.items():
            reject(f"orbit {name}, farther on the {s}", but(entries, f"proof 27 concludes {s}:x", hair(x, 1)), "proof line 28", f"{s}:x: {MORE}")
            reject(f"orbit {name}, not on the {s}", but(entries, f"proof 27 concludes {s}:x", GONE), "proof line 28", "concludes: a distance for each state in each stance on the way")
        reject(f"orbit {name}, in the air", but(entries, "proof 27 concludes air:x", "-9"), "proof line 28", "concludes: a distance for each state")
    good = regions()
    orbit(good, *AT_REST)
    entries = good.found("region", [("settles", "proved")])
    walk, steps = "stances: a step that is not allowed", "steps: values for each stance of the walk"
    for n, (key, value, reason) in enumerate((
        ("stances", ["left", "left"], walk), ("stances", ["left"], walk), ("stances", ["left", "right", "left"], walk), ("stances", ["left", "up"], walk), ("stances", [["left"], "right"], walk), ("stances", [], "stances: a list of 1 to 1000"), ("stances", LR * 501, "stances: a list of 1 to 1000"), ("stances", "left", "stances: a list of 1 to 1000"),
        ("steps", [], steps), ("steps", UP[:1], steps), ("steps", [*UP, {}], steps), ("steps", "up", steps), ("steps", UP[::-1], "steps: one value for each quantity"), ("steps", [1, 2], "steps: one value"), ("steps", [{"p": "1/8", "q": "0"}, {"q": "1/16"}], "steps: one value"),
        ("steps", [{"p": hair("1/8", 1)}, UP[1]], "at.p: outside the range"), ("steps", [UP[0], {"q": hair("-1/16", -1)}], "at.q: outside the range"), ("held", {"p": "1/8"}, "held: one value for each held quantity that is met on the way"), ("held", [], "held: one value"), ("bits", 23, "bits: 0 for exact rationals"),
        ("start", ["3/20"], "start: a list of 2"), ("start", {"x": "3/20"}, "start: a list of 2"), ("start", ["0", hair("1", 1)], "start: not shown to be in the set"), ("start", [hair("-1", -1), "1"], "start: not shown to be in the set"), ("start", ["1", "0"], "start: not shown to be in the set"),
        ("start", [hair("3/20", 1), "1"], OPPOSITE), ("start", ["0", hair("3/20", -1)], OPPOSITE), ("start", ["-1", "0"], OPPOSITE), ("start", ["1/2", "1"], OPPOSITE),
    )):
        reject(f"orbit, {n} {key}", but(entries, f"proof 27 witness {key}", value), "proof line 28", reason)
    for n, (key, value, reason) in enumerate((
        ("uses", [], "an orbit of one state rests on the sets that are kept"), ("uses", [11, 14, 17], "an orbit of one state rests on"), ("uses", [4], "uses: first the sets"), ("uses", [14], "uses: first the sets"), ("proves", "periodic", "an orbit of one state rests on"), ("proves", "left:orbit", "graph-orbit: not known of one stance or step alone"),
        ("proves", "left>right:orbit", "graph-orbit: not known of one stance or step alone"),
    )):
        reject(f"orbit, {n} {key}", but(entries, f"proof 27 {key}", value), "proof line 28", reason)
    accept("an interval from the state at rest on", but(entries, "proof 27 witness start", ["3/20", "1"]))
    accept("an interval up to the state at rest", but(entries, "proof 27 witness start", ["0", "3/20"], "proof 27 concludes left:x", "0", "proof 27 concludes right:x", "1/8"))
    long = regions()
    orbit(long, ("3/20", "3/20"), UP * 500, {"left": "3/20", "right": "7/20"}, LR * 500)
    accept("an orbit of a thousand steps", long.found("region", [("settles", "proved")]))
    # a tenth lies between two units of 2**-24: the nearer end counts
    low = Q((1 << 24) // 10, 1 << 24)
    tenth = regions()
    orbit(tenth, ("0", "1"), [{"p": "1/10"}, {"q": "0"}], {"left": "0", "right": str(low)}, bits=24)
    rough = tenth.found("region", [("settles", "proved")])
    accept("an orbit, rounded", rough)
    reject("an orbit, rounded, farther", but(rough, "proof 27 concludes right:x", hair(str(low), 1)), "proof line 28", f"right:x: {MORE}")


def led_apart() -> None:
    """Ends that are led away from each other enclose an orbit as well: x+ = clip(2x + p) on the left, x on the right."""
    for start, good in ((("-1/8", "1/8"), True), (("-1/4", "1/4"), True), (("-1/8", hair("1/8", -1)), True), (("0", "1/8"), False), (("-1/16", "0"), False), (("-1", "1"), True), (("0", "1/16"), True), (("-1/16", "0"), True)):
        d = Steps(claim("clip(2*x + p, -1, 1)", "x + 0*q", ("[-1, 1]", "[-1, 1]"), ["settles"]))
        sets: list[int] = []
        for name in LR:
            norm, target, point = d.metric(name), d.range(f"{name}:target[x]", "0", "0"), d.point(f"{name}:target[x]", {}, "0")
            d.theorem("largest-ball", f"{name}:ball", [norm, target, point], radius="1", outer="1")
            sets += [norm, target, d.range(f"{name}:image[x]", "-1", "1")]
        kept = d.theorem("graph-regions", "invariant", sets)
        # with p = 1/8 the state at rest is -1/8
        p = "0" if good else "1/8"
        orbit(d, start, [{"p": p}, {"q": "0"}], {"left": "0", "right": "0"}, uses=[kept])
        entries = d.found("region", [("settles", "undecided")])
        accept(f"led apart from {start}", entries) if good else reject(f"not led apart from {start}", entries, f"proof line {kept + 1}", OPPOSITE)


FIGURES = [
    ("settles", "proved"), ("bound(x) < 7/20", "refuted"), ("bound(x) <= 7/20", "proved"), (f"bound(x) <= 7/20 - 1{STEP}", "refuted"), (f"bound(x) < 7/20 + 1{STEP}", "proved"), ("sharp_bound(x) < 7/20", "refuted"), ("bound < 7/20", "refuted"), (f"bound <= 7/20 - 1{STEP}", "refuted"), ("bound <= 7/20", "proved"),
    ('"bound(x) < 3/20"\nin = "left"', "refuted"), ('"bound(x) <= 3/20"\nin = "left"', "proved"), ('"bound(x) < 1/4"\nin = "left"', "proved"), ('"bound(x) < 1/4"\nin = "right"', "refuted"), ('"bound < 3/20"\nin = "left"', "refuted"), ('"bound < 7/20"\nin = "left"', "proved"),
]


def figures() -> None:
    """What an orbit says of bounds, in each stance and in all of them."""
    for top in ("", "shrink = true\n"):
        told = [(that, "undecided" if top and v == "refuted" else v) for that, v in FIGURES]
        d = regions([that for that, _ in told], top=top)
        orbit(d, *AT_REST)
        judged(f"figures {top}", d.found("region", told))
    d = regions()
    orbit(d, *AT_REST)
    entries = d.found("region", [("settles", "proved")])
    below("figures", entries, {"states x bound": "7/20", "stances left states x bound": "3/20", "stances right states x bound": "7/20", "stances left states x sharp_bound": "3/20", "bound": "7/20", "routes slope bound": "7/20"})
    more = regions()
    orbit(more, *AT_REST)
    orbit(more, *ORBITS["up and down"])
    reject("an orbit that serves no figure", more.found("region", [("settles", "proved")]), "proof", "line 29 serves no later line")
    each = regions(["bound(x) < 7/20", '"bound(x) < 3/20"\nin = "left"'])
    orbit(each, ("3/20", "3/20"), UP, {"left": "3/20", "right": "-1"})
    orbit(each, ("3/20", "3/20"), UP, {"left": "-1", "right": "7/20"})
    judged("an orbit each", each.found("region", [("bound(x) < 7/20", "refuted"), ('"bound(x) < 3/20"\nin = "left"', "refuted")]))
    bare = regions(["bound(x) <= 1/4", "bound < 1/4"])
    orbit(bare, *AT_REST)
    alone = without(bare.found("region", [("bound(x) <= 1/4", "refuted"), ("bound < 1/4", "refuted")]), 27, 26, 25, 24, 23, 22, 21, 20, 19, 18)
    judged("an orbit without a bound", alone)
    accept("an orbit without a bound: value", but(alone, "results requirements 0 value", {"lower": "7/20", "upper": None}))


def at_the_edge() -> None:
    """x -> 3/2 x + p, x/4 + q with p, q = 1/2 goes round 1 and 2: at the edge it does not settle inside, a hair within it does."""
    for spans, asked in (
        (("[-1, 1]", "[-2, 2]"), [("settles", "refuted"), ('"settles"\nin = "left"', "refuted"), ('"settles"\nin = "right"', "refuted")]),
        (("[-1, 1]", f"[-2, {hair('2', 1)}]"), [("settles", "refuted"), ('"settles"\nin = "left"', "refuted"), ('"settles"\nin = "right"', "refuted")]),
        (("[-1, 1]", f'["{hair("-2", -1)}", "{hair("2", 1)}"]'), [("settles", "refuted"), ('"settles"\nin = "left"', "refuted"), ('"settles"\nin = "right"', "proved")]),
    ):
        for top in ("", "shrink = true\n"):
            told = [(that, "undecided" if top and v == "refuted" else v) for that, v in asked]
            lines = Steps(claim("3*x/2 + p", "x/4 + q", (spans[0], spans[1] if '"' in spans[1] else f'["{spans[1][1:-1].replace(", ", chr(34) + ", " + chr(34))}"]'), [t for t, _ in told], top=top, rest='p = ["-1/2", "1/2"]\nq = ["-1/2", "1/2"]'))
            sets: list[int] = []
            ends = [Q(x.strip(' "')) for x in spans[1][1:-1].split(",")]
            room = min(-ends[0], ends[1])
            for name, most, image in (("left", Q(1), Q(2)), ("right", room, max(ends) / 4 + Q(1, 2))):
                norm, target, point = lines.metric(name), lines.range(f"{name}:target[x]", "0", "0"), lines.point(f"{name}:target[x]", {}, "0")
                lines.theorem("largest-ball", f"{name}:ball", [norm, target, point], radius=str(most), outer=str(most))
                sets += [norm, target, lines.range(f"{name}:image[x]", str(-image), str(image))]
            if max(ends) > 2:  # the right leads beyond the left
                lines.text = lines.text.replace("x/4 + q", "min(max(x/4 + q, -1), 1)")
                for line in lines.proof:
                    if line["proves"] == "right:image[x]":
                        line["concludes"] = {"lower": "-1", "upper": "1"}
            kept = lines.theorem("graph-regions", "invariant", sets)
            pairs = []
            for e, k, norm in (("left>right", "3/2", sets[3]), ("right>left", "1/4", sets[0])):
                pairs.append(lines.theorem("slope", f"{e}:slope", [lines.matrix(f"{e}:slopes", k, [kept, norm]), lines.matrix(f"{e}:misses", "1/2", [kept, norm])], gain=k, residual="1/2"))
            lines.bound([kept, *pairs], {"left": "1", "right": "2"}, {"left": "1", "right": "2"}, left="1", right="2")
            orbit(lines, ("1", "1"), [{"p": "1/2"}, {"q": "1/2"}], {"left": "1", "right": "2"}, uses=[kept])
            entries = lines.found("region", told)
            judged(f"at the edge {spans[1]} {top}", entries)
            near = but(entries, f"proof {len(entries['proof']) - 1} concludes left:x", hair("1", -1), f"proof {len(entries['proof']) - 1} concludes right:x", hair("2", -1))
            judged(f"a hair within {spans[1]} {top}", but(near, *(x for n, (_, v) in enumerate(told) for x in (f"results requirements {n} verdict", "undecided" if v == "refuted" else v))))


def in_balls() -> None:
    """x -> 3/8 x + p, x/2 + q with q down to -3/4: round -1 and 3/4 below the target, the edges of both balls."""
    for edge, verdict in (("-3/4", "refuted"), (hair("-3/4", 1), "proved")):
        asked = [("settles", verdict), ("bound(x) < 3/4", "undecided")]
        d = balls([a for a, _ in asked])
        d.text = d.text.replace('q = ["-1/16", "1/16"]', f'q = ["{edge}", "1/2"]')
        kept = next(n for n, x in enumerate(d.proof, 1) if x["rule"] == "graph-balls")
        # with q a hair within: round a hair inside
        e = -(Q(edge) + Q(1, 8))
        left = (e + Q(3, 16)) / (1 - Q(3, 16))
        right = Q(3, 8) * left + Q(3, 8)
        for line in d.proof:
            if line["proves"] == "right>left:misses":
                line["concludes"] = {"norm": "5/8"}
            if line["proves"] == "right>left:slope":
                line["concludes"] = {"gain": "1/2", "residual": "5/8"}
        d.proof[kept] |= {"witness": {"p": {"left": ["1"], "right": ["1"]}, "b": {"left": ["1"], "right": ["3/4"]}}, "concludes": {"left": "1", "right": "3/4"}}
        orbit(d, (str(-left), str(-left)), [{"p": "-1/8"}, {"q": edge}], {"left": str(left), "right": str(right)}, uses=[kept])
        told = [("settles", "refuted" if verdict == "refuted" else "undecided"), ("bound(x) < 3/4", "refuted")]
        entries = d.found("ball", told)
        judged(f"in balls, q from {edge}", entries)
        last = len(entries["proof"])
        for start in ([hair("-1", -1)] * 2, [hair("-1", -1), "-1"], ["-1", hair("1", 1)]):
            reject(f"an orbit from {start} off the ball, q from {edge}", but(entries, f"proof {last - 1} witness start", start), f"proof line {last}", "start: not shown to be in the set")
        beside = but(entries, f"proof {last - 1} witness stances", RL, f"proof {last - 1} witness steps", [{"q": edge}, {"p": "-1/8"}], f"proof {last - 1} concludes left:x", "-9", f"proof {last - 1} concludes right:x", "0", "results requirements 0 verdict", "undecided", "results requirements 1 verdict", "undecided")
        for start, good in ((["-1/2", "1"], True), ([hair("-1/2", -1), "1"], False), (["-1/2", hair("1", 1)], False)):
            whole = but(beside, f"proof {last - 1} witness start", start)
            accept(f"an orbit from all of the right ball, q from {edge}", whole) if good else reject(f"an orbit from {start} off the right ball, q from {edge}", whole, f"proof line {last}", "start: not shown to be in the set")
        accept(f"an orbit from all of the ball, q from {edge}", but(entries, f"proof {last - 1} witness start", ["-1", "1"], f"proof {last - 1} concludes left:x", "0", f"proof {last - 1} concludes right:x", "0", "results requirements 0 verdict", "undecided", "results requirements 1 verdict", "undecided"))


def held_targets() -> None:
    """x* = c on the left, -2c on the right: x leads to -2c + (x - c)/2 + p and c + (x + 2c)/4 + q, round 5/14 + 1/8 ... of each target."""
    for c in ("0", "1/8"):
        d = Steps(claim("-2*c + (x - c)/2 + p", "c + (x + 2*c)/4 + q", ("[-1, 1]", "[-1, 1]"), ("settles",), ("c", "-2*c"),
                        rest='p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]\nc = { range = [0, "1/8"], held = true, change = "1/16" }'))
        sets: list[int] = []
        d.form = "c"
        for name, ends, at, room, image in (("left", ("0", "1/8"), "1/8", "7/8", ("-15/16", "5/8")), ("right", ("-1/4", "0"), "-1/4", "3/4", ("-5/16", "1/2"))):
            norm, target = d.metric(name), d.range(f"{name}:target[x]", *ends)
            d.theorem("largest-ball", f"{name}:ball", [norm, target, d.point(f"{name}:target[x]", {"c": "1/8"}, at)], radius=room, outer=room)
            sets += [norm, target, d.range(f"{name}:image[x]", *image)]
        kept = d.theorem("graph-regions", "invariant", sets)
        # e_left = e_right/4 + 1/16, e_right = e_left/2 + 1/8: 3/28 and 5/28
        x = str(Q(c) + Q(3, 28))
        orbit(d, (x, x), UP, {"left": "3/28", "right": "5/28"}, uses=[kept], held={"c": c})
        entries = d.found("region", [("settles", "undecided")])
        accept(f"about targets at {c}", entries)
        last = len(entries["proof"])
        for s, far in (("left", "3/28"), ("right", "5/28")):
            reject(f"about targets at {c}, farther on the {s}", but(entries, f"proof {last - 1} concludes {s}:x", hair(far, 1)), f"proof line {last}", f"{s}:x: {MORE}")
        reject(f"about targets at {c}, c anew", but(entries, f"proof {last - 1} witness steps", [{"p": "1/8", "c": c}, UP[1]]), f"proof line {last}", "steps: one value")
        reject(f"about targets at {c}, no c", but(entries, f"proof {last - 1} witness held", {}), f"proof line {last}", "held: one value")
        reject(f"about targets at {c}, c too large", but(entries, f"proof {last - 1} witness held", {"c": hair("1/8", 1)}), f"proof line {last}", "at.c: outside the range")


# two states, max(|x|, 2|y|) on the left, |2x + y| and |2x - y| on the right; a step gains 13/8 and 1/2, a round 13/16

BOTH = [{"p": "1/8", "q": "1/16"}] * 2


def periodic(d: Steps, start: Sequence[str], steps: Sequence[dict[str, str]], far: dict[str, str], stances: Sequence[str] = LR, uses: Sequence[int] = (15, 18, 21), bits: int = 0) -> int:
    witness = {"bits": bits, "held": {}, "stances": list(stances), "start": dict(zip("xy", start, strict=True)), "steps": list(steps)}
    return d.line("graph-periodic", "periodic", uses, witness, **far)


def of(*far: str) -> dict[str, str]:
    return dict(zip(("left:x", "left:y", "right:x", "right:y"), far, strict=True))


# from 0 on the left: (1/8, 1/16), then (13/64, 7/64): 7/32 off in the norm of the left, so within 7/32/(3/16) = 7/6, on the right within 13/8 7/6 = 91/48;
# from 0 on the right: the same, 33/64 off in its norm, so within 33/12 = 11/4, on the left within 11/8; x and y of the right reach 1/2 and 1 for each
ROUNDS: dict[str, tuple[Any, ...]] = {
    "at rest": (("7/20", "1/5"), BOTH, of("7/20", "1/5", "7/20", "1/5")),
    "near": (("0", "0"), BOTH, of("-7/6", "-7/12", str(Q(1, 8) - Q(91, 96)), str(Q(1, 16) - Q(91, 48)))),
    "near, from the right": (("0", "0"), BOTH, of(str(Q(1, 8) - Q(11, 8)), str(Q(1, 16) - Q(11, 16)), "-11/8", "-11/4"), RL),
    "two rounds": (("7/20", "1/5"), BOTH * 2, of("7/20", "1/5", "7/20", "1/5"), LR * 2),
    "at rest below": (("-7/20", "-1/5"), [{"p": "-1/8", "q": "-1/16"}] * 2, of("7/20", "1/5", "7/20", "1/5")),
}


def several_states() -> None:
    for name, (start, steps, far, *stances) in ROUNDS.items():
        d = two()
        periodic(d, start, steps, far, *stances)
        entries = d.found("region", [("settles", "proved")], NORMS, "xy")
        accept(f"round {name}", entries)
        for key, x in far.items():
            reject(f"round {name}, farther: {key}", but(entries, f"proof 31 concludes {key}", hair(x, 1)), "proof line 32", f"{key}: {MORE}")
            reject(f"round {name}, without {key}", but(entries, f"proof 31 concludes {key}", GONE), "proof line 32", "concludes: a distance for each state in each stance")
    d = two()
    periodic(d, *ROUNDS["at rest"])
    good = d.found("region", [("settles", "proved")], NORMS, "xy")
    edge = "start: not shown to be in the set"
    for n, (key, value, reason) in enumerate((
        ("witness start", {"x": "0"}, "start: an error of each state"), ("witness start", ["0", "0"], "start: an error of each state"), ("witness start", {"x": hair("1", 1), "y": "0"}, edge), ("witness start", {"x": "0", "y": hair("-1", -1)}, edge), ("witness start", {"x": hair("-1", -1), "y": "0"}, edge),
        ("witness start", {"x": "0", "y": hair("1", 1)}, edge), ("uses", [15, 18], "periodic rests on"), ("uses", [15], "periodic rests on"), ("uses", [18, 21], "uses: first the sets"), ("uses", [15, 21, 18], "lines about left>right"), ("uses", [15, 18, 18], "lines about left>right"), ("proves", "orbit", "periodic rests on"),
        ("proves", "right:periodic", "graph-periodic: not known of one stance or step alone"), ("witness stances", ["left"], "stances: a step that is not allowed"), ("witness steps", BOTH[:1], "steps: values for each stance"),
    )):
        reject(f"round, {n} {key}", but(good, f"proof 31 {key}", value), "proof line 32", reason)
    far = of("-9999", "-9999", "-9999", "-9999")
    accept("from a corner of the region", but(good, "proof 31 witness start", {"x": "1", "y": "-1"}, "proof 31 concludes", far))
    reject("an orbit of one state by its interval, of two", but(good, "proof 31 rule", "graph-orbit", "proof 31 proves", "orbit", "proof 31 uses", [15]), "proof line 32", "an orbit of one state rests on")
    # a round whose gains multiply to 1 contracts nothing: without the bound, which asks for as much
    lines = two()
    periodic(lines, *ROUNDS["at rest"])
    entries = without(lines.found("region", [("settles", "proved")], NORMS, "xy"), 22)
    for k, held in (("8/13", False), (hair("8/13", -1), True), ("2", False)):
        entries = but(entries, "proof 20 concludes gain", k)
        accept("a round of gains below 1", entries) if held else reject(f"a round of gains {k}", entries, "proof line 31", "the product of the gains around the walk is not below 1")
    # a tenth lies between two units of 2**-24: from 0 to within that of 0, the farther end counts
    tenth = Q(-(-(1 << 24) // 10), 1 << 24)
    rough = two()
    periodic(rough, ("0", "0"), [{"p": "0", "q": "0"}, {"p": "1/10", "q": "0"}], of(*(str(-x * tenth / 3) for x in (16, 8, 13, 26))), bits=24)
    entries = rough.found("region", [("settles", "proved")], NORMS, "xy")
    accept("round, rounded", entries)
    for key, x in zip(of("", "", "", ""), (16, 8, 13, 26), strict=True):
        reject(f"round, rounded, farther: {key}", but(entries, f"proof 31 concludes {key}", hair(str(-x * tenth / 3), 1)), "proof line 32", f"{key}: {MORE}")
    # of one state too; a step that forgets everything
    still = slower(regions().found("region", [("settles", "proved")]), ("x/4 + 0*p", "0*x + q"), {"left>right": ("1/4", "0"), "right>left": ("0", "1/16")}, {"left": "1/16", "right": "1/64"})
    still = without(still, 27, 26, 25, 24)
    line = {"rule": "graph-periodic", "proves": "periodic", "uses": [11, 14, 17], "witness": {"bits": 0, "held": {}, "stances": LR, "start": {"x": "1/16"}, "steps": UP}, "concludes": {"left:x": "1/16", "right:x": "1/64"}}
    forgets = but(still, "proof", [*still["proof"], line])
    accept("a round with a gain of 0", forgets)
    reject("a round with a gain of 0, farther", but(forgets, "proof 23 concludes right:x", hair("1/64", 1)), "proof line 24", f"right:x: {MORE}")
    asked = [("bound(x) < 7/20", "refuted"), ("bound(x) <= 7/20", "proved"), (f"bound(y) <= 1/5 - 1{STEP}", "refuted"), ('"bound(y) < 1/5"\nin = "right"', "refuted"), ("settles", "proved"), ("bound < 7/20", "refuted"), ("bound <= 7/20", "undecided"), ('"bound < 7/20"\nin = "left"', "refuted"), ("bound <= 11/4", "proved")]
    for top in ("", "shrink = true\n"):
        told = [(that, "undecided" if top and v == "refuted" else v) for that, v in asked]
        d = two([that for that, _ in told], top=top)
        periodic(d, *ROUNDS["at rest"])
        judged(f"two states, figures {top}", d.found("region", told, NORMS, "xy"))
    # in the norms of this proof: max(7/20, 2/5) on the left, max(2 7/20, 1/5) on the right
    below("two states", good, {"states x bound": "7/20", "states y bound": "1/5", "stances left states y bound": "1/5"})
    fixed = two(["bound < 2/5", "bound <= 2/5", '"bound < 2/5"\nin = "left"'], top='[metric]\nweights = { y = 2 }\n')
    del fixed.proof[31:]
    box = {"kind": "box", "rows": [["1", "0"], ["0", "2"]], "inverse": [["1", "0"], ["0", "1/2"]]}
    fixed.proof[7]["witness"], fixed.proof[10]["proves"] = box, "right:target[x]"
    for number, figures in {16: {"norm": "3/4"}, 17: {"norm": "1/8"}, 18: {"gain": "3/4", "residual": "1/8"}, 19: {"norm": "3/4"}, 21: {"gain": "3/4", "residual": "1/8"}, 22: {"left": "1/2", "right": "1/2"}, 28: {"lower": "3/4"}, 29: {"lower": "1/8"}, 30: {"lower": "3/4"}}.items():
        fixed.proof[number - 1]["concludes"] |= figures
    fixed.proof[21]["witness"] = {x: {s: [y] for s in LR} for x, y in (("p", "1"), ("b", "1/2"))}
    fixed.proof[29]["witness"] |= {"direction": ["1", "1/2"]}
    periodic(fixed, *ROUNDS["at rest"])
    told = [("bound < 2/5", "refuted"), ("bound <= 2/5", "undecided"), ('"bound < 2/5"\nin = "left"', "refuted")]
    judged("two states in norms that the claim fixes", fixed.found("region", told, ({"kind": "box", "weights": {"x": "1", "y": "2"}},) * 2, "xy"))


# products: [[r, q], [h, 0]] on the left, diag(g, h) on the right: at r = 0 their product squared is g q h² times 1

FREE = 'q = ["-1/2", "1/2"]\nr = ["-1/4", "1/4"]\ng = ["1/4", "1/2"]\nh = {{ range = ["1/4", "1/2"], held = true{change} }}'
PLAIN = ({"kind": "box", "weights": {"x": "1", "y": "1"}},) * 2
SMALL = "lower: the trace is not shown to be so large"


def growing(asked: Sequence[str] = ("gain < 1",), top: str = "", change: str = "", kept: bool = True, then: str = '"right"', rest: str = "", target: str = "0") -> Steps:
    """Lines: 1 7 metrics, 2 3 8 9 targets, 4 10 balls, 5 6 11 12 images, 13 invariant, 14 15 17 18 matrices, 16 19 pairs; without images and sets where these are not kept."""
    text = f"format = 1\n{top}\n[uncertain]\n{FREE.format(change=change)}\n{rest}\n[target]\nx = 0\ny = {target}\n"
    text += f'[stance.left]\nthen = {then}\nstate = {{ x = [-1, 1], y = [-1, 1] }}\nnext = {{ x = "r*x + q*y", y = "h*x" }}\n'
    text += '[stance.right]\nthen = "left"\nstate = { x = [-1, 1], y = [-1, 1] }\nnext = { x = "g*x", y = "h*y" }\n'
    d = Steps(text + "".join(f"[[require]]\nthat = {r}\n" if r.startswith('"') else f'[[require]]\nthat = "{r}"\n' for r in asked))
    sets, norms, on = list[int](), dict[str, int](), dict[str, int]()
    for name, image in (("left", ("3/4", "1/2")), ("right", ("1/2", "1/2"))):
        norms[name] = d.metric(name, "box", ONE, ONE)
        targets = [d.range(f"{name}:target[{s}]", "0", "0") for s in "xy"]
        on[name] = d.theorem("smaller-ball", f"{name}:ball", [norms[name], *targets], radius="1")
        sets += [norms[name], *targets, *(d.range(f"{name}:image[{s}]", f"-{x}", x) for s, x in zip("xy", image, strict=True) if kept)]
    if kept:
        on = dict.fromkeys(on, d.theorem("graph-regions", "invariant", sets))
    pairs = [("left", "right", "3/4"), *([("left", "left", "3/4")] if "left" in then else []), ("right", "left", "1/2")]
    for s, t, k in pairs:
        e = f"{s}>{t}"
        d.theorem("slope", f"{e}:slope", [d.matrix(f"{e}:slopes", k, [on[s], norms[t]]), d.matrix(f"{e}:misses", "0", [on[s], norms[t]])], gain=k, residual="0")
    return d


def left(q: str = "1/2", r: str = "0", **other: str) -> dict[str, str]:
    return {"q": q, "r": r, "x": "0", "y": "0", **other}


def right(g: str = "1/2", **other: str) -> dict[str, str]:
    return {"g": g, "x": "0", "y": "0", **other}


def product(d: Steps, points: Any, power: Any, lower: str, stances: Any = LR, held: Any = None, uses: Sequence[int] = (13,), bits: int = 0) -> int:
    witness = {"bits": bits, "held": {"h": "1/2"} if held is None else held, "stances": stances, "points": points, "power": power}
    return d.line("graph-product", "slopes", uses, witness, lower=lower)


def one(points: Any, power: Any, lower: str, **other: Any) -> Entries:
    d = growing()
    product(d, points, power, lower, **other)
    return d.found("region", [("gain < 1", "proved")], PLAIN, "xy")


def traced(words: Any) -> Q:
    """The trace of products of [[r, q], [h, 0]] and then diag(g, h), by fractions."""
    whole = [[Q(1), Q(0)], [Q(0), Q(1)]]
    for one, other in words:
        r, q, g, h = Q(one["r"]), Q(one["q"]), Q(other["g"]), Q(1, 2)
        step = [[g * r, g * q], [h * h, Q(0)]]
        whole = [[sum(x * y for x, y in zip(row, column, strict=True)) for column in zip(*whole, strict=True)] for row in step]
    return abs(whole[0][0] + whole[1][1])


def products() -> None:
    for name, points, power, root, stances in (
        ("a square", [left(), right()], 2, Q(1, 2), LR), ("a square of opposite sign", [left("-1/2"), right()], 2, Q(1, 2), LR), ("from the right", [right(), left()], 2, Q(1, 2), RL), ("often", [left(), right()], 4096, Q(1, 2), LR), ("twice around", [left(), right()] * 2, 1, Q(1, 2), LR * 2),
        ("sixteen", [left(), right()] * 8, 1, Q(1, 2), LR * 8), ("an odd power of one of trace 0", [left(), right()], 3, Q(0), LR), ("alone", [left("0", "1/4"), right("1/4")], 1, Q(0), LR),
    ):
        good = one(points, power, str(root), stances=stances)
        accept(f"product {name}", good)
        if root:
            reject(f"product {name}, more", but(good, "proof 19 concludes lower", hair(str(root), 1) if power < 100 else str(root + Q(1, 2**60))), "proof line 20", SMALL)
    # the order counts: the trace of three rounds is another one backwards
    words = [(left("1/2", "1/4"), right()), (left("1/4", "0"), right("1/4")), (left("-1/2", "1/8"), right("3/8"))]
    assert traced(words) != traced(words[::-1])
    for name, several in (("in order", words), ("backwards", words[::-1])):
        trace = traced(several)
        c = Q(bisect_right(range(10**5), trace, key=lambda n: 2 * Q(n, 10**5) ** 6) - 1, 10**5)
        good = one([x for pair in several for x in pair], 1, str(c), stances=LR * 3)
        accept(f"product {name}", good)
        reject(f"product {name}, more", but(good, "proof 19 concludes lower", str(c + Q(1, 10**5))), "proof line 20", SMALL)
    good = one([left(), right()], 2, "1/2")
    number = "points: one for each stance of the walk"
    for n, (key, value, reason) in enumerate((
        ("witness points", [], number), ("witness points", [left()], number), ("witness points", [left(), right(), left()], number), ("witness points", "here", number), ("witness points", [1, 2], number), ("witness points", [left(h="1/2"), right()], "points: what is held is stated once"), ("witness points", [left(), right(h="1/2")], "points: what is held"),
        ("witness points", [left(z="0"), right()], "at: one value for each variable"), ("witness points", [right(), left()], "at: one value"), ("witness points", [left(hair("1/2", 1)), right()], "at.q: outside the range"), ("witness points", [left(), right(hair("1/4", -1))], "at.g: outside the range"), ("witness points", [left(x=hair("1", 1)), right()], "at.x: outside the range"),
        ("witness held", {}, "held: one value for each held quantity"), ("witness held", {"h": "1/2", "q": "0"}, "held: one value"), ("witness held", [], "held: one value"), ("witness held", {"h": hair("1/2", 1)}, "at.h: outside the range"),
        ("witness power", 0, "power: 1 to 4096"), ("witness power", 4097, "power: 1 to 4096"), ("witness power", True, "power: 1 to 4096"), ("witness power", "2", "power: 1 to 4096"), ("witness bits", 23, "bits: 0 for exact rationals"),
        ("witness stances", [], "stances: a list of 1 to 16"), ("witness stances", LR * 9, "stances: a list of 1 to 16"), ("witness stances", ["left", "left"], "stances: a step that is not allowed"), ("witness stances", ["left"], "stances: a step"), ("witness stances", "left", "stances: a list"),
        ("uses", [], "a product rests on the sets that are kept, or the ball of every stance"), ("uses", [4], "uses: first the sets that are kept"), ("uses", [10, 4], "lines about left, right"), ("uses", [4, 4], "lines about left, right"), ("uses", [13, 13], "a product rests on"), ("uses", [4, 10, 13], "a product rests on"), ("uses", [16], "uses: first the sets"),
        ("proves", "misses", "a product of slopes proves slopes"), ("proves", "left:slopes", "graph-product: not known of one stance"), ("proves", "left>right:slopes", "graph-product: not known of one stance or step"), ("concludes lower", "-1/2", "lower: not below 0"),
    )):
        reject(f"product, {n} {key}", but(good, f"proof 19 {key}", value), "proof line 20", reason)


def gains() -> None:
    """What a product says of the gain of all stances on its way, and of no others."""
    wanted = [("gain < 1/2", "refuted"), ("gain <= 1/2", "undecided"), (f"gain <= 1/2 - 1{STEP}", "refuted"), (f"gain < 1/2 + 1{STEP}", "undecided"), ("gain <= 3/4", "proved"), ('"gain < 1/2"\nin = "left"', "undecided"), ('"gain <= 1/2"\nin = "right"', "proved"), ('"gain < 1/4"\nin = "right"', "undecided"), ("residual <= 0", "proved")]
    corrected = 'correction = ["f"]\n'
    for name, top, define, final in (("free", "", "", True), ("shrink", "shrink = true\n", "", False), ("correction", corrected, '[define]\nf = "x"\n', False), ("slope alone", corrected + 'route = "slope"\n', '[define]\nf = "x"\n', True)):
        told = [(that, v if final or v != "refuted" else "undecided") for that, v in wanted]
        for change in ("", ', change = "1/64"'):
            d = growing([that for that, _ in told], top=top, change=change, rest=define)
            product(d, [left(), right()], 2, "1/2")
            judged(f"gains, {name} {change}", d.found("region", told, PLAIN, "xy"))
    entries = one([left(), right()], 2, "1/2")
    below("gains", entries, {"gain": "1/2", "routes slope gain": "1/2", "requirements 0 value": "1/2"})
    more = growing()
    product(more, [left(), right()], 2, "1/2")
    product(more, [left("1/4"), right("1/4")], 2, "1/4")
    reject("a product that serves no figure", more.found("region", [("gain < 1", "proved")], PLAIN, "xy"), "proof", "line 21 serves no later line")
    # around the left alone: q h = 1/4
    asked = [('"gain < 1/2"\nin = "left"', "refuted"), ("gain < 1/2", "refuted"), ('"gain < 1/2"\nin = "right"', "undecided")]
    d = growing([a for a, _ in asked], then='["right", "left"]')
    product(d, [left()], 2, "1/2", stances=["left"])
    judged("around one stance", d.found("region", asked, PLAIN, "xy"))


def off_the_target() -> None:
    """On balls only products at the targets count in any norm; on regions others too."""
    for kept in (True, False):
        for where, state, value in (("left", "x", "0"), ("left", "x", "1/2"), ("left", "y", "-1/2"), ("right", "x", hair("0", 1))):
            asked = [("gain < 1/2", "refuted" if kept or value == "0" else "undecided"), (f"gain < 1/2 + 1{STEP}", "undecided")]
            d = growing([a for a, _ in asked], kept=kept)
            on = [n for n, line in enumerate(d.proof, 1) if line["rule"] == ("graph-regions" if kept else "smaller-ball")]
            points = [left(), right()]
            points[LR.index(where)][state] = value
            product(d, points, 2, "1/2", uses=on)
            entries = d.found("region" if kept else None, asked, PLAIN, "xy")
            if not kept:
                entries = but(without(entries, *(n for n, line in enumerate(entries["proof"], 1) if line["rule"] in ("slope", "matrix"))), "results routes", {})
            judged(f"{'regions' if kept else 'balls'}, {where} at {state} {value}", entries)


def on_the_ground() -> None:
    """The flows of the stances on the way come last; where a stance may not last, an orbit says nothing."""
    good = grounded(regions(["bound(x) < 1/8"]).found("region", [("bound(x) < 1/8", "refuted")]))
    line = {"rule": "graph-orbit", "proves": "orbit", "uses": [13, 1, 2], "witness": {"bits": 24, "held": {}, "stances": LR, "start": ["0", "1"], "steps": UP}, "concludes": {"left:x": "0", "right:x": "1/8"}}
    last = len(good["proof"])
    good = but(good, "proof", [*good["proof"], line])
    judged("round on the ground", good)
    for uses, reason in (([13, 1], "no trajectory is proved"), ([13, 2], "no trajectory is proved"), ([13], "no trajectory is proved"), ([1, 13, 2], "an orbit of one state rests on"), ([1, 2], "an orbit of one state rests on"), ([1, 2, 13], "an orbit of one state rests on")):
        reject(f"round on the ground, by {uses}", but(good, f"proof {last} uses", uses), f"proof line {last + 1}", reason)
    for n in (last - 1, last):
        short = but(good, f"proof {n - 1} concludes lower", "0", "results set", None, "results stances left set", None, "results stances right set", None, "results routes", {})
        reject(f"round on the ground that may not last, {n}", short, "results", "[1].verdict: refuted is claimed, undecided was derived")
    slopes = next(n for n, x in enumerate(good["proof"]) if x["proves"] == "left>right:slopes")
    assert slopes
    d = {"rule": "graph-product", "proves": "slopes", "witness": {"bits": 24, "held": {}, "points": [{"x": "0", "p": "0"}, {"x": "0", "q": "0"}], "power": 1, "stances": LR}, "concludes": {"lower": "1/2"}}
    grows = grounded(regions(["gain < 1/2"]).found("region", [("gain < 1/2", "refuted")]))
    bare = but(without(grows, *(n for n, x in enumerate(grows["proof"], 1) if x["rule"] in ("stretch", "graph-entries", "graph-componentwise"))))
    count = len(bare["proof"])
    told = but(bare, "proof", [*bare["proof"], {**d, "uses": [13, 1, 2]}])
    judged("a product on the ground", told)
    for uses in ([13, 1], [13, 2], [13]):
        reject(f"a product on the ground, by {uses}", but(told, f"proof {count} uses", uses), f"proof line {count + 1}", "no trajectory is proved")


def of_no_stances() -> None:
    """Lines about stances, of a claim that names none."""
    text = 'format = 1\n[state]\nx = [-1, 1]\n[uncertain]\np = [0, 1]\n[target]\nx = 0\n[next]\nx = "x/2"\n[[require]]\nthat = "settles"\n'
    for rule, proves, witness in (("graph-regions", "invariant", {}), ("graph-balls", "invariant", {}), ("graph-bound", "bound[slope]", {"b": {}, "p": {}}), ("graph-orbit", "orbit", {"bits": 0, "held": {}, "stances": [], "start": [], "steps": []}),
                                  ("graph-periodic", "periodic", {"bits": 0, "held": {}, "stances": [], "start": [], "steps": []}), ("graph-product", "slopes", {"bits": 0, "held": {}, "points": [], "power": 1, "stances": []})):
        d = Steps(text)
        d.line(rule, proves, [], witness, **({"lower": "0"} if rule == "graph-product" else {}))
        reject(f"{rule} without stances", d.entries(None, [("settles", "undecided")], (), "x"), "proof line 1", f"{rule}: known between named stances only")


round_and_round()
led_apart()
figures()
at_the_edge()
in_balls()
held_targets()
several_states()
products()
gains()
off_the_target()
on_the_ground()
of_no_stances()


def test_cycle_boundaries() -> None:
    all_hold(CASES)
