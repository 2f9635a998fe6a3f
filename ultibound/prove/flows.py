"""The flow of a stance: trial trajectories as accurate as the gap asks for, and what the checker proves of them."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

from ..checker.flows import Flows
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..claim import Claim
from ..stance.trials import Trial

ACCURACY, SHARE = 4e-12, 1e-5  # relative to the largest of the trajectories: this, or that share of the gap
ROUGHEST = 0.03  # gap of which that is a share at most
ENOUGH, AGAIN = 1e-9, 10  # what is put up with: this, or so many times what is aimed at
WORSE = 10  # how many times larger than its estimate an error that is proved may be


class Solved(NamedTuple):
    """Polynomials, the proved bound of their error, and the accuracy that was asked for."""

    trial: Trial
    flows: Flows
    accuracy: float


def needed(claim: Claim, gap: float) -> float:
    """The accuracy that serves a relative gap; the best where a value is asked for, which may be known far closer."""
    valued = any(r.kind == "value" for r in claim.requirements)
    return ACCURACY if valued else max(ACCURACY, SHARE * min(gap, ROUGHEST))


def solved(accuracy: float, tried: Callable[[float, float], Trial], proved: Callable[[Any], Flows]) -> Solved:
    """Trajectories `tried` for an accuracy, or at best where too little is `proved` of such low degrees.

    Raises checker.rules.Rejected or checker.reals.Undefined where nothing is proved even so.
    """
    found = tried(accuracy, max(ENOUGH, AGAIN * accuracy))
    try:
        flows = proved(found.witness)
        if accuracy == ACCURACY or flows.error <= WORSE * found.error:
            return Solved(found, flows, accuracy)
    except (Rejected, Undefined):  # divisors need more powers of their parameters than the solution
        if accuracy == ACCURACY:
            raise
    return solved(ACCURACY, tried, proved)
