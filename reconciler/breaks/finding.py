"""Where do the four accounts of a payment differ, and who is missing? Every difference is a break, and every item gets its state.

`CHECKS` is the whole list of what is looked at, in plain order; each check gets the same tables and yields the breaks it finds, and
none depends on another. An item is a break if any check found one; else due if its cash is expected today and not there yet; else
within tolerance if an amount is off by no more than the settings allow; else it agrees.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.breaks import comparing, silent, wording
from reconciler.breaks.found import AMOUNT, Found
from reconciler.breaks.given import Given
from reconciler.breaks.yields import yields
from reconciler.records import (
    BREAK_KINDS,
    BREAKS,
    MISSING,
    PARTIES,
    STATES,
    Table,
    Words,
    table,
)

Array = np.ndarray[Any, Any]

Check = Callable[[Given], Iterator[Found]]

CHECKS: tuple[Check, ...] = (
    silent.unknown_bond,
    silent.unsound_terms,
    silent.no_confirmation,
    silent.no_ticket,
    silent.no_cash,
    silent.unexplained_cash,
    silent.told_twice,
    comparing.currencies,
    comparing.sides,
    comparing.faces,
    comparing.prices,
    yields,
    comparing.accrued,
    comparing.fees,
    comparing.amounts,
    comparing.settlement_dates,
    comparing.bank_dates,
    comparing.trade_dates,
    comparing.accounts,
)


def find_breaks(given: Given) -> tuple[Table, Table]:
    """The items with their states, and every break (schema BREAKS; stake, interest and rank not yet known)."""
    finds = [one for check in CHECKS for one in check(given) if len(one)]
    return given.items.with_columns(state=states(given, finds)), _breaks(given, finds)


def states(given: Given, finds: list[Found]) -> Words:
    """Every item's state, one of records.STATES."""
    due = silent.waits_for_cash(given) & (given.expected_date == given.date)
    state = np.where(due, STATES.index("due"),
                     np.where(comparing.within_tolerance(given), STATES.index("within tolerance"), STATES.index("agrees")))  # fmt: skip
    for one in finds:
        state[one.item_row] = STATES.index("break")
    return Words(state.astype(np.int32), pa.array(STATES))


def _breaks(given: Given, finds: list[Found]) -> Table:
    if not finds:
        return table(BREAKS)
    item_row = np.concatenate([one.item_row for one in finds])
    digits = [given.digits[one.item_row] for one in finds]
    columns: dict[str, Any] = {
        name: Words.from_arrow(pa.concat_arrays([one.text(name, d) for one, d in zip(finds, digits, strict=True)]))
        for name in ("expected", "found", "difference")
    }
    for name, words_of in (("explanation", wording.sentence), ("next_step", wording.next_step)):
        columns[name] = Words.from_arrow(pa.concat_arrays([words_of(given, one) for one in finds]))
    columns["break"] = _words(BREAK_KINDS, [BREAK_KINDS.index(one.kind) for one in finds], finds)
    columns["certainty"] = Words.constant("open", len(item_row))
    return table(
        BREAKS,
        len(item_row),
        item=given.items["item"].take(item_row),
        item_row=item_row,
        party=_words(PARTIES, [one.party for one in finds], finds),
        difference_minor=np.concatenate([_minor(one) for one in finds]),
        currency=given.items["currency"].take(item_row),
        **columns,
    )


def _minor(one: Found) -> Array:
    return one.difference if one.form == AMOUNT else np.full(len(one), MISSING)


def _words(words: tuple[str, ...], numbers: list[int], finds: list[Found]) -> Words:
    codes = np.repeat(np.array(numbers, np.int32), [len(one) for one in finds])
    return Words(codes, pa.array(words))
