"""Interval operations on numpy arrays of ends, without outward rounding: a search, not a proof."""

from __future__ import annotations

from collections.abc import Callable
from itertools import product
from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Pair = tuple[Floats, Floats]
Branch = tuple[list[Any], list[Any]]
GRID_TOLERANCE = 1e-12  # share of a cell by which a rounded axis value may miss a grid line


def known(a: Pair) -> bool:
    """Whether both ends are one array: points, which cost half."""
    return a[0] is a[1]


def add(a: Pair, b: Pair) -> Pair:
    low = a[0] + b[0]
    return low, low if known(a) and known(b) else a[1] + b[1]


def sub(a: Pair, b: Pair) -> Pair:
    low = a[0] - b[1]
    return low, low if known(a) and known(b) else a[1] - b[0]


def mul(a: Pair, b: Pair) -> Pair:
    if known(b):
        a, b = b, a
    if known(a):
        p = a[0] * b[0]
        if known(b):
            return p, p
        q = a[0] * b[1]
        return np.minimum(p, q), np.maximum(p, q)
    p, q, r, s = a[0] * b[0], a[0] * b[1], a[1] * b[0], a[1] * b[1]
    return np.minimum(np.minimum(p, q), np.minimum(r, s)), np.maximum(np.maximum(p, q), np.maximum(r, s))


def hull(a: Pair, b: Pair) -> Pair:
    return np.minimum(a[0], b[0]), np.maximum(a[1], b[1])


def div(a: Pair, b: Pair) -> Pair:
    through = (b[0] <= 0) & (b[1] >= 0)
    low = np.where(through, np.nan, 1 / b[1])
    return mul(a, (low, low if known(b) else np.where(through, np.nan, 1 / b[0])))


def power(a: Pair, n: int) -> Pair:
    low = a[0] ** n
    if known(a):
        return low, low
    high = a[1] ** n
    if n % 2:
        return low, high
    return np.where((a[0] <= 0) & (a[1] >= 0), 0.0, np.minimum(low, high)), np.maximum(low, high)


def cosh(a: Pair) -> Pair:
    low = np.cosh(a[0])
    if known(a):
        return low, low
    high = np.cosh(a[1])
    return np.where((a[0] <= 0) & (a[1] >= 0), 1.0, np.minimum(low, high)), np.maximum(low, high)


def sin(a: Pair) -> Pair:
    low = a[0] - np.pi / 2
    return cos((low, low if known(a) else a[1] - np.pi / 2))


def cos(a: Pair) -> Pair:
    low = np.cos(a[0])
    if known(a):
        return low, low
    high = np.cos(a[1])
    top = np.floor(a[1] / (2 * np.pi)) >= np.ceil(a[0] / (2 * np.pi))
    bottom = np.floor((a[1] - np.pi) / (2 * np.pi)) >= np.ceil((a[0] - np.pi) / (2 * np.pi))
    return np.where(bottom, -1.0, np.minimum(low, high)), np.where(top, 1.0, np.maximum(low, high))


def tan(a: Pair) -> Pair:
    low = np.tan(a[0])
    if known(a):
        return low, low
    pole = np.floor((a[1] - np.pi / 2) / np.pi) >= np.ceil((a[0] - np.pi / 2) / np.pi)
    return np.where(pole, np.nan, low), np.where(pole, np.nan, np.tan(a[1]))


def falling(function: Callable[[Floats], Floats]) -> Callable[[Pair], Pair]:
    return lambda a: rising(function)(a)[::-1]


def rising(function: Callable[[Floats], Floats]) -> Callable[[Pair], Pair]:
    def applied(a: Pair) -> Pair:
        low = function(a[0])
        return low, low if known(a) else function(a[1])

    return applied


def _log(x: Floats) -> Floats:
    return np.where(x > 0, np.log(x), np.nan)


UNARY: dict[str, Callable[[Pair], Pair]] = {
    "sqrt": rising(np.sqrt),
    "exp": rising(np.exp),
    "log": rising(_log),
    "asin": rising(np.arcsin),
    "acos": falling(np.arccos),
    "atan": rising(np.arctan),
    "sinh": rising(np.sinh),
    "tanh": rising(np.tanh),
    "cosh": cosh,
    "sin": sin,
    "cos": cos,
    "tan": tan,
}


class Table:
    """One library column in floating point, read by multilinear interpolation (proofs/reading.md)."""

    def __init__(self, grid: list[Floats], nodes: Floats) -> None:
        self.grid, self.nodes = grid, nodes

    def read(self, axes: list[Pair], orders: tuple[int, ...], count: int, branch: Branch | None) -> tuple[Pair, Branch]:
        """Range of the reading, or of its derivatives, a box, and the cells met: first ones and counts, an axis.

        `branch` gives the cells to use instead: those of the whole box when a part of it is evaluated.
        """
        firsts, spans, outside = [], [], np.zeros(count, bool)
        wide = [(np.broadcast_to(a[0], (count,)), np.broadcast_to(a[1], (count,))) for a in axes]
        for (low, high), g in zip(wide, self.grid, strict=True):
            slack = GRID_TOLERANCE * float(np.diff(g).min())
            outside |= ~((low >= g[0] - slack) & (high <= g[-1] + slack))
            first = np.clip(np.searchsorted(g, low + slack, "right") - 1, 0, len(g) - 2)
            last = np.clip(np.searchsorted(g, high - slack, "left") - 1, 0, len(g) - 2)
            firsts.append(first)
            spans.append(np.maximum(last - first, 0) + 1)
        if branch is not None:
            firsts, spans = branch
        many = np.prod(spans, axis=0)
        many = np.where(outside, 1, many)
        owner = np.repeat(np.arange(count), many)
        rank = np.arange(len(owner)) - np.repeat(np.cumsum(many) - many, many)
        low, high = self._cells(wide, firsts, spans, orders, owner, rank)
        if len(owner) > count:
            starts = np.cumsum(many) - many
            low, high = np.minimum.reduceat(low, starts), np.maximum.reduceat(high, starts)
        return (np.where(outside, np.nan, low), np.where(outside, np.nan, high)), (firsts, spans)

    def _cells(
        self, wide: list[Pair], firsts: list[Any], spans: list[Any], orders: tuple[int, ...], owner: Any, rank: Any
    ) -> Pair:
        index, ends, widths = [], [], []
        for (low, high), g, first, span in zip(wide, self.grid, firsts, spans, strict=True):
            cell = np.minimum(first[owner] + rank % span[owner], len(g) - 2)
            rank = rank // span[owner]
            index.append(cell)
            widths.append(g[cell + 1] - g[cell])
            ends.append(
                (
                    np.clip((low[owner] - g[cell]) / widths[-1], 0, 1),
                    np.clip((high[owner] - g[cell]) / widths[-1], 0, 1),
                )
            )
        corners = [
            self.nodes[tuple(i + b for i, b in zip(index, bits, strict=True))]
            for bits in product((0, 1), repeat=len(index))
        ]
        folded = np.array(corners).reshape((2,) * len(index) + (len(owner),))
        for axis, order in enumerate(orders):
            c0, c1 = np.take(folded, [0], axis), np.take(folded, [1], axis)
            if order:
                folded = (c1 - c0) / widths[axis]
            else:
                folded = np.concatenate([c0 + e * (c1 - c0) for e in ends[axis]], axis)
        flat = folded.reshape(-1, len(owner))
        return flat.min(axis=0), flat.max(axis=0)
