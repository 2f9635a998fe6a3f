"""Sums of squares: `python -m tests.speed.squares`. Prints a table of 40 random positive polynomials; asserts nothing.

Each is an `always` claim of which subdivision may look at one box. The gap is between the smallest sampled value and
what squares prove; every change of one number of the witness is put to the checker, which must reject it.
"""

from __future__ import annotations

import time
from collections import defaultdict
from fractions import Fraction
from statistics import median

from tests.conftest import proved
from tests.polynomials import SHAPES, always, positive
from tests.squares import accepted, changes
from ultibound.positivity.bounds import least_sampled

COUNT = 40


def main() -> None:
    rows: dict[tuple[int, int], list[tuple[bool, float, float, int, int, int]]] = defaultdict(list)
    for seed in range(COUNT):
        p, began = positive(seed), time.process_time()
        certificate = proved(always(seed))
        taken = time.process_time() - began
        found = [x for x in certificate.entries["proof"] if x["rule"] == "squares"]
        wrong = tried = length = 0
        gap = float("nan")
        if found:
            gap = least_sampled(p, len(next(iter(p))))[0] - float(Fraction(found[0]["concludes"]["lower"]))
            length = len(str(found[0]["witness"]))
            for change in changes(found[0]["witness"], 40):
                tried += 1
                wrong += accepted(certificate, found[0], change)
        rows[SHAPES[seed % len(SHAPES)]].append((certificate.proved, gap, taken, length, tried, wrong))
    print("variables degree  proved  median gap  largest gap  median s  largest s  median kB  changes accepted/tried")
    for (count, degree), each in sorted(rows.items()):
        gaps, seconds, sizes = ([x[k] for x in each] for k in (1, 2, 3))
        print(
            f"{count:>9} {degree:>6} {sum(x[0] for x in each):>4}/{len(each)} {median(gaps):>11.2e} {max(gaps):>12.2e} {median(seconds):>9.2f} "
            f"{max(seconds):>10.2f} {median(sizes) / 1000:>10.1f} {sum(x[5] for x in each):>10}/{sum(x[4] for x in each)}"
        )


if __name__ == "__main__":
    main()
