"""Joining the reference cell's clock to the foot's."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.fit.engine import fit_sessions
from footcal.fit.reference import gain_and_zero
from footcal.sim.bench import run_session
from footcal.sim.sensors import draw_sensor
from tests.simulated import as_session


@pytest.mark.parametrize(
    ("kind", "form", "offset_s"), [("A", "column", 0.017), ("Q", "file", -0.012), ("R", "column", 0.004)]
)
def test_the_clock_offset_is_found_to_half_a_millisecond(kind: str, form: str, offset_s: float) -> None:
    """Simulated pump recordings with a known offset; half a millisecond is the figure to reach."""
    rng = np.random.default_rng(101)
    sensor = draw_sensor(kind, rng)
    simulated = run_session(sensor, rng, reference=form, clock_offset_s=offset_s)
    found = fit_sessions([as_session(simulated)]).outcome.aligned
    assert found is not None
    assert found.offset_s == pytest.approx(offset_s, abs=0.0005)


def test_gain_and_zero_of_a_reference_are_found_in_spite_of_outliers() -> None:
    """A line through 5 % wild points."""
    rng = np.random.default_rng(7)
    reading = rng.uniform(0.0, 200.0, 500)
    reference = 1.002 * reading + 0.3 + 0.01 * rng.normal(size=500)
    reference[:25] += 40.0
    assert gain_and_zero(reading, reference) == pytest.approx((1.002, 0.3), abs=0.005)
