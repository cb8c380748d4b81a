"""Tests of the trials on another day, and of weekly checks."""

import dataclasses

import numpy as np
import pytest

from footcal.records import FloatArray
from footcal.sim.sensors import SimulatedSensor, draw_sensor
from footcal.sim.trials import check_session, stance_trial, stand_trial, static_trial


@pytest.fixture(scope="module")
def sensor() -> SimulatedSensor:
    """Return a cheap cell."""
    return draw_sensor("B", np.random.default_rng(7))


def test_static_loads_come_in_another_order_and_other_warmth(sensor: SimulatedSensor) -> None:
    """24 loads up to 0.95 of full scale and 3 zeros, up and down by chance, each steady, at three temperatures."""
    trial = static_trial(sensor.day(np.random.default_rng(8)), np.random.default_rng(9))
    numbers = np.unique(trial.hold[trial.scored > 0.0])
    forces = np.array([trial.force_N[trial.hold == number].mean() for number in numbers])
    spread = [np.ptp(trial.force_N[trial.hold == number]) for number in numbers]
    assert numbers.size == 27
    assert max(spread) < 0.1
    assert np.count_nonzero(forces < 0.1) == 3
    assert 0.5 * sensor.capacity_N < forces.max() < 0.96 * sensor.capacity_N
    assert np.sign(np.diff(forces)).std() > 0.5  # turns up and down
    assert 13.0 < trial.temp_C.min() <= trial.temp_C.max() < 31.0


def test_the_bench_is_settled_in_warmth_between_static_sets(sensor: SimulatedSensor) -> None:
    """Within each set the temperature stays within 2 °C; a new one comes only after a gap of half an hour."""
    trial = static_trial(sensor, np.random.default_rng(9))
    edges = np.flatnonzero(np.diff(trial.t_s) > 60.0)
    sets = np.split(trial.temp_C, edges + 1)
    assert len(sets) == 3
    assert max(float(np.ptp(part)) for part in sets) < 2.0
    assert np.diff(trial.t_s)[edges].min() > 1700.0


def test_walking_has_impacts_and_peaks_of_all_heights(sensor: SimulatedSensor) -> None:
    """60 s at 1 kHz: peaks from 0.3 to 0.9 of full scale, zero between, the steepest rise within a hundredth second."""
    trial = stance_trial(sensor, np.random.default_rng(9))
    peaks = np.array([trial.force_N[trial.hold == k].max() for k in range(1, int(trial.hold.max()) + 1)])
    assert trial.t_s.size == 65_000
    assert peaks.size > 50
    assert 0.3 <= peaks.min() / sensor.capacity_N < 0.4
    assert 0.8 < peaks.max() / sensor.capacity_N <= 0.9 + 1e-9
    assert (trial.force_N[trial.scored == 0.0] == 0.0).all()
    assert np.diff(trial.force_N).max() > 0.01 * sensor.capacity_N  # newtons per millisecond at touchdown


def test_each_footfall_is_a_placement(sensor: SimulatedSensor) -> None:
    """With a placement scatter of 5 % the same steps read differently, in stance only."""
    loose = dataclasses.replace(sensor, sheet=dataclasses.replace(sensor.sheet, placement_pct=5.0))
    raws = [stance_trial(s, np.random.default_rng(9), lasts_s=10.0).raw for s in (sensor, loose)]
    off = np.abs(raws[1] - raws[0])
    trial = stance_trial(sensor, np.random.default_rng(9), lasts_s=10.0)
    assert off[trial.scored > 0.0].max() > 20.0 * off[trial.t_s < 5.0].max()


def test_standing_lasts_ten_minutes_and_shifts_a_little(sensor: SimulatedSensor) -> None:
    """Ten minutes within the range, at a third or half of full scale, never lifted."""
    trial = stand_trial(sensor, np.random.default_rng(9))
    standing = trial.force_N[trial.scored > 0.0] / sensor.capacity_N
    assert trial.t_s[-1] == pytest.approx(605.0, abs=0.1)
    assert 0.05 < standing.min() < standing.max() < 0.95
    assert 0.005 < standing.std() < 0.25


def slopes(session: object) -> FloatArray:
    """Return counts per newton between the zero and each load of a check."""
    means = []
    for row in range(len(session.steps["step"])):
        t_s = session.readings["t_s"]
        inside = (t_s >= session.steps["t_start_s"][row]) & (t_s <= session.steps["t_end_s"][row])
        means.append((session.readings["raw"][inside].mean(), session.force_N[inside].mean()))
    zero = means[1][0]
    return np.array([(raw - zero) / force for raw, force in means[2:7]])


def test_a_check_shows_a_grown_span(sensor: SimulatedSensor) -> None:
    """A span grown by 3 % shows in the slope of a check by 3 %, within the day's scatter of 0.02 % (four of them)."""
    grown, new = (check_session(sensor, np.random.default_rng(8), span_change=change) for change in (0.03, 0.0))
    assert slopes(grown) / slopes(new) == pytest.approx(np.full(5, 1.03), abs=8e-4)


def test_a_check_shows_a_moved_zero_and_noise(sensor: SimulatedSensor) -> None:
    """A zero moved by 2 % of full output moves the unloaded reading by that; noise × 4 is seen as × 4."""
    old, new = (
        check_session(sensor, np.random.default_rng(8), zero_change=zero, noise_factor=factor)
        for zero, factor in ((0.02, 4.0), (0.0, 1.0))
    )
    rest = [
        session.readings["raw"][
            (session.readings["t_s"] > session.steps["t_start_s"][1])
            & (session.readings["t_s"] < session.steps["t_end_s"][1])
        ]
        for session in (old, new)
    ]
    output = slopes(new)[2] * sensor.capacity_N
    assert (rest[0].mean() - rest[1].mean()) / output == pytest.approx(0.02, rel=0.1)
    assert rest[0].std() / rest[1].std() == pytest.approx(4.0, rel=0.1)


def test_a_check_takes_one_or_two_minutes(sensor: SimulatedSensor) -> None:
    """One press, a zero, three loads up, two down, a zero."""
    session = check_session(sensor, np.random.default_rng(8))
    assert 55.0 < session.readings["t_s"][-1] < 120.0
    assert session.steps["direction"] == ["up", "zero", "up", "up", "up", "down", "down", "zero"]
    assert session.steps["kind"] == ["press", *["hold"] * 7]
