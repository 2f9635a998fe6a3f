"""Stances simulated apart from the program: the claim's own expressions in numpy, the motion by scipy's DOP853.

`Walk` holds the parts of a claim about one state v. Its text is what is proved; `Walk.landed` is what happens.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import cache
from math import comb
from types import CodeType
from typing import Any

import numpy as np
from scipy.integrate import solve_ivp

RTOL, ATOL = 1e-12, 1e-13
CLOSE = 1e-9  # how far the integrator may be off, relative to what the motion grows to
Values = dict[str, Any]


def bezier(s: Any, *points: Any) -> Any:
    n = len(points) - 1
    return sum(comb(n, k) * s**k * (1 - s) ** (n - k) * p for k, p in enumerate(points))


FUNCTIONS: dict[str, Any] = {
    n: getattr(np, n) for n in ("sin", "cos", "exp", "sqrt", "sinh", "cosh", "tanh", "abs")
} | {"bezier": bezier, "max": np.maximum, "min": np.minimum, "pi": np.pi}  # fmt: skip


@cache
def _compiled(text: str) -> CodeType:
    return compile(text, "claim", "eval")


@dataclass(frozen=True)
class Gaits:
    """A full grid of gaits: axes with their lines, columns over them; the texts are what the program reads."""

    axes: dict[str, list[str]]
    columns: dict[str, np.ndarray]

    def csv(self) -> str:
        rows = [",".join([*self.axes, *self.columns])]
        for index in np.ndindex(*(len(x) for x in self.axes.values())):
            cells = [lines[k] for k, lines in zip(index, self.axes.values(), strict=True)]
            rows.append(",".join([*cells, *(_decimal(c[index]) for c in self.columns.values())]))
        return "\n".join(rows) + "\n"

    def read(self, places: Sequence[Any]) -> Values:
        """Every column by multilinear interpolation at places, one an axis."""
        at = np.broadcast_arrays(*(np.asarray(p, float) for p in places))
        cells, shares = [], []
        for lines, x in zip(self.axes.values(), at, strict=True):
            grid = np.array([float(line) for line in lines])
            k = np.clip(np.searchsorted(grid, x, "right") - 1, 0, len(grid) - 2)
            cells.append(k)
            shares.append((x - grid[k]) / (grid[k + 1] - grid[k]))
        found: Values = {}
        for name, column in self.columns.items():
            nodes = np.array([float(_decimal(x)) for x in column.ravel()]).reshape(column.shape)
            total = np.zeros(at[0].shape)
            for corner in np.ndindex(*(2,) * len(cells)):
                weight = np.ones(at[0].shape)
                for bit, share in zip(corner, shares, strict=True):
                    weight = weight * (share if bit else 1 - share)
                total = total + weight * nodes[tuple(k + b for k, b in zip(cells, corner, strict=True))]
            found[name] = total
        return found


def _decimal(x: float) -> str:
    return f"{x:.12f}".replace("-0.000000000000", "0.000000000000")


@dataclass(frozen=True)
class Quantity:
    """An uncertain quantity: the ends of its range, and whether it is held, by how much it changes, a signal."""

    low: float
    high: float
    held: bool = False
    change: float = 0.0
    within: bool = False

    def text(self) -> str:
        more = (", held = true" if self.held else "") + (f", change = {self.change}" if self.change else "")
        more += ", within = true" if self.within else ""
        return f"{{ range = [{self.low}, {self.high}]{more} }}"


@dataclass
class Walk:
    """The parts of a claim about one state v. `bend` is what dt(dt(height)) amounts to, derived by hand."""

    state: tuple[float, float]
    uncertain: dict[str, Quantity]
    define: dict[str, str]
    start: dict[str, str]
    rate: dict[str, str]
    duration: str
    step: str
    target: str
    bend: str = "0"
    gaits: Gaits | None = None
    at: dict[str, str] = field(default_factory=dict)
    correction: str = ""
    asked: list[str] = field(default_factory=list)
    gap: str = "0.05"
    effort: str = "cells = 2000\nseconds = 600"
    gains: dict[str, str] = field(default_factory=dict)

    def text(self) -> str:
        def table(name: str, rows: Mapping[str, str]) -> str:
            return f"[{name}]\n" + "".join(f'{k} = "{v}"\n' for k, v in rows.items())

        at = ", ".join(f'{k} = "{v}"' for k, v in self.at.items())
        parts = ["format = 1\n", f'correction = ["{self.correction}"]\n' if self.correction else ""]
        parts += [table("gains", self.gains) if self.gains else ""]
        parts += [f"[state]\nv = [{self.state[0]}, {self.state[1]}]\n[uncertain]\n"]
        parts += [f"{n} = {q.text()}\n" for n, q in self.uncertain.items()]
        parts += [f'[library]\nfile = "gaits.csv"\nat = {{ {at} }}\n' if self.gaits else ""]
        parts += [table("define", self.define), f'[dynamics]\nduration = "{self.duration}"\n']
        parts += [table("dynamics.start", self.start), table("dynamics.rate", self.rate)]
        parts += [
            table("next", {"v": self.step}),
            table("target", {"v": self.target}),
            f"[effort]\ngap = {self.gap}\n{self.effort}\n",
        ]
        parts += [f'[[require]]\nthat = "{r}"\n' for r in self.asked]
        return "".join(parts)

    @property
    def data(self) -> dict[str, str]:
        return {"gaits.csv": self.gaits.csv()} if self.gaits else {}

    @property
    def signals(self) -> list[str]:
        return [n for n, q in self.uncertain.items() if q.within]

    def value(self, expression: str, known: Values) -> Any:
        """An expression of the claim in numpy; `dt(dt(height))` is `bend`."""
        text = expression.replace("dt(dt(height))", f"({self.bend})").replace("target(v)", f"({self.target})")
        return eval(_compiled(text), {**FUNCTIONS, **known})  # texts of the tests' own making

    def aim(self, values: Values) -> Any:
        return self.value(self.target, values)

    def settled(self, values: Values) -> Values:
        """Everything that is known at touchdown: values, library columns, definitions without time."""
        known = {**{n: float(x) for n, x in self.gains.items()}, **values}
        if self.gaits:
            known |= self.gaits.read([self.value(self.at[a], known) for a in self.gaits.axes])
        for name, e in self.define.items():
            if name not in known and name not in self.timely:
                known[name] = self.value(e, known)
        return known

    @property
    def timely(self) -> set[str]:
        """Definitions that rest on the time or on a continuous state."""
        found = {"t", *self.start, *self.signals}
        for name, e in self.define.items():
            if found & set(re.findall(r"[A-Za-z_]\w*", e)):
                found.add(name)
        return found - {"t", *self.start}

    def moving(self, known: Values, time: Any, states: Sequence[Any]) -> Values:
        """What is known at an instant of the stance."""
        now = {**known, "t": time, **dict(zip(self.start, states, strict=True))}
        for name, e in self.define.items():
            if name not in now:
                now[name] = self.value(e, now)
        return now

    def landed(
        self,
        values: Values,
        phases: Sequence[float] = (),
        courses: Mapping[str, np.ndarray] | None = None,
        push: tuple[int, str, Any] | None = None,
    ) -> tuple[Any, list[Values]]:
        """The next state, and what was known at the phases, all runs (arrays of values) at once.

        `courses[signal]`: its values between touchdown, the phases and touchdown, (phases + 1, runs). `push`: the rank
        of a phase, a continuous state and how much it suddenly changes by.
        """
        known = self.settled(values)
        count = np.broadcast(*(np.asarray(x) for x in values.values())).size
        duration = np.broadcast_to(self.value(self.duration, known), count)
        y = np.stack([np.broadcast_to(self.value(e, known), count).astype(float) for e in self.start.values()])
        seen, ends = [], [0.0, *phases, 1.0]
        for k in range(len(ends) - 1):
            now = {**known, **{d: c[k] for d, c in (courses or {}).items()}}

            def rates(phase: float, flat: Any, now: Values = now) -> Any:
                states = flat.reshape(len(self.start), count)
                at = self.moving(now, phase * duration, states)
                rows = [np.broadcast_to(self.value(e, at), count) * duration for e in self.rate.values()]
                return np.concatenate(rows)

            found = solve_ivp(rates, ends[k : k + 2], y.ravel(), method="DOP853", rtol=RTOL, atol=ATOL)
            y = found.y[:, -1].reshape(len(self.start), count)
            if k < len(phases):
                seen.append(self.moving(now, ends[k + 1] * duration, y))
                if push and push[0] == k:
                    y[list(self.start).index(push[1])] += push[2]
        at_end = self.moving({**known, **dict.fromkeys(self.signals, 0.0)}, duration, y)
        return self.value(self.step, at_end), [*seen, at_end]


def nominal(walk: Walk, values: Values) -> Any:
    """Where the foot has to land for the next v to be v: the next state is linear in the foot."""
    there, here = (walk.landed({**values, "foot": x + 0 * np.asarray(values["v"], float)})[0] for x in (1.0, 0.0))
    return (values["v"] - here) / (there - here)


def answer(walk: Walk, values: Values) -> float:
    """By how much the next state answers to the foot."""
    there, here = (walk.landed({**values, "foot": np.array([x])})[0][0] for x in (1.0, 0.0))
    return float(there - here)
