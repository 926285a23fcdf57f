"""Settings of the property tests: the same examples in every run, and no limit to one example's time."""

from __future__ import annotations

from hypothesis import settings

settings.register_profile("suite", deadline=None, derandomize=True, max_examples=30)
settings.load_profile("suite")
