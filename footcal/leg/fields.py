"""The fields that the leg part adds to the runtime's state and constants records; last axis is the leg lane.

The constants stand in both records: the step copies them once into the state, because rows of one record cannot overlap,
and only then does the compiler make full-width vectors of four lanes (measured: 402 ns to 68 ns for the link forces).

All joint rows end in (J, L), so that they have one stride: then code that takes the joint as an argument vectorises too.

J is 3 or 6; joints a leg does not have are padded: zero axis, zero mass, ratio 0. Vectors and matrices are body frame B
unless the comment says link (the frame of a joint after its rotation).
"""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np

Field = tuple[str, str, tuple[int, ...]]
RATIO_NODES = 33  # of the table of a varying ratio


def leg_state_fields(legs: int, joints: int) -> list[Field]:
    """Return name, type and shape of every state field of the leg part: what it hands on, what it remembers, work rows."""
    J, L = joints, legs
    handed_on: list[Field] = [
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
    remembered: list[Field] = [
        ("leg_phi", "f8", (J, L)),  # actuator angle of the last encoder reading, rad
        ("leg_dphi", "f8", (J, L)),
        ("leg_phi_age_s", "f8", (J, L)),  # inf until the encoder spoke
        ("leg_lp", "f8", (J, L)),  # derivative filter: low-passed speed
        ("leg_slope", "f8", (J, L)),  # its raw derivative, rad/s2
        ("leg_slope_lp", "f8", (J, L)),
        ("leg_ddphi", "f8", (J, L)),
        ("leg_on", "i8", (J, L)),  # 1 while the derivative filter runs
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
    work: list[Field] = [
        ("leg_h", "f8", (3, L)),  # sensor axis + cross-sensitivity, last link
        ("leg_gap_s", "f8", (J, L)),  # time since the reading before; 0 where none is new
        ("leg_decay", "f8", (J, L)),
        ("leg_q", "f8", (J, L)),  # joint angle, speed, acceleration
        ("leg_dq", "f8", (J, L)),
        ("leg_ddq", "f8", (J, L)),
        ("leg_sin", "f8", (J, L)),
        ("leg_cos", "f8", (J, L)),
        ("leg_R", "f8", (9, J, L)),  # body <- link, row by row
        ("leg_p", "f8", (3, J, L)),  # joint origins
        ("leg_z", "f8", (3, J, L)),  # joint axes
        ("leg_av", "f8", (3, J, L)),  # angular rate, angular acceleration, acceleration - gravity of the joint origin
        ("leg_aa", "f8", (3, J, L)),
        ("leg_la", "f8", (3, J, L)),
        ("leg_F", "f8", (3, J, L)),  # force and moment that move the link
        ("leg_N", "f8", (3, J, L)),
        ("leg_ratio", "f8", (J, L)),
        ("leg_dratio", "f8", (J, L)),
        ("leg_load", "f8", (J, L)),  # actuator torque that the load asks for
        ("leg_act", "f8", (J, L)),  # actuator-side results before they are turned into joint torques
        ("leg_act2", "f8", (J, L)),
        ("leg_act3", "f8", (J, L)),
        ("leg_grip", "f8", (J, L)),  # tanh(speed / stuck speed)
        ("leg_bump", "f8", (J, L)),  # Stribeck's exponential
    ]
    return handed_on + remembered + work + [("leg_ready", "i8", (1,)), *leg_constant_fields(legs, joints)]


def leg_constant_fields(legs: int, joints: int) -> list[Field]:
    """Return name, type and shape of every constant field of the leg part."""
    J, L = joints, legs
    return [
        ("leg_joints", "i8", (L,)),
        ("leg_R0", "f8", (9, J, L)),  # link before <- joint at angle zero
        ("leg_p0", "f8", (3, J, L)),  # joint origin, link before
        ("leg_axis", "f8", (3, J, L)),  # link
        ("leg_mass", "f8", (J, L)),
        ("leg_com", "f8", (3, J, L)),  # link
        ("leg_inertia", "f8", (6, J, L)),  # xx, yy, zz, xy, xz, yz about the centre of mass, link
        ("leg_foot", "f8", (3, L)),  # ball centre, last link
        ("leg_sensor", "f8", (3, 3, L)),  # rows: sensor x, y and axis, last link
        ("leg_distal_kg", "f8", (L,)),
        ("leg_distal", "f8", (3, L)),  # last link
        ("leg_enc_sign", "f8", (J, L)),
        ("leg_enc_off", "f8", (J, L)),
        ("leg_M", "f8", (J, J, L)),  # actuator angles = M @ joint angles
        ("leg_Minv", "f8", (J, J, L)),
        ("leg_MinvT", "f8", (J, J, L)),
        ("leg_motor", "i8", (J, L)),  # 1 where the actuator has a torque constant
        ("leg_kt", "f8", (J, L)),
        ("leg_kt_per_K", "f8", (J, L)),
        ("leg_kt_C", "f8", (J, L)),  # temperature the torque constant holds for
        ("leg_kt_u", "f8", (J, L)),  # relative standard uncertainty of the torque constant
        ("leg_rotor", "f8", (J, L)),
        ("leg_i0", "f8", (J, L)),
        ("leg_i_sd", "f8", (J, L)),
        ("leg_coulomb", "f8", (J, L)),
        ("leg_extra", "f8", (J, L)),  # breakaway - Coulomb
        ("leg_stribeck", "f8", (J, L)),  # 1 / Stribeck speed
        ("leg_viscous", "f8", (J, L)),
        ("leg_share", "f8", (J, L)),
        ("leg_lag_s", "f8", (J, L)),
        ("leg_ratio_0", "f8", (J, RATIO_NODES, L)),  # ratio at the nodes, and its slope times the node distance
        ("leg_ratio_1", "f8", (J, RATIO_NODES, L)),
        ("leg_node_0", "f8", (J, L)),  # angle of the first node
        ("leg_node_step", "f8", (J, L)),
        ("leg_varies", "i8", (1,)),  # 1 where any ratio varies
        ("leg_unstick", "f8", (1,)),  # 1 / speed of the smooth step between stuck and moving
        ("leg_stuck_sd", "f8", (1,)),  # friction error over its limit, stuck and moving
        ("leg_moving_sd", "f8", (1,)),
        ("leg_fric_tau_s", "f8", (1,)),
        ("leg_dq_tau_s", "f8", (1,)),
        ("leg_w_tau_s", "f8", (1,)),
        ("leg_lead", "f8", (1,)),  # 1 undoes the lag of the derivative filters to first order
        ("leg_imu_R", "f8", (3, 3)),  # body <- inertial unit
        ("leg_imu_p", "f8", (3,)),
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
    """Return the dtypes of tick, state and constants of a leg step that runs by itself, without a sensor or a filter."""
    constants = [*leg_constant_fields(legs, joints), ("sen_cross", "f8", (2, legs))]
    return (
        np.dtype(tick_fields(legs, joints)),
        np.dtype(shared_state_fields(legs) + leg_state_fields(legs, joints)),
        np.dtype(constants),
    )
