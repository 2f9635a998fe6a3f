"""The norm of matrices from one ellipsoid to another, by a matrix inequality a leaf (proofs/matrix.md (2e)).

In whole numbers of units of 2^-UNIT. What is bounded is rounded outward; what has to be definite is rounded to what is
less so.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from math import floor
from operator import mul

from .matrices import MOST_SLOPES, Leaf, Metric, added, dot, effect, magnitudes, whole
from .numerals import Rejected
from .vertices import Whole

UNIT = 80


@dataclass(frozen=True)
class Inequality:
    """‖A‖ <= bound, from the norm `before` (the magnitude of one number, where A is a vector) to the norm `after`.

    [[bound P - diag(b), Aᵀ], [A, bound Q - diag(a)]] is positive definite: xᵀP x = ‖x‖² before, yᵀQ y = |Lᵀy|² after.
    """

    before: Metric | None
    after: Metric
    xi: tuple[Fraction, ...]  # > 0, one a column
    eta: tuple[Fraction, ...]  # > 0, one a row
    bound: Fraction

    def __post_init__(self) -> None:
        shape = 1 if self.before is None else len(self.before.inverse), len(self.after.inverse)
        if (len(self.xi), len(self.eta)) != shape or not all(x > 0 for x in (*self.xi, *self.eta)):
            raise Rejected(f"scales: {shape[0]} and {shape[1]} positive numbers")

    @cached_property
    def p(self) -> Whole:
        columns = [[Fraction(1)]] if self.before is None else list(zip(*self.before.rows, strict=True))
        return lowered(columns, self.bound)

    @cached_property
    def q(self) -> Whole:
        return lowered(self.after.inverse, self.bound)

    @cached_property
    def scales(self) -> tuple[list[int], list[int]]:
        """ξ and η, multiplied by what makes them whole."""
        ((*both,),), _ = whole([(*self.xi, *self.eta)])
        return both[: len(self.xi)], both[len(self.xi) :]

    def holds(self, leaf: Leaf) -> bool:
        """Whether it is shown for every matrix of a leaf.

        Slopes are told apart one after the other, as far as it takes; until then they count as rest: (2d).
        """
        stack, unit = leaf.stack
        n = len(leaf.centre)
        if n != len(self.eta) or len(leaf.centre[0]) != len(self.xi):
            raise Rejected("matrix: a vector or a square matrix is bounded")
        centre, rest, *slopes = (
            [[(x << UNIT) // unit for x in row] for row in stack[k : k + n]] for k in range(0, len(stack), n)
        )
        rest = [[x + 2 + len(slopes) for x in row] for row in rest]  # each is less than 1 below what it stands for
        slopes = sorted((g for g in slopes if effect(g)), key=self.weight, reverse=True)
        for g in slopes[MOST_SLOPES:]:
            rest = added(rest, g)
        blocks, slopes = [self.blocks(rest)], slopes[:MOST_SLOPES]
        for g in reversed(slopes):
            rest = added(rest, g)
            blocks.append(self.blocks(rest))
        return self.shown(centre, slopes, blocks)

    def shown(self, centre: Whole, slopes: Sequence[Whole], blocks: Sequence[tuple[Whole, Whole]]) -> bool:
        """Whether it is shown for centre ± slopes, the last of the blocks with all of these as rest."""
        p, q = blocks[len(slopes)]
        if definite([[*row, *column] for row, column in zip(p, zip(*centre, strict=True), strict=True)] + q):
            return True
        if not slopes:
            return False
        first, *others = slopes
        ends = [
            [[x + sign * y for x, y in zip(*each, strict=True)] for each in zip(centre, first, strict=True)]
            for sign in (1, -1)
        ]
        return all(self.shown(end, others, blocks) for end in ends)

    def weight(self, slope: Whole) -> int:
        """What a slope counts for as rest: ηᵀ|G|ξ."""
        xi, eta = self.scales
        return sum(e * sum(map(mul, row, xi)) for e, row in zip(eta, magnitudes(slope), strict=True))

    def blocks(self, rest: Whole) -> tuple[Whole, Whole]:
        """bound P - diag(b) and bound Q - diag(a), their upper triangles; b = restᵀη/ξ, a = rest ξ/η."""
        xi, eta = self.scales
        return less(self.p, zip(*rest, strict=True), eta, xi), less(self.q, rest, xi, eta)


def less(m: Whole, lines: Iterable[Sequence[int]], weights: Sequence[int], scales: Sequence[int]) -> Whole:
    """A matrix less a diagonal: of each line its sum by the weights, over its scale."""
    taken = [sum(map(mul, line, weights)) for line in lines]
    return [[row[0] + -t // scale, *row[1:]] for row, t, scale in zip(m, taken, scales, strict=True)]


def lowered(vectors: Sequence[Sequence[Fraction]], factor: Fraction) -> Whole:
    """Upper triangle of a matrix below factor times the products of vectors."""
    scale = factor * 2**UNIT
    return below([[floor(scale * dot(x, y)) for y in vectors[i:]] for i, x in enumerate(vectors)])


def below(rows: Whole) -> Whole:
    """A symmetric matrix, of which no entry is 1 or more above the one given, less as many as it has rows."""
    return [[first - len(rows), *others] for first, *others in rows]


def definite(rows: Whole) -> bool:
    """Whether a symmetric matrix, its upper triangle row by row, is shown to be positive definite.

    Every Schur complement is replaced by a lesser one of whole numbers: proofs/matrix.md (4), Numbers.
    """
    while rows:
        (pivot, *across), *others = rows
        if pivot <= 0:
            return False
        rows = below(
            [
                [(pivot * x - first * y) // pivot for x, y in zip(row, across[k:], strict=True)]
                for k, (first, row) in enumerate(zip(across, others, strict=True))
            ]
        )
    return True
