"""Trial polynomials of the fundamental solutions by collocation, many cells at a time, and their defects.

Y' = h (A Y + b) on each piece, s in [-1, 1], as V = Y' at Chebyshev points: V - hA ∫V = h (A Y(-1) + b), which stays
well conditioned at any degree. Everything here is floating point.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from ..bounding.intervals import Floats
from ..polynomial import chebyshev
from ..polynomial.monomials import fit, monomials, sites
from .estimate import Sizes
from .plans import Cells
from .points import Rates, Unsolved

REACH = 0.6  # points for the fit lie within this share of a cell: nearer to Taylor's, defects have smaller coefficients
LARGEST = 2.0**37  # sum of the coefficients of a polynomial that can still be written down


def solved(rates: Rates, cells: Cells, pieces: Floats, degree: int, places: Floats) -> Floats:
    """Chebyshev coefficients of Y at places τ: (cells, points, pieces, columns, states, degree + 1)."""
    n, columns = rates.size, rates.columns
    times = chebyshev.points(degree)
    matrix, free = rates(cells.at(places), pieces, times)
    up = chebyshev.integral(degree) @ chebyshev.fit(degree)  # coefficients of Y - Y(-1) from V
    sums = chebyshev.values(times, degree) @ up
    count = cells.middle.shape[0], places.shape[0]
    start = np.zeros((*count, n, columns))
    start[..., np.arange(n), np.arange(n)] = 1
    parts = []
    for k in range(len(pieces) - 1):
        a = matrix[:, :, k]
        system = -np.einsum("cpjab,jl->cpjalb", a, sums)
        index = np.arange(degree)
        for i in range(n):
            system[:, :, index, i, index, i] += 1
        right = np.einsum("cpjab,cpbm->cpjam", a, start)
        right[..., n:] += free[:, :, k]
        try:
            speed = np.linalg.solve(
                system.reshape(*count, degree * n, degree * n), right.reshape(*count, degree * n, columns)
            ).reshape(*count, degree, n, columns)
        except np.linalg.LinAlgError:
            raise Unsolved("the collocation system is singular") from None
        found = np.einsum("kj,cpjam->cpmak", up, speed)
        found[..., 0] += start.swapaxes(2, 3)
        start = found.sum(axis=-1).swapaxes(2, 3)
        parts.append(found)
    return np.stack(parts, axis=2)


def defect(rates: Rates, cells: Cells, pieces: Floats, at: Floats, places: Floats) -> tuple[Floats, Floats]:
    """Chebyshev coefficients of Y' - h (A Y + b) where Y has those of `at`, as from `solved`; and hA.

    (cells, points, pieces, columns, states, degree + 3) and (cells, points, pieces, times, n, n).
    """
    degree = at.shape[-1] - 1
    times = chebyshev.points(degree + 3)
    matrix, free = rates(cells.at(places), pieces, times)
    value = at @ chebyshev.values(times, degree).T
    slope = at @ (chebyshev.values(times, degree) @ chebyshev.derivative(degree + 1)).T
    left: Floats = slope - np.einsum("cpktab,cpkmbt->cpkmat", matrix, value)
    left[:, :, :, rates.size :] -= free.swapaxes(-1, -3)
    return left @ chebyshev.fit(degree + 3).T, matrix


def fitted(at: Floats, size: int, degree: int, reach: float) -> Floats:
    """Monomial coefficients in τ from values at `sites` there: (cells, points, …) to (cells, monomials, …)."""
    found: Floats = np.tensordot(fit(size, degree, reach), at, axes=(1, 1)).swapaxes(0, 1)
    return found


def rounded(found: Floats, bits: int) -> Any:
    """Whole numbers over 2**bits: (cells, pieces, columns, states, monomials, degree + 1).

    From (cells, monomials, pieces, columns, states, degree + 1); T_0 is such that every piece starts exactly where the
    one before ended, the first at the identity (0 for the free column).
    """
    if not np.abs(found).sum(axis=-1).max() < LARGEST:
        raise Unsolved("the motion grows beyond 10**9 within a stance")
    whole = np.rint(np.ldexp(found.transpose(0, 2, 3, 4, 1, 5), bits)).astype(np.int64)
    signs = (-1) ** np.arange(whole.shape[-1])
    start = np.zeros((whole.shape[0], *whole.shape[2:5]), np.int64)
    n = whole.shape[3]
    start[:, np.arange(n), np.arange(n), 0] = 1 << bits
    for k in range(whole.shape[1]):
        whole[:, k, ..., 0] += start - (whole[:, k] * signs).sum(axis=-1)
        start = whole[:, k].sum(axis=-1)
    return whole


def measured(rates: Rates, cells: Cells, pieces: Floats, whole: Any, bits: int, degree: int) -> tuple[Sizes, Floats]:
    """Sizes of rates and defects over each cell and piece, for `estimate.compared`; and each parameter's share.

    The defect is fitted to one degree more in τ, and bounded by the sums of its coefficients' magnitudes; the share,
    (cells, parameters), is what the highest monomials contribute by the parameters in them.
    """
    size = cells.middle.shape[1]
    finer = degree + 1 if size else 0
    places = sites(size, finer, 1.0)
    at = monomials(size, degree).at(places) @ np.ldexp(whole.astype(float), -bits)  # (cells, …, points, degree + 1)
    found, matrix = defect(rates, cells, pieces, at.transpose(0, 4, 1, 2, 3, 5), places)
    terms = monomials(size, finer)
    sizes = np.abs(fitted(found, size, finer, 1.0)).sum(axis=-1).swapaxes(-1, -2)
    rates_by = np.abs(fitted(matrix, size, finer, 1.0)).max(axis=3)
    highest = terms.powers * (terms.powers.sum(axis=1) == terms.degree)[:, None]
    share = np.tensordot(sizes.max(axis=(2, 3, 4)), highest, axes=(1, 0))
    first, second = terms.powers.astype(float), np.zeros((len(terms.powers), size, size))
    for k in range(size):
        second[:, k, :] = first[:, k, None] * (first - (np.arange(size) == k))
    one = np.ones((len(terms.powers), 1))

    def by(x: Floats, weights: Floats) -> Floats:
        return np.tensordot(x, weights.reshape(len(weights), -1), axes=(1, 0))

    shape = sizes.shape[0], *sizes.shape[2:]
    wide = rates_by.shape[0], *rates_by.shape[2:]
    return Sizes(
        np.abs(matrix).max(axis=(1, 3)),
        by(rates_by, first).reshape(*wide, size),
        by(rates_by, second).reshape(*wide, size, size),
        by(sizes, one).reshape(shape),
        by(sizes, first).reshape(*shape, size),
        by(sizes, second).reshape(*shape, size, size),
    ), share
