"""Tests of the written course of a bench session."""

import numpy as np
import pytest

from footcal.sim.loads import Load
from footcal.sim.script import Script, SETTLE_s, temperature_C


def script() -> Script:
    """Return an empty script."""
    return Script(rng=np.random.default_rng(7), placement_share=0.01)


def test_a_step_is_noted_after_the_load_has_settled() -> None:
    """The window starts 0.9 s after the load stopped and ends with the dwell of 6 s."""
    course = script()
    course.put(Load(5.0, 49.0), cycle=1, direction="up")
    row = {name: column[0] for name, column in course.steps.items()}
    assert row["t_load_s"] == pytest.approx(course.moves[0].end_s, abs=1e-3)
    assert row["t_start_s"] - row["t_load_s"] == pytest.approx(SETTLE_s, abs=2e-3)
    assert row["t_end_s"] - row["t_load_s"] == pytest.approx(6.0, abs=2e-3)
    assert (row["step"], row["mass_kg"], row["kind"], row["direction"]) == (1, 5.0, "hold", "up")


def test_nothing_is_read_while_the_bench_soaks() -> None:
    """A soak leaves a gap in the readings of its own length, and another temperature after it."""
    course = script()
    course.zero(cycle=0)
    course.soak(600.0, 8.0, "2")
    course.zero(cycle=1)
    t_s = course.reading_times(50.0)
    edge = int(np.argmax(np.diff(t_s)))
    assert np.diff(t_s)[edge] == pytest.approx(600.0, abs=0.1)
    assert (np.diff(t_s) > 0.0).all()
    temp_C = temperature_C(t_s, course.temperatures, np.random.default_rng(8))
    assert (temp_C[: edge + 1].mean(), temp_C[edge + 1 :].mean()) == pytest.approx((22.0, 8.0), abs=0.8)
    assert course.steps["series"] == ["1", "2"]


def test_a_whisked_load_makes_two_quick_steps() -> None:
    """On and off: a loaded and a zero step, both quick, each window at least 0.4 s long."""
    course = script()
    course.whisk(Load(3.0, 29.4), cycle=2)
    lengths = np.array(course.steps["t_end_s"]) - np.array(course.steps["t_start_s"])
    assert course.steps["kind"] == ["quick", "quick"]
    assert course.steps["direction"] == ["up", "zero"]
    assert lengths.min() > 0.4
    assert course.moves[-1].to_N == 0.0


def test_the_converter_is_a_little_off_its_rate() -> None:
    """Readings come at 80 per second within 0.3 %, with a jitter of up to 2 % of a period."""
    course = script()
    for _ in range(5):
        course.zero(cycle=0)
    steps_s = np.diff(course.reading_times(80.0))
    assert 1.0 / steps_s.mean() == pytest.approx(80.0, rel=0.0035)
    assert 0.001 < np.ptp(steps_s) * 80.0 < 0.08
