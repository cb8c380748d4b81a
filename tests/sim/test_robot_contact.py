"""The contact rule of the truth on constructed input."""

from __future__ import annotations

import numpy as np

from footcal.sim.robot_contact import contact_truth


def force_N(*runs: tuple[int, float]) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    """Return a force made of runs of (samples, newtons)."""
    return np.concatenate([np.full(count, value) for count, value in runs])


def test_force_of_one_newton_is_not_yet_contact() -> None:
    """The force must exceed 1 N."""
    assert not contact_truth(force_N((50, 1.0)), 1e-3).any()
    assert contact_truth(force_N((50, 1.01)), 1e-3).all()


def test_a_gap_of_eleven_milliseconds_is_closed_and_one_of_twelve_stays() -> None:
    """Gaps shorter than 12 ms are closed."""
    short = contact_truth(force_N((50, 20.0), (11, 0.0), (50, 20.0)), 1e-3)
    long = contact_truth(force_N((50, 20.0), (12, 0.0), (50, 20.0)), 1e-3)
    assert short.all()
    assert np.count_nonzero(~long) == 12


def test_a_touch_of_seven_milliseconds_is_dropped_and_one_of_eight_stays() -> None:
    """Touches shorter than 8 ms are dropped."""
    assert not contact_truth(force_N((50, 0.0), (7, 20.0), (50, 0.0)), 1e-3).any()
    assert np.count_nonzero(contact_truth(force_N((50, 0.0), (8, 20.0), (50, 0.0)), 1e-3)) == 8


def test_chatter_is_first_closed_then_judged() -> None:
    """Two touches of 5 ms with 5 ms between are one touch of 15 ms, since gaps are closed first."""
    touched = contact_truth(force_N((50, 0.0), (5, 9.0), (5, 0.0), (5, 9.0), (50, 0.0)), 1e-3)
    assert np.flatnonzero(touched).tolist() == list(range(50, 65))


def test_the_rule_counts_time_not_samples() -> None:
    """At 2 kHz a gap of 22 samples is 11 ms and is closed."""
    assert contact_truth(force_N((99, 5.0), (22, 0.0), (99, 5.0)), 0.5e-3).all()
