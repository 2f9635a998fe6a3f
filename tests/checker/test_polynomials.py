"""Polynomials near terms, with their remainders, against fifty digits at points (proofs/squares.md (2)).

Seeded random terms over every operation, readings and flows included, and their derivatives by a marked name: each is
within the remainder of its polynomial, and the remainder is narrow where the term is smooth.
"""

from __future__ import annotations

import os
import random
from collections import Counter
from collections.abc import Callable, Sequence
from fractions import Fraction as Q
from functools import cache
from itertools import product
from math import prod
from typing import Any

import mpmath
import numpy as np
import pytest

from tests.checker.collocation import witness
from tests.checker.test_flows import Words
from ultibound.checker.flows import Flows, trajectory
from ultibound.checker.model import Library
from ultibound.checker.motion import Motion, Parameter
from ultibound.checker.polynomials import Exactly, Expansion, Polynomial, Rounded, size
from ultibound.checker.reals import Undefined
from ultibound.checker.squares import end
from ultibound.checker.terms import Terms
from ultibound.positivity.bounds import bounded_below

LONG = 20 if os.environ.get("ULTIBOUND_LONG") == "1" else 1
DIGITS, SLACK = 50, mpmath.mpf(10) ** -30
Dual = tuple[Any, Any]  # a value, and its derivative by the marked name
Box = list[tuple[Q, Q]]

SLOPES: dict[str, Callable[[Any], Any]] = {
    "sqrt": lambda x: 1 / (2 * mpmath.sqrt(x)),
    "exp": mpmath.exp,
    "log": lambda x: 1 / x,
    "sin": mpmath.cos,
    "cos": lambda x: -mpmath.sin(x),
    "tan": lambda x: 1 + mpmath.tan(x) ** 2,
    "sinh": mpmath.cosh,
    "cosh": mpmath.sinh,
    "tanh": lambda x: 1 - mpmath.tanh(x) ** 2,
}
REFUSED = ("asin", "acos", "atan")  # no polynomial is known to be near them


def number(q: Q) -> Any:
    return mpmath.mpf(q.numerator) / q.denominator


def plus(x: Dual, y: Dual, sign: int = 1) -> Dual:
    return x[0] + sign * y[0], x[1] + sign * y[1]


def times(x: Dual, y: Dual) -> Dual:
    return x[0] * y[0], x[0] * y[1] + x[1] * y[0]


def over(x: Dual, y: Dual) -> Dual:
    q = x[0] / y[0]
    return q, (x[1] - q * y[1]) / y[0]


def read(library: Library, column: str, axes: Sequence[Dual]) -> Dual:
    """Multilinear, in a cell that holds the point."""
    cells = [max(k for k, g in enumerate(grid[:-1]) if not k or number(g) <= x[0] + SLACK) for grid, x in zip(library.grid, axes, strict=True)]  # fmt: skip
    total: Dual = mpmath.mpf(0), mpmath.mpf(0)
    for bits in product((0, 1), repeat=len(axes)):
        flat, weight = 0, (mpmath.mpf(1), mpmath.mpf(0))
        for grid, i, b, x in zip(library.grid, cells, bits, axes, strict=True):
            flat = flat * len(grid) + i + b
            share = over(plus(x, (number(grid[i]), 0), -1), (number(grid[i + 1] - grid[i]), 0))
            weight = times(weight, share if b else (1 - share[0], -share[1]))
        total = plus(total, times(weight, (number(library.columns[column][flat]), 0)))
    return total


def value(terms: Terms, root: int, at: dict[str, Any], by: str, library: Library | None, flow: Any = None) -> Dual:
    """A term at a point, by definitions."""
    found: dict[int, Dual] = {}
    for k in terms.below(root):
        op, args, payload = terms.all[k]
        x = [found[a] for a in args]
        if op == "number":
            found[k] = number(payload), 0  # type: ignore[arg-type]  # of a number
        elif op == "variable":
            found[k] = at[str(payload)], 0
        elif op == "pi":
            found[k] = +mpmath.pi, 0
        elif op == "mark":
            found[k] = x[0][0], (1 if payload == by else x[0][1])
        elif op in ("neg", "abs"):
            found[k] = x[0] if op == "abs" and x[0][0] >= 0 else (-x[0][0], -x[0][1])
        elif op in ("add", "sub"):
            found[k] = plus(*x, 1 if op == "add" else -1)
        elif op in ("mul", "div"):
            found[k] = times(*x) if op == "mul" else over(*x)
        elif op == "power":
            n = int(payload)  # type: ignore[arg-type]  # of a power
            found[k] = x[0][0] ** n, n * x[0][0] ** (n - 1) * x[0][1]
        elif op in ("min", "max"):
            found[k] = (min if op == "min" else max)(x)
        elif op == "reading":
            assert library is not None
            found[k] = read(library, str(payload), x)
        elif op == "flow":
            found[k] = flow(str(payload), x)
        else:
            found[k] = getattr(mpmath, op)(x[0][0]), SLOPES[op](x[0][0]) * x[0][1]
    return found[root]


class Grown:
    """A random term in some variables; the first of them marked, if a derivative is asked for."""

    def __init__(self, rng: random.Random) -> None:
        self.rng, self.terms, put = rng, Terms(), Terms.put
        self.names = [f"x{k}" for k in range(rng.randint(1, 3))]
        self.rational, self.by = rng.random() < 0.3, "x0" if rng.random() < 0.4 else ""
        self.leaves = [put(self.terms, "variable", (), x) for x in self.names]
        if self.by:
            self.leaves[0] = put(self.terms, "mark", (self.leaves[0],), self.by)
        self.library = self.table() if rng.random() < 0.5 else None
        wide = rng.choice([Q(0), Q(1, 8), Q(1, 2), Q(1)])
        self.box = [self.span(wide * rng.randint(0, 4) / rng.choice([1, 2, 3])) for _ in self.names]
        self.root = self.term(rng.randint(1, 4), self.library is not None)

    def span(self, width: Q) -> tuple[Q, Q]:
        low = Q(self.rng.randint(-8, 12), self.rng.choice([1, 2, 3, 4]))
        return low, low + width

    def table(self) -> Library:
        grids = []
        for _ in range(self.rng.randint(1, 2)):
            lines = [Q(self.rng.randint(-20, 0))]
            while lines[-1] < 20:
                lines.append(lines[-1] + Q(self.rng.randint(1, 24), self.rng.choice([1, 2])))
            grids.append(tuple(lines))
        nodes = tuple(Q(self.rng.randint(-9, 9), self.rng.choice([1, 3])) for _ in range(prod(map(len, grids))))
        return Library("f.csv", ("a", "b")[: len(grids)], (), tuple(grids), {"c": nodes})

    def term(self, depth: int, reads: bool) -> int:
        rng, put = self.rng, self.terms.put
        if not depth or rng.random() < 0.12:
            if rng.random() < 0.7:
                return rng.choice(self.leaves)
            q = Q(rng.randint(-12, 12), rng.choice([1, 2, 3, 4, 5, 7]))
            return put("pi") if not self.rational and rng.random() < 0.15 else put("number", (), q)
        if reads and self.library is not None and rng.random() < 0.12:
            return put("reading", tuple(self.term(rng.randint(0, 1), False) for _ in self.library.grid), "c")
        below = self.term(depth - 1, reads)
        kind = rng.random()
        if kind < 0.1:
            powers = (
                (0, 1, 2, 3, 4, 5, -1, -2) if self.rational else (0, 1, 2, 3, 7, -1, -2, Q(1, 2), Q(3, 2), Q(-1, 2))
            )
            return self.terms.raised(below, Q(rng.choice(powers)))
        if kind < (0.2 if self.rational else 0.5):
            return put(rng.choice(["abs", "neg", *([] if self.rational else [*SLOPES, *REFUSED])]), (below,))
        other = below if rng.random() < 0.05 else self.term(depth - 1, reads)
        return put(rng.choice(["add", "sub", "mul", "div", "min", "max"]), (below, other))


def at_point(poly: Polynomial, t: Sequence[Q]) -> Q:
    return sum((c * prod((x**n for x, n in zip(t, e, strict=True)), start=Q(1)) for e, c in poly.items()), Q(0))


def somewhere(rng: random.Random, count: int) -> list[Q]:
    return [Q(rng.choice([-1, 0, 1])) if rng.random() < 0.4 else Q(rng.randint(-999, 999), 1000) for _ in range(count)]


def placed(names: Sequence[str], box: Box, t: Sequence[Q]) -> dict[str, Any]:
    return {n: number((a + b) / 2 + (b - a) / 2 * x) for n, (a, b), x in zip(names, box, t, strict=True)}


@pytest.mark.parametrize("seed", range(1, 1 + LONG))
def test_terms_are_within_their_remainders(seed: int) -> None:
    rng = random.Random(seed)
    met, narrow = Counter[str](), list[bool]()
    with mpmath.workdps(DIGITS):
        for _ in range(500):
            g = Grown(rng)
            bits, order = rng.choice([24, 30, 56]), rng.choice([0, 1, 2, 3, 6, 8])
            exact = g.rational and rng.random() < 0.6
            forms = Exactly(len(g.names)) if exact else Rounded(len(g.names), bits, order)
            libraries = () if g.library is None else (g.library,)
            try:
                poly, rest = Expansion(g.terms, g.root, g.by, g.names, libraries, forms).over_box(g.box)
            except Undefined:
                met["undefined"] += 1
                continue
            assert rest == 0 if exact else rest >= 0
            met.update(g.terms.all[k][0] for k in g.terms.below(g.root))
            for _ in range(5):
                t = somewhere(rng, len(g.names))
                if g.by:  # on a line of a grid a slope is that of the cell that the box lies in
                    t = [x * Q(999, 1000) for x in t]
                found = value(g.terms, g.root, placed(g.names, g.box, t), g.by, g.library)[bool(g.by)]
                off = abs(found - number(at_point(poly, t)))
                assert off <= number(rest) + SLACK * (1 + abs(found)), (seed, g.box, g.by, order, bits, off, rest)
            if bits == 56 and order >= 6 and all(b - a <= Q(1, 2) for a, b in g.box) and not exact:
                narrow.append(rest <= (1 + size(len(g.names), poly)) / 10**6)
    assert all(met[op] for op in (*SLOPES, "reading", "mark", "min", "max", "abs", "power", "div", "pi")), met
    assert met["undefined"] < 250 and not any(met[op] for op in REFUSED)
    assert len(narrow) > 8 and sum(narrow) >= 0.75 * len(narrow), (len(narrow), sum(narrow))


# x'' = (r(P) + R) x + 1 over (1/2 + R/5) seconds, r read from a library: known in closed form

LINES, NODES = (Q(0), Q(1), Q(2)), (Q(8), Q(9), Q(12))


@cache
def stance() -> tuple[Words, Library, Flows]:
    w = Words()
    p, r = w.variable("P"), w.variable("R")
    rate = w("add", w.terms.put("reading", (p,), "c"), r)
    duration = w("add", w.number(Q(1, 2)), w("mul", w.number(Q(1, 5)), r))
    parameters = (Parameter("P", p, LINES), Parameter("R", r, None))
    one = w.number(1)
    motion = Motion(("x", "xd"), parameters, ((None, one), (rate, None)), (None, one), duration)
    library = Library("f.csv", ("P",), (), (LINES,), {"c": NODES})
    cuts = {"P": ["0", "1", "3/2", "2"], "R": ["0", "1/2"]}

    def matrix(t: float, p: float, r: float) -> list[list[float]]:
        return [[0, 1], [float(np.interp(p, [float(x) for x in LINES], [float(x) for x in NODES])) + r, 0]]

    stated = witness(matrix, lambda p, r: 0.5 + 0.2 * r, cuts, (12, 6), ("0", "1/2", "1"), free=lambda t, p, r: [0, 1])
    return w, library, trajectory(w.terms, motion, (library,), stated, None)


def solution(entry: str, sigma: Any, p: Any, r: Any, cell: int) -> Any:
    low, high = number(NODES[cell]), number(NODES[cell + 1])
    q = low + (high - low) * (p - number(LINES[cell])) + r
    omega, t = mpmath.sqrt(q), (mpmath.mpf(1) / 2 + r / 5) * (1 + sigma) / 2
    c, s = mpmath.cosh(omega * t), mpmath.sinh(omega * t) / omega
    return {"1 1": c, "1 2": s, "2 1": q * s, "2 2": c, "1 0": (c - 1) / q, "2 0": s}[entry]


@pytest.mark.parametrize("seed", range(1, 1 + LONG))
def test_flows_are_within_their_remainders(seed: int) -> None:
    """Values and derivatives by phase and parameters, up to the edges of cells and pieces and at touchdown."""
    rng, (w, library, flows) = random.Random(seed), stance()
    assert flows.error < Q(1, 10**6)
    met, widths = Counter[str](), list[Q]()
    spans = {"p": [Q(0), Q(1), Q(3, 2), Q(2)], "phase": [Q(0), Q(1, 2), Q(1)], "r": [Q(0), Q(1, 2)]}

    def span(cuts: Sequence[Q]) -> tuple[Q, Q]:
        k, kind = rng.randrange(len(cuts) - 1), rng.random()
        a, b = cuts[k], cuts[k + 1]
        if kind < 0.2:
            return (a, a) if kind < 0.1 else (b, b)
        first, last = sorted(a + (b - a) * Q(rng.randint(0, 16), 16) for _ in "ab")
        return (a, b) if kind < 0.6 else (first, last)

    with mpmath.workdps(DIGITS):
        for round_ in range(16 + 12 * (LONG > 1)):
            by, put = ("", "p", "r", "phase")[round_ % 4], w.terms.put
            marked = {n: put("mark", (w.variable(n),), n) for n in spans}
            late = by != "phase" and rng.random() < 0.4
            sigma = w.number(1) if late else w("sub", w("mul", w.number(2), marked["phase"]), w.number(1))
            entries = [rng.choice(["1 1", "1 2", "2 1", "2 2", "1 0", "2 0"]) for _ in "ab"]
            a, b = (put("flow", (sigma, marked["p"], marked["r"]), e) for e in entries)
            root = rng.choice([a, w("mul", a, b), w("add", w("mul", a, w.variable("x")), b)])
            names = w.terms.variables(root)
            box = [(Q(-1), Q(2)) if n == "x" else span(spans[n]) for n in names]
            forms = Rounded(len(names), rng.choice([40, 56]), rng.choice([2, 3, 5]))
            still = by == "p" and box[names.index("p")] == (1, 1)
            try:
                poly, rest = Expansion(w.terms, root, by, names, [library], forms, flows).over_box(box)
            except Undefined as why:
                # two slopes at a line of the grid
                assert still and "several pieces of a trajectory" in str(why), (by, box, why)
                continue
            assert not still
            met[by] += 1
            cell = int(min(sum(box[names.index("p")]) / 2, Q(3, 2)))

            def flow(entry: str, x: Sequence[Dual], cell: int = cell) -> Dual:
                at = [v for v, _ in x]
                slopes = [mpmath.diff(lambda *z: solution(entry, *z, cell), at, tuple(int(k == n) for k in range(3))) * d for n, (_, d) in enumerate(x) if d]  # fmt: skip
                return solution(entry, *at, cell), sum(slopes)

            for _ in range(3):
                t = somewhere(rng, len(names))
                found = value(w.terms, root, placed(names, box, t), by, library, flow)[bool(by)]
                assert abs(found - number(at_point(poly, t))) <= number(rest) + mpmath.mpf(10) ** -18, (seed, by, box)
            if forms.models.order == 5:
                widths.append(rest / (1 + size(len(names), poly)))
    assert all(met[by] > 1 for by in ("", "p", "r", "phase")), met
    assert len(widths) > 1 and sorted(widths)[len(widths) // 2] < Q(1, 10**3), sorted(map(float, widths))


@pytest.mark.parametrize("seed", range(1, 1 + 4 * LONG))
def test_squares_show_minima(seed: int) -> None:
    """Of random polynomials in one variable: the checker's bound is below the least value, and as near as asked."""
    rng = random.Random(seed)
    p = {(n,): Q(rng.randint(-50, 50), 10) for n in range(rng.choice([3, 5, 7]))}
    p = {e: c for e, c in p.items() if c}
    found, _, _ = bounded_below(p, 1e-6)
    assert found is not None
    squares = [[str(w), n, ", ".join(f"{c} {e[0]}" for e, c in q.items())] for w, n, q in found.squares]
    low = end(p, {"bound": str(found.bound), "squares": squares}, 1, 1)
    assert end({e: -c for e, c in p.items()}, {"bound": str(-found.bound), "squares": squares}, -1, 1) == -low
    with mpmath.workdps(DIGITS):
        slope = [number(n * p.get((n,), Q(0))) for n in range(max(e[0] for e in p), 0, -1)]
        roots = mpmath.polyroots(slope, maxsteps=500, extraprec=200) if len(slope) > 1 else []
        flat = [mpmath.re(x) for x in roots if abs(mpmath.im(x)) < SLACK and abs(mpmath.re(x)) <= 1]
        least = min(sum(number(c) * x ** e[0] for e, c in p.items()) for x in [mpmath.mpf(-1), mpmath.mpf(1), *flat])
        assert least - mpmath.mpf(10) ** -5 <= number(low) <= least + SLACK, (seed, low, least)
