"""From stored checks to what the trend sees: how far each may be off by chance, as stated and as the checks show."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Final

import numpy as np

from footcal.drift.limits import drift_limits
from footcal.drift.records import StoredCheck
from footcal.drift.trend import TrendPoint
from footcal.records import FloatArray

MEDIAN_ABS_NORMAL: Final = 0.6744897501960817  # Phi^-1(3/4)
STATED_WEIGHT: Final = 4.0  # moving ranges that weigh as much as what the checks state; a choice of ours
STEADY_AFTER: Final = 5  # moving ranges; fewer prove nothing


def trend_points(checks: Sequence[StoredCheck]) -> list[TrendPoint]:
    """Return checks as the trend sees them: stated uncertainty and day scatter, less where the foot scatters less.

    What a check states includes how badly the calibration's shape fits today's loads, which is the same every week and
    so no scatter. The median moving range tells the true scatter; it counts as one value a step against four values of
    the stated one, so that some steady weeks prove little.
    """
    usual = drift_limits(checks[0].kind, checks[0].capacity_N)
    zero_sd_N = np.array([math.hypot(check.zero_u_N, usual.day_zero_N) for check in checks])
    span_sd_pct = np.array([math.hypot(check.span_u_pct, usual.day_span_pct) for check in checks])
    zero_share = _steadiness(np.array([check.zero_N for check in checks]), zero_sd_N)
    span_share = _steadiness(np.array([check.span_pct for check in checks]), span_sd_pct)
    return [
        TrendPoint(
            t_days=check.t_utc.timestamp() / 86_400.0,
            value=(check.zero_N, check.span_pct),
            covariance=(
                (zero_share * zero) ** 2,
                zero_share * span_share * check.zero_span_cov_N_pct,
                (span_share * span) ** 2,
            ),
        )
        for check, zero, span in zip(checks, zero_sd_N.tolist(), span_sd_pct.tolist(), strict=True)
    ]


def _steadiness(values: FloatArray, sd: FloatArray) -> float:
    """Return the share of the stated standard deviation that the values show, at most 1."""
    ranges = np.abs(np.diff(values)) / np.hypot(sd[1:], sd[:-1])
    if len(ranges) < STEADY_AFTER:
        return 1.0
    seen = float(np.median(ranges)) / MEDIAN_ABS_NORMAL
    return min(1.0, math.sqrt((STATED_WEIGHT + len(ranges) * seen**2) / (STATED_WEIGHT + len(ranges))))
