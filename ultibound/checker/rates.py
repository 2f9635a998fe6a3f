"""The rates of a continuous stance over a cell, as quotients of models (proofs/trajectory.md (3))."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from operator import add

from .model import Library
from .models import HIGHEST, Exponents, Model, Models
from .motion import PHASE, Motion
from .numerals import Rejected
from .ranges import Ends, met
from .reals import Undefined
from .terms import Terms

GUARD = 48  # bits more than those of a witness

Factors = dict[int, int]  # powers of terms by rank
Quotient = tuple[Model, Factors]  # a model times these
Cell = list[tuple[Fraction, Fraction]]  # the middle and half the width, a parameter
Row = tuple[list[Model | None], Model, int]  # numerators, their denominator, its least magnitude


class System:
    """x' = A x + b as terms, and what is the same for all cells."""

    def __init__(
        self, terms: Terms, motion: Motion, libraries: Sequence[Library], bits: int, degrees: tuple[int, int]
    ) -> None:
        self.terms, self.motion = terms, motion
        self.columns = {c: library for library in libraries for c in library.columns}
        self.coordinates = {p.name: k for k, p in enumerate(motion.parameters)}
        self.models = Models(len(motion.parameters), bits + GUARD, 2 * degrees[0] + 8, degrees[1] + 4)
        self.bits = bits
        self.before = terms.below(motion.duration)
        free = any(k is not None for k in motion.free)
        self.forcing = (*motion.forced, *([motion.free] if free else []))  # of the columns beyond the states
        roots = [k for row in (*motion.matrix, *self.forcing) for k in row if k is not None]
        self.after = sorted({k for root in roots for k in terms.below(root)} - set(self.before))
        for k in (*self.before, *self.after):
            self.allowed(*terms.all[k])
        if any(terms.all[k][0] == "variable" and terms.all[k][2] == PHASE for k in self.before):
            raise Rejected("the duration depends on the time")
        self.states = range(1, len(motion.states) + 1)
        self.columns_of = [*range(1, len(motion.states) + len(motion.forced) + 1), *([0] if free else [])]

    def allowed(self, op: str, args: tuple[int, ...], payload: Fraction | str | None) -> None:
        """Variables are the time and parameters; where a reading bends, derivatives are known to jump."""
        if op == "variable" and payload != PHASE and payload not in self.coordinates:
            raise Rejected(f"{payload} is no parameter of the stance")
        if op == "reading":
            for k, lines in zip(args, self.columns[str(payload)].grid, strict=True):
                if self.terms.all[k][0] == "variable":
                    grid = self.motion.parameters[self.coordinates[str(self.terms.all[k][2])]].grid
                    if not set(lines) <= set(grid or ()):
                        raise Rejected(f"{payload} is read on another grid than its parameter")


class Coefficients:
    """The rates' coefficients over one piece of a cell as quotients of models: proofs/trajectory.md (3)."""

    def __init__(self, system: System, cell: Cell, piece: Ends) -> None:
        self.system, self.models, self.cell, self.piece = system, system.models, cell, piece
        self.values: dict[int, Quotient] = {}
        self.divisors: dict[int, tuple[Model, int]] = {}  # what may stand in factors, and its least magnitude
        one = self.models.number(Fraction(1))
        for k in system.before:
            self.values[k] = self.term(k)
        duration = system.motion.duration
        self.time = self.values[duration]
        if system.terms.all[duration][0] != "number":
            self.divisor(duration)
            self.time = one, merged(self.values[duration][1], {duration: 1})
            self.values[duration] = self.time
        for k in system.after:
            self.values[k] = self.term(k)

    def term(self, k: int) -> Quotient:
        op, args, payload = self.system.terms.all[k]
        models = self.models
        if op == "number" and isinstance(payload, Fraction):
            return models.number(payload), {}
        if op == "pi":
            return models.between(models.a.pi()), {}
        if op == "variable":
            return self.variable(str(payload))
        if op == "reading":
            return self.reading(str(payload), args), {}
        x = self.values[args[0]]
        if op == "mark":
            return x
        if op == "neg":
            return models.neg(x[0]), x[1]
        if op == "add" or op == "sub":
            low = lowest(x[1], self.values[args[1]][1])
            first, second = self.lifted(x, low), self.lifted(self.values[args[1]], low)
            return (models.add if op == "add" else models.sub)(first, second), low
        if op == "mul":
            return self.times(x, self.values[args[1]])
        if op == "div":
            return self.divided(x, args[1])
        if op == "power" and isinstance(payload, Fraction):
            n = int(payload)
            return models.power(x[0], n), bounded({f: n * m for f, m in x[1].items()})
        return models.function(op, self.plain(x)), {}

    def variable(self, name: str) -> Quotient:
        if name == PHASE:
            (f, g), none = self.piece, self.models.constant
            return self.models.exact({none: [(f + g) / 2, (g - f) / 2]}), {}
        k = self.system.coordinates[name]
        return self.models.exact(self.affine(k)), {}

    def affine(self, k: int) -> dict[Exponents, list[Fraction]]:
        none = self.models.constant
        c, r = self.cell[k]
        return {none: [c], (*none[:k], 1, *none[k + 1 :]): [r]}

    def times(self, x: Quotient, y: Quotient) -> Quotient:
        return self.models.mul(x[0], y[0]), merged(x[1], y[1])

    def divided(self, x: Quotient, k: int) -> Quotient:
        """By the factors of a product one by one, so that equal ones cancel."""
        op, args, payload = self.system.terms.all[k]
        if op == "number" and isinstance(payload, Fraction) and payload:
            return self.models.mul(x[0], self.models.number(1 / payload)), x[1]
        if op == "mark":
            return self.divided(x, args[0])
        if op == "mul":
            return self.divided(self.divided(x, args[0]), args[1])
        if op == "power" and isinstance(payload, Fraction) and payload <= HIGHEST:
            for _ in range(int(payload)):
                x = self.divided(x, args[0])
            return x
        if k == self.system.motion.duration:
            return x[0], merged(x[1], self.values[k][1], -1)
        self.divisor(k)
        return x[0], merged(merged(x[1], self.values[k][1], -1), {k: 1}, -1)

    def divisor(self, k: int) -> None:
        if k not in self.divisors:
            x = self.values[k][0]
            self.divisors[k] = x, self.models.least(x)

    def lifted(self, x: Quotient, low: Factors) -> Model:
        """The model that x is, but for the factors `low`, which are nowhere above its own."""
        total = x[0]
        for k in x[1] | low:
            n = x[1].get(k, 0) - low.get(k, 0)
            if n:
                total = self.models.mul(total, self.models.power(self.divisors[k][0], n))
        return total

    def plain(self, x: Quotient) -> Model:
        low = lowest(x[1], {})
        total = self.lifted(x, low)
        for k, n in low.items():
            total = self.models.mul(total, self.models.power(self.models.function("inverse", self.divisors[k][0]), -n))
        return total

    def reading(self, column: str, args: tuple[int, ...]) -> Model:
        """A multilinear reading within one cell of its grid."""
        library = self.system.columns[column]
        none = self.models.constant
        flat, shares = [0], list[dict[Exponents, Fraction]]()
        for k, lines in zip(args, library.grid, strict=True):
            u, low, high = self.axis(k)
            found = met(lines, low, high, False)
            if len(found) > 1:
                raise Undefined(f"{column}: a line of its grid lies inside a cell")
            first, width = lines[found[0]], lines[found[0] + 1] - lines[found[0]]
            shares.append({e: (q - (first if e == none else 0)) / width for e, q in u.items()})
            flat = [n * len(lines) + found[0] + b for n in flat for b in (0, 1)]
        corners = [{none: library.columns[column][n]} for n in flat]
        for share in shares:
            half = len(corners) // 2
            corners = [between(p, q, share) for p, q in zip(corners[:half], corners[half:], strict=True)]
        return self.models.exact({e: [q] for e, q in corners[0].items()})

    def axis(self, k: int) -> tuple[dict[Exponents, Fraction], Fraction, Fraction]:
        op, _, payload = self.system.terms.all[k]
        if op == "number" and isinstance(payload, Fraction):
            return {self.models.constant: payload}, payload, payload
        if op != "variable" or str(payload) not in self.system.coordinates:
            raise Undefined("a library axis within the rates is no parameter")
        k = self.system.coordinates[str(payload)]
        c, r = self.cell[k]
        return {e: q for e, (q,) in self.affine(k).items()}, c - r, c + r

    def row(self, entries: Sequence[int | None]) -> Row:
        """Numerators of h times each entry, the denominator of all and its least magnitude."""
        f, g = self.piece
        half = self.times((self.models.number((g - f) / 2), {}), self.time)
        found = [None if k is None else self.times(self.values[k], half) for k in entries]
        low: Factors = {}
        for x in found:
            low = lowest(low, x[1] if x else {})
        below, least = self.models.number(Fraction(1)), self.models.unit
        for k, n in low.items():
            below = self.models.mul(below, self.models.power(self.divisors[k][0], -n))
            for _ in range(-n):
                least = least * self.divisors[k][1] >> self.models.bits
        if least <= 0:
            raise Undefined("division by what may be zero in a cell")
        return [None if x is None else self.lifted(x, low) for x in found], below, least


def merged(x: Factors, y: Factors, sign: int = 1) -> Factors:
    return bounded({k: n for k in x | y if (n := x.get(k, 0) + sign * y.get(k, 0))})


def lowest(x: Factors, y: Factors) -> Factors:
    return {k: n for k in x | y if (n := min(x.get(k, 0), y.get(k, 0)))}


def bounded(x: Factors) -> Factors:
    if any(abs(n) > HIGHEST for n in x.values()):
        raise Undefined(f"a power beyond {HIGHEST} within a continuous stance")
    return x


def between(
    p: dict[Exponents, Fraction], q: dict[Exponents, Fraction], share: dict[Exponents, Fraction]
) -> dict[Exponents, Fraction]:
    """p + share (q - p)."""
    total = dict(p)
    for e in p | q:
        step = q.get(e, Fraction(0)) - p.get(e, Fraction(0))
        for f, s in share.items():
            to = tuple(map(add, e, f))
            total[to] = total.get(to, Fraction(0)) + step * s
    return total
