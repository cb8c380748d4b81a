"""Compiled: motor current to joint torque, and what friction and rotors take of it; the drive model of every joint.

tau_m = ratio*Kt*(i - i0), no efficiency factor: losses are the load-dependent share of the friction,
tau_f = tanh(dq/v_s)*[tau_c + (tau_brk - tau_c)*exp(-(dq/v_st)^2) + mu*|tau_L|] + b_v*dq, with tau_L the load of the
last tick. The friction error is coloured: a stuck joint hides anything up to its limit, a moving one leaves a small
share of it.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from footcal.leg.compiled import inner
from footcal.leg.fields import (
    COULOMB,
    CURRENT_0,
    CURRENT_SD,
    ENC_SIGN,
    EXTRA,
    FRIC_TAU_S,
    HAS_MOTOR,
    HERE,
    KT,
    KT_C,
    KT_PER_K,
    KT_U,
    LAG_S,
    MOVING_SD,
    NODE_0,
    NODE_STEP,
    ROTOR,
    SHARE,
    STUCK_SD,
    VISCOUS,
)
from footcal.leg.motion import STILL_AFTER_S


@inner
def read_currents(inp: Any, s: Any) -> None:
    """Take new currents and motor temperatures, count the age of the others; age of the oldest reading of each leg."""
    for k in range(s.leg_q.shape[1]):
        oldest = 0.0
        for j in range(s.leg_q.shape[0]):
            age = s.leg_current_age_s[j, k] + s.dt_s[0]
            reading = inp.current_A[j, k]
            new = reading == reading  # noqa: PLR0124
            if new:
                s.leg_current_A[j, k] = reading
                age = 0.0
            s.leg_current_age_s[j, k] = age
            s.leg_current_new[j, k] = 1 if new else 0
            temp = inp.motor_temp_C[j, k]
            if temp == temp:  # noqa: PLR0124
                s.leg_motor_C[j, k] = temp
            if s.leg_drive[HAS_MOTOR, j, k] > 0.0:
                oldest = max(oldest, age)
        s.motor_age_s[k] = max(oldest, s.leg_worst_s[0, k])


@inner
def varying_ratio(s: Any) -> None:
    """Ratio and its slope at the actuator angle: cubic Hermite between nodes, end values beyond them."""
    nodes = s.leg_nodes.shape[1]
    for j in range(s.leg_q.shape[0]):
        for k in range(s.leg_q.shape[1]):
            x = (s.leg_phi[j, k] - s.leg_drive[NODE_0, j, k]) / s.leg_drive[NODE_STEP, j, k]
            inside = x > 0.0 and x < nodes - 1.0
            x = min(max(x, 0.0), nodes - 1.0)
            i = min(int(x), nodes - 2)
            u = x - i
            y0, y1 = s.leg_nodes[0, i, j, k], s.leg_nodes[0, i + 1, j, k]
            d0, d1 = s.leg_nodes[1, i, j, k], s.leg_nodes[1, i + 1, j, k]
            c2 = 3.0 * (y1 - y0) - 2.0 * d0 - d1
            c3 = d0 + d1 - 2.0 * (y1 - y0)
            s.leg_ratio[j, k] = y0 + u * (d0 + u * (c2 + u * c3))
            s.leg_dratio[j, k] = (d0 + u * (2.0 * c2 + 3.0 * u * c3)) / s.leg_drive[NODE_STEP, j, k] if inside else 0.0


@inner
def load_torque(s: Any) -> None:
    """tau_L = D - J.T F with the force of the last tick."""
    for k in range(s.leg_q.shape[1]):
        fx, fy, fz = s.force_B_N[0, k], s.force_B_N[1, k], s.force_B_N[2, k]
        for j in range(s.leg_q.shape[0]):
            pushed = s.jac_B[0, j, k] * fx + s.jac_B[1, j, k] * fy + s.jac_B[2, j, k] * fz
            s.leg_load[j, k] = s.tau_rigid_Nm[j, k] - pushed


@inner
def drive_torques(s: Any, j: int) -> None:
    """Write all that the filter is told of drive j; for coupled drives these are actuator torques, see `coupling`."""
    stuck_share, moving_share, fric_tau_s = s.leg_set[STUCK_SD], s.leg_set[MOVING_SD], s.leg_set[FRIC_TAU_S]
    for k in range(s.leg_q.shape[1]):
        warm = s.leg_motor_C[j, k] - s.leg_drive[KT_C, j, k]
        warm = warm if warm == warm else 0.0  # noqa: PLR0124
        ratio = s.leg_ratio[j, k]
        arm = ratio * s.leg_drive[KT, j, k] * (1.0 + s.leg_drive[KT_PER_K, j, k] * warm) * s.leg_drive[ENC_SIGN, j, k]
        measured = arm * (s.leg_current_A[j, k] - s.leg_drive[CURRENT_0, j, k])
        dphi = s.leg_dphi[j, k]
        limit = (
            s.leg_drive[COULOMB, j, k]
            + s.leg_drive[EXTRA, j, k] * s.leg_bump[j, k]
            + s.leg_drive[SHARE, j, k] * abs(s.leg_load[j, k])
        )
        moving = s.leg_grip[j, k]
        signed = moving if dphi >= 0.0 else -moving
        turned = ratio * s.leg_ddphi[j, k] + s.leg_dratio[j, k] * dphi * dphi
        stuck_sd = stuck_share * limit
        moving_sd = moving_share * limit
        kt_sd = s.leg_drive[KT_U, j, k] * measured
        freely = moving * moving
        s.tau_meas_Nm[j, k] = measured
        s.tau_drive_Nm[j, k] = (
            signed * limit + s.leg_drive[VISCOUS, j, k] * dphi + ratio * s.leg_drive[ROTOR, j, k] * turned
        )
        s.fric_sd_Nm[j, k] = np.sqrt(
            (1.0 - freely) * stuck_sd * stuck_sd + freely * moving_sd * moving_sd + kt_sd * kt_sd
        )
        s.tau_noise_Nm[j, k] = abs(arm) * s.leg_drive[CURRENT_SD, j, k]
        s.fric_tau_s[j, k] = fric_tau_s
        s.tau_lag_s[j, k] = s.leg_drive[LAG_S, j, k]
        known = s.leg_drive[HAS_MOTOR, j, k] * s.leg_drive[HERE, j, k]
        known = known if s.leg_current_age_s[j, k] <= STILL_AFTER_S and s.leg_worst_s[j, k] <= STILL_AFTER_S else 0.0
        s.leg_known[j, k] = known
        s.tau_new[j, k] = s.leg_current_new[j, k] if known > 0.0 else 0
