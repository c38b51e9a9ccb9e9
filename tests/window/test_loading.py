"""From a folder's name to its day."""

from __future__ import annotations

import datetime
from pathlib import Path

import pytest

from reconciler.window.loading import date_of_folder, sample_mornings


@pytest.mark.parametrize(
    ("name", "day"),
    [("2026-03-31", datetime.date(2026, 3, 31)), ("morning_20260401", datetime.date(2026, 4, 1)), ("2026-02-30", None),
     ("morning", None)],
)  # fmt: skip
def test_day_of_a_folder(name: str, day: datetime.date | None) -> None:
    assert date_of_folder(Path("somewhere") / name) == day


def test_the_sample_is_found() -> None:
    mornings = sample_mornings()
    assert len(mornings) == 3
    assert mornings == sorted(mornings)
    assert all((morning / "tickets.csv").is_file() for morning in mornings)
