"""Tests of the simulated noise and of the converter's averaging."""

from itertools import pairwise

import numpy as np
import pytest

from footcal.sim.noise import Noise, low_pass, wander, window_mean, windows_s


def test_white_noise_averages_away() -> None:
    """Averaged over 10 ms instead of 1 ms, white noise falls by √10 (20 000 readings: 2 %)."""
    rng = np.random.default_rng(7)
    noise = Noise(1.0, 0.0, 0.0)
    t_s = np.arange(20_000) * 0.01
    assert noise.draw(t_s, np.full(t_s.size, 1e-3), rng).std() == pytest.approx(1.0, rel=0.02)
    assert noise.draw(t_s, np.full(t_s.size, 1e-2), rng).std() == pytest.approx(10.0**-0.5, rel=0.02)


def test_wander_has_a_one_over_f_spectrum() -> None:
    """Between 0.03 and 10 Hz the power falls as 1/f: the slope on log axes is −1 within 0.15."""
    rng = np.random.default_rng(7)
    t_s = np.arange(200_000) * 0.01
    signal = wander(t_s, np.logspace(-2.5, 2.5, 11), rng)
    power = np.abs(np.fft.rfft(signal)[1:]) ** 2
    hertz = np.fft.rfftfreq(t_s.size, 0.01)[1:]
    edges = np.geomspace(0.03, 10.0, 13)
    binned = [power[(hertz >= a) & (hertz < b)].mean() for a, b in pairwise(edges)]
    slope = np.polyfit(np.log(np.sqrt(edges[1:] * edges[:-1])), np.log(binned), 1)[0]
    assert slope == pytest.approx(-1.0, abs=0.15)
    assert signal.std() == pytest.approx(1.0, abs=0.25)


def test_hum_stands_at_the_mains_frequency() -> None:
    """With hum alone, the strongest line lies at 50 Hz and holds the whole variance."""
    t_s = np.arange(10_000) * 1e-3
    hum = Noise(1.0, 0.0, 1.0).draw(t_s, np.full(t_s.size, 1e-3), np.random.default_rng(7))
    spectrum = np.abs(np.fft.rfft(hum))
    assert np.fft.rfftfreq(t_s.size, 1e-3)[np.argmax(spectrum)] == pytest.approx(50.0)
    assert hum.std() == pytest.approx(np.sinc(0.05), rel=1e-3)  # 1 ms average of a 50 Hz wave


def test_a_converter_averages_since_its_last_reading_and_no_longer() -> None:
    """At 1 kHz each reading covers 1 ms; after a gap, the converter's own period and no more."""
    assert windows_s(np.array([0.0, 0.001, 0.002, 5.0]), 0.0125) == pytest.approx([0.0125, 0.001, 0.001, 0.0125])


def test_the_mean_over_a_window_is_exact_for_straight_pieces() -> None:
    """Over the last 0.3 s of a ramp 2t that bends to 1 at 0.5 s: areas by hand; before the start the signal stands."""
    t_s = np.array([0.0, 0.5, 1.0])
    signal = np.array([0.0, 1.0, 1.0])
    means = window_mean(t_s, signal, np.array([0.0, 0.4, 0.6, 1.0]), np.full(4, 0.3))
    # 0.1 to 0.4: mean 0.5; 0.3 to 0.6: (0.2 s · 0.8 + 0.1 s · 1) / 0.3 s = 0.866 667
    assert means == pytest.approx([0.0, 0.5, 0.866666667, 1.0])


def test_a_lag_follows_the_closed_form_of_a_step_and_a_ramp() -> None:
    """After one time constant a step is 1 − 1/e there; a ramp trails by the time constant once settled."""
    t_s = np.array([0.0, 1e-9, 2.0])
    assert low_pass(t_s, np.array([0.0, 1.0, 1.0]), 2.0)[-1] == pytest.approx(1.0 - np.exp(-1.0), abs=1e-8)
    ramp_s = np.linspace(0.0, 30.0, 301)
    assert low_pass(ramp_s, ramp_s, 2.0)[-1] == pytest.approx(28.0, abs=1e-5)
