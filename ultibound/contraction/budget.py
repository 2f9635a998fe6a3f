"""What each uncertain quantity costs of gain and residual, and what range of it would do: estimates for people."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from fractions import Fraction
from operator import attrgetter

from ..claim.obligations import Obligation, Variable

HALVINGS = 7
NOTABLE = 0.02  # share of a quantity below which a cost is not told
Estimate = Callable[[Mapping[str, float]], tuple[float, float]]  # shares of ranges kept -> gain, residual


@dataclass(frozen=True, slots=True)
class Cost:
    """How much smaller gain and residual are with one quantity at its middle; the share of its range that would do."""

    name: str
    gain: float
    residual: float
    share: float | None  # None: no range of this one alone would do


def budget(estimate: Estimate, names: list[str], enough: Callable[[float, float], bool]) -> list[Cost]:
    """The cost of every quantity, the dearest first."""
    gain, residual = estimate({})
    found = []
    for name in names:
        k, rest = estimate({name: 0.0})
        share = None
        if enough(k, rest):
            low, high = 0.0, 1.0
            for _ in range(HALVINGS):
                middle = (low + high) / 2
                low, high = (middle, high) if enough(*estimate({name: middle})) else (low, middle)
            share = low
        found.append(Cost(name, gain - k, residual - rest, share))
    return sorted(found, key=lambda c: -max(c.gain / max(gain, 1e-300), c.residual / max(residual, 1e-300)))


def narrowed(obligation: Obligation, shares: Mapping[str, float]) -> Obligation:
    """The obligation with some ranges shrunk about their middles; a list keeps its middle value only."""
    return replace(
        obligation, variables=tuple(_narrow(v, shares[v.name]) if v.name in shares else v for v in obligation.variables)
    )


def _narrow(v: Variable, share: float) -> Variable:
    if v.listed:
        return replace(v, cells=v.cells[len(v.cells) // 2 :][:1])
    low, high = v.cells[0][0], v.cells[-1][1]
    middle, half = (low + high) / 2, (high - low) / 2 * Fraction(share)
    cells = [(max(a, middle - half), min(b, middle + half)) for a, b in v.cells]
    kept = tuple(c for c in cells if c[0] < c[1]) or ((middle - half, middle + half),)
    return replace(v, cells=kept, inside=(max(v.inside[0], middle - half), min(v.inside[1], middle + half)))


def told(costs: list[Cost], gain: float, residual: float, spans: Mapping[str, tuple[float, float]]) -> str:
    """One clause for people; "" where nothing is worth telling."""
    parts = []
    for what, size, of in (("gain", gain, attrgetter("gain")), ("residual", residual, attrgetter("residual"))):
        dear = [f"{c.name} {of(c):.3g}" for c in costs if size > 0 and of(c) > NOTABLE * size][:3]
        if dear:
            parts.append(f"of the {what} {size:.3g}, {', '.join(dear)} would be saved at the middle of the range")
    best = next((c for c in costs if c.share is not None and c.share > 0 and c.name in spans), None)
    if best is not None:
        low, high = spans[best.name]
        middle, half = (low + high) / 2, (high - low) / 2 * (best.share or 0.0)
        parts.append(f"{best.name} in [{middle - half:.3g}, {middle + half:.3g}] would do")
    return "; ".join(parts) + (" (estimates)" if parts else "")
