"""Intervals of a gain: pieces where all is proved, gains that break a requirement (proofs/sensitivity-gain.md)."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import product
from typing import TYPE_CHECKING, Any

from .calculus import Unprovable
from .derive import Derivation
from .grammar import Expression, Node
from .model import Quantity, Range, Statement
from .numerals import Rejected, quantity
from .theorems import Line, Piece, Quantities, Variant, ends, require

if TYPE_CHECKING:
    from .results import Results
    from .rules import Proof

Ends = tuple[Fraction, Fraction]
SETS = (None, "region", "ball", "smaller ball")  # each says less of single gains than the one before


@dataclass(frozen=True)
class Interval:
    """Of a gain: where every requirement is proved, the nearest gains that break one, and where it contracts.

    `set`: what kind of set `inner` is about: the region, or for some of its pieces a ball.
    """

    gain: str
    inner: Ends | None
    set: str | None
    outer: tuple[Fraction | None, Fraction | None]
    contracting: Ends | None
    best: Ends | None  # a gain, and the k it has


def stated(d: Derivation, lines: dict[int, Line], proves: str, used: list[Line], witness: dict[str, Any]) -> Piece:
    """A piece of gains: its name and its two ends."""
    gain, low, high = witness["gain"], quantity(witness["lower"], "lower"), quantity(witness["upper"], "upper")
    if used or not re.fullmatch(r"gains\[[1-9][0-9]{0,3}\]", proves):
        raise Rejected("a piece of gains is numbered, and rests on no other line")
    if any((x.rule, x.proves) == ("gains", proves) for x in lines.values()):
        raise Rejected(f"{proves} stands twice")
    if not isinstance(gain, str) or gain not in d.statement.gains:
        raise Rejected("gain: one of the claim's gains")
    if not low <= high:
        raise Rejected("a piece's lower end is above its upper end")
    return Piece(gain, low, high)


def narrowed(d: Derivation, piece: Piece) -> Statement:
    """The claim with a gain that is not known but for lying in a piece, the same at every step. Raises Unprovable."""
    s = d.statement
    if any(piece.gain in names for r in s.requirements for names in d.folded(r)):
        raise Unprovable(f"{piece.gain} also sets an exponent, the end of a range, a weight or a bound asked for")
    low, high = (Expression(str(x), (Node("number", value=x),)) for x in (piece.lower, piece.upper))
    unknown = Quantity(piece.gain, Range(low, high), None, "", True, None, False)
    gains = {n: e for n, e in s.gains.items() if n != piece.gain}
    return replace(s, gains=gains, uncertain={**s.uncertain, piece.gain: unknown})


def sensitivity_gain(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> None:
    """proofs/sensitivity-gain.md (2): the gains that contract, and a gain with its k, from the band of −c m."""
    found = re.fullmatch(r"sensitivity-gain\[(.+)\]", proves)
    kappa = d.statement.uncertain.get(found[1]) if found else None
    if kappa is None or not kappa.held or kappa.range is None or kappa.change is not None:
        raise Rejected("sensitivity-gain is about one gain, the same at every step")
    s = d.state
    names = [f"sector-sensitivity[{s}]", f"sector-factor[{s},{kappa.name}]", f"sector-start[{s}]"]
    lasting = [f"support[{k}]" for k in range(1, len(d.motion.positive) + 1)] if d.motion is not None else []
    require(proves, proves, used, [("range", x) for x in [*names, *lasting]])
    sensitivity, factor, start, *supports = used
    if any(x.domain != sensitivity.domain for x in (factor, *supports)):
        raise Rejected("the lines used refer to different sets")
    if not all(x.concludes["lower"] > 0 for x in supports):
        raise Rejected("the stance is not shown to last")
    if ends(start) != (Fraction(0), Fraction(0)):
        raise Rejected("the correction is not shown to be 0 at the target")
    _, (low, high) = d.range(kappa)
    least, most = products(sensitivity, factor)
    if not (low >= 0 and least > 0):
        raise Rejected("the gain, or the product of sensitivity and factor, is not shown to be above 0")
    if not (low <= claimed["lower"] < claimed["upper"] <= high and claimed["upper"] <= 2 / most):
        raise Rejected("lower, upper: more gains than are shown to contract")
    if not low <= claimed["best"] <= high:
        raise Rejected("best: outside the piece")
    if not claimed["gain"] >= max(abs(1 - claimed["best"] * x) for x in (least, most)):
        raise Rejected("gain: less than what the lines used show")


def products(sensitivity: Line, factor: Line) -> Ends:
    """Ends between which −c m lies."""
    found = [-c * m for c, m in product(ends(sensitivity), ends(factor))]
    return min(found), max(found)


def intervals(proof: Proof, of: Callable[[Variant], Results], needed: set[int]) -> list[Interval]:
    """What the pieces on a proof amount to, a gain after the other: proofs/sensitivity-gain.md (1), (3)."""
    pieces: dict[str, list[tuple[int, Variant, Piece]]] = {}
    for n, line in proof.lines.items():
        if line.piece is not None:
            pieces.setdefault(line.piece.gain, []).append((n, Variant(int(line.proves[6:-1])), line.piece))
    return [of_gain(gain, each, proof, of, needed) for gain, each in pieces.items()]


def of_gain(
    gain: str,
    pieces: list[tuple[int, Variant, Piece]],
    proof: Proof,
    of: Callable[[Variant], Results],
    needed: set[int],
) -> Interval:
    proved: list[Ends] = []
    kinds: set[str | None] = set()
    broken: dict[Fraction, tuple[str | None, set[int]]] = {}
    contracting: Line | None = None
    for number, variant, piece in pieces:
        wanted = "sensitivity-gain", f"sensitivity-gain[{gain}]", variant
        lines = [n for n, x in proof.lines.items() if (x.rule, x.proves, x.variant) == wanted]
        if lines:
            if contracting is not None or len(lines) > 1:
                raise Rejected(f"sensitivity-gain[{gain}] is proved more than once")
            contracting = proof.lines[lines[0]]
            needed.update((number, *lines))
            continue
        results = of(variant)
        verdicts = {x.verdict for x in results.requirements}
        if verdicts == {"proved"}:
            proved.append((piece.lower, piece.upper))
            kinds.add(results.kind)
            needed.update((number, *results.needed))
        elif "refuted" in verdicts and piece.lower == piece.upper:
            broken[piece.lower] = results.kind, {number, *results.needed}
        else:
            raise Rejected(f"gains[{variant.piece}]: neither is every requirement proved nor a single gain refuted")
    inner = joined(gain, proved)
    kind = max(kinds, key=SETS.index, default=None)
    # what fails on all of a region says nothing of a ball in it: proofs/sensitivity-gain.md (3)
    alike = {x: lines for x, (on, lines) in broken.items() if kind in SETS[:2] or on != "region"}
    outer = around(inner, alike, needed)
    found = None if contracting is None else contracting.concludes
    return Interval(
        gain,
        inner,
        kind,
        outer,
        None if found is None else (found["lower"], found["upper"]),
        None if found is None else (found["best"], found["gain"]),
    )


def joined(gain: str, proved: list[Ends]) -> Ends | None:
    """The union of pieces that touch."""
    if not proved:
        return None
    (low, reach), *others = sorted(proved)
    for lower, upper in others:
        if not lower <= reach:
            raise Rejected(f"the pieces of {gain} leave a gap")
        reach = max(reach, upper)
    return low, reach


def around(
    inner: Ends | None, broken: dict[Fraction, set[int]], needed: set[int]
) -> tuple[Fraction | None, Fraction | None]:
    """The nearest gains on either side at which a requirement is refuted."""
    if inner is None:
        return None, None
    if any(inner[0] <= x <= inner[1] for x in broken):
        raise Rejected("a gain is both proved and refuted")
    lower = max((x for x in broken if x < inner[0]), default=None)
    upper = min((x for x in broken if x > inner[1]), default=None)
    for x in (lower, upper):
        needed.update(broken[x] if x is not None else ())
    return lower, upper
