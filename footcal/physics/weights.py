"""Reference weights: what their class or certificate says of their conventional mass and density."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Final

from footcal.errors import SettingError
from footcal.physics.oiml_r111 import CLASSES, DENSITIES, LIMITS

ANY_DENSITY_kg_per_m3: Final = (1000.0, math.inf)  # a weight of unknown make: lighter than water it is not


def max_permissible_error_kg(nominal_kg: float, oiml_class: str) -> float:
    """Return the limit of error of a weight, plus or minus (OIML R 111-1:2004, table 1).

    Args:
        nominal_kg: one of the nominal values 1, 2, 5 × 10^n from 1 mg to 50 kg.
        oiml_class: E1, E2, F1, F2, M1, M2 or M3.

    Raises:
        SettingError: unknown class, or the class has no weight of that nominal value.
    """
    if oiml_class not in CLASSES:
        raise SettingError(
            where="oiml_class", what=f"there is no class {oiml_class!r}", mend=f"Choose from {', '.join(CLASSES)}."
        )
    for row in LIMITS.values():
        mass_g, limit_mg = row[0], row[1 + CLASSES.index(oiml_class)]
        if mass_g is not None and math.isclose(mass_g, nominal_kg * 1e3, rel_tol=1e-9):
            if limit_mg is None:
                break
            return limit_mg * 1e-6
    raise SettingError(
        where="nominal_kg",
        what=f"class {oiml_class} has no weight of {nominal_kg:g} kg",
        mend="Enter each piece by itself; a weight without a class needs a mass and its uncertainty.",
    )


def density_limits_kg_per_m3(nominal_kg: float, oiml_class: str) -> tuple[float, float]:
    """Return the lowest and highest density a weight of this class may have (OIML R 111-1:2004, table 5).

    Where the class sets no limit, the lowest is that of water and the highest is infinite.

    Raises:
        SettingError: unknown class.
    """
    if oiml_class not in CLASSES:
        raise SettingError(
            where="oiml_class", what=f"there is no class {oiml_class!r}", mend=f"Choose from {', '.join(CLASSES)}."
        )
    for smallest_kg, limits in DENSITIES:
        if nominal_kg >= smallest_kg * (1.0 - 1e-9):
            return limits.get(oiml_class, ANY_DENSITY_kg_per_m3)
    return ANY_DENSITY_kg_per_m3


@dataclass(frozen=True, slots=True)
class ReferenceWeight:
    """One weight as it counts in a force: conventional mass and specific volume, each with a standard uncertainty."""

    name: str
    mass_kg: float  # conventional
    u_kg: float
    volume_m3_per_kg: float  # one over the density
    u_volume_m3_per_kg: float


def class_weight(name: str, nominal_kg: float, oiml_class: str) -> ReferenceWeight:
    """Return a weight of which only the class is known: limits of error and density are taken as rectangular.

    Raises:
        SettingError: unknown class or nominal value.
    """
    limit_kg = max_permissible_error_kg(nominal_kg, oiml_class)
    volume, u_volume = _volume(density_limits_kg_per_m3(nominal_kg, oiml_class))
    return ReferenceWeight(name, nominal_kg, limit_kg / math.sqrt(3.0), volume, u_volume)


def certified_weight(
    name: str, mass_kg: float, u_kg: float, density_kg_per_m3: float | None = None, density_u_kg_per_m3: float = 0.0
) -> ReferenceWeight:
    """Return a weight with its own conventional mass and standard uncertainty (a certificate's U divided by its k).

    Without a density it may be anything from water to lead.

    Raises:
        SettingError: mass or density not above 0, or an uncertainty below 0.
    """
    if not 0.0 < mass_kg < math.inf:
        raise SettingError(
            where=f"weight {name}, mass_kg", what=f"{mass_kg:g} kg is not above 0", mend="Give its conventional mass."
        )
    if not 0.0 <= u_kg < math.inf:
        raise SettingError(
            where=f"weight {name}, u_kg", what=f"{u_kg:g} kg is below 0", mend="Give a standard uncertainty."
        )
    if density_kg_per_m3 is None:
        volume, u_volume = _volume((1000.0, 11_340.0))
    elif not 0.0 < density_kg_per_m3 < math.inf or not 0.0 <= density_u_kg_per_m3 < math.inf:
        raise SettingError(
            where=f"weight {name}, density", what="density is not above 0", mend="Give kg/m³; steel is about 7850."
        )
    else:
        volume, u_volume = 1.0 / density_kg_per_m3, density_u_kg_per_m3 / density_kg_per_m3**2
    return ReferenceWeight(name, mass_kg, u_kg, volume, u_volume)


def _volume(density_limits: tuple[float, float]) -> tuple[float, float]:
    """Return specific volume and its standard uncertainty; steel (7850 kg/m³) wherever the limits let it be."""
    least, most = 1.0 / density_limits[1], 1.0 / density_limits[0]
    best = min(max(1.0 / 7850.0, least), most)
    return best, max(best - least, most - best) / math.sqrt(3.0)


@dataclass(frozen=True, slots=True)
class WeightBox:
    """Weights that were made and checked together, so that their errors go the same way."""

    weights: Mapping[str, ReferenceWeight] = field(default_factory=dict)
    correlation: float = 1.0  # of any two errors in the box; 1 is the careful choice (GUM F.1.2.3)

    def mass(self, names: Sequence[str]) -> tuple[float, float]:
        """Return summed conventional mass and its standard uncertainty, kg, of the named weights.

        Raises:
            SettingError: a name is not in the box, or stands twice.
        """
        chosen = [self._named(name) for name in names]
        if len(set(names)) != len(names):
            raise SettingError(
                where="weights", what=f"a weight is named twice in {list(names)}", mend="Name each weight once."
            )
        return sum(w.mass_kg for w in chosen), correlated_sum([w.u_kg for w in chosen], self.correlation)

    def _named(self, name: str) -> ReferenceWeight:
        if name not in self.weights:
            raise SettingError(
                where="weights", what=f"there is no weight {name!r} in the box", mend=f"Use {', '.join(self.weights)}."
            )
        return self.weights[name]


def correlated_sum(us: Sequence[float], correlation: float) -> float:
    """Return the standard uncertainty of a sum whose terms all share one correlation (GUM, equation 13).

    Raises:
        SettingError: correlation out of 0 to 1.
    """
    if not 0.0 <= correlation <= 1.0:
        raise SettingError(
            where="correlation", what=f"{correlation:g} is not within 0 to 1", mend="0: independent, 1: go together."
        )
    apart = sum(u * u for u in us)
    return math.sqrt((1.0 - correlation) * apart + correlation * sum(us) ** 2)
