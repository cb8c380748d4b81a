"""The filter alone, driven by shared fields that the test writes itself (no sensor and no leg part)."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numba import njit
from numpy.typing import NDArray

from footcal.fusion.fields import (
    filter_constant_fields,
    filter_state_fields,
    joined,
    one_record,
    out_dtype,
    shared_state_fields,
    tick_dtype,
)
from footcal.fusion.model import FusionSettings, fill_filter_constants
from footcal.fusion.model_rows import readings, upright
from footcal.fusion.step import emit, filter_step, fuse, take_time
from footcal.sensor.cachekey import source_key
from footcal.sensor.fields import sensor_constant_fields

LEVEL = np.array([0.0, 0.0, -9.81])


def _make(key: int) -> tuple[Any, Any]:
    """Compile both entries, kept on disk under a number that changes with the sources."""

    @njit(cache=True, error_model="numpy")
    def linear(inp: Any, gravity: Any, S: Any, C: Any) -> None:
        s, c = S[0], C[0]
        if key != 0 and take_time(inp[0].t_ns, s):
            upright(inp[0], gravity, s)
            readings(s, c)
            filter_step(s, c)

    @njit(cache=True, error_model="numpy")
    def whole(inp: Any, gravity: Any, S: Any, C: Any, out: Any) -> None:
        s, c = S[0], C[0]
        if key != 0 and take_time(inp[0].t_ns, s):
            upright(inp[0], gravity, s)
            fuse(inp[0], s, c)
            emit(s, out[0])

    return linear, whole


_linear, _whole = _make(source_key("footcal.fusion", "footcal.sensor"))


@lru_cache(maxsize=8)
def _dtypes(legs: int, joints: int) -> tuple[np.dtype[np.void], np.dtype[np.void]]:
    state = joined(shared_state_fields(legs, joints), filter_state_fields(legs, joints))
    return state, joined(sensor_constant_fields(legs), filter_constant_fields(legs, joints))


@dataclass
class LoneFilter:
    """One filter with its arrays; `s` and `c` are the records a test writes into."""

    inp: NDArray[np.void]
    S: NDArray[np.void]
    C: NDArray[np.void]
    out: NDArray[np.void]

    @property
    def s(self) -> Any:
        """State record."""
        return self.S[0]

    @property
    def c(self) -> Any:
        """Constants record."""
        return self.C[0]

    def linear(self, t_ns: int) -> None:
        """One tick of the filter without health and decision."""
        self.inp["t_ns"] = t_ns
        _linear(self.inp, LEVEL, self.S, self.C)

    def whole(self, t_ns: int, raw: float = 0.0) -> Any:
        """One tick with health and decision; `raw` only serves to see that the channel is alive."""
        self.inp["t_ns"] = t_ns
        self.inp["raw"] = raw
        _whole(self.inp, LEVEL, self.S, self.C, self.out)
        return self.out[0]


def lone_filter(
    settings: FusionSettings, weight_N: float = 176.58, legs: int = 1, joints: int = 3, true_joints: int | None = None
) -> LoneFilter:
    """Return a filter of a leg bent 40 degrees, back-drivable joints, a foot sensor along the shank."""
    state, constants = _dtypes(legs, joints)
    lone = LoneFilter(
        np.zeros(1, tick_dtype(legs, joints)), one_record(state), one_record(constants), np.zeros(1, out_dtype(legs))
    )
    real = joints if true_joints is None else true_joints
    fill_filter_constants(settings, weight_N, (real,) * legs, lone.c)
    lone.inp["quat_WB"] = (1.0, 0.0, 0.0, 0.0)
    lone.c["sen_capacity_N"] = 300.0
    lone.c["sen_known"] = 1
    lone.c["sen_u_noise_N"] = 0.3
    s = lone.s
    s["axis_B"] = np.array([np.sin(0.65), 0.0, np.cos(0.65)])[:, None]
    arms = np.array([[0.0, -0.25, -0.13], [0.25, 0.0, 0.0], [0.08, 0.02, 0.16]])
    s["jac_B"][:, :3, :] = arms[:, :, None]
    s["tau_lag_s"][:real], s["fric_sd_Nm"][:real], s["fric_tau_s"][:real] = 0.006, 0.2, 0.08
    s["tau_noise_Nm"][:real] = 0.15
    s["axial_u_N"] = 0.8
    return lone
