"""The checker's own reader of claims: TOML text to a statement that cannot be malformed. First fault refuses."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import replace
from typing import Any

from .grammar import NAME, RESERVED, SHARE, Ends, Expression, Known, Parser, Refused, Work, at, constant, parse
from .model import Dynamics, Library, Quantity, Range, Requirement, Stance, Statement
from .numerals import SPELLING, Number
from .scope import Scope, arranged
from .tables import chosen, given, listed, loaded, read_library, table

KEYS = (
    "format title notes route correction shrink horizon constants gains state uncertain define next target metric "
    "effort require dynamics library stance"
)
STANCE = ("then", "mirror", "define", "state", "next", "target", "dynamics")
MOST_TEXT = 2**23  # characters of the claim times its stances: what is shared is gone through once for each
WORD = re.compile(r"(?<![0-9A-Za-z_.])[A-Za-z][A-Za-z0-9_]*", re.ASCII)

LOWER, UPPER = ("<", "<="), (">", ">=")
KINDS: dict[str, tuple[tuple[str, ...], tuple[str, ...]]] = {  # comparisons, and what stands in parentheses
    **dict.fromkeys(("settles", "always", "throughout"), ((), ())),
    **dict.fromkeys(("gain", "residual"), (LOWER, ())),
    **dict.fromkeys(("bound", "sharp_bound"), (LOWER, ("state",))),
    **dict.fromkeys(("radius", "push"), (UPPER, ("state",))),
    "steps": (LOWER, ("state", "start", "end")),
    "sensitivity": (LOWER + UPPER, ("state", "by")),
    "value": (LOWER + UPPER, ("expression",)),
}
ALONE = ("settles", "always", "throughout", "sensitivity", "value")
BARE = ("bound", "sharp_bound", "radius")  # of one state, or of the whole


def read_statement(text: str, settings: Mapping[str, str], data: Mapping[str, str]) -> Statement:
    """The statement of a claim's text, gains replaced by `settings`, files taken from `data`. Raises Refused."""
    raw = table(loaded(text), "claim", KEYS.split())
    stances = raw.get("stance")
    if isinstance(stances, dict) and len(stances) > 1 and len(stances) * len(text) > MOST_TEXT:
        raise Refused(f"stance: {len(stances)} stances of so long a claim; at most {MOST_TEXT // len(text)}")
    return Reader(raw, settings, data).statement()


class Reader:
    """Reads one section after another; what is declared and known grows on the way."""

    def __init__(self, raw: dict[str, Any], settings: Mapping[str, str], data: Mapping[str, str]) -> None:
        self.raw, self.settings, self.data = raw, settings, data
        self.values = Known({})
        self.declared: set[str] = set()
        given(raw, "format", 0, "", (1,))

    # numbers, expressions, ranges

    def expression(self, value: Any, place: str) -> Expression:
        with at(place):
            return parse(value, self.values)

    def constant(self, value: Any, place: str) -> tuple[Expression, Ends]:
        e = self.expression(value, place)
        with at(place):
            return e, constant(e, self.values)

    def group(self, raw: dict[str, Any], key: str, place: str = "") -> dict[str, Expression]:
        place += key
        return {n: self.expression(e, f"{place}.{n}") for n, e in table(raw.get(key, {}), place).items()}

    def range(self, value: Any, place: str, strict: bool = False) -> Range:
        (low, a), (high, b) = (self.constant(v, place) for v in listed(value, place, 2, 2))
        if not (a[1] < b[0] or (not strict and (a[1] <= b[0] or low.text.strip() == high.text.strip()))):
            raise Refused(f"{place}: the lower end is not shown to be below the upper")
        return Range(low, high)

    def declare(self, names: Iterable[str], place: str) -> None:
        for name in names:
            if not NAME.fullmatch(name) or name in RESERVED:
                raise Refused(f"{place}: {name[:60]!r} cannot be a name")
            if name in self.declared:
                raise Refused(f"{place}: {name} is declared twice")
            self.declared.add(name)

    def named(self, section: str, settings: Mapping[str, str]) -> dict[str, Expression]:
        """Constants or gains in dependency order; their values are noted."""
        raw = dict(table(self.raw.get(section, {}), section))
        self.declare(raw, section)
        plain = Known({})  # a gain's new value is a number, or a constant expression without names
        for name, text in settings.items():
            if name not in raw:
                raise Refused(f"set: {name[:60]!r} is no gain")
            raw[name] = Number(text) if SPELLING.fullmatch(text) else text
            if type(raw[name]) is str:
                with at("set"):
                    constant(parse(text, plain), plain)
        uses = {n: {w for w in WORD.findall(v) if w in raw} if type(v) is str else () for n, v in raw.items()}
        found: dict[str, Expression] = {}
        for name in arranged(uses):
            found[name], self.values[name] = self.constant(raw[name], f"{section}.{name}")
        return found

    def quantities(self, raw: dict[str, Any], key: str, moving: bool | None, place: str = "") -> dict[str, Quantity]:
        """States, or (`moving` says whether there are dynamics) uncertain quantities."""
        place += key
        return {n: self.quantity(n, v, f"{place}.{n}", moving) for n, v in table(raw.get(key, {}), place).items()}

    def quantity(self, name: str, value: Any, place: str, moving: bool | None) -> Quantity:
        keys = ("range", "unit") if moving is None else ("range", "values", "unit", "held", "change", "within")
        raw = {"range": value} if isinstance(value, list) else table(value, place, keys)
        if ("range" in raw) == ("values" in raw):
            raise Refused(f"{place}: a range or values, one of them")
        held, within = given(raw, "held", False, f"{place}."), given(raw, "within", False, f"{place}.")
        unit = given(raw, "unit", "", f"{place}.")
        change = None
        if "change" in raw:
            change, (low, _) = self.constant(raw["change"], f"{place}.change")
            if low < 0 or not held:
                raise Refused(f"{place}.change: at least 0, of a held quantity")
        if within and (not moving or "values" in raw or held):
            raise Refused(f"{place}.within: a range of a claim with dynamics, not held")
        if "range" in raw:
            return Quantity(name, self.range(raw["range"], place), None, unit, held, change, within)
        values = tuple(self.constant(v, place)[0] for v in listed(raw["values"], f"{place}.values", 1, 10_000))
        return Quantity(name, None, values, unit, held, change, False)

    # sections

    def statement(self) -> Statement:
        raw = self.raw
        constants, gains = self.named("constants", {}), self.named("gains", self.settings)
        stances = {n: table(s, f"stance.{n}", STANCE) for n, s in table(raw.get("stance", {}), "stance").items()}
        if "stance" in raw and not all(map(NAME.fullmatch, stances or [""])):
            raise Refused("stance: at least one, each with a name")
        moving = any("dynamics" in s for s in (raw, *stances.values()))
        states = self.quantities(raw, "state", None)
        self.declare(states, "state")
        uncertain = self.quantities(raw, "uncertain", moving)
        self.declare(uncertain, "uncertain")
        own_states = {n: self.quantities(s, "state", None, f"stance.{n}.") for n, s in stances.items()}
        self.everywhere(own_states, states)
        libraries = self.libraries()
        define = self.group(raw, "define")
        self.declare(define, "define")
        own_define = {n: self.group(s, "define", f"stance.{n}.") for n, s in stances.items()}
        self.everywhere(own_define, {})
        self.shared = {key: self.group(raw, key) for key in ("next", "target")}
        running = self.dynamics(raw["dynamics"]) if "dynamics" in raw else None
        found = []
        for name, s in (stances or {"": dict[str, Any]()}).items():
            area, defined = {**states, **own_states.get(name, {})}, {**define, **own_define.get(name, {})}
            found.append(self.stance(Stance(name, (), (), area, defined, {}, {}, running), s, stances))
        if len({frozenset(s.dynamics.start if s.dynamics else ()) for s in found}) > 1:
            raise Refused("dynamics: the same continuous states in every stance")
        self.declare(found[0].dynamics.start if found[0].dynamics else (), "dynamics")
        scopes = [Scope(s, {*constants, *gains}, uncertain, libraries) for s in found]
        found = [replace(s, define={n: s.define[n] for n in x.order()}) for s, x in zip(found, scopes, strict=True)]
        correction = chosen(raw["correction"], "correction", found[0].define, 1) if "correction" in raw else ()
        route = given(raw, "route", "best", "", ("best", "slope", "split", "sector", "curve"))
        metric = table(raw.get("metric", {}), "metric", ("kind", "weights"))
        kind = given(metric, "kind", "auto", "metric.", ("auto", "box", "ellipsoid", "polytope"))
        weights: dict[str, Expression] = {}
        for state, w in table(metric.get("weights", {}), "metric.weights", found[0].states).items():
            weights[state], (low, _) = self.constant(w, f"metric.weights.{state}")
            if low <= 0:
                raise Refused(f"metric.weights.{state}: above 0")
        effort = table(raw.get("effort", {}), "effort", ("gap", "cells", "seconds"))
        gap, seconds = (
            self.constant(effort.get(k, d), f"effort.{k}")[1] for k, d in (("gap", Number("1e-3")), ("seconds", 600))
        )
        cells = given(effort, "cells", 200_000, "effort.")
        if not (gap[0] > 0 and gap[1] < 1 and seconds[0] > 0 and cells >= 1):
            raise Refused("effort: 0 < gap < 1, cells at least 1, seconds above 0")
        asking = listed(raw.get("require", [{"that": "settles"}]), "require", 1, 1000)
        requirements = tuple(self.requirement(r, f"require[{n}]", scopes[0], stances) for n, r in enumerate(asking, 1))
        return Statement(
            given(raw, "title", ""), given(raw, "notes", ""), route, correction, given(raw, "shrink", False),
            given(raw, "horizon", 1, "", range(1, 65)), constants, gains, uncertain, libraries, kind, weights, gap[0],
            cells, seconds[0], requirements, tuple(found), self.values,
        )  # fmt: skip

    def everywhere(self, own: Mapping[str, Mapping[str, Any]], shared: Mapping[str, Any]) -> None:
        """Declares names that stances state on their own: every one does."""
        for name in sorted({n for names in own.values() for n in names} - set(shared)):
            self.declare([name], "stance")
            if any(name not in names for names in own.values()):
                raise Refused(f"stance: {name} is stated once for all or in every one")

    def libraries(self) -> tuple[Library, ...]:
        raw = self.raw.get("library", [])
        if "library" in self.raw and raw == []:
            raise Refused("library: at least one")
        found = []
        for k, item in enumerate(raw if isinstance(raw, list) else [raw], 1):
            place = f"library[{k}]"
            file = given(table(item, place, ("file", "at")), "file", "", f"{place}.")
            if not file.isprintable() or "\\" in file or any(p in ("", ".", "..") for p in file.split("/")):
                raise Refused(f"{place}.file: a path beside or below the claim")
            if file not in self.data:
                raise Refused(f"{place}.file: {file[:60]!r} is not there")
            axes = self.group(item, "at", f"{place}.")
            if not 1 <= len(axes) <= 4:
                raise Refused(f"{place}.at: one to four axes")
            found.append(read_library(file, self.data[file], axes, self.values.work))
            self.declare(found[-1].columns, file)
        return tuple(found)

    def stance(self, s: Stance, raw: dict[str, Any], known: Mapping[str, Any]) -> Stance:
        """A stance with what is its own: what follows, its maps, targets and dynamics."""
        place = f"stance.{s.name}." if s.name else ""
        then, both = raw.get("then", []), dict[str, dict[str, Expression]]()
        then = chosen([then] if type(then) is str else then, f"{place}then", known, 1) if s.name else ()
        mirror = chosen(raw.get("mirror", []), f"{place}mirror", s.states, 0)
        for key, shared in self.shared.items():
            own = self.group(raw, key, place)
            wrong = (set(shared) & set(own)) | ((set(shared) | set(own)) ^ set(s.states))
            if wrong or not s.states:
                raise Refused(f"{place}{key}.{min(wrong, default='')}: one for each state, shared or in every stance")
            both[key] = {n: own[n] if n in own else shared[n] for n in s.states}
        if "dynamics" in raw and s.dynamics is not None:
            raise Refused("dynamics: shared, or in every stance")
        dynamics = self.dynamics(raw["dynamics"]) if "dynamics" in raw else s.dynamics
        return replace(s, then=then, mirror=mirror, next=both["next"], target=both["target"], dynamics=dynamics)

    def dynamics(self, value: Any) -> Dynamics:
        raw = table(value, "dynamics", ("duration", "until", "within", "start", "rate"))
        start, rate = self.group(raw, "start", "dynamics."), self.group(raw, "rate", "dynamics.")
        if not start or set(start) != set(rate):
            raise Refused("dynamics: start and rate of the same continuous states")
        if ("duration" in raw) == ("until" in raw) or ("until" in raw) != ("within" in raw):
            raise Refused("dynamics: a duration, or until and within")
        within = self.range(raw["within"], "dynamics.within", strict=True) if "within" in raw else None
        if within is not None and constant(within.lower, self.values)[0] < 0:
            raise Refused("dynamics.within: from 0 on")
        parts = [self.expression(raw[k], f"dynamics.{k}") if k in raw else None for k in ("duration", "until")]
        return Dynamics(parts[0], parts[1], within, start, rate)

    def requirement(self, value: Any, place: str, scope: Scope, stances: Mapping[str, Any]) -> Requirement:
        raw = table(value, place, ("that", "over", "in"))
        with at(place):
            r = asked(given(raw, "that", ""), self.values)
            for e in (r.constant, r.start, r.end):
                if e is not None:
                    constant(e, self.values, Work(SHARE))
            for e in (r.expression, r.left, r.right):
                if e is not None:
                    scope.known(e)
            if r.state is not None and r.state not in scope.stance.states:
                raise Refused(f"{r.state} is no state")
            if r.by is not None and (r.by not in scope.names or r.by in scope.continuous):
                raise Refused(f"{r.by} is no declared or defined name")
            if (r.during or r.kind == "throughout") and scope.stance.dynamics is None:
                raise Refused("needs dynamics")
        over = {}
        for name, ends in table(raw.get("over", {}), f"{place}.over").items():
            if name not in scope.ranged and (r.kind != "sensitivity" or name not in scope.built):
                raise Refused(f"{place}.over: {name[:60]!r} cannot be given a range")
            over[name] = self.range(ends, f"{place}.over.{name}")
        return replace(r, over=over, stance=given(raw, "in", "", f"{place}.", stances) if "in" in raw else None)


def asked(text: str, values: Known) -> Requirement:
    """A requirement's comparison, or a quantity alone."""
    p = Parser(text, values, steps=True)
    kind = p.take()
    if kind not in KINDS:
        raise Refused(f"{kind[:60]!r} is no quantity")
    relations, parts = KINDS[kind]
    found: dict[str, Any] = {}
    if kind in ("always", "throughout"):
        p.take("(")
        found = {"left": side(p), "relation": compared(p, LOWER + UPPER), "right": side(p)}
        p.take(")")
    elif parts and (p.peek() == "(" or kind not in BARE):
        for k, part in enumerate(parts):
            p.take("," if k else "(")
            found[part] = p.word() if part in ("state", "by") else side(p)
        if kind == "push" and p.peek() == ",":
            p.take(",")
            p.take("during")
            found["during"] = True
        p.take(")")
    if p.peek() or kind not in ALONE:
        found |= {"relation": compared(p, relations), "constant": side(p)}
    p.ended()
    return Requirement(text, kind, **found)


def side(p: Parser) -> Expression:
    return p.expression(Work(SHARE))


def compared(p: Parser, allowed: tuple[str, ...]) -> str:
    relation = p.take()
    if relation not in allowed:
        raise Refused(f"{relation[:20]!r} found, {' '.join(allowed) or 'nothing'} expected: stronger as it tightens")
    return relation
