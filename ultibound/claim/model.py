"""The claim as a value that cannot be malformed: what the reader hands on."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from fractions import Fraction

from .expression import Expression

Ends = tuple[Fraction, Fraction]


@dataclass(frozen=True, slots=True)
class Range:
    """Closed range between two constant expressions."""

    lower: Expression
    upper: Expression


@dataclass(frozen=True, slots=True)
class Quantity:
    """A state or an uncertain quantity: exactly one of `range` and `values` is given."""

    name: str
    range: Range | None = None
    values: tuple[Expression, ...] | None = None
    unit: str = ""
    held: bool = False
    change: Expression | None = None
    within: bool = False


@dataclass(frozen=True, slots=True)
class Library:
    """A gait library: ascending `grid` an axis, `at` where each axis is read, columns row-major over the grid."""

    file: str
    axes: tuple[str, ...]
    at: tuple[Expression, ...]
    grid: tuple[tuple[Fraction, ...], ...]
    columns: Mapping[str, tuple[Fraction, ...]]


@dataclass(frozen=True, slots=True)
class Dynamics:
    """Continuous stance: a duration, or touchdown by condition `until` in the window `within`."""

    duration: Expression | None
    until: Expression | None
    within: Range | None
    start: Mapping[str, Expression]
    rate: Mapping[str, Expression]


@dataclass(frozen=True, slots=True)
class Stance:
    """Shared sections and a stance's own, merged; `define` in order of dependence. The only one may be unnamed."""

    name: str
    then: tuple[str, ...]
    mirror: tuple[str, ...]
    states: Mapping[str, Quantity]
    define: Mapping[str, Expression]
    next: Mapping[str, Expression]
    target: Mapping[str, Expression]
    dynamics: Dynamics | None


@dataclass(frozen=True, slots=True)
class Requirement:
    """One statement to be proved; which fields are set depends on `kind`."""

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
    over: Mapping[str, Range] = field(default_factory=dict)
    stance: str | None = None


@dataclass(frozen=True, slots=True)
class Claim:
    """A whole claim; a certificate repeats `text`, `settings`, `data`; `values` enclose constants and gains."""

    text: str
    settings: Mapping[str, str]
    data: Mapping[str, str]
    place: str
    title: str
    notes: str
    route: str
    correction: tuple[str, ...]
    shrink: bool
    horizon: int
    constants: Mapping[str, Expression]
    gains: Mapping[str, Expression]
    uncertain: Mapping[str, Quantity]
    libraries: tuple[Library, ...]
    metric: str
    weights: Mapping[str, Expression]
    gap: Fraction
    cells: int
    seconds: Fraction
    requirements: tuple[Requirement, ...]
    stances: tuple[Stance, ...]
    values: Mapping[str, Ends]
