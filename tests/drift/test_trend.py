"""Level, slope, and when the tolerance will be left."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import norm

from footcal.drift.trend import Trend, TrendPoint, due, follow, slope_in_sds

LIMITS = (2.5, 1.0)  # N, %


def points(spans: list[float], zeros: list[float] | None = None, u: float = 0.02) -> list[TrendPoint]:
    """Return weekly checks."""
    return [
        TrendPoint(7.0 * week, (zero, span), (u**2, 0.0, u**2))
        for week, (span, zero) in enumerate(zip(spans, zeros or [0.0] * len(spans), strict=True))
    ]


def still(span: float, rate: float, sd: float, rate_sd: float = 1e-9) -> Trend:
    """Return a trend whose zero is surely good."""
    return Trend(
        0.0, np.array([0.0, 0.0, span, rate]), np.diag([1e-12, 1e-12, sd**2, rate_sd**2]), LIMITS, jumped=False
    )


def test_one_check_is_believed() -> None:
    """A wide start lets the first check say where the foot stands; the wide prior costs (0.02/10)² of it."""
    trend = follow(points([0.4], [1.0]), LIMITS)
    assert (trend.zero_N, trend.span_pct) == pytest.approx((1.0, 0.4), rel=1e-4)


def test_a_steady_drift_is_followed() -> None:
    """0.05 % a week for 20 weeks: level within one check's u, slope within 10 %, and it is a drift beyond chance."""
    trend = follow(points([0.05 * week for week in range(20)]), LIMITS)
    assert trend.span_pct == pytest.approx(0.95, abs=0.02)
    assert trend.state[3] == pytest.approx(0.05 / 7, rel=0.1)
    assert slope_in_sds(trend)[1] > 3


def test_a_foot_that_stays_is_no_drift() -> None:
    """Scatter of the size stated gives no slope beyond three standard deviations, and no chance to be outside."""
    rng = np.random.default_rng(7)
    trend = follow(points(list(0.02 * rng.normal(size=30)), list(0.02 * rng.normal(size=30))), LIMITS)
    assert max(abs(s) for s in slope_in_sds(trend)) < 3
    assert max(p[0] for p in trend.p_out(np.zeros(1))) < 1e-6


def test_a_jump_is_believed_at_once_and_named() -> None:
    """After ten quiet weeks a shift of 1.5 % is the new level, not a slope of 0.2 % a day."""
    trend = follow(points([0.0] * 10 + [1.5]), LIMITS)
    assert trend.jumped
    assert trend.span_pct == pytest.approx(1.5, abs=0.02)
    assert abs(trend.state[3]) < 0.02


def test_a_gentle_step_is_no_jump() -> None:
    """A change within what the model expects in a week does not raise the flag."""
    assert not follow(points([0.0] * 10 + [0.05]), LIMITS).jumped


def test_the_unit_of_the_limits_does_not_matter() -> None:
    """Zero in millinewtons (values, u and limit times 1000) gives the same chances."""
    plain = follow(points([0.1, 0.2, 0.3], [0.5, 1.0, 1.5]), LIMITS)
    scaled_points = [
        TrendPoint(p.t_days, (1e3 * p.value[0], p.value[1]), (1e6 * p.covariance[0], 0.0, p.covariance[2]))
        for p in points([0.1, 0.2, 0.3], [0.5, 1.0, 1.5])
    ]
    scaled = follow(scaled_points, (2500.0, 1.0))
    for ours, theirs in zip(plain.p_out(np.array([0.0, 30.0])), scaled.p_out(np.array([0.0, 30.0])), strict=True):
        np.testing.assert_allclose(ours, theirs, rtol=1e-6, atol=1e-12)


def test_the_chance_to_be_outside_is_that_of_the_normal_distribution() -> None:
    """scipy.stats: both tails beyond ±1 % of a level 0.8 % known to 0.2 %."""
    _, span = still(0.8, 0.0, 0.2).p_out(np.zeros(1))
    assert span[0] == pytest.approx(norm.sf(1.0, 0.8, 0.2) + norm.cdf(-1.0, 0.8, 0.2), rel=1e-9)


def test_a_sure_drift_is_due_when_the_line_meets_the_limit() -> None:
    """By hand: from 0.5 % at 0.02 % a day, 1 % is met after 25 days."""
    when = due(still(0.5, 0.02, 1e-6))
    assert when.median_days == pytest.approx(25.0, abs=1.0)  # whole days


def test_the_interval_holds_the_median() -> None:
    """Low comes before median before high."""
    when = due(still(0.5, 0.01, 0.1, rate_sd=0.002))
    assert when.low_days is not None
    assert when.median_days is not None
    assert when.high_days is not None
    assert when.low_days < when.median_days < when.high_days


def test_a_foot_outside_already_is_due_today() -> None:
    """No day need pass."""
    assert due(still(1.5, 0.0, 0.01)).median_days == 0.0


def test_two_checks_of_one_day_are_allowed() -> None:
    """No time passes between them, and the second sharpens the first: by hand, u² halves."""
    twice = [TrendPoint(0.0, (0.0, 0.3), (4e-4, 0.0, 4e-4))] * 2
    assert follow(twice, LIMITS).covariance[2, 2] == pytest.approx(2e-4, rel=1e-3)
