"""Runs of several states and through stances at exact equality: still out, or led out (proofs/orbit.md (3), (4)).

The certificates hold no more than a ball, which is shown to be kept by nothing, and runs.
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import GONE, Draft, Entries, Questions, but, derivation
from tests.checker.test_boundaries import claim as claim_of_one
from tests.checker.test_cycle_boundaries import AT_REST
from tests.checker.test_cycle_boundaries import orbit as turned
from tests.checker.test_graph_boundaries import Steps, regions
from tests.checker.test_graph_boundaries import claim as claim_of_stances
from tests.checker.test_periodic_boundaries import FOUND
from tests.checker.test_periodic_boundaries import orbit as round_
from tests.checker.test_several_boundaries import BOX, STATED, UNWEIGHTED, WEIGHTS, Lines, claim, hair, region
from tests.checker.test_stance_boundaries import STILL as GROUND
from tests.stances import stance

CASES = Questions()
unit, accept, reject = CASES.unit, CASES.accept, CASES.reject


# tables of numbers: one line each reads better
# fmt: off

STILL, LEFT, OUT = "distance or steps: more than what the path shows", "a state that is not shown to be in the region", "the last state is not shown to be outside of the region"


def verdicts(name: str, entries: Entries) -> None:
    """Nothing else is derived of any requirement."""
    accept(name, entries)
    for n, r in enumerate(entries["results"]["requirements"]):
        for other in sorted({"proved", "refuted"} - {r["verdict"]}):
            reject(f"{name}: {n} {r['that']} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {r['verdict']} was derived")


def value(name: str, entries: Entries, number: int, lower: str | None, upper: str | None) -> None:
    """What is derived of a requirement, and no more."""
    at = f"results requirements {number} value"
    full = but(entries, at, {"lower": lower, "upper": upper})
    if lower or upper:
        accept(f"{name}: value of {number}", full)
    for end, text, by in (("lower", lower, 1), ("upper", upper, -1)):
        reject(f"{name}: {end} of {number}", but(full, f"{at} {end}", "0" if text is None else hair(text, by)), "results", f"{end}: {'nothing was derived' if text is None else 'more is claimed'}")


# errors from (1/4, -1/2): (a, b) -> (a/2 + b + p, a/2); from (1, 0) with p = 1/8: (5/8, 1/2), (15/16, 5/16), (29/32, 15/32)
MAP, TARGET, ENDS = ("1/4 + (x - 1/4)/2 + (y + 1/2) + p", "(x - 1/4)/2 - 1/2"), ("1/4", "-1/2"), ('[-2, "5/4"]', "[-2, 2]")
UP = {"p": "1/8"}


def plain(asked: Sequence[str], **other: Any) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 ball."""
    d = Lines(claim(*other.pop("map", MAP), other.pop("ends", ENDS), target=other.pop("target", TARGET), asked=asked, rest=STATED, **other))
    norm = d.metric("box", WEIGHTS, UNWEIGHTED)
    about = [d.range("target[x]", "1/4", "1/4"), d.range("target[y]", "-1/2", "-1/2")]
    d.theorem("smaller-ball", "ball", [norm, *about], radius="1/2")
    return d


def run(d: Draft, kind: str, state: str, start: str, steps: Sequence[dict[str, str]], far: str = "", least: str = "", held: dict[str, str] | None = None, bits: int = 0, stances: Sequence[str] = (), uses: Sequence[int] = (), at: int | None = None) -> int:
    shown = {"distance": far, "steps": str(len(steps))} if kind == "path" else {}
    witness: dict[str, Any] = ({} if at is None else {"at": at}) | {"bits": bits, "held": held or {}, "start": [start], "steps": list(steps)} | ({"stances": list(stances)} if stances else {})
    return d.line(f"graph-{kind}" if stances else kind, f"{kind}[{state}]", uses, witness, **{"push" if kind == "pushed" else "from": least or start}, **shown)


PATHS = [
    ("steps(x, 1, 1/2) <= 2", "refuted"), ("steps(x, 1, 1/2) < 3", "refuted"), ("steps(x, 1, 1/2) <= 3", "undecided"), ("steps(x, 1, 1/2) < 4", "undecided"), (f"steps(x, {hair('1', -1)}, 1/2) <= 2", "undecided"), ("steps(x, 2, 1/2) <= 2", "refuted"),
    ("steps(x, 1, 15/16) <= 2", "undecided"), (f"steps(x, 1, {hair('15/16', -1)}) <= 2", "refuted"), ("steps(y, 1, 1/2) <= 2", "undecided"), ("radius(x) >= 1", "undecided"),
]


def paths() -> None:
    d = plain([that for that, _ in PATHS])
    run(d, "path", "x", "1", [UP, UP], "15/16")
    entries = d.found(None, PATHS, BOX)
    verdicts("path", entries)
    value("path", entries, 0, "3", None)
    value("path", entries, 8, None, None)
    shrunk = plain(["steps(x, 1, 1/2) <= 2"], top="shrink = true")
    run(shrunk, "path", "x", "1", [UP, UP], "15/16")
    accept("path, shrink", shrunk.found(None, PATHS[:1], BOX))
    for n, (key, text, reason) in enumerate((
        ("concludes distance", hair("15/16", 1), STILL), ("concludes steps", "3", STILL), ("concludes steps", "1", STILL), ("concludes from", hair("1", -1), "from: less than the error at the start"),
        ("witness start", [hair("1", 1)], "from: less than the error"), ("witness start", ["1", "0"], "start: a list of 1"), ("witness start", {"x": "1", "y": "0"}, "start: a list of 1"), ("witness start", [], "start: a list of 1"), ("witness start", [hair("1", -1)], STILL),
        ("witness start", ["-1"], STILL), ("witness steps", [UP], STILL), ("witness steps", [UP, {"p": hair("1/8", 1)}], "at.p: outside the range"), ("witness steps", [UP, {"p": hair("-1/8", -1)}], "at.p: outside the range"), ("witness steps", [UP, {}], "steps: one value for each quantity"), ("witness steps", [UP, {**UP, "y": "0"}], "steps: one value"),
        ("witness steps", [UP, {"p": hair("1/8", -1)}], STILL), ("witness steps", "up", "steps: a list of up to 1000"), ("witness steps", [UP, 1], "steps: one value"), ("witness held", UP, "held: one value"), ("witness held", [], "held: one value"), ("witness bits", 23, "bits: 0 for exact rationals"),
        ("proves", "path", "path: of one of the states x, y"), ("proves", "path[z]", "path: of one of the states"), ("proves", "path[x,y]", "path: of one of"), ("proves", "escape[x]", "path: of one of"), ("proves", "path[y]", LEFT), ("proves", "path[x]\n", "path: of one of"),
        ("uses", [4], "path: rests on flows of stances"), ("uses", [1], "path: rests on flows of stances"), ("rule", "graph-path", "witness: the keys of graph-path"),
    )):
        changed = but(entries, f"proof 4 {key}", text)
        if key == "proves" and text == "path[y]":
            changed = but(changed, "proof 4 witness start", ["1"])
        reject(f"path, {n} {key}", changed, "proof line 5", reason)
    reject("path from beyond the upper end", but(entries, "proof 4 witness start", [hair("1", 1)], "proof 4 concludes from", "2"), "proof line 5", LEFT)
    reject("no path", but(entries, "proof", entries["proof"][:4]), "results", "[1].verdict: refuted is claimed, undecided was derived")
    reject("path from below, nearer than it is", but(entries, "proof 4 witness start", ["-1"], "proof 4 concludes from", hair("1", -1)), "proof line 5", "from: less than the error at the start")
    # to the other side: from the lower end of x, with p = 1/8 to (-1, -9/8) and with -1/8 to the errors (-7/4, -1/2)
    for start, steps, far, good in (("-9/4", [UP], "1", LEFT), (hair("-9/4", -1), [UP], "0", LEFT)):
        low = plain(["steps(x, 9/4, 1/2) <= 1"], map=(MAP[0], "(x - 1/4)/9 - 1/2"))
        run(low, "path", "x", start, steps, far, start[1:])
        found = low.found(None, [("steps(x, 9/4, 1/2) <= 1", "refuted")], BOX)
        if start == "-9/4":
            accept("path from the lower end", found)
        else:
            reject("path from below the lower end", found, "proof line 5", good)
    none = plain(["steps(y, 5/4, 1/2) < 1", "steps(y, 5/4, 1/2) <= 0", "steps(y, 5/4, 1/2) <= 1"])
    run(none, "path", "y", "-5/4", [], "5/4", "5/4")
    verdicts("path of no steps", none.found(None, [("steps(y, 5/4, 1/2) < 1", "refuted"), ("steps(y, 5/4, 1/2) <= 0", "refuted"), ("steps(y, 5/4, 1/2) <= 1", "undecided")], BOX))
    # the longest counts; one that is shorter serves nothing
    two = plain(["steps(x, 1, 1/2) <= 2"])
    run(two, "path", "x", "1", [UP, UP], "15/16")
    run(two, "path", "x", "1", [UP], "5/8")
    idle = two.found(None, [("steps(x, 1, 1/2) <= 2", "refuted")], BOX)
    reject("a path that is shorter", idle, "proof", "line 6 serves no later line and no result")
    reject("a path that is shorter, first", but(idle, "proof", [*idle["proof"][:4], idle["proof"][5], idle["proof"][4]]), "proof", "line 5 serves no later line and no result")
    for count, reason in ((1000, ""), (1001, "steps: a list of up to 1000")):
        long = plain(["steps(x, 1, 1/2) <= 2"], map=("x + 0*p", "y"))
        run(long, "path", "x", "1", [UP] * count, "1")
        found = long.found(None, [("steps(x, 1, 1/2) <= 2", "refuted")], BOX)
        if reason:
            reject("path of 1001 steps", found, "proof line 5", reason)
        else:
            accept("path of 1000 steps", found)


def rounded() -> None:
    """A third lies between two units of 2**-24: of the distance the nearer end counts, of the region the farther one."""
    third = Q((1 << 24) // 3, 1 << 24)
    unit_ = Q(1, 1 << 24)
    for start, far, ends, name in (("1", str(1 - unit_), '[-2, 2]', "up"), ("-1", str(1 - unit_), '[-2, 2]', "down"), ("1", "0", f'[-2, "{third + 1 + unit_}"]', "the upper end"), ("1", "0", f'[-2, "{hair(str(third + 1 + unit_), -1)}"]', "beyond the upper end"),
                                   ("-1", "0", f'["{third - 1}", 2]', "the lower end"), ("-1", "0", f'["{hair(str(third - 1), 1)}", 2]', "beyond the lower end")):
        d = Lines(claim("x", "y", (ends, "[-1, 1]"), target=("1/3", "0"), asked=["steps(x, 1, 1/2) < 1"], rest=STATED))
        norm = d.metric("box", WEIGHTS, UNWEIGHTED)
        d.theorem("smaller-ball", "ball", [norm, d.range("target[x]", "1/3", "1/3"), d.range("target[y]", "0", "0")], radius="0")
        run(d, "path", "x", start, [], far, "1", bits=24)
        entries = d.found(None, [("steps(x, 1, 1/2) < 1", "refuted" if far != "0" else "undecided")], BOX)
        if name.startswith("beyond"):
            reject(f"rounded, {name}", entries, "proof line 5", LEFT)
        elif far == "0":
            reject(f"rounded, {name}", entries, "proof", "line 5 serves no later line")
        else:
            accept(f"rounded, {name}", entries)
            reject(f"rounded, {name}, farther", but(entries, "proof 4 concludes distance", hair(far, 1)), "proof line 5", STILL)
    # outside of the region only with all of the enclosure
    for start, ends, good in (("1", f'[-2, "{hair(str(third + 1), -1)}"]', True), ("1", f'[-2, "{third + 1}"]', False), ("-1", f'["{hair(str(third - 1 + unit_), 1)}", 2]', True), ("-1", f'["{third - 1 + unit_}", 2]', False)):
        d = Lines(claim("x", "y", (ends, "[-1, 1]"), target=("1/3", "0"), asked=["radius(x) > 1"], rest=STATED))
        norm = d.metric("box", WEIGHTS, UNWEIGHTED)
        d.theorem("smaller-ball", "ball", [norm, d.range("target[x]", "1/3", "1/3"), d.range("target[y]", "0", "0")], radius="0")
        run(d, "escape", "x", start, [], least="1", bits=24)
        entries = d.found(None, [("radius(x) > 1", "refuted")], BOX)
        if good:
            accept(f"rounded, out of {ends}", entries)
        else:
            reject(f"rounded, not out of {ends}", entries, "proof line 5", OUT)


NEAR = hair("7/8", 1)  # of y: the step leads x to 5/4, and a hair beyond it
ESCAPES = [
    (f"radius(y) > {NEAR}", "refuted"), (f"radius(y) >= {NEAR}", "undecided"), (f"radius(y) >= {hair(NEAR, 1)}", "refuted"), (f"radius(y) > {hair(NEAR, -1)}", "undecided"), ("radius(y) >= 2", "refuted"), ("radius(x) >= 9", "undecided"), ("radius >= 9", "undecided"),
    ("steps(y, 1, 1/2) <= 1", "undecided"), ("push(y) >= 9", "undecided"),
]


def escapes() -> None:
    d = plain([that for that, _ in ESCAPES])
    run(d, "escape", "y", NEAR, [UP])
    entries = d.found(None, ESCAPES, BOX)
    verdicts("escape", entries)
    value("escape", entries, 0, None, NEAR)
    value("escape", entries, 5, None, None)
    shrunk = plain([ESCAPES[0][0]], top="shrink = true")
    run(shrunk, "escape", "y", NEAR, [UP])
    accept("escape, shrink", shrunk.found(None, ESCAPES[:1], BOX))
    for n, (key, text, reason) in enumerate((
        ("concludes from", "7/8", "from: less than the error at the start"), ("witness start", ["7/8"], OUT), ("witness start", ["-7/8"], OUT), ("witness steps", [], OUT), ("witness steps", [{"p": "0"}], OUT), ("witness steps", [UP, UP], OUT), ("witness steps", [{"p": "1/4"}], "at.p: outside the range"),
        ("proves", "escape[x]", OUT), ("proves", "escape", "escape: of one of the states x, y"), ("uses", [4], "escape: rests on flows of stances"), ("concludes distance", "0", "concludes: the keys of escape"), ("witness start", [NEAR, "0"], "start: a list of 1"),
    )):
        reject(f"escape, {n} {key}", but(entries, f"proof 4 {key}", text), "proof line 5", reason)
    reject("no escape", but(entries, "proof", entries["proof"][:4]), "results", "[1].verdict: refuted is claimed, undecided was derived")
    # starts outside of the region; the ends belong to it
    for state, start, good in (("x", hair("1", 1), True), ("x", "1", False), ("x", hair("-9/4", -1), True), ("x", "-9/4", False), ("y", hair("5/2", 1), True), ("y", "5/2", False), ("y", hair("-3/2", -1), True), ("y", "-3/2", False)):
        size = start.removeprefix("-")
        out = plain([f"radius({state}) > {size}"])
        run(out, "escape", state, start, [], least=size)
        found = out.found(None, [(f"radius({state}) > {size}", "refuted")], BOX)
        if good:
            accept(f"{state} at {start}, outside", found)
        else:
            reject(f"{state} at {start}, inside", found, "proof line 5", OUT)
    # the nearest counts; one from farther out serves nothing
    two = plain(["radius(y) > 1"])
    run(two, "escape", "y", "1", [UP])
    run(two, "escape", "y", NEAR, [UP])
    idle = two.found(None, [("radius(y) > 1", "refuted")], BOX)
    reject("an escape from farther out", idle, "proof", "line 5 serves no later line and no result")
    reject("an escape from farther out, last", but(idle, "proof", [*idle["proof"][:4], idle["proof"][5], idle["proof"][4]]), "proof", "line 6 serves no later line and no result")


def held_values() -> None:
    """x* = h, which may change: a run is about one value of it. (x - h) -> (x - h)/2 + h: from h + 1 with h = 1/4 to 3/4 + h, 5/8 + h."""
    for held, far, reason in (("1/4", "5/8", ""), ("-1/4", "5/8", STILL), (hair("1/4", 1), "5/8", "at.h: outside the range")):
        d = Lines(claim("h + (x - h)/2 + h", "y/2", ("[-2, 2]", "[-1, 1]"), uncertain='h = { range = ["-1/4", "1/4"], held = true, change = "1/8" }', target=("h", "0"), asked=["steps(x, 1, 1/2) <= 2"], rest=STATED))
        norm = d.metric("box", WEIGHTS, UNWEIGHTED)
        d.theorem("smaller-ball", "ball", [norm, d.range("target[x]", "-1/4", "1/4"), d.range("target[y]", "0", "0")], radius="1/2")
        run(d, "path", "x", "1", [{}, {}], far, held={"h": held})
        entries = d.found(None, [("steps(x, 1, 1/2) <= 2", "refuted")], BOX)
        if reason:
            reject(f"held at {held}", entries, "proof line 5", reason)
        else:
            accept("held", entries)
            for n, (key, text, why) in enumerate((("held", {}, "held: one value for each held"), ("steps", [{"h": "1/4"}, {}], "steps: one value"), ("held", {"h": "1/4", "p": "0"}, "held: one value"))):
                reject(f"held, {n} {key}", but(entries, f"proof 4 witness {key}", text), "proof line 5", why)


def of_one() -> None:
    """v -> 2v + w on [-1, 1]: from 1/4 with w = 1/2 to the end, a hair more leads out."""
    near = hair("1/4", 1)
    asked = [(f"radius(v) > {near}", "refuted"), (f"radius(v) >= {near}", "undecided"), (f"radius >= {hair(near, 1)}", "refuted"), ("radius(v) >= 1/4", "undecided"), ("radius(v) > 3", "refuted")]
    d = Draft(claim_of_one("2*v + w", requires=[that for that, _ in asked]))
    d.theorem("smaller-ball", "ball", [d.range("target[v]", "0", "0")], radius="1/8")
    run(d, "escape", "v", near, [{"w": "1/2"}])
    entries = d.entries(None, asked)
    verdicts("of one state", entries)
    value("of one state", entries, 0, None, near)
    reject("of one state, to the end", but(entries, "proof 2 witness start", ["1/4"]), "proof line 3", OUT)
    reject("of one state, another path", but(entries, "proof 2 proves", "path[v]"), "proof line 3", "escape: of one of the states v")


# left: x -> 3/2 x + p from [-1, 1], target 0; right: x -> x/4 + q, target 1/8
STANCES, SPANS, AIMS = ("3*x/2 + p", "x/4 + q"), ("[-1, 1]", '["-13/8", "13/8"]'), ("0", "1/8")
P, QS = {"p": "1/8"}, {"q": "1/16"}


def two(asked: Sequence[str], spans: tuple[str, str] = SPANS, **other: Any) -> Steps:
    """Lines: 1 2 3 and 4 5 6, metric, target and ball of each stance."""
    d = Steps(claim_of_stances(*STANCES, spans, asked, AIMS, **other))
    for name, aim in zip(("left", "right"), AIMS, strict=True):
        norm = d.metric(name)
        d.theorem("smaller-ball", f"{name}:ball", [norm, d.range(f"{name}:target[x]", aim, aim)], radius="1/2")
    return d


def asked(*each: tuple[str, str, str]) -> tuple[list[str], list[tuple[str, str]]]:
    """Texts with the stance each is about, and the verdicts."""
    return [f'"{that}"\nin = "{where}"' if where else that for that, where, _ in each], [(that, verdict) for that, _, verdict in each]


def through_stances() -> None:
    """Left, 1 -> right, 13/8 (3/2 from its target) -> left, 15/32."""
    texts, wanted = asked(
        ("steps(x, 1, 1) <= 1", "", "refuted"), ("steps(x, 1, 1) <= 1", "left", "refuted"), ("steps(x, 1, 1) <= 1", "right", "undecided"), ("steps(x, 1, 1) <= 2", "", "undecided"), ("steps(x, 1, 3/2) <= 1", "", "undecided"), (f"steps(x, {hair('1', -1)}, 1) <= 1", "", "undecided"),
    )
    d = two(texts)
    run(d, "path", "x", "1", [P], "3/2", stances=["left", "right"])
    entries = d.found(None, wanted)
    verdicts("through stances", entries)
    value("through stances", entries, 1, "2", None)
    value("through stances", entries, 2, None, None)
    walk, some = "stances: a step that is not allowed", "stances: a list of 1 to 1001"
    for n, (key, text, reason) in enumerate((
        ("witness stances", ["left", "left"], walk), ("witness stances", ["left", "up"], walk), ("witness stances", ["up", "right"], some), ("witness stances", [["left"], "right"], some), ("witness stances", ["left", ["right"]], walk), ("witness stances", [], some), ("witness stances", "left", some), ("witness stances", ["left"], "steps: values for each step"),
        ("witness stances", ["left", "right", "left"], "steps: values for each step"), ("witness stances", ["right", "left"], "steps: one value for each quantity"), ("witness steps", [P, QS], "steps: values for each step"), ("witness steps", [QS], "steps: one value"), ("witness steps", "up", "steps: values for each step"), ("witness steps", [{"p": hair("1/8", 1)}], "at.p: outside the range"),
        ("witness start", [hair("1", 1)], "from: less than the error"), ("concludes distance", hair("3/2", 1), STILL), ("concludes from", hair("1", -1), "from: less than"), ("proves", "path[v]", "path: of one of the states x"), ("proves", "escape[x]", "path: of one of"), ("proves", "left:path[x]", "graph-path: about all stances"), ("proves", "left>right:path[x]", "graph-path: about all stances"),
        ("uses", [3], "path: rests on flows of stances"), ("rule", "path", "witness: the keys of path"), ("witness held", P, "held: one value"),
    )):
        reject(f"through stances, {n} {key}", but(entries, f"proof 6 {key}", text), "proof line 7", reason)
    back = two(["steps(x, 1, 1/4) <= 2"])
    run(back, "path", "x", "1", [P, QS], "15/32", stances=["left", "right", "left"])
    accept("through stances and back", back.found(None, [("steps(x, 1, 1/4) <= 2", "refuted")]))
    narrow = two(["steps(x, 1, 1) <= 1"], (SPANS[0], f'[-1, "{hair("13/8", -1)}"]'))
    run(narrow, "path", "x", "1", [P], "3/2", stances=["left", "right"])
    reject("through stances, out of the second region", narrow.found(None, [("steps(x, 1, 1) <= 1", "refuted")]), "proof line 7", LEFT)
    for count, good in ((1000, True), (1001, False)):
        long = two(["steps(x, 0, 1/16) < 1"], then=('"right"', '"left"'))
        names = ["left", "right"] * 501
        run(long, "path", "x", "0", ([{"p": "0"}, {"q": "0"}] * 501)[:count], "0", stances=names[: count + 1])
        found = long.found(None, [("steps(x, 0, 1/16) < 1", "undecided")])
        if good:
            reject("a thousand steps through stances", found, "proof", "line 7 serves no later line")
        else:
            reject("more than a thousand steps through stances", found, "proof line 7", "stances: a list of 1 to 1001")
    still = two(["steps(x, 3/2, 1) < 1"])
    run(still, "path", "x", "3/2", [], "3/2", stances=["right"])
    accept("no step", still.found(None, [("steps(x, 3/2, 1) < 1", "refuted")]))


def out_of_stances() -> None:
    """The right reaches to 3/2: from 11/12 on the left 3/2 is reached, and a hair more leads out of it."""
    near = hair("11/12", 1)
    texts, wanted = asked(
        (f"radius(x) > {near}", "", "refuted"), (f"radius(x) > {near}", "left", "refuted"), (f"radius(x) > {near}", "right", "undecided"), (f"radius(x) >= {near}", "", "undecided"), (f"radius(x) >= {hair(near, 1)}", "", "refuted"), ("radius(x) >= 11/12", "left", "undecided"), ("radius >= 9", "", "undecided"), ("push(x) >= 9", "", "undecided"),
    )
    spans = SPANS[0], '["-13/8", "3/2"]'
    d = two(texts, spans)
    run(d, "escape", "x", near, [P], stances=["left", "right"])
    entries = d.found(None, wanted)
    verdicts("out of stances", entries)
    value("out of stances", entries, 1, None, near)
    value("out of stances", entries, 2, None, None)
    for n, (key, text, reason) in enumerate((("witness start", ["11/12"], OUT), ("concludes from", "11/12", "from: less than"), ("witness steps", [{"p": "0"}], OUT), ("witness stances", ["left", "left"], "stances: a step that is not allowed"), ("uses", [3], "escape: rests on flows of stances"))):
        reject(f"out of stances, {n} {key}", but(entries, f"proof 6 {key}", text), "proof line 7", reason)
    both = two([f"radius(x) > {near}", '"radius(x) > 3"\nin = "right"'], spans)
    run(both, "escape", "x", near, [P], stances=["left", "right"])
    run(both, "escape", "x", "2", [], stances=["right"])
    accept("out of either stance", both.found(None, [(f"radius(x) > {near}", "refuted"), ("radius(x) > 3", "refuted")]))


def on_the_ground() -> None:
    """v stands still for 3 - v seconds, or for v - 3, which is less than nothing; then 2v + w."""
    for duration, ends in (("3 - v", ["2", "4"]), ("v - 3", ["-4", "-2"])):
        text = claim_of_one("2*X + w", requires=["radius(v) > 1/2"], rest=f'[dynamics]\nduration = "{duration}"\n[dynamics.start]\nX = "v"\n[dynamics.rate]\nX = "0*X"')
        d = Draft(text)
        d.theorem("smaller-ball", "ball", [d.range("target[v]", "0", "0")], radius="1/8")
        flow = d.line("trajectory", "flow", [], {**GROUND, "cuts": {"dynamics.duration": ends}}, error="0")
        run(d, "escape", "v", "1/2", [{"w": "1/2"}], bits=24, uses=[flow])
        entries = d.entries(None, [("radius(v) > 1/2", "refuted")])
        if duration == "v - 3":
            reject("on the ground, no time at all", entries, "proof line 4", "steps: a stance that is not shown to last")
            continue
        accept("on the ground", entries)
        reject("on the ground, without the flow", but(entries, "proof 3 uses", []), "proof line 4", "no trajectory is proved")
        reject("on the ground, the flow twice", but(entries, "proof 3 uses", [3, 3]), "proof line 4", "escape: rests on flows of stances")
    # the same of stances: each stands for a second
    texts, wanted = asked(("radius(x) > 15/16", "left", "refuted"))
    plain_ = two(texts, (SPANS[0], '["-13/8", "3/2"]'))
    run(plain_, "escape", "x", "15/16", [P], stances=["left", "right"], bits=24, uses=[])
    found = plain_.found(None, wanted)
    held = found["claim"]["text"].replace("3*x/2 + p", "3*X/2 + p").replace("[stance.left]", '[dynamics]\nduration = 1\n[dynamics.start]\nX = "x"\n[dynamics.rate]\nX = "0*X"\n[stance.left]')
    flows = [{"rule": "trajectory", "proves": f"{s}:flow", "uses": [], "witness": GROUND, "concludes": {"error": "0"}} for s in ("left", "right")]
    ground = but(found, "claim text", held, "proof", [*found["proof"][:6], flows[0], {**found["proof"][6], "uses": [7]}])
    accept("stances on the ground", ground)
    reject("stances on the ground, without the flow", but(ground, "proof 7 uses", []), "proof line 8", "no trajectory is proved")
    reject("stances on the ground, the flow of the other", but(ground, "proof 6", flows[1]), "proof line 8", "no trajectory is proved")


def kept_nearer() -> None:
    """x -> x/2 + 3y, y -> y/4: 7/8 in the largest of |x|, 8|y|, so a ball is kept; from y beyond 1/3 a step leads out of [-1, 1]."""
    near = hair("1/3", 1)
    for weights in ("[metric]\nweights = { y = 8 }", ""):
        stated = bool(weights)
        wanted = [("radius(y) >= 1/16", "proved"), ("radius(y) > 1/16", "undecided"), (f"radius(y) > {near}", "refuted"), ("radius(x) >= 1/2", "proved"), ("radius >= 1/2", "proved" if stated else "undecided"), ("radius > 1/2", "undecided")]
        for rule, widest in (("smaller-ball", near), ("largest-ball", "1/8")):
            d = Lines(claim("x/2 + 3*y + 0*p", "y/4", asked=[that for that, _ in wanted], rest=weights))
            norm = d.metric("box", [["1", "0"], ["0", "8"]], [["1", "0"], ["0", "1/8"]])
            aims = [d.range("target[x]", "0", "0"), d.range("target[y]", "0", "0")]
            point = [d.point("target[x]", {}, "0")] if rule == "largest-ball" else []
            ball = d.theorem(rule, "ball", [norm, *aims, *point], radius="1/2", **({"outer": "1"} if point else {}))
            pair = d.theorem("slope", "slope", [d.matrix("slopes", "7/8", [ball]), d.matrix("misses", "0", [ball])], gain="7/8", residual="0")
            d.theorem("invariant-ball", "invariant", [ball, pair])
            run(d, "escape", "y", near, [{"p": "0"}])
            entries = d.found("smaller ball", wanted, {"kind": "box", "weights": {"x": "1", "y": "8"}})
            name = f"kept nearer, {rule}{', stated' if stated else ''}"
            verdicts(name, entries)
            value(name, entries, 0, "1/16", widest)
            value(name, entries, 4, "1/2", "1" if point else None)
            value(name, entries, 3, "1/2", "1" if point else None)
    one = Draft(claim_of_one("2*v + w", requires=["radius(v) > 3/2", "radius(v) > 1"]))
    one.theorem("largest-ball", "ball", [one.range("target[v]", "0", "0"), one.point("target[v]", {}, "0")], radius="1", outer="1")
    run(one, "escape", "v", "5/4", [])
    found = one.entries(None, [("radius(v) > 3/2", "refuted"), ("radius(v) > 1", "refuted")])
    value("the edge is nearer", found, 0, None, "1")


def pushes() -> None:
    """An orbit at rest in (7/20, 1/5), of [-1, 1]: x pushed by 13/20 is at the end, y by 4/5."""
    far, high = hair("13/20", 1), hair("4/5", 1)
    wanted = [(f"push(x) > {far}", "refuted"), (f"push(x) >= {far}", "undecided"), (f"push(x) > {hair(far, -1)}", "undecided"), (f"push(x) >= {hair(far, 1)}", "refuted"), ("push(x) >= 1/2", "proved"), ("push(y) > 3", "undecided"), ("push(x) > 13/20", "undecided")]
    for top in ("", "shrink = true\n"):
        found = [(that, "undecided" if top and v == "refuted" else v) for that, v in wanted]
        d = region([that for that, _ in found], top=top)
        round_(d, *FOUND["at rest, two steps"])
        run(d, "pushed", "x", far, [], at=1, uses=[19])
        entries = d.found("region", found, BOX)
        name = f"pushed{', shrink' if top else ''}"
        if not top:
            tight = entries
        verdicts(name, entries)
        value(name, entries, 0, "13/20", far)
        value(name, entries, 5, "4/5", None)
    why = "at: the rank of a state of the orbit, in the stance of the push"
    for n, (key, text, reason) in enumerate((
        ("witness start", ["13/20"], OUT), ("witness start", ["-13/20"], OUT), ("concludes push", "13/20", "push: less than the error at the start"), ("witness at", 2, why), ("witness at", -1, why), ("witness at", True, why), ("witness at", "0", why), ("witness at", GONE, "witness: the keys of pushed"),
        ("uses", [], "pushed: rests on flows of stances, and a push on the orbit"), ("uses", [8], why), ("uses", [19, 19], "pushed: rests on"), ("uses", [19, 18], "pushed: rests on"), ("proves", "pushed", "pushed: of one of the states"), ("proves", "pushed[y]", OUT), ("witness held", {"p": "0"}, "held: one value"), ("witness held", [], "held: other values than along the orbit"),
        ("witness steps", [{"p": "1/8", "q": "0"}], OUT),
    )):
        reject(f"pushed, {n} {key}", but(tight, f"proof 19 {key}", text), "proof line 20", reason)
    accept("pushed, the first state", but(tight, "proof 19 witness at", 0))
    reject("pushed, a path on an orbit", but(tight, "proof 19", {"rule": "path", "proves": "path[x]", "uses": [19], "witness": {"bits": 0, "held": {}, "start": ["1"], "steps": []}, "concludes": {"from": "1", "distance": "0", "steps": "0"}}), "proof line 20", "path: rests on flows of stances")
    # (0, 0) is within 1/2 of the orbit: y is within 1/4 of it. Pushed far out, what follows is out as well: 3 -> 3/2 + 1/20 + 1/8
    for state, start, steps, orbit, good in (("x", "3/2", [], "near", False), ("x", hair("3/2", 1), [], "near", True), ("x", "-3/2", [], "near", False), ("x", hair("-3/2", -1), [], "near", True), ("y", "5/4", [], "near", False), ("y", hair("5/4", 1), [], "near", True), ("y", hair("-5/4", -1), [], "near", True), ("y", "-5/4", [], "near", False),
                                             ("x", hair("-27/20", -1), [], "at rest", True), ("x", "-27/20", [], "at rest", False), ("y", high, [], "at rest", True), ("x", "53/20", [{"p": "1/8", "q": "1/16"}], "at rest", True), ("x", "1", [{"p": "1/8", "q": "1/16"}], "at rest", False)):
        d = region([f"push({state}) > 9"])
        round_(d, *FOUND[orbit])
        run(d, "pushed", state, start, steps, least=start.removeprefix("-"), at=0, uses=[19])
        entries = d.found("region", [(f"push({state}) > 9", "refuted")], BOX)
        name = f"pushed, {state} by {start} after {len(steps)} steps, {orbit}"
        if good:
            accept(name, entries)
        else:
            reject(name, entries, "proof line 20", OUT)


def pushed_in_stances() -> None:
    """An orbit at 3/20 on the left, of [-1, 1], and at 7/20 on the right, of [-13/8, 13/8]: pushed by 17/20 and 51/40."""
    left, right = hair("17/20", 1), hair("51/40", 1)
    texts, wanted = asked(
        (f"push(x) > {left}", "", "refuted"), (f"push(x) > {left}", "left", "refuted"), (f"push(x) >= {left}", "left", "undecided"), (f"push(x) >= {hair(left, 1)}", "left", "refuted"), ("push(x) >= 1/2", "", "proved"), (f"push(x) > {right}", "right", "refuted"), (f"push(x) >= {right}", "right", "undecided"),
    )
    for top in ("", "shrink = true\n"):
        d = regions(texts, top)
        turned(d, *AT_REST)
        run(d, "pushed", "x", left, [], at=0, uses=[28], stances=["left"])
        run(d, "pushed", "x", right, [], at=1, uses=[28], stances=["right"])
        found = [(that, "undecided" if top and v == "refuted" else v) for that, v in wanted]
        entries = d.found("region", found)
        verdicts(f"pushed in stances{', shrink' if top else ''}", entries)
        value(f"pushed in stances{', shrink' if top else ''}", entries, 0, "17/20", left)
        value(f"pushed in stances{', shrink' if top else ''}", entries, 5, "51/40", right)
        if not top:
            tight = entries
    why = "at: the rank of a state of the orbit, in the stance of the push"
    for n, (key, text, reason) in enumerate((
        ("witness start", ["17/20"], OUT), ("concludes push", "17/20", "push: less than"), ("witness at", 1, why), ("witness at", 2, why), ("witness stances", ["right"], why), ("witness stances", ["left", "right"], "steps: values for each step"), ("uses", [11], why), ("uses", [], "pushed: rests on"), ("proves", "left:pushed[x]", "graph-pushed: about all stances together"),
    )):
        reject(f"pushed in stances, {n} {key}", but(tight, f"proof 28 {key}", text), "proof line 29", reason)
    one = regions(['"push(x) > 9"\nin = "right"'])
    turned(one, *AT_REST)
    run(one, "pushed", "x", left, [], at=0, uses=[28], stances=["left"])
    reject("pushed in another stance", one.found("region", [("push(x) > 9", "refuted")]), "results", "[1].verdict: refuted is claimed, undecided was derived")


def held_while_pushed() -> None:
    """What is held along an orbit stays so after a push: h + (x - h)/2 + p rests at h + 1/4."""
    text = claim("h + (x - h)/2 + p", "y/2", uncertain='p = ["-1/8", "1/8"]\nh = { range = ["-1/8", "1/8"], held = true }', target=("h", "0"), asked=["push(x) > 9"], rest=STATED)
    d = Lines(text)
    norm = d.metric("box", WEIGHTS, UNWEIGHTED)
    aims = [d.range("target[x]", "-1/8", "1/8"), d.range("target[y]", "0", "0")]
    ball = d.theorem("smaller-ball", "ball", [norm, *aims], radius="1/2")
    pair = d.theorem("slope", "slope", [d.matrix("slopes", "1/2", [ball]), d.matrix("misses", "1/8", [ball])], gain="1/2", residual="1/8")
    kept = d.theorem("invariant-ball", "invariant", [ball, pair])
    orbit = round_(d, ("1/4", "0"), [{"p": "1/8"}], ("1/4", "0"), (kept, pair), {"h": "1/8"})
    run(d, "pushed", "x", hair("5/8", 1), [], held={"h": "1/8"}, at=0, uses=[orbit])
    entries = d.found("smaller ball", [("push(x) > 9", "refuted")], BOX)
    accept("held while pushed", entries)
    reject("another value while pushed", but(entries, "proof 9 witness held", {"h": "0"}), "proof line 10", "held: other values than along the orbit")
    reject("no value while pushed", but(entries, "proof 9 witness held", {}), "proof line 10", "held: one value for each held quantity")


@unit
def stances_that_take_their_time(checker: Any) -> None:
    """A duration of 0 or less is no stance."""
    text = stance(rates='y = "0.1"', start='y = "v/2"', duration="T - 1", define="", state="[-1, 1]", step="y", target="0", uncertain="T = [0, 2]", requires=("settles",))
    d = derivation(checker, text)
    a = checker.courses.arithmetic(0)
    one, nothing = (Q(1), Q(1)), (Q(0), Q(0))
    for timed, T, good in ((True, Q(1), False), (True, Q(1, 2), False), (True, Q(3, 2), True), (False, Q(1, 2), True)):
        m = checker.periodic.Pointwise(d, a, None, timed)
        assert set(m.spans) == {"T"}
        assert m.lasts([nothing], {"T": (T, T)}) == good, (timed, T)
    m = checker.periodic.Pointwise(d, a, None, True)
    assert not m.lasts([nothing], {"T": (Q(1), Q(2))}) and one


paths()
rounded()
escapes()
held_values()
of_one()
through_stances()
on_the_ground()
kept_nearer()
out_of_stances()
pushes()
pushed_in_stances()
held_while_pushed()


def test_run_boundaries() -> None:
    all_hold(CASES)
