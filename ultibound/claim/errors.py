"""Errors of a claim: the place, the rule, what was found and what to do, all of a file together."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches


@dataclass(frozen=True, slots=True)
class Problem:
    """One fault: `place` is a section.key or a line, `message` says the rest."""

    place: str
    message: str


class ClaimError(Exception):
    """A claim that cannot be used. `problems` holds every fault found, `file` the name the claim goes by."""

    def __init__(self, file: str, problems: Iterable[Problem]) -> None:
        self.file, self.problems = file, tuple(problems)
        super().__init__(
            "\n".join(printable(": ".join(p for p in (file, x.place, x.message) if p)) for x in self.problems)
        )

    @classmethod
    def of(cls, file: str, place: str, message: str) -> ClaimError:
        return cls(file, [Problem(place, message)])


class Bad(Exception):
    """A fault at a place not yet known; what raised it knows only the rule."""


def printable(text: str) -> str:
    """Text that cannot steer a terminal, of bounded length."""
    return "".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in text)[:1000]


def nearest(name: str, known: Iterable[str]) -> str:
    """`; did you mean …?` for the nearest known name, or the names there are."""
    names = sorted(known)
    close = get_close_matches(name[:60], names, 1, 0.5)
    if close:
        return f"; did you mean {close[0]}?"
    return f"; known: {', '.join(names[:12])}" if names else ""
