"""The clerk types a few letters of anything she remembers, and the list shrinks while she types.

Every word typed must be found somewhere in the row: in one of its texts, at the beginning of one of its amounts, or as one of
its dates. Texts are dictionary-coded, so a word is looked for once per distinct text and the hits are spread over the rows by
code. Amounts are kept sorted once: an amount that begins with the digits typed lies in one short range per number of digits
that may follow, so that amounts are found without formatting a million of them.
Not done: misspellings, word stems, operators.
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.records import MISSING, Words

_AMOUNT = re.compile(r"^[-+\u2212]?\d[\d,' ]*(\.\d*)?$")
_MONTHS = ("jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec")
_DIGITS = 3  # amounts are compared in thousandths of the major unit, the smallest minor unit in use


@dataclass
class _Sorted:
    order: np.ndarray
    values: np.ndarray


@dataclass
class Index:
    """What can be searched in a list of `length` rows. Prepared pieces are kept; preparing may run in a job.

    `texts` are `Words`, `amounts` pairs of (int64 minor units, digits of the minor unit per row), `dates` datetime64[D].
    """

    length: int
    texts: Mapping[str, Words] = field(default_factory=dict)
    amounts: Mapping[str, tuple[np.ndarray, np.ndarray]] = field(default_factory=dict)
    dates: Mapping[str, np.ndarray] = field(default_factory=dict)
    _lower: dict[str, pa.Array] = field(default_factory=dict)
    _sorted: dict[str, _Sorted] = field(default_factory=dict)

    def prepare(self) -> None:
        """Does now what the first search would do otherwise: lower-case texts, sorted amounts."""
        for name in self.texts:
            self._lower_values(name)
        for name in self.amounts:
            self._sorted_amounts(name)

    def find(self, typed: str) -> np.ndarray | None:
        """True for the rows in which every typed word is found; None when nothing was typed."""
        words = typed.casefold().split()
        if not words:
            return None
        # a phrase found as a whole (a description, "30 mar 2026") saves taking it apart
        whole = self._find_day(typed.strip()) if len(words) > 1 else None
        if whole is not None:
            return whole
        mask = self._find_word(words[0])
        for word in words[1:]:
            mask &= self._find_word(word)
        return mask

    def _find_word(self, word: str) -> np.ndarray:
        mask = np.zeros(self.length, bool)
        for name, column in self.texts.items():
            values = self._lower_values(name)
            if not len(values):
                continue
            hits = pc.match_substring(values, word).to_numpy(zero_copy_only=False)
            if hits.any():
                mask |= np.append(hits, False)[column.codes]
        if _AMOUNT.match(word):
            self._find_amount(word, mask)
        day = self._find_day(word)
        return mask if day is None else mask | day

    def _find_amount(self, word: str, mask: np.ndarray) -> None:
        digits = re.sub(r"[^\d.]", "", word)
        whole, dot, part = digits.partition(".")
        part = part[:_DIGITS]
        step = 10 ** (_DIGITS - len(part))
        first = int(whole + part) * step
        # with a point typed the whole part is complete; without one any number of further digits may follow
        more = 1 if dot or not first else 17
        ranges = [(first * 10**k, (first + step) * 10**k) for k in range(more)]
        for name in self.amounts:
            kept = self._sorted_amounts(name)
            for low, high in ranges:
                if low > 2**62:
                    break
                start, end = np.searchsorted(kept.values, [low, min(high, 2**62)])
                mask[kept.order[start:end]] = True

    def _find_day(self, word: str) -> np.ndarray | None:
        day = day_typed(word)
        if day is None or not self.dates:
            return None
        mask = np.zeros(self.length, bool)
        for column in self.dates.values():
            mask |= column == day
        return mask

    def _lower_values(self, name: str) -> pa.Array:
        if name not in self._lower:
            self._lower[name] = pc.utf8_lower(self.texts[name].values)
        return self._lower[name]

    def _sorted_amounts(self, name: str) -> _Sorted:
        if name not in self._sorted:
            minor, digits = self.amounts[name]
            known = np.flatnonzero(minor != MISSING)
            scaled = np.abs(minor[known]) * 10 ** (_DIGITS - np.minimum(digits[known], _DIGITS))
            order = np.argsort(scaled)
            self._sorted[name] = _Sorted(known[order].astype(np.int32), scaled[order])
        return self._sorted[name]


def day_typed(word: str, years: Sequence[int] = ()) -> Any | None:
    """The day meant by "2026-03-31" or "31 mar 2026", as datetime64; None for anything else."""
    parts = re.split(r"[\s]+", word.strip().casefold())
    try:
        if re.fullmatch(r"\d{4}-\d{2}-\d{2}", word.strip()):
            return np.datetime64(datetime.date.fromisoformat(word.strip()), "D")
        if len(parts) == 3 and parts[0].isdigit() and parts[1][:3] in _MONTHS and re.fullmatch(r"\d{4}", parts[2]):
            month = _MONTHS.index(parts[1][:3]) + 1
            return np.datetime64(datetime.date(int(parts[2]), month, int(parts[0])), "D")
    except ValueError:
        return None
    return None
