"""Tests of injected faults: each label is true of the session."""

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.sim.bench import SimulatedSession, run_session
from footcal.sim.faults import Fault, injected
from footcal.sim.sensors import SimulatedSensor, draw_sensor


@pytest.fixture(scope="module")
def sensor() -> SimulatedSensor:
    """Return a good cell."""
    return draw_sensor("A", np.random.default_rng(7))


@pytest.fixture(scope="module")
def clean(sensor: SimulatedSensor) -> SimulatedSession:
    """Return a session of two cycles."""
    return run_session(sensor, np.random.default_rng(8), parts=("presses", "cycles"), cycles=2)


def with_one(sensor: SimulatedSensor, clean: SimulatedSession, **count: int) -> tuple[SimulatedSession, Fault]:
    """Return the session with one fault, and its label."""
    session, faults = injected(clean, sensor, np.random.default_rng(9), **count)
    assert len(faults) == 1
    return session, faults[0]


def counts_per_N(sensor: SimulatedSensor) -> float:
    """Return the slope of the cell."""
    return sensor.converter.gain / sensor.capacity_N


def test_a_spike_is_one_flipped_bit(sensor: SimulatedSensor, clean: SimulatedSession) -> None:
    """Each labelled reading is off by a power of two, and no other by more than noise and placement allow."""
    session, faults = injected(clean, sensor, np.random.default_rng(9), spikes=5)
    off = session.readings["raw"] - clean.readings["raw"]
    for fault in faults:
        at = int(np.argmin(np.abs(session.readings["t_s"] - fault.t_s)))
        assert np.log2(abs(fault.size)) == int(np.log2(abs(fault.size)))
        assert off[at] == pytest.approx(fault.size, abs=2000.0)
        off[at] = 0.0
    assert np.abs(off).max() < 2000.0  # noise is some 100 counts rms at most


@pytest.mark.parametrize("kind", ["bumps", "tugs"])
def test_a_disturbed_hold_is_off_by_the_labelled_force(
    sensor: SimulatedSensor, clean: SimulatedSession, kind: str
) -> None:
    """Somewhere in the labelled step's window the reading is off by the labelled force (10 %), elsewhere it is not."""
    session, fault = with_one(sensor, clean, **{kind: 1})
    t_s = session.readings["t_s"]
    off_N = (session.readings["raw"] - clean.readings["raw"]) / counts_per_N(sensor)
    row = session.steps["step"].index(fault.step)
    inside = (t_s >= session.steps["t_start_s"][row]) & (t_s <= session.steps["t_end_s"][row])
    outside = (t_s < fault.t_s) | (t_s > session.steps["t_end_s"][row] + 0.6)
    assert abs(fault.size) >= 0.03 * sensor.capacity_N
    assert np.abs(off_N[inside]).max() == pytest.approx(abs(fault.size), rel=0.1)
    assert np.abs(off_N[outside]).max() < 0.01 * abs(fault.size)


def test_a_tug_changes_no_force_and_a_bump_does(sensor: SimulatedSensor, clean: SimulatedSession) -> None:
    """The true force stays as it was under a tug, and moves by the labelled force under a bump."""
    tugged, _ = with_one(sensor, clean, tugs=1)
    bumped, bump = with_one(sensor, clean, bumps=1)
    assert np.array_equal(tugged.force_N, clean.force_N)
    assert np.abs(bumped.force_N - clean.force_N).max() == pytest.approx(abs(bump.size), rel=0.02)


def test_a_slow_load_still_moves_after_the_note(sensor: SimulatedSensor, clean: SimulatedSession) -> None:
    """At the noted time the load is still on its way, and it arrives the labelled seconds later."""
    session, fault = with_one(sensor, clean, slow=1)
    row = session.steps["step"].index(fault.step)
    noted_s = session.steps["t_load_s"][row]
    before, after, end = (
        float(session.history.force_N(np.array([t]), sensed=False)[0])
        for t in (noted_s, noted_s + fault.size + 0.05, session.steps["t_end_s"][row])
    )
    change = end - float(clean.history.force_N(np.array([noted_s - 1.5]), sensed=False)[0])
    assert abs(before - end) > 0.2 * abs(change)
    assert abs(after - end) < 0.12 * abs(change)


def test_a_wrong_mass_changes_the_note_alone(sensor: SimulatedSensor, clean: SimulatedSession) -> None:
    """One entered mass is off by the labelled piece; force and all other steps are as they were."""
    session, fault = with_one(sensor, clean, wrong_masses=1)
    off = np.array(session.steps["mass_kg"]) - np.array(clean.steps["mass_kg"])
    row = session.steps["step"].index(fault.step)
    assert off[row] == pytest.approx(fault.size)
    assert np.count_nonzero(off) == 1
    assert session.steps["mass_kg"][row] > 0.0
    assert abs(fault.size) * 9.81 >= 0.03 * sensor.capacity_N
    assert np.array_equal(session.force_N, clean.force_N)


def test_faults_hit_different_steps_and_leave_the_original_alone(
    sensor: SimulatedSensor, clean: SimulatedSession
) -> None:
    """Eight faults of people lie in eight steps, and the clean session is not changed."""
    before = list(clean.steps["mass_kg"])
    _, faults = injected(clean, sensor, np.random.default_rng(9), bumps=2, tugs=2, slow=2, wrong_masses=2)
    assert len({fault.step for fault in faults}) == 8
    assert [fault.t_s for fault in faults] == sorted(fault.t_s for fault in faults)
    assert clean.steps["mass_kg"] == before


def test_more_faults_than_holds_are_refused(sensor: SimulatedSensor, clean: SimulatedSession) -> None:
    """There must be a held load for each fault."""
    with pytest.raises(SettingError, match="held loads"):
        injected(clean, sensor, np.random.default_rng(9), bumps=1000)
