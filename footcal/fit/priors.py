"""What is believed of the coefficients before any data, in natural units (shares of full scale).

A column that the session hardly excites must not be blown up, so priors stand on the coefficients themselves, not on
scaled columns. The creep gains are tied to their neighbours over log time: a spectrum is smooth. That smoothness
is what carries a session of slow holds over to walking.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from footcal.records import BoolArray, FloatArray
from footcal.sensor.model import CREEP_BY_TEMPERATURE, CREEPS, N_FEATURES, PLAYS, PLAYS_BY_LOAD, POWERS, TEMPERATURE

POLYNOMIAL_SD: Final = 10.0
TEMPERATURE_SD: Final = 1.0
PLAY_SD: Final = 0.15
CREEP_SD_PER_RMS: Final = 3.0
CREEP_STEP_SD_PER_RMS: Final = 0.2
CREEP_BY_TEMPERATURE_SD: Final = 1.0
SMALLEST_CREEP_RMS: Final = 1e-5


def prior_rows(active: BoolArray, creep_rms: float) -> FloatArray:
    """Return the priors as rows P with P . coefficients ~ N(0, 1), one column an active feature, shape (p, k).

    Args:
        active: which features are fitted, shape (32,).
        creep_rms: RMS creep gain, which sets the scale of the creep priors.
    """
    rms = max(creep_rms, SMALLEST_CREEP_RMS)
    sd = np.empty(N_FEATURES)
    sd[POWERS] = POLYNOMIAL_SD
    sd[TEMPERATURE] = TEMPERATURE_SD
    sd[PLAYS] = PLAY_SD
    sd[PLAYS_BY_LOAD] = PLAY_SD
    sd[CREEPS] = CREEP_SD_PER_RMS * rms
    sd[CREEP_BY_TEMPERATURE] = CREEP_BY_TEMPERATURE_SD
    rows = [np.diag(1.0 / sd)]
    first, last = CREEPS.start, CREEPS.stop
    if active[CREEPS].all():
        steps = np.zeros((last - first - 1, N_FEATURES))
        for k in range(last - first - 1):
            steps[k, first + k], steps[k, first + k + 1] = 1.0, -1.0
        rows.append(steps / (CREEP_STEP_SD_PER_RMS * rms))
    stacked = np.vstack(rows)[:, active]
    return np.asarray(stacked[np.any(stacked != 0.0, axis=1)])
