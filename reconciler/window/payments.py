"""One payment, four accounts side by side: silent where they agree, plain where they differ.

The columns of the lists of payments (breaks, due, agreed), declared as data: what a page of rows shows, how rows rank, what is
copied and exported. Every word and figure is looked up in the day's tables; a difference is never worked out here.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.records import MISSING, PARTIES, STATES, Words, gather
from reconciler.window import figures
from reconciler.window.sheet import Cell, Column, Facet, Fact, Rows, Sheet, facet_of, texts
from reconciler.window.search import Index

MISSING_WORDS = {
    # kind of break: what the party's cell says
    "no confirmation": "silent",
    "no ticket": "no ticket",
    "no cash": "no cash",
}
AMOUNT_KINDS = ("settlement amount", "payment amount", "accrued", "fees", "face")
DATE_KINDS = ("settlement date", "payment date", "trade date")
CERTAINTY_TONES = {"proved": "proved", "likely": "day", "open": "soft"}
CERTAINTY_WORDS = {"proved": "proved to the {unit}", "likely": "likely", "open": "open"}
BROKEN = STATES.index("break")


class Payments:
    """Some of a day's items, in the list's own order: `rows` are item row numbers."""

    def __init__(self, day: Any, overview: Any, rows: np.ndarray) -> None:
        self.day, self.overview = day, overview
        self.items, self.breaks = day.items, day.breaks
        self.rows = np.asarray(rows, np.int64)
        self.year = day.date.astype(object).year if isinstance(day.date, np.datetime64) else day.date.year
        self.first = overview.first_break[self.rows]
        used = np.unique(overview.digits[self.rows]) if len(rows) else np.array([2])
        # decimal points align on the finest currency in the list
        self.finest = int(used.max())

    def item(self, name: str, at: Rows) -> Any:
        """A column of the items at some rows of the list: `Words` or numpy."""
        column = self.items[name]
        return column.take(self.rows[at]) if isinstance(column, Words) else column[self.rows[at]]

    def of_break(self, name: str, at: Rows) -> Any:
        """A column of the rows' first breaks; blank where a row has none."""
        column, rows = self.breaks[name], self.first[at]
        return column.take(rows) if isinstance(column, Words) else gather(column, rows)

    def whole(self, name: str) -> Any:
        """A column of the items for every row of the list."""
        return self.item(name, np.arange(len(self.rows)))


def title_of(kind: str, side: int, face_text: str, description: str, narrative: str = "") -> str:
    """A payment in one line: "Buy 5,000,000 Marlow Gas 4.625 2031"."""
    if kind == "trade":
        return " ".join(part for part in ({1: "Buy", -1: "Sell"}.get(side, "Trade"), face_text, description) if part)
    if kind == "coupon":
        return f"Coupon on {face_text} {description}"
    if kind == "redemption":
        return f"Redemption of {face_text} {description}"
    return narrative or "Bank entry"


def _payment(data: Payments, at: Rows) -> list[Cell]:
    kinds, names = texts(data.item("kind", at)), texts(data.overview.description.take(data.rows[at]))
    sides, faces = data.item("side", at).tolist(), data.item("face_minor", at).tolist()
    digits = data.overview.digits[data.rows[at]].tolist()
    tickets, brokers = texts(data.item("ticket", at)), texts(data.item("broker", at))
    accounts, entries = texts(data.item("account", at)), texts(data.item("bank_entries", at))
    references = texts(data.item("broker_reference", at))
    days = np.where(np.isnat(data.item("terms_date", at)), data.item("desk_date", at), data.item("terms_date", at))
    bank_days = data.item("bank_date", at)
    cells = []
    for i, kind in enumerate(kinds):
        face = figures.face(faces[i], digits[i])
        title = title_of(kind, sides[i], face, names[i], f"Bank entry {entries[i]}".strip())
        when = figures.date(days[i], data.year)
        if kind == "trade":
            who = brokers[i] or "no broker told"
            small = (tickets[i] or references[i], f"settles {when}" if when else "", who)
        elif kind == "bank":
            small = (f"booked for {figures.date(bank_days[i], data.year)}", names[i], accounts[i])
        else:
            small = (f"due {when}" if when else "", accounts[i])
        cells.append(Cell(title, "  ·  ".join(part for part in small if part), strong=True))
    return cells


def _terms(data: Payments, at: Rows) -> list[Cell]:
    amounts, digits = data.item("terms_minor", at).tolist(), data.overview.digits[data.rows[at]].tolist()
    currencies = texts(data.item("currency", at))
    broken = data.overview.party_breaks[0][data.rows[at]]
    words = texts(data.breaks["break"].take(broken))
    cells = []
    for i, minor in enumerate(amounts):
        if words[i]:
            cells.append(Cell(words[i].removeprefix("unsound ").capitalize() if words[i] == "unsound terms" else
                              words[i], "terms not usable", "?", "silent"))
            continue
        shift = data.finest - digits[i]
        cells.append(Cell(figures.amount(minor, digits[i], signed=True), currencies[i], shift=shift))
    return cells


def _party_cells(party: int, column: str) -> Any:
    def show(data: Payments, at: Rows) -> list[Cell]:
        rows = data.rows[at]
        found_rows = data.overview.party_breaks[party][rows]
        told = (data.items[column][rows] != MISSING).tolist()
        states = data.overview.state[rows].tolist()
        digits = data.overview.digits[rows].tolist()
        breaks = data.breaks
        kinds = texts(breaks["break"].take(found_rows))
        finds, differences = texts(breaks["found"].take(found_rows)), texts(breaks["difference"].take(found_rows))
        cells = []
        for i, kind in enumerate(kinds):
            if kind:
                cells.append(break_cell(kind, finds[i], differences[i], data.year, data.finest - digits[i]))
            elif told[i]:
                cells.append(Cell("=", tone="quiet"))
            elif party == PARTIES.index("Bank") and STATES[states[i]] == "due":
                cells.append(Cell("due", tone="quiet"))
            else:
                cells.append(Cell())
        return cells

    return show


def break_cell(kind: str, found: str, difference: str, year: int, shift: int = 0) -> Cell:
    """How a party's cell tells its most urgent break: the figure found, and by how much it is off."""
    if kind in MISSING_WORDS:
        return Cell(MISSING_WORDS[kind], "", "∅", "silent")
    if kind in DATE_KINDS:
        day = figures.date(np.datetime64(found), year) if found else ""
        return Cell(day, days_apart(difference, kind), "←" if difference.startswith("-") else "→", "day")
    if kind == "told twice":
        return Cell("told twice", figures.grouped(found), "2×", "differ")
    if kind == "unexplained cash":
        return Cell(figures.grouped(found, signed=True), "unexplained", "?", "silent", shift)
    if kind in ("unknown bond", "unsound terms"):
        return Cell(kind, "", "?", "silent")
    by = figures.grouped(difference, signed=True)
    if kind in ("settlement amount", "payment amount"):
        return Cell(figures.grouped(found, signed=True), by, "≠", "differ", shift)
    return Cell(figures.grouped(found), f"{kind} {by}".strip(), "≠", "differ")


def days_apart(difference: str, kind: str = "") -> str:
    """ "-1" as "1 day early", for trade dates "trade date, 1 day early"."""
    try:
        days = int(float(difference))
    except ValueError:
        return kind
    words = f"{figures.count(abs(days), 'day')} {'early' if days < 0 else 'late'}"
    return f"{kind}, {words}" if kind == "trade date" else words


def _why(data: Payments, at: Rows) -> list[Cell]:
    causes, sentences = texts(data.of_break("cause", at)), texts(data.of_break("explanation", at))
    kinds, parties = texts(data.of_break("break", at)), texts(data.of_break("party", at))
    certainties = texts(data.of_break("certainty", at))
    more = (data.overview.break_count[data.rows[at]] - 1).tolist()
    states = data.overview.state[data.rows[at]].tolist()
    digits = data.overview.digits[data.rows[at]].tolist()
    cells = []
    for i, kind in enumerate(kinds):
        if not kind:
            cells.append(Cell(STATES[states[i]], tone="soft"))
            continue
        unit = "cent" if digits[i] == 2 else "last unit"
        small = CERTAINTY_WORDS.get(certainties[i], "open").format(unit=unit)
        if more[i] > 0:
            small += f"  ·  {figures.count(more[i], 'more break')}"
        text = causes[i] or sentences[i] or f"{kind}, {parties[i]}"
        text = text[:1].upper() + text[1:]
        cells.append(Cell(text, small, {"proved": "✓", "likely": "≈"}.get(certainties[i], ""),
                          CERTAINTY_TONES.get(certainties[i], "soft")))
    return cells


def _overdue(data: Payments, at: Rows) -> list[Cell]:
    days = data.of_break("overdue_days", at).tolist()
    return [Cell(f"{day} d" if day != MISSING and day > 0 else "", tone="soft") for day in days]


def _stake(data: Payments, at: Rows) -> list[Cell]:
    stakes = data.of_break("stake_minor", at).tolist()
    digits = data.overview.digits[data.rows[at]].tolist()
    currencies = texts(data.item("currency", at))
    return [Cell(figures.amount(stake, digits[i]), currencies[i] if stake != MISSING else "", shift=data.finest - digits[i],
                 strong=True) for i, stake in enumerate(stakes)]  # fmt: skip


def _scaled(data: Payments, minor: np.ndarray) -> np.ndarray:
    """Minor units of different currencies on one scale, for ordering only."""
    scale = 10 ** (data.finest - data.overview.digits[data.rows])
    return np.where(minor == MISSING, MISSING, minor * scale)


def _day_rank(days: np.ndarray) -> np.ndarray:
    return np.where(np.isnat(days), MISSING, days.astype(np.int64))


def _payment_rank(data: Payments) -> np.ndarray:
    names = data.overview.description.rank()[data.rows].astype(np.int64)
    kinds = data.whole("kind").rank().astype(np.int64)
    return (names << 4) | (kinds + 1)


def _party_rank(party: int, column: str) -> Any:
    def rank(data: Payments) -> np.ndarray:
        # those with a break first, by how urgent it is; then those that spoke
        found = data.overview.party_breaks[party][data.rows]
        urgency = np.append(data.breaks["rank"], 0)[found]
        told = data.items[column][data.rows] != MISSING
        return np.where(found >= 0, urgency, np.where(told, 2**40, 2**41))

    return rank


def _break_rank(name: str) -> Any:
    def rank(data: Payments) -> np.ndarray:
        column = data.breaks[name]
        values = column.rank() if isinstance(column, Words) else column
        return gather(np.asarray(values, np.int64), data.first)

    return rank


COLUMNS: tuple[Column, ...] = (
    Column("payment", "Payment", "What is paid; below it ticket, date and counterparty", _payment, _payment_rank, 310,
           stretch=3),
    Column("terms", "Terms", "What the bond's own terms say must be paid; a payment by us is negative", _terms,
           lambda d: _scaled(d, d.whole("terms_minor")), 90, right=True),
    Column("broker", "Broker", "What the broker confirmed: = where it agrees with the terms",
           _party_cells(1, "broker_minor"), _party_rank(1, "broker_minor"), 72, right=True),
    Column("desk", "Desk", "What our own ticket says: = where it agrees with the terms", _party_cells(2, "desk_minor"),
           _party_rank(2, "desk_minor"), 72, right=True),
    Column("bank", "Bank", "What was booked to our cash account: = where it agrees with the terms",
           _party_cells(3, "bank_minor"), _party_rank(3, "bank_minor"), 72, right=True),
    Column("why", "Why", "The cause found for the most urgent break, and how certain it is", _why, _break_rank("cause"), 230,
           stretch=2),
    Column("overdue", "Overdue", "Business days since the payment was due", _overdue, _break_rank("overdue_days"), 60,
           right=True, descending_first=True),
    Column("stake", "At stake", "What can be lost on this payment while the break is open", _stake,
           lambda d: _scaled(d, gather(d.breaks["stake_minor"], d.first)), 80, right=True, descending_first=True),
)  # fmt: skip



def _plain(name: str, tone: str = "soft") -> Any:
    return lambda data, at: [Cell(text, tone=tone) for text in texts(data.item(name, at))]


def _when(data: Payments, at: Rows) -> list[Cell]:
    return [Cell(figures.date(day, data.year)) for day in data.item("terms_date", at)]


QUIET_COLUMNS: tuple[Column, ...] = (
    *COLUMNS[:5],
    Column("day", "Day", "The day the terms say it is paid", _when, lambda d: _day_rank(d.whole("terms_date")), 90, stretch=1),
    Column("account", "Account", "The cash account it is paid to or from", _plain("account"),
           lambda d: d.whole("account").rank(), 150, stretch=2),
    Column("state", "State", "Agrees, within tolerance or due", _plain("state"), lambda d: d.whole("state").rank(), 120,
           stretch=1),
)  # fmt: skip
"""Of the lists without breaks."""


def _item_fact(title: str, name: str, kind: str = "text") -> Fact:
    digits = (lambda d, at: d.overview.digits[d.rows[at]]) if kind == "amount" else None
    return Fact(title, kind, lambda d, at: d.item(name, at), digits)


def _break_fact(title: str, name: str, kind: str = "text") -> Fact:
    digits = (lambda d, at: d.overview.digits[d.rows[at]]) if kind == "amount" else None
    return Fact(title, kind, lambda d, at: d.of_break(name, at), digits)


ITEM_FACTS: tuple[Fact, ...] = (
    _item_fact("item", "item"), _item_fact("kind", "kind"), _item_fact("account", "account"), _item_fact("bond", "bond"),
    Fact("description", "text", lambda d, at: d.overview.description.take(d.rows[at])),
    _item_fact("currency", "currency"), _item_fact("ticket", "ticket"), _item_fact("broker", "broker"),
    _item_fact("broker reference", "broker_reference"), _item_fact("coupon date", "coupon_date", "date"),
    _item_fact("face", "face_minor", "amount"), _item_fact("price", "price_text"),
    _item_fact("terms amount", "terms_minor", "amount"), _item_fact("broker amount", "broker_minor", "amount"),
    _item_fact("desk amount", "desk_minor", "amount"), _item_fact("bank amount", "bank_minor", "amount"),
    _item_fact("terms date", "terms_date", "date"), _item_fact("broker date", "broker_date", "date"),
    _item_fact("desk date", "desk_date", "date"), _item_fact("bank date", "bank_date", "date"),
    _item_fact("bank entries", "bank_entries"), _item_fact("state", "state"),
)  # fmt: skip

BREAK_FACTS: tuple[Fact, ...] = (
    Fact("breaks", "count", lambda d, at: d.overview.break_count[d.rows[at]].astype(np.int64)),
    _break_fact("break", "break"), _break_fact("party", "party"), _break_fact("expected", "expected"),
    _break_fact("found", "found"), _break_fact("difference", "difference"), _break_fact("cause", "cause"),
    _break_fact("certainty", "certainty"), _break_fact("explanation", "explanation"),
    _break_fact("next step", "next_step"), _break_fact("overdue days", "overdue_days", "count"),
    _break_fact("money at stake", "stake_minor", "amount"), _break_fact("rank", "rank", "count"),
)  # fmt: skip


def _index(data: Payments) -> Index:
    digits = data.overview.digits[data.rows]
    words = {name: data.whole(name) for name in
             ("ticket", "bond", "broker", "broker_reference", "account", "bank_entries", "kind", "currency")}  # fmt: skip
    words["description"] = data.overview.description.take(data.rows)
    if (data.first >= 0).any():
        words |= {name: data.breaks[name].take(data.first) for name in ("cause", "break", "explanation")}
    amounts = {name: (data.whole(name), digits) for name in
               ("terms_minor", "broker_minor", "desk_minor", "bank_minor", "face_minor")}  # fmt: skip
    dates = {name: data.whole(name) for name in ("terms_date", "broker_date", "desk_date", "bank_date", "coupon_date")}
    return Index(len(data.rows), words, amounts, dates)


def _facets(data: Payments, broken: bool) -> list[Facet]:
    facets = []
    if broken:
        facets = [
            Facet("party", "Party", PARTIES, bits=data.overview.party_bits[data.rows]),
            Facet("kind", "Kind of break", data.overview.kinds, bits=data.overview.kind_bits[data.rows]),
        ]
    else:
        facets = [facet_of("kind", "Kind", data.whole("kind"))]
    facets += [facet_of("currency", "Currency", data.whole("currency")), facet_of("broker", "Broker", data.whole("broker")),
               facet_of("account", "Account", data.whole("account"))]  # fmt: skip
    return facets


def payments_sheet(day: Any, overview: Any, states: tuple[str, ...]) -> Sheet:
    """The list of the day's items in some states; breaks by urgency, the others by date and item order."""
    wanted = np.isin(overview.state, [STATES.index(state) for state in states])
    rows = np.flatnonzero(wanted)
    broken = "break" in states
    if broken:
        first = overview.first_break[rows]
        urgency = np.where(first >= 0, np.append(day.breaks["rank"], 0)[first], np.iinfo(np.int64).max)
        rows = rows[np.argsort(urgency, kind="stable")]
    else:
        rows = rows[np.argsort(_day_rank(day.items["terms_date"][rows]), kind="stable")]
    data = Payments(day, overview, rows)
    columns = COLUMNS if broken else QUIET_COLUMNS
    facts = ITEM_FACTS + BREAK_FACTS if broken else ITEM_FACTS
    return Sheet(data, len(rows), columns, facts, _index(data), _facets(data, broken))
