"""Ways of misreading a trade or a coupon, one short function each, for `make_faults.py`.

A fault alters the facts or the terms as one party read them, or slips in what that party then tells; everything it
tells is reckoned from there by the scalar reckoning in `tests/oracle`. Several faults can be put into one reading.
"""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from datetime import date, timedelta
from fractions import Fraction
from typing import Any

from tests.oracle import issues
from tests.oracle.arithmetic import DIGITS, Bond, coupon_amount, factor_at, half_up, period_at, periods
from tests.oracle.deals import reckon

TODAY, SINCE = date(2026, 3, 31), date(2026, 3, 17)


@dataclass
class Reading:
    """How a party read a trade: the terms and facts it believes, the day it accrues to, and slips in what it then
    tells.
    """

    bond: Bond
    facts: dict[str, Any]
    to: date | None = None
    slips: list[Callable[[dict[str, Any]], None]] = field(default_factory=list)

    def told(self) -> dict[str, Any]:
        """What the party tells, its slips included."""
        facts = reckon(self.bond, self.facts, to=self.to)
        for slipped in self.slips:
            slipped(facts)
        return facts


Fault = Callable[[Reading, random.Random], bool]


def _day_count(other: str, only: tuple[str, ...]) -> Fault:
    def fault(r: Reading, rng: random.Random) -> bool:
        if r.bond.day_count not in only or r.bond.kind == "zero" or r.facts["accrued"] <= 0:
            return False
        r.bond = replace(r.bond, day_count=other)
        return True

    return fault


def _one_day(r: Reading, rng: random.Random) -> bool:
    r.to = r.facts["settlement_date"] + timedelta(days=rng.choice((-1, 1)))
    return r.facts["accrued_days"] > 3


def _to_trade_date(r: Reading, rng: random.Random) -> bool:
    r.to = r.facts["trade_date"]
    return bool(r.facts["accrued_days"] > (r.facts["settlement_date"] - r.to).days)


def _from_issue(r: Reading, rng: random.Random) -> bool:
    """Interest counted from the start of interest, not from the last coupon, as money-market days."""
    period = period_at(r.bond, r.facts["settlement_date"])
    if (
        period is None
        or r.bond.day_count not in ("Act/360", "Act/365F", "30/360", "30E/360")
        or period.start == r.bond.accrual_start
    ):
        return False
    r.bond = replace(r.bond, first_coupon=period.end)
    return r.bond.kind == "fixed"


def _coupon_not_taken_off(r: Reading, rng: random.Random) -> bool:
    """The last coupon was paid, but the accrual was not set back: a whole coupon too much."""
    before = [p for p in periods(r.bond) if p.counted_to <= r.facts["settlement_date"]]
    if not before or r.bond.kind != "fixed" or not before[-1].regular or r.facts["accrued"] < 0:
        return False

    def more(facts: dict[str, Any]) -> None:
        amount = coupon_amount(r.bond, before[-1], facts["face"])
        facts["accrued"] += amount
        facts["settlement"] += amount
        facts["accrued_days"] = None

    r.slips.append(more)
    return True


def _settles_later(r: Reading, rng: random.Random) -> bool:
    day = r.bond.calendar.walk(r.facts["settlement_date"], 1)
    r.facts["settlement_date"] = day
    return day < r.bond.maturity and day <= TODAY


def _ex_dividend_missed(r: Reading, rng: random.Random) -> bool:
    r.bond = replace(r.bond, ex_dividend="")
    return bool(r.facts["accrued"] < 0)


def _price(change: Callable[[Reading, random.Random], Fraction | None]) -> Fault:
    def fault(r: Reading, rng: random.Random) -> bool:
        price = change(r, rng)
        if price is None or price == r.facts["price"]:
            return False
        r.facts["price"], r.facts["price_text"] = price, issues.text(price)
        return True

    return fault


def _ticks_as_decimals(r: Reading, rng: random.Random) -> Fraction | None:
    if r.bond.quote != "32nds":
        return None
    whole, _, ticks = r.facts["price_text"].partition("-")
    return Fraction(f"{whole}.{ticks[:2]}") if len(ticks) == 2 else None


def _plus_lost(r: Reading, rng: random.Random) -> Fraction | None:
    return r.facts["price"] - Fraction(1, 64) if str(r.facts["price_text"]).endswith("+") else None


def _decimals_as_ticks(r: Reading, rng: random.Random) -> Fraction | None:
    whole, _, rest = str(r.facts["price_text"]).partition(".")
    return (
        int(whole) + Fraction(int(rest), 32) if r.bond.quote == "price" and len(rest) == 2 and int(rest) <= 31 else None
    )


def _digitsexchanged(r: Reading, rng: random.Random) -> Fraction | None:
    text = str(r.facts["price_text"])
    places = [n for n in range(len(text) - 1) if text[n : n + 2].isdigit() and text[n] != text[n + 1]]
    if r.bond.quote != "price" or not places:
        return None
    at = rng.choice(places)
    return Fraction(text[:at] + text[at + 1] + text[at] + text[at + 2 :])


def _cut_to(places: int) -> Callable[[Reading, random.Random], Fraction | None]:
    def change(r: Reading, rng: random.Random) -> Fraction | None:
        return Fraction(half_up(r.facts["price"] * 10**places), 10**places) if r.bond.quote == "price" else None

    return change


def _dirty_as_clean(r: Reading, rng: random.Random) -> bool:
    """The price told is clean, but the principal was taken at the price with accrued, and accrued added again."""
    amount = r.facts["accrued"]

    def twice(facts: dict[str, Any]) -> None:
        facts["settlement"] += facts["accrued"]

    r.slips.append(twice)
    return bool(amount > 0)


def _face_times(*factors: Fraction) -> Fault:
    def fault(r: Reading, rng: random.Random) -> bool:
        face = r.facts["face"] * rng.choice(factors)
        r.facts["face"] = int(face)
        return face.denominator == 1 and face >= 100 * 10 ** DIGITS[r.bond.currency]

    return fault


def _factor(which: str) -> Fault:
    def fault(r: Reading, rng: random.Random) -> bool:
        reached = [day for day, _ in r.bond.steps if day <= r.facts["settlement_date"]]
        if r.bond.kind not in ("amortising", "linked") or len(reached) < 2:
            return False
        now = factor_at(r.bond, r.facts["settlement_date"])
        steps = [] if which == "none" else [(day, value) for day, value in r.bond.steps if day < reached[-1]]
        r.bond = replace(r.bond, steps=steps)
        return factor_at(r.bond, r.facts["settlement_date"]) != now

    return fault


def _stale_rate(r: Reading, rng: random.Random) -> bool:
    reached = [day for day, _ in r.bond.steps if day <= r.facts["settlement_date"]]
    if r.bond.kind not in ("floating", "stepped") or len(reached) < 2:
        return False
    r.bond = replace(r.bond, steps=[(day, value) for day, value in r.bond.steps if day < reached[-1]])
    return True


def _other_side(r: Reading, rng: random.Random) -> bool:
    r.facts["side"] = -r.facts["side"]
    return True


def _fees(change: Callable[[int], int]) -> Fault:
    def fault(r: Reading, rng: random.Random) -> bool:
        fees = r.facts["fees"]
        if not fees:
            return False
        r.facts["fees"] = change(fees)
        return True

    return fault


def _fee_added_on_a_sale(r: Reading, rng: random.Random) -> bool:
    fees = r.facts["fees"] or 0

    def more(facts: dict[str, Any]) -> None:
        facts["settlement"] += 2 * fees

    r.slips.append(more)
    return bool(fees and r.facts["side"] < 0)


def _without_accrued(r: Reading, rng: random.Random) -> bool:
    amount = r.facts["accrued"]

    def less(facts: dict[str, Any]) -> None:
        facts["settlement"] -= facts["accrued"]

    r.slips.append(less)
    return abs(amount) > 100


def _rounded_per_hundred(r: Reading, rng: random.Random) -> bool:
    r.bond = replace(r.bond, accrued_rounding="100:3")
    return r.facts["accrued"] != 0 and r.facts["face"] > 10**8


def _amount(change: Callable[[int, random.Random], int]) -> Fault:
    def fault(r: Reading, rng: random.Random) -> bool:
        def wrong(facts: dict[str, Any]) -> None:
            facts["settlement"] = change(facts["settlement"], rng)

        r.slips.append(wrong)
        return True

    return fault


def exchanged(number: int, rng: random.Random) -> int:
    digits = list(str(number))
    places = [n for n in range(len(digits) - 1) if digits[n] != digits[n + 1] and (n or digits[1] != "0")]
    if not places:
        return number + 1000
    at = rng.choice(places)
    digits[at], digits[at + 1] = digits[at + 1], digits[at]
    return int("".join(digits))


def _minus_lost(r: Reading, rng: random.Random) -> bool:
    def turned(facts: dict[str, Any]) -> None:
        facts["settlement"] -= 2 * facts["accrued"]
        facts["accrued"] = -facts["accrued"]

    r.slips.append(turned)
    return bool(r.facts["accrued"] < 0)


def _days_and_months_exchanged(r: Reading, rng: random.Random) -> bool:
    day = r.facts["settlement_date"]
    if day.day > 12 or day.day == day.month:
        return False
    wrong = date(day.year, day.day, day.month)
    r.slips.append(lambda facts: facts.update(settlement_date=wrong))
    return True


THIRTY, ACTUAL = ("30/360", "30E/360", "30E/360 ISDA"), ("Act/Act ICMA", "Act/365F", "Act/360", "Act/Act ISDA")

TRADE_FAULTS: dict[str, Fault] = {
    "30/360 for actual": _day_count("30/360", ("Act/Act ICMA", "Act/365F", "Act/Act ISDA")),
    "30E/360 for actual": _day_count("30E/360", ("Act/Act ICMA",)),
    "actual for 30/360": _day_count("Act/Act ICMA", THIRTY),
    "Act/365F for Act/Act": _day_count("Act/365F", ("Act/Act ICMA",)),
    "Act/365F for Act/360": _day_count("Act/365F", ("Act/360",)),
    "Act/360 for others": _day_count("Act/360", ("Act/Act ICMA", "Act/365F", *THIRTY)),
    "Act/Act ISDA for ICMA": _day_count("Act/Act ISDA", ("Act/Act ICMA",)),
    "one day of accrued": _one_day,
    "accrued to the trade date": _to_trade_date,
    "accrued from the issue": _from_issue,
    "last coupon not taken off": _coupon_not_taken_off,
    "settles a day later": _settles_later,
    "ex-dividend missed": _ex_dividend_missed,
    "32nds as decimals": _price(_ticks_as_decimals),
    "plus lost": _price(_plus_lost),
    "decimals as 32nds": _price(_decimals_as_ticks),
    "price digits exchanged": _price(_digitsexchanged),
    "price cut to two places": _price(_cut_to(2)),
    "price with accrued": _dirty_as_clean,
    "face ten times": _face_times(Fraction(10), Fraction(1, 10)),
    "face in thousands": _face_times(Fraction(1000), Fraction(1, 1000)),
    "factor ignored": _factor("none"),
    "factor of before": _factor("old"),
    "rate of before": _stale_rate,
    "side": _other_side,
    "fee missing": _fees(lambda fees: 0),
    "fee twice": _fees(lambda fees: 2 * fees),
    "fee added on a sale": _fee_added_on_a_sale,
    "without accrued": _without_accrued,
    "accrued rounded per 100": _rounded_per_hundred,
    "amount digits exchanged": _amount(exchanged),
    "amount digit dropped": _amount(lambda n, rng: int(str(n)[:-1] or 1)),
    "amount point moved": _amount(lambda n, rng: n * 10),
    "minus lost": _minus_lost,
    "day and month exchanged": _days_and_months_exchanged,
}
