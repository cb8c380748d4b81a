"""Tests of the simulated sensor's response."""

import dataclasses

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.sensors import SimulatedSensor, draw_sensor

KINDS = ["A", "B", "C", "P", "Q", "R"]


def drawn(kind: str, **changes: object) -> SimulatedSensor:
    """Return a sensor without noise, unless a field is given."""
    sensor = draw_sensor(kind, np.random.default_rng(7))
    quiet = {"noise": dataclasses.replace(sensor.noise, total=0.0), "supply_share": 0.0}
    return dataclasses.replace(sensor, **(quiet | changes))


def held(sensor: SimulatedSensor, share: float, temp_C: FloatArray | float = 22.0, lasts_s: float = 10.0) -> float:
    """Return the last counts of a load held for a time."""
    t_s = np.arange(0.0, lasts_s, 0.02)
    force_N = share * sensor.capacity_N * np.clip(t_s, 0.0, 1.0)
    return float(sensor.respond(t_s, force_N, temp_C, np.random.default_rng(8))[-1])


@pytest.mark.parametrize("kind", KINDS)
def test_noise_averages_down_on_a_slow_converter(kind: str) -> None:
    """Unloaded noise at the table's rate is lower than through a 1 kHz channel (less so where 1/f or steps rule)."""
    sensor = draw_sensor(kind, np.random.default_rng(7))
    slow_s, fast_s = np.arange(0.0, 60.0, 1.0 / sensor.rate_Hz), np.arange(0.0, 60.0, 1e-3)
    slow = sensor.respond(slow_s, np.zeros(slow_s.size), 22.0, np.random.default_rng(8)).std()
    fast = sensor.on_channel(1e3).respond(fast_s, np.zeros(fast_s.size), 22.0, np.random.default_rng(8)).std()
    assert 0.25 * fast < slow < 0.75 * fast


@pytest.mark.parametrize("kind", KINDS)
def test_the_grid_does_not_matter(kind: str) -> None:
    """A press followed at 50 Hz or at 1 kHz ends within 0.02 % of full scale of the same counts."""
    sensor = drawn(kind)
    ends = []
    for step_s in (0.02, 0.001):
        t_s = np.arange(0.0, 8.0 + step_s / 2.0, step_s)
        force_N = 0.7 * sensor.capacity_N * np.interp(t_s, [1.0, 2.0, 4.0, 5.0], [0.0, 1.0, 1.0, 0.5])
        ends.append(sensor.respond(t_s, force_N, 22.0, np.random.default_rng(8))[-1])
    full = abs(held(sensor, 1.0) - held(sensor, 0.0))
    assert abs(ends[0] - ends[1]) < 2e-4 * full + 1.0


def test_a_side_load_reads_by_the_cross_sensitivity() -> None:
    """100 N sideways along x read as 100 N · c_x of axial load, and y by c_y (linear cell, by hand)."""
    sensor = drawn("A", cross=(0.02, -0.01))
    t_s = np.arange(0.0, 5.0, 0.02)
    axial_N = np.full(t_s.size, 200.0)
    rng = np.random.default_rng(8)
    side_N = np.zeros((t_s.size, 2))
    side_N[t_s > 2.0] = (100.0, 40.0)
    read = sensor.respond(t_s, axial_N, 22.0, rng, side_N=side_N)
    plain = sensor.respond(t_s, axial_N + np.where(t_s > 2.0, 100.0 * 0.02 - 40.0 * 0.01, 0.0), 22.0, rng)
    assert np.array_equal(read, plain)
    along_x = sensor.respond(t_s, axial_N, 22.0, rng, side_N=side_N[:, 0])
    assert along_x[-1] == pytest.approx(sensor.respond(t_s, axial_N + side_N[:, 0] * 0.02, 22.0, rng)[-1])


def test_the_element_lags_behind_the_thermometer() -> None:
    """One thermal lag after a sudden warming the zero has moved by 1 − 1/e of what it will (63 %)."""
    sensor = drawn("R", zero_per_K=(0.0036, 0.0), span_per_K=(0.0, 0.0), thermal_lag_s=30.0)
    t_s = np.concatenate([[-1.0, 0.0], np.arange(1e-3, 600.0, 0.5)])
    raw = sensor.respond(t_s, np.zeros(t_s.size), np.where(t_s > 0.0, 32.0, 22.0), np.random.default_rng(8))
    at_lag = np.interp(30.0, t_s, raw)
    assert (at_lag - raw[0]) / (raw[-1] - raw[0]) == pytest.approx(1.0 - np.exp(-1.0), abs=0.01)


def test_a_resistive_pad_is_flat_near_zero() -> None:
    """Half a percent of full load moves a resistive pad by less than a tenth of what half a percent does at 3 %."""
    sensor = drawn("P")
    low = abs(held(sensor, 0.005) - held(sensor, 0.0))
    higher = abs(held(sensor, 0.035) - held(sensor, 0.03))
    assert low < 0.1 * higher


@pytest.mark.parametrize("kind", ["P", "Q", "R"])
def test_a_pad_saturates_beyond_its_range(kind: str) -> None:
    """From three to four times full load a pad on its stop moves less than 2 % of its output."""
    sensor = drawn(kind)
    output = abs(held(sensor, 1.0) - held(sensor, 0.0))
    assert abs(held(sensor, 4.0) - held(sensor, 3.0)) < 0.02 * output


@pytest.mark.parametrize("kind", KINDS)
def test_days_scatter_as_the_table_says(kind: str) -> None:
    """Over 400 days zero and span shift with the table's standard deviation (10 %)."""
    sensor, rng = draw_sensor(kind, np.random.default_rng(7)), np.random.default_rng(8)
    days = [sensor.day(rng) for _ in range(400)]
    assert np.std([day.day_zero for day in days]) == pytest.approx(sensor.sheet.day_zero_pct / 100.0, rel=0.1)
    assert np.std([day.day_span for day in days]) == pytest.approx(sensor.sheet.day_span_pct / 100.0, rel=0.1)
    assert sensor.day_zero == sensor.day_span == 0.0


@pytest.mark.parametrize("kind", KINDS)
def test_a_shift_of_zero_is_seen_in_the_output(kind: str) -> None:
    """A zero moved by 1 % of full output shows as 1 % of full output when unloaded (5 % for what a divider bends)."""
    sensor = drawn(kind)
    output = held(sensor, 1.0) - held(sensor, 0.0)
    assert (held(sensor.aged(zero=0.01), 0.0) - held(sensor, 0.0)) / output == pytest.approx(0.01, rel=0.05)


def test_an_aged_span_reads_a_load_as_a_larger_one() -> None:
    """A span grown by 2 % reads 0.5 of full scale as 0.51 (good cell, its loop is 0.03 %)."""
    sensor = drawn("A")
    assert held(sensor.aged(span=0.02), 0.5) == pytest.approx(held(sensor, 0.51), rel=2e-3)


def test_an_aged_sensor_is_noisier() -> None:
    """Noise times three is three times the noise (1000 readings)."""
    sensor, t_s = draw_sensor("C", np.random.default_rng(7)), np.arange(0.0, 20.0, 0.0125)
    new, old = (s.respond(t_s, 0.0 * t_s, 22.0, np.random.default_rng(8)) for s in (sensor, sensor.aged(noise=3.0)))
    assert old.std() == pytest.approx(3.0 * new.std(), rel=0.05)


def test_sampling_a_finer_history_agrees_with_responding_on_it() -> None:
    """Fewer readings of a slow history give the counts that responding on its own grid gives at those times."""
    sensor = drawn("Q")
    fine_s = np.arange(0.0, 20.0, 0.005)
    force_N = 200.0 * np.sin(0.2 * fine_s) ** 2
    picked = fine_s[::2]
    read = sensor.sample(picked, fine_s, force_N, 22.0, np.random.default_rng(8))
    plain = sensor.respond(picked, force_N[::2], 22.0, np.random.default_rng(8))
    assert np.max(np.abs(read - plain)) < 1e-4 * np.ptp(plain) + 1.0


@pytest.mark.parametrize(
    ("t_s", "force_N", "named"),
    [
        (np.array([0.0, 1.0]), np.zeros(3), "shape"),
        (np.array([]), np.array([]), "shape"),
        (np.array([0.0, 0.0]), np.zeros(2), "does not follow"),
        (np.array([0.0, 1.0]), np.array([0.0, np.nan]), "finite"),
    ],
)
def test_a_history_without_sense_is_refused(t_s: FloatArray, force_N: FloatArray, named: str) -> None:
    """Shapes that differ, times that stand still and values that are no numbers are refused in words."""
    with pytest.raises(SettingError, match=named):
        drawn("A").respond(t_s, force_N, 22.0, np.random.default_rng(8))


def test_the_thermometer_is_good_to_a_tenth_of_a_degree() -> None:
    """Steps of 1/16 °C and 0.03 °C of noise: rms error below 0.05 °C, whole sixteenths."""
    t_s = np.arange(0.0, 100.0, 0.1)
    read = drawn("A").thermometer(t_s, np.linspace(20.0, 25.0, t_s.size), np.random.default_rng(8))
    assert np.sqrt(np.mean((read - np.linspace(20.0, 25.0, t_s.size)) ** 2)) < 0.05
    assert (read * 16.0 == np.rint(read * 16.0)).all()


def test_the_data_sheet_knows_the_lag_to_some_percent() -> None:
    """Over forty feet the stated lag is off by 4 % rms (10 µs of rounding beside it), never by more than a tenth."""
    feet = [draw_sensor("A", np.random.default_rng(seed)) for seed in range(40)]
    off_s = np.array([foot.stated_lag_s - foot.lag_s for foot in feet])
    lag_s = np.array([foot.lag_s for foot in feet])
    assert 0.02 < np.sqrt(np.mean((off_s / lag_s) ** 2)) < 0.06
    assert (np.abs(off_s) < 0.1 * lag_s + 5e-6).all()
