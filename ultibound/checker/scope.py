"""Which names a stance's expressions may use, and how they depend on each other."""

from __future__ import annotations

from typing import Any

from .grammar import Expression, Refused
from .library import Library
from .model import Quantity, Stance


class Scope:
    """Names a stance's expressions may use."""

    def __init__(
        self,
        stance: Stance,
        constants: Any,
        gains: Any,
        uncertain: dict[str, Quantity],
        libraries: tuple[Library, ...],
        moving: bool,
        stances: set[str],
    ) -> None:
        self.stance, self.uncertain, self.moving, self.stances = stance, uncertain, moving, stances
        self.fixed = {*constants, *gains}
        self.columns = {c: library for library in libraries for c in library.columns}
        self.continuous = set(stance.dynamics.start) if stance.dynamics else set()

    def everything(self) -> set[str]:
        return {*self.fixed, *self.stance.states, *self.uncertain, *self.columns, *self.stance.define, *self.continuous}

    def texts(self) -> list[tuple[str, Expression]]:
        s, d = self.stance, self.stance.dynamics
        found = [
            (f"{k}.{n}", e)
            for k, group in (("define", s.define), ("next", s.next), ("target", s.target))
            for n, e in group.items()
        ]
        found += [(library.file, e) for library in self.columns.values() for e in library.at]
        if d is not None:
            found += [(f"dynamics.{k}", e) for k, e in (("duration", d.duration), ("until", d.until)) if e is not None]
            found += [("dynamics", e) for e in (*d.start.values(), *d.rate.values())]
        return found

    def early(self) -> list[tuple[str, Expression]]:
        """Expressions evaluated before the stance runs."""
        s, d = self.stance, self.stance.dynamics
        found = [("target", e) for e in s.target.values()]
        if d is not None:
            found += [("dynamics.start", e) for e in d.start.values()]
            found += [("dynamics.duration", d.duration)] if d.duration is not None else []
        return found

    def known(self, e: Expression, place: str) -> None:
        for n in e.nodes:
            if n.op == "name" and n.name not in self.everything():
                raise Refused(f"{place}: unknown name {str(n.name)!r}")
            if n.op in ("target", "next") and n.name not in self.stance.states:
                raise Refused(f"{place}: {n.name!r} is no state")
            if n.op in ("dt", "time") and not self.moving:
                raise Refused(f"{place}: {n.op} needs dynamics")

    def uses(self, name: str) -> list[str]:
        """Names a name is built from; `target(s)` counts as one."""
        if name.startswith("target("):
            return used(self.stance.target[name[7:-1]])
        if name in self.stance.define:
            return used(self.stance.define[name])
        return [n for e in self.columns[name].at for n in used(e)] if name in self.columns else []

    def order(self) -> list[str]:
        """Defined names in order of dependence; refuses cycles."""
        done: dict[str, bool] = {}
        found: list[str] = []
        for root in [*self.stance.define, *self.columns, *(f"target({s})" for s in self.stance.target)]:
            stack = [root]
            while stack:
                name = stack[-1]
                if done.get(name):
                    stack.pop()
                    continue
                done[name] = False
                later = [n for n in self.uses(name) if not done.get(n)]
                if any(n in done and n in stack for n in later):
                    raise Refused(f"{name} is built from itself")
                if later:
                    stack.extend(later)
                    continue
                done[name] = True
                stack.pop()
                if name in self.stance.define:
                    found.append(name)
        return found

    def leaves(self, e: Expression, columns: bool = False) -> set[str]:
        """Declared names an expression rests on (with `columns`, library columns met on the way too)."""
        found, waiting, seen = set[str](), used(e), set[str]()
        while waiting:
            name = waiting.pop()
            if name in seen:
                continue
            seen.add(name)
            below = self.uses(name)
            waiting += below
            if not (name in self.stance.define or name in self.columns or name.startswith("target(")) or (
                columns and name in self.columns
            ):
                found.add(name)
        return found


def used(e: Expression) -> list[str]:
    return [
        f"target({n.name})" if n.op == "target" else str(n.name) for n in e.nodes if n.op in ("name", "target", "time")
    ]
