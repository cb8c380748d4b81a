"""How far a check may be off by chance."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.drift.points import trend_points
from tests.drift.stand_in import stored


def test_the_day_adds_its_scatter_to_what_a_check_states() -> None:
    """By hand, cell of 500 N: zero sqrt(0.02² + (0.0008 * 500)²) N, span sqrt(0.02² + 0.03²) %."""
    (point,) = trend_points([stored(0, zero_N=1.0, span_pct=0.5)])
    assert point.value == (1.0, 0.5)
    assert point.covariance[0] == pytest.approx(0.02**2 + 0.4**2, rel=1e-12)
    assert point.covariance[2] == pytest.approx(0.02**2 + 0.03**2, rel=1e-12)


def test_a_foot_that_scatters_less_than_stated_is_believed_more() -> None:
    """By hand: 20 equal values weigh 20 against 4, so the variance is 4/24 of the stated one."""
    covariance = trend_points([stored(week, u=0.4) for week in range(21)])[0].covariance
    assert covariance[2] == pytest.approx((0.4**2 + 0.03**2) * 4 / 24, rel=1e-12)


def test_a_foot_that_scatters_more_is_not_excused() -> None:
    """The stated uncertainty is the most that is granted."""
    rng = np.random.default_rng(7)
    covariance = trend_points([stored(week, span_pct=float(rng.normal())) for week in range(21)])[0].covariance
    assert covariance[2] == pytest.approx(0.02**2 + 0.03**2, rel=1e-12)


def test_some_steady_weeks_prove_nothing() -> None:
    """Five checks have four moving ranges: too few."""
    covariance = trend_points([stored(week, u=0.4) for week in range(5)])[0].covariance
    assert covariance[2] == pytest.approx(0.4**2 + 0.03**2, rel=1e-12)


def test_one_jump_does_not_hide_the_steadiness_of_the_other_weeks() -> None:
    """The median moving range does not see it: 4/24 of the variance remains, as without the jump."""
    checks = [stored(week, span_pct=2.0 if week > 10 else 0.0, u=0.4) for week in range(21)]
    assert trend_points(checks)[0].covariance[2] == pytest.approx((0.4**2 + 0.03**2) * 4 / 24, rel=1e-12)
