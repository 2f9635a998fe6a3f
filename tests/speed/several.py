"""Time of claims of 2, 4 and 6 states: `python -m tests.speed.several [STATES …]`. Asserts nothing.

The map is nonlinear in every state and holds two uncertain quantities, a step time and a push: a carrier of seedling
trays on a slope, whose lanes of states are coupled a little. Aim on two cores: 4 states in 10 s, 6 in 120 s.
"""

from __future__ import annotations

import sys
import time
from typing import Any

from ultibound.checker import check
from ultibound.claim import parse_claim
from ultibound.prove import prove

SIZES = (2, 4, 6)


def claim(states: int) -> str:
    """Pairs (offset, velocity) of an inverted pendulum placed by its capture point, each bent by its neighbour."""
    pairs = states // 2
    region, following, target = "", "", ""
    for k in range(1, pairs + 1):
        other = k % pairs + 1
        region += f"x{k} = [-0.3, 0.3]\nv{k} = [-1, 1]\n"
        p = f"(1.25*(x{k} + v{k}/w) + 0.03*sin(3*x{k}) + 0.02*tanh(v{other}) + d)"
        following += f'x{k} = "{p} + (x{k} - {p})*cosh(w*T) + v{k}*sinh(w*T)/w"\n'
        following += f'v{k} = "w*(x{k} - {p})*sinh(w*T) + v{k}*cosh(w*T)"\n'
        target += f"x{k} = 0\nv{k} = 0\n"
    return (
        "format = 1\n[constants]\ng = 9.81\nz = 0.9\n[define]\nw = 'sqrt(g/z)'\n"
        f"[state]\n{region}[uncertain]\nT = [0.36, 0.4]\nd = [-0.003, 0.003]\n[next]\n{following}[target]\n{target}"
        "[[require]]\nthat = 'settles'\n"
    )


def measured(states: int) -> None:
    """Seconds of processor time of `prove` and of `check` alone, leaves, bytes, milliseconds a leaf."""
    found: dict[str, float] = {}

    def timed(name: str, action: Any) -> Any:
        start = time.process_time()
        result = action()
        found[name] = time.process_time() - start
        return result

    certificate = timed("prove", lambda: prove(parse_claim(claim(states), {}, {}, "claim.toml")))
    data = certificate.to_bytes()
    verdict = timed("check", lambda: check(data))
    if verdict.status != "valid":
        raise ValueError(verdict.reason)
    r = certificate.results
    (settles,) = r["requirements"]
    print(
        f"{states} states, settles {settles['verdict']}: prove {found['prove']:.1f} s, {verdict.leaves} leaves, "
        f"{len(data) / 1000:.0f} kB, check {found['check']:.2f} s ({1000 * found['check'] / max(verdict.leaves, 1):.2f} "
        f"ms a leaf); {r['metric']['kind']}, gain {float(r['gain']['lower']):.4f} to {float(r['gain']['upper']):.4f}; "
        f"{settles['limited_by'] or ''}",
        flush=True,
    )


def main(sizes: tuple[int, ...]) -> None:
    measured(2)  # warms up
    for n in sizes:
        measured(n)


if __name__ == "__main__":
    main(tuple(map(int, sys.argv[1:])) or SIZES)
