"""The maker of planted faults knows more than thirty kinds, and each payment it spoils breaks at the party it names."""

from __future__ import annotations

import csv
import datetime
import subprocess
import sys
from pathlib import Path

from reconciler.procedures import morning

ROOT = Path(__file__).resolve().parent.parent.parent


def test_every_planted_fault_is_a_break_of_its_party(tmp_path: Path) -> None:
    script = str(ROOT / "resources" / "make_faults.py")
    subprocess.run([sys.executable, script, str(tmp_path), "--payments", "250", "--seed", "3"], check=True, timeout=120)
    with (tmp_path / "truth.csv").open(encoding="utf-8", newline="") as lines:
        truth = list(csv.DictReader(lines))
    assert len({row["fault"] for row in truth}) > 30
    day = morning.run(tmp_path, datetime.date(2026, 3, 31), datetime.date(2026, 3, 17))
    found = set(zip(day.breaks["item"].to_list(), day.breaks["party"].to_list(), strict=True))
    unseen = [row for row in truth if (f"{row['kind']} {row['key']}", row["party"]) not in found]
    assert not unseen
    spoilt = {f"{row['kind']} {row['key']}" for row in truth}
    assert {item for item, _ in found} <= spoilt
