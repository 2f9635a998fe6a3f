"""Rule periodic: orbits of several states, there by contraction (proofs/several.md (6))."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from typing import Any

from .courses import arithmetic, nearest, valued
from .derive import Derivation, Domain, Meaning, Ranged
from .exact import Exact
from .flows import Flows
from .jacobians import together
from .motion import PHASE, supported
from .numerals import Rejected, quantity
from .ranges import Ends, Evaluator
from .reals import Scaled
from .theorems import Line, Orbit, Quantities, parted

LONGEST = 1000
ALONE = ""  # the one stance of a claim that names none


class Pointwise:
    """The map and the target of every state, ready to be followed from points or narrow enclosures."""

    def __init__(self, d: Derivation, a: Scaled | Exact, flows: Flows | None, timed: bool = False) -> None:
        """`timed`: with the duration of a stance, which otherwise the set is shown to keep above 0."""
        self.d, self.a, self.spans = d, a, variables_of(d, timed)
        steps, targets, times = meanings(d, timed)
        self.order = [v.name for v in together([*steps, *targets, *times])]
        self.step, self.target, self.time = (
            [Evaluator(d.terms, m.root, "", self.order, d.statement.libraries, a, flows) for m in several]
            for several in (steps, targets, times)
        )
        self.held = {n for n, q in d.statement.uncertain.items() if q.held and n in self.spans}

    def valued(self, held: dict[str, Any], fresh: Any) -> dict[str, Ends]:
        """What a witness states for one step; what is held, for all of them."""
        if not isinstance(fresh, dict) or set(fresh) != set(self.spans) - self.held:
            raise Rejected("steps: one value for each quantity that is not held, a step")
        return {n: valued(self.spans[n], held[n] if n in self.held else fresh[n]) for n in self.spans}

    def kept(self, held: dict[str, Any]) -> dict[str, Ends]:
        """What a witness states of what is held."""
        return {n: valued(self.spans[n], held[n]) for n in sorted(self.held)}

    def centre(self, values: dict[str, Ends]) -> list[Ends]:
        """The targets, which rest on what is held alone."""
        return self._run(self.target, dict.fromkeys(self.order, (Fraction(0), Fraction(0))) | values)

    def after(self, states: list[Ends], values: dict[str, Ends]) -> list[Ends]:
        return self._run(self.step, dict(zip(self.d.states, states, strict=True)) | values)

    def lasts(self, states: list[Ends], values: dict[str, Ends]) -> bool:
        """Whether a stance, where it is `timed`, surely takes its time: proofs/stance.md (4)."""
        times = self._run(self.time, dict(zip(self.d.states, states, strict=True)) | values)
        return all(low > 0 for low, _ in times)

    def _run(self, evaluators: list[Evaluator], values: dict[str, Ends]) -> list[Ends]:
        box = [values[n] for n in self.order]
        return [self.a.ends(e.run(box, False).v) for e in evaluators]


class Round:
    """The map followed from a start that a witness states as errors, with its held and fresh values."""

    def __init__(self, d: Derivation, witness: dict[str, Any], flows: Flows | None) -> None:
        self.d, self.maps = d, Pointwise(d, arithmetic(witness["bits"]), flows)
        given, each, start = witness["held"], witness["steps"], witness["start"]
        if not isinstance(given, dict) or set(given) != self.maps.held:
            raise Rejected("held: one value for each held quantity the map and its target depend on")
        if not isinstance(each, list) or not 0 < len(each) <= LONGEST:
            raise Rejected(f"steps: a list of 1 to {LONGEST}")
        self.values = [self.maps.valued(given, w) for w in each]
        self.errors = started(d, start)
        self.centre = self.maps.centre(self.values[0])

    def follow(self) -> list[list[Ends]]:
        """The states from the first to the one after the last step."""
        found = [[(low + e, high + e) for (low, high), e in zip(self.centre, self.errors, strict=True)]]
        for values in self.values:
            found.append(self.maps.after(found[-1], values))
        return found


def started(d: Derivation, start: Any) -> list[Fraction]:
    """The errors at the start of a round, as a witness states them."""
    if not isinstance(start, dict) or set(start) != set(d.states):
        raise Rejected("start: an error of each state")
    return [quantity(start[s], "start") for s in d.states]


def starts_in(d: Derivation, domain: Domain, errors: list[Fraction], start: list[Ends]) -> bool:
    """Whether a start is surely in the set."""
    if domain.ball:
        return domain.metric is not None and domain.metric.most(errors) <= domain.radius
    regions = [d.region(s)[1] for s in d.states]
    return all(low <= x[0] and x[1] <= high for x, (low, high) in zip(start, regions, strict=True))


def meanings(d: Derivation, timed: bool = False) -> tuple[list[Meaning], list[Meaning], list[Meaning]]:
    """The map and the target of each state; `timed`, and of a continuous stance: its duration."""
    names, times = d.names(), list[Meaning]()
    found = [[d.over(names.of(f"{x}({s})")) for s in d.states] for x in ("next", "target")]
    if timed and d.motion is not None:
        times = [d.over(supported(names, d.motion, d.motion.duration, d.terms.put("variable", (), PHASE)))]
    return found[0], found[1], times


def variables_of(d: Derivation, timed: bool = False) -> dict[str, Ranged]:
    """What a round has to state values of; a signal that several states answer is constant."""
    steps, targets, times = meanings(d, timed)
    found = {v.name: v for v in together([*steps, *targets, *times])}
    for name, (_, inside) in d.signals(set(found)).items():
        found[name] = replace(found[name], inside=inside)
    return {n: v for n, v in found.items() if n not in d.states}


def periodic(
    d: Derivation, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> tuple[Domain, Orbit]:
    """A state that a round leads nearly back to itself has a periodic orbit nearby: there, the errors are as large."""
    used, flows = parted(used)
    if proves != "periodic" or [x.proves for x in used] != ["invariant", "slope"]:
        raise Rejected("a periodic orbit rests on the invariant set, and the gain on it")
    domain, k = used[0].domain, used[1].concludes["gain"]
    if domain is None or domain.metric is None or used[1].domain != domain or not 0 <= k < 1:
        raise Rejected("the gain is not below 1, or refers to another set")
    if set(claimed) != set(d.states):
        raise Rejected("concludes: a distance for each state")
    norm, course = domain.metric, Round(d, witness, flows)
    states, n = course.follow(), d.statement.horizon
    rounds, rest = divmod(len(course.values), n)
    if rest:
        raise Rejected("steps: a whole number of horizons")
    if not starts_in(d, domain, course.errors, states[0]):
        raise Rejected("start: not shown to be in the set")
    ends = [max(b[1] - a[0], a[1] - b[0]) for a, b in zip(states[0], states[-1], strict=True)]
    near = norm.length(ends) / (1 - k**rounds)
    for i, s in enumerate(d.states):
        errors = [(x[i][0] - course.centre[i][1], x[i][1] - course.centre[i][0]) for x in states[:-1:n]]
        if not claimed[s] <= max(map(nearest, errors)) - norm.support(i) * near:
            raise Rejected(f"{s}: more than what the orbit shows")
    off = [norm.support(i) * near for i in range(len(d.states))]
    found = tuple(widened(x, off) for x in states[:-1:n])
    return domain, Orbit((ALONE,) * len(found), found, witness["held"])


def widened(states: list[Ends], off: list[Fraction]) -> tuple[Ends, ...]:
    """What surely holds a state that is no farther off than so."""
    return tuple((low - y, high + y) for (low, high), y in zip(states, off, strict=True))
