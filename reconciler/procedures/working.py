"""A clerk believes a figure when she sees how it came about: one payment line by line, per party, with the reason for each day.

A trade is principal, accrued interest (from, to, days, day count), fees and settlement amount; a coupon is its period, its days and
the face held on the record date; a redemption is the face and the price it is paid back at. Every day that was moved says why.
Beside the terms stands what each party told of the same fact, and which of them differ. The figures come from the day's tables and
from the bond arithmetic; nothing is worked out twice in another way. Texts are ready to show (thousands grouped, ISO dates left to
the window as "29 Mar 2026").
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from reconciler.records import Table

if TYPE_CHECKING:
    from reconciler.procedures.morning import Day


@dataclass(frozen=True)
class Line:
    """One fact of a payment: what the terms say, what each party told ("" when not told), who differs, and how it is reckoned.

    `differs` holds names of records.PARTIES; `note` is a formula or reason ("5,000,000 × 98.875 %", "29 Mar 2026 is a Sunday").
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
class Strip:
    """A bond's coupon periods around a payment, as the drawing wants them.

    `boundaries` are unadjusted coupon dates, oldest first; `accrued` the span accrued, `marked` the settlement or payment day;
    `next_period` is the number of the period after the one the payment lies in (-1 none).
    """

    boundaries: tuple[np.datetime64, ...] = ()
    accrued: tuple[np.datetime64, np.datetime64] | None = None
    marked: np.datetime64 | None = None
    marked_words: str = ""
    accrued_words: str = ""
    next_period: int = -1


@dataclass(frozen=True)
class Working:
    """The working of one payment. `parties` are those that told anything of it, in the order of records.PARTIES."""

    title: str
    subtitle: str
    lines: tuple[Line, ...]
    parties: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    strip: Strip = field(default_factory=Strip)


COUPONS: dict[str, str] = {
    # one coupon of one bond a row; days that were moved say why ("" when not moved); amount_minor on `face_minor`
    "start": "date", "end": "date", "payment_date": "date", "why": "text", "days": "int64", "ex_date": "date",
    "record_date": "date", "face_minor": "int64", "amount_minor": "int64",
}  # fmt: skip


@dataclass(frozen=True)
class Coupons:
    """A bond's coupons as a table (schema COUPONS) and as a strip around the payment looked at."""

    table: Table
    strip: Strip
    digits: int
    shown: int = -1
    """The row of `table` the payment belongs to, -1 none."""


def working(day: Day, item_row: int) -> Working:
    """How the payment in row `item_row` of the day's items is reckoned."""
    raise NotImplementedError


def bond_coupons(day: Day, bond_row: int, item_row: int = -1) -> Coupons:
    """All coupons of the bond in row `bond_row` of the day's bonds, on the item's face (100 when no item is looked at)."""
    raise NotImplementedError


_ = Any
