"""Enclosures over boxes: the forms at the leaves, and splitting trees (proofs/forms.md, proofs/splitting.md)."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from itertools import product
from math import prod

from .ranges import Box, Ends, Evaluator, Interval, Jet
from .reals import Undefined

MOST_BRANCHES = 32
DEEPEST = 300


def enclose(evaluator: Evaluator, box: Box, form: str) -> Interval:
    """Range over a box by one form: d direct, c centred, m monotone, s second order (proofs/forms.md)."""
    jet = evaluator.run(box, form != "d")
    low, high = evaluator.wanted(jet)
    if form not in ("d", "c", "m", "s"):
        raise Undefined(f"unknown form {form!r}")
    if form == "d":
        return low, high
    sides = dict(evaluator.sides)
    count = prod(map(len, sides.values()))
    if not evaluator.by:  # a value: piecewise smooth all over, whatever branches are met
        low, high = smooth(evaluator, box, form, jet)
        if count == 1:
            return low, high
    if (evaluator.by and evaluator.several) or count > MOST_BRANCHES:
        return low, high  # a derivative that may jump has no other form
    parts = []  # branch by branch, each smooth over the whole box: proofs/corners.md (3)
    try:
        for choice in product(*sides.values()):
            evaluator.chosen = dict(zip(sides, choice, strict=True))
            branch = evaluator.run(box, True) if count > 1 else jet
            if evaluator.by and evaluator.several:  # a branch may read cells that the term itself does not
                return low, high
            parts.append(smooth(evaluator, box, form, branch))
    except Undefined:  # a branch is not defined where it is not taken
        if count > 1:
            return low, high
        raise
    finally:
        evaluator.chosen = {}
    return max(low, min(p[0] for p in parts)), min(high, max(p[1] for p in parts))


def smooth(evaluator: Evaluator, box: Box, form: str, jet: Jet) -> Interval:
    """The forms that use slopes, for a jet over the box."""
    low, high = evaluator.wanted(jet)
    slopes = evaluator.slopes(jet)
    if form == "c":
        c_low, c_high = centred(evaluator, box, slopes)
        return max(low, c_low), min(high, c_high)
    low, high = max(low, face(evaluator, box, slopes, -1)[0]), min(high, face(evaluator, box, slopes, 1)[1])
    if form == "m" or evaluator.by:
        return low, high
    curved = second_order(evaluator, box)
    return (low, high) if curved is None else (max(low, curved[0]), min(high, curved[1]))


def second_order(evaluator: Evaluator, box: Box) -> Interval:
    """Value and slopes at the centre, second derivatives over the box: proofs/forms.md (4). None across cells."""
    a, half = evaluator.a, Fraction(1, 2)
    radius = [(y - x) / 2 for x, y in box]
    rest: Interval = evaluator.zero
    try:
        for i, r in enumerate(radius):
            if not r:
                continue
            evaluator.direction = i
            row = evaluator.run(box, True).dg
            if evaluator.several or any(len(x) > 1 for x in evaluator.sides.values()):
                return None
            for j in row:
                if j == i:
                    rest = a.add(rest, a.mul(row[j], a.between(Fraction(0), half * r * r)))
                elif j > i:
                    rest = a.add(rest, a.mul(row[j], a.between(-r * radius[j], r * radius[j])))
        jet = evaluator.run([((x + y) / 2,) * 2 for x, y in box], True, part=True)
    finally:
        evaluator.direction = None
    for i, slope in jet.g.items():
        rest = a.add(rest, a.mul(slope, a.between(-radius[i], radius[i])))
    return a.add(jet.v, rest)


def centred(evaluator: Evaluator, box: Box, slopes: dict[int, Interval]) -> Interval:
    """f(c) + sum of slope times distance from the centre."""
    a = evaluator.a
    centre = [((x + y) / 2,) * 2 for x, y in box]
    total = evaluator.wanted(evaluator.run(centre, False, part=True))
    for i, slope in slopes.items():
        radius = (box[i][1] - box[i][0]) / 2
        total = a.add(total, a.mul(slope, a.between(-radius, radius)))
    return total


def face(evaluator: Evaluator, box: Box, slopes: dict[int, Interval], side: int) -> Interval:
    """Range over the face on which the upper (side 1) or lower (-1) end is taken, sound for that end alone."""
    reduced = list(box)
    for i, (low, high) in enumerate(box):
        slope = slopes.get(i)
        if slope is None or slope[0] >= 0:
            reduced[i] = (high, high) if side > 0 else (low, low)
        elif slope[1] <= 0:
            reduced[i] = (low, low) if side > 0 else (high, high)
    jet = evaluator.run(reduced, True, part=True)
    low, high = evaluator.wanted(jet)
    if all(x == y for x, y in reduced) or (evaluator.by and evaluator.several):
        return low, high
    c_low, c_high = centred(evaluator, reduced, evaluator.slopes(jet))
    return max(low, c_low), min(high, c_high)


def walk(evaluator: Evaluator, tops: list[tuple[Ends, ...]], trees: list[str]) -> tuple[Interval, int]:
    """Hull over the leaves of one splitting tree a top cell, and the number of leaves (proofs/splitting.md)."""
    hull: Interval = None
    leaves = 0
    for box, form in boxes(tops, trees):
        part = enclose(evaluator, box, form)
        hull = part if hull is None else (min(hull[0], part[0]), max(hull[1], part[1]))
        leaves += 1
    return hull, leaves


def boxes(tops: list[tuple[Ends, ...]], trees: list[str]) -> Iterator[tuple[Box, str]]:
    """The leaves of one splitting tree a top cell, each with what is written at it; together they cover all cells."""
    if len(trees) != len(tops) or not tops:
        raise Undefined(f"{len(trees)} trees for {len(tops)} cells")
    for top, tree in zip(tops, trees, strict=True):
        waiting = [(list(top), 0)]
        for token in tree.split(" "):
            if not waiting:
                raise Undefined("a tree goes on after its last leaf")
            box, depth = waiting.pop()
            if depth > DEEPEST:
                raise Undefined(f"a box bisected more than {DEEPEST} times")
            if token.isascii() and token.isdigit() and len(token) < 4 and int(token) < len(box):
                low, high = box[int(token)]
                halves = [list(box), list(box)]
                halves[0][int(token)] = low, (low + high) / 2
                halves[1][int(token)] = (low + high) / 2, high
                waiting += [(halves[1], depth + 1), (halves[0], depth + 1)]
                continue
            yield box, token
        if waiting:
            raise Undefined("a tree ends before all of its box is covered")
