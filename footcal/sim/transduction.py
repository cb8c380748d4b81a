"""How strain becomes a signal in simulated sensors: bridge, resistive divider, magnet over a chip, capacitor.

Every curve maps strain (share of full scale, 1 at full load) to a signal that is 0 without load and 1 at full load;
`solve` bends it until its largest departure from the straight line between those two points has the asked size.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final, Protocol, TypeVar

import numpy as np
from scipy.optimize import brentq

from footcal.errors import SettingError
from footcal.records import FloatArray

GRID: Final = np.linspace(0.0, 1.0, 401)
C = TypeVar("C", "Bridge", "Divider", "Magnet", "Capacitor")


class Curve(Protocol):
    """A signal as a function of strain."""

    def signal(self, strain: FloatArray) -> FloatArray:
        """Return the signal, (n,), for strains of shape (n,)."""
        ...

    def solve(self, nonlinearity: float, strain: FloatArray = GRID) -> Curve:
        """Return the same curve bent to this signed departure from its terminal line (share of full output).

        `strain` (n,) is that of loads spread evenly from 0 to full: the mechanics have a bend of their own.
        """
        ...


def departure(curve: Curve, strain: FloatArray) -> float:
    """Return the largest signed departure from the terminal line, as a share of full output.

    Args:
        curve: the transducer.
        strain: strains at loads spread evenly from 0 to full, (n,).
    """
    signal = curve.signal(strain)
    off = (signal - signal[0]) / (signal[-1] - signal[0]) - np.linspace(0.0, 1.0, strain.size)
    return float(off[np.argmax(np.abs(off))])


def _bend(curve: C, field: str, values: FloatArray, target: float, strain: FloatArray) -> C:
    """Find the value of a field that gives the asked departure; the departure may jump where it changes sign."""

    def miss(value: float) -> float:
        return departure(replace(curve, **{field: value}), strain) - target

    misses = np.array([miss(value) for value in values])
    crossing = np.flatnonzero(misses[:-1] * misses[1:] <= 0.0)
    if crossing.size == 0:
        raise SettingError(
            where=f"{type(curve).__name__}, {field}",
            what=f"no value in {values[0]:g}..{values[-1]:g} gives a nonlinearity of {target:g}",
            mend="Draw the other shape constants from a narrower range.",
        )
    at = crossing[np.argmin(np.abs(misses[crossing + 1] - misses[crossing]))]  # a true crossing, not the jump
    return replace(curve, **{field: float(brentq(miss, values[at], values[at + 1], xtol=1e-12))})


def bottoming(strain: FloatArray, start: float = 1.1, room: float = 0.3) -> FloatArray:
    """Return the strain of a pad that runs into its stop: unchanged below `start`, never above `start + room`."""
    over = np.maximum(strain - start, 0.0)
    result: FloatArray = np.minimum(strain, start) + room * np.tanh(over / room)
    return result


@dataclass(frozen=True, slots=True)
class Bridge:
    """A strain-gauge bridge: a bow, an S, and a soft start where the parts seat."""

    bow: float
    skew: float  # S-shaped part, per unit of bow
    seat: float  # soft start, per unit of bow
    seat_width: float

    def signal(self, strain: FloatArray) -> FloatArray:
        """Return the signal; the three shapes vanish at strain 0 and 1."""
        x = strain
        bowed = 4.0 * x * (1.0 - x) * (1.0 + self.skew * (1.0 - 2.0 * x))
        rest = np.exp(-1.0 / self.seat_width)
        seated = (1.0 - np.exp(-np.maximum(x, 0.0) / self.seat_width)) / (1.0 - rest) - x
        result: FloatArray = x + self.bow * (bowed + self.seat * seated * (x > 0.0) * (x < 1.0))
        return result

    def solve(self, nonlinearity: float, strain: FloatArray = GRID) -> Bridge:
        """Scale the bow."""
        return _bend(self, "bow", np.linspace(-6.0, 6.0, 49) * abs(nonlinearity), nonlinearity, strain)


@dataclass(frozen=True, slots=True)
class Divider:
    """A film whose conductance grows as a power of the pressure beyond a dead band, in a divider with a fixed resistor.

    The signal is the share of the supply over the fixed resistor: conductance / (1 + conductance), conductance counted
    in units of the fixed resistor's.
    """

    conductance: float  # at full load
    power: float
    dead_band: float
    leak: float = 0.015  # conductance of the unloaded pad, same unit
    edge: float = 0.003  # softness of the end of the dead band

    def signal(self, strain: FloatArray) -> FloatArray:
        """Return the share of the supply voltage over the fixed resistor, 0 to 1 (not yet scaled to full load)."""
        squeezed = self.edge * np.logaddexp(0.0, (bottoming(strain) - self.dead_band) / self.edge)
        g = self.leak + self.conductance * squeezed**self.power
        result: FloatArray = g / (1.0 + g)
        return result

    def solve(self, nonlinearity: float, strain: FloatArray = GRID) -> Divider:
        """Choose the fixed resistor."""
        return _bend(self, "conductance", np.geomspace(0.02, 60.0, 25), nonlinearity, strain)


@dataclass(frozen=True, slots=True)
class Magnet:
    """A magnet on a stiffening pad nearing a field chip: a dipole's field grows as the gap to the power of -3."""

    closing: float  # share of the gap used up at full load
    stiffening: float

    def signal(self, strain: FloatArray) -> FloatArray:
        """Return the field above its unloaded value, 1 at full load."""
        squeeze = np.expm1(-self.stiffening * bottoming(strain)) / np.expm1(-self.stiffening)
        field = (1.0 - self.closing * squeeze) ** -3 - 1.0
        result: FloatArray = field / ((1.0 - self.closing) ** -3 - 1.0)
        return result

    def solve(self, nonlinearity: float, strain: FloatArray = GRID) -> Magnet:
        """Choose how much of the gap is used."""
        return _bend(self, "closing", np.linspace(1e-3, 0.6, 49), nonlinearity, strain)


@dataclass(frozen=True, slots=True)
class Capacitor:
    """Two plates on a stiffening pad: capacitance goes as one over the gap."""

    closing: float
    stiffening: float

    def signal(self, strain: FloatArray) -> FloatArray:
        """Return the capacitance above its unloaded value, 1 at full load."""
        squeeze = np.expm1(-self.stiffening * bottoming(strain)) / np.expm1(-self.stiffening)
        charge = 1.0 / (1.0 - self.closing * squeeze) - 1.0
        result: FloatArray = charge / (1.0 / (1.0 - self.closing) - 1.0)
        return result

    def solve(self, nonlinearity: float, strain: FloatArray = GRID) -> Capacitor:
        """Choose how much of the gap is used."""
        return _bend(self, "closing", np.linspace(1e-3, 0.7, 49), nonlinearity, strain)
