"""Ways in which a bank pays a settlement or a coupon wrongly, one short function each, for `make_faults.py`."""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import replace
from datetime import timedelta
from fractions import Fraction

from fault_kinds import TODAY, exchanged

from tests.oracle import bank
from tests.oracle.arithmetic import coupon_amount, half_up, periods
from tests.oracle.deals import ACCOUNTS, Trade


def _bank_sign(trade: Trade, rng: random.Random) -> bool:
    trade.bank[0].amount = -trade.bank[0].amount
    return True


def _bank_days(trade: Trade, rng: random.Random) -> bool:
    day = trade.bank[0].value_date + timedelta(days=1)
    trade.bank[0].value_date = day
    return day <= TODAY


def _bank_charge(trade: Trade, rng: random.Random) -> bool:
    trade.bank[0].amount -= rng.choice((1000, 1500, 2000, 2500))
    return trade.bond.currency != "JPY"


def _bank_account(trade: Trade, rng: random.Random) -> bool:
    trade.bank[0].account = rng.choice([name for name in ACCOUNTS if name != trade.true["account"]])
    return True


def _bank_without_accrued(trade: Trade, rng: random.Random) -> bool:
    trade.bank[0].amount += trade.true["side"] * trade.true["accrued"]
    return abs(trade.true["accrued"]) > 100


BANK_FAULTS: dict[str, Callable[[Trade, random.Random], bool]] = {
    "bank: sign": _bank_sign,
    "bank: a day late": _bank_days,
    "bank: charge": _bank_charge,
    "bank: other account": _bank_account,
    "bank: without accrued": _bank_without_accrued,
}


def _due_amount(change: Callable[[bank.Due, random.Random], int | None]) -> Callable[[bank.Due, random.Random], bool]:
    def fault(due: bank.Due, rng: random.Random) -> bool:
        amount = change(due, rng) if due.truth.kind == "coupon" else None
        if amount is None or abs(amount - due.bank[0].amount) < 5:
            return False
        due.bank[0].amount = amount
        return True

    return fault


def _taxed(due: bank.Due, rng: random.Random) -> int:
    return half_up(
        due.bank[0].amount * rng.choice((Fraction(85, 100), Fraction(70, 100), Fraction(65, 100), Fraction(74, 100)))
    )


def _of_a_year(due: bank.Due, rng: random.Random) -> int | None:
    return half_up(due.face * due.bond.rate / 100) if due.bond.frequency > 1 and due.bond.kind == "fixed" else None


def _whole_coupon(due: bank.Due, rng: random.Random) -> int | None:
    period = next(p for p in periods(due.bond) if p.end == due.coupon_date)
    if period.regular or due.bond.kind != "fixed":
        return None
    return half_up(due.face * due.bond.rate / 100 / due.bond.frequency)


def _rate_of_before(due: bank.Due, rng: random.Random) -> int | None:
    period = next(p for p in periods(due.bond) if p.end == due.coupon_date)
    steps = [(day, value) for day, value in due.bond.steps if day < period.start]
    if due.bond.kind not in ("floating", "stepped") or not steps:
        return None
    return coupon_amount(replace(due.bond, steps=steps), period, due.face)


def _on_unadjusted_date(due: bank.Due, rng: random.Random) -> bool:
    due.bank[0].value_date = due.coupon_date
    return due.truth.day != due.coupon_date


DUE_FAULTS: dict[str, Callable[[bank.Due, random.Random], bool]] = {
    "coupon: tax": _due_amount(_taxed),
    "coupon: of a year": _due_amount(_of_a_year),
    "coupon: odd period as a whole one": _due_amount(_whole_coupon),
    "coupon: rate of before": _due_amount(_rate_of_before),
    "coupon: charge": _due_amount(lambda due, rng: due.bank[0].amount - 1500 if due.bond.currency != "JPY" else None),
    "coupon: digits exchanged": _due_amount(
        lambda due, rng: exchanged(due.bank[0].amount, rng) if due.bank[0].amount > 0 else None
    ),
    "coupon: unadjusted date": _on_unadjusted_date,
}
