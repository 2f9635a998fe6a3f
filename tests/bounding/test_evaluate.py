"""Programs over boxes: where a box is not shown to be defined, whichever registers tell of it."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from tests.polynomial.test_flows import table
from ultibound.bounding.evaluate import Runner
from ultibound.claim.model import Library
from ultibound.stepmap.program import Program, Step

ENDS = tuple(map(Fraction, (-9, 0, 9)))
LIBRARY = Library("gaits.csv", ("at",), (), (ENDS,), {"c": tuple(map(Fraction, (1, 3, 2)))})
FLOWS = table(1, np.array([0.0, 1.0]))


def overflow(p: Program, x: int) -> Step:
    return Step("exp", (p.add(Step("mul", (p.add(Step("number", value=Fraction(10**4))), x))),))


UNDEFINED = {  # of x: somewhere in [-1, 4], near 0 and beyond what floats hold
    "quotient": lambda p, x: Step("div", (p.add(Step("number", value=Fraction(1))), x)),
    "logarithm": lambda p, x: Step("log", (x,)),
    "root": lambda p, x: Step("sqrt", (x,)),
    "arcsine": lambda p, x: Step("asin", (p.add(Step("add", (x, p.add(Step("number", value=Fraction(1, 2)))))),)),
    "overflow": overflow,
    "overflow below": lambda p, x: Step("sub", (p.add(Step("number", value=Fraction(1))), p.add(overflow(p, x)))),
}
ABOVE = {  # of what may be undefined, and of x
    "nothing": lambda p, y, x: Step("add", (y, x)),
    "sum with itself": lambda p, y, x: Step("sub", (y, y)),
    "product with 0": lambda p, y, x: Step("mul", (y, p.add(Step("number", value=Fraction(0))))),
    "dividend": lambda p, y, x: Step("div", (y, p.add(Step("number", value=Fraction(2))))),
    "divisor": lambda p, y, x: Step("div", (p.add(Step("number", value=Fraction(2))), y)),
    "square": lambda p, y, x: Step("power", (y,), Fraction(2)),
    "cube": lambda p, y, x: Step("power", (y,), Fraction(3)),
    "power 0": lambda p, y, x: Step("power", (y,), Fraction(0)),
    "power -1": lambda p, y, x: Step("power", (y,), Fraction(-1)),
    "reading": lambda p, y, x: Step("reading", (y,), Fraction(0), "c", (0,)),
    "flow": lambda p, y, x: Step("flow", (p.add(Step("number", value=Fraction(1))), y), name="1 1", orders=(0, 0)),
    "time of a flow": lambda p, y, x: Step(
        "flow", (y, p.add(Step("number", value=Fraction(1)))), name="1 1", orders=(0, 0)
    ),
    "max": lambda p, y, x: Step("max", (y, x)),
    "min": lambda p, y, x: Step("min", (x, y)),
    **{
        op: lambda p, y, x, op=op: Step(op, (y,))
        for op in ("sqrt", "exp", "log", "asin", "acos", "atan", "sinh", "tanh", "cosh", "sin", "cos", "tan")
    },
}


@pytest.mark.parametrize("above", ABOVE)
@pytest.mark.parametrize("below", UNDEFINED)
def test_what_is_nowhere_finite_is_told_however_it_is_used(below: str, above: str) -> None:
    p = Program()
    x = p.add(Step("variable", name="x"))
    y = p.add(UNDEFINED[below](p, x))
    p.value = p.add(Step("tanh", (p.add(ABOVE[above](p, y, x)),)))
    p.checks = tuple(range(len(p.steps)))
    ends = np.array([-1.0, -0.3, -1e-3, 0.0, 1e-3, 0.3, 0.6, 1.0, 4.0])
    low, high = (a.ravel()[:, None] for a in np.meshgrid(ends, ends))
    low, high = low[low <= high][:, None], high[low <= high][:, None]
    short, whole = (Runner(p, ["x"], [LIBRARY], flows=FLOWS) for _ in range(2))
    whole._checks = list(p.checks)  # what is shortened
    assert len(short._checks) < len(p.checks)
    found, wanted = (~np.isfinite(r(low, high).low) for r in (short, whole))
    np.testing.assert_array_equal(found, wanted)
    assert wanted.any() and not wanted.all()
