"""Random bonds and settlement dates against QuantLib: coupon dates, payment dates, accrued interest and coupons.

The figures must be equal; where they are not, the row must be one of a few systematic differences, each with its reason,
and each of them must occur, so that no reason outlives its cause.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from datetime import date, timedelta
from fractions import Fraction
from typing import Any

import numpy as np
import pytest
import QuantLib as ql

from reconciler.bonds import accrual, schedules
from tests.bonds.drawn import Drawn, drawn, last_of_month, months_before, plain, quant
from tests.bonds.made import days, made

# Good Fridays on which the bond market closes and QuantLib's GovernmentBond calendar does not (both libraries compared day by day).
GOOD_FRIDAYS = {date(2034, 4, 7), date(2037, 4, 3), date(2042, 4, 4), date(2045, 4, 7), date(2048, 4, 3), date(2053, 4, 4)}


class Compared:
    """Bonds drawn from seeds, our figures for all of them at once, and QuantLib's one by one."""

    def __init__(self, size: int, seed: int = 0) -> None:
        self.drawn = [drawn(number) for number in range(seed, seed + size)]
        self.terms = made(*({name: text for name, text in one.row.items() if text} for one in self.drawn))
        self.rows = np.arange(size)
        coupons = schedules.all_coupons(self.terms, self.rows)
        self.dates = np.split(coupons.unadjusted, np.searchsorted(coupons.bond_row, self.rows[1:]))
        self.paid = np.split(coupons.payment_date, np.searchsorted(coupons.bond_row, self.rows[1:]))
        settle = days(*(one.settle.isoformat() for one in self.drawn))
        self.accrued = accrual.accrued(self.terms, self.rows, settle, np.zeros(size, np.int64))
        # the fraction of each coupon, and whether its period is regular
        periods = schedules.period_ending(self.terms, coupons.bond_row, coupons.unadjusted)
        above, below = accrual.coupon_fraction(self.terms, coupons.bond_row, periods)
        self.owner, self.regular = coupons.bond_row, periods.regular
        self.share = above / below

    def coupons(self, row: int) -> list[Any]:
        return [flow for flow in map(ql.as_coupon, self.drawn[row].bond.cashflows()) if flow is not None]


@pytest.fixture(scope="module", params=[2_000, pytest.param(20_000, marks=pytest.mark.long)], ids=["2,000", "20,000"])
def compared(request) -> Compared:
    return Compared(request.param)


def test_coupon_dates(compared):
    """All of them, with no difference to explain."""
    for row, one in enumerate(compared.drawn):
        assert compared.dates[row].tolist() == [plain(flow.accrualEndDate()) for flow in compared.coupons(row)], one.row


def test_payment_dates(compared):
    """Equal but for the Good Fridays on which only one of the calendars is closed."""
    good_fridays = 0
    for row, one in enumerate(compared.drawn):
        theirs = [plain(flow.date()) for flow in compared.coupons(row)]
        for ours, other in zip(compared.paid[row].tolist(), theirs, strict=True):
            if ours != other:
                assert one.row["calendar"] == "XSIF" and other in GOOD_FRIDAYS, (one.row, ours, other)
                good_fridays += 1
    assert good_fridays > 0


def _paid_later(one: Drawn, flows: list[Any], start: date, end: date) -> bool:
    """QuantLib's FixedRateBond takes the coupon not yet paid as the current one: between coupon date and a later payment date it
    still accrues the old period.
    """
    return any(plain(flow.accrualEndDate()) <= one.settle < plain(flow.date()) for flow in flows)


def _paid_sooner(one: Drawn, flows: list[Any], start: date, end: date) -> bool:
    """Likewise it has none left of a period whose coupon was paid before its end."""
    return any(plain(flow.date()) <= one.settle < plain(flow.accrualEndDate()) for flow in flows)


def _february(one: Drawn, flows: list[Any], start: date, end: date) -> bool:
    """QuantLib stretches the last of February to the 30th for every bond, we for bonds that pay on month ends (SIA, from memory)."""
    return one.row["day_count"] == "30/360 US" and not one.month_end and start.month == 2 and last_of_month(start)


def _canadian_half(one: Drawn, flows: list[Any], start: date, end: date) -> bool:
    """QuantLib divides 365 by the frequency in whole numbers, so that its second half begins a day sooner."""
    gone = (one.settle - start).days
    return one.row["day_count"] == "Act/365 Canada" and 365 // one.frequency <= gone <= 365 / one.frequency


def _canadian_stub(one: Drawn, flows: list[Any], start: date, end: date) -> bool:
    """In odd periods we apply the Canadian rule to each notional half, QuantLib to the whole against one reference period."""
    odd = (start.isoformat() == one.row["accrual_start"] and one.first is not None) or start == one.before_last
    return one.row["day_count"] == "Act/365 Canada" and odd


def _odd_end(one: Drawn, flows: list[Any], start: date, end: date) -> bool:
    """With an odd end QuantLib measures the periods before and after the last regular coupon by notional dates of its own (an annual
    bond's last 311 days become half of what 311 / 365 gives); ours are reckoned by hand below.
    """
    return one.row["day_count"] == "Act/Act ICMA" and one.before_last in (start, end)


def _clamped(one: Drawn, flows: list[Any], start: date, end: date) -> bool:
    """QuantLib steps from one notional date to the next, so that the 31st clamped to 30 September stays the 30th in March; ours are
    counted from the anchor. Seen in odd first periods of bonds late in the month without the end-of-month rule.
    """
    anchor = one.before_last or date.fromisoformat(one.row["maturity"])
    return one.row["day_count"] == "Act/Act ICMA" and end == one.first and anchor.day > 28 and not one.month_end


REASONS: tuple[Callable[[Drawn, list[Any], date, date], bool], ...] = (
    _paid_later, _paid_sooner, _february, _canadian_half, _canadian_stub, _odd_end,
)  # fmt: skip


def _by_hand(one: Drawn, start: date, until: date) -> float:
    """Act/Act ICMA of an odd last period or the one before it: days over the notional period they fall in (ICMA rule 251)."""
    step, number, total = 12 // one.frequency, -1, Fraction(0)
    while True:
        left, right = (months_before(one.before_last, -step * n, one.month_end) for n in (number, number + 1))
        if left >= until:
            return float(total)
        total += Fraction(max((min(right, until) - max(left, start)).days, 0), (right - left).days * one.frequency)
        number += 1


def test_accrued_interest(compared):
    """Per 100 to ten decimals, but for QuantLib's own ways, each of which occurs."""
    part, reasons = compared.accrued, Counter()
    ours = part.rate_e9 / 1e9 * part.numerator / part.denominator
    for row, one in enumerate(compared.drawn):
        if abs(one.bond.accruedAmount(quant(one.settle)) - ours[row]) < 1e-10:
            continue
        flows, period = compared.coupons(row), (part.previous[row].item(), part.next[row].item())
        why = [reason.__name__ for reason in (*REASONS, _clamped) if reason(one, flows, *period)]
        if "_odd_end" in why:
            assert ours[row] == pytest.approx(float(one.row["coupon_rate"]) * _by_hand(one, period[0], one.settle)), one.row
        assert why, (one.row, one.settle, ours[row], one.bond.accruedAmount(quant(one.settle)))
        reasons.update(why)
    assert sum(reasons.values()) < len(compared.drawn) / 50
    if len(compared.drawn) >= 20_000:
        assert set(reasons) - {"_clamped"} == {reason.__name__ for reason in REASONS}


def test_accrued_days(compared):
    """Days from the coupon date on, where QuantLib has the same coupon."""
    for row, one in enumerate(compared.drawn):
        flows = compared.coupons(row)
        start, end = compared.accrued.previous[row].item(), compared.accrued.next[row].item()
        if _paid_later(one, flows, start, end) or _paid_sooner(one, flows, start, end) or _february(one, flows, start, end):
            continue
        counter = one.bond.dayCounter()
        assert compared.accrued.days[row] == counter.dayCount(quant(start), quant(one.settle)), one.row


def test_coupons(compared):
    """Every coupon of every bond; regular ones are rate / frequency where the contract of files says so."""
    place, even = 0, Counter()
    for row, one in enumerate(compared.drawn):
        rate = float(one.row["coupon_rate"])
        for flow in compared.coupons(row):
            ours, regular = compared.share[place] * rate, compared.regular[place]
            place += 1
            if abs(flow.amount() - ours) < 1e-10:
                continue
            start, end = plain(flow.accrualStartDate()), plain(flow.accrualEndDate())
            count = one.row["day_count"]
            if regular and count.startswith("30"):
                # thirty-day months from or to the end of February do not always add up to a whole coupon
                assert ours == pytest.approx(rate / one.frequency) and 2 in (start.month, end.month), one.row
                even["February"] += 1
            elif _odd_end(one, [], start, end):
                assert ours == pytest.approx(rate * _by_hand(one, start, end)), one.row
                even["odd end"] += 1
            else:
                assert count == "Act/365 Canada" or _february(one, [], start, end) or _clamped(one, [], start, end), one.row
                even[count] += 1
    assert place == len(compared.share)
    assert even["February"] > 0 and even["Act/365 Canada"] > 0 and even["odd end"] > 0 and even["Act/Act ICMA"] > 0


def test_a_clamped_february_does_not_spread():
    """A bond of the 30th or 31st pays on the last of February and on its own day again after it (QuantLib, rolled from maturity)."""
    for text in ("2031-08-30", "2031-08-31", "2032-02-29"):
        last = date.fromisoformat(text)
        terms = made({"coupon_rate": "3", "frequency": "2", "day_count": "30/360", "accrual_start": "2020-02-28", "maturity": text})
        schedule = ql.Schedule(
            ql.Date(28, 2, 2020), quant(last), ql.Period(ql.Semiannual), ql.NullCalendar(), ql.Unadjusted, ql.Unadjusted,
            ql.DateGeneration.Backward, False,
        )  # fmt: skip
        expected = [plain(day) for day in schedule.dates()][1:]
        found = schedules.all_coupons(terms, np.array([0])).unadjusted.tolist()
        assert found == expected
        assert found[-1] - found[-2] < timedelta(days=185)
