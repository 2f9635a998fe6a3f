"""Formulas as MathML, LaTeX and plain text, part by part."""

from __future__ import annotations

import re
from collections.abc import Callable
from xml.etree.ElementTree import Element, SubElement

from .formula import LETTERS, Formula
from .inert import tex, visible

TEX_LETTERS = {letter: f"\\{name}" for name, letter in LETTERS.items()} | {"π": r"\pi", "ε": r"\varepsilon"}
TEX_FUNCTIONS = {
    "sin", "cos", "tan", "sinh", "cosh", "tanh", "exp", "log", "arcsin", "arccos", "arctan", "max", "min", "sup",
        "limsup",
}  # fmt: skip
TEX_OPERATORS = {
    "=": "=", "≤": r"\le ", "≥": r"\ge ", "<": "<", ">": ">", "−": "-", "+": "+", "∂": r"\partial ", "∈": r"\in ",
    "→": r"\to ", "·": r"\cdot ", ":": r"\colon ", ",": ",\\ ", "×": r"\times ", "⊂": r"\subset ", "∞": r"\infty ",
    "≈": r"\approx ", "≠": r"\neq ", "…": r"\dots ", "/": "/",
}  # fmt: skip
RANKS = {"sum": 1, "negative": 1, "row": 0, "product": 2, "fraction": 2}
PIECE = {"interval": ("[", "]"), "set": ("{", "}")}


def rank(f: Formula) -> int:
    return RANKS.get(f.kind, 4)


def _enclosed(f: Formula, least: int) -> bool:
    return rank(f) < least


# --- LaTeX ------------------------------------------------------------------------------------------------------------


def latex(f: Formula) -> str:
    """For math mode."""
    parts = f.parts
    match f.kind:
        case "number":
            return f.text.replace("…", r"\dots")
        case "symbol":
            return _tex_symbol(f)
        case "operator":
            return TEX_OPERATORS.get(f.text, rf"\text{{{tex(f.text)}}}")
        case "words" | "code":
            return rf"\text{{{tex(f.text)}}}" if f.kind == "words" else rf"\texttt{{{tex(f.text)}}}"
        case "row":
            return " ".join(latex(p) for p in parts)
        case "sum":
            return _signed_text(f, lambda p: _tex_in(p, 2), "-", "+")
        case "negative":
            return f"-{_tex_in(parts[0], 2)}"
        case "product":
            return r"\,".join(_tex_in(p, 2) for p in parts)
        case "fraction":
            return rf"\frac{{{latex(parts[0])}}}{{{latex(parts[1])}}}"
        case "power":
            return f"{_tex_in(parts[0], 4)}^{{{latex(parts[1])}}}"
        case "root":
            return rf"\sqrt{{{latex(parts[0])}}}"
        case "bars":
            mark = r"\Vert" if f.text == "‖" else r"\vert"
            return rf"\left{mark} {latex(parts[0])} \right{mark}"
        case "dot":
            return rf"\{'d' * len(f.text)}ot{{{latex(parts[0])}}}" if len(f.text) < 3 else _tex_rate(f)
        case "interval" | "set":
            a, b = (r"\{", r"\}") if f.kind == "set" else ("[", "]")
            return rf"\left{a}{', '.join(latex(p) for p in parts)}\right{b}"
        case "parentheses":
            return rf"\left({latex(parts[0])}\right)"
        case "cases":
            rows = r" \\ ".join(f"{latex(a)} & {latex(b)}" for a, b in zip(parts[::2], parts[1::2], strict=True))
            return rf"\begin{{cases}} {rows} \end{{cases}}"
        case _:
            head = rf"\{f.text}" if f.text in TEX_FUNCTIONS else _tex_symbol(Formula("symbol", text=f.text))
            return rf"{head}\left({', '.join(latex(p) for p in parts)}\right)"


def _tex_rate(f: Formula) -> str:
    return rf"\frac{{d^{{{len(f.text)}}}}}{{dt^{{{len(f.text)}}}}} {_tex_in(f.parts[0], 2)}"


def _tex_symbol(f: Formula) -> str:
    base = TEX_LETTERS.get(f.text) or (
        f.text if len(f.text) == 1 and f.text.isascii() else rf"\mathrm{{{tex(f.text)}}}"
    )
    sub = (
        "" if not f.sub else f"_{{{f.sub}}}" if f.sub.isdigit() or len(f.sub) == 1 else rf"_{{\mathrm{{{tex(f.sub)}}}}}"
    )
    return base + sub + (f"^{{{tex(f.sup)}}}" if f.sup else "")


def _tex_in(f: Formula, least: int) -> str:
    return rf"\left({latex(f)}\right)" if _enclosed(f, least) else latex(f)


def _signed_text(f: Formula, of: Callable[[Formula], str], minus: str, plus: str) -> str:
    found = ""
    for k, (sign, p) in enumerate(zip(f.text, f.parts, strict=True)):
        mark = minus if sign == "-" else plus
        found += f" {mark} {of(p)}" if k else (f"{mark}{of(p)}" if sign == "-" else of(p))
    return found


# --- plain text -------------------------------------------------------------------------------------------------------


def plain(f: Formula) -> str:
    """On one line, for terminals and alternative texts."""
    parts = f.parts
    match f.kind:
        case "symbol":
            sub = f.sub if f.sub.isdigit() or not f.sub else f"_{f.sub.replace(', ', '_').replace(' ', '')}"
            return f.text + sub + {"+": "⁺", "*": "*"}.get(f.sup, f"^{f.sup}" if f.sup else "")
        case "number" | "operator" | "words" | "code":
            return visible(f.text)
        case "row":
            return _plain_row(f)
        case "sum":
            return _signed_text(f, lambda p: _plain_in(p, 2), "−", "+")
        case "negative":
            return f"−{_plain_in(parts[0], 2)}"
        case "product":
            return "·".join(_plain_in(p, 2) for p in parts)
        case "fraction":
            return f"{_plain_in(parts[0], 2)}/{_plain_in(parts[1], 3)}"
        case "power":
            return f"{_plain_in(parts[0], 4)}^{_plain_in(parts[1], 4)}"
        case "root":
            return f"√({plain(parts[0])})"
        case "bars":
            return f"{f.text}{plain(parts[0])}{f.text}"
        case "dot":
            return _plain_in(parts[0], 4) + "′" * len(f.text)
        case "interval" | "set":
            a, b = PIECE[f.kind]
            return f"{a}{', '.join(plain(p) for p in parts)}{b}"
        case "parentheses":
            return f"({plain(parts[0])})"
        case "cases":
            pairs = zip(parts[::2], parts[1::2], strict=True)
            return "{" + "; ".join(f"{plain(a)} {plain(b)}" for a, b in pairs) + "}"
        case _:
            return f"{f.text}({', '.join(plain(p) for p in parts)})"


def _plain_row(f: Formula) -> str:
    found = ""
    for p in f.parts:
        text = plain(p)
        tight = p.kind == "operator" and p.text in ("∂", ",", ":")
        glued = not found or found.endswith(("∂", "(", " ")) or (tight and p.text != "∂")
        found += text if glued else f" {text}"
    return found


def _plain_in(f: Formula, least: int) -> str:
    return f"({plain(f)})" if _enclosed(f, least) and not (f.kind == "row" and len(f.parts) == 2) else plain(f)


# --- MathML -----------------------------------------------------------------------------------------------------------


def mathml(f: Formula, display: bool = False) -> Element:
    """A `math` element, with its plain text for those who cannot see it; `display`: as on a line of its own."""
    root = Element("math", {"alttext": plain(f), **({"displaystyle": "true"} if display else {})})
    _put(root, f)
    return root


def _leaf(parent: Element, tag: str, text: str, **attributes: str) -> Element:
    e = SubElement(parent, tag, attributes)
    e.text = visible(text)
    if tag == "mtext":  # blanks at the ends would be dropped
        e.text = re.sub("^ | $", "\N{NO-BREAK SPACE}", e.text)
    return e


def _put(parent: Element, f: Formula, least: int = 0) -> None:
    if _enclosed(f, least):
        inner = SubElement(parent, "mrow")
        _leaf(inner, "mo", "(")
        _put(inner, f)
        _leaf(inner, "mo", ")")
        return
    parts = f.parts
    match f.kind:
        case "number":
            _leaf(parent, "mn", f.text)
        case "symbol":
            _put_symbol(parent, f)
        case "operator":
            _leaf(parent, "mo", f.text, **{"∂": {"rspace": "0"}, ",": {"rspace": "1em"}}.get(f.text, {}))
        case "words":
            _leaf(parent, "mtext", f.text)
        case "code":
            _leaf(parent, "mtext", f.text, **{"class": "code"})
        case "sum":
            inner = SubElement(parent, "mrow")
            for k, (sign, p) in enumerate(zip(f.text, parts, strict=True)):
                if k or sign == "-":
                    _leaf(inner, "mo", "−" if sign == "-" else "+")
                _put(inner, p, 2)
        case "negative":
            inner = SubElement(parent, "mrow")
            _leaf(inner, "mo", "−")
            _put(inner, parts[0], 2)
        case "product":
            inner = SubElement(parent, "mrow")
            for k, p in enumerate(parts):
                if k and p.kind == "number":
                    _leaf(inner, "mo", "·")
                elif k:
                    SubElement(inner, "mspace", width="0.17em")
                _put(inner, p, 2)
        case "fraction" | "power":
            inner = SubElement(parent, "mfrac" if f.kind == "fraction" else "msup")
            for k, p in enumerate(parts):
                _put(SubElement(inner, "mrow"), p, 4 if f.kind == "power" and not k else 0)
        case "root":
            _put(SubElement(SubElement(parent, "msqrt"), "mrow"), parts[0])
        case "bars":
            inner = SubElement(parent, "mrow")
            _leaf(inner, "mo", f.text, stretchy="true", form="prefix")
            _put(inner, parts[0])
            _leaf(inner, "mo", f.text, stretchy="true", form="postfix")
        case "dot":
            over = SubElement(parent, "mover", accent="true")
            _put(SubElement(over, "mrow"), parts[0], 4)
            _leaf(over, "mo", {1: "˙", 2: "¨"}.get(len(f.text), "." * len(f.text)))
        case "parentheses":
            _put_list(parent, f)
        case "cases":
            _put_cases(parent, f)
        case "row":
            inner = SubElement(parent, "mrow")
            for p in parts:
                _put(inner, p)
        case _:
            _put_list(parent, f)


def _put_symbol(parent: Element, f: Formula) -> None:
    tag = {(True, True): "msubsup", (True, False): "msub", (False, True): "msup"}.get((bool(f.sub), bool(f.sup)))
    inner = SubElement(parent, tag) if tag else parent
    _leaf(inner, "mi", f.text)
    if f.sub:
        _leaf(inner, "mn" if f.sub.isdigit() else "mi" if len(f.sub) == 1 else "mtext", f.sub)
    if f.sup:
        _leaf(inner, "mo", f.sup)


def _put_cases(parent: Element, f: Formula) -> None:
    inner = SubElement(parent, "mrow")
    _leaf(inner, "mo", "{", stretchy="true", form="prefix")
    table = SubElement(inner, "mtable", columnalign="left left")
    for a, b in zip(f.parts[::2], f.parts[1::2], strict=True):
        line = SubElement(table, "mtr")
        for p in (a, b):
            _put(SubElement(line, "mtd"), p)


def _put_list(parent: Element, f: Formula) -> None:
    a, b = PIECE.get(f.kind, ("(", ")"))
    inner = SubElement(parent, "mrow")
    if f.text:
        _leaf(inner, "mi", f.text, **({"mathvariant": "normal"} if len(f.text) == 1 else {}))
    _leaf(inner, "mo", a)
    for k, p in enumerate(f.parts):
        if k:
            _leaf(inner, "mo", ",", separator="true")
        _put(inner, p)
    _leaf(inner, "mo", b)
