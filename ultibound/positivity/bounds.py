"""The best lower bound of a polynomial on [−1, 1]ⁿ that a weighted sum of squares is found for."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from math import inf

import numpy as np

from .gram import SOLVERS, Exponents, Floats, bases, entries, relaxed
from .identity import Identity, identity

ACCURACIES = (1e-4, 1e-6, 1e-8, 1e-10)  # of rounded factors
HIGHER = (0, 2)  # degrees beyond that of the polynomial that are tried
SAMPLES, STARTS, FACES = 1024, 24, 0.4  # how many, of which so many are improved; share of coordinates at an end
STEPS = [0.5 / 2 ** (k / 4) for k in range(80)]  # of the improvement of samples
SIGNS = np.array([-1.0, 0.0, 1.0])


def least_sampled(p: dict[Exponents, Fraction], count: int) -> tuple[float, Floats]:
    """The smallest value at seeded samples, many of them on faces, some improved along axes, and where; an estimate."""
    powers = np.array(list(p), dtype=np.int64).reshape(len(p), count)
    c = np.array([float(x) for x in p.values()])

    def values(t: Floats) -> Floats:
        found = np.ones((len(t), len(p)))
        for i in range(count):
            found *= (t[:, i, None] ** np.arange(powers[:, i].max() + 1))[:, powers[:, i]]
        return np.asarray(found @ c)

    rng = np.random.default_rng(1)
    t = rng.uniform(-1, 1, (SAMPLES, count))
    faces = rng.random(t.shape) < FACES
    t[faces] = np.sign(t[faces])
    best = t[np.argsort(values(t), kind="stable")[:STARTS]]
    for step in STEPS if count else ():
        moves = best[:, None, None, :] + step * SIGNS[None, :, None, None] * np.eye(count)
        flat = np.clip(moves.reshape(-1, count), -1, 1)
        picked = values(flat).reshape(len(best), -1).argmin(axis=1)
        best = flat.reshape(len(best), -1, count)[np.arange(len(best)), picked]
    found = values(best)
    return float(found.min()), np.asarray(best[found.argmin()])


def work(p: dict[Exponents, Fraction]) -> int:
    """Entries of the Gram matrices of the least degree: what a programme takes grows with their square, or so."""
    active = sum(any(e[i] for e in p) for i in range(max(map(len, p), default=0)))
    return entries(bases(active, max(2, max(map(sum, p), default=0) + 1 & ~1), range(active)))


def bounded_below(
    p: dict[Exponents, Fraction], gap: float, enough: float = inf
) -> tuple[Identity | None, float, list[str]]:
    """An identity whose bound is at least `enough` where samples let it be, else within `gap` of the smallest of them.

    The best found, where none is that good.

    Also that value, and what every solver said.
    """
    count = max(map(len, p), default=0)
    active = [i for i in range(count) if any(e[i] for e in p)]
    inner = {tuple(e[i] for i in active): c for e, c in p.items()}
    (low, _), said, best = least_sampled(inner, len(active)), list[str](), None
    wanted = enough if enough <= low else low - gap
    for found in identities(inner, len(active), said):
        if best is None or found.bound > best.bound:
            best = found
        if float(found.bound) >= wanted:
            break
    return None if best is None else placed(best, active, count), low, said


def identities(p: dict[Exponents, Fraction], count: int, said: list[str]) -> Iterator[Identity]:
    """Ever better ones: by degree, by accuracy of rounding, and by another solver where one leaves nothing of use."""
    if not any(map(any, p)):
        yield Identity(sum(p.values(), Fraction(0)), ())
        return
    scale = Fraction(2) ** round(np.log2(max(abs(float(c)) for c in p.values())))
    exact = {e: c / scale for e, c in p.items()}
    rounded, constraints = {e: float(c) for e, c in exact.items()}, range(1, count + 1)
    degree = max(2, max(map(sum, p)) + 1 & ~1)
    for d in (degree + more for more in HIGHER):
        for solver in SOLVERS:
            status, grams = relaxed(rounded, count, d, constraints, solver)
            said.append(f"degree {d}, {solver}: {status}")
            for accuracy in ACCURACIES if grams else ():
                found = identity(exact, grams, accuracy, constraints)
                if found is not None:
                    yield Identity(found.bound * scale, tuple((w * scale, n, q) for w, n, q in found.squares))
            if grams:  # a higher degree, rather than the same programme by another solver
                break


def placed(found: Identity, active: list[int], count: int) -> Identity:
    """In all variables, of an identity in the active ones."""

    def wide(e: Exponents) -> Exponents:
        full = [0] * count
        for i, n in zip(active, e, strict=True):
            full[i] = n
        return tuple(full)

    squares = [(w, active[n - 1] + 1 if n else 0, {wide(e): x for e, x in q.items()}) for w, n, q in found.squares]
    return Identity(found.bound, tuple(squares))
