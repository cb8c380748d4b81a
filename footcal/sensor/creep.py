"""Creep: what a steady load goes on adding to, or taking from, the reading.

Law: a spectrum of first-order states, c_k = v - LP_k[v], k = 1..8, with time constants spaced evenly in log time. LP_k
is the exact response of a first-order lag to an input that runs straight between samples (first-order hold), so that
one set of gains serves 80 Hz and 1 kHz:
    y+ = a y + (1 - phi) v+ + (phi - a) v,   a = exp(-dt / tau),   phi = (1 - a) tau / dt.
Source: a sum of exponential terms for load-cell creep is the form used in the NIST study of 65 cells (PubMed 27805151);
first-order-hold discretisation is textbook material (e.g. Franklin, Powell, Workman: Digital Control, from memory).
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numba import njit

from footcal.records import SENSOR_GAP_NS, FloatArray, IntArray

N_CREEP: Final = 8
CREEP_TAU_S: Final = tuple(float(tau) for tau in np.geomspace(0.008, 160.0, N_CREEP))


@njit(error_model="numpy")
def lag_step(y: float, v_old: float, v_new: float, a: float, phi: float) -> float:
    """Return the lagged value after one interval over which the input ran straight from v_old to v_new."""
    return a * y + (1.0 - phi) * v_new + (phi - a) * v_old


@njit(error_model="numpy")
def hold_factors(dt_s: float, tau_s: float) -> tuple[float, float]:
    """Return a and phi of the module's law for one interval; a series near dt = 0 keeps phi exact."""
    ratio = dt_s / tau_s
    a = np.exp(-ratio)
    phi = 1.0 - 0.5 * ratio if ratio < 1e-6 else -np.expm1(-ratio) / ratio
    return a, phi


@njit(error_model="numpy")
def _lagged(t_ns: IntArray, v: FloatArray, tau_s: float, gap_ns: int) -> FloatArray:
    y = np.empty(v.shape[0])
    last_dt = -1
    a = 1.0
    phi = 1.0
    for i in range(v.shape[0]):
        if i == 0 or t_ns[i] - t_ns[i - 1] > gap_ns:
            y[i] = v[i]
            continue
        dt = t_ns[i] - t_ns[i - 1]
        if dt != last_dt:
            a, phi = hold_factors(dt * 1e-9, tau_s)
            last_dt = dt
        y[i] = lag_step(y[i - 1], v[i - 1], v[i], a, phi)
    return y


def lagged(t_ns: IntArray, v: FloatArray, tau_s: float) -> FloatArray:
    """Return v through a first-order lag, shape (n,); starts settled, and again after a gap of more than 60 s."""
    return _lagged(t_ns, np.ascontiguousarray(v, dtype=np.float64), tau_s, SENSOR_GAP_NS)


def creep_columns(t_ns: IntArray, v: FloatArray) -> FloatArray:
    """Return the creep features v - LP_k[v], shape (n, 8), for the time constants CREEP_TAU_S.

    Args:
        t_ns: sample times, shape (n,), nanoseconds, rising.
        v: apparent force over full scale, shape (n,).
    """
    return np.column_stack([v - lagged(t_ns, v, tau_s) for tau_s in CREEP_TAU_S])
