"""A certificate as a value: built, sealed with its digest, read and written whole."""

from __future__ import annotations

import hashlib
import os
import tempfile
from dataclasses import dataclass, field
from functools import cache
from importlib import metadata
from pathlib import Path
from typing import Any

from ..checker import Verdict
from ..checker.document import FORMAT, LARGEST, Unreadable, canonical, digest, read
from ..claim import Claim

LIBRARIES = ("numpy", "sympy", "python-flint")


@dataclass(frozen=True)
class Certificate:
    """The entries of one certificate (certificate-format). Proved only as far as `ultibound.check` says valid.

    `interrupted` tells that Ctrl-C cut the search short, `accepted` what the checker said of these bytes where it was
    asked already; neither is part of the file.
    """

    entries: dict[str, Any] = field(repr=False)
    interrupted: bool = False
    accepted: Verdict | None = field(default=None, repr=False, compare=False)

    def __reduce__(self) -> tuple[Any, ...]:
        """Copies sent to other processes leave the verdict behind: there it would only be hearsay."""
        return type(self), (self.entries, self.interrupted)

    @property
    def results(self) -> dict[str, Any]:
        """Quantities and verdicts: decimals as text, SI units."""
        found: dict[str, Any] = self.entries["results"]
        return found

    @property
    def proved(self) -> bool:
        """Whether every requirement is proved."""
        return all(r["verdict"] == "proved" for r in self.results["requirements"])

    def to_bytes(self) -> bytes:
        """Canonical bytes: the same for the same entries."""
        return canonical(self.entries)

    @classmethod
    def from_bytes(cls, data: bytes) -> Certificate:
        """Reads a certificate without checking it. Raises ValueError where the text is not one."""
        try:
            return cls(read(data))
        except Unreadable as why:
            raise ValueError(str(why)) from None

    @classmethod
    def read(cls, path: str | os.PathLike[str]) -> Certificate:
        """Reads a file without checking it. Raises OSError, ValueError."""
        with Path(path).open("rb") as file:
            return cls.from_bytes(file.read(LARGEST + 1))

    def write(self, path: str | os.PathLike[str]) -> None:
        """Writes beside the target and renames into place, so that the target is never half written."""
        write_whole(Path(path), self.to_bytes())


def write_whole(path: Path, data: bytes) -> None:
    """Replaces a file by new bytes in one step; an old file stays as it is if anything fails."""
    if path.is_dir():
        raise IsADirectoryError(21, "is a directory", str(path))
    target = Path(os.path.realpath(path))
    handle, name = tempfile.mkstemp(prefix=f".{target.name}.", dir=target.parent)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        mode = os.stat(target).st_mode & 0o777 if target.exists() else 0o666 & ~_umask()
        os.chmod(name, mode)
        os.replace(name, target)
    except BaseException:
        os.unlink(name)
        raise


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


@cache
def _versions() -> dict[str, str]:
    return {name: metadata.version(name) for name in ("ultibound", *LIBRARIES)}


def sealed(claim: Claim, results: dict[str, Any], proof: list[dict[str, Any]], interrupted: bool) -> Certificate:
    """The certificate of a claim: its text and data verbatim, results, lines, versions, digest."""
    entries: dict[str, Any] = {
        "format": FORMAT,
        "claim": {
            "text": claim.text,
            "set": dict(claim.settings),
            "data": [
                {"name": n, "sha256": hashlib.sha256(t.encode()).hexdigest(), "text": t}
                for n, t in sorted(claim.data.items())
            ],
        },
        "results": results,
        "proof": proof,
        "assumptions": [],
        "made_with": dict(_versions()),
    }
    return Certificate({**entries, "digest": digest(entries)}, interrupted)
