"""A document as plain text for the terminal."""

from __future__ import annotations

from textwrap import fill

from .document import (
    Block,
    Caution,
    Code,
    Display,
    Document,
    Figure,
    Inline,
    Items,
    Listing,
    Outline,
    Paragraph,
    Table,
    Text,
    Verdict,
)
from .inert import visible
from .typeset import plain as formula_plain

WIDTH = 90
MOST = 34  # letters of a column before it is broken into lines


def plain(document: Document) -> str:
    parts = [visible(document.title), *(_block(b) for b in document.lead)]
    for section in document.sections:
        title = visible(section.title)
        parts += [f"{title}\n{'─' * len(title)}", *(_block(b) for b in section.blocks)]
    return "\n\n".join(p.rstrip() for p in parts if p.strip()) + "\n"


def text_of(text: Text) -> str:
    return "".join(_inline(p) for p in text)


def _inline(part: Inline) -> str:
    if isinstance(part, str):
        return visible(part)
    return visible(part.text) if isinstance(part, Code | Verdict) else formula_plain(part)


def _block(block: Block) -> str:
    match block:
        case Paragraph(text) | Caution(text):
            return fill(text_of(text), WIDTH)
        case Items(items):
            return "\n".join(fill(text_of(i), WIDTH, initial_indent="- ", subsequent_indent="  ") for i in items)
        case Display(formula):
            return f"    {formula_plain(formula)}"
        case Table():
            return _table(block)
        case Figure(title, _, alternative, _):
            return fill(f"{visible(title)}: {visible(alternative)}", WIDTH)
        case Listing(caption, text):
            body = "\n".join(f"    {line}" for line in visible(text, lines=True).rstrip().split("\n"))
            return f"{text_of(caption)}\n{body}".strip("\n")
        case Outline(summary, blocks, _):
            return "\n".join([text_of(summary), *(_block(b) for b in blocks)])


def _table(table: Table) -> str:
    """Columns side by side, long cells over several lines."""
    rows = [[text_of(c) for c in row] for row in (table.head, *table.rows)]
    widths = [min(MOST, max(len(row[k]) for row in rows)) for k in range(len(table.head))]
    kinds = table.columns or "l" * len(widths)
    lines = []
    for number, row in enumerate(rows):
        cells = [fill(c, w).split("\n") if c else [""] for c, w in zip(row, widths, strict=True)]
        for k in range(max(map(len, cells))):
            each = [c[k] if k < len(c) else "" for c in cells]
            placed = [x.rjust(w) if kind == "r" else x.ljust(w) for x, w, kind in zip(each, widths, kinds, strict=True)]
            lines.append("  ".join(placed).rstrip())
        if not number:
            lines.append("  ".join("─" * w for w in widths))
    head = [text_of(table.caption)] if table.caption else []
    return "\n".join([*head, *lines, *([fill(text_of(table.note), WIDTH)] if table.note else [])])
