"""What the lines of a proof about several states amount to: one metric, a figure for each state (proofs/several.md)."""

from __future__ import annotations

from fractions import Fraction
from itertools import product
from typing import Any

from .grammar import Ends, constant
from .jacobians import OF_COMPARISON, OF_ROUTE
from .matrices import Metric, dot
from .results import NOTHING, Outcome, Results, Route, Span, compared, greater, less, opposed, smaller, verdict
from .rules import Proof, Rejected
from .theorems import OWN, Variant, ends


class SeveralResults(Results):
    """Everything `results` may claim of a claim of several states."""

    def __init__(self, proof: Proof, variant: Variant = OWN) -> None:
        self.proof, self.variant, self.needed = proof, variant, set[int]()
        self.derivation = proof.about(variant)
        self.statement, self.states = self.derivation.statement, self.derivation.states
        self.state, self.any = self.states[0], self.statement.shrink
        balls = [x for rule in ("largest-ball", "smaller-ball") if (x := self.one(rule, "ball")) is not None]
        if len(balls) != 1 or balls[0].domain is None or balls[0].domain.metric is None:
            raise Rejected("the proof has not exactly one ball about the target")
        (ball,) = balls
        rules = ("invariant-region", "invariant-ball", "invariant-rows", "invariant-vertices")
        invariant = next((x for rule in rules if (x := self.one(rule, "invariant")) is not None), None)
        self.domain = invariant.domain if invariant is not None else ball.domain
        self.metric: Metric = balls[0].domain.metric
        if self.domain is None or self.domain.metric != self.metric:
            raise Rejected("the ball and the invariant set are of different metrics")
        self.way = self.on_the_way()
        self.supported_from(invariant)
        self.partial = not self.settled and (ball.rule == "smaller-ball" or invariant is not None or not self.lasting)
        self.centres = {s: Span(*x) for s, x in zip(self.states, balls[0].domain.targets, strict=True)}
        self.radius = Span(ball.concludes["radius"], ball.concludes.get("outer"))
        self.edge, self.orbit, self.room = self.radius.upper, None, None
        self.missed = None if self.partial else self.stretched("misses")  # what every route has to allow for
        self.kind, self.whole = self.set_found(invariant if self.settled else None, ball)
        self.edges = {s: self.reached(s) for s in self.states if self.kind == "region"}
        self.growth = {x: self.grown(matrices[0]) for x, matrices in OF_ROUTE.items()}
        shown = [x for x in OF_ROUTE if self.one(x, x) is not None]
        self.routes = {} if self.partial else {x: self.of_route(x) for x in shown}
        self.reported = self.chosen()
        self.best = self.sharp = None
        self.orbits = {s: self.farthest(s) for s in self.states}
        self.bounds = self.bounds_by_state()
        self.lift(self.within())
        route = self.routes.get(self.reported, Route())
        self.gain, self.residual, self.bound = self.slopes(self.reported), route.residual, route.bound
        self.push = None
        self.knocked = {s: self.pushed_out(s) for s in self.states}
        self.pushes = {s: self.pushed_along(s) for s in self.states}
        self.out = {s: self.led_out(s) for s in self.states}
        self.radii = {s: self.radius_along(s) for s in self.states}
        numbered = enumerate(self.statement.requirements, 1)
        self.requirements = [self.required(n, r) for n, r in numbered if not variant.over or n == variant.over]

    def escapes(self) -> bool:
        """Whether a point leaves the region in some state."""
        for s in self.states:
            (low, high), _ = self.derivation.region(s)
            for n, x in self.lines("point", f"image[{s}]"):
                if x.concludes["lower"] > high or x.concludes["upper"] < low:
                    self.needed.add(n)
                    return True
        return False

    def reached(self, s: str) -> Span:
        """The distance of the target of a state from the edge of its region: proved from below, taken from above."""
        (low, high), (inner_low, inner_high) = self.derivation.region(s)
        centre = self.centres[s]
        if centre.lower is None or centre.upper is None:
            return NOTHING
        found = [
            (min(high - x.concludes["lower"], x.concludes["upper"] - low), n)
            for n, x in self.lines("point", f"target[{s}]")
        ]
        if found:
            self.needed.add(min(found)[1])
        return Span(min(centre.lower - inner_low, inner_high - centre.upper), min(found)[0] if found else None)

    def of_route(self, name: str) -> Route:
        """proofs/several.md (2), proofs/split.md (3): gain and residual in the metric, and the bound they give."""
        line, (slopes, rest) = self.one(name, name), OF_ROUTE[name]
        if line is None or line.domain != self.domain:
            raise Rejected(f"gain and residual of {name} refer to another set")
        k, least = greater(self.stretched(slopes), self.growth[name][0]), greater(self.missed, self.stretched(rest))
        gain, residual = Span(k, line.concludes["gain"]), Span(least, line.concludes["residual"])
        bounded = self.one("ultimate-bound", f"bound[{name}]")
        if bounded is None:
            return Route(gain, residual)
        lower = None if k is None or least is None or not k < 1 else least / (1 - k)
        return Route(gain, residual, Span(lower, bounded.concludes["bound"]))

    def contraction(self) -> Span:
        """The best gain of the routes: a lower end where each is known not to be below it (attained.md (3))."""
        lowers = [self.taken(x) for x in self.contracting()]
        uppers = [k for x in self.routes if (k := self.slopes(x).upper) is not None]
        return Span(least_of(lowers), min(uppers, default=None))

    def taken(self, route: str, anywhere: bool = False) -> Fraction | None:
        """What the gain of a route is at least: in the norm of the proof, or `anywhere`, whatever the norm and set."""
        growth, everywhere = self.growth[route]
        known = not self.partial and (self.stated() or not anywhere)
        here = greater(self.stretched(OF_ROUTE[route][0]), growth) if known else None
        return greater(here, growth) if everywhere else here

    def stretched(self, proves: str) -> Fraction | None:
        """The largest norm surely taken."""
        lines = self.lines("stretch", proves) if self.lasting else []
        return self.surely((x.concludes["lower"], n) for n, x in lines if x.domain == self.domain)

    def grown(self, slopes: str) -> tuple[Fraction | None, bool]:
        """proofs/several.md (7): the gain that a product of Jacobians shows in any norm, and whether in any set too."""
        lines = [x for x in self.lines("product", slopes) if self.lasting and x[1].domain == self.domain]
        found = [(x.concludes["lower"], not x.on_set or self.kind == "region", n) for n, x in lines]
        if not found:
            return None, False
        lower, everywhere, number = max(found)
        self.needed.add(number)
        return lower, everywhere

    def bounds_by_state(self) -> dict[str, Fraction]:
        """proofs/several.md (2), (3), (8): the least bound of each state, by the norm, by comparison, by polytopes."""
        lines = [x for proves in OF_COMPARISON for x in self.lines("componentwise", proves)]
        lines += self.lines("attracting", "attracting")
        if any(line.domain is None or self.domain not in (line.domain, line.domain.of) for _, line in lines):
            raise Rejected("the comparison refers to another set")
        if not self.settled:
            return {}
        found: dict[str, Fraction] = {}
        for i, s in enumerate(self.states):
            each = [(line.concludes[s], n) for n, line in lines]
            if (bound := self.in_norm()) is not None:
                each.append((bound * self.metric.support(i), 0))
            if each:
                found[s], number = min(each)
                self.needed.update([number] if number else [])
        return found

    def in_norm(self) -> Fraction | None:
        """The least bound of a route."""
        bounds = [r.bound.upper for r in self.routes.values() if r.bound is not None and r.bound.upper is not None]
        return min(bounds, default=None)

    def lift(self, least: Fraction | None) -> None:
        super().lift(least)
        if self.settled and least is not None and not self.phased(least):
            far = self.lifted(least)
            wide = {s: self.metric.support(i) for i, s in enumerate(self.states)}
            self.bounds = {} if far is None else {s: x * far for s, x in wide.items()}

    def farthest(self, s: str) -> Fraction | None:
        """How far a periodic orbit surely takes a state, again and again: proofs/several.md (6)."""
        lines = self.lines("periodic", "periodic") if self.lasting else []
        return self.surely((line.concludes[s], n) for n, line in lines)

    def within(self) -> Fraction | None:
        """The least bound in the metric's norm."""
        each = [] if (bound := self.in_norm()) is None else [bound]
        for n, led in self.lines("invariant-vertices", "invariant"):  # proofs/polytope.md (5)
            if self.settled and led.domain == self.domain:
                self.needed.add(n)
                each.append(led.concludes["bound"])
        if len(self.bounds) == len(self.states):
            each.append(self.metric.length([self.bounds[s] for s in self.states]))
        return min(each, default=None)

    def radius_along(self, s: str) -> Span | None:
        """How far a state may start from its target: a section of the set (proofs/several.md (5))."""
        out = self.out[s]
        if not self.settled:
            return None if out is None else Span(None, out)
        if self.kind == "region":
            return self.edges[s]
        least, most = self.metric.unit(self.states.index(s))
        lower = None if self.radius.lower is None else self.radius.lower / most
        return Span(lower, smaller(out, None if self.radius.upper is None else self.radius.upper / least))

    def pushed_along(self, s: str) -> Span | None:
        """What is left of the set along a state after settling: proofs/several.md (5)."""
        if not self.whole:
            return None
        if self.kind == "region":
            room, edge = self.bounds.get(s), self.edges[s].lower
            left = None if room is None or edge is None else edge - room
        else:
            inside = self.within()
            span = None if inside is None or self.radius.lower is None else self.radius.lower - inside
            left = None if span is None else span / self.metric.unit(self.states.index(s))[1]
        return Span(left, self.knocked[s]) if left is not None and left > 0 else None

    def grown_to(self, s: str) -> list[Ends] | None:
        """What a push of a state within the stance has grown to by touchdown, in each state: proofs/stance.md (6)."""
        lines = [self.one("range", f"growth[{x},{s}]") for x in self.states]
        found = [ends(x) for x in lines if x is not None and x.domain == self.domain]
        return found if len(found) == len(self.states) else None

    def left_for(self, grown: list[Ends] | None) -> Fraction | None:
        """How large a push may be that leads into this set and has grown so by then: proofs/stance.md (7)."""
        if not self.whole or grown is None:
            return None
        if self.kind == "region":
            rooms = [(self.edges[s].lower, self.bounds.get(s)) for s in self.states]
            sizes = [max(-low, high) for low, high in grown]
        else:
            rooms, sizes = [(self.radius.lower, self.within())], [max(self.metric.most(x) for x in product(*grown))]
        left = [
            None if edge is None or bound is None else (edge - bound) / size
            for (edge, bound), size in zip(rooms, sizes, strict=True)
            if size > 0
        ]
        known = [x for x in left if x is not None and x > 0]
        return min(known) if known and len(known) == len(left) else None

    def required(self, number: int, r: Any) -> Outcome:
        if r.stance is not None or r.kind not in (
            "bound",
            "sharp_bound",
            "radius",
            "push",
            "steps",
            "gain",
            "residual",
        ):
            return super().required(number, r)
        if r.over:
            return self.elsewhere(number)
        c = constant(r.constant, self.statement.values)
        if r.kind == "radius":
            return self.wide_enough(r, c)
        if r.kind == "push":
            return self.push_outcome(r, c)
        if r.kind == "steps":
            return self.stepped_along(r, c)
        if r.kind in ("bound", "sharp_bound") and r.state is not None:
            span = self.long_run(r.state)  # by the best argument, for either name
            proved = self.whole and span is not None and compared(r.relation, Span(None, span.upper), c)
            taken = Span(None, None if span is None else span.lower)
            return verdict(proved, not self.any and opposed(r.relation, taken, c), span)
        if r.kind == "gain":
            return self.gained(r, c)
        found = {"bound": self.bound, "residual": self.residual}.get(r.kind)
        # a length says nothing in a norm that may be as small as one likes; a gain is the same in any unit
        upper = Span(None, None if found is None else found.upper)
        proved = self.whole and compared(r.relation, upper, c) and self.meant()
        # in a metric the claim fixes, what is surely taken settles it; in another norm it might be less
        least = self.missed if self.stated() and r.kind == "residual" else None
        return verdict(proved, not self.any and opposed(r.relation, Span(None, least), c), found)

    def push_outcome(self, r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """Within a stance a push changes other states as well, so that one at touchdown says nothing of it."""
        if r.during:
            left = self.left_for(self.grown_to(r.state))
            return verdict(less(c[1], left), False, None if left is None else Span(left, None))
        out = self.knocked[r.state]
        span = self.pushes[r.state] or Span(None, out)
        refuted = not self.any and opposed(r.relation, Span(out, None), c)
        return verdict(less(c[1], span.lower), refuted, None if span == NOTHING else span)

    def wide_enough(self, r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """A radius along a state; or in the norm, which says nothing where that may be as large as one likes."""
        span = self.radii[r.state] if r.state is not None else self.radius if self.settled else None
        means = r.state is not None or self.stated()
        proved = span is not None and means and compared(r.relation, Span(span.lower, None), c)
        # R⁺ is that of one norm; a run that leaves the region does so whatever set a proof might choose
        out = None if r.state is None else self.out[r.state]
        return verdict(proved, opposed(r.relation, Span(out, None), c), span)

    def gained(self, r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """Refuted only where no route is left that might have a smaller gain, in this norm or another."""
        asked = [self.statement.route] if self.statement.route in OF_ROUTE else self.contracting()
        span = self.contraction()
        if self.statement.route in OF_ROUTE:
            (route,) = asked
            span = Span(self.taken(route), self.slopes(route).upper)
        proved = self.whole and compared(r.relation, Span(None, span.upper), c)
        least = least_of([self.taken(x, True) for x in asked])
        return verdict(proved, not self.any and opposed(r.relation, Span(None, least), c), span)

    def long_run(self, s: str) -> Span | None:
        """How far a state can be in the long run: taken by an orbit, and proved."""
        lower, upper = self.orbits[s], self.bounds.get(s)
        return None if lower is None and upper is None else Span(lower, upper)

    def meant(self) -> bool:
        """Whether lengths mean something: the claim fixes the norm, or it is at least the error of every state."""
        return self.stated() or all(self.metric.support(i) <= 1 for i in range(len(self.states)))

    def stated(self) -> bool:
        return self.statement.metric == "box" or bool(self.statement.weights)

    def ranged(self, number: int, r: Any) -> Outcome:
        """What a point of a ball breaks may hold in the ball of another metric, unless the claim fixes the metric."""
        found, lines = super().ranged(number, r), self.ranges(number)
        if found.verdict == "refuted" and not (self.kind == "region" or self.stated()):
            known = bool(lines) and not any(x.on_set for x in lines)
            return found if known else Outcome("undecided", found.value, found.attained)
        return found

    def settles(self) -> Outcome:
        """proofs/ultimate-bound.md: a bound inside the set, in its norm or state by state."""
        inside = self.within()
        if self.kind == "region":
            ok = self.whole and all(less(self.bounds.get(s), self.edges[s].lower) for s in self.states)
        else:
            ok = self.whole and less(inside, self.radius.lower)
        beyond = [s for s, edge in self.edges.items() if less(edge.upper, self.orbits[s], equal=True)]
        return verdict(ok, bool(beyond) and not self.any, None if inside is None else Span(None, inside))

    def stepped_along(self, r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """proofs/several.md (5): steps after which a state stays within `to`, the others on target at the start."""
        start, end = (constant(e, self.statement.values) for e in (r.start, r.end))
        i = self.states.index(r.state)
        limit = self.radii[r.state]
        most: int | None = None
        if self.settled and limit is not None and less(start[1], limit.lower, equal=True):
            wide = self.metric.support(i)
            first, last = start[1] * self.metric.unit(i)[1], end[0] / wide
            most = min((n for x in self.routes if (n := self.steps(x, first, last)) is not None), default=None)
        upper = None if most is None else Fraction(most)
        least = self.still_out(self.lines("path", f"path[{r.state}]"), start[0], end[1])
        span = Span(least, upper)
        proved = compared(r.relation, Span(None, upper), c)
        return verdict(proved, opposed(r.relation, Span(None, least), c), None if span == NOTHING else span)

    def by_state(self) -> dict[str, dict[str, Span | None]]:
        found: dict[str, dict[str, Span | None]] = {}
        for s in self.states:
            far, radius = self.long_run(s), self.radii[s] if self.settled else None
            found[s] = {"bound": far, "sharp_bound": far, "radius": radius, "push": self.pushes[s]}
        return found

    def targets(self) -> dict[str, Span]:
        return self.centres

    def norm(self) -> dict[str, Any]:
        """Weights of a box, V of a polytope, P = VᵀV of an ellipsoid, exactly."""
        rows = self.metric.rows
        if self.metric.kind == "box":
            return {"kind": "box", "weights": {s: str(rows[i][i]) for i, s in enumerate(self.states)}}
        if self.metric.kind == "ellipsoid":
            columns = tuple(zip(*rows, strict=True))
            rows = tuple(tuple(dot(a, b) for b in columns) for a in columns)
        return {"kind": self.metric.kind, "matrix": [[str(x) for x in row] for row in rows]}


def least_of(ends: list[Fraction | None]) -> Fraction | None:
    """The least of several lower ends; None unless all are known."""
    known = [x for x in ends if x is not None]
    return min(known) if known and len(known) == len(ends) else None
