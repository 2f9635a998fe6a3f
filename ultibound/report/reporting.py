"""A certificate that the checker has accepted, as a document for the researcher, the reviewer and the designer."""

from __future__ import annotations

import re
from fractions import Fraction
from typing import Any

from ..claim import Claim
from .accepted import Accepted
from .cells import Cell, residual_by_cell, residual_wanted
from .document import Block, Caution, Code, Document, Items, Section, Table, Text, Verdict, said
from .drawn import Drawings, drawings
from .figures import HOW
from .formula import symbol
from .intervals import gain_intervals
from .margins import Judged, exact, judged, lower, rounded, signed, upper, with_unit
from .outlines import kind, outline, place
from .quantities import quantities
from .standards import MODEL, NEITHER, cautions
from .statement import listing, required, stated
from .terminal import spacing_wanted
from .theorem import for_a_paper, theorem

MOST_CELLS = 12


def report(found: Accepted, figures: bool = True) -> Document:
    """The whole report; without figures where they are not wanted or cannot be drawn."""
    claim = found.claim
    cells = residual_by_cell(found)
    drawn = drawings(found, cells) if figures else Drawings()
    sections = [
        Section("outcome", "The outcome", tuple(_outcome(found))),
        Section("limits", "For the designer: what limits the bound", tuple(_limits(found, cells, drawn))),
        Section(
            "theorem",
            "For the researcher: the theorem",
            (*theorem(found), *drawn.of("gain-curve", "envelope", "plane")),
        ),
        *stated(claim),
        Section("paper", "For the researcher: to be copied into a paper", tuple(for_a_paper(found))),
        Section("review", "For the reviewer: assumed, trusted, proved", tuple(_review(found))),
        Section("proof", "For the reviewer: the proof, line by line", tuple(outline(found))),
        Section("claim", "The claim itself", tuple(listing(claim))),
        Section("cautions", "What this does not mean", tuple(cautions())),
    ]
    lead: list[Block] = [said(summary(found.results)), Caution((f"{MODEL} {NEITHER}",))]
    if not drawn.figures and figures:
        lead.append(said(HOW + "."))
    return Document(title_of(claim), tuple(lead), tuple(sections))


def title_of(claim: Claim) -> str:
    return claim.title or "A claim without title"


def summary(results: dict[str, Any]) -> str:
    """The outcome in one sentence."""
    verdicts = [r["verdict"] for r in results["requirements"]]
    if set(verdicts) == {"proved"}:
        return f"{'The requirement is' if len(verdicts) == 1 else f'All {len(verdicts)} requirements are'} proved."
    counts = [f"{verdicts.count(v)} {v}" for v in ("proved", "refuted", "undecided") if v in verdicts]
    return f"Of {len(verdicts)} requirement{'s' if len(verdicts) > 1 else ''}: {', '.join(counts)}."


def _outcome(found: Accepted) -> list[Block]:
    claim, results = found.claim, found.results
    rows = judged(claim, results)
    blocks: list[Block] = [verdicts(rows, bool(claim.stances[0].name))]
    remarks: list[Text] = [
        (Code(r.that), f"{f' in the {r.stance} stance' if r.stance else ''}: {r.remark}") for r in rows if r.remark
    ]
    if remarks:
        blocks.append(said("Remarks of the search (not proved):"))
        blocks.append(Items(tuple(remarks)))
    head: tuple[Text, ...] = (("quantity",), ("proved",), ("surely reached",), ("given away",), ("unit",))
    body = tuple((q.name, q.proved, q.reached, (q.gap,), (q.unit or "–",)) for q in quantities(found))
    note = (
        "Proved holds for every start in the certified set and every admissible course of what is uncertain. What is "
        "surely reached is taken at a point or on an orbit in the proof; the bound gives away at most the difference.",
    )
    blocks.append(Table(("Quantities",), head, body, "llrll", note))
    blocks += _stances(found)
    return blocks


def verdicts(rows: list[Judged], stances: bool) -> Table:
    """A row a requirement: verdict, what is proved, margin."""
    head: tuple[Text, ...] = (("requirement",), ("verdict",), ("proved",), ("to spare",), ("share",))
    body = []
    for r in rows:
        that: Text = (Code(r.that), f" in the {r.stance} stance" if r.stance else "")
        body.append((that, (Verdict(r.verdict),), (r.proved,), (r.margin or "–",), (r.share or "–",)))
    note: Text = (
        "To spare: from what is proved to the constant of the requirement (of settles, to the radius of the set); "
        "share: of that constant.",
    )
    if stances:
        note = (*note, " Without a stance, quantities are the largest over the stances (radius and push the least).")
    return Table(("Requirements",), head, tuple(body), "lllrr", note)


def _stances(found: Accepted) -> list[Block]:
    rows: list[tuple[Text, ...]] = []
    for stance in found.claim.stances if "stances" in found.results else ():
        name = stance.name
        for s, figures in found.results["stances"][name]["states"].items():
            ends = (upper(figures["bound"]), lower(figures["radius"]), lower(figures["push"]))
            shown = [f"{sign} {x}" if x is not None else "not proved" for sign, x in zip("≤≥≥", ends, strict=True)]
            rows.append(((name,), (symbol(s),), *((x,) for x in shown), (stance.states[s].unit or "–",)))
    if not rows:
        return []
    head: tuple[Text, ...] = (("stance",), ("state",), ("ultimate bound",), ("radius",), ("largest push",), ("unit",))
    return [Table(("Each stance on its own",), head, tuple(rows), "llrrrl")]


def _limits(found: Accepted, cells: list[Cell], drawn: Drawings) -> list[Block]:
    """What the bound is made of, where it is worst, what each uncertain quantity costs."""
    blocks: list[Block] = []
    results, claim = found.results, found.claim
    states = claim.stances[0].states
    unit = next(iter(states.values())).unit if len(states) == 1 else ""
    pair = results["routes"].get(results["route"]) or results
    k, rest, bound = (upper(pair[q]) for q in ("gain", "residual", "bound"))
    if "stances" not in results and k is not None and rest is not None and bound is not None:
        left = 1 - exact(pair["gain"]["upper"])  # above 0 where there is a bound
        lessened = 1 - left / (1 - (1 - left) * Fraction(9, 10))
        blocks.append(
            said(
                f"The bound {with_unit(bound, unit)} is the residual {with_unit(rest, unit)} times "
                f"{rounded(1 / left, True, 3)}, which is 1/(1 − k) with k = {k}. A residual smaller by a tenth makes "
                "it "
                f"smaller by a tenth; a gain smaller by a tenth, by {rounded(100 * lessened, False, 2)} %."
            )
        )
    if len(results["routes"]) > 1:
        blocks.append(_routes(results, unit))
    blocks += _worst(found)
    if drawn.costs:
        head = (("known exactly",), *(("worst error of ", symbol(s)) for s in states))
        rows = [
            (
                (name,) if name == "nothing" else (symbol(name),),
                *(
                    (with_unit(f"{x:.4g}" if x > 1e-9 else "0", states[s].unit),)
                    for s, x in zip(states, each, strict=True)
                ),
            )
            for name, each in drawn.costs
        ]
        note: Text = (
            "Estimates: the largest error, late in simulated runs that are steered towards large errors (seeded), "
            "with one quantity at a time kept in the middle of its range.",
        )
        blocks.append(
            Table(
                ("What each uncertain quantity costs (estimates by simulation)",),
                head,
                tuple(rows),
                "l" + "r" * len(states),
                note,
            )
        )
    blocks += _gain_intervals(results)
    blocks += drawn.of("over-gain", "sensitivity")
    if len(cells) > 1:
        blocks.append(_cells(cells, unit, {n: q.unit for n, q in (*states.items(), *claim.uncertain.items())}))
        blocks.append(
            said(
                "By interpolation: an estimate, not "
                f"proved{spacing_wanted(cells, residual_wanted(claim, results, cells))}."
            )
        )
        blocks += drawn.of("cells")
    return blocks


def _routes(results: dict[str, Any], unit: str) -> Table:
    rows = []
    for name, route in results["routes"].items():
        ends = [upper(route[q]) for q in ("gain", "residual", "bound")]
        shown = [f"≤ {x}" if x is not None else "none" for x in ends]
        rows.append(((name,), *((x,) for x in shown), ("reported" if name == results["route"] else "",)))
    of = f" ({unit})" if unit else ""
    head: tuple[Text, ...] = (("route",), ("gain",), (f"residual{of}",), (f"bound{of}",), ("",))
    return Table(("What each route proves",), head, tuple(rows), "lrrrl")


def _worst(found: Accepted) -> list[Block]:
    """Points of the proof at which slopes and misses are largest."""
    rows = []
    for line in found.proof:
        own = not line["proves"].startswith("over[")
        if (
            own
            and line["rule"] == "point"
            and kind(line["proves"]) in ("slope", "target-miss", "split-slope", "split-residual", "require")
        ):
            end = min((line["concludes"]["lower"], line["concludes"]["upper"]), key=lambda x: abs(exact(x)))
            rows.append(
                (
                    _named(found.claim, line["proves"]),
                    (signed(rounded(end, end.startswith("-"))),),
                    (place(line["witness"]["at"]) or "everywhere",),
                )
            )
    if not rows:
        return []
    head: tuple[Text, ...] = (("of",), ("value taken",), ("at",))
    note: Text = (
        "Points of the proof, each verified: the bounds cannot be better than these allow. Copies such as gust(xd) "
        "are what a signal amounts to for that continuous state; phase(t) is the share of the stance gone by.",
    )
    return [Table(("Where it is worst",), head, tuple(rows), "lrl", note)]


def _named(claim: Claim, proves: str) -> Text:
    """An obligation, or the text of the requirement it is about."""
    stance, _, rest = proves.rpartition(":")
    asked = re.fullmatch(r"require\[(\d+)\]", rest)
    if asked is None:
        return (Code(proves),)
    return Code(claim.requirements[int(asked[1]) - 1].text), f" in the {stance} stance" if stance else ""


def _gain_intervals(results: dict[str, Any]) -> list[Block]:
    head: tuple[Text, ...] = (("gain",), ("every requirement proved",), ("one refuted",), ("contracting",), ("best",))
    rows: list[tuple[Text, ...]] = []
    for x in gain_intervals(results):
        rows.append(((symbol(x.gain),), *((t or "–",) for t in (x.proved, x.refuted, x.contracting, x.best))))
    return [Table(("Gain intervals, all else as claimed",), head, tuple(rows))] if rows else []


def _cells(cells: list[Cell], unit: str, units: dict[str, str]) -> Table:
    ordered = sorted(cells, key=lambda c: -c.residual)
    rows = []
    for c in ordered[:MOST_CELLS]:
        ends = [(f"{rounded(a, False, 4)} to {rounded(b, True, 4)}",) for a, b in c.ends.values()]
        rows.append((*ends, (f"≤ {rounded(c.residual, True, 5)}",), (f"{c.interpolated:.2g}",)))
    of = f" ({unit})" if unit else ""
    head: tuple[Text, ...] = (
        *((symbol(n), f" ({units[n]})" if units.get(n) else "") for n in cells[0].ends),
        (f"residual{of}",),
        (f"by interpolation{of}",),
    )
    more: Text = (f"The {MOST_CELLS} largest of {len(cells)}.",) if len(cells) > MOST_CELLS else ()
    return Table(("Proved residual by library cell",), head, tuple(rows), "l" * len(cells[0].ends) + "rr", more)


def _review(found: Accepted) -> list[Block]:
    claim = found.claim
    made = ", ".join(f"{n} {v}" for n, v in sorted(found.made_with.items()))
    supported = [x for x in found.proof if kind(x["proves"]) == "support"]
    items: list[Text] = [
        (
            "Assumed: the claim as it stands, that is, its map, its ranges and that whatever is uncertain stays "
            "within them. Hypotheses that were not proved: none.",
        ),
        (
            "Trusted: the checker, the Python that runs it, and the theorems in proofs/, which are stated there with "
            "their proofs.",
        ),
        (
            f"Proved: {found.lines} lines, over {found.leaves} boxes. The checker derives from the claim's text what "
            "has to be shown, in arithmetic of its own that rounds outward, and shares no code with the search. What "
            "is printed here as proved, refuted or undecided is what it derived when this report was made.",
        ),
        (
            "Not proved: everything marked as an estimate, the remarks of the search, and what the search was made "
            "with.",
        ),
    ]
    if claim.stances[0].dynamics is not None:
        items.append(
            (
                f"Of the stance, {len(supported)} quantities are proved to stay above 0 throughout: its duration and, "
                "where the rates hold a height and its second derivative, that the leg only pushes.",
            )
        )
    if any(q.within for q in claim.uncertain.values()):
        items.append(("Signals within a stance may take any measurable course in their ranges.",))
    return [
        Items(tuple(items)),
        said("Re-verify with the program, or with the checker as one file on any Python 3.11 or later:"),
        Items(
            (
                (Code("ultibound check CERTIFICATE --claim CLAIM"),),
                (Code("python3 -I -S check_certificate.pyz CERTIFICATE"),),
            )
        ),
        said("SHA-256 of the certificate's contents: ", Code(found.digest)),
        said(f"The search was made with {made or 'unknown versions'} (as the certificate says)."),
        *required(claim),
    ]
