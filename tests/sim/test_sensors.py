"""Tests of drawn sensors: each shows the figures of its sheet, measured from its counts alone."""

import time

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.sim.sensor_table import SHEETS, TYPICAL
from footcal.sim.sensors import draw_sensor
from tests.sim.figures import measured

SEEDS = tuple(range(101, 109))
# Typed apart from the sheets: full scale N, ADC bits, rate Hz, loop, nonlinearity, creep, span and zero per K, noise.
TABLE = {
    "A": (500, 24, 80, 0.03, 0.02, 0.007, 0.002, 0.002, 0.005),
    "B": (300, 24, 80, 0.3, 0.2, 0.04, -0.03, 0.04, 0.03),
    "C": (400, 24, 80, 0.9, 0.2, 1.0, 0.02, -0.014, 0.011),
    "P": (250, 12, 100, 9.0, 39.0, 4.0, 0.05, 0.04, 0.1),
    "Q": (400, 16, 100, 6.0, 3.0, 3.0, 0.07, -0.07, 0.06),
    "R": (600, 16, 100, 3.0, 8.0, 1.2, 0.4, 0.36, 0.06),
}


@pytest.mark.parametrize("kind", list(TABLE))
def test_realised_figures_are_those_of_the_table(kind: str) -> None:
    """Loop, nonlinearity, creep, temperature and noise: the mean of eight feet within 20 %, each within a factor 1.6.

    Scatter of a foot: 10 to 15 % per figure, held within two of them (6 % for the divider's bend).
    """
    found = []
    for seed in SEEDS:
        rng = np.random.default_rng(seed)
        figures = measured(draw_sensor(kind, rng), rng)
        found.append(list(vars(figures).values()))
    ratio = np.array(found) / np.array(TABLE[kind][3:])
    assert np.abs(ratio.mean(axis=0) - 1.0).max() < 0.2
    assert (ratio > 1.0 / 1.6).all()
    assert (ratio < 1.6).all()
    assert ratio.std(axis=0).min() > 0.01  # seeds differ


@pytest.mark.parametrize("kind", list(TABLE))
def test_a_sensor_has_the_range_and_converter_of_the_table(kind: str) -> None:
    """Full scale, bits and rate are the table's; counts are whole and within the converter's range."""
    rng = np.random.default_rng(7)
    sensor = draw_sensor(kind, rng)
    full_N, bits, rate_Hz = TABLE[kind][:3]
    assert (sensor.capacity_N, sensor.sheet.adc_bits, sensor.rate_Hz) == (full_N, bits, rate_Hz)
    t_s = np.arange(0.0, 4.0, 1.0 / rate_Hz)
    raw = sensor.respond(t_s, full_N * np.sin(t_s) ** 2, 22.0, rng)
    assert (raw == np.rint(raw)).all()
    assert sensor.converter.lowest <= raw.min() < raw.max() <= sensor.raw_max


def test_the_same_seed_gives_the_same_sensor() -> None:
    """Drawing and responding depend on the generator alone."""
    t_s = np.arange(0.0, 2.0, 0.01)
    runs = []
    for _ in range(2):
        rng = np.random.default_rng(7)
        runs.append(draw_sensor("Q", rng).respond(t_s, 100.0 * t_s, 22.0, rng))
    assert np.array_equal(*runs)


@pytest.mark.parametrize(("word", "letter"), list(TYPICAL.items()))
def test_a_word_draws_a_typical_sensor(word: str, letter: str) -> None:
    """Each kind of transducer has a sensor that stands for it."""
    assert draw_sensor(word, np.random.default_rng(7)).kind == letter


def test_capacity_can_be_chosen() -> None:
    """A foot of 300 N built like R reads at 300 N what R reads at its own full scale."""
    small, large = (draw_sensor("R", np.random.default_rng(7), capacity_N=full_N) for full_N in (300.0, None))
    t_s = np.arange(0.0, 5.0, 0.01)
    share = np.clip(t_s, 0.0, 1.0)
    raws = [s.respond(t_s, share * s.capacity_N, 22.0, np.random.default_rng(8)) for s in (small, large)]
    assert np.array_equal(*raws)


def test_both_wirings_of_a_divider_are_drawn() -> None:
    """Among twenty resistive pads some count upwards and some downwards."""
    wirings = {draw_sensor("P", np.random.default_rng(seed)).pad_to_ground for seed in range(20)}
    assert wirings == {True, False}


def test_side_sensitivity_is_between_half_and_three_percent() -> None:
    """The length of the drawn cross-sensitivity lies in the table's range, and its direction anywhere."""
    drawn = np.array([draw_sensor("A", np.random.default_rng(seed)).cross for seed in range(40)])
    length = np.hypot(drawn[:, 0], drawn[:, 1])
    assert 0.005 <= length.min() < length.max() <= 0.03
    assert (drawn.min(axis=0) < 0.0).all()
    assert (drawn.max(axis=0) > 0.0).all()


@pytest.mark.parametrize(("kind", "capacity_N"), [("Z", None), ("load cell", None), ("A", 0.0), ("A", np.nan)])
def test_an_unknown_sensor_is_refused(kind: str, capacity_N: float | None) -> None:
    """Unknown kind or capacity: refused with what is allowed."""
    with pytest.raises(SettingError, match="draw_sensor"):
        draw_sensor(kind, np.random.default_rng(7), capacity_N)


def test_ten_minutes_take_less_than_half_a_second() -> None:
    """10 min at 100 Hz in < 0.5 s, 60 s at 1 kHz in < 1 s for the slowest kind (thread time)."""
    rng = np.random.default_rng(7)
    sensor = draw_sensor("P", rng)
    for count, step_s, allowed_s in ((60_000, 0.01, 0.5), (60_000, 0.001, 1.0)):
        t_s = np.arange(count) * step_s
        force_N = 100.0 * np.abs(np.sin(t_s))
        sensor.respond(t_s[:10], force_N[:10], 22.0, rng)  # compiled by now
        before_s = time.thread_time()
        sensor.respond(t_s, force_N, 22.0, rng)
        assert time.thread_time() - before_s < allowed_s


def test_every_sheet_has_a_kind() -> None:
    """The table of sheets holds the six kinds and no other."""
    assert list(SHEETS) == list(TABLE)
