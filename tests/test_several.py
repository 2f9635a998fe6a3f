"""Random stable matrices of two to six states against scipy: the rate that is proved, the bounds against exact sums."""

from __future__ import annotations

import os
from fractions import Fraction

import numpy as np
import pytest
from scipy.linalg import solve_discrete_lyapunov

from tests.conftest import ends, proved
from tests.published.test_several import bounds, linear, verdicts

COUNT = 50
EVERY = 1 if os.environ.get("ULTIBOUND_LONG") else 3


def drawn(seed: int) -> tuple[np.ndarray, np.ndarray]:
    """A matrix to three decimals with spectral radius below 1, and magnitudes of disturbances."""
    rng = np.random.default_rng(seed)
    n = 2 + seed % 5
    a = rng.standard_normal((n, n))
    a *= rng.uniform(0.3, 0.95) / np.abs(np.linalg.eigvals(a)).max()
    return np.round(a, 3), np.round(rng.uniform(0.001, 0.02, n), 4)


def least_rate_in_reach(a: np.ndarray) -> float:
    """The rate of P = I + AᵀPA/k², k a little above the spectral radius: sup of eᵀAᵀPAe/eᵀPe, by scipy."""
    k = np.abs(np.linalg.eigvals(a)).max() + 5e-4
    p = solve_discrete_lyapunov((a / k).T, np.eye(len(a)))
    v = np.linalg.cholesky(p).T
    return float(np.linalg.norm(v @ a @ np.linalg.inv(v), 2))


@pytest.mark.parametrize("seed", range(0, COUNT, EVERY))
def test_rate_near_the_spectral_radius(seed: int) -> None:
    a, _ = drawn(seed)
    radius, reached = float(np.abs(np.linalg.eigvals(a)).max()), least_rate_in_reach(a)
    assert radius <= reached < radius + 1e-3
    rows = [[str(Fraction(x).limit_denominator(1000)) for x in row] for row in a]
    r = proved(linear(rows, ["0"] * len(a), "settles", "gain < 1")).results
    assert verdicts(r) == ["proved"] * 2
    assert radius - 1e-9 <= float(ends(r["gain"])[1]) <= radius + 1e-3


@pytest.mark.parametrize("seed", range(0, COUNT, EVERY))
def test_bounds_hold_the_exact_sums(seed: int) -> None:
    """sup |e_s| in the long run is Σ_n |(Aⁿ)_s·| w: below every bound, and not far below the best of them."""
    a, w = drawn(seed)
    exact, power = np.zeros(len(a)), np.eye(len(a))
    for _ in range(600):
        exact, power = exact + np.abs(power) @ w, power @ a
    rows = [[str(Fraction(x).limit_denominator(1000)) for x in row] for row in a]
    r = proved(linear(rows, [str(Fraction(x).limit_denominator(10**4)) for x in w], "settles")).results
    assert verdicts(r) == ["proved"]
    found = np.array([float(b) for b in bounds(r)])
    assert np.all(found >= exact * (1 - 1e-9)) and np.all(found <= 4 * exact)
