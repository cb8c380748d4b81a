"""Errors of calibrated feet on another day: static loads, walking and standing, against the simulated truth."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

import numpy as np

from footcal.fit.engine import FitResult, fit_sessions
from footcal.records import FloatArray
from footcal.sensor.compensator import Compensator
from footcal.sim.bench import PARTS, run_session
from footcal.sim.noise import window_mean, windows_s
from footcal.sim.sensors import draw_sensor
from footcal.sim.trials import CHANNEL_Hz, SimulatedTrial, stance_trial, stand_trial, static_trial
from tests.simulated import as_session, converted

KINDS = ("A", "B", "C", "P", "Q", "R")
TRIALS = {"static": static_trial, "stance": stance_trial, "stand": stand_trial}


@dataclass(frozen=True)
class TrialError:
    """Errors of one trial, per cent of full scale."""

    rms: float
    p99: float
    covered: float  # share inside two standard uncertainties
    straight: float  # RMS of the straight line with temperature
    cubic: float  # RMS of the cubic with temperature


def score_foot(kind: str, seed: int, parts: Iterable[str] = PARTS) -> dict[str, TrialError]:
    """Calibrate one simulated foot by a session of the named parts and return its errors on the three trials."""
    rng = np.random.default_rng(seed)
    sensor = draw_sensor(kind, rng)
    result = fit_sessions([as_session(run_session(sensor, rng, parts=tuple(parts)))])
    errors = {}
    for name, trial_of in TRIALS.items():
        trial = trial_of(sensor.day(rng), rng)
        rate_Hz = CHANNEL_Hz if name == "stance" else sensor.rate_Hz
        force_N, u_N = converted(result.calibration, trial)
        errors[name] = _error(result, trial, force_N, u_N, by_hold=name == "static", rate_Hz=rate_Hz)
    return errors


def loop_reduction(kind: str, seed: int) -> tuple[float, float]:
    """Return the loop's width of a pump recording that was never fitted, % of full scale: curve alone, whole model.

    Width: mean error while unloading less mean error while loading, over 30 to 60 % of full scale.
    """
    rng = np.random.default_rng(seed)
    sensor = draw_sensor(kind, rng)
    result = fit_sessions([as_session(run_session(sensor, rng))])
    fresh = run_session(sensor, rng, parts=("pump",))
    t_s, raw, temp_C = (np.asarray(fresh.readings[name]) for name in ("t_s", "raw", "temp_C"))
    true = window_mean(t_s, fresh.force_N, t_s, windows_s(t_s, 1.0 / sensor.rate_Hz)) / sensor.capacity_N
    whole = result.calibration.force(t_s, raw, temp_C).force_N / sensor.capacity_N
    model = result.calibration.sensor_model
    bare = replace(model, coefficients=np.eye(1, len(model.coefficients), 1)[0], lag_s=0.0)
    t_ns = np.rint(t_s * 1e9).astype(np.int64) + 1
    curve_alone = Compensator(bare).run(t_ns, raw, temp_C).force_N / sensor.capacity_N
    rate = np.gradient(true, t_s)
    inside = (true > 0.3) & (true < 0.6)
    rising, falling = inside & (rate > 0.2), inside & (rate < -0.2)
    widths = [
        100.0 * float(np.mean((read - true)[falling]) - np.mean((read - true)[rising])) for read in (curve_alone, whole)
    ]
    return widths[0], widths[1]


def _error(
    result: FitResult, trial: SimulatedTrial, force_N: FloatArray, u_N: FloatArray, *, by_hold: bool, rate_Hz: float
) -> TrialError:
    """Compare with the mean of the true force over the window that the converter averages."""
    scored = trial.scored > 0.0
    true_N = window_mean(trial.t_s, trial.force_N, trial.t_s, windows_s(trial.t_s, 1.0 / rate_Hz))
    off = 100.0 * (force_N - true_N) / result.calibration.capacity_N
    u = 100.0 * u_N / result.calibration.capacity_N
    plain = [100.0 * (plain_N - true_N) / result.calibration.capacity_N for plain_N in _plain(result, trial)]
    if by_hold:
        keys = trial.hold[scored].astype(int)
        counts = np.bincount(keys)

        def mean(values: FloatArray) -> FloatArray:
            sums = np.bincount(keys, weights=values[scored])
            return np.asarray(sums[counts > 0] / counts[counts > 0])

    else:

        def mean(values: FloatArray) -> FloatArray:
            return values[scored]

    size = np.abs(mean(off))
    return TrialError(
        rms=_rms(size),
        p99=float(np.quantile(size, 0.99)),
        covered=float(np.mean(size <= 2.0 * mean(u))),
        straight=_rms(mean(plain[0])),
        cubic=_rms(mean(plain[1])),
    )


def _rms(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values**2)))


def _plain(result: FitResult, trial: SimulatedTrial) -> list[FloatArray]:
    """Return what a straight line and a cubic, each with zero and span straight in temperature, make of the trial."""
    data, rows = result.data, result.rows
    holds = ~rows.pump
    start, stop = rows.start[holds], rows.stop[holds]
    raw = np.array([data.channel.raw[a:b].mean() for a, b in zip(start, stop, strict=True)])
    temp = np.array([data.channel.temp_C[a:b].mean() for a, b in zip(start, stop, strict=True)]) - data.temp_ref_C
    target = rows.target[holds] * data.capacity_N
    rest = trial.raw[trial.t_s < 4.0].mean()
    found = []
    for degree in (1, 3):
        powers = [raw**j / np.abs(raw).max() ** j for j in range(degree + 1)]
        design = np.column_stack([*powers, temp, temp * powers[1]])
        coefficients = np.linalg.lstsq(design, target, rcond=None)[0]

        def force(values: FloatArray, temp_C: FloatArray, c: FloatArray = coefficients, n: int = degree) -> FloatArray:
            scaled = values / np.abs(raw).max()
            return np.asarray(
                sum(c[j] * scaled**j for j in range(n + 1)) + (temp_C - data.temp_ref_C) * (c[-2] + c[-1] * scaled)
            )

        zero = float(force(np.array([rest]), trial.temp_C[:1])[0])
        found.append(force(trial.raw, trial.temp_C) - zero)
    return found
