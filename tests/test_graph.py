"""Stances that follow one another: bounds against exact sums, what may follow what, and what cannot be proved yet."""

from __future__ import annotations

import json
from fractions import Fraction as Q
from itertools import product
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from tests.conftest import assert_encloses, ends, proved
from ultibound.checker import check
from ultibound.claim import ClaimError, parse_claim


def graph(stances: dict[str, tuple[str, Any, str, str]], *asked: str, top: str = "", rest: str = "w = [-1, 1]") -> str:
    """A claim of one state x: of each stance what follows, its range, its target and its map."""
    text = f"format = 1\n{top}\n[uncertain]\n{rest}\n"
    for name, (then, span, target, step) in stances.items():
        text += f"[stance.{name}]\nthen = {json.dumps(then.split())}\nstate = {{ x = {span} }}\n"
        text += f'target = {{ x = "{target}" }}\nnext = {{ x = "{step}" }}\n'
    return text + "".join(
        f"[[require]]\nthat = {r}\n" if r.startswith('"') else f'[[require]]\nthat = "{r}"\n' for r in asked
    )


def just_above(upper: str, exact: Q) -> None:
    """A proved upper end, with next to nothing given away."""
    assert exact <= Q(upper) <= exact * (1 + Q(1, 10**9)), (upper, float(exact))


def verdicts(results: dict[str, Any]) -> list[str]:
    return [r["verdict"] for r in results["requirements"]]


def alternating(a: Q, b: Q, u: Q, v: Q, *asked: str) -> dict[str, Any]:
    """x⁺ = a x + u w on the left, b x + v w on the right."""
    wide = 8 * abs(a) + 1
    stances = {
        "left": ("right", "[-8, 8]", "0", f"{a}*x + w*{u}"),
        "right": ("left", f'["-{wide}", "{wide}"]', "0", f"{b}*x + w*{v}"),
    }
    return proved(graph(stances, *asked)).results


@pytest.mark.parametrize("a, b", [("1/2", "1/3"), ("3/2", "1/4"), ("1/10", "-2"), ("0", "5"), ("-9/10", "9/10")])
def test_alternating_linear_maps_have_their_exact_limit_sets(a: str, b: str) -> None:
    """b_left = (v + |b|u)/(1 − |ab|), a geometric series; gain: the larger of both; radii and pushes exactly."""
    u, v = Q(1, 10), Q(1, 20)
    p, q = abs(Q(a)), abs(Q(b))
    left, right = (v + q * u) / (1 - p * q), (u + p * v) / (1 - p * q)
    r = alternating(Q(a), Q(b), u, v, "settles", f"bound(x) <= {max(left, right)}", f'"bound(x) <= {left}"\nin = "left"', f"gain <= {max(p, q)}",
                    f'"gain <= {p}"\nin = "left"', f'"residual <= {v}"\nin = "right"')  # fmt: skip
    assert verdicts(r) == ["proved"] * 6
    assert r["set"]["kind"] == "region"
    for name, bound, room in (("left", left, 8), ("right", right, 8 * p + 1)):
        state = r["stances"][name]["states"]["x"]
        just_above(state["bound"]["upper"], bound)
        assert Q(state["radius"]["lower"]) == room and abs(Q(state["push"]["lower"]) - (room - bound)) < Q(1, 10**12)
    assert_encloses(r["bound"], max(left, right), "1e-9")
    assert_encloses(r["gain"], max(p, q), "1e-9")
    assert_encloses(r["residual"], max(u, v), "1e-9")


def test_a_hair_below_what_is_exact_is_refuted() -> None:
    """By an orbit that goes round and round with both steps at their worst: what it reaches is the bound itself."""
    r = alternating(
        Q(1, 2),
        Q(1, 3),
        Q(1, 10),
        Q(1, 20),
        "bound(x) <= 0.14999999",
        '"bound(x) <= 0.0999999"\nin = "left"',
        "gain < 0.5",
        '"gain < 1/3"\nin = "right"',
        "residual < 0.1",
    )
    assert verdicts(r) == ["refuted"] * 5


def test_any_order_has_the_bound_of_the_worst_order() -> None:
    """Three stances, all orders: b_t = max over s of k_st b_s + ε_st, here of the targets' distances too."""
    targets, gains, spread = (
        {"a": Q(0), "b": Q(1, 10), "c": Q(-1, 5)},
        {"a": Q(1, 2), "b": Q(1, 3), "c": Q(1, 4)},
        Q(1, 50),
    )
    names = "a b c"
    stances = {s: (names, "[-3, 3]", str(t), f"{gains[s]}*x + w*{spread}") for s, t in targets.items()}
    b = dict.fromkeys(targets, Q(0))
    for _ in range(80):
        b = {
            t: max(gains[s] * b[s] + abs(gains[s] * targets[s] - targets[t]) + spread for s in targets) for t in targets
        }
    r = proved(graph(stances, "settles", "bound(x) <= 1")).results
    assert verdicts(r) == ["proved"] * 2
    for s in targets:
        state = r["stances"][s]["states"]["x"]["bound"]
        just_above(state["upper"], b[s])


def test_only_the_steps_that_are_allowed_count() -> None:
    """Twice 3/2 in a row would expand; alternating with 1/4 it does not."""
    stances = {"a": ("b", "[-1, 1]", "0", "1.5*x + 0.01*w"), "b": ("a", "[-2, 2]", "0", "x/4 + 0.01*w")}
    assert verdicts(proved(graph(stances, "settles")).results) == ["proved"]
    loose = {**stances, "a": ("b a", *stances["a"][1:])}
    assert verdicts(proved(graph(loose, "settles")).results) == ["undecided"]


def test_steps_are_the_worst_of_all_orders_allowed() -> None:
    """From 1 on the right: 1/4, 3/8, 3/32, 9/64, 9/256: within 1/10 for good after 5 steps (9/64 is the last above)."""
    stances = {"a": ("b", "[-1, 1]", "0", "1.5*x"), "b": ("a", "[-2, 2]", "0", "x/4")}
    asked = [
        '"steps(x, 1, 0.1) <= 5"\nin = "b"',
        '"steps(x, 1, 0.1) <= 4"\nin = "b"',
        '"steps(x, 1, 0.1) <= 6"\nin = "a"',
        "steps(x, 1, 0.1) <= 6",
        "steps(x, 1, 0.1) <= 5",
    ]
    worst = []
    for k in (1, 0):
        levels, n, x = [], 0, Q(1)
        while n < 40:
            levels.append(x)
            x *= Q(1, 4) if (n + k) % 2 else Q(3, 2)
            n += 1
        worst.append(max((i + 1 for i, y in enumerate(levels) if y > Q(1, 10)), default=0))
    assert worst == [5, 6]
    found = proved(graph(stances, *asked)).results
    assert verdicts(found) == ["proved", "refuted", "proved", "proved", "refuted"]
    assert [found["requirements"][n]["value"] for n in (1, 4)] == [{"lower": str(n), "upper": str(n)} for n in worst]


def test_balls_that_are_kept_where_the_regions_are_not() -> None:
    """x⁺ = x³: the region [−1/2, 2] is left, the ball of radius 1/2 about 0 is kept by way of a stance that shrinks."""
    stances = {"a": ("b", "[-0.5, 2]", "0", "x**3 + 0.01*w"), "b": ("a", "[-3, 3]", "0", "x/12 + 0.01*w")}
    r = proved(graph(stances, "settles", "radius(x) >= 0.5")).results
    assert verdicts(r) == ["proved"] * 2 and r["set"]["kind"] == "ball"
    assert [r["stances"][s]["set"]["radius"]["lower"] for s in "ab"] == ["0.5", "3"]


def test_smaller_balls_count_where_the_claim_says_so() -> None:
    stances = {"a": ("b", "[-1, 1]", "0", "x + x**3 + 0.001*w"), "b": ("a", "[-1, 1]", "0", "x/2")}
    asked = ("settles", "radius(x) >= 0.5", "bound(x) <= 0.1")
    for top, wanted in (("", ["undecided", "proved", "undecided"]), ("shrink = true", ["proved"] * 3)):
        r = proved(graph(stances, *asked, top=top)).results
        assert r["set"]["kind"] == "smaller ball" and verdicts(r) == wanted


def test_ranges_are_over_every_stance_or_one() -> None:
    stances = {"a": ("b", "[0, 1]", "0.5", "1 - x"), "b": ("a", "[0, 2]", "0.5", "x/2")}
    asked = ["value(x)", '"value(x)"\nin = "a"', "always(x <= 1)", '"always(x <= 1)"\nin = "a"', "sensitivity(x, x) <= 1/2", '"sensitivity(x, x) < 0"\nin = "a"',
             '"value(x) <= 1/4"\nover = { x = [0, "1/4"] }']  # fmt: skip
    r = proved(graph(stances, *asked)).results
    assert verdicts(r) == ["proved", "proved", "refuted", "proved", "proved", "proved", "proved"]
    assert [ends(x["value"]) for x in r["requirements"][:2]] == [(0, 2), (0, 1)]
    assert ends(r["requirements"][4]["value"]) == (-1, Q(1, 2)) and len(r["sensitivities"]) == 2


def test_ranges_of_its_own_have_sets_and_gains_of_their_own() -> None:
    """Bounds are those of the claim that has these ranges, exactly; of a state in the stances it is about."""
    narrow = 'over = { w = ["-1/2", "1/4"] }'
    stances = {"left": ("right", "[-8, 8]", "0", "k*x + w/10"), "right": ("left", "[-5, 6]", "0", "x/3 + w/20")}
    asked = [
        "bound(x) <= 1", f'"bound(x) <= 1"\n{narrow}', f'"bound(x) <= 1"\n{narrow}\nin = "right"', '"gain <= 3/5"\nover = { k = [0, "3/5"] }',
        '"radius(x) >= 9/2"\nover = { x = ["-9/2", 5] }\nin = "right"', '"radius(x) >= 3"\nover = { x = [-3, 3] }', '"settles"\nover = { k = ["-1/2", "3/5"] }', '"settles"\nover = { k = [3, 4] }', '"steps(x, 1, 1/5) <= 3"\nover = { w = [0, 0] }',
    ]  # fmt: skip
    c = proved(graph(stances, *asked, rest="w = [-1, 1]\n[gains]\nk = 0.5"))
    found = c.results["requirements"]
    assert [r["verdict"] for r in found] == ["proved"] * 7 + ["undecided", "proved"]
    left, right = (Q(1, 20) + Q(1, 3) * Q(1, 10)) / (1 - Q(1, 6)), (Q(1, 10) + Q(1, 2) * Q(1, 20)) / (1 - Q(1, 6))
    for n, exact in ((0, max(left, right)), (1, max(left, right) / 2), (2, right / 2), (3, Q(3, 5)), (8, Q(2))):
        just_above(found[n]["value"]["upper"], exact)
    assert [found[n]["value"]["lower"] for n in (4, 5)] == ["4.5", "3"]
    assert "over leaves out values of w" in found[1]["limited_by"] and found[3]["limited_by"] is None
    names = [x["proves"] for x in c.entries["proof"]]
    assert "over[3]:left>right:slope" in names and not any(n.startswith("over[1]") for n in names)


def test_ranges_of_its_own_that_a_bound_rests_on_are_refused() -> None:
    stances = {"a": ("b", '[-1, "m"]', "0", "x/2"), "b": ("a", "[-1, 1]", "0", "x/2")}
    with pytest.raises(ClaimError, match="m cannot be followed"):
        proved(graph(stances, '"settles"\nover = { m = [1, 2] }', rest="w = [-1, 1]\n[gains]\nm = 1"))
    with pytest.raises(ClaimError, match="outside the region"):
        proved(graph({"a": ("a", "[-1, 1]", "0.5", "x/2")}, '"settles"\nover = { x = [-1, 0] }'))


def test_a_target_that_moves_is_that_of_the_stance_that_follows() -> None:
    """x* = c on the left, −2c on the right: ε of left → right is |−2|δ + the miss, of right → left δ."""
    held = "c = { range = [0.1, 0.2], held = true, change = 0.01 }\nw = [-1, 1]"
    stances = {
        "left": ("right", "[-1, 1]", "c", "-2*c + (x - c)/2"),
        "right": ("left", "[-1.5, 1.5]", "-2*c", "c + (x + 2*c)/2 + 0.001*w"),
    }
    r = proved(
        graph(
            stances,
            '"residual <= 0.02"\nin = "left"',
            '"residual <= 0.011"\nin = "right"',
            '"residual < 0.02"\nin = "left"',
            "settles",
            rest=held,
        )
    ).results
    assert verdicts(r) == ["proved", "proved", "undecided", "proved"]
    left = (Q(11, 1000) + Q(1, 2) * Q(2, 100)) / (1 - Q(1, 4))
    bound = r["stances"]["left"]["states"]["x"]["bound"]["upper"]
    just_above(bound, left)


TWO = """format = 1
{top}
[uncertain]
d = [-0.02, 0.02]
e = [-0.01, 0.01]
{more}
[[require]]
that = "settles"
[[require]]
that = "bound(x) <= {x}"
[[require]]
that = "bound(v) <= {v}"
"""


def matrices(seed: int) -> dict[str, np.ndarray]:
    """Two matrices to three decimals whose product contracts, mirror images of each other for even seeds."""
    rng = np.random.default_rng(seed)
    a = rng.uniform(-1, 1, (2, 2))
    turn = np.diag([1.0, -1.0])
    b = turn @ a @ turn if seed % 2 == 0 else rng.uniform(-1, 1, (2, 2))
    scale = rng.uniform(0.4, 0.8) / np.sqrt(np.abs(np.linalg.eigvals(b @ a)).max())
    return {"left": np.round(a * scale, 3), "right": np.round(b * scale, 3)}


@pytest.mark.parametrize("seed", range(6))
def test_two_states_hold_the_exact_sums(seed: int) -> None:
    """In the long run on the right sup |e| = Σ_n |(A B)ⁿ| (|d|, |e|)ᵀ + |(A B)ⁿ A| …: below every bound, and not far.

    An orbit whose round is as long as the sum takes to fade reaches nearly all of it.
    """
    maps, size = matrices(seed), np.array([0.02, 0.01])
    more = ""
    for name, other in (("left", "right"), ("right", "left")):
        (a, b), (c, d) = maps[name]
        order = "x = [-3, 3], v = [-3, 3]" if name == "left" else "v = [-3, 3], x = [-3, 3]"
        more += f'[stance.{name}]\nthen = "{other}"\nstate = {{ {order} }}\ntarget = {{ x = 0, v = 0 }}\n'
        more += f'next = {{ x = "{a}*x + {b}*v + d", v = "{c}*x + {d}*v + e" }}\n'
    exact = {}
    for name in maps:
        order = [maps["left"], maps["right"]] if name == "right" else [maps["right"], maps["left"]]
        total, power = np.zeros(2), np.eye(2)
        for n in range(400):
            total, power = total + np.abs(power) @ size, power @ order[n % 2]
        exact[name] = total
    r = proved(TWO.format(top="", more=more, x=9, v=9)).results
    assert verdicts(r) == ["proved"] * 3
    for name, total in exact.items():
        found = np.array([float(r["stances"][name]["states"][s]["bound"]["upper"]) for s in ("x", "v")])
        assert np.all(found >= total * (1 - 1e-9)) and np.all(found <= 3 * total), (name, found, total)
        taken = np.array([float(r["stances"][name]["states"][s]["bound"]["lower"]) for s in ("x", "v")])
        assert np.all(taken <= total * (1 + 1e-12)) and np.all(taken >= 0.999 * total), (name, taken, total)


@pytest.mark.parametrize("kind", ["box", "polytope", "ellipsoid"])
def test_a_norm_of_the_kind_that_is_asked_for(kind: str) -> None:
    more = "".join(
        f'[stance.{a}]\nthen = "{b}"\nstate = {{ x = [-1, 1], v = [-1, 1] }}\ntarget = {{ x = 0, v = 0 }}\n'
        f'next = {{ x = "x/2 + v/4 + d", v = "v/3 - {k}*x/5 + e" }}\n' for a, b, k in (("left", "right", 1), ("right", "left", -1))
    )  # fmt: skip
    r = proved(TWO.format(top="", more=f'[metric]\nkind = "{kind}"\n{more}', x="0.2", v="0.2")).results
    assert verdicts(r) == ["proved"] * 3
    assert all(r["stances"][s]["metric"]["kind"] == kind for s in ("left", "right"))


@pytest.mark.parametrize("change, place", [
    ('route = "sector"\ncorrection = ["f"]', "route"), ('horizon = 2\nroute = "split"\ncorrection = ["f"]', "horizon"),
])  # fmt: skip
def test_what_cannot_be_proved_yet_is_said_in_one_line(change: str, place: str) -> None:
    stances = {"a": ("b", "[-1, 1]", "0", "x/2"), "b": ("a", "[-1, 1]", "0", "x/2")}
    top = change if not change.startswith("[") else ""
    text = graph(stances, top=top) + ("" if top else change)
    with pytest.raises(ClaimError) as caught:
        proved(text.replace("[uncertain]", '[define]\nf = "x"\n[uncertain]'))
    line = str(caught.value)
    assert line.startswith(f"claim.toml: {place}: ") and "\n" not in line


@pytest.mark.parametrize("old, new, said", [
    ('then = ["b"]', "", "then"), ('then = ["b"]', "then = []", "then"), ('then = ["b"]', 'then = ["up"]', "expected; known: a, b"), ('in = "a"', 'in = "up"', "up"),
])  # fmt: skip
def test_stances_without_a_successor_or_unknown_are_refused(old: str, new: str, said: str) -> None:
    text = graph({"a": ("b", "[-1, 1]", "0", "x/2"), "b": ("a", "[-1, 1]", "0", "x/2")}, '"settles"\nin = "a"')
    assert old in text
    with pytest.raises(ClaimError, match=said):
        proved(text.replace(old, new))


def test_a_point_at_which_one_stance_is_not_defined_is_shown() -> None:
    with pytest.raises(ClaimError, match="division by zero"):
        proved(graph({"a": ("b", "[-1, 1]", "0", "x/2"), "b": ("a", "[-1, 1]", "0", "0.1/(x - 0.5)")}))


def test_a_single_stance_that_follows_itself_is_the_plain_map() -> None:
    text = graph({"only": ("only", "[-1, 1]", "0.1", "0.4*x + 0.06 + 0.01*w")}, "settles", "gain <= 0.4")
    r = proved(text).results
    plain = proved(
        'format = 1\n[state]\nx = [-1, 1]\n[uncertain]\nw = [-1, 1]\n[target]\nx = 0.1\n[next]\nx = "0.4*x + 0.06 + 0.01*w"\n[[require]]\nthat = "settles"\n'
    ).results
    assert verdicts(r) == ["proved"] * 2
    assert all(Q(r[x]["upper"]) == Q(plain[x]["upper"]) for x in ("gain", "residual", "bound"))


DYNAMIC = """format = 1
title = "Sideways, over each foot in turn, with a gust"
[constants]
g = 9.81
z = 0.62
[gains]
kappa = 0.27
[uncertain]
T = [0.36, 0.40]
slip = [-0.003, 0.003]
gust = { range = [-0.02, 0.02], within = true }
[define]
w = "sqrt(g/z)"
foot = "target(vy)/(w*tanh(w*0.19)) + kappa*(vy - target(vy)) + slip"
[dynamics]
duration = "T"
[dynamics.start]
y = "-foot"
yd = "vy"
[dynamics.rate]
y = "yd"
yd = "g/z*y + gust"
[next]
vy = "yd"
[stance.left]
then = "right"
state = { vy = [0.02, 0.5] }
target = { vy = 0.25 }
[stance.right]
then = "left"
state = { vy = [-0.5, -0.02] }
target = { vy = -0.25 }
[[require]]
that = "settles"
[[require]]
that = "gain <= 0.0928"
[[require]]
that = "throughout(y <= -0.0001)"
in = "left"
[[require]]
that = "bound(vy) <= 0.0793"
[[require]]
that = "throughout(y >= 0)"
"""


def test_a_continuous_stance_over_each_foot() -> None:
    """As in closed form, x⁺ = cosh(wT) v − w sinh(wT) foot, plus what a gust adds: at most 0.02 sinh(wT)/w."""
    r = proved(DYNAMIC).results
    assert verdicts(r) == ["proved", "proved", "proved", "proved", "refuted"]
    w, times = np.sqrt(9.81 / 0.62), np.linspace(0.36, 0.40, 4001)
    k = np.abs(np.cosh(w * times) - 0.27 * w * np.sinh(w * times)).max()
    foot = 0.25 / (w * np.tanh(0.19 * w))
    missed = np.abs(np.cosh(w * times) * 0.25 - w * np.sinh(w * times) * foot + 0.25) + np.sinh(w * times) * (
        0.003 * w + 0.02 / w
    )
    bound = missed.max() / (1 - k)
    upper = float(r["bound"]["upper"])
    assert bound <= upper <= bound * 1.002
    assert 0.9 * bound <= float(r["bound"]["lower"]) <= upper
    assert all(float(r["stances"][s]["states"]["vy"]["bound"]["lower"]) >= 0.9 * bound for s in ("left", "right"))
    assert abs(float(r["gain"]["upper"]) - k) <= 1e-4


def test_the_example_is_proved() -> None:
    text = (Path(__file__).parents[1] / "ultibound" / "examples" / "sidestepping.toml").read_text()
    assert set(verdicts(proved(text).results)) == {"proved"}


def test_the_command_shows_every_stance() -> None:
    from io import StringIO

    from rich.console import Console

    from ultibound.report.terminal import outcome

    text = graph(
        {"a": ("b", "[-1, 1]", "0", "x/2 + 0.01*w"), "b": ("a", "[-1, 1]", "0", "x/3")},
        "settles",
        '"settles"\nin = "a"',
    )
    console = Console(record=True, width=120, file=StringIO())
    console.print(outcome(parse_claim(text, {}, {}, "claim.toml"), proved(text).results))
    text = console.export_text()
    assert all(
        x in text for x in ("stance", "│ x     │ 0", "settles in a", "certified set: the region of every stance")
    )


def test_the_same_bytes_again() -> None:
    text = graph(
        {s: ("a b", "[-1, 1]", "0", f"0.3*sin(x) + {k}*w") for s, k in product(("a", "b"), ("0.01",))}, "settles"
    )
    first, second = proved(text), proved(text)
    assert first.to_bytes() == second.to_bytes() and check(first.to_bytes()).status == "valid"
