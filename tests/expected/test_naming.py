"""Names of payments: stable, without blanks, different from each other."""

from __future__ import annotations

from typing import Any

import numpy as np
import pyarrow as pa
from hypothesis import given
from hypothesis import strategies as st

from reconciler.expected.naming import dates, names
from reconciler.records import Words


def test_blank_parts_are_left_out() -> None:
    made = names("trade", [Words.of(["T1", "", "T2"]), Words.of(["", "X", "Y"])])
    assert made.to_list() == ["trade T1", "trade X", "trade T2 Y"]


def test_a_kind_of_its_own_for_every_row() -> None:
    assert names(pa.array(["coupon", "trade"]), [Words.of(["A", "B"])]).to_list() == ["coupon A", "trade B"]


def test_dates_are_written_in_full() -> None:
    assert dates(np.array(["2026-03-31", "2026-01-02", "2026-03-31"], "datetime64[D]")).to_pylist() == ["2026-03-31", "2026-01-02", "2026-03-31"]
    assert len(dates(np.zeros(0, "datetime64[D]"))) == 0


@given(st.lists(st.tuples(st.sampled_from(["A", "B", ""]), st.integers(0, 3)), max_size=9), st.randoms(use_true_random=False))
def test_names_differ_and_follow_the_content(told: list[tuple[str, int]], chance: Any) -> None:
    outcomes = []
    for turn in range(2):
        rows = list(told)
        if turn:
            chance.shuffle(rows)
        numbers = np.array([number for _, number in rows], np.int64)
        made = names("trade", [Words.of([name for name, _ in rows])], lambda at, numbers=numbers: [numbers[at]]).to_list()
        assert len(set(made)) == len(rows)
        assert all(text.split(" (")[0] == f"trade {name}".strip() for text, (name, _) in zip(made, rows, strict=True))
        outcomes.append(sorted(zip(made, (number for _, number in rows), strict=True)))
    assert outcomes[0] == outcomes[1]
