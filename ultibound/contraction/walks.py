"""Closed walks of stances that lead a state far from its target again and again: witnesses for proofs/graph.md (8).

Floating point. About the targets a step is nearly e⁺ = A_s e + m_st(w). Backwards from the stance in which the error of
a state is looked at, each step before it is the one, with the w, that adds most to ±u_sᵀ A ⋯ A m(w); a few of the best
are kept side by side where several stances may come before. Repeated, the walk leads into an orbit.
"""

from __future__ import annotations

import time
from collections import deque
from collections.abc import Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass, replace
from math import inf

import numpy as np

from ..bounding.intervals import Floats
from ..claim.obligations import Variable
from .rounds import MOST_HELD, ROUNDS, STEP, Map, Values
from .samples import combinations

LONGEST, FADED, KEPT, FOLLOWED, NEWTON = 48, 1e-4, 4, 2, 6
STILL = 1e-15  # relative change a round at which an orbit is found
Step = tuple[str, str]


@dataclass(frozen=True, slots=True)
class Around:
    """A closed walk: errors in its first stance at the start, held values, and the values of every step."""

    stances: tuple[str, ...]
    start: tuple[float, ...]
    held: Values
    steps: tuple[Values, ...]
    far: float  # the largest error of the state it was made for, in the stance it was made for


@dataclass(frozen=True, slots=True)
class Trial:
    """A walk for one state in one stance, not followed yet, and what it should come to."""

    at: tuple[str, int]
    held: Values
    stances: tuple[str, ...]
    steps: tuple[Values, ...]
    hoped: float


@dataclass(frozen=True, slots=True)
class Tail:
    """The end of a walk, its steps the last one first: a stance and the rank of the fresh values of each."""

    row: Floats
    total: float
    stance: str
    steps: tuple[tuple[str, int], ...]


@dataclass(frozen=True, slots=True)
class Linear:
    """About the targets, at some held values: a Jacobian a stance, and a miss (of every choice of values) a step."""

    jacobian: dict[str, Floats]
    miss: dict[Step, Floats]


def walks(maps: Mapping[str, Map], then: Mapping[str, Sequence[str]], slack: float, until: float = inf) -> list[Around]:
    """For each state in each stance the walk that takes it furthest; `until`: an instant of time.monotonic."""
    tried = list[Trial]()
    for held in held_choices(maps):
        about = linear(maps, then, held)
        if about is None:
            continue
        for stance, m in maps.items():
            for i in range(len(m.states)):
                each = (_walk(maps, then, about, held, (stance, i), sign, until) for sign in (1.0, -1.0))
                tried += [t for t in each if t is not None]
    best = list[Trial]()
    for at in dict.fromkeys(t.at for t in tried):
        best += sorted((t for t in tried if t.at == at), key=lambda t: -t.hoped)[:FOLLOWED]
    furthest: dict[tuple[str, int], Around] = {}
    for trial in best:
        course = _followed(maps, trial, until)
        at = trial.at
        if course is not None and (at not in furthest or course.far > furthest[at].far * (1 + slack)):
            furthest[at] = course
    found = list[Around]()
    for course in furthest.values():
        if all((x.stances, x.held, x.steps) != (course.stances, course.held, course.steps) for x in found):
            found.append(course)
    return found


def held_choices(maps: Mapping[str, Map]) -> list[Values]:
    """Choices of what is held, in all stances together."""
    met: dict[str, Variable] = {}
    for m in maps.values():
        met |= {v.name: v for v in m.variables if v.name in m.held_names}
    return combinations(list(met.values()), np.random.default_rng(0))[:MOST_HELD]


def linear(maps: Mapping[str, Map], then: Mapping[str, Sequence[str]], held: Values) -> Linear | None:
    """The maps about their targets; None where they have no value."""
    centres = {s: np.array(m.target(held)) for s, m in maps.items()}
    jacobian, miss = dict[str, Floats](), dict[Step, Floats]()
    for s, m in maps.items():
        count, n = len(m.fresh), len(m.states)
        after = m.after(np.tile(centres[s], (count, 1)), m.numbers(held, m.fresh))
        near = np.vstack([centres[s] + STEP * np.eye(n), centres[s] - STEP * np.eye(n)])
        moved = m.after(near, m.numbers(held, [m.fresh[count // 2]] * (2 * n)))
        jacobian[s] = ((moved[:n] - moved[n:]) / (2 * STEP)).T
        miss |= {(s, t): after - centres[t] for t in then[s]}
    good = all(np.isfinite(x).all() for x in (*jacobian.values(), *miss.values()))
    return Linear(jacobian, miss) if good else None


def _walk(
    maps: Mapping[str, Map], then: Mapping[str, Sequence[str]], about: Linear, held: Values, at: tuple[str, int],
    sign: float, until: float,
) -> Trial | None:  # fmt: skip
    """The walk that should take a state furthest to one side; None where none leads back to the stance."""
    stance, i = at
    row = np.zeros(len(maps[stance].states))
    row[i] = sign
    tails, within = [Tail(row, 0.0, stance, ())], [s for s in maps if _way(then, stance, s) is not None]
    for _ in range(LONGEST):
        longer = []
        for tail in tails:
            for s in (s for s in within if tail.stance in then[s]):
                each = about.miss[s, tail.stance] @ tail.row
                k = int(np.argmax(each))
                before = tail.row @ about.jacobian[s]
                longer.append(Tail(before, tail.total + float(each[k]), s, (*tail.steps, (s, k))))
        tails = sorted(longer, key=lambda x: -x.total)[:KEPT]
        if not tails or time.monotonic() > until:
            return None
        if not max(float(np.abs(x.row).max()) for x in tails) >= FADED:
            break
    tail = tails[0]
    p = _period(tail, stance)
    if p:
        tail = replace(tail, stance=stance, steps=tail.steps[:p])
    back = _way(then, stance, tail.stance) or []
    steps = [(s, len(maps[s].fresh) // 2) for s in back] + list(reversed(tail.steps))
    values = tuple(maps[s].fresh[k] for s, k in steps)
    return Trial(at, held, tuple(s for s, _ in steps), values, tail.total)


def _period(tail: Tail, stance: str) -> int:
    """After how many steps the choices come again, and the stance with them; 0 where they do not."""
    steps = tail.steps
    for p in range(1, len(steps) // 2 + 1):
        if steps[p - 1][0] == stance and all(x == y for x, y in zip(steps, steps[p:], strict=False)):
            return p
    return 0


def _way(then: Mapping[str, Sequence[str]], start: str, end: str) -> list[str] | None:
    """The stances of a shortest way from one to another, the last one left out."""
    before: dict[str, str] = {}
    waiting, seen = deque([start]), {start}
    while waiting:
        s = waiting.popleft()
        if s == end:
            way = []
            while s != start:
                s = before[s]
                way.append(s)
            return way[::-1]
        for t in then[s]:
            if t not in seen:
                seen.add(t)
                before[t] = s
                waiting.append(t)
    return None


def _followed(maps: Mapping[str, Map], trial: Trial, until: float) -> Around | None:
    """The orbit that rounds of the walk lead to, from the target; None where they lead to no value.

    Where rounds are slow to settle, Newton's method goes on from where they are.
    """
    stance, i = trial.at
    centres = {s: np.array(maps[s].target(trial.held)) for s in dict.fromkeys(trial.stances)}
    values = [maps[s].numbers(trial.held, [w]) for s, w in zip(trial.stances, trial.steps, strict=True)]

    def after(x: Floats) -> tuple[Floats, float]:
        """States a round later, a row each, and how far the first row was from its target on the way."""
        far = 0.0
        for s, w in zip(trial.stances, values, strict=True):
            if s == stance:
                far = max(far, abs(float(x[0, i] - centres[s][i])))
            x = maps[s].after(x, np.repeat(w, len(x), axis=0))
        return x, far

    start = centres[trial.stances[0]]
    x, n = start[None], len(start)
    for k in range(ROUNDS + NEWTON):
        before = x
        x, far = after(x)
        if not np.isfinite(x).all() or time.monotonic() > until:
            return None
        if np.abs(x - before).max() <= STILL * max(1e-300, float(np.abs(x - start).max())):
            break
        if k >= ROUNDS:
            moved, _ = after(before + np.vstack([np.zeros(n), STEP * np.eye(n)]))
            slope = (moved[1:] - moved[0]).T / STEP
            with suppress(np.linalg.LinAlgError):
                x = before + np.linalg.solve(np.eye(n) - slope, (x - before)[0])
    return Around(trial.stances, tuple(float(y) for y in x[0] - start), trial.held, trial.steps, far)
