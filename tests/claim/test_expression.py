"""The expression grammar: trees, exponents, positions in messages, limits, and values of constants."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from itertools import pairwise
from typing import Any

import pytest
from mpmath import mp  # type: ignore[import-untyped]  # it ships no types

from ultibound.claim import Bad
from ultibound.claim.constants import constant
from ultibound.claim.expression import Expression, Parser


def parsed(text: str, **options: bool) -> Expression:
    parser = Parser(text, lambda e: constant(e, {})[0], **options)
    e = parser.expression()
    parser.end()
    return e


def written(e: Expression) -> str:
    """An expression with every operation in parentheses."""
    done: list[str] = []
    for n in e.nodes:
        leaf = str(n.value) if n.op == "number" else n.name or n.op
        args = [done[a] for a in n.args] + ([str(n.value)] if n.op == "power" else [])
        done.append(f"({n.op} {' '.join(args)})" if args else leaf)
    return done[-1]


@pytest.mark.parametrize("text, tree", [
    ("a - b - c", "(sub (sub a b) c)"), ("a/b/c", "(div (div a b) c)"), ("a + b*c", "(add a (mul b c))"), ("-x**2", "(neg (power x 2))"), ("(-x)**2", "(power (neg x) 2)"),
    ("x**2**3", "(power x 8)"), ("x**-1", "(power x -1)"), ("x**0.5", "(power x 1/2)"), ("2*-v", "(mul 2 (neg v))"), ("- -v", "(neg (neg v))"), ("x1e-3", "(sub x1e 3)"),
    ("2e-3*v", "(mul 1/500 v)"), ("clip(v, 0, 1)", "(clip v 0 1)"), ("sin (v)", "(sin v)"), ("pi", "pi"), ("target( v )", "v"),
])  # fmt: skip
def test_trees(text: str, tree: str) -> None:
    assert written(parsed(text)) == tree


@pytest.mark.parametrize("text, said", [
    ("v +", "character 4: the expression ends too early"), ("v $ 2", "character 3: '$' cannot stand"), ("(v", "character 3: ')' is missing"), ("v v", "character 3: 'v' is left over"),
    ("2*sinn(v)", "character 3: 'sinn' is not a function; did you mean sin?"), ("min(v)", "character 1: min takes 2 or more argument(s), 1 found"), ("t", "character 1: t is the time"), ("v**0.3", "half-integer of at most 64"),
])  # fmt: skip
def test_messages_tell_the_position(text: str, said: str) -> None:
    with pytest.raises(Bad) as caught:
        parsed(text)
    assert said in str(caught.value)


def test_nodes_stand_after_their_operands() -> None:
    e = parsed("min(v, T, 2)*(v + sqrt(T))**1.5 - target(v)")
    assert all(a < k for k, n in enumerate(e.nodes) for a in n.args)
    assert e.names() == ["v", "T", "v", "T", "target(v)"]


@pytest.mark.parametrize("text, value", [
    ("1/3 + 1/6", "1/2"), ("4**1.5", "8"), ("4**-0.5", "1/2"), ("sqrt(9/4)", "3/2"), ("0**0", "1"), ("pi**0", "1"), ("max(1, 2) - min(1, 2)", "1"), ("clip(3, 0, 1)", "1"), ("abs(-2)", "2"), ("-2**2", "-4"), ("1e-3", "1/1000"),
])  # fmt: skip
def test_rational_constants_are_exact(text: str, value: str) -> None:
    assert constant(parsed(text), {}) == (Fraction(value),) * 2


@pytest.mark.parametrize("text, exact, excess", [
    ("pi", lambda: +mp.pi, 4), ("sqrt(2)/2", lambda: mp.sqrt(2) / 2, 4), ("exp(1)", lambda: mp.e + 0, 4), ("log(2)", lambda: mp.log(2), 4), ("sin(1)", lambda: mp.sin(1), 4), ("cos(2)", lambda: mp.cos(2), 4),
    ("tan(1)", lambda: mp.tan(1), 4), ("asin(1/3)", lambda: mp.asin(mp.mpf(1) / 3), 4), ("acos(1/3)", lambda: mp.acos(mp.mpf(1) / 3), 4), ("atan(3)", lambda: mp.atan(3), 4), ("sinh(1)", lambda: mp.sinh(1), 4),
    ("cosh(1)", lambda: mp.cosh(1), 4), ("tanh(1)", lambda: mp.tanh(1), 4), ("2*pi/5", lambda: 2 * mp.pi / 5, 8), ("3**0.5", lambda: mp.sqrt(3), 4), ("exp(40)", lambda: mp.exp(40), 4), ("-pi**2", lambda: -(mp.pi**2), 16),
])  # fmt: skip
def test_other_constants_are_enclosed_closely(text: str, exact: Callable[[], Any], excess: int) -> None:
    low, high = constant(parsed(text), {})
    with mp.workdps(120):
        sign, mantissa, exponent, _ = exact()._mpf_
    value = Fraction((-1) ** sign * int(mantissa)) * Fraction(2) ** exponent
    assert low <= value <= high and 0 < high - low <= Fraction(excess, 2**160)


def test_values_of_names_and_their_enclosures() -> None:
    e = parsed("a*b")
    third = Fraction(1, 3)
    assert constant(e, {"a": (third, third), "b": (Fraction(3), Fraction(3))}) == (Fraction(1), Fraction(1))
    with pytest.raises(Bad, match="b is not a constant or gain"):
        constant(e, {"a": (third, third)})


def test_enclosures_grow_with_their_operands() -> None:
    widths = []
    for k in (150, 100, 50):
        low, high = constant(parsed("exp(a)"), {"a": (Fraction(1), 1 + Fraction(1, 2**k))})
        widths.append(high - low)
    assert all(2**40 < b / a < 2**60 for a, b in pairwise(widths))
