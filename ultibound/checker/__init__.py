"""The independent checker: re-verifies a certificate line by line, with the standard library alone.

`check(data)` takes the bytes of a certificate. It derives from the claim inside what has to be proved, repeats every
enclosure in its own outward-rounded arithmetic, applies the theorems of proofs/, and accepts no result that
says more than the lines show. A certificate is treated as hostile.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from .calculus import Unprovable
from .document import Unreadable, digest, read
from .grammar import Refused
from .graph_outcomes import results_of
from .holding import hold
from .rules import Proof, Rejected, proof_of
from .statement import read_statement

__all__ = ["Verdict", "check"]


@dataclass(frozen=True)
class Verdict:
    """What a check found.

    `status` is "valid" (every line holds), "invalid" (a line or entry does not, named in `place` and `reason`) or
    "unreadable" (not a certificate of this format). `lines` and `leaves` count what was verified; `verdicts` are
    those of the requirements; `results`, `proof`, `claim` and `digest` are the certificate's own entries, `derived` is
    what this checker made of its lines; all given only when valid.
    """

    status: str
    place: str = ""
    reason: str = ""
    lines: int = 0
    leaves: int = 0
    verdicts: tuple[str, ...] = ()
    results: dict[str, Any] | None = None
    proof: tuple[dict[str, Any], ...] = field(default=(), repr=False)
    claim: dict[str, Any] | None = field(default=None, repr=False)
    derived: Proof | None = field(default=None, repr=False)
    digest: str = ""


def check(data: bytes, watch: Callable[[int, int], None] = lambda done, total: None) -> Verdict:
    """Re-verifies a certificate. Never raises on bad input; `watch` is told lines done and their total."""
    try:
        entries = read(data)
    except Unreadable as why:
        return Verdict("unreadable", reason=str(why))
    return verified(entries, watch)


def verified(entries: dict[str, Any], watch: Callable[[int, int], None] = lambda done, total: None) -> Verdict:
    """The verdict on the entries of a certificate, as `check` reads them."""
    number = 0
    place = "claim"
    try:
        proof = proof_of(claimed(entries))
        place = "proof"
        if not isinstance(entries["proof"], list) or not entries["proof"]:
            raise Rejected("a proof has at least one line")
        for number, raw in enumerate(entries["proof"], 1):
            place = f"proof line {number}"
            watch(number - 1, len(entries["proof"]))
            proof.add(raw)
        place = "results"
        results = results_of(proof)
        hold(results, entries["results"])
        place = "proof"
        used(proof, results.needed)
        place = "assumptions"
        if entries["assumptions"] != [] or not isinstance(entries["assumptions"], list):
            raise Rejected("none are known")
        place = "made_with"
        made = entries["made_with"]
        if not isinstance(made, dict) or not all(isinstance(v, str) and len(v) < 100 for v in made.values()):
            raise Rejected("names and versions")
        place = "digest"
        if entries["digest"] != digest(entries):
            raise Rejected("the digest does not match: the file was changed or damaged")
    except (Rejected, Refused, Unprovable) as why:
        return Verdict("invalid", place, str(why), max(0, number - 1))
    verdicts = tuple(r["verdict"] for r in entries["results"]["requirements"])
    return Verdict(
        "valid", "", "", number, proof.leaves, verdicts, entries["results"], tuple(entries["proof"]), entries["claim"],
        proof, entries["digest"],
    )  # fmt: skip


def claimed(entries: dict[str, Any]) -> Any:
    """The statement made by the certificate's `claim`: text, settings, and data whose hashes match."""
    claim = entries["claim"]
    if not isinstance(claim, dict) or set(claim) != {"text", "set", "data"}:
        raise Rejected("the keys are text, set, data")
    text, settings, data = claim["text"], claim["set"], claim["data"]
    if not isinstance(text, str) or not isinstance(settings, dict) or not isinstance(data, list):
        raise Rejected("text, a table of settings, a list of data")
    if not all(isinstance(v, str) for v in settings.values()):
        raise Rejected("set: texts only")
    files: dict[str, str] = {}
    for item in data:
        if not isinstance(item, dict) or set(item) != {"name", "sha256", "text"}:
            raise Rejected("data: the keys are name, sha256, text")
        if not all(isinstance(v, str) for v in item.values()) or item["name"] in files:
            raise Rejected("data: texts, each file once")
        if hashlib.sha256(item["text"].encode()).hexdigest() != item["sha256"]:
            raise Rejected(f"data {item['name'][:60]!r}: the hash does not match")
        files[item["name"]] = item["text"]
    statement = read_statement(text, settings, files)
    if {library.file for library in statement.libraries} != set(files):
        raise Rejected("data: exactly the files the claim reads")
    return statement


def used(proof: Proof, needed: set[int]) -> None:
    """Every line serves a later line or a result."""
    waiting = list(needed)
    seen = set(needed)
    while waiting:
        for n in proof.lines[waiting.pop()].uses:
            if n not in seen:
                seen.add(n)
                waiting.append(n)
    idle = sorted(set(proof.lines) - seen)
    if idle:
        raise Rejected(f"line {idle[0]} serves no later line and no result")
