"""Statements about stances that hold for some signals, ranges or points only: none may count as proved."""

from __future__ import annotations

from fractions import Fraction

import pytest

from tests.conftest import proved
from tests.stances import stance
from ultibound.checker.calculus import Unprovable
from ultibound.checker.derive import Derivation, Domain
from ultibound.checker.statement import read_statement
from ultibound.claim import ClaimError

SWING = "v_cmd = { range = [0.4, 0.5], held = true }\ngust = { range = [-1, 1], within = true }\n"
STILL = "x = 0\nxd = 0"


def verdicts(text: str) -> list[str]:
    try:
        return [r["verdict"] for r in proved(text).entries["results"]["requirements"]]
    except ClaimError:
        return ["refused"]


def meaning(text: str) -> None:
    d = Derivation(read_statement(text, {}, {}))
    d.meaning("require[1]", Domain(False, Fraction(0), (Fraction(2, 5), Fraction(1, 2))))


def over(name: str, low: float, high: float) -> str:
    return f"over = {{ {name} = [{low}, {high}] }}\n"


def test_a_signal_that_is_answered_both_ways() -> None:
    """x'' = −w² x + u from rest, w T = 4.5: x reaches 0.53 with u = sign(sin(w(T − t))), constant signals 0.23."""
    text = stance(rates='x = "xd"\nxd = "-w2*x + gust"', start=STILL, step="0.3*v + 0.7*v_cmd", define="",
                  uncertain=SWING + "T = [1.95, 1.96]\nw2 = [5.2, 5.3]", requires=("value(x) <= 0.3",))  # fmt: skip
    assert "proved" not in verdicts(text)
    kept = text.replace("-w2*x", "w2*x").replace("[5.2, 5.3]", "[1, 2]")
    with pytest.raises(Unprovable, match="not shown to last"):
        meaning(kept + over("w2", -31, -30))


def test_sensitivities_by_what_a_signals_effect_follows() -> None:
    """y' = −2y + u: u = −1 until just before T, then 1, changes y(T) by 1.955 a second of T."""
    text = stance(rates='y = "-2*y + gust"', start="y = 0", define="", step="0.3*v_cmd + y",
                  uncertain=SWING + "T = [1.5, 1.6]", requires=("sensitivity(v, T) <= 0.2",))  # fmt: skip
    with pytest.raises(Unprovable, match="may take any course"):
        meaning(text)
    assert verdicts(text) == ["undecided"]


def test_a_gain_where_a_signals_effect_follows_the_state() -> None:
    """Signals of one time end at another instant of a longer stance: u = −0.4 until just before touchdown, then 0.4.

    The pair holds, so settling is proved; the slope over all courses of the signal is larger than its k.
    """
    text = stance(rates='y = "-2*y + gust"', start="y = 0", define="", step="v_cmd + 0.5*y", duration="0.5 + 0.2*v", state="[0, 1]",
                  uncertain=SWING.replace("[-1, 1]", "[-0.4, 0.4]"), requires=("gain <= 0.05", "settles"))  # fmt: skip
    results = proved(text).entries["results"]
    assert [r["verdict"] for r in results["requirements"]] == ["undecided", "proved"]
    assert results["gain"]["upper"] is None and results["requirements"][0]["value"]["upper"] is None
    assert "the duration follows the state" in results["requirements"][0]["limited_by"]


@pytest.mark.parametrize("rates, start, step, reason", [
    ('x = "xd"\nxd = "(9 + v)*x - xd/4 + gust"', 'x = 0\nxd = "v"', "0.3*v + 0.7*v_cmd + xd/9", "without damping"),
    ('y = "-(1 + v)*y + z + gust"\nz = "-z"\ny2 = "-y2"', 'y = 0\nz = 0\ny2 = 0', "v_cmd + 0.3*y", "without damping"),
    ('y = "-(1 + v)*y + gust"', "y = 0", "v_cmd + 0.1*y**2", "not linear in the continuous states"),
    ('y = "-(1 + v)*y + gust"', "y = 0", "v_cmd + 0.1*abs(y)", "not linear in the continuous states"),
])  # fmt: skip
def test_what_no_gain_is_known_of(rates: str, start: str, step: str, reason: str) -> None:
    text = stance(rates=rates, start=start, define="", step=step, state="[0, 1]",
                  uncertain=SWING.replace("[-1, 1]", "[-0.4, 0.4]") + "T = [0.3, 0.31]", requires=("gain <= 0.9", "settles"))  # fmt: skip
    asked = proved(text).entries["results"]["requirements"]
    assert [r["verdict"] for r in asked] == ["undecided", "proved"] and reason in asked[0]["limited_by"], asked


def test_a_gain_that_only_constant_signals_have() -> None:
    """y' = (1 + v(t − 1/2)) u over a second, |u| ≤ 1/10: constant signals add nothing to 3/10, sign(t − 1/2) a fortieth."""
    text = stance(rates='y = "gust*(1 + v*(t - 0.5))"', start='y = "0.3*v"', duration="1", define="", state="[-0.5, 0.5]", step="y", target="0",
                  uncertain="gust = { range = [-0.1, 0.1], within = true }", requires=("gain <= 0.32", "gain < 0.325", "gain <= 0.34"))  # fmt: skip
    results = proved(text).entries["results"]
    least, most = (float(Fraction(results["gain"][end])) for end in ("lower", "upper"))
    assert 0.2999 <= least <= 0.3001 and 0.3375 <= most <= 0.339  # an eighth of what signals add is lost to four parts
    assert [r["verdict"] for r in results["requirements"]] == ["undecided", "undecided", "proved"]


@pytest.mark.parametrize("rate", ["dt(dt(dt(x)))", "dt(gust*t)", "dt(gust)"])
def test_signals_have_no_rate(rate: str) -> None:
    text = stance(rates=f'x = "xd"\nxd = "x + gust"\ny = "{rate}"', start=STILL + "\ny = 0", define="", step="0.3*v + 0.7*v_cmd",
                  uncertain=SWING + "T = [0.5, 0.6]", requires=("value(y) <= 0.5",))  # fmt: skip
    with pytest.raises(Unprovable, match="no time rate"):
        meaning(text)
    assert verdicts(text) == ["refused"]


@pytest.mark.parametrize("expression", ["dt(sqrt(a))", "dt(1/a + t)", "dt(log(a)*2)", "dt(tan(2*a))"])
def test_what_is_not_defined_has_no_rate(expression: str) -> None:
    text = stance(rates='y = "-2*y"', start='y = "v"', define="", step="0.3*v + 0.7*v_cmd",
                  uncertain="v_cmd = { range = [0.4, 0.5], held = true }\nT = [0.5, 0.6]\na = [-1, 1]",
                  requires=(f"value({expression}) <= 9",))  # fmt: skip
    assert "proved" not in verdicts(text)


def test_a_name_set_free_has_no_rate() -> None:
    """∂v⁺/∂c = dt(h)/10 = 0.01; of an h between 0 and 1 nothing is known but that."""
    text = stance(define='foot = "0.16*v + 0.08*(v - v_cmd)"\nh = "0.1*t"', step="xd + c*dt(h)/10", requires=("sensitivity(v, c) <= 0.001",),
                  uncertain="v_cmd = { range = [0.4, 0.5], held = true }\nT = [0.38, 0.42]\nloss = [0, 0.02]\nc = [0.5, 1]")  # fmt: skip
    assert verdicts(text) == ["refuted"]
    with pytest.raises(Unprovable, match="no time rate"):
        meaning(text + over("h", 0, 1))
    assert verdicts(text + over("h", 0, 1)) == ["undecided"]


def test_a_stance_that_runs_backwards() -> None:
    text = stance(rates='y = "-2*y"', start='y = "v"', define="", step="0.3*v + 0.7*v_cmd", duration="T - 1",
                  uncertain="v_cmd = { range = [0.4, 0.5], held = true }\nT = [0.5, 0.6]", requires=("value(y) <= 10",))  # fmt: skip
    assert "proved" not in verdicts(text) and "proved" not in verdicts(text + over("v", 0, 1))
    forward = text.replace("T - 1", "T").replace("value(y) <= 10", "throughout(t/T <= 1)")
    assert verdicts(forward) == ["proved"]
    with pytest.raises(Unprovable, match="not shown to last"):
        meaning(forward + over("T", -1, 1))
    assert verdicts(forward + over("T", -1, 1)) == ["undecided"]


@pytest.mark.parametrize("share", [0, 3])
def test_points_of_a_stance_that_runs_backwards(share: int) -> None:
    """The region is mapped into itself, or is not: of a duration below 0 nothing is proved, and nothing refuted."""
    asked = ("throughout(t >= 0)", "value(y) <= 1", "gain <= 1", "residual <= 0.1", "bound(v) <= 0.001")
    text = stance(rates='y = "-2*y"', start='y = "v"', define="", step=f"0.3*v + 0.7*v_cmd + {share}*y", duration="T - 1",
                  uncertain="v_cmd = { range = [0.4, 0.5], held = true }\nT = [0.5, 0.6]", requires=asked)  # fmt: skip
    results = proved(text).entries["results"]
    assert {r["verdict"] for r in results["requirements"]} == {"undecided"} and results["gain"] is None


def test_a_correction_that_carries_a_signal() -> None:
    text = stance(rates='y = "-2*y + 0.1 + wind"', start='y = "v"', define='wind = "gust"', step="0.3*v + 0.7*v_cmd + 0.01*y",
                  duration="1", uncertain=SWING, top='correction = ["wind"]')  # fmt: skip
    results = proved(text).entries["results"]
    assert results["requirements"][0]["verdict"] == "proved" and set(results["routes"]) == {"slope", "curve"}


def test_a_duration_that_is_set_free() -> None:
    """The stance is shown to last 0.5 to 0.6 s; of −1 to 1 s nothing is known."""
    text = stance(rates='y = "-2*y"', start='y = "v"', define='long = "T + 0*v"', step="0.3*v + 0.7*v_cmd + 0*y", duration="long",
                  uncertain="v_cmd = { range = [0.4, 0.5], held = true }\nT = [0.5, 0.6]", requires=("sensitivity(v, long) <= 9",))  # fmt: skip
    with pytest.raises(Unprovable, match="set free"):
        meaning(text + over("long", -1, 1))
    assert verdicts(text + over("long", -1, 1)) == ["undecided"]


@pytest.mark.parametrize(
    "spelled",
    ["(9.81 + dt(dt(h)))/h*x", "x/h*(9.81 + dt(dt(h)))", "x*(9.81/h + dt(dt(h))/h)", "1/h*(9.81 + dt(dt(h)))*x"],
)
def test_a_pushing_leg_is_asked_for_however_it_is_spelled(spelled: str) -> None:
    for sign, kept in ((1, True), (-6, False)):
        text = stance(rates=f'x = "xd"\nxd = "{spelled}"', define=f'foot = "0.16*v + 0.08*(v - v_cmd)"\nh = "0.6 + {sign}*t**2"',
                      uncertain="T = [0.20, 0.21]\nloss = [0, 0.01]\nv_cmd = { range = [0.4, 0.5], held = true }")  # fmt: skip
        assert (proved(text).entries["results"]["set"] is not None) == kept


@pytest.mark.parametrize("asked", ["next(v) - v_cmd - 0.3*y <= 0.14", "0.3*y - next(v) <= -0.26"])
def test_a_signal_before_and_after_an_instant(asked: str) -> None:
    """y' = −2y + u: u = −1 until 0.3 of a second, then 1, lifts y by 0.546 from there to touchdown; constant signals by 0.432."""
    text = stance(rates='y = "-2*y + gust"', start="y = 0", define="", step="v_cmd + 0.3*y", duration="1", state="[0, 1]",
                  uncertain=SWING, requires=(f"throughout({asked})",))  # fmt: skip
    assert verdicts(text) == ["undecided"]


@pytest.mark.parametrize("asked", ["value(xd) <= 9", "always(xd <= 9)", "throughout(xd <= 9)", "throughout(loss <= 1)"])
def test_a_gain_set_free_that_a_duration_rests_on(asked: str) -> None:
    text = stance(duration="k*T", rest="[gains]\nk = 1\n", requires=(asked,))
    assert verdicts(text) == ["proved"] and verdicts(text + over("k", 0.9, 1.1)) == ["undecided"]


@pytest.mark.parametrize(
    "spelled",
    [
        "mass*(9.81 + dt(dt(h)))/(mass*h)*x", "force/(30*h)*x", "-(9.81 + dt(dt(h)))/(-h)*x", "(9.81 + dt(dt(h)))*h/h**2*x",
        "(9.81 + dt(dt(h)))*2*(1/(2*h))*x", "(9.81 + dt(dt(0.3 + b)) + dt(dt(b)))/(0.3 + b + b + 0.3)*x",
    ],
)  # fmt: skip
def test_a_leg_that_pulls_on_a_mass(spelled: str) -> None:
    """h'' = −1.5·81 cos 9t/10 is below −9.81 within the stance."""
    define = (
        'foot = "0.16*v + 0.08*(v - v_cmd)"\nb = "0.075*cos(9*t)"\nh = "0.6 + 2*b"\nforce = "30*(9.81 + dt(dt(h)))"'
    )
    text = stance(rates=f'x = "xd"\nxd = "{spelled}"', define=define, step="0.3*xd + 0.7*v_cmd",
                  uncertain="T = [0.20, 0.21]\nloss = [0, 0.01]\nmass = [29, 31]\nv_cmd = { range = [0.4, 0.5], held = true }")  # fmt: skip
    assert proved(text).entries["results"]["set"] is None


@pytest.mark.parametrize("height", ["0.6 + 0.1*t", "0.6 + 0*loss", "0.6"])
def test_a_leg_that_pulls_at_a_height_without_curvature(height: str) -> None:
    for lift, kept in ("[-15, -12]", False), ("[-2, -1]", True):
        text = stance(rates='x = "xd"\nxd = "(9.81 + lift + dt(dt(h)))/h*x"', define=f'foot = "0*v"\nh = "{height}"', step="0.2*xd + 0.8*v_cmd",
                      uncertain=f"T = [0.20, 0.21]\nloss = [0, 0.01]\nlift = {lift}\nv_cmd = {{ range = [0.4, 0.5], held = true }}")  # fmt: skip
        assert (proved(text).entries["results"]["set"] is not None) == kept
