"""Interest runs from coupon to coupon: how much of it a seller is owed on a given day, and what each coupon pays.

Accrued interest is the coupon rate times the exact fraction of a year since the period began, on the face outstanding, rounded
once as the bond's terms say. From the ex-dividend date on the buyer does not get the coming coupon, so the accrued is that
fraction less the whole coupon: negative. A regular coupon under Act/Act ICMA, the 30/360 family and the Canadian rule is rate /
frequency; under the other day counts it is counted in days. Sources: daycounts, 31 CFR 356 Appendix B for odd periods, the
contract of files for the rest. What is not done: interest on interest, and accrual past maturity.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds import daycounts, schedules
from reconciler.bonds.schedules import Periods
from reconciler.bonds.terms import AMORTISING, LINKED, NAT, ONE, Terms, in_force
from reconciler.money import MISSING, down, half_up

Array = np.ndarray[Any, Any]

RATE = 100 * 10**9
"""A rate in percent x 10^9 over this is a plain number."""


@dataclass(frozen=True)
class Accrued:
    """Accrued interest: `minor` rounded as the terms say; face x rate x numerator / denominator before rounding (rate per RATE)."""

    days: Array
    minor: Array
    rate_e9: Array
    factor_e12: Array
    numerator: Array
    denominator: Array
    ex: Array
    previous: Array
    next: Array
    sound: Array


def _rates(terms: Terms, rows: Array, period_start: Array) -> Array:
    """The coupon rate in force at each period's start; MISSING for a floater without a fixing."""
    return in_force(terms.rate_offsets, terms.rate_from, terms.rate_e9s, rows, period_start, terms.rate_e9[rows])


def _fixed_on(periods: Periods) -> Array:
    """The day whose rate a period pays: its start, or the day that start was moved on to (fixings are told for either)."""
    return np.where(np.isnat(periods.start), NAT, np.maximum(periods.start, periods.accrual_start))


def factors(terms: Terms, rows: Array, dates: Array) -> Array:
    """Remaining factor or index ratio in force on each date, x 10^12."""
    return in_force(terms.factor_offsets, terms.factor_from, terms.factor_e12s, rows, dates, np.full(len(rows), ONE))


def coupon_fraction(terms: Terms, rows: Array, periods: Periods) -> tuple[Array, Array]:
    """The exact fraction of the annual rate that each whole period pays."""
    start, end = periods.accrual_start, periods.accrual_end
    part = schedules.parts(terms, rows, start, end, periods)
    above, below = daycounts.fraction(terms.day_count[rows], start, end, part, terms.calendars, terms.calendar[rows])
    even = daycounts.EVEN[terms.day_count[rows]] & periods.regular
    return np.where(even, 1, above), np.where(even, np.maximum(terms.frequency[rows], 1), below)


def accrued(terms: Terms, rows: Array, settle: Array, face_minor: Array) -> Accrued:
    """Accrued interest on each face (int64 minor units, positive) settled on each day.

    Zero for bonds without coupons and before the accrual start. `sound` is False where no rate is known, the terms are not sound,
    or the day lies on or after maturity; `minor` is MISSING there.
    """
    rows, settle = np.asarray(rows), np.asarray(settle, "datetime64[D]")
    periods = schedules.periods_accruing(terms, rows, settle)
    start, end = periods.accrual_start, periods.accrual_end
    pays = ~np.isnat(periods.start)
    until = np.minimum(np.maximum(settle, start), end)
    part = schedules.parts(terms, rows, start, until, periods)
    calendar = terms.calendar[rows]
    day_count = terms.day_count[rows]
    days = daycounts.accrued_days(day_count, start, until, part, terms.calendars, calendar)
    above, below = daycounts.fraction(day_count, start, until, part, terms.calendars, calendar)
    if terms.accrued_cap.any():
        above, below = _capped(terms, rows, periods, above, below)
    ex = np.zeros(len(rows), np.bool_)
    some = np.flatnonzero(pays & (terms.ex_days[rows] != MISSING))
    if len(some):
        ex[some] = settle[some] >= schedules.ex_dates(terms, rows[some], periods.end[some])
        days, above, below = _less_coupon(terms, rows, periods, np.flatnonzero(ex), days, above, below)
    rate = _rates(terms, rows, _fixed_on(periods))
    factor = factors(terms, rows, settle)
    sound = terms.sound[rows] & ~np.isnat(settle) & (settle < terms.maturity[rows]) & ~(pays & (rate == MISSING))
    rate = np.where(pays, rate, 0)
    above, below, days = np.where(pays, above, 0), np.where(pays, below, 1), np.where(pays, days, 0)
    minor = _rounded(terms, rows, face_minor, factor, rate, above, below)
    return Accrued(
        days, np.where(sound, minor, MISSING), rate, factor, above, below, ex, periods.start, periods.end, sound
    )


def _less_coupon(
    terms: Terms, rows: Array, periods: Periods, gone: Array, days: Array, above: Array, below: Array
) -> tuple[Array, Array, Array]:
    """The accrual of the rows at `gone` with their whole coupon taken off."""
    if not len(gone):
        return days, above, below
    some = Periods(**{name: column[gone] for name, column in vars(periods).items()})
    whole_above, whole_below = coupon_fraction(terms, rows[gone], some)
    part = schedules.parts(terms, rows[gone], some.accrual_start, some.accrual_end, some)
    day_count, calendar = terms.day_count[rows[gone]], terms.calendar[rows[gone]]
    full = daycounts.accrued_days(day_count, some.accrual_start, some.accrual_end, part, terms.calendars, calendar)
    days, above, below = days.copy(), above.copy(), below.copy()
    days[gone] -= full
    above[gone] = above[gone] * whole_below - whole_above * below[gone]
    below[gone] *= whole_below
    common = np.maximum(np.gcd(above[gone], below[gone]), 1)
    above[gone] //= common
    below[gone] //= common
    return days, above, below


def _rounded(
    terms: Terms, rows: Array, face: Array, factor: Array, rate: Array, above: Array, below: Array
) -> Array:
    """Face x factor x rate x fraction in minor units, rounded as each bond's terms say."""
    per, places, cut = terms.rounding_per[rows], terms.rounding_places[rows], terms.rounding_down[rows]
    ruled = (per > 0) | cut
    if not ruled.any():
        return _times(half_up, [face, rate, above], [RATE, below], factor)
    out = np.empty(len(rows), np.int64)
    plain = np.flatnonzero(~ruled)
    out[plain] = _times(half_up, [face[plain], rate[plain], above[plain]], [RATE, below[plain]], factor[plain])
    rule = (per * 100 + places) * 2 + cut
    for one in np.unique(rule[ruled]).tolist():
        w = np.flatnonzero(ruled & (rule == one))
        settle, of_face, decimals = down if one % 2 else half_up, one // 200, one // 2 % 100
        if of_face:
            # accrued per so much of face first, to so many decimals; then times the face
            scale = of_face * 10**decimals
            unit = _times(settle, [rate[w], above[w], scale], [RATE, below[w]], factor[w])
            out[w] = settle([face[w], unit], [scale])
        else:
            out[w] = _times(settle, [face[w], rate[w], above[w]], [RATE, below[w]], factor[w])
    return out


def _times(settle: Any, tops: list[Any], bottoms: list[Any], factor: Array) -> Array:
    """A rounded quotient times each row's factor; factors of one, nearly all there are, are left out of the reckoning."""
    found: Array = settle(tops, bottoms)
    w = np.flatnonzero(factor != ONE)
    if len(w):
        some = [part[w] if isinstance(part, np.ndarray) else part for part in (*tops, *bottoms)]
        found[w] = settle([*some[: len(tops)], factor[w]], [*some[len(tops) :], ONE])
    return found


def _capped(terms: Terms, rows: Array, periods: Periods, above: Array, below: Array) -> tuple[Array, Array]:
    """No more than a whole regular coupon, where the market says so (184 days of a Japanese half-year earn no more than 182.5)."""
    frequency = np.maximum(terms.frequency[rows], 1)
    over = terms.accrued_cap[rows] & periods.regular & (above * frequency > below)
    return np.where(over, 1, above), np.where(over, frequency, below)


def coupon_amounts(terms: Terms, rows: Array, unadjusted: Array, face_minor: Array) -> Array:
    """What each coupon (by its unadjusted date) pays on a face, int64 minor units; MISSING where no rate is known.

    Amortising bonds pay on the factor at the period's start, linked bonds on the index ratio of the coupon date.
    """
    rows, dates = np.asarray(rows), np.asarray(unadjusted, "datetime64[D]")
    face = np.broadcast_to(np.asarray(face_minor, np.int64), rows.shape)
    plain = _plainly_regular(terms, rows, dates)
    if not plain.any():
        return _any_coupon(terms, rows, dates, face)
    frequency = np.maximum(terms.frequency, 1)[rows]
    minor = half_up([face, np.where(plain, terms.rate_e9[rows], 0)], [RATE, frequency])
    odd = np.flatnonzero(~plain)
    if len(odd):
        minor[odd] = _any_coupon(terms, rows[odd], dates[odd], face[odd])
    return minor


def _plainly_regular(terms: Terms, rows: Array, dates: Array) -> Array:
    """Where a coupon is rate / frequency at first sight: fixed rate, well past the first coupon, not past the last regular one."""
    steps = (np.diff(terms.rate_offsets) > 0) | (np.diff(terms.factor_offsets) > 0)
    simple = daycounts.EVEN[terms.day_count] & (terms.frequency > 0) & (terms.rate_e9 != MISSING) & ~steps & terms.sound
    # more than a whole period after the first coupon, lest a first coupon off the grid broke the period
    since = np.where(np.isnat(terms.first_coupon), np.datetime64("1800-01-01"), terms.first_coupon + 31 * (12 // np.maximum(terms.frequency, 1)))
    return np.asarray(simple[rows] & (dates > since[rows]) & (dates <= terms.anchor[rows]))


def _any_coupon(terms: Terms, rows: Array, unadjusted: Array, face_minor: Array) -> Array:
    periods = schedules.period_ending(terms, rows, unadjusted)
    above, below = coupon_fraction(terms, rows, periods)
    rate = _rates(terms, rows, _fixed_on(periods))
    at = np.where(terms.kind[rows] == LINKED, unadjusted, periods.start)
    factor = factors(terms, rows, at)
    known = terms.sound[rows] & (rate != MISSING) & ~np.isnat(periods.start)
    minor = half_up([face_minor, np.where(known, rate, 0), above], [RATE, np.where(below > 0, below, 1)])
    w = np.flatnonzero(known & (factor != ONE))
    if len(w):
        minor[w] = half_up([face_minor[w], rate[w], above[w], factor[w]], [RATE, below[w], ONE])
    return np.where(known, minor, MISSING)


def redemption_amounts(terms: Terms, rows: Array, face_minor: Array) -> Array:
    """What each bond pays back at maturity on a face: the remaining factor, or the index ratio (at least par where the market says so)."""
    rows = np.asarray(rows)
    maturity = terms.maturity[rows]
    amortising = terms.kind[rows] == AMORTISING
    # a last step of the factor on the maturity date itself is what maturity pays
    factor = factors(terms, rows, np.where(amortising, maturity - 1, maturity))
    factor = np.where(terms.floor_at_par[rows], np.maximum(factor, ONE), factor)
    minor = half_up([face_minor, terms.redemption_price_e12[rows], factor], [100 * ONE, ONE])
    return np.where(terms.sound[rows], minor, MISSING)


@dataclass(frozen=True)
class PartialRedemptions:
    """Drops of amortising bonds' factors: bond row, date, payment date and how much of the face is paid back (x 10^12)."""

    bond_row: Array
    unadjusted: Array
    payment_date: Array
    drop_e12: Array

    def __len__(self) -> int:
        return len(self.bond_row)


def partial_redemptions(terms: Terms, rows: Array, first: np.datetime64, last: np.datetime64) -> PartialRedemptions:
    """Factor drops of the amortising bonds at `rows` that are paid in [first, last], before maturity."""
    wanted = np.zeros(len(terms), np.bool_)
    wanted[rows] = True
    owner = np.repeat(np.arange(len(terms)), np.diff(terms.factor_offsets))
    starts = terms.factor_from
    opens = np.zeros(len(owner), np.bool_)
    opens[terms.factor_offsets[:-1][np.diff(terms.factor_offsets) > 0]] = True
    before = np.where(opens, ONE, np.roll(terms.factor_e12s, 1)) if len(owner) else terms.factor_e12s
    drop = before - terms.factor_e12s
    keep = wanted[owner] & (terms.kind[owner] == AMORTISING) & (drop > 0) & (starts < terms.maturity[owner]) & terms.sound[owner]
    owner, starts, drop = owner[keep], starts[keep], drop[keep]
    paid = schedules.payment_dates(terms, owner, starts)
    inside = (paid >= first) & (paid <= last)
    return PartialRedemptions(owner[inside], starts[inside], paid[inside], drop[inside])


def partial_amounts(terms: Terms, rows: Array, drop_e12: Array, face_minor: Array) -> Array:
    """What a drop of the factor pays on a face, int64 minor units."""
    return half_up([face_minor, drop_e12, terms.redemption_price_e12[rows]], [ONE, 100 * ONE])
