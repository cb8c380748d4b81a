"""Settings for all tests."""

from __future__ import annotations

import os
from collections.abc import Generator
from typing import Any

import pytest
from hypothesis import settings

# Seeded, so that a run can be repeated; no deadline, because the first call of a compiled law compiles it.
settings.register_profile("footcal", derandomize=True, deadline=None)
settings.load_profile("footcal")


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Generator[None, Any, Any]:
    """Turn a skip into a failure in CI: what can't run there would otherwise go unseen."""
    report = yield
    if report.skipped and not hasattr(report, "wasxfail") and os.environ.get("CI") == "true":
        report.outcome = "failed"
        report.longrepr = f"{item.nodeid} was skipped, which CI does not allow"
    return report
