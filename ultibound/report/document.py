"""A report as one value: sections of paragraphs, tables, formulas, figures; rendered as HTML, LaTeX or Markdown."""

from __future__ import annotations

from dataclasses import dataclass

from .formula import Formula


@dataclass(frozen=True, slots=True)
class Code:
    """A piece of text as it is written in a file or a terminal."""

    text: str


@dataclass(frozen=True, slots=True)
class Verdict:
    """The verdict of a requirement, in words."""

    text: str


Inline = str | Formula | Code | Verdict
Text = tuple[Inline, ...]


@dataclass(frozen=True, slots=True)
class Paragraph:
    text: Text


@dataclass(frozen=True, slots=True)
class Caution:
    text: Text


@dataclass(frozen=True, slots=True)
class Items:
    items: tuple[Text, ...]


@dataclass(frozen=True, slots=True)
class Display:
    """A formula on a line of its own."""

    formula: Formula


@dataclass(frozen=True, slots=True)
class Table:
    """`numeric` marks columns of figures, by a letter each: l or r."""

    caption: Text
    head: tuple[Text, ...]
    rows: tuple[tuple[Text, ...], ...]
    columns: str = ""
    note: Text = ()


@dataclass(frozen=True, slots=True)
class Figure:
    """`svg` is the drawing; `alternative` says in words what it shows."""

    title: str
    svg: str
    alternative: str
    caption: Text = ()


@dataclass(frozen=True, slots=True)
class Listing:
    """Text of a file, line by line."""

    caption: Text
    text: str


@dataclass(frozen=True, slots=True)
class Outline:
    """A summary that opens to what stands under it."""

    summary: Text
    blocks: tuple[Block, ...]
    open: bool = False


Block = Paragraph | Caution | Items | Display | Table | Figure | Listing | Outline


@dataclass(frozen=True, slots=True)
class Section:
    name: str
    title: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True)
class Document:
    """`lead` stands under the title, before the sections."""

    title: str
    lead: tuple[Block, ...]
    sections: tuple[Section, ...]
    contents: bool = True


def said(*text: Inline) -> Paragraph:
    """A paragraph of its pieces."""
    return Paragraph(text)
