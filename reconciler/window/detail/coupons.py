"""A bond's coupons as a list: period, payment date with the reason it was moved, ex-dividend and record date, amount."""

from __future__ import annotations

import numpy as np

from reconciler.records import Table
from reconciler.window import figures
from reconciler.window.lists import Records, amount_column, count_column, date_column, facts_of
from reconciler.window.sheet import Cell, Column, Rows, Sheet, texts


class _Coupons(Records):
    """The coupons, and which of them the payment looked at belongs to."""

    def __init__(self, table: Table, digits: int, shown: int) -> None:
        super().__init__(table, np.full(len(table), digits, np.int64))
        self.shown = shown


def _payment(data: _Coupons, at: Rows) -> list[Cell]:
    reasons = texts(data.table["why"].take(at))
    days = data.table["payment_date"][at]
    return [Cell(figures.date(day), tone="day" if reasons[i] else "", glyph="→" if reasons[i] else "") for i, day in enumerate(days)]


def _why(data: _Coupons, at: Rows) -> list[Cell]:
    reasons = texts(data.table["why"].take(at))
    return [Cell(reason or ("this payment" if row == data.shown else ""), tone="" if reason else "soft")
            for row, reason in zip(at.tolist(), reasons, strict=True)]  # fmt: skip


def _payment_rank(data: _Coupons) -> np.ndarray:
    return np.asarray(data.table["payment_date"]).astype("datetime64[D]").astype(np.int64)


COLUMNS = (
    date_column("start", "From", "First day of the coupon period", 112),
    date_column("end", "To", "The coupon date as the terms tell it, before it is moved", 104),
    Column("payment_date", "Paid on", "The day it is paid; → when it was moved to an open day", _payment, _payment_rank, 130),
    Column("why", "Why moved", "Why the day it is paid is not the coupon date", _why, lambda d: d.table["why"].rank(), 220,
           stretch=3),
    count_column("days", "Days", "Days of the period by the bond's day count", 60),
    date_column("ex_date", "Ex-dividend", "Trades that settle on or after this day go without the coupon", 104),
    date_column("record_date", "Record date", "Who holds the bond at the close of this day is paid", 104),
)  # fmt: skip

FACTS = [
    ("start", "from", "date"), ("end", "to", "date"), ("payment_date", "paid on", "date"), ("why", "why moved", "text"),
    ("days", "days", "count"), ("ex_date", "ex-dividend date", "date"), ("record_date", "record date", "date"),
    ("face_minor", "face", "amount"), ("amount_minor", "amount", "amount"),
]  # fmt: skip


def coupons_sheet(table: Table, digits: int, shown: int = -1) -> Sheet:
    """The coupons (procedures.bond_coupons.Coupons) as a list; `shown` is the row the payment belongs to."""
    face = figures.face(int(table["face_minor"][0]), digits) if len(table) else ""
    amount = amount_column("amount_minor", f"On {face}", "The coupon on this face", 110)
    return Sheet(_Coupons(table, digits, shown), len(table), (*COLUMNS, amount), facts_of(table, FACTS))
