"""Compiled: the leg part of one tick, all legs at once."""

from __future__ import annotations

from typing import Any

from numba import njit

from footcal.leg.chain import chain_step
from footcal.leg.current import drive_step
from footcal.leg.dynamics import dynamics_step
from footcal.leg.motion import joint_motion, read_base, read_joints, slope_joints


@njit(error_model="numpy")
def leg_step(inp: Any, gravity: Any, s: Any, c: Any) -> None:
    """Advance every leg by one tick: geometry, rigid-body torques, and what the motors say.

    Args:
        inp: input record of the tick (`q_rad`, `dq_rad_per_s`, `current_A`, `motor_temp_C` (J, L); `quat_WB`,
            `gyro_rad_per_s`, `accel_m_per_s2` as the inertial unit sent them); NaN means no new reading.
        gravity: shape (3,), m/s2, in the body frame of a level robot; used while the inertial unit gives nothing.
        s: state record with the fields of `leg_state_fields`, and `dt_s`, `reset`, `force_B_N` of the last tick.
        c: constants record with the fields of `leg_constant_fields`, and `sen_cross`.
    """
    read_base(inp, gravity, s, c)
    read_joints(inp, s, c)
    slope_joints(s, c)
    joint_motion(s, c)
    chain_step(s, c)
    dynamics_step(s, c)
    drive_step(inp, s, c)
