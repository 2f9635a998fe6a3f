"""Worked cases of one state whose answers are known in closed form, each derived beside it."""

from __future__ import annotations

import math
from fractions import Fraction
from typing import Any

import pytest

from tests.conftest import ends, proved

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
    phi = lambda rho: math.tanh(rho) / 2 + rho * rho / 8 + 0.05  # noqa: E731
    low, high = 0.0, 0.5
    for _ in range(60):
        low, high = ((low + high) / 2, high) if phi((low + high) / 2) > (low + high) / 2 else (low, (low + high) / 2)
    results = outcome("tanh(v)/2 + v*abs(v)/8 + d", ["sharp_bound(v) <= 0.2"], more="[uncertain]\nd = [-0.05, 0.05]\n")
    lower, upper = ends(results["sharp_bound"])
    assert low * (1 - 1e-6) <= float(upper) <= low * (1 + 1e-3)
    assert float(lower) > 0.999 * low  # d stays at its end: a fixed point
