"""Rounds of values that lead a state far from its target again and again: witnesses for orbits (proofs/several.md (6)).

Floating point. About the target the map is nearly e⁺ = A e + m(w): j steps before the error of state s is looked at,
the best w is the one with the largest ±u_sᵀ Aʲ m(w); one round of them, repeated, leads into an orbit.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import inf

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..claim.obligations import Variable
from .samples import combinations

LONGEST, FADED, ROUNDS, MOST_HELD = 48, 1e-4, 60, 9
STEP = 1e-6
Values = dict[str, Fraction]


@dataclass(frozen=True, slots=True)
class Trial:
    """A round of values for one state, not followed yet."""

    held: Values
    centre: Floats
    state: int
    steps: tuple[Values, ...]


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
        self.variables, self.states, self.run, self.target, self.held_names = variables, states, run, target, held
        rng = np.random.default_rng(0)
        others = [v for v in variables if v.name not in states]
        self.fresh = combinations([v for v in others if v.name not in held], rng)
        self.held = combinations([v for v in others if v.name in held], rng)[:MOST_HELD]
        self._ours = [j for j, v in enumerate(variables) if v.name in states]
        self._ranks = [states.index(variables[j].name) for j in self._ours]
        self._others = [j for j, v in enumerate(variables) if v.name not in states]

    def after(self, x: Floats, values: Floats) -> Floats:
        """Next states: a row each of x and of what `numbers` gives."""
        at = np.empty((len(x), len(self.variables)))
        at[:, self._ours] = x[:, self._ranks]
        at[:, self._others] = values
        return self.run(at)

    def numbers(self, held: Values, fresh: Sequence[Values]) -> Floats:
        """A row each of all variables but the states."""
        names = [self.variables[j].name for j in self._others]
        rows = [[to_float(held[n] if n in held else w[n]) for n in names] for w in fresh]
        return np.array(rows).reshape(len(fresh), len(names))


def courses(step: Map, slack: float, horizon: int, until: float = inf) -> list[Course]:
    """For each state the course of whole horizons that takes it furthest; none where the map has no value.

    `until`: the instant (of time.monotonic) at which orbits not closed by then are given up.
    """
    tried = list[Trial]()
    for held in step.held:
        centre = np.array(step.target(held))
        count, n = len(step.fresh), len(centre)
        miss = step.after(np.tile(centre, (count, 1)), step.numbers(held, step.fresh)) - centre
        middle = step.fresh[count // 2]
        near = np.vstack([centre + STEP * np.eye(n), centre - STEP * np.eye(n)])
        moved = step.after(near, step.numbers(held, [middle] * (2 * n)))
        a = ((moved[:n] - moved[n:]) / (2 * STEP)).T
        if not (np.isfinite(miss).all() and np.isfinite(a).all()):
            continue
        for i in range(len(step.states)):
            for sign in (1.0, -1.0):
                chosen = tuple(step.fresh[k] for k in _chosen(a, miss, i, sign, horizon))
                tried.append(Trial(held, centre, i, chosen))
    found: dict[str, Course] = {}
    for trial, course in zip(tried, _followed(step, tried, until), strict=True):
        s = step.states[trial.state]
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


def _followed(step: Map, tried: list[Trial], until: float) -> list[Course | None]:
    """The orbits that rounds of choices lead to, from the target; all rounds go on side by side."""
    found: list[Course | None] = [None] * len(tried)
    values = [step.numbers(t.held, t.steps) for t in tried]
    x = np.array([t.centre for t in tried])
    before, far = x.copy(), [0.0] * len(tried)
    taken, going = 0, list(range(len(tried)))
    while going and time.monotonic() < until:
        x[going] = step.after(x[going], np.array([values[k][taken % len(values[k])] for k in going]))
        taken += 1
        for k in list(going):
            t = tried[k]
            far[k] = max(far[k], abs(float(x[k, t.state] - t.centre[t.state])))
            rounds, rest = divmod(taken, len(values[k]))
            if rest:
                continue
            near = np.abs(x[k] - before[k]).max() <= 1e-15 * max(1e-300, float(np.abs(x[k] - t.centre).max()))
            if near or rounds == ROUNDS or not np.isfinite(x[k]).all():
                going.remove(k)
                if np.isfinite(x[k]).all():
                    found[k] = Course(tuple(float(y) for y in x[k] - t.centre), t.held, t.steps, far[k])
            else:
                before[k], far[k] = x[k], 0.0
    return found
