"""The claim's expressions with names resolved: a flat list of terms, each different one once."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise

from .grammar import Expression, Node, Refused, exact, powered
from .model import Stance, Statement

DEEPEST, MOST_PAIRS = 40, 10_000
FOLDED = frozenset(["add", "sub", "mul", "div", "neg", "sqrt", "abs", "min", "max"])
Term = tuple[str, tuple[int, ...], Fraction | str | None]


class Terms:
    """Terms (op, arguments, payload); arguments are ranks of earlier terms, rationals are folded exactly."""

    def __init__(self) -> None:
        self.all: list[Term] = []
        self.rank: dict[Term, int] = {}

    def put(self, op: str, args: tuple[int, ...] = (), payload: Fraction | str | None = None) -> int:
        if args and all(self.all[a][0] == "number" for a in args):
            folded = fold(op, [q for a in args if isinstance(q := self.all[a][2], Fraction)])
            if folded is not None:
                op, args, payload = "number", (), folded
        term = (op, args, payload)
        if term not in self.rank:
            self.rank[term] = len(self.all)
            self.all.append(term)
        return self.rank[term]

    def raised(self, base: int, p: Fraction) -> int:
        """Integer and half-integer powers by roots, repeated products and reciprocals."""
        if p.denominator == 2:
            return self.raised(self.put("sqrt", (base,)), 2 * p)
        if p < 0:
            return self.put("div", (self.put("number", (), Fraction(1)), self.raised(base, -p)))
        if p == 0:  # 1, where the base is defined: its own expression stays in the term
            one, none = (self.put("number", (), Fraction(n)) for n in (1, 0))
            return one if self.all[base][0] == "number" else self.put("add", (one, self.put("mul", (none, base))))
        known = self.all[base][2]
        if self.all[base][0] == "number" and isinstance(known, Fraction):
            try:
                return self.put("number", (), powered(known, p))
            except Refused:
                pass
        return base if p == 1 else self.put("power", (base,), p)

    def addends(self, root: int) -> list[tuple[int, int]]:
        """Signs and terms whose sum a term is."""
        found, waiting = [], [(1, root)]
        while waiting:
            sign, k = waiting.pop()
            op, args, payload = self.all[k]
            if op in ("add", "sub", "neg"):
                signs = {"add": (1, 1), "sub": (1, -1), "neg": (-1,)}[op]
                waiting += [(sign * s, a) for s, a in zip(signs, args, strict=True)]
            elif payload != 0:
                found.append((sign, k))
        return found

    def difference(self, a: int, b: int, deep: int = 0) -> int:
        """a − b without the terms and factors both have: proofs/split.md (2)."""
        net: dict[int, int] = {}
        for side, root in ((1, a), (-1, b)):
            for sign, k in self.addends(root):
                net[k] = net.get(k, 0) + side * sign
        left = [k for k, n in net.items() for _ in range(n)]
        right = [k for k, n in net.items() for _ in range(-n)]
        few = deep < DEEPEST and len(left) * len(right) < MOST_PAIRS
        total = self.put("number", (), Fraction(0))
        for k in left:
            for m in right if few else ():
                common = set(self.all[k][1]) & set(self.all[m][1])
                if self.all[k][0] == self.all[m][0] == "mul" and common:
                    factor = min(common)
                    rest = [next((x for x in self.all[t][1] if x != factor), factor) for t in (k, m)]
                    k = self.put("mul", (factor, self.difference(rest[0], rest[1], deep + 1)))
                    right.remove(m)
                    break
            total = self.put("add", (total, k))
        for m in right:
            total = self.put("sub", (total, m))
        return total

    def below(self, root: int) -> list[int]:
        """Every term the root is built from, in order, the root last."""
        marked = {root}
        for k in range(root, -1, -1):
            if k in marked:
                marked.update(self.all[k][1])
        return sorted(marked)

    def variables(self, root: int) -> list[str]:
        return sorted({str(self.all[k][2]) for k in self.below(root) if self.all[k][0] == "variable"})


def fold(op: str, operands: list[Fraction]) -> Fraction | None:
    """The rational an operation on rationals gives; None leaves it to interval arithmetic."""
    try:
        return exact(Node(op), operands) if op in FOLDED else None
    except Refused:  # too long to be held exactly, or not defined
        return None


class Names:
    """Meaning of names as ranks of terms. `bound` replaces names; `cut` is the name a derivative is taken by,
    whose term is wrapped in a `mark` at which the derivative stops (proofs/forms.md)."""

    def __init__(self, terms: Terms, statement: Statement, bound: dict[str, int], cut: str) -> None:
        stance: Stance = statement.stances[0]
        self.terms, self.statement, self.cut, self.rank = terms, statement, cut, dict(bound)
        if cut in bound:
            self.rank[cut] = terms.put("mark", (bound[cut],), cut)
        self.text: dict[str, Expression] = {**statement.constants, **statement.gains, **stance.define}
        for s in stance.states:
            self.text[f"target({s})"], self.text[f"next({s})"] = stance.target[s], stance.next[s]
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
            return self.expression(self.text[name])
        if name in self.library:
            axes = tuple(self.expression(e) for e in self.sources(name))
            return self.terms.put("reading", axes, name)
        return self.terms.put("variable", (), name)

    def expression(self, e: Expression) -> int:
        put, ranks = self.terms.put, list[int]()
        for node in e.nodes:
            args = tuple(ranks[a] for a in node.args)
            if node.op in ("name", "target", "next"):
                ranks.append(self.of(called(node.op, node.name)))
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


def called(op: str, name: str | None) -> str:
    return str(name) if op == "name" else f"{op}({name})"


def mentioned(e: Expression) -> list[str]:
    return [called(n.op, n.name) for n in e.nodes if n.op in ("name", "target", "next")]
