"""Terms over a box as polynomials with a remainder: proofs/squares.md (2).

The variables of the box run over [-1, 1]. `Exactly` holds polynomials without a remainder, as long as all is rational;
`Rounded` those of any smooth term, higher powers and what rounding loses in the remainder.
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from math import comb
from operator import add
from typing import Any

from .flows import Flows
from .model import Library
from .models import Exponents, Model, Models
from .ranges import Box, Ends, Evaluator, Jet, several
from .reals import LARGEST, Inexact, Undefined
from .terms import Terms

Polynomial = dict[Exponents, Fraction]
HIGHEST = 64  # power of an exact polynomial
MOST_PRODUCTS = 200_000  # of coefficients in one product


def unit(count: int, i: int) -> Exponents:
    return tuple(int(k == i) for k in range(count))


class Exactly:
    """Polynomials with rational coefficients; what is no polynomial is refused."""

    bits = 0

    def __init__(self, count: int) -> None:
        self.count, self.constant = count, (0,) * count

    def number(self, q: Fraction) -> Polynomial:
        return {self.constant: q} if q else {}

    def variable(self, i: int, low: Fraction, high: Fraction) -> Polynomial:
        return self._held({self.constant: (low + high) / 2, unit(self.count, i): (high - low) / 2})

    def neg(self, x: Polynomial) -> Polynomial:
        return {e: -c for e, c in x.items()}

    def add(self, x: Polynomial, y: Polynomial) -> Polynomial:
        return self._held({e: x.get(e, Fraction(0)) + y.get(e, Fraction(0)) for e in x | y})

    def sub(self, x: Polynomial, y: Polynomial) -> Polynomial:
        return self.add(x, self.neg(y))

    def mul(self, x: Polynomial, y: Polynomial) -> Polynomial:
        return self._held(times(x, y))

    def div(self, x: Polynomial, y: Polynomial) -> Polynomial:
        if set(y) != {self.constant}:
            raise Inexact("a quotient is no polynomial")
        return self.mul(x, {self.constant: 1 / y[self.constant]})

    def power(self, x: Polynomial, n: int) -> Polynomial:
        found = self.number(Fraction(1))
        for _ in range(n):
            found = self.mul(found, x)
        return found

    def ends(self, x: Polynomial) -> Ends:
        middle = x.get(self.constant, Fraction(0))
        far = size(self.count, {e: c for e, c in x.items() if any(e)})
        return middle - far, middle + far

    def shown(self, x: Polynomial) -> tuple[Polynomial, Fraction]:
        """A polynomial, and how far the term can be from it."""
        return x, Fraction(0)

    def _held(self, x: Polynomial) -> Polynomial:
        for e, c in x.items():
            if sum(e) > HIGHEST or max(c.numerator.bit_length(), c.denominator.bit_length()) > LARGEST:
                raise Inexact("a polynomial of so high a degree, or with fractions that long")
        return {e: c for e, c in x.items() if c}

    def _refuse(self, *_: object) -> Polynomial:
        raise Inexact("no polynomial with rational coefficients")

    pi = sqrt = exp = log = sin = cos = tan = asin = acos = atan = sinh = cosh = tanh = _refuse


class Rounded:
    """Models (`models.py`) of an order, with so many bits after the point."""

    def __init__(self, count: int, bits: int, order: int) -> None:
        self.models, self.bits = Models(count, bits, 0, order), bits
        self.number, self.neg, self.power = self.models.number, self.models.neg, self.models.power
        self.add, self.sub, self.mul = self.models.add, self.models.sub, self.models.mul
        self.constant = self.models.constant

    def variable(self, i: int, low: Fraction, high: Fraction) -> Model:
        parts = {self.constant: [(low + high) / 2], unit(len(self.constant), i): [(high - low) / 2]}
        return self.models.exact(parts)

    def ends(self, x: Model) -> Ends:
        middle = x.poly.get(self.constant, [0])[0]
        far = self.models.spans({e: c for e, c in x.poly.items() if any(e)})[0] + x.rest[0]
        return Fraction(middle - far, self.models.unit), Fraction(middle + far, self.models.unit)

    def off(self, x: Model, error: Fraction) -> Model:
        """What is within an error of a model."""
        extra = self.models.sizes([(self.constant, -(-error.numerator * self.models.unit // error.denominator))])
        return Model(x.poly, list(map(add, x.rest, extra)))

    def shown(self, x: Model) -> tuple[Polynomial, Fraction]:
        """A polynomial, and how far the term can be from it."""
        poly = {e: Fraction(c[0], self.models.unit) for e, c in x.poly.items() if c and c[0]}
        return poly, Fraction(x.rest[0], self.models.unit)

    def pi(self) -> Model:
        return self.models.between(self.models.a.pi())

    def div(self, x: Model, y: Model) -> Model:
        return self.mul(x, self.models.function("inverse", y))

    def sqrt(self, x: Model) -> Model:
        return self.models.function("sqrt", x)

    def exp(self, x: Model) -> Model:
        return self.models.function("exp", x)

    def log(self, x: Model) -> Model:
        return self.models.function("log", x)

    def sin(self, x: Model) -> Model:
        return self.models.function("sin", x)

    def cos(self, x: Model) -> Model:
        return self.models.function("cos", x)

    def sinh(self, x: Model) -> Model:
        return self.models.function("sinh", x)

    def cosh(self, x: Model) -> Model:
        return self.models.function("cosh", x)

    def tan(self, x: Model) -> Model:
        return self.div(self.sin(x), self.cos(x))

    def tanh(self, x: Model) -> Model:
        return self.div(self.sinh(x), self.cosh(x))

    def _refuse(self, *_: object) -> Model:
        raise Undefined("no polynomial is known to be near an inverse trigonometric function")

    asin = acos = atan = _refuse


class Expansion(Evaluator):
    """A term, or its derivative by a marked name, as a polynomial with a remainder over a box."""

    def __init__(
        self,
        terms: Terms,
        root: int,
        by: str,
        names: list[str],
        libraries: Sequence[Library],
        forms: Exactly | Rounded,
        flows: Flows | None = None,
    ) -> None:
        self.proved = flows
        super().__init__(terms, root, by, names, libraries, forms, flows)

    def over_box(self, box: Box) -> tuple[Polynomial, Fraction]:
        """The polynomial, and how far the term can be from it. Raises Undefined."""
        poly, rest = self.a.shown(self.wanted(self.run(box, False)))
        return poly, rest

    def term(self, k: int, jets: dict[int, Jet], box: Box, gradient: bool) -> Jet:
        op, _, payload = self.all[k]
        if op == "variable":
            i = self.names.index(str(payload))
            return Jet(self.a.variable(i, *box[i]))
        return super().term(k, jets, box, gradient)

    def corner(self, k: int, x: Jet, y: Jet, side: int, box: Box, floor: bool = False) -> Jet:
        """One branch, where the other is never taken: proofs/squares.md (2)."""
        low, high = self.a.ends(self.a.sub(x.v, y.v))
        if (low if side > 0 else -high) > 0:
            return x
        if (high if side > 0 else -low) < 0:
            return y
        raise Undefined("both branches of a corner are met: no one polynomial is near it")

    def reading(self, k: int, column: str, args: tuple[int, ...], axes: list[Jet], box: Box) -> Jet:
        """Within one cell a multilinear reading is a polynomial of its axes."""
        a, library = self.a, self.columns[column]
        _, cells = self.across(k, library.grid, args, axes, box)
        if several(cells):
            raise Undefined("several cells of a library are met: no one polynomial is near it")
        cell = [c.start for c in cells]

        def partial(*by: int) -> Any:
            values = [a.number(q) for q in vertices(library, column, cell)]
            for axis, first in enumerate(cell):
                lines = library.grid[axis]
                width, half = (
                    lines[first + 1] - lines[first],
                    len(values) // 2,
                )  # the axis that is folded varies slowest
                share = a.mul(a.sub(axes[axis].v, a.number(lines[first])), a.number(1 / width))
                rises = [a.sub(q, p) for p, q in zip(values[:half], values[half:], strict=True)]
                if axis in by:
                    values = [a.mul(r, a.number(1 / width)) for r in rises]
                else:
                    values = [a.add(p, a.mul(share, r)) for p, r in zip(values[:half], rises, strict=True)]
            return values[0]

        jet = Jet(partial())
        self.composed(jet, axes, partial, False)
        return jet

    def flow(self, k: int, entry: str, args: tuple[int, ...], axes: list[Jet], box: Box) -> Jet:
        """An entry of the fundamental solution: the polynomial stated for it, its error in the remainder."""
        flows, forms = self.proved, self.a
        if flows is None or not isinstance(forms, Rounded):
            raise Inexact("no trajectory is proved, or none by rational numbers")
        i, j = map(int, entry.split(" "))
        ends, cells = self.across(k, (None, *flows.grids), args, axes, box)
        cells = [cells[0], *flows.reached(ends[1:], cells[1:])]

        def partial(*by: int) -> Model:
            orders = [by.count(x) for x in range(len(axes))]
            factors, poly, error = flows.stated(i, j, orders, ends, cells)
            shares = []
            for n, (middle, width) in factors:
                moved = forms.sub(axes[n].v, forms.number(middle))
                shares.append(forms.mul(moved, forms.number(1 / width)))
            return forms.off(composed(forms, poly, shares), error)

        jet = Jet(partial())
        self.composed(jet, axes, partial, False)
        return jet


def composed(forms: Rounded, poly: Polynomial, at: list[Model]) -> Model:
    """A polynomial of models: by powers of the first, whose coefficients are polynomials of the others."""
    if not at:
        return forms.number(poly.get((), Fraction(0)))
    parts: dict[int, Polynomial] = {}
    for e, c in poly.items():
        parts.setdefault(e[0], {})[e[1:]] = c
    found = forms.number(Fraction(0))
    for n in range(max(parts, default=0), -1, -1):
        found = forms.mul(found, at[0])
        if n in parts:
            found = forms.add(found, composed(forms, parts[n], at[1:]))
    return found


def vertices(library: Library, column: str, cell: list[int]) -> list[Fraction]:
    """Values at the vertices of a cell, the last axis fastest."""
    flats = [0]
    for lines, i in zip(library.grid, cell, strict=True):
        flats = [flat * len(lines) + i + b for flat in flats for b in (0, 1)]
    return [library.columns[column][flat] for flat in flats]


def times(x: Polynomial, y: Polynomial) -> Polynomial:
    if len(x) * len(y) > MOST_PRODUCTS:
        raise Undefined("a product of polynomials that long")
    found: Polynomial = {}
    for e, p in x.items():
        for f, q in y.items():
            to = tuple(map(add, e, f))
            found[to] = found.get(to, 0) + p * q
    return found


def size(count: int, x: Polynomial) -> Fraction:
    """No less than a polynomial anywhere in the box: the magnitudes of its coefficients by Chebyshev polynomials."""
    for k in range(count):
        turned: Polynomial = {}
        for e, c in x.items():
            m = e[k]
            for n in range(m, -1, -2):  # x**m = 2**(1-m) sum of C(m, (m-n)/2) T_n, the last T_0 halved
                to = (*e[:k], n, *e[k + 1 :])
                turned[to] = turned.get(to, Fraction(0)) + c * Fraction(comb(m, (m - n) // 2) * (2 if n else 1), 2**m)
        x = turned
    return sum(map(abs, x.values()), Fraction(0))
