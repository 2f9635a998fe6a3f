"""Bounds of requirements by weighted sums of squares, as proof lines: proofs/squares.md.

The polynomials are the checker's own (`checker/polynomials.py`), cut down; nothing of the subdivision enters.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from itertools import product
from math import inf, isinf
from typing import Any

from ..checker.models import Exponents
from ..checker.polynomials import Expansion, Polynomial, size
from ..checker.ranges import Box
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..checker.squares import LEAF, expansion_of, shown
from ..polynomial.truncation import truncated
from ..positivity.bounds import bounded_below, least_sampled, work
from .lines import Writer

BITS = 56
ORDERS = {1: (12, 24), 2: (8, 16), 3: (8, 12)}  # of models, by the number of variables that matter
FEW = (4, 8)  # of more variables
MOST_TOPS = 64  # combinations of library cells and listed values
MOST_PIECES, WORK = 32, 40_000  # parts beyond these; entries of Gram matrices, over all parts
DEGREE = 12  # up to which an exact polynomial is left as it is
SHARE = 4  # the remainder, and what is cut off, may each take one part in so many of the gap
LEAST, NOTHING = 0.02, 1e-6  # share of the spread of a polynomial that counts as its size near zero; and at least

SIGNS = {"lower": 1, "upper": -1}
GRAIN = 2**20  # of points
TREE = list[str]


@dataclass(frozen=True)
class Asked:
    """The ends wanted of an obligation, each with what would be enough (infinite: as near as the gap says)."""

    proves: str
    on: int
    enough: dict[str, float]
    gap: float
    until: float
    watch: Callable[[str, int, float], None]


class Squares:
    """The search for one line of squares: its pieces, and what they show so far."""

    def __init__(self, writer: Writer, asked: Asked) -> None:
        self.writer, self.asked = writer, asked
        self.meaning = writer.derivation.meaning(asked.proves, writer.domain(asked.on))
        self.pieces: list[dict[str, Any]] = []
        self.found: dict[str, Fraction] = {}
        self.most = self.tops = 0
        self.breaking: dict[str, Fraction] = {}  # a point that seems to have less than would be enough
        self.said = ""  # of the last programme

    def line(self) -> tuple[int | None, str]:
        """The number of the line; None, and why, where no squares were found."""
        tops = [list(top) for top in product(*(v.cells for v in self.meaning.variables))]
        if len(tops) > MOST_TOPS:
            return None, f"{len(tops)} cells: sums of squares are tried over {MOST_TOPS} at most"
        self.tops, self.most = len(tops), MOST_PIECES + len(tops)
        try:
            witness, expansion = self.nearest(tops[0])
            trees = [" ".join(self.divided(expansion, top, len(tops) - k)) for k, top in enumerate(tops, 1)]
        except (Undefined, Rejected) as why:
            return None, str(why)
        witness |= {"pieces": self.pieces, "trees": trees}
        return self.writer.squares(self.asked.proves, self.asked.on, witness, self.found), ""

    def nearest(self, box: Box) -> tuple[dict[str, Any], Expansion]:
        """Exact polynomials where all is rational; else of the least order that is near enough over a box."""
        active = sum(any(low < high for low, high in v.cells) for v in self.meaning.variables)
        for bits, order in ((0, 0), *((BITS, n) for n in ORDERS.get(active, FEW))):
            witness = {"bits": bits, "order": order}
            try:
                expansion = expansion_of(self.writer.derivation, self.meaning, witness, self.writer.flows())
                near, rest = expansion.over_box(box)
            except Undefined:
                continue
            if SHARE * rest <= self.budget(near):
                break
        return witness, expansion_of(self.writer.derivation, self.meaning, witness, self.writer.flows())

    def budget(self, near: Polynomial) -> float:
        """How far off bounds may be: by the gap, or as far as what would be enough leaves room at all."""
        count = len(self.meaning.variables)
        middle = abs(float(near.get((0,) * count, Fraction(0))))
        far = float(size(count, {e: c for e, c in near.items() if any(e)}))
        found = self.asked.gap * max(middle - far, LEAST * far, NOTHING)
        return min([found, *(room for name in self.asked.enough if 0 < (room := self.room(near, name)) < inf)])

    def room(self, near: Polynomial, name: str, box: Box | None = None) -> float:
        """Between what would be enough and the end that samples of the box show; below 0 where it cannot be reached."""
        sign, enough = SIGNS[name], self.asked.enough[name]
        if isinf(enough):
            return inf
        count = len(self.meaning.variables)
        signed = {e: sign * c for e, c in near.items()} or {(0,) * count: Fraction(0)}
        least, at = least_sampled(signed, count)
        if least < sign * enough and box is not None:
            whole = [Fraction(round(float(t) * GRAIN), GRAIN) for t in at]
            self.breaking = {
                v.name: (low + high + (high - low) * t) / 2
                for v, (low, high), t in zip(self.meaning.variables, box, whole, strict=True)
            }
        return least - sign * enough

    def divided(self, expansion: Expansion, box: Box, others: int) -> TREE:
        """The splitting tree of a box whose parts have squares; `others`: boxes that come after it."""
        room = time.monotonic() < self.asked.until and len(self.pieces) + others < self.most
        try:
            near, rest = expansion.over_box(box)
            stated, close = self.piece(near, rest, box)
        except Undefined:
            stated, close, near, rest = None, False, {}, Fraction(0)
        axis = None if close else self.widest(near, box)
        if stated is not None and (axis is None or not room):
            for name, x in shown(near, rest, stated, sorted(self.asked.enough), len(box)).items():
                self.found[name] = (min if name == "lower" else max)(self.found.get(name, x), x)
            self.pieces.append(stated)
            self.asked.watch(f"{self.asked.proves}: sums of squares", len(self.pieces), float(max(self.found.values())))
            return [LEAF]
        if axis is None or not room:
            raise Undefined(
                f"no sums of squares in {len(self.pieces) + 1} parts ({self.said or 'no polynomial near it'})"
            )
        low, high = box[axis]
        tree = [str(axis)]
        for k, part in enumerate(((low, (low + high) / 2), ((low + high) / 2, high))):
            tree += self.divided(expansion, [*box[:axis], part, *box[axis + 1 :]], others + 1 - k)
        return tree

    def widest(self, near: Polynomial, box: Box) -> int | None:
        """The variable that most of what is not linear rests on; where nothing is known, the one divided least."""
        weights = {}
        for i, (v, (low, high)) in enumerate(zip(self.meaning.variables, box, strict=True)):
            if low < high:
                bent = sum(abs(float(c)) for e, c in near.items() if e[i] and sum(e) > 1)
                weights[i] = bent, (high - low) / (v.cells[-1][1] - v.cells[0][0])
        return max(weights, key=lambda i: weights[i]) if weights else None

    def piece(self, near: Polynomial, rest: Fraction, box: Box) -> tuple[dict[str, Any] | None, bool]:
        """A polynomial near the term and its squares, and whether they are as close as is asked."""
        count, budget = len(self.meaning.variables), self.budget(near)
        whole = not rest and max(map(sum, near), default=0) <= DEGREE
        p = near if whole else truncated(near, budget / SHARE)
        off = float(rest + size(count, {e: near.get(e, Fraction(0)) - p.get(e, Fraction(0)) for e in near | p}))
        p = p or {(0,) * count: Fraction(0)}
        self.most = min(self.most, self.tops + WORK // work(p))
        if self.tops * work(p) > 2 * WORK:
            raise Rejected(
                f"{self.tops} cells with polynomials of so many terms: more than sums of squares are tried for"
            )
        stated: dict[str, Any] = {"polynomial": written(p)}
        close = True
        for name, enough in self.asked.enough.items():
            sign = SIGNS[name]
            found, low, said = bounded_below({e: sign * c for e, c in p.items()}, budget / SHARE, sign * enough + off)
            self.said = "; ".join(said)
            if found is None:
                return None, False
            bound = float(found.bound)
            room = self.room(near, name, box)
            near_enough = bound >= low - budget and SHARE * rest <= budget
            close &= bound - off >= sign * enough or (near_enough and not 0 < room < inf)
            squares = [[str(w), n, written(q)] for w, n, q in found.squares]
            stated[name] = {"bound": str(sign * found.bound), "squares": squares}
        return stated, close


def written(p: Mapping[Exponents, Fraction | int]) -> str:
    """A polynomial as the checker reads it: coefficient and powers, term by term."""
    return ", ".join(" ".join([str(c), *map(str, e)]) for e, c in sorted(p.items()) if c)
