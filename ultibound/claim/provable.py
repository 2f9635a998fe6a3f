"""What of a well-formed claim can be proved, and the claim that a requirement with ranges of its own is about."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from .constants import constant
from .errors import Bad, nearest
from .expression import Expression, Node
from .model import Claim, Quantity, Range, Requirement, Stance
from .obligations import Domain, Obligations

MOST_STATES = 6
MOST_STANCES = 16
MOST_WALKS = 64  # of the steps of a horizon


def varied(claim: Claim, number: int) -> Claim:
    """The claim with what `over` of a requirement says for its ranges (proofs/obligations.md)."""
    r = claim.requirements[number - 1]
    uncertain, states = dict(claim.uncertain), claim.stances[0].states
    for name, given in r.over.items():
        if name in uncertain:
            uncertain[name] = replace(uncertain[name], range=given, values=None)
        elif name not in states:  # a constant or gain: unknown now, the same at every step
            uncertain[name] = Quantity(name, given, held=True)
    return replace(
        claim,
        constants={n: e for n, e in claim.constants.items() if n not in r.over},
        gains={n: e for n, e in claim.gains.items() if n not in r.over},
        uncertain=uncertain,
        stances=tuple(_over_states(s, r) if r.stance in (None, s.name) else s for s in claim.stances),
        requirements=tuple(replace(x, over={}) if x is r else x for x in claim.requirements),
    )


def _over_states(stance: Stance, r: Requirement) -> Stance:
    states = {n: replace(q, range=r.over[n]) if n in r.over else q for n, q in stance.states.items()}
    return replace(stance, states=states)


def narrowed(claim: Claim, gain: str, low: Fraction, high: Fraction) -> Claim:
    """The claim with a gain that is not known but for its ends, the same at every step (proofs/sensitivity-gain.md)."""
    ends = Range(*(Expression(str(x), (Node("number", value=x),)) for x in (low, high)))
    gains = {n: e for n, e in claim.gains.items() if n != gain}
    return replace(claim, gains=gains, uncertain={**claim.uncertain, gain: Quantity(gain, ends, held=True)})


def not_followed(claim: Claim, gain: str) -> str | None:
    """Why no interval of a gain can be proved, in one line; None if one can."""
    if gain not in claim.gains:
        return f"gains: {gain[:60]!r} is not among them{nearest(gain, claim.gains)}"
    if claim.stances[0].name:
        return f"gains.{gain}: intervals of gains are not known between stances yet; use --set for each value"
    for number, r in enumerate(claim.requirements, 1):
        exponents, ends = _folded(claim, r)
        if gain in exponents | ends:
            why = "an exponent" if gain in exponents else "the end of a range, a weight, or a bound asked for"
            return f"gains.{gain}: also sets {why} (seen with require[{number}]), taken at its value; use --set"
    return None


def of_stance(claim: Claim, name: str) -> Claim:
    """The claim of one stance alone, its states in the same order as in every other (proofs/graph.md)."""
    (stance,) = [s for s in claim.stances if s.name == name]
    states = {x: stance.states[x] for x in claim.stances[0].states}
    asked = tuple(replace(r, stance=None) if r.stance == name else r for r in claim.requirements)
    alone = replace(stance, name="", then=(), states=states)
    return replace(claim, stances=(alone,), requirements=asked, horizon=1)


def not_yet(claim: Claim) -> str | None:
    """What of a well-formed claim cannot be proved yet, in one line; None if all of it can."""
    stance = claim.stances[0]
    if stance.name:
        return _not_between(claim) or next((x for s in claim.stances if (x := not_yet(of_stance(claim, s.name)))), None)
    if stance.dynamics is not None:
        try:
            Obligations(claim)
        except Bad as problem:
            return str(problem)
    several = len(stance.states) > 1
    if len(stance.states) > MOST_STATES:
        return f"state: {len(stance.states)} states; claims of up to {MOST_STATES} states can be proved"
    if several and claim.route not in ("best", "slope", "split"):
        return f"route: {claim.route} is known for a single state; use slope, split or best"
    if claim.horizon > 1 and any(q.within for q in claim.uncertain.values()):
        return "horizon: a signal within the stance is followed for one step at a time only; remove the key"
    if claim.horizon > 1 and any(q.change is not None and q.values is not None for q in claim.uncertain.values()):
        return "horizon: a held quantity of a finite list that changes is followed for one step at a time only, yet"
    if claim.route == "sector" and (why := _no_sector(claim)) is not None:
        return f"route: sector {why}"
    if claim.route == "split" and not claim.correction:
        return "route: split tells a correction apart; name it in `correction`, or use another route"
    for name, w in claim.weights.items() if several else ():
        low, high = constant(w, claim.values)
        if low != high or low <= 0:
            return f"metric.weights.{name}: has to be a rational number above 0, to be stated exactly"
    if not several and any(set(constant(w, claim.values)) != {Fraction(1)} for w in claim.weights.values()):
        return "metric.weights: only the weight 1 can be used with a single state yet; remove the table"
    for s, w in claim.weights.items() if several else ():
        low, high = constant(w, claim.values)
        if low != high:
            return f"metric.weights.{s}: a weight is used exactly; state a rational number"
    for number, r in enumerate(claim.requirements, 1):
        if r.during and r.stance is None and stance.dynamics is not None:
            try:
                o = Obligations(claim)
                for s in o.states:
                    o.growth(Domain("region", Fraction(0), (Fraction(0), Fraction(0))), s, r.state or "")
            except Bad as problem:
                return f"require[{number}]: {problem}"
        folded, ends = _folded(claim, r)
        unfollowed = sorted(({r.by or ""} & folded) | (set(r.over) & (folded | ends)))
        if unfollowed:
            why = "it also sets an exponent, the end of a range or the bound asked for, which is taken at its value"
            return f"require[{number}]: {unfollowed[0]} cannot be followed: {why}; use --set for each value"
    return None


def _no_sector(claim: Claim) -> str | None:
    """Why a claim of one state does not have the route sector; None where it does."""
    if len(claim.correction) != 1:
        return "follows one correction; name exactly one in `correction`, or use another route"
    if claim.horizon > 1:
        return "is known for one step at a time only; remove the horizon, or use another route"
    try:
        Obligations(claim).sector(Domain("region", Fraction(0), (Fraction(0), Fraction(0))))
    except Bad as problem:
        return f"is not known here: {problem}"
    return None


def _not_between(claim: Claim) -> str | None:
    """What of a claim of named stances cannot be proved yet."""
    if len(claim.stances) > MOST_STANCES:
        return f"stance: {len(claim.stances)} stances; claims of up to {MOST_STANCES} stances can be proved"
    if claim.route not in ("best", "slope", "split"):
        return f"route: {claim.route} is not known between stances yet; use slope, split or best"
    if claim.horizon > 1 and claim.route == "split":
        return "horizon: by the route split one step at a time can be proved between stances yet; use slope or best"
    if claim.horizon > 1 and (why := _not_together(claim)) is not None:
        return f"horizon: {why}"
    return None


def _not_together(claim: Claim) -> str | None:
    """Why the steps of a horizon cannot be taken together through stances; None where they can."""
    if any(s.dynamics is not None for s in claim.stances) or claim.libraries:
        return "between stances only maps in closed form, without a library, can be taken together yet; remove the key"
    if any(q.change is not None and q.values is not None for q in claim.uncertain.values()):
        return "a held quantity of a finite list that changes is followed for one step at a time only, yet"
    try:
        walks(claim)
    except Bad as why:
        return str(why)
    return None


def walks(claim: Claim) -> list[tuple[str, ...]]:
    """All ways of as many steps as the horizon through the stances. Raises Bad where there are too many."""
    then = {s.name: s.then for s in claim.stances}
    ways: list[tuple[str, ...]] = [(s.name,) for s in claim.stances]
    for _ in range(claim.horizon):
        ways = [(*w, t) for w in ways for t in then[w[-1]]]
        if len(ways) > MOST_WALKS:
            raise Bad(f"more than {MOST_WALKS} ways of {claim.horizon} steps through the stances; take fewer together")
    return ways


def _folded(claim: Claim, r: Requirement) -> tuple[set[str], set[str]]:
    """Constants and gains that exponents rest on, and those that ranges rest on, directly or through others."""
    fixed = {**claim.constants, **claim.gains}
    s = claim.stances[0]
    spans = [*s.states.values(), *claim.uncertain.values()]
    ranges = [e for q in spans if q.range is not None for e in (q.range.lower, q.range.upper)]
    ranges += [e for q in spans for e in (*(q.values or ()), q.change) if e is not None]
    ranges += [e for given in r.over.values() for e in (given.lower, given.upper)]
    ranges += [e for e in (r.constant, r.start, r.end) if e is not None] + list(claim.weights.values())
    texts = [*fixed.values(), *s.define.values(), *s.next.values(), *s.target.values(), *ranges]
    texts += [e for lib in claim.libraries for e in lib.at]
    if s.dynamics is not None:
        texts += [*s.dynamics.start.values(), *s.dynamics.rate.values()]
        texts += [s.dynamics.duration] if s.dynamics.duration is not None else []
    texts += [e for e in (r.expression, r.left, r.right) if e is not None]
    exponents = {name for e in texts for n in e.nodes if n.op == "power" for name in (n.name or "").split()}
    ends = {name for e in ranges for name in e.names()}

    def below(names: set[str]) -> set[str]:
        found, waiting = set(names), list(names)
        while waiting:
            name = waiting.pop()
            fresh = set(fixed[name].names()) - found if name in fixed else set()
            found |= fresh
            waiting += fresh
        return found

    return below(exponents), below(ends)
