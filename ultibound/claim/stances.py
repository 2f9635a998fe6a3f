"""Stances: shared sections and a stance's own merged, names resolved, and what may stand where."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from .constants import constant
from .declared import Declared, distinct
from .errors import Bad, ClaimError, Problem, Unknown
from .expression import NAME, Expression
from .model import Dynamics, Library, Quantity, Stance
from .scope import Names, first

STANCE_KEYS = ("then", "mirror", "define", "state", "next", "target", "dynamics")
MAX_MERGED = 2_000_000  # entries of all stances together: each stance repeats what is shared
Expressions = dict[str, Expression]


class Stances(Declared):
    """Reads the sections a stance may have, each shared one once."""

    def stances(self, states: dict[str, Quantity], define: Expressions) -> list[Stance]:
        """Every stance, or the only one, unnamed; its own names are declared here."""
        raw = {
            n: self.table(s, f"stance.{n[:60]}", STANCE_KEYS)
            for n, s in self.table(self.raw.get("stance", {}), "stance").items()
        }
        if "stance" in self.raw and not raw:
            self.problems.append(Problem("stance", "empty; state at least one stance, or none at all"))
        shared = len(define) + sum(len(self.raw[k]) for k in ("state", "next", "target") if k in self.raw)
        if len(raw) * shared > MAX_MERGED:
            self.problems.append(
                Problem(
                    "stance", f"{len(raw)} stances of {shared} shared entries; at most {MAX_MERGED} in all are read"
                )
            )
            raise ClaimError(self.place, self.problems)
        own = {
            n: self.quantities(s.get("state", {}), f"stance.{n[:60]}.state", True, declare=False)
            for n, s in raw.items()
        }
        defines = {n: self.expressions(s.get("define", {}), f"stance.{n[:60]}.define") for n, s in raw.items()}
        stated = {key: {n: _keys(s.get(key)) for n, s in raw.items()} for key in ("state", "define")}
        self.everywhere("state", stated["state"], set(_keys(self.raw.get("state"))))
        self.everywhere("define", stated["define"], set())
        each: dict[str, Expressions] = {key: self.expressions(self.raw.get(key, {}), key) for key in ("next", "target")}
        dynamics = self.dynamics(self.raw["dynamics"], "dynamics") if "dynamics" in self.raw else None
        found = []
        for n, s in raw.items() if raw else [("", {})]:
            place = f"stance.{n[:60]}" if raw else ""
            mine = {**states, **own[n]} if own.get(n) else states
            known = [*mine, *(x for x in (*_keys(self.raw.get("state")), *_keys(s.get("state"))) if x not in mine)]
            then, mirror = self.order(n, s, place, raw, known) if raw else ((), ())
            course = self.dynamics(s["dynamics"], f"{place}.dynamics") if "dynamics" in s else dynamics
            step, target = (self.each(key, each[key], s, place, known) for key in ("next", "target"))
            merged = {**define, **defines[n]} if defines.get(n) else define
            found.append(Stance(n, then, mirror, mine, merged, step, target, course))
        if not any(s.states for s in found) and not any(_keys(x.get("state")) for x in (self.raw, *raw.values())):
            self.problems.append(Problem("state", "missing; at least one state is needed"))
        self.continuous(found, ["dynamics" in s or "dynamics" in self.raw for s in raw.values()] or [True])
        return found

    def everywhere(self, key: str, stated: Mapping[str, list[str]], shared: set[str]) -> None:
        """Names stated in stances alone are stated in every one; each is declared once."""
        count: dict[str, int] = {}
        for names in stated.values():
            for name in names:
                count[name] = count.get(name, 0) + 1
        for name in sorted(set(count) - shared):
            with self.at(f"stance.*.{key}.{name[:60]}"):
                self.declare(name, "state" if key == "state" else "stance")
                if count[name] < len(stated):
                    absent = next(n for n, names in stated.items() if name not in names)
                    raise Bad(f"missing in stance {absent[:60]}; it is stated once for all or in every stance")

    def order(
        self, name: str, raw: dict[str, Any], place: str, known: Mapping[str, Any], states: list[str]
    ) -> tuple[tuple[str, ...], tuple[str, ...]]:
        """What follows a stance, and the states that change sign on the way."""
        then = [raw["then"]] if type(raw.get("then")) is str else raw.get("then", [])
        mirror = raw.get("mirror", [])
        with self.at(place):
            if not NAME.match(name):
                raise Bad(
                    f"{name[:60]!r} is not a name; names start with a letter and have at most 40 letters, digits or _"
                )
        with self.at(f"{place}.then"):
            if not distinct(then) or not then or not all(n in known for n in then):
                found = next((n for n in then if n not in known), "") if distinct(then) else ""
                raise Unknown("the stance that follows, or a list of them, is expected", found, known)
        with self.at(f"{place}.mirror"):
            if not distinct(mirror) or not set(mirror) <= set(states):
                raise Bad(f"a list of states is expected; states: {', '.join(states[:12])}")
        if "dynamics" in raw and "dynamics" in self.raw:
            self.problems.append(Problem(f"{place}.dynamics", "stated here and for all stances; keep one"))
        return (tuple(then) if distinct(then) else ()), (tuple(mirror) if distinct(mirror) else ())

    def each(self, key: str, shared: Expressions, stance: dict[str, Any], place: str, states: list[str]) -> Expressions:
        """The next states or targets: one expression a state, shared or the stance's own."""
        own = self.expressions(stance[key], f"{place}.{key}") if key in stance else {}
        common, mine = _keys(self.raw.get(key)), _keys(stance.get(key))
        for name in sorted(set(common) & set(mine)):
            self.problems.append(Problem(f"{place}.{key}.{name[:60]}", "stated here and for all stances; keep one"))
        stated, wanted = {*common, *mine}, set(states)
        for name in states:
            if name not in stated:
                self.problems.append(Problem(f"{place}.{key}.{name}".lstrip("."), "missing; every state needs one"))
        for name in (*(common if self.once(key) else ()), *mine):
            if name not in wanted:
                with self.at(f"{f'{place}.' if name in mine else ''}{key}.{name[:60]}"):
                    raise Unknown("not a state", name, wanted)
        return {**shared, **own} if own else shared

    def once(self, key: str) -> bool:
        """True the first time it is asked of a key: a fault of a shared section is told once."""
        fresh = key not in self.told
        self.told.add(key)
        return fresh

    def continuous(self, stances: list[Stance], stated: list[bool]) -> None:
        """The continuous states, alike in every stance, are declared."""
        if any(x and s.dynamics is None for x, s in zip(stated, stances, strict=True)) and self.moving:
            self.open = True  # a fault noted already hides what they are called
            return
        found = [frozenset(s.dynamics.start) if s.dynamics else frozenset() for s in stances]
        if len(set(found)) > 1:
            self.problems.append(
                Problem("dynamics", "the continuous states differ between stances; give every stance the same")
            )
        for name in sorted(frozenset().union(*found)):
            with self.at(f"dynamics.start.{name}"):
                self.declare(name, "dynamics")

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
        self, stances: list[Stance], fixed: list[str], uncertain: dict[str, Quantity], libraries: tuple[Library, ...]
    ) -> tuple[list[Stance], Names]:
        """The stances with their definitions in order; every name is known and may stand where it does."""
        done: list[Stance] = []
        names: list[Names] = []
        seen: set[tuple[str, int]] = set()  # shared groups already looked at
        last: tuple[tuple[int, ...], dict[str, Expression]] | None = None
        for s in stances:
            names.append(
                Names(s, fixed, uncertain, libraries, self.declared, self.open)
                if not last or last[0] != _same(s)
                else names[-1]
            )
            prefix = f"stance.{s.name[:60]}." if s.name else ""
            if last is None or last[0] != _same(s):
                last = _same(s), self.ordered(s, names[-1], prefix, seen)
            done.append(replace(s, define=last[1]))
        return done, names[0]

    def ordered(self, s: Stance, names: Names, prefix: str, seen: set[tuple[str, int]]) -> dict[str, Expression]:
        """Definitions in order of dependence, after every check of a stance's expressions."""
        before = len(self.problems)
        d = s.dynamics
        parts = {} if d is None else {k: e for k, e in (("duration", d.duration), ("until", d.until)) if e is not None}
        groups: list[tuple[str, Mapping[str, Expression]]] = [
            ("define", s.define), ("next", s.next), ("target", s.target), ("dynamics", parts)
        ]  # fmt: skip
        groups += [] if d is None else [("dynamics.start", d.start), ("dynamics.rate", d.rate)]
        groups += [(f"{x.file}.at", dict(zip(x.axes, x.at, strict=True))) for x in names.libraries]
        for section, group in groups:
            for name, e in group.items():
                if (name, id(e)) not in seen:
                    seen.add((name, id(e)))
                    with self.at(f"{prefix}{section}.{name}"):
                        names.check(e)
        order = self.attempt(f"{prefix}define", names.ordered, None)
        if order is None or len(self.problems) > before:
            return dict(s.define)
        held = {n for n, q in names.uncertain.items() if q.held} | names.fixed | self.failed
        built = {*s.define, *names.columns}

        def timed(name: str) -> bool:
            return name == "t" or name in names.continuous

        def loose(name: str) -> bool:
            return name not in held and name not in built and not name.startswith("target(") and name in names.named

        timely, loosely = names.resting(order, timed), names.resting(order, loose)
        read = names.resting(order, names.columns.__contains__)
        early = [] if d is None else [(f"dynamics.start.{n}", e) for n, e in d.start.items()]
        early += [("dynamics.duration", parts["duration"])] if "duration" in parts else []
        early += [(f"{x.file}.at.{a}", e) for x in names.libraries for a, e in zip(x.axes, x.at, strict=True)]
        for place, e in early:
            with self.at(prefix + place):
                if first(e.names(), timely, timed):
                    raise Bad("uses the time or a continuous state of the stance, directly or through a definition")
        for name, e in s.target.items():
            with self.at(f"{prefix}target.{name}"):
                hit = first(e.names(), loosely, loose)
                if hit:
                    raise Bad(f"rests on {hit}; a target is built from constants, gains and held quantities")
        for x in names.libraries:
            for axis, e in zip(x.axes, x.at, strict=True):
                with self.at(f"{prefix}{x.file}.at.{axis}"):
                    if first(e.names(), read, names.columns.__contains__):
                        raise Bad("uses a library column; where a library is read must not depend on a library")
        return {n: s.define[n] for n in order if n in s.define}


def _same(s: Stance) -> tuple[int, ...]:
    """Stances with the same shared groups need one look."""
    return id(s.define), id(s.next), id(s.target), id(s.states), id(s.dynamics)


def _keys(value: Any) -> list[str]:
    return list(value) if isinstance(value, dict) else []
