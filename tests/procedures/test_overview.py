"""What the lists of the window need of a day, gathered over whole columns, against a plain loop over rows."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler.procedures.overview import digits_of, overview
from reconciler.records import MISSING, PARTIES, Words
from tests.window import fabricated


def test_first_breaks_are_the_most_urgent_ones() -> None:
    day = fabricated.day()
    seen = overview(day)
    rows, ranks = day.breaks["item_row"].tolist(), day.breaks["rank"].tolist()
    parties, kinds = day.breaks["party"].to_list(), day.breaks["break"].to_list()
    for item in range(len(day.items)):
        mine = sorted((ranks[i], i) for i, row in enumerate(rows) if row == item)
        assert seen.first_break[item] == (mine[0][1] if mine else -1)
        assert seen.break_count[item] == len(mine)
        for number, party in enumerate(PARTIES):
            of_party = [i for _, i in mine if parties[i] == party]
            of_party.sort(key=lambda i: kinds[i] not in ("settlement amount", "payment amount"))
            assert seen.party_breaks[number][item] == (of_party[0] if of_party else -1)
            assert bool(seen.party_bits[item] >> number & 1) == bool(of_party)


def test_order_of_the_breaks_does_not_matter() -> None:
    day = fabricated.day()
    order = np.random.default_rng(3).permutation(len(day.breaks))
    shuffled = fabricated.FabricatedDay(day.date, day.since, day.source, None, day.items, day.allocations, day.breaks.take(order))
    one, other = overview(day), overview(shuffled)
    assert one.net == other.net
    assert one.kinds == other.kinds
    assert (one.kind_bits == other.kind_bits).all()
    assert (order[other.first_break[other.first_break >= 0]] == one.first_break[one.first_break >= 0]).all()


def test_kinds_are_told_by_bits() -> None:
    seen = overview(fabricated.day())
    of_third = {kind for bit, kind in enumerate(seen.kinds) if int(seen.kind_bits[2]) >> bit & 1}
    assert of_third == {"settlement amount", "price"}


@pytest.mark.parametrize(
    ("item", "net"),
    [
        (0, -108234),  # the bank booked 1,082.34 too much
        (1, -19840000),  # the whole coupon is missing
        (2, -425000),  # the bank has not to speak yet: the broker's difference
        (3, 0),  # nobody confirmed; the desk agrees
        (5, 0),  # the bank paid what the terms say
        (6, 0),  # another day, the same amount
        (8, 4231000),  # nothing was expected
        (9, -10150000),  # no terms: all that was told
    ],
)
def test_net_difference_of_a_payment(item: int, net: int) -> None:
    assert overview(fabricated.day()).net_minor[item] == net


def test_net_differences_add_up_by_currency() -> None:
    day = fabricated.day()
    seen = overview(day)
    currencies = day.items["currency"].to_list()
    for one in seen.net:
        rows = [i for i, name in enumerate(currencies) if name == one.currency and seen.net_minor[i] not in (0, MISSING)]
        assert one.minor == sum(int(seen.net_minor[i]) for i in rows)
        assert one.items == len(rows)
    assert [one.currency for one in seen.net] == ["USD", "EUR", "GBP", "JPY"]


def test_counts() -> None:
    seen = overview(fabricated.day(agreeing=40))
    assert seen.counts == {"agrees": 32, "within tolerance": 0, "due": 8, "break": 13}
    assert seen.breaks == len(fabricated.BREAKS)


def test_a_morning_without_breaks_and_one_without_items() -> None:
    assert overview(fabricated.day(broken=False)).net == ()
    empty = overview(fabricated.day(agreeing=0, broken=False))
    assert len(empty.first_break) == 0
    assert sum(empty.counts.values()) == 0


def test_digits_follow_the_currency() -> None:
    assert digits_of(Words.of(["JPY", "", "KWD", "USD"])).tolist() == [0, 2, 3, 2]  # ISO 4217
