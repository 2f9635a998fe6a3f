"""A program over boxes: registers filled one after another, for a value and its gradient."""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import dataclass, field
from fractions import Fraction


@dataclass(frozen=True, slots=True)
class Step:
    """One register: `op` applied to earlier registers.

    `orders` counts the derivatives of a library reading by each of its axes, or of a `flow` by each of its arguments
    (normalised time, then the parameters); the name of a `flow` is the entry "i j" of the fundamental solution.
    """

    op: str
    args: tuple[int, ...] = ()
    value: Fraction | None = None
    name: str = ""
    orders: tuple[int, ...] = ()


@dataclass
class Program:
    """`value` is the register of the wanted quantity, `gradient[v]` of its derivative by variable v (absent: 0),
    `curvature[u, v]` of its second derivatives where they were asked for.

    `checks` are registers of everything the claim's own text computes: where one of them has no finite range,
    the claim is not shown to be defined.
    """

    steps: list[Step] = field(default_factory=list)
    value: int = -1
    gradient: dict[str, int] = field(default_factory=dict)
    curvature: dict[tuple[str, str], int] = field(default_factory=dict)
    checks: tuple[int, ...] = ()
    library: tuple[int, ...] = ()
    _number: dict[Hashable, int] = field(default_factory=dict, repr=False)

    def add(self, step: Step) -> int:
        number = self._number.get(step)
        if number is None:
            number = self._number[step] = len(self.steps)
            self.steps.append(step)
        return number
