"""Density of moist air, by the CIPM-2007 formula, with its uncertainty."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from footcal.errors import SettingError

REFERENCE_DENSITY_kg_per_m3: Final = 1.2  # air to which a conventional mass refers (OIML D 28)
FORMULA_U: Final = 22e-6  # relative standard uncertainty of the formula itself (Picard et al. 2008)
GAS_CONSTANT_J_per_mol_K: Final = 8.314472  # the value the formula was published with
WATER_kg_per_mol: Final = 18.01528e-3


@dataclass(frozen=True, slots=True)
class AirValue:
    """Density of the air round the weights."""

    density_kg_per_m3: float
    u_kg_per_m3: float  # standard uncertainty


def air_density_kg_per_m3(
    temp_C: float, pressure_Pa: float, rel_humidity: float, carbon_dioxide: float = 400e-6
) -> float:
    """Return the density of moist air.

    Law: A. Picard, R. S. Davis, M. Gläser, K. Fujii, Metrologia 45 (2008) 149-155 (CIPM-2007), published for 600 to
    1100 hPa and 15 to 27 °C; outside, the uncertainty grows but a bench does not notice.

    Args:
        temp_C: air temperature, −20 to 60.
        pressure_Pa: absolute pressure at the bench (not reduced to sea level), 50 000 to 110 000.
        rel_humidity: 0 to 1.
        carbon_dioxide: mole fraction, 0 to 0.01.

    Raises:
        SettingError: a value out of its range.
    """
    _check("temp_C", temp_C, -20.0, 60.0, "Give degrees Celsius.")
    _check("pressure_Pa", pressure_Pa, 50_000.0, 110_000.0, "Give pascals; 1013.25 hPa is 101325 Pa.")
    _check("rel_humidity", rel_humidity, 0.0, 1.0, "Give a share; 45 % is 0.45.")
    _check("carbon_dioxide", carbon_dioxide, 0.0, 0.01, "Give a share; 400 ppm is 0.0004.")
    t, p = temp_C, pressure_Pa
    temp_K = t + 273.15
    saturation_Pa = math.exp(1.2378847e-5 * temp_K**2 - 1.9121316e-2 * temp_K + 33.93711047 - 6.3431645e3 / temp_K)
    enhancement = 1.00062 + 3.14e-8 * p + 5.6e-7 * t * t
    vapour = rel_humidity * enhancement * saturation_Pa / p
    compressibility = (
        1.0
        - p
        / temp_K
        * (
            1.58123e-6
            - 2.9331e-8 * t
            + 1.1043e-10 * t * t
            + (5.707e-6 - 2.051e-8 * t) * vapour
            + (1.9898e-4 - 2.376e-6 * t) * vapour**2
        )
        + (p / temp_K) ** 2 * (1.83e-11 - 0.765e-8 * vapour**2)
    )
    dry_kg_per_mol = (28.96546 + 12.011 * (carbon_dioxide - 0.0004)) * 1e-3
    dry = p * dry_kg_per_mol / (compressibility * GAS_CONSTANT_J_per_mol_K * temp_K)
    return dry * (1.0 - vapour * (1.0 - WATER_kg_per_mol / dry_kg_per_mol))


def measured_air(
    temp_C: float,
    pressure_Pa: float,
    rel_humidity: float,
    *,
    temp_u_C: float = 0.5,
    pressure_u_Pa: float = 100.0,
    rel_humidity_u: float = 0.05,
) -> AirValue:
    """Return air density from instruments at the bench; defaults fit a household weather station (common practice).

    Raises:
        SettingError: a value out of its range.
    """
    density = air_density_kg_per_m3(temp_C, pressure_Pa, rel_humidity)
    warmer = air_density_kg_per_m3(temp_C + 0.01, pressure_Pa, rel_humidity)
    other_share = rel_humidity + 0.01 if rel_humidity < 0.5 else rel_humidity - 0.01
    damper = air_density_kg_per_m3(temp_C, pressure_Pa, other_share)
    u = math.hypot(
        (warmer - density) / 0.01 * temp_u_C,
        density / pressure_Pa * pressure_u_Pa,
        (damper - density) / 0.01 * rel_humidity_u,
        density * FORMULA_U,
    )
    return AirValue(density, u)


def usual_air(height_m: float = 0.0) -> AirValue:
    """Return the usual air at a height when nothing was measured: 1.2 kg/m³ at the sea, thinner above, ± 10 %.

    Law: ρ = 1.2 exp(−1.2 g h / 101325 Pa), and a rectangular 10 % for weather and temperature, as OIML R 111-1 has it
    for sites without instruments (from memory).

    Raises:
        SettingError: height out of −500 to 10 000 m.
    """
    _check("height_m", height_m, -500.0, 10_000.0, "Give metres above the sea.")
    density = REFERENCE_DENSITY_kg_per_m3 * math.exp(-REFERENCE_DENSITY_kg_per_m3 * 9.80665 * height_m / 101_325.0)
    return AirValue(density, 0.1 * density / math.sqrt(3.0))


def _check(name: str, value: float, low: float, high: float, mend: str) -> None:
    if not low <= value <= high:
        raise SettingError(where=name, what=f"{value:g} is not within {low:g} to {high:g}", mend=mend)
