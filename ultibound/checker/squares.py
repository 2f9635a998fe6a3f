"""Weighted sums of squares over boxes: proofs/squares.md. `squares` is the rule."""

from __future__ import annotations

import re
from collections.abc import Sequence
from fractions import Fraction
from itertools import product
from operator import add
from typing import Any

from .courses import arithmetic
from .derive import Derivation, Meaning
from .flows import Flows
from .forms import boxes
from .models import Exponents
from .numerals import Rejected, quantity
from .polynomials import HIGHEST, Exactly, Expansion, Polynomial, Rounded, size

MOST_PIECES, MOST_SQUARES, MOST_TERMS, MOST_ORDER, MOST_VARIABLES = 10_000, 20_000, 5_000, 40, 24
LEAF = "q"
WHOLE = r"-?[1-9][0-9]{0,399}"
TERM = re.compile(rf"({WHOLE})(?:/([1-9][0-9]{{0,399}}))?((?: (?:0|[1-9][0-9]?))*)", re.ASCII)


def polynomial(text: Any, count: int, whole: bool) -> Polynomial:
    """From its terms, each a coefficient and the powers of all variables; whole numbers only where that is said."""
    if not isinstance(text, str):
        raise Rejected("polynomial: a text of terms")
    if text.count(", ") >= MOST_TERMS:
        raise Rejected(f"polynomial: at most {MOST_TERMS} terms")
    found: Polynomial = {}
    for part in text.split(", ") if text else ():
        match = TERM.fullmatch(part) if part.count(" ") == count else None
        powers = tuple(map(int, match[3].split())) if match else ()
        if match is None or sum(powers) > HIGHEST or powers in found or (whole and match[2]):
            raise Rejected(f"polynomial: {part[:60]!r} is no term, or one of these powers stands twice")
        found[powers] = Fraction(int(match[1]), int(match[2] or 1))
        if found[powers].denominator != int(match[2] or 1) or match[2] == "1":
            raise Rejected(f"polynomial: {part[:60]!r} is not in lowest terms")
    return found


def expanded(squares: Any, count: int) -> Polynomial:
    """The sum of weight times constraint times square: proofs/squares.md (1)."""
    if not isinstance(squares, list) or len(squares) > MOST_SQUARES:
        raise Rejected(f"squares: a list of at most {MOST_SQUARES}")
    sums: dict[tuple[Fraction, int], dict[Exponents, int]] = {}
    for item in squares:
        if not isinstance(item, list) or len(item) != 3:
            raise Rejected("squares: weight, constraint, polynomial")
        weight, number = quantity(item[0], "weight"), item[1]
        if weight < 0:
            raise Rejected("weight: at least 0")
        if type(number) is not int or not 0 <= number <= count:
            raise Rejected(f"constraint: 0 for none, or the number of one of {count} variables")
        terms = [(e, int(c)) for e, c in polynomial(item[2], count, whole=True).items()]
        total = sums.setdefault((weight, number), {})
        for n, (e, p) in enumerate(terms):
            for f, q in terms[n:]:
                to = tuple(map(add, e, f))
                total[to] = total.get(to, 0) + (p * q if f == e else 2 * p * q)
    found: Polynomial = {}
    for (weight, number), total in sums.items():
        for e, c in total.items():
            found[e] = found.get(e, Fraction(0)) + weight * c
            if number:  # times 1 - t**2
                up = (*e[: number - 1], e[number - 1] + 2, *e[number:])
                found[up] = found.get(up, Fraction(0)) - weight * c
    return found


def end(p: Polynomial, stated: Any, sign: int, count: int) -> Fraction:
    """The constant that p is nowhere below (sign 1) or above (-1), by an identity that holds exactly."""
    if not isinstance(stated, dict) or set(stated) != {"bound", "squares"}:
        raise Rejected("an end: bound and squares")
    bound = quantity(stated["bound"], "bound")
    sums, constant = expanded(stated["squares"], count), (0,) * count
    for e in p | sums | {constant: bound}:
        left = p.get(e, Fraction(0)) - (bound if e == constant else 0)
        if sign * left != sums.get(e, Fraction(0)):
            raise Rejected("squares: their weighted sum is not the polynomial less its bound")
    return bound


def expansion_of(d: Derivation, meaning: Meaning, witness: dict[str, Any], flows: Flows | None) -> Expansion:
    """What finds the polynomials near an obligation: proofs/squares.md (2)."""
    count, order = len(meaning.variables), witness["order"]
    if count > MOST_VARIABLES:
        raise Rejected(f"squares: in at most {MOST_VARIABLES} variables")
    if type(order) is not int or not 0 <= order <= MOST_ORDER:
        raise Rejected(f"order: a whole number up to {MOST_ORDER}")
    bits = arithmetic(witness["bits"]).bits
    forms = Rounded(count, bits, order) if bits else Exactly(count)
    names = [v.name for v in meaning.variables]
    return Expansion(d.terms, meaning.root, meaning.by, names, d.statement.libraries, forms, flows)


def squares(
    d: Derivation, meaning: Meaning, witness: dict[str, Any], ends: Sequence[str], flows: Flows | None
) -> tuple[dict[str, Fraction], int]:
    """The ends shown, and the number of pieces of the box: proofs/squares.md (3)."""
    trees, pieces, count = witness["trees"], witness["pieces"], len(meaning.variables)
    if not isinstance(trees, list) or not all(isinstance(t, str) for t in trees):
        raise Rejected("trees: a list of texts")
    if not isinstance(pieces, list) or not 0 < len(pieces) <= MOST_PIECES:
        raise Rejected(f"pieces: 1 to {MOST_PIECES}")
    if not ends or not set(ends) <= {"lower", "upper"}:
        raise Rejected("concludes: lower, upper, or both")
    expansion = expansion_of(d, meaning, witness, flows)
    found: dict[str, Fraction] = {}
    leaves = 0
    for box, token in boxes(list(product(*(v.cells for v in meaning.variables))), trees):
        if token != LEAF or leaves == len(pieces):
            raise Rejected(f"trees: {LEAF} at every leaf, and a piece for each")
        for name, x in shown(*expansion.over_box(box), pieces[leaves], ends, count).items():
            found[name] = min(found.get(name, x), x) if name == "lower" else max(found.get(name, x), x)
        leaves += 1
    if leaves != len(pieces):
        raise Rejected("pieces: more than leaves")
    return found, leaves


def shown(near: Polynomial, rest: Fraction, stated: Any, ends: Sequence[str], count: int) -> dict[str, Fraction]:
    """Bounds of what is within `rest` of a polynomial: those of the one stated, further out by what it may be off."""
    if not isinstance(stated, dict) or set(stated) != {"polynomial", *ends}:
        raise Rejected(f"a piece: polynomial, {', '.join(ends)}")
    p = polynomial(stated["polynomial"], count, whole=False)
    off = rest + size(count, {e: near.get(e, Fraction(0)) - p.get(e, Fraction(0)) for e in near | p})
    signs = {"lower": 1, "upper": -1}
    return {name: end(p, stated[name], signs[name], count) - signs[name] * off for name in ends}
