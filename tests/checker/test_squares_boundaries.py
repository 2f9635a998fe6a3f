"""Weighted squares at exact equality (proofs/squares.md), and the polynomials near terms that they are about.

As in `test_boundaries.py`, whose way of writing certificates this shares: identities that hold exactly, so that every
number is known, a hair less of it is refused, and so is every coefficient but the right one.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from fractions import Fraction as Q
from math import prod
from types import SimpleNamespace
from typing import Any

from tests.checker import test_graph_boundaries, test_product_boundaries, test_several_boundaries
from tests.checker.questions import all_hold
from tests.checker.test_boundaries import (
    GONE,
    STEP,
    Case,
    Draft,
    Entries,
    Question,
    but,
    claim,
    limited,
    refuses,
    sealed,
)
from tests.checker.test_boundaries import region as lines_of_region
from tests.checker.test_stance_boundaries import fall, falling, proves, stood

CASES: dict[str, Question] = {}
OTHER, LESS = (
    "squares: their weighted sum is not the polynomial less its bound",
    "the squares show less than what is concluded",
)


def unit(question: Question) -> Question:
    """Registers assertions about functions of the checker."""
    assert question.__name__ not in CASES
    CASES[question.__name__] = question
    return question


def accept(name: str, entries: Entries, leaves: int | None = None) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "valid", leaves=leaves)


def reject(name: str, entries: Entries, place: str, reason: str) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "invalid", place, reason)


# tables of numbers: one line each reads better
# fmt: off

def hair(text: str, by: int) -> str:
    return str(Q(text) + by * Q("1" + STEP))


# v**2 - v from -1/4 to 2: v**2 - v + 1/4 = (2v - 1)**2/4; 2 + v - v**2 = 3/2 (1 - v**2) + 1/2 (v + 1)**2

P, V = "1 2, -1 1", "v*v - v"
LOWER = {"bound": "-1/4", "squares": [["1/4", 0, "2 1, -1 0"]]}
UPPER = {"bound": "2", "squares": [["3/2", 1, "1 0"], ["1/2", 0, "1 1, 1 0"]]}
PIECE = {"polynomial": P, "lower": LOWER, "upper": UPPER}
AT = 9  # the first line after those of the region


def squared(d: Draft, proves: str, uses: Sequence[int], pieces: Sequence[Any], trees: Sequence[str] = ("q",), bits: int = 0, order: int = 0, **concludes: str) -> int:
    return d.line("squares", proves, uses, {"bits": bits, "order": order, "pieces": list(pieces), "trees": list(trees)}, **concludes)


def asked(that: str, pieces: Sequence[Any], trees: Sequence[str] = ("q",), bits: int = 0, order: int = 0, verdict: str = "proved", **concludes: str) -> Entries:
    """One requirement over the region [-1, 1], by squares."""
    d = lines_of_region(claim(requires=[that]), points=False)
    squared(d, "require[1]", [4], pieces, trees, bits, order, **concludes)
    return d.entries("region", [(that.split('"')[1] if that.startswith('"') else that, verdict)])


GOOD = asked(f"value({V})", [PIECE], lower="-1/4", upper="2")
WITNESS = f"proof {AT - 1} witness"


def ends() -> None:
    """What is concluded: at equality, and a hair to either side."""
    accept("both ends", GOOD, leaves=5)
    for end, exact, inward in (("lower", "-1/4", 1), ("upper", "2", -1)):
        at = f"proof {AT - 1} concludes {end}"
        reject(f"{end}, more", but(GOOD, at, hair(exact, inward)), f"proof line {AT}", f"require[1]: {LESS}")
        accept(f"{end}, less", but(GOOD, at, hair(exact, -inward)))
        alone = but(GOOD, at, GONE, f"{WITNESS} pieces 0 {end}", GONE)
        accept(f"without the {end} end", alone, leaves=5)
        other = "upper" if end == "lower" else "lower"
        full = but(alone, "results requirements 0 value", {end: None, other: hair({"lower": "-1/4", "upper": "2"}[other], 0)})
        accept(f"without the {end} end, and the other", full)
        reject(f"without the {end} end, claimed", but(full, f"results requirements 0 value {end}", "-100" if end == "lower" else "100"), "results", f"[1].value.{end}: nothing was derived")
        reject(f"without the {end} end, more of the other", but(full, f"results requirements 0 value {other}", hair({"lower": "-1/4", "upper": "2"}[other], -inward)), "results", f"[1].value.{other}: more is claimed")
    full = but(GOOD, "results requirements 0 value", {"lower": "-1/4", "upper": "2"})
    accept("value exactly", full)
    for end, by in (("lower", 1), ("upper", -1)):
        reject(f"value, more at the {end} end", but(full, f"results requirements 0 value {end}", hair(full["results"]["requirements"][0]["value"][end], by)), "results", f"[1].value.{end}: more is claimed")
    # bounds that leave more than nothing: as squares show them, not as they are named
    for end, squares in (("lower", [*LOWER["squares"], ["1" + STEP, 0, "1 0"]]), ("upper", [*UPPER["squares"], ["1" + STEP, 0, "1 0"]])):
        bound = hair(str(PIECE[end]["bound"]), -1 if end == "lower" else 1)
        loose = but(GOOD, f"{WITNESS} pieces 0 {end}", {"bound": bound, "squares": squares})
        reject(f"a hair loose, {end}", loose, f"proof line {AT}", LESS)
        accept(f"a hair loose, {end}, less", but(loose, f"proof {AT - 1} concludes {end}", bound))


def verdicts() -> None:
    """Strict and not, at equality and a hair beside it; `always` compares with 0."""
    for that, verdict in (
        (f"value({V}) >= -1/4", "proved"), (f"value({V}) > -1/4", "undecided"), (f"value({V}) >= -1/4 + 1{STEP}", "undecided"), (f"value({V}) > -1/4 - 1{STEP}", "proved"),
        (f"value({V}) <= 2", "proved"), (f"value({V}) < 2", "undecided"), (f"value({V}) <= 2 - 1{STEP}", "undecided"), (f"value({V}) < 2 + 1{STEP}", "proved"),
    ):
        for end in ("both", "lower", "upper"):
            needed = "lower" if ">" in that else "upper"
            entries = asked(that, [PIECE], lower="-1/4", upper="2")
            if end != "both":
                other = "upper" if end == "lower" else "lower"
                entries = but(entries, f"{WITNESS} pieces 0 {other}", GONE, f"proof {AT - 1} concludes {other}", GONE)
            told = verdict if end in ("both", needed) else "undecided"
            entries["results"]["requirements"][0]["verdict"] = told
            accept(f"{that} by {end}", entries)
            for wrong in sorted({"proved", "refuted"} - {told}):
                reject(f"{that} by {end}: {wrong}", but(entries, "results requirements 0 verdict", wrong), "results", f"verdict: {wrong} is claimed, {told} was derived")
    for that, p, bound, verdict in ((f"always({V} >= -1/4)", "1 2, -1 1, 1/4 0", "0", "proved"), (f"always({V} > -1/4)", "1 2, -1 1, 1/4 0", "0", "undecided"), (f"always({V} > -1/4 - 1{STEP})", f"1 2, -1 1, {hair('1/4', 1)} 0", hair("0", 1), "proved")):
        entries = asked(that, [{"polynomial": p, "lower": {**LOWER, "bound": bound}}], verdict=verdict, lower=bound)
        accept(that, entries)
        wrong = "refuted" if verdict == "proved" else "proved"
        reject(f"{that}: {wrong}", but(entries, "results requirements 0 verdict", wrong), "results", f"{wrong} is claimed, {verdict} was derived")
    # slopes of v/2 + w: by w 1, by u nothing
    entries = asked("sensitivity(v, w) >= 1", [{"polynomial": "1 0 0", "lower": {"bound": "1", "squares": []}}], lower="1")
    band = {"of": "v", "by": "w", "lower": "1", "upper": None}
    accept("a sensitivity", but(entries, "results sensitivities", [band]))
    for key, value in (("lower", hair("1", 1)), ("upper", "100")):
        reject(f"a sensitivity, {key}", but(entries, "results sensitivities", [{**band, key: value}]), "results", f"results.sensitivities.{key}: ")
    nothing = asked("sensitivity(v, u) >= 0", [{"polynomial": "", "lower": {"bound": "0", "squares": [["0", 0, "7 0 0"], ["5", 0, ""]]}}], lower="0")
    nothing["claim"]["text"] = nothing["claim"]["text"].replace("[next]", "u = [0, 1]\n[next]")
    accept("no slope at all", but(nothing, "results sensitivities", [{"of": "v", "by": "u", "lower": "0", "upper": None}]))
    # in no variable at all
    tight("a number", asked("value(2)", [{"polynomial": "2", "lower": {"bound": "2", "squares": []}, "upper": {"bound": "3", "squares": [["1/4", 0, "-2"]]}}], lower="2", upper="3"))
    reject("a number of variables", asked("value(2)", [{"polynomial": "2 0", "lower": {"bound": "2", "squares": []}}], lower="2"), f"proof line {AT}", "polynomial: '2 0' is no term")


def stated() -> None:
    """A stated polynomial that is off by c T_2 or by a constant: so far are bounds out."""
    off = "1/1000"
    for name, p, lower, upper in (
        ("a constant", f"{P}, {off} 0", hair(LOWER["bound"], 0), str(2 + 2 * Q(off))), ("below", f"{P}, -{off} 0", str(Q(LOWER["bound"]) - 2 * Q(off)), "2"),
    ):
        by = Q(off) * (-1 if "-1/1000" in p else 1)
        piece = {"polynomial": p, "lower": {**LOWER, "bound": str(Q(LOWER["bound"]) + by)}, "upper": {**UPPER, "bound": str(2 + by)}}
        tight(f"off by {name}", asked(f"value({V})", [piece], lower=lower, upper=upper))
    # c (2 v**2 - 1) more: (2 c + 1) v**2 - v - c; above it 2 + c, and c more
    c = Q(off)
    p = f"{1 + 2 * c} 2, -1 1, {-c} 0"
    piece = {"polynomial": p, "upper": {"bound": str(2 + c), "squares": [[str(Q(3, 2) + 2 * c), 1, "1 0"], ["1/2", 0, "1 1, 1 0"]]}}
    tight("off by c T_2", asked(f"value({V})", [piece], upper=str(2 + 2 * c)))
    # T_0/2 + T_2/2 - T_1
    tight("off by all of it", asked(f"value({V})", [{"polynomial": "", "upper": {"bound": "0", "squares": []}}], upper="2"))


def tight(name: str, entries: Entries) -> None:
    """What is concluded is exact: a hair more is refused."""
    number = len(entries["proof"])
    exact = entries["proof"][-1]["concludes"]
    accept(name, entries)
    for end, by in (("lower", 1), ("upper", -1)):
        if end in exact:
            reject(f"{name}: more at the {end} end", but(entries, f"proof {number - 1} concludes {end}", hair(exact[end], by)), f"proof line {number}", LESS)


# x y + 1 = 1/2 (x + y)**2 + 1/2 (1 - x**2) + 1/2 (1 - y**2), of y in [-1/2, 1/2] half of it

TWO = {"polynomial": "1/2 1 1", "lower": {"bound": "-1/2", "squares": [["1/4", 0, "1 1 0, 1 0 1"], ["1/4", 1, "1 0 0"], ["1/4", 2, "-1 0 0"]]}}


def numbers(witness: Any, path: str) -> Iterator[tuple[str, Any, Any]]:
    """Every number of a witness and what it becomes: the path, the old and the new entry."""
    if isinstance(witness, dict | list):
        for key, x in witness.items() if isinstance(witness, dict) else enumerate(witness):
            yield from numbers(x, f"{path} {key}")
    elif isinstance(witness, int):
        yield path, witness, witness + 1
        if witness:
            yield path, witness, witness - 1
    else:
        for found in re.finditer(r"-?[0-9]+(/[0-9]+)?", witness):
            old = Q(found[0])
            for new in (old + 1, old - 1, -old):
                if new != old and not (new < 0 <= old and "," not in witness and " " not in witness and path.endswith("squares 0 0")):
                    yield path, witness, f"{witness[: found.start()]}{new}{witness[found.end() :]}"


def coefficients() -> None:
    """Any one number of a witness changed, and it proves nothing."""
    for name, entries, piece in (
        ("one", GOOD, PIECE), ("two", asked("value(v*w)", [TWO], lower="-1/2"), TWO),
    ):
        accept(f"coefficients of {name}", entries)
        seen: set[str] = set()
        for path, _, new in numbers(piece, f"{WITNESS} pieces 0"):
            reason = OTHER
            if isinstance(new, int) and not 0 <= new <= (1 if name == "one" else 2):
                reason = "constraint: 0 for none, or the number of one of"
            elif path.endswith(" 0") and str(new).startswith("-"):
                reason = "weight: at least 0"
            elif isinstance(new, str) and ("polynomial" in path or path.endswith(" 2")):
                terms = [x.split(" ") for x in new.split(", ")]
                if any(x[0] == "0" or "-" in "".join(x[1:]) for x in terms) or len({tuple(x[1:]) for x in terms}) < len(terms):
                    reason = "is no term, or one of these powers stands twice"
            if f"{path} {new}" in seen or (path.endswith(" 2") and new in ("-1 0 0", "1 0 0", "-1 0")):
                continue  # the square of the opposite polynomial is the same
            seen.add(f"{path} {new}")
            reject(f"coefficients of {name}: {path.removeprefix(WITNESS)} {new}", but(entries, path, new), f"proof line {AT}", reason)
        for end in sorted(set(piece) - {"polynomial"}):
            squares: Any = piece[end]["squares"]  # type: ignore[index]  # of an end
            for n in range(len(squares)):
                reject(f"coefficients of {name}: {end} without {n}", but(entries, f"{WITNESS} pieces 0 {end} squares {n}", GONE), f"proof line {AT}", OTHER)
        accept(f"coefficients of {name}, of opposite sign", but(entries, f"{WITNESS} pieces 0 lower squares 0 2", "-2 1, 1 0" if name == "one" else "-1 1 0, -1 0 1"))


def shapes() -> None:
    """What a witness may hold, and the first thing it may not."""
    term, twice = "is no term, or one of these powers stands twice", f"{P}, 1 1"
    digits = "1" + "0" * 399
    for path, value, reason in (
        ("", {"bits": 0, "order": 0, "pieces": [PIECE]}, "witness: the keys of squares are bits, order, pieces, trees"), ("trees", "q", "trees: a list of texts"), ("trees", [1], "trees: a list of texts"), ("trees", None, "trees: a list of texts"),
        ("pieces", [], "pieces: 1 to 10000"), ("pieces", {"0": PIECE}, "pieces: 1 to 10000"), ("pieces", "q", "pieces: 1 to 10000"), ("pieces", [PIECE, PIECE], "pieces: more than leaves"), ("trees", [], "0 trees for 1 cells"), ("trees", ["q", "q"], "2 trees for 1 cells"),
        ("trees", ["q q"], "a tree goes on after its last leaf"), ("trees", ["0 q"], "a tree ends before all of its box is covered"), ("trees", ["d"], "trees: q at every leaf, and a piece for each"), ("trees", ["0 q q"], "trees: q at every leaf, and a piece for each"), ("trees", [""], "trees: q at every leaf"), ("trees", ["1 q q"], "trees: q at every leaf"),
        ("order", -1, "order: a whole number up to 40"), ("order", 41, "order: a whole number up to 40"), ("order", True, "order: a whole number up to 40"), ("order", "0", "order: a whole number up to 40"), ("order", None, "order: a whole number up to 40"),
        ("bits", 23, "bits: 0 for exact rationals, or 24 to 4096"), ("bits", True, "bits: 0 for exact rationals"), ("bits", "0", "bits: 0 for exact rationals"),
        ("pieces 0", [], "a piece: polynomial, lower, upper"), ("pieces 0", {**PIECE, "more": ""}, "a piece: polynomial, lower, upper"), ("pieces 0 lower", GONE, "a piece: polynomial, lower, upper"), ("pieces 0 polynomial", GONE, "a piece: polynomial, lower, upper"),
        ("pieces 0 lower", [], "an end: bound and squares"), ("pieces 0 lower bound", GONE, "an end: bound and squares"), ("pieces 0 lower squares", GONE, "an end: bound and squares"), ("pieces 0 upper more", "", "an end: bound and squares"),
        ("pieces 0 lower bound", 0, "bound: a proved number is written as text"), ("pieces 0 lower bound", "nan", "bound: 'nan' is not a number"), ("pieces 0 lower bound", "-2/8", "bound: '-2/8' is not in lowest terms"),
        ("pieces 0 lower squares", {}, "squares: a list of at most 20000"), ("pieces 0 lower squares", "1", "squares: a list of at most 20000"), ("pieces 0 lower squares 0", ["1/4", 0], "squares: weight, constraint, polynomial"), ("pieces 0 lower squares 0", ["1/4", 0, "2 1", ""], "squares: weight, constraint, polynomial"),
        ("pieces 0 lower squares 0", "abc", "squares: weight, constraint, polynomial"), ("pieces 0 lower squares 0", {"0": 1, "1": 2, "2": 3}, "squares: weight, constraint, polynomial"),
        ("pieces 0 lower squares 0 0", 1, "weight: a proved number is written as text"), ("pieces 0 lower squares 0 0", hair("0", -1), "weight: at least 0"), ("pieces 0 lower squares 0 0", "inf", "weight: 'inf' is not a number"),
        *((f"pieces 0 lower squares 0 {1}", x, "constraint: 0 for none, or the number of one of 1 variables") for x in (-1, 2, True, False, "0", None, "1", [])),
        *((f"pieces 0 {x}", ["2 1"], "polynomial: a text of terms") for x in ("polynomial", "lower squares 0 2")), ("pieces 0 polynomial", None, "polynomial: a text of terms"), ("pieces 0 lower squares 0 2", 2, "polynomial: a text of terms"),
        *((f"pieces 0 {x}", text, term) for x in ("polynomial", "lower squares 0 2") for text in ("1", "1 1 1", "2 1,-1 0", "2 1, ", ", 2 1", "2  1", " 2 1", "2 1 ", "+2 1", "02 1", "0 1", "-0 1", "2 01", "2 -1", "2 1.5", "2.5 1", "2 100", "2 65", "1 1, 2 0, 1 1", "2 1\n", "2\t1", "\u0662 1", "2 1;", f"{digits}0 1", "x 1", "1/0 1", "1/-2 1", "1/02 1", f"1/{digits}0 1")),
        ("pieces 0 polynomial", twice, term), ("pieces 0 polynomial", "2/4 1", "polynomial: '2/4 1' is not in lowest terms"), ("pieces 0 polynomial", "2/1 1", "polynomial: '2/1 1' is not in lowest terms"), ("pieces 0 lower squares 0 2", "1/2 1", term),
        ("pieces 0 polynomial", f"{P}, {digits} 64", OTHER), ("pieces 0 lower squares 0 2", f"2 1, -1 0, {digits} 64", OTHER), ("pieces 0 polynomial", f"{P}, 1/{digits} 64", OTHER),
    ):
        kind = "str" if not isinstance(value, str | int) else ""
        reject(f"shape {path} {value!r:.80}{kind} {len(CASES)}", but(GOOD, f"{WITNESS} {path}".rstrip(), value), f"proof line {AT}", reason)
    for order in (0, 1, 40):
        accept(f"order {order}", but(GOOD, f"{WITNESS} order", order))
    accept("a weight of 0, and no polynomial", but(GOOD, f"{WITNESS} pieces 0 lower squares", [*LOWER["squares"], ["0", 0, "5 64"], ["7", 1, ""]]))
    for concludes in ({}, {"middle": "0"}, {"lower": "-1/4", "upper": "2", "middle": "0"}, {"gain": "1"}):
        reject(f"concludes {sorted(concludes)}", but(GOOD, f"proof {AT - 1} concludes", concludes), f"proof line {AT}", "concludes: lower, upper, or both")
    reject("concludes a number", but(GOOD, f"proof {AT - 1} concludes lower", 0), f"proof line {AT}", "concludes.lower: a proved number is written as text")
    for name, uses, reason in (
        ("slope[v,v]", [4], "squares: of requirements only"), ("target-miss[v]", [], "squares: of requirements only"), ("target-miss[v]", [4], "this obligation rests on no set"), ("target[v]", [], "squares: of requirements only"), ("image[v]", [4], "this obligation rests on no set"), ("require[2]", [4], "require[2] is no obligation"), ("require[0]", [4], "is no obligation"),
        ("require[1]", [], "require[1] needs a line that gives its set"), ("require[1]", [4, 4], "uses: the one line that gives the set"), ("require[1]", [1], "uses: the one line that gives the set"), ("over[1]:require[1]", [4], "uses: lines about other ranges"), ("left:require[1]", [4], "left: no stance"),
    ):
        reject(f"squares of {name} on {uses}", but(GOOD, f"proof {AT - 1} proves", name, f"proof {AT - 1} uses", uses), f"proof line {AT}", reason)
    again = but(GOOD, "proof", [*GOOD["proof"], GOOD["proof"][-1]])
    reject("squares twice", again, "results", "require[1] is proved more than once by squares")
    reject("squares of another set", but(GOOD, f"proof {AT - 1} uses", [2]), "results", "require[1]: over another set than the gain")


# v = -1/2 + t/2: v**2 - v = 3/4 - t + t**2/4 from 0 to 2; v = 1/2 + t/2: t**2/4 - 1/4, from -1/4 to 0

LEFT: Entries = {"polynomial": "1/4 2, -1 1, 3/4 0", "lower": {"bound": "0", "squares": [["1/4", 1, "1 0"], ["1/2", 0, "1 1, -1 0"]]}, "upper": {"bound": "2", "squares": [["3/4", 1, "1 0"], ["1/2", 0, "1 1, 1 0"]]}}
RIGHT: Entries = {"polynomial": "1/4 2, -1/4 0", "lower": {"bound": "-1/4", "squares": [["1/4", 0, "1 1"]]}, "upper": {"bound": "0", "squares": [["1/4", 1, "1 0"]]}}
HALVES = asked(f"value({V})", [LEFT, RIGHT], ["0 q q"], lower="-1/4", upper="2")


def pieces() -> None:
    """Two halves, or listed values: the least of all lower ends, and the largest of the upper ones."""
    left, right, both = LEFT, RIGHT, HALVES
    accept("two halves", both, leaves=6)
    for end, value, by in (("lower", "-1/4", 1), ("upper", "2", -1)):
        reject(f"two halves, more at the {end} end", but(both, f"proof {AT - 1} concludes {end}", hair(value, by)), f"proof line {AT}", LESS)
    for name, trees, found, reason in (("turned round", ["0 q q"], [right, left], LESS), ("one piece less", ["0 q q"], [left], "trees: q at every leaf, and a piece for each"), ("one piece more", ["0 q q"], [left, right, right], "pieces: more than leaves"), ("a leaf less", ["0 q"], [left], "a tree ends before all of its box is covered"), ("a leaf of another form", ["0 q d"], [left, right], "trees: q at every leaf")):
        reject(f"two halves, {name}", but(both, f"{WITNESS} trees", trees, f"{WITNESS} pieces", found), f"proof line {AT}", reason)
    d = lines_of_region(claim(requires=["value(u)"], uncertain='w = ["-1/2", "1/2"]\nu = { values = [2, -1, "1/3"] }'), points=False)
    flat = [{"polynomial": f"{x} 0", "lower": {"bound": x, "squares": []}, "upper": {"bound": x, "squares": []}} for x in ("2", "-1", "1/3")]
    squared(d, "require[1]", [4], flat, ["q", "q", "q"], lower="-1", upper="2")
    listed = d.entries("region", [("value(u)", "proved")])
    accept("listed values", listed, leaves=7)
    for end, value, by in (("lower", "-1", 1), ("upper", "2", -1)):
        reject(f"listed values, more at the {end} end", but(listed, f"proof {AT - 1} concludes {end}", hair(value, by)), f"proof line {AT}", LESS)
    reject("listed values, one left out", but(listed, f"{WITNESS} trees", ["q", "q"], f"{WITNESS} pieces", flat[:2]), f"proof line {AT}", "2 trees for 3 cells")
    # a range of no width
    d = lines_of_region(claim(requires=["value(u*v)"], uncertain='w = ["-1/2", "1/2"]\nu = [2, 2]'), points=False)
    squared(d, "require[1]", [4], [{"polynomial": "2 0 1", "upper": {"bound": "2", "squares": [["1", 0, "1 0 1, -1 0 0"], ["1", 2, "1 0 0"]]}}], upper="2")
    tight("a range of no width", d.entries("region", [("value(u*v)", "proved")]))


def near() -> None:
    """What has no polynomial near it is refused, whatever is stated."""
    for that, bits, reason in (
        ("value(1/(v + 2))", 0, "a quotient is no polynomial"), ("value(1/(v - v))", 0, "a quotient is no polynomial"), ("value(0*(1/v))", 0, "a quotient is no polynomial"), ("value(exp(v))", 0, "no polynomial with rational coefficients"), ("value(pi*v)", 0, "no polynomial with rational coefficients"), ("value(sqrt(v + 2))", 0, "no polynomial with rational coefficients"),
        ("value(v**64*v)", 0, "a polynomial of so high a degree, or with fractions that long"), ("value(atan(v))", 24, "no polynomial is known to be near an inverse trigonometric function"), ("value(asin(v/2))", 24, "inverse trigonometric"), ("value(acos(v/2))", 24, "inverse trigonometric"),
        ("value(abs(v))", 0, "both branches of a corner are met"), ("value(abs(v + 1))", 0, "both branches of a corner are met"), ("value(max(v, 1))", 0, "both branches"), ("value(min(v, -1))", 0, "both branches"), ("value(max(v, w))", 24, "both branches"),
        ("value(sqrt(v + 1))", 24, "sqrt of values that may not be positive"), ("value(log(v + 1))", 24, "log of values that may not be positive"), ("value(1/v)", 24, "inverse of values that may not be positive"), ("value(0*log(v))", 24, "log of values that may not be positive"), ("value(tan(2*v))", 24, "inverse of values that may not be positive"),
        ("value(v**62)", 24, "a power beyond 60"), ("value((v + 3)**-1)", 0, "a quotient is no polynomial"), ("value(v**0/(v - 1))", 24, "inverse of values"),
    ):
        reject(f"nothing near {that}", asked(that, [{"polynomial": "", "lower": {"bound": "-9", "squares": [["9", 0, "1 0"]]}}], bits=bits, order=3, lower="-9"), f"proof line {AT}", reason)
    for that, p, squares in ((f"value(max({V}, v - 4))", P, LOWER), (f"value(-min(-3, {V}) - 3 + ({V}))", P, LOWER), (f"value(abs({V} + 3) - 3)", P, LOWER), (f"value(-abs(-1/3 - ({V})) + {V} + ({V}) + 1/3)", P, LOWER), (f"value(({V})/2*2 + 1/2/(v*v - v*v + 1) - 1/2)", P, LOWER)):
        if "1/3" not in that:
            tight(f"one branch, {that}", asked(that, [{"polynomial": p, "lower": squares}], lower="-1/4"))
        else:
            reject(f"two branches, {that}", asked(that, [{"polynomial": p, "lower": squares}], lower="-1/4"), f"proof line {AT}", "both branches of a corner are met")
    # rounded: a tenth of v, between two units, and what a product loses
    for that, units in ROUNDED:
        upper = str(1 + Q(units, 1 << 24))
        entries = asked(that, [{"polynomial": "1 1", "upper": {"bound": "1", "squares": [["1/2", 1, "1 0"], ["1/2", 0, "1 1, -1 0"]]}}], bits=24, order=2, upper=upper)
        tight(f"rounded {that}", entries)


ROUNDED = [  # that is v, and by how many units of 2**-24 it may seem more: a fifth where a cube is left out
    ("value(v*(1/10)*10)", 37), ("value(v/10*10)", 47), ("value(exp(v/16)*exp(-v/16)*v)", 1569), ("value(v + 1/3 - 1/3)", 2), ("value(v + v**3/10 - v**3/10)", 3_355_448),
]


def agreements() -> None:
    """A range and squares of one requirement: the closer ends of both."""
    text = f"value({V})"
    for name, low, high, value in (("both", "-9/4", "3", ("-1/4", "2")), ("neither", "-5/4", "2", ("-1/4", "2"))):
        d = lines_of_region(claim(requires=[text]), points=False)
        squared(d, "require[1]", [4], [PIECE], lower="-1/4", upper="3")
        d.range("require[1]", low, "2", [4], ["0 0 m m 0 m m"], bits=24) if name == "both" else d.range("require[1]", low, high, [4], ["0 0 m m 0 m m"], bits=24)
        entries = d.entries("region", [(text, "proved")])
        full = but(entries, "results requirements 0 value", {"lower": value[0], "upper": value[1]})
        accept(f"agreed, {name}", full)
        for end, by in (("lower", 1), ("upper", -1)):
            reject(f"agreed, {name}, more at the {end} end", but(full, f"results requirements 0 value {end}", hair(value[end == "upper"], by)), "results", f"[1].value.{end}: more is claimed")
    reject("agreed, of another set", but(full, f"proof {AT} uses", [2]), "results", "require[1]: over another set than the gain")
    alone = but(full, f"{WITNESS} pieces 0 upper", GONE, f"proof {AT - 1} concludes upper", GONE)
    accept("agreed, with one end of squares", alone)
    # squares alone, of a value also taken: refuted
    d = lines_of_region(claim(requires=[f"value({V}) < 2"]), points=False)
    squared(d, "require[1]", [4], [PIECE], lower="-1/4", upper="2")
    d.point("require[1]", {"v": "-1"}, "2", uses=[4])
    refuted = d.entries("region", [(f"value({V}) < 2", "refuted")])
    accept("refuted beside squares", refuted)
    reject("refuted beside squares, proved", but(refuted, "results requirements 0 verdict", "proved"), "results", "proved is claimed, refuted was derived")


@unit
def two_arguments(checker: Any) -> None:
    agreed, span, rejected = checker.results.agreed, checker.results.Span, checker.numerals.Rejected

    def lines(*ends: tuple[int | None, int | None]) -> list[Any]:
        return [SimpleNamespace(concludes={n: Q(x) for n, x in zip(("lower", "upper"), pair, strict=True) if x is not None}) for pair in ends]

    assert agreed("it", []) is None
    for ends, low, high in (([(1, 4)], 1, 4), ([(1, 4), (2, 5)], 2, 4), ([(2, 5), (1, 4)], 2, 4), ([(1, 4), (None, 3)], 1, 3), ([(1, 4), (2, None)], 2, 4), ([(None, 3)], None, 3), ([(2, None)], 2, None), ([(1, 2), (2, 3)], 2, 2), ([(2, None), (None, 2)], 2, 2)):
        assert agreed("it", lines(*ends)) == span(low, high), ends
    for ends in ([(1, 2), (3, 4)], [(3, 4), (1, 2)], [(3, None), (None, 2)]):
        with refuses(rejected, "it: its two proofs contradict each other"):
            agreed("it", lines(*ends))


def sets() -> None:
    """Of a ball that is not shown to be kept, of several states, of stances, and under ranges of its own."""
    asked_ = ["value(v*v) <= 1/4", "value(w*w) <= 1/4"]
    d = Draft(claim(requires=asked_))
    d.range("target[v]", "0", "0")
    d.theorem("smaller-ball", "ball", [1], radius="1/2")
    square = {"polynomial": "1/4 2", "upper": {"bound": "1/4", "squares": [["1/4", 1, "1 0"]]}}
    for n in (1, 2):
        squared(d, f"require[{n}]", [2], [square], upper="1/4")
    part = d.entries(None, [(asked_[0], "undecided"), (asked_[1], "proved")])
    accept("a ball that is not kept", part)
    reject("a ball that is not kept, proved", but(part, "results requirements 0 verdict", "proved"), "results", "proved is claimed, undecided was derived")
    reject("a ball that is not kept, its range", but(part, "results requirements 0 value", {"lower": None, "upper": "9"}), "results", "[1].value.upper: nothing was derived")
    accept("a ball that is not kept, without the state", but(part, "results requirements 1 value", {"lower": None, "upper": "1/4"}))
    # over ranges that the requirement gives
    over = asked(f'"value({V})"\nover = {{ v = [-1, 1] }}', [PIECE], lower="-1/4", upper="2")
    accept("over the same", over)
    wider = asked(f'"value({V})"\nover = {{ v = [0, 1] }}', [{"polynomial": "1/4 2, -1/4 0", "lower": {"bound": "-1/4", "squares": [["1/4", 0, "1 1"]]}, "upper": {"bound": "0", "squares": [["1/4", 1, "1 0"]]}}], lower="-1/4", upper="0")
    tight("over another range", wider)
    # several states
    lines = test_several_boundaries.region(["value(x*y)", "value(p) <= 1/8"])
    cross = {"polynomial": "1 1 1", "lower": {"bound": "-1", "squares": [["1/2", 0, "1 1 0, 1 0 1"], ["1/2", 1, "1 0 0"], ["1/2", 2, "1 0 0"]]}}
    linear = {"polynomial": "1/8 1", "upper": {"bound": "1/8", "squares": [["1/16", 0, "1 1, -1 0"], ["1/16", 1, "1 0"]]}}
    squared(lines, "require[2]", [8], [linear], upper="1/8")
    squared(lines, "require[1]", [8], [cross], lower="-1")
    tight("two states", lines.found("region", [("value(x*y)", "proved"), ("value(p) <= 1/8", "proved")], {"kind": "box", "weights": {"x": "1", "y": "2"}}))
    # a point refutes what is not about the set, in whatever norm
    for rule in ("squares", "range", "none"):
        ball = test_product_boundaries.ball(["value(8*h) < 1"])
        if rule == "squares":
            squared(ball, "require[1]", [4], [{"polynomial": "1 1", "upper": {"bound": "1", "squares": [["1/2", 0, "1 1, -1 0"], ["1/2", 1, "1 0"]]}}], upper="1")
        elif rule == "range":
            ball.range("require[1]", "-1", "1", [4])
        ball.point("require[1]", {"h": "1/8"}, "1", uses=[4])
        found = "undecided" if rule == "none" else "refuted"
        accept(f"a point beside {rule}", ball.found(None, [("value(8*h) < 1", found)], test_product_boundaries.PLAIN))
    on_set = test_product_boundaries.ball(["value(x) < 1"])
    squared(on_set, "require[1]", [4], [{"polynomial": "1 1", "upper": {"bound": "1", "squares": [["1/2", 0, "1 1, -1 0"], ["1/2", 1, "1 0"]]}}], upper="1")
    on_set.point("require[1]", {"x": "1"}, "1", uses=[4])
    accept("a point of the set", on_set.found(None, [("value(x) < 1", "undecided")], test_product_boundaries.PLAIN))
    reject("a point of the set, refuted", on_set.found(None, [("value(x) < 1", "refuted")], test_product_boundaries.PLAIN), "results", "refuted is claimed, undecided was derived")
    # stances: on both, or on one
    for that, names in (("value(x*x) <= 169/64", ("left", "right")), ('"value(x*x) <= 1"\nin = "left"', ("left",))):
        steps = test_graph_boundaries.regions([that])
        for name in names:
            most = "1" if name == "left" else "169/64"
            squared(steps, f"{name}:require[1]", [11], [{"polynomial": f"{most} 2", "lower": {"bound": "0", "squares": [[most, 0, "1 1"]]}, "upper": {"bound": most, "squares": [[most, 1, "1 0"]]}}], lower="0", upper=most)
        entries = steps.found("region", [(that, "proved")])
        tight(f"stances {names}", entries)
        full = but(entries, "results requirements 0 value", {"lower": "0", "upper": "1" if len(names) == 1 else "169/64"})
        accept(f"stances {names}, value", full)
        reject(f"stances {names}, more", but(full, "results requirements 0 value upper", hair(full["results"]["requirements"][0]["value"]["upper"], -1)), "results", "[1].value.upper: more is claimed")
        reject(f"stances {names}, of a step", but(entries, f"proof {len(entries['proof']) - 1} proves", "left>right:require[1]"), f"proof line {len(entries['proof'])}", "not known of a step")
    steps = test_graph_boundaries.regions(["value(x*x) >= 0"])
    squared(steps, "left:require[1]", [11], [{"polynomial": "1 2", "lower": {"bound": "0", "squares": [["1", 0, "1 1"]]}}], lower="0")
    one = steps.found("region", [("value(x*x) >= 0", "undecided")])
    accept("one stance of two", one)
    reject("one stance of two, proved", but(one, "results requirements 0 verdict", "proved"), "results", "proved is claimed, undecided was derived")


def stances() -> None:
    """y stands still: v/2 + w + t - 7/4 with a flow of 1, from above 0 by what rounding loses alone."""
    that = "throughout(y + t <= 1.75)"
    d = stood([that])
    d.proof = d.proof[:10]
    squares = [[str(Q(x) / 2), k and n + 1, f"1 {e}, -1 0 0 0" if not k else "1 0 0 0"] for n, (x, e) in enumerate(zip(("1/2", "1/2", "1/4"), ("1 0 0", "0 1 0", "0 0 1"), strict=True)) for k in (0, 1)]
    piece = {"polynomial": "1/2 1 0 0, 1/2 0 1 0, 1/4 0 0 1, -5/4 0 0 0", "upper": {"bound": "0", "squares": squares}}
    squared(d, "require[1]", [5, 1], [piece], bits=24, order=1, upper=str(Q(STOOD, 1 << 24)))
    entries = d.entries("region", [(that, "undecided")])
    number = len(d.proof)
    tight("a stance", entries)
    for name, path, value, reason in (("no flow", "uses", [5], "no trajectory is proved, or none by rational numbers"), ("no set", "uses", [1], "needs a line that gives its set"), ("exact numbers", "witness bits", 0, "no trajectory is proved, or none by rational numbers"), ("the flow first", "uses", [1, 5], "the one line that gives the set")):
        reject(f"a stance: {name}", but(entries, f"proof {number - 1} {path}", value), f"proof line {number}", reason)


STOOD = 11  # units of 2**-24


@unit
def limits(checker: Any) -> None:
    """How many terms, squares, pieces, variables and products there may be."""
    squares, polynomials, rejected = checker.squares, checker.polynomials, checker.numerals.Rejected
    assert (squares.MOST_PIECES, squares.MOST_SQUARES, squares.MOST_TERMS, squares.MOST_ORDER, squares.MOST_VARIABLES) == (10_000, 20_000, 5_000, 40, 24)
    assert (polynomials.HIGHEST, polynomials.MOST_PRODUCTS) == (64, 200_000)
    assert squares.polynomial("", 1, False) == {} == squares.polynomial("", 0, True) and squares.polynomial("3/7", 0, False) == {(): Q(3, 7)}
    assert squares.polynomial("1 60 4 0, -3/2 0 1 0", 3, False) == {(60, 4, 0): 1, (0, 1, 0): Q(-3, 2)}
    for text in ("1 60 5 0", "1 60 4", "1/2 0 0 0"):
        with refuses(rejected, "is no term"):
            squares.polynomial(text, 3, True)
    with limited(squares, MOST_TERMS=3):
        assert len(squares.polynomial("1 0, 1 1, 1 2", 1, True)) == 3
        with refuses(rejected, "polynomial: at most 3 terms"):
            squares.polynomial("1 0, 1 1, 1 2, 1 3", 1, True)
    with limited(squares, MOST_SQUARES=2):
        assert squares.expanded([["1", 0, "2 0"]] * 2, 1) == {(0,): 8}
        with refuses(rejected, "squares: a list of at most 2"):
            squares.expanded([["1", 0, "2 0"]] * 3, 1)
    # 3 (1 - y**2)(2 x - y + 1)**2 + 3 x**2 y**4, in the order in which like weights come first
    found = squares.expanded([["3", 2, "2 1 0, -1 0 1, 1 0 0"], ["3", 0, "1 1 2"], ["1/2", 1, "1 0 0"]], 2)
    assert {e: c for e, c in found.items() if c} == {
        (0, 0): Q(7, 2), (1, 0): 12, (0, 1): -6, (2, 0): Q(23, 2), (1, 1): -12, (1, 2): -12, (0, 3): 6, (2, 2): -12, (1, 3): 12, (0, 4): -3, (2, 4): 3,
    }
    read = lines_of_region(claim(requires=["value(v*w)"]), points=False)
    squared(read, "require[1]", [4], [TWO], lower="-1/2")
    data = sealed(read.entries("region", [("value(v*w)", "proved")]))
    for n, status in ((2, "valid"), (1, "invalid")):
        with limited(squares, MOST_VARIABLES=n):
            verdict = checker.check(data)
            assert verdict.status == status and verdict.reason == ("" if n == 2 else "squares: in at most 1 variables"), verdict
    halves = sealed(HALVES)
    for n, status in ((2, "valid"), (1, "invalid")):
        with limited(squares, MOST_PIECES=n):
            verdict = checker.check(halves)
            assert verdict.status == status and verdict.reason == ("" if n == 2 else "pieces: 1 to 1"), verdict
    with limited(polynomials, MOST_PRODUCTS=6):
        long = {(k,): Q(k + 1) for k in range(3)}
        assert polynomials.times(long, {(0,): Q(2), (1,): Q(-1)}) == {(0,): 2, (1,): 3, (2,): 4, (3,): -3}
        with refuses(checker.reals.Undefined, "a product of polynomials that long"):
            polynomials.times(long, long)


@unit
def exact_polynomials(checker: Any) -> None:
    """Sums, products and powers; nothing else."""
    inexact = checker.reals.Inexact
    a = checker.polynomials.Exactly(2)
    x, y = a.variable(0, Q(1), Q(4)), a.variable(1, Q(-1), Q(1))
    assert (x, y, a.variable(1, Q(7), Q(7))) == ({(0, 0): Q(5, 2), (1, 0): Q(3, 2)}, {(0, 1): 1}, {(0, 0): 7})
    assert a.number(Q(0)) == {} and a.number(Q(3)) == {(0, 0): 3} == a.power(x, 0) | {(0, 0): 3} and a.power(x, 0) == {(0, 0): 1} and a.power({}, 0) == {(0, 0): 1}
    assert a.neg(x) == {(0, 0): Q(-5, 2), (1, 0): Q(-3, 2)} and a.add(x, y) == {**x, (0, 1): 1} and a.sub(x, y) == {**x, (0, 1): -1} and a.sub(x, x) == {} == a.add(x, a.neg(x))
    assert a.sub(y, x) == {(0, 1): 1, (0, 0): Q(-5, 2), (1, 0): Q(-3, 2)}
    assert a.mul(x, y) == {(0, 1): Q(5, 2), (1, 1): Q(3, 2)} and a.power(x, 2) == {(0, 0): Q(25, 4), (1, 0): Q(15, 2), (2, 0): Q(9, 4)} == a.mul(x, x) and a.mul({}, x) == {}
    assert a.power(y, 64) == {(0, 64): 1} and a.div(x, a.number(Q(-2))) == {(0, 0): Q(-5, 4), (1, 0): Q(-3, 4)} and a.div({}, a.number(Q(2))) == {} and a.shown(x) == (x, 0)
    for below in (x, y, {}, {(0, 0): Q(1), (0, 1): Q(1)}):
        with refuses(inexact, "a quotient is no polynomial"):
            a.div(x, below)
    long = 1 << 19_999
    assert a.mul({(0, 0): Q(long)}, y) == {(0, 1): long} and a.mul({(0, 0): Q(1, long)}, y) == {(0, 1): Q(1, long)} and a.mul(a.power(y, 32), a.power(x, 32)).keys() == {(k, 32) for k in range(33)}
    for p, q in (({(0, 0): Q(2 * long)}, y), ({(0, 0): Q(1, 2 * long)}, y), (a.power(y, 64), y), (a.power(y, 33), {(32, 0): Q(1)})):
        with refuses(inexact, "a polynomial of so high a degree, or with fractions that long"):
            a.mul(p, q)
    for op in ("sqrt", "exp", "log", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh"):
        with refuses(inexact, "no polynomial with rational coefficients"):
            getattr(a, op)(x)
    # 1 + 2 t - t**2/2: the square is (1 + T_2)/2
    assert a.ends({(0, 0): Q(1), (1, 0): Q(2), (2, 0): Q(-1, 2)}) == (Q(-3, 2), Q(7, 2)) and a.ends({(0, 1): Q(1)}) == (-1, 1) and a.ends({}) == (0, 0) and a.ends({(0, 0): Q(3)}) == (3, 3)
    size = checker.polynomials.size
    for p, n, most in (
        ({}, 2, 0), ({(): Q(-3)}, 0, 3), ({(4,): Q(8), (2,): Q(-8)}, 1, 2), ({(3,): Q(4), (1,): Q(-3)}, 1, 1), ({(3,): Q(1)}, 1, 1), ({(2,): Q(1), (0,): Q(-1, 2)}, 1, Q(1, 2)), ({(5,): Q(16), (3,): Q(-20), (1,): Q(5)}, 1, 1),
        ({(2, 1): Q(2), (0, 1): Q(-1)}, 2, 1), ({(1, 3): Q(-4), (1, 1): Q(3)}, 2, 1), ({(1, 2, 1): Q(2), (1, 0, 1): Q(-1), (0, 0, 2): Q(2), (0, 0, 0): Q(-1)}, 3, 2), ({(2, 2): Q(4), (2, 0): Q(-2), (0, 2): Q(-2), (0, 0): Q(1)}, 2, 1),
    ):
        assert size(n, p) == most, (p, size(n, p))


@unit
def rounded_polynomials(checker: Any) -> None:
    """With four bits a unit is 1/16: what is rounded down is told."""
    a, undefined = checker.polynomials.Rounded(2, 4, 3), checker.reals.Undefined
    x = a.variable(1, Q(1, 3), Q(1))  # 2/3 and 1/3
    assert a.bits == 4 and x.poly == {(0, 0): [10], (0, 1): [5]} and x.rest[0] == 2
    assert a.variable(0, Q(-1, 2), Q(1)).poly == {(0, 0): [4], (1, 0): [12]} and a.shown(x) == ({(0, 0): Q(5, 8), (0, 1): Q(5, 16)}, Q(1, 8))
    assert a.ends(x) == (Q(3, 16), Q(17, 16)) and a.ends(a.number(Q(-3))) == (-3, -3)
    square = checker.models.Model({(2, 0): [8], (0, 1): [-3], (0, 0): [1]}, [5, 0, 0, 0, 0, 0])
    assert a.ends(square) == (Q(1 - 16, 16), Q(1 + 16, 16)) and a.ends(checker.models.Model({(1, 0): [2]}, [1] + [0] * 5)) == (Q(-3, 16), Q(3, 16))
    assert a.shown(checker.models.Model({(1, 0): [], (0, 1): [0], (1, 1): [3]}, [0] * 6)) == ({(1, 1): Q(3, 16)}, 0)
    for error, units in ((Q(0), 0), (Q(1, 16), 1), (Q(1, 20), 1), (Q(1, 15), 2), (Q(1, 10**9), 1), (Q(3), 48)):
        off = a.off(x, error)
        assert off.poly == x.poly and off.rest[0] == 2 + units and x.rest[0] == 2, error
    for op in ("asin", "acos", "atan"):
        with refuses(undefined, "no polynomial is known to be near an inverse trigonometric function"):
            getattr(a, op)(x)
    fine = checker.polynomials.Rounded(1, 60, 12)
    t = fine.variable(0, Q(1, 2), Q(3, 4))
    low, high = fine.ends(fine.pi())
    assert low < Q(314159265358979324, 10**17) and Q(314159265358979323, 10**17) < high and high - low < Q(1, 2**58)
    for op, middle in (
        ("sqrt", "0.790569415042094833"), ("exp", "1.868245957432222406"), ("log", "-0.470003629245735554"), ("sin", "0.585097272940462155"), ("cos", "0.810963119505217902"), ("tan", "0.721484440990904420"), ("sinh", "0.666492264456616082"), ("cosh", "1.201753692975606324"), ("tanh", "0.554599722349382294"),
    ):  # at 5/8
        poly, rest = fine.shown(getattr(fine, op)(t))
        assert rest < Q(1, 10**9) and abs(poly[(0,)] - Q(middle)) <= rest + Q(1, 10**18), (op, rest)
    third = fine.shown(fine.div(fine.number(Q(1)), fine.number(Q(-3))))
    assert abs(third[0][(0,)] + Q(1, 3)) <= third[1] < Q(1, 2**56)
    with refuses(undefined, "inverse of values that may not be positive"):
        fine.div(t, fine.variable(0, Q(-1), Q(1)))


@unit
def corners_and_readings(checker: Any) -> None:
    """One branch, strictly; one cell, and the slopes of that cell."""
    undefined, exactly, rounded = checker.reals.Undefined, checker.polynomials.Exactly, checker.polynomials.Rounded

    def found(terms: Any, root: int, box: Sequence[tuple[Any, Any]], by: str = "", libraries: Sequence[Any] = (), forms: Any = None, flows: Any = None) -> Any:
        names = terms.variables(root)
        expansion = checker.polynomials.Expansion(terms, root, by, names, libraries, forms or exactly(len(names)), flows)
        return expansion.over_box([(Q(x), Q(y)) for x, y in box])

    terms = checker.terms.Terms()
    v, w, one = terms.put("variable", (), "v"), terms.put("variable", (), "w"), terms.put("number", (), Q(1))
    plain_v, plain_w = {(0, 0): Q(1, 2), (1, 0): Q(1, 2)}, {(0, 1): Q(1), (0, 0): Q(3)}
    for op, args, box, which in (
        ("max", (v, w), [(0, 1), (2, 4)], plain_w), ("min", (v, w), [(0, 1), (2, 4)], plain_v), ("max", (w, v), [(0, 1), (2, 4)], plain_w), ("min", (w, v), [(0, 1), (2, 4)], plain_v),
    ):
        assert found(terms, terms.put(op, args), box) == (which, 0), (op, args)
        assert found(terms, terms.put(op, args), box, forms=rounded(2, 24, 2)) == (which, 0), (op, args)
        for low in (1, Q(1, 2)):
            with refuses(undefined, "both branches of a corner are met"):
                found(terms, terms.put(op, args), [(0, 1), (low, 2)])
    size = terms.put("abs", (v,))
    assert found(terms, size, [(1, 3)]) == ({(0,): 2, (1,): 1}, 0) and found(terms, size, [(-3, -1)]) == ({(0,): 2, (1,): -1}, 0)
    for box in ((0, 1), (-1, 0), (-1, 1), (0, 0)):
        with refuses(undefined, "both branches of a corner are met"):
            found(terms, size, [box])
    slope = terms.put("max", (terms.put("mul", (terms.put("mark", (v,), "v"), v)), one))
    assert found(terms, slope, [(2, 4)], "v") == ({(0,): 3, (1,): 1}, 0) and found(terms, slope, [("-1/2", "1/2")], "v") == ({}, 0) == found(terms, slope, [("-1/2", "1/2")], "u")
    # a cell of two axes, [1, 3] x [0, 1/2]: nodes 1, 5; 7, 20 along b
    grid = (Q(0), Q(1), Q(3), Q(4)), (Q(-1), Q(0), Q(1, 2))
    lib = checker.model.Library("l.csv", ("a", "b"), (), grid, {"c": tuple(map(Q, (9, 8, 7, 6, 1, 5, 4, 7, 20, 3, 2, 0)))})
    moving = terms.put("mark", (v,), "v")
    read = terms.put("reading", (moving, w), "c")
    # v = 2 + t, w = 1/4 + s/4: 1 + 3 (1 + t) + (4 + 9 (1 + t)/2... ) (1 + s)/2 + ...
    value = {(0, 0): Q(33, 4), (1, 0): Q(21, 4), (0, 1): Q(17, 4), (1, 1): Q(9, 4)}
    along = {(0, 0): Q(21, 4), (0, 1): Q(9, 4)}
    for forms in (exactly(2), rounded(2, 24, 4)):
        for by, expected in (("", value), ("v", along)):
            poly, rest = found(terms, read, [(1, 3), (0, "1/2")], by, [lib], forms)
            assert poly == expected and rest < (Q(1, 10**5) if forms.bits else Q(1, 10**99)), (by, poly, rest)
    across = terms.put("reading", (w, terms.put("mul", (terms.put("number", (), Q(1, 2)), moving))), "c")  # b = v/2, a = w
    assert found(terms, across, [(0, 1), (1, 3)], "v", [lib]) == ({(0, 0): Q(17, 2), (0, 1): Q(9, 2)}, 0)
    assert found(terms, read, [(3, 4), ("1/4", "1/4")], libraries=[lib]) == ({(0, 0): Q(29, 4), (1, 0): Q(-25, 4)}, 0)
    for box, by in (([("1/2", 2), (0, "1/4")], ""), ([(1, 2), ("-1/4", "1/4")], ""), ([(1, 1), (0, "1/2")], "v"), ([("1/2", 2), (0, 0)], "v")):
        with refuses(undefined, "several cells of a library are met"):
            found(terms, read, box, by, [lib])
    assert found(terms, read, [(1, 1), (0, "1/2")], libraries=[lib]) == ({(0, 0): 3, (0, 1): 2}, 0)
    with refuses(undefined, "beyond its grid"):
        found(terms, read, [(3, 5), (0, 0)], libraries=[lib])
    flow = terms.put("flow", (one,), "1 1")
    for forms in (exactly(0), rounded(0, 24, 2)):
        with refuses(undefined, "no trajectory is proved, or none by rational numbers"):
            found(terms, flow, [], forms=forms)


@unit
def composed_polynomials(checker: Any) -> None:
    """3 + x y**2 - 2 x**2 at x = 1 + t, y = t/2; of nothing, and without arguments."""
    a = checker.polynomials.Rounded(1, 24, 6)
    x, y = a.variable(0, Q(0), Q(2)), a.variable(0, Q(-1, 2), Q(1, 2))
    composed = checker.polynomials.composed
    assert a.shown(composed(a, {(0, 0): Q(3), (1, 2): Q(1), (2, 0): Q(-2)}, [x, y]))[0] == {(0,): 1, (1,): -4, (2,): Q(1, 4) - 2, (3,): Q(1, 4)}
    assert a.shown(composed(a, {(3,): Q(1)}, [y]))[0] == {(3,): Q(1, 8)} and a.shown(composed(a, {(): Q(5)}, []))[0] == {(0,): 5}
    assert a.shown(composed(a, {}, [x]))[0] == {} and a.shown(composed(a, {}, [])) == ({}, 0) and a.shown(composed(a, {(0, 1): Q(1), (2, 1): Q(1)}, [y, x]))[0] == {(0,): 1, (1,): 1, (2,): Q(1, 4), (3,): Q(1, 4)}


def at_point(found: Any, at: Sequence[Q]) -> Q:
    arguments, poly, _ = found
    return sum((c * prod(((at[k] - m) / r) ** n for (k, (m, r)), n in zip(arguments, e, strict=True)) for e, c in poly.items()), Q(0))


@unit
def stated_flows(checker: Any) -> None:
    """Of x' = y, y' = r(q) + d over p: the polynomial of one piece of one cell, and what it may be off."""
    undefined = checker.reals.Undefined
    b, lib = fall(checker)
    flows = proves(checker, b, [lib], falling([Q(0), Q(1), Q(2), Q(3)], [Q(0), Q(1, 2), Q(1)]))
    unit_ = flows.system.models.unit

    def stated(entry: tuple[int, int], orders: tuple[int, int, int], time: Any, p: Any, q: Any) -> Any:
        pairs = [(Q(x), Q(y)) for x, y in (time, p, q)]
        return flows.stated(*entry, orders, pairs, [range(1), range(1), checker.ranges.met(checker_axis, *pairs[2], False)])

    checker_axis = lib.grid[0]
    # the fall r p**2 theta**2/2, theta = (1 + sigma)/2, r = 2 + 3 (q - 1) of q in [1, 2]
    for orders, value in (
        ((0, 0, 0), lambda s, p, q: (3 * q - 1) * p**2 * (1 + s) ** 2 / 8), ((1, 0, 0), lambda s, p, q: (3 * q - 1) * p**2 * (1 + s) / 4), ((0, 1, 0), lambda s, p, q: (3 * q - 1) * p * (1 + s) ** 2 / 4),
        ((0, 0, 1), lambda s, p, q: 3 * p**2 * (1 + s) ** 2 / 8), ((1, 1, 0), lambda s, p, q: (3 * q - 1) * p * (1 + s) / 2), ((0, 1, 1), lambda s, p, q: 3 * p * (1 + s) ** 2 / 4), ((0, 2, 0), lambda s, p, q: (3 * q - 1) * (1 + s) ** 2 / 4), ((1, 0, 1), lambda s, p, q: 3 * p**2 * (1 + s) / 4),
    ):
        for time, piece in (((-1, 0), 0), (("1/4", "1/2"), 1), ((1, 1), 1)):
            found = stated((1, 0), orders, time, (1, "3/2"), (1, 2))
            end = time == (1, 1)
            assert found[0] == ([] if end else [(0, (Q(-1, 2) if not piece else Q(1, 2), Q(1, 2)))]) + [(1, (Q(3, 2), Q(1, 2))), (2, (Q(3, 2), Q(1, 2)))], found[0]
            known = flows.cells[1][piece]
            by = tuple(k for k, n in enumerate(orders[1:]) for _ in range(n))
            error = Q((known.rates if orders[0] else known.errors)[1, 0][flows.system.models.rank[by]], unit_) * (2 if orders[0] else 1) * 2 ** len(by)
            assert found[2] == error, (orders, time)
            for s in (Q(1),) if end else (Q(-1, 3), Q(1, 7)):
                for p, q in ((Q(1), Q(2)), (Q(5, 4), Q(8, 7))):
                    assert at_point(found, (s, p, q)) == value(s, p, q), (orders, time)
    for orders in ((2, 0, 0), (0, 1, 2), (1, 1, 1), (0, 0, 3)):
        with refuses(undefined, "no such entry of the fundamental solution, or no such derivative of it"):
            stated((1, 0), orders, (0, 1), (1, 2), (1, 2))
    with refuses(undefined, "no such entry of the fundamental solution"):
        stated((1, 4), (0, 0, 0), (0, 1), (1, 2), (1, 2))
    for time, q in (((-1, 1), (1, 2)), ((0, 1), (1, "5/2")), ((0, 1), ("1/2", 2)), (("-1/100", "1/100"), (0, 1))):
        with refuses(undefined, "several pieces of a trajectory are met"):
            stated((1, 0), (0, 0, 0), time, (1, 2), q)
    # as a term: the value and its slope by q and p, over a part of a cell
    terms = b.terms

    def over(by: str, q: Any, time: int, order: int = 6) -> Any:
        mark = [terms.put("mark", (terms.put("variable", (), n),), n) for n in ("p", "q")]
        sigma = terms.put("number", (), Q(time)) if time else terms.put("sub", (terms.put("mul", (terms.put("number", (), Q(2)), terms.put("mark", (terms.put("variable", (), "phase(t)"),), "phase(t)"))), terms.put("number", (), Q(1))))
        root = terms.put("flow", (sigma, *mark), "1 0")
        names = terms.variables(root)
        forms = checker.polynomials.Rounded(len(names), 40, order)
        box = {"p": (Q(1), Q(3, 2)), "q": tuple(map(Q, q)), "phase(t)": (Q(1, 2), Q(1))}
        return checker.polynomials.Expansion(terms, root, by, names, [lib], forms, flows).over_box([box[n] for n in names])

    for by, value_ in (("", lambda s, p, q: (3 * q - 1) * p**2 * (1 + s) ** 2 / 8), ("p", lambda s, p, q: (3 * q - 1) * p * (1 + s) ** 2 / 4), ("q", lambda s, p, q: 3 * p**2 * (1 + s) ** 2 / 8), ("phase(t)", lambda s, p, q: (3 * q - 1) * p**2 * (1 + s) / 2)):
        for time in (1, 0) if by != "phase(t)" else (0,):
            for q in ((1, 2), ("5/4", "3/2")):
                poly, rest = over(by, q, time)
                assert 0 < rest < Q(1, 10**9), (by, time, rest)
                for p_, q_, s_ in ((-1, -1, -1), (1, 1, 1), (Q(1, 3), Q(-2, 5), Q(3, 7))):
                    low, high = map(Q, q)
                    t = (p_, s_, q_) if not time else (p_, q_)
                    sigma = Q(1) if time else Q(1, 2) + Q(s_) / 2
                    exact = value_(sigma, Q(5, 4) + Q(p_) / 4, (low + high) / 2 + (high - low) / 2 * q_)
                    assert abs(exact - sum(c * prod(Q(x) ** n for x, n in zip(t, e, strict=True)) for e, c in poly.items())) <= rest, (by, time, q)
    with refuses(undefined, "several pieces of a trajectory are met"):
        over("q", (1, 1), 1)
    over("p", (1, 1), 1)


ends()
verdicts()
stated()
coefficients()
shapes()
pieces()
near()
agreements()
sets()
stances()


def test_squares_boundaries() -> None:
    all_hold(CASES)
