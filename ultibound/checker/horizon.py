"""Several steps taken together: what the map of all of them is made of (proofs/horizon.md)."""

from __future__ import annotations

from collections.abc import Callable

from .calculus import Unprovable
from .model import Statement
from .motion import Motion
from .names import Names


def together(statement: Statement, motion: Motion | None) -> None:
    """Raises Unprovable where several steps of a claim cannot be taken together."""
    if motion is not None and motion.signals:
        raise Unprovable("horizon: a signal within the stance is followed for one step at a time only")
    if any(q.change is not None and q.values is not None for q in statement.uncertain.values()):
        raise Unprovable("horizon: a held quantity of a finite list that changes is followed for one step at a time")


def onward(names: Names, states: tuple[str, ...], step: int, stays: Callable[[int, str], int]) -> dict[str, int]:
    """What names mean at a step, `names` being those of the one before: states as that step leaves them, held
    quantities moved by as much as they change, everything else any value of its range afresh."""
    put, found = names.terms.put, {}
    for n, q in names.statement.uncertain.items():
        again = put("variable", (), f"{n}@{step}")
        if not q.held:
            found[n] = again
        elif q.change is not None:
            found[n] = stays(put("add", (names.of(n), again)), n)
    return found | {s: stays(names.of(f"next({s})"), s) for s in states}
