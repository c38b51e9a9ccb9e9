"""Slips of the pen, one number after the other, against what a person would write down."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.breaks.causes import slips
from reconciler.money import MISSING


@pytest.mark.parametrize(
    ("right", "told", "name"),
    [
        (2167552, 216552, "digit left out"),
        (2167552, 2176552, "two digits exchanged"),
        (2167552, 21677552, "digit typed twice"),
        (2167552, 21675520, "decimal point moved"),
        (-3373, 3373, "sign lost"),
        (2167552, 2167553, ""),
    ],
)
def test_known_slips(right: int, told: int, name: str) -> None:
    found = int(slips.which(np.array([right]), np.array([told]))[0])
    assert (slips.SLIPS[found].name if found >= 0 else "") == name


@given(st.integers(1, 10**13), st.integers(0, 12))
def test_digits_by_text(number: int, place: int) -> None:
    """Exchanging, dropping and doubling agree with doing it to the written figure."""
    text = str(number)
    one = np.array([number], np.int64)
    at = len(text) - 1 - place
    if at >= 1:
        swapped = int(text[: at - 1] + text[at] + text[at - 1] + text[at + 1 :])
        assert int(slips.exchanged(one, place)[0]) == (swapped if swapped != number else MISSING)
    if at >= 0 and len(text) > 1:
        left = int(text[:at] + text[at + 1 :])
        assert int(slips.dropped(one, place)[0]) == (left if left != number else MISSING)
        assert int(slips.doubled(one, place)[0]) == int(text[: at + 1] + text[at] + text[at + 1 :])


def test_sign_is_kept_by_all_but_the_lost_sign() -> None:
    for slip, _place, typed in slips.candidates(np.array([-123456])):
        if typed[0] != MISSING and slip.name != "sign lost":
            assert typed[0] < 0
