"""Random one-state claims, and trajectories steered against what is proved of them.

`python -m tests.campaign [COUNT]` prints the table of the campaign; tests/test_campaign.py runs it small.
"""

from __future__ import annotations

import random
import sys
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any

import numpy as np

from tests.conftest import proved

SMOOTH = [
    "sin({})", "cos({})", "tanh({})", "exp(0.3*{})", "atan({})", "sqrt(2 + {})", "log(3 + {})", "1/(3 + {})", "({})**2", "sinh(0.5*{})",
    "cosh({})", "asin(0.3*{})", "acos(0.3*{})", "tan(0.4*{})", "(2 + {})**1.5",
]  # fmt: skip
CORNERS = {
    "none": [],
    "abs": ["abs({})", "abs({} - 0.1)"],
    "min max": ["max({}, 0.1)", "min({}, 0.5*d, 0.2)", "max({}, -0.2)"],
    "clip": ["clip({}, -0.2, 0.3)", "clip({}, -0.1, 0.15)"],
    "library": ["reach"],
}
NAMES: dict[str, Any] = {
    n: getattr(np, {"asin": "arcsin", "acos": "arccos", "atan": "arctan"}.get(n, n))
    for n in ("sin", "cos", "tanh", "exp", "atan", "sqrt", "log", "sinh", "cosh", "asin", "acos", "tan", "abs")
}
NAMES |= {
    "clip": np.clip,
    "max": lambda *x: np.maximum.reduce(np.broadcast_arrays(*x)),
    "min": lambda *x: np.minimum.reduce(np.broadcast_arrays(*x)),
}
Step = Callable[[Any, Any, Any, Any], Any]  # next state from v, d, T, h


@dataclass
class Case:
    """A claim and its map for simulation: v state, d fresh range, T fresh list, h held."""

    text: str
    data: dict[str, str]
    corner: str
    split: bool
    moving: bool
    step: Step
    low: float
    high: float
    aim: Callable[[Any], Any]


@dataclass
class Tally:
    """What a campaign found."""

    steps: int = 0
    contracting: int = 0
    bounded: int = 0
    ratios: dict[tuple[str, str], list[float]] = field(default_factory=dict)
    verdicts: Counter[str] = field(default_factory=Counter)
    reasons: Counter[str] = field(default_factory=Counter)
    sets: Counter[str] = field(default_factory=Counter)

    def table(self) -> str:
        rows = [f"{'route':8}{'corner':10}{'claims':>8}{'median':>9}{'worst':>9}   upper/lower of the bound"]
        for (route, corner), found in sorted(self.ratios.items()):
            rows.append(f"{route:8}{corner:10}{len(found):8d}{np.median(found):9.3f}{max(found):9.3f}")
        rows.append(
            f"simulated steps {self.steps}; contracting claims {self.contracting}, of these bounded {self.bounded}"
        )
        rows.append("sets: " + ", ".join(f"{n} {k}" for k, n in self.sets.most_common()))
        rows.append("verdicts: " + ", ".join(f"{n} {k}" for k, n in self.verdicts.most_common()))
        rows += [f"undecided {n}: {reason}" for reason, n in self.reasons.most_common()]
        return "\n".join(rows)


def library(rng: random.Random) -> tuple[str, Callable[[Any, Any], Any]]:
    """A jagged column over speed and period, and its multilinear reading."""
    speeds, periods = np.array([-3.0, -0.5, 0.1, 0.45, 3.0]), np.array([0.2, 0.4, 0.7])
    nodes = np.array([[round(rng.uniform(-0.3, 0.3), 3) for _ in periods] for _ in speeds])
    rows = "speed,period,reach\n" + "".join(
        f"{s},{p},{nodes[i, j]}\n" for i, s in enumerate(speeds) for j, p in enumerate(periods)
    )

    def read(v: Any, T: Any) -> Any:
        v, T = np.broadcast_arrays(v, T)
        i = np.clip(np.searchsorted(speeds, v, "right") - 1, 0, 3)
        j = np.clip(np.searchsorted(periods, T, "right") - 1, 0, 1)
        a, b = (v - speeds[i]) / (speeds[i + 1] - speeds[i]), (T - periods[j]) / (periods[j + 1] - periods[j])
        low = nodes[i, j] + b * (nodes[i, j + 1] - nodes[i, j])
        return low + a * (nodes[i + 1, j] + b * (nodes[i + 1, j + 1] - nodes[i + 1, j]) - low)

    return rows.replace("-0.0,", "0.0,"), read


def case(seed: int) -> Case:
    """A random claim: seeds run through every kind of corner, with and without correction and moving target."""
    rng = random.Random(seed)
    corner = list(CORNERS)[seed % 5]
    split, moving = seed // 5 % 2 == 1, seed // 10 % 2 == 1
    kinks = CORNERS[corner]
    inner = [
        rng.choice(SMOOTH).format(rng.choice(["v", "d", "(v*T)", "(v - d)", "h", "(v + 0.1*h)"])) for _ in range(2)
    ]
    bend = rng.choice(kinks).format(rng.choice(["v", "(v - d)", "(v + 0.5*T - 0.2)"])) if kinks else "v*v"
    size = rng.uniform(0.02, 0.3)
    outer = rng.choice(SMOOTH).format(f"(0.4*{inner[0]})")
    target = "0.3*h" if moving else f"{rng.uniform(-0.1, 0.1):.3f}"
    law = "clip({e}, -0.3, 0.3)" if corner == "clip" else rng.choice(["{e}", "({e} + 0.3*({e})**3)"])
    gain = rng.uniform(0.4, 1.0) if split else 0.0
    keep = rng.uniform(0.7, 1.1) if split else rng.uniform(-0.9, 0.9)
    shift = f"-{gain:.3f}*" + law.format(e=f"(v - ({target}))")
    rest, offset = f"{size:.3f}*({outer} + {inner[1]} + {bend})", f"{rng.uniform(-0.1, 0.1) - 0.8 * size:.3f}"
    body = f"{keep:.3f}*(v - ({target})) + ({target}) + shift + {rest} + {offset}"
    low, high = -rng.uniform(0.4, 1.0), rng.uniform(0.4, 1.0)
    rows, read = library(rng)
    uses = "reach" in body
    column = '[[library]]\nfile = "g.csv"\nat = { speed = "v + 0.1*d", period = "T" }\n' if uses else ""
    correction = 'correction = ["shift"]\n' if split else ""
    text = f"""
format = 1
{correction}shrink = {"true" if seed % 3 == 0 else "false"}
[state]
v = [{low:.3f}, {high:.3f}]
[uncertain]
d = [-0.2, 0.3]
T = {{ values = [0.3, 0.45, 0.6] }}
h = {{ range = [-0.3, 0.3], held = true, change = 0.05 }}
{column}[define]
shift = "{shift}"
[next]
v = "{body}"
[target]
v = "{target}"
[[require]]
that = "settles"
[[require]]
that = "sharp_bound(v) <= 0.5"
[[require]]
that = "push(v) >= 0.05"
[[require]]
that = "steps(v, 0.3, 0.25) <= 6"
[[require]]
that = "value(next(v))"
[[require]]
that = "always(abs(next(v)) <= 2)"
[[require]]
that = "gain < 0.9"
[effort]
gap = 0.05
cells = 1000
seconds = 20
"""
    names = {**NAMES, "read": read}
    python = body.replace("shift", f"({shift})").replace("reach", "read(v + 0.1*d, T)")
    step = eval(f"lambda v, d, T, h: {python}", names)  # a text of this module's own making
    aim = eval(f"lambda h: {target} + 0*h", {})
    return Case(text, {"g.csv": rows} if uses else {}, corner, split, moving, step, round(low, 3), round(high, 3), aim)


def run(seed: int, tally: Tally, trajectories: int = 100, length: int = 210) -> None:
    """Proves one claim and simulates against it. Raises AssertionError where anything proved is left."""
    c = case(seed)
    results = proved(c.text, data=c.data).results
    rng = np.random.default_rng(seed)
    r = upper = None
    kind = results["set"]["kind"] if results["set"] else "none"
    tally.sets[kind] += 1
    if results["set"]:
        r = float(Fraction(results["radius"]["lower"]))
    state = results["states"]["v"]
    entries = {e["that"].split("(")[0].split(" ")[0]: e for e in results["requirements"]}
    for e in results["requirements"]:
        tally.verdicts[e["verdict"]] += 1
        if e["verdict"] == "undecided":
            tally.reasons[e["limited_by"].split(";")[0][:70]] += 1
    upper = float(state["bound"]["upper"]) if state["bound"] else None
    pairs = [
        tuple(float(x[q]["upper"]) for q in ("gain", "residual")) for x in results["routes"].values() if x["bound"]
    ]
    sharp = float(state["sharp_bound"]["upper"]) if state["sharp_bound"] else None
    n = trajectories
    h = rng.uniform(-0.3, 0.3, n)
    v = rng.uniform(c.low, c.high, n) if kind in ("region", "none") else c.aim(h) + r * rng.uniform(-1, 1, n)
    if kind == "none":
        v = c.aim(h) + 0.9 * min(c.high, -c.low) * rng.uniform(-0.5, 0.5, n)
    first = np.abs(v - c.aim(h))
    steered = np.arange(n) < n // 2
    inside, long_run = True, 0.0
    value = [float(entries["value"]["value"][x]) for x in ("lower", "upper")] if entries["value"]["value"] else None
    slope = results["routes"].get("slope")
    steps = entries["steps"]["value"]
    within = first <= 0.3
    for i in range(1, length + 1):
        d = rng.uniform(-0.2, 0.3, (14, n))
        d[0], d[1] = -0.2, 0.3
        T = rng.choice([0.3, 0.45, 0.6], (14, n))
        move = np.clip(h + rng.choice([-0.05, 0.0, 0.05], (14, n)), -0.3, 0.3)
        after = np.broadcast_to(c.step(v, d, T, h), (14, n))
        error = np.abs(after - c.aim(move))
        pick = np.where(steered, np.argmax(error, axis=0), 2)
        columns = np.arange(n)
        if kind != "none" and slope is not None:  # two trajectories under the same values
            other = v + (rng.uniform(-1, 1, n) * 1e-3)
            both = np.abs(other - c.aim(h)) <= r if kind != "region" else (other >= c.low) & (other <= c.high)
            moved = np.abs(c.step(other, d[2], T[2], h) - after[2])
            assert np.all((moved <= float(slope["gain"]["upper"]) * np.abs(other - v) + 1e-12)[both]), (seed, "gain")
        if kind != "none" and value is not None:
            assert value[0] - 1e-9 <= after.min() and after.max() <= value[1] + 1e-9, (seed, "value")
        v, h = after[pick, columns], move[pick, columns]
        tally.steps += n
        error = np.abs(v - c.aim(h))
        if kind == "region":
            assert np.all((v >= c.low - 1e-9) & (v <= c.high + 1e-9)), (seed, "region left")
        elif kind != "none":
            assert np.all(error <= r + 1e-9), (seed, "ball left")
        elif not np.all((v >= c.low) & (v <= c.high)):
            inside = False
            break
        for k, e in pairs:
            assert np.all(error <= k**i * first + e * (1 - k**i) / (1 - k) + 1e-9), (seed, "envelope", i)
        if sharp is not None and i > 100:
            assert np.all(error <= sharp + 1e-9), (seed, "sharp")
        if kind != "none" and steps and steps["upper"] is not None and i >= int(Fraction(steps["upper"])):
            assert np.all(error[within] <= 0.25 + 1e-9), (seed, "steps")
        if i > length - 40:
            long_run = max(long_run, float(error.max()))
    if state["push"] and kind != "none":
        moved = c.aim(h) + (v - c.aim(h)) + float(state["push"]["lower"]) * 0.999 * rng.choice([-1, 1], n)
        assert np.all(np.abs(moved - c.aim(h)) <= r + 1e-9), (seed, "push")
    room = min(c.high - 0.1, -c.low - 0.1)
    if inside and long_run < 0.6 * room:
        tally.contracting += 1
        tally.bounded += upper is not None
    for route, figures in results["routes"].items():
        if figures["bound"] and long_run > 0:
            tally.ratios.setdefault((route, c.corner), []).append(float(figures["bound"]["upper"]) / long_run)
    if sharp is not None and long_run > 0:
        tally.ratios.setdefault(("sharp", c.corner), []).append(sharp / long_run)


def main(count: int) -> None:
    tally = Tally()
    for seed in range(count):
        run(seed, tally)
    print(tally.table())


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 60)
