"""The quantities of a certificate with their units: what is proved, what is surely reached, what is given away."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from .accepted import Accepted
from .document import Text
from .formula import Formula, equation, op, row, symbol
from .margins import exact, lower, rounded, upper

LEAST = Fraction(1, 1000)  # per cent that is worth telling
Value = dict[str, str | None] | None


@dataclass(frozen=True, slots=True)
class Quantity:
    """One row of the table; `gap` is how much of the proved figure may be given away, in words."""

    name: Text
    proved: Text
    reached: Text
    gap: str
    unit: str


def quantities(found: Accepted) -> list[Quantity]:
    """Gain, residual and bound of the reported route, then what is proved of each state."""
    results, claim = found.results, found.claim
    states = claim.stances[0].states
    several = len(states) > 1
    unit = "" if several else next(iter(states.values())).unit
    norm = " in the norm" if several else ""
    steps = f" of {claim.horizon} steps" if claim.horizon > 1 else ""
    rows = [
        _row(("gain ", symbol("k"), f"{steps}{norm}"), results["gain"], "1"),
        _row(("residual ", symbol("epsilon"), f"{steps}{norm} ({results['route']})"), results["residual"], unit),
        _row((f"ultimate bound{norm} ({results['route']})",), results["bound"], unit),
        _row((f"radius of the set{norm}",), results["radius"], unit, True),
    ]
    for s in states:
        figures, of = results["states"][s], states[s].unit
        bound = "ultimate bound of " if several else "ultimate bound, best argument, of "
        rows += [
            _row((bound, symbol(s)), figures["bound"], of),
            *([_row(("radius along ", symbol(s)), figures["radius"], of, True)] if several else []),
            _row(("largest push of ", symbol(s)), figures["push"], of, True),
        ]
    for b in results["sensitivities"]:
        name = row(op("∂"), symbol(b["of"], "+"), op("/"), op("∂"), symbol(b["by"]))
        ends: Text = ("from ", _number(lower(b) or ""), " to ", _number(upper(b) or ""))
        rows.append(Quantity(("sensitivity ", name), ends, ("–",), "–", ""))
    return rows


def _row(name: Text, value: Value, unit: str, large: bool = False) -> Quantity:
    """`large`: better when large, so proved from below."""
    end = lower(value) if large else upper(value)
    other = upper(value) if large else lower(value)
    if end is None:
        return Quantity(name, ("not proved",), ("–",) if other is None else _side(other, large), "", unit)
    sign = "≥" if large else "≤"
    shown: Text = (equation(op(sign), _number(end)),)
    return Quantity(name, shown, ("–",) if other is None else _side(other, large), gap(value, large), unit)


def _side(text: str, large: bool) -> Text:
    return ("not above ", _number(text)) if large else (_number(text),)


def _number(text: str) -> Formula:
    if text.startswith("−"):
        return Formula("negative", (Formula("number", text=text[1:]),))
    return Formula("number", text=text)


def gap(value: Any, large: bool = False) -> str:
    """How much worse the proved end may be than what is surely reached, as a share of the latter."""
    if value is None or value["lower"] is None or value["upper"] is None:
        return "unknown"
    low, high = exact(value["lower"]), exact(value["upper"])
    at = abs(high if large else low)
    if low >= high:
        return "nothing"
    share = 100 * (high - low) / at if at else None
    if share is None:
        return "unknown"
    return f"up to {rounded(share, True, 2)} %" if share > LEAST else f"less than {rounded(LEAST, True)} %"
