"""The numbers behind the figures: what the certificate proves, and estimates beside it, each kept apart."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any

import numpy as np

from ..bounding.evaluate import Runner, to_float
from ..bounding.intervals import Floats
from ..checker.theorems import movement, movements
from ..claim import Claim
from ..claim.errors import Bad, ClaimError
from ..claim.expression import Expression, Node
from ..claim.model import Quantity, Range
from ..claim.obligations import Domain, Obligation, Obligations, together
from ..contraction.samples import drawn, ends_of
from ..polynomial.flows import FlowTable
from ..stepmap.symbolic import compiled
from .accepted import Accepted
from .cells import Cell
from .margins import exact
from .walks import PointMap, Walks, flows_in, measured, rows_of

POINTS, FEWER, SEED, GAINS = 6000, 1000, 1, 25
BINS = 60


@dataclass(frozen=True)
class GainCurve:
    """φ(ρ): how far a step leads at most from within ρ of the target.

    Proved: the line kρ + ε, shells (radius, level), bound, radius of the set. Sampled: `rho`, `phi`.
    """

    rho: Floats
    phi: Floats
    shells: tuple[tuple[float, float], ...]
    gain: float
    residual: float
    bound: float | None
    radius: float
    unit: str
    single: bool = True  # one state; else distances are in the norm


@dataclass(frozen=True)
class Envelope:
    """‖e_n‖ over steps: `proved` (None where no pair gives one), simulated `courses` (runs, steps + 1), bounds."""

    courses: Floats
    proved: Floats | None
    bounds: tuple[float, ...]  # at every step, or the same for all
    unit: str
    single: bool = True


@dataclass(frozen=True)
class CellMap:
    """The residual by library cell, its unit, and the units of what reads the library."""

    cells: Sequence[Cell]
    unit: str
    units: dict[str, str]


@dataclass(frozen=True)
class Band:
    """A sensitivity: proved ends, and ends surely reached where known."""

    of: str
    by: str
    low: float
    high: float
    unit: str


@dataclass(frozen=True)
class OverGain:
    """k over a gain: sampled at `values`; at the claim's own value `proved`."""

    gain: str
    values: Floats
    k: Floats
    at: float
    proved: float | None
    inner: tuple[float, float] | None = None  # every requirement is proved between
    outer: tuple[float, ...] = ()  # one is refuted at


@dataclass(frozen=True)
class Plane:
    """Two states: the region, outline of the certified set about the middle target, bounds, simulated late errors."""

    states: tuple[str, str]
    units: tuple[str, str]
    region: tuple[tuple[float, float], tuple[float, float]]
    target: tuple[float, float]
    outline: Floats | None
    bounds: tuple[float | None, float | None]
    courses: Floats
    late: Floats


def end(value: dict[str, Any] | None, name: str) -> float | None:
    """An end of a quantity of `results` as a float for drawing."""
    return None if value is None or value[name] is None else to_float(exact(value[name]))


def one_map(found: Accepted) -> bool:
    return not found.claim.stances[0].name


def gain_curve(found: Accepted, m: PointMap) -> GainCurve | None:
    """Of a claim without named stances, one step at a time, with a set and a route."""
    results, claim = found.results, found.claim
    route = results["routes"].get(results["route"])
    pair = route or results
    k, rest, radius = end(pair["gain"], "upper"), end(pair["residual"], "upper"), end(results["radius"], "lower")
    if k is None or rest is None or radius is None or claim.horizon > 1:
        return None
    o = m.obligations
    rng = np.random.default_rng(SEED)
    values = {v.name: _drawn(v, rng) for v in m.variables}
    target = m.target({v.name: values[v.name] for v in m.held} or {"": np.zeros(POINTS)})
    way = rng.uniform(-1, 1, (POINTS, len(o.states)))
    way /= np.maximum(measured(results["metric"], o.states, way), 1e-300)[:, None]
    size = rng.uniform(0, radius, POINTS)
    state = target + way * size[:, None]
    values |= {s: state[:, k] for k, s in enumerate(o.states)}
    after = measured(results["metric"], o.states, m.next(values) - m.target(_moved(m, values, rng)))
    good = np.isfinite(after)
    bins = np.minimum((size[good] / radius * BINS).astype(int), BINS - 1)
    most = np.full(BINS, -np.inf)
    np.maximum.at(most, bins, after[good])
    phi = np.maximum.accumulate(most)
    seen = np.isfinite(phi)
    rho = (np.arange(BINS) + 1) * radius / BINS
    unit = next(iter(claim.stances[0].states.values())).unit if len(o.states) == 1 else ""
    return GainCurve(
        rho[seen],
        phi[seen],
        _shells(found) if results["route"] == "curve" else (),
        k,
        rest,
        end(pair["bound"], "upper"),
        radius,
        unit,
        len(o.states) == 1,
    )


def _drawn(v: Any, rng: np.random.Generator) -> Floats:
    return drawn(Obligation("", 0, "", (v,), False), POINTS, rng)[:, 0]


def _moved(m: PointMap, values: dict[str, Floats], rng: np.random.Generator) -> dict[str, Floats]:
    """Held quantities one step later, each as far on as it may be, either way."""
    later = dict(values)
    for v in m.held:
        if m.claim.uncertain[v.name].change is not None:
            side = rng.choice([-1.0, 1.0], POINTS) * m.change(v.name)
            later[v.name] = np.clip(values[v.name] + side, *ends_of(v))
    return later


def _shells(found: Accepted) -> tuple[tuple[float, float], ...]:
    """Proved levels over the radii of the error curve, with the proved movement of the target (proofs/curve.md)."""
    lines = found.derived.lines.values()
    shells = next((x for x in lines if x.rule == "shells" and not x.variant and not x.part), None)
    d = found.derived.derivation
    slopes = [x for n in movements(d) for x in lines if (x.rule, x.proves) == ("range", n) and not x.variant]
    if shells is None or shells.domain is None or len(slopes) != len(movements(d)):
        return ()
    moved = to_float(movement(d, slopes))
    level, out = 0.0, []
    for j, radius in enumerate(shells.domain.radii, 1):
        line = next((x for x in lines if x.proves == f"shell[{j}]" and x.rule == "range" and not x.variant), None)
        if line is None:
            break
        level = max(level, to_float(line.concludes["upper"]), to_float(-line.concludes["lower"]))
        out.append((to_float(radius), level + moved))
    return tuple(out)


def envelope(found: Accepted, walks: Walks) -> Envelope:
    """Errors of simulated runs in the norm, or of stances the size of the first state's, with what is proved."""
    results, claim = found.results, found.claim
    states = tuple(claim.stances[0].states)
    steps = walks.errors.shape[1]
    unit = claim.stances[0].states[states[0]].unit if len(states) == 1 else ""
    if not one_map(found):
        courses = np.abs(walks.errors[:, :, 0])
        bounds = [end(results["stances"][s]["states"][states[0]]["bound"], "upper") for s in walks.stances]
        known = tuple(b for b in bounds if b is not None)
        unit = claim.stances[0].states[states[0]].unit
        return Envelope(courses, None, known if len(known) == steps else (), unit)
    courses = measured(results["metric"], states, walks.errors)
    pair = results["routes"].get(results["route"]) or results
    k, rest, bound = end(pair["gain"], "upper"), end(pair["residual"], "upper"), end(results["bound"], "upper")
    if len(states) == 1:
        own = end(results["states"][states[0]]["bound"], "upper")
        bound = own if bound is None or (own is not None and own < bound) else bound
    if k is None or rest is None or k >= 1 or claim.horizon > 1 or results["set"] is None:
        return Envelope(courses, None, () if bound is None else (bound,), unit, len(states) == 1)
    n = np.arange(steps)
    start = float(courses[:, 0].max())
    proved = k**n * start + rest * (1 - k**n) / (1 - k)
    return Envelope(courses, proved, () if bound is None else (bound,), unit, len(states) == 1)


def bands(found: Accepted, units: Sequence[str]) -> list[Band]:
    """The sensitivities proved; `units` of each."""
    out = []
    for b, unit in zip(found.results["sensitivities"], units, strict=True):
        out.append(Band(b["of"], b["by"], to_float(exact(b["lower"])), to_float(exact(b["upper"])), unit))
    return out


def over_gain(found: Accepted, gain: str) -> OverGain | None:
    """The largest slope of one step at seeded points of the region, gain by gain: an estimate from below.

    None where the gain also sets a range or the like, so that the claim would be another one.
    """
    claim = found.claim
    low, high = (to_float(x) for x in claim.values[gain])
    at = (low + high) / 2
    if not np.isfinite(at) or at == 0 or gain in _fixed(claim) or claim.horizon > 1 or not one_map(found):
        return None
    spread = sorted((at * 0.4, at * 1.6))
    ends = [Expression("", (Node("number", value=Fraction(x)),)) for x in spread]
    if ends[0].nodes[0].value is None or spread[0] < 0:
        ends = [
            Expression("", (Node("number", value=Fraction(x)), Node("neg", (0,)))) for x in (-spread[0], -spread[1])
        ]
    free = replace(
        claim,
        gains={n: e for n, e in claim.gains.items() if n != gain},
        uncertain={**claim.uncertain, gain: Quantity(gain, Range(ends[0], ends[1]), held=True)},
    )
    try:
        o = Obligations(free)
        mine = Obligations(claim).motion
        if (o.motion is None) != (mine is None) or (
            o.motion is not None
            and mine is not None
            and [p.name for p in o.motion.parameters] != [p.name for p in mine.parameters]
        ):
            return None
        nothing = Fraction(0)
        whole = Domain("region", nothing, (nothing, nothing))
        slopes = [[o.slope(whole, s, x) for x in o.states] for s in o.states]
    except (Bad, ClaimError, ValueError):
        return None
    return _largest(found, o, slopes, gain, np.linspace(spread[0], spread[1], GAINS), at)


def _largest(found: Accepted, o: Obligations, slopes: Any, gain: str, values: Floats, at: float) -> OverGain:
    flows = flows_in(found, "", o.motion)
    metric = found.results["metric"]
    v, p = rows_of(metric, o.states)
    inverse = np.linalg.pinv(v)
    rng = np.random.default_rng(SEED)  # the same points at every gain
    known = {x.name: _drawn(x, rng)[:FEWER] for x in together([s for row in slopes for s in row])}
    runners = [[_slope(o, s, flows) for s in row] for row in slopes]
    k = np.zeros(len(values))
    for number, value in enumerate(values):
        known[gain] = np.full(FEWER, value)
        matrix = np.zeros((FEWER, len(o.states), len(o.states)))
        for i, row in enumerate(runners):
            for j, runner in enumerate(row):
                points = [known[n] for n in runner.variables]
                box = np.stack(points, axis=1) if points else np.zeros((FEWER, 0))
                run = runner(box, box, gradient=False)
                matrix[:, i, j] = np.where(np.abs(run.low) > np.abs(run.high), run.low, run.high)
        matrix = matrix[np.isfinite(matrix).all(axis=(1, 2))]
        turned = v @ matrix @ inverse
        sizes = np.linalg.norm(turned, 2, axis=(1, 2)) if p is not None else np.abs(turned).sum(axis=2).max(axis=1)
        k[number] = sizes.max(initial=0.0)
    told: dict[str, Any] = next((x for x in found.results["gain_intervals"] if x["gain"] == gain), {})
    inner = (
        None if told.get("inner") is None else (to_float(exact(told["inner"][0])), to_float(exact(told["inner"][1])))
    )
    outer = tuple(to_float(exact(x)) for x in told.get("outer", ()) if x is not None)
    return OverGain(gain, values, k, at, end(found.results["gain"], "upper"), inner, outer)


def _slope(o: Obligations, slope: Obligation, flows: FlowTable | None) -> Runner:
    program = compiled(o.graph, slope.root, slope.by, [])
    return Runner(program, [x.name for x in slope.variables], o.claim.libraries, derivative=True, flows=flows)


def _fixed(claim: Claim) -> set[str]:
    """Names on which ranges, exponents and lists rest, directly or through constants and gains."""
    spans = [*claim.uncertain.values(), *(q for s in claim.stances for q in s.states.values())]
    texts = [e for q in spans if q.range is not None for e in (q.range.lower, q.range.upper)]
    texts += [e for q in spans for e in (*(q.values or ()), q.change) if e is not None]
    found = {n for e in texts for n in e.names()}
    every = [e for s in claim.stances for e in (*s.define.values(), *s.next.values(), *s.target.values())]
    found |= {name for e in every for n in e.nodes if n.op == "power" for name in (n.name or "").split()}
    texts_of = {**claim.constants, **claim.gains}
    waiting = list(found)
    while waiting:
        name = waiting.pop()
        fresh = set(texts_of[name].names()) - found if name in texts_of else set()
        found |= fresh
        waiting += fresh
    return found


def plane(found: Accepted, m: PointMap, walks: Walks) -> Plane | None:
    """Of two states without named stances."""
    claim, results = found.claim, found.results
    states = tuple(claim.stances[0].states)
    if len(states) != 2 or not one_map(found):
        return None
    middles = []
    for s in states:
        centre = m.target({v.name: np.array([sum(map(to_float, v.inside)) / 2]) for v in m.held} or {"": np.zeros(1)})
        middles.append(float(centre[0, states.index(s)]))
    radius, outline = end(results["radius"], "lower"), None
    if results["set"] is not None and results["set"]["kind"] != "region" and radius is not None:
        turn = np.linspace(0, 2 * np.pi, 721)
        way = np.stack([np.cos(turn), np.sin(turn)], axis=1)
        scale = np.array([1.0, 1.0])
        outline = way * scale * (radius / measured(results["metric"], states, way * scale))[:, None]
    spans = [tuple(map(to_float, m.obligations.region(s)[0])) for s in states]
    one, two = (claim.stances[0].states[s].unit for s in states)
    bounds = [end(results["states"][s]["bound"], "upper") for s in states]
    return Plane(
        (states[0], states[1]),
        (one, two),
        ((spans[0][0], spans[0][1]), (spans[1][0], spans[1][1])),
        (middles[0], middles[1]),
        outline,
        (bounds[0], bounds[1]),
        walks.errors,
        walks.late().reshape(-1, 2),
    )
