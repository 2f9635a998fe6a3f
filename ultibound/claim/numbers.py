"""Numbers as a claim spells them: exact decimals, their spelling looked at before they are converted."""

from __future__ import annotations

import re
from fractions import Fraction

from .errors import Bad

MAX_DIGITS = 4_000
_SPELLING = r"(?:0|[1-9][0-9]*)(?:\.[0-9]+)?(?:e-?[0-9]{1,4})?"
NUMBER = re.compile(r"(?P<units>0|[1-9][0-9]*)(?:\.(?P<decimals>[0-9]+))?(?:e(?P<exponent>-?[0-9]{1,4}))?\Z")
ROW = re.compile(rf"-?{_SPELLING}(?:,-?{_SPELLING})*\Z")


class Spelled(str):
    """A number with a point or exponent, as the file spells it."""


def spelled(text: str) -> tuple[str, str, str]:
    """Digits before and after the point and the exponent of a number; raises Bad with the rule it breaks."""
    body = text.removeprefix("-")
    if len(body) > MAX_DIGITS + 10:
        raise Bad(f"a number of more than {MAX_DIGITS} digits; shorten it")
    found = NUMBER.match(body)
    if found is None:
        raise Bad(f"{text[:40]!r} is not a number here; write it like 0, -7, 3.25 or 1e-3")
    units, decimals, exponent = found.groups()
    if len(units) + len(decimals or "") > MAX_DIGITS:
        raise Bad(f"a number of more than {MAX_DIGITS} digits; shorten it")
    return units, decimals or "", exponent or "0"


def exact_number(text: str) -> Fraction:
    """The number a text spells, sign included; raises Bad with the rule it breaks."""
    units, decimals, exponent = spelled(text)
    shift = int(exponent) - len(decimals)
    top = int(units + decimals) * (-1 if text.startswith("-") else 1)
    return Fraction(top * 10**shift) if shift >= 0 else Fraction(top, 10**-shift)
