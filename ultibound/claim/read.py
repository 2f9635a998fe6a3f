"""TOML text to Claim: the file and its data read within limits, then section by section."""

from __future__ import annotations

import os
import stat
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from .declared import safe
from .errors import ClaimError, Exhausted, Problem
from .library import MAX_BYTES as MAX_DATA
from .model import Claim
from .sections import Sections
from .toml import MAX_BYTES, read_toml


def read_claim(path: str | os.PathLike[str], settings: Mapping[str, str] | None = None) -> Claim:
    """Reads a claim file and the data files beside it; `settings` replace gains.

    Raises ClaimError with every fault found; nothing is evaluated as code.
    """
    place = Path(path)
    name = place.name or str(place)
    text = _contents(place, MAX_BYTES, name)
    raw, problems = read_toml(text)
    data: dict[str, str] = {}
    for file in [] if problems else _files(raw):
        try:
            home = place.parent.resolve()
            target = (home / file).resolve()
        except (OSError, RuntimeError):  # links in a circle
            raise ClaimError.of(name, f"library.file {file[:60]}", "cannot be followed to a file") from None
        if not target.is_relative_to(home):
            raise ClaimError.of(name, "library.file", f"{file[:60]} leads outside the folder of the claim")
        data[file] = _contents(target, MAX_DATA, name, f"library.file {file[:60]}")
    return parse_claim(text, settings or {}, data, name)


def parse_claim(text: str, settings: Mapping[str, str], data: Mapping[str, str], place: str) -> Claim:
    """A claim from its text, changed gains and data files by name. Raises ClaimError with every fault found."""
    raw, problems = read_toml(text)
    if problems:
        raise ClaimError(place, problems)
    sections = Sections(text, raw, settings, data, place)
    try:
        return sections.claim()
    except Exhausted as why:
        raise ClaimError(place, [*sections.problems, Problem("", str(why))]) from None


def _contents(path: Path, limit: int, file: str, place: str = "") -> str:
    """Text of a regular file within the limit."""
    try:
        # looked at once open, and opened without waiting: a FIFO put in its place meanwhile cannot hold us up
        with open(path, "rb", opener=lambda p, flags: os.open(p, flags | os.O_NONBLOCK)) as stream:
            if not stat.S_ISREG(os.fstat(stream.fileno()).st_mode):
                raise ClaimError.of(file, place, "not a regular file; name a text file")
            found = stream.read(limit + 1)
    except IsADirectoryError:
        raise ClaimError.of(file, place, "a directory, not a regular file; name a text file") from None
    except (OSError, ValueError) as why:  # ValueError: a NUL in the path
        raise ClaimError.of(file, place, f"cannot be read: {getattr(why, 'strerror', None) or why}") from None
    if len(found) > limit:
        raise ClaimError.of(file, place, f"more than {limit} bytes; the limit is {limit // 2**20} MiB")
    try:
        return found.decode("utf-8")
    except UnicodeDecodeError as why:
        raise ClaimError.of(file, f"{place} byte {why.start}".strip(), "not UTF-8; save the file as UTF-8") from None


def _files(raw: dict[str, Any]) -> list[str]:
    """Names of data files that may be opened at all."""
    libraries = raw.get("library", [])
    listed = libraries if isinstance(libraries, list) else [libraries]
    names = [item.get("file") for item in listed if isinstance(item, dict)]
    return [n for n in dict.fromkeys(names) if isinstance(n, str) and safe(n)]
