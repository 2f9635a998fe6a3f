"""Mutants of the checker: one comparison, sign or rounding direction of one module turned at a time.

A check that no test holds to can be lost unseen. So each is turned round in a copy of the package, never in place,
and a battery must notice. One of certificates (tests/checker/test_boundaries.py, test_stance_boundaries.py): a
certificate of its fixed list then gets another verdict, place or reason, or an assertion about one function fails. One
of claims, for the modules that read them (tests/checker/test_reading.py): a text of the corpus is then accepted,
refused or read otherwise, or an assertion fails. `EQUIVALENT` lists the turned expressions that change no verdict, each
with its reason; an entry whose expression is gone, or that the battery notices, is an error.
"""

from __future__ import annotations

import ast
import importlib
import importlib.abc
import importlib.machinery
import shutil
import signal
import sys
import tempfile
from collections import Counter
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from types import CodeType, FrameType, ModuleType
from typing import Any

CHECKER = Path(__file__).parents[1] / "ultibound" / "checker"
SECONDS = 3  # for one question: a mutant that loops is noticed by its time
TURNED: dict[type, type] = {ast.Lt: ast.LtE, ast.LtE: ast.Lt, ast.Gt: ast.GtE, ast.GtE: ast.Gt}
NEGATED: dict[type, type] = {
    ast.Lt: ast.GtE, ast.LtE: ast.Gt, ast.Gt: ast.LtE, ast.GtE: ast.Lt, ast.Eq: ast.NotEq, ast.NotEq: ast.Eq,
    ast.In: ast.NotIn, ast.NotIn: ast.In, ast.Is: ast.IsNot, ast.IsNot: ast.Is,
}  # fmt: skip
SIGNS: dict[type, type] = {ast.Add: ast.Sub, ast.Sub: ast.Add}
DIRECTIONS = {"min": "max", "decimal_down": "decimal_up", "bisect_left": "bisect_right"}
DIRECTIONS |= {other: name for name, other in DIRECTIONS.items()}
Key = tuple[str, str, str, str]  # module, function, expression, what it became (and which of several alike)


@dataclass(frozen=True)
class Mutant:
    key: Key
    source: str
    rank: int  # among the changes of the source, in order

    def code(self) -> CodeType:
        for n, (tree, _) in enumerate(changed_trees(self.source)):
            if n == self.rank:
                return compile(tree, f"<mutant of {self.key[0]}>", "exec")
        raise IndexError(self.rank)

    def __str__(self) -> str:
        module, function, old, new = self.key
        return f"{module}: {function}: {old}  ->  {new}"


def replacements(node: ast.AST) -> Iterator[ast.expr | ast.stmt]:
    """What one node is turned into, one change each."""
    if isinstance(node, ast.Compare):
        for k, op in enumerate(node.ops):
            for table in (TURNED, NEGATED):
                if type(op) in table:
                    yield ast.Compare(
                        node.left, [*node.ops[:k], table[type(op)](), *node.ops[k + 1 :]], node.comparators
                    )
    elif isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        yield node.operand
        match node.operand:
            case ast.BinOp(ast.UnaryOp(ast.USub(), inner), ast.FloorDiv() | ast.RShift(), right):
                yield ast.BinOp(inner, node.operand.op, right)
    elif isinstance(node, (ast.BinOp, ast.AugAssign)):
        if type(node.op) in SIGNS:
            other = SIGNS[type(node.op)]()
            yield (
                ast.BinOp(node.left, other, node.right)
                if isinstance(node, ast.BinOp)
                else ast.AugAssign(node.target, other, node.value)
            )
        if isinstance(node, ast.BinOp) and isinstance(node.op, (ast.FloorDiv, ast.RShift)):
            yield ast.UnaryOp(ast.USub(), ast.BinOp(ast.UnaryOp(ast.USub(), node.left), node.op, node.right))
    elif isinstance(node, ast.Call) and isinstance(node.func, ast.Name):
        if node.func.id in DIRECTIONS:
            yield ast.Call(ast.Name(DIRECTIONS[node.func.id], ast.Load()), node.args, node.keywords)
        if node.func.id == "abs":
            yield node.args[0]


def sites(node: ast.AST, inside: tuple[str, ...] = ()) -> Iterator[tuple[ast.AST, str, int | None, ast.AST, str]]:
    """Every node below, with the field of its parent that holds it and the function it stands in."""
    for name, value in ast.iter_fields(node):
        if name in ("annotation", "returns"):
            continue
        for k, child in enumerate(value) if isinstance(value, list) else ((None, value),):
            if isinstance(child, ast.AST):
                deeper = inside
                if isinstance(child, (ast.FunctionDef, ast.ClassDef)):
                    deeper = (*inside, child.name)
                yield node, name, k, child, ".".join(inside) or "(module)"
                yield from sites(child, deeper)


def changed_trees(source: str) -> Iterator[tuple[ast.Module, tuple[str, str, str]]]:
    """The tree of a module with one change after the other, and what was changed; one tree, so look at once."""
    tree = ast.parse(source)
    for parent, name, k, child, function in list(sites(tree)):
        for new in replacements(child):
            what = function, ast.unparse(child), ast.unparse(new)
            for part in ast.walk(new):
                if not hasattr(part, "lineno"):
                    ast.copy_location(part, child)
            put(parent, name, k, new)
            yield tree, what
            put(parent, name, k, child)


def mutants(module: str, source: str) -> list[Mutant]:
    """All mutants of one module's source; of several that read alike in one function, the later are numbered."""
    found, known = list[Mutant](), Counter[tuple[str, str, str]]()
    for n, (_, (function, old, new)) in enumerate(changed_trees(source)):
        known[function, old, new] += 1
        rank = known[function, old, new]
        found.append(Mutant((module, function, old, new if rank == 1 else f"{new} ({rank})"), source, n))
    return found


def put(parent: ast.AST, name: str, k: int | None, node: ast.AST) -> None:
    if k is None:
        setattr(parent, name, node)
    else:
        getattr(parent, name)[k] = node


class Copies(importlib.abc.MetaPathFinder, importlib.abc.Loader):
    """A copy of the checker's package, importable under another name, one module's code exchanged."""

    NAME = "checker_under_mutation"

    def __init__(self, package: Path = CHECKER) -> None:
        with tempfile.TemporaryDirectory() as folder:  # one state of all files, whatever happens to them meanwhile
            copy = Path(folder) / "checker"
            shutil.copytree(package, copy, ignore=shutil.ignore_patterns("__pycache__"))
            self.source = {p.stem: p.read_text(encoding="utf-8") for p in sorted(copy.glob("*.py"))}
        self.code = {m: compile(text, f"<copy of {m}>", "exec") for m, text in self.source.items()}
        self.changed: dict[str, CodeType] = {}

    def module(self, fullname: str) -> str | None:
        name = "__init__" if fullname == self.NAME else fullname.removeprefix(f"{self.NAME}.")
        return name if name in self.code else None

    def find_spec(
        self, fullname: str, path: Sequence[str] | None = None, target: ModuleType | None = None
    ) -> importlib.machinery.ModuleSpec | None:
        name = self.module(fullname)
        if name is None:
            return None
        return importlib.machinery.ModuleSpec(fullname, self, is_package=name == "__init__")

    def exec_module(self, module: ModuleType) -> None:
        name = str(self.module(module.__name__))
        exec(self.changed.get(name, self.code[name]), module.__dict__)

    @contextmanager
    def imported(self, changed: dict[str, CodeType]) -> Iterator[ModuleType]:
        """The package with some modules' code exchanged; nothing of it stays behind."""
        self.changed = changed
        sys.meta_path.insert(0, self)
        try:
            yield importlib.import_module(self.NAME)
        finally:
            sys.meta_path.remove(self)
            for name in [n for n in sys.modules if n == self.NAME or n.startswith(f"{self.NAME}.")]:
                del sys.modules[name]


class TooLong(BaseException):
    """Raised by the alarm; no handler of the checker catches it."""


def ring(number: int, frame: FrameType | None) -> None:
    raise TooLong


class Battery:
    """Named questions to a checker's package, each of which returns nothing or raises; the latest to notice first.

    Assertions about functions are taken to cost as much as a certificate or claim of `unknown` bytes, or more.
    """

    def __init__(self, questions: dict[str, Callable[[Any], None]], unknown: int = 1900) -> None:
        self.questions = dict(questions)
        cost = {name: len(getattr(q, "data", " " * unknown)) for name, q in questions.items()}
        self.order = sorted(questions, key=cost.__getitem__)  # cheap ones first

    def noticed(self, copies: Copies, changed: dict[str, CodeType]) -> str | None:
        """The first question whose answer changes; None if none does."""
        before = signal.signal(signal.SIGALRM, ring)
        name = "import"
        try:
            signal.setitimer(signal.ITIMER_REAL, SECONDS)
            with copies.imported(changed) as package:
                for name in self.order:
                    signal.setitimer(signal.ITIMER_REAL, SECONDS)
                    self.questions[name](package)
            return None
        except (Exception, TooLong):
            if name in self.questions:
                self.order.remove(name)
                self.order.insert(0, name)
            return name
        finally:
            signal.setitimer(signal.ITIMER_REAL, 0)
            signal.signal(signal.SIGALRM, before)


# (module, function, expression, what it became): why no verdict, place or reason changes
EQUIVALENT: dict[Key, str] = {
    ("theorems", "magnitude", "abs(line.concludes['upper'])", "line.concludes['upper']"):
        "a line concludes lower <= upper: where upper is below 0, the magnitude of lower is the larger one",
    ("results", "Results.route", "k >= 1", "k > 1"):
        "a bound is there only if the proved gain is below 1, and what is attained is at most what is proved",
    ("outcomes", "SeveralResults.of_route", "k < 1", "k <= 1"):
        "a bound is there only if the proved gain is below 1, and what is attained is at most what is proved",
    ("results", "Results.count", "after >= error", "after > error"): (
        "an error that stands still is given up at the largest number of steps as well"
    ),
    ("ranges", "Evaluator.__init__", "op == 'mark'", "op != 'mark'"):
        "terms that no variable moves have the same jet whether they are worked out once or for every box",
    ("ranges", "Evaluator.term", "payload != self.by", "payload == self.by"):
        "a mark is the name a derivative is taken by; below it nothing has a derivative by that name, so dg is empty",
    ("ranges", "Evaluator.corner", "side > 0", "side >= 0"): "a side is 1 or -1",
    ("ranges", "Evaluator.corner", "side > 0", "side >= 0 (2)"): "a side is 1 or -1",
    ("ranges", "Evaluator.taken", "side > 0", "side >= 0"): "a side is 1 or -1",
    ("ranges", "Evaluator.derivatives", "n > 1", "n >= 1"): "a power that is a term has an exponent of at least 2",
    ("ranges", "Evaluator.derivatives", "n > 2", "n >= 2"): "the power 0 of an interval is 1",
    ("ranges", "Evaluator.cell", "len(corners) // 2", "-(-len(corners) // 2)"): "a cell has an even number of corners",
    **{("ranges", "Evaluator.remembered", f"len({x}) > REMEMBERED", f"len({x}) {sign} REMEMBERED"):
       "how many jets are remembered to save time changes none of them: what is forgotten is evaluated anew"
       for x in ("self.met", "known") for sign in (">=", "<=")},
    **{("ranges", "Evaluator.place", "len(self.placed) > REMEMBERED", f"len(self.placed) {sign} REMEMBERED"):
       "what is remembered and what is placed anew are the same"
       for sign in (">=", "<=")},
    ("forms", "face", "side > 0", "side >= 0"): "a side is 1 or -1",
    ("forms", "face", "side > 0", "side >= 0 (2)"): "a side is 1 or -1",
    ("forms", "second_order", "j > i", "j >= i"): "j == i is the branch before",
    ("forms", "second_order", "j > i", "j <= i"): "the other half of a symmetric table",
    ("exact", "Exact.power", "low <= 0 <= high", "low < 0 <= high"): "at low = 0 the least magnitude is 0 as well",
    ("exact", "Exact.power", "low <= 0 <= high", "low <= 0 < high"): "at high = 0 the least magnitude is 0 as well",
    ("exact", "Exact.power", "abs(high)", "high (2)"): "the magnitude of low is the larger one wherever high is below 0",
    ("exact", "Exact.power", "abs(high)", "high"):
        "only where the exponent is even: a negative high is the least magnitude, and its power has the same value",
    **{("exact", "Exact.mul", f"{x}.numerator {sign}= 0", f"{x}.numerator {sign} 0"):
       "a product with an end at 0 is 0 whichever other end is taken"
       for x, sign in (("p", ">"), ("r", ">"), ("s", ">"), ("q", "<"), ("s", "<"), ("r", "<"))},
    **{("reals", "Scaled.mul", f"{x} {sign}= 0", f"{x} {sign} 0"): "a product with an end at 0 is 0 whichever other end is taken"
       for x, sign in (("p", ">"), ("r", ">"), ("s", ">"), ("q", "<"), ("s", "<"), ("r", "<"))},
    ("reals", "Scaled.div", "s < 0", "s <= 0"): "a divisor that ends at 0 is refused, turned round or not",
    ("reals", "Scaled.div", "p >= 0", "p > 0"): "0 is divided: the quotient is 0 whichever end divides",
    ("reals", "Scaled.div", "q >= 0", "q > 0"): "0 is divided: the quotient is 0 whichever end divides",
    ("reals", "Scaled._rising_odd", "a[0] < a[1]", "a[0] <= a[1]"): "both ends of a point are the same",
    ("reals", "Scaled._exp", "10 * whole > 7 * LARGEST", "10 * whole >= 7 * LARGEST"):
        "exp of 14000 is beyond the limit, and refused when it is held",
    ("reals", "magnitude", "low >= 0", "low > 0"): "at low = 0 the other branch gives the same pair",
    ("reals", "sine_of", "r < 0", "r <= 0"): "sin(n pi/2) is sin((2 - n) pi/2), and worked out alike",
    ("reals", "arc_of_inverse.part", "(a + b) // 2", "-(-(a + b) // 2)"): "a sum is exact wherever it is halved",
    ("reals", "arc_of_inverse", "p // ((n * n).bit_length() - 1)", "-(-p // ((n * n).bit_length() - 1))"):
        "one term more than are needed moves the sum by less than a unit",
    ("grammar", "enclosed", "p >= 0", "p > 0"): "the power 0 of an interval is 1, and so is 1 over it",
    ("numerals", "spelled", "power >= 0", "power > 0"): "10**0 is 1 above the line and below it",
    ("numerals", "placed", "n < 0", "n <= 0"): "0 has been given back by then",
    ("numerals", "placed", "power < 0 < point", "power <= 0 < point"): "a power of 0 has been written out by then",
    ("numerals", "placed", "power < 0", "power <= 0"): "a power of 0 has been written out by then",
    ("statement", "read_statement", "len(stances) > 1", "len(stances) >= 1"):
        "a claim with one stance is never longer than the limit of a claim's text, which is below this one",
    ("models", "Models.spans", "(e[k] - n) // 2", "-(-(e[k] - n) // 2)"): "n runs in steps of 2 from e[k]",
    ("models", "Models.spans", "e[k] - n", "e[k] + n"): "a binomial of the other half of its symmetric row",
    ("models", "Models.spans", "p + share * q", "p - share * q"): "all coefficients are turned alike, and magnitudes are taken",
    ("models", "Models.least", "bound <= 0", "bound < 0"):
        "a bound of 0 is below a quarter of the middle, unless both are 0: then the polynomial is, and is refused either way",
    ("models", "gather", "i > j", "i >= j"): "at i == j both are 0",
    ("models", "gather", "len(x) * len(y) > FEW_PRODUCTS", "len(x) * len(y) >= FEW_PRODUCTS"): "both ways give the same product",
    ("models", "steepest", "degrees[0] ** 2 * (degrees[0] ** 2 - 1) // 3", "-(-(degrees[0] ** 2 * (degrees[0] ** 2 - 1)) // 3)"):
        "n n (n n - 1) is a multiple of 3",
    ("rates", "Coefficients.reading", "len(corners) // 2", "-(-len(corners) // 2)"): "a cell has an even number of corners",
    ("matrices", "Image.shortened", "(x << bits) // self.unit", "-(-(x << bits) // self.unit)"):
        "rounded up or down, by less than 1, for which the rest allows either way",
    ("several", "gone_through", "known[1] is flows", "known[1] is not flows"):
        "leaves are kept to save time: every flow on a proof is one of the same stance, and encloses it",
    ("several", "gone_through", "count += 1", "count -= 1"): "how many leaves are kept to save time changes no leaf",
    ("several", "gone_through", "count <= KEPT", "count < KEPT"): "how many leaves are kept to save time changes no leaf",
    ("several", "gone_through", "count <= KEPT", "count < KEPT (2)"): "as above",
    ("several", "gone_through", "count <= KEPT", "count > KEPT (2)"): "leaves that are not kept are evaluated anew",
    ("flows", "Flows._enclosed", "len(self._found) == MOST_KEPT", "len(self._found) != MOST_KEPT"):
        "how many enclosures are kept to save time changes none of them",
    ("flows", "Flows.__init__", "MOST_TERMS // sum(map(len, polynomial.values())) + 1", "MOST_TERMS // sum(map(len, polynomial.values())) - 1"):
        "how many expansions are kept to save time changes none of them",
    ("flows", "Flows.__init__", "MOST_TERMS // sum(map(len, polynomial.values()))", "-(-MOST_TERMS // sum(map(len, polynomial.values())))"):
        "how many expansions are kept to save time changes none of them",
    ("flows", "Flows._expanded", "len(self._about) >= self.forms", "len(self._about) > self.forms"):
        "how many expansions are kept to save time changes none of them",
    ("flows", "Flows._expanded", "len(self._about) >= self.forms", "len(self._about) < self.forms"):
        "how many expansions are kept to save time changes none of them",
    ("flows", "Flows._at_time", "len(self._timed) >= self.forms", "len(self._timed) > self.forms"):
        "how many expansions are kept to save time changes none of them",
    ("flows", "Flows._at_time", "len(self._timed) >= self.forms", "len(self._timed) < self.forms"):
        "how many expansions are kept to save time changes none of them",
    ("expansions", "expanded", "most.bit_length() // 8", "-(-most.bit_length() // 8)"): "digits of a byte more",
    ("flows", "divisions", "lines[0] < g < lines[-1]", "lines[0] <= g < lines[-1]"): "the first cut is among the cuts",
    ("flows", "divisions", "lines[0] < g < lines[-1]", "lines[0] < g <= lines[-1]"): "the last cut is among the cuts",
    ("flows", "divisions", "set(inside) <= set(lines)", "set(inside) < set(lines)"): "the ends are no lines inside",
    ("matrices", "definite", "(pivot * x - first * y) // before", "-(-(pivot * x - first * y) // before)"):
        "every division is exact: what is divided is a minor times the pivot before (proofs/matrix.md (4))",
    ("matrices", "whole", "unit // x.denominator", "-(-unit // x.denominator)"): "a common multiple of all denominators",
    ("inequality", "Inequality.shown", "x + sign * y", "x - sign * y"): "both signs are taken",
    ("vertices", "vertices", "comb(len(v), states) * 2 ** states > MOST", "comb(len(v), states) * 2 ** states >= MOST"):
        "of two to six states and up to 64 rows there are never exactly so many choices",
    ("vertices", "inverted", "(pivot[k] * x - row[k] * y) // before", "-(-(pivot[k] * x - row[k] * y) // before)"):
        "every division is exact, as in matrices.definite (proofs/polytope.md, Numbers)",
    ("vertices", "inverted", "before > 0", "before >= 0"): "the last pivot is not 0",
    ("polynomials", "Expansion.corner", "side > 0", "side >= 0"): "a side is 1 or -1",
    ("polynomials", "Expansion.corner", "side > 0", "side >= 0 (2)"): "a side is 1 or -1",
    ("polynomials", "Expansion.reading.partial", "len(values) // 2", "-(-len(values) // 2)"): "a cell has an even number of corners",
    ("polynomials", "size", "(m - n) // 2", "-(-(m - n) // 2)"): "n runs in steps of 2 from m",
    ("polynomials", "size", "m - n", "m + n"): "a binomial of the other half of its symmetric row",
    ("polynomials", "size", *(f"turned.get(to, Fraction(0)) {sign} c * Fraction(comb(m, (m - n) // 2) * (2 if n else 1), 2 ** m)" for sign in "+-")):
        "all coefficients are turned alike, and magnitudes are taken",
    **{("gains", "around", f"x {a} {end}", f"x {a}= {end}"): "a refuted gain at an end of the proved ones is refused before"
       for a, end in (("<", "inner[0]"), (">", "inner[1]"))},
    ("tables", "read_library", "set(axes) <= set(header)", "set(axes) < set(header)"):
        "where the axes are all columns there are, the other half of the condition refuses",
}  # fmt: skip


@dataclass(frozen=True)
class Tally:
    """What became of one module's mutants."""

    module: str
    mutants: int
    killed: int
    equivalents: tuple[Key, ...]
    survivors: tuple[Mutant, ...]
    stale: tuple[Key, ...]  # explained as equivalent, and noticed all the same


def campaign(copies: Copies, battery: Battery, module: str, chosen: Sequence[Mutant]) -> Tally:
    """Every one of the chosen mutants put to the battery."""
    equal, survivors, stale = list[Key](), list[Mutant](), list[Key]()
    for mutant in chosen:
        by = battery.noticed(copies, {module: mutant.code()})
        if by is None and mutant.key in EQUIVALENT:
            equal.append(mutant.key)
        elif by is None:
            survivors.append(mutant)
        elif mutant.key in EQUIVALENT:
            stale.append(mutant.key)
    killed = len(chosen) - len(equal) - len(survivors)
    return Tally(module, len(chosen), killed, tuple(equal), tuple(survivors), tuple(stale))


def table(tallies: Sequence[Tally]) -> str:
    """One line a module, then what is left to be explained or was explained in vain."""
    lines = [f"{'module':<12}{'mutants':>9}{'killed':>9}{'equivalent':>12}{'survivors':>11}"]
    for t in tallies:
        lines.append(f"{t.module:<12}{t.mutants:>9}{t.killed:>9}{len(t.equivalents):>12}{len(t.survivors):>11}")
    lines += [f"survivor: {m}" for t in tallies for m in t.survivors]
    lines += [f"no equivalent: {': '.join(key)}" for t in tallies for key in t.stale]
    return "\n".join(lines)
