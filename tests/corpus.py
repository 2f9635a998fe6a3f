"""Claim texts, accepted and refused, that both readers must answer alike. Scenario: a carrier of seedling trays."""

from __future__ import annotations

from dataclasses import dataclass, field

BASE = """format = 1
title = "Tray carrier"
[constants]
g = 9.81
[gains]
kappa = 0.1
[state]
v = { range = [-0.2, 1.0], unit = "m/s" }
[uncertain]
T = [0.36, 0.40]
load = { range = [0, 2], held = true, change = 0.1 }
[define]
w = "sqrt(g/0.62)"
foot = "kappa*(v - target(v))"
[next]
v = "v/2 + foot"
[target]
v = 0.4
"""
CSV = "speed,period,reach\n0,0.3,0\n0,0.5,0\n1,0.3,0.13\n1,0.5,0.21\n"
LIBRARY = BASE + '[[library]]\nfile = "gaits.csv"\nat = { speed = "v", period = "T" }\n'
DYNAMICS = """format = 1
[constants]
g = 9.81
[state]
v = [0, 1]
[uncertain]
T = [0.3, 0.4]
gust = { range = [-0.4, 0.4], within = true }
[define]
height = "0.6 + 0.01*t"
[dynamics]
duration = "T"
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
"""
STANCES = """format = 1
[state]
vx = [0, 1]
[uncertain]
T = [0.3, 0.4]
[define]
w = "3.9"
[next]
vx = "vx/2"
[target]
vx = 0.5
[stance.left]
then = "right"
mirror = ["vy"]
define = { side = "1" }
state = { vy = [-0.1, 0.6] }
next = { vy = "vy/2 + side/100" }
target = { vy = 0.12 }
[stance.right]
then = ["left", "right"]
define = { side = "-1" }
state = { vy = [-0.6, 0.1] }
next = { vy = "vy/2 + side/100" }
target = { vy = -0.12 }
"""


@dataclass(frozen=True)
class Case:
    name: str
    text: str
    accepted: bool
    data: dict[str, str] = field(default_factory=dict)
    settings: dict[str, str] = field(default_factory=dict)


CASES: list[Case] = []


def add(accepted: bool, name: str, text: str, data: dict[str, str] | None = None, **settings: str) -> None:
    add_set(accepted, name, text, settings, data)


def add_set(accepted: bool, name: str, text: str, settings: dict[str, str], data: dict[str, str] | None = None) -> None:
    CASES.append(Case(f"{'good' if accepted else 'bad'}: {name}", text, accepted, data or {}, settings))


def top(text: str) -> str:
    return BASE.replace('title = "Tray carrier"\n', f'title = "Tray carrier"\n{text}\n')


def swap(old: str, new: str, base: str = BASE) -> str:
    if old not in base:
        raise ValueError(old)
    return base.replace(old, new)


def require(that: str, more: str = "") -> str:
    return f'{BASE}[[require]]\nthat = "{that}"\n{more}\n'


# whole files
add(True, "base", BASE)
add(True, "library", LIBRARY, {"gaits.csv": CSV})
add(True, "dynamics", DYNAMICS)
add(True, "stances", STANCES)
add(True, "no constants", 'format = 1\n[state]\nx = [0, 1]\n[next]\nx = "x/2"\n[target]\nx = 0.5\n')
add(True, "numbers for expressions", "format = 1\nstate = { x = [0, 1] }\nnext = { x = 0.5 }\ntarget = { x = 1 }\n")
add(False, "empty", "")
add(False, "blank", " \n\n")
add(False, "only format", "format = 1\n")
add(False, "not TOML", "format = 1\n[state\n")
add(False, "BOM", "\ufeff" + BASE)
add(False, "NUL", BASE + "# \0\n")
add(False, "escape character", BASE + "# \x1b[31m\n")
add(False, "duplicate key", BASE.replace("g = 9.81", "g = 9.81\ng = 9.82"))
add(False, "duplicate table", BASE + "[target]\nv = 0.4\n")
add(False, "too large", BASE + "# " + "x" * 2**20)
for key in ("target", "next", "state"):
    start = BASE.index(f"[{key}]")
    stop = BASE.find("\n[", start)
    add(False, f"no {key}", BASE[:start] + (BASE[stop + 1 :] if stop > 0 else ""))
add(False, "unknown section", BASE + "[weather]\nwind = 1\n")
add(False, "top-level mirror", top('mirror = ["v"]'))
for value in ("2", '"1"', "1.0", "true", "0"):
    add(False, f"format {value}", BASE.replace("format = 1", f"format = {value}"))

# numbers
for n in ("0", "-7", "3.25", "1e-3", "12e3", "-0.5e2", "0.1", '"1/3"', '"sqrt(2)/2"', '"2*pi/5"', '"2**-1"', '"-2**0.5"', '"4**1.5"', "9" * 3999, '"exp(1)"',
          '"log(2)"', '"max(1, 2)"', '"clip(3, 0, 1)"', '"abs(-2)"', '"atan(1)*4"', '"cosh(0.3)"', '"bezier(0.5, 0, 1, 0)"', '"1e-3"', "1e9999"):  # fmt: skip
    add(True, f"constant {n[:30]}", BASE.replace("g = 9.81", f"g = 9.81\nc = {n}"))
for n in ("1_0", "0x1F", "0o7", "0b1", "+3", "inf", "-inf", "nan", "+1.5", "1E3", "1e+3", "1e10000", "1e1000000000", "1979-05-27", "07:32:00", "true", "[1]", "{}",
          '"1_0"', '"+3"', '".5"', '"5."', '"1e"', '"0x1F"', '"01"', '"1 2"', '""', '" "', '"1/0"', '"sqrt(-1)"', '"log(0)"', '"log(-1)"', '"asin(2)"', '"v"', '"t"', '"nope"', "9" * 4001,
          '"' + "9" * 4001 + '"', '"9**9**9"', '"((9**64)**64)**64"', '"2**65"', '"2**0.3"', '"2**pi"', '"1e9999*1e9999*1e9999*1e9999*1e9999*1e9999*1e9999*1e9999*1e9999*1e9999"', '"٣"',
          '"1\\n"x'):  # fmt: skip
    add(False, f"constant {n[:30]}", BASE.replace("g = 9.81", f"g = 9.81\nc = {n}"))
add(True, "constants of constants", swap("g = 9.81", 'a = "b/2"\nb = "g"\ng = 9.81'))
add(False, "constants in a ring", swap("g = 9.81", 'a = "b"\nb = "a"\ng = 9.81'))
add(True, "a constant named e", swap("g = 9.81", 'e = "1e-3"\ng = "9.81 + e - 1e-3"'))
add(True, "gain of constants", swap("kappa = 0.1", 'kappa = "1/g"'))
add(False, "constant of a gain", swap("g = 9.81", 'g = "kappa"'))

# names
for name in ("T2", "a_b", "A" * 40, "inf", "e"):
    add(True, f"name {name[:20]}", BASE.replace("g = 9.81", f"g = 9.81\n{name} = 1"))
for name in (
    "2T",
    "_a",
    "A" * 41,
    "t",
    "pi",
    "sin",
    "min",
    "gain",
    "next",
    "value",
    "settles",
    "target",
    "during",
    "dt",
    "bezier",
    "v",
    "T",
    "kappa",
    "w",
    '"a b"',
    '"a.b"',
    '"é"',
    '""',
):
    add(False, f"name {name[:20]}", BASE.replace("g = 9.81", f"g = 9.81\n{name} = 1"))

# expressions in next
for e in ("v/2", "-v**2", "2*-v/9", "v*(1 + v)/4", "sqrt(1 + v)/4", "exp(-v)/9 + log(2 + v)", "sin(v)*cos(v) + tan(v/9)", "asin(v/9) + acos(v/9)", "atan(v)/2", "sinh(v)/9 + cosh(v)/9",
          "tanh(v)/2", "abs(v)/2", "min(v, 1)/2", "max(v, 0, T)", "clip(v, 0, 1)/2", "bezier(v, 0, 1, 2)/9", "target(v)", "pi*v/9", "v**0.5", "v**(1/2)", "v**-3", "(1 + v)**64", "v**kappa2",
          "w*v/9 + foot", "((((v))))/2", "v - - v", "v\\t+ 1", "(" * 60 + "v" + ")" * 60, "-" * 60 + "v", "v" + "+v" * 2000, "load*v", "1e-3*v", "v ** 2"):  # fmt: skip
    add(True, f"next {e[:24]}", swap("v/2 + foot", e).replace("kappa = 0.1", "kappa = 0.1\nkappa2 = 2"))
for e in ("", "v +", "* v", "2v", "v v", "v(2)", "sin v", "sin()", "sin(v, v)", "min(v)", "clip(v, 1)", "bezier(v)", "foo(v)", "u", "v < 1", "v.real", "v[0]", "'v'", "lambda: 0", "__import__('os')",
          "[v for v in v]", "{v}", "v if v else v", "v = 1", "v; v", "v**v", "v**T", "v**65", "v**0.3", "v**w", "(v", "v)", "target(T)", "target(v + 1)", "next(v)", "dt(v)", "t", "1/0 + v", "v @ v", "v // 2", "v % 2", "v ^ 2",
          "+v", "v \\u00d7 2", "pi()", "sin", "gain", "(" * 65 + "v" + ")" * 65, "-" * 65 + "v", "v" * 50, "(" * 9000, "-" * 9999, "v" + "+v" * 5001, "ｖ/2", "v\\u00a0/2", "sqrt(-1)*v", "1e99999*v"):  # fmt: skip
    add(False, f"next {e[:24]}", swap("v/2 + foot", e))
add(False, "next of an unknown state", swap('v = "v/2 + foot"', 'v = "v/2 + foot"\nu = 1'))
add(False, "next is a list", swap('v = "v/2 + foot"', 'v = ["v"]'))
add(False, "next is a flag", swap('v = "v/2 + foot"', "v = true"))

# ranges
for r in ("[0, 0]", '["-kappa", "kappa"]', '["0.38 - kappa", 2]', '["sqrt(2)", "sqrt(2)"]', '["-pi", "pi"]', "{ values = [0.3, 0.4] }", "{ values = [1] }", '{ range = [0, 1], unit = "s" }',
          "{ range = [0, 1], held = true }", "{ range = [0, 1], held = true, change = 0 }", '{ range = [0, 1], held = true, change = "kappa" }', "{ range = [0, 1], held = false }",
          "{ values = [1, 2], held = true, change = 1 }"):  # fmt: skip
    add(True, f"uncertain {r}", swap("T = [0.36, 0.40]", f"T = {r}"))
for r in ("[1, 0]", "[0]", "[0, 1, 2]", "0.4", '"0.4"', "[]", "{}", "{ range = [0, 1], values = [1] }", "{ values = [] }", "{ values = 1 }", '{ values = ["v"] }', "{ range = [0, 1], change = 0.1 }",
          "{ range = [0, 1], held = true, change = -0.1 }", "{ range = [0, 1], within = true }", "{ range = [0, 1], held = 1 }", '{ range = [0, 1], held = "true" }', "{ range = [0, 1], unit = 3 }",
          "{ range = [0, 1], step = 1 }", '["v", 1]', '["T", 1]', '["w", 9]', "[nan, 1]", "[0, inf]", '["pi", "sqrt(2)"]', "[true, false]", "[[0], 1]"):  # fmt: skip
    add(False, f"uncertain {r}", swap("T = [0.36, 0.40]", f"T = {r}"))
add(False, "state with values", swap('v = { range = [-0.2, 1.0], unit = "m/s" }', "v = { values = [1] }"))
add(False, "state held", swap('unit = "m/s" }', "held = true }"))
add(False, "state range reversed", swap("[-0.2, 1.0]", "[1.0, -0.2]"))

# definitions, targets
add(True, "definitions in any order", swap('w = "sqrt(g/0.62)"', 'w = "a + 1"\na = "b"\nb = "g"'))
add(False, "definitions in a ring", swap('w = "sqrt(g/0.62)"', 'w = "a"\na = "b"\nb = "w"'))
add(False, "definition of itself", swap('w = "sqrt(g/0.62)"', 'w = "w"'))
add(True, "target held", swap("v = 0.4\n", 'v = "load/4"\n'))
add(True, "target by definition", swap("v = 0.4\n", 'v = "w/10 + kappa"\n'))
add(False, "target of a state", swap("v = 0.4\n", 'v = "v"\n'))
add(False, "target not held", swap("v = 0.4\n", 'v = "T"\n'))
add(False, "target by a definition that is not held", swap("v = 0.4\n", 'v = "foot"\n'))
add(False, "target of itself", swap("v = 0.4\n", 'v = "target(v)"\n'))
add(False, "target of an unknown state", swap("v = 0.4\n", "v = 0.4\nu = 1\n"))
add(
    False,
    "many definitions in a ring",
    BASE.replace('w = "sqrt(g/0.62)"', "\n".join(f'd{k} = "d{(k + 1) % 500}"' for k in range(500)) + '\nw = "d0"'),
)
add(
    True,
    "a long chain of definitions",
    BASE.replace('w = "sqrt(g/0.62)"', "\n".join(f'd{k} = "d{k + 1}"' for k in range(500)) + '\nd500 = "1"\nw = "d0"'),
)

# top-level keys
for t in (
    'notes = "free"',
    'route = "slope"',
    'route = "curve"',
    'correction = ["foot"]',
    "shrink = true",
    "horizon = 3",
    'notes = """a\nb"""',
):
    add(True, t[:30], top(t))
for t in ("notes = 1", "notes = 1.5", 'route = "fast"', "route = 1", "correction = []", 'correction = "foot"', 'correction = ["v"]', 'correction = ["foot", "foot"]', "correction = [1]", "shrink = 1",
          "horizon = 0", "horizon = 65", "horizon = 1.5", 'horizon = "2"', "horizon = true", "titel = 1", "require = []", "require = 1", "library = []", "stance = {}"):  # fmt: skip
    add(False, t[:30], top(t))
for t in (
    'kind = "auto"\nweights = { v = 1 }',
    'kind = "box"',
    'kind = "ellipsoid"',
    "weights = { v = 2 }",
    'weights = { v = "1/kappa" }',
    "",
):
    add(True, f"metric {t[:30]}", f"{BASE}[metric]\n{t}\n")
for t in (
    'kind = "round"',
    "kind = 1",
    "weights = { u = 1 }",
    "weights = { v = 0 }",
    "weights = { v = -1 }",
    "weights = 1",
    "norm = 2",
):
    add(False, f"metric {t[:30]}", f"{BASE}[metric]\n{t}\n")
for t in ("gap = 1e-6", "cells = 10", "seconds = 0.5", 'gap = "1/1000"', "gap = 1e-3\ncells = 200000\nseconds = 600"):
    add(True, f"effort {t[:30]}", f"{BASE}[effort]\n{t}\n")
for t in (
    "gap = 0",
    "gap = 1",
    "gap = -1e-3",
    "cells = 0",
    "cells = 1.5",
    'cells = "10"',
    "seconds = 0",
    "seconds = -1",
    "threads = 2",
    "gap = true",
):
    add(False, f"effort {t[:30]}", f"{BASE}[effort]\n{t}\n")

# requirements
for r in ("settles", "gain <= 0.8", "gain < 1", "residual <= 0.1", "bound <= 0.1", "bound(v) < 0.1", "sharp_bound(v) <= 1", "radius(v) >= 0.3", "push(v) > 0.1", "steps(v, 0.5, 0.1) <= 9", "sensitivity(v, foot) < 0",
          "sensitivity(v, T)", "sensitivity(v, g) > 0", "value(v*w)", "value(next(v)) <= 1", "value(v) >= kappa", "always(v <= 1)", "always(next(v) - v < w)", "gain<=kappa*9", "  gain  <=  0.8  "):  # fmt: skip
    add(True, f"require {r}", require(r))
for r in ("", "gain", "gain >= 0.8", "gain > 0.8", "gain = 0.8", "gain == 0.8", "gain <= v", "gain <= 0.8 <= 1", "0.8 >= gain", "gain(v) <= 1", "residual(v) < 1", "radius(v) <= 0.3", "push(v) < 1", "push > 1", "push(v, during) >= 1",
          "steps(v) <= 9", "steps(v, 1, 2) >= 9", "bound(u) <= 1", "bound(T) <= 1", "speed <= 1", "sensitivity(v) < 0", "sensitivity(v, nope) < 0", "sensitivity(T, v) < 0", "sensitivity < 0", "value() < 1", "value < 1",
          "value(nope)", "always(v)", "always(v <= 1) <= 2", "always v <= 1", "throughout(v <= 1)", "settles <= 1", "settles settles", "value(next(T))", "gain <= 1/0", "value(v) <= t", "radius(v) >= 1 2"):  # fmt: skip
    add(False, f"require {r}", require(r))
add(True, "over a definition", require("sensitivity(v, foot) < 0", "over = { foot = [-0.4, 0.4], T = [0.3, 0.5] }"))
add(True, "over a gain", require("value(v)", "over = { kappa = [0, 1] }"))
for r, more in (("value(v)", "over = { foot = [0, 1] }"), ("sensitivity(v, foot)", "over = { nope = [0, 1] }"), ("value(v)", "over = { T = [1, 0] }"), ("value(v)", "over = { T = 1 }"), ("value(v)", "over = 1"),
                ("value(v)", 'in = "left"'), ("value(v)", "because = 1")):  # fmt: skip
    add(False, f"{r} {more}", require(r, more))
add(False, "require without that", BASE + "[[require]]\nover = {}\n")
add(False, "require that is a number", BASE + "[[require]]\nthat = 1\n")

# libraries
GOOD_CSV = {
    "shuffled": "reach,period,speed\n0.21,0.5,1\n0,0.3,0\n0.13,0.3,1\n0,0.5,0\n", "carriage returns": CSV.replace("\n", "\r\n"), "no last newline": CSV.rstrip("\n"),
    "exponents": CSV.replace("0.21", "21e-2"), "two columns": "speed,period,reach,lift\n0,0.3,0,1\n0,0.5,0,1\n1,0.3,0.13,1\n1,0.5,0.21,1\n",
}  # fmt: skip
for name, text in GOOD_CSV.items():
    add(True, f"library {name}", LIBRARY, {"gaits.csv": text})
BAD_CSV = {
    "empty": "", "header only": "speed,period,reach\n", "missing node": CSV.replace("1,0.5,0.21\n", ""), "repeated node": CSV + "1,0.5,0.21\n", "blank cell": CSV.replace("0.21", ""), "text": CSV.replace("0.21", "fast"),
    "nan": CSV.replace("0.21", "nan"), "infinite": CSV.replace("0.21", "inf"), "plus": CSV.replace("0.21", "+0.21"), "blank": CSV.replace("0.21", " 0.21"), "quotes": CSV.replace("0.21", '"0.21"'), "short row": CSV.replace(",0.21", ""),
    "long row": CSV.replace("0.21", "0.21,1"), "blank line": CSV.replace("\n1,0.3", "\n\n1,0.3"), "no such axis": CSV.replace("speed", "pace"), "no column left": "speed,period\n0,0.3\n0,0.5\n1,0.3\n1,0.5\n",
    "column twice": "speed,period,reach,reach\n0,0.3,0,0\n0,0.5,0,0\n1,0.3,1,1\n1,0.5,1,1\n", "column named as a state": CSV.replace("reach", "v"), "reserved column": CSV.replace("reach", "gain"), "one node": "speed,period,reach\n0,0.3,0\n0,0.5,0\n",
    "semicolons": CSV.replace(",", ";"), "BOM": "\ufeff" + CSV, "NUL": CSV + "\0", "expression": CSV.replace("0.21", "1/5"), "tab": CSV.replace(",0.21", ",\t0.21"),
}  # fmt: skip
for name, text in BAD_CSV.items():
    add(False, f"library {name}", LIBRARY, {"gaits.csv": text})
add(False, "library not there", LIBRARY)
for a, b in (("gaits.csv", "../gaits.csv"), ("gaits.csv", "/gaits.csv"), ("gaits.csv", "./gaits.csv"), ("gaits.csv", ""), ('speed = "v", period = "T"', ""), ('speed = "v"', 'speed = "reach"'), ('speed = "v"', 'speed = "nope"'),
             ('speed = "v"', "speed = true"), ('at = { speed = "v", period = "T" }', ""), ('at = {', 'sheet = 1\nat = {')):  # fmt: skip
    add(
        False,
        f"library {b[:30]}",
        swap(a, b, LIBRARY),
        {"gaits.csv": CSV, "../gaits.csv": CSV, "/gaits.csv": CSV, "./gaits.csv": CSV, "": CSV},
    )
add(True, "library below", swap("gaits.csv", "data/gaits.csv", LIBRARY), {"data/gaits.csv": CSV})
add(True, "library read at a definition", swap('speed = "v"', 'speed = "foot*2"', LIBRARY), {"gaits.csv": CSV})
add(
    False,
    "library read at a definition of a column",
    swap('speed = "v"', 'speed = "foot"', LIBRARY).replace("kappa*(v - target(v))", "reach"),
    {"gaits.csv": CSV},
)
add(True, "library column used", swap("v/2 + foot", "v/2 + reach", LIBRARY), {"gaits.csv": CSV})

# dynamics
add(True, "touchdown by condition", swap('duration = "T"', 'until = "0.3 - t + x/9"\nwithin = [0.1, 0.6]', DYNAMICS))
add(True, "throughout", DYNAMICS + '[[require]]\nthat = "throughout(x <= 0.5*height)"\n')
add(True, "push during", DYNAMICS + '[[require]]\nthat = "push(v, during) >= 0.1"\n')
for a, b in (('duration = "T"', ""), ('duration = "T"', 'until = "x"'), ('duration = "T"', 'duration = "T"\nuntil = "x"\nwithin = [0, 1]'), ('duration = "T"', 'until = "x"\nwithin = [1, 0]'), ('duration = "T"', 'until = "x"\nwithin = [-1, 1]'),
             ('duration = "T"', 'duration = "t"'), ('duration = "T"', 'duration = "xd"'), ('duration = "T"', 'duration = "height"'), ('x = "-0.1*v"', 'x = "t"'), ('x = "-0.1*v"', 'x = "height"'), ('x = "-0.1*v"\n', ""),
             ('x = "xd"\n', ""), ("v = 0.5", 'v = "height"'), ("within = true", "within = true, held = true"), ("range = [-0.4, 0.4], within", "values = [1], within"), ('duration = "T"', 'duration = "T"\nsolver = 1')):  # fmt: skip
    add(False, f"dynamics {b[:30]}", swap(a, b, DYNAMICS))

# stances
add(True, "require in a stance", STANCES + '[[require]]\nthat = "bound(vy) <= 0.2"\nin = "left"\n')
for a, b in (('then = "right"', 'then = "up"'), ('then = "right"\n', ""), ('then = "right"', "then = []"), ('mirror = ["vy"]', 'mirror = ["T"]'), ('define = { side = "-1" }\n', ""), ('next = { vy = "vy/2 + side/100" }\ntarget = { vy = -0.12 }', "target = { vy = -0.12 }"),
             ("target = { vy = 0.12 }", "target = { vy = 0.12, vx = 0.1 }"), ('define = { side = "1" }', 'define = { side = "1", w = "2" }'), ("state = { vy = [-0.6, 0.1] }\n", ""), ('then = "right"', 'then = "right"\nafter = 1'), ("[stance.left]", '[stance."2"]')):  # fmt: skip
    add(False, f"stance {b[:30]}", swap(a, b, STANCES))
add(False, "in an unknown stance", STANCES + '[[require]]\nthat = "settles"\nin = "up"\n')

# settings
add(True, "set a number", BASE, kappa="0.2")
add(True, "set an expression", BASE, kappa="1/3")
add(True, "set a negative number", BASE, kappa="-0.2")
for name, text in (
    ("g", "1"),
    ("nope", "1"),
    ("kappa", ""),
    ("kappa", "1_0"),
    ("kappa", "g"),
    ("kappa", "1/0"),
    ("kappa", "nan"),
    ("kappa", "0.2 " + "x"),
):
    add_set(False, f"set {name}={text}", BASE, {name: text})
for depth in (40, 65, 100_000):
    add(False, f"nested lists {depth}", BASE + "[[require]]\nthat = " + "[" * depth + "]" * depth + "\n")

# settings as expressions: blanks and a minus after a digit are none of a number's spelling
for text in (
    "1-2",
    "3-2-1",
    " 0.2",
    "0.2 ",
    "0.2\n",
    "0.2\t",
    "2*pi",
    "sqrt(2)",
    "-1e3",
    "--1",
    "(1)",
    "2**-1",
    "exp(0)",
):
    add_set(True, f"set kappa={text!r}", BASE, {"kappa": text})
for text in (
    "+1",
    "t",
    "v",
    "kappa",
    "1E5",
    "9**9**9",
    "target(v)",
    "dt(1)",
    "1 2",
    "inf",
    "0x1",
    "\ud800",
    "9" * 4001,
    "1" * 10001,
):
    add_set(False, f"set kappa={text[:20]!r}", BASE, {"kappa": text})

# inexact constants: enclosed on an absolute grid, refused where that cannot tell them from a point without value
for text in (
    "exp(-1e9)",
    "exp(1e3)",
    "sin(1e300)",
    "tanh(1e9)",
    "asin(sin(pi/2))",
    "1e-9999*pi",
    "sqrt(1e-9999)",
    "pi**0",
    "0*pi",
    "2**exp(0)",
    "2**(0*pi)",
    "2**cos(0)",
    "log(exp(-1))",
    "0**0",
    "sqrt(0)",
    "asin(1)",
):
    add(True, f"inexact {text}", BASE.replace("g = 9.81", f'g = 9.81\nc = "{text}"'))
for text in (
    "1/exp(-300)",
    "log(1e-9999)",
    "log(exp(-300))",
    "sin(1e9999)",
    "exp(1e9)",
    "1/(pi - pi)",
    "tan(pi/2)",
    "0**-1",
    "0**-0.5",
    "sqrt(sqrt(2) - sqrt(2))",
    "1e9999*pi",
    "2**(pi - pi)",
    "2**(pi/pi)",
    "2**2**2**3",
    "1/sin(0)",
):
    add(False, f"inexact {text}", BASE.replace("g = 9.81", f'g = 9.81\nc = "{text}"'))
for low, high, well in (
    ("pi", "pi", True),
    ("pi", "pi + 0", False),
    ("pi - pi", "1", True),
    ("pi", "sqrt(2)*sqrt(2)", False),
    ("exp(0)", "1", True),
):
    add(well, f"range {low} {high}", swap("[0.36, 0.40]", f'["{low}", "{high}"]'))

# limits met exactly, and passed by one
for limit in (64, 65):
    for name, text in (
        ("parentheses", "(" * limit + "v" + ")" * limit),
        ("calls", "sin(" * limit + "v" + ")" * limit),
        ("minus signs", "-" * limit + "v"),
        ("targets", "(" * (limit - 1) + "target(v)" + ")" * (limit - 1)),
    ):
        add(limit == 64, f"{limit} {name}", swap("v/2 + foot", text))
for limit in (10_000, 10_001):
    add(limit == 10_000, f"{limit} characters", swap("v/2 + foot", "v" + " " * (limit - 1)))
    add(limit == 10_000, f"{limit} characters of a requirement", require("settles" + " " * (limit - 7)))
    add(limit == 10_000, f"{limit} values", swap("[0.36, 0.40]", "{ values = [" + "1," * limit + "] }"))
for limit in (1000, 1001):
    add(limit == 1000, f"{limit} requirements", BASE + '[[require]]\nthat = "settles"\n' * limit)
for limit in (2**20, 2**20 + 1):
    add(limit == 2**20, f"{limit} bytes", BASE + "#" * (limit - len(BASE)))
add(True, "4000 digits", BASE.replace("g = 9.81", f"g = 9.81\nc = {'9' * 4000}e9999"))
add(False, "4001 digits with a point", BASE.replace("g = 9.81", f"g = 9.81\nc = 0.{'1' * 4000}"))
for limit in (4, 5):
    names = "abcde"[:limit]
    rows = "".join(",".join(str(k >> i & 1) for i in range(limit)) + ",1\n" for k in range(2**limit))
    table = f'{BASE}[library]\nfile = "a.csv"\nat = {{ {", ".join(f"{a} = 0.5" for a in names)} }}\n'
    add(limit == 4, f"{limit} axes", table, {"a.csv": ",".join(names) + ",lift\n" + rows})

# dotted keys, texts over several lines, targets of each other
add(True, "dotted keys", 'format = 1\nstate.v = [0, 1]\nnext.v = "v/2"\ntarget.v = 0\n')
add(False, "a dotted key of many parts", BASE + "a." * 5000 + "a = 1\n")
add(True, "an expression over lines", swap('"v/2 + foot"', '"""\nv/2\n + foot"""'))
add(False, "a text without an end", BASE + 'x = """\n')
add(True, "spellings inside texts and comments", top('notes = "1_0 +3 [[[["') + "# 0x1F [[[ '''\n")
add(False, "an underscore in a list", swap("[0.36, 0.40]", "[1_0]"))
TWO = 'format = 1\n[state]\na = [0, 1]\nb = [0, 1]\n[next]\na = "a/2"\nb = "b/2"\n[target]\na = "target(b)/2"\nb = '
add(True, "a target of another", TWO + "0.5\n")
add(False, "targets of each other", TWO + '"target(a)"\n')
add(False, "a stance with an empty name", BASE + '[stance.""]\nthen = ""\n')
add(False, "a stance with an empty name alone", BASE + '[stance.""]\n')
add(True, "a single stance", BASE + '[stance.only]\nthen = "only"\n')
add(
    True,
    "a stance's own range of a shared state",
    swap("state = { vy = [-0.1, 0.6] }", "state = { vy = [-0.1, 0.6], vx = [0, 2] }", STANCES),
)
add(False, "a column of a lone surrogate", LIBRARY, {"gaits.csv": CSV + "\ud800\x01"})

# magnitude of constants: exact ones up to 2**17 bits, the others and what they are worked out from up to 2**20000
HUGE = "((2**50)**50)**8"  # 2**20000
WHOLE = "((2**50)**50)**52*(2**63)**17"  # 2**131071, of 2**17 bits
for text in (
    "exp(13862.943611)", "cosh(-13862.943611)", "sinh(-13862.943611)", "exp(-1e6000)", "sin(1e6000)", "cos(-1e6000)", "tan(1e300)", "atan(1e6000)", "tanh(-1e6000)", "log(1e6000)", "sqrt(1e9998)",
    "sqrt(1e6001)", "pi**64", "pi**-64", "(1e90*pi)**64", "1e-9999*pi", "1e-9999 + pi", "1e6000*pi", "1e6000/pi", "pi/1e6000", "asin(1e-9999)", "acos(-1e-9999)", "sqrt(3e-9999)", "min(1e9999, pi)*0", "max(1e9999, pi)",
    "clip(1e9999, 0, pi)", "clip(pi, -1e9999, 1e9999)", "abs(1e-9999 - pi)", "bezier(1e-9999, 1, 2)", "bezier(2, 1e6000, pi)", "pi - 1e6000", "0*pi + 1e9999", "2**(1e9999/1e9999)", f"atan({HUGE})",
    f"{HUGE} - pi", f"pi - {HUGE}", f"({HUGE} - 1)**0.5", f"({HUGE} - 1)**-0.5 + 1", f"sqrt(2)*sqrt(2)/4*{HUGE}", f"{HUGE}*cos(0)", f"{HUGE}*(1 + 0*pi)*{HUGE}", WHOLE, f"-({WHOLE})", f"1/({WHOLE})",
    f"{WHOLE} - 1", f"({WHOLE})*(1/({WHOLE}))", f"sqrt(({HUGE})**2)", "(2**50)**50 + 1/(2**50)**50", f"log({HUGE})", f"tanh({HUGE})", f"sin(-{HUGE})",
    "asin(tanh(400))", "acos(-tanh(1e6))", "max(tanh(50), 1)", "sqrt(sin(5e-91))", "tan(5e-91)**0.5", "acos(exp(-1e-120))", "min(0, sin(1e-300))", "sqrt(-log(1 - 1e-120))",
):  # fmt: skip
    add(True, f"magnitude {text}", BASE.replace("g = 9.81", f'g = 9.81\nc = "{text}"'))
for text in (
    "exp(13862.943612)", "exp(13870)", "exp(20000)", "exp(20001)", "exp(1e6000)", "cosh(13862.943612)", "cosh(-14000)", "sinh(-13862.943612)", "sinh(-20001)", "sin(1e9999)", "cos((2**64)**64*(2**64)**64*(2**64)**64*(2**64)**64*(2**64)**64)",
    "tan(1e9999)", "atan(1e9999)", "atan(-1e9999)", "tanh(1e9999)", "log(1e9999)", "sqrt(1e9999)", "sqrt(1e9998 + 1)", "exp(-1e9999)", "cosh(1e9999)", "1e9999*pi", "1e9999 + pi", "pi - 1e9999", "pi/1e9999", "1e9999/pi",
    "pi/1e-6100", "(1e300*pi)**64", "(1e300*pi)**-64", "(1e-3*pi)**-64", "((2**50)**50*pi)**8", "1e-9999*pi*1e9999", "bezier(1e-9999, 1, 1e9999)", "bezier(1e4000, 1e4000, 0)", "asin(1e9999)", "max(1e9999, pi)*pi", "(1e9999 + 1)**0.5",
    f"atan({HUGE} + 1)", f"atan(-{HUGE} - 1)", f"{HUGE} + pi", f"-{HUGE} - pi", f"{HUGE} - (pi - 4)", f"{HUGE}*pi", f"({HUGE} + 1)**0.5", f"({HUGE} + 1)**-0.5", f"sqrt(2)*{HUGE}/2*sqrt(2)*2", f"bezier(2, -{HUGE}/2 - 1, {HUGE}/2)",
    f"bezier(0.5, -{HUGE}, {HUGE}, 0)", f"{WHOLE}*2", f"-({WHOLE})*2", f"1/({WHOLE})/2", f"{WHOLE} + 1/2", f"{WHOLE} + ({WHOLE})", f"({WHOLE})**2", f"({WHOLE})**-2", "(2**50)**50*1e9999*1e9999*1e9999*1e9999",
):  # fmt: skip
    add(False, f"magnitude {text}", BASE.replace("g = 9.81", f'g = 9.81\nc = "{text}"'))

# the work a claim's constants may take, met exactly and passed by one
for limit in (512, 513):  # 1e9999 takes 32 kilobits, once read and once worked out
    add(limit == 512, f"{limit} long numbers", swap("[0.36, 0.40]", "{ values = [" + "1e9999," * limit + "] }"))
for limit in (1024, 1025):
    text = "".join(f'd{k} = "1e9999*v"\n' for k in range(limit))
    add(limit == 1024, f"{limit} long factors", swap("[define]\n", f"[define]\n{text}"))
for limit in (41, 42):
    text = "".join(f'c{k} = "exp(5000)"\n' for k in range(limit))
    add(limit == 41, f"{limit} large values", swap("g = 9.81\n", f"g = 9.81\n{text}"))
for limit in (60, 61):  # of 2**17 bits; the number itself is worked out twice, by factors
    text = f'c = "{WHOLE}"\n' + "".join(f'c{k} = "c"\n' for k in range(limit))
    add(limit == 60, f"{limit} names of a long number", swap("g = 9.81\n", f"g = 9.81\n{text}"))
for text in ("1e9999", "-1e9999", "exp(1000)", "sin(1e300)", "kappa*pi"):
    add(True, f"require value(v) <= {text}", require(f"value(v) <= {text}"))
for text in ("1e9999*1e9999", "exp(3000)", "sin(1e1000)", "- - - -1e9999", f"{HUGE}*v"):
    add(False, f"require value(v) <= {text}", require(f"value(v) <= {text}"))
add(False, "require value of a long number", require(f"value({WHOLE} + v)"))

# one beside another is not one within another; what is met exactly
for name, text in (
    ("parentheses", "+".join(["(v)"] * 70)),
    ("calls", "+".join(["abs(v)"] * 70)),
    ("minus signs", "*".join(["-v"] * 70)),
    ("powers", "+".join(["v**2"] * 70)),
    ("targets", "+".join(["target(v)"] * 70)),
):
    add(True, f"70 {name} side by side", swap("v/2 + foot", text))
for text, well in (("v**64", True), ("v**-64", True), ("v**65", False), ("v**-65", False), ("v**(-129/2)", False)):
    add(well, f"exponent {text}", swap("v/2 + foot", text))
for limit in (2047, 2048):  # 64 times the bits of the base, at most 2**17
    text = f"((2**50)**40*2**{limit - 2000})**64"
    add(limit == 2047, f"a power of 64 times {limit + 1} bits", BASE.replace("g = 9.81", f'g = 9.81\nc = "{text}"'))
add(True, "one cell", f"{BASE}[effort]\ncells = 1\n")
UNTIL = swap('duration = "T"', 'until = "x"\nwithin = [0, 0.5]', DYNAMICS)
add(True, "touchdown from 0 on", UNTIL)
add(False, "touchdown at one time", swap("[0, 0.5]", "[0.5, 0.5]", UNTIL))
add(False, "touchdown at one time spelled twice", swap("[0, 0.5]", '["pi/9", "pi/9"]', UNTIL))
ONE_AXIS = f'{BASE}[library]\nfile = "a.csv"\nat = {{ speed = "v" }}\n'
add(True, "one axis", ONE_AXIS, {"a.csv": "speed,reach\n0,0\n1,0.1\n"})
add(False, "one axis alone", ONE_AXIS, {"a.csv": "speed\n0\n1\n"})
OWN = "dynamics = { duration = 0.3, start = { x = 0 }, rate = { x = 1 } }\n"
EVERY = swap('then = "right"\n', f'then = "right"\n{OWN}', swap('then = ["left"', f'{OWN}then = ["left"', STANCES))
add(True, "dynamics in every stance", EVERY)
add(False, "dynamics in one stance", swap('then = "right"\n', f'then = "right"\n{OWN}', STANCES))
SHARED = "[dynamics]\nduration = 0.3\nstart = { x = 0 }\nrate = { x = 1 }\n"
add(True, "dynamics shared by stances", STANCES + SHARED)
add(False, "dynamics in every stance and shared", EVERY + SHARED)
OTHER = OWN.replace("x =", "y =")
add(False, "dynamics of other states in a stance", EVERY.replace(OWN, OTHER, 1))
add(True, "points in a text and a comment", top(f'notes = "{"." * 99}"') + f"# {'.' * 99}\n")
add(True, "points in a list", swap("[0.36, 0.40]", "{ values = [" + "0.5, " * 99 + "] }"))
add(True, "lists side by side", swap("load = {", "".join(f"u{k} = [0, 1]\n" for k in range(99)) + "load = {"))
add(False, "a lone surrogate in a text", top('notes = "\ud800"'))
add(False, "a lone surrogate in a comment", BASE + "# \udfff\n")
for axis in ("t", "gain", "sin", "2x"):
    text = swap("speed =", f"{axis} =", ONE_AXIS)
    add(False, f"an axis named {axis}", text, {"a.csv": f"{axis},reach\n0,0\n1,0.1\n"})
SECOND = f'{LIBRARY}[[library]]\nfile = "lift.csv"\nat = {{ pace = "v" }}\n'
TABLES = {"gaits.csv": CSV, "lift.csv": "pace,lift\n0,0\n1,0.1\n"}
add(True, "two libraries", SECOND, TABLES)
add(False, "a library read at a column of another", swap('pace = "v"', 'pace = "reach"', SECOND), TABLES)
add(False, "a correction of lists", top("correction = [[]]"))
add(False, "what follows a stance, a list of lists", swap('"left", "right"', '"left", []', STANCES))
add(
    False,
    "a range whose ends are too close to be told apart",
    swap("[0.36, 0.40]", '["pi + (2**-40)**4/2", "pi + (2**-40)**4"]'),
)
add(True, "a range of one step of the grid", swap("[0.36, 0.40]", '["pi", "pi + (2**-40)**4"]'))
add(True, "horizon 64", top("horizon = 64"))
ALONE = STANCES[: STANCES.index("[stance.right]")] + '[stance.right]\nthen = "left"\ndefine = { side = 1 }\n'
add(False, "a state of one stance alone", ALONE)
add(False, "a state of every stance, named as something else", STANCES.replace("vy", "T"))
add(False, "a continuous state named as something else", DYNAMICS.replace("\nx =", "\nT ="))
add(
    False,
    "no continuous states",
    DYNAMICS[: DYNAMICS.index("[dynamics.start]")] + "start = {}\nrate = {}\n[next]\nv = 0\n[target]\nv = 0\n",
)
add(False, "touchdown not shown to be from 0 on", swap("[0, 0.5]", '["pi - pi", 0.5]', UNTIL))
for text in (
    "sensitivity(v, x)",
    "radius(v, during) > 0.1",
    "bound(v, during) < 1",
    "push(v, x) > 1",
    "push(during) > 1",
):
    add(False, f"dynamics, require {text}", DYNAMICS + f'[[require]]\nthat = "{text}"\n')
for file in ("a\\\\b.csv", "a\\u0007.csv", "a\\u202e.csv", "a//b.csv", "a/../b.csv", "a/"):
    found = file.encode().decode("unicode_escape")
    add(False, f"a file named {file}", swap("gaits.csv", file, LIBRARY), {found: CSV})
add(False, "a column named as a constant", LIBRARY, {"gaits.csv": CSV.replace("reach", "g")})
add(False, "a column of two libraries", SECOND, {**TABLES, "lift.csv": "pace,reach\n0,0\n1,0.1\n"})
for text in (
    "(v v",
    "(v, 1",
    "(v 1",
    "abs(v v",
    "target(v v",
    "target(v, v)",
    "min(v, 1 1",
    "v**(1/3)",
    "v**cosh(1e-60)",
    "v**(pi - pi)",
    "_v",
    "v_(1)",
    "target(1)",
):
    add(False, f"next {text}", swap("v/2 + foot", text))
for text in (
    "always(v <= 1 1",
    "always(v <= 1, 1)",
    "steps(v 1, 1, 1) <= 9",
    "steps(v, 1, 1 9) <= 9",
    "bound(v 1 <= 1",
    "value(v v <= 1",
    "sensitivity(v v v",
):
    add(False, f"require {text}", require(text))
for before in ("-v", "(v)", "abs(v)", "v**2", "v**-2", "target(v)"):
    for limit in (64, 65):
        add(
            limit == 64,
            f"{limit} parentheses after {before}",
            swap("v/2 + foot", f"{before} + {'(' * limit}v{')' * limit}"),
        )
for limit in (64, 65):
    inner = limit - 1
    add(limit == 64, f"{limit} parentheses of an exponent", swap("v/2 + foot", f"v**{'(' * inner}2{')' * inner}"))
    add(limit == 64, f"{limit} powers of powers", swap("v/2 + foot", "v" + "**1" * limit))
for name in ("x", "T", "g", "v", "foot", "gain"):
    text = f"{BASE}[dynamics]\nduration = 0.3\nstart = {{ {name} = 0 }}\nrate = {{ {name} = 1 }}\n"
    add(name == "x", f"a continuous state named {name}", text)
