"""Small mornings for the tests of intake: a sound folder, to be spoilt in one place."""

from __future__ import annotations

from pathlib import Path

BONDS = """bond,description,market,coupon_rate,accrual_start,maturity
ZZ0000000016,Marlow Gas 4 2031,US_CORP,4,2021-03-15,2031-03-15
ZZ0000000024,Pellerin Water 5 2030,UK_GILT,5,2020-06-07,2030-06-07
ZZ0000000032,Osk Bill,JP_TDB,,,2026-09-10
"""

TICKETS = """ticket,trade_date,settlement_date,bond,side,face,price,accrued,fees,settlement_amount,currency,broker,account,broker_reference,status
T-1,2026-03-27,2026-03-30,ZZ0000000016,buy,1000000,99.5,1666.67,0,996666.67,USD,Tamarisk & Vane,MAIN,A1,
T-2,2026-03-27,2026-03-30,ZZ0000000024,sell,500000.00,101.25,7802.20,10.00,514042.20,GBP,Orrin & Teale,MAIN,B1,new
T-3,2026-03-27,2026-03-30,ZZ0000000032,buy,100000000,99.5,,,99500000,JPY,Orrin & Teale,SIDE,B2,
"""

TAMARISK = """Ref No;Dealt;Settles;ISIN;B/S;Nominal;Kurs;Accrued Interest;Net Amount;Ccy
A1;27.03.2026;30.03.2026;ZZ0000000016;B;1.000.000,00;99,5;1.666,67;996.666,67;USD
TOTAL;;;;;;;;996.666,67;
"""

ORRIN = """Orrin & Teale, trades confirmed
printed 30/03/2026

Trade Ref,Your Ref,Trade Date,Value Date,ISIN,Direction,Face,Price,Accrued,Commission,Settlement Amount,Currency
B1,T-2,27/03/2026,30/03/2026,ZZ0000000024,sold,"500,000.00",101.25,"7,802.20",10.00,"514,042.20",GBP
B2,T-3,27/03/2026,30/03/2026,ZZ0000000032,bought,"100,000,000",99.5,,,"99,500,000",JPY
"""

CASH = """entry,account,currency,value_date,booked_date,amount,narrative,reference,bond
E1,MAIN,USD,2026-03-30,2026-03-30,-996666.67,settlement,T-1,ZZ0000000016
E2,MAIN,GBP,2026-03-30,2026-03-30,514042.20,settlement,T-2,ZZ0000000024
"""

HOLDINGS = """account,bond,face,as_of
MAIN,ZZ0000000016,250000,2026-03-16
"""


def sound(folder: Path) -> Path:
    """Writes a morning without any fault."""
    (folder / "confirmations").mkdir(parents=True, exist_ok=True)
    for name, text in (
        ("bonds.csv", BONDS), ("tickets.csv", TICKETS), ("cash.csv", CASH), ("holdings.csv", HOLDINGS),
        ("confirmations/tamarisk_vane_20260330.csv", TAMARISK), ("confirmations/orrin_teale_20260330.csv", ORRIN),
    ):  # fmt: skip
        (folder / name).write_text(text, encoding="utf-8")
    return folder
