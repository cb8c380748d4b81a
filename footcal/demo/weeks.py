"""Ten weeks of checks into a history, and the verdicts out of it."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from footcal.calfile import Calibration
from footcal.demo.feet import FEET
from footcal.drift.history import History
from footcal.drift.records import StoredCheck
from footcal.drift.scoring import read_checks
from footcal.drift.verdict import FootVerdict, fleet_verdicts
from footcal.files.atomic import replacing


def run_weeks(data: Path, history: Path, calibrations: Mapping[str, Calibration]) -> list[StoredCheck]:
    """Score the packaged checks of every foot that has some into a new history, and return what it holds.

    Args:
        data: the packaged demo data.
        history: SQLite file; one of that name is replaced, so that the demo starts afresh each time.
        calibrations: by foot_id.
    """
    with replacing(history) as temporary, History(temporary) as store:
        for foot in FEET:
            folders = sorted((data / foot.foot_id / "checks").glob("week_*"))
            if folders:
                store.add(read_checks(folders, calibrations[foot.foot_id], "as-found"))
        return store.checks()


def verdicts_of(checks: list[StoredCheck]) -> list[FootVerdict]:
    """Return the verdict on every foot, the worst first."""
    return fleet_verdicts(checks)
