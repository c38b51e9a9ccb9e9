"""Every test runs without a screen, without a network and the same way each time."""

from __future__ import annotations

import os

import hypothesis

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

hypothesis.settings.register_profile("same", derandomize=True, deadline=None, max_examples=60, database=None)
hypothesis.settings.load_profile("same")
