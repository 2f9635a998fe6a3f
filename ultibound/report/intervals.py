"""Intervals of a gain in words: where everything is proved, where a requirement breaks, where the map contracts."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from .margins import rounded, signed


@dataclass(frozen=True, slots=True)
class GainInterval:
    """Texts of one entry of `gain_intervals`; ends are rounded to the side on which they still hold."""

    gain: str
    proved: str
    refuted: str
    contracting: str
    best: str


def gain_intervals(results: dict[str, Any]) -> list[GainInterval]:
    """Of every gain that was asked about."""
    return [
        GainInterval(
            one["gain"],
            between("from", one["inner"], "to") + (f", on the {one['set']}" if one["set"] is not None else ""),
            _broken(one["outer"]),
            between("strictly between", one["contracting"], "and"),
            "" if one["best"] is None else f"k ≤ {_up(one['best']['gain'])} at about {_up(one['best']['value'])}",
        )
        for one in results["gain_intervals"]
    ]


def between(first: str, ends: list[str] | None, second: str) -> str:
    if ends is None:
        return ""
    return f"{first} {signed(rounded(ends[0], True))} {second} {signed(rounded(ends[1], False))}"


def _broken(outer: list[str | None]) -> str:
    """The nearest gains at which a requirement is refuted: exactly these, so what is short is not rounded."""
    found = [f"at {signed(x if len(x) <= 12 else '≈ ' + rounded(x, True))}" for x in outer if x is not None]
    return " and ".join(found)


def _up(text: str) -> str:
    return signed(rounded(text, True))
