"""What samples tell of a metric |V e|: its gain, its residual, how far its unit ball reaches (estimates).

The size of a bound is max_s u_s + mean_s u_s / 4, u_s = bound_s / room_s; max_s u_s <= 1 says that the largest ball in
the region is mapped into itself.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from math import inf, lgamma, log, pi

import numpy as np

from ..bounding.intervals import Floats

SPARE = 0.02  # share of the radius that a good ball leaves
MEAN = 0.25  # weight of the mean of the states' bounds beside the largest
WIDER = (1e-3, 0.2)  # gains given away for a wider ball: plainly, and as a share of what is left to 1
FLOOR = 1e-4  # least residual of a state, against the largest
TOLERANCE = 2e-6  # of the least gain
Make = Callable[[float], Floats | None]  # gain -> V of about that gain


@dataclass(frozen=True, slots=True)
class Samples:
    """Jacobians (M, n, n), misses (K, n) and room (n,) in the same coordinates."""

    jacobians: Floats
    misses: Floats
    room: Floats


@dataclass(frozen=True, slots=True)
class Judged:
    gain: float
    residual: float
    shares: Floats  # extent of the unit ball along each state, against the room
    volume: float  # logarithm, of the largest ball within the room

    @property
    def size(self) -> float:
        if not self.gain < 1:
            return inf
        u = self.residual / (1 - self.gain) * self.shares
        return float(u.max() + MEAN * u.mean())

    @property
    def order(self) -> tuple[float, ...]:
        """Balls mapped into themselves with room to spare first, the smallest bound (or gain) first."""
        if not self.gain < 1:
            return (2.0, self.gain if np.isfinite(self.gain) else inf, 0.0)
        if self.residual == 0:
            return (0.0, round(self.gain, 4), -self.volume)
        kept = self.residual / (1 - self.gain) * float(self.shares.max()) <= 1 - SPARE
        return (0.0 if kept else 1.0, self.size, self.gain)


def judged(kind: str, v: Floats, s: Samples, inverse: Floats | None = None) -> Judged:
    """Gain, residual and extents by the samples; infinite where V has no inverse."""
    n = len(v)
    try:
        w = np.linalg.inv(v) if inverse is None else inverse
        turned = v @ s.jacobians @ w
        moved = s.misses @ v.T
        if kind == "ellipsoid":
            gains, lengths = np.linalg.norm(turned, 2, axis=(1, 2)), np.linalg.norm(moved, axis=1)
            shares, ball = np.linalg.norm(w, axis=1) / s.room, n / 2 * log(pi) - lgamma(n / 2 + 1)
        else:
            gains, lengths = np.abs(turned).sum(axis=2).max(axis=1), np.abs(moved).max(axis=1)
            shares, ball = np.abs(w).sum(axis=1) / s.room, n * log(2)
        volume = ball - float(np.linalg.slogdet(v)[1]) - n * float(np.log(shares.max()))
        return Judged(float(gains.max()), float(lengths.max(initial=0.0)), shares, volume)
    except np.linalg.LinAlgError:
        return Judged(inf, inf, np.full(n, inf), -inf)


def smallest(kind: str, make: Make, low: float, s: Samples, looks: int) -> Iterator[Floats]:
    """The V of least size over k in (low, 1): a coarse look, then golden sections about the best."""
    seen: dict[float, tuple[float, Floats]] = {}

    def size(t: float) -> float:
        if t not in seen:
            v = make(low + (1 - low) * t)
            seen[t] = (inf, np.eye(len(s.room))) if v is None else (judged(kind, v, s).size, v)
        return seen[t][0]

    grid = [0.0, 0.05, 0.2, 0.4, 0.6, 0.8, 1.0]
    at = min(range(1, len(grid) - 1), key=lambda i: size(grid[i]))
    a, b = grid[at - 1], grid[at + 1]
    while len(seen) < looks and b - a > 1e-3:
        c, d = a + 0.382 * (b - a), a + 0.618 * (b - a)
        a, b = (a, d) if size(c) <= size(d) else (c, b)
    best = min(seen.values(), key=lambda each: each[0])
    if best[0] < inf:
        yield best[1]
