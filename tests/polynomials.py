"""Seeded random polynomials that are positive on [−1, 1]ⁿ, and claims about them."""

from __future__ import annotations

import random
from fractions import Fraction
from itertools import product

from ultibound.positivity.bounds import least_sampled

Polynomial = dict[tuple[int, ...], Fraction]
SHAPES = ((1, 4), (1, 8), (2, 4), (2, 6), (3, 4), (3, 6), (4, 4), (5, 4))  # variables and degree
MARGIN = Fraction(1, 50)  # between 0 and the smallest value that sampling finds


def positive(seed: int) -> Polynomial:
    """Coefficients in hundredths, dense; above 0 by about the margin."""
    count, degree = SHAPES[seed % len(SHAPES)]
    rng = random.Random(seed)
    powers = [e for e in product(range(degree + 1), repeat=count) if sum(e) <= degree]
    p = {e: Fraction(rng.randint(-100, 100), 100) for e in powers}
    p[(0,) * count] += MARGIN - Fraction(round(least_sampled(p, count)[0] * 10**4), 10**4)
    return {e: c for e, c in p.items() if c}


def text_of(p: Polynomial) -> str:
    """As an expression of x1, x2, …"""
    parts = [
        "*".join([f"({c})", *(f"x{i}**{n}" if n > 1 else f"x{i}" for i, n in enumerate(e, 1) if n)])
        for e, c in p.items()
    ]
    return " + ".join(parts)


def claim(expression: str, ranges: dict[str, str], that: str, rest: str = "[effort]\ncells = 1\n") -> str:
    """A claim of one inequality about it, of which subdivision may look at one box only."""
    uncertain = "\n".join(f"{name} = {ends}" for name, ends in ranges.items())
    return (
        f'format = 1\n[state]\nv = [-1, 1]\n[uncertain]\n{uncertain}\n[define]\np = "{expression}"\n'
        f'[next]\nv = "v/2"\n[target]\nv = 0\n[[require]]\nthat = "{that}"\n{rest}'
    )


def always(seed: int) -> str:
    p = positive(seed)
    return claim(text_of(p), {f"x{i}": "[-1, 1]" for i in range(1, len(next(iter(p))) + 1)}, "always(p >= 0)")
