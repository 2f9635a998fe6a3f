"""The proof as an outline to open: groups of lines, each line with what it shows, how, and what it rests on."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from .accepted import Accepted
from .document import Block, Code, Outline, said
from .margins import exact, signed
from .margins import rounded as figures

PAGES = {
    "range": ("forms.md", "every box of a tree that covers the domain is enclosed in outward-rounded arithmetic"),
    "squares": ("squares.md", "a polynomial near it, less its end, is exactly a weighted sum of squares, box by box"),
    "point": ("attained.md", "the value at one exact point is enclosed: it is surely taken"),
    "trajectory": (
        "trajectory.md",
        "polynomials are shown to follow the stance up to an error bound, from their defect",
    ),
    "largest-ball": ("invariant-set.md", "no larger ball about a target lies in the region"),
    "smaller-ball": ("invariant-set.md", "a ball about the target inside the region"),
    "invariant-region": ("invariant-set.md", "the region is led into itself and holds every target"),
    "invariant-ball": ("invariant-set.md", "the ball is led into itself: kR + ε ≤ R"),
    "invariant-vertices": ("polytope.md", "the ball is led into itself, all its vertices being led into it"),
    "invariant-rows": ("several.md", "the ball is led into itself, row by row of its norm"),
    "course": ("horizon.md", "what the steps within a horizon stay in"),
    "slope": ("slope.md", "gain and residual from slopes and what is missed at the target"),
    "sector": ("sector.md", "gain and residual from the sensitivity to the correction and the correction's own slope"),
    "gains": ("sensitivity-gain.md", "a piece of gains, or one gain: what follows is about the claim with these"),
    "sensitivity-gain": ("sensitivity-gain.md", "the gains between which every step contracts, and the best of them"),
    "split": ("split.md", "gain and residual with gaits and correction told apart"),
    "shells": ("curve.md", "shells about the target"),
    "curve": ("curve.md", "a line above the error curve, and the sharp bound"),
    "ultimate-bound": ("ultimate-bound.md", "the bound in the long run, ε/(1 − k)"),
    "orbit": ("orbit.md", "a periodic orbit: the state surely goes this far, again and again"),
    "path": ("orbit.md", "a trajectory that is still this far out after its steps"),
    "escape": ("orbit.md", "a trajectory that leaves the region, from a start this near its target"),
    "pushed": ("orbit.md", "a push from an orbit after which a trajectory leaves the region"),
    "metric": ("matrix.md", "an exact norm, with its exact inverse"),
    "matrix": ("matrix.md", "the norm of all matrices over the boxes of a tree"),
    "entries": ("matrix.md", "every entry of all matrices over the boxes of a tree"),
    "stretch": ("several.md", "a direction that is stretched by at least this much"),
    "componentwise": ("several.md", "a bound for each state by comparison, entry by entry"),
    "absorbed": ("several.md", "a box that every trajectory ends up in"),
    "attracting": ("polytope.md", "a polytope that is led into itself, and that every trajectory comes near"),
    "periodic": ("several.md", "a periodic orbit of several states"),
    "product": ("several.md", "Jacobians whose product grows in every norm"),
    "graph-regions": ("graph.md", "every step leads from the region of its stance into that of the next"),
    "graph-balls": ("graph.md", "every step leads from the ball of its stance into that of the next"),
    "graph-bound": ("graph.md", "bounds along every allowed order of stances"),
    "graph-entries": ("graph.md", "entries of a step from one stance to the next"),
    "graph-componentwise": ("graph.md", "a bound for each state in each stance"),
    "graph-orbit": ("graph.md", "a periodic orbit around a closed walk of stances"),
    "graph-periodic": ("graph.md", "a periodic orbit of several states around a closed walk of stances"),
    "graph-path": ("orbit.md", "a trajectory through stances that is still this far out after its steps"),
    "graph-escape": (
        "orbit.md",
        "a trajectory through stances that leaves the region, from a start this near its target",
    ),
    "graph-pushed": ("orbit.md", "a push from an orbit after which a trajectory through stances leaves the region"),
    "graph-product": ("graph.md", "Jacobians around a closed walk of stances, whose product grows in every norm"),
}
GROUPS = (
    ("The stance", ("flow", "support", "growth", "signal-slope", "split-signal-slope")),
    ("The target and the certified set", ("target", "metric", "ball", "image", "invariant", "course")),
    (
        "How a step takes errors on",
        (
            "slope",
            "target-miss",
            "target-slope",
            "slopes",
            "misses",
            "split-slopes",
            "split-residuals",
            "split-slope",
            "sector-sensitivity",
            "sector-gain",
            "sector-start",
            "sector-residual",
            "sector",
            "split-residual",
            "split",
            "shells",
            "shell",
            "line",
            "curve",
        ),
    ),
    ("Bounds in the long run", ("bound", "componentwise", "split-componentwise", "absorbed", "attracting")),
    ("Orbits and paths: what surely happens", ("orbit", "path", "periodic", "escape", "pushed")),
    ("Requirements about ranges", ("require",)),
    ("Pieces of a gain: the same proof for other gains", ("gains",)),
)


DOWN = ("distance", "highest", "lower", "radius", "steps")  # what is surely reached


def kind(proves: str) -> str:
    """The obligation a line is about, without stance, ranges of its own, steps and arguments."""
    if proves.startswith("gains["):
        return "gains"
    rest = proves.rpartition(":")[2]
    return rest.partition("[")[0].partition("@")[0]


def outline(found: Accepted) -> list[Block]:
    """Groups of lines in the order of the proof; opened by keyboard or mouse."""
    blocks: list[Block] = []
    known = {k for _, kinds in GROUPS for k in kinds}
    other = tuple({kind(x["proves"]) for x in found.proof} - known)
    for title, kinds in (*GROUPS, ("Other lines", other)):
        lines = [(n, x) for n, x in enumerate(found.proof, 1) if kind(x["proves"]) in kinds]
        if lines:
            count = f"{len(lines)} line{'s' if len(lines) > 1 else ''}"
            blocks.append(Outline((f"{title}: {count}",), tuple(_line(n, x) for n, x in lines), not blocks))
    return blocks


def _line(number: int, line: Mapping[str, Any]) -> Outline:
    page, how = PAGES.get(line["rule"], ("obligations.md", "a line of the proof"))
    by = (" (rule ", Code(line["rule"]), ", ", Code(f"proofs/{page}"), ").")
    blocks: list[Block] = [said(how[:1].upper() + how[1:], *by)]
    if line["uses"]:
        blocks.append(
            said(f"It rests on line{'s' if len(line['uses']) > 1 else ''} {', '.join(map(str, line['uses']))}.")
        )
    at = line["witness"].get("at")
    if isinstance(at, dict) and at:
        blocks.append(said(f"The point: {place(at)}."))
    trees = line["witness"].get("trees")
    if isinstance(trees, list):
        boxes = sum(1 for t in trees for word in t.split() if not word.isdigit())
        blocks.append(said(f"Boxes: {boxes}."))
    return Outline((f"{number}. ", Code(line["proves"]), f": {shown(line)}"), tuple(blocks))


def rounded(x: str, up: bool, digits: int = 6) -> str:
    return signed(figures(x, up, digits))


def shown(line: Mapping[str, Any]) -> str:
    """What a line concludes, rounded to the side on which it still holds."""
    ends = line["concludes"]
    if not ends:
        return "holds"
    if line["rule"] in ("range", "squares") and {"lower", "upper"} <= set(ends):
        return f"within [{rounded(ends['lower'], False)}, {rounded(ends['upper'], True)}]"
    if line["rule"] == "point":
        return f"a value within [{rounded(ends['lower'], False)}, {rounded(ends['upper'], True)}] is taken"
    if line["rule"] in ("entries", "graph-entries"):
        return f"{len(ends)} ends of entries"
    down = DOWN if line["rule"] not in ("periodic", "graph-orbit", "graph-periodic") else ends
    pieces = [f"{n} {rounded(x, n not in down)}" for n, x in ends.items()]
    return ", ".join(pieces[:8]) + (f", and {len(pieces) - 8} more" if len(pieces) > 8 else "")


def place(at: Mapping[str, str]) -> str:
    """The values of a point, to a few digits, for people; a listed value by its rank."""
    parts = []
    for n, x in sorted(at.items()):
        parts.append(f"{n} = {'value no. ' + str(int(x[1:]) + 1) if x.startswith('#') else _near(x)}")
    return ", ".join(parts)


def _near(x: str) -> str:
    down, up = figures(x, False, 5), figures(x, True, 5)
    return signed(min(down, up, key=lambda t: abs(exact(t) - exact(x))))
