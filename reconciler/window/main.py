"""The window: navigation at the left, a page at the right, problems and progress above it.

It sends intents and shows what comes back: loading, exporting and saving run as jobs (jobs.py), everything it can do is declared
in actions.py, and what a key does is one method here. It remembers its size, its place, its colours and the last morning.
"""

from __future__ import annotations

import datetime
from pathlib import Path

from PySide6.QtCore import QByteArray, QTimer
from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent
from PySide6.QtWidgets import QHBoxLayout, QMainWindow, QStackedWidget, QVBoxLayout, QWidget

from reconciler.problems import KnownError, Problem
from reconciler.window import figures, jobs, loading, recent
from reconciler.window.actions import ACTIONS, PAGES
from reconciler.window.banner import Banner, Progress
from reconciler.window.menus import make_actions, make_menu
from reconciler.window.pages.ahead import AheadPage
from reconciler.window.pages.bonds import BondsPage
from reconciler.window.pages.files import FilesPage
from reconciler.window.pages.page import Page
from reconciler.window.pages.payments import PaymentsPage
from reconciler.window.sidebar import Sidebar
from reconciler.window.theme import icon, theme
from reconciler.window.welcome import Welcome
from reconciler.window.widgets import action_button
from reconciler.window.wording import fault_told, sentence

LAYOUT_CODES = ("missing-column", "ambiguous-column", "ambiguous-dates", "ambiguous-decimal", "unknown-broker", "no-header")
"""Codes of problems that assigning a file's columns can settle."""


class MainWindow(QMainWindow):
    """The whole window."""

    def __init__(self) -> None:
        super().__init__()
        self.loaded: loading.Loaded | None = None
        self.job: jobs.Job | None = None
        self.loading: jobs.Job | None = None
        self.problems: tuple[Problem | str, ...] = ()
        self._wanted: tuple[Path, datetime.date] | None = None
        self.setWindowTitle(recent.NAME)
        self.setWindowIcon(icon("reconciler", size=64))
        self.setMinimumSize(960, 600)
        self.setAcceptDrops(True)
        self.resize(1440, 900)
        self.actions_by_key = make_actions(self)
        menu = make_menu(self, self.actions_by_key)
        entries = [(page.key, page.text, page.group, self.actions_by_key[f"page {page.key}"]) for page in PAGES]
        self.sidebar = Sidebar(entries, menu)
        self.banner, self.progress = Banner(), Progress()
        self.pages: dict[str, Page] = {}
        self.stack = QStackedWidget()
        acts = self.actions_by_key
        self.welcome = Welcome(action_button(acts["open"], "main"), action_button(acts["sample"]))
        self.stack.addWidget(self.welcome)
        self._make_pages()
        right = QVBoxLayout()
        right.setContentsMargins(0, 0, 0, 0)
        right.setSpacing(0)
        above = QVBoxLayout()
        above.setContentsMargins(24, 12, 24, 0)
        above.setSpacing(8)
        above.addWidget(self.banner)
        above.addWidget(self.progress)
        right.addLayout(above)
        right.addWidget(self.stack, 1)
        ground = QWidget()
        ground.setObjectName("ground")
        line = QHBoxLayout(ground)
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(0)
        line.addWidget(self.sidebar)
        line.addLayout(right, 1)
        self.setCentralWidget(ground)
        self.sidebar.page_chosen.connect(self.show_page)
        self.banner.asked.connect(self.actions_by_key["problems"].trigger)
        self.banner.assign_asked.connect(self.actions_by_key["layout"].trigger)
        self.progress.stopped.connect(self.cancel)
        self._enable()
        self._restore()

    # --- making

    def _make_pages(self) -> None:
        acts = self.actions_by_key
        makers = {"ahead": AheadPage, "bonds": BondsPage, "files": FilesPage}
        for entry in PAGES:
            made = makers[entry.key](acts) if entry.key in makers else PaymentsPage(entry.key, entry.text, acts)
            self.pages[entry.key] = made
            self.stack.addWidget(made)

    # --- loading

    def open_at_start(self, folder: Path | None = None, date: datetime.date | None = None) -> None:
        """Loads the folder given, else the last morning, else the latest sample, else invites."""
        if folder is None:
            folder, date = next(((path, day) for path, day in recent.mornings(recent.settings()) if path.is_dir()), (None, None))
        if folder is None:
            samples = loading.sample_mornings()
            folder = samples[-1] if samples else None
        if folder is None:
            self.show_welcome()
            return
        self.load(folder, date or loading.date_of_folder(folder) or datetime.date.today())

    def load(self, folder: Path, date: datetime.date) -> jobs.Job:
        """Reads a morning beside the window and shows it when it is there."""
        self.cancel()
        self.banner.hide()
        job = jobs.Job(lambda progress: loading.load(folder, date, progress, job.hand_over), "load", self)
        job.came.connect(self.show_loaded)
        job.succeeded.connect(self.show_causes)
        job.failed.connect(lambda fault: self.say_failed(f"The morning in {folder.name} could not be loaded.", fault))
        self._wanted = (folder, date)
        if self.loaded is None:
            self.welcome.loading(folder.name)
            self.stack.setCurrentWidget(self.welcome)
        self.loading = job
        return self.run(job, f"Reading {folder.name}")

    def folder_wanted(self) -> Path | None:
        """The folder asked for last, whether or not it could be loaded."""
        return self._wanted[0] if self._wanted else None

    def load_again(self) -> None:
        """Reads the morning asked for last once more."""
        if self._wanted is not None:
            self.load(*self._wanted)

    def run(self, job: jobs.Job, words: str) -> jobs.Job:
        """Shows a job's progress and runs it."""
        self.job = job
        job.progressed.connect(lambda *told: self.progress.tell(*told) if job is self.job else None)
        job.ended.connect(lambda: self._job_over(job))
        # work that is over at once should not flash a bar, nor should a search for causes that is over soon
        QTimer.singleShot(150, lambda: None if self._quiet(job) else self._show_progress(job, words))
        QTimer.singleShot(4000, lambda: self._show_progress(job, "Searching for causes") if self._quiet(job) else None)
        job.start()
        return job

    def _show_progress(self, job: jobs.Job, words: str) -> None:
        if job is self.job and job.running():
            self.progress.begin(words)

    def _quiet(self, job: jobs.Job) -> bool:
        """True when what a load is for is shown already, and only its causes are still to come."""
        return job is self.loading and self.loaded is not None and self.loaded.searching

    def cancel(self) -> None:
        """Stops the running jobs; what is shown stays as it was."""
        for job in (self.job, self.loading):
            if job is not None:
                job.cancel()

    def _job_over(self, job: jobs.Job) -> None:
        if job is self.loading:
            self.loading = None
            if self.loaded is not None:
                if self.loaded.searching:
                    self.loaded.give_up_searching()
                    for page in self.pages.values():
                        page.table.renew()
                self._after_show()
        if job is self.job:
            self.job = None
            self.progress.hide()
        if self.loaded is None and self.stack.currentWidget() is self.welcome:
            self.welcome.invite()

    def show_loaded(self, loaded: loading.Loaded) -> None:
        """Puts a morning up."""
        self.loaded = loaded
        self.progress.hide()
        self.problems = loaded.problems
        for key, page in self.pages.items():
            page.show_day(loaded)
            self.sidebar.buttons[key].set_count(page.count())
        day = loaded.day
        self.setWindowTitle(f"{figures.long_date(day.date)} – {recent.NAME}")
        if loaded.folder is not None:
            self._wanted = (loaded.folder, day.date)
            recent.remember(recent.settings(), loaded.folder, figures.iso(day.date))
        self._say_problems()
        self._enable()
        current = self.stack.currentWidget()
        self.show_page(current.key if isinstance(current, Page) else "breaks")
        self._after_show()

    def show_causes(self, loaded: loading.Loaded) -> None:
        """Puts up the same morning with its causes; search, order and current row stay as they are."""
        if self.loaded is None or (self.loaded.day.items is not loaded.day.items and len(self.loaded.day.items) != len(loaded.day.items)):
            self.show_loaded(loaded)
            return
        self.loaded = loaded
        for page in self.pages.values():
            page.show_day(loaded, keep=True)
        self._after_show()

    def _after_show(self) -> None:
        loaded = self.loaded
        assert loaded is not None
        totals = loaded.day.source.totals
        rejected = int(totals["rows_rejected"].sum())
        foot = [loaded.folder.name if loaded.folder else "", figures.count(len(set(totals["file"].to_list())), "file"),
                f"{figures.count(rejected, 'row')} rejected" if rejected else "no row rejected",
                "" if not loaded.searching else "searching for causes …" if self.loading else "causes not searched for"]  # fmt: skip
        self.sidebar.show_day(loaded.day.date, "\n".join(part for part in foot if part))
        if not loaded.searching or self.loading is None:
            jobs.Job(lambda progress: loading.prepare(loaded, progress), "prepare", self).start()

    def _can_assign(self) -> bool:
        """True when one of the problems is a confirmations file whose columns can be settled by hand."""
        return any(isinstance(one, Problem) and one.code in LAYOUT_CODES and one.file.startswith("confirmations/")
                   for one in self.problems)

    def _say_problems(self) -> None:
        if not self.problems:
            self.banner.hide()
        elif len(self.problems) == 1:
            self.banner.say(sentence(self.problems[0]), assign=self._can_assign())
        else:
            rest = figures.count(len(self.problems) - 1, "other problem")
            self.banner.say(f"{sentence(self.problems[0])}  And {rest}.", more=True, assign=self._can_assign())

    def say_failed(self, what: str, fault: object) -> None:
        """Tells in plain words that something did not work; what is shown stays."""
        told, rest = fault_told(fault)
        if isinstance(fault, KnownError):
            self.problems = tuple(fault.problems)
        self.banner.say(f"{what} {told}", more=rest > 0, bad=True, assign=self._can_assign())

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        if _dropped_folder(event) is not None:
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        folder = _dropped_folder(event)
        if folder is not None:
            event.acceptProposedAction()
            self.load(folder, loading.date_of_folder(folder) or datetime.date.today())

    # --- pages

    def show_welcome(self) -> None:
        """Shows the invitation to open a morning."""
        self.welcome.invite()
        self.stack.setCurrentWidget(self.welcome)

    def show_page(self, key: str) -> None:
        """Shows a page and gives its list the keyboard."""
        if self.loaded is None:
            return
        self.sidebar.show_page(key)
        self.stack.setCurrentWidget(self.pages[key])
        self.pages[key].focus_list()

    @property
    def page(self) -> Page | None:
        """The page that is shown, None while there is no morning."""
        current = self.stack.currentWidget()
        return current if isinstance(current, Page) else None

    def act(self, key: str) -> None:
        """Does what an action says; the doing is in intents.py."""
        from reconciler.window import intents

        intents.DO[key](self)

    def _enable(self) -> None:
        for declared in ACTIONS:
            self.actions_by_key[declared.key].setEnabled(not declared.needs_day or self.loaded is not None)
        for entry in PAGES:
            self.actions_by_key[f"page {entry.key}"].setEnabled(self.loaded is not None)
            self.sidebar.buttons[entry.key].setEnabled(self.loaded is not None)

    # --- remembering

    def _restore(self) -> None:
        kept = recent.settings()
        geometry = kept.value("window/geometry")
        if isinstance(geometry, QByteArray):
            self.restoreGeometry(geometry)
        for key, page in self.pages.items():
            state = kept.value(f"window/split/{key}")
            splitter = getattr(page, "splitter", None)
            if splitter is not None and isinstance(state, QByteArray):
                splitter.restoreState(state)
        self.actions_by_key[theme().choice].setChecked(True)

    def closeEvent(self, event: QCloseEvent) -> None:
        kept = recent.settings()
        kept.setValue("window/geometry", self.saveGeometry())
        for key, page in self.pages.items():
            splitter = getattr(page, "splitter", None)
            if splitter is not None:
                kept.setValue(f"window/split/{key}", splitter.saveState())
        kept.setValue("window/colours", theme().choice)
        kept.sync()
        jobs.stop_all()
        super().closeEvent(event)


def _dropped_folder(event: QDropEvent) -> Path | None:
    """The folder dropped on the window, or the folder of the file that was."""
    for url in event.mimeData().urls():
        path = Path(url.toLocalFile())
        if url.isLocalFile() and path.exists():
            return path if path.is_dir() else path.parent
    return None
