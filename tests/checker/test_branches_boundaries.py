"""Jacobians branch by branch where corners are met: at exact equality, and against differences (proofs/matrix.md (8))."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction as Q
from typing import Any

import numpy as np
import pytest
from scipy.optimize import linprog

import ultibound.checker
from tests.checker.questions import all_hold
from tests.checker.test_boundaries import Case, Entries, Question, but, sealed
from tests.checker.test_several_boundaries import Lines, claim, derivation, hair
from tests.several_campaign import case
from ultibound.checker.derive import Domain
from ultibound.checker.jacobians import Joined, Table
from ultibound.checker.matrices import Leaf, Metric

CASES: dict[str, Question] = {}


def accept(name: str, entries: Entries) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "valid")


def reject(name: str, entries: Entries, place: str, reason: str) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "invalid", place, reason)


# tables of numbers: one line each reads better
# fmt: off

# s/4 [[1, -1], [-1, 1]], s the sign of x - y: in x + y and x - y it is [[0, 0], [0, s/2]]; each entry on its own, twice as much

ROWS, INVERSE = [["1", "1"], ["1", "-1"]], [["1/2", "1/2"], ["1/2", "-1/2"]]
STEP, WIDE = ("abs(x - y)/4 + p", "-abs(x - y)/4"), (("-1/8", "5/8"), ("-1/2", "0"))
SLOPES = "slopes: a leaf is not shown to stay within the norm"


def folded(step: Sequence[str] = STEP, images: Any = WIDE, norm: str = "1/2") -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 ball, 5 6 images, 7 invariant, 8 9 matrices, 10 pair, 11 bound."""
    d = Lines(claim(*step))
    d.metric("polytope", ROWS, INVERSE)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.theorem("smaller-ball", "ball", [1, 2, 3], radius="1/2")
    for s, (low, high) in zip("xy", images, strict=True):
        d.range(f"image[{s}]", low, high)
    d.theorem("invariant-region", "invariant", [1, 2, 3, 5, 6])
    d.matrix("slopes", norm, [7], ["b"])
    d.matrix("misses", "1/8", [7], ["b"])
    d.theorem("slope", "slope", [8, 9], gain=norm, residual="1/8")
    d.theorem("ultimate-bound", "bound[slope]", [7, 10], bound=str(Q(1, 8) / (1 - Q(norm))))
    return d


def by_hand() -> None:
    metric = {"kind": "polytope", "matrix": ROWS}
    for name, d, tight in (
        ("folded", folded(), True),
        ("folded by the larger", folded(("max(x - y, y - x)/4 + p", "-max(x - y, y - x)/4"), (("-5/8", "5/8"), ("-1/2", "1/2"))), True),
        ("folded three times", folded(("abs(x - y)/4 + p", "-max(abs(x - y), abs(y - x))/4")), False),
    ):
        good = d.found("region", [("settles", "proved")], metric)
        accept(name, good)
        if not tight:
            continue
        reject(f"{name}, less", but(good, "proof 7 concludes norm", hair("1/2", -1)), "proof line 8", SLOPES)
        reject(f"{name}, in one leaf", but(good, "proof 7 witness trees", ["c"]), "proof line 8", SLOPES)
        reject(f"{name}, direct", but(good, "proof 7 witness trees", ["d"]), "proof line 8", SLOPES)
        reject(f"{name}, by what is no form", but(good, "proof 7 witness trees", ["a"]), "proof line 8", "unknown form 'a'")
        # a cut along x leaves a corner on both sides
        accept(f"{name}, cut", but(good, "proof 7 witness trees", ["0 b b"]))
        reject(f"{name}, cut and one left whole", but(good, "proof 7 witness trees", ["0 b c"]), "proof line 8", SLOPES)
    # corners that are not seen to be the same are chosen apart
    other = folded(("max(x - y, y - x)/8 + p", "min(x - y, y - x)/8"), (("-3/8", "3/8"), ("-1/4", "1/4")), "1/4")
    other = other.found("region", [("settles", "proved")], metric)
    accept("folded apart", other)
    reject("folded apart, less", but(other, "proof 7 concludes norm", hair("1/4", -1)), "proof line 8", SLOPES)
    # four corners have sixteen choices, which are too many: one leaf stands
    four = folded(("abs(x - y)/16 + abs(x - y + 1/8)/16 + abs(x - y + 1/9)/16 + p", "-abs(x - y)/16 - abs(x - y + 1/8)/16 - abs(x - y + 1/9)/16"), (("-1/8", "3/4"), ("-3/4", "0")), "3/8")
    for more, norm in (("", "3/8"), (" + abs(x - y + 1/7)/16", "1")):
        text = "abs(x - y)/16 + abs(x - y + 1/8)/16 + abs(x - y + 1/9)/16" + more
        some = but(four.found("region", [("settles", "proved")], metric), "claim text", claim(f"{text} + p", f"-({text})"))
        if not more:
            some = but(some, "proof 8 concludes norm", "37/72", "proof 9 concludes residual", "37/72", "proof 10 concludes bound", "37/45")
            reject("eight choices, less", but(some, "proof 7 concludes norm", hair(norm, -1)), "proof line 8", SLOPES)
        else:
            reject("sixteen choices", some, "proof line 8", SLOPES)


# fmt: on
by_hand()


def test_branches_boundaries() -> None:
    all_hold(CASES)


def within(leaf: Leaf, m: Any, room: float) -> bool:
    """Whether a matrix is in a leaf, for one t in all of its entries at once: proofs/matrix.md (2)."""
    centre, rest = (np.array(x, dtype=float).ravel() for x in (leaf.centre, leaf.rest))
    off, slopes = m.ravel() - centre, [np.array(g, dtype=float).ravel() for g in leaf.slopes]
    most = rest + room
    if np.all(np.abs(off) <= most) or not slopes:
        return bool(np.all(np.abs(off) <= most))
    a = np.stack(slopes, axis=1)
    found = linprog(
        np.zeros(len(slopes)), A_ub=np.vstack([a, -a]), b_ub=np.concatenate([off + most, most - off]), bounds=(-1, 1)
    )
    return bool(found.status == 0)


@pytest.mark.parametrize("seed", [2, 10])
def test_jacobians_lie_in_the_leaves_of_some_choice(seed: int) -> None:
    """Differences of claims with abs, min and max, clip and a library at random points, against leaves of random boxes.

    With the misses under the same values, all entries at once: in one leaf, at one place of its variables."""
    c = case(seed)
    d = derivation(ultibound.checker, c.text, c.data)
    n, rng = len(c.states), np.random.default_rng(seed)
    one = tuple(tuple(Q(int(i == j)) for j in range(n)) for i in range(n))
    domain = Domain(False, Q(0), (Q(-1), Q(1)), targets=((Q(-1), Q(1)),) * n, metric=Metric("box", one, one))
    several = 0
    for kind in (Table, Joined):
        table = kind(d, "slopes", domain, 60, None)
        names = [v.name for v in table.variables]
        for _ in range(12):
            cells = [v.cells[rng.integers(len(v.cells))] for v in table.variables]
            box = []
            for (low, high), v in zip(cells, table.variables, strict=True):
                a, b = sorted(Q(int(x), 1000) for x in rng.integers(0, 1001, 2))
                box.append(
                    (low, high) if v.listed or rng.random() < 0.5 else (low + a * (high - low), low + b * (high - low))
                )
            leaves, (whole,) = table.branches(box), [table.leaf(box, "c")]
            several += len(leaves) > 1
            for _ in range(10):
                at = {
                    k: float(low) + rng.random() * float(high - low) for k, (low, high) in zip(names, box, strict=True)
                }
                value = {k: np.array(at.get(k, 0.45 if k == "T" else 0.0)) for k in c.drawn}
                x, aim = np.array([at.get(s, 0.0) for s in c.states]), c.aim(value)
                sides = [
                    np.column_stack([(c.step(x + h * u, value) - c.step(x, value)) / h for u in np.eye(n)])
                    for h in (1e-7, -1e-7)
                ]
                if not np.allclose(*sides, atol=1e-5):
                    continue
                j = np.column_stack([sides[0], c.step(aim, value) - aim]) if kind is Joined else sides[0]
                assert any(within(leaf, j, 1e-4) for leaf in leaves) and within(whole, j, 1e-4)
    assert several > 3
