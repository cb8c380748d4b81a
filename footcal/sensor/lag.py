"""Sensor lag: a first-order delay of the electronics, undone once, on the raw reading.

Law: r_f = LP_Tf[raw], y = r_f + (T_lag + T_f) dr_f/dt = r_f + (T_lag + T_f)(raw - r_f) / T_f with T_f = 1 ms. White
noise at 1 kHz passes with the gain `noise_gain`. Below 300 samples a second the lag cannot be undone and stays in.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numba import njit

LEAD_FILTER_S: Final = 0.001
SLOWEST_LEAD_S: Final = 1.0 / 300.0


@njit(error_model="numpy")
def lead_step(filtered: float, raw: float, lag_s: float, filter_s: float) -> float:
    """Return the reading with its lag undone, from the filtered and the new raw reading."""
    return filtered + (lag_s + filter_s) * (raw - filtered) / filter_s


def noise_gain(lag_s: float, dt_s: float) -> float:
    """Return the factor on the standard deviation of white noise when a lag is undone; 1 where nothing is undone.

    From y = r_f + G (raw - r_f), G = (T_lag + T_f) / T_f, r_f+ = a r_f + (1 - a) raw (held noise, by hand).
    """
    if lag_s <= 0.0 or dt_s > SLOWEST_LEAD_S:
        return 1.0
    gain = (lag_s + LEAD_FILTER_S) / LEAD_FILTER_S
    a = float(np.exp(-dt_s / LEAD_FILTER_S))
    direct = 1.0 - a + gain * a
    tail = (1.0 - gain) * (1.0 - a) * a
    return float(np.hypot(direct, tail / np.sqrt(1.0 - a * a)))
