"""What the lines about stances amount to: the largest over all of them, and each on its own (proofs/graph.md)."""

from __future__ import annotations

from fractions import Fraction
from functools import partial
from typing import Any

from .cycle_outcomes import at_the_edge, farthest, grown, taken_in_any, taken_in_norm
from .derive import RANGED, Domain
from .gains import intervals
from .grammar import constant
from .jacobians import OF_COMPARISON
from .outcomes import SeveralResults
from .results import (
    GRAIN,
    LONG,
    MOST_STEPS,
    NOTHING,
    Outcome,
    Results,
    Route,
    Span,
    compared,
    greater,
    less,
    opposed,
    verdict,
)
from .rules import Line, Proof, Rejected
from .stance_outcomes import StanceResults, StepResults, hull, least, most
from .theorems import OWN, Variant

ROUNDS = 400  # steps for which what is attained on every step is added up
Levels = dict[str, Fraction]  # an error in the norm of each stance
Way = tuple[str, ...]  # stances, each a step from the one before


class GraphResults(Results):
    """Everything `results` may claim of a claim of stances."""

    def __init__(self, proof: Proof, variant: Variant = OWN) -> None:
        graph = proof.stanced(variant)
        if graph is None:
            raise Rejected("no stances")
        self.proof, self.graph, self.variant, self.needed = proof, graph, variant, set[int]()
        self.derivation, self.statement = self.graph.first, self.graph.statement
        self.states, self.any = self.derivation.states, self.statement.shrink
        invariant = self.one("graph-regions", "invariant") or self.one("graph-balls", "invariant")
        kept = None if invariant is None else invariant.domains
        self.each = {name: StanceResults(self, self.graph, name, kept) for name in self.graph.stances}
        self.settled = invariant is not None and all(x.lasts for x in self.each.values())
        self.kind, self.whole = self.set_of(invariant if self.settled else None)
        # smaller balls that are not kept, or a stance that is not shown to last, are no sets to speak of
        small = any(x.ball.rule == "smaller-ball" or not x.lasting for x in self.each.values())
        self.partial = not self.settled and (small or invariant is not None)
        for x in self.each.values():
            x.placed(self.kind, self.whole, self.settled, self.partial)
        self.steps_by = {} if self.partial else {route: self.of_steps(route) for route in self.known_routes()}
        shown = {route: all(x.shown is not None for x in steps.values()) for route, steps in self.steps_by.items()}
        self.onward = {route: steps for route, steps in self.steps_by.items() if shown[route]}
        self.bounds_by = {route: self.bounded_by(route) for route in self.onward}
        compared_by_state = self.comparisons()
        for name, x in self.each.items():
            x.orbits = farthest(self, name)
            uppers = [b for found in self.bounds_by.values() if name in found and (b := found[name].upper) is not None]
            x.bounded(uppers, compared_by_state.get(name, {}))
        self.radius = least([x.radius for x in self.each.values()])
        self.routes = {route: self.largest(list(self.each), route) for route in self.onward}
        self.reported, self.sharp, self.best, self.push = self.chosen(), None, None, None
        route = self.routes.get(self.reported, Route())
        self.gain, self.residual, self.bound = route.gain, route.residual, route.bound
        numbered = enumerate(self.statement.requirements, 1)
        self.requirements = [self.required(n, r) for n, r in numbered if not variant.over or n == variant.over]
        self.needed |= {n for x in self.each.values() for n in x.needed}
        self.needed |= {n for steps in self.onward.values() for x in steps.values() for n in x.needed}

    def stances(self) -> dict[str, Results]:
        return dict(self.each)

    def sets(self) -> dict[str, Domain]:
        return {name: x.domain for name, x in self.each.items() if x.domain is not None}

    def leaves_out(self, r: Any) -> bool:
        return any(x.derivation.leaves_out(r) for x in self.asked(r))

    def set_of(self, invariant: Line | None) -> tuple[str | None, bool]:
        """Its kind, and whether requirements may refer to it: proofs/graph.md (3)."""
        if invariant is None:
            return None, False
        if invariant.rule == "graph-regions":
            return "region", True
        wide = all(x.ball.concludes["radius"] > 0 for x in self.each.values())
        largest = all(x.ball.rule == "largest-ball" for x in self.each.values())
        if largest and wide and any(self.each[s].leaves_for(self.each[t]) for s, t in self.graph.steps):
            return "ball", True
        return "smaller ball", self.statement.shrink and wide

    def known_routes(self) -> list[str]:
        """The routes of a claim of stances, whose gains are contractions all of them: proofs/graph.md (7), (10)."""
        return ["slope", *(["split"] if self.statement.correction and self.statement.horizon == 1 else [])]

    def of_steps(self, route: str) -> dict[Way, StepResults]:
        """Every step from a stance to the next, or so many as are taken together, by a route."""
        return {w: StepResults(">".join(w), self.each[w[0]], self.each[w[-1]], route) for w in self.graph.walks}

    def bounded_by(self, route: str) -> dict[str, Span]:
        """proofs/graph.md (4): the bound in the norm of each stance; from below what the steps surely add up to."""
        line = self.one("graph-bound", f"bound[{route}]")
        if line is None or not self.settled:
            return {}
        least = dict.fromkeys(self.each, Fraction(0))
        pairs = {step: (x.gain.lower, x.residual.lower) for step, x in self.onward[route].items()}
        known = all(k is not None and e is not None for k, e in pairs.values())
        for _ in range(ROUNDS if known else 0):
            before = dict(least)
            for (s, *_, t), (k, e) in pairs.items():
                sum_ = (k or 0) * before[s] + (e or 0)
                least[t] = max(least[t], Fraction(sum_ * GRAIN // 1, GRAIN))
            if least == before:
                break
        return {s: Span(least[s] if known else None, line.concludes[s]) for s in self.each}

    def comparisons(self) -> dict[str, dict[str, Fraction]]:
        """proofs/graph.md (5): the least bound of each state in each stance by comparison."""
        found: dict[str, dict[str, Fraction]] = {}
        each = [self.lines("graph-componentwise", x) for x in OF_COMPARISON] if self.settled else []
        lines = [line for lines in each for line in lines]
        for name, d in self.graph.stances.items():
            for s in d.states if lines else ():
                least, n = min((line.concludes[f"{name}:{s}"], n) for n, line in lines)
                found.setdefault(name, {})[s] = least
                self.needed.add(n)
        for _, line in lines:
            if line.domains != self.sets():
                raise Rejected("the comparison refers to other sets")
        return found

    def largest(self, names: list[str], route: str) -> Route:
        """Gain and residual of the steps that leave these stances, and the bounds in them: the largest."""
        steps = [x for (s, *_), x in self.onward.get(route, {}).items() if s in names]
        known = [(self.each[s], x) for s in names if (x := self.bounds_by.get(route, {}).get(s)) is not None]
        bounds = [Span(greater(x.lower, taken_in_norm(stance)), x.upper) for stance, x in known]
        gain, residual = most([x.gain for x in steps]), most([x.residual for x in steps])
        if steps and route == "slope":
            gain = Span(greater(gain.lower, grown(self, names)[0]), gain.upper)
        return Route(gain, residual, most(bounds) if bounds else None)

    def contraction_in(self, names: list[str]) -> Span:
        """The best gain of the routes: from above that of one on every step, from below the least of all on a step."""
        gains = [self.largest(names, route).gain.upper for route in self.onward]
        lowers = []
        for step in self.graph.walks if self.all_told() else ():
            found = [steps[step] for steps in self.steps_by.values()]
            taken = [k for x in found if (k := x.gain.lower) is not None]
            if step[0] in names and found and len(taken) == len(found):
                lowers.append(min(taken))
                self.needed |= {n for x in found for n in x.needed}
        lower = max(lowers, default=None)
        if self.onward and not self.statement.correction:
            lower = greater(lower, grown(self, names)[0])
        return Span(lower, min([k for k in gains if k is not None], default=None))

    def all_told(self) -> bool:
        """Whether no route is left that might have a smaller gain: split of several steps together is not known."""
        return self.statement.horizon == 1 or self.statement.route == "slope" or not self.statement.correction

    def asked(self, r: Any) -> list[StanceResults]:
        """The stances that a requirement is about."""
        return [x for name, x in self.each.items() if r.stance in (None, name)]

    def required(self, number: int, r: Any) -> Outcome:
        several = self.asked(r)
        if r.kind in RANGED:
            return together([x.ranged(number, r) for x in several])
        if r.over:
            return self.elsewhere(number)
        if r.kind == "settles":
            return self.inside(several)
        c = constant(r.constant, self.statement.values)
        if r.kind == "radius":
            span, means = self.wide(several, r.state), r.state is not None or self.fixed()
            proved = span is not None and means and compared(r.relation, Span(span.lower, None), c)
            out = min([y for x in several if (y := x.out.get(r.state)) is not None], default=None)
            return verdict(proved, opposed(r.relation, Span(out, None), c), span)
        if r.kind == "push":
            return self.push_outcome_in(several, r, c)
        if r.kind == "steps":
            return self.counted(several, r, c)
        if r.state is not None:  # by the best argument, for either name
            span = self.long_run(several, r.state)
            proved = self.whole and span is not None and compared(r.relation, Span(None, span.upper), c)
            taken = Span(None, None if span is None else span.lower)
            return verdict(proved, not self.any and opposed(r.relation, taken, c), span)
        return self.in_norms(several, r, c)

    def in_norms(self, several: list[StanceResults], r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """Gain, residual and bound: several.md (4), (5e), in the norms of the stances."""
        names, asked = [x.part for x in several], self.statement.route
        route = self.largest(names, self.reported)
        gain = self.contraction_in(names) if asked == "best" else route.gain
        found = {"bound": route.bound, "gain": gain, "residual": route.residual}.get(r.kind)
        upper = Span(None, None if found is None else found.upper)
        means = r.kind == "gain" or all(x.meant() for x in self.each.values())
        proved = self.whole and compared(r.relation, upper, c) and means
        taken, final = self.surely_in_norms(several, r, found)
        return verdict(proved, final and not self.any and opposed(r.relation, Span(None, taken), c), found)

    def surely_in_norms(self, several: list[StanceResults], r: Any, found: Span | None) -> tuple[Fraction | None, bool]:
        """What is taken in whatever norms a proof may choose, and whether that settles what is asked."""
        if r.kind == "bound":
            least = taken_in_norm if self.fixed() else taken_in_any  # proofs/graph.md (8)
            return max((y for x in several if (y := least(x)) is not None), default=None), True
        # in a metric the claim fixes, what is surely taken settles it; in another norm it might be less
        fixed = self.fixed() and not self.partial
        if r.kind != "gain":
            slopes, names = self.steps_by.get("slope", {}).items(), [x.part for x in several]
            missed = [x.missed for (s, *_), x in slopes if s in names and x.missed is not None]
            return max(missed, default=None) if fixed else None, True
        taken = found.lower if found is not None and fixed else None
        growth, everywhere = grown(self, [x.part for x in several])
        alone = self.statement.route == "slope" or not self.statement.correction  # what grows are slopes of the map
        return greater(taken, growth if everywhere and alone else None), self.all_told()

    def long_run(self, several: list[StanceResults], state: str) -> Span | None:
        """How far a state can be in these stances in the long run: taken by orbits, and proved."""
        spans = [x.long_run(state) for x in several]
        known = [x for x in spans if x is not None]
        span = most(known)
        return None if span == NOTHING else span if None not in spans else Span(span.lower, None)

    def fixed(self) -> bool:
        """Whether the claim itself fixes the norms."""
        return all(x.stated() for x in self.each.values())

    def inside(self, several: list[StanceResults]) -> Outcome:
        """proofs/graph.md (4): a bound inside the set of every stance, in its norm or state by state."""
        ok, bounds = self.whole, list[Fraction]()
        for x in several:
            near = x.within()
            if self.kind == "region":
                ok &= all(less(x.bounds.get(s), x.edges[s].lower) for s in x.states)
            else:
                ok &= less(near, x.radius.lower)
            bounds += [near] if near is not None else []
        beyond = not self.any and any(at_the_edge(self, x) for x in several)
        return verdict(ok, beyond, Span(None, max(bounds)) if len(bounds) == len(several) else None)

    def wide(self, several: list[StanceResults], state: str | None) -> Span | None:
        """How far a start may be from the target, of a state or in the norm."""
        of_norm = [x.radius if self.settled else NOTHING for x in several]
        span = least(of_norm if state is None else [x.radii[state] or NOTHING for x in several])
        return None if span == NOTHING else span

    def push_outcome_in(self, several: list[StanceResults], r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """The least push of these stances; refuted by one from an orbit in any of them: proofs/orbit.md (5)."""
        out: Fraction | None = None
        if r.during:
            spans = [self.pushed_through(x, r.state) for x in several]
        else:
            spans = [x.pushes[r.state] or Span(None, x.knocked[r.state]) for x in several]
            out = min([y for x in several if (y := x.knocked[r.state]) is not None], default=None)
        span = least([x or NOTHING for x in spans])
        refuted = not self.any and opposed(r.relation, Span(out, None), c)
        return verdict(less(c[1], span.lower), refuted, None if span == NOTHING else span)

    def pushed_through(self, x: StanceResults, s: str) -> Span | None:
        """proofs/stance.md (7): a push during a stance leads into the sets of those that may follow it."""
        grown = x.grown_to(s)
        left = [self.each[t].left_for(grown) for before, t in self.graph.steps if before == x.part]
        known = [y for y in left if y is not None]
        return Span(min(known), None) if known and len(known) == len(left) else None

    def counted(self, several: list[StanceResults], r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """proofs/graph.md (6): steps after which a state stays within `to`, from any of these stances, by any route."""
        start, end = (constant(e, self.statement.values) for e in (r.start, r.end))
        i, limit, counts = self.states.index(r.state), self.wide(several, r.state), list[int]()
        single = self.statement.horizon == 1  # where a horizon starts from is not known at every step
        if single and limit is not None and less(start[1], limit.lower, equal=True):
            levels = {x.part: start[1] * x.metric.unit(i)[1] for x in several}
            goal = {name: end[0] / x.metric.support(i) for name, x in self.each.items()}
            for route in self.onward:
                wanted = self.below(goal, route)
                count = None if wanted is None else self.count_of(levels, wanted, route)
                counts += [] if count is None else [count]
        names, paths = [x.part for x in several], self.lines("graph-path", f"path[{r.state}]")
        still = self.still_out([(n, x) for n, x in paths if x.walk[0] in names], start[0], end[1])
        span = Span(still, Fraction(min(counts)) if counts else None)
        proved = compared(r.relation, Span(None, span.upper), c)
        return verdict(proved, opposed(r.relation, Span(None, still), c), None if span == NOTHING else span)

    def below(self, wanted: Levels, route: str) -> Levels | None:
        """Levels no higher that are mapped below themselves on every step."""
        pairs = self.pairs(route)
        found = dict(wanted)
        for _ in self.each if pairs else ():
            for (s, *_, t), (k, e) in pairs.items():
                if k > 0:
                    found[s] = min(found[s], (found[t] - e) / k)
        kept = all(k * found[s] + e <= found[t] for (s, *_, t), (k, e) in pairs.items())
        return found if pairs and kept and min(found.values()) >= 0 else None

    def count_of(self, levels: Levels, wanted: Levels, route: str) -> int | None:
        pairs, once = self.pairs(route), Levels()
        for n in range(MOST_STEPS // len(pairs)):
            if all(x <= wanted[s] for s, x in levels.items()):
                return n
            if levels == once:  # then they go round for ever
                return None
            once = levels if n & (n - 1) == 0 else once
            after: Levels = {}
            for (s, *_, t), (k, e) in pairs.items():
                if s in levels:
                    after[t] = max(after.get(t, Fraction(0)), rounded(k * levels[s] + e))
            levels = after
        return None

    def pairs(self, route: str) -> dict[Way, tuple[Fraction, Fraction]]:
        """Gain and residual of every step, proved by a route."""
        return {step: x.shown for step, x in self.onward[route].items() if x.shown is not None}

    def by_state(self) -> dict[str, dict[str, Span | None]]:
        found: dict[str, dict[str, Span | None]] = {}
        figures = [x.by_state() for x in self.each.values()]
        for s in self.states:
            found[s] = {}
            for name, worst in (("bound", most), ("sharp_bound", most), ("radius", least), ("push", least)):
                spans = [x for each in figures if (x := each[s][name]) is not None]
                found[s][name] = worst(spans) if len(spans) == len(figures) else None
        return found

    def targets(self) -> dict[str, Span]:
        """The hull of the targets of all stances."""
        return {s: hull([x.centres[s] for x in self.each.values()]) for s in self.states}

    def norm(self) -> Any:
        """The metric, where it is the same in every stance."""
        found = [x.norm() for x in self.each.values()]
        return found[0] if all(x == found[0] for x in found) else None


def rounded(x: Fraction) -> Fraction:
    return Fraction(-((-x * GRAIN) // 1), GRAIN) if x.denominator.bit_length() > LONG else x


def together(outcomes: list[Outcome]) -> Outcome:
    """A range in several stances: proved in all of them, or refuted in one."""
    values = [x.value for x in outcomes if x.value is not None]
    taken = [x.attained for x in outcomes if x.attained is not None]
    lowers = [x.lower for x in taken if x.lower is not None]
    uppers = [x.upper for x in taken if x.upper is not None]
    found = [x.verdict for x in outcomes]
    decided = "refuted" if "refuted" in found else "proved" if set(found) == {"proved"} else "undecided"
    value = hull(values) if len(values) == len(outcomes) else None
    return Outcome(decided, value, Span(min(lowers, default=None), max(uppers, default=None)))


def results_of(proof: Proof) -> Results:
    """What a proof amounts to: of one state, of several, or of named stances."""
    if proof.graph is not None:
        return GraphResults(proof)
    kind = SeveralResults if len(proof.derivation.states) > 1 else Results
    found = kind(proof)
    found.intervals = tuple(intervals(proof, partial(kind, proof), found.needed))
    return found
