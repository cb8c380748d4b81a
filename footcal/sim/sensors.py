"""Drawing simulated sensors: each seed gives another foot of its kind, scattered round the kind's sheet."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.hysteresis import MaxwellSlip, Preisach
from footcal.sim.mechanics import Mechanics, tuned
from footcal.sim.noise import Noise
from footcal.sim.sensor_chain import Converter, SimulatedSensor
from footcal.sim.sensor_table import SHEETS, TYPICAL, Kind, SensorSheet
from footcal.sim.transduction import Bridge, Capacitor, Divider, Magnet
from footcal.sim.viscoelastic import KelvinChain

__all__ = ["SimulatedSensor", "draw_sensor"]

CROSS_RANGE: Final = (0.005, 0.03)  # reading per side load
SLIP_REACHES: Final = np.array([0.006, 0.015, 0.03, 0.06, 0.12, 0.2, 0.32, 0.5])


def draw_sensor(kind: str, rng: np.random.Generator, capacity_N: float | None = None) -> SimulatedSensor:
    """Return a sensor of a kind with its own loop, creep, curve, temperature terms, side sensitivity and wiring.

    Args:
        kind: A, B, C (load cells), P (resistive pad), Q (magnetic pad), R (capacitive pad), or one of cell, resistive,
            magnetic, capacitive for a typical one.
        rng: the same state gives the same sensor.
        capacity_N: full scale, N, above 0; the sheet's own where not given.

    Raises:
        SettingError: unknown kind, or a capacity that is not above 0 N.
    """
    letter = _letter(kind)
    sheet = SHEETS[letter]
    full_N = sheet.capacity_N if capacity_N is None else capacity_N
    if not 0.0 < full_N < np.inf:
        raise SettingError(where="draw_sensor, capacity_N", what=f"{full_N:g} N is not above 0", mend="Give newtons.")
    angle_rad = rng.uniform(0.0, 2.0 * np.pi)
    cross = rng.uniform(*CROSS_RANGE)
    mechanics = _draw_mechanics(sheet, rng)
    lag_s = float(rng.uniform(0.1e-3, 0.5e-3))
    span_per_K, zero_per_K = _temperature(sheet.span_pct_per_K, rng), _temperature(sheet.zero_pct_per_K, rng)
    return SimulatedSensor(
        kind=letter,
        sheet=sheet,
        capacity_N=full_N,
        cross=(float(cross * np.cos(angle_rad)), float(cross * np.sin(angle_rad))),
        mechanics=mechanics,
        span_per_K=(span_per_K[0] - mechanics.span_per_K(), span_per_K[1]),  # warm creep is faster and adds its own
        zero_per_K=zero_per_K,
        curve=_CURVES[sheet.transducer](sheet, mechanics.middle(), rng),
        lag_s=lag_s,
        stated_lag_s=round(lag_s * _scatter(rng, 0.04), 5),  # a data sheet is good to some percent
        thermal_lag_s=30.0 * _scatter(rng, 0.15),
        noise=Noise(total=sheet.noise_pct / 100.0 * _scatter(rng, 0.1), flicker_share=0.06, hum_share=sheet.hum_share),
        supply_share=0.02e-2 if sheet.transducer == "resistive" else 0.0,
        converter=_draw_converter(sheet, rng),
    )


def _letter(kind: str) -> Kind:
    for letter in SHEETS:
        if kind in {letter, *(name for name, typical in TYPICAL.items() if typical == letter)}:
            return letter
    raise SettingError(
        where="draw_sensor, kind",
        what=f"no simulated sensor is called {kind!r}",
        mend=f"Choose from {', '.join([*SHEETS, *TYPICAL])}.",
    )


def _scatter(rng: np.random.Generator, relative: float) -> float:
    """Return a factor near 1 whose logarithm has this standard deviation, held within two of them."""
    return float(np.exp(relative * np.clip(rng.standard_normal(), -2.0, 2.0)))


def _temperature(pct_per_K: float, rng: np.random.Generator) -> tuple[float, float]:
    """Return linear and quadratic coefficients; the bend makes some 5 % of the slope over 16 K."""
    slope = pct_per_K / 100.0 * _scatter(rng, 0.15)
    return slope, float(slope * rng.normal(0.0, 0.05) / 16.0)


def _draw_mechanics(sheet: SensorSheet, rng: np.random.Generator) -> Mechanics:
    pad = sheet.transducer != "cell"
    taus_s = np.geomspace(3e-3 if pad else 0.03, 3e3, 15 if pad else 11)
    power = rng.uniform(0.0, 0.12) if pad else rng.uniform(-0.05, 0.1)
    ripple = np.exp(0.15 * rng.standard_normal(taus_s.size))  # no real spectrum is perfectly smooth
    chain = KelvinChain(
        gains=sheet.creep_pct / 100.0 * 0.2 * ripple * taus_s**power,
        taus_s=taus_s,
        stiffening=float(rng.uniform(-0.25, 0.25)) if pad else float(rng.uniform(-0.05, 0.05)),
        eyring=float(rng.uniform(0.0, 0.6)) if pad else 0.0,
        activation_J_per_mol=float(rng.uniform(25e3, 60e3)),
    )
    loop: Preisach | MaxwellSlip
    if sheet.transducer in {"resistive", "capacitive"}:
        share = rng.uniform(0.5, 1.5, SLIP_REACHES.size)
        limits = share / share.sum() * sheet.loop_pct / 100.0
        loop = MaxwellSlip(
            limits=limits, reach=SLIP_REACHES * rng.uniform(0.8, 1.25), base=float(rng.uniform(0.02, 0.1))
        )
    else:
        loop = Preisach(
            share=3.0 * sheet.loop_pct / 100.0,
            width_power=float(rng.uniform(1.4, 1.9)),
            load_power=float(rng.uniform(0.2, 0.9)),
        )
    raw = Mechanics(loop=loop, chain=chain, in_series=sheet.transducer in {"resistive", "capacitive"})
    return tuned(raw, sheet.loop_pct / 100.0 * _scatter(rng, 0.12), sheet.creep_pct / 100.0 * _scatter(rng, 0.12))


def _draw_bridge(sheet: SensorSheet, strain: FloatArray, rng: np.random.Generator) -> Bridge:
    raw = Bridge(bow=0.0, skew=float(rng.uniform(-0.4, 0.4)), seat=float(rng.uniform(-0.25, 0.25)), seat_width=0.08)
    return raw.solve(float(rng.choice([-1.0, 1.0])) * sheet.nonlinearity_pct / 100.0 * _scatter(rng, 0.12), strain)


def _draw_divider(sheet: SensorSheet, strain: FloatArray, rng: np.random.Generator) -> Divider:
    raw = Divider(conductance=1.0, power=float(rng.uniform(0.75, 1.05)), dead_band=sheet.dead_band_pct / 100.0)
    return raw.solve(sheet.nonlinearity_pct / 100.0 * _scatter(rng, 0.06), strain)


def _draw_magnet(sheet: SensorSheet, strain: FloatArray, rng: np.random.Generator) -> Magnet:
    raw = Magnet(closing=0.1, stiffening=float(rng.uniform(0.6, 1.1)))
    return raw.solve(float(rng.choice([-1.0, 1.0])) * sheet.nonlinearity_pct / 100.0 * _scatter(rng, 0.12), strain)


def _draw_capacitor(sheet: SensorSheet, strain: FloatArray, rng: np.random.Generator) -> Capacitor:
    stiff = bool(rng.random() < 0.5)  # the pad's stiffening wins over the closing gap, or the other way round
    raw = Capacitor(closing=0.1, stiffening=float(rng.uniform(1.1, 1.4) if stiff else rng.uniform(0.2, 0.5)))
    return raw.solve((1.0 if stiff else -1.0) * sheet.nonlinearity_pct / 100.0 * _scatter(rng, 0.12), strain)


_CURVES: Final[
    dict[str, Callable[[SensorSheet, FloatArray, np.random.Generator], Bridge | Divider | Magnet | Capacitor]]
] = {
    "cell": _draw_bridge,
    "resistive": _draw_divider,
    "magnetic": _draw_magnet,
    "capacitive": _draw_capacitor,
}


def _draw_converter(sheet: SensorSheet, rng: np.random.Generator) -> Converter:
    turned = bool(rng.random() < (0.5 if sheet.transducer == "resistive" else 0.25))
    sign = -1.0 if turned else 1.0
    if sheet.transducer == "cell":
        half = 2.0 ** (sheet.adc_bits - 1)
        gain = sign * half * rng.uniform(0.2, 0.5)
        return Converter(offset=half * rng.uniform(-0.1, 0.1), gain=gain, lowest=-half, highest=half - 1.0)
    top = 2.0**sheet.adc_bits - 1.0
    if sheet.transducer == "resistive":
        return Converter(offset=top if turned else 0.0, gain=sign * top, lowest=0.0, highest=top)
    offset = top * rng.uniform(0.1, 0.2)
    return Converter(
        offset=top - offset if turned else offset, gain=sign * top * rng.uniform(0.5, 0.65), lowest=0.0, highest=top
    )
