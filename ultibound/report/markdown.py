"""A document as Markdown; formulas as LaTeX between dollars, figures as what they show, in words."""

from __future__ import annotations

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
from .inert import fenced, visible
from .inert import markdown as escaped
from .typeset import latex


def markdown(document: Document) -> bytes:
    """The whole text, the same for the same document."""
    parts = [f"# {escaped(document.title)}\n\n", *(_block(b) for b in document.lead)]
    for section in document.sections:
        parts.append(f"## {escaped(section.title)}\n\n")
        parts += [_block(b) for b in section.blocks]
    return ("".join(parts).rstrip() + "\n").encode()


def text_of(text: Text) -> str:
    return "".join(_inline(p) for p in text)


def _inline(part: Inline) -> str:
    if isinstance(part, str):
        return escaped(part)
    if isinstance(part, Code):
        shown = visible(part.text)
        return f"`{shown}`" if "`" not in shown and shown.strip() else escaped(shown)
    if isinstance(part, Verdict):
        return f"**{escaped(part.text)}**"
    return f"${latex(part)}$"


def _block(block: Block, depth: int = 0) -> str:
    match block:
        case Paragraph(text):
            return f"{text_of(text)}\n\n"
        case Caution(text):
            return f"> **Caution.** {text_of(text)}\n\n"
        case Items(items):
            return "".join(f"- {text_of(i)}\n" for i in items) + "\n"
        case Display(formula):
            return f"$$\n{latex(formula)}\n$$\n\n"
        case Table(caption, head, rows, columns, note):
            marks = ["--:" if c == "r" else "---" for c in columns or "l" * len(head)]
            lines = [head, tuple((m,) for m in marks), *rows]
            body = "".join(
                "| " + " | ".join((cell[0] if k == 1 else _cell(cell)) for cell in line) + " |\n"  # type: ignore[misc]
                for k, line in enumerate(lines)
            )
            return (
                (f"*{text_of(caption)}*\n\n" if caption else "")
                + body
                + (f"\n{text_of(note)}\n" if note else "")
                + "\n"
            )
        case Figure(title, _, alternative, caption):
            return f"**{escaped(title)}** (drawn in the HTML form). {escaped(alternative)} {text_of(caption)}\n\n"
        case Listing(caption, text):
            return (f"{text_of(caption)}\n\n" if caption else "") + fenced(text) + "\n"
        case Outline(summary, blocks, _):
            return f"**{text_of(summary)}**\n\n" + "".join(_block(b) for b in blocks)


def _cell(text: Text) -> str:
    return text_of(text).replace("|", "\\|") if any(isinstance(p, Code) for p in text) else text_of(text)
