"""Monomials of bounded total degree in several coordinates, in lexicographic order of their exponents."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from itertools import product
from math import comb, perm
from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
OVERSAMPLING = 3  # scattered points a monomial, where a full grid of points would be too many


class Monomials:
    """Exponent tuples of total degree <= `degree` in `size` coordinates, (count, size); with none, the tuple ()."""

    def __init__(self, size: int, degree: int) -> None:
        self.size, self.degree = size, degree
        self.exponents = [a for a in product(range(degree + 1), repeat=size) if sum(a) <= degree]
        self.rank = {a: k for k, a in enumerate(self.exponents)}
        self.powers = np.array(self.exponents, int).reshape(len(self.exponents), size)
        self._moves: list[list[tuple[Any, Any, Any]]] = []
        for axis in range(size):
            moves = []
            for m in range(1, degree + 1):
                source = [k for k, a in enumerate(self.exponents) if a[axis] >= m]
                target = [self.rank[_less(self.exponents[k], axis, m)] for k in source]
                binomial = [float(comb(self.exponents[k][axis], m)) for k in source]
                moves.append((np.array(source), np.array(target), np.array(binomial)))
            self._moves.append(moves)
        self._slopes: dict[tuple[int, ...], tuple[Any, Any, Floats]] = {}

    def at(self, points: Floats) -> Floats:
        """Values of the monomials at points (…, size): (…, count)."""
        out = np.ones((*points.shape[:-1], len(self.exponents)))
        for axis in range(self.size):
            out = out * points[..., axis, None] ** self.powers[:, axis]
        return out

    def shifted(self, coefficients: Floats, to: Floats) -> Floats:
        """Coefficients (boxes, count, …) of the same polynomial in coordinates counted from `to`, (boxes, size)."""
        for axis, moves in enumerate(self._moves):
            x = to[:, axis].reshape(-1, *(1,) * (coefficients.ndim - 1))
            out, power = coefficients.copy(), np.ones_like(x)
            for source, target, binomial in moves:
                power = power * x
                out[:, target] += coefficients[:, source] * binomial.reshape(-1, *(1,) * (out.ndim - 2)) * power
            coefficients = out
        return coefficients

    def slope(self, orders: Sequence[int]) -> tuple[Any, Any, Floats]:
        """Ranks of the monomials left by a derivative, of those they come from, and the factors."""
        if tuple(orders) in self._slopes:
            return self._slopes[tuple(orders)]
        target, source, factor = [], [], []
        for k, a in enumerate(self.exponents):
            if all(x >= o for x, o in zip(a, orders, strict=True)):
                source.append(k)
                target.append(self.rank[tuple(x - o for x, o in zip(a, orders, strict=True))])
                factor.append(float(np.prod([perm(x, o) for x, o in zip(a, orders, strict=True)])))
        found = self._slopes[tuple(orders)] = np.array(target, int), np.array(source, int), np.array(factor)
        return found


def _less(exponents: tuple[int, ...], axis: int, by: int) -> tuple[int, ...]:
    return tuple(x - by * (k == axis) for k, x in enumerate(exponents))


@lru_cache(maxsize=64)
def monomials(size: int, degree: int) -> Monomials:
    """The same object for the same arguments: its tables are made once."""
    return Monomials(size, degree)


@lru_cache(maxsize=64)
def sites(size: int, degree: int, reach: float) -> Floats:
    """Points within [-reach, reach]**size that determine a polynomial of the degree well: (points, size).

    Chebyshev points on a grid for up to two coordinates, else scattered with the same density.
    """
    if size <= 2:
        line = reach * np.polynomial.chebyshev.chebpts1(degree + 1)
        return np.array(list(product(line, repeat=size))).reshape((degree + 1) ** size, size)
    count = OVERSAMPLING * comb(size + degree, size)
    golden = 2.0  # the root of g**(size + 1) = g + 1: multiples of its powers are spread evenly
    for _ in range(60):
        golden = (1 + golden) ** (1 / (size + 1))
    steps = golden ** -np.arange(1.0, size + 1)
    scattered: Floats = reach * np.cos(np.pi * ((0.5 + np.arange(1, count + 1)[:, None] * steps) % 1))
    return scattered


@lru_cache(maxsize=64)
def fit(size: int, degree: int, reach: float) -> Floats:
    """From values at `sites` to coefficients of the monomials, by least squares: (count, points)."""
    return np.asarray(np.linalg.pinv(monomials(size, degree).at(sites(size, degree, reach))), float)
