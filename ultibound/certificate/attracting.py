"""Lines of polytopes that trajectories are drawn into: numbers as the checker's own arithmetic has them."""

from __future__ import annotations

from collections.abc import Sequence
from contextlib import suppress
from fractions import Fraction
from typing import Any

from ..checker.attracting import polytope
from ..checker.jacobians import Joined
from ..checker.matrices import Leaf, Matrix
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..checker.several import gone_through
from .lines import upward
from .norms import NormWriter, texts

JOINED = "joined"


def joined_leaves(w: NormWriter, trees: Sequence[str], bits: int, on: int) -> list[Leaf]:
    """[J | m] over the leaves of a set; raises checker.reals.Undefined where one has no enclosure."""
    domain, flows = w.domain(on), w.flows()
    if domain is None:
        raise ValueError("no set")
    table = Joined(w.derivation, JOINED, domain, bits, flows)
    witness = {"bits": bits, "trees": list(trees)}
    return list(gone_through(w.derivation, table, JOINED, flows, witness))


def attracting(
    w: NormWriter, on: int, contraction: int, moves: list[int], found: tuple[Sequence[str], int], rows: Matrix,
    low: Sequence[Fraction], high: Sequence[Fraction],
) -> int | None:  # fmt: skip
    """The line that trajectories are drawn into a polytope; None where the checker does not see it."""
    trees, bits = found
    d = w.derivation
    witness: dict[str, Any] = {"bits": bits, "trees": list(trees), "rows": texts(rows)}
    witness |= {"low": [str(x) for x in low], "high": [str(x) for x in high]}
    flow = w.rests("slopes", on)[1:] or w.rests("misses", on)[1:]
    with suppress(Undefined, Rejected):
        p = polytope(rows, low, high, len(d.states))
        concludes = {s: upward(p.reach(i)) for i, s in enumerate(d.states)}
        return w.append("attracting", "attracting", [on, contraction, *moves, *flow], witness, concludes)
    return None
