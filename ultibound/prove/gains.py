"""The interval of a gain: how far out every requirement is proved, and from where on one is refuted.

Single gains are tried first, further and further out, then between the last that is proved and the first that is not;
then pieces of gains, each as large as it can be proved whole, cover what lies between (proofs/sensitivity-gain.md).
"""

from __future__ import annotations

import time
from dataclasses import replace
from fractions import Fraction
from math import floor, log10
from typing import TYPE_CHECKING, Any

from ..bounding.evaluate import to_float
from ..certificate.enclosing import Watch
from ..certificate.lines import downward, upward
from ..checker.derive import Derivation
from ..checker.gains import narrowed as statement_narrowed
from ..checker.gains import products
from ..checker.graph_outcomes import results_of
from ..checker.rules import Rejected
from ..checker.sector import applies
from ..checker.theorems import Piece, Variant
from ..claim import Bad, ClaimError
from ..claim.obligations import Domain
from ..claim.provable import narrowed
from .one import COARSE, DECIDED, Attempt, best

if TYPE_CHECKING:
    from ..claim import Claim

SHARPER = 1e-2  # factor on the gap when a gain is undecided
NEAR = Fraction(1, 2500)  # of a gain's size: how closely both ends are found
STEP = Fraction(1, 20)  # of its size: the first step out
OUTWARD = 12  # steps out, each twice as long
CELLS = 2000  # leaves of a range, at most: where more are wanted, a smaller piece serves better
ROUNDS = 8  # of finding how far the gains go that contract
LEAST, WANTED, MOST = 1.0, 1.05, 1.3  # how far a piece reaches over them
Ends = tuple[Fraction, Fraction]


class Stopped(Exception):
    """Ctrl-C, or the end of the time that the claim gives."""


class Sensitivity(Attempt):
    """Which gains of a piece contract: the band of the sensitivity, and the correction a multiple of the gain."""

    def __init__(self, gain: str, *attempt: Any, **options: Any) -> None:
        self.gain, self.line = gain, 0
        self.band: Ends | None = None
        super().__init__(*attempt, **options)

    def _prove(self) -> None:
        """proofs/sensitivity-gain.md (2)"""
        o, w = self.obligations, self.writer
        self._flow()
        target = self._target()
        ball = self._ball(target)
        found = w.proof.lines[ball].domain
        if found is None:
            return
        domain = Domain("ball", found.radius, (target.lower, target.upper), found.beyond)
        try:
            sensitivity, _, start, _ = o.sector(domain)
            asked = [(sensitivity, ball), (o.factor(domain, self.gain), ball), (start, None)]
        except Bad as why:
            self.ranges.limits["sensitivity-gain"] = str(why)
            return
        shown = [self.ranges.enclose(x, on, points=False) for x, on in asked]
        for number in range(1, len(o.motion.positive) + 1 if o.motion is not None else 1):
            shown.append(self.ranges.enclose(o.support(number, domain), ball, points=False, gap=DECIDED, side=-1))
        uses = [x.line for x in shown if x is not None]
        if len(uses) < len(shown):
            return
        least, most = products(w.proof.lines[uses[0]], w.proof.lines[uses[1]])
        self.band = least, most
        if least > 0:
            low, high = w.derivation.range(w.derivation.statement.uncertain[self.gain])[1]
            value = min(max(Fraction(f"{to_float(2 / (least + most)):.12g}"), low), high)
            k = max(abs(1 - value * x) for x in (least, most))
            concludes = {
                "lower": str(low), "upper": downward(min(high, 2 / most)), "best": str(value), "gain": upward(k)
            }  # fmt: skip
            try:
                self.line = w.theorem("sensitivity-gain", f"sensitivity-gain[{self.gain}]", uses, concludes)
            except Rejected as why:
                self.ranges.limits["sensitivity-gain"] = str(why)

    def _over(self, number: int) -> None:
        """Nothing of the requirements is asked here."""


class Interval:
    """The search for the interval of one gain, from the proof of the claim as it stands."""

    def __init__(self, whole: Attempt, gain: str, gap: float, until: float, watch: Watch) -> None:
        self.whole, self.gain, self.gap, self.until, self.watch = whole, gain, gap, until, watch
        self.known: dict[Ends, Attempt | None] = {}
        self.pieces: list[Ends] = []
        self.broken: list[Fraction] = []
        self.contracting: tuple[Ends, Sensitivity] | None = None
        low, high = whole.claim.values[gain]
        self.own = low if low == high else Fraction(f"{to_float(low):.6g}")
        self.size = abs(self.own) or Fraction(1)

    def search(self) -> None:
        """Finds what it can, and puts it on the proof."""
        interrupted = False
        try:
            self._contracting()
            start = self._start()
            if start is not None:
                self._around(start)
        except Stopped:
            pass
        except KeyboardInterrupt:
            interrupted = True
        self._adopt(interrupted)

    def _around(self, start: Fraction) -> None:
        """Both sides of a gain at which every requirement is proved."""
        ends = [self._frontier(start, side) for side in (-1, 1)]
        (low, _), (high, _) = ends
        if self._proved(low, high):
            self.pieces = [(low, high)]
        else:
            for end in (low, high):
                self._cover(start, end)
            if not self.pieces:
                self.pieces = [(start, start)]
        for side, (_, bad) in zip((-1, 1), ends, strict=True):
            if bad is not None:
                self._refuted(bad, side)

    def _start(self) -> Fraction | None:
        """The claim's own gain, else the best that is known to contract."""
        found = [self.own]
        if self.contracting is not None and self.contracting[1].line:
            found.append(Fraction(self.contracting[1].writer.raw[self.contracting[1].line - 1]["concludes"]["best"]))
        return next((x for x in found if self._proved(x, x)), None)

    def _frontier(self, good: Fraction, side: int) -> tuple[Fraction, Fraction | None]:
        """The last gain that is proved on a side, and the first, nearly, that is not."""
        bad, step = None, self.size * STEP
        for _ in range(OUTWARD):
            x = self._short(good + side * step)
            if not self._proved(x, x):
                bad = x
                break
            good, step = x, 2 * step
        while bad is not None and abs(bad - good) > self.size * NEAR:
            x = self._short((good + bad) / 2)
            good, bad = (x, bad) if self._proved(x, x) else (good, x)
        return good, bad

    def _cover(self, start: Fraction, end: Fraction) -> None:
        """Pieces from a gain towards another, twice as large after each that is proved, half after each that is not."""
        low, reach, width = start, abs(end - start), abs(end - start)
        while reach > 0 and width >= self.size * NEAR / 4:
            high = end if width >= reach else self._short(low + (width if end > low else -width))
            piece = min(low, high), max(low, high)
            if self._proved(*piece):
                self.pieces.append(piece)
                low, reach, width = high, abs(end - high), 2 * width
            else:
                width = min(width, reach) / 2

    def _refuted(self, bad: Fraction, side: int) -> None:
        """The nearest gain, nearly, beyond one that is not proved, at which a requirement is refuted."""
        beyond = [x for (x, y) in self.known if x == y and (x - bad) * side > 0 and self._breaks(x)]
        undecided, step = None, self.size * NEAR
        if beyond and not self._breaks(bad):
            undecided, bad = bad, min(beyond, key=lambda x: x * side)
        for _ in range(OUTWARD):
            if self._breaks(bad):
                break
            undecided, bad, step = bad, self._short(bad + side * step), 2 * step
        else:
            return
        while undecided is not None and abs(bad - undecided) > self.size * NEAR:
            x = self._short((bad + undecided) / 2)
            undecided, bad = (undecided, x) if self._breaks(x) else (x, bad)
        self.broken.append(bad)

    def _short(self, x: Fraction) -> Fraction:
        """A decimal nearby, short to write."""
        digits = 1 - floor(log10(self.size * NEAR))
        return Fraction(round(x * 10**digits), 10**digits)

    def _proved(self, low: Fraction, high: Fraction) -> bool:
        """Whether every requirement is proved for every gain of a piece."""
        return self._verdicts(low, high) == {"proved"}

    def _breaks(self, x: Fraction) -> bool:
        """Whether a requirement is refuted there, on a set as the pieces have it."""
        found, kinds = self._attempt(x, x), {a.results.kind for p in self.pieces if (a := self.known[p]) is not None}
        alike = found is not None and (kinds <= {None, "region"} or found.results.kind != "region")
        return alike and "refuted" in self._verdicts(x, x)

    def _verdicts(self, low: Fraction, high: Fraction) -> set[str]:
        found = self._attempt(low, high)
        return set() if found is None else {x.verdict for x in found.results.requirements}

    def _attempt(self, low: Fraction, high: Fraction) -> Attempt | None:
        """The proof of a piece: by the slope alone where that decides it, else by every route, else at a smaller gap.

        None where the claim has no meaning there.
        """
        if (low, high) not in self.known:
            self._alive()
            claim, derivation = self._narrowed(low, high)
            claim = replace(claim, cells=min(claim.cells, CELLS))
            more = bool(claim.correction) and claim.route not in ("split", "sector")
            plain = replace(claim, correction=()) if more else claim
            self.known[low, high] = None
            for each, gap in [(plain, self.gap), *([(claim, self.gap)] if more else []), (plain, self.gap * SHARPER)]:
                found = self._one(each, derivation, gap, low, high)
                if found is None:
                    break
                self.known[low, high] = found
                verdicts = {x.verdict for x in found.results.requirements}
                if verdicts == {"proved"} or "refuted" in verdicts or (each is claim and not found.pursue):
                    break
        return self.known[low, high]

    def _one(self, claim: Claim, derivation: Derivation, gap: float, low: Fraction, high: Fraction) -> Attempt | None:
        self.watch(f"{self.gain} from {to_float(low):.6g} to {to_float(high):.6g}", len(self.known), gap)
        kind, sharp = type(self.whole), self.whole.sharp
        try:
            found = best(kind(claim, gap, self.until, self.watch, sharp, derivation=derivation, terse=True))
        except (ClaimError, Bad):
            return None
        if found.ranges.interrupted:
            self.whole.ranges.interrupted = True
        if found.ranges.interrupted or time.monotonic() > self.until:
            self.known.pop((low, high))
            raise Stopped
        return found

    def _narrowed(self, low: Fraction, high: Fraction) -> tuple[Claim, Derivation]:
        piece = Piece(self.gain, low, high)
        statement = statement_narrowed(self.whole.writer.derivation, piece)
        return narrowed(self.whole.claim, self.gain, low, high), Derivation(statement)

    def _alive(self) -> None:
        if self.whole.ranges.interrupted or time.monotonic() > self.until:
            raise Stopped

    def _contracting(self) -> None:
        """The gains from 0 that contract: a piece that reaches just beyond them, the band over which depends on it."""
        if not applies(self.whole.writer.derivation.statement) or self.gain not in self.whole.claim.gains:
            return
        high = 4 * self.size
        for gap in (*[COARSE] * ROUNDS, self.gap):
            self._alive()
            claim, derivation = self._narrowed(Fraction(0), high)
            try:
                found = Sensitivity(
                    self.gain, claim, gap, self.until, self.watch, False, derivation=derivation, terse=True
                )
            except (ClaimError, Bad, Rejected):
                return
            if found.band is None:
                return
            least, most = found.band
            if found.line and gap == self.gap:
                self.contracting = (Fraction(0), high), found
            if least <= 0:
                high = self._short(high / 2) or high / 2
            elif not LEAST <= to_float(high * most / 2) <= MOST:
                high = self._short(Fraction(WANTED) * 2 / most) or high

    def _adopt(self, interrupted: bool) -> None:
        """Puts what was found on the proof of the whole claim."""
        whole, number = self.whole, 0
        whole.ranges.interrupted |= interrupted
        found = [(x, self.known[x]) for x in sorted(self.pieces)]
        found += [((x, x), self.known[x, x]) for x in sorted(self.broken)]
        asked = [(ends, a.writer, a.results.needed) for ends, a in found if a is not None]
        if self.contracting is not None:
            ends, own = self.contracting
            asked.append((ends, own.writer, {own.line}))
        for number, (ends, writer, needed) in enumerate(asked, 1):
            whole.writer.piece(number, self.gain, *ends)
            whole.writer.adopt(writer, Variant(number), needed)
        whole.results = results_of(whole.writer.proof)
        whole.seal()
