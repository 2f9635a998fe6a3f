"""What has to be proved for a claim: one list of names and meanings (proofs/obligations.md).

The checker derives the same list from the claim's text on its own; tests hold the two against each other.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import partial
from itertools import pairwise, product
from math import prod

from .constants import constant
from .errors import Bad
from .graph import Graph
from .model import Claim, Quantity, Range, Requirement, Stance
from .motion import PHASE, TIME, Motion, copy, landed, motion, supported
from .pushes import grown
from .resolve import Scope
from .signals import excess, followed, instant

RANGED = ("value", "sensitivity", "always", "throughout")  # requirements that a range proves
MOST_CELLS = 1_000_000
WHOLE = ((Fraction(0), Fraction(1)),) * 2  # phases of a stance
Ends = tuple[Fraction, Fraction]


@dataclass(frozen=True, slots=True)
class Variable:
    """A quantity an obligation ranges over, cut into cells that cover it.

    `cells` lie between library grid lines, or are the values of a finite list; `inside` is where a point may
    lie (smaller than the cells only where an end is irrational); `listed` tells a finite list.
    """

    name: str
    cells: tuple[Ends, ...]
    inside: Ends
    listed: bool


@dataclass(frozen=True, slots=True)
class Obligation:
    """The range of a gate, or of its partial derivative by the marked name `by`, over the variables."""

    name: str
    root: int
    by: str
    variables: tuple[Variable, ...]
    reads: bool  # whether a library is read, also by a flow


@dataclass(frozen=True, slots=True)
class Domain:
    """The convex set an obligation refers to: the region, or a ball of a radius about the target.

    `target` is a proved enclosure of the target over all values it may take; where it is known to a gap only, the
    largest ball may be larger by `beyond`. Of several states: the `targets` of all, and how wide the ball of radius 1
    is along each.
    """

    kind: str
    radius: Fraction
    target: Ends
    beyond: Fraction = Fraction(0)
    targets: tuple[Ends, ...] = ()
    wide: tuple[Fraction, ...] = ()

    @property
    def outer(self) -> Fraction:
        return self.radius + self.beyond


def together(obligations: Sequence[Obligation]) -> list[Variable]:
    """The variables of several obligations, each with the cuts of all of them."""
    found: dict[str, Variable] = {}
    for v in (v for o in obligations for v in o.variables):
        known = found.setdefault(v.name, v)
        if known.cells != v.cells and not v.listed:
            cuts = sorted({x for cell in (*known.cells, *v.cells) for x in cell})
            found[v.name] = replace(known, cells=tuple(pairwise(cuts)))
    return list(found.values())


class Obligations:
    """The obligations of a claim of one stance over one shared graph."""

    def __init__(self, claim: Claim) -> None:
        self.claim, self.stance, self.graph = claim, claim.stances[0], Graph()
        self.states = tuple(self.stance.states)
        self.state = self.states[0]  # of a claim of one state, that one
        moves = self.stance.dynamics is not None
        self.motion: Motion | None = motion(Scope(self.graph, claim, self.stance)) if moves else None
        met = {s: self.graph.variables(self._scope({}).name(f"target({s})")) for s in self.states}
        self._fixed_targets = {s for s, names in met.items() if not names}

    def _scope(self, bound: Mapping[str, int], cut: str = "", parts: int = 0) -> Scope:
        """`parts`: into how many a stance is cut for signals of any course; 0: they are constants."""
        landing = partial(self._followed, parts=parts) if parts else self._landed
        return Scope(self.graph, self.claim, self.stance, bound, cut, landing)

    def _followed(self, scope: Scope, gate: int, parts: int) -> int:
        m = self.motion
        return gate if m is None else followed(scope, m, gate, parts, {d: self._middle(d) for d in m.signals})

    def _landed(self, scope: Scope, gate: int, phase: int | None = None) -> int:
        return gate if self.motion is None else landed(scope, self.motion, gate, phase)

    def target(self, state: str = "") -> Obligation:
        """target[s]: x* over the held quantities."""
        s = state or self.state
        return self._of(f"target[{s}]", self._scope({}).name(f"target({s})"))

    def image(self, state: str = "") -> Obligation:
        """image[s]: F over region and uncertain values."""
        s = state or self.state
        return self._of(f"image[{s}]", self._scope({}).name(f"next({s})"))

    def slope(
        self, domain: Domain, of: str = "", by: str = "", steps: int = 0, way: Sequence[Stance] = ()
    ) -> Obligation:
        """slope[s,x]: ∂F_s/∂x over the set and uncertain values; slope@j[s,x]: of j steps, fewer than the horizon.

        `way`: the stances of the steps that follow, and that whose target is theirs.
        """
        bound, ranges = self._set(domain)
        s, x, on = of or self.state, by or self.state, f"@{steps}" if steps else ""
        return self._of(f"slope{on}[{s},{x}]", self._after(bound, s, x, steps, way=way), x, ranges)

    def miss(self, state: str = "", steps: int = 0, way: Sequence[Stance] = ()) -> Obligation:
        """target-miss[s]: F(x*, w) − x* over uncertain values; target-miss@j[s]: of j steps.

        `way`: stances that follow, the second x* that of the last.
        """
        s, on = state or self.state, f"@{steps}" if steps else ""
        targets = {x: self._scope({}).name(f"target({x})") for x in self.states}
        aim = Scope(self.graph, self.claim, way[-1] if way else self.stance).name(f"target({s})")
        end = self._after(targets, s, steps=steps, way=way)
        return self._of(f"target-miss{on}[{s}]", self.graph.difference(end, aim))

    def _after(
        self, bound: Mapping[str, int], s: str, cut: str = "", steps: int = 0, parts: int = 0,
        way: Sequence[Stance] = (),
    ) -> int:  # fmt: skip
        """A state after the steps of the horizon, or as many as said, less what the target has moved until the last.

        proofs/horizon.md (1)
        """
        scope, g, aim = self._scope(bound, cut, parts), self.graph, way[-1] if way else self.stance
        later = way[:-1] or (self.stance,) * ((steps or self.claim.horizon) - 1)
        for j, stance in enumerate(later, 2):
            bound = {**bound, **self._onward(scope, j)}
            scope = Scope(g, self.claim, stance, bound, "", self._landed)
        root = scope.name(f"next({s})")
        first = Scope(g, self.claim, aim).name(f"target({s})")
        if not later or all(self.claim.uncertain[h].change is None for h in g.variables(first)):
            return root
        last = Scope(g, self.claim, aim, bound).name(f"target({s})")
        return g.add("add", root, g.add("sub", first, last))

    def _onward(self, scope: Scope, step: int) -> dict[str, int]:
        """Gates that names stand for at a step, from those of the step before."""
        g, found = self.graph, dict[str, int]()
        for n, q in self.claim.uncertain.items():
            again = g.add("variable", name=f"{n}@{step}")
            if not q.held:
                found[n] = again
            elif q.change is not None:
                found[n] = self._stays(g.add("add", scope.name(n), again), n)
        return found | {s: self._stays(scope.name(f"next({s})"), s) for s in self.states}

    def _stays(self, x: int, name: str) -> int:
        """Clipped to the range a library or a flow is known for, where the claim has one."""
        if not self.claim.libraries and self.motion is None:
            return x
        g, (low, high) = self.graph, self._cells(self._quantity(name))[0][0]
        return g.add("min", g.add("max", x, g.number(low)), g.number(high))

    def _quantity(self, name: str) -> Quantity:
        """The state or uncertain quantity that a variable is, at whatever step."""
        return self.stance.states.get(name) or self.claim.uncertain[name.partition("@")[0]]

    def moving(self, state: str = "") -> list[str]:
        """Held quantities with a `change` on which the target depends."""
        met = self.graph.variables(self._scope({}).name(f"target({state or self.state})"))
        return [h for h in met if self.claim.uncertain[h].change is not None]

    def target_slope(self, held: str, state: str = "") -> Obligation:
        """target-slope[s,h]: ∂x*/∂h over the held quantities."""
        s = state or self.state
        root = self._scope({}, cut=held).name(f"target({s})")
        # the mean value theorem runs along a segment, so a finite list counts as all that lies between
        hulls = {h: (self._occurs(self.claim.uncertain[h]),) * 2 for h in self.moving(s)}
        return self._of(f"target-slope[{s},{held}]", root, held, hulls)

    def split_slope(self, domain: Domain, of: str = "", by: str = "", parts: int = 0) -> Obligation:
        """split-slope[s,x]: ∂(M e + F − N)_s/∂x over the set, N the map without its correction (proofs/split.md).

        M turns the states that the stance names in `mirror`, and keeps the others.
        """
        s, x, g, (bound, ranges) = of or self.state, by or self.state, self.graph, self._set(domain)
        plain, nominal = (self._after(b, s, x, parts=parts) for b in (bound, {**bound, **self._uncorrected()}))
        root = g.difference(plain, nominal)
        if s == x:
            root = g.add("sub", root, self._scope(bound, x).name(x)) if s in self.stance.mirror else g.add(
                "add", self._scope(bound, x).name(x), root
            )  # fmt: skip
        return self._of(f"split-slope[{s},{x}]", root, x, ranges)

    def under_any_course(self, domain: Domain, parts: int, route: str = "slope") -> Obligation:
        """signal-slope[M], split-signal-slope[M]: what the route takes slopes of, signals of any course in M parts.

        Each part has a phase and a value of every signal (proofs/signals.md). Raises Bad where no such bound is known.
        """
        s, (bound, ranges) = self.state, self._set(domain)
        if route == "split":
            found = self.split_slope(domain, parts=parts)
            return self._of(f"split-signal-slope[{parts}]", found.root, s, {**self._courses(parts), **ranges})
        root = self._scope(bound, s, parts).name(f"next({s})")
        return self._of(f"signal-slope[{parts}]", root, s, {**self._courses(parts), **ranges})

    def _courses(self, parts: int) -> dict[str, tuple[Ends, Ends]]:
        """Phases of the parts of a stance, and what signals may be above the middles of their ranges."""
        found: dict[str, tuple[Ends, Ends]] = {}
        for d in self.motion.signals if self.motion is not None else ():
            ((low, high),), _, _ = self._cells(self.claim.uncertain[d])
            middle = self._middle(d)
            for q in range(parts):
                found[instant(d, q + 1)] = ((Fraction(q, parts), Fraction(q + 1, parts)),) * 2
                found[excess(d, q + 1)] = ((low - middle, high - middle),) * 2
        return found

    def _middle(self, signal: str) -> Fraction:
        ((low, high),), _, _ = self._cells(self.claim.uncertain[signal])
        return (low + high) / 2

    def split_residual(self, domain: Domain, of: str = "", onto: Stance | None = None) -> Obligation:
        """split-residual[s]: N + F(x*) − N(x*) less where N ought to lead, x* + M e, over the set.

        `onto`: that x* is of the stance that follows.
        """
        s, g, (bound, ranges) = of or self.state, self.graph, self._set(domain)
        at = {x: self._scope({}).name(f"target({x})") for x in self.states}
        shift = g.difference(self._after(at, s), self._after({**at, **self._uncorrected()}, s))
        wanted = state = self._scope(bound).name(s)
        if s in self.stance.mirror or not (onto is None or onto is self.stance):
            aim = Scope(self.graph, self.claim, onto or self.stance).name(f"target({s})")
            wanted = g.add("sub" if s in self.stance.mirror else "add", aim, g.add("sub", state, at[s]))
        nominal = self._after({**bound, **self._uncorrected()}, s)
        return self._of(f"split-residual[{s}]", g.difference(g.add("add", nominal, shift), wanted), "", ranges)

    def sector(self, domain: Domain) -> tuple[Obligation, Obligation, Obligation, Obligation]:
        """sector-sensitivity[s], sector-gain[s], sector-start[s], sector-residual[s] (proofs/sector.md).

        ∂F/∂n for a share of the one correction n, ∂n/∂s, n at the target, and N − s. Raises Bad where not known.
        """
        s, g, (by,) = self.state, self.graph, self.claim.correction
        timely = {TIME, *(self.motion.states if self.motion is not None else ())}
        if timely & set(g.variables(self._scope({}).name(by))):
            raise Bad(f"{by} follows the stance itself, so it is not known as a factor of the error")
        bound, ranges = self._set(domain)
        share = f"share({by})"
        part = g.add("mul", g.add("variable", name=share), self._scope(bound).name(by))
        follows = self._scope({**bound, by: part}, by).name(f"next({s})")
        if self._stirred(follows, by):
            raise Bad(f"the effect of a signal within the stance follows {by}, so no sensitivity by it is known")
        nominal = self._scope({**bound, **self._uncorrected()}).name(f"next({s})")
        start = self._scope({s: self._scope({}).name(f"target({s})")}).name(by)
        return (
            self._of(f"sector-sensitivity[{s}]", follows, by, {**ranges, share: WHOLE}),
            self._of(f"sector-gain[{s}]", self._scope(bound, s).name(by), s, ranges),
            self._of(f"sector-start[{s}]", g.difference(start, g.number(0))),
            self._of(f"sector-residual[{s}]", g.difference(nominal, self._scope(bound).name(s)), "", ranges),
        )

    def factor(self, domain: Domain, gain: str) -> Obligation:
        """sector-factor[s,h]: ∂a/∂s over the set, where the one correction is h·a. Raises Bad where it is not."""
        s, (bound, ranges), (by,) = self.state, self._set(domain), self.claim.correction
        found = self.graph.factor(self._scope(bound, s).name(by), gain)
        if found is None:
            raise Bad(f"{gain} is no factor of {by}")
        return self._of(f"sector-factor[{s},{gain}]", found, s, ranges)

    def _uncorrected(self) -> dict[str, int]:
        return dict.fromkeys(self.claim.correction, self.graph.number(0))

    def shell(self, number: int, domain: Domain, radii: tuple[Fraction, ...]) -> Obligation:
        """shell[j]: F − x* where the error lies between radii j − 1 and j (proofs/curve.md)."""
        inner, outer = radii[number - 2] if number > 1 else Fraction(0), radii[number - 1]
        found, cells = self.error(domain, outer), ((-outer, -inner), (inner, outer))
        error = f"error({self.state})"
        variables = tuple(replace(v, cells=cells) if v.name == error else v for v in found.variables)
        return replace(found, name=f"shell[{number}]", variables=variables)

    def error(self, domain: Domain, radius: Fraction) -> Obligation:
        """F − x* over the part of the set within a radius of the target (an estimate's, not proved as such)."""
        s, g = self.state, self.graph
        target = self._scope({}).name(f"target({s})")
        x = self._kept(g.add("add", target, g.add("variable", name=f"error({s})")), domain)
        root = g.difference(self._after({s: x}, s), target)
        return self._of("error", root, "", {f"error({s})": ((-radius, radius),) * 2})

    def line(self, domain: Domain, slope: Fraction) -> Obligation:
        """line[s]: |F − x*| − k|x − x*| over the set (proofs/curve.md)."""
        s, g = self.state, self.graph
        bound, ranges = self._set(domain)
        scope = self._scope(bound)
        target, ends = scope.name(f"target({s})"), (self._after(bound, s), scope.name(s))
        far, error = (g.add("abs", g.difference(x, target)) for x in ends)
        return self._of(f"line[{s}]", g.add("sub", far, g.add("mul", g.number(slope), error)), "", ranges)

    def requirement(self, number: int, domain: Domain) -> Obligation:
        """require[i] of a `value`, `sensitivity` or `always` (left − right): over the set, or what `over` says."""
        wanted = self.claim.requirements[number - 1]
        bound, ranges = self._set(domain, wanted.over)
        scope = self._scope(bound, cut=wanted.by or "")
        freed = set(wanted.over) - set(self.claim.uncertain) - set(self.stance.states)
        if freed & self._supporting(scope):
            raise Bad(f"over.{min(freed)}: the stance is not shown to last where this name is set free")
        if wanted.left is not None and wanted.right is not None:
            root, phase = self.graph.add("sub", scope.node(wanted.left), scope.node(wanted.right)), None
            if wanted.kind == "throughout":
                phase = self.graph.add("variable", name=PHASE)
            return self._of(f"require[{number}]", self._landed(scope, root, phase), "", ranges)
        if wanted.expression is not None:
            root = self._landed(scope, scope.node(wanted.expression))
            return self._of(f"require[{number}]", root, "", ranges)
        root = scope.name(f"next({wanted.state})")
        if self._stirred(root, wanted.by or ""):
            raise Bad(f"the effect of a signal within the stance follows {wanted.by}, so no sensitivity by it is known")
        return self._of(f"require[{number}]", root, wanted.by or "", ranges)

    def support(self, number: int, domain: Domain) -> Obligation:
        """support[k]: what has to stay positive throughout a stance, over the set (proofs/stance.md)."""
        bound, ranges = self._set(domain)
        if self.motion is None:
            raise ValueError("no stance")
        phase = self.graph.add("variable", name=PHASE)
        root = supported(self._scope(bound), self.motion, self.motion.positive[number - 1], phase)
        return self._of(f"support[{number}]", root, "", ranges)

    def growth(self, domain: Domain, of: str = "", by: str = "") -> Obligation:
        """growth[s,x]: how a push of x within the stance has grown in s by touchdown (proofs/stance.md (6), (7))."""
        bound, ranges = self._set(domain)
        s, x = of or self.state, by or self.state
        if self.motion is None:
            raise ValueError("no stance")
        phase = self.graph.add("variable", name=PHASE)
        return self._of(f"growth[{s},{x}]", grown(self._scope(bound), self.motion, s, x, phase), "", ranges)

    def coefficients(self) -> list[Obligation]:
        """Coefficients of the rates over region, uncertain values and phases, for where they are not defined."""
        m, phase = self.motion, self.graph.add("variable", name=PHASE)
        entries = [k for row in (*m.matrix, m.free) for k in row if k is not None] if m is not None else []
        return [self._of("rate", supported(self._scope({}), m, k, phase)) for k in entries if m is not None]

    def spread(self, name: str) -> Ends:
        """Ends that surely contain all values of a variable, also those that `over` of a range asks for."""
        found = [self._occurs(self.stance.states.get(name) or self.claim.uncertain[name])]
        found += [self._outer(r.over[name]) for r in self.claim.requirements if r.kind in RANGED and name in r.over]
        return min(x[0] for x in found), max(x[1] for x in found)

    def ranging(self, gate: int) -> Obligation:
        """The range of any gate over the region and all uncertain values."""
        return self._of("part", gate)

    def leaves_out(self, requirement: Requirement) -> list[str]:
        """Declared names for which `over` leaves out values that occur."""
        left = []
        for name, given in requirement.over.items():
            low, high = self._outer(given)
            quantity = self.stance.states.get(name) or self.claim.uncertain.get(name)
            if quantity is not None:
                occurs = self._occurs(quantity)
            elif name in self.claim.values:
                occurs = self.claim.values[name]
            else:
                continue
            if occurs[0] < low or occurs[1] > high:
                left.append(name)
        return left

    def _set(
        self, domain: Domain, over: Mapping[str, Range] | None = None
    ) -> tuple[dict[str, int], dict[str, tuple[Ends, Ends]]]:
        """Gates and ranges that replace names, so that the state runs through the set."""
        bound: dict[str, int] = {}
        ranges: dict[str, tuple[Ends, Ends]] = {}
        for name, given in (over or {}).items():
            bound[name] = self.graph.add("variable", name=name)
            ranges[name] = self._outer(given), self._inner(given)
            if name in self.claim.uncertain or name in self.stance.states:
                self._kept_by_over(name, ranges[name][0], domain)
        for i, s in enumerate(self.states if domain.kind == "ball" else ()):
            if s not in bound:
                self._about(domain, i, bound, ranges)
        return bound, ranges

    def _about(self, domain: Domain, i: int, bound: dict[str, int], ranges: dict[str, tuple[Ends, Ends]]) -> None:
        """A state through a ball: suprema over the outer one, points in the inner one (invariant-set.md (4))."""
        s, g = self.states[i], self.graph
        (low, high), (least, most) = domain.targets[i] if domain.targets else domain.target, self.region(s)[0]
        wide = domain.wide[i] if domain.wide else Fraction(1)
        r, far = domain.radius * wide, domain.outer * wide
        if s in self._fixed_targets:
            clipped = max(least, low - far), min(most, high + far)
            ranges[s] = clipped if domain.beyond or domain.wide else (low - far, high + far), (high - r, low + r)
            return
        # the ball moves with the target: proofs/invariant-set.md, sheared set
        ranges[f"error({s})"] = (-far, far), (-r, r)
        kept = {n: gate for n, gate in bound.items() if n in self.claim.uncertain}  # `over` does not reach the set
        about = self._scope(kept).name(f"target({s})")
        bound[s] = self._kept(g.add("add", about, g.add("variable", name=f"error({s})")), domain, s)

    def _supporting(self, scope: Scope) -> set[str]:
        """Variables on which rests what has to stay positive throughout a stance."""
        if self.motion is None:
            return set()
        phase = self.graph.add("variable", name=PHASE)
        return {n for k in self.motion.positive for n in self.graph.variables(supported(scope, self.motion, k, phase))}

    def loose(self, route: str) -> bool:
        """Whether the slopes of a route are those at constant signals only (proofs/stance.md (5))."""
        whole = Domain("region", Fraction(0), (Fraction(0), Fraction(0)))
        pairs, slope = product(self.states, self.states), self.split_slope if route == "split" else self.slope
        return any(self._stirred(slope(whole, s, x).root, x) for s, x in pairs)

    def _stirred(self, root: int, by: str) -> bool:
        """Whether a signal's effect follows a marked name (proofs/stance.md (5))."""
        n = len(self.motion.states) if self.motion is not None else 0
        for k in self.graph.reached((root,)):
            gate = self.graph.gates[k]
            if gate.op == "flow" and int(gate.name.split(" ")[1]) > n:
                met = (self.graph.gates[m] for m in self.graph.reached(gate.args))
                if any(m.op == "mark" and m.name == by for m in met):
                    return True
        return False

    def _kept_by_over(self, name: str, wanted: Ends, domain: Domain) -> None:
        """A ball's centre keeps to the range its held quantities have in the claim, and signals to theirs."""
        quantity = self.stance.states.get(name) or self.claim.uncertain[name]
        if quantity.within:
            raise Bad(f"over.{name}: a signal within the stance keeps its range; change it in [uncertain]")
        if name in self._supporting(self._scope({})):
            _, (low, high), listed = self._cells(quantity)
            beyond = listed or not (low <= wanted[0] and wanted[1] <= high)
            if beyond or (name in self.states and domain.kind == "ball"):
                raise Bad(f"over.{name}: the stance is shown to last within the claim's own range only; narrow it")
        centred = [s for s in self.states if name in self.graph.variables(self._scope({}).name(f"target({s})"))]
        if domain.kind == "ball" and centred:
            _, (low, high), listed = self._cells(quantity)
            if listed or not (low <= wanted[0] and wanted[1] <= high):
                raise Bad(f"over.{name}: the set moves with {name} and is known for its own range only; narrow it")

    def _kept(self, x: int, domain: Domain, state: str = "") -> int:
        """The state x, clipped to the region where the set as written may reach beyond it."""
        if domain.kind == "ball" and not domain.beyond:
            return x
        g, (low, high) = self.graph, self.region(state)[0]
        return g.add("min", g.add("max", x, g.number(low)), g.number(high))

    def _of(
        self, name: str, root: int, by: str = "", ranges: Mapping[str, tuple[Ends, Ends]] | None = None
    ) -> Obligation:
        given = {PHASE: WHOLE, **self._signals(self.graph.variables(root)), **(ranges or {})}
        variables = tuple(self._variable(v, root, given) for v in self.graph.variables(root))
        if prod(len(v.cells) for v in variables) > MOST_CELLS:
            raise Bad(f"more than {MOST_CELLS} combinations of library cells and listed values; shorten the lists")
        reads = any(self.graph.gates[k].op in ("reading", "flow") for k in self.graph.reached((root,)))
        return Obligation(name, root, by, variables, reads)

    def _signals(self, met: list[str]) -> dict[str, tuple[Ends, Ends]]:
        """Ranges of signals within a stance, as each continuous state answers them; points of several are constants."""
        loose = [n for n in met if n in self.claim.uncertain and self.claim.uncertain[n].within]
        if loose:
            raise Bad(f"uncertain.{loose[0]}: a signal within the stance may only stand in dynamics.rate")
        found: dict[str, tuple[Ends, Ends]] = {}
        for d in self.motion.signals if self.motion is not None else ():
            states = self.motion.states if self.motion is not None else ()
            copies = [n for x in states for early in (False, True) if (n := copy(d, x, early)) in met]
            (outer,), inner, _ = self._cells(self.claim.uncertain[d])
            middle = (inner[0] + inner[1]) / 2
            found |= {n: (outer, inner if len(copies) == 1 else (middle, middle)) for n in copies}
        return found

    def _variable(self, name: str, root: int, ranges: Mapping[str, tuple[Ends, Ends]]) -> Variable:
        cells, inside, listed = (
            ((ranges[name][0],), ranges[name][1], False)
            if name in ranges
            else self._moved(name)
            if "@" in name and self._quantity(name).held
            else self._cells(self._quantity(name))
        )
        if not listed:
            (low, high), lines = cells[0], self._lines(name, root)
            ends = [low, *sorted(x for x in lines if low < x < high), high]
            cells = tuple(pairwise(ends))
        return Variable(name, cells, inside, listed)

    def _moved(self, name: str) -> tuple[tuple[Ends, ...], Ends, bool]:
        """What a held quantity moves by in a step of a horizon; a point may stay."""
        most = self.change(self._quantity(name).name)
        return ((-most, most),), (Fraction(0), Fraction(0)), False

    def _lines(self, name: str, root: int) -> set[Fraction]:
        """Grid lines of the library axes that read a variable directly."""
        gates, lines = self.graph.gates, set[Fraction]()
        for k in self.graph.reached((root,)):
            if gates[k].op == "reading":
                for axis, a in enumerate(gates[k].args):
                    while gates[a].op == "mark":
                        a = gates[a].args[0]
                    if gates[a].op == "variable" and gates[a].name == name:
                        lines.update(self.claim.libraries[int(gates[k].value or 0)].grid[axis])
        return lines

    def _cells(self, quantity: Quantity) -> tuple[tuple[Ends, ...], Ends, bool]:
        if quantity.values is not None:
            cells = tuple(constant(e, self.claim.values) for e in quantity.values)
            return cells, (cells[0][0], cells[-1][1]), True
        if quantity.range is None:
            raise ValueError(f"{quantity.name} has neither a range nor values")
        return (self._outer(quantity.range),), self._inner(quantity.range), False

    def _occurs(self, quantity: Quantity) -> Ends:
        cells, _, _ = self._cells(quantity)
        return min(c[0] for c in cells), max(c[1] for c in cells)

    def region(self, state: str = "") -> tuple[Ends, Ends]:
        """The region of a state: ends that surely contain it, and ends surely inside it."""
        cells, inside, _ = self._cells(self.stance.states[state or self.state])
        return cells[0], inside

    def change(self, held: str) -> Fraction:
        """Upper end of how far a held quantity moves in one step, at most the width of its range."""
        quantity = self.claim.uncertain[held]
        low, high = self._occurs(quantity)
        moved = constant(quantity.change, self.claim.values)[1] if quantity.change is not None else Fraction(0)
        return min(high - low, moved)

    def _outer(self, given: Range) -> Ends:
        return constant(given.lower, self.claim.values)[0], constant(given.upper, self.claim.values)[1]

    def _inner(self, given: Range) -> Ends:
        return constant(given.lower, self.claim.values)[1], constant(given.upper, self.claim.values)[0]
