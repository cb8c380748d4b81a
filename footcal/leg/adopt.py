"""Compiled: copies the constants of the legs into the state record, once after the start and after each reset."""

from __future__ import annotations

from typing import Any

from numba import njit


@njit(error_model="numpy")
def adopt(s: Any, c: Any) -> None:
    """Take over every field of `leg_constant_fields`, and the sensitive direction of each sensor."""
    adopt_joints(s, c)
    adopt_drives(s, c)
    adopt_ratios(s, c)
    adopt_feet(s, c)
    s.leg_ready[0] = 1


@njit(error_model="numpy")
def adopt_joints(s: Any, c: Any) -> None:
    """Chains and links."""
    for j in range(s.leg_q.shape[0]):
        for k in range(s.leg_q.shape[1]):
            for i in range(9):
                s.leg_R0[i, j, k] = c.leg_R0[i, j, k]
            for i in range(6):
                s.leg_inertia[i, j, k] = c.leg_inertia[i, j, k]
            for i in range(3):
                s.leg_p0[i, j, k] = c.leg_p0[i, j, k]
                s.leg_axis[i, j, k] = c.leg_axis[i, j, k]
                s.leg_com[i, j, k] = c.leg_com[i, j, k]
            s.leg_mass[j, k] = c.leg_mass[j, k]
            s.leg_enc_sign[j, k] = c.leg_enc_sign[j, k]
            s.leg_enc_off[j, k] = c.leg_enc_off[j, k]
            for i in range(s.leg_q.shape[0]):
                s.leg_M[j, i, k] = c.leg_M[j, i, k]
                s.leg_Minv[j, i, k] = c.leg_Minv[j, i, k]
                s.leg_MinvT[j, i, k] = c.leg_MinvT[j, i, k]


@njit(error_model="numpy")
def adopt_drives(s: Any, c: Any) -> None:
    """Motors and friction."""
    for j in range(s.leg_q.shape[0]):
        for k in range(s.leg_q.shape[1]):
            s.leg_motor[j, k] = c.leg_motor[j, k]
            s.leg_kt[j, k] = c.leg_kt[j, k]
            s.leg_kt_per_K[j, k] = c.leg_kt_per_K[j, k]
            s.leg_kt_C[j, k] = c.leg_kt_C[j, k]
            s.leg_kt_u[j, k] = c.leg_kt_u[j, k]
            s.leg_rotor[j, k] = c.leg_rotor[j, k]
            s.leg_i0[j, k] = c.leg_i0[j, k]
            s.leg_i_sd[j, k] = c.leg_i_sd[j, k]
            s.leg_coulomb[j, k] = c.leg_coulomb[j, k]
            s.leg_extra[j, k] = c.leg_extra[j, k]
            s.leg_stribeck[j, k] = c.leg_stribeck[j, k]
            s.leg_viscous[j, k] = c.leg_viscous[j, k]
            s.leg_share[j, k] = c.leg_share[j, k]
            s.leg_lag_s[j, k] = c.leg_lag_s[j, k]
    s.leg_unstick[0] = c.leg_unstick[0]
    s.leg_stuck_sd[0] = c.leg_stuck_sd[0]
    s.leg_moving_sd[0] = c.leg_moving_sd[0]
    s.leg_fric_tau_s[0] = c.leg_fric_tau_s[0]
    s.leg_dq_tau_s[0] = c.leg_dq_tau_s[0]
    s.leg_w_tau_s[0] = c.leg_w_tau_s[0]
    s.leg_lead[0] = c.leg_lead[0]


@njit(error_model="numpy")
def adopt_ratios(s: Any, c: Any) -> None:
    """Transmissions."""
    s.leg_varies[0] = c.leg_varies[0]
    for j in range(s.leg_q.shape[0]):
        for k in range(s.leg_q.shape[1]):
            s.leg_node_0[j, k] = c.leg_node_0[j, k]
            s.leg_node_step[j, k] = c.leg_node_step[j, k]
            s.leg_ratio[j, k] = c.leg_ratio_0[j, 0, k]
            s.leg_dratio[j, k] = 0.0
            for i in range(c.leg_ratio_0.shape[1]):
                s.leg_ratio_0[j, i, k] = c.leg_ratio_0[j, i, k]
                s.leg_ratio_1[j, i, k] = c.leg_ratio_1[j, i, k]


@njit(error_model="numpy")
def adopt_feet(s: Any, c: Any) -> None:
    """Feet, sensors and the inertial unit; h = sensor axis + cx * sensor x + cy * sensor y."""
    for k in range(s.leg_q.shape[1]):
        s.leg_joints[k] = c.leg_joints[k]
        s.leg_distal_kg[k] = c.leg_distal_kg[k]
        for i in range(3):
            s.leg_foot[i, k] = c.leg_foot[i, k]
            s.leg_distal[i, k] = c.leg_distal[i, k]
            s.leg_h[i, k] = (
                c.leg_sensor[2, i, k]
                + c.sen_cross[0, k] * c.leg_sensor[0, i, k]
                + c.sen_cross[1, k] * c.leg_sensor[1, i, k]
            )
    for i in range(3):
        s.leg_imu_p[i] = c.leg_imu_p[i]
        for j in range(3):
            s.leg_imu_R[i, j] = c.leg_imu_R[i, j]
