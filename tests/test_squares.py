"""Requirements proved by weighted sums of squares, beside subdivision and where it alone does not decide."""

from __future__ import annotations

import json
import os
from fractions import Fraction
from typing import Any

import pytest

from tests.conftest import ends, proved
from tests.polynomials import always, claim
from tests.published.test_published import BOX
from tests.squares import accepted, changes
from tests.stances import stance
from ultibound.checker import check
from ultibound.checker.document import canonical, digest

LONG = bool(os.environ.get("ULTIBOUND_LONG"))
SEEDS = range(40) if LONG else (0, 2, 6)


def lines(certificate: Any, rule: str, proves: str) -> list[dict[str, Any]]:
    return [x for x in certificate.entries["proof"] if (x["rule"], x["proves"]) == (rule, proves)]


def band(line: dict[str, Any]) -> tuple[Fraction, Fraction]:
    return ends(line["concludes"])


def test_two_arguments_for_a_sensitivity_agree() -> None:
    """The constant-height pendulum over a box (tests/published: own computation at 30 digits)."""
    text = BOX.replace("GAP", "1e-3")
    certificate = proved(text)
    ranges, squares = (lines(certificate, rule, "require[1]") for rule in ("range", "squares"))
    assert certificate.proved and len(ranges) == len(squares) == 1
    exact = Fraction("-7.46646700392375430336492994008"), Fraction("-4.42586230459617148050168054678")
    for line in (*ranges, *squares):
        low, high = band(line)
        assert low <= exact[0] and exact[1] <= high
        assert exact[0] - low <= Fraction(1, 1000) * abs(exact[0]) and high - exact[1] <= Fraction(1, 1000) * abs(
            exact[1]
        )
    assert not set(squares[0]["uses"]) & {
        n for n, x in enumerate(certificate.entries["proof"], 1) if x["rule"] == "range" and "require" in x["proves"]
    }
    both = certificate.results["sensitivities"][0]
    assert Fraction(both["upper"]) <= min(band(x)[1] for x in (*ranges, *squares)) + Fraction(1, 10**15)
    assert Fraction(both["lower"]) >= max(band(x)[0] for x in (*ranges, *squares)) - Fraction(1, 10**15)


@pytest.mark.parametrize("seed", SEEDS)
def test_positive_polynomials(seed: int) -> None:
    """Subdivision may look at one box alone here: it is squares that prove the inequality."""
    certificate = proved(always(seed))
    (line,) = lines(certificate, "squares", "require[1]")
    assert certificate.proved and line["witness"]["bits"] == 0 and set(line["concludes"]) == {"lower"}
    assert 0 <= Fraction(line["concludes"]["lower"]) <= Fraction(21, 1000)  # the margin, as samples found it
    assert accepted(certificate, line, line["witness"])
    assert not any(accepted(certificate, line, x) for x in changes(line["witness"], 10**9 if LONG else 40))
    without = json.loads(json.dumps(certificate.entries))
    without["proof"].remove(line)
    verdict = check(canonical({**without, "digest": digest(without)}))
    assert verdict.status == "invalid" and "undecided was derived" in verdict.reason


@pytest.mark.parametrize(
    ("that", "verdict"),
    [
        ("always(p >= 0)", "proved"), ("always(p > -0.001)", "proved"), ("always(p >= 0.03)", "refuted"), ("always(-p <= 0)", "proved"),
        ("always(-p < -0.03)", "refuted"),
    ],
)  # fmt: skip
def test_an_inequality_on_either_side(that: str, verdict: str) -> None:
    """p is (x1 − x2²)² + (x2 − 1/2)²/4 + 1/50."""
    text = claim("x1**2 - 2*x1*x2**2 + x2**4 + x2**2/4 - x2/4 + 33/400", {"x1": "[-1, 1]", "x2": "[-1, 1]"}, that)
    certificate = proved(text)
    (entry,) = certificate.results["requirements"]
    assert entry["verdict"] == verdict
    assert ("sums of squares" in (entry["limited_by"] or "")) is False
    if verdict == "proved":
        assert lines(certificate, "squares", "require[1]")


def test_what_kept_squares_from_being_found_is_said() -> None:
    text = claim("x1*atan(x1) - x1*x2 + x2**2 + 0.3", {"x1": "[-1, 1]", "x2": "[-1, 1]"}, "always(p >= 0)")
    (entry,) = proved(text).results["requirements"]
    assert entry["verdict"] == "undecided" and "squares of require[1]: no sums of squares" in entry["limited_by"]


def test_corners_and_cells_are_divided_until_one_branch_is_left() -> None:
    text = claim("max(x1, x1**2) + x1**2*x2**2 - x1 + 0.02", {"x1": "[-1, 1]", "x2": "[-1, 1]"}, "always(p >= 0)")
    certificate = proved(text)
    found = lines(certificate, "squares", "require[1]")
    assert certificate.proved == bool(found)  # a corner that meets the box's own bisection is proved branch by branch


def test_at_every_instant_of_a_stance() -> None:
    text = stance(
        rates='y = "v - y"', start='y = "0"', duration="1", define="", state="[-0.5, 0.5]", step="0.5*y", target="0",
        uncertain="w = [0.1, 0.2]", requires=("throughout(y*y - y*w + 0.02 >= 0)",), rest="[effort]\ncells = 1\n",
    )  # fmt: skip
    certificate = proved(text)
    (line,) = lines(certificate, "squares", "require[1]")
    assert certificate.proved and line["witness"]["bits"] and Fraction(line["concludes"]["lower"]) >= 0
