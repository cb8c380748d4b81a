"""Checks on a finished fit."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from footcal.errors import FitRefusedError
from footcal.fit.engine import fit_sessions
from footcal.fit.passes import Fitted
from footcal.fit.shape import check_shape, loop_width, smallest_slope
from footcal.sensor.model import PLAYS, POWERS
from footcal.sim.bench import run_session
from footcal.sim.sensors import draw_sensor
from tests.simulated import as_session


@cache
def pad() -> Fitted:
    """A fitted magnetic pad."""
    rng = np.random.default_rng(150)
    return fit_sessions([as_session(run_session(draw_sensor("Q", rng), rng, parts=("cycles", "minor")))]).best.fitted


def test_the_loop_of_a_pad_takes_energy() -> None:
    """A magnetic pad of the table has a loop of some 6 % of full scale; the fitted one is of that size."""
    assert 0.01 < loop_width(pad()) < 0.12


def test_a_loop_turned_round_shows_a_negative_width() -> None:
    """The sign of every play weight reversed."""
    coefficients = pad().coefficients.copy()
    coefficients[11:23] *= -1.0
    assert loop_width(replace(pad(), coefficients=coefficients)) == pytest.approx(-loop_width(pad()))


def test_a_straight_line_without_memory_has_the_slope_of_the_line() -> None:
    """By hand: F = 0.9 v."""
    coefficients = np.zeros(32)
    coefficients[1] = 0.9
    assert smallest_slope(replace(pad(), coefficients=coefficients))[0] == pytest.approx(0.9)


def test_a_curve_that_turns_back_is_refused() -> None:
    """F = v - 1.5 v^2 falls from v = 1/3 on."""
    coefficients = np.zeros(32)
    coefficients[POWERS] = [0.0, 1.0, -1.5, 0.0, 0.0, 0.0]
    with pytest.raises(FitRefusedError, match="would fall while the reading rises"):
        check_shape(replace(pad(), coefficients=coefficients), "T-1")


def test_a_loop_steeper_than_the_curve_is_refused() -> None:
    """A positive play weight above the curve's slope makes the force fall right after a turn."""
    coefficients = np.zeros(32)
    coefficients[1] = 0.5
    coefficients[PLAYS] = [0.6, 0.0, 0.0, 0.0, 0.0, 0.0]
    with pytest.raises(FitRefusedError):
        check_shape(replace(pad(), coefficients=coefficients), "T-1")
