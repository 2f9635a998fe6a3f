"""Bounds of several states closed in on: what holds on the set a trajectory starts in, then where it ends up.

Every bound puts all trajectories into a box in the end; over that box slopes vary less, and a comparison bounds them
by less (proofs/several.md (8)).
"""

from __future__ import annotations

import time
from collections.abc import Sequence
from contextlib import suppress
from dataclasses import dataclass
from fractions import Fraction
from typing import TYPE_CHECKING

import numpy as np

from ..bounding.evaluate import to_float
from ..certificate.attracting import JOINED, attracting, joined_leaves
from ..certificate.enclosing import BITS
from ..checker.absorbed import RULES, bound
from ..checker.attracting import BOUNDS
from ..checker.matrices import Leaf, Matrix, Metric, metric
from ..checker.reals import Undefined
from ..checker.rules import Line, Rejected
from ..checker.several import moved
from ..claim.obligations import Domain
from ..contraction.chains import Chain, chain
from ..contraction.norms import Norm, floats
from ..contraction.polytope import Pieces, directions, drawn_in

if TYPE_CHECKING:
    from .several import SeveralAttempt

ROUNDS = 6
WIDER = Fraction(1, 1000)  # share by which a box is wider than the bounds
LEAST = 1e-6  # of the room of a state: half the width of the narrowest box
NOTABLE, MUCH = 0.02, 0.15  # shares by which a round has to lower some bound; by which it is worth another at once
LEAVES, GAP = 300, 0.01
MOST_STATES = 5  # of which there are rows enough for a polytope to be kept
NOISE = 1e-3  # of the size of a state: how little disturbs it, at least, where directions are chosen
Table = tuple[int, tuple[str, ...], int]  # line, trees, bits


@dataclass(frozen=True, slots=True)
class Look:
    """How closely a polytope is looked for: gap and leaves of Jacobians and misses together, choices of its rows."""

    gap: float
    leaves: int
    rows: int


QUICK, CLOSE = Look(0.02, 40, 1200), Look(0.002, 100, 8100)


def chain_over(a: SeveralAttempt, domain: Domain, size: list[float]) -> Chain | None:
    """Rows that follow the middle of the Jacobians over a set (an estimate; what it is used for is proved)."""
    found = a.sampled(a.matrices("slopes", domain), np.random.default_rng(0))
    if not len(found):
        return None
    return chain((found.max(axis=0) + found.min(axis=0)) / 2, np.array([max(x, 1e-300) for x in size]))


def closed_in(
    a: SeveralAttempt, invariant: int, slopes: Table, misses: Table, moves: list[int],
    bases: list[tuple[Matrix, Matrix]],
) -> None:  # fmt: skip
    """Boxes that trajectories end up in, one inside the other, and the bounds by comparison over each."""
    w, states, rooms = a.writer, a.obligations.states, a.rooms()

    def along_the_map() -> None:
        along = chain_over(a, a.domain, [to_float(x) for x in rooms])
        compare(a, invariant, invariant, (slopes, a.leaves["slopes"]), misses, moves, [], along)

    if a.claim.horizon > 1:  # where single steps end up is not known
        along_the_map()
        return
    for first in range(ROUNDS):
        known = least(a)
        if len(known) < len(states) or a.ranges.interrupted or time.monotonic() + a.ranges.spent > a.ranges.until:
            return
        wide = [
            Fraction(f"{to_float(max(x * (1 + WIDER), room * Fraction(LEAST))):.9g}")
            for (x, _), room in zip(known.values(), rooms, strict=True)
        ]
        concludes = {s: str(x) for s, x in zip(states, wide, strict=True)}
        try:
            on = w.append("absorbed", "absorbed", sorted({n for _, n in known.values()}), {}, concludes)
            with suppress(Undefined, Rejected):
                over_box(a, on, invariant, wide, misses, moves, bases)
        except Rejected:  # the box reaches beyond the region: what is left is the set itself
            if first == 0:
                along_the_map()
                draws_in(a, invariant, a.domain, wide, moves, CLOSE)
        if not lower(a, known, NOTABLE):
            return


def over_box(
    a: SeveralAttempt, on: int, invariant: int, wide: list[Fraction], misses: Table, moves: list[int],
    bases: list[tuple[Matrix, Matrix]],
) -> None:  # fmt: skip
    """Polytopes and comparisons over one box."""
    w = a.writer
    spans = tuple((t.lower, t.upper) for t in a.targets)
    domain = Domain("ball", Fraction(1), spans[0], Fraction(0), spans, tuple(wide))
    known = least(a)
    draws_in(a, on, domain, wide, moves, QUICK)
    if lower(a, known, MUCH):  # closer looks are for boxes that change little
        return
    draws_in(a, on, domain, wide, moves, CLOSE)
    found = a.searched("slopes", domain, box(wide), max(a.gap, GAP), LEAVES)
    bits, began = 0 if w.exact("slopes", on) else BITS, time.monotonic()
    leaves = w.leaves("slopes", found.trees, bits, on)
    along = chain_over(a, domain, [to_float(x) for x in wide])
    compare(a, on, invariant, ((0, found.trees, bits), leaves), misses, moves, bases, along)
    a.ranges.spent += time.monotonic() - began


def lower(a: SeveralAttempt, known: dict[str, tuple[Fraction, int]], share: float) -> bool:
    """Whether the bound of some state is lower than before by that share."""
    return any(after[0] <= known[s][0] * Fraction(1 - share) for s, after in least(a).items())


def box(wide: Sequence[Fraction]) -> Metric:
    """The norm whose unit ball is so wide."""
    rows, inverse = (
        tuple(tuple(x if i == j else Fraction(0) for j in range(len(wide))) for i, x in enumerate(each))
        for each in ([1 / x for x in wide], wide)
    )
    return metric("box", rows, inverse, len(wide))


def draws_in(
    a: SeveralAttempt, on: int, domain: Domain, wide: Sequence[Fraction], moves: list[int], look: Look
) -> None:
    """A polytope that trajectories are drawn into, of about that width in each state: proofs/polytope.md."""
    w, lines, whole = a.writer, a.writer.proof.lines, a.writer.domain(on)
    if whole is None or len(wide) > MOST_STATES or any(q.within for q in a.claim.uncertain.values()):
        return
    rules = [n for n, x in lines.items() if x.part == w.part and x.proves in BOUNDS and x.domain in (whole, whole.of)]
    search = a.searched(JOINED, domain, box(wide), max(a.gap / 4, look.gap), look.leaves, form=evenly(a, domain, wide))
    bits, began = 0 if w.exact("slopes", on) and w.exact("misses", on) else BITS, time.monotonic()
    try:
        pieces = Pieces.of(joined_leaves(w, search.trees, bits, on))
    except Undefined:
        return
    far = np.array([to_float(x) for x in moved(w.derivation, [lines[n] for n in moves])])
    sizes = np.array([to_float(x) for x in wide])
    middle, spread = pieces.hull()
    with suppress(np.linalg.LinAlgError):
        each = directions(middle[:, :-1], sizes, np.maximum(spread[:, -1] + far, NOISE * sizes), look.rows)
        exact = tuple(tuple(Fraction(f"{x:.6g}") for x in row) for row in each)
        rows, shifts = floats(exact), np.abs(floats(exact)) @ far
        start = np.asarray(np.linalg.solve(np.eye(len(sizes)) - middle[:, :-1], middle[:, -1]), np.float64)
        ends = drawn_in(pieces, rows, shifts, start, sizes)
        if ends is not None and rules:
            low, high = ([Fraction(f"{x:.9g}") for x in end] for end in ends)
            attracting(w, on, rules[0], moves, (search.trees, bits), exact, low, high)
    a.ranges.spent += time.monotonic() - began


def evenly(a: SeveralAttempt, domain: Domain, wide: Sequence[Fraction]) -> Norm | None:
    """A norm in which what leads to each state is about 1, so that none is seen less closely than another."""
    taken = a.sampled(a.matrices(JOINED, domain, box(wide)), np.random.default_rng(0))
    from_box = np.array([*(to_float(x) for x in wide), 1.0])
    sizes = (np.abs(taken) @ from_box).max(axis=0, initial=0.0)
    return Norm(np.diag(1 / sizes), np.diag(from_box), False) if sizes.min() > 0 else None


def compare(
    a: SeveralAttempt, on: int, invariant: int, slopes: tuple[Table, list[Leaf]], misses: Table, moves: list[int],
    bases: list[tuple[Matrix, Matrix]], along: Chain | None,
) -> None:  # fmt: skip
    """Comparisons over a set in each of the bases, and along the map."""
    w, ((_, trees, bits), leaves) = a.writer, slopes
    each: list[tuple[tuple[Matrix, Matrix], Matrix]] = [(basis, ()) for basis in bases]
    if along is not None:
        each.append(((along.rows, along.inverse), along.beside))
    for basis, beside in each:
        found = w.entries("slopes", trees, bits, on, leaves, basis, beside)
        missed = w.entries("misses", misses[1], misses[2], invariant, a.leaves["misses"], basis)
        w.componentwise(on, found, missed, moves)


def least(a: SeveralAttempt) -> dict[str, tuple[Fraction, int]]:
    """The least bound of each state so far, and its line."""
    lines: dict[int, Line] = a.writer.proof.lines
    found: dict[str, tuple[Fraction, int]] = {}
    for i, s in enumerate(a.obligations.states):
        each = [(bound(x, s, i), n) for n, x in lines.items() if x.rule in RULES]
        if each:
            found[s] = min(each)
    return found
