"""Products of Jacobians that grow, found in floating point."""

from __future__ import annotations

import numpy as np
import pytest

from ultibound.contraction.words import MOST_POWER, Word, fastest


def rate(jacobians: np.ndarray, word: Word) -> float:
    m = np.eye(jacobians.shape[1])
    for k in word.letters:
        m = jacobians[k] @ m
    return float(np.abs(np.linalg.eigvals(m)).max()) ** (1 / len(word.letters))


def test_the_pair_of_the_golden_ratio() -> None:
    """Jungers 2009: no product of [[1, 1], [0, 1]] and its transpose has a rate above that of one after the other."""
    pair = np.array([[[1.0, 1], [0, 1]], [[1, 0], [1, 1]]])
    found = fastest(pair)
    assert found is not None and sorted(found.letters) == [0, 1]
    assert rate(pair, found) == pytest.approx((1 + 5**0.5) / 2) and 0.999 < found.rate / rate(pair, found) <= 1


def test_a_turn_is_shown_at_a_power_that_turns_it_back() -> None:
    turn = 2 * np.pi / 7
    m = 0.9 * np.array([[[np.cos(turn), -np.sin(turn)], [np.sin(turn), np.cos(turn)]]])
    found = fastest(m)
    assert found is not None and len(found.letters) == 1
    assert found.power % 7 == 0 or 2 * found.power % 7 == 0
    assert found.power <= MOST_POWER and found.rate == pytest.approx(0.9)


@pytest.mark.parametrize("seed", range(6))
def test_what_is_shown_is_at_most_the_rate(seed: int) -> None:
    rng = np.random.default_rng(seed)
    n = 2 + seed % 5
    some = rng.standard_normal((20, n, n))
    found = fastest(some)
    assert found is not None and 1 <= len(found.letters) <= 6
    m = np.eye(n)
    for k in found.letters:
        m = some[k] @ m
    values = np.linalg.eigvals(m).astype(complex)
    shown = abs(((values / np.abs(values).max()) ** found.power).sum())
    exact = rate(some, found)
    assert found.rate == pytest.approx(exact * (shown / n) ** (1 / (found.power * len(found.letters))), rel=1e-6)
    assert 0.99 * exact < found.rate <= exact * (1 + 1e-12)


def test_nothing_grows() -> None:
    assert fastest(np.zeros((0, 2, 2))) is None
    assert fastest(np.zeros((3, 2, 2))) is None
    assert fastest(np.array([[[0.0, 1], [0, 0]]])) is None
