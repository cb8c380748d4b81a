"""Tests of mass to force."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from footcal.errors import SettingError
from footcal.physics.air import AirValue
from footcal.physics.force import box_force, mass_force
from footcal.physics.gravity import GravityValue
from footcal.physics.weights import WeightBox, certified_weight, class_weight

# 5 kg (conventional) at 9.80665 m/s²: densities and forces worked out apart by OIML D 28's formulas, 6 decimals.
DENSITIES_kg_per_m3 = (8000.0, 7850.0, 7100.0, 2700.0, 11340.0)
FORCES_IN_THIN_AIR_N = (49.026508, 49.026520, 49.026586, 49.027712, 49.026327)  # air of 1.1 kg/m³


@pytest.mark.parametrize("density", DENSITIES_kg_per_m3)
def test_in_reference_air_the_density_of_a_weight_does_not_matter(density: float) -> None:
    """In air of 1.2 kg/m³, 5 kg press with 49.025895 N whatever they are made of (that defines conventional mass)."""
    force = mass_force(5.0, gravity_m_per_s2=9.80665, density_kg_per_m3=density)
    assert force.force_N == pytest.approx(49.025895, abs=1e-6)


@pytest.mark.parametrize(("density", "expected_N"), list(zip(DENSITIES_kg_per_m3, FORCES_IN_THIN_AIR_N, strict=True)))
def test_in_other_air_it_does(density: float, expected_N: float) -> None:
    """In air of 1.1 kg/m³ the forces differ in the fifth figure, as worked out apart."""
    force = mass_force(5.0, gravity_m_per_s2=9.80665, air_density_kg_per_m3=1.1, density_kg_per_m3=density)
    assert force.force_N == pytest.approx(expected_N, abs=1e-6)


def test_buoyancy_of_steel_is_some_150_parts_in_a_million() -> None:
    """Mass times gravity is 49.033250 N; the air carries 1.5e-4 of it."""
    force = mass_force(5.0, gravity_m_per_s2=9.80665)
    assert 1.0 - force.force_N / 49.033250 == pytest.approx(1.5e-4, abs=1e-8)


def test_uncertainties_agree_with_a_monte_carlo() -> None:
    """Mass, gravity, air and density uncertainty together agree with 200 000 draws to 1 % (GUM Supplement 1)."""
    rng = np.random.default_rng(7)
    u_mass, u_gravity, u_air, u_density = 2e-4, 5e-4, 0.05, 300.0
    n = 200_000
    mass = 5.0 + u_mass * rng.standard_normal(n)
    gravity = 9.81 + u_gravity * rng.standard_normal(n)
    air = 1.15 + u_air * rng.standard_normal(n)
    density = 7500.0 + u_density * rng.standard_normal(n)
    drawn_N = mass * gravity * (1.0 - 1.2 / 8000.0) * (1.0 - air / density) / (1.0 - 1.2 / density)
    force = mass_force(
        5.0,
        gravity_m_per_s2=9.81,
        air_density_kg_per_m3=1.15,
        density_kg_per_m3=7500.0,
        mass_u_kg=u_mass,
        gravity_u_m_per_s2=u_gravity,
        air_density_u_kg_per_m3=u_air,
        density_u_kg_per_m3=u_density,
    )
    assert force.u_N == pytest.approx(drawn_N.std(), rel=0.01)
    assert force.u_N == pytest.approx(math.hypot(force.u_mass_N, force.u_gravity_N, force.u_buoyancy_N))


def test_a_box_adds_its_weights_with_their_errors_together() -> None:
    """M1 weights of 5, 2 and 1 kg: (250 + 100 + 50) mg / √3 when they go together, times gravity (tables, by hand)."""
    box = WeightBox({name: class_weight(name, kg, "M1") for name, kg in (("W5", 5.0), ("W2", 2.0), ("W1", 1.0))})
    force = box_force(box, ["W5", "W2", "W1"], GravityValue(9.81, 0.0), AirValue(1.2, 0.0))
    assert force.force_N == pytest.approx(8.0 * 9.81 * (1.0 - 1.2 / 8000.0), abs=1e-9)
    assert force.u_N == pytest.approx(400e-6 / math.sqrt(3.0) * 9.81 * (1.0 - 1.2 / 8000.0), rel=1e-9)


def test_one_weight_is_a_box_of_one() -> None:
    """A certified weight gives the same force and uncertainty alone and in a box."""
    box = WeightBox({"W": certified_weight("W", 4.9998, 1e-4, 7850.0, 50.0)})
    boxed = box_force(box, ["W"], GravityValue(9.81, 1e-4), AirValue(1.15, 0.02))
    alone = mass_force(
        4.9998,
        gravity_m_per_s2=9.81,
        air_density_kg_per_m3=1.15,
        density_kg_per_m3=7850.0,
        mass_u_kg=1e-4,
        gravity_u_m_per_s2=1e-4,
        air_density_u_kg_per_m3=0.02,
        density_u_kg_per_m3=50.0,
    )
    assert (boxed.force_N, boxed.u_N) == pytest.approx((alone.force_N, alone.u_N), rel=1e-12)


def test_an_empty_pan_presses_with_nothing() -> None:
    """No weights: no force and no uncertainty, for the zero is defined, not measured."""
    force = box_force(WeightBox({}), [], GravityValue(9.81, 0.01), AirValue(1.2, 0.1))
    assert (force.force_N, force.u_N) == (0.0, 0.0)


@given(st.floats(0.0, 100.0), st.floats(9.77, 9.84), st.floats(0.9, 1.3), st.floats(1500.0, 20_000.0))
def test_force_is_proportional_to_mass(mass_kg: float, gravity: float, air: float, density: float) -> None:
    """Twice the mass is twice the force, whatever the air."""
    one = mass_force(mass_kg, gravity_m_per_s2=gravity, air_density_kg_per_m3=air, density_kg_per_m3=density)
    two = mass_force(2.0 * mass_kg, gravity_m_per_s2=gravity, air_density_kg_per_m3=air, density_kg_per_m3=density)
    assert two.force_N == pytest.approx(2.0 * one.force_N, rel=1e-12)


@pytest.mark.parametrize(
    ("mass_kg", "density", "named"), [(-1.0, 7850.0, "mass_kg"), (math.nan, 7850.0, "mass_kg"), (1.0, 1.0, "density")]
)
def test_a_mass_that_would_float_is_refused(mass_kg: float, density: float, named: str) -> None:
    """Mass below 0, no number, or lighter than air: refused by name."""
    with pytest.raises(SettingError, match=named):
        mass_force(mass_kg, gravity_m_per_s2=9.81, density_kg_per_m3=density)
