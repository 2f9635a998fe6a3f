"""Norms for stances that follow one another, proposed from samples; radii and bounds of all stances together.

Estimates throughout. With J the Jacobians of the step from s to t, m its misses, V the norm of each stance,
k_st = max ‖V_t J V_s⁻¹‖ and ε_st = max ‖V_t m‖ (proofs/graph.md). Families of norms, one a stance:

    the same norm for all, as proposals for one map have it, of all samples together;
    the same but for signs of some states, where one stance is the mirror image of the other;
    P_s = Q_s + Σ_t JᵀP_t J/θ², or P_t⁻¹ = W_t + Σ_s J P_s⁻¹ Jᵀ/θ², for mean Jacobians J: ellipsoids;
    boxes with weights 1/p_s, p_t = max_s |J| p_s/θ + q_t.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from contextlib import suppress
from dataclasses import dataclass
from fractions import Fraction
from itertools import product
from typing import Any

import numpy as np

from ..bounding.intervals import Floats
from .metrics import Proposal, proposals

Step = tuple[str, str]
Family = dict[str, Proposal]
SHARES = (0.9, 0.6, 0.3, 0.1)  # where θ lies between the rate of the mean Jacobians and 1
ROUNDS, LEVELS = 2000, 400
BITS = 2**20
ALIKE = 0.5  # how much closer to each other mirror images have to be


@dataclass(frozen=True, slots=True)
class Samples:
    """Of a step: Jacobians (M, n, n) and misses (K, n)."""

    jacobians: Floats
    misses: Floats


def families(
    steps: Mapping[Step, Samples], room: Mapping[str, Floats], kind: str, weights: tuple[Fraction, ...] | None
) -> Iterator[Family]:
    """Norms for all stances; the ones with most to be said for them first."""
    n = len(next(iter(room.values())))
    if n == 1:
        yield dict.fromkeys(room, _exact("box", np.eye(1)))
        return
    if any(not len(x.jacobians) or not len(x.misses) for x in steps.values()):  # nowhere a value
        return
    for signs in _mirrors(steps, room):
        turned = {s: np.diag(x) for s, x in signs.items()}
        jacobians = np.concatenate([turned[t] @ x.jacobians @ turned[s] for (s, t), x in steps.items()])
        misses = np.concatenate([x.misses @ turned[t] for (_, t), x in steps.items()])
        least = np.min([room[s] for s in room], axis=0)
        for p in proposals(jacobians, misses, least, "box" if weights is not None else kind, weights):
            v = np.array([[float(x) for x in row] for row in p.rows])
            yield {s: p if (x == 1).all() else _exact(p.kind, v @ np.diag(x)) for s, x in signs.items()}
    with np.errstate(all="ignore"):
        round_ = _ellipsoids(steps, room) if weights is None and kind in ("auto", "ellipsoid") else []
        flat = "polytope" if kind == "polytope" else "box"
        boxes = _boxes(steps, room, flat) if weights is None and kind != "ellipsoid" else []
    yield from (*round_, *boxes)


def _mirrors(steps: Mapping[Step, Samples], room: Mapping[str, Floats]) -> Iterator[dict[str, Floats]]:
    """Signs of states, a stance: none turned; and those that make all mean Jacobians most alike."""
    n, names = len(next(iter(room.values()))), list(room)
    plain = {s: np.ones(n) for s in names}
    yield plain
    means = {e: x.jacobians.mean(axis=0) for e, x in steps.items()}

    def apart(signs: Mapping[str, Floats]) -> float:
        turned = np.stack([np.outer(signs[t], signs[s]) * x for (s, t), x in means.items()])
        return float(np.abs(turned - turned.mean(axis=0)).sum())

    if len(names) != 2 or n > 4:
        return
    others = [{names[0]: np.ones(n), names[1]: np.array((1.0, *x))} for x in product((1.0, -1.0), repeat=n - 1)]
    best = min(others, key=apart)
    if apart(best) < ALIKE * apart(plain):
        yield best


def _thetas(steps: Mapping[Step, Samples], room: Mapping[str, Floats]) -> list[float]:
    """Rates between that of the mean Jacobians, whatever the order of the stances, and 1."""
    means = {e: x.jacobians.mean(axis=0) for e, x in steps.items()}
    size = {s: np.ones((1, len(room[s]))) / room[s] for s in room}
    rate = 0.0
    for _ in range(60):
        grown = {s: np.zeros_like(room[s]) for s in room}
        for (s, t), a in means.items():
            grown[s] = np.maximum(grown[s], np.abs(size[t][0] @ a))
        most = max(float(x.max()) for x in grown.values())
        if most == 0:
            break
        rate, size = most, {s: (x / most)[None] for s, x in grown.items()}
    return [rate + share * (1 - rate) for share in SHARES if rate < 1] or [1.0]


def _ellipsoids(steps: Mapping[Step, Samples], room: Mapping[str, Floats]) -> list[Family]:
    means = {e: x.jacobians.mean(axis=0) for e, x in steps.items()}
    spread = {t: np.diag(1e-6 * room[t] ** 2) for t in room}
    for (_, t), x in steps.items():
        spread[t] = spread[t] + x.misses.T @ x.misses / len(x.misses)
    found = []
    for theta in _thetas(steps, room):
        with suppress(np.linalg.LinAlgError):
            inward, outward = _levels(means, spread, room, theta)
            found.append({s: _exact("ellipsoid", np.linalg.cholesky(p).T) for s, p in inward.items()})
            found.append({s: _exact("ellipsoid", np.linalg.inv(np.linalg.cholesky(p))) for s, p in outward.items()})
    return found


def _levels(
    means: Mapping[Step, Floats], spread: Mapping[str, Floats], room: Mapping[str, Floats], theta: float
) -> tuple[dict[str, Floats], dict[str, Floats]]:
    """P and P⁻¹ of every stance, by iteration; raises LinAlgError where it does not end."""
    inward, outward = {s: np.diag(room[s] ** -2) for s in room}, dict(spread)
    for _ in range(LEVELS):
        before, after = dict(inward), dict(outward)
        inward, outward = {s: np.zeros((len(room[s]),) * 2) for s in room}, dict(spread)
        for (s, t), a in means.items():
            inward[s] = inward[s] + a.T @ before[t] @ a / theta**2
            outward[t] = outward[t] + a @ after[s] @ a.T / theta**2
        inward = {s: _touching(p, room[s]) for s, p in inward.items()}
        found = (*inward.values(), *outward.values())
        if not all(np.isfinite(x).all() and np.abs(x).max() < 1e12 for x in found):
            break
        pairs = zip((*before.values(), *after.values()), found, strict=True)
        if all(np.abs(x - y).max() <= 1e-6 * np.abs(y).max() for x, y in pairs):
            return inward, outward
    raise np.linalg.LinAlgError("no limit")


def _touching(p: Floats, room: Floats) -> Floats:
    """P + q diag(room)⁻² with the least q in [0, 1] for which the ball of radius 1 stays within the room."""
    low, high = 0.0, 1.0
    for _ in range(20):
        q = (low + high) / 2
        inverse = np.linalg.pinv(p + np.diag((q + 1e-9) * room**-2))
        low, high = (low, q) if (np.diag(inverse) <= room**2).all() else (q, high)
    found: Floats = p + np.diag((high + 1e-9) * room**-2)
    return found


def _boxes(steps: Mapping[Step, Samples], room: Mapping[str, Floats], kind: str) -> list[Family]:
    found, table = [], {e: np.abs(x.jacobians).max(axis=0) for e, x in steps.items()}
    missed = {e: np.abs(x.misses).max(axis=0, initial=0.0) for e, x in steps.items()}
    for theta in (0.99, *_thetas(steps, room)):
        p = {s: 1e-3 * room[s] for s in room}
        for _ in range(LEVELS):
            before = dict(p)
            p = {s: 1e-3 * room[s] for s in room}
            for (s, t), a in table.items():
                p[t] = np.maximum(p[t], a @ before[s] / theta + missed[s, t])
        if all(np.isfinite(x).all() and (x < 1e9).all() for x in p.values()):
            found.append({s: _exact(kind, np.diag(1 / x)) for s, x in p.items()})
    return found


def _exact(kind: str, v: Any) -> Proposal:
    """V in short rationals and its exact inverse, in the unit in which ‖e‖ is at least every |e_s|."""
    width = np.abs(np.linalg.inv(v)).sum(axis=1).max()
    rows = [[Fraction(round(x * BITS), BITS) for x in row] for row in v * width * (1 + 1e-6)]
    n = len(rows)
    full = [row + [Fraction(int(i == j)) for j in range(n)] for i, row in enumerate(rows)]
    for i in range(n):
        pivot = max(range(i, n), key=lambda r: abs(full[r][i]))
        full[i], full[pivot] = full[pivot], full[i]
        if not full[i][i]:
            break
        full[i] = [x / full[i][i] for x in full[i]]
        full = [
            row if r == i else [x - row[i] * y for x, y in zip(row, full[i], strict=True)] for r, row in enumerate(full)
        ]
    inverse = tuple(tuple(row[n:]) for row in full)
    if kind == "box" and n == 1:
        rows, inverse = [[Fraction(1)]], ((Fraction(1),),)
    return Proposal(kind, tuple(map(tuple, rows)), inverse, np.inf, np.inf, 0.0)


def bounds(steps: Mapping[Step, tuple[float, float]], names: list[str]) -> dict[str, float] | None:
    """The least b with k b + ε <= b of the next on every step; None where there seems to be none."""
    b = dict.fromkeys(names, 0.0)
    for _ in range(ROUNDS):
        before = dict(b)
        for (s, t), (k, e) in steps.items():
            b[t] = max(b[t], k * before[s] + e)
        if not all(np.isfinite(x) and x < 1e30 for x in b.values()):
            return None
        if all(b[s] - before[s] <= 1e-12 * b[s] for s in names):
            return b if _contracting(steps, names) else None
    return None


def _contracting(steps: Mapping[Step, tuple[float, float]], names: list[str]) -> bool:
    """Whether the products of gains around cycles are below 1."""
    p = dict.fromkeys(names, 1.0)
    for _ in range(ROUNDS):
        before = dict(p)
        for (s, t), (k, _) in steps.items():
            p[t] = max(p[t], 1.0 + k * before[s])
        if max(p.values()) > 1e9:
            return False
        if p == before or all(p[s] - before[s] <= 1e-9 * p[s] for s in names):
            return True
    return False


def radii(steps: Mapping[Step, tuple[float, float]], most: Mapping[str, float]) -> dict[str, float] | None:
    """The largest R <= most with k R + ε <= R of the next on every step; None where there is none above 0."""
    found = dict(most)
    for _ in range(2 * len(found) + 2):
        for (s, t), (k, e) in steps.items():
            if k > 0:
                found[s] = min(found[s], (found[t] - e) / k)
    kept = all(k * found[s] + e <= found[t] * (1 + 1e-12) for (s, t), (k, e) in steps.items())
    return found if kept and min(found.values()) > 0 else None
