"""Witnesses of rule `trajectory` by Chebyshev collocation in floating point: good enough for tests, nothing proved."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from itertools import pairwise, product
from typing import Any

import numpy as np
from numpy.polynomial import chebyshev

Field = Callable[..., Any]  # of the time and the parameters: a matrix


def witness(
    matrix: Field, duration: Callable[..., float], cuts: dict[str, list[str]], degrees: tuple[int, int],
    pieces: Sequence[str] = ("0", "1"), bits: int = 60, free: Field | None = None,
) -> dict[str, Any]:  # fmt: skip
    """Witness for x' = A(t, p) x + b(t, p) over the duration, cell by cell."""
    order, degree = degrees
    lines = [[float(Fraction(x)) for x in cuts[name]] for name in sorted(cuts)]
    spans = [float(Fraction(x)) for x in pieces]
    exponents = [e for e in product(range(degree + 1), repeat=len(lines)) if sum(e) <= degree]
    nodes = np.cos(np.pi * (np.arange(degree + 1) + 0.5) / (degree + 1))
    points = np.array(list(product(nodes, repeat=len(lines))))
    table = np.array([[np.prod([x**n for x, n in zip(p, e, strict=True)]) for e in exponents] for p in points])
    fit = np.linalg.pinv(table)
    texts = []
    for cell in product(*(pairwise(line) for line in lines)):
        at = [[(a + b) / 2 + (b - a) / 2 * x for (a, b), x in zip(cell, p, strict=True)] for p in points]
        found = [solved(matrix, duration(*p), free, p, spans, order) for p in at]
        texts.append([])
        for k in range(len(spans) - 1):
            columns = np.tensordot(fit, np.array([f[k] for f in found]), 1)  # exponents, column, state, time
            whole = np.rint(np.moveaxis(columns, 0, 2) * 2.0**bits).ravel()
            texts[-1].append(" ".join(str(int(x)) for x in whole))
    return {"cuts": cuts, "pieces": list(pieces), "degrees": list(degrees), "bits": bits, "cells": texts}


def solved(
    matrix: Field, length: float, free: Field | None, p: list[float], spans: list[float], order: int
) -> list[Any]:
    """Chebyshev coefficients (column, state, time) of the columns of the fundamental solution, a piece."""
    s = np.cos(np.pi * np.arange(order + 1) / order)  # from 1 to -1
    values = chebyshev.chebvander(s, order)
    slopes = np.array([chebyshev.chebval(s, chebyshev.chebder(row)) for row in np.eye(order + 1)]).T
    n = np.asarray(matrix(0.0, *p)).shape[0]
    begin = np.hstack([np.eye(n), np.zeros((n, int(free is not None)))])
    found = []
    for f, g in pairwise(spans):
        h = (g - f) * length / 2
        times = (f + (g - f) * (1 + s) / 2) * length
        system = np.zeros((n, order + 1, n, order + 1))
        right = np.zeros((n, order + 1, begin.shape[1]))
        for k, t in enumerate(times[:-1]):
            a = np.asarray(matrix(t, *p), dtype=float)
            for i in range(n):
                system[i, k, i] += slopes[k]
                for j in range(n):
                    system[i, k, j] -= h * a[i, j] * values[k]
                if free is not None:
                    right[i, k, -1] = h * free(t, *p)[i]
        for i in range(n):
            system[i, -1, i] = values[-1]
            right[i, -1] = begin[i]
        size = n * (order + 1)
        answer = np.linalg.solve(system.reshape(size, size), right.reshape(size, -1))
        answer = answer.reshape(n, order + 1, -1)
        found.append(np.moveaxis(answer, 2, 0))
        begin = answer.sum(axis=1)
    return found
