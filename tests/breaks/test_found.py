"""How expected, found and difference become text, by the form of the fact."""

from __future__ import annotations

import numpy as np
import pyarrow as pa
import pytest

from reconciler.breaks.found import AMOUNT, DATE, DECIMAL, WORD, found, nothing
from reconciler.records import MISSING

ROWS = np.array([4])


@pytest.mark.parametrize(
    ("form", "expected", "told", "texts"),
    [
        (AMOUNT, np.array([-500]), np.array([-450]), ("-5.00", "-4.50", "0.50")),
        (AMOUNT, np.array([MISSING]), np.array([7]), (None, "0.07", None)),
        (DECIMAL, np.array([99_500_000_000_000]), np.array([99_250_000_000_000]), ("99.5", "99.25", "-0.25")),
        (DATE, np.array(["2026-03-30"], "datetime64[D]"), np.array(["2026-04-01"], "datetime64[D]"), ("2026-03-30", "2026-04-01", "2")),
        (WORD, pa.array(["buy"]), pa.array(["sell"]), ("buy", "sell", None)),
    ],
)
def test_texts(form: str, expected: object, told: object, texts: tuple[str | None, ...]) -> None:
    one = found("face", 1, ROWS, form, expected, told)
    assert tuple(one.text(name, np.array([2]))[0].as_py() for name in ("expected", "found", "difference")) == texts
    assert (len(one), one.reference.tolist(), one.other.tolist()) == (1, [0], [-1])


def test_a_difference_that_is_given_stands() -> None:
    one = found("no cash", 3, ROWS, AMOUNT, np.array([5]), nothing(ROWS), np.array([-5]), reference=2)
    assert (one.difference.tolist(), one.reference.tolist()) == ([-5], [2])
