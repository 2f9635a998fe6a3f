"""The norm over boxes from one ellipsoid to another: the greatest eigenvalue of a matrix (proofs/matrix.md (2e)).

Floating point, for the search. In w and u, x = L w and y = Vᵀu, the matrix is
    [[Lᵀ diag(b) L, Bᵀ], [B, V diag(a) Vᵀ]],   B = V (C + Σ t_l G_l) L,   b = restᵀη/ξ,   a = rest ξ/η,
t one of the corners of the cube. The scales ξ, η > 0 are free; those of `fitted` bring the eigenvalue near its least.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..bounding.intervals import Floats

MOST_SLOPES = 8  # as in the checker: further ones count as rest
STARTS, TURNS = 2, 3  # eigenvectors from which the signs of slopes are chosen; how often they are chosen anew
FITS, NEAREST = 30, 1e-3  # rounds of a fit; how near a barrier comes to the eigenvalue in the end
Scales = tuple[Floats, Floats]


@dataclass(frozen=True, slots=True)
class Greatest:
    """A box each: the eigenvalue, the signs of its corner (boxes, variables), and |x|, |y| where it is reached."""

    value: Floats
    signs: Floats
    x: Floats
    y: Floats


def plain(rows: Floats, right: Floats) -> Scales:
    """Scales before any leaf is known: how far a unit ball reaches along each state."""
    return np.sqrt((right**2).sum(axis=1)), np.sqrt((rows**2).sum(axis=0))


def blocks(rows: Floats, right: Floats, rest: Floats, scales: Scales) -> Floats:
    """The matrix without B, of rests (boxes, n, c)."""
    xi, eta = scales
    a, b = rest @ xi / eta, eta @ rest / xi
    c = right.shape[1]
    found = np.zeros((len(rest), c + len(rows), c + len(rows)))
    found[:, :c, :c] = np.einsum("ji,bj,jk->bik", right, b, right)
    found[:, c:, c:] = np.einsum("ij,bj,kj->bik", rows, a, rows)
    return found


def told_apart(slopes: Floats, rest: Floats, scales: Scales) -> tuple[Floats, Floats]:
    """Slopes (boxes, variables, n, c), all but a box's largest 0, and the rest (boxes, n, c) with the others."""
    weight = np.einsum("i,bkij,j->bk", scales[1], np.abs(slopes), scales[0])
    least = np.argsort(-weight, axis=1, kind="stable")[:, MOST_SLOPES:]
    given = np.zeros_like(weight)
    np.put_along_axis(given, least, 1.0, axis=1)
    more: Floats = rest + np.einsum("bk,bkij->bij", given, np.abs(slopes))
    return slopes * (1 - given)[:, :, None, None], more


def greatest(
    rows: Floats, right: Floats, centre: Floats, slopes: Floats, rest: Floats, scales: Scales, first: Floats | None
) -> Greatest:
    """Estimates, by corners that the eigenvectors point to: never too large; too small by a fifth, perhaps, where
    slopes are as large as the centre, and by little where they are small beside it, as on the last leaves of a search.

    centre, rest (boxes, n, c); slopes (boxes, variables, n, c); all finite. `first`: signs (boxes, variables) to start
    from as well; where the centre is 0 no eigenvector points anywhere.
    """
    c = right.shape[1]
    signs = np.ones(slopes.shape[:2])
    slopes, rest = told_apart(slopes, rest, scales)
    told = rows @ slopes @ right
    still = blocks(rows, right, rest, scales)
    still[:, c:, :c] = rows @ centre @ right
    value = np.full(len(centre), -np.inf)
    best = np.zeros((len(centre), c + len(rows)))
    _, vectors = np.linalg.eigh(still)

    def aligned(z: Floats) -> Floats:
        found: Floats = np.where(np.einsum("bi,bkij,bj->bk", z[:, c:], told, z[:, :c]) >= 0, 1.0, -1.0)
        return found

    starts = [aligned(vectors[:, :, -k]) for k in range(1, min(STARTS, c + len(rows)) + 1)]
    if told.shape[1]:  # and where the largest slope points to
        heavy = still.copy()
        heavy[:, c:, :c] += told[np.arange(len(told)), np.argmax(np.abs(told).sum(axis=(2, 3)), axis=1)]
        starts.append(aligned(np.linalg.eigh(heavy)[1][:, :, -1]))
    for t in [*starts, *([] if first is None else [first])]:
        for _ in range(TURNS):
            here = still.copy()
            here[:, c:, :c] += np.einsum("bk,bkij->bij", t, told)
            values, turned = np.linalg.eigh(here)  # of the lower triangle
            z = turned[:, :, -1]
            better = values[:, -1] > value
            value = np.where(better, values[:, -1], value)
            signs, best = np.where(better[:, None], t, signs), np.where(better[:, None], z, best)
            t = aligned(z)
    return Greatest(value, signs, np.abs(best[:, :c] @ right.T), np.abs(best[:, c:] @ rows))


def fitted(rows: Floats, right: Floats, a: Floats, rest: Floats, scales: Scales) -> Scales:
    """Scales for one matrix A (n, c) and its rest, better than those given if any are found.

    A barrier -log det(r - M) is stationary in the scales where ξ² and η² are the diagonals of the inverse's blocks, in
    x and y; r comes down to the eigenvalue.
    """
    c, best, found = right.shape[1], np.inf, scales
    for turn in range(FITS):
        m = blocks(rows, right, rest[None], scales)[0]
        m[c:, :c] = rows @ a @ right
        m[:c, c:] = m[c:, :c].T
        value = float(np.linalg.eigvalsh(m)[-1])
        if value < best:
            best, found = value, scales
        inverse = np.linalg.inv((value * (1 + max(0.3 * 0.8**turn, NEAREST))) * np.eye(len(m)) - m)
        xi, eta = (
            np.einsum("ij,jk,ik->i", v, part, v) for v, part in ((right, inverse[:c, :c]), (rows.T, inverse[c:, c:]))
        )
        if not (np.isfinite(xi).all() and np.isfinite(eta).all() and xi.min() > 0 and eta.min() > 0):
            break
        scales = np.sqrt(xi), np.sqrt(eta)
    return found
