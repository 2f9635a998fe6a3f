"""Rows that follow a map for some steps: bases in which a comparison loses next to nothing (proofs/matrix.md (6)).

With A near every Jacobian, V = [1; A; A²; …; A^m] and Z = [−Y C, Y], C = V without its first n rows and Y = 1 from
each Aʲ to the next: |Aʲ e⁺| ≤ |Aʲ⁺¹ e| + |Aʲ(J − A)||e| + |Aʲ(F(x*) − x*)|, which adds up to Σ_j |Aʲ(F(x*) − x*)|.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from ..bounding.intervals import Floats

MOST_ROWS = 30
FADED = 0.01  # of the states' sizes, at which a power is left to its norm
BITS = 20
Exact = tuple[tuple[Fraction, ...], ...]


@dataclass(frozen=True, slots=True)
class Chain:
    """V, a left inverse, and Z with Z V = 0, exact."""

    rows: Exact
    inverse: Exact
    beside: Exact


def chain(middle: Floats, size: Floats) -> Chain | None:
    """The chain of a matrix A (n, n); `size` (n,) > 0: how far each state may be from its target."""
    n, power = len(middle), np.eye(len(middle))
    blocks: list[list[list[Fraction]]] = []
    while (len(blocks) + 2) * n <= MOST_ROWS:
        power = power @ middle
        if not np.isfinite(power).all():
            return None
        blocks.append([[_short(x, float(np.abs(row).max())) for x in row] for row in power])
        if np.all(np.abs(power) @ size <= FADED * size):
            break
    if not blocks:
        return None
    one = [[Fraction(int(i == j)) for j in range(n)] for i in range(n)]
    nothing = [Fraction(0)] * n
    rows = [*one, *(row for block in blocks for row in block)]
    count = len(rows)
    beside = []
    for i in range(count):
        to = i + n  # the row that Aʲ leads to, beyond the last none
        row = [Fraction(0)] * count
        if to < count:
            row[:n], row[to] = [-x for x in rows[to]], Fraction(1)
        beside.append(tuple(row))
    inverse = tuple((*row, *nothing * len(blocks)) for row in one)
    return Chain(tuple(map(tuple, rows)), inverse, tuple(beside))


def _short(x: float, largest: float) -> Fraction:
    """A number to so many bits of the largest of its row."""
    if largest == 0:
        return Fraction(0)
    unit = 2.0 ** (BITS - int(np.ceil(np.log2(largest))))
    return Fraction(round(x * unit)) / Fraction(unit)
