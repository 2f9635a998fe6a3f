"""Outward-rounded arithmetic on whole numbers scaled by a power of two (proofs/rounding.md).

An interval of `Scaled(bits)` is a pair (lo, hi) of whole numbers and means [lo, hi] / 2**bits. Every operation returns
an interval that contains the exact result for all arguments in its operands.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from math import isqrt

Interval = tuple[int, int]
LARGEST = 20000  # bits before the point: beyond, an operation is refused
GUARD = 12


class Undefined(Exception):
    """An operation is not defined on the whole of its operand, or its result is too large to be held."""


class Inexact(Undefined):
    """A value that exact rational arithmetic cannot hold."""


class Scaled:
    """Fixed-point interval arithmetic with `bits` bits after the point."""

    def __init__(self, bits: int) -> None:
        self.bits = bits
        self._one = 1 << bits
        self._limit = 1 << (bits + LARGEST)
        self._product_limit = self._limit << bits
        self._pi: dict[int, int] = {}
        self._ln2: dict[int, int] = {}

    def number(self, q: Fraction) -> Interval:
        return self.between(q, q)

    def between(self, low: Fraction, high: Fraction) -> Interval:
        a = (low.numerator << self.bits) // low.denominator
        b = -((-high.numerator << self.bits) // high.denominator)
        return self._held((a, b))

    def ends(self, a: Interval) -> tuple[Fraction, Fraction]:
        return Fraction(a[0], self._one), Fraction(a[1], self._one)

    def _held(self, a: Interval) -> Interval:
        if a[0] < -self._limit or a[1] > self._limit:
            raise Undefined(f"a value beyond 2**{LARGEST}")
        return a

    def neg(self, a: Interval) -> Interval:
        return -a[1], -a[0]

    def add(self, a: Interval, b: Interval) -> Interval:
        return a[0] + b[0], a[1] + b[1]

    def sub(self, a: Interval, b: Interval) -> Interval:
        return a[0] - b[1], a[1] - b[0]

    def mul(self, a: Interval, b: Interval) -> Interval:
        (p, q), (r, s), n = a, b, self.bits
        if p >= 0 and r >= 0:
            low, high = p * r, q * s
        else:
            products = (p * r, p * s, q * r, q * s)
            low, high = min(products), max(products)
        if high > self._product_limit or low < -self._product_limit:
            raise Undefined(f"a value beyond 2**{LARGEST}")
        return low >> n, -(-high >> n)

    def div(self, a: Interval, b: Interval) -> Interval:
        (p, q), (r, s) = a, b
        if r <= 0 <= s:
            raise Undefined("division by an interval that contains zero")
        p, q = p << self.bits, q << self.bits
        low = min(p // r, p // s, q // r, q // s)
        high = max(-(-p // r), -(-p // s), -(-q // r), -(-q // s))
        return self._held((low, high))

    def power(self, a: Interval, n: int) -> Interval:
        """a**n for n >= 0."""
        if n == 0:
            return self._one, self._one
        low, high = a
        if n % 2 == 0:
            low, high = (0 if low <= 0 <= high else min(abs(low), abs(high))), max(abs(low), abs(high))
        size = max(abs(low), abs(high)).bit_length() - self.bits
        if size > 0 and (size - 1) * n > LARGEST:
            raise Undefined(f"a value beyond 2**{LARGEST}")
        shift = self.bits * (n - 1)
        return low**n >> shift, -(-(high**n) >> shift)

    def sqrt(self, a: Interval) -> Interval:
        if a[0] < 0:
            raise Undefined("root of an interval with negative values")
        high = isqrt(a[1] << self.bits)
        return isqrt(a[0] << self.bits), high + (high * high < a[1] << self.bits)

    def pi(self) -> Interval:
        p = self.bits + GUARD
        return self._rounded(self._pi_at(p), 4, p)

    def exp(self, a: Interval) -> Interval:
        return self._rising(self._exp_point, a)

    def log(self, a: Interval) -> Interval:
        if a[0] <= 0:
            raise Undefined("logarithm of an interval with values that are not positive")
        return self._rising(self._log_point, a)

    def sinh(self, a: Interval) -> Interval:
        return self._rising(self._sinh_point, a)

    def cosh(self, a: Interval) -> Interval:
        low, high = a
        if low <= 0 <= high:
            return self._one, self._cosh_point(max(-low, high))[1]
        low, high = min(abs(low), abs(high)), max(abs(low), abs(high))
        return self._rising(self._cosh_point, (low, high))

    def tanh(self, a: Interval) -> Interval:
        return self._rising(self._tanh_point, a)

    def sin(self, a: Interval) -> Interval:
        return self._wave(a, 0)

    def cos(self, a: Interval) -> Interval:
        return self._wave(a, 1)

    def tan(self, a: Interval) -> Interval:
        turns = {k for x in set(a) for k in self._quarter(x, 2, 1)}
        if len(turns) != 1:
            raise Undefined("tangent of an interval that may contain a pole")
        return self._rising(self._tan_point, a)

    def asin(self, a: Interval) -> Interval:
        if a[0] < -self._one or a[1] > self._one:
            raise Undefined("inverse sine or cosine of an interval beyond 1")
        return self._rising(self._asin_point, a)

    def acos(self, a: Interval) -> Interval:
        low, high = self.asin(a)
        p = self.bits + GUARD
        half = self._rounded(self._pi_at(p) >> 1, 4, p)
        return max(0, half[0] - high), half[1] - low

    def atan(self, a: Interval) -> Interval:
        return self._rising(self._atan_point, a)

    # Below: functions at a point x / 2**bits. Each works at p bits, where its error is at most a known number of
    # units, and rounds that outward to `bits`.

    def _rising(self, point: Callable[[int], Interval], a: Interval) -> Interval:
        low, high = point(a[0])
        return (low, high) if a[0] == a[1] else (low, point(a[1])[1])

    def _rounded(self, y: int, error: int, p: int) -> Interval:
        shift = p - self.bits
        return (y - error) >> shift, -(-(y + error) >> shift)

    def _pi_at(self, p: int) -> int:
        """pi * 2**p with error below 2: Machin's formula with guard bits."""
        if p not in self._pi:
            q = p + 16

            def arctan_of_inverse(n: int) -> int:
                term = total = (1 << q) // n
                k = 1
                while term:
                    term //= -n * n
                    k += 2
                    total += term // k
                return total

            self._pi[p] = (16 * arctan_of_inverse(5) - 4 * arctan_of_inverse(239)) >> 16
        return self._pi[p]

    def _ln2_at(self, p: int) -> int:
        """log 2 * 2**p with error below 2: 2 artanh(1/3)."""
        if p not in self._ln2:
            q = p + 16
            term = total = (1 << q) // 3
            k = 1
            while term:
                term //= 9
                k += 2
                total += term // k
            self._ln2[p] = total >> 15
        return self._ln2[p]

    def _exp_at(self, x: int, p: int) -> tuple[int, int]:
        """(y, n) with exp(x / 2**p) = y * 2**n / 2**p, |error of y| <= 2**10 + 2 |n| units of y.

        x = n log 2 + r; the series of r / 2**6, then six squarings (each doubles the relative error).
        """
        ln2 = self._ln2_at(p)
        n = (2 * x + ln2) // (2 * ln2)
        r = (x - n * ln2) >> 6
        term = total = 1 << p
        k = 1
        while True:
            term = (term * r >> p) // k
            if term in (0, -1):
                break
            total += term
            k += 1
        for _ in range(6):
            total = total * total >> p
        return total, n

    def _exp_point(self, x: int) -> Interval:
        b = self.bits
        if x >> b > LARGEST:
            raise Undefined("exponential of a value that large")
        if x >> b < -b - 2:
            return 0, 1
        p = b + 40 + max(0, (x >> b) * 3 // 2 + 2)
        y, n = self._exp_at(x << (p - b), p)
        error = self._exp_error(p, n)
        shift = p - b - n
        return max(0, (y - error) >> shift), -(-(y + error) >> shift)

    def _exp_error(self, p: int, n: int) -> int:
        """Units of y: 64 (k + 2) for terms truncated and squared, and 64 * 3 (|n| + 1) for n log 2."""
        return 200 * (p // 4 + 20) + 400 * (abs(n) + 1)

    def _two_exps(self, x: int) -> tuple[int, int, int, int]:
        """exp(x), exp(-x) at p bits, error of both, p; x >= 0."""
        b = self.bits
        if x >> b > LARGEST:
            raise Undefined("hyperbolic function of a value that large")
        p = b + 50 + (x >> b) * 3 // 2 + 2
        y, n = self._exp_at(x << (p - b), p)
        up = y << n if n >= 0 else y >> -n
        error = (self._exp_error(p, n) << max(n, 0)) + 1
        down = (1 << 2 * p) // up
        return up, down, error, p

    def _sinh_point(self, x: int) -> Interval:
        if x < 0:
            low, high = self._sinh_point(-x)
            return -high, -low
        up, down, error, p = self._two_exps(x)
        low, high = self._rounded((up - down) >> 1, 2 * error + 2, p)
        return max(x, low), high  # sinh x >= x

    def _cosh_point(self, x: int) -> Interval:
        up, down, error, p = self._two_exps(abs(x))
        low, high = self._rounded((up + down) >> 1, 2 * error + 2, p)
        return max(self._one, low), high

    def _tanh_point(self, x: int) -> Interval:
        if x < 0:
            low, high = self._tanh_point(-x)
            return -high, -low
        b = self.bits
        p = b + 50
        if x >> b > b:  # 1 - tanh x < 2 exp(-2x) < 2**-bits
            return self._one - 1, self._one
        y, n = self._exp_at(-2 * x << (p - b), p)
        t = y >> -n if n < 0 else y << n
        error = self._exp_error(p, n) + 1
        low, high = self._rounded(((1 << p) - t << p) // ((1 << p) + t), 4 * error + 2, p)
        return max(0, low), min(self._one, x, high)

    def _log_point(self, x: int) -> Interval:
        """x = m 2**n with m in [0.70, 1.42]: n log 2 + 2 artanh((m - 1)/(m + 1))."""
        p = self.bits + 40
        n = x.bit_length() - self.bits
        shift = p - self.bits - n
        m = x << shift if shift >= 0 else x >> -shift
        if 10 * m < 7 << p:
            m, n = m << 1, n - 1
        z = ((m - (1 << p)) << p) // (m + (1 << p))
        square = z * z >> p
        power = total = z
        k = 1
        while power not in (0, -1):
            power = power * square >> p
            k += 2
            total += power // k
        return self._rounded(2 * total + n * self._ln2_at(p), 4 * k + 2 * abs(n) + 64, p)

    def _quarter(self, x: int, half_turns: int, offset: int) -> set[int]:
        """Possible values of floor(x / (pi half_turns / 2) + offset / 2), one or two of them."""
        p = self.bits + GUARD + max(0, x.bit_length() - self.bits)
        unit = self._pi_at(p) * half_turns
        scaled = 2 * (x << (p - self.bits))
        found = set()
        for u in (unit - 4 * half_turns, unit + 4 * half_turns):
            found.add((2 * scaled + offset * u) // (2 * u))
        return found

    def _sine_cosine(self, x: int, p: int) -> tuple[int, int, int]:
        """sin and cos of x / 2**p, each with an error of at most e units, and e."""
        extra = max(0, x.bit_length() - p) + 4
        half = self._pi_at(p + extra)
        n = (2 * (x << extra + 1) + half) // (2 * half)
        r = ((x << extra + 1) - n * half) >> (extra + 1)
        square = r * r >> p
        sine, cosine = r, 1 << p
        up, k = r, 1
        while up not in (0, -1):
            up = -(up * square >> p) // ((k + 1) * (k + 2))
            sine += up
            k += 2
        up, j = 1 << p, 0
        while up not in (0, -1):
            up = -(up * square >> p) // ((j + 1) * (j + 2))
            cosine += up
            j += 2
        pair = ((sine, cosine), (cosine, -sine), (-sine, -cosine), (-cosine, sine))[n % 4]
        return pair[0], pair[1], 4 * (k + j) + 32

    def _wave(self, a: Interval, which: int) -> Interval:
        """sin (which 0) or cos (1), whose extremes lie at odd multiples, or multiples, of half turns."""
        one = self._one
        if a[1] - a[0] >= 7 << self.bits:
            return -one, one
        ends = [self._wave_point(x, which) for x in a]
        low, high = min(e[0] for e in ends), max(e[1] for e in ends)
        # quadrants of the angle, shifted so that cos has its top at 0 mod 4 and its bottom at 2 mod 4
        first = min(self._quarter(a[0], 1, 0))
        last = max(self._quarter(a[1], 1, 0))
        for corner in range(first + 1, last + 1):
            position = (corner - (1 - which)) % 4
            if position == 0:
                high = one
            if position == 2:
                low = -one
        return max(low, -one), min(high, one)

    def _wave_point(self, x: int, which: int) -> Interval:
        p = self.bits + 30
        found = self._sine_cosine(x << 30, p)
        low, high = self._rounded(found[which], found[2], p)
        return max(low, -self._one), min(high, self._one)

    def _tan_point(self, x: int) -> Interval:
        p = self.bits + 40
        _, cosine, _ = self._sine_cosine(x << 40, p)
        lost = 2 * max(0, p - abs(cosine).bit_length())
        if lost > 2 * p - 20:
            raise Undefined("tangent too close to a pole")
        q = p + lost
        sine, cosine, error = self._sine_cosine(x << (q - self.bits), q)
        tangent = (sine << q) // cosine
        # |d(s/c)| <= (e + |t| e) / |c|, doubled for the error of c itself
        spread = 2 * ((error << q) + abs(tangent) * error) // abs(cosine) + 4
        return self._rounded(tangent, spread, q)

    def _atan_at(self, x: int, p: int) -> tuple[int, int]:
        """arctan of x / 2**p for |x| <= 2**p, with an error of at most e units, and e.

        Three halvings of the angle by x / (1 + sqrt(1 + x²)), then the series.
        """
        one = 1 << p
        for _ in range(3):
            x = (x << p) // (one + isqrt((one << p) + x * x))
        square = x * x >> p
        power = total = x
        k = 1
        while power not in (0, -1):
            power = -(power * square >> p)
            k += 2
            total += power // k
        return total << 3, 16 * k + 128

    def _atan_point(self, x: int) -> Interval:
        if x < 0:
            low, high = self._atan_point(-x)
            return -high, -low
        p = self.bits + 30
        if x <= self._one:
            y, error = self._atan_at(x << 30, p)
        else:
            y, error = self._atan_at((1 << self.bits + p) // x, p)
            y, error = (self._pi_at(p) >> 1) - y, error + 4
        low, high = self._rounded(y, error, p)
        return max(0, low), min(high, x)

    def _asin_point(self, x: int) -> Interval:
        """arcsin x = arctan(x / sqrt(1 - x²)); above 1/2, pi/2 - 2 arcsin sqrt((1 - x)/2)."""
        if x < 0:
            low, high = self._asin_point(-x)
            return -high, -low
        p = self.bits + 40
        one, wide = 1 << p, x << 40
        far = 2 * wide > one
        s = isqrt((one - wide) << (p - 1)) if far else wide
        y, error = self._atan_at((s << p) // isqrt((one << p) - s * s), p)
        if far:
            y, error = (self._pi_at(p) >> 1) - 2 * y, 2 * error + 64
        low, high = self._rounded(y, error + 8, p)
        return max(x, low), high  # arcsin x >= x
