"""Desk and broker both tell a yield, and the yields differ: which of the two goes with the price?

The terms do not tell a yield, but they give one for the price. Each market and each house has its own convention for it, so a
difference from the reckoned yield alone is no break; only two told yields that differ are. Then the party whose yield the price gives
under some convention is right and the other one differs; when both or neither fit, the broker differs from the desk. Yields are told
to different numbers of decimals, rounded or cut off: they differ when they are a whole unit of the coarser one apart.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
import pyarrow.compute as pc

from reconciler.bonds import pricing, settlement
from reconciler.breaks.found import DECIMAL, Found, found
from reconciler.breaks.given import BROKER, DESK, Given
from reconciler.records import MISSING, Words

Array = np.ndarray[Any, Any]

PLACES = 12


def yields(given: Given) -> Iterator[Found]:
    """Yields told by Desk and Broker that cannot both be right."""
    desk, broker = given.told(DESK, "yield_e12"), given.told(BROKER, "yield_e12")
    rows = np.flatnonzero((desk != MISSING) & (broker != MISSING) & (desk != broker))
    if not len(rows):
        return
    unit_desk, unit_broker = (_unit(given.told(party, "yield_text").take(rows)) for party in (DESK, BROKER))
    apart = np.abs(desk[rows] - broker[rows]) >= np.maximum(unit_desk, unit_broker)
    rows, unit_desk, unit_broker = rows[apart], unit_desk[apart], unit_broker[apart]
    right_desk, right_broker = _who_fits(given, rows, (desk[rows], unit_desk), (broker[rows], unit_broker))
    by_desk = right_broker & ~right_desk
    for party, which in ((BROKER, ~by_desk), (DESK, by_desk)):
        at = rows[which]
        expected, told = (desk[at], broker[at]) if party == BROKER else (broker[at], desk[at])
        yield found("yield", party, at, DECIMAL, expected, told, reference=DESK if party == BROKER else BROKER)


def _unit(texts: Words) -> Array:
    """One unit of the last decimal told, times 10**12."""
    text = pc.utf8_rtrim(pc.fill_null(texts.to_arrow(), ""), " %")
    point = pc.find_substring_regex(text, "[.,]").to_numpy(False)
    places = np.where(point < 0, 0, pc.utf8_length(text).to_numpy(False) - point - 1)
    return np.asarray(10 ** np.maximum(PLACES - places, 0).astype(np.int64))


def _who_fits(given: Given, rows: Array, desk: tuple[Array, Array], broker: tuple[Array, Array]) -> tuple[Array, Array]:
    """Whether each party's yield is the one that the price gives, under the first convention that fits either of them."""
    items, terms = given.items, given.terms
    fits = np.zeros(len(rows), np.bool_), np.zeros(len(rows), np.bool_)
    known = np.flatnonzero((items["bond_row"][rows] >= 0) & (items["terms_minor"][rows] != MISSING))
    if not len(known):
        return fits
    at = rows[known]
    bonds, day = items["bond_row"][at].astype(np.int64), items["terms_date"][at]
    settled = settlement.settle(terms, bonds, day, items["face_minor"][at], items["price_e12"][at])
    for convention in range(len(pricing.YIELD_CONVENTIONS)):
        # the price fixes the yield of the convention; a told yield fits when it lies within a unit of its last decimal
        reckoned = pricing.yield_from_price(terms, bonds, day, settled.price_per100, convention)
        open_rows = ~(fits[0][known] | fits[1][known])
        for fit, (told, unit) in zip(fits, (desk, broker), strict=True):
            near = np.abs(told[known] / 10**PLACES - reckoned) < unit[known] / 10**PLACES
            fit[known] |= near & open_rows
    return fits
