"""A continuous stance as a linear system in time: x' = A x + b over a duration (proofs/stance.md).

What the search makes of `[dynamics]`; the checker derives the same from the claim's text on its own.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from functools import reduce

from .calculus import at_zero, slope, substituted
from .errors import Bad
from .graph import Graph
from .model import Claim
from .resolve import Scope

Entries = tuple[int | None, ...]  # gates; None stands for zero
TIME, PHASE = "t", "phase(t)"  # seconds since touchdown, and their share of the duration
DURATION = "dynamics.duration"


@dataclass(frozen=True, slots=True)
class Parameter:
    """What rates and duration depend on beside time: its name, its gate in the claim, the grid it is read on."""

    name: str
    gate: int
    grid: tuple[Fraction, ...] | None


@dataclass(frozen=True, slots=True)
class Motion:
    """x' = A x + b: gates in a variable `phase(t)` and in variables named as the parameters.

    `positive` has to stay above zero throughout: the duration, where a leg only pushes z and g + z'', and what makes
    every state answer `signals` (disturbances within the stance, which `forced` multiplies) in one direction.
    """

    states: tuple[str, ...]
    parameters: tuple[Parameter, ...]
    matrix: tuple[Entries, ...]
    free: Entries
    duration: int
    positive: tuple[int, ...] = ()
    signals: tuple[str, ...] = ()
    forced: tuple[Entries, ...] = ()


def _system(scope: Scope) -> tuple[tuple[Entries, ...], Entries, dict[str, Entries]]:
    """A, b and the factors of signals within the stance, of the rates as they stand in a scope, in seconds."""
    g, rate = scope.graph, _dynamics(scope)[1]
    states = sorted(rate)
    variables = {x: g.add("variable", name=x) for x in states}
    one, none = g.number(1), g.number(0)
    rows, free = [], []
    for x in states:
        root = scope.name(f"rate({x})")
        row = [slope(g, root, {variables[y]: one}) for y in states]
        for entry in row:
            if entry is not None and set(g.variables(entry)) & set(states):
                raise Bad(
                    f"dynamics.rate.{x}: not linear in the continuous states; only linear rates can be proved yet"
                )
        rows.append(tuple(None if e == none else e for e in row))
        free.append(at_zero(g, root, set(variables.values())))
    within = {n: g.add("variable", name=n) for n, q in sorted(scope.claim.uncertain.items()) if q.within}
    factors = {n: tuple(None if k is None else slope(g, k, {v: one}) for k in free) for n, v in within.items()}
    signals = {n: row for n, row in factors.items() if any(k is not None for k in row)}
    for factor in (*rows, *signals.values()):
        if any(k is not None and set(g.variables(k)) & set(within) for k in factor):
            raise Bad("dynamics.rate: a signal with `within` may only be added to a rate, times what is free of states")
    rest = tuple(None if k is None else at_zero(g, k, set(within.values())) for k in free)
    return tuple(rows), rest, signals


def _one_sided(g: Graph, matrix: tuple[Entries, ...], signals: Mapping[str, Entries]) -> list[int]:
    """What has to be positive for every state to answer a signal in one direction (proofs/stance.md (5))."""
    if not signals:
        return []
    found = []
    off = [(tuple(k for j, k in enumerate(row) if j != i), False) for i, row in enumerate(matrix)]
    for row, either in [*off, *((row, True) for row in signals.values())]:
        gates = [g.gates[k] for k in row if k is not None]
        found += [k for k in row if k is not None and g.gates[k].op != "number"]
        values = [x.value or Fraction(0) for x in gates if x.op == "number"]
        falling = either and len(values) == len(gates) and max(values, default=Fraction(0)) <= 0
        if min(values, default=Fraction(0)) < 0 and not falling:
            raise Bad("dynamics.rate: states answer a signal with `within` in both directions; this cannot be followed")
    return found


def _dynamics(scope: Scope) -> tuple[int, list[str]]:
    d = scope.stance.dynamics
    if d is None or d.duration is None:
        raise Bad("dynamics: touchdown by a condition cannot be proved yet; state a duration")
    return scope.node(d.duration), list(d.rate)


def _axes(claim: Claim) -> dict[str, tuple[int, int]]:
    """Places of library axes, as the claim file has them: library and axis numbers."""
    return {
        f"library[{k}].at.{axis}": (k - 1, j)
        for k, library in enumerate(claim.libraries, 1)
        for j, axis in enumerate(library.axes)
    }


def _parameters(scope: Scope, roots: list[int], duration: int) -> tuple[Parameter, ...]:
    g, claim = scope.graph, scope.claim
    places = {spot: place for place, spot in _axes(claim).items()}
    names: dict[int, str] = {}
    lines: dict[int, set[Fraction]] = {}

    def found(k: int, name: str) -> None:
        gate = g.gates[k]
        if gate.op != "number" and k not in names:
            names[k] = gate.name if gate.op == "variable" else name

    seen, stack = set[int](), list(roots)
    while stack:
        k = stack.pop()
        gate = g.gates[k]
        if k in seen:
            continue
        seen.add(k)
        if gate.op == "variable":
            if gate.name != TIME:
                found(k, "")
        elif k == duration:
            found(k, DURATION)
        elif gate.op == "reading":
            number = int(gate.value or 0)
            for j, a in enumerate(gate.args):
                found(a, places[number, j])
                lines.setdefault(a, set()).update(claim.libraries[number].grid[j])
        else:
            stack.extend(gate.args)
    variables = {g.gates[k].name for k in names if g.gates[k].op == "variable"}
    reads = any(g.gates[k].op == "reading" for k in g.reached((duration,)))
    if reads or not set(g.variables(duration)) <= variables:
        found(duration, DURATION)
    listed = [Parameter(n, k, tuple(sorted(lines[k])) if k in lines else None) for k, n in names.items()]
    return tuple(sorted(listed, key=lambda p: p.name))


def motion(scope: Scope) -> Motion:
    """The stance of a claim as a linear system with its parameters cut off (proofs/stance.md). Raises Bad."""
    g = scope.graph
    duration, states = _dynamics(scope)
    matrix, free, signals = _system(scope)
    entries = [k for row in matrix for k in row if k is not None]
    added = [k for row in (free, *signals.values()) for k in row if k is not None]
    parameters = _parameters(scope, [*entries, *added], duration)
    by = {p.gate: g.add("variable", name=p.name) for p in parameters}
    whole = substituted(g, duration, by)
    by[g.add("variable", name=TIME)] = g.add("mul", whole, g.add("variable", name=PHASE))

    def cut(row: Entries) -> Entries:
        return tuple(None if k is None else substituted(g, k, by, whole) for k in row)

    kept = dict.fromkeys((*_pushing(scope, entries), *_one_sided(g, matrix, signals)))
    positive = (whole, *(k for k in cut(tuple(kept)) if k is not None))
    rows, forced = tuple(map(cut, matrix)), tuple(map(cut, signals.values()))
    return Motion(tuple(sorted(states)), parameters, rows, cut(free), whole, positive, tuple(signals), forced)


def _pushing(scope: Scope, entries: list[int]) -> list[int]:
    """z, and g + z'' (or the whole coefficient) wherever z'' stands over z."""
    g, found, d = scope.graph, dict[int, None](), scope.stance.dynamics
    texts = [*scope.stance.define.values(), *(d.rate.values() if d is not None else ())]
    rated = any(n.op == "dt" for e in texts for n in e.nodes)
    twice = [(z, scope.rated[r]) for z, r in scope.rated.items() if r in scope.rated]  # as they stand in the rates
    for entry in entries:
        parts = g.reached((entry,))
        for divided, below in (g.gates[k].args for k in parts if g.gates[k].op == "div"):
            if TIME in g.variables(below):
                bend = scope.rate(scope.rate(below))
                if g.gates[bend].op == "number":
                    if rated and g.gates[bend].value:  # folded into one number with g
                        found |= dict.fromkeys((below, entry))
                elif bend in parts:
                    apart = divided == bend or bend not in g.reached((divided,))
                    found |= dict.fromkeys((below, entry if apart else divided))
                    continue
            inner = g.reached((below,))
            for z, bend in twice:  # a quotient by what is built on z, or z'' that is a number
                built = z == below or (z in inner and g.gates[z].op != "number")
                if built and (g.gates[bend].op == "number" or bend in parts):
                    found |= dict.fromkeys((below, entry))
    return list(found)


def held(scope: Scope, m: Motion) -> tuple[dict[int, int], int]:
    """What stands for the parameters in a scope, and the duration; Bad where rates rest on other things it binds."""
    g = scope.graph
    duration, axes = _dynamics(scope)[0], _axes(scope.claim)

    def gate(name: str) -> int:
        if name in axes:
            library, axis = axes[name]
            return scope.node(scope.claim.libraries[library].at[axis])
        return duration if name == DURATION else scope.name(name)

    by = {g.add("variable", name=p.name): gate(p.name) for p in m.parameters}
    time = {g.add("variable", name=TIME): g.add("mul", duration, g.add("variable", name=PHASE))}
    matrix, free, signals = _system(scope)
    rows, ours = (*matrix, free, *signals.values()), (*m.matrix, m.free, *m.forced)
    here = [substituted(g, k, time, duration) if k is not None else None for row in rows for k in row]
    there = [substituted(g, k, by) if k is not None else None for row in ours for k in row]
    if tuple(signals) != m.signals or here != there or substituted(g, m.duration, by) != duration:
        raise Bad("the rates of the stance rest on what is varied here; this cannot be followed yet")
    return by, duration


def copy(signal: str, state: str, early: bool = False) -> str:
    """The name of a signal as one continuous state answers it, at touchdown or at a phase of the stance (`early`):

    constants of their own (proofs/stance.md (5)).
    """
    return f"{signal}({state}, t)" if early else f"{signal}({state})"


def landed(scope: Scope, m: Motion, root: int, phase: int | None = None) -> int:
    """A gate at touchdown, or at a phase of the stance: time and continuous states by the flow (proofs/stance.md)."""
    g = scope.graph
    if not set(g.variables(root)) & {TIME, *m.states}:
        return root
    by, duration = held(scope, m)
    values = [by[g.add("variable", name=p.name)] for p in m.parameters]
    one = g.number(1)
    sigma = one if phase is None else g.add("sub", g.add("mul", g.number(2), phase), one)
    columns = [(j, scope.name(f"start({x})")) for j, x in enumerate(m.states, 1)]
    if any(k is not None for k in m.free):
        columns.append((0, one))
    n = len(m.states)
    at = {g.add("variable", name=TIME): duration if phase is None else g.add("mul", duration, phase)}
    for i, x in enumerate(m.states, 1):
        signals = [(n + j, g.add("variable", name=copy(d, x, phase is not None))) for j, d in enumerate(m.signals, 1)]
        parts = [g.add("mul", g.add("flow", sigma, *values, name=f"{i} {j}"), k) for j, k in (*columns, *signals)]
        at[g.add("variable", name=x)] = reduce(lambda a, b: g.add("add", a, b), parts)
    return substituted(g, root, at, None if phase is None else duration)


def supported(scope: Scope, m: Motion, root: int, phase: int) -> int:
    """One of `positive` at a phase of the stance."""
    by, _ = held(scope, m)
    return substituted(scope.graph, root, {**by, scope.graph.add("variable", name=PHASE): phase})
