"""What the lines of a proof amount to: quantities and verdicts, derived afresh and held against the claimed ones."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from .grammar import constant
from .rules import Line, Proof, Rejected, quantity

DIGITS = 20
REMARK = 1000
SLACK = Fraction(1, 10**6)  # share by which the largest ball may be missed where the target is known to a gap only


@dataclass(frozen=True)
class Span:
    """Ends of a quantity; None where nothing is known."""

    lower: Fraction | None
    upper: Fraction | None


@dataclass(frozen=True)
class Outcome:
    verdict: str
    value: Span | None
    attained: Span | None = None


class Results:
    """Everything `results` may claim; `needed` collects the lines it rests on."""

    def __init__(self, proof: Proof) -> None:
        self.proof, self.derivation, self.needed = proof, proof.derivation, set[int]()
        self.statement, s = proof.derivation.statement, proof.derivation.state
        self.state = s
        pair, ball = self.one("slope", "slope"), self.one("largest-ball", "ball")
        if ball is None:
            raise Rejected("the proof has no ball about the target")
        invariant = self.one("invariant-region", "invariant") or self.one("invariant-ball", "invariant")
        self.domain = invariant.domain if invariant is not None else ball.domain
        self.settled = invariant is not None
        self.kind = None if invariant is None else "region" if invariant.rule == "invariant-region" else "ball"
        bounded = self.one("ultimate-bound", "bound")
        if pair is not None and pair.domain != self.domain:
            raise Rejected("gain and residual refer to another set")
        centre = proof.lines[ball.uses[0]].concludes
        self.centre = Span(centre["lower"], centre["upper"])
        self.radius = Span(ball.concludes["radius"], self.reach() if self.settled else None)
        near = (
            self.radius.upper is not None and self.radius.upper - ball.concludes["radius"] <= SLACK * self.radius.upper
        )
        self.whole = self.kind == "region" or (
            self.settled and self.escapes() and near and ball.concludes["radius"] > 0
        )
        self.gain = self.residual = Span(None, None)
        self.bound: Span | None = None
        if pair is not None:
            least = self.moved_at_least(far(self.attained(f"target-miss[{s}]")))
            self.gain = Span(far(self.attained(f"slope[{s},{s}]")), pair.concludes["gain"])
            self.residual = Span(least, pair.concludes["residual"])
            if bounded is not None:
                k = self.gain.lower
                lower = None if k is None or least is None or k >= 1 else least / (1 - k)
                self.bound = Span(lower, bounded.concludes["bound"])
        self.requirements = [self.required(n, r) for n, r in enumerate(self.statement.requirements, 1)]

    def escapes(self) -> bool:
        """Whether a point leaves the region: else no ball is the set (proofs/invariant-set.md (4))."""
        (low, high), _ = self.derivation.region()
        points = self.lines("point", f"image[{self.state}]")
        out = [n for n, x in points if x.concludes["lower"] > high or x.concludes["upper"] < low]
        self.needed.update(out[:1])
        return bool(out)

    def reach(self) -> Fraction | None:
        """The least distance to the edge of the region of a target surely taken."""
        (low, high), _ = self.derivation.region()
        found = [
            (min(high - x.concludes["lower"], x.concludes["upper"] - low), n)
            for n, x in self.lines("point", f"target[{self.state}]")
        ]
        if not found:
            return None
        self.needed.add(min(found)[1])
        return min(found)[0]

    def moved_at_least(self, residual: Fraction | None) -> Fraction | None:
        """The residual surely reached: miss of the target and how far held quantities surely move it."""
        for h in self.derivation.moving():
            moved = far(self.attained(f"target-slope[{self.state},{h}]"))
            residual = None if residual is None or moved is None else residual + moved * self.derivation.change(h)[0]
        return residual

    def lines(self, rule: str, proves: str) -> list[tuple[int, Line]]:
        return [(n, x) for n, x in self.proof.lines.items() if (x.rule, x.proves) == (rule, proves)]

    def one(self, rule: str, proves: str) -> Line | None:
        found = self.lines(rule, proves)
        if len(found) > 1:
            raise Rejected(f"{proves} is proved more than once by {rule}")
        for n, line in found:
            self.needed.add(n)
            return line
        return None

    def attained(self, proves: str) -> Span:
        """The largest value surely taken (upper) and the smallest (lower), by point lines."""
        high: tuple[Fraction, int] | None = None
        low: tuple[Fraction, int] | None = None
        for n, line in self.lines("point", proves):
            if line.domain is not None and line.domain != self.domain:
                raise Rejected(f"{proves}: a point of another set")
            if high is None or line.concludes["lower"] > high[0]:
                high = line.concludes["lower"], n
            if low is None or line.concludes["upper"] < low[0]:
                low = line.concludes["upper"], n
        self.needed.update(x[1] for x in (high, low) if x is not None)
        return Span(low[0] if low else None, high[0] if high else None)

    def required(self, number: int, r: Any) -> Outcome:
        if r.stance is not None:
            return Outcome("undecided", None)
        c = constant(r.constant, self.statement.values) if r.constant is not None else None
        free = self.statement.route == "slope" or not self.statement.correction
        if r.kind == "settles":
            ok = self.whole and self.bound is not None and less(self.bound.upper, self.radius.lower)
            return Outcome("proved" if ok else "undecided", self.bound)
        if r.kind in ("value", "sensitivity"):
            return self.ranged(number, r, c)
        spans = {"gain": self.gain, "residual": self.residual, "bound": self.bound, "radius": self.radius}
        span = spans.get(r.kind)
        if r.over or span is None or c is None or (r.kind == "radius" and not self.settled):
            return Outcome("undecided", None)
        if r.kind == "radius":
            proved = compared(r.relation, Span(span.lower, None), c)
        else:
            proved = self.whole and compared(r.relation, Span(None, span.upper), c)
        refutable = r.kind in ("gain", "residual") and free
        refuted = refutable and opposed(r.relation, Span(None, span.lower), c)
        return Outcome("proved" if proved else "refuted" if refuted else "undecided", span)

    def ranged(self, number: int, r: Any, c: tuple[Fraction, Fraction] | None) -> Outcome:
        line, taken = self.one("range", f"require[{number}]"), self.attained(f"require[{number}]")
        if line is not None and line.domain != self.domain:
            raise Rejected(f"require[{number}]: over another set than the gain")
        value = Span(line.concludes["lower"], line.concludes["upper"]) if line is not None else None
        proved = line is not None and (self.whole or not line.on_set)
        if c is not None:
            proved = proved and value is not None and compared(r.relation, value, c)
            if opposed(r.relation, taken, c):
                return Outcome("refuted", value, taken)
        return Outcome("proved" if proved else "undecided", value, taken)


def far(span: Span) -> Fraction | None:
    """Largest magnitude surely taken."""
    ends = [x for x in (span.upper, None if span.lower is None else -span.lower) if x is not None]
    return max(max(ends), Fraction(0)) if ends else None


def less(a: Fraction | None, b: Fraction | None) -> bool:
    return a is not None and b is not None and a < b


def compared(relation: str, span: Span, c: tuple[Fraction, Fraction]) -> bool:
    """Whether every value within the span stands in the relation to the constant, on ends and never by negation."""
    if relation == "<":
        return span.upper is not None and span.upper < c[0]
    if relation == "<=":
        return span.upper is not None and span.upper <= c[0]
    if relation == ">":
        return span.lower is not None and span.lower > c[1]
    return relation == ">=" and span.lower is not None and span.lower >= c[1]


def opposed(relation: str, taken: Span, c: tuple[Fraction, Fraction]) -> bool:
    """Whether a value surely taken breaks the relation."""
    if relation == "<":
        return taken.upper is not None and taken.upper >= c[1]
    if relation == "<=":
        return taken.upper is not None and taken.upper > c[1]
    if relation == ">":
        return taken.lower is not None and taken.lower <= c[0]
    return relation == ">=" and taken.lower is not None and taken.lower < c[0]


def hold(results: Results, claimed: Any) -> None:
    """Raises Rejected where `results` of a certificate says more than, or other than, what was derived."""
    s = results.state
    settled, bound, radius = results.settled, results.bound, results.radius if results.settled else None
    keys(
        claimed,
        "results",
        "set route gain residual bound sharp_bound radius states routes metric sensitivities gain_intervals "
        "requirements",
    )
    if claimed["set"] is not None or settled:
        keys(claimed["set"], "results.set", "kind centre radius")
        same(claimed["set"]["kind"], results.kind, "results.set.kind")
        keys(claimed["set"]["centre"], "results.set.centre", s)
        span(claimed["set"]["centre"][s], results.centre, "results.set.centre")
        span(claimed["set"]["radius"], radius, "results.set.radius", inward=True)
    same(claimed["route"], "slope", "results.route")
    for name, derived in (("gain", results.gain), ("residual", results.residual), ("bound", bound)):
        span(claimed[name], derived, f"results.{name}")
    span(claimed["radius"], radius, "results.radius", inward=True)
    same(claimed["sharp_bound"], None, "results.sharp_bound")
    keys(claimed["states"], "results.states", s)
    keys(claimed["states"][s], f"results.states.{s}", "bound sharp_bound radius push")
    span(claimed["states"][s]["bound"], bound, f"results.states.{s}.bound")
    span(claimed["states"][s]["radius"], radius, f"results.states.{s}.radius", inward=True)
    same([claimed["states"][s]["sharp_bound"], claimed["states"][s]["push"]], [None, None], f"results.states.{s}")
    keys(claimed["routes"], "results.routes", "slope")
    keys(claimed["routes"]["slope"], "results.routes.slope", "gain residual bound")
    for name, derived in (("gain", results.gain), ("residual", results.residual), ("bound", bound)):
        span(claimed["routes"]["slope"][name], derived, f"results.routes.slope.{name}")
    same(claimed["metric"], {"kind": "box", "weights": {s: "1"}}, "results.metric")
    same(claimed["gain_intervals"], [], "results.gain_intervals")
    bands(results, claimed["sensitivities"])
    if not isinstance(claimed["requirements"], list) or len(claimed["requirements"]) != len(results.requirements):
        raise Rejected("results.requirements: one entry a requirement of the claim")
    for number, (entry, outcome) in enumerate(zip(claimed["requirements"], results.requirements, strict=True), 1):
        requirement(results, number, entry, outcome)


def requirement(results: Results, number: int, entry: Any, outcome: Outcome) -> None:
    r, at = results.statement.requirements[number - 1], f"results.requirements[{number}]"
    ranged = r.kind in ("value", "sensitivity")
    keys(entry, at, "that verdict value limited_by" + (" attained" if ranged else ""))
    same(entry["that"], r.text, f"{at}.that")
    if entry["verdict"] not in ("proved", "refuted", "undecided"):
        raise Rejected(f"{at}.verdict: proved, refuted or undecided")
    if entry["verdict"] != "undecided" and entry["verdict"] != outcome.verdict:
        raise Rejected(f"{at}.verdict: {entry['verdict']} is claimed, {outcome.verdict} was derived")
    span(entry["value"], outcome.value, f"{at}.value", inward=r.kind == "radius")
    if ranged:
        span(entry["attained"], outcome.attained, f"{at}.attained", within=True)
    remark = entry["limited_by"]
    if remark is not None and (
        not isinstance(remark, str) or not remark or len(remark) > REMARK or not remark.isprintable()
    ):
        raise Rejected(f"{at}.limited_by: null or a printable remark")
    if remark is None and (entry["verdict"] == "undecided" or results.derivation.leaves_out(r)):
        raise Rejected(f"{at}.limited_by: must say what limits this")


def bands(results: Results, claimed: Any) -> None:
    """`sensitivities`: the band of each sensitivity asked for without `over`."""
    wanted = [
        (r, o.value)
        for r, o in zip(results.statement.requirements, results.requirements, strict=True)
        if r.kind == "sensitivity" and not r.over and o.value is not None and o.verdict is not None
    ]
    if not isinstance(claimed, list) or len(claimed) != len(wanted):
        raise Rejected("results.sensitivities: one entry a sensitivity of the claim without over")
    for entry, (r, value) in zip(claimed, wanted, strict=True):
        keys(entry, "results.sensitivities", "of by lower upper")
        same([entry["of"], entry["by"]], [r.state, r.by], "results.sensitivities")
        span({"lower": entry["lower"], "upper": entry["upper"]}, value, "results.sensitivities")


def keys(claimed: Any, place: str, wanted: str) -> None:
    if not isinstance(claimed, dict) or set(claimed) != set(wanted.split(" ")):
        raise Rejected(f"{place}: the keys are {wanted.replace(' ', ', ')}")


def same(claimed: Any, derived: Any, place: str) -> None:
    if claimed != derived or type(claimed) is not type(derived):
        raise Rejected(f"{place}: {claimed!r:.60} is claimed, {derived!r:.60} was derived")


def span(claimed: Any, derived: Span | None, place: str, inward: bool = False, within: bool = False) -> None:
    """A claimed pair of ends must contain the derived one; null claims nothing.

    `inward`: of a quantity proved by its lower end. `within`: attained ends, which must lie inside the derived ones.
    """
    if claimed is None:
        return
    keys(claimed, place, "lower upper")
    for end in ("lower", "upper"):
        if claimed[end] is None:
            continue
        x, y = quantity(claimed[end], f"{place}.{end}"), None if derived is None else getattr(derived, end)
        if y is None:
            raise Rejected(f"{place}.{end}: nothing was derived")
        if not (x <= y if (end == "lower") != within else x >= y):
            raise Rejected(f"{place}.{end}: more is claimed than was derived")
    if inward and derived is None:
        raise Rejected(f"{place}: nothing was derived")
