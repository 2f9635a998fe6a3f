"""Models against exact and high-precision evaluation: what they enclose is contained, and remainders are small."""

from __future__ import annotations

import random
from collections.abc import Callable
from fractions import Fraction as Q
from itertools import product
from math import factorial
from typing import Any

import mpmath
import pytest

from ultibound.checker.models import Model, Models, derivative, gather, value
from ultibound.checker.reals import Undefined

Powers = dict[tuple[int, ...], Q]  # of time and the coordinates
BITS = 64


def expanded(poly: dict[tuple[int, ...], list[int]], unit: int) -> Powers:
    """By powers of the time too."""
    found: Powers = {}
    for e, column in poly.items():
        before, now = [Q(0)], [Q(1)]  # T_{k-1} and T_k by powers, from T_{-1} = T_1 on
        for k, c in enumerate(column):
            if k:
                low = [0, *((1 if k == 1 else 2) * x for x in now)]
                for n, x in enumerate(before if k > 1 else []):
                    low[n] -= x
                before, now = now, low
            for n, x in enumerate(now):
                found[n, *e] = found.get((n, *e), Q(0)) + Q(c, unit) * x
    return found


def times(p: Powers, q: Powers) -> Powers:
    found: Powers = {}
    for (e, a), (f, b) in product(p.items(), q.items()):
        to = tuple(map(sum, zip(e, f, strict=True)))
        found[to] = found.get(to, Q(0)) + a * b
    return found


def plus(p: Powers, q: Powers, sign: int = 1) -> Powers:
    return {e: p.get(e, Q(0)) + sign * q.get(e, Q(0)) for e in p | q}


def by(p: Powers, k: int) -> Powers:
    return {(*e[:k], e[k] - 1, *e[k + 1 :]): e[k] * c for e, c in p.items() if e[k]}


def at(p: Powers, x: list[Q]) -> Q:
    total = Q(0)
    for e, c in p.items():
        for y, n in zip(x, e, strict=True):
            c *= y**n
        total += c
    return total


def some(m: Models, rng: random.Random, degree: int, order: int, size: int = 1) -> tuple[Model, Powers]:
    """A random polynomial with coefficients that units do not hold, as a model and exactly."""
    n = len(m.constant)
    exponents = [e for e in product(range(order + 1), repeat=n) if sum(e) <= order]
    parts = {e: [Q(rng.randint(-size * 999, size * 999), 777) for _ in range(degree + 1)] for e in exponents}
    whole = {e: [int(q * 777) for q in column] for e, column in parts.items()}
    return m.exact(parts), expanded(whole, 777)


def points(rng: random.Random, n: int, count: int) -> list[list[Q]]:
    corners = [[Q(rng.choice((-1, 1))) for _ in range(n)] for _ in range(count // 2)]
    return corners + [[Q(rng.randint(-50, 50), 50) for _ in range(n)] for _ in range(count // 2)]


def assert_encloses(m: Models, x: Model, exact: Powers, rng: random.Random, most: int) -> None:
    """Of the function and its derivatives: off by no more than the remainder says, and that is a few units."""
    off = plus(exact, expanded(x.poly, m.unit), -1)
    for o, bound in zip(m.orders, x.rest, strict=True):
        part, whole = off, exact
        for k in o:
            part, whole = by(part, k + 1), by(whole, k + 1)
        assert bound <= most
        for p in points(rng, len(m.constant) + 1, 12):
            assert abs(at(part, p)) * m.unit <= bound, o
            assert abs(at(whole, p)) * m.unit <= m.sup(x)[m.rank[o]], o


@pytest.mark.parametrize("coordinates", [0, 1, 2, 3])
def test_arithmetic_of_random_polynomials(coordinates: int) -> None:
    rng = random.Random(coordinates)
    m = Models(coordinates, BITS, 40, 12)
    for _ in range(3):
        (x, p), (y, q) = (some(m, rng, degree, order) for degree, order in ((2, 2), (4, 1)))
        assert_encloses(m, m.add(x, y), plus(p, q), rng, 200)
        assert_encloses(m, m.sub(x, y), plus(p, q, -1), rng, 200)
        assert_encloses(m, m.neg(x), {e: -c for e, c in p.items()}, rng, 200)
        assert_encloses(m, m.mul(x, y), times(p, q), rng, 100_000)
        assert_encloses(m, m.power(y, 3), times(q, times(q, q)), rng, 10**8)
        assert_encloses(m, m.mul(m.number(Q(1, 3)), x), {e: c / 3 for e, c in p.items()}, rng, 1000)


def test_degrees_that_are_not_kept_become_remainder() -> None:
    rng = random.Random(5)
    m = Models(2, BITS, 5, 3)
    (x, p), (y, q) = some(m, rng, 4, 2), some(m, rng, 3, 2)
    found = m.mul(x, y)
    assert all(len(c) <= 6 and sum(e) <= 3 for e, c in found.poly.items())
    assert_encloses(m, found, times(p, q), rng, 10**23)


def test_whole_polynomials_stay_exact() -> None:
    m = Models(1, BITS, 20, 8)
    x = m.exact({(0,): [Q(3, 4), Q(1, 8)], (1,): [Q(0), Q(5, 16)]})
    assert not any(x.rest)
    y = m.add(m.number(Q(1, 2)), m.neg(x))
    assert not any(y.rest) and y.poly == {(0,): [-(m.unit >> 2), -(m.unit >> 3)], (1,): [0, -5 * (m.unit >> 4)]}


def test_a_constant_known_by_its_ends() -> None:
    m = Models(1, BITS, 20, 8)
    for low, high in ((-3, 8), (5, 5), (5, 6)):
        x = m.between((low, high))
        middle = x.poly[0,][0]
        assert middle - x.rest[0] <= low and high <= middle + x.rest[0] and 2 * x.rest[0] <= high - low + 1
        assert x.rest[1:] == [0, 0]


def test_products_of_chebyshev_polynomials() -> None:
    out: dict[tuple[int, ...], list[int]] = {}
    gather(out, {(1, 0): [0, 0, 3]}, {(1, 2): [0, 5]}, 1)  # 3 T_2 * 5 T_1 = 15/2 (T_1 + T_3)
    assert out == {(2, 2): [0, 15, 0, 15]}
    gather(out, {(2, 2): [1]}, {(0, 0): [0, 7, 0, 7, 1]}, -1)
    assert out == {(2, 2): [0, 1, 0, 1, -2]}
    with pytest.raises(Undefined, match="that long"):
        gather(out, {(0, 0): [1] * 2001}, {(0, 0): [1] * 2000}, 1)


@pytest.mark.parametrize("coordinates", [1, 2, 3, 5])
@pytest.mark.parametrize("sign", [1, -1])
def test_products_without_time(coordinates: int, sign: int) -> None:
    """Of more and of fewer terms than are multiplied one by one, into what is there already; powers reach 60 and more."""
    rng = random.Random(coordinates)

    def some(many: int) -> dict[tuple[int, ...], list[int]]:
        powers = [tuple(rng.choice([0, 1, 2, 3, 31, 32, 60]) for _ in range(coordinates)) for _ in range(many)]
        return {e: [rng.choice([0, -1, 1]) * rng.getrandbits(90)] for e in powers}

    for many in (1, 5, 40, 90):
        x, y = some(many), some(many)
        there = [tuple(map(sum, zip(e, f, strict=True))) for e in list(x)[:3] for f in list(y)[:2]]
        out = {to: [rng.getrandbits(90), 5, -7][:k] for k, to in enumerate(there)}
        wanted = {to: list(column) for to, column in out.items()}
        for e, (p,) in x.items():
            for f, (q,) in y.items():
                column = wanted.setdefault(tuple(map(sum, zip(e, f, strict=True))), [0])
                column[:1] = [(column[0] if column else 0) + 2 * sign * p * q]
        gather(out, x, y, sign)
        assert out == wanted


def test_derivative_by_time() -> None:
    assert derivative([]) == [] and derivative([7]) == []
    assert derivative([0, 1]) == [1] and derivative([0, 0, 1]) == [0, 4]
    assert derivative([0, 0, 0, 1]) == [3, 0, 6]  # T_3' = 12 s² - 3 = 6 T_2 + 3
    rng = random.Random(1)
    column = [rng.randint(-99, 99) for _ in range(9)]
    off = plus(by(expanded({(): column}, 1), 0), expanded({(): derivative(column)}, 1), -1)
    assert set(off.values()) == {Q(0)}


def test_magnitudes_by_powers_and_by_chebyshev_polynomials() -> None:
    """Of T_5(s) T_4(c) T_2(d): exact by Chebyshev polynomials, at a corner; by powers 7 times, 3 times that."""
    m = Models(2, BITS, 20, 8)
    four, two = {0: 1, 2: -8, 4: 8}, {0: -1, 2: 2}
    poly = {(a, b): [0, 0, 0, 0, 0, c * d] for a, c in four.items() for b, d in two.items()}
    assert m.orders == [(), (0,), (1,), (0, 0), (0, 1), (1, 1)]
    assert m.spans(poly) == [1, 16, 4, 80, 64, 4]
    assert m.magnitudes(poly) == [51, 144, 68, 336, 192, 68]
    rng = random.Random(2)
    for _ in range(5):
        x, p = some(m, rng, 4, 5)
        for o, low, high in zip(m.orders, m.spans(x.poly), m.magnitudes(x.poly), strict=True):
            part = p
            for k in o:
                part = by(part, k + 1)
            assert low <= high
            assert all(abs(at(part, y)) * m.unit <= low + x.rest[m.rank[o]] for y in points(rng, 3, 20))
    assert m.spans({}) == m.nothing


@pytest.mark.parametrize("coordinates", [1, 2])
def test_jets_obey_leibniz(coordinates: int) -> None:
    """Products and quotients of functions that attain all their bounds at one corner attain those of the result."""
    m = Models(coordinates, BITS, 40, 12)
    some_ = (2,) + (1,) * (coordinates - 1)
    x = m.exact({m.constant: [Q(3)], some_: [Q(2)]})
    y = m.exact({m.constant: [Q(1)], some_: [Q(1), Q(1)]})
    assert m.times(m.sup(x), m.sup(y)) == m.magnitudes(m.mul(x, y).poly)
    z = m.times(m.sup(x), m.sup(y))
    q = m.over(z, m.sup(y), m.unit)
    assert all(a <= b for a, b in zip(m.sup(x), q, strict=True))
    assert m.over(m.sup(x), [m.unit, *m.nothing[1:]], m.unit) == m.sup(x)
    assert m.over([1, *m.nothing[1:]], [m.unit, *m.nothing[1:]], 2 * m.unit)[0] == 1  # rounded up


def test_remainders_of_products_and_quotients() -> None:
    """Of functions of which nothing but bounds is known: these multiply. 1/(2 + x) is bounded exactly, at -1."""
    m = Models(1, BITS, 40, 12)
    one, two = Model({}, [3 * m.unit, m.unit, 0]), Model({}, [5 * m.unit, 0, 2 * m.unit])
    assert m.mul(one, two).rest == [15 * m.unit, 5 * m.unit, 6 * m.unit]
    known = m.exact({(0,): [Q(7)], (1,): [Q(1)]})
    assert m.mul(one, known).rest[:2] == m.mul(known, one).rest[:2] == [24 * m.unit, 11 * m.unit]
    assert m.over([m.unit, 0, 0], [3 * m.unit, m.unit, 0], m.unit) == [m.unit, m.unit, 2 * m.unit]


@pytest.mark.parametrize("op", ["sqrt", "log", "inverse", "exp", "sin", "cos", "sinh", "cosh"])
@pytest.mark.parametrize("place", [Q(5, 7), Q(7, 5)])
def test_remainders_of_taylor_polynomials(op: str, place: Q, monkeypatch: pytest.MonkeyPatch) -> None:
    """After three terms: at the end of the cell no less than the truth, and hardly more than the third derivative there."""
    monkeypatch.setattr("ultibound.checker.models.MOST_TERMS", 3)
    m, r = Models(1, BITS, 40, 12), Q(1, 50)
    found = m.function(op, m.exact({(0,): [place], (1,): [r]}))
    call: Callable[[mpmath.mpf], mpmath.mpf] = (lambda u: 1 / u) if op == "inverse" else getattr(mpmath, op)
    more = {"sin": 8, "cos": 8, "sinh": 2, "cosh": 2}.get(op, 1.3)  # bounded by 1, by cosh
    with mpmath.workdps(40):
        c, h = mpmath.mpf(place.numerator) / place.denominator, mpmath.mpf(1) / 50
        a = mpmath.taylor(call, c, 2)
        most = [0, 0, 0]
        for x in (-h, h):
            truth = [
                call(c + x) - mpmath.polyval(a[::-1], x),
                h * (mpmath.diff(call, c + x) - a[1] - 2 * a[2] * x),
                h * h * (mpmath.diff(call, c + x, 2) - 2 * a[2]),
            ]
            most = [max(y, abs(z)) for y, z in zip(most, truth, strict=True)]
        for bound, exact in zip(found.rest, most, strict=True):
            assert exact * m.unit <= bound
            assert bound <= more * exact * m.unit + 100


@pytest.mark.parametrize("op", ["sqrt", "log", "inverse", "exp", "sin", "cos", "sinh", "cosh"])
@pytest.mark.parametrize("radius", [Q(1, 50), Q(1, 4)])
def test_functions(op: str, radius: Q) -> None:
    """Value, and the remainder's first and second derivatives by both coordinates, at 60 digits."""
    rng = random.Random(op)
    m = Models(2, BITS, 40, 30)
    call: Callable[[mpmath.mpf], mpmath.mpf] = (lambda u: 1 / u) if op == "inverse" else getattr(mpmath, op)
    inner = {
        (0, 0): [Q(7, 5), radius / 3, radius / 9],
        (1, 0): [radius / 9, radius / 9],
        (0, 1): [radius / 9],
        (1, 1): [radius / 9],
    }
    x = m.exact(inner)
    found = m.function(op, x)
    exact = expanded({e: [int(q * 22500) for q in c] for e, c in inner.items()}, 22500)
    stated = expanded(found.poly, m.unit)
    small = 2**26 if radius == Q(1, 50) else 2**42
    assert all(r <= small for r in found.rest), [r / m.unit for r in found.rest]
    with mpmath.workdps(60):

        def over(p: Powers, s: Q) -> Callable[[mpmath.mpf, mpmath.mpf], mpmath.mpf]:
            """A polynomial at one time, of the two coordinates."""
            parts: dict[tuple[int, int], Q] = {}
            for (k, i, j), c in p.items():
                parts[i, j] = parts.get((i, j), Q(0)) + c * s**k
            column = [(i, j, mpmath.mpf(c.numerator) / c.denominator) for (i, j), c in parts.items()]
            return lambda a, b: mpmath.fsum(c * a**i * b**j for i, j, c in column)

        for s, a, b in points(rng, 3, 6):
            inside, outside = over(exact, s), over(stated, s)
            p = [mpmath.mpf(y.numerator) / y.denominator for y in (a, b)]

            def off(a: mpmath.mpf, b: mpmath.mpf, f: Any = inside, g: Any = outside) -> mpmath.mpf:
                return call(f(a, b)) - g(a, b)

            for o, bound in zip(m.orders, found.rest, strict=True):
                taken = (o.count(0), o.count(1))
                slope = mpmath.diff(off, p, taken) if o else off(*p)
                assert abs(slope) * m.unit <= bound + mpmath.mpf(10) ** -10, (op, o)


def test_a_negative_inverse_and_constants() -> None:
    m = Models(1, BITS, 20, 8)
    x = m.function("inverse", m.exact({(0,): [Q(-3)], (1,): [Q(1, 100)]}))
    for c in (Q(-1), Q(1, 3), Q(1)):
        assert abs(value(x.poly, (Q(0), c)) - m.unit / (Q(-3) + c / 100)) <= x.rest[0] <= 100
    for op in ("sqrt", "log", "exp", "sin", "cos", "sinh", "cosh"):
        found = m.function(op, m.number(Q(2)))
        with mpmath.workdps(40):
            assert abs(found.poly[0,][0] - getattr(mpmath, op)(mpmath.mpf(2)) * m.unit) <= found.rest[0] <= 40
        assert found.rest[1:] == [0, 0]


@pytest.mark.parametrize("op", ["tan", "tanh", "asin", "acos", "atan", "abs", "max", "min", "flow"])
def test_other_functions_are_refused(op: str) -> None:
    m = Models(1, BITS, 20, 8)
    with pytest.raises(Undefined, match=f"{op} within the rates of a continuous stance"):
        m.function(op, m.number(Q(1, 2)))


def test_where_functions_are_not_defined() -> None:
    m = Models(1, BITS, 20, 8)
    edge = m.exact({(0,): [Q(1)], (1,): [Q(1)]})
    for op in ("sqrt", "log"):
        with pytest.raises(Undefined, match=f"{op} of values"):
            m.function(op, edge)
        with pytest.raises(Undefined, match=f"{op} of values"):
            m.function(op, m.number(Q(-1)))
    with pytest.raises(Undefined, match="inverse of values"):
        m.function("inverse", edge)
    with pytest.raises(Undefined, match="inverse of values"):
        m.function("inverse", m.number(Q(0)))
    with pytest.raises(Undefined, match="beyond 60"):
        m.power(edge, 61)
    assert m.power(edge, 0).poly == {(0,): [m.unit]}
    assert m.function("sqrt", m.exact({(0,): [Q(1)], (1,): [Q(99, 100)]})).rest[0] > 0


def test_the_least_magnitude() -> None:
    m = Models(1, BITS, 20, 8)
    assert m.least(m.number(Q(-3))) == 3 * m.unit
    near = m.exact({(0,): [Q(4), Q(1)], (1,): [Q(0), Q(1)]})
    assert m.least(near) == 2 * m.unit
    # 1 + 3/2 s + 3/2 T_2 = 3 s² + 3/2 s - 1/2 + 4/5: least 9/80, where a glance at coefficients sees nothing
    hard = m.exact({(0,): [Q(9, 5), Q(3, 2), Q(3, 2)]})
    assert Q(9, 160) <= Q(m.least(hard), m.unit) <= Q(9, 80)
    both = m.exact({(0,): [Q(1), Q(0), Q(3, 5)], (1,): [Q(1, 5)], (2,): [Q(1, 5)]})
    assert Q(7, 40) <= Q(m.least(both), m.unit) <= Q(7, 20)  # at s = 0, coordinate -1/2: 2/5 - 1/20
    turned = m.neg(both)
    assert m.least(turned) == m.least(both)
    for zero in ([Q(1), Q(1)], [Q(1, 2), Q(0), Q(1)], [Q(0)]):
        with pytest.raises(Undefined, match="may be zero"):
            m.least(m.exact({(0,): zero}))
    rough = Model(near.poly, [2 * m.unit, 0, 0])
    with pytest.raises(Undefined, match="may be zero"):
        m.least(rough)
    rough = Model(near.poly, [2 * m.unit - 1, 0, 0])
    assert m.least(rough) == 1


def test_remainders_shrink_with_the_cell() -> None:
    """exp within 1/2, 1/4, 1/8 about a point, powers up to the fourth: a fifth power and no less."""
    sizes = []
    for r in (Q(1, 2), Q(1, 4), Q(1, 8)):
        m = Models(1, 200, 4, 4)
        x = m.function("exp", m.exact({(0,): [Q(0)], (1,): [r]}))
        sizes.append(Q(x.rest[0], m.unit) / r**5)
    assert all(Q(1, factorial(5)) <= s <= Q(2, factorial(5)) for s in sizes)
