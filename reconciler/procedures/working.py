"""A clerk believes a figure when she sees how it came about: one payment line by line, per party, with the reason for each day.

A trade is principal, accrued interest (from, to, days, day count), fees and settlement amount; a coupon is its period, its days and
the face held on the record date; a redemption is the face and the price it is paid back at. Every day that was moved says why.
Beside the terms stands what each party told of the same fact, and which of them differ: those for which the search found a break.
Figures come from the day's tables and the bond arithmetic; texts are ready to show.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from reconciler import texts
from reconciler.bonds import accrual, schedules
from reconciler.bonds.daycounts import DAY_COUNTS
from reconciler.bonds.terms import KINDS
from reconciler.money import minor_digits
from reconciler.procedures.bond_coupons import COUPONS, Coupons, Strip, bond_coupons, coupon_days, strip_around
from reconciler.procedures.reasons import why_moved, why_settles
from reconciler.records import MISSING, Table
from reconciler.texts import long_date

if TYPE_CHECKING:
    from reconciler.procedures.morning import Day

__all__ = ["COUPONS", "Coupons", "Line", "Strip", "Working", "bond_coupons", "working"]


@dataclass(frozen=True)
class Line:
    """One fact of a payment: what the terms say, what each party told ("" when not told), who differs, and how it is reckoned.

    `differs` holds names of records.PARTIES; `note` is a formula or reason ("1,000,000.00 x 98.875 %", "29 Mar 2026 is a Sunday").
    """

    fact: str
    terms: str = ""
    broker: str = ""
    desk: str = ""
    bank: str = ""
    differs: frozenset[str] = frozenset()
    note: str = ""

    def told(self, party: str) -> str:
        """What a party of records.PARTIES has for this fact."""
        return {"Terms": self.terms, "Broker": self.broker, "Desk": self.desk, "Bank": self.bank}[party]


@dataclass(frozen=True)
class Working:
    """The working of one payment. `parties` are those that told anything of it, in the order of records.PARTIES."""

    title: str
    subtitle: str
    lines: tuple[Line, ...]
    parties: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    strip: Strip = field(default_factory=Strip)


# kinds of break that make a line differ
_LINES = {
    "Face": ("face",), "Price": ("price",), "Accrued interest": ("accrued",), "Fees": ("fees",), "Yield": ("yield",),
    "Side": ("side",), "Settlement amount": ("settlement amount", "no cash", "currency"), "Amount": ("payment amount", "no cash"),
    "Settlement date": ("settlement date",), "Payment date": ("payment date",), "Trade date": ("trade date",),
    "Account": ("account",),
}  # fmt: skip


class _Item:
    """One item of a day with what every party told of it."""

    def __init__(self, day: Day, row: int) -> None:
        self.day, self.row = day, row
        self.item = day.items.row(row)
        self.bond = int(self.item["bond_row"])
        self.digits = int(minor_digits([self.item["currency"]])[0])
        self.ticket = self._told(day.source.tickets, self.item["ticket_row"])
        self.confirmation = self._told(day.source.confirmations, self.item["confirmation_row"])
        mine = np.flatnonzero(day.breaks["item_row"] == row)
        self.breaks = {(day.breaks["break"].text(i), day.breaks["party"].text(i)) for i in mine.tolist()}
        paid = np.flatnonzero(day.allocations["item_row"] == row)
        self.entries = [day.source.cash.row(int(at)) for at in day.allocations["cash_row"][paid]]

    @staticmethod
    def _told(source: Table, row: Any) -> dict[str, Any]:
        return source.row(int(row)) if int(row) >= 0 else {}

    @property
    def parties(self) -> tuple[str, ...]:
        """Who told anything of the item."""
        spoke = {"Terms": self.item["terms_minor"] != MISSING, "Broker": self.confirmation, "Desk": self.ticket, "Bank": self.entries}
        return tuple(party for party, told in spoke.items() if told)

    def money(self, minor: Any) -> str:
        """An amount, grouped; "" when not told."""
        return str(texts.amounts(np.array([minor], np.int64), self.digits, grouped=True)[0].as_py() or "")

    def line(self, fact: str, terms: str = "", broker: str = "", desk: str = "", bank: str = "", note: str = "") -> Line:
        """A line with the parties that the search found to differ in it."""
        kinds = _LINES.get(fact, ())
        return Line(fact, terms, broker, desk, bank, frozenset(p for k, p in self.breaks if k in kinds), note)

    def both(self, name: str, show: Any) -> dict[str, str]:
        """A fact of confirmation and ticket, shown."""
        return {"broker": show(self.confirmation.get(name, MISSING)), "desk": show(self.ticket.get(name, MISSING))}


def working(day: Day, item_row: int) -> Working:
    """How the payment in row `item_row` of the day's items is reckoned."""
    one = _Item(day, item_row)
    kind = one.item["kind"]
    lines = {"trade": _trade, "coupon": _coupon, "redemption": _redemption}.get(kind, _entry)(one)
    strip = strip_around(day.terms, one.bond, one.item) if one.bond >= 0 else Strip()
    title = {"trade": "Settlement", "coupon": "Coupon", "redemption": "Redemption"}.get(kind, "Bank entry")
    subtitle = ", ".join(part for part in (one.item["item"], one.item["bond"], one.item["currency"]) if part)
    return Working(title, subtitle, tuple(lines), one.parties, _notes(one), strip)


def _date(value: Any) -> str:
    return "" if isinstance(value, (int, np.integer)) else long_date(np.datetime64(value, "D")) or ""


def _decimal(value: Any, places: int = 12) -> str:
    return "" if value == MISSING else str(texts.decimals(np.array([value], np.int64), places)[0].as_py())


def _side(value: Any) -> str:
    return {1: "buy", -1: "sell"}.get(int(value) if value != MISSING else 0, "")


def _trade(one: _Item) -> list[Line]:
    item, terms, money = one.item, one.day.terms, one.money
    face, price = money(item["face_minor"]), _decimal(item["price_e12"])
    sign = -int(item["side"])
    unsigned = {name: MISSING if item[name] == MISSING else int(item[name]) * sign for name in
                ("terms_principal_minor", "terms_accrued_minor")}  # fmt: skip
    fees = MISSING if item["terms_fees_minor"] == MISSING else -int(item["terms_fees_minor"])
    lines = [
        one.line("Side", _side(item["side"]), **one.both("side", _side)),
        one.line("Face", face, **one.both("face_minor", money)),
        one.line("Price", price, **one.both("price_e12", _decimal)),
        one.line("Principal", money(unsigned["terms_principal_minor"]), money(one.confirmation.get("principal_minor", MISSING)),
                 note=_principal_note(one, face, price)),
    ]  # fmt: skip
    lines += _accrued_lines(one, unsigned["terms_accrued_minor"])
    told_fees = one.both("fees_minor", money)
    if any(told_fees.values()) or fees not in (0, MISSING):
        lines.append(one.line("Fees", money(fees), **told_fees, note="added to a purchase, taken off a sale"))
    lines.append(one.line("Settlement amount", money(item["terms_minor"]), money(item["broker_minor"]), money(item["desk_minor"]),
                          money(item["bank_minor"]), _entries_note(one)))  # fmt: skip
    told_yield = {"broker": one.confirmation.get("yield_text", ""), "desk": one.ticket.get("yield_text", "")}
    if any(told_yield.values()):
        lines.append(one.line("Yield", **told_yield))
    settles = ""
    if one.bond >= 0:
        settles = why_settles(terms, one.bond, item["terms_trade_date"], item["terms_date"])
    lines += [
        one.line("Trade date", _date(item["terms_trade_date"]), **one.both("trade_date", _date)),
        one.line("Settlement date", _date(item["terms_date"]), _date(item["broker_date"]), _date(item["desk_date"]),
                 _bank_days(one), settles),
    ]  # fmt: skip
    return [*lines, *_account_line(one)]


def _principal_note(one: _Item, face: str, price: str) -> str:
    if not face or not price or one.bond < 0:
        return ""
    terms, day = one.day.terms, one.item["terms_date"]
    quote = int(terms.quote[one.bond])
    if quote == 2:
        days = int((terms.maturity[one.bond] - day).astype(np.int64)) if not np.isnat(day) else 0
        return f"{face} × (100 − {price} × {days} days / year) %"
    factor = int(accrual.factors(terms, np.array([one.bond]), np.array([day], "datetime64[D]"))[0])
    by_factor = "" if factor == 10**12 else f" × {_decimal(factor)}"
    return f"{face} × {price} % yield" if quote == 3 else f"{face} × {price} %{by_factor}"


def _accrued_lines(one: _Item, accrued_minor: int) -> list[Line]:
    told = one.both("accrued_minor", one.money)
    if one.bond < 0 or np.isnat(one.item["terms_date"]) or not bool(one.day.terms.sound[one.bond]):
        return [one.line("Accrued interest", one.money(accrued_minor), **told)] if any(told.values()) else []
    terms, rows = one.day.terms, np.array([one.bond])
    if not int(terms.frequency[one.bond]):
        return [one.line("Accrued interest", one.money(accrued_minor), **told, note="pays no coupons")] if any(told.values()) else []
    part = accrual.accrued(terms, rows, np.array([one.item["terms_date"]], "datetime64[D]"), np.array([one.item["face_minor"]]))
    days = "" if part.days[0] == MISSING else str(part.days[0])
    told_days = one.confirmation.get("accrued_days", MISSING)
    span = f"{_date(part.previous[0])} to {_date(one.item['terms_date'])}"
    if part.ex[0]:
        span = f"{_date(one.item['terms_date'])} to {_date(part.next[0])}, without the coupon"
    share = f"{_decimal(int(part.rate_e9[0]), 9)} % × {part.numerator[0]} / {part.denominator[0]}" if part.rate_e9[0] != MISSING else ""
    name = DAY_COUNTS[int(terms.day_count[one.bond])].name
    return [
        one.line("Accrued days", days, "" if told_days == MISSING else str(told_days), note=span),
        one.line("Day count", name, note=share),
        one.line("Accrued interest", one.money(accrued_minor), **told),
    ]


def _coupon(one: _Item) -> list[Line]:
    terms, rows, item = one.day.terms, np.array([one.bond]), one.item
    date = np.array([item["coupon_date"]], "datetime64[D]")
    period = schedules.period_ending(terms, rows, date)
    above, below = accrual.coupon_fraction(terms, rows, period)
    days = coupon_days(terms, rows, period)[0]
    even = "a full period" if bool(period.regular[0]) else "an odd period"
    rate = accrual.accrued(terms, rows, period.start, np.array([0])).rate_e9[0]
    share = f"{_decimal(int(rate), 9)} % × {above[0]} / {below[0]}" if rate != MISSING else ""
    return [
        one.line("Face held", one.money(item["face_minor"]), note=f"at the close of {_date(item['record_date'])}"
                 if not np.isnat(item["record_date"]) else ""),
        one.line("Coupon period", f"{_date(period.start[0])} to {_date(period.end[0])}", note=even),
        one.line("Days", "" if days == MISSING else str(days), note=DAY_COUNTS[int(terms.day_count[one.bond])].name),
        one.line("Rate", share.partition(" × ")[0], note=share),
        *_paid_lines(one),
    ]  # fmt: skip


def _redemption(one: _Item) -> list[Line]:
    terms, item = one.day.terms, one.item
    price = _decimal(int(terms.redemption_price_e12[one.bond]))
    factor = accrual.factors(terms, np.array([one.bond]), np.array([item["coupon_date"]], "datetime64[D]"))[0]
    lines = [
        one.line("Face held", one.money(item["face_minor"]), note=f"at the close of {_date(item['record_date'])}"
                 if not np.isnat(item["record_date"]) else ""),
        one.line("Redemption price", price),
    ]  # fmt: skip
    if factor != 10**12:
        lines.append(one.line("Index ratio" if KINDS[int(terms.kind[one.bond])] == "linked" else "Factor", _decimal(int(factor))))
    return [*lines, *_paid_lines(one)]


def _paid_lines(one: _Item) -> list[Line]:
    item = one.item
    moved = why_moved(one.day.terms, one.bond, item["coupon_date"], item["terms_date"])
    return [
        one.line("Amount", one.money(item["terms_minor"]), bank=one.money(item["bank_minor"]), note=_entries_note(one)),
        one.line("Payment date", _date(item["terms_date"]), bank=_bank_days(one), note=moved),
        *_account_line(one),
    ]


def _entry(one: _Item) -> list[Line]:
    lines = [one.line("Amount", bank=one.money(one.item["bank_minor"])), one.line("Value date", bank=_bank_days(one))]
    for entry in one.entries:
        told = [("Entry", entry["entry"]), ("Booked", _date(entry["booked_date"])), ("Reference", entry["reference"]),
                ("Narrative", entry["narrative"]), ("Bond", entry["bond"])]  # fmt: skip
        lines += [one.line(fact, bank=text) for fact, text in told if text]
    return [*lines, one.line("Account", bank=one.item["account"])]


def _account_line(one: _Item) -> list[Line]:
    banks = ", ".join(sorted({entry["account"] for entry in one.entries if entry["account"]}))
    return [one.line("Account", one.item["account"], one.confirmation.get("account", ""), one.ticket.get("account", ""), banks)]


def _bank_days(one: _Item) -> str:
    return ", ".join(sorted({_date(entry["value_date"]) for entry in one.entries}, key=str)) or _date(one.item["bank_date"])


def _entries_note(one: _Item) -> str:
    if len(one.entries) < 2:
        return ""
    return " + ".join(f"{one.money(entry['amount_minor'])} ({entry['entry']})" for entry in one.entries)


def _notes(one: _Item) -> tuple[str, ...]:
    notes = []
    if one.bond >= 0 and not bool(one.day.terms.sound[one.bond]):
        notes.append("The bond's terms are not sound, so nothing can be reckoned from them.")
    other = {told["currency"] for told in (one.ticket, one.confirmation) if told and told["currency"]} - {one.item["currency"]}
    if other:
        notes.append(f"Told in {' and '.join(sorted(other))} too, so that the amounts cannot be compared.")
    return tuple(notes)
