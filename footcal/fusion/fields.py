"""The record layouts of the compiled step: one tick in, state, constants, one estimate out; each dtype built once.

Every field is a nested array of constant shape whose last axis is the lane. Leg rows have `legs` lanes, filter rows
`3 * legs` (lane = mode * legs + leg; modes 0 swing, 1 quiet stance, 2 moving stance). Equal but distinct dtype objects
cost a microsecond a call, so the factories are cached.
"""

from __future__ import annotations

from functools import lru_cache
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

Field = tuple[str, str, tuple[int, ...]]

MODES: Final = 3
LINE_BYTES: Final = 64
SWING, QUIET, MOVING = 0, 1, 2


def state_size(joints: int) -> int:
    """Return the number of states of one filter: force (3), friction error and motor torque per joint, residual (1)."""
    return 4 + 2 * joints


def shared_state_fields(legs: int, joints: int) -> list[Field]:
    """Return the state fields through which sensor, leg and filter speak with each other."""
    f, i = "f8", "i8"
    return [
        ("dt_s", f, (1,)),
        ("t_ns", i, (1,)),
        ("reset", i, (1,)),
        ("axial_N", f, (legs,)),
        ("axial_u_N", f, (legs,)),
        ("axial_new", i, (legs,)),
        ("axial_flags", i, (legs,)),
        ("axial_age_s", f, (legs,)),
        ("foot_B_m", f, (3, legs)),
        ("jac_B", f, (3, joints, legs)),
        ("axis_B", f, (3, legs)),
        ("axial_inertia_N", f, (legs,)),
        ("tau_rigid_Nm", f, (joints, legs)),
        ("tau_drive_Nm", f, (joints, legs)),
        ("tau_meas_Nm", f, (joints, legs)),
        ("tau_new", i, (joints, legs)),
        ("tau_noise_Nm", f, (joints, legs)),
        ("fric_sd_Nm", f, (joints, legs)),
        ("fric_tau_s", f, (joints, legs)),
        ("tau_lag_s", f, (joints, legs)),
        ("motor_age_s", f, (legs,)),
        ("force_B_N", f, (3, legs)),
    ]


def filter_state_fields(legs: int, joints: int) -> list[Field]:
    """Return the filter's own state: estimates, mode probabilities, decision memory, health memory, work rows."""
    f = "f8"
    lanes, n = MODES * legs, state_size(joints)
    pairs = n * (n + 1) // 2
    estimate: list[Field] = [
        ("fil_x", f, (n, lanes + 2 * legs)),  # F, b, m, e; behind the last mode the first two stand once more
        ("fil_P", f, (pairs, lanes + 2 * legs)),  # lower triangle, row i column j at i (i + 1) / 2 + j
        ("fil_mu", f, (lanes,)),  # mode probabilities
        ("fil_cov_N2", f, (6, legs)),  # combined force covariance: xx, xy, xz, yy, yz, zz
        ("fil_nis", f, (legs,)),  # normalised innovation squared, weighted over the modes
        ("fil_nis_dof", f, (legs,)),  # how many readings went into it
    ]
    work: list[Field] = [
        ("fil_mixed_x", f, (n, lanes)),
        ("fil_mixed_P", f, (pairs, lanes)),
        ("fil_cross", f, (joints, n, lanes)),
        ("fil_v", f, (n, lanes)),
        ("fil_quad", f, (lanes,)),
        ("fil_det", f, (lanes,)),
        ("fil_cbar", f, (lanes,)),
        ("fil_near", f, (n, lanes)),
        ("fil_far", f, (n, lanes)),
        ("fil_root", f, (2, n, lanes)),
        ("fil_omega", f, (MODES, lanes)),
        ("fil_trans", f, (MODES, MODES)),
        ("fil_force_keep", f, (lanes,)),
        ("fil_force_in", f, (3, lanes)),
        ("fil_force_q", f, (6, lanes)),  # xx, yx, yy, zx, zy, zz: the order of the lower triangle
        ("fil_h", f, (3, lanes)),
        ("fil_jac", f, (3, joints, lanes)),
        ("fil_lag", f, (joints, lanes)),
        ("fil_tau_in", f, (joints, lanes)),
        ("fil_tau_q", f, (joints, lanes)),
        ("fil_fric_keep", f, (joints, lanes)),
        ("fil_fric_q", f, (joints, lanes)),
        ("fil_e_keep", f, (lanes,)),
        ("fil_e_q", f, (lanes,)),
        ("fil_z_axial", f, (lanes,)),
        ("fil_r_axial", f, (lanes,)),
        ("fil_z_tau", f, (joints, lanes)),
        ("fil_r_tau", f, (joints, lanes)),
        ("fil_read_N", f, (legs,)),
        ("fil_read_N2", f, (legs,)),
        ("fil_tau_Nm2", f, (joints, legs)),
        ("fil_e_sd_N", f, (legs,)),
    ]
    return estimate + work + _memory_fields(legs, joints)


def _memory_fields(legs: int, joints: int) -> list[Field]:
    f, i = "f8", "i8"
    decision: list[Field] = [
        ("fil_up_B", f, (3,)),
        ("fil_peak_N", f, (legs,)),  # last peak of vertical force, decaying
        ("fil_zero_N", f, (legs,)),  # what the zero observer found
        ("fil_swing_s", f, (legs,)),  # how long swing has been certain
        ("fil_p", f, (legs,)),
        ("fil_contact", i, (legs,)),
        ("fil_decided", i, (legs,)),  # 0 until the first decision after a reset
        ("fil_known", i, (legs,)),
        ("fil_event", i, (legs,)),
        ("fil_t_event_s", f, (legs,)),
        ("fil_pending", i, (legs,)),  # 1 while a change waits for its confirmation
        ("fil_pending_ns", i, (legs,)),  # when the change began, between two samples
        ("fil_touch_ns", i, (legs,)),
        ("fil_started", i, (1,)),
        ("fil_dropped", i, (1,)),
        ("fil_resets", i, (1,)),
    ]
    health: list[Field] = [
        ("fil_health", i, (legs,)),
        ("fil_zero_ok", i, (legs,)),
        ("fil_raw", f, (legs,)),
        ("fil_mute_s", f, (legs,)),  # since the channel gave anything at all
        ("fil_run_s", f, (legs,)),  # since the raw reading last changed
        ("fil_run_usual_s", f, (legs,)),
        ("fil_read_1_N", f, (legs,)),  # last reading, and the one before
        ("fil_read_2_N", f, (legs,)),
        ("fil_read_gap_s", f, (legs,)),
        ("fil_rough_N2", f, (legs,)),
        ("fil_noisy_s", f, (legs,)),
        ("fil_disagree_s", f, (legs,)),
        ("fil_dead_s", f, (joints, legs)),
        ("fil_inertia_N", f, (legs,)),  # of what hangs below the sensor, at the last tick
        ("fil_shake_N", f, (legs,)),  # how badly it is known because it changed sharply
        ("fil_asked_Nm", f, (joints, legs)),  # torque that inertia and friction asked for at the last tick
        ("fil_jitter_Nm", f, (joints, legs)),  # how badly it is known because it changed sharply
    ]
    return decision + health


def filter_constant_fields(legs: int, joints: int) -> list[Field]:
    """Return the filter's constants, newtons and seconds; filled by `footcal.fusion.model.fill_filter_constants`."""
    f = "f8"
    one = (1,)
    names = (
        "fil_weight_N fil_swing_tau_s fil_swing_sd_N fil_quiet_up_N fil_quiet_side_N fil_moving_tau_s "
        "fil_moving_mean_N fil_moving_up_N fil_moving_side_N fil_touch_up_N2 fil_touch_all_N2 fil_lift_reset "
        "fil_cost_per_s fil_cost_N fil_cost_cap fil_peak_tau_s fil_floor fil_e_tau_s fil_e_part fil_e_min_N "
        "fil_read_min_N fil_on_p fil_off_p fil_on_s fil_off_s fil_early_s fil_early_off_s fil_min_N fil_zero_p "
        "fil_zero_wait_s fil_zero_tau_s fil_zero_max_N fil_zero_N_per_s fil_zero_flag_N fil_known_N fil_start_Nm "
        "fil_timing_s fil_timing_tau_s fil_axial_timing_s "
        "fil_stuck_s fil_stuck_ratio fil_silent_s fil_stale_s fil_noisy_ratio fil_noisy_tau_s fil_noisy_min_N "
        "fil_disagree_chi2 fil_disagree_s fil_dead_after_s fil_dead_sds"
    )
    rows: list[Field] = [(name, f, one) for name in names.split()]
    return [
        *rows,
        ("fil_rate_per_s", f, (MODES, MODES)),
        ("fil_mix_keep", f, (2, state_size(joints), MODES * legs)),  # 0 where entering swing resets a state
        ("fil_period_s", f, (legs,)),  # time between two new foot readings; 0 where every tick brings one
        ("fil_hang_zero_N", f, (legs,)),  # weight below a sensor that was zeroed hanging
        ("fil_joint", f, (joints, legs)),  # 1 where there is a joint, 0 where padded
    ]


def joined(*parts: list[Field]) -> np.dtype[np.void]:
    """Return one dtype of all fields, each at the start of a cache line; a field that two parts declare stands once.

    Raises:
        TypeError: two parts declare one name with different type or shape.
    """
    formats: dict[str, np.dtype[Any]] = {}
    for name, kind, shape in (field for part in parts for field in part):
        form = np.dtype((kind, shape))
        if formats.setdefault(name, form) != form:
            message = f"field {name} is declared as {formats[name]} and as {form}"
            raise TypeError(message)
    ends = np.cumsum([0, *(-(-form.itemsize // LINE_BYTES) * LINE_BYTES for form in formats.values())])
    return np.dtype(
        {
            "names": list(formats),
            "formats": list(formats.values()),
            "offsets": [int(end) for end in ends[:-1]],
            "itemsize": int(ends[-1]),
        }
    )


def one_record(dtype: np.dtype[np.void]) -> NDArray[np.void]:
    """Return an array of one zeroed record that begins at a cache line (wide stores across lines cost more)."""
    room = np.zeros(dtype.itemsize + LINE_BYTES, dtype=np.uint8)
    start = -room.ctypes.data % LINE_BYTES
    return room[start : start + dtype.itemsize].view(dtype)


@lru_cache(maxsize=32)
def tick_dtype(legs: int, joints: int) -> np.dtype[np.void]:
    """Return the layout of one tick of input; NaN means no new reading.

    Args:
        legs: number of legs.
        joints: joints a leg, padded to 3 or 6.
    """
    f = "f8"
    per_joint = ((name, f, (joints, legs)) for name in ("q_rad", "dq_rad_per_s", "current_A", "motor_temp_C"))
    return np.dtype(
        [
            ("t_ns", "i8"),
            ("raw", f, (legs,)),
            ("temp_C", f, (legs,)),
            *per_joint,
            ("quat_WB", f, (4,)),
            ("gyro_rad_per_s", f, (3,)),
            ("accel_m_per_s2", f, (3,)),
        ]
    )


@lru_cache(maxsize=32)
def out_dtype(legs: int) -> np.dtype[np.void]:
    """Return the layout of one estimate of all legs."""
    f, i = "f8", "i8"
    return np.dtype(
        [
            ("t_ns", i),
            ("p_contact", f, (legs,)),
            ("contact", i, (legs,)),
            ("contact_known", i, (legs,)),
            ("event", i, (legs,)),
            ("t_event_s", f, (legs,)),
            ("force_B_N", f, (3, legs)),
            ("cov_B_N2", f, (6, legs)),
            ("axial_N", f, (legs,)),
            ("axial_u_N", f, (legs,)),
            ("sensor_bias_N", f, (legs,)),
            ("foot_age_s", f, (legs,)),
            ("motor_age_s", f, (legs,)),
            ("health", i, (legs,)),
            ("mode_p", f, (MODES, legs)),
            ("nis", f, (legs,)),
            ("nis_dof", f, (legs,)),
        ]
    )
