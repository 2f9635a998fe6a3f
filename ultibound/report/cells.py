"""How the residual of the split route is made up: cell by cell of the gait library, from a certificate's own line."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from itertools import product
from typing import Any

from ..checker.courses import arithmetic
from ..checker.forms import walk
from ..checker.ranges import Ends, Evaluator
from ..checker.reals import Undefined
from ..claim import Claim
from ..claim.constants import constant
from .accepted import Accepted


@dataclass(frozen=True, slots=True)
class Cell:
    """A library cell, by the ends of what reads it, and the residual in it (without the target's movement).

    `residual` is proved. `interpolated` is an estimate: the part that comes from interpolation between the gaits, the
    value in the middle of the cell less the mean over its corners, all else in the middle of its range.
    """

    ends: dict[str, tuple[Fraction, Fraction]]
    residual: Fraction
    interpolated: float


def residual_by_cell(found: Accepted) -> list[Cell]:
    """Proved, as the checker measures it: sup |N − x + F(x*) − N(x*)| over each library cell met.

    The set has to be the region: a ball moves with its target and has no cells of its own.
    """
    proof, derivation = found.derived, found.derived.derivation
    name = f"split-residual[{derivation.state}]"
    line = next((x for x in found.proof if (x["rule"], x["proves"]) == ("range", name)), None)
    if line is None:
        return []
    domain, flows = proof.lines[line["uses"][0]].domain, proof.lines[line["uses"][-1]].flows
    meaning = derivation.meaning(name, domain)
    cut = [k for k, v in enumerate(meaning.variables) if len(v.cells) > 1 and not v.listed]
    if not cut:
        return []
    names, bits = [v.name for v in meaning.variables], line["witness"]["bits"]
    libraries = derivation.statement.libraries
    evaluator = Evaluator(derivation.terms, meaning.root, meaning.by, names, libraries, arithmetic(bits), flows)
    most: dict[tuple[Ends, ...], Fraction] = {}
    tops = list(product(*(v.cells for v in meaning.variables)))
    for top, tree in zip(tops, line["witness"]["trees"], strict=True):
        low, high = evaluator.a.ends(walk(evaluator, [top], [tree])[0])
        cell = tuple(top[k] for k in cut)
        most[cell] = max(most.get(cell, Fraction(0)), -low, high)
    middles = [(v.cells[0][0] + v.cells[-1][1]) / 2 for v in meaning.variables]

    def at(places: tuple[Fraction, ...]) -> float:
        box = [(x, x) for x in middles]
        for k, x in zip(cut, places, strict=True):
            box[k] = x, x
        low, high = evaluator.a.ends(evaluator.run(box, False).v)
        return float(low + high) / 2

    def interpolated(cell: tuple[Ends, ...]) -> float:
        try:
            corners = [at(c) for c in product(*cell)]
            return abs(at(tuple((a + b) / 2 for a, b in cell)) - sum(corners) / len(corners))
        except Undefined:
            return float("nan")

    return [Cell({names[k]: e for k, e in zip(cut, c, strict=True)}, x, interpolated(c)) for c, x in most.items()]


def finer(found: list[Cell], wanted: float) -> float | None:
    """By what factor all spacings of the library may change for the residual to be as wanted; an estimate.

    Interpolation falls with the square of the spacing; what else is in the residual stays. None where no spacing does.
    """
    rest = max(float(c.residual) - c.interpolated for c in found)
    most = max(c.interpolated for c in found)
    if not (most > 0 and wanted > rest):
        return None
    return float(
        min(
            ((wanted - (float(c.residual) - c.interpolated)) / c.interpolated) ** 0.5
            for c in found
            if c.interpolated > 0
        )
    )


def residual_wanted(claim: Claim, results: dict[str, Any], found: list[Cell]) -> float | None:
    """The residual in a cell with which the split route's gain gives the least bound asked for; None where none is."""
    asked = [r.constant for r in claim.requirements if r.kind == "bound" and r.constant is not None and not r.over]
    gain, residual = results["routes"]["split"]["gain"], results["routes"]["split"]["residual"]
    if not asked or gain is None or Fraction(gain["upper"]) >= 1:
        return None
    moved = Fraction(residual["upper"]) - max(c.residual for c in found)  # of the target, in a step
    return float(min(constant(c, claim.values)[0] for c in asked) * (1 - Fraction(gain["upper"])) - moved)
