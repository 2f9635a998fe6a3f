"""The lines of a proof, one by one: what each must rest on, and what follows (proofs/obligations.md)."""

from __future__ import annotations

import re
from dataclasses import dataclass, field, replace
from fractions import Fraction
from itertools import product
from typing import Any

from .attracting import attracting, kept
from .calculus import Unprovable
from .courses import arithmetic, orbit, path, place
from .cycles import around
from .derive import Derivation, varied
from .flows import trajectory
from .forms import walk
from .gains import narrowed, sensitivity_gain, stated
from .graph import Graph, graph_of, of_part, of_ranges, seen_from, stepping
from .jacobians import inside
from .model import Statement
from .numerals import Rejected, quantity
from .ranges import Evaluator
from .reals import Undefined
from .runs import running, walking
from .several import concluded
from .squares import squares
from .theorems import THEOREMS, Line, Piece, Variant, parted, shells

__all__ = ["Line", "Proof", "Rejected", "place", "quantity"]

SHAPES: dict[str, tuple[tuple[str, ...], tuple[str, ...] | None]] = {
    "range": (("bits", "trees"), ("lower", "upper")),
    "point": (("at", "bits"), ("lower", "upper")),
    "largest-ball": ((), ("outer", "radius")),
    "smaller-ball": ((), ("radius",)),
    "invariant-region": ((), ()),
    "invariant-ball": ((), ()),
    "course": ((), ()),
    "slope": ((), ("gain", "residual")),
    "split": ((), ("gain", "residual")),
    "sector": ((), ("gain", "residual")),
    "shells": (("radii", "slope"), ()),
    "trajectory": (("bits", "cells", "cuts", "degrees", "pieces"), ("error",)),
    "curve": ((), ("gain", "residual", "sharp")),
    "orbit": (("bits", "held", "start", "steps"), ("distance", "highest", "lowest")),
    "path": (("bits", "held", "start", "steps"), ("distance", "from", "steps")),
    "escape": (("bits", "held", "start", "steps"), ("from",)),
    "pushed": (("at", "bits", "held", "start", "steps"), ("push",)),
    "ultimate-bound": ((), ("bound",)),
    "metric": (("inverse", "kind", "rows"), ()),
    "matrix": (("bits", "scales", "trees"), ("norm",)),
    "entries": (("beside", "bits", "inverse", "rows", "trees"), None),  # two an entry
    "stretch": (("at", "bits", "direction"), ("lower",)),
    "componentwise": (("about", "b", "p"), None),  # one a state
    "invariant-rows": ((), ()),
    "invariant-vertices": (("bits", "trees"), ("bound",)),
    "absorbed": ((), None),  # one a state
    "attracting": (("bits", "high", "low", "rows", "trees"), None),  # one a state
    "periodic": (("bits", "held", "start", "steps"), None),  # one a state
    "graph-regions": ((), ()),
    "graph-balls": ((), ()),
    "graph-bound": (("b", "p"), None),  # one a stance
    "graph-entries": (("after", "before", "bits", "trees"), None),  # one an entry
    "graph-componentwise": (("b", "p"), None),  # one a state of each stance
    "graph-orbit": (("bits", "held", "stances", "start", "steps"), None),  # one a stance on the way
    "graph-periodic": (("bits", "held", "stances", "start", "steps"), None),  # one a state of each stance on the way
    "graph-path": (("bits", "held", "stances", "start", "steps"), ("distance", "from", "steps")),
    "graph-escape": (("bits", "held", "stances", "start", "steps"), ("from",)),
    "graph-pushed": (("at", "bits", "held", "stances", "start", "steps"), ("push",)),
    "graph-product": (("bits", "held", "points", "power", "stances"), ("lower",)),
    "product": (("bits", "points", "power"), ("lower",)),
    "gains": (("gain", "lower", "upper"), ()),
    "sensitivity-gain": ((), ("best", "gain", "lower", "upper")),
    "squares": (("bits", "order", "pieces", "trees"), None),  # lower, upper, or both
}
NUMBER = r"\[([1-9][0-9]{0,3})\]:"
NAMED = re.compile(
    rf"(?:gains{NUMBER})?(?:over{NUMBER})?(?:([A-Za-z]\w*(?:>[A-Za-z]\w*)*):)?(.*)", re.ASCII | re.DOTALL
)


def proof_of(statement: Statement) -> Proof:
    """A proof of a claim, without lines yet. Raises Unprovable."""
    graph = graph_of(statement)
    return Proof(Derivation(statement)) if graph is None else Proof(graph.first, graph=graph)


@dataclass
class Proof:
    """Lines that hold so far, by number from 1."""

    derivation: Derivation
    lines: dict[int, Line] = field(default_factory=dict)
    leaves: int = 0
    variants: dict[Variant, Derivation] = field(default_factory=dict)
    graph: Graph | None = None  # of named stances
    graphs: dict[Variant, Graph] = field(default_factory=dict)  # and over the ranges of one requirement

    @property
    def statement(self) -> Statement:
        """The claim."""
        return self.derivation.statement if self.graph is None else self.graph.statement

    def about(self, variant: Variant, part: str = "") -> Derivation:
        """What the claim asks, or what it asks over a piece of gains or the ranges of one requirement, or of a stance
        or a step."""
        if self.graph is not None or part:
            return of_part(self.stanced(variant), part)
        if variant and variant not in self.variants:
            if variant.over:
                statement = varied(self.about(Variant(variant.piece)).statement, variant.over)
            else:
                statement = narrowed(self.derivation, self.piece(variant.piece))
            self.variants[variant] = Derivation(statement)
        return self.variants[variant] if variant else self.derivation

    def stanced(self, variant: Variant) -> Graph | None:
        """The stances of the claim, or of what it asks over the ranges of one requirement."""
        if self.graph is None or not variant:
            return self.graph
        if variant.piece:
            raise Unprovable("pieces of gains are not known between stances")
        if variant not in self.graphs:
            self.graphs[variant] = Graph(of_ranges(self.statement, variant.over))
        return self.graphs[variant]

    def piece(self, number: int) -> Piece:
        for line in self.lines.values():
            if line.piece is not None and line.proves == f"gains[{number}]":
                return line.piece
        raise Rejected(f"gains[{number}]: no line says which gains these are")

    def add(self, raw: Any) -> None:
        number = len(self.lines) + 1
        if not isinstance(raw, dict) or set(raw) != {"rule", "proves", "uses", "witness", "concludes"}:
            raise Rejected("a line has exactly rule, proves, uses, witness and concludes")
        rule, proves, uses = raw["rule"], raw["proves"], raw["uses"]
        if not isinstance(rule, str) or rule not in SHAPES or not isinstance(proves, str):
            raise Rejected(f"unknown rule {rule!r}"[:80])
        if not isinstance(uses, list) or any(type(n) is not int or not 0 < n < number for n in uses):
            raise Rejected("uses: earlier line numbers only")
        for part, keys in zip(("witness", "concludes"), SHAPES[rule], strict=True):
            if not isinstance(raw[part], dict) or (keys is not None and set(raw[part]) != set(keys)):
                raise Rejected(f"{part}: the keys of {rule} are {', '.join(keys or ()) or 'none'}")
        claimed = {key: quantity(text, f"concludes.{key}") for key, text in raw["concludes"].items()}
        used = [self.lines[n] for n in uses]
        witness = raw["witness"]
        prefix = NAMED.fullmatch(proves)
        variant = Variant(int(prefix[1] or 0), int(prefix[2] or 0)) if prefix else Variant()
        part, proves = (prefix[3] or "", prefix[4]) if prefix else ("", proves)
        used = [seen_from(part, line) for line in used]
        if any(line.variant != variant for line in used):
            raise Rejected("uses: lines about other ranges")
        try:
            d, g = self.about(variant, part), self.stanced(variant)
            if g is not None and (
                one := around(g, part, rule, proves, used, witness, claimed)
                or walking(g, part, rule, proves, used, witness, claimed)
                or stepping(g, part, rule, proves, used, witness, claimed)
            ):
                line = replace(one, uses=tuple(uses))
                self.leaves += one.leaves
            elif rule == "gains":
                if variant:
                    raise Rejected("a piece of gains is one of the claim itself")
                line = Line(rule, proves, (), claimed, piece=stated(d, self.lines, proves, used, witness))
            elif rule == "sensitivity-gain":
                sensitivity_gain(d, proves, used, claimed)
                line = Line(rule, proves, tuple(uses), claimed)
            elif rule == "trajectory":
                if proves != "flow" or used or d.motion is None:
                    raise Rejected("a flow rests on no other line, and on dynamics")
                flows = trajectory(d.terms, d.motion, d.statement.libraries, witness, claimed["error"])
                line = Line(rule, proves, (), claimed, flows=flows)
            elif self.graph is None and rule == "attracting":
                line = replace(attracting(d, proves, used, witness, claimed), uses=tuple(uses))
                self.leaves += line.leaves
            elif self.graph is None and (run := running(d, rule, proves, used, witness, claimed)) is not None:
                line = replace(run, uses=tuple(uses))
            elif self.graph is None and rule == "invariant-vertices":
                line = replace(kept(d, proves, used, witness, claimed), uses=tuple(uses))
                self.leaves += line.leaves
            elif self.graph is None and (about := concluded(d, rule, proves, used, witness, claimed)) is not None:
                line = replace(about, uses=tuple(uses))
                self.leaves += about.leaves
            elif rule in ("range", "point", "squares"):
                line = self.enclosed(d, rule, proves, tuple(uses), used, witness, claimed)
            elif rule == "shells":
                if not isinstance(witness["radii"], list):
                    raise Rejected("radii: a list of numbers")
                radii = tuple(quantity(r, "radii") for r in witness["radii"][:1000])
                domain = shells(d, proves, used, radii, quantity(witness["slope"], "slope"))
                line = Line(rule, proves, tuple(uses), claimed, domain)
            elif rule in ("orbit", "path"):
                course = orbit if rule == "orbit" else path
                line = Line(rule, proves, tuple(uses), claimed, course(d, proves, used, witness, claimed))
            elif rule not in THEOREMS:
                raise Rejected(f"{rule}: known between named stances only")
            else:
                proved = THEOREMS[rule](d, proves, used, claimed)
                line = Line(rule, proves, tuple(uses), claimed, proved)
        except (Undefined, Unprovable) as why:
            raise Rejected(str(why)) from None
        self.lines[number] = replace(line, variant=variant, part=part)

    def enclosed(
        self,
        d: Derivation,
        rule: str,
        proves: str,
        uses: tuple[int, ...],
        used: list[Line],
        witness: dict[str, Any],
        claimed: dict[str, Fraction],
    ) -> Line:
        """Rules range, point and squares: what this checker finds must lie within what is concluded."""
        domain, (used, flows) = None, parted(used)
        if used:
            if len(used) != 1 or used[0].domain is None:
                raise Rejected("uses: the one line that gives the set")
            domain = used[0].domain
        meaning = d.meaning(proves, domain)
        if used and proves.startswith(("target", "image", "sector-start")):
            raise Rejected("uses: this obligation rests on no set")
        if rule == "squares":
            if not proves.startswith("require["):
                raise Rejected("squares: of requirements only")
            found, pieces = squares(d, meaning, witness, tuple(claimed), flows)
            self.leaves += pieces
            if not all(x <= found[n] if n == "lower" else found[n] <= x for n, x in claimed.items()):
                raise Rejected(f"{proves}: the squares show less than what is concluded")
            return Line(rule, proves, uses, claimed, domain, meaning.on_set)
        precision = arithmetic(witness["bits"])
        names = [v.name for v in meaning.variables]
        evaluator = Evaluator(d.terms, meaning.root, meaning.by, names, d.statement.libraries, precision, flows)
        if rule == "range":
            trees = witness["trees"]
            if not isinstance(trees, list) or not all(isinstance(t, str) for t in trees):
                raise Rejected("trees: a list of texts")
            hull, leaves = walk(evaluator, list(product(*(v.cells for v in meaning.variables))), trees)
            self.leaves += leaves
        else:
            box = place(meaning, witness["at"])
            inside(d, domain, dict(zip(names, box, strict=True)))
            hull = evaluator.wanted(evaluator.run(box, False, touching=True))
        low, high = precision.ends(hull)
        if not (claimed["lower"] <= low and high <= claimed["upper"]):
            raise Rejected(f"{proves}: the range shown is wider than what is concluded")
        return Line(rule, proves, uses, claimed, domain, meaning.on_set)
