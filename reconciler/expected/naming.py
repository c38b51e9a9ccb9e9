"""A payment must keep its name from morning to morning, so that a person and the next day's run mean the same one.

Names are made of what identifies a payment in the trade: a trade's ticket, else broker and reference; a coupon's account, bond and
date. Two payments that would share a name get " (2)", " (3)" in the order of their content, never of their place in a file.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.records import Words

Array = np.ndarray[Any, Any]
Content = Callable[[Array], Sequence[Array]] | None


def names(kind: str | pa.Array, parts: Sequence[Words | pa.Array], content: Content = None) -> Words:
    """"kind part part" for every row, blank parts left out.

    `content` gives, for the rows that clash, the columns whose order numbers them; the first weighs most.
    """
    length = len(parts[0]) if parts else 0
    texts = [part.to_arrow() if isinstance(part, Words) else part for part in parts]
    made = pc.binary_join_element_wise(kind, *texts, " ", null_handling="skip")
    if isinstance(made, pa.ChunkedArray):
        made = made.combine_chunks()
    if _different(parts):
        return Words(np.arange(length, dtype=np.int32), made)
    coded = pc.dictionary_encode(made)
    if len(coded.dictionary) == length:
        return Words(np.arange(length, dtype=np.int32), made)
    group = coded.indices.to_numpy()
    clash = np.flatnonzero((np.bincount(group) > 1)[group])
    columns = content(clash) if content else []
    order = clash[np.lexsort([*reversed(columns), group[clash]])]
    start = np.concatenate(([True], group[order][1:] != group[order][:-1]))
    number = np.arange(len(order)) - np.maximum.accumulate(np.where(start, np.arange(len(order)), 0)) + 1
    again = number > 1
    rows, count = order[again], number[again]
    suffixed = [f"{text} ({n})" for text, n in zip(made.take(pa.array(rows)).to_pylist(), count.tolist(), strict=True)]
    mask = np.zeros(length, np.bool_)
    mask[rows] = True
    by_row = [suffixed[place] for place in np.argsort(rows).tolist()]
    made = pc.replace_with_mask(made, pa.array(mask), pa.array(by_row, pa.string()))
    return Words.from_arrow(made)


def _different(parts: Sequence[Words | pa.Array]) -> bool:
    """True if the first part, told in every row, is already a different text in each."""
    first = parts[0]
    if not isinstance(first, Words) or not len(first) or not first.known().all():
        return False
    return bool(np.bincount(first.codes).max() == 1)


def dates(column: Array) -> pa.Array:
    """ISO texts of dates; each distinct date is written once."""
    distinct, place = np.unique(column, return_inverse=True)
    return pa.array([str(day) for day in distinct], pa.string()).take(pa.array(place.reshape(-1)))
