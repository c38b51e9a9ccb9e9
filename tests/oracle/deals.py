"""Invents trades and what each party tells of them: desk, broker and bank each have their own facts, true until a
plant alters them.

`reckon` is the one place where a trade's amounts come from, so that a faulty fact can be carried through honestly (a
broker who accrues the wrong days also tells the wrong total).
"""

from __future__ import annotations

import random
from dataclasses import dataclass, field
from datetime import date, timedelta
from fractions import Fraction
from typing import Any

from tests.oracle.arithmetic import DIGITS, Bond, accrued, period_at, principal, street_yield
from tests.oracle.issues import Scene, text

BROKERS = ("Tamarisk & Vane", "Orrin & Teale", "Quillon Harrow", "Dunmarrow Securities", "Ellisk Fane", "Pellgrove")
ACCOUNTS = ("ALDER-1", "BIRCH-2", "CEDAR-3", "DAMSON-4")


@dataclass
class Entry:
    """One booking on a cash account; money in is positive."""

    entry: str
    account: str
    currency: str
    value_date: date
    amount: int
    narrative: str = ""
    reference: str = ""
    bond: str = ""
    booked_date: date | None = None
    spoilt: dict[str, str] = field(default_factory=dict)


@dataclass
class Truth:
    """What the program must say of one payment: the terms' amount and date, and the breaks planted in it."""

    kind: str
    key: tuple[str, ...]
    currency: str
    amount: int | None
    day: date | None
    state: str = "agrees"
    plant: str = ""
    must: set[tuple[str, str]] = field(default_factory=set)
    entries: set[str] = field(default_factory=set)


@dataclass
class Trade:
    """A trade: its bond, true facts, what desk and broker tell (None: nothing), what the bank booked, and the truth."""

    bond: Bond
    true: dict[str, Any]
    desk: dict[str, Any] | None
    broker: dict[str, Any] | None
    truth: Truth
    paid: bool = False
    overdue: bool = False
    """Its settlement date is before the morning's."""
    bank: list[Entry] = field(default_factory=list)
    more_tickets: list[dict[str, Any]] = field(default_factory=list)
    more_confirmations: list[dict[str, Any]] = field(default_factory=list)

    @property
    def cash(self) -> int:
        """The amount that the true facts move on our account."""
        return signed(self.true)


def signed(facts: dict[str, Any]) -> int:
    return -facts["side"] * facts["settlement"]


def reckon(
    bond: Bond, facts: dict[str, Any], day_count: str = "", to: date | None = None, **changes: Any
) -> dict[str, Any]:
    """The facts with some changed and all amounts reckoned again; accrued under another day count or to another day if
    told.
    """
    new = {**facts, **changes}
    settle = new["settlement_date"]
    new["accrued_days"], new["accrued"], _ = accrued(bond, settle, new["face"], day_count, to)
    new["principal"] = principal(bond, new["price"], settle, new["face"])
    new["settlement"] = new["principal"] + new["accrued"] + new["side"] * (new["fees"] or 0)
    return new


def tradeable(bond: Bond, settle: date) -> bool:
    if settle >= bond.maturity or settle < bond.accrual_start:
        return False
    return bond.kind == "zero" or period_at(bond, settle) is not None


def thirty_seconds(price: Fraction) -> str:
    """A price in 32nds and eighths of them: 99-16, 99-16+, 99-162, 99-166."""
    whole, eighths = divmod(int(price * 256), 256)
    ticks, rest = divmod(eighths, 8)
    return f"{whole}-{ticks:02d}" + {0: "", 4: "+"}.get(rest, str(rest))


def _yields_plainly(bond: Bond, settle: date) -> bool:
    """Regular periods under Act/Act ICMA, no ex-dividend days, more than one coupon to come: all conventions but the
    street's differ.
    """
    if bond.kind != "fixed" or bond.day_count != "Act/Act ICMA" or bond.frequency not in (1, 2) or bond.ex_dividend:
        return False
    return (
        not (bond.first_coupon or bond.last_regular)
        and (bond.maturity - settle).days > 400
        and bond.redemption_price == 100
    )


def price_for(bond: Bond, rng: random.Random) -> tuple[Fraction, str]:
    if bond.quote == "32nds":
        price = Fraction(rng.randint(92 * 32, 106 * 32), 32) + rng.choice(
            (0, 0, Fraction(1, 64), Fraction(1, 128), Fraction(3, 128))
        )
        return price, thirty_seconds(price)
    if bond.quote == "discount":
        price = Fraction(rng.randint(300, 4800), 1000)
        return price, text(price)
    years = (bond.maturity - date(2026, 3, 31)).days / 365
    if bond.kind == "zero":
        middle = 100 * 0.96**years
        price = Fraction(round(middle * rng.uniform(0.97, 1.01) * 1000), 1000)
    else:
        places = rng.choice((2, 3, 3, 5, 6))
        price = Fraction(rng.randint(85 * 10**places, 113 * 10**places), 10**places)
    return price, text(price)


def face_for(bond: Bond, rng: random.Random) -> int:
    lot = rng.choice((1000, 1000, 5000, 100_000))
    size = lot * rng.choice((rng.randint(1, 99), rng.randint(100, 999), rng.randint(1, 12) * 250))
    return size * 10 ** DIGITS[bond.currency] * (100 if bond.currency == "JPY" else 1)


def deal(scene: Scene, bond: Bond, number: int) -> Trade | None:
    """One trade that settles between `since` and a few days after the morning, told alike by everybody; None if it
    cannot be.
    """
    rng = scene.rng
    day = scene.since + timedelta(days=rng.randint(-7, (scene.today - scene.since).days))
    if not bond.calendar.is_open(day):
        return None
    settle = bond.settles(day)
    if settle < scene.since - timedelta(days=4) or not tradeable(bond, settle):
        return None
    broker, account, side = rng.choice(BROKERS), rng.choice(ACCOUNTS), rng.choice((1, -1))
    price, price_text = price_for(bond, rng)
    fees = rng.choice((None, None, 0, rng.randint(1, 40) * 5 * 10 ** DIGITS[bond.currency], rng.randint(101, 99999)))
    ticket = scene.styles[0].format(number)
    facts = reckon(bond, {
        "number": number, "ticket": ticket, "trade_date": day, "settlement_date": settle, "bond": bond.bond, "side": side,
        "face": face_for(bond, rng), "price": price, "price_text": price_text, "fees": fees, "currency": bond.currency,
        "broker": broker, "account": account, "desk_reference": ticket,
        "broker_reference": scene.styles[1].format(broker.upper(), number * 7 + 300000), "yield_text": "", "status": "new", "quote": bond.quote,
    })  # fmt: skip
    if facts["settlement"] <= 0:
        return None
    if rng.random() < 0.4 and _yields_plainly(bond, settle):
        facts["yield_text"] = f"{street_yield(bond, price, settle):.{rng.choice((3, 4, 6))}f}"
    confirmed = dict(facts)
    manner = rng.random()
    if manner < 0.35:
        confirmed["desk_reference"] = ""
    desk = dict(facts)
    if manner > 0.8 or manner < 0.1:
        desk["broker_reference"] = ""
    if rng.random() < 0.1:
        desk["accrued"] = None
    if rng.random() < 0.3:
        confirmed["account"] = ""
    if rng.random() < 0.1:
        desk["status"], confirmed["status"] = "", rng.choice(("", "new"))
    untold = rng.random()
    if untold < 0.05:
        # the fee is inside the amount, and only one of the two says how much it is
        (desk if untold < 0.025 else confirmed)["fees"] = None
    elif untold < 0.07:
        desk["settlement"] = desk["accrued"] = None
    truth = Truth("trade", (facts["ticket"],), bond.currency, signed(facts), settle)
    trade = Trade(bond, facts, desk, confirmed, truth, overdue=settle < scene.today)
    if settle < scene.today or (settle == scene.today and rng.random() < 0.5):
        trade.paid = True
    elif settle == scene.today:
        truth.state = "due"
    return trade


def pay(trade: Trade, rng: random.Random) -> None:
    """The bank's booking of a trade, in one of the manners banks have of naming what they pay."""
    facts, amount = trade.true, trade.cash
    number = f"{facts['number']:06d}"
    manner = rng.choice(
        (
            "ticket",
            "ticket",
            "broker",
            "bond",
            "narrative",
            "broker in narrative",
            "worded",
            "both",
            "two entries",
            "bank's own",
        )
    )
    word = "PURCHASE" if facts["side"] > 0 else "SALE"
    entry = Entry(f"E{number}", facts["account"], facts["currency"], facts["settlement_date"], amount,
                  narrative=f"SECURITIES {word}")  # fmt: skip
    if manner in ("ticket", "both", "two entries"):
        entry.reference = facts["ticket"]
    if manner == "broker":
        entry.reference = facts["broker_reference"]
    if manner in ("bond", "both"):
        entry.bond = facts["bond"]
    if manner == "narrative":
        entry.narrative += f" {facts['ticket']} {trade.bond.description}"
    if manner == "broker in narrative":
        entry.narrative += f', "{facts["broker"]}", REF {facts["broker_reference"]}'
    if manner == "bank's own":
        entry.reference, entry.bond = f"DVP{rng.randint(10**7, 10**8)}", facts["bond"]
    if manner == "worded":
        entry.reference = f"TRADE {facts['ticket']}"
    trade.bank = [entry]
    if manner == "two entries" and abs(amount) > 1000:
        part = amount * rng.randint(20, 80) // 100
        entry.amount -= part
        trade.bank.append(
            Entry(
                f"E{number}B", entry.account, entry.currency, entry.value_date, part, entry.narrative, entry.reference
            )
        )
