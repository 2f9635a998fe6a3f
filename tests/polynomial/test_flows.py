"""Tables of polynomials over boxes: contain dense samples, are tight on small boxes, and agree with programs that read them."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from ultibound.bounding.evaluate import Runner
from ultibound.bounding.intervals import Floats
from ultibound.claim.graph import Graph
from ultibound.polynomial import chebyshev
from ultibound.polynomial.flows import Branch, Errors, FlowTable
from ultibound.polynomial.monomials import fit, monomials, sites
from ultibound.stepmap.symbolic import compiled

GRID = np.array([0.0, 0.5, 1.0, 2.0])


def smooth(s: Floats, *p: Floats) -> Floats:
    """A function of normalised time and up to two parameters."""
    second = p[1] if len(p) > 1 else 0.3
    return np.exp(0.4 * s * p[0]) * np.cos(p[0] - second) + 0.2 * s * second


def table(parameters: int, pieces: Floats, jump: float = 0.0, error: float = 0.0) -> FlowTable:
    """`smooth` as the only entry, interpolated; from 1 on along the first parameter `jump` times (p - 1) is added."""
    cuts = [np.array([0.0, 0.25, 0.5, 1.0, 1.5, 2.0]), np.array([0.0, 0.4, 1.0])][:parameters]
    n, m = 12, 8
    places, times = sites(parameters, m, 1.0), chebyshev.points(n + 1)
    cells = []
    for rank in np.ndindex(*(len(c) - 1 for c in cuts)):
        ends = [(c[k], c[k + 1]) for c, k in zip(cuts, rank, strict=True)]
        p = [(a + b) / 2 + (b - a) / 2 * places[:, k] for k, (a, b) in enumerate(ends)]
        row = []
        for f, g in pairwise(pieces):
            sigma = 2 * (f + (g - f) * (1 + times) / 2) - 1
            values = smooth(sigma, *(x[:, None] for x in p)) + jump * np.maximum(p[0] - 1, 0)[:, None]
            row.append(fit(parameters, m, 1.0) @ values @ chebyshev.fit(n + 1).T)
        cells.append(row)
    coefficients = np.array(cells)[:, :, None, None]
    count, size = coefficients.shape[:2], parameters
    wrong = [np.full((*count, *more), error) for more in ((), (), (size,), (size,), (size, size))]
    return FlowTable(cuts, [GRID, None][:parameters], pieces, (n, m), coefficients, Errors(*wrong))


def ends(
    t: FlowTable, orders: tuple[int, ...], low: Floats, high: Floats, branch: Branch | None = None
) -> tuple[Floats, Floats]:
    axes = [(low[:, k], high[:, k]) for k in range(low.shape[1])]
    return t.read(1, 1, orders, axes, len(low), branch)[0]


def partial(orders: tuple[int, ...], x: Floats, h: float = 1e-3) -> Floats:
    """A derivative of `smooth` by central differences of fourth order, rows of (s, *p)."""
    if not sum(orders):
        return smooth(*x.T)
    k = next(i for i, o in enumerate(orders) if o)
    less, step = tuple(o - (i == k) for i, o in enumerate(orders)), h * np.eye(len(orders))[k]
    near, far = (partial(less, x + d) - partial(less, x - d) for d in (step, 2 * step))
    return (8 * near - far) / (12 * h)


@pytest.mark.parametrize(
    "orders", [(0, 0, 0), (1, 0, 0), (0, 1, 0), (0, 0, 1), (1, 1, 0), (2, 0, 0), (0, 2, 0), (0, 1, 1), (0, 0, 2)]
)
def test_derivatives_at_points(orders: tuple[int, ...]) -> None:
    t, rng = table(2, np.array([0, 0.3, 1])), np.random.default_rng(1)
    x = rng.uniform([-0.9, 0.05, 0.05], [0.9, 1.9, 0.9], (60, 3))
    low, high = ends(t, orders, x, x)
    assert np.all(high - low < 1e-9)
    np.testing.assert_allclose(low, partial(orders, x), atol=3e-7)


@pytest.mark.parametrize("orders", [(0, 0), (0, 1), (1, 0), (1, 1), (0, 2)])
@pytest.mark.parametrize("end", [False, True])
def test_small_boxes_are_tight_and_large_ones_contain_their_samples(orders: tuple[int, ...], end: bool) -> None:
    t, rng = table(1, np.array([0, 0.5, 1])), np.random.default_rng(2)
    for width in (0.002, 0.7):
        low = rng.uniform([-1, 0], [1 - width, 2 - width], (40, 2))
        high = low + width
        if end:
            low[:, 0] = high[:, 0] = 1
        found = ends(t, orders, low, high)
        share = rng.uniform(0, 1, (40, 500, 2))
        share[:, :4] = [[0, 0], [0, 1], [1, 0], [1, 1]]
        x = (low[:, None] + share * (high - low)[:, None]).reshape(-1, 2)
        sampled = ends(t, orders, x, x)[0].reshape(40, 500)
        assert np.all(found[0] <= sampled.min(axis=1) + 1e-9) and np.all(found[1] >= sampled.max(axis=1) - 1e-9)
        if width < 0.01:
            spread = sampled.max(axis=1) - sampled.min(axis=1)
            flat = spread < 3e-5  # about an extremum the second-order part is what there is
            assert np.all(flat | (found[1] - found[0] <= 1.05 * spread + 1e-9)) and flat.sum() < 5


def test_errors_widen_ranges_in_the_units_of_the_parameter() -> None:
    plain, wide = table(1, np.array([0.0, 1.0])), table(1, np.array([0.0, 1.0]), error=1e-3)
    x = np.array([[0.3, 0.1], [1.0, 1.2]])  # half widths 1/8 and 1/4
    for orders, factor in (((0, 0), [1, 1]), ((0, 1), [8, 4]), ((1, 1), [8, 4]), ((0, 2), [64, 16])):
        a, b = ends(plain, orders, x, x), ends(wide, orders, x, x)
        np.testing.assert_allclose(b[1] - a[1], 1e-3 * np.array(factor), rtol=1e-6)
        np.testing.assert_allclose(a[0] - b[0], 1e-3 * np.array(factor), rtol=1e-6)


def test_grid_cells_are_met_like_those_of_a_reading_and_other_cuts_are_not() -> None:
    t = table(1, np.array([0, 0.5, 1]), jump=3.0)
    low = np.array([[1, 0.2], [1, 0.3], [1, 0.9], [1, 0.5], [1, 1.0], [1, 1.2]])
    high = np.array([[1, 0.3], [1, 0.5], [1, 1.1], [1, 0.5], [1, 1.0], [1, 1.9]])
    axes = [(low[:, k], high[:, k]) for k in (0, 1)]
    slopes, (firsts, spans) = t.read(1, 1, (0, 1), axes, 6, None)
    assert firsts[0].tolist() == [0] * 6 and spans[0].tolist() == [1] * 6
    assert firsts[1].tolist() == [0, 0, 1, 1, 2, 2] and spans[1].tolist() == [1, 1, 2, 1, 1, 1]
    left = partial((0, 1), np.array([[1.0, 1.0]]))[0]
    assert slopes[0][2] <= left + 0.1 and slopes[1][2] >= left + 2.9  # the hull of both sides of the jump
    assert slopes[0][4] == pytest.approx(left + 3, abs=1e-6)
    face = [(np.ones(1), np.ones(1))] * 2  # a face on the grid line, on the branch of the box at its left
    held, _ = t.read(1, 1, (0, 1), face, 1, ([np.array([0]), np.array([1])], [np.array([1]), np.array([1])]))
    assert held[0][0] == pytest.approx(left, abs=1e-6)


def test_undefined_outside_and_beyond_second_derivatives() -> None:
    t = table(1, np.array([0.0, 1.0]))
    x = np.array([[1.01, 1], [0, -0.01], [0, 2.01], [-1, 0], [1, 2]])
    assert np.isnan(ends(t, (0, 0), x, x)[0]).tolist() == [True, True, True, False, False]
    assert np.all(np.isnan(ends(t, (1, 2), x, x)[0]))


def test_without_parameters() -> None:
    n = 10
    values = np.exp(chebyshev.points(n + 1))
    c = (chebyshev.fit(n + 1) @ values).reshape(1, 1, 1, 1, 1, n + 1)
    none = [np.zeros((1, 1, *x)) for x in ((), (), (0,), (0,), (0, 0))]
    t = FlowTable([], [], np.array([0.0, 1.0]), (n, 0), c, Errors(*none))
    for o in (0, 1, 2):
        (low, high), _ = t.read(1, 1, (o,), [(np.array([-0.1, 0.5]), np.array([0.1, 0.5]))], 2, None)
        assert low[0] <= np.exp(-0.1) and high[0] >= np.exp(0.1) - 1e-6 and high[0] - low[0] < 0.23
        assert low[1] == pytest.approx(np.exp(0.5), abs=1e-6)


def test_many_cells_at_once_are_read_in_portions(monkeypatch: pytest.MonkeyPatch) -> None:
    t, rng = table(2, np.array([0, 0.3, 1])), np.random.default_rng(3)
    low = rng.uniform([-1, 0, 0], [0, 1, 0.5], (30, 3))
    whole = ends(t, (0, 1, 0), low, low + 0.4)
    monkeypatch.setattr("ultibound.polynomial.flows.AT_ONCE", 1000)
    parts = ends(t, (0, 1, 0), low, low + 0.4)
    np.testing.assert_array_equal(whole, parts)


def test_a_program_differentiates_a_flow_by_the_chain_rule() -> None:
    """2 Φ(u², 1 − p) over boxes: gradient and curvature contain finite differences; without a table nothing is defined."""
    g = Graph()
    u, p = g.add("variable", name="u"), g.add("variable", name="p")
    flow = g.add("flow", g.add("mul", u, u), g.add("sub", g.number(1), p), name="1 1")
    program = compiled(g, g.add("mul", g.number(2), flow), "", ["u", "p"], True)
    t = table(1, np.array([0, 0.5, 1]))
    runner = Runner(program, ["u", "p"], (), flows=t)
    x = np.array([[0.3, 0.2], [0.6, 0.7], [-0.5, 0.1]])
    run = runner(x, x)

    def at(y: Floats) -> Floats:
        return 2 * smooth(y[:, 0] ** 2, 1 - y[:, 1])

    np.testing.assert_allclose(run.low, at(x), atol=1e-9)
    h = 1e-4
    for k in (0, 1):
        step = h * np.eye(2)[k]
        np.testing.assert_allclose(run.gradient_low[:, k], (at(x + step) - at(x - step)) / (2 * h), atol=1e-6)
        for m in (0, 1):
            other = h * np.eye(2)[m]
            bend = (at(x + step + other) - at(x + step - other) - at(x - step + other) + at(x - step - other)) / (
                4 * h * h
            )
            np.testing.assert_allclose(run.curvature[min(k, m), max(k, m)][0], bend, atol=1e-5)
    assert not run.split.any()
    across = runner(np.array([[0.3, 0.3]]), np.array([[0.4, 0.6]]))
    assert across.split.all()
    assert np.all(np.isinf(Runner(program, ["u", "p"], ())(x, x).low))


def test_monomials_shift_exactly() -> None:
    m, rng = monomials(3, 4), np.random.default_rng(4)
    c, to, x = rng.normal(size=(5, len(m.exponents))), rng.uniform(-1, 1, (5, 3)), rng.uniform(-1, 1, (5, 3))
    moved = (m.moves(to) @ c[:, :, None])[:, :, 0]
    np.testing.assert_allclose((moved * m.at(x - to)).sum(axis=1), (c * m.at(x)).sum(axis=1), atol=1e-12)
    assert m.exponents[:4] == [(0, 0, 0), (0, 0, 1), (0, 0, 2), (0, 0, 3)]
    back = fit(3, 4, 0.6) @ m.at(sites(3, 4, 0.6))
    np.testing.assert_allclose(back, np.eye(len(m.exponents)), atol=1e-9)
