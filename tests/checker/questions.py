"""Many questions to the checker as one test: to count thousands of tests takes longer than to ask what they ask."""

from __future__ import annotations

import traceback
from collections.abc import Callable, Mapping
from typing import Any

import ultibound.checker

SHOWN = 20


def all_hold(questions: Mapping[str, Callable[[Any], None]]) -> None:
    """Every one is asked, whichever fail; those are told by name, each with its place."""
    failed = []
    for name, question in questions.items():
        try:
            question(ultibound.checker)
        except Exception:
            failed.append(f"{name}:\n{traceback.format_exc(limit=-4)}")
    assert questions and not failed, f"{len(failed)} of {len(questions)} do not hold\n\n" + "\n".join(failed[:SHOWN])
