"""Gates differentiated, substituted and taken apart (proofs/stance.md)."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

from .errors import Bad
from .graph import Gate, Graph


def substituted(g: Graph, root: int, by: Mapping[int, int], whole: int | None = None) -> int:
    """A gate with others in place of some it is built from; quotients by `whole`, never zero, are cancelled."""
    new = dict(by)
    for k in g.reached((root,)):
        gate = g.gates[k]
        if k in new:
            continue
        args = [new[a] for a in gate.args]
        new[k] = k if args == list(gate.args) else _again(g, gate, args)
        quotient = g.gates[new[k]]
        if whole is not None and quotient.op == "div" and quotient.args[1] == whole:
            over = g.gates[quotient.args[0]]
            if over.op == "mul" and whole in over.args:
                new[k] = over.args[1] if over.args[0] == whole else over.args[0]
    return new[root]


def _again(g: Graph, gate: Gate, args: list[int]) -> int:
    if gate.op == "power" and gate.value is not None:
        return g.power(args[0], gate.value)
    return g.add(gate.op, *args, value=gate.value, name=gate.name)


def slope(g: Graph, root: int, seeds: Mapping[int, int]) -> int | None:
    """The derivative along variables whose own derivatives are given; None for zero. Raises Bad through corners."""
    d: dict[int, int | None] = {}
    one = g.number(1)

    def product(a: int | None, b: int | None) -> int | None:
        if a is None or b is None:
            return None
        return b if a == one else a if b == one else g.add("mul", a, b)

    def total(op: str, a: int | None, b: int | None) -> int | None:
        if b is None:
            return a
        if a is None:
            return b if op == "add" else g.add("neg", b)
        return g.add(op, a, b)

    for k in g.reached((root,)):
        gate = g.gates[k]
        inner = [d[a] for a in gate.args]
        if k in seeds:
            d[k] = seeds[k]
        elif not any(x is not None for x in inner):
            d[k] = None
        elif gate.op in ("add", "sub"):
            d[k] = total(gate.op, *inner)
        elif gate.op == "neg":
            d[k] = None if inner[0] is None else g.add("neg", inner[0])
        elif gate.op == "mul":
            d[k] = total("add", product(inner[0], gate.args[1]), product(gate.args[0], inner[1]))
        elif gate.op == "div":
            top = total("sub", inner[0], product(k, inner[1]))
            d[k] = None if top is None else g.add("div", top, gate.args[1])
        else:
            d[k] = product(_outer(g, k), inner[0])
    return d[root]


def hazards(g: Graph, root: int) -> dict[tuple[object, ...], int]:
    """Where a gate may not be defined: what decides it, and a gate that is defined there only."""
    found: dict[tuple[object, ...], int] = {}
    for k in g.reached((root,)):
        gate = g.gates[k]
        if gate.op == "div":
            found.setdefault(("div", gate.args[1]), k)
        elif gate.op in ("sqrt", "log", "tan", "asin", "acos", "reading"):
            found.setdefault((gate.op, gate.args, gate.name), k)
    return found


def _outer(g: Graph, k: int) -> int:
    """The derivative of a function of one argument, at its argument."""
    gate = g.gates[k]
    u, one = gate.args[0], g.number(1)
    match gate.op:
        case "power":
            p = gate.value or Fraction(0)
            return g.add("mul", g.number(p), g.power(u, p - 1))
        case "exp":
            return k
        case "sin":
            return g.add("cos", u)
        case "cos":
            return g.add("neg", g.add("sin", u))
        case "sinh":
            return g.add("cosh", u)
        case "cosh":
            return g.add("sinh", u)
        case "sqrt":
            return g.add("div", one, g.add("mul", g.number(2), k))
        case "log":
            return g.add("div", one, u)
        case "tan":
            return g.add("add", one, g.power(k, Fraction(2)))
        case "tanh":
            return g.add("sub", one, g.power(k, Fraction(2)))
        case "atan":
            return g.add("div", one, g.add("add", one, g.power(u, Fraction(2))))
        case "asin" | "acos":
            root = g.add("sqrt", g.add("sub", one, g.power(u, Fraction(2))))
            found = g.add("div", one, root)
            return found if gate.op == "asin" else g.add("neg", found)
    raise Bad(f"dynamics.rate: a time rate through {gate.op} cannot be formed; state it in a smooth form")


def at_zero(g: Graph, root: int, variables: set[int]) -> int | None:
    """A sum of products where some variables are zero; None for zero."""
    value: dict[int, int | None] = {}
    for k in g.reached((root,)):
        gate = g.gates[k]
        args = [value[a] for a in gate.args]
        left = [a for a in args if a is not None]
        if k in variables:
            value[k] = None
        elif args == list(gate.args):
            value[k] = k
        elif gate.op in ("add", "sub", "neg") and len(left) < len(args):
            minus = gate.op == "sub" and left and args[0] is None
            value[k] = None if not left else g.add("neg", left[0]) if minus else left[0]
        elif (gate.op == "mul" and len(left) < 2) or (gate.op == "div" and args[0] is None):
            value[k] = None
        elif gate.op in ("add", "sub", "neg", "mul", "div") and len(left) == len(args):
            value[k] = g.add(gate.op, *left)
        else:
            raise Bad(f"dynamics.rate: {gate.op} of a continuous state; rates have to be linear in them")
    return value[root]
