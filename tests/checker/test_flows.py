"""Rule `trajectory`: known solutions enclosed, narrowly, and witnesses spoiled in one place rejected."""

from __future__ import annotations

import random
from collections.abc import Callable, Sequence
from copy import deepcopy
from fractions import Fraction as Q
from functools import cache
from itertools import pairwise
from math import comb
from typing import Any

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from tests.checker.collocation import witness
from ultibound.checker.exact import Exact
from ultibound.checker.flows import Flows, defect, exponents_of, growth, trajectory
from ultibound.checker.forms import enclose
from ultibound.checker.model import Library
from ultibound.checker.models import Model
from ultibound.checker.models import value as valued
from ultibound.checker.motion import Motion, Parameter
from ultibound.checker.numerals import Rejected
from ultibound.checker.ranges import Evaluator, met
from ultibound.checker.rates import Coefficients, System
from ultibound.checker.reals import Inexact, Scaled, Undefined
from ultibound.checker.terms import Terms

A = Scaled(96)
ONE = (Q(1), Q(1))
Ends = tuple[Q, Q]


class Words:
    """Terms written shortly."""

    def __init__(self) -> None:
        self.terms = Terms()

    def number(self, q: Any) -> int:
        return self.terms.put("number", (), Q(q))

    def variable(self, name: str) -> int:
        return self.terms.put("variable", (), name)

    def time(self, duration: int) -> int:
        """Seconds since the start: a share of the duration."""
        return self("mul", duration, self.variable("phase(t)"))

    def __call__(self, op: str, *args: int) -> int:
        return self.terms.put(op, args)

    def bezier(self, u: int, points: Sequence[int]) -> int:
        while len(points) > 1:
            points = [self("add", a, self("mul", u, self("sub", b, a))) for a, b in pairwise(points)]
        return points[0]


def oscillator(w: Words, rate: int, duration: int, parameters: Sequence[Parameter] = ()) -> Motion:
    """x'' = rate x."""
    return Motion(("x", "xd"), tuple(parameters), ((None, w.number(1)), (rate, None)), (None, None), duration)


def proved(w: Words, motion: Motion, found: dict[str, Any], libraries: Sequence[Library] = ()) -> tuple[Flows, Q]:
    """With the least error that may be claimed."""
    flows = trajectory(w.terms, motion, libraries, found, None)
    worst = max(e[0] for pieces in flows.cells for p in pieces for e in p.errors.values())
    assert flows.error == Q(worst, flows.system.models.unit)
    return flows, flows.error


def assert_least(
    w: Words, motion: Motion, found: dict[str, Any], flows: Flows, libraries: Sequence[Library] = ()
) -> None:
    """What is proved may be claimed, and nothing less."""
    trajectory(w.terms, motion, libraries, found, flows.error)
    with pytest.raises(Rejected, match=r"\Aerror: less than what is proved"):
        trajectory(w.terms, motion, libraries, found, flows.error - Q(1, flows.system.models.unit))


def cells(flows: Flows, at: Sequence[Ends], touching: bool = False) -> list[range]:
    return [
        range(1),
        *(range(1) if g is None else met(g, *x, touching) for g, x in zip(flows.grids, at[1:], strict=True)),
    ]


def ends(flows: Flows, i: int, j: int, orders: Sequence[int], at: Sequence[Ends]) -> tuple[float, float]:
    low, high = A.ends(flows.partial(i, j, orders, at, cells(flows, at), A))
    return float(low), float(high)


def assert_encloses(
    flows: Flows,
    entry: tuple[int, int],
    orders: Sequence[int],
    at: Sequence[Ends],
    exact: float,
    slack: float,
    width: float,
) -> None:
    low, high = ends(flows, *entry, orders, at)
    assert low - slack <= exact <= high + slack, (entry, orders, at, low, exact, high)
    assert high - low <= width, (entry, orders, at, high - low)


# Known solutions.


@pytest.mark.parametrize("pieces", [("0", "1"), ("0", "1/3", "1")])
def test_constant_coefficients(pieces: tuple[str, ...]) -> None:
    """x'' = ω² x, ω² = 9, over 4/10: cosh ωt, sinh ωt / ω, ω sinh ωt; at all times and their derivative."""
    w = Words()
    m = oscillator(w, w.number(9), w.number(Q(2, 5)))
    found = witness(lambda t: [[0, 1], [9, 0]], lambda: 0.4, {}, (16, 0), pieces)
    flows, error = proved(w, m, found)
    assert error < Q(1, 10**12)
    assert_least(w, m, found, flows)
    for sigma in (Q(1), Q(-1), Q(-1, 3), Q(3, 10), Q(123, 1000)):
        t = 0.2 * (1 + float(sigma))
        c, s = np.cosh(3 * t), np.sinh(3 * t)
        wide = 2.1 * float(error)
        for entry, value, slope in (((1, 1), c, 3 * s), ((1, 2), s / 3, c), ((2, 1), 3 * s, 9 * c), ((2, 2), c, 3 * s)):
            assert_encloses(flows, entry, [0], [(sigma, sigma)], value, 1e-15, wide)
            assert_encloses(flows, entry, [1], [(sigma, sigma)], 0.2 * slope, 1e-14, 40 * wide * len(pieces))


def test_intervals_of_time() -> None:
    """Over an interval the range, and little more; over all of the stance too, by pieces."""
    w = Words()
    m = oscillator(w, w.number(9), w.number(Q(2, 5)))
    for pieces in (("0", "1"), ("0", "1/4", "1/2", "1")):
        flows, _ = proved(w, m, witness(lambda t: [[0, 1], [9, 0]], lambda: 0.4, {}, (16, 0), pieces))
        for low, high, more in ((Q(-1), Q(1), 1.3), (Q(-1, 10), Q(1, 10), 1.02), (Q(1, 2), Q(51, 100), 1.01)):
            found = ends(flows, 2, 1, [0], [(low, high)])
            exact = [3 * np.sinh(0.6 * (1 + float(s))) for s in (low, high)]
            assert found[0] <= exact[0] and exact[1] <= found[1]
            assert found[1] - found[0] <= more * (exact[1] - exact[0])
    for beyond in ((Q(-2), Q(0)), (Q(0), Q(11, 10))):
        with pytest.raises(Undefined, match="before or after"):
            ends(flows, 1, 1, [0], [beyond])


def test_airy() -> None:
    """y'' = t y from 0 to 2. DLMF chapter 9."""
    w = Words()
    m = oscillator(w, w.time(w.number(2)), w.number(2))
    flows, error = proved(w, m, witness(lambda t: [[0, 1], [t, 0]], lambda: 2.0, {}, (22, 0)))
    assert error < Q(1, 10**12)
    for entry, value in (
        ((1, 1), 2.73088301789014596),
        ((1, 2), 3.61107374144847062),
        ((2, 1), 3.25951636161052478),
        ((2, 2), 4.67627278780314685),
    ):
        assert_encloses(flows, entry, [0], [ONE], value, 1e-15, 2.1 * float(error))


def test_mathieu() -> None:
    """y'' + (2 - cos 2t) y = 0 over [0, π]: a function of the time, and a duration that is irrational."""
    w = Words()
    pi = w.terms.put("pi")
    rate = w("sub", w("cos", w("mul", w.number(2), w.time(pi))), w.number(2))
    m = oscillator(w, rate, pi)
    pieces = ("0", "1/4", "1/2", "3/4", "1")
    found = witness(lambda t: [[0, 1], [np.cos(2 * t) - 2, 0]], lambda: np.pi, {}, (20, 0), pieces)
    flows, error = proved(w, m, found)
    assert error < Q(1, 10**10)
    for entry, value in (
        ((1, 1), -0.3985643142155130485),
        ((1, 2), -1.0346682521937560431),
        ((2, 1), 0.8129624985114565847),
        ((2, 2), -0.3985643142155130485),
    ):
        assert_encloses(flows, entry, [0], [ONE], value, 1e-15, 2.1 * float(error))


def test_a_free_term_and_one_state() -> None:
    """x' = -p x + t, p in [1, 2], over 1/2: exp(-pt), and t/p - (1 - exp(-pt))/p² from 0; with derivatives by p."""
    w = Words()
    p, half = w.variable("p"), w.number(Q(1, 2))
    m = Motion(("x",), (Parameter("p", p, None),), ((w("neg", p),),), (w.time(half),), half)
    found = witness(
        lambda t, p: [[-p]], lambda p: 0.5, {"p": ["1", "5/4", "3/2", "7/4", "2"]}, (12, 6), free=lambda t, p: [t]
    )
    flows, error = proved(w, m, found)
    assert error < Q(1, 10**11)
    assert_least(w, m, found, flows)
    rng = random.Random(4)
    for q in [Q(1), Q(5, 4), Q(2), *(Q(rng.randint(10**6, 2 * 10**6), 10**6) for _ in range(8))]:
        x, e = float(q), np.exp(-float(q) / 2)
        at = [ONE, (q, q)]
        wide = 2.1 * float(error)
        for orders, value, more in (([0, 0], e, 1), ([0, 1], -e / 2, 600), ([0, 2], e / 4, 100_000)):
            assert_encloses(flows, (1, 1), orders, at, value, 1e-14, more * wide)
        first = 0.5 / x - (1 - e) / x**2
        by = -0.5 / x**2 - e / 2 / x**2 + 2 * (1 - e) / x**3
        assert_encloses(flows, (1, 0), [0, 0], at, first, 1e-14, wide)
        assert_encloses(flows, (1, 0), [0, 1], at, by, 1e-13, 600 * wide)
        assert_encloses(flows, (1, 0), [1, 0], at, (-x * first + 0.5) / 4, 1e-14, 40 * wide)
        assert_encloses(flows, (1, 0), [1, 1], at, (-first - x * by) / 4, 1e-13, 4000 * wide)
    with pytest.raises(Undefined, match="no such column"):
        ends(flows, 1, 2, [0, 0], [ONE, (Q(1), Q(1))])


def test_functions_of_parameters() -> None:
    """Every function, quotients of them and of the duration, a corner refused: against the same in floating point."""
    w = Words()
    p = w.variable("p")
    duration = w("div", w.number(1), w("add", w.number(1), p))
    t = w.time(duration)
    texts: dict[str, tuple[int, Callable[[float, float], float]]] = {
        "roots": (w("div", w("sqrt", w("add", p, t)), duration), lambda t, p: np.sqrt(p + t) * (1 + p)),
        "logarithm": (w("log", w("add", w.number(2), w("div", t, duration))), lambda t, p: np.log(2 + t * (1 + p))),
        "nested": (
            w("div", w("add", w.number(1), t), w("div", w("add", w.number(2), p), w("add", w.number(3), t))),
            lambda t, p: (1 + t) * (3 + t) / (2 + p),
        ),
        "a root of a quotient": (
            w("sqrt", w("div", w("add", w.number(2), t), w.terms.put("power", (w("add", p, t),), Q(2)))),
            lambda t, p: np.sqrt(2 + t) / (p + t),
        ),
        "waves": (w("mul", w("sin", t), w("cos", w("div", t, p))), lambda t, p: np.sin(t) * np.cos(t / p)),
        "growth": (
            w("sub", w("exp", t), w("mul", w("sinh", p), w("cosh", t))),
            lambda t, p: np.exp(t) - np.sinh(p) * np.cosh(t),
        ),
        "powers": (
            w(
                "div",
                w.terms.put("power", (t,), Q(3)),
                w("mul", w.terms.put("power", (p,), Q(2)), w("mul", p, duration)),
            ),
            lambda t, p: t**3 / p**3 * (1 + p),
        ),
    }
    for rate, call in texts.values():
        m = oscillator(w, rate, duration, [Parameter("p", p, None)])
        found = witness(
            lambda t, p, call=call: [[0, 1], [call(t, p), 0]],
            lambda p: 1 / (1 + p),
            {"p": ["1", "21/20", "11/10"]},
            (16, 5),
        )
        flows, error = proved(w, m, found)
        assert error < Q(1, 10**8)
        for q in (Q(1), Q(103, 100), Q(107, 100)):
            answer = solve_ivp(
                lambda t, y, q=q, call=call: [y[1], call(t, float(q)) * y[0]],
                (0, 1 / (1 + float(q))),
                [1, 0],
                method="DOP853",
                rtol=1e-13,
                atol=1e-14,
            )
            assert_encloses(flows, (1, 1), [0, 0], [ONE, (q, q)], answer.y[0, -1], 1e-11, 2.1 * float(error))
    for op in ("tan", "abs"):
        with pytest.raises(Rejected, match=rf"\Acells\[0\]\[0\]: {op} within the rates of a continuous stance"):
            trajectory(w.terms, oscillator(w, w(op, t), duration, [Parameter("p", p, None)]), (), found, Q(1))


# The gait: x'' = (g + z'')/z x, z a Bezier curve whose points are read from a library.

SPEEDS = tuple(Q(k, 10) for k in range(6))
PERIODS = (Q(3, 10), Q(2, 5), Q(1, 2))


def node(k: int, v: Q, T: Q) -> Q:
    return Q(
        round(10**4 * (0.62 + 0.02 * np.sin(k + 2 * float(v)) - 0.03 * float(v) ** 2 + 0.1 * (float(T) - 0.4))), 10**4
    )


def curve(u: float, c: Sequence[float]) -> float:
    n = len(c) - 1
    return sum(comb(n, k) * u**k * (1 - u) ** (n - k) * x for k, x in enumerate(c))


class Gait:
    """With the period a parameter, or 2/5."""

    def __init__(self, both: bool) -> None:
        self.both, w = both, Words()
        self.words = w
        v = w.variable("v")
        T = w.variable("T") if both else w.number(Q(2, 5))
        self.grid = (PERIODS, SPEEDS) if both else (SPEEDS,)
        columns = {
            f"z{k}": tuple(node(k, b, a) for a in (PERIODS if both else [Q(2, 5)]) for b in SPEEDS) for k in range(5)
        }
        self.library = Library("gaits.csv", ("T", "v") if both else ("v",), (), self.grid, columns)
        z = [w.terms.put("reading", (T, v) if both else (v,), f"z{k}") for k in range(5)]
        u = w("div", w.time(T), T)
        second = [w("add", w("sub", z[k + 2], w("mul", w.number(2), z[k + 1])), z[k]) for k in range(3)]
        bend = w("div", w("mul", w.number(12), w.bezier(u, second)), w("mul", T, T))
        rate = w("div", w("add", w.number("9.81"), bend), w.bezier(u, z))
        parameters = [Parameter("T", T, PERIODS)] * both + [Parameter("v", v, SPEEDS)]
        self.motion = oscillator(w, rate, T, parameters)
        self.cuts = {"v": ["0", "1/10", "1/5", "3/10", "2/5"]} | ({"T": ["19/50", "2/5", "21/50"]} if both else {})

    def lines(self, p: Sequence[float], inside: Sequence[float]) -> list[float]:
        """Points of the curve, by the cell of the grid that `inside` lies in."""
        spans = [
            next((a, b) for a, b in pairwise(map(float, g)) if x <= b) for g, x in zip(self.grid, inside, strict=True)
        ]
        shares = [(x - a) / (b - a) for (a, b), x in zip(spans, p, strict=True)]
        values = np.array([[float(x) for x in self.library.columns[f"z{k}"]] for k in range(5)]).reshape(
            5, *map(len, self.grid)
        )
        for g, (a, _), s in zip(self.grid, spans, shares, strict=True):
            k = [float(x) for x in g].index(a)
            values = values[:, k] * (1 - s) + values[:, k + 1] * s
        return [float(x) for x in values]

    def period(self, p: Sequence[float]) -> float:
        return p[0] if self.both else 0.4

    def matrix(
        self, t: float, p: Sequence[float], inside: Sequence[float], lines: Sequence[float] = ()
    ) -> list[list[float]]:
        """`lines`: where they are known already."""
        c, T = lines or self.lines(p, inside), self.period(p)
        bend = 12 / T**2 * curve(t / T, [c[k + 2] - 2 * c[k + 1] + c[k] for k in range(3)])
        return [[0, 1], [(9.81 + bend) / curve(t / T, c), 0]]

    def solution(self, p: Sequence[float], inside: Sequence[float], sigma: float = 1.0) -> Any:
        end, lines = self.period(p) * (1 + sigma) / 2, self.lines(p, inside)

        def rate(t: float, y: Any) -> Any:
            return (np.array(self.matrix(t, p, inside, lines)) @ y.reshape(2, 2)).ravel()

        return solve_ivp(rate, (0, end), [1, 0, 0, 1], method="DOP853", rtol=1e-12, atol=1e-14).y[:, -1].reshape(2, 2)

    @cache  # noqa: B019  # two of them
    def stated(self, degrees: tuple[int, int]) -> dict[str, Any]:
        return witness(lambda t, *p: self.matrix(t, p, p), lambda *p: self.period(p), self.cuts, degrees)


GAITS = {False: Gait(False), True: Gait(True)}


@cache
def gait(both: bool, degrees: tuple[int, int] = (15, 5)) -> tuple[Flows, Q]:
    g = GAITS[both]
    return proved(g.words, g.motion, g.stated(degrees), [g.library])


@pytest.mark.parametrize("both", [False, True])
def test_the_gait_at_random_points(both: bool) -> None:
    """Values, first and second derivatives by parameters against DOP853 and its central differences."""
    g, rng = GAITS[both], random.Random(both)
    flows, error = gait(both)
    assert error < (Q(1, 10**9) if both else Q(1, 10**10))
    assert_least(g.words, g.motion, g.stated((15, 5)), flows, [g.library])
    n, h = len(flows.cuts), 2e-3
    for _ in range(12):
        p = [
            Q(rng.randint(int(2000 * c[0]) + 5, int(2000 * c[-1]) - 5), 2000) + Q(rng.randint(1, 999), 10**6)
            for c in flows.cuts
        ]
        x = [float(q) for q in p]
        at = [ONE, *((q, q) for q in p)]

        def off(*steps: float, x: list[float] = x) -> Any:
            return g.solution([y + h * s for y, s in zip(x, steps, strict=True)], x)

        zero = [0.0] * n
        middle = off(*zero)
        for i, j in ((1, 1), (1, 2), (2, 1), (2, 2)):
            assert_encloses(flows, (i, j), [0] * (n + 1), at, middle[i - 1, j - 1], 1e-11, 2.1 * float(error))
        for k in range(n):
            line = [off(*zero[:k], s, *zero[k + 1 :]) for s in (-2, -1, 1, 2)]
            first = (line[0] - 8 * line[1] + 8 * line[2] - line[3]) / (12 * h)
            second = (-line[0] + 16 * line[1] - 30 * middle + 16 * line[2] - line[3]) / (12 * h * h)
            for i, j in ((1, 1), (2, 1), (1, 2), (2, 2)):
                orders = [0] * (n + 1)
                orders[k + 1] = 1
                assert_encloses(flows, (i, j), orders, at, first[i - 1, j - 1], 1e-7, 1e-5)
                orders[k + 1] = 2
                assert_encloses(flows, (i, j), orders, at, second[i - 1, j - 1], 3e-5, 1e-2)
        if both:
            mixed = (off(1, 1) - off(1, -1) - off(-1, 1) + off(-1, -1)) / (4 * h * h)
            assert_encloses(flows, (2, 1), [0, 1, 1], at, mixed[1, 0], 1e-2, 1e-3)
        sigma = Q(rng.randint(-99, 99), 100)
        inner = g.solution(x, x, float(sigma))
        assert_encloses(flows, (2, 1), [0] * (n + 1), [(sigma, sigma), *at[1:]], inner[1, 0], 1e-11, 2.1 * float(error))
        rate = g.period(x) / 2 * np.array(g.matrix(g.period(x) * (1 + float(sigma)) / 2, x, x)) @ inner
        assert_encloses(flows, (2, 1), [1] + [0] * n, [(sigma, sigma), *at[1:]], rate[1, 0], 1e-10, 1e-7)


def test_derivatives_by_time_and_parameter() -> None:
    """d/dv of Φ' = (D/2) A Φ, by central differences of the solution."""
    g, h = GAITS[False], 1e-3
    flows, _ = gait(False)
    for v, sigma in ((0.04, -0.3), (0.23, 0.6), (0.37, 1.0)):

        def speed(v_: float, v: float = v, sigma: float = sigma) -> Any:
            return 0.2 * np.array(g.matrix(0.2 * (1 + sigma), [v_], [v])) @ g.solution([v_], [v], sigma)

        slope = (speed(v + h) - speed(v - h)) / (2 * h)
        at = [(Q(sigma), Q(sigma)), (Q(v), Q(v))]
        for i, j in ((1, 1), (1, 2), (2, 1), (2, 2)):
            assert_encloses(flows, (i, j), [1, 1], at, slope[i - 1, j - 1], 1e-5, 1e-5)


@pytest.mark.parametrize("both", [False, True])
def test_the_gait_over_boxes(both: bool) -> None:
    """The range over the box contains what is sampled and is little wider; over several cells too."""
    g, rng = GAITS[both], random.Random(both)
    flows, _ = gait(both)
    for size in (Q(1, 1000), Q(1, 100), Q(3, 40)):
        for _ in range(3):
            low = [
                c[0] + (c[-1] - c[0] - size / (1 + k)) * Q(rng.randint(0, 100), 100)
                for k, c in zip((4, 0)[not both :], flows.cuts, strict=True)
            ]
            box = [(a, a + size / (1 + k)) for k, a in zip((4, 0)[not both :], low, strict=True)]
            steps = [np.linspace(float(a), float(b), 7) for a, b in box]
            samples = [g.solution(p, p)[1, 0] for p in np.array(np.meshgrid(*steps)).reshape(len(box), -1).T]
            found = ends(flows, 2, 1, [0] * (len(box) + 1), [ONE, *box])
            assert found[0] <= min(samples) + 1e-11 and max(samples) - 1e-11 <= found[1]
            assert found[1] - found[0] <= 1.25 * (max(samples) - min(samples)) + 1e-6


def test_what_is_remembered_is_as_it_was_evaluated() -> None:
    flows, _ = gait(False)
    box = [ONE, (Q(1, 10), Q(1, 5))]
    first = ends(flows, 2, 1, [0, 1], box)
    assert ends(flows, 2, 1, [0, 1], box) == first
    inner = ends(flows, 2, 1, [0, 1], [ONE, (Q(1, 10), Q(199, 1000))])
    assert first[0] <= inner[0] and inner[1] <= first[1]
    coarse = Scaled(A.bits - 24)  # each arithmetic has units of its own
    low, high = coarse.ends(flows.partial(2, 1, [0, 1], box, cells(flows, box), coarse))
    assert 0 <= first[0] - low <= Q(1, coarse.one[0]) and 0 <= high - first[1] <= Q(1, coarse.one[0])
    assert ends(flows, 2, 1, [0, 1], box) == first


def test_outside_of_the_cuts_nothing_is_proved() -> None:
    flows, _ = gait(False)
    for v in (Q(-1, 10**9), Q(4, 10) + Q(1, 10**9)):
        with pytest.raises(Undefined, match=r"v over .* where no trajectory is proved"):
            flows.partial(1, 1, [0, 0], [ONE, (v, v)], [range(1), range(1)], A)
    with pytest.raises(Undefined, match="where no trajectory"):
        flows.partial(1, 1, [0, 0], [ONE, (Q(1, 10), Q(1, 2))], [range(1), range(1)], A)


def test_orders_beyond_what_is_proved() -> None:
    flows, _ = gait(True)
    at = [ONE, (Q(2, 5), Q(2, 5)), (Q(1, 20), Q(1, 20))]
    for orders in ([2, 0, 0], [1, 1, 1], [0, 2, 1], [0, 3, 0], [0, 0, 3], [1, 0, 2]):
        with pytest.raises(Undefined, match="beyond what is proved"):
            flows.partial(1, 1, orders, at, cells(flows, at), A)
    for orders in ([1, 1, 0], [0, 1, 1], [0, 2, 0], [1, 0, 1]):
        flows.partial(1, 1, orders, at, cells(flows, at), A)


def test_exact_arithmetic_has_no_trajectories() -> None:
    flows, _ = gait(False)
    with pytest.raises(Inexact):
        flows.partial(1, 1, [0, 0], [ONE, (Q(0), Q(0))], [range(1), range(1)], Exact())


# Grid lines.


def test_derivatives_jump_at_grid_lines() -> None:
    """On a line of the grid each of the two cells has its own slope; a cut between lines is no jump."""
    g = GAITS[False]
    flows, _ = gait(False)
    v, h = 0.2, 1e-3
    at = [ONE, (Q(1, 5), Q(1, 5))]
    slopes = [
        (g.solution([v + h], [v + side])[1, 0] - g.solution([v - h], [v + side])[1, 0]) / (2 * h)
        for side in (-0.01, 0.01)
    ]
    assert abs(slopes[0] - slopes[1]) > 1e-2
    sides = [
        tuple(float(x) for x in A.ends(flows.partial(2, 1, [0, 1], at, [range(1), range(k, k + 1)], A))) for k in (1, 2)
    ]
    for (low, high), slope in zip(sides, slopes, strict=True):
        assert abs(low - slope) < 1e-4 and high - low < 1e-6
    both = A.ends(flows.partial(2, 1, [0, 1], at, [range(1), range(1, 3)], A))
    assert [float(x) for x in both] == [min(s[0] for s in sides), max(s[1] for s in sides)]
    # a face on a line, held to one cell: the part of the box in that cell
    held = A.ends(flows.partial(2, 1, [0, 1], [ONE, (Q(1, 5), Q(1, 4))], [range(1), range(1, 2)], A))
    assert [float(x) for x in held] == list(sides[0])


def test_values_and_slopes_at_one_place_need_different_cells() -> None:
    flows, _ = gait(False)
    at, chosen = [ONE, (Q(1, 5), Q(1, 5))], [range(1), range(1, 3)]
    alone = flows.partial(2, 1, [0, 1], at, chosen, A)
    flows.partial(2, 1, [0, 0], [ONE, (Q(1, 6), Q(1, 6))], [range(1), range(1, 2)], A)
    flows.partial(2, 1, [0, 0], at, chosen, A)
    assert flows.partial(2, 1, [0, 1], at, chosen, A) == alone
    one = flows.partial(2, 1, [0, 1], at, [range(1), range(1, 2)], A)
    assert one != alone and flows.partial(2, 1, [0, 1], at, chosen, A) == alone


def test_a_face_at_the_last_cut_is_of_the_cell_it_bounds() -> None:
    flows, _ = gait(False)
    last, inner = (Q(2, 5), Q(2, 5)), (Q(1, 5), Q(1, 5))
    for at, chosen, wanted in (
        (last, range(4, 5), range(3, 4)),
        (last, range(3, 5), range(3, 5)),
        (inner, range(2, 3), range(2, 3)),
        ((Q(3, 10), Q(2, 5)), range(3, 4), range(3, 4)),
    ):
        assert flows.reached([at], [chosen]) == [wanted]


def test_arguments_known_to_many_bits() -> None:
    """Intervals too narrow to matter are taken as points, and still contained."""
    flows, _ = gait(True)
    tiny = Q(1, 2**70)
    p = [Q(391, 1000), Q(123, 1000)]
    for orders in ([0, 0, 0], [0, 1, 0], [0, 0, 2], [1, 0, 1]):
        for sigma in (ONE, (Q(1, 3), Q(1, 3))):
            point = A.ends(
                flows.partial(2, 1, orders, [sigma, *((q, q) for q in p)], cells(flows, [ONE, *((q, q) for q in p)]), A)
            )
            around = [(q - tiny, q + tiny) for q in p]
            thin = A.ends(flows.partial(2, 1, orders, [sigma, *around], cells(flows, [ONE, *around]), A))
            assert max(point[0], thin[0]) <= min(point[1], thin[1])
            assert (thin[1] - thin[0]) - (point[1] - point[0]) <= Q(1, 2**40)


def test_a_cell_of_the_grid_that_nothing_is_proved_in() -> None:
    """At the last cut, a line of the grid: values stand, slopes beyond are not known."""
    flows, _ = gait(False)
    at = [ONE, (Q(2, 5), Q(2, 5))]
    flows.partial(2, 1, [0, 0], at, [range(1), range(3, 5)], A)
    flows.partial(2, 1, [1, 0], at, [range(1), range(3, 5)], A)
    flows.partial(2, 1, [0, 1], at, [range(1), range(3, 4)], A)
    with pytest.raises(Undefined, match="at the edge"):
        flows.partial(2, 1, [0, 1], at, [range(1), range(3, 5)], A)


def evaluator(
    both: bool, root: Callable[[Words, int, int], int], by: str = "", names: Sequence[str] = ("T", "v")
) -> Evaluator:
    """Of Φ_21 at the end and the variable v, with T at 2/5 + v²/100 if it is a parameter."""
    g = GAITS[both]
    w = Words()
    w.terms.all, w.terms.rank = list(g.words.terms.all), dict(g.words.terms.rank)
    v = w.variable("v")
    marked = w.terms.put("mark", (v,), "v") if by else v
    T = w("add", w.number(Q(2, 5)), w("div", w("mul", marked, marked), w.number(100)))
    args = (w.number(1), T, marked) if both else (w.number(1), marked)
    return Evaluator(
        w.terms, root(w, w.terms.put("flow", args, "2 1"), marked), by, ["v"], [g.library], A, gait(both)[0]
    )


def alone(w: Words, flow: int, v: int) -> int:
    return flow


def squared(w: Words, flow: int, v: int) -> int:
    return w("mul", w("mul", v, v), flow)


@pytest.mark.parametrize("both", [False, True])
@pytest.mark.parametrize("form", "dcms")
def test_a_flow_in_the_evaluator(both: bool, form: str) -> None:
    """v² Φ_21 and its derivative by v over boxes, by every form."""
    g = GAITS[both]

    def value(v: float) -> float:
        p = [0.4 + v * v / 100, v] if both else [v]
        return v * v * float(g.solution(p, p)[1, 0])

    for low, high in ((Q(11, 100), Q(3, 25)), (Q(1, 50), Q(9, 100)), (Q(31, 100), Q(32, 100))):
        steps = np.linspace(float(low) + 1e-4, float(high) - 1e-4, 5)
        for by in ("", "v"):
            e = evaluator(both, squared, by)
            found = [float(x) for x in A.ends(enclose(e, [(low, high)], form))]
            assert not e.several
            exact = [(value(v + 5e-5) - value(v - 5e-5)) / 1e-4 if by else value(v) for v in steps]
            assert found[0] <= min(exact) + 1e-7 and max(exact) - 1e-7 <= found[1]
            more = {"d": 3, "c": 1.4, "m": 1.2, "s": 1.2}[form]
            assert found[1] - found[0] <= more * (max(exact) - min(exact)) + 0.02


def test_several_cells_of_the_grid_are_told() -> None:
    e = evaluator(False, squared, "v")
    e.run([(Q(1, 10), Q(1, 5))], True)
    assert not e.several
    e.run([(Q(1, 10), Q(21, 100))], True)
    assert e.several
    line = (Q(1, 5), Q(1, 5))
    e.run([line], True)  # the marked name stands still on a line: both neighbours
    assert e.several
    plain = evaluator(False, squared)
    plain.run([line], True)
    assert not plain.several
    plain.run([line], True, touching=True)
    assert plain.several


def test_no_second_derivatives_across_lines_of_the_grid() -> None:
    e = evaluator(False, alone, "v")
    assert e.run([(Q(1, 10), Q(1, 5))], True).dg
    assert not e.run([(Q(1, 10), Q(21, 100))], True).dg


def test_the_face_of_a_box_keeps_its_cell() -> None:
    """After a box in one cell, its face on the line takes the slope of that cell."""
    e = evaluator(False, alone, "v")
    e.run([(Q(1, 10), Q(1, 5))], True)
    jet = e.run([(Q(1, 5), Q(1, 5))], True, part=True)
    below = gait(False)[0].partial(2, 1, [0, 1], [ONE, (Q(1, 5), Q(1, 5))], [range(1), range(1, 2)], A)
    assert jet.d == below and not e.several


def test_second_derivatives_by_the_chain_rule() -> None:
    """d²/dv² of Φ_21(1, 2/5 + v²/100, v), with the mixed and the pure second derivatives."""
    g, h = GAITS[True], 2e-3
    e = evaluator(True, alone, "v")
    for v in (0.03, 0.14, 0.26):
        jet = e.run([(Q(v), Q(v))], True)

        def value(x: float, v: float = v) -> float:
            return float(g.solution([0.4 + x * x / 100, x], [0.401, v])[1, 0])

        line = [value(v + k * h) for k in (-2, -1, 0, 1, 2)]
        exact = (-line[0] + 16 * line[1] - 30 * line[2] + 16 * line[3] - line[4]) / (12 * h * h)
        low, high = (float(x) for x in A.ends(jet.dg[0]))
        assert low - 1e-4 <= exact <= high + 1e-4 and high - low < 1e-3


def test_no_trajectory_no_value() -> None:
    w = Words()
    flow = w.terms.put("flow", (w.number(1), w.variable("v")), "2 1")
    with pytest.raises(Undefined, match="no trajectory is proved"):
        Evaluator(w.terms, flow, "", ["v"], (), A).run([ONE], False)


def test_a_cut_between_lines_is_no_jump() -> None:
    """The same with more cuts: cells are many, derivatives continuous, and only lines of the grid count as several."""
    g = GAITS[False]
    cuts = {"v": ["0", "1/20", "1/10", "3/20", "1/5"]}
    found = witness(lambda t, *p: g.matrix(t, p, p), lambda *p: 0.4, cuts, (15, 5))
    flows, _ = proved(g.words, g.motion, found, [g.library])
    coarse, _ = gait(False)
    box = [ONE, (Q(11, 100), Q(19, 100))]
    for orders in ([0, 0], [0, 1], [0, 2], [1, 1]):
        fine, other = ends(flows, 2, 1, orders, box), ends(coarse, 2, 1, orders, box)
        assert fine[0] >= other[0] - 1e-4 and fine[1] <= other[1] + 1e-4
    cut = [ONE, (Q(3, 20), Q(3, 20))]
    one, two = ends(flows, 2, 1, [0, 1], cut), ends(coarse, 2, 1, [0, 1], cut)
    assert max(one[0], two[0]) <= min(one[1], two[1])
    e = Evaluator(
        g.words.terms,
        g.words.terms.put("flow", (g.words.number(1), g.words.variable("v")), "2 1"),
        "",
        ["v"],
        (),
        A,
        flows,
    )
    e.direction = 0
    assert 0 in e.run([(Q(11, 100), Q(19, 100))], True).dg and not e.several


# Wrong witnesses: what is proved of them is true.


@cache
def driven() -> tuple[Words, Motion, Callable[[tuple[int, int]], dict[str, Any]]]:
    """x'' = p x - q t x' + p over the time q, in two pieces: every part of the rule counts."""
    w = Words()
    p, q = w.variable("p"), w.variable("q")
    damping = w("neg", w("mul", q, w.time(q)))
    parameters = (Parameter("p", p, None), Parameter("q", q, None))
    m = Motion(("x", "xd"), parameters, ((None, w.number(1)), (p, damping)), (None, p), q)

    def stated(degrees: tuple[int, int]) -> dict[str, Any]:
        return witness(
            lambda t, p, q: [[0, 1], [p, -q * t]], lambda p, q: q, {"p": ["2", "3"], "q": ["7/10", "4/5"]}, degrees,
            ("0", "2/5", "1"), free=lambda t, p, q: [0, p],
        )  # fmt: skip

    return w, m, stated


ORDERS = [[0, 0, 0], [0, 1, 0], [0, 0, 1], [0, 2, 0], [0, 1, 1], [0, 0, 2], [1, 0, 0], [1, 1, 0], [1, 0, 1]]


@cache
def right() -> Flows:
    w, m, stated = driven()
    return proved(w, m, stated((14, 7)))[0]


@pytest.mark.parametrize("seed", range(16))
def test_what_is_proved_of_a_wrong_witness_is_true(seed: int) -> None:
    """One coefficient off: enclosures still meet those of a good witness, and errors are no larger than they must be."""
    w, m, stated = driven()
    rng = random.Random(seed)
    wrong = stated((10, 4))
    k = seed % 2
    numbers = wrong["cells"][0][k].split(" ")
    place = rng.randrange(len(numbers))
    numbers[place] = str(int(numbers[place]) + (1 << 45))
    wrong["cells"][0][k] = " ".join(numbers)
    flows, error = proved(w, m, wrong)
    assert Q(1, 2**16) <= error <= Q(1, 2**5)
    for sigma in (Q(1), Q(1), Q(1), Q(-1), Q(rng.randint(-99, 99), 100)):
        p, q = Q(rng.randint(200, 300), 100), Q(rng.randint(70, 80), 100)
        at = [(sigma, sigma), (p, p), (q, q)]
        for orders in ORDERS:
            for entry in ((1, 1), (2, 1), (1, 2), (2, 2), (1, 0), (2, 0)):
                narrow, wide = ends(right(), *entry, orders, at), ends(flows, *entry, orders, at)
                assert wide[0] <= narrow[1] and narrow[0] <= wide[1], (entry, orders, at)


# Bounds of errors: of polynomials that are nothing, the solution itself.


def nothing(cuts: dict[str, list[str]], pieces: Sequence[str], degree: int = 2) -> dict[str, Any]:
    count = 2 * len(exponents_of(len(cuts), degree))
    return {
        "cuts": cuts,
        "pieces": list(pieces),
        "degrees": [1, degree],
        "bits": 60,
        "cells": [[" ".join(["0"] * count)] * (len(pieces) - 1)],
    }


def jets(flows: Flows) -> tuple[list[float], list[float]]:
    last, unit = flows.cells[0][-1], flows.system.models.unit
    return [x / unit for x in last.errors[1, 1]], [x / unit for x in last.rates[1, 1]]


@pytest.mark.parametrize("pieces", [("0", "1"), ("0", "1/2", "1")])
def test_the_solution_is_what_nothing_is_off_by(pieces: Sequence[str]) -> None:
    """x' = a x over 2, a = p/100, p²/100, pq/100: exp(2a) and its derivatives, each at most a little below its bound."""
    w = Words()
    p, q = w.variable("p"), w.variable("q")
    known = (Parameter("p", p, None), Parameter("q", q, None))
    scale = len(pieces) - 1  # of derivatives by the piece's time

    def bounds(
        rate: int, parameters: tuple[Parameter, ...], cuts: dict[str, list[str]]
    ) -> tuple[list[float], list[float]]:
        m = Motion(("x",), parameters, ((w("div", rate, w.number(100)),),), (None,), w.number(2))
        errors, rates = jets(proved(w, m, nothing(cuts, pieces))[0])
        return errors, [x * scale for x in rates]

    errors, rates = bounds(p, known[:1], {"p": ["1", "3"]})
    e = np.exp(0.06)
    for found, exact, more in zip(
        errors + rates[:2],
        [e, 0.02 * e, 0.0004 * e, 0.03 * e, (0.01 + 0.0006) * e],
        [1.01, 1.1, 2.3, 1.1, 1.2],
        strict=True,
    ):
        assert exact <= found <= more * exact
    errors, rates = bounds(w("mul", p, p), known[:1], {"p": ["-1", "1"]})
    e = np.exp(0.02)
    for found, exact in zip(errors + rates[:2], [e, 0.04 * e, 0.0416 * e, 0.01 * e, (0.02 + 0.0004) * e], strict=True):
        assert exact <= found <= 1.2 * exact
    errors, rates = bounds(w("mul", p, q), known, {"p": ["-1", "1"], "q": ["-1", "1"]})
    for found, exact in zip(errors, [e, 0.02 * e, 0.02 * e, 0.0004 * e, 0.0204 * e, 0.0004 * e], strict=True):
        assert exact <= found <= 2.3 * exact
    errors, rates = bounds(w("mul", p, w.number(100)), known[:1], {"p": ["2", "3"]})
    flows, _ = proved(w, Motion(("x",), known[:1], ((p,),), (None,), w.number(2)), nothing({"p": ["2", "3"]}, pieces))
    low, high = ends(flows, 1, 1, [1, 0], [ONE, (Q(3), Q(3))])
    assert low == -high and high == pytest.approx(rates[0]) and high >= 3 * np.exp(6)
    assert 3 * np.exp(6) <= rates[0] <= 3.1 * np.exp(6) and np.exp(6) <= errors[0] <= 1.001 * np.exp(6)


def test_where_a_piece_starts() -> None:
    """At the coordinate instead of 1, and again after the first piece: x' = 0."""
    w = Words()
    p = w.variable("p")
    m = Motion(("x",), (Parameter("p", p, None),), ((None,),), (None,), w("add", w.number(2), p))
    found = nothing({"p": ["-1", "1"]}, ("0", "1/2", "1"))
    one = 1 << 60
    found["cells"][0][0] = f"0 0 {one} 0 0 0"
    errors, rates = jets(proved(w, m, found)[0])
    assert errors == [pytest.approx(3), pytest.approx(2), 0] and rates == [0, 0, 0]
    found["cells"][0][1] = f"0 0 {one} 0 0 0"
    errors, _ = jets(proved(w, m, found)[0])
    assert errors == [pytest.approx(2), pytest.approx(1), 0]


def test_remainders_of_rates_count_in_defects() -> None:
    """Of rates and a divisor of which bounds alone are known, by Leibniz' rule; and the divisor's least magnitude."""
    flows, _ = gait(False)
    system = flows.system
    m, one = system.models, 1 << system.bits
    rate, below = Model({}, [5 * m.unit, 3 * m.unit, 2 * m.unit]), Model({m.constant: [m.unit]}, [m.unit, 0, 0])
    column = [{(0,): [2 * one], (1,): [one]}, {(0,): [0, 7 * one]}]
    assert defect(system, ([rate, None, None], below, m.unit), column, 0, 0) == [15 * m.unit, 14 * m.unit, 12 * m.unit]
    assert defect(system, ([rate, None, None], below, m.unit), column, 1, 0) == [29 * m.unit, 14 * m.unit, 12 * m.unit]
    assert defect(system, ([None, None, None], below, 4 * m.unit), column, 1, 0)[0] == -(-7 * m.unit // 2)
    driven = ([None, None, Model({m.constant: [3 * m.unit]}, [m.unit, 0, 0])], below, m.unit)
    assert defect(system, driven, column, 0, 1) == [0, 0, 0]
    assert defect(system, driven, column, 0, 2) == [4 * m.unit, 0, 0]


# Witnesses spoiled in exactly one place.


def base() -> tuple[Words, Motion, dict[str, Any]]:
    w = Words()
    p = w.variable("p")
    m = oscillator(w, p, w.number(Q(1, 2)), [Parameter("p", p, (Q(0), Q(3, 2), Q(3)))])
    return (
        w,
        m,
        witness(lambda t, p: [[0, 1], [p, 0]], lambda p: 0.5, {"p": ["1", "3/2", "2"]}, (8, 2), ("0", "1/2", "1")),
    )


WORDS, MOTION, STATED = base()


def spoiled(change: Callable[[dict[str, Any]], Any]) -> dict[str, Any]:
    found = deepcopy(STATED)
    change(found)
    return found


def texts(spoil: Callable[[list[str]], Any]) -> Callable[[dict[str, Any]], Any]:
    """Of the second piece of the first cell, number by number."""

    def change(found: dict[str, Any]) -> None:
        numbers = found["cells"][0][1].split(" ")
        spoil(numbers)
        found["cells"][0][1] = " ".join(numbers)

    return change


def put(key: str, value: Any) -> Callable[[dict[str, Any]], Any]:
    return lambda found: found.__setitem__(key, value)


NUMBERS = r"cells\[0\]\[1\]: 108 whole numbers"
SPOILED = {
    "bits a text": (put("bits", "60"), "bits: 24 to 400"),
    "bits true": (put("bits", True), "bits: 24"),
    "few bits": (put("bits", 23), "bits: 24"),
    "many bits": (put("bits", 401), "bits: 24"),
    "degrees a tuple": (put("degrees", (8, 2)), "degrees: two whole"),
    "one degree": (put("degrees", [8]), "degrees: two whole"),
    "three degrees": (put("degrees", [8, 2, 2]), "degrees: two whole"),
    "a degree of 8.0": (put("degrees", [8.0, 2]), "degrees: two whole"),
    "a degree true": (put("degrees", [8, True]), "degrees: two whole"),
    "no degree in time": (put("degrees", [0, 2]), "degrees: at most 60"),
    "a high degree in time": (put("degrees", [61, 2]), "degrees: at most 60"),
    "a negative degree": (put("degrees", [8, -1]), "degrees: at most 60"),
    "a high degree": (put("degrees", [8, 13]), "degrees: at most 60"),
    "another degree in time": (put("degrees", [9, 2]), r"cells\[0\]\[0\]: 120 whole"),
    "another degree": (put("degrees", [8, 3]), r"cells\[0\]\[0\]: 144 whole"),
    "pieces a text": (put("pieces", "01"), "pieces: a list"),
    "one piece's end": (put("pieces", ["0"]), "pieces: a list"),
    "pieces that fall": (put("pieces", ["0", "1/2", "1/2", "1"]), "pieces: numbers that rise"),
    "pieces from above 0": (put("pieces", ["1/4", "1/2", "1"]), "pieces: from 0 to 1"),
    "pieces to below 1": (put("pieces", ["0", "1/2", "3/4"]), "pieces: from 0 to 1"),
    "pieces from below 0": (put("pieces", ["-1", "1/2", "1"]), "pieces: from 0 to 1"),
    "a piece's end 0.5f": (put("pieces", ["0", 0.5, "1"]), "pieces: a proved number is written as text"),
    "a piece's end 2/4": (put("pieces", ["0", "2/4", "1"]), "pieces: "),
    "a long number of a piece": (put("pieces", ["0", f"1/{10**1234}", "1"]), "pieces: a number of more than 4096"),
    "many pieces": (put("pieces", ["0", *(f"{Q(k, 65)}" for k in range(1, 65)), "1"]), "pieces: a list of 2 to 65"),
    "fewer pieces": (put("pieces", ["0", "1"]), r"cells\[0\]: a text for each piece"),
    "more pieces": (put("pieces", ["0", "1/4", "1/2", "1"]), r"cells\[0\]: a text for each piece"),
    "cuts a list": (put("cuts", ["1", "3/2", "2"]), "cuts: a list for each"),
    "no cuts": (put("cuts", {}), "cuts: a list for each"),
    "cuts of another name": (put("cuts", {"q": ["1", "3/2", "2"]}), "cuts: a list for each"),
    "cuts of two names": (put("cuts", {"p": ["1", "3/2", "2"], "q": ["1", "2"]}), "cuts: a list for each"),
    "cuts that are no list": (put("cuts", {"p": "1 2"}), "cuts.p: a list of 2"),
    "one cut": (put("cuts", {"p": ["1"]}), "cuts.p: a list of 2"),
    "cuts that stand": (put("cuts", {"p": ["1", "3/2", "3/2"]}), "cuts.p: numbers that rise"),
    "cuts that fall": (put("cuts", {"p": ["3/2", "1", "2"]}), "cuts.p: numbers that rise"),
    "a cut that is no text": (put("cuts", {"p": ["1", 1.5, "2"]}), "cuts.p: a proved number"),
    "a cut spelled otherwise": (put("cuts", {"p": ["1", "6/4", "2"]}), "cuts.p: "),
    "a line of the grid in a cell": (put("cuts", {"p": ["1", "8/5", "2"]}), "cuts.p: a line of its grid lies inside"),
    "cells a table": (put("cells", {}), "cells: a list of 2"),
    "a missing cell": (lambda f: f["cells"].pop(), "cells: a list of 2"),
    "an extra cell": (lambda f: f["cells"].append(f["cells"][0]), "cells: a list of 2"),
    "a cell that is a text": (lambda f: f["cells"].__setitem__(1, "0"), r"cells\[1\]: a text for each piece"),
    "a missing piece": (lambda f: f["cells"][1].pop(), r"cells\[1\]: a text for each piece"),
    "an extra piece": (lambda f: f["cells"][1].append("0"), r"cells\[1\]: a text for each piece"),
    "a piece that is a list": (lambda f: f["cells"][0].__setitem__(1, [0] * 108), NUMBERS),
    "an empty piece": (lambda f: f["cells"][0].__setitem__(1, ""), NUMBERS),
    "a missing number": (texts(lambda x: x.pop()), NUMBERS),
    "an extra number": (texts(lambda x: x.append("0")), NUMBERS),
    "a float": (texts(lambda x: x.__setitem__(3, "1.5")), NUMBERS),
    "an exponent": (texts(lambda x: x.__setitem__(3, "1e5")), NUMBERS),
    "a leading zero": (texts(lambda x: x.__setitem__(3, "01")), NUMBERS),
    "minus zero": (texts(lambda x: x.__setitem__(3, "-0")), NUMBERS),
    "a plus sign": (texts(lambda x: x.__setitem__(3, "+1")), NUMBERS),
    "an extra space": (texts(lambda x: x.__setitem__(3, " 1")), NUMBERS),
    "a space for a number": (texts(lambda x: x.__setitem__(3, "")), NUMBERS),
    "a line break": (texts(lambda x: x.__setitem__(-1, x[-1] + "\n")), NUMBERS),
    "a tab": (lambda f: f["cells"][0].__setitem__(1, f["cells"][0][1].replace(" ", "\t", 1) + " 0"), NUMBERS),
    "an underscore": (texts(lambda x: x.__setitem__(3, "1_0")), NUMBERS),
    "another script's digit": (texts(lambda x: x.__setitem__(3, "\u0663")), NUMBERS),
    "a long integer": (texts(lambda x: x.__setitem__(3, "1" * 201)), NUMBERS),
    "a coefficient": (texts(lambda x: x.__setitem__(3, str(int(x[3]) + 2**50))), "error: less"),
    "a coefficient of a coordinate": (texts(lambda x: x.__setitem__(12, str(int(x[12]) + 2**50))), "error: less"),
    "the start": (lambda f: f["cells"][1].__setitem__(0, str(int(f["cells"][1][0].split(" ", 1)[0]) + 2**50) + " " + f["cells"][1][0].split(" ", 1)[1]), "error: less"),
    "cells in another sequence": (lambda f: f["cells"].reverse(), "error: less"),
    "pieces in another sequence": (lambda f: f["cells"][0].reverse(), "error: less"),
    "another length of pieces": (put("pieces", ["0", "1/3", "1"]), "error: less"),
    "other cuts": (put("cuts", {"p": ["1", "3/2", "9/4"]}), "error: less"),
    "other bits": (put("bits", 61), "error: less"),
}  # fmt: skip


def test_what_is_spoiled_below_is_proved() -> None:
    _, error = proved(WORDS, MOTION, STATED)
    assert error < Q(1, 10**4)
    trajectory(WORDS.terms, MOTION, (), STATED, Q(1, 10**4))


@pytest.mark.parametrize("name", SPOILED)
def test_spoiled(name: str) -> None:
    change, says = SPOILED[name]
    with pytest.raises(Rejected, match=rf"\A{says}"):
        trajectory(WORDS.terms, MOTION, (), spoiled(change), Q(1, 10**4))


def test_a_long_integer_is_read() -> None:
    with pytest.raises(Rejected, match="error: less"):
        trajectory(WORDS.terms, MOTION, (), spoiled(texts(lambda x: x.__setitem__(3, "1" * 200))), Q(1))


def test_limits_of_the_stance() -> None:
    w = Words()
    p = [Parameter(f"p{k}", w.variable(f"p{k}"), None) for k in range(7)]
    rate = w.variable("p0")
    stated = STATED | {"cuts": {x.name: ["1", "2"] for x in p}}
    with pytest.raises(Rejected, match="at most 12 states and 6 parameters"):
        trajectory(w.terms, oscillator(w, rate, w.number(1), p), (), stated, Q(1))
    with pytest.raises(Rejected, match=r"cells: a list of 1"):
        trajectory(
            w.terms,
            oscillator(w, rate, w.number(1), p[:6]),
            (),
            stated | {"cuts": dict(list(stated["cuts"].items())[:6])},
            Q(1),
        )
    for n in (0, 13):
        empty = Motion(tuple(f"x{k:02}" for k in range(n)), (), ((None,) * n,) * n, (None,) * n, w.number(1))
        with pytest.raises(Rejected, match="at most 12 states"):
            trajectory(w.terms, empty, (), STATED | {"cuts": {}}, Q(1))
    lines = [str(Q(k)) for k in range(318)]
    many = STATED | {"cuts": {"p0": lines, "p1": lines}}
    with pytest.raises(Rejected, match="at most 100000 cells"):
        trajectory(w.terms, oscillator(w, rate, w.number(1), p[:2]), (), many, Q(1))
    big = STATED | {
        "cuts": {x.name: ["1", "2"] for x in p[:6]},
        "degrees": [60, 12],
        "pieces": ["0", "1"],
        "cells": [["0"]],
    }
    with pytest.raises(Rejected, match=r"cells\[0\]\[0\]: more than 200000 numbers"):
        trajectory(w.terms, oscillator(w, rate, w.number(1), p[:6]), (), big, Q(1))


def test_stances_that_cannot_be_followed() -> None:
    """Rates that may divide by zero, are too large, or depend on what is no parameter."""
    w = Words()
    p = w.variable("p")
    known = [Parameter("p", p, None)]
    stated = deepcopy(STATED)
    half = w.number(Q(1, 2))
    t = w.time(half)
    cases = {
        "division by what may be zero": oscillator(w, w("div", p, w("sub", t, w.number(Q(1, 10)))), half, known),
        "rates that large": oscillator(w, w("mul", p, w.number(10**6)), half, known),
        "a power beyond 60": oscillator(w, w.terms.put("power", (p,), Q(61)), half, known),
        "sqrt of values": oscillator(w, w("sqrt", w("sub", p, w.number(1))), half, known),
    }
    for says, motion in cases.items():
        with pytest.raises(Rejected, match=rf"\Acells\[0\]\[0\]: {says}"):
            trajectory(w.terms, motion, (), stated, Q(10**30))
    with pytest.raises(Rejected, match="q is no parameter"):
        trajectory(w.terms, oscillator(w, w.variable("q"), half, known), (), stated, Q(1))
    with pytest.raises(Rejected, match="the duration depends on the time"):
        trajectory(w.terms, oscillator(w, p, w("add", t, half), known), (), stated, Q(1))
    with pytest.raises(Rejected, match=r"cells\[0\]\[0\]: division by what may be zero"):
        trajectory(w.terms, oscillator(w, t, w("sub", p, w.number(1)), known), (), stated, Q(1))


def test_readings_in_the_rates() -> None:
    """Axes are parameters or numbers; the grid of a parameter holds all lines it is read on."""
    w = Words()
    p = w.variable("p")
    grid = (Q(0), Q(3, 2), Q(3))
    library = Library("f", ("p",), (), (grid,), {"c": (Q(1), Q(2), Q(1))})
    read = w.terms.put("reading", (p,), "c")

    def by(given: tuple[Q, ...] | None, rate: int = read) -> Flows:
        m = oscillator(w, rate, w.number(Q(1, 2)), [Parameter("p", p, given)])
        return trajectory(w.terms, m, [library], STATED, Q(100))

    by(grid)
    by((*grid, Q(4)))
    for other in (None, (Q(0), Q(3)), (Q(0), Q(1), Q(3))):
        with pytest.raises(Rejected, match="c is read on another grid than its parameter"):
            by(other)
    by(None, w.terms.put("reading", (w.number(1),), "c"))
    with pytest.raises(Rejected, match="a library axis within the rates is no parameter"):
        by(grid, w.terms.put("reading", (w("mul", p, p),), "c"))
    with pytest.raises(Rejected, match="beyond its grid"):
        by(None, w.terms.put("reading", (w.number(4),), "c"))


def test_a_row_of_quotients() -> None:
    """1/p and 1/p² over p in [1/4, 3/4]: what all are divided by, and its least magnitude; over 2, so h is 1."""
    w = Words()
    p = w.variable("p")
    square = w.terms.put("power", (p,), Q(2))
    entries = [w("div", w.number(3), p), w("div", w.number(5), square), None, w.number(7)]
    motion = Motion(("x",), (Parameter("p", p, None),), ((entries[1],),), (None,), w.number(2))
    system = System(w.terms, motion, (), 60, (4, 3))
    system.after = sorted({k for e in entries if e is not None for k in w.terms.below(e)} - set(system.before))
    numerators, below, least = Coefficients(system, [(Q(1, 2), Q(1, 4))], (Q(0), Q(1))).row(entries)
    unit = system.models.unit
    assert least == unit // 16
    for x in (Q(-1), Q(0), Q(1, 3)):
        at = Q(1, 2) + x / 4
        assert abs(valued(below.poly, (Q(0), x)) / unit - at**2) < Q(1, 2**90)
        for found, exact in zip(numerators, [3 * at, Q(5), None, 7 * at**2], strict=True):
            assert (found is None) == (exact is None)
            assert found is None or exact is None or abs(valued(found.poly, (Q(0), x)) / unit - exact) < Q(1, 2**90)


def test_a_reading_within_one_cell_of_its_grid_alone() -> None:
    w = Words()
    p = w.variable("p")
    grid = (Q(0), Q(1), Q(2))
    library = Library("f", ("p",), (), (grid,), {"c": (Q(1), Q(2), Q(5))})
    motion = oscillator(w, w.terms.put("reading", (p,), "c"), w.number(1), [Parameter("p", p, grid)])
    system = System(w.terms, motion, [library], 60, (4, 3))
    for middle, exact in ((Q(1, 2), (Q(3, 2), Q(1, 2))), (Q(3, 2), (Q(7, 2), Q(3, 2)))):
        numerators, _, _ = Coefficients(system, [(middle, Q(1, 2))], (Q(0), Q(1))).row([*motion.matrix[1], None])
        assert numerators[0] is not None
        found = [numerators[0].poly[e,][0] for e in (0, 1)]
        assert [Q(x, system.models.unit) for x in found] == [x / 2 for x in exact]
    with pytest.raises(Undefined, match="a line of its grid lies inside a cell"):
        Coefficients(system, [(Q(1), Q(1, 2))], (Q(0), Q(1)))


def test_exponents_are_in_lexicographic_order() -> None:
    assert exponents_of(0, 3) == [()]
    assert exponents_of(1, 2) == [(0,), (1,), (2,)]
    assert exponents_of(2, 2) == [(0, 0), (0, 1), (0, 2), (1, 0), (1, 1), (2, 0)]
    assert len(exponents_of(6, 12)) == comb(18, 6)


def test_the_growth_of_errors() -> None:
    """exp(2B) and its integral from above, and narrowly: one entry, a nilpotent matrix, a pendulum."""
    unit = 2**40
    for b in (0.0, 0.5, 3.0, 20.0):
        grown, forced = growth([[int(b * unit)]])
        exact = [np.exp(2 * b), (np.exp(2 * b) - 1) / b if b else 2]
        for found, value in zip((grown[0][0], forced[0][0]), exact, strict=True):
            assert value * unit * (1 - 1e-12) <= found <= value * unit * (1 + 1e-9) + 4
    grown, forced = growth([[0, unit], [0, 0]])
    for found, value in zip([*grown[0], *grown[1], *forced[0], *forced[1]], [1, 2, 0, 1, 2, 2, 0, 2], strict=True):
        assert value * unit <= found <= value * unit + 4
    grown, _ = growth([[0, unit], [9 * unit, 0]])
    assert np.cosh(6) * unit * (1 - 1e-12) <= grown[0][0] <= np.cosh(6) * unit * (1 + 1e-9)
    assert 3 * np.sinh(6) * unit * (1 - 1e-12) <= grown[1][0] <= 3 * np.sinh(6) * unit * (1 + 1e-9)
    growth([[64 * unit]])
    with pytest.raises(Undefined, match="more pieces"):
        growth([[64 * unit + 1]])
