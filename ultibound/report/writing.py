"""Reports and supplements from files to files; whatever goes wrong, the target keeps what it held."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from ..certificate.certificate import Certificate, write_whole
from ..checker.command import contents
from .accepted import Accepted, NotAccepted, accepted, accepted_here
from .bundle import bundle
from .document import Document
from .html import html
from .latex import latex
from .markdown import markdown
from .reporting import report

FORMS: dict[str, Callable[[Document], bytes]] = {".html": html, ".tex": latex, ".md": markdown}


def write_report(certificate: Path, target: Path | None) -> Path:
    """The report of a certificate file. Raises OSError, NotAccepted."""
    target = target or named(certificate, ".html")
    form(target)
    return _written(certificate, target, lambda found: FORMS[target.suffix](report(found)))


def write_report_of(certificate: Certificate, target: Path) -> Path:
    """The report of a certificate just proved."""
    write_whole(target, FORMS[target.suffix](report(accepted_here(certificate))))
    return target


def write_bundle(certificate: Path, target: Path) -> Path:
    """The supplement of a certificate file. Raises OSError, NotAccepted."""
    return _written(certificate, target, bundle)


def named(certificate: Path, suffix: str) -> Path:
    """walker.cert.json → walker.html"""
    return certificate.with_name(certificate.name.removesuffix(".json").removesuffix(".cert") + suffix)


def form(target: Path) -> None:
    """Raises OSError for a target that is no report."""
    if target.suffix not in FORMS:
        raise OSError(22, f"a report ends in {', '.join(FORMS)}", str(target))


def _written(certificate: Path, target: Path, made: Callable[[Accepted], bytes]) -> Path:
    data = contents(str(certificate))
    if target.is_dir():
        raise IsADirectoryError(21, "is a directory; name a file", str(target))
    if not target.parent.is_dir():  # said before anything is worked out
        raise FileNotFoundError(2, "No such folder", str(target.parent))
    if target.exists() and target.samefile(certificate):
        raise FileExistsError(17, "is the certificate itself; name another file", str(target))
    write_whole(target, made(accepted(data)))
    return target


__all__ = ["FORMS", "NotAccepted", "named", "write_bundle", "write_report", "write_report_of"]
