"""A break is read by somebody who must pick up the telephone: one sentence with the numbers in it, and one with what to do.

Every kind of break has a template for both; `{fields}` are filled in for all breaks of the kind at once. These are the sentences
for breaks whose cause nobody has found yet; the search for causes replaces them where it knows better. Sentences quote amounts,
dates and references, never line numbers: they must not change when a file is sorted differently.
"""

from __future__ import annotations

import functools
import string
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler import texts
from reconciler.breaks.found import AMOUNT, DATE, Found
from reconciler.breaks.given import BANK, BROKER, DESK, Given
from reconciler.records import MISSING, Words

Array = np.ndarray[Any, Any]

ASK = {
    BROKER: "Ask {broker} for a corrected confirmation of {reference}.",
    DESK: "Have ticket {ticket} corrected.",
    BANK: "Ask the bank to correct {entries}.",
}

_AMOUNT = "{Says} {found} {currency}, {against} {expected}: {off}."
_DAY = "{against} {expected}: {days}."

SENTENCES: dict[str, str] = {
    "settlement amount": _AMOUNT,
    "payment amount": _AMOUNT,
    "accrued": "{Says} accrued interest of {found} {currency}, {against} {expected}: {off}.",
    "fees": "{Says} fees of {found} {currency}, {against} {expected}: {off}.",
    "face": "{Says} a face of {found} {currency}, {dealt} {expected}: {off}.",
    "price": "{Says} a price of {found}, {dealt} {expected}: a difference of {difference}.",
    "yield": "{Says} a yield of {found} %, {against} {expected} %: a difference of {difference}.",
    "side": "{Says} that we {found}, {dealt} {expected}.",
    "settlement date": "{Says} settlement on {found}, " + _DAY,
    "payment date": "{Says} the payment for {found}, " + _DAY,
    "trade date": "{Says} {found} as the trade date, {dealt} {expected}: {days}.",
    "currency": "{Says} {found} where the payment is in {expected}, so that the amounts cannot be compared.",
    "account": "{Says} account {found}, ours is {expected}.",
    "no confirmation": "No confirmation tells of ticket {ticket}{with_broker}{for_amount}{on_day}.",
    "no ticket": "{Broker} confirms {reference}{for_amount}{on_day}, and no ticket of ours books it.",
    "no cash": "{Due} was due on {day} and no bank entry pays it.",
    "unexplained cash": "{Entries} of {found} {currency}{in_account}{for_value} pays nothing that is expected.",
    "unknown bond": "Bond {found} is not among the bonds told, so that its payment cannot be reckoned.",
    "unsound terms": "The terms of bond {found} do not let the payment be reckoned: {fault}",
}

NEXT_STEPS: dict[str, str] = {
    "no confirmation": "Ask {broker} to confirm ticket {ticket}.",
    "no ticket": "Ask the desk whether it dealt; have the trade booked, or the confirmation cancelled.",
    "no cash": "Ask the bank {chase} {payer}.",
    "unexplained cash": "Ask the bank what {entries} is for.",
    "unknown bond": "Add the bond's terms to bonds.csv.",
    "unsound terms": "Correct or complete the bond's terms.",
    "currency": "Find out in which currency the payment was agreed, and have the other one corrected.",
}

TOLD_TWICE = {
    BROKER: ("{Broker} confirms the same trade twice, {under}.",
             "Ask {broker} to cancel the second confirmation, or whether it dealt twice."),
    DESK: ("Ticket {found} repeats ticket {expected}, which the confirmation is paired with.",
           "Have one of the two tickets cancelled, or ask for a second confirmation."),
    BANK: ("{Entries} of {found} {currency}{for_value} repeats an entry that pays what is due.",
           "Ask the bank to take one of the two entries back."),
}  # fmt: skip

NO_FAULT = "a rate, factor or date that it needs is not told."


def sentence(given: Given, found: Found) -> pa.Array:
    """What is wrong, in a sentence, for every break of a kind."""
    template = TOLD_TWICE[found.party][0] if found.kind == "told twice" else SENTENCES[found.kind]
    return _filled(template, _Fields(given, found))


def next_step(given: Given, found: Found) -> pa.Array:
    """What to do about it."""
    template = NEXT_STEPS.get(found.kind) or ASK.get(found.party, "")
    if found.kind == "told twice":
        template = TOLD_TWICE[found.party][1]
    return _filled(template, _Fields(given, found))


def _filled(template: str, fields: _Fields) -> pa.Array:
    parts: list[pa.Array | str] = []
    for literal, name, _spec, _conversion in string.Formatter().parse(template):
        parts.append(literal)
        if name:
            parts.append(getattr(fields, name))
    return texts.join([part for part in parts if not (isinstance(part, str) and not part)], len(fields.rows))


def _or(text: pa.Array, other: str) -> pa.Array:
    return pc.fill_null(text, other)


def _if_told(before: str, text: pa.Array, after: str = "") -> pa.Array:
    """The text with words around it, nothing where there is no text."""
    return pc.binary_join_element_wise(before, text, after, "")


class _Fields:
    """What the templates may name, worked out only when named; one value per break."""

    def __init__(self, given: Given, found: Found) -> None:
        self.given, self.found_rows, self.rows = given, found, found.item_row

    def _item(self, name: str) -> Any:
        column = self.given.items[name]
        return column.take(self.rows).to_arrow() if isinstance(column, Words) else column[self.rows]

    @functools.cached_property
    def digits(self) -> Array:
        return self.given.digits[self.rows]

    def _shown(self, which: str) -> pa.Array:
        """Expected or found as a sentence shows it: amounts grouped and, unless the signs differ, without sign; dates long."""
        f = self.found_rows
        values = getattr(f, which)
        if f.form == DATE:
            return texts.long_dates(values)
        if f.form == AMOUNT:
            keep = self._turned | (f.kind == "unexplained cash") | (f.kind == "accrued")
            bare = np.where(keep | (values == MISSING), values, np.abs(values))
            return texts.amounts(bare, self.digits, grouped=True)
        return _or(f.text(which, self.digits), "an unnamed one")

    @functools.cached_property
    def _turned(self) -> Array:
        """Where amounts expected and found have different signs, so that the sentence must show them."""
        f = self.found_rows
        both = (f.expected != MISSING) & (f.found != MISSING)
        return np.asarray(both & (np.sign(f.expected) * np.sign(f.found) < 0))

    @property
    def expected(self) -> pa.Array:
        return self._shown("expected")

    @property
    def found(self) -> pa.Array:
        return self._shown("found")

    @property
    def difference(self) -> pa.Array:
        return self.found_rows.text("difference", self.digits)

    @property
    def off(self) -> pa.Array:
        """How much too much or too little."""
        f = self.found_rows
        size = texts.amounts(np.abs(f.difference), self.digits, grouped=True)
        more = np.abs(f.found) > np.abs(f.expected)
        words = pa.array(["too little", "too much", "apart, with the sign turned round"])
        which = np.where(self._turned, 2, more.astype(np.int64))
        return pc.binary_join_element_wise(size, words.take(pa.array(which)), " ")

    @property
    def days(self) -> pa.Array:
        """How many days early or late."""
        days = self.found_rows.difference
        unit = np.where(np.abs(days) == 1, 0, 1) + np.where(days < 0, 0, 2)
        words = pa.array(["day early", "days early", "day late", "days late"]).take(pa.array(unit))
        return pc.binary_join_element_wise(texts.whole(np.abs(days)), words, " ")

    @property
    def currency(self) -> pa.Array:
        return self._item("currency")

    @property
    def ticket(self) -> pa.Array:
        return _or(self._item("ticket"), "without number")

    @property
    def Says(self) -> pa.Array:
        """The party as the beginning of a sentence."""
        party = self.found_rows.party
        if party == BROKER:
            return pc.binary_join_element_wise(self.Broker, "confirms", " ")
        if party == DESK:
            return texts.join(["Our ticket ", self.ticket, " says"], len(self.rows))
        return pa.repeat(pa.scalar("The bank booked"), len(self.rows))

    @property
    def against(self) -> pa.Array:
        """Whose fact it is held against."""
        return self._by_reference("the terms say", "our ticket says", "the broker confirms")

    @property
    def dealt(self) -> pa.Array:
        return self._by_reference("the trade is reckoned on", "our ticket says", "the broker confirms")

    def _by_reference(self, terms: str, desk: str, broker: str) -> pa.Array:
        words = pa.array([terms, broker, desk])
        return words.take(pa.array(self.found_rows.reference))

    @property
    def broker(self) -> pa.Array:
        return _or(self._item("broker"), "the broker")

    @property
    def Broker(self) -> pa.Array:
        return _or(self._item("broker"), "The broker")

    @property
    def with_broker(self) -> pa.Array:
        return _if_told(" with ", self._item("broker"))

    @property
    def reference(self) -> pa.Array:
        """The broker's reference, else our ticket."""
        own = _if_told("ticket ", self._item("ticket"))
        return _or(pc.coalesce(self._item("broker_reference"), own), "the trade")

    @property
    def for_amount(self) -> pa.Array:
        return _if_told(" for ", pc.binary_join_element_wise(self.expected, self.currency, " "))

    @functools.cached_property
    def _day(self) -> pa.Array:
        return texts.long_dates(self.given.expected_date[self.rows])

    @property
    def day(self) -> pa.Array:
        return _or(self._day, "a day not told")

    @property
    def on_day(self) -> pa.Array:
        return _if_told(", settling ", self._day)

    @property
    def Due(self) -> pa.Array:
        """The amount that was due, or that it is not known."""
        return _or(pc.binary_join_element_wise(self.expected, self.currency, " "), "A payment whose amount is not known")

    @property
    def chase(self) -> pa.Array:
        """Money that did not come is claimed, money that did not go is offered."""
        words = pa.array(["where the payment is; if it was not paid, claim it from", "why it was not paid, and settle it late with"])
        owed = (self.found_rows.expected != MISSING) & (self.found_rows.expected < 0)
        return words.take(pa.array(owed.astype(np.int64)))

    @property
    def payer(self) -> pa.Array:
        paying = pc.equal(self._item("kind"), "trade")
        return pc.if_else(paying, self.broker, "the paying agent")

    @functools.cached_property
    def entries(self) -> pa.Array:
        """Bank entries by name."""
        several = pc.find_substring(_or(self._item("bank_entries"), ""), ";")
        word = pc.if_else(pc.greater_equal(several, 0), "entries ", "entry ")
        names = pc.replace_substring(self._item("bank_entries"), ";", ", ")
        return _or(pc.binary_join_element_wise(word, names, ""), "the entry")

    @property
    def Entries(self) -> pa.Array:
        first, rest = pc.utf8_slice_codeunits(self.entries, 0, 1), pc.utf8_slice_codeunits(self.entries, 1)
        return texts.join([pc.utf8_upper(first), rest], len(self.rows))

    @property
    def under(self) -> pa.Array:
        """The references of a confirmation and of the one that repeats it."""
        f = self.found_rows
        first, again = _or(f.expected, "a blank reference"), _or(f.found, "a blank reference")
        both = pc.binary_join_element_wise("as ", first, " and as ", again, "")
        return pc.if_else(pc.equal(first, again), pc.binary_join_element_wise("both times as ", first, ""), both)

    @property
    def in_account(self) -> pa.Array:
        return _if_told(" in account ", self._item("account"))

    @property
    def for_value(self) -> pa.Array:
        return _if_told(", value ", texts.long_dates(self._item("bank_date")), ",")

    @property
    def fault(self) -> pa.Array:
        """What is wrong with the bond's terms."""
        at = np.where(self._item("bond_row") < len(self.given.faults), self._item("bond_row"), -1)
        return _or(self.given.faults.take(at).to_arrow(), NO_FAULT)

