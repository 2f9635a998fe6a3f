"""The error curve φ(ρ) = sup |F − x*| over |e| ≤ ρ: radii for its shells, and the slope of a line above it.

Estimates by samples; what is proved of them is for the lines to say.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

import numpy as np

from ..bounding.evaluate import Runner
from ..bounding.intervals import Floats
from ..claim.obligations import Obligation
from .samples import drawn

SAMPLES = 20_000


class Profile:
    """φ from below, by samples of an `error` obligation over the whole set, plus what held targets move."""

    def __init__(self, runner: Runner, obligation: Obligation, error: str, moved: float) -> None:
        at = drawn(obligation, SAMPLES, np.random.default_rng(0))
        names = [v.name for v in obligation.variables]
        rho = np.abs(at[:, names.index(error)]) if error in names else np.zeros(len(at))
        size = np.abs(runner(at, at, gradient=False).low)
        order = np.argsort(rho, kind="stable")
        self.rho: Floats = rho[order]
        self.phi: Floats = np.maximum.accumulate(np.where(np.isfinite(size[order]), size[order], np.inf)) + moved

    def at(self, radius: float) -> float:
        k = int(np.searchsorted(self.rho, radius * (1 + 1e-12), "right")) - 1
        return float(self.phi[max(k, 0)])

    def largest_kept(self, share: float) -> float | None:
        """The largest radius that the curve maps into itself with a share to spare."""
        kept = np.flatnonzero(self.phi * (1 + share) < self.rho)
        return float(self.rho[kept[-1]]) if len(kept) else None

    def slope(self) -> Fraction:
        """The k in [0, 1) whose line k ρ + ε above the curve has the least ε/(1 − k), nearly."""
        low, high = 0.0, 1 - 1e-6
        for _ in range(60):  # the bound is quasiconvex in k
            a, b = low + 0.382 * (high - low), low + 0.618 * (high - low)
            low, high = (low, b) if self._bound(a) <= self._bound(b) else (a, high)
        return Fraction(f"{low:.5g}") if self._bound(low) < self._bound(0.0) else Fraction(0)

    def _bound(self, k: float) -> float:
        return float(np.max(self.phi - k * self.rho)) / (1 - k)


def inward(outermost: Fraction, level: Callable[[Fraction], float], gap: float, most: int) -> tuple[Fraction, ...]:
    """Rising radii up to the outermost, each led into the next: `level(ρ)` tells how far a step leads from within ρ."""
    found = [outermost]
    while len(found) <= most:
        after = level(found[-1]) * (1 + gap)
        within = Fraction(f"{after:.12g}") if 0 < after < float(found[-1]) * (1 - gap / 8) else found[-1]
        if not 0 < within < found[-1]:  # not led further in, or by less than is written down
            break
        found.append(within)
    return tuple(reversed(found))
