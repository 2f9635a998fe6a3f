"""Pushes within a stance, followed until touchdown (proofs/stance.md (6))."""

from __future__ import annotations

from collections.abc import Sequence
from functools import reduce

from .calculus import hazards, slope
from .errors import Bad
from .motion import Motion, held, landed
from .resolve import Scope


def grown(scope: Scope, m: Motion, state: str, pushed: str, phase: int) -> int:
    """What a push of `pushed` at a phase changes next `state` by, a unit of it. Raises Bad where it is not known."""
    g = scope.graph
    one = g.number(1)
    own = _answers(scope, pushed, m.states)
    if [k for k in own if k is not None] != [one]:
        raise Bad(f"next.{pushed} is not one of the continuous states, so a push during the stance has no place")
    i = own.index(one)
    led = _led_on(m, i)
    others = [j for j in led if j != i]
    if len(others) > 1:
        raise Bad(f"a push of {pushed} during the stance leads on to more than two continuous states; not known yet")
    if others and any(m.matrix[k][k] is not None for k in led):
        raise Bad("a push during the stance needs rates without damping: no state in its own rate")
    by, _ = held(scope, m)
    values = [by[g.add("variable", name=p.name)] for p in m.parameters]
    early = g.add("sub", g.add("mul", g.number(2), phase), one)

    def flow(sigma: int, a: int, b: int) -> int:
        return g.add("flow", sigma, *values, name=f"{a + 1} {b + 1}")

    changes: dict[int, int] = {}
    if others:  # the determinant of their part of Φ is 1
        j = others[0]
        for k in led:
            apart = g.add("mul", flow(one, k, i), flow(early, j, j)), g.add("mul", flow(one, k, j), flow(early, j, i))
            changes[k] = g.add("sub", *apart)
    else:
        changes[i] = g.add("div", flow(one, i, i), flow(early, i, i))
    answers = _answers(scope, state, [m.states[k] for k in led])
    found = []
    for k, answer in zip(led, answers, strict=True):
        if answer is not None:
            factor = landed(scope, m, answer)
            found.append(changes[k] if factor == one else g.add("mul", factor, changes[k]))
    return reduce(lambda a, b: g.add("add", a, b), found) if found else g.number(0)


def _answers(scope: Scope, state: str, among: Sequence[str]) -> list[int | None]:
    """∂(next state)/∂x of continuous states in which it is linear; None where it does not hold them."""
    g, root, problem = scope.graph, scope.at_touchdown(state), f"next.{state} is not linear in the continuous states"
    try:
        found = [slope(g, root, {g.add("variable", name=x): g.number(1)}) for x in among]
    except Bad:
        raise Bad(f"{problem} (it has corners), so no push during the stance can be followed") from None
    parts = [k for k in found if k is not None]
    for _, decides, *_ in hazards(g, root):
        parts += decides if isinstance(decides, tuple) else [decides] if isinstance(decides, int) else []
    if any(set(among) & set(g.variables(k)) for k in parts):
        raise Bad(f"{problem}, so no push during the stance can be followed")
    return found


def _led_on(m: Motion, first: int) -> list[int]:
    """The ranks of the continuous states that a change of one of them is passed on to."""
    found = [first]
    for j in found:
        found += [k for k, row in enumerate(m.matrix) if row[j] is not None and k not in found]
    return sorted(found)
