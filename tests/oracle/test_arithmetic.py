"""The second reckoning is itself held against published figures and QuantLib, or it could mislead all that leans on
it.
"""

from __future__ import annotations

import random
from datetime import date
from fractions import Fraction

import pytest
import QuantLib as ql

from tests.oracle.arithmetic import (
    Bond,
    Calendar,
    accrued,
    coupon_amount,
    fraction,
    isin,
    payment_date,
    period_at,
    periods,
    record_date,
)


def _bond(rate: str, frequency: int, start: str, maturity: str, **terms: object) -> Bond:
    calendar = terms.pop("calendar", Calendar("GB"))
    assert isinstance(calendar, Calendar)
    return Bond(
        "ZZ",
        "",
        "GBP",
        "fixed",
        date.fromisoformat(maturity),
        date.fromisoformat(start),
        calendar,
        rate=Fraction(rate),
        frequency=frequency,
        **terms,
    )  # type: ignore[arg-type]


# A gilt around its ex-dividend date, from QuantLib's published gilt test as copied in the project's reference values.
@pytest.mark.parametrize(
    ("settle", "per_hundred_million"), [("2013-05-29", 380219780), ("2013-05-30", -17582418), ("2013-05-31", -15384615)]
)
def test_gilt_without_its_dividend(settle: str, per_hundred_million: int) -> None:
    gilt = _bond("8", 2, "1996-02-29", "2021-06-07", ex_dividend="6b", first_coupon=date(1996, 6, 7))
    assert accrued(gilt, date.fromisoformat(settle), 100_000_000_00)[1] == per_hundred_million


# 31 CFR Part 356, Appendix B, section I: odd first interest payments per 1,000 (from memory, recomputed).
@pytest.mark.parametrize(
    ("rate", "issued", "first", "maturity", "per_billion"),
    [
        ("8.375", "1990-07-02", "1990-12-31", "1995-12-31", 41419837),
        ("7.875", "1990-12-03", "1991-08-15", "1996-02-15", 55210598),
    ],
)
def test_treasury_odd_first_payments(rate: str, issued: str, first: str, maturity: str, per_billion: int) -> None:
    bond = _bond(rate, 2, issued, maturity, end_of_month=True, first_coupon=date.fromisoformat(first))
    assert abs(coupon_amount(bond, periods(bond)[0], 10**12) / 1000 - per_billion) < 1


# ISDA memorandum on the Actual/Actual day count fraction (1999).
@pytest.mark.parametrize(
    ("start", "end", "maturity", "frequency", "last", "isda", "icma"),
    [
        ("2003-11-01", "2004-05-01", "2006-05-01", 2, None, 0.497724380567, 0.5),
        ("1999-02-01", "1999-07-01", "2002-07-01", 1, None, 0.41095890411, 0.41095890411),
        ("2002-08-15", "2003-07-15", "2006-07-15", 2, None, 0.915068493151, 0.915760869565),
        ("2000-01-30", "2000-06-30", "2000-06-30", 2, "2000-01-30", 0.415300546448, 0.417582417582),
    ],
)
def test_act_act(
    start: str, end: str, maturity: str, frequency: int, last: str | None, isda: float, icma: float
) -> None:
    first, regular = date.fromisoformat(start), date.fromisoformat(last) if last else None
    bond = _bond(
        "5", frequency, start, maturity, first_coupon=None if last else date.fromisoformat(end), last_regular=regular
    )
    period = next(p for p in periods(bond) if p.start == first)
    for rule, expected in (("Act/Act ISDA", isda), ("Act/Act ICMA", icma)):
        assert float(fraction(bond, period, first, date.fromisoformat(end), rule)) == pytest.approx(expected, abs=1e-11)


def test_identifiers_carry_their_check_digit() -> None:
    # ISO 6166; the specimens are in the project's reference values
    assert [isin("GB", "000999799"), isin("AU", "300TB0120"), isin("SE", "000567660")] == [
        "GB0009997999",
        "AU300TB01208",
        "SE0005676608",
    ]


def test_records_before_a_weekend_coupon_are_counted_day_by_day() -> None:
    bond = _bond("5", 1, "2020-03-28", "2030-03-28", calendar=Calendar("XECB"))
    assert record_date(bond, date(2026, 3, 28)) == date(2026, 3, 27)
    assert payment_date(bond, date(2026, 3, 28)) == date(2026, 3, 30)


_RULES = {
    "30/360": ql.Thirty360(ql.Thirty360.BondBasis),
    "30E/360": ql.Thirty360(ql.Thirty360.EurobondBasis),
    "Act/360": ql.Actual360(),
    "Act/365F": ql.Actual365Fixed(),
    "Act/Act ISDA": ql.ActualActual(ql.ActualActual.ISDA),
    "Act/Act ICMA": None,
}


def _quantlib(bond: Bond, issued: ql.Date) -> ql.FixedRateBond:
    maturity = ql.Date(bond.maturity.day, bond.maturity.month, bond.maturity.year)
    schedule = ql.Schedule(
        issued,
        maturity,
        ql.Period(12 // bond.frequency, ql.Months),
        ql.NullCalendar(),
        ql.Unadjusted,
        ql.Unadjusted,
        ql.DateGeneration.Backward,
        bond.end_of_month,
    )
    rule = _RULES[bond.day_count] or ql.ActualActual(ql.ActualActual.ISMA, schedule)
    return ql.FixedRateBond(0, 100.0, schedule, [float(bond.rate) / 100], rule, ql.Unadjusted)


def test_accrued_like_quantlib() -> None:
    """Short and regular first periods, six day counts, one day of one period each."""
    rng, told = random.Random(7), 0
    for _ in range(1500):
        day_count, frequency = rng.choice(list(_RULES)), rng.choice((1, 2, 4))
        start = date(rng.randint(2018, 2024), rng.randint(1, 12), rng.randint(1, 28))
        maturity = date(rng.randint(2028, 2050), rng.randint(1, 12), rng.randint(1, 28))
        bond = _bond(f"{rng.randint(1, 60)}/8", frequency, start.isoformat(), maturity.isoformat(), day_count=day_count)
        settle = date(2026, rng.randint(1, 12), rng.randint(1, 28))
        mine = accrued(bond, settle, 10**12)[1] / 10**10
        other = _quantlib(bond, ql.Date(start.day, start.month, start.year)).accruedAmount(
            ql.Date(settle.day, settle.month, settle.year)
        )
        assert mine == pytest.approx(other, abs=1e-8), (bond, settle)
        told += period_at(bond, settle) is not None
    assert told == 1500
