"""Random stable matrices of two to six states against scipy: the rate that is proved, the bounds against exact sums."""

from __future__ import annotations

import copy
import json
import os
from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest
from scipy.linalg import solve_discrete_lyapunov

from tests.conftest import ends, proved
from tests.published.test_several import bounds, linear, verdicts
from ultibound.checker import check
from ultibound.claim import ClaimError

COUNT = 50
EVERY = 1 if os.environ.get("ULTIBOUND_LONG") else 7


def drawn(seed: int) -> tuple[np.ndarray, np.ndarray]:
    """A matrix to three decimals with spectral radius below 1, and magnitudes of disturbances."""
    rng = np.random.default_rng(seed)
    n = 2 + seed % 5
    a = rng.standard_normal((n, n))
    a *= rng.uniform(0.3, 0.95) / np.abs(np.linalg.eigvals(a)).max()
    return np.round(a, 3), np.round(rng.uniform(0.001, 0.02, n), 4)


def least_rate_in_reach(a: np.ndarray) -> float:
    """The rate of P = I + AᵀPA/k², k a little above the spectral radius: sup of eᵀAᵀPAe/eᵀPe, by scipy."""
    k = np.abs(np.linalg.eigvals(a)).max() + 5e-4
    p = solve_discrete_lyapunov((a / k).T, np.eye(len(a)))
    v = np.linalg.cholesky(p).T
    return float(np.linalg.norm(v @ a @ np.linalg.inv(v), 2))


@pytest.mark.parametrize("seed", range(0, COUNT, EVERY))
def test_rate_near_the_spectral_radius(seed: int) -> None:
    a, _ = drawn(seed)
    radius, reached = float(np.abs(np.linalg.eigvals(a)).max()), least_rate_in_reach(a)
    assert radius <= reached < radius + 1e-3
    rows = [[str(Fraction(x).limit_denominator(1000)) for x in row] for row in a]
    r = proved(linear(rows, ["0"] * len(a), "settles", "gain < 1")).results
    assert verdicts(r) == ["proved"] * 2
    assert radius - 1e-9 <= float(ends(r["gain"])[1]) <= radius + 1e-3


def test_bounds_hold_the_exact_sums(record_property: Callable[[str, str], None]) -> None:
    """sup |e_s| in the long run is Σ_n |(Aⁿ)_s·| w: below every bound, and the best of them not far above it."""
    ratios: dict[int, list[float]] = {}
    for seed in range(0, COUNT, EVERY):
        a, w = drawn(seed)
        exact, power = np.zeros(len(a)), np.eye(len(a))
        for _ in range(600):
            exact, power = exact + np.abs(power) @ w, power @ a
        rows = [[str(Fraction(x).limit_denominator(1000)) for x in row] for row in a]
        r = proved(linear(rows, [str(Fraction(x).limit_denominator(10**4)) for x in w], "settles")).results
        assert verdicts(r) == ["proved"], seed
        found = np.array([float(b) for b in bounds(r)])
        assert np.all(found >= exact * (1 - 1e-9)), seed
        ratios.setdefault(len(a), []).extend(found / exact)
    table = ["states  bounds   median    worst   bound/exact"]
    table += [f"{n:6d}{len(x):8d}{np.median(x):9.3f}{max(x):9.3f}" for n, x in sorted(ratios.items())]
    record_property("table", "\n".join(table))
    assert all(np.median(x) < 3 and max(x) < 12 for x in ratios.values())


BENT = """
format = 1
[state]
x = [-1, 1]
y = [-1, 1]
[uncertain]
d = [-0.02, 0.02]
[next]
x = "0.5*x + 0.2*sin(y) + d"
y = "0.3*y - 0.2*{corner}"
[target]
x = 0
y = 0
[metric]
kind = "ellipsoid"
[[require]]
that = "settles"
"""


class TestMatricesInTheCertificate:
    def test_a_tree_too_coarse_for_what_is_claimed_is_refused_on_every_line(self) -> None:
        """Leaves are evaluated once for all lines with the same tree; another tree is another matter."""
        entries = json.loads(proved(BENT.format(corner="tanh(2*x)")).to_bytes())
        texts = [json.dumps(entries)]
        for number, line in enumerate(entries["proof"]):
            if line["rule"] in ("matrix", "entries") and line["proves"] == "slopes":
                spoiled = copy.deepcopy(entries)
                spoiled["proof"][number]["witness"]["trees"] = ["d"]
                texts.append(json.dumps(spoiled))
        assert len(texts) > 2
        assert [check(t.encode()).status == "valid" for t in texts] == [True] + [False] * (len(texts) - 1)

    def test_a_jump_that_keeps_the_gap_open_ends_the_search_early(self) -> None:
        r = proved(BENT.format(corner="abs(x - 0.3*y)"))
        assert r.results["requirements"][0]["verdict"] == "proved"
        leaves = max(
            sum(x in ("c", "d") for t in line["witness"]["trees"] for x in t.split(" "))
            for line in r.entries["proof"]
            if line["rule"] == "matrix"
        )
        assert leaves < 2000


PLAIN = """
format = 1
[state]
x = {x}
y = {y}
[uncertain]
d = [-0.01, 0.01]
h = {{ range = [-1, 1], held = true, change = 0.01 }}
[next]
x = "{step}"
y = "0.3*y - 0.1*x"
[target]
x = "{target}"
y = 0
{more}
"""
ORDINARY = {"x": "[-1, 1]", "y": "[-1, 1]", "step": "0.5*x + 0.2*y + d", "target": "0", "more": ""}


class TestUnusualClaims:
    @pytest.mark.parametrize(
        "given",
        [
            {"y": "[0, 0]"},
            {"target": "1"},
            {"target": "h", "step": "0.5*(x - h) + h + d"},
            {"more": '[[require]]\nthat = "bound(x) <= 0.5"\nover = { y = [0, 0] }'},
        ],
    )
    def test_a_target_on_the_edge_leaves_no_room_for_a_ball(self, given: dict[str, str]) -> None:
        r = proved(PLAIN.format(**ORDINARY | given)).results
        assert "proved" not in verdicts(r)

    @pytest.mark.parametrize("step", ["0.5*sqrt(abs(x)) + d", "0.3*sqrt(1 + x)"])
    def test_slopes_without_a_limit_are_undecided(self, step: str) -> None:
        r = proved(PLAIN.format(**ORDINARY | {"step": step})).results
        assert verdicts(r) == ["undecided"] and r["gain"] is None

    def test_a_weight_that_is_not_rational_is_an_error(self) -> None:
        more = '[metric]\nkind = "box"\nweights = { x = 1, y = "sqrt(2)" }'
        with pytest.raises(ClaimError, match=r"metric\.weights\.y"):
            proved(PLAIN.format(**ORDINARY | {"more": more}))


TURNING = np.array([[-0.12, -1.37], [0.43, -0.04]])
SIDES = """
format = 1
[state]
x = [-1, 1]
y = [-0.6, 0.6]
[uncertain]
d = [-0.01, 0.01]
[next]
x = "{aside} - 0.12*x - 1.37*y + d"
y = "0.43*x - 0.04*y"
[target]
x = 0
y = 0
[[require]]
that = "settles"
"""


@pytest.mark.parametrize(("aside", "kept"), [("0.26", True), ("0.35", False)])
def test_ball_of_many_sides(aside: str, kept: bool) -> None:
    """A ball about the target has to allow for misses of either sign: there is one in the region while Σ |Aⁿ m| is.

    At 0.26 neither boxes in a basis nor ellipsoids are kept, for a turn and a miss to one side.
    """
    sums, power, lasting = np.zeros(2), np.eye(2), np.zeros(2)
    for _ in range(200):
        sums, lasting, power = (
            sums + np.abs(power[:, 0]) * (float(aside) + 0.01),
            lasting + np.abs(power[:, 0]),
            power @ TURNING,
        )
    assert np.all(sums < [1, 0.6]) == kept
    r = proved(SIDES.format(aside=aside)).results
    assert verdicts(r) == ["proved" if kept else "undecided"]
    if not kept:
        assert r["set"] is None and all(x["bound"] is None for x in r["states"].values())
        return
    assert r["set"]["kind"] == "ball" and len(r["metric"]["matrix"]) > 2
    rows = np.array([[float(Fraction(x)) for x in row] for row in r["metric"]["matrix"]])
    # sampled: from the ball's rim no step leaves it, and it contracts by no more than the gain
    turns = np.linspace(0, 2 * np.pi, 400)
    rim = np.stack([np.cos(turns), np.sin(turns)])
    rim *= float(Fraction(r["radius"]["lower"])) / np.abs(rows @ rim).max(axis=0)
    led = np.abs(rows @ (TURNING @ rim))
    assert np.abs(rim).max() > 0.95 and led.max() <= float(ends(r["gain"])[1]) * np.abs(rows @ rim).max() * (1 + 1e-9)
    assert np.abs(rows @ (TURNING @ rim + [[float(aside) + 0.01], [0]])).max() < np.abs(rows @ rim).max()
    # in the end x and y are about where the middle of the map rests
    exact = np.abs(np.linalg.solve(np.eye(2) - TURNING, [float(aside), 0])) + 0.01 * lasting
    for s, far in zip("xy", exact, strict=True):
        least, most = ends(r["states"][s]["bound"])
        assert 0.98 * far <= least <= far * (1 + 1e-9) and far * (1 - 1e-9) <= most <= 1.002 * far


def test_slopes_on_both_sides_of_a_corner() -> None:
    """The sign of x − y is the same in all four entries: each on its own they make a gain of 2 in the same norm."""
    text = SIDES.replace("[-0.6, 0.6]", "[-1, 1]").replace("{aside} - 0.12*x - 1.37*y + d", "0.45*abs(x - y) + d")
    text = text.replace("0.43*x - 0.04*y", "0.1*y - 0.45*abs(x - y)").replace('"settles"', '"gain < 1"')
    r = proved(text).results
    sides = [np.array([[s, -s], [-s, 0.1 + s]]) for s in (0.45, -0.45)]
    rate = max(np.abs(np.linalg.eigvals(a)).max() for a in sides)
    assert verdicts(r) == ["proved"] and rate <= float(ends(r["gain"])[1]) <= rate + 2e-3
