"""From description and drive files to the constants record of the compiled leg step, and its power-up state."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from footcal.leg.drive import leg_drives
from footcal.leg.drivefile import DriveFile
from footcal.leg.fields import leg_constant_fields, leg_state_fields
from footcal.leg.description import Robot
from footcal.leg.rotation import from_rpy
from footcal.leg.schema import Foot, Joint, Leg
from footcal.leg.transmission import ratio_nodes
from footcal.records import FloatArray


@dataclass(frozen=True, slots=True)
class LegSettings:
    """Settings of the leg step that no file of the robot holds; starting values of a prototype."""

    dq_filter_s: float = 0.003  # of the derivative of joint speeds
    gyro_filter_s: float = 0.008  # of the derivative of the base's angular rate
    lead: float = 1.0  # 1: the derivatives' lag is undone to first order, so that all terms belong to the same instant
    stuck_speed_rad_per_s: float = 0.05  # joint speed of the smooth step from stuck to moving
    stuck_sd_share: float = 1.2 / 3.0**0.5  # sd of the friction error over what a stuck joint can hide
    moving_sd_share: float = 0.15  # the same for a moving joint
    friction_corr_s: float = 0.08  # correlation time of the friction error


def fill_leg_constants(
    robot: Robot, drives: Sequence[DriveFile | None], c: Any, settings: LegSettings | None = None
) -> None:
    """Write the whole robot into the leg fields of the constants record `c`.

    Args:
        robot: the description.
        drives: the drive file of each leg, in the order of lanes; None where there is none.
        c: one-element record array with the fields of `leg_constant_fields` (others are left alone).
        settings: of the step; the starting values when left out.

    Raises:
        SettingError: a screw's lever arm vanishes within its range.
    """
    settings = settings or LegSettings()
    for name, _, _ in leg_constant_fields(1, 3):
        c[name][...] = 0
    for lane, (leg, drive) in enumerate(zip(robot.legs, drives, strict=True)):
        _fill_chain(leg, c, lane)
        _fill_foot(leg.foot, c, lane)
        _fill_actuators(leg, drive, c, lane)
    c["leg_unstick"][...] = 1.0 / settings.stuck_speed_rad_per_s
    c["leg_stuck_sd"][...] = settings.stuck_sd_share
    c["leg_moving_sd"][...] = settings.moving_sd_share
    c["leg_fric_tau_s"][...] = settings.friction_corr_s
    c["leg_dq_tau_s"][...] = settings.dq_filter_s
    c["leg_w_tau_s"][...] = settings.gyro_filter_s
    c["leg_lead"][...] = settings.lead
    c["leg_imu_R"][...] = from_rpy(robot.file.imu.rpy_rad)
    c["leg_imu_p"][...] = robot.file.imu.xyz_m


def _fill_chain(leg: Leg, c: Any, lane: int) -> None:
    c["leg_joints"][..., lane] = len(leg.joints)
    for j in range(c["leg_mass"].shape[-2]):
        c["leg_R0"][..., :, j, lane] = np.eye(3).ravel()
    for j, joint in enumerate(leg.joints):
        c["leg_R0"][..., :, j, lane] = from_rpy(joint.rpy_rad).ravel()
        c["leg_p0"][..., :, j, lane] = joint.xyz_m
        c["leg_axis"][..., :, j, lane] = _unit(joint.axis)
        c["leg_mass"][..., j, lane] = joint.mass_kg
        c["leg_com"][..., :, j, lane] = joint.com_m
        c["leg_inertia"][..., :, j, lane] = joint.inertia_kg_m2
        c["leg_enc_sign"][..., j, lane] = joint.encoder_sign
        c["leg_enc_off"][..., j, lane] = joint.encoder_offset_rad


def _fill_foot(foot: Foot, c: Any, lane: int) -> None:
    c["leg_foot"][..., :, lane] = foot.xyz_m
    c["leg_distal_kg"][..., lane] = foot.distal_mass_kg
    c["leg_distal"][..., :, lane] = foot.xyz_m if foot.distal_com_m is None else foot.distal_com_m
    c["leg_sensor"][..., :, :, lane] = sensor_frame(foot)


def sensor_frame(foot: Foot) -> FloatArray:
    """Return the sensor's x, y and axis as rows, seen in the last link.

    The axis is z; x is the link's x axis laid square to it (the link's y axis where x lies along the sensor), y = z cross x.
    The two numbers of a calibration's `cross_axis` belong to x and y.

    Args:
        foot: the foot of a leg.

    Returns:
        Shape (3, 3), rows of length 1.
    """
    z = _unit(foot.sensor_axis)
    start = np.array([1.0, 0.0, 0.0]) if abs(z[0]) < 0.9 else np.array([0.0, 1.0, 0.0])
    x = _unit(start - (start @ z) * z)
    return np.array([x, np.cross(z, x), z])


def _fill_actuators(leg: Leg, drive: DriveFile | None, c: Any, lane: int) -> None:
    n = len(leg.joints)
    matrix = np.eye(c["leg_M"].shape[-2])
    if leg.actuator_matrix is not None:
        matrix[:n, :n] = leg.actuator_matrix
    inverse = np.linalg.inv(matrix)
    c["leg_M"][..., :, :, lane] = matrix
    c["leg_Minv"][..., :, :, lane] = inverse
    c["leg_MinvT"][..., :, :, lane] = inverse.T
    c["leg_node_step"][..., :, lane] = 1.0
    for j, (joint, figures) in enumerate(zip(leg.joints, leg_drives(leg.joints, drive), strict=True)):
        values = {
            "leg_motor": figures.kt_Nm_per_A > 0.0,
            "leg_kt": figures.kt_Nm_per_A,
            "leg_kt_per_K": figures.kt_temp_coeff_per_K,
            "leg_kt_C": figures.kt_temp_C,
            "leg_kt_u": figures.kt_u_share,
            "leg_rotor": figures.rotor_inertia_kg_m2,
            "leg_i0": figures.current_offset_A,
            "leg_i_sd": figures.current_noise_A,
            "leg_coulomb": figures.coulomb_Nm,
            "leg_extra": figures.breakaway_Nm - figures.coulomb_Nm,
            "leg_stribeck": 1.0 / figures.stribeck_rad_per_s,
            "leg_viscous": figures.viscous_Nms_per_rad,
            "leg_share": figures.load_share,
            "leg_lag_s": figures.lag_s,
        }
        for name, value in values.items():
            c[name][..., j, lane] = value
        _fill_ratio(joint, c, j, lane)


def _fill_ratio(joint: Joint, c: Any, j: int, lane: int) -> None:
    nodes = ratio_nodes(joint)
    c["leg_ratio_0"][..., j, :, lane] = nodes.ratio
    c["leg_ratio_1"][..., j, :, lane] = nodes.slope_per_rad * nodes.step_rad
    c["leg_node_0"][..., j, lane] = nodes.first_rad
    c["leg_node_step"][..., j, lane] = nodes.step_rad
    if nodes.varies:
        c["leg_varies"][...] = 1


def _unit(vector: Sequence[float]) -> FloatArray:
    array = np.array(vector, dtype=np.float64)
    return np.asarray(array / np.linalg.norm(array))


def fresh_leg_state(s: Any) -> None:
    """Put the leg fields of the state record into their power-up state: nothing heard yet.

    Args:
        s: one-element record array with the fields of `leg_state_fields`.
    """
    for name, _, _ in leg_state_fields(1, 3):
        s[name][...] = 0
    for name in ("leg_phi_age_s", "leg_current_age_s", "leg_gyro_age_s", "leg_accel_age_s", "motor_age_s"):
        s[name][...] = np.inf
    s["leg_motor_C"][...] = np.nan
