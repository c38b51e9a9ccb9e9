"""A list reckoned anew: every row back in its place, with its figures or with what is wrong with it."""

from __future__ import annotations

import csv
import io
import random
from pathlib import Path

import pytest

from reconciler.command import main
from reconciler.problems import KnownError
from reconciler.procedures import recalc
from reconciler.procedures.recalc_figures import RESULTS

NOTE = {
    "kind": "fixed", "coupon_rate": "5", "frequency": "2", "day_count": "Act/Act ICMA", "accrual_start": "2020-06-15",
    "maturity": "2030-06-15", "currency": "USD", "settlement_date": "2024-07-02", "price": "99.5",
}  # fmt: skip


def written(folder: Path, text: str) -> list[dict[str, str]]:
    source = folder / "in.csv"
    source.write_text(text, encoding="utf-8", newline="")
    recalc.run(source, folder / "out.csv")
    with (folder / "out.csv").open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


def found(folder: Path, *rows: dict[str, str]) -> list[dict[str, str]]:
    names = list(dict.fromkeys(name for row in rows for name in row))
    text = io.StringIO()
    writer = csv.DictWriter(text, names)
    writer.writeheader()
    writer.writerows(rows)
    back = written(folder, text.getvalue())
    assert len(back) == len(rows)
    return back


def test_a_row_comes_back_with_its_figures(tmp_path):
    """17 of 183 days at 5 %: 0.232240437158 per 100 (17/183 x 2.5); principal and accrued add up."""
    row = found(tmp_path, NOTE | {"face": "1000000", "note": "as told"})[0]
    assert {name: row[name] for name in NOTE} == NOTE and row["note"] == "as told"
    assert set(RESULTS) <= set(row) and row["problem"] == ""
    assert (row["previous_coupon"], row["next_coupon"], row["accrued_days"]) == ("2024-06-15", "2024-12-15", "17")
    assert row["accrued_per_100"] == "0.23224043715" + "8" and row["accrued"] == "2322.40"
    assert row["principal"] == "995000.00" and row["settlement_amount"] == "997322.40"
    assert float(row["money_per_basis_point"]) == pytest.approx(float(row["modified_duration"]) * 997322.404 / 10_000, rel=1e-9)
    assert len(row["yield"].split(".")[1]) >= 10


def test_price_yield_and_back(tmp_path):
    first = found(tmp_path, NOTE)[0]
    told = {name: text for name, text in NOTE.items() if name != "price"}
    second = found(tmp_path, told | {"yield": first["yield"]})[0]
    assert float(second["price"]) == pytest.approx(99.5, abs=1e-10) and second["yield"] == first["yield"]
    assert second["settlement_amount"] == first["settlement_amount"]


def test_the_face_is_100_unless_told(tmp_path):
    plain, told = found(tmp_path, NOTE | {"face": ""}, NOTE | {"face": "100"})
    assert plain["settlement_amount"] == told["settlement_amount"] == "99.73"


def test_amounts_have_the_decimals_of_their_currency(tmp_path):
    yen, dinar, none = found(tmp_path, *(NOTE | {"currency": code, "face": "1000000"} for code in ("JPY", "KWD", "")))
    assert (yen["accrued"], dinar["accrued"], none["accrued"]) == ("2322", "2322.404", "2322.40")
    assert none["problem"] == ""


def test_a_discount(tmp_path):
    """31 CFR 356 Appendix B VI.A: 7.61 % for 90 days is 98.0975."""
    bill = {"kind": "zero", "market": "US_TBILL", "maturity": "1990-02-22", "settlement_date": "1989-11-24", "face": "10000"}
    row = found(tmp_path, bill | {"discount": "7.61", "yield_convention": "investment"})[0]
    assert row["price"] == "98.0975000000" and row["principal"] == row["settlement_amount"] == "9809.75"
    assert row["accrued"] == "0.00" and row["previous_coupon"] == "" and row["problem"] == ""


def test_prices_in_32nds_stay_as_told(tmp_path):
    ticks, plain = found(tmp_path, NOTE | {"price": "99-16+", "quote": "32nds"}, NOTE | {"price": "99.515625", "quote": "32nds"})
    assert ticks["price"] == "99-16+" and ticks["yield"] == plain["yield"]


def test_told_conventions_and_factors(tmp_path):
    street, annual = found(tmp_path, NOTE, NOTE | {"yield_convention": "annual"})
    assert (1 + float(street["yield"]) / 200) ** 2 == pytest.approx(1 + float(annual["yield"]) / 100, abs=1e-12)
    whole, part = found(tmp_path, NOTE | {"kind": "amortising", "face": "1000000"}, NOTE | {"kind": "amortising", "face": "1000000", "factor": "0.25"})
    assert (part["principal"], part["accrued"]) == ("248750.00", "580.60") and part["yield"] == whole["yield"]


WRONG = {
    "coupon_rate": {"coupon_rate": "5O"}, "maturity": {"maturity": ""}, "day_count": {"day_count": "thirty"}, "face": {"face": "-5"},
    "settlement_date": {"settlement_date": "02/07/2024"}, "price": {"price": "high"}, "frequency": {"frequency": "3"},
    "calendar": {"calendar": "NOWHERE"}, "yield_convention": {"yield_convention": "mine"}, "market": {"market": "MARS"},
    "end_of_month": {"end_of_month": "maybe"}, "currency": {"currency": "XYZ"}, "yield": {"yield": "4"}, "discount": {"price": "", "discount": "4"},
    "redemption_price": {"redemption_price": "par"}, "accrued_rounding": {"accrued_rounding": "up"}, "ex_dividend": {"ex_dividend": "six"},
}  # fmt: skip


def test_every_row_stays_and_says_what_is_wrong(tmp_path):
    """Good rows between bad ones keep their figures; a bad row names its column and has none."""
    rows = [NOTE]
    for change in WRONG.values():
        rows += [NOTE | change, NOTE]
    back = found(tmp_path, *rows)
    for good in back[::2]:
        assert good["problem"] == "" and good["settlement_amount"] == "99.73"
    for column, bad in zip(WRONG, back[1::2], strict=True):
        assert column in bad["problem"], column
        assert bad["accrued"] == bad["principal"] == bad["settlement_amount"] == "", column
        assert bad["problem"].endswith(".")


def test_maturity_and_later(tmp_path):
    last, on, after = found(tmp_path, *(NOTE | {"settlement_date": day} for day in ("2030-06-14", "2030-06-15", "2031-01-01")))
    assert last["problem"] == "" and last["accrued_days"] == "181"
    assert "on or after the maturity" in on["problem"] and "on or after the maturity" in after["problem"]


def test_without_a_price_the_interest_is_still_told(tmp_path):
    row = found(tmp_path, NOTE | {"price": "", "face": "1000000"})[0]
    assert row["accrued"] == "2322.40" and row["principal"] == "" and "price is blank" in row["problem"]


def test_before_interest_begins(tmp_path):
    row = found(tmp_path, NOTE | {"settlement_date": "2020-05-01"})[0]
    assert (row["problem"], row["accrued"], row["accrued_days"], row["settlement_amount"]) == ("", "0.00", "0", "99.50")


def test_an_auditors_own_results_stay_beside_ours(tmp_path):
    row = found(tmp_path, NOTE | {"accrued": "0.24", "problem": "see file"})[0]
    assert (row["accrued_told"], row["accrued"], row["problem_told"], row["problem"]) == ("0.24", "0.23", "see file", "")


def test_what_comes_out_can_go_in_again(tmp_path):
    found(tmp_path, NOTE, NOTE | {"price": "101-08"})
    again = written(tmp_path, (tmp_path / "out.csv").read_text(encoding="utf-8").replace(",yield,", ",was,"))
    assert [row["problem"] for row in again] == ["", ""]
    assert [row["accrued_told"] for row in again] == [row["accrued"] for row in again]


def test_odd_shapes_of_a_file(tmp_path):
    """Title lines, semicolons, torn rows, blank lines, quotes with line breaks, spaces, capitals in headings."""
    text = 'List of 2 July\n\n Maturity ;SETTLEMENT_DATE;kind;face;price;remark\n2030-06-15; 2024-07-02 ;zero;1000;80;"a ""b""\nc"\n\n2030-06-15;2024-07-02;zero\n' \
           "2030-06-15;2024-07-02;zero;1000;80;x;y\n"  # fmt: skip
    rows = written(tmp_path, text)
    assert len(rows) == 3
    assert rows[0]["principal"] == "800.00" and rows[0]["remark"] == 'a "b"\nc' and rows[0]["problem"] == ""
    assert "3 cells" in rows[1]["problem"] and "7 cells" in rows[2]["problem"] and rows[1]["principal"] == ""


def test_headings_alone_come_back_alone(tmp_path):
    assert written(tmp_path, "maturity,settlement_date\n") == []
    assert (tmp_path / "out.csv").read_text(encoding="utf-8").startswith("maturity,settlement_date,previous_coupon,")


@pytest.mark.parametrize(
    "text,words",
    [
        ("", "empty"), ("maturity,price\n2030-01-01,99\n", "no column settlement_date"), ("settlement_date,price\n2024-01-01,99\n", "no column maturity"),
        ("maturity,settlement_date,maturity\na,b,c\n", "maturity twice"), ("\x00\x01\x02", "not a text file"),
    ],
)  # fmt: skip
def test_a_list_that_cannot_be_read_is_one_clear_line(text, words, tmp_path, capsys):
    source, target = tmp_path / "in.csv", tmp_path / "out.csv"
    source.write_bytes(text.encode())
    with pytest.raises(KnownError, match=words):
        recalc.run(source, target)
    assert main(["recalc", str(source), str(target)]) == 2
    told = capsys.readouterr().err
    assert words in told and len(told.splitlines()) == 1 and not target.exists()


def test_headless(tmp_path, capsys):
    found(tmp_path, NOTE, NOTE | {"face": "much"})
    assert main(["recalc", str(tmp_path / "in.csv"), str(tmp_path / "again.csv")]) == 0
    assert capsys.readouterr().out == "2 rows reckoned, 1 with a problem.\n"
    assert (tmp_path / "again.csv").read_bytes() == (tmp_path / "out.csv").read_bytes()
    assert main(["recalc", str(tmp_path / "nowhere.csv"), str(tmp_path / "again.csv")]) == 2
    assert main(["recalc", str(tmp_path / "in.csv"), str(tmp_path / "nowhere" / "out.csv")]) == 2


def test_every_row_alone_as_in_the_list(tmp_path):
    rows = [NOTE | change for change in ({}, {"price": "", "yield": "3"}, {"day_count": "Act/360", "market": "US_CORP"}, *WRONG.values())]
    together = found(tmp_path, *rows)
    for row, whole in zip(rows, together, strict=True):
        alone = found(tmp_path, row)[0]
        assert {name: whole[name] for name in alone} == alone


_DAYS = ["", "2024-02-29", "2024-13-01", "0001-01-01", "9999-12-31", "2199-12-31", "2101-01-03", "1969-12-31", "2030-06-15", "2026-3-1", "abc"]
_FIGURES = ["", "0", "5", "-1", "0.000000001", "1e5", "999999", "99-16+", "1,000", "1000000000000", "123456789012345678", "NaN", "inf", "101.25"]
_ODD = {
    "kind": ["fixed", "", "zero", "stepped", "floating", "linked", "amortising", "x"], "market": ["", "US_TBILL", "UK_GILT", "JP_JGB", "?"],
    "coupon_rate": ["5", *_FIGURES], "frequency": ["2", "", "0", "1", "12", "3", "-1", "x"], "day_count": ["30/360", "", "Act/Act ICMA", "Bus/252", "x"],
    "accrual_start": ["2020-06-15", *_DAYS], "first_coupon": ["", *_DAYS], "last_regular_coupon": ["", "", *_DAYS],
    "maturity": ["2030-06-15", *_DAYS], "calendar": ["", "XSIF", "NOWHERE"], "ex_dividend": ["", "6b", "999c", "x"], "currency": ["", "JPY", "usd"],
    "accrued_rounding": ["", "100:7 down", "1000000000:12"], "settlement_date": ["2024-07-02", *_DAYS], "face": ["", *_FIGURES],
    "price": ["99.5", *_FIGURES], "yield": ["", "", *_FIGURES], "discount": ["", "", *_FIGURES],
    "yield_convention": ["", "treasury", "simple", "annual", "discount", "investment", "x"], "factor": ["", "0", "0.5", "-1"],
}  # fmt: skip


@pytest.mark.parametrize("seed", range(12))
def test_whatever_stands_in_the_cells(seed, tmp_path):
    """No cell breaks the list: each row comes back with a settlement amount or with a reason why there is none."""
    rng = random.Random(seed)
    oddness = rng.random()
    rows = [{name: rng.choice(cells) if rng.random() < oddness else cells[0] for name, cells in _ODD.items()} for _ in range(50)]
    for row in found(tmp_path, *rows):
        assert row["settlement_amount"] or row["problem"], row
