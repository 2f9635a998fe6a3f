"""TOML made safe: size, characters, nesting and number spellings are looked at before it is parsed."""

from __future__ import annotations

import re
import tomllib
from typing import Any

from .errors import Bad, Problem
from .expression import MAX_DEPTH
from .numbers import Spelled, spelled

MAX_BYTES = 2**20
_PIECES = re.compile(
    r'(?P<text>"""(?:[^"\\]|\\.|"(?!""))*"{3,5}|\'\'\'(?:[^\']|\'(?!\'\'))*\'{3,5}|"(?!"")(?:[^"\\\n]|\\.)*"|\'(?!\'\')[^\'\n]*\')'
    r"|(?P<open>\"\"\"|''')"  # a text without an end; looking for each one's anew would take long
    r"|(?P<comment>\#[^\n]*)|(?P<bracket>[\[\]{}])|(?P<word>[^\s\"'\#\[\]{}=,]+)|.",
    re.DOTALL,
)
_CONTROL = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f\ud800-\udfff]")


def read_toml(text: str) -> tuple[dict[str, Any], list[Problem]]:
    """The tables of a claim's text, or the problems that keep it from being parsed."""
    if len(text) > MAX_BYTES or len(text.encode("utf-8", "surrogatepass")) > MAX_BYTES:
        return {}, [Problem("", f"more than {MAX_BYTES} bytes; a claim is at most 1 MiB")]
    if not text.strip():
        return {}, [Problem("", "the file is empty; a claim starts with format = 1")]
    if text.startswith("\ufeff"):
        return {}, [Problem("byte 0", "a byte order mark; save the file as UTF-8 without one")]
    odd = _CONTROL.search(text)
    if odd:
        offset = len(text[: odd.start()].encode("utf-8", "surrogatepass"))
        return {}, [Problem(f"byte {offset}", f"control character or surrogate {odd[0]!r}; remove it")]
    problems = _spellings(text)
    if problems:
        return {}, problems
    try:
        return tomllib.loads(text, parse_float=Spelled), []
    except RecursionError:
        return {}, [Problem("", f"nested more than {MAX_DEPTH} deep")]
    except (tomllib.TOMLDecodeError, ValueError) as why:
        return {}, [_located(str(why), text)]


def _spellings(text: str) -> list[Problem]:
    """Numbers that TOML would take and a claim does not, and nesting."""
    depth, dots, line, seen, found = 0, 0, 1, 0, []
    for match in _PIECES.finditer(text):
        piece = match[0]
        if match.lastgroup == "open":
            return [Problem(f"line {_line(text, match.start())}", f"the text that starts with {piece} does not end")]
        if match.lastgroup == "word":
            dots += piece.count(".")
            if dots > MAX_DEPTH:  # the TOML reader takes time in the square of a dotted key's parts
                return [Problem(f"line {_line(text, match.start())}", f"a key of more than {MAX_DEPTH} parts")]
        elif piece in "\n=,[]{}":
            dots = 0
        if match.lastgroup == "bracket":
            depth += 1 if piece in "[{" else -1
            if depth > MAX_DEPTH:
                return [Problem(f"line {_line(text, match.start())}", f"nested more than {MAX_DEPTH} deep")]
        elif match.lastgroup == "word" and (
            piece[0] in "+-0123456789" or (piece in ("inf", "nan") and not _is_key(text, match.end()))
        ):
            try:
                spelled(piece)
            except Bad as why:
                line += text.count("\n", seen, match.start())
                seen = match.start()
                key = re.match(r"[ \t]*=", text[match.end() : match.end() + 20])
                found.append(Problem(f"line {line}", f"{piece[:40]!r} is not a name" if key else str(why)))
    return found


def _is_key(text: str, end: int) -> bool:
    return re.match(r"\s*[=.\]]", text[end : end + 20]) is not None


def _line(text: str, at: int) -> int:
    return text.count("\n", 0, at) + 1


def _located(why: str, text: str) -> Problem:
    """The TOML reader's message, with the line itself: a duplicate key is thereby named."""
    where = re.search(r"\(at line ([0-9]+), column [0-9]+\)", why)
    if where is None:
        return Problem("end of file", why)
    lines = text.split("\n")
    number = int(where[1])
    shown = lines[number - 1].strip()[:60] if number <= len(lines) else ""
    rule = (
        "a key or table stands twice"
        if "overwrite" in why or "twice" in why or "mutate" in why
        else why[: where.start()].strip()
    )
    return Problem(f"line {number}", f"{rule}: {shown}")
