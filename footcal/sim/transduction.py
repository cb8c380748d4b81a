"""How strain becomes a signal in simulated sensors: bridge, resistive divider, magnet over a chip, capacitor.

Every curve maps strain (share of full scale, 1 at full load) to a signal that is 0 without load and 1 at full load;
`solve` bends it until its largest departure from the straight line between those two points has the asked size.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final, Protocol, Self, TypeVar

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

    def solve(self, nonlinearity: float) -> Self:
        """Return the same curve bent to this signed departure from its terminal line (share of full output)."""
        ...


def departure(curve: Curve) -> float:
    """Return the largest signed departure from the terminal line, as a share of full output."""
    ends = curve.signal(np.array([0.0, 1.0]))
    off = (curve.signal(GRID) - ends[0]) / (ends[1] - ends[0]) - GRID
    return float(off[np.argmax(np.abs(off))])


def _bend(curve: C, field: str, lo: float, hi: float, target: float) -> C:
    def miss(value: float) -> float:
        return departure(replace(curve, **{field: value})) - target

    if not miss(lo) * miss(hi) <= 0.0:
        raise SettingError(
            where=f"{type(curve).__name__}, {field}",
            what=f"no value in {lo:g}..{hi:g} gives a nonlinearity of {target:g}",
            mend="Draw the other shape constants from a narrower range.",
        )
    return replace(curve, **{field: float(brentq(miss, lo, hi, xtol=1e-10))})


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

    def solve(self, nonlinearity: float) -> Self:
        """Scale the bow."""
        return _bend(self, "bow", -2.0 * abs(nonlinearity), 2.0 * abs(nonlinearity), nonlinearity)


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

    def solve(self, nonlinearity: float) -> Self:
        """Choose the fixed resistor."""
        return _bend(self, "conductance", 0.02, 60.0, nonlinearity)


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

    def solve(self, nonlinearity: float) -> Self:
        """Choose how much of the gap is used."""
        return _bend(self, "closing", 1e-3, 0.6, nonlinearity)


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

    def solve(self, nonlinearity: float) -> Self:
        """Choose how much of the gap is used."""
        return _bend(self, "closing", 1e-3, 0.7, nonlinearity)
