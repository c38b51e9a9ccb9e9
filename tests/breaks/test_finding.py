"""Every sentence of the contract about breaks and states, as a case: what each party tells, which breaks come of it."""

from __future__ import annotations

from typing import Any

import pytest

from reconciler import settings
from reconciler.records import BREAK_KINDS, MISSING, STATES
from tests.breaks.hand import BILL, EURO, FLOATER, NOTE, TRUE, UNSOUND, YEN, One, coupon, entry, found, only, pairs

AMOUNT = TRUE["settlement_minor"]


def _case(name: str, one: One, *breaks: tuple[str, str], state: str = "break") -> Any:
    return pytest.param(one, sorted(breaks), state, id=name)


SETTLED = {"terms_date": "2026-03-31"}
"""Terms of a trade that settles on the morning's date."""

TODAY = {"settlement_date": "2026-03-31"}

CASES = [
    _case("all four agree", One(), state="agrees"),
    _case("a coupon that came", coupon(), state="agrees"),
    _case("broker's amount", One(broker={"settlement_minor": AMOUNT + 500}), ("settlement amount", "Broker")),
    _case("desk's amount", One(desk={"settlement_minor": AMOUNT - 500}), ("settlement amount", "Desk")),
    _case("bank's amount", One(bank=[{"amount_minor": -AMOUNT + 200}]), ("settlement amount", "Bank")),
    _case("bank's sign", One(bank=[{"amount_minor": AMOUNT}]), ("settlement amount", "Bank")),
    _case("coupon's amount", coupon(bank=[{"amount_minor": 1_700_000}]), ("payment amount", "Bank")),
    _case("one unit is within tolerance", One(broker={"settlement_minor": AMOUNT + 1}), state="within tolerance"),
    _case("one unit on a coupon", coupon(bank=[{"amount_minor": 1_999_999}]), state="within tolerance"),
    _case("one unit of accrued", One(broker={"accrued_minor": TRUE["accrued_minor"] - 1}), state="within tolerance"),
    _case("two units are not", One(desk={"settlement_minor": AMOUNT + 2}), ("settlement amount", "Desk")),
    _case("broker's day", One(broker={"settlement_date": "2026-04-01"}), ("settlement date", "Broker")),
    _case("desk's day", One(desk={"settlement_date": "2026-03-29"}), ("settlement date", "Desk")),
    _case("bank's day on a trade", One(bank=[{"value_date": "2026-03-31"}]), ("settlement date", "Bank")),
    _case("bank's day on a coupon", coupon(bank=[{"amount_minor": 2_000_000, "value_date": "2026-03-27"}]), ("payment date", "Bank")),
    _case("face", One(broker={"face_minor": 10_000_000}), ("face", "Broker")),
    _case("face and amount", One(desk={"face_minor": 10**9, "settlement_minor": AMOUNT * 10}), ("face", "Desk"),
          ("settlement amount", "Desk")),
    _case("price", One(broker={"price_e12": 99_500_000_000_001}), ("price", "Broker")),
    _case("accrued", One(broker={"accrued_minor": 1_166_600}), ("accrued", "Broker")),
    _case("accrued not told", One(broker={"accrued_minor": MISSING}), state="agrees"),
    _case("side", One(broker={"side": -1}), ("side", "Broker"), ("settlement amount", "Broker")),
    _case("fees that both tell", One(broker={"fees_minor": 2500}, desk={"fees_minor": 0}), ("fees", "Broker")),
    _case("fees that one tells", One(broker={"fees_minor": 2500}), state="agrees"),
    _case("trade date", One(broker={"trade_date": "2026-03-26"}), ("trade date", "Broker")),
    _case("another currency is one break alone", One(broker={"currency": "EUR", "settlement_minor": 9, "accrued_minor": 5}),
          ("currency", "Broker")),
    _case("desk's currency", One(desk={"currency": "EUR"}), ("currency", "Desk")),
    _case("bank's currency", One(bank=[{"currency": "EUR", "amount_minor": -55}]), ("currency", "Bank")),
    _case("a yen face told in dollars", One(bond=YEN, terms={"face_minor": 1_000_000}, broker={"currency": "USD"},
                                            desk={"currency": "JPY", "face_minor": 1_000_000}), ("currency", "Broker")),
    _case("account the desk knows", One(broker={"account": "Northquay custody"}), ("account", "Broker")),
    _case("the broker's own name for the account", One(broker={"account": "NQ-77"}), state="agrees"),
    _case("account at the bank", One(bank=[{"account": "Northquay custody"}]), ("account", "Bank")),
    _case("unconfirmed", One(broker=None), ("no confirmation", "Broker")),
    _case("no ticket", One(desk=None), ("no ticket", "Desk")),
    _case("no cash after its day", One(bank=[]), ("no cash", "Bank")),
    _case("no cash for a coupon", coupon(bank=[]), ("no cash", "Bank")),
    _case("due on its day", One(terms=SETTLED, broker=TODAY, desk=TODAY, bank=[]), state="due"),
    _case("coupon due on its day", coupon(terms=SETTLED, bank=[]), state="due"),
    _case("due but unconfirmed", One(terms=SETTLED, broker=None, desk=TODAY, bank=[]), ("no confirmation", "Broker")),
    _case("due with an amount one unit off", One(terms=SETTLED, broker={**TODAY, "settlement_minor": AMOUNT + 1}, desk=TODAY, bank=[]),
          state="due"),
    _case("not due yet", One(terms={"terms_date": "2026-04-01"}, broker={"settlement_date": "2026-04-01"},
                             desk={"settlement_date": "2026-04-01"}, bank=[]), state="agrees"),
    _case("two entries pay one", One(bank=[{"amount_minor": -AMOUNT + 700}, {"amount_minor": -700}]), state="agrees"),
    _case("the second of two entries is late", One(bank=[{"amount_minor": -AMOUNT + 700}, {"amount_minor": -700,
          "value_date": "2026-03-31"}]), ("settlement date", "Bank")),
    _case("the first of two entries is early", One(bank=[{"amount_minor": -AMOUNT + 700, "value_date": "2026-03-27"},
          {"amount_minor": -700}]), ("settlement date", "Bank")),
    _case("nothing explains the entry", entry(), ("unexplained cash", "Bank")),
    _case("unknown bond, desk and broker agree", One(bond=-1, terms={"terms_minor": MISSING, "terms_accrued_minor": MISSING,
          "terms_date": "NaT"}), ("unknown bond", "Terms")),
    _case("unknown bond, desk and broker differ", One(bond=-1, broker={"settlement_minor": 5, "settlement_date": "2026-04-01"},
          terms={"terms_minor": MISSING, "terms_accrued_minor": MISSING, "terms_date": "NaT"}),
          ("unknown bond", "Terms"), ("settlement amount", "Broker"), ("settlement date", "Broker")),
    _case("unknown bond, the bank differs", One(bond=-1, bank=[{"amount_minor": -5}], terms={"terms_minor": MISSING,
          "terms_accrued_minor": MISSING, "terms_date": "NaT"}), ("unknown bond", "Terms"), ("settlement amount", "Bank")),
    _case("unknown bond, unconfirmed, unpaid", One(bond=-1, broker=None, bank=[], terms={"terms_minor": MISSING,
          "terms_accrued_minor": MISSING, "terms_date": "NaT"}), ("unknown bond", "Terms"), ("no confirmation", "Broker"),
          ("no cash", "Bank")),
    _case("unsound terms", One(bond=UNSOUND, terms={"terms_minor": MISSING, "terms_accrued_minor": MISSING}),
          ("unsound terms", "Terms")),
    _case("a floater without a rate", One(bond=FLOATER, terms={"terms_minor": MISSING, "terms_accrued_minor": MISSING}),
          ("unsound terms", "Terms")),
    _case("a coupon without a rate", coupon(bond=FLOATER, terms={"terms_minor": MISSING}, bank=[]), ("no cash", "Bank"),
          ("unsound terms", "Terms")),
    _case("nobody tells a price", One(terms={"terms_minor": MISSING, "price_e12": MISSING, "terms_accrued_minor": MISSING},
                                      broker={"price_e12": MISSING}, desk={"price_e12": MISSING}), state="agrees"),
    _case("only broker and bank tell of an unknown bond", One(bond=-1, desk=None, bank=[{"amount_minor": -5}], terms={
          "terms_minor": MISSING, "terms_accrued_minor": MISSING, "terms_date": "NaT"}), ("unknown bond", "Terms"),
          ("no ticket", "Desk"), ("settlement amount", "Bank")),
]  # fmt: skip


@pytest.mark.parametrize(("one", "expected", "state"), CASES)
def test_breaks_and_state(one: One, expected: list[tuple[str, str]], state: str) -> None:
    items, breaks = found([one])
    assert pairs(breaks) == expected
    assert items["state"].to_list() == [state]


def test_all_of_them_together_give_the_same() -> None:
    ones = [case.values[0] for case in CASES]
    items, breaks = found(ones)
    assert items["state"].to_list() == [case.values[2] for case in CASES]
    by_item: list[list[tuple[str, str]]] = [[] for _ in ones]
    for row in range(len(breaks)):
        by_item[int(breaks["item_row"][row])].append((breaks["break"].text(row), breaks["party"].text(row)))
    assert [sorted(one) for one in by_item] == [case.values[1] for case in CASES]
    assert set(breaks["break"].to_list()) <= set(BREAK_KINDS)


def test_an_amount_is_told_with_its_difference() -> None:
    one = only(found([One(broker={"settlement_minor": AMOUNT + 500})])[1])
    assert (one["expected"], one["found"], one["difference"]) == ("-1006666.67", "-1006671.67", "-5.00")
    assert one["difference_minor"] == -500
    assert one["currency"] == "USD"
    assert one["certainty"] == "open"


def test_yen_have_no_decimals() -> None:
    _, breaks = found([coupon(bond=YEN, bank=[{"amount_minor": 1_500_000}])])
    assert (only(breaks)["expected"], only(breaks)["found"]) == ("2000000", "1500000")


@pytest.mark.parametrize(
    ("one", "expected", "told", "difference"),
    [
        (One(broker={"settlement_date": "2026-04-02"}), "2026-03-30", "2026-04-02", "3"),
        (One(broker={"face_minor": 10_000_000}), "1000000.00", "100000.00", "-900000.00"),
        (One(broker={"price_e12": 99_250_000_000_000}), "99.5", "99.25", "-0.25"),
        (One(broker={"account": "Northquay custody"}), "Northquay main", "Northquay custody", ""),
        (One(broker={"currency": "EUR"}), "USD", "EUR", ""),
        (One(bank=[]), "-1006666.67", "", "1006666.67"),
        (One(broker=None), "-1006666.67", "", ""),
        (entry(amount_minor=-42), "", "-0.42", "-0.42"),
    ],
)
def test_expected_found_difference(one: One, expected: str, told: str, difference: str) -> None:
    broken = only(found([one])[1])
    assert (broken["expected"], broken["found"], broken["difference"]) == (expected, told, difference)


def test_a_side_is_told_in_words() -> None:
    _, breaks = found([One(broker={"side": -1})])
    row = breaks["break"].to_list().index("side")
    assert (breaks["expected"].text(row), breaks["found"].text(row)) == ("buy", "sell")


def test_the_settings_say_what_is_within_tolerance() -> None:
    ones = [One(broker={"settlement_minor": AMOUNT + 5}), coupon(bond=YEN, bank=[{"amount_minor": 2_000_001}])]
    items, breaks = found(ones, settings.of({"tolerance": {"USD": 5, "JPY": 0}}))
    assert items["state"].to_list() == ["within tolerance", "break"]
    assert pairs(breaks) == [("payment amount", "Bank")]


def test_a_negative_accrued_is_held_as_told() -> None:
    """In the ex-dividend period accrued is negative on both sides of the trade."""
    for side in (1, -1):
        told = {"side": side, "accrued_minor": -5000}
        terms = {"side": side, "terms_accrued_minor": side * 5000, "terms_minor": -side * AMOUNT}
        items, breaks = found([One(broker=told, desk=told, terms=terms, bank=[{"amount_minor": -side * AMOUNT}])])
        assert len(breaks) == 0
        assert items["state"].to_list() == ["agrees"]
        _, breaks = found([One(broker={**told, "accrued_minor": 5000}, desk=told, terms=terms, bank=[{"amount_minor": -side * AMOUNT}])])
        assert (only(breaks)["expected"], only(breaks)["found"], only(breaks)["difference"]) == ("-50.00", "50.00", "100.00")


def test_nothing_gives_nothing() -> None:
    items, breaks = found([])
    assert len(items) == 0
    assert len(breaks) == 0


def test_every_state_of_the_contract_is_reached() -> None:
    assert {case.values[2] for case in CASES} == set(STATES)


def test_every_kind_of_the_contract_is_reached() -> None:
    reached = {kind for case in CASES for kind, _party in case.values[1]} | {"told twice", "yield"}
    assert reached == set(BREAK_KINDS)


@pytest.mark.parametrize(("bond", "currency"), [(NOTE, "USD"), (EURO, "EUR"), (BILL, "USD")])
def test_the_currency_is_the_bonds(bond: int, currency: str) -> None:
    told = {"currency": currency}
    price = {"price_e12": 4 * 10**12} if bond == BILL else {}
    items, breaks = found([One(bond=bond, broker={**told, **price}, desk={**told, **price}, terms=price)])
    assert len(breaks) == 0
    assert items["state"].to_list() == ["agrees"]
