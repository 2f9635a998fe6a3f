"""One stance of several that follow one another, and the step from it to the next (proofs/graph.md)."""

from __future__ import annotations

from collections.abc import Sequence
from contextlib import suppress

import numpy as np

from ..bounding.evaluate import to_float
from ..certificate.enclosing import BITS, Encloser, Watch
from ..certificate.graph import Basis, StanceWriter, StepWriter
from ..certificate.lines import upward
from ..checker.jacobians import OF_ROUTE, sloped
from ..checker.matrices import Metric, metric
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..checker.several import moved
from ..claim import Claim
from ..claim.graph import Graph
from ..claim.model import Stance
from ..claim.obligations import Domain, Obligation, Obligations
from ..claim.provable import of_stance
from ..contraction.graph import Samples
from ..contraction.metrics import Proposal
from ..contraction.norms import Norm, floats
from .one import COARSE, Known
from .several import FEW, LEAST, SeveralAttempt

Tabled = tuple[int, tuple[str, ...], int]  # line, trees, bits


class Shared(Encloser):
    """Ranges of one stance; Ctrl-C stops the searches of all."""

    def __init__(
        self, claim: Claim, graph: Graph, writer: StanceWriter, gap: float, until: float, watch: Watch,
        others: list[Encloser],
    ) -> None:  # fmt: skip
        super().__init__(claim, graph, writer, gap, until, watch)
        self.others = others
        others.append(self)

    def interrupt(self) -> None:
        super().interrupt()
        for x in self.others:
            x.interrupted, x.until = True, 0.0


class StanceSearch(SeveralAttempt):
    """One stance: its targets, its set and what is asked over it."""

    writer: StanceWriter
    leaves_region = False  # whether a point leaves the region of a stance that follows

    def __init__(
        self, claim: Claim, stance: Stance, whole: StanceWriter, gap: float, until: float, watch: Watch,
        others: list[Encloser], known: Known, variant: int = 0,
    ) -> None:  # fmt: skip
        """`whole`: the proof of all stances; `others`: the ranges of all of them, so far; else as in `Attempt`."""
        self.claim, self.gap, self.until, self.watch = of_stance(claim, stance.name), gap, until, watch
        self.stance, self.variant, self.known, self.terse = stance, variant, known, False
        self.obligations, self.writer = Obligations(self.claim), StanceWriter(whole.proof, whole.raw, stance.name)
        self.ranges = Shared(self.claim, self.obligations.graph, self.writer, gap, until, watch, others)
        self._flow()
        self.targets = [self._target(s) for s in self.obligations.states]

    @property
    def room(self) -> list[float]:
        found = [to_float(x) for x in self.rooms()]
        return [x if x > 0 else max(max(found), 0.0) or 1.0 for x in found]

    def led_into(self, afters: list[StanceSearch], gap: float) -> list[int] | None:
        """The lines that the region is mapped into the region of every stance that follows; None where it is not."""
        found = []
        for s in self.obligations.states:
            image = self.ranges.enclose(self.obligations.image(s), None, points=True, gap=gap)
            if image is None:
                return None
            inner = [x.writer.derivation.region(s)[1] for x in afters]
            low, high = max(x[0] for x in inner), min(x[1] for x in inner)
            self.leaves_region |= image.least < low or image.most > high
            if not (low <= image.lower and image.upper <= high):
                return None
            found.append(image.line)
        return found

    def normed(self, p: Proposal) -> None:
        """Takes a norm, and the largest ball of it."""
        self.chosen, self.norm = p, metric(p.kind, p.rows, p.inverse, len(self.obligations.states))
        self.domain = self._within(self.norm, self._largest(self.norm))

    def about(self, ball: int, region: bool) -> None:
        """The set: the region, or the ball as its line has it."""
        found = self.writer.domain(ball)
        if region:
            self.domain = Domain("region", self.domain.radius, self.domain.target, targets=self.domain.targets)
        elif found is not None:
            self.domain = self._within(self.norm, found.radius, found.beyond)

    def shares(self) -> list[float]:
        """How far the ball of radius 1 reaches along each state, of its room."""
        return [to_float(self.norm.support(i)) / max(x, 1e-300) for i, x in enumerate(self.room)]


class StepSearch(SeveralAttempt):
    """The step from a stance to one that follows, or several: Jacobians and misses in the norms of first and last."""

    writer: StepWriter

    def __init__(self, way: Sequence[StanceSearch], until: float, others: list[Encloser]) -> None:
        before, after = way[0], way[-1]
        self.part, self.way = ">".join(x.stance.name for x in way), [x.obligations.stance for x in way[1:]]
        self.claim, self.gap, self.watch = before.claim, before.gap, before.watch
        self.before, self.after, self.obligations = before, after, before.obligations
        graph, writer = self.obligations.graph, before.writer
        self.ranges = Shared(self.claim, graph, writer, self.gap, until, self.watch, others)
        self.ranges.flows, self.leaves, self.needed = before.ranges.flows, {}, 0
        self.targets, self.tabled = before.targets, dict[str, tuple[Tabled, Tabled]]()

    def _entry(self, domain: Domain, s: str, x: str, steps: int = 0) -> Obligation:
        return self.obligations.slope(domain, s, x, steps, self.way)

    def _miss(self, s: str, steps: int = 0) -> Obligation:
        return self.obligations.miss(s, steps, self.way)

    def _kept_by_gait(self, domain: Domain, s: str) -> Obligation:
        return self.obligations.split_residual(domain, s, self.after.obligations.stance)

    def _form(self, proves: str, norm: Metric) -> Norm:
        inverse = floats(norm.inverse) if sloped(proves) else None
        return Norm(floats(self.after.norm.rows), inverse, norm.kind == "ellipsoid")

    def _shift(self, norm: Metric) -> float:
        return self.after._shift(norm)

    def samples(self, domain: Domain, rng: np.random.Generator, route: str, norm: Metric | None = None) -> Samples:
        jacobians, misses = (self.sampled(self.matrices(x, domain, norm), rng) for x in OF_ROUTE[route])
        return Samples(jacobians, misses[:, :, 0])

    def pair(self, route: str) -> tuple[float, float]:
        """Gain and residual over the ball of the stance (estimates); inf where they have no value."""
        found, domain = [], self.before.domain
        for proves in reversed(OF_ROUTE[route]):
            search = self.searched(proves, domain, self.before.norm, COARSE, FEW)
            self.needed = max(self.needed, search.leaves)
            found.append(search.upper)
        return found[1], found[0] + self._shift(self.after.norm)

    def into(self, norm: int) -> None:
        """Takes the sets as they are now; `norm`: the line of the metric of the stance that follows."""
        self.writer = StepWriter(self.before.writer, self.part, norm)
        self.domain, self.norm = self.before.domain, self.before.norm

    def proved(self, on: int, moves: list[int], route: str) -> int | None:
        """The line of gain and residual of the step by a route."""
        slopes, rest = (self._norm(x, on) for x in OF_ROUTE[route])
        if slopes is None or rest is None:
            return None
        self.tabled[route] = slopes, rest if route == "slope" else self._evenly(OF_ROUTE[route][1], rest, on)
        w, d = self.writer, self.after.writer.derivation
        far = moved(d, [w.proof.lines[n] for n in moves])
        residual = w.proof.lines[rest[0]].concludes["norm"] + self.after.norm.length(far)
        concludes = {"gain": upward(w.proof.lines[slopes[0]].concludes["norm"]), "residual": upward(residual)}
        return w.append(route, route, [slopes[0], rest[0], *moves], {}, concludes)

    def touched(self, on: int, route: str) -> None:
        """How far a direction is surely stretched, where that is all there is to say of a route."""
        proves = OF_ROUTE[route][0]
        found = self.searched(proves, self.domain, self.norm, COARSE, LEAST)
        with suppress(Undefined, Rejected, ZeroDivisionError):
            bits = 0 if self.writer.exact(proves, on) else BITS
            self.writer.stretch(proves, found.point, found.direction, bits, on)

    def tables(self, on: int, before: Basis, after: Basis, route: str) -> tuple[int, int] | None:
        """The lines of entries of both matrices of a route in a basis of each of the two stances."""
        if route not in self.tabled:
            return None
        slopes, rest = (
            self.writer.table(proves, known[1], known[2], on, self.leaves[proves], before, after)
            for proves, known in zip(OF_ROUTE[route], self.tabled[route], strict=True)
        )
        return slopes, rest
