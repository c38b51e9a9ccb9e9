"""A party that should have spoken and did not, or spoke twice, is a break too; so is cash that nobody expects.

A ticket asks for a confirmation and a confirmation for a ticket, always. Cash is asked for once its day has passed; on the day
itself the item is due, before that nothing is missing. A ticket that repeats another one asks for nothing more: it is told
twice, and neither confirmation nor cash is expected for it. Items on bonds whose terms are not known or not sound say so once,
on the side of the terms.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.breaks.found import AMOUNT, WORD, Found, found, nothing
from reconciler.breaks.given import BANK, BROKER, DESK, TERMS, Given
from reconciler.records import MISSING

Array = np.ndarray[Any, Any]


def no_confirmation(given: Given) -> Iterator[Found]:
    """Tickets that no broker confirms."""
    items = given.items
    missing = given.trade & (items["ticket_row"] >= 0) & (items["confirmation_row"] < 0)
    missing[given.repeated_tickets[0]] = False
    rows = np.flatnonzero(missing)
    yield found("no confirmation", BROKER, rows, AMOUNT, given.expected_minor[rows], nothing(rows))


def no_ticket(given: Given) -> Iterator[Found]:
    """Confirmations of trades that the desk did not book, or cancelled."""
    items = given.items
    rows = np.flatnonzero(given.trade & (items["ticket_row"] < 0) & (items["confirmation_row"] >= 0))
    yield found("no ticket", DESK, rows, AMOUNT, given.expected_minor[rows], nothing(rows))


def overdue(given: Given) -> Array:
    """True for items whose cash should have come before today and did not."""
    return np.asarray(waits_for_cash(given) & (given.expected_date < given.date))


def waits_for_cash(given: Given) -> Array:
    """True for items that no entry pays, and that need one."""
    waiting: Array = (given.items["bank_minor"] == MISSING) & ~given.bank_only & (given.expected_minor != 0)
    waiting[given.repeated_tickets[0]] = False
    return waiting


def no_cash(given: Given) -> Iterator[Found]:
    """Payments whose day has passed without cash."""
    rows = np.flatnonzero(overdue(given))
    expected = given.expected_minor[rows]
    off = np.where(expected == MISSING, MISSING, -expected)
    yield found("no cash", BANK, rows, AMOUNT, expected, nothing(rows), off)


def unexplained_cash(given: Given) -> Iterator[Found]:
    """Entries that pay nothing known."""
    twice = given.bank_only.copy()
    twice[given.repeated_entries[0]] = False
    rows = np.flatnonzero(twice)
    amount = given.items["bank_minor"][rows]
    yield found("unexplained cash", BANK, rows, AMOUNT, nothing(rows), amount, amount)


def told_twice(given: Given) -> Iterator[Found]:
    """Confirmations, tickets and entries that repeat another one."""
    rows, again = given.repeated_confirmations
    first = given.items["broker_reference"].take(rows)
    second = given.confirmations["broker_reference"].take(again)
    yield found("told twice", BROKER, rows, WORD, first.to_arrow(), second.to_arrow(), other=again)
    rows, original = given.repeated_tickets
    first = given.tickets["ticket"].take(original)
    yield found("told twice", DESK, rows, WORD, first.to_arrow(), given.items["ticket"].take(rows).to_arrow(), other=original)
    rows, original = given.repeated_entries
    amount = given.items["bank_minor"][rows]
    yield found("told twice", BANK, rows, AMOUNT, nothing(rows), amount, amount, other=original)


def unknown_bond(given: Given) -> Iterator[Found]:
    """Payments on a bond that bonds.csv does not have."""
    rows = np.flatnonzero((given.items["bond_row"] < 0) & ~given.bank_only)
    yield _on_bond("unknown bond", given, rows)


def unsound_terms(given: Given) -> Iterator[Found]:
    """Payments that the bond's terms, though told, do not let us reckon."""
    items = given.items
    known = items["bond_row"] >= 0
    sound = np.append(given.terms.sound, True)[np.where(known, items["bond_row"], -1)]
    # Terms that are sound as a whole may still lack a rate for this payment; a trade without face or price lacks facts, not terms.
    dealt = (items["face_minor"] != MISSING) & (items["price_e12"] != MISSING) & ~np.isnat(given.expected_date)
    silent = (items["terms_minor"] == MISSING) & (dealt | ~given.trade)
    rows = np.flatnonzero(known & ~given.bank_only & (~sound | silent))
    yield _on_bond("unsound terms", given, rows)


def _on_bond(kind: str, given: Given, rows: Array) -> Found:
    told = given.items["bond"].take(rows).to_arrow()
    return found(kind, TERMS, rows, WORD, pa.nulls(len(rows), pa.string()), told)
