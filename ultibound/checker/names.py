"""The claim's expressions with names resolved, as terms."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from itertools import pairwise

from .calculus import Unprovable, derivative, hazards
from .grammar import Expression
from .model import Stance, Statement
from .terms import Terms

NAMED = ("name", "time", "target", "next")


class Names:
    """Meaning of names as ranks of terms. `bound` replaces names; `cut` is the name a derivative is taken by,
    whose term is wrapped in a `mark` at which the derivative stops (proofs/forms.md)."""

    def __init__(
        self,
        terms: Terms,
        statement: Statement,
        bound: dict[str, int],
        cut: str,
        landing: Callable[[Names, int], int] | None = None,
    ) -> None:
        """`landing` replaces time and continuous states by what they are at touchdown."""
        stance: Stance = statement.stances[0]
        self.landing = landing
        self.terms, self.statement, self.cut, self.rank = terms, statement, cut, dict(bound)
        self.open: set[str] = set()  # rates that are being worked out
        self.rated: dict[int, int] = {}  # what a time rate was asked of, and it
        if cut in bound:
            self.rank[cut] = terms.put("mark", (bound[cut],), cut)
        self.text: dict[str, Expression] = {**statement.constants, **statement.gains, **stance.define}
        for s in stance.states:
            self.text[f"target({s})"], self.text[f"next({s})"] = stance.target[s], stance.next[s]
        if stance.dynamics is not None:
            self.text |= {f"start({x})": e for x, e in stance.dynamics.start.items()}
            self.text |= {f"rate({x})": e for x, e in stance.dynamics.rate.items()}
        self.library = {c: k for k, library in enumerate(statement.libraries) for c in library.columns}

    def of(self, name: str) -> int:
        waiting = [name]
        while waiting:
            name = waiting[-1]
            missing = [n for e in self.sources(name) for n in mentioned(e) if n not in self.rank]
            if name not in self.rank and missing:
                waiting += missing
                continue
            if name not in self.rank:
                rank = self.term(name)
                self.rank[name] = self.terms.put("mark", (rank,), name) if name == self.cut else rank
            waiting.pop()
        return self.rank[name]

    def sources(self, name: str) -> tuple[Expression, ...]:
        if name in self.text:
            return (self.text[name],)
        return self.statement.libraries[self.library[name]].at if name in self.library else ()

    def term(self, name: str) -> int:
        if name in self.text:
            found = self.expression(self.text[name])
            return self.landing(self, found) if self.landing is not None and name.startswith("next(") else found
        if name in self.library:
            axes = tuple(self.expression(e) for e in self.sources(name))
            return self.terms.put("reading", axes, name)
        return self.terms.put("variable", (), name)

    def expression(self, e: Expression) -> int:
        put, ranks = self.terms.put, list[int]()
        for node in e.nodes:
            args = tuple(ranks[a] for a in node.args)
            if node.op in NAMED:
                ranks.append(self.of(called(node.op, node.name)))
            elif node.op == "dt":
                ranks.append(self.rate(args[0]))
            elif node.op == "power" and node.value is not None:
                ranks.append(self.terms.raised(args[0], node.value))
            elif node.op == "bezier":
                points = args[1:]
                while len(points) > 1:  # de Casteljau
                    points = tuple(
                        put("add", (a, put("mul", (args[0], put("sub", (b, a)))))) for a, b in pairwise(points)
                    )
                ranks.append(points[0])
            elif node.op == "clip":
                ranks.append(put("min", (put("max", args[:2]), args[2])))
            elif node.op in ("min", "max"):
                for a in args[1:]:
                    args = (put(node.op, (args[0], a)),)
                ranks.append(args[0])
            else:
                ranks.append(put(node.op, args, node.value))
        return ranks[-1]

    def rate(self, root: int) -> int:
        """The derivative by time within a stance, the continuous states following their rates: proofs/stance.md (1)."""
        put, met = self.terms.put, self.terms.variables(root)
        if any(n in self.statement.uncertain and self.statement.uncertain[n].within for n in met):
            raise Unprovable("a signal within the stance has no time rate")
        if any(n in self.statement.stances[0].define for n in met):
            raise Unprovable("a defined name that is set free has no time rate")
        rates = {put("variable", (), "t"): put("number", (), Fraction(1))} if "t" in met else {}
        for x in met:
            if f"rate({x})" in self.text:
                if f"rate({x})" in self.open:
                    raise Unprovable(f"the rate of {x} rests on itself")
                self.open.add(f"rate({x})")
                rates[put("variable", (), x)] = self.of(f"rate({x})")
                self.open.remove(f"rate({x})")
        found = derivative(self.terms, root, rates)
        total = put("number", (), Fraction(0)) if found is None else found
        known = hazards(self.terms, total)
        for hazard, k in hazards(self.terms, root).items():  # what is not defined has no rate either
            if hazard not in known:
                total = put("add", (total, put("mul", (put("number", (), Fraction(0)), k))))
        self.rated[root] = total
        return total


def called(op: str, name: str | None) -> str:
    return str(name) if op in ("name", "time") else f"{op}({name})"


def mentioned(e: Expression) -> list[str]:
    return [called(n.op, n.name) for n in e.nodes if n.op in NAMED]
