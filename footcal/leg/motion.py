"""Compiled: readings of joints and inertial unit held with their age, and their derivatives without lag.

A derivative is that of a first-order low-pass with first-order hold, d = (v - LP[v])/T, exact for a ramp at any sample
interval; d + lead*(d - LP[d]) has, at lead 1, no lag to first order. So accelerations, specific force and angles all belong
to the same instant. Source: elementary filter theory, worked out here.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit

STILL_AFTER_S = 0.05  # a joint not heard for longer is taken to stand still


@njit(error_model="numpy")
def read_joints(inp: Any, s: Any) -> None:
    """Take new encoder readings: actuator angle, speed and acceleration; count the age of the others.

    A reading without a speed gets one from the angle. The filter starts afresh after a reset or a long silence.
    """
    dt = s.dt_s[0]
    tau = s.leg_dq_tau_s[0]
    usual = np.exp(-dt / tau)
    for j in range(s.leg_phi.shape[0]):
        for k in range(s.leg_phi.shape[1]):
            age = s.leg_phi_age_s[j, k] + dt
            s.leg_phi_age_s[j, k] = age
            reading = inp.q_rad[j, k]
            s.leg_gap_s[j, k] = 0.0
            if reading == reading:  # noqa: PLR0124
                phi = s.leg_enc_sign[j, k] * (reading - s.leg_enc_off[j, k])
                speed = s.leg_enc_sign[j, k] * inp.dq_rad_per_s[j, k]
                if s.reset[0] != 0 or not (age > 0.0 and age <= STILL_AFTER_S):
                    s.leg_on[j, k] = 0
                if not speed == speed:  # noqa: PLR0124, SIM201
                    speed = (phi - s.leg_phi[j, k]) / age if s.leg_on[j, k] != 0 else 0.0
                s.leg_gap_s[j, k] = age if age > 0.0 else 1.0
                s.leg_decay[j, k] = usual if age == dt else np.exp(-age / tau)
                s.leg_phi[j, k] = phi
                s.leg_act[j, k] = speed
                s.leg_phi_age_s[j, k] = 0.0
            elif age > STILL_AFTER_S:
                s.leg_dphi[j, k] = 0.0
                s.leg_ddphi[j, k] = 0.0


@njit(error_model="numpy")
def slope_joints(s: Any) -> None:
    """Advance the derivative filter of every joint that was read."""
    tau = s.leg_dq_tau_s[0]
    for j in range(s.leg_phi.shape[0]):
        for k in range(s.leg_phi.shape[1]):
            if s.leg_gap_s[j, k] > 0.0:
                v = s.leg_act[j, k]
                if s.leg_on[j, k] == 0:
                    s.leg_on[j, k] = 1
                    s.leg_lp[j, k] = v
                    s.leg_slope[j, k] = 0.0
                    s.leg_slope_lp[j, k] = 0.0
                    s.leg_ddphi[j, k] = 0.0
                else:
                    a = s.leg_decay[j, k]
                    share = (1.0 - a) * tau / s.leg_gap_s[j, k]
                    lp = a * s.leg_lp[j, k] + (1.0 - share) * v + (share - a) * s.leg_dphi[j, k]
                    slope = (v - lp) / tau
                    late = a * s.leg_slope_lp[j, k] + (1.0 - share) * slope + (share - a) * s.leg_slope[j, k]
                    s.leg_lp[j, k] = lp
                    s.leg_slope[j, k] = slope
                    s.leg_slope_lp[j, k] = late
                    s.leg_ddphi[j, k] = slope + s.leg_lead[0] * (slope - late)
                s.leg_dphi[j, k] = v


@njit(error_model="numpy")
def joint_motion(s: Any) -> None:
    """Turn actuator angles, speeds and accelerations into those of the joints: q = M^-1 phi."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            q = 0.0
            dq = 0.0
            ddq = 0.0
            for i in range(s.leg_q.shape[0]):
                m = s.leg_Minv[j, i, k]
                q += m * s.leg_phi[i, k]
                dq += m * s.leg_dphi[i, k]
                ddq += m * s.leg_ddphi[i, k]
            s.leg_q[j, k] = q
            s.leg_dq[j, k] = dq
            s.leg_ddq[j, k] = ddq


@njit(error_model="numpy")
def read_base(inp: Any, gravity: Any, s: Any) -> None:
    """Take the inertial unit: angular rate, angular acceleration, and specific force moved to the body origin.

    f at the origin = f at the unit - dw x r - w x (w x r). A unit that gives nothing leaves a body at rest: level, or as
    its attitude says.
    """
    dt = s.dt_s[0]
    s.leg_gyro_age_s[0] += dt
    s.leg_accel_age_s[0] += dt
    R = s.leg_imu_R
    gx, gy, gz = inp.gyro_rad_per_s[0], inp.gyro_rad_per_s[1], inp.gyro_rad_per_s[2]
    if gx + gy + gz == gx + gy + gz:  # noqa: PLR0124
        _slope_base(s.leg_gyro_age_s[0], gx, gy, gz, s)
        s.leg_gyro_age_s[0] = 0.0
    elif s.leg_gyro_age_s[0] > STILL_AFTER_S:
        for i in range(3):
            s.leg_w[i] = 0.0
            s.leg_dw[i] = 0.0
        s.leg_gyro_on[0] = 0
    ax, ay, az = inp.accel_m_per_s2[0], inp.accel_m_per_s2[1], inp.accel_m_per_s2[2]
    if ax + ay + az == ax + ay + az:  # noqa: PLR0124
        for i in range(3):
            s.leg_accel_I[i] = R[i, 0] * ax + R[i, 1] * ay + R[i, 2] * az
        s.leg_accel_age_s[0] = 0.0
    if inp.quat_WB[0] == inp.quat_WB[0]:  # noqa: PLR0124
        for i in range(4):
            s.leg_quat[i] = inp.quat_WB[i]
    if s.leg_accel_age_s[0] > STILL_AFTER_S:
        _force_at_rest(gravity, s)
    else:
        _move_to_origin(s)


@njit(error_model="numpy")
def _slope_base(gap: float, gx: float, gy: float, gz: float, s: Any) -> None:
    tau = s.leg_w_tau_s[0]
    a = np.exp(-gap / tau)
    share = (1.0 - a) * tau / gap
    starts = s.reset[0] != 0 or s.leg_gyro_on[0] == 0 or not (gap > 0.0 and gap <= STILL_AFTER_S)
    for i in range(3):
        w = s.leg_imu_R[i, 0] * gx + s.leg_imu_R[i, 1] * gy + s.leg_imu_R[i, 2] * gz
        if starts:
            s.leg_w_lp[i] = w
            s.leg_w_slope[i] = 0.0
            s.leg_w_slope_lp[i] = 0.0
            s.leg_dw[i] = 0.0
        else:
            lp = a * s.leg_w_lp[i] + (1.0 - share) * w + (share - a) * s.leg_w[i]
            slope = (w - lp) / tau
            late = a * s.leg_w_slope_lp[i] + (1.0 - share) * slope + (share - a) * s.leg_w_slope[i]
            s.leg_w_lp[i] = lp
            s.leg_w_slope[i] = slope
            s.leg_w_slope_lp[i] = late
            s.leg_dw[i] = slope + s.leg_lead[0] * (slope - late)
        s.leg_w[i] = w
    s.leg_gyro_on[0] = 1


@njit(error_model="numpy")
def _move_to_origin(s: Any) -> None:
    rx, ry, rz = s.leg_imu_p[0], s.leg_imu_p[1], s.leg_imu_p[2]
    wx, wy, wz = s.leg_w[0], s.leg_w[1], s.leg_w[2]
    ux, uy, uz = s.leg_dw[0], s.leg_dw[1], s.leg_dw[2]
    vx, vy, vz = wy * rz - wz * ry, wz * rx - wx * rz, wx * ry - wy * rx
    s.leg_f[0] = s.leg_accel_I[0] - (uy * rz - uz * ry) - (wy * vz - wz * vy)
    s.leg_f[1] = s.leg_accel_I[1] - (uz * rx - ux * rz) - (wz * vx - wx * vz)
    s.leg_f[2] = s.leg_accel_I[2] - (ux * ry - uy * rx) - (wx * vy - wy * vx)


@njit(error_model="numpy")
def _force_at_rest(gravity: Any, s: Any) -> None:
    w, x, y, z = s.leg_quat[0], s.leg_quat[1], s.leg_quat[2], s.leg_quat[3]
    norm = w * w + x * x + y * y + z * z
    for i in range(3):
        s.leg_f[i] = -gravity[i]
    if norm > 0.5:  # false for NaN
        up = -gravity[2] / norm  # the W z axis seen in B is the last row of R_WB
        s.leg_f[0] = up * 2.0 * (x * z - w * y)
        s.leg_f[1] = up * 2.0 * (y * z + w * x)
        s.leg_f[2] = up * (w * w - x * x - y * y + z * z)
