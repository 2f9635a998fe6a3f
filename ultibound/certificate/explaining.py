"""What people are told beside the proof: where a quantity is largest, what costs how much, what would do. Estimates."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from math import prod

from ..bounding.evaluate import to_float
from ..checker.results import Results
from ..checker.theorems import OWN
from ..claim.obligations import Domain, Obligations
from ..contraction import enough_radius
from ..contraction.budget import budget, narrowed, told
from ..contraction.samples import ends_of
from .enclosing import Encloser

COARSE = 0.03
QUICKLY, MOST_EXPLAINED = 400, 500  # leaves of an estimate, and cells beyond which nothing is explained


@dataclass(frozen=True)
class Explained:
    """Estimates about one attempt; `moved` is how far held quantities move the target in a step."""

    obligations: Obligations
    ranges: Encloser
    results: Results
    moved: float

    def where(self, name: str) -> str:
        """The point of largest magnitude on the point lines of an obligation, for people."""
        lines = self.ranges.writer.proof.lines.items()
        points = [(n, x) for n, x in lines if (x.rule, x.proves, x.variant) == ("point", name, OWN)]
        if not points:
            return ""
        number = max(points, key=lambda p: max(abs(x) for x in p[1].concludes.values()))[0]
        at = self.ranges.writer.raw[number - 1]["witness"]["at"]
        return ", ".join(
            f"{n} = {x if x.startswith('#') else format(float(Fraction(x)), '.4g')}" for n, x in at.items()
        )

    def costs(self, enough: Callable[[float, float], bool]) -> str:
        """What each uncertain quantity costs of the slope route, for people (nothing proved)."""
        results, o = self.results, self.obligations
        target, radius = results.centre, results.radius.lower
        if target.lower is None or target.upper is None or radius is None:
            return ""
        kind = "region" if results.kind == "region" else "ball"
        slope, miss = o.slope(Domain(kind, radius, (target.lower, target.upper))), o.miss()
        if prod(len(v.cells) for v in slope.variables) > MOST_EXPLAINED:
            return ""

        def estimate(shares: Mapping[str, float]) -> tuple[float, float]:
            found = [self.ranges.search(narrowed(x, shares), True, COARSE, cells=QUICKLY) for x in (slope, miss)]
            k, rest = (max(abs(f.upper), abs(f.lower)) for f in found)
            return k, rest + self.moved

        met = {v.name: v for x in (slope, miss) for v in x.variables if v.name in o.claim.uncertain}
        costs = budget(estimate, sorted(met), enough)
        spans = {n: ends_of(v) for n, v in met.items() if not v.listed}
        return told(costs, *estimate({}), spans)

    def enough(self) -> float | None:
        """An estimate of the radius that would carry a bound, for a region too small (nothing proved)."""
        results = self.results
        if results.residual.upper is None or results.gain.upper is None or self.ranges.interrupted:
            return None
        target = (results.centre.lower or Fraction(0), results.centre.upper or Fraction(0))

        def gain(radius: float) -> float:
            found = self.ranges.search(self.obligations.slope(Domain("ball", Fraction(radius), target)), True, 1e-2)
            return max(abs(found.upper), abs(found.lower))

        return enough_radius(to_float(results.radius.lower or Fraction(0)), gain, to_float(results.residual.upper))
