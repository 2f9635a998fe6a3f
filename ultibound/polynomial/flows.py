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
        """Range a box of Φ_ij differentiated `orders` times by (σ, *parameters), and the grid cells met.

        `axes` are the ends of σ and of every parameter, a box; nan outside the cuts and beyond second derivatives.
        The branch names first grid cell and count an argument (0 and 1 where it is no library axis); if given, only
        cells within it are used.
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
        many = np.where(outside | (sum(orders) > MOST_ORDERS), 1, np.prod(spans, axis=0))
        low, high = np.full(count, np.nan), np.full(count, np.nan)
        if sum(orders) <= MOST_ORDERS:
            size = len(self.terms.exponents) * (self.degrees[0] + 1)
            for rows in _portions(many, max(1, AT_ONCE // size)):
                part = [(a[rows], b[rows]) for a, b in wide]
                ends = self._cells(i, j, orders, part, [f[rows] for f in firsts], [s[rows] for s in spans], many[rows])
                low[rows], high[rows] = ends
        found = found_firsts, found_spans
        return (np.where(outside, np.nan, low), np.where(outside, np.nan, high)), found

    def _cells(
        self, i: int, j: int, orders: tuple[int, ...], wide: list[Pair], firsts: list[Any], spans: list[Any], many: Any
    ) -> Pair:
        """Hull over the cells and pieces met, a box."""
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
        centre, radius, unit = [], [], np.ones(len(owner))
        for k, c in enumerate(cells):
            cell = cell * len(self.middles[k]) + c
            half = self.halves[k][c]
            unit = unit * half ** orders[k + 1]
            a, b = (np.clip((x[owner] - self.middles[k][c]) / half, -1, 1) for x in wide[k + 1])
            centre.append((a + b) / 2)
            radius.append((b - a) / 2)
        length = self.pieces[piece + 1] - self.pieces[piece]
        unit = unit * length ** orders[0]
        none = np.zeros((len(owner), 0))
        to, reach = (np.stack(x, axis=1) if x else none for x in (centre, radius))
        low, high = self._polynomials(i, j, orders, wide[0], owner, cell, piece, to, reach)
        error = self.errors.of(orders[0], orders[1:], cell, piece, self.degrees[0])
        low, high = (low - error) / unit, (high + error) / unit
        if len(owner) > len(many):
            low, high = np.minimum.reduceat(low, starts), np.maximum.reduceat(high, starts)
        return low, high

    def _polynomials(
        self,
        i: int,
        j: int,
        orders: tuple[int, ...],
        time: Pair,
        owner: Any,
        cell: Any,
        piece: Any,
        to: Floats,
        reach: Floats,
    ) -> Pair:
        """Value at the centre of each part, plus or minus the magnitudes of everything else about it."""
        if np.all(time[0] == 1) and np.all(time[1] == 1):
            local, spread = self._end(i, j, orders[0])[cell][:, :, None], np.zeros(len(owner))
        else:
            f, g = self.pieces[piece], self.pieces[piece + 1]
            a, b = (np.clip((x[owner] + 1 - 2 * f) / (g - f) - 1, -1, 1) for x in time)
            degree, spread = self.degrees[0], (b - a) / 2
            last = max(degree, orders[0]) if np.any(spread > 0) else orders[0]
            weights = expanded((a + b) / 2, degree, orders[0], last)
            weights *= factorials(orders[0], last)[:, None]
            column = j - 1 if j else self.columns - 1
            local = self.coefficients[cell, piece, column, i - 1] @ weights.transpose(0, 2, 1)
        local = self.terms.shifted(local, to)
        target, source, factor = self.terms.slope(orders[1:])
        if not len(target):
            return np.zeros(len(owner)), np.zeros(len(owner))
        local = local[:, source] * factor[:, None]
        scale = self.terms.at(reach)[:, target, None] * spread[:, None, None] ** np.arange(local.shape[2])
        middle = local[:, 0, 0]  # the constant is left by the lowest monomial, which stands first
        rest = (np.abs(local) * scale).sum(axis=(1, 2)) - np.abs(middle)
        return middle - rest, middle + rest

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
