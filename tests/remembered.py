"""Lines of certificates that differ in one place, verified once: hundreds of them are judged in the time of some."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import pytest

import ultibound.checker
from ultibound.checker.rules import Line, Proof, Rejected
from ultibound.checker.statement import Statement

ADD, READ = Proof.add, ultibound.checker.read_statement


@contextmanager
def every_line_verified() -> Iterator[None]:
    """Also where lines are verified once, for a while: under other limits the same line is another question."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Proof, "add", ADD)
        patch.setattr(ultibound.checker, "read_statement", READ)
        yield


@contextmanager
def lines_checked_once() -> Iterator[None]:
    """A claim is read once, and lines after exactly the same claim and lines are not verified anew: only what follows
    a change is."""
    known: dict[str, tuple[Line | tuple[Any, ...], int]] = {}
    claims: dict[str, Statement] = {}
    names: dict[int, str] = {}  # of claims that are kept

    def read(text: str, settings: dict[str, str], files: dict[str, str]) -> Statement:
        key = json.dumps([text, settings, files])
        if key not in claims:
            claims[key] = READ(text, settings, files)
            names[id(claims[key])] = key
        return claims[key]

    def add(proof: Proof, raw: Any) -> None:
        if not proof.lines:
            statement = proof.derivation.statement if proof.graph is None else proof.graph.statement
            claim = names.get(id(statement)) or repr(statement)
            proof.history = hashlib.sha256(claim.encode())  # type: ignore[attr-defined]  # a note of the test's own
        digest_ = getattr(proof, "history", None)
        if digest_ is None:  # lines in the making
            ADD(proof, raw)
            return
        digest_.update(repr(raw).encode())
        key = digest_.hexdigest()
        if key not in known:
            before = proof.leaves
            try:
                ADD(proof, raw)
            except Rejected as why:
                known[key] = why.args, 0  # itself it would keep all that its traceback names
                raise
            known[key] = proof.lines[len(proof.lines)], proof.leaves - before
            return
        found, leaves = known[key]
        if isinstance(found, tuple):
            raise Rejected(*found)
        proof.lines[len(proof.lines) + 1] = found
        proof.leaves += leaves

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Proof, "add", add)
        patch.setattr(ultibound.checker, "read_statement", read)
        yield
