"""A bond's schedule as printed: what a person reads off it is what the terms say."""

from __future__ import annotations

from pathlib import Path

import pytest

from reconciler.command import main

BONDS = (
    "bond,description,market,currency,kind,coupon_rate,frequency,day_count,accrual_start,first_coupon,maturity,accrual_adjustment,calendar\n"
    "ZZ-NOTE,Orrin 5 2027,,USD,fixed,5,2,30/360,2025-11-01,,2027-05-01,,XSIF\n"
    "ZZ-GILT,Crown 4 2027,UK_GILT,,,4,,,2026-06-07,,2027-06-07,,\n"
    "ZZ-FRN,Teale floater,,EUR,floating,,4,Act/360,2026-05-15,,2027-02-15,adjusted,XECB\n"
    "ZZ-POOL,Farrow pool,,USD,amortising,6,12,30/360,2026-01-01,,2026-03-01,,\n"
    "ZZ-ZERO,Moss zero,,JPY,zero,,,,,,2027-05-02,,JP\n"
    "ZZ-BAD,Bad 5 2020,,USD,fixed,5,2,30/360,2025-11-01,,2020-05-01,,\n"
    "ZZ-ODD,Odd 5 2030,,USD,fixed,5,2,thirty,2025-11-01,,2030-05-01,,\n"
)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / "bonds.csv").write_text(BONDS, encoding="utf-8")
    (tmp_path / "rates.csv").write_text("bond,from,rate\nZZ-FRN,2026-05-15,3.6\nZZ-FRN,2026-08-17,2.5\n", encoding="utf-8")
    (tmp_path / "factors.csv").write_text("bond,from,factor\nZZ-POOL,2026-02-01,0.75\n", encoding="utf-8")
    (tmp_path / "closings.csv").write_text("calendar,date,open\nXSIF,2027-05-03,no\n", encoding="utf-8")
    return tmp_path


def printed(folder: Path, capsys: pytest.CaptureFixture[str], *told: str) -> list[list[str]]:
    assert main(["schedule", told[0], "--bonds", str(folder / "bonds.csv"), *told[1:]]) == 0
    return [line.split() for line in capsys.readouterr().out.splitlines()]


def test_a_regular_bond(folder, capsys):
    """Saturday 2027-05-01 moves to Monday, which closings.csv closes: Tuesday."""
    lines = printed(folder, capsys, "ZZ-NOTE", "--face", "1000000")
    assert lines[0] == "ZZ-NOTE Orrin 5 2027, on a face of USD 1000000.00".split()
    assert lines[1] == ["period_start", "period_end", "coupon_date", "payment_date", "days", "amount", "ex_dividend", "record", "reason"]
    assert lines[2] == ["2025-11-01", "2026-05-01", "2026-05-01", "2026-05-01", "180", "25000.00", "-", "2026-04-30"]
    assert lines[3][:8] == ["2026-05-01", "2026-11-01", "2026-11-01", "2026-11-02", "180", "25000.00", "-", "2026-10-30"]
    assert " ".join(lines[3][8:]) == "1 Nov 2026 is a Sunday; moved following"
    assert lines[4][3] == "2027-05-04" and "closings.csv" in " ".join(lines[4])
    assert lines[-1][:3] == ["2027-05-01", "2027-05-04", "1000000.00"]


def test_ex_dividend_and_record_dates(folder, capsys):
    lines = printed(folder, capsys, "ZZ-GILT")
    assert lines[2][:8] == ["2026-06-07", "2026-12-07", "2026-12-07", "2026-12-07", "183", "2.00", "2026-11-27", "2026-11-26"]


def test_an_adjusted_floater(folder, capsys):
    """Saturday 2026-08-15 is paid on the 17th and counted to it (94 days); the coming rates are not fixed yet."""
    lines = printed(folder, capsys, "ZZ-FRN", "--face", "1000000")
    assert lines[2][:6] == ["2026-05-15", "2026-08-17", "2026-08-15", "2026-08-17", "94", "9400.00"]
    assert lines[3][:6] == ["2026-08-17", "2026-11-16", "2026-11-15", "2026-11-16", "91", "6319.44"]
    (folder / "rates.csv").write_text("bond,from,rate\nZZ-FRN,2026-08-17,2.5\n", encoding="utf-8")
    assert "not fixed" in " ".join(printed(folder, capsys, "ZZ-FRN")[2])


def test_what_is_paid_back_on_the_way(folder, capsys):
    """The factor falls from 1 to 0.75 on Sunday 1 February; the rest comes back at maturity."""
    lines = printed(folder, capsys, "ZZ-POOL", "--face", "1000")
    assert [line[5] for line in lines[2:4]] == ["5.00", "3.75"]
    assert lines[-2][:3] == ["2026-02-01", "2026-02-02", "250.00"] and lines[-1][:3] == ["2026-03-01", "2026-03-02", "750.00"]


def test_a_zero_in_yen(folder, capsys):
    """2 to 5 May 2027 are a Sunday and Japanese holidays."""
    lines = printed(folder, capsys, "ZZ-ZERO", "--face", "1000000")
    assert ["pays", "no", "coupons"] in lines and lines[-1][:3] == ["2027-05-02", "2027-05-06", "1000000"]


@pytest.mark.parametrize(
    "told,words",
    [
        (["ZZ-NONE"], "no bond ZZ-NONE"), (["ZZ-BAD"], "2020-05-01"), (["ZZ-ODD"], "thirty"), (["ZZ-NOTE", "--face", "much"], "'much' is not a face"),
        (["ZZ-NOTE", "--face", "-5"], "'-5' is not a face"), (["ZZ-NOTE", "--face", "1.005"], "'1.005' is not a face"),
    ],
)  # fmt: skip
def test_what_cannot_be_printed_is_said(told, words, folder, capsys):
    assert main(["schedule", told[0], "--bonds", str(folder / "bonds.csv"), *(f"{a}={b}" for a, b in zip(told[1::2], told[2::2]))]) == 2
    said = capsys.readouterr()
    assert words in said.err and said.out == "" and "Traceback" not in said.err


def test_no_such_file(tmp_path, capsys):
    assert main(["schedule", "ZZ-NOTE", "--bonds", str(tmp_path / "bonds.csv")]) == 2
    assert "bonds.csv" in capsys.readouterr().err
