"""Metrics |V e| for several states: which balls a map takes into themselves, and how small they may be.

Search only: floats and solvers propose, samples judge, nothing here is proved. Three kinds of V, all square:

    box        V = diag(w), w > 0, largest magnitude    bound_s = b / w_s
    polytope   any V, largest magnitude                 bound_s = b Σ_j |(V⁻¹)_sj|
    ellipsoid  any V, Euclidean length, P = VᵀV         bound_s = b √(P⁻¹)_ss

with gain k = max ‖V J V⁻¹‖, residual ε = max ‖V m‖ and b = ε/(1−k). The size of a bound is max_s u_s + mean_s u_s / 4,
u_s = bound_s / room_s; max_s u_s <= 1 says that the largest ball in the region is mapped into itself.

Box, also in a basis U (then V = diag(1/p) U). For a fixed k there is a componentwise least p with
    max_m |U J_m U⁻¹| p <= k p,    p >= q,                                                                  (1)
as the left side rises with p: policies find it in a few linear solves. q = max |U m| makes b = 1/(1−k), so that p is
optimal for every size that rises with p; q = 1 gives the widest ball for that k. What is left is a search over k, and
over U: real eigenvector and Schur bases, the best of them improved by seeded random changes.

Ellipsoid, in x_s = e_s / room_s. For a fixed k two convex programmes:
    minimise tr P                                subject to k²P − JᵀPJ ⪰ µI, P ⪰ I;                         (2)
    minimise max_s Z_ss + mean_s Z_ss / 4        subject to k²P − JᵀPJ ⪰ µI, [[P, I], [I, Z]] ⪰ 0,
                                                            mᵀPm <= 1 after scaling, P ⪯ CAP·I.            (3)
(2) is bisected on k, the gain measured at each P being the new upper end; (3) is searched over k. Both hold few of the
Jacobians and misses at first, and those that a solution violates are added. Without any solver: P = Q + AᵀPA/k² and
P⁻¹ = W + A P⁻¹ Aᵀ/k² (Kalman & Bertram 1960) for the mean Jacobian A, W the spread of the misses.
"""

from __future__ import annotations

import warnings
from collections.abc import Callable, Iterator
from contextlib import suppress
from dataclasses import dataclass
from fractions import Fraction
from math import inf, lgamma, log, pi
from typing import Any

import numpy as np

from ..bounding.intervals import Floats
from .samples import extremes

KINDS = ("box", "polytope", "ellipsoid")
MOST = 8
LARGEST = 512  # samples in the search; all of them judge what it found
EACH = 2  # of every kind, before the best of the rest
SPARE = 0.02  # share of the radius that a good ball leaves
MEAN = 0.25  # weight of the mean of the states' bounds beside the largest
WIDEST = 1e4  # ratio of the scales of a box
LONGEST = 1e8  # trace of P beyond which (2) counts as infeasible
HUGE = 1e60  # samples beyond it, or not a number: no proposal
NOTHING = 1e-12  # misses below this share of the room count as none
ALIKE = 5e-3  # relative
NOTABLE = 0.1  # logarithm of volumes, or difference of gains, of two proposals otherwise alike
WIDER = (1e-3, 0.2)  # gains given away for a wider ball: plainly, and as a share of what is left to 1
CAP = 1e5  # largest P of (3) against the misses
CHANGES = 400  # of a basis, tried at random
FLOOR = 1e-4  # least residual of a state, against the largest
TOLERANCE = 2e-6  # of the least gain
CLOSE = {"CLARABEL": TOLERANCE, "SCS": 1e-4}  # the second is slow where (2) is nearly infeasible
BITS = (4, 6, 8, 10, 12, 14, 16, 20, 24, 28, 32, 40)
WAYS = (("CLARABEL", 1e-3), ("CLARABEL", 1e-6), ("SCS", 1e-3))  # solver and margin µ
OPTIONS: dict[str, dict[str, float]] = {"CLARABEL": {"max_iter": 100}, "SCS": {"max_iters": 1000, "eps": 1e-6}}
Exact = tuple[tuple[Fraction, ...], ...]
Make = Callable[[float], Floats | None]  # gain -> V of about that gain


@dataclass(frozen=True, slots=True)
class Proposal:
    """A metric, exact, and what the samples tell of it; radius: of the largest ball within the room."""

    kind: str
    rows: Exact
    inverse: Exact
    gain: float
    residual: float
    radius: float


@dataclass(frozen=True, slots=True)
class _Samples:
    """Jacobians (M, n, n), misses (K, n) and room (n,) in the same coordinates."""

    jacobians: Floats
    misses: Floats
    room: Floats


@dataclass(frozen=True, slots=True)
class _Judged:
    gain: float
    residual: float
    shares: Floats  # extent of the unit ball along each state, against the room
    volume: float  # logarithm, of the largest ball within the room

    @property
    def size(self) -> float:
        if not self.gain < 1:
            return inf
        u = self.residual / (1 - self.gain) * self.shares
        return float(u.max() + MEAN * u.mean())

    @property
    def order(self) -> tuple[float, ...]:
        """Balls mapped into themselves with room to spare first, the smallest bound (or gain) first."""
        if not self.gain < 1:
            return (2.0, self.gain if np.isfinite(self.gain) else inf, 0.0)
        if self.residual == 0:
            return (0.0, round(self.gain, 4), -self.volume)
        kept = self.residual / (1 - self.gain) * float(self.shares.max()) <= 1 - SPARE
        return (0.0 if kept else 1.0, self.size, self.gain)


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
    s = _Samples(*(np.asarray(a, dtype=np.float64) for a in (jacobians, misses, room)))
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
    s = _Samples(s.jacobians, s.misses.reshape(-1, n), s.room)
    with np.errstate(all="ignore"):
        unit = _Samples(s.jacobians * s.room / s.room[:, None], s.misses / s.room, np.ones(n))  # x_s = e_s / room_s
    if not all(np.all(np.abs(a) < HUGE) for a in (s.jacobians, s.misses, unit.jacobians, unit.misses)):
        return []
    if np.abs(unit.misses).max(initial=0.0) <= NOTHING:
        s, unit = (_Samples(each.jacobians, each.misses[:0], each.room) for each in (s, unit))
    if weights is not None:
        rows = tuple(tuple(Fraction(w) if i == j else Fraction(0) for j in range(n)) for i, w in enumerate(weights))
        return [_proposal("box", rows, s)[1]]

    few = _Samples(
        unit.jacobians[extremes(unit.jacobians.reshape(len(s.jacobians), -1), LARGEST)],
        unit.misses[extremes(unit.misses, LARGEST)],
        unit.room,
    )
    with np.errstate(all="ignore"):
        found = [(each, v) for each in KINDS if kind in (each, "auto") for v in _FIND[each](few)]
        rounded = [_rounded(k, v, unit, s) for k, v in _chosen(found, unit)]
    best = {(p.kind, p.rows): (order, p) for order, p in filter(None, rounded)}
    return [p for _, p in sorted(best.values(), key=lambda each: each[0])]


def _chosen(found: list[tuple[str, Floats]], s: _Samples) -> list[tuple[str, Floats]]:
    """The best of every kind and of the rest, no two alike, best first."""
    ranked: list[tuple[tuple[float, ...], str, Floats]] = []
    for kind, v in found:
        j = _judged(kind, v, s)
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


# Judging and rounding


def _judged(kind: str, v: Floats, s: _Samples, inverse: Floats | None = None) -> _Judged:
    """Gain, residual and extents by the samples; infinite where V has no inverse."""
    n = len(v)
    try:
        w = np.linalg.inv(v) if inverse is None else inverse
        turned = v @ s.jacobians @ w
        moved = s.misses @ v.T
        if kind == "ellipsoid":
            gains, lengths = np.linalg.norm(turned, 2, axis=(1, 2)), np.linalg.norm(moved, axis=1)
            shares, ball = np.linalg.norm(w, axis=1) / s.room, n / 2 * log(pi) - lgamma(n / 2 + 1)
        else:
            gains, lengths = np.abs(turned).sum(axis=2).max(axis=1), np.abs(moved).max(axis=1)
            shares, ball = np.abs(w).sum(axis=1) / s.room, n * log(2)
        volume = ball - float(np.linalg.slogdet(v)[1]) - n * float(np.log(shares.max()))
        return _Judged(float(gains.max()), float(lengths.max(initial=0.0)), shares, volume)
    except np.linalg.LinAlgError:
        return _Judged(inf, inf, np.full(n, inf), -inf)


def _rounded(kind: str, v: Floats, unit: _Samples, s: _Samples) -> tuple[tuple[float, ...], Proposal] | None:
    """V to the fewest digits that cost next to nothing, and scaled to a radius near 1."""
    plain = _judged(kind, v, unit)
    allowed = max(5e-7, 1e-4 * (1 - plain.gain))
    grid = 2.0 ** np.round(np.log2(s.room))  # short numbers whatever the room
    best = None
    for bits in BITS:
        y = v * (grid / s.room) * 2.0 ** np.round(np.log2(plain.shares.max()))
        step = 2.0 ** (np.floor(np.log2(np.abs(y).max(axis=1))) - bits)[:, None]
        whole = np.rint(y / step)
        j = _judged(kind, whole * step / grid * s.room, unit)
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


def _proposal(kind: str, rows: Exact, s: _Samples) -> tuple[tuple[float, ...], Proposal]:
    """The exact metric as the samples judge it, and its place among others."""
    exact = _inverse(rows)
    v, w = (np.array([[float(x) for x in row] for row in m]) for m in (rows, exact))
    j = _judged(kind, v, s, w)
    return j.order, Proposal(kind, rows, exact, j.gain, j.residual, float(1 / j.shares.max()))


def _inverse(rows: Exact) -> Exact:
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


# The search over k


def _smallest(kind: str, make: Make, low: float, s: _Samples, looks: int) -> Iterator[Floats]:
    """The V of least size over k in (low, 1): a coarse look, then golden sections about the best."""
    seen: dict[float, tuple[float, Floats]] = {}

    def size(t: float) -> float:
        if t not in seen:
            v = make(low + (1 - low) * t)
            seen[t] = (inf, np.eye(len(s.room))) if v is None else (_judged(kind, v, s).size, v)
        return seen[t][0]

    grid = [0.0, 0.05, 0.2, 0.4, 0.6, 0.8, 1.0]
    at = min(range(1, len(grid) - 1), key=lambda i: size(grid[i]))
    a, b = grid[at - 1], grid[at + 1]
    while len(seen) < looks and b - a > 1e-3:
        c, d = a + 0.382 * (b - a), a + 0.618 * (b - a)
        a, b = (a, d) if size(c) <= size(d) else (c, b)
    best = min(seen.values(), key=lambda each: each[0])
    if best[0] < inf:
        yield best[1]


# Boxes and polytopes


def _boxes(s: _Samples) -> Iterator[Floats]:
    n = len(s.room)
    yield np.eye(n)
    yield from _scaled("box", np.eye(n), s)


def _polytopes(s: _Samples) -> Iterator[Floats]:
    found = [v for u in _bases(s) for v in _scaled("polytope", u, s)]
    found.sort(key=lambda v: _judged("polytope", v, s).order)
    yield from found
    for v in [*found[:1], *list(_scaled("box", np.eye(len(s.room)), s))[-1:]]:
        changed = _changed(v, s)
        yield changed
        yield from _scaled("polytope", changed, s)


def _changed(v: Floats, s: _Samples) -> Floats:
    """A better basis by seeded random changes, which grow after a success and shrink after a failure."""
    some = s.jacobians[extremes(s.jacobians.reshape(len(s.jacobians), -1), 48)]
    few = _Samples(some, s.misses[extremes(s.misses, 48)], s.room)
    rng, step, n = np.random.default_rng(0), 0.1, len(v)
    best = _merit(_judged("polytope", v, few))
    for _ in range(CHANGES):
        tried = (np.eye(n) + step * rng.standard_normal((n, n)) / n) @ v
        merit = _merit(_judged("polytope", tried, few))
        if merit < best:
            v, best, step = tried, merit, step * 1.5
        else:
            step = max(step * 0.9, 1e-4)
    return v


def _merit(j: _Judged) -> tuple[float, float]:
    """The size of the bound, or the gain where there is none."""
    return (0.0, j.size) if j.gain < 1 and j.residual > 0 else (1.0 if j.residual > 0 else 0.0, j.gain)


def _scaled(kind: str, u: Floats, s: _Samples) -> Iterator[Floats]:
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

            yield from _smallest(kind, make, high, s, 24)


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


def _bases(s: _Samples) -> Iterator[Floats]:
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


# Ellipsoids


def _ellipsoids(s: _Samples) -> Iterator[Floats]:
    """Closed forms first; then the programmes, which may fail, the next solver or margin being tried."""
    closed = [np.eye(len(s.room)), *_closed_forms(s)]
    yield from closed
    starts = [(j.gain, v.T @ v) for v in closed if np.isfinite((j := _judged("ellipsoid", v, s)).gain)]
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
        programme = _Programme(s, solver, margin, False)
        gains = (least[0] + WIDER[0], least[0] + WIDER[1] * max(1 - least[0], 0.0))
        wider = [p for p in map(programme.solved, gains) if p is not None]
        if wider:
            yield from (v for p in wider for v in _root(p))
            break
    yield from _root(least[1])
    if len(s.misses) and least[0] < 1:
        for solver, margin in WAYS:
            programme = _Programme(s, solver, margin, True)

            def make(k: float, programme: _Programme = programme) -> Floats | None:
                p = programme.solved(k)
                return None if p is None else next(_root(p), None)

            best = list(_smallest("ellipsoid", make, least[0], s, 11))
            if best:
                yield from best
                break


def _closed_forms(s: _Samples) -> Iterator[Floats]:
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
    q = _definite(p)
    if q is not None:
        yield np.asarray(np.linalg.cholesky(q).T, dtype=np.float64)


def _definite(p: Floats | None) -> Floats | None:
    """The symmetric part, or None: not finite, not definite, or too long to be told from that."""
    if p is None or not np.all(np.isfinite(p)):
        return None
    q = (p + p.T) / 2
    try:
        values = np.linalg.eigvalsh(q)
        np.linalg.cholesky(q)
    except np.linalg.LinAlgError:
        return None
    return q if values[0] > 1e-12 * values[-1] else None


def _rate(s: _Samples) -> float:
    """A lower limit of every gain: spectral radii of the Jacobians and, of extreme ones, of products of two."""
    some = s.jacobians[extremes(s.jacobians.reshape(len(s.jacobians), -1), 24)]
    two = np.abs(np.linalg.eigvals(some[:, None] @ some[None])).max(axis=2).max()
    return float(max(np.abs(np.linalg.eigvals(s.jacobians)).max(), np.sqrt(two)))


def _gains(p: Floats, jacobians: Floats) -> Floats:
    v = np.linalg.cholesky(p).T
    return np.asarray(np.linalg.norm(v @ jacobians @ np.linalg.inv(v), 2, axis=(1, 2)), dtype=np.float64)


def _least_gain(
    s: _Samples, solver: str, margin: float, low: float, start: tuple[float, Floats]
) -> tuple[float, Floats] | None:
    """Bisection of (2) on k; None where no P came out of it at all."""
    programme = _Programme(s, solver, margin, False)
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
        gain = float(_gains(p, s.jacobians).max())
        if gain < high:
            high, best = gain, p
        if high > k * (1 + 1e-4) + 1e-9:
            low = k  # the solver is not that accurate here
    return (high, best) if any_found else None


class _Programme:
    """(2), or (3) with `bounded`, over a working set of samples that grows by what solutions violate."""

    def __init__(self, s: _Samples, solver: str, margin: float, bounded: bool) -> None:
        self.s, self.solver, self.margin, self.bounded = s, solver, margin, bounded
        self.scale = float(np.linalg.norm(s.misses, axis=1).max(initial=0.0)) or 1.0
        self.misses = s.misses / self.scale
        self.held = extremes(s.jacobians.reshape(len(s.jacobians), -1), 8)
        self.met = extremes(self.misses, 16) if bounded else []
        self.failures = 0
        self.built: tuple[Any, Any, Any] | None = None

    def solved(self, k: float) -> Floats | None:
        """A definite P of the programme, or None; it may still violate samples after some rounds."""
        p = None
        for _ in range(6):
            p = self._once(k)
            if p is None:
                return None
            gains = _gains(p, self.s.jacobians)
            if not gains[self.held].max() <= k * (1 + 1e-2) + 1e-6:  # not what was asked for
                self.failures += 1
                return None
            lengths = np.einsum("ki,ij,kj->k", self.misses, p, self.misses) if self.bounded else np.zeros(0)
            more = _worst(gains, k * (1 + 1e-6) + 1e-9, self.held)
            met = _worst(lengths, 1 + 1e-4, self.met)
            if not more and not met:
                return p
            self.held, self.met, self.built = [*self.held, *more], [*self.met, *met], None
        return p

    def _once(self, k: float) -> Floats | None:
        """One call; whatever a solver does wrong is None."""
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")  # of inaccurate solutions: they are judged by samples anyhow
                problem, square, variable = self.built = self.built or self._build()
                square.value = k * k
                status, value = call(problem, variable, self.solver)
        except Exception:  # a solver may raise anything
            status, value = "raised", None
        shape = self.s.jacobians.shape[1:]
        usable = status in ("optimal", "optimal_inaccurate") and value is not None and value.shape == shape
        p = _definite(value) if usable else None
        self.failures += p is None
        return p

    def _build(self) -> tuple[Any, Any, Any]:
        import cvxpy as cp

        n = len(self.s.room)
        one = np.eye(n)
        p, square = cp.Variable((n, n), symmetric=True), cp.Parameter(nonneg=True)
        rules = [square * p - j.T @ p @ j >> self.margin * one for j in self.s.jacobians[self.held]]
        if not self.bounded:
            return cp.Problem(cp.Minimize(cp.trace(p)), [*rules, p >> one]), square, p
        z = cp.Variable((n, n), symmetric=True)
        rules += [cp.bmat([[p, one], [one, z]]) >> 0, CAP * one - p >> 0]
        some = self.misses[self.met]
        rules.append(
            np.einsum("ki,kj->kij", some, some).reshape(len(some), -1) @ cp.reshape(p, (n * n,), order="C") <= 1
        )
        size = cp.max(cp.diag(z)) + MEAN / n * cp.trace(z)
        return cp.Problem(cp.Minimize(size), rules), square, p


def _worst(values: Floats, limit: float, held: list[int]) -> list[int]:
    """Up to six of the samples beyond the limit, the worst first, that are not held yet."""
    beyond = [int(i) for i in np.argsort(-values, kind="stable")[:24] if values[i] > limit and int(i) not in held]
    return beyond[:6]


def call(problem: Any, variable: Any, solver: str) -> tuple[str, Floats | None]:
    """The status and the value that a solver leaves."""
    problem.solve(solver=solver, **OPTIONS[solver])
    value = variable.value
    return str(problem.status), None if value is None else np.asarray(value, dtype=np.float64)


_FIND: dict[str, Callable[[_Samples], Iterator[Floats]]] = {
    "box": _boxes,
    "polytope": _polytopes,
    "ellipsoid": _ellipsoids,
}
