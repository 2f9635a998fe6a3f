"""The outcome of a proof as tables for the terminal: figures with units, verdicts in words."""

from __future__ import annotations

from typing import Any

from rich.console import Console, Group, RenderableType
from rich.table import Table
from rich.text import Text

CAUTION = (
    "This certifies the model stated in the claim, not a machine. It is neither a risk assessment nor a statement of "
    "conformity; those remain with the standards and the competent persons that apply."
)
STYLES = {"proved": "bold green", "refuted": "bold red", "undecided": "bold yellow"}


def outcome(title: str, results: dict[str, Any], unit: str) -> RenderableType:
    """Quantities with what each gives away, then a row a requirement; `unit` is the state's."""
    quantities = Table(title=Text(title), title_justify="left", show_edge=False, pad_edge=False)
    for heading in ("quantity", "proved", "attained", "gives away", "unit"):
        quantities.add_column(heading)
    (state,) = results["states"]
    rows = [
        (f"gain k of {state}", results["gain"], "upper", "1"),
        ("residual", results["residual"], "upper", unit),
        ("ultimate bound", results["bound"], "upper", unit),
        ("radius of the set", results["radius"], "lower", unit),
    ]
    for name, value, end, of in rows:
        other = "lower" if end == "upper" else "upper"
        if value is None:
            quantities.add_row(name, "none", "", "", of)
        else:
            sign = "≤ " if end == "upper" else "≥ "
            shown = (_figure(value[end], sign), _figure(value[other], ""), _given_away(value, end))
            quantities.add_row(name, *shown, of or "-")
    inside = results["set"]
    where = "no set that is mapped into itself" if inside is None else f"certified set: the {inside['kind']}"
    verdicts = Table(show_edge=False, pad_edge=False)
    for heading in ("requirement", "verdict", "value"):
        verdicts.add_column(heading, overflow="fold")
    for r in results["requirements"]:
        row = Text(f"in [{_figure(r['value']['lower'], '')}, {_figure(r['value']['upper'], '')}]" if r["value"] else "")
        if r["limited_by"]:
            row.append(f"\n{r['limited_by']}")
        verdicts.add_row(Text(r["that"]), Text(r["verdict"], STYLES[r["verdict"]]), row)
    return Group(quantities, Text(where), Text(""), verdicts, Text(""), Text(CAUTION))


def show(what: RenderableType, to_error: bool) -> None:
    """Prints to standard output, or to standard error where standard output carries data."""
    Console(stderr=to_error, highlight=False, soft_wrap=False).print(what)


def _figure(text: str | None, sign: str) -> str:
    """Seven digits for the eye; the certificate has all of them. Rounding may hide the last digit's direction."""
    return "?" if text is None else f"{sign}{float(text):.7g}"


def _given_away(value: dict[str, str | None], end: str) -> str:
    """The share by which the proved end may be worse than the truth."""
    if value["lower"] is None or value["upper"] is None:
        return "unknown"
    low, high = float(value["lower"]), float(value["upper"])
    at = abs(low if end == "upper" else high)
    return f"{(high - low) / at:.1e}" if at else ("0" if low == high else "unknown")
