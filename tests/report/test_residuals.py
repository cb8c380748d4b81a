"""Pictures of what is left over."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.report.residuals import draw_errors, draw_left_out
from footcal.report.style import new_figure
from tests.report.holds import UNKNOWN, UP_DOWN


def test_errors_without_a_known_quantity_say_so() -> None:
    """No temperature at all: the picture says what is missing."""
    figure = draw_errors(new_figure(), UNKNOWN.temp_C, UNKNOWN.after_N, UNKNOWN.of("up"), "temperature, °C")

    assert [text.get_text() for text in figure.axes[0].texts] == ["nothing known of: temperature, °C"]


def test_unknown_points_are_left_out_and_the_others_drawn() -> None:
    """One temperature is missing: four of five holds are drawn (by hand)."""
    temp_C = np.array([20.0, 21.0, np.nan, 22.0, 23.0])

    figure = draw_errors(new_figure(), temp_C, UP_DOWN.after_N, UP_DOWN.of("up"), "temperature, °C", np.ones(5))

    drawn = sum(len(np.asarray(line.get_xdata())) for line in figure.axes[0].lines if line.get_linestyle() == "None")
    assert drawn == 4


def test_left_out_errors_reach_all_holds() -> None:
    """The curve ends at 100 % at the largest error: 0.3 N for loads left out (by hand)."""
    figure = draw_left_out(new_figure(), UP_DOWN.after_N, UP_DOWN.cycle_out_N, UP_DOWN.level_out_N)

    load_line = figure.axes[0].lines[2]
    assert np.asarray(load_line.get_xdata())[-1] == pytest.approx(0.3)
    assert np.asarray(load_line.get_ydata())[-1] == pytest.approx(100.0)


def test_nothing_left_out_says_so() -> None:
    """Without any left-out error the picture says so."""
    nothing = np.full(3, np.nan)

    figure = draw_left_out(new_figure(), nothing, nothing, nothing)

    assert [text.get_text() for text in figure.axes[0].texts] == ["nothing could be left out"]
