"""Chebyshev polynomials T_0 .. T_N on [-1, 1]: matrices of evaluation, integration and expansion about a point."""

from __future__ import annotations

from math import factorial

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import NDArray

Floats = NDArray[np.float64]


def points(count: int) -> Floats:
    """The zeros of T_count, ascending."""
    return np.asarray(chebyshev.chebpts1(count), float)


def values(at: Floats, degree: int) -> Floats:
    """T_0 .. T_degree at points (…): (…, degree + 1)."""
    return np.asarray(chebyshev.chebvander(at, degree), float)


def fit(count: int) -> Floats:
    """(count, count): from values at `points(count)` to coefficients."""
    found: Floats = values(points(count), count - 1).T * (2.0 / count)
    found[0] /= 2
    return found


def integral(count: int) -> Floats:
    """(count + 1, count): from coefficients to those of the integral from -1."""
    return np.asarray(chebyshev.chebint(np.eye(count), lbnd=-1, axis=0), float)


def derivative(count: int) -> Floats:
    """(count, count): from coefficients to those of the derivative, the last of them 0."""
    found = np.zeros((count, count))
    if count > 1:
        found[:-1] = chebyshev.chebder(np.eye(count), axis=0)
    return found


def expanded(at: Floats, degree: int, first: int, last: int) -> Floats:
    """Taylor coefficients of T_0 .. T_degree at points (boxes,): (boxes, orders first .. last, degree + 1)."""
    found = np.zeros((degree + 1, len(at), last + 1))
    found[0, :, 0] = 1
    if degree:
        found[1, :, 0] = at
        if last:
            found[1, :, 1] = 1
    for k in range(2, degree + 1):
        found[k] = 2 * at[:, None] * found[k - 1] - found[k - 2]
        found[k, :, 1:] += 2 * found[k - 1, :, :-1]
    return np.moveaxis(found, 0, 2)[:, first:]


def factorials(first: int, last: int) -> Floats:
    """m! / (m - first)! for m = first .. last: the factors a derivative of that order gives to powers."""
    return np.array([factorial(m) / factorial(m - first) for m in range(first, last + 1)])
