"""The sections of a claim, one after another, to a Claim; every fault is collected before it is refused."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from fractions import Fraction
from functools import partial
from typing import Any, TypeVar

from .constants import constant
from .errors import Bad, ClaimError, Problem, nearest
from .expression import NAME, Expression, Parser, exact_number
from .fields import Fields, kind
from .library import parse_library
from .model import Claim, Dynamics, Library, Quantity, Requirement, Stance
from .requirement import parse_requirement
from .scope import Names
from .toml import Spelled

TOP = (
    "format", "title", "notes", "route", "correction", "shrink", "horizon", "constants", "gains", "state", "uncertain",
    "define", "next", "target", "metric", "effort", "require", "dynamics", "library", "stance",
)  # fmt: skip
NAME_ANYWHERE = re.compile(r"(?<![0-9A-Za-z_.])[A-Za-z][A-Za-z0-9_]*", re.ASCII)
STANCE_KEYS = ("then", "mirror", "define", "state", "next", "target", "dynamics")
T = TypeVar("T")


def safe(file: str) -> bool:
    parts = file.split("/")
    return file.isprintable() and "\\" not in file and all(p not in ("", ".", "..") for p in parts)


class Sections(Fields):
    def __init__(
        self, text: str, raw: dict[str, Any], settings: Mapping[str, str], data: Mapping[str, str], place: str
    ) -> None:
        super().__init__()
        self.text, self.raw, self.settings, self.data, self.place = text, raw, dict(settings), data, place

    # sections

    def claim(self) -> Claim:
        raw = self.table(self.raw, "", TOP)
        if type(raw.get("format")) is not int or raw["format"] != 1:
            found = f"{raw['format']!r:.40} found" if "format" in raw else "missing"
            self.problems.append(Problem("format", f"{found}; this program reads format = 1"))
            if "format" in raw:
                raise ClaimError(self.place, self.problems)
        title, notes = self.text_key("title"), self.text_key("notes")
        raw_stances = {
            n: self.table(s, f"stance.{n[:60]}", STANCE_KEYS)
            for n, s in self.table(raw.get("stance", {}), "stance").items()
        }
        if "stance" in raw and not raw_stances:
            self.problems.append(Problem("stance", "empty; state at least one stance, or none at all"))
        self.moving = "dynamics" in raw or any("dynamics" in s for s in raw_stances.values())
        constants, gains = self.fixed("constants"), self.fixed("gains")
        states = self.quantities(raw.get("state", {}), "state", state=True)
        uncertain = self.quantities(raw.get("uncertain", {}), "uncertain", state=False)
        own = {
            n: self.quantities(s.get("state", {}), f"stance.{n}.state", True, declare=False)
            for n, s in raw_stances.items()
        }
        for name in sorted({s for o in own.values() for s in o} - set(states)):
            with self.at(f"stance.*.state.{name}"):
                self.declare(name, "stance")
                absent = [n for n, o in own.items() if name not in o]
                if absent:
                    raise Bad(f"missing in stance {absent[0]}; a state is declared for all stances or in every one")
        libraries = self.libraries()
        define = self.expressions(raw.get("define", {}), "define", declare=True)
        defines = {n: self.expressions(s.get("define", {}), f"stance.{n}.define") for n, s in raw_stances.items()}
        for name in sorted({d for o in defines.values() for d in o}):
            with self.at(f"stance.*.define.{name}"):
                self.declare(name, "stance")
                absent = [n for n, o in defines.items() if name not in o]
                if absent:
                    raise Bad(f"missing in stance {absent[0]}; a name is defined once for all or in every stance")
        stances: list[Stance] = []
        for n, s in (raw_stances or {"": {}}).items():
            stances.append(
                self.stance(n, s, {**states, **own.get(n, {})}, {**define, **defines.get(n, {})}, list(raw_stances))
            )
        continuous = [frozenset(s.dynamics.start) if s.dynamics else frozenset() for s in stances]
        if len(set(continuous)) > 1:
            self.problems.append(
                Problem("dynamics", "the continuous states differ between stances; give every stance the same")
            )
        for name in sorted(continuous[0]):
            with self.at(f"dynamics.start.{name}"):
                self.declare(name, "dynamics")
        if not any(s.states for s in stances):
            self.problems.append(Problem("state", "missing; at least one state is needed"))
        if not self.problems:
            stances = [self.resolved(s, [*constants, *gains], uncertain, libraries) for s in stances]
        names = Names(stances[0], [*constants, *gains], uncertain, libraries)
        correction, route, horizon = (
            self.correction(stances[0]),
            self.choice("route", ("best", "slope", "split", "sector", "curve")),
            raw.get("horizon", 1),
        )
        if type(horizon) is not int or not 1 <= horizon <= 64:
            self.problems.append(Problem("horizon", f"{horizon!r:.40} found, a whole number from 1 to 64 is expected"))
        shrink = self.attempt("shrink", lambda: _flag(raw.get("shrink", False)), False)
        metric, weights = self.metric(stances[0])
        gap, cells, seconds = self.effort()
        requirements = self.requirements(names, [s.name for s in stances if s.name])
        if self.problems:
            raise ClaimError(self.place, self.problems)
        return Claim(
            self.text, self.settings, dict(self.data), self.place, title, notes, route, correction, shrink, horizon,
            constants, gains, uncertain, libraries, metric, weights, gap, cells, seconds, requirements, tuple(stances),
            self.values,
        )  # fmt: skip

    def text_key(self, key: str) -> str:
        value = self.raw.get(key, "")
        if not isinstance(value, str) or isinstance(value, Spelled):
            self.problems.append(Problem(key, f"{kind(value)} found, text is expected"))
            return ""
        return value

    def choice(self, key: str, allowed: tuple[str, ...]) -> str:
        value = self.raw.get(key, allowed[0])
        if type(value) is not str or value not in allowed:
            self.problems.append(Problem(key, f"{value!r:.40} found, one of {', '.join(allowed)} is expected"))
        return str(value)

    def fixed(self, section: str) -> dict[str, Expression]:
        """Constants or gains, in order of dependence; their values go to `values`."""
        raw = dict(self.table(self.raw.get(section, {}), section))
        for name in list(raw):
            with self.at(f"{section}.{name[:60]}"):
                self.declare(name, section)
        if section == "gains":
            for name, text in self.settings.items():
                if name not in raw:
                    self.problems.append(Problem(f"--set {name[:60]}", f"there is no such gain{nearest(name, raw)}"))
                else:
                    raw[name] = self.attempt(f"--set {name}", partial(_setting, text), 0)
        found: dict[str, Expression] = {}
        waiting = dict(raw)
        while waiting:
            ready = [
                n
                for n, v in waiting.items()
                if not set(NAME_ANYWHERE.findall(v) if type(v) is str else ()) & set(waiting)
            ]
            if not ready:
                self.problems.append(
                    Problem(section, f"{', '.join(sorted(waiting))[:80]} depend on each other; break the cycle")
                )
                break
            for name in ready:
                value = waiting.pop(name)
                with self.at(f"{section}.{name[:60]}"):
                    found[name], self.values[name] = self.constant(value)
        return found

    def quantities(self, value: Any, section: str, state: bool, declare: bool = True) -> dict[str, Quantity]:
        found = {}
        for name, item in self.table(value, section).items():
            with self.at(f"{section}.{name[:60]}"):
                if declare:
                    self.declare(name, section)
                found[name] = self.quantity(name, item, f"{section}.{name[:60]}", state)
        return found

    def quantity(self, name: str, value: Any, place: str, state: bool) -> Quantity:
        keys = ("range", "unit") if state else ("range", "values", "unit", "held", "change", "within")
        raw = {"range": value} if isinstance(value, list) else self.table(value, place, keys)
        if ("range" in raw) == ("values" in raw):
            raise Bad("exactly one of range and values is needed" if not state else "a range [lower, upper] is needed")
        held, within, unit = _flag(raw.get("held", False)), _flag(raw.get("within", False)), raw.get("unit", "")
        if not isinstance(unit, str) or isinstance(unit, Spelled):
            raise Bad(f"unit: {kind(unit)} found, text is expected")
        change = None
        if "change" in raw:
            change, (low, _) = self.constant(raw["change"])
            if low < 0:
                raise Bad("change: negative; state how far it may move in a step")
            if not held:
                raise Bad("change: only for a held quantity; add held = true")
        if within and not self.moving:
            raise Bad("within = true needs [dynamics]: without it there is no time inside a step")
        if within and (held or "values" in raw):
            raise Bad("within = true is a signal in a range; it cannot be held or a list")
        if "range" in raw:
            return Quantity(name, self.range(raw["range"]), None, unit, held, change, within)
        listed = raw["values"]
        if not isinstance(listed, list) or not 1 <= len(listed) <= 10_000:
            raise Bad("values: a list of 1 to 10,000 numbers is expected")
        return Quantity(name, None, tuple(self.constant(v)[0] for v in listed), unit, held, change, False)

    def expressions(self, value: Any, section: str, declare: bool = False) -> dict[str, Expression]:
        found = {}
        for name, item in self.table(value, section).items():
            with self.at(f"{section}.{name[:60]}"):
                if declare:
                    self.declare(name, section)
                found[name] = self.expression(item)
        return found

    def libraries(self) -> tuple[Library, ...]:
        if "library" not in self.raw:
            return ()
        listed = self.raw["library"] if isinstance(self.raw["library"], list) else [self.raw["library"]]
        if not listed:
            self.problems.append(Problem("library", "empty; state at least one library, or none at all"))
        found = []
        for k, item in enumerate(listed, 1):
            place = "library" if len(listed) == 1 else f"library[{k}]"
            with self.at(place):
                raw = self.table(item, place, ("file", "at"))
                file, at = raw.get("file"), raw.get("at")
                if type(file) is not str or not safe(file):
                    raise Bad(f"file: {file!r:.60} found, the path of a file beside or below the claim is expected")
                if not isinstance(at, dict) or not 1 <= len(at) <= 4:
                    raise Bad("at: a table of one to four axis columns and where each is read is expected")
                if file not in self.data:
                    raise Bad(f"{file[:60]}: the file is not there")
                library = parse_library(file, self.data[file], {a: self.expression(e) for a, e in at.items()})
                found.append(library)
                for column in library.columns:
                    self.declare(column, file)
        return tuple(found)

    def stance(
        self,
        name: str,
        raw: dict[str, Any],
        states: dict[str, Quantity],
        define: dict[str, Expression],
        known: list[str],
    ) -> Stance:
        place = f"stance.{name[:60]}" if name else ""
        then = [raw["then"]] if isinstance(raw.get("then"), str) else raw.get("then", [])
        mirror = raw.get("mirror", [])
        with self.at(place):
            if name and not NAME.match(name):
                raise Bad("not a name; names start with a letter and have at most 40 letters, digits or _")
            if name and (not _distinct(then) or not then or not set(then) <= set(known)):
                raise Bad(
                    f"then: the stance that follows, or a list of them, is expected; stances: {', '.join(known)[:80]}"
                )
            if not _distinct(mirror) or not set(mirror) <= set(states):
                raise Bad(f"mirror: a list of states is expected; states: {', '.join(states)[:80]}")
            if "dynamics" in raw and "dynamics" in self.raw:
                raise Bad("dynamics: stated here and for all stances; keep one")
        value = raw.get("dynamics", self.raw.get("dynamics"))
        dynamics = None if value is None else self.dynamics(value, f"{place}.dynamics".lstrip("."))
        step, target = (self.each(key, raw, place, states) for key in ("next", "target"))
        safe_then = tuple(then) if _distinct(then) else ()
        return Stance(
            name, safe_then, tuple(mirror) if _distinct(mirror) else (), states, define, step, target, dynamics
        )

    def each(
        self, key: str, stance: dict[str, Any], place: str, states: Mapping[str, Quantity]
    ) -> dict[str, Expression]:
        shared, own = self.raw.get(key, {}), stance.get(key, {})
        found = self.expressions(shared, key)
        more = self.expressions(own, f"{place}.{key}") if own != {} else {}
        both = set(found) & set(more)
        stated = {**(shared if isinstance(shared, dict) else {}), **(own if isinstance(own, dict) else {})}
        for name in sorted(both):
            self.problems.append(Problem(f"{place}.{key}.{name}", "stated here and for all stances; keep one"))
        for name in states:
            if name not in stated:
                self.problems.append(Problem(f"{place}.{key}.{name}".lstrip("."), "missing; every state needs one"))
        for name in stated:
            if name not in states:
                self.problems.append(Problem(f"{key}.{name[:60]}", f"not a state{nearest(name, states)}"))
        return {**found, **more}

    def dynamics(self, value: Any, place: str) -> Dynamics | None:
        raw = self.table(value, place, ("duration", "until", "within", "start", "rate"))
        start, rate = (
            self.expressions(raw.get("start", {}), f"{place}.start"),
            self.expressions(raw.get("rate", {}), f"{place}.rate"),
        )
        with self.at(place):
            if not raw.get("start") or set(raw.get("start", {})) != set(raw.get("rate", {})):
                raise Bad("start and rate must name the same continuous states, at least one")
            if ("duration" in raw) == ("until" in raw):
                raise Bad("exactly one of duration and until is needed")
            if ("until" in raw) != ("within" in raw):
                raise Bad("until and within belong together")
            within = None
            if "within" in raw:
                within = self.range(raw["within"], strict=True)
                if constant(within.lower, self.values)[0] < 0:
                    raise Bad("within: starts before 0")
            duration, until = (self.expression(raw[k]) if k in raw else None for k in ("duration", "until"))
            return Dynamics(duration, until, within, start, rate)
        return None

    def resolved(
        self, s: Stance, fixed: list[str], uncertain: dict[str, Quantity], libraries: tuple[Library, ...]
    ) -> Stance:
        """The stance with its definitions in order; every name is known and may stand where it does."""
        names = Names(s, fixed, uncertain, libraries)
        prefix = f"stance.{s.name}." if s.name else ""
        groups: list[tuple[str, Mapping[str, Expression]]] = [
            ("define", s.define),
            ("next", s.next),
            ("target", s.target),
        ]
        early: list[tuple[str, Expression]] = [(f"target.{n}", e) for n, e in s.target.items()]
        if s.dynamics is not None:
            parts = {"duration": s.dynamics.duration, "until": s.dynamics.until}
            groups += [("dynamics.start", s.dynamics.start), ("dynamics.rate", s.dynamics.rate)]
            groups += [("dynamics", {k: e for k, e in parts.items() if e is not None})]
            early += [(f"dynamics.start.{n}", e) for n, e in s.dynamics.start.items()]
            early += [("dynamics.duration", e) for e in (s.dynamics.duration,) if e is not None]
        groups += [(f"{lib.file} at", dict(zip(lib.axes, lib.at, strict=True))) for lib in libraries]
        before = len(self.problems)
        for section, group in groups:
            for name, e in group.items():
                with self.at(f"{prefix}{section}.{name}"):
                    names.check(e)
        if len(self.problems) > before:
            return s
        order = self.attempt(f"{prefix}define", names.ordered, None)
        if order is None:
            return s
        timed = {"t", *names.continuous}
        held = {n for n, q in uncertain.items() if q.held} | set(fixed)
        for place, e in early:
            with self.at(prefix + place):
                if names.leaves(e) & timed:
                    raise Bad("uses the time or a continuous state of the stance, directly or through a definition")
        for name, e in s.target.items():
            with self.at(f"{prefix}target.{name}"):
                loose = sorted(names.leaves(e) - held)
                if loose:
                    raise Bad(f"rests on {loose[0]}; a target is built from constants, gains and held quantities")
        for library in libraries:
            for axis, e in zip(library.axes, library.at, strict=True):
                with self.at(f"{library.file}.at.{axis}"):
                    if names.reached(e) & set(names.columns):
                        raise Bad("uses a library column; where a library is read must not depend on a library")
                    if names.leaves(e) & timed:
                        raise Bad("uses the time or a continuous state of the stance")
        return replace(s, define={n: s.define[n] for n in order})

    def correction(self, stance: Stance) -> tuple[str, ...]:
        if "correction" not in self.raw:
            return ()
        value = self.raw["correction"]
        if not _distinct(value) or not value or not set(value) <= set(stance.define):
            self.problems.append(
                Problem("correction", f"a list of defined names is expected; defined: {', '.join(stance.define)[:80]}")
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
                    raise Bad(f"not a state{nearest(s, stance.states)}")
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

    def requirements(self, names: Names, stances: list[str]) -> tuple[Requirement, ...]:
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
                        allowed = {*names.stance.states, *names.uncertain, *names.fixed}
                        if r.kind == "sensitivity":
                            allowed |= {*names.stance.define, *names.columns}
                        if name not in allowed:
                            raise Bad(f"cannot be given a range here{nearest(name, allowed)}")
                        over[name] = self.range(ends)
                stance = raw.get("in")
                if "in" in raw and (type(stance) is not str or stance not in stances):
                    raise Bad(f"in: {stance!r:.40} found, a stance is expected")
                found.append(replace(r, over=over, stance=stance))
        return tuple(found)

    def known(self, r: Requirement, names: Names) -> None:
        """Raises Bad where a requirement speaks of what is not there."""
        if r.state is not None and r.state not in names.stance.states:
            raise Bad(f"{r.state} is not a state{nearest(r.state, names.stance.states)}")
        if r.by is not None and (r.by not in names.all or r.by in names.continuous):
            raise Bad(f"{r.by} is not a declared or defined name{nearest(r.by, names.all - names.continuous)}")
        for e in (r.expression, r.left, r.right):
            if e is not None:
                names.check(e)
        for e in (r.constant, r.start, r.end):
            if e is not None:
                constant(e, self.values)
        if (r.during or r.kind == "throughout") and not self.moving:
            raise Bad("needs [dynamics]: without it there is no time inside a step")


def _setting(text: str) -> Any:
    """A gain given on the command line: a number or a constant expression without names. Raises Bad."""
    try:
        exact_number(text)
        return Spelled(text)
    except Bad:
        if text[:1].isdigit() and not any(c in text for c in "+*/() "):
            raise
    parser = Parser(text, lambda e: constant(e, {})[0])
    e = parser.expression()
    parser.end()
    if e.names():
        raise Bad(f"{e.names()[0]} found; a gain is set to a number or a constant expression without names")
    return text


def _flag(value: Any) -> bool:
    if not isinstance(value, bool):
        raise Bad(f"{kind(value)} found, true or false is expected")
    return value


def _distinct(value: Any) -> bool:
    return isinstance(value, list) and all(type(v) is str for v in value) and len(set(value)) == len(value)
