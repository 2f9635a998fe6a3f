"""Balls of more sides than a box in a basis has: norms |V e| of more rows than states (estimates).

Over a leaf e⁺ = J e + m with [J | m] = C + Σ t_l G_l + D. For a share λ the least P = {|V e| <= h} with
    |V J q|/λ + |V m| + δ <= h at all vertices q of P, over all leaves                                  (1)
grows from the misses. The gain in its norm is then at most λ, and P, or any multiple of it by 1/λ or less but no less
than 1, is mapped into itself. The smaller λ, the wider P: the least λ whose P has room makes the ball contract most.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations, product

import numpy as np

from ..bounding.intervals import Floats
from .metrics import Exact, inverted
from .polytope import SLACK, STEPS, Pieces, directions

SHARES = (0.995, 0.98, 0.96, 0.93, 0.9, 0.87, 0.84, 0.8, 0.75, 0.7, 0.6, 0.5)
SPARE = 1e-3  # of the room, left to rounding
NOISE = 1e-3  # of the room of a state: how little disturbs it, at least, where directions are chosen
CHOICES = 12_000  # of as many rows as there are states, and sides, as vertices are found among
ANGLES = 16  # directions of two states
TIGHT = 1 - 1e-9  # of its end: what a row has to reach to be a side
DIGITS = 7
ROUNDING = 1e-9


@dataclass(frozen=True, slots=True)
class Sides:
    """V, a left inverse, and how much of itself the ball {|V e| <= 1} is led into."""

    rows: Exact
    inverse: Exact
    share: float


def many_sided(pieces: Pieces, shifts: Floats, room: Floats) -> Sides | None:
    """The ball that contracts most of those with room, from the leaves of [J | m]; None where none has room.

    shifts (n,): how far the target of each state moves in a step; room (n,) > 0: how far from the edge it is.
    """
    middle, spread = pieces.hull()
    noise = np.maximum(spread[:, -1] + np.abs(middle[:, -1]) + shifts, NOISE * room)
    rows = directions(middle[:, :-1], room, noise, CHOICES, ANGLES)
    seen, far, tips = pieces.seen(rows), np.abs(rows) @ shifts, Tips.of(rows)
    found, h = None, 1e-6 * (np.abs(rows) @ room)
    for share in SHARES:
        grown = _grown(seen, tips, far, h, share, room)
        if grown is None:
            break
        h, q = grown
        side = np.abs(q @ rows.T).max(axis=0) >= h * TIGHT
        found = _exact(rows[side] / h[side, None], share)
    return found


@dataclass(frozen=True, slots=True)
class Tips:
    """Vertices of {|V e| <= h}, one of each opposite two, for any h: choices of rows, and what their ends lead to."""

    rows: Floats
    some: Floats
    inverses: Floats
    sides: Floats

    @classmethod
    def of(cls, rows: Floats) -> Tips:
        n = rows.shape[1]
        some = np.array(list(combinations(range(len(rows)), n)))
        parts = rows[some]
        good = np.abs(np.linalg.det(parts)) > 1e-9 * np.prod(np.linalg.norm(parts, axis=2), axis=1)
        sides = np.array([(1.0, *x) for x in product((1.0, -1.0), repeat=n - 1)])
        return cls(rows, some[good], np.linalg.inv(parts[good]), sides)

    def at(self, h: Floats) -> Floats:
        q = np.einsum("kij,kj,sj->ksi", self.inverses, h[self.some], self.sides).reshape(-1, self.rows.shape[1])
        found: Floats = q[(np.abs(q @ self.rows.T) <= h * (1 + ROUNDING)).all(axis=1)]
        return found


def _grown(
    seen: Pieces, tips: Tips, far: Floats, start: Floats, share: float, room: Floats
) -> tuple[Floats, Floats] | None:
    """h of (1) from a smaller one, and the vertices; None where they leave the room."""
    h = start
    for _ in range(STEPS):
        q = tips.at(h)
        if not len(q) or np.any(np.abs(q) > (1 - SPARE) * room):
            return None
        one = np.ones((len(q), 1))
        (low, high), (least, most) = seen.ends(np.hstack([q / share, one])), seen.ends(np.hstack([-q / share, one]))
        after = np.maximum(np.maximum(-low, high), np.maximum(-least, most)) + far
        if np.all(after <= h):
            return h, q
        h = np.maximum(h, after * (1 + SLACK))
    return None


def _exact(rows: Floats, share: float) -> Sides | None:
    """V to a few digits, and a left inverse by the rows that lie least along one another."""
    v: Exact = tuple(tuple(Fraction(f"{x:.{DIGITS}g}") for x in row) for row in rows)
    n = len(v[0])
    some = max(combinations(range(len(v)), n), key=lambda c: abs(np.linalg.det(rows[list(c)])))
    try:
        inverse = inverted(tuple(v[i] for i in some))
    except ZeroDivisionError:
        return None
    columns = {i: k for k, i in enumerate(some)}
    return Sides(
        v,
        tuple(tuple(row[columns[i]] if i in columns else Fraction(0) for i in range(len(v))) for row in inverse),
        share,
    )
