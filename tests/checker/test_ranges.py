"""Forms of the checker over random boxes: each contains what is sampled, a better form is never looser."""

from __future__ import annotations

import random
from fractions import Fraction

import numpy as np
import pytest

from ultibound.checker.derive import Derivation, Domain
from ultibound.checker.forms import enclose, second_order
from ultibound.checker.ranges import Evaluator
from ultibound.checker.reals import Scaled, Undefined
from ultibound.checker.statement import read_statement

SAMPLES = [
    ("v*sin(3*T) - T*cos(v*T) + v**2*T", lambda v, T: v * np.sin(3 * T) - T * np.cos(v * T) + v**2 * T),
    ("exp(v*T)/(2 + v**2) - sqrt(3 + T)", lambda v, T: np.exp(v * T) / (2 + v**2) - np.sqrt(3 + T)),
    ("cosh(T)*v - sinh(T)*(v*(cosh(T) - 1)/sinh(T))", lambda v, T: np.cosh(T) * v - v * (np.cosh(T) - 1)),
    ("tanh(v + T)*atan(v) + log(2 + v*T)", lambda v, T: np.tanh(v + T) * np.arctan(v) + np.log(2 + v * T)),
    ("asin(v/3)*acos(T/3) + tan(v*T/3)", lambda v, T: np.arcsin(v / 3) * np.arccos(T / 3) + np.tan(v * T / 3)),
    ("abs(v - T)*T + max(v**2, 0.3*T, v/2)", lambda v, T: np.abs(v - T) * T + np.maximum(np.maximum(v**2, 0.3 * T), v / 2)),
    ("clip(2*v, -T, sin(3*v) + T)", lambda v, T: np.minimum(np.maximum(2 * v, -T), np.sin(3 * v) + T)),
    ("min(abs(v), max(T - abs(v), v*T))", lambda v, T: np.minimum(np.abs(v), np.maximum(T - np.abs(v), v * T))),
    ("log(max(v, 0.05))*T + sqrt(abs(v) + T)", lambda v, T: np.log(np.maximum(v, 0.05)) * T + np.sqrt(np.abs(v) + T)),
    ("(2 + v)**2.5*(1 + T)**-2", lambda v, T: (2 + v) ** 2.5 * (1 + T) ** -2.0),
]  # fmt: skip


def evaluator(expression: str, by: str) -> Evaluator:
    text = f'format = 1\n[state]\nv = [-1, 1]\n[uncertain]\nT = [0.1, 1]\n[next]\nv = "{expression}"\n[target]\nv = 0\n'
    derivation = Derivation(read_statement(text, {}, {}))
    name = "slope[v,v]" if by else "image[v]"
    meaning = derivation.meaning(name, Domain(False, Fraction(0), (Fraction(0), Fraction(0))))
    names = [v.name for v in meaning.variables]
    assert names == ["T", "v"]
    return Evaluator(derivation.terms, meaning.root, meaning.by, names, (), Scaled(80))


@pytest.mark.parametrize("expression, function", SAMPLES)
@pytest.mark.parametrize("by", ["", "v"])
def test_every_form_contains_the_samples(expression: str, function: object, by: str) -> None:
    rng, e = random.Random(expression + by), evaluator(expression, by)
    for width in (0.5, 0.1, 0.01):
        for _ in range(12):
            low = [rng.uniform(0.1, 1 - width * 0.9), rng.uniform(-1, 1 - width)]
            box = [(Fraction(x), Fraction(x + width * w)) for x, w in zip(low, (0.9, 1), strict=True)]
            T, v = np.meshgrid(*[np.linspace(float(a), float(b), 41) for a, b in box], indexing="ij")
            if by:
                h = 1e-6
                values = (function(v + h, T) - function(v - h, T)) / (2 * h)  # type: ignore[operator]  # a table of functions
                slack = 1e-7
            else:
                values, slack = function(v, T), 1e-12  # type: ignore[operator]  # a table of functions
            found = {}
            for form in "dcms":
                try:
                    found[form] = tuple(float(x) for x in e.a.ends(enclose(e, box, form)))
                except Undefined:
                    assert form != "m"  # nothing here is undefined on these boxes but for wide direct evaluation
                    continue
                assert found[form][0] <= values.min() + slack and values.max() <= found[form][1] + slack, (form, box)
            widths = {form: high - low for form, (low, high) in found.items()}
            assert widths["c"] <= widths["d"] + 1e-15 and widths["s"] <= widths["m"] + 1e-15
            if width == 0.01 and not by:
                assert widths["s"] <= 1.2 * (values.max() - values.min()) + 1e-4


def test_a_form_that_fails_leaves_nothing_behind() -> None:
    """A second derivative that is not defined: the next box is again evaluated for its value alone."""
    e = evaluator("sqrt(v + 1) + T", "")
    with pytest.raises(Undefined):
        second_order(e, [(Fraction(1, 10), Fraction(1)), (Fraction(-1), Fraction(1))])
    assert e.direction is None and not e.second()


def test_the_second_order_form_sees_through_cancellation() -> None:
    """v cosh T − sinh T · v(cosh T − 1)/sinh T = v: widths fall with the cube of the box, not the square."""
    e = evaluator(SAMPLES[2][0], "")
    excess = []
    for width in (Fraction(1, 8), Fraction(1, 16)):
        box = [(Fraction(1, 2), Fraction(1, 2) + width), (Fraction(1, 4), Fraction(1, 4) + width)]
        ends = e.a.ends(enclose(e, box, "s"))
        excess.append(float(ends[1] - ends[0] - width))
    assert 0 < excess[1] < excess[0] / 5
