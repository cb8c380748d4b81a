"""The weights of a simulated bench: a box of pieces, each with its own true mass, and stacks made of them."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.errors import SettingError
from footcal.physics.air import REFERENCE_DENSITY_kg_per_m3
from footcal.physics.force import mass_force
from footcal.physics.weights import max_permissible_error_kg
from footcal.records import FloatArray

PIECES_kg: Final = (20.0, 20.0, 20.0, 10.0, 5.0, 2.0, 2.0, 1.0, 0.5, 0.2, 0.2, 0.1)
BOX_GRAVITY_m_per_s2: Final = 9.81


@dataclass(frozen=True, slots=True)
class Load:
    """Some pieces of the box together."""

    mass_kg: float  # as the technician enters it: the sum of the nominal values
    force_N: float  # what these very pieces weigh in this air


@dataclass(frozen=True, slots=True)
class Box:
    """Weights with errors the technician does not know."""

    true_kg: FloatArray  # (pieces,) conventional mass
    gravity_m_per_s2: float
    weight_class: str | None  # None: masses exact

    def load(self, mass_kg: float) -> Load:
        """Return the stack nearest to a mass, largest pieces first.

        Raises:
            SettingError: the box is not heavy enough.
        """
        if mass_kg > sum(PIECES_kg) + 0.05:
            raise SettingError(
                where="simulated bench, mass_kg",
                what=f"{mass_kg:g} kg wanted, the box holds {sum(PIECES_kg):g} kg",
                mend="Choose a sensor of less capacity.",
            )
        left, nominal, true = mass_kg + 0.05, 0.0, 0.0
        for piece, mass in zip(PIECES_kg, self.true_kg, strict=True):
            if piece <= left:
                left, nominal, true = left - piece, nominal + piece, true + float(mass)
        force = mass_force(
            true, gravity_m_per_s2=self.gravity_m_per_s2, air_density_kg_per_m3=REFERENCE_DENSITY_kg_per_m3
        )
        return Load(round(nominal, 6), force.force_N)

    def loads(self, capacity_N: float, shares: tuple[float, ...]) -> list[Load]:
        """Return one load for each share of a sensor's capacity."""
        return [self.load(share * capacity_N / self.gravity_m_per_s2) for share in shares]


def draw_box(
    rng: np.random.Generator, weight_class: str | None = None, gravity_m_per_s2: float = BOX_GRAVITY_m_per_s2
) -> Box:
    """Return a box whose pieces are off by their class's limits: half of that in common, half each for itself.

    Args:
        rng: draws the errors.
        weight_class: an OIML class, or None for exact masses.
        gravity_m_per_s2: at the bench.

    Raises:
        SettingError: unknown class.
    """
    nominal = np.array(PIECES_kg)
    if weight_class is None:
        return Box(nominal, gravity_m_per_s2, None)
    limits = np.array([max_permissible_error_kg(piece, weight_class) for piece in PIECES_kg])
    shared, own = rng.uniform(-1.0, 1.0), rng.uniform(-1.0, 1.0, nominal.size)
    return Box(nominal + limits * 0.5 * (shared + own), gravity_m_per_s2, weight_class)


def uneven(rng: np.random.Generator, count: int, lowest: float = 0.03, highest: float = 0.96) -> tuple[float, ...]:
    """Return rising shares of capacity, closer together at the low end, none where one would put it by the rule."""
    rule = lowest + (highest - lowest) * (np.arange(count) / (count - 1)) ** 1.25
    step = (highest - lowest) / (count - 1)
    jitter = rng.uniform(-0.2, 0.2, count) * step
    jitter[0] = jitter[-1] = 0.0
    return tuple(float(math.floor(1e4 * share) / 1e4) for share in rule + jitter)
