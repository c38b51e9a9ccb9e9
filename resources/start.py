"""Sets Reconciler up on a fresh machine and opens its window on the sample: python3 resources/start.py

Words behind it are handed on: `python3 resources/start.py --set-up-only` sets up without opening the window.
"""

from __future__ import annotations

import sys

import setting_up


def main() -> int:
    """Set up, then open the window."""
    words = sys.argv[1:]
    setting_up.environment()
    setting_up.system_libraries()
    if "--set-up-only" in words:
        setting_up.say("Ready. Start the window with: python3 resources/start.py")
        return 0
    return setting_up.run(setting_up.python(), "-m", "reconciler", *words)


if __name__ == "__main__":
    raise SystemExit(main())
