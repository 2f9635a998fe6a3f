"""How the residual of the split route is made up: cell by cell of the gait library, from a certificate's own line."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from itertools import product

from ..certificate.certificate import Certificate
from ..checker.courses import arithmetic
from ..checker.derive import Derivation
from ..checker.forms import walk
from ..checker.ranges import Evaluator
from ..checker.rules import Proof
from ..checker.statement import read_statement


@dataclass(frozen=True, slots=True)
class Cell:
    """A library cell, by the ends of what reads it, and the proved residual in it (without the target's movement)."""

    ends: dict[str, tuple[Fraction, Fraction]]
    residual: Fraction


def residual_by_cell(certificate: Certificate) -> list[Cell]:
    """Proved, as the checker measures it: sup |N − x + F(x*) − N(x*)| over each library cell met.

    The set has to be the region: a ball moves with its target and has no cells of its own.
    """
    entries = certificate.entries
    claim = entries["claim"]
    files = {d["name"]: d["text"] for d in claim["data"]}
    derivation = Derivation(read_statement(claim["text"], claim["set"], files))
    name = f"split-residual[{derivation.state}]"
    proof = Proof(derivation)
    line = next((x for x in entries["proof"] if (x["rule"], x["proves"]) == ("range", name)), None)
    if line is None:
        return []
    for raw in entries["proof"][: max(line["uses"])]:
        proof.add(raw)
    domain = proof.lines[line["uses"][0]].domain
    meaning = derivation.meaning(name, domain)
    cut = [k for k, v in enumerate(meaning.variables) if len(v.cells) > 1 and not v.listed]
    if not cut:
        return []
    names, bits = [v.name for v in meaning.variables], line["witness"]["bits"]
    libraries = derivation.statement.libraries
    evaluator = Evaluator(derivation.terms, meaning.root, meaning.by, names, libraries, arithmetic(bits))
    found: dict[tuple[tuple[Fraction, Fraction], ...], Fraction] = {}
    tops = list(product(*(v.cells for v in meaning.variables)))
    for top, tree in zip(tops, line["witness"]["trees"], strict=True):
        low, high = evaluator.a.ends(walk(evaluator, [top], [tree])[0])
        cell = tuple(top[k] for k in cut)
        found[cell] = max(found.get(cell, Fraction(0)), -low, high)
    return [Cell(dict(zip((names[k] for k in cut), cell, strict=True)), x) for cell, x in found.items()]
