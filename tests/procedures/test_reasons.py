"""Reasons for moved days; the closed days are those of the published calendars (SIFMA, Bank of England)."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler import records
from reconciler.bonds.terms import Terms
from reconciler.expected.terms import resolve_terms
from reconciler.procedures.reasons import why_moved, why_settles


def _terms(calendar: str, adjustment: str = "following") -> Terms:
    bonds = records.table(
        records.BONDS, bond=["ZZ0001000012"], currency=["USD"], kind=["fixed"], coupon_rate_e9=[4 * 10**9], frequency=[2],
        day_count=["30/360"], accrual_start=["2020-01-01"], maturity=["2031-01-01"], calendar=[calendar],
        payment_adjustment=[adjustment],
    )  # fmt: skip
    return resolve_terms(bonds, *(records.table(schema) for schema in (records.RATES, records.FACTORS, records.CLOSINGS)))[0]


@pytest.mark.parametrize(
    ("calendar", "adjustment", "unadjusted", "paid", "why"),
    [
        ("XSIF", "following", "2026-03-29", "2026-03-30", "29 Mar 2026 is a Sunday; moved following"),
        ("XSIF", "following", "2026-05-23", "2026-05-26", "23 May 2026 is a Saturday, 25 May 2026 is Memorial Day; moved following"),
        ("XSIF", "preceding", "2026-03-28", "2026-03-27", "28 Mar 2026 is a Saturday; moved preceding"),
        ("XSIF", "modified following", "2026-05-30", "2026-05-29", "30 May 2026 is a Saturday; moved modified following"),
        ("XSIF", "following", "2026-03-30", "2026-03-30", ""),
        ("XLON", "following", "2026-12-25", "2026-12-29", "25 Dec 2026 is Christmas Day, 28 Dec 2026 is Boxing Day (observed); moved following"),
    ],
)
def test_why_a_payment_moved(calendar: str, adjustment: str, unadjusted: str, paid: str, why: str) -> None:
    assert why_moved(_terms(calendar, adjustment), 0, np.datetime64(unadjusted), np.datetime64(paid)) == why


@pytest.mark.parametrize(
    ("traded", "settles", "why"),
    [
        ("2026-03-27", "2026-03-30", "1 business day after 27 Mar 2026"),
        ("2026-05-22", "2026-05-27", "2 business days after 22 May 2026; 25 May 2026 is Memorial Day"),
        ("2026-03-27", "2026-03-27", "0 business days after 27 Mar 2026"),
        ("2026-03-27", "2026-03-26", ""),
        ("NaT", "2026-03-26", ""),
    ],
)
def test_why_a_trade_settles(traded: str, settles: str, why: str) -> None:
    assert why_settles(_terms("XSIF"), 0, np.datetime64(traded, "D"), np.datetime64(settles, "D")) == why
