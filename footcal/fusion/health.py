"""What is wrong with a foot or a motor: found in the compiled step, answered by the reading's noise, told as bits."""

from __future__ import annotations

from typing import Any

from numba import njit
from numpy import exp, isfinite, sqrt

from footcal.fusion.model_rows import OFF

# Health bits, spelled out because compiled code freezes module values (a test holds them against records.Health).
STUCK, SATURATED, SILENT, STALE, NOISY = 1 << 0, 1 << 1, 1 << 2, 1 << 3, 1 << 4
ZERO_DRIFT, TORQUE_DISAGREES, CURRENT_DEAD = 1 << 6, 1 << 7, 1 << 8
UNCALIBRATED, ZERO_UNCONFIRMED = 1 << 10, 1 << 12


@njit(error_model="numpy")
def _unchanged(raw: float, l: int, s: Any, c: Any) -> Any:
    """Tell whether the raw reading has stood still far longer than it ever does; learns how long it usually does."""
    if not isfinite(raw):
        s.fil_run_s[l] = 0.0
        s.fil_raw[l] = raw
        return False
    limit_s = c.fil_stuck_s[0] + 3.0 * c.fil_period_s[l] + c.fil_stuck_ratio[0] * s.fil_run_usual_s[l]
    if raw == s.fil_raw[l]:
        s.fil_run_s[l] += s.dt_s[0]
        return s.fil_run_s[l] > limit_s
    usual = s.fil_run_usual_s[l] * exp(-s.fil_run_s[l] / 60.0)  # forgotten in a minute
    s.fil_run_usual_s[l] = min(max(usual, s.fil_run_s[l]), 2.0 * c.fil_stuck_s[0])
    s.fil_run_s[l] = 0.0
    s.fil_raw[l] = raw
    return False


@njit(error_model="numpy")
def _roughness(l: int, s: Any, c: Any) -> Any:
    """Tell whether readings jump about: mean square of second differences (6 times white variance), outliers cut."""
    s.fil_read_gap_s[l] += s.dt_s[0]
    if s.axial_new[l] == 0 or c.fil_period_s[l] > 0.004:
        return s.fil_noisy_s[l] > 0.0
    gap = s.fil_read_gap_s[l]
    s.fil_read_gap_s[l] = 0.0
    bend = s.axial_N[l] - 2.0 * s.fil_read_1_N[l] + s.fil_read_2_N[l]
    s.fil_read_2_N[l] = s.fil_read_1_N[l]
    s.fil_read_1_N[l] = s.axial_N[l]
    usual = max(c.fil_noisy_min_N[0], c.sen_u_noise_N[l])
    bound = (c.fil_noisy_ratio[0] * usual) ** 2
    share = 1.0 - exp(-gap / c.fil_noisy_tau_s[0])
    square = bend * bend / 6.0
    if not isfinite(square):
        square = 0.0
    s.fil_rough_N2[l] += share * (min(square, 2.25 * bound) - s.fil_rough_N2[l])
    s.fil_noisy_s[l] = s.fil_noisy_s[l] + gap if s.fil_rough_N2[l] > bound else 0.0
    return s.fil_noisy_s[l] > 0.0


@njit(error_model="numpy")
def _dead_currents(inp: Any, l: int, s: Any, c: Any) -> Any:
    """Tell whether a current gives nothing, or exactly zero where the model wants torque; that motor is taken out."""
    found = False
    joints = s.tau_new.shape[0]
    for k in range(joints):
        if c.fil_joint[k, l] == 0.0:
            continue
        current = inp.current_A[k, l]
        wanted = s.tau_rigid_Nm[k, l] + s.tau_drive_Nm[k, l]
        for i in range(3):
            wanted -= s.jac_B[i, k, l] * s.force_B_N[i, l]
        expected = sqrt(s.tau_noise_Nm[k, l] ** 2 + s.fric_sd_Nm[k, l] ** 2)
        dead = s.fil_dead_s[k, l] > c.fil_dead_after_s[0]
        mute = not isfinite(current) or (current == 0.0 and (dead or abs(wanted) > c.fil_dead_sds[0] * expected))
        s.fil_dead_s[k, l] = s.fil_dead_s[k, l] + s.dt_s[0] if mute else 0.0
        if s.fil_dead_s[k, l] > c.fil_dead_after_s[0]:
            s.fil_tau_Nm2[k, l] = OFF
            found = True
    return found


@njit(error_model="numpy")
def watch(inp: Any, s: Any, c: Any) -> None:
    """Look at what came in, set the health bits, and raise the variance of what cannot be trusted.

    A stuck foot says nothing more; a saturated one only roughly; a noisy one as little as its own scatter tells.
    """
    legs = s.axial_N.shape[0]
    for l in range(legs):
        bits = s.axial_flags[l] & ~ZERO_UNCONFIRMED
        raw = inp.raw[l]
        s.fil_mute_s[l] = 0.0 if isfinite(raw) else s.fil_mute_s[l] + s.dt_s[0]
        if s.fil_mute_s[l] > c.fil_silent_s[0]:
            bits |= SILENT
        if s.fil_mute_s[l] > c.fil_stale_s[0] + 2.0 * c.fil_period_s[l]:
            bits |= STALE
        if _unchanged(raw, l, s, c):
            bits |= STUCK
            s.fil_read_N2[l] = OFF
        if bits & SATURATED:
            s.fil_read_N2[l] = max(s.fil_read_N2[l], (0.3 * c.sen_capacity_N[l]) ** 2)
        if _roughness(l, s, c):
            bits |= NOISY
            s.fil_read_N2[l] += s.fil_rough_N2[l]
        if _dead_currents(inp, l, s, c):
            bits |= CURRENT_DEAD
        s.fil_health[l] = bits
        s.fil_nis_dof[l] = 1.0 if s.fil_read_N2[l] < OFF else 0.0
        for k in range(s.tau_new.shape[0]):
            s.fil_nis_dof[l] += 1.0 if s.fil_tau_Nm2[k, l] < OFF else 0.0


@njit(error_model="numpy")
def _observe_zero(l: int, s: Any, c: Any) -> None:
    """Bounded zero observer: follows the unloaded reading in certain swing only, within its rate and its range."""
    certain = s.fil_mu[l] > c.fil_zero_p[0] and s.fil_read_N2[l] < OFF
    if not certain:
        if s.fil_mu[l] <= c.fil_zero_p[0]:
            s.fil_swing_s[l] = 0.0
        return
    s.fil_swing_s[l] += s.dt_s[0]
    if s.fil_swing_s[l] < c.fil_zero_wait_s[0]:
        return
    most = c.fil_zero_N_per_s[0] * s.dt_s[0]
    step = s.fil_read_N[l] * s.dt_s[0] / c.fil_zero_tau_s[0]
    zero = s.fil_zero_N[l] + min(max(step, -most), most)
    s.fil_zero_N[l] = min(max(zero, -c.fil_zero_max_N[0]), c.fil_zero_max_N[0])
    s.fil_zero_ok[l] = 1


@njit(error_model="numpy")
def _disagreement(l: int, s: Any, c: Any) -> Any:
    """Tell whether foot and motors differ by more than friction and the sensor's own error explain, for some time."""
    legs = s.axial_N.shape[0]
    joints = s.tau_new.shape[0]
    last = s.fil_x.shape[0] - 1
    total = 0.0
    for k in range(joints):
        b = s.fil_mu[l] * s.fil_x[3 + k, l] + s.fil_mu[legs + l] * s.fil_x[3 + k, legs + l]
        b += s.fil_mu[2 * legs + l] * s.fil_x[3 + k, 2 * legs + l]
        if s.fric_sd_Nm[k, l] > 0.0:
            total += (b / s.fric_sd_Nm[k, l]) ** 2
    e = s.fil_mu[l] * s.fil_x[last, l] + s.fil_mu[legs + l] * s.fil_x[last, legs + l]
    e += s.fil_mu[2 * legs + l] * s.fil_x[last, 2 * legs + l]
    total += (e / s.fil_e_sd_N[l]) ** 2
    s.fil_disagree_s[l] = s.fil_disagree_s[l] + s.dt_s[0] if total > c.fil_disagree_chi2[0] else 0.0
    return s.fil_disagree_s[l] > c.fil_disagree_s[0]


@njit(error_model="numpy")
def judge(s: Any, c: Any) -> None:
    """After the update: follow zero and peak load, and set the bits that need the estimate."""
    legs = s.axial_N.shape[0]
    up = s.fil_up_B
    fade = exp(-s.dt_s[0] / c.fil_peak_tau_s[0])
    for l in range(legs):
        lift_N = up[0] * s.force_B_N[0, l] + up[1] * s.force_B_N[1, l] + up[2] * s.force_B_N[2, l]
        s.fil_peak_N[l] = max(s.fil_peak_N[l] * fade, lift_N)
        _observe_zero(l, s, c)
        bits = s.fil_health[l]
        if abs(s.fil_zero_N[l]) > c.fil_zero_flag_N[0]:
            bits |= ZERO_DRIFT
        if _disagreement(l, s, c):
            bits |= TORQUE_DISAGREES
        if s.fil_zero_ok[l] == 0 and not bits & UNCALIBRATED:
            bits |= ZERO_UNCONFIRMED
        s.fil_health[l] = bits
