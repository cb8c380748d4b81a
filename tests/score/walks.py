"""The fusion on simulated robots it was not tuned on: contact, delays and force, both drives, against exact truth."""

from __future__ import annotations

import tempfile
from pathlib import Path

import pandas as pd

from footcal.calfile import Calibration
from footcal.demo.feet import FEET, mounted
from footcal.files.tables import write_table
from footcal.files.truth import read_truth
from footcal.fusion.engine import Fusion
from footcal.fusion.runs import log_blocks
from footcal.fusion.score import Score, score
from footcal.leg import Robot
from footcal.recipe.data import data_dir
from footcal.sim.gait import simulate

MOTIONS = ("trot", "walk", "stand", "hang")
DRIVES = ("belt", "screw")


def score_walk(motion: str, drive: str, seed: int, lasts_s: float = 20.0) -> Score:
    """Fuse one simulated run of the four demo feet (real sensors, calibrated by `footcal fit`) and score it."""
    sensors = {foot.leg: foot.on_robot(seed) for foot in FEET}
    run = simulate(motion, drive, lasts_s, seed, sensors=sensors, foot_ids=mounted())
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        write_table(pd.DataFrame(run.log), folder / "log.parquet", run.metadata)
        write_table(pd.DataFrame(run.truth), folder / "truth.parquet", run.metadata)
        (folder / "robot.toml").write_text(run.robot_toml, encoding="utf-8")
        for foot in FEET:
            calibration = Calibration.load(data_dir("calib_data") / "walk" / f"{foot.foot_id}.cal.json")
            calibration.save(folder / f"{foot.foot_id}.cal.json")
        robot = Robot.load(folder / "robot.toml")
        blocks = list(log_blocks(robot, folder / "log.parquet"))
        estimate = Fusion.load(folder / "robot.toml").run(blocks[0])
        return score(estimate, read_truth(folder / "truth.parquet", robot.leg_names), robot, log=blocks[0])
