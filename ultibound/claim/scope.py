"""Which names a stance's expressions may use, and in what order definitions depend on each other."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from .errors import Bad, nearest
from .expression import Expression
from .model import Library, Quantity, Stance


class Names:
    """Everything declared or defined that is visible in one stance."""

    def __init__(
        self, stance: Stance, fixed: Iterable[str], uncertain: Mapping[str, Quantity], libraries: Iterable[Library]
    ) -> None:
        self.stance, self.fixed, self.uncertain = stance, set(fixed), uncertain
        self.columns = {c: library for library in libraries for c in library.columns}
        self.continuous = set(stance.dynamics.start) if stance.dynamics else set()
        self.all = {*self.fixed, *stance.states, *uncertain, *self.columns, *stance.define, *self.continuous}

    def check(self, expression: Expression) -> None:
        """Raises Bad at the first unknown name."""
        for n in expression.nodes:
            if n.op == "name" and n.name not in self.all:
                raise Bad(f"unknown name {n.name}{nearest(n.name or '', self.all)}")
            if n.op in ("target", "next") and n.name not in self.stance.states:
                raise Bad(f"{n.op}({n.name}): {n.name} is not a state{nearest(n.name or '', self.stance.states)}")

    def sources(self, name: str) -> list[Expression]:
        """Expressions a name stands for."""
        if name.startswith("target("):
            return [self.stance.target[name[7:-1]]]
        if name in self.stance.define:
            return [self.stance.define[name]]
        return list(self.columns[name].at) if name in self.columns else []

    def ordered(self) -> list[str]:
        """Defined names, each after those it is built from. Raises Bad naming a cycle."""
        order: list[str] = []
        finished: set[str] = set()
        for root in (*self.stance.define, *self.columns, *(f"target({s})" for s in self.stance.target)):
            path: dict[str, None] = {}
            stack = [root]
            while stack:
                name = stack[-1]
                if name in finished:
                    stack.pop()
                    continue
                path[name] = None
                open_names = [m for e in self.sources(name) for m in e.names() if m not in finished]
                looped = next((m for m in open_names if m in path), None)
                if looped is not None:
                    ring = list(path)[list(path).index(looped) :]
                    raise Bad(f"{looped} is built from itself: {' → '.join([*ring[:8], looped])}; break the cycle")
                if open_names:
                    stack.append(open_names[0])
                    continue
                finished.add(name)
                path.pop(name, None)
                stack.pop()
                if name in self.stance.define:
                    order.append(name)
        return order

    def reached(self, expression: Expression) -> set[str]:
        """Every name an expression is built from, directly or through others."""
        found: set[str] = set()
        waiting = expression.names()
        while waiting:
            name = waiting.pop()
            if name not in found:
                found.add(name)
                waiting += [m for e in self.sources(name) for m in e.names()]
        return found

    def leaves(self, expression: Expression) -> set[str]:
        """Declared names it rests on."""
        built = {*self.stance.define, *self.columns}
        return {n for n in self.reached(expression) if n not in built and not n.startswith("target(")}
