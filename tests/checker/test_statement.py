"""The checker's reader of claims: what it understands, with values, and what it refuses, with place and speed."""

from __future__ import annotations

import random
import sys
import time
from fractions import Fraction as Q

import pytest

from ultibound.checker.grammar import Node, Refused, constant, parse
from ultibound.checker.model import Statement
from ultibound.checker.numerals import decimal_down, decimal_up, read_number, spelled, text_of
from ultibound.checker.statement import read_statement

CLAIM = """format = 1
title = "Tray carrier, forward walking"
notes = '''carries
seedlings'''
route = "slope"
correction = ["shift"]
shrink = true
horizon = 2
[constants]
half = "z/2"
g = 9.81
z = 0.62
root = "sqrt(2)"
[gains]
slack = "kappa/6"
kappa = 0.18
[state]
v = { range = [-0.2, 1.0], unit = "m/s" }
[uncertain]
T = { range = ["0.38 - slack", "0.38 + slack"], unit = "s" }
period = { values = [0.3, "2/5", 5e-1] }
rise = { range = [-0.02, 0.02], held = true }
v_cmd = { range = [0.1, 0.6], held = true, change = 0.02 }
[define]
foot = "v*(cosh(w*T) - 1)/(w*sinh(w*T)) + shift"
shift = "kappa*(v - target(v))"
w = "sqrt(g/z)"
[next]
v = "cosh(w*T)*v - w*sinh(w*T)*foot"
[target]
v = "v_cmd"
[metric]
kind = "box"
weights = { v = "1/2" }
[effort]
gap = "1/500"
cells = 1000
seconds = 0.5
[[require]]
that = "gain <= 0.8"
[[require]]
that = "steps(v, 0.3, kappa/2) <= 9"
[[require]]
that = "sensitivity(v, foot) < 0"
over = { foot = [-0.4, 0.4], g = [9.8, "9.83"] }
[[require]]
that = "value(next(v) - v) > -1"
[[require]]
that = "always(foot <= half)"
"""
LIBRARY = """format = 1
state = { v = [0, 1] }
uncertain = { T = [0.3, 0.5] }
next = { v = "v/2 + reach" }
target = { v = 0.5 }
[[library]]
file = "data/gaits.csv"
at = { period = "T", speed = "half" }
[[library]]
file = "lift.csv"
at = { pace = "v" }
[define]
half = "v/2"
"""
GAITS = "speed,reach,period\n1,0.21,0.5\n0,0,0.3\n1,13e-2,0.3\n0,-0.1,0.5\n"
FILES = {"data/gaits.csv": GAITS, "lift.csv": "pace,lift\r\n1,2\r\n-1,1"}
DYNAMICS = """format = 1
constants = { g = 9.81 }
state = { v = [0, 1] }
[uncertain]
gust = { range = [-0.4, 0.4], within = true }
[define]
height = "0.6 + t**2/100"
[dynamics]
until = "x - 0.1"
within = [0.25, "3/5"]
[dynamics.start]
x = "-0.1*v"
xd = "0.98*v"
[dynamics.rate]
x = "xd"
xd = "(g + dt(dt(height)))/height*x + gust"
[next]
v = "xd"
[target]
v = 0.5
[[require]]
that = "throughout(x < height)"
[[require]]
that = "push(v, during) >= 0.1"
"""
STANCES = """format = 1
state = { vx = [0, 1] }
define = { w = "side*3.9" }
next = { vx = "vx/2" }
target = { vx = 0.5 }
[stance.left]
then = "right"
mirror = ["vy"]
define = { side = 1 }
state = { vy = [-0.1, 0.6] }
next = { vy = "vy/2 + w/100" }
target = { vy = 0.12 }
[stance.right]
then = ["left", "right"]
define = { side = "-1" }
state = { vy = [-0.6, 0.1], vx = [0, 2] }
next = { vy = "vy/3" }
target = { vy = -0.12 }
[[require]]
that = "bound(vy) <= 0.2"
in = "left"
"""


def read(text: str, settings: dict[str, str] | None = None, files: dict[str, str] | None = None) -> Statement:
    return read_statement(text, settings or {}, files or {})


def swap(text: str, old: str, new: str) -> str:
    assert old in text, old
    return text.replace(old, new)


def lines(form: str, count: int) -> str:
    return "\n".join(form.replace("#", str(k)) for k in range(count))


def refusal(
    text: str, settings: dict[str, str] | None = None, files: dict[str, str] | None = None, within: float = 1
) -> str:
    start = time.process_time()
    with pytest.raises(Refused) as why:
        read(text, settings, files)
    assert time.process_time() - start < within
    assert len(str(why.value)) <= 403 and str(why.value).isprintable()
    return str(why.value)


def exact(text: str, **values: Q) -> Q:
    low, high = constant(parse(text, {}), {n: (q, q) for n, q in values.items()})
    assert low == high
    return low


# accepted: every section


def test_a_closed_form_claim() -> None:
    s = read(CLAIM)
    assert (s.title, s.notes) == ("Tray carrier, forward walking", "carries\nseedlings")
    assert (s.route, s.correction, s.shrink, s.horizon, s.metric) == ("slope", ("shift",), True, 2, "box")
    assert (s.gap, s.cells, s.seconds) == (Q(1, 500), 1000, Q(1, 2))
    assert constant(s.weights["v"], s.values) == (Q(1, 2), Q(1, 2))
    assert list(s.constants) == ["g", "z", "root", "half"] and list(s.gains) == ["kappa", "slack"]
    assert s.values["g"] == (Q("9.81"),) * 2 and s.values["half"] == (Q("0.31"),) * 2
    assert s.values["slack"] == (Q("0.03"),) * 2
    low, high = s.values["root"]
    assert low**2 < 2 < high**2 and high - low <= Q(2, 2**160)
    (stance,) = s.stances
    assert (stance.name, stance.then, stance.mirror, stance.dynamics) == ("", (), (), None)
    assert list(stance.define).index("shift") < list(stance.define).index("foot") > list(stance.define).index("w")
    assert set(stance.next) == set(stance.target) == set(stance.states) == {"v"} and stance.states["v"].unit == "m/s"


def test_quantities() -> None:
    s = read(CLAIM)
    t, period, rise, v_cmd = (s.uncertain[n] for n in ("T", "period", "rise", "v_cmd"))
    assert t.range is not None and period.values is not None and v_cmd.change is not None
    assert [constant(e, s.values)[0] for e in (t.range.lower, t.range.upper)] == [Q("0.35"), Q("0.41")]
    assert [constant(e, s.values)[0] for e in period.values] == [Q("0.3"), Q("0.4"), Q("0.5")] and period.range is None
    assert (t.unit, t.held, rise.held, rise.change, v_cmd.held, v_cmd.within) == ("s", False, True, None, True, False)
    assert constant(v_cmd.change, s.values)[0] == Q("0.02")


def test_requirements() -> None:
    gain, steps, sensitivity, value, always = read(CLAIM).requirements
    assert (gain.kind, gain.relation, gain.state, gain.stance) == ("gain", "<=", None, None)
    assert gain.constant is not None and gain.constant.nodes == (Node("number", (), Q("0.8")),)
    assert (steps.kind, steps.state) == ("steps", "v") and steps.start is not None and steps.end is not None
    assert constant(steps.end, read(CLAIM).values)[0] == Q("0.09")
    assert (sensitivity.state, sensitivity.by, set(sensitivity.over)) == ("v", "foot", {"foot", "g"})
    assert value.expression is not None and Node("next", (), None, "v") in value.expression.nodes
    assert always.left is not None and always.right is not None and always.relation == "<="
    assert [n.name for n in (*always.left.nodes, *always.right.nodes)] == ["foot", "half"]


def test_defaults() -> None:
    s = read('format = 1\nstate = { x = [0, 1] }\nnext = { x = "x/2" }\ntarget = { x = 0.5 }\n')
    assert (s.title, s.notes, s.route, s.correction, s.shrink, s.horizon) == ("", "", "best", (), False, 1)
    assert (s.metric, s.gap, s.cells, s.seconds) == ("auto", Q(1, 1000), 200_000, Q(600)) and not s.weights
    assert [r.kind for r in s.requirements] == ["settles"] and s.libraries == () and s.uncertain == {}


def test_a_library_is_put_in_order() -> None:
    gaits, lift = read(LIBRARY, files=FILES).libraries
    assert (gaits.file, gaits.axes) == ("data/gaits.csv", ("period", "speed"))
    assert gaits.grid == ((Q("0.3"), Q("0.5")), (Q(0), Q(1)))
    assert gaits.columns == {"reach": (Q(0), Q("0.13"), Q("-0.1"), Q("0.21"))}
    assert [e.nodes[0].name for e in gaits.at] == ["T", "half"]
    assert (lift.grid, lift.columns) == (((Q(-1), Q(1)),), {"lift": (Q(1), Q(2))})


def test_dynamics() -> None:
    s = read(DYNAMICS)
    d = s.stances[0].dynamics
    assert d is not None and d.duration is None and d.until is not None and d.within is not None
    assert constant(d.within.upper, s.values) == (Q(3, 5), Q(3, 5))
    assert list(d.start) == list(d.rate) == ["x", "xd"] and s.uncertain["gust"].within
    assert [n.op for n in d.rate["xd"].nodes].count("dt") == 2
    height = s.stances[0].define["height"].nodes
    assert Node("time", (), None, "t") in height and Node("power", (1,), Q(2)) in height
    assert [(r.kind, r.during) for r in s.requirements] == [("throughout", False), ("push", True)]
    timed = read(swap(DYNAMICS, 'until = "x - 0.1"\nwithin = [0.25, "3/5"]', "duration = 0.4")).stances[0].dynamics
    assert timed is not None and timed.duration is not None and timed.until is None and timed.within is None


def test_stances() -> None:
    s = read(STANCES)
    left, right = s.stances
    assert (left.name, left.then, left.mirror) == ("left", ("right",), ("vy",))
    assert (right.name, right.then, right.mirror) == ("right", ("left", "right"), ())
    assert list(left.define) == ["side", "w"] and left.define["w"] == right.define["w"]
    assert constant(right.define["side"], {}) == (Q(-1), Q(-1))
    for stance, upper in ((left, 1), (right, 2)):
        area = stance.states["vx"].range
        assert area is not None and constant(area.upper, {})[0] == upper
        assert set(stance.next) == set(stance.target) == {"vx", "vy"}
    assert s.requirements[0].stance == "left"
    own = swap(STANCES, "mirror =", "dynamics = { duration = 1, start = { x = 0 }, rate = { x = 1 } }\nmirror =")
    both = swap(
        own, 'then = ["left"', 'dynamics = { duration = 2, start = { x = 0 }, rate = { x = 1 } }\nthen = ["left"'
    )
    assert all(x.dynamics is not None for x in read(both).stances)
    assert "dynamics" in refusal(own)


def test_settings_replace_gains() -> None:
    assert read(CLAIM, {"kappa": "0.3"}).values["slack"] == (Q("0.05"),) * 2
    assert read(CLAIM, {"kappa": "1/3"}).values["kappa"] == (Q(1, 3),) * 2
    assert read(CLAIM, {"kappa": "+".join(["1"] * 2500)}).values["kappa"][0] == 2500
    for name, text in (
        ("g", "1"),
        ("nope", "1"),
        ("kappa", ""),
        ("kappa", "g"),
        ("kappa", "1/0"),
        ("kappa", "1_0"),
        ("kappa", "t"),
    ):
        refusal(CLAIM, {name: text})


def test_names_that_toml_takes_for_numbers() -> None:
    s = read(swap(CLAIM, "g = 9.81", f"g = 9.81\ninf{' ' * 30}= 1\nnan = 2\ne = 3"))
    assert [s.values[n][0] for n in ("inf", "nan", "e")] == [1, 2, 3]


# expressions


@pytest.mark.parametrize(("text", "value"), [
    ("-3**2", -9), ("2**-1", Q(1, 2)), ("2**3**2", 512), ("2**-2**2", Q(1, 16)), ("4**1.5", 8), ("4**(-1/2)", Q(1, 2)), ("0**0", 1), ("7 - 2 - 1", 4), ("8/4/2", 1),
    ("2*-3", -6), ("- - 3", 3), ("1e-3 + 1e3", Q("1000.001")), ("sqrt(4/9)", Q(2, 3)), ("min(3, 1, 2)", 1), ("max(3, 1, 2)", 3), ("clip(5, 0, 2)", 2), ("abs(-2/3)", Q(2, 3)),
    ("bezier(0.5, 0, 1, 0)", Q(1, 2)), ("exp(0) + cos(0) + cosh(0)", 3), ("sin(0) + tan(0) + log(1) + acos(1)", 0), ("pi*0", 0), ("min(1e9999, pi) * 0", 0),
])  # fmt: skip
def test_exact_values(text: str, value: Q) -> None:
    assert exact(text) == value


@pytest.mark.parametrize(("text", "digits"), [
    ("pi", "3.14159265358979323846264338327950288"), ("sqrt(2)/2", "0.70710678118654752440084436210484904"), ("exp(1)", "2.71828182845904523536028747135266250"), ("log(2)", "0.69314718055994530941723212145817657"),
    ("cosh(1)", "1.54308063481524377847790562075706168"), ("bezier(1/3, 0, pi)", "1.04719755119659774615421446109316763"), ("clip(5, 0, pi)", "3.14159265358979323846264338327950288"), ("2**-0.5", "0.70710678118654752440084436210484904"),
])  # fmt: skip
def test_inexact_values_are_enclosed_closely(text: str, digits: str) -> None:
    low, high = constant(parse(text, {}), {})
    unit = Q(1, 10**35)
    assert low < high < low + Q(1, 2**150) and low - unit <= Q(digits) <= high + unit


def test_nodes_are_flat_and_in_order() -> None:
    e = parse("-v**2 + target(v)*clip(v, 0, n)", {"n": (Q(1), Q(1))})
    assert [n.op for n in e.nodes] == ["name", "power", "neg", "target", "name", "number", "name", "clip", "mul", "add"]
    assert all(a < k for k, n in enumerate(e.nodes) for a in n.args) and e.nodes[7].args == (4, 5, 6)
    assert parse("v**n", {"n": (Q(1, 2), Q(1, 2))}).nodes[-1] == Node("power", (0,), Q(1, 2), "n")


@pytest.mark.parametrize("text", [
    "", "v +", "2v", "v v", "+v", "v(2)", "sin v", "sin()", "sin(v, v)", "min(v)", "clip(v, 1)", "bezier(v)", "foo(v)", "pi()", "sin", "gain", "v.real", "v[0]", "'v'", "v < 1", "v = 1", "v; v", "v // 2", "v % 2", "lambda: 0",
    "__import__('os')", "[v for v in v]", "f'{v}'", "v if v else v", "v**v", "v**65", "v**0.3", "v**pi", "1_0", "0x1F", "1E3", "1e+3", "1e12345", ".5", "5.", "01", "1e", "٣", "ｖ", "v\u00a0/2", "v\f", "target(v + 1)", "target()", "next(v)",
    "1/0 + v", "sqrt(-1)*v", "0**-1", "(v", "v)", "9**9**9", "((9**64)**64)**64", "9" * 4001, "(" * 65 + "v" + ")" * 65, "-" * 65 + "v", "(" * 9999, "-" * 9999, "v" + "**2" * 3000 + "**v", "v" + "+v" * 5000, "v" * 41,
])  # fmt: skip
def test_expressions_outside_the_grammar(text: str) -> None:
    start = time.process_time()
    with pytest.raises(Refused):
        parse(text, {})
    assert time.process_time() - start < 1


@pytest.mark.parametrize(
    "text",
    [
        "(" * 64 + "v" + ")" * 64,
        "-" * 64 + "v",
        "v" + "+v" * 4999,
        "(" * 63 + "sin(v)" + ")" * 63,
        "v**" + "(" * 63 + "2" + ")" * 63,
    ],
)
def test_expressions_at_their_limits(text: str) -> None:
    assert parse(text, {}).nodes


@pytest.mark.parametrize(
    "text",
    [
        "sqrt(-2)",
        "log(0)",
        "log(-pi)",
        "asin(2)",
        "acos(-1.1)",
        "1/0",
        "1/sin(pi)",
        "tan(pi/2)",
        "v",
        "t",
        "target(v)",
        "dt(1)",
        "sin(1e9999)",
        "pi + 1e9999",
        "exp(100000)",
        "exp(20000)",
    ],
)
def test_constants_without_a_value(text: str) -> None:
    refusal(swap(CLAIM, "g = 9.81", f'g = 9.81\nc = "{text}"'))


# refused, with the place


@pytest.mark.parametrize(("old", "new", "says"), [
    ("format = 1", "format = 2", "format"), ("format = 1", "format = 1.0", "format"), ("title =", "titel =", "unknown key 'titel'"), ("horizon = 2", "horizon = 65", "horizon"), ("shrink = true", "shrink = 1", "shrink"),
    ('route = "slope"', 'route = "fast"', "route"), ('["shift"]', '["v"]', "correction"), ('["shift"]', '["shift", "shift"]', "correction"), ("g = 9.81", "g = 1_0", "1_0"), ("g = 9.81", "g = 0x1F", "0x1F"), ("g = 9.81", "g = +3", "+3"),
    ("g = 9.81", "g = inf", "constants.g"), ("g = 9.81", "g = nan", "constants.g"), ("g = 9.81", "g = 1979-05-27", "1979"), ("g = 9.81", "g = true", "constants.g"), ("g = 9.81", "g = 1e1000000000", "1e1000000000"),
    ("g = 9.81", "g = 9.81\ng = 9.8", "TOML"), ("g = 9.81", "t = 9.81", "'t'"), ("g = 9.81", "kappa = 9.81", "twice"), ("z = 0.62", 'z = "half"', "half -> z -> half"), ("kappa = 0.18", 'kappa = "T"', "gains.kappa"),
    ("[-0.2, 1.0]", "[1.0, -0.2]", "state.v"), ("[-0.2, 1.0]", '["pi", "sqrt(9.8)"]', "state.v"), ("held = true, change", "change", "v_cmd.change"), ("change = 0.02", "change = -1", "v_cmd.change"), ("values = [0.3", "range = [0, 1], values = [0.3", "period"),
    ("rise = { range", "rise = { within = true, range", "rise.within"), ('w = "sqrt(g/z)"', 'w = "foot"', "foot -> w -> foot"), ("kappa*(v", "kapa*(v", "unknown name kapa"), ('v = "v_cmd"', 'v = "T"', "target.v: T"), ('v = "v_cmd"', 'v = "foot"', "foot -> shift -> target(v) -> foot"),
    ('v = "v_cmd"', 'v = "target(v)"', "target(v) -> target(v)"), ("[next]\nv", "[next]\nu", "next.u"), ('kind = "box"', 'kind = "round"', "metric.kind"), ('v = "1/2"', "v = 0", "metric.weights.v"), ("cells = 1000", "cells = 1e3", "effort"), ('gap = "1/500"', "gap = 1", "effort"),
    ("gain <= 0.8", "gain >= 0.8", "require[1]"), ("gain <= 0.8", "radius <= 0.8", "require[1]"), ("gain <= 0.8", "0.8 >= gain", "require[1]"), ("gain <= 0.8", "gain", "require[1]"), ("gain <= 0.8", "gain <= v", "require[1]"),
    ("gain <= 0.8", "push(v, during) > 1", "needs dynamics"), ("gain <= 0.8", "throughout(v < 1)", "needs dynamics"), ("gain <= 0.8", "bound(vv) < 1", "vv is no state"), ("gain <= 0.8", 'value(v)"\nin = "left', "require[1].in"),
    ('"value(next(v) - v) > -1"', '"value(v)"\nover = { foot = [0, 1] }', "require[4].over"), ("over = { foot", "over = { foto", "require[3].over"), ("[effort]", "[weather]\n[effort]", "weather"), ("[effort]", "[library]\n[effort]", "library"),
    ('title = "', 'title = "\u0007', "control"), ('title = "', "title = \"\"\"", "not closed"), ("[effort]", "[[effort]]", "effort"),
])  # fmt: skip
def test_claims_outside_the_format(old: str, new: str, says: str) -> None:
    assert says in refusal(swap(CLAIM, old, new))


@pytest.mark.parametrize(("old", "new", "says"), [
    ("data/gaits.csv", "../gaits.csv", "file"), ("data/gaits.csv", "/gaits.csv", "file"), ("data/gaits.csv", "data\\\\gaits.csv", "file"), ("data/gaits.csv", "other.csv", "not there"), ('speed = "half"', 'speed = "lift"', "lift"), ('speed = "half"', 'pace = "half"', "row 1"),
    ('"v/2"', '"reach"', "reach"), ('"v/2"', '"nope"', "nope"), ("half =", "lift =", "twice"),
])  # fmt: skip
def test_libraries_outside_the_format(old: str, new: str, says: str) -> None:
    assert says in refusal(swap(LIBRARY, old, new), files=FILES)


@pytest.mark.parametrize(("old", "new", "says"), [
    ("13e-2", "", "row 4, reach"), ("13e-2", "fast", "row 4, reach"), ("13e-2", "inf", "row 4, reach"), ("13e-2", " 1", "row 4, reach"), ("13e-2", '"1"', "row 4, reach"), ("13e-2", "1,2", "row 4"), ("13e-2", "\ud800", "row 4"), ("13e-2", "1\t", "control"),
    ("0,0,0.3", "1,0,0.50", "row 3"), ("0,0,0.3\n", "", "grid"), ("0,0,0.3\n", "\n", "row 3"), ("reach", "speed", "row 1"), ("reach", "gain", "row 1"), ("speed,", "\ufeffspeed,", "byte order"), ("0,0,0.3\n", "0,0,0.3\r", "rows"),
])  # fmt: skip
def test_csv_outside_the_format(old: str, new: str, says: str) -> None:
    assert says in refusal(LIBRARY, files={**FILES, "data/gaits.csv": swap(GAITS, old, new)})


@pytest.mark.parametrize(("old", "new", "says"), [
    ('x = "xd"\n', "", "start and rate"), ("within = [0.25", "within = [-1", "within"), ('within = [0.25, "3/5"]\n', "", "until and within"), ('x = "-0.1*v"', 'x = "height"', "dynamics.start.x"), ('x = "-0.1*v"', 'x = "xd"', "dynamics.start.x"),
    ("v = 0.5", 'v = "t"', "target.v: t"), ("v = 0.5", 'v = "height"', "target.v: t"), ("within = true", "within = true, held = true", "gust.within"), ("v = 0.5\n", "v = 0.5\n[stance.a]\nthen = 'b'\n", "stance.a.then"), ("height =", "x = 1\nheight =", "twice"),
])  # fmt: skip
def test_dynamics_outside_the_format(old: str, new: str, says: str) -> None:
    assert says in refusal(swap(DYNAMICS, old, new))


@pytest.mark.parametrize(("old", "new", "says"), [
    ('then = "right"\n', "", "then"), ('then = "right"', 'then = "up"', "then"), ('["vy"]', '["w"]', "mirror"), ("define = { side = 1 }\n", "", "every one"), ('{ side = "-1" }', '{ side = "-1", w = 1 }', "twice"), ("target = { vy = -0.12 }\n", "", "target"),
    ("target = { vy = 0.12 }", "target = { vy = 0.12, vx = 1 }", "target"), ("state = { vy = [-0.1, 0.6] }\n", "", "vy"), ("mirror =", "after =", "after"), ("[stance.right]", '[stance."r t"]', "stance"), ('in = "left"', 'in = "up"', "require[1].in"),
])  # fmt: skip
def test_stances_outside_the_format(old: str, new: str, says: str) -> None:
    assert says in refusal(swap(STANCES, old, new))


# hostile texts: refused cleanly, or read, in bounded time

BOMBS = {
    "unclosed text after text": '"""\n' + '\\"""\n' * 100_000,
    "dotted key": "a." * 100_000 + "a = 1\n",
    "dotted key with blanks": '"a" . ' * 100_000 + "a = 1\n",
    "brackets": "a = " + "[" * 1_000_000,
    "long name": swap(CLAIM, "[state]", f"[state]\n{'x' * 900_000} = 1"),
    "escape in a name": swap(CLAIM, "[state]", '[state]\n"\\u001b[31m\\u202e" = 1'),
    "long numbers": swap(CLAIM, "[state]", f"[state]\nu = {{ range = [{'7e9999, ' * 100_000}] }}"),
    "numbers at their limit": swap(CLAIM, "values = [0.3", f"values = [{', '.join(f'{k}e9999' for k in range(1, 9000))}, 0.3"),
    "long fractions": swap(CLAIM, "g = 9.81", 'g = "' + "+".join(["1e9999/7e-9999"] * 660) + '"'),
    "large functions": swap(CLAIM, "g = 9.81", "g = 9.81\n" + lines('c# = "exp(13000 + #)"', 20_000)),
    "large turns": swap(CLAIM, "g = 9.81", "g = 9.81\n" + lines('c# = "sin(1e6000)"', 20_000)),
    "points of a curve": swap(CLAIM, "g = 9.81", f'g = "bezier(pi/4{", 1" * 3000})"'),
    "ring of definitions": swap(CLAIM, "[define]", "[define]\n" + lines('d# = "d#1"', 9) + '\nd81 = "d8"'),
    "stances": swap(STANCES, "[stance.left]", lines("[stance.s#]\nthen = 's#'", 5000) + "\n[stance.left]"),
    "surrogate": swap(CLAIM, "Tray", "\ud800"),
    "byte order mark": "\ufeff" + CLAIM,
    "too large": CLAIM + "# " + "x" * 2**20,
}  # fmt: skip


@pytest.mark.parametrize("name", BOMBS)
def test_bombs_are_refused(name: str) -> None:
    refusal(BOMBS[name], within=3)


LONG = {
    "constants": swap(CLAIM, "g = 9.81", "g = 9.81\n" + lines("c# = 1", 30_000)),
    "constants in a chain": swap(CLAIM, "g = 9.81", "g = 9.81\n" + "\n".join(f'c{k} = "c{k + 1}"' for k in range(20_000)) + "\nc20000 = 1"),
    "definitions in a chain": swap(CLAIM, "[define]", "[define]\n" + "\n".join(f'd{k} = "d{k + 1}"' for k in range(20_000)) + "\nd20000 = 1"),
    "names": swap(CLAIM, "[define]", "[define]\n" + lines(f'd# = "v{"+v" * 20}"', 8000)),
    "other ranges": swap(CLAIM, "g = 9.81", "g = 9.81\n" + lines("c# = 1", 15_000)) + "over = { " + ", ".join(f"c{k} = [0, 1]" for k in range(15_000)) + " }\n",
    "states": "format = 1\n[define]\n" + "\n".join(f'd{k} = "d{k + 1}"' for k in range(2000)) + "\nd2000 = 1\n" + "".join(f"[{k}]\n" + lines(f"s# = {v}\n", 2000) for k, v in (("state", "[0, 1]"), ("next", 0), ("target", '"d0"'))),
}  # fmt: skip


@pytest.mark.parametrize("name", LONG)
def test_long_claims_are_read_in_time(name: str) -> None:
    start = time.process_time()
    read(LONG[name])
    assert time.process_time() - start < 5  # about 0.5 s; a quadratic reader takes minutes


def test_many_columns_are_read_in_time() -> None:
    many = range(20_000)
    rows = [["pace", *(f"c{k}" for k in many)], ["-1", *("0" for _ in many)], ["1", *("2" for _ in many)]]
    start = time.process_time()
    lift = read(LIBRARY, files={**FILES, "lift.csv": "\n".join(",".join(r) for r in rows)}).libraries[1]
    assert len(lift.columns) == 20_000 and lift.columns["c7"] == (Q(0), Q(2))
    assert time.process_time() - start < 5


def test_no_recursion_error_near_the_limit_of_the_stack() -> None:
    def deeper(levels: int) -> None:
        if levels:
            deeper(levels - 1)
        else:
            parse("(" * 64 + "v" + ")" * 64, {})

    frame, used = sys._getframe(), 0
    while frame.f_back is not None:
        frame, used = frame.f_back, used + 1
    deeper(sys.getrecursionlimit() - used - 500)  # nesting 64 takes under 400 frames


# numerals


def test_spelling() -> None:
    for text, value in (
        ("0", Q(0)),
        ("-7", Q(-7)),
        ("3.25", Q(13, 4)),
        ("1e-3", Q(1, 1000)),
        ("-0.5e2", Q(-50)),
        ("9" * 4000, Q(10**4000 - 1)),
    ):
        assert spelled(text) == value
    for text in ("", "+1", "01", "1.", ".5", "1E3", "1e+3", "1e12345", "1_0", " 1", "1\n", "٣", "inf", "0x1", "1/2"):
        assert spelled(text) is None
    for text in ("9" * 4001, "0." + "1" * 4000):
        with pytest.raises(ValueError, match="4000 digits"):
            spelled(text)


def test_numbers_of_certificates() -> None:
    assert [read_number(t) for t in ("0", "-3/4", "5", "-0.5", "12e-1")] == [0, Q(-3, 4), 5, Q(-1, 2), Q(6, 5)]
    assert read_number("-" + "9" * 50_000) == 1 - 10**50_000
    assert text_of(read_number("9" * 50_000).numerator) == "9" * 50_000
    for text in (
        "",
        "2/4",
        "0/5",
        "-0/5",
        "1/0",
        "1/1",
        "+1",
        "1_0",
        " 1",
        "1\n",
        "1/",
        "1/-2",
        "nan",
        "9" * 50_001,
        "1/" + "9" * 50_000,
    ):
        with pytest.raises(ValueError):
            read_number(text)


def test_decimals_are_rounded_one_way() -> None:
    assert (decimal_down(Q(1, 3), 3), decimal_up(Q(1, 3), 3)) == ("0.333", "0.334")
    assert (decimal_down(Q(-1, 3), 3), decimal_up(Q(-1, 3), 3)) == ("-0.334", "-0.333")
    assert (decimal_down(Q(0), 3), decimal_up(Q(999_999), 3), decimal_up(Q(10) ** 12, 2)) == ("0", "1000000", "1e12")
    rng = random.Random(7)
    for _ in range(300):
        size, digits = rng.choice((1, 20, 200, 40_000)), rng.choice((1, 3, 17))
        q = Q(rng.randrange(-(2**size), 2**size), rng.randrange(1, 2 ** rng.choice((1, 60, 36_000))))
        low, high = read_number(decimal_down(q, digits)), read_number(decimal_up(q, digits))
        assert low <= q <= high and high - low <= abs(q) * Q(10) ** (1 - digits)
    with pytest.raises(ValueError, match="50000 digits"):
        decimal_down(Q(10) ** 60_000, 5)
