"""The sentences as a clerk reads them; the pinned wording is ours, what is tested is that the numbers in it are right."""

from __future__ import annotations

import re
from typing import Any

import pytest

from reconciler.breaks import wording
from reconciler.records import BREAK_KINDS, MISSING
from tests.breaks.hand import TRUE, UNSOUND, YEN, One, coupon, entry, found, only

AMOUNT = TRUE["settlement_minor"]
SILENT = {"terms_minor": MISSING, "terms_accrued_minor": MISSING, "terms_date": "NaT"}

CASES: list[tuple[One, str, str]] = [
    (One(broker={"settlement_minor": AMOUNT + 500}),
     "Tamarisk & Vane confirms 1,006,671.67 USD, the terms say 1,006,666.67: 5.00 too much.",
     "Ask Tamarisk & Vane for a corrected confirmation of TV0."),
    (One(desk={"settlement_minor": AMOUNT - 2}),
     "Our ticket T-0 says 1,006,666.65 USD, the terms say 1,006,666.67: 0.02 too little.", "Have ticket T-0 corrected."),
    (One(bank=[{"amount_minor": AMOUNT}]),
     "The bank booked 1,006,666.67 USD, the terms say -1,006,666.67: 2,013,333.34 apart, with the sign turned round.",
     "Ask the bank to correct entry E0."),
    (coupon(bond=YEN, bank=[{"amount_minor": 1_500_000}, {"amount_minor": 1}]),
     "The bank booked 1,500,001 JPY, the terms say 2,000,000: 499,999 too little.", "Ask the bank to correct entries E0, E1."),
    (One(broker={"accrued_minor": 1_166_600}),
     "Tamarisk & Vane confirms accrued interest of 11,666.00 USD, the terms say 11,666.67: 0.67 too little.",
     "Ask Tamarisk & Vane for a corrected confirmation of TV0."),
    (One(broker={"fees_minor": 2500}, desk={"fees_minor": 0}),
     "Tamarisk & Vane confirms fees of 25.00 USD, our ticket says 0.00: 25.00 too much.",
     "Ask Tamarisk & Vane for a corrected confirmation of TV0."),
    (One(broker={"face_minor": 10_000_000}),
     "Tamarisk & Vane confirms a face of 100,000.00 USD, the trade is reckoned on 1,000,000.00: 900,000.00 too little.",
     "Ask Tamarisk & Vane for a corrected confirmation of TV0."),
    (One(desk={"price_e12": 99_250_000_000_000}),
     "Our ticket T-0 says a price of 99.25, the trade is reckoned on 99.5: a difference of -0.25.", "Have ticket T-0 corrected."),
    (One(broker={"settlement_date": "2026-04-01"}),
     "Tamarisk & Vane confirms settlement on 1 Apr 2026, the terms say 30 Mar 2026: 2 days late.",
     "Ask Tamarisk & Vane for a corrected confirmation of TV0."),
    (coupon(bank=[{"amount_minor": 2_000_000, "value_date": "2026-03-29"}]),
     "The bank booked the payment for 29 Mar 2026, the terms say 30 Mar 2026: 1 day early.", "Ask the bank to correct entry E0."),
    (One(broker={"currency": "EUR"}),
     "Tamarisk & Vane confirms EUR where the payment is in USD, so that the amounts cannot be compared.",
     "Find out in which currency the payment was agreed, and have the other one corrected."),
    (One(broker=None), "No confirmation tells of ticket T-0 with Tamarisk & Vane for 1,006,666.67 USD, settling 30 Mar 2026.",
     "Ask Tamarisk & Vane to confirm ticket T-0."),
    (One(desk=None), "Tamarisk & Vane confirms TV0 for 1,006,666.67 USD, settling 30 Mar 2026, and no ticket of ours books it.",
     "Ask the desk whether it dealt; have the trade booked, or the confirmation cancelled."),
    (One(bank=[]), "1,006,666.67 USD was due on 30 Mar 2026 and no bank entry pays it.",
     "Ask the bank why it was not paid, and settle it late with Tamarisk & Vane."),
    (coupon(bank=[]), "20,000.00 USD was due on 30 Mar 2026 and no bank entry pays it.",
     "Ask the bank where the payment is; if it was not paid, claim it from the paying agent."),
    (entry(amount_minor=-1234567), "Entry E0 of -12,345.67 USD in account Northquay main, value 30 Mar 2026, pays nothing that is "
     "expected.", "Ask the bank what entry E0 is for."),
    (One(bond=-1, terms=SILENT), "Bond an unnamed one is not among the bonds told, so that its payment cannot be reckoned.",
     "Add the bond's terms to bonds.csv."),
]  # fmt: skip


@pytest.mark.parametrize(("one", "sentence", "step"), CASES)
def test_sentences(one: One, sentence: str, step: str) -> None:
    broken = only(found([one])[1])
    assert (broken["explanation"], broken["next_step"]) == (sentence, step)


def test_terms_that_are_not_sound_say_what_is_wrong_with_them() -> None:
    broken = only(found([One(bond=UNSOUND, terms={"terms_minor": MISSING, "terms_accrued_minor": MISSING})])[1])
    assert broken["explanation"].startswith("The terms of bond ZZ0001000095 do not let the payment be reckoned: ")
    assert "accrual start" in broken["explanation"]


def test_the_desk_stands_in_where_the_terms_are_silent() -> None:
    _, breaks = found([One(bond=-1, terms=SILENT, broker={"settlement_minor": 5})])
    row = breaks["break"].to_list().index("settlement amount")
    assert breaks["explanation"].text(row) == "Tamarisk & Vane confirms 0.05 USD, our ticket says 1,006,666.67: 1,006,666.62 too little."


@pytest.mark.parametrize("kind", BREAK_KINDS)
def test_every_kind_has_a_sentence_that_ends(kind: str) -> None:
    templates = [wording.SENTENCES[kind]] if kind != "told twice" else [text for pair in wording.TOLD_TWICE.values() for text in pair]
    assert all(template.rstrip("}").endswith((".", "fault")) for template in templates)
    assert kind in wording.NEXT_STEPS or kind == "told twice" or any(
        kind.endswith(word) for word in ("amount", "date", "face", "price", "accrued", "side", "fees", "account", "yield"))  # fmt: skip


def test_no_sentence_quotes_a_line_of_a_file() -> None:
    told: dict[str, Any] = {**wording.SENTENCES, **wording.NEXT_STEPS}
    assert not [text for text in told.values() if re.search(r"\bline\b|\brow\b", text)]
