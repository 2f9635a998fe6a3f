"""The supplement to a paper: certificate, claim, data, report and stand-alone checker in one zip."""

from __future__ import annotations

from ..certificate.standalone import archive, zipped
from .accepted import Accepted, NotAccepted
from .html import html
from .inert import visible
from .latex import latex
from .markdown import markdown
from .reporting import report, summary, title_of
from .standards import MODEL, NEITHER, STANDARDS

CERTIFICATE, CHECKER, HOME = "certificate.cert.json", "check_certificate.pyz", "claim"


def bundle(found: Accepted) -> bytes:
    """The zip as bytes, the same for the same certificate on the same installation.

    Raises NotAccepted where two data files have names that some file systems take for one.
    """
    document, claim = report(found), claim_name(found)
    files = {f"{HOME}/{name}": text.encode() for name, text in found.files.items()}
    files |= {
        f"{HOME}/{claim}": found.claim.text.encode(),
        CERTIFICATE: found.data,
        CHECKER: archive(),
        "report.html": html(document),
        "report.tex": latex(document),
        "report.md": markdown(document),
        "README.txt": readme(found, claim).encode(),
    }
    return zipped(files)


def claim_name(found: Accepted) -> str:
    """What the claim is called beside its data."""
    names = list(found.files)
    folders = {"/".join(n.split("/")[: k + 1]) for n in names for k in range(n.count("/"))}
    taken = [n.casefold() for n in names]
    if len(set(taken)) < len(taken) or {f.casefold() for f in folders} & set(taken) or _twice(folders):
        raise NotAccepted("two data files have names that some systems take for one; rename one and prove again")
    taken += [f.casefold() for f in folders]
    return next(n for k in range(len(taken) + 1) if (n := f"claim{k or ''}.toml") not in taken)


def _twice(folders: set[str]) -> bool:
    return len({f.casefold() for f in folders}) < len(folders)


def readme(found: Accepted, claim: str) -> str:
    """What is in the zip and how to check it."""
    about = f" --claim {HOME}/{claim}"
    changed = ""
    if found.claim.settings:  # then it is not about the file as it stands
        about = ""
        texts = ", ".join(f"{n} = {visible(x)}" for n, x in sorted(found.claim.settings.items()))
        changed = f"\nThe certificate is for changed gains: {texts}.\n"
    made = ", ".join(f"{visible(n)} {visible(v)}" for n, v in sorted(found.made_with.items()))
    standards = "\n".join(f"  {n}, {title}" for n, title, _ in STANDARDS)
    return f"""{visible(title_of(found.claim))}

{summary(found.results)}

  report.html, report.tex, report.md   what is proved, for people
  {CERTIFICATE}                the proof, for machines
  {HOME}/                               the claim that was proved, and the data it reads
  {CHECKER}                the checker: any Python 3.11 or later, nothing to install

To verify the proof, in the folder this was unpacked in:

  python3 -I -S {CHECKER} {CERTIFICATE}{about}
{changed}
It prints VALID and its exit status is 0 if every line of the proof holds. The flag --lines prints the proof.

SHA-256 of the certificate's contents: {found.digest}
The search was made with {made} (as the certificate says); the checker shares no code with it.

{MODEL}
{NEITHER}
Among the standards that remain to be met (check the current editions):
{standards}
"""
