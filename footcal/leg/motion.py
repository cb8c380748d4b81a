"""Compiled: readings of joints and inertial unit held with their age, and their derivatives without lag.

A derivative is that of a first-order low-pass with first-order hold, d = (v - LP[v])/T, exact for a ramp at any sample
interval; d + lead*(d - LP[d]) has, at lead 1, no lag to first order. So accelerations, specific force and angles all
belong to the same instant. Source: elementary filter theory, worked out here.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from footcal.leg.compiled import inner
from footcal.leg.elementary import HALF_PI_HIGH, HALF_PI_LOW, TWO_OVER_PI, cosine_of_rest, falling, sine_of_rest
from footcal.leg.fields import DQ_TAU_S, ENC_OFF, ENC_SIGN, HERE, LEAD, STRIBECK, UNSTICK, W_TAU_S

STILL_AFTER_S = 0.05  # a joint not heard for longer is taken to stand still


@inner
def read_joints(inp: Any, s: Any) -> None:
    """Take new encoder readings: actuator angle and speed; count the age of the others.

    A reading without a speed gets one from the angle. The derivative starts afresh after a reset or a long silence.
    """
    dt = s.dt_s[0]
    tau = s.leg_set[DQ_TAU_S]
    usual = np.exp(-dt / tau)
    for k in range(s.leg_q.shape[1]):
        worst = 0.0
        for j in range(s.leg_q.shape[0]):
            age = s.leg_phi_age_s[j, k] + dt
            reading = inp.q_rad[j, k]
            s.leg_gap_s[j, k] = 0.0
            if reading == reading:  # noqa: PLR0124
                sign = s.leg_drive[ENC_SIGN, j, k]
                phi = sign * (reading - s.leg_drive[ENC_OFF, j, k])
                speed = sign * inp.dq_rad_per_s[j, k]
                starts = s.reset[0] != 0 or not (age > 0.0 and age <= STILL_AFTER_S)
                if not speed == speed:  # noqa: PLR0124, SIM201
                    speed = 0.0 if starts else (phi - s.leg_phi[j, k]) / age
                s.leg_starts[j, k] = 1.0 if starts else 0.0
                s.leg_gap_s[j, k] = 1.0 if starts else age
                s.leg_decay[j, k] = usual if age == dt else np.exp(-age / tau)
                s.leg_phi[j, k] = phi
                s.leg_speed[j, k] = speed
                age = 0.0
            elif age > STILL_AFTER_S:
                s.leg_dphi[j, k] = 0.0
                s.leg_ddphi[j, k] = 0.0
            s.leg_phi_age_s[j, k] = age
            if s.leg_drive[HERE, j, k] > 0.0:
                worst = max(worst, age)
        for j in range(s.leg_q.shape[0]):
            s.leg_worst_s[j, k] = worst


@inner
def move_joint(s: Any, j: int) -> None:
    """Advance the derivative of joint j where it was read; sine, cosine, |tanh(speed/stuck speed)| and Stribeck's bump.

    Joints are taken as uncoupled, see `coupling`. One loop for all: a shorter one is unrolled and gives no vector; and
    what does not move with j is read before the loop, as it would stop the vector too.
    """
    tau, lead, unstick = s.leg_set[DQ_TAU_S], s.leg_set[LEAD], s.leg_set[UNSTICK]
    for k in range(s.leg_q.shape[1]):
        gap = s.leg_gap_s[j, k]
        starts = s.leg_starts[j, k]
        v = s.leg_speed[j, k]
        a = s.leg_decay[j, k]
        share = (1.0 - a) * tau / gap
        lp = a * s.leg_lp[j, k] + (1.0 - share) * v + (share - a) * s.leg_dphi[j, k]
        lp = v if starts > 0.0 else lp
        slope = (v - lp) / tau
        late = a * s.leg_slope_lp[j, k] + (1.0 - share) * slope + (share - a) * s.leg_slope[j, k]
        late = 0.0 if starts > 0.0 else late
        s.leg_lp[j, k] = lp if gap > 0.0 else s.leg_lp[j, k]
        s.leg_slope[j, k] = slope if gap > 0.0 else s.leg_slope[j, k]
        s.leg_slope_lp[j, k] = late if gap > 0.0 else s.leg_slope_lp[j, k]
        dphi = v if gap > 0.0 else s.leg_dphi[j, k]
        ddphi = slope + lead * (slope - late) if gap > 0.0 else s.leg_ddphi[j, k]
        s.leg_dphi[j, k] = dphi
        s.leg_ddphi[j, k] = ddphi
        s.leg_q[j, k] = s.leg_phi[j, k]
        s.leg_dq[j, k] = dphi
        s.leg_ddq[j, k] = ddphi
        turns = np.floor(s.leg_phi[j, k] * TWO_OVER_PI + 0.5)  # quarter turns
        rest = (s.leg_phi[j, k] - turns * HALF_PI_HIGH) - turns * HALF_PI_LOW
        sine, cosine = sine_of_rest(rest), cosine_of_rest(rest)
        half = np.floor(0.5 * turns)
        odd = turns - 2.0 * half  # 0 or 1
        sign = 1.0 - 2.0 * (half - 2.0 * np.floor(0.5 * half))
        s.leg_sin[j, k] = sign * (sine + odd * (cosine - sine))
        s.leg_cos[j, k] = sign * (cosine - odd * (cosine + sine))
        e = falling(2.0 * abs(dphi) * unstick)
        s.leg_grip[j, k] = (1.0 - e) / (1.0 + e)
        x = dphi * s.leg_drive[STRIBECK, j, k]
        s.leg_bump[j, k] = falling(x * x)


@inner
def read_base(inp: Any, gravity: Any, s: Any) -> None:
    """Take the inertial unit: angular rate, angular acceleration, and specific force moved to the body origin.

    f at the origin = f at the unit - dw x r - w x (w x r). A unit that gives nothing leaves a body at rest: level, or
    as its attitude says.
    """
    dt = s.dt_s[0]
    s.leg_gyro_age_s[0] += dt
    s.leg_accel_age_s[0] += dt
    R = s.leg_imu
    gx, gy, gz = inp.gyro_rad_per_s[0], inp.gyro_rad_per_s[1], inp.gyro_rad_per_s[2]
    if gx + gy + gz == gx + gy + gz:
        _slope_base(s.leg_gyro_age_s[0], gx, gy, gz, s)
        s.leg_gyro_age_s[0] = 0.0
    elif s.leg_gyro_age_s[0] > STILL_AFTER_S:
        for i in range(3):
            s.leg_w[i] = 0.0
            s.leg_dw[i] = 0.0
        s.leg_gyro_on[0] = 0
    ax, ay, az = inp.accel_m_per_s2[0], inp.accel_m_per_s2[1], inp.accel_m_per_s2[2]
    if ax + ay + az == ax + ay + az:
        for i in range(3):
            s.leg_accel_I[i] = R[3 * i] * ax + R[3 * i + 1] * ay + R[3 * i + 2] * az
        s.leg_accel_age_s[0] = 0.0
    if inp.quat_WB[0] == inp.quat_WB[0]:
        for i in range(4):
            s.leg_quat[i] = inp.quat_WB[i]
    if s.leg_accel_age_s[0] > STILL_AFTER_S:
        _force_at_rest(gravity, s)
    else:
        _move_to_origin(s)


@inner
def _slope_base(gap: float, gx: float, gy: float, gz: float, s: Any) -> None:
    tau = s.leg_set[W_TAU_S]
    a = np.exp(-gap / tau)
    share = (1.0 - a) * tau / gap
    starts = s.reset[0] != 0 or s.leg_gyro_on[0] == 0 or not (gap > 0.0 and gap <= STILL_AFTER_S)
    for i in range(3):
        w = s.leg_imu[3 * i] * gx + s.leg_imu[3 * i + 1] * gy + s.leg_imu[3 * i + 2] * gz
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
            s.leg_dw[i] = slope + s.leg_set[LEAD] * (slope - late)
        s.leg_w[i] = w
    s.leg_gyro_on[0] = 1


@inner
def _move_to_origin(s: Any) -> None:
    rx, ry, rz = s.leg_imu[9], s.leg_imu[10], s.leg_imu[11]
    wx, wy, wz = s.leg_w[0], s.leg_w[1], s.leg_w[2]
    ux, uy, uz = s.leg_dw[0], s.leg_dw[1], s.leg_dw[2]
    vx, vy, vz = wy * rz - wz * ry, wz * rx - wx * rz, wx * ry - wy * rx
    s.leg_f[0] = s.leg_accel_I[0] - (uy * rz - uz * ry) - (wy * vz - wz * vy)
    s.leg_f[1] = s.leg_accel_I[1] - (uz * rx - ux * rz) - (wz * vx - wx * vz)
    s.leg_f[2] = s.leg_accel_I[2] - (ux * ry - uy * rx) - (wx * vy - wy * vx)


@inner
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
