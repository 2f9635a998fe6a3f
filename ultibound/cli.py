"""The `ultibound` command: arguments in, printing out."""

from __future__ import annotations

import json
import os
import sys
import time
from collections.abc import Callable
from functools import wraps
from pathlib import Path
from typing import Any, ParamSpec

import click

INTERNAL, INTERRUPTED, CLOSED_PIPE = 70, 130, 141
P = ParamSpec("P")
HELP = {"help_option_names": ["-h", "--help"]}


def pipe_told_apart(command: Callable[P, None]) -> Callable[P, None]:
    """A reader that went away (`| head -1`) ends a command with its own status; click would make it 1, a verdict."""

    @wraps(command)
    def inner(*arguments: P.args, **options: P.kwargs) -> None:
        try:
            command(*arguments, **options)
        except BrokenPipeError:
            sys.exit(_silenced())

    return inner


@click.group(context_settings=HELP)
@click.version_option(package_name="ultibound")
def cli() -> None:
    """Proved ultimate bounds for the step-to-step map of a legged robot, with certificates anyone can re-verify."""


@cli.command()
@click.argument("claim", type=click.Path())
@click.option("-o", "--output", type=click.Path(), help="Where the certificate goes [CLAIM with .cert.json].")
@click.option("--set", "settings", multiple=True, metavar="GAIN=VALUE", help="Replace a gain of the claim.")
@click.option("--gain-interval", metavar="GAIN", help="The proved interval of a gain.")
@click.option("--json", "as_json", is_flag=True, help="Print `results` as JSON on standard output.")
@pipe_told_apart
def prove(claim: str, output: str | None, settings: tuple[str, ...], gain_interval: str | None, as_json: bool) -> None:
    """Search for a proof of CLAIM, check it, write the certificate, print the outcome.

    Exit status: 0 every requirement is proved, 1 one is not, 2 the input cannot be used, 130 interrupted.
    """
    sys.exit(_prove(Path(claim), Path(output) if output else None, _settings(settings), as_json, gain_interval))


@cli.command()
@click.option("-o", "--output", "folder", type=click.Path(), default="ultibound-demo", show_default=True,
              help="Folder for the example claims and the certificate.")  # fmt: skip
@pipe_told_apart
def demo(folder: str) -> None:
    """Write the example claims into a folder, prove the main one, write its report. Exit status as for prove."""
    from importlib import resources

    from .certificate.certificate import write_whole

    home = Path(folder)
    home.mkdir(parents=True, exist_ok=True)
    for item in sorted(resources.files("ultibound.examples").iterdir(), key=lambda f: f.name):
        if item.name.endswith((".toml", ".csv")):
            target, data = home / item.name, item.read_bytes()
            if target.exists() and target.read_bytes() != data:
                click.echo(f"kept {target}, which you changed", err=True)
                continue
            write_whole(target, data)
            click.echo(f"wrote {target}", err=True)
    main_claim = home / "striding.toml"
    click.echo(f"proving {main_claim}: the same as `ultibound prove {main_claim}`", err=True)
    sys.exit(_prove(main_claim, None, {}, False, report_to=home / "striding.html"))


@cli.command()
@click.argument("certificate", type=click.Path())
@click.option("--claim", type=click.Path(), help="Also: the certificate is about exactly this claim and its data.")
@click.option("--all-proved", is_flag=True, help="Also: every requirement is proved.")
@click.option("--json", "as_json", is_flag=True, help="Print `results` as JSON on standard output.")
@click.option("--lines", is_flag=True, help="Print the proof line by line.")
@pipe_told_apart
def check(certificate: str, claim: str | None, all_proved: bool, as_json: bool, lines: bool) -> None:
    """Re-verify CERTIFICATE, trusting nothing in it.

    Exit status: 0 every line holds, 1 one does not, 2 unreadable.
    """
    from .checker.command import run

    sys.exit(run(certificate, claim, all_proved, as_json, lines))


@cli.command()
@click.argument("certificate", type=click.Path())
@click.option("-o", "--output", type=click.Path(), help="FILE.html, .tex or .md [CERTIFICATE with .html].")
@pipe_told_apart
def report(certificate: str, output: str | None) -> None:
    """Check CERTIFICATE and write the document a person reads.

    Exit status: 0 written, 2 the certificate does not hold or cannot be used.
    """
    from .report.writing import write_report

    sys.exit(_made(certificate, lambda: write_report(Path(certificate), Path(output) if output else None)))


@cli.command()
@click.argument("certificate", type=click.Path())
@click.option("-o", "--output", type=click.Path(), required=True, help="The zip to write.")
@pipe_told_apart
def bundle(certificate: str, output: str) -> None:
    """Check CERTIFICATE and write a supplement: certificate, claim, data, report and stand-alone checker in a zip.

    Exit status: 0 written, 2 the certificate does not hold or cannot be used.
    """
    from .report.writing import write_bundle

    sys.exit(_made(certificate, lambda: write_bundle(Path(certificate), Path(output))))


@cli.command()
@click.argument("claim", type=click.Path())
@click.option("--set", "settings", multiple=True, metavar="GAIN=VALUE", help="Replace a gain of the claim.")
@click.option("--latex", "as_latex", is_flag=True, help="Print a LaTeX document instead of plain text.")
@pipe_told_apart
def explain(claim: str, settings: tuple[str, ...], as_latex: bool) -> None:
    """Say what was understood of CLAIM: map, linearisation, ranges, obligations. Nothing is proved.

    Exit status: 0, 2 the input cannot be used.
    """
    from .claim import ClaimError, read_claim
    from .report.latex import latex
    from .report.plain import plain
    from .report.statement import explained

    try:
        document = explained(read_claim(Path(claim), _settings(settings)))
    except ClaimError as why:
        click.echo(str(why), err=True)
        sys.exit(2)
    click.echo(latex(document).decode() if as_latex else plain(document), nl=False)


def _made(certificate: str, write: Callable[[], Path]) -> int:
    """Writes what a certificate is made into; the exit status."""
    from .claim.errors import printable
    from .report.accepted import NotAccepted

    try:
        target = write()
    except NotAccepted as why:
        click.echo(printable(f"{certificate}: {why}; nothing was written"), err=True)
        return 2
    except OSError as why:
        click.echo(printable(f"{why.filename or certificate}: {why.strerror or why}"), err=True)
        return 2
    click.echo(f"wrote {target}", err=True)
    return 0


def _settings(settings: tuple[str, ...]) -> dict[str, str]:
    found: dict[str, str] = {}
    for item in settings:
        name, equals, text = item.partition("=")
        if not equals or name in found:
            raise click.UsageError(f"--set {item}: write GAIN=VALUE, each gain once")
        found[name] = text
    return found


def _prove(
    path: Path,
    output: Path | None,
    settings: dict[str, str],
    as_json: bool,
    gain_interval: str | None = None,
    report_to: Path | None = None,
) -> int:
    from .claim import ClaimError, read_claim
    from .prove import prove as proved
    from .report.accepted import accepted_here
    from .report.cells import residual_by_cell, residual_wanted
    from .report.terminal import cells, outcome, show

    try:
        claim = read_claim(path, settings)
        target = output or path.with_name(f"{path.stem}.cert.json")
        if target.is_dir():
            raise IsADirectoryError(21, "is a directory; name a file for the certificate", str(target))
        if target.exists() and any(target.samefile(path.parent / f) for f in (path.name, *claim.data)):
            raise FileExistsError(17, "is the claim or its data; name another file for the certificate", str(target))
        with Progress() as progress:
            certificate = proved(claim, progress, gain_interval)
        certificate.write(target)
    except ClaimError as why:
        click.echo(str(why), err=True)
        return 2
    except OSError as why:
        click.echo(f"{why.filename or path}: {why.strerror or why}", err=True)
        return 2
    show(outcome(claim, certificate.results), as_json)
    if "split" in certificate.results["routes"]:
        found = residual_by_cell(accepted_here(certificate))
        if len(found) > 1:
            unit = next(iter(claim.stances[0].states.values())).unit
            show(cells(found, unit, residual_wanted(claim, certificate.results, found)), as_json)
    click.echo(f"certificate: {target}  (re-verify: ultibound check {target})", err=as_json)
    if report_to is not None:
        from .report.writing import write_report_of

        click.echo(f"report: {write_report_of(certificate, report_to)}", err=as_json)
    if as_json:
        click.echo(json.dumps({**certificate.results, "certificate": str(target)}, ensure_ascii=False, sort_keys=True))
    if certificate.interrupted:
        click.echo("interrupted: what was proved by then is in the certificate", err=True)
        return INTERRUPTED
    return 0 if certificate.proved else 1


class Progress:
    """One line on standard error, renewed a few times a second, for people at a terminal."""

    def __init__(self) -> None:
        self._last, self._stage, self._shown = time.monotonic(), "", False

    def __enter__(self) -> Progress:
        return self

    def __call__(self, stage: str, leaves: int, high: float) -> None:
        due = time.monotonic() - self._last > (0.2 if stage == self._stage else 0.02)
        if sys.stderr.isatty() and due:
            self._last, self._stage, self._shown = time.monotonic(), stage, True
            sys.stderr.write(f"\r\x1b[K{stage}: {leaves} boxes, upper end {high:.6g}  (Ctrl-C keeps what is proved)")
            sys.stderr.flush()

    def __exit__(self, *_: Any) -> None:
        if self._shown:
            sys.stderr.write("\r\x1b[K")


def main(arguments: list[str] | None = None) -> None:
    """Entry point: every way out has its documented exit status."""
    sys.exit(guarded(lambda: cli.main(args=arguments, prog_name="ultibound", standalone_mode=False)))


def guarded(command: Callable[[], Any]) -> int:
    try:
        code = command()
        sys.stdout.flush()
        return code if isinstance(code, int) else 0
    except SystemExit as stop:
        return _closed(stop.code if isinstance(stop.code, int) else 2)
    except click.exceptions.Abort:
        return INTERRUPTED
    except click.ClickException as why:
        click.echo(f"ultibound: {why.format_message()}", err=True)
        return 2
    except KeyboardInterrupt:
        click.echo("interrupted", err=True)
        return INTERRUPTED
    except BrokenPipeError:
        return _silenced()
    except Exception as why:
        click.echo(
            f"internal error: {type(why).__name__}: {str(why)[:300]}\n"
            "This is a defect of ultibound, and nothing was concluded. Please report it with the claim and this line.",
            err=True,
        )
        if os.environ.get("ULTIBOUND_TRACEBACK"):
            raise
        return INTERNAL


def _closed(code: int) -> int:
    try:
        sys.stdout.flush()
    except BrokenPipeError:
        return _silenced()
    return code


def _silenced() -> int:
    """Nothing more can be written; keeps the interpreter from trying again at its end."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    return CLOSED_PIPE
