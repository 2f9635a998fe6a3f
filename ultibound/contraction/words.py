"""Products of Jacobians that grow, in the order in which they do so most: witnesses for proofs/several.md (7).

Floating point. A word of letters, each the Jacobian at a point; its rate is the root of its spectral radius.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..bounding.intervals import Floats
from .samples import extremes

LETTERS, LENGTH, KEPT = 8, 6, 256
MOST_POWER = 4096


@dataclass(frozen=True, slots=True)
class Word:
    """Ranks of the Jacobians, the first step first; the power whose trace shows most of the rate, and what it shows."""

    letters: tuple[int, ...]
    power: int
    rate: float


def fastest(jacobians: Floats) -> Word | None:
    """The word of the largest rate, of up to six of the extreme Jacobians (N, n, n); None where every rate is 0.

    Of each length the longest products are continued; coordinates in which all steps contract alike serve best.
    """
    if not len(jacobians):
        return None
    letters = extremes(jacobians.reshape(len(jacobians), -1), LETTERS)
    words: list[tuple[int, ...]] = [()]
    products = np.eye(jacobians.shape[1])[None]
    best, most = Word((), 1, 0.0), 0.0
    for length in range(1, LENGTH + 1):
        products = (jacobians[letters][None] @ products[:, None]).reshape(-1, *jacobians.shape[1:])
        words = [(*w, k) for w in words for k in letters]
        rates = np.abs(np.linalg.eigvals(products)).max(axis=1) ** (1 / length)
        k = int(np.argmax(rates))
        if rates[k] > most * (1 + 1e-9):
            power, share = _power(products[k])
            best, most = Word(words[k], power, float(rates[k]) * share ** (1 / length)), float(rates[k])
        order = np.argsort(-np.linalg.norm(products, axis=(1, 2)), kind="stable")[:KEPT]
        products, words = products[order], [words[int(i)] for i in order]
    return best if most > 0 else None


def _power(m: Floats) -> tuple[int, float]:
    """The p with the largest (|tr Mᵖ|/n)^(1/p), and its share of the spectral radius."""
    values = np.linalg.eigvals(m)
    radius = float(np.abs(values).max())
    if not radius > 0:
        return 1, 0.0
    powers = np.arange(1, MOST_POWER + 1)
    sums = np.abs(((values / radius)[:, None] ** powers).sum(axis=0)) / len(values)
    with np.errstate(divide="ignore"):
        shares = np.exp(np.log(sums) / powers)
    k = int(np.argmax(shares))
    return int(powers[k]), float(shares[k])
