"""Trial polynomials of many cells in whole numbers, with what their errors are estimated to be."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import ceil, comb, log2
from typing import Any

import numpy as np

from ..bounding.intervals import Floats
from ..polynomial.flows import Errors
from ..polynomial.monomials import sites
from .collocation import REACH, fitted, measured, rounded, solved
from .estimate import compared
from .plans import Plan
from .points import Rates

PROBED = 16  # cells from which the number of bits is taken
MEMORY = 8e6  # floats in the systems solved together
MORE_BITS = 4  # a time, while rounding spoils the accuracy
FEWEST_BITS, MOST_BITS, HELD = 24, 60, 62  # HELD: binary digits of the largest whole number
Watch = Callable[[int, int], None]


@dataclass(frozen=True)
class Made:
    """Whole numbers over 2**bits of some cells of a plan, as from `rounded`, and estimates of their errors.

    relative, slope: (cells,), errors at the end of Φ and of its derivatives by the parameters over the largest |Φ|, or
    over 1 if that is larger; share: (cells, parameters), what each parameter contributes to the defect.
    """

    plan: Plan
    bits: int
    whole: Any
    errors: Errors
    relative: Floats
    slope: Floats
    share: Floats


def many(rates: Rates, plan: Plan, ranks: Any, accuracy: float, watch: Watch = lambda done, total: None) -> Made:
    """Cells of a plan by their ranks, some at a time, all with the bits that a few of them need for the accuracy."""
    size = len(plan.cuts)
    each = len(sites(size, plan.total + 1, 1.0)) * max((plan.time * rates.size) ** 2, 8 * plan.pieces * plan.time)
    block = max(1, int(MEMORY / each))
    probe = np.unique(np.linspace(0, len(ranks) - 1, min(PROBED, block)).astype(int))
    first = _some(rates, plan, ranks[probe], accuracy)
    if len(probe) == len(ranks):
        watch(len(ranks), len(ranks))
        return first
    bits, start, parts = first.bits, 0, list[Made]()
    while start < len(ranks):
        part = _some(rates, plan, ranks[start : start + block], accuracy, bits)
        if part.bits < bits:  # a larger Φ than among the few: its whole numbers need the room
            bits, start, parts = part.bits, 0, []
            continue
        parts.append(part)
        start += block
        watch(min(start, len(ranks)), len(ranks))
    errors = Errors(*(np.concatenate([getattr(p.errors, f) for p in parts]) for f in Errors.__slots__))
    joined = (np.concatenate([getattr(p, f) for p in parts]) for f in ("relative", "slope", "share"))
    return Made(plan, bits, np.concatenate([p.whole for p in parts]), errors, *joined)


def _some(rates: Rates, plan: Plan, ranks: Any, accuracy: float, given: int = 0) -> Made:
    """Cells that fit in memory, with as many bits as the accuracy needs, or with the given ones if they fit."""
    size = len(plan.cuts)
    cells, pieces = plan.cells(ranks), plan.fractions()
    at = solved(rates, cells, pieces, plan.time, sites(size, plan.total, REACH))
    scale = np.maximum(np.abs(at.sum(axis=-1)).max(axis=(1, 2, 3, 4)), 1.0)
    found = fitted(at, size, plan.total, REACH)
    bits, most = _bits(plan, float(scale.max()), float(np.abs(found).sum(axis=-1).max()), accuracy)
    if given:
        bits = most = min(given, most)
    made: Made | None = None
    while True:
        whole = rounded(found, bits)
        sizes, share = measured(rates, cells, pieces, whole, bits, plan.total)
        errors, _ = compared(sizes)
        slope = (errors.slope[:, -1] / cells.half).max(axis=1, initial=0.0) / scale
        last, made = made, Made(plan, bits, whole, errors, errors.value[:, -1] / scale, slope, share)
        if last is not None and not made.relative.max() < last.relative.max() / 1.5:
            return last
        if bits >= most or made.relative.max() <= accuracy / 2:
            return made
        bits = min(bits + MORE_BITS, most)


def _bits(plan: Plan, scale: float, largest: float, accuracy: float) -> tuple[int, int]:
    """Binary digits after the point for which rounding adds little to the defect, and how many fit in 64 bits."""
    terms = comb(plan.total + len(plan.cuts), len(plan.cuts))
    wanted = ceil(log2(10 * (plan.time + 1) * plan.time * terms / accuracy)) - int(log2(scale))
    most = max(FEWEST_BITS, min(MOST_BITS, HELD - ceil(log2(max(largest, 1.0)))))
    return max(FEWEST_BITS, min(wanted, most)), most
