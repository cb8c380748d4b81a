"""Power screws: torque to raise and lower, efficiency forward and back, self-locking.

Source: machine-design texts on power screws (from memory, recomputed). f' = f / cos(a) for a thread half angle a.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from footcal.errors import SettingError


@dataclass(frozen=True, slots=True)
class Screw:
    """A power screw: mean diameter, lead (travel a turn), thread friction, thread half angle."""

    mean_diameter_m: float
    lead_m: float
    friction: float
    half_angle_rad: float = 0.0

    def __post_init__(self) -> None:
        for name in ("mean_diameter_m", "lead_m"):
            if not getattr(self, name) > 0.0:
                raise SettingError(f"Screw, {name}", f"is {getattr(self, name):g} m, must be above 0", "Give metres.")
        if not self.friction >= 0.0:
            raise SettingError("Screw, friction", f"is {self.friction:g}, must be 0 or above", "Give the coefficient.")
        if not 0.0 <= self.half_angle_rad < math.pi / 2:
            found = f"is {self.half_angle_rad:g} rad, must be from 0 to below pi/2"
            raise SettingError("Screw, half_angle_rad", found, "Give half the angle between the flanks, in rad.")

    @property
    def lead_angle_rad(self) -> float:
        """Angle of the thread at the mean diameter: atan(lead / (pi d))."""
        return math.atan2(self.lead_m, math.pi * self.mean_diameter_m)

    @property
    def _thread_friction(self) -> float:
        return self.friction / math.cos(self.half_angle_rad)

    def raise_Nm(self, force_N: float) -> float:
        """Torque that moves the nut against a force: F d/2 (l + pi f' d) / (pi d - f' l)."""
        around_m = math.pi * self.mean_diameter_m
        f = self._thread_friction
        return force_N * self.mean_diameter_m / 2.0 * (self.lead_m + f * around_m) / (around_m - f * self.lead_m)

    def lower_Nm(self, force_N: float) -> float:
        """Torque that moves the nut with a force: F d/2 (pi f' d - l) / (pi d + f' l); below 0 the load drives it."""
        around_m = math.pi * self.mean_diameter_m
        f = self._thread_friction
        return force_N * self.mean_diameter_m / 2.0 * (f * around_m - self.lead_m) / (around_m + f * self.lead_m)

    @property
    def efficiency_forward(self) -> float:
        """Power to the nut over power of the motor: F l / (2 pi T_raise)."""
        return self.lead_m / (2.0 * math.pi * self.raise_Nm(1.0))

    @property
    def efficiency_back(self) -> float:
        """Power back to the motor over power of the load: -2 pi T_lower / (F l); below 0 the screw locks itself."""
        return -2.0 * math.pi * self.lower_Nm(1.0) / self.lead_m

    @property
    def self_locking(self) -> bool:
        """True where the load cannot turn the screw: f' > tan(lead angle)."""
        return self._thread_friction > math.tan(self.lead_angle_rad)
