"""Points and courses: values of the variables that a witness states, and where the map leads from there."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from .derive import Derivation, Domain, Meaning, Ranged
from .exact import Exact
from .flows import Flows
from .numerals import Rejected, quantity
from .ranges import Box, Ends, Evaluator
from .reals import Scaled
from .theorems import Line, Quantities, parted

BITS = (24, 4096)
LONGEST = 100_000


def arithmetic(bits: Any) -> Scaled | Exact:
    if type(bits) is not int or (bits and not BITS[0] <= bits <= BITS[1]):
        raise Rejected(f"bits: 0 for exact rationals, or {BITS[0]} to {BITS[1]}")
    return Scaled(bits) if bits else Exact()


def place(meaning: Meaning, at: Any) -> Box:
    """A point inside the domain: an exact value a variable, `#rank` for a finite list."""
    if not isinstance(at, dict) or set(at) != {v.name for v in meaning.variables}:
        raise Rejected("at: one value for each variable of the obligation")
    return [valued(v, at[v.name]) for v in meaning.variables]


def valued(v: Ranged, text: Any) -> Ends:
    if v.listed:
        ranks = {f"#{k}": cell for k, cell in enumerate(v.cells)}
        if not isinstance(text, str) or text not in ranks:
            raise Rejected(f"at.{v.name}: # and the rank of a listed value")
        return ranks[text]
    x = quantity(text, f"at.{v.name}")
    if not v.inside[0] <= x <= v.inside[1]:
        raise Rejected(f"at.{v.name}: outside the range")
    return x, x


class Course:
    """The map followed from an interval of states, step by step, with held and fresh values a witness states."""

    def __init__(self, d: Derivation, witness: dict[str, Any], flows: Flows | None) -> None:
        self.d, self.a, self.flows = d, arithmetic(witness["bits"]), flows
        held = {n for n, q in d.statement.uncertain.items() if q.held}
        self.step, self.away = meanings(d)
        spans = course_variables(d)
        given, each = witness["held"], witness["steps"]
        if not isinstance(given, dict) or set(given) != {n for n in spans if n in held}:
            raise Rejected("held: one value for each held quantity the course depends on")
        if not isinstance(each, list) or not 0 < len(each) <= LONGEST:
            raise Rejected(f"steps: a list of 1 to {LONGEST}")
        fresh = {n for n in spans if n not in held}
        if any(not isinstance(w, dict) or set(w) != fresh for w in each):
            raise Rejected("steps: one value for each quantity that is not held, a step")
        same = {n: valued(spans[n], text) for n, text in given.items()}
        self.values = [same | {n: valued(spans[n], text) for n, text in w.items()} for w in each]
        self.maps = {m.root: self._map(m) for m in (self.step, self.away)}

    def _map(self, m: Meaning) -> Evaluator:
        names = [v.name for v in m.variables]
        return Evaluator(self.d.terms, m.root, "", names, self.d.statement.libraries, self.a, self.flows)

    def at(self, m: Meaning, x: Ends, values: dict[str, Ends]) -> Ends:
        box = [x if v.name == self.d.state else values[v.name] for v in m.variables]
        low, high = self.a.ends(self.maps[m.root].run(box, False).v)
        return low, high

    def follow(self, x: Ends) -> list[Ends]:
        """The states from the first to the one after the last step."""
        found = [x]
        for values in self.values:
            found.append(self.at(self.step, found[-1], values))
        return found

    def errors(self, states: list[Ends]) -> list[Ends]:
        """x − x*; all held values are the same throughout."""
        return [self.at(self.away, x, self.values[0]) for x in states]

    def starts_in(self, domain: Domain | None, x: Ends) -> bool:
        """Whether states are surely in the set."""
        if domain is None or domain.radii:
            return False
        if domain.ball:
            low, high = self.errors([x])[0]
            return -domain.radius <= low and high <= domain.radius
        _, inner = self.d.region()
        return inner[0] <= x[0] and x[1] <= inner[1]


def meanings(d: Derivation) -> tuple[Meaning, Meaning]:
    """The step-to-step map, and x − x*."""
    names = d.names()
    away = d.terms.put("sub", (names.of(d.state), names.of(f"target({d.state})")))
    return d.over(names.of(f"next({d.state})")), d.over(away)


def course_variables(d: Derivation) -> dict[str, Ranged]:
    """What a course has to state values of."""
    return {v.name: v for meaning in meanings(d) for v in meaning.variables if v.name != d.state}


def numbers(texts: Any, count: int) -> list[Fraction]:
    if not isinstance(texts, list) or len(texts) != count:
        raise Rejected(f"start: a list of {count}")
    return [quantity(t, "start") for t in texts]


def orbit(d: Derivation, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities) -> Domain | None:
    """proofs/orbit.md (1): the map followed from both ends of an interval brackets a periodic orbit."""
    used, flows = parted(used)
    if proves != "orbit" or len(used) != 1 or used[0].proves != "invariant":
        raise Rejected("an orbit rests on the invariant set")
    a, b = numbers(witness["start"], 2)
    course = Course(d, witness, flows)
    if not a <= b or not course.starts_in(used[0].domain, (a, b)):
        raise Rejected("start: not shown to be in the set")
    states = course.follow((a, b))
    first, last = course.follow((a, a))[-1], course.follow((b, b))[-1]
    if not ((first[0] >= a and last[1] <= b) or (first[1] <= a and last[0] >= b)):
        raise Rejected("start: the ends are not led to opposite sides of themselves")
    if not claimed["distance"] <= max(nearest(e) for e in course.errors(states[:-1])):
        raise Rejected("distance: more than what the orbit shows")
    if not (
        claimed["highest"] <= max(x[0] for x in states[:-1]) and claimed["lowest"] >= min(x[1] for x in states[:-1])
    ):
        raise Rejected("highest or lowest: more than what the orbit shows")
    return used[0].domain


def path(d: Derivation, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities) -> Domain | None:
    """proofs/orbit.md (2): a trajectory from a start in the set."""
    used, flows = parted(used)
    if proves != "path" or len(used) != 1 or used[0].proves != "invariant":
        raise Rejected("a path rests on the invariant set")
    (x,) = numbers(witness["start"], 1)
    course = Course(d, witness, flows)
    if not course.starts_in(used[0].domain, (x, x)):
        raise Rejected("start: not shown to be in the set")
    states = course.follow((x, x))
    start, end = course.errors([states[0], states[-1]])
    if not claimed["from"] >= max(-start[0], start[1]):
        raise Rejected("from: less than the error at the start")
    if not claimed["distance"] <= nearest(end) or claimed["steps"] != len(witness["steps"]):
        raise Rejected("distance or steps: more than what the path shows")
    return used[0].domain


def nearest(error: Ends) -> Fraction:
    """The least magnitude in an interval."""
    return max(error[0], -error[1], Fraction(0))
