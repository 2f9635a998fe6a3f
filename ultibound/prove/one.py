"""Claims of one state: certified set → routes → orbits → requirements → certificate."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Sequence
from contextlib import suppress
from dataclasses import dataclass, field, replace
from fractions import Fraction
from math import floor, inf, prod

from ..bounding.evaluate import to_float
from ..certificate.certificate import sealed
from ..certificate.enclosing import Encloser, Measured, Proved, Watch
from ..certificate.explaining import Explained
from ..certificate.lines import Writer, downward, upward
from ..certificate.remarks import Remarks, Search
from ..certificate.results import assembled
from ..certificate.squares import Asked, Squares
from ..checker.derive import Derivation
from ..checker.derive import varied as statement_varied
from ..checker.flows import Flows
from ..checker.graph_outcomes import results_of
from ..checker.periodic import ALONE
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..checker.sector import applies
from ..checker.theorems import Variant, levels, movement, sharpest
from ..claim import Bad, Claim, ClaimError
from ..claim.constants import constant
from ..claim.obligations import RANGED, Domain, Obligation, Obligations
from ..claim.provable import varied
from ..contraction.curve import Profile, inward
from ..contraction.orbits import Steering, orbits, slow_path
from ..stance.points import Unsolved
from ..stance.trials import Trial, trial
from .runs import run_out

SHARPER = 1e-2  # factor on the gap when an undecided requirement is pursued
FINEST = 1e-11
COARSE = 0.03
DECIDED = 0.5  # gap at which the sign of what is not near zero is known
ACCURACY = 4e-12  # of the trial trajectories, relative to the largest of them
PADDING = 1e-3  # what a library axis may take beyond what the search found
TARGET_GAP = 1e-8  # suprema are taken over a ball larger by as much: proofs/invariant-set.md (4)
LEAST_SHARE = 1e-3  # of the gap, for a factor of the sector route that nearly cancels
ROUGHER = 10  # the gap of that route's residual, where another is reported, over that of the others
SPARE = 0.01  # share of a smaller ball's radius left free
MOST_ROUGH = 300  # cells of a library over which no curve is followed unless one is asked for
ROUGH, QUICK, FEW, MOST = 3e-2, 8, 1, 60  # gap, leaves a shell and shells of a rough curve; shells of a sharp one
PARTS, PARTED = (1, 4), 1.05  # of a stance for signals of any course, and the ratio to constant ones that is enough
SQUARED_GAP = 1e-3  # of sums of squares
FIRST = 200  # leaves, beside eight a cell, for an inequality before sums of squares are tried
COURSE_GAP = 1e-3  # each part adds a phase and a value of every signal
ASKED, UNASKED = 200, 60  # leaves, beside two a cell, where a requirement is about the gain and where none is
LONG_RUN = ("settles", "bound", "sharp_bound", "radius", "push", "steps")  # which curves and orbits serve
TRIED = 4  # orbits, the furthest first
REACH, ENOUGH = 10_000, 200  # steps of the longest path, and of one that is longer than asked for


@dataclass(frozen=True, slots=True)
class Known:
    """What earlier passes found, by requirement with ranges of its own, or 0: flows that were proved, and ranges."""

    flows: dict[int, tuple[Trial, Flows]] = field(default_factory=dict)
    ranges: dict[int, dict[Hashable, Measured]] = field(default_factory=dict)


def apart(claim: Claim) -> list[int]:
    """Requirements whose `over` asks for a set and routes of their own."""
    return [n for n, r in enumerate(claim.requirements, 1) if r.over and r.kind not in RANGED]


def best(whole: Attempt) -> Attempt:
    """The attempt itself, or one on a smaller ball where nothing larger is kept and that decides no less."""
    if whole.smaller is None or whole.ranges.interrupted:
        return whole
    attempt = Attempt(
        whole.claim, whole.gap, whole.until, whole.watch, whole.sharp, whole.smaller, whole.variant, whole.derivation,
        whole.known, whole.terse,
    )  # fmt: skip
    return attempt if attempt.results.settled and attempt.decided >= whole.decided else whole


class Attempt:
    """One pass through the proof at one gap.

    `sharp`: the error curve is followed to the gap, not just roughly. `within`: a radius smaller than the largest.
    `variant`, `derivation`: one requirement over ranges of its own, and what the checker derives for it.
    `known`: what earlier passes through the same claim found. `terse`: only the verdicts count, with nothing
    said to people and no second argument for what one shows.
    """

    writes: type[Writer] = Writer

    def __init__(
        self,
        claim: Claim,
        gap: float,
        until: float,
        watch: Watch,
        sharp: bool,
        within: Fraction | None = None,
        variant: int = 0,
        derivation: Derivation | None = None,
        known: Known | None = None,
        terse: bool = False,
    ) -> None:
        self.terse = terse
        self.claim, self.gap, self.until, self.watch = claim, gap, until, watch
        self.sharp, self.within = sharp, within
        self.variant, self.derivation, self.known = variant, derivation, Known() if known is None else known
        self.obligations, self.writer = Obligations(claim), self.writes(claim, derivation)
        ranges = self.known.ranges.setdefault(variant, {})
        self.ranges = Encloser(claim, self.obligations.graph, self.writer, gap, until, watch, ranges)
        self.near_region = False
        self.smaller: Fraction | None = None
        self.reach = inf  # radius of a ball from which the steps within a horizon stay in the region (an estimate)
        self.moved = 0.0  # how far held quantities move the target in a step
        self.pairs: dict[str, int] = {}
        self._prove()
        for number in () if variant else apart(claim):
            self._over(number)
        self.results = results_of(self.writer.proof)
        self.remarks = self._remarks()
        self.pursue = any(p for _, p in self.remarks)
        waiting = {
            r.kind
            for r, o in zip(claim.requirements, self.results.requirements, strict=True)
            if o.verdict == "undecided"
        }
        self.curve_may_help = (
            not sharp
            and len(self.obligations.states) == 1
            and not self.results.unsupported
            and bool(waiting & {"settles", "bound", "push", "steps", "radius"})
        )
        self.decided = sum(r.verdict != "undecided" for r in self.results.requirements)
        if not terse:
            self.seal()

    def seal(self) -> None:
        """The certificate of what is on the proof."""
        text = assembled(self.claim, self.results, self.remarks)
        lines = self.writer.pruned(self.results.needed)
        self.certificate = sealed(self.claim, text, lines, self.ranges.interrupted)

    def _remarks(self) -> list[tuple[str | None, bool]]:
        """What limits each requirement, and whether a smaller gap may decide it."""
        state = Search(self.ranges.limits, self.ranges.interrupted, self.near_region)
        told = Explained(self.obligations, self.ranges, self.results, self.moved)
        remarks = Remarks(self.claim, self.obligations, self.results, state, told)
        if not self.terse:
            return remarks.all()
        open_ = [o.verdict == "undecided" and not self.results.unsupported for o in self.results.requirements]
        return [(None, x and remarks.open(n)) for n, x in enumerate(open_, 1)]

    def _prove(self) -> None:
        """Lines for the certified set, the routes on it, orbits in it, and the requirements."""
        o, w = self.obligations, self.writer
        self._flow()
        target = self._target()
        ball = self._ball(target)
        found = w.proof.lines[ball].domain
        radius, beyond = (found.radius, found.beyond) if found is not None else (Fraction(0), Fraction(0))
        ends = target.lower, target.upper
        region = None if self.within is not None else self._region(target)
        domain = Domain("region" if region is not None else "ball", radius, ends, beyond)
        on = ball if region is None else region
        moves = self._moves()
        most = min(target.lower - w.derivation.region()[1][0], w.derivation.region()[1][1] - target.upper)
        way, through = self._course(domain, ball, on, lambda j: self._early(j, domain, on, moves), most)
        for number in range(1, len(o.motion.positive) + 1 if o.motion is not None else 1):
            self.ranges.enclose(o.support(number, through), way, gap=DECIDED, side=-1)
        self._growth(domain, on)
        lost = way == on == ball and self.claim.horizon > 1  # steps within a horizon may leave the region
        if not lost:
            self._slope(domain, on, moves)
            self._split(domain, on, moves)
            self._sector(domain, on, moves)
        far = not self.terse or any(r.kind in LONG_RUN for r in self.claim.requirements)
        if radius > 0 and far:
            self._curve(domain, on, moves, lost)
        invariant = region or self._invariant_ball(ball)
        if invariant is not None:
            for pair in self.pairs.values():
                self._bound(invariant, pair)
            if far:
                self._orbit(invariant)
            self._paths(invariant, target.lower if target.lower == target.upper else None)
        for number, r in enumerate(self.claim.requirements, 1):
            if r.kind in RANGED and not self.variant:
                self._range(number, through, way, domain, on)
        self._run_out(("radius",))

    def _run_out(self, kinds: Sequence[str]) -> None:
        """Runs that refute what is asked of radii (of several states, of steps too): proofs/orbit.md (3), (4)."""
        ground = {ALONE: (self.claim, self.obligations, self.ranges, self.writer.derivation)}
        until = self.until - self.ranges.spent
        run_out(self.claim, self.variant, self.writer, ground, {ALONE: [ALONE]}, until, kinds)

    def _course(
        self, domain: Domain, ball: int, on: int, early: Callable[[int], int | None], most: Fraction
    ) -> tuple[int, Domain]:
        """The steps within a horizon, and where they may lead from the set: proofs/horizon.md (2)."""
        uses = [ball]
        for j in range(1, self.claim.horizon):
            step = early(j)
            if step is None:
                break
            uses.append(step)
            ends = self.writer.proof.lines[step].concludes
            if ends["gain"] > 0:
                self.reach = min(self.reach, to_float((most - ends["residual"]) / ends["gain"]))
            if domain.kind == "region" or ends["gain"] * domain.radius + ends["residual"] > most:
                break
            try:
                course = self.writer.theorem("course", "course", uses, {})
            except Rejected as why:
                self.ranges.limits["course"] = str(why)
                continue
            self.ranges.limits.pop("course", None)
            found = self.writer.domain(course)
            return course, domain if found is None else replace(domain, radius=found.radius, beyond=found.beyond)
        return on, domain

    def _early(self, steps: int, domain: Domain, on: int, moves: list[Proved] | None) -> int | None:
        """Gain and residual of fewer steps than the horizon, to no more than it takes."""
        o = self.obligations
        slope = self.ranges.enclose(o.slope(domain, steps=steps), on, True, points=False, gap=COARSE)
        miss = self.ranges.enclose(o.miss(steps=steps), None, True, points=False, gap=COARSE)
        if slope is None or miss is None or moves is None:
            return None
        concludes = {"gain": upward(slope.size), "residual": upward(miss.size + self._moved(moves))}
        uses = [slope.line, miss.line, *(m.line for m in moves)]
        return self.writer.theorem("slope", f"slope@{steps}", uses, concludes)

    def _growth(self, domain: Domain, on: int) -> None:
        """How pushes within the stance grow, where they are asked for: proofs/stance.md (6)."""
        o = self.obligations
        asked = [r for n, r in enumerate(self.claim.requirements, 1) if n == self.variant or not self.variant]
        for s in dict.fromkeys(r.state for r in asked if r.during and r.stance is None and not r.over):
            for x in o.states:
                growth = o.growth(domain, x, s or "")
                if len(o.states) == 1:  # nothing counts but the magnitude
                    self.ranges.enclose(growth, on, magnitude=True, points=False)
                    continue
                rough = self.ranges.search(growth, True, COARSE)
                floor = self.gap * max(abs(rough.upper), abs(rough.lower))  # either end is as close as the larger needs
                self.ranges.enclose(growth, on, points=False, floor=floor)

    def _flow(self) -> None:
        """The flow of the stance over all that its rates depend on: proofs/trajectory.md."""
        m = self.obligations.motion
        if m is None:
            return

        def watch(done: int, total: int) -> None:
            self.watch("the flow of the stance", done, float(total))

        try:
            if self.variant not in self.known.flows:
                spans = {p.name: self._span(p.gate, p.grid) for p in m.parameters}
                found = trial(self.obligations.graph, m, self.claim.libraries, spans, ACCURACY, watch=watch)
                self.known.flows[self.variant] = found, self.writer.flows_of(found.witness)
            found, flows = self.known.flows[self.variant]
            self.ranges.flows = found.table
            self.writer.trajectory(found.witness, flows)
        except (Rejected, Undefined, Unsolved) as why:
            self.ranges.limits["flow"] = str(why)

    def _span(self, gate: int, grid: tuple[Fraction, ...] | None) -> tuple[Fraction, Fraction]:
        """Ends between which a parameter of the rates surely stays, but for what a library cannot be read at."""
        o = self.obligations
        found = o.graph.gates[gate]
        if found.op == "variable":
            low, high = o.spread(found.name)
        else:
            ends = self.ranges.search(o.ranging(gate), False, COARSE)
            room = Fraction(PADDING * max(ends.upper - ends.lower, abs(ends.upper), abs(ends.lower)))
            low, high = Fraction(ends.lower) - room, Fraction(ends.upper) + room
        return (low, high) if grid is None else (max(low, grid[0]), min(high, grid[-1]))

    def _range(self, number: int, through: Domain, way: int, domain: Domain, on: int) -> None:
        """The range of a requirement wherever a step may start; points of it are in the set itself."""
        self._ranged(number, through, way, points=way == on)
        if way != on:
            with suppress(Bad):
                self.ranges.points(self.obligations.requirement(number, domain), on)

    def _ranged(self, number: int, domain: Domain, on: int, points: bool) -> None:
        """The range of a requirement; of an inequality only as closely as it takes to decide it."""
        r, name = self.claim.requirements[number - 1], f"require[{number}]"
        try:
            obligation = self.obligations.requirement(number, domain)
            if r.kind in ("always", "throughout"):
                self._inequality(number, obligation, on, points)
                return
            self.ranges.enclose(obligation, on, points=points)
            if r.kind == "sensitivity" and not self.terse:  # by an argument of its own, as near as another
                self._squared(number, on, {"lower": inf, "upper": -inf})
        except Bad as why:
            self.ranges.limits[name] = str(why)

    def _inequality(self, number: int, obligation: Obligation, on: int, points: bool) -> None:
        """Left minus right; sums of squares are tried before subdivision is taken to its limit."""
        side = 1 if self.claim.requirements[number - 1].relation in ("<", "<=") else -1
        few = min(FIRST + 8 * prod(len(v.cells) for v in obligation.variables), self.claim.cells)
        found = self.ranges.search(obligation, False, DECIDED, side=side, cells=few)
        if found.stopped == "cells":
            breaking, shown = self._squared(number, on, {"upper" if side > 0 else "lower": 0.0})
            if breaking and points:
                self.ranges.point(obligation, breaking, on)
            if breaking or shown:
                self.ranges.enclose(obligation, on, points=points, gap=DECIDED, side=side, cells=min(UNASKED, few))
                return
        if found.stopped == "cells" and few < self.claim.cells:
            found = self.ranges.search(obligation, False, DECIDED, side=side)
        if min(found.upper * side, found.lower * side) < 0 or (found.upper if side > 0 else -found.lower) < 0:
            self.ranges.enclose(obligation, on, points=points, gap=DECIDED, side=side)
        else:
            self.ranges.enclose(obligation, on, points=points)

    def _squared(self, number: int, on: int, enough: dict[str, float]) -> tuple[dict[str, Fraction], bool]:
        """Ends of a requirement by sums of squares, which use nothing of its range: proofs/squares.md.

        A point that seems to break it, and whether they are enough.
        """
        name = f"require[{number}]"
        asked = Asked(name, on, enough, SQUARED_GAP, self.until - self.ranges.spent, self.watch)
        search = Squares(self.writer, asked)
        try:
            line, why = search.line()
        except KeyboardInterrupt:
            self.ranges.interrupt()
            return {}, False
        self.ranges.limits[f"squares of {name}"] = why
        shown = {} if line is None else self.writer.proof.lines[line].concludes
        return search.breaking, bool(shown) and all(
            x >= enough[n] if n == "lower" else x <= enough[n] for n, x in shown.items()
        )

    def _over(self, number: int) -> None:
        """A requirement over ranges of its own: a proof of the same kind, whose lines are taken in."""
        derivation = Derivation(statement_varied(self.writer.derivation.statement, number))
        claim = varied(self.claim, number)
        own = best(
            type(self)(
                claim, self.gap, self.until, self.watch, self.sharp, None, number, derivation, self.known, self.terse
            )
        )
        self.ranges.interrupted |= own.ranges.interrupted
        self.writer.adopt(own.writer, Variant(0, number), own.results.needed)

    def _target(self, state: str = "") -> Proved:
        s, claim = state or self.obligations.state, self.claim
        target = self.ranges.enclose(self.obligations.target(s), None, gap=min(self.gap, TARGET_GAP))
        if target is None:
            raise ClaimError.of(
                claim.place, f"target.{s}", "no finite range of the target can be shown; state it in a simpler form"
            )
        self._target_inside(s, self.writer.derivation.region(s)[0])
        return target

    def _ball(self, target: Proved) -> int:
        """The largest ball about the target inside the region, or the smaller one that is tried."""
        inner = self.writer.derivation.region()[1]
        radius = min(target.lower - inner[0], inner[1] - target.upper)
        if radius < 0:
            place, name = self.claim.place, f"target.{self.obligations.state}"
            raise ClaimError.of(place, name, "cannot be shown to lie inside the region; widen the region a little")
        if self.within is not None:
            concludes = {"radius": downward(min(radius, self.within))}
            return self.writer.theorem("smaller-ball", "ball", [target.line], concludes)
        return self.writer.largest_ball(target.line, radius)

    def _region(self, target: Proved) -> int | None:
        """The line that the region is mapped into itself, where it is: proofs/invariant-set.md (1)."""
        for gap in (COARSE, self.gap):  # only inclusion counts: few leaves show it where there is room
            image = self.ranges.enclose(self.obligations.image(), None, points=gap == self.gap, gap=gap)
            if image is not None:
                try:
                    return self.writer.theorem("invariant-region", "invariant", [target.line, image.line], {})
                except Rejected:
                    low, high = self.obligations.region()[1]
                    self.near_region = low <= image.least and image.most <= high
        return None

    def _moves(self) -> list[Proved] | None:
        """How the target moves with held quantities that change: proofs/slope.md (3)."""
        found = [self.ranges.enclose(self.obligations.target_slope(h), None, True) for h in self.obligations.moving()]
        known = [m for m in found if m is not None]
        return known if len(known) == len(found) else None

    def _moved(self, moves: list[Proved]) -> Fraction:
        return movement(self.writer.derivation, [self.writer.proof.lines[m.line] for m in moves])

    def _slope(self, domain: Domain, on: int, moves: list[Proved] | None) -> None:
        """Gain and residual of the slope route: proofs/slope.md."""
        self.moved = to_float(self._moved(moves)) if moves else 0.0
        slope = self.ranges.enclose(self.obligations.slope(domain), on, magnitude=True)
        # the residual is a sum: its gap, not that of one part, is what counts
        floor = self.gap * self.moved
        miss = self.ranges.enclose(self.obligations.miss(), None, magnitude=True, floor=floor)
        self._pair("slope", slope, miss, moves)
        self._courses("slope", slope, domain, on)

    def _split(self, domain: Domain, on: int, moves: list[Proved] | None) -> None:
        """Gain and residual of the split route, where a correction is named: proofs/split.md."""
        if self.claim.correction:
            try:
                of_slope, of_kept = self.obligations.split_slope(domain), self.obligations.split_residual(domain)
            except Bad as why:  # the rates of a stance rest on the correction
                self.ranges.limits["split"] = str(why)
                return
            slope = self.ranges.enclose(of_slope, on, magnitude=True)
            floor = self.gap * self.moved
            kept = self.ranges.enclose(of_kept, on, magnitude=True, floor=floor)
            self._pair("split", slope, kept, moves)
            self._courses("split", slope, domain, on)

    def _sector(self, domain: Domain, on: int, moves: list[Proved] | None) -> None:
        """Gain and residual of the sector route, where exactly one correction is named: proofs/sector.md."""
        if moves is None or not self.claim.correction or not applies(self.writer.derivation.statement):
            return
        try:
            obligations = self.obligations.sector(domain)
        except Bad as why:
            self.ranges.limits["sector"] = str(why)
            return
        *bands, start, kept = obligations
        # 1 + c m may be small where c m is near -1: its gap, not that of c or m, is what counts
        (c0, c1), (m0, m1) = ((x.lower, x.upper) for x in (self.ranges.search(b, False, COARSE) for b in bands))
        products = [c * m for c in (c0, c1) for m in (m0, m1)]
        size = max(abs(p) for p in products)
        share = min(1.0, max(abs(1 + p) for p in products) / size) if size > 0 else 1.0
        gap = max(self.gap * max(share, LEAST_SHARE) / 2, FINEST)
        found = [self.ranges.enclose(b, on, gap=gap) for b in bands]
        found.append(self.ranges.enclose(start, None, magnitude=True))
        rough = self.gap * (1 if self.claim.route == "sector" else ROUGHER)
        found.append(self.ranges.enclose(kept, on, magnitude=True, gap=rough, floor=rough * self.moved))
        known = [x for x in found if x is not None]
        if len(known) == len(found):
            sensitivity, slope, begun, residual = known
            k = max(abs(1 + c * m) for c in (sensitivity.lower, sensitivity.upper) for m in (slope.lower, slope.upper))
            rest = residual.size + sensitivity.size * begun.size + self._moved(moves)
            uses = [p.line for p in (*known, *moves)]
            concludes = {"gain": upward(k), "residual": upward(rest)}
            self.pairs["sector"] = self.writer.theorem("sector", "sector", uses, concludes)

    def _courses(self, route: str, slope: Proved | None, domain: Domain, on: int) -> None:
        """Slopes under signals of any course, where constant ones do not tell: proofs/signals.md."""
        if slope is None or not self.obligations.loose(route):
            return
        asked = any(r.kind == "gain" for r in self.claim.requirements)
        enough = PARTED * to_float(max(slope.most, -slope.least))  # of what constant signals attain
        for parts in PARTS if asked else PARTS[:1]:
            try:
                of_any = self.obligations.under_any_course(domain, parts, route)
            except Bad as why:
                self.ranges.limits[f"signal-slope ({route})"] = str(why)
                return
            gap, tops = max(self.gap, COURSE_GAP), prod(len(v.cells) for v in of_any.variables)
            cells = 2 * tops + (ASKED if asked else UNASKED)
            found = self.ranges.enclose(of_any, on, magnitude=True, points=False, gap=gap, cells=cells)
            if found is not None and to_float(found.size) <= enough:
                return

    def _pair(self, route: str, slope: Proved | None, residual: Proved | None, moves: list[Proved] | None) -> None:
        if slope is not None and residual is not None and moves is not None:
            concludes = {"gain": upward(slope.size), "residual": upward(residual.size + self._moved(moves))}
            uses = [p.line for p in (slope, residual, *moves)]
            self.pairs[route] = self.writer.theorem(route, route, uses, concludes)

    def _curve(self, domain: Domain, on: int, moves: list[Proved] | None, lost: bool) -> None:
        """Shells of the error curve, the line above them and the sharp bound: proofs/curve.md."""
        o, w, claim = self.obligations, self.writer, self.claim
        cells = prod(len(v.cells) for v in o.slope(domain).variables)
        if moves is None or (cells > MOST_ROUGH and not self.sharp):  # over so many even a rough curve would cost more
            return
        (low, high), ends = o.region()[0], domain.target
        outermost = domain.outer if domain.kind == "ball" else max(ends[1] - low, high - ends[0])
        error = o.error(domain, outermost)
        profile = Profile(self.ranges.runner(error, False), error, f"error({o.state})", to_float(self._moved(moves)))
        if domain.kind == "ball":
            kept = profile.largest_kept(SPARE)
            if lost and kept is not None and self.reach < kept:
                kept = self.reach * (1 - SPARE)
                kept = kept if profile.at(kept) * (1 + SPARE) < kept else None
            if kept is not None and self.within is None and kept < 0.995 * to_float(outermost):
                self.smaller = Fraction(f"{kept:.4g}")
        if lost:
            return

        def level(rho: Fraction) -> float:
            if not self.sharp:
                return profile.at(to_float(rho))
            found = self.ranges.search(o.error(domain, rho), True, gap)
            return max(abs(found.upper), abs(found.lower)) + self.moved

        k = profile.slope()
        # what is lost in a shell is lost again in each that it leads into: the gap over 1 - k
        gap, cells = (self.gap * to_float(1 - k) / 3, claim.cells) if self.sharp else (ROUGH, QUICK)
        radii = inward(outermost, level, 2 * gap, MOST if self.sharp else FEW)
        written = w.shells(radii, k, on)
        found = []
        for j in range(1, len(radii) + 1):
            shell = self.ranges.enclose(o.shell(j, domain, radii), written, True, points=False, gap=gap, cells=cells)
            if shell is None:
                return
            found.append(shell.line)
        above = self.ranges.enclose(o.line(domain, k), written, points=False, gap=gap, cells=cells, side=1)
        if above is None:
            return
        moved = self._moved(moves)
        uses = [written, *found, above.line, *(m.line for m in moves)]
        sharp = sharpest(radii, levels([w.proof.lines[n] for n in found], moved))
        residual = max(above.upper, Fraction(0)) + moved
        concludes = {"gain": upward(k), "residual": upward(residual), "sharp": upward(sharp)}
        self.pairs["curve"] = w.theorem("curve", "curve", uses, concludes)

    def _invariant_ball(self, ball: int) -> int | None:
        """proofs/invariant-set.md (3), by any route."""
        for pair in self.pairs.values():
            try:
                return self.writer.theorem("invariant-ball", "invariant", [ball, pair], {})
            except Rejected:
                continue
        return None

    def _bound(self, invariant: int, pair: int) -> None:
        found = self.writer.proof.lines[pair]
        if found.concludes["gain"] < 1:
            bound = found.concludes["residual"] / (1 - found.concludes["gain"])
            self.writer.theorem("ultimate-bound", f"bound[{found.rule}]", [invariant, pair], {"bound": upward(bound)})

    def _steering(self) -> Steering:
        o = self.obligations
        held = frozenset(n for n, q in self.claim.uncertain.items() if q.held)
        target = self.ranges.runner(o.target(), False)
        return Steering(self.ranges.runner(o.image(), False), o.image(), o.target(), target, o.state, held)

    def _orbit(self, invariant: int) -> None:
        """A periodic orbit as far from the target as the search finds one: proofs/orbit.md (1)."""
        domain = self.writer.domain(invariant)
        if self.ranges.interrupted or domain is None:
            return
        low, high = self.writer.derivation.region()[1]
        reach = (
            to_float(domain.radius) if domain.ball else to_float(max(high - domain.target[0], domain.target[1] - low))
        )
        found = sorted(orbits(self._steering(), [0.9 * reach, -0.9 * reach]), key=lambda x: -x[0])
        for _, course in found[:TRIED]:
            if self.writer.orbit(course.start, course.held, course.steps, invariant):
                return

    def _paths(self, invariant: int, target: Fraction | None) -> None:
        """A slow path for each `steps` requirement: proofs/orbit.md (2)."""
        values = self.claim.values
        for r in self.claim.requirements:
            if r.kind == "steps" and not r.over and r.start is not None and r.end is not None:
                start, end = constant(r.start, values)[0], constant(r.end, values)[1]
                asked = REACH if r.constant is None else floor(constant(r.constant, values)[1]) + 1
                most = min(REACH, max(asked, ENOUGH))
                course = slow_path(self._steering(), start, to_float(end), most, target)
                if course is not None:
                    self.writer.path(course.start[0], course.held, course.steps, invariant)

    def _target_inside(self, s: str, region: tuple[Fraction, Fraction]) -> None:
        for n, line in self.writer.proof.lines.items():
            met = (line.part, line.rule, line.proves) == (self.writer.part, "point", f"target[{s}]")
            if met and (line.concludes["lower"] > region[1] or line.concludes["upper"] < region[0]):
                at = self.writer.raw[n - 1]["witness"]["at"]
                where = ", ".join(f"{k} = {float(Fraction(v)):.6g}" for k, v in at.items() if not v.startswith("#"))
                value = float(line.concludes["lower"])
                raise ClaimError.of(
                    self.claim.place, f"target.{s}",
                    f"takes the value {value:.6g}{' at ' + where if where else ''}, outside the region "
                    f"[{float(region[0]):.6g}, {float(region[1]):.6g}]; widen the region or narrow the held quantities",
                )  # fmt: skip
