"""The demo's two walks, fused and scored: belt drives from the packaged log, screw drives simulated on the spot."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Final

import pandas as pd

from footcal.calfile import Calibration
from footcal.demo.feet import FEET, mounted
from footcal.files.atomic import replacing
from footcal.files.robot_log import RobotLog
from footcal.files.tables import write_table
from footcal.files.truth import Truth, read_truth
from footcal.fusion.engine import Fusion
from footcal.fusion.estimate import EstimateColumns, join_columns
from footcal.fusion.runs import log_blocks
from footcal.fusion.score import Score, score
from footcal.leg import Robot
from footcal.sim.gait import simulate

SCREW_s: Final = 7.0
SCREW_SEED: Final = 5108


@dataclass(frozen=True, slots=True, eq=False)
class FusedWalk:
    """One walk with its estimate and score."""

    drive: str
    folder: Path
    legs: tuple[str, ...]
    truth: Truth
    estimate: EstimateColumns
    score: Score


def make_screw_walk(folder: Path, calibrations: Mapping[str, Calibration]) -> None:
    """Simulate a walk on screw drives with the very sensors that were calibrated, on another day, and write it.

    The packaged walk is on belts; a second log would double the package for no gain, since the simulator ships anyway.
    The sensors are drawn again from their seeds; the fusion sees only the files written here.

    Args:
        folder: gets robot.toml, log.parquet, truth.parquet and the calibration files that robot.toml names.
        calibrations: by foot_id.
    """
    sensors = {foot.leg: foot.on_robot(SCREW_SEED) for foot in FEET}
    run = simulate("walk", "screw", SCREW_s, SCREW_SEED, sensors=sensors, foot_ids=mounted())
    write_table(pd.DataFrame(run.log), folder / "log.parquet", run.metadata)
    write_table(pd.DataFrame(run.truth), folder / "truth.parquet", run.metadata)
    with replacing(folder / "robot.toml") as temporary:
        temporary.write_text(run.robot_toml, encoding="utf-8")
    for foot_id, calibration in calibrations.items():
        calibration.save(folder / f"{foot_id}.cal.json")


def fuse_walk(drive: str, folder: Path, calibrations: Mapping[str, Calibration]) -> FusedWalk:
    """Fuse a walk folder with the calibrations just made, and score it against its truth.

    Args:
        drive: what to call it.
        folder: holds robot.toml, log.parquet, truth.parquet.
        calibrations: by foot_id.
    """
    robot = Robot.load(folder / "robot.toml")
    feet = mounted()
    fusion = Fusion(robot, [calibrations[feet[leg]] for leg in robot.leg_names])
    blocks: list[RobotLog] = list(log_blocks(robot, folder / "log.parquet"))
    parts = [fusion.run(block) for block in blocks]
    estimate = parts[0] if len(parts) == 1 else join_columns(parts)
    truth = read_truth(folder / "truth.parquet", robot.leg_names)
    found = score(estimate, truth, robot, log=blocks[0] if len(blocks) == 1 else None)
    return FusedWalk(drive, folder, robot.leg_names, truth, estimate, found)
