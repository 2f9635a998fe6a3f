"""Balls of many sides from leaves of Jacobians and misses, against trajectories that may turn round."""

from __future__ import annotations

import numpy as np
import pytest

from ultibound.contraction.norms import floats
from ultibound.contraction.polytope import Pieces
from ultibound.contraction.sides import many_sided


def pieces(middle: np.ndarray, miss: np.ndarray, off: float) -> Pieces:
    """One leaf: the Jacobian moves by `off` of itself as one value does, every entry and miss by a little of its own."""
    centre = np.column_stack([middle, miss])[None]
    slopes = np.concatenate([off * centre[:, :, :-1], np.zeros((1, len(miss), 1))], axis=2)[:, None]
    return Pieces(centre, slopes, np.full(centre.shape, 1e-3))


@pytest.mark.parametrize("seed", range(2))
def test_ball_is_kept_and_contracts(seed: int) -> None:
    rng = np.random.default_rng(seed)
    n = 2 + seed % 2
    a = rng.standard_normal((n, n))
    a *= 0.75 / np.abs(np.linalg.eigvals(a)).max()
    p = pieces(a, rng.uniform(-0.1, 0.1, n), 0.05)
    found = many_sided(p, np.full(n, 1e-3), np.full(n, 2.0))
    assert found is not None and found.share < 1
    v, left = floats(found.rows), floats(found.inverse)
    assert np.allclose(left @ v, np.eye(n)) and len(v) >= n
    # points of the ball by chance, values at their ends: |V J e| <= λ, |V (J e + m)| + shifts <= 1
    e = rng.standard_normal((n, 1000))
    e /= np.abs(v @ e).max(axis=0)
    assert np.abs(e).max() <= 2
    for _ in range(40):
        shake = rng.choice([-1.0, 1.0], p.rest[0].shape) * p.rest[0]
        j = p.centre[0] + rng.choice([-1.0, 1.0]) * p.slopes[0, 0] + shake
        assert np.abs(v @ j[:, :n] @ e).max() <= found.share * (1 + 1e-5)
        assert (np.abs(v @ (j[:, :n] @ e + j[:, n:])) + (np.abs(v) @ np.full(n, 1e-3))[:, None]).max() <= 1 + 1e-5
    # a wider room lets the ball contract more, a narrow one leaves none
    wide, narrow = (many_sided(p, np.full(n, 1e-3), np.full(n, room)) for room in (6.0, 0.1))
    assert wide is not None and wide.share <= found.share and narrow is None


def test_none_where_the_map_grows() -> None:
    a = np.array([[0.6, 0.9], [-0.9, 0.6]])
    assert many_sided(pieces(a, np.array([0.01, 0.0]), 0.0), np.zeros(2), np.full(2, 10.0)) is None
