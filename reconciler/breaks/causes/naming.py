"""The outcome of the search, put on the breaks: cause, certainty, a sentence with the numbers in it, and the next step.

Breaks of one payment and party share one search. What fits stands in order of how common it is, the first on the break itself, all of
them in a table of their own (EXPLANATIONS) for whoever wants to look further. Where nothing fits the break stays open and says how
much was tried.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from reconciler.bonds.terms import Terms
from reconciler.breaks.causes import dates, inputs, search
from reconciler.breaks.causes.accruals import OTHER_COUNT, alike
from reconciler.breaks.causes.across import across
from reconciler.breaks.causes.cases import Cases, from_breaks
from reconciler.breaks.causes.judging import CHANCE, COARSE
from reconciler.breaks.causes.singles import FOLLOWS
from reconciler.breaks.causes.trying import Hypothesis, Search
from reconciler.breaks.causes.variants import CHARGE
from reconciler.money import MISSING, to_text
from reconciler.records import Table, Words, table

Array = np.ndarray[Any, Any]

EXPLANATIONS: dict[str, str] = {
    # what else fits: several rows a break, `place` 0 is the one shown; `tried` is how many explanations were held against it
    "break_row": "int64", "place": "int64", "cause": "text", "certainty": "text", "explanation": "text", "next_step": "text",
    "tried": "int64",
}  # fmt: skip

_PARTIES = ("Terms", "Broker", "Desk", "Bank")
_AMOUNTS = ("settlement amount", "payment amount", "accrued")
_PAIR = 0.02
"""Two causes at once are this much rarer than one (common practice, no source)."""

Found = tuple[str, str, str, str]
"""Cause, certainty, sentence, next step."""


def name_causes(items: Table, tickets: Table, confirmations: Table, terms: Terms, breaks: Table, digits: Array) -> tuple[Table, Table]:
    """The breaks with causes, and the table EXPLANATIONS. `digits` are the minor digits of every item's currency."""
    cases = from_breaks(items, tickets, confirmations, breaks, digits)
    if not len(cases):
        return across(items, breaks), table(EXPLANATIONS)
    key = cases.item_row * 4 + cases.party
    wanted = breaks["item_row"] * 4 + _party_numbers(breaks["party"])
    place = np.searchsorted(key, wanted)
    place = np.where((place < len(key)) & (key[np.minimum(place, len(key) - 1)] == wanted), place, -1)
    kinds = breaks["break"].to_list()
    amounts, tried = _amounts(cases, terms, items["item"].rank()[cases.item_row])
    days, days_tried = _dates(cases, terms)
    found: dict[int, Sequence[Found]] = {}
    counts: dict[int, int] = {}
    for row, (kind, case) in enumerate(zip(kinds, place.tolist(), strict=True)):
        if case < 0:
            continue
        if kind in _AMOUNTS:
            found[row], counts[row] = amounts.get(case, ()), int(tried[case])
        elif kind in ("settlement date", "payment date"):
            found[row], counts[row] = days.get(case, ()), days_tried
        elif kind in ("price", "face", "fees", "side"):
            found[row], counts[row] = _input(cases, case, kind), inputs.TRIES[kind]
    named, explained = _written(breaks, found, counts)
    return across(items, named), explained


def _party_numbers(parties: Words) -> Array:
    table_ = np.array([_PARTIES.index(p) if p in _PARTIES else 0 for p in parties.values.to_pylist()] + [0])
    return table_[parties.codes]


def _amounts(cases: Cases, terms: Terms, rank: Array) -> tuple[dict[int, list[Found]], Array]:
    out: dict[int, list[Found]] = {}
    tried = np.zeros(len(cases), np.int64)
    # in the order of names, so that the stretches searched together do not hang on the order of the files
    named = np.lexsort((cases.party, rank))
    for stretch, part, chance in search.run(cases.take(named), terms):
        rows = named[stretch]
        tried[rows] = part.fits.tried
        case, number = part.fits.flat()
        weights = _weights(part, case, number)
        order = np.lexsort((number, -weights, case))
        case, number = case[order], number[order]
        starts = np.searchsorted(case, np.arange(len(rows) + 1))
        for one in range(len(rows)):
            numbers = number[starts[one] : starts[one + 1]].tolist()
            if numbers:
                fits = [part.fits.hypotheses[n] for n in dict.fromkeys(numbers)]
                out[int(rows[one])] = _judged(part, one, fits, float(chance[one]))
    return out, tried


def _weights(part: Search, case: Array, number: Array) -> Array:
    """How common each fit is; a day count that nobody takes for the bond's own counts half."""
    if not len(case):
        return np.zeros(0)
    weights = np.array([_weight(hypothesis) for hypothesis in part.fits.hypotheses])[number]
    counted = [next((OTHER_COUNT[v.wording] for v in h if v.wording in OTHER_COUNT), -1) for h in part.fits.hypotheses]
    other = np.array(counted)[number]
    own = part.facts.terms.day_count[part.facts.bond_row[case]]
    return np.where((other >= 0) & ~alike()[own, other], weights * 0.5, weights)


def _weight(hypothesis: Hypothesis) -> float:
    weight = _PAIR ** (len(hypothesis) - 1)
    for variant in hypothesis:
        weight *= variant.weight
    return weight


def _families(fits: Sequence[Hypothesis]) -> set[tuple[str, ...]]:
    return {tuple(sorted(variant.cause.family for variant in hypothesis)) for hypothesis in fits}


def _judged(part: Search, one: int, fits: list[Hypothesis], chance: float) -> list[Found]:
    """The explanations that fit one case, in order, each with its certainty."""
    told, right = int(part.told["amount"][one]), int(part.cases.terms.amount[one])
    apart = abs(told - right)
    coarse = apart <= COARSE and not _accrued_apart(part, one)
    # any round sum may be a charge: it is named, never proved
    alone = len(_families(fits)) == 1 and not any(v.cause is CHARGE for hypothesis in fits for v in hypothesis)
    certain = "proved" if alone and not coarse and chance < CHANCE else "likely"
    seen: set[tuple[str, ...]] = set()
    out: list[Found] = []
    for hypothesis in fits:
        name = tuple(variant.cause.name for variant in hypothesis)
        if name in seen:
            continue
        seen.add(name)
        out.append((" and ".join(name), certain, _sentence(part, one, hypothesis), hypothesis[0].cause.next_step))
    return out


def _accrued_apart(part: Search, one: int) -> bool:
    told, right = int(part.told["accrued"][one]), int(part.cases.terms.accrued[one])
    return told != MISSING and abs(told - right) > COARSE


def _money(minor: int, digits: int) -> str:
    text = to_text([minor], int(digits))[0]
    sign, figures = ("−", text[1:]) if text.startswith("-") else ("", text)
    whole, point, fraction = figures.partition(".")
    return f"{sign}{int(whole):,}{point}{fraction}" if whole else text


def _sentence(part: Search, one: int, hypothesis: Hypothesis) -> str:
    cases = part.cases
    digits = int(cases.digits[one])
    party = _PARTIES[int(cases.party[one])]
    told, right = _money(int(part.told["amount"][one]), digits), _money(int(cases.terms.amount[one]), digits)
    if hypothesis[0].cause is FOLLOWS:
        return f"{party} told {told}, the terms give {right}; it follows from the other facts that {party.lower()} told."
    words = " and ".join(dict.fromkeys(variant.wording for variant in hypothesis))
    detail = ""
    accrued, mine = int(part.told["accrued"][one]), int(cases.terms.accrued[one])
    if accrued not in (MISSING, mine):
        detail = f" (accrued {_money(accrued, digits)}, by the terms {_money(mine, digits)})"
    return f"{party} told {told}, the terms give {right}; the told figure comes out to the last digit if {words}{detail}."


def _dates(cases: Cases, terms: Terms) -> tuple[dict[int, list[Found]], int]:
    told, right = cases.told.date, cases.terms.date
    apart = np.flatnonzero(~np.isnat(told) & ~np.isnat(right) & (told != right))
    if not len(apart):
        return {}, 0
    some = cases.take(apart)
    tried = 0
    fits: dict[int, list[tuple[float, int, Found]]] = {}
    for number, (cause, wording, day) in enumerate(dates.explanations(some, terms, right[apart], told[apart])):
        tried = number + 1
        for one in np.flatnonzero(day == told[apart]).tolist():
            party = _PARTIES[int(some.party[one])]
            why = dates.closed_because(terms, int(some.bond_row[one]), told[apart][one])
            closed = f", which is closed ({why})" if why else ""
            sentence = f"{party} told {told[apart][one]}{closed}, the terms give {right[apart][one]}; the day comes out if {wording}."
            fits.setdefault(int(apart[one]), []).append((-cause.weight, number, (cause.name, "likely", sentence, cause.next_step)))
    return {case: _unique([found for _w, _n, found in sorted(rows)]) for case, rows in fits.items()}, tried


def _unique(rows: list[Found]) -> list[Found]:
    names: set[str] = set()
    return [row for row in rows if not (row[0] in names or names.add(row[0]))]  # type: ignore[func-returns-value]


def _input(cases: Cases, case: int, kind: str) -> list[Found]:
    right, told = int(getattr(cases.terms, kind)[case]), int(getattr(cases.told, kind)[case])
    digits, party = int(cases.digits[case]), _PARTIES[int(cases.party[case])]
    if MISSING in (right, told):
        return []
    if kind == "side":
        sentence = f"{party} has the payment as a {'purchase' if told > 0 else 'sale'}, the terms as a {'purchase' if right > 0 else 'sale'}."
        return [(inputs.REVERSED.name, "likely", sentence, inputs.REVERSED.next_step)]
    if kind == "price":
        fits, shown = list(inputs.price(right, told)), (_decimal(told), _decimal(right))
    elif kind == "face":
        fits, shown = list(inputs.face(right, told, digits)), (_money(told, digits), _money(right, digits))
    else:
        fits, shown = list(inputs.fees(right, told, digits)), (_money(told, digits), _money(right, digits))
    fits.sort(key=lambda fit: -fit[0].weight * fit[2])
    return _unique([
        (cause.name, "likely", f"{party} told {kind} {shown[0]}, the terms have {shown[1]}; it comes out if {wording}.", cause.next_step)
        for cause, wording, _weight in fits
    ])  # fmt: skip


def _decimal(price: int) -> str:
    text = to_text([price], 12)[0].rstrip("0").rstrip(".")
    return text or "0"


def _written(breaks: Table, found: dict[int, Sequence[Found]], counts: dict[int, int]) -> tuple[Table, Table]:
    columns = {name: breaks[name].to_list() for name in ("cause", "certainty", "explanation", "next_step")}
    rows: list[tuple[int, int, Found, int]] = []
    for row in sorted(found):
        fits = found[row]
        if not fits:
            columns["explanation"][row] += f" {counts[row]:,} explanations were tried; none gives what was told."
            continue
        columns["cause"][row], columns["certainty"][row], columns["explanation"][row], columns["next_step"][row] = fits[0]
        rows += [(row, place, fit, counts[row]) for place, fit in enumerate(fits)]
    explained = table(
        EXPLANATIONS,
        break_row=[r for r, _p, _f, _t in rows],
        place=[p for _r, p, _f, _t in rows],
        cause=[f[0] for _r, _p, f, _t in rows],
        certainty=[f[1] for _r, _p, f, _t in rows],
        explanation=[f[2] for _r, _p, f, _t in rows],
        next_step=[f[3] for _r, _p, f, _t in rows],
        tried=[t for _r, _p, _f, t in rows],
    )
    return breaks.with_columns(**{name: Words.of(texts) for name, texts in columns.items()}), explained
