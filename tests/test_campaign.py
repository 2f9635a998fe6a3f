"""A seeded campaign of random claims against trajectories steered at their bounds (tests/campaign.py)."""

from __future__ import annotations

import os
from collections.abc import Callable

import pytest

from tests.campaign import Tally, run

LONG = bool(os.environ.get("ULTIBOUND_LONG"))
FIRST, CLAIMS, BLOCK = (0, 600, 10) if LONG else (20, 20, 10)  # 20: every kind of corner, route and target once


@pytest.fixture(scope="module")
def tally() -> Tally:
    return Tally()


@pytest.mark.parametrize("first", range(FIRST, FIRST + CLAIMS, BLOCK))
def test_nothing_simulated_goes_beyond_what_is_proved(first: int, tally: Tally) -> None:
    for seed in range(first, first + BLOCK):
        run(seed, tally)


def test_most_claims_that_contract_get_bounds(tally: Tally, record_property: Callable[[str, str], None]) -> None:
    """At least four in five of the claims that simulation shows to contract; a million steps for 60 claims."""
    record_property("table", tally.table())
    assert tally.steps >= 10**6 * CLAIMS / 60
    assert tally.contracting > CLAIMS / 4
    assert tally.bounded >= 0.8 * tally.contracting
