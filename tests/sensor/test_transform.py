"""Raw counts to normalised reading."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from footcal.sensor.transform import arm_ratio, arm_ratio_slope, arm_ratios, bend, bend_slope, normalised

SUPPLY, GROUND = 1, 2


def test_a_pad_to_supply_at_a_quarter_of_the_range_has_a_ratio_of_one_third() -> None:
    """By the law, raw / (max - raw) = 1000 / 3000."""
    assert arm_ratio(1000.0, 4000.0, SUPPLY) == pytest.approx(1.0 / 3.0, rel=1e-15)  # by hand


def test_a_pad_to_ground_has_the_inverse_ratio() -> None:
    """(max - raw) / raw = 3000 / 1000."""
    assert arm_ratio(1000.0, 4000.0, GROUND) == pytest.approx(3.0, rel=1e-15)  # by hand


def test_both_wirings_give_the_same_ratio_for_the_same_pad() -> None:
    """Swapping pad and fixed resistor mirrors the counts; the pad's ratio is the same."""
    assert arm_ratio(700.0, 4095.0, SUPPLY) == pytest.approx(arm_ratio(4095.0 - 700.0, 4095.0, GROUND), rel=1e-12)


@pytest.mark.parametrize("raw", [0.0, 4095.0])
@pytest.mark.parametrize("wiring", ["pad_to_supply", "pad_to_ground"])
def test_a_divider_at_the_end_of_its_range_stays_finite(raw: float, wiring: str) -> None:
    """A short or an open pad must not divide by zero."""
    assert np.isfinite(arm_ratios(np.array([raw]), 4095.0, wiring)).all()


@given(raw=st.floats(50.0, 4000.0), wiring=st.sampled_from([0, SUPPLY, GROUND]))
def test_the_ratio_slope_is_its_derivative(raw: float, wiring: int) -> None:
    """Analytic slope against a central difference."""
    step = 1e-3
    difference = (arm_ratio(raw + step, 4095.0, wiring) - arm_ratio(raw - step, 4095.0, wiring)) / (2.0 * step)
    assert arm_ratio_slope(raw, 4095.0, wiring) == pytest.approx(difference, rel=1e-4)


@given(x=st.floats(-2.0, 2.0))
def test_a_power_of_one_bends_nothing(x: float) -> None:
    """The identity is the limit of the power law."""
    assert bend(x, 1.0, 0.02) == x


@given(x=st.floats(0.0, 2.0), gamma=st.sampled_from([0.35, 0.5, 0.7]))
def test_bending_is_odd(x: float, gamma: float) -> None:
    """The sign stands outside the power."""
    assert bend(-x, gamma, 0.02) == pytest.approx(-bend(x, gamma, 0.02), abs=1e-15)


@given(x=st.floats(0.001, 2.0), gamma=st.sampled_from([0.35, 0.5, 0.7]))
def test_the_bend_slope_is_its_derivative(x: float, gamma: float) -> None:
    """Analytic slope against a central difference."""
    step = 1e-6
    difference = (bend(x + step, gamma, 0.02) - bend(x - step, gamma, 0.02)) / (2.0 * step)
    assert bend_slope(x, gamma, 0.02) == pytest.approx(difference, rel=1e-4)


def test_zero_and_span_become_nought_and_one() -> None:
    """Two-point normalisation, power 1, for a cell that counts downwards."""
    x = normalised(np.array([9000.0, 1000.0, 5000.0]), u_zero=9000.0, u_span=1000.0, gamma=1.0)
    assert x == pytest.approx([0.0, 1.0, 0.5])  # by hand
