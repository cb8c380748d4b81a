"""Contact decision: confirmation, times between samples, what a start is not."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from footcal.fusion.model import FusionSettings
from footcal.records import FloatArray
from tests.fusion.lone import LoneFilter, lone_filter

WEIGHT_N = 176.58


def press(lone: LoneFilter, force_N: float, rng: np.random.Generator) -> None:
    """Write one tick of readings of a vertical force into the shared fields of every leg."""
    s = lone.s
    force = np.array([0.0, 0.0, force_N])
    s["axial_N"] = s["axis_B"][:, 0] @ force + 0.05 * rng.standard_normal()
    s["axial_new"], s["tau_new"][:3] = 1, 1
    torque = -s["jac_B"][:, :, 0].T @ force
    s["tau_meas_Nm"][:3, 0] = torque[:3] + 0.1 * rng.standard_normal(3)


def profile(
    lone: LoneFilter, force_N: FloatArray, period_ns: int = 1_000_000
) -> list[tuple[int, int, int, float, float]]:
    """Run a force profile; return (tick, contact, event, t_event_s, p) per tick."""
    rng = np.random.default_rng(7)
    told = []
    for k, force in enumerate(force_N):
        press(lone, float(force), rng)
        out = lone.whole(k * period_ns, raw=float(rng.standard_normal()))
        told.append(
            (k, int(out["contact"][0]), int(out["event"][0]), float(out["t_event_s"][0]), float(out["p_contact"][0]))
        )
    return told


def stance(load_N: float = 60.0) -> FloatArray:
    """Swing for 100 ms, 60 N from the tick at 100 ms on for 150 ms, swing again from 250 ms."""
    return np.concatenate([np.zeros(100), np.full(150, load_N), np.zeros(100)])


def test_a_stance_gives_one_touchdown_and_one_liftoff_near_their_true_times() -> None:
    """A step of load between 99 and 100 ms and its end between 249 and 250 ms are told once each, within 2 and 8 ms."""
    told = profile(lone_filter(FusionSettings(), WEIGHT_N), stance())
    events = [(event, t_s) for _, _, event, t_s, _ in told if event]
    assert [event for event, _ in events] == [1, -1]
    assert events[0][1] == pytest.approx(0.0995, abs=0.002)
    assert events[1][1] == pytest.approx(0.2495, abs=0.008)


def test_a_touch_shorter_than_the_confirmation_is_no_contact() -> None:
    """A load of 2 ms is not confirmed when 5 ms are asked for."""
    force = np.zeros(200)
    force[100:102] = 40.0
    patient = replace(FusionSettings(), on_s=0.005)
    told = profile(lone_filter(patient, WEIGHT_N), force)
    assert all(event == 0 for _, _, event, _, _ in told)


def test_standing_from_the_start_is_no_touchdown() -> None:
    """A robot that stands when the log begins has contact without an event."""
    told = profile(lone_filter(FusionSettings(), WEIGHT_N), np.full(100, 45.0))
    assert told[-1][1] == 1
    assert all(event == 0 for _, _, event, _, _ in told)


def test_an_unloaded_foot_is_not_in_contact() -> None:
    """A foot in the air has a small probability of contact once the first millisecond has passed."""
    told = profile(lone_filter(FusionSettings(), WEIGHT_N), np.zeros(300))
    assert all(contact == 0 for _, contact, _, _, _ in told)
    assert max(p for *_, p in told[20:]) < 0.1


def test_a_gap_of_more_than_50_ms_starts_afresh_without_an_event() -> None:
    """After 60 ms without a tick the filter starts anew: the contact it then finds is no touchdown."""
    lone = lone_filter(FusionSettings(), WEIGHT_N)
    profile(lone, np.zeros(100))
    rng = np.random.default_rng(8)
    events = []
    for k in range(50):
        press(lone, 50.0, rng)
        out = lone.whole((160 + k) * 1_000_000, raw=float(rng.standard_normal()))
        events.append(int(out["event"][0]))
    assert int(lone.s["fil_resets"][0]) == 2  # power-up, and the gap
    assert int(out["contact"][0]) == 1
    assert not any(events)
