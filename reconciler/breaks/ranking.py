"""A clerk begins at the top: the break with the most at stake stands first, whatever its currency.

Stakes are put on one scale with the settings' reporting rates, which are for order only. Ties go by the size of the payment, then by
the item's name, the kind of break and the party, so that the order is total and does not depend on the order of any file.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.breaks.given import Given, digits_of, per_word
from reconciler.breaks.stake import item_amounts
from reconciler.records import BREAK_KINDS, PARTIES, Table, Words

Array = np.ndarray[Any, Any]


def rank(given: Given, breaks: Table) -> Table:
    """The breaks in order of urgency, `rank` 1 the most urgent; rows are put in that order."""
    item = breaks["item_row"]
    currency: Words = breaks["currency"]
    scale = per_word(currency, given.settings.reporting_rates, 1.0) / 10.0 ** digits_of(currency)
    name = np.unique(item, return_inverse=True)
    names = given.items["item"].take(name[0]).rank()[name[1].reshape(-1)]
    order = np.lexsort((
        breaks["found"].rank(), breaks["expected"].rank(), _places(breaks["party"], PARTIES),
        _places(breaks["break"], BREAK_KINDS), names, -(item_amounts(given)[item] * scale), -(breaks["stake_minor"] * scale),
    ))  # fmt: skip
    return breaks.take(order).with_columns(rank=np.arange(1, len(order) + 1))


def _places(column: Words, words: tuple[str, ...]) -> Array:
    return per_word(column, lambda told: np.array([words.index(word) for word in told], np.int64), -1)
