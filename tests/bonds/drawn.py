"""Bonds drawn at random, as rows of bonds.csv and as the same bonds in QuantLib, each with a day to settle on."""

from __future__ import annotations

import random
from dataclasses import dataclass
from datetime import date, timedelta
from typing import Any

import QuantLib as ql

COUNTS: dict[str, Any] = {
    "Act/Act ICMA": lambda schedule, last: ql.ActualActual(ql.ActualActual.ISMA, schedule),
    "Act/Act ISDA": lambda schedule, last: ql.ActualActual(ql.ActualActual.ISDA),
    "Act/360": lambda schedule, last: ql.Actual360(),
    "Act/365F": lambda schedule, last: ql.Actual365Fixed(),
    "30/360": lambda schedule, last: ql.Thirty360(ql.Thirty360.BondBasis),
    "30/360 US": lambda schedule, last: ql.Thirty360(ql.Thirty360.USA),
    "30E/360": lambda schedule, last: ql.Thirty360(ql.Thirty360.European),
    "30E/360 ISDA": lambda schedule, last: ql.Thirty360(ql.Thirty360.ISDA, last),
    "Act/365 Canada": lambda schedule, last: ql.Actual365Fixed(ql.Actual365Fixed.Canadian),
    "NL/365": lambda schedule, last: ql.Actual365Fixed(ql.Actual365Fixed.NoLeap),
    "Bus/252": lambda schedule, last: ql.Business252(ql.TARGET()),
}
PAYMENTS = {
    "unadjusted": ql.Unadjusted, "following": ql.Following, "modified following": ql.ModifiedFollowing,
    "preceding": ql.Preceding, "modified preceding": ql.ModifiedPreceding, "nearest": ql.Nearest,
}  # fmt: skip
CALENDARS = {
    "XECB": ql.TARGET(), "XSIF": ql.UnitedStates(ql.UnitedStates.GovernmentBond),
    "GB-ENG": ql.UnitedKingdom(ql.UnitedKingdom.Settlement),
}  # fmt: skip
FREQUENCIES = {1: ql.Annual, 2: ql.Semiannual, 4: ql.Quarterly, 12: ql.Monthly}


@dataclass(frozen=True)
class Drawn:
    """One bond: its row, its terms in plain form, the QuantLib bond (face 100) and a day to settle on."""

    row: dict[str, str]
    first: date | None
    before_last: date | None
    frequency: int
    month_end: bool
    bond: Any
    schedule: Any
    settle: date


def quant(day: date) -> Any:
    return ql.Date(day.day, day.month, day.year)


def plain(day: Any) -> date:
    return date(day.year(), day.month(), day.dayOfMonth())


def last_of_month(day: date) -> bool:
    return (day + timedelta(days=1)).day == 1


def months_before(day: date, months: int, month_end: bool) -> date:
    """A whole number of months before a day, kept at the month's end where asked."""
    index = day.year * 12 + day.month - 1 - months
    first = date(index // 12, index % 12 + 1, 1)
    last = (first + timedelta(days=32)).replace(day=1) - timedelta(days=1)
    return last if month_end else first.replace(day=min(day.day, last.day))


def drawn(seed: int) -> Drawn:
    """The bond of a seed."""
    rng = random.Random(seed)
    count = rng.choice(list(COUNTS))
    frequency = rng.choice([1, 2, 2, 2, 4, 12])
    maturity = date(2006, 1, 1) + timedelta(days=rng.randrange(365 * 50))
    if rng.random() < 0.25:
        maturity = maturity.replace(day=28) + timedelta(days=4)
        maturity -= timedelta(days=maturity.day)
    month_end = rng.random() < 0.5 and last_of_month(maturity)
    # calendars of the two libraries are known to agree from 2000 on
    step = 12 // frequency
    coupons = rng.randrange(2, min(60, (maturity.year - 2002) * frequency))
    anchor, before_last = maturity, None
    if rng.random() < 0.2:
        # short or long last period: the grid hangs on the last regular coupon
        before_last = maturity - timedelta(days=rng.randrange(20, int(step * 45)))
        month_end = rng.random() < 0.5 and last_of_month(before_last)
        anchor = before_last
    first = None
    start = months_before(anchor, step * coupons, month_end)
    if rng.random() < 0.4:
        # short or long first period: the first coupon lies on the grid, interest begins on any day before it
        first = months_before(anchor, step * (coupons - 1), month_end)
        start = first - timedelta(days=rng.randrange(5, int(step * 58)))
    adjustment, calendar = rng.choice(list(PAYMENTS)), rng.choice(list(CALENDARS))
    rate = rng.randrange(1, 80) / 8
    schedule = ql.Schedule(
        quant(start), quant(maturity), ql.Period(FREQUENCIES[frequency]), ql.NullCalendar(), ql.Unadjusted, ql.Unadjusted,
        ql.DateGeneration.Backward, month_end, quant(first) if first else ql.Date(), quant(before_last) if before_last else ql.Date(),
    )  # fmt: skip
    counter = COUNTS[count](schedule, quant(maturity))
    bond = ql.FixedRateBond(0, 100.0, schedule, [rate / 100], counter, PAYMENTS[adjustment], 100.0, quant(start), CALENDARS[calendar])
    settle = start + timedelta(days=rng.randrange((maturity - start).days))
    row = {
        "kind": "fixed", "coupon_rate": str(rate), "frequency": str(frequency), "day_count": count,
        "accrual_start": start.isoformat(), "first_coupon": first.isoformat() if first else "",
        "last_regular_coupon": before_last.isoformat() if before_last else "", "maturity": maturity.isoformat(),
        "end_of_month": "yes" if month_end else "no", "payment_adjustment": adjustment,
        "calendar": "XECB" if count == "Bus/252" else calendar,
    }  # fmt: skip
    if count == "Bus/252":
        bond = ql.FixedRateBond(0, 100.0, schedule, [rate / 100], counter, PAYMENTS[adjustment], 100.0, quant(start), ql.TARGET())
    return Drawn(row, first, before_last, frequency, month_end, bond, schedule, settle)
