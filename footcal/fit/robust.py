"""Huber weights and robust scales: a few bad rows must not bend the curve.

Source: P. J. Huber, Robust Statistics (1981); the tuning constant 2.5 keeps 99 % efficiency on normal errors.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from footcal.records import FloatArray, IntArray

PUMP: Final = -1
SWING: Final = -2
HUBER_K: Final = 2.5
MAD_TO_SD: Final = 1.482602218505602  # 1 / Phi^-1(3/4)


def robust_sd(values: FloatArray) -> float:
    """Return the standard deviation of normal values about zero that has the same median size; 0 for no values."""
    return MAD_TO_SD * float(np.median(np.abs(values))) if len(values) else 0.0


def huber_weights(scaled: FloatArray) -> FloatArray:
    """Return the weight of each residual over its scale, shape (n,): 1 inside 2.5, falling as 2.5/|r| outside."""
    return HUBER_K / np.maximum(np.abs(scaled), HUBER_K)


def row_scales(residual: FloatArray, source: IntArray, floor: float) -> FloatArray:
    """Return the robust scale of each row, shape (n,): one for holds, one for pump rows, one for swings.

    An unloaded foot that reads the same a thousand times over must not outweigh every load, so swings never count for
    more than settled holds.

    Args:
        residual: shape (n,).
        source: what each row comes from, shape (n,): 0 or more a hold, PUMP, or SWING.
        floor: smallest scale.
    """
    settled = max(robust_sd(residual[source >= 0]), floor)
    pump = max(robust_sd(residual[source == PUMP]), floor)
    swing = max(robust_sd(residual[source == SWING]), settled)
    return np.select([source >= 0, source == PUMP], [settled, pump], swing)
