"""Terms differentiated, replaced and taken apart: proofs/stance.md (1), (2)."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

from .terms import Terms


class Unprovable(Exception):
    """A well-formed claim, or an obligation, for which this checker has no theorem."""


def replaced(terms: Terms, root: int, by: Mapping[int, int], whole: int | None = None) -> int:
    """A term with some of its parts replaced by other terms; `whole`, which is never 0, is cancelled in quotients."""
    found: dict[int, int] = {}
    for k in terms.below(root):
        op, args, payload = terms.all[k]
        if k in by:
            found[k] = by[k]
        elif all(found[a] == a for a in args):
            found[k] = k
        elif op == "power" and isinstance(payload, Fraction):
            found[k] = terms.raised(found[args[0]], payload)
        else:
            found[k] = terms.put(op, tuple(found[a] for a in args), payload)
        top, below, _ = terms.all[found[k]]
        if top == "div" and below[1] == whole and terms.all[below[0]][0] == "mul" and whole in terms.all[below[0]][1]:
            factors = terms.all[below[0]][1]
            found[k] = factors[1] if factors[0] == whole else factors[0]
    return found[root]


def derivative(terms: Terms, root: int, rates: Mapping[int, int]) -> int | None:
    """∂/∂t along variables whose derivatives are given, None for zero: proofs/stance.md (1). Raises Unprovable."""
    put = terms.put
    found: dict[int, int | None] = {}

    def number(q: int | Fraction) -> int:
        return put("number", (), Fraction(q))

    def times(a: int | None, b: int | None) -> int | None:
        if a is None or b is None:
            return None
        one = number(1)
        return b if a == one else a if b == one else put("mul", (a, b))

    def plus(a: int | None, b: int | None, op: str = "add") -> int | None:
        if b is None:
            return a
        if a is None:
            return b if op == "add" else put("neg", (b,))
        return put(op, (a, b))

    for k in terms.below(root):
        op, args, payload = terms.all[k]
        slopes = [found[a] for a in args]
        if k in rates:
            found[k] = rates[k]
        elif all(s is None for s in slopes):
            found[k] = None
        elif op in ("add", "sub"):
            found[k] = plus(slopes[0], slopes[1], op)
        elif op == "neg" and slopes[0] is not None:
            found[k] = put("neg", (slopes[0],))
        elif op == "mul":
            found[k] = plus(times(slopes[0], args[1]), times(args[0], slopes[1]))
        elif op == "div":
            top = plus(slopes[0], times(k, slopes[1]), "sub")
            found[k] = None if top is None else put("div", (top, args[1]))
        elif op == "power" and isinstance(payload, Fraction):
            outer = put("mul", (number(payload), terms.raised(args[0], payload - 1)))
            found[k] = times(outer, slopes[0])
        else:
            found[k] = times(outer_slope(terms, k, op, args), slopes[0])
    return found[root]


def hazards(terms: Terms, root: int) -> dict[tuple[object, ...], int]:
    """Where a term may not be defined, each with a part that is defined there only."""
    found: dict[tuple[object, ...], int] = {}
    for k in terms.below(root):
        op, args, payload = terms.all[k]
        if op == "div":
            found.setdefault((op, args[1]), k)
        elif op in ("sqrt", "log", "tan", "asin", "acos", "reading"):
            found.setdefault((op, *args, payload if op == "reading" else None), k)
    return found


def outer_slope(terms: Terms, k: int, op: str, args: tuple[int, ...]) -> int:
    """The derivative of an elementary function by its argument, at the argument."""
    put, u = terms.put, args[0]
    one, two = (put("number", (), Fraction(n)) for n in (1, 2))
    square = terms.raised(u, Fraction(2))
    if op == "exp":
        return k
    if op in ("sin", "sinh", "cosh"):
        return put({"sin": "cos", "sinh": "cosh", "cosh": "sinh"}[op], (u,))
    if op == "cos":
        return put("neg", (put("sin", (u,)),))
    if op == "sqrt":
        return put("div", (one, put("mul", (two, k))))
    if op == "log":
        return put("div", (one, u))
    if op in ("tan", "tanh"):
        return put("add" if op == "tan" else "sub", (one, terms.raised(k, Fraction(2))))
    if op == "atan":
        return put("div", (one, put("add", (one, square))))
    if op in ("asin", "acos"):
        slope = put("div", (one, put("sqrt", (put("sub", (one, square)),))))
        return slope if op == "asin" else put("neg", (slope,))
    raise Unprovable(f"a time rate through {op}")


def without(terms: Terms, root: int, variables: set[int]) -> int | None:
    """A sum of products at zero of some variables, None for zero. Raises Unprovable."""
    found: dict[int, int | None] = {}
    for k in terms.below(root):
        op, args, _ = terms.all[k]
        parts = [found[a] for a in args]
        kept = [p for p in parts if p is not None]
        zero = None in parts
        if k in variables:
            found[k] = None
        elif parts == list(args):
            found[k] = k
        elif (op == "mul" and zero) or (op == "div" and parts[0] is None) or (op in ("add", "sub", "neg") and not kept):
            found[k] = None
        elif op in ("add", "sub") and zero:
            found[k] = terms.put("neg", (kept[0],)) if op == "sub" and parts[0] is None else kept[0]
        elif op in ("add", "sub", "neg", "mul", "div") and not zero:
            found[k] = terms.put(op, tuple(kept))
        else:
            raise Unprovable(f"a rate through {op} of a continuous state")
    return found[root]
