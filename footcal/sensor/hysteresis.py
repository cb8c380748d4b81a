"""Hysteresis: play operators, whose weighted sum (Prandtl-Ishlinskii) is its own kind of inverse.

Law: Play_h[v] follows v with a backlash of half width h: p+ = max(v - h, min(v + h, p)). The features are p - v,
so that weights of zero leave the curve alone. Source: M. A. Krasnosel'skii and A. V. Pokrovskii, Systems with
Hysteresis (1989); closed inverse: K. Kuhnen, Eur. J. Control 9 (2003) 407-418.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numba import njit

from footcal.records import SENSOR_GAP_NS, FloatArray, IntArray

N_PLAY: Final = 6
PLAY_HALF_WIDTH: Final = (0.01, 0.03, 0.07, 0.13, 0.22, 0.36)  # of full scale


@njit(error_model="numpy")
def play_step(p: float, v: float, h: float) -> float:
    """Return the play operator's output after its input has moved to v."""
    return max(v - h, min(v + h, p))


@njit(error_model="numpy")
def _plays(t_ns: IntArray, v: FloatArray, h: FloatArray, gap_ns: int) -> FloatArray:
    features = np.empty((v.shape[0], h.shape[0]))
    state = np.empty(h.shape[0])
    for i in range(v.shape[0]):
        fresh = i == 0 or t_ns[i] - t_ns[i - 1] > gap_ns
        for k in range(h.shape[0]):
            state[k] = v[i] + h[k] if fresh else play_step(state[k], v[i], h[k])  # fresh: as after press and release
            features[i, k] = state[k] - v[i]
    return features


def play_columns(t_ns: IntArray, v: FloatArray) -> FloatArray:
    """Return the features Play_h[v] - v, shape (n, 6), for the half widths PLAY_HALF_WIDTH.

    Args:
        t_ns: sample times, shape (n,), nanoseconds, rising; a gap of more than 60 s starts the operators afresh.
        v: apparent force over full scale, creep undone, shape (n,).
    """
    return _plays(t_ns, np.ascontiguousarray(v, dtype=np.float64), np.array(PLAY_HALF_WIDTH), SENSOR_GAP_NS)


def prandtl_ishlinskii(
    x: FloatArray, half_widths: FloatArray, weights: FloatArray, start: FloatArray | None = None
) -> FloatArray:
    """Return sum_i w_i Play_{h_i}[x], shape (n,); the operators start at `start` (0 where not given).

    Args:
        x: input, shape (n,).
        half_widths: shape (m,), rising; 0 gives the input itself.
        weights: shape (m,).
        start: states before the first sample, shape (m,).
    """
    states = np.zeros(len(half_widths)) if start is None else np.array(start, dtype=np.float64)
    y = np.empty(len(x))
    for i, value in enumerate(x):
        states = np.maximum(value - half_widths, np.minimum(value + half_widths, states))
        y[i] = weights @ states
    return y


def inverse_parameters(half_widths: FloatArray, weights: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return half widths and weights of the operator that undoes `prandtl_ishlinskii`.

    Source: Kuhnen 2003, as quoted above. Needs w_0 > 0 and every partial sum of the weights positive.
    """
    sums = np.cumsum(weights)
    new_widths = np.array(
        [np.sum(weights[: i + 1] * (half_widths[i] - half_widths[: i + 1])) for i in range(len(weights))]
    )
    new_weights = np.empty(len(weights))
    new_weights[0] = 1.0 / weights[0]
    new_weights[1:] = -weights[1:] / (sums[1:] * sums[:-1])
    return new_widths, new_weights
