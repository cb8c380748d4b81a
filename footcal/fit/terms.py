"""Which terms of the model a fit uses; everything else stays exactly 0."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from footcal.records import BoolArray
from footcal.sensor.model import (
    CREEP_BY_TEMPERATURE,
    CREEPS,
    N_FEATURES,
    PLAYS,
    PLAYS_BY_LOAD,
    POWERS,
    TEMPERATURE,
)


@dataclass(frozen=True, slots=True)
class Terms:
    """A choice of terms."""

    degree: int  # of the base curve
    gamma: float = 1.0  # power of the transform, dividers only
    temperature: bool = False  # zero and span, straight in temperature
    curved_temperature: bool = False  # their curvature as well
    plays: bool = True
    plays_by_load: bool = False
    creep: bool = True
    creep_by_temperature: bool = False

    def active(self) -> BoolArray:
        """Return which of the 32 features are fitted, shape (32,)."""
        active = np.zeros(N_FEATURES, dtype=bool)
        active[POWERS][: self.degree + 1] = True
        active[TEMPERATURE] = self.temperature_active()
        active[PLAYS] = self.plays
        active[PLAYS_BY_LOAD] = self.plays and self.plays_by_load
        active[CREEPS] = self.creep
        active[CREEP_BY_TEMPERATURE] = self.creep and self.creep_by_temperature and self.temperature
        return active

    def temperature_active(self) -> BoolArray:
        """Return which of the five temperature terms are fitted, shape (5,)."""
        curved = self.temperature and self.curved_temperature
        return np.array([self.temperature, self.temperature, curved, curved, curved])

    def words(self) -> str:
        """Return the choice in words, as the table of `footcal fit` prints it."""
        parts = [f"curve of degree {self.degree}"]
        if self.gamma != 1.0:
            parts.append(f"power {self.gamma:g}")
        if self.temperature:
            parts.append("temperature" + (" with curvature" if self.curved_temperature else ""))
        if self.plays:
            parts.append("hysteresis" + (" that grows with load" if self.plays_by_load else ""))
        if self.creep:
            parts.append("creep" + (" that grows with temperature" if self.creep_by_temperature else ""))
        return ", ".join(parts)
