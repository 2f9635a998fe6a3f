"""Continuous stances: polynomials that a witness states for the fundamental solution, and how far off they can be.

proofs/trajectory.md. `trajectory` is the rule; what it returns encloses the solution and its derivatives.
"""

from __future__ import annotations

import re
from bisect import bisect_left, bisect_right
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise, product
from math import perm, prod
from operator import add, sub
from typing import Any

from .expansions import MOST_DEGREE, Expansion, expanded, powers, shifted_to, spread
from .model import Library
from .models import Exponents, Jet, Poly, derivative, gather
from .motion import Motion
from .numerals import Rejected, decimal_down, decimal_up, quantity
from .ranges import Arithmetic, Ends, Interval, met
from .rates import GUARD, Cell, Coefficients, Row, System
from .reals import Inexact, Undefined
from .terms import Terms

MOST_CELLS, MOST_PIECES, MOST_PARAMETERS, MOST_STATES = 100_000, 64, 6, 12
DEGREES, BITS = (MOST_DEGREE, 12), (24, 400)
MOST_NUMBERS = 200_000  # in one text
LONGEST = 4096  # binary digits of a cut
MOST_KEPT, MOST_TERMS = 20_000, 100_000  # enclosures of entries, for other lines; terms of expansions, likewise
COARSE = 40  # bits after the point of the growth of an error
STEEPEST = 64  # rates times half the duration of a piece
INTEGER = r"(?:0|-?[1-9][0-9]{0,199})"
INTEGERS = re.compile(rf"{INTEGER}(?: {INTEGER})*", re.ASCII)

Matrix = list[list[int]]
Pair = tuple[int, int]  # state and column of the fundamental solution, from 1; column 0: the particular solution
Place = tuple[int, int, tuple[Pair, ...]]  # cell, piece, and middle and reach of each argument


@dataclass
class Piece:
    """Polynomials over one piece of a cell; bounds of errors and of their derivatives by the piece's own time."""

    polynomials: dict[Pair, Poly]
    errors: dict[Pair, Jet]
    rates: dict[Pair, Jet]


def piece(system: System, cell: Cell, span: Ends, stated: dict[Pair, Poly], before: Piece | None) -> Piece:
    """The defect of each column, and what it lets the error grow to: proofs/trajectory.md (1), (2), (5)."""
    m = system.models
    coefficients = Coefficients(system, cell, span)
    matrix = system.motion.matrix
    rows = [coefficients.row([*row, *(f[i] for f in system.forcing)]) for i, row in enumerate(matrix)]
    above = [[None if x is None else m.over(m.sup(x), m.sup(low), least) for x in row] for row, low, least in rows]
    rates = [[h or m.nothing for h in row[: len(rows)]] for row in above]
    coarse = [[-(-h[0] >> m.bits - COARSE) for h in row] for row in rates]
    found = Piece(stated, {}, {})
    grown, forced = growth(coarse)
    for number, j in enumerate(system.columns_of):
        starts = [m.spans(start(system, i, j, stated, before)) for i in system.states]
        if before is not None:
            starts = [list(map(add, s, before.errors[i, j])) for i, s in zip(system.states, starts, strict=True)]
        column = [stated[i, j] for i in system.states]
        defects = [defect(system, row, column, i, number) for i, row in enumerate(rows)]
        errors: list[Jet] = [[] for _ in column]
        speeds: list[Jet] = [[] for _ in column]
        for o, split in enumerate(m.splits):
            force = [d[o] for d in defects]
            for i, row in enumerate(rates):
                for h, e in zip(row, errors, strict=True):
                    force[i] += m.up(sum([h[p] * e[q] for p, q in split if p]))
            here = applied(grown, [s[o] for s in starts], COARSE)
            ends = list(map(add, here, applied(forced, force, COARSE)))
            moved = applied([[h[0] for h in row] for row in rates], ends, m.bits)
            for i, e in enumerate(ends):
                errors[i].append(e)
                speeds[i].append(moved[i] + force[i])
        for i in system.states:
            found.errors[i, j], found.rates[i, j] = errors[i - 1], speeds[i - 1]
    return found


def start(system: System, i: int, j: int, stated: dict[Pair, Poly], before: Piece | None) -> Poly:
    """How far a piece begins from the start, or from the end of the one before."""
    other: dict[Exponents, int] = {system.models.constant: int(i == j) << system.bits}
    if before is not None:
        other = {e: sum(c) for e, c in before.polynomials[i, j].items()}
    mine = {e: sum(c[::2]) - sum(c[1::2]) for e, c in stated[i, j].items()}
    return {e: [mine.get(e, 0) - other.get(e, 0) << GUARD] for e in mine | other}


def defect(system: System, row: Row, column: list[Poly], i: int, number: int) -> Jet:
    """The jet of Y' - h (A Y + b) in one row; columns beyond the states are driven by what stands there in it."""
    m = system.models
    above, below, least = row
    slopes = {e: derivative(c) for e, c in column[i].items()}
    total: Poly = {}
    gather(total, below.poly, slopes, 1)
    jet = m.times(below.rest, shifted(m.magnitudes(slopes), GUARD))
    parts = [*zip(above, column, strict=False)]
    if number >= len(column):
        parts.append((above[number], {m.constant: [1 << system.bits]}))
    for x, y in parts:
        if x is not None:
            gather(total, x.poly, y, -1)
            jet = list(map(add, jet, m.times(x.rest, shifted(m.magnitudes(y), GUARD))))
    known = [-(-s >> system.bits + 1) for s in m.spans(total)]
    return m.over(list(map(add, known, jet)), m.sup(below), least)


def shifted(jet: Jet, bits: int) -> Jet:
    return [x << bits for x in jet]


def growth(rates: Matrix) -> tuple[Matrix, Matrix]:
    """Upper bounds of exp(2 B) and of the integral of exp(B u) over [0, 2], B >= 0: proofs/trajectory.md (2)."""
    size = range(len(rates))
    norm = max(sum(row) for row in rates)
    if norm > STEEPEST << COARSE:
        raise Undefined("rates that large: more pieces are needed")
    power = [[(i == j) << COARSE + 1 for j in size] for i in size]
    total = [list(row) for row in power]
    k = 1
    while (k + 1 << COARSE) < 4 * norm or max(map(max, power)) > 1:
        k += 1
        low = k << COARSE - 1
        power = [[-(-sum([b * power[m][j] for m, b in enumerate(row)]) // low) for j in size] for row in rates]
        total = [list(map(add, p, q)) for p, q in zip(total, power, strict=True)]
    total = [[x + 1 for x in row] for row in total]  # of what is left each is at most half the one before
    one = 1 << COARSE
    grown = [
        [(i == j) * one - (-sum([b * total[m][j] for m, b in enumerate(row)]) >> COARSE) for j in size]
        for i, row in enumerate(rates)
    ]
    return grown, total


def applied(matrix: Matrix, x: list[int], bits: int) -> list[int]:
    return [-(-sum([m * v for m, v in zip(row, x, strict=True)]) >> bits) for row in matrix]


class Flows:
    """The fundamental solution over all cells, and its derivatives by normalised time and parameters."""

    def __init__(
        self,
        system: System,
        cuts: list[tuple[Fraction, ...]],
        pieces: tuple[Fraction, ...],
        cells: list[list[Piece]],
        error: Fraction,
    ) -> None:
        self.system, self.cuts, self.pieces, self.cells, self.error = system, cuts, pieces, cells, error
        self.grids = tuple(p.grid for p in system.motion.parameters)
        self._last: dict[bool, tuple[Any, list[Place]]] = {}  # of the arguments last asked for
        self.bits = system.bits + 4  # after the point of middles and reaches
        polynomial = next(iter(cells[0][0].polynomials.values()))
        self.forms = MOST_TERMS // sum(map(len, polynomial.values())) + 1  # expansions kept
        self._known: dict[Any, dict[Exponents, list[int]]] = {}
        self._errors: dict[Any, tuple[int, Fraction]] = {}
        self._timed: dict[Any, tuple[tuple[Exponents, ...], list[list[int]], int]] = {}
        self._about: dict[Any, Expansion] = {}
        self._found: dict[Any, Interval] = {}

    def reached(self, at: Sequence[Ends], cells: Sequence[range]) -> list[range]:
        """Cells of grids; of a face at the last cut, the one it bounds: derivatives along it are those of either."""
        found = []
        for (low, high), chosen, grid, cuts in zip(at, cells, self.grids, self.cuts, strict=True):
            first = chosen.start
            at_last = grid is not None and len(chosen) == 1 and low == high == grid[first] == cuts[-1]
            found.append(range(first - 1, first) if at_last and first else chosen)
        return found

    def partial(
        self, i: int, j: int, orders: Sequence[int], at: Sequence[Ends], cells: Sequence[range], a: Arithmetic
    ) -> Interval:
        """Differentiated so often by each argument (time, parameters), over intervals; cells of grids by rank."""
        if not a.bits:
            raise Inexact("exact arithmetic has no trajectories")
        if (i, j) not in self.cells[0][0].polynomials:
            raise Undefined("no such column of the fundamental solution")
        if sum(orders) > 2 or orders[0] > 1:
            raise Undefined("a derivative of a trajectory beyond what is proved")
        found = [self._enclosed(place, i, j, tuple(orders), a) for place in self._places(orders, at, cells)]
        return min(x[0] for x in found), max(x[1] for x in found)

    def stated(
        self, i: int, j: int, orders: Sequence[int], at: Sequence[Ends], cells: Sequence[range]
    ) -> tuple[list[tuple[int, Ends]], dict[Exponents, Fraction], Fraction]:
        """Within one piece of one cell: its polynomial, and how far off it can be (of a derivative likewise).

        Also which arguments it is a polynomial of, each with the middle and half the width that it is normalised by.
        """
        if (i, j) not in self.cells[0][0].polynomials or sum(orders) > 2 or orders[0] > 1:
            raise Undefined("no such entry of the fundamental solution, or no such derivative of it")
        places = self._places(orders, at, cells)
        if len(places) > 1:
            raise Undefined("several pieces of a trajectory are met: no one polynomial is near it")
        cell, rank, parts = places[0]
        end = len(parts) < len(orders)
        error, factor = self._error(cell, rank, (i, j), tuple(orders))
        unit, poly = factor / (1 << self.system.bits), dict[Exponents, Fraction]()
        for e, column in self._columns(cell, rank, (i, j)).items():
            left, times = tuple(map(sub, e, orders[1:])), prod(map(perm, e, orders[1:]))
            if times:
                column = [perm(n, orders[0]) * c * times for n, c in enumerate(column)][orders[0] :]
                poly |= {left: sum(column) * unit} if end else {(n, *left): c * unit for n, c in enumerate(column)}
        first, last = self.pieces[rank], self.pieces[rank + 1]
        time = [] if end else [(0, (first + last - 1, last - first))]
        arguments = [*time, *((k, x) for k, x in enumerate(middles(cell, self.cuts), 1))]
        return arguments, poly, error * factor / self.system.models.unit

    def _places(self, orders: Sequence[int], at: Sequence[Ends], cells: Sequence[range]) -> list[Place]:
        """Parts of cells and pieces that together cover the intervals: proofs/trajectory.md (6)."""
        jumps = any(orders[1:])
        key = tuple(at), tuple(cells)
        if jumps not in self._last or key != self._last[jumps][0]:
            spans = [self._across(k, at[k + 1], cells[k + 1] if jumps else None) for k in range(len(self.cuts))]
            found = []
            for choice in product(self._times(*at[0]), *spans):
                rank = 0
                for (k, _), lines in zip(choice[1:], self.cuts, strict=True):
                    rank = rank * (len(lines) - 1) + k
                found.append((rank, choice[0][0], tuple(x for _, x in choice if x)))
            self._last[jumps] = key, found
        return self._last[jumps][1]

    def _times(self, low: Fraction, high: Fraction) -> list[tuple[int, Pair | None]]:
        if low == high == 1:
            return [(len(self.pieces) - 2, None)]
        if low < -1 or high > 1:
            raise Undefined("a time before or after the stance")
        low, high = (1 + low) / 2, (1 + high) / 2
        return [(k, self._part(self.pieces, k, low, high)) for k in met(self.pieces, low, high, False)]

    def _across(self, k: int, ends: Ends, chosen: range | None) -> list[tuple[int, Pair]]:
        """Intervals between cuts, and the part of each that is met; of those in the chosen cells of a grid."""
        cuts, grid = self.cuts[k], self.grids[k]
        low, high = ends
        if low < cuts[0] or high > cuts[-1]:
            span = f"[{decimal_down(low, 6)}, {decimal_up(high, 6)}]"
            raise Undefined(f"{self.system.motion.parameters[k].name} over {span}, where no trajectory is proved")
        if chosen is None or grid is None:
            return [(c, self._part(cuts, c, low, high)) for c in met(cuts, low, high, False)]
        found = []
        for g in chosen:
            first, last = bisect_left(cuts, grid[g]), bisect_right(cuts, grid[g + 1])
            inner = [min(max(x, grid[g]), grid[g + 1]) for x in ends]
            if last - first < 2:  # else the cuts reach over what is met: lines of the grid are cuts, but for the ends
                raise Undefined("a derivative at the edge of what is proved of a trajectory")
            for c in met(cuts[first:last], inner[0], inner[1], False):
                found.append((first + c, self._part(cuts, first + c, inner[0], inner[1])))
        return found

    def _part(self, lines: Sequence[Fraction], k: int, low: Fraction, high: Fraction) -> Pair:
        """Middle and reach, in units, of a part of an interval that is mapped onto [-1, 1]."""
        (a, b), (c, d) = (x.as_integer_ratio() for x in lines[k : k + 2])
        first, last, unit, ends = a * d, c * b, b * d, []
        for n, m in (low.as_integer_ratio(), high.as_integer_ratio()):
            above, below = 2 * n * unit - m * (first + last), m * (last - first)
            ends.append((max(-below, min(above, below)) << self.bits, below))
        (p, m), (q, n) = ends  # p/m and q/n in units
        middle = (p * n + q * m) // (2 * m * n)
        return middle, -((middle * n - q) // n)

    def _enclosed(self, place: Place, i: int, j: int, orders: tuple[int, ...], a: Arithmetic) -> Interval:
        cell, rank, at = place
        end = len(at) < len(orders)
        key = cell, rank, i, j, orders, end
        if (key, at, a.bits) in self._found:  # lines about the same boxes
            return self._found[key, at, a.bits]
        error, factor = self._error(cell, rank, (i, j), orders)
        reaches = [0, *(r for _, r in at)] if end else [r for _, r in at]
        form = self._expanded(cell, rank, (i, j), tuple(x for x, _ in at), end)
        middle, reach = spread(form, orders, reaches, self.bits)
        reach += error << form.extra
        below = factor.denominator << self.system.models.bits + form.extra
        low, high = ((middle + s * reach) * factor.numerator for s in (-1, 1))
        if len(self._found) == MOST_KEPT:
            self._found.clear()
        found = self._found[key, at, a.bits] = a.quotients(low, high, below)
        return found

    def _error(self, cell: int, rank: int, entry: Pair, orders: tuple[int, ...]) -> tuple[int, Fraction]:
        """The bound of a derivative's error, and the factor that both have from normalised arguments to the claim's."""
        key = cell, rank, entry, orders
        if key in self._errors:
            return self._errors[key]
        known = self.cells[cell][rank]
        by = tuple(k for k, n in enumerate(orders[1:]) for _ in range(n))
        error = (known.rates if orders[0] else known.errors)[entry][self.system.models.rank[by]]
        factor = 1 / (self.pieces[rank + 1] - self.pieces[rank]) if orders[0] else Fraction(1)
        for k in by:
            factor /= middles(cell, self.cuts)[k][1]
        self._errors[key] = error, factor
        return error, factor

    def _columns(self, cell: int, rank: int, entry: Pair) -> dict[Exponents, list[int]]:
        """By powers of time, for each product of powers of the parameters."""
        key = cell, rank, entry
        if key not in self._known:
            self._known[key] = {e: powers(c) for e, c in self.cells[cell][rank].polynomials[entry].items()}
        return self._known[key]

    def _expanded(self, cell: int, rank: int, entry: Pair, about: tuple[int, ...], end: bool) -> Expansion:
        """About a middle: its derivatives are those of the same coefficients, and boxes share their middles."""
        key = cell, rank, entry, about, end
        if key not in self._about:
            if len(self._about) >= self.forms:
                self._about.clear()
            time, rest = (1 << self.bits, about) if end else (about[0], about[1:])
            self._about[key] = expanded(*self._at_time(cell, rank, entry, time, end), rest, self.bits)
        return self._about[key]

    def _at_time(
        self, cell: int, rank: int, entry: Pair, time: int, end: bool
    ) -> tuple[tuple[Exponents, ...], list[list[int]], int]:
        key = cell, rank, entry, time, end
        if key not in self._timed:
            if len(self._timed) >= self.forms:
                self._timed.clear()
            columns = self._columns(cell, rank, entry)
            count = len(next(iter(columns.values())))
            kept = 2 if end else count  # nothing is asked there beyond the first derivative
            poly = tuple((n, *e) for e in columns for n in range(count)), [x for c in columns.values() for x in c]
            (_, moved), extra = shifted_to(poly, 0, time, self.bits, kept)
            self._timed[key] = tuple(columns), [moved[k : k + kept] for k in range(0, len(moved), kept)], extra
        return self._timed[key]


def middles(rank: int, cuts: list[tuple[Fraction, ...]]) -> Cell:
    """Of the cell of that rank, the last parameter fastest."""
    found = []
    for lines in reversed(cuts):
        rank, k = divmod(rank, len(lines) - 1)
        found.append(((lines[k] + lines[k + 1]) / 2, (lines[k + 1] - lines[k]) / 2))
    return found[::-1]


# The rule.


def trajectory(
    terms: Terms, motion: Motion, libraries: Sequence[Library], witness: dict[str, Any], claimed: Fraction | None
) -> Flows:
    """proofs/trajectory.md: the error of a witness's polynomials is at most what is concluded (None: not yet)."""
    if len(motion.parameters) > MOST_PARAMETERS or not 0 < len(motion.states) <= MOST_STATES:
        raise Rejected(f"a stance of at most {MOST_STATES} states and {MOST_PARAMETERS} parameters")
    degrees, bits = witness["degrees"], witness["bits"]
    if type(bits) is not int or not BITS[0] <= bits <= BITS[1]:
        raise Rejected(f"bits: {BITS[0]} to {BITS[1]}")
    if not isinstance(degrees, list) or len(degrees) != 2 or any(type(n) is not int for n in degrees):
        raise Rejected("degrees: two whole numbers, in time and in the cell")
    if not (1 <= degrees[0] <= DEGREES[0] and 0 <= degrees[1] <= DEGREES[1]):
        raise Rejected(f"degrees: at most {DEGREES[0]} in time, from 1, and {DEGREES[1]} in the cell")
    pieces = rising(witness["pieces"], "pieces", MOST_PIECES + 1)
    if pieces[0] != 0 or pieces[-1] != 1:
        raise Rejected("pieces: from 0 to 1")
    cuts = divisions(motion, witness["cuts"])
    system = System(terms, motion, libraries, bits, (degrees[0], degrees[1]))
    count = prod(len(lines) - 1 for lines in cuts)
    texts = witness["cells"]
    if not isinstance(texts, list) or len(texts) != count:
        raise Rejected(f"cells: a list of {count}")
    exponents = exponents_of(len(cuts), degrees[1])
    worst, cells = 0, []
    for rank, each in enumerate(texts):
        if not isinstance(each, list) or len(each) != len(pieces) - 1:
            raise Rejected(f"cells[{rank}]: a text for each piece")
        found: list[Piece] = []
        for n, (text, span) in enumerate(zip(each, pairwise(pieces), strict=True)):
            stated = read(system, text, exponents, degrees[0] + 1, f"cells[{rank}][{n}]")
            try:
                found.append(piece(system, middles(rank, cuts), span, stated, found[-1] if found else None))
            except Undefined as why:
                raise Rejected(f"cells[{rank}][{n}]: {why}") from None
        worst = max(worst, *(e[0] for p in found for e in p.errors.values()))
        cells.append(found)
    error = Fraction(worst, system.models.unit)
    if claimed is not None and not claimed >= error:
        raise Rejected("error: less than what is proved")
    return Flows(system, cuts, pieces, cells, error)


def rising(raw: Any, place: str, most: int) -> tuple[Fraction, ...]:
    if not isinstance(raw, list) or not 2 <= len(raw) <= most:
        raise Rejected(f"{place}: a list of 2 to {most} numbers")
    found = tuple(quantity(text, place) for text in raw)
    if any(max(q.numerator.bit_length(), q.denominator.bit_length()) > LONGEST for q in found):
        raise Rejected(f"{place}: a number of more than {LONGEST} binary digits")
    if any(not p < q for p, q in pairwise(found)):
        raise Rejected(f"{place}: numbers that rise")
    return found


def divisions(motion: Motion, raw: Any) -> list[tuple[Fraction, ...]]:
    if not isinstance(raw, dict) or set(raw) != {p.name for p in motion.parameters}:
        raise Rejected("cuts: a list for each parameter")
    cuts = [rising(raw[p.name], f"cuts.{p.name}", MOST_CELLS + 1) for p in motion.parameters]
    for p, lines in zip(motion.parameters, cuts, strict=True):
        inside = [g for g in p.grid or () if lines[0] < g < lines[-1]]
        if not set(inside) <= set(lines):
            raise Rejected(f"cuts.{p.name}: a line of its grid lies inside a cell")
    if prod(len(lines) - 1 for lines in cuts) > MOST_CELLS:
        raise Rejected(f"cuts: at most {MOST_CELLS} cells")
    return cuts


def exponents_of(coordinates: int, degree: int) -> list[Exponents]:
    """Tuples of at most that sum, in lexicographic order."""
    found: list[Exponents] = [()]
    for _ in range(coordinates):
        found = [(*e, n) for e in found for n in range(degree - sum(e) + 1)]
    return found


def read(system: System, text: Any, exponents: list[Exponents], length: int, place: str) -> dict[Pair, Poly]:
    entries = [(i, j) for j in system.columns_of for i in system.states]
    count = len(entries) * len(exponents) * length
    if count > MOST_NUMBERS:
        raise Rejected(f"{place}: more than {MOST_NUMBERS} numbers")
    if not isinstance(text, str) or text.count(" ") != count - 1 or not INTEGERS.fullmatch(text):
        raise Rejected(f"{place}: {count} whole numbers of at most 200 digits with single spaces between them")
    numbers = iter(map(int, text.split(" ")))
    return {entry: {e: [next(numbers) for _ in range(length)] for e in exponents} for entry in entries}
