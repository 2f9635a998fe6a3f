"""Random linear stances against scipy's DOP853: nothing simulated goes beyond what is proved.

Seeded; `ULTIBOUND_LONG=1` runs ten times as many. A carrier of seedling trays walks through a hillside nursery: its mass
centre rides at heights of many shapes over its foot, gusts push the trays, and steps last as long as they last.
"""

from __future__ import annotations

import os
import random
from collections.abc import Callable
from fractions import Fraction
from functools import cache
from typing import Any

import numpy as np
import pytest

from tests.conftest import ends, proved
from tests.simulation import CLOSE, Gaits, Quantity, Values, Walk, answer, nominal
from ultibound.certificate.certificate import Certificate

TIMES = 10 if os.environ.get("ULTIBOUND_LONG") else 1
RUNS, STEPS = 24, 3  # simulated at once, and one step after another where the set is kept
FALL = "9.81"
PENDULUM = {"x": "xd", "xd": f"({FALL} + dt(dt(height)))/height*x"}
HELD = Quantity(0.25, 0.55, held=True, change=0.02)


def num(x: float) -> str:
    return f"{x:.4g}"


def pendulum(rng: random.Random, height: str, bend: str, **more: Any) -> Walk:
    """x'' = (g + z'')/z x from the foot, a foot placed to keep the speed and some more for the error."""
    share = more.pop("share", None) or rng.uniform(0.6, 1.1)
    period = more.pop("period", None) or Quantity(0.38, 0.42)
    uncertain = {"T": period, "loss": Quantity(0.0, round(rng.uniform(0.01, 0.05), 3)), "v_cmd": HELD}
    uncertain |= more.pop("uncertain", {})
    rate = {"x": "xd", "xd": PENDULUM["xd"] + more.pop("added", "")}
    define = {"D": more.pop("duration", "T"), **more.pop("define", {}), "height": height}
    walk = Walk(
        (-0.3, 1.1), uncertain, {**define, "foot": "0"}, {"x": "-foot", "xd": "(1 - loss)*v"}, rate,
        "D", "xd", "v_cmd", bend, **more,
    )  # fmt: skip
    return placed(walk, share)


def middle(walk: Walk) -> Values:
    return {n: (q.low + q.high) / 2 for n, q in walk.uncertain.items() if not q.within} | dict.fromkeys(
        walk.signals, 0.0
    )


def placed(walk: Walk, share: float) -> Walk:
    """A foot that keeps 0.4 m/s at the middle of all ranges, and removes a share of the error."""
    at = {**middle(walk), "v_cmd": 0.4, "v": np.array([0.4])}
    keep, more = float(nominal(walk, at)[0]) / 0.4, -share / answer(walk, at)
    more += {"v": 0, "v_cmd": 1}.get(
        walk.at.get("v_node", "v"), 0.5
    ) * keep  # what the library leaves to the correction
    foot = "u + shift" if walk.gaits else f"{num(keep)}*v + shift"
    define = {k: e for k, e in walk.define.items() if k != "foot"}
    walk.define = {**define, "shift": f"{num(more)}*(v - target(v))", "foot": foot}
    return walk


def curve(rng: random.Random) -> tuple[str, str]:
    """A Bezier curve over the stance and its second derivative by t."""
    points = [round(rng.uniform(0.57, 0.66), 3) for _ in range(rng.choice([3, 4, 5]))]
    n = len(points) - 1
    bends = [num(n * (n - 1) * (a - 2 * b + c)) for a, b, c in zip(points, points[1:], points[2:], strict=False)]
    second = f"bezier(t/D, {', '.join(bends)})" if len(bends) > 1 else bends[0]
    return f"bezier(t/D, {', '.join(map(str, points))})", f"{second}/D**2"


def library(
    rng: random.Random, speeds: list[str], periods: list[str], at: str, wave: float, bump: float = 0.0
) -> dict[str, Any]:
    """A library of heights, and of feet that keep each node's speed: read at a speed and a period.

    `bump`: how much higher than the others the last speed's first gait rises.
    """
    s, p = np.meshgrid([float(x) for x in speeds], [float(x) for x in periods], indexing="ij")
    a, b = rng.uniform(0, 6), rng.uniform(0.5, 3)
    z = {f"z{k}": 0.6 + wave * np.sin(a + b * s + k * (1 + p)) for k in range(3)}
    z["z2"][-1, 0] += bump
    axes = {"v_node": speeds, "T_node": periods}
    second = "12/D**2*bezier(t/D, z0 - 2*z1 + z2, 2*z1 - 2*z2, z0 - 2*z1 + z2)"
    height = "bezier(t/D, z0, z1, z2, z1, z0)"
    walk = Walk(
        (0, 1), {}, {"D": "T", "height": height}, {"x": "-foot", "xd": "0.98*v"}, PENDULUM, "D", "xd", "0.4", second
    )
    values = {"v": s.ravel(), "T": p.ravel(), **{k: c.ravel() for k, c in z.items()}}
    feet = nominal(walk, values).reshape(s.shape)
    return {
        "height": height, "bend": second, "gaits": Gaits(axes, {**z, "u": feet}),
        "at": {"v_node": at, "T_node": "T"}, "correction": "shift",
    }  # fmt: skip


def constant(rng: random.Random) -> Walk:
    return pendulum(rng, "z", "0", uncertain={"z": Quantity(0.55, 0.62)})


def over_commands(rng: random.Random) -> Walk:
    return pendulum(rng, **library(rng, ["0.2", "0.4", "0.6"], ["0.36", "0.4", "0.44"], "v_cmd", 0.01))


def over_states(rng: random.Random) -> Walk:
    return pendulum(rng, **library(rng, ["-0.4", "0.2", "0.7", "1.2"], ["0.36", "0.44"], "v", 0.006))


def between(rng: random.Random) -> Walk:
    """Coarse cells, read halfway between the speed and the command."""
    found = library(rng, ["-0.2", "0.4", "1.0"], ["0.3", "0.5"], "0.5*v + 0.5*v_cmd", 0.015)
    return pendulum(rng, **found, period=Quantity(0.36, 0.42))


def waves(rng: random.Random) -> Walk:
    k, size = num(rng.uniform(2, 9)), num(rng.uniform(0.002, 0.01))
    added = f" + {num(rng.uniform(-0.3, 0.3))}*sin({k}*t) + {num(rng.uniform(-0.2, 0.2))}*t*v_cmd"
    return pendulum(rng, f"0.6 + {size}*cos({k}*t)", f"-{size}*{k}**2*cos({k}*t)", added=added)


def timed(rng: random.Random) -> Walk:
    """Faster steps are shorter or longer: the duration depends on the state."""
    height, bend = curve(rng)
    change = num(rng.choice([-1, 1]) * rng.uniform(0.02, 0.05))
    return pendulum(rng, height, bend, duration=f"T + {change}*(v - v_cmd)", period=Quantity(0.39, 0.41))


def damped(rng: random.Random) -> Walk:
    height, bend = curve(rng)
    return pendulum(rng, height, bend, added=f" - {num(rng.uniform(0.1, 1.5))}*xd + {num(rng.uniform(-0.2, 0.2))}")


def single(rng: random.Random) -> Walk:
    """One continuous state: a speed that drifts towards what is commanded."""
    fade = num(rng.uniform(0.5, 4))
    return Walk(
        (-0.3, 1.1), {"T": Quantity(0.3, 0.5), "v_cmd": HELD, "gust": Quantity(-0.1, 0.15, within=True)}, {},
        {"y": "v"}, {"y": f"-{fade}*(1 + t)*(y - v_cmd) + {num(rng.uniform(0.1, 1))}*gust + 0.1*sin(9*t)"},
        "T", "y", "v_cmd",
    )  # fmt: skip


def coupled(rng: random.Random) -> Walk:
    """Three continuous states: the ankle follows with a lag."""
    lag, share = num(rng.uniform(2, 20)), num(rng.uniform(0.1, 0.4))
    define = {"foot": "0.16*v + 0.1*(v - v_cmd)"}
    start = {"x": "-foot", "xd": "(1 - loss)*v", "p": "0.05*(v - v_cmd)"}
    rate = {"x": "xd", "xd": f"15*(x - {share}*p)", "p": f"-{lag}*(p - 0.1*x) + 0.01*cos(5*t)"}
    uncertain = {"T": Quantity(0.37, 0.41), "loss": Quantity(0, 0.03), "v_cmd": HELD}
    return Walk((-0.3, 1.1), uncertain, define, start, rate, "T", "xd", "v_cmd")


def gusty(rng: random.Random) -> Walk:
    gust = {"gust": Quantity(-0.1, round(rng.uniform(0.05, 0.2), 2), within=True)}
    found = library(rng, ["0.2", "0.6"], ["0.36", "0.44"], "v_cmd", 0.01)
    return pendulum(rng, **found, uncertain=gust, added=" + gust")


def gusts(rng: random.Random) -> Walk:
    """Two signals, one weighed by the time, on two of three states that all answer upwards."""
    define = {"foot": "0.16*v + 0.1*(v - v_cmd)"}
    start = {"x": "-foot", "xd": "0.98*v", "c": "0.01"}
    rate = {"x": "xd + 0.2*slip", "xd": "(15 + t)*x + 0.5*c", "c": f"-{num(rng.uniform(1, 6))}*c + (0.2 + t)*gust"}
    uncertain = {
        "T": Quantity(0.37, 0.41), "v_cmd": HELD, "gust": Quantity(-0.3, 0.2, within=True),
        "slip": Quantity(-0.02, 0.03, within=True),
    }  # fmt: skip
    return Walk((-0.3, 1.1), uncertain, define, start, rate, "T", "xd", "v_cmd")


def bent(rng: random.Random, share: float, height: str = "0.7") -> Walk:
    """z'' a share of g throughout, uncertain by some percent, over long steps."""
    steep = Quantity(*sorted((round(share * 0.96 * float(FALL), 3), round(share * 1.04 * float(FALL), 3))))
    return pendulum(
        rng, f"{height} + 0.5*steep*t*(t - D)", "steep", uncertain={"steep": steep},
        period=Quantity(0.58, 0.6) if share > 0 else Quantity(0.5, 0.55),
    )  # fmt: skip


def upwards(rng: random.Random) -> Walk:
    return bent(rng, rng.uniform(0.4, 0.55), "0.95")


def downwards(rng: random.Random) -> Walk:
    return bent(rng, -rng.uniform(0.4, 0.55), "0.6")


def bouncing(rng: random.Random, share: float = 0.9) -> Walk:
    """Two bounces a step, at the top of which the body falls with a share of g, at most."""
    size = share * float(FALL) * 0.38**2 / 157.91367  # (4π)²
    return pendulum(
        rng, "0.6 + size*cos(4*pi*t/D)", "-size*(4*pi/D)**2*cos(4*pi*t/D)", period=Quantity(0.38, 0.4),
        uncertain={"size": Quantity(round(0.95 * size, 6), round(size, 6))},
    )  # fmt: skip


def overshooting(rng: random.Random) -> Walk:
    """A correction that oversteps: what is far too slow leaves the region, so the set is a ball that moves."""
    walk = pendulum(
        rng,
        "0.6",
        "0",
        share=rng.uniform(1.5, 1.65),
        period=Quantity(0.39, 0.4),
        uncertain={"loss": Quantity(0.02, 0.03)},
    )
    walk.state = (-1.5, 0.9)
    return walk


def lasting(rng: random.Random) -> Walk:
    """Steps so long that what is not known grows thirtyfold."""
    return pendulum(rng, "0.6", "0", period=Quantity(1.0, 1.01), uncertain={"loss": Quantity(0.02, 0.021)})


def wide(rng: random.Random) -> Walk:
    """A period so uncertain that the rates' cells are coarse."""
    return pendulum(rng, "0.62*(1 + 0.02*cos(3*t))", "-0.1116*cos(3*t)", period=Quantity(0.31, 0.43))


FAR, LONG_LEG, PUSH, FOOT = (
    "throughout(abs(x) <= 0.4)", "throughout(x**2 + height**2 <= 0.8)", "push(v, during) >= 0.001", "sensitivity(v, foot) < 0",
)  # fmt: skip
ASKED: dict[Callable[[random.Random], Walk], list[str]] = {
    constant: [FOOT, PUSH], over_commands: [LONG_LEG], over_states: [FOOT, PUSH], between: [FOOT], waves: [FOOT, FAR],
    timed: [FOOT, LONG_LEG, PUSH], damped: [FAR, FOOT], single: ["throughout(y*y <= 1.3)", PUSH], coupled: [FAR, FOOT],
    gusty: [PUSH], gusts: [FAR, FOOT], upwards: [FOOT, PUSH], downwards: [PUSH], bouncing: [FOOT, FAR], lasting: [FOOT, PUSH],
    wide: [FAR], overshooting: [FOOT, FAR, PUSH],
}  # fmt: skip


class Simulated:
    """A proved claim and its walk, run from random states at random values."""

    def __init__(self, walk: Walk, certificate: Certificate, seed: int) -> None:
        self.walk, self.results = walk, certificate.results
        self.seed, self.rng = seed, np.random.default_rng(seed)
        inside = self.results["set"]
        self.kind = inside["kind"] if inside else None
        entries = self.results["requirements"]
        self.values = {e["that"]: e["value"] for e in entries if e["value"]}
        self.runs = 0

    def drawn(self) -> Values:
        """Values of what is uncertain, half of them at an end of their range."""
        found = {}
        for n, q in self.walk.uncertain.items():
            if not q.within:
                at = self.rng.uniform(q.low, q.high, RUNS)
                found[n] = np.where(self.rng.random(RUNS) < 0.5, self.rng.choice([q.low, q.high], RUNS), at)
        return found

    def courses(self, phases: int) -> dict[str, np.ndarray]:
        """Signals that jump at the phases; a third of the runs stay at an end of the range throughout."""
        found = {}
        for n in self.walk.signals:
            q = self.walk.uncertain[n]
            jump = self.rng.uniform(q.low, q.high, (phases + 1, RUNS))
            jump[:, ::3] = self.rng.choice([q.low, q.high], RUNS)[::3]
            jump[:, 1::3] = self.rng.choice([q.low, q.high], (phases + 1, RUNS))[:, 1::3]
            found[n] = jump
        return found

    def radius(self) -> float:
        """Of the ball about the target that the figures are about."""
        if self.results["radius"]:
            return float(Fraction(self.results["radius"]["lower"]))
        q, (low, high) = HELD, self.walk.state
        return min(high - q.high, q.low - low)

    def start(self, values: Values) -> Any:
        low, high = self.walk.state
        if self.kind == "region":
            return np.where(
                self.rng.random(RUNS) < 0.3, self.rng.choice([low, high], RUNS), self.rng.uniform(low, high, RUNS)
            )
        return self.walk.aim(values) + self.radius() * self.rng.choice([-1, 1, 0.5, -0.3], RUNS) * self.rng.uniform(
            0.9, 1, RUNS
        )

    def next_command(self, values: Values) -> Any:
        """The command one step later."""
        q = self.walk.uncertain["v_cmd"]
        return np.clip(values["v_cmd"] + q.change * self.rng.choice([-1, 0, 1], RUNS), q.low, q.high)

    def run(self) -> None:
        command = self.drawn()["v_cmd"]
        values = {**self.drawn(), "v_cmd": command}
        v = self.start(values)
        for _ in range(STEPS if self.kind else 1):
            values = {**self.drawn(), "v_cmd": command, "v": v}
            phases = sorted(self.rng.uniform(0, 1, 3))
            courses = self.courses(len(phases))
            after, seen = self.walk.landed(values, phases, courses)
            self.runs += RUNS
            command = self.next_command(values)
            self.step(values, after, command)
            self.instants(seen)
            self.together(values, phases, courses, after)
            v = after
            if self.kind is None:
                break
        self.pushed(values)

    def step(self, values: Values, after: Any, command: Any) -> None:
        """The next state within what is proved of it, and of its distance from the next target."""
        room = CLOSE * (1 + np.abs(after))
        if "value(next(v))" in self.values:
            low, high = (float(x) for x in ends(self.values["value(next(v))"]))
            assert np.all((low - room <= after) & (after <= high + room)), "value"
        error, before = (np.abs(x - self.walk.aim(w)) for x, w in ((after, {"v_cmd": command}), (values["v"], values)))
        for name, route in self.results["routes"].items():
            k, e = (float(Fraction(route[q]["upper"])) for q in ("gain", "residual"))
            assert np.all(error <= k * before + e + room), name
        if self.kind == "region":
            assert np.all((after >= self.walk.state[0] - room) & (after <= self.walk.state[1] + room)), "region left"
        elif self.kind:
            assert np.all(error <= self.radius() + room), "ball left"

    def instants(self, seen: list[Values]) -> None:
        """At random instants: what holds throughout, and a leg that pushes where a set is proved."""
        for known in seen:
            for that, value in self.values.items():
                if that.startswith("throughout("):
                    left, right = that[11:-1].split("<=")
                    found = self.walk.value(left, known) - float(right)
                    low, high = (float(x) for x in ends(value))
                    assert np.all((low - CLOSE <= found) & (found <= high + CLOSE)), that
            if self.kind and "height" in self.walk.define:
                assert np.all(known["height"] > 0)
                assert np.all(float(FALL) + self.walk.value("dt(dt(height))", known) > 0), "the leg pulls"

    def together(self, values: Values, phases: list[float], courses: dict[str, np.ndarray], after: Any) -> None:
        """Two states under the same values approach each other by the gain; the foot moves the next state as proved."""
        k = self.results["routes"].get("slope")
        if k:
            shift = 1e-3 * self.rng.choice([-1, 1], RUNS)
            low, high = self.walk.state
            other = np.clip(values["v"] + shift, low, high)
            if self.kind != "region":
                aim, r = self.walk.aim(values), self.radius()
                other = np.clip(other, aim - r, aim + r)
            moved = self.walk.landed({**values, "v": other}, phases, courses)[0] - after
            most = float(Fraction(k["gain"]["upper"])) * np.abs(other - values["v"])
            assert np.all(np.abs(moved) <= most + CLOSE * (1 + np.abs(after))), "slope"
        if "sensitivity(v, foot) < 0" in self.values:
            foot = self.walk.settled(values)["foot"] + 0.1
            slope = (self.walk.landed({**values, "foot": foot}, phases, courses)[0] - after) / 0.1
            low, high = (float(x) for x in ends(self.values["sensitivity(v, foot) < 0"]))
            room = 1e-7 * (1 + np.abs(slope))
            assert np.all((low - room <= slope) & (slope <= high + room)), "sensitivity"

    def points(self, certificate: Certificate) -> None:
        """Values said to be attained are: the motion at the points that prove them leads there."""
        found = [x for x in certificate.entries["proof"] if (x["rule"], x["proves"]) == ("point", "require[2]")]
        assert found
        for line in found:
            at = {n: np.array([float(Fraction(x))]) for n, x in line["witness"]["at"].items()}
            values = {n: at.get(n, np.array([q.low])) for n, q in self.walk.uncertain.items() if not q.within}
            values["v"] = at["v"] if "v" in at else self.walk.aim(values) + at["error(v)"]
            courses = {d: at[f"{d}({self.walk.step})"][None, :] for d in self.walk.signals}
            after, _ = self.walk.landed(values, (), courses)
            low, high = (float(Fraction(line["concludes"][e])) for e in ("lower", "upper"))
            assert low - CLOSE <= after[0] <= high + CLOSE

    def pushed(self, values: Values) -> None:
        """After settling, a push below what is proved, at a random instant, is still in the set at touchdown."""
        proof = self.values.get("push(v, during) >= 0.001")
        if not proof or not self.kind:
            return
        most, bound = float(Fraction(proof["lower"])), float(Fraction(self.results["states"]["v"]["bound"]["upper"]))
        values = {**self.drawn(), "v_cmd": values["v_cmd"]}
        values["v"] = self.walk.aim(values) + bound * self.rng.choice([-1, 1, 0.5], RUNS)
        values["v"] = np.clip(values["v"], *self.walk.state)
        phases = sorted(self.rng.uniform(0, 1, 2))
        change = 0.9999 * most * self.rng.choice([-1, 1], RUNS)
        push = int(self.rng.integers(2)), self.walk.step, change
        after, _ = self.walk.landed(values, phases, self.courses(2), push)
        error = np.abs(after - self.walk.aim({"v_cmd": self.next_command(values)}))
        assert np.all(error <= self.radius() + CLOSE), "push"


@pytest.mark.parametrize("kind", ASKED)
def test_no_run_goes_beyond_what_is_proved(kind: Callable[[random.Random], Walk]) -> None:
    for number in range(TIMES):
        seed = 1000 * list(ASKED).index(kind) + number
        walk = kind(random.Random(seed))
        walk.asked = ["settles", "value(next(v))", *ASKED[kind]]
        certificate = proved(walk.text(), data=walk.data)
        simulated = Simulated(walk, certificate, seed)
        simulated.run()
        simulated.points(certificate)
        entries = certificate.results["requirements"]
        assert all(e["verdict"] == "proved" or e["limited_by"] for e in entries), seed
        if number == 0:  # these are known to settle, and to be followed to the gap
            assert all(e["verdict"] == "proved" for e in entries) and simulated.runs == RUNS * STEPS
            (low, high), (least, most) = ends(entries[1]["value"]), ends(entries[1]["attained"])
            assert max(least - low, high - most) <= Fraction(walk.gap) * max(abs(low), abs(high))


@pytest.mark.parametrize("kind", [timed, overshooting])
@pytest.mark.parametrize("effort", ["cells = 6", "cells = 1000\nseconds = 0.3"])
def test_what_is_cut_short_is_no_less_true(kind: Callable[[random.Random], Walk], effort: str) -> None:
    walk = kind(random.Random(1))
    walk.asked, walk.effort = ["settles", "value(next(v))", *ASKED[kind]], effort
    simulated = Simulated(walk, proved(walk.text()), 1)
    simulated.run()
    assert simulated.runs


@cache
def spoilt(share: float) -> dict[str, Any]:
    """Outcomes where z'' reaches a share of −g for an instant, at one end of the ranges; the map settles in any case."""
    walk = bouncing(random.Random(1), share)
    walk.asked = ["settles", "value(next(v))", "bound(v) <= 1", "throughout(abs(x) <= 1)", "gain < 1"]
    walk.effort = f"cells = 1000\nseconds = {4 if share > 1 else 600}"
    at = {
        **middle(walk),
        "size": walk.uncertain["size"].high,
        "T": np.array([walk.uncertain["T"].low]),
        "v": np.array([0.4]),
    }
    _, seen = walk.landed(at, [0.5])
    assert bool(float(FALL) + walk.value("dt(dt(height))", seen[0])[0] < 0) is (share > 1)
    return proved(walk.text()).results


@pytest.mark.parametrize("share", [0.98, 1.01])
def test_a_leg_that_would_have_to_pull_gets_no_set(share: float) -> None:
    results = spoilt(share)
    assert (results["set"] is None) is (share > 1)
    assert {e["verdict"] for e in results["requirements"]} == ({"undecided"} if share > 1 else {"proved"})
    assert all(bool(e["limited_by"]) is (share > 1) for e in results["requirements"])


def test_where_a_leg_would_have_to_pull_is_told() -> None:
    told = spoilt(1.01)["requirements"][0]["limited_by"]
    assert "support" in told or "pull" in told


@pytest.mark.skipif(TIMES == 1, reason="explaining why nothing is proved takes half a minute")
@pytest.mark.parametrize("commands, pulls", [((0.25, 0.38), False), ((0.42, 0.55), True)])
def test_one_gait_that_pulls_spoils_its_cells(commands: tuple[float, float], pulls: bool) -> None:
    """A single node's height profile falls faster than g: no set over its cells, one beside them."""
    rng = random.Random(3)
    found = library(rng, ["0.2", "0.4", "0.6"], ["0.36", "0.44"], "v_cmd", 0.002, 0.31)
    walk = pendulum(rng, **found, period=Quantity(0.36, 0.37), uncertain={"v_cmd": Quantity(*commands, held=True)})
    walk.asked, walk.effort = ["settles", "gain < 1"], "cells = 1000\nseconds = 600"
    at = {**middle(walk), "v_cmd": np.array([commands[1]]), "T": 0.36, "v": 0.4}
    _, seen = walk.landed(at, [0.5])
    assert bool(float(FALL) + walk.value("dt(dt(height))", seen[0])[0] < 0) is pulls
    results = proved(walk.text(), data=walk.data).results
    assert (results["set"] is None) is pulls
    assert {e["verdict"] for e in results["requirements"]} == ({"undecided"} if pulls else {"proved"})


def blown(rng: random.Random) -> Walk:
    """Gusts against trays whose height profile follows the speed: what a gust does follows the state."""
    gust = {"gust": Quantity(round(rng.uniform(-0.6, -0.2), 2), 0.5, within=True)}
    found = library(rng, ["-0.4", "0.5", "1.2"], ["0.36", "0.44"], "v", 0.03) | {"correction": ""}
    return pendulum(rng, **found, period=Quantity(0.38, 0.383), uncertain=gust, added=" + gust")


def fading(rng: random.Random) -> Walk:
    """One continuous state, and a signal that the state weighs: more early in the stance, less late, or the other way."""
    gust = Quantity(-0.2, 0.3, within=True)
    rate = f"(1.5 + {num(rng.uniform(1, 3))}*v*(t - 0.2))*gust"
    uncertain = {"T": Quantity(0.4, 0.41), "v_cmd": HELD, "gust": gust}
    return Walk((-0.3, 1.1), uncertain, {}, {"y": "0.2*v"}, {"y": rate}, "T", "0.8*v_cmd + y", "v_cmd")


def swayed(rng: random.Random) -> Walk:
    """Two continuous states that signals move, and both of which the next state rests on."""
    define = {"foot": "0.16*v + 0.1*(v - v_cmd)"}
    rate = {"x": f"xd + {num(rng.uniform(0, 0.1))}*gust", "xd": f"(14 + {num(rng.uniform(-3, 3))}*v)*x + gust"}
    uncertain = {"T": Quantity(0.38, 0.385), "v_cmd": HELD, "gust": Quantity(-0.3, 0.3, within=True)}
    start = {"x": "-foot", "xd": "0.98*v"}
    return Walk((-0.3, 1.1), uncertain, define, start, rate, "T", "xd + 0.1*v*x", "v_cmd")


COURSES, ACROSS = 12, 1e-4  # jumps of a course that is worst, and how far two trajectories start from each other


def parted(walk: Walk, values: Values, courses: list[dict[str, np.ndarray]]) -> np.ndarray:
    """How fast two trajectories under the same course come apart, for many courses at once: (courses, runs)."""
    many = 2 * len(courses)
    wide = {n: np.tile(np.broadcast_to(x, RUNS), many) for n, x in values.items()}
    wide["v"] = wide["v"] + np.repeat([0, ACROSS], RUNS * len(courses))
    phases = [k / COURSES for k in range(1, COURSES)]
    all_of_them = {d: np.concatenate([c[d] for c in courses] * 2, axis=1) for d in walk.signals}
    here, there = walk.landed(wide, phases, all_of_them)[0].reshape(2, len(courses), RUNS)
    return (there - here) / ACROSS


def worst(walk: Walk, values: Values, side: int) -> dict[str, np.ndarray]:
    """The course that makes most of how two trajectories come apart.

    The map is affine in what a signal is between its jumps; a course is at one end where its share is positive.
    """
    none = {d: np.zeros((COURSES, RUNS)) for d in walk.signals}
    tried = [none]
    for d in walk.signals:
        for k in range(COURSES):
            tried.append({**none, d: none[d].copy()})
            tried[-1][d][k] = 1
    still, *others = parted(walk, values, tried)
    shares = side * (np.array(others) - still).reshape(len(walk.signals), COURSES, RUNS)
    return {
        d: np.where(x > 0, walk.uncertain[d].high, walk.uncertain[d].low)
        for d, x in zip(walk.signals, shares, strict=True)
    }


@pytest.mark.parametrize("kind", [blown, fading, swayed])
def test_no_course_of_signals_parts_trajectories_faster_than_the_gain(kind: Callable[[random.Random], Walk]) -> None:
    """Signals that jump to the worse end where their effect's slope by the state changes sign."""
    for seed in range(TIMES):
        walk, rng = kind(random.Random(seed)), np.random.default_rng(seed)
        walk.asked, walk.gap = ["settles", "gain < 1"], "0.1"
        results = proved(walk.text(), data=walk.data).results
        assert [e["verdict"] for e in results["requirements"]] == ["proved", "proved"], results["requirements"]
        least, k = (float(Fraction(results["gain"][end])) for end in ("lower", "upper"))
        most, constant = 0.0, 0.0
        for number in range(3):
            ends = {n: rng.choice([q.low, q.high], RUNS) for n, q in walk.uncertain.items() if not q.within}
            values = {
                n: np.where(rng.random(RUNS) < 0.5, x, rng.uniform(x.min(), x.max(), RUNS)) for n, x in ends.items()
            }
            edges = walk.state[0], walk.state[1] - ACROSS
            values["v"] = rng.choice(edges, RUNS) if number == 2 else rng.uniform(*edges, RUNS)
            courses = worst(walk, values, -1 if number == 0 else 1)
            held = [
                {d: np.full((COURSES, RUNS), getattr(walk.uncertain[d], end)) for d in walk.signals}
                for end in ("low", "high")
            ]
            slopes, *others = np.abs(parted(walk, values, [courses, *held]))
            assert np.all(slopes <= k + 1e-6), seed
            most, constant = max(most, float(slopes.max())), max(constant, float(np.max(others)))
            jumps = {d: np.count_nonzero(np.diff(c, axis=0)) for d, c in courses.items()}
            assert sum(jumps.values()) > 0 or number == 2 or kind is swayed, "no course that is not constant was tried"
        assert constant <= k and k <= 1.15 * max(most, least), (k, most)
