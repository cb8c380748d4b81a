"""Huber weights and robust scales: a few bad rows must not bend the curve.

Source: P. J. Huber, Robust Statistics (1981); the tuning constant 2.5 keeps 99 % efficiency on normal errors.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from footcal.records import BoolArray, FloatArray

HUBER_K: Final = 2.5
MAD_TO_SD: Final = 1.482602218505602  # 1 / Phi^-1(3/4)


def robust_sd(values: FloatArray) -> float:
    """Return the standard deviation of normal values about zero that has the same median size; 0 for no values."""
    return MAD_TO_SD * float(np.median(np.abs(values))) if len(values) else 0.0


def huber_weights(scaled: FloatArray) -> FloatArray:
    """Return the weight of each residual over its scale, shape (n,): 1 inside 2.5, falling as 2.5/|r| outside."""
    return HUBER_K / np.maximum(np.abs(scaled), HUBER_K)


def row_scales(residual: FloatArray, pump: BoolArray, floor: float) -> FloatArray:
    """Return the robust scale of each row, shape (n,): one scale for holds, another for pump rows.

    Moving data never count for more than settled holds: an unloaded foot that reads the same a thousand times over
    would otherwise outweigh every load.
    """
    settled = max(robust_sd(residual[~pump]), floor)
    return np.where(pump, max(robust_sd(residual[pump]), settled), settled)
