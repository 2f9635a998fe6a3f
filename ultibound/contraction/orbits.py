"""Trajectories steered against a bound: periodic orbits far from the target, paths that are slow to settle.

Floating point: what is found is a witness that the checker follows exactly (proofs/orbit.md).
"""

from __future__ import annotations

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
STILL = 1e-14  # relative change a round at which an orbit is found: brackets are wider
NEARER = 1 - 1e-12
Values = dict[str, Fraction]


@dataclass(frozen=True, slots=True)
class Course:
    """A start and the values of every step; `start` an interval that brackets an orbit, or a point twice."""

    start: tuple[Fraction, Fraction]
    held: Values
    steps: tuple[Values, ...]


@dataclass(frozen=True, slots=True)
class Run:
    """Where a trajectory starts, under which held values, and where it is steered."""

    start: float
    held: Values
    aim: float
    sign: int


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
        self.rows = {n: np.array([to_float(w[n]) for w in self.fresh]) for n in self.fresh[0]}

    def step(self, x: Floats, held: list[Values], fresh: dict[str, Floats]) -> Floats:
        """Next states (runs, choices): of each run, with its held values, by every choice of fresh values.

        These are (choices), the same for all runs, or (runs, choices)."""
        choices = [np.array([[to_float(h[n])] for h in held]) if n in held[0] else fresh.get(n) for n in self.names]
        columns = [x[:, None] if n == self.state else c for n, c in zip(self.names, choices, strict=True)]
        width = next(iter(fresh.values())).shape[-1] if fresh else 1
        at = np.stack([np.broadcast_to(c, (len(x), width)).ravel() for c in columns if c is not None], axis=1)
        return self.runner(at, at, gradient=False).low.reshape(len(x), width)

    def aim(self, held: Values) -> float:
        at = np.array([[to_float(held[n]) for n in self.target.variables]]).reshape(1, len(self.target.variables))
        return float(self.target(at, at, gradient=False).low[0])

    def steered(self, runs: list[Run], steps: int, wanted: float = -1.0) -> list[tuple[list[float], list[int]]]:
        """States of each run and the fresh choices that lead furthest up (1), down (-1) or away from the target (0).

        A run stops within `wanted` of its target: from there on it is for the proof to say.
        """
        x, found = np.array([r.start for r in runs]), [([r.start], list[int]()) for r in runs]
        aim, sign = np.array([r.aim for r in runs]), np.array([[r.sign] for r in runs])
        going = np.arange(len(runs))
        for _ in range(steps):
            after = self.step(x[going], [runs[i].held for i in going], self.rows)
            with np.errstate(invalid="ignore"):
                score = np.where(sign[going] == 0, np.abs(after - aim[going, None]), sign[going] * after)
            best = np.argmax(np.where(np.isfinite(score), score, -np.inf), axis=1)
            x[going] = after[np.arange(len(going)), best]
            keep = np.isfinite(x[going]) & (np.abs(x[going] - aim[going]) > wanted)
            for i, k in zip(going[keep], best[keep], strict=True):
                found[i][0].append(float(x[i]))
                found[i][1].append(int(k))
            going = going[keep]
            if not len(going):
                break
        return found


def orbits(steering: Steering, starts: list[float]) -> list[tuple[float, Course]]:
    """Periodic orbits and their estimated distance from the target, one a way of steering."""
    runs = [
        Run(aim + start, held, aim, sign)
        for held, aim in ((h, steering.aim(h)) for h in steering.held)
        for start in starts
        for sign in (1, -1, 0)
    ]
    rounds = []
    for run, (states, chosen) in zip(runs, steering.steered(runs, STEPS), strict=True):
        for p in range(1, LONGEST_PERIOD + 1):
            if len(chosen) == STEPS and chosen[-p:] == chosen[-2 * p : -p]:
                rounds.append((run, states[-1], chosen[-p:]))
                break
    return _closed(steering, rounds)


def _closed(steering: Steering, rounds: list[tuple[Run, float, list[int]]]) -> list[tuple[float, Course]]:
    """The orbits that repeating the choices leads to, from a state each; all rounds go on side by side."""
    found: dict[int, tuple[float, Course]] = {}
    x = np.array([start for _, start, _ in rounds])
    before, far = x.copy(), [0.0] * len(rounds)
    taken, going = 0, list(range(len(rounds)))
    while going:
        now = [rounds[k][2][taken % len(rounds[k][2])] for k in going]
        for k in going:
            far[k] = max(far[k], abs(float(x[k]) - rounds[k][0].aim))
        fresh = {n: c[now][:, None] for n, c in steering.rows.items()}
        x[going] = steering.step(x[going], [rounds[k][0].held for k in going], fresh)[:, 0]
        taken += 1
        for k in list(going):
            run, _, chosen = rounds[k]
            times, rest = divmod(taken, len(chosen))
            if rest:
                continue
            here = float(x[k])
            still = abs(here - float(before[k])) <= STILL * max(abs(here), 1e-300)
            if still:
                steps = tuple(steering.fresh[c] for c in chosen)
                found[k] = far[k], Course((Fraction(here), Fraction(here)), run.held, steps)
            if still or times == SETTLE // len(chosen):
                going.remove(k)
            else:
                before[k], far[k] = here, 0.0
    return [found[k] for k in sorted(found)]


def slow_path(steering: Steering, start: Fraction, wanted: float, most: int, target: Fraction | None) -> Course | None:
    """A path of at most so many steps whose error still exceeds what is wanted; the longest one found.

    `target` is its exact value where it has a single one; else the start is a little nearer than allowed.
    """
    runs = [
        Run(aim + side * float(start), held, aim, sign)
        for held, aim in ((h, steering.aim(h)) for h in steering.held)
        for side in (1, -1)
        for sign in (1, -1, 0)
    ]
    found = steering.steered(runs, most, wanted)
    run, (_, chosen) = max(zip(runs, found, strict=True), key=lambda each: len(each[1][1]))
    if not chosen:
        return None
    side = 1 if run.start > run.aim else -1
    x = target + side * start if target is not None else Fraction(run.aim + side * float(start) * NEARER)
    return Course((x, x), run.held, tuple(steering.fresh[k] for k in chosen))
