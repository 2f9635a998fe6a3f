"""What every section of a claim needs: faults noted with their place, names declared once, numbers, ranges."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from fractions import Fraction
from typing import Any, TypeVar

from .constants import Work, check_constant_parts, constant
from .errors import Bad, Follows, Problem, Unknown
from .expression import NAME, RESERVED, Expression, Node, Parser
from .model import Ends, Range
from .numbers import Spelled, exact_number

T = TypeVar("T")
SUGGESTIONS = 30  # faults of a file that name the nearest known name: each takes some milliseconds


class Fields:
    """Reads values of a claim and collects `problems` instead of stopping at the first."""

    def __init__(self) -> None:
        self.problems: list[Problem] = []
        self.values: dict[str, Ends] = {}
        self.declared: dict[str, str] = {}
        self.failed: set[str] = set()  # constants and gains without a value, their fault noted
        self.work = Work()
        self.told: set[str] = set()  # shared sections whose faults are told
        self.moving = False

    @contextmanager
    def at(self, place: str) -> Iterator[None]:
        """Notes a fault found inside and goes on after it."""
        try:
            yield
        except Bad as why:
            self.note(place, why)

    def note(self, place: str, why: Bad) -> None:
        if not isinstance(why, Follows):
            short = isinstance(why, Unknown) and len(self.problems) >= SUGGESTIONS
            self.problems.append(Problem(place, why.args[0] if short else str(why)))

    def attempt(self, place: str, action: Callable[[], T], otherwise: T) -> T:
        try:
            return action()
        except Bad as why:
            self.note(place, why)
            return otherwise

    def table(self, value: Any, place: str, allowed: tuple[str, ...] | None = None) -> dict[str, Any]:
        if not isinstance(value, dict):
            self.problems.append(Problem(place, f"{kind(value)} found, a table is expected"))
            return {}
        for key in value if allowed is not None else ():
            if key not in (allowed or ()):
                self.note(f"{place}.{key[:60]}".lstrip("."), Unknown("unknown key", key, allowed or ()))
        return {k: v for k, v in value.items() if allowed is None or k in allowed}

    def declare(self, name: str, section: str) -> None:
        if not NAME.match(name):
            raise Bad("not a name; names start with a letter and have at most 40 letters, digits or _")
        if name in RESERVED:
            raise Bad(f"{name} is a reserved word; choose another name")
        if name in self.declared:
            raise Bad(f"{name} is declared already in {self.declared[name]}; a name is declared once")
        self.declared[name] = section

    def exponent(self, e: Expression) -> Fraction:
        low, high = constant(e, self.values, self.failed, self.work)
        if low != high:
            raise Bad("an exponent must be an exact number")
        return low

    def parser(self, text: str, steps: bool = False) -> Parser:
        return Parser(text, self.exponent, steps, self.moving)

    def expression(self, value: Any) -> Expression:
        """An expression, or a number standing for one. Raises Bad."""
        if isinstance(value, bool) or not isinstance(value, (str, int)):
            raise Bad(f"{kind(value)} found, an expression in quotes or a number is expected")
        if not isinstance(value, str) or isinstance(value, Spelled):
            number = exact_number(str(value))
            self.work.spend((number, number))
            return Expression(str(value), (Node("number", (), number),))
        parser = self.parser(value)
        e = parser.expression()
        parser.end()
        check_constant_parts(e, self.work)
        return e

    def constant(self, value: Any) -> tuple[Expression, Ends]:
        e = self.expression(value)
        return e, constant(e, self.values, self.failed, self.work)

    def range(self, value: Any, strict: bool = False) -> Range:
        if not isinstance(value, list) or len(value) != 2:
            raise Bad(f"{kind(value)} found, [lower, upper] is expected")
        (low, a), (high, b) = self.constant(value[0]), self.constant(value[1])
        if a[0] > b[1] or (strict and a[0] >= b[1]):
            raise Bad(f"lower end {low.text[:40]} exceeds upper end {high.text[:40]}; swap them")
        if a[1] >= b[0] and (strict or (a[1] > b[0] and low.text.strip() != high.text.strip())):
            raise Bad(f"lower end {low.text[:40]} cannot be told from upper end {high.text[:40]}; write them apart")
        return Range(low, high)


def kind(value: Any) -> str:
    if value is None:
        return "nothing"
    if isinstance(value, Spelled) or (isinstance(value, int) and not isinstance(value, bool)):
        return f"the number {str(value)[:40]}"
    kinds = {bool: "true or false", str: "text", list: "a list", dict: "a table"}
    return kinds.get(type(value), f"a {type(value).__name__}")
