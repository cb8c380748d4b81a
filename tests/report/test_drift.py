"""The drift chart."""

from __future__ import annotations

import datetime as dt

import numpy as np

from footcal.report.drift import DriftSeries, draw_drift
from footcal.report.style import new_figure

DAYS = [dt.date(2031, 3, 5) + dt.timedelta(weeks=week) for week in range(4)]


def test_checks_outside_their_limit_have_their_own_mark() -> None:
    """Of spans 0, 1, 2.5, -3 % with 2 % allowed, two lie outside (by hand)."""
    span = DriftSeries(DAYS, np.array([0.0, 1.0, 2.5, -3.0]), np.full(4, 0.2), 2.0)
    zero = DriftSeries(DAYS, np.zeros(4), np.full(4, 0.1), 1.0)

    figure = draw_drift(new_figure(), span, zero, DAYS[2])

    marked = {line.get_label(): np.asarray(line.get_ydata()).tolist() for line in figure.axes[0].lines}
    assert marked["outside"] == [2.5, -3.0]
    assert marked["inside"] == [0.0, 1.0]


def test_history_without_checks_or_with_unknown_values_is_drawn() -> None:
    """No checks: said so. NaN: no point, no warning."""
    nothing = DriftSeries([], np.zeros(0), np.zeros(0), 1.0)
    unknown = DriftSeries(DAYS, np.full(4, np.nan), np.full(4, np.nan), 1.0)

    figure = draw_drift(new_figure(), nothing, unknown)

    assert "no checks" in [text.get_text() for text in figure.axes[0].texts]
