"""Products of Jacobians that grow, in the order in which they do so most: witnesses for proofs/several.md (7).

Floating point. A word of letters, each the Jacobian at a point; its rate is the root of its spectral radius. Of stances
that follow one another a word is a closed walk, with a letter of each stance on the way (proofs/graph.md (9)).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from ..bounding.intervals import Floats
from .samples import extremes

LETTERS, LENGTH, KEPT = 8, 6, 256
LONGEST = 16  # of a walk through as many stances
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


@dataclass(frozen=True, slots=True)
class RoundWord:
    """Stances of a closed walk, and ranks of the Jacobians, as `Word` has them."""

    stances: tuple[str, ...]
    letters: tuple[int, ...]
    power: int
    rate: float


def fastest_round(jacobians: Mapping[str, Floats], then: Mapping[str, Sequence[str]]) -> RoundWord | None:
    """The closed walk of the largest rate, of the extreme Jacobians of each stance; None where every rate is 0."""
    letters = {s: extremes(x.reshape(len(x), -1), LETTERS) if len(x) else [] for s, x in jacobians.items()}
    best: RoundWord | None = None
    most = 0.0
    for first in jacobians:
        n = jacobians[first].shape[1]
        # stances met, the one at hand last; letters; what became of an error
        ways: list[tuple[tuple[str, ...], tuple[int, ...], Floats]] = [((first,), (), np.eye(n))]
        for length in range(1, max(LENGTH, min(len(jacobians), LONGEST)) + 1):
            longer = [((*way, t), (*word, k), jacobians[way[-1]][k] @ m) for way, word, m in ways
                      for k in letters[way[-1]] for t in then[way[-1]] if t in jacobians]  # fmt: skip
            back = [(way, word, m) for way, word, m in longer if way[-1] == first]
            rates = [float(np.abs(np.linalg.eigvals(m)).max()) ** (1 / length) for _, _, m in back]
            if rates and max(rates) > most * (1 + 1e-9):
                most = max(rates)
                way, word, m = back[rates.index(most)]
                power, share = _power(m)
                best = RoundWord(way[:-1], word, power, most * share ** (1 / length))
            longer.sort(key=lambda x: -float(np.linalg.norm(x[2])))
            ways = longer[: KEPT // len(jacobians)]
    return best


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
