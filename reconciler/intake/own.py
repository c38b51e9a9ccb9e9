"""The files of the contract in our own style: plain headings, decimal point, ISO dates. Only confirmations come in other styles."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.bonds import markets
from reconciler.intake import cells, identifiers, reading
from reconciler.intake.cells import Cells
from reconciler.intake.layouts import is_footer
from reconciler.intake.sheet import SET_ASIDE, USED, Sheet
from reconciler.money import MISSING, known_currency, minor_digits
from reconciler.problems import Problem
from reconciler.records import (
    BONDS,
    CASH,
    CLOSINGS,
    FACTORS,
    HOLDINGS,
    RATES,
    SIDES,
    STATUSES,
    TICKETS,
    Table,
    Words,
    blank_column,
    concat,
    unify,
)

BAD_SIDE = "is not a side that is known; write buy or sell."
BAD_STATUS = "is not a status that is known; write new, amended or cancelled."


class Own:
    """One of our own files: a sheet with its columns by name."""

    def __init__(self, path: Path, name: str, needed: Sequence[str], known: Sequence[str]) -> None:
        names = set(known)
        raw = reading.load(
            path,
            name,
            is_header=lambda row: len(names & {cell.strip().lower() for cell in row}) >= min(2, len(needed)),
            is_footer=is_footer,
            settle=f"its first line must name its columns, among them {', '.join(needed)}",
        )
        self.sheet = Sheet(raw)
        self.notes: list[Problem] = []
        self._ready: dict[tuple[str, str], Any] = {}
        self.place = {h.strip().lower(): i for i, h in reversed(list(enumerate(raw.headings)))}
        for column in needed:
            if column not in self.place:
                reason = f"has no column {column}; add it."
                raise reading.unreadable(name, reason, "missing-column", raw.header_line, "")
        twice = sorted({h.strip().lower() for h in raw.headings if h.strip() and [x.strip().lower() for x in raw.headings].count(h.strip().lower()) > 1} & names)
        if twice:
            raise reading.unreadable(name, f"has the column {twice[0]} twice; remove one.", "column-twice", raw.header_line)
        self.extras = {h: raw.columns[i] for i, h in enumerate(raw.headings) if h.strip() and h.strip().lower() not in names}

    def ahead(self, texts: Sequence[str] = (), **readers: Callable[[pa.Array], Cells]) -> None:
        """Converts columns two at a time: arrow and numpy let go of the interpreter. What is asked for later is ready then."""
        jobs: dict[tuple[str, str], Callable[[], Any]] = {}
        for name in texts:
            jobs["text", name] = lambda name=name: self.sheet.text(self.place.get(name))  # type: ignore[misc]
        for name, read in readers.items():
            if name in self.place:
                jobs["cells", name] = lambda name=name, read=read: read(self.sheet.column(self.place[name]))  # type: ignore[misc]
        with ThreadPoolExecutor(2) as pool:
            self._ready |= dict(zip(jobs, pool.map(lambda job: job(), jobs.values()), strict=True))

    def text(self, name: str) -> Words:
        """A text column."""
        ready = self._ready.pop(("text", name), None)
        return self.sheet.text(self.place.get(name)) if ready is None else ready

    def _typed(self, name: str, read: Callable[[pa.Array], Cells], blank: Any, code: str) -> np.ndarray:
        """A typed column, `blank` where the file has none; bad cells reject their rows."""
        place = self.place.get(name)
        if place is None:
            return np.full(len(self.sheet.raw), blank)
        ready = self._ready.pop(("cells", name), None)
        return self.sheet.take(read(self.sheet.column(place)) if ready is None else ready, place, name, code)

    def date(self, name: str) -> np.ndarray:
        """A date column."""
        return self._typed(name, own_dates, cells.NAT, "bad-date")

    def number(self, name: str, places: int) -> np.ndarray:
        """A decimal column times 10^places."""
        return self._typed(name, lambda column: cells.numbers(column, places), MISSING, "bad-number")

    def price(self, name: str) -> np.ndarray:
        """A price column times 10^12."""
        return self._typed(name, cells.prices, MISSING, "bad-price")

    def amount(self, name: str, digits: np.ndarray) -> np.ndarray:
        """An amount column in minor units."""
        return self._typed(name, lambda column: cells.amounts(column, digits), MISSING, "bad-amount")

    def coded(self, name: str, words: Mapping[str, int], blank: int, reason: str) -> np.ndarray:
        """A column of words as int8 codes."""
        read: Callable[[pa.Array], Cells] = lambda column: cells.coded(column, dict(words), blank, reason)  # noqa: E731
        return self._typed(name, read, np.int8(blank), f"bad-{name}")

    def need(self, name: str, known: np.ndarray) -> None:
        """Rejects rows in which a needed fact is blank."""
        place = self.place.get(name)
        blank = ~known & (self.sheet.fate == USED)
        self.sheet.reject(blank, place, name, "is blank; every row needs it.", "blank-cell")

    def table(self, schema: Mapping[str, str], columns: dict[str, Any]) -> Table:
        """The rows in use as a table of the schema."""
        whole = Table({**columns, **self.sheet.places()})
        found = Table({name: whole[name] for name in schema})
        used = self.sheet.used()
        return found if len(used) == len(found) else found.take(used)


def own_dates(column: pa.Array) -> Cells:
    """Dates of our own files: year-month-day and nothing else."""
    return cells.dates(column, iso=True)


def currencies(own: Own, told: Words, bond: Words, bonds: Table) -> tuple[Words, np.ndarray]:
    """The told currency, else the bond's; unknown codes reject their rows. Also the minor digits per row."""
    codes = bond.codes_in(bonds["bond"].values)
    row_of = np.full(len(bonds["bond"].values) + 1, -1, np.int64)
    row_of[bonds["bond"].codes] = np.arange(len(bonds))
    row_of[-1] = -1
    of_bond = bonds["currency"].take(row_of[codes])
    currency = told.where(told.known(), of_bond)
    texts = told.values.to_pylist()
    unknown = np.array([not known_currency(text) for text in texts] + [False])[told.codes]
    own.sheet.reject(unknown, own.place.get("currency"), "currency", "is not a currency of ISO 4217; correct the code.", "bad-currency")
    digits = np.append(minor_digits(currency.values.to_pylist()), 2)[currency.codes]
    own.sheet.currency = currency
    return currency, digits


def _negative(own: Own, name: str, values: np.ndarray, reason: str) -> None:
    bad = (values != MISSING) & (values < 0)
    own.sheet.reject(bad, own.place.get(name), name, reason, f"negative-{name}")


def tickets(path: Path, bonds: Table) -> tuple[Table, Own]:
    """tickets.csv: one row per ticket in force."""
    own = Own(path, "tickets.csv", ("ticket", "bond", "side", "face"), tuple(TICKETS) + _AS_TOLD)
    own.ahead(
        ("bond", "currency", "ticket", "price", "broker", "account", "broker_reference", "yield"),
        trade_date=own_dates, settlement_date=own_dates, price=cells.prices,
    )  # fmt: skip
    bond = own.text("bond")
    currency, digits = currencies(own, own.text("currency"), bond, bonds)
    own.ahead(**{name: lambda column: cells.amounts(column, digits) for name in ("face", "accrued", "fees", "settlement_amount")})
    face = own.amount("face", digits)
    _negative(own, "face", face, "is negative; the side says buy or sell, the face is positive.")
    columns: dict[str, Any] = {
        "ticket": own.text("ticket"), "trade_date": own.date("trade_date"), "settlement_date": own.date("settlement_date"),
        "bond": bond, "side": own.coded("side", {k: v for k, v in cells.SIDE_WORDS.items() if k in SIDES or len(k) == 1}, 0, BAD_SIDE),
        "face_minor": face, "price_e12": own.price("price"), "price_text": own.text("price"),
        "accrued_minor": own.amount("accrued", digits), "fees_minor": own.amount("fees", digits),
        "settlement_minor": own.amount("settlement_amount", digits), "currency": currency, "broker": own.text("broker"),
        "account": own.text("account"), "broker_reference": own.text("broker_reference"), "yield_e12": own.number("yield", 12),
        "yield_text": own.text("yield"), "status": own.coded("status", STATUSES, 0, BAD_STATUS),
    }  # fmt: skip
    own.sheet.amount = np.where(columns["settlement_minor"] == MISSING, 0, columns["settlement_minor"])
    _negative(own, "settlement_amount", columns["settlement_minor"], "is negative; amounts of tickets are positive, the side says which way.")
    for name in ("ticket", "bond"):
        own.need(name, columns[name].known())
    own.need("side", columns["side"] != 0)
    own.need("face", columns["face_minor"] != MISSING)
    superseded(own, columns, ("ticket",))
    return own.table(TICKETS, columns), own


_AS_TOLD = ("price", "accrued", "fees", "settlement_amount", "face", "yield")


def superseded(own: Own, columns: Mapping[str, Any], key: Sequence[str]) -> None:
    """Of several rows with one key, cancelled beats amended beats new; of equal standing the first by content is kept.

    Rows of equal standing that tell different facts are noted: which of them holds is for a person to say.
    """
    sheet = own.sheet
    gone = losing(columns, sheet.used(), key)
    sheet.set_aside(gone)
    if not len(gone):
        return
    name = key[-1]
    kept = {int(columns[name].codes[row]): row for row in sheet.used().tolist()}
    content = [_ranked(column) for fact, column in sorted(columns.items())]
    for row in gone.tolist():
        other = kept.get(int(columns[name].codes[row]))
        if other is None or columns["status"][row] != columns["status"][other]:
            continue
        if any(column[row] != column[other] for column in content):
            reason = f"stands in more than one row of equal standing with different facts; the row in line {sheet.raw.lines[other]} is used."
            own.notes.append(Problem(sheet.raw.file, int(sheet.raw.lines[row]), name, columns[name].text(row), reason, "told-apart"))


def losing(columns: Mapping[str, Any], rows: np.ndarray, key: Sequence[str], keep_equal: bool = False) -> np.ndarray:
    """The rows that a row of the same key beats; with `keep_equal` rows of equal standing all stay (they are told twice)."""
    none = np.zeros(0, np.int64)
    if not len(rows):
        return none
    last = columns[key[-1]].codes[rows]
    if len(rows) == len(columns[key[-1]].values) and np.bincount(last[last >= 0], minlength=1).max() <= 1:
        return none
    codes = [columns[name].codes[rows].astype(np.int64) for name in key]
    known = np.logical_and.reduce([columns[name].known()[rows] for name in key])
    status = columns["status"][rows].astype(np.int64)
    combined = np.zeros(len(rows), np.int64)
    for code in codes:
        combined = combined * (int(code.max()) + 2) + (code + 1)
    _values, inverse, counts = np.unique(combined, return_inverse=True, return_counts=True)
    # only keys that occur more than once need a closer look
    several = (counts[inverse] > 1) & known
    if not several.any():
        return none
    some = rows[several]
    group = inverse[several]
    content = [_ranked(columns[name])[some] for name in sorted(columns) if name not in ("status", "file", "line")]
    order = np.lexsort((*content, -status[several], group))
    some, group, standing = some[order], group[order], status[several][order]
    first = np.ones(len(some), np.bool_)
    first[1:] = group[1:] != group[:-1]
    best = standing[first][np.cumsum(first) - 1]
    return some[(standing != best) if keep_equal else ~first]


def _ranked(column: Any) -> np.ndarray:
    if isinstance(column, Words):
        return column.rank()
    return column.view(np.int64) if column.dtype.kind == "M" else column


def holdings(path: Path, bonds: Table) -> tuple[Table, Own]:
    """holdings.csv: settled holdings at the close of a day; short holdings are negative."""
    own = Own(path, "holdings.csv", ("account", "bond", "face"), tuple(HOLDINGS) + ("face",))
    bond = own.text("bond")
    _currency, digits = currencies(own, Words.blank(len(own.sheet.raw)), bond, bonds)
    columns = {"account": own.text("account"), "bond": bond, "face_minor": own.amount("face", digits), "as_of": own.date("as_of")}
    own.sheet.amount = columns["face_minor"]
    for name in ("account", "bond"):
        own.need(name, columns[name].known())
    own.need("face", columns["face_minor"] != MISSING)
    own.need("as_of", ~np.isnat(columns["as_of"]))
    return own.table(HOLDINGS, columns), own


def cash(path: Path, bonds: Table) -> tuple[Table, Own]:
    """cash.csv: what was booked to our cash accounts; money in is positive."""
    own = Own(path, "cash.csv", ("entry", "account", "amount"), tuple(CASH) + ("amount",))
    own.ahead(("bond", "currency", "entry", "account", "narrative", "reference"), value_date=own_dates, booked_date=own_dates)
    bond = own.text("bond")
    currency, digits = currencies(own, own.text("currency"), bond, bonds)
    columns = {
        "entry": own.text("entry"), "account": own.text("account"), "currency": currency, "value_date": own.date("value_date"),
        "booked_date": own.date("booked_date"), "amount_minor": own.amount("amount", digits), "narrative": own.text("narrative"),
        "reference": own.text("reference"), "bond": bond,
    }  # fmt: skip
    own.sheet.amount = columns["amount_minor"]
    own.need("entry", columns["entry"].known())
    own.need("amount", columns["amount_minor"] != MISSING)
    own.need("currency", columns["currency"].known())
    booked = columns["booked_date"]
    columns["value_date"] = np.where(np.isnat(columns["value_date"]), booked, columns["value_date"])
    own.need("value_date", ~np.isnat(columns["value_date"]))
    return own.table(CASH, columns), own


def rates(path: Path) -> tuple[Table, Own]:
    """rates.csv: fixings of floaters and steps of stepped coupons, percent a year."""
    own = Own(path, "rates.csv", ("bond", "from", "rate"), tuple(RATES) + ("rate",))
    columns = {"bond": own.text("bond"), "from": own.date("from"), "rate_e9": own.number("rate", 9)}
    own.need("bond", columns["bond"].known())
    own.need("from", ~np.isnat(columns["from"]))
    own.need("rate", columns["rate_e9"] != MISSING)
    return own.table(RATES, columns), own


def factors(path: Path) -> tuple[Table, Own]:
    """factors.csv: remaining factors of amortising bonds, index ratios of linked ones."""
    own = Own(path, "factors.csv", ("bond", "from", "factor"), tuple(FACTORS) + ("factor",))
    columns = {"bond": own.text("bond"), "from": own.date("from"), "factor_e12": own.number("factor", 12)}
    _negative(own, "factor", columns["factor_e12"], "is negative; a factor is between 0 and 1, an index ratio above 0.")
    own.need("bond", columns["bond"].known())
    own.need("from", ~np.isnat(columns["from"]))
    own.need("factor", columns["factor_e12"] != MISSING)
    return own.table(FACTORS, columns), own


def closings(path: Path) -> tuple[Table, Own]:
    """closings.csv: days that a calendar does not know as closed, or on which it is open after all."""
    own = Own(path, "closings.csv", ("calendar", "date"), tuple(CLOSINGS))
    opened = own.coded("open", {"yes": 1, "no": 0, "y": 1, "n": 0, "true": 1, "false": 0}, 0, "is not yes or no.")
    columns = {"calendar": own.text("calendar"), "date": own.date("date"), "open": opened == 1}
    own.need("calendar", columns["calendar"].known())
    own.need("date", ~np.isnat(columns["date"]))
    return own.table(CLOSINGS, columns), own


def bonds(path: Path) -> tuple[Table, Own]:
    """bonds.csv as told, blanks not filled. Contradictory or unreadable rows leave the bond without terms: unsound, not unknown."""
    own = Own(path, path.name, ("bond", "maturity"), tuple(BONDS) + ("coupon_rate", "redemption_price"))
    columns: dict[str, Any] = {name: own.text(name) for name, kind in BONDS.items() if kind == "text" and name != "file"}
    for name in ("accrual_start", "first_coupon", "last_regular_coupon", "maturity"):
        columns[name] = own.date(name)
    columns["coupon_rate_e9"] = own.number("coupon_rate", 9)
    columns["redemption_price_e12"] = own.number("redemption_price", 12)
    for name in ("frequency", "settlement_days"):
        place = own.place.get(name)
        columns[name] = (
            np.full(len(own.sheet.raw), MISSING)
            if place is None
            else own.sheet.take(cells.wholes(own.sheet.column(place)), place, name, "bad-number")
        )
    columns["currency"] = _currency_of_market(columns["currency"], columns["market"])
    _order(own, columns)
    own.need("bond", columns["bond"].known())
    _twice(own, columns)
    _slips(own, columns["bond"])
    whole = Table({**columns, **own.sheet.places()})
    whole = Table({name: whole[name] for name in BONDS})
    good = whole.take(own.sheet.used())
    return _with_unsound(whole, good, own), own


def _currency_of_market(told: Words, market: Words) -> Words:
    """The told currency, else the one of the market: amounts cannot be read without it."""
    texts = market.values.to_pylist()
    numbers = [markets.number(text) for text in texts]
    words = Words.of([markets.MARKETS[n].currency if n >= 0 else "" for n in numbers])
    return told.where(told.known(), words.take(market.codes) if len(texts) else Words.blank(len(told)))


def _order(own: Own, columns: Mapping[str, np.ndarray]) -> None:
    for first, second in (("accrual_start", "maturity"), ("first_coupon", "maturity"), ("last_regular_coupon", "maturity")):
        a, b = columns[first], columns[second]
        bad = (b <= a) if first == "accrual_start" else (b < a)
        words = first.replace("_", " ")
        reason = f"lies before the {words} or on it; one of the two dates is wrong."
        own.sheet.reject(bad, own.place.get(second), second, reason, "unsound-terms")
    negative = (columns["coupon_rate_e9"] != MISSING) & (columns["coupon_rate_e9"] < 0)
    own.sheet.reject(negative, own.place.get("coupon_rate"), "coupon_rate", "is negative; correct the coupon rate.", "unsound-terms")


def _twice(own: Own, columns: Mapping[str, Any]) -> None:
    """The same identifier twice: equal terms, one is set aside; different terms, none can be used."""
    rows = own.sheet.used()
    codes = columns["bond"].codes[rows]
    several = np.bincount(codes, minlength=len(columns["bond"].values))[codes] > 1 if len(codes) else np.zeros(0, np.bool_)
    if not several.any():
        return
    some = rows[several]
    content = np.stack([_ranked(columns[name])[some] for name in sorted(columns)], axis=1)
    bond = columns["bond"].codes[some]
    for code in np.unique(bond).tolist():
        mine = np.flatnonzero(bond == code)
        if (content[mine] == content[mine[0]]).all():
            own.sheet.set_aside(some[mine[1:]])
            continue
        mask = np.zeros(len(own.sheet.raw), np.bool_)
        mask[some[mine]] = True
        reason = "stands here more than once with different terms; keep the right row and remove the others."
        own.sheet.reject(mask, own.place["bond"], "bond", reason, "bond-twice")


def _slips(own: Own, bond: Words) -> None:
    wrong = identifiers.check_digits_wrong(bond.values)
    rows = np.flatnonzero(np.append(wrong, False)[bond.codes] & (own.sheet.fate != SET_ASIDE))
    for row in rows.tolist():
        reason = "is written like an ISIN but its check digit is wrong; the row is used under this code, check it."
        own.notes.append(Problem(own.sheet.raw.file, int(own.sheet.raw.lines[row]), "bond", bond.text(row), reason, "check-digit"))


def _with_unsound(whole: Table, good: Table, own: Own) -> Table:
    """The good rows, and for every identifier that only occurs in rejected rows one row without terms."""
    bad = whole.take(own.sheet.fate == 1)
    if not len(bad):
        return good
    shared = unify(good["bond"], bad["bond"])
    lost = np.flatnonzero(~np.isin(shared[1].codes, shared[0].codes) & (shared[1].codes >= 0))
    _first, index = np.unique(shared[1].codes[lost], return_index=True)
    lost = lost[index]
    if not len(lost):
        return good
    empty: dict[str, Any] = {name: blank_column(kind, len(lost)) for name, kind in BONDS.items()}
    kept = bad.take(lost)
    empty |= {"bond": kept["bond"], "description": kept["description"], "currency": kept["currency"], "file": kept["file"]}
    empty["line"] = np.zeros(len(lost), np.int32)
    return concat([good, Table(empty)])
