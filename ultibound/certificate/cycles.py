"""Lines about closed walks of stances in the making: orbits and products (proofs/graph.md (8), (9))."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from contextlib import suppress
from fractions import Fraction
from math import gcd
from typing import Any

from ..checker.cycles import Walk, flowing, held_in, nearby
from ..checker.flows import Flows
from ..checker.graph import Graph
from ..checker.jacobians import Table
from ..checker.numerals import decimal_down
from ..checker.periodic import variables_of
from ..checker.products import traced
from ..checker.reals import Undefined
from ..checker.rules import Rejected
from .graph import GraphWriter, Step
from .lines import DIGITS, IRRATIONAL, downward, growing
from .norms import root_of, spelled

ORBIT_BITS = 128
WIDER = (
    10**13,
    10**11,
    10**9,
    10**8,
    10**7,
    10**5,
)  # shares of a state by which an interval reaches to either side of it
Values = Mapping[str, Fraction]


class CycleWriter(GraphWriter):
    """Lines about all stances together, and about walks that come back to where they start."""

    @property
    def graph(self) -> Graph:
        if self.proof.graph is None:
            raise ValueError("no stances")
        return self.proof.graph

    def flows_on(self, stances: Iterable[str]) -> list[int]:
        """The lines of the flows of stances, where they have one."""
        names = set(stances)
        return [n for n, x in self.proof.lines.items() if x.flows is not None and x.part in names]

    def exactly(self, stances: Iterable[str]) -> bool:
        """Whether exact fractions carry the maps of these stances and their targets without growing."""
        for s in stances:
            d = self.graph.stances[s]
            names = d.names()
            below = {k for x in d.states for y in ("next", "target") for k in d.terms.below(names.of(f"{y}({x})"))}
            if any(d.terms.all[k][0] in IRRATIONAL or growing(d.terms, k) for k in below):
                return False
        return True

    def orbit_around(
        self, stances: Sequence[str], start: Sequence[float], held: Values, steps: Sequence[Values],
        invariant: int, lines: Mapping[Step, int],
    ) -> bool:  # fmt: skip
        """A periodic orbit near a start, errors in the first stance, around a closed walk; whether one is shown.

        Of one state by the interval it leads into itself, of several by the gains of the steps, `lines`."""
        exact = self.exactly(stances)
        if len(self.derivation.states) > 1:
            return self._periodic(stances, start, held, steps, [invariant, *lines.values()], 0 if exact else ORBIT_BITS)
        (e,) = (Fraction(x) for x in start)
        blank = self._around(stances, held, steps, ORBIT_BITS, invariant)
        if blank is None:
            return False
        witness, uses = blank
        (centre,) = Walk(self.graph, witness, self._flows(uses)).centres[stances[0]]
        x = (centre[0] + centre[1]) / 2 + e
        share = max(abs(x), Fraction(1, 10**9))
        tried = [(y, y, 0) for y in dict.fromkeys((x.limit_denominator(10**6), x))] if exact else []
        tried += [(x - share / d, x + share / d, ORBIT_BITS) for d in WIDER]
        low, high = self.graph.stances[stances[0]].region()[1]
        for a, b, bits in tried:
            at = {"bits": bits, "start": [str(max(a, low)), str(min(b, high))]}
            if self._orbit(witness | at, uses):
                return True
        return False

    def _around(
        self, stances: Sequence[str], held: Values, steps: Sequence[Values], bits: int, *uses: int
    ) -> tuple[dict[str, Any], list[int]] | None:
        """The witness of a walk but for its start, and the lines it rests on."""
        witness = {"bits": bits, "stances": list(stances), "held": dict[str, str](), "steps": list[dict[str, str]]()}
        spans = {s: variables_of(self.graph.stances[s]) for s in dict.fromkeys(stances)}
        met = {n: v for several in spans.values() for n, v in several.items()}
        if any(n not in held for n in met if held_in(self.graph, n)):
            return None
        witness["held"] = {n: spelled(v, held[n]) for n, v in met.items() if held_in(self.graph, n)}
        witness["steps"] = [
            {n: spelled(v, w[n]) for n, v in spans[s].items() if not held_in(self.graph, n)}
            for s, w in zip(stances, steps, strict=True)
        ]
        return witness, [*uses, *self.flows_on(stances)]

    def _flows(self, uses: Sequence[int]) -> dict[str, Flows]:
        return flowing([self.proof.lines[n] for n in uses])[1]

    def _orbit(self, witness: dict[str, Any], uses: list[int]) -> bool:
        with suppress(Undefined, Rejected):
            walk = Walk(self.graph, witness, self._flows(uses))
            a, b = (Fraction(x) for x in witness["start"])
            far = walk.farthest(walk.follow([(a, b)]))
            self.append("graph-orbit", "orbit", uses, witness, {k: downward(x) for k, x in far.items()})
            return True
        return False

    def _periodic(
        self, stances: Sequence[str], start: Sequence[float], held: Values, steps: Sequence[Values],
        lines: Sequence[int], bits: int,
    ) -> bool:  # fmt: skip
        n = self.graph.statement.horizon
        times = n // gcd(n, len(stances))
        stances, steps = list(stances) * times, list(steps) * times  # whole horizons
        blank = self._around(stances, held, steps, bits, *lines)
        if blank is None:
            return False
        witness, uses = blank
        states = self.derivation.states
        witness["start"] = {s: str(Fraction(e)) for s, e in zip(states, start, strict=True)}
        with suppress(Undefined, Rejected, ZeroDivisionError):
            walk = Walk(self.graph, witness, self._flows(uses))
            ways = zip(self.graph.walks, lines[1:], strict=True)
            gains = {way: self.proof.lines[line].concludes["gain"] for way, line in ways}
            centre = walk.centres[stances[0]]
            followed = walk.follow(
                [(c[0] + Fraction(e), c[1] + Fraction(e)) for c, e in zip(centre, start, strict=True)]
            )
            sets = self.proof.lines[lines[0]].domains or {}
            far = walk.farthest(followed, nearby(walk, sets, gains, followed, n), n)
            self.append("graph-periodic", "periodic", uses, witness, {x: downward(y) for x, y in far.items()})
            return True
        return False

    def product_around(
        self,
        stances: Sequence[str],
        points: Sequence[Values],
        power: int,
        bits: int,
        on: Sequence[int],
        wanted: Fraction,
    ) -> bool:
        """Jacobians around a closed walk that show a gain of `wanted` or more in any norms; whether they do."""
        uses = [*on, *self.flows_on(stances)]
        tables = {}
        for s in dict.fromkeys(stances):
            domain = next(x.domains[s] if x.domains is not None else x.domain for n in on
                          if (x := self.proof.lines[n]).domains is not None or x.part == s)  # fmt: skip
            if domain is None:
                raise ValueError("no set")
            tables[s] = Table(self.graph.stances[s], "slopes", domain, bits, self._flows(uses).get(s))
        each = [
            {v.name: spelled(v, p[v.name]) for v in tables[s].variables} for s, p in zip(stances, points, strict=True)
        ]
        trace = traced([tables[s].at(at) for s, at in zip(stances, each, strict=True)], power)
        lower = root_of(trace / len(self.derivation.states), power * len(each))
        if not lower >= wanted:
            return False
        held = {n: x for at in each for n, x in at.items() if held_in(self.graph, n)}
        fresh = [{n: x for n, x in at.items() if n not in held} for at in each]
        witness = {"bits": bits, "stances": list(stances), "held": held, "points": fresh, "power": power}
        self.append("graph-product", "slopes", uses, witness, {"lower": decimal_down(lower, DIGITS)})
        return True
