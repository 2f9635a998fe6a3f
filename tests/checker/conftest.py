"""Boundaries of rules: certificates by the thousand that differ in one place."""

from __future__ import annotations

import pytest


@pytest.fixture(scope="module", autouse=True)
def shared_lines_are_verified_once(request: pytest.FixtureRequest) -> None:
    if request.module.__name__.endswith("_boundaries"):
        request.getfixturevalue("lines_verified_once")
