"""The figures of a report with their captions and what they show in words; and what simulation says costs how much."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from . import figures
from .accepted import Accepted
from .cells import Cell
from .curves import CellMap, bands, end, envelope, gain_curve, over_gain, plane
from .document import Block, Figure
from .margins import upper, with_unit
from .walks import PointMap, Walks, point_maps, walked

MOST_GAINS = 4
SEEDED = "Simulated runs and samples are estimates, seeded, and no part of the proof."


@dataclass(frozen=True)
class Drawings:
    """Figures by name, and late errors (a state each) with one quantity known."""

    figures: dict[str, tuple[Figure, ...]] = field(default_factory=dict)
    costs: tuple[tuple[str, tuple[float, ...]], ...] = ()

    def of(self, *names: str) -> list[Block]:
        return [f for n in names for f in self.figures.get(n, ())]


def drawings(found: Accepted, cells: Sequence[Cell]) -> Drawings:
    """Everything that can be drawn of a certificate here; the numbers of `costs` need no drawing."""
    maps = point_maps(found)
    states = found.claim.stances[0].states
    reach = [end(found.results["states"][s]["radius"], "lower") or _some_reach(maps[0], s) for s in states]
    walks = walked(found, maps, reach)
    costs = _costs(found, maps, reach, walks)
    if not figures.available():
        return Drawings(costs=costs)
    drawn: dict[str, tuple[Figure, ...]] = {}
    if walks is not None:
        drawn["envelope"] = (_envelope(found, walks),)
    if len(maps) == 1:
        curve = gain_curve(found, maps[0])
        if curve is not None and len(curve.rho):
            drawn["gain-curve"] = (_gain_curve(curve),)
        flat = plane(found, maps[0], walks) if walks is not None else None
        if flat is not None:
            drawn["plane"] = (_plane(flat),)
        gains = [over_gain(found, g) for g in list(found.claim.gains)[:MOST_GAINS]]
        drawn["over-gain"] = tuple(_over_gain(g) for g in gains if g is not None and g.k.max(initial=0.0) > 0)
    if found.results["sensitivities"]:
        drawn["sensitivity"] = (_sensitivity(found),)
    if len(cells) > 1:
        drawn["cells"] = (_cells(found, cells),)
    return Drawings(drawn, costs)


def _some_reach(m: PointMap, state: str) -> float:
    """Where no radius is proved: a tenth of the region."""
    low, high = m.obligations.region(state)[0]
    return float(high - low) / 10


def _costs(
    found: Accepted, maps: Sequence[PointMap], reach: Sequence[float], walks: Walks | None
) -> tuple[tuple[str, tuple[float, ...]], ...]:
    if walks is None or len(found.claim.uncertain) < 2:
        return ()
    rows = [("nothing", _late(walks))]
    for name in found.claim.uncertain:
        other = walked(found, maps, reach, frozenset({name}))
        if other is not None:
            rows.append((name, _late(other)))
    return tuple(rows)


def _late(walks: Walks) -> tuple[float, ...]:
    return tuple(float(x) for x in np.abs(walks.late()).max(axis=(0, 1)))


def _envelope(found: Accepted, walks: Walks) -> Figure:
    data = envelope(found, walks)
    late = float(data.courses[:, walks.settled :].max())
    bound = max(data.bounds, default=None)
    said = f"Late in the simulated runs the error is at most {late:.4g} {data.unit}".rstrip()
    said += (
        f"; the proved ultimate bound is {bound:.4g} {data.unit}".rstrip()
        if bound is not None
        else "; no bound is proved"
    )
    what = f"Errors over {data.courses.shape[1] - 1} steps. {said}."
    caption = f"{len(data.courses)} runs, each steered to end as far out as it can. {SEEDED}"
    return Figure("Error over steps", figures.svg(figures.envelope(data)), what, (caption,))


def _gain_curve(data: Any) -> Figure:
    bound = (
        f", and crosses the diagonal at the bound {data.bound:.4g} {data.unit}".rstrip()
        if data.bound is not None
        else ""
    )
    what = (
        f"How far one step leads at most, up to {data.radius:.4g} {data.unit}".rstrip()
        + " from the target"
        + f". The proved line rises by {data.gain:.4g} from {data.residual:.4g}{bound}. Sampled values lie below it."
    )
    caption = "Where the line is below the diagonal, a step leads nearer. " + SEEDED
    return Figure("Error curve φ", figures.svg(figures.gain_curve(data)), what, (caption,))


def _plane(data: Any) -> Figure:
    a, b = data.states
    what = f"The plane of {a} and {b}: the region of the claim, in it the certified set about the target, in "
    what += "it the box of the proved ultimate bounds, and in that where simulated runs are late."
    caption = "The target in the middle of the range it may take. " + SEEDED
    return Figure("Certified set and reached points", figures.svg(figures.plane(data)), what, (caption,))


def _over_gain(data: Any) -> Figure:
    below = data.values[data.k < 1]
    span = (
        f"sampled k is below 1 from {below[0]:.3g} to {below[-1]:.3g}" if len(below) else "sampled k is nowhere below 1"
    )
    shown = f"{data.values[0]:.3g} to {data.values[-1]:.3g}"
    what = f"The gain k of a step over the controller gain {data.gain}: {span}, within the {shown} shown."
    caption = (
        "An estimate from below of the largest slope of the map, at the same seeded points for every value; all else "
        "as claimed. What is proved at the claim's value is of the route reported, which may have less than this slope."
    )
    if data.inner is not None or data.outer:
        caption += " The interval in which every requirement is proved, and gains at which one is refuted, are proved."
    return Figure(f"Gain of a step over {data.gain}", figures.svg(figures.over_gain(data)), what, (caption,))


def _sensitivity(found: Accepted) -> Figure:
    from .margins import unit_of

    asked = [r for r in found.claim.requirements if r.kind == "sensitivity" and not r.over]
    data = bands(found, [unit_of(found.claim, r) for r in asked[: len(found.results["sensitivities"])]])
    parts = [f"∂{b.of}⁺/∂{b.by} lies between {b.low:.5g} and {b.high:.5g}" for b in data]
    what = f"{'; '.join(parts)}, over the whole set and everything uncertain."
    return Figure("Sensitivity", figures.svg(figures.sensitivity(data)), what, ("Proved bands.",))


def _cells(found: Accepted, cells: Sequence[Cell]) -> Figure:
    states, uncertain = found.claim.stances[0].states, found.claim.uncertain
    known = {n: q.unit for n, q in (*states.items(), *uncertain.items())}
    unit = next(iter(states.values())).unit
    data = CellMap(cells, unit, {n: known.get(n, "") for n in cells[0].ends})
    most = max(cells, key=lambda c: c.residual)
    where = ", ".join(f"{n} {float(a):.3g} to {float(b):.3g}" for n, (a, b) in most.ends.items())
    size = with_unit(upper({"lower": None, "upper": str(most.residual)}) or "", unit)
    what = f"Proved residual of {len(cells)} library cells; the largest, {size}, at {where}."
    return Figure(
        "Residual by library cell",
        figures.svg(figures.residual_cells(data)),
        what,
        (with_unit("Proved, cell by cell,", f"in {unit}" if unit else "").rstrip(",") + ".",),
    )
