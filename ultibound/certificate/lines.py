"""Proof lines in the making. The numbers on them are the checker's own: only its word counts."""

from __future__ import annotations

import time
from collections.abc import Mapping, Sequence
from contextlib import suppress
from dataclasses import replace
from fractions import Fraction
from itertools import product
from typing import Any

from ..checker.courses import Course, course_variables, nearest
from ..checker.derive import Derivation, Domain, Meaning
from ..checker.exact import Exact
from ..checker.flows import Flows, trajectory
from ..checker.forms import enclose, walk
from ..checker.graph import seen_from
from ..checker.numerals import decimal_down, decimal_up
from ..checker.ranges import Evaluator
from ..checker.reals import Scaled, Undefined
from ..checker.rules import Line, Proof, Rejected, place
from ..checker.statement import read_statement
from ..checker.terms import Terms
from ..checker.theorems import Variant
from ..claim import Claim

DIGITS = 25
SHORT, EXACT = 40, 400
RATIONAL_CELLS = 64
RATIONAL_TERMS = 400
FEW_STEPS = 50  # of an exact path: its fractions grow with every step
IRRATIONAL = frozenset(
    ["flow", "pi", "exp", "log", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh", "sqrt"]
)


def growing(terms: Terms, k: int) -> bool:
    """Whether exact fractions grow with every step that repeats a term: products, quotients, powers and readings."""
    op, args, _ = terms.all[k]
    factors = [a for a in args if terms.all[a][0] != "number"]
    by = op == "div" and terms.all[args[1]][0] != "number"
    return op in ("power", "reading") or (op == "mul" and len(factors) > 1) or by


class Writer:
    """Lines of one proof, each with the number it got; domains are those the checker derives."""

    part = ""  # the stance, or the step from one to the next, that the lines are about (graph.py)
    _asked: tuple[tuple[Any, ...], tuple[Meaning, Evaluator]] | None = None  # the obligation measured last

    def __init__(self, claim: Claim, derivation: Derivation | None = None) -> None:
        """`derivation`: of a requirement with ranges of its own; else of the claim's text."""
        self.derivation = derivation or Derivation(read_statement(claim.text, claim.settings, claim.data))
        self.proof = Proof(self.derivation)
        self.raw: list[dict[str, Any]] = []
        self.flow: int | None = None  # the line of the stance's flow

    def domain(self, number: int | None) -> Domain | None:
        return None if number is None else seen_from(self.part, self.proof.lines[number]).domain

    def named(self, proves: str) -> str:
        """What a line proves, and of which stance or step."""
        return f"{self.part}:{proves}" if self.part else proves

    def range(self, proves: str, trees: tuple[str, ...], bits: int, on: int | None) -> tuple[Fraction, Fraction]:
        """Ends shown by a splitting tree; raises checker.reals.Undefined where a leaf has none."""
        meaning, evaluator = self._evaluator(proves, bits, on)
        hull, _ = walk(evaluator, list(product(*(v.cells for v in meaning.variables))), list(trees))
        low, high = evaluator.a.ends(hull)
        return low, high

    def leaf_seconds(self, proves: str, bits: int, on: int | None) -> float:
        """How long one leaf takes in the checker's arithmetic: the first cell."""
        meaning, evaluator = self._evaluator(proves, bits, on)
        began = time.monotonic()
        with suppress(Undefined):
            enclose(evaluator, [v.cells[0] for v in meaning.variables], "m")
        return time.monotonic() - began

    def point(self, proves: str, at: Mapping[str, str], bits: int, on: int | None) -> tuple[Fraction, Fraction]:
        meaning, evaluator = self._evaluator(proves, bits, on)
        jet = evaluator.run(place(meaning, at), False, touching=True)
        low, high = evaluator.a.ends(evaluator.wanted(jet))
        return low, high

    def spelled(self, proves: str, point: Mapping[str, Fraction], on: int | None) -> dict[str, str]:
        """A point as a witness: rationals, and ranks in finite lists."""
        at = {}
        for v in self.derivation.meaning(proves, self.domain(on)).variables:
            x = point[v.name] if v.listed else min(max(point[v.name], v.inside[0]), v.inside[1])
            rank = next((k for k, c in enumerate(v.cells) if c[0] <= x <= c[1]), 0)
            at[v.name] = f"#{rank}" if v.listed else str(x)
        return at

    def rational(self, proves: str, on: int | None) -> bool:
        """Whether exact rational arithmetic can carry the obligation, and is worth it."""
        meaning = self.derivation.meaning(proves, self.domain(on))
        terms = self.derivation.terms
        below = terms.below(meaning.root)
        cells = 1
        for v in meaning.variables:
            cells *= len(v.cells)
        return (
            cells <= RATIONAL_CELLS
            and len(below) <= RATIONAL_TERMS
            and not any(terms.all[k][0] in IRRATIONAL for k in below)
            and not (self.derivation.statement.horizon > 1 and any(growing(terms, k) for k in below))
        )

    def enclosed(
        self, rule: str, proves: str, witness: dict[str, Any], ends: tuple[Fraction, Fraction], on: int | None
    ) -> int:
        """Appends a range or point line whose ends were measured; returns its number."""
        limit = SHORT if witness["bits"] else EXACT  # what was measured without rounding stays so
        low, high = _down(ends[0], limit), _up(ends[1], limit)
        uses = [] if on is None else [on]
        concludes = {"lower": low[0], "upper": high[0]}
        meaning = self.derivation.meaning(proves, self.domain(on))
        uses = uses + self._flow(meaning.root)
        line = {"rule": rule, "proves": self.named(proves), "uses": uses, "witness": witness, "concludes": concludes}
        self.raw.append(line)
        number = len(self.raw)
        claimed = {"lower": low[1], "upper": high[1]}
        self.proof.lines[number] = Line(
            rule, proves, tuple(uses), claimed, self.domain(on), meaning.on_set, part=self.part
        )
        return number

    def squares(self, proves: str, on: int, witness: dict[str, Any], ends: Mapping[str, Fraction]) -> int:
        """Appends a line of squares whose ends were measured piece by piece; returns its number."""
        limit = SHORT if witness["bits"] else EXACT
        concludes = {n: (_down if n == "lower" else _up)(x, limit)[0] for n, x in ends.items()}
        meaning = self.derivation.meaning(proves, self.domain(on))
        uses = [on, *self._flow(meaning.root)]
        line = {
            "rule": "squares",
            "proves": self.named(proves),
            "uses": uses,
            "witness": witness,
            "concludes": concludes,
        }
        self.raw.append(line)
        claimed = {n: Fraction(x) for n, x in concludes.items()}
        self.proof.lines[len(self.raw)] = Line(
            "squares", proves, tuple(uses), claimed, self.domain(on), meaning.on_set, part=self.part
        )
        return len(self.raw)

    def flows_of(self, witness: dict[str, Any]) -> Flows:
        """What trial polynomials prove of the flow of the stance; raises checker.rules.Rejected."""
        d = self.derivation
        if d.motion is None:
            raise Rejected("no dynamics")
        return trajectory(d.terms, d.motion, d.statement.libraries, witness, None)

    def trajectory(self, witness: dict[str, Any], flows: Flows) -> None:
        """Appends the flow of the stance, with the error that was proved."""
        concludes = {"error": upward(flows.error)}
        proves = self.named("flow")
        self.raw.append(
            {"rule": "trajectory", "proves": proves, "uses": [], "witness": witness, "concludes": concludes}
        )
        self.flow = len(self.raw)
        claimed = {"error": Fraction(concludes["error"])}
        self.proof.lines[self.flow] = Line("trajectory", "flow", (), claimed, flows=flows, part=self.part)

    def _flow(self, root: int | None) -> list[int]:
        """The line of the flow, where a term (or a course) rests on it."""
        terms = self.derivation.terms
        met = root is None or any(terms.all[k][0] == "flow" for k in terms.below(root))
        return [self.flow] if met and self.flow is not None else []

    def flows(self) -> Flows | None:
        return None if self.flow is None else self.proof.lines[self.flow].flows

    def theorem(self, rule: str, proves: str, uses: list[int], concludes: dict[str, str]) -> int:
        """Appends a theorem's line; raises checker.rules.Rejected where its hypotheses do not hold."""
        line = {"rule": rule, "proves": proves, "uses": uses, "witness": {}, "concludes": concludes}
        self.proof.add(line)
        self.raw.append(line)
        return len(self.raw)

    def largest_ball(self, target: int, radius: Fraction) -> int:
        """Appends the ball about the target, the largest in the region as far as points of the target show that."""
        (low, high), proves = self.derivation.region()[0], self.proof.lines[target].proves
        points = {n: x.concludes for n, x in self.proof.lines.items() if (x.rule, x.proves) == ("point", proves)}
        edges = {n: min(high - c["lower"], c["upper"] - low) for n, c in points.items()}
        if not edges:
            return self.theorem("smaller-ball", "ball", [target], {"radius": downward(radius)})
        nearest = min(edges, key=lambda n: edges[n])
        concludes = {"radius": downward(radius), "outer": upward(edges[nearest])}
        return self.theorem("largest-ball", "ball", [target, nearest], concludes)

    def shells(self, radii: tuple[Fraction, ...], slope: Fraction, on: int) -> int:
        """Appends the line that cuts the set into shells."""
        witness = {"radii": [str(r) for r in radii], "slope": str(slope)}
        line = {"rule": "shells", "proves": "shells", "uses": [on], "witness": witness, "concludes": {}}
        self.proof.add(line)
        self.raw.append(line)
        return len(self.raw)

    def orbit(
        self,
        start: tuple[Fraction, Fraction],
        held: Mapping[str, Fraction],
        steps: Sequence[Mapping[str, Fraction]],
        on: int,
    ) -> bool:
        """Appends a periodic orbit near a start, if an interval about it brackets one."""
        x = start[0]
        share = max(abs(x), Fraction(1, 10**9))
        brackets = [(y, y, 0) for y in dict.fromkeys((x.limit_denominator(10**6), x))]
        brackets += [(x - share / d, x + share / d, 128) for d in (10**13, 10**11, 10**9)]
        low, high = self.derivation.region()[1]
        for a, b, bits in brackets:
            witness = {"bits": bits, "start": [str(max(a, low)), str(min(b, high))]}
            if self._course("orbit", witness, held, steps, on):
                return True
        return False

    def path(
        self, start: Fraction, held: Mapping[str, Fraction], steps: Sequence[Mapping[str, Fraction]], on: int
    ) -> bool:
        """Appends a trajectory from a start, without rounding where that can be."""
        each = (0, 256) if len(steps) <= FEW_STEPS else (256,)
        witness = {"start": [str(start)]}
        return any(self._course("path", {"bits": bits, **witness}, held, steps, on) for bits in each)

    def _course(
        self,
        rule: str,
        witness: dict[str, Any],
        held: Mapping[str, Fraction],
        steps: Sequence[Mapping[str, Fraction]],
        on: int,
    ) -> bool:
        """Measures what the checker will see of a course and appends the line, if it holds."""
        d = self.derivation
        spans = course_variables(d)

        def spelled(values: Mapping[str, Fraction]) -> dict[str, str]:
            found = {}
            for n, x in values.items():
                if n in spans and spans[n].listed:
                    ranks = [k for k, c in enumerate(spans[n].cells) if c[0] <= x <= c[1]]
                    found[n] = f"#{ranks[0] if ranks else 0}"
                elif n in spans:
                    found[n] = str(min(max(x, spans[n].inside[0]), spans[n].inside[1]))
            return found

        witness |= {"held": spelled(held), "steps": [spelled(w) for w in steps]}
        try:
            course = Course(d, witness, self.flows())
            texts = [Fraction(t) for t in witness["start"]]
            states = course.follow((texts[0], texts[-1]))
            if rule == "orbit":
                concludes = {
                    "distance": downward(max(nearest(e) for e in course.errors(states[:-1]))),
                    "highest": downward(max(x[0] for x in states[:-1])),
                    "lowest": upward(min(x[1] for x in states[:-1])),
                }
            else:
                first, last = course.errors([states[0], states[-1]])
                far = upward(max(-first[0], first[1]))
                concludes = {"distance": downward(nearest(last)), "from": far, "steps": str(len(steps))}
            line = {
                "rule": rule,
                "proves": rule,
                "uses": [on, *self._flow(None)],
                "witness": witness,
                "concludes": concludes,
            }
            self.proof.add(line)
        except (Rejected, Undefined):
            return False
        self.raw.append(line)
        return True

    def pruned(self, needed: set[int]) -> list[dict[str, Any]]:
        """The lines that later lines or results rest on, numbered anew."""
        kept = self._kept(needed)
        number = {old: new for new, old in enumerate(kept, 1)}
        return [{**self.raw[n - 1], "uses": [number[u] for u in self.raw[n - 1]["uses"]]} for n in kept]

    def piece(self, number: int, gain: str, lower: Fraction, upper: Fraction) -> None:
        """Appends the line that says which gains a piece holds."""
        witness = {"gain": gain, "lower": str(lower), "upper": str(upper)}
        line = {"rule": "gains", "proves": f"gains[{number}]", "uses": [], "witness": witness, "concludes": {}}
        self.proof.add(line)
        self.raw.append(line)

    def adopt(self, other: Writer, variant: Variant, needed: set[int]) -> None:
        """Appends what a piece of gains, or a requirement with ranges of its own, rests on, from its own proof."""
        number: dict[int, int] = {}
        prefix = (f"gains[{variant.piece}]:" if variant.piece else "") + (
            f"over[{variant.over}]:" if variant.over else ""
        )

        def within(own: Variant) -> Variant:
            return Variant(variant.piece or own.piece, variant.over or own.over)

        for old in other._kept(needed):
            raw, line = other.raw[old - 1], other.proof.lines[old]
            uses = [number[u] for u in raw["uses"]]
            self.raw.append({**raw, "proves": prefix + raw["proves"], "uses": uses})
            number[old] = len(self.raw)
            self.proof.lines[len(self.raw)] = replace(line, variant=within(line.variant), uses=tuple(uses))
        self.proof.variants[variant] = other.derivation
        self.proof.variants |= {within(v): d for v, d in other.proof.variants.items()}

    def _kept(self, needed: set[int]) -> list[int]:
        waiting, kept = list(needed), set(needed)
        while waiting:
            fresh = set(self.raw[waiting.pop() - 1]["uses"]) - kept
            kept |= fresh
            waiting += fresh
        return sorted(kept)

    def _evaluator(self, proves: str, bits: int, on: int | None) -> tuple[Meaning, Evaluator]:
        key = proves, bits, self.domain(on), self.flow
        if self._asked is None or self._asked[0] != key:
            meaning = self.derivation.meaning(proves, self.domain(on))
            names = [v.name for v in meaning.variables]
            arithmetic = Scaled(bits) if bits else Exact()
            libraries = self.derivation.statement.libraries
            terms, flows = self.derivation.terms, self.flows()
            evaluator = Evaluator(terms, meaning.root, meaning.by, names, libraries, arithmetic, flows)
            self._asked = key, (meaning, evaluator)
        return self._asked[1]


def _down(q: Fraction, limit: int = EXACT) -> tuple[str, Fraction]:
    return _short(q, limit) or _read(decimal_down(q, DIGITS))


def _up(q: Fraction, limit: int = EXACT) -> tuple[str, Fraction]:
    return _short(q, limit) or _read(decimal_up(q, DIGITS))


def upward(q: Fraction) -> str:
    """A rational no smaller, short to write."""
    return _up(q)[0]


def downward(q: Fraction) -> str:
    return _down(q)[0]


def _short(q: Fraction, limit: int) -> tuple[str, Fraction] | None:
    if q.numerator.bit_length() + q.denominator.bit_length() > 4 * limit:
        return None
    text = str(q)
    return (text, q) if len(text) <= limit else None


def _read(text: str) -> tuple[str, Fraction]:
    return text, Fraction(text)
