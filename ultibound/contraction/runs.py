"""Runs from one state off its target that settle slowly, or leave the region: witnesses for proofs/orbit.md (3), (4).

Floating point. Two ways to steer. Ahead: about the targets a step is nearly e⁺ = A_s e + m_st(w), so j steps before the
end the w, and the stance, are those that add most to ±u_kᵀ A ⋯ A m(w). Step by step: the w, and the stance that
follows, which lead a state farthest to one side, or all of them farthest for the room they have.
"""

from __future__ import annotations

import time
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from .rounds import Map, Values
from .walks import Linear, held_choices, linear

KEPT = 3  # ends of walks side by side, a stance
AWAY = 40  # steps that a run may take to leave the regions
LULL = 24  # steps after which a run that has stayed within what is wanted is given up
HALVINGS, NEARER = 12, 1 - 1e-9
Aim = tuple[int, float] | None  # a state, and the side it is led to (0: either); None: all of them, for their room


@dataclass(frozen=True, slots=True)
class Run:
    """The stance at the start and after every step, the error of one state at the start, the values of every step."""

    stances: tuple[str, ...]
    error: Fraction
    held: Values
    steps: tuple[Values, ...]


@dataclass(frozen=True, slots=True)
class Ground:
    """The maps of the stances, what may follow each, and the ends of their regions."""

    maps: Mapping[str, Map]
    then: Mapping[str, Sequence[str]]
    regions: Mapping[str, tuple[Floats, Floats]]
    until: float  # an instant of time.monotonic
    away: int = AWAY  # steps that a run may take to leave the regions: none where these are kept

    def outside(self, stance: str, x: Floats) -> bool:
        low, high = self.regions[stance]
        return bool(((x < low) | (x > high)).any())


@dataclass(frozen=True, slots=True)
class Start:
    """Where runs start: in one of these stances, at some held values, one state off by so much from `base`."""

    held: Values
    centres: Mapping[str, Floats]
    base: Mapping[str, Floats]
    about: Linear | None
    within: Sequence[str]
    state: int
    size: Fraction

    def states(self, stance: str, error: Fraction) -> Floats:
        x: Floats = self.base[stance].copy()
        x[self.state] += to_float(error)
        return x


@dataclass(frozen=True, slots=True)
class End:
    """The last steps of a walk: what an error before them counts for, what they add, the first of them and the rest."""

    row: Floats
    total: float
    stance: str
    choice: int = 0  # the rank of its fresh values
    rest: End | None = None


@dataclass(frozen=True, slots=True)
class Course:
    """A run as it is steered: its start, the fresh values by rank, the stances and the states met."""

    error: Fraction
    stances: list[str]
    chosen: list[int]
    states: list[Floats]


def slow(ground: Ground, within: Sequence[str], state: int, size: Fraction, end: float, most: int) -> Run | None:
    """The longest run found, of at most so many steps, that stays in the regions and is then farther than `end`."""
    best: tuple[int, Run] | None = None
    for start in _starts(ground, within, state, size):
        ends = [x for sign in (1.0, -1.0) for x in _longest(ground, start, sign, end, most)]
        courses = [_followed(ground, start, x) for x in ends]
        courses += _steered(
            ground, start, [(state, 1.0), (state, -1.0), (state, 0.0), None], most, leave=False, end=end
        )
        for x in courses:
            n = _still_out(ground, start, x, end)
            if n >= 0 and (best is None or n > best[0]):
                best = n, _run(ground, start, x, n)
    return None if best is None else best[1]


def leaving(ground: Ground, within: Sequence[str], state: int, most: Fraction) -> Run | None:
    """A run that leaves the regions from an error below `most`, as small a one as halving finds."""
    found: Run | None = None
    for start in _starts(ground, within, state, most):
        found = _nearest(ground, start, most if found is None else abs(found.error)) or found
    return found


def pushed(ground: Ground, stance: str, base: Floats, held: Values, state: int, most: Fraction) -> Run | None:
    """A run that leaves the regions after a push below `most` of a state that is met in a stance."""
    for start in _starts(ground, [stance], state, most, held):
        return _nearest(ground, replace(start, base={stance: base}), most)
    return None


def _nearest(ground: Ground, start: Start, most: Fraction) -> Run | None:
    """A run that leaves the regions, from as little off as halving finds, and less than `most`."""
    low, found = Fraction(0), _out(ground, replace(start, size=most * Fraction(NEARER)))
    at_once = None if found is None else _out(ground, replace(start, size=low))
    for _ in range(HALVINGS if at_once is None else 0):
        if found is None:
            return None
        size = Fraction(to_float((low + abs(found.error)) / 2))
        out = _out(ground, replace(start, size=size))
        found, low = (found, size) if out is None else (out, low)
    return at_once or found


def _starts(
    ground: Ground, within: Sequence[str], state: int, size: Fraction, known: Values | None = None
) -> Iterator[Start]:
    for choice in held_choices(ground.maps):
        held = choice | (known or {})
        centres = {s: np.array(m.target(held)) for s, m in ground.maps.items()}
        if all(np.isfinite(c).all() for c in centres.values()):
            yield Start(held, centres, centres, linear(ground.maps, ground.then, held), within, state, size)


def _out(ground: Ground, start: Start) -> Run | None:
    """A run that leaves the regions from an error of that size."""
    n = len(start.centres[start.within[0]])
    courses = [Course(e, [s], [], [start.states(s, e)]) for s in start.within for e in (start.size, -start.size)]
    if ground.away and not any(ground.outside(x.stances[0], x.states[0]) for x in courses):
        aims = [(k, sign) for k in range(n) for sign in (1.0, -1.0)]
        courses = _steered(ground, start, [*aims, None], ground.away, leave=True)
        if not any(ground.outside(x.stances[-1], x.states[-1]) for x in courses):
            ends = [_farthest(ground, start, k, sign) for k, sign in aims]
            courses = [_followed(ground, start, x) for x in ends if x is not None]
    for x in courses:
        for k, (s, at) in enumerate(zip(x.stances, x.states, strict=True)):
            if ground.outside(s, at):
                return _run(ground, start, x, k)
    return None


def _run(ground: Ground, start: Start, x: Course, steps: int) -> Run:
    values = tuple(ground.maps[s].fresh[k] for s, k in zip(x.stances[:steps], x.chosen, strict=False))
    return Run(tuple(x.stances[: steps + 1]), x.error, start.held, values)


def _still_out(ground: Ground, start: Start, x: Course, end: float) -> int:
    """After how many steps, in the regions all along, the error was last above `end`; -1 where it never was."""
    last = -1
    for n, (s, at) in enumerate(zip(x.stances, x.states, strict=True)):
        if ground.outside(s, at):
            break
        last = n if abs(at[start.state] - start.centres[s][start.state]) > end else last
    return last


def _longest(ground: Ground, start: Start, sign: float, end: float, most: int) -> list[End]:
    """Ends of walks before which the error may be above `end`: of the longest, and of one half as long."""
    found = [x for x in _ends(ground, start, start.state, sign, most, None) if _hope(x, start) > end]
    return [found[k] for k in dict.fromkeys((len(found) - 1, len(found) // 2))] if found else []


def _farthest(ground: Ground, start: Start, aim: int, sign: float) -> End | None:
    """The end of a walk that should lead a state farthest for its room."""
    room = {s: max(abs(float(x[aim] - c[aim])) for x in ground.regions[s]) for s, c in start.centres.items()}
    return max(_ends(ground, start, aim, sign, ground.away, room), key=lambda x: _hope(x, start), default=None)


def _hope(x: End, start: Start) -> float:
    return x.total + abs(float(x.row[start.state])) * to_float(start.size)


def _ends(
    ground: Ground, start: Start, aim: int, sign: float, most: int, room: Mapping[str, float] | None
) -> Iterator[End]:
    """The best end of a walk that starts as is asked, of one step, of two, …: by the maps about their targets."""
    about = start.about
    row = np.zeros(len(start.centres[start.within[0]]))
    row[aim] = sign
    ends = [End(row / (1.0 if room is None else max(room[t], 1e-300)), 0.0, t) for t in ground.maps]
    for _ in range(most if about is not None else 0):
        longer: dict[str, list[End]] = {}
        for x in ends:
            for s in ground.maps:
                if about is not None and x.stance in ground.then[s]:
                    each = about.miss[s, x.stance] @ x.row
                    k = int(np.argmax(each))
                    before = End(x.row @ about.jacobian[s], x.total + float(each[k]), s, k, x)
                    longer.setdefault(s, []).append(before)
        ends = [x for several in longer.values() for x in sorted(several, key=lambda x: -_hope(x, start))[:KEPT]]
        ends = [x for x in ends if np.isfinite(x.row).all() and np.isfinite(x.total)]
        first = [x for x in ends if x.stance in start.within]
        if not ends or time.monotonic() > ground.until:
            return
        if first:
            yield max(first, key=lambda x: _hope(x, start))


def _followed(ground: Ground, start: Start, end: End) -> Course:
    """The course of a walk, by the maps themselves."""
    error = start.size if end.row[start.state] >= 0 else -start.size
    found = Course(error, [end.stance], [], [start.states(end.stance, error)])
    while end.rest is not None:
        m = ground.maps[end.stance]
        x = m.after(found.states[-1][None], m.numbers(start.held, [m.fresh[end.choice]]))[0]
        if not np.isfinite(x).all():
            break
        found.chosen.append(end.choice)
        end = end.rest
        found.stances.append(end.stance)
        found.states.append(x)
    return found


def _steered(
    ground: Ground, start: Start, aims: Sequence[Aim], most: int, leave: bool, end: float = -1.0
) -> list[Course]:
    """Courses steered step by step, each by an aim, until they leave the regions; `leave`: or until one has.

    A course is given up that has not been farther than `end` for a while.
    """
    signed = [(s, e) for s in start.within for e in (start.size, -start.size)]
    courses = [Course(e, [s], [], [start.states(s, e)]) for _ in aims for s, e in signed]
    aimed = [aim for aim in aims for _ in signed]
    room = {
        s: np.maximum(np.maximum(high - start.centres[s], start.centres[s] - low), 1e-300)
        for s, (low, high) in ground.regions.items()
    }
    values = {s: m.numbers(start.held, m.fresh) for s, m in ground.maps.items()}
    going = [k for k, x in enumerate(courses) if not ground.outside(x.stances[0], x.states[0])]
    far = dict.fromkeys(going, 0)  # the last step at which it was
    for n in range(1, most + 1):
        if not going or time.monotonic() > ground.until:
            break
        still, left = list[int](), False
        at = {s: [k for k in going if courses[k].stances[-1] == s] for s in ground.maps}
        for s, here in ((s, here) for s, here in at.items() if here):
            count = len(values[s])
            x = np.repeat(np.array([courses[k].states[-1] for k in here]), count, axis=0)
            after = ground.maps[s].after(x, np.tile(values[s], (len(here), 1))).reshape(len(here), count, -1)
            for k, each in zip(here, after, strict=True):
                scores = np.array([_score(aimed[k], (each - start.centres[t]) / room[t]) for t in ground.then[s]])
                t, choice = np.unravel_index(int(np.argmax(scores)), scores.shape)
                if np.isfinite(scores[t, choice]):
                    courses[k].chosen.append(int(choice))
                    courses[k].stances.append(ground.then[s][int(t)])
                    courses[k].states.append(each[choice])
                    stance = courses[k].stances[-1]
                    out = ground.outside(stance, each[choice])
                    if abs(each[choice][start.state] - start.centres[stance][start.state]) > end:
                        far[k] = n
                    still, left = (still, True) if out else ([*still, k], left)
        if leave and left:
            break
        going = [k for k in still if n - far[k] <= LULL]
    return courses


def _score(aim: Aim, off: Floats) -> Floats:
    """How far errors, a row each and of their room, are as an aim has it; -inf where they have no value."""
    if aim is None:
        found = np.abs(off).max(axis=1)
    else:
        k, sign = aim
        found = sign * off[:, k] if sign else np.abs(off[:, k])
    good: Floats = np.where(np.isfinite(off).all(axis=1), found, -np.inf)
    return good
