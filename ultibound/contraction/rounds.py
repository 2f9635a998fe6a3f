"""Rounds of values that lead a state far from its target again and again: witnesses for orbits (proofs/several.md (6)).

Floating point. About the target the map is nearly e⁺ = A e + m(w): j steps before the error of state s is looked at,
the best w is the one with the largest ±u_sᵀ Aʲ m(w); one round of them, repeated, leads into an orbit.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..claim.obligations import Variable
from .samples import combinations

LONGEST, FADED, ROUNDS, MOST_HELD = 48, 1e-4, 60, 9
STEP = 1e-6
Values = dict[str, Fraction]


@dataclass(frozen=True, slots=True)
class Course:
    """Errors at the start of a round, held values, and the values of every step."""

    start: tuple[float, ...]
    held: Values
    steps: tuple[Values, ...]
    far: float  # the largest error of the state it was made for


class Map:
    """The map of all states at points: `run` takes rows of all variables and gives rows of next states."""

    def __init__(
        self, variables: list[Variable], states: tuple[str, ...], run: Callable[[Floats], Floats],
        target: Callable[[Values], list[float]], held: frozenset[str],
    ) -> None:  # fmt: skip
        self.variables, self.states, self.run, self.target = variables, states, run, target
        rng = np.random.default_rng(0)
        others = [v for v in variables if v.name not in states]
        self.fresh = combinations([v for v in others if v.name not in held], rng)
        self.held = combinations([v for v in others if v.name in held], rng)[:MOST_HELD]

    def after(self, x: Floats, held: Values, fresh: list[Values]) -> Floats:
        """Next states: a row each of x and of fresh values."""
        at = np.empty((len(x), len(self.variables)))
        for j, v in enumerate(self.variables):
            if v.name in self.states:
                at[:, j] = x[:, self.states.index(v.name)]
            else:
                at[:, j] = [to_float(held[v.name] if v.name in held else w[v.name]) for w in fresh]
        return self.run(at)


def courses(step: Map, slack: float, horizon: int) -> list[Course]:
    """For each state the course of whole horizons that takes it furthest; none where the map has no value."""
    found: dict[str, Course] = {}
    for held in step.held:
        centre = np.array(step.target(held))
        count, n = len(step.fresh), len(centre)
        miss = step.after(np.tile(centre, (count, 1)), held, step.fresh) - centre
        middle = step.fresh[count // 2]
        near = np.vstack([centre + STEP * np.eye(n), centre - STEP * np.eye(n)])
        moved = step.after(near, held, [middle] * (2 * n))
        a = ((moved[:n] - moved[n:]) / (2 * STEP)).T
        if not (np.isfinite(miss).all() and np.isfinite(a).all()):
            continue
        for i, s in enumerate(step.states):
            for sign in (1.0, -1.0):
                course = _followed(step, held, centre, i, _chosen(a, miss, i, sign, horizon))
                if course is not None and (s not in found or course.far > found[s].far * (1 + slack)):
                    found[s] = course
    return list(found.values())


def _chosen(a: Floats, miss: Floats, i: int, sign: float, horizon: int) -> list[int]:
    """The fresh choices of a round, first step first."""
    row, chosen = np.zeros(len(a)), list[int]()
    row[i] = sign
    first = float(np.abs(row).max())
    for n in range(1, -(-LONGEST // horizon) * horizon + 1):
        chosen.append(int(np.argmax(miss @ row)))
        row = row @ a
        if n % horizon == 0 and not float(np.abs(row).max()) >= FADED * first:
            break
    return chosen[::-1]


def _followed(step: Map, held: Values, centre: Floats, i: int, chosen: list[int]) -> Course | None:
    """The orbit that a round of choices leads to, from the target."""
    values = [step.fresh[k] for k in chosen]
    x, far = centre[None], 0.0
    for _ in range(ROUNDS):
        before, far = x, 0.0
        for w in values:
            x = step.after(x, held, [w])
            far = max(far, abs(float(x[0, i] - centre[i])))
        if not np.isfinite(x).all():
            return None
        if np.abs(x - before).max() <= 1e-15 * max(1e-300, float(np.abs(x - centre).max())):
            break
    return Course(tuple(float(y) for y in x[0] - centre), held, tuple(values), far)
