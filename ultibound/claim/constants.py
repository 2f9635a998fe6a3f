"""Values of constant expressions: exact where rational, else enclosed by ball arithmetic."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from fractions import Fraction
from itertools import pairwise
from math import isqrt
from typing import Any

from .errors import Bad, Exhausted, Follows, Unknown
from .expression import Expression, Node

MAX_BITS = 2**17
PRECISION = 192
MAX_WORK = 10**12  # some seconds
INEXACT_WORK = 3 * 10**6
GRID = 160  # an inexact value lies between two whole multiples of 2**-GRID
MAX_MAGNITUDE = 20_000  # bits before the point of an inexact value
_RISING = frozenset({"sqrt", "exp", "log", "asin", "atan", "sinh", "tanh"})
Ends = tuple[Fraction, Fraction]


class Work:
    """What working out a claim's constants may cost: bits squared, so that hostile ones are refused in time."""

    def __init__(self) -> None:
        self.left = MAX_WORK

    def spend(self, ends: Ends, inexact: bool = False) -> None:
        """Charges for a value that was worked out. Raises Exhausted when nothing is left."""
        bits = max(max(q.numerator.bit_length(), q.denominator.bit_length()) for q in ends)
        self.left -= bits * bits + (INEXACT_WORK if inexact else 0)
        if self.left < 0:
            raise Exhausted("the numbers of this claim are too long to be worked out; shorten them")


def constant(
    expression: Expression, values: Mapping[str, Ends], failed: Collection[str] = (), work: Work | None = None
) -> Ends:
    """Ends that enclose a constant expression's value, equal where it is exact.

    `values` are the enclosures of constants and gains, `failed` names whose fault is noted already. Raises
    Bad for other names, and where there is no value.
    """
    done: list[Ends] = []
    for n in expression.nodes:
        if n.op == "number":
            done.append((n.value or Fraction(0),) * 2)
        elif n.op == "name":
            if n.name not in values:
                if n.name in failed:
                    raise Follows
                raise Unknown(
                    f"{n.name} is not a constant or gain; only those may stand in a number", str(n.name), values
                )
            done.append(values[str(n.name)])
        elif n.op in ("time", "target", "next", "dt"):
            raise Bad(f"{n.op} cannot stand in a number")
        else:
            done.append(_operation(n, [done[a] for a in n.args]))
            if work is not None:
                work.spend(done[-1], done[-1][0] != done[-1][1])
    return done[-1]


def check_constant_parts(expression: Expression, work: Work | None = None) -> None:
    """Raises Bad where a part made of numbers alone divides by zero, or is too long to be held exactly."""
    known: list[Fraction | None] = []
    for n in expression.nodes:
        operands = [known[a] for a in n.args]
        numbers = [q for q in operands if q is not None]
        if n.op == "number":
            known.append(n.value)
        else:
            known.append(rational(n, numbers) if operands and len(numbers) == len(operands) else None)
        exact = known[-1]
        if work is not None and exact is not None:
            work.spend((exact, exact))


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
    if node.op == "neg":
        return -args[0][1], -args[0][0]
    if node.op == "power" and node.value == 0:
        return Fraction(1), Fraction(1)
    return _enclosed(node, args)


def _enclosed(node: Node, args: list[Ends]) -> Ends:
    """An operation by ball arithmetic: operands and result rounded outward to the grid. Raises Bad where undefined.

    The grid is absolute, like the checker's: what is too small to be told from zero there is so here too.
    """
    import flint  # heavy, and only for irrational constants

    ends = [(_down(a), -_down(-b)) for a, b in args]
    size = max((max(abs(a), abs(b)) for a, b in ends), default=0).bit_length() - GRID
    if size > MAX_MAGNITUDE:
        raise Bad(f"{node.op}: a value too large to be enclosed")
    extra = max(size, 0)
    if node.op in ("exp", "sinh", "cosh"):  # the result has as many more bits as the argument is large
        extra = 3 * min(max(abs(e) for e in ends[0]) >> GRID, MAX_MAGNITUDE) // 2
    with flint.ctx.workprec(2 * PRECISION + extra):
        balls = [_as_ball(a, b) for a, b in ends]
        if node.op in _RISING:  # at the ends alone: a ball about the edge of the domain would reach over it
            low, high = (getattr(flint.arb((end, -GRID)), node.op)() for end in ends[0])
        elif node.op == "acos":
            high, low = (flint.arb((end, -GRID)).acos() for end in ends[0])
        else:
            low = high = _ball(node, balls)
        for x in (low, high):
            if not x.is_finite() or not abs(x) < flint.arb((1, MAX_MAGNITUDE)):
                raise Bad(f"{node.op}: no value here, one too large, or one that {GRID} bits cannot tell from that")
        a, b = _floor(low.lower()), -_floor(-high.upper())
    if node.op in ("sin", "cos", "tanh"):
        a, b = max(a, -1 << GRID), min(b, 1 << GRID)
    return Fraction(a, 1 << GRID), Fraction(b, 1 << GRID)


def _down(q: Fraction) -> int:
    return (q.numerator << GRID) // q.denominator


def _floor(x: Any) -> int:
    """An exact ball times 2**GRID, rounded down."""
    mantissa, exponent = (int(part) for part in x.man_exp())
    shift = exponent + GRID
    return mantissa << shift if shift >= 0 else mantissa >> -shift


def _as_ball(low: int, high: int) -> Any:
    import flint

    ball = flint.arb((low, -GRID))
    return ball if low == high else ball.union(flint.arb((high, -GRID)))


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
