"""The checker as one file that any Python 3.11 runs with nothing installed."""

from __future__ import annotations

import tempfile
import zipapp
from importlib import resources
from pathlib import Path

MAIN = "import sys\nfrom checker.command import main\nsys.exit(main())\n"


def build(target: str | Path) -> None:
    """Writes the checker's folder as an executable archive: `python3 -I -S check_certificate.pyz CERT`."""
    with tempfile.TemporaryDirectory() as home:
        folder = Path(home) / "checker"
        folder.mkdir()
        for item in resources.files("ultibound.checker").iterdir():
            if item.name.endswith(".py"):
                (folder / item.name).write_bytes(item.read_bytes())
        (Path(home) / "__main__.py").write_text(MAIN, encoding="utf-8")
        zipapp.create_archive(home, target, interpreter="/usr/bin/env python3")
