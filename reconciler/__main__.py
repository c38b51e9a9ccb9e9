"""The door: without arguments the window opens, with a command it stays shut.

The window is imported only when it is opened, so that headless commands run where there is no screen and no Qt.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Mapping, Sequence


def no_screen(platform: str, environment: Mapping[str, str]) -> bool:
    """Whether a window could not be shown: Linux without a display server, and nothing said about where else to draw."""
    served = any(environment.get(name) for name in ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM"))
    return platform.startswith("linux") and not served


def main(told: Sequence[str] | None = None) -> int:
    """Opens the window or runs a headless command; returns the exit code."""
    arguments = list(sys.argv[1:] if told is None else told)
    if not arguments:
        if no_screen(sys.platform, os.environ):
            print("There is no screen to open the window on. Start it on a desktop, or use a command: "
                  "python -m reconciler --help", file=sys.stderr)  # fmt: skip
            return 2
        from reconciler.window import app

        return app.run()
    from reconciler import command

    return command.main(arguments)


if __name__ == "__main__":
    sys.exit(main())
