"""What the route sector rests on: how the map follows its correction, and that the state (proofs/sector.md)."""

from __future__ import annotations

import re
from fractions import Fraction
from typing import TYPE_CHECKING

from .calculus import Unprovable
from .model import Statement
from .motion import TIME

if TYPE_CHECKING:
    from .derive import Derivation, Domain, Meaning

RANGES = ("sensitivity", "gain", "start", "residual")


def applies(statement: Statement) -> bool:
    """Whether a claim of one stance has the route: one state, one step, one correction."""
    return len(statement.stances[0].states) == 1 and statement.horizon == 1 and len(statement.correction) == 1


def of_sector(d: Derivation, name: str, domain: Domain | None) -> Meaning | None:
    """sector-sensitivity[s], -gain[s], -start[s], -residual[s], -factor[s,h]; None of another. Raises Unprovable."""
    found = re.fullmatch(rf"sector-({'|'.join(RANGES)}|factor)\[([^,]+)(?:,([^,]+))?\]", name)
    if not found or found[2] != d.state or not applies(d.statement) or (found[1] == "factor") != (found[3] is not None):
        return None
    (by,), put, s = d.statement.correction, d.terms.put, d.state
    none, moves = put("number", (), Fraction(0)), d.motion.states if d.motion is not None else ()
    if set(d.terms.variables(d.names().of(by))) & {TIME, *moves}:
        raise Unprovable(f"{by}: a correction that follows the stance is not known as a factor of the error")
    if found[1] == "start":
        at = d.names({s: d.names().of(f"target({s})")}).of(by)
        return d.over(d.terms.difference(at, none))
    if domain is None:
        raise Unprovable(f"{name} needs a line that gives its set")
    bound, given = d.through(domain, {})
    if found[1] == "factor":
        factor = d.terms.factor(d.names(bound, s).of(by), found[3])
        if factor is None:
            raise Unprovable(f"{by}: {found[3]} is no factor of it")
        return d.over(factor, s, given, True)
    if found[1] == "gain":
        return d.over(d.names(bound, s).of(by), s, given, True)
    if found[1] == "residual":
        nominal = d.names({**bound, by: none}).of(f"next({s})")
        return d.over(d.terms.difference(nominal, d.names(bound).of(s)), "", given, True)
    share = f"share({by})"  # of the correction, from none of it to all: proofs/sector.md (1)
    part = put("mul", (put("variable", (), share), d.names(bound).of(by)))
    root = d.names({**bound, by: part}, by).of(f"next({s})")
    if d.stirred(root, by):
        raise Unprovable(f"{by}: a signal's effect within the stance follows it, and may take any course")
    return d.over(root, by, {share: ((Fraction(0), Fraction(1)),) * 2, **given}, True)
