"""What limits a requirement about several states, said to people. Nothing here is proved."""

from __future__ import annotations

from dataclasses import dataclass

from ..checker.jacobians import OF_ROUTE
from ..checker.results import Outcome, Results
from ..checker.theorems import Line, Variant
from ..claim import Claim
from ..claim.constants import constant
from ..claim.model import Requirement
from ..claim.obligations import RANGED, Obligations
from .remarks import ONE_BALL, STOPS
from .runs import told


@dataclass(frozen=True)
class SeveralRemarks:
    """Remarks on the requirements of a claim of several states."""

    claim: Claim
    obligations: Obligations
    results: Results
    limits: dict[str, str]
    interrupted: bool

    def all(self) -> list[tuple[str | None, bool]]:
        """A remark (or none) and whether to pursue, a requirement."""
        return [self.remark(n) for n in range(1, len(self.claim.requirements) + 1)]

    def remark(self, number: int) -> tuple[str | None, bool]:
        r, outcome = self.claim.requirements[number - 1], self.results.requirements[number - 1]
        parts = []
        left = self.obligations.leaves_out(r)
        if left:
            parts.append(f"over leaves out values of {', '.join(left)} that occur")
        elif self.results.derivation.leaves_out(self.results.statement.requirements[number - 1]):
            parts.append("over sets a defined name free: its own expression is not used")
        pursue = False
        if outcome.verdict == "undecided":
            pursue = self.open(r, outcome) and not self.interrupted
            names = (
                [f"require[{number}]"] if r.kind in RANGED else [n for n in self.limits if not n.startswith("require")]
            )
            parts += [f"{n}: {STOPS.get(x, x)}" for n in names if (x := self.limits.get(n, ""))]
            parts.append("interrupted" if self.interrupted else self.why(r))
        lines = self.results.proof.lines
        about = Variant(0, number if r.over else 0)
        growing = {x.proves: x for x in lines.values() if (x.rule, x.variant) == ("product", about)}
        routes = [self.claim.route] if self.claim.route in OF_ROUTE else self.results.contracting()
        asked = {OF_ROUTE[x][0] for x in routes}
        if outcome.verdict == "refuted" and r.kind == "gain" and asked <= set(growing):
            slowest = min((growing[x] for x in asked), key=lambda x: x.concludes["lower"])
            parts.append(f"whatever the norm: {_grows(slowest)}")
        if outcome.verdict == "refuted" and r.kind in ("steps", "radius", "push"):
            parts.append(told(r, [x for x in lines.values() if x.variant == about], self.claim.values))
        return ("; ".join(p for p in parts if p)[:900] or None), pursue

    def why(self, r: Requirement) -> str:
        """The first thing that is missing."""
        found = self.results
        if found.unsupported:
            return f"support[{found.unsupported}], which the stance asks for, is not shown to be above 0"
        gain, residual = found.gain.upper, found.residual.upper
        if not found.settled:
            size = (
                ""
                if gain is None or residual is None
                else (
                    f": in the best norm found the gain is {float(gain):.4g}, the residual {float(residual):.4g}, "
                    f"the largest ball has radius {float(found.radius.lower or 0):.4g}"
                )
            )
            return f"no set that is mapped into itself was found{size}"
        if not found.whole and r.kind not in ("radius", "steps"):
            return "only a smaller ball than the largest in the region is kept; with `shrink = true` it would count"
        if r.kind == "settles":
            return "the bound is not below the radius of the set"
        if r.kind == "steps":
            return "no proved sequence of steps is as short, and no run was found that takes longer"
        if r.kind == "radius" and r.state is None and not (self.claim.metric == "box" or self.claim.weights):
            return "a length in a norm that the claim leaves free says nothing; ask for radius(s), or state weights"
        return "the constant lies beyond what is proved"

    def open(self, r: Requirement, outcome: Outcome) -> bool:
        """Whether what is proved and what is attained leave room for the constant."""
        if r.constant is None or outcome.value is None or r.kind in ("steps", "push"):  # runs are found at any gap
            return False
        low, high = constant(r.constant, self.claim.values)
        least, most = outcome.value.lower, outcome.value.upper
        if least is None or most is None or (r.kind == "radius" and most > least * ONE_BALL):
            return False
        return least <= high and low <= most and least < most


def _grows(line: Line) -> str:
    """What a product of Jacobians shows, in words."""
    at = "somewhere in the region" if line.on_set else "at the target"
    what = "Jacobians" if line.proves == "slopes" else "slopes of the correction told apart"
    return f"{what} {at}, one after the other, grow on average by {float(line.concludes['lower']):.7g} a step"
