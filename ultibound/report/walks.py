"""Trajectories simulated against the bound: estimates in floating point, seeded, never part of a proof.

Each run is to end as far from the target as it can in a direction of its own. At every step it takes, of the values
that the uncertain quantities may have (ends, middles, listed values), those that lead furthest that way by the end, as
the map's derivative at the target tells. What is found shows how close the map itself comes to what is proved.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import product
from typing import Any

import numpy as np

from ..bounding.evaluate import Runner, to_float
from ..bounding.intervals import Floats
from ..claim import Claim
from ..claim.motion import Motion
from ..claim.obligations import Obligations, Variable, together
from ..claim.provable import of_stance
from ..contraction.samples import combinations, ends_of, values_of
from ..polynomial.flows import Errors, FlowTable
from ..stepmap.symbolic import compiled
from .accepted import Accepted
from .margins import exact

LATE, LONGEST, MORE, SEED, MOST_CHOICES, DIRECTIONS = 20, 400, 10, 0, 48, 8
LEFT = 1e-6  # share of the bound that may be left of where a run starts


def flow_table(witness: Mapping[str, Any], motion: Motion) -> FlowTable:
    """The trial solutions of a `trajectory` line as a table without errors: values at points are estimates."""
    cuts = [np.array([to_float(exact(x)) for x in witness["cuts"][p.name]]) for p in motion.parameters]
    grids = [None if p.grid is None else np.array([to_float(x) for x in p.grid]) for p in motion.parameters]
    pieces = np.array([to_float(exact(x)) for x in witness["pieces"]])
    whole = np.array([[[float(x) for x in piece.split()] for piece in cell] for cell in witness["cells"]])
    n, (time, total) = len(motion.states), witness["degrees"]
    columns = n + len(motion.signals) + any(k is not None for k in motion.free)
    count, size = len(whole), len(motion.parameters)
    shaped = whole.reshape(count, len(pieces) - 1, columns, n, -1, time + 1)
    flat = np.zeros((count, len(pieces) - 1))
    by = np.zeros((*flat.shape, size))
    errors = Errors(flat, flat, by, by, np.zeros((*flat.shape, size, size)))
    return FlowTable(cuts, grids, pieces, (time, total), np.ldexp(shaped, -int(witness["bits"])), errors)


def flows_in(found: Accepted, stance: str, motion: Motion | None) -> FlowTable | None:
    """The flow that the certificate holds for a stance."""
    name = f"{stance}:flow" if stance else "flow"
    line = next((x for x in found.proof if (x["rule"], x["proves"]) == ("trajectory", name)), None)
    return None if line is None or motion is None else flow_table(line["witness"], motion)


class PointMap:
    """The map of one stance, and its target, at points."""

    def __init__(self, claim: Claim, found: Accepted, stance: str = "") -> None:
        self.obligations = o = Obligations(claim)
        self.states, self.claim = o.states, claim
        self.flows = flows_in(found, stance, o.motion)
        images, targets = [o.image(s) for s in o.states], [o.target(s) for s in o.states]
        self.variables: list[Variable] = together([*images, *targets])
        self.held = [v for v in self.variables if v.name in claim.uncertain and claim.uncertain[v.name].held]
        self.fresh = [v for v in self.variables if v not in self.held and v.name not in o.states]
        self._maps = [self._runner(x.root, [v.name for v in x.variables]) for x in images]
        self._aims = [self._runner(x.root, [v.name for v in x.variables]) for x in targets]

    def _runner(self, root: int, names: list[str]) -> Runner:
        program = compiled(self.obligations.graph, root, "", [])
        return Runner(program, names, self.claim.libraries, flows=self.flows)

    def next(self, values: Mapping[str, Floats]) -> Floats:
        """Next states (points, states); not finite where the map is not defined."""
        return _at(self._maps, values)

    def target(self, values: Mapping[str, Floats]) -> Floats:
        return _at(self._aims, values)

    def change(self, name: str) -> float:
        return to_float(self.obligations.change(name))


def _at(runners: Sequence[Runner], values: Mapping[str, Floats]) -> Floats:
    count = len(next(iter(values.values())))
    columns = []
    for run in runners:
        at = np.stack([values[n] for n in run.variables], axis=1) if run.variables else np.zeros((count, 0))
        columns.append(run(at, at, gradient=False).low)
    found: Floats = np.stack(columns, axis=1)
    return found


@dataclass(frozen=True)
class Walks:
    """Simulated errors (runs, steps + 1, states), the stance of each step, and the step they count as late from."""

    errors: Floats
    stances: tuple[str, ...]
    settled: int

    def late(self) -> Floats:
        """The last steps of every run: what is left in the long run."""
        found: Floats = self.errors[:, self.settled :]
        return found


def point_maps(found: Accepted) -> list[PointMap]:
    """One a stance, in the order of the claim."""
    claim = found.claim
    if not claim.stances[0].name:
        return [PointMap(claim, found)]
    return [PointMap(of_stance(claim, s.name), found, s.name) for s in claim.stances]


def settling(found: Accepted) -> int:
    """Steps after which little is left of where a run started, by the gain of the route; some, where there is none."""
    results, horizon = found.results, found.claim.horizon
    pair = results["routes"].get(results["route"]) or results
    ends = [(pair["gain"], "upper"), (pair["bound"], "upper"), (results["radius"], "upper")]
    k, bound, radius = (0.0 if x is None or x[end] is None else to_float(exact(x[end])) for x, end in ends)
    if not (0 < k < 1 and 0 < bound < radius < np.inf):
        return LATE
    return int(np.clip(horizon * np.log(LEFT * bound / radius) / np.log(k), LATE, LONGEST))


def walked(
    found: Accepted, maps: Sequence[PointMap], reach: Sequence[float], known: frozenset[str] = frozenset()
) -> Walks | None:
    """Runs that start `reach` from the target along each state, both ways, steered towards large errors.

    Quantities in `known` keep the middle of their range. Of several stances the first that may follow does. None where
    there is nothing finite.
    """
    claim, rng = found.claim, np.random.default_rng(SEED)
    count = len(maps[0].states)
    ways = _ways(count, np.asarray(reach), rng)
    names = [s.name for s in claim.stances]
    order = [0]
    settled = settling(found)
    for _ in range(settled + MORE):
        order.append(names.index(claim.stances[order[-1]].then[0]) if names[0] else 0)
    held = _held(maps, len(ways), known, rng)
    error = np.where(np.abs(ways).max(axis=1, keepdims=True) == 1, ways, 0.0) * np.asarray(reach)
    errors = [error]
    state = maps[0].target(_needed(maps[0], held, len(ways))) + error
    aims = _aimed(maps, order, ways / np.maximum(np.asarray(reach), 1e-12))
    for here, after, aim in zip(order, order[1:], aims, strict=False):
        state, held = _step(maps[here], maps[after], state, held, aim, known, rng)
        errors.append(state - maps[after].target(_needed(maps[after], held, len(ways))))
    kept = np.stack(errors, axis=1)
    finite = np.isfinite(kept).all(axis=(1, 2))
    return Walks(kept[finite], tuple(names[k] for k in order), settled) if finite.any() else None


def _aimed(maps: Sequence[PointMap], order: Sequence[int], ways: Floats) -> list[Floats]:
    """What each run looks at, a step: its direction at the end, carried back along the derivatives at the target."""
    slopes = [_slope(m) for m in maps]
    aims, aim = [ways], ways
    for here in reversed(order[1:-1]):
        carried = aim @ slopes[here]
        size = np.abs(carried).max(axis=1, keepdims=True)
        aim = np.where(np.isfinite(size) & (size > 1e-12), carried / np.maximum(size, 1e-300), aim)
        aims.append(aim)
    return aims[::-1]


def _slope(m: PointMap) -> Floats:
    """∂F/∂x at the target, all else in the middle, by differences: (next states, states)."""
    middle = {v.name: np.array([to_float(values_of(v)[len(values_of(v)) // 2])]) for v in m.variables}
    target = m.target(middle)
    columns = []
    for k, s in enumerate(m.states):
        low, high = (to_float(x) for x in m.obligations.region(s)[0])
        step = 1e-4 * (high - low)
        ends = []
        for side in (step, -step):
            at = middle | {n: target[:, j] + (side if j == k else 0.0) for j, n in enumerate(m.states)}
            ends.append(m.next(at)[0])
        columns.append((ends[0] - ends[1]) / (2 * step))
    found: Floats = np.stack(columns, axis=1)
    return found


def _ways(states: int, reach: Floats, rng: np.random.Generator) -> Floats:
    """Directions: each state up and down; then some that start at the target, of several states between the others."""
    each = np.concatenate([np.eye(states), -np.eye(states)])
    if states == 1:
        return np.concatenate([each, each / 2])
    more = rng.standard_normal((DIRECTIONS, states))
    return np.concatenate([each, 0.99 * more / np.abs(more).max(axis=1, keepdims=True)])


def _held(maps: Sequence[PointMap], runs: int, known: frozenset[str], rng: np.random.Generator) -> dict[str, Floats]:
    """Values of the held quantities at the start, a run: ends and middles in turn."""
    found: dict[str, Floats] = {}
    for v in (v for m in maps for v in m.held):
        if v.name not in found:
            choices = [to_float(x) for x in values_of(v)]
            middle = choices[len(choices) // 2]
            drawn = rng.choice(choices, runs)
            found[v.name] = np.full(runs, middle) if v.name in known else drawn
    return found


def _needed(m: PointMap, held: Mapping[str, Floats], count: int) -> dict[str, Floats]:
    return {v.name: held[v.name] for v in m.held} or {"": np.zeros(count)}


def _step(
    m: PointMap,
    after: PointMap,
    state: Floats,
    held: dict[str, Floats],
    ways: Floats,
    known: frozenset[str],
    rng: np.random.Generator,
) -> tuple[Floats, dict[str, Floats]]:
    """Each run's next state by the choice that leads it furthest along its way."""
    varied = [v for v in m.fresh if v.name.partition("(")[0] not in known]
    choices = combinations(varied, rng)[:MOST_CHOICES]
    if len(choices) == MOST_CHOICES:
        choices = [choices[int(k)] for k in rng.permutation(len(choices))]
    moves = [n for n in held if n not in known and m.claim.uncertain[n].change is not None]
    drifts = list(product((-1.0, 0.0, 1.0), repeat=len(moves)))[:27]
    runs, width = len(state), len(choices) * len(drifts)
    values = {s: np.repeat(state[:, k], width) for k, s in enumerate(m.states)}
    values |= {n: np.repeat(x, width) for n, x in held.items()}
    for v in m.fresh:
        if v in varied:
            each = np.array([to_float(c[v.name]) for c in choices])
        else:
            each = np.full(len(choices), to_float(values_of(v)[len(values_of(v)) // 2]))
        values[v.name] = np.tile(np.repeat(each, len(drifts)), runs)
    reached = m.next(values)
    later = dict(values)
    for k, n in enumerate(moves):
        low, high = ends_of(next(v for v in (*m.held, *after.held) if v.name == n))
        drift = np.tile(np.array([d[k] for d in drifts]), runs * len(choices))
        later[n] = np.clip(values[n] + drift * m.change(n), low, high)
    error = reached - after.target({n: later[n] for n in held} or {"": np.zeros(runs * width)})
    score = (error.reshape(runs, width, -1) * ways[:, None, :]).sum(axis=2)
    best = np.argmax(np.where(np.isfinite(score), score, -np.inf), axis=1) + np.arange(runs) * width
    return reached[best], {n: later[n][best] for n in held}


def measured(metric: Mapping[str, Any] | None, states: Sequence[str], errors: Floats) -> Floats:
    """‖e‖ in the norm of a certificate, of errors (…, states)."""
    v, p = rows_of(metric, states)
    found: Floats
    if p is not None:
        found = np.sqrt(np.einsum("...i,ij,...j->...", errors, p, errors))
    else:
        found = np.abs(errors @ v.T).max(axis=-1)
    return found


def rows_of(metric: Mapping[str, Any] | None, states: Sequence[str]) -> tuple[Floats, Floats | None]:
    """V of a box or polytope ‖Ve‖∞; of an ellipsoid a V with P = VᵀV, and P."""
    if metric is None or metric["kind"] == "box":
        weights = metric["weights"] if metric is not None else {}
        return np.diag([to_float(exact(weights.get(s, "1"))) for s in states]), None
    matrix = np.array([[to_float(exact(x)) for x in row] for row in metric["matrix"]])
    if metric["kind"] == "polytope":
        return matrix, None
    return np.linalg.cholesky(matrix).T, matrix
