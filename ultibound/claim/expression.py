"""The expression grammar: a bounded parser of its own, and flat results so that nothing later recurses."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from .errors import Bad, Unknown
from .numbers import exact_number

MAX_LENGTH = 10_000
MAX_DEPTH = 64
MAX_POWER = 64
SMOOTH = ("sqrt", "exp", "log", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh")
FUNCTIONS: dict[str, tuple[int, int | None]] = {
    **dict.fromkeys(SMOOTH, (1, 1)),
    "abs": (1, 1), "min": (2, None), "max": (2, None), "clip": (3, 3), "bezier": (2, None), "dt": (1, 1),
}  # fmt: skip
QUANTITIES = (
    "settles", "gain", "residual", "bound", "sharp_bound", "radius", "push", "steps", "sensitivity", "value",
    "always", "throughout",
)  # fmt: skip
RESERVED = frozenset((*FUNCTIONS, *QUANTITIES, "target", "t", "pi", "next", "during"))
NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,39}\Z")
_WORD = re.compile(r"[A-Za-z0-9_.]+")
_BLANK = " \t\r\n"
_SYMBOLS = ("**", "<=", ">=", "+", "-", "*", "/", "(", ")", ",", "<", ">")


@dataclass(frozen=True, slots=True)
class Node:
    """One operation; `args` are places of earlier nodes of the same expression."""

    op: str
    args: tuple[int, ...] = ()
    value: Fraction | None = None
    name: str | None = None


@dataclass(frozen=True, slots=True)
class Expression:
    """An expression as it was written, and its nodes with the root last."""

    text: str
    nodes: tuple[Node, ...]

    def names(self) -> list[str]:
        """Declared names it mentions, `t` and `target(s)` included in that spelling."""
        return [mention for n in self.nodes if (mention := _mention(n))]


def _mention(node: Node) -> str:
    if node.op == "target":
        return f"target({node.name})"
    return "t" if node.op == "time" else str(node.name) if node.op == "name" else ""


def tokenised(text: str) -> list[tuple[str, int]]:
    """Tokens with their positions; raises Bad at the first character that cannot stand."""
    if len(text) > MAX_LENGTH:
        raise Bad(f"{len(text)} characters; an expression has at most {MAX_LENGTH}, split it into definitions")
    found: list[tuple[str, int]] = []
    at = 0
    while at < len(text):
        if text[at] in _BLANK:
            at += 1
            continue
        token = next((s for s in _SYMBOLS if text.startswith(s, at)), "")
        if not token:
            word = _WORD.match(text, at)
            if word is None or not word[0].isascii():
                raise Bad(f"character {at + 1}: {text[at]!r} cannot stand in an expression")
            token = word[0]
            if token[0].isdigit() and token.endswith("e") and re.match(r"-[0-9]", text[at + len(token) :]):
                tail = _WORD.match(text, at + len(token) + 1)
                token += "-" + (tail[0] if tail else "")
        found.append((token, at + 1))
        at += len(token)
    return found


class Parser:
    """Recursive descent over tokens, nested at most 64 deep.

    `exponent` turns an expression into its exact value; `steps` allows next(s); `moving` allows t and dt(x).
    """

    def __init__(
        self, text: str, exponent: Callable[[Expression], Fraction], steps: bool = False, moving: bool = False
    ) -> None:
        self.text, self.exponent, self.steps, self.moving = text, exponent, steps, moving
        self._tokens = tokenised(text)
        self._at = self._depth = 0
        self._nodes: list[Node] = []

    def next_token(self) -> str:
        return self._tokens[self._at][0] if self._at < len(self._tokens) else ""

    def where(self) -> str:
        position = self._tokens[self._at][1] if self._at < len(self._tokens) else len(self.text) + 1
        return f"character {position}"

    def take(self) -> str:
        token = self.next_token()
        if not token:
            raise Bad(f"{self.where()}: the expression ends too early")
        self._at += 1
        return token

    def expect(self, wanted: str) -> None:
        if self.next_token() != wanted:
            raise Bad(f"{self.where()}: {wanted!r} is missing, {self.next_token()[:40] or 'the end'!r} found")
        self._at += 1

    def end(self) -> None:
        if self.next_token():
            raise Bad(f"{self.where()}: {self.next_token()[:40]!r} is left over; is an operator missing?")

    def expression(self) -> Expression:
        """One expression from here on."""
        self._nodes = []
        self._sum()
        return Expression(self.text, tuple(self._nodes))

    def word(self) -> str:
        token = self.take()
        if not NAME.match(token):
            raise Bad(f"{token[:60]!r} is not a name")
        return token

    def _add(self, op: str, *args: int, value: Fraction | None = None, name: str | None = None) -> int:
        self._nodes.append(Node(op, args, value, name))
        return len(self._nodes) - 1

    def _nest(self) -> None:
        self._depth += 1
        if self._depth > MAX_DEPTH:
            raise Bad(f"{self.where()}: nested more than {MAX_DEPTH} deep; split it into definitions")

    def _sum(self) -> int:
        left = self._product()
        while self.next_token() in ("+", "-"):
            op = {"+": "add", "-": "sub"}[self.take()]
            left = self._add(op, left, self._product())
        return left

    def _product(self) -> int:
        left = self._signed()
        while self.next_token() in ("*", "/"):
            op = {"*": "mul", "/": "div"}[self.take()]
            left = self._add(op, left, self._signed())
        return left

    def _signed(self) -> int:
        if self.next_token() != "-":
            return self._power()
        self.take()
        self._nest()
        operand = self._signed()
        self._depth -= 1
        return self._add("neg", operand)

    def _power(self) -> int:
        base = self._atom()
        if self.next_token() != "**":
            return base
        self.take()
        self._nest()
        first = len(self._nodes)
        self._signed()
        self._depth -= 1
        raised = [Node(n.op, tuple(a - first for a in n.args), n.value, n.name) for n in self._nodes[first:]]
        del self._nodes[first:]
        p = self.exponent(Expression(self.text, tuple(raised)))
        if p.denominator > 2 or abs(p) > MAX_POWER:
            raise Bad(f"{self.where()}: an exponent must be an integer or half-integer of at most {MAX_POWER}")
        inside = [n.name for n in raised if n.op in ("name", "power") and n.name]  # of exponents within it too
        return self._add("power", base, value=p, name=" ".join(inside) or None)

    def _atom(self) -> int:
        place = self.where()
        token = self.take()
        if token == "(":
            self._nest()
            inner = self._sum()
            self.expect(")")
            self._depth -= 1
            return inner
        if token[0].isdigit():
            return self._add("number", value=exact_number(token))
        if token == "pi":
            return self._add("pi")
        if token == "t":
            if not self.moving:
                raise Bad(f"{place}: t is the time within a stance and needs [dynamics]")
            return self._add("time", name="t")
        if self.next_token() == "(" and NAME.match(token):
            return self._call(token, place)
        if not NAME.match(token):
            raise Bad(f"{place}: {token[:60]!r} cannot stand here")
        if token in RESERVED:
            raise Bad(f"{place}: {token} is reserved; it cannot stand alone here")
        return self._add("name", name=token)

    def _call(self, name: str, place: str) -> int:
        self.expect("(")
        self._nest()
        if name == "target" or (name == "next" and self.steps):
            state = self.word()
            self.expect(")")
            self._depth -= 1
            return self._add(name, name=state)
        if name not in FUNCTIONS:
            raise Unknown(f"{place}: {name[:60]!r} is not a function", name, FUNCTIONS)
        if name == "dt" and not self.moving:
            raise Bad(f"{place}: dt(…) is a rate within a stance and needs [dynamics]")
        args = [self._sum()]
        while self.next_token() == ",":
            self.take()
            args.append(self._sum())
        self.expect(")")
        self._depth -= 1
        least, most = FUNCTIONS[name]
        if len(args) < least or (most is not None and len(args) > most):
            raise Bad(f"{place}: {name} takes {least}{'' if most else ' or more'} argument(s), {len(args)} found")
        return self._add(name, *args)
