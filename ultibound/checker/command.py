"""The check command, for the package and for the one-file checker."""

from __future__ import annotations

import json
import os
import re
import stat
import sys
from typing import Any

from . import Verdict, check
from .document import LARGEST

CLOSED_PIPE, INTERNAL, INTERRUPTED = 141, 70, 130


def run(path: str, claim: str | None, all_proved: bool, as_json: bool, lines: bool) -> int:
    """Checks a file and says what was found; returns the exit status 0, 1 or 2."""
    people = sys.stderr if as_json else sys.stdout
    try:
        data = contents(path)
        verdict = check(data)
        if verdict.status == "unreadable":
            raise OSError(verdict.reason)
        if verdict.status == "valid" and claim is not None:
            verdict = about(verdict, claim)
    except OSError as why:
        print(f"{printable(path)}: cannot be read: {printable(why.strerror or str(why))}", file=sys.stderr)
        return 2
    if verdict.status != "valid":
        print(f"INVALID: {printable(verdict.place)}: {printable(verdict.reason)}", file=people)
        return 1
    asked = requirements(verdict)
    if lines:
        for number, line in enumerate(verdict.proof, 1):
            print(f"{number:4d}  {told(line, asked)}", file=people)
    counts = ", ".join(f"{verdict.verdicts.count(v)} {v}" for v in ("proved", "refuted", "undecided"))
    print(f"VALID: {verdict.lines} lines and {verdict.leaves} leaves hold", file=people)
    print(f"requirements: {counts}", file=people)
    for outcome, that in zip(verdict.verdicts, asked, strict=True):
        print(f"  {outcome:<10} {printable(that)}", file=people)
    print("This is about the model in the claim, not about a machine.", file=people)
    if as_json:
        print(json.dumps({**(verdict.results or {}), "certificate": path}, ensure_ascii=False, sort_keys=True))
    if all_proved and set(verdict.verdicts) != {"proved"}:
        print("NOT ALL PROVED", file=people)
        return 1
    return 0


def contents(path: str) -> bytes:
    """The bytes of a regular file within the limit."""
    if not stat.S_ISREG(os.stat(path).st_mode):
        raise OSError("not a regular file")
    with open(path, "rb") as file:
        data = file.read(LARGEST + 1)
    if len(data) > LARGEST:
        raise OSError(f"larger than {LARGEST} bytes")
    return data


def about(verdict: Verdict, path: str) -> Verdict:
    """Whether the certificate is about exactly this claim file and its data; names the first line that differs."""
    stated: dict[str, Any] = verdict.claim or {}
    if stated["set"]:
        changed = ", ".join(f"{k} = {v}" for k, v in sorted(stated["set"].items()))
        return Verdict("invalid", "claim.set", f"the certificate is for changed gains: {changed}")
    pairs = [(path, stated["text"])]
    pairs += [(os.path.join(os.path.dirname(path), d["name"]), d["text"]) for d in stated["data"]]
    for name, text in pairs:
        mine, theirs = contents(name), text.encode()
        if mine != theirs:
            both = zip([*mine.splitlines(), b""], [*theirs.splitlines(), b""], strict=False)
            number = next((n for n, (a, b) in enumerate(both, 1) if a != b), 1)
            return Verdict("invalid", "claim", f"{name} line {number} differs from the certificate")
    return verdict


def requirements(verdict: Verdict) -> list[str]:
    """What is asked, of which stance and over ranges of which names."""
    found = []
    for r in verdict.derived.statement.requirements if verdict.derived else ():
        where = f" in {r.stance}" if r.stance is not None else ""
        found.append(r.text + where + (f" over {', '.join(r.over)}" if r.over else ""))
    return found


def told(line: dict[str, Any], asked: list[str]) -> str:
    about = re.search(r"require\[([1-9][0-9]*)\]$", line["proves"])
    name = f"{line['proves']} ({asked[int(about[1]) - 1]})" if about else line["proves"]
    uses = f" from {', '.join(map(str, line['uses']))}" if line["uses"] else ""
    said = {**line["concludes"], **(line["witness"] if line["rule"] == "gains" else {})}
    ends = ", ".join(f"{k} {v}" for k, v in said.items()) or "holds"
    return printable(f"{name}: {ends}  [{line['rule']}{uses}]")


def printable(text: str) -> str:
    """Text that cannot steer a terminal."""
    return "".join(c if c.isprintable() else "?" for c in text)[:400]


def main() -> int:
    """`python3 -I -S check_certificate.pyz CERT [--claim FILE] [--all-proved] [--json] [--lines]`."""
    arguments, flags, claim = sys.argv[1:], set[str](), None
    paths = []
    while arguments:
        word = arguments.pop(0)
        if word == "--claim" and arguments:
            claim = arguments.pop(0)
        elif word in ("--all-proved", "--json", "--lines"):
            flags.add(word)
        else:
            paths.append(word)
    if len(paths) != 1 or paths[0].startswith("-"):
        print("usage: check_certificate.pyz CERT [--claim FILE] [--all-proved] [--json] [--lines]", file=sys.stderr)
        return 2
    try:
        status = run(paths[0], claim, "--all-proved" in flags, "--json" in flags, "--lines" in flags)
        sys.stdout.flush()
        return status
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return CLOSED_PIPE
    except KeyboardInterrupt:
        return INTERRUPTED
    except Exception as why:
        print(f"internal error: {type(why).__name__}; nothing was concluded", file=sys.stderr)
        return INTERNAL
