"""The convex programmes (2) and (3) of `ellipsoids.py` and the calls of their solvers, which may do anything wrong."""

from __future__ import annotations

import warnings
from typing import Any

import numpy as np

from ..bounding.intervals import Floats
from .judging import MEAN, Samples
from .samples import extremes

CAP = 1e5  # largest P of (3) against the misses
OPTIONS: dict[str, dict[str, float]] = {"CLARABEL": {"max_iter": 100}, "SCS": {"max_iters": 1000, "eps": 1e-6}}


class Programme:
    """(2), or (3) with `bounded`, over a working set of samples that grows by what solutions violate."""

    def __init__(self, s: Samples, solver: str, margin: float, bounded: bool) -> None:
        self.s, self.solver, self.margin, self.bounded = s, solver, margin, bounded
        self.scale = float(np.linalg.norm(s.misses, axis=1).max(initial=0.0)) or 1.0
        self.misses = s.misses / self.scale
        self.held = extremes(s.jacobians.reshape(len(s.jacobians), -1), 8)
        self.met = extremes(self.misses, 16) if bounded else []
        self.failures = 0
        self.built: tuple[Any, Any, Any] | None = None

    def solved(self, k: float) -> Floats | None:
        """A definite P of the programme, or None; it may still violate samples after some rounds."""
        p = None
        for _ in range(6):
            p = self._once(k)
            if p is None:
                return None
            gains = gains_of(p, self.s.jacobians)
            if not gains[self.held].max() <= k * (1 + 1e-2) + 1e-6:  # not what was asked for
                self.failures += 1
                return None
            lengths = np.einsum("ki,ij,kj->k", self.misses, p, self.misses) if self.bounded else np.zeros(0)
            more = _worst(gains, k * (1 + 1e-6) + 1e-9, self.held)
            met = _worst(lengths, 1 + 1e-4, self.met)
            if not more and not met:
                return p
            self.held, self.met, self.built = [*self.held, *more], [*self.met, *met], None
        return p

    def _once(self, k: float) -> Floats | None:
        """One call; whatever a solver does wrong is None."""
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")  # of inaccurate solutions: they are judged by samples anyhow
                problem, square, variable = self.built = self.built or self._build()
                square.value = k * k
                status, value = call(problem, variable, self.solver)
        except Exception:  # a solver may raise anything
            status, value = "raised", None
        shape = self.s.jacobians.shape[1:]
        usable = status in ("optimal", "optimal_inaccurate") and value is not None and value.shape == shape
        p = definite(value) if usable else None
        self.failures += p is None
        return p

    def _build(self) -> tuple[Any, Any, Any]:
        import cvxpy as cp

        n = len(self.s.room)
        one = np.eye(n)
        p, square = cp.Variable((n, n), symmetric=True), cp.Parameter(nonneg=True)
        rules = [square * p - j.T @ p @ j >> self.margin * one for j in self.s.jacobians[self.held]]
        if not self.bounded:
            return cp.Problem(cp.Minimize(cp.trace(p)), [*rules, p >> one]), square, p
        z = cp.Variable((n, n), symmetric=True)
        rules += [cp.bmat([[p, one], [one, z]]) >> 0, CAP * one - p >> 0]
        some = self.misses[self.met]
        rules.append(
            np.einsum("ki,kj->kij", some, some).reshape(len(some), -1) @ cp.reshape(p, (n * n,), order="C") <= 1
        )
        size = cp.max(cp.diag(z)) + MEAN / n * cp.trace(z)
        return cp.Problem(cp.Minimize(size), rules), square, p


def _worst(values: Floats, limit: float, held: list[int]) -> list[int]:
    """Up to six of the samples beyond the limit, the worst first, that are not held yet."""
    beyond = [int(i) for i in np.argsort(-values, kind="stable")[:24] if values[i] > limit and int(i) not in held]
    return beyond[:6]


def definite(p: Floats | None) -> Floats | None:
    """The symmetric part, or None: not finite, not definite, or too long to be told from that."""
    if p is None or not np.all(np.isfinite(p)):
        return None
    q = (p + p.T) / 2
    try:
        values = np.linalg.eigvalsh(q)
        np.linalg.cholesky(q)
    except np.linalg.LinAlgError:
        return None
    return q if values[0] > 1e-12 * values[-1] else None


def gains_of(p: Floats, jacobians: Floats) -> Floats:
    v = np.linalg.cholesky(p).T
    return np.asarray(np.linalg.norm(v @ jacobians @ np.linalg.inv(v), 2, axis=(1, 2)), dtype=np.float64)


def call(problem: Any, variable: Any, solver: str) -> tuple[str, Floats | None]:
    """The status and the value that a solver leaves."""
    problem.solve(solver=solver, **OPTIONS[solver])
    value = variable.value
    return str(problem.status), None if value is None else np.asarray(value, dtype=np.float64)
