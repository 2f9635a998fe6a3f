"""Expressions as one flat, shared graph of gates."""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import dataclass
from fractions import Fraction

from .constants import rational
from .errors import Bad
from .expression import Node

MAX_CANCELLED, MAX_PAIRS = 40, 10_000  # products within products that are told apart, and pairs of them in a sum
MAX_ADDENDS = 5_000  # of two sums whose common terms are looked for
FOLDED = frozenset({"add", "sub", "mul", "div", "neg", "sqrt", "abs", "min", "max"})


@dataclass(frozen=True, slots=True)
class Gate:
    """One operation; `args` are numbers of earlier gates."""

    op: str
    args: tuple[int, ...] = ()
    value: Fraction | None = None
    name: str = ""


class Graph:
    """Gates in order of definition, each different one once; rational operands are folded exactly."""

    def __init__(self) -> None:
        self.gates: list[Gate] = []
        self._number: dict[Hashable, int] = {}  # by operation and arguments, a value as whole numbers: fast to hash

    def add(self, op: str, *args: int, value: Fraction | None = None, name: str = "") -> int:
        if op == "sub" and args[0] == args[1] and self.gates[args[0]].op != "number":
            op, args = "mul", (self.number(0), args[0])  # nothing, where it is defined
        folded = self._folded(op, args)
        if folded is not None:
            op, args, value = "number", (), folded
        key = op, args, name, value if value is None else value.as_integer_ratio()
        number = self._number.get(key)
        if number is None:
            number = self._number[key] = len(self.gates)
            self.gates.append(Gate(op, args, value, name))
        return number

    def number(self, value: Fraction | int) -> int:
        return self.add("number", value=Fraction(value))

    def power(self, base: int, exponent: Fraction) -> int:
        """base**exponent for integers and half-integers, by roots, products and reciprocals."""
        if exponent.denominator == 2:
            return self.power(self.add("sqrt", base), exponent * 2)
        if exponent < 0:
            return self.add("div", self.number(1), self.power(base, -exponent))
        if exponent == 0:  # 1, where the base is defined: its own expression stays in the graph
            one, nothing = self.number(1), self.number(0)
            return one if self.gates[base].op == "number" else self.add("add", one, self.add("mul", nothing, base))
        known = self.gates[base].value if self.gates[base].op == "number" else None
        if known is not None:
            try:
                return self.number(rational(Node("power", value=exponent), [known]) or 0)
            except Bad:
                pass
        return base if exponent == 1 else self.add("power", base, value=exponent)

    def _folded(self, op: str, args: tuple[int, ...]) -> Fraction | None:
        operands = [q for a in args if self.gates[a].op == "number" and (q := self.gates[a].value) is not None]
        if not args or len(operands) < len(args) or op not in FOLDED:
            return None
        try:
            return rational(Node(op), operands)
        except Bad:  # too long to be held exactly, or not defined: left to interval arithmetic
            return None

    def difference(self, a: int, b: int, depth: int = 0) -> int:
        """a − b, an identity wherever both are defined: common terms cancel, common factors are taken out."""
        if self._addends(a) + self._addends(b) > MAX_ADDENDS:
            return self.add("sub", a, b)
        net, other = self._sum(a), self._sum(b)
        alone = sorted(set(net) ^ set(other))
        for gate, count in other.items():
            net[gate] = net.get(gate, 0) - count
        plus = [k for k, n in net.items() if n > 0 for _ in range(n)]
        minus = [k for k, n in net.items() if n < 0 for _ in range(-n)]
        few = depth < MAX_CANCELLED and len(plus) * len(minus) < MAX_PAIRS
        total = self.number(0)
        for gate in alone:  # added and taken away within one side: nothing, where it is defined
            if not net[gate]:
                total = self.add("add", total, self.add("mul", self.number(0), gate))
        for gate in plus:
            partner = next((m for m in minus if few and self._shared(gate, m)), None)
            if partner is not None:
                minus.remove(partner)
                factor = min(self._shared(gate, partner))
                rest = self.difference(self._other(gate, factor), self._other(partner, factor), depth + 1)
                gate = self.add("mul", factor, rest)
            total = self.add("add", total, gate)
        for gate in minus:
            total = self.add("sub", total, gate)
        return total

    def _addends(self, root: int) -> int:
        """How many terms a sum has, repeated ones counted."""
        found: dict[int, int] = {}
        for k in self.reached((root,)):
            gate = self.gates[k]
            found[k] = sum(found[a] for a in gate.args) if gate.op in ("add", "sub", "neg") else 1
        return found[root]

    def _sum(self, root: int) -> dict[int, int]:
        """How often each addend stands in a sum, negative where it is taken away."""
        found: dict[int, int] = {}
        stack = [(root, 1)]
        while stack:
            k, sign = stack.pop()
            gate = self.gates[k]
            if gate.op in ("add", "sub"):
                stack += [(gate.args[0], sign), (gate.args[1], sign if gate.op == "add" else -sign)]
            elif gate.op == "neg":
                stack.append((gate.args[0], -sign))
            elif gate.op != "number" or gate.value != 0:
                found[k] = found.get(k, 0) + sign
        return found

    def _shared(self, a: int, b: int) -> set[int]:
        both = self.gates[a], self.gates[b]
        return set(both[0].args) & set(both[1].args) if both[0].op == both[1].op == "mul" else set()

    def _other(self, product: int, factor: int) -> int:
        first, second = self.gates[product].args
        return second if first == factor else first

    def factor(self, root: int, name: str) -> int | None:
        """What a gate is, divided by a variable that is seen to be a factor of it (sensitivity-gain.md); or None."""
        rest: dict[int, int | None] = {}
        for k in self.reached((root,)):
            gate = self.gates[k]
            first, second = ([rest[a] for a in gate.args] + [None, None])[:2]
            rest[k] = None
            if gate.op == "variable" and gate.name == name:
                rest[k] = self.number(1)
            elif gate.op in ("add", "sub") and first is not None and second is not None:
                rest[k] = self.add(gate.op, first, second)
            elif gate.op in ("mul", "div", "neg") and first is not None:
                rest[k] = self.add(gate.op, first, *gate.args[1:])
            elif gate.op == "mul" and second is not None:
                rest[k] = self.add("mul", gate.args[0], second)
        return rest[root]

    def reached(self, roots: tuple[int, ...]) -> list[int]:
        """Gates the roots are built from, in order."""
        seen: set[int] = set()
        stack = list(roots)
        while stack:
            k = stack.pop()
            if k not in seen:
                seen.add(k)
                stack.extend(self.gates[k].args)
        return sorted(seen)

    def variables(self, root: int) -> list[str]:
        """Names of the variables a gate depends on, sorted."""
        return sorted({self.gates[k].name for k in self.reached((root,)) if self.gates[k].op == "variable"})
