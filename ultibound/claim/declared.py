"""What a claim declares: constants and gains, states and uncertain quantities, definitions, libraries."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

from .constants import constant
from .errors import Bad, Problem, Unknown
from .expression import Expression, Parser
from .fields import Fields, kind
from .library import parse_library
from .model import Library, Quantity
from .numbers import Spelled, exact_number

NAME_ANYWHERE = re.compile(r"(?<![0-9A-Za-z_.])[A-Za-z][A-Za-z0-9_]*", re.ASCII)


def safe(file: str) -> bool:
    """Whether a data file's name stays beside or below the claim."""
    parts = file.split("/")
    return file.isprintable() and "\\" not in file and all(p not in ("", ".", "..") for p in parts)


class Declared(Fields):
    """Reads the sections that declare names. `open`: some could not be read, so no name can be called unknown."""

    def __init__(
        self, text: str, raw: dict[str, Any], settings: Mapping[str, str], data: Mapping[str, str], place: str
    ) -> None:
        super().__init__()
        self.text, self.raw, self.settings, self.data, self.place = text, raw, dict(settings), data, place
        self.open = False

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
                with self.at(f"--set {name[:60]}"):
                    if name not in raw:
                        raise Unknown("there is no such gain", name, raw)
                    raw[name] = _setting(text)
        needs = {n: set(NAME_ANYWHERE.findall(v) if type(v) is str else ()) & raw.keys() for n, v in raw.items()}
        users: dict[str, list[str]] = {n: [] for n in raw}
        for name, used in needs.items():
            for other in used:
                users[other].append(name)
        place = {n: k for k, n in enumerate(raw)}
        found: dict[str, Expression] = {}
        ready = [n for n in raw if not needs[n]]
        while ready:
            freed = []
            for name in ready:
                self.failed.add(name)
                with self.at(f"{section}.{name[:60]}"):
                    found[name], self.values[name] = self.constant(raw[name])
                    self.failed.discard(name)
                for user in users[name]:
                    needs[user].discard(name)
                    if not needs[user]:
                        freed.append(user)
            ready = sorted(freed, key=place.__getitem__)
        ring = [n for n in raw if needs[n]]
        if ring:
            self.failed |= set(ring)
            shown = ", ".join(ring[:8])
            self.problems.append(Problem(section, f"{shown} depend on each other; break the cycle"))
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
        held, within, unit = flag(raw.get("held", False)), flag(raw.get("within", False)), raw.get("unit", "")
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
                before, self.open = self.open, True  # its columns are not known before it is read
                raw = self.table(item, place, ("file", "at"))
                file, at = raw.get("file"), raw.get("at")
                if type(file) is not str or not safe(file):
                    raise Bad(f"file: {file!r:.60} found, the path of a file beside or below the claim is expected")
                if not isinstance(at, dict) or not 1 <= len(at) <= 4:
                    raise Bad("at: a table of one to four axis columns and where each is read is expected")
                if file not in self.data:
                    raise Bad(f"{file[:60]}: the file is not there")
                axes = {a: self.expression(e) for a, e in at.items()}
                library = parse_library(file, self.data[file], axes, self.work)
                found.append(library)
                for column in library.columns:
                    self.declare(column, file)
                self.open = before
        return tuple(found)


def _setting(text: str) -> Any:
    """A gain given on the command line: a number or a constant expression without names. Raises Bad."""
    parser = Parser(text, lambda e: constant(e, {})[0])
    e = parser.expression()
    parser.end()
    if e.names():
        raise Bad(f"{e.names()[0]} found; a gain is set to a number or a constant expression without names")
    try:
        exact_number(text)
    except Bad:
        return text
    return Spelled(text)


def flag(value: Any) -> bool:
    if not isinstance(value, bool):
        raise Bad(f"{kind(value)} found, true or false is expected")
    return value


def distinct(value: Any) -> bool:
    return isinstance(value, list) and all(type(v) is str for v in value) and len(set(value)) == len(value)
