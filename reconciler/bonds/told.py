"""A bond's row leaves much to its market: here each told column is read with its blanks filled, and what cannot be read is kept.

Text comes as codes into a list of distinct texts, so that every word is looked at once, not once a row. A word that is not known is a
fault of its row, never a guess; the row goes on with a blank and is marked unsound.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from reconciler.bonds import markets
from reconciler.bonds.terms import NAT
from reconciler.money import MISSING

Array = np.ndarray[Any, Any]

Fault = tuple[int, str, str, str]
"""Row, column, value, what is wrong and what to do."""

_SPAN = re.compile(r"^(\d{1,3})\s*([bc])$")


class Columns:
    """Told columns with blanks filled from the market; collects faults. Text is told as (codes, distinct texts), -1 blank."""

    def __init__(self, told: Mapping[str, Any], length: int) -> None:
        self.told, self.length = told, length
        self.faults: list[Fault] = []
        self.unsound = np.zeros(length, np.bool_)
        self.market = np.full(length, -1, np.int64)

    def fault(self, rows: Array, column: str, reason: str, values: Sequence[str] | None = None) -> None:
        """Marks rows as unsound for a reason; `values` are the texts at fault, one a row."""
        for place, row in enumerate(np.asarray(rows).tolist()):
            self.faults.append((row, column, values[place] if values is not None else "", reason))
        self.unsound[rows] = True

    def text(self, name: str, market_field: str | None = None) -> tuple[Array, list[str]]:
        """Codes and distinct texts; where blank, the market's word."""
        codes, texts = self.told.get(name) or (np.full(self.length, -1, np.int64), [])
        codes, texts = np.asarray(codes, np.int64), list(texts)
        if market_field is None:
            return codes, texts
        words = [str(getattr(market, market_field)) for market in markets.MARKETS]
        fill = np.array([len(texts) + i if word else -1 for i, word in enumerate(words)] + [-1], np.int64)
        return np.where(codes < 0, fill[self.market], codes), texts + words

    def each(self, name: str, read: Any, blank: Any, reason: str, market_field: str | None = None) -> Array:
        """Every row's text read once per distinct text; `read` gives None for a word it does not know."""
        codes, texts = self.text(name, market_field)
        used = set(np.unique(codes).tolist())
        values = [read(text) if code in used else blank for code, text in enumerate(texts)]
        bad = np.array([value is None for value in values] + [False])[codes]
        if bad.any():
            rows = np.flatnonzero(bad)
            self.fault(rows, name, reason, [texts[code] for code in codes[rows].tolist()])
        return np.array([blank if value is None else value for value in values] + [blank])[codes]

    def word(self, name: str, words: Sequence[str], default: str, market_field: str | None = None) -> Array:
        """Index of each row's word among `words`; an unknown word is a fault, a blank takes the default."""
        numbers = {word.casefold(): number for number, word in enumerate(words)}
        reason = f"is not a known word here; use one of: {', '.join(words)}."
        return self.each(name, lambda text: numbers.get(text.casefold()), numbers.get(default, -1), reason, market_field)

    def fault_where(self, bad: Array, column: str, reason: str) -> None:
        """Marks the rows where something holds that must not."""
        if bad.any():
            self.fault(np.flatnonzero(bad), column, reason)

    def of_market(self, facts: Sequence[Any]) -> Array:
        """Each row's fact of its market, `facts` being one per market and one for bonds without."""
        return np.array(facts)[self.market]

    def whole(self, name: str, market_field: str | None = None) -> Array:
        """Whole numbers, blanks filled from the market where it has the fact; MISSING where nobody tells it."""
        told = self.told.get(name)
        column = np.full(self.length, MISSING) if told is None else np.asarray(told, np.int64)
        if market_field is None:
            return column
        numbers = np.array([getattr(market, market_field) for market in markets.MARKETS] + [MISSING], np.int64)
        return np.where(column == MISSING, numbers[self.market], column)

    def dates(self, name: str) -> Array:
        """Dates, NaT where blank."""
        told = self.told.get(name)
        return np.full(self.length, NAT) if told is None else np.asarray(told, "datetime64[D]")

    def spans(self, name: str, market_field: str) -> tuple[Array, Array]:
        """Days and unit of a text such as 6b or 10c."""

        def read(text: str) -> int | None:
            found = _SPAN.match(text)
            return None if found is None else int(found[1]) * 2 + (found[2] == "c")

        reason = "is not a number of days followed by b (business) or c (calendar), such as 6b; correct it or leave it blank."
        packed = self.each(name, read, -1, reason, market_field).astype(np.int64)
        return np.where(packed < 0, MISSING, packed // 2), (packed % 2).astype(np.int8)
