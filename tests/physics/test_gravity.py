"""Tests of local gravity."""

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.physics.gravity import (
    GRS80,
    WGS84,
    ANOMALY_U_m_per_s2,
    local_gravity,
    measured_gravity,
    normal_gravity_m_per_s2,
    unknown_place,
)
from tests.reference.tables import rows


@pytest.mark.parametrize(("latitude_deg", "published"), [(0, 9.780326772), (45, 9.806199203), (90, 9.832186368)])
def test_normal_gravity_is_the_published_one(latitude_deg: float, published: float) -> None:
    """At 0°, 45° and 90° the formula gives the figures of the Geodesist's Handbook 1988 (GRS80)."""
    assert normal_gravity_m_per_s2(latitude_deg) == pytest.approx(published, abs=1e-9)


@pytest.mark.parametrize("row", [row for row in rows("gravity_checks.csv") if row["gamma_grs80"]])
def test_normal_gravity_follows_the_table_of_both_ellipsoids(row: dict[str, str]) -> None:
    """Between those latitudes it follows a table computed apart (gravity_checks.csv, 10 and 8 decimals)."""
    latitude_deg = float(row["latitude_deg"])
    assert normal_gravity_m_per_s2(latitude_deg, 0.0, GRS80) == pytest.approx(float(row["gamma_grs80"]), abs=1e-10)
    assert normal_gravity_m_per_s2(latitude_deg, 0.0, WGS84) == pytest.approx(float(row["gamma_wgs84"]), abs=5.1e-9)


@pytest.mark.parametrize("row", [row for row in rows("gravity_checks.csv") if not row["gamma_grs80"]])
def test_gravity_above_ground_follows_the_table(row: dict[str, str]) -> None:
    """With the second-order height term it follows the same table up to 2000 m (8 decimals)."""
    value = normal_gravity_m_per_s2(float(row["latitude_deg"]), float(row["height_m"]), WGS84)
    assert value == pytest.approx(float(row["gamma_wgs84"]), abs=5.1e-9)


def test_the_height_term_starts_with_the_free_air_gradient() -> None:
    """One metre up at 45°, gravity is 3.086e-6 m/s² less (0.3086 mGal per metre, the usual rounded figure)."""
    lost = normal_gravity_m_per_s2(45.0) - normal_gravity_m_per_s2(45.0, 1.0)
    assert lost == pytest.approx(3.086e-6, abs=1e-9)


def test_somigliana_agrees_with_the_gravity_at_the_pole() -> None:
    """The constants hang together: γ_e (1 + k) / sqrt(1 − e²) is the published γ_p (9.8321863685, GRS80)."""
    assert GRS80.equator_m_per_s2 * (1.0 + GRS80.k) / np.sqrt(1.0 - GRS80.e2) == pytest.approx(9.8321863685, abs=1e-9)


def test_uncertainty_of_place_adds_to_that_of_the_anomaly() -> None:
    """At 45° a latitude known to 1° adds by finite difference, a height known to 100 m by 3.086e-6 a metre."""
    slope = (normal_gravity_m_per_s2(45.5) - normal_gravity_m_per_s2(44.5)) / 1.0  # m/s² per degree
    value = local_gravity(45.0, latitude_u_deg=1.0, height_u_m=100.0)
    by_hand = np.sqrt(ANOMALY_U_m_per_s2**2 + slope**2 + 3.086e-4**2)
    assert value.u_m_per_s2 == pytest.approx(by_hand, rel=5e-3)  # the slope is worked out to first order


def test_an_unknown_place_covers_pole_and_equator() -> None:
    """Standard gravity with √3 times its uncertainty reaches from equator to pole, as a rectangle must."""
    place = unknown_place()
    assert place.gravity_m_per_s2 - np.sqrt(3.0) * place.u_m_per_s2 == pytest.approx(9.7803, abs=5e-4)
    assert place.gravity_m_per_s2 + np.sqrt(3.0) * place.u_m_per_s2 == pytest.approx(9.8322, abs=5e-4)


@pytest.mark.parametrize(
    ("latitude_deg", "height_m", "named"),
    [(91.0, 0.0, "latitude_deg"), (np.nan, 0.0, "latitude_deg"), (50.0, 2e4, "height_m"), (50.0, np.nan, "height_m")],
)
def test_a_place_that_is_not_on_earth_is_refused(latitude_deg: float, height_m: float, named: str) -> None:
    """Latitude and height out of range are refused, and the message names which."""
    with pytest.raises(SettingError, match=named):
        normal_gravity_m_per_s2(latitude_deg, height_m)


@pytest.mark.parametrize(("value", "u"), [(9.9, 0.001), (8.9, 0.001), (np.nan, 0.001), (9.81, -1.0), (9.81, np.nan)])
def test_a_measured_gravity_found_nowhere_is_refused(value: float, u: float) -> None:
    """Values outside 9.76 to 9.84 m/s², or without a sound uncertainty, are refused."""
    with pytest.raises(SettingError, match="gravity"):
        measured_gravity(value, u)
