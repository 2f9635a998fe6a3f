"""The `results` entry: what the checker derives from the lines, rounded outward to decimals."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from ..checker.gains import Interval
from ..checker.numerals import decimal_down, decimal_up
from ..checker.results import Results, Span
from ..claim import Claim
from ..claim.obligations import RANGED

DIGITS = 20


def assembled(claim: Claim, results: Results, remarks: list[tuple[str | None, bool]]) -> dict[str, Any]:
    """The entry as certificate-format states it; remarks say what limits each requirement."""
    routes = {n: paired(r.gain, r.residual, r.bound) for n, r in results.routes.items()}
    requirements, bands = [], []
    for r, outcome, (remark, _) in zip(claim.requirements, results.requirements, remarks, strict=True):
        entry: dict[str, Any] = {
            "that": r.text, "verdict": outcome.verdict, "value": written(outcome.value), "limited_by": remark
        }  # fmt: skip
        if r.kind in RANGED:
            entry["attained"] = written(outcome.attained, inward=True)
        requirements.append(entry)
        if r.kind == "sensitivity" and not r.over and outcome.value is not None:
            bands.append({"of": r.state, "by": r.by, **(written(outcome.value) or {})})
    stances = {
        name: {"set": certified(x), "metric": x.norm(), "states": by_state(x)} for name, x in results.stances().items()
    }
    return {
        "set": certified(results),
        "route": results.reported,
        **paired(results.gain, results.residual, results.bound),
        "sharp_bound": written(results.sharp),
        "radius": written(results.radius) if results.settled else None,
        "states": by_state(results),
        "routes": routes,
        "metric": results.norm(),
        "sensitivities": bands,
        "gain_intervals": [interval(x) for x in results.intervals],
        "requirements": requirements,
        **({"stances": stances} if stances else {}),
    }


def interval(found: Interval) -> dict[str, Any]:
    """Where every requirement is proved and where one is refuted exactly as tried, the rest rounded inward."""
    outer = [None if x is None else str(decimal_up(x, DIGITS)) for x in found.outer]
    best = found.best and {"value": str(found.best[0]), "gain": str(decimal_up(found.best[1], DIGITS))}
    return {
        "gain": found.gain,
        "inner": inward(found.inner),
        "set": found.set,
        "outer": outer,
        "contracting": inward(found.contracting),
        "best": best,
    }


def inward(ends: tuple[Fraction, Fraction] | None) -> list[str] | None:
    return None if ends is None else [str(decimal_up(ends[0], DIGITS)), str(decimal_down(ends[1], DIGITS))]


def certified(results: Results) -> dict[str, Any] | None:
    """The set; None where none was proved."""
    if not results.settled:
        return None
    centre = {s: written(x) for s, x in results.targets().items()}
    return {"kind": results.kind, "centre": centre, "radius": written(results.radius)}


def by_state(results: Results) -> dict[str, Any]:
    return {s: {n: written(x) for n, x in each.items()} for s, each in results.by_state().items()}


def paired(gain: Span, residual: Span, bound: Span | None) -> dict[str, Any]:
    return {"gain": written(gain), "residual": written(residual), "bound": written(bound)}


def written(span: Span | None, inward: bool = False) -> dict[str, str | None] | None:
    """Ends as decimals, rounded outward (inward for values that are surely taken)."""
    if span is None or (span.lower is None and span.upper is None):
        return None
    down, up = (decimal_up, decimal_down) if inward else (decimal_down, decimal_up)

    def text(x: Fraction | None, rounded: Any) -> str | None:
        return None if x is None else str(rounded(x, DIGITS))

    return {"lower": text(span.lower, down), "upper": text(span.upper, up)}
