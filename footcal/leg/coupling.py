"""Compiled: legs whose actuators turn several joints (a belt along the thigh): angles by M^-1, torques by M.T.

Actuator angles = M @ joint angles. Friction, rotors and currents belong to the actuators; the filter works in joint
space.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from footcal.leg.compiled import inner


@inner
def couple_motion(s: Any) -> None:
    """Q = M^-1 phi, and so for speeds and accelerations."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            q, dq, ddq = 0.0, 0.0, 0.0
            for i in range(s.leg_q.shape[0]):
                m = s.leg_M[1, j, i, k]
                q += m * s.leg_phi[i, k]
                dq += m * s.leg_dphi[i, k]
                ddq += m * s.leg_ddphi[i, k]
            s.leg_q[j, k], s.leg_dq[j, k], s.leg_ddq[j, k] = q, dq, ddq
            s.leg_sin[j, k], s.leg_cos[j, k] = np.sin(q), np.cos(q)


@inner
def couple_load(s: Any) -> None:
    """The load as the actuators feel it: M^-T tau_L."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            s.leg_act[0, j, k] = s.leg_load[j, k]
        for j in range(s.leg_q.shape[0]):
            load = 0.0
            for i in range(s.leg_q.shape[0]):
                load += s.leg_M[1, i, j, k] * s.leg_act[0, i, k]
            s.leg_load[j, k] = load


@inner
def couple_torques(s: Any) -> None:
    """Joint torques M.T tau; variances by the squares; new where any current it rests on is new and none is missing."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            s.leg_act[0, j, k] = s.tau_meas_Nm[j, k]
            s.leg_act[1, j, k] = s.tau_drive_Nm[j, k]
            s.leg_act[2, j, k] = s.fric_sd_Nm[j, k] ** 2
            s.leg_act[3, j, k] = s.tau_noise_Nm[j, k] ** 2
            s.leg_act[4, j, k] = s.tau_lag_s[j, k]
        for j in range(s.leg_q.shape[0]):
            measured, drive, var, white, lag_s, weight = 0.0, 0.0, 0.0, 0.0, 0.0, 0.0
            new, complete = 0, 1
            for i in range(s.leg_q.shape[0]):
                m = s.leg_M[0, i, j, k]
                if m != 0.0:
                    measured += m * s.leg_act[0, i, k]
                    drive += m * s.leg_act[1, i, k]
                    var += m * m * s.leg_act[2, i, k]
                    white += m * m * s.leg_act[3, i, k]
                    lag_s += abs(m) * s.leg_act[4, i, k]
                    weight += abs(m)
                    new |= s.leg_current_new[i, k]
                    complete &= 1 if s.leg_known[i, k] > 0.0 else 0
            s.tau_meas_Nm[j, k], s.tau_drive_Nm[j, k] = measured, drive
            s.fric_sd_Nm[j, k], s.tau_noise_Nm[j, k] = np.sqrt(var), np.sqrt(white)
            s.tau_lag_s[j, k] = lag_s / weight if weight > 0.0 else 0.0
            s.tau_new[j, k] = new * complete
