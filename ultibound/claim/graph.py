"""Expressions of a claim with every name resolved: one flat, shared graph of gates."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise

from .constants import rational
from .errors import Bad
from .expression import Expression, Node
from .model import Claim, Stance

MAX_CANCELLED, MAX_PAIRS = 40, 10_000  # products within products that are told apart, and pairs of them in a sum
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
        self._number: dict[Gate, int] = {}

    def add(self, op: str, *args: int, value: Fraction | None = None, name: str = "") -> int:
        gate = self._folded(op, args) or Gate(op, args, value, name)
        number = self._number.get(gate)
        if number is None:
            number = self._number[gate] = len(self.gates)
            self.gates.append(gate)
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

    def _folded(self, op: str, args: tuple[int, ...]) -> Gate | None:
        operands = [q for a in args if self.gates[a].op == "number" and (q := self.gates[a].value) is not None]
        if not args or len(operands) < len(args) or op not in FOLDED:
            return None
        try:
            value = rational(Node(op), operands)
        except Bad:  # too long to be held exactly, or not defined: left to interval arithmetic
            return None
        return None if value is None else Gate("number", value=value)

    def difference(self, a: int, b: int, depth: int = 0) -> int:
        """a − b, an identity wherever both are defined: common terms cancel, common factors are taken out."""
        net = self._sum(a)
        for gate, count in self._sum(b).items():
            net[gate] = net.get(gate, 0) - count
        plus = [k for k, n in net.items() if n > 0 for _ in range(n)]
        minus = [k for k, n in net.items() if n < 0 for _ in range(-n)]
        few = depth < MAX_CANCELLED and len(plus) * len(minus) < MAX_PAIRS
        total = self.number(0)
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


class Scope:
    """What names mean while expressions become gates.

    `bound` replaces names by gates (a state by its target, a gain by a free variable); `cut` is the name a
    sensitivity is taken by: it is marked, so that the derivative stops there (proofs/forms.md, mark).
    """

    def __init__(
        self, graph: Graph, claim: Claim, stance: Stance, bound: Mapping[str, int] | None = None, cut: str = ""
    ) -> None:
        self.graph, self.claim, self.stance, self.cut = graph, claim, stance, cut
        self._known: dict[str, int] = dict(bound or {})
        if cut in self._known:
            self._known[cut] = graph.add("mark", self._known[cut], name=cut)
        self._texts: dict[str, Expression] = {**claim.constants, **claim.gains, **stance.define}
        self._texts |= {f"target({s})": e for s, e in stance.target.items()}
        self._texts |= {f"next({s})": e for s, e in stance.next.items()}
        self._column = {c: k for k, lib in enumerate(claim.libraries) for c in lib.columns}

    def name(self, wanted: str) -> int:
        """The gate of a name, or of `target(s)` and `next(s)`; definitions first, without recursion."""
        stack = [wanted]
        while stack:
            top = stack[-1]
            open_names = [n for n in self._uses(top) if n not in self._known] if top not in self._known else []
            if open_names:
                stack.extend(open_names)
                continue
            stack.pop()
            if top not in self._known:
                gate = self._gate(top)
                self._known[top] = self.graph.add("mark", gate, name=top) if top == self.cut else gate
        return self._known[wanted]

    def node(self, expression: Expression) -> int:
        for n in _names(expression):
            self.name(n)
        return self._build(expression)

    def _uses(self, name: str) -> list[str]:
        if name in self._texts:
            return _names(self._texts[name])
        if name in self._column:
            return [n for e in self.claim.libraries[self._column[name]].at for n in _names(e)]
        return []

    def _gate(self, name: str) -> int:
        if name in self._texts:
            return self._build(self._texts[name])
        if name in self._column:
            number = self._column[name]
            axes = [self._build(e) for e in self.claim.libraries[number].at]
            return self.graph.add("reading", *axes, value=Fraction(number), name=name)
        return self.graph.add("variable", name=name)

    def _build(self, expression: Expression) -> int:
        g, done = self.graph, list[int]()
        for node in expression.nodes:
            args = [done[a] for a in node.args]
            if node.op == "number":
                done.append(g.number(node.value or 0))
            elif node.op in ("name", "target", "next"):
                done.append(self._known[_full(node.op, node.name or "")])
            elif node.op == "power":
                done.append(g.power(args[0], node.value or Fraction(0)))
            elif node.op == "bezier":
                done.append(self._bezier(args[0], args[1:]))
            elif node.op == "clip":
                done.append(g.add("min", g.add("max", args[0], args[1]), args[2]))
            elif node.op in ("min", "max"):
                total = args[0]
                for a in args[1:]:
                    total = g.add(node.op, total, a)
                done.append(total)
            else:
                done.append(g.add(node.op, *args))
        return done[-1]

    def _bezier(self, s: int, points: list[int]) -> int:
        """De Casteljau's scheme, which is the Bernstein form."""
        g = self.graph
        while len(points) > 1:
            points = [g.add("add", a, g.add("mul", s, g.add("sub", b, a))) for a, b in pairwise(points)]
        return points[0]


def _full(op: str, name: str) -> str:
    return name if op == "name" else f"{op}({name})"


def _names(expression: Expression) -> list[str]:
    return [_full(n.op, n.name or "") for n in expression.nodes if n.op in ("name", "target", "next")]
