"""Certificates put together to say something false from lines that hold: each has to be refused."""

from __future__ import annotations

import copy
from collections.abc import Sequence
from typing import Any

import pytest

from tests.checker.test_boundaries import Draft, claim, sealed
from tests.conftest import proved
from ultibound.checker import check


def with_results(entries: dict[str, Any], **changed: Any) -> dict[str, Any]:
    entries = copy.deepcopy(entries)
    entries["results"] |= changed
    return entries


def still(low: str, high: str, at: int, values: Sequence[tuple[str, str, str]] = ()) -> Draft:
    """1 target, 2 a smaller ball of radius 1/64, 3 slope, 4 miss, 5 pair, then ranges on the ball."""
    d = Draft(claim("3*v**2", uncertain="", requires=["gain <= 0.3", "value(v)"]))
    d.range("target[v]", "0", "0")
    d.theorem("smaller-ball", "ball", [1], radius="1/64")
    d.range("slope[v,v]", low, high, [2])
    d.range("target-miss[v]", "0", "0")
    d.theorem("slope", "slope", [3, 4], gain=high, residual="0")
    for proves, a, b in values:
        d.range(proves, a, b, [at])
    return d


def test_a_smaller_ball_that_is_not_kept_says_nothing() -> None:
    """3 v² on [−1, 1] has slopes up to 6; on a ball of 1/64 they are 6/64 only."""
    asked = [("gain <= 0.3", "undecided"), ("value(v)", "undecided")]
    alone = Draft(claim("3*v**2", uncertain="", requires=["gain <= 0.3", "value(v)"]))
    alone.range("target[v]", "0", "0")
    alone.theorem("smaller-ball", "ball", [1], radius="1/64")
    assert check(sealed(alone.entries(None, asked))).status == "valid"
    entries = still("-6/64", "6/64", 2).entries(None, asked)
    small = {"gain": {"lower": None, "upper": "0.1"}, "residual": None, "bound": None}
    assert check(sealed(with_results(entries, gain=small["gain"], routes={"slope": small}))).status == "invalid"
    ranged = still("-6/64", "6/64", 2, [("require[2]", "-1/64", "1/64")]).entries(None, asked)
    ranged["results"]["requirements"][1]["value"] = {"lower": "-0.02", "upper": "0.02"}
    assert check(sealed(ranged)).status == "invalid"


CENTRED = (
    '[[require]]\nthat = "always(v <= 1.5)"\nover = { h = [0, 2] }\n',
    '[[require]]\nthat = "always(v <= 1.5)"\nover = { h = [0, 0.25] }\n',
)


@pytest.mark.parametrize("values", [False, True])
def test_a_balls_centre_keeps_to_its_own_range(values: bool) -> None:
    """Over h in [0, 2] the ball about h would leave the region: neither proved nor refuted, with either radius."""
    held = "h = { values = [-0.5, 0, 0.5], held = true }" if values else "h = { range = [-0.5, 0.5], held = true }"
    step = "h + 0.5*(v - h) + max(0, v - 1.1)*max(0, v - 1.1)*10"
    text = claim(step, "[-1, 1.5]", held, "h", requires=[], rest=CENTRED[values])
    for outer in ("1/2", "11/20"):
        d = Draft(text)
        d.range("target[v]", "-1/2", "1/2", trees=("d",) * (3 if values else 1))
        d.point("target[v]", {"h": "#0" if values else "-1/2"}, "-1/2")
        d.theorem("largest-ball", "ball", [1, 2], radius="1/2", outer=outer)
        ranged = copy.deepcopy(d)
        ranged.range("require[1]", "-5", "0", [3])
        d.point("require[1]", {"h": "2", "error(v)": "0"}, "1/2", uses=[3])
        for forged, verdict in ((ranged, "proved"), (d, "refuted")):
            found = check(sealed(forged.entries(None, [("always(v <= 1.5)", verdict)])))
            assert found.status == "invalid" and "known for its own range only" in found.reason


def test_over_within_the_range_of_what_moves_the_target() -> None:
    text = claim("h + 0.5*(v - h) + w/10", "[-1, 1.2]", 'h = { range = [-0.5, 0.5], held = true }\nw = [-1, 1]', "h",
                 requires=["settles"], rest=CENTRED[1])  # fmt: skip
    results = proved(text).entries["results"]
    assert [r["verdict"] for r in results["requirements"]] == ["proved", "proved"]
    beyond = proved(
        text.replace("[0, 0.25]", "[0, 2]").replace("w/10", "w/10 + max(0, v - 1)*9") + "[effort]\ncells = 500\n"
    )
    assert "known for its own range only" in str(beyond.entries["results"]["requirements"])


@pytest.mark.parametrize("route", ["best", "curve"])
def test_no_lower_end_of_the_gain_without_the_split_route(route: str) -> None:
    """−v/2 by v/4 − 3v/4: the slope route's gain is 1/2, the split route's 1/4."""
    text = claim(
        "v*0.25 + u", uncertain="", requires=["gain <= 0.5"], top=f'route = "{route}"\ncorrection = ["u"]',
        rest='[define]\nu = "-0.75*v"',
    )  # fmt: skip
    d = Draft(text)
    d.range("target[v]", "0", "0")
    d.theorem("smaller-ball", "ball", [1], radius="1")
    d.range("image[v]", "-1", "1")
    d.theorem("invariant-region", "invariant", [1, 3])
    d.range("slope[v,v]", "-1/2", "-1/2", [4])
    d.point("slope[v,v]", {"v": "0"}, "-1/2", uses=[4])
    d.range("target-miss[v]", "0", "0")
    d.theorem("slope", "slope", [5, 7], gain="1/2", residual="0")
    if route == "curve":
        d.line("shells", "shells", [4], {"radii": ["1"], "slope": "1/2"})
        d.range("shell[1]", "-2", "2", [9], trees=("d", "d"))
        d.range("line[v]", "-2", "0", [9], trees=("0 m m",))
        d.theorem("curve", "curve", [9, 10, 11], gain="1/2", residual="0", sharp="1")
    entries = d.entries("region", [("gain <= 0.5", "proved")])
    assert check(sealed(entries)).status == "valid"
    known = {"lower": "0.5", "upper": "0.5"}
    forged = with_results(entries, gain=known) if route == "curve" else copy.deepcopy(entries)
    forged["results"]["requirements"][0]["value"] = known
    assert check(sealed(forged)).status == "invalid"
    (asked,) = proved(text).entries["results"]["requirements"]
    assert asked["value"]["upper"] == "0.25"


STILL = """[define]
m = "0.5"
[[library]]
file = "g.csv"
at = {{ u = "{axis}" }}
"""


@pytest.mark.parametrize("axis", ["m + (v - v)**2/1000", "m + (v - v)", "m*(1 + (v - v)**2)", "m/(1 + (v - v)**2)"])
def test_an_axis_that_only_seems_to_move_counts_both_sides(axis: str) -> None:
    """On the grid line 0.5 the reading's slope is 10 to the left and −2 to the right."""
    text = claim("0.125*q", uncertain="", requires=["sensitivity(v, m) <= 0"], rest=STILL.format(axis=axis))
    results = proved(text, data={"g.csv": "u,q\n0,-5\n0.5,0\n1,-1\n"}).entries["results"]
    assert all(float(band["upper"]) >= 1.25 for band in results["sensitivities"])
    assert results["requirements"][0]["verdict"] != "proved"


def test_steps_to_beyond_the_set_take_none() -> None:
    """Everything in the set is within 2 of the target from the start."""
    results = proved(claim("0.5*v", uncertain="", requires=["steps(v, 0.5, 2) <= 3", "steps(v, 0.5, 2) <= 0"])).entries
    assert [r["verdict"] for r in results["results"]["requirements"]] == ["proved", "proved"]


def test_what_a_map_adds_and_takes_away_has_to_be_defined() -> None:
    """v/2 + 1/q − 1/q is nowhere but v/2, and not defined at q = 0: neither the miss nor the error curve hides that."""
    for q, status in (("[1, 2]", "valid"), ("[-1, 2]", "invalid")):
        d = Draft(claim("v/2 + 1/q - 1/q", uncertain=f"q = {q}", requires=["settles"]))
        d.range("target[v]", "0", "0")
        d.theorem("smaller-ball", "ball", [1], radius="1")
        d.line("shells", "shells", [2], {"radii": ["1"], "slope": "1/2"})
        d.range("shell[1]", "-1/2", "1/2", [3], trees=("d", "d"))
        d.range("line[v]", "-1/2", "1/2", [3], trees=("d",))
        d.theorem("curve", "curve", [3, 4, 5], gain="1/2", residual="1/2", sharp="1/2")
        d.theorem("invariant-ball", "invariant", [2, 6])
        d.theorem("ultimate-bound", "bound[curve]", [7, 6], bound="1")
        found = check(sealed(d.entries("smaller ball", [("settles", "undecided")])))
        assert found.status == status, found
        assert status == "valid" or found.place == "proof line 4"
