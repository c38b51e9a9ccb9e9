"""Why is it paid on that day and not on this? The calendar's reason, in words, for every day that was moved."""

from __future__ import annotations

import numpy as np

from reconciler.bonds.calendars import ADJUSTMENTS
from reconciler.bonds.terms import Terms
from reconciler.texts import long_date

_WEEKEND = ("Saturday", "Sunday")
_DAY = np.timedelta64(1, "D")


def why_moved(terms: Terms, bond_row: int, unadjusted: np.datetime64, paid: np.datetime64) -> str:
    """Why a coupon or redemption is not paid on its own date: "29 Mar 2026 is a Sunday, moved following"; "" when it is."""
    if np.isnat(unadjusted) or np.isnat(paid) or unadjusted == paid:
        return ""
    calendar = int(terms.payment_calendar[bond_row])
    closed = [_closed(terms, calendar, day) for day in _between(unadjusted, paid)]
    reasons = ", ".join([_is(unadjusted, closed[0]), *[_is(day, why) for day, why in zip(_between(unadjusted, paid)[1:], closed[1:],
                         strict=True) if why and why not in _WEEKEND]])  # fmt: skip
    return f"{reasons}; moved {ADJUSTMENTS[int(terms.payment_adjustment[bond_row])]}"


def why_settles(terms: Terms, bond_row: int, traded: np.datetime64, settles: np.datetime64) -> str:
    """How a settlement day follows from the trade date: "1 business day after 27 Mar 2026", with the closed days between."""
    if np.isnat(traded) or np.isnat(settles) or settles < traded:
        return ""
    calendar = int(terms.calendar[bond_row])
    days = int(terms.calendars.count(calendar, np.array([traded + _DAY]), np.array([settles + _DAY]))[0])
    closed = [(day, _closed(terms, calendar, day)) for day in _between(traded + _DAY, settles)] if settles - traded < 30 * _DAY else []
    named = [_is(day, why) for day, why in closed if why and why not in _WEEKEND]
    words = f"{days} business day{'' if days == 1 else 's'} after {long_date(traded)}"
    return "; ".join([words, *named])


def _between(one: np.datetime64, other: np.datetime64) -> list[np.datetime64]:
    """The days from one up to, not including, the other, in the direction of the move."""
    step = _DAY if other > one else -_DAY
    return list(np.arange(one, other, step))


def _closed(terms: Terms, calendar: int, day: np.datetime64) -> str:
    return terms.calendars.why_closed(calendar, day)


def _is(day: np.datetime64, why: str) -> str:
    if why in _WEEKEND:
        return f"{long_date(day)} is a {why}"
    return f"{long_date(day)} is {why}" if why and not why.startswith("closed") else f"{long_date(day)} is {why or 'a closed day'}"
