"""Tests of simulated handling: the force against time."""

import numpy as np
import pytest

from footcal.sim.handling import AFTER_s, ForceHistory, Move, Waggle, knock, pumping, set_down


def test_a_load_goes_over_and_stays() -> None:
    """Before a move the old force stands, afterwards the new one, each to the last digit, on top of the rest."""
    moves = (Move(1.0, 0.5, 100.0, 101.0, 0.1, 6.0, 0.1), Move(5.0, 0.5, 40.0, 40.4, 0.1, 6.0, 0.1))
    history = ForceHistory(-3.0, moves, ())
    t_s = np.array([0.5, 4.0, 8.0])
    assert history.force_N(t_s, sensed=False) == pytest.approx([-3.0, 97.0, 37.0], abs=1e-12)
    assert history.force_N(t_s, sensed=True) == pytest.approx([-3.0, 98.0, 37.4], abs=1e-12)


def test_setting_down_rings_and_fades() -> None:
    """The force overshoots by a few percent of the change, and is within 0.01 % of it before the next one counts."""
    history = ForceHistory(0.0, (Move(0.0, 0.5, 100.0, 100.0, 0.08, 6.0, 0.15),), ())
    t_s = np.arange(0.0, 3.0, 0.001)
    force_N = history.force_N(t_s, sensed=False)
    assert 101.0 < force_N.max() < 108.0
    assert np.abs(force_N[t_s > 0.5 + AFTER_s - 0.05] - 100.0).max() < 0.01
    assert np.abs(np.diff(force_N)).max() < 1.0  # no jump anywhere


def test_the_order_of_times_does_not_matter() -> None:
    """Force at shuffled times is the shuffled force."""
    rng = np.random.default_rng(7)
    history = ForceHistory(1.0, (set_down(rng, 1.0, 50.0, 50.0),), (knock(rng, 3.0, 200.0),))
    t_s = np.linspace(0.0, 5.0, 300)
    order = rng.permutation(t_s.size)
    assert np.array_equal(history.force_N(t_s[order], sensed=True), history.force_N(t_s, sensed=True)[order])


def test_a_tug_is_felt_but_no_force() -> None:
    """What pulls at the cable is seen by the sensor, not by the true force."""
    tug = Waggle(1.0, np.array([0.0, 0.1, 1.0, 1.1]), np.array([0.0, 5.0, 5.0, 0.0]), felt_only=True)
    history = ForceHistory(0.0, (), (tug,))
    assert history.force_N(np.array([1.5]), sensed=True) == pytest.approx([5.0])
    assert history.force_N(np.array([1.5]), sensed=False) == pytest.approx([0.0])


def test_moving_loads_are_followed_finely_and_readings_are_kept() -> None:
    """Every reading time is in the fine grid, which is 2 ms or closer wherever something moves."""
    history = ForceHistory(0.0, (Move(2.0, 0.5, 9.0, 9.0, 0.1, 6.0, 0.1),), ())
    t_s = np.arange(0.0, 6.0, 0.0123)
    fine_s = history.fine_times(t_s)
    assert np.isin(t_s, fine_s).all()
    assert (np.diff(fine_s) > 0.0).all()
    assert np.diff(fine_s)[(fine_s[:-1] > 2.0) & (fine_s[:-1] < 3.9)].max() < 2.1e-3


def test_pumping_covers_the_range_and_lets_go() -> None:
    """Forty seconds of strokes reach 0.8 of full scale, never beyond 0.9, and end with nothing."""
    pump = pumping(np.random.default_rng(7), 40.0, 400.0)
    assert 320.0 < pump.added_N.max() <= 360.0
    assert pump.added_N.min() >= 0.0
    assert pump.added_N[[0, -1]] == pytest.approx([0.0, 0.0], abs=1e-9)
    strokes = np.count_nonzero((pump.added_N[1:-1] > pump.added_N[:-2]) & (pump.added_N[1:-1] >= pump.added_N[2:]))
    assert 25 < strokes < 80
