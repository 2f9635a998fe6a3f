"""Which names a stance's expressions may use, and how they depend on each other."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from graphlib import CycleError, TopologicalSorter

from .grammar import Expression, Refused, at
from .model import Library, Quantity, Stance

LOOSE, TIMED, COLUMN = range(3)  # not fixed from step to step; of the stance's time; of a library
BARRED = {"target.": (LOOSE,), "at ": (TIMED, COLUMN), "dynamics.start": (TIMED,), "dynamics.duration": (TIMED,)}


def arranged(below: Mapping[str, Iterable[str]]) -> list[str]:
    """Names and all they are built from, each after what it is built from. Refuses cycles."""
    sorter = TopologicalSorter(dict.fromkeys(below, ()))  # those built from nothing in the order they are given
    for name, names in below.items():
        sorter.add(name, *names)
    try:
        return list(sorter.static_order())
    except CycleError as why:
        ring = why.args[1][:0:-1]  # each built from the next
        first = ring.index(min(ring))
        raise Refused(" -> ".join([*ring[first:], *ring[: first + 1]]) + ": built from itself") from None


class Scope:
    """Names a stance's expressions may use. `fixed`: constants and gains."""

    def __init__(
        self, stance: Stance, fixed: set[str], uncertain: Mapping[str, Quantity], libraries: Sequence[Library]
    ) -> None:
        self.stance, d = stance, stance.dynamics
        self.columns = {c for library in libraries for c in library.columns}
        self.continuous = set(d.start) if d else set()
        self.ranged = {*fixed, *stance.states, *uncertain}  # what a requirement may give another range
        self.built = self.columns | set(stance.define)  # and these for a sensitivity
        self.names = self.ranged | self.built | self.continuous
        self.held = fixed | {n for n, q in uncertain.items() if q.held}
        groups = {"define": stance.define, "next": stance.next, "target": stance.target}
        if d is not None:
            times = {"duration": d.duration, "until": d.until}
            groups["dynamics"] = {k: e for k, e in times.items() if e is not None}
            groups |= {"dynamics.start": d.start, "dynamics.rate": d.rate}
        for k, library in enumerate(libraries):
            groups[f"at {k}"] = dict(zip(library.axes, library.at, strict=True))
        called = {"define": "{}", "target": "target({})"}  # as other expressions mention it
        self.texts = [
            (f"{k}.{n}", called.get(k, k + ".{}").format(n), e) for k, group in groups.items() for n, e in group.items()
        ]
        self.below: dict[str, Sequence[str]] = {name: used(e) for _, name, e in self.texts}
        for k, library in enumerate(libraries):
            read = tuple(f"at {k}.{a}" for a in library.axes)  # its columns share where it is read
            self.below |= dict.fromkeys(library.columns, read)

    def known(self, e: Expression) -> None:
        """Refuses names that are not there."""
        for n in e.nodes:
            if n.op == "name" and n.name not in self.names:
                raise Refused(f"unknown name {n.name}")
            if n.op in ("target", "next") and n.name not in self.stance.states:
                raise Refused(f"{n.name} is no state")
            if n.op in ("dt", "time") and self.stance.dynamics is None:
                raise Refused(f"{n.op} needs dynamics")

    def order(self) -> list[str]:
        """Defined names in order of dependence. Refuses unknown names, cycles, and names out of place:

        targets that move, libraries read at the stance's time or a column, starts that use the time.
        """
        for place, _, e in self.texts:
            with at(place):
                self.known(e)
        found = arranged(self.below)
        rests: dict[str, list[str]] = {}  # a name of each kind that it rests on, if any
        for name in found:
            if name in self.below:
                rests[name] = [next(filter(None, (rests[n][k] for n in self.below[name])), "") for k in range(3)]
                rests[name][COLUMN] = name if name in self.columns else rests[name][COLUMN]
            else:
                timed = name == "t" or name in self.continuous
                rests[name] = ["" if name in self.held else name, name if timed else "", ""]
        for place, name, _ in self.texts:
            for start, kinds in BARRED.items():
                if place.startswith(start) and (wrong := next(filter(None, (rests[name][k] for k in kinds)), "")):
                    raise Refused(f"{place}: {wrong} moves too freely to be used here")
        return [n for n in found if n in self.stance.define]


def used(e: Expression) -> list[str]:
    """Names an expression is built from directly, each once; `target(s)` counts as one."""
    found = dict.fromkeys(
        f"target({n.name})" if n.op == "target" else str(n.name) for n in e.nodes if n.op in ("name", "target", "time")
    )
    return list(found)
