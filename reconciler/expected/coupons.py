"""Which coupons and redemptions should have come in, for whom and how much?

Every coupon, factor drop and redemption with a payment date in the window, for every account that held the bond at the close of its
record date: the bond's amount on the face held. A bond's last coupon and its redemption are two payments. Nothing is
expected on a face of zero, nor where the amount is zero; where the terms do not say the amount (a rate not fixed), the payment is
expected with its amount unknown, so that it is seen.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.bonds import accrual, schedules
from reconciler.bonds.terms import Terms
from reconciler.expected.entitlement import held, positions
from reconciler.expected.naming import dates, names
from reconciler.records import ITEMS, MISSING, Table, Words, table

Array = np.ndarray[Any, Any]

_COUPON, _PARTIAL, _FINAL = 0, 1, 2
_KINDS = ("coupon", "redemption", "redemption")


@dataclass(frozen=True)
class _Due:
    """Payments of bonds, before anybody's face: what, bond row, unadjusted and payment date, and the factor's drop."""

    what: Array
    bond_row: Array
    unadjusted: Array
    payment_date: Array
    drop_e12: Array


def expect_coupons(
    terms: Terms,
    bonds: Table,
    holdings: Table,
    trade_items: Table,
    since: np.datetime64,
    date: np.datetime64,
    repeats: Table | None = None,
) -> Table:
    """The coupons and redemptions paid in [since, date] as ITEMS, in the order of the bonds and their dates.

    `trade_items` are the trades as expected; those of tickets move the holdings, those of confirmations alone do not. `repeats` names
    tickets told twice (kind "ticket"), which move nothing.
    """
    held_by = positions(bonds, holdings, trade_items.take(_counting(trade_items, repeats)))
    due = _due(terms, np.unique(held_by.bond_row), since.astype("datetime64[D]"), date.astype("datetime64[D]"))
    low, high = held_by.of_bonds(due.bond_row)
    count = high - low
    at = np.repeat(np.arange(len(count)), count)
    position = np.arange(int(count.sum())) - np.repeat(np.cumsum(count) - count, count) + low[at]
    record = schedules.record_dates(terms, due.bond_row, due.unadjusted)
    face = held(held_by, position, record[at])
    some = np.flatnonzero(face != 0)
    at, position, face = at[some], position[some], face[some]
    amount = _amounts(terms, due, at, face)
    some = np.flatnonzero(amount != 0)
    at, position, face, amount = at[some], position[some], face[some], amount[some]
    row = due.bond_row[at]
    account, bond = held_by.account.take(position), bonds["bond"].take(row)
    kind = pa.array(_KINDS).take(pa.array(due.what[at]))
    return table(
        ITEMS,
        item=names(kind, [account, bond, dates(due.unadjusted[at])]),
        kind=Words.from_arrow(kind), account=account, bond=bond, currency=Words.of(terms.currency).take(row),
        coupon_date=due.unadjusted[at], face_minor=face, terms_minor=amount, terms_date=due.payment_date[at],
        bond_row=row.astype(np.int32), record_date=record[at],
    )  # fmt: skip


def _counting(trades: Table, repeats: Table | None) -> Array:
    """True for trades of tickets in force that repeat no other and have a face."""
    rows = trades["ticket_row"]
    counts = (rows >= 0) & (trades["face_minor"] != MISSING)
    if repeats is not None and len(repeats):
        counts &= ~np.isin(rows, repeats["row"][repeats["kind"].holds("ticket")])
    return np.asarray(counts)


def _due(terms: Terms, rows: Array, since: np.datetime64, date: np.datetime64) -> _Due:
    """Every payment of the bonds at `rows` in the window, by bond, date and kind."""
    coupons = schedules.coupons_between(terms, rows, since, date)
    drops = accrual.partial_redemptions(terms, rows, since, date)
    last = rows[terms.sound[rows] & ~np.isnat(terms.maturity[rows])]
    paid = schedules.payment_dates(terms, last, terms.maturity[last])
    last, paid = last[(paid >= since) & (paid <= date)], paid[(paid >= since) & (paid <= date)]
    sizes = [len(coupons), len(drops), len(last)]
    what = np.repeat(np.array([_COUPON, _PARTIAL, _FINAL]), sizes)
    bond_row = np.concatenate((coupons.bond_row, drops.bond_row, last))
    unadjusted = np.concatenate((coupons.unadjusted, drops.unadjusted, terms.maturity[last]))
    payment = np.concatenate((coupons.payment_date, drops.payment_date, paid))
    drop = np.concatenate((np.zeros(sizes[0], np.int64), drops.drop_e12, np.zeros(sizes[2], np.int64)))
    order = np.lexsort((what, unadjusted, bond_row))
    return _Due(what[order], bond_row[order], unadjusted[order], payment[order], drop[order])


def _amounts(terms: Terms, due: _Due, at: Array, face: Array) -> Array:
    """What each payment comes to on each face; MISSING where the terms do not say."""
    out = np.full(len(at), MISSING)
    row, what = due.bond_row[at], due.what[at]
    coupon, drop, last = (np.flatnonzero(what == kind) for kind in (_COUPON, _PARTIAL, _FINAL))
    out[coupon] = accrual.coupon_amounts(terms, row[coupon], due.unadjusted[at][coupon], face[coupon])
    out[drop] = accrual.partial_amounts(terms, row[drop], due.drop_e12[at][drop], face[drop])
    out[last] = accrual.redemption_amounts(terms, row[last], face[last])
    return out
