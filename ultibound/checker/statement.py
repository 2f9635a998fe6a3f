"""The checker's own reader of claims: TOML text to a statement that cannot be malformed. First fault refuses."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from fractions import Fraction
from typing import Any

from .asked import asked
from .grammar import NAME, RESERVED, WORK, Ends, Expression, Known, Node, Refused, constant, names, nearest, parse
from .library import Library, read_library
from .model import Dynamics, Quantity, Range, Requirement, Stance, Statement
from .numerals import spelled, spelling
from .scope import Scope, arranged
from .tables import Number, flag, loaded, table, text_of, well_spelled

KEYS = (
    "format title notes route correction shrink horizon constants gains state uncertain define next target metric "
    "effort require dynamics library stance"
)
MOST_TEXT = 2**23  # characters of the claim times its stances: what is shared is gone through once for each
WORD = re.compile(r"(?<![0-9A-Za-z_.])[A-Za-z][A-Za-z0-9_]*", re.ASCII)


def read_statement(text: str, settings: Mapping[str, str], data: Mapping[str, str]) -> Statement:
    """The statement of a claim's text, gains replaced by `settings`, files taken from `data`. Raises Refused."""
    raw = loaded(text)
    stances = raw.get("stance")
    if isinstance(stances, dict) and len(stances) > 1 and len(stances) * len(text) > MOST_TEXT:
        raise Refused(f"stance: {len(stances)} stances of so long a claim; at most {MOST_TEXT // len(text)}")
    return Reader(raw, settings, data).statement()


class Reader:
    def __init__(self, raw: dict[str, Any], settings: Mapping[str, str], data: Mapping[str, str]) -> None:
        self.raw, self.data = table(raw, "claim", KEYS.split()), data
        self.values = Known()
        self.declared: set[str] = set()
        if type(raw.get("format")) is not int or raw["format"] != 1:
            raise Refused("format: 1 is expected")
        self.settings = settings

    # numbers, expressions, ranges

    def expression(self, value: Any, place: str, steps: bool = False) -> Expression:
        if isinstance(value, (bool, dict, list)) or not isinstance(value, (str, int)):
            raise Refused(f"{place}: an expression is expected")
        try:
            if isinstance(value, (Number, int)):
                q = spelled(well_spelled(str(value)))
                self.values.spend(q or Fraction(0))
                return Expression(str(value), (Node("number", (), q),))
            return parse(value, self.values, steps)
        except Refused as why:
            raise Refused(f"{place}: {why}") from None

    def value(self, e: Expression) -> Ends:
        return constant(e, self.values)

    def constant(self, value: Any, place: str) -> tuple[Expression, Ends]:
        e = self.expression(value, place)
        try:
            return e, self.value(e)
        except Refused as why:
            raise Refused(f"{place}: {why}") from None

    def group(self, value: Any, place: str) -> dict[str, Expression]:
        return {n: self.expression(e, f"{place}.{n}") for n, e in table(value, place).items()}

    def range(self, value: Any, place: str, strict: bool = False) -> Range:
        if not isinstance(value, list) or len(value) != 2:
            raise Refused(f"{place}: [lower, upper] is expected")
        (low, a), (high, b) = self.constant(value[0], place), self.constant(value[1], place)
        if not (a[1] < b[0] or (not strict and (a[1] <= b[0] or low.text.strip() == high.text.strip()))):
            raise Refused(f"{place}: the lower end is not shown to be below the upper")
        return Range(low, high)

    def declare(self, name: str, place: str) -> str:
        if not NAME.fullmatch(name) or name in RESERVED:
            raise Refused(f"{place}: {name[:60]!r} cannot be a name")
        if name in self.declared:
            raise Refused(f"{place}: {name} is declared twice")
        self.declared.add(name)
        return name

    def named(self, section: str) -> dict[str, Expression]:
        """Constants or gains in dependency order; their values are noted."""
        raw = dict(table(self.raw.get(section, {}), section))
        for name in raw:
            self.declare(name, section)
        if section == "gains":
            for name, text in self.settings.items():
                if name not in raw:
                    raise Refused(f"set: {name[:60]!r} is no gain")
                raw[name] = replaced(text)
        uses = {n: [w for w in WORD.findall(v) if w in raw] if type(v) is str else [] for n, v in raw.items()}
        place, turn = {name: k for k, name in enumerate(raw)}, dict[str, int]()
        for name in arranged(raw, uses):  # turn after turn, each time in the order of the file
            turn[name] = max((turn[w] + (place[w] > place[name]) for w in uses[name]), default=0)
        found: dict[str, Expression] = {}
        for name in sorted(raw, key=lambda n: (turn[n], place[n])):
            found[name], self.values[name] = self.constant(raw[name], f"{section}.{name}")
        return found

    def quantity(self, name: str, value: Any, place: str, state: bool, moving: bool) -> Quantity:
        keys = ("range", "unit") if state else ("range", "values", "unit", "held", "change", "within")
        raw = {"range": value} if isinstance(value, list) else table(value, place, keys)
        if ("range" in raw) == ("values" in raw):
            raise Refused(f"{place}: a range or values, one of them")
        held, within = flag(raw.get("held", False), place), flag(raw.get("within", False), place)
        unit = text_of(raw.get("unit", ""), place)
        change = None
        if "change" in raw:
            change, (low, _) = self.constant(raw["change"], f"{place}.change")
            if low < 0 or not held:
                raise Refused(f"{place}.change: at least 0, of a held quantity")
        if within and (not moving or "values" in raw or held):
            raise Refused(f"{place}.within: a range of a claim with dynamics, not held")
        if "range" in raw:
            return Quantity(name, self.range(raw["range"], place), None, unit, held, change, within)
        listed = raw["values"]
        if not isinstance(listed, list) or not 1 <= len(listed) <= 10_000:
            raise Refused(f"{place}.values: 1 to 10,000 numbers")
        return Quantity(name, None, tuple(self.constant(v, place)[0] for v in listed), unit, held, change, False)

    # sections

    def statement(self) -> Statement:
        raw = self.raw
        title, notes = text_of(raw.get("title", ""), "title"), text_of(raw.get("notes", ""), "notes")
        constants, gains = self.named("constants"), self.named("gains")
        stances = {
            n: table(s, f"stance.{n}", ("then", "mirror", "define", "state", "next", "target", "dynamics"))
            for n, s in table(raw.get("stance", {}), "stance").items()
        }
        if "stance" in raw and not stances:
            raise Refused("stance: at least one")
        moving = "dynamics" in raw or any("dynamics" in s for s in stances.values())
        states = self.states(raw.get("state", {}), "state")
        for name in states:
            self.declare(name, "state")
        uncertain = {}
        for name, value in table(raw.get("uncertain", {}), "uncertain").items():
            self.declare(name, "uncertain")
            uncertain[name] = self.quantity(name, value, f"uncertain.{name}", False, moving)
        own_states = {n: self.states(s.get("state", {}), f"stance.{n}.state") for n, s in stances.items()}
        for name in sorted({s for own in own_states.values() for s in own} - set(states)):
            self.declare(name, "stance")
            if any(name not in own for own in own_states.values()):
                raise Refused(f"stance: state {name} is missing in one of them")
        libraries = self.libraries()
        shared = self.group(raw.get("define", {}), "define")
        own = {n: self.group(s.get("define", {}), f"stance.{n}.define") for n, s in stances.items()}
        for name in [*shared, *sorted({d for o in own.values() for d in o})]:
            self.declare(name, "define")
        if len({frozenset(o) for o in own.values()}) > 1:
            raise Refused("stance: a name defined in one stance must be defined in every one")
        self.groups = {k: self.group(raw.get(k, {}), k) for k in ("next", "target")}
        self.running = self.dynamics(raw["dynamics"]) if "dynamics" in raw else None
        found = []
        for name, s in (stances or {"": {}}).items():
            if name and not NAME.fullmatch(name):
                raise Refused(f"stance: {name[:60]!r} cannot be a name")
            area, define = {**states, **own_states.get(name, {})}, {**shared, **own.get(name, {})}
            found.append(self.stance(name, s, area, define, set(stances)))
        if len({frozenset(s.dynamics.start if s.dynamics else ()) for s in found}) > 1:
            raise Refused("dynamics: the same continuous states in every stance")
        for name in found[0].dynamics.start if found[0].dynamics else ():
            self.declare(name, "dynamics")
        stances_ = {s.name for s in found} - {""}
        scopes = [Scope(s, {*constants, *gains}, uncertain, libraries, s.dynamics is not None, stances_) for s in found]
        found = [
            replace(s, define={n: s.define[n] for n in scope.order()}) for s, scope in zip(found, scopes, strict=True)
        ]
        correction = raw.get("correction", ["-"])
        if not isinstance(correction, list) or not correction or len(set(map(str, correction))) < len(correction):
            raise Refused("correction: a list of different defined names")
        if "correction" in raw and any(type(c) is not str or c not in found[0].define for c in correction):
            raise Refused("correction: defined names only")
        route = raw.get("route", "best")
        if route not in ("best", "slope", "split", "sector", "curve") or type(route) is not str:
            raise Refused("route: best, slope, split, sector or curve")
        horizon = raw.get("horizon", 1)
        if type(horizon) is not int or not 1 <= horizon <= 64:
            raise Refused("horizon: 1 to 64")
        metric = table(raw.get("metric", {}), "metric", ("kind", "weights"))
        kind = metric.get("kind", "auto")
        if type(kind) is not str or kind not in ("auto", "box", "ellipsoid", "polytope"):
            raise Refused("metric.kind: auto, box, ellipsoid or polytope")
        weights: dict[str, Expression] = {}
        for state, w in table(metric.get("weights", {}), "metric.weights", found[0].states).items():
            weights[state], (low, _) = self.constant(w, f"metric.weights.{state}")
            if low <= 0:
                raise Refused(f"metric.weights.{state}: above 0")
        effort = table(raw.get("effort", {}), "effort", ("gap", "cells", "seconds"))
        gap, seconds = (
            self.constant(effort.get(k, d), f"effort.{k}")[1] for k, d in (("gap", Number("1e-3")), ("seconds", 600))
        )
        cells = effort.get("cells", 200_000)
        if not (gap[0] > 0 and gap[1] < 1 and seconds[0] > 0) or type(cells) is not int or cells < 1:
            raise Refused("effort: 0 < gap < 1, cells at least 1, seconds above 0")
        listed = raw.get("require", [{"that": "settles"}])
        if not isinstance(listed, list) or not 1 <= len(listed) <= 1000:
            raise Refused("require: 1 to 1,000 tables")
        requirements = tuple(self.requirement(r, n, scopes[0]) for n, r in enumerate(listed, 1))
        self.values.left = WORK
        return Statement(
            title, notes, route, tuple(correction) if "correction" in raw else (),
            flag(raw.get("shrink", False), "shrink"), horizon, constants, gains, uncertain, libraries, kind, weights,
            gap[0], cells, seconds[0], requirements, tuple(found), self.values,
        )  # fmt: skip

    def states(self, value: Any, place: str) -> dict[str, Quantity]:
        return {n: self.quantity(n, v, f"{place}.{n}", True, False) for n, v in table(value, place).items()}

    def libraries(self) -> tuple[Library, ...]:
        raw = self.raw.get("library", [])
        found = []
        for k, item in enumerate(raw if isinstance(raw, list) else [raw], 1):
            place = f"library[{k}]"
            file = text_of(table(item, place, ("file", "at")).get("file"), place)
            at = table(item.get("at"), f"{place}.at")
            if not file or any(p in ("", ".", "..") for p in file.split("/")) or "\\" in file or not file.isprintable():
                raise Refused(f"{place}.file: a path beside or below the claim")
            if file not in self.data:
                raise Refused(f"{place}: {file[:60]!r} is not there")
            if not 1 <= len(at) <= 4:
                raise Refused(f"{place}.at: one to four axes")
            found.append(read_library(file, self.data[file], self.group(at, f"{place}.at"), self.values))
            for column in found[-1].columns:
                self.declare(column, file)
        if "library" in self.raw and not found:
            raise Refused("library: at least one")
        return tuple(found)

    def each(
        self, key: str, stance: dict[str, Any], name: str, states: Mapping[str, Quantity]
    ) -> dict[str, Expression]:
        """`next` or `target` of a stance: shared entries and its own, every state once."""
        place = f"stance.{name}.{key}" if name else key
        shared, own = self.groups[key], self.group(stance.get(key, {}), place)
        for s in {*shared, *own} - set(states):
            raise Refused(f"{place}.{s}: no state of that name{nearest(s, states)}")
        if set(shared) & set(own) or set(shared) | set(own) != set(states) or not states:
            raise Refused(f"{key}: one expression for each state, shared or in every stance")
        return {s: (own if s in own else shared)[s] for s in states}

    def stance(
        self, name: str, raw: dict[str, Any], states: dict[str, Quantity], define: dict[str, Expression], all_: set[str]
    ) -> Stance:
        then = raw.get("then", [])
        then = [then] if isinstance(then, str) else then
        if name and (
            not isinstance(then, list)
            or not then
            or any(type(t) is not str or t not in all_ for t in then)
            or len(set(then)) < len(then)
        ):
            raise Refused(f"stance.{name}.then: stances that may follow")
        mirror = raw.get("mirror", [])
        if (
            not isinstance(mirror, list)
            or any(type(m) is not str or m not in states for m in mirror)
            or len(set(mirror)) < len(mirror)
        ):
            raise Refused(f"stance.{name}.mirror: a list of states")
        if "dynamics" in self.raw and "dynamics" in raw:
            raise Refused("dynamics: shared, or in every stance")
        dynamics = self.dynamics(raw["dynamics"]) if "dynamics" in raw else self.running
        return Stance(
            name,
            tuple(then),
            tuple(mirror),
            states,
            define,
            self.each("next", raw, name, states),
            self.each("target", raw, name, states),
            dynamics,
        )

    def dynamics(self, value: Any) -> Dynamics:
        raw = table(value, "dynamics", ("duration", "until", "within", "start", "rate"))
        start, rate = table(raw.get("start", {}), "dynamics.start"), table(raw.get("rate", {}), "dynamics.rate")
        if not start or set(start) != set(rate):
            raise Refused("dynamics: start and rate of the same continuous states")
        if ("duration" in raw) == ("until" in raw) or ("until" in raw) != ("within" in raw):
            raise Refused("dynamics: a duration, or until and within")
        within = None
        if "within" in raw:
            within = self.range(raw["within"], "dynamics.within", strict=True)
            if self.value(within.lower)[0] < 0:
                raise Refused("dynamics.within: from 0 on")
        parts = [self.expression(raw[k], f"dynamics.{k}") if k in raw else None for k in ("duration", "until")]
        starts, rates = self.group(start, "dynamics.start"), self.group(rate, "dynamics.rate")
        return Dynamics(parts[0], parts[1], within, starts, rates)

    # requirements

    def requirement(self, value: Any, number: int, scope: Scope) -> Requirement:
        place = f"require[{number}]"
        raw = table(value, place, ("that", "over", "in"))
        text = text_of(raw.get("that"), f"{place}.that")
        try:
            r = asked(text, self.values)
            for e in (r.constant, r.start, r.end):
                if e is not None:
                    self.value(e)
        except Refused as why:
            raise Refused(f"{place}: {why}") from None
        if r.state is not None and r.state not in scope.stance.states:
            raise Refused(f"{place}: {r.state[:60]!r} is no state{nearest(r.state, scope.stance.states)}")
        if r.by is not None and (r.by not in scope.names or r.by in scope.continuous):
            raise Refused(f"{place}: {r.by[:60]!r} is no declared or defined name{nearest(r.by, scope.names)}")
        for e in (r.expression, r.left, r.right):
            if e is not None:
                scope.known(e, place)
        if (r.during or r.kind == "throughout") and not scope.moving:
            raise Refused(f"{place}: needs dynamics")
        over = {}
        for name, ends in table(raw.get("over", {}), f"{place}.over").items():
            if name not in scope.ranged and not (
                r.kind == "sensitivity" and (name in scope.stance.define or name in scope.columns)
            ):
                raise Refused(f"{place}.over: {name[:60]!r} cannot be given a range")
            over[name] = self.range(ends, f"{place}.over.{name}")
        stance = raw.get("in")
        if "in" in raw and (type(stance) is not str or stance not in scope.stances):
            raise Refused(f"{place}.in: a stance")
        return replace(r, over=over, stance=stance)


def replaced(text: str) -> Any:
    """A gain's new value: a number, or a constant expression without names."""
    try:
        if spelling(text) is not None:
            return Number(text)
        plain = not names(parse(text, {}))
    except (Refused, ValueError) as why:
        raise Refused(f"set: {why}") from None
    if not plain:
        raise Refused("set: a constant expression without names")
    return text
