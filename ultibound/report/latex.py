"""A document as LaTeX that Debian's texlive-latex-base compiles; figures as what they show, in words."""

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
from .inert import tex, visible
from .typeset import latex as formula_latex
from .typeset import plain

WIDE = 26  # letters beyond which the text of a column is broken into lines
PIECE = 24  # letters of code after which a line may break
LINE = 92  # letters on a line of a listing
PREAMBLE = r"""\documentclass[11pt,a4paper]{article}
\usepackage[utf8]{inputenc}
\usepackage[margin=25mm]{geometry}
\usepackage{amsmath}
\usepackage{longtable}
\setlength{\parindent}{0pt}
\setlength{\parskip}{5pt plus 2pt}
\emergencystretch=3em
\hbadness=10000 \hfuzz=40pt
\makeatletter
\@ifundefined{pdfinfoomitdate}{}{\pdfinfoomitdate=1 \pdftrailerid{}}
\makeatother
"""


def latex(document: Document) -> bytes:
    """A complete LaTeX file, the same for the same document."""
    parts = [PREAMBLE, f"\\title{{{tex(document.title)}}}\n\\date{{}}\n\\begin{{document}}\n\\maketitle\n"]
    parts += [_block(b) for b in document.lead]
    for section in document.sections:
        parts.append(f"\n\\section{{{tex(section.title)}}}\n")
        parts += [_block(b) for b in section.blocks]
    return ("".join(parts) + "\n\\end{document}\n").encode()


def text_of(text: Text) -> str:
    return "".join(_inline(p) for p in text)


def _inline(part: Inline) -> str:
    if isinstance(part, str):
        return tex(part)
    if isinstance(part, Code):
        pieces = [tex(part.text[k : k + PIECE]) for k in range(0, len(part.text), PIECE)]
        return "\\texttt{" + "\\allowbreak{}".join(pieces) + "}"
    if isinstance(part, Verdict):
        return rf"\textbf{{{tex(part.text)}}}"
    return f"${formula_latex(part)}$"


def _block(block: Block) -> str:
    match block:
        case Paragraph(text):
            return f"{text_of(text)}\n\n"
        case Caution(text):
            return f"\\begin{{quote}}\\textbf{{Caution.}} {text_of(text)}\\end{{quote}}\n"
        case Items(items):
            return "\\begin{itemize}\n" + "".join(f"\\item {text_of(i)}\n" for i in items) + "\\end{itemize}\n"
        case Display(formula):
            shown = f"$\\displaystyle {formula_latex(formula)}$"
            return f"\\begin{{flushleft}}\\hangindent=4em \\hspace*{{2em}}{shown}\\end{{flushleft}}\n"
        case Table():
            return table_of(block)
        case Figure(title, _, alternative, caption):
            words = f"\\textbf{{{tex(title)}}} (drawn in the HTML form). {tex(alternative)} {text_of(caption)}"
            return f"\\begin{{quote}}{words}\\end{{quote}}\n"
        case Listing(caption, text):
            return (f"{text_of(caption)}\n\n" if caption else "") + _listing(text)
        case Outline(summary, blocks, _):
            return f"\\textbf{{{text_of(summary)}}}\n\n" + "".join(_block(b) for b in blocks)


def _listing(text: str) -> str:
    """Line by line, blanks kept, long lines broken; no verbatim environment that a line could end."""
    lines = []
    for line in visible(text, lines=True).rstrip().split("\n"):
        pieces = [line[k : k + LINE] for k in range(0, len(line), LINE)] or [""]
        lines += [tex(p).replace(" ", "~") or "~" for p in pieces]
    body = "\\\\\n".join(f"\\mbox{{{line}}}" for line in lines)
    return f"\\begin{{flushleft}}\\scriptsize\\ttfamily\n{body}\n\\end{{flushleft}}\n"


def table_of(table: Table) -> str:
    """A longtable; wide columns share what the narrow ones leave."""
    rows = [table.head, *table.rows]
    lengths = [max(sum(_length(p) for p in row[k]) for row in rows) for k in range(len(table.head))]
    wide = [n > WIDE for n in lengths]
    narrow = sum(n for n, w in zip(lengths, wide, strict=True) if not w)
    share = max(0.14, (0.9 - narrow / 95) / max(sum(wide), 1))
    kinds = table.columns or "l" * len(table.head)
    columns = "".join(rf"p{{{share:.2f}\linewidth}}" if w else kind for w, kind in zip(wide, kinds, strict=True))

    def line(cells: tuple[Text, ...]) -> str:
        return " & ".join(rf"\raggedright {text_of(c)}" if w else text_of(c) for c, w in zip(cells, wide, strict=True))

    body = "".join(f"{line(r)} \\tabularnewline\n" for r in table.rows)
    caption = f"\\textit{{{text_of(table.caption)}}}\\nopagebreak\n\n" if table.caption else ""
    note = f"{{\\small {text_of(table.note)}}}\n\n" if table.note else ""
    head = f"{line(table.head)} \\tabularnewline\n\\hline\\endhead\n"
    return f"{caption}{{\\footnotesize\n\\begin{{longtable}}[l]{{{columns}}}\n{head}{body}\\end{{longtable}}}}\n{note}"


def _length(part: Inline) -> int:
    return len(part if isinstance(part, str) else part.text if isinstance(part, Code | Verdict) else plain(part))
