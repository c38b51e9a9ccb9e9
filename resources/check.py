"""Sets up with the tests' needs, then lints, checks types and runs the whole suite without a screen: python3 resources/check.py

`--long` runs the long tests as well (minutes more).
"""

from __future__ import annotations

import os
import sys

import setting_up


def main() -> int:
    """Every check in turn; the first failure of each is shown, all are run."""
    setting_up.environment("test")
    setting_up.system_libraries()
    python = setting_up.python()
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    long = ["-m", "long or not long"] if "--long" in sys.argv else []
    steps = (
        ("lint", (python, "-m", "ruff", "check", ".")),
        ("types", (python, "-m", "mypy")),
        ("tests", (python, "-m", "pytest", *long)),
    )
    failed = []
    for name, command in steps:
        setting_up.say(f"== {name}")
        if setting_up.run(*command):
            failed.append(name)
    setting_up.say("failed: " + ", ".join(failed) if failed else "all checks passed")
    return 1 if failed else 0


if __name__ == "__main__":
    raise SystemExit(main())
