"""Numbers as text: the spelling of claims, the spelling of certificates, and decimals rounded one way."""

from __future__ import annotations

import re
from decimal import Decimal
from fractions import Fraction
from typing import Any

CLAIM_DIGITS = 4000
CERTIFICATE_DIGITS = 50_000
SPELLING = re.compile(r"(-?)(0|[1-9][0-9]*)(?:\.([0-9]+))?(?:e(-?[0-9]{1,4}))?", re.ASCII)
RATIONAL = re.compile(r"(-?[1-9][0-9]*)(?:/([1-9][0-9]*))?", re.ASCII)


class Refused(ValueError):
    """A claim outside the format: the place, the rule and what was found, short and printable whatever was found."""

    def __str__(self) -> str:
        text = super().__str__()
        text = text if len(text) <= 400 else f"{text[:200]} … {text[-200:]}"
        return "".join(c if c.isprintable() else "\ufffd" for c in text)


class Rejected(Exception):
    """A line that does not hold, and why."""


class Number(str):
    """A number of a claim as it is spelled."""


def whole(digits: str) -> int:
    """A whole number of any length: Python may be told not to convert long ones itself."""
    return int(Decimal(digits))


def text_of(n: int) -> str:
    """Digits of a whole number of any length."""
    return str(Decimal(n))


def spelling(text: str, limit: int = CLAIM_DIGITS) -> re.Match[str] | None:
    """Sign, units, decimals, exponent; None outside the grammar. Raises Refused beyond the limit of digits."""
    found = SPELLING.fullmatch(text)
    if found is not None and len(found[2]) + len(found[3] or "") > limit:
        raise Refused(f"a number of more than {limit} digits")
    return found


def spelled(text: str, limit: int = CLAIM_DIGITS) -> Fraction | None:
    """The number a claim spells, exactly; None outside the grammar. Raises Refused beyond the limit of digits."""
    found = spelling(text, limit)
    if found is None:
        return None
    sign, units, decimals, exponent = found.groups("")
    n, power = whole(sign + units + decimals), int(exponent or "0") - len(decimals)
    return Fraction(n * 10**power) if power >= 0 else Fraction(n, 10**-power)


def read_number(text: str) -> Fraction:
    """A certificate's number: a rational in lowest terms or a decimal. Raises ValueError."""
    if sum(map(str.isdigit, text)) > CERTIFICATE_DIGITS:
        raise ValueError(f"a number of more than {CERTIFICATE_DIGITS} digits")
    if text == "0":
        return Fraction(0)
    found = RATIONAL.fullmatch(text)
    if found is not None:
        low = whole(found[2] or "1")
        q = Fraction(whole(found[1]), low)
        if q.denominator != low or found[2] == "1":
            raise ValueError(f"{text[:40]!r} is not in lowest terms")
        return q
    value = spelled(text, CERTIFICATE_DIGITS)
    if value is None:
        raise ValueError(f"{text[:40]!r} is not a number of the certificate format")
    return value


def decimal_down(q: Fraction, digits: int) -> str:
    """The largest decimal of so many significant digits that is not above q. Raises ValueError beyond 50,000 digits."""
    top, low, n = q.numerator, q.denominator, 10**digits
    power = (top.bit_length() - low.bit_length()) * 30103 // 100000 - digits - 1  # near log10, off by at most 2
    while abs(n) >= 10**digits:
        power += 1
        n = top * 10 ** max(0, -power) // (low * 10 ** max(0, power))
    return placed(n, power)


def decimal_up(q: Fraction, digits: int) -> str:
    """The least decimal of so many significant digits that is not below q. Raises ValueError beyond 50,000 digits."""
    text = decimal_down(-q, digits)
    return text if text == "0" else text[1:] if text.startswith("-") else f"-{text}"


def placed(n: int, power: int) -> str:
    """n * 10**power as a decimal of the certificate format; written out where four digits of exponent do not do."""
    if n == 0:
        return "0"
    sign, written = ("-" if n < 0 else ""), text_of(abs(n))
    digits = written.rstrip("0")
    power += len(written) - len(digits)
    point = len(digits) + power  # digits before the point
    far = not -9999 < point <= 9999
    if far and abs(power) + len(digits) > CERTIFICATE_DIGITS:
        raise ValueError(f"a number of more than {CERTIFICATE_DIGITS} digits")
    if power >= 0 and (power <= 6 or far):
        return sign + digits + "0" * power
    if power < 0 < point:
        return f"{sign}{digits[:point]}.{digits[point:]}"
    if power < 0 and point <= 0 and (point > -6 or far):
        return f"{sign}0.{'0' * -point}{digits}"
    tail = f".{digits[1:]}" if len(digits) > 1 else ""
    return f"{sign}{digits[0]}{tail}e{power + len(digits) - 1}"


def quantity(text: Any, place_: str) -> Fraction:
    if not isinstance(text, str):
        raise Rejected(f"{place_}: a proved number is written as text")
    try:
        return read_number(text)
    except ValueError as why:
        raise Rejected(f"{place_}: {why}") from None
