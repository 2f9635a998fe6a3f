"""Claims as values: every section, defaults, order of dependence, all faults together and none that only follow."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path

import pytest

from tests.corpus import BASE, CSV, DYNAMICS, LIBRARY, STANCES, swap, top
from ultibound.claim import Claim, ClaimError, Problem, parse_claim, read_claim


def read(text: str, **settings: str) -> Claim:
    return parse_claim(text, settings, {}, "carrier.toml")


def faults(text: str, data: dict[str, str] | None = None) -> list[str]:
    with pytest.raises(ClaimError) as caught:
        parse_claim(text, {}, data or {}, "carrier.toml")
    return str(caught.value).split("\n")


def test_defaults() -> None:
    c = read(BASE)
    assert (c.route, c.correction, c.shrink, c.horizon, c.metric, c.weights) == ("best", (), False, 1, "auto", {})
    assert (c.gap, c.cells, c.seconds, c.notes) == (Fraction(1, 1000), 200_000, Fraction(600), "")
    assert [r.kind for r in c.requirements] == ["settles"] and [s.name for s in c.stances] == [""]
    assert (c.text, c.place, c.settings, c.data) == (BASE, "carrier.toml", {}, {})


def test_sections() -> None:
    more = '[metric]\nkind = "box"\nweights = { v = 2 }\n[effort]\ngap = 1e-6\ncells = 5\nseconds = "1/2"\n[[require]]\nthat = "steps(v, 0.5, kappa) <= 9"\nover = { T = [0.3, 0.4] }\n'
    c = read(top('route = "slope"\ncorrection = ["foot"]\nhorizon = 3\nshrink = true') + more)
    assert (c.route, c.correction, c.horizon, c.shrink, c.metric) == ("slope", ("foot",), 3, True, "box")
    assert (c.gap, c.cells, c.seconds) == (Fraction(1, 10**6), 5, Fraction(1, 2))
    (r,) = c.requirements
    assert (r.kind, r.state, r.relation, list(r.over)) == ("steps", "v", "<=", ["T"]) and r.start and r.end
    load = c.uncertain["load"]
    assert load.held and load.change and load.range and c.stances[0].states["v"].unit == "m/s"
    assert c.values == {"g": (Fraction(981, 100),) * 2, "kappa": (Fraction(1, 10),) * 2}


def test_definitions_come_in_order_of_dependence() -> None:
    c = read(swap('w = "sqrt(g/0.62)"', 'w = "a + 1"\na = "b"\nb = "g"'))
    order = list(c.stances[0].define)
    assert order.index("b") < order.index("a") < order.index("w")
    assert list(read(swap("g = 9.81", 'a = "b/2"\nb = "g"\ng = 9.81')).values)[:3] == ["g", "b", "a"]


def test_settings_replace_gains() -> None:
    assert read(BASE, kappa="1-2/3").values["kappa"] == (Fraction(1, 3),) * 2
    assert read(swap("kappa = 0.1", 'kappa = "1/0"'), kappa="-0.2").values["kappa"] == (Fraction(-1, 5),) * 2
    with pytest.raises(ClaimError, match=r"--set kapa: there is no such gain; did you mean kappa\?"):
        read(BASE, kapa="1")


def test_dynamics_and_stances() -> None:
    d = read(DYNAMICS).stances[0].dynamics
    assert d and list(d.start) == list(d.rate) == ["x", "xd"] and d.duration and not d.until
    left, right = read(STANCES).stances
    assert (left.then, right.then, left.mirror) == (("right",), ("left", "right"), ("vy",))
    assert left.define["side"].text == "1" and right.define["side"].text == "-1" and set(left.next) == {"vx", "vy"}


def test_all_faults_together_and_none_that_only_follow() -> None:
    text = swap("g = 9.81", 'g = "1/0"').replace("0.36, 0.40", "0.42, 0.34").replace("kappa*(v", "kapa*(v")
    assert faults(text.replace("[target]", "[metric]\nkind = 1\n[target]")) == [
        "carrier.toml: constants.g: division by zero",
        "carrier.toml: uncertain.T: lower end 0.42 exceeds upper end 0.34; swap them",
        "carrier.toml: define.foot: unknown name kapa; did you mean kappa?",
        "carrier.toml: metric.kind: 1 found, one of auto, box, ellipsoid, polytope is expected",
    ]


def test_a_fault_of_a_shared_section_is_told_once() -> None:
    assert len(faults(STANCES.replace('"vx/2"', '"vx/2 + 1/0"'))) == 1
    assert len(faults(STANCES.replace('w = "3.9"', 'w = "nope"'))) == 1
    assert len(faults(STANCES.replace("[target]\n", "[target]\nvz = 1\n"))) == 1


def test_faults_are_values_too_and_are_not_without_number() -> None:
    with pytest.raises(ClaimError) as caught:
        read("\n".join(f"titl{k} = 1" for k in range(500)) + "\n" + BASE)
    assert caught.value.problems[0] == Problem("titl0", "unknown key; did you mean title?")
    assert len(caught.value.problems) == 500 and str(caught.value).endswith("carrier.toml: and 400 more")


def test_numbers_are_told_from_names_and_texts() -> None:
    assert "line 5: '2T' is not a name" in faults(swap("g = 9.81", "g = 9.81\n2T = 1"))[0]
    assert len(faults(swap("[0.36, 0.40]", "[1_0, +3]"))) == 2
    assert read(top('notes = "1_0 [[[ +3"')).notes == "1_0 [[[ +3"


def test_files(tmp_path: Path) -> None:
    (tmp_path / "data").mkdir()
    (tmp_path / "data" / "gaits.csv").write_text(CSV)
    (tmp_path / "c.toml").write_bytes(swap("gaits.csv", "data/gaits.csv", LIBRARY).replace("\n", "\r\n").encode())
    c = read_claim(str(tmp_path / "c.toml"), {"kappa": "0.2"})
    assert c.data == {"data/gaits.csv": CSV} and c.settings == {"kappa": "0.2"} and "\r\n" in c.text
    (tmp_path / "data" / "gaits.csv").unlink()
    (tmp_path / "data" / "gaits.csv").symlink_to(tmp_path / "data" / "gaits.csv")
    for path in (tmp_path / "c.toml", Path("a\0b"), tmp_path, Path(".")):
        with pytest.raises(ClaimError):
            read_claim(path)
