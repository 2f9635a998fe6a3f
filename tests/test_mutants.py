"""Every comparison, sign and rounding direction of the checker is held to by some check (tests/mutants.py).

A seeded sample each time; with ULTIBOUND_LONG=1 all mutants of these modules, and a table of what became of them
(`ULTIBOUND_LONG=1 python -m pytest -s tests/test_mutants.py`).
"""

from __future__ import annotations

import os
import random

import pytest

from tests.checker.test_boundaries import CASES
from tests.mutants import EQUIVALENT, Battery, Copies, Mutant, campaign, mutants, table

LONG = os.environ.get("ULTIBOUND_LONG") == "1"
MODULES = (
    "rules",
    "theorems",
    "courses",
    "results",
    "holding",
    "derive",
    "document",
    "__init__",
    "ranges",
    "terms",
    "exact",
    "reals",
)
SAMPLE, SEED = 24, 20260101
MOST_EQUIVALENT = 0.05


@pytest.fixture(scope="module")
def copies() -> Copies:
    return Copies()


@pytest.fixture(scope="module")
def found(copies: Copies) -> dict[str, list[Mutant]]:
    return {m: mutants(m, copies.source[m]) for m in MODULES}


@pytest.fixture(scope="module")
def battery(copies: Copies) -> Battery:
    """What notices nothing about the unchanged copy."""
    found = Battery(CASES)
    assert found.noticed(copies, {}) is None
    return found


def test_each_equivalent_stands_in_the_source(found: dict[str, list[Mutant]]) -> None:
    keys = {m.key for several in found.values() for m in several}
    gone = [key for key in EQUIVALENT if key not in keys]
    assert not gone, f"explained as equivalent, and no longer there: {gone}"
    several = [m for of_module in found.values() for m in of_module]
    assert sum(m.key in EQUIVALENT for m in several) <= MOST_EQUIVALENT * len(several)


def test_each_change_is_a_change(found: dict[str, list[Mutant]]) -> None:
    for several in found.values():
        assert several and all(m.key[2] != m.key[3] for m in several)


def test_a_sample_is_noticed(copies: Copies, found: dict[str, list[Mutant]], battery: Battery) -> None:
    rng = random.Random(SEED)
    every = [m for several in found.values() for m in several if m.key not in EQUIVALENT]
    missed = [m for m in rng.sample(every, SAMPLE) if battery.noticed(copies, {m.key[0]: m.code()}) is None]
    assert not missed, f"seed {SEED}: no check notices\n" + "\n".join(map(str, missed))


@pytest.mark.skipif(not LONG, reason="some minutes: ULTIBOUND_LONG=1")
def test_all_are_noticed(copies: Copies, found: dict[str, list[Mutant]], battery: Battery) -> None:
    tallies = [campaign(copies, battery, module, several) for module, several in found.items()]
    print(f"\n{table(tallies)}")
    for key in [key for t in tallies for key in t.equivalents]:
        print("equivalent:", *key, "--", EQUIVALENT[key])
    assert not any(t.survivors or t.stale for t in tallies), table(tallies)
