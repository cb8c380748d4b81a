"""The verdict on one foot, with its reason in one sentence."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import groupby
from typing import Any, Final

import numpy as np

from footcal.drift.charts import ewma, run_start
from footcal.drift.points import trend_points
from footcal.drift.records import StoredCheck
from footcal.drift.trend import Due, Trend, due, follow, slope_in_sds
from footcal.records import FloatArray

FIT, RE_ZERO, BY, NOW, REPLACE = "fit for use", "re-zero", "recalibrate by", "recalibrate now", "replace"
SEVERITY: Final = (FIT, BY, RE_ZERO, NOW, REPLACE)  # rising
LEAD_days: Final = 56.0  # a foot that will be out within eight weeks is put on the list; common practice, no source
DRIFTING_sds: Final = 3.0
GUARD_p: Final = 0.05  # accepted only where the chance to be outside is below this (guarded acceptance, JCGM 106 sense)
# A foot is worn out beyond these; common practice, no source.
WORN_SPAN_pct: Final = 10.0
WORN_ZERO_pct: Final = 10.0  # of full scale
WORN_LOOP_ratio: Final = 2.0
WORN_NOISE_ratio: Final = 3.0


@dataclass(frozen=True, slots=True)
class FootVerdict:
    """What to do with one foot, and why."""

    foot_id: str
    kind: str
    verdict: str  # one of SEVERITY; `recalibrate by` carries its date in `text`
    by: dt.date | None
    reason: str
    p_out: float  # that zero or span lay outside its limit at the last check
    due: dt.date | None  # when it will be outside, as likely as not
    due_lo: dt.date | None  # 10 %
    due_hi: dt.date | None  # 90 %
    zero_N: float
    span_pct: float
    since: dt.date | None  # first check of the run that tells of it
    last_check: dt.date
    checks: int

    @property
    def text(self) -> str:
        """The verdict as people and JSON read it."""
        return f"{self.verdict} {self.by.isoformat()}" if self.by else self.verdict

    @property
    def needs_action(self) -> bool:
        """Whether anything has to be done."""
        return self.verdict != FIT

    def as_json(self) -> dict[str, Any]:
        """Return the form of DESIGN §4."""
        return {
            "foot_id": self.foot_id,
            "verdict": self.text,
            "reason": self.reason,
            "p_out": self.p_out,
            "due": _iso(self.due),
            "due_lo": _iso(self.due_lo),
            "due_hi": _iso(self.due_hi),
            "zero_N": self.zero_N,
            "span_pct": self.span_pct,
            "since": _iso(self.since),
        }


def fleet_verdicts(checks: Sequence[StoredCheck]) -> list[FootVerdict]:
    """Return a verdict for every foot, the worst first.

    Args:
        checks: ordered by foot and time, as `History.checks` gives them.
    """
    verdicts = [foot_verdict(list(own)) for _, own in groupby(checks, key=lambda check: check.foot_id)]
    return sorted(verdicts, key=lambda v: (-SEVERITY.index(v.verdict), -v.p_out, v.foot_id))


def foot_verdict(checks: Sequence[StoredCheck]) -> FootVerdict:
    """Return the verdict on one foot from its checks in order of time.

    Only checks since the last adjustment count for the trend: an as-left check or another calibration file starts anew.
    Wear (loop, noise) is held against the first check of all.
    """
    recent = since_adjustment(checks)
    last = recent[-1]
    trend = follow(trend_points(recent), (last.limit_zero_N, last.limit_span_pct))
    p_zero, p_span = (float(p[0]) for p in trend.p_out(np.zeros(1)))
    when = due(trend)
    verdict, reason, moved = _decide(checks, trend, when, p_zero, p_span)
    day = last.t_utc.date()
    by = day + dt.timedelta(days=max(_by_days(when), 1.0)) if verdict == BY else None
    return FootVerdict(
        foot_id=last.foot_id,
        kind=last.kind,
        verdict=verdict,
        by=by,
        reason=reason,
        p_out=1.0 - (1.0 - p_zero) * (1.0 - p_span),
        due=_day(day, when.median_days),
        due_lo=_day(day, when.low_days),
        due_hi=_day(day, when.high_days),
        zero_N=trend.zero_N,
        span_pct=trend.span_pct,
        since=None if verdict == FIT else _since(recent, moved),
        last_check=day,
        checks=len(checks),
    )


def since_adjustment(checks: Sequence[StoredCheck]) -> list[StoredCheck]:
    """Return the checks since the foot was last adjusted: from the last as-left one, under the newest calibration."""
    start = 0
    for index, check in enumerate(checks):
        if check.state == "as-left" or check.calibration_sha256 != checks[max(index - 1, 0)].calibration_sha256:
            start = index
    return list(checks[start:])


_Decision = tuple[str, str, str]  # verdict, reason, and what it rests on: zero, span, loop, noise


def _decide(checks: Sequence[StoredCheck], trend: Trend, when: Due, p_zero: float, p_span: float) -> _Decision:
    zero = f"zero has moved by {trend.zero_N:+.3g} N, {trend.limits[0]:.3g} N are allowed"
    span = f"span has changed by {trend.span_pct:+.2f} %, {trend.limits[1]:.3g} % are allowed"
    repeat = "; the last check alone says so, repeat it first" if trend.jumped and not _outside_before(checks) else ""
    maybe = ", and with its uncertainty it may be outside already ({:.0f} %)"
    zero_drift, span_drift = _drifting(trend, when)
    tests = (
        (p_span >= 0.5, NOW, span + repeat, "span"),
        (p_zero >= 0.5, RE_ZERO, zero + repeat, "zero"),
        (p_span > GUARD_p, BY, span + maybe.format(100.0 * p_span), "span"),
        (span_drift, BY, f"span drifts by {7.0 * trend.state[3]:+.2f} % a week towards its limit", "span"),
        (p_zero > GUARD_p, RE_ZERO, zero + maybe.format(100.0 * p_zero), "zero"),
        (zero_drift, RE_ZERO, f"zero drifts by {7.0 * trend.state[1]:+.3g} N a week towards its limit", "zero"),
    )
    inside = f"zero {trend.zero_N:+.3g} N and span {trend.span_pct:+.2f} % are inside their limits"
    failed = [decision for found, *decision in tests if found] or [[FIT, inside, ""]]
    return _worn(checks, trend) or (str(failed[0][0]), str(failed[0][1]), str(failed[0][2]))


def _outside_before(checks: Sequence[StoredCheck]) -> bool:
    """Return whether the check before the last one already read outside a limit."""
    before = checks[-2:-1]
    return any(abs(one.span_pct) > one.limit_span_pct or abs(one.zero_N) > one.limit_zero_N for one in before)


def _drifting(trend: Trend, when: Due) -> tuple[bool, bool]:
    """Return whether zero, and whether span, moves for certain and will soon be outside."""
    if when.median_days is None or when.median_days > LEAD_days:
        return False, False
    zero_sds, span_sds = slope_in_sds(trend)
    p_zero, p_span = (float(p[0]) for p in trend.p_out(np.array([when.median_days])))
    return (abs(zero_sds) > DRIFTING_sds and p_zero >= p_span, abs(span_sds) > DRIFTING_sds and p_span >= p_zero)


def _worn(checks: Sequence[StoredCheck], trend: Trend) -> _Decision | None:
    first, last = checks[0], checks[-1]
    zero_pct = 100.0 * trend.zero_N / last.capacity_N
    # A loop that is small against the limits can double by chance; only one that is large as well counts.
    loop_limit_N = max(WORN_LOOP_ratio * first.loop_N, last.limit_span_pct / 100.0 * last.capacity_N)
    tests = (
        (
            abs(trend.span_pct) > WORN_SPAN_pct,
            f"span has changed by {trend.span_pct:+.1f} %, more than {WORN_SPAN_pct:g} % is wear or damage",
            "span",
        ),
        (
            abs(zero_pct) > WORN_ZERO_pct,
            f"zero has moved by {zero_pct:+.1f} % of full scale, more than {WORN_ZERO_pct:g} % is wear or damage",
            "zero",
        ),
        (
            last.loop_N > loop_limit_N,
            f"the loop is {last.loop_N:.3g} N wide, at the first check it was {first.loop_N:.3g} N",
            "loop",
        ),
        (
            last.noise_N > WORN_NOISE_ratio * first.noise_N > 0.0,
            f"noise is {last.noise_N:.3g} N, at the first check it was {first.noise_N:.3g} N",
            "noise",
        ),
    )
    return next(((REPLACE, reason, moved) for found, reason, moved in tests if found), None)


def _by_days(when: Due) -> float:
    for days in (when.low_days, when.median_days):
        if days:
            return min(days, LEAD_days)
    return 7.0  # outside already with a chance that can't be neglected: before the next weekly check


def _since(checks: Sequence[StoredCheck], moved: str) -> dt.date:
    """Return the first check of the run, up to the last, in which the EWMA chart of the quantity signals."""
    points = trend_points(checks)
    values: FloatArray = {
        "zero": np.array([point.value[0] / math.sqrt(point.covariance[0]) for point in points]),
        "span": np.array([point.value[1] / math.sqrt(point.covariance[2]) for point in points]),
    }.get(moved, np.zeros(len(points)))
    start = run_start(ewma(values, sd=1.0).out)
    return checks[-1 if start is None else start].t_utc.date()


def _day(last: dt.date, days: float | None) -> dt.date | None:
    return None if days is None else last + dt.timedelta(days=days)


def _iso(day: dt.date | None) -> str | None:
    return None if day is None else day.isoformat()
