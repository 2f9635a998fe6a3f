"""Balls of more sides than a box in a basis, where no other is kept: the norm, and that its vertices are led into it.

Sought for from the leaves of Jacobians and misses together (contraction/sides.py), proved by proofs/polytope.md (5).
"""

from __future__ import annotations

from contextlib import suppress
from fractions import Fraction
from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..certificate.attracting import JOINED, joined_leaves
from ..certificate.enclosing import BITS
from ..checker.forms import boxes
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..claim.obligations import Domain
from ..contraction.metrics import Proposal
from ..contraction.norms import Matrices, floats
from ..contraction.polytope import Pieces
from ..contraction.sides import many_sided
from .closing import MOST_STATES, box

if TYPE_CHECKING:
    from .several import SeveralAttempt

LOOKS = (0.01, 60), (0.001, 400)  # gap and leaves of Jacobians and misses together
SLACK = 1e-6  # of what vertices are led to


def proposed(a: SeveralAttempt) -> Proposal | None:
    """The norm of a ball that is kept and contracts (an estimate); None where there is none."""
    claim, rooms = a.claim, a.rooms()
    signals = any(q.within for q in claim.uncertain.values())
    if claim.metric not in ("auto", "polytope") or claim.weights or claim.horizon > 1 or signals:
        return None
    if len(rooms) > MOST_STATES or not min(rooms) > 0:
        return None
    spans = tuple((t.lower, t.upper) for t in a.targets)
    domain = Domain("ball", Fraction(1), spans[0], targets=spans, wide=tuple(rooms))
    shape = box(rooms)
    matrices = a.matrices(JOINED, domain, shape)
    found = a.searched(JOINED, domain, shape, *LOOKS[0])
    pieces = pieces_of(matrices, found.trees)
    if not np.isfinite(pieces.rest).all():
        return None
    with suppress(np.linalg.LinAlgError):
        sides = many_sided(pieces, a.target_moves(), np.array([to_float(x) for x in rooms]))
        if sides is not None:
            return Proposal("polytope", sides.rows, sides.inverse, sides.share, np.inf, 1.0)
    return None


def pieces_of(matrices: Matrices, trees: tuple[str, ...]) -> Pieces:
    """[J | m] over the leaves of trees, in floating point."""
    leaves = list(boxes(list(product(*(v.cells for v in matrices.variables))), list(trees)))
    ends: Floats = np.array([[[to_float(x) for x in side] for side in leaf] for leaf, _ in leaves])
    low, high, branched = ends[:, :, 0], ends[:, :, 1], np.array([form == "b" for _, form in leaves])
    parts = [matrices.affine(low[~branched], high[~branched])]
    if branched.any():
        whole = matrices.affine(low[branched], high[branched])
        more = matrices.by_branches(low[branched], high[branched], whole)
        parts.append(whole if more is None else more[1])
    centre, slopes, rest = (np.concatenate(x) for x in zip(*((p.centre, p.slopes, p.rest) for p in parts), strict=True))
    return Pieces(centre, slopes, rest)


def led(a: SeveralAttempt, pieces: Pieces) -> float:
    """How far from the target the vertices of the ball are led, in its norm (an estimate)."""
    rows, tips = floats(a.norm.rows), to_float(a.domain.radius) * floats(a.norm.tips)
    each = np.vstack([np.hstack([q, np.ones((len(q), 1))]) for q in (tips, -tips)])
    least, most = pieces.seen(rows).ends(each)
    return float((np.maximum(-least, most) + np.abs(rows) @ a.target_moves()).max()) * (1 + SLACK)


def kept(a: SeveralAttempt, ball: int, moves: list[int]) -> int | None:
    """The line that all vertices of the ball are led into it; None where the checker does not see it."""
    w, radius = a.writer, a.writer.proof.lines[ball].concludes["radius"]
    bits = 0 if w.exact("slopes", ball) and w.exact("misses", ball) else BITS
    flow = w.rests("slopes", ball)[1:] or w.rests("misses", ball)[1:]
    for look in LOOKS:
        found = a.searched(JOINED, a.domain, box(a.rooms()), *look)
        with suppress(Undefined, Rejected):
            far = led(a, Pieces.of(joined_leaves(w, found.trees, bits, ball)))
            if far <= radius:
                witness, concludes = {"bits": bits, "trees": list(found.trees)}, {"bound": str(Fraction(f"{far:.9g}"))}
                return w.append("invariant-vertices", "invariant", [ball, *moves, *flow], witness, concludes)
    return None
