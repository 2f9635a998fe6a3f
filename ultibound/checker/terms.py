"""Expressions as a flat list of terms, each different one once."""

from __future__ import annotations

from fractions import Fraction

from .grammar import Node, Refused, exact, powered

DEEPEST, MOST_PAIRS, MOST_ADDENDS = 40, 10_000, 5_000
FOLDED = frozenset(["add", "sub", "mul", "div", "neg", "sqrt", "abs", "min", "max"])
Term = tuple[str, tuple[int, ...], Fraction | str | None]


class Terms:
    """Terms (op, arguments, payload); arguments are ranks of earlier terms, rationals are folded exactly."""

    def __init__(self) -> None:
        self.all: list[Term] = []
        self.rank: dict[Term, int] = {}
        self.last: tuple[int, list[int]] = -1, []  # asked about: its terms, which stay what they are

    def put(self, op: str, args: tuple[int, ...] = (), payload: Fraction | str | None = None) -> int:
        if args and all(self.all[a][0] == "number" for a in args):
            folded = fold(op, [q for a in args if isinstance(q := self.all[a][2], Fraction)])
            if folded is not None:
                op, args, payload = "number", (), folded
        if op == "sub" and args[0] == args[1]:  # nothing, where it is defined
            op, args = "mul", (self.put("number", (), Fraction(0)), args[0])
        term = (op, args, payload)
        rank = self.rank.setdefault(term, len(self.all))
        if rank == len(self.all):
            self.all.append(term)
        return rank

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

    def count(self, root: int) -> int:
        """How many addends a term has, each as often as it is added."""
        found: dict[int, int] = {}
        for k in self.below(root):
            op, args, _ = self.all[k]
            found[k] = sum(found[a] for a in args) if op in ("add", "sub", "neg") else 1
        return found[root]

    def difference(self, a: int, b: int, deep: int = 0) -> int:
        """a − b without the terms and factors both have: proofs/split.md (2)."""
        if self.count(a) + self.count(b) > MOST_ADDENDS:
            return self.put("sub", (a, b))
        net: dict[int, int] = {}
        met: list[set[int]] = []
        for side, root in ((1, a), (-1, b)):
            met.append({k for _, k in self.addends(root)})
            for sign, k in self.addends(root):
                net[k] = net.get(k, 0) + side * sign
        left = [k for k, n in net.items() for _ in range(n)]
        right = [k for k, n in net.items() for _ in range(-n)]
        few = deep < DEEPEST and len(left) * len(right) < MOST_PAIRS
        none = self.put("number", (), Fraction(0))
        total = none
        for k in sorted(met[0] ^ met[1]):  # what one side alone adds and takes away has to be defined all the same
            if not net[k]:
                total = self.put("add", (total, self.put("mul", (none, k))))
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

    def factor(self, root: int, name: str) -> int | None:
        """What a variable is multiplied by in a term; None where it is no factor of it (sensitivity-gain.md (2))."""
        found: dict[int, int | None] = {}
        for k in self.below(root):
            op, args, payload = self.all[k]
            parts, rest = [found[a] for a in args], None
            if op == "variable" and payload == name:
                rest = self.put("number", (), Fraction(1))
            elif op == "mul" and parts[0] is not None:
                rest = self.put("mul", (parts[0], args[1]))
            elif op == "mul" and parts[1] is not None:
                rest = self.put("mul", (args[0], parts[1]))
            elif (op == "div" and parts[0] is not None) or (op == "neg" and parts[0] is not None):
                rest = self.put(op, (parts[0], *args[1:]))
            elif op in ("add", "sub") and parts[0] is not None and parts[1] is not None:
                rest = self.put(op, (parts[0], parts[1]))
            found[k] = rest
        return found[root]

    def below(self, root: int) -> list[int]:
        """Every term the root is built from, in order, the root last."""
        if self.last[0] != root:
            marked, waiting = {root}, [root]
            while waiting:
                fresh = set(self.all[waiting.pop()][1]) - marked
                marked |= fresh
                waiting += fresh
            self.last = root, sorted(marked)
        return self.last[1]

    def variables(self, root: int) -> list[str]:
        return sorted({str(self.all[k][2]) for k in self.below(root) if self.all[k][0] == "variable"})


def fold(op: str, operands: list[Fraction]) -> Fraction | None:
    """The rational an operation on rationals gives; None leaves it to interval arithmetic."""
    try:
        return exact(Node(op), operands) if op in FOLDED else None
    except Refused:  # too long to be held exactly, or not defined
        return None
