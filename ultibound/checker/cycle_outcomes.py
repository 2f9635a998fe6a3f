"""What closed walks of stances say of bounds and gains: lower ends, and what is refuted (proofs/graph.md (8), (9))."""

from __future__ import annotations

from fractions import Fraction
from typing import TYPE_CHECKING

from .results import greater

if TYPE_CHECKING:
    from .graph_outcomes import GraphResults
    from .stance_outcomes import StanceResults


def farthest(found: GraphResults, stance: str) -> dict[str, Fraction | None]:
    """How far orbits surely take each state in a stance, again and again: proofs/graph.md (8)."""
    rules = ("graph-orbit", "orbit"), ("graph-periodic", "periodic")
    lasting = all(x.lasting for x in found.each.values())
    lines = [x for each in rules for x in found.lines(*each) if lasting and x[1].domains == found.sets()]
    return {
        s: found.surely((x.concludes[f"{stance}:{s}"], n) for n, x in lines if f"{stance}:{s}" in x.concludes)
        for s in found.states
    }


def taken_in_norm(x: StanceResults) -> Fraction | None:
    """How large orbits surely make the error in the norm of a stance: ‖e‖ is at least |e_s|/σ_s."""
    least: Fraction | None = None
    for i, s in enumerate(x.states):
        far = x.orbits[s]
        least = greater(least, None if far is None else far / x.metric.support(i))
    return least


def taken_in_any(x: StanceResults) -> Fraction | None:
    """The same in any norm in which a bound is proved: that is at least the error of every state."""
    least: Fraction | None = None
    for s in x.states:
        least = greater(least, x.orbits[s])
    return least


def grown(found: GraphResults, stances: list[str]) -> tuple[Fraction | None, bool]:
    """The gain that products around walks of these stances show, and whether in any norm and set: graph.md (9)."""
    lasting = all(x.lasting for x in found.each.values())
    lines = [
        (x.concludes["lower"], not x.on_set or found.kind == "region", n)
        for n, x in found.lines("graph-product", "slopes")
        if lasting and x.domains == found.sets() and set(x.walk) <= set(stances)
    ]
    if not lines:
        return None, False
    lower, everywhere, number = max(lines)
    found.needed.add(number)
    return lower, everywhere


def at_the_edge(found: GraphResults, x: StanceResults) -> bool:
    """Whether an orbit goes as far as the set of a stance reaches: then no bound lies strictly inside it."""
    if found.kind == "region":
        edges = {s: x.edges[s].upper for s in x.states}
    elif len(x.states) == 1:  # of several, another norm may have another ball
        edges = dict.fromkeys(x.states, x.radius.upper)
    else:
        return False
    return any(far is not None and (edge := edges[s]) is not None and far >= edge for s, far in x.orbits.items())
