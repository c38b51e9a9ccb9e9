"""Banks name what they pay, in the reference or somewhere in the narrative: our ticket, the broker's number, the bond.

The reference is tried whole first (a ticket number may itself contain blanks or slashes), then in its words. Narratives are read word
by word, only of entries whose reference does not settle them already. A name counts when account, currency, bond or amount do not
all speak against it; a bare number among other words needs the account, the currency and an amount of the same size, because any number
may stand there.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.matching import keys
from reconciler.matching.board import Board
from reconciler.matching.keys import NO_PAIRS, Pairs
from reconciler.records import Words

Array = np.ndarray[Any, Any]

# One number must not stand for more payments than a person could net in one entry.
_MOST = 64
_PUNCTUATION = ".,;:()[]{}<>\"'#!?*=/"
# Signs that join names, and those that join names or stand inside one (26/00133;26/00190).
_INNER = (r"[+;,:=|&#]", r"[/+;,:=|&#]", r"[/+;,:=|&#_-]")


@dataclass(frozen=True)
class Named:
    """What entries name: (entry, payment) pairs by ticket or broker's number, and (entry, bond) pairs, bonds as codes of the items."""

    payments: Pairs
    bonds: Pairs


class _Dictionary:
    """Rows by text: `words` are the texts of the `rows`, one each."""

    def __init__(self, words: Words, rows: Array) -> None:
        # Of a long vocabulary few texts may be left.
        words = words.compact() if len(rows) * 4 < len(words.values) else words
        self.words, self.all_rows = words, rows
        codes = words.codes
        rows, codes = rows[codes >= 0], codes[codes >= 0]
        order = np.argsort((codes.astype(np.int64) << 32) + np.arange(len(codes)))
        self.rows = rows[order]
        self.starts = np.concatenate(([0], np.cumsum(np.bincount(codes, minlength=len(words.values)))))
        self.values = words.values

    def folded(self) -> _Dictionary:
        """The same rows, found by texts in capitals."""
        capitals = pc.utf8_upper(self.words.values)
        if capitals.equals(self.words.values):
            return self
        coded = pc.dictionary_encode(capitals)
        place = np.append(coded.indices.to_numpy().astype(np.int32), np.int32(-1))
        return _Dictionary(Words(place[self.words.codes], coded.dictionary), self.all_rows)

    def find(self, owners: Array, texts: Any) -> Pairs:
        """(owner, row) for every text that is known; texts that stand for too many rows say nothing."""
        if not len(self.values) or not len(owners):
            return NO_PAIRS
        found = pc.fill_null(pc.index_in(texts, value_set=self.values), -1).to_numpy()
        hit = np.flatnonzero(found >= 0)
        first, last = self.starts[found[hit]], self.starts[found[hit] + 1]
        few = last - first <= _MOST
        owner, place = keys.spread(owners[hit[few]], first[few], last[few])
        return owner, self.rows[place]


def name(board: Board, numbers: Words) -> Named:
    """What every entry names; `numbers` are the payments' ticket numbers. Also gives entries that told no bond the one bond they name."""
    items, cash = board.items, board.cash
    waiting = np.flatnonzero(board.i_open | board.silent)
    loud = waiting[~board.silent[waiting]]
    # A ticket told twice is paid only where the bank names its own number.
    dictionaries = [_Dictionary(numbers.take(waiting), waiting), _Dictionary(items["broker_reference"].take(loud), loud)]
    example = np.full(len(items["bond"].values) + 1, -1)
    example[board.i_bond] = np.arange(len(items))
    example = example[:-1][example[:-1] >= 0]
    bonds = _Dictionary(items["bond"].take(example), example)
    rows = np.flatnonzero((cash["reference"].codes >= 0) & board.e_open)
    texts = cash["reference"].take(rows)
    whole = _lookup(texts, [*dictionaries, bonds], rows)
    anything = np.ones(len(items), np.bool_)
    wordy = [~_bare(numbers), ~_bare(items["broker_reference"])]
    told = [_sound(board, pairs, anything) for pairs in whole[:2]]
    named_bonds = [whole[2]]
    done = np.zeros(len(cash), np.bool_)
    for pairs in (*told, whole[2]):
        done[pairs[0]] = True
    settled = np.zeros(len(cash), np.bool_)
    for entry, payment in told:
        settled[entry[board.fits(payment, board.e_amount[entry])]] = True
    into: list[_Dictionary] = []
    for column, skip in (("reference", done), ("narrative", settled)):
        rows = np.flatnonzero((cash[column].codes >= 0) & board.e_open & ~skip)
        if not len(rows):
            continue
        into = into or [one.folded() for one in (*dictionaries, bonds)]
        found = _in_words(cash[column].take(rows), into, rows)
        told += [_sound(board, pairs, trust) for pairs, trust in zip(found[:2], wordy, strict=True)]
        named_bonds.append(found[2])
    return Named(_distinct(told, len(items)), _bonds(board, named_bonds))


def _lookup(texts: Words, into: Sequence[_Dictionary], rows: Array) -> list[Pairs]:
    """Pairs of cash rows and item rows for texts that are known whole."""
    out = []
    texts = texts.compact()
    owners = np.arange(len(texts.values))
    for dictionary in into:
        owner, found = dictionary.find(owners, texts.values.take(pa.array(owners)))
        out.append(_per_row(owner, found, texts.codes, rows))
        # a reference that is one thing is not another
        owners = owners[~keys.occurs(owners, owner)]
    return out


def _per_row(owner: Array, found: Array, text_of: Array, rows: Array) -> Pairs:
    """What was found for distinct texts, for every row that has the text."""
    starts, ends = (np.searchsorted(owner, np.arange(int(text_of.max(initial=-1)) + 1), side=side) for side in ("left", "right"))
    if not len(text_of) or not len(owner):
        return NO_PAIRS
    row, place = keys.spread(rows, starts[text_of], ends[text_of])
    return row, found[place]


def _in_words(texts: Words, into: Sequence[_Dictionary], rows: Array) -> list[Pairs]:
    """Pairs for the single words of texts; words joined by slashes and the like are taken apart as well."""
    texts = texts.compact()
    owners, words = _words(texts.values)
    out = []
    for dictionary in into:
        owner, found = dictionary.find(owners, words)
        order = np.argsort(owner, kind="stable")
        out.append(_per_row(owner[order], found[order], texts.codes, rows))
    return out


def _words(values: Any) -> tuple[Array, Any]:
    """The words of distinct texts, in capitals, that may be a name, and which text each is of: letters with digits, or four digits."""
    parts = pc.utf8_split_whitespace(pc.utf8_upper(values))
    owners, words = pc.list_parent_indices(parts).to_numpy(), pc.utf8_trim(parts.flatten(), _PUNCTUATION)
    whole_owners, whole_words = owners, words
    for signs in _INNER:
        joined = np.flatnonzero(pc.match_substring_regex(whole_words, signs).to_numpy(zero_copy_only=False))
        if len(joined):
            split = pc.split_pattern_regex(whole_words.take(pa.array(joined)), signs)
            inner = joined[pc.list_parent_indices(split).to_numpy()]
            owners = np.concatenate((owners, whole_owners[inner]))
            words = pa.concat_arrays([words, pc.utf8_trim(split.flatten(), _PUNCTUATION)])
    keep = pc.match_substring_regex(words, "[0-9]").to_numpy(zero_copy_only=False)
    keep &= pc.or_(pc.match_substring_regex(words, "[^0-9]"), pc.greater_equal(pc.utf8_length(words), 4)).to_numpy(zero_copy_only=False)
    kept = np.flatnonzero(keep)
    return owners[kept], words.take(pa.array(kept))


def _bare(words: Words) -> Array:
    """True where a name is nothing but a number."""
    bare = pc.utf8_is_digit(words.values).to_numpy(zero_copy_only=False) if len(words.values) else np.zeros(0, np.bool_)
    return np.asarray(np.append(bare, False)[words.codes])


def _sound(board: Board, pairs: Pairs, trusted: Array) -> Pairs:
    """Those pairs that the other facts do not all contradict; names of payments not `trusted` need more to speak for them."""
    entry, payment = pairs
    if not len(entry):
        return pairs
    account = board.e_account[entry] == board.i_account[payment]
    account |= (board.e_account[entry] < 0) | (board.i_account[payment] < 0)
    currency = board.e_currency[entry] == board.i_currency[payment]
    told_bond, bond = board.e_bond[entry], board.i_bond[payment]
    amount = board.fits(payment, board.e_amount[entry]) | board.fits(payment, -board.e_amount[entry])
    size = np.abs(board.e_amount[entry].astype(float)) / np.maximum(np.abs(board.i_expected[payment].astype(float)), 1)
    alike = (size > 0.5) & (size < 2)
    keep = amount | ((account | (told_bond == bond)) & (currency | alike) & ((told_bond < 0) | (told_bond == bond)))
    keep &= amount | trusted[payment] | (account & currency & alike) | _adds_up(board, pairs, account & currency)
    return entry[keep], payment[keep]


def _adds_up(board: Board, pairs: Pairs, likely: Array) -> Array:
    """True for the pairs of entries whose amount is the sum of all payments that they name with `likely` facts."""
    size, width = len(board.e_open), max(len(board.i_open), 1)
    once = keys.distinct(pairs[0][likely] * width + pairs[1][likely])
    entry, payment = once // width, once % width
    total, count = np.zeros(size, np.int64), np.zeros(size, np.int64)
    np.add.at(total, entry, board.i_expected[payment])
    np.add.at(count, entry, 1)
    whole = (count > 1) & (np.abs(total - board.e_amount) <= count)
    return np.asarray(likely & whole[pairs[0]])


def _distinct(parts: Sequence[Pairs], size: int) -> Pairs:
    packed = keys.distinct(np.concatenate([entry * size + payment for entry, payment in parts]))
    return packed // max(size, 1), packed % max(size, 1)


def _bonds(board: Board, parts: Sequence[Pairs]) -> Pairs:
    """(entry, bond code) named; entries that told no bond and name exactly one are given it."""
    entry = np.concatenate([pair[0] for pair in parts])
    code = board.i_bond[np.concatenate([pair[1] for pair in parts])]
    size = max(len(board.items["bond"].values), 1)
    packed = keys.distinct(entry * size + code)
    entry, code = packed // size, packed % size
    count = np.bincount(entry, minlength=len(board.e_bond))
    single = (count[entry] == 1) & (board.e_bond[entry] < 0)
    board.e_bond[entry[single]] = code[single]
    several = count[entry] > 1
    return entry[several], code[several]
