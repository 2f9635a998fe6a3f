"""The `results` entry: what the checker derives from the lines, rounded outward to decimals."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from ..checker.numerals import decimal_down, decimal_up
from ..checker.results import Results, Span
from ..claim import Claim

DIGITS = 20


def assembled(claim: Claim, results: Results, remarks: list[tuple[str | None, bool]]) -> dict[str, Any]:
    """The entry as certificate-format states it; remarks say what limits each requirement."""
    s = results.state
    radius = written(results.radius) if results.settled else None
    bound = written(results.bound)
    pair = {"gain": written(results.gain), "residual": written(results.residual), "bound": bound}
    inside = {"kind": results.kind, "centre": {s: written(results.centre)}, "radius": radius}
    requirements, bands = [], []
    for r, outcome, (remark, _) in zip(claim.requirements, results.requirements, remarks, strict=True):
        entry: dict[str, Any] = {
            "that": r.text, "verdict": outcome.verdict, "value": written(outcome.value), "limited_by": remark
        }  # fmt: skip
        if r.kind in ("value", "sensitivity"):
            entry["attained"] = written(outcome.attained, inward=True)
        requirements.append(entry)
        if r.kind == "sensitivity" and not r.over and outcome.value is not None:
            bands.append({"of": r.state, "by": r.by, **(written(outcome.value) or {})})
    return {
        "set": inside if results.settled else None,
        "route": "slope",
        **pair,
        "sharp_bound": None,
        "radius": radius,
        "states": {s: {"bound": bound, "sharp_bound": None, "radius": radius, "push": None}},
        "routes": {"slope": pair},
        "metric": {"kind": "box", "weights": {s: "1"}},
        "sensitivities": bands,
        "gain_intervals": [],
        "requirements": requirements,
    }


def written(span: Span | None, inward: bool = False) -> dict[str, str | None] | None:
    """Ends as decimals, rounded outward (inward for values that are surely taken)."""
    if span is None or (span.lower is None and span.upper is None):
        return None
    down, up = (decimal_up, decimal_down) if inward else (decimal_down, decimal_up)

    def text(x: Fraction | None, rounded: Any) -> str | None:
        return None if x is None else str(rounded(x, DIGITS))

    return {"lower": text(span.lower, down), "upper": text(span.upper, up)}
