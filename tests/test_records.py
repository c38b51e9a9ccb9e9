"""Tables and words: the same text has the same code, whatever vocabularies it came from."""

from __future__ import annotations

import numpy as np
import pyarrow as pa
from hypothesis import given
from hypothesis import strategies as st

from reconciler.records import Words, concat, table, unify

TEXTS = st.lists(st.sampled_from(["", "a", "b", "B", "ab", "é", "z"]), max_size=12)


@given(st.lists(TEXTS, min_size=1, max_size=3))
def test_unified_columns_keep_their_texts_and_share_codes(columns: list[list[str]]) -> None:
    unified = unify(*(Words.of(texts) for texts in columns))
    codes: dict[str, int] = {"": -1}
    for words, texts in zip(unified, columns, strict=True):
        assert words.to_list() == texts
        assert len(set(words.values.to_pylist())) == len(words.values)
        for code, text in zip(words.codes.tolist(), texts, strict=True):
            assert codes.setdefault(text, code) == code


def test_a_vocabulary_with_a_text_twice_is_made_distinct_when_it_is_added() -> None:
    double = Words(np.array([0, 1, 2], np.int32), pa.array(["x", "y", "x"]))
    for first in (Words.of(["y"]), Words.of(["q", "r", "s", "x"]), Words.of([])):
        added = unify(first, double)[1]
        assert added.to_list() == ["x", "y", "x"]
        assert added.codes[0] == added.codes[2]


@given(TEXTS, st.data())
def test_where_takes_the_other_text_where_the_mask_does_not_hold(texts: list[str], data: st.DataObject) -> None:
    other = data.draw(st.lists(st.sampled_from(["", "a", "q"]), min_size=len(texts), max_size=len(texts)))
    mask = np.array(data.draw(st.lists(st.booleans(), min_size=len(texts), max_size=len(texts))), np.bool_)
    chosen = Words.of(texts).where(mask, Words.of(other))
    assert chosen.to_list() == [a if m else b for a, b, m in zip(texts, other, mask.tolist(), strict=True)]


@given(TEXTS)
def test_compact_words_keep_their_texts_and_nothing_else(texts: list[str]) -> None:
    wide = unify(Words.of(["never", "used"]), Words.of(texts))[1].compact()
    assert wide.to_list() == texts
    assert set(wide.values.to_pylist()) == set(texts) - {""}


def test_holds_says_where_a_text_stands() -> None:
    words = Words.of(["a", "", "b", "a"])
    assert words.holds("a").tolist() == [True, False, False, True]
    assert not words.holds("").any()
    assert not words.holds("c").any()
    assert not Words.blank(2).holds("a").any()


def test_tables_one_after_the_other_keep_their_rows() -> None:
    kinds = {"name": "text", "number": "int64"}
    one, two = table(kinds, name=["a", ""], number=[1, 2]), table(kinds, name=["b", "a"], number=[3, 4])
    both = concat([one, table(kinds), two])
    assert both["name"].to_list() == ["a", "", "b", "a"]
    assert both["number"].tolist() == [1, 2, 3, 4]
