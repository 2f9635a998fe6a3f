"""Weighted sums of squares: exact identities whatever a solver leaves, and bounds that are near the minimum."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from typing import Any

import numpy as np
import pytest
import sympy

from tests.polynomials import Polynomial, positive
from ultibound.positivity import bounds, gram
from ultibound.positivity.bounds import bounded_below, least_sampled
from ultibound.positivity.identity import Identity, identity, steps

X = sympy.symbols("t1:6")


def polynomial(expression: Any, boxes: list[tuple[int, int]]) -> Polynomial:
    """In variables over [−1, 1], of an expression over boxes."""
    scaled = {x: sympy.Rational(a + b, 2) + sympy.Rational(b - a, 2) * x for x, (a, b) in zip(X, boxes, strict=False)}
    found = sympy.Poly(sympy.sympify(expression).subs(scaled, simultaneous=True), *X[: len(boxes)])
    return {e: Fraction(int(c.p), int(c.q)) for e, c in found.terms()}


def holds(p: Polynomial, found: Identity) -> None:
    """p − bound = Σ weight · constraint · polynomial², re-expanded by sympy, which shares nothing with the search."""
    count = len(next(iter(p)))
    x = X[:count]

    def expression(q: dict[tuple[int, ...], Any]) -> Any:
        return sum(sympy.Rational(c) * sympy.prod(v**n for v, n in zip(x, e, strict=True)) for e, c in q.items())

    total = sympy.Rational(found.bound)
    for weight, number, q in found.squares:
        assert weight >= 0 and all(type(c) is int for c in q.values())
        total += sympy.Rational(weight) * (1 - x[number - 1] ** 2 if number else 1) * expression(q) ** 2
    assert sympy.Poly(total - expression(p), *x).is_zero


# Values: Dixon & Szegő 1978 (from memory) for the camel, Motzkin 1967 (from memory), Parrilo 2000 (from memory) for the
# quartic, whose minimum on the unit circle is 0.578179636683703133, and Lukács' certificate of 2 + 3x − 4x³ on [0, 1].
T = X
CASES = {
    "camel": (4 * T[0] ** 2 - sympy.Rational(21, 10) * T[0] ** 4 + T[0] ** 6 / 3 + T[0] * T[1] - 4 * T[1] ** 2 + 4 * T[1] ** 4,
              [(-3, 3), (-2, 2)], "-1.03162845348987735"),
    "motzkin": (T[0] ** 4 * T[1] ** 2 + T[0] ** 2 * T[1] ** 4 + 1 - 3 * T[0] ** 2 * T[1] ** 2, [(-2, 2), (-2, 2)], "0"),
    "quartic": (2 * T[0] ** 4 + 2 * T[0] ** 3 * T[1] - T[0] ** 2 * T[1] ** 2 + 5 * T[1] ** 4
                - sympy.Rational("0.578179636683703133") * (T[0] ** 2 + T[1] ** 2) ** 2, [(-1, 1), (-1, 1)], "0"),
    "cubic": (2 + 3 * T[0] - 4 * T[0] ** 3, [(0, 1)], "1"),
}  # fmt: skip


@pytest.mark.parametrize("name", CASES)
def test_published_minima(name: str) -> None:
    expression, boxes, least = CASES[name]
    p = polynomial(expression, boxes)
    found, low, _ = bounded_below(p, 1e-6)
    assert found is not None
    holds(p, found)
    assert Fraction(least) - Fraction(1, 10**6) <= found.bound <= Fraction(least)
    assert low == pytest.approx(float(least), abs=1e-6)
    upper, _, _ = bounded_below({e: -c for e, c in p.items()}, 1e-3)
    assert upper is not None and -upper.bound >= found.bound


def test_no_sum_of_squares_alone_bounds_motzkins_polynomial() -> None:
    expression, _, _ = CASES["motzkin"]
    p = {e: float(c) for e, c in polynomial(expression, [(-1, 1), (-1, 1)]).items()}
    for degree in (6, 8):
        for solver in gram.SOLVERS:
            status, grams = gram.relaxed(p, 2, degree, [], solver)
            exact = {e: Fraction(c) for e, c in p.items()}
            assert not grams or identity(exact, grams, 1e-8, []) is None, (degree, solver, status)


@pytest.mark.parametrize("seed", [1, 3, 4])
def test_random_ones(seed: int) -> None:
    p = positive(seed)
    found, low, said = bounded_below(p, 1e-3)
    assert found is not None and "optimal" in said[-1]
    holds(p, found)
    assert low - 1e-3 <= float(found.bound) <= low + 1e-9


def test_enough_is_enough() -> None:
    p = positive(3)
    short, _, _ = bounded_below(p, 1e-9, enough=-1.0)
    long, _, _ = bounded_below(p, 1e-9)
    assert short is not None and long is not None and short.bound >= -1
    assert sum(len(q) for _, _, q in short.squares) <= sum(len(q) for _, _, q in long.squares)
    assert short.bound <= long.bound


def test_constants_and_variables_that_do_not_occur() -> None:
    found, low, _ = bounded_below({(0, 0): Fraction(3, 7)}, 1e-3)
    assert found == Identity(Fraction(3, 7), ()) and low == pytest.approx(3 / 7)
    p = {(0, 0, 0): Fraction(1), (0, 2, 0): Fraction(-1, 2), (0, 0, 1): Fraction(0)}
    found, low, _ = bounded_below(p, 1e-6)
    assert (
        found is not None
        and low == pytest.approx(0.5)
        and Fraction(1, 2) - Fraction(1, 10**6) <= found.bound <= Fraction(1, 2)
    )
    assert all(number in (0, 2) and not any(e[0] or e[2] for e in q) for _, number, q in found.squares)
    holds(p, found)


def test_one_minus_a_monomial() -> None:
    for e in ((0,), (3,), (2, 1), (1, 0, 2)):
        total = sum(
            (1 - X[i - 1] ** 2) * sympy.prod(x**n for x, n in zip(X, below, strict=False)) ** 2 for i, below in steps(e)
        )
        assert sympy.expand(total - 1 + sympy.prod(x ** (2 * n) for x, n in zip(X, e, strict=False))) == 0


Call = Callable[..., tuple[str, list[Any]]]


def garbage(kind: str, real: Call) -> Call:
    """A solver that answers wrongly."""

    def call(made: Any, p: Any, solver: str) -> tuple[str, list[Any]]:
        status, values = real(made, p, solver)
        if kind == "raises":
            raise ArithmeticError("garbage")
        if kind == "status":
            return "infeasible", values
        if kind == "not a number":
            return status, [v * np.nan for v in values]
        if kind == "indefinite":
            return status, [-v for v in values]
        if kind == "asymmetric":
            return status, [np.triu(v) * 2 - np.diag(np.diag(v)) + 0.1 * np.tril(np.ones_like(v), -1) for v in values]
        if kind == "huge":
            return status, [v * 1e200 for v in values]
        return status, [v[:1] for v in values]

    return call


@pytest.mark.parametrize(
    "kind", ["raises", "status", "not a number", "indefinite", "asymmetric", "huge", "another shape"]
)
def test_a_solver_that_answers_garbage_proves_nothing_false(kind: str, monkeypatch: pytest.MonkeyPatch) -> None:
    p, real = positive(2), gram.call
    wrong = garbage(kind, real)
    monkeypatch.setattr(
        gram, "call", lambda made, p, solver: (wrong if solver == gram.SOLVERS[0] else real)(made, p, solver)
    )
    found, low, said = bounded_below(p, 1e-3)
    if found is not None:
        holds(p, found)
        assert float(found.bound) <= low + 1e-9
    if kind in ("raises", "status", "not a number", "another shape"):  # then the other solver is asked
        assert found is not None and gram.SOLVERS[1] in said[-1] and float(found.bound) >= low - 1e-2
    monkeypatch.setattr(gram, "call", wrong)
    nothing, _, said = bounded_below(p, 1e-3)
    if nothing is not None:
        holds(p, nothing)
        assert float(nothing.bound) <= low + 1e-9
    assert len(said) >= len(bounds.HIGHER)


def test_samples_find_a_minimum_at_a_corner_a_face_and_inside() -> None:
    one, two = Fraction(1), Fraction(2)
    assert least_sampled({(1, 0): one, (0, 1): one}, 2)[0] == pytest.approx(-2)
    assert least_sampled({(1, 0): one, (0, 2): one, (0, 1): -one}, 2)[0] == pytest.approx(-1.25)
    value, at = least_sampled({(4,): two, (2,): -one}, 1)
    assert value == pytest.approx(-0.125) and abs(at[0]) == pytest.approx(0.5, abs=1e-4)
