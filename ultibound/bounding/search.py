"""Subdivision, worst boxes first and in batches, until ends and attained values are within a gap.

The bounds seen here are floating-point estimates. What leaves this module are witnesses: a splitting tree with the
form that suffices at each leaf (proofs/forms.md), and the points that come nearest to the ends.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from itertools import product
from typing import Any

import numpy as np

from ..claim.obligations import Ends, Obligation
from .evaluate import Corner, Run, Runner, to_float
from .intervals import Floats

BATCH = 4096
SHARE = 0.6  # of the gap is for the search; the rest is for the checker's own way of evaluating
NUDGE = 2**36  # a point at the end of a cell moves inside by this share of its box
MOST_OPEN = 5  # corners a box may meet for its branches to be told apart, as in the checker
DIRECT, CENTRED, MONOTONE, SECOND = "d", "c", "m", "s"
Point = dict[str, Fraction]


@dataclass(frozen=True, slots=True)
class Effort:
    """Limits: relative gap, leaves, and the clock time at which to stop (a guard)."""

    gap: float
    cells: int
    until: float
    watch: Callable[[int, float], None] = lambda leaves, gap: None
    floor: float = 0.0  # an absolute gap that is enough
    patience: int = 10**9  # leaves after which to give up, for a form that needs fewer
    side: int = 0  # 1, -1: only the upper, the lower end is wanted
    later: float = 0.0  # seconds that each leaf will still cost once the search is over


@dataclass(frozen=True, slots=True)
class Found:
    """Witnesses for a range: a tree a top cell, points near the two ends, and what stopped the search."""

    trees: tuple[str, ...]
    leaves: int
    upper: float
    lower: float
    highest: Point
    lowest: Point
    stopped: str  # "" within the gap, else cells | seconds | precision


@dataclass
class _Boxes:
    """Every box ever made, by number; `split` is the variable bisected, -1 at a leaf, `child` its first half."""

    low: Floats
    high: Floats
    split: Any
    child: Any
    upper: Floats  # bounds by the best form
    lower: Floats
    plain: Floats  # (boxes, 6): low and high, direct, centred, monotone

    def grow(self, low: Floats, high: Floats) -> None:
        n = len(low)
        self.low, self.high = np.concatenate([self.low, low]), np.concatenate([self.high, high])
        self.split = np.concatenate([self.split, np.full(n, -1)])
        self.child = np.concatenate([self.child, np.full(n, -1)])
        self.upper = np.concatenate([self.upper, np.full(n, np.inf)])
        self.lower = np.concatenate([self.lower, np.full(n, -np.inf)])
        self.plain = np.concatenate([self.plain, np.tile([-np.inf, np.inf] * 3, (n, 1))])


@dataclass
class _Best:
    """The value that goes furthest to one side, and where: box and choice of end (-1, 0, 1) a variable."""

    sign: int
    value: float = -np.inf
    box: int = 0
    choice: Any = None

    def offer(self, values: Floats, boxes: Any, choices: Any) -> None:
        k = int(np.argmax(values))
        if values[k] > self.value or self.choice is None:
            self.value, self.box, self.choice = float(values[k]), int(boxes[k]), choices[k]


def search(runner: Runner, obligation: Obligation, magnitude: bool, effort: Effort) -> Found:
    """Tree and points for the range of an obligation; with `magnitude` only sup |.| is made tight."""
    tops = list(product(*(v.cells for v in obligation.variables)))
    shape = (len(tops), len(obligation.variables))
    low = np.array([[to_float(c[0]) for c in top] for top in tops]).reshape(shape)
    high = np.array([[to_float(c[1]) for c in top] for top in tops]).reshape(shape)
    none, ends, ranks = np.zeros(0), np.zeros((0, shape[1])), np.zeros(0, int)
    boxes = _Boxes(ends, ends, ranks, ranks, none, none, np.zeros((0, 6)))
    boxes.grow(low, high)
    widths = np.maximum(high.max(axis=0, initial=-np.inf) - low.min(axis=0, initial=np.inf), 1e-300)
    best = (_Best(1), _Best(-1))
    live, leaves, stopped = np.arange(len(tops)), len(tops), ""
    while len(live):
        parts = [_examine(runner, boxes, part, best, bool(obligation.by)) for part in _batches(live)]
        smear = np.concatenate(parts)
        ceiling, floor = _allowed(best, magnitude, effort)
        bad = (boxes.upper[live] > ceiling) | (boxes.lower[live] < floor)
        effort.watch(leaves, float(np.max(boxes.upper[live], initial=0.0)))
        live, smear = live[bad], smear[bad]
        if not len(live):
            break
        width = boxes.high[live] - boxes.low[live]
        least = 4e-15 * np.maximum(np.abs(boxes.low[live]), np.abs(boxes.high[live]))
        smear = np.where(np.isfinite(smear), smear, 1e300 * (width / widths))
        smear = np.where(width > least, smear, -1.0)
        smear = np.where((smear.max(axis=1, keepdims=True) <= 0) & (width > least), width / widths, smear)
        if np.any(smear.max(axis=1, initial=-1.0) <= 0):
            stopped = "precision"
            break
        if leaves + len(live) > effort.cells:
            stopped = "cells"
            break
        if leaves + len(live) > effort.patience + 4 * len(tops):
            stopped = "patience"
            break
        if time.monotonic() + leaves * effort.later > effort.until:
            stopped = "seconds"
            break
        live = _bisect(boxes, live, smear.argmax(axis=1))
        leaves += len(live) // 2
    return _found(obligation, tops, boxes, best, magnitude, leaves, stopped)


def _batches(live: Any) -> list[Any]:
    return [live[k : k + BATCH] for k in range(0, len(live), BATCH)]


def _allowed(best: tuple[_Best, _Best], magnitude: bool, effort: Effort) -> tuple[float, float]:
    gap, least = effort.gap * SHARE, max(effort.floor, effort.gap * 1e-6) * SHARE
    top, bottom = best[0].value, -best[1].value
    if magnitude:
        top = max(abs(top), abs(bottom))
        bottom = -top
    ceiling, floor = top + max(gap * abs(top), least), bottom - max(gap * abs(bottom), least)
    return np.inf if effort.side < 0 else ceiling, -np.inf if effort.side > 0 else floor


def _bisect(boxes: _Boxes, live: Any, variable: Any) -> Any:
    rows = np.arange(len(live))
    middle = 0.5 * (boxes.low[live, variable] + boxes.high[live, variable])
    low, high = np.repeat(boxes.low[live], 2, axis=0), np.repeat(boxes.high[live], 2, axis=0)
    high[2 * rows, variable] = middle
    low[2 * rows + 1, variable] = middle
    first = len(boxes.low)
    boxes.split[live], boxes.child[live] = variable, first + 2 * rows
    boxes.grow(low, high)
    return np.arange(first, first + 2 * len(live))


def _examine(runner: Runner, boxes: _Boxes, part: Any, best: tuple[_Best, _Best], derivative: bool) -> Floats:
    """Bounds of a batch by every form; improves the attained values; what splitting by each variable would gain."""
    whole = runner(boxes.low[part], boxes.high[part])
    case = _cases(whole, np.arange(len(part)), derivative)
    found = _forms(runner, boxes, part, best, whole, case, derivative)
    upper, lower = np.fmin(whole.high, found.upper), np.fmax(whole.low, found.lower)
    centred_low, centred_high, span = found.centred_low, found.centred_high, found.span
    if not derivative:
        straddle = np.flatnonzero(whole.open() & (_count(whole) <= MOST_OPEN))
        if len(straddle):  # a value is also that of one of the branches: proofs/corners.md (3)
            case = _cases(whole, straddle, True)
            more = _forms(runner, boxes, part[straddle], best, whole, case, False)
            upper[straddle] = np.fmin(upper[straddle], more.upper)
            lower[straddle] = np.fmax(lower[straddle], more.lower)
            centred_low[straddle] = np.fmax(centred_low[straddle], more.centred_low)
            centred_high[straddle] = np.fmin(centred_high[straddle], more.centred_high)
    boxes.upper[part], boxes.lower[part] = np.fmin(upper, found.second_high), np.fmax(lower, found.second_low)
    boxes.plain[part] = np.stack([whole.low, whole.high, centred_low, centred_high, lower, upper], axis=1)
    return span


@dataclass(frozen=True)
class _Forms:
    """Bounds of boxes by the forms that use slopes, and the gain of splitting by each variable."""

    upper: Floats
    lower: Floats
    centred_low: Floats
    centred_high: Floats
    second_low: Any
    second_high: Any
    span: Floats


def _forms(
    runner: Runner, boxes: _Boxes, part: Any, best: tuple[_Best, _Best], whole: Run, case: _Cases, derivative: bool
) -> _Forms:
    low, high = boxes.low[part][case.owner], boxes.high[part][case.owner]
    n = len(low)
    run = whole if case.hold is None else runner(low, high, hold=case.hold)
    g_low, g_high = run.gradient_low, run.gradient_high
    usable = case.smooth & ~run.split if derivative else np.ones(n, bool)  # proofs/forms.md (7), corners.md (3)
    rise = (g_low >= 0) & usable[:, None]
    fall = (g_high <= 0) & usable[:, None] & ~rise
    up = np.where(rise, 1, np.where(fall, -1, 0))
    choice = np.concatenate([up, -up])  # upper faces, then lower faces
    low2, high2 = np.tile(low, (2, 1)), np.tile(high, (2, 1))
    f_low, f_high = np.where(choice == 1, high2, low2), np.where(choice == -1, low2, high2)
    # a derivative jumps at grid lines and corners: faces and centres keep the branch of their box
    rows = np.tile(np.arange(n), 3)
    kept = run.branches_of(rows) if derivative else None
    face = runner(f_low, f_high, branches=run.branches_of(rows[: 2 * n]) if derivative else None, hold=case.held(2))
    centre = 0.5 * (f_low + f_high)
    points = np.concatenate([centre, 0.5 * (low + high)])
    at = runner(points, points, gradient=False, branches=kept, hold=case.held(3))
    radius = 0.5 * (f_high - f_low)
    reach = _reach(radius, face.gradient_low, face.gradient_high)
    plain = _reach(0.5 * (high - low), g_low, g_high)
    ok2 = np.tile(usable, 2) & ~(face.split if derivative else np.zeros(2 * n, bool))
    reach, plain = np.where(ok2, reach, np.inf), np.where(usable, plain, np.inf)
    at_low, at_high = at.low[2 * n :] - plain, at.high[2 * n :] + plain
    tops = np.fmin(np.where(usable, face.high[:n], np.inf), at.high[:n] + reach[:n])
    bottoms = np.fmax(np.where(usable, face.low[n:], -np.inf), at.low[n : 2 * n] - reach[n:])
    second_low: Any = -np.inf
    second_high: Any = np.inf
    if run.curvature and not derivative and case.hold is None:
        second_low, second_high = _second_order(runner, run, low, high)
    if case.hold is not None:  # only what the map itself takes is attained
        at = runner(centre, centre, gradient=False, branches=run.branches_of(rows[: 2 * n]) if derivative else None)
    best[0].offer(_known(at.low[:n]), part[case.owner], choice[:n])
    best[1].offer(_known(-at.high[n : 2 * n]), part[case.owner], choice[n:])
    with np.errstate(invalid="ignore"):  # an infinite slope over an edge of no width
        span = np.maximum(np.abs(face.gradient_low), np.abs(face.gradient_high)) * radius
    span = np.where(radius > 0, span, 0.0)
    return _Forms(
        case.most(tops), -case.most(-bottoms), -case.most(-at_low), case.most(at_high), second_low, second_high,
        case.most(np.maximum(span[:n], span[n:])),
    )  # fmt: skip


@dataclass(frozen=True)
class _Cases:
    """Boxes once for every choice of branches at the corners they meet; `smooth`: not too many of them."""

    owner: Any  # row of the box, a case
    starts: Any
    smooth: Any
    hold: dict[Corner, Any] | None

    def held(self, times: int) -> dict[Corner, Any] | None:
        return None if self.hold is None else {k: np.tile(x, times) for k, x in self.hold.items()}

    def most(self, values: Floats) -> Floats:
        """The largest value over the cases of each box."""
        return values if self.hold is None else np.maximum.reduceat(values, self.starts, axis=0)


def _count(run: Run) -> Any:
    """How many corners meet both branches, a box."""
    return np.sum([first & second for first, second in run.sides.values()], axis=0, dtype=int)


def _cases(run: Run, rows: Any, apart: bool) -> _Cases:
    """Some boxes of a run, once a choice of branches if they are to be told `apart`."""
    n = len(rows)
    if not apart or not run.sides:
        return _Cases(np.arange(n), np.arange(n), np.ones(n, bool), None)
    count = _count(run)[rows]
    smooth = count <= MOST_OPEN
    times = np.where(smooth, 2 ** np.minimum(count, MOST_OPEN), 1)
    owner, starts = np.repeat(np.arange(n), times), np.cumsum(times) - times
    rank, shift = np.arange(len(owner)) - starts[owner], np.zeros(n, int)
    hold = {}
    for k, (first, second) in run.sides.items():
        both = (first & second)[rows]
        hold[k] = np.where(both[owner], (rank >> shift[owner]) & 1, np.where(first[rows], 0, 1)[owner])
        shift = shift + both
    return _Cases(owner, starts, smooth[owner], hold)


def _second_order(runner: Runner, run: Run, low: Floats, high: Floats) -> tuple[Floats, Floats]:
    """proofs/forms.md (4); without bounds where a reading met several cells."""
    centre, r = 0.5 * (low + high), 0.5 * (high - low)
    at = runner(centre, centre)
    linear = _reach(r, at.gradient_low, at.gradient_high)
    down, up = at.low - linear, at.high + linear
    with np.errstate(invalid="ignore"):
        for (i, j), (least, most) in run.curvature.items():
            area = r[:, i] * r[:, j]
            spread = np.where(area > 0, np.maximum(np.abs(least), np.abs(most)) * area, 0.0)
            if i == j:
                down += 0.5 * np.where(area > 0, np.minimum(least, 0.0) * area, 0.0)
                up += 0.5 * np.where(area > 0, np.maximum(most, 0.0) * area, 0.0)
            else:
                down, up = down - spread, up + spread
    jumps = run.split | run.open()
    return np.where(jumps, -np.inf, down), np.where(jumps, np.inf, up)


def _reach(radius: Floats, g_low: Floats, g_high: Floats) -> Floats:
    with np.errstate(invalid="ignore"):
        each = np.maximum(np.abs(g_low), np.abs(g_high)) * radius
    total: Floats = np.where(radius > 0, each, 0.0).sum(axis=1)
    return total


def _known(values: Floats) -> Floats:
    return np.where(np.isfinite(values), values, -np.inf)


def _found(
    obligation: Obligation, tops: list[tuple[Ends, ...]], boxes: _Boxes, best: tuple[_Best, _Best],
    magnitude: bool, leaves: int, stopped: str,
) -> Found:  # fmt: skip
    leaf = boxes.split < 0
    upper, lower = float(boxes.upper[leaf].max()), float(boxes.lower[leaf].min())
    if magnitude:
        upper = max(abs(upper), abs(lower))
        lower = -upper
    within = (boxes.plain[:, 0] >= lower) & (boxes.plain[:, 1] <= upper)
    centred = (boxes.plain[:, 2] >= lower) & (boxes.plain[:, 3] <= upper)
    monotone = (boxes.plain[:, 4] >= lower) & (boxes.plain[:, 5] <= upper)
    best_form = np.where(monotone, MONOTONE, SECOND)
    form = np.where(within, DIRECT, np.where(centred, CENTRED, best_form))
    trees = tuple(_written(boxes, k, form) for k in range(len(tops)))
    points = [_point(obligation, tops, boxes, b) for b in best]
    return Found(trees, leaves, upper, lower, points[0], points[1], stopped)


def _written(boxes: _Boxes, root: int, form: Any) -> str:
    """Preorder: a number bisects the variable of that rank, a letter is a leaf and its form."""
    out, stack = [], [root]
    while stack:
        k = stack.pop()
        if boxes.split[k] < 0:
            out.append(str(form[k]))
        else:
            out.append(str(int(boxes.split[k])))
            stack += [int(boxes.child[k]) + 1, int(boxes.child[k])]
    return " ".join(out)


def _point(obligation: Obligation, tops: list[tuple[Ends, ...]], boxes: _Boxes, best: _Best) -> Point:
    """The exact point of an attained value: ends or middles of its box, whose ends are exact again."""
    parent = {int(boxes.child[k]): k for k in np.flatnonzero(boxes.split >= 0)}
    path, k = [], best.box
    while k >= len(tops):
        second = k not in parent
        up = int(parent[k - 1 if second else k])
        path.append((int(boxes.split[up]), second))
        k = up
    box = [list(c) for c in tops[k]]
    for variable, second in reversed(path):
        box[variable][0 if second else 1] = (box[variable][0] + box[variable][1]) / 2
    ends = {-1: lambda c: c[0], 0: lambda c: (c[0] + c[1]) / 2, 1: lambda c: c[1]}
    point = {}
    for v, cell, side in zip(obligation.variables, box, best.choice, strict=True):
        x = ends[int(side)](cell)
        if obligation.by and obligation.reads and not v.listed:  # strictly inside a library cell: proofs/attained.md
            x += (cell[1] - cell[0]) * -int(side) / NUDGE
        point[v.name] = x if v.listed else min(max(x, v.inside[0]), v.inside[1])
    return point
