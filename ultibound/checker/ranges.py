"""Terms over boxes: forward differentiation in outward-rounded arithmetic.

proofs/forms.md (5) and (6), proofs/corners.md, proofs/reading.md.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Callable, Collection, Sequence
from fractions import Fraction
from itertools import product
from typing import Any, Protocol

from .exact import Exact
from .model import Library
from .numerals import decimal_down, decimal_up
from .reals import Undefined
from .terms import Terms

Ends = tuple[Fraction, Fraction]
Box = list[Ends]
Interval = Any  # a pair of whole numbers (Scaled) or of fractions (Exact)
Arithmetic = Any  # Scaled or Exact
RATIONAL = frozenset(["number", "variable", "mark", "neg", "add", "sub", "mul", "div", "power", "abs", "min", "max"])
REMEMBERED = 300  # boxes of some of the variables
SMOOTH = frozenset(["sqrt", "exp", "log", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh"])

PLAIN = (RATIONAL | SMOOTH) - {"abs", "min", "max"}  # what is found there depends on nothing but the box


class Trajectory(Protocol):
    """Enclosures of a fundamental solution and its derivatives by time and parameters (`flows.py`)."""

    grids: tuple[tuple[Fraction, ...] | None, ...]

    def reached(self, at: Sequence[Ends], cells: Sequence[range]) -> list[range]: ...

    def partial(
        self, i: int, j: int, orders: Sequence[int], at: Sequence[Ends], cells: Sequence[range], a: Arithmetic
    ) -> Interval: ...


class Jet:
    """v: value; d: derivative by the marked name; g[i], dg[i]: derivatives of both by variable i. None, absent: 0."""

    __slots__ = ("d", "dg", "g", "v")

    def __init__(self, v: Interval, d: Interval = None) -> None:
        self.v, self.d = v, d
        self.g: dict[int, Interval] = {}
        self.dg: dict[int, Interval] = {}


Known = dict[tuple[Any, ...], dict[int, Jet]]


class Evaluator:
    """A term, or its derivative by a marked name, over boxes of named variables."""

    def __init__(
        self,
        terms: Terms,
        root: int,
        by: str,
        names: list[str],
        libraries: Sequence[Library],
        arithmetic: Arithmetic,
        flows: Trajectory | None = None,
        beside: Sequence[int] = (),
    ) -> None:
        """`beside`: further roots, which `all_of` evaluates along with it."""
        self.terms, self.all, self.root, self.by, self.names, self.a = terms, terms.all, root, by, names, arithmetic
        self.flows = flows
        self.columns = {c: library for library in libraries for c in library.columns}
        self.zero, self.one = arithmetic.number(Fraction(0)), arithmetic.number(Fraction(1))
        self.nodes: dict[tuple[str, int], Interval] = {}
        self.fixed: dict[int, Jet] = {}
        self.moving: list[int] = []  # that are evaluated over every box
        self.groups: dict[frozenset[int], tuple[list[int], Known]] = {}  # by their variables: what is remembered
        self.met: dict[tuple[int, ...], int] = {}  # ends, as whole numbers: fractions take long to hash
        self.several = False
        self.direction: int | None = None  # a variable by which d is taken instead of the marked name
        self.branch: dict[int, list[range]] = {}
        self.sides: dict[int, tuple[int, ...]] = {}  # corners: which of their two branches are met
        self.chosen: dict[int, int] = {}  # the branch each of them is held to
        self.touching = False
        self.axes: dict[int, Evaluator | None] = {}
        self.known: dict[int, Ends] = {}  # exact ends over the box of this run
        self.shares: dict[tuple[int, int, int], list[Interval]] = {}  # where in a cell of a grid they are
        self.placed: dict[tuple[int, ...], Interval] = {}  # the same of any value met so far
        for k in sorted({k for each in (root, *beside) for k in terms.below(each)}):
            op, args, _ = self.all[k]
            if op == "variable" or op == "mark" or any(a not in self.fixed for a in args):
                self.moving.append(k)
            else:
                self.fixed[k] = self.term(k, self.fixed, [], False)
        self.grouped()

    def run(self, box: Box, gradient: bool, part: bool = False, touching: bool = False) -> Jet:
        """The root's jet over a box; `several` tells whether a reading met more than one cell, `sides` which branches
        every corner met.

        `part` is for a part of the box run before: a derivative is then taken on the same branch, though the part
        may be a face on a grid line. `touching` counts every closed cell that a box touches (proofs/attained.md).
        """
        return self.all_of(box, gradient, part, touching)[self.root]

    def all_of(self, box: Box, gradient: bool, part: bool = False, touching: bool = False) -> dict[int, Jet]:
        """As `run`, the jets of all terms by rank."""
        self.several, self.touching = False, touching
        self.sides, self.known, self.shares = {}, {}, {}
        if not (part and self.second()):
            self.branch = {}
        jets = dict(self.fixed)
        if self.groups:
            self.remembered(jets, box, gradient)
        for k in self.moving:
            jets[k] = self.term(k, jets, box, gradient)
        return jets

    def grouped(self) -> None:
        """Smooth terms of some, not all, of the variables apart: in a tree these often have the same ranges again."""
        groups: dict[frozenset[int], list[int]] = {}
        reads: dict[int, frozenset[int]] = dict.fromkeys(self.fixed, frozenset())
        for k in self.moving:
            op, args, payload = self.all[k]
            if op == "variable":
                reads[k] = frozenset([self.names.index(str(payload))])
            elif op in PLAIN and all(x in reads for x in args):
                reads[k] = frozenset().union(*(reads[x] for x in args))
            if k in reads:
                groups.setdefault(reads[k], []).append(k)
        every = frozenset[int]().union(*groups)
        # a term rests on terms of no more variables than its own, of as many only if they are the same
        self.groups = {x: (groups[x], {}) for x in sorted(groups, key=len) if x != every}
        apart = {k for terms, _ in self.groups.values() for k in terms}
        self.moving = [k for k in self.moving if k not in apart]

    def remembered(self, jets: dict[int, Jet], box: Box, gradient: bool) -> None:
        """The jets of terms that are grouped; those found before where all of their variables had the same ends."""
        if len(self.met) > REMEMBERED:
            self.met = {}
            for _, known in self.groups.values():
                known.clear()
        each = [(p.numerator, p.denominator, q.numerator, q.denominator) for p, q in box]
        ends = [self.met.setdefault(x, len(self.met)) for x in each]
        for variables, (terms, known) in self.groups.items():
            key = gradient, self.direction, *(ends[i] for i in variables)
            if key in known:
                jets.update(known[key])
                continue
            for k in terms:
                jets[k] = self.term(k, jets, box, gradient)
            if len(known) > REMEMBERED:
                known.clear()
            known[key] = {k: jets[k] for k in terms}

    def jumps(self, below: Collection[int]) -> bool:
        """Whether among these terms, in the last run, a corner met both branches or a reading several cells."""
        return any(len(x) > 1 and k in below for k, x in self.sides.items()) or any(
            several(x) and k in below for k, x in self.branch.items()
        )

    def second(self) -> bool:
        """Whether derivatives of a derivative are carried."""
        return bool(self.by) or self.direction is not None

    def wanted(self, jet: Jet) -> Interval:
        return (jet.d or self.zero) if self.by else jet.v

    def slopes(self, jet: Jet) -> dict[int, Interval]:
        return jet.dg if self.by else jet.g

    def term(self, k: int, jets: dict[int, Jet], box: Box, gradient: bool) -> Jet:
        op, args, payload = self.all[k]
        a = self.a
        if op == "number" and isinstance(payload, Fraction):
            return Jet(a.number(payload))
        if op == "pi":
            return Jet(a.pi())
        if op == "variable":
            i = self.names.index(str(payload))
            jet = Jet(a.between(*box[i]))
            if gradient:
                jet.g[i] = self.one
            if i == self.direction:
                jet.d = self.one
            return jet
        first = jets[args[0]]
        if op == "mark":
            jet = Jet(first.v, self.one if payload == self.by else first.d)
            jet.g = first.g
            if payload != self.by:
                jet.dg = first.dg
            return jet
        if op == "neg":
            return self.linear(a.neg(first.v), first, None)
        if op == "add" or op == "sub":
            second = jets[args[1]]
            return self.linear(a.add(first.v, second.v) if op == "add" else a.sub(first.v, second.v), first, second, op)
        if op == "mul" and args[0] != args[1]:
            return self.times(first, jets[args[1]])
        if op == "mul":
            return self.chain(first, "power", 2)
        if op == "div":
            return self.over(first, jets[args[1]])
        if op == "power" and isinstance(payload, Fraction):
            return self.chain(first, "power", int(payload))
        if op == "abs":
            return self.corner(k, first, self.linear(a.neg(first.v), first, None), 1, box, floor=True)
        if op == "max" or op == "min":
            return self.corner(k, first, jets[args[1]], 1 if op == "max" else -1, box)
        if op == "reading":
            return self.reading(k, str(payload), args, [jets[x] for x in args], box)
        if op == "flow":
            return self.flow(k, str(payload), args, [jets[x] for x in args], box)
        if op in SMOOTH:
            return self.chain(first, op, 0)
        raise Undefined(f"{op} has no rule here")

    def plus(self, *parts: Interval) -> Interval:
        total = None
        for p in parts:
            if p is not None:
                total = p if total is None else self.a.add(total, p)
        return total

    def prod(self, *factors: Interval) -> Interval:
        """Product, None standing for zero."""
        total = factors[0]
        for f in factors[1:]:
            if total is None or f is None:
                return None
            total = self.a.mul(total, f)
        return total

    def linear(self, v: Interval, x: Jet, y: Jet | None, op: str = "neg") -> Jet:
        neg = self.a.neg
        if y is None:
            jet = Jet(v, x.d and neg(x.d))
            jet.g, jet.dg = ({i: p and neg(p) for i, p in mine.items()} for mine in (x.g, x.dg))
            return jet
        combined = self.a.add if op == "add" else self.a.sub

        def both(p: Interval, q: Interval) -> Interval:
            """Their sum or difference, None standing for zero."""
            if q is None:
                return p
            return combined(p, q) if p is not None else q if op == "add" else neg(q)

        jet = Jet(v, both(x.d, y.d))
        for mine, of_x, of_y in ((jet.g, x.g, y.g), (jet.dg, x.dg, y.dg)):
            for i in of_x | of_y:
                mine[i] = both(of_x.get(i), of_y.get(i))
        return jet

    def times(self, x: Jet, y: Jet) -> Jet:
        mul, add, v, w = self.a.mul, self.a.add, x.v, y.v

        def part(p: Interval, q: Interval) -> Interval:
            """p w + v q, None standing for zero."""
            if p is None or q is None:
                return mul(p, w) if q is None and p is not None else None if q is None else mul(v, q)
            return add(mul(p, w), mul(v, q))

        jet = Jet(mul(v, w), part(x.d, y.d))
        for i in x.g | y.g:
            jet.g[i] = part(x.g.get(i), y.g.get(i))
        for i in x.g | y.g if self.second() else ():
            crossed = self.prod(x.d, y.g.get(i)), self.prod(x.g.get(i), y.d)
            second = self.plus(part(x.dg.get(i), y.dg.get(i)), *crossed)
            if second is not None:
                jet.dg[i] = second
        return jet

    def over(self, x: Jet, y: Jet) -> Jet:
        """q = x/y from q y = x, differentiated."""
        plus, prod, div = self.plus, self.prod, self.a.div
        q = div(x.v, y.v)

        def part(numerator: Interval, *taken: Interval) -> Interval:
            less = plus(*taken)
            top = plus(numerator, None if less is None else self.a.neg(less))
            return None if top is None else div(top, y.v)

        jet = Jet(q, part(x.d, prod(q, y.d)))
        for i in x.g | y.g:
            jet.g[i] = part(x.g.get(i), prod(q, y.g.get(i)))
            if self.second():
                second = part(x.dg.get(i), prod(jet.g[i], y.d), prod(q, y.dg.get(i)), prod(jet.d, y.g.get(i)))
                if second is not None:
                    jet.dg[i] = second
        return jet

    def chain(self, x: Jet, op: str, n: int) -> Jet:
        v, first, second = self.derivatives(op, n, x.v, bool(x.g) or x.d is not None, x.d is not None and bool(x.g))
        jet = Jet(v, self.prod(first, x.d))
        for i, slope in x.g.items():
            jet.g[i] = self.prod(first, slope)
            twice = self.plus(self.prod(second, x.d, slope), self.prod(first, x.dg.get(i)))
            if self.second() and twice is not None:
                jet.dg[i] = twice
        return jet

    def corner(self, k: int, x: Jet, y: Jet, side: int, box: Box, floor: bool = False) -> Jet:
        """The larger (side 1) or smaller of two terms; slopes are hulls of the branches met (proofs/corners.md)."""
        (p, q), (r, s) = x.v, y.v
        if k in self.chosen:
            return (x, y)[self.chosen[k]]
        met = (q >= r, s >= p) if side > 0 else (p <= s, r <= q)  # a tie counts for both
        self.sides[k] = tuple(i for i in (0, 1) if met[i])
        if all(met) and not self.by and not self.touching:
            self.sides[k] = self.taken(k, x, y, side, box)
        if len(self.sides[k]) == 1:
            return (x, y)[self.sides[k][0]]
        pick = max if side > 0 else min
        low, high = pick(p, r), pick(q, s)
        jet = Jet((max(low, self.zero[0]) if floor else low, high), self.hull(x.d, y.d))
        for i in x.g | y.g:
            jet.g[i] = self.hull(x.g.get(i), y.g.get(i))
        return jet

    def taken(self, k: int, x: Jet, y: Jet, side: int, box: Box) -> tuple[int, ...]:
        """Of a value: one branch alone where it is never passed, a tie included; by exact ends where rational."""
        args = self.all[k][1]
        p, q = self.exact(args[0], x, box)
        r, s = self.exact(args[1], y, box) if len(args) > 1 else (-q, -p)
        first, second = (p >= s, r >= q) if side > 0 else (q <= r, s <= p)
        return (0,) if first else (1,) if second else (0, 1)

    def hull(self, p: Interval, q: Interval) -> Interval:
        if p is None and q is None:
            return None
        (a, b), (c, d) = p or self.zero, q or self.zero
        return min(a, c), max(b, d)

    def derivatives(self, op: str, n: int, u: Interval, one: bool, two: bool) -> tuple[Interval, Interval, Interval]:
        """Value, first and second derivative of an elementary function over an interval, as far as asked for."""
        a = self.a
        if op == "power":
            v = a.power(u, n)
            first = a.mul(a.number(Fraction(n)), a.power(u, n - 1)) if one and n > 1 else self.one
            if not two or n < 2:
                return v, first, None
            return v, first, a.mul(a.number(Fraction(n * (n - 1))), a.power(u, n - 2) if n > 2 else self.one)
        v = getattr(a, op)(u)
        if not one:
            return v, None, None
        if op == "exp":
            return v, v, v
        if op == "sin":
            return v, a.cos(u), a.neg(v)
        if op == "cos":
            return v, a.neg(a.sin(u)), a.neg(v)
        if op == "sinh":
            return v, a.cosh(u), v
        if op == "cosh":
            return v, a.sinh(u), v
        two_ = a.number(Fraction(2))
        if op == "sqrt":
            first = a.div(self.one, a.mul(two_, v))
            return v, first, a.neg(a.div(first, a.mul(two_, u))) if two else None
        if op == "log":
            first = a.div(self.one, u)
            return v, first, a.neg(a.power(first, 2)) if two else None
        if op == "tan":
            first = a.add(self.one, a.power(v, 2))
            return v, first, a.mul(two_, a.mul(v, first)) if two else None
        if op == "tanh":
            first = a.sub(self.one, a.power(v, 2))
            return v, first, a.neg(a.mul(two_, a.mul(v, first))) if two else None
        if op == "atan":
            first = a.div(self.one, a.add(self.one, a.power(u, 2)))
            return v, first, a.neg(a.mul(two_, a.mul(u, a.power(first, 2)))) if two else None
        first = a.div(self.one, a.sqrt(a.sub(self.one, a.power(u, 2))))  # asin, and acos = pi/2 - asin
        later = a.mul(u, a.power(first, 3)) if two else None
        if op == "asin":
            return v, first, later
        return v, a.neg(first), None if later is None else a.neg(later)

    def reading(self, k: int, column: str, args: tuple[int, ...], axes: list[Jet], box: Box) -> Jet:
        """A multilinear reading and its derivatives, by the chain rule over its axes (proofs/reading.md)."""
        library = self.columns[column]
        ends, cells = self.across(k, library.grid, args, axes, box)

        def partial(*by: int) -> Interval:
            orders = [int(j in by) for j in range(len(axes))]
            parts = [self.cell(library, column, cell, args, ends, orders) for cell in product(*cells)]
            return min(p[0] for p in parts), max(p[1] for p in parts)

        jet = Jet(partial())
        # of degree one in each axis: no second derivative by the same
        self.composed(jet, axes, lambda *by: partial(*by) if len(set(by)) == len(by) else None, not several(cells))
        return jet

    def flow(self, k: int, entry: str, args: tuple[int, ...], axes: list[Jet], box: Box) -> Jet:
        """An entry of the fundamental solution, by the chain rule over time and parameters (proofs/trajectory.md)."""
        flows = self.flows
        if flows is None:
            raise Undefined("no trajectory is proved")
        i, j = map(int, entry.split(" "))
        ends, cells = self.across(k, (None, *flows.grids), args, axes, box)
        cells = [cells[0], *flows.reached(ends[1:], cells[1:])]

        def partial(*by: int) -> Interval:
            return flows.partial(i, j, [by.count(x) for x in range(len(axes))], ends, cells, self.a)

        jet = Jet(partial())
        self.composed(jet, axes, partial, not several(cells))
        return jet

    def composed(self, jet: Jet, axes: list[Jet], partial: Callable[..., Interval], smooth: bool) -> None:
        """Derivatives of a function of several arguments from its own, None standing for zero."""
        active = [j for j, x in enumerate(axes) if x.g or x.d is not None]
        slope = {j: partial(j) for j in active}
        jet.d = self.plus(*(self.prod(slope[j], axes[j].d) for j in active))
        for i in {i for x in axes for i in x.g}:
            jet.g[i] = self.plus(*(self.prod(slope[j], axes[j].g.get(i)) for j in active))
            if self.second() and smooth:
                parts = [self.prod(slope[j], axes[j].dg.get(i)) for j in active]
                for j, m in product(active, active):
                    if axes[j].d is not None and i in axes[m].g:
                        parts.append(self.prod(partial(j, m), axes[j].d, axes[m].g[i]))
                second = self.plus(*parts)
                if second is not None:
                    jet.dg[i] = second

    def across(
        self, k: int, grids: Sequence[tuple[Fraction, ...] | None], args: tuple[int, ...], axes: list[Jet], box: Box
    ) -> tuple[list[Ends], list[range]]:
        """Ends of each argument, and the cells of its grid that are met; one where it has none."""
        ends = [self.exact(x, jet, box) for x, jet in zip(args, axes, strict=True)]
        # where the marked name moves an axis that may stand still on a grid line, both neighbours count: reading.md
        moved = [bool(self.by) and x.d is not None for x in axes]
        still = [e[0] == e[1] or not self.strays(x) for x, e in zip(args, ends, strict=True)]
        wide = [self.touching or all(pair) for pair in zip(moved, still, strict=True)]
        cells = self.branch.get(k) or [
            range(1) if g is None else met(g, *e, t) for g, e, t in zip(grids, ends, wide, strict=True)
        ]
        self.branch[k] = cells
        self.several |= several(cells)
        return ends, cells

    def strays(self, k: int) -> bool:
        """Whether an axis surely moves wherever its box has extent: a variable times and plus numbers."""
        op, args, payload = self.all[k]
        if op == "mark" or op == "neg":
            return self.strays(args[0])
        numbers = [x for x in args if self.all[x][0] == "number"]
        if op in ("add", "sub", "mul", "div") and len(numbers) == 1:
            scaled = op in ("mul", "div")
            if not (scaled and (self.all[numbers[0]][2] == 0 or (op == "div" and numbers[0] == args[0]))):
                return self.strays(next(x for x in args if x != numbers[0]))
        return op == "variable" and payload is not None

    def exact(self, k: int, jet: Jet, box: Box) -> Ends:
        """Ends of an axis value: exact where it is rational, so that boxes cut at grid lines keep their cells."""
        if k in self.known:
            return self.known[k]
        while self.all[k][0] == "mark":
            k = self.all[k][1][0]
        if self.all[k][0] == "variable":
            return box[self.names.index(str(self.all[k][2]))]
        if k not in self.axes:
            rational = all(self.all[x][0] in RATIONAL for x in self.terms.below(k))
            self.axes[k] = Evaluator(self.terms, k, "", self.names, (), Exact()) if rational else None
        axis = self.axes[k]
        if axis is not None:
            axis.chosen = self.chosen
        low, high = self.a.ends(jet.v) if axis is None else axis.run(box, False).v
        self.known[k] = low, high
        return low, high

    def cell(
        self,
        library: Library,
        column: str,
        cell: tuple[int, ...],
        args: tuple[int, ...],
        ends: list[Ends],
        orders: list[int],
    ) -> Interval:
        """Hull of a reading, or of its derivatives, over the part of one cell that is met: at its vertices."""
        a, grid = self.a, library.grid
        corners = []
        for bits in product((0, 1), repeat=len(cell)):
            flat = 0
            for lines, i, b in zip(grid, cell, bits, strict=True):
                flat = flat * len(lines) + i + b
            if (column, flat) not in self.nodes:
                self.nodes[column, flat] = a.number(library.columns[column][flat])
            corners.append(self.nodes[column, flat])
        for axis in range(len(cell)):
            half = len(corners) // 2  # the axis to be folded varies slowest; its values go to the fast end
            pairs = list(zip(corners[:half], corners[half:], strict=True))
            if orders[axis]:
                width = grid[axis][cell[axis] + 1] - grid[axis][cell[axis]]
                corners = [a.div(a.sub(q, p), a.number(width)) for p, q in pairs]
                continue
            shares = self.share(args[axis], grid[axis], cell[axis], ends[axis])
            corners = [a.add(p, a.mul(t, a.sub(q, p))) for p, q in pairs for t in shares]
        return min(c[0] for c in corners), max(c[1] for c in corners)

    def share(self, k: int, lines: tuple[Fraction, ...], i: int, ends: Ends) -> list[Interval]:
        """How far along cell i of an axis its value, or each end of it, is: from 0 to 1."""
        key = k, id(lines), i
        if key not in self.shares:
            low, high = ends
            self.shares[key] = [self.place(lines, i, e) for e in ((low,) if low == high else ends)]
        return self.shares[key]

    def place(self, lines: tuple[Fraction, ...], i: int, x: Fraction) -> Interval:
        """How far along cell i one value is; in a tree these often come again."""
        key = id(lines), i, x.numerator, x.denominator
        if key not in self.placed:
            if len(self.placed) > REMEMBERED:
                self.placed.clear()
            share = (x - lines[i]) / (lines[i + 1] - lines[i])
            self.placed[key] = self.a.number(min(max(share, Fraction(0)), Fraction(1)))
        return self.placed[key]


def several(cells: Sequence[range]) -> bool:
    return any(len(c) > 1 for c in cells)


def met(grid: Sequence[Fraction], low: Fraction, high: Fraction, touching: bool) -> range:
    """Ranks of the cells that [low, high] needs: those with g_i < high and g_{i+1} > low (proofs/reading.md (3)).

    `touching`: all closed cells that have a point in common with it.
    """
    if low < grid[0] or high > grid[-1]:
        span = f"[{decimal_down(low, 6)}, {decimal_up(high, 6)}]"
        raise Undefined(f"a library axis is read over {span}, beyond its grid")
    if touching:
        return range(max(bisect_left(grid, low) - 1, 0), min(bisect_right(grid, high), len(grid) - 1))
    first = min(bisect_right(grid, low) - 1, len(grid) - 2)  # the last line not above low
    last = bisect_left(grid, high) - 1  # the last line below high
    return range(first, max(first, last) + 1)
