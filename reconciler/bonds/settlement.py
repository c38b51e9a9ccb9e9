"""What a trade must settle for, and on which day: principal from the price, accrued interest from the calendar.

Principal is the face times the price per 100, rounded half up on its own; accrued likewise; the settlement amount is their sum
(fees come on top, expected knows whose). A discount quoted in percent gives 100 - rate x days / basis, kept as an exact
fraction and not rounded before it is multiplied (31 CFR 356 Appendix B VI). The settlement date is the trade date plus the market's
cycle of that trade date, in business days of the bond's calendar.
"""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds import accrual, markets, schedules
from reconciler.bonds.daycounts import NUMBERS
from reconciler.bonds.terms import NAT, ONE, Terms
from reconciler.money import MISSING, half_up

Array = np.ndarray[Any, Any]

DISCOUNT, YIELD = 2, 3

_CHUNK = 131_072


@dataclass(frozen=True)
class Settled:
    """A trade's settlement on its face: unsigned minor units (accrued may be negative), MISSING where not `sound`."""

    principal_minor: Array
    accrued_minor: Array
    accrued_days: Array
    ex: Array
    price_per100: Array
    sound: Array


def settlement_dates(terms: Terms, rows: Array, trade_dates: Array) -> Array:
    """The day each trade settles; NaT where neither the bond nor its market says how many days it takes."""
    rows, trade = np.asarray(rows), np.asarray(trade_dates, "datetime64[D]")
    days = terms.settlement_days[rows]
    if (days == MISSING).any():
        days = np.where(days == MISSING, markets.settlement_days(terms.market[rows], trade), days)
    known = (days != MISSING) & ~np.isnat(trade)
    moved = terms.calendars.add(terms.calendar[rows], trade, np.where(known, days, 1))
    return np.where(known, moved, NAT)


def price_ratio(terms: Terms, rows: Array, settle: Array, price_e12: Array) -> tuple[Array, Array]:
    """Every price as an exact fraction, per 100 of face: numerator and denominator (int64)."""
    above, below = np.array(price_e12, np.int64, copy=True), np.full(len(rows), ONE)
    quote = terms.quote[rows]
    d = np.flatnonzero((quote == DISCOUNT) & (above != MISSING))
    if len(d):
        days = (terms.maturity[rows[d]] - settle[d]).astype(np.int64)
        basis = np.where(terms.day_count[rows[d]] == NUMBERS["Act/365F"], 365, 360)
        # rates to nine decimals keep 100 x basis x 10^9 and rate x days inside int64
        above[d] = 100 * basis * 10**9 - half_up([price_e12[d]], [1000]) * days
        below[d] = basis * 10**9
    y = np.flatnonzero((quote == YIELD) & (above != MISSING))
    if len(y):
        from reconciler.bonds import pricing

        clean = pricing.price_from_yield(terms, rows[y], settle[y], above[y] / 1e12)
        sound = np.isfinite(clean)
        above[y] = np.where(sound, np.rint(np.where(sound, clean, 0) * 1e12).astype(np.int64), MISSING)
    return above, below


def settle(terms: Terms, rows: Array, settle_dates: Array, face_minor: Array, price_e12: Array) -> Settled:
    """Principal and accrued of each trade: face in minor units (positive), price in the bond's quote x 10^12."""
    return _settle(terms, rows, settle_dates, face_minor, price_e12)[1]


def _settle(
    terms: Terms, rows: Array, settle_dates: Array, face_minor: Array, price_e12: Array
) -> tuple[accrual.Accrued, Settled]:
    rows, dates = np.asarray(rows), np.asarray(settle_dates, "datetime64[D]")
    interest = accrual.accrued(terms, rows, dates, face_minor)
    above, below = price_ratio(terms, rows, dates, price_e12)
    plain = np.flatnonzero(interest.factor_e12 != ONE)
    principal = half_up([face_minor, above], [100, below])
    if len(plain):
        p = plain
        principal[p] = half_up([face_minor[p], above[p], interest.factor_e12[p]], [100, below[p], ONE])
    sound = interest.sound & (principal != MISSING)
    with np.errstate(invalid="ignore"):
        per100 = np.where(sound, above / below, np.nan)
    return interest, Settled(
        np.where(sound, principal, MISSING), np.where(sound, interest.minor, MISSING),
        np.where(sound, interest.days, MISSING), interest.ex, per100, sound,
    )  # fmt: skip


@dataclass(frozen=True)
class Reckoned:
    """All that a trade's terms say, one row a trade: its coupon period, what it settles for, and when the coming coupon is paid."""

    settled: Settled
    previous: Array
    next: Array
    payment_date: Array


def reckon(terms: Terms, rows: Array, settle_dates: Array, face_minor: Array, price_e12: Array) -> Reckoned:
    """The whole of a trade at once, a stretch of rows at a time so that the columns stay in the processor's cache."""

    def stretch(first: int) -> tuple[Settled, Array, Array, Array]:
        some = slice(first, first + _CHUNK)
        interest, settled = _settle(terms, rows[some], settle_dates[some], face_minor[some], price_e12[some])
        return settled, interest.previous, interest.next, schedules.payment_dates(terms, rows[some], interest.next)

    starts = range(0, len(rows), _CHUNK)
    # numpy lets go of the interpreter in long operations, so two stretches are reckoned at once; their order is kept
    with ThreadPoolExecutor(2) as pool:
        parts = list(pool.map(stretch, starts))
    if not parts:
        interest, settled = _settle(terms, rows, settle_dates, face_minor, price_e12)
        return Reckoned(settled, interest.previous, interest.next, interest.next)
    whole = Settled(**{name: np.concatenate([getattr(p[0], name) for p in parts]) for name in vars(parts[0][0])})
    return Reckoned(whole, *(np.concatenate([p[place] for p in parts]) for place in (1, 2, 3)))
