"""Corners at which derivatives jump, told apart by where they change over, and choices of their branches.

Search only; the checker knows corners by their terms (proofs/matrix.md (8)).
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import product
from typing import Any

import numpy as np

from ..bounding.evaluate import Corner, Runner, to_float
from ..claim.obligations import Variable

MOST_CHOICES = 8  # of branches at a leaf, as in the checker
POINTS = 64  # that tell corners apart
Numbered = dict[Corner, tuple[int, bool]]


def numbered(derivatives: Sequence[tuple[Runner, list[int]]], variables: Sequence[Variable]) -> list[Numbered]:
    """The corners at which each derivative may jump, of these columns of the variables.

    A number, the same for those that change over at the same points of a seeded sample, and whether the branches are
    the other way round.
    """
    at, rng = np.empty((POINTS, len(variables))), np.random.default_rng(0)
    for k, v in enumerate(variables):
        ends = np.array([[to_float(x) for x in cell] for cell in v.cells])[rng.integers(len(v.cells), size=POINTS)]
        at[:, k] = ends[:, 0] + rng.random(POINTS) * (ends[:, 1] - ends[:, 0])
    numbers: dict[bytes, int] = {}
    found = []
    for runner, columns in derivatives:
        sides, here = runner(at[:, columns], at[:, columns]).sides, Numbered()
        for step in runner.program.steps[: runner.program.value + 1]:
            if step.op == "pick":  # the derivative of a branch
                key = "min" if step.name == "min" else "max", step.args[0], step.args[1]
                first = np.broadcast_to(sides[key][0], (POINTS,))
                here[key] = numbers.setdefault((first ^ ~first[0]).tobytes(), len(numbers)), not first[0]
        found.append(here)
    return found


def choices(sides: Any, some: Any) -> tuple[Any, Any]:
    """Of some boxes: which box each choice is of, and the branch of each corner; sides (boxes, corners, 2) are met."""
    owner, held = [], []
    for k in some:
        ways = [[side for side in (0, 1) if met[side]] or [0] for met in sides[k]]
        for choice in product(*ways):
            owner.append(k)
            held.append(choice)
    return np.array(owner), np.array(held).reshape(len(owner), sides.shape[1])


def held_to(here: Numbered, held: Any) -> dict[Corner, Any]:
    """The branches of a derivative's own corners, a box."""
    return {key: held[:, n] ^ int(turned) for key, (n, turned) in here.items()}


def met_by(here: Numbered, met: dict[Corner, tuple[Any, Any]], sides: Any) -> None:
    """Notes which branches of its corners a derivative meets."""
    for key, (n, turned) in here.items():
        for side, one in enumerate(met[key]):
            sides[:, n, side ^ int(turned)] |= one


def highest(found: Sequence[Numbered]) -> int:
    """One more than the highest number."""
    return 1 + max((n for here in found for n, _ in here.values()), default=-1)
