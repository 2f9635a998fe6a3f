"""Random claims of one to three states with a horizon, and trajectories steered, step by step, against what is proved.

`python -m tests.horizon_campaign [COUNT] [FIRST]` prints the table of the campaign; tests/test_horizon.py runs it small.
"""

from __future__ import annotations

import random
import sys
import time
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any

import numpy as np

from tests.campaign import NAMES, library
from tests.conftest import proved
from tests.several_campaign import METRICS, Ball, Case, Values, lower, upper

KINDS = {
    "linear": ["0"],
    "smooth": ["sin({})", "tanh({})", "({})**2", "cos({})", "exp(0.3*{})"],
    "corners": ["abs({})", "clip({}, -0.1, 0.15)", "max({}, 0.1)", "min({}, 0.5*d, 0.2)"],
    "library": ["reach"],
    "correction": ["sin({})", "clip({}, -0.1, 0.15)"],
}
CANDIDATES, HORIZONS, TRAJECTORIES = 8, 40, 64
CLOSE = 1e-7  # what floating point may be off
ASKED = """
[[require]]
that = "settles"
[[require]]
that = "gain < 0.9"
[[require]]
that = "bound({last}) <= 0.3"
[[require]]
that = "push(x) >= 0.01"
[[require]]
that = "steps(x, 0.05, 0.2) <= 40"
[[require]]
that = "steps({last}, 0.05, 0.2) <= 40"
[[require]]
that = "value(next({last}))"
[[require]]
that = "always(next(x) <= 0.7)"
[[require]]
that = "sensitivity({last}, d)"
[effort]
gap = 0.05
cells = 2000
seconds = 10
"""


@dataclass
class Tally:
    """What a campaign found."""

    claims: int = 0
    steps: int = 0
    settled: int = 0
    seconds: float = 0.0
    ratios: dict[str, list[float]] = field(default_factory=dict)
    sets: Counter[str] = field(default_factory=Counter)
    verdicts: Counter[str] = field(default_factory=Counter)

    def table(self) -> str:
        rows = [f"{'kind':14}{'bounds':>8}{'median':>9}{'worst':>9}   bound(s)/largest error found"]
        for kind, found in sorted(self.ratios.items()):
            rows.append(f"{kind:14}{len(found):8d}{np.median(found):9.3f}{max(found):9.3f}")
        rows.append(f"claims {self.claims}, settled {self.settled}; simulated steps {self.steps}; {self.seconds / max(self.claims, 1):.2f} s a proof")  # fmt: skip
        rows.append("sets: " + ", ".join(f"{n} {k}" for k, n in self.sets.most_common()))
        rows.append("verdicts: " + ", ".join(f"{n} {k}" for k, n in self.verdicts.most_common()))
        return "\n".join(rows)


def case(seed: int) -> tuple[Case, int]:
    """A random claim and its horizon: seeds run through every kind, one to three states, horizons of 2 to 5.

    The next error is a matrix times the error, less than 1 in the long run and often more at first, and little of other functions.
    """
    rng = random.Random(seed)
    kind, horizon = list(KINDS)[seed % len(KINDS)], 2 + seed // len(KINDS) % 4
    n = 1 if kind == "correction" else 1 + seed // (len(KINDS) * 2) % 3
    states = list("xyz"[:n])
    moving, held_time, listed = rng.random() < 0.5, rng.random() < 0.5, rng.random() < 0.5
    matrix = np.array([[rng.gauss(0, 1) for _ in states] for _ in states])
    matrix *= rng.uniform(0.2, 0.85) / np.abs(np.linalg.eigvals(matrix)).max()
    stretch = np.array([1.0, *(rng.choice([0.4, 1.0, 2.0]) for _ in states[1:])])
    matrix = matrix * stretch[:, None] / stretch[None, :]
    targets = {s: f"{rng.uniform(-0.05, 0.05):.3f}" for s in states}
    if moving:
        targets["x"] = "0.3*h"
    size = 0.0 if kind == "linear" else rng.uniform(0.02, 0.12)
    bodies = {}
    for i, s in enumerate(states):
        linear = " + ".join(f"({matrix[i, j]:.3f})*({x} - ({targets[x]}))" for j, x in enumerate(states))
        inside = rng.choice([s, f"({s} - d)", f"({s}*T)", f"({rng.choice(states)} + 0.2*h)"])
        bend = rng.choice(KINDS[kind]).format(inside)
        shift = " + shift" if kind == "correction" else ""
        away = f" + {size:.3f}*({bend} - {0.9 if 'cos' in bend or 'exp' in bend else 0.1})" if size else ""
        bodies[s] = (
            f"{targets[s]} + {linear}{shift}{away} + {rng.uniform(-0.05, 0.05):.3f}*(d - 0.05) + 0.02*(T - 0.45)"
        )
    law = f"-{rng.uniform(0.1, 0.3):.3f}*(x - ({targets['x']}))" if kind == "correction" else "0"
    spans = {s: (-round(rng.uniform(0.3, 1.0), 2), round(rng.uniform(0.3, 1.0), 2)) for s in states}
    rows, read = library(rng)
    uses = any("reach" in b for b in bodies.values())
    text = f"format = 1\nhorizon = {horizon}\nshrink = {'true' if rng.random() < 0.5 else 'false'}\n"
    text += 'correction = ["shift"]\n' if kind == "correction" else ""
    text += "[state]\n" + "".join(f"{s} = [{a}, {b}]\n" for s, (a, b) in spans.items())
    period = "values = [0.3, 0.45, 0.6]" if listed else "range = [0.3, 0.6]"
    text += f"[uncertain]\nd = [-0.2, 0.3]\nT = {{ {period}{', held = true' if held_time else ''} }}\n"
    text += "h = { range = [-0.2, 0.2], held = true, change = 0.02 }\n"
    text += '[[library]]\nfile = "g.csv"\nat = { speed = "x + 0.1*d", period = "T" }\n' if uses else ""
    text += f'[define]\nshift = "{law}"\n' if kind == "correction" else ""
    text += "[next]\n" + "".join(f'{s} = "{b}"\n' for s, b in bodies.items())
    text += "[target]\n" + "".join(f'{s} = "{t}"\n' for s, t in targets.items())
    text += (f'[metric]\nkind = "{rng.choice(METRICS)}"\n' if n > 1 else "") + ASKED.format(last=states[-1])
    names = {**NAMES, "read": read}
    bare = {s: b.replace("shift", f"({law})").replace("reach", "read(x + 0.1*d, T)") for s, b in bodies.items()}
    code = [
        eval(f"lambda {', '.join(states)}, d, T, h: {bare[s]}", names) for s in states
    ]  # texts of this module's own
    aims = [eval(f"lambda h: {targets[s]} + 0*h", {}) for s in states]

    def step(x: Any, v: Values) -> Any:
        return np.stack(np.broadcast_arrays(*(f(*x, v["d"], v["T"], v["h"]) for f in code)))

    low, high = (np.array([spans[s][k] for s in states]) for k in (0, 1))
    times = [0.3, 0.45, 0.6] if listed else None
    drawn: dict[str, tuple[float, float, float | None, list[float] | None]] = {
        "d": (-0.2, 0.3, None, None), "T": (0.3, 0.6, 0.0 if held_time else None, times), "h": (-0.2, 0.2, 0.02, None)
    }  # fmt: skip
    aim: Callable[[Values], Any] = lambda v: np.stack([f(np.asarray(v["h"])) for f in aims])  # noqa: E731
    return Case(text, {"g.csv": rows} if uses else {}, kind, states, low, high, step, aim, drawn), horizon


class Run:
    """One claim proved, and simulated against what is proved of every step."""

    def __init__(self, seed: int, tally: Tally) -> None:
        self.seed, self.tally, self.rng = seed, tally, np.random.default_rng(seed)
        self.c, self.horizon = case(seed)
        start = time.monotonic()
        self.results = proved(self.c.text, data=self.c.data).results
        tally.seconds += time.monotonic() - start
        tally.claims += 1
        self.kind = self.results["set"]["kind"] if self.results["set"] else "none"
        tally.sets[self.kind] += 1
        tally.verdicts.update(e["verdict"] for e in self.results["requirements"])
        tally.settled += self.results["requirements"][0]["verdict"] == "proved"
        self.ball = Ball.of(self.results["metric"], self.c.states)
        self.held = {k: self.values((TRAJECTORIES,))[k] for k, q in self.c.drawn.items() if q[2] is not None}

    def values(self, shape: tuple[int, ...]) -> Values:
        """Fresh values, many at the ends of their ranges."""
        found = {}
        for name, (a, b, _, listed) in self.c.drawn.items():
            x = self.rng.choice(listed, shape) if listed else self.rng.uniform(a, b, shape)
            ends = np.where(self.rng.random(shape) < 0.5, a, b)
            found[name] = np.where(self.rng.random(shape) < 0.7, ends, x)
        return found

    def moved(self, held: Values, shape: tuple[int, ...]) -> Values:
        """Held values after a step."""
        found = {}
        for name, x in held.items():
            a, b, change, _ = self.c.drawn[name]
            found[name] = np.clip(x + self.rng.choice([-1.0, 0.0, 1.0], shape) * (change or 0.0), a, b)
        return found

    def starts(self) -> tuple[Any, Any]:
        """Anywhere in the set, at its edge, on target, and along single states (whose number is returned, or -1)."""
        c, n, dims = self.c, TRAJECTORIES, len(self.c.states)
        aims, alone = c.aim(self.held), np.full(n, -1)
        if self.kind == "region":
            x = self.rng.uniform(c.low[:, None], c.high[:, None], (dims, n))
            ends = np.where(self.rng.random((dims, n)) < 0.5, c.low[:, None], c.high[:, None])
            x = np.where(self.rng.random((dims, n)) < 0.4, ends, x)
        else:
            e = np.linalg.solve(self.ball.rows, self.rng.standard_normal((dims, n)))
            share = np.where(self.rng.random(n) < 0.6, 1 - 1e-9, self.rng.random(n))
            x = aims + e / self.ball.size(e) * self.radius * share
        x[:, : n // 8] = aims[:, : n // 8]
        for i, s in enumerate(c.states):
            reach = lower(self.results["states"][s]["radius"]) or 0.0
            part = slice(n // 8 + 4 * i, n // 8 + 4 * i + 4)
            x[:, part], alone[part] = aims[:, part], i
            x[i, part] += (1 - 1e-9) * np.array([reach, -reach, min(reach, 0.05), -min(reach, 0.05)])
        alone[: n // 8] = dims
        return x, alone

    @property
    def radius(self) -> float:
        return float(Fraction(self.results["radius"]["lower"]))

    def inside(self, x: Any, aims: Any) -> Any:
        """Whether states are in the set."""
        shape = (-1,) + (1,) * (x.ndim - 1)
        if self.kind == "region":
            return ((x >= self.c.low.reshape(shape) - CLOSE) & (x <= self.c.high.reshape(shape) + CLOSE)).all(axis=0)
        return self.ball.size(x - aims) <= self.radius * (1 + CLOSE)

    def run(self) -> None:
        """Raises AssertionError where a simulated step goes beyond what is proved."""
        if self.kind == "none":
            return
        c, n, dims, N = self.c, TRAJECTORIES, len(self.c.states), self.horizon
        pair = self.results["routes"].get("slope") or self.results["routes"].get("split")
        k, e = (upper(pair["gain"]), upper(pair["residual"])) if pair else (None, None)
        x, alone = self.starts()
        other, first = self.starts()[0], np.abs(x - c.aim(self.held))
        held, near, apart = self.held, self.ball.size(x - c.aim(self.held)), self.ball.size(other - x)
        way = self.rng.integers(0, dims, n), self.rng.choice([-1.0, 1.0], n)
        worst, late, phases = np.zeros(dims), HORIZONS * N - 3 * N, np.zeros(N)
        for step in range(1, HORIZONS * N + 1):
            shape = (CANDIDATES, n)
            values = {**self.values(shape), **{q: v + np.zeros(shape) for q, v in held.items()}}
            after, later = c.step(x[:, None, :] + np.zeros((dims, *shape)), values), self.moved(held, shape)
            error = after - c.aim(later)
            self.of_each_step(x, after, values)
            score = self.rng.random(shape)
            score = np.where(np.arange(n) % 3 == 0, np.take_along_axis(error, np.broadcast_to(way[0], (1, *shape)), axis=0)[0] * way[1], score)  # fmt: skip
            score = np.where(np.arange(n) % 3 == 1, self.ball.size(error), score)
            pick, columns = np.argmax(score, axis=0), np.arange(n)
            chosen = {q: v[pick, columns] for q, v in values.items()}
            other = c.step(other, chosen)
            x, held = after[:, pick, columns], {q: v[pick, columns] for q, v in later.items()}
            error, size = x - c.aim(held), self.ball.size(x - c.aim(held))
            self.tally.steps += n
            low, high = c.low[:, None] - CLOSE, c.high[:, None] + CLOSE
            assert np.all((x >= low) & (x <= high)), (self.seed, "region left", step)
            if step % N == 0:
                assert np.all(self.inside(x, c.aim(held))), (self.seed, "set left", step)
                if k is not None and e is not None:
                    assert np.all(size <= k * near + e + CLOSE), (self.seed, "inequality", step)
                near = size
            if step == N and "slope" in self.results["routes"]:
                most = upper(self.results["routes"]["slope"]["gain"])
                assert most is None or np.all(self.ball.size(other - x) <= most * apart + CLOSE), (self.seed, "gain")
            for i in range(dims):
                self.of_steps(i, step, np.abs(error[i]), first[i], (alone == i) | (alone == dims))
            phases[step % N] = max(phases[step % N], float(size.max()) if step < 2 * N else 0.0)
            if step > late:
                worst = np.maximum(worst, np.abs(error).max(axis=1))
                self.of_pushes(x, c.aim(held), phases, step)
                self.of_bounds(np.abs(error), phases, step)
        for i, s in enumerate(c.states):
            bound = upper(self.results["states"][s]["bound"])
            if bound is not None and worst[i] > 1e-9:
                self.tally.ratios.setdefault(c.kind, []).append(bound / float(worst[i]))

    def entry(self, that: str) -> dict[str, Any]:
        return next(e for e in self.results["requirements"] if e["that"].startswith(that))

    def left(self, phases: Any, step: int) -> float:
        """What may be left of the first errors after so many steps (much, where nothing is said to contract)."""
        k = min((g for r in self.results["routes"].values() if (g := upper(r["gain"])) is not None), default=1.0)
        return 1e3 * float(phases.max()) * min(k, 1.0) ** (step // self.horizon - 2)

    def of_each_step(self, x: Any, after: Any, values: Values) -> None:
        """Ranges hold wherever a step starts, also within a horizon."""
        value, always, last = self.entry("value(")["value"], self.entry("always("), after[-1]
        if value is not None and self.entry("value(")["verdict"] == "proved":
            low, high = lower(value), upper(value)
            assert low is not None and high is not None
            assert low - CLOSE <= last.min() and last.max() <= high + CLOSE, (self.seed, "value")
        assert always["verdict"] != "proved" or after[0].max() <= 0.7 + CLOSE, (self.seed, "always")
        for band in self.results["sensitivities"]:
            two = {**values, "d": np.clip(values["d"] + self.rng.choice([-1, 1]) * 0.005, -0.2, 0.3)}
            by = two["d"] - values["d"]
            some = np.abs(by) > 1e-4
            rate = (self.c.step(x[:, None, :] + np.zeros((len(x), *by.shape)), two)[-1] - last)[some] / by[some]
            low, high = lower(band), upper(band)
            if low is not None and high is not None and self.entry("sensitivity(")["verdict"] == "proved":
                assert np.all((rate >= low - 1e-5) & (rate <= high + 1e-5)), (self.seed, "sensitivity")

    def of_steps(self, i: int, step: int, error: Any, first: Any, some: Any) -> None:
        value = self.entry(f"steps({self.c.states[i]}")["value"] if i in (0, len(self.c.states) - 1) else None
        count = upper(value)
        if count is not None and step >= count:
            assert np.all(error[some & (first <= 0.05)] <= 0.2 + CLOSE), (self.seed, "steps", i)

    def of_pushes(self, x: Any, aims: Any, phases: Any, step: int) -> None:
        """Pushes after any step, also within a horizon."""
        for i, s in enumerate(self.c.states):
            push, left = lower(self.results["states"][s]["push"]), self.left(phases, step)
            if push is not None and left < CLOSE:
                moved = x.copy()
                moved[i] += max(push * (1 - 1e-6) - left, 0.0) * self.rng.choice([-1, 1], x.shape[1])
                assert np.all(self.inside(moved, aims)), (self.seed, "push", i)

    def of_bounds(self, error: Any, phases: Any, step: int) -> None:
        for i, s in enumerate(self.c.states):
            bound = upper(self.results["states"][s]["bound"])
            if bound is not None:
                left = self.left(phases, step)
                assert left >= 1 or np.all(error[i] <= bound * (1 + 1e-6) + left + CLOSE), (self.seed, "bound", i)


def run(seed: int, tally: Tally) -> None:
    """Proves one claim and simulates against it. Raises AssertionError where anything proved is left."""
    Run(seed, tally).run()


def main(count: int, first: int = 0) -> None:
    tally = Tally()
    for seed in range(first, first + count):
        try:
            run(seed, tally)
        except Exception as why:
            print("seed", seed, case(seed)[0].kind, type(why).__name__, str(why)[:300], flush=True)
    print(tally.table())


if __name__ == "__main__":
    main(*map(int, sys.argv[1:] or ["40"]))
