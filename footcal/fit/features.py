"""The model's features averaged over rows of samples, by the very functions that the runtime kernel calls."""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit

from footcal.records import SENSOR_GAP_NS, FloatArray, IntArray
from footcal.sensor.cachekey import source_key
from footcal.sensor.compensator import CONSTANTS_DTYPE, STATE_DTYPE
from footcal.sensor.creep import CREEP_TAU_S
from footcal.sensor.hysteresis import PLAY_HALF_WIDTH
from footcal.sensor.kernel import advance_state, start_state, write_features
from footcal.sensor.model import N_FEATURES


def _make_run(key: int) -> Any:
    @njit(cache=True, error_model="numpy")
    def run(
        t_ns: Any, v: Any, theta: Any, gap_ns: int, states: Any, constants: Any, start: Any, stop: Any, out: Any
    ) -> None:
        if key == 0:
            return
        s = states[0]
        c = constants[0]
        row = 0
        for i in range(v.shape[0]):
            if i == 0 or t_ns[i] - t_ns[i - 1] > gap_ns:
                start_state(t_ns[i], v[i], s, c, 0)
            else:
                advance_state(t_ns[i] - t_ns[i - 1], v[i], s, c, 0)
            s.sen_v[0] = v[i]
            while row < start.shape[0] and i >= stop[row]:
                row += 1
            if row < start.shape[0] and i >= start[row]:
                s.sen_phi[1, 0] = v[i]
                write_features(v[i], theta[i], s, c, 0)
                for j in range(32):
                    out[row, j] += s.sen_phi[j, 0]
        for r in range(start.shape[0]):
            for j in range(32):
                out[r, j] /= stop[r] - start[r]

    return run


_run = _make_run(source_key("footcal.sensor", "footcal.fit"))


def mean_features(
    t_ns: IntArray, v: FloatArray, theta: FloatArray, creep_undone: FloatArray, start: IntArray, stop: IntArray
) -> FloatArray:
    """Return the mean features of each row of samples, shape (rows, 32).

    Args:
        t_ns: sample times, shape (n,), nanoseconds.
        v: apparent force over full scale, shape (n,).
        theta: scaled temperature, shape (n,); 0 where there is none.
        creep_undone: gains that make v_2 from v, shape (8,).
        start: first sample of each row, shape (rows,), rising; rows do not overlap.
        stop: one past the last sample of each row, shape (rows,).
    """
    states, constants = np.zeros(1, dtype=STATE_DTYPE), np.zeros(1, dtype=CONSTANTS_DTYPE)
    constants[0]["sen_tau_s"][:, 0] = CREEP_TAU_S
    constants[0]["sen_h"][:, 0] = PLAY_HALF_WIDTH
    constants[0]["sen_g"][:, 0] = creep_undone
    out = np.zeros((len(start), N_FEATURES))
    _run(t_ns, np.ascontiguousarray(v), np.ascontiguousarray(theta), SENSOR_GAP_NS, states, constants, start, stop, out)
    return out
