"""Ways in which accrued interest and coupons come out wrong: another day count, another start, another end, a missed ex-dividend date,
another rounding, a stale rate.

Each variant takes the facts and gives interest (minor units) and days reckoned its way. Nearly all change one column of the
terms or one date and let the bond arithmetic do the rest; the few that follow no known rule (a fixed number of days in the
period) are reckoned from the exact fraction. Where a variant changes nothing for a bond it simply gives the right figure again.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from reconciler.bonds import accrual, daycounts, schedules
from reconciler.bonds.accrual import RATE
from reconciler.bonds.terms import ONE, last_of_month
from reconciler.breaks.causes.cases import COUPON, TRADE
from reconciler.breaks.causes.reckoning import Facts, accrue
from reconciler.breaks.causes.variants import Cause, Variant
from reconciler.money import MISSING, down, half_up

Array = np.ndarray[Any, Any]
Interest = tuple[Array, Array]
Make = Callable[[Facts], Interest]

_TERMS = "Quote the bond's own terms and ask for a corrected figure."
DAY_COUNT = Cause("another day count", "day count", _TERMS, 1.0)
ONE_DAY = Cause("accrued one day off", "accrual dates", "Interest runs up to, not including, the settlement date.", 0.7)
TO_TRADE = Cause("accrued to the trade date", "accrual dates", "Interest runs to the settlement date.", 0.6)
FROM_START = Cause("accrued from the issue", "accrual dates", "Interest runs from the last coupon date.", 0.4)
NOT_RESET = Cause("last coupon not taken off", "whole coupon", "The period's coupon was paid; interest starts anew.", 0.5)
EX_MISSED = Cause("ex-dividend date missed", "whole coupon", "Quote the ex-dividend rule; the coupon stays with the seller.", 0.9)
EX_WRONG = Cause("taken as ex-dividend", "whole coupon", "Quote the ex-dividend rule; the trade carries the coupon.", 0.7)
DEDUCTED = Cause("coupon deducted", "whole coupon", "Ask whether the coupon is claimed separately.", 0.4)
ADJUSTED = Cause("accrual dates adjusted", "accrual dates", "Quote whether the terms adjust the period's dates.", 0.5)
STUB = Cause("odd period taken as regular", "accrual dates", "Load the odd coupon's dates.", 0.6)
MONTH_END = Cause("month-end rule", "accrual dates", "Set the end-of-month rule as the terms say.", 0.4)
FREQUENCY = Cause("other coupon frequency", "coupon", "Check the payments a year.", 0.5)
OLD_RATE = Cause("rate of another period", "rate", "Load the rate in force.", 0.7)
CUT_RATE = Cause("coupon rate stored short", "rate", "Load the coupon rate with all its decimals.", 0.4)
PERIOD_DAYS = Cause("fixed days in the period", "day count", "The period's own days count.", 0.3)
ROUNDED = Cause("accrued rounded otherwise", "rounding", "Agree the rounding rule; ours is the market's.", 0.4)
FRACTION = Cause("accrual fraction rounded first", "rounding", "Agree where rounding takes place.", 0.3)
NO_CAP = Cause("cap at the coupon ignored", "day count", "Accrued never exceeds the coupon.", 0.5)
SIGN = Cause("sign of the accrued lost", "sign", "In the ex-dividend period accrued is negative.", 0.6)


class _Changed:
    """Interest under changed facts; `change` is the change alone, so that another cause can be put on top of it."""

    def __init__(self, change: Callable[[Facts], Facts]) -> None:
        self.change = change

    def __call__(self, facts: Facts) -> Interest:
        return accrue(self.change(facts))


def _terms(**columns: Callable[[Facts], Any]) -> _Changed:
    return _Changed(lambda facts: facts.with_terms(**{name: make(facts) for name, make in columns.items()}))


def _day_count(number: int) -> _Changed:
    return _terms(day_count=lambda f: np.full(len(f.terms), number, np.int8))


def _shifted(days: int) -> _Changed:
    return _Changed(lambda facts: facts.changed(date=facts.date + days))


def _traded(facts: Facts) -> Facts:
    return facts.changed(date=np.where(np.isnat(facts.trade_date), facts.date, facts.trade_date))


def _from_start(facts: Facts) -> Facts:
    terms = facts.terms
    return facts.with_terms(first_coupon=np.where(np.isnat(terms.accrual_start), terms.first_coupon, terms.maturity))


def _whole_coupon(facts: Facts, sign: int) -> Interest:
    """Interest with the coupon of the period (of the one just ended, on its first days) put on or taken off."""
    minor, days = accrue(facts)
    t = np.flatnonzero(facts.kind == TRADE)
    if not len(t):
        return minor, days
    rows = facts.bond_row[t]
    periods = schedules.periods_at(facts.terms, rows, facts.date[t])
    pays = np.flatnonzero(~np.isnat(periods.end))
    coupon = np.zeros(len(t), np.int64)
    coupon[pays] = accrual.coupon_amounts(facts.terms, rows[pays], periods.end[pays], facts.face[t[pays]])
    length = np.where(np.isnat(periods.end), 0, (periods.accrual_end - periods.accrual_start).astype(np.int64))
    minor, days = minor.copy(), days.copy()
    known = (coupon != MISSING) & (minor[t] != MISSING)
    minor[t] = np.where(known, minor[t] + sign * coupon, minor[t])
    days[t] = np.where(known & (days[t] != MISSING), days[t] + sign * length, days[t])
    return minor, days


def _only(make: Make, where: Callable[[Facts], Array]) -> Make:
    """A variant where it can be meant; elsewhere the right figures."""

    def limited(facts: Facts) -> Interest:
        minor, days = make(facts)
        right, right_days = accrue(facts)
        here = where(facts)
        return np.where(here, minor, right), np.where(here, days, right_days)

    return limited


def _is_ex(facts: Facts) -> Array:
    out = np.zeros(len(facts.kind), np.bool_)
    t, found = _exact(facts)
    out[t] = found.ex
    return out


def _has_ex_rule(facts: Facts) -> Array:
    return np.asarray((facts.terms.ex_days[facts.bond_row] != MISSING) & ~_is_ex(facts))


def _with_last_coupon(facts: Facts) -> Interest:
    """Interest with the coupon of the period before still in it."""
    minor, days = accrue(facts)
    t = np.flatnonzero(facts.kind == TRADE)
    rows = facts.bond_row[t]
    periods = schedules.periods_at(facts.terms, rows, facts.date[t])
    begin = facts.terms.accrual_start[rows]
    some = np.flatnonzero(~np.isnat(periods.start) & (np.isnat(begin) | (periods.start > begin)))
    if not len(some):
        return minor, days
    minor, days = minor.copy(), days.copy()
    at, bonds, start = t[some], rows[some], periods.start[some]
    before = schedules.period_ending(facts.terms, bonds, start)
    coupon = accrual.coupon_amounts(facts.terms, bonds, start, facts.face[at])
    known = (coupon != MISSING) & (minor[at] != MISSING)
    minor[at] = np.where(known, minor[at] + coupon, minor[at])
    days[at] = np.where(known, days[at] + (before.accrual_end - before.accrual_start).astype(np.int64), days[at])
    return minor, days


def _flat(times: int) -> Make:
    """A coupon of rate over so many payments a year (0: the bond's own), whatever the length of its period."""

    def make(facts: Facts) -> Interest:
        minor, days = accrue(facts)
        c = np.flatnonzero(facts.kind == COUPON)
        rows = facts.bond_row[c]
        periods = schedules.period_ending(facts.terms, rows, facts.coupon_date[c])
        start = np.where(np.isnat(periods.start), facts.coupon_date[c], periods.start)
        found = accrual.accrued(facts.terms, rows, start, facts.face[c])
        frequency = np.maximum(facts.terms.frequency[rows], 1) if times == 0 else np.full(len(c), times)
        minor = minor.copy()
        minor[c] = np.where(found.sound, half_up([facts.face[c], found.rate_e9, found.factor_e12], [RATE, frequency, ONE]), minor[c])
        return minor, days

    return make


def _negative(facts: Facts) -> Interest:
    minor, days = accrue(facts)
    return np.where((minor == MISSING) | (minor > 0), minor, -minor), np.where(days == MISSING, days, np.abs(days))


def _regular(facts: Facts) -> Interest:
    terms = facts.terms
    nowhere = np.full(len(terms), np.datetime64("NaT", "D"))
    return accrue(facts.with_terms(accrual_start=nowhere, first_coupon=nowhere))


def _other_rate(step: int) -> Make:
    """Interest on the rate of the period before (step -1) or after (+1), for bonds whose rate changes."""

    def make(facts: Facts) -> Interest:
        terms = facts.terms
        if not len(terms.rate_e9s):
            return accrue(facts)
        first = terms.rate_offsets[:-1][np.diff(terms.rate_offsets) > 0]
        last = terms.rate_offsets[1:][np.diff(terms.rate_offsets) > 0] - 1
        moved = np.roll(terms.rate_e9s, -step)
        owner = np.repeat(np.arange(len(terms)), np.diff(terms.rate_offsets))
        edge = first if step < 0 else last
        moved[edge] = np.where((step < 0) & (terms.rate_e9[owner[edge]] != MISSING), terms.rate_e9[owner[edge]], terms.rate_e9s[edge])
        return accrue(facts.with_terms(rate_e9s=moved))

    return make


def _rate_places(places: int, settle: Callable[..., Array]) -> Make:
    step = 10 ** (9 - places)

    def short(rates: Array) -> Array:
        return np.where(rates == MISSING, MISSING, settle([np.where(rates == MISSING, 0, rates)], [step]) * step)

    return _terms(rate_e9=lambda f: short(f.terms.rate_e9), rate_e9s=lambda f: short(f.terms.rate_e9s))


def _rounding(per: int, places: int, cut: bool) -> Make:
    return _terms(
        rounding_per=lambda f: np.full(len(f.terms), per),
        rounding_places=lambda f: np.full(len(f.terms), places),
        rounding_down=lambda f: np.full(len(f.terms), cut),
    )


def _per_piece(piece: int, settle: Callable[..., Array]) -> Make:
    """Interest rounded to the minor unit on each piece of face (major units), then times the number of pieces."""

    def make(facts: Facts) -> Interest:
        minor, days = accrue(facts)
        one = piece * 10 ** facts.digits.astype(np.int64)
        fits = (facts.face != MISSING) & (facts.face % one == 0) & (minor != MISSING)
        unit, _days = accrue(facts.changed(face=one))
        if settle is down:
            fine, _days = accrue(facts.changed(face=one * 1000))
            unit = np.where(fine == MISSING, MISSING, np.sign(fine) * (np.abs(fine) // 1000))
        return np.where(fits & (unit != MISSING), unit * (facts.face // one), minor), days

    return make


def _exact(facts: Facts) -> tuple[Array, Any]:
    t = np.flatnonzero(facts.kind == TRADE)
    return t, accrual.accrued(facts.terms, facts.bond_row[t], facts.date[t], facts.face[t])


def _fraction_places(places: int) -> Make:
    def make(facts: Facts) -> Interest:
        minor, days = accrue(facts)
        t, found = _exact(facts)
        share = half_up([found.numerator, 10**places], [found.denominator])
        minor = minor.copy()
        again = half_up([facts.face[t], found.rate_e9, share, found.factor_e12], [RATE, 10**places, ONE])
        minor[t] = np.where(found.sound, again, MISSING)
        return minor, days

    return make


def _over(basis: int, halves: bool = False) -> Make:
    """Interest on the actual days over a fixed basis: days of the year, or (halves) of the coupon period."""

    def make(facts: Facts) -> Interest:
        minor, days = accrue(facts)
        t, found = _exact(facts)
        pays = found.sound & (found.numerator != 0) & ~np.isnat(found.previous)
        actual = np.where(pays, (np.where(found.ex, facts.date[t] - found.next, facts.date[t] - found.previous)).astype(np.int64), 0)
        bottom = np.full(len(t), basis) if not halves else basis * np.maximum(facts.terms.frequency[facts.bond_row[t]], 1)
        minor = minor.copy()
        again = half_up([facts.face[t], found.rate_e9, actual * (2 if halves else 1), found.factor_e12], [RATE, bottom, ONE])
        minor[t] = np.where(pays, again, minor[t])
        return minor, days

    return make


def _month_end(facts: Facts) -> Interest:
    terms = facts.terms
    return accrue(facts.with_terms(end_of_month=np.where(last_of_month(terms.anchor), ~terms.end_of_month, terms.end_of_month)))


def _frequency(times: int) -> Make:
    return _terms(frequency=lambda f: np.where(f.terms.frequency > 0, times, 0))


_BOTH = (TRADE, COUPON)

WHOLE_COUPONS = (NOT_RESET, EX_MISSED, EX_WRONG, DEDUCTED)
"""Causes that put a whole coupon on or take it off."""

ACCRUALS: tuple[Variant, ...] = (
    *(
        Variant(DAY_COUNT, "accrual", f"the days are counted {entry.name}", _day_count(number), _BOTH,
                1.0 if entry.name in ("30/360", "Act/360", "Act/365F", "Act/Act ICMA") else 0.6 if entry.name == "30E/360" else 0.4)
        for number, entry in enumerate(daycounts.DAY_COUNTS)
    ),
    Variant(ONE_DAY, "accrual", "one day of interest is left out", _shifted(-1)),
    Variant(ONE_DAY, "accrual", "one day of interest too many is counted", _shifted(1)),
    Variant(ONE_DAY, "accrual", "two days of interest are left out", _shifted(-2), scale=0.3),
    Variant(ONE_DAY, "accrual", "two days of interest too many are counted", _shifted(2), scale=0.3),
    Variant(ONE_DAY, "accrual", "three days of interest are left out", _shifted(-3), scale=0.3),
    Variant(ONE_DAY, "accrual", "three days of interest too many are counted", _shifted(3), scale=0.3),
    Variant(TO_TRADE, "accrual", "interest is counted to the trade date", _Changed(_traded)),
    Variant(FROM_START, "accrual", "interest is counted from the start of accrual at issue", _Changed(_from_start)),
    Variant(EX_MISSED, "accrual", "the whole coupon is still counted in, as if there were no ex-dividend date",
            _terms(ex_days=lambda f: np.full(len(f.terms), MISSING))),
    Variant(EX_MISSED, "accrual", "the whole coupon is still counted in, put on after rounding",
            _only(lambda f: _whole_coupon(f, 1), _is_ex), scale=0.5),
    Variant(NOT_RESET, "accrual", "the last coupon is still counted in, as if it had not been paid",
            _only(_with_last_coupon, lambda f: ~_is_ex(f))),
    Variant(EX_WRONG, "accrual", "the whole coupon is taken off, as in the ex-dividend period",
            _only(lambda f: _whole_coupon(f, -1), _has_ex_rule)),
    Variant(DEDUCTED, "accrual", "the coming coupon is taken off, as between record and payment date",
            _only(lambda f: _whole_coupon(f, -1), lambda f: ~_is_ex(f) & ~_has_ex_rule(f)), scale=0.5),
    Variant(SIGN, "accrual", "the negative accrued is taken for positive", _negative),
    Variant(ADJUSTED, "accrual", "the period's dates are adjusted (or left unadjusted) against the terms",
            _terms(accrual_adjusted=lambda f: ~f.terms.accrual_adjusted), _BOTH),
    Variant(STUB, "accrual", "the odd period is taken for a regular one", _regular, _BOTH),
    Variant(STUB, "accrual", "the odd coupon is paid as a regular one", _flat(0), (COUPON,)),
    *(Variant(FREQUENCY, "accrual", f"the coupon of {n} payments a year is paid", _flat(n), (COUPON,)) for n in (1, 2, 4, 12)),
    Variant(MONTH_END, "accrual", "the end-of-month rule is applied the other way", _month_end, _BOTH),
    *(Variant(FREQUENCY, "accrual", f"{n} payments a year are assumed", _frequency(n), _BOTH) for n in (1, 2, 4, 12)),
    Variant(OLD_RATE, "accrual", "the rate of the period before is used", _other_rate(-1), _BOTH),
    Variant(OLD_RATE, "accrual", "the rate of the period after is used", _other_rate(1), _BOTH, 0.5),
    *(Variant(CUT_RATE, "accrual", f"the coupon rate is rounded to {k} decimals", _rate_places(k, half_up), _BOTH) for k in (0, 1, 2, 3)),
    *(Variant(CUT_RATE, "accrual", f"the coupon rate is cut to {k} decimals", _rate_places(k, down), _BOTH, 0.8) for k in (0, 1, 2, 3)),
    *(Variant(PERIOD_DAYS, "accrual", f"the half-year or period is taken as {d / 2:g} days", _over(d, True), scale=0.6)
      for d in (360, 362, 364, 365, 366, 368)),
    Variant(PERIOD_DAYS, "accrual", "the year is taken as 366 days", _over(366), scale=0.8),
    Variant(NO_CAP, "accrual", "accrued is not capped at the coupon", _terms(accrued_cap=lambda f: np.zeros(len(f.terms), np.bool_))),
    *(Variant(ROUNDED, "accrual", f"accrued is rounded to {k} decimals per 100 first", _rounding(100, k, False)) for k in range(2, 9)),
    *(Variant(ROUNDED, "accrual", f"accrued is cut to {k} decimals per 100 first", _rounding(100, k, True), scale=0.6) for k in range(2, 9)),
    Variant(ROUNDED, "accrual", "accrued is cut off instead of rounded", _rounding(0, 0, True)),
    *(Variant(ROUNDED, "accrual", f"interest is rounded on each {p:,} of face", _per_piece(p, half_up), _BOTH, 0.8)
      for p in (100, 1_000, 5_000, 10_000, 50_000, 100_000)),
    *(Variant(ROUNDED, "accrual", f"interest is cut off on each {p:,} of face", _per_piece(p, down), _BOTH, 0.4)
      for p in (100, 1_000, 5_000, 10_000, 50_000, 100_000)),
    *(Variant(FRACTION, "accrual", f"the fraction of the year is rounded to {k} decimals", _fraction_places(k)) for k in (4, 5, 6, 7, 8)),
)  # fmt: skip


_ALIKE = (
    ("30/360", "30/360 US", "30E/360", "30E/360 ISDA", "Act/Act ICMA"),
    ("Act/Act ICMA", "Act/Act ISDA", "Act/365F"),
    ("Act/360", "Act/365F"),
    ("Act/365F", "Act/365L", "Act/365 Canada", "NL/365"),
)
"""Day counts that are taken for each other in practice (common practice, no source)."""

OTHER_COUNT = {f"the days are counted {entry.name}": number for number, entry in enumerate(daycounts.DAY_COUNTS)}
"""Wording of a day-count variant -> the day count it counts by."""


def alike() -> Array:
    """True where the day count in the row is commonly taken for the one in the column."""
    names = [entry.name for entry in daycounts.DAY_COUNTS]
    return np.array([[any(one in group and other in group for group in _ALIKE) for other in names] for one in names])
