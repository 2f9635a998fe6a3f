"""Pushes within a stance: what a sudden change has grown to by touchdown (proofs/stance.md (6))."""

from __future__ import annotations

from collections.abc import Iterable
from fractions import Fraction
from functools import reduce

from .calculus import Unprovable, derivative, hazards
from .motion import Motion, held, landed
from .names import Names


def grown(names: Names, motion: Motion, state: str, pushed: str, phase: int) -> int:
    """How far next `state` is led by a push of `pushed` at a phase, for each unit of it. Raises Unprovable."""
    put = names.terms.put
    first = place(names, motion, pushed)
    group = reached(motion, first)
    if len(group) > 2 or (len(group) == 2 and any(motion.matrix[k][k] is not None for k in group)):
        raise Unprovable("a push within the stance is followed for two continuous states without damping")
    answers = followed(names, state, [motion.states[k] for k in group])
    by, _ = held(names, motion)
    gates = tuple(by[put("variable", (), p.name)] for p in motion.parameters)
    one, two = (put("number", (), Fraction(n)) for n in (1, 2))
    early = put("sub", (put("mul", (two, phase)), one))
    (other,) = [k for k in group if k != first] or [first]

    def entry(at: int, i: int, j: int) -> int:
        return put("flow", (at, *gates), f"{i + 1} {j + 1}")

    def change(k: int) -> int:
        """The entry of Φ(1) Φ(θ)⁻¹ by which state k follows the one that is pushed."""
        if other == first:
            return put("div", (entry(one, k, first), entry(early, first, first)))
        straight = put("mul", (entry(one, k, first), entry(early, other, other)))
        return put("sub", (straight, put("mul", (entry(one, k, other), entry(early, other, first)))))

    parts = []
    for k in group:
        by_state = answers.get(motion.states[k])
        if by_state is not None:
            factor = landed(names, motion, by_state)
            parts.append(change(k) if factor == one else put("mul", (factor, change(k))))
    return reduce(lambda a, b: put("add", (a, b)), parts) if parts else put("number", (), Fraction(0))


def place(names: Names, motion: Motion, pushed: str) -> int:
    """The rank of the one continuous state that next `pushed` follows at touchdown, one for one."""
    answers = followed(names, pushed, motion.states)
    if list(answers.values()) != [names.terms.put("number", (), Fraction(1))]:
        raise Unprovable("a push within the stance is about a state that is a continuous one at touchdown")
    return motion.states.index(next(iter(answers)))


def followed(names: Names, state: str, among: Iterable[str]) -> dict[str, int]:
    """By what next `state` is multiplied in these continuous states, where it holds them; in all together linear."""
    terms, one = names.terms, names.terms.put("number", (), Fraction(1))
    root, met = names.expression(names.statement.stances[0].next[state]), set(among)
    entries = {x: derivative(terms, root, {terms.put("variable", (), x): one}) for x in sorted(met)}
    found = {x: k for x, k in entries.items() if k is not None}
    undefined = {a for hazard in hazards(terms, root) for a in hazard if isinstance(a, int)}
    if any(met & set(terms.variables(k)) for k in (*found.values(), *undefined)):
        raise Unprovable(f"a push within the stance: next {state} is not linear in the continuous states")
    return found


def reached(motion: Motion, first: int) -> list[int]:
    """The continuous states, by rank, that a change of one of them leads on to."""
    found = {first}
    while more := {k for k, row in enumerate(motion.matrix) if any(row[j] is not None for j in found)} - found:
        found |= more
    return sorted(found)
