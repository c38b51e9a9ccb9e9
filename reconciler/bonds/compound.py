"""The value of equal coupons and a redemption at compound interest, and the yield that gives a value.

With L the logarithm of growth per period, a payment at time t is worth exp(-t L), and m equal payments one period apart are worth
(1 - exp(-m L)) / (exp(L) - 1) of one: valued with expm1 and log1p, so that yields near zero lose no digits. The logarithm of
the value is nearly straight in L, and bent one way only (a sum of exponentials is convex in its logarithm), so Newton's steps
on it find the yield from anywhere, in a handful of steps. The Treasury's simple interest in the broken first period divides the value
at the next grid date by one growth factor (31 CFR 356 Appendix B).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds.flows import Flows

Array = np.ndarray[Any, Any]

_STEPS = 60
_LEAST = -0.99
"""Below this a yield is no yield but a slip in the price."""
_CLOSE = 2e-15
"""A step this small, in the logarithm of growth per period, cannot be told from rounding."""


@dataclass(frozen=True)
class Compounded:
    """Flows of some rows, times counted from where compounding begins: settlement, or the next grid date for the Treasury."""

    first: Array
    first_time: Array
    equal: Array
    equal_count: Array
    last: Array
    last_time: Array
    owner: Array
    time: Array
    amount: Array
    simple: Array
    """Part of a period at simple interest before compounding begins; 0 where it begins at once."""
    annual: Array
    """Whether the yield compounds yearly, whatever the coupon periods."""

    def take(self, rows: Array) -> Compounded:
        """Some of the rows (in growing order)."""
        kept, owner = _kept(self.owner, len(self.first), rows)
        return Compounded(
            self.first[rows], self.first_time[rows], self.equal[rows], self.equal_count[rows], self.last[rows],
            self.last_time[rows], owner, self.time[kept], self.amount[kept], self.simple[rows], self.annual[rows],
        )  # fmt: skip


def _kept(owner: Array, length: int, rows: Array) -> tuple[Array, Array]:
    """Which listed payments belong to `rows`, and to which of them."""
    place = np.full(length, -1)
    place[rows] = np.arange(len(rows))
    kept = place[owner] >= 0
    return kept, place[owner[kept]]


def of(paid: Flows, rows: Array, treasury: Array, annual: Array) -> Compounded:
    """The flows at `rows` (in growing order), for the Treasury's, the yearly and the plain convention."""
    kept, owner = _kept(paid.owner, len(paid.first), rows)
    simple = np.where(treasury, paid.broken[rows], 0.0)
    return Compounded(
        paid.first[rows], paid.first_time[rows] - simple, paid.equal[rows], paid.equal_count[rows], paid.last[rows],
        paid.last_time[rows] - simple, owner, paid.time[kept] - simple[owner], paid.amount[kept], simple, annual,
    )  # fmt: skip


def _bend(z: Array) -> Array:
    """coth z - 1/z, by its series where the two nearly cancel."""
    square = z * z
    series = z * (1 / 3 - square * (1 / 45 - square * (2 / 945 - square * (1 / 4725 - square * 2 / 93555))))
    large = np.where(np.abs(z) < 0.1, 1.0, z)
    return np.where(np.abs(z) < 0.1, series, 1 / np.tanh(large) - 1 / large)


def _sums(paid: Compounded, growth: Array) -> tuple[Array, Array]:
    """The value at each L and its slope in L."""
    grown = np.expm1(growth)
    flat = grown == 0
    count = paid.equal_count
    annuity = np.where(flat, count, -np.expm1(-count * growth) / np.where(flat, 1.0, grown))
    # d ln(annuity) / dL: the two 1/L of the hyperbolic form cancel exactly, which keeps every digit near zero
    tilt = -(count + 1) / 2 + (count / 2) * _bend(count * growth / 2) - _bend(growth / 2) / 2
    here = np.exp(-paid.first_time * growth)
    coupons = paid.equal * here * annuity
    first, last = paid.first * here, paid.last * np.exp(-paid.last_time * growth)
    value = first + coupons + last
    slope = -paid.first_time * (first + coupons) + coupons * tilt - paid.last_time * last
    if len(paid.owner):
        each = paid.amount * np.exp(-paid.time * growth[paid.owner])
        value += np.bincount(paid.owner, weights=each, minlength=len(value))
        slope -= np.bincount(paid.owner, weights=each * paid.time, minlength=len(value))
    # simple interest before compounding begins
    divisor = 1 + paid.simple * grown
    value = value / divisor
    return value, slope / divisor - value * paid.simple * (1 + grown) / divisor


def value(paid: Compounded, frequency: Array, yields: Array) -> tuple[Array, Array]:
    """Full price at each yield (a plain number) and its slope in the yield; NaN where money would shrink to nothing."""
    per_period = yields / frequency
    growth = np.where(paid.annual, np.log1p(yields) / frequency, np.log1p(per_period))
    price, slope = _sums(paid, growth)
    return price, slope / np.where(paid.annual, frequency * (1 + yields), frequency * (1 + per_period))


def solve(paid: Compounded, frequency: Array, target: Array) -> Array:
    """The yield (a plain number) at which the full price is `target`; NaN where there is none above -99 %."""
    wanted, found = np.log(target), np.full(len(target), np.nan)
    growth = np.full(len(target), 0.04) / frequency
    open_rows = np.flatnonzero(np.isfinite(wanted))
    part, at = paid.take(open_rows), growth[open_rows]
    for _ in range(_STEPS):
        if not len(open_rows):
            break
        price, slope = _sums(part, at)
        step = (np.log(price) - wanted[open_rows]) * price / slope
        # a long first step, where growth is far off, must not leave the range of exp
        at = at - np.clip(step, -2.0, 2.0)
        done = np.abs(step) <= _CLOSE * np.maximum(1.0, np.abs(at) * 100)
        lost = ~np.isfinite(step)
        found[open_rows[done]] = at[done]
        left = np.flatnonzero(~done & ~lost)
        if len(left) < len(open_rows):
            part, at, open_rows = part.take(left), at[left], open_rows[left]
    # what still swings between neighbouring numbers is as close as numbers get
    near = np.abs(np.log(_sums(part, at)[0]) - wanted[open_rows]) < 1e-12 if len(open_rows) else np.zeros(0, np.bool_)
    found[open_rows[near]] = at[near]
    yields = np.where(paid.annual, np.expm1(found * frequency), np.expm1(found) * frequency)
    return np.where(yields > _LEAST, yields, np.nan)
