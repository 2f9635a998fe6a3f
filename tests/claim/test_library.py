"""Gait libraries: order of axes and nodes, exact cells, files beside the claim, faults with row and column."""

from __future__ import annotations

import time
from fractions import Fraction

import pytest

from tests.corpus import CSV, LIBRARY, swap
from ultibound.claim import ClaimError, parse_claim


def faults(data: str, text: str = LIBRARY) -> str:
    with pytest.raises(ClaimError) as caught:
        parse_claim(text, {}, {"gaits.csv": data}, "carrier.toml")
    return str(caught.value)


def test_columns_are_flat_in_the_order_of_the_axes() -> None:
    shuffled = "reach,period,speed\n0.21,0.5,1\n0,0.3,0\n0.13,0.3,1\n-1e-2,0.5,0\n"
    (library,) = parse_claim(LIBRARY, {}, {"gaits.csv": shuffled}, "c").libraries
    assert library.axes == ("speed", "period") and [e.text for e in library.at] == ["v", "T"]
    assert [list(x) for x in library.grid] == [[0, 1], [Fraction(3, 10), Fraction(1, 2)]]
    assert list(library.columns) == ["reach"]
    assert list(library.columns["reach"]) == [0, Fraction(-1, 100), Fraction(13, 100), Fraction(21, 100)]
    turned = swap('speed = "v", period = "T"', 'period = "T", speed = "v"', LIBRARY)
    (library,) = parse_claim(turned, {}, {"gaits.csv": shuffled}, "c").libraries
    assert list(library.columns["reach"]) == [0, Fraction(13, 100), Fraction(-1, 100), Fraction(21, 100)]


@pytest.mark.parametrize("data, said", [
    (CSV.replace("0.21", "1_0"), "row 5, column reach: '1_0' is not a number"), (CSV.replace("0.21", ""), "row 5, column reach: blank"), (CSV.replace("reach", "speed"), "row 1: column speed stands twice"),
    (CSV.replace("speed", "pace"), "no column speed"), (CSV.replace("reach", "gain"), "gain is a reserved word"), (CSV + "0,0.30,0\n", "row 6: the same node as row 2"), (CSV + "\x00", "control character"),
    (CSV.replace("1,0.5,0.21\n", ""), "missing: speed = 1, period = 0.5"), ("", "empty"), (CSV.replace("reach", "foot"), "foot is declared already"), (CSV.replace("reach", "kappa"), "kappa is declared already in gains"),
])  # fmt: skip
def test_faults_name_row_and_column(data: str, said: str) -> None:
    assert said in faults(data)


def test_a_fault_of_a_library_brings_no_others() -> None:
    text = swap("v/2 + foot", "v/2 + foot + reach", LIBRARY)
    assert faults(CSV.replace("0.21", "x"), text).count("\n") == 0


def test_wide_and_long_files_are_refused_quickly() -> None:
    start = time.monotonic()
    faults("speed,period," + ",".join(f"c{k}" for k in range(100_000)) + "\n")
    faults(CSV + "".join(f"{k},0.3,0\n" for k in range(2, 200_000)) + "2,0.3,x\n")
    assert time.monotonic() - start < 3
