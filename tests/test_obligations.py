"""The two lists of obligations, and what is in proofs/, held against each other."""

from __future__ import annotations

import re
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import pytest

from tests.checker.test_pushes_boundaries import GROWN, UNGROWN
from tests.corpus import CASES, Case
from tests.stances import GAITS, PARTS
from ultibound.checker.calculus import Unprovable
from ultibound.checker.derive import Derivation
from ultibound.checker.derive import Domain as CheckerDomain
from ultibound.checker.graph import graph_of
from ultibound.checker.matrices import metric
from ultibound.checker.rules import SHAPES
from ultibound.checker.statement import read_statement
from ultibound.checker.theorems import THEOREMS
from ultibound.claim import Bad, parse_claim
from ultibound.claim.obligations import RANGED, Domain, Obligation, Obligations
from ultibound.claim.provable import not_yet, of_stance

PROOFS = Path(__file__).parents[1] / "proofs"
PROVABLE = [c for c in CASES if c.accepted and not_yet(parse_claim(c.text, c.settings, c.data, "c")) is None]
GRAPHS = [c for c in PROVABLE if "[stance." in c.text]
PROVABLE = [c for c in PROVABLE if c not in GRAPHS]

SEVERAL = {
    "a moving target": """format = 1
[state]
x = [-0.3, 0.3]
v = [-1, 1]
[uncertain]
T = { values = [0.3, 0.4] }
d = ["-sqrt(2)/100", 0.01]
c = { range = [-0.1, 0.1], held = true, change = 0.01 }
[define]
p = "x/2 + (v - c)/4 + d + sin(x*v)/20"
[next]
x = "x - p*T"
v = "v/3 + target(v)/2 + abs(p)/9"
[target]
x = "c/4"
v = "c + c**2"
[[require]]
that = "value(next(v) - v) < 1"
over = { x = [-0.1, 0.1] }
[[require]]
that = "sensitivity(v, p) < 0"
[[require]]
that = "always(x <= v + 9)"
over = { c = [0, 0.05] }
""",
    "a library": """format = 1
[state]
a = [0, 1]
b = ["1/3", "sqrt(2)"]
[library]
file = "t.csv"
at = { p = "a", q = "b/2" }
[next]
a = "a/2 + u/9"
b = "b/3 + u/5 + 0.2"
[target]
a = "sqrt(2)/3"
b = "target(a)"
[[require]]
that = "value(u)"
""",
}
MOVING = """format = 1
[uncertain]
c = { range = [0.1, 0.2], held = true, change = 0.01 }
w = [-0.01, "sqrt(2)/100"]
[next]
x = "target(x)/2 - 0.4*v + c + w"
v = "side*(c + target(x)) + 0.3*abs(v - target(v))"
[stance.left]
then = ["right", "left"]
define = { side = "1" }
state = { x = [-1, 1], v = [0, 1] }
target = { x = "c", v = "c**2" }
[stance.right]
then = "left"
define = { side = "-1" }
state = { v = [-1, 0], x = [-1, 1] }
target = { v = "-c", x = "c/2 - c**2" }
[[require]]
that = "value(v + c)"
in = "right"
[[require]]
that = "sensitivity(v, x) < 1"
over = { x = [0, 0.1] }
"""
GRAPHS.append(Case("moving targets, states in another order", MOVING, True))
TURNED = MOVING.replace("0.4*v + c", "0.4*v*gait + shift + c").replace('v = "side*', 'v = "shift*x + side*')
TURNED = TURNED.replace("format = 1", 'format = 1\ncorrection = ["shift", "gait"]')
TURNED = TURNED.replace(
    'define = { side = "1" }', 'mirror = ["v"]\ndefine = { side = "1", shift = "c*(v - target(v))", gait = "x*v" }'
)
TURNED = TURNED.replace(
    'define = { side = "-1" }', 'mirror = ["x", "v"]\ndefine = { side = "-1", shift = "0.1*abs(v)", gait = "side*x" }'
)
GRAPHS.append(Case("two corrections, states that are turned", TURNED, True))
SEVERAL["corrections"] = (
    SEVERAL["a library"]
    .replace("format = 1", 'format = 1\ncorrection = ["f"]\n[define]\nf = "a*b/9"')
    .replace('a = "a/2 + u/9"', 'a = "a/2 + u*f/9"')
)
GRAPHS += [Case(f"{n} steps: moving targets", f"horizon = {n}\n{MOVING}", True) for n in (2, 3)]
for several in SEVERAL:
    table = {"t.csv": "p,q,u\n0,0,1\n0,1,2\n0.5,0,2\n0.5,1,2\n1,0,1\n1,1,3\n"} if "t.csv" in SEVERAL[several] else {}
    PROVABLE.append(Case(f"several: {several}", SEVERAL[several], True, table))


def farther(case: Case, steps: int) -> Case:
    return replace(case, name=f"{steps} steps: {case.name}", text=f"horizon = {steps}\n{case.text}")


FEW = [c for c in PROVABLE if "horizon" not in c.text]
LATER = [farther(c, 3) for c in (*FEW[::4], *FEW[-2:])]
PROVABLE += [c for c in LATER if not_yet(parse_claim(c.text, c.settings, c.data, "c")) is None]


def spelled_out(graph: list[tuple[str, tuple[int, ...], object]], root: int) -> tuple[object, ...]:
    """The terms a root is built from, numbered alike on both sides: arguments first, from left to right."""
    number: dict[int, int] = {}
    out: list[object] = []
    waiting = [root]
    while waiting:
        k = waiting[-1]
        op, args, payload = graph[k]
        missing = [a for a in args if a not in number]
        if k in number or missing:
            waiting += missing[::-1] if k not in number else []
            waiting = waiting if k not in number else waiting[:-1]
            continue
        number[k] = len(out)
        out.append((op, tuple(number[a] for a in args), payload))
    return tuple(out)


@pytest.mark.parametrize("case", PROVABLE, ids=lambda c: c.name[:40].encode("ascii", "replace").decode())
@pytest.mark.parametrize("ball", [False, True])
def test_both_lists_mean_the_same(case: Case, ball: bool) -> None:
    claim = parse_claim(case.text, case.settings, case.data, "c")
    o = Obligations(claim)
    d = Derivation(read_statement(claim.text, claim.settings, claim.data))
    target, states = (Fraction(1, 2), Fraction(1, 2)), tuple(claim.stances[0].states)
    mine = Domain("ball" if ball else "region", Fraction(1, 8), target)
    theirs = CheckerDomain(ball, Fraction(1, 8), target)
    several = len(states) > 1
    if several:  # a box with the weights 2, 3, ...: along each state the ball reaches to a half, a third, ...
        n = range(len(states))
        rows = tuple(tuple(Fraction(i + 2 if i == j else 0) for j in n) for i in n)
        inverse = tuple(tuple(Fraction(i == j, i + 2) for j in n) for i in n)
        wide = tuple(Fraction(1, i + 2) for i in n)
        spans = tuple((Fraction(1, i + 2), Fraction(1, 2)) for i in n)
        mine = replace(mine, targets=spans, wide=wide, beyond=Fraction(1, 16))
        norm = metric("box", rows, inverse, len(states))
        theirs = replace(theirs, targets=spans, metric=norm, beyond=Fraction(1, 16))
    listed: list[Obligation] = [q for s in states for q in (o.target(s), o.image(s), o.miss(s))]
    listed += [o.slope(mine, s, x) for s in states for x in states]
    early = range(1, claim.horizon) if claim.horizon < 9 else (1, 17)
    listed += [q for j in early for s in states for q in (o.miss(s, j), o.slope(mine, s, s, j))]
    listed += [o.target_slope(h, s) for s in states for h in o.moving(s)]
    listed += [o.requirement(n, mine) for n, r in enumerate(claim.requirements, 1) if r.kind in RANGED]
    radii = (Fraction(1, 16), Fraction(1, 8))
    if not several:
        listed += [*(o.shell(n, mine, radii) for n in (1, 2)), o.line(mine, Fraction(1, 3))]
    cut = replace(theirs, radii=radii, slope=Fraction(1, 3))
    if claim.correction:
        listed += [
            *(o.split_slope(mine, s, x) for s in states for x in states),
            *(o.split_residual(mine, s) for s in states),
        ]
    if len(claim.correction) == 1 and claim.horizon == 1 and not several:
        listed += o.sector(mine)
    gates = [(g.op, g.args, g.value if g.op in ("number", "power") else g.name or None) for g in o.graph.gates]
    for obligation in listed:
        meaning = d.meaning(obligation.name, cut if obligation.name.startswith(("shell", "line")) else theirs)
        assert obligation.by == meaning.by
        assert [(v.name, v.cells, v.listed) for v in obligation.variables] == [
            (v.name, v.cells, v.listed) for v in meaning.variables
        ]
        assert spelled_out(gates, obligation.root) == spelled_out(d.terms.all, meaning.root)
    assert [o.region(s) for s in states] == [d.region(s) for s in states]


@pytest.mark.parametrize("horizon", [1, 2])
@pytest.mark.parametrize("name", PARTS)
def test_both_lists_mean_the_same_stance(name: str, horizon: int) -> None:
    """Matrix, free term, signals, what has to be positive, and the obligations that only stances have."""
    if horizon > 1 and "within = true" in PARTS[name]:
        pytest.skip("signals are followed for one step at a time")
    text = f"horizon = {horizon}\n{PARTS[name]}"
    claim = parse_claim(text, {}, {"gaits.csv": GAITS} if "gaits.csv" in PARTS[name] else {}, "c")
    o = Obligations(claim)
    d = Derivation(read_statement(claim.text, claim.settings, claim.data))
    mine, theirs = o.motion, d.motion
    assert mine is not None and theirs is not None
    assert (mine.states, mine.signals) == (theirs.states, theirs.signals)
    assert [(p.name, p.grid) for p in mine.parameters] == [(p.name, p.grid) for p in theirs.parameters]

    def same(a: int | None, b: int | None) -> None:
        assert (a is None) == (b is None)
        gates = [(g.op, g.args, g.value if g.op in ("number", "power") else g.name or None) for g in o.graph.gates]
        if a is not None and b is not None:
            assert spelled_out(gates, a) == spelled_out(d.terms.all, b)

    for row, other in zip(
        (*mine.matrix, mine.free, *mine.forced), (*theirs.matrix, theirs.free, *theirs.forced), strict=True
    ):
        for a, b in zip(row, other, strict=True):
            same(a, b)
    for a, b in zip(mine.positive, theirs.positive, strict=True):
        same(a, b)
    for ball in (False, True):
        domain = Domain("ball" if ball else "region", Fraction(1, 8), (Fraction(1, 5), Fraction(4, 5)))
        other_domain = CheckerDomain(ball, Fraction(1, 8), (Fraction(1, 5), Fraction(4, 5)))
        listed = [o.image(), o.miss(), o.slope(domain), *(o.support(k + 1, domain) for k in range(len(mine.positive)))]
        listed += [o.requirement(n, domain) for n, r in enumerate(claim.requirements, 1) if r.kind in RANGED]
        listed += [o.growth(domain)] if any(r.during for r in claim.requirements) else []
        listed += [o.split_slope(domain), o.split_residual(domain)] if claim.correction else []
        listed += o.sector(domain) if len(claim.correction) == 1 and horizon == 1 else []
        routes = ("slope", "split")[: 2 if claim.correction else 1] if o.motion and o.motion.signals else ()
        listed += [o.under_any_course(domain, parts, route) for route in routes for parts in (1, 3)]
        assert [o.loose(route) for route in routes] == [d.loose(route) for route in routes]
        for obligation in listed:
            meaning = d.meaning(obligation.name, other_domain)
            assert [(v.name, v.cells, v.inside) for v in obligation.variables] == [
                (v.name, v.cells, v.inside) for v in meaning.variables
            ]
            same(obligation.root, meaning.root)


@pytest.mark.parametrize("text, name", [x[:2] for x in (*GROWN, *UNGROWN)])
def test_both_lists_mean_the_same_pushes(text: str, name: str) -> None:
    """What a push of one state grows to in another; both refuse the same."""
    o, d = Obligations(parse_claim(text, {}, {}, "c")), Derivation(read_statement(text, {}, {}))
    met = re.fullmatch(r"growth\[(\w),(\w)\]", name)
    if met is None or not {*met.groups()} <= set(o.states):
        pytest.skip("no such state")
    zero, n = (Fraction(0), Fraction(0)), len(o.states)
    mine, theirs = Domain("region", Fraction(0), zero, targets=(zero,) * n), CheckerDomain(False, Fraction(0), zero)
    if (text, name) not in [x[:2] for x in GROWN]:
        with pytest.raises(Bad):
            o.growth(mine, met[1], met[2])
        with pytest.raises(Unprovable):
            d.meaning(name, theirs)
        return
    obligation, meaning = o.growth(mine, met[1], met[2]), d.meaning(name, theirs)
    assert (obligation.name, obligation.by) == (name, meaning.by)
    gates = [(g.op, g.args, g.value if g.op in ("number", "power") else g.name or None) for g in o.graph.gates]
    assert spelled_out(gates, obligation.root) == spelled_out(d.terms.all, meaning.root)
    found = [[(v.name, v.cells, v.inside) for v in x.variables] for x in (obligation, meaning)]
    assert found[0] == found[1]


@pytest.mark.parametrize("case", GRAPHS, ids=lambda c: c.name[:40])
@pytest.mark.parametrize("ball", [False, True])
def test_both_lists_mean_the_same_between_stances(case: Case, ball: bool) -> None:
    """Each stance's own obligations, and the misses of every step, measured from the target of the stance after it."""
    claim = parse_claim(case.text, case.settings, case.data, "c")
    g = graph_of(read_statement(claim.text, claim.settings, claim.data))
    assert g is not None and g.steps == [(s.name, t) for s in claim.stances for t in s.then]
    for stance in claim.stances:
        alone, d = of_stance(claim, stance.name), g.stances[stance.name]
        o, n = Obligations(alone), len(d.states)
        assert o.states == d.states == tuple(claim.stances[0].states)
        assert [o.region(s) for s in o.states] == [d.region(s) for s in d.states]
        spans = ((Fraction(1, 3), Fraction(1, 2)),) * n
        one = tuple(tuple(Fraction(int(i == j)) for j in range(n)) for i in range(n))
        mine = Domain(
            "ball" if ball else "region", Fraction(1, 8), spans[0], Fraction(1, 16), spans, (Fraction(1),) * n
        )
        theirs = CheckerDomain(
            ball, Fraction(1, 8), spans[0], beyond=Fraction(1, 16), targets=spans, metric=metric("box", one, one, n)
        )
        listed = [(d, q) for s in o.states for q in (o.target(s), o.image(s))]
        listed += [(d, o.slope(mine, s, x)) for s in o.states for x in o.states]
        listed += [(d, o.target_slope(h, s)) for s in o.states for h in o.moving(s)]
        listed += [
            (d, o.requirement(k, mine))
            for k, r in enumerate(alone.requirements, 1)
            if r.kind in RANGED and r.stance is None
        ]
        for t in stance.then:
            after = next(s for s in claim.stances if s.name == t)
            step = g.between[f"{stance.name}>{t}"]
            listed += [(step, o.miss(s, 0, [after])) for s in o.states]
            if claim.correction:
                listed += [(step, o.split_slope(mine, s, x)) for s in o.states for x in o.states]
                onto = o.stance if t == stance.name else after
                listed += [(step, o.split_residual(mine, s, onto)) for s in o.states]
        each = {s.name: s for s in claim.stances}
        for way in [w for w in g.walks if w[0] == stance.name and len(w) > 2]:
            along, via = g.along[">".join(way)], [each[s] for s in way[1:]]
            listed += [(along, o.miss(s, 0, via)) for s in o.states]
            listed += [(along, o.slope(mine, s, x, 0, via)) for s in o.states for x in o.states]
        gates = [(x.op, x.args, x.value if x.op in ("number", "power") else x.name or None) for x in o.graph.gates]
        for derivation, obligation in listed:
            meaning = derivation.meaning(obligation.name, theirs)
            assert obligation.by == meaning.by
            assert [(v.name, v.cells, v.inside, v.listed) for v in obligation.variables] == [
                (v.name, v.cells, v.inside, v.listed) for v in meaning.variables
            ]
            assert spelled_out(gates, obligation.root) == spelled_out(derivation.terms.all, meaning.root)


def test_enough_claims_were_compared() -> None:
    assert len(PROVABLE) > 60 and len(GRAPHS) > 6


def test_every_rule_has_its_page_and_every_page_is_listed() -> None:
    table = (PROOFS / "obligations.md").read_text(encoding="utf-8")
    for rule in SHAPES:
        row = next(
            line
            for line in table.splitlines()
            if line.startswith("| `") and f"`{rule}`" in line.split("|")[1] and ".md" in line
        )
        pages = [p.strip(" `") for p in row.split("|")[2].split(",")]
        assert pages and all((PROOFS / p).exists() for p in pages), rule
    assert set(THEOREMS) < set(SHAPES)
    listed = {p for p in PROOFS.glob("*.md") if f"`{p.name}`" in table or p.name in ("obligations.md", "README.md")}
    assert listed == set(PROOFS.glob("*.md"))
    checker = "".join(p.read_text(encoding="utf-8") for p in (PROOFS.parent / "ultibound" / "checker").glob("*.py"))
    for page in set(PROOFS.glob("*.md")) - {PROOFS / "README.md"}:
        assert f"proofs/{page.name}" in checker, page.name
