"""What walks that come back to where they start show: orbits far out, gains in any norm (proofs/graph.md (8), (9))."""

from __future__ import annotations

import time
from collections.abc import Iterator, Mapping, Sequence
from contextlib import suppress
from fractions import Fraction
from typing import TYPE_CHECKING

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..certificate.enclosing import BITS
from ..certificate.graph import Step
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..claim.constants import constant
from ..claim.obligations import Variable
from ..contraction.norms import Matrices, floats
from ..contraction.rounds import MOST_HELD
from ..contraction.samples import combinations
from ..contraction.walks import walks
from ..contraction.words import RoundWord, fastest_round
from .runs import map_of
from .several import SPARE
from .stances import StanceSearch

if TYPE_CHECKING:
    from .graph import GraphAttempt

Point = dict[str, Fraction]


def going_round(a: GraphAttempt, invariant: int, lines: Mapping[Step, int]) -> None:
    """Periodic orbits that take each state far from its target in each stance: proofs/graph.md (8)."""
    spent = sum(x.spent for x in a.enclosers)
    if any(x.interrupted for x in a.enclosers):
        return
    maps = {s: map_of(x.claim, x.obligations, x.ranges) for s, x in a.stances.items()}
    then = {s.name: s.then for s in a.claim.stances}
    for found in walks(maps, then, a.gap, time.monotonic() + max(0.0, a.until - time.monotonic() - spent)):
        a.writer.orbit_around(found.stances, found.start, found.held, found.steps, invariant, lines)


def growing_round(a: GraphAttempt, on: Sequence[int], lines: Mapping[Step, int]) -> None:
    """Products of Jacobians around walks that refute a gain in any norms: proofs/graph.md (9)."""
    if a.claim.horizon > 1:
        return
    asked: dict[tuple[str, ...], Fraction] = {}
    for n, r in enumerate(a.claim.requirements, 1):
        if r.kind != "gain" or r.constant is None or not (n == a.variant if a.variant else not r.over):
            continue
        within = tuple(s for s in a.stances if r.stance in (None, s))
        shown = [a.proof.lines[n].concludes["gain"] for (s, *_), n in lines.items() if s in within]
        upper = max(shown) if len(shown) == sum(s in within for s, _ in a.steps) else None
        c = constant(r.constant, a.claim.values)[1]
        if upper is None or upper >= c:
            asked[within] = min(c, asked.get(within, c))
    if any(x.interrupted for x in a.enclosers):
        return
    for within, wanted in asked.items():
        best = _fastest(a, within)
        if best is not None and best[0].rate >= to_float(wanted) * SPARE:
            word, points = best
            exact = all(a.stances[s].writer.exact("slopes", _of(a, s, on)) for s in word.stances)
            with suppress(Undefined, Rejected):
                a.writer.product_around(word.stances, points, word.power, 0 if exact else BITS, on, wanted)


def _of(a: GraphAttempt, stance: str, on: Sequence[int]) -> int:
    """The line of the set of a stance: of all stances together, or its ball."""
    return on[0] if len(on) == 1 else next(n for n in on if a.proof.lines[n].part == stance)


def _fastest(a: GraphAttempt, within: Sequence[str]) -> tuple[RoundWord, list[Point]] | None:
    """The walk of these stances whose Jacobians grow most, and the points at which they are (estimates)."""
    then = {s.name: s.then for s in a.claim.stances}
    best: tuple[RoundWord, list[Point]] | None = None
    tables = {s: (x := a.stances[s]).matrices("slopes", x.domain, x.norm) for s in within}
    norm = a.stances[within[0]].norm  # the same coordinates for all, in which errors are of like size
    rows, inverse = floats(norm.rows), floats(norm.inverse)
    for same in _same(a, tables):
        points, jacobians = dict[str, list[Point]](), dict[str, Floats]()
        for s, matrices in tables.items():
            x = a.stances[s]
            points[s] = list(_places(x, matrices.variables, same))
            at = np.array([[to_float(p[v.name]) for v in matrices.variables] for p in points[s]])
            found = matrices.at(at.reshape(len(points[s]), -1))
            good = np.flatnonzero(np.isfinite(found).all(axis=(1, 2)))
            points[s] = [points[s][int(k)] for k in good]
            jacobians[s] = rows @ found[good] @ inverse
        word = fastest_round(jacobians, then)
        if word is not None and (best is None or word.rate > best[0].rate):
            best = word, [points[s][k] for s, k in zip(word.stances, word.letters, strict=True)]
    return best


def _same(a: GraphAttempt, tables: Mapping[str, Matrices]) -> list[Point]:
    """Choices of what is held, the same in all stances."""
    held = {v.name: v for m in tables.values() for v in m.variables
            if v.name in a.claim.uncertain and a.claim.uncertain[v.name].held}  # fmt: skip
    return combinations(list(held.values()), np.random.default_rng(0))[:MOST_HELD]


def _places(x: StanceSearch, variables: Sequence[Variable], same: Point) -> Iterator[Point]:
    """Points of W with these held values; the states anywhere in a region, else at their targets."""
    met = [v.name for v in variables]
    centres = {s: (t.lower + t.upper) / 2 for s, t in zip(x.obligations.states, x.targets, strict=True)}
    centres |= {f"error({s})": Fraction(0) for s in x.obligations.states}
    still = {} if x.domain.kind == "region" else {n: y for n, y in centres.items() if n in met}
    fresh = [v for v in variables if v.name not in same and v.name not in still]
    for each in combinations(fresh, np.random.default_rng(0)):
        yield still | {n: y for n, y in same.items() if n in met} | each
