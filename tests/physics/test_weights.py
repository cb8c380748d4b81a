"""Tests of reference weights and their classes."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from footcal.errors import SettingError
from footcal.physics.oiml_r111 import CLASSES
from footcal.physics.weights import (
    ReferenceWeight,
    WeightBox,
    certified_weight,
    class_weight,
    correlated_sum,
    density_limits_kg_per_m3,
    max_permissible_error_kg,
)
from tests.reference.tables import rows


@pytest.mark.parametrize("row", rows("oiml_r111_mpe.csv"), ids=lambda row: row["nominal"])
def test_limits_of_error_are_those_of_the_table(row: dict[str, str]) -> None:
    """Every cell of OIML R 111-1:2004, table 1, and a refusal where the table has none."""
    nominal_kg = float(row["mass_g"]) / 1e3
    for name in CLASSES:
        if row[name]:
            assert max_permissible_error_kg(nominal_kg, name) == pytest.approx(float(row[name]) * 1e-6, rel=1e-12)
        else:
            with pytest.raises(SettingError, match="no weight of"):
                max_permissible_error_kg(nominal_kg, name)


@pytest.mark.parametrize("row", rows("oiml_r111_density.csv"), ids=lambda row: f"{row['nominal']} {row['class']}")
def test_density_limits_are_those_of_the_table(row: dict[str, str]) -> None:
    """Every cell of OIML R 111-1:2004, table 5 (from memory)."""
    figure, unit = row["nominal"].removeprefix(">=").split()
    nominal_kg = float(figure) / (1e3 if unit == "g" else 1e6)
    low, high = density_limits_kg_per_m3(nominal_kg, row["class"])
    assert low == pytest.approx(float(row["table_min"]) * 1e3)
    assert high == (pytest.approx(float(row["table_max"]) * 1e3) if row["table_max"] else math.inf)


@pytest.mark.parametrize("oiml_class", ["E2", "F1", "F2", "M1"])
def test_density_limits_keep_the_rule_behind_them(oiml_class: str) -> None:
    """From 100 g up, a 10 % change of air density shifts no weight by more than a quarter of its limit of error.

    Rule: OIML R 111-1, 10.2.1 (from memory); shift = 0.12 kg/m³ · |1/ρ − 1/8000| · m. The table rounds to the safe
    side, by up to 1 %.
    """
    nominals_kg = [float(row["mass_g"]) / 1e3 for row in rows("oiml_r111_mpe.csv") if float(row["mass_g"]) >= 100.0]
    tightest = min(max_permissible_error_kg(kg, oiml_class) / kg for kg in nominals_kg)
    by_rule = 1.0 / (1.0 / 8000.0 + tightest / 4.0 / 0.12)
    low = density_limits_kg_per_m3(1.0, oiml_class)[0]
    assert by_rule - 1.0 <= low <= 1.01 * by_rule


def test_a_class_weight_has_a_rectangular_limit() -> None:
    """A 5 kg weight of class M1 has u = 250 mg / √3 (table 1; GUM 4.3.7)."""
    weight = class_weight("W5", 5.0, "M1")
    assert weight.u_kg == pytest.approx(250e-6 / math.sqrt(3.0))
    assert weight.mass_kg == 5.0


def test_a_weight_of_unknown_density_may_be_anything_its_class_allows() -> None:
    """The rectangle of the specific volume reaches to the further limit: M1 from 0 to 1/4400, steel in between."""
    weight = class_weight("W5", 5.0, "M1")
    assert weight.volume_m3_per_kg == pytest.approx(1.0 / 7850.0)
    assert weight.u_volume_m3_per_kg == pytest.approx((1.0 / 7850.0 - 0.0) / math.sqrt(3.0))


@given(st.lists(st.floats(1e-6, 1e-2), min_size=1, max_size=12), st.floats(0.0, 1.0))
def test_a_correlated_sum_agrees_with_the_covariance_matrix(us: list[float], correlation: float) -> None:
    """The closed form equals 1ᵀ·C·1 of the full covariance matrix (GUM, equation 13)."""
    u = np.array(us)
    covariance = np.outer(u, u) * (correlation + (1.0 - correlation) * np.eye(u.size))
    assert correlated_sum(us, correlation) == pytest.approx(np.sqrt(covariance.sum()), rel=1e-9)


def test_weights_of_one_box_go_together() -> None:
    """Two weights add 3 + 4 = 7 mg when they go together, 5 mg when independent, and their masses in any case."""
    weights = {"a": ReferenceWeight("a", 1.0, 3e-6, 1e-4, 0.0), "b": ReferenceWeight("b", 2.0, 4e-6, 1e-4, 0.0)}
    assert WeightBox(weights).mass(["a", "b"]) == pytest.approx((3.0, 7e-6))
    assert WeightBox(weights, correlation=0.0).mass(["a", "b"]) == pytest.approx((3.0, 5e-6))


@pytest.mark.parametrize("names", [["a", "a"], ["c"]])
def test_a_weight_that_is_not_there_twice_is_refused(names: list[str]) -> None:
    """One piece cannot stand on the pan twice, nor one that is not in the box."""
    box = WeightBox({"a": certified_weight("a", 1.0, 1e-6)})
    with pytest.raises(SettingError, match="weights"):
        box.mass(names)


@pytest.mark.parametrize(
    ("mass_kg", "u_kg", "density"), [(0.0, 1e-6, None), (1.0, -1e-6, None), (1.0, 1e-6, 0.0), (math.nan, 0.0, None)]
)
def test_a_certificate_without_sense_is_refused(mass_kg: float, u_kg: float, density: float | None) -> None:
    """Mass and density above 0, uncertainty at least 0; the weight is named."""
    with pytest.raises(SettingError, match="weight W"):
        certified_weight("W", mass_kg, u_kg, density)


def test_an_unknown_class_is_refused_with_the_known_ones() -> None:
    """The message lists the seven classes."""
    with pytest.raises(SettingError, match="E1, E2, F1, F2, M1, M2, M3"):
        max_permissible_error_kg(1.0, "M4")
