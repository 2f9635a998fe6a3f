"""What a claim states, as values: handed from the reader to the derivation of obligations."""

from __future__ import annotations

from dataclasses import dataclass, field
from fractions import Fraction

from .grammar import Ends, Expression


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
class Library:
    file: str
    axes: tuple[str, ...]
    at: tuple[Expression, ...]
    grid: tuple[tuple[Fraction, ...], ...]
    columns: dict[str, tuple[Fraction, ...]]


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
