"""A continuous stance as a linear system in time: x' = A x + b over a duration (proofs/trajectory.md)."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

Entries = tuple[int | None, ...]  # gates; None stands for zero


@dataclass(frozen=True, slots=True)
class Parameter:
    """What rates and duration depend on beside time: its name, its gate in the claim, the grid it is read on."""

    name: str
    gate: int
    grid: tuple[Fraction, ...] | None


@dataclass(frozen=True, slots=True)
class Motion:
    """x' = A x + b: gates in a variable `t` and in variables named as the parameters."""

    states: tuple[str, ...]
    parameters: tuple[Parameter, ...]
    matrix: tuple[Entries, ...]
    free: Entries
    duration: int
