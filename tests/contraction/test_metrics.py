"""Proposed metrics: exact inverses, gains against known ones, the same twice, and no solver's fault getting through."""

from __future__ import annotations

import sys
from fractions import Fraction
from math import cosh, exp, hypot, sinh, sqrt
from typing import Any

import numpy as np
import pytest

from ultibound.contraction import programmes
from ultibound.contraction.metrics import KINDS, Proposal, proposals
from ultibound.contraction.polytopes import comparison_vector, least_above

NONE = np.zeros((0, 2))
CORNERS = np.array([[a, b] for a in (1.0, -1.0) for b in (1.0, -1.0)])
ONES = np.ones(2)
GOLDEN = np.array([[[1.0, 1], [0, 1]], [[1, 0], [1, 1]]])


def family(states: int, count: int, seed: int = 1) -> tuple[Any, Any]:
    """Jacobians about one of spectral radius 0.7, and misses."""
    rng = np.random.default_rng(seed)
    a = rng.standard_normal((states, states))
    a *= 0.7 / np.abs(np.linalg.eigvals(a)).max()
    return a + 0.05 * rng.uniform(-1, 1, (count, states, states)), 0.01 * rng.standard_normal((count, states))


def floats(rows: tuple[tuple[Fraction, ...], ...]) -> Any:
    return np.array([[float(x) for x in row] for row in rows])


def bounds(p: Proposal) -> list[float]:
    """ε/(1−k) times the extents of the unit ball."""
    w = floats(p.inverse)
    extents = np.linalg.norm(w, axis=1) if p.kind == "ellipsoid" else np.abs(w).sum(axis=1)
    return list(p.residual / (1 - p.gain) * extents)


def best(kind: str, jacobians: Any, misses: Any = NONE, room: Any = ONES) -> Proposal:
    return proposals(np.asarray(jacobians), misses, room, kind)[0]


def share(p: Proposal) -> float:
    """b / R: at most 1 where the largest ball in the region is mapped into itself."""
    return p.residual / (1 - p.gain) / p.radius


class TestWhatIsProposed:
    @pytest.mark.parametrize("states", [1, 2, 3, 4, 5, 6])
    def test_inverses_are_exact_and_numbers_short(self, states: int) -> None:
        found = proposals(*family(states, 8), np.linspace(0.3, 40, states))
        assert 1 <= len(found) <= 8
        for p in found:
            product = [
                [sum(a * b for a, b in zip(row, column, strict=True)) for column in zip(*p.inverse, strict=True)]
                for row in p.rows
            ]
            assert product == [[Fraction(i == j) for j in range(states)] for i in range(states)]
            assert all(
                x.denominator & (x.denominator - 1) == 0 and x.numerator.bit_length() <= 41
                for row in p.rows
                for x in row
            )

    @pytest.mark.parametrize("kind", KINDS)
    def test_gain_residual_and_radius_are_those_of_the_rounded_metric(self, kind: str) -> None:
        (jacobians, misses), room = family(3, 20, 2), np.array([2.0, 0.1, 30.0])
        for p in proposals(jacobians, misses, room, kind):
            assert p.kind == kind
            v, w = floats(p.rows), floats(p.inverse)
            order = 2 if kind == "ellipsoid" else np.inf
            gain = max(np.linalg.norm(v @ j @ w, order) for j in jacobians)
            assert p.gain == pytest.approx(gain, rel=1e-9)
            assert p.residual == pytest.approx(max(np.linalg.norm(v @ m, order) for m in misses), rel=1e-9)
            dual = [np.linalg.norm(row, 2 if kind == "ellipsoid" else 1) for row in w]
            assert p.radius == pytest.approx(min(room / dual), rel=1e-9)
            if kind == "box":
                assert all(
                    (x > 0) == (i == j) and (x != 0) == (i == j)
                    for i, row in enumerate(p.rows)
                    for j, x in enumerate(row)
                )

    def test_every_kind_that_contracts_and_none_that_does_not(self) -> None:
        found = proposals(np.array([[[0.5, 0.2], [0.1, 0.3]]]), 0.1 * CORNERS, ONES)
        assert {p.kind for p in found} == set(KINDS)
        turning = proposals(np.array([[[0.6, 0.5], [-0.5, 0.6]]]), 0.1 * CORNERS, ONES)
        assert {p.kind for p in turning} == {"ellipsoid"}  # row sums of 1.1 in every box
        assert all(p.gain < 1 for p in [*found, *turning])

    def test_best_first(self) -> None:
        found = proposals(*family(4, 30), np.ones(4))
        kept = [share(p) <= 0.98 for p in found]
        sizes = [max(bounds(p)) + np.mean(bounds(p)) / 4 for p in found]
        assert kept[0]
        assert kept == sorted(kept, reverse=True)
        assert sizes == sorted(sizes)

    @pytest.mark.parametrize("states", [2, 4, 6])
    def test_the_same_twice(self, states: int) -> None:
        jacobians, misses = family(states, 40)
        first, second = (repr(proposals(jacobians, misses, np.ones(states))).encode() for _ in range(2))
        assert first == second

    def test_units_do_not_matter(self) -> None:
        jacobians, misses = family(3, 10)
        units = np.array([1024.0, 1.0, 2.0**-12])
        plain = proposals(jacobians, misses, np.ones(3))
        other = proposals(jacobians * units[:, None] / units, misses * units, units)
        assert [(p.kind, p.gain) for p in other] == [(p.kind, pytest.approx(p.gain, rel=1e-9)) for p in plain]

    def test_weights_are_kept(self) -> None:
        weights = (Fraction(1, 3), Fraction(7))
        (p,) = proposals(np.array([[[0.5, 0.2], [0.1, 0.3]]]), 0.1 * CORNERS, ONES, weights=weights)
        assert p.rows == ((Fraction(1, 3), 0), (0, Fraction(7)))
        assert p.inverse == ((Fraction(3), 0), (0, Fraction(1, 7)))
        assert p.gain == pytest.approx(0.3 + 0.1 * 21)

    def test_not_finite_is_nothing(self) -> None:
        assert proposals(np.array([[[np.nan, 0], [0, 0]]]), NONE, ONES) == []
        assert proposals(np.zeros((1, 2, 2)), np.array([[np.inf, 0]]), ONES) == []
        assert proposals(np.full((1, 2, 2), 1e300), NONE, ONES) == []

    @pytest.mark.parametrize("size", [1e-300, 1e-30, 1e6, 1e15, 1e50])
    def test_sizes_far_from_one(self, size: float) -> None:
        found = proposals(size * GOLDEN, CORNERS, ONES)
        assert 0 < found[0].gain < 2 * size + 1e-3
        assert all(p.radius > 0 for p in found)

    @pytest.mark.parametrize(
        ("jacobians", "misses", "room", "kind", "weights"),
        [
            (np.zeros((2, 2)), NONE, ONES, "auto", None),
            (np.zeros((0, 2, 2)), NONE, ONES, "auto", None),
            (np.zeros((1, 2, 2)), np.zeros((1, 3)), ONES, "auto", None),
            (np.zeros((1, 2, 2)), NONE, np.array([1.0, 0.0]), "auto", None),
            (np.zeros((1, 2, 2)), NONE, np.ones((2, 1)), "auto", None),
            (np.zeros((1, 2, 2)), NONE, ONES, "cube", None),
            (np.zeros((1, 2, 2)), NONE, ONES, "ellipsoid", (Fraction(1), Fraction(1))),
            (np.zeros((1, 2, 2)), NONE, ONES, "box", (Fraction(1), Fraction(0))),
        ],
    )  # fmt: skip
    def test_what_is_malformed(self, jacobians: Any, misses: Any, room: Any, kind: str, weights: Any) -> None:
        with pytest.raises(ValueError, match=r"expected|one of"):
            proposals(jacobians, misses, room, kind, weights)


class TestKnownGains:
    @pytest.mark.parametrize("seed", range(50))
    def test_an_ellipsoid_of_one_matrix_comes_near_its_spectral_radius(self, seed: int) -> None:
        """The infimum over ellipsoids is the spectral radius (Householder 1958, from memory)."""
        rng = np.random.default_rng(seed)
        n = 2 + seed % 5
        a = rng.standard_normal((n, n))
        radius = rng.uniform(0.2, 0.95)
        a *= radius / np.abs(np.linalg.eigvals(a)).max()
        assert radius - 1e-9 <= best("ellipsoid", a[None], np.zeros((0, n)), np.ones(n)).gain <= radius + 1e-3

    def test_golden_pair(self) -> None:
        """Joint spectral radius (1 + √5)/2, attained by P = I (Jungers, The Joint Spectral Radius, LNCIS 385, 2009,
        from memory): row C02 of the check values."""
        assert (1 + sqrt(5)) / 2 - 1e-9 <= best("ellipsoid", GOLDEN).gain <= 1.618034 + 1e-6
        assert best("auto", GOLDEN / 1.62).gain < 1

    def test_jordan_block(self) -> None:
        """Row C01 of the check values (own computation): 0.5 is not attained, 0.5101 must be."""
        for kind in ("box", "ellipsoid"):
            assert 0.5 < best(kind, [[[0.5, 1], [0, 0.5]]]).gain <= 0.5101

    def test_step_times_of_a_pendulum(self) -> None:
        """Row C04 of the check values (own computation; triangular families: Jungers 2009, from memory): foot at
        κ(x + v/ω), T of 0.3, 0.4 or 0.5 at every step; joint spectral radius exp(0.3ω)(1−κ) + κ."""
        w, kappa, modes = sqrt(9.81 / 0.9), 1.25, []
        for t in (0.3, 0.4, 0.5):
            c, s = cosh(w * t), sinh(w * t)
            foot = np.array([kappa, kappa / w])
            modes.append(np.array([[c, s / w], [w * s, c]]) + np.outer([1 - c, -w * s], foot))
        assert modes[2][1][0] == pytest.approx(-2.07129634852174687105415119675, rel=1e-14)
        for kind in ("ellipsoid", "polytope", "auto"):
            assert 0.576885560504 <= best(kind, modes).gain <= 0.57789
        assert exp(0.3 * w) * (1 - kappa) + kappa == pytest.approx(0.576885560504777590710570155566)

    @pytest.mark.parametrize("states", [3, 6])
    def test_steps_that_forget_everything(self, states: int) -> None:
        """Nilpotent: any gain above 0 is possible, at the price of a long ball."""
        chain = np.diag(np.ones(states - 1), 1)[None]
        assert best("auto", chain, np.zeros((0, states)), np.ones(states)).gain < 0.2
        assert best("auto", 0 * chain, np.zeros((0, states)), np.ones(states)).gain == 0

    def test_one_box_by_hand(self) -> None:
        """Positive matrix: the least gain of a box is its Perron root (Berman & Plemmons, from memory), here 0.7; row
        B03 of the check values."""
        a = [[[0.5, 0.2], [0.1, 0.6]]]
        assert best("box", a).gain == pytest.approx(0.7, abs=1e-4)


class TestBounds:
    def test_least_box_bound_by_hand(self) -> None:
        """Row B02 of the check values (system: Raković et al., IEEE Trans. Automatic Control 50 (2005) 406-410, looked
        up): the exact supports are 100/77 and 200/77. In a box the second is 1.17/((1−k)(k−0.03)), least at k = 0.515."""
        closed = [[[-0.17, -0.03], [-1.17, -0.03]]]
        room = np.array([10.0, 10.0])
        for kind in KINDS:
            first, second = bounds(best(kind, closed, CORNERS, room))
            print(kind, first, second)
            assert first >= 100 / 77
            assert second >= 200 / 77
        assert second <= 5.45
        assert bounds(best("box", closed, CORNERS, room))[1] <= 1.17 / 0.485**2 * 1.01
        assert bounds(best("auto", closed, CORNERS, room))[1] <= 4.85

    def test_comparison_vector(self) -> None:
        """Row B03 of the check values: (I − K)⁻¹ε = (2/45, 11/180)."""
        k, residual = np.array([[[0.5, 0.2], [0.1, 0.6]]]), np.array([0.01, 0.02])
        assert comparison_vector(k, residual, np.zeros(2)) == pytest.approx([2 / 45, 11 / 180])
        assert comparison_vector(2 * k, residual, np.zeros(2)) is None

    def test_least_vector_above(self) -> None:
        """Nothing below it satisfies the inequalities: each entry is held by one of them."""
        rng = np.random.default_rng(0)
        for _ in range(50):
            table, q = rng.random((6, 4, 4)) * 0.2, 0.1 + rng.random(4)
            p = least_above(table, q, 0.9)
            assert p is not None
            limits = np.maximum(q, (table @ p).max(axis=0) / 0.9)
            assert p == pytest.approx(limits)
        assert least_above(table, q, 0.1) is None

    @pytest.mark.parametrize("kind", KINDS)
    def test_no_metric_tried_at_random_is_much_better(self, kind: str) -> None:
        rng = np.random.default_rng(4)
        jacobians = np.array([[[0.5, 0.2], [-0.4, 0.3]]]) + 0.05 * rng.uniform(-1, 1, (5, 2, 2))
        misses, room = 0.05 * rng.standard_normal((4, 2)), np.array([1.0, 0.5])
        found = best(kind, jacobians, misses, room)

        def size(shares: Any) -> float:
            return float(max(shares) + np.mean(shares) / 4)

        ours = size(bounds(found) / room)
        for _ in range(3000):
            shape = np.diag(np.exp(rng.normal(size=2)))
            v = shape if kind == "box" else shape @ rng.standard_normal((2, 2))
            order = 2 if kind == "ellipsoid" else np.inf
            w = np.linalg.inv(v)
            gain = max(np.linalg.norm(v @ j @ w, order) for j in jacobians)
            if gain < 1:
                reach = [np.linalg.norm(row, 2 if kind == "ellipsoid" else 1) for row in w]
                length = max(np.linalg.norm(v @ m, order) for m in misses)
                assert ours <= size(length / (1 - gain) * np.array(reach) / room) * (
                    1.03 if kind == "polytope" else 1.002
                )

    def test_one_state_is_its_own_metric(self) -> None:
        p = best("auto", [[[0.5]], [[-0.3]]], np.array([[0.1]]), np.array([2.0]))
        assert bounds(p) == pytest.approx([0.2])
        assert p.gain == pytest.approx(0.5)

    def test_ball_of_a_turn(self) -> None:
        """A scaled rotation keeps circles: gain its modulus, bound that of the farthest miss."""
        p = best("ellipsoid", [[[0.6, 0.5], [-0.5, 0.6]]], 0.1 * CORNERS)
        assert p.gain == pytest.approx(hypot(0.6, 0.5), abs=1e-3)
        assert max(bounds(p)) <= 0.1 * sqrt(2) / (1 - hypot(0.6, 0.5)) * 1.001


class TestSolversThatFail:
    """Whatever the solver does, ellipsoids are proposed, and only what samples confirm."""

    CASE = family(3, 12, 6)

    def judged(self) -> list[Proposal]:
        found = proposals(*self.CASE, np.ones(3), "ellipsoid")
        assert found
        assert found[0].gain < 1
        for p in found:
            v, w = floats(p.rows), floats(p.inverse)
            assert p.gain == pytest.approx(max(np.linalg.norm(v @ j @ w, 2) for j in self.CASE[0]), rel=1e-9)
        return found

    ANSWERS = {
        "infeasible": ("infeasible", None),
        "unbounded": ("unbounded", None),
        "solver error": ("solver_error", None),
        "no value": ("optimal", None),
        "not a number": ("optimal", np.full((3, 3), np.nan)),
        "infinite": ("optimal_inaccurate", np.full((3, 3), np.inf)),
        "indefinite": ("optimal", np.diag([1.0, 1.0, -1e-9])),
        "semidefinite": ("optimal", np.diag([1.0, 1.0, 0.0])),
        "zero": ("optimal", np.zeros((3, 3))),
        "wrong": ("optimal", np.diag([1.0, 1e3, 1e6])),
        "wrong shape": ("optimal", np.eye(2)),
        "unknown": ("", np.eye(3)),
    }

    @pytest.mark.parametrize("answer", ANSWERS.values(), ids=ANSWERS)
    def test_answers(self, answer: Any, monkeypatch: pytest.MonkeyPatch) -> None:
        tried = set()

        def spoiled(problem: Any, variable: Any, solver: str) -> Any:
            tried.add(solver)
            return answer

        good = self.judged()
        monkeypatch.setattr(programmes, "call", spoiled)
        found = self.judged()
        assert tried == {"CLARABEL", "SCS"}
        assert good[0].gain < 1
        assert share(good[0]) <= share(found[0]) * 1.01  # the programmes gave something

    @pytest.mark.parametrize("error", [RuntimeError("stopped"), ValueError(), ZeroDivisionError(), MemoryError()])
    def test_exceptions(self, error: Exception, monkeypatch: pytest.MonkeyPatch) -> None:
        def spoiled(*_: Any) -> Any:
            raise error

        monkeypatch.setattr(programmes, "call", spoiled)
        self.judged()

    def test_no_such_library(self, monkeypatch: pytest.MonkeyPatch) -> None:
        monkeypatch.setitem(sys.modules, "cvxpy", None)
        self.judged()

    def test_the_next_solver_is_tried(self, monkeypatch: pytest.MonkeyPatch) -> None:
        good, real = self.judged()[0], programmes.call

        def spoiled(problem: Any, variable: Any, solver: str) -> Any:
            if solver == "CLARABEL":
                raise RuntimeError
            return real(problem, variable, solver)

        monkeypatch.setattr(programmes, "call", spoiled)
        assert share(self.judged()[0]) <= share(good) * 1.1

    def test_every_other_answer_missing(self, monkeypatch: pytest.MonkeyPatch) -> None:
        good, real, count = self.judged()[0], programmes.call, [0]

        def spoiled(problem: Any, variable: Any, solver: str) -> Any:
            count[0] += 1
            return ("infeasible", None) if count[0] % 2 else real(problem, variable, solver)

        monkeypatch.setattr(programmes, "call", spoiled)
        assert share(self.judged()[0]) <= share(good) * 1.2
