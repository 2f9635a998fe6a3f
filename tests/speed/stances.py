"""Time of claims with stances over a library of speeds: `python -m tests.speed.stances [CELLS …]`. Asserts nothing."""

from __future__ import annotations

import math
import sys
import time
from typing import Any

from tests.test_stance_tightness import spaced
from ultibound.certificate.lines import Writer
from ultibound.checker import check
from ultibound.claim import parse_claim
from ultibound.claim.obligations import Obligations
from ultibound.prove import prove
from ultibound.prove.one import ACCURACY
from ultibound.stance.trials import trial

CELLS = (100, 1000, 7500)
SPEEDS = (0.1, 1.0)


def measured(cells: int) -> dict[str, float]:
    """Seconds of processor time: trial solutions, their proof, the whole of `prove`, and `check` alone."""
    low, high = SPEEDS
    walk = spaced({"v": [f"{low + (high - low) * k / cells:.6f}" for k in range(cells + 1)]})
    claim = parse_claim(walk.text(), {}, walk.data, "claim.toml")
    found: dict[str, float] = {}

    def timed(name: str, action: Any) -> Any:
        start = time.process_time()
        result = action()
        found[name] = time.process_time() - start
        return result

    o = Obligations(claim)
    if o.motion is None:
        raise ValueError("no stance")
    spans = {p.name: (p.grid[0], p.grid[-1]) for p in o.motion.parameters if p.grid is not None}
    solved = timed("search", lambda: trial(o.graph, o.motion, claim.libraries, spans, ACCURACY))
    timed("flow", lambda: Writer(claim, None).flows_of(solved.witness))
    certificate = timed("prove", lambda: prove(claim))
    data = certificate.to_bytes()
    verdict = timed("check", lambda: check(data))
    if verdict.status != "valid":
        raise ValueError(verdict.reason)
    degrees = "×".join(map(str, solved.witness["degrees"]))
    print(
        f"{cells:6d} cells, degrees {degrees}: trial solutions {1000 * found['search'] / cells:.2f} ms a cell, their proof "
        f"{1000 * found['flow'] / cells:.2f} ms a cell; whole prove {found['prove']:.1f} s ({1000 * found['prove'] / cells:.2f} "
        f"ms a cell), check {found['check']:.1f} s ({1000 * found['check'] / cells:.2f} ms a cell, {verdict.leaves} leaves); "
        f"certificate {len(data) / 1e6:.1f} MB",
        flush=True,
    )  # fmt: skip
    return found


def main(sizes: tuple[int, ...]) -> None:
    measured(10)  # warms up
    found = [measured(n) for n in sizes]
    for name in ("search", "flow", "prove", "check"):
        growth = [
            math.log(b[name] / a[name]) / math.log(n / m)
            for a, b, m, n in zip(found, found[1:], sizes, sizes[1:], strict=False)
        ]
        print(f"growth exponent of {name} over cells: " + ", ".join(f"{g:.2f}" for g in growth) + "  (linear: 1)")


if __name__ == "__main__":
    main(tuple(map(int, sys.argv[1:])) or CELLS)
