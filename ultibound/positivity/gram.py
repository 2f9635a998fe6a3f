"""Gram matrices of weighted sums of squares, by semidefinite programmes. Estimates: nothing here is proved.

p − γ = Σ_k g_k z_kᵀ Q_k z_k with Q_k positive semidefinite, g_0 = 1, g_i = 1 − t_i² (proofs/squares.md (1)), γ as
large as possible.
Solvers may do anything wrong; what they leave is rounded and expanded exactly before it counts (`identity.py`).
"""

from __future__ import annotations

import warnings
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import combinations_with_replacement, product
from operator import add
from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Exponents = tuple[int, ...]
SOLVERS = ("CLARABEL", "SCS")
OPTIONS: dict[str, dict[str, float]] = {"CLARABEL": {"max_iter": 100}, "SCS": {"max_iters": 5000, "eps": 1e-7}}
MOST_ENTRIES = {"CLARABEL": 2500, "SCS": 20_000}  # of all Gram matrices together: more takes too long


@dataclass(frozen=True)
class Gram:
    """z'Qz times a constraint: 0 for none, or the number of the variable i in 1 − t_i²."""

    number: int
    basis: tuple[Exponents, ...]
    matrix: Floats


def monomials(count: int, degree: int) -> list[Exponents]:
    """All powers of so many variables up to a degree, in order of degree."""
    found = []
    for n in range(degree + 1):
        for chosen in combinations_with_replacement(range(count), n):
            found.append(tuple(chosen.count(i) for i in range(count)))
    return found


def bases(count: int, degree: int, constraints: Sequence[int]) -> list[tuple[Exponents, ...]]:
    """The monomials of s_0, then of the factor of each constraint."""
    half = degree // 2
    return [tuple(monomials(count, half)), *(tuple(monomials(count, half - 1)) for _ in constraints)]


def entries(sizes: list[tuple[Exponents, ...]]) -> int:
    return sum(len(b) ** 2 for b in sizes)


def relaxed(
    p: dict[Exponents, float], count: int, degree: int, constraints: Sequence[int], solver: str
) -> tuple[str, list[Gram]]:
    """A solver's status and Gram matrices; none where it left none that are finite."""
    blocks = bases(count, degree, constraints)
    if entries(blocks) > MOST_ENTRIES[solver]:
        return "too large", []
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # of inaccurate solutions: they are rounded and expanded anyhow
            status, values = call(programme(count, degree, tuple(constraints)), p, solver)
    except Exception as why:  # a solver may raise anything
        return f"raised {type(why).__name__}", []
    shapes = [(len(b), len(b)) for b in blocks]
    usable = status in ("optimal", "optimal_inaccurate") and [np.shape(v) for v in values] == shapes
    if not usable or not all(np.all(np.isfinite(v)) for v in values):
        return status, []
    found = zip((0, *constraints), blocks, values, strict=True)
    return status, [Gram(n, b, (v + v.T) / 2) for n, b, v in found]


@dataclass(frozen=True)
class Programme:
    """max γ with p − γ = Σ g_k z_kᵀ Q_k z_k: one equation a monomial, whose right side is the coefficient of p."""

    problem: Any
    right: Any
    grams: list[Any]
    rank: dict[Exponents, int]


@lru_cache(32)
def programme(count: int, degree: int, constraints: tuple[int, ...]) -> Programme:
    """The same for all polynomials of a degree: its compilation takes longer than its solution."""
    import cvxpy as cp
    from scipy.sparse import csr_array

    rank = {e: n for n, e in enumerate(monomials(count, degree))}
    right, bound = cp.Parameter(len(rank)), cp.Variable()
    one = np.zeros(len(rank))
    one[0] = 1.0  # the constant comes first
    grams, total = [], one * bound
    for number, basis in zip((0, *constraints), bases(count, degree, constraints), strict=True):
        size, found = len(basis), list[tuple[int, int, float]]()
        for place, (a, b) in enumerate(product(basis, basis)):
            e = tuple(map(add, a, b))
            found.append((rank[e], place, 1.0))
            if number:
                found.append((rank[(*e[: number - 1], e[number - 1] + 2, *e[number:])], place, -1.0))
        rows, columns, values = zip(*found, strict=True)
        grams.append(cp.Variable((size, size), PSD=True))
        total = total + csr_array((values, (rows, columns)), shape=(len(rank), size * size)) @ cp.vec(
            grams[-1], order="C"
        )
    return Programme(cp.Problem(cp.Maximize(bound), [total == right]), right, grams, rank)


def call(made: Programme, p: dict[Exponents, float], solver: str) -> tuple[str, list[Floats]]:
    """The status and the values that a solver leaves."""
    right = np.zeros(len(made.rank))
    for e, c in p.items():
        right[made.rank[e]] = c
    made.right.value = right
    made.problem.solve(solver=solver, warm_start=False, **OPTIONS[solver])  # the same from whatever was solved before
    return str(made.problem.status), [np.asarray(q.value, dtype=np.float64) for q in made.grams]
