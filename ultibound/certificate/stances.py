"""What limits a requirement about stances that follow one another, said to people. Nothing here is proved."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from ..checker.results import Outcome, Results
from ..checker.theorems import Line, Variant
from ..claim import Claim
from ..claim.constants import constant
from ..claim.model import Requirement
from ..claim.obligations import RANGED, Obligations
from .remarks import ONE_BALL, STOPS
from .runs import told

MOST_NAMED = 6  # stances of a walk


@dataclass(frozen=True)
class StanceRemarks:
    """Remarks on the requirements of a claim of stances."""

    claim: Claim
    obligations: Mapping[str, Obligations]
    results: Results
    limits: Mapping[str, str]
    interrupted: bool

    def all(self) -> list[tuple[str | None, bool]]:
        """A remark (or none) and whether to pursue, a requirement."""
        return [self.remark(n) for n in range(1, len(self.claim.requirements) + 1)]

    def remark(self, number: int) -> tuple[str | None, bool]:
        r, outcome = self.claim.requirements[number - 1], self.results.requirements[number - 1]
        asked = [name for name in self.obligations if r.stance in (None, name)]
        parts = []
        left = sorted({n for name in asked for n in self.obligations[name].leaves_out(r)})
        if left:
            parts.append(f"over leaves out values of {', '.join(left)} that occur")
        elif self.results.leaves_out(self.results.statement.requirements[number - 1]):
            parts.append("over sets a defined name free: its own expression is not used")
        pursue = False
        if outcome.verdict == "undecided":
            pursue = self.open(r, outcome) and not self.interrupted
            own = [f"{name}:require[{number}]" for name in asked]
            names = own if r.kind in RANGED else [n for n in self.limits if ":require" not in n]
            parts += [f"{n}: {STOPS.get(x, x)}" for n in names if (x := self.limits.get(n, ""))]
            parts.append("interrupted" if self.interrupted else self.why(r))
        if outcome.verdict == "refuted":
            parts.append(self.shown(r, asked, Variant(0, number if r.over else 0)))
        return ("; ".join(p for p in parts if p)[:900] or None), pursue

    def shown(self, r: Requirement, asked: list[str], about: Variant) -> str:
        """The orbit, product or run that refutes a requirement, if one does."""
        lines = [x for x in self.results.proof.lines.values() if x.walk and x.variant == about]
        if r.kind in ("steps", "radius", "push"):
            return told(r, lines, self.claim.values, asked)
        if r.kind == "gain":
            words = [x for x in lines if x.rule == "graph-product" and set(x.walk) <= set(asked)]
            best = max(words, key=lambda x: x.concludes["lower"], default=None)
            wanted = None if r.constant is None else constant(r.constant, self.claim.values)[0]
            if best is None or wanted is None or best.concludes["lower"] < wanted:
                return ""
            at = "in the regions" if best.on_set else "at the targets"
            rate = float(best.concludes["lower"])
            return f"whatever the norms: Jacobians {at}, around {_way(best)}, grow on average by {rate:.7g} a step"
        found = [
            (far, key, x)
            for x in lines
            if x.rule in ("graph-orbit", "graph-periodic")
            for key, far in x.concludes.items()
            if key.partition(":")[0] in asked and r.state in (None, key.partition(":")[2])
        ]
        if r.kind not in ("bound", "sharp_bound", "settles") or not found:
            return ""
        far, key, line = max(found, key=lambda x: x[0])
        stance, _, state = key.partition(":")
        return f"an orbit around {_way(line)} takes {state} as far as {float(far):.6g} in {stance}, again and again"

    def why(self, r: Requirement) -> str:
        """The first thing that is missing."""
        found = self.results
        for name, x in found.stances().items():
            if x.unsupported:
                return f"{name}:support[{x.unsupported}], which the stance asks for, is not shown to be above 0"
        if not found.settled:
            gain, residual = found.gain.upper, found.residual.upper
            size = "" if gain is None or residual is None else (
                f": in the best norms found the largest gain of a step is {float(gain):.4g}, "
                f"the largest residual {float(residual):.4g}"
            )  # fmt: skip
            return f"no sets that every step maps into those of the next were found{size}"
        if not found.whole and r.kind not in ("radius", "steps"):
            return "only smaller balls than the largest in the regions are kept; with `shrink = true` they would count"
        if r.kind == "settles":
            return "the bound is not below the radius of the set in every stance"
        if r.kind == "steps":
            if self.claim.horizon > 1:
                return "steps are not counted yet where several are taken together"
            return "no proved sequence of steps is as short, and no run was found that takes longer"
        if r.kind in ("bound", "sharp_bound") and r.state is not None:
            return "the constant lies between what is proved and what orbits were found to reach"
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


def _way(line: Line) -> str:
    """The stances of a closed walk, in words."""
    if len(set(line.walk)) == 1:
        return line.walk[0]
    names = line.walk if len(line.walk) <= MOST_NAMED else (*line.walk[:MOST_NAMED], "…")
    return ", ".join(names)
