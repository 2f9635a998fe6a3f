"""Pieces of gains, gains that break a requirement and gains that contract, at exact equality and one step beside it."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction as Q
from typing import Any

from tests.checker.questions import all_hold
from tests.checker.test_boundaries import GONE, Case, Draft, Entries, Question, but, claim, moved, sealed

CASES: dict[str, Question] = {}
NONE: dict[str, Any] = {"inner": None, "set": None, "outer": [None, None], "contracting": None, "best": None}


def accept(name: str, entries: Entries) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "valid")


def reject(name: str, entries: Entries, place: str, reason: str) -> None:
    assert name not in CASES, name
    CASES[name] = Case(sealed(entries), "invalid", place, reason)


def unit(question: Callable[[Any], None]) -> Callable[[Any], None]:
    CASES[question.__name__] = question
    return question


# fmt: off

# v⁺ = (1 - p κ) v + w, p in [1/2, 3/4]: the gain is at most 3/4 for κ in [1/2, 7/3], 7/8 at κ = 1/4 and at κ = 5/2

STEP, UNCERTAIN = "(1 - p*kappa)*v + w", 'w = ["-1/8", "1/8"]\np = ["1/2", "3/4"]'
GAINS = "[gains]\nkappa = 1\nother = 2"


def routed(d: Draft, prefix: str, slopes: tuple[str, str], gain: str) -> int:
    """The lines of one slope route over the region: the number of the line that gives the set."""
    target = d.range(f"{prefix}target[v]", "0", "0")
    d.theorem("smaller-ball", f"{prefix}ball", [target], radius="1")
    image = d.range(f"{prefix}image[v]", "-1", "1")
    kept = d.theorem("invariant-region", f"{prefix}invariant", [target, image])
    slope = d.range(f"{prefix}slope[v,v]", *slopes, [kept])
    miss = d.range(f"{prefix}target-miss[v]", "-1/8", "1/8")
    d.theorem("slope", f"{prefix}slope", [slope, miss], gain=gain, residual="1/8")
    return kept


def piece(d: Draft, number: int, low: str, high: str) -> None:
    d.line("gains", f"gains[{number}]", [], {"gain": "kappa", "lower": low, "upper": high})


def breaking(d: Draft, number: int, kappa: str, p: str, slope: str) -> None:
    piece(d, number, kappa, kappa)
    kept = routed(d, f"gains[{number}]:", ("-7/8", "15/16"), "15/16")
    d.point(f"gains[{number}]:slope[v,v]", {"kappa": kappa, "p": p, "v": "0", "w": "0"}, slope, uses=[kept])


def pieces() -> None:
    text = claim(STEP, "[-1, 1]", UNCERTAIN, requires=["gain <= 0.75"], rest=GAINS)
    d = Draft(text)
    routed(d, "", ("1/4", "1/2"), "1/2")
    piece(d, 1, "1/2", "1")
    routed(d, "gains[1]:", ("-3/4", "3/4"), "3/4")  # which leaves room for other ends
    piece(d, 2, "1", "7/3")
    routed(d, "gains[2]:", ("-3/4", "3/4"), "3/4")
    breaking(d, 3, "1/4", "1/2", "7/8")
    breaking(d, 4, "5/2", "3/4", "-7/8")
    first, second, third, fourth = 7, 15, 23, 32  # ranks of the lines that state a piece
    good = d.entries("region", [("gain <= 0.75", "proved")])
    interval = {**NONE, "gain": "kappa", "inner": ["1/2", "7/3"], "set": "region", "outer": ["1/4", "5/2"]}
    good["results"]["gain_intervals"] = [interval]
    accept("pieces", good)
    for kind in (None, "ball", "smaller ball"):
        reject(f"pieces about {kind}", but(good, "results gain_intervals 0 set", kind), "results", f"results.gain_intervals.set: {kind!r} is claimed, 'region' was derived")
    at = "results gain_intervals 0"
    for name, path, value in (("less", "inner", ["3/4", "2"]), ("a point", "inner", ["1/2", "1/2"]), ("nothing", "inner", None), ("outer unsaid", "outer", [None, None]), ("lower unsaid", "outer", [None, "5/2"]), ("upper unsaid", "outer", ["1/4", None])):
        accept(f"pieces, {name}", but(good, f"{at} {path}", value))
    for name, value in (("lower", [moved("1/2", -1), "7/3"]), ("upper", ["1/2", moved("7/3", 1)]), ("turned round", ["7/3", "1/2"])):
        reject(f"inner, {name}", but(good, f"{at} inner", value), "results", "results.gain_intervals.inner: more is claimed")
    for name, value in (("lower nearer", [moved("1/4", 1), "5/2"]), ("lower farther", [moved("1/4", -1), "5/2"]), ("upper nearer", ["1/4", moved("5/2", -1)]), ("upper farther", ["1/4", moved("5/2", 1)])):
        reject(f"outer, {name}", but(good, f"{at} outer", value), "results", "results.gain_intervals.outer: no requirement is refuted there")
    for path in ("inner", "outer"):
        for value in ("1/2", ["1/2"], ["1/2", "1", "2"], {"lower": "1/2"}):
            reject(f"{path} {value!r}", but(good, f"{at} {path}", value), "results", f"results.gain_intervals.{path}: two ends")
        reject(f"{path}, numbers", but(good, f"{at} {path}", [1, 2]), "results", "a proved number is written as text")
    for path, value in (("contracting", ["1/2", "1"]), ("best", {"value": "1", "gain": "1/2"})):
        reject(f"no {path}", but(good, f"{at} {path}", value), "results", f"results.gain_intervals.{path}: more is claimed than was derived")
    reject("another gain", but(good, f"{at} gain", "other"), "results", "results.gain_intervals.gain: 'other' is claimed, 'kappa' was derived")
    for name, value in (("none", []), ("two", [interval, interval]), ("no list", {"0": interval})):
        reject(f"intervals: {name}", but(good, "results gain_intervals", value), "results", "results.gain_intervals: one entry a gain that pieces are about")
    reject("interval, a key less", but(good, f"{at} best", GONE), "results", "results.gain_intervals: the keys are gain, inner, set, outer, contracting, best")
    # the pieces themselves
    nearer = f"{at} inner", ["1/2", "1"]
    for upper, fits in (("1", True), (moved("1", 1), True), (moved("1", -1), False), ("7/3", True), ("1/2", False)):
        changed = but(good, f"proof {first} witness upper", upper)
        if fits:
            accept(f"a piece up to {upper}", changed)
        else:
            reject(f"a piece up to {upper}", changed, "results", "the pieces of kappa leave a gap")
    accept("the second piece within the first", but(good, f"proof {first} witness upper", "2", f"proof {second} witness upper", "3/2", f"{at} inner", ["1/2", "2"]))
    reject("the second piece within the first, more", but(good, f"proof {first} witness upper", "2", f"proof {second} witness upper", "3/2", f"{at} inner", ["1/2", moved("2", 1)]), "results", "inner: more is claimed")
    reject("a piece widened below", but(good, f"proof {first} witness lower", moved("1/2", -1)), f"proof line {first + 6}", "gains[1]:slope[v,v]".partition(":")[2] + ": the range shown is wider")
    reject("a piece widened above", but(good, f"proof {second} witness upper", moved("7/3", 1)), f"proof line {second + 6}", "slope[v,v]: the range shown is wider")
    reject("a piece whose ends are exchanged", but(good, f"proof {second} witness lower", moved("7/3", 1)), f"proof line {second + 1}", "a piece's lower end is above its upper end")
    accept("a piece of one gain", but(good, f"proof {second} witness upper", "1", *nearer))
    undecided = but(good, f"proof {second + 7} concludes gain", moved("3/4", 1))
    reject("a piece of which one is undecided", undecided, "results", "gains[2]: neither is every requirement proved nor a single gain refuted")
    for upper in (moved("1/4", 1), "1/3"):
        reject(f"a refuted piece up to {upper}", but(good, f"proof {third} witness upper", upper), "results", "gains[3]: neither is every requirement proved nor a single gain refuted")
    weaker = but(good, f"proof {third + 8} concludes lower", "3/4")
    reject("an outer gain that is not refuted", weaker, "results", "gains[3]: neither is every requirement proved nor a single gain refuted")
    for gain in ("other", "w", "v", "", 1, None, ["kappa"]):
        at_other = but(good, f"proof {first} witness gain", gain)
        place, reason = (f"proof line {first + 1}", "gain: one of the claim's gains") if gain != "other" else (f"proof line {first + 6}", "is not")
        if gain != "other":
            reject(f"a piece of {gain!r}", at_other, place, reason)
    for name in ("gains[0]", "gains[01]", "gains[10000]", "gains", "gains[1] ", "gains[kappa]"):
        reject(f"a piece named {name}", but(good, f"proof {first} proves", name), f"proof line {first + 1}", "a piece of gains is numbered")
    reject("a piece of a piece", but(good, f"proof {second} proves", "gains[1]:gains[2]"), f"proof line {second + 1}", "a piece of gains is one of the claim itself")
    reject("a piece that rests on a line", but(good, f"proof {first} uses", [1]), f"proof line {first + 1}", "rests on no other line")
    reject("a piece twice", but(good, f"proof {second} proves", "gains[1]"), f"proof line {second + 1}", "gains[1] stands twice")
    accept("a piece of another number", but(good, "proof", [but(x, "proves", x["proves"].replace("gains[2]", "gains[9999]")) for x in good["proof"]]))
    for key in ("gain", "lower", "upper"):
        reject(f"a piece without {key}", but(good, f"proof {first} witness {key}", GONE), f"proof line {first + 1}", "witness: the keys of gains are gain, lower, upper")
    reject("a line of no piece", but(good, f"proof {first + 1} proves", "gains[5]:target[v]"), f"proof line {first + 2}", "gains[5]: no line says which gains these are")
    reject("a line of another piece", but(good, f"proof {first + 1} proves", "gains[0]:target[v]"), f"proof line {first + 2}", "gains[0]:target[v] needs a line that gives its set")
    reject("lines of two pieces", but(good, f"proof {second + 2} uses", [first + 2]), f"proof line {second + 3}", "uses: lines about other ranges")
    reject("lines of a piece and of the claim", but(good, f"proof {second + 2} uses", [1]), f"proof line {second + 3}", "uses: lines about other ranges")
    breaking(d, 5, "3/8", "1/2", "13/16")
    nearer_still = but(good, "proof", d.proof, f"{at} outer", ["3/8", "5/2"])
    reject("a refuted gain farther out", nearer_still, "proof", f"line {third + 1} serves no later line")
    moved_up = [but(x, "proves", x["proves"].replace("gains[5]", "gains[3]"), "uses", [n - len(d.proof) + 9 + third for n in x["uses"]]) for x in d.proof[-9:]]
    accept("a refuted gain, nearer", but(good, "proof", [*good["proof"][:third], *moved_up], f"{at} outer", ["3/8", None]))
    only = but(good, "proof", good["proof"][:third], f"{at} outer", [None, None])
    accept("no outer gains", only)
    for side in (0, 1):
        outer: list[str | None] = [None, None]
        outer[side] = "1/4"
        reject(f"no outer gains, one claimed at {side}", but(only, f"{at} outer", outer), "results", "results.gain_intervals.outer: no requirement")
    alone = [*good["proof"][:first], *[but(x, "uses", [n - third + first for n in x["uses"]]) for x in good["proof"][third:fourth]]]
    reject("refuted gains without a piece", but(good, "proof", alone, f"{at} inner", None, f"{at} set", None, f"{at} outer", [None, None]), "proof", "line 8 serves no later line")
    folded = claim(STEP, "[-1, 1]", 'w = ["-kappa/8", "1/8"]\np = ["1/2", "3/4"]', requires=["gain <= 0.75"], rest=GAINS)
    reject("a gain that sets a range", but(good, "claim text", folded), f"proof line {first + 2}", "kappa also sets an exponent, the end of a range")
    folded = claim(STEP.replace("p*kappa", "p*kappa*v**(2*kappa - 2)"), "[-1, 1]", UNCERTAIN, requires=["gain <= 0.75"], rest=GAINS)
    reject("a gain that sets an exponent", but(good, "claim text", folded), f"proof line {first + 2}", "kappa also sets an exponent, the end of a range")
    named = but(good, "claim text", claim(STEP, "[-1, 1]", UNCERTAIN, requires=["gain <= 0.75"], rest=GAINS.replace("kappa", "kept") + "\n[define]\nkappa = 1"))
    reject("a name that is no gain", named, f"proof line {first + 1}", "gain: one of the claim's gains")


pieces()


# v⁺ = v - p f + w with f = κ u v: −c m lies in [1/2, 3/2] for p in [1/2, 3/4] and u in [1, 2]; 2/σ_1 = 4/3, best 1 with k = 1/2


def contracting() -> None:
    held = 'p = ["1/2", "3/4"]\nu = [1, 2]\nh = { range = [1, 2], held = true }\nj = { range = [1, 2], held = true, change = 1 }\ni = [1, 2]'

    def drafted(step: str = "v - p*f", f: str = "kappa*u*v", low: str = "0", high: str = "4", sensitivity: tuple[str, str] = ("-3/4", "-1/2"), factor: tuple[str, str] = ("1", "2"), name: str = "kappa", **concludes: str) -> Entries:
        d = Draft(claim(step, "[-1, 1]", held, requires=["settles"], top='correction = ["f"]', rest=f'{GAINS}\n[define]\nf = "{f}"'))
        d.range("target[v]", "0", "0")
        d.theorem("smaller-ball", "ball", [1], radius="1")
        piece(d, 1, low, high)
        d.range("gains[1]:target[v]", "0", "0")
        d.theorem("smaller-ball", "gains[1]:ball", [4], radius="1")
        d.range("gains[1]:sector-sensitivity[v]", *sensitivity, [5])
        d.range(f"gains[1]:sector-factor[v,{name}]", *factor, [5])
        d.range("gains[1]:sector-start[v]", "0", "0")
        d.theorem("sensitivity-gain", f"gains[1]:sensitivity-gain[{name}]", [6, 7, 8], **({"lower": "0", "upper": "4/3", "best": "1", "gain": "1/2"} | concludes))
        entries = d.entries(None, [("settles", "undecided")])
        found = d.proof[-1]["concludes"]
        entries["results"]["gain_intervals"] = [{**NONE, "gain": "kappa", "contracting": [found["lower"], found["upper"]], "best": {"value": found["best"], "gain": found["gain"]}}]
        return entries

    good = drafted()
    accept("contracting", good)
    at = "results gain_intervals 0"
    for name, path, value in (("less", "contracting", ["1/2", "1"]), ("nothing", "contracting", None), ("best unsaid", "best", None), ("a larger gain", "best gain", moved("1/2", 1))):
        accept(f"contracting, {name}", but(good, f"{at} {path}", value))
    for name, path, value, reason in (
        ("lower", "contracting", [moved("0", -1), "4/3"], "contracting: more"), ("upper", "contracting", ["0", moved("4/3", 1)], "contracting: more"), ("best, more", "best value", moved("1", 1), "best: more"),
        ("best, less", "best value", moved("1", -1), "best: more"), ("a smaller gain", "best gain", moved("1/2", -1), "best: more"), ("no gain", "best gain", GONE, "best: the keys are value, gain"), ("inner", "inner", ["0", "1"], "inner: more"),
    ):
        reject(f"contracting, {name}", but(good, f"{at} {path}", value), "results", f"results.gain_intervals.{reason}")
    for key, value, fits, reason in (
        ("lower", moved("0", -1), False, "lower, upper"), ("lower", moved("4/3", -1), True, ""), ("lower", "4/3", False, "lower, upper"), ("upper", moved("4/3", 1), False, "lower, upper"), ("upper", moved("0", 1), True, ""), ("upper", "0", False, "lower, upper"),
        ("best", moved("1", 1), False, "gain: less"), ("best", moved("1", -1), False, "gain: less"), ("gain", moved("1/2", -1), False, "gain: less"), ("gain", moved("1/2", 1), True, ""),
    ):
        changed = but(good, f"proof 8 concludes {key}", value)
        if fits:
            ends = changed["proof"][8]["concludes"]
            accept(f"{key} {value}", but(changed, f"{at} contracting", [ends["lower"], ends["upper"]], f"{at} best gain", ends["gain"]))
        else:
            reject(f"{key} {value}", changed, "proof line 9", reason)
    # best beside the middle: where it is lower its k is 1 - κ σ_0, where it is larger κ σ_1 - 1
    for best, k in (("0", "1"), ("1/2", "3/4"), ("4/3", "1"), ("4", "5")):
        accept(f"best {best}", drafted(best=best, gain=k))
        reject(f"best {best}, less", drafted(best=best, gain=moved(k, -1)), "proof line 9", "gain: less")
    for best in (moved("0", -1), moved("4", 1)):
        reject(f"best {best}", drafted(best=best, gain="9"), "proof line 9", "best: outside the piece")
    # the ends of the piece
    accept("contracting up to 1", drafted(high="1", upper="1"))
    reject("contracting up to 1, more", drafted(high="1", upper=moved("1", 1)), "proof line 9", "lower, upper")
    accept("contracting from 1/2", drafted(low="1/2", lower="1/2"))
    reject("contracting from 1/2, less", drafted(low="1/2", lower=moved("1/2", -1)), "proof line 9", "lower, upper")
    reject("contracting from below 0", drafted(low=moved("0", -1)), "proof line 9", "is not shown to be above 0")
    # the band: its sign, its ends
    for name, other in (("sensitivity up to 0", {"sensitivity": ("-3/4", "0")}), ("factor from 0", {"factor": ("0", "2")}), ("beyond 0", {"sensitivity": ("-3/4", "1")})):
        reject(f"band, {name}", drafted(**other, upper="1/2"), "proof line 9", "is not shown to be above 0")  # type: ignore[arg-type]  # pairs of texts by name
    accept("both signs turned", drafted("v + p*f", "-kappa*u*v", sensitivity=("1/2", "3/4"), factor=("-2", "-1")))
    reject("one sign turned", drafted("v + p*f", sensitivity=("1/2", "3/4")), "proof line 9", "is not shown to be above 0")
    for f, factor in (("u*v*kappa", ("1", "2")), ("kappa*(u*v)", ("1", "2")), ("kappa*v*2/u", ("1", "2")), ("kappa*v + v*(u - 1)*kappa", ("1", "2")), ("kappa*v*3 - kappa*v*u", ("1", "2")), ("-(-kappa*u*v)", ("1", "2")), ("kappa*kappa*v/8", ("0", "1/2")), ("-kappa*v*(-u)", ("1", "2"))):
        found = drafted(f=f, factor=factor, upper="1/9")
        if f.startswith("kappa*kappa"):
            reject(f"factor of {f}", found, "proof line 9", "is not shown to be above 0")
        else:
            accept(f"factor of {f}", found)
    for f in ("kappa*v + v/8", "v/8 + kappa*v", "v/kappa", "abs(kappa*v)", "max(kappa*v, v)", "kappa*v - v", "u*v", "other*v", "v - kappa*v"):
        reject(f"no factor of {f}", drafted(f=f, low="1"), "proof line 7", "f: kappa is no factor of it")
    # what it rests on
    for uses in ([6, 7], [7, 6, 8], [6, 8, 7], [6, 7, 8, 8], []):
        reject(f"contracting uses {uses}", but(good, "proof 8 uses", uses), "proof line 9", "rests on range sector-sensitivity[v], range sector-factor[v,kappa], range sector-start[v]")
    for path, value in (("lower", moved("0", -1)), ("upper", moved("0", 1))):
        reject(f"a start {path}", but(good, f"proof 7 concludes {path}", value), "proof line 9", "the correction is not shown to be 0 at the target")
    smaller = {"rule": "smaller-ball", "proves": "gains[1]:ball", "uses": [4], "witness": {}, "concludes": {"radius": "1/2"}}
    lines = good["proof"]
    for k in (5, 6):
        changed = [*lines[:5], smaller, *[but(x, "uses", [n + (n > 5) for n in x["uses"]]) for x in lines[5:]]]
        reject(f"line {k + 1} on another set", but(good, "proof", changed, f"proof {k + 1} uses", [6]), "proof line 10", "the lines used refer to different sets")
    for name, reason in (("h", "is no factor of it"), ("w", "is no factor"), ("p", "is no factor")):
        reject(f"factor of {name}", drafted(name=name), "proof line 7", reason)
    for name, f in (("h", "kappa*h*v"), ("j", "kappa*j*v"), ("i", "kappa*i*v")):
        other = drafted("v - p*f/4", f, low="1", high="2", sensitivity=("-3/16", "-1/8"), factor=("1", "2"), name=name, lower="1", upper="2", best="1", gain="7/8")
        other["results"]["gain_intervals"] = [{**NONE, "gain": "kappa"}]
        if name == "h":  # a held quantity of the claim's own, but not the gain of the piece
            reject(f"contracting by {name}", other, "results", "gains[1]: neither")
        else:
            reject(f"contracting by {name}", other, "proof line 9", "about one gain, the same at every step")
    for name in ("", "q", "v"):
        reject(f"contracting of {name!r}", but(good, "proof 8 proves", f"gains[1]:sensitivity-gain[{name}]"), "proof line 9", "about one gain, the same at every step")
    reject("contracting without a piece", but(good, "proof 8 proves", "sensitivity-gain[kappa]"), "proof line 9", "uses: lines about other ranges")
    reject("contracting twice", but(good, "proof", [*lines, lines[8]]), "results", "sensitivity-gain[kappa] is proved more than once")
    second = [but(x, "proves", x["proves"].replace("gains[1]", "gains[2]"), "uses", [n + 7 for n in x["uses"]]) for x in lines[2:]]
    reject("contracting on two pieces", but(good, "proof", [*lines, *second]), "results", "sensitivity-gain[kappa] is proved more than once")
    for name in ("sector-factor[v]", "sector-factor[v,kappa,u]", "sector-factor[u,kappa]", "sector-gain[v,kappa]", "sector-factor[v,]"):
        reject(f"{name}", but(good, "proof 6 proves", f"gains[1]:{name}"), "proof line 7", f"{name} is no obligation")
    reject("a factor without a set", but(good, "proof 6 uses", []), "proof line 7", "needs a line that gives its set")


contracting()


def with_a_stance() -> None:
    """What has to stay positive throughout a stance, here its duration, has to be shown to on the same set."""
    running = "[dynamics]\nduration = 1\nstart = { x = 0 }\nrate = { x = 0 }"
    d = Draft(claim("v - p*f", "[-1, 1]", 'p = ["1/2", "3/4"]', requires=["settles"], top='correction = ["f"]', rest=f'{GAINS}\n[define]\nf = "kappa*v"\n{running}'))
    d.range("target[v]", "0", "0")
    d.theorem("smaller-ball", "ball", [1], radius="1")
    piece(d, 1, "0", "4")
    d.range("gains[1]:target[v]", "0", "0")
    d.theorem("smaller-ball", "gains[1]:ball", [4], radius="1")
    d.range("gains[1]:sector-sensitivity[v]", "-3/4", "-1/2", [5])
    d.range("gains[1]:sector-factor[v,kappa]", "1", "1", [5])
    d.range("gains[1]:sector-start[v]", "0", "0")
    d.range("gains[1]:support[1]", "1", "1", [5])
    d.theorem("sensitivity-gain", "gains[1]:sensitivity-gain[kappa]", [6, 7, 8, 9], lower="0", upper="8/3", best="8/5", gain="1/5")
    good = d.entries(None, [("settles", "undecided")])
    good["results"]["gain_intervals"] = [{**NONE, "gain": "kappa", "contracting": ["0", "8/3"]}]
    accept("contracting within a stance", good)
    accept("a stance that barely lasts", but(good, "proof 8 concludes lower", moved("0", 1)))
    for low in ("0", moved("0", -1)):
        reject(f"a stance of a duration from {low}", but(good, "proof 8 concludes lower", low), "proof line 10", "the stance is not shown to last")
    reject("a stance not shown to last", but(good, "proof 9 uses", [6, 7, 8]), "proof line 10", "range sector-start[v], range support[1]")
    reject("a stance shown to last twice", but(good, "proof 9 uses", [6, 7, 8, 9, 9]), "proof line 10", "range sector-start[v], range support[1]")


with_a_stance()


def refuses(checker: Any, question: Callable[[], Any], reason: str) -> None:
    try:
        question()
    except checker.rules.Rejected as why:
        assert reason in str(why), why
    else:
        raise AssertionError(reason)


@unit
def pieces_that_touch(checker: Any) -> None:
    joined, one, two, three = checker.gains.joined, Q(1), Q(2), Q(3)
    assert joined("k", []) is None and joined("k", [(two, three), (one, two)]) == (one, three)
    assert joined("k", [(one, three), (two, two)]) == (one, three)
    refuses(checker, lambda: joined("k", [(one, two), (two + Q(1, 10**30), three)]), "leave a gap")


@unit
def gains_around(checker: Any) -> None:
    around, needed = checker.gains.around, set[int]()
    broken = {Q(n): {n} for n in (1, 2, 6, 7)}
    assert around((Q(3), Q(5)), broken, needed) == (2, 6) and needed == {2, 6}
    assert around((Q(3), Q(5)), {}, needed) == (None, None) and around(None, broken, needed) == (None, None)
    for x in (Q(3), Q(4), Q(5)):
        refuses(checker, lambda x=x: around((Q(3), Q(5)), {x: {1}}, needed), "both proved and refuted")  # type: ignore[misc]  # each gain bound at once
    assert around((Q(3), Q(5)), {Q(3) - Q(1, 10**30): {8}}, needed)[0] is not None


@unit
def sets_of_pieces(checker: Any) -> None:
    """`set` is the one that says least; beside a ball, gains that are refuted on a region do not count."""
    gains, theorems = checker.gains, checker.theorems

    class Found:
        def __init__(self, kind: str | None, verdict: str) -> None:
            self.kind, self.needed = kind, {9}
            self.requirements = [type("Outcome", (), {"verdict": verdict})]

    class Lines:
        def __init__(self) -> None:
            self.lines: dict[int, Any] = {}

    def interval(*each: tuple[int, int, str | None, str]) -> Any:
        found = [Found(kind, verdict) for _, _, kind, verdict in each]
        pieces = [(n, theorems.Variant(n), theorems.Piece("k", Q(a), Q(b))) for n, (a, b, _, _) in enumerate(each, 1)]
        return gains.of_gain("k", pieces, Lines(), lambda v: found[v.piece - 1], set())

    for one, other, kind in (("region", "region", "region"), ("region", "ball", "ball"), ("ball", "region", "ball"), ("smaller ball", "ball", "smaller ball")):
        for broken in ("region", "ball", "smaller ball", None):
            found = interval((1, 2, one, "proved"), (2, 3, other, "proved"), (0, 0, broken, "refuted"), (4, 4, broken, "refuted"))
            counts = kind == "region" or broken != "region"
            assert found.set == kind and found.inner == (1, 3), found
            assert found.outer == ((0, 4) if counts else (None, None)), (kind, broken, found)
    assert interval((0, 0, "ball", "refuted")).set is None



# fmt: on


def test_boundaries() -> None:
    all_hold(CASES)
