"""Writes the morning folder: our own files plainly, confirmations in six brokers' manners, three of them with a layout
file.
"""

from __future__ import annotations

import csv
import io
import random
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from datetime import date
from fractions import Fraction
from pathlib import Path
from typing import Any

from tests.oracle.arithmetic import DIGITS
from tests.oracle.issues import text
from tests.oracle.manners import Manner

TICKET_COLUMNS = (
    "ticket",
    "trade_date",
    "settlement_date",
    "bond",
    "side",
    "face",
    "price",
    "accrued",
    "fees",
    "settlement_amount",
    "currency",
    "broker",
    "account",
    "broker_reference",
    "yield",
    "status",
)


def money(minor: int | None, currency: str) -> str:
    """Smallest units as a plain decimal text in major units."""
    if minor is None:
        return ""
    digits = DIGITS[currency]
    whole, rest = divmod(abs(minor), 10**digits)
    return ("-" if minor < 0 else "") + str(whole) + (f".{rest:0{digits}d}" if digits else "")


def number_style(plain: str, thousands: str, point: str, negative: str) -> str:
    """A plain decimal text in another number style; `negative` is -n, n- or (n)."""
    if not plain:
        return ""
    body, minus = plain.lstrip("-"), plain.startswith("-")
    whole, dot, rest = body.partition(".")
    if thousands:
        groups = []
        while len(whole) > 3:
            groups.insert(0, whole[-3:])
            whole = whole[:-3]
        whole = thousands.join([whole, *groups])
    styled = whole + (point + rest if dot else "")
    return negative.replace("n", styled) if minus else styled


@dataclass
class Written:
    """What was written of one file: rows, lines of rows that must be rejected, and money by currency that must be
    used.
    """

    rows: int = 0
    rejected: list[int] = field(default_factory=list)
    used: dict[str, int] = field(default_factory=dict)


def plain_file(path: Path, columns: Sequence[str], rows: Iterable[dict[str, str]]) -> None:
    with path.open("w", encoding="utf-8", newline="") as out:
        writer = csv.DictWriter(out, columns, lineterminator="\n")
        writer.writeheader()
        writer.writerows(rows)


def ticket_row(facts: dict[str, Any]) -> dict[str, str]:
    currency = facts["currency"]
    told = {
        "ticket": facts["ticket"],
        "trade_date": facts["trade_date"].isoformat(),
        "settlement_date": facts["settlement_date"].isoformat(),
        "bond": facts["bond"],
        "side": "buy" if facts["side"] > 0 else "sell",
        "face": money(facts["face"], currency),
        "price": facts["price_text"],
        "accrued": money(facts["accrued"], currency),
        "fees": money(facts["fees"], currency),
        "settlement_amount": money(facts["settlement"], currency),
        "currency": currency,
        "broker": facts["broker"],
        "account": facts["account"],
        "broker_reference": facts["broker_reference"],
        "yield": facts["yield_text"],
        "status": facts["status"],
    }
    if "spoilt" in facts:
        column, spoil = facts["spoilt"]
        told[column] = spoil(told[column])
    return told


def _price(facts: dict[str, Any], manner: Manner) -> str:
    """The price in the broker's manner: 32nds as such, or as decimals where the broker writes decimals."""
    if facts["quote"] == "32nds" and manner.thirty_seconds and "-" in facts["price_text"]:
        return str(facts["price_text"])
    exact = text(Fraction(facts["price"]))
    if "." not in exact and facts["quote"] == "32nds":
        exact += ".0"
    return number_style(exact, "", manner.point, manner.negative)


def confirmation_row(facts: dict[str, Any], manner: Manner, day_style: str) -> dict[str, str]:
    """The broker's facts in the broker's words, under our names of the columns."""
    currency = facts["currency"]

    def amount(minor: int | None) -> str:
        return number_style(money(minor, currency), manner.thousands, manner.point, manner.negative)

    face = Fraction(facts["face"], 10 ** DIGITS[currency] * manner.face_scale)
    told = {
        "broker_reference": facts["broker_reference"],
        "desk_reference": facts["desk_reference"],
        "trade_date": facts["trade_date"].strftime(day_style),
        "settlement_date": facts["settlement_date"].strftime(day_style),
        "bond": facts["bond"],
        "side": manner.sides[0 if facts["side"] > 0 else 1],
        "face": number_style(text(face), manner.thousands, manner.point, manner.negative),
        "price": _price(facts, manner),
        "accrued_days": "" if facts["accrued_days"] is None else str(facts["accrued_days"]),
        "accrued": amount(facts["accrued"]),
        "fees": amount(facts["fees"]),
        "settlement": amount(facts["settlement"]),
        "currency": currency,
        "account": facts["account"],
        "yield": number_style(facts["yield_text"], "", manner.point, manner.negative),
        "status": manner.statuses[facts["status"]],
    }
    if "spoilt" in facts:
        column, spoil = facts["spoilt"]
        told[column] = spoil(told[column])
    return told


def confirmation_file(path: Path, facts: list[dict[str, Any]], manner: Manner) -> Written:
    """One broker's file; says which of its lines must be rejected."""
    days = [{f[name].day for f in facts} for name in ("trade_date", "settlement_date")]
    day_style = manner.day
    if "/" in day_style and not all(any(day > 12 for day in column) for column in days):
        day_style = "%Y-%m-%d"
    out = io.StringIO()
    for title in manner.titles:
        out.write(title + "\n")
    writer = csv.writer(out, delimiter=manner.delimiter, lineterminator="\n")
    names = [name for name in manner.headings]
    writer.writerow([manner.headings[name] for name in names])
    written = Written(rows=len(facts) + bool(manner.footer))
    for number, told in enumerate(facts, start=len(manner.titles) + 2):
        row = confirmation_row(told, manner, day_style)
        writer.writerow([row[name] for name in names])
        if "spoilt" in told:
            written.rejected.append(number)
    if manner.footer:
        out.write(manner.footer.format(rows=len(facts), delimiter=manner.delimiter) + "\n")
    path.write_bytes(out.getvalue().encode(manner.encoding))
    return written


def shuffled(rows: Iterable[Any], order: random.Random | None) -> list[Any]:
    found = list(rows)
    if order:
        order.shuffle(found)
    return found


def day_text(day: date | None) -> str:
    return day.isoformat() if day else ""
