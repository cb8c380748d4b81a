"""Tests of the simulated weights."""

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.physics.weights import max_permissible_error_kg
from footcal.sim.loads import PIECES_kg, draw_box, uneven


@pytest.mark.parametrize("mass_kg", [0.1, 0.8, 3.0, 12.7, 48.9, 61.0])
def test_a_stack_is_as_near_as_the_pieces_allow(mass_kg: float) -> None:
    """The box reaches every tenth of a kilogram."""
    assert draw_box(np.random.default_rng(7)).load(mass_kg).mass_kg == pytest.approx(mass_kg, abs=1e-6)


def test_exact_masses_press_with_what_the_convention_says() -> None:
    """12.7 kg press with m·g·(1 − 1.2/8000) in reference air (OIML D 28, by hand)."""
    load = draw_box(np.random.default_rng(7)).load(12.7)
    assert load.force_N == pytest.approx(12.7 * 9.81 * (1.0 - 1.2 / 8000.0), abs=1e-9)


@pytest.mark.parametrize("weight_class", ["M1", "M2"])
def test_pieces_of_a_class_are_off_within_their_limits(weight_class: str) -> None:
    """Over 200 boxes every piece stays within its limit of error, and uses up at least four fifths of it somewhere."""
    rng = np.random.default_rng(7)
    limits = np.array([max_permissible_error_kg(piece, weight_class) for piece in PIECES_kg])
    off = np.array([(draw_box(rng, weight_class).true_kg - PIECES_kg) / limits for _ in range(200)])
    assert np.abs(off).max() <= 1.0 + 1e-9
    assert np.abs(off).max(axis=0).min() > 0.8
    together = np.corrcoef(off[:, 0], off[:, 3])[0, 1]
    assert together == pytest.approx(0.5, abs=0.15)  # half in common, half each for itself


def test_loads_are_uneven_but_rise() -> None:
    """Shares of capacity rise from 3 to 96 % and are not evenly spread."""
    shares = np.array(uneven(np.random.default_rng(7), 9))
    assert (np.diff(shares) > 0.02).all()
    assert shares[[0, -1]] == pytest.approx([0.03, 0.96], abs=1e-4)
    assert np.diff(shares).std() > 0.02


def test_a_box_that_is_too_light_is_refused() -> None:
    """More than the box holds cannot be put on."""
    with pytest.raises(SettingError, match="the box holds"):
        draw_box(np.random.default_rng(7)).load(200.0)
