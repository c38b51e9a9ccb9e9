"""The window's tests run without a screen and keep what the window remembers away from the user's own."""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path

import pytest

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

from PySide6.QtCore import QSettings

from reconciler.window import jobs
from reconciler.window.loading import Loaded, arrange
from reconciler.window.main import MainWindow
from reconciler.window.theme import theme
from tests.window import fabricated


@pytest.fixture(autouse=True)
def own_settings(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Settings and layouts of this test only."""
    monkeypatch.setattr("reconciler.settings.user_folder", lambda: tmp_path / "config")
    QSettings.setPath(QSettings.Format.IniFormat, QSettings.Scope.UserScope, str(tmp_path / "settings"))


@pytest.fixture()
def made_up_working(monkeypatch: pytest.MonkeyPatch) -> None:
    """The fabricated morning has no terms: its working and coupons are fabricated too."""
    from reconciler.procedures import bond_coupons, working

    monkeypatch.setattr(working, "working", fabricated.working)
    monkeypatch.setattr(bond_coupons, "bond_coupons", fabricated.bond_coupons)


@pytest.fixture()
def loaded() -> Loaded:
    """The small fabricated morning."""
    return arrange(None, fabricated.day(), fabricated.ahead())


@pytest.fixture()
def window(qtbot, loaded: Loaded, made_up_working: None) -> Iterator[MainWindow]:  # type: ignore[no-untyped-def]
    """A window that shows the small morning."""
    theme().start("light")
    made = MainWindow()
    qtbot.addWidget(made)
    made.resize(1440, 900)
    made.show()
    made.show_loaded(loaded)
    made.activateWindow()
    qtbot.waitUntil(made.isActiveWindow)
    yield made
    jobs.stop_all()
