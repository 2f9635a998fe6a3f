"""Points of the region at which a claim is not defined, found by search and shown to the engineer."""

from __future__ import annotations

import time
from fractions import Fraction

import numpy as np

from ..claim.model import Claim
from ..claim.obligations import Domain, Obligation, Obligations
from ..stepmap.symbolic import compiled
from .evaluate import Runner, to_float
from .search import Effort, Point, search

CELLS = 4000
SECONDS = 20.0


def undefined_point(claim: Claim) -> tuple[str, str] | None:
    """Place and description of a point where a root, logarithm, quotient or library reading has no value.

    An estimate: points are judged in floating point with a margin, so a borderline case is left to the proof.
    """
    o = Obligations(claim)
    roots = [x for s in o.states for x in ((f"next.{s}", o.image(s)), (f"target.{s}", o.target(s)))]
    roots += [("dynamics.rate", x) for x in o.coefficients()]
    region = Domain("region", Fraction(0), (Fraction(0), Fraction(0)))
    for number, r in enumerate(claim.requirements, 1):
        if r.kind == "value" and not r.over:
            roots.append((f"require[{number}]", o.requirement(number, region)))
    until = time.monotonic() + SECONDS
    seen: set[tuple[str, int]] = set()
    for place, obligation in roots:
        for k in o.graph.reached((obligation.root,)):
            gate = o.graph.gates[k]
            for arg, low, high, strict, what in _hazards(o, claim, gate.op, gate.args, gate.value):
                if (gate.op, arg) in seen:
                    continue
                seen.add((gate.op, arg))
                at = _outside(o, claim, arg, low, high, strict, until)
                if at is not None:
                    where = ", ".join(f"{n} = {float(x):.6g}" for n, x in sorted(at.items())) or "every point"
                    return place, f"not defined at {where}: {what}; narrow the ranges or change the expression"
    return None


def _hazards(
    o: Obligations, claim: Claim, op: str, args: tuple[int, ...], value: Fraction | None
) -> list[tuple[int, float, float, bool, str]]:
    """Arguments, the range they must keep, whether ends are excluded, and what is wrong outside it."""
    if op == "sqrt":
        return [(args[0], 0.0, float("inf"), False, "root of a negative number")]
    if op == "log":
        return [(args[0], 0.0, float("inf"), True, "logarithm of a number that is not positive")]
    if op in ("asin", "acos"):
        return [(args[0], -1.0, 1.0, False, f"{op} of a number beyond 1")]
    if op == "tan":
        return [(args[0], 0.0, 0.0, False, "tangent at a pole")]
    if op == "div":
        return [(args[1], 0.0, 0.0, True, "division by zero")]
    if op == "reading":
        library = claim.libraries[int(value or 0)]
        return [
            (a, to_float(grid[0]), to_float(grid[-1]), False,
             f"{library.file} is read at {axis} beyond its grid [{float(grid[0]):.6g}, {float(grid[-1]):.6g}]")
            for a, grid, axis in zip(args, library.grid, library.axes, strict=True)
        ]  # fmt: skip
    return []


def _outside(
    o: Obligations, claim: Claim, arg: int, low: float, high: float, strict: bool, until: float
) -> Point | None:
    obligation: Obligation = o.ranging(arg)
    names = [v.name for v in obligation.variables]
    runner = Runner(compiled(o.graph, arg, "", names), names, claim.libraries)
    found = search(runner, obligation, False, Effort(1e-3, CELLS, until))
    values = {_value(runner, names, p): p for p in (found.lowest, found.highest)}
    margin = 1e-12 * max([1e-300, *(abs(v) for v in values if abs(v) < float("inf"))])
    if low == high and not strict:
        return _pole(runner, names, [v.name for v in obligation.variables if v.listed], values)
    if low == high:  # a zero to be avoided: taken, or passed between two points of opposite sign
        listed = [v.name for v in obligation.variables if v.listed]
        return _zero(runner, names, listed, values)
    for v, point in values.items():
        if v < low - margin or v > high + margin or (strict and v == low):
            return point
    return None


def _zero(runner: Runner, names: list[str], listed: list[str], values: dict[float, Point]) -> Point | None:
    least, most = min(values), max(values)
    if least == 0 or most == 0:
        return values[0.0]
    a, b = values[least], values[most]
    if not (-float("inf") < least < 0 < most < float("inf")) or any(a[n] != b[n] for n in listed):
        return None
    return _between(runner, names, a, b, 0.0)


def _between(runner: Runner, names: list[str], a: Point, b: Point, value: float) -> Point:
    """A point between two where the argument is near a value it passes."""
    low, high = Fraction(0), Fraction(1)
    for _ in range(50):
        share = (low + high) / 2
        point = {n: a[n] + share * (b[n] - a[n]) for n in names}
        if _value(runner, names, point) < value:
            low = share
        else:
            high = share
    return point


def _pole(runner: Runner, names: list[str], listed: list[str], values: dict[float, Point]) -> Point | None:
    """A point where the argument passes an odd multiple of a quarter turn."""
    least, most = min(values), max(values)
    a, b = values[least], values[most]
    if not (-float("inf") < least and most < float("inf")) or any(a[n] != b[n] for n in listed):
        return None
    pole = (np.ceil(least / np.pi - 0.5) + 0.5) * np.pi
    return _between(runner, names, a, b, pole) if least < pole < most else None


def _value(runner: Runner, names: list[str], point: Point) -> float:
    x = np.array([to_float(point[n]) for n in names]).reshape(1, len(names))
    return float(runner(x, x, gradient=False).low[0])
