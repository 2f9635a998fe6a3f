"""Witnesses of sums of squares, changed in one number."""

from __future__ import annotations

import copy
import re
from collections.abc import Iterator
from fractions import Fraction
from typing import Any

from ultibound.certificate.certificate import Certificate
from ultibound.checker.derive import Derivation, Domain
from ultibound.checker.numerals import Rejected
from ultibound.checker.reals import Undefined
from ultibound.checker.squares import squares
from ultibound.checker.statement import read_statement

Witness = dict[str, Any]
NUMBER = re.compile(r"-?[0-9]+")


def changes(witness: Witness, most: int) -> Iterator[Witness]:
    """Copies of a witness with one number moved by one, evenly spread over at most so many of its numbers."""
    places = list(numbers(witness["pieces"]))
    for path, span in places[:: max(1, len(places) // most)]:
        changed = copy.deepcopy(witness)
        at: Any = changed["pieces"]
        for step in path[:-1]:
            at = at[step]
        text = at[path[-1]]
        if isinstance(text, int):
            at[path[-1]] = text + 1
        else:
            moved = str(int(text[span[0] : span[1]]) + 1)
            at[path[-1]] = text[: span[0]] + moved + text[span[1] :]
        yield changed


def numbers(item: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[tuple[Any, ...], tuple[int, int]]]:
    """Where whole numbers stand: in texts, the span of each."""
    if isinstance(item, int):
        yield path, (0, 0)
    elif isinstance(item, str):
        for found in NUMBER.finditer(item):
            yield path, found.span()
    else:
        for key, value in item.items() if isinstance(item, dict) else enumerate(item):
            yield from numbers(value, (*path, key))


def accepted(certificate: Certificate, line: dict[str, Any], witness: Witness) -> bool:
    """Whether the checker's rule still shows what the line concludes, of a claim without a library."""
    entries = certificate.entries
    d = Derivation(read_statement(entries["claim"]["text"], entries["claim"]["set"], {}))
    meaning = d.meaning(line["proves"], Domain(False, Fraction(0), (Fraction(0), Fraction(0))))
    claimed = {n: Fraction(x) for n, x in line["concludes"].items()}
    try:
        found, _ = squares(d, meaning, witness, tuple(claimed), None)
    except (Rejected, Undefined):
        return False
    return all(x <= found[n] if n == "lower" else found[n] <= x for n, x in claimed.items())
