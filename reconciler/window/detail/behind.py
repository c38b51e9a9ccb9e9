"""What the detail pane says, as ready texts: the heading, what differs in sentences, the working, the coupons.

One place asks the procedures and puts their answers into the window's words, so that the pane only lays out.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from reconciler.window import figures
from reconciler.window.detail.accounts import accounts_sheet, telling_first
from reconciler.window.detail.coupons import coupons_sheet
from reconciler.window.detail.working import working_sheet
from reconciler.window.drawings import Strip
from reconciler.window.payment_cells import title_of
from reconciler.window.sheet import Sheet

if TYPE_CHECKING:
    from reconciler.window.loading import Loaded


@dataclass(frozen=True)
class Told:
    """One break in words: what differs, the sentence about it, the tone it is set in."""

    title: str
    text: str
    look: str


@dataclass(frozen=True)
class Shown:
    """The working of a payment as the pane sets it."""

    sheet: Sheet
    strip: Strip
    found: str
    found_more: str
    look: str
    next_step: str


_LOOKS = {"no confirmation": "silent", "no ticket": "silent", "no cash": "silent", "unexplained cash": "silent",
          "unknown bond": "silent", "unsound terms": "silent", "settlement date": "day", "payment date": "day",
          "trade date": "day"}  # fmt: skip


def heading(loaded: Loaded, row: int) -> tuple[str, str]:
    """The payment in one line, and who, what and when below it."""
    item = loaded.day.items.row(row)
    digits = int(loaded.overview.digits[row])
    name = loaded.overview.description.text(row)
    title = title_of(item["kind"], int(item["side"]), figures.face(int(item["face_minor"]), digits), name,
                     _narrative(loaded, row))  # fmt: skip
    parts = [item["bond"]]
    if int(item["bond_row"]) >= 0:
        bond = loaded.bonds.row(int(item["bond_row"]))
        maturity = figures.date(bond["maturity"])
        parts += [_rhythm(bond), bond["day_count"], f"matures {maturity}" if maturity else ""]
    if item["kind"] == "trade":
        parts += [f"{item['ticket'] or item['broker_reference']} with {item['broker'] or 'a broker not told'}"]
    elif item["kind"] == "bank":
        parts += [f"entry {item['bank_entries']}", f"account {item['account']}"]
    elif item["kind"] in ("coupon", "redemption"):
        parts += [f"account {item['account']}"]
        if not np.isnat(item["record_date"]):
            parts += [f"held on {figures.date(item['record_date'])}"]
    parts += [item["currency"]]
    return title, "  ·  ".join(part for part in parts if part)


def _narrative(loaded: Loaded, row: int) -> str:
    cash_row = int(loaded.overview.cash_row[row])
    return loaded.day.source.cash["narrative"].text(cash_row) if cash_row >= 0 else ""


def _rhythm(bond: dict[str, Any]) -> str:
    """How often the bond pays: "4.625 % semi-annual"."""
    rate = figures.decimal(int(bond["coupon_rate_e9"]), 9)
    often = {1: "annual", 2: "semi-annual", 4: "quarterly", 12: "monthly"}.get(int(bond["frequency"]), "no coupons")
    return f"{rate} % {often}" if rate else bond["kind"] if often == "no coupons" else often


def has_coupons(loaded: Loaded, row: int) -> bool:
    """True when the item's bond is known."""
    return int(loaded.day.items["bond_row"][row]) >= 0


def accounts(loaded: Loaded, row: int) -> Sheet:
    """The four accounts side by side."""
    return accounts_sheet(loaded.day, loaded.overview, row)


def differences(loaded: Loaded, row: int) -> list[Told]:
    """Every break of the payment as a sentence, the most urgent first; one line when there is none."""
    day = loaded.day
    told = []
    for one in telling_first(loaded, row):
        title = f"{one['break'][:1].upper()}{one['break'][1:]}  ·  {one['party']}"
        told.append(Told(title, one["explanation"] or one["cause"], _LOOKS.get(one["break"], "differ")))
    state = day.items["state"].text(row)
    if not told:
        text = {"due": "Everybody who speaks agrees; the cash is due today.",
                "within tolerance": "The amounts differ by no more than the tolerance."}.get(
                    state, "Everybody who speaks tells the same.")  # fmt: skip
        told.append(Told(text, "", ""))
    return told


def next_step(loaded: Loaded, row: int) -> str:
    """What is to be done about the payment, "" when nothing is."""
    found = telling_first(loaded, row)
    return str(found[0]["next_step"]) if found else ""


def bond_heading(loaded: Loaded, row: int) -> tuple[str, str]:
    """A bond's description, and its main terms below it."""
    bond = loaded.bonds.row(row)
    parts = [bond["bond"], bond["currency"], bond["kind"], _rhythm(bond), bond["day_count"], bond["calendar"],
             f"matures {figures.date(bond['maturity'])}" if not np.isnat(bond["maturity"]) else ""]  # fmt: skip
    return bond["description"] or bond["bond"], "  ·  ".join(part for part in parts if part)


def working(loaded: Loaded, row: int) -> Shown:
    """How the payment is reckoned, what was found, what to do next."""
    from reconciler.procedures import working as procedure

    found = telling_first(loaded, row)
    told = procedure.working(loaded.day, row)
    first = found[0] if found else None
    certainty = first["certainty"] if first else ""
    look = {"proved": "differ", "likely": "day", "open": "silent"}.get(certainty, "")
    words = {"proved": "Proved. ", "likely": "Likely. ", "open": "Open. "}.get(certainty, "")
    more = [*told.notes, *(_others(loaded, first["row"]) if first else ())]
    sentence = (first["cause"] or first["explanation"]) if first else "Everybody who speaks agrees with this."
    if first and first["cause"] and first["explanation"]:
        more.insert(0, first["explanation"])
    return Shown(working_sheet(told, {one["party"] for one in found}), strip_of(told.strip),
                 f"{words}{sentence[:1].upper()}{sentence[1:]}", " ".join(more), look,
                 first["next_step"] if first else "")  # fmt: skip


def _others(loaded: Loaded, break_row: int) -> list[str]:
    """What else was tried on a break, and what else of it fits."""
    if loaded.searching:
        return ["The cause is still searched for."]
    explanations = loaded.day.explanations
    rows = np.flatnonzero(np.asarray(explanations["break_row"]) == break_row)
    if not len(rows):
        return []
    tried = int(explanations["tried"][rows].max())
    causes = [explanations["cause"].text(int(row)) for row in rows[np.argsort(explanations["place"][rows], kind="stable")]]
    others = [cause for cause in dict.fromkeys(causes[1:]) if cause and cause != causes[0]]
    told = f"{figures.count(tried, 'explanation')} {'was' if tried == 1 else 'were'} tried"
    if not others:
        return [f"{told}; no other fits."]
    rest = f" and {figures.count(len(others) - 3, 'more')}" if len(others) > 3 else ""
    return [f"{told}; these fit too: {', '.join(others[:3])}{rest}."]


def strip_of(told: Any) -> Strip:
    """The procedure's strip as the drawing takes it."""
    return Strip(told.boundaries, told.accrued, told.marked, told.marked_words, told.accrued_words, told.next_period)


def coupons(loaded: Loaded, row: int) -> tuple[Sheet, Strip]:
    """The coupons of the payment's bond."""
    return bond_coupons(loaded, int(loaded.day.items["bond_row"][row]), row)


def bond_coupons(loaded: Loaded, bond_row: int, item_row: int = -1) -> tuple[Sheet, Strip]:
    """A bond's coupons as list and strip, on the item's face or on a million."""
    from reconciler.procedures import bond_coupons as procedure

    told = procedure.bond_coupons(loaded.day, bond_row, item_row, 1_000_000)
    return coupons_sheet(told.table, told.digits, told.shown), strip_of(told.strip)
