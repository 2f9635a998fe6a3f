"""TOML text made safe before it is parsed, and tables looked at key by key."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterable
from typing import Any

from .grammar import DEEPEST, Refused, nearest
from .numerals import spelling

LARGEST = 2**20
PIECE = re.compile(
    r'"""(?:[^"\\]|\\.|"(?!""))*"{3,5}|\'\'\'(?:[^\']|\'(?!\'\'))*\'{3,5}|(?P<open>"""|\'\'\')'
    r'|"(?:[^"\\\n]|\\.)*"|\'[^\'\n]*\'|\#[^\n]*|[\[\]{}]'
    r"|[^\s\"'\#\[\]{}=,]+|.",
    re.DOTALL,
)


class Number(str):
    """A TOML number as it is spelled."""


def loaded(text: str) -> dict[str, Any]:
    """TOML after a look at its tokens: size, control characters, nesting, number spellings."""
    if len(text) > LARGEST or len(text.encode("utf-8", "surrogatepass")) > LARGEST:
        raise Refused(f"a claim of more than {LARGEST} bytes")
    if re.search(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f\ufeff\ud800-\udfff]", text[:1] + text[1:].replace("\ufeff", "")):
        raise Refused("a control character, byte order mark or surrogate")
    depth = dots = 0
    for match in PIECE.finditer(text):
        piece = match[0]
        if match["open"] or piece in ('"', "'"):  # looked for once: a second unclosed text is never met
            line = text.count("\n", 0, match.start()) + 1
            raise Refused(f"TOML: line {line}: a text in quotation marks is not closed")
        if piece[0] not in "\"'#":  # dotted keys nest too
            dots = 0 if piece in "=,[]{}\n" else dots + piece.count(".")
            if dots > DEEPEST:
                raise Refused(f"nested more than {DEEPEST} deep")
        if piece in "[{":
            depth += 1
            if depth > DEEPEST:
                raise Refused(f"nested more than {DEEPEST} deep")
        elif piece in "]}":
            depth -= 1
        elif piece[0] in "+-0123456789":
            well_spelled(piece)
    try:
        return tomllib.loads(text, parse_float=Number)
    except RecursionError:
        raise Refused(f"nested more than {DEEPEST} deep") from None
    except (tomllib.TOMLDecodeError, ValueError) as why:
        raise Refused(f"TOML: {why}") from None


def well_spelled(piece: str) -> str:
    """Refuses what the claim format does not spell like that: also the inf and nan that TOML takes for numbers."""
    try:
        found = spelling(piece)
    except ValueError as why:
        raise Refused(str(why)) from None
    if found is None:
        raise Refused(f"{piece[:40]!r} is no number of the claim format")
    return piece


def table(value: Any, place: str, allowed: Iterable[str] | None = None) -> dict[str, Any]:
    if not isinstance(value, dict):
        raise Refused(f"{place}: a table is expected")
    for key in value:
        if allowed is not None and key not in allowed:
            raise Refused(f"{place}: unknown key {key[:60]!r}{nearest(key, allowed)}")
    return value


def text_of(value: Any, place: str) -> str:
    if not isinstance(value, str) or isinstance(value, Number):
        raise Refused(f"{place}: text is expected")
    return value


def flag(value: Any, place: str) -> bool:
    if not isinstance(value, bool):
        raise Refused(f"{place}: true or false is expected")
    return value
