"""Fewer points, the same picture."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from footcal.report.thin import kept_of_curve, kept_of_scatter


def test_short_curve_is_kept_whole() -> None:
    """A curve of no more points than allowed loses none."""
    assert kept_of_curve(np.arange(10.0), 10).tolist() == list(range(10))  # by hand


@given(st.integers(0, 9_999), st.sampled_from([-1.0, 1.0]))
def test_lone_peak_survives(place: int, way: float) -> None:
    """A single sample that sticks out of 10 000 is among those kept, wherever it is."""
    y = np.zeros(10_000)
    y[place] = way

    kept = kept_of_curve(y, 100)

    assert place in kept
    assert len(kept) <= 102  # lowest and highest of 50 stretches, first and last


def test_gap_stays_a_gap() -> None:
    """Where a curve has no values, at least one empty sample is kept, so that the line breaks there."""
    y = np.ones(5_000)
    y[2_000:2_010] = np.nan

    kept = kept_of_curve(y, 100)

    assert np.isnan(y[kept]).any()


def test_curve_of_nothing_but_gaps_is_thinned_without_complaint() -> None:
    """All NaN is allowed."""
    assert len(kept_of_curve(np.full(5_000, np.nan), 100)) <= 102


def test_scatter_is_spread_evenly_with_both_ends() -> None:
    """Five out of nine points: every second one (by hand)."""
    assert kept_of_scatter(9, 5).tolist() == [0, 2, 4, 6, 8]
    assert kept_of_scatter(0, 5).tolist() == []
