"""The tables that the steps of a morning hand on: their columns, types, units and meaning.

A million trades are a handful of numpy columns, not a million objects. A `Table` is a named set of columns of one length;
it is never edited, only made anew. Text is dictionary-coded (`Words`): every distinct text is stored once and rows hold its
number, so that joining, sorting and filtering work on small integers.

Units are in the names: `_minor` is int64 in the currency's smallest unit (faces too), `_e12` is a decimal number times
10**12 (prices per 100, discount rates and yields in percent), `_e9` a decimal number times 10**9 (coupon rates in percent,
factors). Prices are clean, per 100 of face, unless the bond's `quote` says otherwise. `MISSING` (int64) and NaT (dates) stand for
"not known"; blank text has code -1.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

MISSING = np.iinfo(np.int64).min
"""The int64 that stands for an amount, face, price or rate nobody told."""

Column = "np.ndarray[Any, Any] | Words"


@dataclass(frozen=True)
class Words:
    """A column of text: `codes` (int32, -1 is blank) point into `values` (distinct texts, an arrow string array)."""

    codes: np.ndarray
    values: pa.Array

    @staticmethod
    def of(texts: Iterable[str | None]) -> Words:
        """Codes a sequence of Python texts; None and "" are blank."""
        return Words.from_arrow(pa.array(list(texts), type=pa.string()))

    @staticmethod
    def from_arrow(array: pa.Array | pa.ChunkedArray) -> Words:
        """Codes an arrow string (or dictionary) array; null and "" become blank."""
        if isinstance(array, pa.ChunkedArray):
            array = array.combine_chunks() if array.num_chunks != 1 else array.chunk(0)
        coded = array if isinstance(array, pa.DictionaryArray) else pc.dictionary_encode(array)
        if isinstance(coded, pa.ChunkedArray):
            coded = coded.combine_chunks()
        values = coded.dictionary.cast(pa.string())
        codes = pc.fill_null(coded.indices.cast(pa.int32()), -1).to_numpy(zero_copy_only=False).astype(np.int32, copy=False)
        blank = pc.index(values, "").as_py() if len(values) else -1
        if blank >= 0:
            codes = np.where(codes == blank, np.int32(-1), codes)
        return Words(codes, values)

    @staticmethod
    def constant(text: str, length: int) -> Words:
        """The same text in every row (blank when text is "")."""
        code = np.int32(0 if text else -1)
        return Words(np.full(length, code, np.int32), pa.array([text] if text else [], type=pa.string()))

    @staticmethod
    def blank(length: int) -> Words:
        """A column in which nothing was told."""
        return Words.constant("", length)

    def __len__(self) -> int:
        return len(self.codes)

    def text(self, row: int) -> str:
        """The text of one row, "" when blank."""
        code = int(self.codes[row])
        return "" if code < 0 else str(self.values[code].as_py())

    def to_list(self) -> list[str]:
        """Every row's text, "" when blank (for small tables and tests)."""
        values = self.values.to_pylist()
        return ["" if code < 0 else values[code] for code in self.codes.tolist()]

    def to_arrow(self) -> pa.Array:
        """Every row's text as an arrow string array, null when blank."""
        indices = pa.array(self.codes, mask=self.codes < 0)
        if not len(self.values):
            return pa.nulls(len(self.codes), pa.string())
        return self.values.take(indices)

    def take(self, rows: np.ndarray) -> Words:
        """The column at `rows`; a row number below zero gives blank."""
        rows = np.asarray(rows)
        if not len(self.codes):
            return Words(np.full(len(rows), -1, np.int32), self.values)
        return Words(np.where(rows < 0, np.int32(-1), self.codes[rows]), self.values)

    def known(self) -> np.ndarray:
        """True where something was told."""
        return self.codes >= 0

    def holds(self, text: str) -> np.ndarray:
        """True where the row holds this text."""
        code = pc.index(self.values, text).as_py() if len(self.values) and text else -1
        return self.codes == code if code >= 0 else np.zeros(len(self.codes), np.bool_)

    def where(self, mask: np.ndarray, other: Words) -> Words:
        """Own text where `mask` holds, else the other column's."""
        rest = np.flatnonzero(~np.asarray(mask))
        mine, theirs = unify(self, other.take(rest).compact())
        codes = mine.codes.copy()
        codes[rest] = theirs.codes
        return Words(codes, mine.values)

    def compact(self) -> Words:
        """The same texts over a vocabulary of only those that occur."""
        used = np.zeros(len(self.values) + 1, np.bool_)
        used[self.codes] = True
        kept = np.flatnonzero(used[:-1])
        if len(kept) == len(self.values):
            return self
        place = np.full(len(self.values) + 1, -1, np.int32)
        place[kept] = np.arange(len(kept), dtype=np.int32)
        return Words(place[self.codes], self.values.take(pa.array(kept)))

    def codes_in(self, values: pa.Array) -> np.ndarray:
        """Every row's code in another vocabulary (int32; -1 when blank or absent there)."""
        if not len(self.values) or not len(values):
            return np.full(len(self.codes), -1, np.int32)
        found = pc.fill_null(pc.index_in(self.values, value_set=values), -1).to_numpy(zero_copy_only=False)
        table = np.append(found.astype(np.int32), np.int32(-1))
        return table[self.codes]

    def rank(self) -> np.ndarray:
        """Every row's place in the alphabetical order of the texts (int32; blank is -1), for sorting."""
        if not len(self.values):
            return np.full(len(self.codes), -1, np.int32)
        order = pc.sort_indices(self.values).to_numpy()
        place = np.empty(len(order) + 1, np.int32)
        place[order] = np.arange(len(order), dtype=np.int32)
        place[-1] = -1
        return place[self.codes]


def unify(*columns: Words) -> tuple[Words, ...]:
    """The same columns over one shared vocabulary, so that equal codes mean equal text: the first column's, then what others add."""
    values = columns[0].values
    codes = [columns[0].codes]
    for column in columns[1:]:
        own, values = _added(values, column.values)
        codes.append(np.append(own, np.int32(-1))[column.codes])
    return tuple(Words(own, values) for own in codes)


def _added(values: pa.Array, more: pa.Array) -> tuple[np.ndarray, pa.Array]:
    """The code of each of `more` in a vocabulary, and that vocabulary with those added that it lacks."""
    if more is values or more.equals(values):
        return np.arange(len(values), dtype=np.int32), values
    coded = pc.dictionary_encode(more)
    distinct, place = coded.dictionary, coded.indices.to_numpy(zero_copy_only=False)
    found = np.full(len(distinct), -1, np.int32)
    if len(distinct) and len(values):
        # A table of texts is made of the smaller side, and the larger one is looked up in it.
        if len(distinct) < len(values):
            there = pc.fill_null(pc.index_in(values, value_set=distinct), -1).to_numpy(zero_copy_only=False)
            hit = np.flatnonzero(there >= 0)
            found[there[hit]] = hit
        else:
            found[:] = pc.fill_null(pc.index_in(distinct, value_set=values), -1).to_numpy(zero_copy_only=False)
    new = np.flatnonzero(found < 0)
    found[new] = len(values) + np.arange(len(new), dtype=np.int32)
    return found[place], pa.concat_arrays([values, distinct.take(pa.array(new))]) if len(new) else values


@dataclass(frozen=True)
class Table:
    """Columns of one length, by name. Never edited in place."""

    columns: Mapping[str, Any]

    def __len__(self) -> int:
        for column in self.columns.values():
            return len(column)
        return 0

    def __getitem__(self, name: str) -> Any:
        return self.columns[name]

    def __contains__(self, name: str) -> bool:
        return name in self.columns

    def __iter__(self) -> Iterator[str]:
        return iter(self.columns)

    def take(self, rows: np.ndarray) -> Table:
        """The table's rows at the given row numbers (or where a boolean mask holds). Row numbers must not be negative."""
        rows = np.asarray(rows)
        if rows.dtype == np.bool_:
            rows = np.flatnonzero(rows)
        return Table({n: c.take(rows) if isinstance(c, Words) else c[rows] for n, c in self.columns.items()})

    def with_columns(self, **columns: Any) -> Table:
        """The same table with columns added or replaced."""
        return Table({**self.columns, **columns})

    def row(self, number: int) -> dict[str, Any]:
        """One row as a plain dictionary, text as str and the rest as numpy scalars."""
        return {n: c.text(number) if isinstance(c, Words) else c[number] for n, c in self.columns.items()}


def gather(column: np.ndarray, rows: np.ndarray, missing: Any = MISSING) -> np.ndarray:
    """`column[rows]`, with `missing` where a row number is below zero. `column` may be empty if all are."""
    rows = np.asarray(rows)
    if not len(column):
        return np.full(len(rows), missing, column.dtype)
    return np.where(rows < 0, np.asarray(missing, column.dtype), column[rows])


def concat(tables: Sequence[Table]) -> Table:
    """Tables with the same columns, one after the other."""
    first = tables[0]
    if len(tables) == 1:
        return first
    out: dict[str, Any] = {}
    for name in first:
        parts = [table[name] for table in tables]
        if isinstance(parts[0], Words):
            shared = unify(*parts)
            out[name] = Words(np.concatenate([p.codes for p in shared]), shared[0].values)
        else:
            out[name] = np.concatenate(parts)
    return Table(out)


# --- what each table holds -------------------------------------------------------------------------------------------------
# type words: text (Words), date (datetime64[D]), int64, int32, int8, bool

SIDES = {"buy": 1, "sell": -1}
"""Side from our point of view, as int8; 0 is not told."""

STATUSES = {"new": 0, "amended": 1, "cancelled": 2}

PARTIES = ("Terms", "Broker", "Desk", "Bank")

ITEM_KINDS = ("trade", "coupon", "redemption", "bank")

STATES = ("agrees", "within tolerance", "due", "break")

BREAK_KINDS = (
    "settlement amount", "settlement date", "payment amount", "payment date", "face", "price", "accrued", "side", "fees",
    "currency", "account", "trade date", "yield", "no confirmation", "no ticket", "no cash", "unexplained cash", "told twice",
    "unknown bond", "unsound terms",
)  # fmt: skip

CERTAINTIES = ("proved", "likely", "open")
"""What the certainty of a break's cause can be."""

BONDS: dict[str, str] = {
    # as told in bonds.csv, blanks not yet filled from the market (bonds.terms does that)
    "bond": "text", "description": "text", "market": "text", "currency": "text", "kind": "text",
    "coupon_rate_e9": "int64", "frequency": "int64", "day_count": "text", "accrual_start": "date", "first_coupon": "date",
    "last_regular_coupon": "date", "maturity": "date", "end_of_month": "text", "payment_adjustment": "text",
    "accrual_adjustment": "text", "calendar": "text", "settlement_days": "int64", "ex_dividend": "text", "record": "text",
    "quote": "text", "redemption_price_e12": "int64", "accrued_rounding": "text", "file": "text", "line": "int32",
}  # fmt: skip

TICKETS: dict[str, str] = {
    # one row per ticket in force; superseded rows were set aside by intake
    "ticket": "text", "trade_date": "date", "settlement_date": "date", "bond": "text", "side": "int8", "face_minor": "int64",
    "price_e12": "int64", "price_text": "text", "accrued_minor": "int64", "fees_minor": "int64", "settlement_minor": "int64",
    "currency": "text", "broker": "text", "account": "text", "broker_reference": "text", "yield_e12": "int64",
    "yield_text": "text", "status": "int8", "file": "text", "line": "int32",
}  # fmt: skip

CONFIRMATIONS: dict[str, str] = {
    # the same facts told by the broker; side already turned to our point of view
    "broker": "text", "broker_reference": "text", "desk_reference": "text", "trade_date": "date", "settlement_date": "date",
    "bond": "text", "side": "int8", "face_minor": "int64", "price_e12": "int64", "price_text": "text",
    "accrued_days": "int64", "accrued_minor": "int64", "principal_minor": "int64", "fees_minor": "int64",
    "settlement_minor": "int64", "currency": "text", "account": "text", "yield_e12": "int64", "yield_text": "text",
    "status": "int8", "file": "text", "line": "int32",
}  # fmt: skip

HOLDINGS: dict[str, str] = {
    "account": "text", "bond": "text", "face_minor": "int64", "as_of": "date", "file": "text", "line": "int32",
}  # fmt: skip

CASH: dict[str, str] = {
    # amount_minor is signed: money in is positive
    "entry": "text", "account": "text", "currency": "text", "value_date": "date", "booked_date": "date",
    "amount_minor": "int64", "narrative": "text", "reference": "text", "bond": "text", "file": "text", "line": "int32",
}  # fmt: skip

RATES: dict[str, str] = {"bond": "text", "from": "date", "rate_e9": "int64", "file": "text", "line": "int32"}

FACTORS: dict[str, str] = {"bond": "text", "from": "date", "factor_e12": "int64", "file": "text", "line": "int32"}

CLOSINGS: dict[str, str] = {"calendar": "text", "date": "date", "open": "bool", "file": "text", "line": "int32"}

REJECTS: dict[str, str] = {
    "file": "text", "row": "int32", "column": "text", "value": "text", "reason": "text", "code": "text",
}  # fmt: skip

TOTALS: dict[str, str] = {
    # one row per file and currency; amounts in minor units of the currency (2 digits where the currency is not known)
    "file": "text", "currency": "text", "rows_read": "int64", "rows_used": "int64", "rows_rejected": "int64",
    "rows_set_aside": "int64", "amount_read": "int64", "amount_used": "int64", "amount_rejected": "int64",
    "amount_set_aside": "int64",
}  # fmt: skip

ITEMS: dict[str, str] = {
    # one payment a row; *_row columns point into the tables named, -1 for none; amounts signed from our cash account's side
    "item": "text", "kind": "text", "account": "text", "bond": "text", "currency": "text", "ticket": "text", "broker": "text",
    "broker_reference": "text", "coupon_date": "date", "side": "int8", "face_minor": "int64", "price_e12": "int64",
    "price_text": "text", "terms_minor": "int64", "broker_minor": "int64", "desk_minor": "int64", "bank_minor": "int64",
    "terms_date": "date", "broker_date": "date", "desk_date": "date", "bank_date": "date", "bank_entries": "text",
    "state": "text",
    "bond_row": "int32", "ticket_row": "int32", "confirmation_row": "int32",
    # of a trade's terms: signed like terms_minor where it is an amount
    "terms_principal_minor": "int64", "terms_accrued_minor": "int64", "terms_accrued_days": "int64",
    "terms_fees_minor": "int64", "terms_trade_date": "date",
    # the day after which the payment's own facts say the payment is entitled: coupons and redemptions
    "record_date": "date",
}  # fmt: skip

ALLOCATIONS: dict[str, str] = {
    # which bank entry pays which item, and how much of it: several rows per item or per entry are possible
    "item_row": "int64", "cash_row": "int64", "share_minor": "int64",
}  # fmt: skip

BREAKS: dict[str, str] = {
    "item": "text", "item_row": "int64", "break": "text", "party": "text", "expected": "text", "found": "text",
    "difference": "text", "difference_minor": "int64", "cause": "text", "certainty": "text", "explanation": "text",
    "next_step": "text", "overdue_days": "int64", "stake_minor": "int64", "daily_interest_minor": "int64",
    "rate_exposure_minor": "int64", "currency": "text", "rank": "int64",
}  # fmt: skip

_DTYPES = {"date": "datetime64[D]", "int64": "int64", "int32": "int32", "int8": "int8", "bool": "bool"}


def blank_column(kind: str, length: int) -> Any:
    """A column of the given type word in which nothing is known."""
    if kind == "text":
        return Words.blank(length)
    if kind == "date":
        return np.full(length, np.datetime64("NaT"), "datetime64[D]")
    fill = MISSING if kind == "int64" else -1 if kind == "int32" else 0
    return np.full(length, fill, _DTYPES[kind])


def table(schema: Mapping[str, str], length: int = 0, **columns: Any) -> Table:
    """A table of a schema: given columns checked for name and type, the others blank. Extra columns are refused.

    Lists of text become `Words`; lists of numbers or ISO dates become numpy columns (for tests and small tables).
    """
    extra = set(columns) - set(schema)
    if extra:
        raise KeyError(f"no such columns: {sorted(extra)}")
    for column in columns.values():
        length = len(column)
        break
    out: dict[str, Any] = {}
    for name, kind in schema.items():
        column = columns.get(name)
        if column is None:
            out[name] = blank_column(kind, length)
        elif kind == "text":
            out[name] = column if isinstance(column, Words) else Words.of(column)
        else:
            out[name] = np.asarray(column, dtype=_DTYPES[kind])
        if len(out[name]) != length:
            raise ValueError(f"column {name} has {len(out[name])} rows, not {length}")
    return Table(out)
