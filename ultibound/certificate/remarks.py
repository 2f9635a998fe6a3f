"""What limits a requirement, said to people, and whether a smaller gap may still decide it. Nothing here is proved."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property

from ..checker.results import Results
from ..claim import Claim
from ..claim.constants import constant
from ..claim.model import Requirement
from ..claim.obligations import RANGED, Obligations
from .explaining import Explained

NEARLY = Fraction(97, 100)  # share of a bound without attained end that a smaller gap may yet gain
ONE_BALL = Fraction(101, 100)  # ends of a radius that are farther apart are not those of one ball
STOPS = {
    "cells": "stopped at the limit of cells",
    "seconds": "stopped at the limit of seconds",
    "precision": "stopped at the precision of the search",
    "jumps": "derivatives that jump inside a leaf keep its bound apart from what is taken, however small it is",
}


@dataclass(frozen=True, slots=True)
class Search:
    """How the search ended: what stopped it, an obligation; whether Ctrl-C did; whether the region is nearly mapped
    into itself as far as points tell."""

    limits: dict[str, str]
    interrupted: bool
    near_region: bool


@dataclass(frozen=True)
class Remarks:
    """Remarks on the requirements of a claim."""

    claim: Claim
    obligations: Obligations
    results: Results
    search: Search
    told: Explained

    def all(self) -> list[tuple[str | None, bool]]:
        """A remark (or none) and whether to pursue, a requirement."""
        return [self.remark(n) for n in range(1, len(self.claim.requirements) + 1)]

    def remark(self, number: int) -> tuple[str | None, bool]:
        """What limits a requirement, for people; and whether a smaller gap may decide it."""
        results = self.results
        r, outcome = self.claim.requirements[number - 1], results.requirements[number - 1]
        parts: list[str] = []
        left = self.obligations.leaves_out(r)
        if left:
            parts.append(f"over leaves out values of {', '.join(left)} that occur")
        elif results.derivation.leaves_out(results.statement.requirements[number - 1]):
            parts.append("over sets a defined name free: its own expression is not used")
        pursue = False
        if outcome.verdict == "undecided":
            ranged = r.kind in RANGED
            aside = (
                ("require", "squares")
                if r.kind == "gain"
                else ("require", "squares", "signal-slope", "split-signal-slope")
            )
            name = f"require[{number}]"
            names = [n for n in self.search.limits if not n.startswith(aside)]
            names = [name, f"squares of {name}"] if ranged else names
            parts += [f"{n}: {STOPS.get(x, x)}" for n in names if (x := self.search.limits.get(n, ""))]
            if self.search.interrupted:
                parts.append("interrupted")
            pursue = self.open(number) and not results.unsupported
            if r.over and not ranged:
                parts.append("over these ranges neither lines nor points decide it")
                value, c = outcome.value, None if r.constant is None else constant(r.constant, self.claim.values)
                pursue = value is not None and c is not None and _between(c, value.lower, value.upper)
            elif results.unsupported:
                parts.append(self.support(results.unsupported))
            elif not results.settled:
                parts.append("no set that is mapped into itself was found" + self.size_that_would_do)
            elif results.residual.upper is None and not ranged:
                parts.append("no finite gain and residual were shown")
            elif r.kind == "settles":
                why = "gain is not below 1" if results.bound is None else "bound is not below the radius of the set"
                parts.append(f"the {why}" + self.size_that_would_do)
            elif r.kind == "gain" and (outcome.value is None or outcome.value.upper is None):
                parts.append("the effect of a signal within the stance follows the state: k is that of the pair alone")
            elif self.beyond(number):
                other = r.kind in ("gain", "residual")
                untried = "another route or set may do better" if other else "no orbit that far out was found"
                parts.append(
                    f"this route cannot do better, as attained values show; that is no refutation, since {untried}"
                )
            elif r.kind == "steps":
                parts.append("no proved sequence of steps is as short, and no path was found that takes longer")
            elif r.kind == "push":
                parts.append("the radius of the set less the bound is not above the constant")
            elif not parts or pursue:
                parts.append("the constant lies between what is proved and what is attained")
        if outcome.verdict != "proved" and not (self.search.interrupted or pursue or results.unsupported):
            parts += [self.place(number), self.cost(r)]
        return ("; ".join(p for p in parts if p)[:900] or None), pursue

    def support(self, number: int) -> str:
        """What is not shown to stay positive throughout a stance, and where it is lowest."""
        what = "the duration" if number == 1 else "which a leg that never pulls, or a signal with one effect, asks for"
        at = self.told.where(f"support[{number}]")
        return f"support[{number}], {what}, is not shown to be above 0" + (
            f"; it was looked at where {at}" if at else ""
        )

    def place(self, number: int) -> str:
        """Where what decides a requirement is largest, as far as points tell."""
        r, s = self.claim.requirements[number - 1], self.results.state
        slope, miss = f"slope[{s},{s}]", f"target-miss[{s}]"
        names = {"gain": [slope], "residual": [miss], "bound": [slope, miss], "settles": [slope, miss]}
        asked = [f"require[{number}]"] if r.kind in RANGED else [] if r.over else names.get(r.kind, [])
        found = [(n, at) for n in asked if (at := self.told.where(n))]
        return "; ".join(f"{n} is largest in size at {at}" for n, at in found)

    def cost(self, r: Requirement) -> str:
        """Which uncertain quantities cost how much, for a requirement that slope and residual decide; an estimate."""
        radius = self.results.radius.lower
        if r.over or r.stance is not None or radius is None:
            return ""
        c = float(radius) if r.constant is None else float(constant(r.constant, self.claim.values)[0])
        tests: dict[str, Callable[[float, float], bool]] = {
            "settles": lambda k, e: k < 1 and e / (1 - k) < c,
            "bound": lambda k, e: k < 1 and e / (1 - k) < c,
            "sharp_bound": lambda k, e: k < 1 and e / (1 - k) < c,
            "gain": lambda k, e: k < c,
            "residual": lambda k, e: e < c,
        }
        return self.told.costs(tests[r.kind]) if r.kind in tests else ""

    def beyond(self, number: int) -> bool:
        """Whether attained values keep the slope route from ever proving an upper limit."""
        r, value = self.claim.requirements[number - 1], self.results.requirements[number - 1].value
        if r.kind not in ("gain", "residual", "bound") or r.constant is None or value is None or value.lower is None:
            return False
        return value.lower > constant(r.constant, self.claim.values)[1]

    def open(self, number: int) -> bool:
        """Whether what is proved and what is attained leave room for the answer: only then does a smaller gap help."""
        results = self.results
        r, outcome = self.claim.requirements[number - 1], results.requirements[number - 1]
        k, e, radius = results.gain, results.residual, results.radius.lower
        if r.kind in RANGED and outcome.value is not None and outcome.attained is not None:
            wanted = None if r.constant is None else constant(r.constant, self.claim.values)
            if r.kind == "always":
                wanted = (Fraction(0), Fraction(0))
            ends = [(outcome.attained.upper, outcome.value.upper), (outcome.value.lower, outcome.attained.lower)]
            if wanted is not None and any(_between(wanted, *x) for x in ends):
                return True
        if k.lower is None or e.lower is None or radius is None:
            return False
        if not results.settled:
            return self.search.near_region or k.lower * radius + e.lower <= radius
        if r.kind == "settles" or (r.kind == "bound" and results.bound is None):
            return k.lower < 1 and e.lower < radius * (1 - k.lower)
        bound = results.best if r.state else results.bound
        spans = {"gain": k, "residual": e, "bound": bound, "sharp_bound": results.sharp}
        span = spans.get(r.kind)
        if span is None or r.constant is None or span.upper is None:
            return False
        lower = span.lower if span.lower is not None and r.state is None else span.upper * NEARLY
        return _between(constant(r.constant, self.claim.values), lower, span.upper)

    @cached_property
    def size_that_would_do(self) -> str:
        """What is known of a region that would do, to end a sentence with."""
        results = self.results
        if results.residual.upper is None or results.gain.upper is None or self.search.interrupted:
            return ""
        r = self.told.enough()
        if r is None:
            return "; no larger region was found that would do"
        low, high = float(results.centre.lower or 0) - r, float(results.centre.upper or 0) + r
        return f"; a region of [{low:.4g}, {high:.4g}] would do (an estimate, not proved)"


def _between(c: tuple[Fraction, Fraction], low: Fraction | None, high: Fraction | None) -> bool:
    """Whether a constant may lie between two ends."""
    return low is not None and high is not None and low <= c[1] and c[0] <= high and low < high
