"""Runs the leg step by itself on rows of input, compiled or (NUMBA_DISABLE_JIT=1) as plain Python."""

from __future__ import annotations

import sys
from collections.abc import Callable, Mapping
from functools import lru_cache
from typing import Any

import numpy as np
from numba import config, njit

from footcal.leg.constants import LegSettings, fill_leg_constants, fresh_leg_state
from footcal.leg.description import Robot
from footcal.leg.drivefile import DriveFile
from footcal.leg.fields import leg_dtypes
from footcal.leg.posture import source_key
from footcal.leg.step import leg_step
from footcal.records import FloatArray
from tests.leg.robots import planar_leg, single

KEPT = (
    "tau_meas_Nm",
    "tau_drive_Nm",
    "tau_rigid_Nm",
    "fric_sd_Nm",
    "leg_q",
    "leg_dq",
    "leg_ddq",
    "tau_noise_Nm",
    "tau_lag_s",
)


def _make(key: int) -> Callable[..., None]:
    @njit(cache=True, error_model="numpy")
    def run(rows: Any, dt_s: Any, reset: Any, force_N: Any, gravity: Any, S: Any, C: Any, out: Any) -> None:
        if key == 0:
            return
        s, c = S[0], C[0]
        for i in range(rows.shape[0]):
            s.dt_s[0] = dt_s[i]
            s.reset[0] = reset[i]
            for x in range(3):
                s.force_B_N[x, 0] = force_N[x]
            leg_step(rows[i], gravity, s, c)
            for j in range(3):
                out[i, 0, j] = s.tau_meas_Nm[j, 0]
                out[i, 1, j] = s.tau_drive_Nm[j, 0]
                out[i, 2, j] = s.tau_rigid_Nm[j, 0]
                out[i, 3, j] = s.fric_sd_Nm[j, 0]
                out[i, 4, j] = s.leg_q[j, 0]
                out[i, 5, j] = s.leg_dq[j, 0]
                out[i, 6, j] = s.leg_ddq[j, 0]
                out[i, 7, j] = s.tau_noise_Nm[j, 0]
                out[i, 8, j] = s.tau_lag_s[j, 0]
                out[i, 9, j] = s.tau_new[j, 0]
            out[i, 10, 0] = s.axial_inertia_N[0]
            out[i, 10, 1] = s.motor_age_s[0]
            out[i, 10, 2] = s.leg_f[2]
            for x in range(3):
                out[i, 11, x] = s.axis_B[x, 0]
                out[i, 12, x] = s.leg_f[x]

    return run


@lru_cache(maxsize=1)
def _runner() -> Callable[..., None]:
    return _make(source_key())


def run(
    robot: Robot,
    inputs: Mapping[str, FloatArray],
    *,
    ticks: int,
    dt_s: float = 1e-3,
    force_N: tuple[float, float, float] = (0.0, 0.0, 0.0),
    drive: DriveFile | None = None,
    settings: LegSettings | None = None,
    cross_axis: tuple[float, float] = (0.0, 0.0),
    reset_at: int = 0,
) -> dict[str, FloatArray]:
    """Run the step over `ticks` rows of a one-legged robot of at most three joints.

    Args:
        robot: with one leg.
        inputs: by field, shape (n, joints) for joint fields or (n, 3 or 4) for the body's; NaN where left out.
        ticks: n.
        dt_s: interval.
        force_N: the filter's force of the last tick, the same all the time.
        drive: drive file of the leg.
        settings: of the step.
        cross_axis: of the foot's calibration.
        reset_at: tick at which the fusion says reset (besides the first).

    Returns:
        By name: (n, 3) arrays, and axial_inertia_N, motor_age_s (n,), axis_B, force_O (n, 3).
    """
    tick, state, constants = leg_dtypes(1, 3)
    rows, S, C = np.zeros(ticks, tick), np.zeros(1, state), np.zeros(1, constants)
    for name in tick.names or ():
        rows[name] = np.nan
    for name, values in inputs.items():
        if rows[name].ndim == 3:
            rows[name][:, : np.shape(values)[1], 0] = values
        else:
            rows[name] = values
    fill_leg_constants(robot, (drive,), C, settings)
    C["sen_cross"][0, :, 0] = cross_axis
    fresh_leg_state(S)
    out = np.zeros((ticks, 13, 3))
    intervals = np.full(ticks, dt_s)
    intervals[0] = 0.0
    reset = np.zeros(ticks, np.int64)
    reset[[0, reset_at]] = 1
    gravity = np.array([0.0, 0.0, -9.81])
    if config.DISABLE_JIT:
        rows, S, C = rows.view(np.recarray), S.view(np.recarray), C.view(np.recarray)
    _runner()(rows, intervals, reset, np.array(force_N), gravity, S, C, out)
    found = {name: out[:, i] for i, name in enumerate((*KEPT, "tau_new"))}
    found |= {
        "axial_inertia_N": out[:, 10, 0],
        "motor_age_s": out[:, 10, 1],
        "axis_B": out[:, 11],
        "force_O": out[:, 12],
    }
    return found


def swinging(ticks: int = 60) -> dict[str, FloatArray]:
    """Inputs of a planar leg that swings on a turning body, with holes in the encoder, the current and the unit."""
    t = np.arange(ticks)[:, None] * 1e-3
    rng = np.random.default_rng(7)
    q = np.hstack([0.6 * np.sin(20.0 * t), -0.9 + 0.4 * np.cos(17.0 * t)])
    dq = np.hstack([12.0 * np.cos(20.0 * t), -6.8 * np.sin(17.0 * t)])
    inputs = {
        "q_rad": q,
        "dq_rad_per_s": dq,
        "current_A": rng.normal(scale=2.0, size=(ticks, 2)),
        "motor_temp_C": np.full((ticks, 2), 40.0),
        "gyro_rad_per_s": np.hstack([np.sin(5.0 * t), np.cos(7.0 * t), 0.1 + 0.0 * t]),
        "accel_m_per_s2": np.hstack([np.sin(9.0 * t), 0.5 + 0.0 * t, 9.81 + np.cos(11.0 * t)]),
    }
    inputs["q_rad"][20:23, 1] = np.nan
    inputs["current_A"][30:33, 0] = np.nan
    inputs["gyro_rad_per_s"][40:42] = np.nan
    return inputs


if __name__ == "__main__":
    with np.errstate(all="ignore"):
        table = run(single(planar_leg()), swinging(), ticks=60, force_N=(3.0, 0.0, 40.0), cross_axis=(0.01, -0.02))
    np.savez(sys.argv[1], **table)
