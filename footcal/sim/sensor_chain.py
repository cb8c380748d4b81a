"""Simulated foot sensors: force history in, raw counts out.

The chain: side load → hysteresis → creep → temperature → transduction curve → electronics lag → converter average →
noise → quantised counts. None of it is the model that `footcal.sensor` fits.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.mechanics import BENCH_C, Mechanics
from footcal.sim.noise import Noise, low_pass, wander, window_mean, windows_s
from footcal.sim.sensor_table import SensorSheet
from footcal.sim.transduction import Bridge, Capacitor, Divider, Magnet

THERMOMETER_STEP_C: Final = 1.0 / 16.0
SUPPLY_TAUS_s: Final = np.array([30.0, 300.0])


@dataclass(frozen=True, slots=True)
class Converter:
    """Signal to counts; signal 0 unloaded, 1 at full load (divider: share of the supply)."""

    offset: float  # counts at signal 0
    gain: float  # counts per signal; negative for a sensor that counts downwards
    lowest: float
    highest: float

    def counts(self, signal: FloatArray) -> FloatArray:
        """Return whole counts within the converter's range, (n,)."""
        result: FloatArray = np.clip(np.rint(self.offset + self.gain * signal), self.lowest, self.highest)
        return result


@dataclass(frozen=True, slots=True)
class SimulatedSensor:
    """One foot sensor, drawn once; `respond` does not change it."""

    kind: str  # letter of its sheet
    sheet: SensorSheet
    capacity_N: float
    cross: tuple[float, float]  # reading per side load along x and y, no unit
    mechanics: Mechanics
    span_per_K: tuple[float, float]  # linear and quadratic, share of the force
    zero_per_K: tuple[float, float]  # linear and quadratic, share of full output
    curve: Bridge | Divider | Magnet | Capacitor
    lag_s: float  # electronics
    stated_lag_s: float  # what the data sheet says of it
    thermal_lag_s: float  # sensing element behind the thermometer
    noise: Noise
    supply_share: float  # slow wander of supply against reference, rms
    converter: Converter
    day_zero: float = 0.0  # shifts of this day, shares of full output and of force
    day_span: float = 0.0

    @property
    def raw_max(self) -> float:
        """The highest count the converter can give."""
        return self.converter.highest

    @property
    def rate_Hz(self) -> float:
        """The converter's usual rate."""
        return self.sheet.rate_Hz

    @property
    def placement_share(self) -> float:
        """Standard deviation of what is sensed over what was set down, each time it is set down."""
        return self.sheet.placement_pct / 100.0

    @property
    def pad_to_ground(self) -> bool:
        """True for a divider whose count falls as the pad is pressed (for other sensors: counts downwards)."""
        return self.converter.gain < 0.0

    def day(self, rng: np.random.Generator) -> SimulatedSensor:
        """Return the sensor on another day: zero and span shifted by their day-to-day scatter."""
        return replace(
            self,
            day_zero=self.sheet.day_zero_pct / 100.0 * float(rng.standard_normal()),
            day_span=self.sheet.day_span_pct / 100.0 * float(rng.standard_normal()),
        )

    def on_channel(self, rate_Hz: float) -> SimulatedSensor:
        """Return the sensor read by a converter of another rate, such as the robot's own 1 kHz channel."""
        return replace(self, sheet=replace(self.sheet, rate_Hz=rate_Hz))

    def aged(self, *, span: float = 0.0, zero: float = 0.0, noise: float = 1.0) -> SimulatedSensor:
        """Return the sensor grown old: change of span (share), shift of zero (share of full output), noise factor."""
        return replace(
            self,
            day_zero=self.day_zero + zero,
            day_span=(1.0 + self.day_span) * (1.0 + span) - 1.0,
            noise=replace(self.noise, total=self.noise.total * noise),
        )

    def respond(
        self,
        t_s: FloatArray,
        force_N: FloatArray,
        temp_C: FloatArray | float,
        rng: np.random.Generator,
        side_N: FloatArray | None = None,
    ) -> FloatArray:
        """Return raw counts for a force history, straight between the given times.

        Before t_s[0] the sensor was pressed fully, released, and has then stood at force_N[0] for 20 s.

        Args:
            t_s: times of the readings, (n,), s, rising; any grid (some 10 Hz to 1 kHz, gaps allowed).
            force_N: axial force, (n,), N, positive when pressed.
            temp_C: at the sensor body, (n,) or one value, °C.
            rng: for noise.
            side_N: side load along the sensor's x and y, (n, 2), or along x alone, (n,), N; none: no side load.

        Returns:
            Counts, (n,), whole numbers.

        Raises:
            SettingError: shapes differ, a value is not finite, or times do not rise.
        """
        t_s, force_N, temp_C = _checked(t_s, force_N, temp_C)
        lagged = low_pass(t_s, self.signal(t_s, force_N, temp_C, side_N), self.lag_s)
        return self._converted(t_s, t_s, lagged, rng)

    def sample(
        self,
        t_read_s: FloatArray,
        t_s: FloatArray,
        force_N: FloatArray,
        temp_C: FloatArray | float,
        rng: np.random.Generator,
        side_N: FloatArray | None = None,
    ) -> FloatArray:
        """Return raw counts, (m,), at reading times that are fewer than the times of the force history, (n,).

        As `respond`, with the converter averaging what happened between its readings (at most its own period).

        Raises:
            SettingError: as `respond`.
        """
        t_s, force_N, temp_C = _checked(t_s, force_N, temp_C)
        lagged = low_pass(t_s, self.signal(t_s, force_N, temp_C, side_N), self.lag_s)
        return self._converted(np.ascontiguousarray(t_read_s, dtype=float), t_s, lagged, rng)

    def _converted(
        self, t_read_s: FloatArray, t_s: FloatArray, signal: FloatArray, rng: np.random.Generator
    ) -> FloatArray:
        window_s = windows_s(t_read_s, 1.0 / self.rate_Hz)
        averaged = window_mean(t_s, signal, t_read_s, window_s)
        noisy = averaged + self._full_signal() * self.noise.draw(t_read_s, window_s, rng)
        if self.supply_share > 0.0:
            noisy = noisy * (1.0 + self.supply_share * wander(t_read_s, SUPPLY_TAUS_s, rng))
        return self.converter.counts(noisy)

    def signal(
        self, t_s: FloatArray, force_N: FloatArray, temp_C: FloatArray, side_N: FloatArray | None = None
    ) -> FloatArray:
        """Return the signal before electronics, (n,), free of noise; 1 at full load, divider: share of the supply."""
        sensed = force_N if side_N is None else force_N + _sideways_N(np.asarray(side_N, dtype=float), self.cross)
        element_C = low_pass(t_s, temp_C, self.thermal_lag_s)
        off_K = element_C - BENCH_C
        strain = self.mechanics.strain(t_s, sensed / self.capacity_N, element_C)
        strain = strain * (1.0 + self.day_span) * (1.0 + self.span_per_K[0] * off_K + self.span_per_K[1] * off_K**2)
        zero = self.day_zero + self.zero_per_K[0] * off_K + self.zero_per_K[1] * off_K**2
        if not isinstance(self.curve, Divider):
            return self.curve.signal(strain) + zero
        # A pad's zero moves by its leak: the signal is turned into conductance, the leak added, and turned back.
        ratio = self.curve.signal(strain)
        conductance = np.maximum(ratio / (1.0 - ratio) + zero * self._full_signal() * (1.0 + self.curve.leak) ** 2, 0.0)
        return conductance / (1.0 + conductance)

    def thermometer(self, t_s: FloatArray, temp_C: FloatArray, rng: np.random.Generator) -> FloatArray:
        """Return what the thermometer on the sensor body says, (n,), °C: 0.03 °C of noise, steps of 1/16 °C."""
        noisy = temp_C + 0.03 * rng.standard_normal(t_s.size)
        result: FloatArray = np.rint(noisy / THERMOMETER_STEP_C) * THERMOMETER_STEP_C
        return result

    def _full_signal(self) -> float:
        ends = self.curve.signal(np.array([0.0, 1.0]))
        return float(ends[1] - ends[0])


def _sideways_N(side_N: FloatArray, cross: tuple[float, float]) -> FloatArray:
    if side_N.ndim == 1:
        return cross[0] * side_N
    return cross[0] * side_N[:, 0] + cross[1] * side_N[:, 1]


def _checked(
    t_s: FloatArray, force_N: FloatArray, temp_C: FloatArray | float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    t_s = np.ascontiguousarray(t_s, dtype=float)
    force_N = np.ascontiguousarray(force_N, dtype=float)
    temps_C = np.ascontiguousarray(np.broadcast_to(np.asarray(temp_C, dtype=float), t_s.shape))
    if t_s.ndim != 1 or t_s.size == 0 or force_N.shape != t_s.shape:
        raise SettingError(
            where="SimulatedSensor.respond",
            what=f"times have shape {t_s.shape} and forces {force_N.shape}, must be equal, one axis, not empty",
            mend="Give one force for each time.",
        )
    if not (np.isfinite(t_s).all() and np.isfinite(force_N).all() and np.isfinite(temps_C).all()):
        raise SettingError(
            where="SimulatedSensor.respond",
            what="a time, force or temperature is not a finite number",
            mend="Fill or drop those samples first.",
        )
    if not (np.diff(t_s) > 0.0).all():
        row = int(np.argmin(np.diff(t_s) > 0.0)) + 1
        raise SettingError(
            where=f"SimulatedSensor.respond, t_s[{row}]",
            what=f"{t_s[row]:g} s does not follow {t_s[row - 1]:g} s",
            mend="Sort the samples by time and drop doubles.",
        )
    return t_s, force_N, temps_C
