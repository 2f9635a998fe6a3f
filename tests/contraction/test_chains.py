"""Rows that follow a map: exactly a basis, and what vanishes on it."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from ultibound.contraction.chains import MOST_ROWS, chain


@pytest.mark.parametrize("seed", range(8))
def test_the_chain_of_a_random_matrix(seed: int) -> None:
    rng = np.random.default_rng(seed)
    n = 2 + seed % 5
    a = rng.standard_normal((n, n)) * 10.0 ** rng.integers(-3, 2)
    found = chain(a, rng.uniform(0.1, 2, n))
    assert found is not None and 2 * n <= len(found.rows) <= MOST_ROWS and len(found.rows) % n == 0
    rows, left, beside = (np.array([list(row) for row in m]) for m in (found.rows, found.inverse, found.beside))
    one = np.array([[Fraction(int(i == j)) for j in range(n)] for i in range(n)])
    assert (left @ rows == one).all() and not (beside @ rows).any()  # exactly
    power = np.eye(n)
    for j in range(len(rows) // n):  # Aʲ, to about a millionth; each is led to the next, and by little else
        block = rows[j * n : j * n + n]
        assert np.allclose(block.astype(float), power, atol=2e-6 * np.abs(power).max())
        power = power @ a
        if j + 1 < len(rows) // n:
            led = block.astype(float) @ a @ left.astype(float) + beside[j * n : j * n + n].astype(float)
            exact = np.zeros_like(led)
            exact[:, (j + 1) * n : (j + 2) * n] = np.eye(n)
            assert np.allclose(led, exact, atol=1e-5 * np.abs(power).max())


def test_a_chain_ends_where_a_power_has_faded() -> None:
    short = chain(np.diag([0.05, 0.05]), np.ones(2))
    long = chain(np.diag([0.9, 0.9]), np.ones(2))
    assert short is not None and len(short.rows) == 6 and long is not None and len(long.rows) == MOST_ROWS
    nothing = chain(np.zeros((2, 2)), np.ones(2))
    assert nothing is not None and len(nothing.rows) == 4
    assert chain(np.full((2, 2), np.nan), np.ones(2)) is None
