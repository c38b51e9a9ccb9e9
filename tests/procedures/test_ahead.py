"""What lies ahead of a morning is what the next morning then expects."""

from __future__ import annotations

import datetime
from collections import defaultdict
from pathlib import Path

import numpy as np
import pytest

from reconciler.procedures import morning
from reconciler.procedures.ahead import AHEAD, Ahead, ahead

SAMPLE = Path(__file__).parents[2] / "sample_tickets"


@pytest.fixture(scope="module")
def day() -> morning.Day:
    """The second sample morning."""
    return morning.run(SAMPLE / "2026-03-31", datetime.date(2026, 3, 31))


@pytest.fixture(scope="module")
def coming(day: morning.Day) -> Ahead:
    """What lies ahead of it."""
    return ahead(day)


def test_only_days_after_the_morning_and_within_reach(coming: Ahead) -> None:
    days = coming.payments["date"]
    assert set(coming.payments) == set(AHEAD)
    assert len(days) > 10
    assert (days > np.datetime64("2026-03-31")).all()
    assert (days <= coming.until).all()
    assert (np.diff(days.astype(np.int64)) >= 0).all()
    assert coming.until == np.datetime64("2026-04-30")


def test_bars_are_the_sums_of_the_payments(coming: Ahead) -> None:
    sums: dict[tuple[object, str], list[int]] = defaultdict(lambda: [0, 0, 0])
    for row in range(len(coming.payments)):
        one = coming.payments.row(row)
        told = sums[one["date"], one["currency"]]
        told[0 if one["amount_minor"] > 0 else 1] += abs(int(one["amount_minor"]))
        told[2] += 1
    assert {(bar.day, bar.currency): [bar.received, bar.paid, bar.payments] for bar in coming.bars} == dict(sums)
    assert {bar.digits for bar in coming.bars if bar.currency == "JPY"} <= {0}


def test_trades_that_settle_later_are_among_them(day: morning.Day, coming: Ahead) -> None:
    items = day.items
    later = (items["terms_date"] > np.datetime64("2026-03-31")) & (items["terms_date"] <= coming.until)
    told = {items["ticket"].text(int(row)) for row in np.flatnonzero(later)} - {""}
    seen = set(coming.payments["ticket"].to_list()) - {""}
    assert told
    assert seen == told


def test_the_next_morning_expects_the_coupons_foretold(coming: Ahead) -> None:
    following = morning.run(SAMPLE / "2026-04-01", datetime.date(2026, 4, 1))
    expected = set()
    for row in range(len(following.items)):
        one = following.items.row(row)
        if one["kind"] in ("coupon", "redemption") and str(one["terms_date"]) == "2026-04-01":
            expected.add((one["kind"], one["account"], one["bond"], int(one["terms_minor"])))
    foretold = set()
    for row in range(len(coming.payments)):
        one = coming.payments.row(row)
        if one["kind"] != "trade" and str(one["date"]) == "2026-04-01":
            foretold.add((one["kind"], one["account"], one["bond"], int(one["amount_minor"])))
    assert expected
    assert expected <= foretold


def test_no_days_ahead_no_payments(day: morning.Day) -> None:
    none = ahead(day, days=0)
    assert len(none.payments) == 0
    assert none.bars == ()
