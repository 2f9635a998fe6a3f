"""Random claims of two and three states, and trajectories steered against what is proved of them.

`python -m tests.several_campaign [COUNT]` prints the table of the campaign; tests/test_several_soundness.py runs it small.
"""

from __future__ import annotations

import random
import sys
import time
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from fractions import Fraction
from functools import cached_property
from itertools import product
from typing import Any

import numpy as np
from scipy.optimize import linprog

from tests.adversary import LENGTH, SWEEPS, System, farthest
from tests.campaign import NAMES, SMOOTH, library
from tests.conftest import proved

KINDS = {
    "smooth": [],
    "abs": ["abs({})", "abs({} - 0.1)"],
    "min max": ["max({}, 0.1)", "min({}, 0.5*d, 0.2)", "max({}, -0.2)"],
    "clip": ["clip({}, -0.2, 0.3)", "clip({}, -0.1, 0.15)"],
    "library of states": ["reach"],
    "library of times": ["reach"],
    "stance": [],
}
METRICS = ["auto", "auto", "box", "polytope", "ellipsoid"]
SLICES = 32  # of a stance, for Runge and Kutta's method
CANDIDATES, LOOK = 12, 15  # values tried a step; steps over which a functional is led back
RADIUS = 1e-9  # share of a radius that floating point may be off
OPEN = "no ball is proved to be kept, none is seen to be left"
Values = dict[str, Any]
Step = Callable[[Any, Values], Any]


@dataclass
class Case:
    """A claim and its map for simulation; `fresh` and `held`: lower end, upper end, change, list."""

    text: str
    data: dict[str, str]
    kind: str
    states: list[str]
    low: Any
    high: Any
    step: Step  # states (n, …), values -> states
    aim: Callable[[Values], Any]
    drawn: dict[str, tuple[float, float, float | None, list[float] | None]]
    within: Callable[[Any, Values], Any] | None = None  # largest X within a stance


@dataclass
class Tally:
    """What a campaign found."""

    claims: int = 0
    steps: int = 0
    contracting: int = 0
    bounded: int = 0
    unbounded: Counter[str] = field(default_factory=Counter)  # of those that contract, why
    seconds: float = 0.0
    ratios: dict[str, list[float]] = field(default_factory=dict)
    verdicts: Counter[str] = field(default_factory=Counter)
    reasons: Counter[str] = field(default_factory=Counter)
    sets: Counter[str] = field(default_factory=Counter)
    metrics: Counter[str] = field(default_factory=Counter)

    def table(self) -> str:
        rows = [f"{'kind':20}{'bounds':>8}{'median':>9}{'worst':>9}   upper/largest error found of bound(s)"]
        for kind, found in sorted(self.ratios.items()):
            rows.append(f"{kind:20}{len(found):8d}{np.median(found):9.3f}{max(found):9.3f}")
        rows.append(
            f"claims {self.claims}, of which simulation shows {self.contracting} to contract, of these bounded "
            f"{self.bounded}; simulated steps {self.steps}; {self.seconds / max(self.claims, 1):.2f} s a proof"
        )
        rows += [f"without a bound {n}: {why}" for why, n in self.unbounded.most_common()]
        rows.append("sets: " + ", ".join(f"{n} {k}" for k, n in self.sets.most_common()))
        rows.append("metrics: " + ", ".join(f"{n} {k}" for k, n in self.metrics.most_common()))
        rows.append("verdicts: " + ", ".join(f"{n} {k}" for k, n in self.verdicts.most_common()))
        rows += [f"undecided {n}: {reason}" for reason, n in self.reasons.most_common()]
        return "\n".join(rows)


ASKED = """
[[require]]
that = "settles"
[[require]]
that = "bound({last}) <= 0.4"
[[require]]
that = "push(x) >= 0.05"
[[require]]
that = "steps(x, 0.1, 0.08) <= 9"
[[require]]
that = "steps({last}, 0.1, 0.2) <= 9"
[[require]]
that = "value(next({last}))"
[[require]]
that = "always(next(x) <= 0.7)"
[[require]]
that = "sensitivity({last}, d)"
[[require]]
that = "gain < 0.95"
[effort]
gap = 0.02
cells = 3000
seconds = 15
"""


def case(seed: int) -> Case:
    """A random claim: seeds run through every kind, two and three states, metrics, moving targets."""
    kind = list(KINDS)[seed % len(KINDS)]
    return stance(seed) if kind == "stance" else closed(seed, kind)


def closed(seed: int, kind: str) -> Case:
    """Next error: a random matrix times the error, less than 1 in size, and little of other functions."""
    rng = random.Random(seed)
    n = 2 + seed // 7 % 2
    states = list("xyz"[:n])
    moving, held_time = rng.random() < 0.5, rng.random() < 0.5
    matrix = np.array([[rng.gauss(0, 1) for _ in states] for _ in states])
    matrix *= rng.uniform(0.2, 0.85) / np.abs(np.linalg.eigvals(matrix)).max()
    targets = {s: f"{rng.uniform(-0.05, 0.05):.3f}" for s in states}
    if moving:
        targets["x"] = "0.3*h"
    size = rng.uniform(0.01, 0.08)
    bodies = {}
    for i, s in enumerate(states):
        linear = " + ".join(f"({matrix[i, j]:.3f})*({x} - ({targets[x]}))" for j, x in enumerate(states))
        other = rng.choice(states)
        inner = rng.choice(SMOOTH).format(
            rng.choice([s, other, "d", f"({s}*T)", f"({s} - d)", f"({s} + 0.1*h)", f"({s}*{other})"])
        )
        outer = rng.choice(SMOOTH).format(f"(0.4*{rng.choice([inner, f'({other}*d)', f'(d - {other})'])})")
        bend = "0"
        if KINDS[kind] and (i == 0 or rng.random() < 0.3):
            bend = rng.choice(KINDS[kind]).format(
                rng.choice([s, f"({s} - {other})", f"({other} + 0.5*T - 0.2)", f"({s} - d)"])
            )
        mean = 0.8 if "exp" in inner + outer or "cosh" in inner + outer else 0.3
        bodies[s] = (
            f"{targets[s]} + {linear} + {size:.3f}*({outer} + {inner} + {bend} - {mean}) + {rng.uniform(-0.02, 0.02):.3f}*d"
        )
    spans = {s: (-round(rng.uniform(0.4, 1.0), 2), round(rng.uniform(0.4, 1.0), 2)) for s in states}
    rows, read = library(rng)
    uses = any("reach" in b for b in bodies.values())
    place = ("0.7*x + 0.1*d", "T") if kind == "library of states" else ("d", "T")
    times = [0.3, 0.45, 0.6]
    listed = rng.random() < 0.5
    period = "values = [0.3, 0.45, 0.6]" if listed else "range = [0.3, 0.6]"
    drawn: dict[str, tuple[float, float, float | None, list[float] | None]] = {
        "d": (-0.2, 0.3, None, None),
        "T": (0.3, 0.6, 0.0 if held_time else None, times if listed else None),
        "h": (-0.3, 0.3, 0.05, None),
    }
    text = "format = 1\n" + f"shrink = {'true' if rng.random() < 0.3 else 'false'}\n"
    text += "[state]\n" + "".join(f"{s} = [{a}, {b}]\n" for s, (a, b) in spans.items())
    text += f"[uncertain]\nd = [-0.2, 0.3]\nT = {{ {period}{', held = true' if held_time else ''} }}\n"
    text += "h = { range = [-0.3, 0.3], held = true, change = 0.05 }\n"
    if uses:
        text += f'[[library]]\nfile = "g.csv"\nat = {{ speed = "{place[0]}", period = "{place[1]}" }}\n'
    text += "[next]\n" + "".join(f'{s} = "{b}"\n' for s, b in bodies.items())
    text += "[target]\n" + "".join(f'{s} = "{t}"\n' for s, t in targets.items())
    text += f'[metric]\nkind = "{rng.choice(METRICS)}"\n' + ASKED.format(last=states[-1])
    names = {**NAMES, "read": read}
    code = [eval(f"lambda {', '.join(states)}, d, T, h: " + bodies[s].replace("reach", f"read({place[0]}, {place[1]})"), names)
            for s in states]  # texts of this module's own making  # fmt: skip
    aims = [eval(f"lambda h: {targets[s]} + 0*h", {}) for s in states]

    def step(x: Any, v: Values) -> Any:
        return np.stack(np.broadcast_arrays(*(f(*x, v["d"], v["T"], v["h"]) for f in code)))

    low, high = (np.array([spans[s][k] for s in states]) for k in (0, 1))
    return Case(
        text, {"g.csv": rows} if uses else {}, kind, states, low, high, step,
        lambda v: np.stack([f(v["h"]) for f in aims]), drawn,
    )  # fmt: skip


def stance(seed: int) -> Case:
    """An inverted pendulum whose height varies, placed by its capture point; a sum of errors as third state."""
    rng = random.Random(seed)
    n = 2 + seed // 7 % 2
    states = list("xvi"[:n])
    kappa, sway, loss = (
        round(rng.uniform(1.1, 1.35), 3),
        round(rng.uniform(0.0, 0.08), 3),
        round(rng.uniform(0, 0.1), 3),
    )
    feed = round(rng.uniform(0.0, 0.1), 3) if n == 3 else 0.0
    bend = round(rng.uniform(0.0, 0.1), 3)
    held_time = rng.random() < 0.5
    corner = rng.choice(["sin(2*x)", "abs(x)", "clip(x, -0.05, 0.05)"])
    third = 'i = "0.5*i + 0.2*X + 0.1*p"\n' if n == 3 else ""
    text = f"""
format = 1
[constants]
g = 9.81
z = 0.9
[state]
x = [-0.3, 0.3]
v = [-1, 1]
{"i = [-0.3, 0.3]" if n == 3 else ""}
[uncertain]
T = {{ range = [0.33, 0.4]{", held = true" if held_time else ""} }}
d = [-0.005, 0.005]
h = {{ range = [-0.1, 0.1], held = true, change = 0.02 }}
[define]
w = "sqrt(g/z)"
p = "{kappa}*(x + (v - 0.5*h)/w) + d + {bend}*{corner}{f" + {feed}*i" if n == 3 else ""}"
[dynamics]
duration = "T"
[dynamics.start]
X = "x - p"
V = "(1 - {loss})*(v - 0.5*h)"
[dynamics.rate]
X = "V"
V = "g/(z + {sway}*sin(3*t))*X"
[next]
x = "X + p"
v = "V + 0.5*h"
{third}
[target]
x = 0
v = "0.5*h"
{"i = 0" if n == 3 else ""}
[metric]
kind = "{rng.choice(METRICS)}"
[[require]]
that = "throughout(X <= 0.6)"
{ASKED.format(last=states[-1])}
"""
    foot = eval(
        f"lambda x, v, i, d, h: {kappa}*(x + (v - 0.5*h)/{(9.81 / 0.9) ** 0.5!r}) + d + {bend}*{corner} + {feed}*i",
        NAMES,
    )

    def move(x: Any, values: Values) -> tuple[Any, Any]:
        d, h = values["d"], values["h"]
        time_ = np.broadcast_arrays(values["T"], x[0])[0] / SLICES
        p = foot(x[0], x[1], x[2] if n == 3 else 0.0, d, h)
        at = np.stack(np.broadcast_arrays(x[0] - p, (1 - loss) * (x[1] - 0.5 * h), time_))[:2]
        t, most = 0.0 * time_, at[0].copy()

        def rate(t: Any, y: Any) -> Any:
            return np.stack([y[1], 9.81 / (0.9 + sway * np.sin(3 * t)) * y[0]])

        for _ in range(SLICES):
            a = rate(t, at)
            b = rate(t + time_ / 2, at + time_ / 2 * a)
            c = rate(t + time_ / 2, at + time_ / 2 * b)
            e = rate(t + time_, at + time_ * c)
            at, t = at + time_ / 6 * (a + 2 * b + 2 * c + e), t + time_
            most = np.maximum(most, at[0])
        after = [at[0] + p, at[1] + 0.5 * h, 0.5 * x[2] + 0.2 * at[0] + 0.1 * p if n == 3 else None]
        return np.stack(np.broadcast_arrays(*after[:n])), most

    drawn: dict[str, tuple[float, float, float | None, list[float] | None]] = {
        "T": (0.33, 0.4, 0.0 if held_time else None, None), "d": (-0.005, 0.005, None, None), "h": (-0.1, 0.1, 0.02, None)
    }  # fmt: skip

    def aim(v: Values) -> Any:
        h = np.asarray(v["h"])
        return np.stack([0 * h, 0.5 * h, 0 * h][:n])

    low, high = np.array([-0.3, -1, -0.3])[:n], np.array([0.3, 1, 0.3])[:n]
    return Case(
        text, {}, "stance", states, low, high, lambda x, v: move(x, v)[0], aim, drawn, lambda x, v: move(x, v)[1]
    )


@dataclass
class Ball:
    """The norm of the results, in floating point."""

    rows: Any
    round: bool

    @classmethod
    def of(cls, metric: dict[str, Any], states: list[str]) -> Ball:
        if metric["kind"] == "box":
            return cls(np.diag([float(Fraction(metric["weights"][s])) for s in states]), False)
        m = np.array([[float(Fraction(x)) for x in row] for row in metric["matrix"]])
        return cls(np.linalg.cholesky(m).T if metric["kind"] == "ellipsoid" else m, metric["kind"] == "ellipsoid")

    def size(self, e: Any) -> Any:
        """Of errors (n, …)."""
        image = np.tensordot(self.rows, e, 1)
        return np.sqrt((image**2).sum(axis=0)) if self.round else np.abs(image).max(axis=0)

    @cached_property
    def wide(self) -> Any:
        """How far the unit ball reaches along each state."""
        count, n = self.rows.shape
        if count > n:
            both, ends = np.vstack([self.rows, -self.rows]), np.ones(2 * count)
            return np.array([-linprog(-u, A_ub=both, b_ub=ends, bounds=(None, None)).fun for u in np.eye(n)])
        inverse = np.linalg.inv(self.rows)
        return np.sqrt((inverse**2).sum(axis=1)) if self.round else np.abs(inverse).sum(axis=1)

    def largest(self, room: Any) -> float:
        return float((room / self.wide).min())


def upper(x: dict[str, Any] | None) -> float | None:
    return None if x is None or x["upper"] is None else float(Fraction(x["upper"]))


def lower(x: dict[str, Any] | None) -> float | None:
    return None if x is None or x["lower"] is None else float(Fraction(x["lower"]))


class Run:
    """One claim proved, and simulated against what is proved."""

    def __init__(self, seed: int, tally: Tally, trajectories: int = 96, length: int = 300) -> None:
        self.c, self.seed, self.tally, self.n = case(seed), seed, tally, trajectories
        self.length = length if self.c.kind != "stance" else length // 3
        self.rng = np.random.default_rng(seed)
        start = time.monotonic()
        self.results = proved(self.c.text, data=self.c.data).results
        tally.seconds += time.monotonic() - start
        tally.claims += 1
        r, c = self.results, self.c
        self.kind = r["set"]["kind"] if r["set"] else "none"
        tally.sets[self.kind] += 1
        tally.metrics[r["metric"]["kind"]] += 1
        for e in r["requirements"]:
            tally.verdicts[e["verdict"]] += 1
            if e["verdict"] == "undecided":
                tally.reasons[e["limited_by"].split(":")[0][:70]] += 1
        self.ball = Ball.of(r["metric"], c.states)
        held = {
            k: np.linspace(a, b, 101) for k, (a, b, change, _) in c.drawn.items() if change is not None and k == "h"
        }
        aims = c.aim(held)
        self.room = np.minimum(aims.min(axis=1) - c.low, c.high - aims.max(axis=1))
        self.radius = self.ball.largest(self.room)
        if self.kind in ("ball", "smaller ball"):
            self.radius = float(Fraction(r["radius"]["lower"]))
        self.gain, self.residual = upper(r["gain"]), upper(r["residual"])
        self.bounds = [upper(r["states"][s]["bound"]) for s in c.states]

    def values(self, shape: tuple[int, ...]) -> Values:
        """Fresh values, many at the ends of their ranges."""
        found = {}
        for name, (a, b, _, listed) in self.c.drawn.items():
            if listed:
                found[name] = self.rng.choice(listed, shape)
            else:
                x = self.rng.uniform(a, b, shape)
                found[name] = np.where(self.rng.random(shape) < 0.6, np.where(self.rng.random(shape) < 0.5, a, b), x)
        return found

    def next_held(self, held: Values, shape: tuple[int, ...]) -> Values:
        found = {}
        for name, x in held.items():
            a, b, change, _ = self.c.drawn[name]
            found[name] = (
                np.clip(x + self.rng.choice([-1.0, 0.0, 1.0], shape) * (change or 0.0), a, b)
                if change
                else x + np.zeros(shape)
            )
        return found

    def starts(self, held: Values) -> tuple[Any, Any]:
        """In the set: a quarter on target, some along single states as far as the radius allows, the rest anywhere.

        Returns the states, and for each trajectory the state that alone is off target (or -1)."""
        c, n = self.c, self.n
        dims, aims, alone = len(c.states), c.aim(held), np.full(n, -1)
        if self.kind in ("region", "none"):
            x = self.rng.uniform(c.low[:, None], c.high[:, None], (dims, n))
            edge = self.rng.random((dims, n)) < 0.3
            x = np.where(edge, np.where(self.rng.random((dims, n)) < 0.5, c.low[:, None], c.high[:, None]), x)
            if self.kind == "none":
                x = aims + 0.3 * (x - aims)
        else:
            e = self.rng.standard_normal((dims, n))
            e = np.linalg.pinv(self.ball.rows)[:, :dims] @ e if self.rng.random() < 0.7 else e
            x = aims + e / self.ball.size(e) * self.radius * np.where(
                self.rng.random(n) < 0.5, 1 - RADIUS, self.rng.random(n)
            )
        x[:, : n // 4] = aims[:, : n // 4]
        for i, s in enumerate(c.states):
            reach = lower(self.results["states"][s]["radius"])
            part = slice(n // 4 + 8 * i, n // 4 + 8 * i + 8)
            if reach is not None:
                x[:, part] = aims[:, part]
                x[i, part] += reach * (1 - RADIUS) * np.array([1, -1, 1, -1, 0.5, -0.5, 0.1, -0.1])
                short = n // 4 + 8 * i + 6
                x[i, short : short + 2] = aims[i, short : short + 2] + min(reach, 0.1) * (1 - RADIUS) * np.array(
                    [1, -1]
                )
                alone[part] = i
        return x, alone

    def inside(self, x: Any, aims: Any) -> Any:
        c = self.c
        if self.kind == "region":
            slack = 1e-9 + (1e-7 if c.kind == "stance" else 0)
            shape = (-1,) + (1,) * (x.ndim - 1)
            return ((x >= c.low.reshape(shape) - slack) & (x <= c.high.reshape(shape) + slack)).all(axis=0)
        return self.ball.size(x - aims) <= self.radius * (1 + self.slack)

    @property
    def slack(self) -> float:
        return 1e-6 if self.c.kind == "stance" else 1e-8

    def run(self) -> None:
        c, n, tally, dims = self.c, self.n, self.tally, len(self.c.states)
        held = {k: self.values((n,))[k] for k, q in c.drawn.items() if q[2] is not None}
        x, alone = self.starts(held)
        on_target = np.arange(n) < n // 4
        start_size = self.ball.size(x - c.aim(held))
        functionals = self.functionals()
        which = self.rng.integers(0, dims, n)
        signs = self.rng.choice([-1.0, 1.0], n)
        manner = np.arange(n) % 4  # led back, largest error of a state, largest norm, at random
        steps = {i: (self.entry(f"steps({s}")) for i, s in enumerate(c.states)}
        first = np.abs(x - c.aim(held))
        worst, stayed = np.zeros(dims), True
        wide = self.ball.wide
        k, e = self.gain, self.residual
        for step in range(1, self.length + 1):
            shape = (CANDIDATES, n)
            values = {**self.values(shape), **{q: v + np.zeros(shape) for q, v in held.items()}}
            after = c.step(x[:, None, :] + np.zeros((dims, *shape)), values)
            later = self.next_held(held, shape)
            aims_now, aims = c.aim(held), c.aim(later)
            error = after - aims
            if self.kind != "none":
                self.check_step(x, after, values, aims_now, error)
            score = np.where(
                manner == 0,
                np.einsum("nk,kcn->cn", functionals[step % LOOK][which], error) * signs,
                self.ball.size(error),
            )
            each = np.take_along_axis(np.abs(error), np.broadcast_to(which, (1, CANDIDATES, n)), axis=0)[0]
            score = np.where(manner == 1, each, score)
            score = np.where(manner == 3, self.rng.random(shape), score)
            pick, columns = np.argmax(score, axis=0), np.arange(n)
            x = after[:, pick, columns]
            held = {q: v[pick, columns] for q, v in later.items()}
            tally.steps += n
            error = x - c.aim(held)
            size = self.ball.size(error)
            if self.kind == "none":
                if not np.all((x >= c.low[:, None]) & (x <= c.high[:, None])):
                    stayed = False
                    break
            else:
                assert k is not None and e is not None, (self.seed, "set without gain")
                assert np.all(self.inside(x, c.aim(held))), (self.seed, "set left")
                if k < 1:
                    reach = k**step * start_size + e * (1 - k**step) / (1 - k)
                    assert np.all(size <= reach * (1 + 1e-6) + 1e-9), (self.seed, "envelope", step)
                if step > self.length - 40:
                    for i, bound in enumerate(self.bounds):  # in the long run: what is left fades no slower than this
                        left = self.radius * float(wide[i]) * k ** (step / 2) if k < 1 else 0.0
                        assert bound is None or np.all(np.abs(error[i]) <= bound * (1 + 1e-6) + left + 1e-9), (
                            self.seed,
                            "bound in the long run",
                        )
                for i, found in steps.items():
                    count = upper(found["value"]) if found is not None else None
                    if count is not None and step >= count:
                        start, end = (0.1, 0.08) if i == 0 else (0.1, 0.2)
                        some = ((alone == i) | on_target) & (first[i] <= start)
                        assert np.all(np.abs(error[i, some]) <= end + 1e-7), (self.seed, "steps", i)
            if step > min(60, self.length // 2):
                worst = np.maximum(worst, np.abs(error[:, on_target | (step > self.length - 40)]).max(axis=1))
        else:
            self.check_end(x, held, on_target, k)
            worst = np.maximum(worst, self.led_away())
        room = np.minimum(c.high - 0.1, -c.low - 0.1)
        if stayed and np.all(worst < 0.6 * room):
            tally.contracting += 1
            tally.bounded += None not in self.bounds
            if None in self.bounds:
                tally.unbounded[self.unkept()] += 1
        if stayed:
            for bound, found in zip(self.bounds, worst, strict=True):
                if bound is not None and found > 1e-9:
                    tally.ratios.setdefault(c.kind, []).append(bound / float(found))

    def unkept(self) -> str:
        """What trajectories tell of the balls about the target, where none is proved to be kept.

        A ball is kept if errors of either sign, about any target that held values may make, are led into it by every
        value: so errors from 0 whose signs an adversary may turn at each step stay in each ball that is kept.
        """
        c, dims = self.c, len(self.c.states)
        a, b, change, _ = c.drawn["h"]
        lists = {k: listed or [low, (low + high) / 2, high] for k, (low, high, _, listed) in c.drawn.items()}
        lists |= {"turn": [-1.0, 0.0, 1.0], "sign": [1.0, -1.0]}

        def step(e: Any, v: Values) -> Any:
            later = {**v, "h": np.clip(v["h"] + v["turn"] * (change or 0.0), a, b)}
            return v["sign"] * (c.step(c.aim(v) + e, v) - c.aim(later))

        fresh = {k: (min(x), max(x), None, x) for k, x in lists.items()}
        far = farthest(System(dims, step, lambda v: np.zeros((dims, 1)), fresh), self.rng)
        if np.any(far > self.room):
            return "every ball about the target is left, whatever the norm"
        if self.results["metric"]["kind"] == "box" and 'kind = "box"' in c.text:
            e = self.rng.uniform(-1, 1, (dims, 2000))
            e = (
                np.where(self.rng.random(e.shape) < 0.6, np.sign(e), e)
                * (self.radius / np.diag(self.ball.rows))[:, None]
            )
            each = [dict(zip(lists, x, strict=True)) for x in product(*lists.values())]
            led = max(float(self.ball.size(step(e, {k: x + np.zeros(2000) for k, x in v.items()})).max()) for v in each)
            if led > self.radius:
                return "the largest ball of the box asked for is left"
        return OPEN

    def led_away(self) -> Any:
        """How far states come from their targets in the long run if all values conspire: within the bounds."""
        c, k = self.c, self.gain
        if all(bound is None for bound in self.bounds):
            return np.zeros(len(c.states))
        found = farthest(System(len(c.states), c.step, c.aim, c.drawn), self.rng)
        self.tally.steps += SWEEPS * LENGTH
        wide = self.ball.wide
        left = self.radius * wide * k ** (SWEEPS // 2 * LENGTH) if k is not None and k < 1 else 0.0 * wide
        for bound, far, rest in zip(self.bounds, found, left, strict=True):
            assert bound is None or far <= bound * (1 + 1e-6) + rest + 1e-9, (self.seed, "bound, led away")
        return found

    def entry(self, that: str) -> dict[str, Any] | None:
        return next((e for e in self.results["requirements"] if e["that"].startswith(that)), None)

    def functionals(self) -> Any:
        """Rows of powers of the Jacobian at the target, (LOOK, n, n): what a step adds to an error later."""
        c, dims = self.c, len(self.c.states)
        mean = {k: np.array((a + b) / 2 if not listed else listed[1]) for k, (a, b, _, listed) in c.drawn.items()}
        centre = c.aim(mean)
        columns = [(c.step(centre + d, mean) - c.step(centre - d, mean)) / 2e-4 for d in 1e-4 * np.eye(dims)]
        a = np.stack(columns, axis=1)
        return np.stack([np.linalg.matrix_power(a, LOOK - 1 - j) for j in range(LOOK)])

    def check_step(self, x: Any, after: Any, values: Values, aims_now: Any, error: Any) -> None:
        """What holds of every step from the set under every value."""
        c, r, n = self.c, self.results, self.n
        k, e = self.gain, self.residual
        before = self.ball.size(x - aims_now)
        if k is not None and e is not None:
            assert np.all(self.ball.size(error) <= (k * before + e) * (1 + self.slack) + 1e-9), (
                self.seed,
                "inequality",
            )
            other = x + self.rng.uniform(-1, 1, x.shape) * self.rng.choice([1e-3, 0.3]) * (c.high - c.low)[:, None]
            both = self.inside(other, aims_now)
            one = {q: v[0] for q, v in values.items()}
            with np.errstate(all="ignore"):
                moved = self.ball.size(c.step(other, one) - after[:, 0])
            apart = self.ball.size(other - x)
            assert np.all((moved <= k * apart * (1 + self.slack) + 1e-8)[both]), (self.seed, "gain")
        last = after[-1]
        value = self.entry("value(")
        if value is not None and value["value"] is not None:
            low, high = lower(value["value"]), upper(value["value"])
            assert low is not None and high is not None
            assert low - 1e-7 <= last.min() and last.max() <= high + 1e-7, (self.seed, "value")
        always = self.entry("always(")
        if always is not None and always["verdict"] == "proved":
            assert after[0].max() <= 0.7 + 1e-7, (self.seed, "always")
        throughout = self.entry("throughout(")
        if throughout is not None and throughout["verdict"] == "proved" and c.within is not None:
            some = {q: v[0] for q, v in values.items()}
            assert c.within(x, some).max() <= 0.6 + 1e-7, (self.seed, "throughout")
        band = next((b for b in r["sensitivities"] if b["by"] == "d"), None)
        if band is not None:
            one = {q: v[0] for q, v in values.items()}
            a, b, _, _ = c.drawn["d"]
            two = {**one, "d": np.clip(one["d"] + self.rng.choice([-1, 1], n) * 0.01 * (b - a), a, b)}
            by = two["d"] - one["d"]
            some = np.abs(by) > 1e-3 * (b - a)
            rate = (c.step(x, two)[-1] - after[-1, 0])[some] / by[some]
            low, high = lower(band), upper(band)
            assert low is not None and high is not None
            assert np.all((rate >= low - 1e-5) & (rate <= high + 1e-5)), (self.seed, "sensitivity")

    def check_end(self, x: Any, held: Values, on_target: Any, k: float | None) -> None:
        """Bounds in the long run, and pushes after settling."""
        c, aims = self.c, self.c.aim(held)
        if self.kind == "none":
            return
        wide = self.ball.wide
        for i, (s, bound) in enumerate(zip(c.states, self.bounds, strict=True)):
            left = self.radius * float(wide[i]) * k**self.length if k is not None and k < 1 else np.inf
            if bound is not None:
                assert np.all(np.abs(x - aims)[i] <= bound * (1 + 1e-6) + left + 1e-9), (self.seed, "bound")
            push = lower(self.results["states"][s]["push"])
            if push is not None:
                moved = x.copy()
                moved[i] += push * (1 - 1e-6) * self.rng.choice([-1, 1], self.n)
                assert np.all(self.inside(moved, aims)[on_target]), (self.seed, "push")


def run(seed: int, tally: Tally) -> None:
    """Proves one claim and simulates against it. Raises AssertionError where anything proved is left."""
    Run(seed, tally).run()


def main(count: int, first: int = 0) -> None:
    tally = Tally()
    for seed in range(first, first + count):
        try:
            run(seed, tally)
        except Exception as why:
            print("seed", seed, case(seed).kind, type(why).__name__, str(why)[:300], flush=True)
    print(tally.table())


if __name__ == "__main__":
    main(*map(int, sys.argv[1:] or ["42"]))
