"""What the lines about one stance, and about one step from it, amount to (proofs/graph.md (2), (6), (7))."""

from __future__ import annotations

from fractions import Fraction
from typing import TYPE_CHECKING

from .derive import Domain
from .graph import Graph
from .jacobians import OF_ROUTE
from .outcomes import SeveralResults
from .results import NOTHING, Results, Span, greater
from .rules import Rejected

if TYPE_CHECKING:
    from .graph_outcomes import GraphResults


class StanceResults(SeveralResults):
    """One stance: its set and norm, and what all stances together prove of its states."""

    def __init__(self, whole: GraphResults, graph: Graph, name: str, kept: dict[str, Domain] | None) -> None:
        self.proof, self.variant, self.part, self.needed = whole.proof, whole.variant, name, set[int]()
        self.all = whole
        self.derivation = graph.stances[name]
        self.statement, self.states = self.derivation.statement, self.derivation.states
        self.state, self.any = self.states[0], self.statement.shrink
        balls = [x for rule in ("largest-ball", "smaller-ball") if (x := self.one(rule, "ball")) is not None]
        if len(balls) != 1 or balls[0].domain is None or balls[0].domain.metric is None:
            raise Rejected(f"{name}: the proof has not exactly one ball about the target")
        self.ball, self.metric = balls[0], balls[0].domain.metric
        self.domain = balls[0].domain if kept is None else kept[name]
        if self.domain.metric != self.metric:
            raise Rejected(f"{name}: the ball and the invariant set are of different metrics")
        self.way = self.domain  # one step at a time
        self.lasting = self.derivation.motion is None or self.above(1)
        self.unsupported = 0 if self.lasting else 1
        self.lasts = self.supported()
        self.centres = {s: Span(*x) for s, x in zip(self.states, balls[0].domain.targets, strict=True)}
        self.radius = Span(self.ball.concludes["radius"], self.ball.concludes.get("outer"))
        self.gain = self.residual = NOTHING
        self.bound = None
        self.closest: Fraction | None = None
        self.sharp = self.push = None
        self.orbits: dict[str, Fraction | None] = dict.fromkeys(self.states)

    def leaves_for(self, after: StanceResults) -> bool:
        """Whether a point leaves the region of the stance that follows."""
        for s in self.states:
            (low, high), _ = after.derivation.region(s)
            for n, x in self.lines("point", f"image[{s}]"):
                if x.concludes["lower"] > high or x.concludes["upper"] < low:
                    self.needed.add(n)
                    return True
        return False

    def stated(self) -> bool:
        """Whether the claim itself fixes the norm: of one state it is the error."""
        return len(self.states) == 1 or super().stated()

    def placed(self, kind: str | None, whole: bool, settled: bool, partial: bool) -> None:
        """What the sets of all stances together are."""
        self.kind, self.whole, self.settled, self.partial = kind, whole, settled, partial
        self.edges = {s: self.reached(s) for s in self.states if kind == "region"}
        self.out = {s: self.led_out(s) for s in self.states}
        self.radii = {s: self.radius_along(s) for s in self.states}

    def led_out(self, state: str) -> Fraction | None:
        """By runs through stances that start in this one."""
        lines = self.all.lines("graph-escape", f"escape[{state}]")
        return self.nearest_out([(n, x) for n, x in lines if x.walk[0] == self.part])

    def pushed_out(self, state: str) -> Fraction | None:
        """By pushes in this stance."""
        lines = self.all.lines("graph-pushed", f"pushed[{state}]")
        lasting = all(x.lasting for x in self.all.each.values())
        return self.nearest_out([(n, x) for n, x in lines if lasting and x.walk[0] == self.part], "push")

    def in_norm(self) -> Fraction | None:
        """The least bound in the norm of the stance."""
        return self.closest

    def bounded(self, in_norm: list[Fraction], by_state: dict[str, Fraction]) -> None:
        """What is proved of the long run in this stance: in its norm by each route, and by comparison."""
        self.closest, self.bounds = min(in_norm, default=None), dict(by_state)
        for i, s in enumerate(self.states):
            if self.closest is not None:
                by_norm = self.closest * self.metric.support(i)
                self.bounds[s] = min(by_norm, self.bounds.get(s, by_norm))
        self.knocked = {s: self.pushed_out(s) for s in self.states}
        self.pushes = {s: self.pushed_along(s) for s in self.states}


class StepResults(Results):
    """Gain and residual of a step, or of several taken together, by a route, proved and surely taken: proofs/graph.md
    (2), (7), (10)."""

    def __init__(self, part: str, before: StanceResults, after: StanceResults, route: str) -> None:
        self.proof, self.variant = before.proof, before.variant
        self.part, self.needed = part, set[int]()
        self.before, line = before, self.one(route, route)
        self.shown = None if line is None else (line.concludes["gain"], line.concludes["residual"])
        if line is not None and (line.domain != before.domain or line.metric != after.metric):
            raise Rejected(f"{self.part}: gain and residual refer to another set or norm")
        k, e = self.shown or (None, None)
        slopes, rest = OF_ROUTE[route]
        # slopes by the state are those at constant signals only: proofs/stance.md (5)
        loose = line is not None and before.derivation.loose(route)
        self.gain = Span(self.stretched(slopes), None if loose else k)
        self.missed = self.stretched("misses")  # what the target itself misses, every route has to allow for
        self.residual = Span(greater(self.missed, self.stretched(rest)), e)

    def stretched(self, proves: str) -> Fraction | None:
        """The largest norm surely taken."""
        lines = self.lines("stretch", proves) if self.before.lasting else []
        return self.surely((x.concludes["lower"], n) for n, x in lines if x.domain == self.before.domain)


def most(spans: list[Span]) -> Span:
    """The largest of several quantities: from below by any of them, from above by all."""
    lowers = [x.lower for x in spans if x.lower is not None]
    uppers = [x.upper for x in spans if x.upper is not None]
    return Span(max(lowers, default=None), max(uppers) if spans and len(uppers) == len(spans) else None)


def least(spans: list[Span]) -> Span:
    """The smallest of several quantities: from above by any of them, from below by all."""
    lowers = [x.lower for x in spans if x.lower is not None]
    uppers = [x.upper for x in spans if x.upper is not None]
    return Span(min(lowers) if spans and len(lowers) == len(spans) else None, min(uppers, default=None))


def hull(spans: list[Span]) -> Span:
    """Ends between which all of them lie."""
    lowers = [x.lower for x in spans if x.lower is not None]
    uppers = [x.upper for x in spans if x.upper is not None]
    return Span(min(lowers) if len(lowers) == len(spans) else None, max(uppers) if len(uppers) == len(spans) else None)
