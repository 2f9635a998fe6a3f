"""Points of an obligation's box for estimates: ends and inner values of every variable, seeded."""

from __future__ import annotations

from fractions import Fraction
from itertools import product
from math import prod

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..claim.obligations import Obligation, Variable

MOST = 128


def ends_of(v: Variable) -> tuple[float, float]:
    return min(to_float(c[0]) for c in v.cells), max(to_float(c[1]) for c in v.cells)


def values_of(v: Variable) -> list[Fraction]:
    """Ends and middle of a range, or the values of a list, as a point may take them."""
    if v.listed:
        return [(c[0] + c[1]) / 2 for c in v.cells]
    low, high = v.inside
    return sorted({low, (low + high) / 2, high})


def drawn(obligation: Obligation, count: int, rng: np.random.Generator) -> Floats:
    """Rows of points: half of each variable's values at its ends, the rest anywhere between."""
    columns = []
    for v in obligation.variables:
        if v.listed:
            columns.append(rng.choice([to_float(x) for x in values_of(v)], count))
            continue
        low, high = ends_of(v)
        x = rng.uniform(low, high, count)
        if not v.name.startswith("error("):
            x = np.where(rng.random(count) < 0.5, rng.choice([low, high], count), x)
        columns.append(x)
    return np.stack(columns, axis=1) if columns else np.zeros((count, 0))


def combinations(variables: list[Variable], rng: np.random.Generator) -> list[dict[str, Fraction]]:
    """All choices of ends and middles, or a seeded selection that begins with the ends where there are too many."""
    names, lists = [v.name for v in variables], [values_of(v) for v in variables]
    if prod(map(len, lists)) > MOST:
        lists = [[x[0], x[-1]] for x in lists]
    if prod(map(len, lists)) <= MOST:
        rows = list(product(*lists))
    else:
        rows = [tuple(x[int(rng.integers(len(x)))] for x in lists) for _ in range(MOST)]
    return [dict(zip(names, row, strict=True)) for row in rows]


def extremes(points: Floats, most: int) -> list[int]:
    """Rows that are largest along an axis or a seeded random direction, either way."""
    if len(points) <= most // 2:
        return list(range(len(points)))
    width = points.shape[1]
    random = np.random.default_rng(0).standard_normal((4 * most, width))
    centred = points - points.mean(axis=0)
    scores = centred @ np.concatenate([np.eye(width), random]).T
    counts = np.bincount(np.abs(scores).argmax(axis=0), minlength=len(points))
    longest = [int(i) for i in np.argsort(-counts, kind="stable")[:most] if counts[i]]
    return sorted(longest)
