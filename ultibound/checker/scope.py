"""Which names a stance's expressions may use, and how they depend on each other."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

from .grammar import Expression, Refused, nearest
from .library import Library
from .model import Quantity, Stance

LOOSE, TIMED, COLUMN = range(3)  # not fixed from step to step; of the stance's time; of a library


def arranged(roots: Iterable[str], below: Mapping[str, Sequence[str]]) -> list[str]:
    """Everything the roots are built from and the roots, each after what it is built from. Refuses cycles."""
    found: list[str] = []
    finished: dict[str, bool] = {}  # False: on the path
    for root in roots:
        waiting = [root]
        while waiting:
            name = waiting.pop()
            if name not in finished:
                finished[name] = False
                later = [n for n in below.get(name, ()) if not finished.get(n)]
                for n in later:
                    if finished.get(n) is False:
                        path = [m for m, done in finished.items() if not done]
                        raise Refused(" -> ".join([*path[path.index(n) :], n]) + ": built from itself")
                waiting += [name, *later]
            elif not finished[name]:
                finished[name] = True
                found.append(name)
    return found


class Scope:
    """Names a stance's expressions may use."""

    def __init__(
        self,
        stance: Stance,
        fixed: set[str],
        uncertain: Mapping[str, Quantity],
        libraries: Sequence[Library],
        moving: bool,
        stances: set[str],
    ) -> None:
        self.stance, self.libraries, self.moving, self.stances = stance, libraries, moving, stances
        self.columns = {c for library in libraries for c in library.columns}
        self.continuous = set(stance.dynamics.start) if stance.dynamics else set()
        self.ranged = {*fixed, *stance.states, *uncertain}  # what a requirement may give another range
        self.names = {*self.ranged, *self.columns, *stance.define, *self.continuous}
        self.held = fixed | {n for n, q in uncertain.items() if q.held}
        self.below = {n: used(e) for n, e in stance.define.items()}
        self.below |= {f"target({s})": used(e) for s, e in stance.target.items()}
        for k, library in enumerate(libraries):  # its columns share where it is read
            self.below[f"at {k}"] = [n for e in library.at for n in used(e)]
            self.below |= {c: [f"at {k}"] for c in library.columns}
        self.rests: dict[str, list[str]] = {}

    def texts(self) -> list[tuple[str, Expression]]:
        s, d = self.stance, self.stance.dynamics
        groups = (("define", s.define), ("next", s.next), ("target", s.target))
        found = [(f"{k}.{n}", e) for k, group in groups for n, e in group.items()]
        found += [
            (f"{library.file}: at.{a}", e)
            for library in self.libraries
            for a, e in zip(library.axes, library.at, strict=True)
        ]
        if d is not None:
            found += [(f"dynamics.{k}", e) for k, e in (("duration", d.duration), ("until", d.until)) if e is not None]
            found += [(f"dynamics.{k}.{n}", e) for k, g in (("start", d.start), ("rate", d.rate)) for n, e in g.items()]
        return found

    def known(self, e: Expression, place: str) -> None:
        for n in e.nodes:
            if n.op == "name" and n.name not in self.names:
                raise Refused(f"{place}: unknown name {n.name}{nearest(str(n.name), self.names)}")
            if n.op in ("target", "next") and n.name not in self.stance.states:
                raise Refused(f"{place}: {n.name} is no state{nearest(str(n.name), self.stance.states)}")
            if n.op in ("dt", "time") and not self.moving:
                raise Refused(f"{place}: {n.op} needs dynamics")

    def order(self) -> list[str]:
        """Defined names in order of dependence. Refuses names out of place and cycles."""
        for place, e in self.texts():
            self.known(e, place)
        found = arranged(self.below, self.below)
        for name in found:
            if name in self.below:
                self.rests[name] = [self.any(self.below[name], kind) for kind in (LOOSE, TIMED, COLUMN)]
                if name in self.columns:
                    self.rests[name][COLUMN] = name
            else:
                timed = name == "t" or name in self.continuous
                self.rests[name] = ["" if name in self.held else name, name if timed else "", ""]
        self.placed()
        return [n for n in found if n in self.stance.define]

    def any(self, names: Iterable[str], kind: int) -> str:
        """A name of that kind these rest on, if any."""
        return next((w for n in names if (w := self.rests[n][kind])), "")

    def placed(self) -> None:
        """Refuses targets that move, libraries read at the stance's time or a column, starts that use the time."""
        for s in self.stance.target:
            if loose := self.rests[f"target({s})"][LOOSE]:
                raise Refused(f"target.{s}: {loose} is not constant, gain or held")
        for k, library in enumerate(self.libraries):
            rests = self.rests[f"at {k}"]
            if wrong := rests[TIMED] or rests[COLUMN]:
                raise Refused(f"{library.file}: at uses {wrong}, a library column or of the stance's time")
        for place, e in self.texts():
            if place.startswith(("dynamics.start", "dynamics.duration")):
                for n in used(e):
                    if n == "t" or n in self.continuous or (n in self.below and self.rests[n][TIMED]):
                        raise Refused(f"{place}: {n} rests on the stance's time")


def used(e: Expression) -> list[str]:
    """Names an expression is built from directly, each once; `target(s)` counts as one."""
    found = dict.fromkeys(
        f"target({n.name})" if n.op == "target" else str(n.name) for n in e.nodes if n.op in ("name", "target", "time")
    )
    return list(found)
