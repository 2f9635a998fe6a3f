"""Errors of a claim: the place, the rule, what was found and what to do, all of a file together."""

from __future__ import annotations

from collections.abc import Collection, Iterable
from dataclasses import dataclass
from difflib import get_close_matches

SHOWN = 100  # lines of a file's faults that are printed; `problems` holds all
COMPARED = 500  # known names looked at for a suggestion: comparing names is slow


@dataclass(frozen=True, slots=True)
class Problem:
    """One fault: `place` is a section.key or a line, `message` says the rest."""

    place: str
    message: str


class ClaimError(Exception):
    """A claim that cannot be used. `problems` holds every fault found, `file` the name the claim goes by."""

    def __init__(self, file: str, problems: Iterable[Problem]) -> None:
        self.file, self.problems = file, tuple(problems)
        lines = [": ".join(p for p in (file, x.place, x.message) if p) for x in self.problems[:SHOWN]]
        if len(self.problems) > SHOWN:
            lines.append(f"{file}: and {len(self.problems) - SHOWN} more")
        super().__init__("\n".join(printable(line) for line in lines))

    @classmethod
    def of(cls, file: str, place: str, message: str) -> ClaimError:
        return cls(file, [Problem(place, message)])


class Bad(Exception):
    """A fault at a place not yet known; what raised it knows only the rule."""


class Unknown(Bad):
    """A name that is not known; the nearest known one is looked for only where the message is shown."""

    def __init__(self, message: str, name: str, known: Collection[str]) -> None:
        super().__init__(message)
        self.plain, self.name, self.known = message, name, known

    def __str__(self) -> str:
        return self.plain + nearest(self.name, self.known)


class Exhausted(Exception):
    """The numbers of a claim would take too long; nothing after that is looked at."""


class Follows(Bad):
    """A fault that only follows from one already noted; it is not told again."""


def printable(text: str) -> str:
    """Text that cannot steer a terminal, of bounded length."""
    return "".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in text)[:1000]


def nearest(name: str, known: Iterable[str]) -> str:
    """`; did you mean …?` for the nearest known name, or the names there are."""
    names = sorted(known)
    alike = sorted(names, key=lambda n: abs(len(n) - len(name)))[:COMPARED]
    close = get_close_matches(name[:60], alike, 1, 0.5)
    if close:
        return f"; did you mean {close[0]}?"
    return f"; known: {', '.join(names[:12])}" if names else ""
