"""Mornings opened before: the last first, each once, no more than a handful."""

from __future__ import annotations

import datetime
from pathlib import Path

from reconciler.window.recent import mornings, remember, settings


def test_the_last_morning_stands_first_and_once() -> None:
    for day in ("2026-03-30", "2026-03-31", "2026-03-30"):
        remember(settings(), Path("house") / day, day)
    assert mornings(settings()) == [
        (Path("house/2026-03-30"), datetime.date(2026, 3, 30)),
        (Path("house/2026-03-31"), datetime.date(2026, 3, 31)),
    ]


def test_only_a_handful_is_kept() -> None:
    for number in range(1, 20):
        remember(settings(), Path(f"m{number}"), f"2026-01-{number:02}")
    kept = mornings(settings())
    assert len(kept) == 8
    assert kept[0][0] == Path("m19")


def test_a_damaged_entry_is_passed_over() -> None:
    remember(settings(), Path("good"), "2026-01-02")
    broken = settings()
    broken.setValue("recent/1/date", "not a day")
    broken.sync()
    assert mornings(settings()) == []
