"""Pushes within a stance at exact equality: what they follow and lead on to, and what they leave of the sets.

As in `test_several_boundaries.py`, whose way of writing certificates this shares.
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from types import SimpleNamespace
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import STEP, Entries, Questions, but, derivation, refuses
from tests.checker.test_graph_boundaries import STILL, regions
from tests.checker.test_several_boundaries import BOX, hair, rounding_lines
from tests.checker.test_stance_boundaries import shown

CASES = Questions()
unit, accept, reject = CASES.unit, CASES.accept, CASES.reject

# fmt: off



def judged(name: str, entries: Entries) -> None:
    """Nothing else is derived of any requirement."""
    accept(name, entries)
    for n, r in enumerate(entries["results"]["requirements"]):
        for other in sorted({"proved", "refuted"} - {r["verdict"]}):
            reject(f"{name}: {n} {r['that']} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {r['verdict']} was derived")


# what next states hold of the continuous ones, and what these lead on to: a -> b -> c, d and e back and forth, f damped

RATES = 'a = "0.1*t"\nb = "a + 1"\nc = "T*b + gust"\nd = "e"\ne = "(9 + t)*d + k"\nf = "-2*f"\nh = "f - h"\ni = "j"\nj = "-j"'
STARTS = 'a = "u"\nb = "v"\nc = 0\nd = "u - v"\ne = "v"\nf = "u"\nh = 0\ni = "u"\nj = "v"'


def claim(u: str, v: str, w: str = "b") -> str:
    return (f'format = 1\n[state]\nu = [-1, 1]\nv = [-1, 1]\nw = [-1, 1]\n[uncertain]\nT = [1, 2]\nk = [0, 1]\ngust = {{ range = [-1, 1], within = true }}\n'
            f'[dynamics]\nduration = "T"\n[dynamics.start]\n{STARTS}\n[dynamics.rate]\n{RATES}\n[next]\nu = "{u}"\nv = "{v}"\nw = "{w}"\n[target]\nu = 0\nv = 0\nw = 0\n')


ONE, EARLY = "(1,T,k)", "(((2*s)-1),T,k)"
TO_D = f"((flow[44]{ONE}*flow[55]{EARLY})-(flow[45]{ONE}*flow[54]{EARLY}))"
TO_E = f"((flow[54]{ONE}*flow[55]{EARLY})-(flow[55]{ONE}*flow[54]{EARLY}))"
BY_E_TO_D = f"((flow[45]{ONE}*flow[44]{EARLY})-(flow[44]{ONE}*flow[45]{EARLY}))"
ALONE = "(flow[{0}{0}](1,T,k)/flow[{0}{0}](((2*s)-1),T,k))"
SINGLE = ALONE.format(3)
GROWN: list[tuple[str, str, str]] = [
    (claim("d", "e"), "growth[u,u]", TO_D), (claim("d", "e"), "growth[v,u]", TO_E), (claim("d", "e"), "growth[u,v]", BY_E_TO_D),
    (claim("d", "e"), "growth[w,u]", "0"), (claim("d", "d"), "growth[v,u]", TO_D), (claim("k + d - u", "e"), "growth[u,u]", TO_D),
    (claim("d", "3*e - d/2 + b"), "growth[v,u]", f"((-1/2*{TO_D})+(3*{TO_E}))"), (claim("d", "(k + t)*e + b"), "growth[v,u]", f"((k+T)*{TO_E})"), (claim("d", "c*e"), "growth[w,u]", "0"),
    (claim("c", "d/k"), "growth[u,u]", SINGLE), (claim("c", "d/k"), "growth[v,u]", "0"), (claim("c", "a*c", "d"), "growth[w,u]", "0"),
    (claim("c", "b + c + c*v"), "growth[v,u]", f"((1+v)*{SINGLE})"), (claim("b", "c"), "growth[u,u]", f"((flow[22]{ONE}*flow[33]{EARLY})-(flow[23]{ONE}*flow[32]{EARLY}))"),
    (claim("b", "c"), "growth[v,u]", f"((flow[32]{ONE}*flow[33]{EARLY})-(flow[33]{ONE}*flow[32]{EARLY}))"), (claim("h", "c"), "growth[u,u]", ALONE.format(7)),
]  # fmt: skip
BARE, DAMPED = "a push within the stance is about a state that is a continuous one at touchdown", "a push within the stance is followed for two continuous states without damping"
BENT = "a push within the stance: next {} is not linear in the continuous states"
UNGROWN: list[tuple[str, str, str]] = [
    (claim("d + e", "e"), "growth[u,u]", BARE), (claim("2*d", "e"), "growth[u,u]", BARE), (claim("d + 0*e", "e"), "growth[u,u]", BARE), (claim("u", "e"), "growth[v,u]", BARE), (claim("-d", "e"), "growth[v,u]", BARE),
    (claim("a", "e"), "growth[u,u]", DAMPED), (claim("f", "e"), "growth[u,u]", DAMPED), (claim("j", "e"), "growth[u,u]", DAMPED), (claim("d*e", "e"), "growth[u,u]", BENT.format("u")), (claim("d", "d*e"), "growth[v,u]", BENT.format("v")), (claim("d", "d**2"), "growth[v,u]", BENT.format("v")),
    (claim("d", "0*log(2 + e) + b"), "growth[v,u]", BENT.format("v")), (claim("d", "c/(2 + e)"), "growth[v,u]", BENT.format("v")), (claim("d", "sqrt(4 + d)"), "growth[v,u]", BENT.format("v")), (claim("d", "abs(e)"), "growth[v,u]", "a time rate through abs"),
    (claim("d", "e + gust"), "growth[v,z]", "growth[v,z] is no obligation"), (claim("d", "e"), "growth[u]", "growth[u] is no obligation"), (claim("d", "e"), "growth@1[u,u]", "growth@1[u,u] is no obligation"), (claim("d", "gust*e"), "growth[v,u]", "a signal within the stance stands outside the rates"),
]  # fmt: skip


@unit
def what_pushes_grow_to(checker: Any) -> None:
    region = checker.derive.Domain(False, Q(0), (Q(0), Q(0)))
    for text, name, expected in GROWN:
        d = derivation(checker, text)
        m = d.meaning(name, region)
        assert shown(d.terms, m.root) == expected and (m.by, m.on_set) == ("", True), (text, name, shown(d.terms, m.root))
        assert ("phase(t)" in {v.name for v in m.variables}) == (expected != "0")
    for text, name, reason in UNGROWN:
        with refuses(checker.calculus.Unprovable, reason):
            derivation(checker, text).meaning(name, region)
    d, ball = derivation(checker, claim("c", "b + c*(1 + v)")), checker.derive.Domain(True, Q(1, 4), (Q(0), Q(0)), targets=((Q(0), Q(0)),) * 3)
    assert [v.cells for v in d.meaning("growth[v,u]", ball).variables if v.name == "v"] == [((Q(-1, 4), Q(1, 4)),)]


# what they leave: of regions state by state, of balls in the norm


def left_for(checker: Any, grown: Sequence[tuple[str, str]] | None, kind: str = "region", whole: bool = True, edges: Sequence[str | None] = ("1", "2"), bounds: Sequence[str | None] = ("1/4", "1/2"),
             radius: str | None = "1", within: str | None = "1/4", rows: tuple[tuple[int, ...], ...] = ((1, 0), (0, 1)), form: str = "polytope", inverse: Any = None) -> Q | None:
    def number(text: str | None) -> Q | None:
        return None if text is None else Q(text)

    span, states = checker.results.Span, ("x", "y")
    norm = checker.matrices.Metric(form, tuple(tuple(map(Q, r)) for r in rows), inverse or ((Q(1), Q(0)), (Q(0), Q(1))))
    one = SimpleNamespace(whole=whole, kind=kind, states=states, metric=norm, edges={s: span(number(e), None) for s, e in zip(states, edges, strict=True)},
                          bounds={s: Q(b) for s, b in zip(states, bounds, strict=True) if b is not None}, radius=span(number(radius), None), within=lambda: number(within))
    found = checker.outcomes.SeveralResults.left_for(one, None if grown is None else [(Q(a), Q(b)) for a, b in grown])
    assert found is None or isinstance(found, Q)
    return found


@unit
def what_pushes_leave(checker: Any) -> None:
    def left(*grown: tuple[str, str], **more: Any) -> Q | None:
        return left_for(checker, grown, **more)

    assert left(("0", "1"), ("0", "1")) == Q(3, 4) and left(("0", "1"), ("0", "4")) == Q(3, 8) and left(("-2", "1"), ("0", "4")) == Q(3, 8) and left(("-3", "1"), ("0", "4")) == Q(1, 4) and left(("0", "1"), ("-8", "4")) == Q(3, 16)
    assert left(("0", "0"), ("-1", "1")) == Q(3, 2) and left(("0", "0"), ("0", "0")) is None and left(("0", "1"), ("0", "0"), bounds=("1/4", None)) == Q(3, 4) and left(("0", "1"), ("0", "1"), bounds=("1/4", None)) is None
    assert left(("0", "1"), ("0", "1"), edges=("1", None)) is None and left(("0", "1"), ("0", "1"), edges=("1/4", "2")) is None and left(("0", "1"), ("0", "1"), edges=("1/8", "2")) is None and left(("0", "1"), ("0", "1"), whole=False) is None
    assert left_for(checker, None) is None and left_for(checker, None, kind="ball") is None
    ball = {"kind": "ball"}
    assert left(("0", "1"), ("0", "1"), **ball) == Q(3, 4) and left(("0", "1"), ("-3", "1"), **ball) == Q(1, 4) and left(("0", "1"), ("0", "1"), **ball, radius="1/4") is None and left(("0", "1"), ("0", "1"), **ball, radius="1/8") is None
    assert left(("0", "1"), ("0", "1"), **ball, radius=None) is None and left(("0", "1"), ("0", "1"), **ball, within=None) is None and left(("0", "0"), ("0", "0"), **ball) is None and left(("0", "1"), ("0", "1"), **ball, whole=False) is None
    # at corners of the box they lie in, signs and all: x - y of what grows alike is small
    slanted = {"kind": "smaller ball", "rows": ((1, -1), (0, 1))}
    assert left(("1", "2"), ("1", "2"), **slanted) == Q(3, 8) and left(("3", "4"), ("0", "1"), **slanted) == Q(3, 16) and left(("-4", "-3"), ("0", "1"), **slanted) == Q(3, 20) and left(("0", "1"), ("3", "4"), **slanted) == Q(3, 16)
    found = left(("3", "3"), ("4", "4"), **ball, form="ellipsoid")
    assert found is not None and Q(3, 20) * (1 - Q(1, 10**15)) <= found <= Q(3, 20)
    found = left(("1", "1"), ("1", "1"), **ball, form="ellipsoid")
    assert found is not None and Q(3, 4) / (Q(2) ** 40) < Q(9, 16) / 2 - found**2 + Q(1, 2**30) and found**2 <= Q(9, 32)


@unit
def which_growth_counts(checker: Any) -> None:
    """Of every state, by a range, over the set itself."""
    line, set_, other = checker.rules.Line, object(), object()

    def grown(lines: dict[str, Any]) -> Any:
        def one(rule: str, proves: str) -> Any:
            assert rule == "range"
            return lines.get(proves)

        return checker.outcomes.SeveralResults.grown_to(SimpleNamespace(states=("x", "y"), domain=set_, one=one), "y")

    a, b = (line("range", f"growth[{s},y]", (), {"lower": Q(-n), "upper": Q(n + 1)}, set_) for n, s in enumerate("xy", 1))
    far = line("range", "growth[x,y]", (), {"lower": Q(0), "upper": Q(0)}, other)
    assert grown({"growth[x,y]": a, "growth[y,y]": b}) == [(Q(-1), Q(2)), (Q(-2), Q(3))]
    assert grown({"growth[y,y]": b, "growth[y,x]": a}) is None and grown({"growth[x,y]": a}) is None and grown({"growth[x,y]": far, "growth[y,y]": b}) is None and grown({}) is None


@unit
def which_sets_they_lead_into(checker: Any) -> None:
    """Those of the stances that may follow, not of the stance itself."""
    def stance(name: str, room: str | None) -> Any:
        return SimpleNamespace(part=name, grown_to=lambda s: (name, s), left_for=lambda g: Q(room) if room is not None and g == ("left", "x") else None)

    def through(*rooms: str | None) -> Any:
        each = {n: stance(n, r) for n, r in zip(("left", "middle", "right"), rooms, strict=True)}
        steps = [("left", "middle"), ("left", "right"), ("middle", "left"), ("right", "left")]
        return checker.graph_outcomes.GraphResults.pushed_through(SimpleNamespace(each=each, graph=SimpleNamespace(steps=steps)), each["left"], "x")

    span = checker.results.Span
    assert through("1/9", "1/2", "1/3") == span(Q(1, 3), None) and through(None, "1/4", "1/3") == span(Q(1, 4), None)
    assert through("1", None, "1/3") is None and through("1", "1/3", None) is None and through("1", None, None) is None


# certificates: X and Y stand still for a second, x⁺ = X and y⁺ = Y; the bounds are 7/20 and 1/5 in [-1, 1]

ASKED = [(f"push(x, during) >= 13/20 - 1{STEP}", "proved"), ("push(x, during) >= 13/20", "undecided"), (f"push(y, during) > 4/5 - 1{STEP}", "proved"), ("push(y, during) > 4/5", "undecided"), (f"push(x, during) >= 2/5 - 1{STEP}", "proved"), ("push(x) > 0.649", "proved")]


def pushed(asked: Sequence[tuple[str, str]] = ASKED, over: int = 9, cross: tuple[str, str] = ("0", "0")) -> Entries:
    d = rounding_lines([that for that, _ in asked])
    for s in ("x", "y"):
        d.range(f"growth[{s},{s}]", "1", "1", [over, 1], bits=24)
    d.range("growth[y,x]", *cross, [over])
    d.range("growth[x,y]", "0", "0", [over])
    return d.found("region", asked, BOX)


def of_two_states() -> None:
    good = pushed()
    judged("pushed within", good)
    for n in (21, 22, 23, 24):
        for key, by in (("lower", 1), ("upper", -1)):
            old = good["proof"][n - 1]["concludes"][key]
            reject(f"pushed within: line {n} {key}", but(good, f"proof {n - 1} concludes {key}", hair(old, by)), f"proof line {n}", "the range shown is wider than what is concluded")
    full = but(good, "results requirements 0 value", {"lower": "13/20", "upper": None}, "results requirements 2 value", {"lower": "4/5", "upper": None})
    accept("pushed within, how far", full)
    for n, most in ((0, "13/20"), (2, "4/5")):
        reject(f"pushed within, farther {n}", but(full, f"results requirements {n} value lower", hair(most, 1)), "results", f"[{n + 1}].value.lower: more is claimed")
        reject(f"pushed within, at most {n}", but(full, f"results requirements {n} value upper", "1"), "results", f"[{n + 1}].value.upper: nothing was derived")
    # what x is pushed by leads y as far as twice that: 4/5 by 2
    across = [(that, "undecided" if n in (0, 1) else verdict) for n, (that, verdict) in enumerate(ASKED)]
    for name, ends in (("up", ("0", "2")), ("down", ("-2", "1"))):
        judged(f"pushed across, {name}", pushed(across, cross=ends))
    beyond = [(that, "undecided" if "(x, during)" in that else verdict) for that, verdict in ASKED]
    judged("pushed across, a hair more", pushed(beyond, cross=("0", hair("2", 6))))
    for n, gone in ((21, "x"), (22, "y"), (23, "x"), (24, "y")):  # each is one of two that a push rests on
        open_ = [(that, "undecided" if f"({gone}, during)" in that else verdict) for that, verdict in ASKED]
        entries = but(good, "proof", [line for k, line in enumerate(good["proof"], 1) if k != n])
        for k, (_, verdict) in enumerate(open_):
            entries = but(entries, f"results requirements {k} verdict", verdict)
        judged(f"pushed within, no growth {n}", entries)
    none = [(that, "undecided" if "during" in that else verdict) for that, verdict in ASKED]
    judged("pushed within, growth over another set", pushed(none, over=6))


def on_the_ground(asked: Sequence[tuple[str, str]], growth: tuple[str, str] = ("1", "1")) -> Entries:
    """The regions of `regions`, X standing still on either foot: pushed there it ends in the region of the other."""
    plain = regions([that for that, _ in asked]).found("region", asked)
    text = plain["claim"]["text"]
    for step in ("3*x/2 + p", "x/4 + q"):
        text = text.replace(f'next = {{ x = "{step}" }}', f'define = {{ to = "{step}" }}')
    text = text.replace("[stance.left]", '[next]\nx = "X"\n[dynamics]\nduration = 1\n[dynamics.start]\nX = "to"\n[dynamics.rate]\nX = "0*X"\n[stance.left]')
    proof = [{"rule": "trajectory", "proves": f"{s}:flow", "uses": [], "witness": STILL, "concludes": {"error": "0"}} for s in ("left", "right")]
    for line in plain["proof"]:
        part, _, name = line["proves"].rpartition(":")
        flow = [1 + (part.partition(">")[0] == "right")] if name.startswith(("image", "slopes", "misses")) else []
        witness = {**line["witness"], "bits": 24} if flow else line["witness"]
        proof.append({**line, "uses": [n + 2 for n in line["uses"]] + flow, "witness": witness})
    for n, s in enumerate(("left", "right"), 1):
        for name, uses, bits in (("support[1]", [13], 0), ("growth[x,x]", [13, n], 24)):
            ends = growth if bits and n == 1 else ("1", "1")
            proof.append({"rule": "range", "proves": f"{s}:{name}", "uses": uses, "witness": {"bits": bits, "trees": ["d"]}, "concludes": dict(zip(("lower", "upper"), ends, strict=True))})
    return but(plain, "claim text", text, "proof", proof)


def of_stances() -> None:
    """Bounds of 3/20 in [-1, 1] on the left, of 7/20 in [-13/8, 13/8] on the right; each push leads to the other."""
    asked = [("push(x, during) >= 17/20", "undecided"), (f"push(x, during) >= 17/20 - 1{STEP}", "proved"), ('"push(x, during) >= 51/40"\nin = "left"', "undecided"), (f'"push(x, during) >= 51/40 - 1{STEP}"\nin = "left"', "proved"),
             ('"push(x, during) >= 17/20"\nin = "right"', "undecided"), (f'"push(x, during) >= 17/20 - 1{STEP}"\nin = "right"', "proved"), ('"push(x) >= 17/20"\nin = "left"', "undecided")]
    good = on_the_ground(asked)
    judged("pushed on the ground", good)
    accept("pushed on the ground, how far", but(good, "results requirements 2 value", {"lower": "51/40", "upper": None}))
    for n, most in ((0, "17/20"), (2, "51/40"), (4, "17/20")):
        reject(f"pushed on the ground, farther {n}", but(good, f"results requirements {n} value", {"lower": hair(most, 1), "upper": None}), "results", f"[{n + 1}].value.lower: more is claimed")
    half = [(that, "undecided" if 'in = "left"' in that else verdict) for that, verdict in asked]
    judged("pushed on the ground, to half as much again", on_the_ground(half, ("1", "3/2")))
    judged("pushed on the ground, to less", on_the_ground([(t, "undecided" if n in (1, 2, 3) else v) for n, (t, v) in enumerate(asked)], ("-2", "1")))
    for n in (len(good["proof"]) - 2, len(good["proof"])):
        side = "left" if n < len(good["proof"]) else "right"
        entries = but(good, "proof", [line for k, line in enumerate(good["proof"], 1) if k != n])
        for k, (that, _) in enumerate(asked[:6]):
            if "in =" not in that or f'"{side}"' in that:
                entries = but(entries, f"results requirements {k} verdict", "undecided")
        judged(f"pushed on the ground, no growth on the {side}", entries)


of_two_states()
of_stances()
# fmt: on


def test_pushes_boundaries() -> None:
    all_hold(CASES)
