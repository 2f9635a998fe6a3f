"""Polytopes that are mapped into themselves, by their vertices: a ball, or one that every trajectory comes near.

Rules invariant-vertices and attracting (proofs/polytope.md).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from operator import mul
from typing import Any

from .derive import Derivation, Domain
from .flows import Flows
from .jacobians import Joined
from .matrices import MOST_ROWS, Leaf, Matrix, framed, image, whole
from .numerals import Rejected
from .several import gone_through, matrix, moved, movements, numbers
from .theorems import Line, Quantities, parted, require
from .vertices import vertices

BOUNDS = ("bound[slope]", "componentwise")  # that two trajectories under the same values come closer: polytope.md (3)
RESTS = "attracting rests on the invariant set, then a bound, then how targets move"


@dataclass(frozen=True)
class Polytope:
    """{e : low_i <= (V e)_i <= high_i}; vertices, its own or another's, as whole numbers, a common denominator last."""

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
    count = led(d, p, domain, moved(d, used[2:]), witness, flows)
    if set(claimed) != set(d.states):
        raise Rejected("concludes: a bound for each state")
    for i, s in enumerate(d.states):
        if not claimed[s] >= p.reach(i):
            raise Rejected(f"{s}: less than the polytope reaches")
    return replace(Line("attracting", proves, (), claimed, domain, True), leaves=count)


def kept(d: Derivation, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities) -> Line:
    """proofs/polytope.md (5): every [J | m] over the ball leads from its vertices into one that is no larger."""
    if d.statement.horizon != 1:
        raise Rejected("vertices of a ball are known to be kept over single steps only")
    if any(q.within for q in d.statement.uncertain.values()):
        raise Rejected("vertices of a ball are not known to be kept under signals within a stance")
    used, flows = parted(used)
    wanted = [("range", f"target-slope[{s},{h}]") for s, h in movements(d)]
    if proves != "invariant" or [x.proves for x in used[:1]] != ["ball"]:
        raise Rejected("invariant rests on the ball, then how targets move")
    require(proves, "invariant", used[1:], wanted)
    domain = used[0].domain
    if domain is None or domain.metric is None or domain.metric.kind == "ellipsoid":
        raise Rejected("the ball has no vertices")
    if not 0 <= claimed["bound"] <= domain.radius:
        raise Rejected("bound: more than the radius")
    rows, most = domain.metric.rows, len(domain.metric.rows)
    ball = polytope(rows, [-domain.radius] * most, [domain.radius] * most, len(d.states))
    inner = replace(ball, low=[-claimed["bound"]] * most, high=[claimed["bound"]] * most)
    leaves = led(d, inner, domain, moved(d, used[1:]), witness, flows)
    return replace(Line("invariant-vertices", proves, (), claimed, domain, True), leaves=leaves)


def led(
    d: Derivation, p: Polytope, domain: Domain, far: Sequence[Fraction], witness: dict[str, Any], flows: Flows | None
) -> int:
    """How many leaves there are, every one leading from all the vertices to within the ends."""
    table, ends, count = Joined(d, "joined", domain, witness["bits"], flows), Ends(p, far), 0
    for leaf in gone_through(d, table, "joined", flows, witness):
        count += 1
        if not ends.hold(leaf):
            raise Rejected("a leaf is not shown to lead into the polytope")
    return count


def polytope(rows: Matrix, low: Sequence[Fraction], high: Sequence[Fraction], states: int) -> Polytope:
    """A polytope that is bounded and not empty: proofs/polytope.md (1). Raises Rejected."""
    if not states <= len(rows) <= MOST_ROWS or any(len(row) != states for row in rows):
        raise Rejected("rows: at least as many as states, with one number for each state")
    (v, unit), ((least, most), below) = whole(rows), whole([low, high])
    found = [[*(x * unit for x in q), determinant * below] for *q, determinant in vertices(v, least, most, states)]
    if not found:
        raise Rejected("the polytope is empty, or unbounded")
    return Polytope(rows, low, high, found)


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
