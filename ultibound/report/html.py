"""A document as one HTML page that needs nothing else: no script, no address, styles and figures inside.

The page is built as a tree and written out by the standard library, so that text can never become markup.
"""

from __future__ import annotations

import re
from hashlib import sha256
from html import escape
from xml.etree.ElementTree import Element, SubElement, fromstring

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
from .plain import text_of as spoken
from .typeset import mathml

POLICY = "default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; form-action 'none'"
STYLE = """
:root { --paper: #fdfcf8; --ink: #1d2320; --quiet: #545b55; --line: #8b9189; --tint: #f1efe6; --proved: #14532d;
  --refuted: #8a1c12; --undecided: #6a4a00; --link: #1b4a6b; }
html { background: var(--paper); color: var(--ink); color-scheme: light;
  font: 17px/1.55 Georgia, "Times New Roman", serif;
  -webkit-text-size-adjust: 100%; }
body { margin: 0 auto; max-width: 46rem; padding: 1.5rem 1rem 4rem; overflow-wrap: break-word; }
h1 { font-size: 1.7rem; line-height: 1.25; margin: 0 0 .75rem; font-weight: normal; }
h2 { font-size: 1.25rem; margin: 2.6rem 0 .6rem; padding-top: .5rem; border-top: 3px double var(--line);
  font-weight: normal; }
p { margin: .6rem 0; }
a { color: var(--link); }
a:focus-visible, summary:focus-visible, .wide:focus-visible { outline: 3px solid var(--link); outline-offset: 2px; }
nav ol { padding-left: 1.4rem; margin: .5rem 0; }
.wide { overflow-x: auto; margin: .8rem 0 1.1rem; }
table { border-collapse: collapse; font-size: .86rem; line-height: 1.4; font-variant-numeric: tabular-nums; }
caption { text-align: left; padding-bottom: .35rem; color: var(--quiet); font-style: italic; }
th, td { text-align: left; vertical-align: top; padding: .28rem .9rem .28rem 0; border-bottom: 1px solid var(--line); }
th { border-bottom: 2px solid var(--ink); font-weight: bold; }
.r { text-align: right; white-space: nowrap; }
td.s { min-width: 6.5rem; }
td.l { min-width: 11rem; }
.note, figcaption { color: var(--quiet); font-size: .86rem; }
code, pre { font-family: "DejaVu Sans Mono", Menlo, Consolas, monospace; font-size: .8em; }
pre { background: var(--tint); padding: .7rem .8rem; overflow-x: auto; line-height: 1.45; font-size: .76rem;
  white-space: pre-wrap; }
math { font-size: 1.05em; }
math .code { font-family: monospace; }
.verdict { font-weight: bold; white-space: nowrap; }
.proved { color: var(--proved); }
.refuted { color: var(--refuted); }
.undecided { color: var(--undecided); }
.caution { border-left: 5px solid var(--ink); background: var(--tint); padding: .5rem .9rem; margin: 1rem 0; }
figure { margin: 1.2rem 0; }
figure svg { display: block; width: 100%; max-width: 34rem; height: auto; background: #ffffff; }
details { border-bottom: 1px solid var(--line); padding: .3rem 0; }
details details { margin-left: 1rem; border-bottom-style: dotted; }
summary { cursor: pointer; }
@media (max-width: 36rem) { html { font-size: 16px; } .r { white-space: normal; }
  details details { margin-left: .4rem; }
  .many thead { position: absolute; left: -99rem; }
  .many table, .many tbody, .many tr, .many td, .many caption { display: block; }
  .many tr { border-bottom: 2px solid var(--line); padding: .35rem 0; }
  .many td, .many td.r { border: 0; padding: .08rem 0 .08rem 7.4rem; text-indent: -7.4rem; text-align: left; }
  .many td::before { content: attr(data-label); display: inline-block; width: 7.4rem; text-indent: 0;
    color: var(--quiet); } }
@media print { html { background: #ffffff; font-size: 11pt; } nav { display: none; } h2 { break-after: avoid; }
  figure, tr { break-inside: avoid; } pre { white-space: pre-wrap; } }
"""
MOST, LONG = 3, 34  # columns, and letters in a cell, that have room on a telephone
VOID = ("link", "meta")  # elements without an end
MARKS = {"proved": "✓", "refuted": "✗", "undecided": "?"}


def html(document: Document) -> bytes:
    """The page as bytes, the same for the same document."""
    root = Element("html", lang="en")
    head = SubElement(root, "head")
    SubElement(head, "meta", charset="utf-8")
    SubElement(head, "meta", {"http-equiv": "Content-Security-Policy", "content": POLICY})
    SubElement(head, "meta", name="viewport", content="width=device-width, initial-scale=1")
    SubElement(head, "meta", name="referrer", content="no-referrer")
    SubElement(head, "link", rel="icon", href="data:,")  # or a browser asks the folder for one
    SubElement(head, "title").text = visible(document.title)
    SubElement(head, "style").text = STYLE
    body = SubElement(root, "body")
    main = SubElement(body, "main")
    SubElement(main, "h1").text = visible(document.title)
    for block in document.lead:
        _block(main, block)
    if document.contents:
        nav = SubElement(SubElement(main, "nav", {"aria-label": "Contents"}), "ol")
        for section in document.sections:
            SubElement(SubElement(nav, "li"), "a", href=f"#{section.name}").text = visible(section.title)
    for section in document.sections:
        part = SubElement(main, "section", {"aria-labelledby": section.name})
        SubElement(part, "h2", id=section.name).text = visible(section.title)
        for block in section.blocks:
            _block(part, block)
    return f"<!DOCTYPE html>\n{_written(root)}\n".encode()


def _written(root: Element) -> str:
    """Markup of a tree; every letter of text and attributes that could be markup is escaped."""
    parts: list[str] = []
    stack: list[Element | str] = [root]
    while stack:
        e = stack.pop()
        if isinstance(e, str):
            parts.append(e)
            continue
        attributes = "".join(f' {k}="{escape(v)}"' for k, v in e.attrib.items())
        parts.append(f"<{e.tag}{attributes}>{escape(e.text or '', quote=False)}")
        tail = escape(e.tail or "", quote=False)
        stack.append(tail if e.tag in VOID else f"</{e.tag}>{tail}")
        stack += reversed(e)
    return "".join(parts)


def fragment(document: Document) -> str:
    """The document without page and styles, for a notebook."""
    root = Element("div")
    SubElement(root, "h3").text = visible(document.title)
    for block in (*document.lead, *(b for s in document.sections for b in s.blocks)):
        _block(root, block)
    return _written(root)


def _text(parent: Element, text: Text) -> None:
    for part in text:
        _inline(parent, part)


def _append(parent: Element, text: str) -> None:
    if len(parent):
        parent[-1].tail = (parent[-1].tail or "") + text
    else:
        parent.text = (parent.text or "") + text


def _inline(parent: Element, part: Inline) -> None:
    if isinstance(part, str):
        _append(parent, visible(part))
    elif isinstance(part, Code):
        SubElement(parent, "code").text = visible(part.text)
    elif isinstance(part, Verdict):
        mark = MARKS.get(part.text, "")
        SubElement(parent, "span", {"class": f"verdict {part.text}"}).text = f"{mark} {part.text}".strip()
    else:
        parent.append(mathml(part))


def _block(parent: Element, block: Block) -> None:
    match block:
        case Paragraph(text):
            _text(SubElement(parent, "p"), text)
        case Caution(text):
            _text(SubElement(parent, "p", {"class": "caution", "role": "note"}), text)
        case Items(items):
            listed = SubElement(parent, "ul")
            for item in items:
                _text(SubElement(listed, "li"), item)
        case Display(formula):
            wide = SubElement(parent, "div", {"class": "wide", "tabindex": "0"})
            wide.append(mathml(formula, display=True))
        case Table():
            _table(parent, block)
        case Figure():
            _figure(parent, block)
        case Listing(caption, text):
            if caption:
                _text(SubElement(parent, "p", {"class": "note"}), caption)
            SubElement(parent, "pre", tabindex="0").text = visible(text, lines=True)
        case Outline(summary, blocks, opened):
            inner = SubElement(parent, "details", {"open": "open"} if opened else {})
            _text(SubElement(inner, "summary"), summary)
            for each in blocks:
                _block(inner, each)


def _table(parent: Element, table: Table) -> None:
    many = len(table.head) > MOST or any(_size(cell) > LONG for row in table.rows for cell in row)
    wide = SubElement(parent, "div", {"class": "wide many" if many else "wide", "tabindex": "0"})
    inner = SubElement(wide, "table")
    if table.caption:
        _text(SubElement(inner, "caption"), table.caption)
    top = SubElement(SubElement(inner, "thead"), "tr")
    kinds = table.columns or "l" * len(table.head)
    for kind, text in zip(kinds, table.head, strict=True):
        _text(SubElement(top, "th", {"scope": "col", **({"class": "r"} if kind == "r" else {})}), text)
    body = SubElement(inner, "tbody")
    for row in table.rows:
        line = SubElement(body, "tr")
        for kind, text, head in zip(kinds, row, table.head, strict=True):
            size = _size(text)
            name = "r" if kind == "r" else "l" if size > LONG else "s" if size > 14 else ""
            label = {"data-label": spoken(head)} if many else {}
            _text(SubElement(line, "td", {**({"class": name} if name else {}), **label}), text)
    if table.note:
        _text(SubElement(parent, "p", {"class": "note"}), table.note)


def _size(text: Text) -> int:
    return sum(len(p) if isinstance(p, str) else 8 for p in text)


def _figure(parent: Element, figure: Figure) -> None:
    inner = SubElement(parent, "figure")
    drawing = fromstring(figure.svg)
    own = f"f{sha256(figure.svg.encode()).hexdigest()[:8]}-"  # names are of the page, so that no two figures share one
    used = set(re.findall(r"(?:href=\"|url\()#([\w.-]+)", figure.svg))
    for e in drawing.iter():
        e.tag = e.tag.rpartition("}")[2]
        for key in list(e.attrib):
            value = e.attrib.pop(key).replace("url(#", f"url(#{own}")
            key = key.rpartition("}")[2]
            if key == "href":
                value = f"#{own}{value.removeprefix('#')}"
            if key != "id" or value in used:
                e.set(key, own + value if key == "id" else value)
    for key in ("width", "height", "version"):
        drawing.attrib.pop(key, None)
    drawing.set("role", "img")
    drawing.set("aria-label", visible(figure.alternative))
    drawing.tail = None
    inner.append(drawing)
    under = SubElement(inner, "figcaption")
    SubElement(under, "b").text = visible(figure.title)
    _append(under, ". ")
    _text(under, figure.caption)
