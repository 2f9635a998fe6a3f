"""Ratios in one run, imports excluded: `python -m tests.speed.benchmark`. Prints; asserts nothing about time."""

from __future__ import annotations

import math
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from importlib import resources
from pathlib import Path
from typing import Any

import numpy as np

from ultibound.bounding.evaluate import Runner
from ultibound.bounding.search import Effort, search
from ultibound.certificate.squares import Asked, Squares
from ultibound.checker import check
from ultibound.claim import Claim, parse_claim
from ultibound.claim.obligations import Domain, Obligations
from ultibound.prove import Attempt, prove
from ultibound.stepmap.symbolic import compiled

SAMPLES = 10**6


def timed(action: Callable[[], Any], times: int = 7) -> tuple[float, Any]:
    """Median seconds and the last result; the first run only warms up."""
    action()
    taken = []
    for _ in range(times):
        start = time.perf_counter()
        result = action()
        taken.append(time.perf_counter() - start)
    return statistics.median(taken), result


def monte_carlo() -> tuple[float, float]:
    """Slope and residual of pendulum.toml at a million seeded samples."""
    rng = np.random.default_rng(1)
    T, z = rng.uniform(0.36, 0.40, SAMPLES), rng.uniform(0.60, 0.64, SAMPLES)
    placed = rng.uniform(-0.005, 0.005, SAMPLES)
    w = np.sqrt(9.81 / z)
    sinh = w * np.sinh(w * T)
    slope = np.cosh(w * T) - sinh * ((np.cosh(w * T) - 1) / sinh + 0.1)
    miss = np.cosh(w * T) * 0.4 - sinh * (0.4 * (np.cosh(w * T) - 1) / sinh + placed) - 0.4
    return float(np.abs(slope).max()), float(np.abs(miss).max())


def library(speeds: int, periods: int) -> tuple[str, dict[str, str]]:
    """A claim whose library has speeds × periods nodes."""
    rows = ["speed,period,reach"]
    w = math.sqrt(9.81 / 0.62)
    for i in range(speeds):
        for j in range(periods):
            v, T = -0.2 + 1.2 * i / (speeds - 1), 0.30 + 0.18 * j / (periods - 1)
            reach = v * (math.cosh(w * T) - 1) / (w * math.sinh(w * T))
            rows.append(f"{v:.6f},{T:.6f},{reach:.8f}".replace("-0.000000,", "0.000000,").replace("-0.00000000", "0.0"))
    text = (resources.files("ultibound.examples") / "walking.toml").read_text()
    return text, {"gaits.csv": "\n".join(rows) + "\n"}


def two_arguments(claim: Claim) -> None:
    """The sensitivity of the same claim by subdivision and by sums of squares, the solver loaded beforehand."""
    number = next(n for n, r in enumerate(claim.requirements, 1) if r.kind == "sensitivity")
    attempt = Attempt(claim, 1e-3, time.monotonic() + 600, lambda stage, leaves, high: None, False)
    lines = attempt.writer.proof.lines
    ranged, squared = (
        next(x for x in lines.values() if (x.rule, x.proves) == (rule, f"require[{number}]"))
        for rule in ("range", "squares")
    )
    on = next(n for n in squared.uses if lines[n].domain is not None)
    domain = attempt.obligations.requirement(
        number, Domain("region", claim.values["kappa"][0] * 4, (claim.values["kappa"][0] * 4,) * 2)
    )
    asked = Asked(
        f"require[{number}]",
        on,
        {"lower": math.inf, "upper": -math.inf},
        1e-3,
        time.monotonic() + 600,
        lambda stage, leaves, high: None,
    )
    by_range, _ = timed(lambda: attempt.ranges.enclose(domain, on))
    by_squares, _ = timed(lambda: Squares(attempt.writer, asked).line())
    print(
        f"sensitivity: by subdivision {by_range:.3f} s (aim <= 0.1), by sums of squares {by_squares:.3f} s (aim <= 1)"
    )
    for end in ("lower", "upper"):
        a, b = float(ranged.concludes[end]), float(squared.concludes[end])
        print(f"  {end} end {a:.6g} and {b:.6g}, apart by {abs(a - b) / abs(a):.1e} of it  (aim <= 1e-3)")


def main() -> None:
    text = (resources.files("ultibound.examples") / "pendulum.toml").read_text()
    claim = parse_claim(text, {}, {}, "pendulum.toml")
    o = Obligations(claim)
    target = (claim.values["kappa"][0] * 4,) * 2
    obligations = [o.slope(Domain("region", target[0], target)), o.miss()]
    runners = []
    for x in obligations:
        names = [v.name for v in x.variables]
        runners.append(Runner(compiled(o.graph, x.root, x.by, names), names, ()))

    def searched() -> list[Any]:
        effort = Effort(1e-3, 200000, time.monotonic() + 600)
        return [search(r, x, True, effort) for r, x in zip(runners, obligations, strict=True)]

    sampling, worst = timed(monte_carlo)
    seconds, found = timed(searched)
    print(f"search of slope and residual / Monte Carlo of 10^6 samples: {seconds / sampling:.2f}  (aim <= 1.0)")
    print(f"  proved-side estimate over sampled: {found[0].upper / worst[0]:.5f}, {found[1].upper / worst[1]:.5f}")
    whole, certificate = timed(lambda: prove(claim))
    print(f"whole prove / Monte Carlo: {whole / sampling:.1f}  (aim <= 10)")
    two_arguments(claim)
    data = certificate.to_bytes()
    checking, verdict = timed(lambda: check(data))
    print(
        f"check / search: {checking / seconds:.2f};  {1e6 * checking / verdict.leaves:.0f} microseconds a leaf, {verdict.leaves} leaves"
    )
    with tempfile.TemporaryDirectory() as home:
        path = Path(home) / "c.json"
        path.write_bytes(data)
        script = Path(sys.executable).with_name("ultibound")
        bare, _ = timed(lambda: subprocess.run([sys.executable, "-c", ""], check=True))
        cold, _ = timed(lambda: subprocess.run([str(script), "check", str(path)], check=True, capture_output=True))
    print(
        f"cold `ultibound check` over a bare interpreter: +{cold - bare:.3f} s, of which {checking:.3f} s is checking  (aim <= +0.15 s)"
    )
    sizes = []
    for speeds, periods in ((11, 11), (41, 26), (101, 101)):
        text, files = library(speeds, periods)
        cells = (speeds - 1) * (periods - 1)
        big = parse_claim(text, {}, files, "walking.toml")
        start = time.perf_counter()
        data = prove(big).to_bytes()
        sizes.append((cells, time.perf_counter() - start))
        print(f"library of {cells} cells: {sizes[-1][1] / sampling:.1f} x Monte Carlo, certificate {len(data) / 1000:.0f} kB, "
              f"of which data {len(files['gaits.csv']) / 1000:.0f} kB", flush=True)  # fmt: skip
    growth = math.log(sizes[-1][1] / sizes[0][1]) / math.log(sizes[-1][0] / sizes[0][0])
    late = math.log(sizes[-1][1] / sizes[1][1]) / math.log(sizes[-1][0] / sizes[1][0])
    print(f"growth exponent over cells: {growth:.2f} overall, {late:.2f} from 1,000 to 10,000  (aim <= 1.05)")


if __name__ == "__main__":
    main()
