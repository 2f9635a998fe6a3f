"""How a span of parameters and a duration are divided: a product grid of cells, pieces, and degrees."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from itertools import pairwise
from math import prod
from typing import Any

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..claim.motion import Parameter

NARROW = Fraction(1, 2**20)  # half the width about a single value, relative to the larger of it and 1


@dataclass(frozen=True, slots=True)
class Cells:
    """Middles and half widths of cells in every parameter: (cells, parameters)."""

    middle: Floats
    half: Floats

    def at(self, places: Floats) -> Floats:
        """Parameters (cells, points, parameters) at places τ in [-1, 1] (points, parameters)."""
        found: Floats = self.middle[:, None, :] + self.half[:, None, :] * places
        return found


@dataclass(frozen=True)
class Plan:
    """A product grid of cells, pieces of the duration, and degrees."""

    cuts: tuple[tuple[Fraction, ...], ...]
    pieces: int = 1
    time: int = 1
    total: int = 0

    def count(self) -> int:
        """How many cells there are."""
        return prod(len(c) - 1 for c in self.cuts)

    @cached_property
    def lines(self) -> list[tuple[Floats, Floats]]:
        """Middles and half widths of the intervals between cuts, a parameter."""
        ends = [list(pairwise(cuts)) for cuts in self.cuts]
        return [
            (np.array([to_float((a + b) / 2) for a, b in e]), np.array([to_float((b - a) / 2) for a, b in e]))
            for e in ends
        ]

    def cells(self, ranks: Any) -> Cells:
        """Cells by their ranks in product order."""
        places = np.unravel_index(ranks, [len(c) - 1 for c in self.cuts]) if self.cuts else ()
        shape = len(ranks), len(self.cuts)
        middle = [m[place] for (m, _), place in zip(self.lines, places, strict=True)]
        half = [h[place] for (_, h), place in zip(self.lines, places, strict=True)]
        return Cells(*(np.stack(x, axis=1) if x else np.zeros(shape) for x in (middle, half)))

    def fractions(self) -> Floats:
        """Where pieces begin and end, as fractions of the duration."""
        return np.arange(self.pieces + 1) / self.pieces


def refined(plan: Plan, bad: Any, share: Floats) -> Plan | None:
    """The intervals of cells that are not good enough bisected, each along the parameter that contributes most."""
    if not plan.cuts or not len(bad):
        return None
    worst = share[bad].argmax(axis=1)
    places = np.unravel_index(bad, [len(c) - 1 for c in plan.cuts])
    cuts = []
    for k, lines in enumerate(plan.cuts):
        split = set(places[k][worst == k].tolist())
        cuts.append(
            tuple(x for n, a in enumerate(lines) for x in ((a, (a + lines[n + 1]) / 2) if n in split else (a,)))
        )
    return Plan(tuple(cuts), plan.pieces, plan.time)


def starting_cuts(parameter: Parameter, low: Fraction, high: Fraction) -> tuple[Fraction, ...]:
    """Ends of a span and the grid lines strictly inside; about a single value, a narrow interval or its grid cells."""
    grid = parameter.grid
    if low < high:
        return low, *(x for x in grid or () if low < x < high), high
    if grid is None or not grid[0] <= low <= grid[-1]:
        room = NARROW * max(Fraction(1), abs(low))
        return low - room, low + room
    below, above = [x for x in grid if x < low], [x for x in grid if x > low]
    return *below[-1:], *((low,) if low in grid else ()), *above[:1]
