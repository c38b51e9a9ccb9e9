"""Price and yield tell the same thing in two ways; which formula joins them is a market's habit.

Conventions: `street` discounts by compound interest over coupon periods, with simple interest once only the last payment is left
(SIA Standard Securities Calculation Methods, from memory; OpenFormula PRICE does likewise); `treasury` uses simple interest in the broken
first period and takes off accrued rounded to six decimals per 100 (31 CFR 356 Appendix B); `simple` is simple interest to maturity
(the Japanese simple yield for coupon bonds, money-market yield for zeros); `annual` compounds yearly; `discount` is a rate off
100 for the days on the bond's basis; `investment` is the bill's coupon-equivalent rate of the same appendix, quadratic beyond
half a year. The street yield of a zero is simple interest on the bond's basis where its market says so (bills), else compound.

All figures are float64, per 100 of face, yields in percent. A yield that does not exist gives NaN, never an exception; `discount` and
`investment` do not exist for bonds with coupons. Only compound yields are searched for (Newton); the others have formulas.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds import compound, flows
from reconciler.bonds.dates import leap_days_through
from reconciler.bonds.daycounts import NUMBERS
from reconciler.bonds.flows import Flows
from reconciler.bonds.terms import Terms

Array = np.ndarray[Any, Any]

YIELD_CONVENTIONS = ("street", "treasury", "simple", "annual", "discount", "investment")
STREET, TREASURY, SIMPLE, ANNUAL, DISCOUNT, INVESTMENT = range(6)

_LAST_PERIOD, _NOTHING = 6, 7
"""Formulas beside those of the conventions: the street's simple interest in the last period, and none."""

_CHUNK = 65_536


@dataclass(frozen=True)
class _Asked:
    """Some bonds on their settlement days with the formula that each convention comes down to."""

    formula: Array
    flows: Flows
    basis: Array
    year: Array
    treasury: Array

    @property
    def taken_off(self) -> Array:
        """Accrued interest between full and clean price."""
        return np.where(self.treasury, self.flows.accrued_printed, self.flows.accrued)


def _asked(terms: Terms, rows: Array, settle: Array, convention: Array) -> _Asked:
    paid = flows.of(terms, rows, settle)
    formula = np.array(convention, np.int64)
    street = formula == STREET
    formula[street & paid.simple] = SIMPLE
    formula[street & paid.last_period] = _LAST_PERIOD
    formula[((formula == DISCOUNT) | (formula == INVESTMENT)) & ~paid.zero | ~paid.sound] = _NOTHING
    basis = np.where(terms.day_count[rows] == NUMBERS["Act/365F"], 365.0, 360.0)
    return _Asked(formula, paid, basis, _days_in_year(settle), np.asarray(convention) == TREASURY)


def _days_in_year(settle: Array) -> Array:
    """365, or 366 where a 29 February falls in the year that follows settlement (31 CFR 356 Appendix B)."""
    month = settle.astype("datetime64[M]")
    later = (month + 12).astype("datetime64[D]") + (settle - month.astype("datetime64[D]"))
    return 365.0 + (leap_days_through(later) > leap_days_through(settle))


def _full(asked: _Asked, yields: Array) -> tuple[Array, Array]:
    """Price with accrued per 100 at each yield (a plain number, 0.05 for 5 %), and its slope; NaN where there is none."""
    price, slope = np.full(len(yields), np.nan), np.full(len(yields), np.nan)
    formula, paid = asked.formula, asked.flows
    with np.errstate(all="ignore"):
        for which, value in (
            (SIMPLE, _simple), (DISCOUNT, _discount), (INVESTMENT, _investment), (_LAST_PERIOD, _last_period),
        ):  # fmt: skip
            some = np.flatnonzero(formula == which)
            if len(some):
                price[some], slope[some] = value(asked, some, yields[some])
        some = np.flatnonzero((formula == STREET) | (formula == TREASURY) | (formula == ANNUAL))
        if len(some):
            price[some], slope[some] = compound.value(_compounded(asked, some), paid.frequency[some], yields[some])
    return price, slope


def _yields(asked: _Asked, target: Array) -> Array:
    """The yield (a plain number) whose full price is `target`; NaN where there is none."""
    out = np.full(len(target), np.nan)
    formula, paid = asked.formula, asked.flows
    with np.errstate(all="ignore"):
        for which, solved in (
            (SIMPLE, _simple_yield), (DISCOUNT, _discount_yield), (INVESTMENT, _investment_yield), (_LAST_PERIOD, _last_yield),
        ):  # fmt: skip
            some = np.flatnonzero(formula == which)
            if len(some):
                out[some] = solved(asked, some, target[some])
        some = np.flatnonzero((formula == STREET) | (formula == TREASURY) | (formula == ANNUAL))
        if len(some):
            out[some] = compound.solve(_compounded(asked, some), paid.frequency[some], target[some])
    return np.where(np.isfinite(out) & (target > 0), out, np.nan)


def _compounded(asked: _Asked, some: Array) -> compound.Compounded:
    return compound.of(asked.flows, some, asked.formula[some] == TREASURY, asked.formula[some] == ANNUAL)


# --- the conventions with a formula: price and slope, and the yield back -------------------------------------------------------


def _simple_terms(asked: _Asked, some: Array) -> tuple[Array, Array, Array]:
    """What is paid in all, the years it takes, and the accrued that a coupon bond's clean price leaves out."""
    paid = asked.flows
    zero = paid.zero[some]
    years = paid.days[some] / np.where(zero, asked.basis[some], 365.0)
    total = paid.redemption[some] + np.where(zero, 0.0, paid.coupon_rate[some] * years)
    return total, years, np.where(zero, 0.0, paid.accrued[some])


def _simple(asked: _Asked, some: Array, yields: Array) -> tuple[Array, Array]:
    total, years, accrued = _simple_terms(asked, some)
    clean = total / (1 + yields * years)
    return np.where(1 + yields * years > 0, clean + accrued, np.nan), -clean * years / (1 + yields * years)


def _simple_yield(asked: _Asked, some: Array, target: Array) -> Array:
    total, years, accrued = _simple_terms(asked, some)
    result: Array = (total / (target - accrued) - 1) / years
    return result


def _discount(asked: _Asked, some: Array, yields: Array) -> tuple[Array, Array]:
    redemption, share = asked.flows.redemption[some], asked.flows.days[some] / asked.basis[some]
    return redemption * (1 - yields * share), -redemption * share


def _discount_yield(asked: _Asked, some: Array, target: Array) -> Array:
    return (1 - target / asked.flows.redemption[some]) * asked.basis[some] / asked.flows.days[some]


def _investment(asked: _Asked, some: Array, yields: Array) -> tuple[Array, Array]:
    redemption, days, year = asked.flows.redemption[some], asked.flows.days[some], asked.year[some]
    long = days > year / 2
    # beyond half a year the rate compounds once: simple interest for half a year, and again for the days beyond it
    share = np.where(long, days / year - 0.5, days / year)
    one, half = 1 + yields * share, np.where(long, 1 + yields / 2, 1.0)
    price = redemption / (one * half)
    return price, -price * (share / one + np.where(long, 0.5 / half, 0.0))


def _investment_yield(asked: _Asked, some: Array, target: Array) -> Array:
    redemption, days, year = asked.flows.redemption[some], asked.flows.days[some], asked.year[some]
    linear, long = days / year, days > year / 2
    square = np.where(long, linear / 2 - 0.25, 0.0)
    gain = redemption / target - 1
    # the root of square x^2 + linear x = gain that stays right when the square vanishes
    return 2 * gain / (linear + np.sqrt(linear * linear + 4 * square * gain))


def _last_period(asked: _Asked, some: Array, yields: Array) -> tuple[Array, Array]:
    paid = asked.flows
    total, share = paid.first[some] + paid.last[some], paid.last_time[some] / paid.frequency[some]
    price = total / (1 + share * yields)
    return np.where(1 + share * yields > 0, price, np.nan), -price * share / (1 + share * yields)


def _last_yield(asked: _Asked, some: Array, target: Array) -> Array:
    paid = asked.flows
    return ((paid.first[some] + paid.last[some]) / target - 1) * paid.frequency[some] / paid.last_time[some]


# --- what others ask -----------------------------------------------------------------------------------------------------------


def _columns(rows: Array, settle: Array, convention: Array | int) -> tuple[Array, Array, Array]:
    rows = np.asarray(rows)
    return rows, np.asarray(settle, "datetime64[D]"), np.broadcast_to(np.asarray(convention, np.int64), rows.shape)


def _stretches(length: int) -> list[slice]:
    return [slice(first, first + _CHUNK) for first in range(0, length, _CHUNK)]


def price_from_yield(
    terms: Terms, rows: Array, settle: Array, yield_pct: Array, convention: Array | int = STREET
) -> Array:
    """Clean price per 100 of each bond at each yield in percent; NaN where there is none."""
    rows, settle, kind = _columns(rows, settle, convention)
    at, out = np.asarray(yield_pct, np.float64) / 100, np.empty(len(rows))
    for s in _stretches(len(rows)):
        asked = _asked(terms, rows[s], settle[s], kind[s])
        out[s] = _full(asked, at[s])[0] - asked.taken_off
    return out


def yield_from_price(terms: Terms, rows: Array, settle: Array, clean: Array, convention: Array | int = STREET) -> Array:
    """Yield in percent of each bond at each clean price per 100; NaN where no yield (compound: above -99 %) gives it."""
    rows, settle, kind = _columns(rows, settle, convention)
    clean, out = np.asarray(clean, np.float64), np.empty(len(rows))
    for s in _stretches(len(rows)):
        asked = _asked(terms, rows[s], settle[s], kind[s])
        out[s] = _yields(asked, clean[s] + asked.taken_off) * 100
    return out


def risk(
    terms: Terms, rows: Array, settle: Array, yield_pct: Array, convention: Array | int = STREET
) -> tuple[Array, Array]:
    """Modified duration in years and what one basis point moves, both of the price with accrued, per 100 of face."""
    rows, settle, kind = _columns(rows, settle, convention)
    at, duration, point = np.asarray(yield_pct, np.float64) / 100, np.empty(len(rows)), np.empty(len(rows))
    for s in _stretches(len(rows)):
        price, slope = _full(_asked(terms, rows[s], settle[s], kind[s]), at[s])
        duration[s], point[s] = -slope / price, -slope / 10_000
    return duration, point


def dirty_at(terms: Terms, rows: Array, settle: Array, yield_pct: Array, convention: Array | int = STREET) -> Array:
    """Price with accrued per 100 at each yield in percent, for revaluing a position; NaN where there is none."""
    rows, settle, kind = _columns(rows, settle, convention)
    at, out = np.asarray(yield_pct, np.float64) / 100, np.empty(len(rows))
    for s in _stretches(len(rows)):
        out[s] = _full(_asked(terms, rows[s], settle[s], kind[s]), at[s])[0]
    return out
