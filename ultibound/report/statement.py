"""A claim in words and formulas: what was understood, before anything is proved."""

from __future__ import annotations

import functools
from collections.abc import Callable, Sequence
from fractions import Fraction

from ..claim import Claim
from ..claim.errors import Bad
from ..claim.model import Dynamics, Quantity, Requirement, Stance
from ..claim.obligations import Domain, Obligation, Obligations
from ..claim.provable import not_yet, of_stance
from .document import Block, Code, Display, Document, Items, Listing, Paragraph, Section, Table, Text, said
from .formula import (
    Formula,
    bars,
    call,
    equation,
    fraction,
    interval,
    listed,
    minus,
    named,
    number,
    partial,
    plus,
    product,
    row,
    start,
    symbol,
    words,
    written,
)
from .linearising import derivatives

ABOUT = "This says what was understood of the claim. Nothing of it has been proved."


def explained(claim: Claim) -> Document:
    """What `ultibound explain` shows: map, linearisation, ranges, requirements, obligations."""
    sections = [*stated(claim), Section("requirements", "What is to be proved", tuple(required(claim)))]
    problem = not_yet(claim)
    try:
        owed = obligations(claim) if problem is None else [said(f"Not all of this can be proved yet: {problem}")]
    except Bad as why:
        owed = [said(f"This cannot be proved as it stands: {why}")]
    sections.append(Section("obligations", "What a proof has to show", tuple(owed)))
    return Document(claim.title or claim.place, (said(ABOUT),), tuple(sections))


def stated(claim: Claim) -> list[Section]:
    """The claim as mathematics: ranges, the map, its target, its linearisation."""
    blocks: list[Block] = [said(claim.notes.strip())] if claim.notes.strip() else []
    blocks += _ranges(claim)
    sections = [Section("quantities", "Quantities and ranges", tuple(blocks))]
    for stance in claim.stances:
        of = f", {stance.name} stance" if stance.name else ""
        tag = f"-{stance.name}" if stance.name else ""
        sections.append(Section(f"map{tag}", f"The step-to-step map{of}", tuple(_map(claim, stance))))
        sections.append(Section(f"linearisation{tag}", f"Its linearisation{of}", tuple(_linearisation(claim, stance))))
    return sections


def _ranges(claim: Claim) -> list[Block]:
    rows: list[tuple[Text, ...]] = []
    for stance in claim.stances:
        of = f" ({stance.name})" if stance.name else ""
        rows += [_spanned(q, f"state at touchdown{of}") for q in stance.states.values()]
    rows += [_spanned(q, _kind(q)) for q in claim.uncertain.values()]
    head: tuple[Text, ...] = (("name",), ("what it is",), ("range",), ("unit",))
    blocks: list[Block] = [Table(("States and what is uncertain",), head, tuple(rows))]
    fixed: list[tuple[Text, ...]] = []
    for n, e in claim.constants.items():
        fixed.append(((symbol(n),), ("constant",), (written(e),)))
    for n, e in claim.gains.items():
        fixed.append(((symbol(n),), ("gain, changed by --set" if n in claim.settings else "gain",), (written(e),)))
    if fixed:
        blocks.append(Table(("Constants and gains, exact",), (("name",), ("what it is",), ("value",)), tuple(fixed)))
    for lib in claim.libraries:
        size = " × ".join(str(len(axis)) for axis in lib.grid)
        read = [t for a, at in zip(lib.axes, lib.at, strict=True) for t in (", ", f"{a} at ", written(at))][1:]
        text: Text = (
            "Gait library ",
            Code(lib.file),
            f": {size} gaits; columns ",
            *_joined([symbol(c) for c in lib.columns]),
            " by multilinear interpolation, read with ",
            *read,
            ".",
        )
        blocks.append(Paragraph(text))
    return blocks


def _joined(parts: Sequence[Formula]) -> list[Formula | str]:
    return [x for p in parts for x in (", ", p)][1:]


def _kind(q: Quantity) -> str:
    if q.within:
        return "a signal: any course in its range during a stance"
    if q.change is not None:
        return "unknown, held from step to step but for the change stated"
    return "unknown, the same at every step" if q.held else "any value, afresh at every step"


def _spanned(q: Quantity, what: str) -> tuple[Text, ...]:
    if q.range is not None:
        span: Formula = interval(written(q.range.lower), written(q.range.upper))
    else:
        span = listed([written(e) for e in q.values or ()])
    text: Text = (span,) if q.change is None else (span, ", changing by at most ", written(q.change), " a step")
    return (symbol(q.name),), (what,), text, (q.unit or "–",)


def _map(claim: Claim, stance: Stance) -> list[Block]:
    blocks: list[Block] = []
    d = stance.dynamics
    if d is not None:
        blocks.append(said(*_lasting(d), " Just after touchdown"))
        blocks += [Display(equation(start(x), "=", written(e))) for x, e in d.start.items()]
        blocks.append(said("and within the stance, the time t since touchdown in seconds,"))
        blocks += [Display(equation(Formula("dot", (symbol(x),), "."), "=", written(e))) for x, e in d.rate.items()]
        blocks.append(said("At the next touchdown the state is"))
    else:
        blocks.append(said("From one touchdown to the next"))
    blocks += [Display(equation(symbol(s, "+"), "=", written(e))) for s, e in stance.next.items()]
    if stance.define:
        blocks.append(said("where"))
        blocks += [Display(equation(symbol(n), "=", written(e))) for n, e in stance.define.items()]
    blocks.append(said("The controller is heading for"))
    blocks += [Display(equation(symbol(s, "*"), "=", written(e))) for s, e in stance.target.items()]
    if claim.correction:
        added = _joined([symbol(c) for c in claim.correction])
        blocks.append(said("The controller's correction is ", *added, "; the nominal gait is the map without it."))
    if stance.then:
        blocks.append(
            said(
                f"After {stance.name} comes {' or '.join(stance.then)}; the error is then taken from the target of "
                "that stance."
            )
        )
    if claim.horizon > 1:
        blocks.append(said(f"{claim.horizon} steps are taken together as one map."))
    return blocks


def _lasting(d: Dynamics) -> Text:
    """From one touchdown to the next: a duration, or the condition that ends the stance."""
    if d.duration is not None or d.until is None or d.within is None:
        known: Formula | str = "?" if d.duration is None else written(d.duration)
        return ("From one touchdown to the next the stance lasts ", known, " s.")
    window = interval(written(d.within.lower), written(d.within.upper))
    return ("The next touchdown is when ", written(d.until), " first falls to 0 within ", window, " s.")


def _linearisation(claim: Claim, stance: Stance) -> list[Block]:
    found = derivatives(claim, stance)
    blocks: list[Block] = [said("By the chain rule, name by name; what is not listed does not vary with the state.")]
    if stance.dynamics is not None:
        blocks = [
            said(
                "The state reaches the next one through the start values and through what the rates read. With y the "
                "continuous states, p what rates and duration depend on beside time, and Φ the fundamental solution,"
            )
        ]
        s, states = next(iter(stance.states)), len(stance.states)
        by = symbol(s) if states == 1 else words("state")
        y = symbol("y")
        duration = words("T") if stance.dynamics.duration is None else written(stance.dynamics.duration)
        grown = product(Formula("call", (duration,), "Φ"), partial(start("y"), by))
        read = product(partial(y, symbol("p")), partial(symbol("p"), by))
        late = product(Formula("dot", (y,), "."), partial(words("duration"), by))
        blocks.append(Display(equation(partial(y, by), "=", plus(grown, read, late))))
        blocks.append(said("at touchdown, where the start values and what is read vary as follows."))
    blocks += [Display(d.equation()) for d in found]
    if any(lib.columns for lib in claim.libraries):
        blocks.append(
            said(
                "Slopes of a library column are those of the cell it is read in; where a box meets several cells, all "
                "of them count."
            )
        )
    return blocks if found or stance.dynamics is not None else [said("The next state does not vary with the state.")]


def required(claim: Claim) -> list[Block]:
    rows: list[tuple[Text, ...]] = []
    for number_, r in enumerate(claim.requirements, 1):
        where: list[Formula | str] = []
        for n, given in r.over.items():
            where += ["; " if where else "", symbol(n), " in ", interval(written(given.lower), written(given.upper))]
        meaning = MEANINGS[r.kind] + (", at any instant of the stance" if r.during else "")
        rows.append(((str(number_),), (Code(r.text),), (meaning,), (*where,) or ("as declared",), (r.stance or "all",)))
    head: tuple[Text, ...] = (("no.",), ("requirement",), ("in words",), ("over",), ("stance",))
    if not claim.stances[0].name:
        head, rows = head[:-1], [r[:-1] for r in rows]
    return [Table(("Each is answered with proved, refuted or undecided",), head, tuple(rows))]


MEANINGS = {
    "settles": "a bound on the error in the long run, strictly inside the certified set, is proved",
    "gain": "the largest factor by which one step takes errors on",
    "residual": "what a step adds at most to the error, on the target",
    "bound": "how far from the target the state can be in the long run",
    "sharp_bound": "how far from the target the state can be in the long run, by the error curve",
    "radius": "how far from the target the state may start",
    "push": "the largest sudden change, after settling, that stays in the certified set",
    "steps": "steps after which the error stays within the second number, from any start within the first",
    "sensitivity": "the partial derivative of the next state by the name",
    "value": "the range of the expression over the certified set and all that is uncertain",
    "always": "the inequality holds at every step from the certified set",
    "throughout": "the inequality holds at every instant of the stance",
}


def obligations(claim: Claim) -> list[Block]:
    """The ranges that a proof shows, each over what it depends on; the theorems that join them are in proofs/."""
    blocks: list[Block] = [
        said(
            "S is the certified set: the whole region if every step leads back into it, else the largest ball about "
            "the target inside it. Each of these is shown over all of it and everything uncertain; then the theorems "
            "of ",
            Code("proofs/"),
            " are applied.",
        )
    ]
    for stance in claim.stances:
        alone = of_stance(claim, stance.name) if stance.name else claim
        caption: Text = (f"Ranges to be enclosed{', stance ' + stance.name if stance.name else ''}",)
        rows = [_owed(o, name, meaning) for o, name, meaning in _listed(alone)]
        head: tuple[Text, ...] = (("obligation",), ("range of",), ("over",), ("boxes to begin with",))
        blocks.append(Table(caption, head, tuple(rows), "lllr"))
    blocks.append(Items(tuple(_ends(claim))))
    return blocks


def _listed(claim: Claim) -> list[tuple[Obligation, str, Formula]]:
    o = Obligations(claim)
    nothing = Fraction(0)
    region = Domain("region", nothing, (nothing, nothing))
    found: list[tuple[Obligation, str, Formula]] = []

    def add(make: Callable[[], Obligation], meaning: Formula) -> None:
        try:
            obligation = make()
        except Bad:  # not known for this claim, which the proof says in its own words
            return
        found.append((obligation, obligation.name, meaning))

    for s in o.states:
        after, aim = symbol(s, "+"), symbol(s, "*")
        add(functools.partial(o.target, s), aim)
        add(functools.partial(o.image, s), after)
        for x in o.states:
            add(functools.partial(o.slope, region, s, x), partial(after, symbol(x)))
        add(functools.partial(o.miss, s), row(minus(after, aim), words(" on the target")))
        for h in o.moving(s):
            add(functools.partial(o.target_slope, h, s), partial(aim, symbol(h)))
    if claim.correction and len(o.states) == 1:
        s = o.state
        nominal = call("N", symbol(s))
        add(
            functools.partial(o.split_slope, region),
            partial(plus(symbol(s), minus(symbol(s, "+"), nominal)), symbol(s)),
        )
        add(functools.partial(o.split_residual, region), words("nominal step less the state, correction on the target"))
    if len(claim.correction) == 1 and len(o.states) == 1 and claim.horizon == 1:
        s, by = o.state, symbol(claim.correction[0])
        aimed = row(by, words(" on the target"))
        meanings = (partial(symbol(s, "+"), by), partial(by, symbol(s)), aimed, words("nominal step less the state"))
        for k, meaning in enumerate(meanings):
            add(functools.partial(_sector, o, region, k), meaning)
    for k in range(1, len(o.motion.positive) + 1 if o.motion is not None else 1):
        what = "the duration" if k == 1 else "what the leg's push and the signals' one-sided effect rest on"
        add(functools.partial(o.support, k, region), words(f"{what}, above 0 throughout"))
    pushed = dict.fromkeys(r.state or "" for r in claim.requirements if r.during and r.stance is None)
    for s, x in ((s, x) for x in pushed for s in o.states):
        add(functools.partial(o.growth, region, s, x), words(f"what a push of {x} within the stance grows to in {s}"))
    for n, r in enumerate(claim.requirements, 1):
        if r.kind in ("value", "sensitivity", "always", "throughout") and r.stance is None:
            add(functools.partial(o.requirement, n, region), _asked(r))
    return found


def _sector(o: Obligations, region: Domain, number: int) -> Obligation:
    return o.sector(region)[number]


def _asked(r: Requirement) -> Formula:
    if r.kind == "sensitivity":
        return partial(symbol(r.state or "", "+"), symbol(r.by or ""))
    if r.left is not None and r.right is not None:
        return minus(written(r.left), written(r.right))
    return written(r.expression) if r.expression is not None else words(r.text)


def _owed(o: Obligation, name: str, meaning: Formula) -> tuple[Text, ...]:
    met = [x for v in o.variables for x in (", ", named(v.name))][1:]
    cells = 1
    for v in o.variables:
        cells *= len(v.cells)
    return (Code(name),), (meaning,), tuple(met) or ("nothing: a constant",), (str(cells),)


def _ends(claim: Claim) -> list[Text]:
    e = minus(symbol("x"), symbol("x", "*"))
    norm = bars(e, double=True)
    k, rest = symbol("k"), symbol("epsilon")
    step = equation(bars(minus(symbol("x", "+"), symbol("x", "*")), double=True), "≤", plus(product(k, norm), rest))
    found: list[Text] = [
        (
            "A gain ",
            k,
            " and a residual ",
            rest,
            " with ",
            step,
            " on S, ",
            equation(k, "<", number(1)),
            ", give the ultimate bound ",
            fraction(rest, minus(number(1), k)),
            ".",
        ),
        ("S has to contain every target, lie in the region and be led into itself; the bound has to lie inside S.",),
    ]
    if len(claim.stances[0].states) == 1 and not claim.stances[0].name:
        found.append(
            (
                "The error curve is followed too: F − x* over shells about the target, as many as it takes (",
                Code("shell[j]"),
                ").",
            )
        )
    if len(claim.stances[0].states) > 1:
        found.append(
            (
                "A norm in which every Jacobian contracts is looked for and stated exactly; it is proved for all of "
                "them, not for samples.",
            )
        )
    if claim.stances[0].name:
        found.append(("Of the stances, gains multiplied around every cycle of allowed steps have to be below 1.",))
    return found


def listing(claim: Claim) -> list[Block]:
    """The claim's own text, and what --set changed."""
    blocks: list[Block] = [Listing(("The claim as it was written",), claim.text)]
    if claim.settings:
        changed = ", ".join(f"{n} = {text}" for n, text in sorted(claim.settings.items()))
        blocks.insert(0, said(f"Gains changed by --set: {changed}."))
    return blocks
