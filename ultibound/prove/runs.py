"""Runs that refute what is asked of steps and radii, where nothing else has decided it (proofs/orbit.md (3), (4))."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from fractions import Fraction
from math import floor
from typing import Any

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..certificate.enclosing import Encloser
from ..certificate.lines import Writer
from ..certificate.runs import run
from ..checker.derive import Derivation
from ..checker.grammar import constant as checked
from ..checker.graph_outcomes import results_of
from ..checker.periodic import LONGEST
from ..checker.theorems import Orbit
from ..claim import Claim
from ..claim.constants import constant
from ..claim.model import Requirement
from ..claim.obligations import Obligations, together
from ..contraction.norms import Matrices
from ..contraction.rounds import Map
from ..contraction.runs import Ground, Run, leaving, pushed, slow

ENOUGH = 60  # steps of the longest path, where no more are asked for
PUSHED = 2  # places on orbits, the nearest to the edge of the region first
Stance = tuple[Claim, Obligations, Encloser, Derivation]


def map_of(claim: Claim, o: Obligations, ranges: Encloser) -> Map:
    """The map of all states of a stance, at points."""
    table = Matrices([[(x, ranges.runner(x, False))] for x in (o.image(s) for s in o.states)])
    aims = [(x, ranges.runner(x, False)) for x in (o.target(s) for s in o.states)]
    met = {v.name for v in table.variables}
    extra = [v for v in together([x for x, _ in aims]) if v.name not in met]

    def target(held: Mapping[str, Fraction]) -> list[float]:
        rows = [np.array([[to_float(held[v.name]) for v in x.variables]]).reshape(1, -1) for x, _ in aims]
        return [float(r(at, at, gradient=False).low[0]) for (_, r), at in zip(aims, rows, strict=True)]

    def run_at(at: Floats) -> Floats:
        return table.at(at[:, : len(table.variables)])[:, :, 0]

    held = frozenset(n for n, q in claim.uncertain.items() if q.held)
    return Map([*table.variables, *extra], o.states, run_at, target, held)


def run_out(
    claim: Claim, variant: int, w: Writer, stances: Mapping[str, Stance], then: Mapping[str, Sequence[str]],
    until: float, kinds: Sequence[str] = ("steps", "radius", "push"),
) -> None:  # fmt: skip
    """Appends runs for the requirements of these kinds that the lines so far leave undecided.

    `until`: an instant of time.monotonic at which the search is given up."""
    asked = [
        (n, r)
        for n, r in enumerate(claim.requirements, 1)
        if r.kind in kinds and r.state is not None and not r.during and (n == variant if variant else not r.over)
    ]
    if not asked or any(ranges.interrupted for _, _, ranges, _ in stances.values()):
        return
    found = results_of(w.proof)
    asked = [(n, r) for n, r in asked if found.requirements[n - 1].verdict == "undecided"]
    if not asked:
        return
    maps = {s: map_of(c, o, ranges) for s, (c, o, ranges, _) in stances.items()}
    regions = {s: _region(d) for s, (*_, d) in stances.items()}
    ground = Ground(maps, then, regions, until, *([0] if found.kind == "region" else []))
    for _, r in asked:
        within = [s for s in stances if r.stance in (None, s)]
        _search(claim, w, ground, within, r)


def _search(claim: Claim, w: Writer, ground: Ground, within: Sequence[str], r: Requirement) -> None:
    if r.state is None or r.constant is None:
        return
    state, c = next(iter(ground.maps.values())).states.index(r.state), constant(r.constant, claim.values)
    if r.kind == "radius":
        out = leaving(ground, within, state, c[0]) if c[0] >= 0 else None
        if out is not None:
            run(w, "escape", r.state, out)
    elif r.kind == "push":
        _knocked(w, ground, within, r.state, c[0])
    elif r.start is not None and r.end is not None:
        start, end = constant(r.start, claim.values)[0], constant(r.end, claim.values)[1]
        most = min(LONGEST, max(ENOUGH, floor(c[1]) + 1))
        path = slow(ground, within, state, start, to_float(end), most) if start >= 0 else None
        if path is not None:
            run(w, "path", r.state, path)


def _knocked(w: Writer, ground: Ground, within: Sequence[str], name: str, most: Fraction) -> None:
    """The least push found that leads out, of states on proved orbits."""
    best: tuple[Run, int, int] | None = None
    state = next(iter(ground.maps.values())).states.index(name)
    places = list[tuple[float, int, int, str, Orbit]]()
    for n, orbit in [(n, x.orbit) for n, x in w.proof.lines.items() if x.orbit is not None and most >= 0]:
        for k, s in enumerate(orbit.stances):
            x, (low, high) = (
                to_float(sum(orbit.states[k][state], Fraction(0)) / 2),
                (y[state] for y in ground.regions[s]),
            )
            places += [(float(min(high - x, x - low)), n, k, s, orbit)] if s in within else []
    for _, n, k, s, orbit in sorted(places, key=lambda x: x[:3])[:PUSHED]:
        base = np.array([to_float((low + high) / 2) for low, high in orbit.states[k]])
        held = _values(w.derivation, orbit.held)
        found = pushed(ground, s, base, held, state, most if best is None else abs(best[0].error))
        best = best if found is None else (found, n, k)
    if best is not None:
        run(w, "pushed", name, best[0], best[1], best[2])


def _values(d: Derivation, texts: Mapping[str, Any]) -> dict[str, Fraction]:
    """What is held along an orbit, as numbers."""
    found = {}
    for n, text in texts.items():
        q = d.statement.uncertain[n]
        cells = [checked(e, d.statement.values) for e in q.values or ()]
        found[n] = sum(cells[int(text[1:])], Fraction(0)) / 2 if cells else Fraction(text)
    return found


def _region(d: Derivation) -> tuple[Floats, Floats]:
    ends = [d.region(s)[0] for s in d.states]
    return np.array([to_float(x[0]) for x in ends]), np.array([to_float(x[1]) for x in ends])
