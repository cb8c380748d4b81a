"""Checks on a finished fit: the reading must rise with the load everywhere, and loops must take energy, not give it."""

from __future__ import annotations

import numpy as np

from footcal.errors import FitRefusedError
from footcal.fit.passes import Fitted
from footcal.sensor.hysteresis import PLAY_HALF_WIDTH
from footcal.sensor.model import CREEPS, PLAYS, PLAYS_BY_LOAD, POWERS


def smallest_slope(fitted: Fitted, points: int = 200) -> tuple[float, float]:
    """Return the smallest slope of force against apparent force over the fitted range, and where (share of full scale).

    The slope right after a turn: sum j a_j v^(j-1) + sum g_k - sum max(w_i + w'_i v, 0).
    """
    v = np.linspace(0.0, float(np.max(fitted.features[:, 1])), points)
    a = fitted.coefficients[POWERS]
    slope = sum(j * a[j] * v ** (j - 1) for j in range(1, len(a)))
    loops = fitted.coefficients[PLAYS][:, None] + fitted.coefficients[PLAYS_BY_LOAD][:, None] * v
    slope = slope + float(np.sum(fitted.coefficients[CREEPS])) - np.sum(np.maximum(loops, 0.0), axis=0)
    lowest = int(np.argmin(slope))
    return float(slope[lowest]), float(v[lowest])


def loop_width(fitted: Fitted) -> float:
    """Return the width of the fitted loop at mid-range, share of full scale: force loading less force unloading.

    At the same reading a sensor that lags carries less force while it is unloaded, so the width is positive and the
    loop takes energy: F_loading - F_unloading = -2 sum (w_i + w'_i v) h_i.
    """
    v = 0.5 * float(np.max(fitted.features[:, 1]))
    weights = fitted.coefficients[PLAYS] + fitted.coefficients[PLAYS_BY_LOAD] * v
    return -2.0 * float(weights @ np.array(PLAY_HALF_WIDTH))


def check_shape(fitted: Fitted, foot_id: str) -> None:
    """Refuse a model that is not monotone.

    Raises:
        FitRefusedError: the force falls while the reading rises, somewhere in the range.
    """
    slope, where = smallest_slope(fitted)
    if slope <= 0.0:
        raise FitRefusedError(
            foot_id,
            f"the fitted force would fall while the reading rises, near {100.0 * where:.0f} % of full scale",
            "Check the masses of the steps near there, and take more loads.",
        )
