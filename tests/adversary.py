"""Trajectories led as far from the target as they go, by sweeps forth and back (Pontryagin's principle).

For the last error of a state, ±e_s(L), the costate p_t = J_tᵀ p_{t+1} along a trajectory tells what a change after step t
is worth; the next sweep takes at each step the values with the largest p_{t+1}·(x, h)_{t+1}, starting where the last ended.
So all sweeps together are one trajectory, and what its later sweeps find is found again and again.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from itertools import product
from typing import Any

import numpy as np

SWEEPS, LENGTH = 8, 48
STEP = 1e-6  # of finite differences
RANDOM = 2  # values tried a step beside ends and middles
Values = dict[str, Any]
Range = tuple[float, float, float | None, list[float] | None]  # ends, change a step (None: fresh), a list


@dataclass(frozen=True)
class System:
    """A map of states (n, …) and values of all quantities, its target, and the ranges of the quantities."""

    states: int
    step: Callable[[Any, Values], Any]
    aim: Callable[[Values], Any]
    drawn: Mapping[str, Range]

    @property
    def fresh(self) -> list[str]:
        return [k for k, q in self.drawn.items() if q[2] is None]

    @property
    def moving(self) -> list[str]:
        return [k for k, q in self.drawn.items() if q[2]]

    @property
    def still(self) -> list[str]:
        return [k for k, q in self.drawn.items() if q[2] == 0.0]

    def several(self, name: str) -> list[float]:
        """Ends and middle, or a list."""
        a, b, _, listed = self.drawn[name]
        return listed if listed else [a, (a + b) / 2, b]

    def after(self, s: Any, still: Values, fresh: Values, turns: Any) -> Any:
        """States and moving quantities (n + m, …) after a step; `turns` (m, …): the share of its change each takes."""
        moving = {k: s[self.states + i] for i, k in enumerate(self.moving)}
        shape = s.shape[1:]
        x = self.step(s[: self.states], {k: v + np.zeros(shape) for k, v in {**still, **fresh, **moving}.items()})
        later = [
            np.clip(moving[k] + turns[i] * self.drawn[k][2], self.drawn[k][0], self.drawn[k][1])
            for i, k in enumerate(self.moving)
        ]
        return np.concatenate([x, np.stack(np.broadcast_arrays(*later))]) if later else x

    def error(self, s: Any, still: Values) -> Any:
        moving = {k: s[self.states + i] for i, k in enumerate(self.moving)}
        shape = s.shape[1:]
        return s[: self.states] - self.aim({k: v + np.zeros(shape) for k, v in {**still, **moving}.items()})


def farthest(system: System, rng: Any, sweeps: int = SWEEPS, length: int = LENGTH) -> Any:
    """The largest error of each state (n,) at the ends of the later half of the sweeps, from the target."""
    n, m = system.states, len(system.moving)
    tried = [
        (i, sign, *held)
        for i, sign in product(range(n), (1.0, -1.0))
        for held in product(*(system.several(k) for k in [*system.still, *system.moving]))
    ]
    count = len(tried)
    which, signs = np.array([t[0] for t in tried]), np.array([t[1] for t in tried])
    still = {k: np.array([t[2 + j] for t in tried]) for j, k in enumerate(system.still)}
    moving = np.array([t[2 + len(still) :] for t in tried]).T.reshape(m, count)
    s = np.concatenate([np.zeros((n, count)), moving])
    s[:n] -= system.error(s, still)
    grid = list(product(*(system.several(k) for k in system.fresh), *((-1.0, 0.0, 1.0) for _ in range(m))))
    choices = np.array(grid).reshape(len(grid), -1)
    best = np.zeros(n)
    costates = _costates(
        system, np.repeat(s[:, None], length, 1), {k: np.repeat(v[None], length, 0) for k, v in still.items()},
        {k: np.full((length, count), system.several(k)[1]) for k in system.fresh}, np.zeros((m, length, count)), which, signs,
    )  # fmt: skip
    for sweep in range(sweeps):
        path, taken = [], []
        for t in range(length):
            random = [rng.uniform(*system.drawn[k][:2], RANDOM) for k in system.fresh if not system.drawn[k][3]]
            tries = choices
            if random and len(random) == len(system.fresh):
                tries = np.vstack(
                    [choices, np.hstack([np.stack(random, 1), rng.choice([-1.0, 0.0, 1.0], (RANDOM, m))])]
                )
            each = np.repeat(tries[:, :, None], count, 2)  # (choices, quantities, trajectories)
            fresh = {k: each[:, j] for j, k in enumerate(system.fresh)}
            turns = each[:, len(fresh) :].transpose(1, 0, 2)
            after = system.after(np.repeat(s[:, None], len(tries), 1), still, fresh, turns)
            score = np.einsum("kc,ktc->tc", costates[t], after)
            pick = np.argmax(np.where(np.isfinite(score), score, -np.inf), axis=0)
            path.append(s)
            taken.append(tries[pick].T)
            s = after[:, pick, np.arange(count)]
        found = np.abs(system.error(s, still)[which, np.arange(count)])
        if sweep >= sweeps // 2:
            np.maximum.at(best, which, np.where(np.isfinite(found), found, 0.0))
        along, u = np.stack(path, 1), np.stack(taken, 1)  # (n + m, steps, trajectories), (quantities, …)
        costates = _costates(
            system, along, {k: np.repeat(v[None], length, 0) for k, v in still.items()},
            {k: u[j] for j, k in enumerate(system.fresh)}, u[len(system.fresh) :], which, signs,
        )  # fmt: skip
    return best


def _costates(
    system: System, along: Any, still: Values, fresh: Values, turns: Any, which: Any, signs: Any
) -> list[Any]:
    """What a change after each step is worth of the last error, (n + m, trajectories) a step."""
    width, count = len(along), along.shape[2]
    jacobians = np.empty((width, width, *along.shape[1:]))
    for j in range(width):
        d = STEP * (np.arange(width) == j)[:, None, None]
        jacobians[:, j] = (
            system.after(along + d, still, fresh, turns) - system.after(along - d, still, fresh, turns)
        ) / (2 * STEP)
    p = np.zeros((width, count))
    end = along[:, -1]
    last = {k: v[-1] for k, v in still.items()}
    for j in range(width):
        d = STEP * (np.arange(width) == j)[:, None]
        rate = (system.error(end + d, last) - system.error(end - d, last)) / (2 * STEP)
        p[j] = signs * rate[which, np.arange(count)]
    found = [p]
    for t in range(along.shape[1] - 1, 0, -1):
        p = np.einsum("ijc,ic->jc", jacobians[:, :, t], p)
        found.append(p)
    return found[::-1]
