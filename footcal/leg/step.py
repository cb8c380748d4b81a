"""Compiled: the leg part of one tick, all legs at once.

The list is flat on purpose: every level of calls is optimised once more by the compiler.
"""

from __future__ import annotations

from typing import Any

from footcal.leg.adopt import adopt
from footcal.leg.chain import first_joint, foot_and_axis, jacobian, next_joint
from footcal.leg.compiled import inner
from footcal.leg.coupling import couple_load, couple_motion, couple_torques
from footcal.leg.current import drive_torques, load_torque, read_currents, varying_ratio
from footcal.leg.dynamics import below_sensor, first_link, link_wrench, next_link
from footcal.leg.fields import COUPLED, VARIES
from footcal.leg.motion import move_joint, read_base, read_joints


@inner
def leg_step(inp: Any, gravity: Any, s: Any, c: Any) -> None:
    """Advance every leg by one tick: geometry, rigid-body torques, and what the motors say.

    Args:
        inp: input record of the tick (`q_rad`, `dq_rad_per_s`, `current_A`, `motor_temp_C` (J, L); `quat_WB`,
            `gyro_rad_per_s`, `accel_m_per_s2` as the inertial unit sent them); NaN means no new reading.
        gravity: shape (3,), m/s2, in the body frame of a level robot; used while the inertial unit gives nothing.
        s: state record with the fields of `leg_state_fields`, and `dt_s`, `reset`, `force_B_N` of the last tick.
        c: constants record with the fields of `leg_constant_fields`, and `sen_cross`.
    """
    if s.leg_ready[0] == 0 or s.reset[0] != 0:
        adopt(s, c)
    joints = s.leg_q.shape[0]
    read_base(inp, gravity, s)
    read_joints(inp, s)
    for j in range(joints):
        move_joint(s, j)
    if s.leg_set[COUPLED] > 0.0:
        couple_motion(s)
    posture(s)
    read_currents(inp, s)
    if s.leg_set[VARIES] > 0.0:
        varying_ratio(s)
    load_torque(s)
    if s.leg_set[COUPLED] > 0.0:
        couple_load(s)
    for j in range(joints):
        drive_torques(s, j)
    if s.leg_set[COUPLED] > 0.0:
        couple_torques(s)


@inner
def posture(s: Any) -> None:
    """From joint motion, sines and cosines to geometry, rigid-body torques and inertia below the sensor."""
    joints = s.leg_q.shape[0]
    first_joint(s)
    for j in range(1, joints):
        next_joint(s, j)
    foot_and_axis(s)
    jacobian(s)
    first_link(s)
    for j in range(1, joints):
        next_link(s, j)
    for j in range(joints):
        link_wrench(s, joints - 1 - j)
    below_sensor(s)
