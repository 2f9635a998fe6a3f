"""What each obligation of proofs/obligations.md means for a claim, derived from the claim's text alone."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import partial
from itertools import pairwise, product
from math import prod
from typing import Any

from .calculus import Unprovable
from .grammar import constant
from .horizon import onward, together
from .matrices import Metric
from .model import Quantity, Range, Requirement, Statement
from .motion import PHASE, Motion, copy, landed, motion, supported
from .names import Names, mentioned
from .pushes import grown
from .ranges import Ends
from .sector import applies, of_sector
from .signals import excess, followed, instant
from .terms import Terms

MOST_CELLS = 1_000_000
MOST_STATES = 6
REMEMBERED = 300, 1000  # obligations, and cells of each: larger ones are derived whenever they are asked for
RANGED = ("value", "sensitivity", "always", "throughout")  # requirements that a range proves


@dataclass(frozen=True)
class Ranged:
    """A variable: the cells that cover it, the ends a point must lie between, and whether it is a finite list."""

    name: str
    cells: tuple[Ends, ...]
    inside: Ends
    listed: bool


@dataclass(frozen=True)
class Meaning:
    root: int
    by: str
    variables: list[Ranged]
    on_set: bool  # whether the state runs through the certified set


@dataclass(frozen=True)
class Domain:
    """The region, or the ball of `radius` about a target known to lie in `target`, or larger by up to `beyond`.

    `radii`, `slope`: shells about the target, a line above the error curve. Of several states: the `targets` of all,
    and the metric the ball is one of.
    """

    ball: bool
    radius: Fraction
    target: Ends
    radii: tuple[Fraction, ...] = ()
    slope: Fraction = Fraction(0)
    beyond: Fraction = Fraction(0)
    targets: tuple[Ends, ...] = ()
    metric: Metric | None = None
    of: Domain | None = None  # of a box that trajectories end up in: the set they start in

    @property
    def outer(self) -> Fraction:
        return self.radius + self.beyond


def varied(statement: Statement, number: int) -> Statement:
    """The claim with what `over` of a requirement says for its ranges: proofs/obligations.md. Raises Unprovable."""
    r = statement.requirements[number - 1] if 0 < number <= len(statement.requirements) else None
    if r is None or not r.over or r.kind in RANGED:
        raise Unprovable(f"over[{number}]: no requirement that sets ranges for a proof of its own")
    folded, ends = Derivation(statement).folded(r)
    stance, uncertain = statement.stances[0], dict(statement.uncertain)
    states, fixed = dict(stance.states), [dict(statement.constants), dict(statement.gains)]
    for name, given in r.over.items():
        if name in folded | ends:
            raise Unprovable(f"over[{number}]: {name} also sets an exponent or the end of a range")
        if name in states:
            states[name] = replace(states[name], range=given)
        elif name in uncertain:
            uncertain[name] = replace(uncertain[name], range=given, values=None)
        elif any(name in f for f in fixed):  # known until now: any value of its range, the same at every step
            fixed = [{n: e for n, e in f.items() if n != name} for f in fixed]
            uncertain[name] = Quantity(name, given, None, "", True, None, False)
        else:
            raise Unprovable(f"over[{number}]: {name} is set free for a sensitivity only")
    asked = tuple(replace(x, over={}) if n == number else x for n, x in enumerate(statement.requirements, 1))
    return replace(
        statement,
        constants=fixed[0],
        gains=fixed[1],
        uncertain=uncertain,
        stances=(replace(stance, states=states),),
        requirements=asked,
    )


class Derivation:
    """Obligations of a claim about one stance."""

    def __init__(self, statement: Statement) -> None:
        stance = statement.stances[0]
        if len(statement.stances) > 1 or stance.name:
            raise Unprovable("only claims of one stance can be checked")
        if statement.route == "sector" and not applies(statement):
            raise Unprovable("the route sector is known for one state, one step and one correction")
        several = len(stance.states) > 1
        if several and (statement.route not in ("best", "slope", "split") or len(stance.states) > MOST_STATES):
            raise Unprovable(f"only the routes slope and split can be checked for two to {MOST_STATES} states")
        if not several and any(set(constant(w, statement.values)) != {Fraction(1)} for w in statement.weights.values()):
            raise Unprovable("only the weight 1 can be checked for a single state")
        self.statement, self.stance, self.terms = statement, stance, Terms()
        self.onto = statement  # whose targets a step leads to (graph.py)
        self.via: tuple[Statement, ...] = ()  # whose maps follow, of several steps through stances (graph.py)
        self.states = tuple(stance.states)
        self.state = self.states[0]  # of a claim of one state, that one
        self.motion: Motion | None = None
        if stance.dynamics is not None:
            self.motion = motion(Names(self.terms, statement, {}, ""))
        if statement.horizon > 1:
            together(statement, self.motion)
        self.leaves: dict[str, Any] = {}  # of the last tree gone through, by what it proves (several.py)
        self.meanings: dict[tuple[str, Domain | None], Meaning] = {}  # that were asked for
        self.fixed = {s for s in self.states if not self.terms.variables(self.names().of(f"target({s})"))}

    def names(self, bound: dict[str, int] | None = None, cut: str = "", parts: int = 0) -> Names:
        """`parts`: into how many a stance is cut for signals that may take any course; 0: they are constants."""
        landing = partial(self.followed, parts=parts) if parts else self.landed
        return Names(self.terms, self.statement, bound or {}, cut, landing)

    def steps(self, text: str | None) -> int:
        """How many steps are taken together: those of the claim, or fewer, @1, @2, … on the way (horizon.md)."""
        if text is None:
            return self.statement.horizon
        if text not in {f"@{j}" for j in range(1, self.statement.horizon)}:
            raise Unprovable(f"{text}: steps on the way are counted from 1 to the horizon, and below it")
        return int(text[1:])

    def after(self, steps: int, bound: dict[str, int], s: str, cut: str = "", parts: int = 0) -> int:
        """A state after so many steps, less what the target has moved until the last: proofs/horizon.md (1)."""
        names, later = self.names(bound, cut, parts), self.via or (self.statement,) * (steps - 1)
        for j, following in enumerate(later, 2):
            bound = {**bound, **onward(names, self.states, j, self.stays)}
            names = Names(self.terms, following, bound, "", self.landed)
        root = names.of(f"next({s})")
        if not later or not self.moving(s):
            return root
        first, last = (Names(self.terms, self.onto, x, "").of(f"target({s})") for x in ({}, bound))
        return self.terms.put("add", (root, self.terms.put("sub", (first, last))))

    def stays(self, x: int, name: str) -> int:
        """A state or held quantity on the way, clipped where libraries and flows are known for its range only."""
        if not self.statement.libraries and self.motion is None:
            return x
        put, (low, high) = self.terms.put, self.range(self.quantity(name))[0]
        return put("min", (put("max", (x, put("number", (), low))), put("number", (), high)))

    def quantity(self, name: str) -> Quantity:
        """The state or uncertain quantity that a variable is, at whatever step."""
        return self.stance.states.get(name) or self.statement.uncertain[name.partition("@")[0]]

    def landed(self, names: Names, root: int, phase: int | None = None) -> int:
        return root if self.motion is None else landed(names, self.motion, root, phase)

    def followed(self, names: Names, root: int, parts: int) -> int:
        if self.motion is None:
            return root
        return followed(names, self.motion, root, parts, {d: self.middle(d) for d in self.motion.signals})

    def meaning(self, name: str, domain: Domain | None) -> Meaning:
        """The obligation of that name; the set is needed where the state runs through it."""
        if (name, domain) in self.meanings:
            return self.meanings[name, domain]
        found = self.derived(name, domain)
        if sum(len(v.cells) for v in found.variables) <= REMEMBERED[1]:
            if len(self.meanings) == REMEMBERED[0]:
                self.meanings.clear()
            self.meanings[name, domain] = found
        return found

    def derived(self, name: str, domain: Domain | None) -> Meaning:
        kinds = "target|image|target-miss|target-slope|slope|split-slope|split-residual|growth"
        found = re.fullmatch(rf"({kinds})(@[^\[]+)?\[([^,]+)(?:,([^,]+))?\]", name)
        kind, after, s, by = found.groups() if found else ("", None, self.state, None)
        if s not in self.states or (after is not None and kind not in ("target-miss", "slope")):
            raise Unprovable(f"{name} is no obligation of this claim")
        if self.via and kind in ("split-slope", "split-residual"):
            raise Unprovable(f"{name}: known of single steps between stances")
        steps = self.steps(after)
        if by is None and kind == "target":
            return self.over(self.names().of(f"target({s})"))
        if by is None and kind == "image":
            return self.over(self.names().of(f"next({s})"))
        if by is None and kind == "target-miss":
            targets = {x: self.names().of(f"target({x})") for x in self.states}
            aim = Names(self.terms, self.onto, {}, "").of(f"target({s})")
            return self.over(self.terms.difference(self.after(steps, targets, s), aim))
        if kind == "target-slope" and by in self.moving(s):
            held = {h: self.statement.uncertain[h] for h in self.moving(s)}
            given = {h: (self.occurs(q), self.surely(q)) for h, q in held.items()}
            return self.over(self.names(cut=by).of(f"target({s})"), by, given)
        if (known := of_sector(self, name, domain)) is not None:
            return known
        if domain is None:
            raise Unprovable(f"{name} needs a line that gives its set")
        if kind == "slope" and by in self.states:
            bound, given = self.through(domain, {})
            return self.over(self.after(steps, bound, s, by), by, given, True)
        if kind == "split-slope" and by in self.states and self.statement.correction:
            return self.split_slope(domain, s, by)
        if kind == "split-residual" and by is None and self.statement.correction:
            return self.split_residual(domain, s)
        if kind == "growth" and by in self.states and self.motion is not None:
            bound, given = self.through(domain, {})
            phase = self.terms.put("variable", (), PHASE)
            return self.over(grown(self.names(bound), self.motion, s, by, phase), "", given, True)
        if len(self.states) == 1 and (one := self.of_one(name, domain)) is not None:
            return one
        support = re.fullmatch(r"support\[([1-9][0-9]{0,3})\]", name)
        if support and self.motion is not None and int(support[1]) <= len(self.motion.positive):
            bound, given = self.through(domain, {})
            phase = self.terms.put("variable", (), PHASE)
            root = supported(self.names(bound), self.motion, self.motion.positive[int(support[1]) - 1], phase)
            return self.over(root, "", given, True)
        number = re.fullmatch(r"require\[([1-9][0-9]{0,3})\]", name)
        if number and int(number[1]) <= len(self.statement.requirements):
            return self.required(self.statement.requirements[int(number[1]) - 1], domain)
        raise Unprovable(f"{name} is no obligation of this claim")

    def of_one(self, name: str, domain: Domain) -> Meaning | None:
        """Obligations of routes that are known for a single state only."""
        s = self.state
        courses = re.fullmatch(r"(split-)?signal-slope\[([1-9][0-9]?)\]", name)
        if (
            courses
            and self.motion is not None
            and self.motion.signals
            and (self.statement.correction or not courses[1])
        ):
            return self.under_any_course(domain, int(courses[2]), courses[1] is not None)
        shell = re.fullmatch(r"shell\[([1-9][0-9]{0,3})\]", name)
        if shell and int(shell[1]) <= len(domain.radii):
            return self.shell(domain, int(shell[1]))
        if name == f"line[{s}]" and domain.radii:
            return self.line(domain)
        return None

    def under_any_course(self, domain: Domain, parts: int, split: bool) -> Meaning:
        """proofs/signals.md: the slope of F, or of x + F − N, with a phase and a value of every signal a part."""
        if split:
            return self.split_slope(domain, self.state, self.state, parts)
        bound, given = self.through(domain, {})
        root = self.names(bound, self.state, parts).of(f"next({self.state})")
        return self.over(root, self.state, {**self.courses(parts), **given}, True)

    def courses(self, parts: int) -> dict[str, tuple[Ends, Ends]]:
        """The phases of every part of a stance, and what signals may be above the middles of their ranges there."""
        found: dict[str, tuple[Ends, Ends]] = {}
        for d in self.motion.signals if self.motion is not None else ():
            low, high = self.range(self.statement.uncertain[d])[0]
            for q in range(1, parts + 1):
                found[instant(d, q)] = ((Fraction(q - 1, parts), Fraction(q, parts)),) * 2
                found[excess(d, q)] = ((low - self.middle(d), high - self.middle(d)),) * 2
        return found

    def middle(self, signal: str) -> Fraction:
        low, high = self.range(self.statement.uncertain[signal])[0]
        return (low + high) / 2

    def uncorrected(self) -> dict[str, int]:
        """What names stand for in N, the map without the correction."""
        return dict.fromkeys(self.statement.correction, self.terms.put("number", (), Fraction(0)))

    def split_slope(self, domain: Domain, s: str, by: str, parts: int = 0) -> Meaning:
        """proofs/split.md: a slope of M e + F − N, where M turns the states named in `mirror`."""
        put, (bound, given) = self.terms.put, self.through(domain, {})
        steps, without = self.statement.horizon, {**bound, **self.uncorrected()}
        root = self.terms.difference(self.after(steps, bound, s, by, parts), self.after(steps, without, s, by, parts))
        if s == by:
            x = self.names(bound, s).of(s)
            root = put("sub", (root, x)) if s in self.stance.mirror else put("add", (x, root))
        return self.over(root, by, {**self.courses(parts), **given}, True)

    def split_residual(self, domain: Domain, s: str) -> Meaning:
        """proofs/split.md: N + F(x*) − N(x*) less where N ought to lead, the next target and M times the error."""
        put, steps, (bound, given) = self.terms.put, self.statement.horizon, self.through(domain, {})
        at = {x: self.names().of(f"target({x})") for x in self.states}
        shift = self.terms.difference(self.after(steps, at, s), self.after(steps, {**at, **self.uncorrected()}, s))
        aim = x = self.names(bound).of(s)
        turned = s in self.stance.mirror
        if turned or self.onto is not self.statement:  # else x* + M e is x
            target, error = Names(self.terms, self.onto, {}, "").of(f"target({s})"), put("sub", (x, at[s]))
            aim = put("sub" if turned else "add", (target, error))
        nominal = self.after(steps, {**bound, **self.uncorrected()}, s)
        return self.over(self.terms.difference(put("add", (nominal, shift)), aim), "", given, True)

    def line(self, domain: Domain) -> Meaning:
        """proofs/curve.md (2): |F − x*| − k|x − x*| over the set."""
        put, s = self.terms.put, self.state
        bound, given = self.through(domain, {})
        names = self.names(bound)
        target, ends = names.of(f"target({s})"), (self.after(self.statement.horizon, bound, s), names.of(s))
        far, error = (put("abs", (self.terms.difference(x, target),)) for x in ends)
        above = put("mul", (put("number", (), domain.slope), error))
        return self.over(put("sub", (far, above)), "", given, True)

    def shell(self, domain: Domain, j: int) -> Meaning:
        """proofs/curve.md (1): F − x* where the error is between two radii, the region kept to."""
        s, put, error = self.state, self.terms.put, f"error({self.state})"
        inner, outer = domain.radii[j - 2] if j > 1 else Fraction(0), domain.radii[j - 1]
        target = self.names().of(f"target({s})")
        x = self.kept(put("add", (target, put("variable", (), error))), domain)
        root = self.terms.difference(self.after(self.statement.horizon, {s: x}, s), target)
        meaning = self.over(root, "", {error: ((-outer, outer),) * 2}, True)
        cells = (-outer, -inner), (inner, outer)
        variables = [replace(v, cells=cells) if v.name == error else v for v in meaning.variables]
        return replace(meaning, variables=variables)

    def required(self, r: Requirement, domain: Domain) -> Meaning:
        if r.kind not in RANGED or r.stance is not None:
            raise Unprovable(f"{r.text!r} is not proved by a range")
        folded, ends = self.folded(r)
        if r.by in folded or set(r.over) & (folded | ends):
            raise Unprovable(
                f"{r.text!r}: a name that also sets an exponent or the end of a range is not followed there"
            )
        bound, given = self.through(domain, r.over)
        names = self.names(bound, r.by or "")
        if r.left is not None and r.right is not None:
            root = self.terms.put("sub", (names.expression(r.left), names.expression(r.right)))
        else:
            root = names.expression(r.expression) if r.expression is not None else names.of(f"next({r.state})")
        phase = self.terms.put("variable", (), PHASE) if r.kind == "throughout" else None
        root = self.landed(names, root, phase)
        freed = set(r.over) - set(self.statement.uncertain) - set(self.stance.states)
        if freed & self.supporting(names):
            raise Unprovable(f"{r.text!r}: the stance is not shown to last where a name is set free")
        if r.by is not None and self.stirred(root, r.by):
            raise Unprovable(f"{r.by}: a signal's effect within the stance follows it, and may take any course")
        met = self.terms.variables(root)
        on_set = any(s not in r.over and (s in met or f"error({s})" in met) for s in self.states)
        return self.over(root, r.by or "", given, on_set)

    def folded(self, r: Requirement) -> tuple[set[str], set[str]]:
        """Constants and gains that exponents, and that ranges and bounds asked for, rest on: taken at their values."""
        s, fixed = self.stance, {**self.statement.constants, **self.statement.gains}
        texts = [*fixed.values(), *s.define.values(), *s.next.values(), *s.target.values()]
        texts += [e for library in self.statement.libraries for e in library.at]
        if s.dynamics is not None:
            texts += [*s.dynamics.start.values(), *s.dynamics.rate.values()]
            texts += [s.dynamics.duration] if s.dynamics.duration is not None else []
        texts += [e for e in (r.expression, r.left, r.right) if e is not None]
        quantities = [*s.states.values(), *self.statement.uncertain.values()]
        ranges = [e for q in quantities if q.range for e in (q.range.lower, q.range.upper)]
        ranges += [e for q in quantities for e in (*(q.values or ()), *([q.change] if q.change else ()))]
        ranges += [e for given in r.over.values() for e in (given.lower, given.upper)]
        ranges += [e for e in (r.constant, r.start, r.end) if e is not None] + list(self.statement.weights.values())
        exponents = {n for e in [*texts, *ranges] for x in e.nodes if x.op == "power" for n in (x.name or "").split()}
        ends = {n for e in ranges for n in mentioned(e)}
        for found in (exponents, ends):
            waiting = list(found)
            while waiting:
                more = set(mentioned(fixed[n])) - found if (n := waiting.pop()) in fixed else set()
                found |= more
                waiting += more
        return exponents, ends

    def moving(self, state: str = "") -> list[str]:
        """Held quantities that may change from step to step and that the target depends on."""
        met = self.terms.variables(Names(self.terms, self.onto, {}, "").of(f"target({state or self.state})"))
        return [h for h in met if self.statement.uncertain[h].change is not None]

    def through(self, domain: Domain, over: dict[str, Range]) -> tuple[dict[str, int], dict[str, tuple[Ends, Ends]]]:
        """Replacements and ranges: what `over` says, and the state through the set."""
        bound: dict[str, int] = {}
        given: dict[str, tuple[Ends, Ends]] = {}
        for name, r in over.items():
            bound[name] = self.terms.put("variable", (), name)
            given[name] = self.ends(r)
            if name in self.statement.uncertain or name in self.stance.states:
                self.kept_by_over(name, given[name][0], domain)
        if domain.ball:
            for i, s in enumerate(self.states):
                if s not in over:
                    self.about(domain, i, bound, given)
        return bound, given

    def about(self, domain: Domain, i: int, bound: dict[str, int], given: dict[str, tuple[Ends, Ends]]) -> None:
        """A state through a ball: suprema over the outer one, points in the inner one (invariant-set.md (4))."""
        s, target = self.states[i], domain.targets[i] if domain.targets else domain.target
        (low, high), (least, most) = target, self.region(s)[0]
        wide = Fraction(1) if domain.metric is None else domain.metric.support(i)
        inner, outer = domain.radius * wide, domain.outer * wide
        if s in self.fixed:
            reach = max(least, low - outer), min(most, high + outer)
            given[s] = reach, (high - inner, low + inner)
        else:  # the ball moves with its centre: proofs/invariant-set.md
            error = f"error({s})"
            given[error] = (-outer, outer), (-inner, inner)
            held = {n: k for n, k in bound.items() if n in self.statement.uncertain}  # `over` does not reach the set
            centre = self.names(held).of(f"target({s})")
            x = self.terms.put("add", (centre, self.terms.put("variable", (), error)))
            bound[s] = self.kept(x, domain, s)

    def supporting(self, names: Names) -> set[str]:
        """Names of variables on which rests what has to stay positive throughout a stance."""
        if self.motion is None:
            return set()
        phase = self.terms.put("variable", (), PHASE)
        roots = [supported(names, self.motion, k, phase) for k in self.motion.positive]
        return {n for k in roots for n in self.terms.variables(k)}

    def stirred(self, root: int, by: str) -> bool:
        """Whether a signal's effect on a state follows a marked name: then no slope by it is known (stance.md (5))."""
        n = len(self.motion.states) if self.motion is not None else 0
        for k in self.terms.below(root):
            op, args, payload = self.terms.all[k]
            if op == "flow" and int(str(payload).split(" ")[1]) > n:
                below = {m for a in args for m in self.terms.below(a)}
                if any(self.terms.all[m][0] == "mark" and self.terms.all[m][2] == by for m in below):
                    return True
        return False

    def loose(self, route: str = "slope") -> bool:
        """Whether slopes by the state, of what a route takes them of, are those at constant signals only."""
        whole, pairs = Domain(False, Fraction(0), (Fraction(0), Fraction(0))), product(self.states, self.states)
        if route == "split":
            return any(self.stirred(self.split_slope(whole, s, x).root, x) for s, x in pairs)
        return any(self.stirred(self.names(cut=x).of(f"next({s})"), x) for s, x in pairs)

    def kept_by_over(self, name: str, wanted: Ends, domain: Domain) -> None:
        """Refuses ranges that would lead a ball's centre or a stance where the claim does not, and those of signals."""
        quantity = self.stance.states.get(name) or self.statement.uncertain[name]
        if quantity.within:
            raise Unprovable(f"{name}: a signal within the stance keeps its range")
        if name in self.supporting(self.names()):
            low, high = self.range(quantity)[1] if quantity.values is None else (Fraction(1), Fraction(0))
            if (name in self.states and domain.ball) or not (low <= wanted[0] and wanted[1] <= high):
                raise Unprovable(f"{name}: the stance is not shown to last beyond the range of the claim")
        if domain.ball and any(name in self.terms.variables(self.names().of(f"target({s})")) for s in self.states):
            low, high = self.range(quantity)[1] if quantity.values is None else (Fraction(1), Fraction(0))
            if not (low <= wanted[0] and wanted[1] <= high):
                raise Unprovable(f"{name}: the set moves with it, and is known for its own range only")

    def kept(self, x: int, domain: Domain, s: str = "") -> int:
        """A state clipped to the region, wherever the set may reach beyond it as it is written."""
        if domain.ball and not domain.beyond:
            return x
        low, high = (self.terms.put("number", (), q) for q in self.region(s)[0])
        return self.terms.put("min", (self.terms.put("max", (x, low)), high))

    def over(
        self, root: int, by: str = "", given: dict[str, tuple[Ends, Ends]] | None = None, on_set: bool = False
    ) -> Meaning:
        variables = []
        met = self.terms.variables(root)
        given = {PHASE: ((Fraction(0), Fraction(1)),) * 2, **self.signals(set(met)), **(given or {})}
        for name in met:
            if name in given:
                outer, inner = given[name]
            else:
                quantity = self.quantity(name)
                if quantity.values is not None:
                    cells = tuple(constant(e, self.statement.values) for e in quantity.values)
                    variables.append(Ranged(name, cells, cells[0], True))
                    continue
                outer, inner = self.range(quantity)
                if "@" in name and quantity.held:  # what it moves by; a point may stay
                    most = self.change(quantity.name)[1]
                    outer, inner = (-most, most), (Fraction(0), Fraction(0))
            cuts = [outer[0], *sorted(x for x in self.lines(name, root) if outer[0] < x < outer[1]), outer[1]]
            variables.append(Ranged(name, tuple(pairwise(cuts)), inner, False))
        if prod(len(v.cells) for v in variables) > MOST_CELLS:
            raise Unprovable(f"more than {MOST_CELLS} combinations of library cells and listed values")
        return Meaning(root, by, variables, on_set)

    def signals(self, met: set[str]) -> dict[str, tuple[Ends, Ends]]:
        """Signals within the stance as continuous states answer them: proofs/stance.md (5)."""
        found: dict[str, tuple[Ends, Ends]] = {}
        if self.motion is None:
            return found
        if any(self.statement.uncertain[n].within for n in met if n in self.statement.uncertain):
            raise Unprovable("a signal within the stance stands outside the rates")
        for d in self.motion.signals:
            outer, (low, high) = self.range(self.statement.uncertain[d])
            names = {copy(d, x, early) for x in self.motion.states for early in (False, True)} & met
            inner = (low, high) if len(names) == 1 else ((low + high) / 2,) * 2  # one constant signal serves them all
            found |= dict.fromkeys(names, (outer, inner))
        return found

    def lines(self, name: str, root: int) -> set[Fraction]:
        """Grid lines of the axes that read a variable directly: its range is cut there."""
        found: set[Fraction] = set()
        columns = {c: library for library in self.statement.libraries for c in library.columns}
        for k in self.terms.below(root):
            op, args, payload = self.terms.all[k]
            for grid, a in zip(columns[str(payload)].grid, args, strict=True) if op == "reading" else ():
                while self.terms.all[a][0] == "mark":
                    a = self.terms.all[a][1][0]
                if self.terms.all[a] == ("variable", (), name):
                    found.update(grid)
        return found

    def ends(self, r: Range) -> tuple[Ends, Ends]:
        """Ends that surely contain a range, and ends surely inside it."""
        low, high = (constant(e, self.statement.values) for e in (r.lower, r.upper))
        return (low[0], high[1]), (low[1], high[0])

    def range(self, quantity: Quantity) -> tuple[Ends, Ends]:
        if quantity.range is None:
            raise Unprovable(f"{quantity.name} has no range")
        return self.ends(quantity.range)

    def region(self, state: str = "") -> tuple[Ends, Ends]:
        return self.range(self.stance.states[state or self.state])

    def occurs(self, quantity: Quantity) -> Ends:
        if quantity.values is None:
            return self.range(quantity)[0]
        cells = [constant(e, self.statement.values) for e in quantity.values]
        return min(c[0] for c in cells), max(c[1] for c in cells)

    def surely(self, quantity: Quantity) -> Ends:
        """Ends between which a quantity surely varies: inside what it may be where ends are irrational."""
        if quantity.values is None:
            return self.range(quantity)[1]
        cells = [constant(e, self.statement.values) for e in quantity.values]
        return min(c[1] for c in cells), max(c[0] for c in cells)

    def change(self, held: str) -> Ends:
        """How far a held quantity moves in one step, surely and at most; never more than the width of its range."""
        quantity = self.statement.uncertain[held]
        (low, high), (inner_low, inner_high) = self.occurs(quantity), self.surely(quantity)
        moved = constant(quantity.change, self.statement.values) if quantity.change is not None else (high - low,) * 2
        return max(Fraction(0), min(moved[0], inner_high - inner_low)), min(moved[1], high - low)

    def leaves_out(self, r: Requirement) -> bool:
        """Whether `over` may leave out values that occur (always said of a defined name: it is set free)."""
        for name, given in r.over.items():
            quantity = self.stance.states.get(name) or self.statement.uncertain.get(name)
            if quantity is None and name not in self.statement.values:
                return True
            low, high = self.occurs(quantity) if quantity is not None else self.statement.values[name]
            outer = self.ends(given)[1]
            if low < outer[0] or high > outer[1]:
                return True
        return False
