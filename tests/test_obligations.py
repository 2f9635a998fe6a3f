"""The two lists of obligations, and what is in proofs/, held against each other."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import pytest

from tests.corpus import CASES, Case
from tests.stances import GAITS, PARTS
from ultibound.checker.derive import Derivation
from ultibound.checker.derive import Domain as CheckerDomain
from ultibound.checker.matrices import Metric, metric
from ultibound.checker.rules import SHAPES
from ultibound.checker.statement import read_statement
from ultibound.checker.theorems import THEOREMS
from ultibound.claim import parse_claim
from ultibound.claim.obligations import RANGED, Domain, Obligation, Obligations
from ultibound.claim.provable import not_yet

PROOFS = Path(__file__).parents[1] / "proofs"
PROVABLE = [c for c in CASES if c.accepted and not_yet(parse_claim(c.text, c.settings, c.data, "c")) is None]


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


def sheared(n: int) -> Metric:
    """A norm in which every state reaches further than in any other."""
    rows = [[Fraction(int(j == i) - int(j == i + 1), 1) for j in range(n)] for i in range(n)]
    inverse = [[Fraction(int(j >= i)) for j in range(n)] for i in range(n)]
    return metric("polytope", tuple(map(tuple, rows)), tuple(map(tuple, inverse)), n)


@pytest.mark.parametrize("case", PROVABLE, ids=lambda c: c.name[:40].encode("ascii", "replace").decode())
@pytest.mark.parametrize("ball", [False, True])
def test_both_lists_mean_the_same(case: Case, ball: bool) -> None:
    claim = parse_claim(case.text, case.settings, case.data, "c")
    o = Obligations(claim)
    d = Derivation(read_statement(claim.text, claim.settings, claim.data))
    target = (Fraction(1, 2), Fraction(1, 2))
    mine = Domain("ball" if ball else "region", Fraction(1, 8), target)
    theirs = CheckerDomain(ball, Fraction(1, 8), target)
    several = len(o.states) > 1
    if several:
        norm = sheared(len(o.states))
        wide = tuple(norm.support(i) for i in range(len(o.states)))
        mine = replace(mine, beyond=Fraction(1, 99), targets=(target,) * len(wide), wide=wide)
        theirs = replace(theirs, beyond=Fraction(1, 99), targets=(target,) * len(wide), metric=norm)
    listed: list[Obligation] = []
    for s in o.states:
        listed += [o.target(s), o.image(s), o.miss(s), *(o.target_slope(h, s) for h in o.moving(s))]
        listed += [o.slope(mine, s, x) for x in o.states]
    listed += [o.requirement(n, mine) for n, r in enumerate(claim.requirements, 1) if r.kind in RANGED]
    radii = (Fraction(1, 16), Fraction(1, 8))
    listed += [] if several else [*(o.shell(n, mine, radii) for n in (1, 2)), o.line(mine, Fraction(1, 3))]
    cut = replace(theirs, radii=radii, slope=Fraction(1, 3))
    if claim.correction and not several:
        listed += [o.split_slope(mine), o.split_residual(mine)]
    gates = [(g.op, g.args, g.value if g.op in ("number", "power") else g.name or None) for g in o.graph.gates]
    for obligation in listed:
        meaning = d.meaning(obligation.name, cut if obligation.name.startswith(("shell", "line")) else theirs)
        assert obligation.by == meaning.by
        assert [(v.name, v.cells, v.listed) for v in obligation.variables] == [
            (v.name, v.cells, v.listed) for v in meaning.variables
        ]
        assert not several or [v.inside for v in obligation.variables] == [v.inside for v in meaning.variables]
        assert spelled_out(gates, obligation.root) == spelled_out(d.terms.all, meaning.root)
    assert all(o.region(s) == d.region(s) for s in o.states)


@pytest.mark.parametrize("name", PARTS)
def test_both_lists_mean_the_same_stance(name: str) -> None:
    """Matrix, free term, signals, what has to be positive, and the obligations that only stances have."""
    claim = parse_claim(PARTS[name], {}, {"gaits.csv": GAITS} if "gaits.csv" in PARTS[name] else {}, "c")
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
        for obligation in listed:
            meaning = d.meaning(obligation.name, other_domain)
            assert [(v.name, v.cells, v.inside) for v in obligation.variables] == [
                (v.name, v.cells, v.inside) for v in meaning.variables
            ]
            same(obligation.root, meaning.root)


def test_enough_claims_were_compared() -> None:
    assert len(PROVABLE) > 60


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
    listed = {p for p in PROOFS.glob("*.md") if f"`{p.name}`" in table or p.name == "obligations.md"}
    assert listed == set(PROOFS.glob("*.md"))
    checker = "".join(p.read_text(encoding="utf-8") for p in (PROOFS.parent / "ultibound" / "checker").glob("*.py"))
    for page in PROOFS.glob("*.md"):
        assert f"proofs/{page.name}" in checker, page.name
