"""A drafted letter quotes the references, both figures, the reason and what is asked; it goes nowhere by itself."""

from __future__ import annotations

import datetime
from email import message_from_bytes
from pathlib import Path

import pytest

from reconciler.problems import KnownError
from reconciler.procedures import letter, morning

SAMPLE = Path(__file__).resolve().parents[2] / "sample_tickets" / "2026-03-31"


@pytest.fixture(scope="module")
def day() -> morning.Day:
    return morning.run(SAMPLE, datetime.date(2026, 3, 31))


def test_every_break_can_be_written_about(day: morning.Day) -> None:
    rows = sorted(set(day.breaks["item_row"].tolist()))
    assert len(rows) > 20
    for row in rows:
        whom = letter.parties(day, row)
        assert whom
        for party in whom:
            drafted = letter.draft(day, row, party)
            assert drafted is not None and drafted.party == party
            item = day.items.row(row)
            for reference in (item["ticket"], item["broker_reference"], item["account"]):
                assert not reference or reference in drafted.body
            for at in range(len(day.breaks)):
                one = day.breaks.row(at)
                if one["item_row"] == row and one["party"] == party:
                    plain = drafted.body.replace(",", "").replace("−", "-")
                    assert one["expected"].replace(",", "") in plain and one["found"].replace(",", "") in plain
                    reason = one["explanation"].replace(f"{party} told", "You told").replace(f"that {party.lower()} told", "that you told")
                    assert (reason if party != "Desk" else one["explanation"]) in drafted.body
            assert "nan" not in drafted.body.lower() and "NaT" not in drafted.body


def test_a_letter_to_a_broker_names_it(day: morning.Day) -> None:
    row = next(int(r) for r, p in zip(day.breaks["item_row"], day.breaks["party"].to_list(), strict=True) if p == "Broker")
    drafted = letter.draft(day, row, "Broker")
    assert drafted is not None and drafted.to == day.items["broker"].text(row)


def test_nothing_to_write_about(day: morning.Day) -> None:
    agreeing = day.items["state"].to_list().index("agrees")
    assert letter.parties(day, agreeing) == [] and letter.draft(day, agreeing) is None


def test_saved_as_mail_or_text(day: morning.Day, tmp_path: Path) -> None:
    drafted = letter.draft(day, int(day.breaks["item_row"][0]))
    assert drafted is not None
    letter.save(drafted, tmp_path / "one.eml")
    message = message_from_bytes((tmp_path / "one.eml").read_bytes())
    # without sender or address: it cannot be sent by accident
    assert message["To"] is None and message["From"] is None
    text = message.get_payload(decode=True)
    assert isinstance(text, bytes) and drafted.body.strip() == text.decode("utf-8").strip()
    letter.save(drafted, tmp_path / "one.txt")
    assert drafted.body in (tmp_path / "one.txt").read_text(encoding="utf-8")
    with pytest.raises(KnownError):
        letter.save(drafted, tmp_path / "nowhere" / "one.txt")
