"""Interval arithmetic on fractions, without any rounding (proofs/rounding.md, Exact)."""

from __future__ import annotations

from fractions import Fraction
from math import isqrt

from .reals import LARGEST, Inexact, Undefined

Pair = tuple[Fraction, Fraction]


class Exact:
    """Interval arithmetic on fractions without any rounding; irrational results are refused."""

    bits = 0

    def number(self, q: Fraction) -> Pair:
        return self._held(q, q)

    def between(self, low: Fraction, high: Fraction) -> Pair:
        return self._held(low, high)

    def ends(self, a: Pair) -> Pair:
        return a

    def neg(self, a: Pair) -> Pair:
        return -a[1], -a[0]

    def add(self, a: Pair, b: Pair) -> Pair:
        low = a[0] + b[0]
        return self._held(low, low if a[0] is a[1] and b[0] is b[1] else a[1] + b[1])

    def sub(self, a: Pair, b: Pair) -> Pair:
        low = a[0] - b[1]
        return self._held(low, low if a[0] is a[1] and b[0] is b[1] else a[1] - b[0])

    def mul(self, a: Pair, b: Pair) -> Pair:
        (p, q), (r, s) = a, b
        if p is q and r is s:
            low = high = p * r
        elif p.numerator >= 0:
            low, high = (p if r.numerator >= 0 else q) * r, (q if s.numerator >= 0 else p) * s
        elif q.numerator <= 0:
            low, high = (q if s.numerator <= 0 else p) * s, (p if r.numerator <= 0 else q) * r
        else:
            low, high = min(p * s, q * r), max(p * r, q * s)
        return self._held(low, high)

    def div(self, a: Pair, b: Pair) -> Pair:
        if b[0] <= 0 <= b[1]:
            raise Undefined("division by an interval that contains zero")
        return self.mul(a, (1 / b[1], 1 / b[0]))

    def power(self, a: Pair, n: int) -> Pair:
        low, high = a
        if n % 2 == 0:
            low, high = (Fraction(0) if low <= 0 <= high else min(abs(low), abs(high))), max(abs(low), abs(high))
        for q in (low, high):
            if max(q.numerator.bit_length(), q.denominator.bit_length()) * n > LARGEST:
                raise Undefined("a fraction that long")
        return low**n, high**n

    def sqrt(self, a: Pair) -> Pair:
        if a[0] < 0:
            raise Undefined("root of an interval with negative values")
        roots = [Fraction(isqrt(q.numerator), isqrt(q.denominator)) for q in a]
        if roots[0] ** 2 != a[0] or roots[1] ** 2 != a[1]:
            raise Inexact("an irrational root")
        return roots[0], roots[1]

    def _held(self, low: Fraction, high: Fraction) -> Pair:
        for q in (low,) if low is high else (low, high):
            if max(q.numerator.bit_length(), q.denominator.bit_length()) > LARGEST:
                raise Undefined("a fraction that long")
        return low, high

    def _refuse(self, *_: object) -> Pair:
        raise Inexact("exact arithmetic has no irrational functions")

    pi = exp = log = sin = cos = tan = asin = acos = atan = sinh = cosh = tanh = _refuse
