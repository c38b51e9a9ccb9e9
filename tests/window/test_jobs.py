"""Work beside the window: progress, results, faults, and cancelling that takes effect at once."""

from __future__ import annotations

import threading
import time

import pytest
from pytestqt.qtbot import QtBot

from reconciler.problems import KnownError
from reconciler.window import jobs


def test_progress_and_result(qtbot: QtBot) -> None:
    seen: list[tuple[str, int, int]] = []

    def work(progress: jobs.Progress) -> int:
        progress("Reading", 1, 2)
        progress("Reading", 2, 2)
        return 42

    job = jobs.Job(work)
    job.progressed.connect(lambda *told: seen.append(told))
    with qtbot.waitSignal(job.succeeded) as got:
        job.start()
    assert got.args == [42]
    assert seen == [("Reading", 1, 2), ("Reading", 2, 2)]
    assert not job.running()


def test_results_come_in_the_interface_thread(qtbot: QtBot) -> None:
    threads: list[int] = []
    job = jobs.Job(lambda _progress: threads.append(threading.get_ident()))
    job.succeeded.connect(lambda _nothing: threads.append(threading.get_ident()))
    with qtbot.waitSignal(job.ended):
        job.start()
    assert threads[0] != threading.get_ident()
    assert threads[1] == threading.get_ident()


@pytest.mark.parametrize("fault", [KnownError("The folder is gone."), OSError(13, "no"), ValueError("ours")])
def test_faults_are_handed_on(qtbot: QtBot, fault: Exception) -> None:
    def work(_progress: jobs.Progress) -> None:
        raise fault

    job = jobs.Job(work)
    with qtbot.waitSignal(job.failed) as got:
        job.start()
    assert got.args == [fault]


def test_cancel_takes_effect_at_once_even_when_the_work_does_not_listen(qtbot: QtBot) -> None:
    release = threading.Event()
    results: list[object] = []

    def deaf(_progress: jobs.Progress) -> str:
        release.wait(5)
        return "too late"

    job = jobs.Job(deaf)
    job.succeeded.connect(results.append)
    job.start()
    began = time.perf_counter()
    with qtbot.waitSignal(job.cancelled, timeout=500):
        job.cancel()
    assert time.perf_counter() - began < 0.5
    release.set()
    assert jobs.wait_idle()
    assert results == []


def test_cancelled_work_stops_at_its_next_report(qtbot: QtBot) -> None:
    began, steps = threading.Event(), []

    def work(progress: jobs.Progress) -> None:
        for step in range(10_000):
            progress("Working", step, 10_000)
            steps.append(step)
            began.set()
            time.sleep(0.001)

    job = jobs.Job(work).start()
    assert began.wait(5)
    job.cancel()
    assert jobs.wait_idle()
    assert 0 < len(steps) < 10_000


def test_cancelling_is_not_swallowed_by_code_that_catches_faults() -> None:
    assert not issubclass(jobs.Cancelled, Exception)
