"""Helpers of the tests: proofs of claims given as text, enclosures with containment and width."""

from __future__ import annotations

import gc
import os
import shutil
import time
from collections.abc import Iterator
from fractions import Fraction
from typing import Any

import pytest

from tests.remembered import lines_checked_once
from ultibound.certificate.certificate import Certificate
from ultibound.claim import parse_claim
from ultibound.prove import prove

# of a quarter to two minutes each: what is shared out last should be short
LONGEST = [
    "test_stance_soundness", "test_spoiled", "test_stance_refused", "test_cli", "test_several", "test_campaign",
    "test_several_soundness", "test_graph_soundness", "checker/test_graph_boundaries", "contraction/test_metrics",
    "test_stance_tightness", "test_horizon", "test_soundness", "checker/test_flows", "published/test_several",
]  # fmt: skip
LAST = ["report/test_report", "test_proofs"]  # they need programs that `.ci/run` may still be installing


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """The longest files of tests first."""
    rank = {f"tests/{name}.py": n for n, name in enumerate(LONGEST)}
    rank |= {f"tests/{name}.py": len(LONGEST) + n for n, name in enumerate(LAST, 1)}
    items.sort(key=lambda item: rank.get(item.nodeid.split("::")[0], len(LONGEST)))


def installed(program: str) -> str | None:
    """The path of a program, None where there is none; while `.ci/run` is installing, once that has ended."""
    ended, until = os.environ.get("ULTIBOUND_INSTALLED"), time.monotonic() + 600
    while ended and not os.path.exists(ended) and time.monotonic() < until:
        time.sleep(0.2)
    return shutil.which(program)


def pytest_terminal_summary(terminalreporter: pytest.TerminalReporter) -> None:
    """Tables that tests recorded, in whichever process they ran."""
    for outcome in ("passed", "failed"):
        for report in terminalreporter.getreports(outcome):
            for table in [text for name, text in report.user_properties if name == "table"]:
                terminalreporter.section(report.nodeid)
                terminalreporter.write_line(table)


@pytest.fixture(scope="module", autouse=True)
def objects_that_stay_are_not_gone_through_again() -> None:
    """What earlier modules keep would make every collection of garbage slow, and limits of time fail for that."""
    gc.collect()
    gc.freeze()


@pytest.fixture(scope="module")
def lines_verified_once() -> Iterator[None]:
    """Of certificates that differ in one place; for a module that judges hundreds of them."""
    with lines_checked_once():
        yield


def proved(text: str, settings: dict[str, str] | None = None, data: dict[str, str] | None = None) -> Certificate:
    """The certificate of a claim given as text; `prove` itself has had it checked."""
    return prove(parse_claim(text, settings or {}, data or {}, "claim.toml"))


def ends(quantity: dict[str, str]) -> tuple[Fraction, Fraction]:
    return Fraction(quantity["lower"]), Fraction(quantity["upper"])


def assert_encloses(quantity: dict[str, Any], exact: str | Fraction, max_excess: str | Fraction) -> None:
    """Contains the exact value (given to within one unit of its last digit), at most `max_excess` wide, relative."""
    low, high = ends(quantity)
    value = Fraction(exact)
    slack = Fraction(0)
    if isinstance(exact, str) and "." in exact:  # the last digits of a printed value are rounded
        slack = Fraction(1, 10 ** len(exact.split(".")[1]))
    assert low <= value + slack, f"lower end {float(low)} above {exact}"
    assert high >= value - slack, f"upper end {float(high)} below {exact}"
    assert high - low <= Fraction(max_excess) * abs(value) + 2 * slack, f"width {float(high - low):.3g} at {exact}"
