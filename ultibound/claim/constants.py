"""Values of constant expressions: exact where rational, else enclosed on a grid.

The rule, which the checker's own reader keeps too. A rational value is exact, of at most 2**17 bits above the line and
as many below. Any other lies between two whole multiples of 2**-160; it, every operand of the operation that gives
it and every step on the way are at most 2**20000 in magnitude: the power a negative power is the reciprocal of, the
exponential sinh and cosh are made of, the points of a curve. What passes a limit is refused. `min`, `max`, `clip` and
`abs` choose among the ends of their operands and round nothing; `bezier` is always worked out on the grid.

The work a claim may take is counted alike as well (`Work`): what one reader takes the other takes.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from fractions import Fraction
from itertools import pairwise
from math import isqrt
from typing import Any

from .errors import Bad, Exhausted, Follows, Unknown
from .expression import Expression, Node

MAX_BITS = 2**17
GRID = 160  # an inexact value lies between two whole multiples of 2**-GRID
MAX_MAGNITUDE = 20_000  # bits before the point of an inexact value
MAX_WORK = 2**20  # about a second
SHARE = 2**12  # of a requirement's own constants, each: there may be a thousand requirements
OPERATION, FUNCTION, LONG_FUNCTION = 16, 32, 512
_ONE, _LARGEST, _PRECISION = 1 << GRID, 1 << GRID + MAX_MAGNITUDE, 2 * GRID + 64
_RISING = frozenset({"exp", "log", "asin", "atan", "sinh", "tanh"})
_FUNCTIONS = _RISING | {"acos", "sin", "cos", "tan", "cosh"}
Ends = tuple[Fraction, Fraction]
Grid = tuple[int, int]  # ends in units of 2**-GRID


class Work:
    """What working out a claim's constants may cost, so that hostile ones are refused in time.

    A number, a name or a result costs the square of the whole kilobits it takes. In `constant` an operation costs 16
    more; a function 32, and 512 times the square of the kilobits its operand or result takes on the grid; a curve the
    square of its points, times one more than the square of the kilobits its operands take there.
    """

    def __init__(self, left: int = MAX_WORK) -> None:
        self.left = left

    def take(self, cost: int) -> None:
        """Raises Exhausted when nothing is left."""
        self.left -= cost
        if self.left < 0:
            raise Exhausted("the numbers of this claim are too long to be worked out; shorten them")

    def spend(self, ends: Ends) -> None:
        low, high = ends
        exact = max(low.numerator.bit_length(), low.denominator.bit_length()) >> 10
        self.take((exact if low == high else _kilobits([ends])) ** 2)


def _kilobits(values: list[Ends]) -> int:
    """Of the largest value on the grid."""
    return (max(int(max(-a, b)).bit_length() for a, b in values) + GRID) >> 10


def constant(
    expression: Expression, values: Mapping[str, Ends], failed: Collection[str] | None = None, work: Work | None = None
) -> Ends:
    """Ends that enclose a constant expression's value, equal where it is exact.

    `values` are the enclosures of constants and gains. While a claim is read, `failed` are names whose fault is noted
    already and `work` is what may still be spent: where it is not given, a share of its own. Raises Bad for other
    names, and where there is no value.
    """
    if work is None and failed is not None:
        work = Work(SHARE)
    done: list[Ends] = []
    for n in expression.nodes:
        args = [done[a] for a in n.args]
        if n.op == "number":
            done.append((n.value or Fraction(0),) * 2)
        elif n.op == "name":
            if n.name not in values:
                if n.name in (failed or ()):
                    raise Follows
                raise Unknown(
                    f"{n.name} is not a constant or gain; only those may stand in a number", str(n.name), values
                )
            done.append(values[str(n.name)])
        elif n.op in ("time", "target", "next", "dt"):
            raise Bad(f"{n.op} cannot stand in a number")
        else:
            if work is not None:
                work.take(FUNCTION if n.op in _FUNCTIONS else OPERATION)
                if n.op == "bezier":
                    work.take(len(args) ** 2 * (1 + _kilobits(args) ** 2))
            done.append(_operation(n, args))
            if work is not None and n.op in _FUNCTIONS:
                work.take(LONG_FUNCTION * _kilobits([*args, done[-1]]) ** 2)
        if work is not None:
            work.spend(done[-1])
    return done[-1]


def check_constant_parts(expression: Expression, work: Work | None = None) -> None:
    """Raises Bad where a part made of numbers alone divides by zero, or is too long to be held exactly.

    Where `work` is not given, a share of its own may be spent.
    """
    work = work or Work(SHARE)
    known: list[Fraction | None] = []
    for n in expression.nodes:
        operands = [known[a] for a in n.args]
        numbers = [q for q in operands if q is not None]
        if n.op == "number":
            known.append(n.value)
        else:
            known.append(rational(n, numbers) if operands and len(numbers) == len(operands) else None)
        exact = known[-1]
        if exact is not None:
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
    on_grid = [_held((_down(a), -_down(-b))) for a, b in args]
    by_balls = node.op in _FUNCTIONS or node.op == "pi"
    least, most = _function(node.op, on_grid) if by_balls else _algebraic(node, on_grid)
    return Fraction(least, _ONE), Fraction(most, _ONE)


def _down(q: Fraction) -> int:
    return (q.numerator << GRID) // q.denominator


def _held(x: Grid) -> Grid:
    if x[0] < -_LARGEST or x[1] > _LARGEST:
        raise Bad(f"a value beyond 2**{MAX_MAGNITUDE} that is not exact")
    return x


def _algebraic(node: Node, x: list[Grid]) -> Grid:
    """Rational operations and roots, rounded outward to the grid. Raises Bad where undefined or too large."""
    match node.op:
        case "add":
            return _held((x[0][0] + x[1][0], x[0][1] + x[1][1]))
        case "sub":
            return _held((x[0][0] - x[1][1], x[0][1] - x[1][0]))
        case "neg":
            return -x[0][1], -x[0][0]
        case "mul":
            products = [a * b for a in x[0] for b in x[1]]
            return _held((min(products) >> GRID, -(-max(products) >> GRID)))
        case "div":
            return _quotient(x[0], x[1])
        case "sqrt":
            return _grid_root(x[0])
        case "power":
            p = node.value or Fraction(0)
            base = _grid_root(x[0]) if p.denominator == 2 else x[0]
            raised = _raised(base, abs(int(p * p.denominator)))
            return raised if p >= 0 else _quotient((_ONE, _ONE), raised)
    points = x[1:]  # bezier, by de Casteljau's scheme
    while len(points) > 1:
        points = [_along(x[0], a, b) for a, b in pairwise(points)]
    return points[0]


def _along(s: Grid, a: Grid, b: Grid) -> Grid:
    """a + s*(b - a)"""
    step = _algebraic(Node("sub"), [b, a])
    return _algebraic(Node("add"), [a, _algebraic(Node("mul"), [s, step])])


def _quotient(a: Grid, b: Grid) -> Grid:
    if b[0] <= 0 <= b[1]:
        raise Bad(f"division by what {GRID} bits cannot tell from zero")
    quotients = [((p << GRID) // q, -((-p << GRID) // q)) for p in a for q in b]
    return _held((min(q[0] for q in quotients), max(q[1] for q in quotients)))


def _grid_root(a: Grid) -> Grid:
    if a[0] < 0:
        raise Bad(f"root of what {GRID} bits cannot tell from a negative number")
    square = a[1] << GRID
    high = isqrt(square)
    return isqrt(a[0] << GRID), high + (high * high < square)


def _raised(a: Grid, n: int) -> Grid:
    if n == 0:
        return _ONE, _ONE
    low, high = a
    if n % 2 == 0:
        low, high = (0 if low <= 0 <= high else min(abs(low), abs(high))), max(abs(low), abs(high))
    if (max(abs(low), abs(high)).bit_length() - GRID - 1) * n > MAX_MAGNITUDE:  # before it is worked out
        raise Bad(f"a value beyond 2**{MAX_MAGNITUDE} that is not exact")
    shift = GRID * (n - 1)
    return _held((low**n >> shift, -(-(high**n) >> shift)))


def _function(op: str, x: list[Grid]) -> Grid:
    """A function by ball arithmetic at the ends of its operand, rounded outward to the grid. Raises Bad."""
    import flint  # heavy, and only for irrational constants

    low, high = x[0] if x else (0, 0)
    size = max(abs(low), abs(high))
    extra = max(0, size.bit_length() - GRID)
    if op in ("sinh", "cosh"):
        _function("exp", [(size, size)])
    if op in ("exp", "sinh", "cosh"):
        low, high = (max(end, -_ONE * GRID) for end in (low, high)) if op == "exp" else (low, high)
        if high >> GRID > MAX_MAGNITUDE:  # far above the limit: not worked out
            raise Bad(f"{op}: a value beyond 2**{MAX_MAGNITUDE} that is not exact")
        extra = 3 * (max(abs(low), abs(high)) >> GRID) // 2  # the result has as many more bits as the operand is large
    with flint.ctx.workprec(_PRECISION + extra):
        if op == "pi":
            return _rounded(flint.arb.pi())
        if op in _RISING:
            least, most = _rounded(_at(low, op))[0], _rounded(_at(high, op))[1]
            return (max(least, -_ONE), min(most, _ONE)) if op == "tanh" else (least, most)
        if op == "acos":
            return _rounded(_at(high, op))[0], _rounded(_at(low, op))[1]
        if op == "cosh":
            least = 0 if low <= 0 <= high else min(abs(low), abs(high))
            return _rounded(_at(least, op))[0], _rounded(_at(size, op))[1]
        if op == "tan":
            turns = [_turn(end, Fraction(1, 2)) for end in (low, high)]
            if turns[0][0] != turns[1][1]:
                raise Bad(f"tan: a pole lies where {GRID} bits cannot tell it from the operand")
            return _rounded(_at(low, op))[0], _rounded(_at(high, op))[1]
        return _wave(op, low, high)


def _wave(op: str, low: int, high: int) -> Grid:
    """Sine or cosine: its values at the ends, and 1 or -1 where a top or a bottom may lie between."""
    if high - low >= 7 * _ONE:
        return -_ONE, _ONE
    ends = [_rounded(_at(end, op)) for end in (low, high)]
    a, b = min(e[0] for e in ends), max(e[1] for e in ends)
    shift = Fraction(0 if op == "cos" else -1, 2)  # tops and bottoms in turn, at whole half turns or midway
    for k in range(_turn(low, shift)[0] + 1, _turn(high, shift)[1] + 1):
        a, b = (a, _ONE) if k % 2 == 0 else (-_ONE, b)
    return max(a, -_ONE), min(b, _ONE)


def _turn(end: int, shift: Fraction) -> Grid:
    """Least and greatest possible whole part of end/pi + shift: one whole number, or two where it is close."""
    import flint

    turned = flint.arb((end, -GRID)) / flint.arb.pi() + flint.arb(flint.fmpq(shift.numerator, shift.denominator))
    return int(turned.lower().floor().fmpz()), int(turned.upper().floor().fmpz())


def _at(end: int, op: str) -> Any:
    import flint

    return getattr(flint.arb((end, -GRID)), op)()


def _rounded(ball: Any) -> Grid:
    if not ball.is_finite():
        raise Bad(f"a function without a value here, or one that {GRID} bits cannot tell from that")
    return _held((_floor(ball.lower()), -_floor(-ball.upper())))


def _floor(x: Any) -> int:
    """An exact ball times 2**GRID, rounded down."""
    mantissa, exponent = (int(part) for part in x.man_exp())
    shift = exponent + GRID
    return mantissa << shift if shift >= 0 else mantissa >> -shift
