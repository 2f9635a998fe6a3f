"""Norms over boxes, as the search estimates them: between what corners attain and what the checker allows."""

from __future__ import annotations

from itertools import product
from typing import Any

import numpy as np
import pytest

from ultibound.contraction.inequalities import plain
from ultibound.contraction.norms import Affine, Norm, over_boxes, seen


def drawn(seed: int, variables: int, columns: int, centre: float) -> tuple[Norm, Affine]:
    """An ellipsoid of three states and a box over which a matrix is affine, with no rest."""
    rng = np.random.default_rng(seed)
    rows = rng.uniform(-1, 1, (3, 3)) + 2 * np.eye(3)
    slopes = rng.uniform(-1, 1, (1, variables, 3, columns))
    nothing = np.zeros((1, 3, columns))
    middle = centre * rng.uniform(-1, 1, (1, 3, columns))
    norm = Norm(rows, np.linalg.inv(rows) if columns > 1 else None, True)
    return norm, Affine(middle, slopes, nothing, np.zeros_like(slopes), np.zeros(1, bool))


def attained(norm: Norm, a: Affine) -> float:
    """The largest norm at a corner."""
    signs = np.array(list(product((1.0, -1.0), repeat=a.slopes.shape[1])))
    corners: Any = norm.rows @ (a.centre[0] + np.einsum("sk,kij->sij", signs, a.slopes[0])) @ norm.right
    return float(np.linalg.norm(corners, 2, axis=(1, 2)).max())


@pytest.mark.parametrize("centre", [0.0, 0.1, 3.0])
@pytest.mark.parametrize("variables", [1, 5, 8, 12])
def test_vectors(variables: int, centre: float) -> None:
    """Up to eight variables nothing is given away; of more, those that are not told apart are a rest."""
    for seed in range(4):
        norm, a = drawn(seed, variables, 1, centre)
        (found,), _, _ = seen(norm, a, plain(norm.rows, norm.right))
        (by_corners,), _ = over_boxes(norm, a)
        most = attained(norm, a)
        assert most * (1 - 1e-9) <= found <= by_corners * (1 + 1e-12)
        assert found <= most * (1 + 1e-9 if variables <= 8 else 1.3)


@pytest.mark.parametrize("centre, share", [(0.0, 0.8), (3.0, 0.8), (30.0, 0.99)])
def test_matrices(centre: float, share: float) -> None:
    """Corners that eigenvectors point to: none lies above the largest; small slopes leave little to miss."""
    for seed in range(8):
        norm, a = drawn(seed, 6, 3, centre)
        (found,), _, _ = seen(norm, a, plain(norm.rows, norm.right))
        assert attained(norm, a) * share <= found <= attained(norm, a) * (1 + 1e-9)
