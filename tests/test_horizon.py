"""Several steps taken together: a seeded campaign, and linear maps whose exact limit sets are known."""

from __future__ import annotations

import os
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

from tests.conftest import proved
from tests.horizon_campaign import KINDS, Tally, run

LONG = bool(os.environ.get("ULTIBOUND_LONG"))
QUICK = [0, 1, 2, 3, 5, 9, 15, 20]  # every kind once; one to three states, horizons of 2, 3 and 5
SEEDS = list(range(100)) if LONG else QUICK


@pytest.fixture(scope="module")
def tally() -> Tally:
    return Tally()


@pytest.mark.parametrize("seed", SEEDS)
def test_no_step_goes_beyond_what_is_proved(seed: int, tally: Tally) -> None:
    run(seed, tally)


def test_most_claims_settle(tally: Tally, record_property: Callable[[str, str], None]) -> None:
    record_property("table", tally.table())
    assert tally.claims == len(SEEDS) and set(tally.ratios) == set(KINDS)
    assert tally.settled >= 0.7 * tally.claims
    assert sum(tally.verdicts[v] for v in ("proved", "refuted")) > 0.7 * sum(tally.verdicts.values())


TURNING = [["3/5", "-11/20"], ["1/2", "2/5"]]  # turns and shrinks: |λ|² = 103/200
SLOW = [["9/10", "2/5"], ["-1/10", "2/5"]]  # 0.8 and 0.5; in the sum of magnitudes a step does not shrink


def limits(rows: list[list[str]], size: list[str]) -> list[float]:
    """Σ_k |Aᵏ| w, state by state, to within rounding."""
    a, w = (np.array([float(Fraction(x)) for x in each]) for each in ([x for row in rows for x in row], size))
    a = a.reshape(len(rows), -1)
    return [float(x) for x in sum(np.abs(np.linalg.matrix_power(a, k)) @ w for k in range(250))]


def claim(rows: list[list[str]], size: list[str], horizon: int) -> str:
    body = "".join(f'{s} = "({r[0]})*x + ({r[1]})*y + d{s}"\n' for s, r in zip("xy", rows, strict=True))
    drawn = "".join(f'd{s} = ["-({w})", "{w}"]\n' for s, w in zip("xy", size, strict=True))
    ends = "[state]\nx = [-10, 10]\ny = [-10, 10]\n"
    return f"format = 1\nhorizon = {horizon}\n{ends}[uncertain]\n{drawn}[next]\n{body}[target]\nx = 0\ny = 0\n"


@pytest.mark.parametrize("rows", [TURNING, SLOW])
def test_bounds_of_linear_maps_tend_to_the_limit_set(rows: list[list[str]]) -> None:
    """Comparison of N steps bounds a state by ((1 - |Aᴺ|)⁻¹ Σ_{k<N} |Aᵏ| w)_s: Σ_k |Aᵏ| w in the limit, and never less."""
    size = ["1/20", "1/40"]
    exact, ratios = limits(rows, size), {}
    for horizon in (3, 12):
        results = proved(claim(rows, size, horizon)).results
        assert results["requirements"][0]["verdict"] == "proved"
        found = [float(Fraction(x["bound"]["upper"])) for x in results["states"].values()]
        ratios[horizon] = [b / e for b, e in zip(found, exact, strict=True)]
    assert all(1 - 1e-9 <= late <= early + 1e-9 for early, late in zip(ratios[3], ratios[12], strict=True)), ratios
    assert max(ratios[12]) <= 1.0001, ratios


def test_waiting_at_its_mark() -> None:
    """What single steps leave undecided; bounds within 1e-5 of what an orbit attains."""
    text = (Path(__file__).parents[1] / "ultibound" / "examples" / "waiting.toml").read_text()
    found = proved(text)
    assert [r["verdict"] for r in found.results["requirements"]] == ["proved"] * 7
    for figures in found.results["states"].values():
        assert 1 <= Fraction(figures["bound"]["upper"]) / Fraction(figures["bound"]["lower"]) <= 1 + Fraction(1, 10**5)
    single = proved(text.replace("horizon = 12", "horizon = 1")).results["requirements"]
    assert [r["verdict"] for r in single[1:3]] == ["undecided"] * 2
