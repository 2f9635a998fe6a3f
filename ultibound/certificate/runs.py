"""Lines about runs that are slow to settle, or leave the region, in the making (proofs/orbit.md (3), (4))."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from contextlib import suppress
from fractions import Fraction
from typing import Any

from ..checker.derive import Derivation, Ranged
from ..checker.numerals import decimal_down
from ..checker.periodic import ALONE, variables_of
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from ..checker.runs import Run as Followed
from ..checker.theorems import Line
from ..claim.constants import constant
from ..claim.model import Requirement
from ..contraction.runs import Run
from .lines import DIGITS, FEW_STEPS, IRRATIONAL, Writer, downward, growing, upward
from .norms import spelled

RUN_BITS = 256
FEWER_STEPS = 6  # where fractions grow with products
MOST_NAMED = 6  # stances of a run
Ends = tuple[Fraction, Fraction]


def told(r: Requirement, lines: Iterable[Line], values: Mapping[str, Ends], within: Sequence[str] = (ALONE,)) -> str:
    """The run that refutes what is asked of steps, a radius or a push, in words; nothing where none does."""
    kind, off = {"steps": ("path", "from"), "radius": ("escape", "from"), "push": ("pushed", "push")}[r.kind]
    several = [x for x in lines if x.rule in (kind, f"graph-{kind}") and x.proves == f"{kind}[{r.state}]"]
    several = [x for x in several if not x.walk or x.walk[0] in within]
    if r.kind == "steps" and r.start is not None and r.end is not None:
        start, end = constant(r.start, values)[0], constant(r.end, values)[1]
        several = [x for x in several if x.concludes["from"] <= start and x.concludes["distance"] > end]
    if not several:
        return ""
    near = min(several, key=lambda x: x.concludes[off] if kind != "path" else -x.concludes["steps"])
    size = f"{float(near.concludes[off]):.6g}"
    through = f" through {', '.join(near.walk[:MOST_NAMED])}" + (", …" if len(near.walk) > MOST_NAMED else "")
    way = through if len(set(near.walk)) > 1 else ""
    if kind == "pushed":
        return f"{r.state} of an orbit pushed by {size}, a run{way} leaves the region"
    if kind == "escape":
        return f"a run{way} that starts with {r.state} {size} off its target leaves the region"
    steps, far = near.concludes["steps"], float(near.concludes["distance"])
    after = f"after {steps} step{'s' if steps != 1 else ''}"
    return f"a run{way} that starts with {r.state} {size} off its target is still {far:.6g} off {after}"


def run(w: Writer, kind: str, state: str, found: Run, on: int | None = None, at: int = 0) -> bool:
    """Appends a path, an escape or a push; whether it shows what a search hopes it does. Rounded, or else exactly.

    `on`, `at`: of a push the line of the orbit, and the rank of the state on it."""
    g = w.proof.graph
    stances = {ALONE: w.derivation} if g is None else g.stances
    spans = {s: variables_of(stances[s], True) for s in dict.fromkeys(found.stances)}
    held = {n: v for each in spans.values() for n, v in each.items() if _held(w, n)}
    witness: dict[str, Any] = {
        "start": [str(found.error)],
        "held": {n: _spelled(v, found.held) for n, v in held.items()},
        "steps": [
            {n: _spelled(v, x) for n, v in spans[s].items() if n not in held}
            for s, x in zip(found.stances, found.steps, strict=False)
        ],
    }
    orbit = None if on is None else w.proof.lines[on].orbit
    if orbit is not None:
        witness["at"] = at
        witness["held"] |= {n: x for n, x in orbit.held.items() if n in held}
    if g is not None:
        witness["stances"] = list(found.stances)
    few = min(_fewest(stances[s]) for s in spans)
    for bits in (RUN_BITS, *([0] if len(found.steps) <= few else [])):
        with suppress(Undefined, Rejected):
            _append(w, stances, kind, state, {**witness, "bits": bits}, on)
            return True
    return False


def _append(
    w: Writer, stances: Mapping[str, Derivation], kind: str, state: str, witness: dict[str, Any], on: int | None
) -> None:
    names = witness.get("stances") or [ALONE] * (len(witness["steps"]) + 1)
    lines = {ALONE if w.proof.graph is None else x.part: (n, x.flows) for n, x in w.proof.lines.items() if x.flows}
    uses = [lines[s] for s in dict.fromkeys(names) if s in lines]
    concludes = {"push" if kind == "pushed" else "from": upward(abs(Fraction(witness["start"][0])))}
    if kind == "path":
        followed = Followed(stances, names, {s: flows for s, (_, flows) in lines.items() if flows}, state, witness)
        far = followed.distance(followed.follow()[-1])
        concludes |= {
            "distance": decimal_down(far, DIGITS) if witness["bits"] else downward(far),
            "steps": str(len(witness["steps"])),
        }
    rule = kind if w.proof.graph is None else f"graph-{kind}"
    line = {
        "rule": rule,
        "proves": f"{kind}[{state}]",
        "uses": [*([] if on is None else [on]), *(n for n, _ in uses)],
        "witness": witness,
        "concludes": concludes,
    }
    w.proof.add(line)
    w.raw.append(line)


def _held(w: Writer, name: str) -> bool:
    quantity = w.derivation.statement.uncertain.get(name)
    return quantity is not None and quantity.held


def _spelled(v: Ranged, values: Mapping[str, Fraction]) -> str:
    """A value that a search chose; of what the map does not follow any of its range."""
    return spelled(v, values.get(v.name, sum(v.inside, Fraction(0)) / 2))


def _fewest(d: Derivation) -> int:
    """How many steps exact fractions carry."""
    names = d.names()
    below = {k for s in d.states for x in ("next", "target") for k in d.terms.below(names.of(f"{x}({s})"))}
    if any(d.terms.all[k][0] in IRRATIONAL for k in below):
        return 0
    return FEWER_STEPS if any(growing(d.terms, k) for k in below) else FEW_STEPS
