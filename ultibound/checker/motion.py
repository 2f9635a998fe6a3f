"""A continuous stance as a linear system in time, derived from the claim's text: proofs/trajectory.md."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

Entries = tuple[int | None, ...]  # terms; None stands for zero


@dataclass(frozen=True)
class Parameter:
    """What rates and duration depend on beside time: its name, its term in the claim, the grid it is read on."""

    name: str
    term: int
    grid: tuple[Fraction, ...] | None


@dataclass(frozen=True)
class Motion:
    """x' = A x + b over the duration: terms in a variable `t` and in variables named as the parameters."""

    states: tuple[str, ...]
    parameters: tuple[Parameter, ...]
    matrix: tuple[Entries, ...]
    free: Entries
    duration: int
