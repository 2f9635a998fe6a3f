"""Linearisation by sympy: assignments built gate by gate, differentiated, compiled into a program.

Every gate stays a symbol of its own, so shared subexpressions are never expanded, and nothing is rewritten across
gates into a form that the checker's forward differentiation would not see: the derivative of a system of
assignments is again a system, by the chain rule.
"""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache
from typing import Any

import sympy

from ..claim.graph import Gate, Graph
from .program import Program, Step

UNARY = ("exp", "log", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh", "sqrt")
Expr = Any  # sympy ships no types


class Reading(sympy.Function):  # type: ignore[misc]  # sympy ships no types
    """A library column read at axis values: Reading(library, column, axes…, orders…), orders of derivatives."""

    def fdiff(self, argindex: int = 1) -> Expr:
        axes, orders = reading_parts(self)
        axis = argindex - 3
        if orders[axis] == 1:  # multilinear: no second derivative along one axis within a cell
            return sympy.Integer(0)
        raised = [o + (k == axis) for k, o in enumerate(orders)]
        return Reading(self.args[0], self.args[1], *axes, *raised)


class Flow(sympy.Function):  # type: ignore[misc]  # sympy ships no types
    """An entry of the fundamental solution: Flow(entry, σ, parameters…, orders…), orders of derivatives by each."""

    def fdiff(self, argindex: int = 1) -> Expr:
        args, orders = flow_parts(self)
        raised = [o + (k == argindex - 2) for k, o in enumerate(orders)]
        return Flow(self.args[0], *args, *raised)


class Corner(sympy.Function):  # type: ignore[misc]  # sympy ships no types
    """Corner(kind, a, b): the larger ("max", "abs" of a and -a) or smaller ("min") of two terms."""


class Pick(sympy.Function):  # type: ignore[misc]  # sympy ships no types
    """Pick(kind, a, b, p, q): p where a is the one a corner takes, q where b is: its derivatives."""


def reading_parts(reading: Expr) -> tuple[list[Expr], list[int]]:
    rest = reading.args[2:]
    half = len(rest) // 2
    return list(rest[:half]), [int(o) for o in rest[half:]]


def flow_parts(flow: Expr) -> tuple[list[Expr], list[int]]:
    rest = flow.args[1:]
    half = len(rest) // 2
    return list(rest[:half]), [int(o) for o in rest[half:]]


class System:
    """Symbols and what each stands for, in order; `gate[symbol]` is the gate a symbol came from."""

    def __init__(self, graph: Graph, root: int) -> None:
        self.graph, self.root = graph, root
        self.symbol: dict[int, Expr] = {}
        self.rule: list[tuple[Expr, Expr]] = []
        reached = graph.reached((root,))
        varies: dict[int, bool] = {}
        written: dict[int, Expr] = {}
        for k in reached:
            gate = graph.gates[k]
            varies[k] = gate.op == "variable" or any(varies[a] for a in gate.args)
            if gate.op == "number":
                written[k] = _rational(gate.value)
                continue
            symbol = sympy.Symbol(f"g#{k}")
            if gate.op == "variable" or not varies[k]:
                written[k] = self.symbol[k] = symbol  # constants stay symbols: nothing is rewritten in them
            else:
                self.rule.append((symbol, _expression(gate, [written[a] for a in gate.args])))
                written[k] = self.symbol[k] = symbol
        if root not in self.symbol:
            self.symbol[root] = written[root]

    def marked(self, name: str) -> Expr | None:
        for k, symbol in self.symbol.items():
            gate = self.graph.gates[k]
            if gate.op == "mark" and gate.name == name:
                return symbol
        return None

    def variable(self, name: str) -> Expr:
        for k, symbol in self.symbol.items():
            if self.graph.gates[k].op == "variable" and self.graph.gates[k].name == name:
                return symbol
        raise KeyError(name)


def differentiated(rule: list[tuple[Expr, Expr]], of: Expr, by: Expr, tag: str) -> tuple[list[tuple[Expr, Expr]], Expr]:
    """The system extended by the derivatives by a symbol, and the expression of d(of)/d(by)."""
    slope: dict[Expr, Expr] = {by: sympy.Integer(1)}
    out: list[tuple[Expr, Expr]] = []
    for symbol, meaning in rule:
        out.append((symbol, meaning))
        if symbol == by:  # a marked name: its own expression is cut (proofs/forms.md)
            continue
        total = derived(meaning, slope)
        if total != 0:
            if total.is_Number or total.is_Symbol:
                slope[symbol] = total
            else:
                slope[symbol] = sympy.Symbol(f"{symbol}_{tag}")
                out.append((slope[symbol], total))
    return out, chained(of, slope)


def derived(meaning: Expr, slope: dict[Expr, Expr]) -> Expr:
    """The total derivative of one assignment; of a corner, that of whichever branch it takes."""
    if not isinstance(meaning, Corner | Pick):
        return chained(meaning, slope)
    first, second = (chained(x, slope) for x in meaning.args[-2:])
    return first if first == second else Pick(*meaning.args[:3], first, second)


def chained(meaning: Expr, slope: dict[Expr, Expr]) -> Expr:
    met = [s for s in meaning.free_symbols if s in slope]
    met.sort(key=lambda s: s.name)
    return sympy.Add(*(partial(meaning, s) * slope[s] for s in met))


@lru_cache(20_000)
def partial(meaning: Expr, symbol: Expr) -> Expr:
    """The derivative of one assignment; most recur in the programs of other obligations."""
    return sympy.diff(meaning, symbol)


def compiled(graph: Graph, root: int, by: str, variables: list[str], curved: bool = False) -> Program:
    """Program of a gate's value (or of its derivative by the marked name) and of its gradient.

    `curved` adds the second derivatives of the value.
    """
    system = System(graph, root)
    rule, wanted = system.rule, system.symbol[root]
    if by:
        mark = system.marked(by)
        if mark is None:
            rule, wanted = rule, sympy.Integer(0)
        else:
            rule, wanted = differentiated(rule, wanted, mark, "d")
    program = Program()
    registers = _native(graph, root, program)
    program.checks = tuple(sorted(set(registers.values())))
    known: dict[Expr, int] = {s: registers[k] for k, s in system.symbol.items() if s.is_Symbol}
    _assign(program, rule, known)
    program.value = _register(program, wanted, known)
    for v in variables:
        extended, slope = differentiated(rule, wanted, system.variable(v), f"x{v}")
        if slope != 0:
            _assign(program, extended, known)
            program.gradient[v] = _register(program, slope, known)
            for u in variables[: variables.index(v) + 1] if curved else ():
                twice, bend = differentiated(extended, slope, system.variable(u), f"y{u}")
                if bend != 0:
                    _assign(program, twice, known)
                    program.curvature[u, v] = _register(program, bend, known)
    return program


def _native(graph: Graph, root: int, program: Program) -> dict[int, int]:
    """Registers of the claim's own operations, untouched by symbolic rewriting."""
    registers: dict[int, int] = {}
    for k in graph.reached((root,)):
        gate = graph.gates[k]
        args = tuple(registers[a] for a in gate.args)
        if gate.op == "mark":
            registers[k] = args[0]
        elif gate.op == "neg":
            registers[k] = program.add(Step("mul", (program.add(Step("number", value=Fraction(-1))), args[0])))
        elif gate.op == "abs":
            minus = program.add(Step("mul", (program.add(Step("number", value=Fraction(-1))), args[0])))
            registers[k] = program.add(Step("abs", (args[0], minus)))
        elif gate.op == "reading":
            registers[k] = program.add(Step("reading", args, gate.value, gate.name, (0,) * len(args)))
        elif gate.op == "flow":
            registers[k] = program.add(Step("flow", args, name=gate.name, orders=(0,) * len(args)))
        else:
            registers[k] = program.add(Step(gate.op, args, gate.value, gate.name))
    return registers


def _assign(program: Program, rule: list[tuple[Expr, Expr]], known: dict[Expr, int]) -> None:
    for symbol, meaning in rule:
        if symbol not in known:
            known[symbol] = _register(program, meaning, known)


def _register(program: Program, e: Expr, known: dict[Expr, int]) -> int:
    """Register of an expression; equal subexpressions share one."""
    if e in known:
        return known[e]
    if e.is_Rational:
        step = Step("number", value=Fraction(int(e.p), int(e.q)))
    elif e == sympy.pi:
        step = Step("pi")
    elif e == sympy.E:
        step = Step("exp", (_register(program, sympy.Integer(1), known),))
    elif e.is_Add or e.is_Mul:
        op = "add" if e.is_Add else "mul"
        parts = [_register(program, a, known) for a in e.args]
        while len(parts) > 2:
            parts = [program.add(Step(op, (parts[0], parts[1]))), *parts[2:]]
        step = Step(op, (parts[0], parts[1]))
    elif e.is_Pow:
        return _power(program, e, known)
    elif isinstance(e, Reading):
        axes, orders = reading_parts(e)
        args = tuple(_register(program, a, known) for a in axes)
        step = Step("reading", args, Fraction(int(e.args[0])), str(e.args[1]).removeprefix("column "), tuple(orders))
    elif isinstance(e, Flow):
        rest, orders = flow_parts(e)
        args = tuple(_register(program, a, known) for a in rest)
        step = Step("flow", args, name=str(e.args[0]).removeprefix("flow "), orders=tuple(orders))
    elif isinstance(e, Corner):
        step = Step(e.args[0].name, tuple(_register(program, a, known) for a in e.args[1:]))
    elif isinstance(e, Pick):
        step = Step("pick", tuple(_register(program, a, known) for a in e.args[1:]), name=e.args[0].name)
    else:
        step = Step(type(e).__name__.lower(), tuple(_register(program, a, known) for a in e.args))
    known[e] = program.add(step)
    return known[e]


def _power(program: Program, e: Expr, known: dict[Expr, int]) -> int:
    base = _register(program, e.base, known)
    p = e.exp
    if not p.is_Rational or p.q not in (1, 2):  # exp(x)**… is folded by sympy into exp; nothing else arises
        log = program.add(Step("log", (base,)))
        known[e] = program.add(Step("exp", (program.add(Step("mul", (log, _register(program, p, known)))),)))
        return known[e]
    if p.q == 2:
        base = program.add(Step("sqrt", (base,)))
    n = int(p.p)
    whole = base if abs(n) == 1 else program.add(Step("power", (base,), Fraction(abs(n))))
    one = program.add(Step("number", value=Fraction(1)))
    known[e] = whole if n > 0 else program.add(Step("div", (one, whole)))
    return known[e]


def _rational(value: Fraction | None) -> Expr:
    q = value or Fraction(0)
    return sympy.Rational(q.numerator, q.denominator)


def _expression(gate: Gate, args: list[Expr]) -> Expr:
    if gate.op == "add":
        return args[0] + args[1]
    if gate.op == "sub":
        return args[0] - args[1]
    if gate.op == "mul":
        return args[0] * args[1]
    if gate.op == "div":
        return args[0] / args[1]
    if gate.op == "neg":
        return -args[0]
    if gate.op == "power":
        return args[0] ** int(gate.value or 1)
    if gate.op == "mark":
        return args[0]
    if gate.op == "reading":
        column = sympy.Symbol(f"column {gate.name}")
        return Reading(sympy.Integer(int(gate.value or 0)), column, *args, *(sympy.Integer(0) for _ in args))
    if gate.op == "flow":
        return Flow(sympy.Symbol(f"flow {gate.name}"), *args, *(sympy.Integer(0) for _ in args))
    if gate.op in ("abs", "max", "min"):
        return Corner(sympy.Symbol(gate.op), args[0], -args[0] if gate.op == "abs" else args[1])
    if gate.op in UNARY:
        return getattr(sympy, gate.op)(args[0])
    raise ValueError(f"{gate.op} has no symbolic form")
