"""The order of breaks: total, by urgency, the same however the rows were told."""

from __future__ import annotations

import random

from reconciler import settings
from reconciler.records import Table
from tests.breaks.hand import EURO, TRUE, YEN, One, coupon, entry, found

AMOUNT = TRUE["settlement_minor"]


def _rows(breaks: Table) -> list[tuple[str, str, str, int]]:
    return list(zip(breaks["item"].to_list(), breaks["break"].to_list(), breaks["party"].to_list(), breaks["stake_minor"].tolist(),
                    strict=True))  # fmt: skip


def test_the_most_at_stake_first_in_the_reporting_currency() -> None:
    ones = [coupon(bond=YEN, bank=[{"amount_minor": 1_000_000}]), coupon(bond=EURO, bank=[{"amount_minor": 1_999_000}]),
            coupon(bank=[{"amount_minor": 1_998_950}])]  # fmt: skip
    _, breaks = found(ones)
    # 1,000,000 JPY; 10.50 USD; 10.00 EUR, worth more than 10.50 USD by the shipped rates
    assert breaks["currency"].to_list() == ["JPY", "EUR", "USD"]
    _, breaks = found(ones, settings.of({"reporting_rates": {"EUR": 1}}))
    assert breaks["currency"].to_list() == ["JPY", "USD", "EUR"]
    assert breaks["rank"].tolist() == [1, 2, 3]


def test_ties_go_by_the_payment_then_by_name_kind_and_party() -> None:
    ones = [
        One(name="b", broker={"trade_date": "2026-03-26", "account": "Northquay custody"}),
        One(name="a", broker={"trade_date": "2026-03-26"}, desk={"trade_date": "2026-03-25"}),
        coupon(name="c", bank=[{"amount_minor": 2_000_000, "account": "Northquay custody"}]),
    ]
    _, breaks = found(ones)
    assert [(i, k, p) for i, k, p, _ in _rows(breaks)] == [
        ("a", "trade date", "Broker"), ("a", "trade date", "Desk"), ("b", "account", "Broker"), ("b", "trade date", "Broker"),
        ("c", "account", "Bank"),
    ]  # fmt: skip


def test_the_order_of_the_items_does_not_matter() -> None:
    ones = [One(name=f"n{n}", broker={"settlement_minor": AMOUNT + 100 * (n % 4)}, bank=[]) for n in range(12)]
    ones += [entry(name=f"e{n}", amount_minor=300) for n in range(4)]
    expected = _rows(found(ones)[1])
    for seed in range(3):
        shuffled = random.Random(seed).sample(ones, len(ones))
        assert [r[:3] for r in _rows(found(shuffled)[1])] == [r[:3] for r in expected]
    assert len(expected) == 9 + 12 + 4
