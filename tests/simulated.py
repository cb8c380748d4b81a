"""Simulated sessions and trials for tests and scoring, in the forms that the product reads."""

from __future__ import annotations

import numpy as np
import pandas as pd

from footcal.calfile import Calibration
from footcal.calfile.tare import find_tare
from footcal.errors import SettingError
from footcal.files.session import Session, session_from_tables
from footcal.files.session_meta import meta_from_mapping
from footcal.records import NS_PER_S, FloatArray
from footcal.sim.bench import SimulatedSession
from footcal.sim.trials import REST_s, SimulatedTrial


def as_session(simulated: SimulatedSession) -> Session:
    """Return what a session folder of this simulation would be read as."""
    reference = None if simulated.reference is None else pd.DataFrame(simulated.reference)
    return session_from_tables(
        meta_from_mapping(simulated.meta, "simulated session"),
        pd.DataFrame(simulated.readings),
        pd.DataFrame(simulated.steps),
        reference=reference,
    )


def converted(calibration: Calibration, trial: SimulatedTrial) -> tuple[FloatArray, FloatArray]:
    """Return force and standard uncertainty of a trial, tared on its unloaded start where the curve allows it."""
    t_ns = np.rint(trial.t_s * NS_PER_S).astype(np.int64)
    start = trial.t_s < 0.9 * REST_s
    compensator = calibration.compensator()
    try:
        tare = find_tare(calibration, t_ns[start], trial.raw[start], trial.temp_C[start], "trial", rest_N=0.0)
        compensator.tare_raw = tare.raw
    except SettingError:
        pass  # the dead band of a divider pad: used as it is, as the product says
    columns = compensator.run(t_ns, trial.raw, trial.temp_C)
    return columns.force_N, columns.u_N
