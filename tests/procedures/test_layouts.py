"""Settling a broker's file: what is known of it, what its values become, and a layout that the next reading follows."""

from __future__ import annotations

import datetime
import shutil
from pathlib import Path

import pytest

from reconciler import settings
from reconciler.problems import KnownError, Problem
from reconciler.procedures import layouts, morning

SAMPLE = Path(__file__).parents[2] / "sample_tickets" / "2026-03-31"
FILE = "quillon_harrow_20260331.csv"


@pytest.fixture()
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The sample morning, with one broker's file in headings nobody knows and sides in words of its own."""
    monkeypatch.setattr(settings, "user_folder", lambda: tmp_path / "own")
    made = tmp_path / "2026-03-31"
    shutil.copytree(SAMPLE, made)
    strange = {"Broker Reference": "Q1", "Desk Reference": "Q2", "ISIN Code": "Q3", "Side": "Q4", "Nominal": "Q5",
               "Clean Price": "Q6", "Accrued Int": "Q7", "Fees": "Q8", "Settlement Amount": "Q9", "Currency": "Q10",
               "Trade Date": "Q11", "Settle Date": "Q12", "Account": "Q13", "Status": "Q14"}  # fmt: skip
    path = made / "confirmations" / FILE
    lines = path.read_text(encoding="utf-8").splitlines()
    head = next(i for i, line in enumerate(lines) if "ISIN Code" in line)
    lines[head] = "\t".join(strange[name] for name in lines[head].split("\t"))
    body = [line.replace("\tBUY\t", "\tHERE\t").replace("\tSELL\t", "\tAWAY\t") for line in lines[head + 1 :]]
    path.write_text("\n".join([*lines[: head + 1], *body]) + "\n", encoding="utf-8")
    return made


FACTS = {"Q1": "broker_reference", "Q2": "desk_reference", "Q3": "bond", "Q4": "side", "Q5": "face", "Q6": "price", "Q7": "accrued",
         "Q8": "fees", "Q9": "settlement_amount", "Q10": "currency", "Q11": "trade_date", "Q12": "settlement_date",
         "Q13": "account", "Q14": "status"}  # fmt: skip
SIDES = {"HERE": "buy", "AWAY": "sell"}


def test_every_fact_of_the_intake_has_words() -> None:
    from reconciler.intake.layouts import FACTS as KNOWN

    assert {key for key, _title, _help in layouts.FACTS} == set(KNOWN)
    assert all(title and help_text for _key, title, help_text in layouts.FACTS)


def test_files_with_problems_stand_first(folder: Path) -> None:
    told = layouts.files(folder, [Problem(f"confirmations/{FILE}", 0, "", "", "is not understood.")])
    assert told[0] == (FILE, "not read")
    assert len(told) == 4
    assert all(words == "read" for _name, words in told[1:])


def test_a_known_file_is_understood_by_its_headings() -> None:
    seen = layouts.look(SAMPLE, "orrin_teale_20260331.csv", (), ["Orrin & Teale"])
    assert seen.broker == "Orrin & Teale"
    assert {one.name: one.suggested for one in seen.headings}["ISIN"] == "bond"
    assert seen.headings[0].values[0] == "OR300042"


def test_a_layout_of_the_morning_is_followed() -> None:
    seen = layouts.look(SAMPLE, "tamarisk_vane_20260331.csv")
    assert {one.suggested: one.name for one in seen.headings}["settlement_amount"] == "Endbetrag"
    assert seen.options["decimal"] == ","
    assert seen.options["side_told_by"] == "broker"
    read = layouts.becomes(seen, {"Endbetrag": "settlement_amount", "K/V": "side", "Valuta": "settlement_date"}, seen.options)
    assert read.columns["Endbetrag"][1].text == "156,815,180.17"
    assert read.columns["K/V"][0].text == "we buy"  # the broker sold
    assert read.columns["Valuta"][0].text == "23 Mar 2026"


def test_unknown_headings_are_shown_and_asked_for(folder: Path) -> None:
    seen = layouts.look(folder, FILE, [Problem(f"confirmations/{FILE}", 0, "", "", "is not understood.")])
    assert [one.name for one in seen.headings][:3] == ["Q1", "Q2", "Q3"]
    assert {one.suggested for one in seen.headings} == {""}
    assert seen.questions == ("Is not understood.",)
    read = layouts.becomes(seen, {"Q5": "face", "Q4": "side", "Q9": "face"}, {})
    assert read.columns["Q5"][0].text == "1,000.00"
    assert read.words == ("HERE", "AWAY")
    assert read.columns["Q4"][0].problem
    assert any("Two columns are said to be the face" in one for one in read.problems)
    assert any("Still to be found: bond, settlement amount" in one for one in read.problems)
    assert layouts.becomes(seen, {"Q4": "side"}, {}, SIDES).columns["Q4"][0].text == "we buy"


def test_what_is_open_is_said(tmp_path: Path) -> None:
    place = tmp_path / "confirmations"
    place.mkdir()
    (place / "x.csv").write_text("A;B;C;D\n1.234;02/03/2026;x;y\n5.678;04/05/2026;x;y\n", encoding="utf-8")
    seen = layouts.look(tmp_path, "x.csv")
    read = layouts.becomes(seen, {"A": "face", "B": "trade_date"}, {})
    assert any("1.234 is one thousand" in one for one in read.problems)
    assert any("Day and month" in one for one in read.problems)
    settled = layouts.becomes(seen, {"A": "face", "B": "trade_date"}, {"decimal": ",", "date": "%d/%m/%Y", "face_scale": "1000"})
    assert [value.text for value in settled.columns["A"]] == ["1,234,000.00", "5,678,000.00"]
    assert settled.columns["B"][0].text == "2 Mar 2026"
    assert not any("open" in one or "Day and month" in one for one in settled.problems)


def test_a_saved_layout_is_followed_by_the_next_reading(folder: Path) -> None:
    day = datetime.date(2026, 3, 31)
    whole = morning.run(SAMPLE, day)
    before = morning.run(folder, day)
    assert len(before.source.confirmations) < len(whole.source.confirmations)
    seen = layouts.look(folder, FILE, before.problems, whole.source.tickets["broker"].values.to_pylist())
    path = layouts.save(seen, seen.broker, FACTS, {}, SIDES)
    assert path == settings.user_folder() / "layouts" / "quillon_harrow.toml"
    after = morning.run(folder, day, layouts=(settings.user_folder() / "layouts",))
    assert len(after.source.confirmations) == len(whole.source.confirmations)
    assert after.summary == whole.summary
    again = layouts.look(folder, FILE)
    assert {one.name: one.suggested for one in again.headings} == FACTS


def test_nothing_is_saved_while_something_is_open(folder: Path) -> None:
    seen = layouts.look(folder, FILE)
    with pytest.raises(KnownError, match="Still to be found"):
        layouts.save(seen, "Quillon Harrow", {"Q5": "face"}, {})
    with pytest.raises(KnownError, match="Say which broker"):
        layouts.save(seen, "", FACTS, {}, SIDES)
    assert not (settings.user_folder() / "layouts").exists()


def test_a_file_that_cannot_be_read_is_refused(tmp_path: Path) -> None:
    place = tmp_path / "confirmations"
    place.mkdir()
    (place / "x.csv").write_bytes(b"\x00\x01\x02\x03" * 50)
    with pytest.raises(KnownError, match="not a text file"):
        layouts.look(tmp_path, "x.csv")
    with pytest.raises(KnownError):
        layouts.look(tmp_path, "gone.csv")
