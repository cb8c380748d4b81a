"""The streaming compensator: one compiled step from raw readings to newtons, the same live, in batch and in replay."""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit

from footcal.sensor.creep import hold_factors, lag_step
from footcal.sensor.curve import quintic, quintic_slope
from footcal.sensor.hysteresis import play_step
from footcal.sensor.lag import undo_lag
from footcal.sensor.temperature import temperature_terms, theta_of
from footcal.sensor.transform import arm_ratio, arm_ratio_slope, bend, bend_slope

# Health bits, spelled out because compiled code freezes module values (checked against records.Health in the tests).
SATURATED = 1 << 1
SPIKE = 1 << 5
UNCALIBRATED = 1 << 10
OUTSIDE_VALIDITY = 1 << 11
EXTRAPOLATED = 1 << 14
START_STATE_UNFORGOTTEN = 1 << 15

SENSOR_GAP_NS = 60_000_000_000


@njit(error_model="numpy")
def sensor_step(inp: Any, s: Any, c: Any) -> None:
    """Advance every foot by one tick: reads `raw` and `temp_C`, writes axial_N, axial_u_N, axial_new, flags and age.

    Args:
        inp: input record of the tick; NaN in `raw` means no new reading.
        s: state record with the fields of `sensor_state_fields`.
        c: constants record with the fields of `sensor_constant_fields`.
    """
    t_ns = inp.t_ns
    for k in range(inp.raw.shape[0]):
        s.axial_new[k] = 0
        raw = inp.raw[k]
        if c.sen_known[k] == 0:
            s.axial_flags[k] = UNCALIBRATED
            continue
        _take_temperature(t_ns, inp.temp_C[k], s, c, k)
        if raw == raw and not (s.sen_started[k] == 1 and t_ns <= s.sen_t_ns[k]):  # noqa: PLR0124
            _take_reading(t_ns, raw, s, c, k)
        if s.sen_started[k] == 1:
            s.axial_age_s[k] = (t_ns - s.sen_t_ns[k]) * 1e-9


@njit(error_model="numpy")
def _take_temperature(t_ns: int, temp_C: float, s: Any, c: Any, k: int) -> None:
    """Run the thermometer's reading through its lag; a missing one leaves the last."""
    if not temp_C == temp_C:  # noqa: PLR0124, SIM201
        return
    old = s.sen_temp_C[k]
    lag_s = c.sen_temp_lag_s[k]
    dt_s = (t_ns - s.sen_temp_ns[k]) * 1e-9
    if not old == old or lag_s <= 0.0 or dt_s > 60.0:  # noqa: PLR0124, SIM201
        s.sen_temp_C[k] = temp_C
    elif dt_s > 0.0:
        s.sen_temp_C[k] = old + (temp_C - old) * -np.expm1(-dt_s / lag_s)
    s.sen_temp_ns[k] = t_ns


@njit(error_model="numpy")
def _is_spike(raw: float, dt_s: float, s: Any, c: Any, k: int) -> bool:
    """Hold back a jump no foot can make in one sample; the next reading beside it proves it real."""
    ends = abs(c.sen_u_span[k] - c.sen_u_zero[k])
    jump = abs(
        arm_ratio(raw, c.sen_raw_max[k], c.sen_wiring[k]) - arm_ratio(s.sen_raw[k], c.sen_raw_max[k], c.sen_wiring[k])
    )
    limit = max(0.15, 60.0 * dt_s) * ends
    held = s.sen_held_raw[k]
    if jump <= limit:
        s.sen_held_raw[k] = np.nan
        return False
    if held == held:  # noqa: PLR0124
        beside = abs(
            arm_ratio(raw, c.sen_raw_max[k], c.sen_wiring[k]) - arm_ratio(held, c.sen_raw_max[k], c.sen_wiring[k])
        )
        s.sen_held_raw[k] = np.nan
        if beside <= limit:
            return False
    s.sen_held_raw[k] = raw
    return True


@njit(error_model="numpy")
def _take_reading(t_ns: int, raw_in: float, s: Any, c: Any, k: int) -> None:
    """Turn one new reading of foot k into force, uncertainty and flags."""
    flags = c.sen_base_flags[k]
    if raw_in <= c.sen_raw_min[k] or raw_in >= c.sen_raw_max[k]:
        flags |= SATURATED
    raw = raw_in - s.sen_tare_raw[k]
    dt_ns = t_ns - s.sen_t_ns[k]
    fresh = s.sen_started[k] == 0 or dt_ns > SENSOR_GAP_NS
    if not fresh and _is_spike(raw, dt_ns * 1e-9, s, c, k):
        s.axial_flags[k] = flags | SPIKE
        return
    raw_old = s.sen_raw[k]
    s.sen_raw[k] = raw
    if not fresh and c.sen_lag_s[k] > 0.0 and dt_ns < 3_333_334:
        a, phi = hold_factors(dt_ns * 1e-9, c.sen_lag_s[k])
        raw = undo_lag(raw, raw_old, s.sen_undone_raw[k], a, phi)
    s.sen_undone_raw[k] = raw
    known_C = s.sen_temp_C[k]
    theta = theta_of(known_C, c.sen_temp_ref_C[k]) if known_C == known_C else 0.0  # noqa: PLR0124
    _apparent(raw, theta, s, c, k)
    v = s.sen_phi[1, k]
    if fresh:
        start_state(t_ns, v, s, c, k)
    else:
        advance_state(dt_ns, v, s, c, k)
    s.sen_v[k] = v
    s.sen_t_ns[k] = t_ns
    s.sen_started[k] = 1
    write_features(v, theta, s, c, k)
    _force(theta, known_C, flags, s, c, k)


@njit(error_model="numpy")
def _apparent(raw: float, theta: float, s: Any, c: Any, k: int) -> None:
    """Apparent force v of the base curve (kept in sen_phi[1]) and its slope against raw."""
    ends = c.sen_u_span[k] - c.sen_u_zero[k]
    straight = (arm_ratio(raw, c.sen_raw_max[k], c.sen_wiring[k]) - c.sen_u_zero[k]) / ends
    x = bend(straight, c.sen_gamma[k], 0.02)
    b = c.sen_b
    bt = c.sen_bt
    s.sen_phi[1, k] = quintic(x, b[0, k], b[1, k], b[2, k], b[3, k], b[4, k], b[5, k]) + temperature_terms(
        theta, x, bt[0, k], bt[1, k], bt[2, k], bt[3, k], bt[4, k]
    )
    slope = quintic_slope(x, b[1, k], b[2, k], b[3, k], b[4, k], b[5, k]) * bend_slope(straight, c.sen_gamma[k], 0.02)
    s.sen_slope_N[k] = c.sen_capacity_N[k] * slope * arm_ratio_slope(raw, c.sen_raw_max[k], c.sen_wiring[k]) / ends


@njit(error_model="numpy")
def start_state(t_ns: int, v: float, s: Any, c: Any, k: int) -> None:
    """State at power-up: creep settled, loop as after a full press and release."""
    for i in range(8):
        s.sen_lp[i, k] = v
    for i in range(6):
        s.sen_play[i, k] = v + c.sen_h[i, k]
    s.sen_lo[k] = v
    s.sen_hi[k] = v
    s.sen_start_ns[k] = t_ns
    s.sen_held_raw[k] = np.nan


@njit(error_model="numpy")
def advance_state(dt_ns: int, v: float, s: Any, c: Any, k: int) -> None:
    """Advance creep and play states over one interval."""
    if dt_ns != s.sen_dt_ns[k]:
        for i in range(8):
            a, phi = hold_factors(dt_ns * 1e-9, c.sen_tau_s[i, k])
            s.sen_a[i, k] = a
            s.sen_f[i, k] = phi
        s.sen_dt_ns[k] = dt_ns
    v_old = s.sen_v[k]
    undone = v
    for i in range(8):
        s.sen_lp[i, k] = lag_step(s.sen_lp[i, k], v_old, v, s.sen_a[i, k], s.sen_f[i, k])
        undone += c.sen_g[i, k] * (v - s.sen_lp[i, k])
    for i in range(6):
        s.sen_play[i, k] = play_step(s.sen_play[i, k], undone, c.sen_h[i, k])
    s.sen_lo[k] = min(s.sen_lo[k], undone)
    s.sen_hi[k] = max(s.sen_hi[k], undone)


@njit(error_model="numpy")
def write_features(v: float, theta: float, s: Any, c: Any, k: int) -> None:
    """Fill sen_phi in the order of model.FEATURES."""
    p = s.sen_phi
    p[0, k] = 1.0
    p[2, k] = v * v
    p[3, k] = v * v * v
    p[4, k] = p[3, k] * v
    p[5, k] = p[4, k] * v
    p[6, k] = theta
    p[7, k] = theta * v
    p[8, k] = theta * v * v
    p[9, k] = theta * theta
    p[10, k] = theta * theta * v
    undone = v
    crept = 0.0
    for i in range(8):
        creep = v - s.sen_lp[i, k]
        p[23 + i, k] = creep
        undone += c.sen_g[i, k] * creep
        crept += c.sen_g[i, k] * creep
    for i in range(6):
        loop = s.sen_play[i, k] - undone
        p[11 + i, k] = loop
        p[17 + i, k] = loop * undone
    p[31, k] = theta * crept


@njit(error_model="numpy")
def _noise_share(s: Any, c: Any, k: int) -> float:
    """Variance of one sample over that at the bench's rate: white noise, averaged over the interval, lag undone."""
    dt_ns = s.sen_dt_ns[k]
    if dt_ns <= 0 or c.sen_noise_s[k] <= 0.0:
        return 1.0
    share: float = min(c.sen_noise_s[k] * 1e9 / dt_ns, 100.0)
    return share * c.sen_lead_gain[k] ** 2 if dt_ns < 3_333_334 else share


@njit(error_model="numpy")
def _start_variance(swing: float, s: Any, c: Any, k: int) -> float:
    """Variance from not knowing the state at power-up, of full scale squared.

    A play wider than the swing since then may hang anywhere in its backlash (rectangular); a creep state may lack
    half of what the load would have brought it, which decays with its own time constant.
    """
    v = s.sen_phi[1, k]
    left = 0.0
    for i in range(6):
        if 2.0 * c.sen_h[i, k] > swing:
            left += ((c.sen_coef[11 + i, k] + c.sen_coef[17 + i, k] * v) * c.sen_h[i, k]) ** 2 / 3.0
    since_s = (s.sen_t_ns[k] - s.sen_start_ns[k]) * 1e-9
    if since_s < 3.0 * c.sen_tau_s[7, k]:
        crept = 0.0
        for i in range(8):
            crept += (c.sen_coef[23 + i, k] * np.exp(-since_s / c.sen_tau_s[i, k])) ** 2
        left += 0.25 * v * v * crept
    return left


@njit(error_model="numpy")
def _force(theta: float, known_C: float, flags: int, s: Any, c: Any, k: int) -> None:
    """Force, its standard uncertainty and the flags, from the features."""
    total = 0.0
    for i in range(32):
        total += c.sen_coef[i, k] * s.sen_phi[i, k]
    full_scale_N = c.sen_capacity_N[k]
    force_N = full_scale_N * total
    fitted = 0.0
    for r in range(8):
        row = 0.0
        for i in range(32):
            row += c.sen_u_rows[r, i, k] * s.sen_phi[i, k]
        fitted += row * row
    v = s.sen_phi[1, k]
    coef = c.sen_coef
    by_theta = coef[6, k] + v * (coef[7, k] + v * coef[8, k]) + 2.0 * theta * (coef[9, k] + v * coef[10, k])
    bt = c.sen_bt
    by_theta += bt[0, k] + bt[1, k] * v + bt[2, k] * v * v + 2.0 * theta * (bt[3, k] + bt[4, k] * v)
    has_temp = known_C == known_C  # noqa: PLR0124
    temp_u_C = c.sen_u_temp_C[k] if has_temp else c.sen_u_absent_C[k]
    u2 = full_scale_N * full_scale_N * (fitted + (by_theta * temp_u_C / 16.0) ** 2)
    u2 += c.sen_u_fixed_N[k] ** 2 + (c.sen_u_relative[k] * force_N) ** 2
    u2 += c.sen_u_noise_N[k] ** 2 * _noise_share(s, c, k)
    if abs(s.sen_phi[24, k]) > c.sen_tau_s[1, k]:  # creep feature of some 30 ms over its time constant: above 1 FS/s
        u2 += c.sen_u_moving_N[k] ** 2
    margin_N = 0.02 * full_scale_N
    if force_N > c.sen_force_max_N[k] + margin_N:
        flags |= EXTRAPOLATED
    over_N = max(force_N - c.sen_force_max_N[k], 0.0)
    u2 += (c.sen_u_beyond[k] * over_N) ** 2
    if (
        force_N > c.sen_force_max_N[k] + margin_N
        or force_N < c.sen_force_min_N[k] - 2.5 * margin_N
        or (has_temp and (known_C < c.sen_temp_min_C[k] - 1.0 or known_C > c.sen_temp_max_C[k] + 1.0))
    ):
        flags |= OUTSIDE_VALIDITY
    swing = s.sen_hi[k] - s.sen_lo[k]
    if swing < c.sen_settle_swing[k] or s.sen_t_ns[k] - s.sen_start_ns[k] < c.sen_settle_ns[k]:
        flags |= START_STATE_UNFORGOTTEN
    u2 += full_scale_N * full_scale_N * _start_variance(swing, s, c, k)
    s.axial_N[k] = force_N
    s.axial_u_N[k] = np.sqrt(u2)
    s.axial_new[k] = 1
    s.axial_flags[k] = flags
