"""Formulas as a small tree, built node by node from the claim's own expressions; nothing is rewritten.

Rendered as MathML, LaTeX or plain text by `typeset.py`; the same tree always gives the same text.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from ..checker.numerals import decimal_down
from ..claim.expression import Expression, Node
from ..claim.graph import Gate, Graph

DEEPEST, LARGEST = 40, 400  # of a formula that is typeset; beyond, an expression is shown as it is written
DIGITS = 20  # of a number that is typeset whole
_GREEK = (
    "alpha beta gamma delta epsilon zeta eta theta iota kappa lambda mu nu xi rho sigma tau phi chi psi omega "
    "Gamma Delta Theta Lambda Xi Sigma Phi Psi Omega"
)
LETTERS = dict(zip(_GREEK.split(), "αβγδεζηθικλμνξρστφχψωΓΔΘΛΞΣΦΨΩ", strict=True))
FUNCTIONS = {"asin": "arcsin", "acos": "arccos", "atan": "arctan"}


@dataclass(frozen=True, slots=True)
class Formula:
    """One part of a formula; `text` is a symbol, number, operator or function name, or the signs of a sum."""

    kind: str
    parts: tuple[Formula, ...] = ()
    text: str = ""
    sub: str = ""
    sup: str = ""


def number(value: Fraction | int) -> Formula:
    """An exact number: a decimal where that is short, else a fraction; a long one is cut and says so."""
    q = Fraction(value)
    if q < 0:
        return Formula("negative", (number(-q),))
    return Formula("number", text=_decimal(q)) if _decimal(q) else fraction(number(q.numerator), number(q.denominator))


def _decimal(q: Fraction) -> str:
    """A terminating decimal; of what is long only the first digits; "" for a fraction of short numbers."""
    if max(q.numerator, q.denominator) >= 10**DIGITS:
        return f"{_short(decimal_down(q, 10))}…"
    rest = q.denominator
    for prime in (2, 5):
        while rest % prime == 0:
            rest //= prime
    return str(q) if q.denominator == 1 else decimal_down(q, DIGITS) if rest == 1 else ""


def _short(text: str) -> str:
    """A long decimal with an exponent."""
    if len(text) <= 2 * DIGITS:
        return text
    units, _, decimals = text.partition(".")
    digits = (units + decimals).lstrip("0")
    power = len(units) - 1 if units != "0" else len(decimals.lstrip("0")) - len(decimals) - 1
    return f"{digits[0]}.{digits[1:10]}".rstrip("0").rstrip(".") + f"e{power}"


def symbol(name: str, sup: str = "") -> Formula:
    """A declared name: a Greek letter where it names one, what follows an underscore or a letter as a subscript."""
    base, _, sub = name.partition("_")
    if not base or sub.isdigit() or name.endswith("_"):
        return Formula("symbol", text=name, sup=sup)  # h_0 must not look like h0
    if not sub and len(base) > 1 and base[0].isalpha() and base[1:].isdigit():
        base, sub = base[0], base[1:]
    return Formula("symbol", text=LETTERS.get(base, base), sub=sub.replace("_", ", "), sup=sup)


def named(name: str) -> Formula:
    """A name as expressions have it: `v`, `next(v)` as v⁺, `target(v)` as v*, `w@2` as that of the second step."""
    if name.endswith(")"):
        head, _, inner = name[:-1].partition("(")
        if head in ("next", "target"):
            return symbol(inner, {"next": "+", "target": "*"}[head])
        if head == "error":
            return row(symbol(inner), op("−"), symbol(inner, "*"))
        return Formula("call", tuple(symbol(x) for x in inner.split(", ")), head)
    base, _, step = name.partition("@")
    return symbol(base) if not step else Formula("symbol", text=base, sub=f"step {step}")


def start(name: str) -> Formula:
    """A continuous state just after touchdown: x(0)."""
    return Formula("call", (number(0),), name)


def op(text: str) -> Formula:
    return Formula("operator", text=text)


def words(text: str) -> Formula:
    return Formula("words", text=text)


def row(*parts: Formula) -> Formula:
    return Formula("row", parts)


def fraction(a: Formula, b: Formula) -> Formula:
    return Formula("fraction", (a, b))


def partial(of: Formula, by: Formula) -> Formula:
    """∂of/∂by"""
    return Formula("fraction", (row(op("∂"), _kept(of)), row(op("∂"), _kept(by))), text="∂")


def _kept(f: Formula) -> Formula:
    return Formula("parentheses", (f,)) if f.kind in ("sum", "negative", "product", "fraction") else f


def bars(inner: Formula, double: bool = False) -> Formula:
    return Formula("bars", (inner,), "‖" if double else "|")


def call(name: str, *args: Formula) -> Formula:
    return Formula("call", args, name)


def product(*parts: Formula) -> Formula:
    return parts[0] if len(parts) == 1 else Formula("product", parts)


def power(base: Formula, exponent: Formula) -> Formula:
    return Formula("power", (base, exponent))


def total(parts: Sequence[tuple[str, Formula]]) -> Formula:
    """A sum of signed terms."""
    if len(parts) == 1:
        sign, only = parts[0]
        return only if sign == "+" else Formula("negative", (only,))
    return Formula("sum", tuple(p for _, p in parts), "".join(s for s, _ in parts))


def plus(*parts: Formula) -> Formula:
    return total([("+", p) for p in parts])


def minus(a: Formula, b: Formula) -> Formula:
    return total([("+", a), ("-", b)])


def equation(left: Formula, *rest: Formula | str) -> Formula:
    """Sides with relations between them: `equation(v, "=", a, "≤", b)`."""
    return row(left, *(op(x) if isinstance(x, str) else x for x in rest))


def interval(low: Formula, high: Formula) -> Formula:
    return Formula("interval", (low, high))


def listed(values: Sequence[Formula]) -> Formula:
    return Formula("set", tuple(values))


def written(e: Expression) -> Formula:
    """An expression of the claim as it was written, typeset; as its text where it is too deep for that."""
    found = _built(e.nodes, len(e.nodes) - 1)
    return Formula("code", text=" ".join(e.text.split())) if found is None else found


def of_gate(graph: Graph, root: int, known: dict[int, Formula] | None = None) -> Formula | None:
    """A gate as a formula; None where it is too long. `known` are formulas of some gates."""
    return _built(graph.gates, root, known)


def _built(nodes: Sequence[Node | Gate], root: int, known: dict[int, Formula] | None = None) -> Formula | None:
    done: dict[int, tuple[Formula, int, int]] = {k: (f, 1, 1) for k, f in (known or {}).items()}
    waiting = [root]
    while waiting:
        k = waiting[-1]
        left = [] if k in done else [a for a in nodes[k].args if a not in done]
        if left:
            waiting.extend(left)
            continue
        waiting.pop()
        if k in done:
            continue
        args = [done[a] for a in nodes[k].args]
        found = _one(nodes[k], [a[0] for a in args])
        flat = found.kind in ("sum", "product")
        depth = max((d + (f.kind != found.kind or not flat) for f, d, _ in args), default=1)
        size = 1 + sum(s for _, _, s in args)
        if depth > DEEPEST or size > LARGEST:
            return None
        done[k] = found, depth, size
    return done[root][0]


def _one(node: Node | Gate, args: list[Formula]) -> Formula:
    name, value = node.name or "", node.value or Fraction(0)
    match node.op:
        case "number":
            return number(value)
        case "name" | "variable" | "mark":
            return args[0] if args else named(name)
        case "time":
            return symbol("t")
        case "pi":
            return Formula("symbol", text="π")
        case "next" | "target":
            return named(f"{node.op}({name})")
        case "add" | "sub":
            return total([*_terms(args[0]), *_signed(args[1], node.op == "sub")])
        case "neg":
            return total(_signed(args[0], True)) if args[0].kind != "sum" else Formula("negative", (args[0],))
        case "mul":
            if args[0].kind == "negative":
                return Formula("negative", (product(*_factors(args[0].parts[0]), *_factors(args[1])),))
            return product(*_factors(args[0]), *_factors(args[1]))
        case "div":
            if args[0].kind == "fraction" and not args[0].text:  # a/b/c
                above, below = args[0].parts
                return fraction(above, product(*_factors(below), *_factors(args[1])))
            return fraction(*args)
        case "power":
            return power(args[0], number(value))
        case "sqrt":
            return Formula("root", (args[0],))
        case "abs":
            return bars(args[0])
        case "dt":
            inner = args[0]
            if inner.kind == "dot":
                return Formula("dot", inner.parts, inner.text + ".")
            return Formula("dot", (inner,), ".")
        case "reading":
            return named(name)
        case _:
            return Formula("call", tuple(args), FUNCTIONS.get(node.op, node.op))


def _terms(f: Formula) -> list[tuple[str, Formula]]:
    if f.kind == "sum":
        return list(zip(f.text, f.parts, strict=True))
    return [("-", f.parts[0])] if f.kind == "negative" else [("+", f)]


def _signed(f: Formula, flip: bool) -> list[tuple[str, Formula]]:
    """A right operand: what it takes away or adds, a sum kept in its parentheses when it is taken away."""
    if f.kind == "sum":
        return [("-", f)] if flip else _terms(f)
    sign, inner = _terms(f)[0]
    if flip and sign == "-":
        return [("+", inner)] if inner.kind != "number" else [("-", f)]
    return [("-" if flip or sign == "-" else "+", inner)]


def _factors(f: Formula) -> tuple[Formula, ...]:
    return f.parts if f.kind == "product" else (f,)
