"""Rules path, escape and pushed of several states and of stances: runs that refute (proofs/orbit.md (3), (4), (5))."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import replace
from fractions import Fraction
from itertools import pairwise
from typing import Any

from .courses import arithmetic, nearest, numbers
from .cycles import flowing, held_of
from .derive import Derivation
from .flows import Flows
from .graph import Graph
from .numerals import Rejected
from .periodic import ALONE, LONGEST, Pointwise
from .ranges import Ends
from .theorems import Line, Quantities, parted


class Run:
    """The maps followed from a start at which one state is off its target, the others on theirs.

    `names`: the stance at the start, and after every step. `base`: what the start is off instead of the targets.
    """

    def __init__(
        self, stances: Mapping[str, Derivation], names: Sequence[str], flows: Mapping[str, Flows], state: str,
        witness: dict[str, Any], base: Sequence[Ends] | None = None,
    ) -> None:  # fmt: skip
        a, self.names = arithmetic(witness["bits"]), names
        self.maps = {s: Pointwise(stances[s], a, flows.get(s), True) for s in dict.fromkeys(names)}
        held, each = held_of(witness["held"], {n for m in self.maps.values() for n in m.held}), witness["steps"]
        if not isinstance(each, list) or len(each) != len(names) - 1:
            raise Rejected("steps: values for each step of the walk")
        self.values = [self.maps[s].valued(held, w) for s, w in zip(names, each, strict=False)]
        self.targets = {s: m.centre(m.kept(held)) for s, m in self.maps.items()}
        (self.error,) = numbers(witness["start"], 1)
        self.rank = stances[names[0]].states.index(state)
        self.base = self.targets[names[0]] if base is None else base

    def follow(self) -> list[list[Ends]]:
        """The states from the first to the one after the last step."""
        found = [list(self.base)]
        low, high = found[0][self.rank]
        found[0][self.rank] = low + self.error, high + self.error
        for s, values in zip(self.names, self.values, strict=False):
            if not self.maps[s].lasts(found[-1], values):
                raise Rejected("steps: a stance that is not shown to last")
            found.append(self.maps[s].after(found[-1], values))
        return found

    def inside(self, stance: str, states: list[Ends]) -> bool:
        """Whether states are surely in the region of a stance."""
        d = self.maps[stance].d
        regions = [d.region(s)[1] for s in d.states]
        return all(low <= x[0] and x[1] <= high for x, (low, high) in zip(states, regions, strict=True))

    def outside(self, stance: str, states: list[Ends]) -> bool:
        """Whether states are surely not in the region of a stance."""
        d = self.maps[stance].d
        regions = [d.region(s)[0] for s in d.states]
        return any(x[1] < low or high < x[0] for x, (low, high) in zip(states, regions, strict=True))

    def distance(self, states: list[Ends]) -> Fraction:
        """How far the state is at least from its target in the last stance; what is held is the same throughout."""
        x, c = states[self.rank], self.targets[self.names[-1]][self.rank]
        return nearest((x[0] - c[1], x[1] - c[0]))


def path(run: Run, claimed: Quantities) -> None:
    """proofs/orbit.md (3): a trajectory in the region that is still so far from the target after its steps."""
    states = run.follow()
    if not all(run.inside(s, x) for s, x in zip(run.names, states, strict=True)):
        raise Rejected("steps: a state that is not shown to be in the region")
    if not claimed["distance"] <= run.distance(states[-1]) or claimed["steps"] != len(run.values):
        raise Rejected("distance or steps: more than what the path shows")


def escape(run: Run, claimed: Quantities) -> None:
    """proofs/orbit.md (4), (5): a trajectory that ends outside of the region, so that no kept set holds its start."""
    if not run.outside(run.names[-1], run.follow()[-1]):
        raise Rejected("steps: the last state is not shown to be outside of the region")


RULES = {"path": path, "escape": escape, "pushed": escape}


def met(line: Line, stance: str, witness: dict[str, Any]) -> Sequence[Ends]:
    """The state of an orbit in a stance, from which a push leads on; what is held along it stays the same."""
    orbit, at = line.orbit, witness["at"]
    if orbit is None or type(at) is not int or not 0 <= at < len(orbit.states) or orbit.stances[at] != stance:
        raise Rejected("at: the rank of a state of the orbit, in the stance of the push")
    if not isinstance(witness["held"], dict) or any(witness["held"].get(n, x) != x for n, x in orbit.held.items()):
        raise Rejected("held: other values than along the orbit")
    return orbit.states[at]


def followed(
    stances: Mapping[str, Derivation], names: Sequence[str], flows: Mapping[str, Flows], kind: str, proves: str,
    used: list[Line], witness: dict[str, Any], claimed: Quantities,
) -> None:  # fmt: skip
    """Raises Rejected unless a run shows what is claimed of it."""
    states = stances[names[0]].states
    about = re.fullmatch(rf"{kind}\[(\w+)\]", proves, re.ASCII)
    if about is None or about[1] not in states:
        raise Rejected(f"{kind}: of one of the states {', '.join(states)}")
    if len(used) != (kind == "pushed"):
        raise Rejected(f"{kind}: rests on flows of stances, and a push on the orbit before them")
    run = Run(stances, names, flows, about[1], witness, met(used[0], names[0], witness) if used else None)
    key = "push" if kind == "pushed" else "from"
    if not claimed[key] >= abs(run.error):
        raise Rejected(f"{key}: less than the error at the start")
    RULES[kind](run, claimed)


def running(
    d: Derivation, rule: str, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> Line | None:
    """A line about a run of a claim that names no stances; None of another rule, or of a path of one state alone."""
    if rule not in RULES or (rule == "path" and len(d.states) == 1):
        return None
    used, flows = parted(used)
    steps = witness["steps"]
    if not isinstance(steps, list) or len(steps) > LONGEST:
        raise Rejected(f"steps: a list of up to {LONGEST}")
    names = [ALONE] * (len(steps) + 1)
    followed({ALONE: d}, names, {} if flows is None else {ALONE: flows}, rule, proves, used, witness, claimed)
    return Line(rule, proves, (), claimed)


def walking(
    g: Graph, part: str, rule: str, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> Line | None:
    """A line about a run through stances, each step one that is allowed; None of another rule."""
    kind = rule.removeprefix("graph-")
    if kind == rule or kind not in RULES:
        return None
    used, flows = flowing(used)
    if part:
        raise Rejected(f"{rule}: about all stances together")
    names = witness["stances"]
    if not isinstance(names, list) or not 0 < len(names) <= LONGEST + 1 or names[0] not in [*g.stances]:
        raise Rejected(f"stances: a list of 1 to {LONGEST + 1}")
    if any(step not in g.steps for step in pairwise(names)):
        raise Rejected("stances: a step that is not allowed")
    followed(g.stances, names, flows, kind, proves, used, witness, claimed)
    return replace(Line(rule, proves, (), claimed), walk=tuple(names))
