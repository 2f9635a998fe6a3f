"""Gain intervals: every gain between is proved, the nearest refuted ones lie just outside (proofs/sensitivity-gain.md)."""

from __future__ import annotations

import json
from collections.abc import Callable
from fractions import Fraction
from typing import Any

import pytest

from tests.published.test_published import PENDULUM, require
from tests.test_obligations import spelled_out
from ultibound.certificate.certificate import Certificate
from ultibound.checker import check, verified
from ultibound.checker.derive import Derivation, Domain
from ultibound.checker.document import digest
from ultibound.checker.gains import narrowed as statement_narrowed
from ultibound.checker.statement import read_statement
from ultibound.checker.theorems import Piece
from ultibound.claim import ClaimError, parse_claim
from ultibound.claim.obligations import Domain as Region
from ultibound.claim.obligations import Obligations
from ultibound.claim.provable import narrowed
from ultibound.prove import gains, prove

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


SMALL = """format = 1
correction = ["shift"]
[gains]
kappa = 1.5
[state]
v = [-1, 1]
[uncertain]
p = ["1/2", "3/4"]
d = [-0.1, 0.1]
[define]
shift = "kappa*v"
[next]
v = "v - p*(shift + kappa*d)"
[target]
v = 0
[[require]]
that = "gain <= 0.75"
[[require]]
that = "residual <= 0.2"
over = { d = [-0.11, 0.1] }
"""


def test_pieces_hold_what_requirements_over_ranges_of_their_own_rest_on(monkeypatch: pytest.MonkeyPatch) -> None:
    """|1 − pκ| ≤ 3/4 for κ in [1/2, 7/3], and 3/4·0.11 κ ≤ 1/5 for κ ≤ 80/33: the gain decides at both ends."""
    monkeypatch.setattr(gains, "NEAR", Fraction(1, 100))
    certificate, found = interval(SMALL)
    proves = [line["proves"] for line in certificate.entries["proof"]]
    assert "gains[1]" in proves and any(x.startswith("gains[1]:over[2]:") for x in proves)
    inner, outer = ends(found["inner"]), ends(found["outer"])
    assert outer[0] < Fraction(1, 2) <= inner[0] < inner[1] <= Fraction(7, 3) < outer[1]
    assert inner[0] - outer[0] <= Fraction(1, 50) and outer[1] - inner[1] <= Fraction(1, 50)
    assert ends(found["contracting"])[1] == Fraction("2.6666666666666666666") and found["best"]["value"] == "8/5"


@pytest.mark.usefixtures("lines_verified_once")
def test_a_certificate_of_an_interval_spoiled_in_one_place(monkeypatch: pytest.MonkeyPatch) -> None:
    """Every number of the interval, every piece and what it rests on, on a certificate as the search writes it."""
    monkeypatch.setattr(gains, "NEAR", Fraction(1, 20))
    certificate, found = interval(SMALL)
    entries = certificate.entries
    assert check(certificate.to_bytes()).status == "valid"

    def refused(change: Callable[[dict[str, Any]], None]) -> None:
        changed = json.loads(json.dumps(entries))
        change(changed)
        verdict = verified({**changed, "digest": digest(changed)})
        assert verdict.status == "invalid", verdict

    at = "gain_intervals"
    for key, end, way in (
        ("inner", 0, -1),
        ("inner", 1, 1),
        ("outer", 0, 1),
        ("outer", 1, -1),
        ("contracting", 0, -1),
        ("contracting", 1, 1),
    ):
        more = str(Fraction(found[key][end]) + way * Fraction(1, 1000))
        refused(lambda e, key=key, end=end, more=more: e["results"][at][0][key].__setitem__(end, more))  # type: ignore[misc]
    for key, value in (("value", "3/2"), ("gain", "1/10")):
        refused(lambda e, key=key, value=value: e["results"][at][0]["best"].update({key: value}))  # type: ignore[misc]
    for number, line in enumerate(entries["proof"]):
        if line["rule"] == "gains":
            low, high = (Fraction(line["witness"][x]) for x in ("lower", "upper"))
            band = any(x["proves"].startswith(f"{line['proves']}:sensitivity-gain") for x in entries["proof"])
            wider = [] if band else [("upper", high + 1)]  # of a band that no gain moves it is true as well
            for key, value in (("lower", low - 1), *wider, ("gain", "p"), ("gain", "kapa")):
                refused(lambda e, n=number, key=key, value=value: e["proof"][n]["witness"].update({key: str(value)}))  # type: ignore[misc]
        if line["rule"] == "sensitivity-gain":
            for key, way in (("lower", -1), ("upper", 1), ("best", 1), ("best", -1), ("gain", -1)):
                more = str(Fraction(line["concludes"][key]) + way * Fraction(1, 1000))
                refused(lambda e, n=number, key=key, more=more: e["proof"][n]["concludes"].update({key: more}))  # type: ignore[misc]
        if line["proves"].startswith("gains["):  # of another piece, or of none
            prefix, _, name = line["proves"].partition(":")
            for other in (
                (name, f"gains[99]:{name}", f"gains[{1 if prefix != 'gains[1]' else 2}]:{name}")
                if name
                else ("gains[99]",)
            ):
                refused(lambda e, n=number, other=other: e["proof"][n].update(proves=other))  # type: ignore[misc]


def test_what_was_proved_is_kept_when_interrupted(monkeypatch: pytest.MonkeyPatch) -> None:
    """Ctrl-C while pieces are tried: the claim's own proof stays, and is checked."""
    monkeypatch.setattr(gains, "NEAR", Fraction(1, 20))
    seen: list[str] = []

    def watch(stage: str, done: int, high: float) -> None:
        if stage.startswith("kappa from"):
            seen.append(stage)
            if len(seen) == 3:
                raise KeyboardInterrupt

    certificate = prove(parse_claim(SMALL, {}, {}, "claim.toml"), watch, gain_interval="kappa")
    assert certificate.interrupted and certificate.proved and len(seen) == 3
    assert check(certificate.to_bytes()).status == "valid"


def test_a_correction_that_is_no_multiple_of_the_gain_has_no_contracting_gains(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(gains, "NEAR", Fraction(1, 5))
    _, found = interval(SMALL.replace('"kappa*v"', '"kappa*v + 0.1*v"').replace("kappa*d", "d"))
    assert found["contracting"] is None and found["best"] is None and found["inner"] is not None


def test_two_states_have_an_interval_too(monkeypatch: pytest.MonkeyPatch) -> None:
    """x⁺ = (1 − κ) x and y⁺ = y/3: in the box the gain is at most 1/2 for κ in [1/2, 3/2]."""
    monkeypatch.setattr(gains, "NEAR", Fraction(1, 10))
    text = (
        'format = 1\n[gains]\nkappa = 1\n[state]\nx = [-1, 1]\ny = [-1, 1]\n[next]\nx = "x - kappa*x"\ny = "y/3"\n'
        '[target]\nx = 0\ny = 0\n[metric]\nkind = "box"\n[[require]]\nthat = "gain <= 0.5"\n'
    )
    _, found = interval(text)
    inner, outer = ends(found["inner"]), ends(found["outer"])
    assert outer[0] < Fraction(1, 2) <= inner[0] < inner[1] <= Fraction(3, 2) < outer[1]


@pytest.mark.parametrize("ball", [False, True])
def test_both_sides_take_the_same_factor_out(ball: bool) -> None:
    claim = parse_claim(SMALL.replace('"kappa*v"', '"-(v*(kappa*p)/2) - 3*v*kappa"'), {}, {}, "claim.toml")
    o, low, high = Obligations(narrowed(claim, "kappa", Fraction(1), Fraction(2))), Fraction(1), Fraction(2)
    derivation = Derivation(read_statement(claim.text, {}, {}))
    d = Derivation(statement_narrowed(derivation, Piece("kappa", low, high)))
    mine = o.factor(Region("ball" if ball else "region", Fraction(1, 8), (Fraction(0), Fraction(0))), "kappa")
    meaning = d.meaning(mine.name, Domain(ball, Fraction(1, 8), (Fraction(0), Fraction(0))))
    gates = [(g.op, g.args, g.value if g.op in ("number", "power") else g.name or None) for g in o.graph.gates]
    assert spelled_out(gates, mine.root) == spelled_out(d.terms.all, meaning.root) and mine.by == meaning.by == "v"
    assert [(v.name, v.cells) for v in mine.variables] == [(v.name, v.cells) for v in meaning.variables]


def test_the_interval_over_a_box_of_height_and_step_time() -> None:
    """The same formula over z in [0.85, 0.95], T in [0.35, 0.45], no placement error: both ends are at corners of the box (own
    computation: the largest tanh(ωT/2)/ω, at z = 0.95, T = 0.45, and the least coth(ωT/2)/ω, at z = 0.85, T = 0.45)."""
    text = PENDULUM.format(requirements=require("gain < 1")).replace("gap = 1e-9", "gap = 1e-3")
    text = text.replace("z = 0.9\n", "").replace("T = { range = [0.4, 0.4] }", "z = [0.85, 0.95]\nT = [0.35, 0.45]")
    _, found = interval(text)
    low, high = Fraction("0.1925593595658777837"), Fraction("0.45732680474074829194")
    inner, outer = ends(found["inner"]), ends(found["outer"])
    assert outer[0] < low < inner[0] < inner[1] < high < outer[1]
    assert inner[0] - outer[0] <= Fraction(1, 1000) and outer[1] - inner[1] <= Fraction(1, 1000)
