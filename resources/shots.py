"""Pictures of every page, dialog and state, light and dark, at 100 and 200 percent, to be looked at by a person.

    python resources/shots.py [FOLDER] [--sample FOLDER] [--only WORD] [--readme]

Draws without a screen into FOLDER (default: shots). `--only` keeps the pictures whose name contains a word; `--readme` renews the
two pictures of the README in resources/pictures instead. Each size is drawn by a process of its own, because Qt takes the scale
factor once at its start. States that the sample does not show (nothing left, a million rows) are made from its tables.
"""

from __future__ import annotations

import argparse
import dataclasses
import os
import subprocess
import sys
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parent.parent
SIZES = {"100": 1.0, "200": 2.0}
WIDE, SMALL = (1440, 900), (1280, 720)


def main() -> int:
    """Draws all pictures; returns the exit code."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("folder", nargs="?", default="shots", type=Path)
    parser.add_argument("--sample", type=Path)
    parser.add_argument("--only", default="")
    parser.add_argument("--readme", action="store_true")
    parser.add_argument("--scale", choices=SIZES)
    told = parser.parse_args()
    if told.scale is None:
        return max(_draw_in_own_process(scale) for scale in (("100",) if told.readme else SIZES))
    sys.path.insert(0, str(ROOT))
    folder = ROOT / "resources" / "pictures" if told.readme else told.folder
    folder.mkdir(parents=True, exist_ok=True)
    Studio(folder, told.scale, told.sample, told.only, told.readme).draw_all()
    return 0


def _draw_in_own_process(scale: str) -> int:
    surroundings = {**os.environ, "QT_QPA_PLATFORM": "offscreen", "QT_SCALE_FACTOR": str(SIZES[scale])}
    return subprocess.run([sys.executable, __file__, *sys.argv[1:], "--scale", scale], env=surroundings, check=False).returncode


class Studio:
    """Puts the window into one state after another and draws it."""

    def __init__(self, folder: Path, scale: str, sample: Path | None, only: str, readme: bool) -> None:
        from PySide6.QtCore import QSettings
        from PySide6.QtWidgets import QApplication

        kept = tempfile.mkdtemp(prefix="shots")
        QSettings.setPath(QSettings.Format.IniFormat, QSettings.Scope.UserScope, kept)
        self.application = QApplication.instance() or QApplication([])
        from reconciler.window import jobs, loading
        from reconciler.window.main import MainWindow
        from reconciler.window.theme import theme

        self.folder, self.scale, self.only, self.readme = folder, scale, only, readme
        self.jobs, self.loading, self.theme = jobs, loading, theme()
        self.theme.start("light")
        mornings = loading.sample_mornings()
        self.morning = sample or mornings[min(1, len(mornings) - 1)]
        self._new_window = MainWindow
        self.window = MainWindow()

    def draw_all(self) -> None:
        """Every state in both themes."""
        for name in ("light", "dark"):
            self.theme.choose(name)
            self.window.close()
            self.window = self._new_window()
            if self.readme:
                self._load()
                self._page("breaks", "working", size=WIDE)
                self._save(f"window-{name}", self.window)
                continue
            for title, prepare in self._states():
                whole = f"{title}-{name}-{self.scale}"
                if self.only in whole:
                    widget = prepare()
                    self._save(whole, widget)
        self.window.close()

    def _states(self) -> Iterator[tuple[str, Callable[[], Any]]]:
        yield "empty", self._empty
        yield "loading", self._loading
        yield "error", self._error
        for key in ("breaks", "due", "agreed", "ahead", "bonds", "files"):
            yield f"page-{key}", lambda key=key: self._page(key)
        for tab in ("accounts", "working", "coupons"):
            yield f"detail-{tab}", lambda tab=tab: self._page("breaks", tab)
        yield "small-breaks", lambda: self._page("breaks", "working", size=SMALL)
        yield "small-files", lambda: self._page("files", size=SMALL)
        yield "searched", lambda: self._searched("usd")
        yield "nothing-found", lambda: self._searched("zzz")
        yield "filter", self._filter
        yield "menu", self._menu
        yield "problems-banner", self._banner
        yield "none-left", self._none_left
        for key in ("open", "problems", "keys", "about", "layout", "letter"):
            yield f"dialog-{key}", lambda key=key: self._dialog(key)
        if self.scale == "100":
            yield "large", self._large

    def _save(self, name: str, widget: Any) -> None:
        for _round in range(4):
            self.application.processEvents()
        picture = widget.grab()
        picture.save(str(self.folder / f"{name}.png"))
        print(f"{name}.png", flush=True)
        if widget is not self.window:
            widget.close()

    def _show(self, size: tuple[int, int] = WIDE) -> None:
        self.window.resize(*size)
        self.window.show()
        self.application.processEvents()
        self.window.activateWindow()
        self.application.processEvents()

    def _load(self) -> None:
        self._show()
        self.window.load(self.morning, self.loading.date_of_folder(self.morning))
        self.jobs.wait_idle(60_000)

    def _page(self, key: str, tab: str = "", size: tuple[int, int] = WIDE) -> Any:
        if self.window.loaded is None or self.window.loaded.folder is None:
            self._load()
        self.window.banner.hide()
        self._show(size)
        self.window.show_page(key)
        page = self.window.page
        page.show_all()
        if page.table.model().rowCount():
            page.table.go_to(self._telling(page.table.model()) if tab else 0)
        if tab:
            page.show_tab(tab)
        elif hasattr(page, "show_tab"):
            page.show_tab("accounts")
        page.focus_list()
        return self.window

    @staticmethod
    def _telling(model: Any) -> int:
        """A row whose cause is proved and has a working worth looking at."""
        why = next((i for i, column in enumerate(model.sheet.columns) if column.key == "why"), -1)
        first = range(min(model.rowCount(), 6))
        proved = [row for row in first if model.cell(row, why).glyph == "✓"]
        likely = [row for row in first if model.cell(row, why).glyph == "≈"]
        return (proved + likely + [0])[0]

    def _empty(self) -> Any:
        self._show()
        self.window.loaded = None
        self.window.banner.hide()
        self.window.show_welcome()
        return self.window

    def _loading(self) -> Any:
        self._show()
        self.window.welcome.loading(self.morning.name)
        self.window.stack.setCurrentWidget(self.window.welcome)
        self.window.progress.begin("Reading confirmations")
        self.window.progress.tell("Reading confirmations", 412_000, 1_000_000)
        return self.window

    def _error(self) -> Any:
        self.window.progress.hide()
        self.window.welcome.invite()
        self.window.load(self.morning / "nowhere", self.loading.date_of_folder(self.morning))
        self.jobs.wait_idle(20_000)
        return self.window

    def _searched(self, text: str) -> Any:
        self._page("breaks")
        self.window.page.header.search.setText(text)
        for _round in range(3):
            self.application.processEvents()
        return self.window

    def _filter(self) -> Any:
        self._page("breaks")
        self.window.page.choose("party", ("Bank",))
        menu = self.window.page.filters._buttons["kind"].menu()
        menu.aboutToShow.emit()
        menu.adjustSize()
        menu.show()
        return menu

    def _menu(self) -> Any:
        self._page("breaks")
        menu = self.window.sidebar.menu_button.menu().actions()[1].menu()
        menu.adjustSize()
        menu.show()
        return menu

    def _banner(self) -> Any:
        from reconciler.problems import Problem

        self._page("breaks")
        self.window.problems = (
            Problem("confirmations/orrin.csv", 0, "", "", "two columns could both be the settlement amount; assign them."),
            Problem("closings.csv", 4, "date", "31/02", "is not a day; write it as 2026-02-28."),
        )
        self.window._say_problems()
        return self.window

    def _none_left(self) -> Any:
        import numpy as np

        self._page("breaks")
        day = self.window.loaded.day
        keep = np.array([text != "break" for text in day.items["state"].to_list()])
        paid = day.allocations.take(keep[day.allocations["item_row"]])
        paid = paid.with_columns(item_row=(np.cumsum(keep) - 1)[paid["item_row"]])
        none = day.breaks.take(np.zeros(0, np.int64))
        self._put(dataclasses.replace(day, items=day.items.take(keep), breaks=none, allocations=paid))
        return self.window

    def _large(self) -> Any:
        import numpy as np

        self._page("breaks")
        day = self.window.loaded.day
        rows = len(day.breaks)
        times = 1_000_000 // rows + 1
        at = np.tile(np.arange(rows), times)[:1_000_000]
        breaks = day.breaks.take(at).with_columns(rank=np.arange(len(at)) + 1, item_row=np.arange(len(at)))
        items = day.items.take(np.asarray(day.breaks["item_row"])[at])
        paid = day.allocations.take(np.zeros(0, np.int64))
        self._put(dataclasses.replace(day, items=items, breaks=breaks, allocations=paid))
        return self.window

    def _put(self, day: Any) -> None:
        from reconciler.procedures import ahead

        self.window.show_loaded(self.loading.arrange(None, day, ahead.ahead(self.window.loaded.day)))
        self.jobs.wait_idle(60_000)
        self.window.show_page("breaks")

    def _dialog(self, key: str) -> Any:
        from reconciler.problems import Problem
        from reconciler.window.dialogs.about import About
        from reconciler.window.dialogs.keys import Keys
        from reconciler.window.dialogs.open_morning import OpenMorning
        from reconciler.window.dialogs.problems import Problems

        self._page("breaks")
        day = self.loading.date_of_folder(self.morning)
        if key == "open":
            made: Any = OpenMorning(self.window, self.morning, [(path, self.loading.date_of_folder(path)) for path in
                                                                self.loading.sample_mornings() if day])  # fmt: skip
        elif key == "problems":
            made = Problems(self.window, (Problem("tickets.csv", 12, "price", "9O.5", "is not a price; write it as 90.5."),
                                          Problem("cash.csv", 0, "", "", "has no column value_date; add it.")))  # fmt: skip
        elif key == "layout":
            from reconciler.window.dialogs.layout import AssignColumns

            reason = "could be the settlement amount in more than one column ('Net Amount' and 'Total'); say which one it is."
            file = next(path.name for path in sorted((self.morning / "confirmations").iterdir()))
            made = AssignColumns(self.window, self.morning, [Problem(f"confirmations/{file}", 0, "", "", reason)],
                                 self.window.loaded.day.source.tickets["broker"].values.to_pylist())  # fmt: skip
        elif key == "letter":
            from reconciler.window.dialogs.letter import LetterDialog

            made = LetterDialog(self.window, self.window.loaded.day, int(self.window.loaded.day.breaks["item_row"][0]))
        else:
            made = Keys(self.window) if key == "keys" else About(self.window)
        made.show()
        return made


if __name__ == "__main__":
    sys.exit(main())
