"""How long the window takes for what a person does, with a million rows. Prints a table; nothing is asserted.

    python resources/bench_window.py [ROWS]

Needs a checkout (the made-up morning of the tests). Each figure is the median of seven: the change itself, and the change until
the list is painted again. Drawn without a screen, so a real one adds its own time.
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
_START = """
import time; began = time.perf_counter()
from PySide6.QtWidgets import QApplication
application = QApplication([])
from reconciler.window.main import MainWindow
from reconciler.window.theme import theme
theme().start("light")
window = MainWindow(); window.show(); window.show_welcome(); application.processEvents()
print(1000 * (time.perf_counter() - began))
"""


def main(rows: int = 1_000_000) -> None:
    """Measures and prints."""
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    sys.path.insert(0, str(ROOT))
    starts = [float(subprocess.run([sys.executable, "-c", _START], cwd=ROOT, capture_output=True, text=True, check=True).stdout)
              for _round in range(5)]  # fmt: skip
    print(f"{'interpreter to first paint of the window':58}{statistics.median(starts):9.1f} ms")
    _measure_lists(rows)


def _measure_lists(rows: int) -> None:
    from PySide6.QtWidgets import QApplication

    application = QApplication.instance() or QApplication([])
    from reconciler.window import jobs
    from reconciler.window.loading import arrange
    from reconciler.window.main import MainWindow
    from reconciler.window.theme import theme
    from tests.window import fabricated

    theme().start("light")
    began = time.perf_counter()
    loaded = arrange(None, fabricated.large_day(rows), fabricated.ahead())
    print(f"{f'made-up morning of {rows:,} rows arranged':58}{1000 * (time.perf_counter() - began):9.1f} ms")
    window = MainWindow()
    window.resize(1440, 900)
    window.show()
    window.show_loaded(loaded)
    jobs.wait_idle(120_000)
    page, table = window.pages["breaks"], window.pages["breaks"].table
    bar = table.verticalScrollBar()

    def told(name: str, act: Callable[[int], object]) -> None:
        change, painted = [], []
        for number in range(7):
            began = time.perf_counter()
            act(number)
            change.append(time.perf_counter() - began)
            application.processEvents()
            table.viewport().repaint()
            painted.append(time.perf_counter() - began)
        print(f"{name:58}{1000 * statistics.median(change):9.1f} ms{1000 * statistics.median(painted):9.1f} ms painted")

    for typed in ("2", "20", "2093", "t-0209", "tamarisk", "tamarisk 5,067"):
        told(f"search {typed!r}", lambda _n, typed=typed: page.search(typed))
    told("search nothing", lambda n: page.search("x" if n % 2 else ""))
    page.search("")
    for column in table.model().sheet.columns:
        told(f"sort by {column.title}", lambda n, key=column.key: table.sort_by(key, bool(n % 2)))
    told("filter by party", lambda n: page.choose("party", ("Bank",) if n % 2 else ()))
    page.choose("party", ())
    told("jump to another place", lambda n: bar.setValue(bar.maximum() * (n + 1) // 9))
    told("one step of the wheel", lambda _n: bar.setValue(bar.value() + 46))
    told("next row, with its detail", lambda _n: table.step(1))
    window.close()


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000)
