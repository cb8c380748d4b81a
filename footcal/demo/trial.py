"""Calibrating the demo's feet from their packaged sessions, and trying each on another day against the truth."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

import numpy as np

from footcal.calfile import Calibration
from footcal.calfile.tare import find_tare
from footcal.demo.feet import DemoFoot, sessions_of
from footcal.errors import SettingError
from footcal.fit.engine import fit_sessions
from footcal.fit.outcome import FitResult
from footcal.records import NS_PER_S
from footcal.sensor.compensator import ForceColumns
from footcal.sim.trials import SimulatedTrial, stance_trial, static_trial

TRIAL_SEED: Final = 909
STANCE_s: Final = 20.0
TARE_s: Final = 4.0  # the trials start with five seconds unloaded


@dataclass(frozen=True, slots=True, eq=False)
class TriedFoot:
    """One foot: its fit, its calibration, and its errors on a day the fit never saw."""

    foot: DemoFoot
    result: FitResult
    calibration: Calibration
    static_pct_FS: float  # RMS over settled holds of any load, temperature moving from 14 to 30 °C
    stance_pct_FS: float  # RMS over the stances of a simulated walk at 1 kHz
    covered_pct: float  # of the settled samples lie inside the stated ±2u


def try_foot(foot: DemoFoot, data: Path) -> TriedFoot:
    """Calibrate a foot from its sessions and try it, tared on the unloaded start of each trial as a user would.

    The trials know no foot below the sensor, so their rest is zero.
    """
    result = fit_sessions(sessions_of(foot, data))
    calibration = dated(result)
    sensor = foot.sensor().day(np.random.default_rng([foot.seed, TRIAL_SEED]))
    static = static_trial(sensor, np.random.default_rng([foot.seed, TRIAL_SEED, 1]))
    stance = stance_trial(sensor, np.random.default_rng([foot.seed, TRIAL_SEED, 2]), lasts_s=STANCE_s)
    static_pct, covered = _errors(calibration, static)
    return TriedFoot(foot, result, calibration, static_pct, _errors(calibration, stance)[0], covered)


def dated(result: FitResult) -> Calibration:
    """Return the calibration dated by its session instead of by the clock, so that two runs give equal files."""
    content: dict[str, Any] = result.calibration.file.model_dump(mode="json", exclude={"sha256"})
    start = result.data.sessions[-1].meta.start_utc
    if start is not None:
        content["provenance"]["made_utc"] = start.isoformat()
    content["notes"].append("invented data: made by footcal's simulator, no real sensor")
    return Calibration.from_content(content)


def _tared(calibration: Calibration, trial: SimulatedTrial) -> ForceColumns:
    """Convert a trial with its unloaded start as zero; a pad that is flat at zero refuses that and goes without."""
    t_ns = np.rint(trial.t_s * NS_PER_S).astype(np.int64)
    start = trial.t_s < TARE_s
    compensator = calibration.compensator()
    with suppress(SettingError):
        tare = find_tare(calibration, t_ns[start], trial.raw[start], trial.temp_C[start], "trial", rest_N=0.0)
        compensator.tare_raw = tare.raw
    return compensator.run(t_ns, trial.raw, trial.temp_C)


def _errors(calibration: Calibration, trial: SimulatedTrial) -> tuple[float, float]:
    """Return the RMS error in per cent of full scale, and how many per cent of the samples lie inside ±2u."""
    columns = _tared(calibration, trial)
    scored = trial.scored > 0.0
    error_N = (columns.force_N - trial.force_N)[scored]
    inside = np.abs(error_N) <= 2.0 * columns.u_N[scored]
    return float(100.0 * np.sqrt(np.mean(error_N**2)) / calibration.capacity_N), float(100.0 * inside.mean())
