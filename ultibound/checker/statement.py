"""The checker's own reader of claims: TOML text to a statement that cannot be malformed. First fault refuses."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import Any

from .grammar import DEEPEST, NAME, RESERVED, Ends, Expression, Node, Parser, Refused, checked, constant, names, parse
from .library import Library, read_library
from .numerals import spelled

LARGEST = 2**20
TOP = frozenset(
    [
        "format",
        "title",
        "notes",
        "route",
        "correction",
        "shrink",
        "horizon",
        "constants",
        "gains",
        "state",
        "uncertain",
        "define",
        "next",
        "target",
        "metric",
        "effort",
        "require",
        "dynamics",
        "library",
        "stance",
    ]
)
PIECE = re.compile(
    r'"""(?:[^"\\]|\\.|"(?!""))*"{3,5}|\'\'\'(?:[^\']|\'(?!\'\'))*\'{3,5}'
    r'|"(?:[^"\\\n]|\\.)*"|\'[^\'\n]*\'|\#[^\n]*|[\[\]{}]'
    r"|[^\s\"'\#\[\]{}=,]+|.",
    re.DOTALL,
)
WORD = re.compile(r"(?<![0-9A-Za-z_.])[A-Za-z][A-Za-z0-9_]*", re.ASCII)
LOWER, UPPER = ("<", "<="), (">", ">=")
KINDS: dict[str, tuple[str, ...]] = {
    **dict.fromkeys(("gain", "residual", "bound", "sharp_bound", "steps"), LOWER),
    **dict.fromkeys(("radius", "push"), UPPER),
    **dict.fromkeys(("sensitivity", "value"), LOWER + UPPER),
}


@dataclass(frozen=True)
class Range:
    lower: Expression
    upper: Expression


@dataclass(frozen=True)
class Quantity:
    name: str
    range: Range | None
    values: tuple[Expression, ...] | None
    unit: str
    held: bool
    change: Expression | None
    within: bool


@dataclass(frozen=True)
class Dynamics:
    duration: Expression | None
    until: Expression | None
    within: Range | None
    start: dict[str, Expression]
    rate: dict[str, Expression]


@dataclass(frozen=True)
class Stance:
    name: str
    then: tuple[str, ...]
    mirror: tuple[str, ...]
    states: dict[str, Quantity]
    define: dict[str, Expression]
    next: dict[str, Expression]
    target: dict[str, Expression]
    dynamics: Dynamics | None


@dataclass(frozen=True)
class Requirement:
    text: str
    kind: str
    state: str | None = None
    by: str | None = None
    expression: Expression | None = None
    left: Expression | None = None
    right: Expression | None = None
    start: Expression | None = None
    end: Expression | None = None
    during: bool = False
    relation: str | None = None
    constant: Expression | None = None
    over: dict[str, Range] = field(default_factory=dict)
    stance: str | None = None


@dataclass(frozen=True)
class Statement:
    title: str
    notes: str
    route: str
    correction: tuple[str, ...]
    shrink: bool
    horizon: int
    constants: dict[str, Expression]
    gains: dict[str, Expression]
    uncertain: dict[str, Quantity]
    libraries: tuple[Library, ...]
    metric: str
    weights: dict[str, Expression]
    gap: Fraction
    cells: int
    seconds: Fraction
    requirements: tuple[Requirement, ...]
    stances: tuple[Stance, ...]
    values: dict[str, Ends]


class Number(str):
    """A TOML number as it is spelled."""


def read_statement(text: str, settings: Mapping[str, str], data: Mapping[str, str]) -> Statement:
    """The statement of a claim's text, gains replaced by `settings`, files taken from `data`. Raises Refused."""
    return Reader(loaded(text), settings, data).statement()


def loaded(text: str) -> dict[str, Any]:
    """TOML after a look at its tokens: size, control characters, nesting, number spellings."""
    if len(text) > LARGEST or len(text.encode("utf-8", "surrogatepass")) > LARGEST:
        raise Refused(f"a claim of more than {LARGEST} bytes")
    if re.search(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f\ufeff\ud800-\udfff]", text[:1] + text[1:].replace("\ufeff", "")):
        raise Refused("a control character, byte order mark or surrogate")
    depth = 0
    for match in PIECE.finditer(text):
        piece = match[0]
        if piece in "[{":
            depth += 1
            if depth > DEEPEST:
                raise Refused(f"nested more than {DEEPEST} deep")
        elif piece in "]}":
            depth -= 1
        elif piece[0] in "+-0123456789":
            spelling(piece)
        elif piece in ("inf", "nan") and not re.match(r"\s*[=.\]]", text[match.end() : match.end() + 20]):
            raise Refused(f"{piece} is no number")
    try:
        return tomllib.loads(text, parse_float=Number)
    except RecursionError:
        raise Refused(f"nested more than {DEEPEST} deep") from None
    except (tomllib.TOMLDecodeError, ValueError) as why:
        raise Refused(f"TOML: {why}") from None


def spelling(piece: str) -> Fraction:
    try:
        value = spelled(piece)
    except ValueError as why:
        raise Refused(str(why)) from None
    if value is None:
        raise Refused(f"{piece[:40]!r} is no number of the claim format")
    return value


def table(value: Any, place: str, allowed: Iterable[str] | None = None) -> dict[str, Any]:
    if not isinstance(value, dict):
        raise Refused(f"{place}: a table is expected")
    for key in value:
        if allowed is not None and key not in allowed:
            raise Refused(f"{place}: unknown key {key[:60]!r}")
    return value


def text_of(value: Any, place: str) -> str:
    if not isinstance(value, str) or isinstance(value, Number):
        raise Refused(f"{place}: text is expected")
    return value


def flag(value: Any, place: str) -> bool:
    if not isinstance(value, bool):
        raise Refused(f"{place}: true or false is expected")
    return value


class Reader:
    def __init__(self, raw: dict[str, Any], settings: Mapping[str, str], data: Mapping[str, str]) -> None:
        self.raw, self.data = table(raw, "claim", TOP), data
        self.values: dict[str, Ends] = {}
        self.declared: set[str] = set()
        if type(raw.get("format")) is not int or raw["format"] != 1:
            raise Refused("format: 1 is expected")
        self.settings = settings

    # numbers, expressions, ranges

    def expression(self, value: Any, place: str, steps: bool = False) -> Expression:
        if isinstance(value, (bool, dict, list)) or not isinstance(value, (str, int)):
            raise Refused(f"{place}: an expression is expected")
        if isinstance(value, (Number, int)):
            q = spelling(str(value))
            return Expression(str(value), (Node("number", (), q),))
        try:
            return parse(value, self.values, steps)
        except Refused as why:
            raise Refused(f"{place}: {why}") from None

    def constant(self, value: Any, place: str) -> tuple[Expression, Ends]:
        e = self.expression(value, place)
        try:
            return e, constant(e, self.values)
        except Refused as why:
            raise Refused(f"{place}: {why}") from None

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
        found: dict[str, Expression] = {}
        waiting = dict(raw)
        while waiting:
            before = len(waiting)
            for name, value in list(waiting.items()):
                used = set(WORD.findall(value)) if type(value) is str else set()
                if used & (set(waiting) - {name}) or (used & {name} and used & set(raw)):
                    continue
                found[name], self.values[name] = self.constant(value, f"{section}.{name}")
                del waiting[name]
            if len(waiting) == before:
                raise Refused(f"{section}: {', '.join(sorted(waiting))[:80]} depend on each other")
        return found

    def quantity(self, name: str, value: Any, place: str, state: bool, moving: bool) -> Quantity:
        raw = (
            {"range": value}
            if isinstance(value, list)
            else table(
                value, place, {"range", "unit"} if state else {"range", "values", "unit", "held", "change", "within"}
            )
        )
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
        for library in libraries:
            for column in library.columns:
                self.declare(column, library.file)
        shared = {n: self.expression(v, f"define.{n}") for n, v in table(raw.get("define", {}), "define").items()}
        own = {
            n: {
                d: self.expression(v, f"stance.{n}.define.{d}")
                for d, v in table(s.get("define", {}), f"stance.{n}.define").items()
            }
            for n, s in stances.items()
        }
        for name in [*shared, *sorted({d for o in own.values() for d in o})]:
            self.declare(name, "define")
        if len({frozenset(o) for o in own.values()}) > 1:
            raise Refused("stance: a name defined in one stance must be defined in every one")
        found = []
        for name, s in (stances or {"": {}}).items():
            if name and not NAME.fullmatch(name):
                raise Refused(f"stance: {name[:60]!r} cannot be a name")
            found.append(
                self.stance(
                    name, s, {**states, **own_states.get(name, {})}, {**shared, **own.get(name, {})}, set(stances)
                )
            )
        if (
            len(
                {frozenset(s.dynamics.start) for s in found if s.dynamics}
                | {frozenset() for s in found if not s.dynamics}
            )
            > 1
        ):
            raise Refused("dynamics: the same continuous states in every stance")
        for name in found[0].dynamics.start if found[0].dynamics else ():
            self.declare(name, "dynamics")
        found = [self.ordered(s, constants, gains, uncertain, libraries) for s in found]
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
        names_ = Scope(found[0], constants, gains, uncertain, libraries, moving, {s.name for s in found} - {""})
        listed = raw.get("require", [{"that": "settles"}])
        if not isinstance(listed, list) or not 1 <= len(listed) <= 1000:
            raise Refused("require: 1 to 1,000 tables")
        requirements = tuple(self.requirement(r, n, names_) for n, r in enumerate(listed, 1))
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
            file, at = (
                text_of(table(item, place, ("file", "at")).get("file"), place),
                table(item.get("at"), f"{place}.at"),
            )
            if not file or any(p in ("", ".", "..") for p in file.split("/")) or "\\" in file or not file.isprintable():
                raise Refused(f"{place}.file: a path beside or below the claim")
            if file not in self.data:
                raise Refused(f"{place}: {file[:60]!r} is not there")
            if not 1 <= len(at) <= 4:
                raise Refused(f"{place}.at: one to four axes")
            found.append(
                read_library(file, self.data[file], {a: self.expression(e, f"{place}.at.{a}") for a, e in at.items()})
            )
        if "library" in self.raw and not found:
            raise Refused("library: at least one")
        return tuple(found)

    def each(
        self, key: str, stance: dict[str, Any], name: str, states: Mapping[str, Quantity]
    ) -> dict[str, Expression]:
        """`next` or `target` of a stance: shared entries and its own, every state once."""
        shared, own = table(self.raw.get(key, {}), key), table(stance.get(key, {}), f"stance.{name}.{key}")
        if set(shared) & set(own) or set(shared) | set(own) != set(states) or not states:
            raise Refused(f"{key}: one expression for each state, shared or in every stance")
        return {s: self.expression({**shared, **own}[s], f"{key}.{s}") for s in states}

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
        own = raw.get("dynamics", self.raw.get("dynamics"))
        dynamics = None if own is None else self.dynamics(own)
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
            if constant(within.lower, self.values)[0] < 0:
                raise Refused("dynamics.within: from 0 on")
        parts = [self.expression(raw[k], f"dynamics.{k}") if k in raw else None for k in ("duration", "until")]
        return Dynamics(parts[0], parts[1], within,
                        {s: self.expression(e, f"dynamics.start.{s}") for s, e in start.items()},
                        {s: self.expression(e, f"dynamics.rate.{s}") for s, e in rate.items()})  # fmt: skip

    # names

    def ordered(
        self, s: Stance, constants: Any, gains: Any, uncertain: dict[str, Quantity], libraries: tuple[Library, ...]
    ) -> Stance:
        """The stance with its definitions in order of dependence, every name known and allowed where it stands."""
        scope = Scope(s, constants, gains, uncertain, libraries, s.dynamics is not None, set())
        for place, e in scope.texts():
            scope.known(e, place)
        order = scope.order()
        held = {n for n, q in uncertain.items() if q.held} | set(constants) | set(gains)
        for name, e in s.target.items():
            loose = {n for n in scope.leaves(e) if n not in held}
            if loose:
                raise Refused(f"target.{name}: {sorted(loose)[0]} is not constant, gain or held")
        timed = {"t", *(s.dynamics.start if s.dynamics else ())}
        for library in libraries:
            for e in library.at:
                if scope.leaves(e, columns=True) & (timed | set(scope.columns)):
                    raise Refused(f"{library.file}: at uses a library column or the stance's time")
        for place, e in scope.early():
            if scope.leaves(e) & timed:
                raise Refused(f"{place}: uses the stance's time")
        return replace(s, define={n: s.define[n] for n in order})

    def requirement(self, value: Any, number: int, scope: Scope) -> Requirement:
        place = f"require[{number}]"
        raw = table(value, place, ("that", "over", "in"))
        text = text_of(raw.get("that"), f"{place}.that")
        try:
            r = asked(text, self.values)
        except Refused as why:
            raise Refused(f"{place}: {why}") from None
        if r.state is not None and r.state not in scope.stance.states:
            raise Refused(f"{place}: {r.state[:60]!r} is no state")
        if r.by is not None and (r.by not in scope.everything() or r.by in scope.continuous):
            raise Refused(f"{place}: {r.by[:60]!r} is no declared or defined name")
        for e in (r.expression, r.left, r.right):
            if e is not None:
                scope.known(e, place)
        for e in (r.constant, r.start, r.end):
            if e is not None:
                constant(e, self.values)
        if (r.during or r.kind == "throughout") and not scope.moving:
            raise Refused(f"{place}: needs dynamics")
        over = {}
        for name, ends in table(raw.get("over", {}), f"{place}.over").items():
            declared = {*scope.stance.states, *scope.uncertain, *self.values}
            if name not in declared and not (
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
        value = spelled(text)
    except ValueError as why:
        raise Refused(f"set: {why}") from None
    if value is not None:
        return Number(text)
    if names(parse(text, {})):
        raise Refused("set: a constant expression without names")
    return text


class Scope:
    """Names a stance's expressions may use."""

    def __init__(
        self,
        stance: Stance,
        constants: Any,
        gains: Any,
        uncertain: dict[str, Quantity],
        libraries: tuple[Library, ...],
        moving: bool,
        stances: set[str],
    ) -> None:
        self.stance, self.uncertain, self.moving, self.stances = stance, uncertain, moving, stances
        self.fixed = {*constants, *gains}
        self.columns = {c: library for library in libraries for c in library.columns}
        self.continuous = set(stance.dynamics.start) if stance.dynamics else set()

    def everything(self) -> set[str]:
        return {*self.fixed, *self.stance.states, *self.uncertain, *self.columns, *self.stance.define, *self.continuous}

    def texts(self) -> list[tuple[str, Expression]]:
        s, d = self.stance, self.stance.dynamics
        found = [
            (f"{k}.{n}", e)
            for k, group in (("define", s.define), ("next", s.next), ("target", s.target))
            for n, e in group.items()
        ]
        found += [(library.file, e) for library in self.columns.values() for e in library.at]
        if d is not None:
            found += [(f"dynamics.{k}", e) for k, e in (("duration", d.duration), ("until", d.until)) if e is not None]
            found += [("dynamics", e) for e in (*d.start.values(), *d.rate.values())]
        return found

    def early(self) -> list[tuple[str, Expression]]:
        """Expressions evaluated before the stance runs."""
        s, d = self.stance, self.stance.dynamics
        found = [("target", e) for e in s.target.values()]
        if d is not None:
            found += [("dynamics.start", e) for e in d.start.values()]
            found += [("dynamics.duration", d.duration)] if d.duration is not None else []
        return found

    def known(self, e: Expression, place: str) -> None:
        for n in e.nodes:
            if n.op == "name" and n.name not in self.everything():
                raise Refused(f"{place}: unknown name {str(n.name)!r}")
            if n.op in ("target", "next") and n.name not in self.stance.states:
                raise Refused(f"{place}: {n.name!r} is no state")
            if n.op in ("dt", "time") and not self.moving:
                raise Refused(f"{place}: {n.op} needs dynamics")

    def uses(self, name: str) -> list[str]:
        """Names a name is built from; `target(s)` counts as one."""
        if name.startswith("target("):
            return used(self.stance.target[name[7:-1]])
        if name in self.stance.define:
            return used(self.stance.define[name])
        return [n for e in self.columns[name].at for n in used(e)] if name in self.columns else []

    def order(self) -> list[str]:
        """Defined names in order of dependence; refuses cycles."""
        done: dict[str, bool] = {}
        found: list[str] = []
        for root in [*self.stance.define, *self.columns, *(f"target({s})" for s in self.stance.target)]:
            stack = [root]
            while stack:
                name = stack[-1]
                if done.get(name):
                    stack.pop()
                    continue
                done[name] = False
                later = [n for n in self.uses(name) if not done.get(n)]
                if any(n in done and n in stack for n in later):
                    raise Refused(f"{name} is built from itself")
                if later:
                    stack.extend(later)
                    continue
                done[name] = True
                stack.pop()
                if name in self.stance.define:
                    found.append(name)
        return found

    def leaves(self, e: Expression, columns: bool = False) -> set[str]:
        """Declared names an expression rests on (with `columns`, library columns met on the way too)."""
        found, waiting, seen = set[str](), used(e), set[str]()
        while waiting:
            name = waiting.pop()
            if name in seen:
                continue
            seen.add(name)
            below = self.uses(name)
            waiting += below
            if not (name in self.stance.define or name in self.columns or name.startswith("target(")) or (
                columns and name in self.columns
            ):
                found.add(name)
        return found


def used(e: Expression) -> list[str]:
    return [
        f"target({n.name})" if n.op == "target" else str(n.name) for n in e.nodes if n.op in ("name", "target", "time")
    ]


def asked(text: str, values: Mapping[str, Ends]) -> Requirement:
    """A requirement's comparison, or a quantity alone."""
    p = Parser(text, values, steps=True)
    kind = p.take()
    r = Requirement(text, kind)
    if kind == "settles":
        p.ended()
        return r
    if kind in ("always", "throughout"):
        p.take("(")
        left = side(p)
        relation = compared(p)
        r = replace(r, left=left, relation=relation, right=side(p))
        p.take(")")
        p.ended()
        return r
    if kind not in KINDS:
        raise Refused(f"{kind[:60]!r} is no quantity")
    if kind == "value":
        p.take("(")
        r = replace(r, expression=side(p))
        p.take(")")
    elif p.peek() == "(" and kind not in ("gain", "residual"):
        p.take("(")
        r = replace(r, state=word(p))
        if kind == "sensitivity":
            p.take(",")
            r = replace(r, by=word(p))
        elif kind == "push" and p.peek() == ",":
            p.take(",")
            p.take("during")
            r = replace(r, during=True)
        elif kind == "steps":
            p.take(",")
            r = replace(r, start=side(p))
            p.take(",")
            r = replace(r, end=side(p))
        p.take(")")
    elif kind in ("push", "steps", "sensitivity"):
        raise Refused(f"{kind} needs its state in parentheses")
    if not p.peek() and kind in ("sensitivity", "value"):
        return r
    relation = compared(p)
    if relation not in KINDS[kind]:
        raise Refused(f"{kind} {relation}: this does not grow stronger as the constant tightens")
    r = replace(r, relation=relation, constant=side(p))
    p.ended()
    return r


def side(p: Parser) -> Expression:
    p.nodes = []
    p.sum()
    checked(p.nodes)
    return p.whole()


def word(p: Parser) -> str:
    name = p.take()
    if not NAME.fullmatch(name):
        raise Refused(f"{name[:60]!r}: a name is expected")
    return name


def compared(p: Parser) -> str:
    relation = p.take()
    if relation not in LOWER + UPPER:
        raise Refused(f"{relation[:20]!r}: a comparison is expected")
    return relation
