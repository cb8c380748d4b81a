"""Swing zeros of a walk."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.errors import SessionError
from footcal.files.robot_log import RobotLog
from footcal.fit.engine import fit_sessions
from footcal.fit.swing import swing_session, swings_s
from footcal.sim.bench import STATIC_ONLY, run_session
from footcal.sim.sensors import draw_sensor
from footcal.sim.trials import SimulatedTrial, stance_trial
from tests.simulated import as_session


def as_log(trial: SimulatedTrial) -> RobotLog:
    """A trial as the log of a robot with one foot and no motors."""
    n = len(trial.t_s)
    none = np.zeros((n, 1, 0))
    return RobotLog(
        ("paw",),
        (0,),
        trial.t_s,
        raw=trial.raw[:, None],
        temp_C=trial.temp_C[:, None],
        q_rad=none,
        dq_rad_per_s=none,
        current_A=none,
        motor_temp_C=none,
        quat_WB=np.full((n, 4), np.nan),
        gyro_B_rad_per_s=np.full((n, 3), np.nan),
        accel_B_m_per_s2=np.full((n, 3), np.nan),
        metadata={},
    )


def test_swings_lie_between_stances_with_their_ends_cut_off() -> None:
    """Two stances of 0.5 s with 0.4 s between: 40 ms after lift-off, 30 ms before touchdown (to 2 ms)."""
    t_s = np.arange(0.0, 2.0, 0.001)
    force = np.where((t_s >= 0.3) & (t_s < 0.8), 100.0, 0.0) + np.where((t_s >= 1.2) & (t_s < 1.7), 100.0, 0.0)
    assert swings_s(t_s, force) == [pytest.approx((0.84, 1.17), abs=0.002)]


def test_a_static_session_with_swings_becomes_dynamic_and_reads_walking_no_worse() -> None:
    """An off-axis cell on a walk it has not seen, with and without the swings of another walk."""
    rng = np.random.default_rng(130)
    sensor = draw_sensor("C", rng)
    bench = as_session(run_session(sensor, rng, parts=STATIC_ONLY))
    static = fit_sessions([bench])
    walk = swing_session(static.calibration, as_log(stance_trial(sensor, rng, lasts_s=40.0)), "paw", bench.meta)
    moving = fit_sessions([bench, walk])
    fresh = stance_trial(sensor, rng, lasts_s=30.0)
    errors = []
    for result in (static, moving):
        read = result.calibration.force(fresh.t_s, fresh.raw, fresh.temp_C).force_N
        errors.append(float(np.std((read - fresh.force_N)[fresh.scored > 0.0])))
    assert not static.calibration.file.validity.dynamic
    assert moving.calibration.file.validity.dynamic
    assert errors[1] < 1.05 * errors[0]


def test_a_log_of_standing_holds_no_swings() -> None:
    """Refused with how many were found."""
    rng = np.random.default_rng(131)
    sensor = draw_sensor("B", rng)
    bench = as_session(run_session(sensor, rng, parts=("cycles",)))
    trial = stance_trial(sensor, rng, lasts_s=4.0)
    with pytest.raises(SessionError, match="swings were found"):
        swing_session(fit_sessions([bench]).calibration, as_log(trial), "paw", bench.meta)
