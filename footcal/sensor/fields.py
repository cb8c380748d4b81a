"""The fields that the sensor part adds to the runtime's state and constants records; last axis is the leg lane."""

from __future__ import annotations

from typing import Any

import numpy as np

from footcal.records import NS_PER_S, Health
from footcal.sensor.creep import CREEP_TAU_S, N_CREEP
from footcal.sensor.curve import N_POWERS
from footcal.sensor.hysteresis import N_PLAY, PLAY_HALF_WIDTH
from footcal.sensor.lag import noise_gain
from footcal.sensor.model import N_FEATURES, N_UNCERTAINTY_ROWS, SensorModel
from footcal.sensor.temperature import N_TEMPERATURE
from footcal.sensor.transform import WIRINGS

FASTEST_CHANNEL_S = 0.001  # the lead gain is stated for the robot's usual channel

Field = tuple[str, str, tuple[int, ...]]


def sensor_state_fields(legs: int) -> list[Field]:
    """Return name, type and shape of every state field of the sensor part, for `legs` lanes."""
    return [
        ("sen_t_ns", "i8", (legs,)),  # time of the last reading used
        ("sen_started", "i8", (legs,)),  # 0 until the first reading
        ("sen_start_ns", "i8", (legs,)),  # when the state was last started afresh
        ("sen_dt_ns", "i8", (legs,)),  # interval that sen_a and sen_phi stand for
        ("sen_a", "f8", (N_CREEP, legs)),
        ("sen_f", "f8", (N_CREEP, legs)),
        ("sen_tare_raw", "f8", (legs,)),  # counts taken from every reading
        ("sen_raw", "f8", (legs,)),  # last raw reading taken as real
        ("sen_held_raw", "f8", (legs,)),  # reading held back as a possible spike; NaN when none
        ("sen_undone_raw", "f8", (legs,)),  # last reading with the lag undone
        ("sen_temp_C", "f8", (legs,)),  # lagged temperature; NaN until one was read
        ("sen_temp_ns", "i8", (legs,)),
        ("sen_v", "f8", (legs,)),
        ("sen_lp", "f8", (N_CREEP, legs)),
        ("sen_play", "f8", (N_PLAY, legs)),
        ("sen_lo", "f8", (legs,)),  # range of v_2 since the start
        ("sen_hi", "f8", (legs,)),
        ("sen_phi", "f8", (N_FEATURES, legs)),  # features of the last reading
        ("sen_slope_N", "f8", (legs,)),  # dF/draw of the base curve, N per count
        ("axial_N", "f8", (legs,)),
        ("axial_u_N", "f8", (legs,)),
        ("axial_new", "i8", (legs,)),
        ("axial_flags", "i8", (legs,)),
        ("axial_age_s", "f8", (legs,)),
    ]


def sensor_constant_fields(legs: int) -> list[Field]:
    """Return name, type and shape of every constant field of the sensor part, for `legs` lanes."""
    return [
        ("sen_known", "i8", (legs,)),
        ("sen_wiring", "i8", (legs,)),
        ("sen_base_flags", "i8", (legs,)),
        ("sen_capacity_N", "f8", (legs,)),
        ("sen_raw_max", "f8", (legs,)),
        ("sen_raw_min", "f8", (legs,)),
        ("sen_u_zero", "f8", (legs,)),
        ("sen_u_span", "f8", (legs,)),
        ("sen_gamma", "f8", (legs,)),
        ("sen_temp_ref_C", "f8", (legs,)),
        ("sen_temp_lag_s", "f8", (legs,)),
        ("sen_lag_s", "f8", (legs,)),
        ("sen_b", "f8", (N_POWERS, legs)),
        ("sen_bt", "f8", (N_TEMPERATURE, legs)),
        ("sen_g", "f8", (N_CREEP, legs)),
        ("sen_tau_s", "f8", (N_CREEP, legs)),
        ("sen_h", "f8", (N_PLAY, legs)),
        ("sen_coef", "f8", (N_FEATURES, legs)),
        ("sen_u_rows", "f8", (N_UNCERTAINTY_ROWS, N_FEATURES, legs)),
        ("sen_u_fixed_N", "f8", (legs,)),
        ("sen_u_relative", "f8", (legs,)),
        ("sen_u_moving_N", "f8", (legs,)),
        ("sen_u_noise_N", "f8", (legs,)),
        ("sen_noise_s", "f8", (legs,)),
        ("sen_lead_gain", "f8", (legs,)),
        ("sen_u_temp_C", "f8", (legs,)),
        ("sen_u_absent_C", "f8", (legs,)),
        ("sen_u_beyond", "f8", (legs,)),
        ("sen_force_min_N", "f8", (legs,)),
        ("sen_force_max_N", "f8", (legs,)),
        ("sen_temp_min_C", "f8", (legs,)),
        ("sen_temp_max_C", "f8", (legs,)),
        ("sen_settle_ns", "i8", (legs,)),
        ("sen_settle_swing", "f8", (legs,)),
        ("sen_cross", "f8", (2, legs)),
        ("sen_cross_u", "f8", (2, legs)),
        ("sen_unload_share", "f8", (legs,)),
        ("sen_unload_s", "f8", (legs,)),
    ]


def fill_sensor_constants(model: SensorModel | None, c: Any, lane: int) -> None:
    """Write one foot's model into its lane of the constants record `c`; None marks a foot without calibration.

    Args:
        model: the sensor, or None.
        c: one-element record array (or recarray row) with the fields of `sensor_constant_fields`.
        lane: leg index.
    """
    for name, _, _ in sensor_constant_fields(1):
        c[name][..., lane] = 0
    c["sen_capacity_N"][..., lane] = c["sen_u_span"][..., lane] = c["sen_gamma"][..., lane] = 1.0
    c["sen_tau_s"][..., lane] = CREEP_TAU_S
    c["sen_h"][..., lane] = PLAY_HALF_WIDTH
    if model is None:
        c["sen_base_flags"][..., lane] = int(Health.UNCALIBRATED)
        return
    c["sen_known"][..., lane] = 1
    c["sen_wiring"][..., lane] = WIRINGS[model.wiring]
    c["sen_base_flags"][..., lane] = 0 if model.dynamic else int(Health.NOT_DYNAMIC)
    full_scale_N = model.capacity_N
    unc = model.uncertainty
    values = {
        "sen_capacity_N": full_scale_N,
        "sen_raw_max": model.raw_max,
        "sen_raw_min": model.raw_min,
        "sen_u_zero": model.u_zero,
        "sen_u_span": model.u_span,
        "sen_gamma": model.gamma,
        "sen_temp_ref_C": model.temp_ref_C,
        "sen_temp_lag_s": model.thermometer_lag_s,
        "sen_lag_s": model.lag_s,
        "sen_b": model.curve,
        "sen_bt": model.curve_temperature,
        "sen_g": model.creep_undone,
        "sen_coef": model.coefficients,
        "sen_u_rows": unc.rows,
        "sen_u_fixed_N": unc.fixed * full_scale_N,
        "sen_u_relative": unc.relative,
        "sen_u_moving_N": unc.moving * full_scale_N,
        "sen_u_noise_N": unc.noise * full_scale_N,
        "sen_noise_s": unc.noise_interval_s,
        "sen_lead_gain": noise_gain(model.lag_s, FASTEST_CHANNEL_S),
        "sen_u_temp_C": unc.temp_C,
        "sen_u_absent_C": unc.temp_absent_C,
        "sen_u_beyond": unc.beyond,
        "sen_force_min_N": model.force_min_N,
        "sen_force_max_N": model.force_max_N,
        "sen_temp_min_C": model.temp_min_C,
        "sen_temp_max_C": model.temp_max_C,
        "sen_settle_ns": round(model.settle_s * NS_PER_S),
        "sen_settle_swing": model.settle_swing,
        "sen_cross": model.cross_axis,
        "sen_cross_u": model.cross_axis_u,
        "sen_unload_share": model.unload_share,
        "sen_unload_s": model.unload_s,
    }
    for name, value in values.items():
        c[name][..., lane] = value


def fresh_sensor_state(s: Any, lane: int) -> None:
    """Put one lane of the state record into its power-up state: nothing read yet, no tare."""
    for name, _, _ in sensor_state_fields(1):
        s[name][..., lane] = 0
    for name in ("sen_held_raw", "sen_temp_C", "axial_N", "axial_u_N", "axial_age_s"):
        s[name][..., lane] = np.nan
