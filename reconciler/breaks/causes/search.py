"""Every payment that differs is reckoned again under every known way of going wrong; what reproduces all that was told, fits.

Single causes first, then pairs of causes that change different parts of the payment, then slips of the pen on top of a cause. All
cases at once, one cause after the other: no loop over payments.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.bonds.terms import Terms
from reconciler.breaks.causes import pairs, singles
from reconciler.breaks.causes.cases import Cases
from reconciler.breaks.causes.judging import CHANCE
from reconciler.breaks.causes.singles import FOLLOWS
from reconciler.breaks.causes.trying import Search, differs, explained
from reconciler.breaks.causes.variants import Variant

Array = np.ndarray[Any, Any]

CHUNK = 16_384


def run(cases: Cases, terms: Terms) -> list[tuple[Array, Search, Array]]:
    """Searches all cases, a stretch at a time: (case numbers, search, chance of an accident per case)."""
    out = []
    for first in range(0, len(cases), CHUNK):
        rows = np.arange(first, min(first + CHUNK, len(cases)))
        search = Search(cases.take(rows), terms)
        out.append((rows, search, _search(search)))
    return out


def _search(search: Search) -> Array:
    search.try_out((Variant(FOLLOWS, "told", "the facts are as told", lambda p: p),), search.base, singles.told_differs(search))
    singles.as_told_by_another(search)
    done = []
    for variant, payment in singles.singles(search):
        search.try_out((variant,), payment, search.kinds(variant) & differs(payment, search.base))
        done.append((variant, payment))
    singles.slipped(search, (), search.base)
    singles.slipped_parts(search)
    chance = np.ones(len(search.cases))
    found = explained(search)
    chance[found] = search.chances(found)
    search.open[found] = False
    pairs.doubted(search, done, found[chance[found] < CHANCE], chance)
    if search.open.any():
        pairs.pairs(search, done)
    return chance
