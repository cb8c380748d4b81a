"""The four invented feet of the demo: serial, place on the robot, kind of sensor, and the seed it is drawn from."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from pathlib import Path
from typing import Final

import numpy as np

from footcal.files.session import Session, read_session
from footcal.sim.sensor_chain import SimulatedSensor
from footcal.sim.sensors import draw_sensor

BENCH_DAY: Final = dt.datetime(2031, 3, 5, 8, 0, tzinfo=dt.UTC)
DISTAL_kg: Final = 0.062  # of the simulated robot's shank, below the sensor; the bench session has the same foot on
ROBOT_RATE_Hz: Final = 1000.0


@dataclass(frozen=True, slots=True)
class DemoFoot:
    """One foot."""

    foot_id: str
    leg: str
    letter: str  # of the simulated kinds: A, B, C cells; P, Q, R pads
    seed: int
    weeks: int  # checks kept in the data
    goes_bad: bool = False

    def sensor(self) -> SimulatedSensor:
        """Return the sensor, always the same one."""
        return draw_sensor(self.letter, np.random.default_rng([self.seed, 1]))

    def on_robot(self, day_seed: int) -> SimulatedSensor:
        """Return the same sensor on the robot's own channel, on another day."""
        return self.sensor().day(np.random.default_rng([self.seed, day_seed])).on_channel(ROBOT_RATE_Hz)


FEET: Final = (
    DemoFoot("LC-0417", "front_left", "B", 41_700, weeks=10, goes_bad=True),
    DemoFoot("LC-0388", "front_right", "C", 38_800, weeks=0),
    DemoFoot("SP-0032", "rear_left", "P", 3_201, weeks=10),
    DemoFoot("SP-0071", "rear_right", "Q", 7_101, weeks=0),
)


def sessions_of(foot: DemoFoot, data: Path) -> list[Session]:
    """Return a foot's bench session and, for a pad, the pumping on a reference cell that goes with it."""
    folders = [data / foot.foot_id / part for part in ("session", "pump")]
    return [read_session(folder) for folder in folders if folder.is_dir()]


def mounted() -> dict[str, str]:
    """Return leg name to foot_id."""
    return {foot.leg: foot.foot_id for foot in FEET}
