"""Gain intervals: every gain between is proved, the nearest refuted ones lie just outside (proofs/sensitivity-gain.md)."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import pytest

from tests.published.test_published import PENDULUM, require
from ultibound.certificate.certificate import Certificate
from ultibound.claim import ClaimError, parse_claim
from ultibound.prove import prove

LOW, HIGH = Fraction("0.175242284587287722032189373125"), Fraction("0.523521588879754868429448412495")
DEADBEAT = Fraction("0.349381936733521295230818892810")


def interval(text: str, gain: str = "kappa") -> tuple[Certificate, dict[str, Any]]:
    certificate = prove(parse_claim(text, {}, {}, "claim.toml"), gain_interval=gain)
    (found,) = certificate.results["gain_intervals"]
    assert found["gain"] == gain
    return certificate, found


def ends(pair: list[str | None]) -> tuple[Fraction, Fraction]:
    return Fraction(pair[0] or 0), Fraction(pair[1] or 0)


def test_the_pendulums_interval_is_that_of_the_formula() -> None:
    """Kajita & Tani, ICRA 1991 (bibliographic data looked up): contracting if and only if κ lies between tanh(ωT/2)/ω
    and coth(ωT/2)/ω; digits own computation."""
    text = PENDULUM.format(requirements=require("gain < 1")).replace("gap = 1e-9", "gap = 1e-3")
    certificate, found = interval(text)
    assert certificate.proved and found["set"] in ("region", None)
    inner, outer = ends(found["inner"]), ends(found["outer"])
    assert outer[0] <= LOW <= inner[0] <= inner[1] <= HIGH <= outer[1]
    assert inner[0] - outer[0] <= LOW / 500 and outer[1] - inner[1] <= HIGH / 500
    assert inner[0] - LOW <= Fraction(1, 1000) and HIGH - inner[1] <= Fraction(1, 1000)


def test_gains_that_contract_and_the_best_of_them() -> None:
    """The foot is that of the nominal gait and κ times the error: contracting for κ in (0, 2/s), deadbeat at 1/s, s = ω sinh ωT."""
    text = PENDULUM.format(requirements=require("gain < 1")).replace("gap = 1e-9", "gap = 1e-3")
    text = text.replace('foot = "kappa*v"', 'shift = "kappa*v"\nfoot = "v*(cosh(w*T) - 1)/(w*sinh(w*T)) + shift"')
    text = text.replace("kappa = 0.33", "kappa = 0.1").replace("format = 1", 'format = 1\ncorrection = ["shift"]')
    certificate, found = interval(text)
    s = Fraction("5.74251750061066589664506249901")
    low, high = ends(found["contracting"])
    assert low == 0 and 0 <= 2 / s - high <= Fraction(1, 10**6)
    assert abs(Fraction(found["best"]["value"]) - 1 / s) <= Fraction(1, 10**6) and 0 <= Fraction(
        found["best"]["gain"]
    ) <= Fraction(1, 10**5)
    assert "sector" in certificate.results["routes"]
    inner, outer = ends(found["inner"]), ends(found["outer"])
    assert outer[0] <= 0 <= inner[0] <= inner[1] <= 2 / s <= outer[1] and outer[1] - inner[1] <= Fraction(1, 500)


@pytest.mark.parametrize(
    ("change", "gain", "said"),
    [
        (("", ""), "kapa", "kappa"),
        (('T = { range = [0.4, 0.4] }', 'T = { range = ["0.4 - kappa/100", 0.4] }'), "kappa", "range"),
        (('w = "sqrt(g/z)"', 'w = "sqrt(g/z)*2**kappa/2**kappa"'), "kappa", "kappa"),
    ],
)  # fmt: skip
def test_what_has_no_interval_is_refused(change: tuple[str, str], gain: str, said: str) -> None:
    text = (
        PENDULUM.format(requirements=require("gain < 1"))
        .replace("kappa = 0.33", "kappa = 1")
        .replace('foot = "kappa*v"', 'foot = "0.33*kappa*v"')
    )
    with pytest.raises(ClaimError) as why:
        prove(parse_claim(text.replace(*change) if change[0] else text, {}, {}, "claim.toml"), gain_interval=gain)
    assert said in str(why.value)
