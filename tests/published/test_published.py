"""The main job against values from outside the project, each with its source."""

from __future__ import annotations

from fractions import Fraction

import pytest

from tests.conftest import assert_encloses, ends, proved

PENDULUM = """
format = 1
[constants]
g = 9.81
z = 0.9
[gains]
kappa = 0.33
[state]
v = [-1, 1]
[uncertain]
T = {{ range = [0.4, 0.4] }}
[define]
w = "sqrt(g/z)"
foot = "kappa*v"
[next]
v = "cosh(w*T)*v - w*sinh(w*T)*foot"
[target]
v = 0
[effort]
gap = 1e-9
{requirements}
"""


def require(*texts: str) -> str:
    return "".join(f"[[require]]\nthat = '{t}'\n" for t in texts)


class TestConstantHeightPendulum:
    """Kajita & Tani, "Study of dynamic biped locomotion on rugged terrain", ICRA 1991, pp. 1405-1411 (bibliographic
    data looked up; equations are the elementary solution of x'' = w²x); digits own computation at 30 digits."""

    VALUES = {
        "w": "3.30151480384383556075909885090",
        "cosh(w*T)": "2.00633188608949450815260831150",
        "sinh(w*T)": "1.73935839812829499750070476259",
        "1/(tanh(w*T)*w)": "0.349381936733521295230818892810",
        "tanh(w*T/2)/w": "0.175242284587287722032189373125",
        "1/(tanh(w*T/2)*w)": "0.523521588879754868429448412495",
    }

    def test_gain_sensitivity_and_gains_that_contract(self) -> None:
        texts = [f"value({e})" for e in self.VALUES]
        c = proved(PENDULUM.format(requirements=require("gain < 1", "sensitivity(v, foot) < 0", *texts)))
        assert c.proved
        assert_encloses(c.results["gain"], "0.111301110887974762259737686824", "1e-9")
        (band,) = c.results["sensitivities"]
        assert_encloses(band, "-5.74251750061066589664506249901", "1e-9")
        for entry, exact in zip(c.results["requirements"][2:], self.VALUES.values(), strict=True):
            assert_encloses(entry["value"], exact, "1e-15")

    def test_a_gain_that_oversteps_is_refuted_with_a_point(self) -> None:
        text = PENDULUM.format(requirements=require("gain < 1", "settles")).replace("kappa = 0.33", "kappa = 0.7")
        c = proved(text)
        assert [r["verdict"] for r in c.results["requirements"]] == ["refuted", "undecided"]
        assert c.results["set"] is None and c.results["bound"] is None
        assert_encloses(c.results["gain"], "2.01343036433797161949893543781", "1e-9")
        points = [line for line in c.entries["proof"] if line["rule"] == "point" and line["proves"] == "slope[v,v]"]
        assert len(points) == 1 and set(points[0]["witness"]["at"]) == {"T", "v"}


BOX = """
format = 1
[constants]
g = 9.81
[state]
v = [-1, 1]
[uncertain]
z = [0.85, 0.95]
T = [0.35, 0.45]
placed = [-0.01, 0.01]
[define]
w = "sqrt(g/z)"
foot = "0.31*v + placed"
[next]
v = "cosh(w*T)*v - w*sinh(w*T)*foot"
[target]
v = 0
[effort]
gap = GAP
[[require]]
that = "sensitivity(v, foot) < 0"
[[require]]
that = "settles"
[[require]]
that = "value(cosh(w*T) - 0.31*w*sinh(w*T))"
"""


@pytest.mark.parametrize("gap", ["1e-3", "1e-6"])
def test_box_of_height_and_step_time(gap: str) -> None:
    """As above (box and bound own computation): gain, residual, bound and sensitivity over a box."""
    c = proved(BOX.replace("GAP", gap))
    assert c.proved
    for name, exact in {
        "gain": "0.330018532042241838303404895697",
        "residual": "0.0746646700392375430336492994008",
        "bound": "0.111442888512768677820011064524",
    }.items():
        assert_encloses(c.results[name], exact, gap if name != "bound" else Fraction(gap) * 2)
        assert ends(c.results[name])[1] <= Fraction(exact) * (1 + Fraction(gap))
    low, high = ends(c.results["sensitivities"][0])
    assert 0 <= Fraction("-7.46646700392375430336492994008") - low + Fraction("1e-29") <= Fraction(gap) * 8
    assert 0 <= high - Fraction("-4.42586230459617148050168054678") + Fraction("1e-29") <= Fraction(gap) * 8
    low, high = ends(c.results["requirements"][2]["value"])
    assert 0 <= Fraction("0.100010726390314861206934182459") - low + Fraction("1e-29") <= Fraction(gap)
    assert 0 <= high - Fraction("0.330018532042241838303404895697") + Fraction("1e-29") <= Fraction(gap)


def test_capturability_recursion_as_a_map() -> None:
    """Koolen et al., "Capturability-based analysis and control of legged locomotion, Part 1", Int. J. Robotics
    Research 31(9), 2012 (existence looked up; recursion from memory, re-derived): d⁺ = (d + l') exp(-Δt')."""
    chain = "\n".join(f'd{n} = "(d{n - 1} + l)*q"' for n in range(1, 6)).replace("(d0 + l)", "(0 + l)")
    text = f"""
format = 1
[constants]
l = 0.7
[state]
d = [0, 1]
[define]
q = "exp(-0.9)"
{chain}
[next]
d = "(d + l)*q"
[target]
d = "l*exp(-0.9)/(1 - exp(-0.9))"
{require(*(f"value(d{n})" for n in range(1, 6)), "settles", "value(target(d))", "value(next(d) - d)")}
"""
    c = proved(text)
    exact = ["0.284598761818419378318417967752", "0.400307983573529955126181272054",
             "0.447351842491354790714767462654", "0.466478448204459583275861606359",
             "0.474254745781229197823161800359"]  # fmt: skip
    values = [r["value"] for r in c.results["requirements"]]
    for value, number in zip(values[:5], exact, strict=True):
        assert_encloses(value, number, "1e-15")
    assert [r["verdict"] for r in c.results["requirements"]] == ["proved"] * 8
    assert_encloses(values[6], "0.479582425283505510140903291634", "1e-15")
    assert ends(values[4])[1] < ends(values[6])[0]  # d_5 below the limit, strictly
    assert_encloses(c.results["gain"], "0.406569659740599111883", "1e-15")  # exp(-0.9)
    assert ends(c.results["bound"])[1] < Fraction("1e-15")


RIMLESS = """
format = 1
[constants]
a = 0.3
gl = 9.81
[state]
w = [0.9, 1.6]
[uncertain]
slope = [0.07, 0.09]
[define]
c2 = "cos(2*a)**2"
K = "2*gl*(c2*(1 - cos(a + slope)) - (1 - cos(a - slope)))"
[next]
w = "sqrt(c2*w**2 + K)"
[target]
w = "sqrt(2*gl*(cos(2*a)**2*(1 - cos(a + 0.08)) - (1 - cos(a - 0.08)))/(1 - cos(2*a)**2))"
[effort]
gap = GAP
[[require]]
that = "settles"
[[require]]
that = "value(next(w))"
[[require]]
that = "value(target(w))"
[[require]]
that = "sensitivity(w, w)"
"""


@pytest.mark.parametrize("gap", ["1e-3", "1e-6"])
def test_rimless_wheel_on_an_uncertain_slope(gap: str) -> None:
    """McGeer 1990 (from memory), Coleman, Chatterjee & Ruina 1997, Bhounsule 2014 (existence looked up); equations
    re-derived, numbers own computation."""
    c = proved(RIMLESS.replace("GAP", gap))
    r = c.results
    assert c.proved and r["set"]["kind"] == "region"
    for name, exact in {
        "gain": "0.746501020670325521391743486133",
        "residual": "0.0383651688256476445442392523856",
        "bound": "0.151342498210826661180808852689",
    }.items():
        assert_encloses(r["routes"]["slope"][name], exact, Fraction(gap) * (1 if name != "bound" else 5))
    assert ends(r["gain"])[1] <= Fraction("0.746501020670325521391743486133") * (1 + Fraction(gap))
    assert ends(r["routes"]["slope"]["residual"])[1] <= Fraction("0.0383651688256476445442392523856") * (
        1 + Fraction(gap)
    )
    image, target, slopes = (e["value"] for e in r["requirements"][1:])
    assert 0 <= Fraction("0.969286482895415759591768297052") - ends(image)[0] <= Fraction(gap)
    assert 0 <= ends(image)[1] - Fraction("1.52195748327223008863253498351") <= 2 * Fraction(gap)
    assert_encloses(target, "1.22762787140635009494365481250", "1e-15")
    assert 0 <= Fraction("0.578181523814286567486592507491") - ends(slopes)[0] <= Fraction(gap)


def test_scalar_ultimate_bound_is_exact() -> None:
    """Khalil, Nonlinear Systems (from memory): ε/(1−k) for k = 7/10, ε = 12/1000 is 1/25."""
    text = """
format = 1
[state]
e = [-0.5, 0.5]
[uncertain]
d = ["-12/1000", "12/1000"]
[next]
e = "7/10*e + d"
[target]
e = 0
""" + require(
        "bound <= 0.04", "bound(e) <= 1/25", "bound < 0.04", "gain <= 0.7", "residual <= 0.012", "radius(e) >= 0.5"
    )
    c = proved(text)
    assert ends(c.results["bound"]) == (Fraction(1, 25), Fraction(1, 25))
    assert [r["verdict"] for r in c.results["requirements"]] == ["proved"] * 2 + ["refuted"] + [
        "proved"
    ] * 3  # an orbit stands at the bound


def csv(axes: str, column: str, rows: list[tuple[str, ...]]) -> str:
    return f"{axes},{column}\n" + "".join(",".join(r) + "\n" for r in rows)


def residual(expression: str, at: str, states: str, gap: str) -> str:
    return f"""
format = 1
[state]
s = [-1, 1]
[uncertain]
{states}
[[library]]
file = "table.csv"
at = {{ {at} }}
[next]
s = "s/2"
[target]
s = 0
[effort]
gap = {gap}
[[require]]
that = "value({expression})"
"""


@pytest.mark.parametrize("gap", ["1e-3", "1e-6"])
def test_interpolation_error_of_quadratics_is_sharp(gap: str) -> None:
    """de Boor, A Practical Guide to Splines (from memory): h²/8 sup|f''|, attained at midpoints; 1/400 and 13/400."""
    table = csv("x_node", "y", [(f"{k}e-1", f"{k * k}e-2") for k in range(1, 6)])
    c = proved(residual("y - x**2", 'x_node = "x"', "x = [0.1, 0.5]", gap), data={"table.csv": table})
    low, high = ends(c.results["requirements"][0]["value"])
    assert Fraction(1, 400) <= high <= Fraction(1, 400) * (1 + Fraction(gap))
    assert -Fraction("1e-9") <= low <= 0
    rows = [
        (x, y, str(Fraction(x) ** 2 + Fraction(y) ** 2 + Fraction(x) * Fraction(y)))
        for x in ("0", "0.2")
        for y in ("0", "0.3")
    ]
    rows = [(x, y, f"{float(Fraction(z)):.2f}") for x, y, z in rows]
    text = residual("g - (x**2 + y**2 + x*y)", 'a = "x", b = "y"', "x = [0, 0.2]\ny = [0, 0.3]", gap)
    c = proved(text, data={"table.csv": csv("a,b", "g", rows)})
    low, high = ends(c.results["requirements"][0]["value"])
    assert Fraction(13, 400) <= high <= Fraction(13, 400) * (1 + Fraction(gap))


@pytest.mark.parametrize("gap", ["1e-3", "1e-6"])
def test_interpolation_error_of_cosh_and_sqrt(gap: str) -> None:
    """As above; closed forms own computation. Nodes of cosh are given to 30 digits."""
    cosh = ["1", "1.03141309942571962497", "1.12762596520638078523", "1.29468328467684468785", "1.54308063481524377848"]
    table = csv("x_node", "y", [(f"{k * 25}e-2" if k else "0", v) for k, v in enumerate(cosh)])
    c = proved(residual("y - cosh(x)", 'x_node = "x"', "x = [0, 1]", gap), data={"table.csv": table})
    high = ends(c.results["requirements"][0]["value"])[1]
    sup = Fraction("0.0110156709695659460486485351898")
    assert sup - Fraction("1e-19") <= high <= sup * (1 + Fraction(gap))
    table = csv("x_node", "y", [("1", "1"), ("2", "1.41421356237309504880168872421")])
    c = proved(residual("sqrt(x) - y", 'x_node = "x"', "x = [1, 2]", gap), data={"table.csv": table})
    high = ends(c.results["requirements"][0]["value"])[1]
    sup = Fraction("0.0177669529663688110021109052621")
    assert sup - Fraction("1e-28") <= high <= min(sup * (1 + Fraction(gap)), Fraction(1, 32))


CONSTANTS = {
    "pi": "3.14159265358979323846264338328",
    "exp(1)": "2.71828182845904523536028747135",
    "sqrt(2)": "1.41421356237309504880168872421",
    "sqrt(3)": "1.73205080756887729352744634151",
    "log(2)": "0.693147180559945309417232121458",
    "sinh(1)": "1.17520119364380145688238185060",
    "cosh(1)": "1.54308063481524377847790562076",
    "tanh(1/2)": "0.462117157260009758502318483644",
    "exp(-1)": "0.367879441171442321595523770161",
    "sinh(2)": "3.62686040784701876766821398280",
    "cosh(2)": "3.76219569108363145956221347777",
}


def test_elementary_constants() -> None:
    """Abramowitz & Stegun, tables 1.1, 4.4, 4.15 (table numbers from memory); digits by mpmath at 60 digits."""
    text = 'format = 1\n[state]\nx = [-1, 1]\n[next]\nx = "x/2"\n[target]\nx = 0\n'
    c = proved(text + require(*(f"value({e})" for e in CONSTANTS)))
    for entry, exact in zip(c.results["requirements"], CONSTANTS.values(), strict=True):
        assert entry["verdict"] == "proved"
        assert_encloses(entry["value"], exact, "1e-15")


def test_minima_of_polynomials() -> None:
    """D01 to D04: Motzkin 1967; Dixon & Szegö, Towards Global Optimisation 2, 1978; Parrilo, PhD thesis, Caltech 2000 (all
    from memory; the minimum on the unit circle recomputed below); Lukács' certificate, Szegö, Orthogonal Polynomials (from memory)."""
    motzkin, camel = "x**4*y**2 + x**2*y**4 + 1 - 3*x**2*y**2", "4*x**2 - 21*x**4/10 + x**6/3 + x*y - 4*y**2 + 4*y**4"
    quartic = "2*x**4 + 2*x**3*y - x**2*y**2 + 5*y**4"
    asked = (
        (f"always({motzkin} >= -1e-6)", ""),
        (f"value({camel})", "over = { x = [-3, 3] }"),
        (f"always({camel} >= -1.031629)", "over = { x = [-3, 3] }"),
        (f"always({quartic} >= 0.578179*(x**2 + y**2)**2 - 1e-6)", ""),
        ("value(2 + 3*u - 4*u**3)", ""),
        ("always(2 + 3*u - 4*u**3 >= 1 - 1e-6)", ""),
    )
    requirements = "".join(f'[[require]]\nthat = "{that}"\n{over}\n' for that, over in asked)
    c = proved(
        "format = 1\n[state]\nv = [-1, 1]\n[uncertain]\nx = [-2, 2]\ny = [-2, 2]\nu = [0, 1]\n"
        f'[next]\nv = "v/2"\n[target]\nv = 0\n[effort]\ngap = 1e-6\n{requirements}'
    )
    assert c.proved
    low, _ = ends(c.results["requirements"][1]["value"])
    assert 0 <= Fraction("-1.03162845348987735041") + Fraction("1e-20") - low <= Fraction("1e-6") * 2
    assert_encloses(c.results["requirements"][4]["value"], "2", 1 + Fraction("1e-5"))  # the range is [1, 3]
