"""The sections of a claim, one after another, to a Claim; every fault is collected before it is refused."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from .constants import constant
from .declared import distinct, flag
from .errors import Bad, ClaimError, Problem, Unknown
from .expression import Expression
from .model import Claim, Requirement, Stance
from .requirement import parse_requirement
from .scope import Names
from .stances import Stances

TOP = (
    "format", "title", "notes", "route", "correction", "shrink", "horizon", "constants", "gains", "state", "uncertain",
    "define", "next", "target", "metric", "effort", "require", "dynamics", "library", "stance",
)  # fmt: skip


class Sections(Stances):
    """Reads the rest and puts the claim together."""

    def claim(self) -> Claim:
        """The claim. Raises ClaimError with every fault found."""
        raw = self.table(self.raw, "", TOP)
        if type(raw.get("format")) is not int or raw["format"] != 1:
            found = f"{raw['format']!r:.40} found" if "format" in raw else "missing"
            self.problems.append(Problem("format", f"{found}; this program reads format = 1"))
            if "format" in raw:
                raise ClaimError(self.place, self.problems)
        title, notes = self.text_key("title"), self.text_key("notes")
        own = raw.get("stance")
        listed = list(own.values()) if isinstance(own, dict) else []
        self.moving = "dynamics" in raw or any("dynamics" in s for s in listed if isinstance(s, dict))
        constants, gains = self.fixed("constants"), self.fixed("gains")
        states = self.quantities(raw.get("state", {}), "state", state=True)
        uncertain = self.quantities(raw.get("uncertain", {}), "uncertain", state=False)
        libraries = self.libraries()
        define = self.expressions(raw.get("define", {}), "define", declare=True)
        stances, names = self.resolved(self.stances(states, define), [*constants, *gains], uncertain, libraries)
        route = self.choice("route", ("best", "slope", "split", "sector", "curve"))
        correction, horizon = self.correction(stances[0]), raw.get("horizon", 1)
        if type(horizon) is not int or not 1 <= horizon <= 64:
            self.problems.append(Problem("horizon", f"{horizon!r:.40} found, a whole number from 1 to 64 is expected"))
        shrink = self.attempt("shrink", lambda: flag(raw.get("shrink", False)), False)
        metric, weights = self.metric(stances[0])
        gap, cells, seconds = self.effort()
        requirements = self.requirements(names, {s.name for s in stances if s.name})
        if self.problems:
            raise ClaimError(self.place, self.problems)
        return Claim(
            self.text, self.settings, dict(self.data), self.place, title, notes, route, correction, shrink, horizon,
            constants, gains, uncertain, libraries, metric, weights, gap, cells, seconds, requirements, tuple(stances),
            self.values,
        )  # fmt: skip

    def correction(self, stance: Stance) -> tuple[str, ...]:
        if "correction" not in self.raw:
            return ()
        value = self.raw["correction"]
        if not distinct(value) or not value or not set(value) <= set(stance.define):
            self.problems.append(
                Problem(
                    "correction", f"a list of defined names is expected; defined: {', '.join(list(stance.define)[:12])}"
                )
            )
            return ()
        return tuple(value)

    def metric(self, stance: Stance) -> tuple[str, dict[str, Expression]]:
        raw = self.table(self.raw.get("metric", {}), "metric", ("kind", "weights"))
        kind, kinds = raw.get("kind", "auto"), ("auto", "box", "ellipsoid", "polytope")
        if type(kind) is not str or kind not in kinds:
            self.problems.append(Problem("metric.kind", f"{kind!r:.40} found, one of {', '.join(kinds)} is expected"))
        weights = {}
        for s, w in self.table(raw.get("weights", {}), "metric.weights").items():
            with self.at(f"metric.weights.{s[:60]}"):
                if s not in stance.states:
                    raise Unknown("not a state", s, stance.states)
                weights[s], (low, _) = self.constant(w)
                if low <= 0:
                    raise Bad("a weight must be above 0")
        return str(kind), weights

    def effort(self) -> tuple[Fraction, int, Fraction]:
        raw = self.table(self.raw.get("effort", {}), "effort", ("gap", "cells", "seconds"))
        gap, cells, seconds = Fraction(1, 1000), raw.get("cells", 200_000), Fraction(600)
        if type(cells) is not int or cells < 1:
            self.problems.append(
                Problem("effort.cells", f"{cells!r:.40} found, a whole number of at least 1 is expected")
            )
        with self.at("effort.gap"):
            low, high = self.constant(raw["gap"])[1] if "gap" in raw else (gap, gap)
            if not (low > 0 and high < 1):
                raise Bad("a number above 0 and below 1 is expected")
            gap = low
        with self.at("effort.seconds"):
            low, _ = self.constant(raw["seconds"])[1] if "seconds" in raw else (seconds, seconds)
            if low <= 0:
                raise Bad("a number above 0 is expected")
            seconds = low
        return gap, cells, seconds

    def requirements(self, names: Names, stances: set[str]) -> tuple[Requirement, ...]:
        listed = self.raw.get("require", [{"that": "settles"}])
        if not isinstance(listed, list) or not 1 <= len(listed) <= 1000:
            self.problems.append(
                Problem("require", "1 to 1,000 [[require]] tables are expected; leave it out for `settles`")
            )
            return ()
        found = []
        for number, item in enumerate(listed, 1):
            place = f"require[{number}]"
            with self.at(place):
                raw = self.table(item, place, ("that", "over", "in"))
                if type(raw.get("that")) is not str:
                    raise Bad("that: a statement in quotes is expected")
                r = parse_requirement(self.parser(raw["that"], steps=True))
                self.known(r, names)
                over = {}
                for name, ends in self.table(raw.get("over", {}), f"{place}.over").items():
                    with self.at(f"{place}.over.{name[:60]}"):
                        allowed = names.freed if r.kind == "sensitivity" else names.spanned
                        if name not in allowed:
                            raise Unknown("cannot be given a range here", name, allowed)
                        over[name] = self.range(ends)
                stance = raw.get("in")
                if "in" in raw and (type(stance) is not str or stance not in stances):
                    raise Bad(f"in: {stance!r:.40} found, a stance is expected")
                found.append(replace(r, over=over, stance=stance))
        return tuple(found)

    def known(self, r: Requirement, names: Names) -> None:
        """Raises Bad where a requirement speaks of what is not there."""
        if r.state is not None and r.state not in names.stance.states:
            raise Unknown(f"{r.state} is not a state", r.state, names.stance.states)
        if r.by is not None and r.by not in names.partial and not names.open:
            raise Unknown(f"{r.by} is not a declared or defined name", r.by, names.partial)
        for e in (r.expression, r.left, r.right):
            if e is not None:
                names.check(e)
        for e in (r.constant, r.start, r.end):
            if e is not None:
                constant(e, self.values, self.failed)
        if (r.during or r.kind == "throughout") and not self.moving:
            raise Bad("needs [dynamics]: without it there is no time inside a step")
