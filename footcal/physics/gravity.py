"""Local gravity: as measured, or normal gravity by latitude and height."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from footcal.errors import SettingError

STANDARD_GRAVITY_m_per_s2: Final = 9.80665  # exact by convention (3rd CGPM, 1901)
ANOMALY_U_m_per_s2: Final = 5e-4  # real gravity against the model; anomalies reach some 1e-3 m/s² (from memory)
UNKNOWN_PLACE_U_m_per_s2: Final = (9.8322 - 9.7803) / 2.0 / math.sqrt(3.0)  # anywhere, pole to equator: rectangular
LOWEST_m: Final = -500.0
HIGHEST_m: Final = 10_000.0  # the second-order height term is good to 1e-7 m/s² up there


@dataclass(frozen=True, slots=True)
class GravityValue:
    """Gravity at one place."""

    gravity_m_per_s2: float
    u_m_per_s2: float  # standard uncertainty


@dataclass(frozen=True, slots=True)
class Ellipsoid:
    """Constants of a normal gravity field."""

    equator_m_per_s2: float
    k: float  # Somigliana's constant, b γ_p / (a γ_e) − 1
    e2: float  # first eccentricity squared
    semi_major_m: float
    flattening: float
    m: float  # ω² a² b / GM


# H. Moritz, Geodetic Reference System 1980 (Geodesist's Handbook).
GRS80: Final = Ellipsoid(
    9.7803267715, 0.001931851353, 0.0066943800229, 6378137.0, 1.0 / 298.257222101, 0.00344978600308
)
# NIMA TR8350.2, World Geodetic System 1984.
WGS84: Final = Ellipsoid(
    9.7803253359, 0.00193185265241, 0.00669437999013, 6378137.0, 1.0 / 298.257223563, 0.00344978650684
)


def normal_gravity_m_per_s2(latitude_deg: float, height_m: float = 0.0, ellipsoid: Ellipsoid = GRS80) -> float:
    """Return normal gravity above an ellipsoid.

    Law: Somigliana's closed formula at the ellipsoid; second-order free-air term above it (WGS84, TR8350.2).

    Args:
        latitude_deg: geodetic, −90 to 90.
        height_m: above the ellipsoid, −500 to 10 000 (height above the sea will do: 1 m is 3e-6 m/s²).
        ellipsoid: its constants.

    Raises:
        SettingError: latitude or height out of range.
    """
    if not -90.0 <= latitude_deg <= 90.0:
        raise SettingError(
            where="latitude_deg",
            what=f"{latitude_deg:g}° is not within −90 to 90",
            mend="Give degrees, south negative.",
        )
    if not LOWEST_m <= height_m <= HIGHEST_m:
        raise SettingError(
            where="height_m",
            what=f"{height_m:g} m is not within {LOWEST_m:g} to {HIGHEST_m:g}",
            mend="Give metres above the sea.",
        )
    e = ellipsoid
    sin2 = math.sin(math.radians(latitude_deg)) ** 2
    at_ground = e.equator_m_per_s2 * (1.0 + e.k * sin2) / math.sqrt(1.0 - e.e2 * sin2)
    h = height_m / e.semi_major_m
    return at_ground * (1.0 - 2.0 * (1.0 + e.flattening + e.m - 2.0 * e.flattening * sin2) * h + 3.0 * h * h)


def local_gravity(
    latitude_deg: float, height_m: float = 0.0, *, latitude_u_deg: float = 0.0, height_u_m: float = 0.0
) -> GravityValue:
    """Return normal gravity with the uncertainty of the anomaly and of the place.

    Args:
        latitude_deg: geodetic, −90 to 90.
        height_m: above the sea.
        latitude_u_deg: standard uncertainty of the latitude.
        height_u_m: standard uncertainty of the height.

    Raises:
        SettingError: latitude or height out of range.
    """
    value = normal_gravity_m_per_s2(latitude_deg, height_m)
    per_rad = 2.0 * (0.00530 * value / 2.0) * abs(math.sin(2.0 * math.radians(latitude_deg)))  # d γ / d latitude
    u_latitude = per_rad * math.radians(latitude_u_deg)
    return GravityValue(value, math.hypot(ANOMALY_U_m_per_s2, u_latitude, 3.086e-6 * height_u_m))


def measured_gravity(gravity_m_per_s2: float, u_m_per_s2: float) -> GravityValue:
    """Return gravity as measured at the place, or as a surveyor's map gives it.

    Raises:
        SettingError: a value nowhere found on Earth (9.76 to 9.84 m/s²), or an uncertainty below 0.
    """
    if not 9.76 <= gravity_m_per_s2 <= 9.84:
        raise SettingError(
            where="gravity_m_per_s2",
            what=f"{gravity_m_per_s2:g} m/s² is found nowhere on Earth (9.76 to 9.84)",
            mend="Leave it out and give the latitude and height.",
        )
    if not 0.0 <= u_m_per_s2 < 0.1:
        raise SettingError(
            where="gravity_u_m_per_s2",
            what=f"{u_m_per_s2:g} m/s² is not within 0 to 0.1",
            mend="Give a standard uncertainty.",
        )
    return GravityValue(gravity_m_per_s2, u_m_per_s2)


def unknown_place() -> GravityValue:
    """Return standard gravity with the uncertainty of not knowing where on Earth the bench stands (0.15 %)."""
    return GravityValue(STANDARD_GRAVITY_m_per_s2, UNKNOWN_PLACE_U_m_per_s2)
