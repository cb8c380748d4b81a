"""The sensor's lag, undone."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from footcal.sensor.creep import hold_factors, lag_step
from footcal.sensor.lag import noise_gain, undo_lag


def undone(raw: np.ndarray, dt_s: float, lag_s: float) -> np.ndarray:
    """Run the inverse over a whole signal that starts settled."""
    a, phi = hold_factors(dt_s, lag_s)
    found = [raw[0]]
    for old, new in pairwise(raw):
        found.append(undo_lag(new, old, found[-1], a, phi))
    return np.array(found)


@pytest.mark.parametrize("lag_s", [0.0002, 0.0005, 0.002])
def test_undoing_a_lag_gives_back_the_input(lag_s: float) -> None:
    """A signal that runs straight between samples comes back to rounding."""
    rng = np.random.default_rng(7)
    x = np.cumsum(rng.normal(size=300))
    a, phi = hold_factors(0.001, lag_s)
    raw = [x[0]]
    for old, new in pairwise(x):
        raw.append(lag_step(raw[-1], old, new, a, phi))
    assert undone(np.array(raw), 0.001, lag_s) == pytest.approx(x, abs=1e-8)


@pytest.mark.parametrize("lag_s", [0.0002, 0.0005, 0.001])
def test_the_stated_noise_gain_is_what_noise_shows(lag_s: float) -> None:
    """Standard deviation of undone white noise; 40 000 samples give it to about 1 %."""
    rng = np.random.default_rng(7)
    out = undone(rng.normal(size=40_000), 0.001, lag_s)
    assert noise_gain(lag_s, 0.001) == pytest.approx(float(out[100:].std()), rel=0.03)


def test_a_lag_of_half_a_sample_interval_doubles_the_noise() -> None:
    """The figure that the module states; by hand 2.2."""
    assert noise_gain(0.0005, 0.001) == pytest.approx(2.2, abs=0.1)


def test_slow_sampling_leaves_the_lag_in() -> None:
    """Below 300 samples a second nothing is undone, so nothing is amplified."""
    assert noise_gain(0.001, 0.01) == 1.0
