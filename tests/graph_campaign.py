"""Random claims of two and three stances, and trajectories steered against what is proved of them.

`python -m tests.graph_campaign [COUNT [HORIZON]]` prints the table of the campaign; tests/test_graph_soundness.py runs it small.
"""

from __future__ import annotations

import random
import sys
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any

import numpy as np

from tests.conftest import proved
from ultibound.claim import ClaimError

SHAPES = ["linear", "smooth", "corners"]
STEPS, WALKS = 120, 160
ROUND = 1e-9  # what floating point may be off


@dataclass
class Case:
    """A claim and its maps: `step[s]` takes states (walks, n), and values of d, e, c (walks, 3)."""

    text: str
    states: list[str]
    then: dict[str, list[str]]
    step: dict[str, Any]
    aim: dict[str, Any]
    low: dict[str, Any]
    high: dict[str, Any]
    moving: bool
    horizon: int


@dataclass
class Tally:
    """What a campaign found."""

    claims: int = 0
    bounded: int = 0
    contracting: int = 0
    refused: int = 0
    walked: int = 0
    nearest: list[float] = field(default_factory=list)
    reached: list[float] = field(default_factory=list)

    def table(self) -> str:
        near = f"{np.median(self.nearest):.2f}, at most {max(self.nearest):.2f}" if self.nearest else "none"
        orbits = f"{np.median(self.reached):.2f}, at least {min(self.reached):.2f}" if self.reached else "none"
        return (
            f"claims {self.claims}, bounded {self.bounded}, contracting by simulation {self.contracting}, refused {self.refused}, "
            f"steps {self.walked}\nlargest error in the long run over its proved bound: median {near}\n"
            f"what proved orbits reach over the proved bound: median {orbits}"
        )


def drawn(seed: int, horizon: int = 1) -> Case:
    """One to three states, two or three stances, any order; a third of the claims with a target that moves."""
    rng = random.Random(seed)
    n, shape = 1 + seed % 3, SHAPES[seed // 3 % 3]
    states, names = ["x", "y", "z"][:n], ["a", "b", "c"][: 2 + rng.randrange(2)]
    moving = rng.random() < 0.35
    then = {s: rng.sample(names, 1 + (rng.random() < 0.4)) for s in names}
    if rng.random() < 0.5:
        then = {s: [names[(k + 1) % len(names)]] for k, s in enumerate(names)}
    strength = rng.uniform(0.3, 1.1)
    aim, matrix, bend, wide = {}, {}, {}, {}
    for s in names:
        aim[s] = np.round([rng.uniform(-0.3, 0.3) for _ in states], 2)
        a = np.array([[rng.uniform(-1, 1) for _ in states] for _ in states])
        matrix[s] = np.round(a * strength / max(1e-9, np.abs(a).sum(axis=1).max()) * rng.choice([1, 1, 1.6, 0.4]), 3)
        bend[s], wide[s] = round(rng.uniform(-0.2, 0.2), 2), [round(rng.uniform(1.2, 2.5), 1) for _ in states]
    follow = {s: aim[then[s][0]] for s in names}
    apart, named = random.Random(seed + 10**6), [f"f{i}" for i in range(n)]  # half of them told apart from a correction
    told = apart.sample(named, apart.randint(1, n)) if apart.random() < 0.5 and horizon == 1 else []
    turned = {s: [x for x in states if apart.random() < 0.4] if told else [] for s in names}
    top = f"format = 1\nhorizon = {horizon}\nshrink = {rng.choice(['true', 'false'])}\n"
    top += f"correction = {told!r}\nroute = {apart.choice(['best', 'best', 'best', 'split'])!r}\n" if told else ""
    kind = rng.choice(["auto", "auto", "box", "polytope", "ellipsoid"])
    top += f'[metric]\nkind = "{kind}"\n' if n > 1 else ""
    text = top + "[uncertain]\nd = [-0.02, 0.02]\ne = [-0.01, 0.02]\n"
    text += f"c = {{ range = [-0.05, 0.05], held = true{', change = 0.01' if moving else ''} }}\n"
    for s in names:
        order = rng.sample(range(n), n) if s != "a" else range(n)  # rows of a metric are in the order of the first
        spans = ", ".join(f"{states[i]} = [{aim[s][i] - wide[s][i]:.2f}, {aim[s][i] + wide[s][i]:.2f}]" for i in order)
        goals = ", ".join(f'{states[i]} = "{aim[s][i]} + c*{i + 1}/10"' for i in order)
        maps, moved = [], []
        for i in order:
            keeps = (-1 if states[i] in turned[s] else 1) if told else 0
            less = [matrix[s][i][j] - (keeps if i == j else 0) for j in range(n)]
            by = " + ".join(f"({less[j]:.3f})*({states[j]} - target({states[j]}))" for j in range(n))
            moved.append(f'{named[i]} = "{by}"')
            sums = (
                f"{keeps}*({states[i]} - target({states[i]})) + {named[i]}"
                if told
                else " + ".join(f"({matrix[s][i][j]})*({states[j]} - target({states[j]}))" for j in range(n))
            )
            curve = {
                "linear": "0",
                "smooth": f"{bend[s]}*sin({states[0]})*{states[-1]}/4",
                "corners": f"{bend[s]}*abs({states[-1]} - 0.1)/2",
            }[shape]
            maps.append(f'{states[i]} = "{follow[s][i]} + {sums} + d + e*{i} + {curve} + c/20"')
        text += f"[stance.{s}]\nthen = {then[s]!r}\nstate = {{ {spans} }}\ntarget = {{ {goals} }}\nnext = {{ {', '.join(maps)} }}\n"
        text += f"mirror = {turned[s]!r}\ndefine = {{ {', '.join(moved)} }}\n" if told else ""
    asked = [
        "settles",
        *(f"bound({x}) <= 3" for x in states),
        f"radius({states[0]}) >= 0.1",
        f"push({states[0]}) >= 0.1",
        f"steps({states[0]}, 0.5, 0.3) <= 500",
        "gain <= 3",
        "residual <= 9",
    ]
    text += "".join(f'[[require]]\nthat = "{r}"\n' for r in asked)
    text += (
        f'[[require]]\nthat = "value({states[-1]}**2 + d)"\n[[require]]\nthat = "value(next({states[0]}))"\nin = "a"\n'
    )

    def goal(s: str) -> Any:
        return lambda c: aim[s] + c[:, None] * np.arange(1, n + 1) / 10

    def step(s: str) -> Any:
        def inner(x: Any, w: Any) -> Any:
            e = x - goal(s)(w[:, 2])
            curve = {
                "linear": 0 * x[:, 0],
                "smooth": bend[s] * np.sin(x[:, 0]) * x[:, -1] / 4,
                "corners": bend[s] * np.abs(x[:, -1] - 0.1) / 2,
            }[shape]
            added = w[:, :1] + w[:, 1:2] * np.arange(n) + curve[:, None] + w[:, 2:] / 20
            return follow[s] + e @ matrix[s].T + added

        return inner

    low = {s: np.array([round(aim[s][i] - wide[s][i], 2) for i in range(n)]) for s in names}
    high = {s: np.array([round(aim[s][i] + wide[s][i], 2) for i in range(n)]) for s in names}
    return Case(
        text.replace("'", '"'),
        states,
        then,
        {s: step(s) for s in names},
        {s: goal(s) for s in names},
        low,
        high,
        moving,
        horizon,
    )


def norm_of(metric: dict[str, Any], e: Any) -> Any:
    """‖e‖ in a metric of `results`, by rows."""
    if metric["kind"] == "box":
        return np.max([np.abs(e[:, i]) * float(Fraction(w)) for i, w in enumerate(metric["weights"].values())], axis=0)
    m = np.array([[float(Fraction(x)) for x in row] for row in metric["matrix"]])
    return np.abs(e @ m.T).max(axis=1) if metric["kind"] == "polytope" else np.sqrt(np.einsum("ki,ij,kj->k", e, m, e))


def values(rng: np.random.Generator, count: int) -> Any:
    """d, e, c: mostly at their ends."""
    low, high = np.array([-0.02, -0.01, -0.05]), np.array([0.02, 0.02, 0.05])
    x = rng.uniform(low, high, (count, 3))
    return np.where(rng.random((count, 3)) < 0.8, np.where(rng.random((count, 3)) < 0.5, low, high), x)


def run(seed: int, tally: Tally, horizon: int = 1) -> None:
    """Proves a claim and looks for a trajectory, a point or a count of steps that goes beyond what is proved."""
    case, rng = drawn(seed, horizon), np.random.default_rng(seed)
    tally.claims += 1
    try:
        r = proved(case.text).results
    except ClaimError:
        tally.refused += 1
        return
    contracts, far = simulated(case, r, rng, tally)
    tally.contracting += contracts
    if r["set"] is None:
        return
    bounds = {s: [x["bound"] for x in one["states"].values()] for s, one in r["stances"].items()}
    if any(b is None or b["upper"] is None for several in bounds.values() for b in several):
        return
    tally.bounded += 1
    for b in (b for several in bounds.values() for b in several if float(Fraction(b["upper"])) > 0):
        low = Fraction(b["lower"] or 0)
        assert low <= Fraction(b["upper"]), (seed, b)
        tally.reached.append(float(low / Fraction(b["upper"])))
    for s, errors in far.items():
        for e, b in zip(errors, bounds[s], strict=True):
            assert e <= float(Fraction(b["upper"])) * (1 + ROUND) + 1e-6, (seed, s, e, b)
            if float(Fraction(b["upper"])) > 0 and e > 0:
                tally.nearest.append(e / float(Fraction(b["upper"])))


def simulated(case: Case, r: dict[str, Any], rng: np.random.Generator, tally: Tally) -> tuple[bool, dict[str, Any]]:
    """Walks from all over the certified sets; the largest errors late in the walks, stance by stance."""
    names, n = list(case.then), len(case.states)
    steps = r["requirements"][n + 3]
    far, late = {s: np.zeros(n) for s in names}, STEPS - 40
    for start in names:
        stance, w = start, values(rng, WALKS)
        goal = case.aim[stance](w[:, 2])
        if r["set"] is None:
            x = goal + rng.uniform(-0.3, 0.3, (WALKS, n))
        elif r["set"]["kind"] == "region":
            x = np.where(
                rng.random((WALKS, n)) < 0.5,
                np.where(rng.random((WALKS, n)) < 0.5, case.low[start], case.high[start]),
                rng.uniform(case.low[start], case.high[start], (WALKS, n)),
            )
        else:
            e = rng.standard_normal((WALKS, n))
            e *= (
                float(Fraction(r["stances"][start]["set"]["radius"]["lower"]))
                * (1 - 1e-9)
                / norm_of(r["stances"][start]["metric"], e)
            )[:, None]
            x = goal + e
        if steps["verdict"] == "proved":
            x[: WALKS // 4] = goal[: WALKS // 4]
            x[: WALKS // 4, 0] += np.where(rng.random(WALKS // 4) < 0.5, -0.5, 0.5)
        bias = rng.standard_normal((WALKS, n))
        past = list[tuple[str, Any]]()
        for k in range(STEPS):
            tally.walked += WALKS
            inside(case, r, stance, x, w[:, 2])
            if r["set"] is not None and steps["verdict"] == "proved" and k >= float(Fraction(steps["value"]["upper"])):
                assert (np.abs(x - case.aim[stance](w[:, 2]))[: WALKS // 4, 0] <= 0.3 + 1e-7).all(), stance
            after = case.then[stance][int(rng.integers(len(case.then[stance])))]
            fresh = np.stack([values(rng, WALKS) for _ in range(4)])
            fresh[:, :, 2] = w[:, 2]  # held, but for what it may move
            if k % 15 == 0:
                bias = rng.standard_normal((WALKS, n))
            ahead = np.stack([case.step[stance](x, y) for y in fresh])
            best = np.argmax(np.einsum("kwi,wi->kw", ahead, bias), axis=0)
            error = x - case.aim[stance](w[:, 2])
            x, w = ahead[best, np.arange(WALKS)], fresh[best, np.arange(WALKS)]
            ranges(case, r, stance, x)
            if case.moving:
                w = w.copy()
                w[:, 2] = np.clip(w[:, 2] + rng.choice([-0.01, 0.0, 0.01], WALKS), -0.05, 0.05)
            past = [*past[1 - case.horizon :], (stance, error)] if case.horizon > 1 else [(stance, error)]
            if r["set"] is not None and len(past) == case.horizon:
                paired(r, *past[0], after, x - case.aim[after](w[:, 2]))
            stance = after
            if not np.isfinite(x).all() or np.abs(x).max() > 1e6:
                return False, far
            if k >= late:
                far[stance] = np.maximum(far[stance], np.abs(x - case.aim[stance](w[:, 2])).max(axis=0))
    return bool(max(f.max() for f in far.values()) < 1.0), far


def paired(r: dict[str, Any], before: str, error: Any, after: str, next_: Any) -> None:
    """Every route's gain and residual bound the error after a step, or a horizon, in the norms of both stances."""
    sizes = [norm_of(r["stances"][s]["metric"], e) for s, e in ((before, error), (after, next_))]
    for route, pair in r["routes"].items():
        k, eps = (float(Fraction(pair[x]["upper"])) for x in ("gain", "residual"))
        assert (sizes[1] <= (k * sizes[0] + eps) * (1 + 1e-7) + 1e-7).all(), (before, after, route)


def inside(case: Case, r: dict[str, Any], stance: str, x: Any, c: Any) -> None:
    """No walk leaves the certified sets, nor what a value over them is proved to be."""
    if r["set"] is None:
        return
    one = r["stances"][stance]
    if one["set"]["kind"] == "region":
        assert (x >= case.low[stance] - 1e-7).all() and (x <= case.high[stance] + 1e-7).all(), stance
    else:
        size = norm_of(one["metric"], x - case.aim[stance](c))
        assert (
            size <= float(Fraction(one["set"]["radius"]["upper"] or one["set"]["radius"]["lower"])) * (1 + 1e-7)
        ).all(), stance
    value = r["requirements"][-2]
    if value["verdict"] == "proved":
        assert (x[:, -1] ** 2 + 0.02 <= float(Fraction(value["value"]["upper"])) + 1e-7).all()


def ranges(case: Case, r: dict[str, Any], stance: str, after: Any) -> None:
    value = r["requirements"][-1]
    if r["set"] is not None and stance == "a" and value["verdict"] == "proved":
        assert (after[:, 0] <= float(Fraction(value["value"]["upper"])) + 1e-7).all()
        assert (after[:, 0] >= float(Fraction(value["value"]["lower"])) - 1e-7).all()


if __name__ == "__main__":
    total = Tally()
    for number in range(int(sys.argv[1]) if len(sys.argv) > 1 else 60):
        run(number, total, int(sys.argv[2]) if len(sys.argv) > 2 else 1)
    print(total.table())
