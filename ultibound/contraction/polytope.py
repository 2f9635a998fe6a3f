"""Polytopes {low <= V e <= high} that a map is drawn into: estimates, from its affine parts over boxes.

Over a leaf e⁺ = J e + m with [J | m] = C + Σ t_l G_l + D. From a point the ends grow to what a step leads to,
    high_i = max over leaves and vertices q of (V (J q + m))_i + shift_i + slack_i,
until the slack covers what is left to grow (proofs/polytope.md (2) then holds, but for rounding).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations, product
from math import comb

import numpy as np

from ..bounding.intervals import Floats
from ..checker.matrices import Leaf

STEPS = 400
SLACK = 1e-3  # of the width of the polytope in each row, added at every step
SPARE = 1e-3  # of the slack, left to rounding
LARGEST = 20.0  # times the sizes of the states, at which growing has failed
ANGLES = 8  # directions of two states
POWERS = 4  # of the middle Jacobian, whose rows are directions of more states
NEAR = 1 - 1e-4  # cosine of directions that count as one
Ends = tuple[Floats, Floats]


@dataclass(frozen=True)
class Pieces:
    """[J | m] over leaves, in floating point: centre (leaves, n, n + 1), slopes (leaves, l, n, n + 1), rest."""

    centre: Floats
    slopes: Floats
    rest: Floats

    @classmethod
    def of(cls, leaves: Sequence[Leaf]) -> Pieces:
        most = max(len(x.slopes) for x in leaves)
        shape = len(leaves[0].centre), len(leaves[0].centre[0])
        slopes = np.zeros((len(leaves), most, *shape))
        for k, x in enumerate(leaves):
            if x.slopes:
                slopes[k, : len(x.slopes)] = np.array(x.slopes, dtype=np.float64)
        centre, rest = (np.array([each(x) for x in leaves], dtype=np.float64) for each in (_centre, _rest))
        return cls(centre, slopes, rest)

    def hull(self) -> tuple[Floats, Floats]:
        """Middle and half width of every entry over all leaves."""
        off = np.abs(self.slopes).sum(axis=1) + self.rest
        low, high = (self.centre - off).min(axis=0), (self.centre + off).max(axis=0)
        return (low + high) / 2, (high - low) / 2

    def seen(self, rows: Floats) -> Pieces:
        """V [J | m]."""
        return Pieces(rows @ self.centre, rows @ self.slopes, np.abs(rows) @ self.rest)

    def ends(self, q: Floats) -> Ends:
        """Least and largest of each row at vertices q (vertices, n + 1), over all leaves."""
        middle, off = self.centre @ q.T, self.rest @ np.abs(q.T)
        if self.slopes.shape[1]:
            off = off + np.abs(self.slopes @ q.T).sum(axis=1)
        return (middle - off).min(axis=(0, 2)), (middle + off).max(axis=(0, 2))


def _centre(x: Leaf) -> object:
    return x.centre


def _rest(x: Leaf) -> object:
    return x.rest


def directions(middle: Floats, sizes: Floats, noise: Floats, most: int, angles: int = ANGLES) -> Floats:
    """Rows of V, |row| · sizes = 1: the states, what leads to them, directions spread where e⁺ = A e + noise goes.

    `most`: choices of as many of them as there are states, and sides, as vertices are found among; `angles`: of two
    states.
    """
    n = len(middle)
    spread, power = np.zeros((n, n)), np.diag(noise)
    for _ in range(STEPS):
        spread, power = spread + power @ power.T, middle @ power
        if not np.isfinite(power).all() or np.abs(power).max() > 1e6 * max(noise.max(), 1e-300):
            break
    root = np.linalg.inv(np.linalg.cholesky(spread + 1e-6 * np.diag(np.diag(spread))))
    if n == 2:
        turns = np.pi * np.arange(angles) / angles
        tried = [np.eye(n), np.stack([np.cos(turns), np.sin(turns)], axis=1) @ root]
    else:
        tried = [np.linalg.matrix_power(middle, j) for j in range(POWERS)]
        tried.append(np.array([s for s in product((-1, 0, 1), repeat=n) if s > (0,) * n]) @ root)
    found: list[Floats] = []
    for row in np.vstack(tried) * sizes:
        if (len(found) + 1 > n and comb(len(found) + 1, n) * 2**n > most) or not np.abs(row).sum() > 0:
            continue
        if all(abs(row @ x) < NEAR * np.linalg.norm(row) * np.linalg.norm(x) for x in found):
            found.append(row / np.abs(row).sum())
    return np.array(found) / sizes


def drawn_in(pieces: Pieces, rows: Floats, shifts: Floats, start: Floats, sizes: Floats) -> Ends | None:
    """Ends that a step keeps, nearly the least; None where they keep growing."""
    seen = pieces.seen(rows)
    wide = 1e-6 * (np.abs(rows) @ sizes)
    low, high = rows @ start - wide, rows @ start + wide
    for _ in range(STEPS):
        q = vertices(rows, low, high)
        if not len(q) or np.any(np.abs(q) > LARGEST * sizes):
            return None
        least, most = seen.ends(np.hstack([q, np.ones((len(q), 1))]))
        least, most = least - shifts, most + shifts
        slack = SLACK * np.maximum(most - least, wide)
        if np.all(least >= low + SPARE * slack) and np.all(most <= high - SPARE * slack):
            return low, high
        low, high = np.minimum(low, least - slack), np.maximum(high, most + slack)
    return None


def vertices(rows: Floats, low: Floats, high: Floats) -> Floats:
    """Vertices (vertices, n) of a polytope, some perhaps twice."""
    n = rows.shape[1]
    some = np.array(list(combinations(range(len(rows)), n)))
    parts = rows[some]
    good = np.abs(np.linalg.det(parts)) > 1e-9 * np.prod(np.linalg.norm(parts, axis=2), axis=1)
    some, inverses = some[good], np.linalg.inv(parts[good])
    ends = np.stack([low, high])
    sides = np.array(list(product((0, 1), repeat=n)))
    at = ends[sides[None], some[:, None]]  # (choices, sides, n)
    q = np.einsum("kij,ksj->ksi", inverses, at).reshape(-1, n)
    images = q @ rows.T
    room = 1e-9 * (high - low)
    found: Floats = q[((images >= low - room) & (images <= high + room)).all(axis=1)]
    return found
