"""The numbers of one fitted sensor, frozen: what the fit gives, the calibration file keeps and the kernel runs on.

The model is linear in `coefficients` once the shape constants are fixed:
    F / capacity = coefficients . features(v, v_2, plays, creeps, theta)
with the features in the order of FEATURES. A coefficient that was not fitted is exactly 0.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Final

import numpy as np

from footcal.records import FloatArray
from footcal.sensor.creep import CREEP_TAU_S
from footcal.sensor.curve import N_POWERS
from footcal.sensor.hysteresis import PLAY_HALF_WIDTH

POWERS: Final = slice(0, N_POWERS)
TEMPERATURE: Final = slice(6, 11)
PLAYS: Final = slice(11, 17)
PLAYS_BY_LOAD: Final = slice(17, 23)
CREEPS: Final = slice(23, 31)
CREEP_BY_TEMPERATURE: Final = slice(31, 32)
N_FEATURES: Final = 32
N_UNCERTAINTY_ROWS: Final = 8

FEATURES: Final = (
    *(f"v^{j}" for j in range(N_POWERS)),
    *("theta", "theta v", "theta v^2", "theta^2", "theta^2 v"),
    *(f"play {100 * h:g} %" for h in PLAY_HALF_WIDTH),
    *(f"play {100 * h:g} % times v" for h in PLAY_HALF_WIDTH),
    *(f"creep {tau:.3g} s" for tau in CREEP_TAU_S),
    "creep times theta",
)


def _zeros(n: int) -> FloatArray:
    return np.zeros(n)


@dataclass(frozen=True, slots=True)
class RuntimeUncertainty:
    """What the runtime needs to state a standard uncertainty for each sample (DESIGN: fit, uncertainty)."""

    rows: FloatArray = field(default_factory=lambda: np.zeros((N_UNCERTAINTY_ROWS, N_FEATURES)))  # factor of C, of FS
    fixed: float = 0.0  # of full scale: left over between cycles, zero return
    relative: float = 0.0  # of force: left over between load levels, reference masses, span between days
    moving: float = 0.0  # of full scale, added above 1 FS/s
    noise: float = 0.0  # of full scale, one sample of the bench session
    noise_interval_s: float = (
        0.0  # sample interval of that session; a faster channel is noisier by the root of the ratio
    )
    temp_C: float = 0.3  # standard uncertainty of the temperature while a thermometer reads
    temp_absent_C: float = 10.0  # the same without a thermometer: half range over root 3
    beyond: float = 0.5  # share of the force above the highest calibrated load


@dataclass(frozen=True, slots=True)
class SensorModel:
    """One foot's sensor: shape constants, coefficients, validity and what the runtime must know of its trust."""

    capacity_N: float
    wiring: str  # counts, pad_to_supply, pad_to_ground
    raw_max: float  # counts; full range of a divider's converter, and where any sensor saturates
    raw_min: float  # counts; at or below this the sensor saturates at the low end
    u_zero: float
    u_span: float
    gamma: float
    temp_ref_C: float
    thermometer_lag_s: float
    curve: FloatArray  # (6,) b, apparent force from x
    curve_temperature: FloatArray  # (5,)
    creep_undone: FloatArray  # (8,) gains that make v_2 from v
    coefficients: FloatArray  # (32,) in the order of FEATURES
    lag_s: float
    force_min_N: float  # calibrated range
    force_max_N: float
    temp_min_C: float
    temp_max_C: float
    dynamic: bool  # quick data were fitted
    settle_s: float  # the start state is forgotten after this time and a swing over settle_swing
    settle_swing: float  # of full scale
    cross_axis: tuple[float, float] = (0.0, 0.0)
    cross_axis_u: tuple[float, float] = (0.0, 0.0)
    unload_share: float = 0.0  # an unloaded foot still reads this share of its last peak
    unload_s: float = 6.0  # decay of that
    uncertainty: RuntimeUncertainty = field(default_factory=RuntimeUncertainty)
