"""Two causes at once, for what no single one explains, and to cast doubt on single ones that others imitate.

Causes that change different parts of a payment simply add up; two faults in the accrual are put one on top of the other; a wrong face or
factor is reckoned through; a slip of the pen may sit on top of any cause. So many pairs are tried that a pair is never proof.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.breaks.causes import reckoning, slips
from reconciler.breaks.causes.accruals import ACCRUALS, DAY_COUNT, FROM_START, ONE_DAY, TO_TRADE, WHOLE_COUPONS
from reconciler.breaks.causes.cases import TRADE
from reconciler.breaks.causes.singles import SLIP_CAUSES, factors
from reconciler.breaks.causes.trying import Search, differs, explained
from reconciler.breaks.causes.variants import WHOLE, Payment, Variant
from reconciler.money import MISSING

Array = np.ndarray[Any, Any]
Halves = list[tuple[Variant, Payment]]

_SOME_DAYS = Variant(ONE_DAY, "accrual", "some other number of days is counted", lambda p: p)


def doubted(search: Search, done: Halves, rows: Array, chance: Array) -> None:
    """A single cause is no proof where two others together give the same figures: those cases lose it."""
    if not len(rows):
        return
    part = Search(search.cases.take(rows), search.facts.terms)
    _two_at_once(part, _halves(search, done, rows))
    _any_days(part)
    chance[rows[explained(part)]] = 1.0


def _any_days(part: Search) -> None:
    """Accrued for some other number of days: a rate of 5 for 5.125 looks the same as 120 days for 123."""
    for days in (*range(-60, -3), *range(4, 61)):
        moved = reckoning.accrue(part.facts.changed(date=part.facts.date + days))
        made = reckoning.pay(part.facts, part.base.principal, moved)
        part.try_out((_SOME_DAYS,), made, differs(made, part.base) & (part.cases.kind == TRADE))


def _halves(search: Search, done: Halves, rows: Array) -> Halves:
    """The single causes that change something for some of the rows; others can be no half of a pair."""
    return [
        (variant, _rows(payment, rows))
        for variant, payment in done
        if (differs(payment, search.base) & search.kinds(variant))[rows].any()
    ]


def _two_at_once(part: Search, few: Halves) -> None:
    by_part: dict[str, Halves] = {}
    for variant, payment in few:
        by_part.setdefault(variant.part, []).append((variant, payment))
    _two_accruals(part)
    _two_parts(part, by_part)
    _with_wholes(part, few)
    _faces(part, by_part.get("face", []))


def pairs(search: Search, done: Halves) -> None:
    """Two causes at once, for the cases that no single one explains."""
    rest = np.flatnonzero(search.open)
    part = Search(search.cases.take(rest), search.facts.terms)
    few = _halves(search, done, rest)
    _two_at_once(part, few)
    _slips_on_top(part, few)
    # so many pairs are tried that a pair is likely at best: the chance of these cases stays at 1
    _join(search, part, rest)


def _two_parts(part: Search, by_part: dict[str, Halves]) -> None:
    """Two of accrual, price and fees: their differences add up, so the amount is the sum of both changes."""
    base = part.base
    for a, b in (("accrual", "price"), ("accrual", "fees"), ("price", "fees")):
        changes = [(v, p, (p.amount != MISSING) & (p.amount != base.amount)) for v, p in by_part.get(b, [])]
        for one, first in by_part.get(a, []):
            usable = (first.amount != MISSING) & differs(first, base)
            for two, second, changed in changes:
                both = part.kinds(one, two) & usable & changed
                if not both.any():
                    continue
                principal = second.principal if b == "price" else first.principal
                joined = first.changed(principal=principal)
                part.try_out((one, two), joined, both, first.amount + second.amount - base.amount)


def _with_wholes(part: Search, few: Halves) -> None:
    """A changed part, put together in a wrong way as well."""
    base = part.base
    for one, first in few:
        if one.part == "whole":
            continue
        changed = differs(first, base) & (first.amount != MISSING)
        for two in WHOLE:
            applies = part.kinds(one, two) & changed
            if not applies.any():
                continue
            amount = np.asarray(two.make(first, part.cases.digits))
            part.try_out((one, two), first, applies & (amount != first.amount), amount)


def _faces(part: Search, faces: Halves) -> None:
    """A wrong face together with a wrong accrual or price."""
    other = {variant.wording: changed for variant, changed in factors(part.facts)}
    for one, payment in faces:
        usable = payment.amount != MISSING
        facts = other.get(one.wording) or part.facts.changed(face=np.where(usable, payment.face, 0))
        for two in ACCRUALS:
            made = reckoning.pay(facts, payment.principal, two.make(facts))  # type: ignore[arg-type]
            part.try_out((one, two), made, usable & part.kinds(one, two) & (made.accrued != payment.accrued))


def _two_accruals(part: Search) -> None:
    """Two faults in the accrual, where the party told its accrued: the days, and what was made of them."""
    base = part.base
    asked = np.flatnonzero(~part.silent["accrued"] & (part.told["accrued"] != base.accrued) & part.open)
    if not len(asked):
        return
    small = Search(part.cases.take(asked), part.facts.terms)
    alone = {variant: reckoning.pay(small.facts, small.base.principal, variant.make(small.facts)) for variant in ACCRUALS}  # type: ignore[arg-type]
    for first in ACCRUALS:
        if first.cause in (DAY_COUNT, ONE_DAY, TO_TRADE, FROM_START) and differs(alone[first], small.base).any():
            _on_top(small, first, alone)
    _join(part, small, asked)


def _on_top(small: Search, first: Variant, alone: dict[Variant, Payment]) -> None:
    change = first.make.change  # type: ignore[attr-defined]
    base, facts = small.base, change(small.facts)
    one = alone[first]
    for second in ACCRUALS:
        if second.cause is first.cause or second.cause in (TO_TRADE, ONE_DAY):
            continue
        if second.cause in WHOLE_COUPONS:
            two = alone[second]
            accrued = one.accrued + two.accrued - base.accrued
            days = one.accrued_days + two.accrued_days - base.accrued_days
            made = one.changed(accrued=accrued, accrued_days=days, amount=one.amount + two.amount - base.amount)
            applies = (one.amount != MISSING) & (two.amount != MISSING) & differs(two, base)
        else:
            made = reckoning.pay(small.facts, base.principal, second.make(facts))  # type: ignore[arg-type]
            applies = differs(made, one)
        small.try_out((first, second), made, small.kinds(first, second) & applies & differs(one, base))


def _slips_on_top(part: Search, few: Halves) -> None:
    """A slip of the pen in the amount on top of a cause; so many figures fit that this is never proof."""
    told = part.told["amount"]
    for one, payment in few:
        fits = differs(payment, part.base) & part.kinds(one) & part.open & (payment.amount != MISSING)
        rows = np.flatnonzero(fits)
        rows = rows[part.consistent(payment, rows)]
        if not len(rows):
            continue
        which = slips.which(payment.amount[rows], told[rows])
        for number, slip in enumerate(slips.SLIPS):
            hit = rows[which == number]
            if len(hit):
                variant = Variant(SLIP_CAUSES[slip.name], "whole", f"{slip.wording} in the amount", lambda p: p, (0, 1, 2))
                part.fits.case.append(hit)
                part.fits.number.append(np.full(len(hit), len(part.fits.hypotheses)))
                part.fits.hypotheses.append((one, variant))
        part.fits.tried += 1


def _rows(payment: Payment, rows: Array) -> Payment:
    return Payment(**{name: column[rows] for name, column in vars(payment).items()})


def _join(search: Search, part: Search, rest: Array) -> None:
    """What was found for some of the cases, put among the rest."""
    offset = len(search.fits.hypotheses)
    search.fits.hypotheses += part.fits.hypotheses
    search.fits.case += [rest[case] for case in part.fits.case]
    search.fits.number += [number + offset for number in part.fits.number]
    search.fits.tried += part.fits.tried
