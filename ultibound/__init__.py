"""Ultibound: proved ultimate bounds for the step-to-step map of a legged robot.

`read_claim(path)` reads a claim, `prove(claim)` returns a `Certificate`, `check(data)` re-verifies its bytes.
"""

from __future__ import annotations

import sys
from collections.abc import Callable
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from .certificate.certificate import Certificate
    from .checker import Verdict, check
    from .claim import Claim, ClaimError, read_claim
    from .prove import prove

__all__ = ["Certificate", "Claim", "ClaimError", "Verdict", "check", "prove", "read_claim"]

_HOMES = {
    "Certificate": ".certificate.certificate",
    "Verdict": ".checker",
    "check": ".checker",
    "Claim": ".claim",
    "ClaimError": ".claim",
    "read_claim": ".claim",
    "prove": ".prove",
}
_SHOWN = {"Claim": "claim", "Certificate": "certificate"}
_GIVES = {"read_claim": "Claim", "prove": "Certificate"}


def __getattr__(name: str) -> Any:
    """Loads a public name's module on first use: the checker must not wait for numpy and sympy."""
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    found = getattr(import_module(_HOMES[name], __name__), name)
    if name in _SHOWN:
        for shape in ("html", "latex"):
            setattr(found, f"_repr_{shape}_", _shown(f"{_SHOWN[name]}_{shape}"))
    elif name in _GIVES:  # so that what it gives is shown too
        __getattr__(_GIVES[name])
    return found


def _shown(display: str) -> Callable[[Any], str]:
    """A notebook's display of a value: of the report, which stands below claims and certificates and is loaded late."""

    def inner(value: Any) -> str:
        found: str = getattr(import_module(".report.notebook", __name__), display)(value)
        return found

    return inner


class _Package(ModuleType):
    """Keeps `ultibound.prove` the function once its module of the same name is loaded."""

    def __setattr__(self, name: str, value: Any) -> None:
        if not (name in _HOMES and isinstance(value, ModuleType)):
            super().__setattr__(name, value)


sys.modules[__name__].__class__ = _Package
