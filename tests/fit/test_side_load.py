"""Side load from holds on wedges: feet with a drawn cross-sensitivity, and what the file says where it is unknown."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from footcal.errors import SessionError
from footcal.files.session import Session
from footcal.fit.engine import FitResult, fit_sessions
from footcal.fit.holds import bench_place, holds_of, load_direction
from footcal.sim.bench import run_session
from footcal.sim.sensor_chain import SimulatedSensor
from footcal.sim.sensors import draw_sensor
from footcal.sim.tilting import pressed_along, run_tilted
from tests.simulated import as_session

LEAN = 0.75  # side load over axial load of a leaning shank (the design's figure)
KINDS = ("A", "B", "C", "P", "Q", "R")
SEEDS = (100, 101)  # never used while tuning


@cache
def foot(kind: str, seed: int) -> tuple[SimulatedSensor, Session, Session]:
    """A simulated foot, its session on the level, and one on wedges on another day."""
    rng = np.random.default_rng(seed)
    sensor = draw_sensor(kind, rng)
    level = as_session(run_session(sensor, rng, parts=("presses", "cycles", "quick")))
    return sensor, level, as_session(run_tilted(sensor.day(rng), rng))


@cache
def fitted(kind: str, seed: int) -> FitResult:
    """The two sessions fitted together."""
    return fit_sessions(list(foot(kind, seed)[1:]))


def off(kind: str, seed: int) -> tuple[np.ndarray, np.ndarray]:
    """Error of the cross-sensitivity along x and y, and its stated standard uncertainty."""
    found = fitted(kind, seed).calibration.file.model.cross_axis
    error = np.array([found.x, found.y]) - foot(kind, seed)[0].cross
    return error, np.array([found.u_x, found.u_y])


@pytest.mark.parametrize(("kind", "percent"), [("A", 0.3), ("B", 0.3), ("C", 0.3), ("Q", 1.0), ("R", 1.0), ("P", 1.0)])
def test_after_the_recipe_a_leaning_shank_is_read_to_the_figure(kind: str, percent: float) -> None:
    """At 0.75 axial loads of side load: 0.3 % of axial for cells, 1 % for pads (the issue's figures)."""
    left = [100.0 * LEAN * float(np.hypot(*off(kind, seed)[0])) for seed in SEEDS]
    assert max(left) <= percent


def test_the_stated_uncertainty_covers_the_error() -> None:
    """Of 24 errors (12 feet, x and y) at least 20 lie inside two standard uncertainties (binomial, 95 %: 1 in 200)."""
    ratios = np.concatenate([np.abs(error) / u for error, u in (off(kind, seed) for kind in KINDS for seed in SEEDS)])
    assert np.sum(ratios <= 2.0) >= 20
    assert np.median(ratios) > 0.1  # and it is not stated far too wide


def test_tilted_steps_do_not_touch_the_curve() -> None:
    """Tilted masses entered ten times too high change nothing in the coefficients."""
    _, level, tilted = foot("B", 100)
    wrong = tilted.steps.copy()
    wrong.loc[wrong["kind"] == "tilted", "mass_kg"] *= 10.0
    spoilt = fit_sessions([level, replace(tilted, steps=wrong)]).calibration.file.model
    assert spoilt.coefficients == fitted("B", 100).calibration.file.model.coefficients


def test_an_untested_foot_keeps_the_stated_default() -> None:
    """Cells 1 %, pads 3 % of side load (common practice, no source)."""
    found = fit_sessions([foot("B", 100)[1]]).calibration.file.model.cross_axis
    assert (found.x, found.y, found.u_x, found.u_y, found.tested) == (0.0, 0.0, 0.01, 0.01, False)


def test_a_foot_tilted_about_one_axis_only_keeps_the_default_for_the_other() -> None:
    """Turned about x, side load lies along y: c_y is found, c_x stays as stated, and the file says so."""
    rng = np.random.default_rng(100)
    sensor = draw_sensor("B", rng)
    level = as_session(run_session(sensor, rng, parts=("presses", "cycles")))
    tilted = as_session(run_tilted(sensor, rng, turns=((1.0, 0.0), (-1.0, 0.0))))
    result = fit_sessions([level, tilted])
    found = result.calibration.file.model.cross_axis
    assert (found.x, found.u_x, found.tested) == (0.0, 0.01, False)
    assert found.y == pytest.approx(sensor.cross[1], abs=0.004)
    assert any("one axis" in note for note in result.notes)


def test_a_wedge_turned_one_way_only_is_not_told_from_cross_sensitivity() -> None:
    """Half a degree of slope is 0.009 of cross-sensitivity (its sine, by hand): the uncertainty must say so."""
    rng = np.random.default_rng(100)
    sensor = draw_sensor("A", rng)
    level = as_session(run_session(sensor, rng, parts=("presses", "cycles")))
    tilted = as_session(run_tilted(sensor, rng, wedges_deg=(30.0,), turns=((1.0, 0.0), (0.0, 1.0))))
    found = fit_sessions([level, tilted]).calibration.file.model.cross_axis
    assert min(found.u_x, found.u_y) > 0.8 * np.sin(np.radians(0.5))


def test_a_wrong_mass_on_a_wedge_is_named() -> None:
    """One tilted mass entered 2 kg too high: its step is set aside and the result stays good."""
    sensor, level, tilted = foot("B", 101)
    steps = tilted.steps.copy()
    loaded = steps.index[(steps["kind"] == "tilted") & (steps["mass_kg"] > 10.0)]
    row = loaded[len(loaded) // 2]
    steps.loc[row, "mass_kg"] += 2.0
    result = fit_sessions([level, replace(tilted, steps=steps)])
    named = [result.data.holds[aside.hold].step for aside in result.asides if "wedge" in aside.reason]
    assert named == [int(steps.loc[row, "step"])]
    found = result.calibration.file.model.cross_axis
    assert np.hypot(found.x - sensor.cross[0], found.y - sensor.cross[1]) < 0.004


@pytest.mark.parametrize("tilt_deg", [(20.0, 0.0), (0.0, -35.0), (10.0, 25.0)])
def test_the_load_presses_along_the_rotated_vertical(tilt_deg: tuple[float, float]) -> None:
    """Against rotation matrices written out in the simulator, which shares no code."""
    assert load_direction(*tilt_deg) == pytest.approx(pressed_along(*tilt_deg), abs=1e-12)


def test_the_weight_below_the_sensor_leans_with_the_foot() -> None:
    """A foot turned up with 0.5 kg on it, zero on a wedge of 30 degrees: 0.5 · 9.81 · cos 30° (by hand)."""
    rng = np.random.default_rng(7)
    session = as_session(run_tilted(draw_sensor("B", rng), rng, mass_below_sensor_kg=0.5))
    holds = holds_of(session, bench_place(session.meta))
    zero = next(hold for hold in holds if hold.direction == "zero" and hold.tilt_x_deg == 30.0)
    assert zero.load_N == pytest.approx(0.5 * 9.81 * np.cos(np.radians(30.0)), abs=1e-9)
    assert zero.side_y_N == pytest.approx(0.5 * 9.81 * 0.5, abs=1e-9)


def test_a_weight_that_pulls_no_one_knows_whither_is_refused() -> None:
    """Tilted out of a sideways mount, the weight below the sensor has no known direction."""
    session = foot("B", 100)[2]
    sideways = replace(session, meta=replace(session.meta, mount="side", mass_below_sensor_kg=0.4))
    with pytest.raises(SessionError, match="mount side"):
        holds_of(sideways, bench_place(sideways.meta))
