"""Claim → step map → certified set → routes → requirements → certificate → check.

Every number on a line is measured by the checker's own arithmetic on the tree that the search found; the finished
certificate is checked again from its bytes before anyone sees it.
"""

from __future__ import annotations

import time
from dataclasses import replace

from ..bounding.defined import undefined_point
from ..bounding.evaluate import to_float
from ..certificate.certificate import Certificate
from ..certificate.enclosing import Watch
from ..certificate.remarks import STOPS
from ..checker import Verdict, check
from ..claim import Bad, Claim, ClaimError
from ..claim.provable import not_followed, not_yet, of_stance, varied
from .gains import Interval
from .graph import GraphAttempt
from .one import Attempt, Known, apart, best
from .several import SeveralAttempt

__all__ = ["Attempt", "GraphAttempt", "InternalError", "SeveralAttempt", "prove"]

SHARPER = 1e-2  # factor on the gap when an undecided requirement is pursued
FINEST = 1e-11


class InternalError(Exception):
    """The checker refuses a certificate that was just built: a defect of this program."""


def prove(claim: Claim, watch: Watch | None = None, gain_interval: str | None = None) -> Certificate:
    """Proves what it can of a claim and returns a certificate that the checker has accepted.

    `gain_interval`: also an interval of that gain on all of which every requirement is proved, the nearest gains at
    which one is refuted, and the gains that contract (proofs/sensitivity-gain.md).

    Raises ClaimError where the claim cannot be used (undefined at a point of its region, target outside, or of a
    kind that cannot be proved yet). Ctrl-C stops the search; what was proved by then is kept, and the certificate
    says so (`interrupted`).
    """
    problem = not_yet(claim) or (None if gain_interval is None else not_followed(claim, gain_interval))
    if problem is not None:
        raise ClaimError.of(claim.place, *problem.split(": ", 1))
    try:
        for c in (claim, *(varied(claim, n) for n in apart(claim))):
            alone = [of_stance(c, s.name) for s in c.stances] if c.stances[0].name else [c]
            undefined = next((x for x in map(undefined_point, alone) if x is not None), None)
            if undefined is not None:
                raise ClaimError.of(claim.place, *undefined)
        return _proved(claim, watch or (lambda stage, leaves, high: None), gain_interval)
    except Bad as why:
        raise ClaimError.of(claim.place, "", str(why)) from None


def _proved(claim: Claim, watch: Watch, gain: str | None) -> Certificate:
    """The certificate of a claim that can be used: tried at smaller gaps while that may decide a requirement."""
    kind: type[Attempt] = SeveralAttempt if len(claim.stances[0].states) > 1 else Attempt
    if claim.stances[0].name:
        kind = GraphAttempt
    gap = to_float(claim.gap)
    until = time.monotonic() + to_float(claim.seconds)
    sharp = claim.route == "curve" or any(r.kind == "sharp_bound" for r in claim.requirements)
    known = Known()
    kept: Attempt | None = None
    while True:
        attempt = best(kind(claim, gap, until, watch, sharp, known=known))
        late = time.monotonic() + attempt.ranges.spent > until
        if kept is None or attempt.decided > kept.decided or (attempt.decided == kept.decided and not late):
            kept = attempt  # what time cut short decides less
        if attempt.curve_may_help and not attempt.ranges.interrupted and not late:
            sharp = True
            continue
        gap *= SHARPER
        cut = any(x in STOPS for x in attempt.ranges.limits.values())  # a smaller gap would meet the same limit
        if cut or not attempt.pursue or gap < FINEST or attempt.ranges.interrupted or late:
            break
    if gain is not None and not kept.ranges.interrupted:
        Interval(kept, gain, to_float(claim.gap), until, watch).search()
    certificate = kept.certificate
    verdict = _checked(certificate, kept)
    if verdict.status != "valid":
        raise InternalError(f"{verdict.place}: {verdict.reason}")
    return replace(certificate, accepted=verdict)


def _checked(certificate: Certificate, attempt: Attempt) -> Verdict:
    """The checker's verdict on the finished bytes; the first Ctrl-C does not keep it from being reached."""

    def watch(done: int, total: int) -> None:
        attempt.watch("checking the certificate, line by line", done, float(total))

    try:
        return check(certificate.to_bytes(), watch)
    except KeyboardInterrupt:
        if attempt.ranges.interrupted:
            raise
        return check(certificate.to_bytes(), watch)
