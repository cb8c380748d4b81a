"""Figures as words."""

from __future__ import annotations

import math

import numpy as np
import pytest

from footcal.report.words import decimals, mean_of, moment, number, percent_FS


@pytest.mark.parametrize("missing", [None, math.nan, math.inf])
def test_missing_number_is_never_printed_as_nan(missing: float | None) -> None:
    """A missing figure is a dash, or says that it was not tested."""
    assert number(missing, ".2f") == "–"
    assert percent_FS(missing) == "not tested"


def test_number_takes_the_form_asked_for() -> None:
    """A number is printed as asked."""
    assert number(1.234, "+.1f") == "+1.2"  # by hand
    assert percent_FS(0.123) == "0.12 % FS"  # by hand


@pytest.mark.parametrize(("full_N", "expected"), [(250.0, 2), (1000.0, 1), (5000.0, 1), (20_000.0, 0)])
def test_decimals_show_a_ten_thousandth_of_full_scale(full_N: float, expected: int) -> None:
    """250 N: 0.025 N needs two decimals; 20 kN: 2 N needs none (by hand)."""
    assert decimals(full_N) == expected


def test_mean_of_nothing_is_nan_without_a_warning() -> None:
    """No values have no mean."""
    assert math.isnan(mean_of(np.zeros(0)))


def test_time_is_printed_to_the_minute_in_utc() -> None:
    """Half past ten in a zone two hours ahead is half past eight UTC (by hand); no time is a dash."""
    assert moment("2031-03-05T10:30:12+02:00") == "2031-03-05 08:30 UTC"
    assert moment(None) == "–"
    assert moment("some day") == "some day"
