"""Lines about stances that follow one another, in the making (proofs/graph.md)."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from fractions import Fraction
from typing import Any

from ..checker.graph import across, largest, of_part
from ..checker.jacobians import OF_COMPARISON, OF_ROUTE
from ..checker.matrices import Leaf, Matrix, Metric
from ..checker.rules import Proof, Rejected
from ..checker.several import moved, movements
from ..checker.theorems import Variant
from .lines import Writer, upward
from .norms import NormWriter, solved, texts

Step = tuple[str, ...]  # from a stance to the next, or a way of several steps
Basis = tuple[Matrix, Matrix]
ROUNDS = 60  # of choosing, for each stance, the step before it that asks for most
LARGEST = 40  # rows of all bases together, up to which a comparison is solved exactly


class StanceWriter(NormWriter):
    """Lines about one stance (or, with no name, about all of them) of one proof."""

    def __init__(self, proof: Proof, raw: list[dict[str, Any]], part: str) -> None:
        self.proof, self.raw, self.part, self.flow = proof, raw, part, None
        self.derivation = of_part(proof.graph, part)


class StepWriter(StanceWriter):
    """Lines about the step from a stance to the one that follows, or about several."""

    def __init__(self, before: StanceWriter, part: str, norm: int) -> None:
        """`norm`: the line of the metric of the stance that follows last."""
        super().__init__(before.proof, before.raw, part)
        self.flow, self.norm = before.flow, norm

    def rests(self, proves: str, on: int) -> list[int]:
        first, *flow = super().rests(proves, on)
        return [first, self.norm, *flow]

    def ends(self, on: int) -> tuple[Metric, Metric]:
        before, after = super().ends(on)[0], self.proof.lines[self.norm].metric
        if after is None:
            raise ValueError("no metric")
        return before, after

    def seen(self, proves: str, on: int) -> tuple[Metric, Metric]:
        before, after = self.ends(on)
        return before, across(before, after, proves)

    def _measured(
        self, rule: str, proves: str, on: int, witness: dict[str, Any], concludes: dict[str, str], basis: Basis | None
    ) -> int:
        number = super()._measured(rule, proves, on, witness, concludes, None)
        self.proof.lines[number] = replace(self.proof.lines[number], metric=self.proof.lines[self.norm].metric)
        return number

    def table(
        self, proves: str, trees: Sequence[str], bits: int, on: int, leaves: list[Leaf], before: Basis, after: Basis
    ) -> int:
        """The largest entries of a matrix in a basis of each of the two stances."""
        found, _ = largest(leaves, (after[0], before[1]), proves)
        bases = {x: {"rows": texts(y[0]), "inverse": texts(y[1])} for x, y in (("before", before), ("after", after))}
        concludes = {k: upward(x) for k, x in found.items()}
        number = self._measured(
            "graph-entries", proves, on, {"bits": bits, "trees": list(trees), **bases}, concludes, None
        )
        self.proof.lines[number] = replace(self.proof.lines[number], bases=(before, after))
        return number


class GraphWriter(StanceWriter):
    """Lines about all stances together."""

    def adopt(self, other: Writer, variant: Variant, needed: set[int]) -> None:
        super().adopt(other, variant, needed)
        if other.proof.graph is not None:
            self.proof.graphs[variant] = other.proof.graph

    def bound(self, invariant: int, steps: Mapping[Step, int], route: str) -> int | None:
        """The bound by a route in the norm of each stance; None where the steps do not contract together."""
        pairs = {e: self.proof.lines[n].concludes for e, n in steps.items()}
        k = {e: ((x["gain"],),) for e, x in pairs.items()}
        p = least_above(k, {e: [Fraction(1)] for e in k}, 1)
        b = least_above(k, {e: [x["residual"]] for e, x in pairs.items()})
        if p is None or b is None:
            return None
        concludes = {s: upward(x[0]) for s, x in b.items()}
        name = f"bound[{route}]"
        return self._appended("graph-bound", name, [invariant, *steps.values()], {"p": p, "b": b}, concludes)

    def compared(
        self, invariant: int, tables: Mapping[Step, tuple[int, int]], moves: Sequence[int], bases: Mapping[str, Basis],
        route: str,
    ) -> int | None:  # fmt: skip
        """A bound for each state in each stance by comparison; None where the entries do not contract."""
        g, lines = self.proof.graph, self.proof.lines
        if g is None:
            raise ValueError("no stances")
        far, waiting = {}, iter(moves)
        for name, d in g.stances.items():
            far[name] = moved(d, [lines[next(waiting)] for _ in movements(d)])
        k: dict[Step, Matrix] = {}
        residual: dict[Step, list[Fraction]] = {}
        for e, (slopes, misses) in tables.items():
            s, t = e[0], e[-1]
            rows, m = bases[t][0], range(1, len(bases[s][0]) + 1)
            entries, missed = lines[slopes].concludes, lines[misses].concludes
            k[e] = tuple(tuple(entries[f"{i},{j}"] for j in m) for i in range(1, len(rows) + 1))
            residual[e] = [
                missed[f"{i},1"] + sum((abs(x) * y for x, y in zip(row, far[t], strict=True)), Fraction(0))
                for i, row in enumerate(rows, 1)
            ]
        if sum(len(rows) for rows, _ in bases.values()) > LARGEST:
            return None
        p = least_above(k, {e: [Fraction(1)] * len(x) for e, x in residual.items()}, 1)
        b = least_above(k, residual)
        if p is None or b is None:
            return None
        concludes = {}
        for name, d in g.stances.items():
            for s, row in zip(d.states, bases[name][1], strict=True):
                x = sum((abs(x) * y for x, y in zip(row, b[name], strict=True)), Fraction(0))
                concludes[f"{name}:{s}"] = upward(x)
        uses = [invariant, *(n for pair in tables.values() for n in pair), *moves]
        (name,) = (x for x, matrices in OF_COMPARISON.items() if matrices == OF_ROUTE[route])
        return self._appended("graph-componentwise", name, uses, {"p": p, "b": b}, concludes)

    def _appended(
        self, rule: str, proves: str, uses: list[int], vectors: Mapping[str, Mapping[str, Sequence[Fraction]]],
        concludes: dict[str, str],
    ) -> int | None:  # fmt: skip
        witness = {x: {s: [str(q) for q in v] for s, v in each.items()} for x, each in vectors.items()}
        try:
            return self.append(rule, proves, uses, witness, concludes)
        except Rejected:
            return None


def least_above(
    k: Mapping[Step, Matrix], residual: Mapping[Step, Sequence[Fraction]], least: int = 0
) -> dict[str, list[Fraction]] | None:
    """The least b >= 0 with K b + residual <= b of the next on every step, exactly; None where there is none.

    `least`: b of stances that no step leads to. Policies: each row of b is met with equality by one step, the one that
    asked for most so far (Howard 1960).
    """
    size = {s: len(x[0]) for (s, *_), x in k.items()}
    rank = {(s, i): n for n, (s, i) in enumerate((s, i) for s, m in size.items() for i in range(m))}
    chosen: dict[tuple[str, int], Step] = {}
    for step in k:
        for i in range(size[step[-1]]):
            chosen.setdefault((step[-1], i), step)
    b = [Fraction(0)] * len(rank)
    for _ in range(ROUNDS):
        table = [[Fraction(0)] * len(rank) for _ in rank]
        right = [Fraction(least)] * len(rank)
        for (t, i), step in chosen.items():
            for j, x in enumerate(k[step][i]):
                table[rank[t, i]][rank[step[0], j]] = x
            right[rank[t, i]] = residual[step][i]
        (found,) = solved(tuple(map(tuple, table)), right)
        if found is None or min(found) < 0:
            return None
        b, better = found, False
        for step, rows in k.items():
            s, t = step[0], step[-1]
            for i, row in enumerate(rows):
                asked = sum((x * b[rank[s, j]] for j, x in enumerate(row)), residual[step][i])
                now = chosen[t, i]
                if asked > b[rank[t, i]] and now != step:
                    held = sum((x * b[rank[now[0], j]] for j, x in enumerate(k[now][i])), residual[now][i])
                    if asked > held:
                        chosen[t, i], better = step, True
        if not better:
            return {s: [b[rank[s, i]] for i in range(m)] for s, m in size.items()}
    return None
