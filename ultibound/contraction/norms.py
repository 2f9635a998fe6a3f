"""The supremum of a norm ‖V A L‖ over boxes: subdivision, worst boxes first, by the affine part of A and its corners.

Floating point: what leaves this module are witnesses, a splitting tree a top cell and a point with the direction that
is stretched most (proofs/matrix.md (2), proofs/several.md (4)).
"""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import product
from typing import Any

import numpy as np

from ..bounding.evaluate import Runner, to_float
from ..bounding.intervals import Floats
from ..bounding.search import SHARE, Effort
from ..claim.obligations import Obligation, Variable, together
from .branches import MOST_CHOICES, Numbered, choices, held_to, highest, met_by, numbered
from .inequalities import Scales, fitted, greatest, plain, told_apart

BATCH = 64
BEST = 4  # of so many leaves, the worst is bisected at once
MOST_SLOPES = 8  # as in the checker: further ones count as rest
CORNERS = 2_000_000  # numbers of all corners of a batch at once
FINEST = 2.0**-40  # of a cell, below which no box is bisected
STALLED = 0.9  # of what is left to the gap: where twice as many leaves leave as much at a jump, it stays
FIRST_LOOK = 128  # leaves
REFITTED = 8  # times as many leaves, until the scales of an ellipsoid are chosen anew


def floats(m: Sequence[Sequence[Fraction]]) -> Floats:
    return np.array([[to_float(x) for x in row] for row in m])


@dataclass(frozen=True, slots=True)
class Entry:
    """An entry of the matrix, ready to run; `columns`: where its variables stand among those of all entries."""

    obligation: Obligation
    runner: Runner
    columns: list[int]


@dataclass(frozen=True, slots=True)
class Norm:
    """‖e‖ = |V e| in floating point; without an `inverse` L, of vectors.

    With `many` more rows than states the vertices of the ball stand for L, (n, vertices): proofs/matrix.md (7).
    """

    rows: Floats
    inverse: Floats | None
    round: bool  # Euclidean length, else the largest magnitude
    many: bool = False

    @property
    def right(self) -> Floats:
        return self.inverse if self.inverse is not None else np.eye(1)


@dataclass(frozen=True, slots=True)
class Stretched:
    """Trees, estimates of the supremum from above and below, and where the lower one is taken."""

    trees: tuple[str, ...]
    leaves: int
    upper: float
    lower: float
    point: dict[str, Fraction]
    direction: tuple[float, ...]
    stopped: str
    scales: Scales | None = None  # of an ellipsoid whose leaves have a rest: proofs/matrix.md (2e)


@dataclass(frozen=True, slots=True)
class Affine:
    """A over boxes: centre (boxes, n, c), slopes times half widths (boxes, variables, n, c), rest (boxes, n, c)."""

    centre: Floats
    slopes: Floats
    rest: Floats
    lost: Floats  # (boxes, variables, n, c): what a variable adds to the rest; bisecting it may gain that
    jumps: Any  # (boxes,): whether a derivative may jump inside
    open: Any = None  # (boxes,): whether derivatives rest on corners that meet both branches
    sides: Any = None  # (boxes, corners, 2): which branches are met of those where they may jump


class Matrices:
    """The entries of a Jacobian or of misses over boxes of the variables of all of them."""

    def __init__(
        self, rows: Sequence[Sequence[tuple[Obligation, Runner]]], into: Callable[[Floats], Floats] = lambda x: x
    ) -> None:
        """`into` moves points of the boxes into the set, where that is smaller."""
        self.into = into
        self.variables: list[Variable] = together([o for row in rows for o, _ in row])
        rank = {v.name: k for k, v in enumerate(self.variables)}
        self.rows = [[Entry(o, r, [rank[v.name] for v in o.variables]) for o, r in row] for row in rows]
        self.corners: dict[int, Numbered] | None = None

    def _numbered(self) -> dict[int, Numbered]:
        """The corners of derivatives, by entry."""
        if self.corners is None:
            marked = [e for row in self.rows for e in row if e.obligation.by]
            found = numbered([(e.runner, e.columns) for e in marked], self.variables)
            self.corners = {id(e): here for e, here in zip(marked, found, strict=True)}
        return self.corners

    def by_branches(self, low: Floats, high: Floats, a: Affine, wanted: Any = True) -> tuple[Any, Affine] | None:
        """A over boxes where corners meet several branches, for each choice of these; and which box each is of."""
        both = a.sides.all(axis=2)
        some = np.flatnonzero(a.open & wanted & (2 ** both.sum(axis=1) <= MOST_CHOICES))
        if not len(some):
            return None
        owner, held = choices(a.sides, some)
        return owner, self.affine(low[owner], high[owner], held)

    def affine(self, low: Floats, high: Floats, held: Any = None) -> Affine:
        """`held` (boxes, corners): the branch that each corner is held to."""
        boxes, count = low.shape
        corners = self._numbered()
        sides = np.zeros((boxes, highest(list(corners.values())), 2), bool)
        shape = boxes, len(self.rows), len(self.rows[0])
        middle, half = (low + high) / 2, (high - low) / 2
        centre, rest = np.zeros(shape), np.zeros(shape)
        slopes, lost = np.zeros((boxes, count, *shape[1:])), np.zeros((boxes, count, *shape[1:]))
        jumps, opened = np.zeros(boxes, bool), np.zeros(boxes, bool)
        with np.errstate(invalid="ignore", over="ignore"):
            for j, column in enumerate(zip(*self.rows, strict=True)):
                holds = [
                    held_to(corners[id(e)], held) if held is not None and e.obligation.by else None for e in column
                ]
                runs = [
                    e.runner(low[:, e.columns], high[:, e.columns], hold=h) for e, h in zip(column, holds, strict=True)
                ]
                linear, left = np.zeros((len(column), *low.shape)), np.zeros((len(column), *low.shape))
                for i, (e, run) in enumerate(zip(column, runs, strict=True)):
                    r = half[:, e.columns]
                    linear[i][:, e.columns] = np.where(r > 0, (run.gradient_low + run.gradient_high) / 2 * r, 0.0)
                    left[i][:, e.columns] = np.where(r > 0, (run.gradient_high - run.gradient_low) / 2 * r, 0.0)
                # where slopes vary more than they are large, a variable is better left as wide as it is
                telling = np.abs(linear).sum(axis=0) >= left.sum(axis=0)
                about = np.stack([telling, np.ones_like(telling)])
                ends = [np.where(about, middle, x).reshape(2 * boxes, count) for x in (low, high)]
                for i, (e, run, hold) in enumerate(zip(column, runs, holds, strict=True)):
                    still = np.zeros(boxes, bool)
                    if e.obligation.by:
                        opened |= run.open()
                        still = run.split | (run.open() & (held is None))
                        if held is None:
                            met_by(corners[id(e)], run.sides, sides)
                    jumps |= still
                    centre[:, i, j], rest[:, i, j] = (run.low + run.high) / 2, (run.high - run.low) / 2
                    whole = np.abs(linear[i]) + left[i]
                    lost[:, :, i, j], least = whole, rest[:, i, j].copy()
                    twice = None if hold is None else {key: np.tile(x, 2) for key, x in hold.items()}
                    here = e.runner(*(x[:, e.columns] for x in ends), gradient=False, hold=twice)
                    values = zip(here.low.reshape(2, boxes), here.high.reshape(2, boxes), strict=True)
                    for fixed, (least_there, most_there) in zip(about, values, strict=True):
                        total = np.where(fixed, left[i], 0.0).sum(axis=1) + (most_there - least_there) / 2
                        told = np.where(fixed, linear[i], 0.0)
                        width = total + np.abs(told).sum(axis=1) / 2  # what is told apart costs about half
                        better = (width < least) & ~still
                        least = np.where(better, width, least)
                        centre[better, i, j], rest[better, i, j] = (least_there + most_there)[better] / 2, total[better]
                        slopes[better, :, i, j] = told[better]
                        lost[better, :, i, j] = np.where(fixed, left[i], whole)[better]
        return Affine(centre, slopes, rest, lost, jumps, opened, sides)

    def at(self, x: Floats) -> Floats:
        """The matrices at points (points, variables), as (points, n, c)."""

        def entry(e: Entry) -> Floats:
            points = x[:, e.columns]
            return e.runner(points, points, gradient=False).low

        return np.stack([np.stack([entry(e) for e in row], axis=1) for row in self.rows], axis=1)


def seen(norm: Norm, a: Affine, scales: Scales | None) -> tuple[Floats, Floats, Floats]:
    """Over boxes: upper estimates of the norm, the signs (boxes, variables) of the corner it is largest at, and what
    bisecting each variable may gain (boxes, variables)."""
    gains = worth(norm, a)
    if scales is None:
        return *over_boxes(norm, a), gains
    found, where, first = np.full(len(a.rest), np.inf), np.ones(a.lost.shape[:2]), None
    if norm.inverse is None:  # a vector: its corners are measured one by one as well, and the lesser bound counts
        found, where = over_boxes(norm, a)
        first = where
    good = np.isfinite(a.rest).all(axis=(1, 2)) & np.isfinite(a.centre).all(axis=(1, 2))
    if good.any():
        over = greatest(norm.rows, norm.right, a.centre[good], a.slopes[good], a.rest[good], scales,
            None if first is None else first[good],
        )  # fmt: skip
        found[good], where[good] = np.minimum(found[good], over.value), over.signs
        with np.errstate(invalid="ignore"):
            turned = np.einsum("bi,bkij,bj->bk", over.y, a.lost[good], over.x)
        gains[good] = np.where(np.isnan(turned), np.inf, turned)
    return found, where, gains


@dataclass(frozen=True, slots=True)
class Seen:
    """Of boxes: upper estimates, the signs of corners, what bisecting gains, jumps inside, whether by branches."""

    upper: Floats
    where: Floats
    gains: Floats
    jumps: Any
    branched: Any


def estimate(norm: Norm, matrices: Matrices, low: Floats, high: Floats, scales: Scales | None, above: float) -> Seen:
    """As `seen`; branch by branch where that is less, and what is found without is more than `above`."""
    a = matrices.affine(low, high)
    found = Seen(*seen(norm, a, scales), a.jumps, np.zeros(len(low), bool))
    more = matrices.by_branches(low, high, a, found.upper > above)
    if more is None:
        return found
    owner, b = more
    upper, where, gains = seen(norm, b, scales)
    first = np.flatnonzero(np.r_[True, owner[1:] != owner[:-1]])
    for k, part in zip(owner[first], np.split(np.arange(len(owner)), first[1:]), strict=True):
        worst = part[np.argmax(upper[part])]
        if upper[worst] < found.upper[k]:
            found.upper[k], found.where[k], found.gains[k] = upper[worst], where[worst], gains[worst]
            found.jumps[k], found.branched[k] = b.jumps[part].any(), True
    return found


def over_boxes(norm: Norm, a: Affine) -> tuple[Floats, Floats]:
    """By all corners: upper estimates of the norm, and signs of the corner it is largest at; of lengths, of vectors."""
    boxes, count = a.lost.shape[:2]
    with np.errstate(invalid="ignore", over="ignore"):
        centre, slopes = norm.rows @ a.centre @ norm.right, norm.rows @ a.slopes @ norm.right
        rest = np.abs(norm.rows) @ a.rest @ np.abs(norm.right)
    if norm.many:
        return _by_vertices(centre, slopes, rest)
    size = np.abs(slopes).sum(axis=(2, 3))
    order = np.argsort(-size.max(axis=0, initial=0.0), kind="stable")
    moving = [int(k) for k in order if size[:, k].max(initial=0.0) > 0]
    for k in moving[MOST_SLOPES:]:
        rest = rest + np.abs(slopes[:, k])
    moving = moving[:MOST_SLOPES]
    signs = np.array(list(product((1.0, -1.0), repeat=len(moving)))).reshape(2 ** len(moving), len(moving))
    found, where = np.full(boxes, -np.inf), np.zeros((boxes, count))
    rows = np.arange(boxes)
    step = max(1, CORNERS // max(1, centre[0].size * boxes))
    for first in range(0, len(signs), step):
        some = signs[first : first + step]
        corners = centre[:, None] + np.einsum("sk,bkij->bsij", some, slopes[:, moving])
        each = _length(corners) if norm.round else _rows(corners, rest)
        best = np.argmax(each, axis=1)
        better = np.asarray(each[rows, best] > found)
        found = np.where(better, each[rows, best], found)
        chosen = np.zeros((boxes, count))
        chosen[:, moving] = some[best]
        where = np.where(better[:, None], chosen, where)
    if len(order) > len(moving):
        _further(norm, centre, slopes, where)
    if norm.round:
        found = found + np.sqrt(np.square(rest).sum(axis=(1, 2)))
    return np.where(np.isfinite(found), found, np.inf), where


def _by_vertices(centre: Floats, slopes: Floats, rest: Floats) -> tuple[Floats, Floats]:
    """As `over_boxes`: each entry of V A Q on its own, all signs at once."""
    boxes = len(centre)
    each = (np.abs(centre) + np.abs(slopes).sum(axis=1) + rest).reshape(boxes, -1)
    rows, best = np.arange(boxes), np.argmax(np.where(np.isnan(each), np.inf, each), axis=1)
    found, middle = each[rows, best], centre.reshape(boxes, -1)[rows, best]
    signs = np.sign(slopes.reshape(*slopes.shape[:2], -1)[rows, :, best]) * np.where(middle < 0, -1.0, 1.0)[:, None]
    return np.where(np.isfinite(found), found, np.inf), np.where(np.isfinite(signs), signs, 0.0)


def _further(norm: Norm, centre: Floats, slopes: Floats, where: Floats) -> None:
    """Signs of the variables that no corner tells apart: each the one that makes the norm larger."""
    here = centre + np.einsum("bk,bkij->bij", where, slopes)
    for k in np.flatnonzero(slopes.any(axis=(0, 2, 3))):
        still = where[:, k] == 0
        sides = [here + sign * slopes[:, k] for sign in (1.0, -1.0)]
        sizes = [_length(x) if norm.round else np.abs(x).sum(axis=2).max(axis=1) for x in sides]
        sign = np.where(sizes[0] >= sizes[1], 1.0, -1.0)
        where[:, k] = np.where(still, sign, where[:, k])
        step = sign[:, None, None] * slopes[:, k]
        here = np.where(still[:, None, None], here + step, here)


def worth(norm: Norm, a: Affine) -> Floats:
    """What bisecting each variable may gain, (boxes, variables), seen in the norm."""
    with np.errstate(invalid="ignore"):
        seen = np.abs(norm.rows) @ a.lost @ np.abs(norm.right)
    if norm.many:
        seen = seen.max(axis=3, keepdims=True)
    found: Floats = seen.sum(axis=(2, 3)) if norm.round else seen.sum(axis=3).max(axis=2)
    return np.where(np.isnan(found), np.inf, found)


def _rows(corners: Floats, rest: Floats) -> Floats:
    """Largest row sums (boxes, corners) of magnitudes, the rest added."""
    found: Floats = (np.abs(corners).sum(axis=3) + rest.sum(axis=2)[:, None]).max(axis=2)
    return found


def _length(m: Floats) -> Floats:
    """Largest singular values; inf where a matrix is not finite."""
    good = np.asarray(np.isfinite(m).all(axis=(-2, -1)))
    found: Floats = np.linalg.norm(np.where(good[..., None, None], m, 0.0), 2, axis=(-2, -1))
    return np.where(good, found, np.inf)


def size(norm: Norm, m: Floats) -> Floats:
    """The norm of matrices (points, n, c)."""
    with np.errstate(invalid="ignore", over="ignore"):
        b = norm.rows @ m @ norm.right
    if norm.many:
        return np.asarray(np.abs(b).max(axis=(1, 2)), dtype=np.float64)
    return _length(b) if norm.round else np.abs(b).sum(axis=2).max(axis=1)


def direction(norm: Norm, m: Floats) -> tuple[float, ...]:
    """The vector that a matrix (n, c) stretches most."""
    if norm.inverse is None:
        return (1.0,)
    b = norm.rows @ m @ norm.inverse
    if norm.many:
        return tuple(float(x) for x in norm.inverse[:, int(np.argmax(np.abs(b).max(axis=0)))])
    row = b[int(np.argmax(np.abs(b).sum(axis=1)))]
    y = np.linalg.svd(b)[2][0] if norm.round else np.where(row < 0, -1.0, 1.0)
    return tuple(float(x) for x in norm.inverse @ y)


def stretched(matrices: Matrices, norm: Norm, effort: Effort, enough: float = -np.inf) -> Stretched:
    """Witnesses for the supremum of the norm, within the gap of a value taken or as close as the limits allow.

    `enough` ends the search earlier: where the supremum is surely below it, or above it.
    """
    tops = list(product(*(v.cells for v in matrices.variables)))
    shape = len(tops), len(matrices.variables)
    low = np.array([[to_float(c[0]) for c in top] for top in tops]).reshape(shape)
    high = np.array([[to_float(c[1]) for c in top] for top in tops]).reshape(shape)
    inside = np.array([[to_float(v.inside[0]), to_float(v.inside[1])] for v in matrices.variables]).reshape(-1, 2)
    least = (high - low).max(axis=0, initial=0.0) * FINEST
    upper, score, jumps = np.zeros(0), np.zeros((0, shape[1])), np.zeros(0, bool)
    branched = np.zeros(0, bool)
    left, look = np.inf, FIRST_LOOK
    scales, fit = plain(norm.rows, norm.right) if norm.round else None, 1
    split, child = [-1] * len(tops), [-1] * len(tops)
    best, inner, at, stopped, done = -np.inf, -np.inf, np.zeros(shape[1]), "", 0
    fixed = np.array([v.listed for v in matrices.variables], bool)
    while True:
        for first in range(done, len(low), BATCH):
            part = slice(first, first + BATCH)
            e = estimate(norm, matrices, low[part], high[part], scales, best)
            upper, score = np.concatenate([upper, e.upper]), np.concatenate([score, e.gains])
            jumps, branched = np.concatenate([jumps, e.jumps]), np.concatenate([branched, e.branched])
            middle, half = (low[part] + high[part]) / 2, (high[part] - low[part]) / 2
            points = np.where(fixed, middle, np.clip(middle + e.where * half, inside[:, 0], inside[:, 1]))
            both = np.stack([points, matrices.into(points)])
            beyond, taken = _finite(size(norm, matrices.at(np.concatenate(both)))).reshape(both.shape[:2])
            best, points = max(best, float(beyond.max())), both[1]
            k = int(np.argmax(taken))
            if taken[k] > inner:
                inner, at = float(taken[k]), points[k]
        done = len(low)
        leaf = np.asarray(np.array(split, dtype=np.int64) < 0)
        if scales is not None and leaf.sum() >= fit:
            fit *= REFITTED
            scales = refit(norm, matrices, low, high, np.flatnonzero(leaf), scales, upper, score, branched, best)
        ceiling = max(best, 0.0) + max(SHARE * effort.gap * max(best, 0.0), effort.floor, 1e-6 * effort.gap)
        open_ = np.flatnonzero(leaf & (upper > max(ceiling, enough)))
        leaves = int(leaf.sum())
        effort.watch(leaves, float(upper[leaf].max()))
        if not len(open_):
            break
        if -np.inf < enough < inner:
            stopped = "beyond"
            break
        if leaves >= look:
            worst = open_[np.argmax(upper[open_])]
            if jumps[worst] and upper[worst] - best > STALLED * left:
                stopped = "jumps"
                break
            left, look = float(upper[worst]) - best, 2 * leaves
        room = effort.cells - leaves
        if room <= 0 or time.monotonic() + leaves * effort.later > effort.until:
            stopped = "cells" if room <= 0 else "seconds"
            break
        worst = open_[np.argsort(-upper[open_], kind="stable")][: min(BATCH, room, 1 + leaves // BEST)]
        wide = np.where(high[worst] - low[worst] > least, score[worst], -1.0)
        axis = np.argmax(wide, axis=1)
        usable = wide[np.arange(len(worst)), axis] > 0
        if not usable.any():
            stopped = "precision"
            break
        for k, v in zip(worst[usable], axis[usable], strict=True):
            split[k], child[k] = int(v), len(split)
            split += [-1, -1]
            child += [-1, -1]
            cut = (low[k, v] + high[k, v]) / 2
            below, above = high[k].copy(), low[k].copy()
            below[v], above[v] = cut, cut
            low, high = np.vstack([low, low[k], above]), np.vstack([high, below, high[k]])
    trees = tuple(_written(split, child, branched, k) for k in range(len(tops)))
    point = {v.name: _exact(v, x) for v, x in zip(matrices.variables, at, strict=True)}
    vector = direction(norm, matrices.at(at[None])[0])
    return Stretched(trees, leaves, float(upper[leaf].max()), inner, point, vector, stopped, scales)


def refit(
    norm: Norm, matrices: Matrices, low: Floats, high: Floats, leaves: Any, scales: Scales, upper: Floats,
    score: Floats, branched: Any, above: float,
) -> Scales:  # fmt: skip
    """Scales for the worst of the leaves, where they do better over all of them; all is then known anew."""
    worst = leaves[np.argmax(upper[leaves])]
    ends = low[worst][None], high[worst][None]
    a = matrices.affine(*ends)
    if branched[worst] and (more := matrices.by_branches(*ends, a)) is not None:
        a = more[1]
    slopes, rest = told_apart(a.slopes, a.rest, scales)
    if not np.isfinite(upper[worst]) or not rest.any():
        return scales
    sizes, where, _ = seen(norm, a, scales)
    k = int(np.argmax(sizes))
    at = a.centre[k] + np.einsum("k,kij->ij", where[k], slopes[k])
    found = fitted(norm.rows, norm.right, at, rest[k], scales)
    tried = [
        estimate(norm, matrices, low[some], high[some], found, above)
        for some in np.split(leaves, range(BATCH, len(leaves), BATCH))
    ]
    values = np.concatenate([x.upper for x in tried])
    if not values.max() < upper[leaves].max():
        return scales
    upper[leaves], score[leaves] = values, np.concatenate([x.gains for x in tried])
    branched[leaves] = np.concatenate([x.branched for x in tried])
    return found


def _finite(x: Floats) -> Floats:
    found: Floats = np.where(np.isfinite(x), x, -np.inf)
    return found


def _exact(v: Variable, x: float) -> Fraction:
    """A value a point may take: of a list the nearest, else within the ends for points."""
    if v.listed:
        return min(((c[0] + c[1]) / 2 for c in v.cells), key=lambda c: abs(to_float(c) - x))
    return min(max(Fraction(x), v.inside[0]), v.inside[1])


def _written(split: list[int], child: list[int], branched: Any, root: int) -> str:
    """Preorder: a number bisects the variable of that rank, c is a leaf by its affine part, b by that of branches."""
    out, stack = [], [root]
    while stack:
        k = stack.pop()
        if split[k] < 0:
            out.append("b" if branched[k] else "c")
        else:
            out.append(str(split[k]))
            stack += [child[k] + 1, child[k]]
    return " ".join(out)
