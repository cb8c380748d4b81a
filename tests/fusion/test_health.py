"""Health: each fault is named, and a sick sensor no longer moves the estimate."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.fusion import health
from footcal.fusion.model import FusionSettings
from footcal.records import Health
from tests.fusion.lone import LoneFilter, lone_filter

WEIGHT_N = 176.58


def hold(lone: LoneFilter, ticks: int, load_N: float, rng: np.random.Generator, **faults: object) -> None:
    """Run ticks of a steady vertical load from wherever the clock stands; faults change what is written."""
    s = lone.s
    force = np.array([0.0, 0.0, load_N])
    for _ in range(ticks):
        noise = 0.0 if "raw" in faults else rng.standard_normal()
        s["axial_N"] = s["axis_B"][:, 0] @ force + 0.05 * noise + float(faults.get("axial_N", 0.0))  # type: ignore[arg-type]
        s["axial_N"] += float(faults.get("scatter_N", 0.0)) * rng.standard_normal()  # type: ignore[arg-type]
        s["axial_new"], s["tau_new"][:3] = 1, 1
        s["tau_meas_Nm"][:3, 0] = -s["jac_B"][:, :3, 0].T @ force + 0.1 * rng.standard_normal(3)
        current = np.full((3, 1), 1.0) + 0.01 * rng.standard_normal((3, 1))
        if "dead_joint" in faults:
            current[int(faults["dead_joint"])] = 0.0  # type: ignore[call-overload]
            s["tau_meas_Nm"][int(faults["dead_joint"]), 0] = 0.0  # type: ignore[call-overload]
        lone.inp["current_A"] = current
        now = int(s["t_ns"][0]) + 1_000_000
        lone.whole(now, raw=float(faults.get("raw", rng.standard_normal())))  # type: ignore[arg-type]
        if np.isnan(float(faults.get("raw", 0.0))):  # type: ignore[arg-type]
            s["axial_new"] = 0


def bits(lone: LoneFilter) -> Health:
    """Return the health told last."""
    return Health(int(lone.out["health"][0, 0]))


@pytest.mark.parametrize("name", ["STUCK", "SATURATED", "SILENT", "STALE", "NOISY", "ZERO_DRIFT"])
def test_the_kernels_bits_are_those_of_the_table(name: str) -> None:
    """Bits spelled out in compiled code equal those of records.Health."""
    assert getattr(health, name) == int(Health[name])


@pytest.mark.parametrize("name", ["TORQUE_DISAGREES", "CURRENT_DEAD", "UNCALIBRATED", "ZERO_UNCONFIRMED"])
def test_the_kernels_upper_bits_are_those_of_the_table(name: str) -> None:
    """The same for the upper bits."""
    assert getattr(health, name) == int(Health[name])


def test_a_reading_that_stands_still_is_named_stuck_and_taken_out() -> None:
    """A raw value that repeats for 200 ms is stuck; then a jump of the reading no longer moves the force."""
    rng = np.random.default_rng(7)
    lone = lone_filter(FusionSettings(), WEIGHT_N)
    hold(lone, 300, 45.0, rng)
    assert not bits(lone) & Health.STUCK
    hold(lone, 200, 45.0, rng, raw=1.25)
    assert bits(lone) & Health.STUCK
    before = float(lone.out["force_B_N"][0, 2, 0])
    hold(lone, 100, 45.0, rng, raw=1.25, axial_N=80.0)
    assert float(lone.out["force_B_N"][0, 2, 0]) == pytest.approx(before, abs=3.0)  # torques alone hold it this well


def test_a_channel_without_readings_is_stale_then_silent() -> None:
    """No reading for 40 ms is stale; for 600 ms it is silent too."""
    rng = np.random.default_rng(7)
    lone = lone_filter(FusionSettings(), WEIGHT_N)
    hold(lone, 100, 45.0, rng)
    hold(lone, 40, 45.0, rng, raw=np.nan)
    assert bits(lone) & Health.STALE
    assert not bits(lone) & Health.SILENT
    hold(lone, 560, 45.0, rng, raw=np.nan)
    assert bits(lone) & Health.SILENT


def test_scatter_far_above_the_calibrations_is_named_noisy() -> None:
    """White scatter of 12 N, 11 times the least noise minded, is noisy; the usual 0.05 N is not."""
    rng = np.random.default_rng(7)
    lone = lone_filter(FusionSettings(), WEIGHT_N)
    hold(lone, 300, 45.0, rng)
    assert not bits(lone) & Health.NOISY
    hold(lone, 300, 45.0, rng, scatter_N=12.0)
    assert bits(lone) & Health.NOISY


def test_a_current_of_exactly_zero_under_load_is_named_dead() -> None:
    """A knee that must carry some 7 N m but sends 0 A for 200 ms is dead, and its torque is no longer believed."""
    rng = np.random.default_rng(7)
    lone = lone_filter(FusionSettings(), WEIGHT_N)
    hold(lone, 300, 45.0, rng)
    assert not bits(lone) & Health.CURRENT_DEAD
    hold(lone, 200, 45.0, rng, dead_joint=2)
    assert bits(lone) & Health.CURRENT_DEAD


def test_the_zero_is_unconfirmed_until_the_first_certain_swing() -> None:
    """Standing leaves the zero unconfirmed; 100 ms of certain swing confirm it."""
    rng = np.random.default_rng(7)
    lone = lone_filter(FusionSettings(), WEIGHT_N)
    hold(lone, 200, 45.0, rng)
    assert bits(lone) & Health.ZERO_UNCONFIRMED
    hold(lone, 200, 0.0, rng)
    assert not bits(lone) & Health.ZERO_UNCONFIRMED


def test_the_zero_observer_follows_no_faster_than_it_may() -> None:
    """In swing a shifted zero of 2 N is followed at no more than 0.017 W/s = 3.0 N/s (by hand), and never in stance."""
    rng = np.random.default_rng(7)
    lone = lone_filter(FusionSettings(), WEIGHT_N)
    hold(lone, 300, 0.0, rng)
    start = float(lone.s["fil_zero_N"][0])
    hold(lone, 400, 0.0, rng, axial_N=0.7)
    found = float(lone.s["fil_zero_N"][0]) - start
    assert 0.2 < found <= 0.4 * 0.017 * WEIGHT_N
    hold(lone, 300, 60.0, rng, axial_N=0.7)
    held = float(lone.s["fil_zero_N"][0])
    hold(lone, 300, 60.0, rng, axial_N=0.7)
    assert float(lone.s["fil_zero_N"][0]) == held
