"""A continuous stance as a linear system in time, derived from the claim's text: proofs/stance.md."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from functools import reduce

from .calculus import Unprovable, derivative, replaced, without
from .model import Dynamics, Statement
from .names import Names
from .terms import Terms

Entries = tuple[int | None, ...]  # terms; None stands for zero
TIME, PHASE = "t", "phase(t)"  # seconds since touchdown, and their share of the duration
DURATION = "dynamics.duration"


@dataclass(frozen=True)
class Parameter:
    """What rates and duration depend on beside time: its name, its term in the claim, the grid it is read on."""

    name: str
    term: int
    grid: tuple[Fraction, ...] | None


@dataclass(frozen=True)
class Motion:
    """x' = A x + b over the duration: terms in a variable `phase(t)` and in variables named as the parameters."""

    states: tuple[str, ...]
    parameters: tuple[Parameter, ...]
    matrix: tuple[Entries, ...]
    free: Entries
    duration: int
    positive: tuple[int, ...] = ()  # what has to be above 0 throughout: the duration, where a leg only pushes, …
    signals: tuple[str, ...] = ()  # disturbances within the stance,
    forced: tuple[Entries, ...] = ()  # and what each of them is multiplied by in the rates


def linear(terms: Terms, states: tuple[str, ...], rates: Mapping[str, int]) -> tuple[tuple[Entries, ...], Entries]:
    """A and b of rates that are linear in the continuous states: proofs/stance.md (2). Raises Unprovable."""
    put = terms.put
    one, none = (put("number", (), Fraction(n)) for n in (1, 0))
    variables = {s: put("variable", (), s) for s in states}
    rows: list[Entries] = []
    free: list[int | None] = []
    for s in states:
        row = tuple(derivative(terms, rates[s], {variables[x]: one}) for x in states)
        for entry in row:
            if entry is not None and set(terms.variables(entry)) & set(states):
                raise Unprovable(f"the rate of {s} is not linear in the continuous states")
        rows.append(tuple(None if e == none else e for e in row))
        free.append(without(terms, rates[s], set(variables.values())))
    return tuple(rows), tuple(free)


def cut(terms: Terms, roots: list[int], duration: int, statement: Statement) -> tuple[Parameter, ...]:
    """Parameters of rates and duration, sorted by name: variables, library axes, the duration itself."""
    names: dict[int, str] = {}
    lines: dict[int, set[Fraction]] = {}
    seen: set[int] = set()

    def parameter(k: int, name: str) -> None:
        op, _, payload = terms.all[k]
        if op != "number":
            names.setdefault(k, str(payload) if op == "variable" else name)

    grids = {
        c: [(place(k, axis), grid) for axis, grid in zip(library.axes, library.grid, strict=True)]
        for k, library in enumerate(statement.libraries, 1)
        for c in library.columns
    }
    waiting = list(roots)
    while waiting:
        k = waiting.pop()
        if k in seen:
            continue
        seen.add(k)
        op, args, payload = terms.all[k]
        if op == "variable" and payload != TIME:
            parameter(k, "")
        elif k == duration:
            parameter(k, DURATION)
        elif op == "reading":
            for a, (where, grid) in zip(args, grids[str(payload)], strict=True):
                parameter(a, where)
                lines.setdefault(a, set()).update(grid)
        else:
            waiting += args
    known = {str(terms.all[k][2]) for k in names if terms.all[k][0] == "variable"}
    plain = all(terms.all[k][0] != "reading" for k in terms.below(duration))
    if not (plain and set(terms.variables(duration)) <= known):
        parameter(duration, DURATION)
    found = [Parameter(n, k, tuple(sorted(lines[k])) if k in lines else None) for k, n in names.items()]
    return tuple(sorted(found, key=lambda p: p.name))


def place(number: int, axis: str) -> str:
    """Where an axis value stands in the claim."""
    return f"library[{number}].at.{axis}"


def copy(signal: str, state: str, early: bool = False) -> str:
    """The name of a signal as one continuous state answers it, at touchdown or at a phase of the stance (`early`)."""
    return f"{signal}({state}, t)" if early else f"{signal}({state})"


def motion(names: Names) -> Motion:
    """The stance's rates as a linear system, with its parameters cut off. Raises Unprovable."""
    terms, stance = names.terms, dynamics(names)
    if stance.duration is None:
        raise Unprovable("touchdown by a condition")
    states = tuple(sorted(stance.rate))
    matrix, free, signals = system(names)
    duration = names.expression(stance.duration)
    entries = [k for row in matrix for k in row if k is not None]
    roots = entries + [k for row in (free, *signals.values()) for k in row if k is not None]
    parameters = cut(terms, roots, duration, names.statement)
    by = {p.term: terms.put("variable", (), p.name) for p in parameters}
    whole = replaced(terms, duration, by)
    by[terms.put("variable", (), TIME)] = terms.put("mul", (whole, terms.put("variable", (), PHASE)))

    def apart(entries: Entries) -> Entries:
        return tuple(None if k is None else replaced(terms, k, by, whole) for k in entries)

    kept = dict.fromkeys((*pushing(names, entries), *one_sided(terms, matrix, signals)))
    positive = (whole, *(k for k in apart(tuple(kept)) if k is not None))
    rows, forced = (tuple(apart(r) for r in x) for x in (matrix, signals.values()))
    return Motion(states, parameters, rows, apart(free), whole, positive, tuple(signals), forced)


def dynamics(names: Names) -> Dynamics:
    found = names.statement.stances[0].dynamics
    if found is None:
        raise Unprovable("no dynamics")
    return found


def system(names: Names) -> tuple[tuple[Entries, ...], Entries, dict[str, Entries]]:
    """A, b, and by what each signal within the stance is multiplied, of the rates as they stand among `names`."""
    terms, states = names.terms, tuple(sorted(dynamics(names).rate))
    matrix, rest = linear(terms, states, {x: names.of(f"rate({x})") for x in states})
    within = [n for n, q in sorted(names.statement.uncertain.items()) if q.within]
    variables = {n: terms.put("variable", (), n) for n in within}
    one = terms.put("number", (), Fraction(1))
    signals: dict[str, Entries] = {}
    for n, v in variables.items():
        row = tuple(None if k is None else derivative(terms, k, {v: one}) for k in rest)
        if any(k is not None for k in row):
            signals[n] = row
    for k in (k for row in (*matrix, *signals.values()) for k in row if k is not None):
        if set(terms.variables(k)) & set(within):
            raise Unprovable("a signal within the stance enters the rates other than by a sum")
    free = tuple(None if k is None else without(terms, k, set(variables.values())) for k in rest)
    return matrix, free, signals


def one_sided(terms: Terms, matrix: tuple[Entries, ...], signals: Mapping[str, Entries]) -> list[int]:
    """What has to be positive for every state to answer a signal in one direction (proofs/stance.md (5))."""
    found = []
    couplings = [row[:i] + row[i + 1 :] for i, row in enumerate(matrix)] if signals else []
    for row in [*couplings, *signals.values()]:
        terms_of = [k for k in row if k is not None]
        numbers = [q for k in terms_of if isinstance(q := terms.all[k][2], Fraction) and terms.all[k][0] == "number"]
        found += [k for k in terms_of if terms.all[k][0] != "number"]
        negative = bool(numbers) and all(q <= 0 for q in numbers) and len(numbers) == len(terms_of)
        if any(q < 0 for q in numbers) and not (negative and row in signals.values()):
            raise Unprovable("the states are not shown to answer a signal within the stance in one direction")
    return found


def held(names: Names, motion: Motion) -> tuple[dict[int, int], int]:
    """What the parameters' variables stand for among `names`, and the duration.

    `names` may hold other terms for parameters; raises Unprovable where the rates rest on anything else they hold.
    """
    terms, stance = names.terms, dynamics(names)
    duration = names.expression(stance.duration) if stance.duration is not None else 0
    axes = {
        place(k, axis): e
        for k, library in enumerate(names.statement.libraries, 1)
        for axis, e in zip(library.axes, library.at, strict=True)
    }

    def gate(name: str) -> int:
        if name == DURATION:
            return duration
        return names.expression(axes[name]) if name in axes else names.of(name)

    by = {terms.put("variable", (), p.name): gate(p.name) for p in motion.parameters}
    time = {terms.put("variable", (), TIME): terms.put("mul", (duration, terms.put("variable", (), PHASE)))}
    matrix, free, signals = system(names)
    if tuple(signals) != motion.signals:
        raise Unprovable("the rates of the stance rest on what is varied here")
    ours = [k for row in (*motion.matrix, motion.free, *motion.forced) for k in row] + [motion.duration]
    theirs = [k for row in (*matrix, free, *signals.values()) for k in row] + [duration]
    for k, m in zip(ours, theirs, strict=True):
        if (k is None) != (m is None) or (
            k is not None and m is not None and replaced(terms, k, by) != replaced(terms, m, time, duration)
        ):
            raise Unprovable("the rates of the stance rest on what is varied here")
    return by, duration


def landed(names: Names, motion: Motion, root: int, phase: int | None = None) -> int:
    """A term at touchdown, or at a phase of the stance: time and states by the flow (proofs/stance.md (3))."""
    terms, put = names.terms, names.terms.put
    if not set(terms.variables(root)) & {TIME, *motion.states}:
        return root
    by, duration = held(names, motion)
    gates = [by[put("variable", (), p.name)] for p in motion.parameters]
    one, two = (put("number", (), Fraction(n)) for n in (1, 2))
    sigma = one if phase is None else put("sub", (put("mul", (two, phase)), one))
    columns = [(j, names.of(f"start({y})")) for j, y in enumerate(motion.states, 1)]
    columns += [(0, one)] if any(k is not None for k in motion.free) else []
    n = len(motion.states)
    at = {put("variable", (), TIME): duration if phase is None else put("mul", (duration, phase))}
    for i, x in enumerate(motion.states, 1):
        # a signal's effect on one state at one phase is that of a constant; others are told apart: proofs/stance.md (5)
        early = phase is not None
        disturbed = [(n + j, put("variable", (), copy(d, x, early))) for j, d in enumerate(motion.signals, 1)]
        parts = [put("mul", (put("flow", (sigma, *gates), f"{i} {j}"), k)) for j, k in (*columns, *disturbed)]
        at[put("variable", (), x)] = reduce(lambda a, b: put("add", (a, b)), parts)
    return replaced(terms, root, at, duration if phase is not None else None)


def pushing(names: Names, entries: list[int]) -> list[int]:
    """z, and g + z'' or the whole coefficient, wherever z'' stands over z: positive where a leg only pushes."""
    terms, found, stance = names.terms, dict[int, None](), names.statement.stances[0]
    texts = [*stance.define.values(), *(stance.dynamics.rate.values() if stance.dynamics is not None else ())]
    rated = any(n.op == "dt" for e in texts for n in e.nodes)
    twice = {z: names.rated[r] for z, r in names.rated.items() if r in names.rated}  # z'' as the rates have it
    for entry in entries:
        below = set(terms.below(entry))
        for k in sorted(below):
            op, args, _ = terms.all[k]
            if op != "div":
                continue
            if set(terms.variables(args[1])) & {TIME}:
                bend = names.rate(names.rate(args[1]))
                op, _, folded = terms.all[bend]
                if op == "number" and folded and rated:  # g + z'' is one number by now
                    found |= dict.fromkeys((args[1], entry))
                elif op != "number" and bend in below:
                    apart = args[0] == bend or bend not in terms.below(args[0])  # no sum that holds both g and z''
                    found |= dict.fromkeys((args[1], entry if apart else args[0]))
                    continue
            built = {z for z in terms.below(args[1]) if z == args[1] or terms.all[z][0] != "number"} & set(twice)
            if any(terms.all[twice[z]][0] == "number" or twice[z] in below for z in built):  # z'' may be a number
                found |= dict.fromkeys((args[1], entry))
    return list(found)


def supported(names: Names, motion: Motion, root: int, phase: int) -> int:
    """One of these at a phase of the stance."""
    by, _ = held(names, motion)
    return replaced(names.terms, root, {**by, names.terms.put("variable", (), PHASE): phase})
