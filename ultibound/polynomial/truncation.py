"""Polynomials cut down to what matters: low degrees and short coefficients, chosen in floating point."""

from __future__ import annotations

from fractions import Fraction
from math import ceil, comb, log2

import numpy as np

Exponents = tuple[int, ...]
Polynomial = dict[Exponents, Fraction]


def truncated(poly: Polynomial, budget: float) -> Polynomial:
    """A polynomial of least degree near another on [−1, 1]ⁿ: what Chebyshev polynomials leave out is within a budget.

    An estimate: how far it is off is for the checker to say.
    """
    count = max(map(len, poly), default=0)
    turned = by_chebyshev({e: float(c) for e, c in poly.items()}, count)
    kept, left = dict(turned), budget / 2
    for e in sorted(turned, key=lambda e: (-sum(e), abs(turned[e]), e)):  # the highest degrees first, while they fit
        if abs(turned[e]) > left:
            break
        left -= abs(kept.pop(e))
    for e in sorted(kept, key=lambda e: (abs(kept[e]), e)):
        if abs(kept[e]) > left:
            break
        left -= abs(kept.pop(e))
    back = by_powers(kept, count)
    bits = max(0, ceil(log2(4 * max(1, len(back)) / budget))) if budget > 0 else 0
    whole = {e: round(c * 2.0**bits) for e, c in back.items()}
    return {e: Fraction(n, 2**bits) for e, n in whole.items() if n}


def by_chebyshev(poly: dict[Exponents, float], count: int) -> dict[Exponents, float]:
    """Coefficients by products of Chebyshev polynomials."""
    for k in range(count):
        found: dict[Exponents, float] = {}
        for e, c in poly.items():
            m = e[k]
            for n in range(m, -1, -2):  # x**m = 2**(1-m) sum of C(m, (m-n)/2) T_n, the last T_0 halved
                to = (*e[:k], n, *e[k + 1 :])
                found[to] = found.get(to, 0.0) + c * comb(m, (m - n) // 2) * (2 if n else 1) / 2.0**m
        poly = found
    return poly


def by_powers(turned: dict[Exponents, float], count: int) -> dict[Exponents, float]:
    """Coefficients by powers, of a sum of products of Chebyshev polynomials."""
    for k in range(count):
        found: dict[Exponents, float] = {}
        for e, c in turned.items():
            column = np.polynomial.chebyshev.cheb2poly([0.0] * e[k] + [1.0])
            for n, x in enumerate(column):
                if x:
                    to = (*e[:k], n, *e[k + 1 :])
                    found[to] = found.get(to, 0.0) + c * float(x)
        turned = found
    return turned
