"""Contraction of the step-to-step map: what size of region would carry a bound (search only, nothing proved)."""

from __future__ import annotations

from collections.abc import Callable

GROWTH = 1.15
LARGEST = 40


def enough_radius(radius: float, gain: Callable[[float], float], residual: float) -> float | None:
    """Least of a rising series of radii R with k(R) R + ε ≤ R and ε/(1−k(R)) < R, or None; an estimate.

    `gain(R)` is the supremum of |∂F/∂x| over the ball of radius R, beyond the region where need be.
    """
    r = max(radius, residual, 1e-12)
    for _ in range(LARGEST):
        k = gain(r)
        if not k < 1:
            return None
        if k * r + residual <= r and residual < r * (1 - k):
            return r
        r = max(r * GROWTH, min(residual / (1 - k) * 1.001, 2 * r))
    return None
