"""Boxes, and boxes in a basis of their own: metrics of the largest magnitude (estimates).

A box, also in a basis U (then V = diag(1/p) U). For a fixed k there is a componentwise least p with
    max_m |U J_m U⁻¹| p <= k p,    p >= q,                                                                  (1)
as the left side rises with p: policies find it in a few linear solves. q = max |U m| makes b = 1/(1−k), so that p is
optimal for every size that rises with p; q = 1 gives the widest ball for that k. What is left is a search over k, and
over U: real eigenvector and Schur bases, the best of them improved by seeded random changes.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import suppress
from math import pi

import numpy as np

from ..bounding.intervals import Floats
from .judging import FLOOR, TOLERANCE, WIDER, Judged, Samples, judged, smallest
from .samples import extremes

WIDEST = 1e4  # ratio of the scales of a box
CHANGES = 400  # of a basis, tried at random


def boxes(s: Samples) -> Iterator[Floats]:
    n = len(s.room)
    yield np.eye(n)
    yield from _scaled("box", np.eye(n), s)


def polytopes(s: Samples) -> Iterator[Floats]:
    found = [v for u in _bases(s) for v in _scaled("polytope", u, s)]
    found.sort(key=lambda v: judged("polytope", v, s).order)
    yield from found
    for v in [*found[:1], *list(_scaled("box", np.eye(len(s.room)), s))[-1:]]:
        changed = _changed(v, s)
        yield changed
        yield from _scaled("polytope", changed, s)


def _changed(v: Floats, s: Samples) -> Floats:
    """A better basis by seeded random changes, which grow after a success and shrink after a failure."""
    some = s.jacobians[extremes(s.jacobians.reshape(len(s.jacobians), -1), 48)]
    few = Samples(some, s.misses[extremes(s.misses, 48)], s.room)
    rng, step, n = np.random.default_rng(0), 0.1, len(v)
    best = _merit(judged("polytope", v, few))
    for _ in range(CHANGES):
        tried = (np.eye(n) + step * rng.standard_normal((n, n)) / n) @ v
        merit = _merit(judged("polytope", tried, few))
        if merit < best:
            v, best, step = tried, merit, step * 1.5
        else:
            step = max(step * 0.9, 1e-4)
    return v


def _merit(j: Judged) -> tuple[float, float]:
    """The size of the bound, or the gain where there is none."""
    return (0.0, j.size) if j.gain < 1 and j.residual > 0 else (1.0 if j.residual > 0 else 0.0, j.gain)


def _scaled(kind: str, u: Floats, s: Samples) -> Iterator[Floats]:
    """diag(1/p) U by (1): least gain, a wider ball for little more, least size; by sample and by entrywise suprema."""
    try:
        w = np.linalg.inv(u)
    except np.linalg.LinAlgError:
        return
    if not np.all(np.isfinite(w)) or np.linalg.cond(u) > 1e7:
        return
    if kind == "polytope" and np.all((np.abs(u) > 1e-9 * np.abs(u).max()).sum(axis=1) == 1):
        return  # a box
    n, each = len(u), np.abs(u @ s.jacobians @ w)
    q = np.abs(s.misses @ u.T).max(axis=0, initial=0.0)
    for table in (each, each.max(axis=0)[None]):
        low, least = 0.0, np.ones(n)
        high = float((table @ least).max())
        for _ in range(60):
            if high - low <= TOLERANCE * max(1.0, high):
                break
            k = (low + high) / 2
            p = least_above(table, np.ones(n), k)
            if p is None or p.max() > WIDEST:
                low = k
            else:
                high, least = min(k, max(low, float((table @ p / p).max()))), p
        yield u / least[:, None]
        for k in (high + WIDER[0], high + WIDER[1] * max(1 - high, 0.0)):
            wider = least_above(table, np.ones(n), k)
            if wider is not None:
                yield u / wider[:, None]
        if q.max() > 0 and high < 1:
            p = comparison_vector(table, q, 1e-2 * q.max() * np.ones(n))
            if p is not None:
                yield u / p[:, None]
            floor = np.maximum(q, FLOOR * q.max())

            def make(k: float, table: Floats = table, floor: Floats = floor) -> Floats | None:
                p = least_above(table, floor, k)
                return None if p is None else u / p[:, None]

            yield from smallest(kind, make, high, s, 24)


def comparison_vector(table: Floats, residual: Floats, spare: Floats) -> Floats | None:
    """The least p with max_m table_m p + ε + spare <= p, (I − K)⁻¹(ε + spare) for one K; None where there is none.

    {|e| <= p} is mapped into itself componentwise, whatever its norm tells.
    """
    n, p = len(residual), residual + spare
    for _ in range(50):
        which = (table @ p).argmax(axis=0)
        rows = table[which, np.arange(n)]
        try:
            after = np.linalg.solve(np.eye(n) - rows, residual + spare)
        except np.linalg.LinAlgError:
            return None
        if not np.all(np.isfinite(after)) or not np.all(after >= p * (1 - 1e-9)):
            return None
        if np.all(after <= p * (1 + 1e-12)):
            return p
        p = np.maximum(after, p)
    return None


def least_above(table: Floats, q: Floats, k: float) -> Floats | None:
    """The least p >= q > 0 with max_m table_m p <= k p, table (M, n, n) >= 0, by policies; None where there is none.

    Each row takes its largest lower limit at the last p, q_i or one sample's (table p)_i / k, and is solved for as an
    equation: p rises, and ends when no limit exceeds it.
    """
    if not k > 0:
        return q if not table.any() else None
    n, p = len(q), q
    for _ in range(50):
        limits = table @ p / k
        which = limits.argmax(axis=0)
        top = limits[which, np.arange(n)]
        if np.all(top <= p * (1 + 1e-12)):
            return p
        active = top > q
        rows = np.where(active[:, None], table[which, np.arange(n)] / k, 0.0)
        try:
            after = np.linalg.solve(np.eye(n) - rows, np.where(active, 0.0, q))
        except np.linalg.LinAlgError:
            return None
        if not np.all(np.isfinite(after)) or not np.all(after >= p * (1 - 1e-9)) or np.all(active):
            return None
        p = np.maximum(after, p)
    return None


def _bases(s: Samples) -> Iterator[Floats]:
    """Inverse eigenvector and Schur bases of the mean and of the fastest growing Jacobian."""
    radii = np.abs(np.linalg.eigvals(s.jacobians)).max(axis=1)
    mean = s.jacobians.mean(axis=0)
    for a in [mean] if len(s.jacobians) == 1 else [mean, s.jacobians[int(radii.argmax())]]:
        values, vectors = np.linalg.eig(a)
        pairs = bool(np.any(values.imag != 0))
        for angle in (0.0, pi / 8, pi / 4, 3 * pi / 8) if pairs else (0.0,):
            for order in (np.argsort(-np.abs(values), kind="stable"), np.argsort(np.abs(values), kind="stable")):
                real = _real_basis(values[order], vectors[:, order], angle)
                if real is None:
                    continue
                if order[0] == np.argsort(-np.abs(values), kind="stable")[0]:
                    with suppress(np.linalg.LinAlgError):
                        yield np.asarray(np.linalg.inv(real), dtype=np.float64)
                yield np.linalg.qr(real)[0].T  # nested invariant subspaces: the Schur vectors


def _real_basis(values: Floats, vectors: Floats, angle: float) -> Floats | None:
    """Columns: real eigenvectors; real and imaginary part, turned, of one of each complex pair."""
    columns: list[Floats] = []
    for x, v in zip(values, vectors.T, strict=True):
        if x.imag == 0:
            columns.append(v.real)
        elif x.imag > 0:
            v = v * np.exp(1j * (angle - np.angle(np.sum(v * v)) / 2))  # at angle 0 the two parts are orthogonal
            columns += [v.real, v.imag]
    basis = np.array(columns).T
    return basis if basis.shape == vectors.shape else None
