"""The door: a plain sentence where there is no screen, the command where there is one."""

from __future__ import annotations

import pytest

from reconciler import __main__ as door


@pytest.mark.parametrize(
    ("platform", "environment", "none"),
    [("linux", {}, True), ("linux", {"DISPLAY": ":0"}, False), ("linux", {"WAYLAND_DISPLAY": "wayland-0"}, False),
     ("linux", {"QT_QPA_PLATFORM": "offscreen"}, False), ("win32", {}, False), ("darwin", {}, False)],
)  # fmt: skip
def test_screens(platform: str, environment: dict[str, str], none: bool) -> None:
    assert door.no_screen(platform, environment) is none


def test_without_a_screen_a_sentence(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    monkeypatch.setattr(door, "no_screen", lambda *_told: True)
    assert door.main([]) == 2
    assert "There is no screen" in capsys.readouterr().err


def test_a_command_opens_no_window(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as ended:
        door.main(["--help"])
    assert ended.value.code == 0
    assert "morning" in capsys.readouterr().out
