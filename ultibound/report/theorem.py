"""What a certificate proves as a theorem with the numbers in it, and a table and a paragraph for a paper."""

from __future__ import annotations

from typing import Any

from .accepted import Accepted
from .document import Block, Display, Items, Listing, Table, Text, said
from .formula import Formula, bars, call, equation, fraction, minus, number, plus, power, product, symbol, total, words
from .latex import table_of, text_of
from .margins import lower, rounded, signed, upper, with_unit

K, EPS, E0, EN, N = symbol("k"), symbol("epsilon"), symbol("e0"), symbol("e_n"), symbol("n")
ROUTES = {
    "slope": "slopes of the map over the whole set, and what it misses at the target",
    "split": "the nominal gait and the controller's correction told apart",
    "sector": "how the next state follows the correction, and the correction the error",
    "curve": "the error curve: how far a step leads from within each distance",
}


def figure(text: str) -> Formula:
    """A decimal as it stands."""
    return total([("-", Formula("number", text=text[1:]))]) if text.startswith("−") else Formula("number", text=text)


def measured(text: str | None, unit: str) -> Text:
    return ("not proved",) if text is None else (figure(text), f" {unit}" if unit else "")


def theorem(found: Accepted) -> list[Block]:
    """The statement that holds for every start and every course of what is uncertain."""
    results, claim = found.results, found.claim
    stance, states = claim.stances[0], list(claim.stances[0].states)
    if results["set"] is None:
        return [
            said(
                "No set that the map leads into itself is proved, so nothing is claimed about the long run. The "
                "figures of gain and residual hold over the largest ball about the target inside the region."
            )
        ]
    if stance.name:
        return _of_stances(found)
    several = len(states) > 1
    norm = bars(EN, several)
    unit = "" if several else stance.states[states[0]].unit
    pair = results["routes"].get(results["route"]) or results
    k, rest, bound = upper(pair["gain"]), upper(pair["residual"]), upper(pair["bound"])
    many = claim.horizon
    sized = "in the norm stated below, " if several else f"in {unit}, " if unit else ""
    kept = "the state stays in S, and"
    if many > 1:
        kept = f"the state is in S again after every {many} steps, in the region at all of them, and over such a round"
    blocks: list[Block] = [
        said(
            f"Let e be the error, the state less its target, {sized}and S {_set(results, unit)}. For every start in S "
            "and "
            f"every course of the uncertain quantities within their ranges {kept}"
        )
    ]
    if k is not None and rest is not None:
        one = equation(bars(symbol("e", "+"), several), "≤", plus(product(K, bars(symbol("e"), several)), EPS))
        blocks.append(Display(equation(one, ",", equation(K, "=", figure(k)), ",", equation(EPS, "=", figure(rest)))))
    if k is not None and rest is not None and bound is not None:
        geometric = fraction(minus(number(1), power(K, N)), minus(number(1), K))
        blocks.append(said(f"so that after n {'rounds' if many > 1 else 'steps'}"))
        blocks.append(
            Display(equation(norm, "≤", plus(product(power(K, N), bars(E0, several)), product(EPS, geometric))))
        )
        blocks.append(said("and in the long run, uniformly over all starts and courses,"))
        limit = equation(call("limsup", norm), "≤", fraction(EPS, minus(number(1), K)), "≤", figure(bound))
        blocks.append(Display(limit))
    blocks.append(said(f"This is by the route {results['route']}: {ROUTES[results['route']]}."))
    if several:
        blocks.append(norm_stated(results["metric"], states))
    own = _own_bounds(found)
    if own:
        blocks.append(said("By the best argument for each state, in the long run"))
        blocks.append(Items(own))
    blocks.append(
        said(
            "The theorems that the checker applies stand with their proofs in the folder proofs/ of the program; "
            "printed figures are rounded to the side on which they still hold."
        )
    )
    return blocks


def _set(results: dict[str, Any], unit: str) -> str:
    kind = results["set"]["kind"]
    if kind == "region":
        return "the whole region of the claim"
    radius = lower(results["radius"])
    return f"the {kind} about the target of radius {with_unit(radius or '?', unit)}"


def _own_bounds(found: Accepted) -> tuple[Text, ...]:
    states = found.claim.stances[0].states
    items: list[Text] = []
    for s in states:
        figures = found.results["states"][s]
        b = upper(figures["bound"])
        if b is not None:
            inner = bars(minus(symbol(s), symbol(s, "*")))
            text: Text = (equation(inner, "≤", figure(b)), f" {states[s].unit}")
            reached = lower(figures["bound"])
            if reached is not None and not reached.startswith("−") and reached != "0":
                text = (*text, f"; a proved orbit reaches {with_unit(reached, states[s].unit)} again and again")
            items.append((*text, "."))
    return tuple(items)


def norm_stated(metric: dict[str, Any] | None, states: list[str]) -> Block:
    """The norm in numbers; the certificate has it exactly."""
    if metric is None:
        return said("Each stance has a norm of its own.")
    if metric["kind"] == "box":
        parts = [product(figure(rounded(w, True, 5)), bars(symbol(f"e_{s}"))) for s, w in metric["weights"].items()]
        return Display(equation(bars(symbol("e"), True), "=", call("max", *parts)))
    name = "V" if metric["kind"] == "polytope" else "P"
    rows = [call("", *(figure(signed(rounded(x, True, 5))) for x in row)) for row in metric["matrix"]]
    matrix = equation(symbol(name), "≈", Formula("set", tuple(rows)))
    e = symbol("e")
    form = (
        bars(product(symbol("V"), e), True)
        if name == "V"
        else Formula("root", (product(power(e, words("T")), symbol("P"), e),))
    )
    largest = words(" (the largest magnitude)") if name == "V" else words("")
    return Display(
        equation(bars(e, True), "=", form, largest, ",", matrix, words(f" by rows, for ({', '.join(states)})"))
    )


def _of_stances(found: Accepted) -> list[Block]:
    results, claim = found.results, found.claim
    blocks: list[Block] = [
        said(
            "The error of a stance is taken from its own target, that of the next from the target of the stance that "
            "follows. For every start in the certified set of a stance, every allowed order of stances and every "
            "course of the uncertain quantities within their ranges, each step leads into the set of the stance that "
            "follows."
        )
    ]
    items: list[Text] = []
    for stance in claim.stances:
        name = stance.name
        for s, figures in results["stances"][name]["states"].items():
            b = upper(figures["bound"])
            if b is not None:
                inner = bars(minus(symbol(s), symbol(s, "*")))
                items.append((f"in the {name} stance ", equation(inner, "≤", figure(b)), f" {stance.states[s].unit}."))
    if not items:
        return [*blocks, said("No bound in the long run is proved.")]
    many = claim.horizon
    whose = f"Gains of {many} steps taken together, " if many > 1 else "Gains "
    cycles = said(f"{whose}multiplied around every cycle of allowed steps{',' if many > 1 else ''} are below 1.")
    return [*blocks, said("In the long run"), Items(tuple(items)), cycles]


def for_a_paper(found: Accepted) -> list[Block]:
    """LaTeX to be copied: a table of what is proved and a paragraph that says it; needs amsmath and longtable."""
    from .quantities import quantities

    rows = quantities(found)
    head: tuple[Text, ...] = (("Quantity",), ("proved",), ("surely reached",), ("unit",))
    body = tuple((q.name, q.proved, q.reached, (q.unit,)) for q in rows)
    table = table_of(Table((), head, body, "llll"))
    return [
        said("A table and a paragraph in LaTeX, to be copied; they need the packages amsmath and longtable."),
        Listing((), f"{table}\n{text_of(paragraph(found))}\n"),
    ]


def paragraph(found: Accepted) -> Text:
    """One paragraph for a paper."""
    results, states = found.results, found.claim.stances[0].states
    far: list[Text] = []
    for s in states:
        b = upper(results["states"][s]["bound"])
        if b is not None:
            far.append((bars(minus(symbol(s), symbol(s, "*"))), " at most ", figure(b), f" {states[s].unit}"))
    counts = [sum(r["verdict"] == v for r in results["requirements"]) for v in ("proved", "refuted", "undecided")]
    opening: Text = ("No bound in the long run is proved. ",)
    if far:
        opening = (
            "For the step-to-step map stated, every start in the certified set and every admissible course of the "
            "uncertain "
            "quantities, in the long run ",
            *(x for k, each in enumerate(far) for x in ((", " if k else ""), *each)),
            *_pair(found),
            ". ",
        )
    return (
        *opening,
        f"Of {sum(counts)} requirements {counts[0]} are proved, {counts[1]} refuted and {counts[2]} undecided. These "
        "are "
        f"proved enclosures, not samples: a certificate of {found.lines} proof lines (SHA-256 {found.digest[:16]}..., "
        "made "
        f"with ultibound {found.made_with.get('ultibound', '?')}) can be re-verified with a checker that needs Python "
        "alone. They are about the model, not about a machine.",
    )


def _pair(found: Accepted) -> Text:
    """Gain and residual of the reported route; of stances there is one a step."""
    results, states = found.results, found.claim.stances[0].states
    pair = results["routes"].get(results["route"]) or results
    k, rest = upper(pair["gain"]), upper(pair["residual"])
    if k is None or rest is None or found.claim.stances[0].name:
        return ()
    unit = next(iter(states.values())).unit if len(states) == 1 else "in the norm"
    return " (gain ", figure(k), ", residual ", figure(rest), f" {unit})".replace(" )", ")")
