"""Rule attracting: a polytope that is mapped into itself, and that every trajectory comes near (proofs/polytope.md)."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import combinations, product
from math import comb
from operator import mul
from typing import Any

from .derive import Derivation, Domain
from .jacobians import Joined
from .matrices import MOST_ROWS, Leaf, Matrix, Whole, framed, image, whole
from .numerals import Rejected
from .several import gone_through, matrix, moved, movements, numbers
from .theorems import Line, Quantities, parted

MOST = 20_000  # choices of rows and sides
BOUNDS = ("bound[slope]", "componentwise")  # that two trajectories under the same values come closer: polytope.md (3)
RESTS = "attracting rests on the invariant set, then a bound, then how targets move"


@dataclass(frozen=True)
class Polytope:
    """{e : low_i <= (V e)_i <= high_i}, its vertices as whole numbers with a common denominator last."""

    rows: Matrix
    low: Sequence[Fraction]
    high: Sequence[Fraction]
    vertices: list[list[int]]

    def reach(self, s: int) -> Fraction:
        """The largest |e_s|."""
        return max(abs(Fraction(q[s], q[-1])) for q in self.vertices)


def attracting(d: Derivation, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities) -> Line:
    """proofs/polytope.md (2): every [J | m] over the set leads from the vertices into the polytope."""
    if len(d.states) < 2:
        raise Rejected("attracting: the claim has a single state")
    if d.statement.horizon != 1:
        raise Rejected("a polytope that attracts is known for single steps only")
    if any(q.within for q in d.statement.uncertain.values()):
        raise Rejected("a polytope that attracts is not known under signals within a stance")
    used, flows = parted(used)
    if proves != "attracting" or [x.proves for x in used[:1]] not in (["invariant"], ["absorbed"]):
        raise Rejected(RESTS)
    wanted = [("range", f"target-slope[{s},{h}]") for s, h in movements(d)]
    if len(used) < 2 or used[1].proves not in BOUNDS or [(x.rule, x.proves) for x in used[2:]] != wanted:
        raise Rejected(RESTS)
    domain, whole_set = used[0].domain, used[1].domain
    if domain is None or whole_set is None or whole_set not in (domain, domain.of):
        raise Rejected("the bound is of another set")
    rows = matrix(witness["rows"], "rows")
    low, high = (numbers(witness[key], key, len(rows)) for key in ("low", "high"))
    p = polytope(rows, low, high, len(d.states))
    for each in (domain, whole_set):
        if not all(contains(d, each, [Fraction(x, q[-1]) for x in q[:-1]]) for q in p.vertices):
            raise Rejected("a vertex is not shown to lie in the set")
    far, table = moved(d, used[2:]), Joined(d, "joined", domain, witness["bits"], flows)
    ends, count = Ends(p, far), 0
    for leaf in gone_through(d, table, "joined", flows, witness):
        count += 1
        if not ends.hold(leaf):
            raise Rejected("a leaf is not shown to lead into the polytope")
    if set(claimed) != set(d.states):
        raise Rejected("concludes: a bound for each state")
    for i, s in enumerate(d.states):
        if not claimed[s] >= p.reach(i):
            raise Rejected(f"{s}: less than the polytope reaches")
    return replace(Line("attracting", proves, (), claimed, domain, True), leaves=count)


def polytope(rows: Matrix, low: Sequence[Fraction], high: Sequence[Fraction], states: int) -> Polytope:
    """A polytope that is bounded and not empty: proofs/polytope.md (1). Raises Rejected."""
    if not states <= len(rows) <= MOST_ROWS or any(len(row) != states for row in rows):
        raise Rejected("rows: at least as many as states, with one number for each state")
    if comb(len(rows), states) * 2**states > MOST:
        raise Rejected(f"rows: more than {MOST} choices of as many as there are states, and sides")
    found = list(vertices(rows, low, high, states))
    if not found:
        raise Rejected("the polytope is empty, or unbounded")
    return Polytope(rows, low, high, found)


def vertices(rows: Matrix, low: Sequence[Fraction], high: Sequence[Fraction], states: int) -> Iterator[list[int]]:
    """All vertices: where independent rows, as many as states, are each at one end, and the others within."""
    (v, unit), (ends, below) = whole(rows), whole([low, high])
    for some in combinations(range(len(v)), states):
        determinant, adjugate = inverted([v[i] for i in some])
        if determinant == 0:
            continue
        for sides in product((0, 1), repeat=states):
            at = [ends[side][i] for i, side in zip(some, sides, strict=True)]
            q = [sum(map(mul, row, at)) for row in adjugate]  # V q = determinant * ends
            images = [sum(map(mul, row, q)) for row in v]
            if all(a * determinant <= y <= b * determinant for y, a, b in zip(images, *ends, strict=True)):
                yield [*(x * unit for x in q), determinant * below]


def inverted(m: Whole) -> tuple[int, Whole]:
    """D > 0 and D times the inverse, by elimination without fractions (every division is exact); D = 0 if singular."""
    n, before = len(m), 1
    rows = [[*row, *(int(i == j) for j in range(n))] for i, row in enumerate(m)]
    for k in range(n):
        at = next((i for i in range(k, n) if rows[i][k]), None)
        if at is None:
            return 0, []
        rows[k], rows[at] = rows[at], rows[k]
        pivot = rows[k]
        rows = [
            pivot if i == k else [(pivot[k] * x - row[k] * y) // before for x, y in zip(row, pivot, strict=True)]
            for i, row in enumerate(rows)
        ]
        before = pivot[k]
    sign = 1 if before > 0 else -1
    return sign * before, [[sign * x for x in row[n:]] for row in rows]


def contains(d: Derivation, domain: Domain, e: Sequence[Fraction]) -> bool:
    """Whether x*(h) + e lies in the set for every target."""
    if domain.ball:
        return domain.metric is not None and domain.metric.most(e) <= domain.radius
    for s, (low, high), x in zip(d.states, domain.targets, e, strict=True):
        _, inner = d.region(s)
        if not inner[0] - low <= x <= inner[1] - high:
            return False
    return True


class Ends:
    """What a step may lead to: V (J q + m) at every vertex, targets moved by so much within the ends."""

    def __init__(self, p: Polytope, far: Sequence[Fraction]) -> None:
        shifts = [sum((abs(x) * y for x, y in zip(row, far, strict=True)), Fraction(0)) for row in p.rows]
        inner = (
            [x + y for x, y in zip(p.low, shifts, strict=True)],
            [x - y for x, y in zip(p.high, shifts, strict=True)],
        )
        (self.low, self.high), self.unit = whole(inner)
        self.vertices = [(q, list(map(abs, q))) for q in p.vertices]
        self.frame = framed(p.rows, p.rows)  # nothing is multiplied from the right

    def hold(self, leaf: Leaf) -> bool:
        """Whether every matrix [J | m] of a leaf leads from all vertices to within the ends: proofs/polytope.md (2)."""
        found = image(self.frame, leaf, False)
        for i, (centre, rest) in enumerate(zip(found.centre, found.rest, strict=True)):
            slopes = [g[i] for g in found.slopes if any(g[i])]
            for q, size in self.vertices:
                y, off = sum(map(mul, centre, q)), sum(map(mul, rest, size))
                off += sum(abs(sum(map(mul, g, q))) for g in slopes)
                most = found.unit * q[-1]
                if not (self.low[i] * most <= (y - off) * self.unit and (y + off) * self.unit <= self.high[i] * most):
                    return False
        return True
