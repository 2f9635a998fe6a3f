"""What the checker's reader of claims answers, question by question, limits met exactly and passed by one.

The corpus (tests/corpus.py), each text accepted or refused as it says there and read as the search's own reader reads
it; then values and places of what is refused, and assertions about single functions. Every question takes the
checker's package as its argument, so that `tests/mutants.py` can put the same questions to a changed copy.
"""

from __future__ import annotations

import contextlib
import importlib
import io
import sys
import tempfile
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, fields, is_dataclass
from fractions import Fraction as Q
from functools import cached_property
from pathlib import Path
from types import SimpleNamespace
from typing import Any

from tests import corpus
from tests.checker.questions import all_hold
from tests.checker.test_boundaries import BASE as PROVED
from tests.checker.test_boundaries import but, claim, refuses, region, sealed
from tests.corpus import BASE, CSV, LIBRARY, STANCES, require, swap
from ultibound.claim import Claim, parse_claim

Question = Callable[[Any], None]
CASES: dict[str, Question] = {}
SLOW = ("long factors", "values", "large values", "long numbers", "requirements")  # 20 ms and more; in test_corpus.py
QUICK = [
    c
    for c in corpus.CASES
    if len(c.text) < 12_000 and len(c.name) < 200 and not (c.name.split()[1].isdigit() and c.name.endswith(SLOW))
]
# fmt: off


def unit(question: Question) -> Question:
    """Registers assertions about functions of the reader."""
    assert question.__name__ not in CASES
    CASES[question.__name__] = question
    return question


def read(checker: Any, text: str, data: dict[str, str] | None = None, **settings: str) -> Any:
    return checker.statement.read_statement(text, settings, data or {})


def refused(checker: Any, text: str, says: str, data: dict[str, str] | None = None, **settings: str) -> None:
    with refuses(checker.numerals.Refused, says):
        read(checker, text, data, **settings)


# the corpus

@dataclass(frozen=True)
class Read:
    """A text of the corpus."""

    case: corpus.Case

    @property
    def data(self) -> str:  # as long as the question is dear
        return self.case.text

    @cached_property
    def searched(self) -> Claim:
        """What the search's reader makes of it."""
        return parse_claim(self.case.text, self.case.settings, self.case.data, "c.toml")

    def __call__(self, checker: Any) -> None:
        case = self.case
        if case.accepted:
            agree(checker.statement.read_statement(case.text, case.settings, case.data), self.searched)
        else:
            with refuses(checker.numerals.Refused):
                checker.statement.read_statement(case.text, case.settings, case.data)


def same(mine: Any, theirs: Any) -> bool:
    """Whether two readers understand the same: expressions by their nodes, what holds others part by part."""
    if isinstance(theirs, Mapping):
        return set(mine) == set(theirs) and all(same(mine[k], v) for k, v in theirs.items())
    if isinstance(theirs, tuple):
        return len(mine) == len(theirs) and all(map(same, mine, theirs))
    if hasattr(theirs, "nodes"):
        names = [n.name for e in (mine, theirs) for n in e.nodes if n.op in ("name", "target", "next")]
        half = len(names) // 2
        shapes = [[(n.op, n.args, n.value) for n in e.nodes] for e in (mine, theirs)]
        return shapes[0] == shapes[1] and names[:half] == names[half:]
    if is_dataclass(theirs):
        return all(same(getattr(mine, f.name), getattr(theirs, f.name)) for f in fields(mine))
    return bool(mine == theirs)


def agree(mine: Any, theirs: Claim) -> None:
    assert list(mine.values) == list(theirs.values)
    for a, b in zip(mine.values.values(), theirs.values.values(), strict=True):
        assert a[0] <= b[1] and b[0] <= a[1] and (a[0] == a[1]) == (b[0] == b[1])
        # half the bits are lost where an arc sine is taken near 1
        assert a[1] - a[0] <= max(1, abs(a[0])) / Q(2**70)
    for field in fields(mine):
        if field.name != "values":
            assert same(getattr(mine, field.name), getattr(theirs, field.name)), field.name


for rank, of_corpus in enumerate(QUICK):
    CASES[f"{rank} {of_corpus.name[:60]}".encode("ascii", "replace").decode()] = Read(of_corpus)


# numbers rounded one way

@unit
def decimals_at_boundaries(checker: Any) -> None:
    down, up = checker.numerals.decimal_down, checker.numerals.decimal_up
    for q, digits, low, high in (
        (Q(0), 1, "0", "0"), (Q(1), 1, "1", "1"), (Q(9), 1, "9", "9"), (Q(10), 1, "10", "10"), (Q(99, 10), 1, "9", "10"), (Q(19, 2), 2, "9.5", "9.5"), (Q(999), 2, "990", "1000"), (Q(1000), 3, "1000", "1000"),
        (Q(1001), 3, "1000", "1010"), (Q(1, 3), 3, "0.333", "0.334"), (Q(2, 3), 3, "0.666", "0.667"), (Q(1, 8), 3, "0.125", "0.125"), (Q(1, 8), 2, "0.12", "0.13"), (Q(1, 16), 3, "0.0625", "0.0625"),
        (Q(999_999), 3, "999000", "1000000"), (Q(10**6), 1, "1000000", "1000000"), (Q(10**7), 1, "1e7", "1e7"), (Q(1, 10**5), 1, "0.00001", "0.00001"), (Q(1, 10**6), 1, "0.000001", "0.000001"), (Q(1, 10**7), 1, "1e-7", "1e-7"),
        (Q(10**7) + 1, 8, "10000001", "10000001"), (Q(10**20) + 1, 3, "1e20", "1.01e20"), (Q(10**20) - 1, 3, "9.99e19", "1e20"), (Q(1, 10**20) - Q(1, 10**30), 2, "9.9e-21", "1e-20"), (Q(10**7) - Q(1, 10**9), 3, "9990000", "1e7"),
    ):
        assert (down(q, digits), up(q, digits)) == (low, high), q
        against = {"0": "0"}
        assert (down(-q, digits), up(-q, digits)) == (against.get(high, f"-{high}"), against.get(low, f"-{low}")), -q
    for power in (*range(-40, 41), -9998, 9997):
        for first in (1, 2, 5, 9):
            for digits in (1, 2, 7):
                q, little = Q(first) * Q(10) ** power, Q(10) ** (power - digits - 3)
                value = checker.numerals.read_number
                assert value(down(q, digits)) == value(up(q, digits)) == q
                assert value(down(q + little, digits)) == q and value(up(q - little, digits)) == q
                assert value(up(q + little, digits)) == q + Q(10) ** (power - digits + 1)
                below = power - digits + (0 if first == 1 else 1)
                assert value(down(q - little, digits)) == q - Q(10) ** below, (q, digits)


@unit
def decimals_placed(checker: Any) -> None:
    placed, value = checker.numerals.placed, checker.numerals.read_number
    for n, power, text in (
        (0, 7, "0"), (5, 0, "5"), (-5, 0, "-5"), (50, -1, "5"), (500, 0, "500"), (1, 6, "1000000"), (1, 7, "1e7"), (12, 6, "12000000"), (12, 7, "1.2e8"), (10, 6, "1e7"), (12, -1, "1.2"), (12, -2, "0.12"), (12, -3, "0.012"), (12, -7, "0.0000012"),
        (12, -8, "1.2e-7"), (1, -6, "0.000001"), (1, -7, "1e-7"), (-123, -1, "-12.3"), (1, 9998, f"1{'0' * 9998}"), (1, 9999, f"1{'0' * 9999}"), (1, -9998, "1e-9998"), (1, -9999, "1e-9999"),
    ):
        got = placed(n, power)
        assert value(got) == Q(n) * Q(10) ** power
        if abs(power) < 9990:
            assert got == text, (n, power, got)
    assert placed(1, 9998) == "1e9998" and placed(1, 9999) == f"1{'0' * 9999}" and placed(12, 9997) == "1.2e9998"
    assert placed(12, 9998) == f"12{'0' * 9998}"
    assert placed(1, -9999) == "1e-9999" and placed(1, -10_000) == f"0.{'0' * 9999}1" and placed(12, -10_000) == "1.2e-9999"
    assert placed(12, -10_001) == f"0.{'0' * 9999}12"
    assert placed(1, 49_999) == f"1{'0' * 49_999}" and placed(11, -49_998) == f"0.{'0' * 49_996}11"
    assert placed(11, 49_998) == f"11{'0' * 49_998}"
    for n, power in ((1, 50_000), (11, 49_999), (1, -50_000), (11, -49_999)):
        with refuses(ValueError, "a number of more than 50000 digits"):
            placed(n, power)


@unit
def digits_of_numbers(checker: Any) -> None:
    numerals = checker.numerals
    for text, value in (("0", 0), ("-0", 0), ("10", 10), ("-7.25", Q(-29, 4)), ("1e0", 1), ("1e-1", Q(1, 10)), ("25e-1", Q(5, 2)), ("0.5e1", 5), ("1.50e2", 150), ("1e9999", 10**9999), ("1e-9999", Q(1, 10**9999))):
        assert numerals.spelled(text) == value, text
    for text in ("9" * 4000, "0." + "1" * 3999, "-" + "9" * 4000, "9" * 4000 + "e9999"):
        assert numerals.spelled(text) is not None
    for text in ("9" * 4001, "0." + "1" * 4000, "11." + "1" * 3999):
        with refuses(numerals.Refused, "a number of more than 4000 digits"):
            numerals.spelled(text)
    assert numerals.spelled("x") is None and numerals.spelling("") is None
    for text, value in (("0", 0), ("1/3", Q(1, 3)), ("-2/3", Q(-2, 3)), ("7", 7), ("0.0", 0), ("-0", 0), ("2.5", Q(5, 2)), ("1e2", 100)):
        assert numerals.read_number(text) == value, text
    for text in ("2/4", "3/1", "1/1", "-6/3"):
        with refuses(ValueError, f"'{text}' is not in lowest terms"):
            numerals.read_number(text)
    for text in ("0/1", "1/0", "1/-2", "", "x", "1/2.5"):
        with refuses(ValueError, "is not a number of the certificate format"):
            numerals.read_number(text)
    for text in ("9" * 50_000, "1/1" + "0" * 49_998, "1" + "0" * 49_997 + "/3"):
        assert numerals.read_number(text)
    for text in ("9" * 50_001, "1/1" + "0" * 49_999, "0." + "1" * 50_000):
        with refuses(ValueError, "a number of more than 50000 digits"):
            numerals.read_number(text)


@unit
def words_of_a_refusal(checker: Any) -> None:
    said = checker.numerals.Refused
    assert str(said("x" * 400)) == "x" * 400 and str(said("x" * 401)) == f"{'x' * 200} … {'x' * 200}"
    assert str(said("a" * 300 + "b" * 300)) == f"{'a' * 200} … {'b' * 200}" and str(said("a\x1bb")) == "a\ufffdb"


# the work of constants, and how it is counted

@unit
def work(checker: Any) -> None:
    g = checker.grammar
    for low, high, count in (
        (0, 0, 0), (0, 2**863 - 1, 0), (0, 2**863, 1), (-(2**863), 0, 1), (-(2**863) + 1, 0, 0), (-(2**863), 1, 1), (-1, 2**863, 1), (0, 2**1887 - 1, 1), (0, 2**1887, 2), (2**863, 2**1887, 2), (Q(1, 2**2000), Q(3, 2**2000), 0),
    ):
        assert g.kilobits((Q(low), Q(high))) == count, (low, high)
    ends: Any
    for ends, cost in (
        ((2**1022, 2**1022), 0), ((2**1023, 2**1023), 1), ((Q(1, 2**1022), Q(1, 2**1022)), 0), ((Q(1, 2**1023), Q(1, 2**1023)), 1), ((-(2**2047), -(2**2047)), 4), ((0, 2**863), 1), ((0, 2**862), 0), ((0, Q(1, 2**1023)), 0), ((0, 2**2911), 9),
    ):
        left = g.Work(10)
        left.spend((Q(ends[0]), Q(ends[1])))
        assert left.left == 10 - cost, ends
    left = g.Work(5)
    left.take(2)
    left.take(3)
    left.take(0)
    with refuses(g.Refused, "too long to be worked out"):
        left.take(1)
    assert [g.size(q) for q in (Q(8), Q(1, 7), Q(9, 7), Q(0), Q(-5, 16))] == [4, 3, 4, 1, 5]


@unit
def costs(checker: Any) -> None:
    g = checker.grammar
    for text, cost in (  # 16 an operation, 32 a function; more for what takes a kilobit
        ("1", 0), ("1e309", 1), ("1 + 1", 16), ("-1", 16), ("2**10", 16), ("(2**50)**20", 32), ("(2**33)**31", 33), ("sqrt(4)", 16), ("sqrt(2)", 16), ("abs(pi)", 32), ("min(1, 2)", 16), ("sin(0)", 32), ("sin(1)", 32), ("pi", 16),
        ("exp(590)", 32), ("exp(600)", 32 + 512 + 1), ("3 + exp(600)*0", 64 + 512 + 1), ("exp(exp(6.5))", 64 + 512 + 1), ("log(1e260)", 32 + 512), ("1e309*1e309", 16 + 2 + 4), ("sin(1e309)", 32 + 512 + 1), ("sin(-1e309)", 48 + 512 + 2),
        ("bezier(0.5, 1, 2)", 16 + 9), ("bezier(0.5, 1, 2, 3)", 16 + 16), ("bezier(1e260, 0, 0)", 16 + 9 * 2), ("bezier(0, 0, 1e260)", 16 + 9 * 2), ("bezier(0, 1e570, 0)", 16 + 1 + 9 * 5 + 1), ("0*sin(1)*1", 64),
    ):
        e = g.parse(text, {})
        left = g.Work(2**20)
        g.constant(e, g.Known({}), left)
        assert 2**20 - left.left == cost, (text, 2**20 - left.left)
        g.constant(e, g.Known({}), g.Work(cost))
        if cost:
            with refuses(g.Refused, "too long to be worked out"):
                g.constant(e, g.Known({}), g.Work(cost - 1))
    values = g.Known({"a": (Q(2**1023),) * 2})
    before = values.work.left
    g.constant(g.parse("a", values), values)
    assert before - values.work.left == 1


# values of constants

@unit
def values_of_constants(checker: Any) -> None:
    g = checker.grammar

    def value(text: str, a: tuple[Any, Any] = (0, 0)) -> Any:
        known = {"a": (Q(a[0]), Q(a[1]))}
        return g.constant(g.parse(text, known), known)

    for text, ends, low, high in (
        ("abs(a)", (-2, 1), 0, 2), ("abs(a)", (-1, 2), 0, 2), ("abs(a)", (1, 2), 1, 2), ("abs(a)", (-2, -1), 1, 2), ("abs(a)", (0, 2), 0, 2), ("min(a, 1)", (0, 2), 0, 1), ("max(a, 1)", (0, 2), 1, 2), ("clip(a, -1, 1)", (-2, 3), -1, 1),
        ("-a", (1, 2), -2, -1), ("a + 1", (1, 2), 2, 3), ("1 - a", (1, 3), -2, 0), ("a*a", (-1, 2), -2, 4), ("a/2", (-1, 2), Q(-1, 2), 1), ("1/a", (1, 2), Q(1, 2), 1), ("a**2", (-1, 2), 0, 4), ("a**-1", (1, 2), Q(1, 2), 1), ("a**-2", (-4, -2), Q(1, 16), Q(1, 4)),
        ("a**0", (-1, 2), 1, 1), ("a**0.5", (1, 4), 1, 2), ("a**-0.5", (1, 4), Q(1, 2), 1), ("a**1.5", (1, 4), 1, 8), ("sqrt(a)", (0, 4), 0, 2), ("bezier(a, 0, 2)", (0, 1), 0, 2),
    ):
        assert value(text, ends) == (low, high), text
    for text, ends, least, most in (("sin(a)", (-4, 0), -1, Q("0.7568024")), ("sin(a)", (0, 4), Q("-0.7568024"), 1), ("sin(a)", (-4, 1), -1, Q("0.84147"))):
        low, high = value(text, ends)
        assert low <= least and high >= most, (text, low, high)
    around: Any
    for text, around, place, end in (
        ("sin(a)", (0, Q(3, 2)), 0, 0), ("sin(a)", (Q(-3, 2), 0), 1, 0), ("tan(a)", (0, Q(3, 2)), 0, 0), ("tan(a)", (Q(-3, 2), 0), 1, 0), ("exp(a)", (0, 1), 0, 1), ("exp(a)", (-1, 0), 1, 1), ("log(a)", (1, Q(3, 2)), 0, 0), ("atan(a)", (-1, 0), 1, 0),
        ("sinh(a)", (0, 1), 0, 0), ("tanh(a)", (-1, 0), 1, 0), ("asin(a)", (0, Q(1, 2)), 0, 0),
    ):
        assert value(text, around)[place] == end, text
    for text, digits in (
        ("pi", "3.14159265358979323846264338327950288419716939937510582"), ("exp(1)", "2.71828182845904523536028747135266249775724709369995957"), ("log(2)", "0.69314718055994530941723212145817656807550013436025525"),
        ("sqrt(2)", "1.41421356237309504880168872420969807856967187537694807"), ("2**-0.5", "0.70710678118654752440084436210484903928483593768847403"), ("4*atan(1)", "3.14159265358979323846264338327950288419716939937510582"),
        ("sin(1)", "0.84147098480789650665250232163029899962256306079837106"), ("cos(1)", "0.54030230586813971740093660744297660373231042061792222"), ("abs(-pi)", "3.14159265358979323846264338327950288419716939937510582"),
    ):
        low, high = value(text)
        assert low < high <= low + Q(8, 2**160) and low - Q(1, 10**46) < Q(digits) < high + Q(1, 10**46), text
        assert max(low.denominator, high.denominator) <= 2**160
    assert value("min(1, pi)*3 + 0") == (3, 3)
    named = g.parse("v**n + v**2", {"n": (Q(2), Q(2))}).nodes
    assert [(n.op, n.value, n.name) for n in named if n.op == "power"] == [("power", 2, "n"), ("power", 2, None)]


@unit
def exact_powers(checker: Any) -> None:
    g = checker.grammar
    assert g.powered(Q(2**2047), Q(64)) == 2**131008 and g.powered(Q(1, 2**2047), Q(-64)) == 2**131008
    assert g.powered(Q(4**100), Q(-3, 2)) == Q(1, 2**300) and g.powered(Q(2), Q(1, 2)) is None and g.powered(Q(0), Q(0)) == 1
    a: Any
    p: Any
    for a, p in ((2**2048, 64), (2**2048, -64), (Q(1, 2**2048), 64)):
        with refuses(g.Refused, "a constant part whose exact value is too long"):
            g.powered(Q(a), Q(p))
    for a, p, says in ((0, Q(-1), "division by zero"), (0, Q(-1, 2), "division by zero"), (-1, Q(1, 2), "root of a negative number")):
        with refuses(g.Refused, says):
            g.powered(Q(a), p)
    for text, says in (
        ("v ; v", "';' at character 3"), (";", "';' at character 1"), ("v + ", "'more' expected, 'the end' found"), ("(v", "')' expected"), ("v)", "')' is left over"), ("min(v)", "min takes 2 argument(s), 1 found"), ("v" * 41, "cannot stand here"),
        ("1/0", "division by zero"), ("v**v", "'v' is no constant"), ("v**65", "is no integer or half-integer of at most 64"), ("v**-65", "is no integer or half-integer of at most 64"), ("v**0.25", "is no integer or half-integer of at most 64"),
    ):
        with refuses(g.Refused, says):
            g.parse(text, {})
    assert g.parse("v" * 40, {}).nodes[0].name == "v" * 40


# texts before they are parsed

@contextmanager
def limit(module: Any, name: str, value: int) -> Iterator[None]:
    before = getattr(module, name)
    setattr(module, name, value)
    try:
        yield
    finally:
        setattr(module, name, before)


@unit
def sizes(checker: Any) -> None:
    tables, statement = checker.tables, checker.statement
    for text, most in (("ab", 2), ("é", 2), ("", 0), ("\ud800", 3)):
        tables.bounded(text, most)
    for text, most in (("abc", 2), ("é", 1), ("\ud800", 2), ("x", 0)):
        with refuses(tables.Refused, f"more than {most} bytes"):
            tables.bounded(text, most)
    with limit(tables, "LARGEST", len(BASE)):
        read(checker, BASE)
    with limit(tables, "LARGEST", len(BASE) - 1):
        refused(checker, BASE, f"more than {len(BASE) - 1} bytes")
    with limit(tables, "LARGEST_FILE", len(CSV)):
        read(checker, LIBRARY, {"gaits.csv": CSV})
    with limit(tables, "LARGEST_FILE", len(CSV) - 1):
        refused(checker, LIBRARY, f"gaits.csv: more than {len(CSV) - 1} bytes", {"gaits.csv": CSV})
    with limit(tables, "MOST_ROWS", 4):
        read(checker, LIBRARY, {"gaits.csv": CSV})
        read(checker, LIBRARY, {"gaits.csv": CSV.rstrip("\n")})
    with limit(tables, "MOST_ROWS", 3):
        refused(checker, LIBRARY, "gaits.csv: at most 3 rows", {"gaits.csv": CSV})
    with limit(statement, "MOST_TEXT", 2 * len(STANCES)):
        read(checker, STANCES)
    with limit(statement, "MOST_TEXT", 2 * len(STANCES) - 1):
        refused(checker, STANCES, "stance: 2 stances of so long a claim; at most 1")
    assert (tables.LARGEST, tables.LARGEST_FILE, tables.MOST_ROWS, statement.MOST_TEXT) == (2**20, 2**26, 10**6, 2**23)


@unit
def nesting(checker: Any) -> None:
    for text in ("[" * 64 + "]" * 64, "[" * 63 + "{}" + "]" * 63, "[" + "[0.5, [1]], " * 99 + "]"):
        refused(checker, f"a = {text}\n", "unknown key 'a'")
    for text in ("[" * 65 + "]" * 65, "[" * 64 + "{}" + "]" * 64, "[[1], " * 65 + "]" * 65):
        refused(checker, f"a = {text}\n", "nested more than 64 deep")
    for text in ("a." * 64, "a. " * 64, '"a.b".' * 64, "b = 1 # a.a.a\n" + "a." * 64):
        refused(checker, f"{text}a = 1\n", "unknown key")
    for text in ("a." * 65, "a . " * 65, '"a".' * 65, "b = 1\n" + "a." * 65):
        refused(checker, f"{text}a = 1\n", "nested more than 64 deep")
    for text, line in (("'", 1), ("\n'", 2), ("a = 1\n\n'x\n'", 3), ('a = 1\n"x', 2), ('a = """\n\n', 1), ("a = 1\nb = '''\n'", 2)):
        refused(checker, text, f"TOML: line {line}: a text in quotation marks is not closed")


# what is refused, and where it says so

@unit
def places(checker: Any) -> None:
    two = "format = 1\nstate = { a = [0, 1], b = [0, 1] }\nnext = { a = 0, b = 0 }\ntarget = { a = 0, b = 0 }\n"
    for text, says in (
        (swap("next = { a = 0, b = 0 }\n", "", two), "next.a: one for each state"), (swap("next = { a = 0, b = 0 }", "next = { a = 0, b = 0, d = 0, c = 0 }", two), "next.c: one for each state"), (swap("target = { a = 0, b = 0 }", "target = { a = 0 }", two), "target.b: one for each state"),
        (swap("g = 9.81", 'g = "a"\na = "b"\nb = "g"'), "a -> b -> g -> a: built from itself"), (swap("g = 9.81", 'g = "c"\nc = "d"\nd = "g"'), "c -> d -> g -> c: built from itself"), (swap("g = 9.81", 'g = "g"'), "g -> g: built from itself"),
        (swap('w = "sqrt(g/0.62)"', 'w = "a"\na = "z"\nz = "w"'), "a -> z -> w -> a: built from itself"), (require("gain <= 1/0"), "require[1]: division by zero"), (require("settles <= 1"), "require[1]: '<=' found, nothing expected"), (require("gain > 1"), "require[1]: '>' found, < <= expected"),
        (require("settles") + '[[require]]\nthat = "speed"\n', "require[2]: 'speed' is no quantity"),
        (BASE + "[library]\nfile = 'a'\nat = {}\n", "library[1].file: 'a' is not there"), (swap("T = [0.36, 0.40]", "T = [0]"), "uncertain.T: a list of 2 to 2 is expected"),
    ):
        refused(checker, text, says)
    for text, says in (
        (CSV + "1,0.5\n", "gaits.csv: row 6: 2 cells, 3 columns"), (CSV.replace("0.21", "x"), "gaits.csv: row 5, reach: 'x' is no number"), (CSV + "0,0.3,0\n", "gaits.csv: row 6: this node stands twice"), (CSV + "2,0.3,0\n", "gaits.csv: 5 rows do not fill a grid"),
        ("speed,period\n", "gaits.csv: row 1: the axes"), (CSV.replace("reach", "gain"), "gaits.csv: row 1: no name of a column"), (CSV.replace("reach", "2x"), "gaits.csv: row 1: no name of a column"), (CSV.replace("reach", ""), "gaits.csv: row 1: no name of a column"),
        *((CSV.replace("0.21", f"0.2{c}1"), "gaits.csv: a byte order mark or control character") for c in "\0\t\x0b\r\x1f"), ("\ufeff" + CSV, "gaits.csv: a byte order mark or control character"),
    ):
        refused(checker, LIBRARY, says, {"gaits.csv": text})
    for c in "\0\x08\x0b\x0c\x0e\x1f\x7f\ud800\udfff":
        refused(checker, f"{BASE}# {c}\n", "a control character, byte order mark or surrogate")
    refused(checker, "\ufeff" + BASE, "a control character, byte order mark or surrogate")
    read(checker, BASE + "#\t\ufeff\ud7ff\ue000\x80\n")


@unit
def work_of_a_claim(checker: Any) -> None:
    """1e9999 takes 32 kilobits: 1024 where it is read, and as much where it is worked out."""
    long = "1e9999"
    for text, data, cost in (
        (BASE, {}, 0), (LIBRARY, {"gaits.csv": CSV}, 0), (LIBRARY, {"gaits.csv": CSV.replace("0.21", long)}, 1024), (swap("g = 9.81", f"g = {long}"), {}, 2 * 1024), (swap("v/2 + foot", f"v/{long}"), {}, 1024),
    ):
        for work, enough in ((cost, True), (cost - 1, False)):
            with limit(checker.grammar, "WORK", work):
                if enough:
                    read(checker, text, data)
                else:
                    refused(checker, text, "too long to be worked out", data)


# the command

def command(checker: Any, *arguments: str, run: Callable[..., int] | None = None) -> tuple[int, str, str]:
    """Exit status, standard output and standard error; `run` stands in for the check itself."""
    module: Any = importlib.import_module(f"{checker.__name__}.command")
    out, err, before, own = io.StringIO(), io.StringIO(), sys.argv, module.run
    try:
        sys.argv, module.run = ["check", *arguments], run or own
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            status = module.main()
    finally:
        sys.argv, module.run = before, own
    return status, out.getvalue(), err.getvalue()


@unit
def said_of_a_file(checker: Any) -> None:
    settled = region(claim(requires=["gain <= 0.5"])).entries("region", [("gain <= 0.5", "proved")])
    with tempfile.TemporaryDirectory() as folder:
        proved, undecided, bad, text, none = (str(Path(folder) / n) for n in ("proved.json", "undecided.json", "bad.json", "claim.toml", "none.json"))
        Path(proved).write_bytes(sealed(settled))
        Path(undecided).write_bytes(sealed(PROVED))
        Path(bad).write_bytes(sealed(but(PROVED, "proof 0 rule", "none")))
        Path(text).write_bytes(settled["claim"]["text"].encode())
        valid = "VALID: 11 lines and "
        words: Any
        for words, status, on_out, on_err in (
            ((proved,), 0, valid, ""), ((proved, "--all-proved"), 0, "requirements: 1 proved, 0 refuted, 0 undecided", ""), ((undecided,), 0, "requirements: 0 proved, 0 refuted, 1 undecided", ""), ((undecided, "--all-proved"), 1, "NOT ALL PROVED", ""),
            ((proved, "--lines"), 0, "   1  target[v]: lower 0, upper 0  [range]\n   2  ball: ", ""), ((proved, "--json"), 0, '"certificate": ', valid), ((bad,), 1, "INVALID: proof line 1: ", ""), ((bad, "--json"), 1, "", "INVALID: proof line 1: "),
            ((proved, "--claim", text), 0, valid, ""), ((undecided, "--claim", text), 1, "INVALID: claim: ", ""), ((bad, "--claim", text), 1, "INVALID: proof line 1: ", ""), ((none,), 2, "", "cannot be read"), ((text,), 2, "", "cannot be read: "), ((folder,), 2, "", "not a regular file"),
            ((), 2, "", "usage: "), ((proved, undecided), 2, "", "usage: "), (("--claim", text), 2, "", "usage: "), ((proved, "--claim"), 2, "", "usage: "), (("--other",), 2, "", "usage: "), ((proved, "--other"), 2, "", "usage: "),
            (("--claim", text, "--all-proved", "--lines", proved), 0, "  [range]", ""),
        ):
            found = command(checker, *words)
            assert found[0] == status and on_out in found[1] and on_err in found[2], (words, found)
            assert bool(found[1]) == bool(on_out) and bool(found[2]) == bool(on_err), (words, found)
            assert ("  [range]" in found[1]) == ("--lines" in words) and (found[1][:1] == "{") == ("--json" in words and status == 0)
            shown = found[2] if "--json" in words else found[1]
            for line in ("  proved     gain <= 0.5\n" if proved in words else "  undecided  settles\n", "This is about the model in the claim, not about a machine.\n"):
                assert (line in shown) == ("VALID: " in shown and "INVALID" not in shown), (words, found)
            assert ("NOT ALL PROVED" in found[1]) == (words == (undecided, "--all-proved"))
        module = importlib.import_module(f"{checker.__name__}.command")
        size = len(Path(proved).read_bytes())
        with limit(module, "LARGEST", size):
            assert command(checker, proved)[0] == 0
        with limit(module, "LARGEST", size - 1):
            assert f"larger than {size - 1} bytes" in command(checker, proved)[2]


@unit
def what_is_printed(checker: Any) -> None:
    module = importlib.import_module(f"{checker.__name__}.command")
    line: Any = {"proves": "ball", "rule": "largest-ball", "uses": [], "concludes": {}}
    assert module.told(line, []) == "ball: holds  [largest-ball]"
    line |= {"uses": [1, 3], "concludes": {"lower": "0", "upper": "1"}}
    assert module.told(line, []) == "ball: lower 0, upper 1  [largest-ball from 1, 3]"
    for proves, said in (("require[2]", "require[2] (b in left)"), ("left:require[1]", "left:require[1] (a)"), ("require[1]:", "require[1]:"), ("require[0]", "require[0]")):
        assert module.told({**line, "proves": proves}, ["a", "b in left"]) == f"{said}: lower 0, upper 1  [largest-ball from 1, 3]"
    asked = [SimpleNamespace(text="gain < 1", stance=None, over={}), SimpleNamespace(text="settles", stance="left", over={}), SimpleNamespace(text="settles", stance="left", over={"T": 1, "g": 2}), SimpleNamespace(text="gain < 1", stance=None, over={"T": 1})]
    derived = SimpleNamespace(statement=SimpleNamespace(requirements=asked))
    assert module.requirements(SimpleNamespace(derived=derived)) == ["gain < 1", "settles in left", "settles in left over T, g", "gain < 1 over T"]
    assert module.printable("a\x1b[31m\u202eä") == "a?[31m?ä" and module.printable("x" * 401) == "x" * 400

    def fails(error: type[BaseException]) -> Callable[..., int]:
        def run(*_: Any) -> int:
            raise error

        return run

    assert command(checker, "c.json", run=fails(KeyboardInterrupt))[0] == 130
    status, out, err = command(checker, "c.json", run=fails(ZeroDivisionError))
    assert (status, out, err) == (70, "", "internal error: ZeroDivisionError; nothing was concluded\n")
    assert command(checker, "c.json", run=lambda *_: 1)[0] == 1


@unit
def said_of_another_claim(checker: Any) -> None:
    module = importlib.import_module(f"{checker.__name__}.command")
    stated = {"text": "a\nb\nc\n", "set": {}, "data": [{"name": "a.csv", "text": "x\ny"}]}
    with tempfile.TemporaryDirectory() as folder:
        path, rows = Path(folder) / "claim.toml", Path(folder) / "a.csv"
        for text, of_rows, reason in (
            ("a\nb\nc\n", "x\ny", ""), ("a\nB\nc\n", "x\ny", "claim.toml line 2 differs"), ("a\nb\n", "x\ny", "claim.toml line 3 differs"), ("a\nb\nc\nd\n", "x\ny", "claim.toml line 4 differs"), ("a\nb\nc", "x\ny", "claim.toml line 1 differs"),
            ("", "x\ny", "claim.toml line 1 differs"), ("a\nb\nc\n", "x\nz", "a.csv line 2 differs"), ("A\nb\nc\n", "z\ny", "claim.toml line 1 differs"),
        ):
            path.write_bytes(text.encode())
            rows.write_bytes(of_rows.encode())
            found = module.about(checker.Verdict("valid", claim=stated), str(path))
            assert found.status == ("invalid" if reason else "valid") and reason in found.reason, (text, found)
            assert found.place == ("claim" if reason else "")
        changed = module.about(checker.Verdict("valid", claim={**stated, "set": {"b": "2", "a": "1"}}), str(path))
        assert (changed.status, changed.place) == ("invalid", "claim.set") and changed.reason.endswith(": a = 1, b = 2")


def test_reading() -> None:
    all_hold(CASES)
