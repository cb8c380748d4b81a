"""Creep of simulated sensors: Kelvin elements whose strain and speed depend on load, and speed on temperature.

Each element obeys d e/dt = rate(T, s) * (gain * s * (1 + stiffening * s) - e) / tau. Elements spread evenly over log
time, with gains proportional to tau^power, creep as a power of time (W. N. Findley, "Creep and Relaxation of Nonlinear
Viscoelastic Materials", from memory). Speed follows temperature by Arrhenius' law, and load by a factor exp(c*s)
(Eyring's stress-aided flow, from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numba import njit

from footcal.records import FloatArray

GAS_CONSTANT_J_per_mol_K: Final = 8.314462618
REFERENCE_K: Final = 295.15  # 22 deg C, the bench's usual temperature


@dataclass(frozen=True, slots=True)
class KelvinChain:
    """Kelvin elements in series with an elastic one; shares of full scale."""

    gains: FloatArray  # (m,) strain of an element, long after, per unit of load
    taus_s: FloatArray  # (m,) retardation times at 22 deg C and small load
    stiffening: float  # how the final strain grows with load
    eyring: float  # how the speed grows with load
    activation_J_per_mol: float

    def speed(self, temp_C: FloatArray) -> FloatArray:
        """Return how many times faster than at 22 deg C the chain runs; (n,)."""
        inverse_K = 1.0 / (temp_C + 273.15) - 1.0 / REFERENCE_K
        result: FloatArray = np.exp(-self.activation_J_per_mol / GAS_CONSTANT_J_per_mol_K * inverse_K)
        return result

    def strain(self, t_s: FloatArray, drive: FloatArray, temp_C: FloatArray, before_s: float = 20.0) -> FloatArray:
        """Return the creep strain under `drive` (n,), which has stood at its first value for `before_s` seconds."""
        return _chain(t_s, drive, self.speed(temp_C), self.gains, self.taus_s, self.stiffening, self.eyring, before_s)


@njit(cache=True, error_model="numpy")
def _chain(
    t_s: FloatArray,
    drive: FloatArray,
    speed: FloatArray,
    gains: FloatArray,
    taus_s: FloatArray,
    stiffening: float,
    eyring: float,
    before_s: float,
) -> FloatArray:
    """Exact for a drive that is straight between samples, with the speed taken at the middle of each interval."""
    count = gains.size
    part = np.zeros(count)
    out = np.empty(t_s.size)
    old = drive[0] * (1.0 + stiffening * drive[0])
    total = 0.0
    for k in range(count):
        part[k] = -old * np.expm1(-before_s * speed[0] * np.exp(eyring * drive[0]) / taus_s[k])
        total += gains[k] * part[k]
    out[0] = total
    for i in range(1, t_s.size):
        new = drive[i] * (1.0 + stiffening * drive[i])
        middle = 0.5 * (drive[i] + drive[i - 1])
        lapse = (t_s[i] - t_s[i - 1]) * 0.5 * (speed[i] + speed[i - 1]) * np.exp(eyring * middle)
        total = 0.0
        for k in range(count):
            z = lapse / taus_s[k]
            grown = -np.expm1(-z)  # how much of a steady load's strain is reached in this interval
            ramp = grown / z if z > 1e-12 else 1.0
            part[k] = part[k] * (1.0 - grown) + (1.0 - ramp) * new + (ramp - 1.0 + grown) * old
            total += gains[k] * part[k]
        out[i] = total
        old = new
    return out
