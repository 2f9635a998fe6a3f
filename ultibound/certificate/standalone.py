"""The checker as one file that any Python 3.11 runs with nothing installed."""

from __future__ import annotations

import zipfile
from importlib import resources
from io import BytesIO
from pathlib import Path

MAIN = "import sys\nfrom checker.command import main\nsys.exit(main())\n"
MOMENT = (1980, 1, 1, 0, 0, 0)  # the earliest that a zip can state: the same bytes whenever it is made


def archive() -> bytes:
    """The checker's folder as an executable archive, the same bytes on every run."""
    files = {"__main__.py": MAIN.encode()}
    for item in resources.files("ultibound.checker").iterdir():
        if item.name.endswith(".py"):
            files[f"checker/{item.name}"] = item.read_bytes()
    return b"#!/usr/bin/env python3\n" + zipped(files)


def build(target: str | Path) -> None:
    """Writes the archive: `python3 -I -S check_certificate.pyz CERT`."""
    Path(target).write_bytes(archive())


def zipped(files: dict[str, bytes]) -> bytes:
    """A zip of files in order of their names, with a fixed time and fixed permissions."""
    out = BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED, compresslevel=9) as target:
        for name in sorted(files):
            entry = zipfile.ZipInfo(name, MOMENT)
            entry.compress_type, entry.create_system = zipfile.ZIP_DEFLATED, 3
            entry.external_attr = 0o100644 << 16
            target.writestr(entry, files[name])
    return out.getvalue()
