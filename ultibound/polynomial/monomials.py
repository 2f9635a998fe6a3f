"""Monomials of bounded total degree in several coordinates, in lexicographic order of their exponents."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from itertools import product
from math import comb, perm, prod
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
        below = (self.powers[:, None] <= self.powers).all(axis=2)
        self._target, self._source = np.nonzero(below)
        exponents = [(self.exponents[s], self.exponents[t]) for s, t in zip(self._source, self._target, strict=True)]
        self._lost = np.array([self.rank[tuple(x - y for x, y in zip(a, b, strict=True))] for a, b in exponents], int)
        self._ways = np.array([float(prod(map(comb, a, b))) for a, b in exponents])
        self._slopes: dict[tuple[int, ...], tuple[Any, Any, Floats]] = {}

    def at(self, points: Floats) -> Floats:
        """Values of the monomials at points (…, size): (…, count)."""
        out = np.ones((*points.shape[:-1], len(self.exponents)))
        for axis in range(self.size):
            powers = [np.ones(points.shape[:-1])]
            for _ in range(self.degree):
                powers.append(powers[-1] * points[..., axis])
            out *= np.stack(powers, axis=-1)[..., self.powers[:, axis]]
        return out

    def moves(self, to: Floats) -> Floats:
        """From the coefficients of a polynomial to those counted from `to`, (boxes, size): (boxes, count, count)."""
        count = len(self.exponents)
        out = np.zeros((len(to), count * count))
        out[:, self._target * count + self._source] = self.at(to)[:, self._lost] * self._ways
        return out.reshape(len(to), count, count)

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
