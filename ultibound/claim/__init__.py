"""What the engineer states: the claim file, its expressions, gait libraries and requirements."""

from .errors import Bad, ClaimError, Problem
from .model import Claim
from .read import parse_claim, read_claim

__all__ = ["Bad", "Claim", "ClaimError", "Problem", "parse_claim", "read_claim"]
