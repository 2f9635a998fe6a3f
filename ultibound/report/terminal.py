"""The outcome of a proof as tables for the terminal: figures with units, verdicts in words."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from rich.console import Console, Group, RenderableType
from rich.table import Table
from rich.text import Text

from ..claim import Claim
from .cells import Cell, finer
from .inert import visible
from .margins import judged

CAUTION = (
    "This certifies the model stated in the claim, not a machine. It is neither a risk assessment nor a statement of "
    "conformity; those remain with the standards and the competent persons that apply."
)
MOST = 12  # rows of cells
STYLES = {"proved": "bold green", "refuted": "bold red", "undecided": "bold yellow"}


def outcome(claim: Claim, results: dict[str, Any]) -> RenderableType:
    """Quantities with what each gives away, then a row a requirement: verdict, what is proved, what is to spare."""
    units = {n: q.unit for n, q in claim.stances[0].states.items()}
    title = visible(claim.title or claim.place)
    quantities = Table(title=Text(title), title_justify="left", show_edge=False, pad_edge=False)
    for heading in ("quantity", "proved", "attained", "gives away", "unit"):
        quantities.add_column(heading)
    unit = next(iter(units.values()))
    rows = _of_one(results, unit) if len(results["states"]) == 1 else _of_several(results, units)
    rows = [r for r in rows if r[1] is not None or not r[0].startswith(("sharp bound", "largest push"))]
    for name, value, end, of in rows:
        other = "lower" if end == "upper" else "upper"
        if value is None:
            quantities.add_row(name, "none", "", "", Text(visible(of)))
        else:
            sign = "≤ " if end == "upper" else "≥ "
            shown = (_figure(value[end], sign), _figure(value[other], ""), _given_away(value, end))
            quantities.add_row(name, *shown, Text(visible(of) or "-"))
    inside, stances = results["set"], results.get("stances", {})
    where = "no set that is mapped into itself" if inside is None else f"certified set: the {inside['kind']}"
    if stances:
        where = "no sets that are mapped into each other" if inside is None else f"{where} of every stance"
    if len(units) > 1 and results["metric"] is not None:
        where += f"; norm: {_norm(results['metric'])}"
    where += f"; gain and residual are those of {claim.horizon} steps" if claim.horizon > 1 else ""
    more = [*_routes(results, unit), *(_stances(stances, units, results["metric"] is None) if stances else [])]
    more += _gains(results["gain_intervals"])
    return Group(quantities, Text(where), *more, Text(""), _verdicts(claim, results), Text(""), Text(CAUTION))


def _verdicts(claim: Claim, results: dict[str, Any]) -> Table:
    """To spare is what lies between what is proved and the requirement's constant (of settles: the set's radius)."""
    table = Table(show_edge=False, pad_edge=False)
    for heading in ("requirement", "verdict", "proved", "to spare"):
        table.add_column(heading, overflow="fold")
    for r in judged(claim, results):
        row = Text(visible(r.proved))
        if r.attained and r.verdict != "proved":
            row.append(f"; attained {visible(r.attained)}")
        if r.remark:
            row.append(f"\n{visible(r.remark)}")
        spare = visible(r.margin) + (f" ({r.share})" if r.share else "")
        that = visible(r.that) + (f" in {r.stance}" if r.stance else "")
        table.add_row(Text(that), Text(r.verdict, STYLES[r.verdict]), row, Text(spare))
    return table


Row = tuple[str, Any, str, str]


def _of_one(results: dict[str, Any], unit: str) -> list[Row]:
    ((state, figures),) = results["states"].items()
    route = results["route"]
    return [
        (f"gain k of {state}", results["gain"], "upper", "1"),
        (f"residual ({route})", results["residual"], "upper", unit),
        (f"ultimate bound ({route})", results["bound"], "upper", unit),
        ("sharp bound", figures["sharp_bound"], "upper", unit),
        ("radius of the set", results["radius"], "lower", unit),
        ("largest push", figures["push"], "lower", unit),
    ]


def _of_several(results: dict[str, Any], units: dict[str, str]) -> list[Row]:
    """Gain, residual and bound in the norm, then each state in its own unit."""
    rows: list[Row] = [
        ("gain k in the norm", results["gain"], "upper", "1"),
        ("residual in the norm", results["residual"], "upper", ""),
        ("ultimate bound in the norm", results["bound"], "upper", ""),
        ("radius of the set in the norm", results["radius"], "lower", ""),
    ]
    for s, figures in results["states"].items():
        rows += [
            (f"ultimate bound of {s}", figures["bound"], "upper", units[s]),
            (f"radius along {s}", figures["radius"], "lower", units[s]),
            (f"largest push of {s}", figures["push"], "lower", units[s]),
        ]
    return rows


def _norm(metric: dict[str, Any]) -> str:
    """The norm in words; the certificate has its exact matrix."""
    if metric["kind"] == "box":
        weights = ", ".join(f"{float(Fraction(w)):.4g} |{s}|" for s, w in metric["weights"].items())
        return f"the largest of {weights} (errors)"
    rows = "; ".join(" ".join(f"{float(Fraction(x)):.4g}" for x in row) for row in metric["matrix"])
    if metric["kind"] == "polytope":
        return f"the largest of |V e|, V = [{rows}]"
    return f"the root of e P e, P = [{rows}]"


def _routes(results: dict[str, Any], unit: str) -> list[RenderableType]:
    """What each route proves, where there are several."""
    if len(results["routes"]) < 2:
        return []
    table = Table(show_edge=False, pad_edge=False)
    for heading in ("route", "gain", f"residual {visible(unit)}", f"bound {visible(unit)}", ""):
        table.add_column(Text(heading.strip()))
    for name, route in results["routes"].items():
        shown = [_figure(route[q]["upper"], "≤ ") if route[q] else "none" for q in ("gain", "residual", "bound")]
        table.add_row(name, *shown, "reported" if name == results["route"] else "")
    return [Text(""), table]


def _gains(intervals: list[dict[str, Any]]) -> list[RenderableType]:
    """For which gains every requirement is proved, which break one, and which contract."""
    shown: list[RenderableType] = []
    for x in intervals:
        table = Table(show_edge=False, pad_edge=False)
        for heading in (f"gain {x['gain']}", "from", "to", ""):
            table.add_column(heading)
        if x["inner"] is None:
            table.add_row("every requirement is proved", "none", "none", "no gain was found for which they are")
        else:
            where = f", on the {x['set']}" if x["set"] is not None else ""
            table.add_row("every requirement is proved", *map(_gain, x["inner"]), f"for every gain between{where}")
            table.add_row("one is refuted", *map(_gain, x["outer"]), "at these nearest gains")
        if x["contracting"] is not None:
            table.add_row("contracting", *map(_gain, x["contracting"]), "every gain strictly between")
        if x["best"] is not None:
            table.add_row("best for the band", _gain(x["best"]["value"]), "", f"k {_figure(x['best']['gain'], '≤ ')}")
        shown += [Text(""), table]
    return shown


def _gain(text: str | None) -> str:
    return "none found" if text is None else f"{float(Fraction(text)):.7g}"


def _stances(stances: dict[str, Any], units: dict[str, str], apart: bool) -> list[RenderableType]:
    """Each stance on its own: its states' bounds, radii and pushes; `apart`: its norm, where they differ."""
    table = Table(show_edge=False, pad_edge=False)
    for heading in ("stance", "state", "target", "bound", "radius", "push", "unit"):
        table.add_column(heading)
    for name, one in stances.items():
        for s, figures in one["states"].items():
            centre = one["set"]["centre"][s] if one["set"] is not None else None
            ends = [] if centre is None else [f"{float(centre[e]):.4g}" for e in ("lower", "upper")]
            shown = [
                f"{sign}{float(figures[x][end]):.7g}" if figures[x] and figures[x][end] else "none"
                for x, sign, end in (("bound", "≤ ", "upper"), ("radius", "≥ ", "lower"), ("push", "≥ ", "lower"))
            ]
            table.add_row(name, s, " to ".join(dict.fromkeys(ends)) or "?", *shown, Text(visible(units[s]) or "-"))
    norms = [Text(f"norm in {name}: {_norm(one['metric'])}") for name, one in stances.items() if apart]
    return [Text(""), table, *norms]


def cells(found: list[Cell], unit: str, wanted: float | None = None) -> RenderableType:
    """The proved residual of the split route, a cell of the gait library a row, the largest first.

    `wanted` is the residual that would do for the bound asked for; the spacing for it is an estimate.
    """
    table = Table(title=Text("residual of the interpolated gaits, by library cell"), title_justify="left")
    table.show_edge, table.pad_edge = False, False
    for name in found[0].ends:
        table.add_column(name)
    for heading in (f"residual {visible(unit)}".strip(), "by interpolation*", ""):
        table.add_column(Text(heading))
    most = max(float(c.residual) for c in found)
    for cell in sorted(found, key=lambda c: -c.residual)[:MOST]:
        share = float(cell.residual) / most if most else 0.0
        ranges = [f"{float(a):.4g} to {float(b):.4g}" for a, b in cell.ends.values()]
        table.add_row(*ranges, f"≤ {float(cell.residual):.5g}", f"{cell.interpolated:.2g}", "#" * round(10 * share))
    if len(found) > MOST:
        table.add_row(f"and {len(found) - MOST} more", *[""] * (len(found[0].ends) + 2))
    return Group(Text(""), table, Text(f"* an estimate, not proved{spacing_wanted(found, wanted)}"))


def spacing_wanted(found: list[Cell], wanted: float | None) -> str:
    """What spacing of the library would do for a wanted residual, to end a sentence with."""
    if wanted is None:
        return ""
    times = finer(found, wanted)
    if times is None:
        return "; for the bound asked for no spacing of the gaits alone would do: the rest of the residual is too large"
    widest = {n: max(float(c.ends[n][1] - c.ends[n][0]) for c in found) for n in found[0].ends}
    spacing = ", ".join(f"{n} {times * w:.2g}" for n, w in widest.items())
    return f"; for the bound asked for, by the split route, gaits every {spacing} would do (also an estimate)"


def show(what: RenderableType, to_error: bool) -> None:
    """Prints to standard output, or to standard error where standard output carries data."""
    Console(stderr=to_error, highlight=False, soft_wrap=False).print(what)


def _figure(text: str | None, sign: str) -> str:
    """Seven digits for the eye; the certificate has all of them. Rounding may hide the last digit's direction."""
    return "not proved" if text is None else f"{sign}{float(text):.7g}"


def _given_away(value: dict[str, str | None], end: str) -> str:
    """The share by which the proved end may be worse than the truth."""
    if value["lower"] is None or value["upper"] is None:
        return "unknown"
    low, high = float(value["lower"]), float(value["upper"])
    at = abs(low if end == "upper" else high)
    return f"{(high - low) / at:.1e}" if at else ("0" if low == high else "unknown")
