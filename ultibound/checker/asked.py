"""Requirements: a quantity compared with a constant, or alone."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from .grammar import NAME, Ends, Expression, Parser, Refused, checked
from .model import Requirement

LOWER, UPPER = ("<", "<="), (">", ">=")
KINDS: dict[str, tuple[str, ...]] = {
    **dict.fromkeys(("gain", "residual", "bound", "sharp_bound", "steps"), LOWER),
    **dict.fromkeys(("radius", "push"), UPPER),
    **dict.fromkeys(("sensitivity", "value"), LOWER + UPPER),
}


def asked(text: str, values: Mapping[str, Ends]) -> Requirement:
    """A requirement's comparison, or a quantity alone."""
    p = Parser(text, values, steps=True)
    kind = p.take()
    r = Requirement(text, kind)
    if kind == "settles":
        p.ended()
        return r
    if kind in ("always", "throughout"):
        p.take("(")
        left = side(p)
        relation = compared(p)
        r = replace(r, left=left, relation=relation, right=side(p))
        p.take(")")
        p.ended()
        return r
    if kind not in KINDS:
        raise Refused(f"{kind[:60]!r} is no quantity")
    if kind == "value":
        p.take("(")
        r = replace(r, expression=side(p))
        p.take(")")
    elif p.peek() == "(" and kind not in ("gain", "residual"):
        p.take("(")
        r = replace(r, state=word(p))
        if kind == "sensitivity":
            p.take(",")
            r = replace(r, by=word(p))
        elif kind == "push" and p.peek() == ",":
            p.take(",")
            p.take("during")
            r = replace(r, during=True)
        elif kind == "steps":
            p.take(",")
            r = replace(r, start=side(p))
            p.take(",")
            r = replace(r, end=side(p))
        p.take(")")
    elif kind in ("push", "steps", "sensitivity"):
        raise Refused(f"{kind} needs its state in parentheses")
    if not p.peek() and kind in ("sensitivity", "value"):
        return r
    relation = compared(p)
    if relation not in KINDS[kind]:
        raise Refused(f"{kind} {relation}: this does not grow stronger as the constant tightens")
    r = replace(r, relation=relation, constant=side(p))
    p.ended()
    return r


def side(p: Parser) -> Expression:
    p.nodes = []
    p.sum()
    checked(p.nodes, p.values)
    return p.whole()


def word(p: Parser) -> str:
    name = p.take()
    if not NAME.fullmatch(name):
        raise Refused(f"{name[:60]!r}: a name is expected")
    return name


def compared(p: Parser) -> str:
    relation = p.take()
    if relation not in LOWER + UPPER:
        raise Refused(f"{relation[:20]!r}: a comparison is expected")
    return relation
