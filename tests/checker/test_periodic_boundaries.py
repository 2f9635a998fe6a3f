"""Periodic orbits of two states at exact equality (proofs/several.md (6)), and what they refute."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import GONE, STEP, Questions, but
from tests.checker.test_several_boundaries import BOX, Lines, ball, claim, hair, in_region, region, without

CASES = Questions()
accept, reject = CASES.accept, CASES.reject


# tables of numbers: one line each reads better
# fmt: off

def orbit(d: Lines, start: Sequence[str], steps: Sequence[dict[str, str]], far: Sequence[str], uses: Sequence[int] = (8, 11), held: dict[str, str] | None = None, bits: int = 0) -> int:
    witness = {"bits": bits, "held": held or {}, "start": dict(zip("xy", start, strict=True)), "steps": list(steps)}
    return d.line("periodic", "periodic", uses, witness, **dict(zip("xy", far, strict=True)))


UP, DOWN = {"p": "1/8", "q": "1/16"}, {"p": "-1/8", "q": "-1/16"}
# x = x/2 + y/4 + 1/8, y = x/4 + y/4 + 1/16 at (7/20, 1/5), which is what comparison bounds;
# from 0 a step leads to (1/8, 1/16): 1/8 in the norm, so an orbit is within 1/8/(1 - 3/4) = 1/2 of 0;
# up and down again from 0: to (-3/64, -1/64), 3/64 in the norm, and 3/64/(1 - 9/16) = 3/28
FOUND: dict[str, tuple[tuple[str, str], list[dict[str, str]], tuple[str, str]]] = {
    "at rest": (("7/20", "1/5"), [UP], ("7/20", "1/5")),
    "below": (("-7/20", "-1/5"), [DOWN], ("7/20", "1/5")),
    "at rest, two steps": (("7/20", "1/5"), [UP, UP], ("7/20", "1/5")),
    "near": (("0", "0"), [UP], ("-1/2", "-1/4")),
    "up and down": (("-9/116", "-1/29"), [UP, DOWN], ("9/116", "1/29")),
    "up and down, near": (("0", "0"), [UP, DOWN], ("1/56", "1/112")),
    "at the edge": (("1", "1"), [UP], ("0", "1/2")),  # to (7/8, 9/16): 7/8 off in the norm, so within 7/2
}
FOUND["at the edge"] = (("1", "1"), [UP], (str(1 - Q(7, 2)), str(1 - Q(7, 4))))


def rounds() -> None:
    for name, (start, steps, far) in FOUND.items():
        d = region()
        orbit(d, start, steps, far)
        entries = d.found("region", [("settles", "proved")], BOX)
        accept(f"orbit {name}", entries)
        for s, x in zip("xy", far, strict=True):
            reject(f"orbit {name}, {s} farther", but(entries, f"proof 18 concludes {s}", hair(x, 1)), "proof line 19", f"{s}: more than what the orbit shows")
            reject(f"orbit {name}, no {s}", but(entries, f"proof 18 concludes {s}", GONE), "proof line 19", "concludes: a distance for each state")
        reject(f"orbit {name}, z", but(entries, "proof 18 concludes z", "-9"), "proof line 19", "concludes: a distance for each state")
    d = region()
    orbit(d, *FOUND["at rest"])
    good = d.found("region", [("settles", "proved")], BOX)
    for n, (key, value, reason) in enumerate((
        ("witness steps", [], "steps: a list of 1 to 1000"), ("witness steps", [UP] * 1001, "steps: a list of 1 to 1000"), ("witness steps", "up", "steps: a list of 1 to 1000"),
        ("witness steps", [{"p": "1/8"}], "steps: one value for each quantity that is not held, a step"), ("witness steps", [UP, {**UP, "z": "0"}], "steps: one value"), ("witness steps", [UP, 1], "steps: one value"),
        ("witness steps", [{"p": hair("1/8", 1), "q": "0"}], "at.p: outside the range"), ("witness held", {"p": "1/8"}, "held: one value for each held quantity"), ("witness held", [], "held: one value"),
        ("witness start", {"x": "7/20"}, "start: an error of each state"), ("witness start", ["7/20", "1/5"], "start: an error of each state"), ("witness start", {"x": hair("1", 1), "y": "0"}, "start: not shown to be in the set"),
        ("witness start", {"x": "0", "y": hair("-1", -1)}, "start: not shown to be in the set"), ("witness start", {"x": hair("-1", -1), "y": "0"}, "start: not shown to be in the set"), ("witness start", {"x": "0", "y": hair("1", 1)}, "start: not shown to be in the set"),
        ("uses", [8], "a periodic orbit rests on the invariant set, and the gain on it"), ("uses", [11, 8], "a periodic orbit rests"), ("uses", [5, 11], "a periodic orbit rests"), ("uses", [8, 11, 11], "a periodic orbit rests"), ("uses", [], "a periodic orbit rests"),
        ("proves", "orbit", "a periodic orbit rests on the invariant set"), ("witness bits", 23, "bits: 0 for exact rationals"),
    )):
        reject(f"orbit, {n} {key}", but(good, f"proof 18 {key}", value), "proof line 19", reason)
    long = region()
    orbit(long, ("7/20", "1/5"), [UP] * 1000, ("7/20", "1/5"))
    accept("orbit of a thousand steps", long.found("region", [("settles", "proved")], BOX))
    slack = but(good, "proof 10 concludes gain", hair("1", -1), "proof 11 concludes bound", str(Q(1, 8) / Q("1" + STEP)), "results requirements 0 verdict", "undecided")
    accept("orbit, a gain below 1", slack)
    one = but(good, "proof 10 concludes gain", "1")
    reject("orbit, a gain of 1", without(one, 12), "proof line 18", "the gain is not below 1, or refers to another set")


def figures() -> None:
    """What an orbit says of bounds: their lower ends, and refutations."""
    wanted = [
        ("bound(x) <= 7/20", "proved"), ("bound(x) < 7/20", "refuted"), (f"bound(x) < 7/20 + 1{STEP}", "proved"), (f"bound(y) <= 1/5 - 1{STEP}", "refuted"), ("bound(y) <= 1/5", "proved"), ("sharp_bound(x) <= 0.1", "refuted"), ("settles", "proved"),
    ]
    for top, name in (("", "orbit"), ("shrink = true\n", "orbit, shrink")):
        verdicts = [(that, "undecided" if top and v == "refuted" else v) for that, v in wanted]
        d = region([that for that, _ in verdicts], top=top)
        orbit(d, *FOUND["at rest"])
        orbit(d, *FOUND["up and down"])  # serves no figure: less far
        entries = without(d.found("region", verdicts, BOX), 20)
        accept(f"{name}: figures", entries)
        for n, (that, v) in enumerate(verdicts):
            for other in sorted({"proved", "refuted"} - {v}):
                reject(f"{name}: {that} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {v} was derived")
        for path, (low, high) in {"states x bound": ("7/20", "7/20"), "states y bound": ("1/5", "1/5"), "requirements 0 value": ("7/20", "7/20")}.items():
            full = but(entries, f"results {path}", {"lower": low, "upper": high})
            accept(f"{name}: {path}", full)
            reject(f"{name}: {path} more", but(full, f"results {path} lower", hair(low, 1)), "results", "lower: more is claimed")
    two = region()
    orbit(two, *FOUND["at rest"])
    orbit(two, *FOUND["up and down"])
    reject("an orbit that serves no figure", two.found("region", [("settles", "proved")], BOX), "proof", "line 20 serves no later line and no result")


def edges() -> None:
    """x = x/2 + 1/2 rests at the end of its range: it does not settle inside; a hair inside it might."""
    for p, verdict in (("1/2", "refuted"), (hair("1/2", -1), "proved")):
        d = Lines(claim("x/2 + p", "y/4", uncertain=f'p = ["-{p}", "{p}"]', rest="[metric]\nweights = { y = 2 }"))
        in_region(d)
        entries = d.found("region", [("settles", verdict)], BOX)
        entries = but(entries, "proof 5 concludes", {"lower": str(-Q(1, 2) - Q(p)), "upper": str(Q(1, 2) + Q(p))}, "proof 6 concludes", {"lower": "-1/4", "upper": "1/4"}, "proof 8 concludes norm", "1/2",
                      "proof 9 concludes norm", p, "proof 10 concludes", {"gain": "1/2", "residual": p}, "proof 11 concludes bound", str(2 * Q(p)))
        entries = without(entries, 13, 14, 15, 16, 17)
        line = {"rule": "periodic", "proves": "periodic", "uses": [8, 11], "witness": {"bits": 0, "held": {}, "start": {"x": str(2 * Q(p)), "y": "0"}, "steps": [{"p": p}]}, "concludes": {"x": str(2 * Q(p)), "y": "0"}}
        entries = but(entries, "proof", [*entries["proof"], line])
        accept(f"at the edge: {verdict}", entries)
        for other in sorted({"proved", "refuted"} - {verdict}):
            reject(f"at the edge: {verdict}, {other}", but(entries, "results requirements 0 verdict", other), "results", f"[1].verdict: {other} is claimed, {verdict} was derived")


def on_ball() -> None:
    """The start of an orbit has to lie in the ball itself: |2x + y| and |2x - y| at most 2."""
    for start, good in ((("1/2", "1"), True), (("1/2", hair("1", 1)), False), (("-1/2", "1"), True), (("1", "0"), True), ((hair("1", 1), "0"), False)):
        d = ball()
        orbit(d, start, [{"p": "1/8"}], ("-99", "-99"), (13, 10))
        entries = without(d.found("ball", [("settles", "proved")], {"kind": "polytope", "matrix": [["2", "1"], ["2", "-1"]]}), 11, 12)
        if good:
            accept(f"orbit from {start} in the ball", entries)
        else:
            reject(f"orbit from {start} out of the ball", entries, "proof line 18", "start: not shown to be in the set")


def held_targets() -> None:
    """The target is h, and x leads to h + (x - h)/2 + p: at rest at h + 1/4, whatever h."""
    text = claim("h + (x - h)/2 + p", "y/2", uncertain='p = ["-1/8", "1/8"]\nh = { range = ["-1/8", "1/8"], held = true }', target=("h", "0"))
    for h in ("1/8", "-1/8", "0"):
        d = Lines(text)
        d.metric("box", [["1", "0"], ["0", "1"]], [["1", "0"], ["0", "1"]])
        d.range("target[x]", "-1/8", "1/8")
        d.range("target[y]", "0", "0")
        d.theorem("smaller-ball", "ball", [1, 2, 3], radius="7/8")
        d.range("image[x]", "-13/16", "13/16")
        d.range("image[y]", "-1/2", "1/2")
        d.theorem("invariant-region", "invariant", [1, 2, 3, 5, 6])
        d.matrix("slopes", "1/2", [7])
        d.matrix("misses", "1/8", [7])
        d.theorem("slope", "slope", [8, 9], gain="1/2", residual="1/8")
        d.theorem("ultimate-bound", "bound[slope]", [7, 10], bound="1/4")
        sign = "-" if h == "1/8" else ""
        orbit(d, (f"{sign}1/4", "0"), [{"p": f"{sign}1/8"}], ("1/4", "0"), (7, 10), held={"h": h})
        entries = d.found("region", [("settles", "proved")], {"kind": "box", "weights": {"x": "1", "y": "1"}})
        accept(f"about the target at {h}", entries)
        reject(f"about the target at {h}, farther", but(entries, "proof 11 concludes x", hair("1/4", 1)), "proof line 12", "x: more than what the orbit shows")
        reject(f"about the target at {h}, h anew", but(entries, "proof 11 witness steps", [{"p": "1/8", "h": h}]), "proof line 12", "steps: one value")


def corners() -> None:
    """Starts at the lower ends, a gain of 0, rounding, two orbits that serve a state each, an orbit without a bound."""
    d = region()
    orbit(d, ("-1", "-1"), [DOWN], (str(1 - Q(7, 2)), str(1 - Q(7, 4))))
    accept("orbit from the lower ends", d.found("region", [("settles", "proved")], BOX))
    still = Lines(claim("p", "q", uncertain='p = ["-1/8", "1/8"]\nq = ["-1/16", "1/16"]', rest="[metric]\nweights = { y = 2 }"))
    in_region(still)
    entries = still.found("region", [("settles", "proved")], BOX)
    flat = but(entries, "proof 5 concludes", {"lower": "-1/8", "upper": "1/8"}, "proof 6 concludes", {"lower": "-1/16", "upper": "1/16"}, "proof 8 concludes norm", "0", "proof 10 concludes gain", "0", "proof 11 concludes bound", "1/8")
    flat = without(flat, 13, 14, 15, 16, 17)
    line = {"rule": "periodic", "proves": "periodic", "uses": [8, 11], "witness": {"bits": 0, "held": {}, "start": {"x": "1/8", "y": "1/16"}, "steps": [UP]}, "concludes": {"x": "1/8", "y": "1/16"}}
    accept("orbit, a gain of 0", but(flat, "proof", [*flat["proof"], line]))
    # a tenth lies between two units of 2**-24: the farther end counts
    tenth = Q(-(-(1 << 24) // 10), 1 << 24)
    d = region()
    orbit(d, ("0", "0"), [{"p": "1/10", "q": "0"}], (str(-4 * tenth), str(-2 * tenth)), bits=24)
    rough = d.found("region", [("settles", "proved")], BOX)
    accept("orbit, rounded", rough)
    for s, x in (("x", -4 * tenth), ("y", -2 * tenth)):
        reject(f"orbit, rounded: {s}", but(rough, f"proof 18 concludes {s}", hair(str(x), 1)), "proof line 19", f"{s}: more than what the orbit shows")
    d = region(["bound(x) < 7/20", "bound(y) < 1/5"])
    orbit(d, ("7/20", "1/5"), [UP], ("7/20", "-1"))
    orbit(d, ("7/20", "1/5"), [UP], ("-1", "1/5"))
    accept("an orbit each", d.found("region", [("bound(x) < 7/20", "refuted"), ("bound(y) < 1/5", "refuted")], BOX))
    d = region(["bound(x) <= 1/8"])
    orbit(d, ("7/20", "1/5"), [UP], ("7/20", "1/5"))
    bare = without(d.found("region", [("bound(x) <= 1/8", "refuted")], BOX), 12, 13, 14, 15)
    accept("an orbit without a bound", but(bare, "results states x bound", {"lower": "7/20", "upper": None}))


def points() -> None:
    """A point of a ball refutes only where the claim fixes its norm; where no state occurs, and on the region, always."""
    asked = {"value(x) < 1/2": ("refuted", "undecided"), "value(p) < 1/8": ("refuted", "refuted")}
    d = ball(list(asked))
    d.range("require[1]", "-1", "1", [6])
    d.point("require[1]", {"x": "1"}, "1", uses=[6])
    d.range("require[2]", "-1/8", "1/8", [6])
    d.point("require[2]", {"p": "1/8"}, "1/8", uses=[6])
    entries = d.found("ball", [(that, v[1]) for that, v in asked.items()], {"kind": "polytope", "matrix": [["2", "1"], ["2", "-1"]]})
    entries = without(entries, 11, 12)
    accept("points of a ball", entries)
    reject("points of a ball: x refuted", but(entries, "results requirements 0 verdict", "refuted"), "results", "[1].verdict: refuted is claimed, undecided was derived")
    for rest in ("", "[metric]\nweights = { y = 2 }"):
        d = region(list(asked), rest=rest)
        d.range("require[1]", "-1", "1", [8])
        d.point("require[1]", {"x": "1"}, "1", uses=[8])
        d.range("require[2]", "-1/8", "1/8", [8])
        d.point("require[2]", {"p": "1/8"}, "1/8", uses=[8])
        accept(f"points of a region, {rest[:8]!r}", d.found("region", [(that, "refuted") for that in asked], BOX))


rounds()
corners()
points()
figures()
edges()
on_ball()
held_targets()


def test_periodic_boundaries() -> None:
    all_hold(CASES)
