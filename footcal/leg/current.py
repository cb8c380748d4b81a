"""Compiled: motor current to joint torque, and what friction and rotors take of it; the drive model of every joint.

tau_m = ratio*Kt*(i - i0), no efficiency factor: losses are the load-dependent share of the friction,
tau_f = tanh(dq/v_s)*[tau_c + (tau_brk - tau_c)*exp(-(dq/v_st)^2) + mu*|tau_L|] + b_v*dq, with tau_L the load of the last tick.
The friction error is coloured: a stuck joint hides anything up to its limit, a moving one leaves a small share of it.
Friction, rotors and currents live on the actuators; M.T turns their torques into joint torques.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit

from footcal.leg.motion import STILL_AFTER_S


@njit(error_model="numpy")
def read_currents(inp: Any, s: Any) -> None:
    """Take new currents and motor temperatures, count the age of the others."""
    for j in range(s.leg_q.shape[0]):
        for k in range(s.leg_q.shape[1]):
            s.leg_current_age_s[j, k] += s.dt_s[0]
            s.leg_current_new[j, k] = 0
            reading = inp.current_A[j, k]
            if reading == reading:  # noqa: PLR0124
                s.leg_current_A[j, k] = reading
                s.leg_current_age_s[j, k] = 0.0
                s.leg_current_new[j, k] = 1
            temp = inp.motor_temp_C[j, k]
            if temp == temp:  # noqa: PLR0124
                s.leg_motor_C[j, k] = temp


@njit(error_model="numpy")
def varying_ratio(s: Any) -> None:
    """Ratio and its slope at the actuator angle: cubic Hermite between nodes, end values beyond them."""
    nodes = s.leg_ratio_0.shape[1]
    for j in range(s.leg_q.shape[0]):
        for k in range(s.leg_q.shape[1]):
            x = (s.leg_phi[j, k] - s.leg_node_0[j, k]) / s.leg_node_step[j, k]
            inside = x > 0.0 and x < nodes - 1.0
            x = min(max(x, 0.0), nodes - 1.0)
            i = min(int(x), nodes - 2)
            u = x - i
            y0, y1 = s.leg_ratio_0[j, i, k], s.leg_ratio_0[j, i + 1, k]
            d0, d1 = s.leg_ratio_1[j, i, k], s.leg_ratio_1[j, i + 1, k]
            c2 = 3.0 * (y1 - y0) - 2.0 * d0 - d1
            c3 = d0 + d1 - 2.0 * (y1 - y0)
            s.leg_ratio[j, k] = y0 + u * (d0 + u * (c2 + u * c3))
            s.leg_dratio[j, k] = (d0 + u * (2.0 * c2 + 3.0 * u * c3)) / s.leg_node_step[j, k] if inside else 0.0


@njit(error_model="numpy")
def load_torque(s: Any) -> None:
    """tau_L = D - J.T F with the force of the last tick, seen by the actuators: M^-T tau_L."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            s.leg_act[j, k] = (
                s.tau_rigid_Nm[j, k]
                - s.jac_B[0, j, k] * s.force_B_N[0, k]
                - s.jac_B[1, j, k] * s.force_B_N[1, k]
                - s.jac_B[2, j, k] * s.force_B_N[2, k]
            )
        for j in range(s.leg_q.shape[0]):
            load = 0.0
            for i in range(s.leg_q.shape[0]):
                load += s.leg_MinvT[j, i, k] * s.leg_act[i, k]
            s.leg_load[j, k] = load


@njit(error_model="numpy")
def actuator_torques(s: Any) -> None:
    """Per actuator: measured torque (leg_act), friction and rotor (leg_act2), variance of the friction error (leg_act3)."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            temp = s.leg_motor_C[j, k]
            warm = temp - s.leg_kt_C[j, k] if temp == temp else 0.0  # noqa: PLR0124
            arm = s.leg_ratio[j, k] * s.leg_kt[j, k] * (1.0 + s.leg_kt_per_K[j, k] * warm) * s.leg_enc_sign[j, k]
            measured = arm * (s.leg_current_A[j, k] - s.leg_i0[j, k])
            dphi = s.leg_dphi[j, k]
            limit = (
                s.leg_coulomb[j, k] + s.leg_extra[j, k] * s.leg_bump[j, k] + s.leg_share[j, k] * abs(s.leg_load[j, k])
            )
            moving = s.leg_grip[j, k]
            signed = moving if dphi >= 0.0 else -moving
            turned = s.leg_ratio[j, k] * s.leg_ddphi[j, k] + s.leg_dratio[j, k] * dphi * dphi
            rotor = s.leg_ratio[j, k] * s.leg_rotor[j, k] * turned
            stuck_sd = s.leg_stuck_sd[0] * limit
            moving_sd = s.leg_moving_sd[0] * limit
            kt_sd = s.leg_kt_u[j, k] * measured
            s.leg_act[j, k] = measured
            s.leg_act2[j, k] = signed * limit + s.leg_viscous[j, k] * dphi + rotor
            s.leg_act3[j, k] = (
                stuck_sd * stuck_sd + (moving_sd * moving_sd - stuck_sd * stuck_sd) * moving * moving + kt_sd * kt_sd
            )
            s.leg_load[j, k] = arm * s.leg_i_sd[j, k]


@njit(error_model="numpy")
def joint_torques(s: Any) -> None:
    """Turn actuator torques into joint torques by M.T; variances by the squares."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            measured = 0.0
            known = 0.0
            var = 0.0
            white = 0.0
            for i in range(s.leg_q.shape[0]):
                m = s.leg_M[i, j, k]
                measured += m * s.leg_act[i, k]
                known += m * s.leg_act2[i, k]
                var += m * m * s.leg_act3[i, k]
                white += m * m * s.leg_load[i, k] * s.leg_load[i, k]
            s.tau_meas_Nm[j, k] = measured
            s.tau_drive_Nm[j, k] = known
            s.fric_sd_Nm[j, k] = np.sqrt(var)
            s.tau_noise_Nm[j, k] = np.sqrt(white)
            s.fric_tau_s[j, k] = s.leg_fric_tau_s[0]
            s.tau_lag_s[j, k] = s.leg_lag_s[j, k]


@njit(error_model="numpy")
def freshness(s: Any) -> None:
    """Mark joint torques that rest on a new current and on angles that are not stale; age of the oldest reading used."""
    for k in range(s.leg_q.shape[1]):
        oldest = 0.0
        posture = 0.0
        for j in range(s.leg_q.shape[0]):
            if j < s.leg_joints[k]:
                posture = max(posture, s.leg_phi_age_s[j, k])
                oldest = max(oldest, s.leg_phi_age_s[j, k])
                if s.leg_motor[j, k] != 0:
                    oldest = max(oldest, s.leg_current_age_s[j, k])
        s.motor_age_s[k] = oldest
        for j in range(s.leg_q.shape[0]):
            any_new = 0
            complete = posture <= STILL_AFTER_S and j < s.leg_joints[k]
            for i in range(s.leg_q.shape[0]):
                if s.leg_M[i, j, k] != 0.0:
                    any_new |= s.leg_current_new[i, k]
                    if s.leg_motor[i, k] == 0 or s.leg_current_age_s[i, k] > STILL_AFTER_S:
                        complete = False
            s.tau_new[j, k] = any_new if complete else 0
