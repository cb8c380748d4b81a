"""Play operators and the Prandtl-Ishlinskii operator; figures in tests/reference/hysteresis_pi.toml."""

from __future__ import annotations

import tomllib
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from footcal.sensor.hysteresis import (
    PLAY_HALF_WIDTH,
    inverse_parameters,
    play_columns,
    play_step,
    prandtl_ishlinskii,
)

CASE = tomllib.loads((Path(__file__).parents[1] / "reference" / "hysteresis_pi.toml").read_text(encoding="utf-8"))
R, W = np.array(CASE["operator"]["r"]), np.array(CASE["operator"]["w"])
PATHS = st.lists(st.floats(-10.0, 10.0), min_size=1, max_size=40)


def test_the_reference_sequence_is_reproduced() -> None:
    """A path with turning points gives the tabulated outputs."""
    y = prandtl_ishlinskii(np.array(CASE["sequence"]["x"]), R, W)
    assert y == pytest.approx(CASE["sequence"]["y"], abs=CASE["sequence"]["tolerance"])


def test_a_minor_loop_closes() -> None:
    """Madelung: the loop 1-3-1 comes back to where it started."""
    y = prandtl_ishlinskii(np.array(CASE["minor_loop"]["x"]), R, W)
    assert y == pytest.approx(CASE["minor_loop"]["y"], abs=1e-12)


def test_minor_loops_of_other_history_have_the_same_shape() -> None:
    """Congruency: between the same two inputs only the offset depends on the past."""
    one = prandtl_ishlinskii(np.array([0.0, 8.0, 1.0, 3.0, 1.0]), R, W)[2:]
    other = prandtl_ishlinskii(np.array([0.0, -8.0, 6.0, 1.0, 3.0, 1.0]), R, W)[3:]
    assert one - one[0] == pytest.approx(other - other[0], abs=1e-12)


def test_a_closed_minor_loop_is_wiped_out() -> None:
    """Past the loop's start the path goes on as if it had not been: y = 10.9 with and without (reference file)."""
    with_loop = prandtl_ishlinskii(np.array([0.0, 6.0, 2.0, 5.0, 2.0, 6.5]), R, W)[-1]
    without = prandtl_ishlinskii(np.array([0.0, 6.0, 2.0, 6.5]), R, W)[-1]
    assert [with_loop, without] == pytest.approx([10.9, 10.9], abs=1e-12)


def test_the_closed_inverse_has_the_tabulated_parameters() -> None:
    """Kuhnen's formulas for thresholds and weights of the inverse."""
    widths, weights = inverse_parameters(R, W)
    assert widths == pytest.approx(CASE["inverse"]["r"], abs=1e-12)
    assert weights == pytest.approx(CASE["inverse"]["w"], abs=1e-11)


@given(PATHS)
def test_the_inverse_after_the_operator_gives_back_the_path(path: list[float]) -> None:
    """Any path from the rest state; the tolerance is a thousand roundings of values up to 20."""
    x = np.array([0.0, *path])
    widths, weights = inverse_parameters(R, W)
    assert prandtl_ishlinskii(prandtl_ishlinskii(x, R, W), widths, weights) == pytest.approx(x, abs=1e-11)


@given(PATHS, st.integers(2, 5))
def test_the_speed_of_a_path_does_not_matter(path: list[float], stretch: int) -> None:
    """Rate independence: passing more slowly through the same turning points changes nothing."""
    x = np.array([0.0, *path])
    slow = np.interp(np.linspace(0, len(x) - 1, stretch * (len(x) - 1) + 1), np.arange(len(x)), x)
    assert prandtl_ishlinskii(slow, R, W)[::stretch] == pytest.approx(prandtl_ishlinskii(x, R, W), abs=1e-9)


@given(st.floats(-5.0, 5.0), st.floats(-5.0, 5.0), st.floats(0.0, 2.0))
def test_a_play_stays_within_its_backlash(p: float, v: float, h: float) -> None:
    """|p - v| <= h after every step."""
    assert abs(play_step(p, v, h) - v) <= h + 1e-12


@given(st.floats(0.1, 9.0), st.floats(0.1, 9.0))
def test_a_closed_loop_takes_energy(low: float, high: float) -> None:
    """With positive weights the loop's area, output over input, is not negative."""
    up, down = np.linspace(low, low + high, 60), np.linspace(low + high, low, 60)
    x = np.concatenate([up, down, up, down])
    y = prandtl_ishlinskii(x, R, W)
    second = slice(120, 240)
    area = -np.sum(0.5 * (y[second][1:] + y[second][:-1]) * np.diff(x[second]))
    assert area >= -1e-9


def test_features_start_as_after_a_full_press_and_release() -> None:
    """At power-up every play hangs a half width above the input."""
    features = play_columns(np.array([0], dtype=np.int64), np.array([0.3]))
    assert features[0] == pytest.approx(PLAY_HALF_WIDTH)
