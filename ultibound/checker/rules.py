"""The lines of a proof, one by one: what each must rest on, and what follows (proofs/obligations.md)."""

from __future__ import annotations

from dataclasses import dataclass, field
from fractions import Fraction
from itertools import product
from typing import Any

from .derive import Derivation, Domain, Meaning, Unprovable
from .exact import Exact
from .numerals import read_number
from .ranges import Ends, Evaluator, walk
from .reals import Scaled, Undefined

BITS = (24, 4096)
SHAPES = {
    "range": (("bits", "trees"), ("lower", "upper")),
    "point": (("at", "bits"), ("lower", "upper")),
    "largest-ball": ((), ("radius",)),
    "invariant-region": ((), ()),
    "invariant-ball": ((), ()),
    "slope": ((), ("gain", "residual")),
    "ultimate-bound": ((), ("bound",)),
}


class Rejected(Exception):
    """A line that does not hold, and why."""


@dataclass(frozen=True)
class Line:
    rule: str
    proves: str
    uses: tuple[int, ...]
    concludes: dict[str, Fraction]
    domain: Domain | None = None
    on_set: bool = False


@dataclass
class Proof:
    """Lines that hold so far, by number from 1."""

    derivation: Derivation
    lines: dict[int, Line] = field(default_factory=dict)
    leaves: int = 0

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
            if not isinstance(raw[part], dict) or set(raw[part]) != set(keys):
                raise Rejected(f"{part}: the keys of {rule} are {', '.join(keys) or 'none'}")
        claimed = {key: quantity(text, f"concludes.{key}") for key, text in raw["concludes"].items()}
        used = [self.lines[n] for n in uses]
        try:
            if rule in ("range", "point"):
                line = self.enclosed(rule, proves, tuple(uses), used, raw["witness"], claimed)
            else:
                line = THEOREMS[rule](self, proves, tuple(uses), used, claimed)
        except (Undefined, Unprovable) as why:
            raise Rejected(str(why)) from None
        self.lines[number] = line

    def enclosed(
        self,
        rule: str,
        proves: str,
        uses: tuple[int, ...],
        used: list[Line],
        witness: dict[str, Any],
        claimed: dict[str, Fraction],
    ) -> Line:
        """Rules range and point: this checker's own enclosure must lie within what is concluded."""
        domain = None
        if used:
            if len(used) != 1 or used[0].domain is None:
                raise Rejected("uses: the one line that gives the set")
            domain = used[0].domain
        meaning = self.derivation.meaning(proves, domain)
        if used and proves.startswith(("target", "image")):
            raise Rejected("uses: this obligation rests on no other line")
        bits = witness["bits"]
        if type(bits) is not int or (bits and not BITS[0] <= bits <= BITS[1]):
            raise Rejected(f"bits: 0 for exact rationals, or {BITS[0]} to {BITS[1]}")
        arithmetic = Scaled(bits) if bits else Exact()
        names = [v.name for v in meaning.variables]
        evaluator = Evaluator(
            self.derivation.terms, meaning.root, meaning.by, names, self.derivation.statement.libraries, arithmetic
        )
        if rule == "range":
            trees = witness["trees"]
            if not isinstance(trees, list) or not all(isinstance(t, str) for t in trees):
                raise Rejected("trees: a list of texts")
            hull, leaves = walk(evaluator, list(product(*(v.cells for v in meaning.variables))), trees)
            self.leaves += leaves
        else:
            hull = evaluator.wanted(evaluator.run(place(meaning, witness["at"]), False, touching=True))
        low, high = arithmetic.ends(hull)
        if not (claimed["lower"] <= low and high <= claimed["upper"]):
            raise Rejected(f"{proves}: the range shown is wider than what is concluded")
        return Line(rule, proves, uses, claimed, domain, meaning.on_set)

    def largest_ball(self, proves: str, uses: tuple[int, ...], used: list[Line], claimed: dict[str, Fraction]) -> Line:
        """proofs/invariant-set.md: R is at most the distance of the target from the edge of the region."""
        require(proves, "ball", used, [("range", f"target[{self.derivation.state}]")])
        target = used[0].concludes
        _, inner = self.derivation.region()
        if not 0 <= claimed["radius"] <= min(target["lower"] - inner[0], inner[1] - target["upper"]):
            raise Rejected("radius: the ball is not shown to lie in the region")
        domain = Domain(True, claimed["radius"], (target["lower"], target["upper"]))
        return Line("largest-ball", proves, uses, claimed, domain)

    def invariant_region(
        self, proves: str, uses: tuple[int, ...], used: list[Line], claimed: dict[str, Fraction]
    ) -> Line:
        """proofs/invariant-set.md: F(X, W) in X, and every target in X."""
        s = self.derivation.state
        require(proves, "invariant", used, [("range", f"target[{s}]"), ("range", f"image[{s}]")])
        _, inner = self.derivation.region()
        for line in used:
            if not (inner[0] <= line.concludes["lower"] and line.concludes["upper"] <= inner[1]):
                raise Rejected(f"{line.proves} is not shown to stay in the region")
        target = used[0].concludes
        return Line(
            "invariant-region", proves, uses, claimed, Domain(False, Fraction(0), (target["lower"], target["upper"]))
        )

    def slope(self, proves: str, uses: tuple[int, ...], used: list[Line], claimed: dict[str, Fraction]) -> Line:
        """proofs/slope.md: k from the slopes over the set, the residual from the target's own step and movement."""
        s, moving = self.derivation.state, self.derivation.moving()
        wanted = [("range", f"slope[{s},{s}]"), ("range", f"target-miss[{s}]")]
        require(proves, "slope", used, wanted + [("range", f"target-slope[{s},{h}]") for h in moving])
        k = magnitude(used[0])
        residual = magnitude(used[1])
        for h, line in zip(moving, used[2:], strict=True):
            residual += magnitude(line) * self.derivation.change(h)[1]
        if not (claimed["gain"] >= k and claimed["residual"] >= residual):
            raise Rejected("gain or residual: less than what the lines used show")
        return Line("slope", proves, uses, claimed, used[0].domain)

    def invariant_ball(
        self, proves: str, uses: tuple[int, ...], used: list[Line], claimed: dict[str, Fraction]
    ) -> Line:
        """proofs/invariant-set.md: k R + residual <= R."""
        require(proves, "invariant", used, [("largest-ball", "ball"), ("slope", "slope")])
        ball, pair = used
        if pair.domain != ball.domain or ball.domain is None:
            raise Rejected("the gain refers to another set")
        r = ball.domain.radius
        if not pair.concludes["gain"] * r + pair.concludes["residual"] <= r:
            raise Rejected("gain times radius plus residual exceeds the radius")
        return Line("invariant-ball", proves, uses, claimed, ball.domain)

    def ultimate_bound(
        self, proves: str, uses: tuple[int, ...], used: list[Line], claimed: dict[str, Fraction]
    ) -> Line:
        """proofs/ultimate-bound.md: the residual over 1 - k, for k < 1 on an invariant set."""
        if len(used) != 2 or proves != "bound" or used[0].proves != "invariant" or used[1].rule != "slope":
            raise Rejected("uses: the invariant set, then gain and residual")
        invariant, pair = used
        if pair.domain != invariant.domain:
            raise Rejected("the gain refers to another set")
        k, residual = pair.concludes["gain"], pair.concludes["residual"]
        if not (0 <= k < 1 and claimed["bound"] >= residual / (1 - k)):
            raise Rejected("bound: less than residual / (1 - gain), or the gain is not below 1")
        return Line("ultimate-bound", proves, uses, claimed, invariant.domain)


THEOREMS = {
    "largest-ball": Proof.largest_ball,
    "invariant-region": Proof.invariant_region,
    "slope": Proof.slope,
    "invariant-ball": Proof.invariant_ball,
    "ultimate-bound": Proof.ultimate_bound,
}


def require(proves: str, name: str, used: list[Line], wanted: list[tuple[str, str]]) -> None:
    """That a theorem proves its obligation from lines of exactly these rules and obligations."""
    if proves != name or [(line.rule, line.proves) for line in used] != wanted:
        raise Rejected(f"{name} rests on {', '.join(' '.join(w) for w in wanted)}")


def magnitude(line: Line) -> Fraction:
    return max(abs(line.concludes["lower"]), abs(line.concludes["upper"]))


def quantity(text: Any, place_: str) -> Fraction:
    if not isinstance(text, str):
        raise Rejected(f"{place_}: a proved number is written as text")
    try:
        return read_number(text)
    except ValueError as why:
        raise Rejected(f"{place_}: {why}") from None


def place(meaning: Meaning, at: Any) -> list[Ends]:
    """A point inside the domain: an exact value a variable, `#rank` for a finite list."""
    if not isinstance(at, dict) or set(at) != {v.name for v in meaning.variables}:
        raise Rejected("at: one value for each variable of the obligation")
    box: list[Ends] = []
    for v in meaning.variables:
        text = at[v.name]
        if v.listed:
            ranks = {f"#{k}": cell for k, cell in enumerate(v.cells)}
            if not isinstance(text, str) or text not in ranks:
                raise Rejected(f"at.{v.name}: # and the rank of a listed value")
            box.append(ranks[text])
            continue
        x = quantity(text, f"at.{v.name}")
        if not v.inside[0] <= x <= v.inside[1]:
            raise Rejected(f"at.{v.name}: outside the range")
        box.append((x, x))
    return box
