"""From raw counts to a normalised reading x: divider wirings undone, zero and span taken out, curvature bent.

Law: u is the raw value itself (cells, magnetic and capacitive pads) or the ratio of the two arms of a voltage divider,
raw / (max - raw) for a pad wired to the supply and (max - raw) / raw for a pad wired to ground. Then
x = (u - u_zero) / (u_span - u_zero), and for dividers x <- sign(x) ((|x| + e)^gamma - e^gamma), because the
conductance of a pressed pad grows like a power of the load (common practice, no source).
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numba import njit

from footcal.records import FloatArray

COUNTS: Final = 0
PAD_TO_SUPPLY: Final = 1
PAD_TO_GROUND: Final = 2
WIRINGS: Final = {"counts": COUNTS, "pad_to_supply": PAD_TO_SUPPLY, "pad_to_ground": PAD_TO_GROUND}
POWER_OFFSET: Final = 0.02  # e: keeps the power's slope finite at zero load
EDGE_SHARE: Final = 1e-3  # a divider reading nearer than this to an end of its range carries no information


@njit(error_model="numpy")
def arm_ratio(raw: float, raw_max: float, wiring: int) -> float:
    """Return u for one reading (see the module's law); no dimension for dividers, counts otherwise."""
    if wiring == 0:
        return raw
    lowest = 1e-3 * raw_max
    clipped = min(max(raw, lowest), raw_max - lowest)
    if wiring == 1:
        return clipped / (raw_max - clipped)
    return (raw_max - clipped) / clipped


@njit(error_model="numpy")
def arm_ratio_slope(raw: float, raw_max: float, wiring: int) -> float:
    """Return du/draw at one reading; 0 beyond the clipped ends of a divider."""
    if wiring == 0:
        return 1.0
    lowest = 1e-3 * raw_max
    if raw < lowest or raw > raw_max - lowest:
        return 0.0
    if wiring == 1:
        return raw_max / ((raw_max - raw) * (raw_max - raw))
    return -raw_max / (raw * raw)


@njit(error_model="numpy")
def bend(x: float, gamma: float, offset: float) -> float:
    """Return sign(x) ((|x| + offset)^gamma - offset^gamma); x itself where gamma is 1."""
    if gamma == 1.0:
        return x
    size: float = (abs(x) + offset) ** gamma - offset**gamma
    return size if x >= 0.0 else -size


@njit(error_model="numpy")
def bend_slope(x: float, gamma: float, offset: float) -> float:
    """Return the derivative of `bend` by x."""
    if gamma == 1.0:
        return 1.0
    slope: float = gamma * (abs(x) + offset) ** (gamma - 1.0)
    return slope


@njit(error_model="numpy")
def _arm_ratios(raw: FloatArray, raw_max: float, wiring: int) -> FloatArray:
    u = np.empty(raw.shape[0])
    for i in range(raw.shape[0]):
        u[i] = arm_ratio(raw[i], raw_max, wiring)
    return u


def arm_ratios(raw: FloatArray, raw_max: float, wiring: str) -> FloatArray:
    """Return u for each raw reading, shape (n,); `wiring` is one of WIRINGS."""
    return _arm_ratios(np.ascontiguousarray(raw, dtype=np.float64), raw_max, WIRINGS[wiring])


@njit(error_model="numpy")
def _bent(x: FloatArray, gamma: float, offset: float) -> FloatArray:
    out = np.empty(x.shape[0])
    for i in range(x.shape[0]):
        out[i] = bend(x[i], gamma, offset)
    return out


def normalised(ratio: FloatArray, *, u_zero: float, u_span: float, gamma: float) -> FloatArray:
    """Return x for each ratio u, shape (n,), no dimension: 0 unloaded, near 1 at the top load (before bending)."""
    return _bent((np.asarray(ratio, dtype=np.float64) - u_zero) / (u_span - u_zero), gamma, POWER_OFFSET)
