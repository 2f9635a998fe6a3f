"""Which names a stance's expressions may use, and in what order definitions depend on each other."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping

from .errors import Bad, Unknown
from .expression import Expression
from .model import Library, Quantity, Stance


class Names:
    """Everything declared or defined that is visible in one stance."""

    def __init__(
        self,
        stance: Stance,
        fixed: Iterable[str],
        uncertain: Mapping[str, Quantity],
        libraries: Iterable[Library],
        declared: Mapping[str, str],
        open: bool,
    ) -> None:
        """`declared` also names what had a fault of its own; `open`: whole groups of names had, none is unknown."""
        self.stance, self.fixed, self.uncertain = stance, set(fixed), uncertain
        self.declared, self.open = declared, open
        self.libraries = tuple(libraries)
        self.columns = {c: library for library in self.libraries for c in library.columns}
        self.continuous = set(stance.dynamics.start) if stance.dynamics else set()
        self.all = {*self.fixed, *stance.states, *uncertain, *self.columns, *stance.define, *self.continuous, *declared}
        self.named = {*stance.states, *uncertain, *self.fixed, *self.continuous, "t"}
        self.spanned = {*stance.states, *uncertain, *self.fixed}
        self.freed = {*self.spanned, *stance.define, *self.columns}
        self.partial = self.all - self.continuous

    def check(self, expression: Expression) -> None:
        """Raises Bad at the first unknown name."""
        for n in expression.nodes:
            if n.op == "name" and n.name not in self.all and not self.open:
                raise Unknown(f"unknown name {n.name}", str(n.name), self.all)
            if n.op in ("target", "next") and n.name not in self.stance.states:
                if self.declared.get(str(n.name)) == "state":
                    continue  # its own fault is noted
                raise Unknown(f"{n.op}({n.name}): {n.name} is not a state", str(n.name), self.stance.states)

    def sources(self, name: str) -> list[Expression]:
        """Expressions a name stands for."""
        if name.startswith("target("):
            return [self.stance.target[name[7:-1]]] if name[7:-1] in self.stance.target else []
        if name in self.stance.define:
            return [self.stance.define[name]]
        return list(self.columns[name].at) if name in self.columns else []

    def ordered(self) -> list[str]:
        """Definitions, library columns and targets, each after those it is built from. Raises Bad naming a cycle."""
        order: list[str] = []
        finished: set[str] = set()
        for root in (*self.stance.define, *self.columns, *(f"target({s})" for s in self.stance.target)):
            if root in finished:
                continue
            path = {root: iter(self._mentions(root))}
            while path:
                name = next(reversed(path))
                below = next((m for m in path[name] if m not in finished), None)
                if below is None:
                    path.popitem()
                    finished.add(name)
                    if self.sources(name):
                        order.append(name)
                elif below in path:
                    ring = list(path)[list(path).index(below) :]
                    shown = ring if len(ring) <= 9 else [*ring[:8], "…"]
                    raise Bad(f"{below} is built from itself: {' → '.join([*shown, below])}; break the cycle")
                else:
                    path[below] = iter(self._mentions(below))
        return order

    def _mentions(self, name: str) -> list[str]:
        return [m for e in self.sources(name) for m in e.names()]

    def resting(self, order: Iterable[str], marked: Callable[[str], bool]) -> dict[str, str]:
        """For every built name that rests on a marked one, directly or through others, the first such."""
        found: dict[str, str] = {}
        for name in order:
            hit = first(self._mentions(name), found, marked)
            if hit is not None:
                found[name] = hit
        return found


def first(mentions: Iterable[str], found: Mapping[str, str], marked: Callable[[str], bool]) -> str | None:
    """The first marked name among those mentioned or what they rest on."""
    return next((m if marked(m) else found[m] for m in mentions if marked(m) or m in found), None)
