"""An ideal foot (the reading is the force in newtons) and simulated runs as robot logs, for tests of the fusion."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from footcal.calfile.calibration import Calibration
from footcal.files.robot_log import RobotLog
from footcal.files.truth import Truth
from footcal.fusion.engine import Fusion
from footcal.leg import Robot
from footcal.records import FloatArray
from footcal.sensor.creep import CREEP_TAU_S, N_CREEP
from footcal.sensor.curve import N_POWERS
from footcal.sensor.hysteresis import PLAY_HALF_WIDTH
from footcal.sensor.model import FEATURES, N_FEATURES, N_UNCERTAINTY_ROWS
from footcal.sensor.temperature import N_TEMPERATURE
from footcal.sim.gait import SimulatedRun


def ideal_calibration(foot_id: str, capacity_N: float = 400.0, u_N: float = 0.3, noise_N: float = 0.1) -> Calibration:
    """Return the calibration of a foot whose raw reading is the axial force in newtons.

    Args:
        foot_id: serial number.
        capacity_N: full scale.
        u_N: its fixed standard uncertainty.
        noise_N: noise of one sample.
    """
    line = [0.0, 1.0] + [0.0] * (N_POWERS - 2)
    content = {
        "foot_id": foot_id,
        "sensor": {"kind": "cell", "capacity_N": capacity_N},
        "provenance": {"made_utc": "2031-04-02T08:00:00Z", "tool_version": "test", "sessions": []},
        "input": {
            "wiring": "counts",
            "raw_min": -1e6,
            "raw_max": 1e6,
            "u_zero": 0.0,
            "u_span": capacity_N,
            "power": 1.0,
            "power_offset": 0.02,
            "temp_ref_C": 23.0,
            "thermometer_lag_s": 0.0,
            "lag_s": 0.0,
        },
        "model": {
            "curve": line,
            "curve_temperature": [0.0] * N_TEMPERATURE,
            "creep_tau_s": list(CREEP_TAU_S),
            "creep_undone": [0.0] * N_CREEP,
            "play_half_width": list(PLAY_HALF_WIDTH),
            "features": list(FEATURES),
            "coefficients": [0.0, 1.0] + [0.0] * (N_FEATURES - 2),
            "covariance": [[0.0] * (i + 1) for i in range(N_FEATURES)],
            "cross_axis": {"u_x": 0.0, "u_y": 0.0, "tested": True},
            "settle": {"time_s": 0.0, "swing_share": 0.0},
        },
        "unload": {"share_of_peak": 0.0, "decay_s": 1.0},
        "zero": {"stated_for": "massless foot"},
        "validity": {
            "force_min_N": 0.0,
            "force_max_N": capacity_N,
            "temp_min_C": -40.0,
            "temp_max_C": 80.0,
            "temperature_tested": True,
            "dynamic": True,
        },
        "figures": {"cycles": None, "loads": None, "pump": None},
        "set_aside": [],
        "uncertainty": {
            "runtime": {
                "rows": [[0.0] * N_FEATURES] * N_UNCERTAINTY_ROWS,
                "fixed": u_N / capacity_N,
                "relative": 0.0,
                "moving": 0.0,
                "noise": noise_N / capacity_N,
                "noise_interval_s": 0.001,
                "temp_C": 0.0,
                "temp_absent_C": 0.0,
                "beyond": 0.0,
            },
            "budget": [],
            "curve": [{"force_N": 0.0, "U_N": 2 * u_N}, {"force_N": capacity_N, "U_N": 2 * u_N}],
        },
        "history": [],
        "notes": [],
    }
    return Calibration.from_content(content)


def robot_of(run: SimulatedRun, folder: Path) -> Robot:
    """Write the run's robot description into `folder` and load it."""
    path = folder / "robot.toml"
    path.write_text(run.robot_toml, encoding="utf-8")
    return Robot.load(path)


def log_of(columns: dict[str, FloatArray], robot: Robot) -> RobotLog:
    """Return a run's log columns as a RobotLog."""
    legs, joints = robot.leg_names, robot.joint_counts

    def per_joint(name: str) -> FloatArray:
        return np.stack(
            [np.stack([columns[f"{leg}.{name}{j}"] for j in range(joints[0])], axis=1) for leg in legs], axis=1
        )

    return RobotLog(
        legs=legs,
        joints=joints,
        t_s=columns["t_s"],
        raw=np.stack([columns[f"{leg}.raw"] for leg in legs], axis=1),
        temp_C=np.stack([columns[f"{leg}.temp_C"] for leg in legs], axis=1),
        q_rad=per_joint("q"),
        dq_rad_per_s=per_joint("dq"),
        current_A=per_joint("i"),
        motor_temp_C=per_joint("motor_temp_C"),
        quat_WB=np.stack([columns[f"imu.q{k}"] for k in "wxyz"], axis=1),
        gyro_B_rad_per_s=np.stack([columns[f"imu.w{k}"] for k in "xyz"], axis=1),
        accel_B_m_per_s2=np.stack([columns[f"imu.a{k}"] for k in "xyz"], axis=1),
        metadata={},
    )


def truth_of(columns: dict[str, FloatArray], legs: tuple[str, ...]) -> Truth:
    """Return a run's truth columns as a Truth."""
    force = np.stack([np.stack([columns[f"{leg}.f{k}_N"] for k in "xyz"], axis=1) for leg in legs], axis=1)
    contact = np.stack([columns[f"{leg}.contact"] for leg in legs], axis=1)
    return Truth(legs=legs, frame="body", t_s=columns["t_s"], force_N=force, contact=contact)


def ideal_fusion(robot: Robot) -> Fusion:
    """Return a fusion whose feet are ideal."""
    return Fusion(robot, [ideal_calibration(f"SIM-{k:04d}") for k in range(1, len(robot.legs) + 1)])
