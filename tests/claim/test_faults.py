"""Bad input: a clean error that names the place, what was found and the remedy, quickly; nothing is executed."""

from __future__ import annotations

import os
import time
from fractions import Fraction
from pathlib import Path

import pytest

from tests.corpus import BASE, CSV, LIBRARY, swap
from ultibound.claim import ClaimError, parse_claim, read_claim


def refused(text: str, data: dict[str, str] | None = None, limit: float = 1.0) -> list[str]:
    start = time.process_time()
    with pytest.raises(ClaimError) as caught:
        parse_claim(text, {}, data or {}, "walker.toml")
    assert time.process_time() - start < limit
    lines = str(caught.value).split("\n")
    assert all(line.startswith("walker.toml: ") and len(line) < 1100 for line in lines)
    return lines


def refused_file(path: Path, limit: float = 2.0) -> str:
    start = time.process_time()
    with pytest.raises(ClaimError) as caught:
        read_claim(path)
    assert time.process_time() - start < limit
    return str(caught.value)


def test_row_1_files_of_a_wrong_kind(tmp_path: Path) -> None:
    (tmp_path / "empty.toml").write_bytes(b"")
    (tmp_path / "one.toml").write_bytes(b"x")
    os.mkfifo(tmp_path / "fifo.toml")
    for name, said in (
        ("empty.toml", "empty"),
        ("one.toml", "end of file"),
        ("fifo.toml", "regular file"),
        (".", "regular file"),
        ("none.toml", "cannot be read"),
    ):
        assert said in refused_file(tmp_path / name), name
    assert "regular file" in refused_file(Path("/dev/zero"))


@pytest.mark.parametrize("data, offset", [
    (b"format = 1\n\xff", 11), (BASE.encode("utf-16"), 0), (b"\xef\xbb\xbfformat = 1", 0), (b"# \xed\xa0\x80", 2), (b"format = 1 # \x00", 13),
])  # fmt: skip
def test_row_2_text_that_is_not_utf_8(data: bytes, offset: int, tmp_path: Path) -> None:
    path = tmp_path / "c.toml"
    path.write_bytes(data)
    assert f"byte {offset}" in refused_file(path)


def test_row_3_files_over_their_limit(tmp_path: Path) -> None:
    path = tmp_path / "c.toml"
    path.write_text(BASE + "#" + "x" * 2**20)
    assert "1 MiB" in refused_file(path)
    path.write_text(LIBRARY)
    with (tmp_path / "gaits.csv").open("wb") as file:
        file.truncate(64 * 2**20 + 1)
    assert "64 MiB" in refused_file(path)


@pytest.mark.parametrize("depth", [65, 1_000_000])
def test_row_4_nesting(depth: int) -> None:
    room = min(depth, 500_000)
    assert any("nested" in x for x in refused("format = 1\nx = " + "[" * room))
    assert any("nested" in x or "characters" in x for x in refused(swap("v/2 + foot", "(" * room + "v" + ")" * room)))


def test_row_5_duplicate_keys_are_named() -> None:
    (line,) = refused(swap("g = 9.81", "g = 9.81\ng = 9.82"))
    assert "twice" in line and "g = 9.82" in line and "line 5" in line
    (line,) = refused(BASE + "[gains]\nkappa = 1\n")
    assert "twice" in line


@pytest.mark.parametrize(
    "number", ["nan", "inf", "-inf", "1_0", "+3", "0x1F", "1E3", "1e+3", '"٣"', '"1 0"', '"1/0"', '"-0/5/0"']
)
def test_rows_6_and_7_numbers_outside_the_grammar(number: str) -> None:
    (line, *_) = refused(swap("g = 9.81", f"g = {number}"))
    assert "constants.g" in line or "line 4" in line


def test_rows_8_and_9_long_numbers() -> None:
    for n in ("9" * 4001, "0." + "1" * 4000, '"' + "9" * 9000 + '"'):
        assert any("4000 digits" in x for x in refused(swap("g = 9.81", f"g = {n}")))
    for n in ("1e1000000000", "1e-1000000000", '"1e1000000000"'):
        refused(swap("g = 9.81", f"g = {n}"))
    long = parse_claim(swap("g = 9.81", 'g = "1/' + "7" * 3000 + '"'), {}, {}, "c")
    assert len(str(long.values["g"][0].denominator)) == 3000


def test_row_10_unknown_keys_with_the_nearest_and_all_errors_together() -> None:
    text = (
        swap("[target]", "[taget]")
        .replace("kappa*(v", "kapa*(v")
        .replace("[0.36, 0.40]", "[0.40, 0.36]")
        .replace('title = "Tray carrier"', "title = 1")
    )
    lines = refused(text)
    whole = "\n".join(lines)
    assert "taget: unknown key; did you mean target?" in whole
    assert "uncertain.T: lower end 0.40 exceeds upper end 0.36; swap them" in whole
    assert "title: the number 1 found, text is expected" in whole
    assert "target.v: missing" in whole and len(lines) >= 4
    assert "unknown name kapa; did you mean kappa?" in "\n".join(refused(swap("kappa*(v", "kapa*(v")))


@pytest.mark.parametrize("data, said", [
    (CSV.replace("1,0.5,0.21\n", ""), "3 rows, but a full grid has 4 nodes; missing: speed = 1, period = 0.5"), (CSV + "1,0.5,0.3\n", "row 6: the same node as row 5"),
    (CSV.replace("0.21", ""), "row 5, column reach: blank"), (CSV.replace("0.21", "fast"), "row 5, column reach: 'fast'"), (CSV.replace(",0.21", ""), "row 5: 2 cell(s), the header has 3"),
])  # fmt: skip
def test_row_11_ragged_grids(data: str, said: str) -> None:
    assert any(said in x for x in refused(LIBRARY, {"gaits.csv": data}))


def test_row_11_wrong_types_have_their_path() -> None:
    for old, new, place in (
        ("T = [0.36, 0.40]", "T = 3", "uncertain.T"),
        ("v = 0.4\n", "v = [1]\n", "target.v"),
        ('title = "Tray carrier"', "notes = [1]", "notes"),
        ("kappa = 0.1", "kappa = {}", "gains.kappa"),
    ):
        assert any(f": {place}: " in x for x in refused(swap(old, new))), place


def test_row_12_another_format() -> None:
    (line,) = refused("format = 2\n[future]\nx = 1\n[state]\nv = [0, 1]\n")[-1:]
    assert "this program reads format = 1" in line


CODE = [
    "__import__('os').system('touch RAN')",
    "exec(1)",
    "v.__class__",
    "(lambda: 1)()",
    "[v for v in (1,)]",
    "f'{v}'",
    "{v.real}",
    "%s% v",
    "open(1)",
    "v.diff(v)",
    "Symbol('v')",
    "`touch RAN`",
    "$(touch RAN)",
]


@pytest.mark.parametrize("code", CODE)
def test_row_13_code_does_not_run(code: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    quoted = code.replace("\\", "\\\\").replace('"', '\\"')
    refused(swap("v/2 + foot", quoted))
    refused(f'{BASE}[[require]]\nthat = "{quoted}"\n')
    refused(swap("g = 9.81", f'g = "{quoted}"'))
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    "bomb",
    [
        "9**9**9",
        "((((9**64)**64)**64)**64)**64",
        "-" * 100_000 + "v",
        "(" * 100_000,
        "a" * 1_000_000,
        "v" + "**2" * 80,
        "*".join(["1e9999"] * 200),
    ],
)
def test_row_14_expression_bombs(bomb: str) -> None:
    refused(swap("v/2 + foot", bomb))
    refused(swap("kappa = 0.1", f'kappa = "{bomb}"'))


def test_definitions_that_would_explode_stay_small() -> None:
    """A chain in which each name uses the one before twice: shared, never expanded."""
    from ultibound.prove import prove

    chain = 'd0 = "v"\n' + "\n".join(f'd{k} = "(d{k - 1} + d{k - 1})/2"' for k in range(1, 60))
    start = time.process_time()
    certificate = prove(
        parse_claim(
            swap("v/2 + foot", "0.5*d59 + 0.1").replace('w = "sqrt(g/0.62)"', 'w = "sqrt(g/0.62)"\n' + chain),
            {},
            {},
            "c",
        )
    )
    assert certificate.results["gain"]["upper"] == "0.5" and time.process_time() - start < 20


def test_data_files_stay_beside_the_claim(tmp_path: Path) -> None:
    inside = tmp_path / "claims"
    inside.mkdir()
    (tmp_path / "gaits.csv").write_text(CSV)
    (inside / "gaits.csv").symlink_to(tmp_path / "gaits.csv")
    (inside / "c.toml").write_text(LIBRARY)
    assert "outside the folder" in refused_file(inside / "c.toml")
    (inside / "gaits.csv").unlink()
    assert "cannot be read" in refused_file(inside / "c.toml")
    (inside / "gaits.csv").write_text(CSV)
    assert read_claim(inside / "c.toml").libraries[0].axes == ("speed", "period")


def test_a_constant_too_small_to_be_told_from_zero_is_enclosed_at_once() -> None:
    """As the checker does: the grid of inexact values is absolute, and what divides by such a value is refused."""
    start = time.process_time()
    low, high = parse_claim(swap("g = 9.81", 'g = "exp(-10**9)"'), {}, {}, "c").values["g"]
    assert low == 0 < high < Fraction(1, 2**150) and time.process_time() - start < 1
    refused(swap("g = 9.81", 'g = "1/exp(-10**9)"'))
    refused(swap("g = 9.81", 'g = "exp(10**9)"'))


@pytest.mark.parametrize("text", [
    BASE + '\\"""\n' * 150_000, BASE + "a." * 400_000 + "a = 1\n", BASE + '"a".' * 200_000 + "a = 1\n", "\n".join(f"titl{k} = 1" for k in range(60_000)) + "\n" + BASE,
    BASE + "[constants.x]\n" + "\n".join(f'a{k} = "a{k + 1}"' for k in range(20_000)), swap("g = 9.81", "g = 9.81\n" + "\n".join(f'a{k} = "a{k + 1}"' for k in range(30_000))),
    swap("[define]", "[define]\n" + "\n".join(f'a{k} = "b{k}"' for k in range(30_000))), swap("[define]", "[define]\n" + "\n".join(f'a{k} = "a{(k + 1) % 30_000}"' for k in range(30_000))),
    BASE + "\n".join(f'[stance.s{k}]\nthen = "q"' for k in range(15_000)), swap("[define]", "[define]\n" + "\n".join(f"a{k} = 1" for k in range(10_000))) + "\n".join(f'[stance.s{k}]\nthen = "s0"\ndefine = {{ q = 1 }}' for k in range(9000)),
], ids=range(10))  # fmt: skip
def test_long_hostile_files_are_refused_quickly(text: str) -> None:
    assert len(text) < 2**20
    refused(text, limit=3)


@pytest.mark.parametrize(
    "expression", ["+".join(["1e-9999*3e-9999*1e-9999"] * 300), "+".join(["(3/7)**64*(5/11)**64*1e9999/3e-9999"] * 200)]
)
def test_long_numbers_have_a_budget(expression: str) -> None:
    lines = refused(swap("[define]", "[define]\n" + "\n".join(f'a{k} = "{expression}"' for k in range(90))), limit=5)
    assert lines == ["walker.toml: the numbers of this claim are too long to be worked out; shorten them"]
