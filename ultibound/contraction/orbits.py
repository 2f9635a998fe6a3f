"""Trajectories steered against a bound: periodic orbits far from the target, paths that are slow to settle.

Floating point: what is found is a witness that the checker follows exactly (proofs/orbit.md).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from ..bounding.evaluate import Runner, to_float
from ..bounding.intervals import Floats
from ..claim.obligations import Obligation
from .samples import combinations

STEPS = 30
LONGEST_PERIOD = 4
SETTLE = 400
MOST_HELD = 27
NEARER = 1 - 1e-12
Values = dict[str, Fraction]


@dataclass(frozen=True, slots=True)
class Course:
    """A start and the values of every step; `start` an interval that brackets an orbit, or a point twice."""

    start: tuple[Fraction, Fraction]
    held: Values
    steps: tuple[Values, ...]


class Steering:
    """The map at points, with all choices of held and fresh values at hand."""

    def __init__(
        self, runner: Runner, image: Obligation, target: Obligation, aim: Runner, state: str, held: frozenset[str]
    ) -> None:
        self.runner, self.names, self.target, self.state = runner, [v.name for v in image.variables], aim, state
        rng = np.random.default_rng(0)
        met = {v.name: v for v in (*image.variables, *target.variables)}
        self.fresh = combinations([v for n, v in met.items() if n != state and n not in held], rng)
        self.held = combinations([v for n, v in met.items() if n in held], rng)[:MOST_HELD]

    def step(self, x: Floats, held: list[Values], fresh: list[Values]) -> Floats:
        """Next states: a row each of x, its held and fresh values."""
        at = np.empty((len(x), len(self.names)))
        for j, n in enumerate(self.names):
            at[:, j] = (
                x if n == self.state else [to_float(h[n] if n in h else f[n]) for h, f in zip(held, fresh, strict=True)]
            )
        return self.runner(at, at, gradient=False).low

    def aim(self, held: Values) -> float:
        at = np.array([[to_float(held[n]) for n in self.target.variables]]).reshape(1, len(self.target.variables))
        return float(self.target(at, at, gradient=False).low[0])

    def steered(
        self, start: float, held: Values, aim: float, sign: int, steps: int, wanted: float = -1.0
    ) -> tuple[list[float], list[int]]:
        """States and the fresh choices that lead furthest: up (1), down (-1) or away from the target (0).

        Stops within `wanted` of the target: from there on it is for the proof to say.
        """
        x, states, chosen = start, [start], []
        for _ in range(steps):
            after = self.step(np.full(len(self.fresh), x), [held] * len(self.fresh), self.fresh)
            score = sign * after if sign else np.abs(after - aim)
            k = int(np.argmax(np.where(np.isfinite(score), score, -np.inf)))
            x = float(after[k])
            if not np.isfinite(x) or abs(x - aim) <= wanted:
                break
            states.append(x)
            chosen.append(k)
        return states, chosen


def orbits(steering: Steering, starts: list[float]) -> Iterator[tuple[float, Course]]:
    """Periodic orbits and their estimated distance from the target, one a way of steering."""
    for values in steering.held:
        aim = steering.aim(values)
        for start in starts:
            for sign in (1, -1, 0):
                states, chosen = steering.steered(aim + start, values, aim, sign, STEPS)
                for p in range(1, LONGEST_PERIOD + 1):
                    if len(chosen) == STEPS and chosen[-p:] == chosen[-2 * p : -p]:
                        found = _closed(steering, states[-1], values, chosen[-p:], aim)
                        if found is not None:
                            yield found
                        break


def _closed(steering: Steering, x: float, held: Values, chosen: list[int], aim: float) -> tuple[float, Course] | None:
    """The orbit that repeating the choices leads to."""
    steps = tuple(steering.fresh[k] for k in chosen)
    far = 0.0
    for _ in range(SETTLE // len(steps)):
        before, far = x, 0.0
        for w in steps:
            far = max(far, abs(x - aim))
            x = float(steering.step(np.array([x]), [held], [w])[0])
        if abs(x - before) <= 4e-16 * max(abs(x), 1e-300):
            break
    else:
        return None
    return far, Course((Fraction(x), Fraction(x)), held, steps)


def slow_path(steering: Steering, start: Fraction, wanted: float, most: int, target: Fraction | None) -> Course | None:
    """A path of at most so many steps whose error still exceeds what is wanted; the longest one found.

    `target` is its exact value where it has a single one; else the start is a little nearer than allowed.
    """
    best: Course | None = None
    for values in steering.held:
        aim = steering.aim(values)
        for side in (1, -1):
            for sign in (1, -1, 0):
                states, chosen = steering.steered(aim + side * float(start), values, aim, sign, most, wanted)
                far = [n for n, x in enumerate(states) if n > 0 and abs(x - aim) > wanted]
                if far and (best is None or far[-1] > len(best.steps)):
                    x = target + side * start if target is not None else Fraction(aim + side * float(start) * NEARER)
                    best = Course((x, x), values, tuple(steering.fresh[k] for k in chosen[: far[-1]]))
    return best
