"""Ultibound: proved ultimate bounds for the step-to-step map of a legged robot.

`read_claim(path)` reads a claim, `prove(claim)` returns a `Certificate`, `check(data)` re-verifies its bytes.
"""

from __future__ import annotations

import sys
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


def __getattr__(name: str) -> Any:
    """Loads a public name's module on first use: the checker must not wait for numpy and sympy."""
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(_HOMES[name], __name__), name)


class _Package(ModuleType):
    """Keeps `ultibound.prove` the function once its module of the same name is loaded."""

    def __setattr__(self, name: str, value: Any) -> None:
        if not (name in _HOMES and isinstance(value, ModuleType)):
            super().__setattr__(name, value)


sys.modules[__name__].__class__ = _Package
