"""The sample is made by its script, byte for byte, so that nobody mends it by hand and it can be made anew at any
time.
"""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent.parent


def _files(folder: Path) -> dict[str, bytes]:
    return {
        path.relative_to(folder).as_posix(): path.read_bytes() for path in sorted(folder.rglob("*")) if path.is_file()
    }


def test_the_script_makes_the_same_bytes_as_the_sample_in_the_checkout(tmp_path: Path) -> None:
    subprocess.run([sys.executable, str(ROOT / "resources" / "make_sample.py"), str(tmp_path)], check=True, timeout=120)
    made, shipped = _files(tmp_path), _files(ROOT / "sample_tickets")
    assert made.keys() == shipped.keys()
    assert made == shipped
    assert len(made) > 25
