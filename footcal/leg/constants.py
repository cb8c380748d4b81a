"""From description and drive files to the constants record of the compiled leg step, and its power-up state."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from footcal.leg.description import Robot
from footcal.leg.drive import leg_drives
from footcal.leg.drivefile import DriveFile
from footcal.leg.fields import (
    AXIS,
    BALL,
    COM,
    COULOMB,
    COUPLED,
    CURRENT_0,
    CURRENT_SD,
    DISTAL,
    DISTAL_KG,
    DQ_TAU_S,
    ENC_OFF,
    ENC_SIGN,
    EXTRA,
    FRIC_TAU_S,
    HAS_MOTOR,
    HERE,
    INERTIA,
    KT,
    KT_C,
    KT_PER_K,
    KT_U,
    LAG_S,
    LEAD,
    MASS,
    MOVING_SD,
    NODE_0,
    NODE_STEP,
    P0,
    R0,
    ROTOR,
    SENSOR,
    SHARE,
    STRIBECK,
    STUCK_SD,
    UNSTICK,
    VARIES,
    VISCOUS,
    W_TAU_S,
    leg_constant_fields,
    leg_state_fields,
)
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
    robot: Robot,
    drives: Sequence[DriveFile | None],
    c: Any,
    settings: LegSettings | None = None,
    only: str | None = None,
) -> None:
    """Write the whole robot, or one leg of it, into the leg fields of the constants record `c`.

    Args:
        robot: the description.
        drives: the drive file of each leg, in the order of lanes; None where there is none.
        c: one-element record array with the fields of `leg_constant_fields` (others are left alone).
        settings: of the step; the starting values when left out.
        only: name of the one leg that a record of one lane is for.

    Raises:
        SettingError: a screw's lever arm vanishes within its range.
    """
    settings = settings or LegSettings()
    legs = robot.legs if only is None else (robot.leg(only),)
    for name, _, _ in leg_constant_fields(1, 3):
        c[name][...] = 0
    for lane, (leg, drive) in enumerate(zip(legs, drives, strict=True)):
        _fill_chain(leg, c, lane)
        _fill_foot(leg.foot, c, lane)
        _fill_actuators(leg, drive, c, lane)
    values = {
        UNSTICK: 1.0 / settings.stuck_speed_rad_per_s,
        STUCK_SD: settings.stuck_sd_share,
        MOVING_SD: settings.moving_sd_share,
        FRIC_TAU_S: settings.friction_corr_s,
        DQ_TAU_S: settings.dq_filter_s,
        W_TAU_S: settings.gyro_filter_s,
        LEAD: settings.lead,
    }
    for row, value in values.items():
        c["leg_set"][..., row] = value
    c["leg_imu"][..., :9] = from_rpy(robot.file.imu.rpy_rad).ravel()
    c["leg_imu"][..., 9:] = robot.file.imu.xyz_m


def _fill_chain(leg: Leg, c: Any, lane: int) -> None:
    for j in range(c["leg_link"].shape[-2]):
        c["leg_link"][..., R0 : R0 + 9, j, lane] = np.eye(3).ravel()
    for j, joint in enumerate(leg.joints):
        c["leg_link"][..., R0 : R0 + 9, j, lane] = from_rpy(joint.rpy_rad).ravel()
        c["leg_link"][..., P0 : P0 + 3, j, lane] = joint.xyz_m
        c["leg_link"][..., AXIS : AXIS + 3, j, lane] = _unit(joint.axis)
        c["leg_link"][..., MASS, j, lane] = joint.mass_kg
        c["leg_link"][..., COM : COM + 3, j, lane] = joint.com_m
        c["leg_link"][..., INERTIA : INERTIA + 6, j, lane] = joint.inertia_kg_m2
        c["leg_drive"][..., ENC_SIGN, j, lane] = joint.encoder_sign
        c["leg_drive"][..., ENC_OFF, j, lane] = joint.encoder_offset_rad
        c["leg_drive"][..., HERE, j, lane] = 1.0


def _fill_foot(foot: Foot, c: Any, lane: int) -> None:
    c["leg_foot"][..., BALL : BALL + 3, lane] = foot.xyz_m
    c["leg_foot"][..., DISTAL_KG, lane] = foot.distal_mass_kg
    c["leg_foot"][..., DISTAL : DISTAL + 3, lane] = foot.xyz_m if foot.distal_com_m is None else foot.distal_com_m
    c["leg_foot"][..., SENSOR : SENSOR + 9, lane] = sensor_frame(foot).ravel()


def sensor_frame(foot: Foot) -> FloatArray:
    """Return the sensor's x, y and axis as rows, seen in the last link.

    The axis is z; x is the link's x axis laid square to it (the link's y axis where x lies along the sensor), y = z
    cross x. The two numbers of a calibration's `cross_axis` belong to x and y.

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
        c["leg_set"][..., COUPLED] = 1.0
    c["leg_M"][..., 0, :, :, lane] = matrix
    c["leg_M"][..., 1, :, :, lane] = np.linalg.inv(matrix)
    c["leg_drive"][..., NODE_STEP, :, lane] = 1.0
    for j, (joint, figures) in enumerate(zip(leg.joints, leg_drives(leg.joints, drive), strict=True)):
        values = {
            HAS_MOTOR: figures.kt_Nm_per_A > 0.0,
            KT: figures.kt_Nm_per_A,
            KT_PER_K: figures.kt_temp_coeff_per_K,
            KT_C: figures.kt_temp_C,
            KT_U: figures.kt_u_share,
            ROTOR: figures.rotor_inertia_kg_m2,
            CURRENT_0: figures.current_offset_A,
            CURRENT_SD: figures.current_noise_A,
            COULOMB: figures.coulomb_Nm,
            EXTRA: figures.breakaway_Nm - figures.coulomb_Nm,
            STRIBECK: 1.0 / figures.stribeck_rad_per_s,
            VISCOUS: figures.viscous_Nms_per_rad,
            SHARE: figures.load_share,
            LAG_S: figures.lag_s,
        }
        for row, value in values.items():
            c["leg_drive"][..., row, j, lane] = value
        _fill_ratio(joint, c, j, lane)


def _fill_ratio(joint: Joint, c: Any, j: int, lane: int) -> None:
    nodes = ratio_nodes(joint)
    c["leg_nodes"][..., 0, :, j, lane] = nodes.ratio
    c["leg_nodes"][..., 1, :, j, lane] = nodes.slope_per_rad * nodes.step_rad
    c["leg_drive"][..., NODE_0, j, lane] = nodes.first_rad
    c["leg_drive"][..., NODE_STEP, j, lane] = nodes.step_rad
    if nodes.varies:
        c["leg_set"][..., VARIES] = 1.0


def _unit(vector: Sequence[float] | FloatArray) -> FloatArray:
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
