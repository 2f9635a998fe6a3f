"""Fundamental solutions of a linear system in time as tables of polynomials, read over batches of boxes.

Φ_ij(σ, p): normalised time σ in [-1, 1], parameters p in a product grid of cells. Everything here is an estimate.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from .chebyshev import expanded, factorials
from .monomials import monomials

Floats = NDArray[np.float64]
Pair = tuple[Floats, Floats]
Branch = tuple[list[Any], list[Any]]
TOLERANCE = 1e-12  # share of an interval between cuts by which a rounded value may miss a cut
AT_ONCE = 4_000_000  # coefficients gathered at a time
MOST_ORDERS = 2


@dataclass(frozen=True, slots=True)
class Errors:
    """Estimated errors by cell and piece: of Φ, of its derivatives by the piece's own time s and by the cell's τ.

    value, rate: (cells, pieces); slope, turn: (cells, pieces, parameters), by τ_k and by s and τ_k; bend: by τ_k, τ_l.
    """

    value: Floats
    rate: Floats
    slope: Floats
    turn: Floats
    bend: Floats

    def of(self, time: int, orders: Sequence[int], cell: Any, piece: Any, degree: int) -> Floats:
        """Of one derivative, a row; a second one by time is estimated from the first (Markov's inequality)."""
        by = [k for k, o in enumerate(orders) for _ in range(o)]
        found: Floats
        if time == 2:
            found = self.rate[cell, piece] * degree**2
        elif time:
            found = self.turn[cell, piece, by[0]] if by else self.rate[cell, piece]
        elif not by:
            found = self.value[cell, piece]
        else:
            found = self.slope[cell, piece, by[0]] if len(by) == 1 else self.bend[cell, piece, by[0], by[1]]
        return found


@dataclass(slots=True)
class Part:
    """The cells and pieces met by the boxes of some `rows`, one after another: each is met by the box `owner`.

    `widths`: of the piece, and half of the cell by each parameter; `moves`: to the centre of what is met, and `powers`
    the monomials of its reach; `time`: middle and reach in the piece, None at touchdown.
    """

    rows: slice
    starts: Any
    owner: Any
    cell: Any
    piece: Any
    widths: list[Floats]
    moves: Floats
    powers: Floats
    time: Pair | None
    last: tuple[tuple[int, int, int], Floats] | None = None  # of the entry and order last read


@dataclass(frozen=True, slots=True)
class Met:
    """Where boxes are read: whether `outside` the cuts, grid cells by argument, and parts of cells and pieces."""

    outside: Any
    branch: Branch
    parts: list[Part]


class FlowTable:
    """Φ_ij as polynomials a cell and a piece, c + r τ = p: Σ coefficients[cell, piece, column, i, α, k] T_k(s) τ^α.

    `cuts` and `pieces` as in a `trajectory` line; columns are j = 1..n, signals, then 0 if there is a free term.
    `grids[k]`: lines of the library axis that parameter k is, the only places where derivatives may jump.
    """

    def __init__(
        self,
        cuts: Sequence[Floats],
        grids: Sequence[Floats | None],
        pieces: Floats,
        degrees: tuple[int, int],
        coefficients: Floats,
        errors: Errors,
    ) -> None:
        self.cuts, self.grids, self.pieces, self.degrees = list(cuts), list(grids), pieces, degrees
        self.coefficients, self.errors = coefficients, errors
        self.states, self.columns = coefficients.shape[3], coefficients.shape[2]
        self.terms = monomials(len(self.cuts), degrees[1])
        self.middles = [(c[1:] + c[:-1]) / 2 for c in self.cuts]
        self.halves = [(c[1:] - c[:-1]) / 2 for c in self.cuts]
        self._within: list[tuple[Any, Any] | None] = []
        for middle, grid in zip(self.middles, self.grids, strict=True):
            if grid is None:
                self._within.append(None)
                continue
            ranks = np.clip(np.searchsorted(grid, middle) - 1, 0, len(grid) - 2)
            each, last = np.arange(len(grid) - 1), len(middle) - 1
            starts, stops = np.searchsorted(ranks, each, "left"), np.searchsorted(ranks, each, "right") - 1
            self._within.append((np.clip(starts, 0, last), np.clip(stops, 0, last)))
        self._ends: dict[tuple[int, int, int], Floats] = {}

    def read(
        self, i: int, j: int, orders: tuple[int, ...], axes: Sequence[Pair], count: int, branch: Branch | None
    ) -> tuple[Pair, Branch]:
        """Range a box of Φ_ij differentiated `orders` times by (σ, *parameters), and the grid cells met."""
        met = self.met(axes, count, branch)
        return self.range(i, j, orders, met), met.branch

    def met(self, axes: Sequence[Pair], count: int, branch: Branch | None) -> Met:
        """Cells and pieces that boxes need, for every entry and derivative that is read there.

        `axes` are the ends of σ and of every parameter, a box. The branch names first grid cell and count an argument
        (0 and 1 where it is no library axis); if given, only cells within it are used.
        """
        wide = [(np.broadcast_to(low, (count,)), np.broadcast_to(high, (count,))) for low, high in axes]
        found_firsts, found_spans = [np.zeros(count, int)], [np.ones(count, int)]
        firsts, spans = [], []
        outside = ~((wide[0][0] >= -1 - TOLERANCE) & (wide[0][1] <= 1 + TOLERANCE))
        for k, (cuts, (low, high)) in enumerate(zip(self.cuts, wide[1:], strict=True)):
            first, last, beyond = _met(cuts, low, high)
            outside |= beyond
            grid, within = self.grids[k], self._within[k]
            if grid is None or within is None:
                found_firsts.append(np.zeros(count, int))
                found_spans.append(np.ones(count, int))
            else:
                if branch is None:
                    start, stop, _ = _met(grid, low, high)
                else:
                    start, stop = branch[0][k + 1], branch[0][k + 1] + branch[1][k + 1] - 1
                found_firsts.append(start)
                found_spans.append(stop - start + 1)
                first = np.clip(first, within[0][start], within[1][stop])
                last = np.clip(last, within[0][start], within[1][stop])
            firsts.append(first)
            spans.append(np.maximum(last - first, 0) + 1)
        share = [(x + 1) / 2 for x in wide[0]]
        first, last, _ = _met(self.pieces, *share)
        firsts.append(first)
        spans.append(np.maximum(last - first, 0) + 1)
        many = np.where(outside, 1, np.prod(spans, axis=0))
        size = len(self.terms.exponents) * max(self.degrees[0] + 1, len(self.terms.exponents))
        parts = [
            self._part(
                rows,
                [(a[rows], b[rows]) for a, b in wide],
                [f[rows] for f in firsts],
                [s[rows] for s in spans],
                many[rows],
            )
            for rows in _portions(many, max(1, AT_ONCE // size))
        ]
        return Met(outside, (found_firsts, found_spans), parts)

    def _part(self, rows: slice, wide: list[Pair], firsts: list[Any], spans: list[Any], many: Any) -> Part:
        starts = np.cumsum(many) - many
        owner = np.repeat(np.arange(len(many)), many)
        rank = np.arange(len(owner)) - starts[owner]
        index = []
        for k, (first, span) in enumerate(zip(firsts, spans, strict=True)):
            most = len(self.middles[k]) if k < len(self.middles) else len(self.pieces) - 1
            index.append(np.minimum(first[owner] + rank % span[owner], most - 1))
            rank = rank // span[owner]
        *cells, piece = index
        cell = np.zeros(len(owner), int)
        centre, radius, halves = [], [], []
        for k, c in enumerate(cells):
            cell = cell * len(self.middles[k]) + c
            halves.append(self.halves[k][c])
            a, b = (np.clip((x[owner] - self.middles[k][c]) / halves[k], -1, 1) for x in wide[k + 1])
            centre.append((a + b) / 2)
            radius.append((b - a) / 2)
        none = np.zeros((len(owner), 0))
        to, reach = (np.stack(x, axis=1) if x else none for x in (centre, radius))
        powers, time = self.terms.at(reach), None
        f, g = self.pieces[piece], self.pieces[piece + 1]
        if not (np.all(wide[0][0] == 1) and np.all(wide[0][1] == 1)):
            a, b = (np.clip((x[owner] + 1 - 2 * f) / (g - f) - 1, -1, 1) for x in wide[0])
            time = (a + b) / 2, (b - a) / 2
        return Part(rows, starts, owner, cell, piece, [g - f, *halves], self.terms.moves(to), powers, time)

    def range(self, i: int, j: int, orders: tuple[int, ...], met: Met) -> Pair:
        """Range a box of Φ_ij differentiated `orders` times by (σ, *parameters).

        nan outside the cuts and beyond second derivatives.
        """
        low, high = np.full(len(met.outside), np.nan), np.full(len(met.outside), np.nan)
        for part in met.parts if sum(orders) <= MOST_ORDERS else ():
            low[part.rows], high[part.rows] = self._hull(i, j, orders, part)
        return np.where(met.outside, np.nan, low), np.where(met.outside, np.nan, high)

    def _hull(self, i: int, j: int, orders: tuple[int, ...], part: Part) -> Pair:
        """Hull over the cells and pieces met, a box."""
        unit = np.ones(len(part.owner))
        for width, order in zip((*part.widths[1:], part.widths[0]), (*orders[1:], orders[0]), strict=True):
            unit = unit * width**order
        low, high = self._polynomials(i, j, orders, part)
        error = self.errors.of(orders[0], orders[1:], part.cell, part.piece, self.degrees[0])
        low, high = (low - error) / unit, (high + error) / unit
        if len(part.owner) > len(part.starts):
            low, high = np.minimum.reduceat(low, part.starts), np.maximum.reduceat(high, part.starts)
        return low, high

    def _polynomials(self, i: int, j: int, orders: tuple[int, ...], part: Part) -> Pair:
        """Value at the centre of each part, plus or minus the magnitudes of everything else about it."""
        target, source, factor = self.terms.slope(orders[1:])
        if not len(target):
            return np.zeros(len(part.owner)), np.zeros(len(part.owner))
        local = self._about_centres(i, j, orders[0], part)[:, source] * factor[:, None]
        spread = np.zeros(len(part.owner)) if part.time is None else part.time[1]
        scale = part.powers[:, target, None] * spread[:, None, None] ** np.arange(local.shape[2])
        middle = local[:, 0, 0]  # the constant is left by the lowest monomial, which stands first
        rest = (np.abs(local) * scale).sum(axis=(1, 2)) - np.abs(middle)
        return middle - rest, middle + rest

    def _about_centres(self, i: int, j: int, order: int, part: Part) -> Floats:
        """Coefficients by τ and s about the centre of each part, (parts, monomials, powers of s); of a rate too."""
        key = i, j, order
        if part.last is None or part.last[0] != key:
            if part.time is None:
                local = self._end(i, j, order)[part.cell][:, :, None]
            else:
                degree = self.degrees[0]
                last = max(degree, order) if np.any(part.time[1] > 0) else order
                weights = expanded(part.time[0], degree, order, last)
                weights *= factorials(order, last)[:, None]
                column = j - 1 if j else self.columns - 1
                local = self.coefficients[part.cell, part.piece, column, i - 1] @ weights.transpose(0, 2, 1)
            part.last = key, part.moves @ local
        return part.last[1]

    def _end(self, i: int, j: int, order: int) -> Floats:
        """Coefficients by τ of Φ_ij, or of a derivative by s, at touchdown: (cells, monomials)."""
        key = i, j, order
        if key not in self._ends:
            weights = expanded(np.ones(1), self.degrees[0], order, order)[0, 0] * factorials(order, order)[0]
            column = j - 1 if j else self.columns - 1
            self._ends[key] = self.coefficients[:, -1, column, i - 1] @ weights
        return self._ends[key]


def _met(lines: Floats, low: Floats, high: Floats) -> tuple[Any, Any, Any]:
    """First and last interval between lines that [low, high] needs, and whether it goes beyond them."""
    slack = TOLERANCE * float(np.diff(lines).min())
    first = np.clip(np.searchsorted(lines, low + slack, "right") - 1, 0, len(lines) - 2)
    last = np.clip(np.searchsorted(lines, high - slack, "left") - 1, 0, len(lines) - 2)
    return first, np.maximum(first, last), ~((low >= lines[0] - slack) & (high <= lines[-1] + slack))


def _portions(many: Any, most: int) -> list[slice]:
    """Runs of boxes with at most that many parts together, or one box."""
    total = np.cumsum(many)
    found, start = [], 0
    while start < len(many):
        done = total[start - 1] if start else 0
        stop = max(start + 1, int(np.searchsorted(total, done + most, "right")))
        found.append(slice(start, stop))
        start = stop
    return found
