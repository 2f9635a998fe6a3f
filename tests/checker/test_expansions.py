"""Expansions about a middle against Taylor's formula in fractions, term by term."""

from __future__ import annotations

import random
from fractions import Fraction as Q
from itertools import product
from math import comb, perm, prod

import pytest

from ultibound.checker.expansions import digits, expanded, joined, places, shifted_to, spread, weights
from ultibound.checker.flows import exponents_of
from ultibound.checker.rates import GUARD

BITS = 56


def taylor(poly: dict[tuple[int, ...], Q], at: list[Q]) -> dict[tuple[int, ...], Q]:
    found: dict[tuple[int, ...], Q] = {}
    for e, c in poly.items():
        for o in product(*(range(n + 1) for n in e)):
            part = c * prod([comb(n, m) * x ** (n - m) for n, m, x in zip(e, o, at, strict=True)])
            found[o] = found.get(o, Q(0)) + part
    return found


def drawn(r: random.Random, fine: bool) -> int:
    """In units of 2^-BITS within [-1, 1]: of all digits, or of few, as the middles of halved boxes are."""
    few = BITS if fine else r.choice([0, 1, 3])
    return r.randint(-(1 << few), 1 << few) << BITS - few


@pytest.mark.parametrize("seed", range(24))
def test_against_fractions(seed: int) -> None:
    r = random.Random(seed)
    parameters, total, degree = r.choice([(0, 0, 5), (1, 3, 4), (2, 3, 2), (3, 2, 1)])
    powers = tuple(exponents_of(parameters, total))
    columns = [[r.randint(-(2**40), 2**40) for _ in range(degree + 1)] for _ in powers]
    columns[r.randrange(len(columns))] = [0] * (degree + 1)
    at = [drawn(r, r.random() < 0.4) for _ in range(parameters)]
    reaches = [r.choice([0, 1, abs(drawn(r, True)), 1 << BITS - 3]) for _ in range(parameters + 1)]
    form = expanded(powers, columns, 0, tuple(at), BITS)
    poly = {(n, *e): Q(c) for e, column in zip(powers, columns, strict=True) for n, c in enumerate(column)}
    exact = taylor(poly, [Q(0), *(Q(x, 1 << BITS) for x in at)])
    for e, column in form.columns.items():
        assert [Q(c, 1 << form.extra) for c in column] == [exact.get((n, *e), 0) for n in range(degree + 1)]
    assert form.extra == sum(total * places(x, BITS) for x in at)
    second = [(0,) * (k + 1) + (2,) + (0,) * (parameters - k - 1) for k in range(parameters)]
    one = (1,) * min(parameters + 1, 2) + (0,) * (parameters - 1)
    for orders in [(0,) * (parameters + 1), (1, *(0,) * parameters), one, *second]:
        middle, reach = (Q(x, 1 << GUARD + form.extra) for x in spread(form, orders, reaches, BITS))
        sizes = {
            e: abs(c) * prod([perm(n, o) * Q(p, 1 << BITS) ** max(n - o, 0) for n, o, p in zip(e, orders, reaches, strict=True)])
            for e, c in exact.items()
        }  # fmt: skip
        assert middle == exact.get(orders, 0) * prod([perm(o, o) for o in orders])
        wanted = sum(sizes.values()) - sizes.get(orders, 0)
        assert wanted <= reach <= wanted * (1 + Q(1, 10**20)) + Q(2, 1 << GUARD)


@pytest.mark.parametrize("seed", range(8))
def test_only_the_lowest_powers_are_kept(seed: int) -> None:
    r = random.Random(seed)
    poly = tuple((n, m) for n in range(5) for m in range(2)), [r.randint(-999, 999) for _ in range(10)]
    x = drawn(r, bool(seed % 2))
    (whole, all_of), extra = shifted_to(poly, 0, x, BITS)
    (powers, found), more = shifted_to(poly, 0, x, BITS, 2)
    assert extra == more and dict(zip(powers, found, strict=True)) == {
        e: c for e, c in zip(whole, all_of, strict=True) if e[0] < 2
    }


def test_a_middle_at_a_power_of_two_needs_no_digit_more() -> None:
    assert [places(x << 40, 56) for x in (0, 1 << 16, 1 << 15, 3 << 14, 5)] == [0, 0, 1, 2, 16]


@pytest.mark.parametrize("size", [1, 2, 5])
def test_digits_are_what_was_joined(size: int) -> None:
    half = 1 << 8 * size - 1
    column = [-half, half - 1, 0, -1, 1, half - 1, -half]
    assert digits(joined(column, size), size, len(column)) == column
    assert joined(column, size) == sum(c << 8 * size * n for n, c in enumerate(column))


def test_sums_and_multiples_of_joined_numbers_have_those_of_the_digits() -> None:
    a, b = [-7, 5, 0, 3], [4, -6, -1, 2]
    assert digits(9 * joined(a, 1) - 10 * joined(b, 1), 1, 4) == [9 * x - 10 * y for x, y in zip(a, b, strict=True)]


def test_powers_of_a_reach_are_rounded_up() -> None:
    third = (1 << BITS) // 3
    found = weights(1, third, 6, BITS)
    for n, w in enumerate(found):
        wanted = n * Q(third, 1 << BITS) ** max(n - 1, 0)
        assert wanted <= Q(w, 1 << 128) <= wanted + Q(1, 10**30)
    assert weights(2, 0, 3, BITS) == [0, 0, 2 << 128, 0]
