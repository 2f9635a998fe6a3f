"""Worked cases of one state whose answers are known in closed form, each derived beside it."""

from __future__ import annotations

import math
import time
from fractions import Fraction
from itertools import pairwise
from typing import Any

import pytest

from tests.conftest import ends, proved
from ultibound.certificate.enclosing import Encloser
from ultibound.checker import check
from ultibound.checker.derive import Derivation, Domain, Unprovable, varied
from ultibound.checker.ranges import Evaluator
from ultibound.checker.reals import Scaled, Undefined
from ultibound.checker.statement import read_statement
from ultibound.claim import ClaimError, parse_claim
from ultibound.contraction.curve import inward
from ultibound.prove import Attempt

ROUTES = ("slope", "split", "curve")


def outcome(
    next_: str, asked: list[str], state: str = "[-1, 1]", target: str = "0", top: str = "", more: str = "", **data: str
) -> dict[str, Any]:
    requirements = "".join(f'[[require]]\nthat = "{that}"\n' for that in asked)
    text = (
        f'format = 1\n{top}[state]\nv = {state}\n{more}[next]\nv = "{next_}"\n[target]\nv = "{target}"\n{requirements}'
    )
    return proved(text, data={f"{k}.csv": v for k, v in data.items()}).results


def verdicts(results: dict[str, Any]) -> list[str]:
    return [r["verdict"] for r in results["requirements"]]


def test_a_slope_that_jumps_away_from_the_target() -> None:
    """0.3 v + 0.4 max(0, v − 1/2): slope 3/10 up to 1/2 and 7/10 beyond, so k = 7/10 although it is 3/10 at the target."""
    results = outcome("0.3*v + 0.4*max(0, v - 1/2)", ["gain <= 0.7", "gain < 0.7", "gain < 0.5", "settles"])
    assert ends(results["gain"]) == (Fraction(7, 10), Fraction(7, 10))
    assert verdicts(results) == ["proved", "refuted", "refuted", "proved"]


def test_a_saturation_is_its_own_sharp_bound() -> None:
    """clip(2v, −1/10, 1/10): φ(ρ) = min(2ρ, 1/10) < ρ beyond 1/10, and v = 1/10 stays where it is."""
    asked = [
        "sharp_bound(v) <= 0.1",
        "sharp_bound(v) < 0.1",
        "bound(v) <= 0.1",
        "settles",
        "gain < 1",
        "push(v) >= 0.89",
        "push(v) > 0.9",
    ]
    results = outcome("clip(2*v, -0.1, 0.1)", asked)
    assert verdicts(results) == ["proved", "refuted", "proved", "proved", "refuted", "proved", "refuted"]
    assert ends(results["sharp_bound"]) == (Fraction(1, 10), Fraction(1, 10))
    assert results["route"] == "curve" and results["routes"]["slope"]["bound"] is None


def test_a_map_onto_its_region_does_not_settle() -> None:
    """1 − 2|v| maps [−1, 1] onto itself; −1 stays where it is, at the edge of the set."""
    results = outcome("1 - 2*abs(v)", ["settles", "bound(v) <= 0.99", "radius(v) >= 1", "bound(v) <= 1"])
    assert results["set"]["kind"] == "region"
    assert verdicts(results) == ["refuted", "refuted", "proved", "proved"]


@pytest.mark.parametrize("count, verdict", [(3, "proved"), (2, "refuted"), (4, "proved"), (0, "refuted")])
def test_steps_at_exactly_the_last_count(count: int, verdict: str) -> None:
    """v/2 from 8/10: 4/10, 2/10, 1/10: within 1/10 after three steps, not after two."""
    results = outcome("v/2", [f"steps(v, 0.8, 0.1) <= {count}"])
    assert verdicts(results) == [verdict]
    assert results["requirements"][0]["value"] == {"lower": "3", "upper": "3"}


def test_the_worst_orbit_alternates() -> None:
    """−v/2 + d, |d| ≤ 1/10: ε/(1−k) = 1/5, reached by v = ±1/5 with d = ∓1/10 in turn."""
    results = outcome("-v/2 + d", ["bound(v) <= 0.2", "bound(v) < 0.2"], more="[uncertain]\nd = [-0.1, 0.1]\n")
    assert verdicts(results) == ["proved", "refuted"]
    assert ends(results["states"]["v"]["bound"]) == (Fraction(1, 5), Fraction(1, 5))


def test_a_smaller_ball_is_found_and_used_where_allowed() -> None:
    """v³·2: leaves [−1, 1]; |v| ≤ r is kept for every r ≤ 1/√2."""
    asked = ["settles", "radius(v) >= 0.6", "gain < 3"]
    for top, wanted in (
        ("", ["undecided", "proved", "undecided"]),
        ("shrink = true\n", ["proved", "proved", "proved"]),
    ):
        results = outcome("2*v**3", asked, top=top)
        assert results["set"]["kind"] == "smaller ball"
        assert verdicts(results) == wanted
        assert 0.6 < float(results["radius"]["lower"]) < math.sqrt(0.5)


def test_a_requirement_that_always_holds_and_one_that_does_not() -> None:
    results = outcome("v/2", ["always(next(v) <= 1/2)", "always(next(v) < 1/2)", "always(abs(next(v)) - abs(v) <= 0)"])
    assert verdicts(results) == ["proved", "refuted", "proved"]


def test_requirements_over_ranges_of_their_own() -> None:
    """(1 − κ)v + d: k = max |1 − κ| over the gains, ε = max |d|, each requirement over its own ranges."""
    rows = [
        ("gain <= 0.6", "kappa = [0.4, 0.6]", "proved"), ("gain <= 0.59", "kappa = [0.4, 0.6]", "refuted"), ("bound(v) <= 0.4", "d = [-0.2, 0.2]", "proved"),
        ("bound(v) < 0.4", "d = [-0.2, 0.2]", "refuted"), ("radius(v) >= 2", "v = [-2, 2]", "proved"), ("steps(v, 1.9, 0.5) <= 4", "v = [-2, 2]", "proved"),
        ("settles", "kappa = [1.95, 1.99]", "undecided"), ("gain < 1", "kappa = [1.5, 2.5]", "refuted"), ("push(v) >= 1.5", "v = [-2, 2]", "proved"),
    ]  # fmt: skip
    requirements = "".join(f'[[require]]\nthat = "{that}"\nover = {{ {over} }}\n' for that, over, _ in rows)
    text = f"""format = 1
[gains]
kappa = 0.5
[state]
v = [-1, 1]
[uncertain]
d = [-0.1, 0.1]
[next]
v = "v - kappa*v + d"
[target]
v = 0
[[require]]
that = "gain <= 0.5"
{requirements}"""
    results = proved(text).results
    assert verdicts(results) == ["proved", *(v for _, _, v in rows)]
    assert ends(results["gain"]) == (Fraction(1, 2), Fraction(1, 2))
    assert ends(results["requirements"][1]["value"]) == (Fraction(3, 5), Fraction(3, 5))


def gaits(spacing: float) -> str:
    """reach(v) = v − sin(2v)/2 on a grid, to nine places."""
    nodes = [round(-0.6 + spacing * k, 6) for k in range(round(1.2 / spacing) + 1)]
    return "speed,reach\n" + "".join(f"{v},{v - math.sin(2 * v) / 2:.9f}\n" for v in nodes).replace("-0.000000000", "0")


def test_the_split_residual_falls_with_the_square_of_the_spacing() -> None:
    """next = 2v − sin(2v)/2 − reach − 0.6 e: between nodes N − v is the interpolation residual of r(v) = v − sin(2v)/2, at
    most h²/8 · sup |r″| = h²/8 · 2 sin 1.2, while the correction alone has slope 1 − 0.6."""
    found = []
    for h in (0.3, 0.15, 0.075):
        results = outcome(
            "2*v - sin(2*v)/2 - reach + shift", ["gain <= 0.4001", "settles"], state="[-0.6, 0.6]",
            top='route = "split"\ncorrection = ["shift"]\n',
            more='[[library]]\nfile = "g.csv"\nat = { speed = "v" }\n[define]\nshift = "-0.6*(v - target(v))"\n', g=gaits(h),
        )  # fmt: skip
        assert verdicts(results) == ["proved", "proved"] and results["route"] == "split"
        low, high = ends(results["residual"])
        assert high <= h * h / 8 * 2 * math.sin(1.2) * 1.001 + 2e-9 and low <= high <= low * Fraction(1002, 1000)
        found.append(float(high))
    assert 3.5 < found[0] / found[1] < 4.2 and 3.8 < found[1] / found[2] < 4.1


def test_the_sharp_bound_is_within_the_gap_of_the_fixed_point() -> None:
    """φ(ρ) = tanh(ρ)/2 + ρ²/8 + 1/20 for the map below: its fixed point, by bisection in floating point."""

    def phi(rho: float) -> float:
        return math.tanh(rho) / 2 + rho * rho / 8 + 0.05

    low, high = 0.0, 0.5
    for _ in range(60):
        low, high = ((low + high) / 2, high) if phi((low + high) / 2) > (low + high) / 2 else (low, (low + high) / 2)
    results = outcome("tanh(v)/2 + v*abs(v)/8 + d", ["sharp_bound(v) <= 0.2"], more="[uncertain]\nd = [-0.05, 0.05]\n")
    lower, upper = ends(results["sharp_bound"])
    assert low * (1 - 1e-6) <= float(upper) <= low * (1 + 1e-3)
    assert float(lower) > 0.999 * low  # d stays at its end: a fixed point


def claim(next_: str, asked: list[str], state: str, top: str = "", more: str = "", target: str = "0") -> Any:
    requirements = "".join(f"[[require]]\nthat = '{that}'\n" for that in asked)
    text = (
        f"format = 1\n{top}[state]\nv = {state}\n{more}[next]\nv = '{next_}'\n[target]\nv = '{target}'\n{requirements}"
    )
    return parse_claim(text, {}, {}, "c")


def within(c: Any, radius: Fraction) -> dict[str, Any]:
    """Results of a proof on a ball smaller than the one the claim is about; the checker accepts its certificate."""
    attempt = Attempt(c, 1e-3, time.monotonic() + 600, lambda *_: None, False, radius)
    assert check(attempt.certificate.to_bytes()).status == "valid"
    return attempt.certificate.results


def test_a_smaller_ball_refutes_no_push_from_the_region() -> None:
    """0.9 + (v − 0.9)/100 stays at 0.9, from where a push of 0.15 stays in [−1, 10], though it leaves the ball of radius 1."""
    c = claim("0.9 + 0.01*(v - 0.9)", ["push(v) >= 0.15"], "[-1, 10]")
    assert verdicts(within(c, Fraction(1))) == ["undecided"]
    assert within(c, Fraction(1))["set"]["kind"] == "smaller ball"


def test_a_ball_smaller_by_a_millionth_is_another_set() -> None:
    """0.4 v² on the ball of radius 1: slope 0.8 at its edge, less within any smaller one."""
    c = claim("0.4*v**2", ["gain <= 0.7999995", "value(next(v)) <= 0.3999996"], "[-1, 3]")
    assert verdicts(within(c, Fraction(999_999, 1_000_000))) == ["undecided", "undecided"]
    assert verdicts(proved(c.text).results) == ["refuted", "refuted"]


def test_where_any_set_would_do_a_point_of_one_refutes_nothing() -> None:
    """v/2 + v³: slope 0.8 is kept within 0.3, and exceeded at 1."""
    c = claim("0.5*v + v**3", ["gain <= 0.8"], "[-1, 1]", "shrink = true\n")
    assert verdicts(within(c, Fraction(3, 10))) == ["proved"]
    assert verdicts(proved(c.text).results) == ["undecided"]


def test_over_does_not_reach_the_set() -> None:
    """The ball about k h reaches to ±1 for the claim's k = 1, whatever `over` says of k for the value."""
    more = "[gains]\nk = 1\n[uncertain]\nh = { range = [-0.5, 0.5], held = true }\n"
    text = claim("k*h + 1.2*(v - k*h)**3", ["value(v) <= 0.51"], "[-1, 1.2]", "", more, "k*h").text
    results = proved(text + "over = { k = [0, 0.001] }\n").results
    assert verdicts(results) == ["refuted"] and float(results["requirements"][0]["value"]["upper"]) >= 1


def test_a_target_that_cannot_move_refutes_no_residual() -> None:
    """h is 0 or 1 and moves by at most 1/2 a step: never. The route's residual is 1, the true one 0."""
    more = "[uncertain]\nh = { values = [0, 1], held = true, change = 0.5 }\n"
    results = proved(claim("h*h + 0.1*(v - h*h)", ["residual <= 0.5"], "[-2, 2]", "", more, "h*h").text).results
    assert verdicts(results) == ["undecided"] and results["residual"] == {"lower": "0", "upper": "1"}


@pytest.mark.parametrize("that, over", [
    ("gain <= 0.5", "{ k = [1, 2] }"), ("sensitivity(v, k) >= 0", "{ d = [0, 1] }"), ("value(v**(2**k)) >= 0", "{ k = [1, 2] }"), ("value(v**2**k) >= 0", "{ k = [1, 2] }"),
    ("bound(v) <= m", "{ m = [0, 0.5] }"), ("value(v - m) <= -m", "{ m = [0.05, 0.5] }"), ("residual <= 0.1", '{ m = [0.1, 0.5], d = ["-m", "m"] }'),
    ("steps(v, 1, m) <= 3", "{ m = [0.1, 0.5] }"), ("steps(v, m, 1) <= 3", "{ m = [0.1, 0.5] }"),
])  # fmt: skip
def test_names_that_other_texts_are_taken_from_are_not_set_free(that: str, over: str) -> None:
    """Exponents within exponents, right sides and ends of ranges are taken at the claim's values, in both readers."""
    text = f"""format = 1
[gains]
k = 1
m = 0.1
[state]
v = [0, 1]
[uncertain]
d = [0, 0.1]
[next]
v = "0.25*v**(2**k) + d + 0*m"
[target]
v = 0
[[require]]
that = "{that}"
over = {over}
"""
    with pytest.raises(ClaimError, match="cannot be followed"):
        proved(text)
    derivation = Derivation(read_statement(text, {}, {}))
    with pytest.raises(Unprovable):
        derivation.meaning("require[1]", Domain(False, Fraction(0), (Fraction(0), Fraction(0))))
        varied(derivation.statement, 1)


@pytest.mark.parametrize("that", ["gain <= 0.5", "bound(v) <= m", "residual <= 0.1"])
def test_nor_for_a_proof_of_their_own(that: str) -> None:
    text = f'format = 1\n[gains]\nk = 1\nm = 0.1\n[state]\nv = [0, 1]\n[next]\nv = "0.25*v**(2**k) + 0*m"\n[target]\nv = 0\n[[require]]\nthat = "{that}"\nover = {{ k = [1, 2], m = [0, 1] }}\n'
    with pytest.raises(Unprovable, match="also sets"):
        varied(read_statement(text, {}, {}), 1)


def test_a_corner_may_hold_an_axis_on_a_grid_line() -> None:
    """m = max(v, 0.3) stands on the node 0.3 for v below it: slopes 1 and 0.1 on its sides both count."""
    text = """format = 1
[state]
v = [-0.5, 0.4]
[define]
m = "max(v, 0.3)"
[[library]]
file = "g.csv"
at = { s = "m" }
[next]
v = "0.1*v + q"
[target]
v = 0.1
[[require]]
that = "sensitivity(v, m) <= 0.5"
"""
    results = proved(text, data={"g.csv": "s,q\n0,-0.25\n0.3,0.05\n0.4,0.06\n1,0.1\n"}).results
    low, high = ends(results["requirements"][0]["value"])
    assert verdicts(results) == ["undecided"] and low <= Fraction(1, 10) and high >= 1


def test_a_smaller_ball_proves_no_push_of_another_set() -> None:
    """The region is kept and holds an orbit at 9.2, from where a push of 1 leaves it; within 2 of the target all is calm."""
    c = claim("0.5*v + clip(2*(v-3), 0, 4.6)", ["push(v) >= 1", "steps(v, 1, 0.3) <= 2"], "[-10, 10]")
    assert verdicts(within(c, Fraction(2))) == ["undecided", "proved"]
    assert verdicts(proved(c.text).results)[0] == "refuted"


@pytest.mark.parametrize("next_", ["0.5*v*(1/v)**0", "0.5*v + 0.1*sqrt(v - 5)**0", "0.5*v + log(v)**(1 - 1)"])
def test_the_power_nought_asks_for_its_base(next_: str) -> None:
    """An expression that is undefined on the region is not made defined by an exponent of 0."""
    with pytest.raises(ClaimError, match="not defined"):
        proved(claim(next_, ["gain <= 0.5"], "[-1, 1]").text)
    derivation = Derivation(read_statement(claim(next_, ["gain <= 0.5"], "[-1, 1]").text, {}, {}))
    meaning = derivation.meaning("image[v]", None)
    evaluator = Evaluator(derivation.terms, meaning.root, "", ["v"], (), Scaled(80))
    with pytest.raises(Undefined):
        evaluator.run([(Fraction(-1), Fraction(1))], False)


def test_the_power_nought_is_one() -> None:
    results = outcome("0.5*v + 0.1*(v**0) - 0.1*(2 + v)**0 + 0**0 - 1", ["gain <= 0.5", "residual <= 0"])
    assert verdicts(results) == ["proved", "proved"]


def test_a_weight_is_not_set_free() -> None:
    text = claim(
        "0.5*v + d + 0*k", ["residual <= 0.1"], "[-1, 1]", "", "[gains]\nk = 1\n[uncertain]\nd = [-0.1, 0.1]\n"
    ).text
    text += 'over = { k = [0.5, 2] }\n[metric]\nkind = "box"\nweights = { v = "k" }\n'
    with pytest.raises(ClaimError, match="cannot be followed"):
        proved(text)
    with pytest.raises(Unprovable, match="also sets"):
        varied(read_statement(text, {}, {}), 1)


@pytest.mark.parametrize("less, shells", [("1e-3", 61), ("1e-11", 61), ("1e-13", 1)])
def test_radii_rise_however_little_is_gained(less: str, shells: int) -> None:
    """What is led inward by less than the written digits show ends the shells."""
    radii = inward(Fraction(1), lambda rho: float(rho) * (1 - float(less)), 1e-14, 60)
    assert len(radii) == shells and all(a < b for a, b in pairwise((Fraction(0), *radii)))


def test_no_range_is_searched_again_at_the_same_gap(monkeypatch: pytest.MonkeyPatch) -> None:
    """v/2 − 0.3 v³ + d cos(v) is bound by some 0.192 where the error curve is followed closely, by 0.2 where it is not."""
    next_, more = "0.5*v - 0.3*v**3 + d*cos(v)", "[uncertain]\nd = [-0.1, 0.1]\n"
    text = claim(next_, ["bound(v) <= 0.195"], "[-1, 1]", more=more).text
    text += (
        '[[require]]\nthat = "bound(v) <= 0.0995"\nover = { d = [-0.05, 0.05] }\n'  # the same names over other ranges
    )
    searched: list[tuple[Any, ...]] = []
    measured = Encloser._measured

    def noted(self: Encloser, obligation: Any, on: int | None, *sizes: Any) -> Any:
        searched.append((id(self.known), obligation.name, self.writer.domain(on), *sizes))
        return measured(self, obligation, on, *sizes)

    monkeypatch.setattr(Encloser, "_measured", noted)
    certificate = proved(text)
    assert verdicts(certificate.results) == ["proved", "proved"] and len(searched) == len(set(searched)) > 20
    # what is remembered is what would be found again
    monkeypatch.setattr(Encloser, "known", property(lambda self: {}, lambda self, known: None), raising=False)
    once = len(searched)
    searched.clear()
    assert proved(text).to_bytes() == certificate.to_bytes() and len(searched) > once
