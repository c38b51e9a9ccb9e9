"""The few lines that a headless morning prints."""

from __future__ import annotations

import datetime
from pathlib import Path

from reconciler.procedures import morning, outcome

MORNINGS = Path(__file__).parent.parent / "mornings"


def test_a_quiet_morning_in_two_lines() -> None:
    day = morning.run(MORNINGS / "quiet" / "in", datetime.date(2026, 3, 31))
    assert outcome.summary_text(day).splitlines() == [
        "31 Mar 2026: 5 payments, 3 agree, 1 within tolerance, 1 due today, 0 with breaks.",
        "14 rows read: 14 used, 0 rejected, 0 set aside.",
    ]


def test_breaks_are_counted_by_kind() -> None:
    day = morning.run(MORNINGS / "unquiet" / "in", datetime.date(2026, 3, 31))
    lines = outcome.summary_text(day).splitlines()
    counted = {line.split("  ")[-1]: int(line.split()[0]) for line in lines[1:-1]}
    assert counted == {"settlement amount": 1, "settlement date": 1, "payment amount": 1, "accrued": 1, "no confirmation": 2, "no ticket": 1,
                       "no cash": 2, "unexplained cash": 1, "told twice": 2, "unknown bond": 1}  # fmt: skip
    assert lines[-1] == "28 rows read: 27 used, 1 rejected (rejects.csv says why), 0 set aside."
