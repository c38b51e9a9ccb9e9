"""The door: without arguments the window opens, with a command it stays shut.

The window is imported only when it is opened, so that headless commands run where there is no screen and no Qt.
"""

from __future__ import annotations

import sys
from collections.abc import Sequence


def main(told: Sequence[str] | None = None) -> int:
    """Opens the window or runs a headless command; returns the exit code."""
    arguments = list(sys.argv[1:] if told is None else told)
    if not arguments:
        from reconciler.window import app

        return app.run()
    from reconciler import command

    return command.main(arguments)


if __name__ == "__main__":
    sys.exit(main())
