"""Formulas: the same expression as MathML, LaTeX and plain text; derivatives held against differences."""

from __future__ import annotations

import math
import re
from pathlib import Path
from typing import Any
from xml.etree.ElementTree import tostring

import pytest

from tests.simulation import FUNCTIONS
from ultibound.claim import Claim, parse_claim, read_claim
from ultibound.report.formula import Formula, number, symbol, written
from ultibound.report.linearising import derivatives
from ultibound.report.typeset import latex, mathml, plain

EXAMPLES = Path(__file__).parents[2] / "ultibound" / "examples"
CLAIM = """format = 1
[constants]
g = 9.81
[state]
v = [-1, 1]
w_2 = [-1, 1]
[uncertain]
kappa = [0, 1]
h0 = [0, 1]
[define]
f = "EXPRESSION"
[next]
v = 0
w_2 = 0
[target]
v = 0
w_2 = 0
"""


def claim_of(expression: str) -> Claim:
    return parse_claim(CLAIM.replace("EXPRESSION", expression), {}, {}, "c.toml")


def typeset(expression: str) -> Formula:
    return written(claim_of(expression).stances[0].define["f"])


@pytest.mark.parametrize("expression, text, tex", [
    ("v + g*h0", "v + g·h0", r"v + g\,h_{0}"),
    ("v - (g - h0)", "v − (g − h0)", r"v - \left(g - h_{0}\right)"),
    ("-(v + 1)*2", "−(v + 1)·2", r"-\left(v + 1\right)\,2"),
    ("g/h0/2", "g/(h0·2)", r"\frac{g}{h_{0}\,2}"),
    ("(g + 1)/(2*v)", "(g + 1)/(2·v)", r"\frac{g + 1}{2\,v}"),
    ("-v**2", "−v^2", r"-v^{2}"),
    ("(v + 1)**-1.5", "(v + 1)^(−1.5)", r"\left(v + 1\right)^{-1.5}"),
    ("v**(1/2)", "v^0.5", r"v^{0.5}"),
    ("sqrt(g/kappa)", "√(g/κ)", r"\sqrt{\frac{g}{\kappa}}"),
    ("abs(v) + asin(v/2)", "|v| + arcsin(v/2)", r"\left\vert v \right\vert + \arcsin\left(\frac{v}{2}\right)"),
    ("clip(v, -1, 1)", "clip(v, −1, 1)", r"\mathrm{clip}\left(v, -1, 1\right)"),
    ("max(v, w_2, pi)", "max(v, w_2, π)", r"\max\left(v, \mathrm{w\_2}, \pi\right)"),
    ("target(v) + 1e-3", "v* + 0.001", r"v^{*} + 0.001"),
])  # fmt: skip
def test_an_expression_is_shown_as_it_was_written(expression: str, text: str, tex: str) -> None:
    f = typeset(expression)
    assert plain(f) == text and latex(f) == tex
    shown = tostring(mathml(f), encoding="unicode")
    assert shown.startswith("<math") and "U+" not in shown


def test_names_that_differ_look_different() -> None:
    names = ["h0", "h_0", "h_a", "ha", "kappa", "k", "w_2", "w2", "v_cmd", "vcmd", "a_", "a", "a_b_c", "a_b"]
    for shape in (plain, latex, lambda f: tostring(mathml(f))):
        assert len({shape(symbol(n)) for n in names}) == len(names)


@pytest.mark.parametrize("text, shown", [("0.1", "0.1"), ("1/3", "1/3"), ("-7", "−7"), ("1e20", "1e20…"), ("1e-15", "1e-15"),
                                         ("1e1000", "1e1000…"), ("1e9999", "1e9999…")])  # fmt: skip
def test_numbers_are_exact_or_say_that_they_are_cut(text: str, shown: str) -> None:
    from fractions import Fraction

    assert plain(number(Fraction(text))) == shown


@pytest.mark.parametrize("expression", ["/".join(["v"] * 3000), "v" + "*v/v" * 2000, "-" * 60 + "v", "+".join(["v"] * 2000),
                                        "(" * 60 + "v" + "+1)" * 60])  # fmt: skip
def test_what_is_too_long_to_be_typeset_is_shown_as_text(expression: str) -> None:
    f = typeset(expression)
    assert latex(f) and plain(f) and len(mathml(f)) == 1


def value(f: Formula, known: dict[str, float]) -> float:
    """A formula worked out, by what it shows."""
    parts = [value(p, known) for p in f.parts] if f.kind not in ("row", "cases") and f.text != "∂" else []
    match f.kind:
        case "number":
            return float(f.text)
        case "symbol":
            return math.pi if f.text == "π" else known[plain(f)]
        case "sum":
            return sum(x if s == "+" else -x for s, x in zip(f.text, parts, strict=True))
        case "negative":
            return -parts[0]
        case "product":
            return math.prod(parts)
        case "fraction":
            return known[plain(f)] if f.text == "∂" else parts[0] / parts[1]
        case "power":
            return float(parts[0] ** parts[1])
        case "root":
            return math.sqrt(parts[0])
        case "bars":
            return abs(parts[0])
        case "parentheses":
            return parts[0]
        case "call":
            return float({**FUNCTIONS, "tanh": math.tanh, "log": math.log}[f.text](*parts))
        case "cases":
            left, relation, right = f.parts[1].parts[1].parts
            a, b = value(left, known), value(right, known)
            return value(f.parts[0] if (a < b if relation.text == "<" else a > b) else f.parts[2], known)
    raise ValueError(f.kind)


def stepped(claim: Claim, at: dict[str, float]) -> dict[str, float]:
    """Definitions and next states at a point, by Python's own arithmetic; keys as they are shown."""
    stance = claim.stances[0]
    names: dict[str, Any] = {
        **FUNCTIONS,
        "tanh": math.tanh,
        "log": math.log,
        "clip": lambda x, a, b: min(max(x, a), b),
        **at,
    }

    def worked(text: str) -> float:
        text = re.sub(r"target\((\w+)\)", lambda m: f"({stance.target[m[1]].text})", text)
        return float(eval(text, {}, names))  # texts of the examples

    for n, e in {**claim.constants, **claim.gains}.items():
        names[n] = worked(e.text)
    for n, e in stance.define.items():
        names[n] = worked(e.text)
    found = {plain(symbol(n)): x for n, x in names.items() if isinstance(x, float)}
    found |= {plain(symbol(s, "*")): worked(e.text) for s, e in stance.target.items()}
    return found | {plain(symbol(s, "+")): worked(e.text) for s, e in stance.next.items()}


@pytest.mark.parametrize("example, at", [
    ("pendulum", {"v": 0.7, "T": 0.38, "z": 0.61, "placed": 0.001}),
    ("saturated", {"v": 0.35, "T": 0.38, "placed": 0.001}),
    ("saturated", {"v": 0.69, "T": 0.38, "placed": 0.001}),
    ("recentring", {"x": 0.1, "v": 0.7, "T": 0.38, "slip": 0.001, "v_cmd": 0.4}),
    ("restless", {"v": 0.3}),
])  # fmt: skip
def test_the_linearisation_is_the_derivative(example: str, at: dict[str, float]) -> None:
    claim = read_claim(EXAMPLES / f"{example}.toml")
    for n, q in claim.uncertain.items():
        if n not in at and q.range is not None:
            at = {**at, n: float(sum(claim_end(claim, e) for e in (q.range.lower, q.range.upper)) / 2)}
    known, h = stepped(claim, at), 1e-6
    found = derivatives(claim, claim.stances[0])
    assert {(d.of, d.by) for d in found} >= {(f"next({s})", s) for s in claim.stances[0].states}
    for d in found:
        left = plain(d.equation().parts[0])
        of = left.split("/")[0].removeprefix("∂")
        ends = [stepped(claim, {**at, d.by: at[d.by] + s})[of] for s in (h, -h)]
        known[left] = value(d.formula, known)
        assert known[left] == pytest.approx((ends[0] - ends[1]) / (2 * h), rel=1e-6, abs=1e-7), left


def claim_end(claim: Claim, e: Any) -> float:
    from ultibound.claim.constants import constant

    return float(constant(e, claim.values)[0])
