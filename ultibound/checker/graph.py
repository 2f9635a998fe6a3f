"""Stances that follow one another: sets kept on every step, gains and bounds along all of them (proofs/graph.md)."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from copy import copy
from dataclasses import replace
from fractions import Fraction
from typing import Any

from .calculus import Unprovable
from .derive import Derivation, Domain, varied
from .horizon import together
from .jacobians import OF_COMPARISON, OF_ROUTE, Table, sloped
from .matrices import Leaf, Matrix, Metric, metric
from .model import Statement
from .numerals import Rejected
from .several import ball, gone_through, hull, matrix, moved, movements, numbers, scaled, shown, stated, stretch
from .theorems import Line, Quantities, parted, require

MOST_STANCES = 16
MOST_WALKS = 64
OF_STANCE = ("metric", "range", "point", "squares", "trajectory", "largest-ball", "smaller-ball")
Vectors = dict[str, list[Fraction]]  # one a stance


class Graph:
    """A claim of named stances: what each asks, and every step from one to the next."""

    def __init__(self, statement: Statement) -> None:
        if statement.route not in ("best", *OF_ROUTE):
            raise Unprovable("only the routes slope and split can be checked between stances")
        if statement.horizon > 1 and statement.route == "split":
            raise Unprovable("split between stances can be checked over one step only")
        if len(statement.stances) > MOST_STANCES:
            raise Unprovable(f"at most {MOST_STANCES} stances can be checked")
        self.statement = statement
        self.stances = {s.name: Derivation(of_stance(statement, s.name)) for s in statement.stances}
        self.steps = [(s.name, t) for s in statement.stances for t in s.then]
        self.between = {f"{s}>{t}": toward(self.stances[s], self.stances[t]) for s, t in self.steps}
        self.walks = walks(self.steps, statement)
        self.along = {">".join(w): self.between.get(">".join(w)) or along(self.stances, w) for w in self.walks}
        self.ends = [(w[0], w[-1]) for w in self.walks]

    @property
    def first(self) -> Derivation:
        return next(iter(self.stances.values()))


def graph_of(statement: Statement) -> Graph | None:
    """The stances of a claim; None where it has one map for every step."""
    return Graph(statement) if statement.stances[0].name else None


def of_stance(statement: Statement, name: str) -> Statement:
    """The claim of one stance alone, its states in the same order as in every other."""
    (stance,) = [s for s in statement.stances if s.name == name]
    states = {x: stance.states[x] for x in statement.stances[0].states}
    asked = tuple(replace(r, stance=None) if r.stance == name else r for r in statement.requirements)
    alone = replace(stance, name="", then=(), states=states)
    return replace(statement, stances=(alone,), requirements=asked, horizon=1)


def walks(steps: list[tuple[str, str]], statement: Statement) -> list[tuple[str, ...]]:
    """All ways of as many steps as are taken together: proofs/graph.md (10). Raises Unprovable where none are."""
    found: list[tuple[str, ...]] = [(s.name,) for s in statement.stances]
    for _ in range(statement.horizon):
        found = [(*w, t) for w in found for s, t in steps if s == w[-1]]
        if statement.horizon > 1 and len(found) > MOST_WALKS:
            raise Unprovable(f"horizon: more than {MOST_WALKS} ways of so many steps through the stances")
    if statement.horizon > 1:
        together(statement, None)
        if statement.libraries or any(s.dynamics is not None for s in statement.stances):
            raise Unprovable("horizon: of stances in closed form, without a library, only")
    return found


def along(stances: Mapping[str, Derivation], walk: tuple[str, ...]) -> Derivation:
    """Several steps from the first stance of a walk to the target of the last."""
    found = toward(stances[walk[0]], stances[walk[-1]])
    found.via = tuple(stances[s].statement for s in walk[1:-1])
    return found


def of_ranges(statement: Statement, number: int) -> Statement:
    """The claim with what `over` of a requirement says: of states in the stances it is about. Raises Unprovable."""
    alone = {s.name: varied(of_stance(statement, s.name), number) for s in statement.stances}
    r, one = statement.requirements[number - 1], next(iter(alone.values()))
    stances = tuple(
        replace(s, states=alone[s.name].stances[0].states) if r.stance in (None, s.name) else s
        for s in statement.stances
    )
    asked = tuple(replace(x, over={}) if n == number else x for n, x in enumerate(statement.requirements, 1))
    return replace(one, stances=stances, requirements=asked, horizon=statement.horizon)


def toward(d: Derivation, after: Derivation) -> Derivation:
    """A stance whose steps lead to the target of the stance that follows."""
    found = copy(d)
    found.onto, found.leaves, found.meanings = after.statement, {}, {}  # what it means and shows is of its own
    return found


def of_part(g: Graph | None, part: str) -> Derivation:
    """What a line about a stance, a step or (the part that has no name) all of them refers to."""
    if g is None or (part and part not in g.stances and part not in g.between and part not in g.along):
        raise Rejected(f"{part}: no stance of the claim, nor a step from one to the next")
    return g.stances.get(part) or g.between.get(part) or g.along.get(part) or g.first


def seen_from(part: str, line: Line) -> Line:
    """A line about all stances as one of them, or a step from it, sees it."""
    stance = part.partition(">")[0]
    if line.domains is None or stance not in line.domains:
        return line
    return replace(line, domain=line.domains[stance], part=stance)


def stepping(
    g: Graph, part: str, rule: str, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> Line | None:
    """A line of a claim of stances; None of a range, a point or a flow of one stance."""
    line = Line(rule, proves, (), claimed)
    if part in g.stances:
        return about_stance(g.stances[part], part, rule, proves, used, witness, claimed)
    if part in g.between or part in g.along:
        if rule in OF_ROUTE:
            domain, after = pair(g, part, rule, proves, used, claimed)
            return replace(line, domain=domain, metric=after)
        if rule in ("matrix", "graph-entries", "stretch"):
            return about_step(g, part, rule, proves, used, witness, claimed)
    elif rule == "graph-regions":
        return replace(line, domains=regions(g, proves, used))
    elif rule == "graph-balls":
        return replace(line, domains=balls(g, proves, used))
    elif rule == "graph-bound":
        return replace(line, domains=bound(g, proves, used, witness, claimed))
    elif rule == "graph-componentwise":
        return replace(line, domains=componentwise(g, proves, used, witness, claimed))
    raise Rejected(f"{rule}: not known of {'a step from one stance to the next' if part else 'all stances together'}")


def about_stance(
    d: Derivation, name: str, rule: str, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> Line | None:
    if rule not in OF_STANCE:
        raise Rejected(f"{rule}: not known of one stance alone")
    if any(x.part != name for x in used):
        raise Rejected(f"uses: lines about {name} only")
    line = Line(rule, proves, (), claimed)
    if rule == "metric":
        return replace(line, metric=stated(d, proves, used, witness))
    if rule in ("largest-ball", "smaller-ball"):
        return replace(line, domain=ball(d, rule, proves, used, claimed))
    return None


def about_step(
    g: Graph, part: str, rule: str, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> Line:
    """proofs/graph.md (1): Jacobians and misses over the set of a stance, seen in the norm of the next."""
    d, (before, *_, after) = g.between.get(part) or g.along[part], part.split(">")
    used, flows = parted(used) if used and used[-1].part == before else (used, None)
    if [x.part for x in used] != [before, after] or used[1].rule != "metric":
        raise Rejected("uses: the set of the stance, the metric of the next")
    domain, norm = used[0].domain, used[1].metric
    if domain is None or domain.metric is None or norm is None:
        raise Rejected("uses: a set and a metric")
    table = Table(d, proves, domain, witness["bits"], flows)
    line = Line(rule, proves, (), claimed, domain, True, metric=norm)
    seen = across(domain.metric, norm, proves)
    if rule == "stretch":
        stretch(table, domain.metric, norm, proves, witness, claimed)
        return line
    leaves = gone_through(d, table, proves, flows, witness)
    if rule == "matrix":
        inequality = scaled(domain.metric, norm, proves, witness, claimed)
        return replace(line, leaves=shown(seen, inequality, leaves, proves, claimed))
    bases = based(witness["before"], len(d.states)), based(witness["after"], len(d.states))
    rows, inverse = bases[1][0], bases[0][1]
    return replace(line, leaves=entered(leaves, (rows, inverse), proves, claimed), bases=bases)


def across(before: Metric, after: Metric, proves: str) -> Metric:
    """‖V_t A L_s‖ of Jacobians, ‖V_t a‖ of misses: proofs/graph.md (1)."""
    if (before.kind == "ellipsoid") != (after.kind == "ellipsoid"):
        raise Rejected("metric: Euclidean lengths and largest magnitudes are not compared with each other")
    n = len(after.inverse)
    one = tuple(tuple(Fraction(int(i == j)) for j in range(n)) for i in range(n))
    return Metric(after.kind, after.rows, before.inverse if sloped(proves) else one, own=False)


def based(basis: Any, n: int) -> tuple[Matrix, Matrix]:
    if not isinstance(basis, dict) or set(basis) != {"rows", "inverse"}:
        raise Rejected("before, after: rows and inverse")
    found = metric("polytope", matrix(basis["rows"], "rows"), matrix(basis["inverse"], "inverse"), n)
    return found.rows, found.inverse


def pair(g: Graph, part: str, route: str, proves: str, used: list[Line], claimed: Quantities) -> tuple[Domain, Metric]:
    """proofs/graph.md (2), proofs/split.md (3): gain and residual of a step, its error from the target that follows."""
    after = part.rpartition(">")[2]
    d = g.stances[after]
    ranges = [("range", f"target-slope[{s},{h}]") for s, h in movements(d)]
    require(proves, route, used, [*(("matrix", x) for x in OF_ROUTE[route]), *ranges])
    parts(used, [part, part, *[after] * len(ranges)])
    domain, norm = used[0].domain, used[0].metric
    if domain is None or norm is None or used[1].domain != domain or used[1].metric != norm:
        raise Rejected("the residual refers to another set or norm")
    residual = used[1].concludes["norm"] + norm.length(moved(d, used[2:]))
    if not (claimed["gain"] >= used[0].concludes["norm"] and claimed["residual"] >= residual):
        raise Rejected("gain or residual: less than what the lines used show")
    return domain, norm


def parts(used: list[Line], wanted: list[str]) -> None:
    if [x.part for x in used] != wanted:
        raise Rejected(f"uses: lines about {', '.join(wanted)}"[:300])


def regions(g: Graph, proves: str, used: list[Line]) -> dict[str, Domain]:
    """proofs/graph.md (3a): the region of every stance is mapped into that of every stance that may follow."""
    wanted, about = [], []
    for name, d in g.stances.items():
        each = [("metric", "metric"), *(("range", f"{x}[{s}]") for x in ("target", "image") for s in d.states)]
        wanted += each
        about += [name] * len(each)
    require(proves, "invariant", used, wanted)
    parts(used, about)
    found: dict[str, Domain] = {}
    lines = iter(used)
    for name, d in g.stances.items():
        norm = next(lines).metric
        targets = [next(lines).concludes for _ in d.states]
        for s, x in zip(d.states, targets, strict=True):
            within(x, d, s, f"{name}: target[{s}]")
        for s in d.states:
            image = next(lines).concludes
            for before, after in g.steps:
                if before == name:
                    within(image, g.stances[after], s, f"{name}: image[{s}]")
        first = targets[0]
        found[name] = Domain(False, Fraction(0), (first["lower"], first["upper"]), metric=norm)
    return found


def within(x: Quantities, d: Derivation, s: str, what: str) -> None:
    _, inner = d.region(s)
    if not (inner[0] <= x["lower"] and x["upper"] <= inner[1]):
        raise Rejected(f"{what} is not shown to stay in the region")


def balls(g: Graph, proves: str, used: list[Line]) -> dict[str, Domain]:
    """proofs/graph.md (3b): k R + residual <= R of the next, on every step."""
    sets, steps = used[: len(g.stances)], used[len(g.stances) :]
    route = route_of(steps)
    require(proves, "invariant", used, [*((x.rule, "ball") for x in sets), *[(route, route)] * len(g.steps)])
    parts(used, [*g.stances, *g.between])
    found = {x.part: x.domain for x in sets if x.domain is not None}
    stepped(g.steps, steps, found)
    for (s, t), line in zip(g.steps, steps, strict=True):
        if not line.concludes["gain"] * found[s].outer + line.concludes["residual"] <= found[t].radius:
            raise Rejected(f"{s}>{t}: gain times radius plus residual exceeds the radius")
    return found


def route_of(steps: list[Line]) -> str:
    """The route of the first line, one of those that gain and residual of every step may come from."""
    return next((x for x in OF_ROUTE if [line.rule for line in steps[:1]] == [x]), "slope")


def kept(used: list[Line]) -> dict[str, Domain]:
    """The sets of all stances that the first line shows to be kept."""
    if not used or used[0].proves != "invariant" or used[0].domains is None:
        raise Rejected("uses: first the sets that are kept")
    return used[0].domains


def stepped(ends: list[tuple[str, str]], lines: list[Line], sets: Mapping[str, Domain]) -> None:
    """Raises Rejected unless gain and residual of every step are over these sets, in their norms."""
    for (s, t), line in zip(ends, lines, strict=True):
        if line.domain != sets[s] or line.metric != sets[t].metric:
            raise Rejected(f"{s}>{t}: gain and residual refer to another set or norm")


def bound(g: Graph, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities) -> dict[str, Domain]:
    """proofs/graph.md (4): k b + residual <= b of the next and k p < p of the next, on every step."""
    sets = kept(used)
    route = route_of(used[1:])
    require(proves, f"bound[{route}]", used[1:], [(route, route)] * len(g.walks))
    parts(used[1:], list(g.along))
    stepped(g.ends, used[1:], sets)
    k: list[Matrix] = [((line.concludes["gain"],),) for line in used[1:]]
    residual = [[line.concludes["residual"]] for line in used[1:]]
    sizes = dict.fromkeys(g.stances, 1)
    b = compared(g, k, residual, vectors(witness["p"], "p", sizes), vectors(witness["b"], "b", sizes))
    if set(claimed) != set(g.stances) or not all(claimed[s] >= b[s][0] for s in g.stances):
        raise Rejected("concludes: a bound for each stance, no less than b")
    return sets


def compared(g: Graph, k: list[Matrix], residual: list[list[Fraction]], p: Vectors, b: Vectors) -> Vectors:
    """proofs/graph.md (4), (5): p > 0, b >= 0; K p < p and K b + residual <= b of the next, on every step. Gives b."""
    if not all(x > 0 for s in p for x in p[s]) or not all(x >= 0 for s in b for x in b[s]):
        raise Rejected("p, b: p > 0 and b >= 0 are not met")
    for (s, t), rows, missed in zip(g.ends, k, residual, strict=True):
        for row, e, x, y in zip(rows, missed, p[t], b[t], strict=True):
            if not (all(z >= 0 for z in row) and times(row, p[s]) < x and times(row, b[s]) + e <= y):
                raise Rejected(f"{s}>{t}: K p < p and K b + residual <= b are not both met")
    return b


def times(row: tuple[Fraction, ...], x: list[Fraction]) -> Fraction:
    return sum((a * y for a, y in zip(row, x, strict=True)), Fraction(0))


def vectors(texts: Any, place: str, sizes: Mapping[str, int]) -> Vectors:
    if not isinstance(texts, dict) or set(texts) != set(sizes):
        raise Rejected(f"{place}: a list for each stance")
    return {s: numbers(texts[s], place, n) for s, n in sizes.items()}


def componentwise(
    g: Graph, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> dict[str, Domain]:
    """proofs/graph.md (5): a bound for each state in each stance, by comparison in a basis a stance."""
    moving = {name: movements(d) for name, d in g.stances.items()}
    name = proves if proves in OF_COMPARISON else "componentwise"
    wanted = [("graph-entries", x) for _ in g.walks for x in OF_COMPARISON[name]]
    wanted += [("range", f"target-slope[{s},{h}]") for each in moving.values() for s, h in each]
    sets = kept(used)
    require(proves, name, used[1:], wanted)
    parts(used[1:], [e for e in g.along for _ in range(2)] + [name for name in moving for _ in moving[name]])
    lines = used[1 : 1 + 2 * len(g.walks)]
    ranges, far = iter(used[1 + len(lines) :]), dict[str, list[Fraction]]()
    for name, d in g.stances.items():
        far[name] = moved(d, [next(ranges) for _ in moving[name]])
    bases: dict[str, tuple[Matrix, Matrix]] = {}
    k, residual = [], []
    for (s, t), slopes, misses in zip(g.ends, lines[::2], lines[1::2], strict=True):
        if slopes.domain != sets[s] or misses.domain != sets[s]:
            raise Rejected(f"{s}>{t}: entries of another set")
        for line in (slopes, misses):
            for name, basis in zip((s, t), line.bases or (), strict=True):
                if bases.setdefault(name, basis) != basis:
                    raise Rejected(f"{name}: entries in different bases")
        rows = bases[t][0]
        k.append(entries(slopes, len(rows), len(bases[s][0])))
        shifts = [times(tuple(map(abs, row)), far[t]) for row in rows]
        residual.append([x[0] + y for x, y in zip(entries(misses, len(rows), 1), shifts, strict=True)])
    sizes = {name: len(bases[name][0]) for name in g.stances}
    b = compared(g, k, residual, vectors(witness["p"], "p", sizes), vectors(witness["b"], "b", sizes))
    if set(claimed) != {f"{name}:{s}" for name, d in g.stances.items() for s in d.states}:
        raise Rejected("concludes: a bound for each state in each stance")
    for name, d in g.stances.items():
        for s, row in zip(d.states, bases[name][1], strict=True):
            if not claimed[f"{name}:{s}"] >= times(tuple(map(abs, row)), b[name]):
                raise Rejected(f"{name}:{s}: less than what the comparison shows")
    return sets


def entered(leaves: Iterable[Leaf], basis: tuple[Matrix, Matrix], proves: str, claimed: Quantities) -> int:
    """How many leaves there are, every one within the entries that are claimed."""
    found, count = largest(leaves, basis, proves)
    if set(claimed) != set(found):
        raise Rejected(f"{proves}: one conclusion an entry")
    for key, x in found.items():
        if not claimed[key] >= x:
            raise Rejected(f"{proves}: entry {key} is less than what the leaves show")
    return count


def largest(leaves: Iterable[Leaf], basis: tuple[Matrix, Matrix], proves: str) -> tuple[Quantities, int]:
    """The largest magnitude of every entry over all leaves, by row and column, and how many leaves there are."""
    low, high, count = hull(leaves, basis, proves)
    ends = [(i, j, low[i][j], high[i][j]) for i in range(len(low)) for j in range(len(low[i]))]
    return {f"{i + 1},{j + 1}": max(-x, y) for i, j, x, y in ends}, count


def entries(line: Line, rows: int, columns: int) -> Matrix:
    return tuple(tuple(line.concludes[f"{i},{j}"] for j in range(1, columns + 1)) for i in range(1, rows + 1))
