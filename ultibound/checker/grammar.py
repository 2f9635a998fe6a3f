"""Expressions of claims: a bounded parser into flat nodes, and the value of constant expressions."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from fractions import Fraction
from itertools import pairwise
from math import isqrt
from typing import cast

from .numerals import spelled
from .reals import Interval, Scaled, Undefined

LONGEST, DEEPEST, BITS, FOLDED, WORK = 10_000, 64, 160, 2**17, 2**20
UNARY = frozenset(["sqrt", "exp", "log", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh", "abs"])
ARGUMENTS = {**dict.fromkeys(UNARY, (1, 1)), "min": (2, 9999), "max": (2, 9999), "clip": (3, 3), "bezier": (2, 9999)}
FUNCTIONS = frozenset({*ARGUMENTS, "dt", "target"})
WORDS = "settles gain residual bound sharp_bound radius push steps sensitivity value always throughout next during"
RESERVED = FUNCTIONS | {"t", "pi", *WORDS.split()}
AT_ZERO = {
    **dict.fromkeys(("sin", "tan", "asin", "atan", "sinh", "tanh"), 0),
    **dict.fromkeys(("cos", "exp", "cosh"), 1),
}
NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,39}", re.ASCII)
TOKEN = re.compile(
    r"[ \t\r\n]+|(?P<number>[0-9][0-9A-Za-z_.]*(?:(?<=e)-[0-9]+)?)|(?P<name>[A-Za-z_][A-Za-z0-9_]*)"
    r"|(?P<mark>\*\*|<=|>=|[-+*/(),<>])",
    re.ASCII,
)
EASY = frozenset(["add", "sub", "mul", "div", "neg", "abs", "min", "max", "clip", "power", "sqrt", "pi"])
Ends = tuple[Fraction, Fraction]


class Refused(Exception):
    """A claim outside the format: the place, the rule and what was found, short and printable whatever was found."""

    def __str__(self) -> str:
        text = super().__str__()
        text = text if len(text) <= 400 else f"{text[:200]} … {text[-200:]}"
        return "".join(c if c.isprintable() else "\ufffd" for c in text)


class Known(dict[str, Ends]):
    """Values of constants and gains, and the work reading a claim may still take: none stalls the checker."""

    left = WORK

    def spend(self, q: Fraction, times: int = 1) -> None:
        self.take((max(q.numerator.bit_length(), q.denominator.bit_length()) >> 10) ** 2 * times)

    def take(self, work: int) -> None:
        self.left -= work
        if self.left < 0:
            raise Refused("the numbers of this claim are too long to be worked out; shorten them")


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


def tokens(text: str) -> list[str]:
    if len(text) > LONGEST:
        raise Refused(f"an expression of {len(text)} characters; at most {LONGEST}")
    found, at = [], 0
    while at < len(text):
        match = TOKEN.match(text, at)
        if match is None:
            raise Refused(f"{text[at : at + 20]!r} at character {at + 1}")
        if match.lastgroup:
            found.append(match[0])
        at = match.end()
    return found


class Parser:
    """Recursive descent with a depth count. `values` are the constants and gains an exponent may use."""

    def __init__(self, text: str, values: Mapping[str, Ends], steps: bool = False) -> None:
        self.text, self.values, self.steps = text, known(values), steps
        self.left, self.at, self.depth = tokens(text), 0, 0
        self.nodes: list[Node] = []

    def peek(self) -> str:
        return self.left[self.at] if self.at < len(self.left) else ""

    def take(self, wanted: str = "") -> str:
        token = self.peek()
        if not token or (wanted and token != wanted):
            raise Refused(f"{wanted or 'more'!r} expected, {token or 'the end'!r:.40} found in {self.text[:60]!r}")
        self.at += 1
        return token

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
        start = len(self.nodes)
        root = self.signed()
        self.depth -= 1
        shifted = [Node(n.op, tuple(a - start for a in n.args), n.value, n.name) for n in self.nodes[start : root + 1]]
        del self.nodes[start:]
        low, high = constant(Expression(self.text, tuple(shifted)), self.values)
        if low != high or low.denominator > 2 or abs(low) > 64:
            raise Refused(f"an exponent in {self.text[:60]!r} is no integer or half-integer of at most 64")
        inside = " ".join(n.name for n in shifted if n.op == "name" and n.name)
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
            try:
                value = spelled(token)
            except ValueError as why:
                raise Refused(str(why)) from None
            if value is None:
                raise Refused(f"{token[:40]!r} is no number")
            self.values.spend(value)
            return self.put("number", (), value)
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
        if name == "target" or (name == "next" and self.steps):
            state = self.take()
            self.take(")")
            self.depth -= 1
            if not NAME.fullmatch(state):
                raise Refused(f"{name}({state[:40]}): a state is expected")
            return self.put(name, (), None, state)
        if name not in ARGUMENTS and name != "dt":
            raise Refused(f"{name[:60]!r} is no function{nearest(name, FUNCTIONS)}")
        args = [self.sum()]
        while self.peek() == ",":
            self.take()
            args.append(self.sum())
        self.take(")")
        self.depth -= 1
        least, most = ARGUMENTS.get(name, (1, 1))
        if not least <= len(args) <= most:
            raise Refused(f"{name} takes {least} argument(s), {len(args)} found")
        return self.put(name, tuple(args))

    def whole(self) -> Expression:
        """The expression up to where the parser stands."""
        return Expression(self.text, tuple(self.nodes))

    def ended(self) -> None:
        if self.at < len(self.left):
            raise Refused(f"{self.peek()[:40]!r} is left over in {self.text[:60]!r}")


def parse(text: str, values: Mapping[str, Ends], steps: bool = False) -> Expression:
    parser = Parser(text, values, steps)
    parser.sum()
    parser.ended()
    checked(parser.nodes, parser.values)
    return parser.whole()


def nearest(name: str, among: Iterable[str]) -> str:
    """A hint for messages: the name most like it, if any is."""
    close = get_close_matches(name[:40], sorted(among)[:2000], 1)
    return f"; did you mean {close[0]}?" if close else ""


def names(e: Expression) -> list[str]:
    """Declared names an expression uses."""
    return [str(n.name) for n in e.nodes if n.op == "name"]


def known(values: Mapping[str, Ends]) -> Known:
    return values if isinstance(values, Known) else Known(values)


def checked(nodes: list[Node], values: Known) -> None:
    """Refuses constant parts whose exact value is too long, or that divide by zero."""
    found: list[Fraction | None] = []
    for n in nodes:
        given = [q for a in n.args if (q := found[a]) is not None]
        found.append(n.value if n.op == "number" else None)
        if n.args and len(given) == len(n.args):
            found[-1] = value = exact(n, given)
            if value is not None:
                values.spend(value)


def exact(n: Node, given: list[Fraction]) -> Fraction | None:
    """Rational value of an operation on rationals, None where it is not rational."""
    a, b = given[0], given[-1]
    result = None
    if n.op == "add":
        result = a + b
    elif n.op == "sub":
        result = a - b
    elif n.op == "neg":
        result = -a
    elif n.op == "mul":
        result = a * b
    elif n.op == "div":
        if b == 0:
            raise Refused("division by zero")
        result = a / b
    elif n.op == "power" and n.value is not None:
        return powered(a, n.value)
    elif n.op == "sqrt":
        return root(a)
    elif n.op == "abs":
        result = abs(a)
    elif n.op == "min":
        result = min(given)
    elif n.op == "max":
        result = max(given)
    elif n.op == "clip":
        result = min(max(a, given[1]), b)
    if result is not None and max(result.numerator.bit_length(), result.denominator.bit_length()) > FOLDED:
        raise Refused("a constant part whose exact value is too long")
    return result


def powered(a: Fraction, p: Fraction) -> Fraction | None:
    if p.denominator == 2:
        half = root(a)
        return None if half is None else powered(half, 2 * p)
    if a == 0 and p < 0:
        raise Refused("division by zero")
    if max(a.numerator.bit_length(), a.denominator.bit_length()) * abs(p) > FOLDED:
        raise Refused("a constant part whose exact value is too long")
    return a ** int(p)


def root(a: Fraction) -> Fraction | None:
    if a < 0:
        raise Refused("root of a negative number")
    top, low = isqrt(a.numerator), isqrt(a.denominator)
    return Fraction(top, low) if top * top == a.numerator and low * low == a.denominator else None


def constant(e: Expression, values: Mapping[str, Ends]) -> Ends:
    """Enclosure of a constant expression, of equal ends where it is exact. Raises Refused where it has no value."""
    arithmetic, values = Scaled(BITS), known(values)
    done: list[Ends] = []
    for n in e.nodes:
        args = [done[a] for a in n.args]
        if n.op == "number" and n.value is not None:
            done.append((n.value, n.value))
        elif n.op == "name" and n.name in values:
            done.append(values[str(n.name)])
        elif n.op == "name" or n.op in ("time", "target", "next", "dt"):
            raise Refused(f"{n.name or n.op!r} is no constant")
        else:
            if n.op == "bezier":
                values.take(len(args) ** 2)
            done.append(evaluated(n, args, arithmetic))
            hard = 1 if n.op in EASY else 512  # a function takes about as long as so many products
            for q in (done[-1][1], *(e[1] for e in args if hard > 1)):
                values.spend(q, hard)
    return done[-1]


def enclosed(n: Node, x: list[Interval], a: Scaled) -> Interval:
    """An operation in outward-rounded arithmetic. Raises Undefined."""
    if n.op == "pi":
        return a.pi()
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
    operation = {"add": a.add, "sub": a.sub, "mul": a.mul, "div": a.div}.get(n.op) or getattr(a, n.op)
    return cast(Interval, operation(*x))


def evaluated(n: Node, args: list[Ends], a: Scaled) -> Ends:
    if args and all(low == high for low, high in args):
        value = exact(n, [low for low, _ in args])
        if value is None and args[0][0] == 0 and n.op in AT_ZERO:
            value = Fraction(AT_ZERO[n.op])
        if value is None and args[0][0] == 1 and n.op in ("log", "acos"):
            value = Fraction(0)
        if value is not None:
            return value, value
    if n.op == "abs":
        low, high = args[0]
        return (low, high) if low >= 0 else (-high, -low) if high <= 0 else (Fraction(0), max(-low, high))
    if n.op in ("min", "max"):
        pick = min if n.op == "min" else max
        return pick(e[0] for e in args), pick(e[1] for e in args)
    if n.op == "clip":
        (low, high), lower, upper = args
        return min(max(low, lower[0]), upper[0]), min(max(high, lower[1]), upper[1])
    try:
        return a.ends(a.between(*a.ends(enclosed(n, [a.between(*e) for e in args], a))))
    except Undefined as why:
        raise Refused(f"a constant expression: {why}") from None
