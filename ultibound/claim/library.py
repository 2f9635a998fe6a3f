"""Gait libraries from CSV text: exact decimals on a full rectangular grid."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from itertools import product

from .constants import Work
from .errors import Bad
from .expression import NAME, RESERVED, Expression
from .model import Library
from .numbers import ROW, exact_number

MAX_BYTES = 64 * 2**20
MAX_ROWS = 1_000_000


def parse_library(file: str, text: str, at: Mapping[str, Expression], work: Work) -> Library:
    """The library of a file, its axes in the order of `at`. Raises Bad naming row and column."""
    lines = _lines(file, text)
    header = lines[0].split(",")
    seen: set[str] = set()
    for name in header:
        if not NAME.match(name):
            raise Bad(f"{file}: row 1: {name[:40]!r} cannot be a column's name")
        if name in RESERVED:
            raise Bad(f"{file}: row 1: {name} is a reserved word; rename the column")
        if name in seen:
            raise Bad(f"{file}: row 1: column {name} stands twice")
        seen.add(name)
    missing = [a for a in at if a not in seen]
    if missing:
        raise Bad(
            f"{file}: row 1: there is no column {missing[0][:40]} for the axis; columns: {', '.join(header[:12])}"
        )
    if len(at) == len(header):
        raise Bad(f"{file}: row 1: every column is an axis; at least one must be read")
    ranks = [header.index(a) for a in at]
    for number, line in enumerate(lines[1:], 2):  # spellings first: converting a long file takes far longer
        if not ROW.match(line):
            _row(file, number, header, line, work)
    rows: dict[tuple[Fraction, ...], tuple[int, list[Fraction]]] = {}
    for number, line in enumerate(lines[1:], 2):
        values = _row(file, number, header, line, work)
        node = tuple(values[r] for r in ranks)
        if node in rows:
            raise Bad(f"{file}: row {number}: the same node as row {rows[node][0]}; remove one")
        rows[node] = number, values
    grid = tuple(tuple(sorted({node[k] for node in rows})) for k in range(len(ranks)))
    for axis, nodes in zip(at, grid, strict=True):
        if len(nodes) < 2:
            raise Bad(f"{file}: column {axis}: {len(nodes)} node(s); an axis needs at least two")
    size = 1
    for nodes in grid:
        size *= len(nodes)
    if size != len(rows):
        hole = next((n for n in product(*grid) if n not in rows), ()) if size < 10 * len(rows) else ()
        shown = ", ".join(f"{a} = {float(x):.6g}" for a, x in zip(at, hole, strict=False))
        raise Bad(f"{file}: {len(rows)} rows, but a full grid has {size} nodes{'; missing: ' + shown if shown else ''}")
    ordered = [rows[node][1] for node in product(*grid)]
    columns = {c: tuple(v[k] for v in ordered) for k, c in enumerate(header) if c not in at}
    return Library(file, tuple(at), tuple(at.values()), grid, columns)


def _lines(file: str, text: str) -> list[str]:
    if len(text) > MAX_BYTES or len(text.encode("utf-8", "surrogatepass")) > MAX_BYTES:
        raise Bad(f"{file}: more than {MAX_BYTES} bytes")
    if text.startswith("\ufeff"):
        raise Bad(f"{file}: byte 0: a byte order mark; save without one")
    plain = text.replace("\r\n", "\n")
    odd = next((c for c in plain if c < " " and c != "\n"), "")
    if odd:
        raise Bad(
            f"{file}: byte {len(text[: text.index(odd)].encode('utf-8', 'surrogatepass'))}: control character {odd!r}"
        )
    lines = plain.split("\n")
    if lines[-1] == "":
        lines.pop()
    if not lines:
        raise Bad(f"{file}: empty; a header row and gaits are expected")
    if len(lines) > MAX_ROWS + 1:
        raise Bad(f"{file}: {len(lines)} rows; at most {MAX_ROWS} are read")
    return lines


def _row(file: str, number: int, header: list[str], line: str, work: Work) -> list[Fraction]:
    cells = line.split(",")
    if len(cells) != len(header):
        raise Bad(f"{file}: row {number}: {len(cells)} cell(s), the header has {len(header)}")
    values = []
    for name, cell in zip(header, cells, strict=True):
        try:
            values.append(exact_number(cell))
        except Bad as why:
            found = "blank" if not cell.strip() else str(why)
            raise Bad(f"{file}: row {number}, column {name}: {found}") from None
        work.spend((values[-1], values[-1]))
    return values
