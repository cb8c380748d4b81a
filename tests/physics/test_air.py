"""Tests of the density of air."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from footcal.errors import SettingError
from footcal.physics.air import air_density_kg_per_m3, measured_air, usual_air
from tests.reference.tables import rows


def r111_density_kg_per_m3(temp_C: float, pressure_Pa: float, rel_humidity: float) -> float:
    """The approximation of OIML R 111-1:2004, equation E.3-1, written down apart from the product."""
    hundred = 100.0 * rel_humidity
    return (0.34848 * pressure_Pa / 100.0 - 0.009 * hundred * math.exp(0.061 * temp_C)) / (273.15 + temp_C)


@pytest.mark.parametrize("row", rows("air_density_checks.csv"))
def test_air_density_follows_the_table(row: dict[str, str]) -> None:
    """The full formula gives the values worked out apart with published constants (6 decimals)."""
    value = air_density_kg_per_m3(float(row["t_C"]), float(row["p_Pa"]), float(row["rh"]))
    assert value == pytest.approx(float(row["cipm2007"]), abs=5.1e-7)


@pytest.mark.parametrize("row", [row for row in rows("air_density_checks.csv") if row["table_value"]])
def test_air_density_agrees_with_a_handbook(row: dict[str, str]) -> None:
    """A mass-metrology handbook's table agrees to 1e-4 kg/m³, the precision it is quoted with."""
    value = air_density_kg_per_m3(float(row["t_C"]), float(row["p_Pa"]), float(row["rh"]))
    assert value == pytest.approx(float(row["table_value"]), abs=1e-4)


@given(st.floats(10.0, 30.0), st.floats(90_000.0, 110_000.0), st.floats(0.0, 0.8))
def test_air_density_agrees_with_the_short_formula(temp_C: float, pressure_Pa: float, rel_humidity: float) -> None:
    """Over the range of the approximation in OIML R 111-1, annex E, both agree to 3e-4 (worst found apart: 2.9e-4)."""
    short = r111_density_kg_per_m3(temp_C, pressure_Pa, rel_humidity)
    assert air_density_kg_per_m3(temp_C, pressure_Pa, rel_humidity) == pytest.approx(short, rel=3e-4)


def test_dry_air_is_close_to_an_ideal_gas() -> None:
    """Without vapour, p·M/(R·T) with M = 28.96546 g/mol is met within the 4e-4 by which air is compressible."""
    ideal = 101_325.0 * 28.96546e-3 / (8.314472 * 293.15)
    assert air_density_kg_per_m3(20.0, 101_325.0, 0.0) == pytest.approx(ideal, rel=5e-4)


def test_uncertainty_of_air_agrees_with_differences() -> None:
    """The stated uncertainty is the one that small changes of each instrument make (finite differences)."""
    base = air_density_kg_per_m3(22.0, 99_000.0, 0.4)
    changes = (
        air_density_kg_per_m3(22.5, 99_000.0, 0.4) - base,
        air_density_kg_per_m3(22.0, 99_100.0, 0.4) - base,
        air_density_kg_per_m3(22.0, 99_000.0, 0.45) - base,
        22e-6 * base,
    )
    assert measured_air(22.0, 99_000.0, 0.4).u_kg_per_m3 == pytest.approx(np.linalg.norm(changes), rel=0.03)


def test_usual_air_is_thinner_in_the_mountains() -> None:
    """At 1500 m usual air is that of the standard atmosphere, 1.058 kg/m³ (from memory), within its uncertainty."""
    air = usual_air(1500.0)
    assert abs(air.density_kg_per_m3 - 1.058) < air.u_kg_per_m3
    assert usual_air().density_kg_per_m3 == pytest.approx(1.2)


@pytest.mark.parametrize(
    ("arguments", "named"),
    [((99.0, 1e5, 0.5), "temp_C"), ((20.0, 1013.25, 0.5), "pressure_Pa"), ((20.0, 1e5, 45.0), "rel_humidity")],
)
def test_air_out_of_range_is_refused(arguments: tuple[float, float, float], named: str) -> None:
    """Pressure in hectopascals or humidity in percent is refused by name, not computed with."""
    with pytest.raises(SettingError, match=named):
        air_density_kg_per_m3(*arguments)
