"""Norms of several states against hand-made cases at equality, all minors, and numpy over corners and samples.

Every question takes the checker's package as its argument, so that `tests/mutants.py` can put the same questions to a
changed copy.
"""

from __future__ import annotations

import importlib
import random
from collections.abc import Callable, Sequence
from fractions import Fraction as Q
from itertools import combinations, product
from typing import Any

import numpy as np

from tests.checker.questions import all_hold

Question = Callable[[Any], None]
CASES: dict[str, Question] = {}
HAIR = Q(1, 10**30)


def question(of_module: Question) -> Question:
    """A question to `matrices` of a package."""

    def to_package(package: Any) -> None:
        of_module(importlib.import_module(f"{package.__name__}.matrices"))

    assert of_module.__name__ not in CASES
    CASES[of_module.__name__] = to_package
    return of_module


def matrix(*rows: Sequence[Any]) -> Any:
    return tuple(tuple(Q(x) for x in row) for row in rows)


def diagonal(*weights: Any) -> Any:
    return matrix(*([w if i == j else 0 for j in range(len(weights))] for i, w in enumerate(weights)))


def nothing(rows: int, columns: int) -> Any:
    return matrix(*([0] * columns for _ in range(rows)))


def leaf(m: Any, centre: Any, slopes: Sequence[Any] = (), rest: Any = None) -> Any:
    return m.Leaf(centre, tuple(slopes), nothing(len(centre), len(centre[0])) if rest is None else rest)


def inverse(rows: Any) -> Any:
    n = len(rows)
    a = [[*row, *(Q(i == j) for j in range(n))] for i, row in enumerate(rows)]
    for c in range(n):
        p = next(r for r in range(c, n) if a[r][c])
        a[c], a[p] = a[p], a[c]
        a[c] = [x / a[c][c] for x in a[c]]
        for r in range(n):
            if r != c:
                a[r] = [x - a[r][c] * y for x, y in zip(a[r], a[c], strict=True)]
    return tuple(tuple(row[n:]) for row in a)


def norm(m: Any, kind: str, rows: Any) -> Any:
    return m.metric(kind, rows, inverse(rows), len(rows))


def exactly(m: Any, metric: Any, of: Any, bound: Q) -> None:
    """The bound is accepted, a hair less refused, and it is the one that is measured."""
    assert m.norm_at_most(metric, of, bound)
    assert m.norm_at_most(metric, of, bound + HAIR)
    assert not m.norm_at_most(metric, of, bound - HAIR)
    found = m.norm_over(metric, of)
    assert bound <= found <= bound * (1 + Q(2, 10**9)) if metric.kind == "ellipsoid" else found == bound


def refused(m: Any, why: str, do: Callable[[], Any]) -> None:
    try:
        do()
    except m.Rejected as found:
        assert why in str(found), str(found)
    else:
        raise AssertionError(f"accepted: {why}")


# definiteness


def determinant(a: list[list[int]]) -> Q:
    if not a:
        return Q(1)
    return sum(
        ((-1) ** j * a[0][j] * determinant([row[:j] + row[j + 1 :] for row in a[1:]]) for j in range(len(a))), Q(0)
    )


def by_minors(a: list[list[int]]) -> int:
    """All principal minors: not below 0 if semidefinite; the leading ones above 0 if definite (Sylvester)."""
    n = len(a)
    some = [c for r in range(1, n + 1) for c in combinations(range(n), r)]
    minors = {c: determinant([[a[i][j] for j in c] for i in c]) for c in some}
    if all(minors[tuple(range(r))] > 0 for r in range(1, n + 1)):
        return 1
    return 0 if all(x >= 0 for x in minors.values()) else -1


@question
def definite_by_hand(m: Any) -> None:
    for a, found in (
        ([[1]], 1), ([[0]], 0), ([[-1]], -1),
        ([[0, 0], [0, 0]], 0), ([[0, 0], [0, 1]], 0), ([[1, 0], [0, 0]], 0), ([[0, 1], [1, 0]], -1), ([[0, -1], [-1, 5]], -1),
        ([[0, 0], [0, -1]], -1), ([[1, 1], [1, 1]], 0), ([[1, 2], [2, 4]], 0), ([[1, 2], [2, 3]], -1), ([[1, 2], [2, 5]], 1),
        ([[1, 1, 0], [1, 1, 0], [0, 0, 1]], 0), ([[1, 1, 0], [1, 1, 1], [0, 1, 9]], -1), ([[0, 0, 0], [0, 2, 1], [0, 1, 2]], 0),
        ([[2, 0, 0], [0, 0, 0], [0, 0, 3]], 0), ([[2, -1, 0], [-1, 2, -1], [0, -1, 2]], 1), ([[1, -1, 0], [-1, 2, -1], [0, -1, 1]], 0),
        ([[4, 2, 2], [2, 1, 1], [2, 1, 1]], 0), ([[0, 0, 0], [0, 0, 1], [0, 1, 0]], -1),
        ([[1, 1], [0, 1]], -1), ([[2, 1, 0], [1, 2, 0]], -1), ([[2, 1], [1]], -1), ([[1, 0]], -1),
    ):  # fmt: skip
        assert m.definite(a) == found, a


@question
def definite_by_all_minors(m: Any) -> None:
    rng = random.Random(1)
    seen = {1: 0, 0: 0, -1: 0}
    for size in (1, 2, 3, 4):
        for _ in range(60):
            b = [[rng.randrange(-2, 3) for _ in range(rng.randrange(1, size + 1))] for _ in range(size)]
            b = [row[: min(map(len, b))] for row in b]
            a = [
                [sum(x * y for x, y in zip(r, s, strict=True)) for s in b] for r in b
            ]  # b b^T: singular if b is narrow
            a[0][0] += rng.choice((0, 0, 0, -1, 1))
            k = rng.randrange(size)
            a[k][k] += rng.choice((0, 0, 0, 3))
            seen[by_minors(a)] += 1
            assert m.definite(a) == by_minors(a), a
    assert min(seen.values()) > 20, seen


@question
def definite_of_large_numbers(m: Any) -> None:
    n = 10**40
    assert m.definite([[n, n + 1], [n + 1, n + 2]]) == -1
    assert m.definite([[n, n + 1], [n + 1, n + 3]]) == 1
    assert m.definite([[n * n, n * (n + 1)], [n * (n + 1), (n + 1) ** 2]]) == 0
    hilbert = [[2520 * 11 // (i + j + 1) for j in range(5)] for i in range(5)]  # 27720 is a multiple of 1 to 12
    assert m.definite([row[:] for row in hilbert]) == 1
    hilbert[4][4] -= 1
    assert m.definite(hilbert) == -1


# roots


@question
def roots(m: Any) -> None:
    for q in (Q(0), Q(1), Q(9, 4), Q(10**80), Q(1, 49)):
        assert m.root(q)[0] == m.root(q)[1] and m.root(q)[0] ** 2 == q
    for q in (
        Q(2),
        Q(1, 2),
        Q(3, 7),
        Q(8),
        Q(2, 10**60),
        Q(10**61),
        Q(7 * 10**200 + 1, 3),
        Q(3, 7 * 10**200 + 1),
        Q(4**90 + 1),
    ):
        low, high = m.root(q)
        assert low > 0 and low**2 < q < high**2 and high - low <= low / 2**70, q
    assert m.root(Q(2))[1] - m.root(Q(2))[0] == Q(1, 2**72)
    assert m.root(Q(1, 2))[1] - m.root(Q(1, 2))[0] == Q(1, 2**73)


# metrics


@question
def metrics_that_are_refused(m: Any) -> None:
    one, three = diagonal(1, 1), matrix([1, 0], [0, 1], [1, 1])
    left = matrix([1, 0, 0], [0, 1, 0])
    assert m.metric("polytope", three, left, 2) == m.Metric("polytope", three, left)
    six = diagonal(*range(1, 7))
    assert norm(m, "box", six).rows == six
    wrong = matrix([1, 0, 0], [0, 1, HAIR])
    refused(m, "the kind is", lambda: m.metric("ball", one, one, 2))
    assert norm(m, "box", matrix([2])).rows == matrix([2])
    refused(m, "1 to 6 states", lambda: m.metric("box", (), (), 0))
    refused(m, "1 to 6 states", lambda: m.metric("box", diagonal(*[1] * 7), diagonal(*[1] * 7), 7))
    refused(m, "1 to 64 rows", lambda: m.metric("polytope", (), ((), ()), 2))
    many = matrix(*([1, 0], [0, 1]) * 33)
    few, some = matrix([1, *[0] * 63], [0, 1, *[0] * 62]), matrix([1, *[0] * 64], [0, 1, *[0] * 63])
    assert m.metric("polytope", many[:64], few, 2).rows == many[:64]
    refused(m, "1 to 64 rows", lambda: m.metric("polytope", many[:65], some, 2))
    refused(m, "a row has one number", lambda: m.metric("polytope", ((Q(1), Q(0)), (Q(0),)), one, 2))
    refused(m, "a row has one number", lambda: m.metric("box", diagonal(1, 1, 1), diagonal(1, 1, 1), 2))
    refused(m, "the inverse has", lambda: m.metric("polytope", three, one, 2))
    refused(m, "the inverse has", lambda: m.metric("polytope", three, left[:1], 2))
    refused(m, "the inverse has", lambda: m.metric("polytope", three, (left[0], left[1][:2]), 2))
    refused(m, "box has a square matrix", lambda: m.metric("box", three, left, 2))
    refused(m, "ellipsoid has a square matrix", lambda: m.metric("ellipsoid", three, left, 2))
    refused(m, "positive weights", lambda: m.metric("box", diagonal(-1, 1), diagonal(-1, 1), 2))
    refused(m, "positive weights", lambda: m.metric("box", diagonal(0, 1), diagonal(1, 1), 2))
    refused(m, "positive weights", lambda: m.metric("box", matrix([1, 1], [0, 1]), matrix([1, -1], [0, 1]), 2))
    refused(m, "positive weights", lambda: m.metric("box", matrix([0, 1], [1, 0]), matrix([0, 1], [1, 0]), 2))
    refused(m, "is not 1", lambda: m.metric("polytope", three, wrong, 2))
    refused(m, "is not 1", lambda: m.metric("box", diagonal(2, 2), diagonal(1, 1), 2))
    refused(m, "is not 1", lambda: m.metric("ellipsoid", one, matrix([1, HAIR], [0, 1]), 2))
    flat = matrix([1, 2], [2, 4], [3, 6])  # of rank 1: nothing to the left makes it 1
    refused(m, "is not 1", lambda: m.metric("polytope", flat, matrix([1, 0, 0], [0, 0, Q(1, 6)]), 2))
    assert norm(m, "box", diagonal(2**3999, 1)).support(1) == 1
    refused(m, "more than 4000 bits", lambda: norm(m, "box", diagonal(2**4000, 1)))
    refused(m, "more than 4000 bits", lambda: m.metric("box", diagonal(1, 1), diagonal(1, Q(1, 2**4000)), 2))
    refused(m, "more than 4000 bits", lambda: m.metric("polytope", matrix([1, -(2**4000)], [0, 1]), diagonal(1, 1), 2))


@question
def metrics_by_hand(m: Any) -> None:
    box = norm(m, "box", diagonal(2, Q(1, 3)))
    assert (box.support(0), box.support(1)) == (Q(1, 2), 3)
    assert (box.unit(0), box.unit(1)) == ((2, 2), (Q(1, 3), Q(1, 3)))
    assert box.length([Q(1), Q(9)]) == 3 and box.length([Q(2), Q(9)]) == 4
    assert box.least([Q(1), Q(-9)]) == box.most([Q(1), Q(-9)]) == 3
    skew = norm(m, "polytope", matrix([1, 1], [1, -2]))  # L = [[2, 1], [1, -1]] / 3
    assert (skew.support(0), skew.support(1)) == (1, Q(2, 3))
    assert (skew.unit(0), skew.unit(1)) == ((1, 1), (2, 2))
    assert skew.length([Q(1), Q(1)]) == 3 and skew.least([Q(1), Q(1)]) == skew.most([Q(1), Q(1)]) == 2
    assert skew.length([Q(3), Q(1, 2)]) == 4 and skew.most([Q(-2), Q(-1)]) == 3
    three = m.metric("polytope", matrix([1, 0], [0, 1], [2, -2]), matrix([1, 0, 0], [1, 0, -Q(1, 2)]), 2)
    assert three.support(1) == 1 and three.tips == matrix([Q(1, 2), 1], [1, Q(1, 2)], [1, 1])
    assert three.length([Q(1), Q(1)]) == 4 and three.most([Q(1), Q(1)]) == 1 and three.unit(1) == (2, 2)
    round_ = norm(m, "ellipsoid", matrix([3, 0], [4, 2]))  # L = [[2, 0], [-4, 3]] / 6
    assert (round_.support(0), round_.support(1)) == (Q(1, 3), Q(5, 6))
    assert (round_.unit(0), round_.unit(1)) == ((5, 5), (2, 2))
    assert round_.least([Q(1), Q(-2)]) == round_.most([Q(1), Q(-2)]) == 3
    assert round_.length([Q(1), Q(0)]) == 5 and round_.length([Q(0), Q(1)]) == 2
    low, high = m.root(Q(73))  # |(3, 4 + 4)|, larger than |(3, 4 - 4)| = 3
    assert round_.length([Q(1), Q(2)]) == high == round_.most([Q(-1), Q(-2)])
    assert round_.least([Q(1), Q(2)]) == low < high
    shear = norm(m, "ellipsoid", matrix([1, 1], [0, 1]))
    assert (shear.support(0), shear.unit(1)) == (m.root(Q(2))[1], m.root(Q(2)))
    assert shear.length([Q(1, 7), Q(1, 14)]) == m.root(Q(10, 196))[1]
    for few_or_many in ([Q(1)], [Q(1), Q(1), Q(1)]):
        for of in (shear.least, shear.most, shear.length, box.least, box.most, box.length):
            try:
                of(few_or_many)
            except ValueError:
                continue
            raise AssertionError("another number of states")


# the induced norm at equality


@question
def largest_magnitudes_at_equality(m: Any) -> None:
    one, weighted = norm(m, "box", diagonal(1, 1)), norm(m, "box", diagonal(2, Q(1, 3)))
    a = matrix([Q(1, 2), -Q(1, 4)], [-Q(1, 3), Q(1, 7)])
    exactly(m, one, leaf(m, a), Q(3, 4))
    exactly(m, weighted, leaf(m, a), Q(1, 2) + Q(6, 4))  # 2 a_01 3
    skew = norm(m, "polytope", matrix([1, 1], [1, -2]))
    exactly(m, skew, leaf(m, diagonal(2, -1)), Q(2))  # V A L = [[1, 1], [2, 0]]
    exactly(m, skew, leaf(m, diagonal(1, 0)), Q(1))
    exactly(m, skew, leaf(m, matrix([1], [-3])), Q(7))
    exactly(m, one, leaf(m, nothing(2, 2)), Q(0))
    # a slope that only adds where it may, and a rest
    g = matrix([Q(1, 8), Q(1, 8)], [0, 0])
    exactly(m, one, leaf(m, a, [g]), Q(3, 4))
    exactly(m, one, leaf(m, a, [matrix([1, 1], [0, 0])]), Q(9, 4))
    exactly(m, one, leaf(m, a, [g, matrix([0, 0], [0, Q(1, 2)])]), Q(1, 3) + Q(1, 7) + Q(1, 2))
    exactly(m, one, leaf(m, a, [g], matrix([0, Q(1, 10)], [1, 0])), Q(1, 3) + Q(1, 7) + 1)
    exactly(m, weighted, leaf(m, a, [g], matrix([0, Q(1, 10)], [0, 0])), 2 + Q(6, 8) - Q(1, 8) + Q(6, 10))
    exactly(m, skew, leaf(m, nothing(2, 2), [], diagonal(1, 0)), Q(1))
    exactly(m, skew, leaf(m, nothing(2, 2), [], diagonal(0, 1)), Q(4, 3))
    exactly(m, skew, leaf(m, nothing(2, 1), [], matrix([1], [1])), Q(3))
    three = m.metric("polytope", matrix([1, 0], [0, 1], [1, 1]), matrix([1, 0, 0], [0, 1, 0]), 2)
    exactly(m, three, leaf(m, diagonal(Q(1, 2), Q(1, 3))), Q(1, 2))
    exactly(m, three, leaf(m, matrix([1], [1])), Q(2))


@question
def vertices_at_equality(m: Any) -> None:
    """A hexagon: (1, 0), (0, 1) and (1, -1), and a matrix that turns it by a side."""
    three = m.metric("polytope", matrix([1, 0], [0, 1], [1, 1]), matrix([1, 0, 0], [0, 1, 0]), 2)
    turn = matrix([1, 1], [-1, 0])
    assert three.many and three.tips == matrix([0, 1], [1, -1], [1, 0])
    assert (three.support(0), three.support(1)) == (1, 1) and three.unit(0) == (1, 1)
    exactly(m, three, leaf(m, turn), Q(1))
    exactly(m, three, leaf(m, nothing(2, 2), [turn], diagonal(0, Q(1, 3))), Q(4, 3))
    # |V C q| + sum |V G q| + |V| rest |q|: rows are largest at different vertices
    c, g, h = matrix([Q(1, 2), 0], [Q(1, 4), 1]), matrix([0, Q(1, 8)], [0, 0]), matrix([Q(1, 16), 0], [0, -Q(1, 4)])
    exactly(m, three, leaf(m, c, [g, h], matrix([0, Q(1, 32)], [Q(1, 32), 0])), 1 + Q(1, 8) + Q(1, 4) + Q(1, 32))
    exactly(m, three, leaf(m, matrix([0, 1], [0, 0]), [diagonal(Q(1, 2), 0)]), Q(3, 2))
    exactly(m, three, leaf(m, matrix([1], [-2]), [matrix([Q(1, 4)], [Q(1, 4)])], matrix([0], [Q(1, 8)])), Q(19, 8))
    steep = m.metric("polytope", matrix([1, 0], [1, 1], [0, Q(1, 3)]), matrix([1, 0, 0], [-1, 1, 0]), 2)
    assert steep.tips == matrix([1, -2], [1, 0]) and steep.support(1) == 2
    # seen from another norm, only a left inverse tells
    other = m.Metric("polytope", three.rows, three.inverse, own=False)
    assert not other.many and other.support(0) == 1
    exactly(m, other, leaf(m, turn), Q(2))
    # a cube of which two corners are cut off
    cut = m.metric(
        "polytope",
        matrix([1, 0, 0], [0, 1, 0], [0, 0, 1], [1, 1, 1]),
        matrix([1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0]),
        3,
    )
    assert cut.tips == matrix([1, -1, -1], [1, -1, 1], [1, 1, -1])
    exactly(m, cut, leaf(m, matrix([1, 1, 1], [0, 0, 0], [0, 0, 0])), Q(1))
    exactly(m, cut, leaf(m, matrix([1, 1, -1], [0, 0, 0], [0, 0, 0])), Q(3))
    few = matrix(*diagonal(1, 1, 1), *[[0, 0, 1]] * 22)
    left = matrix(*([*row, *[0] * 22] for row in diagonal(1, 1, 1)))
    assert m.metric("polytope", few, left, 3).support(2) == 1  # 2300 choices of rows, 8 of sides
    refused(
        m,
        "more than 20000 choices",
        lambda: m.metric("polytope", (*few, few[0]), matrix(*([*row, 0] for row in left)), 3).tips,
    )


@question
def lengths_at_equality(m: Any) -> None:
    one, round_ = norm(m, "ellipsoid", diagonal(1, 1)), norm(m, "ellipsoid", matrix([3, 0], [4, 2]))
    exactly(m, one, leaf(m, diagonal(Q(1, 2), -Q(2, 3))), Q(2, 3))
    exactly(m, one, leaf(m, matrix([0, 5], [0, 0])), Q(5))
    exactly(m, one, leaf(m, matrix([Q(3, 5), Q(4, 5)], [Q(4, 5), -Q(3, 5)])), Q(1))
    exactly(m, one, leaf(m, matrix([3, 0], [4, 0])), Q(5))
    exactly(m, one, leaf(m, nothing(2, 2)), Q(0))
    exactly(m, one, leaf(m, matrix([3], [4])), Q(5))
    exactly(m, round_, leaf(m, matrix([1], [-2])), Q(3))
    exactly(m, round_, leaf(m, matrix([1, 0], [0, 1])), Q(1))
    exactly(m, round_, leaf(m, matrix([0, 0], [1, 0])), Q(2, 3))  # V A L = [[0, 0], [2/3, 0]]
    exactly(m, one, leaf(m, diagonal(1, 0), [diagonal(Q(1, 2), Q(1, 2))]), Q(3, 2))
    exactly(m, one, leaf(m, diagonal(1, Q(1, 2)), [diagonal(Q(1, 2), 0), diagonal(0, Q(3, 2))]), Q(2))
    # the rest comes on top: sqrt(row sum) and sqrt(trace) of its squares, whichever is less
    exactly(m, one, leaf(m, diagonal(1, 1), [], matrix([3, 0], [4, 0])), Q(6))
    exactly(m, one, leaf(m, diagonal(1, 1), [], diagonal(2, 2)), Q(3))
    exactly(m, one, leaf(m, nothing(2, 2), [], diagonal(2, 2)), Q(2))
    exactly(m, one, leaf(m, matrix([0], [1]), [], matrix([3], [4])), Q(6))
    exactly(m, round_, leaf(m, nothing(2, 1), [], matrix([1], [4])), m.root(Q(9 + 144))[1])
    assert not m.norm_at_most(one, leaf(m, nothing(2, 2), [], diagonal(2, 2)), Q(1))  # room below 0, its square is not
    assert not m.norm_at_most(one, leaf(m, nothing(2, 2)), -HAIR)
    assert not m.norm_at_most(one, leaf(m, diagonal(1, 1)), Q(-2))


@question
def the_golden_ratio(m: Any) -> None:
    """C02: [[1, 1], [0, 1]] and its transpose have Euclidean norm (1 + sqrt 5) / 2 = 1.61803398…"""
    one = norm(m, "ellipsoid", diagonal(1, 1))
    up, down = matrix([1, 1], [0, 1]), matrix([1, 0], [1, 1])
    hull = leaf(m, matrix([1, Q(1, 2)], [Q(1, 2), 1]), [matrix([0, Q(1, 2)], [-Q(1, 2), 0])])  # from one to the other
    for of in (leaf(m, up), leaf(m, down), hull):
        assert m.norm_at_most(one, of, Q("1.6181")) and not m.norm_at_most(one, of, Q("1.6180"))
        assert m.norm_at_most(one, of, Q("1.618033988749894848204586834366")) and not m.norm_at_most(
            one, of, Q("1.618033988749894848204586834365")
        )
        found = m.norm_over(one, of)
        assert found >= Q("1.618033988749894848") and found <= Q("1.6180339903")
        for factor in (Q("1.62"), Q("1.61")):
            scaled = leaf(
                m,
                *(tuple(tuple(x / factor for x in row) for row in part) for part in (of.centre,)),
                [tuple(tuple(x / factor for x in row) for row in part) for part in of.slopes],
            )
            assert m.norm_at_most(one, scaled, Q(1)) == (factor == Q("1.62"))


@question
def measured_from_a_start(m: Any) -> None:
    for kind, of, value in (
        ("box", diagonal(Q(1, 2), 2), Q(2)),
        ("ellipsoid", diagonal(Q(1, 2), 2), Q(2)),
        ("ellipsoid", matrix([3, 0], [4, 0]), Q(5)),
    ):
        one = norm(m, kind, diagonal(1, 1))
        assert m.norm_over(one, leaf(m, of), value + HAIR) == value + HAIR
        assert m.norm_over(one, leaf(m, of), value) == value
        assert value <= m.norm_over(one, leaf(m, of), value - HAIR) <= value * (1 + Q(1, 10**9))
        assert value <= m.norm_over(one, leaf(m, of), relative=Q(1, 10**25)) <= value * (1 + Q(1, 10**25))
    one = norm(m, "ellipsoid", diagonal(1, 1))
    spread = leaf(m, diagonal(1, 1), [], diagonal(2, 2))
    assert (
        m.norm_over(one, spread, Q(4)) == 4
        and m.norm_over(one, spread, Q(3)) == 3
        and 3 <= m.norm_over(one, spread, Q(1)) <= 3 + Q(4, 10**9)
    )
    assert m.norm_over(one, leaf(m, matrix([3], [4])), relative=Q(0)) == 5
    # irrational, and small; what is measured is accepted
    for scale in (Q(1), Q(1, 7), Q(1, 10**15)):
        vector = leaf(m, matrix([scale], [scale]))
        found = m.norm_over(one, vector)
        assert m.norm_at_most(one, vector, found) and not m.norm_at_most(one, vector, found * (1 - Q(1, 10**21)))
        shear = leaf(m, matrix([scale, scale], [0, scale]))
        for relative in (Q(1, 10**9), Q(1, 10**18)):
            found = m.norm_over(one, shear, relative=relative)
            assert m.norm_at_most(one, shear, found) and not m.norm_at_most(one, shear, found * (1 - relative))
    # corner by corner: an early one is larger, a late one is
    for sign in (1, -1):
        moved = leaf(m, diagonal(2, 2), [diagonal(sign, sign)])
        assert 3 <= m.norm_over(one, moved) <= 3 + Q(3, 10**9)


@question
def more_slopes_than_signs(m: Any) -> None:
    """The least of them count as rest, the others keep their signs."""
    one, round_ = norm(m, "box", diagonal(1, 1)), norm(m, "ellipsoid", diagonal(1, 1))
    centre = diagonal(100, 100)
    small = [matrix([Q(1, k), -Q(1, k)], [Q(1, k), -Q(1, k)]) for k in range(3, 11)]
    eight = sum((Q(1, k) for k in range(3, 11)), Q(0))
    exactly(m, one, leaf(m, nothing(2, 2), small), 2 * eight)
    exactly(m, one, leaf(m, centre, small), Q(100) + 2 * eight)
    turns = [
        matrix([0, k], [-k, 0]) for k in (1, 2)
    ]  # of norm k, the sum of both sqrt(2) k as a rest counted by columns
    exactly(m, round_, leaf(m, nothing(2, 2), turns), Q(3))
    # the rank-one slopes cancel in the second row whatever their signs; as a rest they do not
    apart = [matrix([1, 0], [1, 0]), matrix([0, 1], [0, -1])]
    least = matrix([Q(1, 100), 0], [-Q(1, 100), 0])
    many = [diagonal(2, 2)] * 6
    exactly(m, one, leaf(m, diagonal(20, 0), [least, *apart, *many]), Q(20 + 2 + 12) + Q(1, 100))
    exactly(m, one, leaf(m, matrix([20, -5], [0, 0]), [*many, *apart, least]), Q(25 + 12 + 2) + Q(1, 100))
    pull = matrix([1, -1], [0, 0])  # adds nothing to [[1, 1], [0, 0]] with its sign, 2 without
    wide = [diagonal(0, 2)] * 7
    of = matrix([8, 8], [0, 0])
    exactly(m, one, leaf(m, of, [*wide, pull]), Q(16))
    exactly(m, one, leaf(m, of, [pull, *wide]), Q(16))
    exactly(m, one, leaf(m, of, [pull, *wide, nothing(2, 2)]), Q(16))
    exactly(m, one, leaf(m, of, [pull, *wide, diagonal(0, 2)]), Q(16))  # of equal ones the last
    exactly(m, one, leaf(m, of, [*wide, diagonal(0, 2), pull]), Q(18))
    exactly(m, one, leaf(m, of, [*wide, pull, matrix([Q(1, 2), -Q(1, 2)], [0, 0])]), Q(17))
    exactly(m, one, leaf(m, of, [matrix([Q(1, 2), -Q(1, 2)], [0, 0]), pull, *wide]), Q(17))
    exactly(m, one, leaf(m, of, [matrix([-Q(1, 2), -Q(1, 2)], [0, 0]), matrix([1, 0], [0, 0]), *wide]), Q(18))
    scaled = norm(m, "box", diagonal(1, 100))  # effects are told in the norm's own coordinates
    exactly(
        m, scaled, leaf(m, matrix([8, 800], [0, 0]), [matrix([Q(1, 4), -25], [0, 0]), *[diagonal(0, 1)] * 8]), Q(33, 2)
    )


@question
def leaves_that_do_not_fit(m: Any) -> None:
    one = norm(m, "box", diagonal(1, 1))
    square = diagonal(1, 1)
    for of, why in (
        (m.Leaf((), (), ()), "a vector or a square matrix"),
        (leaf(m, matrix([1, 2, 3], [1, 2, 3])), "a vector or a square matrix"),
        (leaf(m, diagonal(1, 1, 1)), "a vector or a square matrix"),
        (leaf(m, matrix([1], [2], [3])), "one row for each state"),
        (m.Leaf(square, (), nothing(2, 1)), "one row for each state"),
        (m.Leaf(square, (), nothing(1, 2)), "one row for each state"),
        (m.Leaf(square, (), ((Q(0), Q(0)), (Q(0),))), "one row for each state"),
        (m.Leaf(square, (nothing(3, 2),), nothing(2, 2)), "one row for each state"),
        (m.Leaf(square, (square, nothing(2, 1)), nothing(2, 2)), "one row for each state"),
        (m.Leaf(((Q(1), Q(2)), (Q(1),)), (), nothing(2, 2)), "one row for each state"),
        (leaf(m, square, [], matrix([1, 0], [0, -HAIR])), "the rest is a magnitude"),
        (leaf(m, diagonal(1, 2**4000)), "more than 4000 bits"),
        (leaf(m, diagonal(1, Q(1, 2**4000))), "more than 4000 bits"),
        (leaf(m, square, [diagonal(1, 2**4000)]), "more than 4000 bits"),
        (leaf(m, diagonal(Q(1, 3**1500), Q(1, 2**3000))), "more than 4000 bits"),
    ):
        refused(m, why, lambda of=of: m.norm_at_most(one, of, Q(10)))
        refused(m, why, lambda of=of: m.norm_over(one, of))
    assert m.norm_at_most(one, leaf(m, diagonal(0, 2**4000 - 1)), Q(2**4000 - 1))
    refused(
        m,
        "as many columns as the inverse",
        lambda: m.entries(m.framed(square, square), leaf(m, matrix([1], [1])), True),
    )


def ends(m: Any, v: Any, left: Any, of: Any) -> tuple[Any, Any]:
    """The entries' ends as fractions."""
    frame = m.framed(v, left if left is not None else diagonal(*[1] * len(v[0])))
    low, high = m.entries(frame, of, left is not None)
    return tuple(tuple(tuple(Q(x, 2**m.ENTRY_BITS) for x in row) for row in each) for each in (low, high))


@question
def entries_at_equality(m: Any) -> None:
    """Exact where they are whole multiples of a unit, else rounded outward to the next."""
    v, left = matrix([1, 1], [1, -1]), matrix([Q(1, 2), Q(1, 2)], [Q(1, 2), -Q(1, 2)])
    a = leaf(m, diagonal(2, -1), [diagonal(0, 4), nothing(2, 2)], diagonal(Q(1, 2), 0))
    # V A L = 1/2 [[1, 3], [3, 1]], V G L = 2 [[1, -1], [-1, 1]], |V| rest |L| = 1/4
    most = matrix([Q(1, 2) + Q(9, 4), Q(3, 2) + Q(9, 4)], [Q(3, 2) + Q(9, 4), Q(1, 2) + Q(9, 4)])
    least = matrix([Q(1, 2) - Q(9, 4), Q(3, 2) - Q(9, 4)], [Q(3, 2) - Q(9, 4), Q(1, 2) - Q(9, 4)])
    assert ends(m, v, left, a) == (least, most)
    assert ends(m, v, None, a) == (matrix([Q(3, 2), -5], [Q(3, 2), -3]), matrix([Q(5, 2), 3], [Q(5, 2), 5]))
    assert ends(m, diagonal(1, 1), None, a) == (matrix([Q(3, 2), 0], [0, -5]), matrix([Q(5, 2), 0], [0, 3]))
    one = leaf(m, matrix([1], [-1]), [matrix([-1], [Q(1, 4)])], matrix([0], [Q(1, 4)]))
    assert ends(m, v, None, one) == (matrix([-1], [Q(1, 2)]), matrix([1], [Q(7, 2)]))
    ten = [diagonal(1, 2)] * 10
    assert ends(m, diagonal(1, 1), diagonal(1, 1), leaf(m, diagonal(-1, 0), ten)) == (
        diagonal(-11, -20),
        diagonal(9, 20),
    )
    third, tiny = leaf(m, diagonal(Q(1, 3), -Q(1, 3)), [], diagonal(0, 0)), Q(1, 2**m.ENTRY_BITS)
    low, high = ends(m, diagonal(1, 1), diagonal(1, 1), third)
    for i, x in enumerate((Q(1, 3), -Q(1, 3))):
        assert low[i][i] < x < high[i][i] == low[i][i] + tiny
    assert low[0][1] == high[0][1] == 0 and tiny < Q(1, 10**40)


@question
def long_numbers_are_rounded_outward(m: Any) -> None:
    rng = random.Random(5)
    for n, c, count, scale in product((2, 3), (1, 3), (0, 2), (Q(1), Q(1, 10**30), Q(10**12))):
        unit = 3**140

        def part(most: int, n: int = n, c: int = c, unit: int = unit, scale: Q = scale) -> list[list[int]]:
            return [[int(scale * rng.randint(-most * unit, most * unit)) for _ in range(c)] for _ in range(n)]

        long = m.Image(part(3), [part(1) for _ in range(count)], m.magnitudes(part(1)), unit)
        short = long.shortened()
        assert short.unit & (short.unit - 1) == 0 and short != long
        largest = max(
            map(abs, m.flat(short.centre) + [x for g in short.slopes for x in m.flat(g)] + m.flat(short.rest))
        )
        assert 78 <= largest.bit_length() <= 82
        for i, j in product(range(n), range(c)):
            for t in product((-1, 1), repeat=count):
                for sign in (-1, 1):
                    at, near = (
                        Q(x.centre[i][j] + sum(s * g[i][j] for s, g in zip(t, x.slopes, strict=True)), x.unit)
                        for x in (long, short)
                    )
                    most, wide = at + sign * Q(long.rest[i][j], unit), Q(short.rest[i][j], short.unit)
                    assert abs(most - near) <= wide <= Q(long.rest[i][j], unit) + Q(2 + count, short.unit)
    brief = m.Image([[3]], [[[1]]], [[0]], (1 << 200) - 1)
    assert brief.shortened() is brief
    longer = m.Image([[3]], [[[1]]], [[0]], 1 << 200)
    assert (
        longer.shortened().rest == [[2]]
        and longer.shortened().centre[0][0] * longer.unit == 3 * longer.shortened().unit
    )
    nothing = m.Image([[0]], [], [[0]], 1 << 300)
    assert nothing.shortened().centre == [[0]] and nothing.shortened().rest == [[1]]


@question
def only_determinants_need_short_numbers(m: Any) -> None:
    size = Q(1, 3**140)
    of = leaf(m, diagonal(size, size), [], diagonal(0, 0))
    for kind, exact in (("box", True), ("polytope", True), ("ellipsoid", False)):
        plain = norm(m, kind, diagonal(1, 1))
        assert m.norm_at_most(plain, of, size) is exact and m.norm_at_most(plain, of, size * (1 + Q(1, 2**70)))
        assert not m.norm_at_most(plain, of, size * (1 - Q(1, 2**70)))


@question
def what_vanishes(m: Any) -> None:
    rows = matrix([1, 0], [0, 1], [Q(1, 3), -2])
    for z, good in (
        (nothing(3, 3), True), (matrix([-Q(1, 3), 2, 1], [0, 0, 0], [0, 0, 0]), True), (matrix([0, 0, 0], [-1, 6, 3], [Q(1, 3), -2, -1]), True),
        (matrix([-Q(1, 3) + HAIR, 2, 1], [0, 0, 0], [0, 0, 0]), False), (matrix([0, 0, 0], [0, 0, 0], [0, 0, HAIR]), False), (matrix([0, 0, 0], [0, HAIR, 0], [0, 0, 0]), False),
    ):  # fmt: skip
        assert m.vanishes(z, rows) is good
    assert m.times([[1, 2], [3, 4]], [[0, 1], [0, 5]]) == [[0, 11], [0, 23]]


@question
def comparison_at_equality(m: Any) -> None:
    """B03: (1 - K)^-1 residual = (2/45, 11/180)."""
    k, residual, b = matrix(["1/2", "1/5"], ["1/10", "3/5"]), [Q("1/100"), Q("2/100")], [Q("2/45"), Q("11/180")]
    one = [Q(1), Q(1)]
    assert m.comparison(k, residual, one, b)
    assert m.comparison(k, residual, b, b)
    for i in range(2):
        assert not m.comparison(k, residual, one, [x - HAIR * (i == j) for j, x in enumerate(b)])
        assert m.comparison(k, residual, one, [x + HAIR for x in b])
        assert not m.comparison(k, [-HAIR if i == j else x for j, x in enumerate(residual)], one, b)
        assert not m.comparison(k, residual, [Q(j != i) for j in range(2)], b)
    # p: K p < p in every row, not <=
    assert m.comparison(k, residual, [Q(2), Q(1)], b)  # (6/5, 4/5)
    assert not m.comparison(k, residual, [Q(4), Q(1)], b)  # (11/5, 1)
    assert m.comparison(k, residual, [4 - HAIR, Q(1)], b)
    assert not m.comparison(k, residual, [Q(2), Q(5)], b)  # (2, 16/5)
    assert not m.comparison(k, residual, [Q(-1), Q(-1)], b)
    assert not m.comparison(diagonal(2, 2), [Q(0), Q(0)], [Q(-1), Q(-1)], [Q(0), Q(0)])
    # spectral radius 1, whatever p; b would do
    for p in product((Q(0), Q(1), Q(2), Q(100)), repeat=2):
        assert not m.comparison(matrix(["1/2", "1/2"], ["1/2", "1/2"]), [Q(0), Q(0)], p, [Q(1), Q(1)])
        assert not m.comparison(matrix([0, 2], ["1/2", 0]), [Q(0), Q(0)], p, [Q(2), Q(1)])
    # nothing moves, nothing is left
    zero = [Q(0), Q(0)]
    assert m.comparison(nothing(2, 2), zero, one, zero)
    assert not m.comparison(nothing(2, 2), zero, zero, zero)
    assert not m.comparison(nothing(2, 2), zero, one, [-HAIR, Q(0)])
    assert not m.comparison(matrix([0, -HAIR], [0, 0]), zero, one, one)
    assert not m.comparison(matrix([0, 0, 0], [0, 0, 0]), zero, one, one)
    for short in range(3):
        assert not m.comparison(nothing(2, 2), *([Q(1)] if j == short else [Q(1), Q(1)] for j in range(3)))
    assert not m.comparison(nothing(1, 2), [Q(0)], [Q(1)], [Q(1)])


# against floating point


def some(rng: random.Random, rows: int, columns: int, scale: Q = Q(1)) -> Any:
    return matrix(*([scale * Q(rng.randrange(-1000, 1001), 1000) for _ in range(columns)] for _ in range(rows)))


def numbers(a: Any) -> Any:
    return np.array([[float(x) for x in row] for row in a])


@question
def against_singular_values(m: Any) -> None:
    """Contained: every sampled matrix's norm. Tight: the largest norm at a corner, and the rest's own."""
    rng = random.Random(7)
    for n, d, c, rest_scale in product((2, 3), (0, 2), (1, None), (Q(0), Q(1, 50))):
        columns = c or n
        v = some(rng, n, n)
        left = inverse(v)
        of = leaf(
            m,
            some(rng, n, columns),
            [some(rng, n, columns, Q(1, 4)) for _ in range(d)],
            tuple(tuple(abs(x) for x in row) for row in some(rng, n, columns, rest_scale)),
        )
        fv, fl, rest = numbers(v), numbers(left) if columns > 1 else np.eye(1), numbers(of.rest)
        parts = [numbers(of.centre), *map(numbers, of.slopes)]
        at_corners = [
            fv @ (parts[0] + sum((t * g for t, g in zip(ts, parts[1:], strict=True)), 0 * parts[0])) @ fl
            for ts in product((-1, 1), repeat=d)
        ]
        samples = [
            fv
            @ (
                parts[0]
                + sum((rng.uniform(-1, 1) * g for g in parts[1:]), 0 * parts[0])
                + rest * np.array([[rng.choice((-1, 1)) for _ in range(columns)] for _ in range(n)])
            )
            @ fl
            for _ in range(40)
        ]
        wide = np.abs(fv) @ rest @ np.abs(fl)
        for kind, size in (("polytope", np.inf), ("ellipsoid", 2)):
            found = float(m.norm_over(norm(m, kind, v), of))
            assert max(np.linalg.norm(b, size) for b in samples) <= found * (1 + 1e-9)
            most = max(np.linalg.norm(b, size) for b in at_corners)
            assert (
                most - 1e-9
                <= found
                <= (most + (np.linalg.norm(wide) if size == 2 else np.linalg.norm(wide, size))) * (1 + 1e-8)
            )
            if size == np.inf and not rest_scale:
                assert abs(found - most) < 1e-9 * most
            near = Q(found)
            assert m.norm_at_most(norm(m, kind, v), of, near * (1 + Q(1, 10**8))) and not m.norm_at_most(
                norm(m, kind, v), of, near * (1 - Q(1, 10**8))
            )
        low, high = map(numbers, ends(m, v, left if columns > 1 else None, of))
        assert (np.max(samples, axis=0) <= high + 1e-12).all() and (low - 1e-12 <= np.min(samples, axis=0)).all()
        assert np.allclose(high, np.max(at_corners, axis=0) + wide, atol=1e-12)
        assert np.allclose(low, np.min(at_corners, axis=0) - wide, atol=1e-12)


@question
def metrics_against_samples(m: Any) -> None:
    rng = random.Random(11)
    for n in (2, 3, 6):
        v = some(rng, n, n)
        fv, fl = numbers(v), numbers(inverse(v))
        most = [Q(rng.randrange(1, 100), 50) for _ in range(n)]
        signs = [np.array([s * float(x) for s, x in zip(z, most, strict=True)]) for z in product((-1, 1), repeat=n)]
        for kind, size, dual in (("polytope", np.inf, 1), ("ellipsoid", 2, 2)):
            metric = norm(m, kind, v)
            assert np.isclose(float(metric.length(most)), max(np.linalg.norm(fv @ e, size) for e in signs), rtol=1e-12)
            for s in range(n):
                assert np.isclose(float(metric.support(s)), np.linalg.norm(fl[s], dual), rtol=1e-12)
                assert np.allclose([float(x) for x in metric.unit(s)], np.linalg.norm(fv[:, s], size), rtol=1e-12)
            e = [Q(rng.randrange(-99, 100), 7) for _ in range(n)]
            true = np.linalg.norm(fv @ [float(x) for x in e], size)
            assert np.allclose([float(metric.least(e)), float(metric.most(e))], true, rtol=1e-12)
            assert metric.least(e) <= metric.most(e) <= metric.length([abs(x) for x in e])


def test_matrices() -> None:
    all_hold(CASES)
