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
from ..checker.matrices import Leaf, Matrix, Metric, metric
from ..checker.numerals import decimal_up
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..claim import ClaimError
from ..claim.constants import constant
from ..claim.obligations import RANGED, Domain, Obligation, Variable, together
from ..contraction.metrics import Proposal, proposals
from ..contraction.norms import Matrices, Norm, Stretched, floats, stretched
from ..contraction.rounds import MOST_HELD, Map, courses
from ..contraction.samples import combinations, drawn
from ..contraction.words import Word, fastest
from .closing import closed_in
from .one import COARSE, DECIDED, Attempt

if TYPE_CHECKING:
    from ..certificate.lines import Writer

SAMPLES = 300
FEW = 3000  # leaves of a search that only compares metrics
DIGITS = 12  # of the unit of a metric
COST, LEAST = 12, 300  # an entry of a leaf counts as so many cells, exact arithmetic being what it is; leaves allowed
LENGTHS = ("gain", "residual", "bound")  # in the norm itself: where none is asked for, it may be less close
SPARED = 4
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
        slopes, misses = (None, None) if lost else (self._norm("slopes", on), self._norm("misses", on))
        pair = self._contraction(slopes, misses, moves)
        self._growing(on, pair)
        tables = self._entries(slopes, misses, on)
        invariant = on if images is not None else self._kept(ball, pair, tables, moves)
        if invariant is not None and pair is not None:
            self._bound(invariant, pair)
        if invariant is not None and moves is not None:
            for table in tables:
                w.componentwise(invariant, *table, moves)
            if slopes is not None and misses is not None:
                closed_in(self, invariant, slopes, misses, moves, list(self._bases()))
            if pair is not None:
                self._orbits([invariant, pair])
        for k, r in enumerate(self.claim.requirements, 1):
            if r.kind in RANGED and not self.variant:
                self._range(k, through, way, self.domain, on)

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
        domain = Domain("region", Fraction(0), spans[0], targets=spans)
        best: tuple[float, Proposal, Metric, Domain] | None = None
        for _ in range(1 if images is not None else LOOKS):
            for p in self._proposed(domain):
                norm = metric(p.kind, p.rows, p.inverse, n)
                ball = self._within(norm, self._largest(norm))
                size = self._size(p, ball) if images is None else 0.0  # the region is the set in any metric
                if best is None or size < best[0]:
                    best = size, p, norm, ball
                if size < np.inf:
                    break
            if best is not None and best[0] < np.inf:
                break
            domain = best[3] if best is not None else domain
        if best is None:
            p = self._plain()
            norm = metric(p.kind, p.rows, p.inverse, n)
            best = np.inf, p, norm, self._within(norm, self._largest(norm))
        _, self.chosen, self.norm, self.domain = best
        if images is not None:
            self.domain = Domain("region", self.domain.radius, spans[0], targets=spans)
        elif best[0] == np.inf:
            self._shrunk()

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
            if self._size(self.chosen, smaller) < np.inf:
                self.domain, self.shrunk = smaller, True
                return

    def _proposed(self, domain: Domain) -> list[Proposal]:
        """Metrics proposed from samples of Jacobians and misses over a set (estimates)."""
        rng = np.random.default_rng(0)
        room = np.array([to_float(x) for x in self.rooms()])
        # a target on the edge: any scale will do
        room = np.where(room > 0, room, max(float(room.max()), 0.0) or 1.0)
        weights, asked = self._weights(), self.claim.metric
        self.others, found = [], list[Proposal]()
        for steps in ("@1", "") if self.claim.horizon > 1 else ("",):  # each of the steps has to keep the ball as well
            slopes, misses = self.matrices(f"slopes{steps}", domain), self.matrices(f"misses{steps}", domain)
            jacobians, missed = (self.sampled(m, rng) for m in (slopes, misses))
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

    def _form(self, proves: str, norm: Metric) -> Norm:
        """The norm in which a matrix is seen."""
        inverse = floats(norm.inverse) if proves.startswith("slopes") else None
        if proves == JOINED:
            inverse = np.diag([*np.diag(floats(norm.inverse)), 1.0])
        return Norm(floats(norm.rows), inverse, norm.kind == "ellipsoid")

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
    ) -> Stretched:
        def watch(leaves: int, high: float) -> None:
            self.watch(f"{proves} of {len(self.obligations.states)} states", leaves, high)

        matrices, form = self.matrices(proves, domain, norm), self._form(proves, norm)
        effort = Effort(gap, cells, self.ranges.until - self.ranges.spent, watch, later=later)
        try:
            return stretched(matrices, form, effort, enough)
        except KeyboardInterrupt:
            self.ranges.interrupt()
            return stretched(matrices, form, replace(effort, until=0.0), enough)

    def _size(self, p: Proposal, ball: Domain) -> float:
        """The largest share of its room that a state's bound takes; inf where the ball is not kept (estimates)."""
        norm = metric(p.kind, p.rows, p.inverse, len(self.obligations.states))
        miss = self.searched("misses", ball, norm, COARSE, FEW).upper + self._shift(norm)
        radius = to_float(ball.radius)
        most = SPARE - miss / radius if radius > 0 else 0.0
        if not (most > 0 and miss < np.inf):
            return np.inf
        found = self.searched("slopes", ball, norm, COARSE, FEW, most)
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
        far = dict.fromkeys(self.obligations.states, 0.0)
        for s, h in moves_of(self.writer):
            found = self.ranges.search(self.obligations.target_slope(h, s), True, COARSE)
            far[s] += max(abs(found.upper), abs(found.lower)) * to_float(self.obligations.change(h))
        return to_float(norm.length([Fraction(x) for x in far.values()]))

    def _movements(self) -> list[int] | None:
        found = [self.ranges.enclose(self.obligations.target_slope(h, s), None, True) for s, h in moves_of(self.writer)]
        return None if any(x is None for x in found) else [x.line for x in found if x is not None]

    def _step(self, steps: int, on: int, moves: list[int] | None) -> int | None:
        """Gain and residual of fewer steps than the horizon."""
        slopes, misses = (self._norm(f"{x}@{steps}", on) for x in ("slopes", "misses"))
        return self._contraction(slopes, misses, moves, steps)

    def _norm(self, proves: str, on: int) -> tuple[int, tuple[str, ...], int] | None:
        """The line of a norm over the set, with a stretch that attains nearly as much; its trees and bits."""
        w, share = self.writer, 1.0
        asked = any(r.kind in LENGTHS and r.state is None for r in self.claim.requirements)
        cells = self.claim.cells // ((COST if asked else COST * SPARED) * len(self.obligations.states) ** 2)
        cells = min(self.claim.cells, max(LEAST, self.needed, cells))
        bits = 0 if w.exact(proves, on) else BITS
        later = TWICE * w.matrix_seconds(proves, bits, on)
        for _ in range(4):
            found = self.searched(proves, self.domain, self.norm, self.gap * share, cells, later=later)
            began = time.monotonic()
            try:
                leaves = w.leaves(proves, found.trees, bits, on)
                line = w.matrix(proves, found.trees, bits, on, leaves, found.upper)
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
        self,
        slopes: tuple[int, tuple[str, ...], int] | None,
        misses: tuple[int, tuple[str, ...], int] | None,
        moves: list[int] | None,
        steps: int = 0,
    ) -> int | None:
        """Gain and residual in the metric: proofs/several.md (2)."""
        if slopes is None or misses is None or moves is None:
            return None
        w, far = self.writer, dict.fromkeys(self.obligations.states, Fraction(0))
        for (s, h), n in zip(moves_of(w), moves, strict=True):
            ends = w.proof.lines[n].concludes
            far[s] += max(abs(ends["lower"]), abs(ends["upper"])) * w.derivation.change(h)[1]
        residual = w.proof.lines[misses[0]].concludes["norm"] + self.norm.length(list(far.values()))
        concludes = {"gain": upward(w.proof.lines[slopes[0]].concludes["norm"]), "residual": upward(residual)}
        name = f"slope@{steps}" if steps else "slope"
        return w.append("slope", name, [slopes[0], misses[0], *moves], {}, concludes)

    def _growing(self, on: int, pair: int | None) -> None:
        """A product of Jacobians that refutes a gain in every norm: proofs/several.md (7)."""
        upper = self.writer.proof.lines[pair].concludes["gain"] if pair is not None else None
        asked = [
            constant(r.constant, self.claim.values)[1]
            for n, r in enumerate(self.claim.requirements, 1)
            if r.kind == "gain" and r.constant is not None and (n == self.variant if self.variant else not r.over)
        ]
        wanted = min((c for c in asked if upper is None or upper >= c), default=None)
        if wanted is None or self.ranges.interrupted or self.claim.horizon > 1:
            return
        matrices = self.matrices("slopes", self.domain, self.norm)
        bits = 0 if self.writer.exact("slopes", on) else BITS
        best: tuple[Word, list[dict[str, Fraction]]] | None = None
        for points in self._places(matrices.variables):
            at = np.array([[to_float(p[v.name]) for v in matrices.variables] for p in points])
            jacobians = matrices.at(at.reshape(len(points), -1))
            good = np.flatnonzero(np.isfinite(jacobians).all(axis=(1, 2)))
            found = fastest(floats(self.norm.rows) @ jacobians[good] @ floats(self.norm.inverse))
            if found is not None and (best is None or found.rate > best[0].rate):
                best = found, [points[int(good[k])] for k in found.letters]
        if best is not None and best[0].rate >= to_float(wanted) * SPARE:
            with suppress(Undefined, Rejected):
                self.writer.product(best[1], best[0].power, bits, on, wanted)

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

    def _entries(
        self, slopes: tuple[int, tuple[str, ...], int] | None, misses: tuple[int, tuple[str, ...], int] | None, on: int
    ) -> list[tuple[int, int]]:
        """Lines of entries, of slopes and misses, a basis: proofs/several.md (3)."""
        found: list[tuple[int, int]] = []
        if slopes is None or misses is None:
            return found
        for basis in self._bases():
            pair = []
            for proves, (_, trees, bits) in (("slopes", slopes), ("misses", misses)):
                pair.append(self.writer.entries(proves, trees, bits, on, self.leaves[proves], basis))
            found.append((pair[0], pair[1]))
        return found

    def _bases(self) -> Iterator[tuple[Matrix, Matrix]]:
        """Bases for a comparison: the states themselves, the rows of the metric, the other metrics proposed."""
        n = len(self.obligations.states)
        identity = tuple(tuple(Fraction(int(i == j)) for j in range(n)) for i in range(n))
        seen = [identity]
        yield identity, identity
        others = [(p.rows, p.inverse) for p in self.others if p.kind == "polytope"][:MOST_BASES]
        for rows, inverse in [(self.norm.rows, self.norm.inverse), *others]:
            if rows not in seen:
                seen.append(rows)
                yield rows, inverse

    def _kept(self, ball: int, pair: int | None, tables: list[tuple[int, int]], moves: list[int] | None) -> int | None:
        """The ball is mapped into itself: by its norm, or row by row in its own basis."""
        w = self.writer
        if pair is not None:
            try:
                return w.append("invariant-ball", "invariant", [ball, pair], {}, {})
            except Rejected:
                pass
        for table in tables if moves is not None else ():
            try:
                return w.append("invariant-rows", "invariant", [ball, *table, *(moves or [])], {}, {})
            except Rejected:
                continue
        return None

    def _orbits(self, uses: list[int]) -> None:
        """A periodic orbit that takes each state far from its target: proofs/several.md (6)."""
        if not self.writer.proof.lines[uses[1]].concludes["gain"] < 1 or self.ranges.interrupted:
            return
        o = self.obligations
        table = Matrices([[(x, self.ranges.runner(x, False))] for x in (o.image(s) for s in o.states)])
        aims = [(x, self.ranges.runner(x, False)) for x in (o.target(s) for s in o.states)]
        met = {v.name for v in table.variables}
        extra = [v for v in together([x for x, _ in aims]) if v.name not in met]

        def target(held: dict[str, Fraction]) -> list[float]:
            rows = [np.array([[to_float(held[v.name]) for v in x.variables]]).reshape(1, -1) for x, _ in aims]
            return [float(r(at, at, gradient=False).low[0]) for (_, r), at in zip(aims, rows, strict=True)]

        def run(at: Floats) -> Floats:
            return table.at(at[:, : len(table.variables)])[:, :, 0]

        held = frozenset(n for n, q in self.claim.uncertain.items() if q.held)
        bits = 0 if self.writer.exact("misses", uses[0]) else ORBIT_BITS
        steps = Map([*table.variables, *extra], o.states, run, target, held)
        for course in courses(steps, self.gap, self.claim.horizon, self.ranges.until - self.ranges.spent):
            with suppress(Undefined, Rejected):
                self.writer.periodic(course.start, course.held, course.steps, uses, bits)

    def _remarks(self) -> list[tuple[str | None, bool]]:
        return SeveralRemarks(
            self.claim, self.obligations, self.results, self.ranges.limits, self.ranges.interrupted
        ).all()


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
