"""Continuous stances at exact equality: certificates that sit there, and functions whose whole numbers are known.

As in `test_boundaries.py`, whose way of writing certificates this shares; the rates are so simple that their
solutions are polynomials, or that the proved error can be worked out by hand. Few bits, so that each rounding shows.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Sequence
from fractions import Fraction as Q
from typing import Any

import pytest

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import STEP, Draft, Questions, but, derivation, limited, refuses
from tests.stances import stance

CASES = Questions()
unit, accept, reject = CASES.unit, CASES.accept, CASES.reject


# tables of numbers: one line each reads better
# fmt: off

# models: with 4 bits a unit is 1/16


def models(checker: Any, coordinates: int = 1, bits: int = 4, degree: int = 5, order: int = 3) -> Any:
    return checker.models.Models(coordinates, bits, degree, order)


@unit
def jets(checker: Any) -> None:
    """Rounded up; Leibniz' rule, and that of a quotient."""
    m = models(checker, 2)
    assert [m.up(x) for x in (0, 1, 15, 16, 17, 32)] == [0, 1, 1, 1, 2, 2]
    assert m.orders == [(), (0,), (1,), (0, 0), (0, 1), (1, 1)]
    x, y = [16, 32, 48, 64, 80, 96], [32, 16, 1, 3, 5, 7]
    # value 2; x_0 y + x y_0 = 64 + 16; ...
    assert m.times(x, y) == [32, 80, 97, 195, 215, 205]
    assert m.times([1, 0, 0, 0, 0, 0], [17, 1, 2, 3, 0, 31]) == [2, 1, 1, 1, 0, 2]
    # q = x/y with |y| >= 2: 8; (32 + 8/16 * 16)/2 -> 20; ...
    assert m.over(x, y, 32) == [8, 20, 25, 53, 55, 52]
    assert m.over([1, 0, 0, 0, 0, 0], [16, 0, 0, 0, 0, 0], 17) == [1, 0, 0, 0, 0, 0]
    assert m.over([17, 0, 0, 0, 0, 0], [16, 0, 0, 0, 0, 0], 16) == [17, 0, 0, 0, 0, 0]
    assert m.weights((3, 2)) == [1, 3, 2, 6, 6, 2] == m.weights((3, 2))
    assert m.sizes([((3, 2), 10), ((1, 0), 1)]) == [11, 31, 20, 60, 60, 20]
    assert m.magnitudes({(3, 2): [-4, 6], (1, 0): [-1]}) == [11, 31, 20, 60, 60, 20]
    sup = m.sup(checker.models.Model({(1, 1): [2, -3]}, [1, 2, 3, 4, 5, 6]))
    assert sup == [6, 7, 8, 4, 10, 6]


@unit
def spans_of_polynomials(checker: Any) -> None:
    """By Chebyshev polynomials in the coordinates: (1 + T_2)/2 for a square, (3 T_1 + T_3)/4 for a cube."""
    m = models(checker, 2)
    assert m.spans({(2, 0): [4]}) == [4, 8, 0, 8, 0, 0]
    assert m.spans({(2, 0): [8], (0, 0): [-4]}) == [4, 16, 0, 16, 0, 0]
    assert m.spans({(3, 0): [8], (1, 0): [-6]}) == [2, 18, 0, 48, 0, 0]
    assert m.spans({(2, 0): [1]}) == [1, 2, 0, 2, 0, 0]
    assert m.spans({(0, 3): [1]}) == [1, 0, 3, 0, 0, 6]
    assert m.spans({(0, 2): [1], (0, 0): [0, 1]}) == [2, 0, 2, 0, 0, 2]
    assert m.spans({(2, 0): [3], (0, 1): [-5], (0, 0): [1]}) == [9, 6, 5, 6, 0, 0]
    assert m.spans({(2, 0): [1], (0, 0): [-1]}) == [1, 2, 0, 2, 0, 0]
    assert m.spans({(3, 0): [1], (1, 0): [-1]}) == [1, 3, 0, 6, 0, 0]  # (T_3 - T_1)/4: 1/2, 10/4, rounded up
    # 8 x**4 = 3 + 4 T_2 + T_4; by x and y 2 T_2 (1 + T_2)/2 of 4 x**2 y**2
    assert m.spans({(4, 0): [8], (2, 0): [-8]}) == [2, 16, 0, 80, 0, 0]
    assert m.spans({(2, 2): [4]}) == [4, 8, 8, 8, 16, 8]
    assert m.spans({(1, 2): [2, -2], (1, 0): [-1]}) == [3, 3, 8, 0, 8, 8]
    steepest = checker.models.steepest
    assert [steepest([n, n], (0, 0)) for n in range(5)] == [0, 0, 4, 24, 80]
    assert [steepest([2, n], (0, 1)) for n in range(4)] == [0, 4, 16, 36] and steepest([3], (0,)) == 9 and steepest([], ()) == 1


@unit
def models_of_numbers(checker: Any) -> None:
    """Rounded down, and what is lost."""
    m = models(checker)
    x = m.exact({(0,): [Q(1, 3), Q(-1, 3), Q(1, 2)], (2,): [Q(1, 5)], (1,): [Q(1, 32)]})
    assert x.poly == {(0,): [5, -6, 8], (2,): [3], (1,): [0]} and x.rest == [4, 3, 2]
    assert m.number(Q(3, 16)).poly == {(0,): [3]} and m.number(Q(3, 16)).rest == [0, 0, 0]
    for ends, middle, rest in (((3, 8), 5, 3), ((-3, 8), 2, 6), ((5, 5), 5, 0), ((-8, -3), -6, 3)):
        y = m.between(ends)
        assert y.poly == {(0,): [middle]} and y.rest == [rest, 0, 0]


@unit
def models_added_and_multiplied(checker: Any) -> None:
    m, model = models(checker), checker.models.Model
    x, y = model({(0,): [16, 4], (1,): [2]}, [1, 2, 0]), model({(0,): [3, 0, 5]}, [4, 0, 1])
    for found, poly, rest in (
        (m.add(x, y), {(0,): [19, 4, 5], (1,): [2]}, [5, 2, 1]), (m.sub(x, y), {(0,): [13, 4, -5], (1,): [2]}, [5, 2, 1]),
        (m.sub(y, x), {(0,): [-13, -4, 5], (1,): [-2]}, [5, 2, 1]), (m.neg(x), {(0,): [-16, -4], (1,): [-2]}, [1, 2, 0]),
    ):
        assert found.poly == poly and found.rest == rest
    # (1 + s/4)(3 + 5 T_2)/16 = 48/16 + (12 + 10) s/16 + 80 T_2/16 + 10 T_3/16, in the coordinate (6 + 10 T_2)/16
    found = m.mul(x, y)
    assert found.poly == {(0,): [3, 1, 5, 1], (1,): [0, 0, 1]}, found.poly
    # rounded: 4 of 2 halves, 3 of 1 1/2; x.rest sup(y) + |x| y.rest: 12/16 + 22*4/16; (2*12 + 0)/16 + 2*4/16
    assert found.rest == [1 + 6 + 4, 2 + 1 + 2, 0 + 1 + 2], found.rest
    assert m.mul(model({(0,): [17]}, [0, 0, 0]), model({(0,): [8]}, [0, 0, 0])).poly == {(0,): [9]}
    assert m.mul(model({(0,): [15]}, [0, 0, 0]), model({(0,): [-8]}, [0, 0, 0])).poly == {(0,): [-7]}
    assert m.mul(model({(0,): [1]}, [0, 0, 0]), model({(0,): [1]}, [0, 0, 0])).poly == {}
    # degrees that are not kept: 5 in time, 3 in the coordinate
    third = model({(0,): [0, 0, 0, 16]}, [0, 0, 0])
    assert m.mul(third, third).poly == {(0,): [8]} and m.mul(third, third).rest == [8 + 3, 0, 0]
    second = model({(0,): [0, 0, 16]}, [0, 0, 0])
    assert m.mul(third, second).poly == {(0,): [0, 8, 0, 0, 0, 8]} and m.mul(third, second).rest == [3, 0, 0]
    square, cube = model({(2,): [16]}, [0, 0, 0]), model({(3,): [16]}, [0, 0, 0])
    assert m.mul(square, model({(1,): [16]}, [0, 0, 0])).poly == {(3,): [16]}
    assert m.mul(square, square).poly == {} and m.mul(square, square).rest == [16, 64, 192]
    assert m.held({(4,): [33], (0,): [1, 1, 1, 1, 1, 1, 17, -16]}, 5, [1, 0, 0]).rest == [1 + 2 + 2 + 3, 8, 24]
    assert m.held({(4,): [], (0,): [15, 16, -16, -17, 47]}, 5, [0, 0, 0]).poly == {(0,): [0, 1, 0, -1, 1]}
    assert m.power(x, 1) is x and m.power(cube, 0).poly == {(0,): [16]} and m.power(second, 2).poly == {(0,): [8, 0, 0, 0, 8]}
    assert m.power(model({(1,): [16]}, [0, 0, 0]), 3).poly == {(3,): [16]} and m.power(model({(0,): [16]}, [0, 0, 0]), 60).poly == {(0,): [16]}
    for n in (-1, 61):
        with refuses(checker.reals.Undefined, "a power beyond 60"):
            m.power(x, n)


@unit
def products_of_polynomials(checker: Any) -> None:
    gather, undefined = checker.models.gather, checker.reals.Undefined
    out: dict[Any, list[int]] = {}
    gather(out, {(1, 0): [0, 0, 3]}, {(1, 2): [0, 5]}, 1)  # 3 T_2 * 5 T_1 = 15/2 (T_1 + T_3)
    assert out == {(2, 2): [0, 15, 0, 15]}
    gather(out, {(2, 2): [1]}, {(0, 0): [0, 7, 0, 7, 1]}, -1)
    assert out == {(2, 2): [0, 1, 0, 1, -2]}
    out = {}
    gather(out, {(): [0, 2]}, {(): [0, 0, 1]}, 1)
    gather(out, {(): [3]}, {(): [5]}, 1)
    gather(out, {(): [0, 0, 1]}, {(): [0, 0, 1]}, 1)
    assert out == {(): [30 + 1, 2, 0, 2, 1]}
    long = [0] * 2000
    gather({}, {(): long}, {(): long}, 1)
    with refuses(undefined, "a product of polynomials that long"):
        gather({}, {(): long}, {(): [*long, 0]}, 1)
    # (1 + a)**10 times itself is (1 + a)**20, beside (b + b**3)**2 of another coordinate and what is there already
    for few in (-1, 10**9):  # joined to one number, or one by one
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr(checker.models, "FEW_PRODUCTS", few)
            half = {(k, n): [math.comb(10, k)] for k in range(11) for n in (1, 3)}
            out = {(3, 4): [7, 8, 9], (5, 4): [], (99, 0): [1]}
            gather(out, half, half, -1)
            found = {(k, n): [-2 * math.comb(20, k) * (1 + (n == 4))] for k in range(21) for n in (2, 4, 6)}
            assert out == {**found, (3, 4): [7 + found[3, 4][0], 8, 9], (99, 0): [1]}
            out = {}  # with a time that one of them has
            gather(out, {(0, 1): [2], (3, 0): [0, 5]}, {(1, 0): [3], (0, 2): [7]}, 1)
            assert out == {(1, 1): [12], (0, 3): [28], (4, 0): [0, 30], (3, 2): [0, 70]}
            gather(out, {(0, 1): [0, 2]}, {(1, 0): [0, 3]}, 1)  # that both have
            assert out[1, 1] == [12 + 6, 0, 6]
    derivative, value = checker.models.derivative, checker.models.value
    assert derivative([]) == derivative([7]) == [] and derivative([0, 1]) == [1] and derivative([9, 0, 1]) == [0, 4]
    assert derivative([0, 2, 3, 5, 7]) == [17, 68, 30, 56]  # T_3' = 3 + 6 T_2, T_4' = 8 T_1 + 8 T_3
    # 1 + 2 s + 3 (2 s² - 1) + 5 (4 s³ - 3 s), and 7 c of a coordinate
    assert value({(0, 0): [1, 2, 3, 5], (2, 1): [7, 0, 1]}, (Q(1, 2), Q(1, 3), Q(2))) == Q(1) + 1 - Q(3, 2) - 5 + (7 - Q(1, 2)) * Q(2, 9)
    assert value({(): []}, (Q(1),)) == 0 and value({(): [3]}, (Q(5),)) == 3


@unit
def least_magnitudes(checker: Any) -> None:
    m, model, undefined = models(checker), checker.models.Model, checker.reals.Undefined
    assert m.least(m.number(Q(-3))) == 48
    # at a glance where a quarter of the middle is left at least: 12 - 9; else what boxes show, less the rest
    assert m.least(model({(0,): [12], (1,): [9]}, [0, 0, 0])) == 3
    assert m.least(model({(0,): [-12], (1,): [8]}, [1, 0, 0])) == 3
    assert m.least(model({(0,): [-16], (2,): [-4]}, [0, 0, 0])) == 12  # where boxes show 8
    calls = []
    divided = m._divided

    def counted(x: Any) -> int:
        calls.append(x)
        return int(divided(x))

    m._divided = counted
    m.least(model({(0,): [12], (1,): [9]}, [0, 0, 0]))
    assert not calls
    assert m.least(model({(0,): [12], (1,): [10]}, [0, 0, 0])) == 2 and len(calls) == 1  # no less than at a glance
    # 1 + 3/2 s + 3/2 T_2 = 3 s² + 3/2 s - 1/2 + 4/5 in sixteenths: at a glance nothing
    hard = model({(0,): [29, 24, 24]}, [0, 0, 0])
    assert m.least(hard) == 1 and m.least(m.neg(hard)) == 1, (m.least(hard), m.least(m.neg(hard)))
    with refuses(undefined, "division by what may be zero in a cell"):
        m.least(model({(0,): [29, 24, 24]}, [1, 0, 0]))
    for column in ([0, 16], [8, 0, 16], [0], []):
        with refuses(undefined, "division by what may be zero in a cell"):
            m.least(model({(0,): column} if column else {}, [0, 0, 0]))
    # boxes of 1 + x**2/4: at a glance 1/2 of 1, and no more is looked for
    assert m._divided(model({(0,): [8], (2,): [2]}, [0, 0, 0])) == 4 and m._divided(model({(0,): [8], (2,): [3]}, [0, 0, 0])) == 5
    # finer units, least 9/80 and 7/20: time divided, then a coordinate
    m = models(checker, 1, 20)
    hard = m.exact({(0,): [Q(9, 5), Q(3, 2), Q(3, 2)]})
    both = m.exact({(0,): [Q(1), Q(0), Q(3, 5)], (1,): [Q(1, 5)], (2,): [Q(1, 5)]})
    assert [m._divided(x) for x in (hard, m.neg(hard), both, m.neg(both))] == [61324, 61324, 188416, 188416]
    m = models(checker, 2, 20)
    flat = m.exact({(0, 0): [Q(1)], (2, 0): [Q(1, 4)], (0, 2): [Q(-1, 2)], (1, 1): [Q(1, 4)]})
    assert m._divided(flat) == 327680  # 5/16 of the least, 7/16 at (-1/2, 1)


@unit
def taylor_polynomials(checker: Any) -> None:
    """Coefficients about a middle, and a bound of what is left: within so far of it, of every number of terms."""
    m = models(checker, 2, 12, 12, 8)
    for op, middle, far, expected in (
        ("exp", 0, 4096, ([(4096, 4097), (4096, 4097), (2048, 2049), (682, 684), (170, 172), (34, 36), (5, 7), (0, 2)], 1)),
        ("exp", -2048, 1024, ([(2484, 2485), (2484, 2485), (1242, 1243), (413, 415), (103, 104)], 1)),
        ("sin", 1024, 512, ([(1013, 1014), (3968, 3969), (-507, -506), (-662, -660), (42, 43)], 1)),
        ("cos", -1024, 512, ([(3968, 3969), (1013, 1014), (-1985, -1984), (-170, -168), (164, 166)], 1)),
        ("sinh", -1024, 512, ([(-1035, -1034), (4224, 4225), (-518, -517), (703, 705), (-44, -42)], 1)),
        ("cosh", 2048, 512, ([(4618, 4619), (2134, 2135), (2309, 2310), (355, 357), (191, 193)], 1)),
        ("cosh", -1024, 2048, ([(4224, 4225), (-1035, -1034), (2112, 2113), (-173, -172), (175, 177), (-9, -8)], 1)),
        ("sqrt", 4096, 1024, ([(4096, 4096), (2048, 2048), (-512, -512), (256, 256), (-160, -160), (111, 113), (-85, -83)], 1)),
        ("log", 8192, 2048, ([(2839, 2840), (2048, 2048), (-512, -512), (170, 171), (-65, -63), (25, 27), (-12, -10), (4, 6)], 1)),
        ("inverse", 8192, 2048, ([(2048, 2048), (-1024, -1024), (512, 512), (-256, -256), (128, 128), (-64, -64), (32, 32), (-16, -16), (8, 8), (-4, -4)], 1)),
        ("sqrt", 6144, 0, ([(5016, 5017), (1672, 1673), (-280, -278)], 0)),
        ("log", 6144, 0, ([(1660, 1661), (2730, 2731), (-911, -910)], 0)),
        ("exp", 1000, 0, ([(5228, 5229), (5228, 5229), (2614, 2615)], 0)),
    ):
        assert m._series(op, middle, far) == expected, (op, middle, far)
    few = models(checker)
    for op, middle, far, expected in (
        ("sinh", -16, 20, ([(-19, -18), (24, 25), (-10, -9), (3, 5), (-2, 0), (0, 2)], 1)), ("sin", -16, 16, ([(-14, -13), (8, 9), (6, 7), (-2, -1)], 1)),
        ("sin", -16, 3, ([(-14, -13), (8, 9), (6, 7)], 1)), ("exp", -32, 3, ([(2, 3), (2, 3), (1, 2)], 1)), ("sinh", 0, 4, ([(0, 1), (16, 17), (0, 1), (2, 4)], 1)),
    ):
        assert few._series(op, middle, far) == expected, (op, middle, far)
    series, second = m._series("sqrt", 9216, 9000)  # where terms grow, as far as 40
    assert len(series) == 40 and second == 14119770090285609134465728797381008063333594618570162621826523423


@unit
def functions_of_models(checker: Any) -> None:
    m, model, undefined = models(checker, 2, 12, 12, 8), checker.models.Model, checker.reals.Undefined
    x = model({(0, 0): [6000, 300], (1, 0): [400], (0, 1): [200], (1, 1): [100]}, [1, 2, 3, 4, 5, 6])
    for op, poly, rest in (
        ("exp", {(0, 0): [17746, 1299, 24], (1, 0): [1733, 127, 2], (0, 1): [866, 63, 1], (1, 1): [518, 38, 1], (2, 0): [85, 6], (2, 1): [46, 3], (0, 2): [21, 2], (1, 2): [23, 2], (2, 2): [7], (3, 0): [3], (3, 1): [2], (3, 2): [1], (1, 3): [1]}, [40, 68, 59, 120, 104, 87]),
        ("sqrt", {(0, 0): [4956, 124, -1], (1, 0): [165, -4], (0, 1): [83, -2], (1, 1): [39, -1], (2, 0): [-3], (2, 1): [-1], (0, 2): [-1], (1, 2): [-1]}, [22, 24, 19, 30, 25, 16]),
        ("inverse", {(0, 0): [2800, -140, 4], (1, 0): [-187, 19, -1], (0, 1): [-94, 9], (1, 1): [-34, 3], (2, 0): [13, -2], (2, 1): [5, -1], (0, 2): [3], (1, 2): [2], (3, 0): [-1]}, [34, 52, 40, 82, 60, 49]),
        ("log", {(0, 0): [1560, 205, -3], (1, 0): [273, -14], (0, 1): [137, -7], (1, 1): [59, -3], (2, 0): [-9, 1], (2, 1): [-4], (0, 2): [-2], (1, 2): [-2]}, [29, 37, 36, 50, 49, 45]),
        ("sin", {(0, 0): [4068, 32, -5], (1, 0): [42, -29], (0, 1): [21, -15], (1, 1): [-9, -7], (2, 0): [-19], (2, 1): [-10], (0, 2): [-5], (1, 2): [-5], (2, 2): [-1]}, [23, 28, 20, 37, 28, 17]),
    ):
        found = m.function(op, x)
        assert (found.poly, found.rest) == (poly, rest), op
    steep = m.function("sqrt", model({(0, 0): [6000], (1, 0): [2000], (0, 1): [1500]}, m.nothing))
    assert steep.rest == [2573843, 58828752, 44121582, 1311034341, 983275771, 737456905]
    down = m.function("inverse", m.neg(x))
    up = m.function("inverse", x)
    assert down.rest == up.rest and down.poly == m.neg(up).poly
    for op in ("sqrt", "log", "inverse"):
        for column in ([4096, 4096], [0, 1], [0]):
            with refuses(undefined, f"{op} of values that may not be positive in a cell"):
                m.function(op, model({(0, 0): column}, m.nothing))
        m.function(op, model({(0, 0): [4096, 2048]}, m.nothing))
    with refuses(undefined, "sqrt of values that may not be positive in a cell"):
        m.function("sqrt", model({(0, 0): [-4096]}, m.nothing))
    for op in ("tan", "flow"):
        with refuses(undefined, f"{op} within the rates of a continuous stance"):
            m.function(op, x)


# rates: quotients of models over a cell


class Built:
    """Terms put together by hand, and what a stance of them is."""

    def __init__(self, checker: Any) -> None:
        self.checker, self.terms = checker, checker.terms.Terms()

    def __call__(self, op: Any, *args: Any) -> int:
        """A number, a variable's name, or an operation on more of these."""
        if isinstance(op, (int, Q)):
            return int(self.terms.put("number", (), Q(op)))
        if not args and op != "pi":
            return int(self.terms.put("variable", (), "phase(t)" if op == "s" else op))
        ranks = tuple(a if isinstance(a, Rank) else self(*a) if isinstance(a, tuple) else self(a) for a in args if not isinstance(a, Pay))
        pay = [a.value for a in args if isinstance(a, Pay)]
        return Rank(self.terms.put(op, ranks, *pay))

    def system(
        self, matrix: Sequence[Sequence[Any]], free: Sequence[Any] | None = None, duration: Any = 1, grids: dict[str, Any] | None = None,
        forced: Sequence[Sequence[Any]] = (), libraries: Sequence[Any] = (), bits: int = 24, degrees: tuple[int, int] = (2, 2),
    ) -> Any:
        module = self.checker.motion
        self.motion = module.Motion(
            tuple("xyz"[: len(matrix)]), tuple(module.Parameter(n, self(n), g) for n, g in sorted((grids or {}).items())),
            tuple(tuple(row) for row in matrix), tuple(free or [None] * len(matrix)), duration, (), tuple(f"d{k}" for k, _ in enumerate(forced)), tuple(map(tuple, forced)),
        )
        return self.checker.rates.System(self.terms, self.motion, libraries, bits, degrees)


class Rank(int):
    """A term that is there already."""


class Pay:
    def __init__(self, value: Any) -> None:
        self.value = value


def exactly(model: Any, m: Any) -> dict[Any, list[Q]]:
    """Coefficients as numbers; zeros left out."""
    found = {e: [Q(c, m.unit) for c in column] for e, column in model.poly.items()}
    return {e: c for e, c in found.items() if any(c)}


def library(checker: Any) -> Any:
    grid = (Q(0), Q(1), Q(3)), (Q(0), Q(2))
    return checker.model.Library("l.csv", ("a", "b"), (), grid, {"r": tuple(map(Q, (1, 3, 7, 2, 0, 5))), "q": tuple(map(Q, (0, 0, 4, 4, 8, 8)))})


@unit
def rates_over_a_cell(checker: Any) -> None:
    """p = 2 + c, q = 5 + c/2, phase 1/4 .. 3/4, duration p: exactly what the polynomials are."""
    b = Built(checker)
    grids = {"p": None, "q": None}
    cell, span, none = [(Q(2), Q(1)), (Q(5), Q(1, 2))], (Q(1, 4), Q(3, 4)), (0, 0)
    p, q, s = {none: [Q(2)], (1, 0): [Q(1)]}, {none: [Q(5)], (0, 1): [Q(1, 2)]}, {none: [Q(1, 2), Q(1, 4)]}
    for term, poly, factors in (
        (b("p"), None, None), (b("q"), q, {}), (b("s"), s, {}), (b(Q(3, 4)), {none: [Q(3, 4)]}, {}),
        (b("neg", "q"), {none: [Q(-5)], (0, 1): [Q(-1, 2)]}, {}), (b("mark", "q", Pay("v")), q, {}),
        (b("add", "q", "s"), {none: [Q(11, 2), Q(1, 4)], (0, 1): [Q(1, 2)]}, {}), (b("sub", "q", "s"), {none: [Q(9, 2), Q(-1, 4)], (0, 1): [Q(1, 2)]}, {}),
        (b("mul", "q", "s"), {none: [Q(5, 2), Q(5, 4)], (0, 1): [Q(1, 4), Q(1, 8)]}, {}), (b("power", "q", Pay(Q(2))), {none: [Q(25)], (0, 1): [Q(5)], (0, 2): [Q(1, 4)]}, {}),
        (b("div", "q", 4), {none: [Q(5, 4)], (0, 1): [Q(1, 8)]}, {}),
        (b("div", "s", "q"), s, {"q": -1}), (b("div", "s", ("mul", "q", "q")), s, {"q": -2}), (b("div", "s", ("power", "q", Pay(Q(3)))), s, {"q": -3}),
        (b("div", "s", ("mark", "q", Pay("v"))), s, {"q": -1}), (b("div", ("mul", "q", "s"), ("mul", "q", 2)), {none: [Q(5, 4), Q(5, 8)], (0, 1): [Q(1, 8), Q(1, 16)]}, {"q": -1}),
        (b("mul", ("div", "s", "q"), ("div", "s", "q")), {none: [Q(9, 32), Q(1, 4), Q(1, 32)]}, {"q": -2}),
        (b("add", ("div", "s", "q"), 1), {none: [Q(11, 2), Q(1, 4)], (0, 1): [Q(1, 2)]}, {"q": -1}),
        (b("sub", 1, ("div", "s", "q")), {none: [Q(9, 2), Q(-1, 4)], (0, 1): [Q(1, 2)]}, {"q": -1}),
        (b("power", ("div", "s", "q"), Pay(Q(2))), {none: [Q(9, 32), Q(1, 4), Q(1, 32)]}, {"q": -2}),
        (b("mul", "p", "s"), s, {"p": 1}), (b("div", ("mul", "p", "s"), "p"), s, {}), (b("div", "s", "p"), s, {"p": -1}), (b("div", ("mul", "p", ("mul", "p", "s")), "p"), s, {"p": 1}),
        (b("div", "s", ("mul", "p", "p")), s, {"p": -2}), (b("add", ("mul", "p", "s"), "s"), {none: [Q(3, 2), Q(3, 4)], (1, 0): [Q(1, 2), Q(1, 4)]}, {}),
        (b("add", ("mul", "p", "s"), ("div", "s", "p")), None, {"p": -1}),
    ):
        system = b.system([[term]], duration=b("p"), grids=grids)
        c = checker.rates.Coefficients(system, cell, span)
        found = c.values[term]
        names = {b(n): n for n in "pq"}
        if factors is not None:
            assert {names[k]: n for k, n in found[1].items()} == factors, (b.terms.all[term], found[1])
        if poly is not None:
            assert exactly(found[0], system.models) == poly, (b.terms.all[term], exactly(found[0], system.models))
        assert max(found[0].rest) < 2000
    sum_ = b("add", ("div", "s", "q"), 1)
    split = b("div", "s", sum_)
    shared = checker.rates.Coefficients(b.system([[split]], duration=b("p"), grids=grids), cell, span).values[split]
    assert exactly(shared[0], system.models) == s and shared[1] == {b("q"): 1, sum_: -1}
    assert c.values[b("p")][1] == {b("p"): 1} and exactly(c.values[b("p")][0], system.models) == {none: [Q(1)]}
    assert exactly(c.divisors[b("p")][0], system.models) == p and c.divisors[b("p")][1] == system.models.unit
    assert exactly(c.plain(c.values[b("p")]), system.models) == p
    near = c.plain(c.values[b("div", "s", "p")])
    middle = Q(near.poly[none][0], system.models.unit)
    assert abs(middle - Q(1, 4)) < Q(1, 100) and near.poly[none][1] > 0 and near.poly[1, 0][0] < 0
    circle = b.system([[b("pi")]], duration=b(1))
    ends = checker.rates.Coefficients(circle, [], (Q(0), Q(1))).values[b("pi")][0]
    assert abs(Q(ends.poly[()][0], circle.models.unit) - Q("3.141592653589793238")) < Q(1, 10**18) and ends.rest == [1]


@unit
def rates_in_a_row(checker: Any) -> None:
    """h = (3/4 - 1/4)/2 p times each entry: numerators, their denominator, its least magnitude."""
    b = Built(checker)
    cell, span, none = [(Q(2), Q(1)), (Q(5), Q(1, 2))], (Q(1, 4), Q(3, 4)), (0, 0)
    half, one = b("div", "s", "q"), b("div", 1, ("mul", "q", "p"))
    system = b.system([[half, one], [None, b("s")]], [None, b("div", 2, ("mul", "q", "q"))], b("p"), {"p": None, "q": None})
    m = system.models
    c = checker.rates.Coefficients(system, cell, span)
    assert list(system.states) == [1, 2] and system.columns_of == [1, 2, 0] and (m.bits, m.degree, m.order) == (72, 12, 6)
    above, below, least = c.row([half, one, None])
    assert above[2] is None and exactly(below, m) == {none: [Q(5)], (0, 1): [Q(1, 2)]} and Q(least, m.unit) == Q(9, 2)
    assert exactly(above[0], m) == {none: [Q(1, 4), Q(1, 8)], (1, 0): [Q(1, 8), Q(1, 16)]} and exactly(above[1], m) == {none: [Q(1, 4)]}
    above, below, least = c.row([b("s"), b("div", 2, ("mul", "q", "q"))])
    assert Q(least, m.unit) == Q(81, 4) and exactly(below, m) == {none: [Q(25)], (0, 1): [Q(5)], (0, 2): [Q(1, 4)]}
    assert exactly(above[1], m) == {none: [Q(1)], (1, 0): [Q(1, 2)]} and exactly(above[0], m)[none] == [Q(25, 4), Q(25, 8)]
    above, below, least = c.row([None, None])
    assert above == [None, None] and exactly(below, m) == {none: [Q(1)]} and least == m.unit
    still = b.system([[b("div", 1, ("sub", "s", Q(1, 2)))]], duration=b(1))
    tiny = b.system([[b("div", 1, ("power", ("add", "s", Q(1, 1000)), Pay(Q(8))))]], duration=b(1))
    with refuses(checker.reals.Undefined, "division by what may be zero in a cell"):
        checker.rates.Coefficients(still, [], (Q(0), Q(1)))
    close = checker.rates.Coefficients(tiny, [], (Q(0), Q(1)))
    with refuses(checker.reals.Undefined, "division by what may be zero in a cell"):
        close.row(tiny.motion.matrix[0])
    bits = b.system([[b("s")]], duration=b(Q(1, 2)), forced=[[b(1)], [b(2)]], free=[b(3)])
    assert bits.columns_of == [1, 2, 3, 0] and list(bits.states) == [1] and len(bits.forcing) == 3
    c = checker.rates.Coefficients(bits, [], span)
    above, below, least = c.row([*bits.motion.matrix[0], b(1), b(3)])
    assert [exactly(x, bits.models) for x in above] == [{(): [Q(1, 16), Q(1, 32)]}, {(): [Q(1, 8)]}, {(): [Q(3, 8)]}]
    assert b.system([[None]], duration=b(1)).columns_of == [1] and b.system([[None]], duration=b(1)).forcing == ()


@unit
def powers_of_rates(checker: Any) -> None:
    b, undefined = Built(checker), checker.reals.Undefined
    module, span = checker.rates, (Q(0), Q(1))
    grids, cell = {"q": None}, [(Q(1), Q(1, 2))]

    def of(term: int) -> Any:
        return module.Coefficients(b.system([[term]], grids=grids, duration=b(1)), cell, span).values[term]

    assert of(b("div", 1, ("power", "q", Pay(Q(60)))))[1] == {b("q"): -60}
    raised = b("power", "q", Pay(Q(61)))
    with refuses(undefined, "a power beyond 60"):
        of(b("div", 1, raised))
    with refuses(undefined, "a power beyond 60"):
        of(b("div", ("div", 1, ("power", "q", Pay(Q(60)))), "q"))
    assert module.merged({1: 2, 2: 1}, {1: -2, 3: 4}) == {2: 1, 3: 4} and module.merged({1: 2}, {1: 3, 2: 1}, -1) == {1: -1, 2: -1}
    assert module.lowest({1: 2, 2: -1, 4: 3}, {2: -3, 3: -1, 4: 2}) == {2: -3, 3: -1, 4: 2} and module.lowest({1: 2}, {}) == {}
    assert module.bounded({1: 60, 2: -60}) == {1: 60, 2: -60}
    for n in (61, -61):
        with refuses(undefined, "a power beyond 60"):
            module.bounded({1: n})


@unit
def rates_that_are_read(checker: Any) -> None:
    """r over {0, 1, 3} x {0, 2} at (p, q): bilinear within a cell, exactly."""
    b, undefined, rejected = Built(checker), checker.reals.Undefined, checker.numerals.Rejected
    lib = library(checker)
    grids = {"p": lib.grid[0], "q": lib.grid[1]}

    def of(term: int, cell: Any, grids: Any = grids) -> Any:
        system = b.system([[term]], grids=grids, libraries=[lib], duration=b(1))
        x = checker.rates.Coefficients(system, cell, (Q(0), Q(1))).values[term]
        assert not x[1]
        return exactly(x[0], system.models)

    r = b("reading", "p", "q", Pay("r"))
    # in the first cell r = 1 + 6 p + q - 7/4 p q... at p = 1/2 + c/4, q = 1 + d
    low = of(r, [(Q(1, 2), Q(1, 4)), (Q(1), Q(1))])
    assert low == {(0, 0): [Q(13, 4)], (1, 0): [Q(5, 8)], (0, 1): [Q(-3, 4)], (1, 1): [Q(-7, 8)]}, low
    high = of(r, [(Q(2), Q(1)), (Q(1, 2), Q(1, 4))])
    assert high == {(0, 0): [Q(7, 2)], (1, 0): [Q(-9, 4)], (1, 1): [Q(5, 8)]}, high
    assert of(b("reading", "p", 1, Pay("r")), [(Q(2), Q(1)), (Q(9), Q(1))])
    assert of(b("reading", 2, "q", Pay("q")), [(Q(0), Q(1)), (Q(1), Q(1))]) == {(0, 0): [Q(6)]}
    with refuses(undefined, "r: a line of its grid lies inside a cell"):
        of(r, [(Q(1), Q(1)), (Q(1), Q(1))])
    with refuses(undefined, "beyond its grid"):
        of(r, [(Q(3), Q(1)), (Q(1), Q(1))])
    for axis in (("neg", "p"), ("mul", 2, "s")):
        with refuses(undefined, "a library axis within the rates is no parameter"):
            of(b("reading", axis, "q", Pay("r")), [(Q(1, 2), Q(1, 4)), (Q(1), Q(1))])
    for bad in ({"p": None, "q": lib.grid[1]}, {"p": (Q(0), Q(3)), "q": lib.grid[1]}):
        with refuses(rejected, "r is read on another grid than its parameter"):
            of(r, [(Q(1, 2), Q(1, 4)), (Q(1), Q(1))], bad)
    more = {"p": (*lib.grid[0], Q(4)), "q": lib.grid[1]}
    assert of(r, [(Q(1, 2), Q(1, 4)), (Q(1), Q(1))], more) == low
    with refuses(rejected, "u is no parameter of the stance"):
        of(b("add", "u", "p"), [(Q(1, 2), Q(1, 4)), (Q(1), Q(1))])
    with refuses(rejected, "the duration depends on the time"):
        b.system([[b("p")]], grids={"p": None}, duration=b("add", "s", "p"))


# how an error grows


@unit
def growth_of_errors(checker: Any) -> None:
    """exp(2 B) and the integral of exp(B u) over [0, 2], in units of 2**-40, rounded up and by few of them."""
    flows, one = checker.flows, 1 << 40
    for matrix, grown, total in (
        ([[Q(0)]], [[1099511627776]], [[2199023255553]]),
        ([[Q(1, 2)]], [[2988782477968]], [[3778541700384]]),
        ([[Q(1, 3)]], [[2141556225960]], [[3126133794545]]),
        ([[Q(64)]], [[42745805977935560012174743269793992231777727096003168952192207749184]], [[667903218405243125190230363590531128621526985875049514860823376897]]),
        ([[Q(0), Q(1)], [Q(1, 3), Q(0)]], [[1917671952085, 2721326825016], [907108941674, 1917671952082]], [[2721326825017, 2454480972912], [818160324309, 2721326825016]]),
        ([[Q(0), Q(1)], [Q(0), Q(0)]], [[1099511627777, 2199023255553], [0, 1099511627776]], [[2199023255553, 2199023255553], [1, 2199023255553]]),
        ([[Q(1, 4), Q(3, 2)], [Q(1, 8), Q(2)]], [[5216656491117, 55335080787495], [4611256732327, 69774250743165]], [[4215694810214, 24505769286100], [2042147440525, 32805758977313]]),
        ([[Q(5, 4)]], [[13394793765119]], [[9836225709874]]),
        ([[Q(0), Q(8)], [Q(1, 1 << 40), Q(0)]], [[1099511627912, 17592186044624], [3, 1099511627793]], [[2199023255587, 17592186044480], [17, 2199023255578]]),  # terms of one unit each, until they halve
    ):
        rates = [[-(-q.numerator * one // q.denominator) for q in row] for row in matrix]
        assert flows.growth(rates) == (grown, total), (matrix, flows.growth(rates))
    with refuses(checker.reals.Undefined, "rates that large: more pieces are needed"):
        flows.growth([[64 * one, 1], [0, 0]])
    with refuses(checker.reals.Undefined, "rates that large: more pieces are needed"):
        flows.growth([[0, 0], [64 * one, 1]])
    assert flows.applied([[3, 5], [0, 1]], [7, 11], 4) == [5, 1] and flows.applied([[3, 5], [0, 16]], [7, -11], 4) == [-2, -11]
    assert flows.applied([[1, 0]], [1, 9], 4) == [1] and flows.applied([[16]], [1], 4) == [1] and flows.applied([[0]], [5], 4) == [0]


# x' = y, y' = r(q) + d over p seconds: Φ_12 = p θ, Φ_10 = r p² θ²/2, ...; the witness is exact

AXIS = (Q(0), Q(1), Q(3))
READ = (Q(1), Q(2), Q(8))
Powers = dict[tuple[int, ...], Q]  # of the piece's time and the coordinates


def product_of(*parts: Powers) -> Powers:
    found: Powers = {(0, 0, 0): Q(1)}
    for part in parts:
        more: Powers = {}
        for e, a in found.items():
            for f, b in part.items():
                to = tuple(map(sum, zip(e, f, strict=True)))
                more[to] = more.get(to, Q(0)) + a * b
        found = more
    return found


def text_of(columns: Sequence[Powers], exponents: Sequence[tuple[int, ...]], degree: int, bits: int = 24) -> str:
    """Of polynomials of degree 2 in time at most, by Chebyshev polynomials, in whole numbers."""
    numbers = []
    for poly in columns:
        for e in exponents:
            a = [poly.get((n, *e), Q(0)) for n in range(3)]
            numbers += [*(x << bits if isinstance(x, int) else x * 2**bits for x in (a[0] + a[2] / 2, a[1], a[2] / 2)), *[Q(0)] * degree][: degree + 1]
    assert all(x.denominator == 1 for x in numbers)
    return " ".join(map(str, numbers))


def falling(cuts_q: Sequence[Q], pieces: Sequence[Q], cuts_p: Sequence[Q] = (Q(1), Q(2))) -> dict[str, Any]:
    """The witness."""
    exponents = [(i, j) for i in range(4) for j in range(4) if i + j <= 3]
    cells = []
    for a, b in itertools.pairwise(cuts_p):
        for low, high in itertools.pairwise(cuts_q):
            k = 0 if high <= 1 else 1
            slope = (READ[k + 1] - READ[k]) / (AXIS[k + 1] - AXIS[k])
            p = {(0, 0, 0): (a + b) / 2, (0, 1, 0): (b - a) / 2}
            r = {(0, 0, 0): READ[k] + slope * ((low + high) / 2 - AXIS[k]), (0, 0, 1): slope * (high - low) / 2}
            texts = []
            for f, g in itertools.pairwise(pieces):
                time = {(0, 0, 0): (f + g) / 2, (1, 0, 0): (g - f) / 2}
                one, none, half = {(0, 0, 0): Q(1)}, {(0, 0, 0): Q(0)}, {(0, 0, 0): Q(1, 2)}
                t = product_of(p, time)
                columns = [one, none, t, one, product_of(t, t, half), t, product_of(t, t, half, r), product_of(t, r)]
                texts.append(text_of(columns, exponents, 2))
            cells.append(texts)
    return {"cuts": {"p": [str(x) for x in cuts_p], "q": [str(x) for x in cuts_q]}, "pieces": [str(x) for x in pieces], "degrees": [2, 3], "bits": 24, "cells": cells}


def fall(checker: Any) -> tuple[Built, Any]:
    b = Built(checker)
    lib = checker.model.Library("l.csv", ("a",), (), (AXIS,), {"r": READ})
    b.system([[None, b(1)], [None, None]], [None, b("reading", "q", Pay("r"))], b("p"), {"p": None, "q": AXIS}, [[None, b(1)]], [lib])
    return b, lib


def proves(checker: Any, b: Built, libraries: Sequence[Any], witness: dict[str, Any], claimed: Q | None = None) -> Any:
    return checker.flows.trajectory(b.terms, b.motion, libraries, witness, claimed)


@unit
def flows_enclosed(checker: Any) -> None:
    """Middles and reaches of exact polynomials over parts of cells and pieces."""
    undefined = checker.reals.Undefined
    b, lib = fall(checker)
    flows = proves(checker, b, [lib], falling([Q(0), Q(1), Q(2), Q(3)], [Q(0), Q(1, 2), Q(1)]), Q(388, 2**72))
    assert flows.error == Q(388, 2**72) and flows.grids == (None, AXIS)
    assert [[sum(map(sum, x.errors.values())) for x in pieces] for pieces in flows.cells] == ERRORS, ERRORS
    assert [[sum(map(sum, x.rates.values())) for x in pieces] for pieces in flows.cells] == SPEEDS, SPEEDS
    a = checker.reals.Scaled(90)

    def ends(entry: tuple[int, int], orders: Sequence[int], *at: tuple[Any, Any], cells: Sequence[range] | None = None) -> tuple[int, int]:
        read = checker.ranges.met(AXIS, Q(at[2][0]), Q(at[2][1]), False) if cells is None else range(0)
        low, high = flows.partial(*entry, orders, [(Q(x), Q(y)) for x, y in at], cells or (range(1), range(1), read), a)
        return int(low), int(high)

    for entry, orders, at, expected in [*FALLS, *FALLS[::-1]]:
        assert ends(entry, orders, *at) == expected, (entry, orders, at, ends(entry, orders, *at))
    for orders in ((2, 0, 0), (0, 1, 2), (1, 1, 1), (0, 0, 3)):
        with refuses(undefined, "a derivative of a trajectory beyond what is proved"):
            ends((1, 2), orders, (0, 1), (1, 2), (0, 1))
    with refuses(undefined, "no such column of the fundamental solution"):
        ends((1, 4), (0, 0, 0), (0, 1), (1, 2), (0, 1))
    with refuses(checker.reals.Inexact, "exact arithmetic has no trajectories"):
        flows.partial(1, 2, (0, 0, 0), [(Q(0), Q(1))] * 3, (range(1),) * 3, checker.exact.Exact())
    tiny = Q("1" + STEP)
    for time in ((-1 - tiny, 0), (0, 1 + tiny), (1, 1 + tiny), (1 + tiny, 1 + tiny)):
        with refuses(undefined, "a time before or after the stance"):
            ends((1, 2), (0, 0, 0), time, (1, 2), (0, 1))
    for p, text in (((1 - tiny, 2), "p over [0.999999, 2], where"), ((1, 2 + tiny), "p over [1, 2.00001], where"), ((Q(4, 3), Q(7, 3)), "p over [1.33333, 2.33334], where")):
        with refuses(undefined, text):
            ends((1, 2), (0, 0, 0), (0, 1), p, (0, 1))
    # beyond the cuts, within the grid; a derivative by what is read, on the side of the cells that are met
    shorter = proves(checker, b, [lib], falling([Q(1, 2), Q(1), Q(2)], [Q(0), Q(1)]))
    for q in (("1/4", 1), (1, "5/2")):
        with refuses(undefined, "where no trajectory is proved"):
            shorter.partial(1, 2, (0, 0, 0), [(Q(0), Q(1)), (Q(1), Q(2)), (Q(q[0]), Q(q[1]))], (range(1), range(1), range(2)), a)
    one = 1 << 90

    def slope(which: Any, q: Any, cells: range) -> tuple[int, int]:
        """Of r p by q, at touchdown and p = 2, by the part of each cell."""
        low, high = which.partial(2, 0, (0, 0, 1), [(Q(1), Q(1)), (Q(2), Q(2)), (Q(q[0]), Q(q[1]))], (range(1), range(1), cells), a)
        return round(Q(int(low), one)), round(Q(int(high), one))

    assert slope(flows, (1, 1), range(1)) == (2, 2) and slope(flows, (1, 1), range(1, 2)) == (6, 6) and slope(flows, (1, 1), range(2)) == (2, 6)
    assert slope(flows, (2, 2), range(1, 2)) == (6, 6) and slope(flows, (0, 1), range(1)) == (2, 2) and slope(flows, (0, 3), range(2)) == (2, 6)
    assert slope(shorter, (1, 2), range(1, 2)) == (6, 6) and slope(shorter, ("1/2", 1), range(1)) == (2, 2) and slope(shorter, ("1/2", 2), range(2)) == (2, 6)
    right = proves(checker, b, [lib], falling([Q(1), Q(2)], [Q(0), Q(1)]))
    left = proves(checker, b, [lib], falling([Q(0), Q(1)], [Q(0), Q(1)]))
    assert slope(right, (1, 1), range(1, 2)) == (6, 6) and slope(left, (1, 1), range(1)) == (2, 2)
    for which, cells in ((right, range(1)), (left, range(1, 2)), (right, range(2)), (left, range(2))):
        with refuses(undefined, "a derivative at the edge of what is proved of a trajectory"):
            slope(which, (1, 1), cells)
    # at the last cut, the cell that it bounds
    at = (Q(1), Q(2)), (Q(1), Q(1))
    assert left.reached(at, (range(1), range(1, 2))) == [range(1), range(1)]
    assert flows.reached(at, (range(1), range(1, 2))) == [range(1), range(1, 2)]
    assert left.reached(at, (range(1), range(2))) == [range(1), range(2)] and left.reached(at, (range(1), range(1))) == [range(1), range(1)]
    for q in ((Q(1, 2), Q(1)), (Q(1), Q(2)), (Q(1, 2), Q(1, 2))):
        assert left.reached((at[0], q), (range(1), range(1, 2))) == [range(1), range(1, 2)]
    early = proves(checker, b, [lib], falling([Q(0), Q(1, 2)], [Q(0), Q(1)]))
    assert early.reached((at[0], (Q(1, 2), Q(1, 2))), (range(1), range(1))) == [range(1), range(1)]
    assert early.reached(((Q(2), Q(2)), (Q(1, 2), Q(1, 2))), (range(1), range(1, 2))) == [range(1), range(1, 2)]
    # two cells of another parameter: ranks of cells
    two = proves(checker, b, [lib], falling([Q(0), Q(1), Q(2), Q(3)], [Q(0), Q(1)], (Q(1), Q(3, 2), Q(2))))
    for p, q, low, high in (((1, 1), (3, 3), 8, 8), ((2, 2), (0, 0), 2, 2), ((Q(3, 2), Q(3, 2)), (2, 2), Q(15, 2), Q(15, 2)), ((2, 2), (1, 1), 4, 4)):
        found = two.partial(2, 0, (0, 0, 0), [(Q(1), Q(1)), p, q], (range(1), range(1), range(2)), a)
        assert abs(Q(int(found[0]), one) - low) < Q(1, 10**18) and abs(Q(int(found[1]), one) - high) < Q(1, 10**18)


ERRORS = [[238, 654], [361, 1008], [448, 1264]]
SPEEDS = [[135, 224], [202, 345], [249, 433]]
FALLS: list[Any] = [  # entry, orders, time and parameters, units of 2**-90
    ((1, 2), (0, 0, 0), (("-1", "1"), ("1", "2"), ("0", "3")), (-309485009821345068728188928, 2475880078570760549805588480)),
    ((1, 0), (0, 0, 0), (("1", "1"), ("1", "2"), ("0", "3")), (-2630622583481433084227747840, 19807040628566084398487699456)),
    ((1, 0), (0, 0, 0), (("1/4", "3/4"), ("5/4", "3/2"), ("1/2", "5/2")), (-723542103039355561128755200, 6930771723850669058692218880)),
    ((2, 0), (0, 0, 0), (("-1/2", "1/3"), ("3/2", "3/2"), ("1/3", "1/3")), (618970017336847128229314560, 1650586720584402373045649408)),
    ((1, 0), (0, 0, 1), (("1", "1"), ("1", "3/2"), ("1/2", "3/4")), (541598767187353870244249600, 1392682544196052809285632000)),
    ((1, 0), (0, 0, 1), (("1/2", "1"), ("1", "3/2"), ("1/2", "5/2")), (88251584831867929729433600, 4178047632588158427831730176)),
    ((1, 0), (1, 0, 0), (("-1/2", "1/2"), ("1", "2"), ("1/2", "2")), (-3191564163782621021275684864, 9284550294640352061794811904)),
    ((1, 0), (1, 1, 0), (("-1/2", "1/2"), ("1", "2"), ("3/2", "2")), (-270799383593676935165640704, 9284550294640352061805297664)),
    ((1, 0), (0, 2, 0), (("-1/2", "1/2"), ("1", "2"), ("3/2", "2")), (-67699845898419233803468800, 3481706360490132023212507136)),
    ((1, 0), (0, 1, 1), (("1", "1"), ("1", "2"), ("3/2", "7/4")), (3713820117856140824628166656, 7427640235712281649463951360)),
    ((1, 0), (1, 0, 1), (("-1", "0"), ("9/8", "5/4"), ("2", "3")), (-141444320894911613459496960, 1450710983537555009666285568)),
    ((2, 0), (0, 0, 2), (("1", "1"), ("1", "2"), ("1", "3")), (0, 0)),
    ((2, 3), (0, 1, 0), (("0", "1/8"), ("1", "2"), ("3", "3")), (618970019642690137444319232, 696341272098026404636000256)),
    ((2, 1), (0, 0, 0), (("0", "1"), ("1", "2"), ("0", "1")), (0, 0)),
    ((1, 1), (0, 0, 0), (("1", "1"), ("2", "2"), ("3", "3")), (1237940039285380274899124224, 1237940039285380274899124224)),
    ((1, 3), (0, 0, 0), (("1/3", "1/3"), ("4/3", "4/3"), ("1/7", "1/7")), (489062727014781329407398036, 489062732480483273388996836)),
    ((1, 3), (1, 1, 0), (("0", "0"), ("1", "3/2"), ("2", "5/2")), (618970019642690137431736320, 928455029464035206192168960)),
    ((1, 0), (0, 0, 0), (("999/1000", "999/1000"), ("4/3", "5/3"), ("5/7", "2")), (1150820268022714165781144856, 8588211199137585241760127720)),
    ((2, 0), (0, 1, 0), (("1", "1"), ("1", "2"), ("1", "5/2")), (2475880078570760549784616960, 8046610255354971786860036096)),
    ((1, 0), (0, 0, 0), (("-1", "-1"), ("1", "1"), ("0", "0")), (-9699328, 9699328)),
    ((1, 0), (0, 1, 0), (("0", "1"), ("4/3", "4/3"), ("1", "2")), (-1753748398883531637401845760, 8252933599078940181436301312)),
    ((1, 0), (1, 0, 0), (("1", "1"), ("4/3", "4/3"), ("1", "1")), (2200782281814707117715619840, 2200782294112536497428103168)),
    ((1, 0), (0, 0, 0), (("1/3", "2199023255555/6597069766656"), ("4/3", "8796093022211/6597069766656"), ("5/4", "2748779069441/2199023255552")), (1344922496557797676876144930, 1344922517054179980813940968)),
]


@unit
def pieces_that_are_off(checker: Any) -> None:
    """x' = y/3 + x/5 of a second piece, y' = p x/q + 1 of coarse polynomials: errors and their slopes, all worked out."""
    flows = checker.flows
    b = Built(checker)
    rate = b("div", ("mul", "p", "s"), "q")
    system = b.system([[b(Q(1, 5)), b(Q(1, 3))], [rate, None]], [None, b("s")], b("p"), {"p": None, "q": None}, [[None, b("q")]])
    cell = [(Q(3, 2), Q(1, 2)), (Q(5), Q(1, 2))]
    unit_, none = 1 << 24, (0, 0)
    columns = [(i, j) for j in (1, 2, 3, 0) for i in (1, 2)]
    first = {(i, j): {none: [unit_ * (i == j) + 3, 5, -7], (1, 0): [11 * i, 0, j], (0, 1): [0, -13, 0], (0, 2): [1, 1, 1]} for i, j in columns}
    second = {(i, j): {none: [unit_ * (i == j) + 31, 7 * j, 1], (1, 0): [2, 3, i], (1, 1): [0, 4, 0], (0, 1): []} for i, j in columns}
    one = flows.piece(system, cell, (Q(0), Q(1, 3)), first, None)
    two = flows.piece(system, cell, (Q(1, 3), Q(1)), second, one)
    for n, found in enumerate((one, two)):
        assert (found.errors, found.rates) == OFF[n], (found.errors, found.rates)
    assert flows.start(system, 1, 1, first, None) == {none: [3 - 5 - 7 << 48], (1, 0): [12 << 48], (0, 1): [13 << 48], (0, 2): [1 << 48]}
    assert flows.start(system, 2, 1, first, None) == {none: [unit_ * 0 + 3 - 5 - 7 << 48], (1, 0): [23 << 48], (0, 1): [13 << 48], (0, 2): [1 << 48]}
    assert flows.start(system, 1, 0, second, one) == {none: [31 + 1 - 1 << 48], (1, 0): [2 - 3 + 1 - 11 << 48], (1, 1): [-4 << 48], (0, 1): [13 << 48], (0, 2): [-3 << 48]}


OFF: list[Any] = [  # errors, and how fast they may grow
    ({
        (1, 1): [730371395440788612306, 256377414458177134647, 6990430820472123401, 62676479378542032885, 7686161110933796081, 1574269047966702152], (2, 1): [500793794374435711277, 281141885356846460484, 60088435517294171383, 95491300483084625203, 33388139324472886340, 13514067767257297728], (1, 2): [1126751062725366861710, 331734790759993091125, 1463193791176843031, 37714587725283778263, 1947011185609341776, 331869528864710716], (2, 2): [54356673904614967597, 71542552953616856338, 12437272805514981786, 48407527754060562846, 9972363449456900543, 2803149939057444798], (1, 3): [2464153914463179220976, 1985504228002036616473, 724977932865481667339, 824409109968501447184, 587469930536293786071, 203690695139420076749], (2, 3): [21243401211092815867835, 5498325312604403949594, 6249969402017617036059, 265843218675487977388, 1646300744587591977912, 1755990942806411389477], (1, 0): [149388024860813690777, 120344926861976294200, 30383686462103160295, 49967178158403213679, 24667725345567998653, 6832550790788569648], (2, 0): [1287515470899986087389, 333240588455538881316, 261765299568795264881, 16113927612634283003, 69483705919174307359, 58846525482306535568],
    }, {
        (1, 1): [419173017948412688238, 153122187424593116596, 7149646001030236988, 38953956155359394058, 6008072078138947373, 1609329104882364232], (2, 1): [269282183998674125879, 147295382894288854573, 30273345412073734065, 49414841257685309732, 16918577546685872976, 6808821807024352636], (1, 2): [605878247768187557380, 181534346552284999034, 1486589897768419452, 22925829949574098310, 1607945182300086503, 336400489364470033], (2, 2): [55659902535865542324, 44205999730943183585, 6264711483884884807, 25199900050953463242, 5044436940132319479, 1412216760310682854], (1, 3): [2524673093626764508353, 1374460451751779255131, 742780031304066747115, 456145256665723652615, 407780431394824195529, 208692299181996377181], (2, 3): [10703301846390171159649, 2804297013607635490770, 3148992338328358965806, 153972227587340452809, 839482352407222317734, 884741007306627850303], (1, 0): [153031539804334109930, 83305339606331240797, 31117736827305760948, 27646892431800611395, 17142817577539155315, 6996820967187070714], (2, 0): [648698422516128933669, 169959104198337445983, 131886521780604996548, 9332836336086328178, 35427954268086084580, 29649195900911392077],
    }),
    ({
        (1, 1): [3541321473337673241044, 2385086650393212979538, 177636225301106119472, 1936043440133000921484, 248734014483252549766, 45411943442142935683], (2, 1): [4442259174758872572176, 3416125883982107323536, 643947525069033600378, 2633396241191444616716, 576112547716034519824, 167806248995410634752], (1, 2): [4193649968771969778647, 2003699895342087907251, 77493599029669857073, 1290545179276069746616, 127762685001398672609, 19790847710038289839], (2, 2): [1557999597080221834901, 1943446936577931152152, 304603609408921305468, 1883595615372743362956, 332681754038384120366, 78431222930030412662], (1, 3): [25447756501642172054714, 21748578441463034912694, 7890433582342333995530, 16440717852270593545150, 7268037362653075107326, 2443843160532090566509], (2, 3): [70465954850968258104950, 29862847703122970559372, 22430308451869427292976, 19530403165302608361774, 11381618826036262647935, 7257440874215584512723], (1, 0): [2819128099820118399655, 2548160117523476683075, 616901817978153338553, 1920697734132907636492, 614710966576599879164, 157783142326049420388], (2, 0): [9645564413889926309244, 3776329299992282444619, 2145114647878414108473, 2245803216021357080830, 1061628500216097532996, 562633120143516480818],
    }, {
        (1, 1): [2088997369209316039761, 1599401991999781534146, 166785806275362002686, 1381914141092792170201, 202887242181734409952, 43345203346821421370], (2, 1): [2448498837260146191169, 1930943101705960330155, 324690461794338566860, 1586398703358852790290, 314566685411901580290, 85609076803800590460], (1, 2): [1954791167820044867703, 1187737378581483825941, 78023697070256657719, 940168567192728711072, 110471472354510801320, 20067940345789641460], (2, 2): [1242570992253298155717, 1214975171933843559897, 161026808675171037905, 1131394401715335691075, 184335391698682084822, 41647940338176800072], (1, 3): [19052141633291376698055, 14299035218308772920792, 6036572326503168762349, 11300185256267258285243, 5007464602732490913830, 1938610393452186411714], (2, 3): [28703269015120502941593, 15504862441204778964832, 9375010633288393116730, 12257858040830847012707, 6007170596006252384113, 3157242047938034540904], (1, 0): [2519348779049369206212, 1808777684387104102824, 558947245923275078144, 1344630429842575095695, 457616962928395214554, 146067334564254696235], (2, 0): [4683148477413875541705, 2134620105504881804989, 1052939343001247492577, 1428519453815494505796, 598159843074139512827, 280737331556123013865],
    }),
]


def still(checker: Any, states: int = 1, parameters: int = 0, grid: Any = None) -> Built:
    b = Built(checker)
    b.motion = checker.motion.Motion(
        tuple("abcdefghijklm"[:states]), tuple(checker.motion.Parameter(f"p{k}", b(f"p{k}"), grid) for k in range(parameters)), ((None,) * states,) * states, (None,) * states, b(1)
    )
    return b


STILL = {"cuts": {}, "pieces": ["0", "1"], "degrees": [1, 0], "bits": 24, "cells": [["16777216 0"]]}


@unit
def witnesses_of_trajectories(checker: Any) -> None:
    """What a witness may be, and the first thing it may not."""
    rejected = checker.numerals.Rejected
    b = still(checker)

    def told(by: dict[str, Any], claimed: Q | None = None, of: Built = b) -> Any:
        return proves(checker, of, [], {**STILL, **by}, claimed)

    assert told({}).error == 0 == told({}, Q(0)).error and told({}, Q(1)).error == 0
    off = {"cells": [["16777217 0"]]}
    assert told(off).error == Q(1, 2**24) == told(off, Q(1, 2**24)).error
    for error in (Q(1, 2**24) - Q("1" + STEP), Q(0), Q(-1)):
        with refuses(rejected, "error: less than what is proved"):
            told(off, error)
    # the largest of all cells and pieces, whichever it is
    for cells, error in (([["16777217 0", "16777217 0"]], 1), ([["16777216 0", "16777214 0"]], 2), ([["16777219 0", "16777217 0"]], 5), ([["16777213 0", "16777216 0"]], 6)):
        assert told({"pieces": ["0", "1/2", "1"], "cells": cells}).error == Q(error, 2**24)
    for bits in (24, 400):
        assert told({"bits": bits, "cells": [[f"{1 << bits} 0"]]}).error == 0
    for bits in (23, 401, 24.0, True, None):
        with refuses(rejected, "bits: 24 to 400"):
            told({"bits": bits})
    assert told({"degrees": [60, 12], "cells": [[" ".join(["16777216"] + ["0"] * 60)]]}).error == 0
    for degrees in ([1], [1, 0, 0], (1, 0), [1.0, 0], [1, None], None):
        with refuses(rejected, "degrees: two whole numbers, in time and in the cell"):
            told({"degrees": degrees})
    for degrees in ([0, 0], [61, 0], [1, -1], [1, 13]):
        with refuses(rejected, "degrees: at most 60 in time, from 1, and 12 in the cell"):
            told({"degrees": degrees})
    for pieces in (["0", "1/2"], ["1/2", "1"], ["0", "2"], ["-1", "1"]):
        with refuses(rejected, "pieces: from 0 to 1"):
            told({"pieces": pieces})
    many = [str(Q(k, 64)) for k in range(65)]
    assert told({"pieces": many, "cells": [STILL["cells"][0] * 64]}).error == 0
    for pieces in (["0"], [], "01", [str(Q(k, 65)) for k in range(66)]):
        with refuses(rejected, "pieces: a list of 2 to 65 numbers"):
            told({"pieces": pieces})
    for pieces in (["0", "1/2", "1/2", "1"], ["0", "3/4", "1/2", "1"]):
        with refuses(rejected, "pieces: numbers that rise"):
            told({"pieces": pieces})
    long = ["0", str(Q(2**4095 - 1, 2**4095)), "1"]
    assert told({"pieces": long, "cells": [STILL["cells"][0] * 2]}).error == 0
    for q in (Q(2**4095 - 1, 2**4096), Q(1, 2**4096)):
        with refuses(rejected, "pieces: a number of more than 4096 binary digits"):
            told({"pieces": ["0", str(q), "1"]})
    with refuses(rejected, "cuts.p0: a number of more than 4096 binary digits"):
        told({"cuts": {"p0": ["0", str(2**4096)]}}, of=still(checker, 1, 1))
    for cells in ([], [["16777216 0"], ["16777216 0"]], {"0": ["16777216 0"]}):
        with refuses(rejected, "cells: a list of 1"):
            told({"cells": cells})
    for cells in ([[]], [["16777216 0"] * 2], ["16777216 0"]):
        with refuses(rejected, "cells[0]: a text for each piece"):
            told({"cells": cells})
    digits = "1" + "0" * 199
    assert told({"cells": [[f"16777216 -{digits}"]]}).error > 1
    for text in ("16777216", "16777216 0 0", "16777216  0", " 16777216 0", "16777216 00", "16777216 -0", "16777216 +1", f"16777216 {digits}0", "16777216 0 ", "16777216\t0", None):
        with refuses(rejected, "cells[0][0]: 2 whole numbers of at most 200 digits with single spaces between them"):
            told({"cells": [[text]]})
    with refuses(rejected, "cells[0][1]: 2 whole numbers"):
        told({"pieces": ["0", "1/2", "1"], "cells": [["16777216 0", "1"]]})
    # sizes: six parameters and twelve states at most
    twelve = " ".join(str((1 << 24) * (i == j)) + " 0" for j in range(12) for i in range(12))
    assert told({"cells": [[twelve]]}, of=still(checker, 12)).error == 0
    six = {f"p{k}": ["0", "1"] for k in range(6)}
    assert told({"cuts": six}, of=still(checker, 1, 6)).error == 0
    for of in (still(checker, 13), still(checker, 1, 7), still(checker, 0)):
        with refuses(rejected, "a stance of at most 12 states and 6 parameters"):
            told({}, of=of)
    # cuts
    one = still(checker, 1, 1)
    for cuts in ({}, {"p1": ["0", "1"]}, {"p0": ["0", "1"], "p1": ["0", "1"]}, None):
        with refuses(rejected, "cuts: a list for each parameter"):
            told({"cuts": cuts}, of=one)
    two = still(checker, 1, 2)
    assert (checker.flows.MOST_CELLS, checker.flows.MOST_NUMBERS) == (100_000, 200_000)
    with limited(checker.flows, MOST_CELLS=6):
        for cuts in (["0"], list(map(str, range(8)))):
            with refuses(rejected, "cuts.p0: a list of 2 to 7 numbers"):
                told({"cuts": {"p0": cuts}}, of=one)
        assert len(checker.flows.divisions(one.motion, {"p0": list(map(str, range(7)))})[0]) == 7
        assert len(checker.flows.divisions(two.motion, {"p0": ["0", "1", "2"], "p1": ["0", "1", "2", "3"]})) == 2
        with refuses(rejected, "cuts: at most 6 cells"):
            checker.flows.divisions(two.motion, {"p0": ["0", "1", "2", "3", "4"], "p1": ["0", "1", "2"]})
    lined = still(checker, 1, 1, (Q(0), Q(1), Q(3)))
    for lines in (["0", "1"], ["1", "3"], ["0", "1", "3"], ["0", "1/2", "1", "2"], ["1", "2", "4"], ["-1", "0", "1"], ["1/2", "3/4"], ["-2", "-1"]):
        if lines[-1] != "4":
            assert [list(map(str, x)) for x in checker.flows.divisions(lined.motion, {"p0": lines})] == [lines]
    for lines in (["0", "3"], ["1/2", "3/2"], ["0", "1", "4"], ["-1", "1"]):
        with refuses(rejected, "cuts.p0: a line of its grid lies inside a cell"):
            checker.flows.divisions(lined.motion, {"p0": lines})
    # several cells: texts in their order, exponents in lexicographic order
    assert told({"cuts": {"p0": ["0", "1", "2"]}, "cells": [["16777216 0"], ["16777216 0"]]}, of=one).error == 0
    with refuses(rejected, "cells[1][0]: 2 whole"):
        told({"cuts": {"p0": ["0", "1", "2"]}, "cells": [["16777216 0"], ["1"]]}, of=one)
    of = checker.flows.exponents_of
    assert of(0, 3) == [()] and of(1, 2) == [(0,), (1,), (2,)] and of(2, 2) == [(0, 0), (0, 1), (0, 2), (1, 0), (1, 1), (2, 0)] and len(of(3, 3)) == 20
    system = checker.rates.System(two.terms, two.motion, [], 24, (1, 1))
    assert checker.flows.read(system, "1 2 3 4 5 6", of(2, 1), 2, "here") == {(1, 1): {(0, 0): [1, 2], (0, 1): [3, 4], (1, 0): [5, 6]}}
    with limited(checker.flows, MOST_NUMBERS=6):
        assert len(checker.flows.read(system, "1 2 3 4 5 6", of(2, 1), 2, "here")[1, 1]) == 3
        with refuses(rejected, "here: more than 6 numbers"):
            checker.flows.read(system, "1 2 3 4 5 6 7", [()], 7, "here")
    pair = checker.rates.System(still(checker, 2).terms, still(checker, 2).motion, [], 24, (1, 1))
    assert checker.flows.read(pair, "1 2 3 4", [()], 1, "here") == {(1, 1): {(): [1]}, (2, 1): {(): [2]}, (1, 2): {(): [3]}, (2, 2): {(): [4]}}
    steep = Built(checker)
    steep.system([[steep(129)]], duration=steep(1))
    with refuses(rejected, "cells[0][0]: rates that large: more pieces are needed"):
        told({}, of=steep)
    # of the products of grids
    cells = [(Q(0), Q(1), Q(3)), (Q(0), Q(1, 2), Q(1), Q(2))]
    assert [checker.flows.middles(k, cells) for k in (0, 2, 4)] == [[(Q(1, 2), Q(1, 2)), (Q(1, 4), Q(1, 4))], [(Q(1, 2), Q(1, 2)), (Q(3, 2), Q(1, 2))], [(Q(2), Q(1)), (Q(3, 4), Q(1, 4))]]


@unit
def a_rate_that_grows(checker: Any) -> None:
    """x' = x/4 over a second by a cubic: the error that is proved, and the one there is."""
    b, rejected, u = Built(checker), checker.numerals.Rejected, 1 << 24
    b.system([[b(Q(1, 4))]], duration=b(1))
    powers = [Q(1, 8**k * math.factorial(k)) for k in range(4)]  # of 1 + s, so of s and by Chebyshev polynomials
    a = [sum((powers[k] * math.comb(k, n) for k in range(n, 4)), Q(0)) for n in range(4)]
    numbers = [int(x * u) for x in (a[0] + a[2] / 2, a[1] + a[3] * 3 / 4, a[2] / 2, a[3] / 4)]
    witness = {**STILL, "degrees": [3, 0], "cells": [[" ".join(map(str, numbers))]]}
    found = proves(checker, b, [], witness)
    proved, unit_ = Q(GROWN, 1 << 72), Q(1, 1 << 72)
    assert found.error == proved, found.error * 2**72
    true = sum((Q(1, 4**k * math.factorial(k)) for k in range(30)), Q(0)) - Q(sum(numbers), u)
    assert abs(true) < proved < 5 * abs(true)
    assert proves(checker, b, [], witness, proved).error == proved
    with refuses(rejected, "error: less than what is proved"):
        proves(checker, b, [], witness, proved - unit_)


GROWN = 3494761522500682375


@unit
def spread_of_polynomials(checker: Any) -> None:
    """Middle and magnitudes of all that differs from it, of derivatives too, exactly; bits that are added."""
    e = checker.expansions
    assert [e.chebyshev(k) for k in range(5)] == [[1], [0, 1], [-1, 0, 2], [0, -3, 0, 4], [1, 0, -8, 0, 8]]
    assert e.powers([1, 2, 3, 5, 7]) == [1 - 3 + 7, 2 - 15, 6 - 56, 20, 56] and e.powers([]) == []
    assert e.alike(((2, 1), (0, 1)), 0, 9) == (2, ((0, 1), (1, 1), (2, 1)), [[1, -1, 0]])
    assert e.alike(((2, 1), (0, 1)), 0, 1) == (2, ((0, 1),), [[1, -1, 0]])
    assert e.alike(((2, 1), (0, 1)), 0, 2) == (2, ((0, 1), (1, 1)), [[1, -1, 0]])
    assert e.alike(((0, 3), (2, 0), (0, 1)), 1, 9) == (3, ((0, 0), (0, 1), (0, 2), (0, 3), (2, 0)), [[-1, 2, -1, 0], [1]])
    assert e.alike((), 0, 9) == (0, (), []) and e.alike(((1, 2, 3),), 1, 1) == (2, ((1, 0, 3),), [[-1, -1, 0]])
    assert [e.places(x, 8) for x in (0, 1, -6, 192, 256, 512)] == [0, 8, 7, 2, 0, 0]
    cubic = ((2, 1), (0, 1)), [5, 7]  # 5 x x + 7 at x = 3/4 + y, both times 16
    assert e.shifted_to(cubic, 0, 192, 8) == ((((0, 1), (1, 1), (2, 1)), [5 * 9 + 7 * 16, 5 * 24, 5 * 16]), 4)
    assert e.shifted_to(cubic, 0, 192, 8, 1) == ((((0, 1),), [5 * 9 + 7 * 16]), 4)
    assert e.shifted_to(cubic, 0, 192, 8, 2) == ((((0, 1), (1, 1)), [5 * 9 + 7 * 16, 5 * 24]), 4)
    assert e.shifted_to(cubic, 0, 0, 8, 1) == ((((0, 1),), [7]), 0)
    assert e.joined([-128, 127, 0, -1], 1) == -128 + (127 << 8) - (1 << 24) and e.joined([3, -1], 2) == 3 - (1 << 16)
    assert e.digits(-128 + (127 << 8) - (1 << 24), 1, 4) == [-128, 127, 0, -1] and e.digits(3 - (1 << 16), 2, 2) == [3, -1]
    whole = 1 << 128
    assert e.weights(0, 128, 3, 8) == [whole, whole >> 1, whole >> 2, whole >> 3]
    assert e.weights(2, 128, 4, 8) == [0, 0, 2 * whole, 6 * whole >> 1, 12 * whole >> 2]
    assert e.weights(0, 1, 20, 8)[15:] == [256, 1, 1, 1, 1, 1] and e.weights(1, 0, 2, 8) == [0, whole, 0]
    for poly, at, (middle, reach, extra) in SPREAD:
        form = e.expanded(tuple(poly), [[c] for c in poly.values()], 0, tuple(x for x, _ in at), 8)
        found = e.spread(form, (0,) * (len(at) + 1), (0, *(r for _, r in at)), 8)
        assert found[0] == middle << 48 and reach - 1 < Q(found[1], 1 << 48) <= reach and form.extra == extra, (poly, at, found)
    # of (5 + 7 t) x + (2 - 3 t - 4 t t) x x about x = -1/2, all times 4, within 1/4 in time and 1/2 of x
    form = e.expanded(((1,), (2,)), [[5, 7, 0], [2, -3, -4]], 3, (-128,), 8)
    assert form.columns == {(0,): [-8, -17, -4], (1,): [12, 40, 16], (2,): [8, -12, -16]} and (form.degree, form.extra) == (2, 3 + 2)
    for orders, wanted in DERIVATIVES.items():
        assert e.spread(form, orders, (64, 128), 8) == tuple(int(x * (1 << 48)) for x in wanted), (orders, e.spread(form, orders, (64, 128), 8))
    nothing = e.expanded(((0,),), [[0, 0]], 0, (3,), 8)
    assert e.spread(nothing, (1, 2), (256, 256), 8) == (0, 0)
    # a width of digits that is just enough: all coefficients are as large as they may be
    large = e.expanded(((0,), (1,), (2,)), [[127] * 2, [127] * 2, [127] * 2], 0, (256,), 8)
    assert large.columns == {(0,): [381] * 2, (1,): [381] * 2, (2,): [127] * 2}
    large = e.expanded(((0,), (1,)), [[1000] * 2, [-1000] * 2], 0, (256,), 8)
    assert large.columns == {(0,): [0] * 2, (1,): [-1000] * 2}
    assert e.spread(e.expanded(((),), [[0] * 17 + [1]], 0, (), 8), (0,), (1,), 8) == (0, 1)  # 2^-136, rounded up


DERIVATIVES: dict[tuple[int, int], tuple[Q, Q]] = {  # middle, and magnitudes of the rest
    (0, 0): (Q(-8), Q(17, 4) + Q(4, 16) + (12 + Q(40, 4) + Q(16, 16)) / 2 + (8 + Q(12, 4) + Q(16, 16)) / 4),
    (1, 0): (Q(-17), Q(8, 4) + (40 + Q(32, 4)) / 2 + (12 + Q(32, 4)) / 4),
    (0, 1): (Q(12), Q(40, 4) + Q(16, 16) + 8 + Q(12, 4) + Q(16, 16)),
    (1, 1): (Q(40), Q(32, 4) + 12 + Q(32, 4)),
    (0, 2): (Q(16), 2 * (Q(12, 4) + Q(16, 16))),
}
SPREAD: list[Any] = [  # with 8 bits
    ({(0,): 5, (1,): 7, (2,): -3}, ((0, 256),), (5, 10, 0)),
    ({(0,): 5, (1,): 7, (2,): -3}, ((0, 128),), (5, 5, 0)),
    ({(0,): 5, (1,): 7, (2,): -3}, ((64, 32),), (105, 12, 4)),
    ({(0,): 5, (1,): 7, (2,): -3}, ((-96, 160),), (125, 445, 6)),
    ({(0,): 5, (1,): 7, (2,): -3}, ((128, 0),), (31, 0, 2)),
    ({(0,): 5, (1,): 7, (2,): -3}, ((-255, 0),), (-324355, 0, 16)),
    ({(0,): 5, (1,): 7, (2,): -3}, ((0, 0),), (5, 0, 0)),
    ({(0,): 5, (1,): 7, (2,): -3}, ((256, 0),), (9, 0, 0)),
    ({(0,): 5, (1,): 7, (2,): -3}, ((3, 1),), (333029, 1777, 16)),
    ({(0, 1): 5, (1, 0): 7, (2, 1): -3}, ((64, 32), (128, 128)), (133, 107, 5)),
    ({(0, 1): 5, (1, 0): 7, (2, 1): -3}, ((64, 32), (128, 0)), (133, 26, 5)),
    ({(0, 1): 5, (1, 0): 7, (2, 1): -3}, ((0, 256), (-3, 5)), (-15, 1841, 8)),
    ({(1,): 7}, ((0, 1),), (0, 1, 0)),
    ({(0,): 9}, ((3, 1),), (9, 0, 0)),
    ({(2,): 1000, (1,): 1}, ((-100, 30),), (623400, 430770, 12)),
]


# terms differentiated and replaced


def number_of(terms: Any, k: int, at: dict[str, float]) -> float:
    """A term in floating point."""
    op, args, payload = terms.all[k]
    x = [number_of(terms, a, at) for a in args]
    if op == "number":
        return float(payload)
    if op == "variable":
        return at[str(payload)]
    if op == "power":
        return float(x[0] ** int(payload))
    known: dict[str, Callable[..., float]] = {
        "add": lambda a, b: a + b, "sub": lambda a, b: a - b, "mul": lambda a, b: a * b, "div": lambda a, b: a / b, "neg": lambda a: -a, "mark": lambda a: a,
    }
    return known[op](*x) if op in known else float(getattr(math, op)(*x))


@unit
def derivatives_of_terms(checker: Any) -> None:
    """Along x' = u and t' = 1, y standing still: numbers, and nothing where nothing moves."""
    b, module = Built(checker), checker.calculus
    _put, terms = b, b.terms
    rates = {b("x"): b("u"), b("t"): b(1)}
    x, u, y, t = at = (0.3, 0.7, 1.9, 0.4)
    values = dict(zip("xuyt", at, strict=True))
    for term, expected in (
        (b("x"), u), (b("t"), 1), (b("add", "x", "t"), u + 1), (b("add", "x", "y"), u), (b("add", "y", "x"), u), (b("sub", "x", "y"), u), (b("sub", "y", "x"), -u), (b("sub", "x", "t"), u - 1),
        (b("neg", "x"), -u), (b("mul", "x", "t"), u * t + x), (b("mul", "x", "y"), u * y), (b("mul", "y", "x"), u * y), (b("mul", "x", "x"), 2 * x * u), (b("mul", "t", "y"), y),
        (b("div", "x", "y"), u / y), (b("div", "y", "x"), -y * u / x**2), (b("div", "x", "t"), u / t - x / t**2), (b("div", "y", "t"), -y / t**2), (b("power", "x", Pay(Q(3))), 3 * x**2 * u),
        (b("power", "t", Pay(Q(2))), 2 * t), (b("mark", ("mul", "x", "x"), Pay("v")), None),
        (b("exp", "x"), math.exp(x) * u), (b("sin", "x"), math.cos(x) * u), (b("cos", "x"), -math.sin(x) * u), (b("sinh", "x"), math.cosh(x) * u), (b("cosh", "x"), math.sinh(x) * u), (b("sqrt", "x"), u / 2 / x**0.5),
        (b("log", "x"), u / x), (b("tan", "x"), u / math.cos(x) ** 2), (b("tanh", "x"), u / math.cosh(x) ** 2), (b("atan", "x"), u / (1 + x * x)), (b("asin", "x"), u / (1 - x * x) ** 0.5), (b("acos", "x"), -u / (1 - x * x) ** 0.5),
        (b("exp", "t"), math.exp(t)), (b("sin", ("mul", "y", "t")), math.cos(y * t) * y),
    ):
        if expected is None:
            with refuses(module.Unprovable, "a time rate through mark"):
                module.derivative(terms, term, rates)
            continue
        found = module.derivative(terms, term, rates)
        assert abs(number_of(terms, found, values) - expected) < 1e-12, (terms.all[term], found)
    # nothing moves: no term at all; factors of 1 are left out
    for still_ in (b("y"), b(3), b("add", "y", 3), b("abs", "y"), b("reading", "y", Pay("r")), b("exp", "y"), b("div", "y", ("mul", "y", "y"))):
        assert module.derivative(terms, still_, rates) is None
    for term, expected in (
        (b("mul", "t", "y"), b("y")), (b("mul", "y", "t"), b("y")), (b("mul", "x", "y"), b("mul", "u", "y")), (b("add", "y", "t"), b(1)), (b("sub", "y", "t"), b(-1)), (b("neg", "t"), b(-1)), (b("exp", "t"), b("exp", "t")), (b("sub", "y", "x"), b("neg", "u")),
        (b("div", "t", "y"), b("div", 1, "y")), (b("div", "y", "t"), b("div", ("neg", ("div", "y", "t")), "t")),
    ):
        assert module.derivative(terms, term, rates) == expected, terms.all[term]
    for op in ("abs", "max"):
        with refuses(module.Unprovable, f"a time rate through {op}"):
            module.derivative(terms, b(op, "x", *(["y"] if op == "max" else [])), rates)
    with refuses(module.Unprovable, "a time rate through reading"):
        module.derivative(terms, b("reading", "x", Pay("r")), rates)


@unit
def terms_at_zero(checker: Any) -> None:
    """What is left of a sum of products where x and y are nothing."""
    b, module = Built(checker), checker.calculus
    nothing = {b("x"), b("y")}
    for term, left in (
        (b("x"), None), (b("a"), b("a")), (b("add", "x", "a"), b("a")), (b("add", "a", "x"), b("a")), (b("sub", "a", "x"), b("a")), (b("sub", "x", "a"), b("neg", "a")), (b("add", "x", "y"), None), (b("sub", "x", "y"), None),
        (b("neg", "x"), None), (b("mul", "a", "x"), None), (b("mul", "x", "a"), None), (b("div", "x", "a"), None), (b("mul", ("add", "x", "a"), "c"), b("mul", "a", "c")), (b("div", ("add", "a", "x"), "c"), b("div", "a", "c")),
        (b("neg", ("add", "a", "x")), b("neg", "a")), (b("add", ("add", "a", "x"), "c"), b("add", "a", "c")), (b("sub", "c", ("sub", "x", "a")), b("sub", "c", ("neg", "a"))), (b("exp", "a"), b("exp", "a")),
        (b("div", "c", ("add", "a", "x")), b("div", "c", "a")),
    ):
        assert module.without(b.terms, term, nothing) == left, b.terms.all[term]
    for term, op in ((b("div", "a", "x"), "div"), (b("exp", "x"), "exp"), (b("exp", ("add", "a", "x")), "exp"), (b("power", ("add", "a", "x"), Pay(Q(2))), "power"), (b("max", ("add", "a", "x"), "c"), "max")):
        with refuses(module.Unprovable, f"a rate through {op} of a continuous state"):
            module.without(b.terms, term, nothing)


@unit
def terms_replaced(checker: Any) -> None:
    """t by D s, and what is never nothing cancelled in quotients."""
    b, module = Built(checker), checker.calculus
    whole, scaled = b("D"), b("mul", "D", "s")
    by = {b("t"): scaled, b("b"): b("c")}
    for term, found, cancelled in (
        (b("t"), scaled, scaled), (b("b"), b("c"), b("c")), (b("a"), b("a"), b("a")), (b("exp", "t"), b("exp", scaled_(b)), b("exp", scaled_(b))), (b("add", "a", "b"), b("add", "a", "c"), b("add", "a", "c")),
        (b("power", "t", Pay(Q(2))), b("power", scaled_(b), Pay(Q(2))), b("power", scaled_(b), Pay(Q(2)))), (b("div", "t", "D"), b("div", scaled_(b), "D"), b("s")), (b("div", "t", "a"), b("div", scaled_(b), "a"), b("div", scaled_(b), "a")),
        (b("div", ("mul", "a", "D"), "D"), b("div", ("mul", "a", "D"), "D"), b("a")), (b("div", ("add", "a", "D"), "D"), b("div", ("add", "a", "D"), "D"), b("div", ("add", "a", "D"), "D")),
        (b("div", ("mul", "a", "b"), "D"), b("div", ("mul", "a", "c"), "D"), b("div", ("mul", "a", "c"), "D")), (b("mul", ("mul", "a", "D"), "D"), b("mul", ("mul", "a", "D"), "D"), b("mul", ("mul", "a", "D"), "D")),
        (b("sin", ("div", "t", "D")), b("sin", ("div", scaled_(b), "D")), b("sin", "s")),
    ):
        assert module.replaced(b.terms, term, by) == found, b.terms.all[term]
        assert module.replaced(b.terms, term, by, whole) == cancelled, b.terms.all[term]
    squared = module.replaced(b.terms, b("power", "b", Pay(Q(3))), {b("b"): b(2)})
    assert squared == b(8)


def scaled_(b: Built) -> Rank:
    return Rank(b("mul", "D", "s"))


# what a claim's text means: terms written out, s for the phase

INFIX = {"add": "+", "sub": "-", "mul": "*", "div": "/"}
HEIGHTS = "u,h\n0,1\n1,2\n3,4\n"
AT = '[library]\nfile = "h.csv"\nat = { u = "%s" }'
PLAIN = 'x = "xd"\nxd = "x"'


def shown(terms: Any, k: int | None) -> str:
    if k is None:
        return "."
    op, args, payload = terms.all[k]
    x = [shown(terms, a) for a in args]
    if op in ("number", "variable"):
        return "s" if payload == "phase(t)" else str(payload)
    if op in INFIX:
        return f"({x[0]}{INFIX[op]}{x[1]})"
    if op in ("power", "flow", "reading", "mark"):
        return f"{op}[{payload}]({','.join(x)})".replace(" ", "")
    return f"{op}({','.join(x)})"


def described(d: Any) -> list[Any]:
    """Parameters; A, b; the duration and what has to be positive; what signals are multiplied by."""
    m, terms = d.motion, d.terms
    return [
        [f"{p.name} = {shown(terms, p.term)}" + ("" if p.grid is None else " on " + ",".join(map(str, p.grid))) for p in m.parameters],
        " ".join(shown(terms, k) for row in m.matrix for k in row), " ".join(shown(terms, k) for k in m.free),
        " | ".join(shown(terms, k) for k in m.positive), {n: " ".join(shown(terms, k) for k in row) for n, row in zip(m.signals, m.forced, strict=True)},
    ]


def moving(uncertain: str = "a = [1, 2]", rates: str = PLAIN, **more: Any) -> str:
    """A stance with few names; the target stands still."""
    return stance(**{"rates": rates, "start": 'x = 0\nxd = "v"', "duration": "1", "uncertain": uncertain, "define": 'unused = "1"', "target": "0", "step": "xd/2", **more})


MOTIONS: dict[str, tuple[str, list[Any]]] = {
    "plain": (moving(), [[], ". 1 1 .", ". .", "1", {}]),
    "a duration that is a variable": (moving(duration="a", rates='x = "xd"\nxd = "t*x + t"'), [["a = a"], ". 1 (a*s) .", ". (a*s)", "a", {}]),
    "a duration of what the rates rest on": (moving(duration="a + c", uncertain="a = [1, 2]\nc = [1, 2]", rates='x = "a*xd"\nxd = "c*x + t/(a + c)"'), [["a = a", "c = c", "dynamics.duration = (a+c)"], ". a c .", ". s", "dynamics.duration", {}]),
    "a duration of what the rates leave out": (moving(duration="a + c", uncertain="a = [1, 2]\nc = [1, 2]", rates='x = "a*xd"\nxd = "3*x"'), [["a = a", "dynamics.duration = (a+c)"], ". a 3 .", ". .", "dynamics.duration", {}]),
    "a duration that stands in a rate": (moving(duration="2*a", rates='x = "xd"\nxd = "sin(2*a)*x"'), [["dynamics.duration = (2*a)"], ". 1 sin(dynamics.duration) .", ". .", "dynamics.duration", {}]),
    "a duration beside what it rests on": (moving(duration="2*a", uncertain="a = [1, 2]\nc = [1, 2]", rates='x = "a*xd"\nxd = "c*x"'), [["a = a", "c = c"], ". a c .", ". .", "(2*a)", {}]),
    "a library": (moving(rates='x = "xd"\nxd = "h*x + t"', duration="1/2", rest=AT % "a"), [["a = a on 0,1,3"], ". 1 reading[h](a) .", ". (1/2*s)", "1/2", {}]),
    "a library at more than a variable": (moving(rates='x = "xd"\nxd = "h*x"', rest=AT % "a - 1/2"), [["library[1].at.u = (a-1/2) on 0,1,3"], ". 1 reading[h](library[1].at.u) .", ". .", "1", {}]),
    "a library at a number": (moving(rates='x = "xd"\nxd = "h*x"', rest=AT % "1/2"), [[], ". 1 reading[h](1/2) .", ". .", "1", {}]),
    "a duration that is read": (moving(duration="h", rates='x = "xd"\nxd = "a*x"', rest=AT % "a"), [["a = a", "dynamics.duration = reading[h](a)"], ". 1 a .", ". .", "dynamics.duration", {}]),
    "a leg that pushes": (moving(define='z = "1 + a*t**2"', rates='x = "xd"\nxd = "(9 + dt(dt(z)))/z*x"'), [["a = a"], ". 1 ((9+(a*2))/(1+(a*power[2]((1*s))))) .", ". .", "1 | (1+(a*power[2]((1*s)))) | (9+(a*2))", {}]),
    "a leg without weight": (moving(define='z = "a + t**2"', rates='x = "xd"\nxd = "3*(dt(dt(z))/z)*x"'), [["a = a"], ". 1 (3*(2/(a+power[2]((1*s))))) .", ". .", "1 | (a+power[2]((1*s))) | (3*(2/(a+power[2]((1*s)))))", {}]),
    "a leg that pushes twice": (moving(define='z = "a + t**2"\ny = "2 + t"', rates='x = "xd"\nxd = "(9 + dt(dt(z)))/z*x + dt(dt(y))/y*x"'), [["a = a"], ". 1 ((11/(a+power[2]((1*s))))+(0/(2+(1*s)))) .", ". .", "1 | (a+power[2]((1*s))) | ((11/(a+power[2]((1*s))))+(0/(2+(1*s)))) | (2+(1*s))", {}]),
    "a height that stands still": (moving(rates='x = "xd"\nxd = "(9 + dt(dt(a)))/a*x"'), [["a = a"], ". 1 (9/a) .", ". .", "1 | a | (9/a)", {}]),
    "a height times a mass": (moving(define='z = "1 + a*t**2"', rates='x = "xd"\nxd = "a*(9 + dt(dt(z)))/(a*z)*x"'), [["a = a"], ". 1 ((a*(9+(a*2)))/(a*(1+(a*power[2]((1*s)))))) .", ". .", "1 | (a*(1+(a*power[2]((1*s))))) | ((a*(9+(a*2)))/(a*(1+(a*power[2]((1*s))))))", {}]),
    "a rate in the rates alone": (moving(define='z = "1 + t**2"', rates='x = "xd"\nxd = "(9 + dt(dt(z)))/z*x"'), [[], ". 1 (11/(1+power[2]((1*s)))) .", ". .", "1 | (1+power[2]((1*s))) | (11/(1+power[2]((1*s))))", {}]),
    "a height that bends nowhere": (moving(define='z = "2 + t"', rates='x = "xd"\nxd = "(9 - a + dt(dt(z)))/z*x"'), [["a = a"], ". 1 (((9-a)+0)/(2+(1*s))) .", ". .", "1 | (2+(1*s)) | (((9-a)+0)/(2+(1*s)))", {}]),
    "a height spelled twice": (moving(define='z = "1 + t**2"\ny = "t**2 + 1"', rates='x = "xd"\nxd = "(9 + dt(dt(y)))/z*x"'), [[], ". 1 (11/(1+power[2]((1*s)))) .", ". .", "1 | (1+power[2]((1*s))) | (11/(1+power[2]((1*s))))", {}]),
    "a square of a height": (moving(define='z = "1 + a*t**2"', rates='x = "xd"\nxd = "(9 + dt(dt(z)))*z/z**2*x"'), [["a = a"], ". 1 (((9+(a*2))*(1+(a*power[2]((1*s)))))/power[2]((1+(a*power[2]((1*s)))))) .", ". .", "1 | power[2]((1+(a*power[2]((1*s))))) | (((9+(a*2))*(1+(a*power[2]((1*s)))))/power[2]((1+(a*power[2]((1*s))))))", {}]),
    "a number of a height": (moving(define='z = "2"', rates='x = "xd"\nxd = "(9 + dt(dt(z)))/(1 + 2*a)*x"'), [["a = a"], ". 1 (9/(1+(2*a))) .", ". .", "1", {}]),
    "another quotient by time": (moving(rates='x = "xd"\nxd = "9/(1 + t**2)*x"'), [[], ". 1 (9/(1+power[2]((1*s)))) .", ". .", "1", {}]),
    "free rates": (moving(rates='x = "xd + 3*t - a"\nxd = "x - 2*xd + a"'), [["a = a"], ". 1 1 -2", "((3*(1*s))-a) a", "1", {}]),
    "a signal": (moving("a = [1, 2]\nd = { range = [0, 1], within = true }", rates='x = "xd"\nxd = "x + d"'), [[], ". 1 1 .", ". .", "1", {"d": ". 1"}]),
    "signals": (moving("a = [1, 2]\nd = { range = [0, 1], within = true }\ne = { range = [0, 1], within = true }", rates='x = "a*xd + 0*d + 2*e"\nxd = "x - 3*e/4 + 5*e/4 + t*d + a"'), [["a = a"], ". a 1 .", ". a", "1 | a | (1*s)", {"d": "0 (1*s)", "e": "2 1/2"}]),
    "a signal that lowers": (moving("a = [1, 2]\nd = { range = [0, 1], within = true }", rates='x = "xd - 0*d"\nxd = "x - 3*d"'), [[], ". 1 1 .", ". .", "1", {"d": "0 -3"}]),
    "a signal that lowers by zero": (moving("a = [1, 2]\nd = { range = [0, 1], within = true }", rates='x = "xd + 0*d"\nxd = "x - 3*d"'), [[], ". 1 1 .", ". .", "1", {"d": "0 -3"}]),
    "a signal that is not met": (moving("a = [1, 2]\nd = { range = [0, 1], within = true }", rates='x = "xd"\nxd = "x - x"'), [[], ". 1 . .", ". .", "1", {}]),
    "a duration of all that is known": (moving(duration="2*a", rates='x = "a*xd"\nxd = "x"'), [["a = a"], ". a 1 .", ". .", "(2*a)", {}]),
    "a signal on a damped state": (moving("d = { range = [0, 1], within = true }", rates='x = "-3*x + xd"\nxd = "x - 2*xd + d"'), [[], "-3 1 1 -2", ". .", "1", {"d": ". 1"}]),
    "negative rates without signals": (moving(rates='x = "-xd"\nxd = "-a*x"'), [["a = a"], ". -1 neg(a) .", ". .", "1", {}]),
}
UNMOVED: dict[str, tuple[str, str]] = {
    "a condition": (moving().replace('duration = "1"', 'until = "x - 1"\nwithin = [0.1, 1]'), "touchdown by a condition"),
    "a square": (moving(rates='x = "xd"\nxd = "x**2"'), "the rate of xd is not linear in the continuous states"),
    "a product": (moving(rates='x = "x*xd"\nxd = "x"'), "the rate of x is not linear in the continuous states"),
    "a rate of its own": (moving(rates='x = "dt(x)"\nxd = "x"'), "the rate of x rests on itself"),
    "a rate of another": (moving(rates='x = "dt(xd)"\nxd = "dt(x)"'), "rests on itself"),
    "a corner": (moving(rates='x = "xd"\nxd = "dt(abs(x))"'), "a time rate through abs"),
    "a signal that scales": (moving("d = { range = [0, 1], within = true }", rates='x = "xd"\nxd = "d*x"'), "a signal within the stance enters the rates other than by a sum"),
    "a signal by itself": (moving("d = { range = [0, 1], within = true }\ne = { range = [0, 1], within = true }", rates='x = "xd"\nxd = "x + d*e"'), "a signal within the stance enters the rates other than by a sum"),
    "a signal that drives apart": (moving("d = { range = [0, 1], within = true }", rates='x = "xd - d"\nxd = "x + d"'), "the states are not shown to answer a signal within the stance in one direction"),
    "a signal that lowers by a name": (moving("a = [1, 2]\nd = { range = [0, 1], within = true }", rates='x = "xd - d"\nxd = "x + a*d"'), "the states are not shown to answer a signal within the stance in one direction"),
    "a signal against a coupling": (moving("d = { range = [0, 1], within = true }", rates='x = "-xd"\nxd = "x + d"'), "the states are not shown to answer a signal within the stance in one direction"),
    "a signal against another coupling": (moving("d = { range = [0, 1], within = true }", rates='x = "xd"\nxd = "-2*x - xd + d"'), "the states are not shown to answer a signal within the stance in one direction"),
}


@unit
def claims_as_motions(checker: Any) -> None:
    for name, (text, expected) in MOTIONS.items():
        assert described(derivation(checker, text, {"h.csv": HEIGHTS})) == expected, name
    for name, (text, reason) in UNMOVED.items():
        with refuses(checker.calculus.Unprovable, reason):
            derivation(checker, text, {"h.csv": HEIGHTS})
            raise AssertionError(name)
    with refuses(checker.calculus.Unprovable, "no dynamics"):
        d = derivation(checker, 'format = 1\n[state]\nv = [0, 1]\n[next]\nv = "v/2"\n[target]\nv = 0\n')
        assert d.motion is None
        checker.motion.motion(d.names())

SIGNALS = "a = [1, 2]\nd = { range = [0, 1], within = true }\ne = { range = [-1, 4], within = true }"
DRIVEN = moving(SIGNALS, rates='x = "a*xd + 2*e"\nxd = "x + 3*e + a*d + 1"', duration="a", step="x - xd/2 + t", requires=("value(xd)", "value(x + xd)", "throughout(x + t >= 0)", "value(v)"))
OVER = moving("a = [1, 2]\nc = [0, 1]\nd = { range = [0, 1], within = true }", define='twice = "2*c"', rates='x = "a*xd"\nxd = "twice*x + d"', duration="a + 1", requires=("value(x)",), rest='[constants]\nk = 3\n[[require]]\nthat = "value(next(v))"\nover = { %s }')
GAIN = moving(rates='x = "xd"\nxd = "%s"', rest='[gains]\nk = 3\n[[require]]\nthat = "value(next(v))"\nover = { %s }')
MEANINGS: list[tuple[str, str, list[Any]]] = [
    (moving(), "image[v]",
     ["(((flow[21](1)*0)+(flow[22](1)*v))/2)", "", False, "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (moving(step="x", rates='x = "xd + 3"\nxd = "x"', start='x = "v/4"\nxd = "v"'), "image[v]",
     ["(((flow[11](1)*(v/4))+(flow[12](1)*v))+(flow[10](1)*1))", "", False, "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (moving(), "slope[v,v]",
     ["(((flow[21](1)*0)+(flow[22](1)*mark[v](v)))/2)", "v", True, "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (moving(duration="a + c", uncertain="a = [1, 2]\nc = [1, 2]", rates='x = "a*xd"\nxd = "3*x"', step="t*xd"), "image[v]",
     ["((a+c)*((flow[21](1,a,(a+c))*0)+(flow[22](1,a,(a+c))*v)))", "", False, "a in [1,2] inside [1,2]", "c in [1,2] inside [1,2]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (moving(rates='x = "xd"\nxd = "h*x"', rest=AT % "a - 1/2"), "image[v]",
     ["(((flow[21](1,(a-1/2))*0)+(flow[22](1,(a-1/2))*v))/2)", "", False, "a in [1,2] inside [1,2]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (moving(rates='x = "xd"\nxd = "h*x"', rest=AT % "a"), "image[v]",
     ["(((flow[21](1,a)*0)+(flow[22](1,a)*v))/2)", "", False, "a in [1,2] inside [1,2]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (moving(step="v/2"), "image[v]",
     ["(v/2)", "", False, "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (DRIVEN, "image[v]",
     ["(((((((flow[11](1,a)*0)+(flow[12](1,a)*v))+(flow[10](1,a)*1))+(flow[13](1,a)*d(x)))+(flow[14](1,a)*e(x)))-((((((flow[21](1,a)*0)+(flow[22](1,a)*v))+(flow[20](1,a)*1))+(flow[23](1,a)*d(xd)))+(flow[24](1,a)*e(xd)))/2))+a)", "", False, "a in [1,2] inside [1,2]", "d(x) in [0,1] inside [1/2,1/2]", "d(xd) in [0,1] inside [1/2,1/2]", "e(x) in [-1,4] inside [3/2,3/2]", "e(xd) in [-1,4] inside [3/2,3/2]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (DRIVEN, "require[1]",
     ["(((((flow[21](1,a)*0)+(flow[22](1,a)*v))+(flow[20](1,a)*1))+(flow[23](1,a)*d(xd)))+(flow[24](1,a)*e(xd)))", "", True, "a in [1,2] inside [1,2]", "d(xd) in [0,1] inside [0,1]", "e(xd) in [-1,4] inside [-1,4]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (DRIVEN, "require[2]",
     ["((((((flow[11](1,a)*0)+(flow[12](1,a)*v))+(flow[10](1,a)*1))+(flow[13](1,a)*d(x)))+(flow[14](1,a)*e(x)))+(((((flow[21](1,a)*0)+(flow[22](1,a)*v))+(flow[20](1,a)*1))+(flow[23](1,a)*d(xd)))+(flow[24](1,a)*e(xd))))", "", True, "a in [1,2] inside [1,2]", "d(x) in [0,1] inside [1/2,1/2]", "d(xd) in [0,1] inside [1/2,1/2]", "e(x) in [-1,4] inside [3/2,3/2]", "e(xd) in [-1,4] inside [3/2,3/2]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (DRIVEN, "require[3]",
     ["(((((((flow[11](((2*s)-1),a)*0)+(flow[12](((2*s)-1),a)*v))+(flow[10](((2*s)-1),a)*1))+(flow[13](((2*s)-1),a)*d(x, t)))+(flow[14](((2*s)-1),a)*e(x, t)))+(a*s))-0)", "", True, "a in [1,2] inside [1,2]", "d(x, t) in [0,1] inside [0,1]", "e(x, t) in [-1,4] inside [-1,4]", "phase(t) in [0,1] inside [0,1]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (DRIVEN, "require[4]",
     ["v", "", True, "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (DRIVEN, "support[1]",
     ["a", "", True, "a in [1,2] inside [1,2]"]),
    (DRIVEN, "support[2]",
     ["a", "", True, "a in [1,2] inside [1,2]"]),
    (moving(define='z = "1 + a*t**2"', rates='x = "xd"\nxd = "(9 + dt(dt(z)))/z*x"', duration="a/2", requires=("throughout(z*x/t <= 1)",)), "support[2]",
     ["(1+(a*power[2](((a/2)*s))))", "", True, "a in [1,2] inside [1,2]", "phase(t) in [0,1] inside [0,1]"]),
    (moving(define='z = "1 + a*t**2"', rates='x = "xd"\nxd = "(9 + dt(dt(z)))/z*x"', duration="a/2", requires=("throughout(x*t/(a/2) + (a/2)*x/(a/2) <= 1)",)), "require[1]",
     ["((((((flow[11](((2*s)-1),a)*0)+(flow[12](((2*s)-1),a)*v))*((a/2)*s))/(a/2))+((flow[11](((2*s)-1),a)*0)+(flow[12](((2*s)-1),a)*v)))-1)", "", True, "a in [1,2] inside [1,2]", "phase(t) in [0,1] inside [0,1]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (moving(step="xd"), "growth[v,v]",
     ["((flow[22](1)*flow[11](((2*s)-1)))-(flow[21](1)*flow[12](((2*s)-1))))", "", True, "phase(t) in [0,1] inside [0,1]"]),
    (moving(step="x"), "growth[v,v]",
     ["((flow[11](1)*flow[22](((2*s)-1)))-(flow[12](1)*flow[21](((2*s)-1))))", "", True, "phase(t) in [0,1] inside [0,1]"]),
    (moving(rates='x = "-2*x"', start='x = "v"', step="x"), "growth[v,v]",
     ["(flow[11](1)/flow[11](((2*s)-1)))", "", True, "phase(t) in [0,1] inside [0,1]"]),
    (OVER % "c = [0, 1]", "require[1]",
     ["((((flow[21](1,a,c)*0)+(flow[22](1,a,c)*v))+(flow[23](1,a,c)*d(xd)))/2)", "", True, "a in [1,2] inside [1,2]", "c in [0,1] inside [0,1]", "d(xd) in [0,1] inside [0,1]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (OVER % "a = [1, 2]", "require[1]",
     ["((((flow[21](1,a,c)*0)+(flow[22](1,a,c)*v))+(flow[23](1,a,c)*d(xd)))/2)", "", True, "a in [1,2] inside [1,2]", "c in [0,1] inside [0,1]", "d(xd) in [0,1] inside [0,1]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (GAIN % ("k*a*x", "a = [1, 3]"), "require[1]",
     ["(((flow[21](1,a)*0)+(flow[22](1,a)*v))/2)", "", True, "a in [1,3] inside [1,3]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
    (GAIN % ("a*x", "k = [2, 4]"), "require[1]",
     ["(((flow[21](1,a)*0)+(flow[22](1,a)*v))/2)", "", True, "a in [1,2] inside [1,2]", "v in [-1/5,6/5] inside [-1/5,6/5]"]),
]
UNMEANT: list[tuple[str, str, str]] = [
    (moving(step="xd/2"), "growth[v,v]", "a push within the stance is about a state that is a continuous one at touchdown"), (moving(step="v"), "growth[v,v]", "a push within the stance is about a state that is a continuous one at touchdown"),
    (moving(rates='x = "xd - x"\nxd = "x"', step="xd"), "growth[v,v]", "a push within the stance is followed for two continuous states without damping"),
    (moving(rates='x = "xd"\nxd = "x - xd"', step="xd"), "growth[v,v]", "a push within the stance is followed for two continuous states without damping"),
    (moving(rates='x = "xd"\nxd = "y"\ny = "x"', start='x = 0\nxd = "v"\ny = 1', step="xd"), "growth[v,v]", "a push within the stance is followed for two continuous states without damping"),
    (moving(), "support[2]", "support[2] is no obligation of this claim"), (moving(), "support[0]", "support[0] is no obligation"), (DRIVEN, "support[3]", "support[3] is no obligation of this claim"),
    (DRIVEN.replace("x - xd/2 + t", "xd + d"), "image[v]", "a signal within the stance stands outside the rates"), (OVER % "d = [0, 1]", "require[1]", "d: a signal within the stance keeps its range"),
    *((OVER % over, "require[1]", "the stance is not shown to last beyond the range of the claim") for over in ("c = [0, 2]", "a = [1, 3]", "c = [-1, 1]")),
    (GAIN % ("k*a*x", "k = [2, 4]"), "require[1]", "the rates of the stance rest on what is varied here"), (GAIN % ("(k - 3)*x", "k = [2, 4]"), "require[1]", "the rates of the stance rest on what is varied here"),
    (GAIN % ("x + k", "k = [2, 4]"), "require[1]", "the rates of the stance rest on what is varied here"), (GAIN % ("x + k - 3", "k = [2, 4]"), "require[1]", "the rates of the stance rest on what is varied here"),
    *((GAIN.replace(old, new) % ("x", "k = [2, 4]"), "require[1]", "a name that also sets an exponent or the end of a range is not followed there")
      for old, new in (('"1"\n[dynamics.s', '"a**k"\n[dynamics.s'), ('"%s"', '"%s*a**k"'), ("x = 0", 'x = "v**k"'))),
    (GAIN.replace('"1"\n[dynamics.s', '"k/3"\n[dynamics.s') % ("x", "k = [2, 4]"), "require[1]", "the rates of the stance rest on what is varied here"),
    ('format = 1\n[state]\nv = [0, 1]\n[next]\nv = "v/2"\n[target]\nv = 0\n', "support[1]", "support[1] is no obligation"), ('format = 1\n[state]\nv = [0, 1]\n[next]\nv = "v/2"\n[target]\nv = 0\n', "growth[v,v]", "growth[v,v] is no obligation"),
]


def meant(checker: Any, text: str, name: str) -> list[Any]:
    """The term, the derivative's name, whether on the set; each variable with its cells and ends for points."""
    d = derivation(checker, text, {"h.csv": HEIGHTS})
    m = d.meaning(name, None if name.startswith("image") else checker.derive.Domain(False, Q(0), (Q(0), Q(0))))
    variables = [f"{v.name} in " + " ".join(f"[{a},{b}]" for a, b in v.cells) + f" inside [{v.inside[0]},{v.inside[1]}]" for v in m.variables]
    return [shown(d.terms, m.root), m.by, m.on_set, *variables]


@unit
def obligations_of_stances(checker: Any) -> None:
    for text, name, expected in MEANINGS:
        found = meant(checker, text, name)
        assert found == expected, (text, name, found)
    for text, name, reason in UNMEANT:
        with refuses(checker.calculus.Unprovable, reason):
            meant(checker, text, name)


# signals of any course: a phase and a value a part, brought back to the start; v in [-1/5, 6/5] throughout

GUST = "d = { range = [-1, 3], within = true }"
BOTH = "d = { range = [-1, 1], within = true }\ne = { range = [0, 1], within = true }"
IN = "v in [-1/5,6/5] inside [-1/5,6/5]"
COURSES: list[tuple[str, str, list[Any]]] = [
    (moving(GUST, rates='y = "v*y + (t + v)*d"', start='y = "v"', step="y/2"), "signal-slope[1]",
     ["(((flow[11](1,mark[v](v))*(mark[v](v)+((1*d(1))*(((1*phase(d, 1))+mark[v](v))/flow[11](((2*phase(d,1))-1),mark[v](v))))))+(flow[12](1,mark[v](v))*1))/2)", "v", True, "d(1) in [-2,2] inside [-2,2]", "phase(d, 1) in [0,1] inside [0,1]", IN]),
    (moving(GUST, rates='y = "v*y + 2*d"', start='y = "v"', step="t*y", duration="2"), "signal-slope[2]",
     ["(2*((flow[11](1,mark[v](v))*((mark[v](v)+((1*d(1))*(2/flow[11](((2*phase(d,1))-1),mark[v](v)))))+((1*d(2))*(2/flow[11](((2*phase(d,2))-1),mark[v](v))))))+(flow[12](1,mark[v](v))*1)))", "v", True, "d(1) in [-2,2] inside [-2,2]", "d(2) in [-2,2] inside [-2,2]", "phase(d, 1) in [0,1/2] inside [0,1/2]", "phase(d, 2) in [1/2,1] inside [1/2,1]", IN]),
    (moving(BOTH, rates='x = "xd + e"\nxd = "v*x + 3*d + 1"', step="xd"), "signal-slope[1]",
     ["((((flow[21](1,mark[v](v))*((0+((1*d(1))*neg((flow[12](((2*phase(d,1))-1),mark[v](v))*3))))+((1*e(1))*(flow[22](((2*phase(e,1))-1),mark[v](v))*1))))+(flow[22](1,mark[v](v))*((mark[v](v)+((1*d(1))*(flow[11](((2*phase(d,1))-1),mark[v](v))*3)))+((1*e(1))*neg((flow[21](((2*phase(e,1))-1),mark[v](v))*1))))))+(flow[20](1,mark[v](v))*1))+(flow[24](1,mark[v](v))*1/2))", "v", True, "d(1) in [-1,1] inside [-1,1]", "e(1) in [-1/2,1/2] inside [-1/2,1/2]", "phase(d, 1) in [0,1] inside [0,1]", "phase(e, 1) in [0,1] inside [0,1]", IN]),
    (moving(GUST, rates='x = "xd + d"\nxd = "v*x + 2*d"', step="x"), "signal-slope[1]",
     ["(((flow[11](1,mark[v](v))*(0+((1*d(1))*((flow[22](((2*phase(d,1))-1),mark[v](v))*1)-(flow[12](((2*phase(d,1))-1),mark[v](v))*2)))))+(flow[12](1,mark[v](v))*(mark[v](v)+((1*d(1))*((flow[11](((2*phase(d,1))-1),mark[v](v))*2)-(flow[21](((2*phase(d,1))-1),mark[v](v))*1))))))+(flow[13](1,mark[v](v))*1))", "v", True, "d(1) in [-2,2] inside [-2,2]", "phase(d, 1) in [0,1] inside [0,1]", IN]),
    (moving(GUST, rates='x = "xd"\nxd = "v*x + d"', step="v/2"), "signal-slope[99]", ["(mark[v](v)/2)", "v", True, IN]),
    (moving(GUST, rates='y = "v*y + d"', start='y = "v - s"', define='s = "v/3"', step="y*(2 + s)", top='correction = ["s"]'), "split-signal-slope[1]",
     ["(mark[v](v)+((0+(((flow[11](1,mark[v](v))*((mark[v](v)-(mark[v](v)/3))+((1*d(1))*(1/flow[11](((2*phase(d,1))-1),mark[v](v))))))+(flow[12](1,mark[v](v))*1))*(2+(mark[v](v)/3))))-(((flow[11](1,mark[v](v))*((mark[v](v)-0)+((1*d(1))*(1/flow[11](((2*phase(d,1))-1),mark[v](v))))))+(flow[12](1,mark[v](v))*1))*2)))", "v", True, "d(1) in [-2,2] inside [-2,2]", "phase(d, 1) in [0,1] inside [0,1]", IN]),
]
NO_COURSE: list[tuple[str, str, str]] = [
    (moving(GUST, rates='x = "v*xd"\nxd = "x + d - xd"'), "signal-slope[1]", "for two continuous states without damping"),
    (moving(GUST, rates='x = "v*xd + x"\nxd = "x + d"'), "signal-slope[1]", "for two continuous states without damping"),
    (moving(GUST, rates='x = "v*xd"\nxd = "x + d"\ny = "x"', start='x = 0\nxd = "v"\ny = 0'), "signal-slope[1]", "for two continuous states without damping"),
    (moving(GUST, rates='x = "v*xd"\nxd = "x + d"', duration="2 + v"), "signal-slope[1]", "the duration follows the state, so a signal ends at another instant"),
    (moving(GUST, rates='x = "v*xd"\nxd = "x + d"', step="x*xd"), "signal-slope[1]", "the next state is not linear in the continuous states"),
    (moving(GUST, rates='x = "v*xd"\nxd = "x + d"', step="xd**2"), "signal-slope[1]", "the next state is not linear in the continuous states"),
    (moving(GUST, rates='x = "v*xd"\nxd = "x + d"', step="max(xd, 0)"), "signal-slope[1]", "a time rate through max"),
    *((moving(GUST), name, f"{name} is no obligation of this claim") for name in ("signal-slope[0]", "signal-slope[100]", "signal-slope[01]", "signal-slope", "split-signal-slope[1]", "slope-signal[1]")),
    (moving(), "signal-slope[1]", "signal-slope[1] is no obligation of this claim"),
    ('format = 1\n[state]\nv = [0, 1]\n[next]\nv = "v/2"\n[target]\nv = 0\n', "signal-slope[1]", "signal-slope[1] is no obligation"),
]


@unit
def signals_of_any_course(checker: Any) -> None:
    for text, name, expected in COURSES:
        found = meant(checker, text, name)
        assert found == expected, (text, name, found)
    for text, name, reason in NO_COURSE:
        with refuses(checker.calculus.Unprovable, reason):
            meant(checker, text, name)
    two = moving(GUST, rates='x = "v*xd"\nxd = "x + d"', step="xd*(1 + s)", define='s = "v/3"', top='correction = ["s"]')
    for text, routes in ((two, [True, True]), (two.replace("xd*(1 + s)", "xd + s"), [True, False]), (two.replace("v*xd", "xd"), [False, False]),
                         (two.replace("v*xd", "xd").replace("xd*(1 + s)", "xd"), [False, False])):  # fmt: skip
        d = derivation(checker, text)
        assert [d.loose(route) for route in ("slope", "split")] == routes, text
    assert derivation(checker, two).loose()


TOGETHER = "a = [1, 2]\nd = { range = [0, 1], within = true }"


@unit
def sensitivities_of_stances(checker: Any) -> None:
    """By what a stance rests on; but for a signal's effect, which follows it."""
    for text, expected in (
        (moving(rates='x = "xd"\nxd = "a*x"', requires=("sensitivity(v, a) < 1",)), "(((flow[21](1,mark[a](a))*0)+(flow[22](1,mark[a](a))*v))/2)"),
        (moving(define='dur = "a + 1"', duration="dur", requires=("sensitivity(v, dur) < 1",)), "(((flow[21](1,mark[dur]((a+1)))*0)+(flow[22](1,mark[dur]((a+1)))*v))/2)"),
        (moving(TOGETHER, rates='x = "xd"\nxd = "x + d"', step="xd*a", requires=("sensitivity(v, a) < 1",)), "((((flow[21](1)*0)+(flow[22](1)*v))+(flow[23](1)*d(xd)))*mark[a](a))"),
    ):
        assert meant(checker, text, "require[1]")[0] == expected, text
    for text, by in (
        (moving(TOGETHER, rates='x = "xd"\nxd = "a*x + d"', requires=("sensitivity(v, a) < 1",)), "a"),
        (moving(TOGETHER, rates='x = "xd"\nxd = "x + d"', define='dur = "a + 1"', duration="dur", requires=("sensitivity(v, dur) < 1",)), "dur"),
    ):
        with refuses(checker.calculus.Unprovable, f"{by}: a signal's effect within the stance follows it, and may take any course"):
            meant(checker, text, "require[1]")


@unit
def rates_of_what_is_not_defined(checker: Any) -> None:
    """What may not be defined has no rate there either: it stays, times 0, unless the rate holds it anyway."""
    two = '[[library]]\nfile = "h.csv"\nat = { u = "a" }\n[[library]]\nfile = "g.csv"\nat = { w = "a" }\n'
    for text, expected in (
        ("t + 1/a", "(1+(0*(1/a)))"), ("t/a", "(1/a)"), ("t + sqrt(a)*t", "(1+sqrt(a))"), ("h + t", "(1+(0*reading[h](a)))"), ("h + g + t", "((1+(0*reading[h](a)))+(0*reading[g](a)))"),
        ("h*t + g", "(reading[h](a)+(0*reading[g](a)))"), ("log(a) + t/a + t", "(((1/a)+1)+(0*log(a)))"),
    ):
        d = derivation(checker, moving(rest=two, requires=(f"value(dt({text}))",)), {"h.csv": HEIGHTS, "g.csv": "w,g\n1,1\n2,3\n"})
        assert shown(d.terms, d.meaning("require[1]", checker.derive.Domain(False, Q(0), (Q(0), Q(0)))).root) == expected, text


@unit
def ranges_on_which_a_stance_rests(checker: Any) -> None:
    """Of a state the ball's own part is all that is shown to last; of an uncertain value its range."""
    for over, ball, good in (("v = [0, 1]", False, True), ("v = [0, 1]", True, False), ("a = [1, 2]", True, True), ("a = [1, 2]", False, True), ("a = [1, 3]", True, False), ("c = [0, 9]", True, True)):
        text = moving("a = [1, 2]\nc = [0, 1]", duration="a + v**2", step="xd/2 + c", rest=f'[[require]]\nthat = "value(next(v))"\nover = {{ {over} }}', requires=())
        d, domain = derivation(checker, text), checker.derive.Domain(ball, Q(1, 8), (Q(0), Q(0)))
        if good:
            assert d.meaning("require[1]", domain).on_set == ("v" not in over)
        else:
            with refuses(checker.calculus.Unprovable, f"{over[0]}: the stance is not shown to last beyond the range of the claim"):
                d.meaning("require[1]", domain)


# certificates: y stands still for a second, y(0) = v/2 + w and v⁺ = y, so all is as it would be without a stance

STOOD = {"rates": 'y = "0*y"', "start": 'y = "v/2 + w"', "duration": "1", "uncertain": 'w = ["-1/4", "1/4"]', "define": 'unused = "1"', "state": "[-1, 1]", "target": "0", "step": "y"}
ASKED = [
    ("settles", "proved"), ("bound <= 0.5", "proved"), ("push(v) >= 0.49", "proved"), ("push(v, during) >= 0.5", "undecided"), ("push(v, during) >= 0.499999999", "proved"), ("push(v, during) >= 0.9", "undecided"),
    ("throughout(y <= 0.75)", "proved"), ("throughout(y + t <= 1.75)", "proved"), ("throughout(y <= 0.74)", "refuted"), ("always(y <= 0.75)", "proved"), ("always(y < 0.75)", "refuted"), ("value(y) <= 0.75", "proved"),
]


def stood(asked: Sequence[str], growth: tuple[str, str] = ("1", "1"), support: tuple[str, str] = ("1", "1"), flow: dict[str, Any] = STILL, error: str = "0", **claim: str) -> Draft:
    """Lines: 1 flow, 2 target, 3 ball, 4 image, 5 invariant, 6 support, 7 slope, 8 miss, 9 pair, 10 bound, 11 growth, then what is asked for."""
    d = Draft(stance(**{**STOOD, **claim}, requires=tuple(asked)))
    d.line("trajectory", "flow", [], flow, error=error)
    d.range("target[v]", "0", "0")
    d.theorem("smaller-ball", "ball", [2], radius="1")
    d.range("image[v]", "-3/4", "3/4", [1], bits=24)
    d.theorem("invariant-region", "invariant", [2, 4])
    d.range("support[1]", *support, [5])
    d.range("slope[v,v]", "1/2", "1/2", [5, 1], bits=24)
    d.range("target-miss[v]", "-1/4", "1/4", [1], bits=24)
    d.theorem("slope", "slope", [7, 8], gain="1/2", residual="1/4")
    d.theorem("ultimate-bound", "bound[slope]", [5, 9], bound="1/2")
    d.range("growth[v,v]", *growth, [5, 1], bits=24)
    for n, that in enumerate(asked, 1):
        if that.startswith(("throughout", "always", "value")):
            ends = ("-3/4", "7/4") if "t" in that[10:] else ("-3/4", "3/4")
            most = Q(ends[1]) - (0 if that.startswith("value") else Q(that[that.index("<") :].strip("<= )")))
            least = Q(ends[0]) - (0 if that.startswith("value") else Q(that[that.index("<") :].strip("<= )")))
            low, high = (str(x) for x in rounded(least, most))
            d.range(f"require[{n}]", low, high, [5, 1], bits=24)
            at = {"v": "1", "w": "1/4"} | ({"phase(t)": "1"} if that.startswith("throughout") else {})
            low, high = (str(x) for x in rounded(most, most))
            d.point(f"require[{n}]", at, low, high, [5, 1], bits=24)
    return d


def rounded(low: Q, high: Q) -> tuple[Q, Q]:
    """As 24 bits hold the constant that is taken away."""
    unit_ = 1 << 24
    return Q(low.numerator * unit_ // low.denominator, unit_), Q(-(-high.numerator * unit_ // high.denominator), unit_)


def stances_at_equality() -> None:
    asked = [that for that, _ in ASKED]
    d = stood(asked)
    entries = d.entries("region", ASKED)
    accept("a stance that stands still", entries)
    for n, (that, verdict) in enumerate(ASKED):
        for other in sorted({"proved", "refuted"} - {verdict}):
            reject(f"stance: {that} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {verdict} was derived")
    for number, key, value, reason in ((4, "upper", "3/4", "image"), (6, "lower", "1", "support[1]"), (6, "upper", "1", "support[1]"), (7, "lower", "1/2", "slope[v,v]"), (11, "upper", "1", "growth[v,v]"), (11, "lower", "1", "growth[v,v]")):
        beyond = str(Q(value) + (Q("1" + STEP) if key == "lower" else -Q("1" + STEP)))
        reject(f"stance: line {number} {key}", but(entries, f"proof {number - 1} concludes {key}", beyond), f"proof line {number}", reason)
    # the flow: by its name, resting on nothing, where there are dynamics; used last, and where it is needed
    reject("a flow of another name", but(entries, "proof 0 proves", "flows"), "proof line 1", "a flow rests on no other line, and on dynamics")
    moved = but(entries, "proof", [entries["proof"][1], {**entries["proof"][0], "uses": [1]}])
    reject("a flow that rests on a line", moved, "proof line 2", "a flow rests on no other line, and on dynamics")
    still_ = but(entries, "claim text", "format = 1\n[state]\nv = [-1, 1]\n[next]\nv = \"v/2\"\n[target]\nv = 0\n")
    reject("a flow without dynamics", still_, "proof line 1", "a flow rests on no other line, and on dynamics")
    reject("a flow that is not used", but(entries, "proof 3 uses", []), "proof line 4", "no trajectory is proved")
    reject("a flow that stands first", but(entries, "proof 6 uses", [1, 5]), "proof line 7", "uses: the one line that gives the set")
    reject("a flow in exact numbers", but(entries, "proof 3 witness bits", 0), "proof line 4", "exact arithmetic has no trajectories")
    reject("an error below nothing", but(entries, "proof 0 concludes error", "-1" + STEP), "proof line 1", "error: less than what is proved")
    # what has to be positive: shown, above nothing, over the set
    nothing = [("settles", "undecided"), ("push(v, during) >= 0.1", "undecided"), ("throughout(y <= 0.75)", "undecided"), ("always(y <= 0.75)", "undecided")]
    for name, support in (("at nothing", ("0", "1")), ("below nothing", ("-1" + STEP, "1"))):
        d = stood([that for that, _ in nothing], support=support)
        del d.proof[6:10]  # what would serve no result
        d.proof = [x for x in d.proof if x["rule"] != "point"]  # of no stance, as far as is known
        entries = but(d.entries(None, nothing), "results routes", {})
        accept(f"support {name}", entries)
        for n, (that, _) in enumerate(nothing):
            reject(f"support {name}: {that}", but(entries, f"results requirements {n} verdict", "proved"), "results", f"[{n + 1}].verdict: proved is claimed, undecided was derived")
    d = stood([that for that, _ in ASKED], support=("1" + STEP, "1"))
    accept("support above nothing", d.entries("region", ASKED))
    d = stood([that for that, _ in nothing])
    d.proof[5]["uses"] = [3]
    del d.proof[6:10]
    d.proof = [x for x in d.proof if x["rule"] != "point"]
    entries = but(d.entries(None, nothing), "results routes", {})
    accept("support of another set", entries)
    reject("support of another set: settles", but(entries, "results requirements 0 verdict", "proved"), "results", "[1].verdict: proved is claimed")
    # growth: the larger magnitude, over the set, and a push that is left
    for name, growth, verdict in (("to twice", ("1", "2"), "undecided"), ("to minus twice", ("-2", "1"), "undecided"), ("to less than twice", ("-1", str(2 - Q("1" + STEP))), "proved"), ("to more than minus twice", (str(-2 + Q("1" + STEP)), "1"), "proved")):
        that = "push(v, during) >= 0.25"
        entries = stood([that], growth).entries("region", [(that, verdict)])
        accept(f"growth {name}", entries)
        if verdict == "undecided":
            reject(f"growth {name}, proved", but(entries, "results requirements 0 verdict", "proved"), "results", "[1].verdict: proved is claimed, undecided was derived")
        room = {"lower": "1/4" if verdict == "undecided" else str(Q(1, 2) / (2 - Q("1" + STEP))), "upper": None}
        entries = but(entries, "results requirements 0 value", room)
        accept(f"growth {name}, its room", entries)
        reject(f"growth {name}, more room", but(entries, "results requirements 0 value lower", str(Q(room["lower"] or 0) + Q("1" + STEP))), "results", "[1].value.lower: more is claimed than was derived")
    d = stood(["push(v, during) >= 0.1"])
    d.proof[10]["uses"] = [3, 1]
    other = d.entries("region", [("push(v, during) >= 0.1", "undecided")])
    accept("growth over another set", other)
    reject("growth over another set, proved", but(other, "results requirements 0 verdict", "proved"), "results", "[1].verdict: proved is claimed")
    d = stood(["push(v, during) >= 0.1"])
    del d.proof[10]
    less = d.entries("region", [("push(v, during) >= 0.1", "undecided")])
    accept("no growth", less)
    reject("no growth, proved", but(less, "results requirements 0 verdict", "proved"), "results", "[1].verdict: proved is claimed")
    d = stood(["push(v, during) >= 0.1"])
    d.proof[9] = d.proof.pop(10)
    unbounded = d.entries("region", [("push(v, during) >= 0.1", "undecided")])
    accept("growth without a bound", unbounded)
    reject("growth without a bound, proved", but(unbounded, "results requirements 0 verdict", "proved"), "results", "[1].verdict: proved is claimed")
    # an orbit at 1/2: a push of more than 1/2 right before touchdown leads out
    swung = {"rule": "orbit", "proves": "orbit", "uses": [5, 1], "witness": {"bits": 24, "held": {}, "start": ["1/2", "1/2"], "steps": [{"w": "1/4"}]},
             "concludes": {"distance": "1/2", "highest": "1/2", "lowest": "1/2"}}  # fmt: skip
    asked_ = [("push(v, during) >= 1/2", "undecided"), ("push(v, during) > 1/2", "refuted"), (f"push(v, during) >= 1/2 + 1{STEP}", "refuted")]
    d = stood([that for that, _ in asked_])
    d.proof.append(swung)
    d.point("target[v]", {}, "0", "0")
    led = d.entries("region", asked_)
    accept("pushed out of an orbit", led)
    for n, (_, verdict) in enumerate(asked_):
        for other in sorted({"proved", "refuted", "undecided"} - {verdict, "undecided"}):
            reject(f"pushed out of an orbit, {n} {other}", but(led, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed")
    for shrink, growth in ((False, True), (True, True), (False, False)):
        d = stood([asked_[1][0]], top="shrink = true\n" if shrink else "")
        d.proof.append(swung)
        d.point("target[v]", {}, "0", "0")
        if not growth:
            del d.proof[10]
        verdict = "undecided" if shrink else "refuted"
        entries = d.entries("region", [(asked_[1][0], verdict)])
        accept(f"pushed out, shrink {shrink}, growth {growth}", entries)
        accept(f"pushed out, how far, shrink {shrink}, growth {growth}", but(entries, "results requirements 0 value", {"lower": None, "upper": "1/2"}))
        if shrink:
            reject("pushed out of a smaller set", but(entries, "results requirements 0 verdict", "refuted"), "results", "[1].verdict: refuted is claimed")


def stances_that_are_off() -> None:
    """A witness a unit too large: Φ is in [1, 1 + 2/2**24], and every end is rounded to such units."""
    flow, u = {**STILL, "cells": [["16777217 0"]]}, 1 << 24
    d = stood(["settles", "push(v, during) >= 0.4"], flow=flow, error=str(Q(1, u)))
    ends = {4: (Q(-12582914, u), Q(12582914, u)), 7: (Q(1, 2), Q(8388609, u)), 8: (Q(-4194305, u), Q(4194305, u)), 11: (Q(u - 2, u), Q(u + 2, u))}
    for number, (low, high) in ends.items():
        d.proof[number - 1]["concludes"] = {"lower": str(low), "upper": str(high)}
    d.proof[8]["concludes"] = {"gain": str(Q(8388609, u)), "residual": str(Q(4194305, u))}
    d.proof[9]["concludes"] = {"bound": str(Q(4194305, 8388607))}
    entries = d.entries("region", [("settles", "proved"), ("push(v, during) >= 0.4", "proved")])
    accept("a flow that is off", entries)
    for number, key, by in [(1, "error", -1), *((n, key, by) for n in ends for key, by in (("lower", 1), ("upper", -1))), (9, "gain", -1), (9, "residual", -1), (10, "bound", -1)]:
        changed = str(Q(d.proof[number - 1]["concludes"][key]) + by * Q("1" + STEP))
        reason = {1: "error: less than what is proved", 9: "gain or residual", 10: "bound: less"}.get(number, "the range shown is wider than what is concluded")
        reject(f"a flow that is off: line {number} {key}", but(entries, f"proof {number - 1} concludes {key}", changed), f"proof line {number}", reason)


# y' = (2 + v) d over a second from v/2 + w: slopes 1/2 + d, and of signals of any course no more; a unit off each

STIRRED = {"rates": 'y = "(2 + v)*d"', "uncertain": 'w = ["-1/4", "1/4"]\nd = { range = ["-1/32", "1/16"], within = true }'}
RISING = {"cuts": {"v": ["-1", "1"]}, "pieces": ["0", "1"], "degrees": [1, 1], "bits": 24, "cells": [["16777216 0 0 0 16777216 16777216 8388608 8388608"]]}
LEAST, MOST = Q(15, 32) - Q(1, 1 << 24), Q(9, 16) + Q(1, 1 << 24)


def stirred(asked: Sequence[str], *courses: tuple[str, str, str, int], **claim: str) -> Draft:
    """Lines: as `stood`, but for 7 support, and no growth; then signal-slope lines: name, ends, and the set."""
    d = Draft(stance(**{**STOOD, **STIRRED, **claim}, requires=tuple(asked)))
    d.line("trajectory", "flow", [], RISING, error=str(Q(11, 1 << 72)))
    d.range("target[v]", "0", "0")
    d.theorem("smaller-ball", "ball", [2], radius="1")
    d.range("image[v]", str(-Q(25, 32) - Q(1, 1 << 24)), str(Q(15, 16) + Q(1, 1 << 24)), [1], ["m"], bits=24)
    d.theorem("invariant-region", "invariant", [2, 4])
    d.range("support[1]", "1", "1", [5])
    d.range("support[2]", "1", "3", [5])
    d.range("slope[v,v]", str(LEAST), str(MOST), [5, 1], bits=24)
    d.range("target-miss[v]", str(-Q(5, 16) - Q(1, 1 << 24)), str(Q(3, 8) + Q(1, 1 << 24)), [1], bits=24)
    d.theorem("slope", "slope", [8, 9], gain=str(MOST), residual=str(Q(3, 8) + Q(1, 1 << 24)))
    for name, low, high, on in courses:
        d.range(name, low, high, [on, 1], bits=24)
    return d


def signals_at_equality() -> None:
    idle = "serves no later line and no result"
    asked = [(f"gain <= {MOST}", "proved"), (f"gain < {MOST}", "undecided"), (f"gain < {MOST} + 1{STEP}", "proved")]
    names = [that for that, _ in asked]
    unknown = [(that, "undecided") for that in names]
    for name in ("signal-slope[1]", "signal-slope[2]"):
        entries = stirred(names, (name, str(LEAST), str(MOST), 5)).entries("region", asked)
        accept(f"{name} at equality", entries)
        known = but(entries, "results gain", {"lower": None, "upper": str(MOST)})
        accept(f"{name} at equality, the gain", known)
        reject(f"{name} at equality, less", but(known, "results gain upper", str(MOST - Q("1" + STEP))), "results", "results.gain.upper: more is claimed")
        reject(f"{name} at equality, refuted", but(entries, "results requirements 1 verdict", "refuted"), "results", "[2].verdict: refuted is claimed")
        for key, end in (("lower", LEAST + Q("1" + STEP)), ("upper", MOST - Q("1" + STEP))):
            reject(f"{name} {key}", but(entries, f"proof 10 concludes {key}", str(end)), "proof line 11", f"{name}: the range shown is wider")
    none = stirred(names).entries("region", unknown)
    accept("signals without a slope of any course", none)
    reject("signals without a slope of any course, proved", but(none, "results requirements 0 verdict", "proved"), "results", "[1].verdict: proved is claimed")
    reject("signals without a slope of any course, the gain", but(none, "results gain", {"lower": None, "upper": str(MOST)}), "results", "results.gain.upper: nothing was derived")
    # of several the least counts; the magnitude of either end
    wide, close = ("signal-slope[1]", "0", "5/8", 5), ("signal-slope[2]", str(LEAST), str(MOST), 5)
    for n, courses in enumerate(((wide, close), (close, wide)), 1):
        reject(f"signals: a wider slope serves nothing, {n}", stirred(names, *courses).entries("region", asked), "proof", f"line {10 + n} {idle}")
    accept("signals: a wider slope alone", stirred([f"gain < 5/8 + 1{STEP}"], wide).entries("region", [(f"gain < 5/8 + 1{STEP}", "proved")]))
    below = stirred(["gain <= 0.75", "gain < 0.75"], ("signal-slope[1]", "-3/4", str(MOST), 5)).entries("region", [("gain <= 0.75", "proved"), ("gain < 0.75", "undecided")])
    accept("signals: a slope that may be far below", below)
    reject("signals: a slope that may be far below, proved", but(below, "results requirements 1 verdict", "proved"), "results", "[2].verdict: proved is claimed")
    # another set, another route, a point: nothing follows
    reject("signals over another set", stirred(names, ("signal-slope[1]", str(LEAST), str(MOST), 3)).entries("region", unknown), "proof", idle)
    entries = stirred(names, ("signal-slope[1]", str(LEAST), str(MOST), 5)).entries("region", asked)
    reject("signals without a set", but(entries, "proof 10 uses", [1]), "proof line 11", "needs a line that gives its set")
    reject("signals without a flow", but(entries, "proof 10 uses", [5]), "proof line 11", "no trajectory is proved")
    reject("signals of a route that is not there", but(entries, "proof 10 proves", "split-signal-slope[1]"), "proof line 11", "split-signal-slope[1] is no obligation")
    reject("signals whose slope is the pair's", but(entries, "proof 10 proves", "slope[v,v]"), "results", "[1].verdict: proved is claimed, undecided was derived")
    at = {"v": "1", "w": "0", "d(1)": "0", "phase(d, 1)": "0"}
    d = stirred(names, ("signal-slope[1]", str(LEAST), str(MOST), 5))
    d.point("signal-slope[1]", at, "1/2", "5/8", [5, 1], bits=24)
    reject("signals: a point", d.entries("region", asked), "proof", idle)
    for route in ("slope", "best", "curve"):  # the least of all routes is that of slope; a curve's slope is no gain
        entries = stirred(names, ("signal-slope[1]", str(LEAST), str(MOST), 5), top=f'route = "{route}"\n').entries("region", asked)
        accept(f"signals, asked for {route}", but(entries, "results route", route if route != "best" else "slope"))

stances_at_equality()
stances_that_are_off()
signals_at_equality()


def test_stance_boundaries() -> None:
    all_hold(CASES)
