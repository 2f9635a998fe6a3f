"""Values of constant expressions: exact where rational, else enclosed by ball arithmetic."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from itertools import pairwise
from math import isqrt
from typing import Any

from .errors import Bad
from .expression import Expression, Node

MAX_BITS = 2**17
PRECISION = 192
Ends = tuple[Fraction, Fraction]


def constant(expression: Expression, values: Mapping[str, Ends]) -> Ends:
    """Ends that enclose a constant expression's value, equal where it is exact.

    `values` are the enclosures of constants and gains. Raises Bad for other names, and where there is no value.
    """
    done: list[Ends] = []
    for n in expression.nodes:
        if n.op == "number":
            done.append((n.value or Fraction(0),) * 2)
        elif n.op == "name":
            if n.name not in values:
                raise Bad(f"{n.name} is not a constant or gain; only those may stand in a number")
            done.append(values[str(n.name)])
        elif n.op in ("time", "target", "next", "dt"):
            raise Bad(f"{n.op} cannot stand in a number")
        else:
            done.append(_operation(n, [done[a] for a in n.args]))
    return done[-1]


def check_constant_parts(expression: Expression) -> None:
    """Raises Bad where a part made of numbers alone divides by zero, or is too long to be held exactly."""
    known: list[Fraction | None] = []
    for n in expression.nodes:
        operands = [known[a] for a in n.args]
        numbers = [q for q in operands if q is not None]
        if n.op == "number":
            known.append(n.value)
        else:
            known.append(rational(n, numbers) if operands and len(numbers) == len(operands) else None)


def rational(node: Node, x: list[Fraction]) -> Fraction | None:
    """The operation on rationals where its result is rational, else None. Raises Bad where it has no value."""
    match node.op:
        case "add":
            result = x[0] + x[1]
        case "sub":
            result = x[0] - x[1]
        case "mul":
            result = x[0] * x[1]
        case "neg":
            result = -x[0]
        case "div":
            if x[1] == 0:
                raise Bad("division by zero")
            result = x[0] / x[1]
        case "power":
            return _power(x[0], node.value or Fraction(0))
        case "sqrt":
            return _root(x[0])
        case "abs":
            result = abs(x[0])
        case "min":
            result = min(x)
        case "max":
            result = max(x)
        case "clip":
            result = min(max(x[0], x[1]), x[2])
        case _:
            return None
    return _short(result)


def _short(q: Fraction) -> Fraction:
    if max(q.numerator.bit_length(), q.denominator.bit_length()) > MAX_BITS:
        raise Bad("a number too long to be held exactly; write it shorter")
    return q


def _power(base: Fraction, p: Fraction) -> Fraction | None:
    if p.denominator == 2:
        root = _root(base)
        return None if root is None else _power(root, p * 2)
    if base == 0 and p < 0:
        raise Bad("division by zero")
    if max(base.numerator.bit_length(), base.denominator.bit_length()) * abs(p) > MAX_BITS:
        raise Bad("a number too long to be held exactly; write it shorter")
    return base ** int(p)


def _root(q: Fraction) -> Fraction | None:
    if q < 0:
        raise Bad("root of a negative number")
    top, low = isqrt(q.numerator), isqrt(q.denominator)
    return Fraction(top, low) if (top * top, low * low) == (q.numerator, q.denominator) else None


def _operation(node: Node, args: list[Ends]) -> Ends:
    if args and all(a == b for a, b in args):
        exact = rational(node, [a for a, _ in args])
        if exact is not None:
            return exact, exact
    if node.op in ("min", "max"):
        pick = min if node.op == "min" else max
        return pick(a[0] for a in args), pick(a[1] for a in args)
    if node.op == "clip":
        x, low, high = args
        return min(max(x[0], low[0]), high[0]), min(max(x[1], low[1]), high[1])
    if node.op == "abs":
        a, b = args[0]
        return (a, b) if a >= 0 else (-b, -a) if b <= 0 else (Fraction(0), max(-a, b))
    import flint  # heavy, and only for irrational constants

    with flint.ctx.workprec(PRECISION):
        return _ends(_ball(node, [_as_ball(a) for a in args]), node.op)


def _as_ball(ends: Ends) -> Any:
    import flint

    low, high = (flint.arb(flint.fmpq(q.numerator, q.denominator)) for q in ends)
    return low if ends[0] == ends[1] else low.union(high)


def _ball(node: Node, x: list[Any]) -> Any:
    import flint

    match node.op:
        case "pi":
            return flint.arb.pi()
        case "add":
            return x[0] + x[1]
        case "sub":
            return x[0] - x[1]
        case "mul":
            return x[0] * x[1]
        case "div":
            return x[0] / x[1]
        case "neg":
            return -x[0]
        case "power":
            p = node.value or Fraction(0)
            base = x[0].sqrt() if p.denominator == 2 else x[0]
            return base ** int(p * p.denominator)
        case "bezier":
            points = x[1:]
            while len(points) > 1:
                points = [a + x[0] * (b - a) for a, b in pairwise(points)]
            return points[0]
        case _:
            return getattr(x[0], node.op)()


def _ends(ball: Any, op: str) -> Ends:
    if not ball.is_finite() or abs(ball) > 10**6000:
        raise Bad(f"{op} has no value here, or one too large")
    return _fraction(ball.lower()), _fraction(ball.upper())


def _fraction(x: Any) -> Fraction:
    mantissa, exponent = x.man_exp()
    if abs(int(exponent)) > MAX_BITS:  # a denominator too long to be written down
        raise Bad("a value too small or too large to be held; write it another way")
    return Fraction(int(mantissa)) * Fraction(2) ** int(exponent)
