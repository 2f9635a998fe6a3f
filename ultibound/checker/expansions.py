"""Polynomials of time and parameters about a middle, and how far they and their derivatives range around it.

proofs/trajectory.md (6). All is in whole numbers.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import repeat
from math import comb, factorial, perm, prod
from operator import mul

from .models import Exponents
from .rates import GUARD

MOST_DEGREE = 60
FINE = 128  # bits after the point of powers of reaches

Stored = tuple[tuple[Exponents, ...], list[int]]  # powers and coefficients


def powers(column: list[int]) -> list[int]:
    """Coefficients by powers of a sum of Chebyshev polynomials."""
    total = [0] * len(column)
    for k, c in enumerate(column):
        for n, x in enumerate(chebyshev(k)):
            total[n] += c * x
    return total


@lru_cache(128)
def chebyshev(k: int) -> list[int]:
    if k < 2:
        return [0] * k + [1]
    found = [0, *(2 * x for x in chebyshev(k - 1))]
    for n, x in enumerate(chebyshev(k - 2)):
        found[n] -= x
    return found


@lru_cache(512)
def alike(powers_: tuple[Exponents, ...], v: int, kept: int) -> tuple[int, tuple[Exponents, ...], list[list[int]]]:
    """The degree by argument v, the powers that shifting it leaves, and the ranks of terms alike but in its power.

    These are in the order of that power, -1 where there is none; only powers below `kept` are left."""
    groups: dict[Exponents, dict[int, int]] = {}
    for k, e in enumerate(powers_):
        groups.setdefault((*e[:v], 0, *e[v + 1 :]), {})[e[v]] = k
    found = [[ranks.get(n, -1) for n in range(max(ranks) + 1)] for ranks in groups.values()]
    left = [(*e[:v], n, *e[v + 1 :]) for e, x in zip(groups, found, strict=True) for n in range(min(len(x), kept))]
    return max(map(len, found), default=1) - 1, tuple(left), found


def places(x: int, bits: int) -> int:
    """Digits after the point of a number in units of 2^-bits: halved boxes have middles of few."""
    return bits - min((x & -x).bit_length() - 1, bits) if x else 0


def shifted_to(poly: Stored, v: int, x: int, bits: int, kept: int = 1 + MOST_DEGREE) -> tuple[Stored, int]:
    """In powers of the distance from x by argument v, those below `kept`, and how many more bits it has."""
    degree, powers_, groups = alike(poly[0], v, kept)
    few = places(x, bits)
    x >>= bits - few
    steps = [x**n << few * (degree - n) for n in range(degree + 1)]
    rows = [[comb(n, m) * steps[n - m] for n in range(m, degree + 1)] for m in range(min(kept, degree + 1))]
    column = [*poly[1], 0]  # the last: no term
    moved = []
    for ranks in groups:
        here = [column[k] for k in ranks]
        moved += [sum(map(mul, row, here[m:])) for m, row in enumerate(rows[: len(here)])]
    return (powers_, moved), few * degree


@dataclass(frozen=True, slots=True)
class Expansion:
    """Coefficients by powers of the distances from a middle: of parameters, and in a list each of time."""

    columns: dict[Exponents, list[int]]
    sizes: list[list[int]]  # their magnitudes
    degree: int  # the highest power of any argument
    extra: int  # how many more bits than those stated


def expanded(
    powers_: tuple[Exponents, ...], columns: list[list[int]], extra: int, about: tuple[int, ...], bits: int
) -> Expansion:
    """All columns shifted at once, each as the digits of one whole number that is wide enough for what comes of it."""
    count, most = len(columns[0]), sum([abs(c) for column in columns for c in column])
    for x, e in zip(about, zip(*powers_, strict=True), strict=True):
        most <<= max(e) * (1 + places(x, bits))  # binomial coefficients, and digits
    size = most.bit_length() // 8 + 1
    poly: Stored = powers_, [joined(c, size) for c in columns]
    for v, x in enumerate(about):
        if x:
            poly, more = shifted_to(poly, v, x, bits)
            extra += more
    found = {e: digits(n, size, count) for e, n in zip(*poly, strict=True)}
    degree = max(count - 1, *(max(e, default=0) for e in powers_))
    return Expansion(found, [[abs(c) for c in column] for column in found.values()], degree, extra)


def joined(column: list[int], size: int) -> int:
    """A number with these digits, of either sign, of so many bytes."""
    half = 1 << 8 * size - 1
    raw = b"".join([(c + half).to_bytes(size, "little") for c in column])
    return int.from_bytes(raw, "little") - offset(size, len(column))


def digits(number: int, size: int, count: int) -> list[int]:
    """The digits that `joined` has joined; each is less than half of what its bytes hold."""
    half, raw = 1 << 8 * size - 1, (number + offset(size, count)).to_bytes(size * count, "little")
    return [int.from_bytes(raw[k : k + size], "little") - half for k in range(0, size * count, size)]


@lru_cache(512)
def offset(size: int, count: int) -> int:
    return int.from_bytes((bytes(size - 1) + b"\x80") * count, "little")


@lru_cache(4096)
def weights(order: int, reach: int, degree: int, bits: int) -> list[int]:
    """Of |c_n|, in how far a derivative by an argument may differ within that reach: n (n - 1) … reach^(n - order)."""
    power, found = 1 << FINE, [0] * order
    for n in range(order, degree + 1):
        found.append(perm(n, order) * power)
        power = -(-power * reach >> bits)
    return found


def spread(form: Expansion, orders: Sequence[int], reaches: Sequence[int], bits: int) -> tuple[int, int]:
    """A derivative in the middle, and the magnitudes of all that may differ from it: proofs/trajectory.md (6).

    In units of the witness less GUARD and the bits that the expansion has in addition."""
    column = form.columns.get(tuple(orders[1:]), [])[orders[0] :]
    middle = column[0] * prod(map(factorial, orders)) if column else 0
    first, *rest = map(weights, orders, reaches, repeat(form.degree), repeat(bits))
    total = 0
    for e, sizes in zip(form.columns, form.sizes, strict=True):
        total += prod([w[n] for w, n in zip(rest, e, strict=True)]) * sum(map(mul, first, sizes))
    return middle << GUARD, -(-(total << GUARD) >> FINE * len(orders)) - (abs(middle) << GUARD)
