"""A window that waits for work to finish looks broken: work runs beside it and can be stopped.

The one file with threads. A `Job` runs a function in Qt's thread pool and tells the window, in the window's own thread, how far
it is and what came out. Cancelling takes effect for the window at once: whatever the function still returns is thrown away, and
the function itself stops at its next report of progress. Functions must therefore return new values and change nothing; what
they write goes to a temporary file first. Not done: killing threads, priorities, jobs that depend on jobs.
"""

from __future__ import annotations

import threading
from collections.abc import Callable
from typing import Any

from PySide6.QtCore import QCoreApplication, QElapsedTimer, QEventLoop, QObject, QRunnable, Qt, QThreadPool, Signal

from reconciler.problems import KnownError

Progress = Callable[[str, int, int], None]
"""Called with a step in words, how many rows are done and how many there are (0 when not known)."""


class Cancelled(BaseException):
    """Raised inside a job's function by its report of progress once the job was cancelled.

    Not an `Exception`, so that code which turns faults of a file into problems does not swallow it.
    """


class _Runner(QRunnable):
    def __init__(self, job: Job) -> None:
        super().__init__()
        self.job = job
        self.setAutoDelete(True)

    def run(self) -> None:
        self.job.work_in_thread()


class Job(QObject):
    """One piece of work. Connect the signals, then call `start`. `came` brings what was handed over before the end."""

    progressed = Signal(str, object, object)
    came = Signal(object)
    succeeded = Signal(object)
    failed = Signal(object)
    cancelled = Signal()
    ended = Signal()
    _came_back = Signal(str, object)
    _part_came = Signal(object)

    def __init__(self, work: Callable[[Progress], Any], name: str = "", parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.name = name
        self._work = work
        self._stop = threading.Event()
        self._over = False
        self._came_back.connect(self._deliver, Qt.ConnectionType.QueuedConnection)
        self._part_came.connect(self._part, Qt.ConnectionType.QueuedConnection)

    def start(self) -> Job:
        """Puts the work into the thread pool."""
        _RUNNING.add(self)
        QThreadPool.globalInstance().start(_Runner(self))
        return self

    def cancel(self) -> None:
        """Stops the job for the window now; its thread ends at its next report of progress."""
        self._stop.set()
        if not self._over:
            self._over = True
            self.cancelled.emit()
            self.ended.emit()

    def running(self) -> bool:
        """True until the job succeeded, failed or was cancelled."""
        return not self._over

    def report(self, step: str, done: int = 0, total: int = 0) -> None:
        """Told by the working function; raises `Cancelled` when nobody waits for it any more."""
        if self._stop.is_set():
            raise Cancelled
        self.progressed.emit(step, done, total)

    def hand_over(self, part: object) -> None:
        """Told by the working function: something that can be shown already, while the work goes on."""
        if self._stop.is_set():
            raise Cancelled
        self._part_came.emit(part)

    def _part(self, part: object) -> None:
        if not self._over:
            self.came.emit(part)

    def work_in_thread(self) -> None:
        """Runs the work; called by the thread pool only."""
        try:
            outcome: tuple[str, object] = ("succeeded", self._work(self.report))
        except Cancelled:
            outcome = ("cancelled", None)
        except (KnownError, MemoryError, OSError) as fault:
            outcome = ("failed", fault)
        except Exception as fault:  # a fault of ours: shown in plain words, kept for the log
            outcome = ("failed", fault)
        try:
            self._came_back.emit(*outcome)
        except RuntimeError:  # the window was closed meanwhile
            _RUNNING.discard(self)

    def _deliver(self, how: str, what: object) -> None:
        _RUNNING.discard(self)
        if self._over:
            return
        self._over = True
        if how == "succeeded":
            self.succeeded.emit(what)
        elif how == "failed":
            self.failed.emit(what)
        else:
            self.cancelled.emit()
        self.ended.emit()


_RUNNING: set[Job] = set()


def stop_all(milliseconds: int = 2000) -> None:
    """Cancels every job and waits a little for their threads (when the window closes)."""
    for job in list(_RUNNING):
        job.cancel()
    QThreadPool.globalInstance().waitForDone(milliseconds)


def wait_idle(milliseconds: int = 10000) -> bool:
    """Lets the interface run until no job is left (pictures and tests); False when time ran out."""
    clock = QElapsedTimer()
    clock.start()
    while _RUNNING and clock.elapsed() < milliseconds:
        QCoreApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
    QCoreApplication.processEvents()
    return not _RUNNING
