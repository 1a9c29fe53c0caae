"""Settings that all tests share."""

from __future__ import annotations

import os

from hypothesis import settings

settings.register_profile("plain", deadline=None, max_examples=60, derandomize=True)
settings.load_profile("plain")
# The hub client's cache must never decide a test.
os.environ.pop("HF_HOME", None)
os.environ.pop("HF_HUB_CACHE", None)
