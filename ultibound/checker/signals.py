"""The map under any course of the signals within a stance, for slopes: proofs/signals.md."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from functools import reduce

from .calculus import Unprovable, derivative, replaced
from .motion import PHASE, TIME, Entries, Motion, held
from .names import Names
from .terms import Terms


def instant(signal: str, part: int) -> str:
    """The phase that stands for one part of the stance."""
    return f"phase({signal}, {part})"


def excess(signal: str, part: int) -> str:
    """What a signal is above the middle of its range in one part of the stance."""
    return f"{signal}({part})"


def followed(names: Names, motion: Motion, root: int, parts: int, middles: Mapping[str, Fraction]) -> int:
    """A term at touchdown under any course of the signals, as far as slopes by what is marked go.

    F of proofs/signals.md (3): each part of the stance has a phase and a value of every signal. Raises Unprovable.
    """
    terms, put = names.terms, names.terms.put
    if not set(terms.variables(root)) & {TIME, *motion.states}:
        return root
    linear_in(terms, root, motion.states)
    by, duration = held(names, motion)
    if any(terms.all[k][0] == "mark" for k in terms.below(duration)):
        raise Unprovable("the duration follows the state, so a signal ends at another instant")
    gates = tuple(by[put("variable", (), p.name)] for p in motion.parameters)
    n, one = len(motion.states), put("number", (), Fraction(1))

    def flow(sigma: int, i: int, j: int) -> int:
        return put("flow", (sigma, *gates), f"{i} {j}")

    changes: list[list[int]] = [[] for _ in motion.states]
    share = put("mul", (put("number", (), Fraction(1, parts)), duration))
    for d, row in zip(motion.signals, motion.forced, strict=True):
        for part in range(1, parts + 1):
            phase, value = (put("variable", (), name(d, part)) for name in (instant, excess))
            at = {**by, put("variable", (), PHASE): phase}
            factors = tuple(None if k is None else replaced(terms, k, at) for k in row)
            sigma = put("sub", (put("mul", (put("number", (), Fraction(2)), phase)), one))
            phi = [[flow(sigma, i, j) for j in range(1, n + 1)] for i in range(1, n + 1)]
            for j, answer in enumerate(brought_back(terms, motion, phi, factors)):
                if answer is not None:
                    changes[j].append(put("mul", (put("mul", (share, value)), answer)))
    columns = [
        (j, reduce(lambda a, b: put("add", (a, b)), more, names.of(f"start({y})")))
        for j, (y, more) in enumerate(zip(motion.states, changes, strict=True), 1)
    ]
    columns += [(0, one)] if any(k is not None for k in motion.free) else []
    columns += [(n + j, put("number", (), middles[d])) for j, d in enumerate(motion.signals, 1) if middles[d]]
    at = {put("variable", (), TIME): duration}
    for i, x in enumerate(motion.states, 1):
        added = [put("mul", (flow(one, i, j), k)) for j, k in columns]
        at[put("variable", (), x)] = reduce(lambda a, b: put("add", (a, b)), added)
    return replaced(terms, root, at)


def linear_in(terms: Terms, root: int, states: tuple[str, ...]) -> None:
    """Raises Unprovable unless a term is affine in the continuous states: proofs/signals.md (1)."""
    for x in states:
        slope = derivative(terms, root, {terms.put("variable", (), x): terms.put("number", (), Fraction(1))})
        if slope is not None and set(terms.variables(slope)) & set(states):
            raise Unprovable("the next state is not linear in the continuous states, which signals move")


def brought_back(terms: Terms, motion: Motion, phi: list[list[int]], factors: Entries) -> Entries:
    """Φ(θ)⁻¹ B(θ), a term a continuous state: proofs/signals.md (2). Raises Unprovable."""
    put = terms.put

    def times(a: int, b: int | None) -> int | None:
        return None if b is None else put("mul", (a, b))

    def less(a: int | None, b: int | None) -> int | None:
        return a if b is None else put("neg", (b,)) if a is None else put("sub", (a, b))

    if len(factors) == 1:
        return (None if factors[0] is None else put("div", (factors[0], phi[0][0])),)
    if len(factors) != 2 or motion.matrix[0][0] is not None or motion.matrix[1][1] is not None:
        raise Unprovable("a signal's effect that follows the state is known for two continuous states without damping")
    first = less(times(phi[1][1], factors[0]), times(phi[0][1], factors[1]))
    return first, less(times(phi[0][0], factors[1]), times(phi[1][0], factors[0]))
