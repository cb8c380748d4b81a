"""Settings for all tests."""

from __future__ import annotations

from hypothesis import settings

# Seeded, so that a run can be repeated; no deadline, because the first call of a compiled law compiles it.
settings.register_profile("footcal", derandomize=True, deadline=None)
settings.load_profile("footcal")
