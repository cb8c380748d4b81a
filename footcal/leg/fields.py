"""The fields that the leg part adds to the runtime's state and constants records; last axis is the leg lane.

The constants stand in both records: the step copies them once into the state, because rows of one record cannot
overlap, and only then does the compiler make full-width vectors of four lanes (measured: 402 ns to 68 ns for the link
forces).

All joint rows end in (J, L), so that they have one stride: then code that takes the joint as an argument vectorises
too.

J is 3 or 6; joints a leg does not have are padded: zero axis, zero mass, ratio 0. Vectors and matrices are body frame B
unless the comment says link (the frame of a joint after its rotation).
"""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np

Field = tuple[str, str, tuple[int, ...]]
RATIO_NODES = 33  # of the table of a varying ratio

# Rows of leg_link, one column a joint.
R0, P0, AXIS, COM, INERTIA, MASS, LINK_ROWS = 0, 9, 12, 15, 18, 24, 25
#   R0       link before <- joint at angle zero, row by row
#   P0       joint origin, m, link before
#   AXIS     unit axis, link
#   COM      centre of mass, m, link
#   INERTIA  xx, yy, zz, xy, xz, yz about the centre of mass, kg m2, link

# Rows of leg_drive, one column an actuator.
ENC_SIGN, ENC_OFF, KT, KT_PER_K, KT_C, KT_U, ROTOR, CURRENT_0, CURRENT_SD = 0, 1, 2, 3, 4, 5, 6, 7, 8
COULOMB, EXTRA, STRIBECK, VISCOUS, SHARE, LAG_S, NODE_0, NODE_STEP, HAS_MOTOR, HERE = (
    9,
    10,
    11,
    12,
    13,
    14,
    15,
    16,
    17,
    18,
)
DRIVE_ROWS = 19
#   KT_C      temperature the torque constant holds for;  KT_U  its relative standard uncertainty
#   EXTRA     breakaway - Coulomb, Nm;  STRIBECK  1 / Stribeck speed
#   NODE_0    angle of the first node of a varying ratio;  HAS_MOTOR, HERE  1 or 0

# Rows of leg_foot, one column a leg; last link.
BALL, DISTAL, DISTAL_KG, SENSOR, FOOT_ROWS = 0, 3, 6, 7, 16
#   SENSOR    sensor x, y and axis, three rows each

# Entries of leg_set.
UNSTICK, STUCK_SD, MOVING_SD, FRIC_TAU_S, DQ_TAU_S, W_TAU_S, LEAD, VARIES, COUPLED, SET_ROWS = (
    0,
    1,
    2,
    3,
    4,
    5,
    6,
    7,
    8,
    9,
)
#   UNSTICK   1 / speed of the smooth step between stuck and moving;  STUCK_SD, MOVING_SD  friction error over its limit
#   LEAD      1 undoes the lag of the derivative filters to first order
#   VARIES    1 where any ratio varies;  COUPLED  1 where any leg has an actuator matrix


def leg_state_fields(legs: int, joints: int) -> list[Field]:
    """Return name, type and shape of every state field of the leg part: handed on, remembered, work rows."""
    parts = [part(joints, legs) for part in (_handed_on, _remembered, _work)]
    return [*parts[0], *parts[1], *parts[2], ("leg_ready", "i8", (1,)), *leg_constant_fields(legs, joints)]


def _handed_on(J: int, L: int) -> list[Field]:
    """What the filter reads."""
    return [
        ("foot_B_m", "f8", (3, L)),  # ball centre
        ("jac_B", "f8", (3, J, L)),  # m/rad
        ("axis_B", "f8", (3, L)),  # sensor axis + cross-sensitivity
        ("axial_inertia_N", "f8", (L,)),
        ("tau_rigid_Nm", "f8", (J, L)),
        ("tau_drive_Nm", "f8", (J, L)),
        ("tau_meas_Nm", "f8", (J, L)),
        ("tau_new", "i8", (J, L)),
        ("tau_noise_Nm", "f8", (J, L)),
        ("fric_sd_Nm", "f8", (J, L)),
        ("fric_tau_s", "f8", (J, L)),
        ("tau_lag_s", "f8", (J, L)),
        ("motor_age_s", "f8", (L,)),
    ]


def _remembered(J: int, L: int) -> list[Field]:
    """What is kept from tick to tick."""
    return [
        ("leg_phi", "f8", (J, L)),  # actuator angle of the last encoder reading, rad
        ("leg_dphi", "f8", (J, L)),
        ("leg_phi_age_s", "f8", (J, L)),  # inf until the encoder spoke
        ("leg_lp", "f8", (J, L)),  # derivative filter: low-passed speed
        ("leg_slope", "f8", (J, L)),  # its raw derivative, rad/s2
        ("leg_slope_lp", "f8", (J, L)),
        ("leg_ddphi", "f8", (J, L)),
        ("leg_starts", "f8", (J, L)),  # 1 where the derivative filter starts with this reading
        ("leg_current_A", "f8", (J, L)),
        ("leg_current_age_s", "f8", (J, L)),
        ("leg_current_new", "i8", (J, L)),
        ("leg_motor_C", "f8", (J, L)),  # NaN until a thermometer spoke
        ("leg_w", "f8", (3,)),  # base angular rate, rad/s
        ("leg_dw", "f8", (3,)),  # base angular acceleration, rad/s2
        ("leg_f", "f8", (3,)),  # specific force at the body origin, m/s2
        ("leg_w_lp", "f8", (3,)),
        ("leg_w_slope", "f8", (3,)),
        ("leg_w_slope_lp", "f8", (3,)),
        ("leg_gyro_age_s", "f8", (1,)),
        ("leg_accel_I", "f8", (3,)),  # specific force at the inertial unit, body axes
        ("leg_accel_age_s", "f8", (1,)),
        ("leg_quat", "f8", (4,)),  # last attitude; zeros until one was given
        ("leg_gyro_on", "i8", (1,)),
    ]


def _work(J: int, L: int) -> list[Field]:
    """Rows that are written and read within one step."""
    return [
        ("leg_h", "f8", (3, L)),  # sensor axis + cross-sensitivity, last link
        ("leg_speed", "f8", (J, L)),  # newly read actuator speed
        ("leg_gap_s", "f8", (J, L)),  # time since the reading before; 0 where none is new
        ("leg_decay", "f8", (J, L)),
        ("leg_q", "f8", (J, L)),  # joint angle, speed, acceleration
        ("leg_dq", "f8", (J, L)),
        ("leg_ddq", "f8", (J, L)),
        ("leg_sin", "f8", (J, L)),
        ("leg_cos", "f8", (J, L)),
        ("leg_R", "f8", (9, J, L)),  # body <- link, row by row
        ("leg_p", "f8", (3, J + 1, L)),  # joint origins
        ("leg_z", "f8", (3, J, L)),  # joint axes
        ("leg_av", "f8", (3, J, L)),  # angular rate, angular acceleration, acceleration - gravity of the joint origin
        ("leg_aa", "f8", (3, J, L)),
        ("leg_la", "f8", (3, J, L)),
        ("leg_F", "f8", (3, J + 1, L)),  # force and moment a joint hands to its link; the row after the last is 0
        ("leg_N", "f8", (3, J + 1, L)),
        ("leg_ratio", "f8", (J, L)),
        ("leg_dratio", "f8", (J, L)),
        ("leg_load", "f8", (J, L)),  # actuator torque that the load asks for
        ("leg_known", "f8", (J, L)),  # 1 where the actuator's current and the leg's posture are fresh
        ("leg_worst_s", "f8", (J, L)),  # age of the leg's oldest joint reading, the same for all its joints
        ("leg_act", "f8", (6, J, L)),  # actuator-side results before they are turned into joint torques
        ("leg_grip", "f8", (J, L)),  # tanh(speed / stuck speed)
        ("leg_bump", "f8", (J, L)),  # Stribeck's exponential
    ]


def leg_constant_fields(legs: int, joints: int) -> list[Field]:
    """Return name, type and shape of every constant field of the leg part; rows are named at the top."""
    J, L = joints, legs
    return [
        ("leg_link", "f8", (LINK_ROWS, J, L)),
        ("leg_drive", "f8", (DRIVE_ROWS, J, L)),
        ("leg_nodes", "f8", (2, RATIO_NODES, J, L)),  # of the ratio: values, and slopes times the node distance
        ("leg_M", "f8", (2, J, J, L)),  # actuator angles = M @ joint angles, and its inverse
        ("leg_foot", "f8", (FOOT_ROWS, L)),
        ("leg_imu", "f8", (12,)),  # body <- inertial unit row by row, then its place in the body
        ("leg_set", "f8", (SET_ROWS,)),
    ]


def shared_state_fields(legs: int) -> list[Field]:
    """Return the fields that the fusion and the filter own and the leg step reads, for using the leg step by itself."""
    return [("dt_s", "f8", (1,)), ("t_ns", "i8", (1,)), ("reset", "i8", (1,)), ("force_B_N", "f8", (3, legs))]


def tick_fields(legs: int, joints: int) -> list[Field]:
    """Return the fields of an input record that the leg step reads."""
    J, L = joints, legs
    return [
        ("q_rad", "f8", (J, L)),
        ("dq_rad_per_s", "f8", (J, L)),
        ("current_A", "f8", (J, L)),
        ("motor_temp_C", "f8", (J, L)),
        ("quat_WB", "f8", (4,)),
        ("gyro_rad_per_s", "f8", (3,)),
        ("accel_m_per_s2", "f8", (3,)),
    ]


@lru_cache(maxsize=32)
def leg_dtypes(legs: int, joints: int) -> tuple[np.dtype[Any], np.dtype[Any], np.dtype[Any]]:
    """Return the dtypes of tick, state and constants of a leg step that runs by itself."""
    constants = [*leg_constant_fields(legs, joints), ("sen_cross", "f8", (2, legs))]
    return (
        np.dtype(tick_fields(legs, joints)),
        np.dtype(shared_state_fields(legs) + leg_state_fields(legs, joints)),
        np.dtype(constants),
    )
