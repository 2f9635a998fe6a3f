"""Claims of several states against values from outside the project, each with its source."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from tests.conftest import ends, proved
from ultibound.checker.matrices import Leaf, metric, norm_at_most, norm_over

NAMES = "xyzuvw"
Rows = list[list[str]]


def linear(rows: Rows, disturbances: list[str], *asked: str, more: str = "") -> str:
    """e⁺ = A e + d, |d_i| <= the i-th of `disturbances`, about 0."""
    names = NAMES[: len(rows)]
    state = "".join(f"{s} = [-10, 10]\n" for s in names)
    uncertain = "".join(f'd{s} = ["-({w})", "{w}"]\n' for s, w in zip(names, disturbances, strict=True) if w != "0")
    following = ""
    for s, row, w in zip(names, rows, disturbances, strict=True):
        terms = " + ".join(f"({a})*{x}" for a, x in zip(row, names, strict=True))
        following += f'{s} = "{terms}{f" + d{s}" if w != "0" else ""}"\n'
    return (
        f"format = 1\n[state]\n{state}[uncertain]\n{uncertain}[next]\n{following}[target]\n"
        + "".join(f"{s} = 0\n" for s in names)
        + more
        + "".join(f"[[require]]\nthat = '{a}'\n" for a in asked)
    )


def bounds(results: dict[str, Any]) -> list[Fraction]:
    return [Fraction(x["bound"]["upper"]) for x in results["states"].values()]


def verdicts(results: dict[str, Any]) -> list[str]:
    return [r["verdict"] for r in results["requirements"]]


def test_supports_of_the_minimal_invariant_set() -> None:
    """Raković, Kerrigan, Kouramas & Mayne, IEEE Trans. Automatic Control 50 (2005) 406-410, equation (15) (system and
    gain looked up; supports own computation, Σ|(A+BK)^k| summed here again)."""
    a = [["-17/100", "-3/100"], ["-117/100", "-3/100"]]
    exact = [Fraction(100, 77), Fraction(200, 77)]
    power, total = np.eye(2, dtype=object), np.zeros(2, dtype=object)
    for _ in range(40):
        total, power = total + abs(power).sum(axis=1), power @ np.array([[Fraction(x) for x in row] for row in a])
    assert all(0 <= e - t < Fraction(1, 10**15) for e, t in zip(exact, total, strict=True))
    r = proved(linear(a, ["1", "1"], "settles", "bound(x) <= 100/77*1.001", "bound(y) <= 200/77*1.001")).results
    assert verdicts(r) == ["proved"] * 3
    assert all(e <= b <= e * Fraction("1.001") for e, b in zip(exact, bounds(r), strict=True))


def test_componentwise_comparison_is_exact() -> None:
    """Berman & Plemmons, Nonnegative Matrices in the Mathematical Sciences (from memory): (I − K)⁻¹ε = (2/45, 11/180),
    less than 1/15, which the largest magnitude alone gives."""
    rows, exact = [["1/2", "1/5"], ["1/10", "3/5"]], [Fraction(2, 45), Fraction(11, 180)]
    for row, e, b in zip(rows, (Fraction(1, 100), Fraction(1, 50)), exact, strict=True):
        assert sum(Fraction(a) * x for a, x in zip(row, exact, strict=True)) + e == b
    r = proved(linear(rows, ["1/100", "2/100"], "settles", "bound(x) <= 1/15", "bound(y) <= 1/15")).results
    assert verdicts(r) == ["proved"] * 3
    assert all(e <= b <= e * (1 + Fraction(1, 10**15)) for e, b in zip(exact, bounds(r), strict=True))
    assert ends(r["gain"])[0] >= Fraction(7, 10) - Fraction(1, 10**9)  # its spectral radius: less is no gain


def test_bound_between_the_exact_one_and_that_of_eigenvectors() -> None:
    """Kofman, Haimovich & Seron, Int. J. Control 80(2), 2007 (method from memory, numbers own): exactly (4/25,
    101/2500), in the basis of eigenvectors (6/25, 9/100)."""
    rows = [["9/10", "2/5"], ["-1/10", "2/5"]]
    asked = ["settles", "bound(x) <= 6/25", "bound(y) <= 9/100"]
    r = proved(linear(rows, ["1/50", "1/100"], *asked)).results
    assert verdicts(r) == ["proved"] * 3
    for least, most, b in zip(("4/25", "101/2500"), ("6/25", "9/100"), bounds(r), strict=True):
        assert Fraction(least) <= b <= Fraction(most)
    tighter = linear(rows, ["1/50", "1/100"], "bound(x) < 4/25", "bound(y) < 101/2500")
    assert "proved" not in verdicts(proved(tighter).results)


@pytest.mark.parametrize("horizon", [4, 12])
def test_several_steps_together_reach_the_exact_supports(horizon: int) -> None:
    """As above, Raković et al. 2005 and Kofman et al. 2007: with N steps together both bounds come within 1 % of
    Σ|Aᵏ|w, and of twelve within a thousandth of it; never below."""
    share = Fraction(1, 1000) if horizon == 12 else Fraction(1, 100)
    for rows, w, exact in (
        ([["-17/100", "-3/100"], ["-117/100", "-3/100"]], ["1", "1"], ["100/77", "200/77"]),
        ([["9/10", "2/5"], ["-1/10", "2/5"]], ["1/50", "1/100"], ["4/25", "101/2500"]),
    ):
        found = proved(linear(rows, w, "settles").replace("format = 1\n", f"format = 1\nhorizon = {horizon}\n"))
        assert verdicts(found.results) == ["proved"]
        for e, b in zip(map(Fraction, exact), bounds(found.results), strict=True):
            assert e <= b <= e * (1 + share), (float(b / e), horizon)


class TestOneMatrixThatIsNotNormal:
    """Kalman & Bertram 1960 (from memory; solution own computation): AᵀPA − P = −I for a Jordan block of 1/2."""

    A: Rows = [["1/2", "1"], ["0", "1/2"]]

    def leaf(self) -> Leaf:
        a = tuple(tuple(Fraction(x) for x in row) for row in self.A)
        return Leaf(a, (), tuple((Fraction(0),) * 2 for _ in range(2)))

    def test_a_rate_near_the_spectral_radius_is_reached_and_never_passed(self) -> None:
        text = linear(
            self.A, ["0", "0"], "settles", "gain <= 0.5101", "gain <= 1/2", more='[metric]\nkind = "ellipsoid"\n'
        )
        r = proved(text).results
        assert r["metric"]["kind"] == "ellipsoid"
        assert Fraction(1, 2) < ends(r["gain"])[1] <= Fraction("0.5101")
        assert verdicts(r)[:2] == ["proved"] * 2 and verdicts(r)[2] != "proved"

    def test_the_identity_is_refused(self) -> None:
        one = ((Fraction(1), Fraction(0)), (Fraction(0), Fraction(1)))
        plain = metric("ellipsoid", one, one, 2)
        assert not norm_at_most(plain, self.leaf(), Fraction(1))
        found = norm_over(plain, self.leaf())
        assert 0 <= found - Fraction("1.20710678118654752440084436210") <= Fraction("1e-8")
        text = linear(self.A, ["0", "0"], "gain < 1", more='[metric]\nkind = "box"\nweights = { x = 1, y = 1 }\n')
        r = proved(text).results
        assert verdicts(r) == ["refuted"] and ends(r["gain"]) == (Fraction(3, 2),) * 2

    def test_the_solution_of_the_equation_gives_its_rate(self) -> None:
        p = ((Fraction(4, 3), Fraction(8, 9)), (Fraction(8, 9), Fraction(116, 27)))
        a = self.leaf().centre
        for i in range(2):
            for j in range(2):
                moved = sum(a[k][i] * p[k][m] * a[m][j] for k in range(2) for m in range(2))
                assert moved - p[i][j] == -(i == j)
        v = [[Fraction(float(x)) for x in row] for row in np.linalg.cholesky(np.array(p, float)).T]
        (q, s), (_, u) = v
        rows = ((q, s), (Fraction(0), u))
        inverse = ((1 / q, -s / (q * u)), (Fraction(0), 1 / u))
        rate = norm_over(metric("ellipsoid", rows, inverse, 2), self.leaf())
        assert abs(rate - Fraction("0.883095189484530047087415287755")) <= Fraction("1e-8")


PAIR = """
format = 1
[state]
x = [-1, 1]
y = [-1, 1]
[uncertain]
q = {{ values = [0, 1] }}
[next]
x = "(x + q*y)/{scale}"
y = "((1 - q)*x + y)/{scale}"
[target]
x = 0
y = 0
[metric]
kind = "{kind}"
[[require]]
that = "gain < 1"
[[require]]
that = "settles"
"""


class TestPairWithTheGoldenRatio:
    """Jungers, The Joint Spectral Radius, LNCIS 385, 2009 (from memory): {[[1,1],[0,1]], [[1,0],[1,1]]} has
    (1+√5)/2 = √ρ(A₁A₂), which the Euclidean norm attains: what no norm goes below."""

    def test_scaled_to_below_1_it_contracts(self) -> None:
        r = proved(PAIR.format(scale="1.62", kind="ellipsoid")).results
        assert verdicts(r) == ["proved"] * 2 and r["metric"]["kind"] == "ellipsoid"
        exact = Fraction("1.61803398874989484820458683437") / Fraction("1.62")
        assert exact - Fraction(1, 10**25) <= ends(r["gain"])[1] <= exact + Fraction(1, 10**5)

    @pytest.mark.parametrize("kind", ["auto", "box", "polytope", "ellipsoid"])
    def test_scaled_to_above_1_it_never_does(self, kind: str) -> None:
        """ρ(A₁A₂)^(1/2)/1.61 = 1.00499 whatever the norm, and what is shown is at most that."""
        found = proved(PAIR.format(scale="1.61", kind=kind))
        r, exact = found.results, Fraction("1.61803398874989484820458683437") / Fraction("1.61")
        assert verdicts(r) == ["refuted", "undecided"] and ends(r["gain"])[1] > 1 and r["set"] is None
        (line,) = [x for x in found.entries["proof"] if x["rule"] == "product"]
        assert exact * (1 - Fraction(1, 1000)) <= Fraction(line["concludes"]["lower"]) <= exact

    def test_between_the_two_the_constant_decides(self) -> None:
        text = PAIR.format(scale="1.61", kind="auto")
        for asked, verdict in (
            ("gain < 1.0048", "refuted"),
            ("gain <= 1.0048", "refuted"),
            ("gain < 1.00499", "undecided"),
        ):
            assert verdicts(proved(text.replace("gain < 1", asked)).results)[0] == verdict, asked


SWITCHED = """
format = 1
[constants]
g = 9.81
z = 0.9
[gains]
kappa = 1.25
[state]
x = [-0.3, 0.3]
v = [-1, 1]
[uncertain]
T = {times}
[define]
w = "sqrt(g/z)"
p = "kappa*(x + v/w)"
[next]
x = "p + (x - p)*cosh(w*T) + v*sinh(w*T)/w"
v = "w*(x - p)*sinh(w*T) + v*cosh(w*T)"
[target]
x = 0
v = 0
[metric]
kind = "{kind}"
[[require]]
that = "settles"
[[require]]
that = "gain < 1"
"""


@pytest.mark.parametrize("times", ["{ values = [0.3, 0.4, 0.5] }", "[0.3, 0.5]"])
@pytest.mark.parametrize("kind", ["auto", "ellipsoid"])
def test_pendulum_under_switching_step_times(times: str, kind: str) -> None:
    """Triangular families: Jungers 2009 (from memory); model own computation. The joint spectral radius is the largest
    magnitude of κ + (1 − κ)e^{wT} and e^{−wT} over the step times, taken at 0.3 s."""
    w = float(np.sqrt(9.81 / 0.9))
    exact = Fraction("0.576885560504777590710570155566")
    modes = [abs(1.25 - 0.25 * np.exp(w * t)) for t in (0.3, 0.4, 0.5)] + [np.exp(-w * 0.3)]
    assert max(modes) == pytest.approx(float(exact), abs=1e-14)
    r = proved(SWITCHED.format(times=times, kind=kind)).results
    assert verdicts(r) == ["proved"] * 2
    assert exact - Fraction(1, 10**25) <= ends(r["gain"])[1] <= exact + Fraction(1, 1000)
