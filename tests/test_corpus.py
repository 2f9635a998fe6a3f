"""One corpus through both readers: the same outcome, quickly, and the same values where accepted."""

import time

import pytest

from tests.corpus import CASES, Case
from ultibound.checker.grammar import Refused
from ultibound.checker.model import Statement
from ultibound.checker.statement import read_statement
from ultibound.claim import Claim, ClaimError, parse_claim


def test_the_corpus_is_large() -> None:
    accepted = sum(c.accepted for c in CASES)
    assert accepted >= 75 and len(CASES) - accepted >= 75


# Outcomes in which the checker's reader still differs from the page.
DIFFERENT = {
    f"bad: a stance with an empty name{more}": 'the checker\'s reader takes [stance.""]' for more in ("", " alone")
}
MARKED = [
    pytest.param(c, marks=pytest.mark.xfail(reason=DIFFERENT[c.name])) if c.name in DIFFERENT else c for c in CASES
]


@pytest.mark.parametrize(
    "case", MARKED, ids=[f"{k}-{c.name[:40]}".encode("ascii", "replace").decode() for k, c in enumerate(CASES)]
)
def test_both_readers_agree(case: Case) -> None:
    start = time.monotonic()
    claim: Claim | str
    statement: Statement | str
    try:
        claim = parse_claim(case.text, case.settings, case.data, "c.toml")
    except ClaimError as why:
        claim = str(why)
        assert all(line.startswith("c.toml: ") and line.isprintable() for line in claim.split("\n"))
    try:
        statement = read_statement(case.text, case.settings, case.data)
    except Refused as why:
        statement = str(why)
    assert isinstance(claim, Claim) == case.accepted, claim
    assert isinstance(statement, Statement) == case.accepted, statement
    assert time.monotonic() - start < 2
    if isinstance(claim, Claim) and isinstance(statement, Statement):
        for name in ("route", "correction", "shrink", "horizon", "metric", "gap", "cells", "seconds", "title", "notes"):
            assert getattr(claim, name) == getattr(statement, name), name
        assert list(claim.values) == list(statement.values)
        for a, b in zip(claim.values.values(), statement.values.values(), strict=True):
            assert a[0] <= b[1] and b[0] <= a[1]  # enclosures of the same number meet
            assert (a[0] == a[1]) == (b[0] == b[1])
        for mine, theirs in zip(claim.stances, statement.stances, strict=True):
            assert (mine.name, mine.then, mine.mirror) == (theirs.name, theirs.then, theirs.mirror)
            for group in ("define", "next", "target"):
                ours, others = getattr(mine, group), getattr(theirs, group)
                assert set(ours) == set(others)
                for n in ours:
                    assert [(x.op, x.args, x.value) for x in ours[n].nodes] == [
                        (x.op, x.args, x.value) for x in others[n].nodes
                    ]
        for r, q in zip(claim.requirements, statement.requirements, strict=True):
            assert (r.text, r.kind, r.state, r.by, r.relation, r.during, set(r.over), r.stance) == (
                q.text, q.kind, q.state, q.by, q.relation, q.during, set(q.over), q.stance
            )  # fmt: skip
        for lib, other in zip(claim.libraries, statement.libraries, strict=True):
            assert (lib.axes, lib.grid, dict(lib.columns)) == (other.axes, other.grid, dict(other.columns))
