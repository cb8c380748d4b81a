"""Real force plates: an ideal foot fed by a measured walk over four plates finds the contact intervals of the record.

Data: M. Duarte and R. N. Watanabe, Notes on Scientific Computing for Biomechanics and Motor Control, CC BY 4.0 (four
plates, 450 Hz). The file lies beside the checkout, not in it; without it the test is skipped.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from footcal.files.robot_log import RobotLog
from footcal.fusion.engine import Fusion
from footcal.fusion.estimate import EstimateColumns
from footcal.fusion.score_contact import intervals
from footcal.leg import Robot
from tests.fusion.ideal import ideal_calibration

DATA = Path(__file__).parents[3] / "shared" / "reference" / "open_walk_4plates_450hz.csv"
# Samples (first, last) above the 20 N threshold, body weight 750.4 N: listed with the record, counted from the file.
LISTED = {"a": (96, 387), "b": (343, 631), "c": (592, 879), "d": (837, 1091)}

pytestmark = pytest.mark.skipif(not DATA.exists(), reason="the open force-plate record is not beside the checkout")

WALKER = """
robot_id = "walker"
mass_kg = 76.5
gravity_m_per_s2 = 9.81
"""
LEG = """
[[leg]]
name = "{name}"
[[leg.joint]]
name = "hip"
axis = [0.0, 1.0, 0.0]
xyz_m = [0.0, 0.0, 0.0]
[leg.foot]
xyz_m = [0.0, 0.0, -0.9]
sensor_axis = [0.0, 0.0, 1.0]
"""


@pytest.fixture(scope="module")
def estimate(tmp_path_factory: pytest.TempPathFactory) -> EstimateColumns:
    """What ideal feet under four plates tell."""
    path = tmp_path_factory.mktemp("walker") / "robot.toml"
    path.write_text(WALKER + "".join(LEG.format(name=name) for name in LISTED), encoding="utf-8")
    plates = pd.read_csv(DATA, comment="#")
    raw = plates[[f"{name}_v" for name in LISTED]].to_numpy(dtype=np.float64)
    raw += 0.3 * np.random.default_rng(7).standard_normal(raw.shape)  # the plates' zeros are exact, no sensor's are
    rows = len(plates)
    nothing = np.full((rows, 4, 1), np.nan)
    log = RobotLog(
        legs=tuple(LISTED),
        joints=(1, 1, 1, 1),
        t_s=plates["t_s"].to_numpy(dtype=np.float64),
        raw=raw,
        temp_C=np.full((rows, 4), 23.0),
        q_rad=np.zeros((rows, 4, 1)),
        dq_rad_per_s=np.zeros((rows, 4, 1)),
        current_A=nothing,
        motor_temp_C=nothing,
        quat_WB=np.tile([1.0, 0.0, 0.0, 0.0], (rows, 1)),
        gyro_B_rad_per_s=np.zeros((rows, 3)),
        accel_B_m_per_s2=np.tile([0.0, 0.0, 9.81], (rows, 1)),
        metadata={},
    )
    feet = [ideal_calibration(f"SIM-{name}", capacity_N=1500.0) for name in LISTED]
    return Fusion(Robot.load(path), feet).run(log)


@pytest.mark.parametrize("name", list(LISTED))
def test_contact_intervals_are_those_of_the_plates(estimate: EstimateColumns, name: str) -> None:
    """One stance a plate, begun and ended within 2 samples of the listed ones (d is cut by the record's end)."""
    found = intervals(estimate.column(name, "contact") == 1)
    assert len(found) == 1
    assert found[0][0] == pytest.approx(LISTED[name][0], abs=2)
    assert found[0][1] - 1 == pytest.approx(LISTED[name][1], abs=2)


@pytest.mark.parametrize("name", list(LISTED))
def test_the_vertical_impulse_is_that_of_the_plates(estimate: EstimateColumns, name: str) -> None:
    """The integral of the estimated vertical force is the listed impulse within 0.5 %."""
    listed_Ns = {"a": 420.99, "b": 407.50, "c": 412.13, "d": 335.16}
    assert np.sum(estimate.column(name, "fz_N")) / 450.0 == pytest.approx(listed_Ns[name], rel=0.005)
