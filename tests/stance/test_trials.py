"""Trial solutions of a stance against closed forms, published values and an integrator of another kind."""

from __future__ import annotations

import time
from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction
from itertools import product
from typing import Any

import numpy as np
import pytest

from tests.stance.motions import GRAVITY, Gait, restated, second_order, seconds
from ultibound.bounding.intervals import Floats
from ultibound.checker.flows import trajectory
from ultibound.checker.ranges import met
from ultibound.checker.reals import Scaled
from ultibound.claim.graph import Graph
from ultibound.claim.motion import Motion, Parameter
from ultibound.stance.estimate import growth
from ultibound.stance.plans import starting_cuts
from ultibound.stance.points import Unsolved
from ultibound.stance.trials import Trial, trial


def at(found: Trial, i: int, j: int, orders: tuple[int, ...], *where: float) -> float:
    """The middle of the range at one point (σ, *parameters)."""
    axes = [(np.array([x]), np.array([x])) for x in where]
    (low, high), _ = found.table.read(i, j, orders, axes, 1, None)
    return float(low[0] + high[0]) / 2


def written(found: Trial, cell: int = 0, piece: int = 0) -> dict[tuple[int, int], Any]:
    """Coefficients of Φ_ij as the witness has them: whole numbers (monomials, degree + 1) by (column rank, state rank)."""
    w = found.witness
    numbers = np.array([int(x) for x in w["cells"][cell][piece].split(" ")], object)
    columns, states = found.table.columns, found.table.states
    numbers = numbers.reshape(columns, states, -1, w["degrees"][0] + 1)
    return {(j, i): numbers[j, i] for j, i in product(range(columns), range(states))}


def times_s(c: Sequence[Fraction]) -> list[Fraction]:
    """Chebyshev coefficients of s times a polynomial."""
    out = [Fraction(0)] * (len(c) + 1)
    for k, x in enumerate(c):
        out[k + 1] += x if k == 0 else x / 2
        if k:
            out[k - 1] += x / 2
    return out


def slope(c: Sequence[Fraction]) -> list[Fraction]:
    """Chebyshev coefficients of the derivative."""
    out = [Fraction(0)] * (len(c) + 1)
    for k in range(len(c) - 1, 0, -1):
        out[k - 1] = out[k + 1] + 2 * k * c[k]
    out[0] /= 2
    return out[: len(c)]


def plus(a: Sequence[Fraction], b: Sequence[Fraction], factor: int) -> list[Fraction]:
    n = max(len(a), len(b))
    a, b = [*a, *[Fraction(0)] * (n - len(a))], [*b, *[Fraction(0)] * (n - len(b))]
    return [x + factor * y for x, y in zip(a, b, strict=True)]


def airy() -> Trial:
    g = Graph()
    return trial(g, second_order(g, seconds(g, g.number(2)), g.number(2)), (), {})


def test_airy() -> None:
    """x'' = t x from 0 to 2, from Ai and Bi (DLMF 9.2; the numbers by mpmath.airyai, airybi at 30 digits)."""
    found = airy()
    assert found.met and found.error < 5e-11
    expected = {
        (1, 1): 2.7308830178901459, (1, 2): 3.6110737414484706, (2, 1): 3.2595163616105248, (2, 2): 4.6762727878031468,
    }  # fmt: skip
    for (i, j), value in expected.items():
        assert at(found, i, j, (0,), 1.0) == pytest.approx(value, abs=1e-12)
        assert at(found, i, j, (0,), -1.0) == pytest.approx(float(i == j), abs=1e-14)
    assert at(found, 2, 1, (1,), 1.0) == pytest.approx(2 * expected[1, 1], abs=1e-9)  # d/dσ = t D/2 at t = D = 2


def test_the_written_polynomials_have_exactly_the_defect_that_is_estimated() -> None:
    """In exact arithmetic: s from -1 to 1, t = 1 + s, h = 1; the comparison with sup t = 2 then gives `error`."""
    found = airy()
    scale, numbers = 2 ** found.witness["bits"], written(found)
    defects = np.zeros((2, 2))
    for j in (0, 1):
        x, y = ([Fraction(int(k), scale) for k in numbers[j, i][0]] for i in (0, 1))
        for c, start in ((x, j == 0), (y, j == 1)):
            assert sum(v * (-1) ** k for k, v in enumerate(c)) == start
        defects[0, j] = float(sum(map(abs, plus(slope(x), y, -1))))
        defects[1, j] = float(sum(map(abs, plus(plus(slope(y), x, -1), times_s(x), -1))))
    _, summed = growth(np.array([[0.0, 1.0], [2.0, 0.0]]))
    error = (summed @ defects).max()
    assert 0.9 * error <= found.error <= 1.001 * error


def test_mathieu() -> None:
    """x'' + (2 - cos 2t) x = 0 over [0, π]."""
    g = Graph()
    twice = g.add("mul", g.number(2), seconds(g, g.add("pi")))
    found = trial(g, second_order(g, g.add("sub", g.add("cos", twice), g.number(2)), g.add("pi")), (), {})
    assert found.met
    expected = {(1, 1): -0.39856431421551305, (1, 2): -1.03466825219375604, (2, 1): 0.81296249851145658}
    for (i, j), value in expected.items():
        assert at(found, i, j, (0,), 1.0) == pytest.approx(value, abs=3e-12)


def pendulum() -> tuple[Graph, Motion]:
    """x'' = g/z x + 1 over T, with z and T as parameters."""
    g = Graph()
    duration, z = g.add("variable", name="T"), g.add("variable", name="z")
    parameters = Parameter("T", duration, None), Parameter("z", z, None)
    return g, second_order(g, g.add("div", g.number(GRAVITY), z), duration, parameters, g.number(1))


def test_constant_height_with_a_free_term_and_two_parameters() -> None:
    """cosh ωt, sinh ωt / ω and (cosh ωt - 1)/ω², and their derivatives, for ω = √(g/z)."""
    g, motion = pendulum()
    seen: list[tuple[int, int]] = []
    spans = {"T": (Fraction("0.38"), Fraction("0.42")), "z": (Fraction("0.6"), Fraction("0.66"))}
    found = trial(g, motion, (), spans, watch=lambda done, total: seen.append((done, total)))
    assert found.met and seen[-1][0] == seen[-1][1] == len(found.witness["cells"])
    rng = np.random.default_rng(1)
    for _ in range(20):
        sigma, duration, z = rng.uniform(-1, 1), rng.uniform(0.38, 0.42), rng.uniform(0.6, 0.66)
        w, t = np.sqrt(9.81 / z), duration * (1 + sigma) / 2
        c, s = np.cosh(w * t), np.sinh(w * t)
        p = sigma, duration, z
        by_z = -w / (2 * z)  # dω/dz
        assert at(found, 1, 1, (0, 0, 0), *p) == pytest.approx(c, abs=1e-10)
        assert at(found, 1, 2, (0, 0, 0), *p) == pytest.approx(s / w, abs=1e-10)
        assert at(found, 1, 0, (0, 0, 0), *p) == pytest.approx((c - 1) / w**2, abs=1e-10)
        assert at(found, 2, 0, (0, 0, 0), *p) == pytest.approx(s / w, abs=1e-10)
        assert at(found, 1, 1, (1, 0, 0), *p) == pytest.approx(w * duration / 2 * s, abs=1e-8)
        assert at(found, 1, 1, (0, 1, 0), *p) == pytest.approx(w * (1 + sigma) / 2 * s, abs=1e-7)
        assert at(found, 1, 1, (0, 0, 1), *p) == pytest.approx(t * s * by_z, abs=1e-7)
        mixed = (1 + sigma) / 2 * (s + w * t * c) * by_z
        assert at(found, 1, 1, (0, 1, 1), *p) == pytest.approx(mixed, abs=1e-5)
        assert at(found, 1, 1, (0, 2, 0), *p) == pytest.approx((w * (1 + sigma) / 2) ** 2 * c, abs=1e-5)
        assert at(found, 1, 1, (1, 1, 0), *p) == pytest.approx(w / 2 * s + w**2 * t / 2 * c, abs=1e-6)


def test_the_witness_reads_as_its_format_says() -> None:
    """Cell, piece, column, state, exponents in lexicographic order, T_0 .. T_N; the last parameter fastest."""
    g, motion = pendulum()
    spans = {"T": (Fraction("0.38"), Fraction("0.42")), "z": (Fraction("0.5"), Fraction("0.7"))}
    w = trial(g, motion, (), spans).witness
    (n, total), scale = w["degrees"], 2 ** w["bits"]
    cuts = {k: [Fraction(x) for x in v] for k, v in w["cuts"].items()}
    assert list(cuts) == ["T", "z"] and len(w["cells"]) == (len(cuts["T"]) - 1) * (len(cuts["z"]) - 1) > 1
    assert w["pieces"] == ["0", "1"] and all(len(c) == 1 for c in w["cells"])
    exponents = [a for a in product(range(total + 1), repeat=2) if sum(a) <= total]
    ranks = product(range(len(cuts["T"]) - 1), range(len(cuts["z"]) - 1))
    for (a, b), (text,) in zip(ranks, w["cells"], strict=True):
        numbers = [int(x) for x in text.split(" ")]
        assert len(numbers) == 3 * 2 * len(exponents) * (n + 1)
        tau = Fraction(1, 3), Fraction(-1, 2)
        p = [
            (c[k] + c[k + 1]) / 2 + (c[k + 1] - c[k]) / 2 * x
            for c, k, x in zip(cuts.values(), (a, b), tau, strict=True)
        ]
        omega = np.sqrt(9.81 / float(p[1]))
        c, s = np.cosh(omega * float(p[0])), np.sinh(omega * float(p[0]))
        values = []
        for start in range(0, len(numbers), len(exponents) * (n + 1)):
            terms = (sum(numbers[start + k * (n + 1) : start + (k + 1) * (n + 1)]) for k in range(len(exponents)))
            values.append(
                float(sum(x * tau[0] ** e[0] * tau[1] ** e[1] for x, e in zip(terms, exponents, strict=True)) / scale)
            )
        assert values == pytest.approx([c, omega * s, s / omega, c, (c - 1) / omega**2, s / omega], abs=1e-9)


def test_wide_spans_are_cut() -> None:
    g, motion = pendulum()
    spans = {"T": (Fraction("0.3"), Fraction("0.5")), "z": (Fraction("0.5"), Fraction("1.0"))}
    found = trial(g, motion, (), spans, accuracy=1e-8, enough=1e-7)
    assert found.met and 1 < len(found.witness["cells"]) < 200
    for cuts, (low, high) in zip(found.witness["cuts"].values(), spans.values(), strict=True):
        exact = [Fraction(x) for x in cuts]
        assert exact[0] == low and exact[-1] == high and exact == sorted(set(exact))
    for z in (0.5, 0.61, 1.0):
        assert at(found, 2, 1, (0, 0, 0), 1, 0.47, z) == pytest.approx(
            np.sqrt(9.81 / z) * np.sinh(0.47 * np.sqrt(9.81 / z)), abs=1e-7
        )


@pytest.mark.parametrize(("rate", "most"), [(400, 1e-6), (-400, 1e-3), (-25, 1e-9)])
def test_fast_motions_take_pieces(rate: int, most: float) -> None:
    """x'' = ±20² x over a second: what can be proved is limited by exp(20) times rounding; the values themselves are good."""
    g = Graph()
    found = trial(g, second_order(g, g.number(rate), g.number(1)), (), {})
    w = np.sqrt(abs(rate))
    exact = np.cosh(w) if rate > 0 else np.cos(w)
    assert found.relative < most
    assert (len(found.witness["pieces"]) > 2) == (abs(rate) > 100)
    assert at(found, 1, 1, (0,), 1.0) == pytest.approx(exact, rel=1e-9)
    middle = np.cosh(w / 2) if rate > 0 else np.cos(w / 2)
    assert at(found, 1, 1, (0,), 0.0) == pytest.approx(middle, rel=1e-9)
    for (j, i), c in written(found, 0, 1).items() if len(found.witness["pieces"]) > 2 else ():
        before = written(found, 0, 0)[j, i]
        assert sum(before[0]) == sum(v * (-1) ** k for k, v in enumerate(c[0]))  # pieces join exactly


def test_a_motion_that_is_too_fast() -> None:
    g = Graph()
    for rate in (10**8, -(10**8)):
        with pytest.raises(Unsolved):
            trial(g, second_order(g, g.number(rate), g.number(1)), (), {})
    with pytest.raises(Unsolved, match="not finite"):
        t = seconds(g, g.number(1))
        trial(g, second_order(g, g.add("log", g.add("sub", t, g.number(1))), g.number(1)), (), {})


def differences(gait: Gait, p: Floats, cell: tuple[int, ...], orders: tuple[int, ...], h: Floats) -> Floats:
    """Φ (2, 2) differentiated by the parameters at a point: central differences of sixth and fourth order."""
    first = {-3: -1 / 60, -2: 9 / 60, -1: -45 / 60, 1: 45 / 60, 2: -9 / 60, 3: 1 / 60}
    second = {-3: 2 / 180, -2: -27 / 180, -1: 270 / 180, 0: -490 / 180, 1: 270 / 180, 2: -27 / 180, 3: 2 / 180}
    weights = [{0: 1.0} if o == 0 else first if o == 1 else second for o in orders]
    places = np.array(list(product(*weights)), float)
    factors = np.array([np.prod(w) for w in product(*(w.values() for w in weights))])
    values = gait.flow(p + places * h, cell)
    return (values * factors).sum(axis=-1) / np.prod(h ** np.array(orders))


@pytest.mark.parametrize(
    ("axes", "steep"),
    [
        ({"v": ("0", "0.1", "0.2", "0.35", "0.5")}, 0.0),
        ({"v": ("0", "0.1", "0.2")}, 0.5),
        ({"v": ("0", "0.1", "0.2")}, -0.5),
        ({"a": ("0", "0.05", "0.1"), "v": ("0", "0.1", "0.2", "0.3")}, 0.0),
    ],
)
def test_gaits_from_a_library(axes: dict[str, Sequence[str]], steep: float) -> None:
    """x'' = (g + z'')/z x; values, slopes and second derivatives in the parameters, inside cells."""
    gait = Gait(axes, steep=steep)
    found = trial(gait.graph, gait.motion, (gait.library,), {n: (x[0], x[-1]) for n, x in gait.grid.items()})
    assert found.met
    assert [[Fraction(x) for x in c] for c in found.witness["cuts"].values()] == [list(x) for x in gait.grid.values()]
    size, rng = len(axes), np.random.default_rng(5)
    for cell in list(product(*(range(len(x) - 1) for x in axes.values())))[:4]:
        low = np.array([float(x[k]) for k, x in zip(cell, gait.grid.values(), strict=True)])
        high = np.array([float(x[k + 1]) for k, x in zip(cell, gait.grid.values(), strict=True)])
        p = low + rng.uniform(0.3, 0.7, size) * (high - low)
        for sigma in (1.0, -0.3):
            expected = gait.flow(p, cell, sigma)
            for i, j in product((1, 2), repeat=2):
                assert at(found, i, j, (0,) * (size + 1), sigma, *p) == pytest.approx(expected[i - 1, j - 1], abs=1e-10)
        for orders in product((0, 1, 2), repeat=size):
            if 1 <= sum(orders) <= 2:
                expected = differences(gait, p, cell, orders, (high - low) / 12)
                tolerance = 1e-7 if sum(orders) == 1 else 1e-5
                for i, j in product((1, 2), repeat=2):
                    got = at(found, i, j, (0, *orders), 1.0, *p)
                    assert got == pytest.approx(expected[i - 1, j - 1], abs=tolerance)


def test_estimated_errors_hold_at_sampled_points() -> None:
    """Coarse on purpose: |Φ - polynomial| and its slopes stay within the errors of the table, and within reason."""
    gait = Gait({"v": ("0", "0.5", "1")}, wave=0.05)
    found = trial(gait.graph, gait.motion, (gait.library,), {"v": (Fraction(0), Fraction(1))}, 1e-4, 1e-4)
    nearest = 0.0
    for cell in (0, 1):
        for p in np.linspace(cell / 2, cell / 2 + 0.5, 7)[cell : 6 + cell]:  # not where the cells meet
            exact = gait.flow(np.array([p]), (cell,))
            by_p = differences(gait, np.array([p]), (cell,), (1,), np.array([0.02]))
            for i, j in product((1, 2), repeat=2):
                off = abs(at(found, i, j, (0, 0), 1.0, p) - exact[i - 1, j - 1])
                assert off <= found.table.errors.value[cell, 0]
                nearest = max(nearest, off / found.error)
                off = abs(at(found, i, j, (0, 1), 1.0, p) - by_p[i - 1, j - 1])
                assert off <= found.table.errors.slope[cell, 0, 0]
    assert nearest > 1e-3


def test_spans_that_are_one_value() -> None:
    grid = tuple(Fraction(k, 10) for k in range(4))
    axis, free = Parameter("v", 0, grid), Parameter("T", 0, None)
    assert starting_cuts(free, Fraction(3), Fraction(3)) == (3 - Fraction(3, 2**20), 3 + Fraction(3, 2**20))
    assert starting_cuts(free, Fraction(0), Fraction(0)) == (-Fraction(1, 2**20), Fraction(1, 2**20))
    assert starting_cuts(axis, Fraction("0.13"), Fraction("0.13")) == (Fraction("0.1"), Fraction("0.2"))
    assert starting_cuts(axis, Fraction("0.1"), Fraction("0.1")) == (0, Fraction("0.1"), Fraction("0.2"))
    assert starting_cuts(axis, Fraction(0), Fraction(0)) == (0, Fraction("0.1"))
    assert starting_cuts(axis, Fraction("0.3"), Fraction("0.3")) == (Fraction("0.2"), Fraction("0.3"))
    assert starting_cuts(axis, Fraction("0.05"), Fraction("0.2")) == (
        Fraction("0.05"),
        Fraction("0.1"),
        Fraction("0.2"),
    )
    g, motion = pendulum()
    found = trial(g, motion, (), {"T": (Fraction("0.4"),) * 2, "z": (Fraction("0.6"), Fraction("0.66"))})
    w = np.sqrt(9.81 / 0.63)
    assert found.met and at(found, 1, 1, (0, 0, 0), 1.0, 0.4, 0.63) == pytest.approx(np.cosh(0.4 * w), abs=1e-10)


def test_six_states_and_three_parameters() -> None:
    """A chain x_k' = p_k x_{k+1}, x_6' = 0: Φ_{1,k+1} = t^k/k! times the product of the p along it."""
    g = Graph()
    p = [g.add("variable", name=n) for n in "abc"]
    rows = tuple(tuple(p[i % 3] if j == i + 1 else None for j in range(6)) for i in range(6))
    motion = Motion(
        tuple("uvwxyz"),
        tuple(Parameter(n, v, None) for n, v in zip("abc", p, strict=True)),
        rows,
        (None,) * 6,
        g.number(1),
    )
    found = trial(g, motion, (), {n: (Fraction(1), Fraction("1.05")) for n in "abc"})
    assert found.met
    where = 1.0, 1.01, 1.02, 1.03
    assert at(found, 1, 2, (0, 0, 0, 0), *where) == pytest.approx(1.01, abs=1e-12)
    assert at(found, 1, 6, (0, 0, 0, 0), *where) == pytest.approx((1.01 * 1.02) ** 2 * 1.03 / 120, abs=1e-10)
    assert at(found, 1, 4, (0, 0, 1, 0), *where) == pytest.approx(1.01 * 1.03 / 6, abs=1e-8)
    assert at(found, 2, 1, (0, 0, 0, 0), *where) == pytest.approx(0, abs=1e-12)


def test_time_a_cell() -> None:
    """Thousands of cells at well under 3 ms and 4 kB each, at a cost that grows no faster than their number."""
    taken = {}
    for count in (400, 1600):
        gait = Gait({"v": [str(Fraction(k, count)) for k in range(count + 1)]})
        start = time.process_time()
        found = trial(gait.graph, gait.motion, (gait.library,), {"v": (Fraction(0), Fraction(1))})
        taken[count] = time.process_time() - start
        assert found.met and len(found.witness["cells"]) == count
        assert sum(len(t) for cell in found.witness["cells"] for t in cell) < 4000 * count
    assert taken[1600] < 1.5
    assert taken[1600] < 8 * taken[400]


def test_a_signal_and_a_free_term_have_columns_of_their_own() -> None:
    """x'' = x + 2 d + 3 over a second: columns 3 and 0 (the last) are 2 and 3 times (cosh 1 - 1, sinh 1)."""
    g = Graph()
    plain = second_order(g, g.number(1), g.number(1), (), g.number(3))
    found = trial(g, replace(plain, signals=("d",), forced=((None, g.number(2)),)), (), {})
    assert found.met and found.table.columns == 4
    for j, factor in ((3, 2), (0, 3)):
        assert at(found, 1, j, (0,), 1.0) == pytest.approx(factor * (np.cosh(1) - 1), abs=1e-11)
        assert at(found, 2, j, (0,), 1.0) == pytest.approx(factor * np.sinh(1), abs=1e-11)
    last = [sum(written(found)[3, i][0]) / 2 ** found.witness["bits"] for i in (0, 1)]
    assert last == pytest.approx([3 * (np.cosh(1) - 1), 3 * np.sinh(1)], abs=1e-11)


@pytest.mark.parametrize(
    "axes", [{"v": ("0", "0.1", "0.2", "0.35")}, {"a": ("0", "0.05", "0.1"), "v": ("0", "0.1", "0.2")}]
)
def test_the_checker_finds_the_errors_and_ranges_that_are_estimated(axes: dict[str, Sequence[str]]) -> None:
    """So that what the search settles for suffices there as well, and is not more than it needs."""
    gait = Gait(axes)
    found = trial(gait.graph, gait.motion, (gait.library,), {n: (x[0], x[-1]) for n, x in gait.grid.items()}, 1e-9)
    terms, motion = restated(gait.graph, gait.motion)
    flows = trajectory(terms, motion, (gait.library,), found.witness, None)
    assert 0.3 * found.error < flows.error < 1.25 * found.error
    a, rng, size = Scaled(80), np.random.default_rng(6), len(axes)
    for orders in product((0, 1), *((0, 1, 2),) * size):
        if sum(orders) > 2:
            continue
        for end in (False, True):
            low = [Fraction(int(1000 * x), 1000) for x in rng.uniform([-0.9] + [0] * size, [0.8] + [0.09] * size)]
            high = [x + Fraction(1, 100) for x in low]
            if end:
                low[0] = high[0] = Fraction(1)
            cells = [
                range(1),
                *(met(g, x, y, False) for g, x, y in zip(gait.grid.values(), low[1:], high[1:], strict=True)),
            ]
            p, q = map(float, a.ends(flows.partial(2, 1, orders, list(zip(low, high, strict=True)), cells, a)))
            axes_ = [(np.array([float(x)]), np.array([float(y)])) for x, y in zip(low, high, strict=True)]
            (r, s), _ = found.table.read(2, 1, orders, axes_, 1, None)
            assert (p, q) == pytest.approx(
                (float(r[0]), float(s[0])), abs=1e-4 * float(s[0] - r[0]) + 1e-5 * (sum(orders) > 1)
            )
