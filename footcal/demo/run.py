"""The whole demo, stage by stage, through the same calls that real data take."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from footcal.demo.feet import FEET
from footcal.demo.trial import TriedFoot, try_foot
from footcal.demo.walks import FusedWalk, fuse_walk, make_screw_walk
from footcal.demo.weeks import run_weeks, verdicts_of
from footcal.drift.records import StoredCheck
from footcal.drift.verdict import FootVerdict
from footcal.recipe.data import data_dir

STAGES = len(FEET) + 4  # a foot each, screw walk made, two walks fused, weeks

Told = Callable[[float, str], None]


@dataclass(frozen=True, slots=True, eq=False)
class DemoResult:
    """All that the demo found."""

    out: Path
    feet: tuple[TriedFoot, ...]
    walks: tuple[FusedWalk, ...]
    checks: tuple[StoredCheck, ...]
    verdicts: tuple[FootVerdict, ...]


def run_demo(out: Path, told: Told = lambda _done, _words: None) -> DemoResult:
    """Calibrate four feet, fuse a walk on two kinds of drive, and watch ten weeks of drift.

    Args:
        out: folder for calibration files, the screw walk and the drift history; files of the same names are replaced.
        told: called with the number of stages done and what comes next.

    Raises:
        FootcalError: the packaged data are missing or damaged, or `out` can't be written.
    """
    data, done = data_dir("calib_data"), 0

    def next_stage(words: str) -> None:
        nonlocal done
        told(float(done), words)
        done += 1

    feet = []
    for foot in FEET:
        next_stage(f"calibrating {foot.foot_id}")
        feet.append(try_foot(foot, data))
        feet[-1].calibration.save(out / f"{foot.foot_id}.cal.json")
    calibrations = {tried.foot.foot_id: tried.calibration for tried in feet}
    next_stage("making the walk on screw drives")
    make_screw_walk(out / "walk_screw", calibrations)
    walks = []
    for drive, folder in (("belt", data / "walk"), ("screw", out / "walk_screw")):
        next_stage(f"fusing the walk on {drive} drives")
        walks.append(fuse_walk(drive, folder, calibrations))
    next_stage("scoring ten weeks of checks")
    checks = run_weeks(data, out / "drift.sqlite", calibrations)
    told(float(done), "writing the report")
    return DemoResult(out, tuple(feet), tuple(walks), tuple(checks), tuple(verdicts_of(checks)))
