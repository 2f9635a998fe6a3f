"""Claims and certificates as a notebook shows them; of a certificate only what the checker accepts."""

from __future__ import annotations

from ..certificate.certificate import Certificate
from ..claim import Claim
from ..claim.model import Stance
from .accepted import NotAccepted, accepted_here
from .document import Block, Caution, Document, Section, Table, Text, said
from .formula import equation, fraction, minus, number, symbol, written
from .html import fragment
from .inert import tex
from .margins import judged, upper
from .quantities import quantities
from .reporting import summary, title_of, verdicts
from .standards import MODEL
from .statement import stated
from .theorem import figure
from .typeset import latex


def claim_html(claim: Claim) -> str:
    """The claim as mathematics."""
    return fragment(Document(title_of(claim), (), tuple(stated(claim))))


def claim_latex(claim: Claim) -> str:
    """The map and its target, a line each."""
    lines = [line for stance in claim.stances for line in _lines(stance)]
    return _aligned(lines)


def _lines(stance: Stance) -> list[str]:
    pairs = [(symbol(s, "+"), e) for s, e in stance.next.items()]
    pairs += [(symbol(n), e) for n, e in stance.define.items()]
    pairs += [(symbol(s, "*"), e) for s, e in stance.target.items()]
    return [f"{latex(name)} &= {latex(written(e))}" for name, e in pairs]


def certificate_html(certificate: Certificate) -> str:
    """Verdicts and quantities, once the checker has accepted them; what it refuses, and nothing else, otherwise."""
    try:
        found = accepted_here(certificate)
    except NotAccepted as why:
        return fragment(Document("Nothing is proved", (said(str(why)),), ()))
    head: tuple[Text, ...] = (("quantity",), ("proved",), ("surely reached",), ("given away",), ("unit",))
    rows = tuple((q.name, q.proved, q.reached, (q.gap,), (q.unit,)) for q in quantities(found))
    blocks: tuple[Block, ...] = (
        verdicts(judged(found.claim, found.results), bool(found.claim.stances[0].name)),
        Table(("Quantities",), head, rows, "llrll"),
        Caution((MODEL,)),
    )
    lead = (said(summary(found.results)),)
    return fragment(Document(title_of(found.claim), lead, (Section("outcome", "", blocks),)))


def certificate_latex(certificate: Certificate) -> str:
    """k, ε and the bound of the reported route, once the checker has accepted them."""
    try:
        found = accepted_here(certificate)
    except NotAccepted as why:
        return rf"\text{{Nothing is proved: {tex(str(why))}}}"
    results = found.results
    k, rest = symbol("k"), symbol("epsilon")
    lines = []
    for name, left in (("gain", k), ("residual", rest), ("bound", fraction(rest, minus(number(1), k)))):
        value = upper((results["routes"].get(results["route"]) or results)[name])
        if value is not None:
            lines.append(f"{latex(left)} &\\le {latex(equation(figure(value)))}")
    return _aligned(lines or [r"\text{No gain and residual are proved}"])


def _aligned(lines: list[str]) -> str:
    body = " \\\\\n".join(lines)
    return f"$\\displaystyle\\begin{{aligned}}\n{body}\n\\end{{aligned}}$"
