"""Orbits and products around closed walks of stances: exact values by hand, and claims that they refute (proofs/graph.md)."""

from __future__ import annotations

from fractions import Fraction as Q
from math import sqrt
from typing import Any

import numpy as np
import pytest

from tests.conftest import proved
from tests.test_graph import TWO, graph, matrices, verdicts
from ultibound.claim import ClaimError
from ultibound.contraction.words import fastest_round


def span(results: dict[str, Any], stance: str, state: str = "x") -> tuple[Q, Q]:
    found = results["stances"][stance]["states"][state]["bound"]
    return Q(found["lower"]), Q(found["upper"])


def close(results: dict[str, Any], stance: str, exact: Q, state: str = "x") -> None:
    """Both ends at the exact value, to the digits that are written."""
    low, high = span(results, stance, state)
    assert low <= exact <= high and high - low <= exact * Q(1, 10**9) + Q(1, 10**18), (stance, float(low), float(high))


@pytest.mark.parametrize("a, b", [("1/2", "1/3"), ("3/2", "1/4"), ("-1/2", "1/3"), ("-9/10", "9/10"), ("0", "5")])
def test_two_stances_reach_their_bounds(a: str, b: str) -> None:
    """x⁺ = a x + w/10 and b x + w/20: (1/20 + |b|/10)/(1 − |ab|) on the left, taken by an orbit, and so refuted if less."""
    p, q = abs(Q(a)), abs(Q(b))
    left, right = ((Q(1, 20) + q / 10) / (1 - p * q), (Q(1, 10) + p / 20) / (1 - p * q))
    wide = 8 * p + 1
    stances = {
        "left": ("right", "[-8, 8]", "0", f"{a}*x + w/10"),
        "right": ("left", f'["-{wide}", "{wide}"]', "0", f"{b}*x + w/20"),
    }
    asked = [
        f"bound(x) <= {max(left, right)}", f"bound(x) < {max(left, right)}", f'"bound(x) < {left}"\nin = "left"',
        f'"bound(x) <= {right}"\nin = "right"', f'"bound < {right}"\nin = "right"', "settles",
    ]  # fmt: skip
    r = proved(graph(stances, *asked)).results
    close(r, "left", left)
    close(r, "right", right)
    assert verdicts(r)[:5] == ["proved", "refuted", "refuted", "proved", "refuted"]


def test_one_side_is_refuted_and_the_other_proved() -> None:
    """A walker that steps wide on the left only: what is asked there fails, what is asked of the right holds."""
    stances = {"left": ("right", "[-2, 2]", "0", "x/4 + w/100"), "right": ("left", "[-2, 2]", "0", "x/4 + w/5")}
    exact = (Q(1, 5) + Q(1, 400)) / (1 - Q(1, 16))
    asked = ['"bound(x) <= 0.2"\nin = "left"', '"bound(x) <= 0.2"\nin = "right"', "bound(x) <= 0.2", "bound(x) <= 0.3"]
    r = proved(graph(stances, *asked)).results
    close(r, "left", exact)
    assert verdicts(r) == ["refuted", "proved", "refuted", "proved"]
    said = r["requirements"][0]["limited_by"]
    assert "an orbit around" in said and "in left, again and again" in said
    assert r["requirements"][1]["limited_by"] is None


def test_the_worst_order_is_found_among_all() -> None:
    """All gains above 0: the highest and lowest errors in t are those that some s leads to from its own."""
    targets = {"a": Q(0), "b": Q(1, 10), "c": Q(-1, 5)}
    gains = {"a": Q(1, 2), "b": Q(1, 3), "c": Q(1, 4)}
    stances = {s: ("a b c", "[-3, 3]", str(t), f"{gains[s]}*x + w/50") for s, t in targets.items()}
    high, low = dict.fromkeys(targets, Q(0)), dict.fromkeys(targets, Q(0))
    for _ in range(80):
        high = {t: max(gains[s] * (high[s] + targets[s]) for s in targets) + Q(1, 50) - targets[t] for t in targets}
        low = {t: min(gains[s] * (low[s] + targets[s]) for s in targets) - Q(1, 50) - targets[t] for t in targets}
    r = proved(graph(stances, "settles")).results
    for s in targets:
        found, upper = span(r, s)
        exact = max(high[s], -low[s])
        assert exact * Q(9999, 10000) <= found <= exact * (1 + Q(1, 10**9)) <= upper * (1 + Q(1, 10**9)), s


def test_a_stance_that_never_comes_again_has_no_orbit() -> None:
    stances = {"start": ("walk", "[-1, 1]", "0", "x/2"), "walk": ("walk", "[-1, 1]", "0", "24*x/25 + w/100")}
    r = proved(graph(stances, "bound(x) < 1/4")).results
    close(r, "walk", Q(1, 4))
    assert r["stances"]["start"]["states"]["x"]["bound"]["lower"] is None and verdicts(r) == ["refuted"]


def test_an_orbit_without_any_bound() -> None:
    """x⁺ = clip(3x/2 + w/8): no gain below 1, and states at the edge come again: refuted, and nothing is settled."""
    stances = {s: (t, "[-1, 1]", "0", "clip(1.5*x + w/8, -1, 1)") for s, t in (("left", "right"), ("right", "left"))}
    r = proved(graph(stances, "settles", "bound(x) < 1", '"settles"\nin = "left"', "bound(x) <= 1")).results
    assert verdicts(r) == ["refuted", "refuted", "refuted", "undecided"]
    r = proved(graph(stances, "settles", "bound(x) < 1", top="shrink = true")).results
    assert verdicts(r) == ["undecided"] * 2


def test_held_quantities_stay_along_an_orbit() -> None:
    """x* = c and −2c, and a miss of c/2 on the left, −c on the right: never both c = 1/5 and c = −1/5 in one orbit."""
    rest = "c = { range = [-0.2, 0.2], held = true, change = 0.001 }\nw = [-1, 1]"
    stances = {
        "left": ("right", "[-3, 3]", "c", "-2*c + c/2 + (x - c)/2 + w/100"),
        "right": ("left", "[-3, 3]", "-2*c", "c - c + (x + 2*c)/4"),
    }
    r = proved(graph(stances, "settles", rest=rest)).results
    # e_right = e_left/2 + c/2 + w/100, e_left = e_right/4 − c: of c = ±1/5, w = ∓1
    left = (Q(1, 5) - Q(1, 40) + Q(1, 400)) / (1 - Q(1, 8))
    low, high = span(r, "left")
    assert abs(low - left) <= Q(1, 10**9) and high > low


def test_what_grows_around_a_walk_grows_in_any_norms() -> None:
    """A = [[0, 2], [0, 0]] on the left and Aᵀ on the right: spectral radii 0, a product of 4, and so a gain of 2 at least."""
    more = (
        '[stance.left]\nthen = "right"\nstate = { x = [-9, 9], v = [-9, 9] }\nnext = { x = "1.9*v + d", v = "0*x" }\n'
        '[stance.right]\nthen = "left"\nstate = { x = [-20, 20], v = [-20, 20] }\nnext = { x = "0*v + e", v = "x/2" }\n'
        '[target]\nx = 0\nv = 0\n[[require]]\nthat = "gain < 0.97"\n[[require]]\nthat = "gain <= 1"\n'
        '[[require]]\nthat = "gain < 0.97"\nin = "left"\n'
    )
    exact = sqrt(1.9 / 2)
    r = proved(TWO.format(top="", more=more, x=9, v=9)).results
    assert verdicts(r)[0] == "refuted" and verdicts(r)[2] != "refuted"
    assert 0.97 < exact < float(r["gain"]["upper"]) and float(r["gain"]["lower"]) >= exact * (1 - 1e-9)
    said = r["requirements"][0]["limited_by"]
    assert said.startswith(
        "whatever the norms: Jacobians at the targets, around left, right, grow on average by 0.9745"
    )


def test_a_walk_of_one_stance_speaks_of_it() -> None:
    maps = 'x = "0.8*x + 0.3*v + d", v = "0.1*v - 0.3*x + e"'
    more = "".join(
        f'[stance.{s}]\nthen = {then}\nstate = {{ x = [-3, 3], v = [-3, 3] }}\ntarget = {{ x = 0, v = 0 }}\nnext = {{ {step} }}\n'
        for s, then, step in (("left", '["left", "right"]', maps), ("right", '"left"', 'x = "x/10 + d", v = "v/10 + e"'))
    )  # fmt: skip
    more += '[[require]]\nthat = "gain < 0.5"\nin = "left"\n[[require]]\nthat = "gain < 0.5"\nin = "right"\n'
    r = proved(TWO.format(top="", more=more, x=9, v=9)).results
    rate = np.abs(np.linalg.eigvals([[0.8, 0.3], [-0.3, 0.1]])).max()
    assert rate > 0.5 and verdicts(r)[0] == "refuted" and verdicts(r)[1] != "refuted"


def test_words_go_round_allowed_steps_only() -> None:
    grow, still = np.array([[[2.0, 0.0], [0.0, 1.0]]]), np.array([[[0.1, 0.0], [0.0, 0.1]]])
    jacobians = {"a": grow, "b": still}
    alone = fastest_round(jacobians, {"a": ["a", "b"], "b": ["a"]})
    assert alone is not None and set(alone.stances) == {"a"} and abs(alone.rate - 2) <= 1e-2
    turn = fastest_round(jacobians, {"a": ["b"], "b": ["a"]})
    assert turn is not None and set(turn.stances) == {"a", "b"} and abs(turn.rate - sqrt(0.2)) <= 1e-2
    assert fastest_round(jacobians, {"a": ["b"], "b": ["b"]}).stances == ("b",)  # type: ignore[union-attr]
    assert fastest_round({"a": grow * 0}, {"a": ["a"]}) is None


WALKED = {"left": "-x/2 + w/10", "right": "x/3 + w/20"}


@pytest.mark.parametrize("steps", [2, 3])
def test_several_steps_together_give_away_nothing_more(steps: int) -> None:
    """Of one state single steps lose nothing: the same bounds at every step, and the gain of so many steps."""
    names = ["left", "right"]
    stances = {s: (names[1 - k], "[-8, 8]", "0", step) for k, (s, step) in enumerate(WALKED.items())}
    r = proved(graph(stances, "settles", "gain <= 1", top=f"horizon = {steps}")).results
    for s, exact in (("left", Q(1, 10)), ("right", Q(3, 20))):
        close(r, s, exact)
    gain = {2: Q(1, 6), 3: Q(1, 12)}[steps]  # of left, right, left: 1/4 1/3
    assert Q(r["gain"]["lower"]) <= gain <= Q(r["gain"]["upper"]) <= gain * (1 + Q(1, 10**9))
    assert verdicts(r) == ["proved", "proved"]


def test_more_steps_together_come_nearer_the_exact_sums() -> None:
    """Turned alternately, what one step allows for in every direction is not there eight steps later."""
    maps, size, more = matrices(3), np.array([0.02, 0.01]), ""
    for name, other in (("left", "right"), ("right", "left")):
        (a, b), (c, d) = maps[name]
        more += (
            f'[stance.{name}]\nthen = "{other}"\nstate = {{ x = [-3, 3], v = [-3, 3] }}\ntarget = {{ x = 0, v = 0 }}\n'
        )
        more += f'next = {{ x = "{a}*x + {b}*v + d", v = "{c}*x + {d}*v + e" }}\n'
    found = {}
    for steps in (1, 6):
        r = proved(TWO.format(top=f"horizon = {steps}\n[effort]\ngap = 0.02", more=more, x=9, v=9)).results
        found[steps] = {(s, x): span(r, s, x)[1] for s in maps for x in ("x", "v")}
    for name in maps:
        order = [maps["left"], maps["right"]] if name == "right" else [maps["right"], maps["left"]]
        total, power = np.zeros(2), np.eye(2)
        for n in range(400):
            total, power = total + np.abs(power) @ size, power @ order[n % 2]
        for x, exact in zip(("x", "v"), total, strict=True):
            near, far = (float(found[steps][name, x]) for steps in (6, 1))
            assert exact * (1 - 1e-12) <= near <= far and near <= 1.4 * exact, (name, x, exact, near, far)
    assert any(float(found[6][key]) < 0.8 * float(found[1][key]) for key in found[1])


def test_targets_move_on_the_way_of_several_steps() -> None:
    """x* = c and −2c, c moving by up to 1/100 a step: simulated courses stay within what two steps prove of each stance."""
    rest = "c = { range = [0, 0.2], held = true, change = 0.01 }\nw = [-1, 1]"
    stances = {
        "left": ("right left", "[-2, 2]", "c", "-2*c + (x - c)/2 + w/50"),
        "right": ("left", "[-2, 2]", "-2*c", "c + (x + 2*c)/4 + w*x/40"),
    }
    r = proved(graph(stances, "settles", top="horizon = 2\n[effort]\ncells = 300", rest=rest)).results
    assert verdicts(r) == ["proved"]
    rng, then = np.random.default_rng(0), {"left": ["right", "left"], "right": ["left"]}
    x, c, stance, drift = np.zeros(200), rng.uniform(0, 0.2, 200), "left", rng.choice([-1, 1], 200)
    upper = {s: float(span(r, s)[1]) for s in stances}
    for k in range(400):
        if k % 20 == 0:
            drift, push = rng.choice([-1, 1], 200), rng.choice([-1, 1], 200)
        x = -2 * c + (x - c) / 2 + push / 50 if stance == "left" else c + (x + 2 * c) / 4 + push * x / 40
        stance = then[stance][int(rng.integers(len(then[stance])))]
        c = np.clip(c + drift / 100, 0, 0.2)
        if k > 60:
            error = np.abs(x - (c if stance == "left" else -2 * c)).max()
            assert error <= upper[stance] * (1 + 1e-9), (k, stance, error)


@pytest.mark.parametrize("text, said", [
    ("horizon = 6", "more than 64 ways"), ('horizon = 2\n[dynamics]\nduration = 1\n[dynamics.start]\nX = "x"\n[dynamics.rate]\nX = "0*X"', "closed form"),
])  # fmt: skip
def test_what_cannot_be_taken_together_is_said_in_one_line(text: str, said: str) -> None:
    stances = dict.fromkeys(("a", "b"), ("a b", "[-1, 1]", "0", "x/2"))
    with pytest.raises(ClaimError) as caught:
        proved(graph(stances, top=text))
    line = str(caught.value)
    assert line.startswith("claim.toml: horizon: ") and said in line and "\n" not in line


def test_what_stays_open_with_a_horizon() -> None:
    stances = {s: (t, "[-1, 1]", "0", "x/2 + w/10") for s, t in (("a", "b"), ("b", "a"))}
    r = proved(graph(stances, "steps(x, 0.9, 0.3) <= 9", "settles", top="horizon = 2")).results
    assert verdicts(r) == ["undecided", "proved"] and "not counted yet" in r["requirements"][0]["limited_by"]


@pytest.mark.parametrize("top", ["", "horizon = 2"])
def test_ranges_of_a_requirement_have_orbits_of_their_own(top: str) -> None:
    """w twice as large: a bound of 3/10 on the right, which is not that of the claim's own range."""
    names = ["left", "right"]
    stances = {s: (names[1 - k], "[-8, 8]", "0", step) for k, (s, step) in enumerate(WALKED.items())}
    asked = [f'"bound(x) {c}"\nover = {{ w = [-2, 2] }}' for c in ("< 0.29", "<= 0.31")]
    r = proved(graph(stances, "bound(x) < 0.16", *asked, top=top)).results
    assert verdicts(r) == ["proved", "refuted", "proved"]
    assert abs(Q(r["requirements"][1]["value"]["lower"]) - Q(3, 10)) <= Q(1, 10**9)
    assert "takes x as far as 0.3 in right" in r["requirements"][1]["limited_by"]
