"""Requirements: one comparison between a quantity and a constant, or a quantity alone."""

from __future__ import annotations

from dataclasses import replace

from .constants import check_constant_parts
from .errors import Bad, Unknown
from .expression import QUANTITIES, Expression, Parser
from .model import Requirement

BELOW, ABOVE = ("<", "<="), (">", ">=")
RELATIONS = {
    **dict.fromkeys(("gain", "residual", "bound", "sharp_bound", "steps"), BELOW),
    **dict.fromkeys(("radius", "push"), ABOVE),
    **dict.fromkeys(("sensitivity", "value"), BELOW + ABOVE),
}


def parse_requirement(parser: Parser) -> Requirement:
    """The requirement a parser's text states. Raises Bad."""
    kind = parser.take()
    if kind not in QUANTITIES:
        raise Unknown(f"{kind[:60]!r} is not a quantity", kind, QUANTITIES)
    r = Requirement(parser.text, kind)
    if kind == "settles":
        parser.end()
        return r
    if kind in ("always", "throughout"):
        parser.expect("(")
        left = _part(parser)
        relation = _relation(parser, BELOW + ABOVE, kind)
        r = replace(r, left=left, relation=relation, right=_part(parser))
        parser.expect(")")
        parser.end()
        return r
    r = _arguments(parser, r)
    if kind in ("sensitivity", "value") and not parser.next_token():
        return r
    relation = _relation(parser, RELATIONS[kind], kind)
    r = replace(r, relation=relation, constant=_part(parser))
    parser.end()
    return r


def _arguments(parser: Parser, r: Requirement) -> Requirement:
    kind = r.kind
    if parser.next_token() != "(":
        if kind in ("push", "steps", "sensitivity", "value"):
            raise Bad(f"{kind} needs its arguments in parentheses")
        return r
    if kind in ("gain", "residual"):
        raise Bad(f"{kind} takes no argument; it is of the whole state, in the metric's norm")
    parser.expect("(")
    r = replace(r, expression=_part(parser)) if kind == "value" else replace(r, state=parser.word())
    if kind == "sensitivity":
        parser.expect(",")
        r = replace(r, by=parser.word())
    elif kind == "push" and parser.next_token() == ",":
        parser.expect(",")
        parser.expect("during")
        r = replace(r, during=True)
    elif kind == "steps":
        parser.expect(",")
        r = replace(r, start=_part(parser))
        parser.expect(",")
        r = replace(r, end=_part(parser))
    parser.expect(")")
    return r


def _part(parser: Parser) -> Expression:
    e = parser.expression()
    check_constant_parts(e)
    return e


def _relation(parser: Parser, allowed: tuple[str, ...], kind: str) -> str:
    relation = parser.take()
    if relation not in BELOW + ABOVE:
        raise Bad(f"{relation[:20]!r} found where a comparison is expected: {' '.join(allowed)}")
    if relation not in allowed:
        raise Bad(f"{kind} {relation} … does not grow stronger as the constant tightens; use {' or '.join(allowed)}")
    return relation
