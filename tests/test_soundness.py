"""Seeded random claims: no sampled slope, step or value lies beyond a proved end, and the proofs are not loose."""

from __future__ import annotations

import math
import os
import random
from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from tests.conftest import ends, proved

CLAIMS = 12 * (10 if os.environ.get("ULTIBOUND_LONG") else 1)


def library(rng: random.Random, jagged: bool) -> tuple[str, list[float], list[float], np.ndarray]:
    speeds = [-0.5, -0.1, 0.3, 0.6, 1.1]
    periods = [0.3, 0.4, 0.55]
    table = np.array(
        [[round(0.1 * v + (rng.uniform(-0.05, 0.05) if jagged else 0.02 * v * T), 4) for T in periods] for v in speeds]
    )
    rows = ["speed,period,reach"] + [
        f"{v},{T},{table[i, j]:.4f}".replace("-0.0000", "0.0")
        for i, v in enumerate(speeds)
        for j, T in enumerate(periods)
    ]
    return "\n".join(rows) + "\n", speeds, periods, table


def read(
    speeds: list[float], periods: list[float], table: np.ndarray, v: np.ndarray, T: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Multilinear value and its slope by speed."""
    i = np.clip(np.searchsorted(speeds, v, "right") - 1, 0, len(speeds) - 2)
    j = np.clip(np.searchsorted(periods, T, "right") - 1, 0, len(periods) - 2)
    s, p = np.array(speeds), np.array(periods)
    a, b = (v - s[i]) / (s[i + 1] - s[i]), (T - p[j]) / (p[j + 1] - p[j])
    low = table[i, j] + b * (table[i, j + 1] - table[i, j])
    high = table[i + 1, j] + b * (table[i + 1, j + 1] - table[i + 1, j])
    return low + a * (high - low), (high - low) / (s[i + 1] - s[i])


@pytest.mark.parametrize("seed", range(CLAIMS))
def test_library_claims(seed: int) -> None:
    """A jagged library, its speed axis read directly or at a shifted speed, region ends on grid lines or not."""
    rng = random.Random(seed)
    text, speeds, periods, table = library(rng, jagged=seed % 3 != 2)
    shift = rng.choice(["0", "0.1*d", "0.05"])
    low, high = rng.choice([(-0.1, 0.6), (-0.3, 0.6), (-0.1, 0.5), (0.3, 0.6)])
    gain, target = round(rng.uniform(0.2, 1.5), 3), round((low + high) / 2, 3)
    claim = f"""
format = 1
[state]
v = [{low}, {high}]
[uncertain]
T = {rng.choice(["[0.3, 0.4]", "[0.35, 0.5]", "[0.4, 0.55]"])}
d = [-0.3, 0.3]
[[library]]
file = "g.csv"
at = {{ speed = "v + {shift}", period = "T" }}
[next]
v = "0.4*v + {gain}*reach*cos(T + v) + 0.05*d*d"
[target]
v = {target}
[[require]]
that = "sensitivity(v, v)"
[[require]]
that = "value(next(v))"
[effort]
gap = 1e-3
cells = 20000
"""
    c = proved(claim, data={"g.csv": text})
    results: dict[str, Any] = c.results
    generator = np.random.default_rng(seed)
    size = 40000
    T0, T1 = (float(x) for x in claim.split("T = [")[1].split("]")[0].split(","))
    v, T, d = (generator.uniform(a, b, size) for a, b in ((low, high), (T0, T1), (-0.3, 0.3)))
    moved = {"0": 0 * d, "0.1*d": 0.1 * d, "0.05": 0 * d + 0.05}[shift]
    reach, slope = read(speeds, periods, table, v + moved, T)
    derivative = 0.4 + gain * (slope * np.cos(T + v) - reach * np.sin(T + v))
    value = 0.4 * v + gain * reach * np.cos(T + v) + 0.05 * d * d
    whole = results["set"] is not None and results["set"]["kind"] == "region"
    if not whole:  # the set is the ball about the target: keep the samples inside it
        r = float(min(target - low, high - target)) - 1e-9
        derivative, value = derivative[np.abs(v - target) <= r], value[np.abs(v - target) <= r]
    for entry, samples in zip(results["requirements"], (derivative, value), strict=True):
        a, b = (float(x) for x in ends(entry["value"]))
        assert a <= samples.min() + 1e-12 and samples.max() <= b + 1e-12
        inner = ends(entry["attained"])
        assert b - a <= 1.02 * float(inner[1] - inner[0]) + 4e-3, "loose"
        assert samples.max() <= b and float(inner[1]) >= samples.max() - 0.02 * (b - a)
    k = float(ends(results["gain"])[1])
    assert np.abs(derivative).max() <= k + 1e-12
    taken = float(ends(results["gain"])[0])
    assert taken >= np.abs(derivative).max() * (1 - 2e-3) - 1e-6 and taken <= k


FUNCTIONS = ["sin({})", "cos({})", "tanh({})", "exp(0.3*{})", "atan({})", "sqrt(2 + {})", "log(3 + {})", "1/(3 + {})", "({})**2",
             "({})**3", "sinh(0.5*{})", "cosh({})", "asin(0.3*{})", "acos(0.3*{})", "tan(0.4*{})", "(2 + {})**1.5", "(2 + {})**-2",
             "abs({})", "max({}, 0.1)", "min(0.2, {}, 0.5*d)", "clip({}, -0.2, 0.3)", "(0.2 + abs({} - 0.1))**1.5"]  # fmt: skip


@pytest.mark.parametrize("seed", range(CLAIMS))
def test_smooth_claims_contain_what_is_simulated(seed: int) -> None:
    """Random maps over all smooth functions: trajectories steered against the bound never leave it."""
    rng = random.Random(1000 + seed)
    inner = [rng.choice(FUNCTIONS).format(rng.choice(["v", "d", "v*d", "(v - d)", "h"])) for _ in range(3)]
    outer = rng.choice(FUNCTIONS).format(f"(0.4*{inner[0]})")
    expression = f"0.3*v + 0.12*{outer} + 0.1*{inner[1]} + 0.05*{inner[2]} - 0.2"
    text = f"""
format = 1
[state]
v = [-1, 1]
[uncertain]
d = [-0.5, 0.5]
h = {{ range = [-0.4, 0.4], held = true, change = 0.02 }}
[next]
v = "{expression}"
[target]
v = "0.2*h"
"""
    results = proved(text).results
    if results["bound"] is None:
        assert results["set"] is None or float(ends(results["gain"])[1]) >= 1
        return
    names = {n: getattr(np, {"asin": "arcsin", "acos": "arccos", "atan": "arctan"}.get(n, n)) for n in
             ("sin", "cos", "tanh", "exp", "atan", "sqrt", "log", "sinh", "cosh", "asin", "acos", "tan")}  # fmt: skip
    names |= {
        "abs": np.abs,
        "max": np.maximum,
        "clip": np.clip,
        "min": lambda *x: np.minimum(np.minimum(*x[:2]), x[-1]),
    }
    step = eval(f"lambda v, d, h: {expression}", names)  # a test's own text, not input
    generator = np.random.default_rng(seed)
    bound, size = float(ends(results["bound"])[1]), 3000
    low, high = (-1.0, 1.0) if results["set"]["kind"] == "region" else (0.0, 0.0)
    h = generator.uniform(-0.4, 0.4, size)
    radius = float(Fraction(results["radius"]["lower"]))
    v = generator.uniform(low, high, size) if low < high else 0.2 * h + radius * generator.uniform(-1, 1, size)
    for _ in range(80):
        choices = generator.uniform(-0.5, 0.5, (12, size))
        choices[0], choices[1] = -0.5, 0.5
        moves = np.clip(h + generator.choice([-0.02, 0.02], (12, size)), -0.4, 0.4)
        after = step(v, choices, h) + 0 * choices
        worst = np.argmax(np.abs(after - 0.2 * moves), axis=0)
        v, h = after[worst, np.arange(size)], moves[worst, np.arange(size)]
        assert np.all(np.abs(v) <= 1 + 1e-12) if low < high else np.all(np.abs(v - 0.2 * h) <= radius + 1e-12)
    assert np.abs(v - 0.2 * h).max() <= bound + 1e-9
    assert math.isfinite(bound)


@pytest.mark.parametrize("by, exact", [
    ("foot", lambda v, T, k: -np.sinh(T) * (1 + 0.2 * (np.cosh(T) * v - np.sinh(T) * (0.3 * v + k * (v - 0.1) + 0.05 * T * v)))),
    ("shift", lambda v, T, k: -np.sinh(T) * (1 + 0.2 * (np.cosh(T) * v - np.sinh(T) * (0.3 * v + k * (v - 0.1) + 0.05 * T * v)))),
    ("kappa", lambda v, T, k: -np.sinh(T) * (v - 0.1) * (1 + 0.2 * (np.cosh(T) * v - np.sinh(T) * (0.3 * v + k * (v - 0.1) + 0.05 * T * v)))),
    ("reach", lambda v, T, k: -np.sinh(T) * (1 + 0.2 * (np.cosh(T) * v - np.sinh(T) * (0.3 * v + k * (v - 0.1) + 0.05 * T * v)))),
    ("c", lambda v, T, k: 0 * v),
])  # fmt: skip
def test_sensitivities_follow_what_is_built_on_a_name_and_cut_what_it_is_built_from(by: str, exact: Any) -> None:
    """y = cosh T v − sinh T foot, next = y + 0.1 y²; foot = reach + shift; reach from a library that is bilinear itself."""
    rows = "speed,period,reach\n" + "".join(
        f"{v},{T},{0.3 * v + 0.05 * T * v:.4f}\n".replace("-0.0000", "0.0") for v in (-1, 0, 2) for T in (0, 0.5, 1)
    )
    text = f"""
format = 1
[constants]
c = 2
[gains]
kappa = 0.4
[state]
v = [-0.5, 0.5]
[uncertain]
T = [0.2, 0.7]
[[library]]
file = "g.csv"
at = {{ speed = "v", period = "T" }}
[define]
shift = "kappa*(v - target(v))"
foot = "reach + shift"
y = "cosh(T)*v - sinh(T)*foot"
[next]
v = "y + 0.1*y*y"
[target]
v = 0.1
[[require]]
that = "sensitivity(v, {by})"
over = {{ T = [0.2, 0.7], v = [-0.5, 0.5] }}
"""
    (entry,) = proved(text, data={"g.csv": rows}).results["requirements"]
    v, T = np.meshgrid(np.linspace(-0.5, 0.5, 201), np.linspace(0.2, 0.7, 201))
    samples = exact(v, T, 0.4)
    low, high = (float(x) for x in ends(entry["value"]))
    assert entry["verdict"] == "proved"
    assert low <= samples.min() + 1e-12 and samples.max() <= high + 1e-12
    assert high - low <= (samples.max() - samples.min()) * 1.005 + 5e-3


@pytest.mark.parametrize("axes", [1, 2, 3, 4])
def test_libraries_of_one_to_four_axes(axes: int) -> None:
    """A random table: values and slopes contain dense samples of scipy-free multilinear interpolation, and are tight."""
    rng = np.random.default_rng(axes)
    names = ["v", "p", "q", "r"][:axes]
    nodes = [0.0, 0.4, 1.0]
    table = rng.integers(-9, 10, (3,) * axes) / 10
    index = np.array(np.meshgrid(*[range(3)] * axes, indexing="ij")).reshape(axes, -1).T
    rows = ",".join(f"{n}_node" for n in names) + ",y\n"
    rows += "".join(",".join([*(str(nodes[k]) for k in i), str(table[tuple(i)])]) + "\n" for i in index)
    uncertain = "".join(f"{n} = [0.1, 0.9]\n" for n in names[1:]) or "unused = 0\n".replace("0", "[0, 0]")
    at = ", ".join(f'{n}_node = "{n}"' for n in names)
    claim = (
        f'format = 1\n[state]\nv = [0.1, 0.9]\n[uncertain]\n{uncertain}[[library]]\nfile = "t.csv"\nat = {{ {at} }}\n'
    )
    claim += '[next]\nv = "0.5 + 0.05*y"\n[target]\nv = 0.5\n[[require]]\nthat = "value(y)"\n[[require]]\nthat = "sensitivity(v, v)"\n'
    results = proved(claim, data={"t.csv": rows}).results
    points = rng.uniform(0.1, 0.9, (20000, axes))

    def interpolated(x: np.ndarray) -> np.ndarray:
        cell = (x >= 0.4).astype(int)
        low, width = np.where(cell, 0.4, 0.0), np.where(cell, 0.6, 0.4)
        share, total = (x - low) / width, np.zeros(len(x))
        for corner in np.ndindex(*(2,) * axes):
            weight = np.prod([share[:, k] if c else 1 - share[:, k] for k, c in enumerate(corner)], axis=0)
            total += weight * table[tuple(cell[:, k] + c for k, c in enumerate(corner))]
        return total

    step = np.zeros(axes)
    step[0] = 1e-6
    inside = np.abs(points[:, 0] - 0.4) > 2e-6
    slope = 0.05 * (interpolated(points + step) - interpolated(points - step))[inside] / 2e-6
    for entry, samples in zip(results["requirements"], (interpolated(points), slope), strict=True):
        low, high = (float(x) for x in ends(entry["value"]))
        assert entry["verdict"] == "proved"
        assert low <= samples.min() + 1e-7 and samples.max() <= high + 1e-7
        inner = ends(entry["attained"])
        assert high - low <= 1.005 * float(inner[1] - inner[0]) + 1e-6


@pytest.mark.parametrize("that, over", [
    ("sensitivity(v, p) <= 0", ""), ("sensitivity(v, half) <= 0", ""), ("value(2**p) <= 4", "over = { p = [1, 5] }"), ("value(T)", "over = { slack = [0, 1] }"),
    ("value(T)", "over = { base = [0, 1] }"),
])  # fmt: skip
def test_names_folded_into_exponents_and_ranges_are_not_followed(that: str, over: str) -> None:
    """Exponents and range ends are taken at their values: a derivative or range by such a name would be wrong."""
    from ultibound.checker.derive import Derivation, Unprovable
    from ultibound.checker.derive import Domain as CheckerDomain
    from ultibound.checker.statement import read_statement
    from ultibound.claim import ClaimError

    text = f"""
format = 1
[gains]
half = 1
p = "2*half"
base = 0.1
slack = "base/2"
[state]
v = [-1, 1]
[uncertain]
T = ["0.3 - slack", "0.3 + slack"]
[next]
v = "0.1*v + 0.01*(1 + T)**p"
[target]
v = 0
[[require]]
that = "{that}"
{over}
"""
    with pytest.raises(ClaimError, match="cannot be followed"):
        proved(text)
    derivation = Derivation(read_statement(text, {}, {}))
    with pytest.raises(Unprovable, match="not followed"):
        derivation.meaning("require[1]", CheckerDomain(False, Fraction(0), (Fraction(0), Fraction(0))))


@pytest.mark.parametrize("where", ["[0.4, 0.4]", "{ values = [0.4] }"])
def test_a_derivative_on_a_grid_line_counts_both_sides(where: str) -> None:
    """Slopes +1 below and -2 above the node 0.4: no sign can be proved there, whatever the range."""
    table = "period,y\n0.3,-0.1\n0.4,0\n0.5,-0.2\n"
    text = f"""
format = 1
[state]
v = [-1, 1]
[uncertain]
T = {where}
[[library]]
file = "g.csv"
at = {{ period = "T" }}
[next]
v = "0.1*v + y"
[target]
v = 0
[[require]]
that = "sensitivity(v, T) < 0"
[[require]]
that = "sensitivity(v, T) > -1"
"""
    results = proved(text, data={"g.csv": table}).results
    assert [r["verdict"] for r in results["requirements"]] == ["undecided", "undecided"]
    low, high = ends(results["requirements"][0]["value"])
    assert low <= -2 and high >= 1 and high - low < Fraction(301, 100)


@pytest.mark.parametrize("constant, uncertain, at, nodes, by", [
    ('c = "sinh(0)"', "d = [0, 0]", "c", "-1,1\n0,0\n1,1\n", "c"), ('c = "cos(0)"', "d = [0, 0]", "c", "0,1\n1,0\n2,1\n", "c"),
    ("c = 0", "T = { values = [0] }", "sinh(T)", "-1,1\n0,0\n1,1\n", "T"), ("c = 0", "T = [0, 0]", "asin(T)", "-1,1\n0,0\n1,1\n", "T"),
])  # fmt: skip
@pytest.mark.parametrize("relation", ["> 0", "< 0"])
def test_an_irrational_axis_on_a_grid_line_counts_both_sides(
    constant: str, uncertain: str, at: str, nodes: str, by: str, relation: str
) -> None:
    """Slopes -1 below and +1 above the node, which a one-sided enclosure of the axis would hide."""
    text = f"""
format = 1
[constants]
{constant}
[state]
v = [-1, 1]
[uncertain]
{uncertain}
[[library]]
file = "g.csv"
at = {{ u = "{at}" }}
[next]
v = "0.5*v + 0.1*y"
[target]
v = 0
[[require]]
that = "sensitivity(v, {by}) {relation}"
"""
    (entry,) = proved(text, data={"g.csv": "u,y\n" + nodes}).results["requirements"]
    low, high = ends(entry["value"])
    assert entry["verdict"] == "undecided"
    assert low <= Fraction(-1, 10) and high >= Fraction(1, 10) and high - low < Fraction(201, 1000)


def test_irrational_held_ranges_do_not_refute_what_is_true_with_equality() -> None:
    """The target moves by exactly 2 sqrt 2: `residual <= sqrt(8)` is true, so no attained value may lie beyond."""
    text = """
format = 1
route = "slope"
[state]
v = [-20, 20]
[uncertain]
h = { range = ["-sqrt(2)", "sqrt(2)"], held = true, change = 100 }
[next]
v = "0.5*(v - h) + h"
[target]
v = "h"
[[require]]
that = "residual <= sqrt(8)"
[[require]]
that = "residual <= 2.8284271247461900977"
"""
    results = proved(text).results
    assert [r["verdict"] for r in results["requirements"]] == ["undecided", "proved"]
    low, high = ends(results["residual"])
    assert low**2 <= 8 <= high**2 and high - low < Fraction(1, 10**18)


def test_a_ball_of_no_radius_proves_no_gain() -> None:
    """A target at the edge of a region that is left: one point is no set to contract on."""
    text = 'format = 1\n[state]\nv = [0, 1]\n[next]\nv = "2*v"\n[target]\nv = 0\n[[require]]\nthat = "gain < 3"\n[[require]]\nthat = "value(v) < 1"\n'
    assert [r["verdict"] for r in proved(text).results["requirements"]] == ["undecided", "undecided"]
