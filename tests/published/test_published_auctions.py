"""Auctions of the US Treasury, to the last published digit, through the same door that an auditor uses.

Every row of the reference folder is reckoned where that folder stands beside the project; 24 telling rows are kept here.
"""

from __future__ import annotations

import csv
from decimal import ROUND_DOWN, ROUND_HALF_UP, Decimal
from pathlib import Path

import pytest

from reconciler.procedures import recalc

HERE = Path(__file__).parent
WHOLE = HERE.parents[1].parent / "shared" / "reference" / "us_treasury_auctions_2008_2016.csv"
FILES = [HERE / "us_treasury_auctions.csv", *([WHOLE] if WHOLE.exists() else [])]


def rows(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


def rounded(text: str, places: int) -> Decimal:
    return Decimal(text).quantize(Decimal(1).scaleb(-places), ROUND_HALF_UP)


def through_recalc(asked: list[dict[str, str]], folder: Path) -> list[dict[str, str]]:
    names = sorted({name for row in asked for name in row})
    with (folder / "in.csv").open("w", encoding="utf-8", newline="") as lines:
        writer = csv.DictWriter(lines, names)
        writer.writeheader()
        writer.writerows(asked)
    recalc.run(folder / "in.csv", folder / "out.csv")
    found = rows(folder / "out.csv")
    assert len(found) == len(asked)
    return found


def note(row: dict[str, str], by_market: bool, kind: str = "fixed") -> dict[str, str]:
    told = {"market": "US_TNOTE" if kind == "fixed" else "US_TIPS"} if by_market else {"day_count": "Act/Act ICMA", "frequency": "2"}
    return {
        **told, "kind": kind, "coupon_rate": row["interest_rate_pct"], "maturity": row["maturity_date"],
        "accrual_start": row["dated_date"], "first_coupon": row["first_interest_date"], "settlement_date": row["issue_date"],
        "yield": row["high_yield_pct"], "yield_convention": "treasury", "face": "1000",
    }  # fmt: skip


def bill(row: dict[str, str], by_market: bool) -> dict[str, str]:
    told = {"market": "US_TBILL"} if by_market else {"day_count": "Act/360", "frequency": "0"}
    return {**told, "kind": "zero", "maturity": row["maturity_date"], "settlement_date": row["issue_date"],
            "discount": row["high_discount_rate_pct"], "yield_convention": "investment"}  # fmt: skip


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
@pytest.mark.parametrize("by_market", [True, False], ids=["by market", "spelled out"])
class TestAuctions:
    def test_notes_and_bonds(self, path, by_market, tmp_path):
        """Price to six decimals, accrued per 1,000 to five (31 CFR 356 Appendix B I.D.4)."""
        told = [row for row in rows(path) if row["kind"] == "fixed"]
        assert told
        for row, found in zip(told, through_recalc([note(r, by_market) for r in told], tmp_path), strict=True):
            assert found["problem"] == ""
            assert rounded(found["price"], 6) == Decimal(row["high_price_per_100"]), row["cusip"]
            accrued = rounded(str(Decimal(found["accrued_per_100"]) * 10), 5)
            assert accrued == Decimal(row["accrued_interest_per_1000"] or 0), row["cusip"]

    def test_bills(self, path, by_market, tmp_path):
        """Price to six decimals, investment rate to three."""
        told = [row for row in rows(path) if row["kind"] == "bill"]
        assert told
        for row, found in zip(told, through_recalc([bill(r, by_market) for r in told], tmp_path), strict=True):
            assert found["problem"] == ""
            assert rounded(found["price"], 6) == Decimal(row["high_price_per_100"]), row["cusip"]
            assert rounded(found["yield"], 3) == Decimal(row["high_investment_rate_pct"]), row["cusip"]

    def test_inflation_linked(self, path, by_market, tmp_path):
        """Real price and accrued, then both times the index ratio (truncated to six decimals, rounded to five)."""
        told = [row for row in rows(path) if row["kind"] == "inflation-linked"]
        assert told
        for row, found in zip(told, through_recalc([note(r, by_market, "linked") for r in told], tmp_path), strict=True):
            assert found["problem"] == ""
            price, per_1000 = rounded(found["price"], 6), rounded(str(Decimal(found["accrued_per_100"]) * 10), 5)
            assert price == Decimal(row["unadjusted_price_per_100"]), row["cusip"]
            assert per_1000 == Decimal(row["unadjusted_accrued_per_1000"] or 0), row["cusip"]
            six = (Decimal(row["ref_cpi_issue"]) / Decimal(row["ref_cpi_dated"])).quantize(Decimal("1e-6"), ROUND_DOWN)
            ratio = rounded(str(six), 5)
            assert ratio == Decimal(row["index_ratio_issue"])
            assert rounded(str(price * ratio), 6) == Decimal(row["high_price_per_100"])


def test_linked_amounts_carry_the_index_ratio(tmp_path):
    """A row may tell the ratio in force: accrued is then in money (auction of 912828JE1, settled 2008-10-15)."""
    told = next(row for row in rows(FILES[-1]) if row["kind"] == "inflation-linked" and row["unadjusted_accrued_per_1000"])
    asked = note(told, True, "linked") | {"factor": told["index_ratio_issue"]}
    found = through_recalc([asked], tmp_path)[0]
    wanted = Decimal(told["unadjusted_accrued_per_1000"]) * Decimal(told["index_ratio_issue"])
    assert abs(Decimal(found["accrued_per_100"]) * 10 - wanted) < Decimal("0.00001")


def test_the_kept_rows_say_their_source():
    kept = rows(FILES[0])
    assert len(kept) == 24 and all(row["source"] for row in kept)
    assert {row["kind"] for row in kept} == {"bill", "fixed", "inflation-linked"}
