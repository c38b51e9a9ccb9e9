"""What the cells of a list of payments say: who differs and by how much, who did not speak, why, since when, what is at stake.

Each function gives the cells of a page of rows. Every word and figure is looked up in the day's tables; a difference is never
worked out here.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.records import MISSING, PARTIES, STATES, Words, gather
from reconciler.window import figures
from reconciler.window.sheet import Cell, Rows, texts

MISSING_WORDS = {
    # kind of break: what the party's cell says
    "no confirmation": "silent",
    "no ticket": "no ticket",
    "no cash": "no cash",
}
_SAY_ALL = ("no confirmation", "no ticket", "no cash", "unexplained cash", "told twice", "unknown bond", "unsound terms")
DATE_KINDS = ("settlement date", "payment date", "trade date")
CERTAINTY_TONES = {"proved": "proved", "likely": "day", "open": "soft"}
CERTAINTY_WORDS = {"proved": "proved to the {unit}", "likely": "likely", "open": "open"}


class Payments:
    """Some of a day's items, in the list's own order: `rows` are item row numbers."""

    def __init__(self, day: Any, overview: Any, rows: np.ndarray) -> None:
        self.day, self.overview = day, overview
        self.items, self.breaks = day.items, day.breaks
        self.rows = np.asarray(rows, np.int64)
        self.year = day.date.astype(object).year if isinstance(day.date, np.datetime64) else day.date.year
        self.first = overview.first_break[self.rows]
        self.searching = getattr(day, "explanations", None) is None
        self.telling = overview.telling_break[self.rows]
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

    def of_telling(self, name: str, at: Rows) -> Words:
        """A column of text of the breaks that say most about the rows; blank where a row has none."""
        return self.breaks[name].take(self.telling[at])

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


def payment_cells(data: Payments, at: Rows) -> list[Cell]:
    """What is paid; below it ticket, day and counterparty."""
    kinds, names = texts(data.item("kind", at)), texts(data.overview.description.take(data.rows[at]))
    sides, faces = data.item("side", at).tolist(), data.item("face_minor", at).tolist()
    digits = data.overview.digits[data.rows[at]].tolist()
    tickets, brokers = texts(data.item("ticket", at)), texts(data.item("broker", at))
    accounts, entries = texts(data.item("account", at)), texts(data.item("bank_entries", at))
    references = texts(data.item("broker_reference", at))
    days = np.where(np.isnat(data.item("terms_date", at)), data.item("desk_date", at), data.item("terms_date", at))
    narratives = texts(data.day.source.cash["narrative"].take(data.overview.cash_row[data.rows[at]]))
    bank_days = data.item("bank_date", at)
    cells = []
    for i, kind in enumerate(kinds):
        face = figures.face(faces[i], digits[i])
        title = title_of(kind, sides[i], face, names[i], narratives[i])
        when = figures.date(days[i], data.year)
        if kind == "trade":
            who = brokers[i] or "no broker told"
            small = (tickets[i] or references[i], f"settles {when}" if when else "", who)
        elif kind == "bank":
            small = (f"entry {entries[i]}", f"booked for {figures.date(bank_days[i], data.year)}", names[i], accounts[i])
        else:
            small = (f"due {when}" if when else "", accounts[i])
        cells.append(Cell(title, "  ·  ".join(part for part in small if part), strong=True))
    return cells


def terms_cells(data: Payments, at: Rows) -> list[Cell]:
    """What the terms say, signed, with its currency below; or that the terms cannot be used."""
    amounts, digits = data.item("terms_minor", at).tolist(), data.overview.digits[data.rows[at]].tolist()
    currencies = texts(data.item("currency", at))
    broken = data.overview.party_breaks[0][data.rows[at]]
    words = texts(data.breaks["break"].take(broken))
    cells = []
    for i, minor in enumerate(amounts):
        if words[i]:
            cells.append(Cell(words[i], currencies[i], "?", "silent"))
            continue
        shift = data.finest - digits[i]
        cells.append(Cell(figures.amount(minor, digits[i], signed=True), currencies[i], shift=shift))
    return cells


def party_cells(party: int, column: str) -> Any:
    """The cells of a party's column: "=" where it agrees, nothing where it has not to speak, else its most urgent break."""

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
    """ "-1" as "1 day early", for trade dates "trade date −1 d"."""
    try:
        days = int(float(difference))
    except ValueError:
        return kind
    if kind == "trade date":
        return f"{kind} {figures.MINUS if days < 0 else '+'}{abs(days)} d"
    return f"{figures.count(abs(days), 'day')} {'early' if days < 0 else 'late'}"


def why_cells(data: Payments, at: Rows) -> list[Cell]:
    """The cause of the most urgent break, how certain it is, and how many more breaks the payment has."""
    causes, sentences = texts(data.of_telling("cause", at)), texts(data.of_telling("explanation", at))
    kinds = texts(data.of_telling("break", at))
    certainties = texts(data.of_telling("certainty", at))
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
        if data.searching and not causes[i]:
            small = "searching for the cause …"
        if more[i] > 0:
            small += f"  ·  {figures.count(more[i], 'more break')}"
        # without a cause the kind stands first, and the sentence about it after the certainty
        text = causes[i] or (kind if kind in _SAY_ALL else f"{kind} differs")
        text = text[:1].upper() + text[1:]
        if not causes[i] and sentences[i] and not data.searching:
            small += f"  ·  {sentences[i]}"
        cells.append(Cell(text, small, {"proved": "✓", "likely": "≈"}.get(certainties[i], ""),
                          CERTAINTY_TONES.get(certainties[i], "soft")))
    return cells


def overdue_cells(data: Payments, at: Rows) -> list[Cell]:
    """Business days since the payment was due."""
    days = data.of_break("overdue_days", at).tolist()
    return [Cell(f"{day} d" if day != MISSING and day > 0 else "", tone="soft") for day in days]


def stake_cells(data: Payments, at: Rows) -> list[Cell]:
    """What can be lost while the break is open, with its currency."""
    stakes = data.of_break("stake_minor", at).tolist()
    digits = data.overview.digits[data.rows[at]].tolist()
    currencies = texts(data.item("currency", at))
    return [Cell(figures.amount(stake, digits[i]), currencies[i] if stake != MISSING else "", shift=data.finest - digits[i],
                 strong=True) for i, stake in enumerate(stakes)]  # fmt: skip


def text_cells(name: str, tone: str = "soft") -> Any:
    """The cells of a column of words of the items."""
    return lambda data, at: [Cell(text, tone=tone) for text in texts(data.item(name, at))]


def day_cells(data: Payments, at: Rows) -> list[Cell]:
    """The day the terms say it is paid."""
    return [Cell(figures.date(day, data.year)) for day in data.item("terms_date", at)]
