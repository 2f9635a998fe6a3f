"""The index of theorems, their pages, the Coq sources, the obligations and the checker, held against each other."""

from __future__ import annotations

import os
import re
from pathlib import Path

import pytest

from tests import theorems
from tests.conftest import installed
from tests.theorems import (
    COQ,
    INSTALL,
    PROOFS,
    Row,
    alike,
    assumptions,
    compiled,
    letters,
    rows,
    sources,
    stated,
    unproved,
)
from ultibound.checker.rules import SHAPES

CHECKED, WEAKENED, LEFT = rows("Machine-checked"), rows("Fails without"), rows("Not machine-checked")
PAGES = {p.name: p.read_text(encoding="utf-8") for p in PROOFS.glob("*.md")}
NO_THEOREMS = {"README.md", "obligations.md"}
CHECKER = PROOFS.parent / "ultibound" / "checker"
TEXTS = sources()
STATED = {name: kind for text in TEXTS.values() for name, (kind, _) in stated(text).items()}


def names(several: list[Row]) -> list[str]:
    return [name for row in several for name in row.names]


def test_index_and_sources_have_the_same_statements() -> None:
    assert sorted(names(CHECKED)) == sorted(n for n, kind in STATED.items() if kind == "Theorem")
    assert sorted(names(WEAKENED)) == sorted(n for n, kind in STATED.items() if kind == "Example")
    assert sum(len(stated(text)) for text in TEXTS.values()) == len(STATED), "a name used twice"
    assert not names(LEFT) and all(row.names for row in (*CHECKED, *WEAKENED))


def test_every_statement_is_read_back() -> None:
    for file, text in TEXTS.items():
        for name, (_, reading) in stated(text).items():
            assert len(reading) > 20, f"{file}: no reading above {name}"


def test_sources_hold_no_assumption() -> None:
    for file, text in TEXTS.items():
        assert not unproved(text), file


@pytest.mark.parametrize(
    "spoiling", ["Admitted.", "Axiom a : False.", "Parameter n : nat.", "Proof. admit. Qed.", "Hypothesis h : False.",
                 "Unset Guard Checking.", "Notation \"x <= y\" := True.",
                 "Variable h : 0 <= k.", "Variables (f : R -> R) (h : f 0 = 1)."]
)  # fmt: skip
def test_a_spoiled_source_is_refused(spoiling: str) -> None:
    for text in TEXTS.values():
        assert unproved(f"{text}\n{spoiling}")
        assert not unproved(f"{text}\n(* {spoiling} (* nested *) *)")


@pytest.mark.parametrize("page", sorted(set(PAGES) - NO_THEOREMS))
def test_every_page_and_all_it_says_is_in_the_index(page: str) -> None:
    about = [row.pages[page] for row in (*CHECKED, *LEFT) if page in row.pages]
    assert about, "no row"
    said = set(re.findall(r"^(?:- )?\*{0,2}\((\d+′?)\)", PAGES[page], re.M))
    listed = {re.sub(r"[a-z]+$", "", n) for numbers in about for n in numbers}
    assert said == listed, f"{said ^ listed}"


@pytest.mark.parametrize("page", sorted(set(PAGES) - NO_THEOREMS))
def test_pages_name_what_is_machine_checked(page: str) -> None:
    wanted = {(name, f"coq/{file}") for file, text in TEXTS.items() for row in (*CHECKED, *WEAKENED)
              for name in row.names if page in row.pages and name in stated(text)}  # fmt: skip
    found = set()
    for paragraph in PAGES[page].split("\n\n"):
        if paragraph.startswith("**Machine-checked:**"):
            for part in re.findall(r"((?:`\w+`[^`]*?)+) in `(coq/\w+\.v)`", paragraph):
                found |= {(name, part[1]) for name in re.findall(r"`(\w+)`", part[0])}
    assert found == wanted


def test_pages_of_the_index_exist() -> None:
    assert {page for row in (*CHECKED, *WEAKENED, *LEFT) for page in row.pages} <= set(PAGES)


def test_every_rule_has_its_theorems() -> None:
    table = re.findall(r"^\| (`[^|]+) \| (`[^|]+\.md`) \|$", PAGES["obligations.md"], re.M)
    of_rules = {
        r: set(re.findall(r"`([^`]+)`", pages)) for several, pages in table for r in re.findall(r"`([^`]+)`", several)
    }
    assert set(of_rules) == set(SHAPES)
    for rule, pages in of_rules.items():
        listed = {page for row in (*CHECKED, *LEFT) if rule in row.uses for page in row.pages}
        assert pages <= listed, f"{rule}: {pages - listed} is not in the index"
    for row in (*CHECKED, *LEFT):
        assert row.uses, f"{row.statement}: used by nothing"
        for use in row.uses:
            if use in SHAPES:
                assert of_rules[use] & set(row.pages), f"{use}: {row.statement}: on none of its pages in obligations.md"
            else:
                file, _, function = use.partition(": ")
                text = (CHECKER / file).read_text(encoding="utf-8")
                assert re.search(rf"(?:def|class) {function}\b", text), f"{use}: not in the checker"


def coq() -> None:
    if installed("coqc") is None:
        if os.environ.get("ULTIBOUND_COQ") == "required":
            pytest.fail("coqc is not installed")
        pytest.skip(f"needs coqc: {INSTALL}")


def test_what_theorems_assume(tmp_path: Path) -> None:
    """All proofs hold, and no statement rests on more than what is listed; with ULTIBOUND_LONG source by source, and each
    statement on exactly that."""
    coq()
    groups, known = alike([*CHECKED, *WEAKENED]), letters()
    if os.environ.get("ULTIBOUND_LONG"):
        compiled(TEXTS, tmp_path)
        every = [(row.last, list(row.names)) for row in (*CHECKED, *WEAKENED)]
    else:
        every = list(groups.items())
    found = assumptions(TEXTS, tmp_path, [names for _, names in every])
    for (listed, names), taken in zip(every, found, strict=True):
        assert taken == {known[x] for x in re.findall(r"\b[A-Z]\b", listed)}, names


def test_what_is_not_proved_is_an_assumption(tmp_path: Path) -> None:
    coq()
    text, count = re.subn(
        r"(Theorem envelope.*?)Proof\..*?Qed\.", r"\1Admitted.", TEXTS["Bound.v"], count=1, flags=re.S
    )
    assert count == 1
    (found,) = assumptions({"Bound.v": text}, tmp_path, [["ultimate_bound"]])
    assert any(x.endswith("envelope") for x in found)
    assert not found <= set(letters().values())


def test_nothing_compiled_is_kept() -> None:
    ignored = (PROOFS.parent / ".gitignore").read_text(encoding="utf-8").split()
    assert {"*.vo", "*.vok", "*.vos", "*.glob", "*.aux"} <= set(ignored)
    assert {p.suffix for p in COQ.iterdir()} <= {".v"}


def test_the_tables_are_read_whole() -> None:
    text = (PROOFS / "README.md").read_text(encoding="utf-8")
    assert len(CHECKED) + len(WEAKENED) + len(LEFT) + len(letters()) == sum(map(len, theorems.tables(text).values()))
