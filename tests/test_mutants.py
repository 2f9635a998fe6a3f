"""Every comparison, sign and rounding direction of the checker is held to by some check (tests/mutants.py).

A seeded sample each time; with ULTIBOUND_LONG=1 all mutants of these modules, and a table of what became of them
(`ULTIBOUND_LONG=1 python -m pytest tests/test_mutants.py`).
"""

from __future__ import annotations

import os
import random
from collections.abc import Callable

import pytest

from tests.checker import (
    test_absorbed_boundaries,
    test_attracting_boundaries,
    test_boundaries,
    test_branches_boundaries,
    test_cycle_boundaries,
    test_gains_boundaries,
    test_graph_boundaries,
    test_horizon_boundaries,
    test_inequality,
    test_matrices,
    test_periodic_boundaries,
    test_product_boundaries,
    test_pushes_boundaries,
    test_reading,
    test_run_boundaries,
    test_several_boundaries,
    test_squares_boundaries,
    test_stance_boundaries,
    test_vertices_boundaries,
    test_ways_boundaries,
)
from tests.mutants import EQUIVALENT, Battery, Copies, Mutant, campaign, mutants, table

LONG = os.environ.get("ULTIBOUND_LONG") == "1"
PROOFS = (
    "rules",
    "theorems",
    "courses",
    "results",
    "holding",
    "derive",
    "sector",
    "horizon",
    "document",
    "__init__",
    "ranges",
    "forms",
    "terms",
    "exact",
    "reals",
    "names",
)
STANCES = ("calculus", "motion", "pushes", "signals", "models", "rates", "flows", "expansions")
NORMS = ("matrices", "inequality")
SEVERAL = ("jacobians", "several", "outcomes", "periodic", "products", "absorbed", "attracting", "vertices")
GRAPHS = ("graph", "graph_outcomes", "stance_outcomes", "cycles", "cycle_outcomes", "runs")
SQUARES = ("squares", "polynomials")
GAINS = ("gains",)
READING = ("grammar", "numerals", "statement", "tables", "scope", "command")
SAMPLE, SEED = 4, 20260101
MOST_EQUIVALENT = 0.05


@pytest.fixture(scope="module")
def copies() -> Copies:
    return Copies()


@pytest.fixture(scope="module")
def found(copies: Copies) -> dict[str, list[Mutant]]:
    return {
        m: mutants(m, copies.source[m]) for m in PROOFS + STANCES + NORMS + SEVERAL + GRAPHS + SQUARES + GAINS + READING
    }


@pytest.fixture(scope="module")
def batteries(copies: Copies) -> dict[str, Battery]:
    """Of each module."""
    squares_cases = {f"squares: {n}": q for n, q in test_squares_boundaries.CASES.items()}
    pushes_cases = {f"pushes: {n}": q for n, q in test_pushes_boundaries.CASES.items()}
    reading = Battery(test_reading.CASES, 400)
    stances = Battery(test_stance_boundaries.CASES | pushes_cases | squares_cases)
    norms = Battery(test_matrices.CASES | test_inequality.CASES)
    horizon_cases = {f"horizon: {n}": q for n, q in test_horizon_boundaries.CASES.items()}
    orbits = (
        test_periodic_boundaries.CASES
        | test_product_boundaries.CASES
        | test_absorbed_boundaries.CASES
        | test_attracting_boundaries.CASES
        | test_run_boundaries.CASES
        | {f"vertices: {n}": q for n, q in test_vertices_boundaries.CASES.items()}
        | {f"branches: {n}": q for n, q in test_branches_boundaries.CASES.items()}
    )
    several = Battery(test_several_boundaries.CASES | orbits | horizon_cases | pushes_cases | squares_cases)
    stance_cases = {f"stance: {n}": q for n, q in test_stance_boundaries.CASES.items()}
    graphs = Battery(
        test_graph_boundaries.CASES
        | test_cycle_boundaries.CASES
        | test_ways_boundaries.CASES
        | test_run_boundaries.CASES
        | pushes_cases
    )
    several_cases = {f"several: {n}": q for n, q in test_several_boundaries.CASES.items()}
    graph_cases = {f"graph: {n}": q for n, q in test_graph_boundaries.CASES.items()}
    gain_cases = {f"gains: {n}": q for n, q in test_gains_boundaries.CASES.items()}
    attracting_cases = {
        f"attracting: {n}": q for n, q in (test_attracting_boundaries.CASES | test_vertices_boundaries.CASES).items()
    }
    run_cases = {f"runs: {n}": q for n, q in test_run_boundaries.CASES.items()}
    more = run_cases | several_cases | graph_cases | horizon_cases | squares_cases | gain_cases | attracting_cases
    proofs = Battery(test_boundaries.CASES | stance_cases | more)
    of_norms, of_reading = dict.fromkeys(NORMS, norms), dict.fromkeys(READING, reading)
    of_several = dict.fromkeys(SEVERAL, several) | dict.fromkeys(GRAPHS, graphs)
    of_several |= dict.fromkeys(GAINS, Battery(test_gains_boundaries.CASES))
    of_several |= dict.fromkeys(SQUARES, Battery(test_squares_boundaries.CASES))
    return dict.fromkeys(PROOFS, proofs) | dict.fromkeys(STANCES, stances) | of_norms | of_several | of_reading


def test_each_equivalent_stands_in_the_source(found: dict[str, list[Mutant]]) -> None:
    keys = {m.key for several in found.values() for m in several}
    gone = [key for key in EQUIVALENT if key not in keys]
    assert not gone, f"explained as equivalent, and no longer there: {gone}"
    several = [m for of_module in found.values() for m in of_module]
    assert sum(m.key in EQUIVALENT for m in several) <= MOST_EQUIVALENT * len(several)


def test_each_change_is_a_change(found: dict[str, list[Mutant]]) -> None:
    for several in found.values():
        assert several and all(m.key[2] != m.key[3] for m in several)


def test_a_sample_is_noticed(copies: Copies, found: dict[str, list[Mutant]], batteries: dict[str, Battery]) -> None:
    rng = random.Random(SEED)
    every = [m for several in found.values() for m in several if m.key not in EQUIVALENT]
    chosen = rng.sample(every, SAMPLE)
    for m in chosen:
        battery = batteries[m.key[0]]
        by = battery.noticed(copies, {m.key[0]: m.code()})
        assert by is not None, f"seed {SEED}: no check notices {m}"
        assert by == "import" or Battery({by: battery.questions[by]}).noticed(copies, {}) is None, (
            f"{by} notices the unchanged copy too"
        )


@pytest.mark.skipif(not LONG, reason="some minutes: ULTIBOUND_LONG=1")
def test_all_are_noticed(
    copies: Copies,
    found: dict[str, list[Mutant]],
    batteries: dict[str, Battery],
    record_property: Callable[[str, str], None],
) -> None:
    assert all(battery.noticed(copies, {}) is None for battery in {id(b): b for b in batteries.values()}.values())
    tallies = [campaign(copies, batteries[module], module, several) for module, several in found.items()]
    explained = [" ".join(("equivalent:", *key, "--", EQUIVALENT[key])) for t in tallies for key in t.equivalents]
    record_property("table", "\n".join([table(tallies), *explained]))
    assert not any(t.survivors or t.stale for t in tallies), table(tallies)
