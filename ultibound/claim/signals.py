"""The map under any course of the signals within a stance, for slopes (proofs/signals.md)."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from functools import reduce

from .calculus import slope, substituted
from .errors import Bad
from .graph import Graph
from .motion import PHASE, TIME, Entries, Motion, held
from .resolve import Scope


def instant(signal: str, part: int) -> str:
    """The name of the phase that stands for one part of the stance."""
    return f"phase({signal}, {part})"


def excess(signal: str, part: int) -> str:
    """The name of what a signal is above the middle of its range in one part of the stance."""
    return f"{signal}({part})"


def followed(scope: Scope, m: Motion, root: int, parts: int, middles: Mapping[str, Fraction]) -> int:
    """A gate at touchdown under any course of the signals, as far as slopes by what is marked go.

    Signals are changes of the start, brought back from a phase of every part: F of proofs/signals.md (3). Raises Bad.
    """
    g = scope.graph
    if not set(g.variables(root)) & {TIME, *m.states}:
        return root
    _linear(g, root, m.states)
    by, duration = held(scope, m)
    if any(g.gates[k].op == "mark" for k in g.reached((duration,))):
        raise Bad("the duration follows the state, so that a signal ends at another instant")
    values = [by[g.add("variable", name=p.name)] for p in m.parameters]
    one, two, share = g.number(1), g.number(2), g.add("mul", g.number(Fraction(1, parts)), duration)
    n = len(m.states)
    starts = [scope.name(f"start({x})") for x in m.states]
    for d, row in zip(m.signals, m.forced, strict=True):
        for part in range(1, parts + 1):
            phase, value = g.add("variable", name=instant(d, part)), g.add("variable", name=excess(d, part))
            at = {**by, g.add("variable", name=PHASE): phase}
            sigma = g.add("sub", g.add("mul", two, phase), one)
            phi = {(i, j): g.add("flow", sigma, *values, name=f"{i + 1} {j + 1}") for i in range(n) for j in range(n)}
            answers = _brought_back(g, m, phi, tuple(None if k is None else substituted(g, k, at) for k in row))
            for j, answer in enumerate(answers):
                if answer is not None:
                    starts[j] = g.add("add", starts[j], g.add("mul", g.add("mul", share, value), answer))
    columns = list(enumerate(starts, 1))
    if any(k is not None for k in m.free):
        columns.append((0, one))
    columns += [(n + j, g.number(middles[d])) for j, d in enumerate(m.signals, 1) if middles[d]]
    landing = {g.add("variable", name=TIME): duration}
    for i, x in enumerate(m.states, 1):
        added = [g.add("mul", g.add("flow", one, *values, name=f"{i} {j}"), k) for j, k in columns]
        landing[g.add("variable", name=x)] = reduce(lambda a, b: g.add("add", a, b), added)
    return substituted(g, root, landing)


def _linear(g: Graph, root: int, states: tuple[str, ...]) -> None:
    why = "the next state is not linear in the continuous states, which signals move"
    for x in states:
        try:
            found = slope(g, root, {g.add("variable", name=x): g.number(1)})
        except Bad:  # through a corner or a library
            raise Bad(why) from None
        if found is not None and set(g.variables(found)) & set(states):
            raise Bad(why)


def _brought_back(g: Graph, m: Motion, phi: Mapping[tuple[int, int], int], factors: Entries) -> Entries:
    """Φ(θ)⁻¹ B(θ), a gate a continuous state (proofs/signals.md (2))."""

    def less(a: tuple[int, int | None], b: tuple[int, int | None]) -> int | None:
        plus, minus = (None if k is None else g.add("mul", p, k) for p, k in (a, b))
        if minus is None:
            return plus
        return g.add("neg", minus) if plus is None else g.add("sub", plus, minus)

    if len(factors) == 1:
        return (None if factors[0] is None else g.add("div", factors[0], phi[0, 0]),)
    if len(factors) > 2 or any(m.matrix[i][i] is not None for i in range(2)):
        raise Bad("a signal's effect that follows the state is known for at most two continuous states without damping")
    first = less((phi[1, 1], factors[0]), (phi[0, 1], factors[1]))
    return first, less((phi[0, 0], factors[1]), (phi[1, 0], factors[0]))
