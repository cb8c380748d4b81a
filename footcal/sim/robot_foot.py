"""What the sensor in a simulated foot feels: ground force, and weight and inertia of what hangs below it."""

from __future__ import annotations

from typing import Protocol

import numpy as np

from footcal.records import FloatArray
from footcal.sim.kinematics import LegPath, turn
from footcal.sim.momentum import second_derivative
from footcal.sim.robot import GRAVITY_m_per_s2, SimLeg


class FootSensor(Protocol):
    """Anything that turns force into raw readings."""

    def respond(
        self,
        t_s: FloatArray,
        force_N: FloatArray,
        temp_C: FloatArray,
        rng: np.random.Generator,
        side_N: FloatArray | None = None,
    ) -> FloatArray:
        """Return raw readings, (n,), for axial force (n,) and side force (n, 2)."""
        ...


def sensor_frame(leg: SimLeg) -> FloatArray:
    """Return the sensor's axes in the shank frame, rows x, y, axis; (3, 3).

    x is the shank's x made perpendicular to the axis, y = axis × x.
    """
    axis = np.array(leg.sensor_axis)
    x = np.array([1.0, 0.0, 0.0]) - axis[0] * axis
    x /= np.linalg.norm(x)
    return np.stack([x, np.cross(axis, x), axis])


def felt_N(leg: SimLeg, path: LegPath, force_W_N: FloatArray, dt_s: float) -> FloatArray:
    """Return the force on the sensor along its x, y and axis, (3, n); the axial one is positive when pressed.

    The sensor carries F + m_d (g - a): a foot hanging at rest pulls at it.
    """
    pull = second_derivative(path.on_link(2, np.array(leg.distal_com_m)), dt_s)
    pull[2] += GRAVITY_m_per_s2
    through = force_W_N - leg.distal_mass_kg * pull
    rows = [np.sum(turn(path.frames[2], row[:, None]) * through, axis=0) for row in sensor_frame(leg)]
    return np.stack(rows)


def slow_converter(t_s: FloatArray, raw: FloatArray, rate_Hz: float) -> FloatArray:
    """Return what a slow converter sends: the mean of each window, once, at its end; NaN between; (n,)."""
    window = np.floor((t_s - t_s[0]) * rate_Hz + 1e-9).astype(np.int64)
    last = np.flatnonzero(np.diff(window, append=window[-1] + 1))
    sums = np.bincount(window, weights=raw)
    counts = np.bincount(window)
    out = np.full(t_s.size, np.nan)
    out[last] = sums / counts
    return out
