"""Claims with continuous stances, shared by tests. All set in the invented scenario of a small seedling carrier."""

from __future__ import annotations

GAITS = """v_node,T_node,z0,z1,z2,u
0.2,0.38,0.6,0.61,0.62,0.0307307
0.5,0.38,0.6,0.6175,0.635,0.0770749
0.8,0.38,0.6,0.625,0.65,0.123698
0.2,0.42,0.6,0.61,0.62,0.0329995
0.5,0.42,0.6,0.6175,0.635,0.0827957
0.8,0.42,0.6,0.625,0.65,0.132937
"""


def stance(
    rates: str = 'x = "xd"\nxd = "9.81/0.6*x"',
    start: str = 'x = "-foot"\nxd = "(1 - loss)*v"',
    duration: str = "T",
    uncertain: str = "T = [0.38, 0.42]\nloss = [0, 0.05]\nv_cmd = { range = [0.2, 0.8], held = true }",
    define: str = 'foot = "0.16*v + 0.08*(v - v_cmd)"',
    state: str = "[-0.2, 1.2]",
    target: str = "v_cmd",
    step: str = "xd",
    requires: tuple[str, ...] = ("settles",),
    top: str = "",
    rest: str = "",
) -> str:
    asked = "".join(f'[[require]]\nthat = "{r}"\n' for r in requires)
    return (
        f"format = 1\n{top}\n[state]\nv = {state}\n[uncertain]\n{uncertain}\n[define]\n{define}\n"
        f'[dynamics]\nduration = "{duration}"\n[dynamics.start]\n{start}\n[dynamics.rate]\n{rates}\n'
        f'[next]\nv = "{step}"\n[target]\nv = "{target}"\n{rest}\n{asked}'
    )


LIBRARY = '[library]\nfile = "gaits.csv"\nat = { v_node = "v_cmd", T_node = "T" }\n'
HEIGHT = 'height = "bezier(t/T, z0, z1, z2, z1, z0)"\nfoot = "u + shift"\nshift = "0.24*(v - v_cmd)"'
PUSHING = 'x = "xd"\nxd = "(g + dt(dt(height)))/height * x'
WALK = stance(
    rates=PUSHING + '"', define=HEIGHT, rest="[constants]\ng = 9.81\n" + LIBRARY, top='correction = ["shift"]',
    requires=("settles", "throughout(x <= 1)", "always(x <= 1)"),
)  # fmt: skip
GUSTY = stance(
    rates=PUSHING + ' + gust"', define=HEIGHT, rest="[constants]\ng = 9.81\n" + LIBRARY,
    uncertain="T = [0.38, 0.42]\nloss = [0, 0.05]\nv_cmd = { range = [0.2, 0.8], held = true, change = 0.01 }\n"
    "gust = { range = [-0.1, 0.2], within = true }", requires=("settles", "push(v, during) >= 0.01", "value(next(v))"),
)  # fmt: skip
PARTS = {
    "constant": stance(),
    "walk": WALK,
    "gusty": GUSTY,
    "added": stance(rates='x = "xd - 0.1*t"\nxd = "g/(0.6 + 0.1*t)*x + 0.2*sin(t) - 0.3"', rest="[gains]\ng = 9.81\n"),
    "one": stance(rates='y = "-2*y + t*v_cmd"', start='y = "v - foot"', step="0.4*y + v_cmd"),
    "three": stance(
        rates='a = "b"\nb = "-a + c"\nc = "0.1*a - v_cmd*c"', start='a = 0\nb = "v"\nc = 0.1', step="0.2*b + v_cmd"
    ),
    "timed": stance(duration="T + 0.05*v", rates='x = "xd"\nxd = "(9.81 + dt(dt(h)))/h*x"',
                    define='h = "0.6 + 0.02*cos(3*t/T)"\nfoot = "0.16*v + 0.08*(v - v_cmd)"'),
    "read at a state": stance(
        rates=PUSHING + '"', define=HEIGHT, rest="[constants]\ng = 9.81\n" + LIBRARY.replace('"v_cmd"', '"0.2 + 0.5*v**2"')
    ),
    "gusty at a state": stance(
        rates=PUSHING + ' + gust"', define=HEIGHT, top='correction = ["shift"]',
        rest="[constants]\ng = 9.81\n" + LIBRARY.replace('"v_cmd"', '"0.2 + 0.5*v**2"'),
        uncertain="T = [0.38, 0.42]\nloss = [0, 0.05]\nv_cmd = { range = [0.2, 0.8], held = true }\ngust = { range = [-0.1, 0.2], within = true }",
    ),
    "two signals on one": stance(
        rates='y = "-(2 + v)*y + (1 + t*v)*gust + slip/2"', start='y = "v - foot"', step="0.4*v*y + v_cmd",
        uncertain="T = [0.38, 0.42]\nv_cmd = { range = [0.2, 0.8], held = true }\ngust = { range = [-0.1, 0.1], within = true }\n"
        "slip = { range = [0, 0.1], within = true }",
    ),
    "gusty at both": stance(
        rates='x = "xd + slip"\nxd = "(9 + v)*x + gust"', step="xd + x/3",
        uncertain="T = [0.38, 0.42]\nloss = [0, 0.05]\nv_cmd = { range = [0.2, 0.8], held = true }\n"
        "gust = { range = [-0.1, 0.1], within = true }\nslip = { range = [0, 0.01], within = true }",
    ),
    "scaled": stance(duration="1.1*T", rates='x = "xd"\nxd = "9.81/(0.6 + 0.05*t/T)*x"'),
}  # fmt: skip
