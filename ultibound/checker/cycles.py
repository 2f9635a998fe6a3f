"""Closed walks of stances: orbits that go round them, Jacobians that grow along them (proofs/graph.md (8), (9))."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import replace
from fractions import Fraction
from itertools import pairwise
from math import prod
from typing import Any

from .courses import arithmetic, nearest, numbers
from .derive import Domain
from .flows import Flows
from .graph import Graph, kept, parts, stepped
from .jacobians import Table
from .numerals import Rejected
from .periodic import LONGEST, Pointwise, started, starts_in, widened
from .products import MOST_POINTS, MOST_POWER, at_target, shown, traced
from .ranges import Ends
from .theorems import Line, Orbit, Quantities, require

Sets = dict[str, Domain]  # of every stance
Gains = Mapping[tuple[str, ...], Fraction]  # of every step, or as many as are taken together


def around(
    g: Graph, part: str, rule: str, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> Line | None:
    """A line about a closed walk of stances; None of another rule."""
    rules: dict[str, Callable[..., tuple[Sets, tuple[str, ...], Orbit | bool]]]
    rules = {"graph-orbit": orbit, "graph-periodic": periodic, "graph-product": product}
    if rule not in rules:
        return None
    if part:
        raise Rejected(f"{rule}: not known of one stance or step alone")
    sets, names, more = rules[rule](g, proves, used, witness, claimed)
    line = replace(Line(rule, proves, (), claimed), domains=sets, walk=names)
    return replace(line, orbit=more, on_set=True) if isinstance(more, Orbit) else replace(line, on_set=more)


def closed(g: Graph, names: Any, most: int) -> tuple[str, ...]:
    """The stances of a walk, each a step from the one before, the first from the last."""
    if not isinstance(names, list) or not 0 < len(names) <= most:
        raise Rejected(f"stances: a list of 1 to {most}")
    if any(step not in g.steps for step in pairwise([*names, names[0]])):
        raise Rejected("stances: a step that is not allowed")
    return tuple(names)


def held_of(given: Any, wanted: set[str]) -> dict[str, Any]:
    if not isinstance(given, dict) or set(given) != wanted:
        raise Rejected("held: one value for each held quantity that is met on the way")
    return given


def flowing(used: list[Line]) -> tuple[list[Line], dict[str, Flows]]:
    """Lines used, but for flows of stances at the end, and these."""
    found: dict[str, Flows] = {}
    while used and (flows := used[-1].flows) is not None:
        found[used[-1].part] = flows
        used = used[:-1]
    return used, found


class Walk:
    """The maps of stances followed around a closed walk, with the values that a witness states."""

    def __init__(self, g: Graph, witness: dict[str, Any], flows: dict[str, Flows]) -> None:
        self.names, a = closed(g, witness["stances"], LONGEST), arithmetic(witness["bits"])
        self.maps = {s: Pointwise(g.stances[s], a, flows.get(s)) for s in dict.fromkeys(self.names)}
        held = held_of(witness["held"], {n for m in self.maps.values() for n in m.held})
        each = witness["steps"]
        if not isinstance(each, list) or len(each) != len(self.names):
            raise Rejected("steps: values for each stance of the walk")
        self.values = [self.maps[s].valued(held, w) for s, w in zip(self.names, each, strict=True)]
        self.centres = {s: self.maps[s].centre(values) for s, values in zip(self.names, self.values, strict=True)}

    def ways(self, steps: int) -> list[tuple[str, ...]]:
        """The steps of the walk, so many of them taken together."""
        names = [*self.names, self.names[0]]
        return [tuple(names[k : k + steps + 1]) for k in range(0, len(self.names), steps)]

    def follow(self, start: list[Ends]) -> list[list[Ends]]:
        """The states from the first to the one after the last step, which is in the first stance again."""
        found = [start]
        for s, values in zip(self.names, self.values, strict=True):
            found.append(self.maps[s].after(found[-1], values))
        return found

    def farthest(self, states: list[list[Ends]], off: list[list[Fraction]] | None = None, every: int = 1) -> Quantities:
        """The largest error of each state in each stance, of an orbit no farther than `off` from what was followed.

        All held values are the same throughout, and so are the targets. `every`: of the states at the ends of so many
        steps taken together.
        """
        found: Quantities = {}
        names = self.names[::every]
        off = [[Fraction(0)] * len(states[0])] * len(names) if off is None else off
        for name, xs, far in zip(names, states[:-1:every], off, strict=True):
            for s, x, c, y in zip(self.maps[name].d.states, xs, self.centres[name], far, strict=True):
                least = nearest((x[0] - c[1], x[1] - c[0])) - y
                found[f"{name}:{s}"] = max(least, found.get(f"{name}:{s}", least))
        return found


def nearby(walk: Walk, sets: Sets, gains: Gains, states: list[list[Ends]], every: int) -> list[list[Fraction]]:
    """How far the orbit may be from the states at the ends of so many steps taken together: proofs/graph.md (8b)."""
    k = [gains[way] for way in walk.ways(every)]
    if not 0 <= prod(k) < 1:
        raise Rejected("the product of the gains around the walk is not below 1")
    norms = [norm for s in walk.names[::every] if (norm := sets[s].metric) is not None]
    ends = [max(y[1] - x[0], x[1] - y[0]) for x, y in zip(states[0], states[-1], strict=True)]
    near, found = norms[0].length(ends) / (1 - prod(k)), list[list[Fraction]]()
    for norm, gain in zip(norms, k, strict=True):
        found.append([norm.support(i) * near for i in range(len(ends))])
        near *= gain
    return found


def orbit(
    g: Graph, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> tuple[Sets, tuple[str, ...], Orbit]:
    """proofs/graph.md (8a): of one state, an interval whose ends a round leads to opposite sides of themselves."""
    used, flows = flowing(used)
    if proves != "orbit" or len(used) != 1 or len(g.first.states) != 1:
        raise Rejected("an orbit of one state rests on the sets that are kept")
    sets, walk = kept(used), Walk(g, witness, flows)
    a, b = numbers(witness["start"], 2)
    first, (centre,) = walk.names[0], walk.centres[walk.names[0]]
    far = [max(b - centre[0], centre[1] - a)]
    if not a <= b or not starts_in(g.stances[first], sets[first], far, [(a, b)]):
        raise Rejected("start: not shown to be in the set")
    low, high = (walk.follow([(x, x)])[-1][0] for x in (a, b))
    if not ((low[0] >= a and high[1] <= b) or (low[1] <= a and high[0] >= b)):
        raise Rejected("start: the ends are not led to opposite sides of themselves")
    states = walk.follow([(a, b)])
    reached(claimed, walk.farthest(states))
    return sets, walk.names, Orbit(walk.names, tuple(map(tuple, states[:-1])), witness["held"])


def periodic(
    g: Graph, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> tuple[Sets, tuple[str, ...], Orbit]:
    """proofs/graph.md (8b): a state that a contracting round leads nearly back to itself has an orbit nearby."""
    used, flows = flowing(used)
    sets = kept(used)
    require(proves, "periodic", used[1:], [("slope", "slope")] * len(g.walks))
    parts(used[1:], list(g.along))
    stepped(g.ends, used[1:], sets)
    walk, first = Walk(g, witness, flows), g.stances[witness["stances"][0]]
    errors = started(first, witness["start"])
    name = walk.names[0]
    start = [(low + e, high + e) for (low, high), e in zip(walk.centres[name], errors, strict=True)]
    if not starts_in(first, sets[name], errors, start):
        raise Rejected("start: not shown to be in the set")
    gains = {way: line.concludes["gain"] for way, line in zip(g.walks, used[1:], strict=True)}
    states, n = walk.follow(start), g.statement.horizon
    if len(walk.names) % n:
        raise Rejected("steps: a whole number of horizons")
    off = nearby(walk, sets, gains, states, n)
    reached(claimed, walk.farthest(states, off, n))
    found = tuple(widened(x, y) for x, y in zip(states[:-1:n], off, strict=True))
    return sets, walk.names, Orbit(walk.names[::n], found, witness["held"])


def reached(claimed: Quantities, distances: Quantities) -> None:
    """Raises Rejected unless what is claimed of every stance and state is no more than the orbit shows."""
    if set(claimed) != set(distances):
        raise Rejected("concludes: a distance for each state in each stance on the way")
    for key, far in distances.items():
        if not claimed[key] <= far:
            raise Rejected(f"{key}: more than what the orbit shows")


def product(
    g: Graph, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> tuple[Sets, tuple[str, ...], bool]:
    """proofs/graph.md (9): Jacobians around a closed walk, whose product shows a gain. Last: whether off a target."""
    used, flows = flowing(used)
    if proves != "slopes" or g.statement.horizon != 1:
        raise Rejected("a product of slopes proves slopes, of single steps")
    sets = kept(used[:1]) if len(used) == 1 else about(g, used)
    names, power = closed(g, witness["stances"], MOST_POINTS), witness["power"]
    if type(power) is not int or not 0 < power <= MOST_POWER:
        raise Rejected(f"power: 1 to {MOST_POWER}")
    bits = witness["bits"]
    tables = {s: Table(g.stances[s], "slopes", sets[s], bits, flows.get(s)) for s in dict.fromkeys(names)}
    points = placed(g, tables, names, witness)
    trace = traced([tables[s].at(at) for s, at in zip(names, points, strict=True)], power)
    if not shown(trace, claimed["lower"], len(points) * power, len(g.first.states)):
        raise Rejected("lower: the trace is not shown to be so large")
    places = [(s, tables[s].place(at)) for s, at in zip(names, points, strict=True)]
    return sets, names, not all(at_target(g.stances[s], sets[s], tables[s], x) for s, x in places)


def about(g: Graph, used: list[Line]) -> Sets:
    """The ball of every stance, where no sets are shown to be kept."""
    if [x.proves for x in used] != ["ball"] * len(g.stances):
        raise Rejected("a product rests on the sets that are kept, or the ball of every stance")
    parts(used, list(g.stances))
    return {x.part: x.domain for x in used if x.domain is not None}


def placed(g: Graph, tables: dict[str, Table], names: Iterable[str], witness: dict[str, Any]) -> list[dict[str, Any]]:
    """The points of a product, what is held the same at all of them."""
    held = {s: {v.name for v in t.variables if held_in(g, v.name)} for s, t in tables.items()}
    same, points = held_of(witness["held"], {n for several in held.values() for n in several}), witness["points"]
    names = list(names)
    if not isinstance(points, list) or len(points) != len(names) or not all(isinstance(x, dict) for x in points):
        raise Rejected("points: one for each stance of the walk")
    if any(set(x) & held[s] for s, x in zip(names, points, strict=True)):
        raise Rejected("points: what is held is stated once")
    return [x | {n: same[n] for n in held[s]} for s, x in zip(names, points, strict=True)]


def held_in(g: Graph, name: str) -> bool:
    quantity = g.statement.uncertain.get(name)
    return quantity is not None and quantity.held
