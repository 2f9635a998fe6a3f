"""Functions of time and of a cell's coordinates as polynomials with remainders (proofs/trajectory.md (3) and (4)).

All arguments run over [-1, 1]. A polynomial has whole numbers of units 2**-bits for coefficients, by powers of the
coordinates and by Chebyshev polynomials in time. A jet is a list of bounds in units: of the magnitude of a function
and of its derivatives by the coordinates, in the sequence of `Models.orders`.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable
from fractions import Fraction
from heapq import heappop, heappush
from itertools import combinations_with_replacement, zip_longest
from math import comb, prod
from operator import add, sub

from .reals import Interval, Undefined, scaled

Exponents = tuple[int, ...]
Poly = dict[Exponents, list[int]]
Jet = list[int]
MOST_TERMS = 40  # of a Taylor polynomial
MOST_PRODUCTS = 4_000_000  # of coefficients, in one product of polynomials
FEW_PRODUCTS = 100  # below which to join powers takes longer than to add them one by one
MOST_BOXES = 1000  # into which the range of a divisor is divided
HIGHEST = 60  # power of a model
CIRCULAR = frozenset(["exp", "sin", "cos", "sinh", "cosh"])  # the fourth derivative is the function itself
POSITIVE = frozenset(["sqrt", "log", "inverse"])


class Model:
    """A polynomial, and a jet that bounds what is left of the function."""

    __slots__ = ("poly", "rest", "whole")

    def __init__(self, poly: Poly, rest: Jet) -> None:
        self.poly, self.rest = poly, rest
        self.whole: Jet | None = None  # the jet of polynomial and rest, once asked for


class Models:
    """Arithmetic of models in so many coordinates; terms beyond a degree in time or in the coordinates become rest."""

    def __init__(self, coordinates: int, bits: int, degree: int, order: int) -> None:
        self.bits, self.unit, self.degree, self.order = bits, 1 << bits, degree, order
        self.a = scaled(bits)
        self.constant: Exponents = (0,) * coordinates
        pairs = list(combinations_with_replacement(range(coordinates), 2))
        self.orders: list[tuple[int, ...]] = [(), *((k,) for k in range(coordinates)), *pairs]
        rank = {o: n for n, o in enumerate(self.orders)}
        self.rank = rank
        self.splits: list[list[tuple[int, int]]] = [[(0, 0)]]  # Leibniz' rule: ranks of the derivatives of two factors
        self.splits += [[(rank[(k,)], 0), (0, rank[(k,)])] for k in range(coordinates)]
        for k, m in pairs:
            both, first, second = rank[k, m], rank[(k,)], rank[(m,)]
            self.splits.append([(both, 0), (first, second), (second, first), (0, both)])
        self.nothing: Jet = [0] * len(self.orders)
        self._weights: dict[Exponents, list[int]] = {}
        self._steepest: dict[Exponents, list[int]] = {}

    # Jets.

    def up(self, x: int) -> int:
        """From units of a product to units, rounded up."""
        return -(-x >> self.bits)

    def times(self, x: Jet, y: Jet) -> Jet:
        return [-(-sum([x[p] * y[q] for p, q in split]) >> self.bits) for split in self.splits]

    def over(self, x: Jet, y: Jet, least: int) -> Jet:
        """The jet of a quotient q = f/g with |g| >= least, by q g = f differentiated."""
        q: Jet = []
        for top, split in zip(x, self.splits, strict=True):
            top = (top << self.bits) + sum([q[p] * y[r] for p, r in split if r])
            q.append(-(-top // least))
        return q

    def weights(self, e: Exponents) -> list[int]:
        """Suprema over the cell of the derivatives of a product of powers."""
        if e not in self._weights:
            found = [1, *e]
            found += [e[k] * e[m] if k != m else e[k] * (e[k] - 1) for k, m in self.orders[len(found) :]]
            self._weights[e] = found
        return self._weights[e]

    def sizes(self, sums: Iterable[tuple[Exponents, int]]) -> Jet:
        """The jet of a polynomial in the coordinates whose coefficients have these magnitudes."""
        jet = list(self.nothing)
        for e, size in sums:
            for n, w in enumerate(self.weights(e)):
                jet[n] += w * size
        return jet

    def magnitudes(self, poly: Poly) -> Jet:
        return self.sizes([(e, sum(map(abs, c))) for e, c in poly.items()])

    def spans(self, poly: Poly) -> Jet:
        """The same by Chebyshev polynomials in the coordinates too: never more, and often much less."""
        extra = 0
        for k in range(len(self.constant)):
            degree = max((e[k] for e in poly), default=0)
            extra += degree
            turned: Poly = {}
            for e, column in poly.items():
                for n in range(e[k], -1, -2):  # x**m = 2**(1-m) sum of C(m, (m-n)/2) T_n, the last T_0 halved
                    share = comb(e[k], (e[k] - n) // 2) << degree - e[k] + (n > 0)
                    to = (*e[:k], n, *e[k + 1 :])
                    before = turned.get(to, ())
                    turned[to] = [p + share * q for p, q in zip_longest(before, column, fillvalue=0)]
            poly = turned
        jet = list(self.nothing)
        for e, column in poly.items():
            if e not in self._steepest:
                self._steepest[e] = [steepest([e[k] for k in o], o) for o in self.orders]
            size = sum(map(abs, column))
            for n, w in enumerate(self._steepest[e]):
                jet[n] += w * size
        return [-(-x >> extra) for x in jet]

    def sup(self, x: Model) -> Jet:
        if x.whole is None:
            x.whole = list(map(add, self.magnitudes(x.poly), x.rest))
        return x.whole

    # Models.

    def exact(self, parts: dict[Exponents, list[Fraction]]) -> Model:
        """A polynomial with these coefficients, rounded down to units."""
        poly: Poly = {}
        lost = []
        for e, column in parts.items():
            poly[e] = [(q.numerator << self.bits) // q.denominator for q in column]
            lost.append((e, sum(self.unit % q.denominator > 0 for q in column)))
        return Model(poly, self.sizes(lost))

    def number(self, q: Fraction) -> Model:
        return self.exact({self.constant: [q]})

    def between(self, x: Interval) -> Model:
        """A constant of which an enclosure is known."""
        middle = x[0] + x[1] >> 1
        return Model({self.constant: [middle]}, self.sizes([(self.constant, x[1] - middle)]))

    def held(self, poly: Poly, extra: int, rest: Jet) -> Model:
        """Of a polynomial with `extra` more bits after the point: rounded, and only the degrees that are kept."""
        kept: Poly = {}
        lost = []
        half = 1 << extra - 1
        for e, column in poly.items():
            last = self.degree + 1 if sum(e) <= self.order else 0
            size = -(-sum(map(abs, column[last:])) >> extra)
            column = [c + half >> extra for c in column[:last]]
            lost.append((e, size + (len(column) + 1 >> 1)))
            while column and not column[-1]:
                column.pop()
            if column:
                kept[e] = column
        return Model(kept, list(map(add, rest, self.sizes(lost))))

    def neg(self, x: Model) -> Model:
        return Model({e: [-c for c in column] for e, column in x.poly.items()}, x.rest)

    def add(self, x: Model, y: Model) -> Model:
        return self._sum(x, y, 1)

    def sub(self, x: Model, y: Model) -> Model:
        return self._sum(x, y, -1)

    def _sum(self, x: Model, y: Model, sign: int) -> Model:
        poly = dict(x.poly)
        for e, column in y.poly.items():
            poly[e] = [a + sign * b for a, b in zip_longest(poly.get(e, ()), column, fillvalue=0)]
        return Model(poly, list(map(add, x.rest, y.rest)))

    def mul(self, x: Model, y: Model) -> Model:
        poly: Poly = {}
        gather(poly, x.poly, y.poly, 1)
        rest = self.nothing
        if any(x.rest) or any(y.rest):
            rest = list(map(add, self.times(x.rest, self.sup(y)), self.times(self.magnitudes(x.poly), y.rest)))
        return self.held(poly, self.bits + 1, rest)

    def power(self, x: Model, n: int) -> Model:
        if not 0 <= n <= HIGHEST:
            raise Undefined(f"a power beyond {HIGHEST} within a continuous stance")
        found = None
        while n:
            if n & 1:
                found = x if found is None else self.mul(found, x)
            n >>= 1
            x = self.mul(x, x) if n else x
        return found or self.number(Fraction(1))

    def least(self, x: Model) -> int:
        """A lower bound, above 0, of the magnitude, in units."""
        middle = abs(x.poly.get(self.constant, [0])[0])
        bound = 2 * middle - self.sup(x)[0]
        if 4 * bound < middle or bound <= 0:
            bound = max(bound, self._divided(x) - x.rest[0])
        if bound <= 0:
            raise Undefined("division by what may be zero in a cell")
        return bound

    def _divided(self, x: Model) -> int:
        """A lower bound of the polynomial's magnitude: at centres of boxes, less what slopes allow."""
        slopes = [sum(sum(map(abs, derivative(c))) for c in x.poly.values())]
        slopes += self.magnitudes(x.poly)[1 : 1 + len(self.constant)]
        boxes: list[tuple[Fraction, tuple[Fraction, ...], tuple[Fraction, ...]]] = []

        def put(centre: tuple[Fraction, ...], radius: tuple[Fraction, ...]) -> Fraction:
            size = abs(value(x.poly, centre))
            heappush(boxes, (size - sum(map(Fraction.__mul__, radius, map(Fraction, slopes))), centre, radius))
            return size

        best = put((Fraction(0),) * len(slopes), (Fraction(1),) * len(slopes))
        for _ in range(MOST_BOXES):
            lowest, centre, radius = heappop(boxes)
            if 2 * lowest >= best or not best:
                return int(lowest)
            widest = max(range(len(slopes)), key=lambda n: slopes[n] * radius[n])
            half = tuple(r / 2 if n == widest else r for n, r in enumerate(radius))
            for side in (sub, add):
                moved = tuple(side(c, half[n]) if n == widest else c for n, c in enumerate(centre))
                best = min(best, put(moved, half))
        return int(heappop(boxes)[0])

    def function(self, op: str, x: Model) -> Model:
        """sqrt, log, inverse (1/x) or a circular function: Taylor's polynomial about the middle value, and its rest."""
        if op not in CIRCULAR | POSITIVE:
            raise Undefined(f"{op} within the rates of a continuous stance")
        middle = x.poly.get(self.constant, [0])[0]
        if op == "inverse" and middle < 0:
            return self.neg(self.function(op, self.neg(x)))
        v = Model({**x.poly, self.constant: [0, *x.poly.get(self.constant, [0])[1:]]}, x.rest)
        far = self.sup(v)
        if op in POSITIVE and middle <= far[0]:
            raise Undefined(f"{op} of values that may not be positive in a cell")
        series, second = self._series(op, middle, far[0])
        n = len(series)
        total = self.between(series[-1])
        for c in reversed(series[:-1]):
            total = self.add(self.mul(total, v), self.between(c))
        first = self.up(second * far[0])
        jet = [self.up(first * far[0])]
        for o in self.orders[1:]:
            jet.append(self.up(n * first * far[self.rank[o]]))
            if len(o) == 2:
                jet[-1] += self.up(self.up(n * (n - 1) * second * far[self.rank[o[:1]]]) * far[self.rank[o[1:]]])
        return Model(total.poly, list(map(add, total.rest, jet)))

    def _series(self, op: str, middle: int, far: int) -> tuple[list[Interval], int]:
        """Coefficients a_0 .. a_{n-1} at the middle, and a bound of |f^(n)| far**(n-2) / n! as far as that from it."""
        a, point = self.a, (middle, middle)
        low = (middle - far, middle - far)
        ratio = (far, far) if op in CIRCULAR else a.div((far, far), low)
        if op in CIRCULAR:
            high = (abs(middle) + far,) * 2
            tail = a.exp((middle + far,) * 2) if op == "exp" else a.cosh(high) if op in ("sinh", "cosh") else a.one
            tail = (0, tail[1] + 1 >> 1)
        elif op == "sqrt":
            tail = a.div(a.sqrt(low), a.mul(a.number(Fraction(8)), a.power(low, 2)))
        else:
            tail = a.div(a.one, a.mul(a.number(Fraction(2)), a.power(low, 2)) if op == "log" else a.power(low, 3))
        n = 2
        while n < MOST_TERMS and tail[1] > 1:
            up, down = {"sqrt": (2 * n - 1, 2 * n + 2), "log": (n, n + 1), "inverse": (1, 1)}.get(op, (1, n + 1))
            tail = a.mul(tail, a.mul(ratio, a.number(Fraction(up, down))))
            n += 1
        if op in CIRCULAR:
            return self._cycle(op, point, n), tail[1]
        series = [a.sqrt(point) if op == "sqrt" else a.log(point) if op == "log" else a.div(a.one, point)]
        for k in range(n - 1):
            share = {"sqrt": Fraction(1 - 2 * k, 2 * k + 2), "log": Fraction(-k, k + 1)}.get(op, Fraction(-1))
            top = a.one if op == "log" and not k else a.mul(series[-1], a.number(share))
            series.append(a.div(top, point))
        return series, tail[1]

    def _cycle(self, op: str, point: Interval, n: int) -> list[Interval]:
        a = self.a
        if op == "exp":
            turns = [a.exp(point)] * 4
        elif op in ("sinh", "cosh"):
            turns = [a.sinh(point), a.cosh(point)] * 2
        else:
            turns = [a.sin(point), a.cos(point), a.neg(a.sin(point)), a.neg(a.cos(point))]
        shift = op in ("cos", "cosh")
        series, factorial = [], 1
        for k in range(n):
            factorial *= max(k, 1)
            series.append(a.mul(turns[(k + shift) % 4], a.number(Fraction(1, factorial))))
        return series


def gather(out: Poly, x: Poly, y: Poly, sign: int) -> None:
    """Adds (or, sign -1, subtracts) twice a product: 2 T_i T_j = T_{i+j} + T_{|i-j|}."""
    if sum(map(len, x.values())) * sum(map(len, y.values())) > MOST_PRODUCTS:
        raise Undefined("a product of polynomials that long")
    if len(x) * len(y) > FEW_PRODUCTS and all(len(c) == 1 for each in (x, y) for c in each.values()):
        for to, total in _flat(x, y).items():
            column = out.setdefault(to, [])
            column += [0] * (1 - len(column))
            column[0] += 2 * sign * total
        return
    for e, first in x.items():
        for f, second in y.items():
            to = tuple(map(add, e, f))
            column = out.get(to, [])
            column += [0] * (len(first) + len(second) - 1 - len(column))
            for i, p in enumerate(first):
                if p:
                    p *= sign
                    for j, q in enumerate(second):
                        r = p * q
                        column[i + j] += r
                        column[i - j if i > j else j - i] += r
            out[to] = column


def _flat(x: Poly, y: Poly) -> dict[Exponents, int]:
    """The product of polynomials without time; powers are added as digits of one number, which none exceeds."""
    width = (max(map(max, x)) + max(map(max, y))).bit_length()

    def joined(e: Exponents) -> int:
        return sum([n << width * k for k, n in enumerate(e)])

    totals = defaultdict[int, int](int)
    second = [(joined(f), q) for f, (q,) in y.items()]
    for e, (p,) in x.items():
        first = joined(e)
        for f, q in second:
            totals[first + f] += p * q
    places, mask = range(0, width * len(next(iter(x))), width), (1 << width) - 1
    return {tuple([to >> k & mask for k in places]): total for to, total in totals.items()}


def steepest(degrees: list[int], by: tuple[int, ...]) -> int:
    """The supremum, at 1, of a derivative of a product of Chebyshev polynomials of these degrees."""
    if len(by) == 2 and by[0] == by[1]:
        return degrees[0] ** 2 * (degrees[0] ** 2 - 1) // 3
    return prod(n * n for n in degrees)


def derivative(column: list[int]) -> list[int]:
    """By time, of a sum of Chebyshev polynomials: T_k' = 2k (T_{k-1} + T_{k-3} + ...), a last T_0 halved."""
    found = [0] * (len(column) + 1)
    for k in range(len(column) - 1, 0, -1):
        found[k - 1] = found[k + 1] + 2 * k * column[k]
    found[0] >>= 1  # even: each term is 2k c
    return found[: max(len(column) - 1, 0)]


def value(poly: Poly, at: tuple[Fraction, ...]) -> Fraction:
    """At a point: the time, then the coordinates."""
    total = Fraction(0)
    for e, column in poly.items():
        now, before = Fraction(0), Fraction(0)  # Clenshaw
        for c in column[:0:-1]:
            now, before = c + 2 * at[0] * now - before, now
        part = column[0] + at[0] * now - before if column else now
        for x, n in zip(at[1:], e, strict=True):
            part *= x**n
        total += part
    return total
