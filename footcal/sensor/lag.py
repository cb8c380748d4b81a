"""Sensor lag: a first-order delay of sensor and amplifier, undone once, on the raw reading.

Law: the lag turns an input that runs straight between samples into raw+ = a raw + (1 - phi) x+ + (phi - a) x, a and
phi of the first-order hold (see creep.py); solved for the newest input,
    x+ = (raw+ - a raw - (phi - a) x) / (1 - phi),
which is exact for such inputs and stable, since 0 < phi - a < 1 - phi. White noise passes with the gain `noise_gain`:
twofold for a lag of half a sample interval. Below 300 samples a second the lag is shorter than what sampling leaves of
it, and stays in.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numba import njit

from footcal.sensor.creep import hold_factors

SLOWEST_LEAD_S: Final = 1.0 / 300.0


@njit(error_model="numpy")
def undo_lag(raw: float, raw_old: float, undone_old: float, a: float, phi: float) -> float:
    """Return the input behind the newest reading, from the last reading and the last input found."""
    return (raw - a * raw_old - (phi - a) * undone_old) / (1.0 - phi)


def noise_gain(lag_s: float, dt_s: float) -> float:
    """Return the factor on the standard deviation of white noise when a lag is undone; 1 where nothing is undone.

    From the impulse response of `undo_lag`: 1, -(a + p), (a + p) p, ... over 1 - phi, with p = (phi - a) / (1 - phi).
    """
    if lag_s <= 0.0 or dt_s > SLOWEST_LEAD_S:
        return 1.0
    a, phi = hold_factors(dt_s, lag_s)
    p = (phi - a) / (1.0 - phi)
    return float(np.sqrt(1.0 + (a + p) ** 2 / (1.0 - p * p)) / (1.0 - phi))
