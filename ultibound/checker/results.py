"""What the lines of a proof amount to: quantities and verdicts, derived afresh from the lines alone."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import product
from typing import Any

from .derive import RANGED, Domain
from .gains import Interval
from .grammar import constant
from .rules import Line, Proof, Rejected
from .sector import applies
from .theorems import OWN, PAIRS, Variant, ends, levels, magnitude, movement

MOST_STEPS = 20_000
LONG, GRAIN = 480, 2**160  # bits of a denominator beyond which levels are rounded up, and to what


@dataclass(frozen=True)
class Span:
    """Ends of a quantity; None where nothing is known."""

    lower: Fraction | None
    upper: Fraction | None


NOTHING = Span(None, None)


@dataclass(frozen=True)
class Outcome:
    verdict: str
    value: Span | None
    attained: Span | None = None


@dataclass(frozen=True)
class Route:
    """Gain, residual and bound that belong together: one set, one argument."""

    gain: Span = NOTHING
    residual: Span = NOTHING
    bound: Span | None = None


class Results:
    """Everything `results` may claim; `needed` collects the lines it rests on."""

    intervals: tuple[Interval, ...] = ()  # of gains (gains.py)
    part = ""  # the stance the lines are about, or the step from one to the next (graph_outcomes.py)

    def __init__(self, proof: Proof, variant: Variant = OWN) -> None:
        self.proof, self.variant, self.needed = proof, variant, set[int]()
        self.unsupported = 0  # of what has to stay positive throughout a stance, the first that is not shown to
        self.derivation = proof.about(variant)
        self.any = self.derivation.statement.shrink  # any smaller set would do: points and orbits of one refute nothing
        self.statement, self.state = self.derivation.statement, self.derivation.state
        balls = [x for rule in ("largest-ball", "smaller-ball") if (x := self.one(rule, "ball")) is not None]
        if len(balls) != 1:
            raise Rejected("the proof has not exactly one ball about the target")
        (ball,) = balls
        invariant = self.one("invariant-region", "invariant") or self.one("invariant-ball", "invariant")
        self.domain = invariant.domain if invariant is not None else ball.domain
        self.way = self.on_the_way()
        self.supported_from(invariant)
        # a smaller ball that is not mapped into itself, or a stance that is not shown to last, is no set to speak of
        self.partial = not self.settled and (ball.rule == "smaller-ball" or invariant is not None or not self.lasting)
        centre = proof.lines[ball.uses[0]].concludes
        asked = self.settled or any(r.kind == "radius" for r in self.statement.requirements)
        self.centre, self.edge = Span(centre["lower"], centre["upper"]), self.reach() if asked else None
        self.radius = Span(ball.concludes["radius"], smaller(self.edge, self.led_out(self.state)))
        self.kind, self.whole = self.set_found(invariant if self.settled else None, ball)
        orbit = self.one("orbit", "orbit")
        orbit = orbit if self.lasting else None
        self.orbit = orbit.concludes["distance"] if orbit is not None else None
        self.room = self.room_left(orbit)
        self.missed = self.moved_at_least(far(self.attained(f"target-miss[{self.state}]")))
        proved = () if self.partial else PAIRS
        self.routes = {name: self.route(name) for name in proved if self.one(name, name) is not None}
        self.reported = self.chosen()
        self.best = self.sharp = self.least_bound()
        self.lift(None if self.best is None else self.best.upper)
        route = self.routes.get(self.reported, Route())
        self.residual, self.bound = route.residual, route.bound
        self.gain = self.contraction() if self.reported == "curve" else self.slopes(self.reported)
        self.push = self.pushed()
        numbered = enumerate(self.statement.requirements, 1)
        self.requirements = [self.required(n, r) for n, r in numbered if not variant.over or n == variant.over]

    def by_state(self) -> dict[str, dict[str, Span | None]]:
        """Bound, sharp bound, radius and push of each state, as `results.states` has them."""
        radius = self.radius if self.settled else None
        return {self.state: {"bound": self.best, "sharp_bound": self.sharp, "radius": radius, "push": self.push}}

    def targets(self) -> dict[str, Span]:
        return {self.state: self.centre}

    def norm(self) -> dict[str, Any]:
        """The metric, as `results.metric` has it."""
        return {"kind": "box", "weights": {self.state: "1"}}

    def stances(self) -> dict[str, Results]:
        """What is known of each stance, where they have names."""
        return {}

    def leaves_out(self, r: Any) -> bool:
        """Whether `over` of a requirement may leave out values that occur."""
        return self.derivation.leaves_out(r)

    def set_found(self, invariant: Line | None, ball: Line) -> tuple[str | None, bool]:
        """Its kind, and whether requirements may refer to it: proofs/invariant-set.md (4)."""
        if invariant is None:
            return None, False
        if invariant.rule == "invariant-region":
            return "region", True
        wide = ball.concludes["radius"] > 0
        if ball.rule == "largest-ball" and wide and self.escapes():
            return "ball", True
        return "smaller ball", self.statement.shrink and wide

    def supported_from(self, invariant: Line | None) -> None:
        """Whether points are of the claim's own stances and steps, and whether the set is settled."""
        moves = self.derivation.motion is not None
        self.unsupported = 1 if moves and not self.above(1) else 0
        self.lasting = self.way is not None and not self.unsupported
        self.settled = invariant is not None and self.way is not None and self.supported()

    def on_the_way(self) -> Domain | None:
        """Where states may be at every step from the set, also within a horizon: proofs/horizon.md (2)."""
        if self.statement.horizon == 1 or self.domain is None or not self.domain.ball:
            return self.domain
        line = self.one("course", "course")
        return None if line is None else line.domain

    def led(self, error: Fraction) -> list[Fraction] | None:
        """How far from the target each step within a horizon may lead; None where that is not known."""
        found, once = [error], self.one("slope", "slope@1")
        for j in range(1, self.statement.horizon):
            line, start = self.one("slope", f"slope@{j}"), error
            if line is None and self.way == self.domain:  # the step before ends in the set, and this one starts there
                line, start = once, found[-1]
            if line is None or line.domain != self.domain:
                return None
            found.append(line.concludes["gain"] * start + line.concludes["residual"])
        return found

    def lifted(self, error: Fraction) -> Fraction | None:
        """The largest error at any step, of one at the end of every horizon."""
        return max(self.led(error) or (), default=None)

    def phased(self, bound: Fraction | None) -> bool:
        """Whether in the end every step starts in the set: proofs/horizon.md (3)."""
        if self.way == self.domain or bound is None:
            return True
        ends = self.led(bound)
        return ends is not None and all(less(x, self.radius.lower) for x in ends)

    def lift(self, least: Fraction | None) -> None:
        """Bounds of all steps, where in the end not every step starts in the set."""
        if self.phased(least):
            return
        for name, r in self.routes.items():
            if r.bound is not None and r.bound.upper is not None:
                self.routes[name] = replace(r, bound=Span(r.bound.lower, self.lifted(r.bound.upper)))
        if self.best is not None and self.best.upper is not None:
            self.best = self.sharp = Span(self.best.lower, self.lifted(self.best.upper))

    def supported(self) -> bool:
        """Whether what has to stay positive throughout a stance does: proofs/stance.md (4)."""
        motion = self.derivation.motion
        for k in range(1, 1 + len(motion.positive) if motion is not None else 1):
            if not self.above(k):
                self.unsupported = k
                return False
        return True

    def above(self, k: int) -> bool:
        """Whether the k-th quantity that has to stay positive does."""
        line = self.one("range", f"support[{k}]")
        return line is not None and line.domain == self.way and line.concludes["lower"] > 0

    def escapes(self) -> bool:
        """Whether a point leaves the region: else no ball is the set (proofs/invariant-set.md (4))."""
        (low, high), _ = self.derivation.region()
        points = self.lines("point", f"image[{self.state}]")
        out = [n for n, x in points if x.concludes["lower"] > high or x.concludes["upper"] < low]
        self.needed.update(out[:1])
        return bool(out)

    def reach(self) -> Fraction | None:
        """The least distance to the edge of the region of a target surely taken."""
        (low, high), _ = self.derivation.region()
        found = [
            (min(high - x.concludes["lower"], x.concludes["upper"] - low), n)
            for n, x in self.lines("point", f"target[{self.state}]")
        ]
        if not found:
            return None
        self.needed.add(min(found)[1])
        return min(found)[0]

    def route(self, name: str) -> Route:
        s, line = self.state, self.one(name, name)
        if line is None or line.domain != self.domain:
            raise Rejected(f"gain and residual of {name} refer to another set")
        k, least = None, self.missed  # what the target itself misses, every route has to allow for
        if name == "slope":
            k = far(self.attained(f"slope[{s},{s}]"))
        if name == "split":
            k, missed = far(self.attained(f"split-slope[{s},{s}]")), far(self.attained(f"split-residual[{s}]"))
            least = greater(least, self.moved_at_least(missed))
        if name == "sector":
            k, missed = self.within_sector(), far(self.attained(f"sector-residual[{s}]"))
            least = greater(least, self.moved_at_least(missed))
        gain, residual = Span(k, line.concludes["gain"]), Span(least, line.concludes["residual"])
        bounded = self.one("ultimate-bound", f"bound[{name}]")
        if bounded is None:
            return Route(gain, residual)
        lower = None if k is None or least is None or k >= 1 else least / (1 - k)
        return Route(gain, residual, Span(greater(lower, self.orbit), bounded.concludes["bound"]))

    def within_sector(self) -> Fraction | None:
        """proofs/sector.md (4): the gain that a sensitivity and a slope of the correction, both surely taken, make."""
        each: list[list[tuple[Line, int]]] = []
        for kind in ("sensitivity", "gain"):
            points = [(x, n) for n, x in self.lines("point", f"sector-{kind}[{self.state}]") if self.lasting]
            if not points:
                return None
            if any(x.domain != self.domain for x, _ in points):
                raise Rejected(f"sector-{kind}[{self.state}]: a point of another set")
            most, least = max(points, key=lambda p: ends(p[0])[0]), min(points, key=lambda p: ends(p[0])[1])
            each.append([most, least])
        found = []
        for (a, one), (b, other) in product(*each):
            factors = [1 + c * m for c, m in product(ends(a), ends(b))]
            found.append((max(min(factors), -max(factors), Fraction(0)), one, other))
        least_gain, one, other = max(found)
        self.needed.update((one, other))
        return least_gain

    def chosen(self) -> str:
        """The route reported: the one asked for, else the one with the least bound."""
        if self.statement.route != "best":
            return self.statement.route
        ends = [(r.bound.upper, i, n) for i, (n, r) in enumerate(self.routes.items()) if r.bound is not None]
        return min(ends)[2] if ends else next(iter(self.routes), "slope")

    def contraction(self) -> Span:
        """The best gain of the routes that have one: a curve's slope is no contraction."""
        found = [self.slopes(n) for n in self.routes if n != "curve"]
        lowers = [g.lower for g in found if g.lower is not None]
        uppers = [g.upper for g in found if g.upper is not None]
        every = len(lowers) == len(found) and all(x in self.routes for x in self.contracting())
        return Span(min(lowers, default=None) if every else None, min(uppers, default=None))

    def contracting(self) -> list[str]:
        """The routes of the claim whose gain is a contraction: proofs/attained.md (3)."""
        more = ["split"] if self.statement.correction else []
        return ["slope", *more, *(["sector"] if applies(self.statement) else [])]

    def slopes(self, name: str) -> Span:
        """The gain of a route; where its k is that at constant signals, under any course: proofs/signals.md (4)."""
        if name not in self.routes:
            return NOTHING
        gain = self.routes[name].gain
        if name in ("sector", "curve") or not self.derivation.loose(name):
            return gain
        proves = "split-signal-slope[" if name == "split" else "signal-slope["
        lines = [(n, x) for n, x in self.proof.lines.items() if (x.variant, x.rule) == (self.variant, "range")]
        found = [(magnitude(x), n) for n, x in lines if x.proves.startswith(proves) and x.domain == self.domain]
        if not found:
            return Span(gain.lower, None)
        self.needed.add(min(found)[1])
        return Span(gain.lower, min(found)[0])

    def least_bound(self) -> Span | None:
        """How far the state can be in the long run, by the best argument on the set."""
        found = [r.bound.upper for r in self.routes.values() if r.bound is not None and r.bound.upper is not None]
        curve = self.one("curve", "curve")
        found += [curve.concludes["sharp"]] if curve is not None and self.settled else []  # proofs/curve.md (3)
        return Span(self.orbit, min(found)) if found else None

    def pushed(self) -> Span | None:
        """proofs/settling.md (2): what is left of the radius."""
        if not self.whole or self.best is None or self.best.upper is None or self.radius.lower is None:
            return None
        room = self.radius.lower - self.best.upper
        return Span(room, self.room) if room > 0 else None

    def room_left(self, orbit: Line | None) -> Fraction | None:
        """How far a state of an orbit can be pushed at most without leaving the set: proofs/settling.md (2)."""
        if orbit is None or self.edge is None or self.kind == "smaller ball":
            return None
        (low, high), _ = self.derivation.region()
        if self.kind == "region":
            return min(high - orbit.concludes["highest"], orbit.concludes["lowest"] - low)
        return self.edge - orbit.concludes["distance"]

    def moved_at_least(self, residual: Fraction | None) -> Fraction | None:
        """The residual surely reached: miss of the target, and how far one step can surely move it: attained.md (3)."""
        for h in self.derivation.moving():
            line = self.one("range", f"target-slope[{self.state},{h}]")
            if residual is None or line is None or self.derivation.statement.uncertain[h].values is not None:
                continue
            least = max(line.concludes["lower"], -line.concludes["upper"], Fraction(0))
            residual += least * self.derivation.change(h)[0]
        return residual

    def lines(self, rule: str, proves: str) -> list[tuple[int, Line]]:
        wanted = self.variant, self.part, rule, proves
        return [(n, x) for n, x in self.proof.lines.items() if (x.variant, x.part, x.rule, x.proves) == wanted]

    def one(self, rule: str, proves: str) -> Line | None:
        found = self.lines(rule, proves)
        if len(found) > 1:
            raise Rejected(f"{proves} is proved more than once by {rule}")
        for n, line in found:
            self.needed.add(n)
            return line
        return None

    def surely(self, found: Iterable[tuple[Fraction, int]]) -> Fraction | None:
        """The largest of the sizes that lines show to be taken, by line; no size is below 0."""
        largest = max(found, default=None)
        if largest is None:
            return None
        self.needed.add(largest[1])
        return max(largest[0], Fraction(0))

    def attained(self, proves: str) -> Span:
        """The largest value surely taken (upper) and the smallest (lower), by point lines."""
        high: tuple[Fraction, int] | None = None
        low: tuple[Fraction, int] | None = None
        for n, line in self.lines("point", proves) if self.lasting else ():
            if line.domain is not None and line.domain != self.domain:
                raise Rejected(f"{proves}: a point of another set")
            if high is None or line.concludes["lower"] > high[0]:
                high = line.concludes["lower"], n
            if low is None or line.concludes["upper"] < low[0]:
                low = line.concludes["upper"], n
        self.needed.update(x[1] for x in (high, low) if x is not None)
        return Span(low[0] if low else None, high[0] if high else None)

    def required(self, number: int, r: Any) -> Outcome:
        if r.kind in RANGED and r.stance is None:
            return self.ranged(number, r)
        if r.stance is not None:
            return Outcome("undecided", None)
        if r.over:
            return self.elsewhere(number)
        if r.kind == "settles":
            return self.settles()
        c = constant(r.constant, self.statement.values)
        if r.kind == "radius":
            span = self.radius if self.settled else Span(None, self.radius.upper)
            return verdict(compared(r.relation, Span(span.lower, None), c),
                           opposed(r.relation, Span(span.upper, None), c), span)  # fmt: skip
        if r.kind == "gain":
            return self.gained(r, c)
        if r.kind == "push":
            return self.push_outcome(r, c)
        if r.kind == "steps":
            return self.stepped(number, r, c)
        spans = {"residual": self.residual, "bound": self.best if r.state else self.bound, "sharp_bound": self.sharp}
        found, most = spans[r.kind], self.missed if r.kind == "residual" else self.orbit
        proved = self.whole and found is not None and compared(r.relation, Span(None, found.upper), c)
        if found is None and most is not None:
            found = Span(most, None)
        final = r.kind == "residual" or not self.any
        return verdict(proved, final and opposed(r.relation, Span(None, most), c), found)

    def elsewhere(self, number: int) -> Outcome:
        """A requirement over ranges of its own: a set, routes and orbits of its own lines."""
        variant = Variant(self.variant.piece, number)
        if not any(x.variant == variant for x in self.proof.lines.values()):
            return Outcome("undecided", None)
        own = type(self)(self.proof, variant)
        self.needed |= own.needed
        return own.requirements[0]

    def settles(self) -> Outcome:
        """proofs/ultimate-bound.md; refuted by an orbit that stays as far out as the set reaches."""
        r = self.radius.lower
        ok = self.whole and self.best is not None and less(self.best.upper, r)
        beyond = self.orbit is not None and self.edge is not None and self.orbit >= self.edge and not self.any
        return verdict(ok, beyond, self.best)

    def gained(self, r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """Refuted only where no route is left that might have a smaller gain: proofs/attained.md (3)."""
        asked = self.statement.route
        span = self.contraction() if asked in ("best", "curve") else self.slopes(asked)
        proved = self.whole and compared(r.relation, Span(None, span.upper), c)
        return verdict(proved, not self.any and opposed(r.relation, Span(None, span.lower), c), span)

    def push_outcome(self, r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """The largest push is not attained itself, so the constant has to be smaller: proofs/settling.md (2)."""
        if r.during:
            return self.pushed_within(r, c)
        proved = self.whole and self.push is not None and less(c[1], self.push.lower)
        span = self.push if self.push is not None else None if self.room is None else Span(None, self.room)
        return verdict(proved, not self.any and opposed(r.relation, Span(self.room, None), c), span)

    def pushed_within(self, r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """What is left of the radius, over the growth of a change until touchdown: proofs/stance.md (6)."""
        line, least = self.one("range", f"growth[{self.state},{self.state}]"), None
        if line is not None and line.domain == self.domain and self.push is not None and self.push.lower is not None:
            least = self.push.lower / magnitude(line)
        # a change right before touchdown grows no more: what would lead an orbit out does so within the stance too
        beyond = not self.any and opposed(r.relation, Span(self.room, None), c)
        span = None if least is None and self.room is None else Span(least, self.room)
        return verdict(self.whole and less(c[1], least), beyond, span)

    def stepped(self, number: int, r: Any, c: tuple[Fraction, Fraction]) -> Outcome:
        """proofs/settling.md (1): steps after which the error stays within `to`, from any start within `from`."""
        start, end = (constant(e, self.statement.values) for e in (r.start, r.end))
        most: int | None = None
        if self.settled and less(start[1], self.radius.lower, equal=True):
            most = min((n for x in self.routes if (n := self.steps(x, start[1], end[0])) is not None), default=None)
        least = self.still_out(self.lines("path", "path") if self.lasting else [], start[0], end[1])
        span = Span(least, None if most is None else Fraction(most))
        proved = most is not None and compared(r.relation, Span(None, Fraction(most)), c)
        return verdict(proved, opposed(r.relation, Span(None, least), c), None if span == NOTHING else span)

    def still_out(self, paths: list[tuple[int, Line]], start: Fraction, end: Fraction) -> Fraction | None:
        """The least number of steps that paths from within `start` leave: at their ends the error is above `end`."""
        return self.surely((x.concludes["steps"] + 1, n) for n, x in paths
                           if x.concludes["from"] <= start and x.concludes["distance"] > end)  # fmt: skip

    def led_out(self, state: str) -> Fraction | None:
        """The least error of a state from which a run leaves the region, the others on target: proofs/orbit.md (4)."""
        return self.nearest_out(self.lines("escape", f"escape[{state}]"))

    def pushed_out(self, state: str) -> Fraction | None:
        """The least push of a state, on an orbit, after which a run leaves the region: proofs/orbit.md (5)."""
        return self.nearest_out(self.lines("pushed", f"pushed[{state}]") if self.lasting else [], "push")

    def nearest_out(self, lines: list[tuple[int, Line]], off: str = "from") -> Fraction | None:
        """The least of what such runs start off."""
        least = min(((x.concludes[off], n) for n, x in lines), default=None)
        if least is None:
            return None
        self.needed.add(least[1])
        return least[0]

    def steps(self, name: str, error: Fraction, wanted: Fraction) -> int | None:
        """Steps by one route, horizon by horizon: proofs/horizon.md (4)."""
        n = self.statement.horizon
        if n == 1:
            return self.count(name, error, wanted)
        far = self.lifted(error)
        kept = self.kind == "region" or less(far, self.radius.lower, equal=True)
        rounds = self.count(name, far, wanted) if far is not None and kept else None
        return None if rounds is None else rounds * n

    def count(self, name: str, error: Fraction, wanted: Fraction) -> int | None:
        """Steps by one route: the error is led from level to level, rounded up each time."""
        line = self.one(name, name)
        if line is None or wanted < 0:
            return None

        def led(e: Fraction) -> Fraction:
            return line.concludes["gain"] * e + line.concludes["residual"]

        if name == "curve":
            used = [self.proof.lines[n] for n in line.uses]
            radii = used[0].domain.radii if used[0].domain is not None else ()
            highest = levels(used[1 : len(radii) + 1], movement(self.derivation, used[len(radii) + 2 :]))
            by_line = led

            def led(e: Fraction) -> Fraction:
                within = [level for rho, level in zip(radii, highest, strict=True) if rho >= e]
                return min([by_line(e), *within[:1]])

        if not led(wanted) <= wanted:
            return None
        for n in range(MOST_STEPS):
            if error <= wanted:
                return n
            after = led(error)
            if after.denominator.bit_length() > LONG:
                after = Fraction(-((-after * GRAIN) // 1), GRAIN)
            if after >= error:
                return None
            error = after
        return None

    def ranges(self, number: int) -> list[Line]:
        """Proofs of the range that a requirement asks for: proofs/squares.md (4)."""
        return [x for rule in ("range", "squares") if (x := self.one(rule, f"require[{number}]")) is not None]

    def ranged(self, number: int, r: Any) -> Outcome:
        name = f"require[{number}]"
        taken, lines = self.attained(name), self.ranges(number)
        if self.partial:
            lines = [x for x in lines if not x.on_set]
        if self.partial and not (self.domain is not None and self.domain.ball):
            taken = NOTHING  # the region may hold more than the ball that the requirement is about
        if any(x.domain != (self.way or self.domain) for x in lines):
            raise Rejected(f"{name}: over another set than the gain")
        value, on_set = agreed(name, lines), any(x.on_set for x in lines)
        proved = bool(lines) and (self.whole or not on_set)
        proved &= self.whole or self.derivation.motion is None  # that the stance lasts is part of the set's proof
        zero = (Fraction(0), Fraction(0)) if r.kind in ("always", "throughout") else None
        c = zero or (constant(r.constant, self.statement.values) if r.constant is not None else None)
        if c is not None:
            proved = proved and value is not None and compared(r.relation, value, c)
            if opposed(r.relation, taken, c) and not (self.any and (not lines or on_set)):
                return Outcome("refuted", value, taken)
        return Outcome("proved" if proved else "undecided", value, taken)


def agreed(name: str, lines: list[Line]) -> Span | None:
    """What two proofs of the same range show together: proofs/squares.md (4)."""
    if not lines:
        return None
    lower = max((x.concludes["lower"] for x in lines if "lower" in x.concludes), default=None)
    upper = min((x.concludes["upper"] for x in lines if "upper" in x.concludes), default=None)
    if less(upper, lower):
        raise Rejected(f"{name}: its two proofs contradict each other")
    return Span(lower, upper)


def verdict(proved: bool, refuted: bool, span: Span | None) -> Outcome:
    return Outcome("proved" if proved else "refuted" if refuted else "undecided", span)


def far(span: Span) -> Fraction | None:
    """Largest magnitude surely taken."""
    ends = [x for x in (span.upper, None if span.lower is None else -span.lower) if x is not None]
    return max(max(ends), Fraction(0)) if ends else None


def greater(a: Fraction | None, b: Fraction | None) -> Fraction | None:
    """The larger of two lower ends, as far as known."""
    return max((x for x in (a, b) if x is not None), default=None)


def smaller(a: Fraction | None, b: Fraction | None) -> Fraction | None:
    """The smaller of two upper ends, as far as known."""
    return min((x for x in (a, b) if x is not None), default=None)


def less(a: Fraction | None, b: Fraction | None, equal: bool = False) -> bool:
    return a is not None and b is not None and (a < b or (equal and a == b))


def compared(relation: str, span: Span, c: tuple[Fraction, Fraction]) -> bool:
    """Whether every value within the span stands in the relation to the constant, on ends and never by negation."""
    if relation == "<":
        return span.upper is not None and span.upper < c[0]
    if relation == "<=":
        return span.upper is not None and span.upper <= c[0]
    if relation == ">":
        return span.lower is not None and span.lower > c[1]
    return relation == ">=" and span.lower is not None and span.lower >= c[1]


def opposed(relation: str, taken: Span, c: tuple[Fraction, Fraction]) -> bool:
    """Whether a value surely taken breaks the relation."""
    if relation == "<":
        return taken.upper is not None and taken.upper >= c[1]
    if relation == "<=":
        return taken.upper is not None and taken.upper > c[1]
    if relation == ">":
        return taken.lower is not None and taken.lower <= c[0]
    return relation == ">=" and taken.lower is not None and taken.lower < c[0]
