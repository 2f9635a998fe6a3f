"""Figures of a report, each drawn on an axis that is given or a new one; matplotlib is loaded only here.

What is proved is drawn in black, solid and heavy; estimates are thin, dashed or marked, so that they can be told apart
in print and by everyone. The bytes of a drawing depend on its numbers alone.
"""

from __future__ import annotations

import warnings
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from functools import wraps
from importlib.util import find_spec
from io import StringIO
from typing import Any, TypeVar

import numpy as np

from .curves import Band, CellMap, Envelope, GainCurve, OverGain, Plane
from .inert import visible
from .margins import signed

Axis = Any  # of matplotlib, which is not always installed
D = TypeVar("D")
INK, QUIET, FILL = "#1d2320", "#5b6b7b", "#dfe5ea"
STYLE = {
    "svg.hashsalt": "ultibound", "svg.fonttype": "none", "font.family": "sans-serif",
    "font.sans-serif": ["DejaVu Sans"],
    "font.size": 10.5, "axes.titlesize": 10.5, "text.parse_math": False, "text.usetex": False,
    "axes.unicode_minus": True,
    "axes.spines.top": False, "axes.spines.right": False, "axes.edgecolor": INK, "axes.labelcolor": INK,
    "text.color": INK, "xtick.color": INK, "ytick.color": INK, "legend.frameon": False, "legend.fontsize": 9.5,
    "lines.solid_capstyle": "butt", "hatch.linewidth": 0.7, "path.simplify": False,
}  # fmt: skip
SIZE = (4.6, 3.3)  # inches: at the width of a telephone the letters stay legible
LONGEST = 24  # letters of a unit on an axis
HOW = "Figures need matplotlib: pip install 'ultibound[report]'"


def available() -> bool:
    """Whether figures can be drawn here."""
    return find_spec("matplotlib") is not None


@contextmanager
def styled(matplotlib: Any) -> Iterator[None]:
    """The style for as long as something is drawn; letters that its font lacks are left to the reader's."""
    with matplotlib.rc_context(STYLE), warnings.catch_warnings():
        warnings.filterwarnings("ignore", "Glyph", UserWarning)
        yield


def drawing(draw: Callable[[D, Axis], None]) -> Callable[..., Axis]:
    """Gives a figure its `ax=None`: without one it is drawn on an axis of its own, of the report's size and style."""

    @wraps(draw)
    def inner(data: D, ax: Axis = None) -> Axis:
        import matplotlib
        from matplotlib.figure import Figure

        with styled(matplotlib):
            if ax is None:
                ax = Figure(figsize=SIZE, layout="constrained").add_subplot()
            draw(data, ax)
        return ax

    return inner


def svg(ax: Axis) -> str:
    """The figure of an axis as SVG: letters as text, no date, no outside address."""
    import matplotlib

    out = StringIO()
    with styled(matplotlib):
        nothing = dict.fromkeys(("Creator", "Date", "Format", "Type"))
        ax.figure.savefig(out, format="svg", metadata=nothing)
    text = out.getvalue()
    return text[text.index("<svg") :]


def labelled(name: str, unit: str) -> str:
    shown = visible(unit)
    return f"{name} ({shown if len(shown) <= LONGEST else shown[:LONGEST] + '…'})" if unit else f"{name} (1)"


@drawing
def gain_curve(data: GainCurve, ax: Axis) -> None:
    """φ against the diagonal: sampled from below, the proved line and shells from above, bound and set marked."""
    top = data.radius
    ax.plot([0, top], [0, top], color=QUIET, linewidth=1, linestyle=(0, (1, 2)), label="diagonal: no nearer")
    ends = np.array([0, top])
    ax.plot(ends, data.gain * ends + data.residual, color=INK, linewidth=2, label="proved: kρ + ε")
    if data.shells:
        radii = [0.0, *(r for r, _ in data.shells)]
        levels = [x for _, x in data.shells]
        ax.stairs(levels, radii, color=INK, linewidth=1.2, linestyle="--", baseline=None, label="proved: shells")
    ax.plot(data.rho, data.phi, color=QUIET, linewidth=0, marker=".", markersize=4, label="sampled φ (estimate)")
    if data.bound is not None and data.bound <= top:
        ax.plot([data.bound], [data.bound], "o", color=INK, markerfacecolor="white", markersize=7)
        ax.annotate("bound", (data.bound, data.bound), (8, -12), textcoords="offset points")
    ax.axvline(top, color=INK, linewidth=1, linestyle="-.", label="radius of the set")
    ax.set_xlim(0, top * 1.06)
    ax.set_ylim(0, 1.12 * max(top, float(data.phi.max(initial=0.0))))
    far = "distance from the target ρ" if data.single else "distance ρ in the norm"
    ax.set_xlabel(labelled(far, data.unit))
    ax.set_ylabel(labelled("after one step, at most", data.unit))
    ax.legend(loc="upper left")


@drawing
def envelope(data: Envelope, ax: Axis) -> None:
    """Errors over steps: simulated runs inside what is proved."""
    steps = np.arange(data.courses.shape[1])
    for k, course in enumerate(data.courses):
        ax.plot(steps, course, color=QUIET, linewidth=0.8, marker="x+.1234"[k % 7], markersize=4,
                markevery=max(1, len(steps) // 30),
                label="simulated runs (estimate)" if not k else None)  # fmt: skip
    if data.proved is not None:
        ax.plot(steps, data.proved, color=INK, linewidth=2, label="proved envelope")
    if len(data.bounds) == 1:
        ax.axhline(data.bounds[0], color=INK, linewidth=1.3, linestyle="--", label="proved ultimate bound")
    elif data.bounds:
        ax.step(
            steps, data.bounds, where="mid", color=INK, linewidth=1.5, linestyle="--", label="proved bound by stance"
        )
    ax.set_xlim(0, len(steps) - 1)
    ax.set_ylim(bottom=0)
    ax.set_xlabel("step n (1)")
    ax.set_ylabel(labelled("error" if data.single else "error in the norm", data.unit))
    ax.legend(loc="upper right")


@drawing
def residual_cells(found: CellMap, ax: Axis) -> None:
    """Proved residual by library cell: a map of two axes, or bars, the largest first."""
    data = found.cells
    names = list(data[0].ends)
    values = [float(c.residual) for c in data]
    if len(names) == 2:
        cuts = [sorted({float(x) for c in data for x in c.ends[n]}) for n in names]
        grid = np.full((len(cuts[1]) - 1, len(cuts[0]) - 1), np.nan)
        for c, value in zip(data, values, strict=True):
            i, j = (cuts[k].index(float(c.ends[n][0])) for k, n in enumerate(names))
            grid[j, i] = value
        low, high = min(values), max(values)
        room = (high - low) or 1.0
        ax.pcolormesh(
            *cuts, grid, cmap="Greys", vmin=low - 0.5 * room, vmax=high + 1.5 * room, edgecolor=INK, linewidth=0.6
        )
        for c, value in zip(data, values, strict=True):
            x, y = (float(sum(c.ends[n])) / 2 for n in names)
            ax.text(x, y, f"{value:.4g}", ha="center", va="center", fontsize=7.5 if len(cuts[0]) < 8 else 6)
        ax.set_xlabel(labelled(names[0], found.units[names[0]]))
        ax.set_ylabel(labelled(names[1], found.units[names[1]]))
        return
    order = np.argsort(values)[::-1][:12]
    texts = [", ".join(f"{n} {float(a):.3g} to {float(b):.3g}" for n, (a, b) in data[k].ends.items()) for k in order]
    ax.barh(range(len(order)), [values[k] for k in order], color=FILL, edgecolor=INK, hatch="//")
    ax.set_yticks(range(len(order)), texts)
    ax.invert_yaxis()
    ax.set_xlabel(labelled("proved residual", found.unit))


@drawing
def sensitivity(data: Sequence[Band], ax: Axis) -> None:
    """Proved bands of sensitivities beside zero."""
    for k, b in enumerate(data):
        ax.barh([k], [b.high - b.low], left=[b.low], height=0.5, color=FILL, edgecolor=INK, hatch="//", linewidth=1.2)
        ax.annotate(
            signed(f"{b.low:.4g} to {b.high:.4g}"), ((b.low + b.high) / 2, k + 0.42), ha="center", annotation_clip=False
        )
    ax.axvline(0, color=INK, linewidth=1.2)
    ax.set_yticks(range(len(data)), [f"∂{b.of}⁺/∂{b.by}" for b in data])
    ax.set_ylim(-0.6, len(data) - 0.2)
    ends = [x for b in data for x in (b.low, b.high, 0.0)]
    room = 0.15 * (max(ends) - min(ends))
    ax.set_xlim(min(ends) - room, max(ends) + room)
    units = {b.unit for b in data}
    ax.set_xlabel(labelled("proved sensitivity", units.pop() if len(units) == 1 else "each in its own unit"))
    ax.figure.set_size_inches(SIZE[0], 1.3 + 0.6 * len(data))


@drawing
def over_gain(data: OverGain, ax: Axis) -> None:
    """k over a gain: sampled, and the proved value at the claim's own."""
    ax.plot(data.values, data.k, color=QUIET, linewidth=1, marker=".", linestyle="--", label="sampled k (estimate)")
    if data.proved is not None:
        ax.plot([data.at], [data.proved], "o", color=INK, markersize=7, label="proved at the claim's value")
    ax.axhline(1, color=INK, linewidth=1, linestyle="-.", label="k = 1: no contraction")
    if data.inner is not None:
        ax.axvspan(*data.inner, facecolor=FILL, edgecolor=INK, hatch="//", alpha=0.5, label="every requirement proved")
    if data.outer:
        ax.plot(data.outer, [0.04] * len(data.outer), "x", color=INK, markersize=8, label="one requirement refuted")
    ax.set_ylim(0, (1.45 if data.inner is None else 1.8) * max(1.1, float(data.k.max(initial=0.0))))
    ax.set_xlabel(f"gain {data.gain} (in the claim's unit)")
    ax.set_ylabel("gain of a step k (1)")
    ax.legend(loc="upper center")


@drawing
def plane(data: Plane, ax: Axis) -> None:
    """Two states: region, certified set, ultimate bounds, and where simulated runs are in the long run."""
    (a, b), (x, y) = data.region, data.target
    ax.plot([a[0], a[1], a[1], a[0], a[0]], [b[0], b[0], b[1], b[1], b[0]], color=QUIET, linewidth=1, linestyle="-.",
            label="region of the claim")  # fmt: skip
    if data.outline is not None:
        ax.fill(
            data.outline[:, 0] + x,
            data.outline[:, 1] + y,
            facecolor=FILL,
            edgecolor=INK,
            linewidth=2,
            label="certified set",
        )
    low, high = data.bounds
    if low is not None and high is not None:
        ax.fill([x - low, x + low, x + low, x - low], [y - high, y - high, y + high, y + high], facecolor="white",
                edgecolor=INK, hatch="////", linewidth=1.2, label="ultimate bounds")  # fmt: skip
    for k, course in enumerate(data.courses):
        ax.plot(course[:, 0] + x, course[:, 1] + y, color=QUIET, linewidth=0.7, linestyle=":",
                label="simulated runs (estimate)" if not k else None)  # fmt: skip
    ax.plot(data.late[:, 0] + x, data.late[:, 1] + y, color=INK, linewidth=0, marker=".", markersize=3,
            label="the same, late")  # fmt: skip
    ax.plot([x], [y], "+", color=INK, markersize=10)
    ax.set_xlabel(labelled(data.states[0], data.units[0]))
    ax.set_ylabel(labelled(data.states[1], data.units[1]))
    ax.legend(loc="lower left", bbox_to_anchor=(-0.1, 1.0), ncols=2, columnspacing=1)
