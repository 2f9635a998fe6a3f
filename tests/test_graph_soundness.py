"""A seeded campaign of random claims of two and three stances against trajectories steered at their bounds."""

from __future__ import annotations

import os
from collections.abc import Callable

import pytest

from tests.graph_campaign import Tally, run

LONG = bool(os.environ.get("ULTIBOUND_LONG"))
FIRST, CLAIMS, BLOCK = (0, 180, 9) if LONG else (18, 9, 9)  # 9: each number of states with each shape of map once


@pytest.fixture(scope="module")
def tally() -> Tally:
    return Tally()


@pytest.mark.parametrize("first", range(FIRST, FIRST + CLAIMS, BLOCK))
def test_nothing_simulated_goes_beyond_what_is_proved(first: int, tally: Tally) -> None:
    for seed in range(first, first + BLOCK):
        run(seed, tally)


@pytest.mark.parametrize("seed", range(2, 180, 7) if LONG else (3,))
def test_nor_with_several_steps_taken_together(seed: int) -> None:
    """Two and three steps: every bound holds at every step, not at the ends of horizons alone."""
    run(seed, Tally(), 2 + seed % 2)


def test_most_claims_that_contract_get_bounds(tally: Tally, record_property: Callable[[str, str], None]) -> None:
    """At least three in five of the claims that simulation shows to contract."""
    record_property("table", tally.table())
    assert tally.contracting > CLAIMS / 2
    assert tally.bounded >= tally.contracting * 3 / 5
