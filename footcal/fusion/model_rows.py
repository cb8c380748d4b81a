"""The model of one tick, written into work rows: how each mode carries the state on, and what each reading sees."""

from __future__ import annotations

from typing import Any

from numba import njit
from numpy import exp, sqrt

OFF = 1e18  # variance of a reading that says nothing, in N^2 or (N m)^2


@njit(error_model="numpy")
def upright(inp: Any, gravity: Any, s: Any) -> None:
    """World vertical in the body frame: third row of R_WB; from `gravity` of a level robot without an attitude."""
    w, x, y, z = inp.quat_WB[0], inp.quat_WB[1], inp.quat_WB[2], inp.quat_WB[3]
    size = w * w + x * x + y * y + z * z
    up = s.fil_up_B
    if size > 0.0:  # false for NaN too
        up[0] = 2.0 * (x * z - w * y) / size
        up[1] = 2.0 * (y * z + w * x) / size
        up[2] = (w * w - x * x - y * y + z * z) / size
    elif up[0] * up[0] + up[1] * up[1] + up[2] * up[2] < 0.5:  # never had one
        g = sqrt(gravity[0] * gravity[0] + gravity[1] * gravity[1] + gravity[2] * gravity[2])
        for i in range(3):
            up[i] = -gravity[i] / g


@njit(error_model="numpy")
def readings(s: Any, c: Any) -> None:
    """Reading of each leg and its variance, before health has its say; what gives nothing new gets variance OFF."""
    legs = s.axial_N.shape[0]
    joints = s.tau_new.shape[0]
    dt = s.dt_s[0]
    fade = exp(-dt / c.fil_timing_tau_s[0])
    rate = c.fil_axial_timing_s[0] / dt if dt > 0.0 and s.reset[0] == 0 else 0.0
    for l in range(legs):
        s.fil_shake_N[l] = max(fade * s.fil_shake_N[l], rate * abs(s.axial_inertia_N[l] - s.fil_inertia_N[l]))
        s.fil_inertia_N[l] = s.axial_inertia_N[l]
        u = s.axial_u_N[l]
        noise_N2 = min(c.sen_u_noise_N[l] ** 2, u * u)  # white; the rest of the calibration's variance is mostly slow
        slow = c.fil_e_part[0] * (u * u - noise_N2)
        unloaded = c.sen_unload_share[l] * s.fil_peak_N[l]
        s.fil_e_sd_N[l] = c.fil_e_min_N[0]
        s.fil_read_N[l] = 0.0
        s.fil_read_N2[l] = OFF
        if slow >= 0.0:  # false for NaN: never had a reading
            s.fil_e_sd_N[l] = sqrt(slow + unloaded * unloaded + c.fil_e_min_N[0] ** 2)
            if s.axial_new[l] == 1:
                s.fil_read_N[l] = s.axial_N[l] - s.axial_inertia_N[l] - s.fil_zero_N[l] - c.fil_hang_zero_N[l]
                s.fil_read_N2[l] = u * u - slow + c.fil_read_min_N[0] ** 2 + s.fil_shake_N[l] ** 2
        for k in range(joints):
            s.fil_tau_Nm2[k, l] = OFF
            if s.tau_new[k, l] == 1 and c.fil_joint[k, l] > 0.0:
                s.fil_tau_Nm2[k, l] = s.tau_noise_Nm[k, l] ** 2


@njit(error_model="numpy")
def _force_rows(s: Any, c: Any) -> None:
    dt = s.dt_s[0]
    legs = s.axial_N.shape[0]
    up = s.fil_up_B
    a_swing = exp(-dt / c.fil_swing_tau_s[0])
    a_moving = exp(-dt / c.fil_moving_tau_s[0])
    swing_N2 = c.fil_swing_sd_N[0] ** 2 * (1.0 - a_swing * a_swing)
    quiet_up, quiet_side = dt * c.fil_quiet_up_N[0] ** 2, dt * c.fil_quiet_side_N[0] ** 2
    moving = 1.0 - a_moving * a_moving
    moving_up, moving_side = moving * c.fil_moving_up_N[0] ** 2, moving * c.fil_moving_side_N[0] ** 2
    for l in range(legs):
        s.fil_force_keep[l], s.fil_force_keep[legs + l], s.fil_force_keep[2 * legs + l] = a_swing, 1.0, a_moving
        for i in range(3):
            s.fil_force_in[i, l] = 0.0
            s.fil_force_in[i, legs + l] = 0.0
            s.fil_force_in[i, 2 * legs + l] = (1.0 - a_moving) * c.fil_moving_mean_N[0] * up[i]
            for j in range(3):
                if j <= i:
                    p = i * (i + 1) // 2 + j
                    same = 1.0 if i == j else 0.0
                    both = up[i] * up[j]
                    s.fil_force_q[p, l] = swing_N2 * same
                    s.fil_force_q[p, legs + l] = quiet_side * same + (quiet_up - quiet_side) * both
                    s.fil_force_q[p, 2 * legs + l] = moving_side * same + (moving_up - moving_side) * both


@njit(error_model="numpy")
def _timing_rows(s: Any, c: Any) -> None:
    """Process noise of the motor torques: a sharp change of what the model asks for may come some ms early or late.

    Impacts and turning joints change inertia and friction torques within some ms, and the derivative filters behind
    them know the instant no better; without this term each touchdown leaves a side force that is not there.
    """
    dt = s.dt_s[0]
    legs = s.axial_N.shape[0]
    joints = s.tau_new.shape[0]
    fade = exp(-dt / c.fil_timing_tau_s[0])
    rate = c.fil_timing_s[0] / dt if dt > 0.0 and s.reset[0] == 0 else 0.0
    for k in range(joints):
        for l in range(legs):
            asked = s.tau_rigid_Nm[k, l] + s.tau_drive_Nm[k, l]
            jitter = max(fade * s.fil_jitter_Nm[k, l], rate * abs(asked - s.fil_asked_Nm[k, l]))
            s.fil_jitter_Nm[k, l] = jitter
            s.fil_asked_Nm[k, l] = asked
            for mode in range(3):
                f = mode * legs + l
                s.fil_tau_q[k, f] = (s.fil_lag[k, f] * jitter) ** 2


@njit(error_model="numpy")
def _joint_rows(s: Any) -> None:
    dt = s.dt_s[0]
    legs = s.axial_N.shape[0]
    joints = s.tau_new.shape[0]
    for k in range(joints):
        for l in range(legs):
            lag = 1.0
            if s.tau_lag_s[k, l] > 0.0:
                lag = 1.0 - exp(-dt / s.tau_lag_s[k, l])
            keep = 0.0
            if s.fric_tau_s[k, l] > 0.0:
                keep = exp(-dt / s.fric_tau_s[k, l])
            for mode in range(3):
                s.fil_lag[k, mode * legs + l] = lag
                s.fil_fric_keep[k, mode * legs + l] = keep
    for k in range(joints):
        for mode in range(3):
            for l in range(legs):
                f = mode * legs + l
                keep = s.fil_fric_keep[k, f]
                s.fil_fric_q[k, f] = s.fric_sd_Nm[k, l] ** 2 * (1.0 - keep * keep)
                s.fil_tau_in[k, f] = s.tau_rigid_Nm[k, l] + s.tau_drive_Nm[k, l]
                s.fil_z_tau[k, f] = s.tau_meas_Nm[k, l] if s.fil_tau_Nm2[k, l] < OFF else 0.0
                s.fil_r_tau[k, f] = s.fil_tau_Nm2[k, l]
                for i in range(3):
                    s.fil_jac[i, k, f] = s.jac_B[i, k, l]


@njit(error_model="numpy")
def _sensor_rows(s: Any, c: Any) -> None:
    legs = s.axial_N.shape[0]
    keep = exp(-s.dt_s[0] / c.fil_e_tau_s[0])
    for mode in range(3):
        for l in range(legs):
            f = mode * legs + l
            s.fil_e_keep[f] = keep
            s.fil_e_q[f] = s.fil_e_sd_N[l] ** 2 * (1.0 - keep * keep)
            s.fil_z_axial[f] = s.fil_read_N[l]
            s.fil_r_axial[f] = s.fil_read_N2[l]
            for i in range(3):
                s.fil_h[i, f] = s.axis_B[i, l]


@njit(error_model="numpy", inline="always")
def model_rows(s: Any, c: Any) -> None:
    """Write all work rows of the tick from the shared leg fields, the attitude and the trusted readings."""
    _force_rows(s, c)
    _joint_rows(s)
    _timing_rows(s, c)
    _sensor_rows(s, c)


@njit(error_model="numpy")
def fresh_filter(s: Any, c: Any) -> None:
    """Start all filters anew: nothing known of contact, forces at each mode's prior, torques open."""
    legs = s.axial_N.shape[0]
    joints = s.tau_new.shape[0]
    n = s.fil_x.shape[0]
    up = s.fil_up_B
    for f in range(3 * legs):
        l = f % legs
        stance = 0.0 if f < legs else 1.0
        s.fil_mu[f] = 0.5 if f < legs else 0.25
        s.fil_cbar[f] = s.fil_mu[f]
        for p in range(s.fil_P.shape[0]):
            s.fil_P[p, f] = 0.0
        for i in range(n):
            s.fil_x[i, f] = 0.0
        for i in range(3):
            s.fil_x[i, f] = stance * c.fil_moving_mean_N[0] * up[i]
            for j in range(3):
                if j <= i:
                    spread = (c.fil_moving_up_N[0] ** 2 - c.fil_moving_side_N[0] ** 2) * up[i] * up[j]
                    level = c.fil_moving_side_N[0] ** 2 * stance + c.fil_swing_sd_N[0] ** 2 * (1.0 - stance)
                    s.fil_P[i * (i + 1) // 2 + j, f] = stance * spread + (level if i == j else 0.0)
        for k in range(joints):
            b, m = 3 + k, 3 + joints + k
            s.fil_x[m, f] = s.tau_rigid_Nm[k, l] + s.tau_drive_Nm[k, l]
            s.fil_P[b * (b + 1) // 2 + b, f] = s.fric_sd_Nm[k, l] ** 2
            s.fil_P[m * (m + 1) // 2 + m, f] = c.fil_start_Nm[0] ** 2 * c.fil_joint[k, l] + 1e-12
        s.fil_P[n * (n + 1) // 2 - 1, f] = s.fil_e_sd_N[l] ** 2
