"""TOML and CSV texts, made safe before they are parsed, and tables looked at key by key."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Container, Iterable
from fractions import Fraction
from itertools import product
from math import prod
from typing import Any, TypeVar

from .grammar import DEEPEST, NAME, RESERVED, Expression, Refused, Work, at, number
from .model import Library
from .numerals import Number, spelling

LARGEST, LARGEST_FILE, MOST_ROWS = 2**20, 64 * 2**20, 1_000_000
CONTROL_IN_ROWS = re.compile(r"[\x00-\x09\x0b-\x1f]|\A\ufeff")
CONTROL = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f\ud800-\udfff]|\A\ufeff")
PIECE = re.compile(
    r'"""(?:[^"\\]|\\.|"(?!""))*"{3,5}|\'\'\'(?:[^\']|\'(?!\'\'))*\'{3,5}|(?P<open>"""|\'\'\')'
    r'|"(?:[^"\\\n]|\\.)*"|\'[^\'\n]*\'|\#[^\n]*|[\[\]{}]'
    r"|[^\s\"'\#\[\]{}=,]+|.",
    re.DOTALL,
)
T = TypeVar("T")


def bounded(text: str, most: int) -> None:
    if len(text) > most or len(text.encode("utf-8", "surrogatepass")) > most:
        raise Refused(f"more than {most} bytes")


def loaded(text: str) -> dict[str, Any]:
    """TOML after a look at its tokens: size, control characters, nesting, number spellings."""
    bounded(text, LARGEST)
    if CONTROL.search(text):
        raise Refused("a control character, byte order mark or surrogate")
    depth = dots = 0
    for match in PIECE.finditer(text):
        piece = match[0]
        if match["open"] or piece in ('"', "'"):  # looked for once: a second unclosed text is never met
            line = text.count("\n", 0, match.start()) + 1
            raise Refused(f"TOML: line {line}: a text in quotation marks is not closed")
        if piece[0] not in "\"'#":  # dotted keys nest too
            dots = 0 if piece in "=,[]{}\n" else dots + piece.count(".")
        depth += (piece in "[{") - (piece in "]}")
        if max(depth, dots) > DEEPEST:
            raise Refused(f"nested more than {DEEPEST} deep")
        if piece[0] in "+-0123456789" and spelling(piece) is None:  # before anything is converted
            raise Refused(f"{piece[:40]!r} is no number of the claim format")
    try:
        return tomllib.loads(text, parse_float=Number)
    except RecursionError:
        raise Refused(f"nested more than {DEEPEST} deep") from None
    except (tomllib.TOMLDecodeError, ValueError) as why:
        raise Refused(f"TOML: {why}") from None


def table(value: Any, place: str, allowed: Iterable[str] | None = None) -> dict[str, Any]:
    if not isinstance(value, dict):
        raise Refused(f"{place}: a table is expected")
    for key in value:
        if allowed is not None and key not in allowed:
            raise Refused(f"{place}: unknown key {key[:60]!r}")
    return value


def listed(value: Any, place: str, least: int, most: int) -> list[Any]:
    if not isinstance(value, list) or not least <= len(value) <= most:
        raise Refused(f"{place}: a list of {least} to {most} is expected")
    return value


def chosen(value: Any, place: str, among: Container[str], least: int) -> tuple[str, ...]:
    """A list of different texts, each one of those."""
    found = listed(value, place, least, LARGEST)
    if any(type(v) is not str or v not in among for v in found) or len(set(found)) < len(found):
        raise Refused(f"{place}: {found!r:.60}: other names are expected, or each once")
    return tuple(found)


def given(raw: dict[str, Any], key: str, default: T, place: str = "", among: Container[Any] | None = None) -> T:
    """A key's value, of the type its default has, and one of those if any are said."""
    value = raw.get(key, default)
    if type(value) is not type(default) or (among is not None and value not in among):
        raise Refused(f"{place}{key}: {value!r:.60} cannot stand here")
    return value


def read_library(file: str, text: str, axes: dict[str, Expression], work: Work) -> Library:
    """The grid and the columns, nodes in ascending order, the last axis fastest. Raises Refused."""
    with at(file):
        bounded(text, LARGEST_FILE)
        text = text.replace("\r\n", "\n").removesuffix("\n")
        if CONTROL_IN_ROWS.search(text):
            raise Refused("a byte order mark or control character, or rows that end in one")
        if text.count("\n") > MOST_ROWS:
            raise Refused(f"at most {MOST_ROWS} rows")
        first, *lines = text.split("\n")
        header = first.split(",")
        if not all(NAME.fullmatch(n) and n not in RESERVED for n in header) or len(set(header)) < len(header):
            raise Refused("row 1: no name of a column, or one twice")
        if not set(axes) <= set(header) or len(header) == len(axes):
            raise Refused(f"row 1: the axes {', '.join(axes)} and at least one other column are needed")
        places = [header.index(a) for a in axes]
        rows: dict[tuple[Fraction, ...], list[Fraction]] = {}
        for rank, line in enumerate(lines, 2):
            row = numbers(header, line.split(","), f"row {rank}", work)
            key = tuple(row[p] for p in places)
            if key in rows:
                raise Refused(f"row {rank}: this node stands twice")
            rows[key] = row
        grid = tuple(tuple(sorted({key[k] for key in rows})) for k in range(len(axes)))
        if any(len(axis) < 2 for axis in grid) or prod(map(len, grid)) != len(rows):
            raise Refused(f"{len(rows)} rows do not fill a grid of at least two nodes an axis")
        nodes = [rows[key] for key in product(*grid)]
        columns = {c: tuple(row[k] for row in nodes) for k, c in enumerate(header) if c not in axes}
        return Library(file, tuple(axes), tuple(axes.values()), grid, columns)


def numbers(header: list[str], cells: list[str], place: str, work: Work) -> list[Fraction]:
    if len(cells) != len(header):
        raise Refused(f"{place}: {len(cells)} cells, {len(header)} columns")
    row = []
    for name, cell in zip(header, cells, strict=True):
        try:
            q = number(cell)
        except Refused as why:
            raise Refused(f"{place}, {name}: {why}") from None
        work.spend((q, q))
        row.append(q)
    return row
