"""Programs run over batches of boxes."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np

from ..claim.model import Library
from ..polynomial.flows import FlowTable, Met
from ..stepmap.program import Program, Step
from .intervals import UNARY, Branch, Floats, Pair, Table, add, div, hull, known, mul, power, sub

BINARY = {"add": add, "sub": sub, "mul": mul, "div": div}
NOWHERE = np.asarray(np.nan)
NEAR = 1e-15  # share by which rounding may move a tie
# of an operand that is not finite they never make something finite; of a quotient that is the dividend
TELLING = frozenset(["add", "sub", "mul", "div", "power", "sqrt", "log", "sinh", "cosh", "reading", "flow"])
Made = Callable[[list[Pair], Floats, Floats], Pair]  # registers before, lower and upper ends of boxes
Corner = tuple[str, int, int]  # "max" or "min" and the registers of its two branches


@dataclass(frozen=True, slots=True)
class Run:
    """Ends a box: of the value and of each derivative; `split` where a reading met several cells."""

    low: Floats
    high: Floats
    gradient_low: Floats  # (boxes, variables)
    gradient_high: Floats
    curvature: dict[tuple[int, int], Pair]
    split: Any
    branches: dict[int, Branch]
    sides: dict[Corner, tuple[Any, Any]]  # whether each branch of a corner is met, a box

    def open(self) -> Any:
        """Whether a corner met both branches, a box."""
        met = np.zeros(len(self.low), bool)
        for first, second in self.sides.values():
            met |= first & second
        return met

    def branches_of(self, rows: Any) -> dict[int, Branch]:
        """Cells met by the boxes of the given rows, for evaluating parts of them on the same branch."""
        return {
            k: ([f[rows] for f in firsts], [s[rows] for s in spans]) for k, (firsts, spans) in self.branches.items()
        }


class Runner:
    """A program made ready for numpy: `variables` name the columns of the boxes it is given.

    `flows` holds the fundamental solutions of a continuous stance; without it they are nowhere defined.
    """

    def __init__(
        self,
        program: Program,
        variables: Sequence[str],
        libraries: Sequence[Library],
        derivative: bool = False,
        flows: FlowTable | None = None,
    ) -> None:
        self.program, self.variables, self.flows = program, list(variables), flows
        self.slack = NEAR if derivative else -NEAR  # at a tie a derivative meets both branches, a value one: corners.md
        self._checks = _telling(program)
        value = max(program.value, *program.checks, -1) + 1
        self._ends = value, max(value, *(k + 1 for k in (*program.gradient.values(), *program.curvature.values())), 0)
        self._made = [_made(step, self.variables, flows is None) for step in program.steps]
        self._tables: dict[tuple[int, str], Table] = {}
        for step in program.steps:
            if step.op == "reading":
                number = int(step.value or 0)
                self._tables.setdefault((number, step.name), _table(libraries[number], step.name))

    def __call__(
        self,
        low: Floats,
        high: Floats,
        gradient: bool = True,
        branches: dict[int, Branch] | None = None,
        hold: dict[Corner, Any] | None = None,
    ) -> Run:
        """Runs every step over boxes [low, high] of shape (boxes, variables).

        `branches` fixes library cells, `hold` the branch (0 or 1) of corners, a box.
        """
        count = len(low)
        done: list[Pair] = []
        met: dict[int, Branch] = {}
        sides: dict[Corner, tuple[Any, Any]] = {}
        places: dict[tuple[int, ...], Met] = {}
        with np.errstate(all="ignore"):
            for number in range(self._ends[gradient]):
                step, make = self.program.steps[number], self._made[number]
                if make is not None:
                    done.append(make(done, low, high))
                elif step.op == "reading":
                    table = self._tables[int(step.value or 0), step.name]
                    fixed = branches.get(number) if branches else None
                    pair, met[number] = table.read([done[a] for a in step.args], step.orders, count, fixed)
                    done.append(pair)
                elif step.op == "flow" and self.flows is not None:
                    if step.args not in places:  # entries and derivatives are read at the same places
                        fixed = branches.get(number) if branches else None
                        places[step.args] = self.flows.met([done[a] for a in step.args], count, fixed)
                    i, j = (int(x) for x in step.name.split())
                    done.append(self.flows.range(i, j, step.orders, places[step.args]))
                    met[number] = places[step.args].branch
                else:
                    done.append(_corner(step, done, sides, hold, count, self.slack))
            defined = np.ones(count, bool)
            for k in self._checks:
                for end in done[k][: 1 if known(done[k]) else 2]:
                    defined &= np.isfinite(end)
        undefined = ~defined
        value = _finite(done[self.program.value], undefined)
        g_low, g_high = np.zeros_like(low), np.zeros_like(high)
        if gradient:
            for column, v in enumerate(self.variables):
                if v in self.program.gradient:
                    pair = _finite(done[self.program.gradient[v]], undefined)
                    g_low[:, column], g_high[:, column] = pair
        bends = {
            (self.variables.index(u), self.variables.index(v)): _finite(done[k], undefined)
            for (u, v), k in (self.program.curvature.items() if gradient else ())
        }
        split = np.zeros(count, bool)
        for _, spans in met.values():
            split |= np.prod(spans, axis=0) > 1
        return Run(*value, g_low, g_high, bends, split, met, sides)


def _telling(program: Program) -> list[int]:
    """The registers to be checked without those that another one tells of: it is finite only where they are."""
    told: set[int] = set()
    for k in program.checks:
        step = program.steps[k]
        if step.op in TELLING and not (step.op == "power" and (step.value or 0) <= 0):
            told |= set(step.args[:1] if step.op == "div" else step.args)
    return [k for k in program.checks if k not in told]


def _made(step: Step, variables: Sequence[str], nowhere: bool) -> Made | None:
    """What fills the register of a step; None where it takes more than the registers before."""
    match step.op, step.args:
        case "variable", _:
            k = variables.index(step.name)
            return lambda done, low, high: (x := low[:, k], x if low is high else high[:, k])
        case (("number" | "pi"), _):
            x = np.asarray(np.pi if step.op == "pi" else to_float(step.value or Fraction(0)))
            return lambda done, low, high: (x, x)
        case "power", (i,):
            n = int(step.value or 1)
            return lambda done, low, high: power(done[i], n)
        case "mul", (i, j) if i == j:
            return lambda done, low, high: power(done[i], 2)
        case (("add" | "sub" | "mul" | "div"), (i, j)):
            binary = BINARY[step.op]
            return lambda done, low, high: binary(done[i], done[j])
        case "flow", _ if nowhere:
            return lambda done, low, high: (NOWHERE, NOWHERE)
        case op, (i,) if op in UNARY:
            unary = UNARY[op]
            return lambda done, low, high: unary(done[i])
    return None


def _corner(
    step: Step,
    done: list[Pair],
    sides: dict[Corner, tuple[Any, Any]],
    hold: dict[Corner, Any] | None,
    count: int,
    slack: float,
) -> Pair:
    """A corner, or the derivative of the branch it takes: hulls where both are met (proofs/corners.md)."""
    kind = "min" if "min" in (step.op, step.name) else "max"
    key = kind, step.args[0], step.args[1]
    a, b, *slopes = (done[k] for k in step.args)
    first, second = slopes or (a, b)
    if hold is not None and key in hold:
        take = hold[key] == 0
        return np.where(take, first[0], second[0]), np.where(take, first[1], second[1])
    if key not in sides:
        room = slack * (np.maximum(np.abs(a[0]), np.abs(a[1])) + np.maximum(np.abs(b[0]), np.abs(b[1])))
        below, above = a[1] + room < b[0], b[1] + room < a[0]
        below, above = (below, above) if kind == "max" else (above & ~below, below)
        sides[key] = np.broadcast_to(~below, (count,)), np.broadcast_to(~above | below, (count,))
    if not slopes:
        pick = np.maximum if kind == "max" else np.minimum
        low = pick(a[0], b[0])
        return np.maximum(low, 0.0) if step.op == "abs" else low, pick(a[1], b[1])
    one, other = sides[key]
    low, high = hull(first, second)
    low = np.where(one & other, low, np.where(one, first[0], second[0]))
    return low, np.where(one & other, high, np.where(one, first[1], second[1]))


def _finite(pair: Pair, undefined: Any) -> Pair:
    low, high = pair
    bad = undefined | np.isnan(low)
    if not known(pair):
        bad |= np.isnan(high)
    return np.where(bad, -np.inf, low), np.where(bad, np.inf, high)


def _table(library: Library, column: str) -> Table:
    grid = [np.array([float(x) for x in axis]) for axis in library.grid]
    nodes = np.array([to_float(x) for x in library.columns[column]])
    return Table(grid, nodes.reshape([len(axis) for axis in library.grid]))


def to_float(q: Fraction) -> float:
    """Nearest float; infinite beyond the range."""
    try:
        return float(q)
    except OverflowError:
        return float("inf") if q > 0 else float("-inf")
