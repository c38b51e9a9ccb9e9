"""A letter to whoever has to put a break right: references, both figures, the reason and what is asked. A draft; nothing is ever sent.

One letter speaks of one payment and one party (broker, custodian or our own desk) and lists every fact in which that party differs.
The words are plain and the same for everybody, so that the reader finds the figures in the same place each time.
"""

from __future__ import annotations

from dataclasses import dataclass
from email.message import EmailMessage
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from reconciler.exports.columns import put_in_place
from reconciler.money import minor_digits, to_text
from reconciler.records import MISSING, PARTIES
from reconciler.texts import long_date

if TYPE_CHECKING:
    from reconciler.procedures.morning import Day

_AMOUNTS = ("settlement amount", "payment amount", "accrued", "fees", "face", "no cash", "unexplained cash", "no confirmation", "no ticket")
_KIND_WORDS = {"coupon": "coupon", "redemption": "redemption", "bank": "entry on our account"}


_ASKED = {
    # what a letter asks, by party and kind of break; our own desk is told the next step itself
    "Broker": {
        "no confirmation": "Please confirm the trade.",
        "told twice": "Please cancel the second confirmation, or tell us that there were two trades.",
        "": "Please send a corrected confirmation, or tell us where our reckoning goes wrong.",
    },
    "Bank": {
        "no cash": "Please tell us where the payment is, and credit it with value of the day it was due.",
        "unexplained cash": "Please tell us what the entry is for, or reverse it.",
        "told twice": "Please reverse the second entry, or tell us what it is for.",
        "": "Please correct the entry, or send us the advice that explains it.",
    },
}  # fmt: skip


@dataclass(frozen=True)
class Letter:
    """A drafted letter: to whom (in words), about what, and its text."""

    party: str
    to: str
    subject: str
    body: str


def parties(day: Day, item_row: int) -> list[str]:
    """The parties a letter about an item can go to, the one with the most urgent break first."""
    rows = _rows(day, item_row)
    told = [day.breaks["party"].text(row) for row in rows]
    return [party for party in dict.fromkeys(told) if party in PARTIES[1:]] or (["Desk"] if told else [])


def draft(day: Day, item_row: int, party: str = "") -> Letter | None:
    """The letter about an item to a party (the first of `parties` when none is named); None when there is nothing to write about."""
    whom = party or next(iter(parties(day, item_row)), "")
    rows = [row for row in _rows(day, item_row) if day.breaks["party"].text(row) == whom] or _rows(day, item_row)
    if not whom or not rows:
        return None
    item = day.items.row(item_row)
    digits = int(minor_digits([item["currency"]])[0])
    facts = [_fact(day.breaks.row(row), item["currency"]) for row in rows]
    first = day.breaks.row(rows[0])
    subject = f"{first['break'][:1].upper()}{first['break'][1:]}: {_name(day, item, digits)}"
    lines = [
        "Good morning,", "", f"this is about {_what(day, item, digits)}.", *_references(item), "",
        *facts, "", "How it comes about:", *(f"  {sentence}" for sentence in _reasons(day, rows)), "",
        "What we ask:", *(f"  {asked}" for asked in dict.fromkeys(_asked(whom, day.breaks.row(row)) for row in rows) if asked), "",
        "Please answer quoting the references above.", "",
    ]  # fmt: skip
    return Letter(whom, _to(item, whom), subject, "\n".join(lines))


def save(letter: Letter, path: Path) -> None:
    """Writes the letter as a mail message (`.eml`, without sender or address) or as text; raises KnownError when it cannot."""
    with put_in_place(path) as aside:
        if path.suffix.lower() == ".eml":
            message = EmailMessage()
            message["Subject"] = letter.subject
            message.set_content(letter.body)
            aside.write_bytes(bytes(message))
        else:
            aside.write_text(f"{letter.to}\n{letter.subject}\n\n{letter.body}", encoding="utf-8")


def _rows(day: Day, item_row: int) -> list[int]:
    rows = np.flatnonzero(day.breaks["item_row"] == item_row)
    return [int(row) for row in rows[np.argsort(day.breaks["rank"][rows], kind="stable")]]


def _to(item: dict[str, Any], party: str) -> str:
    if party == "Broker":
        return item["broker"] or "the broker"
    return f"the custodian bank, account {item['account']}" if party == "Bank" else "our own desk"


def _money(minor: int, digits: int, currency: str) -> str:
    text = to_text([abs(int(minor))], digits)[0]
    whole, point, rest = text.partition(".")
    return f"{int(whole):,}{point}{rest} {currency}".strip()


def _name(day: Day, item: dict[str, Any], digits: int) -> str:
    bond = item["bond"]
    if int(item["bond_row"]) >= 0:
        bond = day.source.bonds["description"].text(int(item["bond_row"])) or bond
    reference = item["ticket"] or item["broker_reference"] or item["bank_entries"] or item["account"]
    return " · ".join(part for part in (bond, reference) if part)


def _what(day: Day, item: dict[str, Any], digits: int) -> str:
    face = "" if item["face_minor"] == MISSING else _money(item["face_minor"], digits, item["currency"]).removesuffix(".00")
    bond = item["bond"]
    if int(item["bond_row"]) >= 0 and day.source.bonds["description"].text(int(item["bond_row"])):
        bond = f"{day.source.bonds['description'].text(int(item['bond_row']))} ({item['bond']})"
    when = item["terms_date"] if not np.isnat(item["terms_date"]) else item["desk_date"]
    day_words = "" if np.isnat(when) else long_date(when)
    if item["kind"] == "trade":
        side = {1: "purchase", -1: "sale"}.get(int(item["side"]), "trade")
        settles = f", settling {day_words}" if day_words else ""
        return f"our {side} of {face} {bond}".replace("  ", " ") + settles
    kind = _KIND_WORDS[item["kind"]]
    due = f", due {day_words}" if day_words else ""
    return f"the {kind} on {face} {bond}{due}" if item["kind"] != "bank" else f"the {kind} {item['bank_entries']}"


def _references(item: dict[str, Any]) -> list[str]:
    told = (("our ticket", item["ticket"]), ("broker's reference", item["broker_reference"]), ("bank entry", item["bank_entries"]),
            ("account", item["account"]))  # fmt: skip
    return ["References: " + ", ".join(f"{words} {text}" for words, text in told if text) + "."]


def _fact(one: dict[str, Any], currency: str) -> str:
    """One line: the fact, what was told, what we have, the difference."""
    amount = one["break"] in _AMOUNTS
    unit = f" {currency}" if amount else ""
    one = {**one, **{name: _grouped(one[name], amount) for name in ("found", "expected", "difference")}}
    parts = [f"  {one['break'][:1].upper()}{one['break'][1:]}"]
    parts += [f"told {one['found']}{unit}"] if one["found"] else []
    parts += [f"by the terms {one['expected']}{unit}"] if one["expected"] else []
    parts += [f"difference {one['difference']}{unit}"] if one["difference"] and one["found"] and one["expected"] else []
    return "   ".join(parts)


def _asked(party: str, one: dict[str, Any]) -> str:
    words = _ASKED.get(party)
    return str(one["next_step"]) if words is None else words.get(one["break"], words[""])


def _grouped(text: str, amount: bool) -> str:
    """An amount with its thousands grouped; other texts as they are."""
    sign, figures = ("−", text[1:]) if text.startswith("-") else ("", text)
    whole, point, rest = figures.partition(".")
    return f"{sign}{int(whole):,}{point}{rest}" if amount and whole.isdigit() else text


def _reasons(day: Day, rows: list[int]) -> list[str]:
    certain = {"proved": "The figures prove it", "likely": "The figures fit it, without proof", "open": "No cause is known yet"}
    out = []
    for row in rows:
        one = day.breaks.row(row)
        told = one["explanation"]
        if one["party"] in ("Broker", "Bank"):
            told = told.replace(f"{one['party']} told", "You told").replace(f"that {one['party'].lower()} told", "that you told")
        out.append(f"{told} ({certain.get(one['certainty'], '')}.)" if one["cause"] else told)
    return list(dict.fromkeys(out))
