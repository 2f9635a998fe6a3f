"""Expressions of a claim with every name resolved, as gates."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from fractions import Fraction
from itertools import pairwise

from .calculus import hazards, slope
from .errors import Bad
from .expression import Expression
from .graph import Graph
from .model import Claim, Stance

NAMED = ("name", "time", "target", "next")


class Scope:
    """What names mean while expressions become gates.

    `bound` replaces names by gates (a state by its target, a gain by a free variable); `cut` is the name a
    sensitivity is taken by: it is marked, so that the derivative stops there (proofs/forms.md, mark).
    """

    def __init__(
        self,
        graph: Graph,
        claim: Claim,
        stance: Stance,
        bound: Mapping[str, int] | None = None,
        cut: str = "",
        landing: Callable[[Scope, int], int] | None = None,
    ) -> None:
        """`landing` tells what a gate of the stance's time is at touchdown, where there are dynamics."""
        self._landing, self._open = landing, set[str]()
        self.rated: dict[int, int] = {}  # what a time rate was asked of, and it
        self.graph, self.claim, self.stance, self.cut = graph, claim, stance, cut
        self._known: dict[str, int] = dict(bound or {})
        if cut in self._known:
            self._known[cut] = graph.add("mark", self._known[cut], name=cut)
        self._texts: dict[str, Expression] = {**claim.constants, **claim.gains, **stance.define}
        self._texts |= {f"target({s})": e for s, e in stance.target.items()}
        self._texts |= {f"next({s})": e for s, e in stance.next.items()}
        if stance.dynamics is not None:
            self._texts |= {f"start({x})": e for x, e in stance.dynamics.start.items()}
            self._texts |= {f"rate({x})": e for x, e in stance.dynamics.rate.items()}
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
            gate = self._build(self._texts[name])
            return self._landing(self, gate) if self._landing is not None and name.startswith("next(") else gate
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
            elif node.op == "dt":
                done.append(self.rate(args[0]))
            elif node.op in NAMED:
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

    def at_touchdown(self, state: str) -> int:
        """The map of a state before time and continuous states are replaced."""
        return self.node(self.stance.next[state])

    def rate(self, root: int) -> int:
        """The derivative by time within a stance, the continuous states following their rates."""
        g = self.graph
        signals = [n for n in g.variables(root) if n in self.claim.uncertain and self.claim.uncertain[n].within]
        if signals:
            raise Bad(
                f"uncertain.{signals[0]}: a signal within the stance has no time rate; write dt of something else"
            )
        freed = [n for n in g.variables(root) if n in self.stance.define]
        if freed:
            raise Bad(f"over.{freed[0]}: a name that is set free has no time rate; free what stands beside the dt")
        seeds = {g.add("variable", name="t"): g.number(1)}
        for x in g.variables(root):
            rate = f"rate({x})"
            if rate in self._texts:
                if rate in self._open:
                    raise Bad(f"dynamics.{rate}: rests on itself")
                self._open.add(rate)
                seeds[g.add("variable", name=x)] = self.name(rate)
                self._open.discard(rate)
        found = slope(g, root, seeds)
        total = g.number(0) if found is None else found
        known = hazards(g, total)
        for hazard, k in hazards(g, root).items():  # what is not defined has no rate either
            if hazard not in known:
                total = g.add("add", total, g.add("mul", g.number(0), k))
        self.rated[root] = total
        return total

    def _bezier(self, s: int, points: list[int]) -> int:
        """De Casteljau's scheme, which is the Bernstein form."""
        g = self.graph
        while len(points) > 1:
            points = [g.add("add", a, g.add("mul", s, g.add("sub", b, a))) for a, b in pairwise(points)]
        return points[0]


def _full(op: str, name: str) -> str:
    return name if op in ("name", "time") else f"{op}({name})"


def _names(expression: Expression) -> list[str]:
    return [_full(n.op, n.name or "") for n in expression.nodes if n.op in NAMED]
