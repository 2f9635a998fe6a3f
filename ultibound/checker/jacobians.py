"""Jacobians and misses of several states over boxes and at points (proofs/matrix.md (2))."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
from fractions import Fraction
from itertools import pairwise, product
from math import prod
from typing import Any

from .calculus import Unprovable
from .courses import arithmetic, valued
from .derive import MOST_CELLS, Derivation, Domain, Meaning, Ranged
from .flows import Flows
from .forms import boxes
from .matrices import Leaf, Matrix
from .numerals import Rejected
from .ranges import Box, Ends, Evaluator
from .reals import Undefined

BY_SLOPE, BY_SPLIT = ("slopes", "misses"), ("split-slopes", "split-residuals")
OF_ROUTE = {"slope": BY_SLOPE, "split": BY_SPLIT}  # what gain and residual are of
OF_COMPARISON = {"componentwise": BY_SLOPE, "split-componentwise": BY_SPLIT}  # and what is compared entry by entry
ENTRY = {"slopes": "slope", "misses": "target-miss", "split-slopes": "split-slope", "split-residuals": "split-residual"}


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
        self.below = {k: frozenset(d.terms.below(k)) for row in self.roots for k in row}
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
            if form not in ("c", "d"):
                raise Undefined(f"unknown form {form!r}")
            yield self.leaf(box, form)

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

    def column(
        self, e: Evaluator, roots: list[int], box: Box, form: str
    ) -> list[tuple[Fraction, dict[int, Fraction], Fraction]]:
        """Middle, slopes times half widths, and the rest of each entry of a column over a box."""
        jets = e.all_of(box, form == "c")
        found = []
        for k in roots:
            low, high = self.a.ends(e.wanted(jets[k]))
            found.append(((low + high) / 2, dict[int, Fraction](), (high - low) / 2))
        # a derivative that may jump has no other form
        smooth = [i for i, k in enumerate(roots) if form == "c" and not (e.by and e.jumps(self.below[k]))]
        if not smooth:
            return found
        centre = e.all_of([((x + y) / 2,) * 2 for x, y in box], False, part=True)
        for i in smooth:
            slopes = {v: self.a.ends(x) for v, x in e.slopes(jets[roots[i]]).items() if x is not None}
            low, high = self.a.ends(e.wanted(centre[roots[i]]))
            half = {v: (box[v][1] - box[v][0]) / 2 for v in slopes}
            rest = (high - low) / 2 + sum(((q - p) / 2 * half[v] for v, (p, q) in slopes.items()), Fraction(0))
            if rest < found[i][2]:
                moving = {v: (p + q) / 2 * half[v] for v, (p, q) in slopes.items() if half[v]}
                found[i] = (low + high) / 2, moving, rest
        return found

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
