"""A seeded campaign of random claims of two and three states against trajectories steered at their bounds."""

from __future__ import annotations

import os
from collections.abc import Callable

import pytest

from tests.several_campaign import KINDS, OPEN, Tally, run

LONG = bool(os.environ.get("ULTIBOUND_LONG"))
CLAIMS, BLOCK = 140 if LONG else len(KINDS), len(KINDS)


@pytest.fixture(scope="module")
def tally() -> Tally:
    return Tally()


@pytest.mark.parametrize("first", range(0, CLAIMS, BLOCK))
def test_nothing_simulated_goes_beyond_what_is_proved(first: int, tally: Tally) -> None:
    for seed in range(first, first + BLOCK):
        run(seed, tally)


def test_most_claims_that_contract_get_bounds(tally: Tally, record_property: Callable[[str, str], None]) -> None:
    """Of the claims that simulation shows to contract; the others' balls are seen to be left, but for one in twenty."""
    record_property("table", tally.table())
    assert tally.steps >= 25_000 * CLAIMS
    assert tally.contracting > CLAIMS / 2
    assert tally.bounded >= 0.8 * tally.contracting
    assert tally.unbounded[OPEN] <= 0.05 * tally.contracting
