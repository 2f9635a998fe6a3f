"""Pushes at any instant of a stance, in claims of several states and of stances: against closed forms and simulation."""

from __future__ import annotations

import os
from fractions import Fraction
from math import cosh, sinh
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from tests.conftest import ends, proved
from ultibound.bounding.intervals import Floats
from ultibound.claim import ClaimError

LONG = os.environ.get("ULTIBOUND_LONG") == "1"
SWAYING = Path(__file__).parents[1] / "ultibound" / "examples" / "swaying.toml"

LEVEL = """format = 1
[state]
x = { range = [-0.2, 0.2], unit = "m" }
v = { range = [-0.6, 0.6], unit = "m/s" }
[uncertain]
slip = [-0.001, 0.001]
[define]
foot = "1.25*(x + v/4) + slip"
[dynamics]
duration = 0.35
[dynamics.start]
p = "x - foot"
pd = "v"
[dynamics.rate]
p = "pd"
pd = "16*p"
[next]
x = "foot + p"
v = "pd"
[target]
x = 0
v = 0
[metric]
kind = "ellipsoid"
"""


def asked(*requirements: str) -> str:
    return LEVEL + "".join(f'[[require]]\nthat = "{r}"\n' for r in requirements)


def lines_of(entries: dict[str, Any], start: str) -> dict[str, dict[str, str]]:
    return {
        x["proves"]: x["concludes"] for x in entries["proof"] if x["rule"] == "range" and x["proves"].startswith(start)
    }


def test_growth_at_constant_height() -> None:
    """By what is left of the stance, s: cosh 4s of what is pushed itself, sinh(4s)/4 and 4 sinh 4s of the other."""
    c = proved(
        asked(
            "settles", "push(v, during) >= 0.01", "push(x, during) >= 0.001", "push(v, during) >= 0.3", "push(v) >= 0.3"
        )
    )
    assert [r["verdict"] for r in c.results["requirements"]] == ["proved"] * 3 + ["undecided", "proved"]
    assert "beyond what is proved" in c.results["requirements"][3]["limited_by"]
    top, slope = Fraction(cosh(1.4)), Fraction(sinh(1.4))
    found = lines_of(c.entries, "growth")
    exact = {"v,v": (1, top), "x,x": (1, top), "x,v": (0, slope / 4), "v,x": (0, slope * 4)}
    assert set(found) == {f"growth[{n}]" for n in exact}
    for name, (low, high) in exact.items():
        lower, upper = ends(found[f"growth[{name}]"])
        near = Fraction(2, 1000) * high
        assert low - near <= lower <= low and high * (1 - Fraction(1, 10**12)) <= upper <= high + near, name
    # all that is left of the radius, over what a push grows to: at least that of one right after touchdown, at most
    # that of the corner where both are largest
    left = Fraction(c.results["radius"]["lower"]) - Fraction(c.results["bound"]["upper"])
    assert c.results["metric"]["kind"] == "ellipsoid"
    (a, b), (_, d) = [[Fraction(x) for x in row] for row in c.results["metric"]["matrix"]]
    assert b > 0  # so that what has the same sign is farthest
    for n, (x, v) in ((1, (slope / 4, top)), (2, (top, slope * 4))):
        value = Fraction(c.results["requirements"][n]["value"]["lower"])
        grown = a * x * x + 2 * b * x * v + d * v * v
        assert left**2 / grown * Fraction(98, 100) <= value**2 <= left**2 / grown * (1 + Fraction(1, 10**9))


@pytest.mark.parametrize(
    "old, new, reason",
    [
        ('v = "pd"', 'v = "pd + p/9"', "has no place"),
        ('v = "pd"', 'v = "0.9*pd"', "has no place"),
        ('x = "foot + p"', 'x = "foot + p*p"', "next.x is not linear in the continuous states, so"),
        ('x = "foot + p"', 'x = "foot + abs(p)"', "next.x is not linear in the continuous states (it has corners), so"),
        ('pd = "16*p"', 'pd = "16*p - pd"', "without damping"),
    ],
)
def test_pushes_that_cannot_be_followed(old: str, new: str, reason: str) -> None:
    text = asked("settles", "push(v, during) >= 0.01")
    assert text.count(old) == 1
    with pytest.raises(ClaimError, match=r"require\[2\]") as error:
        proved(text.replace(old, new))
    assert reason in str(error.value)


def swayed(v: Floats, bound: float, left: bool, state: str, push: float, rng: np.random.Generator, n: int) -> Floats:
    """How far from the next target, in the norm, steps lead that settled states take, pushed at any instant."""
    g, z, sway, kappa = 9.81, 0.85, 0.2 if left else -0.2, 1.35
    y, vy = np.linalg.inv(v) @ rng.choice([-bound, bound], (2, n))
    duration, slip, hand = rng.choice([0.375, 0.385], n), rng.choice([-0.002, 0.002], n), rng.choice([-0.01, 0.01], n)
    w = np.sqrt(g / z)
    foot = sway / (w * np.tanh(w * 0.38 / 2)) + kappa * (y + vy / w) + slip
    give, when = 0.008 if left else 0.012, rng.choice([0, 0, 1, 20, 39], n)
    p, pd, steps = y - foot, vy + sway, 40
    for k in range(steps):
        p, pd = p + (when == k) * push * (state == "y"), pd + (when == k) * push * (state == "vy")

        def rate(share: float, p: Floats, pd: Floats) -> tuple[Floats, Floats]:
            height = z + give * 3 * share * (1 - share)
            return pd, (g - 6 * give / duration**2) / height * p + hand

        h = duration / steps
        a = rate(k / steps, p, pd)
        b = rate((k + 0.5) / steps, p + h / 2 * a[0], pd + h / 2 * a[1])
        c = rate((k + 0.5) / steps, p + h / 2 * b[0], pd + h / 2 * b[1])
        d = rate((k + 1) / steps, p + h * c[0], pd + h * c[1])
        p, pd = (x + h / 6 * (q + 2 * r + 2 * s + t) for x, q, r, s, t in zip((p, pd), a, b, c, d, strict=True))
    found: Floats = np.abs(v @ np.array([foot + p, pd + sway])).max(axis=0)
    return found


def test_pushed_while_swaying() -> None:
    """All that is claimed of the example holds; no simulated push as large as is proved leads out, and few larger ones
    do not."""
    text = SWAYING.read_text(encoding="utf-8") + ("" if LONG else "[effort]\ngap = 0.1\n")
    c = proved(text)
    requirements = c.results["requirements"]
    assert [r["verdict"] for r in requirements] == ["proved"] * len(requirements) and len(requirements) == 10
    radius, rng = float(c.results["radius"]["lower"]), np.random.default_rng(7)
    assert c.results["metric"]["kind"] == "polytope" and c.results["set"]["kind"] == "ball"
    v = np.array([[float(Fraction(x)) for x in row] for row in c.results["metric"]["matrix"]])
    (bounds,) = (x["concludes"] for x in c.entries["proof"] if x["rule"] == "graph-bound")
    for n, state, sides in ((5, "vy", ("left",)), (6, "y", ("left", "right"))):
        most = float(requirements[n]["value"]["lower"])
        for sign in (-1, 1):
            far = [
                swayed(v, float(Fraction(bounds[s])), s == "left", state, sign * most, rng, 2000).max() for s in sides
            ]
            assert max(far) <= radius and max(far) >= 0.6 * radius, (state, sign, far, radius)
            beyond = [
                swayed(v, float(Fraction(bounds[s])), s == "left", state, 2.2 * sign * most, rng, 2000).max()
                for s in sides
            ]
            assert max(beyond) > radius


RATES = ["pendulum", "swing", "apart"]


def drawn(seed: int) -> tuple[str, dict[str, Any]]:
    """A claim of two states in two stances (or one), its rates linear and at rest in time; what a simulation needs."""
    rng = np.random.default_rng(seed)

    def number(low: float, high: float) -> float:
        return float(np.round(rng.uniform(low, high), 2))

    kind = RATES[seed % 3]
    if kind == "apart":
        a, free = np.diag([number(-1, 1), number(-1, 1)]), np.array([number(-0.1, 0.1), number(-0.1, 0.1)])
    else:
        turn = number(2, 8) * (1 if kind == "pendulum" else -1)
        a, free = np.array([[0, number(0.5, 1.5)], [turn, 0]]), np.array([0, number(-0.1, 0.1)])
    side = [[number(-0.4, 0.4), number(-0.1, 0.1)], [number(-0.3, 0.3), number(-0.3, 0.3)]]
    start, across = np.array(side), number(-0.6, 0.6)
    names = ("left", "right") if seed % 2 else ("",)
    text = (
        f"format = 1\nshrink = true\n[state]\nx = [-1, 1]\n{'y = [-2, 2]' if not names[0] else ''}\n"
        "[uncertain]\nT = [0.3, 0.32]\nw = [-0.02, 0.02]\n[dynamics]\nduration = 'T'\n[dynamics.start]\n"
        f"p = '{start[0][0]}*x + {start[0][1]}*y + w'\nq = '{start[1][0]}*x + {start[1][1]}*y'\n[dynamics.rate]\n"
        f"p = '{a[0][0]}*p + {a[0][1]}*q + {free[0]}'\nq = '{a[1][0]}*p + {a[1][1]}*q + {free[1]}'\n"
        f"[next]\nx = 'p + w/2'\ny = 'q + {across}*p'\n[target]\nx = 0\ny = 0\n"
    )
    for n, name in enumerate(names if names[0] else ()):
        text += f"[stance.{name}]\nthen = '{names[1 - n]}'\nstate = {{ y = [-{2 + n}, {2 - n * 0.5}] }}\n"
    for name in names:
        within = f"in = '{name}'\n" if name else ""
        text += f"[[require]]\nthat = 'push(x, during) >= 0.001'\n{within}"
    return text, {"a": a, "free": free, "start": start, "across": across, "names": names, "rng": rng}


def exponential(m: Floats) -> Floats:
    """Of small matrices, one behind the other, by its series."""
    total = term = np.broadcast_to(np.eye(m.shape[-1]), m.shape)
    for k in range(1, 30):
        term = np.einsum("nij,njk->nik", term, m) / k
        total = total + term
    return total


def steps_of(system: dict[str, Any], e: Floats, push: float) -> Floats:
    """Where steps lead from errors e when p is pushed at some instant."""
    rng, whole, n = system["rng"], np.zeros((3, 3)), len(e)
    whole[:2, :2], whole[:2, 2] = system["a"], system["free"]
    time, w, early = rng.choice([0.3, 0.32], n), rng.choice([-0.02, 0.02], n), rng.choice([0.0, 0.3, 0.9, 1.0], n)
    at = np.column_stack([e @ system["start"].T, np.ones(n)])
    at[:, 0] += w
    at = np.einsum("nij,nj->ni", exponential(whole * (time * early)[:, None, None]), at)
    at[:, 0] += push
    p, q, _ = np.einsum("nij,nj->ni", exponential(whole * (time * (1 - early))[:, None, None]), at).T
    return np.column_stack([p + w / 2, q + system["across"] * p])


def length(metric: dict[str, Any], e: Floats) -> Floats:
    """The norm that results state, of errors one a row."""
    if metric["kind"] == "box":
        found: Floats = np.abs(e * [float(Fraction(x)) for x in metric["weights"].values()]).max(axis=1)
        return found
    m = np.array([[float(Fraction(x)) for x in row] for row in metric["matrix"]])
    sizes: Floats = np.abs(e @ m.T).max(axis=1) if metric["kind"] == "polytope" else np.sqrt(((e @ m) * e).sum(axis=1))
    return sizes


@pytest.mark.parametrize("seed", range(45) if LONG else [9])
def test_no_simulated_push_leads_out(seed: int) -> None:
    """Of random claims: after some steps, a push as large as is proved keeps states in the set of the stance that follows."""
    text, system = drawn(seed)
    results, names = proved(text).results, system["names"]
    walls = {"": [[-1, -2], [1, 2]], "left": [[-1, -2], [1, 2]], "right": [[-1, -3], [1, 1.5]]}
    for n, name in enumerate(names):
        entry, after = results["requirements"][n], names[n - 1]
        if entry["value"] is None:
            continue
        there = results["stances"][after] if after else results
        settled = np.zeros((30, 2))
        for _ in range(12):
            settled = steps_of(system, settled, 0)
        push = float(entry["value"]["lower"])
        found = [steps_of(system, settled, sign * push) for sign in (-1, 1)]
        if there["set"]["kind"] == "region":
            low, high = walls[after]
            assert all((low - x <= 1e-9).all() and (x - high <= 1e-9).all() for x in found), (seed, name)
        else:
            radius = float(there["set"]["radius"]["lower"])
            assert all((length(there["metric"], x) <= radius + 1e-9).all() for x in found), (seed, name)
