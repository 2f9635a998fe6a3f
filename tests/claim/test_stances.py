"""Continuous stances that cannot be proved yet or at all: one clear line each, and exit status 2 from the command."""

from __future__ import annotations

import pytest

from tests.stances import GAITS, stance
from ultibound.claim import ClaimError, parse_claim
from ultibound.prove import prove

PENDULUM = 'x = "xd"\nxd = "9.81/0.6*x"'
GUST = "T = [0.39, 0.4]\nloss = [0, 0.01]\n"
HELD = "v_cmd = { range = [0.4, 0.5], held = true }\ngust = { range = [-0.1, 0.1], within = true }"


@pytest.mark.parametrize("text, place, said", [
    (stance(rates='x = "xd"\nxd = "9.81/0.6*sin(x)"'), "dynamics.rate.xd", "not linear"),
    (stance(rates='x = "xd"\nxd = "x*xd"'), "dynamics.rate.xd", "not linear"),
    (stance(rates='x = "xd"\nxd = "(9.81 + dt(dt(abs(t - 0.1))))/0.6*x"'), "dynamics.rate", "abs"),
    (stance(rates='x = "xd"\nxd = "dt(xd)"'), "dynamics.rate(xd)", "rests on itself"),
    (stance(rates='x = "xd"\nxd = "gust*x"', uncertain=GUST + HELD), "dynamics.rate", "may only be added"),
    (stance(rates='x = "xd"\nxd = "gust**2"', uncertain=GUST + HELD), "dynamics.rate", "may only be added"),
    (stance(rates='x = "xd"\nxd = "-x + gust"', uncertain=GUST + HELD), "dynamics.rate", "both directions"),
    (stance(rates='x = "xd + gust"\nxd = "x - gust"', uncertain=GUST + HELD), "dynamics.rate", "both directions"),
    (stance(start='x = "-foot"\nxd = "v + gust"', uncertain=GUST + HELD), "uncertain.gust", "may only stand in dynamics.rate"),
    (stance(step="xd + gust", uncertain=GUST + HELD), "uncertain.gust", "may only stand in dynamics.rate"),
    (stance(step="xd + 0*x", requires=("push(v, during) >= 0",)), "require[1]", "has no place"),
    (stance(rates='x = "xd - x"\nxd = "x - xd"', requires=("push(v, during) >= 0",)), "require[1]", "without damping"),
    (stance().replace('duration = "T"', 'until = "0.1 - x"\nwithin = [0.2, 0.6]'), "dynamics", "state a duration"),
    (stance(rates='x = "xd"\nxd = "9.81/(t - 0.2)*x"'), "dynamics.rate", "division by zero"),
    (stance(rates='x = "xd"\nxd = "sqrt(0.1 - t)*x"'), "dynamics.rate", "root of a negative number"),
])  # fmt: skip
def test_what_cannot_be_proved_is_said_in_one_line(text: str, place: str, said: str) -> None:
    with pytest.raises(ClaimError) as caught:
        prove(parse_claim(text, {}, {"gaits.csv": GAITS} if "gaits.csv" in text else {}, "claim.toml"))
    line = str(caught.value)
    assert line.startswith(f"claim.toml: {place}: ") and said in line and "\n" not in line


def test_a_stance_of_no_duration_has_no_set() -> None:
    """T down to 0: nothing is proved of it, and nothing crashes."""
    text = stance(uncertain="T = [0, 0.4]\nloss = [0, 0.01]\nv_cmd = { range = [0.4, 0.5], held = true }")
    results = prove(parse_claim(text, {}, {}, "claim.toml")).entries["results"]
    assert results["set"] is None and results["requirements"][0]["verdict"] == "undecided"


def test_a_leg_that_would_have_to_pull_has_no_set() -> None:
    """Height 0.6 + 2 t², g + z'' > 0; with 0.6 − 6 t² the numerator is negative and so is what the leg would push."""
    for sign, kept in ((1, True), (-6, False)):
        rates = 'x = "xd"\nxd = "(9.81 + dt(dt(h)))/h*x"'
        text = stance(rates=rates, define=f'foot = "0.16*v + 0.08*(v - v_cmd)"\nh = "0.6 + {sign}*t**2"',
                      uncertain="T = [0.20, 0.21]\nloss = [0, 0.01]\nv_cmd = { range = [0.4, 0.5], held = true }")  # fmt: skip
        results = prove(parse_claim(text, {}, {}, "claim.toml")).entries["results"]
        assert (results["set"] is not None) == kept
