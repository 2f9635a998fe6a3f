"""Theorems about several states: the ball of a metric, what contracts in it, entry by entry (proofs/several.md)."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import replace
from fractions import Fraction
from typing import Any

from .absorbed import absorbed
from .derive import Derivation, Domain
from .flows import Flows
from .grammar import constant
from .inequality import Inequality
from .jacobians import OF_COMPARISON, OF_ROUTE, Table, middle_and_half, sloped
from .matrices import ENTRY_BITS, Leaf, Matrix, Metric, comparison, dot, entries, framed, metric, norm_at_most, vanishes
from .numerals import Rejected, quantity
from .periodic import periodic
from .products import product
from .theorems import Line, Quantities, fewer, magnitude, parted, require
from .vertices import Whole

OWN = ("metric", "matrix", "entries", "stretch", "componentwise", "invariant-rows", "periodic", "product", "absorbed")
KEPT = 5000  # leaves in memory


def stated(d: Derivation, proves: str, used: list[Line], witness: dict[str, Any]) -> Metric:
    """Rule metric: a norm of the kind, and with the weights, that the claim asks for."""
    if proves != "metric" or used:
        raise Rejected("a metric rests on no other line")
    n, asked = len(d.states), d.statement.metric
    found = metric(str(witness["kind"]), matrix(witness["rows"], "rows"), matrix(witness["inverse"], "inverse"), n)
    if asked not in ("auto", found.kind) and n > 1:
        raise Rejected(f"kind: the claim asks for {asked}")
    if asked == "box" or d.statement.weights or n == 1:
        for i, s in enumerate(d.states):
            low, high = constant(d.statement.weights[s], d.statement.values) if s in d.statement.weights else (1, 1)
            if found.kind != "box" or not low == found.rows[i][i] == high:
                raise Rejected(f"rows: the weight of {s} is not the one the claim states, exactly")
    return found


def numbers(texts: Any, place: str, count: int) -> list[Fraction]:
    if not isinstance(texts, list) or len(texts) != count:
        raise Rejected(f"{place}: a list of {count} numbers")
    return [quantity(x, place) for x in texts]


def matrix(texts: Any, place: str) -> Matrix:
    if not isinstance(texts, list) or not all(isinstance(row, list) for row in texts):
        raise Rejected(f"{place}: a list of rows")
    return tuple(tuple(quantity(x, place) for x in row) for row in texts)


def ball(d: Derivation, rule: str, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/several.md (1): {‖e‖ <= R} lies in the region; points of the targets show that no larger one does."""
    n, points = len(d.states), used[1 + len(d.states) :]
    targets = [("range", f"target[{s}]") for s in d.states]
    require(proves, "ball", used[: 1 + n], [("metric", "metric"), *targets])
    norm, spans = used[0].metric, tuple((x.concludes["lower"], x.concludes["upper"]) for x in used[1 : 1 + n])
    if norm is None or not claimed["radius"] >= 0:
        raise Rejected("radius: below nothing")
    for i, (s, (low, high)) in enumerate(zip(d.states, spans, strict=True)):
        _, inner = d.region(s)
        if not claimed["radius"] * norm.support(i) <= min(low - inner[0], inner[1] - high):
            raise Rejected(f"radius: the ball is not shown to lie in the region of {s}")
    found = Domain(True, claimed["radius"], spans[0], targets=spans, metric=norm)
    if rule == "smaller-ball":
        if points:
            raise Rejected("a smaller ball rests on the metric and the targets")
        return found
    edges = []
    for line in points:
        place = [i for i, s in enumerate(d.states) if (line.rule, line.proves) == ("point", f"target[{s}]")]
        if not place:
            raise Rejected("outer: points of the targets")
        (low, high), _ = d.region(d.states[place[0]])
        edges.append((min(high - line.concludes["lower"], line.concludes["upper"] - low), place[0]))
    if not any(reaches(norm, claimed["outer"], i, edge) for edge, i in edges):
        raise Rejected("outer: larger balls are not shown to leave the region")
    return replace(found, beyond=claimed["outer"] - found.radius)


def reaches(norm: Metric, outer: Fraction, state: int, edge: Fraction) -> bool:
    """Whether the ball of that radius surely reaches as far along a state: exact, also where a root is meant."""
    if norm.kind == "ellipsoid":
        return outer >= 0 and outer * outer * sum(x * x for x in norm.inverse[state]) >= edge * edge
    return outer * norm.support(state) >= edge


def invariant_region(d: Derivation, proves: str, used: list[Line]) -> Domain:
    """proofs/invariant-set.md (1), state by state."""
    norm = used[0].metric if used else None
    wanted = [("range", f"{x}[{s}]") for x in ("target", "image") for s in d.states]
    require(proves, "invariant", used, [("metric", "metric"), *wanted])
    for line, s in zip(used[1:], (*d.states, *d.states), strict=True):
        _, inner = d.region(s)
        if not (inner[0] <= line.concludes["lower"] and line.concludes["upper"] <= inner[1]):
            raise Rejected(f"{line.proves} is not shown to stay in the region")
    spans = tuple((x.concludes["lower"], x.concludes["upper"]) for x in used[1 : 1 + len(d.states)])
    return Domain(False, Fraction(0), spans[0], targets=spans, metric=norm)


def concluded(
    d: Derivation, rule: str, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> Line | None:
    """A line of a rule that is about several states; None where the rule is another's."""
    several, line = len(d.states) > 1, Line(rule, proves, (), claimed)
    if rule in OWN and not several:
        raise Rejected(f"{rule}: the claim has a single state")
    if rule == "metric":
        return replace(line, metric=stated(d, proves, used, witness))
    if rule in ("matrix", "entries"):
        domain, leaves, basis = bounded(d, rule, proves, used, witness, claimed)
        return replace(line, domain=domain, on_set=True, leaves=leaves, basis=basis)
    if rule == "stretch":
        return replace(line, domain=stretched(d, proves, used, witness, claimed), on_set=True)
    if rule == "componentwise":
        return replace(line, domain=componentwise(d, proves, used, witness, claimed))
    if rule == "periodic":
        kept, orbit = periodic(d, proves, used, witness, claimed)
        return replace(line, domain=kept, orbit=orbit)
    if rule == "absorbed":
        return replace(line, domain=absorbed(d, proves, used, claimed))
    if rule == "product":
        return product(d, proves, used, witness, claimed)
    if rule == "invariant-rows":
        return replace(line, domain=invariant_rows(d, proves, used, claimed))
    if several and rule in ("largest-ball", "smaller-ball"):
        return replace(line, domain=ball(d, rule, proves, used, claimed))
    if several and rule == "invariant-region":
        return replace(line, domain=invariant_region(d, proves, used))
    if several and rule in OF_ROUTE:
        return replace(line, domain=pair(d, rule, proves, used, claimed))
    if several and rule in ("sector", "curve", "shells", "orbit"):
        raise Rejected(f"{rule}: known for a single state only")
    return None


def of_set(used: list[Line]) -> tuple[Domain, Metric]:
    if len(used) != 1 or used[0].domain is None or used[0].domain.metric is None:
        raise Rejected("uses: the one line that gives the set")
    return used[0].domain, used[0].domain.metric


def bounded(
    d: Derivation, rule: str, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities
) -> tuple[Domain, int, tuple[Matrix, Matrix] | None]:
    """Rules matrix and entries: what holds at every leaf. Returns the set, the leaves and the basis (or None)."""
    used, flows = parted(used)
    domain, norm = of_set(used)
    leaves = gone_through(d, Table(d, proves, domain, witness["bits"], flows), proves, flows, witness)
    if rule == "matrix":
        return domain, shown(norm, scaled(norm, norm, proves, witness, claimed), leaves, proves, claimed), None
    basis = based(d, witness)
    return domain, entered(leaves, basis, proves, claimed, apart(basis, proves, witness["beside"])), basis


def scaled(
    before: Metric, after: Metric, proves: str, witness: dict[str, Any], claimed: Quantities
) -> Inequality | None:
    """The inequality that is to hold on every leaf, of ellipsoids by scales; None where there are none."""
    scales, of_slopes = witness["scales"], sloped(proves)
    if scales == []:
        return None
    if not isinstance(scales, list) or len(scales) != 2 or {before.kind, after.kind} != {"ellipsoid"}:
        raise Rejected("scales: none, or of an ellipsoid those of columns and of rows")
    xi = numbers(scales[0], "scales", len(before.inverse) if of_slopes else 1)
    eta = numbers(scales[1], "scales", len(after.inverse))
    return Inequality(before if of_slopes else None, after, tuple(xi), tuple(eta), claimed["norm"])


def shown(norm: Metric, inequality: Inequality | None, leaves: Iterable[Leaf], proves: str, claimed: Quantities) -> int:
    """How many leaves there are, every one within the norm that is claimed."""
    count = 0
    for leaf in leaves:
        count += 1
        if not (norm_at_most(norm, leaf, claimed["norm"]) if inequality is None else inequality.holds(leaf)):
            raise Rejected(f"{proves}: a leaf is not shown to stay within the norm")
    return count


def entered(
    leaves: Iterable[Leaf], basis: tuple[Matrix, Matrix], proves: str, claimed: Quantities, beside: Matrix = ()
) -> int:
    """How many leaves there are, every one within the entries that are claimed."""
    low, high, count = hull(leaves, basis, proves, beside)
    if set(claimed) != set(keyed(low, high)):
        raise Rejected(f"{proves}: two conclusions an entry")
    for key, x in keyed(low, high).items():
        if not (claimed[key] <= x if key.startswith("-") else claimed[key] >= x):
            raise Rejected(f"{proves}: entry {key} is less than what the leaves show")
    return count


def gone_through(
    d: Derivation, table: Table, proves: str, flows: Flows | None, witness: dict[str, Any]
) -> Iterator[Leaf]:
    """The leaves of a tree over a set, evaluated once for all lines that follow about the same ones."""
    key = table.domain, witness["bits"], witness["trees"]
    known = d.leaves.get(proves)
    if known is not None and known[0] == key and known[1] is flows:
        yield from known[2]
        return
    found: list[Leaf] = []
    count = 0
    for leaf in table.leaves(witness["trees"]):
        count += 1
        if count <= KEPT:
            found.append(leaf)
        yield leaf
    if count <= KEPT:
        d.leaves[proves] = key, flows, found


def based(d: Derivation, witness: dict[str, Any]) -> tuple[Matrix, Matrix]:
    norm = metric("polytope", matrix(witness["rows"], "rows"), matrix(witness["inverse"], "inverse"), len(d.states))
    return norm.rows, norm.inverse


def apart(basis: tuple[Matrix, Matrix], proves: str, beside: Any) -> Matrix:
    """Z with Z V = 0, which the matrix may have added to it in a basis of more rows than states: matrix.md (6)."""
    if beside == []:
        return ()
    rows, z = basis[0], matrix(beside, "beside")
    if not sloped(proves) or len(z) != len(rows) or any(len(row) != len(rows) for row in z):
        raise Rejected("beside: of slopes, a row and a column for each row of the basis")
    if not vanishes(z, rows):
        raise Rejected("beside: times the rows it is not 0")
    return z


def hull(
    leaves: Iterable[Leaf], basis: tuple[Matrix, Matrix], proves: str, beside: Matrix = ()
) -> tuple[Matrix, Matrix, int]:
    """The least and the largest entries over all leaves in a basis, what stands beside them added; how many leaves."""
    frame, found, count, nothing = framed(*basis), list[Whole](), 0, Fraction(0)
    for leaf in leaves:
        count += 1
        here = entries(frame, leaf, sloped(proves))
        found = [
            [list(map(pick, a, b)) for a, b in zip(x, y, strict=True)]
            for pick, x, y in zip((min, max), found or here, here, strict=True)
        ]
    low, high = (
        tuple(
            tuple(Fraction(x, 2**ENTRY_BITS) + z for x, z in zip(row, other, strict=True))
            for row, other in zip(m, beside or [[nothing] * len(row) for row in m], strict=True)
        )
        for m in found or ([], [])
    )
    return low, high, count


def keyed(low: Matrix, high: Matrix) -> dict[str, Fraction]:
    """Upper ends by row and column, lower ends with a minus before them."""
    return {
        f"{sign}{i},{j}": x
        for sign, m in (("", high), ("-", low))
        for i, row in enumerate(m, 1)
        for j, x in enumerate(row, 1)
    }


def middles(line: Line, columns: int) -> tuple[Matrix, Matrix]:
    """The entries that a line shows, as their middles and half widths."""
    ends = [
        [(line.concludes[f"-{i},{j}"], line.concludes[f"{i},{j}"]) for j in range(1, columns + 1)]
        for i in range(1, len(line.basis[0]) + 1 if line.basis is not None else 1)
    ]
    return middle_and_half(ends)


def stretched(d: Derivation, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities) -> Domain:
    """Rule stretch: a direction that a Jacobian stretches by no less, or a miss no shorter (several.md (4))."""
    used, flows = parted(used)
    domain, norm = of_set(used)
    stretch(Table(d, proves, domain, witness["bits"], flows), norm, norm, proves, witness, claimed)
    return domain


def stretch(
    table: Table, before: Metric, after: Metric, proves: str, witness: dict[str, Any], claimed: Quantities
) -> None:
    """A direction in one norm, and how long its image surely is in the other."""
    middle, half = middle_and_half(table.at(witness["at"]))
    direction = numbers(witness["direction"], "direction", len(middle[0]))
    image = [sum((x * y for x, y in zip(row, direction, strict=True)), Fraction(0)) for row in middle]
    off = [sum((x * abs(y) for x, y in zip(row, direction, strict=True)), Fraction(0)) for row in half]
    size = before.most(direction) if sloped(proves) else abs(direction[0])
    if not size > 0 or not claimed["lower"] * size <= after.least(image) - after.length(off):
        raise Rejected(f"{proves}: the direction is not shown to be stretched by so much")


def movements(d: Derivation) -> list[tuple[str, str]]:
    return [(s, h) for s in d.states for h in d.moving(s)]


def moved(d: Derivation, lines: list[Line]) -> list[Fraction]:
    """How far held quantities may move the target of each state in a step: proofs/slope.md (3)."""
    found = dict.fromkeys(d.states, Fraction(0))
    for (s, h), line in zip(movements(d), lines, strict=True):
        found[s] += magnitude(line) * d.change(h)[1]
    return list(found.values())


def pair(d: Derivation, route: str, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/several.md (2), proofs/split.md (3): gain and residual of a route in the metric."""
    ranges = [("range", f"target-slope[{s},{h}]") for s, h in movements(d)]
    on = fewer(proves)
    require(proves, f"{route}{on}", used, [*(("matrix", f"{x}{on}") for x in OF_ROUTE[route]), *ranges])
    domain = used[0].domain
    if domain is None or domain.metric is None or used[1].domain != domain:
        raise Rejected("the residual refers to another set")
    residual = used[1].concludes["norm"] + domain.metric.length(moved(d, used[2:]))
    if not (claimed["gain"] >= used[0].concludes["norm"] and claimed["residual"] >= residual):
        raise Rejected("gain or residual: less than what the lines used show")
    return domain


def componentwise(d: Derivation, proves: str, used: list[Line], witness: dict[str, Any], claimed: Quantities) -> Domain:
    """proofs/several.md (3): K, residual and p > K p entry by entry, in a basis; a bound for each state."""
    ranges = [("range", f"target-slope[{s},{h}]") for s, h in movements(d)]
    found = [*(("entries", x) for x in OF_COMPARISON.get(proves, ())), *ranges]
    if proves not in OF_COMPARISON or [x.proves for x in used[:1]] not in (["invariant"], ["absorbed"]):
        raise Rejected("componentwise rests on the invariant set, then entries")
    require(proves, proves, used[1:], found)
    slopes, misses, domain = used[1], used[2], used[0].domain
    if domain is None or slopes.domain != domain or misses.domain not in (domain, domain.of):
        raise Rejected("entries of another set")
    if slopes.basis is None or slopes.basis != misses.basis:
        raise Rejected("entries in different bases")
    p, b, about = (numbers(witness[key], key, len(slopes.basis[0])) for key in ("p", "b", "about"))
    k, residual = compared(d, slopes, misses, used[3:], about)
    if not comparison(k, residual, p, b):
        raise Rejected("p, b: K p < p, K b + residual <= b and p > 0 are not all met")
    if set(claimed) != set(d.states):
        raise Rejected("concludes: a bound for each state")
    for s, row in zip(d.states, slopes.basis[1], strict=True):
        if not claimed[s] >= abs(dot(row, about)) + sum(abs(x) * y for x, y in zip(row, b, strict=True)):
            raise Rejected(f"{s}: less than what the comparison shows")
    return domain


def compared(
    d: Derivation, slopes: Line, misses: Line, moves: list[Line], about: list[Fraction]
) -> tuple[Matrix, list[Fraction]]:
    """K and the residual of a comparison about g, movements of the target taken in: proofs/several.md (3)."""
    rows = slopes.basis[0] if slopes.basis is not None else ()
    (middle, half), (miss, rest), far = middles(slopes, len(rows)), middles(misses, 1), moved(d, moves)
    k = tuple(tuple(abs(x) + y for x, y in zip(*each, strict=True)) for each in zip(middle, half, strict=True))
    near = [abs(dot(row, about) - g + x[0]) for row, g, x in zip(middle, about, miss, strict=True)]
    off = [dot(row, [abs(g) for g in about]) + x[0] for row, x in zip(half, rest, strict=True)]
    shifts = [sum((abs(x) * y for x, y in zip(row, far, strict=True)), Fraction(0)) for row in rows]
    return k, [x + y + z for x, y, z in zip(near, off, shifts, strict=True)]


def invariant_rows(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/several.md (3): K R + residual <= R in every row, in the basis that the ball is a box of."""
    ranges = [("range", f"target-slope[{s},{h}]") for s, h in movements(d)]
    if proves != "invariant" or [x.proves for x in used[:1]] != ["ball"]:
        raise Rejected("invariant rests on the ball, then entries")
    require(proves, "invariant", used[1:], [("entries", "slopes"), ("entries", "misses"), *ranges])
    domain = used[0].domain
    if domain is None or domain.metric is None or domain.metric.kind == "ellipsoid":
        raise Rejected("the ball is no box in any basis")
    basis = domain.metric.rows, domain.metric.inverse
    if any(line.domain != domain or line.basis != basis for line in used[1:3]):
        raise Rejected("entries of another set, or in another basis")
    k, residual = compared(d, used[1], used[2], used[3:], [Fraction(0)] * len(basis[0]))
    if not all(sum(row) * domain.radius + e <= domain.radius for row, e in zip(k, residual, strict=True)):
        raise Rejected("a row exceeds the radius")
    return domain
