"""The `results` entry of a certificate held against what its lines amount to."""

from __future__ import annotations

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
    keys(claimed, "results", f"{whole} requirements")
    targets, found = results.targets(), results.by_state()
    if claimed["set"] is not None or results.settled:
        keys(claimed["set"], "results.set", "kind centre radius")
        same(claimed["set"]["kind"], results.kind, "results.set.kind")
        keys(claimed["set"]["centre"], "results.set.centre", " ".join(targets))
        for s, centre in targets.items():
            span(claimed["set"]["centre"][s], centre, "results.set.centre")
        span(claimed["set"]["radius"], radius, "results.set.radius", inward=True)
    same(claimed["route"], results.reported, "results.route")
    span(claimed["radius"], radius, "results.radius", inward=True)
    span(claimed["sharp_bound"], results.sharp, "results.sharp_bound")
    pair({x: claimed[x] for x in PAIR}, Route(results.gain, results.residual, results.bound), "results")
    keys(claimed["states"], "results.states", " ".join(found))
    for s, figures in found.items():
        keys(claimed["states"][s], f"results.states.{s}", " ".join(figures))
        for name, figure in figures.items():
            inward = name in ("radius", "push")
            span(claimed["states"][s][name], figure, f"results.states.{s}.{name}", inward=inward)
    keys(claimed["routes"], "results.routes", " ".join(results.routes))
    for name, route in results.routes.items():
        pair(claimed["routes"][name], route, f"results.routes.{name}")
    same(claimed["metric"], results.norm(), "results.metric")
    same(claimed["gain_intervals"], [], "results.gain_intervals")
    bands(results, claimed["sensitivities"])
    if not isinstance(claimed["requirements"], list) or len(claimed["requirements"]) != len(results.requirements):
        raise Rejected("results.requirements: one entry a requirement of the claim")
    for number, (entry, outcome) in enumerate(zip(claimed["requirements"], results.requirements, strict=True), 1):
        requirement(results, number, entry, outcome)


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
    if remark is None and (entry["verdict"] == "undecided" or results.derivation.leaves_out(r)):
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
