"""Vertices of polytopes in exact whole numbers, by elimination (proofs/polytope.md (1))."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import combinations, product
from math import comb
from operator import mul

from .numerals import Rejected

Whole = list[list[int]]

MOST = 20_000  # choices of rows and sides


def vertices(v: Whole, low: Sequence[int], high: Sequence[int], states: int) -> Iterator[list[int]]:
    """Those of {low_i <= (V q)_i <= high_i}, a common denominator last: independent rows, as many as states, are each
    at one end, and the others within. Raises Rejected where there are too many choices of them."""
    if comb(len(v), states) * 2**states > MOST:
        raise Rejected(f"rows: more than {MOST} choices of as many as there are states, and sides")
    ends = low, high
    for some in combinations(range(len(v)), states):
        determinant, adjugate = inverted([v[i] for i in some])
        if determinant == 0:
            continue
        for sides in product((0, 1), repeat=states):
            at = [ends[side][i] for i, side in zip(some, sides, strict=True)]
            q = [sum(map(mul, row, at)) for row in adjugate]  # V q = determinant * ends
            images = (sum(map(mul, row, q)) for row in v)
            if all(a * determinant <= y <= b * determinant for y, a, b in zip(images, *ends, strict=True)):
                yield [*q, determinant]


def inverted(m: Whole) -> tuple[int, Whole]:
    """D > 0 and D times the inverse, by elimination without fractions (every division is exact); D = 0 if singular."""
    n, before = len(m), 1
    rows = [[*row, *(int(i == j) for j in range(n))] for i, row in enumerate(m)]
    for k in range(n):
        at = next((i for i in range(k, n) if rows[i][k]), None)
        if at is None:
            return 0, []
        rows[k], rows[at] = rows[at], rows[k]
        pivot = rows[k]
        rows = [
            pivot if i == k else [(pivot[k] * x - row[k] * y) // before for x, y in zip(row, pivot, strict=True)]
            for i, row in enumerate(rows)
        ]
        before = pivot[k]
    sign = 1 if before > 0 else -1
    return sign * before, [[sign * x for x in row[n:]] for row in rows]
