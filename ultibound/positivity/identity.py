"""From Gram matrices to an identity that holds exactly: rounded factors, and what they miss absorbed.

With r t^m = |r|/2 (t^a ± t^b)² − |r|/2 (t^2a + t^2b), m = a + b, and 1 − t^2a a sum of (1 − t_i²) times squares of
monomials, every monomial that the rounded squares miss is made up for at the cost of |r| (proofs/squares.md (5)).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from operator import add

import numpy as np

from .gram import Exponents, Floats, Gram

Polynomial = dict[Exponents, Fraction]
Square = tuple[Fraction, int, dict[Exponents, int]]  # weight, constraint, polynomial with whole coefficients


@dataclass(frozen=True)
class Identity:
    """p − bound = Σ weight · constraint · polynomial², exactly."""

    bound: Fraction
    squares: tuple[Square, ...]


def identity(p: Polynomial, grams: list[Gram], accuracy: float, constraints: Sequence[int]) -> Identity | None:
    """An exact identity near Gram matrices; None where what is left cannot be absorbed without constraints.

    `accuracy`: what is kept of the factors, relative to the largest entry.
    """
    count = len(next(iter(p)))
    constant = (0,) * count
    largest = max((float(np.abs(g.matrix).max(initial=0.0)) for g in grams), default=0.0)
    bits = max(1, round(-np.log2(max(accuracy * largest**0.5, 1e-300)))) if largest else 1
    weight = Fraction(1, 4**bits)
    squares: list[Square] = []
    left = dict(p)
    for g in grams:
        for column in factor(g.matrix, accuracy * largest).T:
            whole = {e: round(float(x) * 2**bits) for e, x in zip(g.basis, column, strict=True)}
            whole = {e: x for e, x in whole.items() if x}
            if whole:
                squares.append((weight, g.number, whole))
                subtract(left, weight, g.number, whole)
    bound = left.pop(constant, Fraction(0))
    weights: dict[tuple[int, Exponents], Fraction] = {}

    def more(number: int, e: Exponents, w: Fraction) -> None:
        weights[number, e] = weights.get((number, e), Fraction(0)) + w

    for m, r in left.items():
        if not r:
            continue
        a, b = halves(m)
        if a == b and r > 0:
            more(0, a, r)
            continue
        if any(n and i + 1 not in constraints for i, n in enumerate(m)):
            return None
        bound -= abs(r)
        if a != b:
            squares.append((abs(r) / 2, 0, {a: 1, b: 1 if r > 0 else -1}))
        for e in (a, b):
            for number, below in steps(e):
                more(number, below, abs(r) / 2)
    squares += [(w, number, {e: 1}) for (number, e), w in sorted(weights.items())]
    return Identity(bound, tuple(squares))


def factor(q: Floats, least: float) -> Floats:
    """L with L L' near q, by pivots until the rest of the diagonal is at most `least`; the rest is left out."""
    rest = q.copy()
    columns = []
    for _ in range(len(q)):
        i = int(np.argmax(np.diag(rest)))
        if not rest[i, i] > least:
            break
        column = rest[:, i] / np.sqrt(rest[i, i])
        rest = rest - np.outer(column, column)
        columns.append(column)
    return np.array(columns).T if columns else np.zeros((len(q), 0))


def subtract(left: Polynomial, weight: Fraction, number: int, whole: dict[Exponents, int]) -> None:
    """Takes weight times constraint times square away."""
    terms = list(whole.items())
    total: dict[Exponents, int] = {}
    for n, (e, x) in enumerate(terms):
        for f, y in terms[n:]:
            to = tuple(map(add, e, f))
            total[to] = total.get(to, 0) + (x * y if e == f else 2 * x * y)
    for e, c in total.items():
        left[e] = left.get(e, Fraction(0)) - weight * c
        if number:
            up = (*e[: number - 1], e[number - 1] + 2, *e[number:])
            left[up] = left.get(up, Fraction(0)) + weight * c


def halves(m: Exponents) -> tuple[Exponents, Exponents]:
    """Two powers whose sum this is, of nearly the same degree; equal where all are even."""
    a, b, up = [], [], False
    for n in m:
        a.append(n // 2 + (n % 2 if up else 0))
        b.append(n - a[-1])
        up ^= bool(n % 2)
    return tuple(a), tuple(b)


def steps(e: Exponents) -> list[tuple[int, Exponents]]:
    """1 − t^2e as the sum of (1 − t_i²) times squares of these monomials."""
    found, below = [], [0] * len(e)
    for i, n in enumerate(e):
        for _ in range(n):
            found.append((i + 1, tuple(below)))
            below[i] += 1
    return found
