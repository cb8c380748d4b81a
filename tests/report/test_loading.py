"""Pictures of the calibration: what stands in them, and that nothing unknown breaks them."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.report.calibration_pictures import loop_width_N
from footcal.report.loading import (
    draw_budget,
    draw_course,
    draw_loading_curve,
    draw_loop,
    draw_uncertainty,
    without_pauses,
)
from footcal.report.style import new_figure
from tests.report.holds import UNKNOWN, UP_DOWN


def test_loop_width_is_the_gap_between_unloading_and_loading() -> None:
    """At 10 N the curve alone reads -1 N loading and +2 N unloading: 3 N apart (by hand)."""
    assert loop_width_N(UP_DOWN, UP_DOWN.before_N) == pytest.approx(3.0)
    assert np.isnan(loop_width_N(UNKNOWN, UNKNOWN.before_N))


def test_pause_is_shortened_to_ten_seconds() -> None:
    """0, 1, 2 s, a pause of 1000 s, 1 s more: the last stands at 2 + 10 + 1 s (by hand)."""
    minutes, breaks = without_pauses(np.array([0.0, 1.0, 2.0, 1002.0, 1003.0]))

    assert (60.0 * minutes).tolist() == pytest.approx([0.0, 1.0, 2.0, 12.0, 13.0])
    assert [60.0 * at for at in breaks] == pytest.approx([12.0])


def test_loading_and_unloading_are_drawn_apart() -> None:
    """The picture of readings has the loads that went up in one series and the others in another."""
    figure = draw_loading_curve(new_figure(), UP_DOWN.load_N, UP_DOWN.raw, UP_DOWN.of("up"))

    up, down = figure.axes[0].lines
    assert np.asarray(up.get_ydata()).tolist() == [200.0, 300.0]
    assert np.asarray(down.get_ydata()).tolist() == [100.0, 210.0, 102.0]


def test_large_counts_are_drawn_in_thousands() -> None:
    """Counts of a 24-bit converter are divided by 1000, and the axis says so."""
    figure = draw_loading_curve(new_figure(), UP_DOWN.load_N, 1e4 * UP_DOWN.raw, UP_DOWN.of("up"))

    assert figure.axes[0].get_ylabel() == "reading, 1000 counts"
    assert np.asarray(figure.axes[0].lines[0].get_ydata()).tolist() == [2000.0, 3000.0]


def test_loop_has_the_same_scale_before_and_after() -> None:
    """Both panels share their axis, so that the eye compares like with like."""
    top, bottom = draw_loop(new_figure(), UP_DOWN).axes

    assert top.get_ylim() == bottom.get_ylim()


def test_series_differ_without_colour() -> None:
    """Loading and unloading have different markers, one of them open: a grey print keeps them apart."""
    up, down = draw_loading_curve(new_figure(), UP_DOWN.load_N, UP_DOWN.raw, UP_DOWN.of("up")).axes[0].lines

    assert up.get_marker() != down.get_marker()
    assert down.get_markerfacecolor() == "white"


def test_budget_has_the_largest_source_on_top() -> None:
    """The bar drawn last, which is the topmost, is the largest."""
    axes = draw_budget(new_figure(), ["small", "large", "unknown"], np.array([0.1, 0.9, np.nan])).axes[0]

    assert [label.get_text() for label in axes.get_yticklabels()][-1] == "large"


def test_pictures_without_temperature_cycles_or_left_out_errors_say_so() -> None:
    """What is not known is written in the picture instead of breaking it."""
    t_s, force_N = np.arange(50.0), np.zeros(50)
    course = draw_course(new_figure(), t_s, force_N, np.full(50, np.nan), UNKNOWN, [(3.0, 10.0)])
    loop = draw_loop(new_figure(), UNKNOWN)
    draw_uncertainty(new_figure(), np.array([0.0, 20.0]), np.ones(2), UNKNOWN.level_out_N, UNKNOWN.load_N)

    assert "no temperature recorded" in [text.get_text() for text in course.axes[1].texts]
    assert "no up/down cycle" in [text.get_text() for text in loop.axes[0].texts]
