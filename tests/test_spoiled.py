"""Certificates spoiled in exactly one place, hashes and digest recomputed, are rejected for the named reason."""

from __future__ import annotations

import copy
import hashlib
import json
import os
import pickle
import re
import subprocess
import sys
import time
import zipapp
from collections.abc import Callable, Iterator
from fractions import Fraction
from itertools import count
from pathlib import Path
from typing import Any

import pytest

from tests.conftest import proved
from tests.stances import GAITS, HEIGHT, LIBRARY, PUSHING, stance
from ultibound.checker import Verdict, check, verified
from ultibound.checker.document import canonical, digest
from ultibound.claim import parse_claim
from ultibound.prove import Attempt

pytestmark = pytest.mark.usefixtures("lines_verified_once")
LONG = bool(os.environ.get("ULTIBOUND_LONG"))
EACH_BYTES = 1 if LONG else 50  # of so many changed certificates one is read from its bytes
EXAMPLES = Path(__file__).parents[1] / "ultibound" / "examples"
CHECKER = Path(__file__).parents[1] / "ultibound" / "checker"
BALL = """
format = 1
[constants]
a = "sqrt(2)/2"
[state]
v = { range = [-0.5, 1.5], unit = "m/s" }
[uncertain]
d = [-0.05, 0.05]
p = { values = [0.1, 0.2] }
c = { range = [-0.1, 0.1], held = true, change = 0.01 }
[next]
v = "c - a*sin(v - c) + d + p/100 + 0.8*(v - c)**3"
[target]
v = "c"
[[require]]
that = "settles"
[[require]]
that = "gain < 0.99"
[[require]]
that = "value(v**2 + p)"
"""


SPLIT = """
format = 1
correction = ["shift"]
[gains]
kappa = 0.3
[state]
v = [-0.5, 1.5]
[uncertain]
d = [-0.02, 0.02]
[define]
shift = "-clip(kappa*(v - target(v)), -0.2, 0.2)"
[next]
v = "v + shift + d + 0.01*max(v, 0.3)"
[target]
v = 0.4
[[require]]
that = "settles"
[[require]]
that = "steps(v, 0.5, 0.2) <= 5"
[[require]]
that = "steps(v, 0.5, 0.2) <= 1"
[[require]]
that = "push(v) >= 0.3"
[[require]]
that = "sharp_bound(v) <= 0.2"
[[require]]
that = "bound(v) <= 0.01"
[[require]]
that = "always(shift <= 0.21)"
[effort]
gap = 0.02
"""


OVER = """
format = 1
[gains]
kappa = 0.5
[state]
v = [-1, 1]
[uncertain]
d = [-0.1, 0.1]
[next]
v = "v - kappa*v + d*cos(v)"
[target]
v = 0
[[require]]
that = "gain <= 0.6"
[[require]]
that = "bound(v) <= 0.5"
over = { kappa = [0.4, 0.6] }
[[require]]
that = "radius(v) >= 1.5"
over = { v = [-2, 2], d = [-0.2, 0.2] }
[effort]
gap = 0.02
"""


MIRRORED = """
format = 1
correction = ["shift", "place"]
[uncertain]
slip = [-0.003, 0.003]
c = { range = [0.2, 0.4], held = true, change = 0.02 }
[stance.left]
then = "right"
state = { y = [-0.4, 0.4], vy = [-1.5, 1.5] }
target = { y = 0.0, vy = "c" }
mirror = ["vy"]
define = { shift = "-0.7*y + 0.1*(vy - c)", place = "1.4*(vy - c) - 2*y" }
next = { y = "y + shift + slip", vy = "-vy + place + slip + 0.01*sin(y)" }
[stance.right]
then = "left"
state = { vy = [-1.5, 1.5], y = [-0.4, 0.4] }
target = { y = 0.0, vy = "-c" }
mirror = ["vy"]
define = { shift = "-0.7*y - 0.1*(vy + c)", place = "1.4*(vy + c) + 2*y" }
next = { y = "y + shift + slip", vy = "-vy + place + slip" }
[[require]]
that = "settles"
[[require]]
that = "bound(y) <= 0.2"
[[require]]
that = "bound(vy) <= 0.9"
in = "right"
[[require]]
that = "steps(vy, 0.5, 0.2) <= 40"
[[require]]
that = "always(vy <= 1.4)"
in = "right"
[effort]
gap = 0.1
"""


GROWING = """
format = 1
[state]
x = [-1, 1]
y = [-1, 1]
[uncertain]
q = { values = [0, 1] }
h = { range = [0, 0.1], held = true, change = 0.01 }
[next]
x = "h + (x - h + q*sin(y))/1.3"
y = "((1 - q)*(x - h) + y)/1.3"
[target]
x = "h"
y = 0
[[require]]
that = "gain < 1"
[[require]]
that = "steps(x, 0.5, 0.3) <= 1"
[[require]]
that = "radius(y) >= 0.99"
[effort]
gap = 0.1
"""


HORIZON = """
format = 1
horizon = 2
shrink = true
[state]
x = [-1, 1]
y = [-1, 1]
[uncertain]
p = [-0.03, 0.03]
h = { range = [-0.1, 0.1], held = true, change = 0.01 }
[next]
x = "h + 2*y + p"
y = "(x - h)/8 + p/2 + 0.01*(x - h)**2"
[target]
x = "h"
y = 0
[metric]
kind = "box"
[[require]]
that = "settles"
[[require]]
that = "bound(x) <= 0.3"
[[require]]
that = "steps(x, 0.1, 0.3) <= 4"
[[require]]
that = "always(next(x) <= 0.99)"
[effort]
gap = 0.1
"""


KINKED = """
format = 1
horizon = 2
shrink = true
[state]
v = [-1.5, 1.5]
[uncertain]
p = ["-1/16", "1/16"]
[next]
v = "v/4 + 2*max(v - 1/2, 0) + p"
[target]
v = 0
[[require]]
that = "settles"
[[require]]
that = "bound(v) <= 0.2"
"""


def stances() -> str:
    """A stance over two cells of a library, with a gust, a push and a limit throughout."""
    return stance(
        rates=PUSHING + ' + gust"', define=HEIGHT, rest="[constants]\ng = 9.81\n" + LIBRARY + "[effort]\ngap = 0.05\n",
        uncertain="T = [0.40, 0.41]\nv_cmd = { range = [0.4, 0.55], held = true, change = 0.01 }\nloss = [0.024, 0.026]\n"
        "gust = { range = [-0.05, 0.05], within = true }",
        requires=("settles", "push(v, during) >= 0.01", "throughout(x <= 0.5)", "value(xd)", "gain <= 0.4", "gain <= 0.2"),
    )  # fmt: skip


def courses() -> str:
    """A gust whose effect the state weighs: what it does over any course is bounded part by part."""
    return stance(
        rates='y = "gust*(1 + v*(t - 0.5))"', start='y = "0.3*v"', duration="1", define="", state="[-0.5, 0.5]", step="y", target="0",
        uncertain="gust = { range = [-0.1, 0.1], within = true }", requires=("gain < 0.35", "settles"),
    )  # fmt: skip


def sample(name: str) -> dict[str, Any]:
    if name == "courses":
        return proved(courses()).entries
    if name == "stance":
        return proved(stances(), data={"gaits.csv": GAITS}).entries
    texts = {"split": SPLIT, "over": OVER, "growing": GROWING, "horizon": HORIZON, "kinked": KINKED}
    if name in texts:
        return proved(texts[name]).entries
    if name == "several":
        text = (EXAMPLES / "recentring.toml").read_text().replace("[0.36, 0.42]", "[0.38, 0.40]")
        return proved(text + "[effort]\ngap = 0.1\n").entries
    if name == "mirrored":
        return proved(MIRRORED).entries
    if name == "ball":
        return proved(BALL.replace("0.8*(v - c)**3", "0.02*(v - c)**3")).entries
    text = (EXAMPLES / f"{name}.toml").read_text()
    if name == "walking":  # fewer cells, so that hundreds of checks stay quick
        text = (
            text.replace("[0.34, 0.44]", "[0.37, 0.38]")
            .replace("[0.2, 0.6]", "[0.35, 0.40]")
            .replace("slack = 0.01 ", "slack = 0.001 ")
        )
        text = text.replace("[0.60, 0.64]", "[0.62, 0.621]") + "[effort]\ngap = 0.1\n"
    if name == "interpolated":
        text = (
            text.replace("[0.37, 0.39]", "[0.37, 0.372]").replace("[-0.1, 0.9]", "[0.1, 0.7]") + "[effort]\ngap = 0.1\n"
        )
    if name == "sidestepping":
        text += "[effort]\ngap = 0.1\n"
    if name == "saturated":
        text = text.replace("sharp_bound", "bound") + "[effort]\ngap = 0.02\n"
    return proved(text, data={"gaits.csv": (EXAMPLES / "gaits.csv").read_text()} if "gaits.csv" in text else {}).entries


@pytest.fixture(
    scope="module",
    params=[
        "pendulum",
        "overstep",
        "walking",
        "saturated",
        "restless",
        "interpolated",
        "ball",
        "split",
        "over",
        "stance",
        "courses",
        "several",
        "sidestepping",
        "mirrored",
        "growing",
        "horizon",
    ],
)
def entries(request: pytest.FixtureRequest) -> dict[str, Any]:
    return sample(request.param)


@pytest.fixture(scope="module")
def pyz(tmp_path_factory: pytest.TempPathFactory) -> Path:
    from ultibound.certificate.standalone import build

    target = tmp_path_factory.mktemp("pyz") / "check_certificate.pyz"
    build(target)
    return target


def rehashed(entries: dict[str, Any]) -> None:
    for item in entries["claim"]["data"]:
        item["sha256"] = hashlib.sha256(item["text"].encode()).hexdigest()


def resealed(entries: dict[str, Any]) -> bytes:
    rehashed(entries)
    return canonical({**entries, "digest": digest(entries)})


def spoiled(entries: dict[str, Any], change: Callable[[dict[str, Any]], None]) -> dict[str, Any]:
    changed: dict[str, Any] = pickle.loads(pickle.dumps(entries))
    change(changed)
    return changed


def with_line(entries: dict[str, Any], number: int, **changes: Any) -> dict[str, Any]:
    """A proof one of whose lines, counted from 0, says something else; the others are shared."""
    proof = list(entries["proof"])
    proof[number] = {**proof[number], **changes}
    return {**entries, "proof": proof}


COUNTED = count()


def judged(entries: dict[str, Any], change: Callable[[dict[str, Any]], None]) -> Verdict:
    """The verdict on a changed certificate, hashes recomputed: of its bytes where nothing but its digest is wrong, and
    now and then; else of its entries, which is all that its bytes are read for."""
    return verdict_on(spoiled(entries, change))


def verdict_on(changed: dict[str, Any]) -> Verdict:
    data = resealed(changed) if next(COUNTED) % EACH_BYTES == 0 else b""
    rehashed(changed)
    verdict = verified(changed)
    if data or verdict.place == "digest":
        of_bytes = check(data or resealed(changed))
        assert verdict.place == "digest" or of_bytes == verdict
        return of_bytes
    return verdict


def rejected(verdict: Verdict, reason: str) -> None:
    assert verdict.status == "invalid", verdict
    assert reason in f"{verdict.place}: {verdict.reason}", verdict


def test_the_good_one_is_accepted(entries: dict[str, Any]) -> None:
    verdict = check(resealed(copy.deepcopy(entries)))
    assert verdict.status == "valid" and verdict.lines == len(entries["proof"]) and verdict.leaves > 0


def test_the_schema_describes_it(entries: dict[str, Any]) -> None:
    from jsonschema import Draft202012Validator

    from ultibound.checker.rules import SHAPES

    schema = json.loads((CHECKER.parent / "certificate" / "schema.json").read_text())
    Draft202012Validator.check_schema(schema)
    validator = Draft202012Validator(schema)
    assert not list(validator.iter_errors(json.loads(canonical(entries))))
    assert set(schema["$defs"]["line"]["properties"]["rule"]["enum"]) == set(SHAPES)
    for change in (
        lambda e: e["results"].update(extra=1),
        lambda e: e["proof"][0].update(uses=[0]),
        lambda e: e["results"]["gain"].update(upper=0.5),
    ):
        changed = copy.deepcopy(entries)
        change(changed)
        assert list(validator.iter_errors(changed))


def test_what_signals_of_any_course_rest_on() -> None:
    entries = sample("courses")
    number = next(n for n, x in enumerate(entries["proof"]) if x["proves"].startswith("signal-slope["))
    parts = entries["proof"][number]["proves"]
    assert parts == "signal-slope[4]" and check(resealed(copy.deepcopy(entries))).status == "valid"
    for key, value, reason in (
        ("proves", "signal-slope[1]", "unknown form"),
        ("witness", {"bits": 72, "trees": ["d"]}, f"{parts}: the range shown is wider than what is concluded"),
        ("proves", "signal-slope[100]", "signal-slope[100] is no obligation of this claim"),
        ("proves", "split-signal-slope[4]", "split-signal-slope[4] is no obligation of this claim"),
        ("proves", "slope[v,v]", "unknown form"),
        ("uses", entries["proof"][number]["uses"][:1], "no trajectory is proved"),
        ("uses", entries["proof"][number]["uses"][1:], "needs a line that gives its set"),
    ):

        def spoil(e: dict[str, Any], key: str = key, value: Any = value) -> None:
            e["proof"][number][key] = value

        rejected(judged(entries, spoil), reason)

    def bolder(e: dict[str, Any]) -> None:
        e["claim"]["text"] = e["claim"]["text"].replace("[-0.1, 0.1], within", "[-0.11, 0.1], within")

    rejected(judged(entries, bolder), "proof line")


# Which way each number claims more.
MORE = {
    "lower": 1,
    "upper": -1,
    "gain": -1,
    "residual": -1,
    "bound": -1,
    "radius": 1,
    "sharp": -1,
    "distance": 1,
    "highest": 1,
    "lowest": -1,
    "from": -1,
    "push": -1,
    "steps": 1,
    "error": -1,
    "outer": -1,
}


def quantities(value: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[tuple[Any, ...], str]]:
    """Every numeric leaf, with its path."""
    if isinstance(value, dict):
        for k, v in value.items():
            yield from quantities(v, (*path, k))
    elif isinstance(value, list):
        for k, v in enumerate(value):
            yield from quantities(v, (*path, k))
    elif isinstance(value, str) and path[-1] in MORE:
        yield path, value


def at(entries: Any, path: tuple[Any, ...]) -> Any:
    for k in path:
        entries = entries[k]
    return entries


def moved(text: str, more: int) -> str:
    q = Fraction(text)
    return str(q + more * max(abs(q), Fraction(1, 100)) / 50)


def test_every_number_that_claims_more_is_rejected(entries: dict[str, Any]) -> None:
    count = 0
    for path, text in list(quantities(entries["results"], ("results",))) + list(
        quantities(entries["proof"], ("proof",))
    ):
        end, attained = path[-1], "attained" in path
        shrunk = MORE[end] * (-1 if attained else 1)
        change = moved(text, shrunk)

        def spoil(e: dict[str, Any], path: tuple[Any, ...] = path, change: str = change) -> None:
            at(e, path[:-1])[path[-1]] = change

        verdict = judged(entries, spoil)
        assert verdict.status == "invalid", (path, text, change)
        assert verdict.place in ("results", f"proof line {path[1] + 1}" if path[0] == "proof" else "results") or (
            path[0] == "proof" and verdict.place.startswith("proof")
        ), (path, verdict)
        count += 1
    assert count > 20


def test_every_line_is_needed(entries: dict[str, Any]) -> None:
    """Without a line, later numbers shift down; what used it has nothing to rest on."""
    names = [(x["rule"], x["proves"]) for x in entries["proof"]]
    for number, (rule, proves) in enumerate(names, 1):
        # where a range and squares prove the same requirement, one of them may do
        other = {"range": "squares", "squares": "range"}.get(rule), proves
        gone = {number, *(n for n, name in enumerate(names, 1) if name == other)}

        def spoil(e: dict[str, Any], gone: set[int] = gone) -> None:
            e["proof"] = [x for n, x in enumerate(e["proof"], 1) if n not in gone]
            for line in e["proof"]:
                line["uses"] = [n - sum(g < n for g in gone) for n in line["uses"] if n not in gone]

        # a requirement over ranges of its own may rest on fewer lines than its whole proof has
        own = proves.startswith("over[")
        # of what is asked of several stances a point in one may say as much as a point in another
        own |= ":require[" in proves and rule == "point"
        # nor is a direction of split stretched on one step alone, where the other stance is the mirror image
        own |= ":split-" in proves and rule == "stretch"
        assert own or judged(entries, spoil).status == "invalid", gone


def test_a_line_retargeted_is_rejected(entries: dict[str, Any]) -> None:
    """Of names that differ in their number alone, as of shells, the first, and of its own its neighbours: all if LONG."""
    names = sorted({line["proves"] for line in entries["proof"]})
    families: dict[str, list[str]] = {}
    for name in sorted(names, key=lambda n: (len(n), n)):
        families.setdefault(re.sub(r"\[\d+\]$", "", name), []).append(name)
    for number, line in enumerate(entries["proof"]):
        mine = line["proves"]
        others = ["slope[v,w]", "require[99]", "require[0]", ""]
        for family in families.values():
            near = family[:1]
            if mine in family:
                k = family.index(mine)
                near += [family[-1], *family[max(0, k - 1) : k + 2]]
            others += set(family if LONG else near) - {mine}
        for name in others:
            verdict = verdict_on(with_line(entries, number, proves=name))
            assert verdict.status == "invalid", (number, name)
            assert verdict.place.startswith(("proof", "results")) and verdict.reason, verdict


def test_a_rule_or_use_exchanged_is_rejected(entries: dict[str, Any]) -> None:
    for number, line in enumerate(entries["proof"]):
        for uses in ([], [number + 1], [0], [True], ["1"], line["uses"] * 2, line["uses"][::-1]):
            if uses == line["uses"] or (line["rule"] == "absorbed" and set(uses) == set(line["uses"])):
                continue  # which takes any number of bounds, in any order
            assert verdict_on(with_line(entries, number, uses=uses)).status == "invalid", (number, uses)
        for rule in (
            "range",
            "point",
            "slope",
            "split",
            "sector",
            "curve",
            "shells",
            "orbit",
            "path",
            "escape",
            "pushed",
            "ultimate-bound",
            "squares",
            "trajectory",
            "largest-ball",
            "smaller-ball",
        ):
            if rule != line["rule"]:
                rejected(verdict_on(with_line(entries, number, rule=rule)), "proof line")


def test_lines_about_other_ranges_are_not_mixed() -> None:
    """The lines of a requirement with ranges of its own rest on each other alone, and prove nothing of the claim itself."""
    entries = sample("over")
    proof = entries["proof"]
    for number, line in enumerate(proof):
        for prefix in {"", "over[2]:", "over[3]:", "over[1]:", "over[9]:", "over[0]:"} - {
            line["proves"].rpartition(":")[0] + ":"
        }:
            other = prefix + line["proves"].rpartition(":")[2]
            if other == line["proves"]:
                continue

            def spoil(e: dict[str, Any], number: int = number, other: str = other) -> None:
                e["proof"][number]["proves"] = other

            assert judged(entries, spoil).status == "invalid", (line["proves"], other)
    for number, line in enumerate(proof):
        for k, used in enumerate(line["uses"]):
            twin = next((n for n, x in enumerate(proof[:number], 1) if n != used and x["proves"].rpartition(":")[2] == proof[used - 1]["proves"].rpartition(":")[2]
                         and x["rule"] == proof[used - 1]["rule"]), None)  # fmt: skip
            if twin is not None:

                def mix(e: dict[str, Any], number: int = number, k: int = k, twin: int = twin) -> None:
                    e["proof"][number]["uses"][k] = twin

                rejected(judged(entries, mix), "lines about other ranges")


def test_a_horizon_that_leaves_the_region_between_steps_is_rejected() -> None:
    """Each line but one holds: two steps keep the ball, one leads out of it, and then out of the region."""
    entries = sample("kinked")
    assert entries["results"]["set"]["kind"] == "smaller ball"
    names = [line["proves"] for line in entries["proof"]]
    course, first = names.index("course"), names.index("slope@1")
    ends, radius = entries["proof"][first]["concludes"], Fraction(entries["results"]["radius"]["lower"])
    far = Fraction(ends["gain"]) * radius + Fraction(ends["residual"])
    assert radius < far < Fraction(3, 2)

    def narrow(e: dict[str, Any], low: Fraction = far, high: Fraction = far) -> None:
        e["claim"]["text"] = e["claim"]["text"].replace("[-1.5, 1.5]", f'["-({low})", "{high}"]')

    leaves = f"proof line {course + 1}: a step on the way is not shown to stay in the region of v"
    for low, high in ((far - Fraction(1, 10**30), far), (far, far - Fraction(1, 10**30))):
        rejected(judged(entries, lambda e, low=low, high=high: narrow(e, low, high)), leaves)
    verdict = judged(entries, narrow)  # at the edge itself: the lines after it are about the claim's region
    assert verdict.place != f"proof line {course + 1}"

    def more(e: dict[str, Any]) -> None:
        e["proof"][first]["concludes"]["gain"] = str(Fraction(ends["gain"]) * 2)

    rejected(judged(entries, more), leaves)

    def without(e: dict[str, Any]) -> None:
        del e["proof"][course]
        for line in e["proof"]:
            line["uses"] = [n - (n > course + 1) for n in line["uses"] if n != course + 1]

    rejected(judged(entries, without), "results.set.kind: 'smaller ball' is claimed, None was derived")
    for other in ("slope@2", "slope@0", "slope"):
        rejected(
            judged(entries, lambda e, other=other: e["proof"][first].update(proves=other)), f"proof line {first + 1}"
        )


def test_a_cut_tree_is_rejected(entries: dict[str, Any]) -> None:
    for number, line in enumerate(entries["proof"]):
        if line["rule"] != "range":
            continue
        trees = line["witness"]["trees"]
        cuts: list[Any] = [[], trees[:-1], [*trees, "d"], ["", *trees[1:]], [trees[0] + " d", *trees[1:]], ["9 d d", *trees[1:]],
                           ["x", *trees[1:]], "d", [trees[0].rpartition(" ")[0], *trees[1:]]]  # fmt: skip
        for cut in cuts:

            def spoil(e: dict[str, Any], number: int = number, cut: Any = cut) -> None:
                e["proof"][number]["witness"]["trees"] = cut

            rejected(judged(entries, spoil), f"proof line {number + 1}")


def test_a_flow_spoiled_in_one_place_is_rejected() -> None:
    """Each part of a trajectory's witness, changed so that it proves less than what is concluded or has no shape."""
    entries = sample("stance")
    (number,) = [n for n, x in enumerate(entries["proof"]) if x["rule"] == "trajectory"]
    witness = entries["proof"][number]["witness"]
    text = witness["cells"][0][0]
    first = text.split(" ")

    def cells(*changed: Any) -> list[Any]:
        return [list(changed), *witness["cells"][1:]]

    cuts, cut = witness["cuts"], next(n for n in witness["cuts"] if n != "T")
    spoils: list[tuple[str, Any, str]] = [
        ("cells", cells(" ".join([str(int(first[0]) + 2**50), *first[1:]])), "error"),
        ("cells", cells(" ".join(["0", *first[1:]])), "error"),
        ("cells", cells(" ".join(first[:-1])), "cells[0][0]"),
        ("cells", cells(text + " 0"), "cells[0][0]"),
        ("cells", cells("+" + text), "cells[0][0]"),
        ("cells", cells(text.replace(" ", "  ", 1)), "cells[0][0]"),
        ("cells", cells(text, text), "cells[0]"),
        ("cells", witness["cells"][1:], "cells"),
        ("cells", [*witness["cells"], witness["cells"][0]], "cells"),
        ("pieces", ["0", "1/2"], "pieces"),
        ("pieces", ["1/10", "1"], "pieces"),
        ("pieces", ["0", "1/2", "1"], "cells[0]"),
        ("degrees", [witness["degrees"][0] - 1, witness["degrees"][1]], "cells[0][0]"),
        ("degrees", [witness["degrees"][0], 13], "degrees"),
        ("degrees", [witness["degrees"][0], True], "degrees"),
        ("bits", witness["bits"] + 1, "error"),
        ("bits", 401, "bits"),
        ("cuts", {n: x for n, x in cuts.items() if n != cut}, "cuts"),
        ("cuts", {**cuts, cut: cuts[cut][::-1]}, f"cuts.{cut}"),
        ("cuts", {**cuts, cut: [cuts[cut][0], cuts[cut][-1]]}, f"cuts.{cut}"),
        ("cuts", {**cuts, cut: [cuts[cut][0], "1/2", "0.7"]}, "error"),
    ]
    for key, value, reason in spoils:

        def spoil(e: dict[str, Any], key: str = key, value: Any = value) -> None:
            e["proof"][number]["witness"][key] = value

        rejected(judged(entries, spoil), f"proof line {number + 1}: {reason}")
    for k in range(len(first)):  # every coefficient, by an amount that shows
        changed = [*first[:k], str(int(first[k]) + 2 ** (witness["bits"] - 12)), *first[k + 1 :]]

        def bend(e: dict[str, Any], changed: list[str] = changed) -> None:
            e["proof"][number]["witness"]["cells"][0][0] = " ".join(changed)

        if k % (1 if LONG else 23) == 0:  # of each entry, of each power of time and of the cell's coordinates
            rejected(judged(entries, bend), f"proof line {number + 1}: error")


def test_squares_spoiled_in_one_place_are_rejected() -> None:
    """Coefficients, powers, weights and bounds of the witness, each moved by one; a piece or a square left out."""
    entries = sample_pendulum()
    (number,) = [n for n, x in enumerate(entries["proof"]) if x["rule"] == "squares"]
    text = json.dumps(entries["proof"][number]["witness"]["pieces"])
    found = list(re.finditer(r"-?\d+", text))
    assert len(found) > 300
    for whole in found[:: 1 if LONG else 17]:
        changed = f"{text[: whole.start()]}{int(whole[0]) + 1}{text[whole.end() :]}"

        def spoil(e: dict[str, Any], changed: str = changed) -> None:
            e["proof"][number]["witness"]["pieces"] = json.loads(changed)

        if int(whole[0]) != -1:  # 0 is no coefficient, and -1 and 1 have the same square
            rejected(judged(entries, spoil), f"proof line {number + 1}")
    for path in (("pieces", 0), ("pieces", 0, "lower"), ("pieces", 0, "upper", "squares", 0), ("trees", 0), ("order",)):

        def without(e: dict[str, Any], path: tuple[Any, ...] = path) -> None:
            del at(e["proof"][number]["witness"], path[:-1])[path[-1]]

        rejected(judged(entries, without), f"proof line {number + 1}")
    rejected(
        judged(entries, lambda e: e["proof"][number].update(rule="range")),
        f"proof line {number + 1}: witness: the keys",
    )


def test_no_set_without_every_line_of_support() -> None:
    """What has to stay positive throughout the stance: the same lines without one of these prove no set."""
    entries = sample("stance")
    supports = [n for n, x in enumerate(entries["proof"], 1) if x["proves"].startswith("support")]
    assert len(supports) >= 3
    for gone in supports:

        def spoil(e: dict[str, Any], gone: int = gone) -> None:
            del e["proof"][gone - 1]
            for line in e["proof"]:
                line["uses"] = [n - (n > gone) for n in line["uses"]]

        assert judged(entries, spoil).status == "invalid"


def test_another_claim_is_rejected(entries: dict[str, Any]) -> None:
    """A harder claim under the same proof: wider ranges, another gain, other data."""
    text = entries["claim"]["text"]
    harder = [(a, b) for a, b in [
        ("kappa = 0.1 ", "kappa = 0.02 "), ("kappa = 0.09", "kappa = 0.01"), ("kappa = 0.3 ", "kappa = 0.05 "),
        ("T = { range = [0.36, 0.40]", "T = { range = [0.30, 0.40]"), ("[0.37, 0.38]", "[0.32, 0.46]"),
        ("d = [-0.05, 0.05]", "d = [-0.09, 0.05]"), ("values = [0.1, 0.2]", "values = [0.1, 0.2, 2]"),
        ("slip = [-0.003, 0.003]", "slip = [-0.03, 0.003]"), ("change = 0.02", "change = 0.05"), ("change = 0.01", "change = 0.05"), ("change = 0.005", "change = 0.05"), ("limit = 0.035", "limit = 0.01"), ("p = [-0.03, 0.03]", "p = [-0.05, 0.03]"), ("horizon = 2", "horizon = 3"), ("horizon = 2", "horizon = 1"), ("x = [-1, 1]\ny", "x = [-0.7, 1]\ny"), ("kappa = 0.6", "kappa = 0.2"), ("kappa = [0.4, 0.6]", "kappa = [0.1, 0.6]"), ("d = [-0.2, 0.2]", "d = [-0.4, 0.2]"), ("kappa = 0.3\n", "kappa = 0.1\n"), ('correction = ["shift"]', ""), ("g = 9.81", "g = 9.5"), ("T = [0.40, 0.41]", "T = [0.39, 0.41]"), ("[-0.05, 0.05], within", "[-0.06, 0.05], within"), ("[-0.1, 0.1], within", "[-0.11, 0.1], within"), ("loss = [0.024, 0.026]", "loss = [0.02, 0.026]"), ("x <= 0.5", "x <= 0.05"), ("range = [-0.2, 1.0]", "range = [-0.1, 0.9]"),
    ] if a in text]  # fmt: skip
    assert harder
    for old, new in harder:

        def spoil(e: dict[str, Any], old: str = old, new: str = new) -> None:
            e["claim"]["text"] = text.replace(old, new)

        assert judged(entries, spoil).status == "invalid", (old, new)
    if entries["claim"]["data"]:

        def data(e: dict[str, Any]) -> None:
            text = e["claim"]["data"][0]["text"].replace("0.4,0.36,", "0.4,0.36,1")
            e["claim"]["data"][0]["text"] = text.replace("0.5,0.42,0.6,", "0.5,0.42,0.7,")

        assert judged(entries, data).status == "invalid"
    if "kappa =" in text:

        def setting(e: dict[str, Any]) -> None:
            e["claim"]["set"] = {"kappa": "0.02"}

        assert judged(entries, setting).status == "invalid"


@pytest.mark.parametrize("change, reason", [
    (lambda e: e.update(proof=[]), "at least one line"),
    (lambda e: e["results"].update(requirements=[]), "one entry a requirement"),
    (lambda e: e["results"]["requirements"][0].update(that="gain < 2"), "is claimed"),
    (lambda e: e["results"].update(route="curve"), "results.route"),
    (lambda e: e["results"].update(sharp_bound={"lower": "0", "upper": "0"}), "results.sharp_bound"),
    (lambda e: e["results"]["states"]["v"].update(push={"lower": "1", "upper": "2"}), "results.states.v"),
    (lambda e: e["results"].update(gain_intervals=[{"gain": "kappa"}]), "results.gain_intervals"),
    (lambda e: e["results"].update(metric={"kind": "box", "weights": {"v": "2"}}), "results.metric"),
    (lambda e: e.update(assumptions=["all is well"]), "assumptions"),
    (lambda e: e["claim"]["data"].append({"name": "x.csv", "sha256": "", "text": ""}), "claim: data"),
    (lambda e: e["proof"].append(copy.deepcopy(e["proof"][0])), "serves no later line"),
    (lambda e: e["proof"][0].update(note="fine"), "proof line 1"),
])  # fmt: skip
def test_entries_that_say_more_are_rejected(change: Callable[[dict[str, Any]], None], reason: str) -> None:
    rejected(judged(sample_pendulum(), change), reason)


_PENDULUM: list[dict[str, Any]] = []


def sample_pendulum() -> dict[str, Any]:
    if not _PENDULUM:
        _PENDULUM.append(sample("pendulum"))
    return _PENDULUM[0]


def test_a_smaller_ball_proves_no_gain() -> None:
    """Every line of this certificate holds; but gain, bound and value would be about a smaller set than the claim asks."""
    more = "".join(
        f'[[require]]\nthat = "{that}"\n'
        for that in ("radius(v) >= 0.3", "push(v) >= 0.05", "steps(v, 0.35, 0.3) <= 9")
    )
    text = BALL.replace("0.8*(v - c)**3", "0.02*(v - c)**3") + more
    verdicts = {"": ["undecided"] * 3 + ["proved", "undecided", "proved"], "shrink = true\n": ["proved"] * 6}
    for top, wanted in verdicts.items():
        claim = parse_claim(text.replace("format = 1\n", f"format = 1\n{top}"), {}, {}, "c")
        attempt = Attempt(claim, 1e-3, time.monotonic() + 600, lambda *_: None, False, Fraction(39, 100))
        entries = attempt.certificate.entries
        assert entries["results"]["set"]["kind"] == "smaller ball"
        assert [r["verdict"] for r in entries["results"]["requirements"]] == wanted
        assert check(resealed(entries)).status == "valid"
        entries["results"]["set"]["kind"] = "ball"
        rejected(check(resealed(entries)), "results.set.kind")
        entries["results"]["set"]["kind"] = "smaller ball"
        if not top:
            for r in entries["results"]["requirements"][:3]:
                r["verdict"] = "proved"
                rejected(check(resealed(entries)), "verdict: proved is claimed, undecided was derived")
                r["verdict"] = "undecided"


def test_a_verdict_turned_is_rejected() -> None:
    for name in ("overstep", "pendulum"):
        entries = sample(name)
        for k, r in enumerate(entries["results"]["requirements"]):
            for verdict in {"proved", "refuted"} - {r["verdict"]} | {"PROVED", "", "true"}:

                def spoil(e: dict[str, Any], k: int = k, verdict: str = verdict) -> None:
                    e["results"]["requirements"][k]["verdict"] = verdict

                rejected(judged(entries, spoil), "verdict")


def test_a_point_outside_is_rejected(entries: dict[str, Any]) -> None:
    for number, line in enumerate(entries["proof"]):
        for name, value in line["witness"].get("at", {}).items():
            for wrong in ("1000", "#99", "x", value + " "):

                def spoil(e: dict[str, Any], number: int = number, name: str = name, wrong: str = wrong) -> None:
                    e["proof"][number]["witness"]["at"][name] = wrong

                rejected(judged(entries, spoil), f"proof line {number + 1}")


def test_the_digest_and_hashes_detect_accidents() -> None:
    entries = copy.deepcopy(sample_pendulum())
    entries["digest"] = "0" * 64
    rejected(check(canonical(entries)), "digest")


def run(pyz: Path, data: bytes, folder: Path, *options: str) -> subprocess.CompletedProcess[str]:
    path = folder / "c.json"
    path.write_bytes(data)
    command = [sys.executable, "-I", "-S", str(pyz), str(path), *options]
    return subprocess.run(command, capture_output=True, text=True, timeout=60, cwd=folder, check=False)


def test_the_one_file_checker_agrees(entries: dict[str, Any], pyz: Path, tmp_path: Path) -> None:
    good, bad = tmp_path / "good.cert.json", tmp_path / "bad.cert.json"
    good.write_bytes(resealed(copy.deepcopy(entries)))
    bad.write_bytes(resealed(spoiled(entries, lambda e: e["results"]["gain"].update(upper="0.0001"))))
    done = each(pyz, tmp_path, good, bad, as_json=True)
    results, accepted, rejected = done.stdout.splitlines()
    assert accepted == "0" and json.loads(results)["route"] == entries["results"]["route"], done
    assert rejected == "1" and "results.gain.upper: more is claimed" in done.stderr


def test_what_the_one_file_checker_cannot_read(pyz: Path, tmp_path: Path) -> None:
    for data in (b"", b"{", b"\xff", b"[]", b"{}", b'{"format":"ultibound-certificate/2"}'):
        assert run(pyz, data, tmp_path).returncode == 2


def each(pyz: Path, folder: Path, *paths: Path, as_json: bool = False) -> subprocess.CompletedProcess[str]:
    """What the file says of several certificates, and its exit status for each, in one process."""
    command = [sys.executable, "-I", "-S", "-c", EACH.format(as_json=as_json), str(pyz), *map(str, paths)]
    return subprocess.run(command, capture_output=True, text=True, timeout=600, cwd=folder, check=True)


EACH = "import sys; sys.path.insert(0, sys.argv[1]); from checker.command import run; [print(run(path, None, False, {as_json}, False)) for path in sys.argv[2:]]"


def test_spoiled_certificates_through_the_one_file_checker(pyz: Path, tmp_path: Path) -> None:
    """Each number of one certificate moved so that it claims more, each line removed: the file says no, and why.

    All of them in one process of its own, and some in one each."""
    entries = sample("over")
    spoilt: list[bytes] = []
    for path, text in [*quantities(entries["results"], ("results",)), *quantities(entries["proof"], ("proof",))]:
        more = MORE[path[-1]] * (-1 if "attained" in path else 1)
        changed = copy.deepcopy(entries)
        at(changed, path[:-1])[path[-1]] = moved(text, more)
        spoilt.append(resealed(changed))
    for gone, line in enumerate(entries["proof"]):
        if not line["proves"].startswith("over["):  # as in test_every_line_is_needed
            changed = copy.deepcopy(entries)
            del changed["proof"][gone]
            spoilt.append(resealed(changed))
    for setting in ({"kappa": "0.02"}, {"kappa": "0.1"}):
        changed = copy.deepcopy(entries)
        changed["claim"]["set"] = setting
        spoilt.append(resealed(changed))
    assert len(spoilt) > 150
    said = [f"INVALID: {verdict.place}: {verdict.reason}\n" for verdict in map(check, spoilt)]
    for data, expected in list(zip(spoilt, said, strict=True))[:: 1 if LONG else 40]:
        done = run(pyz, data, tmp_path)
        assert done.returncode == 1 and done.stdout == expected, done
    paths = [tmp_path / f"{k}.json" for k in range(len(spoilt))]
    for path, data in zip(paths, spoilt, strict=True):
        path.write_bytes(data)
    assert each(pyz, tmp_path, *paths).stdout == "".join(f"{line}1\n" for line in said)
    good = run(pyz, resealed(copy.deepcopy(entries)), tmp_path, "--json")
    assert good.returncode == 0 and json.loads(good.stdout)["route"] == entries["results"]["route"], good


def test_the_one_file_checker_is_the_folder(pyz: Path) -> None:
    import zipfile

    with zipfile.ZipFile(pyz) as archive:
        names = {n for n in archive.namelist() if n.endswith(".py")}
        assert {f"checker/{p.name}" for p in CHECKER.glob("*.py")} <= names
    assert zipapp.get_interpreter(pyz) == "/usr/bin/env python3"


def test_a_ball_does_not_stand_in_for_a_region_that_is_mapped_into_itself() -> None:
    """Without a point of the image outside the region, the ball proves no gain."""
    entries = copy.deepcopy(sample("ball"))
    number = next(n for n, x in enumerate(entries["proof"], 1) if (x["rule"], x["proves"]) == ("point", "image[v]"))
    del entries["proof"][number - 1]
    for line in entries["proof"]:
        line["uses"] = [n - (n > number) for n in line["uses"]]
    rejected(check(resealed(entries)), "results.set.kind: 'ball' is claimed, 'smaller ball' was derived")
