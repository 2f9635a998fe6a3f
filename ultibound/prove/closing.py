"""Bounds of several states closed in on: what holds on the set a trajectory starts in, then where it ends up.

Every bound puts all trajectories into a box in the end; over that box slopes vary less, and a comparison bounds them
by less (proofs/several.md (8)).
"""

from __future__ import annotations

import time
from contextlib import suppress
from fractions import Fraction
from typing import TYPE_CHECKING

import numpy as np

from ..bounding.evaluate import to_float
from ..certificate.enclosing import BITS
from ..checker.absorbed import bound
from ..checker.matrices import Leaf, Matrix, metric
from ..checker.reals import Undefined
from ..checker.rules import Line, Rejected
from ..claim.obligations import Domain
from ..contraction.chains import Chain, chain

if TYPE_CHECKING:
    from .several import SeveralAttempt

ROUNDS = 4
WIDER = Fraction(1, 1000)  # share by which a box is wider than the bounds
LEAST = 1e-6  # of the room of a state: half the width of the narrowest box
NOTABLE = 0.02  # share by which a round has to lower some bound
LEAVES, GAP = 300, 0.01
Table = tuple[int, tuple[str, ...], int]  # line, trees, bits


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
        began = time.monotonic()
        try:
            on = w.append("absorbed", "absorbed", sorted({n for _, n in known.values()}), {}, concludes)
            with suppress(Undefined, Rejected):
                over_box(a, on, invariant, wide, misses, moves, bases)
        except Rejected:  # the box reaches beyond the region: what is left is the set itself
            if first == 0:
                along_the_map()
        a.ranges.spent += time.monotonic() - began
        if all(after[0] > known[s][0] * Fraction(1 - NOTABLE) for s, after in least(a).items()):
            return


def over_box(
    a: SeveralAttempt, on: int, invariant: int, wide: list[Fraction], misses: Table, moves: list[int],
    bases: list[tuple[Matrix, Matrix]],
) -> None:  # fmt: skip
    """Comparisons over one box."""
    w, n = a.writer, len(wide)
    spans = tuple((t.lower, t.upper) for t in a.targets)
    domain = Domain("ball", Fraction(1), spans[0], Fraction(0), spans, tuple(wide))
    rows, inverse = (
        tuple(tuple(x if i == j else Fraction(0) for j in range(n)) for i, x in enumerate(each))
        for each in ([1 / x for x in wide], wide)
    )
    found = a.searched("slopes", domain, metric("box", rows, inverse, n), max(a.gap, GAP), LEAVES)
    bits = 0 if w.exact("slopes", on) else BITS
    leaves = w.leaves("slopes", found.trees, bits, on)
    along = chain_over(a, domain, [to_float(x) for x in wide])
    compare(a, on, invariant, ((0, found.trees, bits), leaves), misses, moves, bases, along)


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
        each = [(bound(x, s, i), n) for n, x in lines.items() if x.rule in ("ultimate-bound", "componentwise")]
        if each:
            found[s] = min(each)
    return found
