"""A certificate that the checker has accepted: the only thing a report is made from."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from ..certificate.certificate import Certificate
from ..checker import Verdict, check
from ..checker.document import digest, read
from ..checker.rules import Proof
from ..claim import Claim
from ..claim.read import parse_claim


class NotAccepted(Exception):
    """The checker refuses the certificate, so nothing may be reported as proved."""


@dataclass(frozen=True)
class Accepted:
    """`results` and `proof` are the certificate's own entries, which hold; `derived` is what the checker made of it."""

    data: bytes = field(repr=False)
    claim: Claim = field(repr=False)
    results: dict[str, Any] = field(repr=False)
    proof: tuple[dict[str, Any], ...] = field(repr=False)
    derived: Proof = field(repr=False)
    files: dict[str, str] = field(repr=False)
    digest: str
    made_with: dict[str, str]
    lines: int
    leaves: int


def accepted(data: bytes) -> Accepted:
    """Checks the bytes of a certificate. Raises NotAccepted, with the place and the reason."""
    return _of(data, check(data))


def accepted_here(certificate: Certificate) -> Accepted:
    """A certificate's own bytes, checked unless `prove` has just had them checked. Raises NotAccepted."""
    data = certificate.to_bytes()
    verdict = certificate.accepted
    same = verdict is not None and verdict.digest == digest(certificate.entries)
    return _of(data, verdict if verdict is not None and same else check(data))


def _of(data: bytes, verdict: Verdict) -> Accepted:
    if verdict.status != "valid" or verdict.derived is None or verdict.results is None or verdict.claim is None:
        place = ": ".join(x for x in (verdict.place, verdict.reason) if x)
        raise NotAccepted(f"the checker does not accept this certificate ({verdict.status}): {place}")
    entries = read(data)
    stated = verdict.claim
    files = {d["name"]: d["text"] for d in stated["data"]}
    claim = parse_claim(stated["text"], stated["set"], files, "the claim of the certificate")
    return Accepted(
        data,
        claim,
        verdict.results,
        verdict.proof,
        verdict.derived,
        files,
        verdict.digest,
        entries["made_with"],
        verdict.lines,
        verdict.leaves,
    )
