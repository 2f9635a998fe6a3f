"""The checker's arithmetic against mpmath at 60 digits and more (never its intervals): contained, and tight."""

from __future__ import annotations

import random
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from fractions import Fraction

import mpmath
import pytest

from ultibound.checker.exact import Exact
from ultibound.checker.reals import Inexact, Scaled, Undefined

FUNCTIONS: dict[str, Callable[[mpmath.mpf], mpmath.mpf]] = {
    "sqrt": mpmath.sqrt, "exp": mpmath.exp, "log": mpmath.log, "sin": mpmath.sin, "cos": mpmath.cos, "tan": mpmath.tan,
    "asin": mpmath.asin, "acos": mpmath.acos, "atan": mpmath.atan, "sinh": mpmath.sinh, "cosh": mpmath.cosh, "tanh": mpmath.tanh,
}  # fmt: skip
ULPS = 4


@contextmanager
def digits(n: int) -> Iterator[None]:
    before = mpmath.mp.dps
    mpmath.mp.dps = n
    try:
        yield
    finally:
        mpmath.mp.dps = before


def exact(x: mpmath.mpf) -> Fraction:
    sign, mantissa, exponent, _ = x._mpf_
    return (-1 if sign else 1) * Fraction(int(mantissa)) * Fraction(2) ** int(exponent)


def arguments(name: str, bits: int, rng: random.Random) -> list[int]:
    """Corners, tiny, large and random arguments within the function's domain, as scaled whole numbers."""
    one = 1 << bits
    with digits(200):
        quarter = int(mpmath.floor(mpmath.pi / 2 * one))
    found = [0, 1, -1, one, -one, one - 1, 1 - one, one + 1, one // 2, 3 * one // 2, 40 * one, -40 * one, 7 * one // 10]
    found += [k * quarter + d for k in (-5, -2, -1, 1, 2, 3, 8) for d in (-1, 0, 1, one // 1000)]
    scales = (Fraction(1), Fraction(1), Fraction(20), Fraction(1, 10**6), Fraction(1, 10**12))
    found += [int(rng.choice(scales) * rng.randrange(-one, one + 1)) for _ in range(150)]
    if name in ("asin", "acos"):
        found = [x for x in found if abs(x) <= one]
    if name in ("sqrt", "log"):
        found = [abs(x) or 1 for x in found]
    return found


@pytest.mark.parametrize("bits", [32, 64, 72, 160, 400])
@pytest.mark.parametrize("name", FUNCTIONS)
def test_points(name: str, bits: int) -> None:
    arithmetic, rng = Scaled(bits), random.Random(f"{name}{bits}")
    checked = 0
    with digits(bits // 3 + 120):
        for x in arguments(name, bits, rng):
            try:
                low, high = getattr(arithmetic, name)((x, x))
            except Undefined:
                assert name == "tan"  # where a pole cannot be told from the argument
                continue
            value = exact(FUNCTIONS[name](mpmath.mpf(x) / (1 << bits)) * (1 << bits))
            slack = max(abs(value), 1) / Fraction(10) ** (bits // 3 + 100)
            assert low - slack <= value <= high + slack, (x, low, high)
            assert high - low <= ULPS, (x, high - low)
            checked += 1
    assert checked > 100


@pytest.mark.parametrize("name", FUNCTIONS)
def test_wide_intervals_contain_and_are_tight(name: str) -> None:
    arithmetic, rng = Scaled(64), random.Random(name)
    corner = {"sin": 0.5, "cos": 0.0}.get(name)
    for _ in range(150):
        low = rng.uniform(-7, 7)
        high = low + abs(rng.gauss(0, 2))
        if name in ("sqrt", "log"):
            low, high = abs(low) + 1e-9, abs(low) + 1e-9 + high - low
        if name in ("asin", "acos"):
            low, high = sorted((rng.uniform(-1, 1), rng.uniform(-1, 1)))
        a = arithmetic.between(Fraction(low), Fraction(high))
        try:
            found = arithmetic.ends(getattr(arithmetic, name)(a))
        except Undefined:
            assert name == "tan"
            continue
        with digits(60):
            places = [mpmath.mpf(low), mpmath.mpf(high)]
            if corner is not None:
                first = int(mpmath.ceil(low / mpmath.pi - corner))
                places += [
                    (k + corner) * mpmath.pi for k in range(first, first + 6) if low <= (k + corner) * mpmath.pi <= high
                ]
            if name == "cosh" and low <= 0 <= high:
                places.append(mpmath.mpf(0))
            values = [exact(FUNCTIONS[name](x)) for x in places]
        least, most, slack = min(values), max(values), Fraction(1, 10**50)
        assert found[0] <= least + slack and found[1] >= most - slack
        one_up = Fraction(ULPS, 2**64) * (1 + (abs(most) if name in ("exp", "sinh", "cosh", "tan") else 0))
        assert least - found[0] <= one_up and found[1] - most <= one_up, (low, high)


def test_field_operations_round_outward_by_less_than_one_unit() -> None:
    rng = random.Random(5)
    for bits in (32, 64, 200):
        arithmetic, exactly, one = Scaled(bits), Exact(), 1 << bits
        for _ in range(400):
            a, b = (tuple(sorted(rng.randrange(-9 * one, 9 * one) for _ in range(2))) for _ in range(2))
            p, q = arithmetic.ends(a), arithmetic.ends(b)
            for name in ("add", "sub", "mul", "div"):
                if name == "div" and b[0] <= 0 <= b[1]:
                    with pytest.raises(Undefined):
                        arithmetic.div(a, b)
                    continue
                found, true = arithmetic.ends(getattr(arithmetic, name)(a, b)), getattr(exactly, name)(p, q)
                assert found[0] <= true[0] and true[1] <= found[1]
                assert max(true[0] - found[0], found[1] - true[1]) < Fraction(1, one)
            for n in (0, 1, 2, 3, 6):
                found, true = arithmetic.ends(arithmetic.power(a, n)), exactly.power(p, n)
                assert found[0] <= true[0] and true[1] <= found[1]
                assert max(true[0] - found[0], found[1] - true[1]) < Fraction(1, one)
        third = arithmetic.ends(arithmetic.number(Fraction(1, 3)))
        assert third[0] < Fraction(1, 3) < third[1] and third[1] - third[0] == Fraction(1, one)


CONSTANTS = [
    ("pi", None, "3.14159265358979323846264338328"), ("exp", "1", "2.71828182845904523536028747135"),
    ("sqrt", "2", "1.41421356237309504880168872421"), ("sqrt", "3", "1.73205080756887729352744634151"),
    ("log", "2", "0.693147180559945309417232121458"), ("sinh", "1", "1.17520119364380145688238185060"),
    ("cosh", "1", "1.54308063481524377847790562076"), ("tanh", "1/2", "0.462117157260009758502318483644"),
    ("exp", "-1", "0.367879441171442321595523770161"), ("sinh", "2", "3.62686040784701876766821398280"),
    ("cosh", "2", "3.76219569108363145956221347777"),
]  # fmt: skip


@pytest.mark.parametrize("name, at, value", CONSTANTS)
def test_table_constants(name: str, at: str | None, value: str) -> None:
    """Abramowitz & Stegun, tables 1.1, 4.4, 4.15 (table numbers from memory)."""
    arithmetic = Scaled(80)
    interval = arithmetic.pi() if at is None else getattr(arithmetic, name)(arithmetic.number(Fraction(at)))
    low, high = arithmetic.ends(interval)
    assert low - Fraction(1, 10**29) <= Fraction(value) <= high + Fraction(1, 10**29)
    assert interval[1] - interval[0] <= ULPS


@pytest.mark.parametrize("name, ends", [
    ("sqrt", (-1, 1)), ("log", (0, 1)), ("log", (-2, -1)), ("asin", (0, 2)), ("acos", (-2, 0)), ("tan", (1, 2)), ("exp", (0, 10**9)),
    ("sinh", (-(10**9), 0)), ("cosh", (0, 10**9)),
])  # fmt: skip
def test_what_is_not_defined_is_refused_at_once(name: str, ends: tuple[int, int]) -> None:
    arithmetic, start = Scaled(64), time.monotonic()
    with pytest.raises(Undefined):
        getattr(arithmetic, name)(arithmetic.between(Fraction(ends[0]), Fraction(ends[1])))
    assert time.monotonic() - start < 1


def test_magnitudes_are_bounded() -> None:
    arithmetic, start = Scaled(64), time.monotonic()
    big = arithmetic.number(Fraction(10**3000))
    for action in (lambda: arithmetic.power(big, 64), lambda: arithmetic.mul(arithmetic.mul(big, big), arithmetic.mul(big, big)),
                   lambda: arithmetic.number(Fraction(10**9000))):  # fmt: skip
        with pytest.raises(Undefined):
            action()
    assert time.monotonic() - start < 1


def test_exact_arithmetic_does_not_round_and_refuses_the_irrational() -> None:
    e, a = Exact(), (Fraction(1, 3), Fraction(2, 3))
    assert e.mul(a, a) == (Fraction(1, 9), Fraction(4, 9))
    assert e.power((Fraction(-1), Fraction(1, 2)), 2) == (0, 1)
    assert e.sqrt((Fraction(1, 4), Fraction(9))) == (Fraction(1, 2), 3)
    for action in (lambda: e.sqrt(a), lambda: e.exp(a), lambda: e.pi()):
        with pytest.raises(Inexact):
            action()
