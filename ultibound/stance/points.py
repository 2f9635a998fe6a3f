"""Rates and duration of a stance at points, gate by gate in floating point."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..claim.graph import Gate, Graph
from ..claim.model import Library
from ..claim.motion import PHASE, Motion

PLAIN: dict[str, Callable[..., Any]] = {
    "add": np.add, "sub": np.subtract, "mul": np.multiply, "div": np.divide, "neg": np.negative, "abs": np.abs,
    "min": np.minimum, "max": np.maximum, "sqrt": np.sqrt, "exp": np.exp, "log": np.log, "sin": np.sin, "cos": np.cos,
    "tan": np.tan, "asin": np.arcsin, "acos": np.arccos, "atan": np.arctan, "sinh": np.sinh, "cosh": np.cosh,
    "tanh": np.tanh,
}  # fmt: skip


class Unsolved(Exception):
    """The stance has no usable solution in floating point; the message says why."""


class Rates:
    """h (A x + b) of a motion at points of time and parameters, h = half the duration of a piece."""

    def __init__(self, graph: Graph, motion: Motion, libraries: Sequence[Library]) -> None:
        self.motion, self.graph = motion, graph
        self.size = len(motion.states)
        free = [motion.free] if any(b is not None for b in motion.free) else []
        self.forcing = [*motion.forced, *free]  # what drives the columns beyond the fundamental solution
        self.columns = self.size + len(self.forcing)
        self.names = [p.name for p in motion.parameters]
        entries = [a for row in (*motion.matrix, *self.forcing) for a in row]
        self._roots = tuple(a for a in entries if a is not None)
        self._reached = graph.reached((*self._roots, motion.duration))
        self._first = set(graph.reached((motion.duration,)))
        self._tables = {}
        for k in self._reached:
            gate = graph.gates[k]
            if gate.op == "reading":
                library = libraries[int(gate.value or 0)]
                grid = [np.array([to_float(x) for x in axis]) for axis in library.grid]
                nodes = np.array([to_float(x) for x in library.columns[gate.name]])
                self._tables[k] = grid, nodes.reshape([len(g) for g in grid])

    def __call__(self, at: Floats, pieces: Floats, time: Floats) -> tuple[Floats, Floats]:
        """hA: (cells, points, pieces, times, n, n), and h b: (…, n, columns beyond n), at parameters.

        Parameters are (cells, points, parameters), `time` are values of a piece's own s in [-1, 1]; `pieces` rising
        fractions of the duration.
        """
        known: dict[str, Any] = {n: at[:, :, k, None, None] for k, n in enumerate(self.names)}
        done: dict[int, Any] = {}
        with np.errstate(all="ignore"):
            self._run(self._first, known, done)
            length = np.diff(pieces)[:, None]
            known[PHASE] = pieces[:-1, None] + length * (1 + time) / 2
            self._run(self._reached, known, done)
            half = np.broadcast_to(done[self.motion.duration] * length / 2, (*at.shape[:2], len(length), 1))
            shape = (*at.shape[:2], len(length), len(time))
            matrix = np.zeros((*shape, self.size, self.size))
            free = np.zeros((*shape, self.size, len(self.forcing)))
            for i, row in enumerate(self.motion.matrix):
                for j, entry in enumerate(row):
                    if entry is not None:
                        matrix[..., i, j] = done[entry] * half
                for j, column in enumerate(self.forcing):
                    if (entry := column[i]) is not None:
                        free[..., i, j] = done[entry] * half
        if not (np.all(np.isfinite(matrix)) and np.all(np.isfinite(free))):
            raise Unsolved("the rates are not finite for some time and parameters")
        return matrix, free

    def _run(self, wanted: Any, known: Mapping[str, Any], done: dict[int, Any]) -> None:
        for k in self._reached:
            if k in wanted and k not in done:
                done[k] = self._gate(k, self.graph.gates[k], known, done)

    def _gate(self, k: int, gate: Gate, known: Mapping[str, Any], done: Mapping[int, Any]) -> Any:
        args = [done[a] for a in gate.args]
        match gate.op:
            case "number":
                return np.float64(to_float(gate.value)) if gate.value is not None else np.float64(0)
            case "pi":
                return np.float64(np.pi)
            case "variable":
                return known[gate.name]
            case "mark":
                return args[0]
            case "power":
                return args[0] ** int(gate.value or 1)
            case "reading":
                return _reading(*self._tables[k], args)
        return PLAIN[gate.op](*args)


def _reading(grid: Sequence[Floats], nodes: Floats, at: Sequence[Any]) -> Any:
    """Multilinear interpolation at points strictly inside cells; beyond the grid its outer cells go on."""
    index, share = [], []
    for lines, x in zip(grid, at, strict=True):
        k = np.clip(np.searchsorted(lines, x, "right") - 1, 0, len(lines) - 2)
        index.append(k)
        share.append((x - lines[k]) / (lines[k + 1] - lines[k]))

    def along(axis: int, fixed: tuple[Any, ...]) -> Any:
        if axis == len(index):
            return nodes[fixed]
        low, high = along(axis + 1, (*fixed, index[axis])), along(axis + 1, (*fixed, index[axis] + 1))
        return low + share[axis] * (high - low)

    return along(0, ())
