"""Level and slope of zero and span by a Kalman filter, and when they will leave the tolerance."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from filterpy.kalman import KalmanFilter
from scipy.special import ndtr

from footcal.records import FloatArray

# Shares of the limit (zero's or span's own), so that one setting serves every foot.
LEVEL_WALK_per_sqrt_day: Final = 0.006  # standard deviation a day of unsteady wandering
SLOPE_WALK_per_day_sqrt_day: Final = 0.0003  # how fast the drift rate itself may change
SLOPE_START_per_day: Final = 0.02  # spread of drift rates of feet nobody knows yet
LEVEL_START: Final = 10.0  # wide: the first check says where the foot stands
JUMP_CHI2: Final = 13.815510557964274  # 2 degrees of freedom, 99.9 %: a check further off means a jump, not a drift
HORIZON_days: Final = 730


@dataclass(frozen=True, slots=True)
class TrendPoint:
    """One check as the trend sees it: zero (N) and span (%) with the covariance of both."""

    t_days: float
    value: tuple[float, float]  # zero, span
    covariance: tuple[float, float, float]  # zero-zero, zero-span, span-span; day scatter included


@dataclass(frozen=True, slots=True, eq=False)
class Trend:
    """Where a foot stood after its last check and how it was moving; order zero level, rate, span level, rate."""

    t_days: float
    state: FloatArray  # (4,) N, N/day, %, %/day
    covariance: FloatArray  # (4, 4)
    limits: tuple[float, float]  # of zero (N) and span (%)
    jumped: bool  # the last check lay further off than any drift explains

    @property
    def zero_N(self) -> float:
        """Shift of zero at the last check."""
        return float(self.state[0])

    @property
    def span_pct(self) -> float:
        """Change of span at the last check."""
        return float(self.state[2])

    def p_out(self, ahead_days: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the probabilities that zero and that span lie outside their limits some days after the last check.

        Args:
            ahead_days: shape (n,), 0 or more.

        Returns:
            For zero and for span, each shape (n,).
        """
        zero, span = (
            _p_outside(*_ahead(self.state[k : k + 2], self.covariance[k : k + 2, k : k + 2], limit, ahead_days), limit)
            for k, limit in ((0, self.limits[0]), (2, self.limits[1]))
        )
        return zero, span


@dataclass(frozen=True, slots=True)
class Due:
    """Days after the last check until the foot has left its tolerance; None: not within the horizon."""

    median_days: float | None
    low_days: float | None  # 10 %
    high_days: float | None  # 90 %: low and high hold an 80 % interval


def follow(points: Sequence[TrendPoint], limits: tuple[float, float]) -> Trend:
    """Run a local linear trend through the checks of one foot.

    Model, for zero and span alike: level' = slope, both disturbed by white noise; a check sees both levels with its own
    covariance. A check that lies beyond the 99.9 % bound of its prediction is a jump: the levels are opened there, so
    that a sudden shift is believed at once and does not pass for a steep slope.
    Source: the local linear trend of structural time series, in the continuous-time form.

    Args:
        points: in order of time, at least one.
        limits: of zero (N) and span (%), above 0; they scale the noise.
    """
    tracker = KalmanFilter(dim_x=4, dim_z=2)
    tracker.H = np.array([[1.0, 0.0, 0.0, 0.0], [0.0, 0.0, 1.0, 0.0]])
    tracker.x = np.zeros(4)
    tracker.P = np.diag((np.repeat(limits, 2) * np.tile([LEVEL_START, SLOPE_START_per_day], 2)) ** 2)
    last_days, jumped = points[0].t_days, False
    for index, point in enumerate(points):
        days = max(point.t_days - last_days, 0.0)
        tracker.predict(F=_transition(days), Q=_process_noise(days, limits))
        jumped = index > 0 and _chi2(tracker, point) > JUMP_CHI2
        if jumped:
            tracker.P[[0, 2], [0, 2]] += (np.array(limits) * LEVEL_START) ** 2
        zz, zs, ss = point.covariance
        tracker.update(np.array(point.value), R=np.array([[zz, zs], [zs, ss]]))
        last_days = point.t_days
    return Trend(last_days, np.array(tracker.x), np.array(tracker.P), limits, jumped)


def due(trend: Trend) -> Due:
    """Return when zero or span will have left its limit, with an 80 % interval.

    The chance to be outside is taken from the predicted normal distributions day by day, never falling again, zero and
    span as independent.
    """
    days = np.arange(HORIZON_days + 1, dtype=np.float64)
    p_zero, p_span = trend.p_out(days)
    chance = np.maximum.accumulate(1.0 - (1.0 - p_zero) * (1.0 - p_span))

    def first(level: float) -> float | None:
        return float(days[np.argmax(chance >= level)]) if chance[-1] >= level else None

    return Due(median_days=first(0.5), low_days=first(0.1), high_days=first(0.9))


def _transition(days: float) -> FloatArray:
    F = np.identity(4)
    F[0, 1] = F[2, 3] = days
    return F


def _process_noise(days: float, limits: tuple[float, float]) -> FloatArray:
    """Return the noise of both pairs of level and slope; white noise on each, integrated over the days."""
    level, slope = LEVEL_WALK_per_sqrt_day**2, SLOPE_WALK_per_day_sqrt_day**2
    Q = np.zeros((4, 4))
    for k, limit in ((0, limits[0]), (2, limits[1])):
        Q[k, k] = (level * days + slope * days**3 / 3.0) * limit**2
        Q[k, k + 1] = Q[k + 1, k] = slope * days**2 / 2.0 * limit**2
        Q[k + 1, k + 1] = slope * days * limit**2
    return Q


def _chi2(tracker: KalmanFilter, point: TrendPoint) -> float:
    """Return how far a check lies from its prediction, squared, in joint standard deviations (2 degrees of freedom)."""
    x, P = tracker.x, tracker.P
    dz, ds = point.value[0] - float(x[0]), point.value[1] - float(x[2])
    zz, zs, ss = (float(p) + r for p, r in zip((P[0, 0], P[0, 2], P[2, 2]), point.covariance, strict=True))
    return (ss * dz * dz - 2.0 * zs * dz * ds + zz * ds * ds) / (zz * ss - zs * zs)


def _ahead(state: FloatArray, covariance: FloatArray, limit: float, days: FloatArray) -> tuple[FloatArray, FloatArray]:
    level, slope = LEVEL_WALK_per_sqrt_day * limit, SLOPE_WALK_per_day_sqrt_day * limit
    variance = (
        covariance[0, 0]
        + 2.0 * covariance[0, 1] * days
        + covariance[1, 1] * days**2
        + level**2 * days
        + slope**2 * days**3 / 3
    )
    return state[0] + state[1] * days, np.sqrt(variance)


def _p_outside(mean: FloatArray, sd: FloatArray, limit: float) -> FloatArray:
    return np.asarray(ndtr((mean - limit) / sd) + ndtr((-limit - mean) / sd), dtype=np.float64)


def slope_in_sds(trend: Trend) -> tuple[float, float]:
    """Return slope over its standard deviation, for zero and span: beyond ±3 it is a drift and no chance."""
    return (
        float(trend.state[1] / math.sqrt(trend.covariance[1, 1])),
        float(trend.state[3] / math.sqrt(trend.covariance[3, 3])),
    )
