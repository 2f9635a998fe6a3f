"""Products of Jacobians of two states at exact equality (proofs/several.md (7)), and the gains they refute."""

from __future__ import annotations

import random
from bisect import bisect_right
from collections.abc import Sequence
from fractions import Fraction as Q
from itertools import product
from math import isqrt
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import STEP, Entries, Questions, but, refuses
from tests.checker.test_several_boundaries import ONE, Lines, claim, hair, rounding_lines

CASES = Questions()
unit, accept, reject = CASES.unit, CASES.accept, CASES.reject
SMALL = "lower: the trace is not shown to be so large"


# tables of numbers: one line each reads better
# fmt: off

PLAIN = {"kind": "box", "weights": {"x": "1", "y": "1"}}
# the Jacobian [[r, q], [h, 0]]: at r = 0 its square is q h times 1
FREE = 'q = ["-1/2", "1/2"]\nr = ["-1/4", "1/4"]\nh = {{ range = ["1/4", "1/2"], held = true{change} }}'


def region(asked: Sequence[str] = ("gain < 1",), change: str = "", **other: str) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 ball, 5 6 images, 7 invariant, 8 9 matrices, 10 pair."""
    d = Lines(claim("r*x + q*y", "h*x", uncertain=FREE.format(change=change), asked=asked, **other))
    d.metric("box", ONE, ONE)
    d.range("target[x]", "0", "0")
    d.range("target[y]", "0", "0")
    d.theorem("smaller-ball", "ball", [1, 2, 3], radius="1")
    d.range("image[x]", "-3/4", "3/4")
    d.range("image[y]", "-1/2", "1/2")
    d.theorem("invariant-region", "invariant", [1, 2, 3, 5, 6])
    d.matrix("slopes", "3/4", [7])
    d.matrix("misses", "0", [7])
    d.theorem("slope", "slope", [8, 9], gain="3/4", residual="0")
    return d


def at(q: str = "1/2", r: str = "0", h: str = "1/2", **other: str) -> dict[str, str]:
    return {"q": q, "r": r, "h": h, "x": "0", "y": "0", **other}


def grown(d: Lines, points: Any, power: Any, lower: str, uses: Sequence[int] = (7,), bits: int = 0) -> int:
    return d.line("product", "slopes", uses, {"bits": bits, "points": points, "power": power}, lower=lower)


def one(points: Any, power: Any, lower: str, change: str = "", bits: int = 0) -> Entries:
    """A product on the region; the gain is below 1 whatever it shows."""
    d = region(change=change)
    grown(d, points, power, lower, bits=bits)
    return d.found("region", [("gain < 1", "proved")], PLAIN)


def below(x: Q, degree: int = 2, by: int = 10**40) -> Q:
    """The root of x rounded down."""
    assert degree == 2
    return Q(isqrt(int(x * by * by)), by)


def of(points: Sequence[dict[str, str]], power: int) -> Q:
    """The trace of the product's power, by fractions."""
    def times(a: Any, b: Any) -> Any:
        return [[sum(x * y for x, y in zip(row, column, strict=True)) for column in zip(*b, strict=True)] for row in a]

    found = whole = [[Q(1), Q(0)], [Q(0), Q(1)]]
    for p in points:
        found = times([[Q(p["r"]), Q(p["q"])], [Q(p["h"]), Q(0)]], found)
    for _ in range(power):
        whole = times(whole, found)
    return abs(whole[0][0] + whole[1][1])


def exactly() -> None:
    """Products whose root is rational, and a hair more of it; roots that are not, to both sides."""
    for name, points, power, root in (
        ("a square", [at()], 2, Q(1, 2)), ("a square of opposite sign", [at("-1/2")], 2, Q(1, 2)), ("a square again", [at()], 2048, Q(1, 2)), ("at most", [at()], 4096, Q(1, 2)), ("an even power", [at()], 6, Q(1, 2)),
        ("alone", [at("0", "1/4")], 1, Q(1, 8)), ("alone, below 0", [at("0", "-1/4")], 1, Q(1, 8)), ("two", [at(), at()], 1, Q(1, 2)), ("sixteen", [at()] * 16, 1, Q(1, 2)), ("sixteen, often", [at()] * 16, 4096, Q(1, 2)), ("an odd power of one of trace 0", [at()], 3, Q(0)),
    ):
        steps = len(points) * power
        assert steps > 100 or 2 * root**steps == of(points, power), name
        good = one(points, power, str(root))
        if root:
            accept(f"product {name}", good)
        reject(f"product {name}, more", but(good, "proof 10 concludes lower", hair(str(root), 1) if steps < 10**4 else str(root + Q(1, 2**60))), "proof line 11", SMALL)
    # the order counts: the trace of three is another one backwards
    words = [at("1/2", "1/4", "1/4"), at("1/4", "0", "1/4"), at("-1/2", "1/8", "1/4")]
    forward, backward = of(words, 1), of(words[::-1], 1)
    assert forward != backward
    for name, points, trace in (("in order", words, forward), ("backwards", words[::-1], backward)):
        c = Q(bisect_right(range(10**6 + 1), int(trace * 10**18), key=lambda n: 2 * n**3) - 1, 10**6)
        good = one(points, 1, str(c))
        accept(f"product {name}", good)
        reject(f"product {name}, more", but(good, "proof 10 concludes lower", str(c + Q(1, 10**6))), "proof line 11", SMALL)
    # a tenth lies between two units of 2**-24; a product of two such, their squares
    low, high = (Q(n, 1 << 24) for n in ((1 << 24) // 10, (1 << 24) // 10 + 1))
    middle, half = (low + high) / 2, (high - low) / 2
    tenth = at("0", "1/10")
    single = one([tenth], 1, str(low / 2), bits=24)
    accept("product rounded", single)
    reject("product rounded, more", but(single, "proof 10 concludes lower", hair(str(low / 2), 1)), "proof line 11", SMALL)
    pair = below((middle**2 - 2 * middle * half - half**2) / 2)
    double = one([tenth, tenth], 1, str(pair), bits=24)
    accept("product of two rounded", double)
    accept("product squared, rounded", one([tenth], 2, str(pair), bits=24))
    reject("product of two rounded, more", but(double, "proof 10 concludes lower", hair(str(pair), 1)), "proof line 11", SMALL)
    # a third is no whole number of any power of two
    third_ = one([at("0", "1/5")], 1, "1/10")
    reject("a product rounded to 512 bits", third_, "proof line 11", SMALL)
    accept("a product rounded to 512 bits, less", but(third_, "proof 10 concludes lower", hair("1/10", -1)))


def shapes() -> None:
    good = one([at()], 2, "1/2")
    points = "points: a list of 1 to 16"
    for n, (key, value, reason) in enumerate((
        ("witness points", [], points), ("witness points", [at()] * 17, points), ("witness points", "here", points), ("witness points", {"0": at()}, points), ("witness points", [{"q": "1/2"}], "at: one value for each variable"), ("witness points", [1], "at: one value for each variable"),
        ("witness points", [at(z="0")], "at: one value"), ("witness points", [at(q=hair("1/2", 1))], "at.q: outside the range"), ("witness points", [at(), at(h=hair("1/4", -1))], "at.h: outside the range"),
        ("witness power", 0, "power: 1 to 4096"), ("witness power", -2, "power: 1 to 4096"), ("witness power", 4097, "power: 1 to 4096"), ("witness power", True, "power: 1 to 4096"), ("witness power", "2", "power: 1 to 4096"), ("witness bits", 23, "bits: 0 for exact rationals"),
        ("uses", [], "a product of slopes rests on the one line that gives the set"), ("uses", [7, 7], "a product of slopes rests on"), ("uses", [1], "a product of slopes rests on"), ("proves", "misses", "a product of slopes rests on"), ("proves", "product", "a product of slopes rests on"),
        ("concludes lower", "-1/2", "lower: not below 0, and of at most 2000000 bits"), ("concludes lower", hair("0", -1), "lower: not below 0"),
    )):
        reject(f"product, {n} {key}", but(good, f"proof 10 {key}", value), "proof line 11", reason)
    accept("product of nothing", one([at()], 1, "0"))
    # 61 bits 65536 times are fewer than four million, 62 are more
    long = one([at()] * 16, 4096, str(Q(2**60, 2**61 - 1)))
    reject("product, a long lower end", long, "proof line 11", SMALL)
    reject("product, too long a lower end", but(long, "proof 10 concludes lower", str(Q(2**60, 2**62 - 1))), "proof line 11", "lower: not below 0, and of at most 61 bits")
    accept("product, a lower end as long as may be", but(long, "proof 10 concludes lower", str(Q(2**60 - 2, 2**61 - 1))))


def helds() -> None:
    """Held quantities are the same at all points; with `change`, no farther apart than that, the last and the first too."""
    far = 'change = "1/64"'
    moves = "points: h is held, and moves too far"
    a, b, c = "1/2", str(Q(1, 2) - Q(1, 64)), str(Q(1, 2) - Q(1, 32))
    for name, points, good in (
        ("the same", [a, a], True), ("another", [a, b], False), ("another first", [b, a], False), ("another in the middle", [a, a, b, b], False),
    ):
        entries = one([at(h=h) for h in points], 1, "0")
        accept(f"held: {name}", entries) if good else reject(f"held: {name}", entries, "proof line 11", moves)
    for name, points, good in (
        ("the same", [a, a], True), ("as far as may be", [a, b], True), ("and back", [b, a], True), ("in steps there and back", [a, b, c, b], True), ("in steps", [a, b, c], False), ("in steps, down first", [c, b, a], False),
        ("a hair farther", [a, hair(b, -1)], False), ("a hair farther first", [hair(b, -1), a], False),
    ):
        entries = one([at(h=h) for h in points], 1, "0", change=f", {far}")
        accept(f"held with change: {name}", entries) if good else reject(f"held with change: {name}", entries, "proof line 11", moves)
    accept("fresh quantities may be anything", one([at("1/2", "1/4"), at("-1/2", "0")], 1, "0"))


def figures() -> None:
    """What a product says of the gain: its lower end, and a refutation."""
    wanted = [("gain < 1/2", "refuted"), ("gain <= 1/2", "undecided"), (f"gain <= 1/2 - 1{STEP}", "refuted"), (f"gain < 1/2 + 1{STEP}", "undecided"), ("gain <= 3/4", "proved"), ("gain < 1/4", "refuted"), ("residual <= 0", "proved"), ("settles", "undecided")]
    corrected = '[define]\nf = "x"\n'
    for name, top, rest, final in (("free", "", "", True), ("shrink", "shrink = true\n", "", False), ("correction", 'correction = ["f"]\n', corrected, False), ("slope alone", 'correction = ["f"]\nroute = "slope"\n', corrected, True),
                                   ("stated", "", '[metric]\nkind = "box"\n', True)):
        told = [(that, v if final or v != "refuted" else "undecided") for that, v in wanted]
        d = region([that for that, _ in told], top=top, rest=rest)
        grown(d, [at()], 2, "1/2")
        entries = d.found("region", told, PLAIN)
        accept(f"figures, {name}", entries)
        for n, (that, v) in enumerate(told):
            for other in sorted({"proved", "refuted"} - {v}):
                reject(f"figures, {name}: {that} {other}", but(entries, f"results requirements {n} verdict", other), "results", f"[{n + 1}].verdict: {other} is claimed, {v} was derived")
        for path in ("gain", "routes slope gain", "requirements 0 value"):
            full = but(entries, f"results {path}", {"lower": "1/2", "upper": "3/4"})
            if name == "correction" and path.startswith("requirements"):  # split is not on the proof, and might have less
                reject(f"figures, {name}: {path}", full, "results", "lower: nothing was derived")
                continue
            accept(f"figures, {name}: {path}", full)
            reject(f"figures, {name}: {path} more", but(full, f"results {path} lower", hair("1/2", 1)), "results", "lower: more is claimed")
    two = region()
    grown(two, [at()], 2, "1/2")
    grown(two, [at("0", "1/4")], 1, "1/8")
    reject("a product that serves no figure", two.found("region", [("gain < 1", "proved")], PLAIN), "proof", "line 12 serves no later line and no result")
    # of a stretch and a product the larger is the lower end; only the product refutes in a norm left free
    for lower, taken in (("3/4", "3/4"), ("1/4", "1/2")):
        both = region(["gain < 1/2", "gain < 5/8"])
        both.stretch("slopes", at(r="1/4" if lower == "3/4" else "0", h="1/2" if lower == "3/4" else "1/4"), ["1", "1"] if lower == "3/4" else ["1", "0"], lower, [7])
        grown(both, [at()], 2, "1/2")
        entries = both.found("region", [("gain < 1/2", "refuted"), ("gain < 5/8", "undecided")], PLAIN)
        full = but(entries, "results gain", {"lower": taken, "upper": "3/4"})
        accept(f"a stretch of {lower} and a product", full)
        reject(f"a stretch of {lower} and a product, more", but(full, "results gain lower", hair(taken, 1)), "results", "lower: more is claimed")
        reject(f"a stretch of {lower} and a product, refuted", but(entries, "results requirements 1 verdict", "refuted"), "results", "[2].verdict: refuted is claimed, undecided was derived")
    # over ranges of its own
    d = region(['"gain < 1"', '"gain < 1/2"\nover = { r = [0, 0] }'])
    first = len(d.proof)
    d.prefix = "over[2]:"
    copied = [dict(line) for line in d.proof]
    for line in copied:
        d.line(line["rule"], line["proves"], [n + first for n in line["uses"]], line["witness"], **line["concludes"])
    grown(d, [at()], 2, "1/2", uses=[7 + first])
    accept("a product over ranges of its own", d.found("region", [("gain < 1", "proved"), ("gain < 1/2", "refuted")], PLAIN))


# x/2 + y (1 + y + x)/2 and x/2: at the target [[1/2, 1/2], [1/2, 0]]; along x = 0, y = 2 r: [[1/2 + r, 1/2 + 2 r], [1/2, 0]]
BENT = ("x/2 + y*(1 + y + x)/2", "x/2")


def ball(asked: Sequence[str], target: tuple[str, str] = ("0", "0"), step: tuple[str, str] = BENT, spans: tuple[tuple[str, str], tuple[str, str]] = (("0", "0"), ("0", "0")),
         radius: str = "1", outer: bool = True, **other: str) -> Lines:
    """Lines: 1 metric, 2 3 targets, 4 ball."""
    d = Lines(claim(*step, target=target, asked=asked, uncertain='h = { range = ["-1/8", "1/8"], held = true }', **other))
    d.metric("box", ONE, ONE)
    for s, (low, high) in zip("xy", spans, strict=True):
        d.range(f"target[{s}]", low, high, bits=24 if "sqrt" in "".join(target) else 0)
    d.theorem("smaller-ball", "ball", [1, 2, 3], radius=radius)
    return d


def targets() -> None:
    """In a norm left free a point refutes only where every ball about the target has it."""
    asked = ["gain < 1/4", "gain < 2"]
    told = [("gain < 1/4", "refuted"), ("gain < 2", "undecided")]
    unsure = [("gain < 1/4", "undecided"), ("gain < 2", "undecided")]
    for name, points, final in (
        ("there", [{"x": "0", "y": "0"}], True), ("twice", [{"x": "0", "y": "0"}] * 2, True), ("x a hair off", [{"x": hair("0", 1), "y": "0"}], False), ("y a hair off", [{"x": "0", "y": hair("0", 1)}], False),
        ("one of two off", [{"x": "0", "y": "0"}, {"x": "0", "y": "1/8"}], False), ("the first of two off", [{"x": "1/8", "y": "0"}, {"x": "0", "y": "0"}], False),
    ):
        d = ball(asked)
        grown(d, points, 1, "1/4", [4])
        entries = d.found(None, told if final else unsure, PLAIN)
        accept(f"at the target: {name}", entries)
        if not final:
            reject(f"at the target: {name}, refuted", but(entries, "results requirements 0 verdict", "refuted"), "results", "[1].verdict: refuted is claimed, undecided was derived")
        valued = but(entries, "results requirements 0 value", {"lower": "1/4", "upper": None})
        if final:
            accept(f"at the target: {name}, its value", valued)
        else:
            reject(f"at the target: {name}, its value", valued, "results", "requirements[1].value.lower: nothing was derived")
        stated = ball(asked, rest='[metric]\nkind = "box"\n')
        grown(stated, points, 1, "1/4", [4])
        if final:
            accept(f"at the target: {name}, the norm stated", stated.found(None, told, PLAIN))
    moving = ("h", "0")
    step = ("h + (x - h)/2 + y*(1 + y + x - h)/2", "(x - h)/2")
    for name, point, final in (("there", {"h": "1/8", "error(x)": "0", "y": "0"}, True), ("off", {"h": "1/8", "error(x)": hair("0", 1), "y": "0"}, False), ("y off", {"h": "0", "error(x)": "0", "y": hair("0", 1)}, False)):
        d = ball(asked, moving, step, (("-1/8", "1/8"), ("0", "0")), "7/8")
        grown(d, [point], 1, "1/4", [4])
        entries = d.found(None, told if final else unsure, PLAIN)
        accept(f"at a moving target: {name}", entries)
        if not final:
            reject(f"at a moving target: {name}, refuted", but(entries, "results requirements 0 verdict", "refuted"), "results", "[1].verdict: refuted is claimed, undecided was derived")
    # a target known between two ends only: no point is surely there
    root = Q(isqrt(2 << 48), 1 << 24) / 8
    ends = str(Q(int(root * 2**24), 2**24)), str(Q(int(root * 2**24) + 1, 2**24))
    wide = (str(Q(ends[0]) - Q(1, 2**20)), str(Q(ends[1]) + Q(1, 2**20)))
    for x in (*wide, ends[0]):
        d = ball(asked, ("sqrt(2)/8", "0"), BENT, (wide, ("0", "0")), "1/2")
        grown(d, [{"x": x, "y": "0"}], 1, "1/8", [4])
        entries = d.found(None, [(that, "undecided") for that in asked], PLAIN)
        accept(f"a target not known exactly: {x}", entries)
        reject(f"a target not known exactly: {x}, refuted", but(entries, "results requirements 0 verdict", "refuted"), "results", "[1].verdict: refuted is claimed, undecided was derived")


def others() -> None:
    """A product over another set than the results', and of a stance that is not shown to last, serve nothing."""
    d = region()
    grown(d, [at()], 2, "1/2", uses=[4])
    reject("a product over another set", d.found("region", [("gain < 1", "proved")], PLAIN), "proof", "line 11 serves no later line and no result")
    for top, reason in (("", ""), ("horizon = 1\n", ""), ("horizon = 2\n", "products are known for single steps only")):
        d = ball(["gain < 1/4"], step=("x/2", "y/2"), top=top)
        grown(d, [{"x": "0", "y": "0"}], 1, "1/2", [4])
        entries = d.found(None, [("gain < 1/4", "refuted")], PLAIN)
        accept(f"a product, {top!r}", entries) if not reason else reject(f"a product, {top!r}", entries, "proof line 5", reason)
    d = rounding_lines()
    d.line("product", "slopes", [9, 1], {"bits": 24, "points": [{"x": "0", "y": "0", "p": "0", "q": "0"}], "power": 1}, lower="3/8")
    entries = d.found("region", [("settles", "proved")], {"kind": "box", "weights": {"x": "1", "y": "2"}})
    accept("a product of a stance", entries)
    reject("a product of a stance, without its flow", but(entries, "proof 20 uses", [9]), "proof line 21", "no trajectory is proved")
    bare = but(entries, "proof 19 concludes lower", "0", "results set", None, "results routes", {}, "results requirements 0 verdict", "undecided")
    reject("a product of a stance that may not last", bare, "proof", "serves no later line")


exactly()
shapes()
helds()
figures()
targets()
others()


@unit
def products_contain_what_they_stand_for(checker: Any) -> None:
    """Of matrices at corners of their entries' intervals the product, its power and its trace lie inside; and little more does."""
    module = checker.products
    rng = random.Random(20260101)
    for n, bits in product((2, 3), (6, 512)):
        real, module.BITS = module.BITS, bits
        try:
            for _ in range(40):
                rows = [[sorted(Q(rng.randint(-9, 9), rng.choice((3, 8, 10))) for _ in range(2)) for _ in range(n)] for _ in range(n)]
                other = [[[x, x] for x in (Q(rng.randint(-9, 9), rng.choice((3, 8, 10))) for _ in range(n))] for _ in range(n)]
                a, b = (module.rough([[tuple(x) for x in row] for row in m]) for m in (rows, other))
                both, cube = module.multiplied(a, b), module.raised(a, 3)
                least, trace = module.least_trace(both), module.least_trace(cube)
                for _ in range(8):
                    m, k = ([[rng.choice(x) for x in row] for row in each] for each in (rows, other))
                    held = [[sum(m[i][u] * k[u][j] for u in range(n)) for j in range(n)] for i in range(n)]
                    twice = [[sum(m[i][u] * m[u][j] for u in range(n)) for j in range(n)] for i in range(n)]
                    thrice = [[sum(twice[i][u] * m[u][j] for u in range(n)) for j in range(n)] for i in range(n)]
                    for found, true in ((a, m), (b, k), (both, held), (cube, thrice)):
                        unit_ = Q(2) ** found.shift
                        assert all(abs(t * unit_ - c) <= h for r, s, u in zip(true, found.centre, found.half, strict=True) for t, c, h in zip(r, s, u, strict=True))
                    assert least <= abs(sum(held[i][i] for i in range(n))) and trace <= abs(sum(thrice[i][i] for i in range(n)))
                if bits == 512:
                    assert all(h <= 2**500 * max(1, abs(c)) for r, u in zip(b.centre, b.half, strict=True) for c, h in zip(r, u, strict=True))
                    assert max(h for row in b.half for h in row) <= 1
        finally:
            module.BITS = real


@unit
def what_is_exact_stays_exact(checker: Any) -> None:
    module = checker.products
    one_ = module.rough([[(Q(1), Q(1)), (Q(1, 2), Q(1, 2))], [(Q(0), Q(0)), (Q(-1), Q(-1))]])
    assert one_.half == [[0, 0], [0, 0]] and max(abs(x) for row in one_.centre for x in row).bit_length() <= 513
    for p in (1, 2, 3, 4, 7, 64):
        found = module.raised(one_, p)
        unit_ = Q(2) ** found.shift
        assert found.half == [[0, 0], [0, 0]], p
        assert [[x / unit_ for x in row] for row in found.centre] == [[1, Q(1, 2) if p % 2 else 0], [0, (-1) ** p]], p
        assert module.least_trace(found) == (0 if p % 2 else 2)
    wide = module.rough([[(Q(1), Q(2)), (Q(0), Q(0))], [(Q(0), Q(0)), (Q(-3), Q(-1))]])
    unit_ = Q(2) ** wide.shift
    assert [[x / unit_ for x in row] for row in wide.half] == [[Q(1, 2), 0], [0, 1]] and module.least_trace(wide) == 0
    assert module.least_trace(module.rough([[(Q(1), Q(2)), (Q(0), Q(0))], [(Q(0), Q(0)), (Q(3), Q(3))]])) == 4
    nothing = module.rough([[(Q(0), Q(0))] * 2] * 2)
    assert module.least_trace(module.raised(nothing, 5)) == 0
    short = module.multiplied(module.Rough([[2**511 + 1]], [[3]], 0), module.Rough([[8]], [[0]], 0))
    assert (short.centre, short.half, short.shift) == ([[(8 * 2**511 + 8) >> 3]], [[3]], -3)
    cut = module.multiplied(module.Rough([[2**511 + 1]], [[3]], 0), module.Rough([[9]], [[0]], 0))
    assert (cut.centre, cut.half, cut.shift) == ([[(9 * 2**511 + 9) >> 3]], [[4 + 1]], -3)
    for trace, lower, steps, states, good in ((Q(2), Q(1), 9, 2, True), (Q(2), Q(1) + Q(1, 10**9), 9, 2, False), (Q(3, 4), Q(1, 2), 2, 3, True), (Q(3, 4), Q(1, 2), 1, 3, False), (Q(0), Q(0), 3, 6, True)):
        assert module.shown(trace, lower, steps, states) is good
    assert module.shown(Q(2), Q(1), module.LONGEST, 2)
    for lower, steps in ((Q(-1), 2), (Q(1), module.LONGEST + 1), (Q(1, 4), module.LONGEST // 2)):
        with refuses(checker.numerals.Rejected, "lower: not below 0"):
            module.shown(Q(2), lower, steps, 2)
    for scale in (Q(-1000), Q(1, 3 * 2**100), Q(-(10**40), 7)):  # to 512 bits, whatever the size
        (centre,), (wide,) = ((row[0] for row in m) for m in (lambda r: (r.centre, r.half))(module.rough([[(scale, scale)]])))
        assert 500 < abs(centre).bit_length() <= 513 and 0 <= wide <= 1


def test_product_boundaries() -> None:
    all_hold(CASES)
