"""Every file of a morning arrives typed, every row is accounted for, and each kind of bad input gets one clear sentence."""

from __future__ import annotations

import random
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from reconciler.intake import folder as intake
from reconciler.problems import KnownError
from reconciler.records import MISSING
from tests.intake import mornings


def ties_out(morning: intake.Morning) -> None:
    """Read = used + rejected + set aside, in rows and in money, for every file and currency."""
    totals = morning.totals
    for what in ("rows", "amount"):
        parts = sum(totals[f"{what}_{fate}"] for fate in ("used", "rejected", "set_aside"))
        assert (totals[f"{what}_read"] == parts).all()


def test_a_sound_morning_is_read_whole(tmp_path: Path) -> None:
    morning = intake.read(mornings.sound(tmp_path))
    assert not morning.problems and not len(morning.rejects)
    assert morning.tickets["ticket"].to_list() == ["T-1", "T-2", "T-3"]
    assert morning.tickets["settlement_minor"].tolist() == [99666667, 51404220, 99500000]
    assert morning.tickets["face_minor"].tolist() == [100000000, 50000000, 100000000]
    assert morning.bonds["currency"].to_list() == ["USD", "GBP", "JPY"]
    confirmed = morning.confirmations
    assert confirmed["broker"].to_list() == ["Orrin & Teale", "Orrin & Teale", "Tamarisk & Vane"]
    assert confirmed["broker_reference"].to_list() == ["B1", "B2", "A1"]
    assert confirmed["desk_reference"].to_list() == ["T-2", "T-3", ""]
    assert confirmed["side"].tolist() == [-1, 1, 1]
    assert confirmed["settlement_minor"].tolist() == [51404220, 99500000, 99666667]
    assert confirmed["accrued_minor"].tolist() == [780220, MISSING, 166667]
    assert np.datetime_as_string(confirmed["settlement_date"]).tolist() == ["2026-03-30"] * 3
    ties_out(morning)


def test_order_of_rows_and_files_changes_nothing_but_lines(tmp_path: Path) -> None:
    one = intake.read(mornings.sound(tmp_path / "one"))
    two = mornings.sound(tmp_path / "two")
    head, *rows = mornings.TICKETS.splitlines()
    random.Random(4).shuffle(rows)
    (two / "tickets.csv").write_text("\n".join([head, *rows]) + "\n")
    other = intake.read(two)
    key = lambda m: sorted(  # noqa: E731
        tuple(str(v) for k, v in m.tickets.row(i).items() if k != "line") for i in range(len(m.tickets))
    )
    assert key(one) == key(other)
    assert one.totals["amount_read"].tolist() == other.totals["amount_read"].tolist()


def test_cancelled_beats_amended_beats_new(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    row = "T-1,2026-03-27,2026-03-30,ZZ0000000016,buy,1000000,{p},,,{a},USD,Tamarisk & Vane,MAIN,A1,{s}\n"
    head = mornings.TICKETS.splitlines()[0] + "\n"
    rows = [row.format(p=99, a="990000", s="new"), row.format(p=98, a="980000", s="amended"), row.format(p=97, a="1", s="")]
    (folder / "tickets.csv").write_text(head + "".join(rows))
    morning = intake.read(folder)
    assert morning.tickets["price_text"].to_list() == ["98"]
    assert morning.totals["rows_set_aside"][morning.totals["file"].codes == morning.totals["file"].codes[-1]].sum() == 2
    ties_out(morning)


def test_two_tickets_of_equal_standing_are_noted(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    lines = mornings.TICKETS.splitlines()
    (folder / "tickets.csv").write_text("\n".join([*lines, lines[1].replace("99.5", "98.5"), lines[2]]) + "\n")
    morning = intake.read(folder)
    assert len(morning.tickets) == 3
    # the exact repeat is set aside in silence, the other one is for a person to settle
    assert [(problem.code, problem.value) for problem in morning.problems] == [("told-apart", "T-1")]
    ties_out(morning)


Spoil = Callable[[Path], None]


def _write(name: str, text: str | bytes) -> Spoil:
    def spoil(folder: Path) -> None:
        data = text.encode("utf-8") if isinstance(text, str) else text
        (folder / name).write_bytes(data)

    return spoil


def _swap(name: str, old: str, new: str) -> Spoil:
    def spoil(folder: Path) -> None:
        text = (folder / name).read_text()
        assert old in text
        (folder / name).write_text(text.replace(old, new, 1))

    return spoil


ORRIN = "confirmations/orrin_teale_20260330.csv"
TAMARISK = "confirmations/tamarisk_vane_20260330.csv"

FAULTS: list[tuple[str, Spoil, str, tuple[str, int, str, str]]] = [
    ("an empty file", _write(ORRIN, b""), "empty-file", (ORRIN, 0, "", "is empty")),
    ("headings only", _write(TAMARISK, mornings.TAMARISK.splitlines()[0] + "\n"), "header-only", (TAMARISK, 1, "", "has headings but no rows")),
    ("a missing column", _swap(ORRIN, "Face,", "Something,"), "missing-column", (ORRIN, 4, "", "the face")),
    ("two columns for the amount", _write(TAMARISK, mornings.TAMARISK.replace("Accrued Interest;Net Amount", "Total;Net Amount").replace("1.666,67;", "996.666,67;")), "ambiguous-column", (TAMARISK, 1, "", "more than one column")),
    ("a binary file", _write(ORRIN, bytes(range(256)) * 40), "binary-file", (ORRIN, 0, "", "is not a text file")),
    ("mixed encodings", _write(ORRIN, mornings.ORRIN.encode() + "B3,é".encode() + b",\n" + "B4,é".encode("cp1252") + b"\n"), "mixed-encodings", (ORRIN, 8, "", "mixes encodings")),
    ("one endless line", _write(ORRIN, b"A," * 2_000_000), "long-line", (ORRIN, 1, "", "a line of more than")),
    ("a negative face", _swap("tickets.csv", "1000000,99.5", "-1000000,99.5"), "negative-face", ("tickets.csv", 2, "face", "is negative")),
    ("maturity before issue", _swap("bonds.csv", "2021-03-15,2031-03-15", "2021-03-15,2011-03-15"), "unsound-terms", ("bonds.csv", 2, "maturity", "accrual start")),
    ("the same bond with other terms", _swap("bonds.csv", "ZZ0000000024,Pellerin Water 5 2030", "ZZ0000000016,Pellerin Water 5 2030"), "bond-twice", ("bonds.csv", 2, "bond", "more than once")),
    ("an amount that is none", _swap("cash.csv", "514042.20", "5I4042.20"), "bad-amount", ("cash.csv", 3, "amount", "is not an amount")),
    ("more decimals than the yen has", _swap("tickets.csv", "99500000,JPY", "99500000.5,JPY"), "bad-amount", ("tickets.csv", 4, "settlement_amount", "more decimals")),
    ("a date that is none", _swap("tickets.csv", "2026-03-30", "30.03.2026"), "bad-date", ("tickets.csv", 2, "settlement_date", "year-month-day")),
    ("an unknown side", _swap("tickets.csv", "sell", "lend"), "bad-side", ("tickets.csv", 3, "side", "not a side")),
    ("an unknown status", _swap("tickets.csv", "B1,new", "B1,pending"), "bad-status", ("tickets.csv", 3, "status", "not a status")),
    ("an unknown currency", _swap("cash.csv", "MAIN,GBP", "MAIN,GBX"), "bad-currency", ("cash.csv", 3, "currency", "ISO 4217")),
    ("a torn row", _swap("cash.csv", ",T-1,", ","), "torn-row", ("cash.csv", 2, "", "fields where")),
    ("32 thirty-seconds", _swap(ORRIN, ",101.25,", ",101-32,"), "bad-price", (ORRIN, 5, "Price", "is not a price")),
    ("ambiguous dates", _write(ORRIN, mornings.ORRIN.replace("27/03/2026", "02/03/2026").replace("30/03/2026", "03/03/2026")), "ambiguous-dates", (ORRIN, 4, "", "day and month")),
    ("a file of no broker", _write("confirmations/somebody.csv", mornings.ORRIN), "unknown-broker", ("confirmations/somebody.csv", 0, "", "cannot be given to a broker")),
    ("no headings", _write(ORRIN, "a,b,c\n1,2,3\n"), "no-header", (ORRIN, 0, "", "no line of headings")),
]  # fmt: skip


@pytest.mark.parametrize(("what", "spoil", "code", "place"), FAULTS, ids=[fault[0] for fault in FAULTS])
def test_bad_input_gets_one_clear_sentence(
    what: str, spoil: Spoil, code: str, place: tuple[str, int, str, str], tmp_path: Path
) -> None:
    folder = mornings.sound(tmp_path)
    spoil(folder)
    morning = intake.read(folder)
    rejects = [morning.rejects.row(i) for i in range(len(morning.rejects))]
    found = [row for row in rejects if row["code"] == code]
    assert found, (what, rejects)
    file, line, column, words = place
    first = found[0]
    assert first["file"] == file
    assert not line or int(first["row"]) == line
    assert first["column"] == column or not column
    assert words in first["reason"]
    assert first["reason"].endswith((".", '".'))
    ties_out(morning)


def test_a_folder_without_tickets_cannot_be_reconciled(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    (folder / "tickets.csv").unlink()
    with pytest.raises(KnownError, match=r"tickets\.csv"):
        intake.read(folder)
    with pytest.raises(KnownError, match="no folder"):
        intake.read(tmp_path / "nowhere")


def test_a_locked_file_is_a_sentence(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = mornings.sound(tmp_path)
    plain = Path.read_bytes

    def locked(path: Path) -> bytes:
        if path.name == "cash.csv":
            raise PermissionError(13, "Permission denied")
        return plain(path)

    monkeypatch.setattr(Path, "read_bytes", locked)
    morning = intake.read(folder)
    assert [p.code for p in morning.problems] == ["file-locked"]
    assert "close it elsewhere" in morning.problems[0].sentence()


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
def test_encodings(encoding: str, tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    text = mornings.ORRIN.replace("Orrin & Teale, trades", "Orrin & Teale · café, trades")
    (folder / ORRIN).write_bytes(text.encode(encoding))
    morning = intake.read(folder)
    assert not morning.problems
    assert len(morning.confirmations) == 3


def test_a_layout_is_followed_to_the_letter(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    (folder / "layouts").mkdir()
    (folder / "layouts" / "own.toml").write_text(
        'broker = "Tamarisk & Vane"\nfile = "tama*.csv"\ndelimiter = ";"\ndecimal = ","\ndate = "%d.%m.%Y"\nside_told_by = "broker"\n'
        'skip_rows = 1\nfooter = "^SUM"\n[columns]\nbroker_reference = "Nr"\nbond = "Papier"\nside = "K/V"\nface = "Tsd"\n'
        'price = "Kurs"\nsettlement_amount = "Summe"\ntrade_date = "Tag"\n[values.side]\nK = "buy"\nV = "sell"\n[scale]\nface = 1000\n'
    )
    (folder / TAMARISK).write_text(
        "Liste\nNr;Papier;K/V;Tsd;Kurs;Summe;Tag\nA1;ZZ0000000016;V;1.000;99,5;996.666,67;27.03.2026\nSUM;;;;;1;\n", encoding="cp1252"
    )
    morning = intake.read(folder)
    row = morning.confirmations.row(2)
    assert (row["broker_reference"], row["side"], row["face_minor"], row["settlement_minor"]) == ("A1", 1, 100000000, 99666667)
    ties_out(morning)


def test_a_confirmation_is_cancelled_from_another_file(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    row = 'A1,T-1,27/03/2026,30/03/2026,ZZ0000000016,bought,"1,000,000.00",99.5,"1,666.67",,"996,666.67",USD,cancelled'
    head = mornings.ORRIN.splitlines()[3] + ",Status"
    (folder / "confirmations" / "tamarisk_vane_20260330_2.csv").write_text(head + "\n" + row + "\n")
    morning = intake.read(folder)
    assert sorted(morning.confirmations["broker_reference"].to_list()) == ["B1", "B2"]
    assert int(morning.totals["rows_set_aside"].sum()) == 3
    ties_out(morning)


def test_a_form_feed_in_a_title_costs_no_row(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    (folder / ORRIN).write_text(mornings.ORRIN.replace("printed", "printed\x0c on\x85 page"), encoding="utf-8")
    morning = intake.read(folder)
    assert len(morning.confirmations) == 3
    ties_out(morning)


def test_blank_rows_headings_again_and_footers_in_between(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    lines = mornings.ORRIN.splitlines()
    (folder / ORRIN).write_text("\n".join([*lines[:5], ",,,,,,,,,,,", lines[3], *lines[5:]]) + "\n")
    morning = intake.read(folder)
    assert len(morning.confirmations) == 3 and not len(morning.rejects)
    ties_out(morning)


def test_two_headings_for_one_day_are_asked_about(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    text = mornings.ORRIN.replace("Currency", "Settlement Date").replace(",GBP", ",31/03/2026").replace(",JPY", ",31/03/2026")
    (folder / ORRIN).write_text(text)
    morning = intake.read(folder)
    assert [problem.code for problem in morning.problems] == ["ambiguous-column"]
    assert "settlement date" in morning.problems[0].reason
    rows = dict(zip(morning.totals["file"].to_list(), morning.totals["rows_read"].tolist(), strict=True))
    # title lines are not counted
    assert rows[ORRIN] == 2
    ties_out(morning)


def test_a_figure_in_another_style_costs_its_own_row(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    head, rows = mornings.ORRIN.splitlines()[:4], mornings.ORRIN.splitlines()[4:]
    many = [rows[0].replace("B1", f"B{n}") for n in range(10, 40)]
    bad = rows[0].replace('"514,042.20"', '"514.042,20"').replace("B1", "B99")
    (folder / ORRIN).write_text("\n".join([*head, *many, bad]) + "\n")
    morning = intake.read(folder)
    assert len(morning.confirmations) == 31
    assert [(r["column"], r["value"]) for r in (morning.rejects.row(i) for i in range(len(morning.rejects)))] == [
        ("Settlement Amount", "514.042,20")
    ]
    ties_out(morning)


def test_a_spreadsheet_among_the_confirmations_is_named(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    (folder / "confirmations" / "orrin_teale.xlsx").write_bytes(b"PK")
    morning = intake.read(folder)
    assert [(problem.code, problem.file) for problem in morning.problems] == [("not-csv", "confirmations/orrin_teale.xlsx")]
