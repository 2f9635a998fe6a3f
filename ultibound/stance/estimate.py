"""What a defect amounts to by the end of a stance: the comparison of proofs/trajectory.md, in floating point."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..bounding.intervals import Floats
from ..polynomial.flows import Errors

TERMS = 14  # of the exponential series, after scaling its argument below 1/2


@dataclass(frozen=True, slots=True)
class Sizes:
    """Suprema over a cell and a piece, entry by entry: of hA (n by n) and of the defect (n by columns).

    (cells, pieces, n, ·), then one axis more for each derivative by a coordinate τ of the cell.
    """

    rate: Floats
    rate_slope: Floats
    rate_bend: Floats
    defect: Floats
    defect_slope: Floats
    defect_bend: Floats


def compared(sizes: Sizes) -> tuple[Errors, Floats]:
    """Estimated errors of the trial polynomials and of their derivatives, largest entries; and at the end, each entry.

    |e|(1) <= G e(-1) + H δ, G = exp(2B), H = ∫_0^2 exp(Bu) du, pieces one after another; the same for the derivatives
    with what the lower ones add to the defect. Every piece starts exactly where the one before ended.
    """
    with np.errstate(over="ignore", invalid="ignore"):
        return _compared(sizes)


def _compared(sizes: Sizes) -> tuple[Errors, Floats]:
    cells, pieces, n = sizes.rate.shape[:3]
    size = sizes.rate_slope.shape[-1]
    shape = cells, n, sizes.defect.shape[3]
    e, slope, bend = np.zeros(shape), np.zeros((size, *shape)), np.zeros((size, size, *shape))
    value, rate = np.zeros((cells, pieces)), np.zeros((cells, pieces))
    slopes, turns = np.zeros((cells, pieces, size)), np.zeros((cells, pieces, size))
    bends = np.zeros((cells, pieces, size, size))
    for p in range(pieces):
        b, by = sizes.rate[:, p], sizes.rate_slope[:, p]
        grown, summed = growth(b)
        added = sizes.defect[:, p]
        e = grown @ e + summed @ added
        value[:, p], rate[:, p] = _most(e), _most(b @ e + added)
        for k in range(size):
            added = by[..., k] @ e + sizes.defect_slope[:, p, ..., k]
            slope[k] = grown @ slope[k] + summed @ added
            slopes[:, p, k], turns[:, p, k] = _most(slope[k]), _most(b @ slope[k] + added)
        for k in range(size):
            for m in range(k + 1):
                added = by[..., k] @ slope[m] + by[..., m] @ slope[k]
                added += sizes.rate_bend[:, p, ..., k, m] @ e + sizes.defect_bend[:, p, ..., k, m]
                bend[k, m] = grown @ bend[k, m] + summed @ added
                bends[:, p, k, m] = bends[:, p, m, k] = _most(bend[k, m])
    return Errors(value, rate, slopes, turns, bends), e


def growth(rate: Floats) -> tuple[Floats, Floats]:
    """exp(2B) and ∫_0^2 exp(Bu) du of matrices B >= 0 (…, n, n)."""
    n = rate.shape[-1]
    block = np.zeros((*rate.shape[:-2], 2 * n, 2 * n))
    block[..., :n, :n] = 2 * rate
    block[..., np.arange(n), n + np.arange(n)] = 2
    norm = float(np.abs(block).sum(axis=-1).max(initial=0.5))
    halvings = min(60, max(0, int(np.ceil(np.log2(2 * norm)))))
    block = block / 2.0**halvings
    total = np.broadcast_to(np.eye(2 * n), block.shape).copy()
    for m in range(TERMS, 0, -1):
        total = np.eye(2 * n) + block @ total / m
    for _ in range(halvings):
        total = total @ total
    return total[..., :n, :n], total[..., :n, n:]


def _most(x: Floats) -> Floats:
    found: Floats = x.max(axis=(1, 2))
    return found
