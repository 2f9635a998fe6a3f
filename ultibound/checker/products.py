"""Rule product: Jacobians that grow in every norm when they follow one another (proofs/several.md (7))."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from functools import reduce
from itertools import pairwise
from math import ceil, floor
from typing import Any

from .derive import Derivation, Domain
from .jacobians import Table, middle_and_half, sloped
from .matrices import added, flat, magnitudes, times
from .numerals import Rejected
from .ranges import Box, Ends
from .theorems import Line, Quantities, parted
from .vertices import Whole

MOST_POINTS, MOST_POWER = 16, 4096
BITS = 512  # kept of the largest entry of a product
LONGEST = 4_000_000  # bits of a power of what is claimed


@dataclass(frozen=True)
class Rough:
    """All matrices M with |2^shift M − centre| <= half, entry by entry."""

    centre: Whole
    half: Whole
    shift: int


def product(d: Derivation, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities) -> Line:
    """A product of m Jacobians, its p-th power M: n c^(m p) <= |tr M| for any gain c. `on_set`: not all at a target."""
    used, flows = parted(used)
    if not sloped(proves) or "@" in proves or len(used) != 1 or used[0].domain is None:
        raise Rejected("a product of slopes rests on the one line that gives the set")
    if d.statement.horizon != 1:
        raise Rejected("products are known for single steps only")
    domain, points, power = used[0].domain, witness["points"], witness["power"]
    if not isinstance(points, list) or not 0 < len(points) <= MOST_POINTS:
        raise Rejected(f"points: a list of 1 to {MOST_POINTS}")
    if type(power) is not int or not 0 < power <= MOST_POWER:
        raise Rejected(f"power: 1 to {MOST_POWER}")
    table = Table(d, proves, domain, witness["bits"], flows)
    places = [table.place(at) for at in points]
    for one, next_ in pairwise([*places, places[0]]):
        follow(d, table, one, next_)
    trace = traced([table.at(at) for at in points], power)
    if not shown(trace, claimed["lower"], len(points) * power, len(d.states)):
        raise Rejected("lower: the trace is not shown to be so large")
    away = not all(at_target(d, domain, table, x) for x in places)
    return Line("product", proves, (), claimed, domain, away)


def traced(jacobians: list[list[list[Ends]]], power: int) -> Fraction:
    """Lower bound of |tr M^power|, M the product of the Jacobians, the first step first."""
    steps = [rough(rows) for rows in jacobians]
    return least_trace(raised(reduce(lambda before, step: multiplied(step, before), steps), power))


def follow(d: Derivation, table: Table, one: Box, next_: Box) -> None:
    """Held quantities keep their values from one step to the next, or move by no more than they may."""
    for v, x, y in zip(table.variables, one, next_, strict=True):
        quantity = d.statement.uncertain.get(v.name)
        if quantity is None or not quantity.held:
            continue
        moved = Fraction(0) if x == y else max(x[1] - y[0], y[1] - x[0])
        if not moved <= (Fraction(0) if quantity.change is None else d.change(v.name)[0]):
            raise Rejected(f"points: {v.name} is held, and moves too far")


def at_target(d: Derivation, domain: Domain, table: Table, place: Box) -> bool:
    """Whether every state that the Jacobian depends on is surely at its target: then every ball has the point."""
    targets = dict(zip(d.states, domain.targets, strict=False))
    nothing = Fraction(0), Fraction(0)
    for v, x in zip(table.variables, place, strict=True):
        if v.name.startswith("error(") and x != nothing:
            return False
        if v.name in d.states and not (x[0] == x[1] and targets.get(v.name) == x):
            return False
    return True


def rough(rows: list[list[Ends]]) -> Rough:
    """An interval matrix over a power of two."""
    middle, half = middle_and_half(rows)
    most = max(abs(x) for row in (*middle, *half) for x in row)
    shift = BITS - most.numerator.bit_length() + most.denominator.bit_length()
    unit = Fraction(2) ** shift
    centre = [[floor(x * unit) for x in row] for row in middle]
    wide = [
        [ceil(h * unit) + (c < x * unit) for h, c, x in zip(*each, strict=True)]
        for each in zip(half, centre, middle, strict=True)
    ]
    return Rough(centre, wide, shift)


def multiplied(a: Rough, b: Rough) -> Rough:
    """A B: |A B − C D| <= |C| k + h |D| + h k where |A − C| <= h, |B − D| <= k."""
    half = times(magnitudes(a.centre), b.half)
    for part in (times(a.half, magnitudes(b.centre)), times(a.half, b.half)):
        half = added(half, part)
    centre, shift = times(a.centre, b.centre), a.shift + b.shift
    spare = max(max(map(abs, (*flat(centre), *flat(half)))).bit_length() - BITS, 0)
    # x = 2^spare (x >> spare) + r with 0 <= r < 2^spare: the half width rounded up, and one more unless r is 0
    shorter = [
        [-(-h >> spare) + (x & ~(-1 << spare) > 0) for h, x in zip(row, other, strict=True)]
        for row, other in zip(half, centre, strict=True)
    ]
    return Rough([[x >> spare for x in row] for row in centre], shorter, shift - spare)


def raised(a: Rough, power: int) -> Rough:
    """A^power by squaring."""
    found = a
    for bit in bin(power)[3:]:
        found = multiplied(found, found)
        if bit == "1":
            found = multiplied(found, a)
    return found


def least_trace(a: Rough) -> Fraction:
    """Lower bound of |tr A|."""
    middle, half = (sum(row[i] for i, row in enumerate(m)) for m in (a.centre, a.half))
    return max(abs(middle) - half, 0) / Fraction(2) ** a.shift


def shown(trace: Fraction, lower: Fraction, steps: int, states: int) -> bool:
    """Whether states · lower^steps <= trace, lower >= 0: proofs/several.md (7)."""
    if not lower >= 0 or max(lower.numerator, lower.denominator).bit_length() * steps > LONGEST:
        raise Rejected(f"lower: not below 0, and of at most {LONGEST // steps} bits")
    return states * lower**steps <= trace
