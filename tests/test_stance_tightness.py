"""How much is given away: residuals of gait libraries with stances, proved against simulated (scipy's DOP853).

The library's heights are smooth in speed, period, incline and load; its feet keep the speed of every node, so that what
is proved is the error of interpolation. `spaced` is also what tests/speed/stances.py times.
"""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from functools import cache
from itertools import pairwise
from typing import Any

import numpy as np
import pytest

from tests.conftest import ends, proved
from tests.simulation import Gaits, Quantity, Values, Walk, nominal
from ultibound.report.accepted import accepted_here
from ultibound.report.cells import residual_by_cell

SECOND = "12/T**2*bezier(t/T, z0 - 2*z1 + z2, 2*z1 - 2*z2, z0 - 2*z1 + z2)"  # of the curve of heights
RATE = {"x": "xd", "xd": "(9.81 + dt(dt(height)))/height*x"}
ONCE = 500  # runs integrated together
SPACINGS = ("0.3", "0.15", "0.05", "0.01")


def heights(v: Any, T: Any = 0.4, rise: Any = 0.0, load: Any = 0.0) -> Values:
    """Bezier points, from the ends to the middle of a stance, for any gait."""
    late = T - 0.4
    return {
        "z0": 0.58 + 0.02 * np.cos(2 * v + 5 * late) - 0.3 * rise * np.sin(1 + v) + 0.01 * load**2,
        "z1": 0.58 + 0.025 * np.cos(2 * v + 0.3 + 3 * late) - 0.004 * load + 2 * rise**2,
        "z2": 0.59 + 0.03 * np.cos(2.5 * v + 4 * late) + 0.005 * np.sin(load) * v,
    }


def lines(low: float, high: float, spacing: float) -> list[str]:
    return [f"{low + spacing * k:.4f}" for k in range(round((high - low) / spacing) + 1)]


def spaced(axes: Mapping[str, Sequence[str]], gap: str = "1e-3") -> Walk:
    """A claim about a library over axes v, and T, rise and load where wanted, all of its span uncertain."""
    grid = np.meshgrid(*([float(x) for x in each] for each in axes.values()), indexing="ij")
    at: Values = dict(zip(axes, (g.ravel() for g in grid), strict=True))
    z = heights(**at)
    region = float(axes["v"][0]), float(axes["v"][-1])
    ranges = {n: Quantity(float(x[0]), float(x[-1])) for n, x in axes.items() if n != "v"}
    start = {"x": "-foot", "xd": "(0.98 - 0.005*load)*v" if "load" in axes else "0.98*v"}
    height = {"height": "bezier(t/T, z0, z1, z2, z1, z0)"}
    aim = f"{sum(region) / 2:.3f}"
    feet = nominal(
        Walk(region, ranges, {**height, "foot": "0"}, start, RATE, "T", "xd", aim, SECOND), {"T": 0.4, **at, **z}
    )
    define = {**height, "shift": "kappa*(v - target(v))", "foot": "u + shift"}
    columns = {n: np.broadcast_to(c, at["v"].shape).reshape(grid[0].shape) for n, c in {**z, "u": feet}.items()}
    gaits = Gaits({f"{n}_node": list(x) for n, x in axes.items()}, columns)
    return Walk(
        region, ranges, define, start, RATE, "T", "xd", aim, SECOND, gaits, {f"{n}_node": n for n in axes}, "shift",
        ["settles"], gap, "cells = 200000\nseconds = 600", {"kappa": "0.09", **({} if "T" in axes else {"T": "0.4"})},
    )  # fmt: skip


def missed(walk: Walk, at: Values, corrected: bool = False) -> np.ndarray:
    """|N − v| by simulation, N the step without the correction unless it is asked for."""
    kept = {} if corrected else {"shift": 0.0}
    parts = np.array_split(np.arange(len(at["v"])), len(at["v"]) // ONCE + 1)
    return np.concatenate([
        np.abs(walk.landed({**{n: x[k] for n, x in at.items()}, **kept})[0] - at["v"][k]) for k in parts
    ])  # fmt: skip


def sampled(walk: Walk, places: Sequence[tuple[str, np.ndarray]]) -> np.ndarray:
    """|N − v| at all combinations of places, an array with an axis each."""
    grid = np.meshgrid(*(x for _, x in places), indexing="ij")
    at = {n: g.ravel() for (n, _), g in zip(places, grid, strict=True)}
    found = missed(walk, at)
    return found.reshape(grid[0].shape)


@cache
def one_dimension(spacing: str) -> tuple[float, float]:
    """The residual proved and sampled, over 0.9 m/s of speeds."""
    walk = spaced({"v": lines(0.1, 1.0, float(spacing))})
    certificate = proved(walk.text(), data=walk.data)
    results, cells = certificate.results, residual_by_cell(accepted_here(certificate))
    assert results["set"]["kind"] == "region" and len(cells) == round(0.9 / float(spacing))
    most = max(float(c.residual) for c in cells)
    assert most <= float(ends(results["routes"]["split"]["residual"])[1]) <= most * (1 + 1e-9)
    worst = np.array([sampled(walk, [("v", np.linspace(*map(float, c.ends["v"]), 81))]).max() for c in cells])
    assert np.all(worst <= [float(c.residual) + 1e-11 for c in cells])  # contained in every cell
    return most, float(worst.max())


@pytest.mark.parametrize("spacing", SPACINGS)
def test_residual_over_speeds(spacing: str) -> None:
    most, worst = one_dimension(spacing)
    assert worst <= most + 1e-11 and most <= 1.002 * worst


def test_residual_falls_with_the_square_of_the_spacing() -> None:
    for coarse, fine in pairwise(SPACINGS):
        (most, _), (less, _) = one_dimension(coarse), one_dimension(fine)
        square = (float(coarse) / float(fine)) ** 2
        assert 0.9 * square <= most / less <= 1.1 * square


@pytest.mark.parametrize("spacing", ["0.3", "0.15"])
def test_every_cell_by_itself(spacing: str) -> None:
    """One cell after another, the range of next(v) − v over it: as close in each."""
    walk = spaced({"v": lines(0.1, 1.0, float(spacing))})
    each = list(pairwise(walk.gaits.axes["v_node"] if walk.gaits else []))
    walk.asked = ["value(next(v) - v)"] * len(each)
    over = iter(f"over = {{ v = [{a}, {b}] }}\n" for a, b in each)
    head, *parts = walk.text().split("[[require]]\n")
    text = head + "".join(f"[[require]]\n{part}{next(over)}" for part in parts)
    found = proved(text, data=walk.data).results["requirements"]
    for (a, b), entry in zip(each, found, strict=True):
        assert entry["verdict"] == "proved"
        worst = missed(walk, {"v": np.linspace(float(a), float(b), 81)}, corrected=True).max()
        most = max(abs(float(x)) for x in ends(entry["value"]))
        assert worst <= most + 1e-11 and most <= 1.002 * worst


def test_residual_over_speeds_and_periods() -> None:
    walk = spaced({"v": lines(0.1, 1.0, 0.15), "T": lines(0.36, 0.44, 0.04)})
    certificate = proved(walk.text(), data=walk.data)
    cells = residual_by_cell(accepted_here(certificate))
    assert len(cells) == 12
    worst = []
    for c in cells:
        found = sampled(walk, [(n, np.linspace(*map(float, c.ends[n]), 33)) for n in ("v", "T")]).max()
        assert found <= float(c.residual) + 1e-11
        worst.append(found)
    most = max(float(c.residual) for c in cells)
    assert max(worst) <= most <= 1.01 * max(worst)


@pytest.mark.skipif(
    not os.environ.get("ULTIBOUND_LONG"), reason="takes some minutes: thousands of leaves in the checker's arithmetic"
)
def test_residual_over_four_axes() -> None:
    walk = spaced(
        {
            "v": lines(0.1, 0.5, 0.2),
            "T": lines(0.39, 0.41, 0.02),
            "rise": lines(-0.02, 0.02, 0.04),
            "load": lines(0, 1, 1),
        },
        "0.08",
    )
    certificate = proved(walk.text(), data=walk.data)
    cells = residual_by_cell(accepted_here(certificate))
    assert len(cells) == 2
    places = [(n, np.linspace(float(x[0]), float(x[-1]), 41 if n == "v" else 9)) for n, x in walk.gaits.axes.items()]
    worst = sampled(walk, [(n.removesuffix("_node"), x) for n, x in places]).max()
    most = max(float(c.residual) for c in cells)
    assert worst <= most <= 1.1 * worst
