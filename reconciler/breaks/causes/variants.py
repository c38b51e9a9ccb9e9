"""One way of going wrong is one change to the facts of a payment; the payment is then reckoned again and held against what was told.

A payment is reckoned from five parts: the face, the price, the accrual (a fraction of the face, with its date), the fees, and how
the whole is put together. A `Variant` changes one of the parts and leaves the others alone, so that two causes at once are two variants of
different parts. Every variant belongs to a cause: what is shown, who has to put it right, and how common it is (weights are
common practice, no source).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from reconciler.breaks.causes.cases import COUPON, REDEMPTION, TRADE
from reconciler.money import MISSING, half_up


@dataclass(frozen=True)
class Cause:
    """What went wrong, in words to show: `name`, `family` (explanations of one family that give the same figures come to the
    same thing), `next_step` (who is asked for what) and `weight` (how common, relative)."""

    name: str
    family: str
    next_step: str
    weight: float = 0.5


@dataclass(frozen=True)
class Payment:
    """A payment reckoned under one hypothesis; one row per case; MISSING where it could not be reckoned."""

    kind: np.ndarray
    side: np.ndarray
    face: np.ndarray
    price: np.ndarray
    principal: np.ndarray
    accrued: np.ndarray
    accrued_days: np.ndarray
    fees: np.ndarray
    amount: np.ndarray
    date: np.ndarray

    def changed(self, **columns: np.ndarray) -> Payment:
        """The same payment with some figures replaced."""
        return replace(self, **columns)


Part = str
"""face, price, accrual, fees, whole; `told` for the facts as they are."""


@dataclass(frozen=True)
class Variant:
    """One change to one part. `make` takes the part as the terms have it and gives it changed, MISSING where it does not apply.

    `wording` completes the sentence "… if {wording}".
    """

    cause: Cause
    part: Part
    wording: str
    make: Callable[..., object]
    kinds: tuple[int, ...] = (TRADE,)
    scale: float = 1.0

    @property
    def weight(self) -> float:
        """How common, the cause's weight times this variant's own scale."""
        return self.cause.weight * self.scale


# --- the whole: how principal, accrued and fees are put together ----------------------------------------------------------

_BROKER = "Ask for a corrected confirmation or entry; our reckoning is attached."

LEFT_OUT = Cause("accrued left out", "accrued in the total", _BROKER, 0.7)
ONLY_ACCRUED = Cause("only the accrued paid", "accrued in the total", "Look for the principal booked separately.", 0.3)
TWICE_ACCRUED = Cause("accrued counted twice", "accrued in the total", "Ask whether a price with accrued was taken for clean.", 0.5)
TAKEN_OFF = Cause("accrued with the wrong sign", "accrued in the total", _BROKER, 0.4)
FEES_OUT = Cause("fees left out", "fees in the total", "Agree the fees that were dealt and have the other side amended.", 0.8)
FEES_TWICE = Cause("fees counted twice", "fees in the total", _BROKER, 0.4)
FEES_SIGN = Cause("fees with the wrong sign", "fees in the total", "Fees are paid on a purchase and lower a sale.", 0.5)
WRONG_WAY = Cause("booked the wrong way round", "side", "Have the entry reversed and booked the right way.", 0.6)
DOUBLE = Cause("paid twice in one amount", "multiple", "Have one of the two payments returned.", 0.4)
HALF = Cause("half of it paid", "multiple", "Ask for the other half.", 0.3)
WHOLE_UNITS = Cause("cut to whole units", "rounding", "Ask for the fraction, or agree the difference.", 0.2)
CUT = Cause("cut off instead of rounded", "rounding", "Agree the rounding rule; the difference is one unit.", 0.3)
TAX = Cause("tax withheld", "tax", "Check the certificate on file and raise a reclaim.", 1.0)
TAX_ONLY = Cause("tax paid back", "tax", "Link the entry to the payment it was withheld from.", 0.2)
CHARGE = Cause("bank charge deducted", "charge", "Ask for the advice of charges; book it or claim it back.", 0.15)

TAX_RATES = (5.0, 10.0, 12.0, 12.5, 15.0, 15.315, 18.0, 19.0, 20.0, 24.0, 25.0, 26.0, 26.375, 27.5, 28.0, 30.0, 35.0)
"""Statutory and treaty rates met in practice, percent (facts of the trade; common practice, no source)."""

CHARGES = (5, 10, 12, 15, 20, 25, 30, 35, 40, 50)
"""Round charges in major units that banks take off a payment (common practice, no source)."""


def sums(kind: np.ndarray, side: np.ndarray, principal: np.ndarray, accrued: np.ndarray, fees: np.ndarray) -> np.ndarray:
    """Principal, accrued and fees put together from our cash account's side: a purchase is negative and pays the fees."""
    unknown = (principal == MISSING) | (accrued == MISSING) | (fees == MISSING)
    trade = -side.astype(np.int64) * (principal + accrued) - fees
    return np.where(unknown, MISSING, np.where(kind == TRADE, trade, principal + accrued - fees))


def _put_together(principal_times: int, accrued_times: int, fees_times: int) -> Callable[[Payment], np.ndarray]:
    def whole(p: Payment) -> np.ndarray:
        out = sums(p.kind, p.side, p.principal * principal_times, p.accrued * accrued_times, p.fees * fees_times)
        return np.where(p.amount == MISSING, MISSING, out)

    return whole


def _times(number: int, over: int) -> Callable[[Payment], np.ndarray]:
    return lambda p: half_up([p.amount, number], [over])


def _cut(p: Payment) -> np.ndarray:
    # one unit nearer zero: what cutting gives wherever the part beyond the unit was a half or more
    return np.where(p.amount == MISSING, MISSING, p.amount - np.sign(p.amount))


def _withheld(rate: float, kept: bool, net: bool = False) -> Callable[[Payment], np.ndarray]:
    """What is left of the amount (or what is taken, not `kept`); with `net` the rest is rounded, not the tax."""
    thousandths = round(rate * 1000)

    def whole(p: Payment) -> np.ndarray:
        if net:
            return half_up([p.amount, 100_000 - thousandths], [100_000])
        tax = half_up([p.amount, thousandths], [100_000])
        return np.where(p.amount == MISSING, MISSING, p.amount - tax if kept else tax)

    return whole


def _charged(major: int) -> Callable[[Payment, np.ndarray], np.ndarray]:
    return lambda p, digits: np.where(p.amount == MISSING, MISSING, p.amount - major * 10 ** digits.astype(np.int64))


def _in_units(p: Payment, digits: np.ndarray) -> np.ndarray:
    unit = 10 ** digits.astype(np.int64)
    return np.where(p.amount == MISSING, MISSING, np.sign(p.amount) * (np.abs(p.amount) // unit) * unit)


def _plain(whole: Callable[[Payment], np.ndarray]) -> Callable[[Payment, np.ndarray], np.ndarray]:
    return lambda p, _digits: whole(p)


_ALL = (TRADE, COUPON, REDEMPTION)
_INCOME = (COUPON, REDEMPTION)

WHOLE: tuple[Variant, ...] = (
    Variant(LEFT_OUT, "whole", "the accrued interest is left out", _plain(_put_together(1, 0, 1))),
    Variant(LEFT_OUT, "whole", "accrued interest and fees are left out", _plain(_put_together(1, 0, 0)), scale=0.4),
    Variant(ONLY_ACCRUED, "whole", "only the accrued interest is paid", _plain(_put_together(0, 1, 0))),
    Variant(TWICE_ACCRUED, "whole", "the accrued interest is counted twice", _plain(_put_together(1, 2, 1))),
    Variant(TAKEN_OFF, "whole", "the accrued interest is taken off instead of added", _plain(_put_together(1, -1, 1))),
    Variant(FEES_OUT, "whole", "the fees are left out", _plain(_put_together(1, 1, 0))),
    Variant(FEES_TWICE, "whole", "the fees are counted twice", _plain(_put_together(1, 1, 2))),
    Variant(FEES_SIGN, "whole", "the fees carry the wrong sign", _plain(_put_together(1, 1, -1))),
    Variant(WRONG_WAY, "whole", "the payment is booked the wrong way round", _plain(_times(-1, 1)), _ALL),
    Variant(DOUBLE, "whole", "the payment is made twice", _plain(_times(2, 1)), _ALL),
    Variant(HALF, "whole", "half of the payment is made", _plain(_times(1, 2)), _ALL),
    Variant(WHOLE_UNITS, "whole", "the amount is cut to whole units", _in_units, _ALL),
    Variant(CUT, "whole", "the last digit is cut off instead of rounded", _plain(_cut), _ALL),
    *(
        Variant(TAX, "whole", f"{rate:g} % tax is withheld", _plain(_withheld(rate, True)), _INCOME,
                1.0 if rate in (10.0, 15.0, 20.0, 25.0, 30.0, 35.0) else 0.6)
        for rate in TAX_RATES
    ),
    *(Variant(TAX, "whole", f"{rate:g} % tax is withheld", _plain(_withheld(rate, True, True)), _INCOME, 0.5) for rate in TAX_RATES),
    *(Variant(TAX_ONLY, "whole", f"{rate:g} % tax is paid back", _plain(_withheld(rate, False)), _INCOME) for rate in TAX_RATES),
    *(Variant(CHARGE, "whole", f"a charge of {c} is taken off", _charged(c), _ALL) for c in CHARGES),
)  # fmt: skip


# --- the fees ---------------------------------------------------------------------------------------------------------------

FEE_TAX = Cause("tax on the fees", "fees", "Agree whether the levy applies.", 0.3)
FEE_BASE = Cause("fees on another base", "fees", "Agree whether the rate goes by face or by principal.", 0.3)

_LEVIES = (5, 7, 8, 10, 15, 19, 20, 21, 22, 23, 25)


def _levied(rate: int) -> Callable[[Payment], np.ndarray]:
    return lambda p: np.where(p.fees > 0, half_up([p.fees, 100 + rate], [100]), MISSING)


def _rebased(p: Payment, on_face: bool) -> np.ndarray:
    possible = (p.fees > 0) & (p.face > 0) & (p.principal > 0)
    top, bottom = (p.face, p.principal) if on_face else (p.principal, p.face)
    return np.where(possible, half_up([p.fees, top], [np.where(possible, bottom, 1)]), MISSING)


FEES: tuple[Variant, ...] = (
    *(Variant(FEE_TAX, "fees", f"{rate} % levy is put on the fees", _levied(rate)) for rate in _LEVIES),
    Variant(FEE_BASE, "fees", "the fee rate is put on the face", lambda p: _rebased(p, True)),
    Variant(FEE_BASE, "fees", "the fee rate is put on the principal", lambda p: _rebased(p, False)),
)


# --- the face ---------------------------------------------------------------------------------------------------------------

FACE_SCALE = Cause("face in another unit", "face", "Agree the unit (thousands, millions) of the face in the file.", 0.6)


def _scaled(times: int, over: int) -> Callable[[np.ndarray], np.ndarray]:
    def make(face: np.ndarray) -> np.ndarray:
        possible = (face != MISSING) & (face % over == 0) & (np.abs(face) < 2**62 // times)
        return np.where(possible, face // over * times, MISSING)

    return make


FACE: tuple[Variant, ...] = (
    Variant(FACE_SCALE, "face", "the face is a thousand times too large", _scaled(1000, 1), _ALL),
    Variant(FACE_SCALE, "face", "the face is a thousandth", _scaled(1, 1000), _ALL),
    Variant(FACE_SCALE, "face", "the face is a million times too large", _scaled(10**6, 1), _ALL, 0.3),
    Variant(FACE_SCALE, "face", "the face is a millionth", _scaled(1, 10**6), _ALL, 0.3),
)
