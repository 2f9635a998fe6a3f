"""The route sector: exact bands, clipping, other routes beside it, and what it is refused for (proofs/sector.md)."""

from __future__ import annotations

import os
from fractions import Fraction
from typing import Any

import mpmath
import numpy as np
import pytest

from tests.conftest import assert_encloses, ends, proved
from tests.stances import GAITS, HEIGHT, LIBRARY, PUSHING, stance
from ultibound.checker.derive import Derivation, Domain, Unprovable
from ultibound.checker.statement import read_statement
from ultibound.claim import Bad, ClaimError, parse_claim
from ultibound.claim.obligations import Domain as Region
from ultibound.claim.obligations import Obligations

LONG = bool(os.environ.get("ULTIBOUND_LONG"))
WHOLE = Domain(False, Fraction(0), (Fraction(0), Fraction(0)))


def text(
    step: str,
    define: str,
    asked: list[str],
    uncertain: str = "",
    state: str = "[-1, 1]",
    target: str = "0",
    top: str = 'correction = ["shift"]',
    effort: str = "gap = 1e-3",
) -> str:
    requires = "".join(f'[[require]]\nthat = "{x}"\n' for x in asked)
    return (
        f'format = 1\n{top}\n[state]\nv = {state}\n[uncertain]\n{uncertain}\n[define]\n{define}\n[next]\nv = "{step}"\n'
        f'[target]\nv = "{target}"\n{requires}[effort]\n{effort}\n'
    )


def verdicts(results: dict[str, Any]) -> list[str]:
    return [r["verdict"] for r in results["requirements"]]


def test_gain_of_a_pendulum_is_that_of_its_band() -> None:
    """v⁺ = v − ω sinh ωT (κ (v − v*) + δ): k = max |1 − κ ω sinh ωT| at the ends, ε = sup |ω sinh ωT δ|; mpmath at 60 digits."""
    claim = text(
        "v - w*sinh(w*T)*foot", 'w = "sqrt(9.81/z)"\nshift = "0.1*(v - target(v))"\nfoot = "shift + placed"',
        ["gain <= 0.3", "settles"], "T = [0.36, 0.40]\nz = [0.60, 0.64]\nplaced = [-0.005, 0.005]", "[-0.2, 1.0]", "0.4",
        'correction = ["shift"]\nroute = "sector"', "gap = 1e-8",
    )  # fmt: skip
    results = proved(claim).results
    with mpmath.workdps(60):
        w0, w1 = (mpmath.sqrt(mpmath.mpf("9.81") / mpmath.mpf(z)) for z in ("0.64", "0.60"))
        s0, s1 = w0 * mpmath.sinh(w0 * mpmath.mpf("0.36")), w1 * mpmath.sinh(w1 * mpmath.mpf("0.40"))
        k, rest = max(abs(1 - s0 / 10), abs(1 - s1 / 10)), s1 * mpmath.mpf("0.005")
        exact = [mpmath.nstr(x, 40) for x in (k, rest, rest / (1 - k))]
    assert verdicts(results) == ["proved", "proved"] and results["route"] == "sector"
    for name, value in zip(("gain", "residual", "bound"), exact, strict=True):
        assert_encloses(results["routes"]["sector"][name], value, "1e-7")


@pytest.mark.parametrize("limit, gain, asked", [
    ("2", Fraction(3, 4), ["proved", "refuted", "proved", "proved"]),  # beyond any correction: never active
    ("1/4", Fraction(1), ["refuted", "refuted", "proved", "refuted"]),
])  # fmt: skip
def test_a_clip_counts_wherever_it_may_be_active(limit: str, gain: Fraction, asked: list[str]) -> None:
    claim = text(
        "v - p*shift", f'shift = "clip(v/2, -{limit}, {limit})"', ["gain <= 0.75", "gain < 0.75", "gain <= 1", "gain < 1"],
        "p = [0.5, 0.75]", top='correction = ["shift"]\nroute = "sector"',
    )  # fmt: skip
    results = proved(claim).results
    assert ends(results["gain"]) == (gain, gain)
    assert verdicts(results) == asked


def test_it_contracts_where_the_slope_does_not() -> None:
    """∂F/∂shift = −1 − 0.4 sin 20 v changes quickly with the state: its slope counts for slope and split, not here."""
    claim = text(
        "v - (1 + 0.4*sin(20*v))*shift", 'shift = "v/2"', ["gain < 0.71", "gain < 0.69"], state="[-0.5, 0.5]",
    )  # fmt: skip
    results = proved(claim).results
    assert ends(results["routes"]["slope"]["gain"])[0] > 1 and ends(results["routes"]["split"]["gain"])[0] > 1
    assert Fraction(7, 10) <= ends(results["routes"]["sector"]["gain"])[1] < Fraction(7005, 10000)
    assert results["route"] == "sector" and verdicts(results) == ["proved", "refuted"]


def test_what_no_route_can_do_is_refuted() -> None:
    """A gain of 1/2 by every route; with a second correction the sector route does not apply and is not waited for."""
    for top, routes in (
        ('correction = ["shift"]', {"slope", "split", "sector", "curve"}),
        ('correction = ["shift", "g"]', {"slope", "split", "curve"}),
    ):
        results = proved(
            text("v - shift + d", 'shift = "v/2"\ng = "0"', ["gain < 0.5", "gain <= 0.5"], "d = [-0.1, 0.1]", top=top)
        ).results
        assert set(results["routes"]) == routes and verdicts(results) == ["refuted", "proved"]


def test_a_correction_away_from_nothing_at_the_target_costs_its_effect() -> None:
    """shift(x*) = 1/10 and c up to 3/4: ε = sup |N − v| + 3/40, k = 1 − 1/2·1/2."""
    results = proved(
        text("v - p*shift + d", 'shift = "v/2 + 1/10"', ["settles"], "p = [0.5, 0.75]\nd = [-0.1, 0.1]")
    ).results
    assert ends(results["routes"]["sector"]["gain"])[1] == Fraction(3, 4)
    assert ends(results["routes"]["sector"]["residual"])[1] == Fraction(7, 40)


def refused(claim: str, said: str, data: dict[str, str] | None = None) -> None:
    """The search has no obligations for the route, nor has the checker."""
    with pytest.raises(Bad):
        Obligations(parse_claim(claim, {}, data or {}, "c")).sector(
            Region("region", Fraction(0), (Fraction(0), Fraction(0)))
        )
    derivation = Derivation(read_statement(claim, {}, data or {}))
    with pytest.raises(Unprovable, match=said):
        derivation.meaning("sector-sensitivity[v]", WHOLE)
    asked = claim.replace('correction = ["', 'route = "sector"\ncorrection = ["')
    with pytest.raises(ClaimError, match="route: sector is not known here"):
        proved(asked, data=data)


def test_a_correction_that_follows_the_stance_is_refused() -> None:
    claim = stance(step="xd - late", define='foot = "0.16*v"\nlate = "0.1*(xd - v_cmd)"', top='correction = ["late"]')
    refused(claim, "follows the stance")


def test_a_correction_that_a_signal_answers_is_refused() -> None:
    claim = stance(
        rates='y = "-y + gust*(1 + T)"', start='y = "v - 0.2*shift"', duration="0.4 + 0.1*shift", step="y", target="0",
        define='shift = "0.1*v"', state="[-0.5, 0.5]", uncertain="T = [0.3, 0.4]\ngust = { range = [-0.1, 0.1], within = true }",
        top='correction = ["shift"]',
    )  # fmt: skip
    refused(claim, "may take any course")


def test_a_correction_that_the_rates_rest_on_is_refused() -> None:
    claim = stance(rates='y = "-y + shift"', start='y = "v"', step="y", define='shift = "-0.1*(v - v_cmd)"',
                   top='correction = ["shift"]')  # fmt: skip
    refused(claim, "rest on what is varied here")


def test_a_gait_chosen_by_the_state_does_not_keep_signals_from_it() -> None:
    """The slopes hold an effect of the gust that follows the state; the sensitivity by the foot does not."""
    claim = stance(
        rates=PUSHING + ' + gust"', define=HEIGHT, top='correction = ["shift"]',
        rest="[constants]\ng = 9.81\n" + LIBRARY.replace('"v_cmd"', '"v"') + "[effort]\ngap = 0.05\n", state="[0.35, 0.5]", target="0.42",
        uncertain="T = [0.40, 0.405]\nv_cmd = [0.42, 0.421]\nloss = [0.024, 0.025]\ngust = { range = [-0.01, 0.01], within = true }",
    )  # fmt: skip
    derivation = Derivation(read_statement(claim, {}, {"gaits.csv": GAITS}))
    assert derivation.loose("slope") and derivation.meaning("sector-sensitivity[v]", WHOLE).by == "shift"


@pytest.mark.parametrize("seed", range(100 if LONG else 8))
def test_no_step_leads_further_than_proved(seed: int) -> None:
    """|F(x, w) − x*| ≤ k|x − x*| + ε at random states and uncertain values, for random corrections and maps."""
    rng = np.random.default_rng(seed)
    a, b, c, kappa, limit = (
        float(f"{x:.3f}") for x in rng.uniform([0.2, 0.0, 1.0, 0.2, 0.1], [0.9, 0.4, 6.0, 0.9, 1.5])
    )
    shape = rng.choice(
        [
            "kappa*(v - h)",
            "clip(kappa*(v - h), -limit, limit)",
            "kappa*tanh(v - h) + 0.02*p",
            "kappa*abs(v - h) + kappa*(v - h)",
        ]
    )
    shape = str(shape).replace("kappa", str(kappa)).replace("limit", str(limit))
    step = f"v + {b}*p*p - ({a} + {b}*sin({c}*v) + {b}*p)*shift - {b}*shift**2"
    claim = text(
        step, f'shift = "{shape}"', ["value(v)"], "p = [-0.2, 0.3]\nh = { range = [-0.1, 0.1], held = true, change = 0.01 }",
        target="h", top='correction = ["shift"]\nroute = "sector"', effort="gap = 0.2\ncells = 60",
    )  # fmt: skip
    results = proved(claim).results
    route = results["routes"].get("sector")
    if route is None or results["set"] is None:
        return
    k, rest = (float(ends(route[x])[1]) for x in ("gain", "residual"))
    v, p, h = rng.uniform(-1, 1, 4000), rng.uniform(-0.2, 0.3, 4000), rng.uniform(-0.1, 0.1, 4000)
    radius = float(results["radius"]["lower"])
    inside = np.abs(v - h) <= radius if "ball" in results["set"]["kind"] else np.full(len(v), True)
    scope = {"v": v, "p": p, "h": h, "clip": np.clip, "abs": np.abs, "tanh": np.tanh, "sin": np.sin}
    scope["shift"] = eval(shape, {}, scope)
    onward = eval(step, {}, scope)
    far = np.abs(onward - h) + 0.01  # and the target moves by as much
    assert (far <= k * np.abs(v - h) + rest + 1e-12)[inside].all()
