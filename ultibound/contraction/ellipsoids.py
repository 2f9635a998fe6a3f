"""Ellipsoids: closed forms, and the programmes that better them (estimates).

Ellipsoid, in x_s = e_s / room_s. For a fixed k two convex programmes:
    minimise tr P                                subject to k²P − JᵀPJ ⪰ µI, P ⪰ I;                         (2)
    minimise max_s Z_ss + mean_s Z_ss / 4        subject to k²P − JᵀPJ ⪰ µI, [[P, I], [I, Z]] ⪰ 0,
                                                            mᵀPm <= 1 after scaling, P ⪯ CAP·I.            (3)
(2) is bisected on k, the gain measured at each P being the new upper end; (3) is searched over k. Both hold few of the
Jacobians and misses at first, and those that a solution violates are added. Without any solver: P = Q + AᵀPA/k² and
P⁻¹ = W + A P⁻¹ Aᵀ/k² (Kalman & Bertram 1960) for the mean Jacobian A, W the spread of the misses.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..bounding.intervals import Floats
from .judging import FLOOR, TOLERANCE, WIDER, Samples, judged, smallest
from .programmes import Programme, definite, gains_of
from .samples import extremes

LONGEST = 1e8  # trace of P beyond which (2) counts as infeasible
CLOSE = {"CLARABEL": TOLERANCE, "SCS": 1e-4}  # the second is slow where (2) is nearly infeasible
WAYS = (("CLARABEL", 1e-3), ("CLARABEL", 1e-6), ("SCS", 1e-3))  # solver and margin µ


def ellipsoids(s: Samples) -> Iterator[Floats]:
    """Closed forms first; then the programmes, which may fail, the next solver or margin being tried."""
    closed = [np.eye(len(s.room)), *_closed_forms(s)]
    yield from closed
    starts = [(j.gain, v.T @ v) for v in closed if np.isfinite((j := judged("ellipsoid", v, s)).gain)]
    start = min(starts, key=lambda each: each[0])
    low = _rate(s)
    least = start
    if start[0] - low > TOLERANCE:
        for solver, margin in WAYS:
            found = _least_gain(s, solver, margin, low, start)
            if found is not None:
                least = found
                break
    for solver, margin in WAYS:
        programme = Programme(s, solver, margin, False)
        gains = (least[0] + WIDER[0], least[0] + WIDER[1] * max(1 - least[0], 0.0))
        wider = [p for p in map(programme.solved, gains) if p is not None]
        if wider:
            yield from (v for p in wider for v in _root(p))
            break
    yield from _root(least[1])
    if len(s.misses) and least[0] < 1:
        for solver, margin in WAYS:
            programme = Programme(s, solver, margin, True)

            def make(k: float, programme: Programme = programme) -> Floats | None:
                p = programme.solved(k)
                return None if p is None else next(_root(p), None)

            best = list(smallest("ellipsoid", make, least[0], s, 11))
            if best:
                yield from best
                break


def _closed_forms(s: Samples) -> Iterator[Floats]:
    """P = I + AᵀPA/k², and P⁻¹ = W + A P⁻¹ Aᵀ/k², of the mean Jacobian at several k."""
    n, a = len(s.room), s.jacobians.mean(axis=0)
    radius = float(np.abs(np.linalg.eigvals(a)).max())
    spread = np.eye(n)
    if len(s.misses):
        spread = s.misses.T @ s.misses / len(s.misses)
        spread = spread / np.trace(spread) + FLOOR * np.eye(n)
    ends = [radius + d for d in (1e-4, 5e-4, 2e-3, 1e-2)]
    for k in [*ends, *(radius + (1 - radius) * t for t in (0.03, 0.1, 0.2, 0.4, 0.6, 0.8) if radius < 1)]:
        for q, of in ((np.eye(n), a.T), (spread, a)):
            try:
                p = np.linalg.solve(np.eye(n * n) - np.kron(of, of) / k**2, q.ravel()).reshape(n, n)
                yield from _root(np.asarray(p if q is not spread else np.linalg.inv(p), dtype=np.float64))
            except np.linalg.LinAlgError:
                continue


def _root(p: Floats) -> Iterator[Floats]:
    """Upper triangular V with VᵀV = P, where P is definite."""
    q = definite(p)
    if q is not None:
        yield np.asarray(np.linalg.cholesky(q).T, dtype=np.float64)


def _rate(s: Samples) -> float:
    """A lower limit of every gain: spectral radii of the Jacobians and, of extreme ones, of products of two."""
    some = s.jacobians[extremes(s.jacobians.reshape(len(s.jacobians), -1), 24)]
    two = np.abs(np.linalg.eigvals(some[:, None] @ some[None])).max(axis=2).max()
    return float(max(np.abs(np.linalg.eigvals(s.jacobians)).max(), np.sqrt(two)))


def _least_gain(
    s: Samples, solver: str, margin: float, low: float, start: tuple[float, Floats]
) -> tuple[float, Floats] | None:
    """Bisection of (2) on k; None where no P came out of it at all."""
    programme = Programme(s, solver, margin, False)
    (high, best), any_found = start, False
    for _ in range(40):
        if high - low <= CLOSE[solver]:
            break
        k = (low + high) / 2
        p = programme.solved(k)
        any_found = any_found or p is not None
        if p is None or np.trace(p) > LONGEST:
            low = k
            if programme.failures > 3 and not any_found and high == start[0]:
                p = programme.solved(high * 1.01 + 1e-3)  # is it k or the solver?
                if p is None:
                    return None
                any_found = True
            continue
        gain = float(gains_of(p, s.jacobians).max())
        if gain < high:
            high, best = gain, p
        if high > k * (1 + 1e-4) + 1e-9:
            low = k  # the solver is not that accurate here
    return (high, best) if any_found else None
