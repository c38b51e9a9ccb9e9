"""Price and yield tell the same thing in two ways; which formula joins them is a market's habit.

Conventions: `street` discounts by compound interest over coupon periods, with simple interest once only the last payment is left
(SIA Standard Securities Calculation Methods, from memory); `treasury` uses simple interest in the broken first period and takes off accrued
rounded to six decimals per 100 (31 CFR 356 Appendix B); `simple` is simple interest to maturity (the Japanese simple yield
for coupon bonds, money-market yield for zeros); `annual` compounds yearly; `discount` is a rate off 100 for the days on the
bond's basis; `investment` is the bill's coupon-equivalent rate of 31 CFR 356 Appendix B, quadratic beyond half a year.

All figures are float64, per 100 of face, yields in percent. A yield that does not exist gives NaN, never an exception.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.bonds import flows
from reconciler.bonds.dates import leap_days_through
from reconciler.bonds.daycounts import NUMBERS
from reconciler.bonds.flows import Flows
from reconciler.bonds.terms import Terms

Array = np.ndarray[Any, Any]

YIELD_CONVENTIONS = ("street", "treasury", "simple", "annual", "discount", "investment")
STREET, TREASURY, SIMPLE, ANNUAL, DISCOUNT, INVESTMENT = range(6)

_STEP = 1e-5
"""Half width in yield (a plain number) of the differences that durations are taken from."""


def _column(convention: Array | int, length: int) -> Array:
    return np.broadcast_to(np.asarray(convention, np.int64), (length,))


def _basis(terms: Terms, rows: Array) -> Array:
    return np.where(terms.day_count[rows] == NUMBERS["Act/365F"], 365.0, 360.0)


def full_price(terms: Terms, rows: Array, settle: Array, yields: Array, convention: Array | int, paid: Flows) -> Array:
    """Price with accrued per 100 at each yield (a plain number, 0.05 for 5 %)."""
    kind = _column(convention, len(rows))
    days = (terms.maturity[rows] - np.asarray(settle, "datetime64[D]")).astype(np.float64)
    redemption = terms.redemption_price_e12[rows] / 1e12
    zero = terms.frequency[rows] == 0
    with np.errstate(all="ignore"):
        out = _compound(terms, rows, yields, kind, paid)
        plain = zero & ((kind == SIMPLE) | ((kind == STREET) & ~flows.market_compounds(terms, rows)))
        out = np.where(plain, redemption / (1 + yields * days / _basis(terms, rows)), out)
        out = np.where(kind == DISCOUNT, redemption * (1 - yields * days / _basis(terms, rows)), out)
        out = np.where(kind == INVESTMENT, _investment(yields, days, settle, redemption), out)
        out = np.where((kind == SIMPLE) & ~zero, _simple(terms, rows, yields, redemption, paid), out)
    return np.where(paid.sound, out, np.nan)


def _compound(terms: Terms, rows: Array, yields: Array, kind: Array, paid: Flows) -> Array:
    """Street, Treasury and annual yields: payments times discount factors, added up per row."""
    owner, count = paid.owner, len(rows)
    frequency = paid.frequency.astype(np.float64)
    per_period = yields / frequency
    log_growth = np.where(kind == ANNUAL, np.log1p(yields) / frequency, np.log1p(per_period))
    treasury = kind == TREASURY
    # the broken period counts as simple interest: for the Treasury always, on the street when it is the last one
    last = (paid.coupons <= 1) & (terms.frequency[rows] > 0) & (kind == STREET)
    final_time = np.zeros(count)
    np.maximum.at(final_time, owner, paid.time)
    last &= final_time <= 1
    time = paid.time - np.where(treasury, paid.broken, 0.0)[owner]
    value = paid.amount * np.exp(-time * log_growth[owner])
    total = np.bincount(owner, weights=value, minlength=count)
    total = np.where(treasury, total / (1 + paid.broken * per_period), total)
    undiscounted = np.bincount(owner, weights=paid.amount, minlength=count)
    return np.where(last, undiscounted / (1 + final_time * per_period), total)


def _days_in_year(settle: Array) -> Array:
    """365, or 366 where a 29 February falls in the year that follows settlement (31 CFR 356 Appendix B)."""
    day = np.asarray(settle, "datetime64[D]")
    month = day.astype("datetime64[M]")
    later = (month + 12).astype("datetime64[D]") + (day - month.astype("datetime64[D]"))
    return 365.0 + (leap_days_through(later) > leap_days_through(day))


def _investment(yields: Array, days: Array, settle: Array, redemption: Array) -> Array:
    year = _days_in_year(settle)
    short = redemption / (1 + yields * days / year)
    long = redemption / ((1 + (days - year / 2) * yields / year) * (1 + yields / 2))
    return np.where(days > year / 2, long, short)


def _simple(terms: Terms, rows: Array, yields: Array, redemption: Array, paid: Flows) -> Array:
    coupon = np.where(terms.rate_e9[rows] < 0, 0, terms.rate_e9[rows]) / 1e9
    clean = (redemption + coupon * paid.years) / (1 + yields * paid.years)
    return clean + paid.accrued


def _taken_off(kind: Array, paid: Flows) -> Array:
    return np.where(kind == TREASURY, np.round(paid.accrued, 6), paid.accrued)


def price_from_yield(
    terms: Terms, rows: Array, settle: Array, yield_pct: Array, convention: Array | int = STREET
) -> Array:
    """Clean price per 100 of each bond at each yield in percent; NaN where there is none."""
    rows, settle = np.asarray(rows), np.asarray(settle, "datetime64[D]")
    paid = flows.of(terms, rows, settle)
    kind = _column(convention, len(rows))
    return full_price(terms, rows, settle, np.asarray(yield_pct) / 100, kind, paid) - _taken_off(kind, paid)


def yield_from_price(
    terms: Terms, rows: Array, settle: Array, clean: Array, convention: Array | int = STREET
) -> Array:
    """Yield in percent of each bond at each clean price per 100; NaN where no yield between -99 % and 1,000 % gives it."""
    rows, settle = np.asarray(rows), np.asarray(settle, "datetime64[D]")
    paid = flows.of(terms, rows, settle)
    kind = _column(convention, len(rows))
    target = np.asarray(clean, np.float64) + _taken_off(kind, paid)
    return solve(terms, rows, settle, kind, paid, target) * 100


def solve(terms: Terms, rows: Array, settle: Array, kind: Array, paid: Flows, target: Array) -> Array:
    """The yield (a plain number) whose full price is `target`: Newton on the price, kept inside a bracket that closes."""
    low, high = np.full(len(rows), -0.99), np.full(len(rows), 10.0)
    guess = np.full(len(rows), 0.05)
    with np.errstate(all="ignore"):
        for _ in range(100):
            here = full_price(terms, rows, settle, guess, kind, paid)
            over = here > target
            low, high = np.where(over, guess, low), np.where(over, high, guess)
            slope = (full_price(terms, rows, settle, guess + 1e-7, kind, paid) - here) / 1e-7
            step = guess - (here - target) / slope
            inside = np.isfinite(step) & (step > low) & (step < high)
            following = np.where(inside, step, (low + high) / 2)
            moved = np.abs(following - guess)
            guess = np.where(here == target, guess, following)
            if not (moved[paid.sound & np.isfinite(target)] > 1e-15).any():
                break
        reached = np.abs(full_price(terms, rows, settle, guess, kind, paid) - target) < 1e-8 * np.maximum(target, 1)
    return np.where(reached & paid.sound, guess, np.nan)


def risk(
    terms: Terms, rows: Array, settle: Array, yield_pct: Array, convention: Array | int = STREET
) -> tuple[Array, Array]:
    """Modified duration in years and what one basis point moves, both of the price with accrued, per 100 of face."""
    rows, settle = np.asarray(rows), np.asarray(settle, "datetime64[D]")
    paid = flows.of(terms, rows, settle)
    kind, at = _column(convention, len(rows)), np.asarray(yield_pct, np.float64) / 100
    here = full_price(terms, rows, settle, at, kind, paid)
    down = full_price(terms, rows, settle, at - _STEP, kind, paid)
    up = full_price(terms, rows, settle, at + _STEP, kind, paid)
    with np.errstate(all="ignore"):
        slope = (down - up) / (2 * _STEP)
        return slope / here, slope / 10_000


def dirty_at(
    terms: Terms, rows: Array, settle: Array, yield_pct: Array, convention: Array | int = STREET
) -> Array:
    """Price with accrued per 100 at each yield in percent, for revaluing a position."""
    rows, settle = np.asarray(rows), np.asarray(settle, "datetime64[D]")
    paid = flows.of(terms, rows, settle)
    kind = _column(convention, len(rows))
    return full_price(terms, rows, settle, np.asarray(yield_pct, np.float64) / 100, kind, paid)
