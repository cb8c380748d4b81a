"""From conventional mass to the force of a weight in air, with its standard uncertainty."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from footcal.errors import SettingError
from footcal.physics.air import AirValue, REFERENCE_DENSITY_kg_per_m3
from footcal.physics.gravity import GravityValue
from footcal.physics.weights import WeightBox

CONVENTIONAL_DENSITY_kg_per_m3: Final = 8000.0  # OIML D 28
CONVENTION: Final = 1.0 - REFERENCE_DENSITY_kg_per_m3 / CONVENTIONAL_DENSITY_kg_per_m3


@dataclass(frozen=True, slots=True)
class ForceValue:
    """The force of a load, positive downwards, and what makes it uncertain (standard uncertainties)."""

    force_N: float
    u_N: float
    u_mass_N: float
    u_gravity_N: float  # common to all loads of a session
    u_buoyancy_N: float


def mass_force(
    mass_kg: float,
    *,
    gravity_m_per_s2: float,
    air_density_kg_per_m3: float = REFERENCE_DENSITY_kg_per_m3,
    density_kg_per_m3: float = 7850.0,
    mass_u_kg: float = 0.0,
    gravity_u_m_per_s2: float = 0.0,
    air_density_u_kg_per_m3: float = 0.0,
    density_u_kg_per_m3: float = 0.0,
) -> ForceValue:
    """Return the force of a weight in air.

    Law: F = m_c · g · (1 − 1.2/8000) · (1 − ρ_air/ρ) / (1 − 1.2/ρ), m_c conventional mass (OIML D 28, R 111-1).

    Args:
        mass_kg: conventional mass, 0 or more.
        gravity_m_per_s2: local gravity.
        air_density_kg_per_m3: of the air round the weight.
        density_kg_per_m3: of the weight, above that of air.
        mass_u_kg: standard uncertainties of the same quantities, as the three below.
        gravity_u_m_per_s2: see above.
        air_density_u_kg_per_m3: see above.
        density_u_kg_per_m3: see above.

    Raises:
        SettingError: a mass below 0, a density not above that of air, or a value that is not a number.
    """
    if not 0.0 <= mass_kg < math.inf:
        raise SettingError(
            where="mass_kg", what=f"{mass_kg:g} kg is below 0 or no number", mend="Give the mass that was put on."
        )
    if not density_kg_per_m3 > max(air_density_kg_per_m3, REFERENCE_DENSITY_kg_per_m3):
        raise SettingError(
            where="density_kg_per_m3",
            what=f"{density_kg_per_m3:g} kg/m³ would float in air",
            mend="Give kg/m³; steel is about 7850.",
        )
    volume = 1.0 / density_kg_per_m3
    return _force(
        (mass_kg, mass_u_kg),
        GravityValue(gravity_m_per_s2, gravity_u_m_per_s2),
        AirValue(air_density_kg_per_m3, air_density_u_kg_per_m3),
        (volume, density_u_kg_per_m3 * volume**2),
    )


def box_force(box: WeightBox, names: Sequence[str], gravity: GravityValue, air: AirValue) -> ForceValue:
    """Return the force of several weights of one box, whose errors go together as the box says.

    Args:
        box: the weights at hand.
        names: those put on, each once; none: no force.
        gravity: at the bench.
        air: round the weights.

    Raises:
        SettingError: a name is not in the box, or stands twice.
    """
    mass_kg, mass_u_kg = box.mass(names)
    if not names:
        return ForceValue(0.0, 0.0, 0.0, 0.0, 0.0)
    chosen = [box.weights[name] for name in names]
    volume = sum(w.mass_kg * w.volume_m3_per_kg for w in chosen) / mass_kg
    u_volume = sum(w.mass_kg * w.u_volume_m3_per_kg for w in chosen) / mass_kg  # same make: errors go together
    return _force((mass_kg, mass_u_kg), gravity, air, (volume, u_volume))


def _force(mass: tuple[float, float], gravity: GravityValue, air: AirValue, volume: tuple[float, float]) -> ForceValue:
    (mass_kg, mass_u_kg), (v, v_u) = mass, volume
    lift = (1.0 - air.density_kg_per_m3 * v) / (1.0 - REFERENCE_DENSITY_kg_per_m3 * v)
    per_kg = gravity.gravity_m_per_s2 * CONVENTION * lift
    pull = mass_kg * gravity.gravity_m_per_s2 * CONVENTION / (1.0 - REFERENCE_DENSITY_kg_per_m3 * v)
    # d lift / d v = (1.2 − ρ_air) / (1 − 1.2 v)²: in air of 1.2 kg/m³ the density of the weight does not matter.
    per_volume = pull * (REFERENCE_DENSITY_kg_per_m3 - air.density_kg_per_m3) / (1.0 - REFERENCE_DENSITY_kg_per_m3 * v)
    # The product of both uncertainties is kept, for it is all there is when the air is just 1.2 (GUM 5.1.2, note).
    u_buoyancy = math.hypot(pull * v * air.u_kg_per_m3, per_volume * v_u, pull * air.u_kg_per_m3 * v_u)
    u_mass, u_gravity = per_kg * mass_u_kg, mass_kg * CONVENTION * lift * gravity.u_m_per_s2
    return ForceValue(mass_kg * per_kg, math.hypot(u_mass, u_gravity, u_buoyancy), u_mass, u_gravity, u_buoyancy)
