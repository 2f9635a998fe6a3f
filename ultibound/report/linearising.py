"""The linearisation of a claim's map for people: derivatives name by name, as the chain rule has them.

Nothing is expanded: ∂foot/∂v stands in ∂v⁺/∂v as a name of its own. What is proved rests on derivatives that the
checker forms itself (proofs/forms.md); these formulas only say what they are.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from ..claim.calculus import slope
from ..claim.errors import Bad
from ..claim.expression import Expression
from ..claim.graph import Graph
from ..claim.model import Claim, Stance
from ..claim.resolve import Scope
from .formula import Formula, equation, named, number, of_gate, partial, plus, product, row, start, symbol, words

CORNERS = ("abs", "max", "min")


@dataclass(frozen=True, slots=True)
class Derivative:
    """∂of/∂by = formula; `of` is a definition, a library column, `start(x)` or `next(s)`."""

    of: str
    by: str
    formula: Formula

    def equation(self) -> Formula:
        of = start(self.of[6:-1]) if self.of.startswith("start(") else named(self.of)
        return equation(partial(of, symbol(self.by)), "=", self.formula)


def derivatives(claim: Claim, stance: Stance) -> list[Derivative]:
    """What every next state rests on, differentiated by every state, each after those it is built from.

    Of a continuous stance the start values take the place of the next states. What rests on the time within the stance
    is left out.
    """
    texts = _texts(claim, stance)
    found: list[Derivative] = []
    for x in stance.states:
        known: dict[str, bool] = {x: True}
        for name in texts:
            _settle(name, texts, claim, known)
        for name, e in texts.items():
            if known.get(name):
                formula = _reading(name, x, claim, known) if e is None else _derived(claim, stance, e, x, known)
                if formula is not None:
                    found.append(Derivative(name, x, formula))
    used = _used(found, texts)
    return [d for d in found if d.of in used]


def _texts(claim: Claim, stance: Stance) -> dict[str, Expression | None]:
    """Definitions and library columns (None), then what the map is made of; without what rests on the time."""
    dynamics = stance.dynamics
    timely = {"t", *(dynamics.start if dynamics is not None else ())}
    columns = [c for lib in claim.libraries for c in lib.columns]
    texts: dict[str, Expression | None] = {}
    for name, e in stance.define.items():
        if timely & set(e.names()) or any(n.op == "dt" for n in e.nodes):
            timely.add(name)
        else:
            texts[name] = e
    texts = {**dict.fromkeys(columns), **texts}
    if dynamics is None:
        return texts | {f"next({s})": e for s, e in stance.next.items()}
    return texts | {f"start({x})": e for x, e in dynamics.start.items()}


def _settle(name: str, texts: Mapping[str, Expression | None], claim: Claim, known: dict[str, bool]) -> None:
    """Whether a name varies with the state in `known`, and each it rests on."""
    if name in known:
        return
    known[name] = False
    e = texts.get(name)
    if e is not None:
        uses = e.names()
    else:
        lib = next((lib for lib in claim.libraries if name in lib.columns), None)
        uses = [n for at in lib.at for n in at.names()] if lib is not None else []
    for n in uses:
        if n in texts:
            _settle(n, texts, claim, known)
    known[name] = any(known.get(n, False) for n in uses)


def _used(found: list[Derivative], texts: Mapping[str, Expression | None]) -> set[str]:
    """Names on which the map, at the end of the list, rests."""
    used = {name for name in texts if name.endswith(")")}
    for name in reversed(list(texts)):
        e = texts[name]
        if name in used and e is not None:
            used |= set(e.names())
    return used


def _reading(name: str, by: str, claim: Claim, known: Mapping[str, bool]) -> Formula | None:
    """Of a library column: its slope along each axis in the cell it is read in, times how the axis moves."""
    lib = next(lib for lib in claim.libraries if name in lib.columns)
    terms = []
    for axis, at in zip(lib.axes, lib.at, strict=True):
        graph = Graph()
        inner = _graded(graph, Scope(graph, claim, claim.stances[0], _variables(graph, at)).node(at), by, known)
        if inner is not None:
            along = row(partial(named(name), words(axis)))
            terms.append(along if inner == number(1) else product(along, inner))
    return plus(*terms) if terms else None


def _variables(graph: Graph, e: Expression) -> dict[str, int]:
    return {n: graph.add("variable", name=n) for n in e.names()}


def _derived(claim: Claim, stance: Stance, e: Expression, by: str, known: Mapping[str, bool]) -> Formula | None:
    graph = Graph()
    try:
        return _graded(graph, Scope(graph, claim, stance, _variables(graph, e)).node(e), by, known)
    except Bad:  # a number too long to be held, or the like: only the formula is lost
        return None


def _graded(graph: Graph, root: int, by: str, known: Mapping[str, bool]) -> Formula | None:
    """The derivative of a gate; corners by the branch that is taken. None for zero."""
    seeds: dict[int, int] = {}
    shown: dict[int, Formula] = {}
    for name in graph.variables(root):
        if known.get(name):
            here = graph.add("variable", name=name)
            seeds[here] = graph.number(1) if name == by else graph.add("variable", name=f"d {name}")
            shown[seeds[here]] = number(1) if name == by else partial(named(name), symbol(by))
    for k in graph.reached((root,)):
        gate = graph.gates[k]
        if gate.op in CORNERS:
            args = (gate.args[0], graph.add("neg", gate.args[0])) if gate.op == "abs" else gate.args
            inner = [slope(graph, a, seeds) for a in args]
            if any(x is not None for x in inner):
                seeds[k] = graph.add("variable", name=f"corner {k}")
                sides = [of_gate(graph, a, shown) for a in args]
                slopes = [number(0) if x is None else of_gate(graph, x, shown) for x in inner]
                if any(x is None for x in (*sides, *slopes)):
                    return words("too long to be shown; it is formed by the chain rule")
                relation = "<" if gate.op == "min" else ">"
                first, second = sides[0] or number(0), sides[1] or number(0)
                where = row(words("if "), equation(first, relation, second))
                parts = (slopes[0] or number(0), where, slopes[1] or number(0), words("otherwise"))
                shown[seeds[k]] = Formula("cases", parts)
    found = slope(graph, root, seeds)
    if found is None:
        return None
    return of_gate(graph, found, shown) or words("too long to be shown; it is formed by the chain rule")
