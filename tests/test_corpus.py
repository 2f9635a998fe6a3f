"""One corpus through both readers: the same outcome, quickly, and the same values where accepted."""

import random
import time
from fractions import Fraction

import pytest

from tests.corpus import CASES, Case
from ultibound.checker.grammar import Refused
from ultibound.checker.model import Statement
from ultibound.checker.statement import read_statement
from ultibound.claim import Claim, ClaimError, parse_claim


def test_the_corpus_is_large() -> None:
    accepted = sum(c.accepted for c in CASES)
    assert accepted >= 75 and len(CASES) - accepted >= 75


@pytest.mark.parametrize(
    "case", CASES, ids=[f"{k}-{c.name[:40]}".encode("ascii", "replace").decode() for k, c in enumerate(CASES)]
)
def test_both_readers_agree(case: Case) -> None:
    start = time.process_time()
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
    assert time.process_time() - start < 2
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


# Constant expressions at random: numbers of all sizes, every function, both readers.

HEAD = "format = 1\nstate = { x = [0, 1] }\nnext = { x = 0 }\ntarget = { x = 0 }\n[constants]\n"
FUNCTIONS = ("sqrt", "exp", "log", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh", "abs")


def random_number(rng: random.Random) -> str:
    size = rng.choice((0, 0, 0, 1, 2, 5, 50, 500, 3000, 6020, 9999))
    exponent = rng.randint(-size, size)
    return rng.choice(("pi", "0", "1", f"{rng.randint(2, 99)}", f"{rng.randint(2, 9)}e{exponent}", f"1/{rng.randint(3, 99)}e{exponent}", f"{rng.randint(0, 2)}.{rng.randint(0, 99)}"))  # fmt: skip


def random_expression(rng: random.Random, depth: int) -> str:
    if depth == 0 or rng.random() < 0.15:
        return random_number(rng)
    parts = [random_expression(rng, depth - 1) for _ in range(rng.choice((2, 2, 3, 4)))]
    kind = rng.random()
    if kind < 0.4:
        return f"({parts[0]}) {rng.choice('+-*/')} ({parts[1]})"
    if kind < 0.75:
        return f"{rng.choice(FUNCTIONS)}({parts[0]})"
    if kind < 0.85:
        return f"({parts[0]})**{rng.choice(('2', '3', '-1', '0.5', '-1.5', '0', '64', '-64', '(7/2)'))}"
    if kind < 0.9:
        return f"-({parts[0]})"
    name = rng.choice(("min", "max", "bezier", "clip"))
    return f"{name}({', '.join([*parts, '1'][: 3 if name == 'clip' else 4])})"


def test_both_readers_give_random_constants_the_same_value() -> None:
    rng = random.Random(20_000)
    refused = inexact = close = 0
    for _ in range(400):
        text = random_expression(rng, rng.randint(1, 4))
        c = f'{HEAD}c = "{text}"\n'
        found = []
        for read, fault in (
            (lambda t: parse_claim(t, {}, {}, "c"), ClaimError),
            (lambda t: read_statement(t, {}, {}), Refused),
        ):
            try:
                found.append(read(c).values["c"])
            except fault as why:
                found.append(str(why))
        (mine, theirs) = found
        assert isinstance(mine, str) == isinstance(theirs, str), (text, mine, theirs)
        if isinstance(mine, str) or isinstance(theirs, str):
            refused += 1
            continue
        assert mine[0] <= theirs[1] and theirs[0] <= mine[1], text
        assert (mine[0] == mine[1]) == (theirs[0] == theirs[1]), text
        if mine[0] < mine[1]:
            inexact += 1
            unit = max(Fraction(1), abs(mine[0])) / 2**150
            widths = mine[1] - mine[0], theirs[1] - theirs[0]
            assert max(widths) <= 2**10 * min(widths) + unit, text
            close += max(widths) <= unit
    assert refused > 60 and inexact > 150 and close > 0.9 * inexact, (refused, inexact, close)
