"""Metrics |V e| for several states: which balls a map takes into themselves, and how small they may be.

Search only: floats and solvers propose, samples judge, nothing here is proved. Three kinds of V, all square:

    box        V = diag(w), w > 0, largest magnitude    bound_s = b / w_s
    polytope   any V, largest magnitude                 bound_s = b Σ_j |(V⁻¹)_sj|
    ellipsoid  any V, Euclidean length, P = VᵀV         bound_s = b √(P⁻¹)_ss

with gain k = max ‖V J V⁻¹‖, residual ε = max ‖V m‖ and b = ε/(1−k). The size of a bound is max_s u_s + mean_s u_s / 4,
u_s = bound_s / room_s; max_s u_s <= 1 says that the largest ball in the region is mapped into itself.

Boxes and their kin: `polytopes.py`; ellipsoids: `ellipsoids.py`, `programmes.py`.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from ..bounding.intervals import Floats
from .ellipsoids import ellipsoids
from .judging import Samples, judged
from .polytopes import boxes, polytopes
from .samples import extremes

KINDS = ("box", "polytope", "ellipsoid")
MOST = 8
LARGEST = 512  # samples in the search; all of them judge what it found
EACH = 2  # of every kind, before the best of the rest
HUGE = 1e60  # samples beyond it, or not a number: no proposal
NOTHING = 1e-12  # misses below this share of the room count as none
ALIKE = 5e-3  # relative
NOTABLE = 0.1  # logarithm of volumes, or difference of gains, of two proposals otherwise alike
BITS = (4, 6, 8, 10, 12, 14, 16, 20, 24, 28, 32, 40)
Exact = tuple[tuple[Fraction, ...], ...]


@dataclass(frozen=True, slots=True)
class Proposal:
    """A metric, exact, and what the samples tell of it; radius: of the largest ball within the room."""

    kind: str
    rows: Exact
    inverse: Exact
    gain: float
    residual: float
    radius: float


def proposals(
    jacobians: Floats, misses: Floats, room: Floats, kind: str = "auto", weights: tuple[Fraction, ...] | None = None
) -> list[Proposal]:
    """Differing metrics, the best first; estimates from samples, V and its inverse exact.

    jacobians (M, n, n): ∂F/∂x over the set; misses (K, n): F(x*, w) − x*, K may be 0; room (n,) > 0: distance of the
    target from the edge of the region. `weights` fixes the box, exactly. Best: the largest ball is mapped into itself
    with a share to spare and the size of the bound is least; without a residual the least gain (to 1e-4), then the
    largest volume; a gain of 1 and more only where none is below. No proposal where a sample is not finite.
    Raises ValueError for other shapes, kinds or signs.
    """
    s = Samples(*(np.asarray(a, dtype=np.float64) for a in (jacobians, misses, room)))
    n = s.room.size
    if kind not in (*KINDS, "auto"):
        raise ValueError(f"metric kind {kind!r}: one of {', '.join(KINDS)}, auto")
    if s.jacobians.ndim != 3 or s.jacobians.shape[1:] != (n, n) or not len(s.jacobians):
        raise ValueError(f"Jacobians of shape {s.jacobians.shape}: (M, {n}, {n}) with M >= 1 expected")
    if s.misses.size and s.misses.shape[1:] != (n,):
        raise ValueError(f"misses of shape {s.misses.shape}: (K, {n}) expected")
    if s.room.ndim != 1 or not np.all(s.room > 0) or not np.all(np.isfinite(s.room)):
        raise ValueError(f"room {s.room}: positive and finite expected")
    if weights is not None and (kind not in ("box", "auto") or len(weights) != n or not min(weights) > 0):
        raise ValueError(f"weights {weights} of kind {kind}: {n} positive ones, of a box, expected")
    s = Samples(s.jacobians, s.misses.reshape(-1, n), s.room)
    with np.errstate(all="ignore"):
        unit = Samples(s.jacobians * s.room / s.room[:, None], s.misses / s.room, np.ones(n))  # x_s = e_s / room_s
    if not all(np.all(np.abs(a) < HUGE) for a in (s.jacobians, s.misses, unit.jacobians, unit.misses)):
        return []
    if np.abs(unit.misses).max(initial=0.0) <= NOTHING:
        s, unit = (Samples(each.jacobians, each.misses[:0], each.room) for each in (s, unit))
    if weights is not None:
        rows = tuple(tuple(Fraction(w) if i == j else Fraction(0) for j in range(n)) for i, w in enumerate(weights))
        return [_proposal("box", rows, s)[1]]

    few = Samples(
        unit.jacobians[extremes(unit.jacobians.reshape(len(s.jacobians), -1), LARGEST)],
        unit.misses[extremes(unit.misses, LARGEST)],
        unit.room,
    )
    with np.errstate(all="ignore"):
        found = [(each, v) for each in KINDS if kind in (each, "auto") for v in _FIND[each](few)]
        rounded = [_rounded(k, v, unit, s) for k, v in _chosen(found, unit)]
    best = {(p.kind, p.rows): (order, p) for order, p in filter(None, rounded)}
    return [p for _, p in sorted(best.values(), key=lambda each: each[0])]


def _chosen(found: list[tuple[str, Floats]], s: Samples) -> list[tuple[str, Floats]]:
    """The best of every kind and of the rest, no two alike, best first."""
    ranked: list[tuple[tuple[float, ...], str, Floats]] = []
    for kind, v in found:
        j = judged(kind, v, s)
        if np.isfinite(j.gain) and np.all(np.isfinite(j.shares)):
            ranked.append((j.order, kind, v / np.abs(v).max()))
    ranked.sort(key=lambda each: each[0])
    kept: list[tuple[tuple[float, ...], str, Floats]] = []
    for each in ranked:
        (class_, size, ball), kind = each[:2]
        known = any(
            (k, o[0]) == (kind, class_) and bool(np.isclose(size, o[1], rtol=ALIKE)) and ball >= o[2] - NOTABLE
            for o, k, _ in kept
        )
        if not known and (each[0][0] < 2 or ranked[0][0][0] == 2):  # no gain of 1 and more beside one below
            kept.append(each)
    first = [e for kind in KINDS for e in [e for e in kept if e[1] == kind][:EACH]]
    rest = [e for e in kept if e[0][0] < 2 and not any(e is f for f in first)]
    return [(k, v) for _, k, v in sorted([*first, *rest[: MOST - len(first)]], key=lambda each: each[0])]


# Rounding


def _rounded(kind: str, v: Floats, unit: Samples, s: Samples) -> tuple[tuple[float, ...], Proposal] | None:
    """V to the fewest digits that cost next to nothing, and scaled to a radius near 1."""
    plain = judged(kind, v, unit)
    allowed = max(5e-7, 1e-4 * (1 - plain.gain))
    grid = 2.0 ** np.round(np.log2(s.room))  # short numbers whatever the room
    best = None
    for bits in BITS:
        y = v * (grid / s.room) * 2.0 ** np.round(np.log2(plain.shares.max()))
        step = 2.0 ** (np.floor(np.log2(np.abs(y).max(axis=1))) - bits)[:, None]
        whole = np.rint(y / step)
        j = judged(kind, whole * step / grid * s.room, unit)
        if np.isfinite(j.gain):
            best = whole, step
            if j.gain <= plain.gain + allowed and (j.size <= plain.size * (1 + 2e-4) or not plain.gain < 1):
                break
    if best is None:
        return None
    whole, step = best
    rows = tuple(
        tuple(int(x) * Fraction(float(d[0])) / Fraction(float(g)) for x, g in zip(row, grid, strict=True))
        for row, d in zip(whole, step, strict=True)
    )
    try:
        return _proposal(kind, rows, s)
    except ZeroDivisionError:  # singular, though the floats did not tell
        return None


def _proposal(kind: str, rows: Exact, s: Samples) -> tuple[tuple[float, ...], Proposal]:
    """The exact metric as the samples judge it, and its place among others."""
    exact = inverted(rows)
    v, w = (np.array([[float(x) for x in row] for row in m]) for m in (rows, exact))
    j = judged(kind, v, s, w)
    return j.order, Proposal(kind, rows, exact, j.gain, j.residual, float(1 / j.shares.max()))


def inverted(rows: Exact) -> Exact:
    """Exact inverse by elimination; raises ZeroDivisionError for a singular one."""
    n = len(rows)
    m = [[*row, *(Fraction(i == j) for j in range(n))] for i, row in enumerate(rows)]
    for c in range(n):
        pivot = next((r for r in range(c, n) if m[r][c]), c)
        m[c], m[pivot] = m[pivot], m[c]
        scale = 1 / m[c][c]
        m[c] = [x * scale for x in m[c]]
        for r in range(n):
            if r != c and m[r][c]:
                factor = m[r][c]
                m[r] = [x - factor * y for x, y in zip(m[r], m[c], strict=True)]
    return tuple(tuple(row[n:]) for row in m)


_FIND: dict[str, Callable[[Samples], Iterator[Floats]]] = {"box": boxes, "polytope": polytopes, "ellipsoid": ellipsoids}
