"""Verdicts for people: what is proved of each requirement, in which unit, and how much is to spare.

Every figure is rounded to the side on which it still holds.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from ..checker.numerals import decimal_down, decimal_up, read_number
from ..claim import Claim
from ..claim.constants import constant
from ..claim.model import Requirement

SIGNIFICANT = 6


@dataclass(frozen=True, slots=True)
class Judged:
    """A requirement and its outcome, as texts. `margin` is empty where nothing is to spare or nothing is proved."""

    number: int
    that: str
    stance: str
    verdict: str
    proved: str
    attained: str
    margin: str
    share: str
    remark: str


def exact(x: Fraction | str) -> Fraction:
    """A number of a certificate, of any length."""
    return read_number(x) if isinstance(x, str) else x


def rounded(x: Fraction | str, up: bool, digits: int = SIGNIFICANT) -> str:
    """A number to so many significant digits, rounded up or down; exact where it is that short."""
    return (decimal_up if up else decimal_down)(exact(x), digits)


def upper(value: dict[str, str | None] | None) -> str | None:
    """The proved upper end of a quantity, rounded up."""
    return None if value is None or value["upper"] is None else signed(rounded(value["upper"], True))


def lower(value: dict[str, str | None] | None) -> str | None:
    """The proved lower end of a quantity, rounded down."""
    return None if value is None or value["lower"] is None else signed(rounded(value["lower"], False))


def signed(text: str) -> str:
    """A number for people: with a minus sign, not a hyphen."""
    return text.replace("-", "−")


def with_unit(text: str, unit: str) -> str:
    return f"{text} {unit}".strip()


def judged(claim: Claim, results: dict[str, Any]) -> list[Judged]:
    """Every requirement with its outcome, in the order of the claim."""
    return [
        _one(claim, results, n, r, entry)
        for n, (r, entry) in enumerate(zip(claim.requirements, results["requirements"], strict=True), 1)
    ]


def unit_of(claim: Claim, r: Requirement) -> str:
    """SI unit as the claim states it; "" where there is none or it is not known."""
    states = next((s for s in claim.stances if s.name == r.stance), claim.stances[0]).states
    units = {n: q.unit for n, q in states.items()}
    alone = next(iter(units.values())) if len(units) == 1 else ""
    if r.kind == "sensitivity":
        known = states.get(r.by or "") or claim.uncertain.get(r.by or "")
        of = units.get(r.state or "", "")
        if known is None:
            return f"{of} per unit of {r.by}" if of else ""
        return f"({of})/({known.unit})" if of and known.unit else ""
    if r.kind in ("gain", "always", "throughout", "value"):
        return ""
    if r.kind == "steps":
        return "steps"
    return units.get(r.state or "", alone)


def _one(claim: Claim, results: dict[str, Any], number: int, r: Requirement, entry: dict[str, Any]) -> Judged:
    value, unit = entry["value"], unit_of(claim, r)
    above = r.kind in ("radius", "push") or r.relation in (">", ">=")
    both = r.kind in ("sensitivity", "value") and r.relation is None
    shown, other = _shown(value, above, both, unit, r)
    margin = _margin(claim, results, r, value, above) if entry["verdict"] == "proved" else None
    spare = share = ""
    if margin is not None and margin[0] > 0:
        spare = with_unit(rounded(margin[0], False, 3), unit)
        if margin[1]:
            share = f"{rounded(100 * margin[0] / abs(margin[1]), False, 2)} %"
    return Judged(
        number, r.text, r.stance or "", entry["verdict"], shown, other, spare, share, entry["limited_by"] or ""
    )


def _shown(value: Any, above: bool, both: bool, unit: str, r: Requirement) -> tuple[str, str]:
    """What is proved, and what is surely reached."""
    if value is None:
        return "nothing proved", ""
    low, high = lower(value), upper(value)
    if r.kind in ("sensitivity", "value", "always", "throughout"):
        what = "left − right " if r.kind in ("always", "throughout") else ""
        if both or (low is not None and high is not None and r.kind == "sensitivity"):
            return with_unit(f"from {low} to {high}", unit), ""
        end = low if above else high
        return f"{what}{'≥' if above else '≤'} {end}" if end is not None else "nothing proved", ""
    proved, reached = (low, high) if above else (high, low)
    said = with_unit(f"{'≥' if above else '≤'} {proved}", unit) if proved is not None else "nothing proved"
    return said, "" if reached is None else with_unit(reached, unit)


def _margin(
    claim: Claim, results: dict[str, Any], r: Requirement, value: Any, above: bool
) -> tuple[Fraction, Fraction] | None:
    """What is to spare, and what it is a share of."""
    if value is None:
        return None
    if r.kind == "settles":
        radius = results["radius"]
        if radius is None or radius["lower"] is None or value["upper"] is None:
            return None
        far = exact(radius["lower"])
        return far - exact(value["upper"]), far
    if r.kind in ("always", "throughout"):
        end = value["lower"] if above else value["upper"]
        return None if end is None else ((exact(end) if above else -exact(end)), Fraction(0))
    if r.constant is None:
        return None
    low, high = constant(r.constant, claim.values)
    if above:
        return None if value["lower"] is None else (exact(value["lower"]) - high, high)
    return None if value["upper"] is None else (low - exact(value["upper"]), low)
