"""Claim → step map → range of each obligation → theorems → requirements → certificate → check.

Every number on a line is measured by the checker's own arithmetic on the tree that the search found; the finished
certificate is checked again from its bytes before anyone sees it.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from math import log2

from .bounding.defined import undefined_point
from .bounding.evaluate import Runner, to_float
from .bounding.search import Effort, Found, Point, search
from .certificate.certificate import Certificate, sealed
from .certificate.lines import Writer, downward, upward
from .certificate.remarks import STOPS, Remarks, Search
from .certificate.results import assembled
from .checker import Verdict, check
from .checker.reals import Undefined
from .checker.results import Results
from .checker.rules import Rejected
from .claim import Bad, Claim, ClaimError
from .claim.obligations import Domain, Obligation, Obligations, not_yet
from .contraction import enough_radius
from .stepmap.symbolic import compiled

BITS = 72
SHARPER = 1e-2  # factor on the gap when an undecided requirement is pursued
FINEST = 1e-11
COARSE = 0.03
PATIENCE = 400  # leaves beyond which second derivatives pay
TARGET_GAP = 1e-8  # the largest ball must be known to 1e-6: proofs/invariant-set.md (4)
Watch = Callable[[str, int, float], None]


class InternalError(Exception):
    """The checker refuses a certificate that was just built: a defect of this program."""


@dataclass(frozen=True, slots=True)
class Proved:
    """A range on a line: ends the checker measured, as a line number, and what stopped its search."""

    line: int
    lower: Fraction
    upper: Fraction
    least: Fraction  # the smallest and the largest value surely taken
    most: Fraction
    stopped: str


def prove(claim: Claim, watch: Watch | None = None) -> Certificate:
    """Proves what it can of a claim and returns a certificate that the checker has accepted.

    Raises ClaimError where the claim cannot be used (undefined at a point of its region, target outside, or of a
    kind that cannot be proved yet). Ctrl-C stops the search; what was proved by then is kept, and the certificate
    says so (`interrupted`).
    """
    problem = not_yet(claim)
    if problem is not None:
        raise ClaimError.of(claim.place, *problem.split(": ", 1))
    try:
        undefined = undefined_point(claim)
        if undefined is not None:
            raise ClaimError.of(claim.place, *undefined)
        return _proved(claim, watch or (lambda stage, leaves, high: None))
    except Bad as why:
        raise ClaimError.of(claim.place, "", str(why)) from None


def _proved(claim: Claim, watch: Watch) -> Certificate:
    """The certificate of a claim that can be used: tried at smaller gaps while that may decide a requirement."""
    gap = to_float(claim.gap)
    until = time.monotonic() + to_float(claim.seconds)
    while True:
        attempt = Attempt(claim, gap, until, watch)
        certificate, pursue = attempt.certificate()
        gap *= SHARPER
        cut = any(x in STOPS for x in attempt.limits.values())  # a smaller gap would meet the same limit
        if cut or not pursue or gap < FINEST or attempt.interrupted or time.monotonic() > until:
            break
    verdict = _checked(certificate, attempt)
    if verdict.status != "valid":
        raise InternalError(f"{verdict.place}: {verdict.reason}")
    return certificate


def _checked(certificate: Certificate, attempt: Attempt) -> Verdict:
    """The checker's verdict on the finished bytes; the first Ctrl-C does not keep it from being reached."""

    def watch(done: int, total: int) -> None:
        attempt.watch("checking the certificate, line by line", done, float(total))

    try:
        return check(certificate.to_bytes(), watch)
    except KeyboardInterrupt:
        if attempt.interrupted:
            raise
        return check(certificate.to_bytes(), watch)


class Attempt:
    """One pass through the proof at one gap."""

    def __init__(self, claim: Claim, gap: float, until: float, watch: Watch) -> None:
        self.claim, self.gap, self.until, self.watch = claim, gap, until, watch
        self.obligations, self.writer = Obligations(claim), Writer(claim)
        self.interrupted = self.near_region = False
        self.limits: dict[str, str] = {}
        self._runners: dict[tuple[int, str, bool], Runner] = {}

    def certificate(self) -> tuple[Certificate, bool]:
        """The certificate, and whether a smaller gap may still decide a requirement."""
        s, w, o = self.obligations.state, self.writer, self.obligations
        target = self.enclose(o.target(), None, points=True, gap=min(self.gap, TARGET_GAP))
        region, inner = w.derivation.region()
        if target is None:
            raise ClaimError.of(
                self.claim.place,
                f"target.{s}",
                "no finite range of the target can be shown; state it in a simpler form",
            )
        self._target_inside(target, region)
        radius = min(target.lower - inner[0], inner[1] - target.upper)
        if radius < 0:
            raise ClaimError.of(
                self.claim.place, f"target.{s}", "cannot be shown to lie inside the region; widen the region a little"
            )
        ball = w.theorem("largest-ball", "ball", [target.line], {"radius": downward(radius)})
        radius = w.proof.lines[ball].concludes["radius"]
        domain, on = self._certified(target, Domain("ball", radius, (target.lower, target.upper)), ball)
        pair = self._slope_route(domain, on)
        invariant = on if on != ball else None
        if invariant is None and pair is not None:
            try:
                invariant = w.theorem("invariant-ball", "invariant", [ball, pair], {})
            except Rejected:
                invariant = None
        if invariant is not None and pair is not None:
            self._bound(invariant, pair)
        for number, r in enumerate(self.claim.requirements, 1):
            if r.kind in ("value", "sensitivity"):
                self.enclose(o.requirement(number, domain), on, points=True)
        results = Results(w.proof)
        state = Search(self.limits, self.interrupted, self.near_region)
        remarks = Remarks(self.claim, o, results, state, lambda: self._enough(results)).all()
        text = assembled(self.claim, results, remarks)
        return sealed(self.claim, text, w.pruned(results.needed), self.interrupted), any(p for _, p in remarks)

    def _certified(self, target: Proved, ball: Domain, on: int) -> tuple[Domain, int]:
        """S: the region if it is mapped into itself (then a line says so), else the largest ball in it."""
        for gap in (COARSE, self.gap):  # only inclusion counts: few leaves show it where there is room
            image = self.enclose(self.obligations.image(), None, points=gap == self.gap, gap=gap)
            if image is not None:
                try:
                    line = self.writer.theorem("invariant-region", "invariant", [target.line, image.line], {})
                    return Domain("region", Fraction(0), ball.target), line
                except Rejected:
                    low, high = self.obligations.region()[1]
                    self.near_region = low <= image.least and image.most <= high
        return ball, on

    def _slope_route(self, domain: Domain, on: int) -> int | None:
        """Gain and residual: proofs/slope.md."""
        o, w = self.obligations, self.writer
        slope = self.enclose(o.slope(domain), on, magnitude=True)
        moves = [self.enclose(o.target_slope(h), None, magnitude=True) for h in o.moving()]
        changes = [w.derivation.change(h)[1] for h in o.moving()]
        moved = sum((_size(m) * c for m, c in zip(moves, changes, strict=True) if m), Fraction(0))
        # the residual is a sum: its gap, not that of one part, is what counts
        miss = self.enclose(o.miss(), None, magnitude=True, floor=self.gap * to_float(moved))
        known = [p for p in (slope, miss, *moves) if p is not None]
        if len(known) < 2 + len(moves):
            return None
        concludes = {"gain": upward(_size(known[0])), "residual": upward(_size(known[1]) + moved)}
        return w.theorem("slope", "slope", [p.line for p in known], concludes)

    def _bound(self, invariant: int, pair: int) -> None:
        concluded = self.writer.proof.lines[pair].concludes
        if concluded["gain"] < 1:
            bound = concluded["residual"] / (1 - concluded["gain"])
            self.writer.theorem("ultimate-bound", "bound", [invariant, pair], {"bound": upward(bound)})

    def enclose(
        self,
        obligation: Obligation,
        on: int | None,
        magnitude: bool = False,
        points: bool = True,
        gap: float = 0.0,
        floor: float = 0.0,
    ) -> Proved | None:
        """A range line and the points nearest its ends; None where the checker finds no finite range.

        `floor` is an absolute gap that is enough whatever the size of the quantity.
        """
        w, name, wanted = self.writer, obligation.name, gap or self.gap
        rational, share = w.rational(name, on), 1.0
        for _ in range(5):
            found = self._search(obligation, magnitude, wanted * share, floor * share)
            bits = 0 if rational else BITS + _extra(found)
            self.watch(f"{name}: enclosing the leaves in the checker's arithmetic", found.leaves, found.upper)
            try:
                ends = w.range(name, found.trees, bits, on)
            except KeyboardInterrupt:
                self._interrupt()
                continue
            except Undefined as why:
                self.limits[name] = str(why)
                share /= 16
                if found.stopped:
                    return None
                continue
            taken = [self._point(name, p, bits, on) for p in (found.highest, found.lowest)]
            if found.stopped or _close(ends, [t[1] for t in taken if t], magnitude, wanted, floor):
                break
            share /= 8
        else:
            if name in self.limits:
                return None
        self.limits[name] = found.stopped
        line = w.enclosed("range", name, {"bits": bits, "trees": list(found.trees)}, ends, on)
        if points:
            self._write_points(name, [t for t in taken if t], magnitude, bits, on)
        concluded = w.proof.lines[line].concludes
        low, high = concluded["lower"], concluded["upper"]
        least, most = min((t[1][1] for t in taken if t), default=high), max((t[1][0] for t in taken if t), default=low)
        return Proved(line, low, high, least, most, found.stopped)

    def _search(self, obligation: Obligation, magnitude: bool, gap: float, floor: float = 0.0) -> Found:
        """Witnesses for a range; of a value that takes many leaves, with the second-order form."""

        def watch(leaves: int, high: float) -> None:
            self.watch(obligation.name, leaves, high)

        def attempt(curved: bool) -> Found:
            patience = 10**9 if curved or obligation.by else PATIENCE
            effort = Effort(gap, self.claim.cells, self.until, watch, floor, patience)
            return search(self._runner(obligation, curved), obligation, magnitude, effort)

        try:
            found = attempt(False)
            return attempt(True) if found.stopped == "patience" else found
        except KeyboardInterrupt:
            self._interrupt()
            return attempt(False)

    def _runner(self, obligation: Obligation, curved: bool) -> Runner:
        key = obligation.root, obligation.by, curved
        if key not in self._runners:
            names = [v.name for v in obligation.variables]
            program = compiled(self.obligations.graph, obligation.root, obligation.by, names, curved)
            self._runners[key] = Runner(program, names, self.claim.libraries)
        return self._runners[key]

    def _interrupt(self) -> None:
        """The first Ctrl-C stops every search where it is; the second one ends the program."""
        if self.interrupted:
            raise KeyboardInterrupt
        self.interrupted, self.until = True, 0.0

    def _point(
        self, name: str, point: Point, bits: int, on: int | None
    ) -> tuple[dict[str, str], tuple[Fraction, Fraction]] | None:
        at = self.writer.spelled(name, point, on)
        try:
            return at, self.writer.point(name, at, bits, on)
        except (Undefined, Rejected):
            return None

    def _write_points(
        self,
        name: str,
        taken: list[tuple[dict[str, str], tuple[Fraction, Fraction]]],
        magnitude: bool,
        bits: int,
        on: int | None,
    ) -> None:
        """The points that say most: the one of largest magnitude, or those of the largest and smallest value."""
        if not taken:
            return
        top, bottom = max(taken, key=lambda t: t[1][0]), min(taken, key=lambda t: t[1][1])
        chosen = [top] if top is bottom or top[0] == bottom[0] else [top, bottom]
        if magnitude:
            chosen = [max(chosen, key=lambda t: max(t[1][0], -t[1][1]))]
        for at, ends in chosen:
            self.writer.enclosed("point", name, {"at": at, "bits": bits}, ends, on)

    def _target_inside(self, target: Proved, region: tuple[Fraction, Fraction]) -> None:
        s = self.obligations.state
        for n, line in self.writer.proof.lines.items():
            if line.rule == "point" and (line.concludes["lower"] > region[1] or line.concludes["upper"] < region[0]):
                at = self.writer.raw[n - 1]["witness"]["at"]
                where = ", ".join(f"{k} = {float(Fraction(v)):.6g}" for k, v in at.items() if not v.startswith("#"))
                value = float(line.concludes["lower"])
                raise ClaimError.of(
                    self.claim.place, f"target.{s}",
                    f"takes the value {value:.6g}{' at ' + where if where else ''}, outside the region "
                    f"[{float(region[0]):.6g}, {float(region[1]):.6g}]; widen the region or narrow the held quantities",
                )  # fmt: skip

    def _enough(self, results: Results) -> float | None:
        """An estimate of the radius that would carry a bound, for a region too small (nothing proved)."""
        if results.residual.upper is None or results.gain.upper is None or self.interrupted:
            return None
        target = (results.centre.lower or Fraction(0), results.centre.upper or Fraction(0))

        def gain(radius: float) -> float:
            found = self._search(self.obligations.slope(Domain("ball", Fraction(radius), target)), True, 1e-2)
            return max(abs(found.upper), abs(found.lower))

        return enough_radius(to_float(results.radius.lower or Fraction(0)), gain, to_float(results.residual.upper))


def _close(
    ends: tuple[Fraction, Fraction], taken: list[tuple[Fraction, Fraction]], magnitude: bool, gap: float, floor: float
) -> bool:
    """Whether the measured ends are within the gap of values surely taken."""
    if not taken:
        return False
    high, low = max(t[0] for t in taken), min(t[1] for t in taken)
    share, least = Fraction(gap), max(Fraction(gap) / 10**6, Fraction(floor))
    if magnitude:
        most = max(high, -low, Fraction(0))
        return max(abs(ends[0]), abs(ends[1])) - most <= max(share * most, least)
    return ends[1] - high <= max(share * abs(high), least) and low - ends[0] <= max(share * abs(low), least)


def _size(p: Proved) -> Fraction:
    return max(abs(p.lower), abs(p.upper))


def _extra(found: Found) -> int:
    """More fractional bits where the values are small, so that their last digits are kept."""
    size = max(abs(found.upper), abs(found.lower))
    return min(2000, max(0, int(-log2(size)))) if 0 < size < 1 else 0
