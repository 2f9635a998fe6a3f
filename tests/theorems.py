"""The theorems of proofs/, and what a proof assistant has checked of them: `python -m tests.theorems`."""

from __future__ import annotations

import re
import shutil
import subprocess
import tempfile
import textwrap
import time
from dataclasses import dataclass
from pathlib import Path

PROOFS = Path(__file__).parents[1] / "proofs"
COQ = PROOFS / "coq"
INSTALL = "apt-get install -y --no-install-recommends coq libcoq-coquelicot"
NAME = re.compile(r"`([^`]+)`")
STATEMENT = re.compile(r"^(Theorem|Example)\s+(\w+)", re.M)
REFUSED = re.compile(  # what would let a statement through unproved, or hide an assumption in it
    r"\b(Admitted|admit|give_up|Axioms?|Parameters?|Conjectures?|Hypothes[ie]s|Declare|Load|Redirect|bypass_check"
    r"|(?:Unset|Set)\s+(?:Guard|Positivity|Universe)\s+Checking|Primitive|Extract\w*|Notation|Infix|Abort|Context)\b"
    r"|^\s*Variables?\b(?:->|[^.<>=])*(?:[<=]|(?<!-)>)",  # in a section, a hypothesis by another name
    re.M,
)


@dataclass(frozen=True)
class Row:
    """A line of one of the tables of proofs/README.md."""

    pages: dict[str, tuple[str, ...]]  # where it stands, and under which numbers
    statement: str
    names: tuple[str, ...]  # in Coq; none where it is not machine-checked
    uses: tuple[str, ...]  # rules, or functions of the checker as `file.py: function`
    last: str  # what it assumes, by letters; or why it is not machine-checked


def tables(text: str) -> dict[str, list[list[str]]]:
    """The cells of every table, by the heading it stands under."""
    found: dict[str, list[list[str]]] = {}
    heading = ""
    for line in text.splitlines():
        if line.startswith("## "):
            heading = line[3:]
        elif line.startswith("|") and not re.match(r"\| *-", line):
            found.setdefault(heading, []).append([c.strip() for c in re.split(r"(?<!\\)\|", line)[1:-1]])
    return {k: rows[1:] for k, rows in found.items()}  # without the head


def rows(heading: str) -> list[Row]:
    found = []
    for cells in tables((PROOFS / "README.md").read_text(encoding="utf-8"))[heading]:
        place, statement, names, uses, _, last = cells
        pages = {p: tuple(re.findall(r"\(([^)]+)\)", rest)) for p, rest in re.findall(r"`([^`]+)`([^`]*)", place)}
        assert pages, cells
        found.append(Row(pages, statement, tuple(NAME.findall(names)), tuple(NAME.findall(uses)), last))
    return found


def letters() -> dict[str, str]:
    """What the letters of the last column stand for."""
    cells = tables((PROOFS / "README.md").read_text(encoding="utf-8"))["Assumptions"]
    return {letter: name[1] for letter, text, *_ in cells if (name := NAME.search(text))}


def sources(folder: Path = COQ) -> dict[str, str]:
    return {p.name: p.read_text(encoding="utf-8") for p in sorted(folder.glob("*.v"))}


def spoken(text: str) -> str:
    """A source without its comments, which may be nested."""
    depth, found = 0, []
    for part in re.split(r"(\(\*|\*\))", text):
        if part == "(*":
            depth += 1
        elif part == "*)" and depth:
            depth -= 1
        elif not depth:
            found.append(part)
    return "".join(found)


def unproved(text: str) -> list[str]:
    """Words that a source must not use."""
    return [m[0] for m in REFUSED.finditer(spoken(text))]


def stated(text: str) -> dict[str, tuple[str, str]]:
    """Kind of every statement of a source, and the reading in the line above it."""
    lines, found = text.splitlines(), {}
    for before, line in zip(["", *lines], lines, strict=False):
        if m := STATEMENT.match(line):
            found[m[2]] = m[1], before[3:-3] if before.startswith("(* ") and before.endswith(" *)") else ""
    return found


def ordered(texts: dict[str, str]) -> list[str]:
    """Files, each after those it requires."""
    needs = {
        f: re.findall(r"\w+", " ".join(re.findall(r"From Ultibound Require Import ([\w ]+)", t)))
        for f, t in texts.items()
    }
    found: list[str] = []
    while len(found) < len(texts):
        ready = [f for f in texts if f not in found and all(f"{x}.v" in found for x in needs[f])]
        assert ready, "sources that require each other"
        found += ready
    return found


def coqc(folder: Path, file: str) -> str:
    """What the compiler prints. Raises CalledProcessError."""
    command = ["coqc", "-q", "-w", "-ambiguous-paths", "-Q", ".", "Ultibound", file]
    return subprocess.run(command, cwd=folder, check=True, capture_output=True, text=True).stdout


def compiled(texts: dict[str, str], folder: Path) -> float:
    """Compiles the sources in a folder of their own; the seconds it took."""
    for file, text in texts.items():
        (folder / file).write_text(text, encoding="utf-8")
    started = time.monotonic()
    for file in ordered(texts):
        coqc(folder, file)
    return time.monotonic() - started


def joined(texts: dict[str, str]) -> str:
    """The sources in one, each a module: the same proofs, with the libraries loaded once instead of once a source."""
    modules = ['Set Warnings "-require-in-module".']
    for file in ordered(texts):
        text = re.sub(r"From Ultibound Require Import", "Import", texts[file])
        name = file.removesuffix(".v")
        modules.append(f"Module {name}.\n{text}\nEnd {name}.")
    return "\n".join(modules)


def assumptions(texts: dict[str, str], folder: Path, groups: list[list[str]]) -> list[frozenset[str]]:
    """What the statements of each group rest on together, as printed by the compiler. (Each one alone takes a second.)

    Where the folder holds no compiled sources, they are compiled with the question.
    """
    place = {name: f"{f.removesuffix('.v')}.{name}" for f, t in texts.items() for name in stated(t)}
    there = all((folder / f"{file}o").exists() for file in texts)
    lines = [f"From Ultibound Require {f.removesuffix('.v')}." for f in texts] if there else [joined(texts)]
    for k, names in enumerate(groups):
        lines.append(f"Definition group_{k} := ({', '.join('@' + place[n] for n in names)}).")
        lines.append(f"Print Assumptions group_{k}.\nEval compute in tt.")  # what it prints ends the answer
    (folder / "Assumed.v").write_text("\n".join(lines), encoding="utf-8")
    answers = re.split(r"^\s+= tt\n\s+: unit\n", coqc(folder, "Assumed.v"), flags=re.M)[:-1]
    return [frozenset(re.findall(r"^(?!Axioms:)([\w.]+)\s*:", a, re.M)) for a in answers]


def alike(several: list[Row]) -> dict[str, list[str]]:
    """Names of statements by what they are listed to assume."""
    found: dict[str, list[str]] = {}
    for row in several:
        found.setdefault(row.last, []).extend(row.names)
    return found


def main() -> None:
    proved, left = rows("Machine-checked"), rows("Not machine-checked")
    examples = rows("Fails without")
    print(f"{len(proved) + len(left)} theorems used by the checker, {len(proved)} of them machine-checked.")
    for row in left:
        print(f"  not: {row.statement} ({', '.join(row.pages)}): {row.last}")
    print(f"{len(examples)} weakened ones with a counterexample that is machine-checked.")
    if shutil.which("coqc") is None:
        raise SystemExit(f"coqc is not installed: {INSTALL}")
    groups = alike([*proved, *examples])
    with tempfile.TemporaryDirectory() as folder:
        texts = sources()
        seconds = compiled(texts, Path(folder))
        found = assumptions(texts, Path(folder), list(groups.values()))
    known = {name: letter for letter, name in letters().items()}
    for names, taken in zip(groups.values(), found, strict=True):
        print(f"{len(names)} statements assume {' '.join(sorted(known.get(x, x) for x in taken)) or 'nothing'}:")
        print(textwrap.fill(", ".join(names), 100, initial_indent="  ", subsequent_indent="  "))
    for letter, name in letters().items():
        print(f"{letter} = {name}")
    print(f"Compiled in {seconds:.1f} s.")


if __name__ == "__main__":
    main()
