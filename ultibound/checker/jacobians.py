"""Jacobians and misses of several states over boxes and at points (proofs/matrix.md (2))."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from fractions import Fraction
from itertools import pairwise, product
from math import lcm, prod
from typing import Any

from .calculus import Unprovable
from .courses import arithmetic, valued
from .derive import MOST_CELLS, Derivation, Domain, Meaning, Ranged
from .flows import Flows
from .forms import boxes
from .matrices import Leaf, Matrix
from .numerals import Rejected
from .ranges import Box, Ends, Evaluator, Interval
from .reals import Undefined
from .terms import Terms

BY_SLOPE, BY_SPLIT = ("slopes", "misses"), ("split-slopes", "split-residuals")
OF_ROUTE = {"slope": BY_SLOPE, "split": BY_SPLIT}  # what gain and residual are of
OF_COMPARISON = {"componentwise": BY_SLOPE, "split-componentwise": BY_SPLIT}  # and what is compared entry by entry
ENTRY = {"slopes": "slope", "misses": "target-miss", "split-slopes": "split-slope", "split-residuals": "split-residual"}
MOST_CHOICES = 8  # of branches at a leaf
Part = tuple[Fraction, dict[int, Fraction], Fraction]


class Table:
    """The entries of a matrix of slopes over a set, or of the vector that belongs to it, in the variables of all."""

    def __init__(self, d: Derivation, proves: str, domain: Domain, bits: Any, flows: Flows | None) -> None:
        self.d, self.domain, self.a = d, domain, arithmetic(bits)
        names = self.named(d, proves)
        meanings = [[d.meaning(name, domain) for name in row] for row in names]
        self.variables = together([m for row in meanings for m in row])
        if prod(len(v.cells) for v in self.variables) > MOST_CELLS:
            raise Unprovable(f"more than {MOST_CELLS} combinations of library cells and listed values")
        met = [v.name for v in self.variables]
        constant = d.signals(set(met))  # of several states that answer a signal, one constant serves them all
        self.variables = [replace(v, inside=constant[v.name][1]) if v.name in constant else v for v in self.variables]
        self.roots = [[m.root for m in row] for row in meanings]
        self.same, self.corners = bare(d.terms, [k for row in self.roots for k in row])
        self.below = {k: frozenset(d.terms.below(k)) for row in self.roots for k in row}
        self.turning = {m.by: turning(d.terms, self.corners, m.by) for row in meanings for m in row}
        self.columns = [  # entries of a column have the same marked name, and share most of their terms
            Evaluator(d.terms, first, column[0].by, met, d.statement.libraries, self.a, flows, others)
            for column in zip(*meanings, strict=True)
            for first, *others in [[m.root for m in column]]
        ]

    def named(self, d: Derivation, proves: str) -> list[list[str]]:
        return named(d, proves)

    def leaves(self, trees: Any) -> Iterator[Leaf]:
        """The matrix over every leaf of its splitting trees."""
        if not isinstance(trees, list) or not all(isinstance(t, str) for t in trees):
            raise Rejected("trees: a list of texts")
        for box, form in boxes(list(product(*(v.cells for v in self.variables))), trees):
            if form not in ("b", "c", "d"):
                raise Undefined(f"unknown form {form!r}")
            yield from self.branches(box) if form == "b" else [self.leaf(box, form)]

    def branches(self, box: Box) -> list[Leaf]:
        """The matrix over a box, for each choice of the branches that corners meet there: proofs/matrix.md (8)."""
        sides, found = dict[int, set[int]](), list[Leaf]()
        for e in self.columns:
            e.all_of(box, False)
            for k in self.turning[e.by] & set(e.sides):
                sides.setdefault(self.same[k], set()).update(e.sides[k])
        if prod(map(len, sides.values())) > MOST_CHOICES:
            return [self.leaf(box, "c")]
        try:
            for choice in product(*map(sorted, sides.values())):
                chosen = dict(zip(sides, choice, strict=True))
                for e in self.columns:
                    e.chosen = {k: chosen[self.same[k]] for k in self.turning[e.by] if self.same[k] in chosen}
                found.append(self.leaf(box, "b"))
        except Undefined:  # a branch is not defined where it is not taken
            found = []
        finally:
            for e in self.columns:
                e.chosen = {}
        return found or [self.leaf(box, "c")]

    def leaf(self, box: Box, form: str) -> Leaf:
        """proofs/matrix.md (2): the affine part of each entry about the middle, and what is left."""
        columns = [self.column(e, [row[j] for row in self.roots], box, form) for j, e in enumerate(self.columns)]
        parts = list(zip(*columns, strict=True))
        slopes = tuple(
            tuple(tuple(p[1].get(k, Fraction(0)) for p in row) for row in parts)
            for k in range(len(box))
            if any(k in p[1] for row in parts for p in row)
        )
        centre, rest = (
            tuple(tuple(p[0] for p in row) for row in parts),
            tuple(tuple(p[2] for p in row) for row in parts),
        )
        return Leaf(centre, slopes, rest)

    def column(self, e: Evaluator, roots: list[int], box: Box, form: str) -> list[Part]:
        """Middle, slopes times half widths, and the rest of each entry of a column over a box."""
        halves = [(y - x) / 2 for x, y in box]
        wide = lcm(*(h.denominator for h in halves))
        jets, unit = e.all_of(box, form != "d"), 2 * wide * e.one[0]  # how many of what is counted below make 1

        def part(middle: Any, told: dict[int, Any], rest: Any) -> Part:
            return Fraction(middle, unit), {v: Fraction(x, unit) for v, x in told.items()}, Fraction(rest, unit)

        def counted(ends: Interval) -> tuple[Any, Any]:
            return (ends[0] + ends[1]) * wide, (ends[1] - ends[0]) * wide

        found = [(x, dict[int, Any](), y) for x, y in (counted(e.wanted(jets[k])) for k in roots)]
        # a derivative that may jump has no other form; where only values have corners it does not
        still = frozenset(self.corners) - self.turning[e.by] if form == "b" else frozenset[int]()
        smooth = [i for i, k in enumerate(roots) if form != "d" and not (e.by and e.jumps(self.below[k] - still))]
        slopes = {i: {v: x for v, x in e.slopes(jets[roots[i]]).items() if x is not None and halves[v]} for i in smooth}
        each = {v: [x[v] for x in slopes.values() if v in x] for x in slopes.values() for v in x}
        # where slopes vary more than they are large, a variable is better left as wide as it is
        telling = {v for v, x in each.items() if sum(abs(p + q) for p, q in x) >= sum(q - p for p, q in x)}
        least = {i: 2 * found[i][2] for i in smooth}
        for fixed in dict.fromkeys((frozenset(telling), frozenset(each))):
            middle = [((x + y) / 2,) * 2 if v in fixed else (x, y) for v, (x, y) in enumerate(box)]
            centre = e.all_of(middle, False, part=True)
            for i in smooth:
                x, rest = counted(e.wanted(centre[roots[i]]))
                told = {}
                for v in fixed & set(slopes[i]):
                    (p, q), h = slopes[i][v], int(halves[v] * wide)
                    told[v], rest = (p + q) * h, rest + (q - p) * h
                width = 2 * rest + sum(map(abs, told.values()))  # what is told apart costs about half
                if width < least[i]:
                    found[i], least[i] = (x, told, rest), width
        return [part(*x) for x in found]

    def at(self, at: Any) -> list[list[Ends]]:
        """All entries at a point of the set."""
        box = self.place(at)
        jets = [e.all_of(box, False, touching=True) for e in self.columns]
        return [
            [self.a.ends(e.wanted(jet[k])) for k, e, jet in zip(row, self.columns, jets, strict=True)]
            for row in self.roots
        ]

    def place(self, at: Any) -> Box:
        if not isinstance(at, dict) or set(at) != {v.name for v in self.variables}:
            raise Rejected("at: one value for each variable of the obligation")
        box = [valued(v, at[v.name]) for v in self.variables]
        inside(self.d, self.domain, dict(zip((v.name for v in self.variables), box, strict=True)))
        return box


def bare(terms: Terms, roots: Sequence[int]) -> tuple[dict[int, int], list[int]]:
    """What each term is, marks left out: the same number for the same; the terms that are corners."""
    known, numbers, corners = dict[int, int](), dict[tuple[object, ...], int](), list[int]()
    for k in sorted({k for root in roots for k in terms.below(root)}):
        op, args, payload = terms.all[k]
        one = op, payload, *(known[x] for x in args)
        known[k] = known[args[0]] if op == "mark" else numbers.setdefault(one, len(numbers))
        if op in ("abs", "min", "max"):
            corners.append(k)
    return known, corners


def turning(terms: Terms, corners: Sequence[int], by: str) -> frozenset[int]:
    """The corners at which the derivative by a marked name may jump: what they are of is marked."""
    return frozenset(k for k in corners if by and any(terms.all[x][::2] == ("mark", by) for x in terms.below(k)))


class Joined(Table):
    """[∂F/∂x | F(x*, w) − x*], the Jacobian over a set and the miss under the same values (proofs/polytope.md)."""

    def named(self, d: Derivation, proves: str) -> list[list[str]]:
        return [[*x, *y] for x, y in zip(named(d, "slopes"), named(d, "misses"), strict=True)]


def named(d: Derivation, proves: str) -> list[list[str]]:
    """The entries of a matrix, row by row."""
    kind, at, steps = proves.partition("@")
    if kind not in (BY_SLOPE if at else ENTRY):
        more = " or ".join(BY_SPLIT)
        raise Rejected(f"a matrix proves {' or '.join(BY_SLOPE)}, or these after fewer steps, or {more}")
    columns = d.states if sloped(proves) else ("",)
    return [[f"{ENTRY[kind]}{at}{steps}[{s}{',' if x else ''}{x}]" for x in columns] for s in d.states]


def sloped(proves: str) -> bool:
    """Whether a matrix is one of slopes by the states: it is seen from the norm of the error before the step."""
    return proves.partition("@")[0] in ("slopes", "split-slopes")


def inside(d: Derivation, domain: Domain | None, at: Mapping[str, Ends]) -> None:
    """Raises Rejected where a point is not shown to lie in the ball of a metric: its box reaches beyond it."""
    if domain is None or not domain.ball or domain.metric is None:
        return
    middle, half = [], []
    for s, (low, high) in zip(d.states, domain.targets, strict=True):
        x, error = at.get(s), at.get(f"error({s})", (Fraction(0), Fraction(0)))
        p, q = error if x is None else (x[0] - high, x[1] - low)
        middle.append((p + q) / 2)
        half.append((q - p) / 2)
    if not domain.metric.most(middle) + domain.metric.length(half) <= domain.radius:
        raise Rejected("at: not shown to be in the set")


def together(meanings: list[Meaning]) -> list[Ranged]:
    """The variables of several obligations, each with the cuts of all of them."""
    found: dict[str, Ranged] = {}
    for v in (v for m in meanings for v in m.variables):
        known = found.setdefault(v.name, v)
        if known.cells != v.cells and not v.listed:
            cuts = sorted({x for cell in (*known.cells, *v.cells) for x in cell})
            found[v.name] = Ranged(v.name, tuple(pairwise(cuts)), v.inside, False)
    return list(found.values())


def middle_and_half(rows: list[list[Ends]]) -> tuple[Matrix, Matrix]:
    middle = tuple(tuple((p + q) / 2 for p, q in row) for row in rows)
    return middle, tuple(tuple((q - p) / 2 for p, q in row) for row in rows)
