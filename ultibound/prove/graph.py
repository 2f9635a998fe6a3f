"""Claims of stances that follow one another: targets → sets and norms → every step → bounds (proofs/graph.md)."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from itertools import chain
from math import floor, log10
from typing import Any

import numpy as np

from ..bounding.evaluate import to_float
from ..certificate.certificate import sealed
from ..certificate.cycles import CycleWriter
from ..certificate.enclosing import Encloser, Watch
from ..certificate.graph import Basis, Step
from ..certificate.results import assembled
from ..certificate.stances import StanceRemarks
from ..checker.derive import Derivation
from ..checker.graph import of_ranges
from ..checker.graph_outcomes import results_of
from ..checker.rules import Proof, Rejected, proof_of
from ..checker.statement import read_statement
from ..checker.theorems import Variant
from ..claim import Bad, Claim
from ..claim.obligations import RANGED, Domain
from ..claim.provable import varied, walks
from ..contraction.graph import Family, Samples, bounds, families, radii
from ..contraction.norms import floats
from .cycles import going_round, growing_round
from .one import COARSE, DECIDED, Attempt, Known, apart
from .runs import run_out
from .several import SHARES, SPARE, identity, in_unit
from .stances import StanceSearch, StepSearch

TRIED = 6  # families of norms, the best by samples first
WIDENED = 5  # times that smaller balls are widened
Pairs = Mapping[tuple[str, str], tuple[float, float]]
Way = tuple[str, ...]


class GraphAttempt(Attempt):
    """One pass through the proof of a claim of named stances at one gap."""

    writer: CycleWriter

    def __init__(
        self, claim: Claim, gap: float, until: float, watch: Watch, sharp: bool, within: Fraction | None = None,
        variant: int = 0, derivation: Derivation | None = None, known: Known | None = None,
    ) -> None:  # fmt: skip
        self.claim, self.gap, self.until, self.watch, self.sharp, self.variant = (
            claim,
            gap,
            until,
            watch,
            sharp,
            variant,
        )
        statement = read_statement(claim.text, claim.settings, claim.data)
        self.proof: Proof = proof_of(of_ranges(statement, variant) if variant else statement)
        self.raw: list[dict[str, Any]] = []
        self.writer = CycleWriter(self.proof, self.raw, "")
        self.enclosers: list[Encloser] = []
        self.smaller, self.curve_may_help = None, False
        self.known = known if known is not None else Known()
        self.stances: dict[str, StanceSearch] = {}
        for n, s in enumerate(claim.stances, variant * len(claim.stances)):
            each = Known({variant: self.known.flows[n]} if n in self.known.flows else {})
            self.stances[s.name] = StanceSearch(claim, s, self.writer, gap, until, watch, self.enclosers, each, variant)
            if each.flows:
                self.known.flows[n] = each.flows[variant]
        self.steps = {(s.name, t): self._search((s.name, t)) for s in claim.stances for t in s.then}
        ways: list[Way] = walks(claim) if claim.horizon > 1 else list(self.steps)
        self.walks = {w: self.steps[w[0], w[1]] if len(w) == 2 else self._search(w) for w in ways}
        self.routes, self.leading = self._known_routes(), "slope"
        self._prove()
        for number in () if variant else apart(claim):
            self._over(number)
        self.results = results_of(self.proof)
        limits = {f"{x.writer.named(n)}": y for x in self.stances.values() for n, y in x.ranges.limits.items()}
        for step in (*self.steps.values(), *self.walks.values()):
            limits |= {f"{step.part}:{n}": y for n, y in step.ranges.limits.items()}
        self.ranges = self.enclosers[0]
        self.ranges.limits = limits
        self.ranges.spent = sum(x.spent for x in self.enclosers)
        obligations = {name: x.obligations for name, x in self.stances.items()}
        remarks = StanceRemarks(claim, obligations, self.results, limits, self.ranges.interrupted).all()
        self.pursue = any(p for _, p in remarks)
        self.decided = sum(r.verdict != "undecided" for r in self.results.requirements)
        text = assembled(claim, self.results, remarks)
        self.certificate = sealed(claim, text, self.writer.pruned(self.results.needed), self.ranges.interrupted)

    def _known_routes(self) -> list[str]:
        """The routes that gain and residual may come from: split where every step can be told apart from it."""
        if not self.claim.correction or self.claim.horizon > 1:
            return ["slope"]
        try:
            for x in self.steps.values():
                x.matrices("split-slopes", self._around(x.before))
        except Bad as why:  # the rates of a stance rest on the correction
            self.enclosers[0].limits["split"] = str(why)
            return ["slope"]
        return ["slope", "split"]

    def _prove(self) -> None:
        """Sets and norms of all stances, gain and residual of every step, bounds, and what is asked."""
        w, each = self.writer, self.stances
        images = self._into_regions()
        self._normed(images is not None)
        norms = {s: x.writer.metric(x.chosen.kind, x.chosen.rows, x.chosen.inverse) for s, x in each.items()}
        on: dict[str, int] = {}
        for s, x in each.items():
            on[s] = x.writer.about(norms[s], [t.line for t in x.targets], x.domain.radius, not x.shrunk)
            x.about(on[s], images is not None)
        sets, invariant = dict(on), self._regions(norms, images)
        if invariant is not None:
            on = dict.fromkeys(each, invariant)
        for s, x in each.items():
            o = x.obligations
            for k in range(1, len(o.motion.positive) + 1 if o.motion is not None else 1):
                x.ranges.enclose(o.support(k, x.domain), on[s], gap=DECIDED, side=-1)
            x._growth(x.domain, on[s])
        moves = {s: x._movements() for s, x in each.items()}
        for search in (*self.steps.values(), *self.walks.values()):
            search.into(norms[search.after.stance.name])
        pairs = self._stepped(self.walks, on, moves)
        if invariant is None:
            for single in (pairs if self.claim.horizon == 1 else self._stepped(self.steps, on, moves)).values():
                invariant = self._balls([sets[s] for s in each], single) if invariant is None else invariant
        if invariant is not None:
            for route, lines in pairs.items():
                w.bound(invariant, lines, route)
                self._compared(invariant, on, moves, route)
        slopes = pairs.get("slope", {})
        growing_round(self, list(dict.fromkeys(on.values())), slopes)
        if invariant is not None and (len(self.claim.stances[0].states) == 1 or slopes):
            going_round(self, invariant, slopes)
        for k, r in enumerate(self.claim.requirements, 1):
            for s, x in each.items():
                if r.kind in RANGED and r.stance in (None, s) and not self.variant:
                    x._ranged(k, x.domain, on[s], points=True)
        ground = {s: (x.claim, x.obligations, x.ranges, x.writer.derivation) for s, x in each.items()}
        until = self.until - sum(x.spent for x in self.enclosers)
        run_out(self.claim, self.variant, w, ground, {s.name: s.then for s in self.claim.stances}, until)

    def _search(self, way: Way) -> StepSearch:
        return StepSearch([self.stances[s] for s in way], self.until, self.enclosers)

    def _stepped(
        self, searches: Mapping[Any, StepSearch], on: Mapping[str, int], moves: Mapping[str, list[int] | None]
    ) -> dict[str, dict[Step, int]]:
        """Gain and residual of every step, or way of several, by each route that has them for all."""
        found: dict[str, dict[Step, int]] = {}
        for route in self.routes:
            if route == "split" and not self._contracts(route):
                for (s, *_), x in searches.items() if any(r.kind == "gain" for r in self.claim.requirements) else ():
                    x.touched(on[s], route)
                continue
            lines: dict[Step, int] = {}
            for way, x in searches.items():
                moving = moves[way[-1]]
                line = None if moving is None else x.proved(on[way[0]], moving, route)
                if line is not None:
                    lines[way] = line
            if len(lines) == len(searches):
                found[route] = lines
        return found

    def _contracts(self, route: str) -> bool:
        """Whether samples over the sets leave it open that the steps contract together."""
        rng = np.random.default_rng(0)
        taken = {e: x.samples(x.before.domain, rng, route, x.before.norm) for e, x in self.steps.items()}
        return bounds(self._in_norms(taken), list(self.stances)) is not None

    def _over(self, number: int) -> None:
        """A requirement over ranges of its own: a proof of the same kind, whose lines are taken in."""
        claim = varied(self.claim, number)
        own = GraphAttempt(claim, self.gap, self.until, self.watch, self.sharp, None, number, known=self.known)
        self.enclosers[0].interrupted |= own.ranges.interrupted
        self.writer.adopt(own.writer, Variant(0, number), own.results.needed)

    def _regions(self, norms: Mapping[str, int], images: Mapping[str, list[int]] | None) -> int | None:
        """The regions are mapped into those that follow, if their images show it: proofs/graph.md (3a)."""
        if images is None:
            return None
        stances = self.stances.items()
        uses = [n for s, x in stances for n in (norms[s], *(t.line for t in x.targets), *images[s])]
        return self.writer.append("graph-regions", "invariant", uses, {}, {})

    def _balls(self, balls: list[int], lines: Mapping[Step, int]) -> int | None:
        """The balls are mapped into those that follow: proofs/graph.md (3b)."""
        try:
            return self.writer.append("graph-balls", "invariant", [*balls, *lines.values()], {}, {})
        except Rejected:
            return None

    def _into_regions(self) -> dict[str, list[int]] | None:
        """The lines that the region of each stance is mapped into those that may follow, if all are."""
        found: dict[str, list[int]] = {}
        for s, x in self.stances.items():
            afters = [self.stances[t] for t in x.stance.then]
            for gap in (COARSE, self.gap):
                lines = x.led_into(afters, gap)
                if lines is not None:
                    found[s] = lines
                    break
                if x.leaves_region:
                    return None
        return found if len(found) == len(self.stances) else None

    def _normed(self, regions: bool) -> None:
        """Norms and balls for all stances: those with the least bounds, of shares of the room, that are kept."""
        room = {s: np.array(x.room) for s, x in self.stances.items()}
        weights = next(iter(self.stances.values()))._weights()
        rng = np.random.default_rng(0)
        tried: list[tuple[tuple[int, float], int, str, Family]] = []
        for route in self.routes:
            single = {e: x.samples(self._around(x.before), rng, route) for e, x in self.steps.items()}
            samples = single if self.claim.horizon == 1 else self._sampled(rng, route)
            proposed = families(samples, room, self.claim.metric, weights)
            if samples is not single:
                proposed = chain(proposed, families(single, room, self.claim.metric, weights))
            for n, family in enumerate(proposed):
                rank = self._by_samples(samples, single, family, regions)
                if rank is not None:
                    tried.append((rank, n, route, family))
        tried.sort(key=lambda x: x[:2])
        best: tuple[float, Family] | None = None
        for _, _, route, family in tried[:TRIED]:
            self._take(family)
            pairs = self._measured(self.walks, route)
            alone = pairs if self.claim.horizon == 1 or regions else self._measured(self.steps, route)
            size = self._size_of(pairs, None if regions else alone)
            if best is None or size < best[0]:
                best, self.leading = (size, family), route
            if size < np.inf and (regions or len(tried) == 1 or size < 0.9):
                break
        self._take({s: x._plain() for s, x in self.stances.items()} if best is None else best[1])
        if best is not None and best[0] == np.inf and not regions:
            self._shrink()

    def _around(self, x: StanceSearch) -> Domain:
        spans = tuple((t.lower, t.upper) for t in x.targets)
        return Domain("region", Fraction(0), spans[0], targets=spans)

    def _take(self, family: Family) -> None:
        """Takes norms; unless the claim fixes them, in the unit in which each is at least the error of every state."""
        for s, x in self.stances.items():
            x.normed(family[s])
        each = self.stances.values()
        if len(next(iter(each)).obligations.states) == 1 or next(iter(each))._weights() is not None:
            return
        unit = max(x.norm.support(i) for x in each for i in range(len(x.norm.inverse)))  # proofs/several.md (5e)
        for s, x in self.stances.items():
            x.normed(in_unit(family[s], unit))

    def _sampled(self, rng: np.random.Generator, route: str) -> dict[tuple[str, str], Samples]:
        """Of all ways of several steps between the same two stances together."""
        found: dict[tuple[str, str], Samples] = {}
        for way, x in self.walks.items():
            here, ends = x.samples(self._around(x.before), rng, route), (way[0], way[-1])
            known = found.setdefault(ends, here)
            if known is not here:
                jacobians = np.concatenate([known.jacobians, here.jacobians])
                found[ends] = Samples(jacobians, np.concatenate([known.misses, here.misses]))
        return found

    def _measured(self, searches: Mapping[Any, StepSearch], route: str) -> Pairs:
        """Gain and residual over the balls (estimates), of all ways between the same two stances the largest."""
        found: dict[tuple[str, str], tuple[float, float]] = {}
        for way, x in searches.items():
            (k, e), known = x.pair(route), found.get((way[0], way[-1]), (0.0, 0.0))
            found[way[0], way[-1]] = max(k, known[0]), max(e, known[1])
        return found

    def _by_samples(
        self, samples: Mapping[tuple[str, str], Samples], single: Mapping[tuple[str, str], Samples], family: Family,
        regions: bool,
    ) -> tuple[int, float] | None:  # fmt: skip
        """Whether sets are kept and, then, how small the bounds are, by samples; None where the norm is none."""
        try:
            self._take(family)
        except Rejected:
            return None
        pairs = self._in_norms(samples)
        size = self._size_of(pairs, None if regions else pairs if samples is single else self._in_norms(single))
        if size < np.inf:
            return 0, size
        found = bounds(pairs, list(self.stances))
        return (2, max(k for k, _ in pairs.values())) if found is None else (1, self._share(found))

    def _in_norms(self, samples: Mapping[tuple[str, str], Samples]) -> Pairs:
        """Gain and residual of every step that samples show in the norms taken: from below."""
        pairs = {}
        for (s, t), x in samples.items():
            v, left = floats(self.stances[t].norm.rows), floats(self.stances[s].norm.inverse)
            a, m = v @ x.jacobians @ left, x.misses @ v.T
            round_ = self.stances[t].norm.kind == "ellipsoid"
            sizes = np.linalg.norm(a, 2, axis=(1, 2)) if round_ else np.abs(a).sum(axis=2).max(axis=1)
            lengths = np.linalg.norm(m, axis=1) if round_ else np.abs(m).max(axis=1)
            pairs[s, t] = float(sizes.max(initial=0.0)), float(lengths.max(initial=0.0))
        return pairs

    def _share(self, bound: Mapping[str, float]) -> float:
        """The largest share of its room that a bound takes."""
        return max(bound[s] * max(x.shares()) for s, x in self.stances.items())

    def _size_of(self, pairs: Pairs, single: Pairs | None) -> float:
        """The largest share of its room that a bound takes; inf where single steps do not keep balls (estimates)."""
        found = bounds(pairs, list(self.stances))
        if found is None:
            return np.inf
        r = {s: to_float(x.domain.radius) for s, x in self.stances.items()}
        if single is not None and not all(k * r[s] + e <= SPARE * r[t] for (s, t), (k, e) in single.items()):
            return np.inf
        return self._share(found)

    def _shrink(self) -> None:
        """Smaller balls that are kept, where the largest are not: found from small ones, then widened."""
        largest = {s: x.domain.radius for s, x in self.stances.items()}
        most = {s: to_float(r) for s, r in largest.items()}
        kept = self._kept_share(most) or {}
        for _ in range(WIDENED if kept else 0):
            wider = radii(self._pairs(kept), most) or kept
            middle = {s: (r + max(r, wider[s])) / 2 for s, r in kept.items()}
            kept = radii(self._pairs(middle), middle) or kept
        for s, x in self.stances.items():
            r = min(_short(kept[s]) if kept else largest[s], largest[s])
            x.domain, x.shrunk = x._within(x.norm, r), r < largest[s]

    def _kept_share(self, most: Mapping[str, float]) -> dict[str, float] | None:
        """Radii of balls that are kept, within a share of the largest."""
        for share in SHARES:
            wanted = {s: share * r for s, r in most.items()}
            kept = radii(self._pairs(wanted), wanted)
            if kept is not None:
                return kept
        return None

    def _pairs(self, wanted: Mapping[str, float]) -> Pairs:
        """Gain and residual of every step over balls of these radii, a little too large (estimates)."""
        for s, x in self.stances.items():
            x.domain = x._within(x.norm, Fraction(wanted[s]))
        each = self._measured(self.steps, self.leading)
        return {e: (k * (1 + 1e-6), y * (1 + 1e-6)) for e, (k, y) in each.items()}

    def _compared(
        self, invariant: int, on: Mapping[str, int], moves: Mapping[str, list[int] | None], route: str
    ) -> None:
        """Comparisons entry by entry: in the states themselves, and in the bases of the norms."""
        one = identity(len(next(iter(self.stances.values())).obligations.states))
        plain: dict[str, Basis] = dict.fromkeys(self.stances, (one, one))
        normed: dict[str, Basis] = {s: (x.norm.rows, x.norm.inverse) for s, x in self.stances.items()}
        for bases in [plain] if plain == normed else [plain, normed]:
            tables: dict[Step, tuple[int, int]] = {}
            for way, step in self.walks.items():
                pair = step.tables(on[way[0]], bases[way[0]], bases[way[-1]], route)
                if pair is not None:
                    tables[way] = pair
            if len(tables) == len(self.walks):
                moving = [n for s in self.stances for n in moves[s] or []]
                self.writer.compared(invariant, tables, moving, bases, route)


def _short(x: float) -> Fraction:
    """Rounded down, by less than what `_pairs` adds."""
    scale = Fraction(10) ** (9 - floor(log10(x)))
    return floor(Fraction(x) * scale) / scale
