"""Theorems of proofs/: what each rests on, and the arithmetic of its conclusion. One function a rule."""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import product
from typing import Any, NamedTuple

from .derive import Derivation, Domain
from .flows import Flows
from .matrices import Matrix, Metric
from .numerals import Rejected
from .ranges import Ends
from .sector import RANGES

Quantities = dict[str, Fraction]
MOST_SHELLS = 999
PAIRS = ("slope", "split", "sector", "curve")  # rules that conclude gain and residual


class Variant(NamedTuple):
    """Whose ranges a line is about: those of a piece of gains, of a requirement's `over`; 0: the claim's own."""

    piece: int = 0
    over: int = 0

    def __bool__(self) -> bool:
        return self != (0, 0)


OWN = Variant()


@dataclass(frozen=True)
class Piece:
    """A gain, and ends between which it lies."""

    gain: str
    lower: Fraction
    upper: Fraction


@dataclass(frozen=True)
class Orbit:
    """A periodic orbit: the stances it meets, an enclosure of its state in each, and the values held along it."""

    stances: tuple[str, ...]
    states: tuple[tuple[Ends, ...], ...]
    held: dict[str, Any]


@dataclass(frozen=True)
class Line:
    rule: str
    proves: str
    uses: tuple[int, ...]
    concludes: Quantities
    domain: Domain | None = None
    on_set: bool = False
    variant: Variant = OWN  # whose ranges the line is about
    piece: Piece | None = None  # of gains, that a line states (gains.py)
    flows: Flows | None = None
    metric: Metric | None = None
    basis: tuple[Matrix, Matrix] | None = None  # of entries: rows and their inverse
    leaves: int = 0
    part: str = ""  # the stance, or the step from one to the next, that the line is about (graph.py)
    domains: dict[str, Domain] | None = None  # of all stances
    bases: tuple[tuple[Matrix, Matrix], ...] | None = None  # of entries of a step: before it, and after
    walk: tuple[str, ...] = ()  # the stances that an orbit, a product or a run goes through (cycles.py, runs.py)
    orbit: Orbit | None = None  # of orbits of several states, and of stances (periodic.py, cycles.py)


def parted(used: list[Line]) -> tuple[list[Line], Flows | None]:
    """Lines used, but for the last where it is the flow of a stance."""
    flows = used[-1].flows if used else None
    return (used, None) if flows is None else (used[:-1], flows)


def largest_ball(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/invariant-set.md (2): points of the target show that no ball larger than `outer` lies in the region."""
    found = smaller_ball(d, proves, used[:1], claimed)
    require(proves, "ball", used[1:], [("point", f"target[{d.state}]")] * len(used[1:]))
    (low, high), _ = d.region()
    edges = [min(high - x.concludes["lower"], x.concludes["upper"] - low) for x in used[1:]]
    if not edges or not claimed["outer"] >= min(edges):  # and so no less than the radius
        raise Rejected("outer: larger balls are not shown to leave the region")
    return replace(found, beyond=claimed["outer"] - found.radius)


def smaller_ball(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/invariant-set.md (2): R is at most the distance of the target from the edge of the region."""
    require(proves, "ball", used, [("range", f"target[{d.state}]")])
    target = used[0].concludes
    _, inner = d.region()
    if not 0 <= claimed["radius"] <= min(target["lower"] - inner[0], inner[1] - target["upper"]):
        raise Rejected("radius: the ball is not shown to lie in the region")
    return Domain(True, claimed["radius"], (target["lower"], target["upper"]))


def invariant_region(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/invariant-set.md (1): F(X, W) in X, and every target in X."""
    require(proves, "invariant", used, [("range", f"target[{d.state}]"), ("range", f"image[{d.state}]")])
    _, inner = d.region()
    for line in used:
        if not (inner[0] <= line.concludes["lower"] and line.concludes["upper"] <= inner[1]):
            raise Rejected(f"{line.proves} is not shown to stay in the region")
    target = used[0].concludes
    return Domain(False, Fraction(0), (target["lower"], target["upper"]))


def invariant_ball(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/invariant-set.md (3): k R + residual <= R."""
    if proves != "invariant" or [x.proves for x in used[:1]] != ["ball"] or len(used) != 2:
        raise Rejected("invariant rests on the ball, then a gain and residual")
    ball, pair = used
    if pair.rule not in PAIRS or pair.proves != pair.rule or pair.domain != ball.domain or ball.domain is None:
        raise Rejected("the gain refers to another set")
    r = ball.domain.radius
    if not pair.concludes["gain"] * r + pair.concludes["residual"] <= r:
        raise Rejected("gain times radius plus residual exceeds the radius")
    return ball.domain


def slope(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain | None:
    """proofs/slope.md: k from the slopes over the set, the residual from the target's own step and movement."""
    s, on = d.state, fewer(proves)
    return mean_value(d, proves, used, claimed, (f"slope{on}", f"slope{on}[{s},{s}]", f"target-miss{on}[{s}]"))


def split(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain | None:
    """proofs/split.md: k from the slopes of x + F − N, the residual from how N keeps the error."""
    s = d.state
    if len(used) > 1 and used[1].domain != used[0].domain:
        raise Rejected("the residual refers to another set")
    return mean_value(d, proves, used, claimed, ("split", f"split-slope[{s},{s}]", f"split-residual[{s}]"))


def sector(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain | None:
    """proofs/sector.md (2): k and ε from the bands of the sensitivity and of the correction's own slope."""
    names = [f"sector-{x}[{d.state}]" for x in RANGES]
    require(proves, "sector", used, [("range", x) for x in [*names, *movements(d)]])
    sensitivity, slope, start, residual = used[:4]
    if not sensitivity.domain == slope.domain == residual.domain:
        raise Rejected("sensitivity, slope and residual refer to different sets")
    k = max(abs(1 + c * m) for c, m in product(ends(sensitivity), ends(slope)))
    rest = magnitude(residual) + magnitude(sensitivity) * magnitude(start) + movement(d, used[4:])
    if not (claimed["gain"] >= k and claimed["residual"] >= rest):
        raise Rejected("gain or residual: less than what the lines used show")
    return sensitivity.domain


def fewer(proves: str) -> str:
    """What stands behind the name of a slope over fewer steps than the claim takes together."""
    return proves[len("slope") :] if proves.startswith("slope@") else ""


def mean_value(
    d: Derivation, proves: str, used: list[Line], claimed: Quantities, names: tuple[str, str, str]
) -> Domain | None:
    moved = [("range", x) for x in movements(d)]
    require(proves, names[0], used, [("range", names[1]), ("range", names[2]), *moved])
    if not (
        claimed["gain"] >= magnitude(used[0]) and claimed["residual"] >= magnitude(used[1]) + movement(d, used[2:])
    ):
        raise Rejected("gain or residual: less than what the lines used show")
    return used[0].domain


def shells(d: Derivation, proves: str, used: list[Line], radii: tuple[Fraction, ...], slope: Fraction) -> Domain:
    """proofs/curve.md (1): radii of shells about the target that cover the set, and the slope of a line."""
    if proves != "shells" or len(used) != 1 or used[0].domain is None or used[0].domain.radii:
        raise Rejected("shells rest on the one line that gives the set")
    domain = used[0].domain
    if not 0 < len(radii) <= MOST_SHELLS or any(not a < b for a, b in zip((Fraction(0), *radii), radii, strict=False)):
        raise Rejected(f"radii: up to {MOST_SHELLS} rising numbers above 0")
    (low, high), _ = d.region()
    if not (
        radii[-1] == domain.outer if domain.ball else radii[-1] >= max(domain.target[1] - low, high - domain.target[0])
    ):
        raise Rejected("radii: the shells do not cover the set")
    return replace(domain, radii=radii, slope=slope)


def curve(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/curve.md: a line above the error curve, and the sharp bound its shells show."""
    domain = used[0].domain if used else None
    if domain is None or not domain.radii:
        raise Rejected("the curve rests on its shells")
    m = len(domain.radii)
    wanted = [("shells", "shells"), *(("range", f"shell[{j}]") for j in range(1, m + 1)), ("range", f"line[{d.state}]")]
    require(proves, "curve", used, wanted + [("range", x) for x in movements(d)])
    if any(line.domain != domain for line in used[1 : m + 2]):
        raise Rejected("a shell or line of another set")
    moved = movement(d, used[m + 2 :])
    over = max(used[m + 1].concludes["upper"], Fraction(0))
    if not (0 <= domain.slope <= claimed["gain"] and claimed["residual"] >= over + moved):
        raise Rejected("gain or residual: less than what the line shows")
    if not claimed["sharp"] >= sharpest(domain.radii, levels(used[1 : m + 1], moved)):
        raise Rejected("sharp: less than what the shells show")
    return replace(domain, radii=(), slope=Fraction(0))


def levels(lines: list[Line], moved: Fraction) -> list[Fraction]:
    """How far from the target a step may lead from within each radius."""
    found, most = [], Fraction(0)
    for line in lines:
        most = max(most, magnitude(line))
        found.append(most + moved)
    return found


def sharpest(radii: tuple[Fraction, ...], highest: list[Fraction]) -> Fraction:
    """proofs/curve.md (3): shells are left, the outermost first, while they lead into the next."""
    j = len(radii)
    while j and highest[j - 1] <= (radii[j - 2] if j > 1 else 0):
        j -= 1
    return min(radii[j - 1], highest[j - 1]) if j else Fraction(0)


def ultimate_bound(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain | None:
    """proofs/ultimate-bound.md: the residual over 1 - k, for k < 1 on an invariant set."""
    if len(used) != 2 or used[0].proves != "invariant" or used[1].rule not in PAIRS:
        raise Rejected("uses: the invariant set, then gain and residual of a route")
    invariant, pair = used
    if proves != f"bound[{pair.rule}]":
        raise Rejected(f"uses: gain and residual of another route than {proves}")
    if pair.domain != invariant.domain or pair.proves != pair.rule:
        raise Rejected("the gain refers to another set, or to fewer steps")
    k, residual = pair.concludes["gain"], pair.concludes["residual"]
    if not (0 <= k < 1 and claimed["bound"] >= residual / (1 - k)):
        raise Rejected("bound: less than residual / (1 - gain), or the gain is not below 1")
    return invariant.domain


def course(d: Derivation, proves: str, used: list[Line], claimed: Quantities) -> Domain:
    """proofs/horizon.md (2): the first step keeps the ball, or every step on the way stays in the region."""
    n, ball = d.statement.horizon, used[0].domain if used and used[0].proves == "ball" else None
    steps = range(1, n if len(used) > 2 else 2)
    require(proves, "course", used[1:], [("slope", f"slope@{j}") for j in steps])
    if n == 1 or ball is None or any(line.domain != ball for line in used[1:]):
        raise Rejected("a course rests on the ball, then gain and residual of steps on the way")
    first = used[1].concludes
    if first["gain"] * ball.radius + first["residual"] <= ball.radius:
        return ball
    if len(used) < n:
        raise Rejected("the first step does not keep the ball, and of later ones nothing is shown")
    ends = [
        tuple(x.concludes["gain"] * r + x.concludes["residual"] for r in (ball.radius, ball.outer)) for x in used[1:]
    ]
    radius, outer = (max(x) for x in zip((ball.radius, ball.outer), *ends, strict=True))
    for i, s in enumerate(d.states):
        low, high = ball.targets[i] if ball.targets else ball.target
        _, inner = d.region(s)
        wide = Fraction(1) if ball.metric is None else ball.metric.support(i)
        if not outer * wide <= min(low - inner[0], inner[1] - high):  # from all of the set, which may reach to its R+
            raise Rejected(f"a step on the way is not shown to stay in the region of {s}")
    return replace(ball, radius=radius, beyond=outer - radius)


THEOREMS = {
    "largest-ball": largest_ball,
    "smaller-ball": smaller_ball,
    "invariant-region": invariant_region,
    "slope": slope,
    "split": split,
    "sector": sector,
    "curve": curve,
    "invariant-ball": invariant_ball,
    "course": course,
    "ultimate-bound": ultimate_bound,
}


def movements(d: Derivation) -> list[str]:
    return [f"target-slope[{d.state},{h}]" for h in d.moving()]


def movement(d: Derivation, lines: list[Line]) -> Fraction:
    """proofs/slope.md (3): how far held quantities may move the target in a step."""
    pairs = zip(d.moving(), lines, strict=True)
    return sum((magnitude(line) * d.change(h)[1] for h, line in pairs), Fraction(0))


def require(proves: str, name: str, used: list[Line], wanted: list[tuple[str, str]]) -> None:
    """That a theorem proves its obligation from lines of exactly these rules and obligations."""
    if proves != name or [(line.rule, line.proves) for line in used] != wanted:
        raise Rejected(f"{name} rests on {', '.join(' '.join(w) for w in wanted)}"[:300])


def magnitude(line: Line) -> Fraction:
    return max(abs(line.concludes["lower"]), abs(line.concludes["upper"]))


def ends(line: Line) -> tuple[Fraction, Fraction]:
    return line.concludes["lower"], line.concludes["upper"]
