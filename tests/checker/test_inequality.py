"""The matrix inequality of a leaf: by hand near equality, against samples and the eigenvalue it stands for.

As in `test_matrices.py`, every question takes the checker's package.
"""

from __future__ import annotations

import importlib
import random
from collections.abc import Callable, Sequence
from fractions import Fraction as Q
from itertools import product
from typing import Any

import numpy as np

from tests.checker.questions import all_hold
from tests.checker.test_matrices import diagonal, leaf, matrix, norm, nothing

Question = Callable[[Any, Any], None]
CASES: dict[str, Callable[[Any], None]] = {}
NEAR = Q(1, 10**20)
ONES = (Q(1), Q(1))


def question(of_modules: Question) -> Question:
    """A question to `inequality`, and to `matrices`, of a package."""

    def to_package(package: Any) -> None:
        of_modules(*(importlib.import_module(f"{package.__name__}.{x}") for x in ("inequality", "matrices")))

    CASES[of_modules.__name__] = to_package
    return of_modules


def least(
    i: Any, before: Any, after: Any, of: Any, xi: Sequence[Q], eta: Sequence[Q], bound: Q, near: Q = NEAR
) -> None:
    """Shown for a bound and a little more, and for nothing less."""
    assert i.Inequality(before, after, tuple(xi), tuple(eta), bound * (1 + near)).holds(of)
    assert not i.Inequality(before, after, tuple(xi), tuple(eta), bound * (1 - near)).holds(of)


@question
def definite_by_hand(i: Any, m: Any) -> None:
    """Upper triangles; a complement of n rows is less by n units."""
    for rows, found in (
        ([], True), ([[1]], True), ([[0]], False), ([[-1]], False), ([[0, 0], [1]], False),
        ([[2, 1], [2]], False), ([[2, 1], [3]], True), ([[2, -1], [3]], True), ([[2, 2], [3]], False), ([[2, 2], [4]], True), ([[2, -2], [4]], True),
        ([[4, 2, 0], [5, 0], [3]], False), ([[4, 2, 0], [5, 0], [4]], True), ([[4, 0, 2], [3, 0], [4]], False), ([[4, 0, 2], [3, 0], [5]], True),
        ([[1, 0, 0], [5, 2], [5]], False), ([[1, 0, 0], [5, 1], [5]], True), ([[1, 0, 0], [5, -1], [5]], True), ([[3, 1, 1], [9, 2], [9]], True),
    ):  # fmt: skip
        assert i.definite([list(row) for row in rows]) is found, rows
    rng, seen = random.Random(3), 0
    for _ in range(60):
        n = rng.randrange(1, 6)
        b = [[rng.randrange(-30, 31) for _ in range(n)] for _ in range(n)]
        a = [[sum(x * y for x, y in zip(r, s, strict=True)) for s in b] for r in b]
        for k in range(n):
            a[k][k] += rng.choice((-40, 0, 60))
        triangle = [row[k:] for k, row in enumerate(a)]
        if i.definite(triangle):
            seen += 1
            assert m.definite(a) == 1
        if min(np.linalg.eigvalsh(np.array(a, float))) > n * n * 4:
            assert i.definite(triangle)
    assert seen > 20


@question
def without_a_rest(i: Any, m: Any) -> None:
    one, round_ = norm(m, "ellipsoid", diagonal(1, 1)), norm(m, "ellipsoid", matrix([3, 0], [4, 2]))
    for scales in (ONES, (Q(1, 3), Q(7))):
        least(i, one, one, leaf(m, diagonal(Q(1, 2), -Q(2, 3))), ONES, scales, Q(2, 3))
        least(i, one, one, leaf(m, matrix([3, 0], [4, 0])), scales, ONES, Q(5))
        least(i, round_, round_, leaf(m, matrix([0, 0], [1, 0])), ONES, scales, Q(2, 3))
        least(i, None, one, leaf(m, matrix([3], [4])), (Q(2),), scales, Q(5))
        least(i, None, round_, leaf(m, matrix([1], [-2])), (Q(1),), scales, Q(3))
        # from one norm to the other: V A L of [[0, 1], [0, 0]]
        least(i, one, round_, leaf(m, matrix([0, 1], [0, 0])), ONES, scales, Q(5))
        least(i, round_, one, leaf(m, matrix([0, 2], [0, 0])), ONES, scales, Q(5, 3))
    assert not i.Inequality(one, one, ONES, ONES, Q(-1)).holds(leaf(m, diagonal(1, 1)))


@question
def a_rest_by_its_scales(i: Any, m: Any) -> None:
    one, four = norm(m, "ellipsoid", matrix([1])), norm(m, "ellipsoid", matrix([4]))
    rest = leaf(m, nothing(1, 1), [], matrix([1]))
    for xi, eta, bound in ((1, 1, 1), (2, 1, 2), (1, 2, 2), (2, 2, 1), (3, 2, Q(3, 2))):
        least(i, one, one, rest, (Q(xi),), (Q(eta),), Q(bound))
    for eta, bound in ((16, 1), (8, 2), (32, 2)):  # P = 16 and Q = 1/16: 16 r >= η, r/16 >= 1/η
        least(i, four, four, rest, (Q(1),), (Q(eta),), Q(bound))
    two = norm(m, "ellipsoid", diagonal(1, 1))
    # rows and columns told apart: b = (η_1 + 2 η_2, 4 η_1), a = (1 + 4, 2) / η
    wide = leaf(m, nothing(2, 2), [], matrix([1, 4], [2, 0]))
    least(i, two, two, wide, ONES, ONES, Q(5))
    least(i, two, two, wide, ONES, (Q(1, 2), Q(1, 2)), Q(10))
    least(i, two, two, wide, (Q(1), Q(2)), (Q(3), Q(4)), Q(11))
    least(i, two, two, wide, (Q(4), Q(2)), (Q(3), Q(2)), Q(6))
    least(i, None, two, leaf(m, nothing(2, 1), [], matrix([3], [4])), (Q(5),), (Q(3), Q(4)), Q(5))
    # beside a matrix: (r - 1)² = 2²
    least(i, two, two, leaf(m, diagonal(2, 0), [], diagonal(1, 0)), ONES, ONES, Q(3))
    # a zero bound is not shown, of nothing either
    assert not i.Inequality(two, two, ONES, ONES, Q(0)).holds(leaf(m, nothing(2, 2)))


@question
def slopes_told_apart(i: Any, m: Any) -> None:
    one = norm(m, "ellipsoid", diagonal(1, 1))
    turn = matrix([Q(3, 5), Q(4, 5)], [Q(4, 5), -Q(3, 5)])  # of norm 1; its magnitudes of 7/5

    def times(x: Q) -> Any:
        return tuple(tuple(x * y for y in row) for row in turn)

    least(i, one, one, leaf(m, nothing(2, 2), [turn]), ONES, ONES, Q(1))
    least(i, one, one, leaf(m, nothing(2, 2), [], turn_of(turn)), ONES, ONES, Q(7, 5))
    least(i, one, one, leaf(m, diagonal(2, 2), [diagonal(1, -1), diagonal(Q(1, 2), Q(1, 2))]), ONES, ONES, Q(7, 2))
    least(i, one, one, leaf(m, turn, [turn, times(Q(-1, 2))], diagonal(Q(1, 4), Q(1, 4))), ONES, ONES, Q(11, 4))
    # of nine the least is a rest, wherever it stands; of what is 0 nothing is
    eight, small = [times(Q(1))] * 8, times(Q(1, 10))
    for several in ([small, *eight], [*eight, small], [nothing(2, 2), *eight[:5], small, *eight[5:]]):
        least(i, one, one, leaf(m, nothing(2, 2), several), ONES, ONES, 8 + Q(7, 50))
    # by the scales: what counts least there, not what is least
    wide = i.Inequality(one, one, ONES, (Q(1), Q(9)), Q(30))
    assert wide.weight([[0, 0], [1, -1]]) == 18 and wide.weight([[2, 2], [0, 0]]) == 4
    assert (
        i.Inequality(one, one, (Q(1), Q(1, 2)), (Q(1, 3), Q(1)), Q(1)).weight([[1, -1], [0, 2]])
        == 2 * (6 + 3) + 6 * 2 * 3
    )


def turn_of(turn: Any) -> Any:
    return tuple(tuple(abs(x) for x in row) for row in turn)


@question
def roundings_are_allowed_for(i: Any, m: Any) -> None:
    """In whole units of 2^-80: what every rounded matrix loses is given back to the rest, a diagonal is rounded up."""
    one, unit = norm(m, "ellipsoid", matrix([1])), Q(1, 2**80)

    def shown(of: Any, units: int, xi: Q = Q(1), eta: Q = Q(1)) -> bool:
        return bool(i.Inequality(one, one, (xi,), (eta,), units * unit).holds(of))

    # no rest, no slope: 2 given back, 1 for each block, 1 for the complement, and what is left is positive
    for n in (0, 1, 3, 8):
        still = leaf(m, nothing(1, 1), [nothing(1, 1)] * n)
        assert shown(still, 5 + n) and not shown(still, 4 + n), n
    # each is rounded down to 0, and is nearly a unit: longer together than n + 1 units
    almost = matrix([unit * (1 - Q(1, 2**20))])
    for n in (0, 1, 3, 8):
        long = leaf(m, almost, [almost] * n, almost)
        assert shown(long, 5 + n) and not any(shown(long, k) for k in range(5 + n)), n
    # a rest of 1 + 2 units and a = 9/2, then b = 9/2: up to 5; the one that comes first has no complement
    whole = leaf(m, nothing(1, 1), [], matrix([unit]))
    assert shown(whole, 8, Q(3), Q(2)) and not shown(whole, 7, Q(3), Q(2))
    assert shown(whole, 7, Q(2), Q(3)) and not shown(whole, 6, Q(2), Q(3))


@question
def what_does_not_fit(i: Any, m: Any) -> None:
    one = norm(m, "ellipsoid", diagonal(1, 1))
    good = i.Inequality(one, one, ONES, ONES, Q(2))
    assert good.holds(leaf(m, diagonal(1, 1)))
    for of in (
        leaf(m, matrix([1], [1])),
        leaf(m, diagonal(1, 1, 1)),
        leaf(m, matrix([1, 0, 0], [0, 1, 0])),
        leaf(m, matrix([1, 0])),
    ):
        refused(m, "a vector or a square matrix", lambda of=of: good.holds(of))
    vector = i.Inequality(None, one, ONES[:1], ONES, Q(2))
    refused(m, "a vector or a square matrix", lambda: vector.holds(leaf(m, diagonal(1, 1))))
    refused(m, "the rest is a magnitude", lambda: good.holds(leaf(m, diagonal(1, 1), [], diagonal(1, Q(-1, 9)))))
    for before, xi, eta in ((one, ONES[:1], ONES), (one, ONES, ONES[:1]), (one, (*ONES, Q(1)), ONES), (None, ONES, ONES), (None, ONES[:1], ONES[:1]),
                            (one, (Q(0), Q(1)), ONES), (one, ONES, (Q(1), Q(0))), (one, (Q(1), Q(-1)), ONES), (None, (Q(-1),), ONES)):  # fmt: skip
        refused(m, "positive numbers", lambda args=(before, one, xi, eta): i.Inequality(*args, Q(2)))


def refused(m: Any, why: str, do: Callable[[], Any]) -> None:
    try:
        do()
    except m.Rejected as found:
        assert why in str(found), str(found)
    else:
        raise AssertionError(f"accepted: {why}")


@question
def against_samples_and_the_eigenvalue(i: Any, m: Any) -> None:
    """Nothing in the leaf is longer than a bound that holds, and one just above the eigenvalue does."""
    rng = random.Random(7)

    def some(rows: int, columns: int, size: int = 40) -> Any:
        return matrix(*([Q(rng.randrange(-size, size + 1), 37) for _ in range(columns)] for _ in range(rows)))

    for n, c, moving in ((1, 1, 1), (2, 2, 2), (2, 1, 3), (3, 3, 2), (6, 6, 1)):
        before, after = (
            norm(
                m,
                "ellipsoid",
                tuple(tuple(x + 3 * (i == j) for j, x in enumerate(row)) for i, row in enumerate(some(n, n))),
            )
            for _ in range(2)
        )
        xi, eta = ([Q(rng.randrange(1, 60), 7) for _ in range(k)] for k in (c, n))
        of = leaf(m, some(n, c), [some(n, c, 6) for _ in range(moving)], turn_of(some(n, c, 4)))
        v, left = (np.array(x, float) for x in (after.rows, before.inverse if c > 1 or n == 1 else ((1,),)))
        centre, rest, *slopes = (np.array(x, float) for x in (of.centre, of.rest, *of.slopes))
        x, y = np.array(xi, float), np.array(eta, float)
        a, b = rest @ x / y, rest.T @ y / x
        blocks = [
            np.block([[left.T @ np.diag(b) @ left, (v @ at @ left).T], [v @ at @ left, v @ np.diag(a) @ v.T]])
            for t in product((-1, 1), repeat=moving)
            for at in [centre + sum(s * g for s, g in zip(t, slopes, strict=True))]
        ]
        value = max(np.linalg.eigvalsh(block)[-1] for block in blocks)
        least(i, before if c > 1 or n == 1 else None, after, of, xi, eta, Q(float(value)), Q(1, 10**9))
        for _ in range(30):
            t, d = ([rng.choice((-1, 1, rng.uniform(-1, 1))) for _ in range(k)] for k in (moving, n * c))
            at = centre + sum(s * g for s, g in zip(t, slopes, strict=True)) + np.reshape(d, (n, c)) * rest
            assert np.linalg.norm(v @ at @ left, 2) <= value * (1 + 1e-12)


def test_inequality() -> None:
    all_hold(CASES)
