"""Motions for the tests, built gate by gate, and an integrator of their own to compare with."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from itertools import pairwise, product
from math import comb

import numpy as np

from ultibound.bounding.intervals import Floats
from ultibound.checker import motion as checker
from ultibound.checker.terms import Terms
from ultibound.claim.graph import Graph
from ultibound.claim.model import Library
from ultibound.claim.motion import PHASE, Motion, Parameter

GRAVITY = Fraction("9.81")


def seconds(g: Graph, duration: int) -> int:
    """Time since touchdown."""
    return g.add("mul", duration, g.add("variable", name=PHASE))


def second_order(
    g: Graph, q: int, duration: int, parameters: Sequence[Parameter] = (), push: int | None = None
) -> Motion:
    """x'' = q x + push, as x' = y, y' = q x + push."""
    return Motion(("x", "y"), tuple(parameters), ((None, g.number(1)), (q, None)), (None, push), duration)


def integrated(q: Callable[[float], Floats], duration: Floats, steps: int = 60) -> Floats:
    """Φ (2, 2, …) of x'' = q x after a duration: the classical Runge-Kutta scheme, extrapolated twice."""

    def run(n: int) -> Floats:
        h = duration / n
        y = np.zeros((2, 2, *np.shape(duration)))
        y[0, 0] = y[1, 1] = 1

        def f(t: float, y: Floats) -> Floats:
            return np.stack([y[1], q(t) * y[0]])

        for k in range(n):
            a = f(k * h, y)
            b = f((k + 0.5) * h, y + h / 2 * a)
            c = f((k + 0.5) * h, y + h / 2 * b)
            d = f((k + 1) * h, y + h * c)
            y = y + h / 6 * (a + 2 * b + 2 * c + d)
        return y

    coarse, middle, fine = (run(steps * m) for m in (1, 2, 4))
    first, second = (16 * middle - coarse) / 15, (16 * fine - middle) / 15
    return (32 * second - first) / 31


class Gait:
    """x'' = (g + z'')/z x: z a Bezier curve of t/T whose five points, and T, are read from a library.

    `wave` bends the points over the grid; `steep` adds a parabola with z'' = steep times g.
    """

    def __init__(self, axes: dict[str, Sequence[str]], wave: float = 0.02, steep: float = 0.0) -> None:
        self.grid = {name: tuple(Fraction(x) for x in lines) for name, lines in sorted(axes.items())}
        shape = [len(x) for x in self.grid.values()]
        nodes = np.array([[float(x) for x in p] for p in product(*self.grid.values())])
        total = nodes.sum(axis=1)
        columns = {"T": 0.4 + 0.05 * np.sin(total)}
        parabola = np.array([0, 0, 1, 3, 6]) / 12  # Bezier points of s²/2, times T² z''
        for k in range(5):
            rise = steep * float(GRAVITY) * columns["T"] ** 2 * parabola[k]
            columns[f"z{k}"] = 0.7 + 0.02 * np.sin(k) + wave * np.sin(2 * total + k) + rise
        exact = {c: tuple(Fraction(round(x * 10**6), 10**6) for x in v) for c, v in columns.items()}
        self.library = Library("gaits.csv", tuple(self.grid), (), tuple(self.grid.values()), exact)
        self.values = {c: np.array([float(x) for x in v]).reshape(shape) for c, v in exact.items()}
        g = self.graph = Graph()
        at = [g.add("variable", name=n) for n in self.grid]
        read = {c: g.add("reading", *at, value=Fraction(0), name=c) for c in columns}
        points, duration = [read[f"z{k}"] for k in range(5)], read["T"]
        s = g.add("div", seconds(g, duration), duration)
        bends = [
            g.add("add", g.add("sub", c, g.add("mul", g.number(2), b)), a)
            for a, b, c in zip(points, points[1:], points[2:], strict=False)
        ]
        lift = g.add("div", g.add("mul", g.number(12), self._bezier(s, bends)), g.add("mul", duration, duration))
        q = g.add("div", g.add("add", g.number(GRAVITY), lift), self._bezier(s, points))
        parameters = [Parameter(n, v, lines) for v, (n, lines) in zip(at, self.grid.items(), strict=True)]
        self.motion = second_order(g, q, duration, parameters)

    def _bezier(self, s: int, points: list[int]) -> int:
        g = self.graph
        while len(points) > 1:
            points = [g.add("add", a, g.add("mul", s, g.add("sub", b, a))) for a, b in pairwise(points)]
        return points[0]

    def read(self, column: str, p: Floats, cell: tuple[int, ...]) -> Floats:
        """The multilinear function of one cell, at points (…, axes)."""
        total = np.zeros(p.shape[:-1])
        for bits in product((0, 1), repeat=len(cell)):
            weight = np.ones(p.shape[:-1])
            for axis, (k, lines) in enumerate(zip(cell, self.grid.values(), strict=True)):
                share = (p[..., axis] - float(lines[k])) / float(lines[k + 1] - lines[k])
                weight = weight * (share if bits[axis] else 1 - share)
            total += weight * self.values[column][tuple(k + b for k, b in zip(cell, bits, strict=True))]
        return total

    def flow(self, p: Floats, cell: tuple[int, ...], sigma: float = 1.0) -> Floats:
        """Φ (2, 2, …) at normalised time σ and parameters (…, axes), by `integrated`."""
        duration = self.read("T", p, cell)
        z = [self.read(f"z{k}", p, cell) for k in range(5)]

        def q(t: float) -> Floats:
            s = t / duration
            height = sum(comb(4, k) * s**k * (1 - s) ** (4 - k) * z[k] for k in range(5))
            lift = sum(comb(2, k) * s**k * (1 - s) ** (2 - k) * (z[k + 2] - 2 * z[k + 1] + z[k]) for k in range(3))
            return (float(GRAVITY) + 12 * lift / duration**2) / height

        return integrated(q, duration * (1 + sigma) / 2)


def restated(g: Graph, m: Motion) -> tuple[Terms, checker.Motion]:
    """The same motion as the checker holds it."""
    terms, rank = Terms(), list[int]()
    for gate in g.gates:
        payload = gate.value if gate.op in ("number", "power") else gate.name or None
        rank.append(terms.put(gate.op, tuple(rank[a] for a in gate.args), payload))

    def each(row: Sequence[int | None]) -> tuple[int | None, ...]:
        return tuple(None if k is None else rank[k] for k in row)

    parameters = tuple(checker.Parameter(p.name, rank[p.gate], p.grid) for p in m.parameters)
    rows, forced = tuple(map(each, m.matrix)), tuple(map(each, m.forced))
    return terms, checker.Motion(m.states, parameters, rows, each(m.free), rank[m.duration], (), m.signals, forced)
