"""Ranges of obligations as proof lines: searched in floating point, measured in the checker's arithmetic."""

from __future__ import annotations

import time
from collections.abc import Callable, Hashable
from dataclasses import dataclass
from fractions import Fraction
from math import log2

from ..bounding.evaluate import Runner
from ..bounding.search import Effort, Found, Point, search
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..claim import Claim
from ..claim.graph import Graph
from ..claim.motion import PHASE
from ..claim.obligations import Obligation
from ..polynomial.flows import FlowTable
from ..stepmap.symbolic import compiled
from .lines import Writer

BITS = 72
TWICE = 2.0  # a leaf found is measured in the checker's arithmetic, and checked at the end
PATIENCE = 400  # leaves beyond which second derivatives pay
Watch = Callable[[str, int, float], None]
Ends = tuple[Fraction, Fraction]
Taken = tuple[dict[str, str], Ends]  # a point as a witness, and what the value there lies between


@dataclass(frozen=True, slots=True)
class Proved:
    """A range on a line: ends the checker measured, as a line number, and what stopped its search."""

    line: int
    lower: Fraction
    upper: Fraction
    least: Fraction  # the smallest and the largest value surely taken
    most: Fraction
    stopped: str

    @property
    def size(self) -> Fraction:
        """The largest magnitude in the range."""
        return max(abs(self.lower), abs(self.upper))


@dataclass(frozen=True, slots=True)
class Measured:
    """A range as it was searched and then measured: ends, points with the values there, seconds in the measuring."""

    found: Found
    bits: int
    ends: Ends
    taken: list[Taken]
    spent: float


class Encloser:
    """Writes range and point lines within one gap; `limits` tells what stopped each search.

    `known`: what earlier passes through the same claim measured, which is not searched again.
    """

    def __init__(
        self, claim: Claim, graph: Graph, writer: Writer, gap: float, until: float, watch: Watch,
        known: dict[Hashable, Measured] | None = None,
    ) -> None:  # fmt: skip
        self.claim, self.graph, self.writer, self.gap, self.until, self.watch = claim, graph, writer, gap, until, watch
        self.known = {} if known is None else known
        self.interrupted = False
        self.limits: dict[str, str] = {}
        self.flows: FlowTable | None = None  # of the stance, where there are dynamics
        self.spent = 0.0  # seconds in the checker's arithmetic, which the final check will take once more
        self._runners: dict[tuple[int, str, bool], Runner] = {}

    def enclose(
        self,
        obligation: Obligation,
        on: int | None,
        magnitude: bool = False,
        points: bool = True,
        gap: float = 0.0,
        floor: float = 0.0,
        cells: int = 0,
        side: int = 0,
    ) -> Proved | None:
        """A range line and the points nearest its ends; None where the checker finds no finite range.

        `floor` is an absolute gap that is enough whatever the size of the quantity, `cells` a limit of leaves;
        `side`: 1, -1: only the upper, the lower end is wanted.
        """
        name, wanted = obligation.name, gap or self.gap
        key = self.writer.named(name), self.writer.domain(on), magnitude, wanted, floor, cells, side
        m = self.known.get(key) or self._measured(obligation, on, magnitude, wanted, floor, cells, side)
        if m is None:
            return None
        if m.found.stopped in ("", "cells"):  # else another pass may come further
            self.known[key] = m
        self.spent += m.spent
        self.limits[name] = "" if cells else m.found.stopped
        witness = {"bits": m.bits, "trees": list(m.found.trees)}
        line = self.writer.enclosed("range", name, witness, m.ends, on)
        if points:
            self._write_points(name, m.taken, magnitude, m.bits, on)
        concluded = self.writer.proof.lines[line].concludes
        low, high = concluded["lower"], concluded["upper"]
        least, most = min((t[1][1] for t in m.taken), default=high), max((t[1][0] for t in m.taken), default=low)
        return Proved(line, low, high, least, most, m.found.stopped)

    def _measured(
        self, obligation: Obligation, on: int | None, magnitude: bool, gap: float, floor: float, cells: int, side: int
    ) -> Measured | None:
        """Searched, and measured in the checker's arithmetic: finer where that is wider than the gap allows."""
        w, name, spent = self.writer, obligation.name, 0.0
        rational, share = w.rational(name, on), 1.0
        later = TWICE * w.leaf_seconds(name, 0 if rational else BITS, on)
        for _ in range(5):
            found = self.search(obligation, magnitude, gap * share, floor * share, cells, side, later)
            bits = 0 if rational else BITS + _extra(found)
            self.watch(f"{name}: enclosing the leaves in the checker's arithmetic", found.leaves, found.upper)
            began = time.monotonic()
            try:
                ends = w.range(name, found.trees, bits, on)
            except KeyboardInterrupt:
                self.interrupt()
                continue
            except Undefined as why:
                self.limits[name] = str(why)
                if rational:  # fractions that grow too long
                    rational = False
                    continue
                share /= 16
                if found.stopped:
                    return None
                continue
            spent += time.monotonic() - began
            taken = [t for p in (found.highest, found.lowest) if (t := self._point(name, p, bits, on)) is not None]
            if found.stopped or _close(ends, [t[1] for t in taken], magnitude, gap, floor, side):
                break
            share /= 8
        else:
            if name in self.limits:
                return None
        return Measured(found, bits, ends, taken, spent)

    def points(self, obligation: Obligation, on: int) -> None:
        """The points nearest the ends of a range, without the range."""
        name = obligation.name
        bits = 0 if self.writer.rational(name, on) else BITS
        found = self.search(obligation, False, self.gap)
        taken = [t for p in (found.highest, found.lowest) if (t := self._point(name, p, bits, on)) is not None]
        self._write_points(name, taken, False, bits, on)

    def point(self, obligation: Obligation, at: Point, on: int) -> None:
        """One point, as another search found it."""
        bits = 0 if self.writer.rational(obligation.name, on) else BITS
        taken = self._point(obligation.name, at, bits, on)
        if taken is not None:
            self._write_points(obligation.name, [taken], False, bits, on)

    def search(
        self,
        obligation: Obligation,
        magnitude: bool,
        gap: float,
        floor: float = 0.0,
        cells: int = 0,
        side: int = 0,
        later: float = 0.0,
    ) -> Found:
        """Witnesses for a range; of a value that takes many leaves, with the second-order form."""

        def watch(leaves: int, high: float) -> None:
            self.watch(obligation.name, leaves, high)

        def attempt(curved: bool) -> Found:
            # no second derivative by time is proved of a flow: proofs/trajectory.md (6)
            plain = obligation.by or any(v.name == PHASE for v in obligation.variables)
            patience = 10**9 if curved or plain else PATIENCE
            until = self.until - self.spent
            effort = Effort(gap, cells or self.claim.cells, until, watch, floor, patience, side, later)
            return search(self.runner(obligation, curved), obligation, magnitude, effort)

        try:
            found = attempt(False)
            return attempt(True) if found.stopped == "patience" else found
        except KeyboardInterrupt:
            self.interrupt()
            return attempt(False)

    def runner(self, obligation: Obligation, curved: bool) -> Runner:
        key = obligation.root, obligation.by, curved
        if key not in self._runners:
            names = [v.name for v in obligation.variables]
            program = compiled(self.graph, obligation.root, obligation.by, names, curved)
            self._runners[key] = Runner(program, names, self.claim.libraries, bool(obligation.by), self.flows)
        return self._runners[key]

    def interrupt(self) -> None:
        """The first Ctrl-C stops every search where it is; the second one ends the program."""
        if self.interrupted:
            raise KeyboardInterrupt
        self.interrupted, self.until = True, 0.0

    def _point(self, name: str, point: Point, bits: int, on: int | None) -> Taken | None:
        at = self.writer.spelled(name, point, on)
        try:
            return at, self.writer.point(name, at, bits, on)
        except (Undefined, Rejected):
            return None

    def _write_points(self, name: str, taken: list[Taken], magnitude: bool, bits: int, on: int | None) -> None:
        """The points that say most: the one of largest magnitude, or those of the largest and smallest value."""
        if not taken:
            return
        top, bottom = max(taken, key=lambda t: t[1][0]), min(taken, key=lambda t: t[1][1])
        chosen = [top] if top is bottom or top[0] == bottom[0] else [top, bottom]
        if magnitude:
            chosen = [max(chosen, key=lambda t: max(t[1][0], -t[1][1]))]
        for at, ends in chosen:
            self.writer.enclosed("point", name, {"at": at, "bits": bits}, ends, on)


def _close(
    ends: tuple[Fraction, Fraction],
    taken: list[tuple[Fraction, Fraction]],
    magnitude: bool,
    gap: float,
    floor: float,
    side: int,
) -> bool:
    """Whether the measured ends are within the gap of values surely taken."""
    if not taken:
        return False
    high, low = max(t[0] for t in taken), min(t[1] for t in taken)
    share, least = Fraction(gap), max(Fraction(gap) / 10**6, Fraction(floor))
    if magnitude:
        most = max(high, -low, Fraction(0))
        return max(abs(ends[0]), abs(ends[1])) - most <= max(share * most, least)
    top, bottom = ends[1] - high <= max(share * abs(high), least), low - ends[0] <= max(share * abs(low), least)
    return (top or side < 0) and (bottom or side > 0)


def _extra(found: Found) -> int:
    """More fractional bits where the values are small, so that their last digits are kept."""
    size = max(abs(found.upper), abs(found.lower))
    return min(2000, max(0, int(-log2(size)))) if 0 < size < 1 else 0
