"""Gait libraries: CSV text with a full rectangular grid of axis values."""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction
from itertools import product

from .grammar import NAME, RESERVED, Expression, Known, Refused
from .numerals import spelled

CONTROL = re.compile(r"[\x00-\x09\x0b\x0c\x0e-\x1f]")
MOST_ROWS = 1_000_000
LARGEST = 64 * 2**20


@dataclass(frozen=True)
class Library:
    file: str
    axes: tuple[str, ...]
    at: tuple[Expression, ...]
    grid: tuple[tuple[Fraction, ...], ...]
    columns: dict[str, tuple[Fraction, ...]]


def read_library(file: str, text: str, at: dict[str, Expression], values: Known) -> Library:
    """The grid and the columns, nodes in ascending order, the last axis fastest. Raises Refused."""
    if len(text) > LARGEST or len(text.encode("utf-8", "surrogatepass")) > LARGEST:
        raise Refused(f"{file}: larger than {LARGEST} bytes")
    if text.startswith("\ufeff") or CONTROL.search(text):
        raise Refused(f"{file}: a byte order mark or control character")
    lines = text.replace("\r\n", "\n").split("\n")
    if lines[-1] == "":
        lines.pop()
    if not lines or len(lines) > MOST_ROWS + 1 or "\r" in text.replace("\r\n", ""):
        raise Refused(f"{file}: a header and at most {MOST_ROWS} rows")
    header = lines[0].split(",")
    seen: set[str] = set()
    for name in header:
        if not NAME.fullmatch(name) or name in RESERVED or name in seen:
            raise Refused(f"{file}: row 1: {name[:40]!r} is no column name, or stands twice")
        seen.add(name)
    if not set(at) <= seen or len(header) == len(at):
        raise Refused(f"{file}: row 1: the axes {', '.join(at)} and at least one other column are needed")
    rows: dict[tuple[Fraction, ...], list[Fraction]] = {}
    place = [header.index(a) for a in at]
    for number, line in enumerate(lines[1:], 2):
        cells = line.split(",")
        if len(cells) != len(header):
            raise Refused(f"{file}: row {number}: {len(cells)} cells, {len(header)} columns")
        row = []
        for name, cell in zip(header, cells, strict=True):
            try:
                value = spelled(cell)
            except ValueError as why:
                raise Refused(f"{file}: row {number}, {name}: {why}") from None
            if value is None:
                raise Refused(f"{file}: row {number}, {name}: {cell[:40]!r} is no number")
            values.spend(value)
            row.append(value)
        key = tuple(row[p] for p in place)
        if key in rows:
            raise Refused(f"{file}: row {number}: this node stands twice")
        rows[key] = row
    grid = tuple(tuple(sorted({key[k] for key in rows})) for k in range(len(place)))
    size = 1
    for axis in grid:
        size *= len(axis)
        if len(axis) < 2:
            raise Refused(f"{file}: each axis needs at least two different nodes")
    if size != len(rows):
        raise Refused(f"{file}: {len(rows)} rows do not fill a grid of {size} nodes")
    nodes = [rows[key] for key in product(*grid)]
    columns = {c: tuple(r[k] for r in nodes) for k, c in enumerate(header) if c not in at}
    return Library(file, tuple(at), tuple(at.values()), grid, columns)
