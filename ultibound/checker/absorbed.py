"""Rule absorbed: a box about the targets that every trajectory from the set ends up in (proofs/several.md (8))."""

from __future__ import annotations

from fractions import Fraction

from .derive import Derivation, Domain
from .matrices import metric
from .numerals import Rejected
from .theorems import Line, Quantities

RULES = ("ultimate-bound", "componentwise", "attracting")  # of bounds


def absorbed(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """|e_s| <= β_s in the end, β_s above a bound of s that is proved for trajectories from the set."""
    if proves != "absorbed" or not used or any(x.rule not in RULES for x in used):
        raise Rejected("a box that absorbs rests on bounds")
    if d.statement.horizon != 1:
        raise Rejected("a box that absorbs is known for single steps only")
    sets = [x.domain if x.domain is None or x.domain.of is None else x.domain.of for x in used]
    whole = sets[0]
    if whole is None or any(x != whole for x in sets):
        raise Rejected("bounds of different sets")
    if set(claimed) != set(d.states):
        raise Rejected("concludes: half a width for each state")
    for i, (s, (low, high)) in enumerate(zip(d.states, whole.targets, strict=True)):
        if not any(bound(x, s, i) < claimed[s] for x in used):
            raise Rejected(f"{s}: no more than the bounds show")
        _, inner = d.region(s)
        if not claimed[s] <= min(low - inner[0], inner[1] - high):
            raise Rejected(f"{s}: the box is not shown to lie in the region")
    wide = [claimed[s] for s in d.states]
    rows, inverse = (
        tuple(tuple(x if i == j else Fraction(0) for j in range(len(wide))) for i, x in enumerate(each))
        for each in ([1 / x for x in wide], wide)
    )
    box = metric("box", rows, inverse, len(wide))
    return Domain(True, Fraction(1), whole.target, targets=whole.targets, metric=box, of=whole)


def bound(line: Line, s: str, i: int) -> Fraction:
    """The bound of a state that a line shows: its own, or that of the norm along the state."""
    if line.rule != "ultimate-bound" or line.domain is None or line.domain.metric is None:
        return line.concludes[s]
    return line.concludes["bound"] * line.domain.metric.support(i)
