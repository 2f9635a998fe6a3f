"""The `results` entry of a certificate held against what its lines amount to."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from .derive import RANGED
from .results import Outcome, Results, Route, Span
from .rules import Rejected, quantity

REMARK = 1000
PAIR = ("gain", "residual", "bound")


def hold(results: Results, claimed: Any) -> None:
    """Raises Rejected where `results` of a certificate says more than, or other than, what was derived."""
    radius = results.radius if results.settled else None
    whole = "set route gain residual bound sharp_bound radius states routes metric sensitivities gain_intervals"
    stances = results.stances()
    keys(claimed, "results", f"{whole} requirements" + (" stances" if stances else ""))
    certified(results, claimed["set"], "results.set")
    same(claimed["route"], results.reported, "results.route")
    span(claimed["radius"], radius, "results.radius", inward=True)
    span(claimed["sharp_bound"], results.sharp, "results.sharp_bound")
    pair({x: claimed[x] for x in PAIR}, Route(results.gain, results.residual, results.bound), "results")
    by_state(results, claimed["states"], "results.states")
    for name, one in stances.items():
        keys(claimed["stances"], "results.stances", " ".join(stances))
        place = f"results.stances.{name}"
        keys(claimed["stances"][name], place, "set metric states")
        certified(one, claimed["stances"][name]["set"], f"{place}.set")
        same(claimed["stances"][name]["metric"], one.norm(), f"{place}.metric")
        by_state(one, claimed["stances"][name]["states"], f"{place}.states")
    keys(claimed["routes"], "results.routes", " ".join(results.routes))
    for name, route in results.routes.items():
        pair(claimed["routes"][name], route, f"results.routes.{name}")
    same(claimed["metric"], results.norm(), "results.metric")
    gain_intervals(results, claimed["gain_intervals"])
    bands(results, claimed["sensitivities"])
    if not isinstance(claimed["requirements"], list) or len(claimed["requirements"]) != len(results.requirements):
        raise Rejected("results.requirements: one entry a requirement of the claim")
    for number, (entry, outcome) in enumerate(zip(claimed["requirements"], results.requirements, strict=True), 1):
        requirement(results, number, entry, outcome)


def certified(results: Results, claimed: Any, place: str) -> None:
    """The set: of one stance, or of all of them together."""
    if claimed is None and not results.settled:
        return
    targets, radius = results.targets(), results.radius if results.settled else None
    keys(claimed, place, "kind centre radius")
    same(claimed["kind"], results.kind, f"{place}.kind")
    keys(claimed["centre"], f"{place}.centre", " ".join(targets))
    for s, centre in targets.items():
        span(claimed["centre"][s], centre, f"{place}.centre")
    span(claimed["radius"], radius, f"{place}.radius", inward=True)


def by_state(results: Results, claimed: Any, place: str) -> None:
    found = results.by_state()
    keys(claimed, place, " ".join(found))
    for s, figures in found.items():
        keys(claimed[s], f"{place}.{s}", " ".join(figures))
        for name, figure in figures.items():
            span(claimed[s][name], figure, f"{place}.{s}.{name}", inward=name in ("radius", "push"))


def pair(claimed: Any, derived: Route, place: str) -> None:
    keys(claimed, place, " ".join(PAIR))
    for name in PAIR:
        span(claimed[name], getattr(derived, name), f"{place}.{name}")


def requirement(results: Results, number: int, entry: Any, outcome: Outcome) -> None:
    r, at = results.statement.requirements[number - 1], f"results.requirements[{number}]"
    ranged = r.kind in RANGED
    keys(entry, at, "that verdict value limited_by" + (" attained" if ranged else ""))
    same(entry["that"], r.text, f"{at}.that")
    if entry["verdict"] not in ("proved", "refuted", "undecided"):
        raise Rejected(f"{at}.verdict: proved, refuted or undecided")
    if entry["verdict"] != "undecided" and entry["verdict"] != outcome.verdict:
        raise Rejected(f"{at}.verdict: {entry['verdict']} is claimed, {outcome.verdict} was derived")
    span(entry["value"], outcome.value, f"{at}.value", inward=r.kind in ("radius", "push"))
    if ranged:
        span(entry["attained"], outcome.attained, f"{at}.attained", within=True)
    remark = entry["limited_by"]
    if remark is not None and (
        not isinstance(remark, str) or not remark or len(remark) > REMARK or not remark.isprintable()
    ):
        raise Rejected(f"{at}.limited_by: null or a printable remark")
    if remark is None and (entry["verdict"] == "undecided" or results.leaves_out(r)):
        raise Rejected(f"{at}.limited_by: must say what limits this")


def bands(results: Results, claimed: Any) -> None:
    """`sensitivities`: the band of each sensitivity asked for without `over`."""
    wanted = [
        (r, o.value)
        for r, o in zip(results.statement.requirements, results.requirements, strict=True)
        if r.kind == "sensitivity" and not r.over and o.value is not None and o.verdict is not None
    ]
    if not isinstance(claimed, list) or len(claimed) != len(wanted):
        raise Rejected("results.sensitivities: one entry a sensitivity of the claim without over")
    for entry, (r, value) in zip(claimed, wanted, strict=True):
        keys(entry, "results.sensitivities", "of by lower upper")
        same([entry["of"], entry["by"]], [r.state, r.by], "results.sensitivities")
        span({"lower": entry["lower"], "upper": entry["upper"]}, value, "results.sensitivities")


def gain_intervals(results: Results, claimed: Any) -> None:
    """`gain_intervals`: what lies within is proved, the gains outside are those refuted."""
    place = "results.gain_intervals"
    if not isinstance(claimed, list) or len(claimed) != len(results.intervals):
        raise Rejected(f"{place}: one entry a gain that pieces are about")
    for entry, found in zip(claimed, results.intervals, strict=True):
        keys(entry, place, "gain inner set outer contracting best")
        same(entry["gain"], found.gain, f"{place}.gain")
        same(entry["set"], found.set, f"{place}.set")
        within(entry["inner"], found.inner, f"{place}.inner")
        within(entry["contracting"], found.contracting, f"{place}.contracting")
        outer = [pair_end(x, f"{place}.outer") for x in two(entry["outer"], f"{place}.outer")]
        for x, y in zip(outer, found.outer, strict=True):
            if x is not None and x != y:
                raise Rejected(f"{place}.outer: no requirement is refuted there, or at a nearer gain too")
        if entry["best"] is not None:
            keys(entry["best"], f"{place}.best", "value gain")
            value, k = (quantity(entry["best"][x], f"{place}.best.{x}") for x in ("value", "gain"))
            if found.best is None or value != found.best[0] or not k >= found.best[1]:
                raise Rejected(f"{place}.best: more is claimed than was derived")


def within(claimed: Any, derived: tuple[Fraction, Fraction] | None, place: str) -> None:
    """An interval all of which was derived; null claims nothing."""
    if claimed is None:
        return
    low, high = (quantity(x, place) for x in two(claimed, place))
    if derived is None or not derived[0] <= low <= high <= derived[1]:
        raise Rejected(f"{place}: more is claimed than was derived")


def two(claimed: Any, place: str) -> list[Any]:
    if not isinstance(claimed, list) or len(claimed) != 2:
        raise Rejected(f"{place}: two ends")
    return claimed


def pair_end(claimed: Any, place: str) -> Fraction | None:
    return None if claimed is None else quantity(claimed, place)


def keys(claimed: Any, place: str, wanted: str) -> None:
    if not isinstance(claimed, dict) or set(claimed) != set(wanted.split()):
        raise Rejected(f"{place}: the keys are {wanted.replace(' ', ', ')}")


def same(claimed: Any, derived: Any, place: str) -> None:
    if claimed != derived or type(claimed) is not type(derived):
        raise Rejected(f"{place}: {claimed!r:.60} is claimed, {derived!r:.60} was derived")


def span(claimed: Any, derived: Span | None, place: str, inward: bool = False, within: bool = False) -> None:
    """A claimed pair of ends must contain the derived one; null claims nothing.

    `inward`: of a quantity proved by its lower end. `within`: attained ends, which must lie inside the derived ones.
    """
    if claimed is None:
        return
    keys(claimed, place, "lower upper")
    for end in ("lower", "upper"):
        if claimed[end] is None:
            continue
        x, y = quantity(claimed[end], f"{place}.{end}"), None if derived is None else getattr(derived, end)
        if y is None:
            raise Rejected(f"{place}.{end}: nothing was derived")
        if not (x <= y if (end == "lower") != within else x >= y):
            raise Rejected(f"{place}.{end}: more is claimed than was derived")
    if inward and derived is None:
        raise Rejected(f"{place}: nothing was derived")
