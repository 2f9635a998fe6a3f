"""Trial solutions of a continuous stance: cells, degrees, whole-number coefficients, and how good they are.

What is written here is a witness (the line `trajectory`); the checker proves its error anew.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any

import numpy as np

from ..bounding.evaluate import to_float
from ..claim.graph import Graph
from ..claim.model import Ends, Library
from ..claim.motion import Motion
from ..polynomial.flows import FlowTable
from ..polynomial.monomials import sites
from .collocation import REACH, defect, solved
from .estimate import Sizes, compared
from .making import Made, Watch, many
from .plans import Plan, refined, starting_cuts
from .points import Rates, Unsolved

TIMES, TOTALS, PIECES = range(6, 26, 2), range(1, 7), 64
MOST_CELLS, ROUNDS = 100_000, 24
GAIN = 10  # how many times better a result with twice the pieces has to be
SAMPLE, WORST = 16, 4  # cells looked at to settle degrees, and how many join them after a look at all
SLOPE = 1e3  # how many times less accurate, per unit of a parameter, slopes may be


@dataclass(frozen=True, slots=True)
class Trial:
    """A witness for a `trajectory` line, the same polynomials as a table, and their estimated largest error.

    `relative` is the largest error of a cell over the largest |Φ| in it; `met` tells whether that is
    enough.
    """

    witness: dict[str, Any]
    table: FlowTable
    error: float
    relative: float
    met: bool


def trial(
    graph: Graph,
    motion: Motion,
    libraries: Sequence[Library],
    spans: Mapping[str, Ends],
    accuracy: float = 1e-11,
    enough: float = 1e-9,
    most_cells: int = MOST_CELLS,
    watch: Watch = lambda done, total: None,
) -> Trial:
    """Polynomials that solve a motion over spans of its parameters, with their error at most a share of a cell's |Φ|.

    Degree in time first (up to 24), then in the cell (up to 6), for the share `accuracy`; pieces of the duration and
    further cuts only where these do not give `enough`. The result is the best found, all errors being estimates.
    Raises Unsolved where there is none.
    """
    rates = Rates(graph, motion, libraries)
    plan = Plan(tuple(starting_cuts(p, *spans[p.name]) for p in motion.parameters))
    if plan.count() > most_cells:
        raise Unsolved(f"{plan.count()} cells of the library are met, and at most {most_cells} can be written down")
    sample = np.unique(np.linspace(0, plan.count() - 1, SAMPLE).astype(int))
    best: Made | None = None
    for _ in range(ROUNDS):
        settled = _totalled(rates, _timed(rates, plan, sample, accuracy, enough), sample, accuracy)
        if best is None or settled != best.plan:
            made = many(rates, settled, np.arange(settled.count()), accuracy, watch)
            if best is None or made.relative.max() < best.relative.max():
                best = made
            bad = np.flatnonzero(made.relative > enough)
            if not len(bad):
                break
            worst = bad[np.argsort(made.relative[bad])[-WORST:]]
            if not np.all(np.isin(worst, sample)):
                plan, sample = settled, np.union1d(sample, worst)
                continue
        finer = refined(best.plan, np.flatnonzero(best.relative > enough), best.share)
        if finer is None or finer.count() > most_cells:
            break
        plan, sample = finer, np.unique(np.linspace(0, finer.count() - 1, SAMPLE).astype(int))
    if best is None or not np.all(np.isfinite(best.relative)):
        raise Unsolved("the motion is too fast for its errors to be bounded over a whole stance")
    return _written(motion, best, enough)


def _timed(rates: Rates, plan: Plan, sample: Any, accuracy: float, enough: float) -> Plan:
    """The least degree in time, or else number of pieces, for which the defect at fixed parameters is small enough."""
    places = sites(len(plan.cuts), 1, REACH)
    cells, best = plan.cells(sample), (np.inf, replace(plan, time=TIMES[-1]))
    pieces = plan.pieces
    while pieces <= PIECES:
        for degree in TIMES:
            if pieces == plan.pieces and degree < plan.time:
                continue
            found = replace(plan, pieces=pieces, time=degree)
            at = solved(rates, cells, found.fractions(), degree, places)
            left, matrix = defect(rates, cells, found.fractions(), at, places)
            defects = np.abs(left).sum(axis=-1).max(axis=1).swapaxes(-1, -2)
            none = np.zeros((*matrix.shape[:1], *matrix.shape[2:3], *matrix.shape[4:], 0))
            errors, _ = compared(
                Sizes(
                    np.abs(matrix).max(axis=(1, 3)), none, none[..., None],
                    defects, np.zeros((*defects.shape, 0)), np.zeros((*defects.shape, 0, 0)),
                )
            )  # fmt: skip
            scale = np.maximum(np.abs(at.sum(axis=-1)).max(axis=(1, 2, 3, 4)), 1.0)
            reached = float((errors.value[:, -1] / scale).max())
            if reached < best[0] / (2 if best[1].pieces == pieces else GAIN):
                best = reached, found
            if reached <= accuracy / 4:
                return found
        if best[0] <= enough / 4 or best[1].pieces < pieces:
            break
        pieces *= 2
    return best[1]


def _totalled(rates: Rates, plan: Plan, sample: Any, accuracy: float) -> Plan:
    """The least total degree in a cell for which values, and slopes SLOPE times less, are accurate enough."""
    if not plan.cuts:
        return plan
    best: tuple[float, float, Plan] | None = None
    for total in TOTALS:
        if total < plan.total:
            continue
        found = replace(plan, total=total)
        made = many(rates, found, sample, accuracy)
        value, slope = float(made.relative.max()), float(made.slope.max())
        if value <= accuracy and slope <= accuracy * SLOPE:
            return found
        if best is None or max(value / accuracy, 1) < best[0] / 1.5 or (value <= accuracy and slope < best[1] / 3):
            best = max(value / accuracy, 1), slope, found
    return best[2] if best else plan


def _written(motion: Motion, made: Made, enough: float) -> Trial:
    plan = made.plan
    flat = made.whole.reshape(len(made.whole), plan.pieces, -1)
    cells = [[" ".join(map(str, piece)) for piece in cell] for cell in flat.tolist()]
    pieces = [Fraction(k, plan.pieces) for k in range(plan.pieces + 1)]
    witness = {
        "cuts": {p.name: [str(x) for x in cuts] for p, cuts in zip(motion.parameters, plan.cuts, strict=True)},
        "pieces": [str(x) for x in pieces],
        "degrees": [plan.time, plan.total],
        "bits": made.bits,
        "cells": cells,
    }
    table = FlowTable(
        [np.array([to_float(x) for x in cuts]) for cuts in plan.cuts],
        [None if p.grid is None else np.array([to_float(x) for x in p.grid]) for p in motion.parameters],
        plan.fractions(),
        (plan.time, plan.total),
        np.ldexp(made.whole.astype(float), -made.bits),
        made.errors,
    )
    relative = float(made.relative.max())
    return Trial(witness, table, float(made.errors.value.max()), relative, relative <= enough)
