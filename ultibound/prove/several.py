"""Claims of several states: targets → set → metric → what contracts in it → requirements (proofs/several.md)."""

from __future__ import annotations

import time
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import replace
from fractions import Fraction
from typing import TYPE_CHECKING

import numpy as np

from ..bounding.evaluate import to_float
from ..bounding.intervals import Floats
from ..bounding.search import Effort
from ..certificate.attracting import JOINED
from ..certificate.enclosing import BITS, TWICE, Proved
from ..certificate.lines import downward, upward
from ..certificate.norms import NormWriter, moves_of
from ..certificate.several import SeveralRemarks
from ..checker.jacobians import OF_ROUTE, sloped
from ..checker.matrices import Leaf, Matrix, Metric, metric
from ..checker.numerals import decimal_up
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..claim import Bad, ClaimError
from ..claim.constants import constant
from ..claim.obligations import RANGED, Domain, Obligation, Variable
from ..contraction.metrics import Proposal, proposals
from ..contraction.norms import Matrices, Norm, Stretched, floats, stretched
from ..contraction.rounds import MOST_HELD, courses
from ..contraction.samples import combinations, drawn
from ..contraction.words import Word, fastest
from . import sides
from .closing import Table, closed_in
from .one import COARSE, DECIDED, Attempt
from .runs import map_of

if TYPE_CHECKING:
    from ..certificate.lines import Writer

SAMPLES = 300
FEW, FEWER = 3000, 24  # leaves of a search that only compares metrics; of one that is tried first
NOTABLE = 0.8  # of the size of a bound: what another metric has to lower it to
LENGTHS = ("gain", "residual", "bound")  # in the norm itself: where none is asked for, it may be less close
SPARED = 2
DIGITS = 12  # of the unit of a metric
COST, LEAST = 12, 300  # an entry of a leaf counts as so many cells, exact arithmetic being what it is; leaves allowed
SPARE = 1 - 1e-9
ORBIT_BITS = 128
MOST_BASES = 2  # for comparisons, beside the states and the metric itself
LOOKS = 2  # at samples: of the region, then of the ball found
SHARES = (0.7, 0.5, 0.35, 0.25, 0.15, 0.1, 0.05, 0.02)  # of the largest ball, where that is not kept


class SeveralAttempt(Attempt):
    """One pass through the proof of a claim of several states at one gap."""

    writes: type[Writer] = NormWriter
    writer: NormWriter
    others: list[Proposal]
    chosen: Proposal
    norm: Metric
    domain: Domain
    needed = 0  # leaves that showed the ball to be kept
    shrunk = False  # whether the ball is smaller than the largest in the region

    def _prove(self) -> None:
        """Lines for the set and its metric, gain and residual, bounds by state, and the requirements."""
        o, w = self.obligations, self.writer
        self._flow()
        self.leaves: dict[str, list[Leaf]] = {}
        self.targets = [self._target(s) for s in o.states]
        self.routes = self._known_routes()
        images = self._images()
        self._settled(images)
        number = w.metric(self.chosen.kind, self.chosen.rows, self.chosen.inverse)
        lines = [t.line for t in self.targets]
        ball = w.about(number, lines, self.domain.radius, not self.shrunk)
        found = w.proof.lines[ball].domain
        on = ball
        if images is not None:
            on = w.append("invariant-region", "invariant", [number, *lines, *images], {}, {})
        elif found is not None:
            self.domain = self._within(self.norm, found.radius, found.beyond)
        moves = self._movements()
        way, through = self._course(self.domain, ball, on, lambda j: self._step(j, on, moves), self._largest(self.norm))
        for k in range(1, len(o.motion.positive) + 1 if o.motion is not None else 1):
            self.ranges.enclose(o.support(k, through), way, gap=DECIDED, side=-1)
        self._growth(self.domain, on)
        lost = way == on == ball and self.claim.horizon > 1  # steps within a horizon may leave the region
        known = [] if lost else self.routes
        taken = {x: norms for x in known if (norms := self._taken(x, on)) is not None}
        pairs = {x: n for x, norms in taken.items() if (n := self._contraction(x, norms, moves)) is not None}
        for x in ("slope", "split") if self.claim.correction else ("slope",):
            self._growing(on, pairs.get(x), OF_ROUTE[x][0])
        tables = {x: self._entries(x, norms, on) for x, norms in taken.items()}
        kept = self._kept(ball, list(pairs.values()), tables.get("slope", []), moves) if images is None else on
        for pair in pairs.values():
            if kept is not None:
                self._bound(kept, pair)
        if kept is not None and moves is not None:
            for table in (table for each in tables.values() for table in each):
                w.componentwise(kept, *table, moves)
            if "slope" in taken:
                closed_in(self, kept, *taken["slope"], moves, list(self._bases()))
            if "slope" in pairs:
                self._orbits([kept, pairs["slope"]])
        for k, r in enumerate(self.claim.requirements, 1):
            if r.kind in RANGED and not self.variant:
                self._range(k, through, way, self.domain, on)
        self._run_out(("steps", "radius", "push"))

    def _known_routes(self) -> list[str]:
        """The routes that gain and residual may come from, the one that is asked for first.

        Where split has a slope that no norm makes less than 1, as with one correction of several states, it says
        nothing.
        """
        if not self.claim.correction:
            return ["slope"]
        spans = tuple((t.lower, t.upper) for t in self.targets)
        try:
            matrices = self.matrices("split-slopes", Domain("region", Fraction(0), spans[0], targets=spans))
        except Bad as why:  # the rates of a stance rest on the correction
            self.ranges.limits["split"] = str(why)
            return ["slope"]
        still = {
            s: (to_float(low) + to_float(high)) / 2
            for s, (low, high) in zip(self.obligations.states, spans, strict=True)
        }
        at = drawn(Obligation("samples", 0, "", tuple(matrices.variables), False), SAMPLES, np.random.default_rng(0))
        for k, v in enumerate(matrices.variables):
            at[:, k] = still.get(v.name, at[:, k])
        found = matrices.at(at)
        good = found[np.isfinite(found).all(axis=(1, 2))]
        if not len(good) or np.abs(np.linalg.eigvals(good)).max() > SPARE:
            return ["slope"]
        return ["split", "slope"] if self.claim.route == "split" else ["slope", "split"]

    def _images(self) -> list[int] | None:
        """The lines that the region is mapped into itself, state by state, where it is: invariant-set.md (1)."""
        found: dict[str, Proved] = {}
        for gap in (COARSE, self.gap):
            for s in self.obligations.states:
                image = self.ranges.enclose(self.obligations.image(s), None, points=True, gap=gap)
                if image is None:
                    return None
                found[s] = image
                low, high = self.writer.derivation.region(s)[1]
                if image.least < low or image.most > high:  # a point leaves it
                    return None
            inner = {s: self.writer.derivation.region(s)[1] for s in found}
            if all(inner[s][0] <= x.lower and x.upper <= inner[s][1] for s, x in found.items()):
                return [x.line for x in found.values()]
        self.near_region = True
        return None

    def _settled(self, images: list[int] | None) -> None:
        """The metric, and the set it is one of: `chosen`, `norm`, `domain`."""
        n = len(self.obligations.states)
        spans = tuple((t.lower, t.upper) for t in self.targets)
        domain = region = Domain("region", Fraction(0), spans[0], targets=spans)
        self.leading = self.routes[0]
        best: tuple[float, Proposal, Metric, Domain, int] | None = None
        looks = [route for route in self.routes for _ in range(1 if images is not None else LOOKS)]
        for k, route in enumerate(looks):
            proposed = self._proposed(domain, route)
            for p, cells in [*((p, FEWER) for p in proposed), *((p, FEW) for p in proposed)]:
                if cells == FEW and best is not None and best[0] < np.inf:
                    break
                norm = metric(p.kind, p.rows, p.inverse, n)
                ball = self._within(norm, self._largest(norm))
                fits = p.gain < 1 or len(looks) == 1  # the region is the set in any metric
                size = self._size(p, ball, route, cells) if images is None else 0.0 if fits else np.inf
                if best is None or size < best[0] * NOTABLE:
                    best, self.leading = (size, p, norm, ball, self.needed), route
            if best is not None and best[0] < np.inf:
                break
            again = k + 1 < len(looks) and looks[k + 1] == route
            domain = best[3] if best is not None and again else region
        if best is None:
            p = self._plain()
            norm = metric(p.kind, p.rows, p.inverse, n)
            best = np.inf, p, norm, self._within(norm, self._largest(norm)), 0
        _, self.chosen, self.norm, self.domain, self.needed = best
        if images is not None:
            self.domain = Domain("region", self.domain.radius, spans[0], targets=spans)
        elif best[0] == np.inf and not self._many_sided():
            self._shrunk()

    def _many_sided(self) -> bool:
        """A ball of many sides that is kept, where none of the other norms has one."""
        p = sides.proposed(self)
        if p is None:
            return False
        self.chosen = scaled(p)
        self.norm = metric(p.kind, self.chosen.rows, self.chosen.inverse, len(self.targets))
        self.domain = self._within(self.norm, self._largest(self.norm))
        return True

    def _weights(self) -> tuple[Fraction, ...] | None:
        """Of a box that the claim asks for: 1 where it names none."""
        claim = self.claim
        if claim.metric != "box" and not claim.weights:
            return None
        given = {s: constant(w, claim.values)[0] for s, w in claim.weights.items()}
        return tuple(given.get(s, Fraction(1)) for s in self.obligations.states)

    def _plain(self) -> Proposal:
        """The states as they are, or by the claim's weights, where no metric is proposed."""
        n = len(self.obligations.states)
        kind, weights = self.claim.metric, self._weights()
        scale = weights or (Fraction(1),) * n
        rows = tuple(tuple(scale[i] if i == j else Fraction(0) for j in range(n)) for i in range(n))
        inverse = tuple(tuple(1 / scale[i] if i == j else Fraction(0) for j in range(n)) for i in range(n))
        return Proposal("box" if weights or kind == "auto" else kind, rows, inverse, np.inf, np.inf, 0.0)

    def _shrunk(self) -> None:
        """A smaller ball that is kept, if the largest is not."""
        for share in SHARES:
            smaller = self._within(self.norm, Fraction(f"{to_float(self.domain.radius) * share:.4g}"))
            if self._size(self.chosen, smaller, self.leading, FEW) < np.inf:
                self.domain, self.shrunk = smaller, True
                return

    def _proposed(self, domain: Domain, route: str) -> list[Proposal]:
        """Metrics proposed from samples of what a route takes over a set (estimates)."""
        rng = np.random.default_rng(0)
        room = np.array([to_float(x) for x in self.rooms()])
        # a target on the edge: any scale will do
        room = np.where(room > 0, room, max(float(room.max()), 0.0) or 1.0)
        weights, asked = self._weights(), self.claim.metric
        self.others, found = [], list[Proposal]()
        early = self.claim.horizon > 1 and route == "slope"
        for steps in ("@1", "") if early else ("",):  # each of the steps has to keep the ball as well
            jacobians, missed = (self.sampled(self.matrices(f"{x}{steps}", domain), rng) for x in OF_ROUTE[route])
            self.others += [scaled(p) for p in proposals(jacobians, missed[:, :, 0], room)]
            if weights is not None:
                found += proposals(jacobians, missed[:, :, 0], room, "box", weights)
            elif asked != "auto":
                found += [scaled(p) for p in proposals(jacobians, missed[:, :, 0], room, asked)]
        return found if weights is not None or asked != "auto" else self.others

    def sampled(self, matrices: Matrices, rng: np.random.Generator) -> Floats:
        at = drawn(Obligation("samples", 0, "", tuple(matrices.variables), False), SAMPLES, rng)
        found = matrices.at(matrices.into(at))
        good: Floats = found[np.isfinite(found).all(axis=(1, 2))]
        return good

    def rooms(self) -> list[Fraction]:
        """How far the target of each state is from the edge of its region, at least."""
        regions = [self.writer.derivation.region(s)[1] for s in self.obligations.states]
        return [min(t.lower - low, high - t.upper) for t, (low, high) in zip(self.targets, regions, strict=True)]

    def _largest(self, norm: Metric) -> Fraction:
        found = min(x / norm.support(i) for i, x in enumerate(self.rooms()))
        if found < 0:
            s = self.obligations.states[min(range(len(self.targets)), key=lambda i: self.rooms()[i])]
            place = self.claim.place, f"target.{s}"
            raise ClaimError.of(*place, "cannot be shown to lie inside the region; widen the region a little")
        return Fraction(downward(found))

    def _within(self, norm: Metric, radius: Fraction, beyond: Fraction = Fraction(0)) -> Domain:
        spans = tuple((t.lower, t.upper) for t in self.targets)
        wide = tuple(norm.support(i) for i in range(len(spans)))
        return Domain("ball", radius, spans[0], beyond, spans, wide)

    def matrices(self, proves: str, domain: Domain, norm: Metric | None = None) -> Matrices:
        """The entries of a matrix over a set, ready to run."""
        o = self.obligations
        kind, _, after = proves.partition("@")
        rows = [[self._miss(s, int(after or 0))] for s in o.states]
        if kind == "slopes":
            rows = [[self._entry(domain, s, x, int(after or 0)) for x in o.states] for s in o.states]
        elif kind == "split-slopes":
            rows = [[o.split_slope(domain, s, x) for x in o.states] for s in o.states]
        elif kind == "split-residuals":
            rows = [[self._kept_by_gait(domain, s)] for s in o.states]
        elif kind == JOINED:
            rows = [[*(o.slope(domain, s, x) for x in o.states), self._miss(s)] for s in o.states]
        ready = [[(x, self.ranges.runner(x, False)) for x in row] for row in rows]
        if domain.kind != "ball" or norm is None:
            return Matrices(ready)
        names = [v.name for v in Matrices(ready).variables]
        return Matrices(ready, lambda x: self._into(x, names, domain, norm))

    def _entry(self, domain: Domain, s: str, x: str, steps: int = 0) -> Obligation:
        return self.obligations.slope(domain, s, x, steps)

    def _miss(self, s: str, steps: int = 0) -> Obligation:
        return self.obligations.miss(s, steps)

    def _kept_by_gait(self, domain: Domain, s: str) -> Obligation:
        return self.obligations.split_residual(domain, s)

    def _form(self, proves: str, norm: Metric) -> Norm:
        """The norm in which a matrix is seen."""
        inverse = (floats(norm.tips).T if norm.many else floats(norm.inverse)) if sloped(proves) else None
        if proves == JOINED:
            inverse = np.diag([*np.diag(floats(norm.inverse)), 1.0])
        return Norm(floats(norm.rows), inverse, norm.kind == "ellipsoid", norm.many and sloped(proves))

    def _into(self, x: Floats, names: list[str], domain: Domain, norm: Metric) -> Floats:
        """Points moved towards the target until they lie in the ball."""
        v, centre = floats(norm.rows), [(to_float(a) + to_float(b)) / 2 for a, b in domain.targets]
        error, places = np.zeros((len(x), len(centre))), []
        for i, s in enumerate(self.obligations.states):
            for name, middle in ((s, centre[i]), (f"error({s})", 0.0)):
                if name in names:
                    k = names.index(name)
                    error[:, i] = x[:, k] - middle
                    places.append((k, i, middle))
        size = np.linalg.norm(error @ v.T, axis=1) if norm.kind == "ellipsoid" else np.abs(error @ v.T).max(axis=1)
        share = np.minimum(1.0, to_float(domain.radius) * SPARE / np.maximum(size, 1e-300))
        moved = x.copy()
        for k, i, middle in places:
            moved[:, k] = middle + error[:, i] * share
        return moved

    def searched(
        self,
        proves: str,
        domain: Domain,
        norm: Metric,
        gap: float,
        cells: int,
        enough: float = -np.inf,
        later: float = 0.0,
        form: Norm | None = None,
    ) -> Stretched:
        """`form`: the norm in which the matrix is seen, where it is not the set's own."""

        def watch(leaves: int, high: float) -> None:
            self.watch(f"{proves} of {len(self.obligations.states)} states", leaves, high)

        matrices, form = self.matrices(proves, domain, norm), form or self._form(proves, norm)
        effort = Effort(gap, cells, self.ranges.until - self.ranges.spent, watch, later=later)
        try:
            return stretched(matrices, form, effort, enough)
        except KeyboardInterrupt:
            self.ranges.interrupt()
            return stretched(matrices, form, replace(effort, until=0.0), enough)

    def _size(self, p: Proposal, ball: Domain, route: str, cells: int) -> float:
        """The largest share of its room that a state's bound takes; inf where the ball is not kept (estimates)."""
        norm = metric(p.kind, p.rows, p.inverse, len(self.obligations.states))
        slopes, rest = OF_ROUTE[route]
        miss = self.searched(rest, ball, norm, COARSE, FEW).upper + self._shift(norm)
        radius = to_float(ball.radius)
        most = SPARE - miss / radius if radius > 0 else 0.0
        if not (most > 0 and miss < np.inf):
            return np.inf
        found = self.searched(slopes, ball, norm, COARSE, cells, most if cells == FEW else -np.inf)
        k = found.upper
        if not k <= most:
            return np.inf
        self.needed = found.leaves
        if not self._goes(ball, norm):
            return np.inf
        shares = [to_float(norm.support(i)) / max(to_float(x), 1e-300) for i, x in enumerate(self.rooms())]
        return miss / (1 - k) * max(shares)

    def _goes(self, ball: Domain, norm: Metric) -> bool:
        """Whether the steps within a horizon stay in the region (an estimate): proofs/horizon.md (2)."""
        radius, rooms = to_float(ball.radius), [to_float(x) for x in self.rooms()]
        for j in range(1, self.claim.horizon):
            k = self.searched(f"slopes@{j}", ball, norm, COARSE, FEW).upper
            far = k * radius + self.searched(f"misses@{j}", ball, norm, COARSE, FEW).upper + self._shift(norm)
            if j == 1 and far <= radius * SPARE:
                return True
            if not all(far * to_float(norm.support(i)) <= room * SPARE for i, room in enumerate(rooms)):
                return False
        return True

    def _shift(self, norm: Metric) -> float:
        """How far held quantities move the target in a step, in a norm (an estimate)."""
        return to_float(norm.length([Fraction(x) for x in self.target_moves()]))

    def target_moves(self) -> Floats:
        """How far held quantities move the target of each state in a step (estimates)."""
        far = dict.fromkeys(self.obligations.states, 0.0)
        for s, h in moves_of(self.writer):
            found = self.ranges.search(self.obligations.target_slope(h, s), True, COARSE)
            far[s] += max(abs(found.upper), abs(found.lower)) * to_float(self.obligations.change(h))
        return np.array(list(far.values()))

    def _movements(self) -> list[int] | None:
        found = [self.ranges.enclose(self.obligations.target_slope(h, s), None, True) for s, h in moves_of(self.writer)]
        return None if any(x is None for x in found) else [x.line for x in found if x is not None]

    def _step(self, steps: int, on: int, moves: list[int] | None) -> int | None:
        """Gain and residual of fewer steps than the horizon."""
        found = self._taken("slope", on, f"@{steps}")
        return None if found is None else self._contraction("slope", found, moves, steps)

    def _taken(self, route: str, on: int, after: str = "") -> tuple[Table, Table] | None:
        """The norms of both matrices of a route."""
        slopes, rest = (self._norm(f"{x}{after}", on) for x in OF_ROUTE[route])
        return None if slopes is None or rest is None else (slopes, rest)

    def _leaves_allowed(self) -> int:
        asked = any(r.kind in LENGTHS and r.state is None for r in self.claim.requirements)
        cells = self.claim.cells // ((COST if asked else COST * SPARED) * len(self.obligations.states) ** 2)
        return min(self.claim.cells, max(LEAST, self.needed, cells))

    def _evenly(self, proves: str, table: Table, on: int) -> Table:
        """Trees over whose leaves the residual of every state is close, not only the largest of all."""
        taken = self.sampled(self.matrices(proves, self.domain, self.norm), np.random.default_rng(0))
        sizes = np.abs(taken[:, :, 0]).max(axis=0, initial=0.0)
        if len(sizes) == 1 or not sizes.min() > 0:
            return table
        even = Norm(np.diag(1 / sizes), None, False)
        found = self.searched(proves, self.domain, self.norm, self.gap, self._leaves_allowed(), form=even)
        with suppress(Undefined, Rejected):
            self.leaves[proves] = self.writer.leaves(proves, found.trees, table[2], on)
            return 0, found.trees, table[2]
        return table

    def _norm(self, proves: str, on: int) -> tuple[int, tuple[str, ...], int] | None:
        """The line of a norm over the set, with a stretch that attains nearly as much; its trees and bits."""
        w, share, cells = self.writer, 1.0, self._leaves_allowed()
        bits = 0 if w.exact(proves, on) else BITS
        later = TWICE * w.matrix_seconds(proves, bits, on)
        for _ in range(4):
            found = self.searched(proves, self.domain, self.norm, self.gap * share, cells, later=later)
            began = time.monotonic()
            try:
                leaves = w.leaves(proves, found.trees, bits, on)
                line = w.matrix(proves, found.trees, bits, on, leaves, found.upper, found.scales)
            except (Undefined, Rejected) as why:
                self.ranges.limits[proves] = str(why)
                if not bits:  # fractions that grow too long
                    bits = BITS
                    continue
                if found.stopped:
                    return None
                share /= 16
                continue
            self.leaves[proves] = leaves
            self.ranges.spent += time.monotonic() - began
            self.ranges.limits[proves] = found.stopped
            upper = to_float(w.proof.lines[line].concludes["norm"])
            if found.stopped or upper - found.upper <= self.gap * max(found.upper, 1e-300) or share < 0.1:
                break
            share /= 8
        else:
            return None
        with suppress(Undefined, Rejected, ZeroDivisionError):
            w.stretch(proves, found.point, found.direction, bits, on)
        return line, found.trees, bits

    def _contraction(
        self, route: str, tables: tuple[Table, Table], moves: list[int] | None, steps: int = 0
    ) -> int | None:
        """Gain and residual of a route in the metric: proofs/several.md (2)."""
        if moves is None:
            return None
        (slopes, *_), (rest, *_) = tables
        w, far = self.writer, dict.fromkeys(self.obligations.states, Fraction(0))
        for (s, h), n in zip(moves_of(w), moves, strict=True):
            ends = w.proof.lines[n].concludes
            far[s] += max(abs(ends["lower"]), abs(ends["upper"])) * w.derivation.change(h)[1]
        residual = w.proof.lines[rest].concludes["norm"] + self.norm.length(list(far.values()))
        concludes = {"gain": upward(w.proof.lines[slopes].concludes["norm"]), "residual": upward(residual)}
        return w.append(route, f"{route}@{steps}" if steps else route, [slopes, rest, *moves], {}, concludes)

    def _growing(self, on: int, pair: int | None, proves: str) -> None:
        """A product of a route's slopes that refutes a gain in every norm: proofs/several.md (7)."""
        upper = self.writer.proof.lines[pair].concludes["gain"] if pair is not None else None
        asked = [
            constant(r.constant, self.claim.values)[1]
            for n, r in enumerate(self.claim.requirements, 1)
            if r.kind == "gain" and r.constant is not None and (n == self.variant if self.variant else not r.over)
        ]
        wanted = min((c for c in asked if upper is None or upper >= c), default=None)
        if wanted is None or self.ranges.interrupted or self.claim.horizon > 1:
            return
        try:
            matrices = self.matrices(proves, self.domain, self.norm)
        except Bad:
            return
        bits = 0 if self.writer.exact(proves, on) else BITS
        best: tuple[Word, list[dict[str, Fraction]]] | None = None
        for points in self._places(matrices.variables):
            at = np.array([[to_float(p[v.name]) for v in matrices.variables] for p in points])
            jacobians = matrices.at(at.reshape(len(points), -1))
            good = np.flatnonzero(np.isfinite(jacobians).all(axis=(1, 2)))
            rows, inverse = (floats(x) for x in self.basis())
            found = fastest(rows @ jacobians[good] @ inverse)
            if found is not None and (best is None or found.rate > best[0].rate):
                best = found, [points[int(good[k])] for k in found.letters]
        if best is not None and best[0].rate >= to_float(wanted) * SPARE:
            with suppress(Undefined, Rejected):
                self.writer.product(proves, best[1], best[0].power, bits, on, wanted)

    def _places(self, variables: list[Variable]) -> Iterator[list[dict[str, Fraction]]]:
        """Points of W, each with the same held values; the states anywhere in a region, else at their targets."""
        rng, states = np.random.default_rng(0), self.obligations.states
        centres = {s: (t.lower + t.upper) / 2 for s, t in zip(states, self.targets, strict=True)}
        centres |= {f"error({s})": Fraction(0) for s in states}
        met = [v.name for v in variables]
        still = {} if self.domain.kind == "region" else {n: x for n, x in centres.items() if n in met}
        held = {n for n, q in self.claim.uncertain.items() if q.held}
        fresh = combinations([v for v in variables if v.name not in held and v.name not in still], rng)
        for same in combinations([v for v in variables if v.name in held], rng)[:MOST_HELD]:
            yield [still | same | each for each in fresh]

    def _entries(self, route: str, tables: tuple[Table, Table], on: int) -> list[tuple[int, int]]:
        """Lines of entries of both matrices of a route, a basis: proofs/several.md (3)."""
        found: list[tuple[int, int]] = []
        if route == "split":
            tables = tables[0], self._evenly(OF_ROUTE[route][1], tables[1], on)
        for basis in self._bases():
            slopes, rest = (
                self.writer.entries(proves, trees, bits, on, self.leaves[proves], basis)
                for proves, (_, trees, bits) in zip(OF_ROUTE[route], tables, strict=True)
            )
            found.append((slopes, rest))
        return found

    def _bases(self) -> Iterator[tuple[Matrix, Matrix]]:
        """Bases for a comparison: the states themselves, the rows of the metric, the other metrics proposed."""
        one = identity(len(self.obligations.states))
        seen = [one]
        yield one, one
        others = [(p.rows, p.inverse) for p in self.others if p.kind == "polytope"][:MOST_BASES]
        for rows, inverse in [self.basis(), *others]:
            if rows not in seen:
                seen.append(rows)
                yield rows, inverse

    def basis(self) -> tuple[Matrix, Matrix]:
        """The rows of the metric, where there are as many as states, and their inverse; else the states themselves."""
        one = identity(len(self.obligations.states))
        return (one, one) if self.norm.many else (self.norm.rows, self.norm.inverse)

    def _kept(self, ball: int, pairs: list[int], tables: list[tuple[int, int]], moves: list[int] | None) -> int | None:
        """The ball is mapped into itself: by its norm and a route, row by row in its own basis, or by its vertices."""
        w = self.writer
        for pair in pairs:
            with suppress(Rejected):
                return w.append("invariant-ball", "invariant", [ball, pair], {}, {})
        for table in tables if moves is not None else ():
            try:
                return w.append("invariant-rows", "invariant", [ball, *table, *(moves or [])], {}, {})
            except Rejected:
                continue
        return sides.kept(self, ball, moves) if self.norm.many and moves is not None else None

    def _orbits(self, uses: list[int]) -> None:
        """A periodic orbit that takes each state far from its target: proofs/several.md (6)."""
        if not self.writer.proof.lines[uses[1]].concludes["gain"] < 1 or self.ranges.interrupted:
            return
        bits = 0 if self.writer.exact("misses", uses[0]) else ORBIT_BITS
        steps = map_of(self.claim, self.obligations, self.ranges)
        for course in courses(steps, self.gap, self.claim.horizon, self.ranges.until - self.ranges.spent):
            for precision in dict.fromkeys((bits, ORBIT_BITS)):  # fractions may grow too long
                with suppress(Undefined, Rejected):
                    self.writer.periodic(course.start, course.held, course.steps, uses, precision)
                    break

    def _remarks(self) -> list[tuple[str | None, bool]]:
        return SeveralRemarks(
            self.claim, self.obligations, self.results, self.ranges.limits, self.ranges.interrupted
        ).all()


def identity(n: int) -> Matrix:
    return tuple(tuple(Fraction(int(i == j)) for j in range(n)) for i in range(n))


def scaled(p: Proposal) -> Proposal:
    """The same metric in the unit in which ‖e‖ is at least the error of every state, and no larger than that asks for.

    proofs/several.md (5e)
    """
    norm = metric(p.kind, p.rows, p.inverse, len(p.inverse))
    return in_unit(p, max(norm.support(i) for i in range(len(p.inverse))))


def in_unit(p: Proposal, most: Fraction) -> Proposal:
    """The same metric, so many times as large, rounded up."""
    unit = Fraction(decimal_up(most, DIGITS))
    rows = tuple(tuple(x * unit for x in row) for row in p.rows)
    inverse = tuple(tuple(x / unit for x in row) for row in p.inverse)
    size = to_float(unit)
    return Proposal(p.kind, rows, inverse, p.gain, p.residual * size, p.radius * size)
