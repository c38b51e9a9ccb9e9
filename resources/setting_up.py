"""What start.py and check.py share: an environment of the project's own, with the standard library alone.

Makes `.venv` beside the project, installs the project into it, and on Debian-family systems sees to the system libraries that Qt
needs. Done once; a later run notices that nothing changed.
"""

from __future__ import annotations

import ctypes.util
import hashlib
import os
import shutil
import subprocess
import sys
import venv
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
VENV = ROOT / ".venv"

QT_LIBRARIES = {
    # library as the loader knows it -> Debian package
    "EGL": "libegl1", "GL": "libgl1", "xkbcommon": "libxkbcommon0", "dbus-1": "libdbus-1-3", "fontconfig": "libfontconfig1",
    "glib-2.0": "libglib2.0-0", "xcb-cursor": "libxcb-cursor0", "xkbcommon-x11": "libxkbcommon-x11-0",
    "xcb-icccm": "libxcb-icccm4", "xcb-keysyms": "libxcb-keysyms1", "xcb-shape": "libxcb-shape0", "xcb-image": "libxcb-image0",
    "xcb-render-util": "libxcb-render-util0", "xcb-xinerama": "libxcb-xinerama0", "xcb-randr": "libxcb-randr0",
}  # fmt: skip


def python() -> Path:
    """The environment's own interpreter."""
    return VENV / ("Scripts/python.exe" if os.name == "nt" else "bin/python")


def say(text: str) -> None:
    """One line to the person at the screen."""
    print(text, flush=True)


def stop(text: str) -> None:
    """Ends with a sentence instead of a traceback."""
    say(text)
    raise SystemExit(1)


def run(*command: str | Path, **options: object) -> int:
    """Runs a command in the project's folder and returns its exit code."""
    return subprocess.call([str(part) for part in command], cwd=ROOT, **options)  # type: ignore[arg-type]


def _stamp(extra: str) -> str:
    text = (ROOT / "pyproject.toml").read_bytes() + extra.encode() + sys.version.encode() + str(ROOT).encode()
    return hashlib.sha256(text).hexdigest()


def environment(extra: str = "") -> None:
    """Makes `.venv` and installs the project (with an extra, such as test) unless that is done already."""
    if sys.version_info < (3, 11):  # noqa: UP036 - this very script runs on whatever is there
        stop("Reconciler needs Python 3.11 or newer; this is " + sys.version.split()[0] + ".")
    mark = VENV / f"installed{'-' + extra if extra else ''}.txt"
    if mark.exists() and mark.read_text() == _stamp(extra) and python().exists():
        return
    if not python().exists():
        say("Making an environment in .venv …")
        try:
            venv.create(VENV, with_pip=True)
        except (OSError, subprocess.CalledProcessError):
            stop("The environment could not be made. On Debian-family systems install the package python3-venv, then start again.")
    say("Installing Reconciler and what it needs (a few minutes the first time) …")
    target = f".[{extra}]" if extra else "."
    quiet = ("--quiet", "--disable-pip-version-check")
    if run(python(), "-m", "pip", "install", *quiet, "--editable", target):
        stop("Installing failed; the lines above say why. Check the connection and start again.")
    mark.write_text(_stamp(extra))


def missing_libraries() -> list[str]:
    """Debian packages of the libraries that Qt needs and the loader does not find; none on other systems."""
    if not sys.platform.startswith("linux") or not shutil.which("apt-get"):
        return []
    return sorted({package for name, package in QT_LIBRARIES.items() if ctypes.util.find_library(name) is None})


def system_libraries() -> None:
    """Installs the missing ones where that is allowed, else names them."""
    missing = missing_libraries()
    if not missing:
        return
    if hasattr(os, "geteuid") and os.geteuid() == 0:
        say("Installing system libraries for the window: " + " ".join(missing))
        options = {"stdout": subprocess.DEVNULL, "env": {**os.environ, "DEBIAN_FRONTEND": "noninteractive"}}
        run("apt-get", "update", "-q", **options)
        if run("apt-get", "install", "-y", "-q", "--no-install-recommends", *missing, **options):
            say("Some could not be installed; the window may not open without them.")
        return
    say("The window needs these system libraries: sudo apt-get install " + " ".join(missing))
