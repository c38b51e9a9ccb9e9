"""How six invented brokers write their confirmations, three of them told by a layout file."""

from __future__ import annotations

import random
from dataclasses import dataclass, field, replace


@dataclass(frozen=True)
class Manner:
    """How one broker writes its confirmations."""

    broker: str
    stem: str
    headings: dict[str, str]
    delimiter: str = ","
    encoding: str = "utf-8"
    thousands: str = ""
    point: str = "."
    negative: str = "-n"
    day: str = "%Y-%m-%d"
    sides: tuple[str, str] = ("buy", "sell")
    """Words for our purchase and our sale, already as this broker speaks of them."""
    statuses: dict[str, str] = field(
        default_factory=lambda: {"new": "new", "amended": "amended", "cancelled": "cancelled", "": ""}
    )
    face_scale: int = 1
    titles: tuple[str, ...] = ()
    footer: str = ""
    thirty_seconds: bool = True
    layout: str = ""
    parts: int = 1


GERMAN = {
    "broker_reference": "Geschäftsnr",
    "desk_reference": "Kundenref",
    "bond": "Wertpapier",
    "side": "K/V",
    "trade_date": "Handelstag",
    "settlement_date": "Valuta",
    "face": "Nennwert",
    "price": "Kurs",
    "accrued_days": "Tage",
    "accrued": "Stückzinsen",
    "fees": "Gebühren",
    "settlement": "Endbetrag",
    "currency": "Währung",
    "account": "Depot",
    "status": "Stand",
}


MANNERS = (
    Manner(
        "Tamarisk & Vane",
        "tamarisk_vane",
        GERMAN,
        ";",
        "cp1252",
        ".",
        ",",
        "-n",
        "%d.%m.%Y",
        ("V", "K"),
        {"new": "Neu", "amended": "Geändert", "cancelled": "Storno", "": ""},
        thirty_seconds=False,
        footer="TOTAL;{rows} Zeilen",
        layout="""
broker = "Tamarisk & Vane"
file = "tamarisk*.csv"
encoding = "cp1252"
delimiter = ";"
decimal = ","
date = "%d.%m.%Y"
side_told_by = "broker"
footer = "^(TOTAL|TRAILER)"
[columns]
broker_reference = "Geschäftsnr"
desk_reference = "Kundenref"
bond = "Wertpapier"
side = "K/V"
trade_date = "Handelstag"
settlement_date = "Valuta"
face = "Nennwert"
price = "Kurs"
accrued_days = "Tage"
accrued = "Stückzinsen"
fees = "Gebühren"
settlement_amount = "Endbetrag"
currency = "Währung"
account = "Depot"
status = "Stand"
[values.side]
K = "buy"
V = "sell"
[values.status]
Neu = "new"
"Geändert" = "amended"
Storno = "cancelled"
""",
    ),
    Manner(
        "Orrin & Teale",
        "orrin_teale",
        {
            "broker_reference": "Broker Ref",
            "desk_reference": "Client Ref",
            "bond": "ISIN",
            "side": "B/S",
            "trade_date": "Trade Date",
            "settlement_date": "Settlement Date",
            "face": "Face Amount",
            "price": "Price",
            "accrued_days": "Days Accrued",
            "accrued": "Accrued Interest",
            "fees": "Commission",
            "settlement": "Net Amount",
            "currency": "Ccy",
            "account": "Account",
            "yield": "Yield",
            "status": "Status",
        },
        sides=("Buy", "Sell"),
        parts=2,
    ),
    Manner(
        "Quillon Harrow",
        "quillon_harrow",
        {
            "broker_reference": "Broker Reference",
            "desk_reference": "Desk Reference",
            "bond": "ISIN Code",
            "side": "Side",
            "face": "Nominal",
            "price": "Clean Price",
            "accrued": "Accrued Int",
            "fees": "Fees",
            "settlement": "Settlement Amount",
            "currency": "Currency",
            "trade_date": "Trade Date",
            "settlement_date": "Settle Date",
            "account": "Account",
            "status": "Status",
        },
        "\t",
        thousands=",",
        negative="(n)",
        day="%d-%b-%Y",
        sides=("BUY", "SELL"),
        titles=("Quillon Harrow - confirmations of the day", "prepared overnight"),
        footer="TOTAL\t{rows}",
    ),
    Manner(
        "Dunmarrow Securities",
        "dunmarrow_securities",
        {
            "settlement": "Total",
            "fees": "Charges",
            "accrued": "Interest",
            "accrued_days": "Int Days",
            "price": "Px",
            "face": "Par (000s)",
            "side": "D/R",
            "bond": "Security",
            "settlement_date": "SD",
            "trade_date": "TD",
            "broker_reference": "Our Ref",
            "desk_reference": "Your Ref",
            "currency": "Cur",
            "account": "A/C",
            "status": "Action",
        },
        "|",
        "utf-8-sig",
        day="%Y%m%d",
        sides=("R", "D"),
        face_scale=1000,
        layout="""
broker = "Dunmarrow Securities"
file = "dunmarrow*.csv"
delimiter = "|"
date = "%Y%m%d"
[columns]
settlement_amount = "Total"
fees = "Charges"
accrued = "Interest"
accrued_days = "Int Days"
price = "Px"
face = "Par (000s)"
side = "D/R"
bond = "Security"
settlement_date = "SD"
trade_date = "TD"
broker_reference = "Our Ref"
desk_reference = "Your Ref"
currency = "Cur"
account = "A/C"
status = "Action"
[values.side]
R = "buy"
D = "sell"
[scale]
face = 1000
""",
    ),
    Manner(
        "Ellisk Fane",
        "ellisk_fane",
        {
            "broker_reference": "Broker Ref",
            "desk_reference": "Client Ref",
            "trade_date": "Trade Date",
            "settlement_date": "Settlement Date",
            "bond": "ISIN",
            "side": "Buy/Sell",
            "face": "Par Value",
            "price": "Price",
            "accrued": "Accrued Interest",
            "fees": "Charges",
            "settlement": "Settlement Amount",
            "currency": "Currency",
            "account": "Account",
            "status": "Status",
        },
        encoding="utf-16",
        thousands="'",
        negative="n-",
        day="%d/%m/%Y",
        sides=("B", "S"),
    ),
    Manner(
        "Pellgrove",
        "pellgrove",
        {
            "broker_reference": "broker_reference",
            "desk_reference": "desk_reference",
            "trade_date": "trade_date",
            "settlement_date": "settlement_date",
            "bond": "bond",
            "side": "side",
            "face": "face",
            "price": "price",
            "yield": "yield",
            "accrued_days": "accrued_days",
            "accrued": "accrued",
            "fees": "fees",
            "settlement": "settlement_amount",
            "currency": "currency",
            "account": "account",
            "status": "status",
        },
        thousands=",",
        day="%d-%b-%y",
        parts=2,
    ),
)

NUMBERS = (("", "."), (",", "."), (".", ","), ("'", "."), (" ", ","), ("", ","))
"""Signs between thousands and before decimals."""
DAYS = ("%Y-%m-%d", "%d.%m.%Y", "%Y%m%d", "%d-%b-%Y", "%d %b %Y", "%d/%m/%Y", "%m/%d/%Y", "%d-%b-%y")
SYNONYMS = {
    "broker_reference": ("Broker Ref", "Confirmation No", "Deal ID", "Our Reference", "Trade Ref"),
    "desk_reference": ("Client Ref", "Your Reference", "Ticket No", "Desk Reference"),
    "bond": ("ISIN", "ISIN Code", "Security ID (ISIN)"),
    "side": ("B/S", "Buy/Sell", "Side", "Direction", "Transaction Type"),
    "face": ("Nominal", "Face Amount", "Par Value", "Face Value", "Notional", "Quantity"),
    "price": ("Price", "Clean Price", "Deal Price", "Px"),
    "accrued": ("Accrued Interest", "Accrued Int", "Accrued", "Accrued Amount"),
    "fees": ("Commission", "Fees", "Charges", "Brokerage"),
    "settlement": ("Net Amount", "Settlement Amount", "Net Consideration", "Net Proceeds", "Total Amount"),
    "currency": ("Ccy", "Currency", "Settle Ccy"),
    "trade_date": ("Trade Date", "Execution Date", "TD", "Deal Date"),
    "settlement_date": ("Settlement Date", "Settle Date", "Value Date"),
}
"""Headings in plain use, from common practice."""


def restyled(manner: Manner, rng: random.Random) -> Manner:
    """A broker without a layout file, writing in another style: what is common must be recognised without being told."""
    if manner.layout:
        return manner
    thousands, point = rng.choice(NUMBERS)
    headings = {name: rng.choice(SYNONYMS.get(name, (told,))) for name, told in manner.headings.items()}
    return replace(
        manner,
        headings=headings,
        thousands=thousands,
        point=point,
        delimiter=rng.choice((";", "\t", "|") if point == "," or thousands == "," else (",", ";", "\t", "|")),
        encoding=rng.choice(("utf-8", "utf-8-sig", "utf-16", "cp1252")),
        negative=rng.choice(("-n", "n-", "(n)")),
        day=rng.choice(DAYS),
        sides=rng.choice((("buy", "sell"), ("B", "S"), ("BUY", "SELL"), ("Bought", "Sold"), ("Purchase", "Sale"))),
        titles=rng.choice(((), (), ("Confirmations of the day",), ("Confirmations", "", "as of close"))),
        footer=rng.choice(("", "", "TOTAL{delimiter}{rows}", "TRAILER{delimiter}{rows}")),
    )
