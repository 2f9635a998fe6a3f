"""Text of a claim made harmless: what a person sees is what stands there, and nothing of it acts.

Control characters, direction marks and all else that is not seen is shown by its number; then each form has its own
escapes (faults: titles such as `<script>`, `\\input{…}`, escape sequences, direction overrides).
"""

from __future__ import annotations

import re

_TEX = {
    "\\": r"\textbackslash{}", "{": r"\{", "}": r"\}", "$": r"\$", "&": r"\&", "#": r"\#", "_": r"\_", "%": r"\%",
    "^": r"\textasciicircum{}", "~": r"\textasciitilde{}", "<": r"\textless{}", ">": r"\textgreater{}",
    "|": r"\textbar{}", '"': r"\char34{}", "'": "'", "`": r"\char96{}",
}  # fmt: skip
_TEX_SIGNS = {
    "…": r"\dots{}", "·": r"\ensuremath{\cdot}", "×": r"\ensuremath{\times}", "−": r"\ensuremath{-}", "°":
        r"\ensuremath{^\circ}",
    "≤": r"\ensuremath{\le}", "≥": r"\ensuremath{\ge}", "→": r"\ensuremath{\to}", "∂": r"\ensuremath{\partial}",
    "⁺": r"\ensuremath{^+}", "²": r"\ensuremath{^2}", "³": r"\ensuremath{^3}", "√": r"\ensuremath{\surd}",
    "∈": r"\ensuremath{\in}", "‖": r"\ensuremath{\Vert}", "–": r"\textendash{}", "′": r"\ensuremath{'}",
    "“": "``", "”": "''", "’": "'", "‘": "`", "é": r"\'e", "è": r"\`e", "ö": r"\"o", "ü": r"\"u", "ä": r"\"a", "ß":
        r"\ss{}",
    "ε": r"\ensuremath{\varepsilon}", "κ": r"\ensuremath{\kappa}", "φ": r"\ensuremath{\varphi}", "ω":
        r"\ensuremath{\omega}",
    "π": r"\ensuremath{\pi}", "ρ": r"\ensuremath{\rho}", "µ": r"\ensuremath{\mu}", "μ": r"\ensuremath{\mu}", "Φ":
        r"\ensuremath{\Phi}",
}  # fmt: skip
_MARKDOWN = re.compile(r"([\\`*_{}\[\]|~$^@]|:(?=//)|(?<=www)\.|^[-+=#]|(?<=^[0-9])[.)]|(?<=^[0-9][0-9])[.)])", re.I)


def visible(text: str, lines: bool = False) -> str:
    """Every character that cannot be seen, or would turn the text around, by its number; blanks as blanks.

    `lines` keeps line ends and makes tabs blanks; else all is on one line.
    """
    found = []
    for c in text:
        if c.isprintable() or (c == "\n" and lines):
            found.append(c)
        elif c in "\t\n" or (c.isspace() and c not in "\r\v\f\x1c\x1d\x1e\x1f\x85\u2028\u2029"):
            found.append(" ")
        else:
            found.append(f"[U+{ord(c):04X}]")
    return "".join(found)


def tex(text: str) -> str:
    """For LaTeX text: nothing in it is a command; characters that plain LaTeX has no glyph for, by their number."""
    found = []
    for c in visible(text):
        if c.isascii():
            found.append(_TEX.get(c, c))
        else:
            found.append(_TEX_SIGNS.get(c, f"[U+{ord(c):04X}]"))
    return "".join(found).replace("--", "-{}-{}")  # two hyphens are not a dash


def markdown(text: str) -> str:
    """For Markdown text: no markup, no HTML, no address that becomes a link."""
    escaped = _MARKDOWN.sub(r"\\\1", visible(text))
    return escaped.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")


def fenced(text: str) -> str:
    """A listing in Markdown between fences longer than any run of backticks in it."""
    shown = visible(text, lines=True)
    longest = max((len(x) for x in re.findall("`+", shown)), default=0)
    fence = "`" * max(3, longest + 1)
    return f"{fence}text\n{shown.rstrip()}\n{fence}\n"
