"""The columns of the lists that are looked things up in: bonds, files of the day, rejected rows, payments ahead.

Declared as data like those of the payments. A column over a plain table is made by one of four small makers (text, date, count,
amount), each of which says how it is shown, how it ranks and how it is exported.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np

from reconciler.records import MISSING, Table, Words
from reconciler.window import figures
from reconciler.window.payment_cells import title_of
from reconciler.window.search import Index
from reconciler.window.sheet import Cell, Column, Facet, Fact, Rows, Sheet, facet_of, texts


class Records:
    """A table with the digits of each row's currency, and the year in which dates are told short."""

    def __init__(self, table: Table, digits: np.ndarray | None = None, year: int = 0) -> None:
        self.table, self.year = table, year
        self.digits = digits if digits is not None else np.full(len(table), 2, np.int64)
        self.finest = int(self.digits.max()) if len(self.digits) else 2


def _day_rank(days: np.ndarray) -> np.ndarray:
    return np.where(np.isnat(days), MISSING, days.astype("datetime64[D]").astype(np.int64))


def text_column(name: str, title: str, help_text: str, width: int, stretch: int = 0, strong: bool = False, tone: str = "") -> Column:
    """A column of words."""

    def show(data: Records, at: Rows) -> list[Cell]:
        return [Cell(text, strong=strong, tone=tone) for text in texts(data.table[name].take(at))]

    return Column(name, title, help_text, show, lambda data: data.table[name].rank(), width, stretch=stretch)


def date_column(name: str, title: str, help_text: str, width: int = 100) -> Column:
    """A column of days."""

    def show(data: Records, at: Rows) -> list[Cell]:
        return [Cell(figures.date(day, data.year)) for day in data.table[name][at]]

    return Column(name, title, help_text, show, lambda data: _day_rank(data.table[name]), width, fit=True)


def count_column(name: str, title: str, help_text: str, width: int = 60, alarm: str = "") -> Column:
    """A column of whole numbers; with `alarm` a tone for those above zero."""

    def show(data: Records, at: Rows) -> list[Cell]:
        return [
            Cell("" if number == MISSING else f"{number:,}", tone=alarm if number > 0 else "soft" if alarm else "",
                 strong=bool(alarm) and number > 0)
            for number in data.table[name][at].tolist()
        ]  # fmt: skip

    return Column(name, title, help_text, show, lambda data: data.table[name].astype(np.int64), width, right=True,
                  descending_first=True)  # fmt: skip


def amount_column(name: str, title: str, help_text: str, width: int = 96, signed: bool = False, alarm: str = "",
                  stretch: int = 0) -> Column:  # fmt: skip
    """A column of money."""

    def show(data: Records, at: Rows) -> list[Cell]:
        digits = data.digits[at].tolist()
        return [
            Cell(figures.amount(minor, digits[i], signed), shift=data.finest - digits[i] if minor != MISSING else 0,
                 tone=alarm if alarm and minor not in (0, MISSING) else "soft" if alarm or not minor else "")
            for i, minor in enumerate(data.table[name][at].tolist())
        ]  # fmt: skip

    def rank(data: Records) -> np.ndarray:
        minor = data.table[name]
        return np.where(minor == MISSING, MISSING, minor * 10 ** (data.finest - data.digits))

    return Column(name, title, help_text, show, rank, width, right=True, stretch=stretch)


def decimal_column(name: str, title: str, help_text: str, places: int, width: int = 92, unit: str = "") -> Column:
    """A column of decimal numbers held as value times 10**places."""

    def show(data: Records, at: Rows) -> list[Cell]:
        texts = [figures.decimal(value, places) for value in data.table[name][at].tolist()]
        return [Cell(f"{text}{unit}" if text else "") for text in texts]

    return Column(name, title, help_text, show, lambda data: data.table[name], width, right=True)


def facts_of(table: Table, titles: Sequence[tuple[str, str, str]]) -> list[Fact]:
    """What is exported of a plain table: (name, title, kind)."""

    def take(name: str) -> Callable[[Any, Rows], Any]:
        return lambda data, at: data.table[name].take(at) if isinstance(data.table[name], Words) else data.table[name][at]

    return [
        Fact(title, kind, take(name), (lambda data, at: data.digits[at]) if kind == "amount" else None)
        for name, title, kind in titles
        if name in table
    ]


def index_of(table: Table, digits: np.ndarray | None = None) -> Index:
    """Makes every text, amount and date of a plain table searchable."""
    words = {name: column for name, column in table.columns.items() if isinstance(column, Words)}
    amounts = {name: (table[name], digits) for name in table if digits is not None and ("_minor" in name or "amount" in name)}
    dates = {name: table[name] for name in table if not isinstance(table[name], Words) and table[name].dtype.kind == "M"}
    return Index(len(table), words, amounts, dates)  # type: ignore[arg-type]


def _facets(table: Table, names: Sequence[tuple[str, str]]) -> list[Facet]:
    return [facet_of(name, title, table[name]) for name, title in names if name in table]


# --- bonds -------------------------------------------------------------------------------------------------------------------

BOND_COLUMNS: tuple[Column, ...] = (
    text_column("description", "Bond", "The bond's description", 210, stretch=3, strong=True),
    text_column("bond", "Identifier", "ISIN, CUSIP, SEDOL or the desk's own code", 124),
    text_column("currency", "Currency", "The currency it pays in", 72),
    text_column("kind", "Kind", "Zero, fixed, stepped, floating, linked or amortising", 82),
    decimal_column("coupon_rate_e9", "Coupon %", "Percent a year; of floating bonds the rate before the first fixing", 9, 76),
    count_column("frequency", "A year", "Coupons a year", 58),
    text_column("day_count", "Day count", "How days of accrued interest are counted", 112),
    date_column("maturity", "Maturity", "The day the face is paid back", 96),
    text_column("payment_adjustment", "Moved", "Where a payment goes that falls on a closed day", 104),
    text_column("calendar", "Calendar", "Whose closed days move its payments; blank: weekends only", 78),
    text_column("ex_dividend", "Ex", "Ex-dividend this many business (b) or calendar (c) days before the coupon", 48),
    text_column("record", "Record", "Record date this many days before the coupon", 62),
    text_column("terms", "Terms", "Whether the bond can be reckoned", 76),
)

BOND_FACTS = [
    ("bond", "bond", "text"), ("description", "description", "text"), ("market", "market", "text"),
    ("currency", "currency", "text"), ("kind", "kind", "text"), ("frequency", "frequency", "count"),
    ("day_count", "day count", "text"), ("accrual_start", "accrual start", "date"), ("first_coupon", "first coupon", "date"),
    ("maturity", "maturity", "date"), ("payment_adjustment", "payment adjustment", "text"), ("calendar", "calendar", "text"),
    ("ex_dividend", "ex-dividend", "text"), ("record", "record", "text"), ("quote", "quote", "text"), ("terms", "terms", "text"),
]  # fmt: skip


def bonds_sheet(bonds: Table) -> Sheet:
    """The list of the morning's bonds (procedures.bondlist.BONDLIST)."""
    facets = _facets(bonds, [("currency", "Currency"), ("kind", "Kind"), ("day_count", "Day count"), ("calendar", "Calendar"),
                             ("market", "Market"), ("terms", "Terms")])  # fmt: skip
    return Sheet(Records(bonds), len(bonds), BOND_COLUMNS, facts_of(bonds, BOND_FACTS), index_of(bonds), facets)


# --- files of the day --------------------------------------------------------------------------------------------------------

class FileRows(Records):
    """The totals per file and currency, with how each file was read (intake's File, by name)."""

    def __init__(self, totals: Table, digits: np.ndarray, files: Sequence[Any]) -> None:
        super().__init__(totals, digits)
        self.read = {one.name: one for one in files}


_DELIMITERS = {"\t": "tab", ";": "semicolon", ",": "comma", "|": "bar"}


def _file(data: FileRows, at: Rows) -> list[Cell]:
    cells = []
    for name in texts(data.table["file"].take(at)):
        one = data.read.get(name)
        place, _, short = name.rpartition("/")
        told = (one.broker, one.encoding, _DELIMITERS.get(one.delimiter, one.delimiter), one.layout) if one is not None else ()
        cells.append(Cell(short, "  ·  ".join(part for part in (*told, f"in {place}" if place else "") if part), strong=True))
    return cells


FILE_COLUMNS: tuple[Column, ...] = (
    Column("file", "File", "The file in the morning's folder; below it broker, layout, encoding and delimiter", _file,
           lambda data: data.table["file"].rank(), 290, stretch=3),
    text_column("currency", "Currency", "Rows and money are counted per file and currency", 66),
    count_column("rows_read", "Rows", "Lines of the file without title lines"),
    count_column("rows_used", "Used", "Rows that became tickets, confirmations, entries …"),
    count_column("rows_rejected", "Rejected", "Rows that could not be used; each is listed below with its reason", alarm="differ"),
    count_column("rows_set_aside", "Set aside", "Rows that are no payments or are superseded", alarm="day"),
    amount_column("amount_read", "Amount read", "Money on all rows", stretch=1),
    amount_column("amount_used", "Amount used", "Money on the rows used", stretch=1),
    amount_column("amount_rejected", "Rejected", "Money on the rejected rows", 80, alarm="differ"),
    amount_column("amount_set_aside", "Set aside", "Money on the rows set aside", 80, alarm="day"),
)

FILE_FACTS = [
    ("file", "file", "text"), ("currency", "currency", "text"), ("rows_read", "rows read", "count"),
    ("rows_used", "rows used", "count"), ("rows_rejected", "rows rejected", "count"),
    ("rows_set_aside", "rows set aside", "count"), ("amount_read", "amount read", "amount"),
    ("amount_used", "amount used", "amount"), ("amount_rejected", "amount rejected", "amount"),
    ("amount_set_aside", "amount set aside", "amount"),
]  # fmt: skip


def files_sheet(totals: Table, digits: np.ndarray, files: Sequence[Any] = ()) -> Sheet:
    """The files of the day, a row per file and currency."""
    facets = _facets(totals, [("file", "File"), ("currency", "Currency")])
    return Sheet(FileRows(totals, digits, files), len(totals), FILE_COLUMNS, facts_of(totals, FILE_FACTS), index_of(totals, digits), facets)


REJECT_COLUMNS: tuple[Column, ...] = (
    text_column("file", "File", "The file the row stands in", 190, strong=True),
    count_column("row", "Line", "The line in the file, 1 is the first", 64),
    text_column("column", "Column", "The column that is wrong", 130),
    text_column("value", "Value", "What stands there", 130),
    text_column("reason", "Reason", "What is wrong and what to do about it", 420, stretch=1),
)

REJECT_FACTS = [
    ("file", "file", "text"), ("row", "row", "count"), ("column", "column", "text"), ("value", "value", "text"),
    ("reason", "reason", "text"),
]  # fmt: skip


def rejects_sheet(rejects: Table) -> Sheet:
    """The rows that could not be used, with their places and reasons."""
    facets = _facets(rejects, [("file", "File"), ("column", "Column")])
    return Sheet(Records(rejects), len(rejects), REJECT_COLUMNS, facts_of(rejects, REJECT_FACTS), index_of(rejects), facets)


# --- payments ahead ----------------------------------------------------------------------------------------------------------


class Coming(Records):
    """The payments ahead, with the names of their bonds."""

    def __init__(self, table: Table, digits: np.ndarray, year: int, names: Words) -> None:
        super().__init__(table, digits, year)
        self.names = names


def _what(data: Coming, at: Rows) -> list[Cell]:
    names, kinds, tickets = (texts(column.take(at)) for column in (data.names, data.table["kind"], data.table["ticket"]))
    digits = data.digits[at].tolist()
    return [
        Cell(title_of(kinds[i], side, figures.face(face, digits[i]), names[i]) + (f"  ·  {tickets[i]}" if tickets[i] else ""),
             strong=True)
        for i, (side, face) in enumerate(zip(data.table["side"][at].tolist(), data.table["face_minor"][at].tolist(), strict=True))
    ]  # fmt: skip


AHEAD_COLUMNS: tuple[Column, ...] = (
    date_column("date", "Day", "The day the terms say it is paid", 110),
    Column("what", "Payment", "What is paid", _what, lambda data: data.names.rank(), 320, stretch=3),
    text_column("kind", "Kind", "Trade, coupon or redemption", 100),
    text_column("account", "Account", "The account it is paid to", 140, stretch=1),
    text_column("currency", "Currency", "The currency it is paid in", 80),
    amount_column("amount_minor", "Amount", "Money in is positive", 130, signed=True),
)

AHEAD_FACTS = [
    ("date", "date", "date"), ("kind", "kind", "text"), ("account", "account", "text"), ("ticket", "ticket", "text"),
    ("bond", "bond", "text"), ("face_minor", "face", "amount"), ("currency", "currency", "text"),
    ("amount_minor", "amount", "amount"),
]  # fmt: skip


def ahead_sheet(payments: Table, digits: np.ndarray, year: int, bonds: Table) -> Sheet:
    """The payments of the coming days (procedures.ahead.AHEAD)."""
    facets = _facets(payments, [("kind", "Kind"), ("currency", "Currency"), ("account", "Account")])
    told = bonds["description"].take(payments["bond_row"])
    names = told.where(told.known(), payments["bond"])
    index = index_of(payments.with_columns(description=names), digits)
    data = Coming(payments, digits, year, names)
    return Sheet(data, len(payments), AHEAD_COLUMNS, facts_of(payments, AHEAD_FACTS), index, facets)
