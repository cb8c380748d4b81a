"""Small sensor models for tests."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from footcal.sensor.model import N_FEATURES, SensorModel


def straight_line(**changes: Any) -> SensorModel:
    """Return a cell of 100 N full scale that gives 10 counts a newton, with nothing but a line."""
    coefficients = np.zeros(N_FEATURES)
    coefficients[1] = 1.0
    line = SensorModel(
        capacity_N=100.0,
        wiring="counts",
        raw_max=2000.0,
        raw_min=-2000.0,
        u_zero=0.0,
        u_span=1000.0,
        gamma=1.0,
        temp_ref_C=22.0,
        thermometer_lag_s=0.0,
        curve=np.array([0.0, 1.0, 0.0, 0.0, 0.0, 0.0]),
        curve_temperature=np.zeros(5),
        creep_undone=np.zeros(8),
        coefficients=coefficients,
        lag_s=0.0,
        force_min_N=0.0,
        force_max_N=100.0,
        temp_min_C=10.0,
        temp_max_C=40.0,
        dynamic=True,
        settle_s=1.0,
        settle_swing=0.1,
    )
    return replace(line, **changes)


def with_memory(**changes: Any) -> SensorModel:
    """Return the same cell with a loop, creep and a temperature term."""
    line = straight_line()
    coefficients = line.coefficients.copy()
    coefficients[12], coefficients[27], coefficients[7], coefficients[31] = -0.2, 0.03, 0.01, 0.3
    undone = np.zeros(8)
    undone[4] = 0.03
    return replace(line, coefficients=coefficients, creep_undone=undone, **changes)
