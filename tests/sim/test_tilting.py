"""Tests of the simulated session on wedges."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.sim.sensors import draw_sensor
from footcal.sim.tilting import pressed_along, run_tilted


@pytest.mark.parametrize(
    ("tilt_deg", "along"),
    [
        ((0.0, 0.0), (0.0, 0.0, 1.0)),
        ((30.0, 0.0), (0.0, 0.5, np.sqrt(0.75))),
        ((0.0, 30.0), (-0.5, 0.0, np.sqrt(0.75))),
        ((-30.0, 0.0), (0.0, -0.5, np.sqrt(0.75))),
    ],
)
def test_a_load_on_a_tilted_foot_splits_into_cosine_and_sine(
    tilt_deg: tuple[float, float], along: tuple[float, float, float]
) -> None:
    """By hand: the foot turned right-handed about x by a, a vertical load presses along +y with its sine."""
    assert pressed_along(*tilt_deg) == pytest.approx(along, abs=1e-12)


def test_eight_postures_of_three_loads_are_noted_as_tilted() -> None:
    """Wedges of 15 and 30 degrees, each in four turns, three loads: 24 loaded tilted steps at nominal angles."""
    rng = np.random.default_rng(7)
    steps = run_tilted(draw_sensor("B", rng), rng).steps
    assert len({len(column) for column in steps.values()}) == 1
    loaded = [
        (x, y)
        for x, y, kind, mass in zip(
            steps["tilt_x_deg"], steps["tilt_y_deg"], steps["kind"], steps["mass_kg"], strict=True
        )
        if kind == "tilted" and mass
    ]
    assert len(loaded) == 24
    assert set(loaded) == {(s * w, 0.0) for s in (1, -1) for w in (15.0, 30.0)} | {
        (0.0, s * w) for s in (1, -1) for w in (15.0, 30.0)
    }


def test_the_axial_force_on_a_wedge_is_the_cosine_of_the_load() -> None:
    """Exact angles: mass times g times cos 30° less the buoyancy of 1.2/8000 (by hand)."""
    rng = np.random.default_rng(7)
    session = run_tilted(
        draw_sensor("B", rng), rng, wedges_deg=(30.0,), turns=((1.0, 0.0),), wedge_error_deg=0.0, seat_error_deg=0.0
    )
    row = max(i for i, mass in enumerate(session.steps["mass_kg"]) if mass)
    end = np.searchsorted(session.readings["t_s"], float(str(session.steps["t_end_s"][row]))) - 2
    mass_kg = float(str(session.steps["mass_kg"][row]))
    expected_N = mass_kg * 9.81 * (1.0 - 1.2 / 8000.0) * np.cos(np.radians(30.0))
    assert session.force_N[end] == pytest.approx(expected_N, rel=2e-4)
