"""Temperature terms: zero and span that move with the temperature of the sensor body.

Law: theta = (T_lp - T_0) / 16 K, T_lp the thermometer's reading through a first-order lag (the sensor body follows its
thermometer, or the other way round); the terms are theta (t_0 + t_1 z + t_2 z^2) + theta^2 (t_3 + t_4 z), z the
curve's argument. 16 K is a scale, chosen so that theta is near +-1 at the usual 8 and 38 degrees.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numba import njit

from footcal.records import FloatArray

THETA_SCALE_K: Final = 16.0
N_TEMPERATURE: Final = 5


@njit(error_model="numpy")
def theta_of(temp_C: float, temp_ref_C: float) -> float:
    """Return the scaled temperature difference, no dimension."""
    return (temp_C - temp_ref_C) / 16.0


@njit(error_model="numpy")
def temperature_terms(theta: float, z: float, t0: float, t1: float, t2: float, t3: float, t4: float) -> float:
    """Return the sum of the five temperature terms at one sample."""
    return theta * (t0 + z * (t1 + z * t2)) + theta * theta * (t3 + z * t4)


def temperature_columns(theta: FloatArray, z: FloatArray) -> FloatArray:
    """Return the columns theta, theta z, theta z^2, theta^2, theta^2 z, shape (n, 5)."""
    return np.column_stack([theta, theta * z, theta * z**2, theta**2, theta**2 * z])
