"""Outward-rounded arithmetic on whole numbers scaled by a power of two (proofs/rounding.md).

An interval of `Scaled(bits)` is a pair (lo, hi) of whole numbers and means [lo, hi] / 2**bits. Every operation returns
an interval that contains the exact result for all arguments in its operands, or raises Undefined.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from functools import lru_cache
from math import isqrt

Interval = tuple[int, int]
LARGEST = 20000  # bits before the point: a result beyond is refused
GUARD = 16  # bits more than asked for, in which series are summed
NEAR = 64  # bits before the point up to which an angle is reduced by a short pi
LONGEST = 2**19  # binary digits of a power before it is rounded
BEYOND = f"a value beyond 2**{LARGEST}"


class Undefined(Exception):
    """An operation is not defined on the whole of its operand, or its result is too large to be held."""


class Inexact(Undefined):
    """A value that exact rational arithmetic cannot hold."""


class Scaled:
    """Fixed-point interval arithmetic with `bits` bits after the point."""

    def __init__(self, bits: int) -> None:
        self.bits = bits
        self.one = 1 << bits, 1 << bits
        self._most = 1 << (bits + LARGEST)
        self._least = -self._most

    def number(self, q: Fraction) -> Interval:
        return self.between(q, q)

    def between(self, low: Fraction, high: Fraction) -> Interval:
        a = (low.numerator << self.bits) // low.denominator
        b = -((-high.numerator << self.bits) // high.denominator)
        return self._held(a, b)

    def quotients(self, low: int, high: int, below: int) -> Interval:
        """[low, high] / below, for below > 0."""
        return self._held((low << self.bits) // below, -((-high << self.bits) // below))

    def ends(self, a: Interval) -> tuple[Fraction, Fraction]:
        return Fraction(a[0], self.one[0]), Fraction(a[1], self.one[0])

    def neg(self, a: Interval) -> Interval:
        return -a[1], -a[0]

    def add(self, a: Interval, b: Interval) -> Interval:
        low, high = a[0] + b[0], a[1] + b[1]
        if low < self._least or high > self._most:
            raise Undefined(BEYOND)
        return low, high

    def sub(self, a: Interval, b: Interval) -> Interval:
        low, high = a[0] - b[1], a[1] - b[0]
        if low < self._least or high > self._most:
            raise Undefined(BEYOND)
        return low, high

    def mul(self, a: Interval, b: Interval) -> Interval:
        (p, q), (r, s), n = a, b, self.bits
        if p >= 0:
            low, high = (p if r >= 0 else q) * r, (q if s >= 0 else p) * s
        elif q <= 0:
            low, high = (q if s <= 0 else p) * s, (p if r <= 0 else q) * r
        else:
            low, high = min(p * s, q * r), max(p * r, q * s)
        return self._held(low >> n, -(-high >> n))

    def div(self, a: Interval, b: Interval) -> Interval:
        (p, q), (r, s), n = a, b, self.bits
        if s < 0:
            p, q, r, s = -q, -p, -s, -r
        if r <= 0:
            raise Undefined("division by an interval that contains zero")
        return self._held((p << n) // (s if p >= 0 else r), -((-q << n) // (r if q >= 0 else s)))

    def power(self, a: Interval, n: int) -> Interval:
        """a**n for n >= 0."""
        if n == 0:
            return self.one
        low, high = a if n % 2 else magnitude(a)
        if max(-low, high).bit_length() * n > LONGEST:
            raise Undefined(f"a power of more than {LONGEST} binary digits")
        return self._outward(low**n, high**n, self.bits * (n - 1))

    def sqrt(self, a: Interval) -> Interval:
        if a[0] < 0:
            raise Undefined("root of an interval with negative values")
        low, square = isqrt(a[0] << self.bits), a[1] << self.bits
        high = low if a[0] == a[1] else isqrt(square)
        return self._held(low, high + (high * high < square))

    def pi(self) -> Interval:
        return half_pi(self.bits + 1)

    def exp(self, a: Interval) -> Interval:
        return self._rising(self._exp, a)

    def log(self, a: Interval) -> Interval:
        if a[0] <= 0:
            raise Undefined("logarithm of an interval with values that are not positive")
        return self._rising(self._log, a)

    def sin(self, a: Interval) -> Interval:
        return self._wave(a, 0)

    def cos(self, a: Interval) -> Interval:
        return self._wave(a, 1)

    def tan(self, a: Interval) -> Interval:
        p = 3 * (self.bits + GUARD)  # near a pole an error grows by the square of the value
        fine = scaled(p)
        ends, first, last = self._turned(a, p)
        if (first + 1) // 2 != (last + 1) // 2:
            raise Undefined("tangent of an interval that may contain a pole")
        found = []
        for n, r in ends:
            sine = sine_of(0, r, p)
            cosine = fine.sqrt(fine.sub(fine.one, fine.power(sine, 2)))
            found.append(fine.neg(fine.div(cosine, sine)) if n % 2 else fine.div(sine, cosine))
        return self._outward(found[0][0], found[-1][1], p - self.bits)

    def asin(self, a: Interval) -> Interval:
        if a[0] < -self.one[0] or a[1] > self.one[0]:
            raise Undefined("inverse sine or cosine of an interval beyond 1")
        return self._rising_odd(self._asin, a)

    def acos(self, a: Interval) -> Interval:
        fine = scaled(self.bits + 4)
        low, high = fine.sub(half_pi(fine.bits), fine.asin((a[0] << 4, a[1] << 4)))
        return self._outward(max(0, low), high, 4)

    def atan(self, a: Interval) -> Interval:
        return self._rising_odd(self._atan, a)

    def sinh(self, a: Interval) -> Interval:
        return self._rising_odd(self._sinh, a)

    def cosh(self, a: Interval) -> Interval:
        return self._rising(self._cosh, magnitude(a))

    def tanh(self, a: Interval) -> Interval:
        return self._rising_odd(self._tanh, a)

    # Below: what these share, and functions at a point x / 2**bits, the odd ones for x >= 0.

    def _held(self, low: int, high: int) -> Interval:
        if low < self._least or high > self._most:
            raise Undefined(BEYOND)
        return low, high

    def _outward(self, low: int, high: int, extra: int) -> Interval:
        """An interval with `extra` more bits after the point, rounded outward."""
        return self._held(low >> extra, -(-high >> extra))

    def _rising(self, f: Callable[[int], Interval], a: Interval) -> Interval:
        low, high = f(a[0])
        return low, high if a[0] == a[1] else f(a[1])[1]

    def _rising_odd(self, f: Callable[[int], Interval], a: Interval) -> Interval:
        ends = [f(x) if x >= 0 else self.neg(f(-x)) for x in (a if a[0] < a[1] else a[:1])]
        return ends[0][0], ends[-1][1]

    def _exp(self, x: int) -> Interval:
        """The series of x / 2**k, then k squarings; exp x <= 2**size."""
        whole = x >> self.bits
        if 10 * whole > 7 * LARGEST:
            raise Undefined(BEYOND)
        if whole < -self.bits:
            return 0, 1
        size = whole * 3 // 2 + 2 if whole >= 0 else 0
        k = max(0, x.bit_length() - self.bits + isqrt(self.bits + size) // 2 + 4)
        p = self.bits + GUARD + size + k
        y, error = exp_of(abs(x), self.bits + k, p)
        if x < 0:
            y, error = (1 << 2 * p) // (y + error), error + 1
        for _ in range(k):
            y = y * y >> p
        return self._outward(y, y + (error + 1 << k + size), p - self.bits)

    def _sinh(self, x: int) -> Interval:
        fine = scaled(self.bits + 4)
        up = fine._exp(x << 4)
        return self._outward(*fine.sub(up, fine.div(fine.one, up)), 5)

    def _cosh(self, x: int) -> Interval:
        fine = scaled(self.bits + 4)
        up = fine._exp(x << 4)
        low, high = fine.add(up, fine.div(fine.one, up))
        return self._outward(max(2 * fine.one[0], low), high, 5)

    def _tanh(self, x: int) -> Interval:
        fine = scaled(self.bits + 4)
        down = fine._exp(-2 * x << 4)
        low, high = fine.div(fine.sub(fine.one, down), fine.add(fine.one, down))
        return self._outward(max(0, low), high, 4)

    def _log(self, x: int) -> Interval:
        """x / 2**bits = m 2**n with m in [2/3, 4/3): n log 2 + 2 artanh((m - 1)/(m + 1))."""
        fine = scaled(self.bits + 2 * GUARD)
        power = 1 << (3 * x >> 2).bit_length()  # x / m
        n = power.bit_length() - 1 - self.bits << fine.bits
        z = (abs(x - power) << fine.bits) // (x + power)
        part = arc((z, z + 1), 1, fine.bits)
        part = fine.add(part, part) if x >= power else fine.neg(fine.add(part, part))
        return self._outward(*fine.add(part, fine.mul((n, n), log2(fine.bits))), 2 * GUARD)

    def _asin(self, x: int) -> Interval:
        """2 arctan(x / (1 + sqrt(1 - x) sqrt(1 + x)))."""
        fine = scaled(self.bits + 6)
        one, wide = fine.one, (x << 6, x << 6)
        root = fine.mul(fine.sqrt(fine.sub(one, wide)), fine.sqrt(fine.add(one, wide)))
        t = fine.div(wide, fine.add(one, root))
        return self._outward(*fine._atan(t[0], t[1] - t[0]), 5)

    def _atan(self, x: int, width: int = 0) -> Interval:
        """pi/2 - arctan 1/x above 1; two halvings of the angle by x / (1 + sqrt(1 + x²)), then the series."""
        fine = scaled(self.bits + GUARD)
        one, t = fine.one, (x << GUARD, x + width << GUARD)
        t = fine.div(one, t) if x > self.one[0] else t
        for _ in range(2):
            t = fine.div(t, fine.add(one, fine.sqrt(fine.add(one, fine.mul(t, t)))))
        low, high = arc(t, -1, fine.bits)
        low, high = 4 * low, 4 * high
        if x > self.one[0]:
            low, high = fine.sub(half_pi(fine.bits), (low, high))
        return self._outward(max(0, low), high, GUARD)

    def _turned(self, a: Interval, p: int) -> tuple[list[tuple[int, int]], int, int]:
        """(n, r) for each end, which is n pi/2 + (r ± 2) / 2**p; the first and last quarter turn that may be met."""
        self._held(*a)
        spare = 2 + (LARGEST if max(-a[0], a[1]) >> self.bits + NEAR else NEAR)
        quarter, _ = half_pi(p + spare)
        ends = []
        for x in a if a[0] < a[1] else a[:1]:
            x <<= p + spare - self.bits
            n = (2 * x + quarter) // (2 * quarter)
            ends.append((n, x - n * quarter >> spare))
        return ends, ends[0][0] - (ends[0][1] < 2), ends[-1][0] - (ends[-1][1] < -2)

    def _wave(self, a: Interval, quarters: int) -> Interval:
        """sin(x + quarters pi/2): 1 is reached where a quarter turn 1 mod 4 begins, -1 where one 3 mod 4 does."""
        p, one = self.bits + GUARD, self.one[0]
        ends, first, last = self._turned(a, p)
        values = [sine_of(n + quarters, r, p) for n, r in ends]
        low, high = self._outward(min(values)[0], max(v[1] for v in values), GUARD)
        first, last = first + quarters, last + quarters
        low = -one if (first - 3) // 4 < (last - 3) // 4 else max(-one, low)
        high = one if (first - 1) // 4 < (last - 1) // 4 else min(one, high)
        return low, high


scaled = lru_cache(256)(Scaled)


def magnitude(a: Interval) -> Interval:
    low, high = a
    return a if low >= 0 else (max(0, -high), max(-low, high))


# Series, enclosed at p bits after the point; what they lose is counted in proofs/rounding.md.


def exp_of(x: int, scale: int, p: int) -> tuple[int, int]:
    """(y, error) with y <= exp(x / 2**scale) 2**p <= y + error, for 0 <= x <= 2**scale / 16."""
    term = total = 1 << p
    k = 0
    while term:
        k += 1
        term = (term * x >> scale) // k
        total += term
    return total, k + k // 8 + 1


def sine_of(n: int, r: int, p: int) -> Interval:
    """sin(n pi/2 + r / 2**p) with r off by at most 2 units and not beyond 4/5."""
    if r < 0:
        n, r = 2 - n, -r
    square = r * r >> p
    term = total = 1 << p if n % 2 else r
    k = 1 if n % 2 else 2
    while term:
        term = (term * square >> p) // (k * (k + 1))
        total -= term
        term = (term * square >> p) // ((k + 2) * (k + 3))
        total += term
        k += 4
    if n % 4 >= 2:
        total = -total
    error = k // 2 + 4
    return total - error, total + error


def arc(x: Interval, sign: int, p: int) -> Interval:
    """arctan x (sign -1) or artanh x (sign 1), for 0 <= x <= 1/4."""
    square = x[0] * x[0] >> p
    power = total = x[0]
    k, flip = 1, 1
    while power:
        power = power * square >> p
        k, flip = k + 2, flip * sign
        total += flip * (power // k)
    error = 3 * k // 4 + 1
    return total - error, total + error + 2 * (x[1] - x[0])


def arc_of_inverse(n: int, sign: int, p: int) -> Interval:
    """arctan 1/n (sign -1) or artanh 1/n (sign 1) from exact partial sums."""

    def part(a: int, b: int) -> tuple[int, int]:
        """(top, low) with top / low = sum of sign**k n**(2(b - 1 - k)) / (2k + 1) for a <= k < b."""
        if b - a == 1:
            return sign**a, 2 * a + 1
        m = (a + b) // 2
        (t, u), (v, w) = part(a, m), part(m, b)
        return t * w * n ** (2 * (b - m)) + v * u, u * w

    terms = p // ((n * n).bit_length() - 1) + 1
    top, low = part(0, terms)
    y = (top << p) // (low * n ** (2 * terms - 1))
    return y - 1, y + 2


@lru_cache(256)
def half_pi(bits: int) -> Interval:
    """Machin: 8 arctan 1/5 - 2 arctan 1/239."""
    a, b = arc_of_inverse(5, -1, bits + GUARD), arc_of_inverse(239, -1, bits + GUARD)
    return 8 * a[0] - 2 * b[1] >> GUARD, -(2 * b[0] - 8 * a[1] >> GUARD)


@lru_cache(256)
def log2(bits: int) -> Interval:
    """2 artanh 1/3."""
    low, high = arc_of_inverse(3, 1, bits + GUARD)
    return 2 * low >> GUARD, -(-2 * high >> GUARD)
