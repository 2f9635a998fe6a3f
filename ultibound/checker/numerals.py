"""Numbers as text: the spelling of claims, the spelling of certificates, and decimals rounded one way."""

from __future__ import annotations

import re
from fractions import Fraction

CLAIM_DIGITS = 4000
CERTIFICATE_DIGITS = 50_000
SPELLING = re.compile(r"(-?)(0|[1-9][0-9]*)(?:\.([0-9]+))?(?:e(-?[0-9]{1,4}))?", re.ASCII)
RATIONAL = re.compile(r"(-?)([1-9][0-9]*)(?:/([1-9][0-9]*))?", re.ASCII)
CHUNK = 600  # below any limit Python may be told to set


def whole(digits: str) -> int:
    """A whole number of any length, in pieces that Python converts at once."""
    total = 0
    for k in range(0, len(digits), CHUNK):
        part = digits[k : k + CHUNK]
        total = total * 10 ** len(part) + int(part)
    return total


def text_of(n: int) -> str:
    """Digits of a whole number of any length."""
    if n < 0:
        return "-" + text_of(-n)
    parts: list[str] = []
    while n >= 10**CHUNK:
        n, rest = divmod(n, 10**CHUNK)
        parts.append(str(rest).rjust(CHUNK, "0"))
    return str(n) + "".join(reversed(parts))


def spelling(text: str, limit: int = CLAIM_DIGITS) -> re.Match[str] | None:
    """Sign, units, decimals, exponent; None outside the grammar. Raises ValueError beyond the limit of digits."""
    found = SPELLING.fullmatch(text)
    if found is not None and len(found[2]) + len(found[3] or "") > limit:
        raise ValueError(f"a number of more than {limit} digits")
    return found


def spelled(text: str, limit: int = CLAIM_DIGITS) -> Fraction | None:
    """The number a claim spells, exactly; None outside the grammar. Raises ValueError beyond the limit of digits."""
    found = spelling(text, limit)
    if found is None:
        return None
    sign, units, decimals, exponent = found.groups()
    decimals = decimals or ""
    n = whole(units + decimals) * (-1 if sign else 1)
    power = int(exponent or "0") - len(decimals)
    return Fraction(n * 10**power) if power >= 0 else Fraction(n, 10**-power)


def read_number(text: str) -> Fraction:
    """A certificate's number: a rational in lowest terms or a decimal. Raises ValueError."""
    if sum(map(str.isdigit, text)) > CERTIFICATE_DIGITS:
        raise ValueError(f"a number of more than {CERTIFICATE_DIGITS} digits")
    if text == "0":
        return Fraction(0)
    found = RATIONAL.fullmatch(text)
    if found is not None:
        top, low = whole(found[2]), whole(found[3]) if found[3] else 1
        q = Fraction(-top if found[1] else top, low)
        if q.denominator != low or found[3] == "1":
            raise ValueError(f"{text[:40]!r} is not in lowest terms")
        return q
    value = spelled(text, CERTIFICATE_DIGITS)
    if value is None:
        raise ValueError(f"{text[:40]!r} is not a number of the certificate format")
    return value


def decimal_down(q: Fraction, digits: int) -> str:
    """The largest decimal of so many significant digits that is not above q. Raises ValueError beyond 50,000 digits."""
    if q == 0:
        return "0"
    top, low = abs(q.numerator), q.denominator
    power = (top.bit_length() - low.bit_length()) * 30103 // 100000 - digits  # near log10, off by at most 2
    while True:
        scaled = (top * 10**-power, low) if power < 0 else (top, low * 10**power)
        n = scaled[0] // scaled[1]
        if n < 10**digits:
            break
        power += 1
    if q < 0 and n * scaled[1] < scaled[0]:
        n += 1
    return placed(n if q > 0 else -n, power)


def decimal_up(q: Fraction, digits: int) -> str:
    """The least decimal of so many significant digits that is not below q. Raises ValueError beyond 50,000 digits."""
    text = decimal_down(-q, digits)
    return text[1:] if text.startswith("-") else text if text == "0" else f"-{text}"


def placed(n: int, power: int) -> str:
    """n * 10**power as a decimal of the certificate format; written out where four digits of exponent do not do."""
    if n == 0:
        return "0"
    sign, digits = ("-" if n < 0 else ""), text_of(abs(n))
    stripped = digits.rstrip("0")
    power += len(digits) - len(stripped)
    digits = stripped
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
