"""Norms of several states and the matrices they bound, in exact whole numbers (proofs/matrix.md).

Nothing is rounded but square roots, outward. What a norm bounds is a `Leaf`: a matrix (or a vector) over a box, an
affine family and a rest. Shapes that do not fit and numbers that are too long are refused, whoever hands them over.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from math import isqrt, lcm
from operator import mul

from .numerals import Rejected
from .vertices import Whole, vertices

Matrix = tuple[tuple[Fraction, ...], ...]

KINDS = ("box", "polytope", "ellipsoid")
MOST_STATES = 6
MOST_ROWS = 64
MOST_SLOPES = 8  # whose signs are told apart; further ones count as rest
LONGEST = 4000  # bits of a matrix's whole numbers, and of the denominator they share
ROOT_BITS = 72  # of a rounded square root
ENTRY_BITS = 160  # of an entry, rounded outward
LONG, SHORT = 200, 80  # bits of a denominator that are too many for determinants; of the largest number left then


@dataclass(frozen=True)
class Metric:
    """‖e‖ = |V e|: the largest magnitude (box, polytope) or the Euclidean length (ellipsoid). `inverse` V = 1.

    Comes from `metric`, which has checked that. A state is given by its place.
    """

    kind: str
    rows: Matrix  # V, m x n
    inverse: Matrix  # L, n x m
    own: bool = True  # whether matrices are seen from the ball of this norm, not from that of another

    @cached_property
    def frame(self) -> Frame:
        return framed(self.rows, tuple(zip(*self.tips, strict=True)) if self.many else self.inverse)

    @property
    def many(self) -> bool:
        """Whether the ball has more sides than a box in a basis, and is known by its vertices."""
        return self.own and len(self.rows) > len(self.inverse)

    @cached_property
    def tips(self) -> Matrix:
        """Vertices of ‖e‖ <= 1, one of each opposite two: proofs/matrix.md (7). Raises Rejected."""
        (v, unit), n = whole(self.rows), len(self.inverse)
        found = set[tuple[Fraction, ...]]()
        for *q, below in vertices(v, [-1] * len(v), [1] * len(v), n):
            tip = tuple(Fraction(x * unit, below) for x in q)
            found.add(max(tip, tuple(-x for x in tip)))
        return tuple(sorted(found))

    def least(self, e: Sequence[Fraction]) -> Fraction:
        """Lower bound of ‖e‖ at a point: exact, or a root rounded down."""
        return self._ends([dot(row, e) for row in self.rows])[0]

    def most(self, e: Sequence[Fraction]) -> Fraction:
        """Upper bound of ‖e‖ at a point: exact, or a root rounded up."""
        return self._ends([dot(row, e) for row in self.rows])[1]

    def unit(self, s: int) -> tuple[Fraction, Fraction]:
        """Lower and upper bound of ‖u_s‖, u_s the unit vector of state s: proofs/matrix.md (1c)."""
        return self._ends([row[s] for row in self.rows])

    def support(self, s: int) -> Fraction:
        """Upper bound of |e_s| over ‖e‖ <= 1, the least one but for roots: proofs/matrix.md (1b), (7)."""
        if self.kind == "ellipsoid":
            return root(dot(self.inverse[s], self.inverse[s]))[1]
        if self.many:
            return max(abs(q[s]) for q in self.tips)
        return sum(map(abs, self.inverse[s]), Fraction(0))

    def length(self, most: Sequence[Fraction]) -> Fraction:
        """Upper bound of ‖e‖ over all |e_s| <= most[s]: it is largest at a corner, proofs/matrix.md (1d)."""
        columns, unit = whole(
            [[row[s] * x for row in self.rows] for s, x in zip(range(len(self.inverse)), most, strict=True)]
        )
        images = corners(columns[0], columns[1:])  # of opposite corners one will do
        if self.kind == "ellipsoid":
            return root(Fraction(max(sum(map(mul, x, x)) for x in images), unit * unit))[1]
        return Fraction(max(max(map(abs, x)) for x in images), unit)

    def _ends(self, image: Sequence[Fraction]) -> tuple[Fraction, Fraction]:
        if self.kind == "ellipsoid":
            return root(dot(image, image))
        return (max(map(abs, image)),) * 2


def metric(kind: str, rows: Matrix, inverse: Matrix, states: int) -> Metric:
    """The norm of so many states, its matrices checked: proofs/matrix.md (1). Raises Rejected."""
    if kind not in KINDS:
        raise Rejected(f"metric: the kind is one of {', '.join(KINDS)}")
    if not 1 <= states <= MOST_STATES:
        raise Rejected(f"metric: 1 to {MOST_STATES} states")
    m = len(rows)
    if not 0 < m <= MOST_ROWS:
        raise Rejected(f"metric: 1 to {MOST_ROWS} rows")
    if any(len(row) != states for row in rows):
        raise Rejected("metric: a row has one number for each state")
    if len(inverse) != states or any(len(row) != m for row in inverse):
        raise Rejected("metric: the inverse has one row for each state, one column for each row")
    if kind != "polytope" and m != states:
        raise Rejected(f"metric: the {kind} has a square matrix")
    (v, v_unit), (left, left_unit) = whole(rows), whole(inverse)
    if kind == "box" and not all(x > 0 if i == j else x == 0 for i, row in enumerate(v) for j, x in enumerate(row)):
        raise Rejected("metric: a box has positive weights, and nothing beside them")
    one = v_unit * left_unit
    if times(left, v) != [[one if i == j else 0 for j in range(states)] for i in range(states)]:
        raise Rejected("metric: the inverse times the matrix is not 1")
    return Metric(kind, rows, inverse)


@dataclass(frozen=True)
class Leaf:
    """A matrix over a box: A = centre + sum_l t_l slopes[l] + D, t in [-1, 1]^d, |D| <= rest entry by entry.

    All n x c: c = n for a Jacobian, c = 1 for a vector.
    """

    centre: Matrix
    slopes: tuple[Matrix, ...]
    rest: Matrix

    @cached_property
    def stack(self) -> tuple[Whole, int]:
        """Centre, rest and slopes, one below the other. Raises Rejected."""
        n, c = len(self.centre), len(self.centre[0]) if self.centre else 0
        parts = self.centre, self.rest, *self.slopes
        if any(len(part) != n or any(len(row) != c for row in part) for part in parts):
            raise Rejected("matrix: centre, slopes and rest have one row for each state, and equally many columns")
        if any(x < 0 for row in self.rest for x in row):
            raise Rejected("matrix: the rest is a magnitude, and not negative")
        return whole([row for part in parts for row in part])


@dataclass(frozen=True)
class Frame:
    """V and L, each in whole numbers over its denominator."""

    rows: tuple[Whole, int]
    inverse: tuple[Whole, int]


def framed(rows: Matrix, inverse: Matrix) -> Frame:
    """Raises Rejected where the numbers are too long."""
    return Frame(whole(rows), whole(inverse))


@dataclass(frozen=True)
class Image:
    """V A L over a leaf, a whole number of units: centre + sum_l t_l slopes[l] + D, |D| <= rest; row by row."""

    centre: Whole
    slopes: list[Whole]
    rest: Whole
    unit: int  # how many make 1

    def shortened(self) -> Image:
        """One that contains it, of shorter numbers where these are long: proofs/matrix.md, Numbers."""
        if self.unit.bit_length() <= LONG:
            return self
        most = max(map(abs, (*flat(self.centre), *(x for g in self.slopes for x in flat(g)), *flat(self.rest))))
        bits = max(SHORT + self.unit.bit_length() - most.bit_length(), 0)
        centre, *slopes = (
            [[(x << bits) // self.unit for x in row] for row in part] for part in (self.centre, *self.slopes)
        )
        # each of these is less than 1 below what it stands for
        rest = [[-(-(x << bits) // self.unit) + 1 + len(slopes) for x in row] for row in self.rest]
        return Image(centre, slopes, rest, 1 << bits)

    def rows(self) -> Iterator[int]:
        """Upper bounds of the rows' sums of magnitudes, in units: proofs/matrix.md (2)."""
        for i, row in enumerate(self.centre):
            moving = [g[i] for g in self.slopes if any(g[i])]
            yield max(sum(map(abs, x)) for x in corners(row, moving)) + sum(self.rest[i])

    def each(self) -> Iterator[int]:
        """Upper bounds of the magnitudes of all entries, in units: proofs/matrix.md (7)."""
        for i, (row, rest) in enumerate(zip(self.centre, self.rest, strict=True)):
            for j, (x, y) in enumerate(zip(row, rest, strict=True)):
                yield abs(x) + y + sum(abs(g[i][j]) for g in self.slopes)

    def most(self, metric: Metric) -> int:
        """Upper bound of what the norm of largest magnitudes of every matrix is, in units."""
        return max(self.each() if metric.many else self.rows())

    def grams(self) -> Iterator[Whole]:
        """B^T B in units squared, for B the affine part at every corner: proofs/matrix.md (2)."""
        for b in corners(flat(self.centre), [flat(g) for g in self.slopes]):
            yield gram(b, len(self.centre[0]))

    def spread(self) -> Fraction:
        """Upper bound of the Euclidean norm of every D: proofs/matrix.md (2)."""
        return root(Fraction(largest(gram(flat(self.rest), len(self.rest[0]))), self.unit**2))[1]


def norm_at_most(metric: Metric, leaf: Leaf, bound: Fraction) -> bool:
    """Whether ‖V A L‖ <= bound is shown for every matrix of a leaf, ‖V a‖ <= bound for every vector of one.

    proofs/matrix.md (2), (4); the induced norm of A by (1e), or by the ball's vertices (7). Raises Rejected.
    """
    found = seen(metric, leaf)
    if metric.kind != "ellipsoid":
        return found.most(metric) <= bound * found.unit
    room = bound - found.spread()
    return all(within(g, found.unit, room) for g in found.grams())


def norm_over(
    metric: Metric, leaf: Leaf, start: Fraction = Fraction(0), relative: Fraction = Fraction(1, 10**9)
) -> Fraction:
    """The least bound from `start` on for which `norm_at_most` holds; with an ellipsoid within `relative` > 0 of it.

    `start` itself if it will do, so that one call a leaf, each from what the last one gave, bounds all of them.
    """
    found = seen(metric, leaf)
    if metric.kind != "ellipsoid":
        return max(start, Fraction(found.most(metric), found.unit))
    spread = found.spread()
    reached = max(start - spread, Fraction(0))
    for g in found.grams():
        if not within(g, found.unit, reached):
            reached = grown(g, found.unit, relative)
    return reached + spread


def entries(frame: Frame, leaf: Leaf, square: bool) -> tuple[Whole, Whole]:
    """Lower and upper bounds of (V A L)_ij, or of (V A)_ij, in units of 2^-ENTRY_BITS: proofs/matrix.md (6).

    The closest ones, rounded outward. Raises Rejected.
    """
    found = image(frame, leaf, square)
    half, unit = found.rest, found.unit
    for part in found.slopes:
        half = added(half, part)
    pairs = [list(zip(*rows, strict=True)) for rows in zip(found.centre, half, strict=True)]
    low = [[(x - y << ENTRY_BITS) // unit for x, y in row] for row in pairs]
    return low, [[-((-x - y << ENTRY_BITS) // unit) for x, y in row] for row in pairs]


def vanishes(beside: Matrix, rows: Matrix) -> bool:
    """Whether Z V = 0: proofs/matrix.md (6)."""
    return not any(map(any, times(whole(beside)[0], whole(rows)[0])))


def comparison(k: Matrix, residual: Sequence[Fraction], p: Sequence[Fraction], b: Sequence[Fraction]) -> bool:
    """Whether K >= 0, residual >= 0, p > 0, K p < p and K b + residual <= b: proofs/matrix.md (5).

    Then the spectral radius of K is below 1, and b >= (1 - K)^-1 residual >= 0.
    """
    n = len(k)
    if any(len(x) != n for x in (*k, residual, p, b)):
        return False
    if any(x < 0 for row in (*k, residual) for x in row):
        return False
    for row, e, x, y in zip(k, residual, p, b, strict=True):
        if not 0 <= sum(map(mul, row, p)) < x:  # in every row, so p > 0
            return False
        if not sum(map(mul, row, b)) + e <= y:
            return False
    return True


def definite(m: Sequence[Sequence[int]]) -> int:
    """Of a symmetric matrix: 1 positive definite, 0 positive semidefinite but singular, -1 neither (or not symmetric).

    Fraction-free elimination: every division is exact. proofs/matrix.md (4).
    """
    rows = [list(row) for row in m]
    if [list(column) for column in zip(*rows, strict=False)] != rows:
        return -1
    found, before = 1, 1
    while rows:
        (pivot, *across), *below = rows
        if pivot > 0:
            rows = [
                [(pivot * x - first * y) // before for x, y in zip(others, across, strict=True)]
                for first, *others in below
            ]
            before = pivot
        elif pivot == 0 and not any(across):
            rows = [others for _, *others in below]
            found = 0
        else:
            return -1
    return found


def seen(metric: Metric, leaf: Leaf) -> Image:
    """A leaf in the coordinates of a norm: V A L for matrices (V A Q by vertices), V a for vectors."""
    columns = len(leaf.centre[0]) if leaf.centre else 0
    if columns not in (1, len(metric.inverse)):
        raise Rejected("matrix: a vector or a square matrix is bounded")
    found = image(metric.frame, leaf, columns > 1)
    return found.shortened() if metric.kind == "ellipsoid" else found


def image(frame: Frame, leaf: Leaf, square: bool) -> Image:
    """V A L, or V A, over one denominator: proofs/matrix.md (2), (6).

    Slopes that are 0 go; of too many, the least are rest.
    """
    (v, unit), (left, below), (stack, factor) = frame.rows, frame.inverse, leaf.stack
    n, c = len(v[0]), len(leaf.centre[0]) if leaf.centre else 0
    if len(leaf.centre) != n:
        raise Rejected("matrix: centre, slopes and rest have one row for each state, and equally many columns")
    if square and c != len(left):
        raise Rejected("matrix: as many columns as the inverse has rows")
    unit *= factor
    centre, rest, *slopes = (times(v, stack[k : k + n]) for k in range(0, len(stack), n))
    rest = times(magnitudes(v), stack[n : 2 * n])
    if square:
        unit *= below
        centre, rest = times(centre, left), times(rest, magnitudes(left))
        slopes = [times(g, left) for g in slopes]
    slopes = sorted((g for g in slopes if effect(g)), key=effect, reverse=True)
    for g in slopes[MOST_SLOPES:]:
        rest = added(rest, g)
    return Image(centre, slopes[:MOST_SLOPES], rest, unit)


def whole(rows: Sequence[Sequence[Fraction]]) -> tuple[Whole, int]:
    """A matrix as whole numbers over their least common denominator. Raises Rejected where they are too long."""
    unit = lcm(*(x.denominator for row in rows for x in row))
    found = [[x.numerator * (unit // x.denominator) for x in row] for row in rows]
    if max(unit, *(abs(x) for row in found for x in row)).bit_length() > LONGEST:
        raise Rejected(f"matrix: numbers of more than {LONGEST} bits over their common denominator")
    return found, unit


def times(a: Whole, b: Whole) -> Whole:
    columns = [column if any(column) else () for column in zip(*b, strict=True)]  # of zeros nothing is added up
    return [[sum(map(mul, row, column)) for column in columns] for row in a]


def dot(a: Sequence[Fraction], b: Sequence[Fraction]) -> Fraction:
    return sum((x * y for x, y in zip(a, b, strict=True)), Fraction(0))


def flat(a: Whole) -> list[int]:
    return [x for row in a for x in row]


def magnitudes(a: Whole) -> Whole:
    return [list(map(abs, row)) for row in a]


def added(a: Whole, b: Whole) -> Whole:
    """a + |b| entry by entry."""
    return [[x + abs(y) for x, y in zip(row, other, strict=True)] for row, other in zip(a, b, strict=True)]


def effect(a: Whole) -> int:
    return sum(map(abs, flat(a)))


def corners(centre: list[int], slopes: Sequence[list[int]]) -> list[list[int]]:
    """centre + sum_l t_l slopes[l] for all signs t."""
    found = [centre]
    for g in slopes:
        found = [[x + y for x, y in zip(z, g, strict=True)] for z in found] + [
            [x - y for x, y in zip(z, g, strict=True)] for z in found
        ]
    return found


def gram(b: list[int], columns: int) -> Whole:
    """B^T B of a matrix written row by row."""
    by_column = [b[j::columns] for j in range(columns)]
    return [[sum(map(mul, x, y)) for y in by_column] for x in by_column]


def largest(g: Whole) -> int:
    """Upper bound of the largest eigenvalue of B^T B: its trace, or its largest row sum of magnitudes."""
    return min(sum(row[i] for i, row in enumerate(g)), max(sum(map(abs, row)) for row in g))


def within(g: Whole, unit: int, room: Fraction) -> bool:
    """Whether |B x| <= room |x| for every x, g = B^T B in units squared: room^2 1 - g is positive semidefinite."""
    limit, low = (room.numerator * unit) ** 2, room.denominator**2
    rest = [[limit * (i == j) - low * x for j, x in enumerate(row)] for i, row in enumerate(g)]
    return room >= 0 and definite(rest) >= 0


def grown(g: Whole, unit: int, relative: Fraction) -> Fraction:
    """A room for which `within` holds, too large by no more than that share of it: by bisection."""
    trace = sum(row[i] for i, row in enumerate(g))
    low, high = root(Fraction(trace, len(g) * unit**2))[0], root(Fraction(largest(g), unit**2))[1]
    while high - low > relative * high:
        middle = (low + high) / 2
        if within(g, unit, middle):
            high = middle
        else:
            low = middle
    return high


def root(q: Fraction) -> tuple[Fraction, Fraction]:
    """Lower and upper bound of the square root of q >= 0: itself if it is rational, else 2**-71 of it apart at most."""
    exact = Fraction(isqrt(q.numerator), isqrt(q.denominator))
    if exact * exact == q:
        return exact, exact
    shift = ROOT_BITS - (q.numerator.bit_length() - q.denominator.bit_length()) // 2
    n, unit = isqrt(int(q * Fraction(4) ** shift)), Fraction(2) ** shift
    return n / unit, (n + 1) / unit
