"""Writes what the maker of the simulated robot states, as a `robot.toml`."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Final

import numpy as np

from footcal.sim.drives import Drive
from footcal.sim.robot import JOINTS, LEGS, GRAVITY_m_per_s2, SimLeg, SimRobot

FOOT_IDS: Final = {leg: f"SIM-{number:04d}" for number, leg in enumerate(LEGS, start=1)}


def _row(values: Iterable[float]) -> str:
    return "[" + ", ".join(f"{float(v):.9g}" if float(v) != int(v) else f"{float(v):.1f}" for v in values) + "]"


def _joint_lines(leg: SimLeg, index: int) -> list[str]:
    """Return one [[leg.joint]] table: origin and axis as URDF has them, link, motor, friction."""
    drive, link = leg.drives[index], leg.links[index]
    origin = (leg.hip_B_m, (0.0, leg.side * leg.offset_m, 0.0), (0.0, 0.0, -leg.thigh_m))[index]
    axis = ((float(leg.side), 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 1.0, 0.0))[index]
    turned = (0.0, leg.knee_zero_rad if index == 2 else 0.0, 0.0)
    # The abduction motors are sold by their speed constant: Kt = 60/(2 pi Kv).
    constant = (
        f"kv_rpm_per_V = {60.0 / (2.0 * np.pi * drive.kt_Nm_per_A):.6g}"
        if index == 0
        else f"kt_Nm_per_A = {drive.kt_Nm_per_A:.6g}"
    )
    return [
        "[[leg.joint]]",
        f'name = "{JOINTS[index]}"',
        f"axis = {_row(axis)}",
        f"xyz_m = {_row(origin)}",
        f"rpy_rad = {_row(turned)}",
        f"encoder_sign = {leg.encoder_sign[index]}",
        f"encoder_offset_rad = {leg.encoder_offset_rad[index]:.6g}",
        f"mass_kg = {link.mass_kg:.6g}",
        f"com_m = {_row(link.com_m)}",
        f"inertia_kg_m2 = {_row(link.inertia_kg_m2)}",
        constant,
        f"kt_temp_coeff_per_K = {drive.kt_temp_coeff_per_K:.6g}",
        f"rotor_inertia_kg_m2 = {drive.rotor_inertia_kg_m2:.6g}",
        f"current_delay_s = {0.5 * sum(drive.delay_s):.6g}",
        f"current_lag_s = {drive.lag_s:.6g}",
        f'transmission = {{ kind = "ratio", ratio = {drive.ratio:.6g} }}',
        _friction(drive),
    ]


def _friction(drive: Drive) -> str:
    parts = [f"coulomb_Nm = {drive.coulomb_Nm:.4g}", f"viscous_Nms_per_rad = {drive.viscous_Nms_per_rad:.4g}"]
    return "friction = { " + ", ".join([*parts, f"load_share = {drive.load_share:.4g}"]) + " }"


def _foot_lines(leg: SimLeg, foot_rate_Hz: float | None) -> list[str]:
    lines = [
        "[leg.foot]",
        f"xyz_m = {_row((0.0, 0.0, -leg.shank_m))}",
        f"radius_m = {leg.foot_radius_m:.6g}",
        f"sensor_axis = {_row(leg.sensor_axis)}",
        f"distal_mass_kg = {leg.distal_mass_kg:.6g}",
        f"distal_com_m = {_row(leg.distal_com_m)}",
    ]
    if foot_rate_Hz is not None:
        lines += [f"sample_rate_Hz = {foot_rate_Hz:.6g}", f"sample_window_s = {1.0 / foot_rate_Hz:.6g}"]
    return lines


def robot_toml(
    robot: SimRobot,
    *,
    foot_ids: Mapping[str, str] | None = None,
    foot_rate_Hz: float | None = None,
    drive_files: bool = False,
) -> str:
    """Return the text of `robot.toml` for a robot as stated.

    Args:
        robot: the robot as its maker describes it.
        foot_ids: leg name to foot_id, so that `calibration` names `<foot_id>.cal.json`; invented numbers if left out.
        foot_rate_Hz: of a slow foot converter; None where every row is a reading.
        drive_files: name `<leg>.drive.json` as drive file of each leg.
    """
    ids = FOOT_IDS if foot_ids is None else foot_ids
    lines = [
        "# Invented robot, written by footcal's simulator.",
        f'robot_id = "{robot.robot_id}"',
        f"mass_kg = {robot.mass_kg:.6g}",
        "mass_u_kg = 0.05",
        f"gravity_m_per_s2 = {GRAVITY_m_per_s2}",
        "[imu]",
        f"xyz_m = {_row(robot.imu_B_m)}",
        f"rpy_rad = {_row(robot.imu_rpy_rad)}",
    ]
    for leg in robot.legs:
        lines += ["", "[[leg]]", f'name = "{leg.name}"', f'calibration = "{ids[leg.name]}.cal.json"']
        lines += [f'drive = "{leg.name}.drive.json"'] if drive_files else []
        for index in range(3):
            lines += _joint_lines(leg, index)
        lines += _foot_lines(leg, foot_rate_Hz)
    return "\n".join(lines) + "\n"
