"""Expressions of claims: a bounded parser into flat nodes, and the value of constant expressions.

The rule, which the search's own reader keeps too. A rational value is exact, of at most 2**17 bits above the line and
as many below. Any other lies between two whole multiples of 2**-160; it, every operand of the operation that gives
it and every step on the way are at most 2**20000 in magnitude: the power a negative power is the reciprocal of, the
exponential sinh and cosh are made of, the points of a curve. What passes a limit is refused. `min`, `max`, `clip` and
`abs` choose among the ends of their operands and round nothing; `bezier` is always worked out on the grid.
"""

from __future__ import annotations

import operator
import re
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from math import isqrt
from typing import Any, cast

from .numerals import Number, spelled
from .numerals import Refused as Refused  # others take it from here
from .reals import Interval, Scaled, Undefined

LONGEST, DEEPEST, BITS, FOLDED = 10_000, 64, 160, 2**17
WORK = 2**20  # about a second
SHARE = 2**12  # of a requirement's own constants, each: there may be a thousand requirements
SMOOTH = ("sqrt", "exp", "log", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh")
ARGUMENTS = {
    **dict.fromkeys((*SMOOTH, "abs", "dt"), (1, 1)),
    **dict.fromkeys(("min", "max", "bezier"), (2, LONGEST)),
    "clip": (3, 3),
}
WORDS = "settles gain residual bound sharp_bound radius push steps sensitivity value always throughout next during"
RESERVED = {*ARGUMENTS, "target", "t", "pi", *WORDS.split()}
NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,39}", re.ASCII)
TOKEN = re.compile(
    r"[ \t\r\n]+|(?P<number>[0-9][0-9A-Za-z_.]*(?:(?<=e)-[0-9]+)?)|(?P<name>[A-Za-z_][A-Za-z0-9_]*)"
    r"|(?P<mark>\*\*|<=|>=|[-+*/(),<>])|(?P<odd>.)",
    re.ASCII | re.DOTALL,
)
CHOICES: dict[str, Callable[..., Fraction]] = {"min": min, "max": max, "clip": lambda x, a, b: min(max(x, a), b)}
RATIONAL: dict[str, Callable[..., Fraction]] = {
    **{name: getattr(operator, name) for name in ("add", "sub", "mul", "neg", "abs")},
    "div": operator.truediv,
    **CHOICES,
}
POINTS: dict[tuple[str, Fraction | int], int] = {  # where functions are rational
    **{(f, 0): 0 for f in ("sin", "tan", "asin", "atan", "sinh", "tanh")},
    **{(f, 0): 1 for f in ("cos", "exp", "cosh")},
    **{(f, 1): 0 for f in ("log", "acos")},
}
RISING = frozenset(["exp", "log", "sin", "tan", "asin", "atan", "sinh", "tanh"])  # sine and tangent up to 3/2
Ends = tuple[Fraction, Fraction]


@contextmanager
def at(place: str) -> Iterator[None]:
    """Puts the place before what is refused inside."""
    try:
        yield
    except Refused as why:
        raise Refused(f"{place}: {why}") from None


def size(q: Fraction) -> int:
    """Bits of the longer of numerator and denominator."""
    return max(q.numerator.bit_length(), q.denominator.bit_length())


def kilobits(ends: Ends) -> int:
    """Of a value on the grid."""
    return (int(max(-ends[0], ends[1])).bit_length() + BITS) >> 10


class Work:
    """What working out constants may still cost: none stalls the checker, and the search's reader counts alike.

    A number, a name or a result costs the square of the whole kilobits it takes. In `constant` an operation costs 16
    more; a function 32, and 512 times the square of the kilobits its operand or result takes on the grid; a curve the
    square of its points, times one more than the square of the kilobits its operands take there.
    """

    def __init__(self, left: int) -> None:
        self.left = left

    def take(self, cost: int) -> None:
        self.left -= cost
        if self.left < 0:
            raise Refused("the numbers of this claim are too long to be worked out; shorten them")

    def spend(self, ends: Ends) -> None:
        self.take((size(ends[0]) >> 10 if ends[0] == ends[1] else kilobits(ends)) ** 2)


@dataclass(frozen=True)
class Node:
    op: str
    args: tuple[int, ...] = ()
    value: Fraction | None = None
    name: str | None = None


@dataclass(frozen=True)
class Expression:
    text: str
    nodes: tuple[Node, ...]


class Known(dict[str, Ends]):
    """Values of constants and gains, the work their claim may still take, and expressions worked out already."""

    def __init__(self, values: Mapping[str, Ends]) -> None:
        super().__init__(values)
        self.work, self.arithmetic = Work(WORK), Scaled(BITS)
        self.done: dict[int, tuple[Expression, Ends]] = {}  # by identity, held so that it stays theirs


def known(values: Mapping[str, Ends]) -> Known:
    return values if isinstance(values, Known) else Known(values)


def number(text: str) -> Fraction:
    """The number a claim spells, exactly. Raises Refused."""
    value = spelled(text)
    if value is None:
        raise Refused(f"{text[:40]!r} is no number of the claim format")
    return value


class Parser:
    """Recursive descent with a depth count. `values` are the constants and gains an exponent may use."""

    def __init__(self, text: str, values: Mapping[str, Ends], steps: bool = False) -> None:
        if len(text) > LONGEST:
            raise Refused(f"an expression of {len(text)} characters; at most {LONGEST}")
        self.text, self.values, self.steps = text, known(values), steps
        self.left, self.at, self.depth = list[str](), 0, 0
        self.nodes: list[Node] = []
        for match in TOKEN.finditer(text):
            if match["odd"]:
                raise Refused(f"{match[0]!r} at character {match.start() + 1}")
            if match.lastgroup:
                self.left.append(match[0])

    def peek(self) -> str:
        return self.left[self.at] if self.at < len(self.left) else ""

    def take(self, wanted: str = "") -> str:
        token = self.peek()
        if not token or (wanted and token != wanted):
            raise Refused(f"{wanted or 'more'!r} expected, {token or 'the end'!r:.40} found in {self.text[:60]!r}")
        self.at += 1
        return token

    def word(self) -> str:
        name = self.take()
        if not NAME.fullmatch(name):
            raise Refused(f"{name[:60]!r}: a name is expected")
        return name

    def ended(self) -> None:
        if self.peek():
            raise Refused(f"{self.peek()[:40]!r} is left over in {self.text[:60]!r}")

    def expression(self, work: Work) -> Expression:
        """One expression from here on, its parts of numbers alone looked at."""
        self.nodes = []
        self.sum()
        checked(self.nodes, work)
        return Expression(self.text, tuple(self.nodes))

    def put(self, op: str, args: tuple[int, ...] = (), value: Fraction | None = None, name: str | None = None) -> int:
        self.nodes.append(Node(op, args, value, name))
        return len(self.nodes) - 1

    def deeper(self) -> None:
        self.depth += 1
        if self.depth > DEEPEST:
            raise Refused(f"nested more than {DEEPEST} deep")

    def sum(self) -> int:
        left = self.product()
        while self.peek() in ("+", "-"):
            op = "add" if self.take() == "+" else "sub"
            left = self.put(op, (left, self.product()))
        return left

    def product(self) -> int:
        left = self.signed()
        while self.peek() in ("*", "/"):
            op = "mul" if self.take() == "*" else "div"
            left = self.put(op, (left, self.signed()))
        return left

    def signed(self) -> int:
        if self.peek() != "-":
            return self.power()
        self.take()
        self.deeper()
        inner = self.signed()
        self.depth -= 1
        return self.put("neg", (inner,))

    def power(self) -> int:
        base = self.atom()
        if self.peek() != "**":
            return base
        self.take()
        self.deeper()
        kept, self.nodes = self.nodes, []
        self.signed()
        raised, self.nodes = tuple(self.nodes), kept
        self.depth -= 1
        low, high = constant(Expression(self.text, raised), self.values)
        if low != high or low.denominator > 2 or abs(low) > 64:
            raise Refused(f"an exponent in {self.text[:60]!r} is no integer or half-integer of at most 64")
        inside = " ".join(n.name for n in raised if n.op in ("name", "power") and n.name)  # of exponents within it too
        return self.put("power", (base,), low, inside or None)

    def atom(self) -> int:
        token = self.take()
        if token == "(":
            self.deeper()
            inner = self.sum()
            self.take(")")
            self.depth -= 1
            return inner
        if token[0].isdigit():
            return self.put("number", (), number(token))
        if token == "pi":
            return self.put("pi")
        if token == "t":
            return self.put("time", (), None, "t")
        if self.peek() == "(" and NAME.fullmatch(token):
            return self.call(token)
        if not NAME.fullmatch(token) or token in RESERVED:
            raise Refused(f"{token[:60]!r} cannot stand here")
        return self.put("name", (), None, token)

    def call(self, name: str) -> int:
        self.take("(")
        self.deeper()
        state, args = None, list[int]()
        if name == "target" or (name == "next" and self.steps):
            state = self.word()
        elif name in ARGUMENTS:
            args = [self.sum()]
            while self.peek() == ",":
                self.take()
                args.append(self.sum())
            least, most = ARGUMENTS[name]
            if not least <= len(args) <= most:
                raise Refused(f"{name} takes {least} argument(s), {len(args)} found")
        else:
            raise Refused(f"{name[:60]!r} is no function")
        self.take(")")
        self.depth -= 1
        return self.put(name, tuple(args), None, state)


def parse(value: Any, values: Mapping[str, Ends]) -> Expression:
    """An expression, or a number that stands for one."""
    given = known(values)
    if type(value) in (int, Number):
        q = number(str(value))
        given.work.spend((q, q))
        return Expression(str(value), (Node("number", (), q),))
    if type(value) is not str:
        raise Refused("an expression is expected")
    parser = Parser(value, given)
    e = parser.expression(given.work)
    parser.ended()
    return e


def checked(nodes: list[Node], work: Work) -> None:
    """Refuses constant parts whose exact value is too long, or that divide by zero."""
    found: list[Fraction | None] = []
    for n in nodes:
        given = [q for a in n.args if (q := found[a]) is not None]
        value = exact(n, given) if n.args and len(given) == len(n.args) else n.value if n.op == "number" else None
        if value is not None:
            work.spend((value, value))
        found.append(value)


def exact(n: Node, given: list[Fraction]) -> Fraction | None:
    """Rational value of an operation on rationals, None where it is not rational."""
    if n.op == "power" and n.value is not None:
        return powered(given[0], n.value)
    if n.op == "sqrt":
        return root(given[0])
    if n.op == "div" and given[1] == 0:
        raise Refused("division by zero")
    result = RATIONAL[n.op](*given) if n.op in RATIONAL else None
    if result is not None and size(result) > FOLDED:
        raise Refused("a constant part whose exact value is too long")
    return result


def powered(a: Fraction, p: Fraction) -> Fraction | None:
    if p.denominator == 2:
        half = root(a)
        return None if half is None else powered(half, 2 * p)
    if a == 0 and p < 0:
        raise Refused("division by zero")
    if size(a) * abs(p) > FOLDED:
        raise Refused("a constant part whose exact value is too long")
    return a ** int(p)


def root(a: Fraction) -> Fraction | None:
    if a < 0:
        raise Refused("root of a negative number")
    top, low = isqrt(a.numerator), isqrt(a.denominator)
    return Fraction(top, low) if top * top == a.numerator and low * low == a.denominator else None


def constant(e: Expression, values: Mapping[str, Ends], work: Work | None = None) -> Ends:
    """Enclosure of a constant expression, of equal ends where it is exact. Raises Refused where it has no value."""
    given = known(values)
    work = work or given.work
    if id(e) in given.done:
        return given.done[id(e)][1]
    found: list[Ends] = []
    for n in e.nodes:
        args = [found[a] for a in n.args]
        if n.op == "number" and n.value is not None:
            found.append((n.value, n.value))
        elif n.op == "name" and n.name in given:
            found.append(given[str(n.name)])
        elif n.op in ("name", "time", "target", "next", "dt"):
            raise Refused(f"{n.name or n.op!r} is no constant")
        else:
            hard = n.op in SMOOTH and n.op != "sqrt"
            work.take(32 if hard else 16)
            if n.op == "bezier":
                work.take(len(args) ** 2 * (1 + max(map(kilobits, args)) ** 2))
            found.append(evaluated(n, args, given.arithmetic))
            if hard:
                work.take(512 * max(map(kilobits, (*args, found[-1]))) ** 2)
        work.spend(found[-1])
    given.done[id(e)] = e, found[-1]
    return found[-1]


def evaluated(n: Node, args: list[Ends], a: Scaled) -> Ends:
    lows, highs = [e[0] for e in args], [e[1] for e in args]
    if args and lows == highs:
        value = exact(n, lows)
        if value is None and (n.op, lows[0]) in POINTS:
            value = Fraction(POINTS[n.op, lows[0]])
        if value is not None:
            return value, value
    if n.op == "abs":
        return max(lows[0], -highs[0], Fraction(0)), max(-lows[0], highs[0])
    if n.op in CHOICES:
        return CHOICES[n.op](*lows), CHOICES[n.op](*highs)
    try:
        x = [a.between(*e) for e in args]
        found = a.ends(enclosed(n, x, a))
    except Undefined as why:
        raise Refused(f"a constant expression: {why}") from None
    if n.op not in RISING or max(-lows[0], highs[0]) > Fraction(3, 2):
        return found
    low, high = (POINTS.get((n.op, end)) for end in a.ends(x[0]))  # rational there: not rounded outward
    return found[0] if low is None else Fraction(low), found[1] if high is None else Fraction(high)


def enclosed(n: Node, x: list[Interval], a: Scaled) -> Interval:
    """An operation in outward-rounded arithmetic. Raises Undefined."""
    if n.op == "power" and n.value is not None:
        base = a.sqrt(x[0]) if n.value.denominator == 2 else x[0]
        p = int(n.value * n.value.denominator)
        raised = a.power(base, abs(p))
        return raised if p >= 0 else a.div(a.number(Fraction(1)), raised)
    if n.op == "bezier":
        points = x[1:]
        while len(points) > 1:  # de Casteljau
            points = [a.add(p, a.mul(x[0], a.sub(q, p))) for p, q in pairwise(points)]
        return points[0]
    return cast(Interval, getattr(a, n.op)(*x))
