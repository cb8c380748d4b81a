"""Records of drift: one load of a check, a check's score, a check on its way into the history and out of it."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from footcal.drift.limits import DriftLimits


@dataclass(frozen=True, slots=True)
class LoadCheck:
    """One load of a check: what it was, what the calibrated foot read, and whether that is too far."""

    step: int
    direction: str  # zero, up, down
    load_N: float
    reading_N: float  # mean over the settled window
    deviation_N: float  # reading less load
    u_cal_N: float  # standard uncertainty of the calibration at this force
    u_check_N: float  # standard uncertainty of load and reading today
    settling_u_N: float  # the part of it by which the reading still crept during the window
    en: float  # deviation over combined expanded uncertainty; beyond ±1 it does not agree (ISO/IEC 17043 sense)


@dataclass(frozen=True, slots=True)
class CheckScore:
    """What one check session says of one foot."""

    foot_id: str
    loads: tuple[LoadCheck, ...]
    zero_N: float  # shift of zero since the calibration
    zero_u_N: float  # standard uncertainty
    span_pct: float  # change of span since the calibration, per cent
    span_u_pct: float
    zero_span_cov_N_pct: float
    loop_N: float  # widest gap between unloading and loading at one load; NaN where no load was met both ways
    noise_N: float  # of single readings, standard deviation
    temp_C: float  # mean; NaN without a thermometer


@dataclass(frozen=True, slots=True)
class NewCheck:
    """A scored check on its way into the history."""

    score: CheckScore
    limits: DriftLimits
    kind: str
    capacity_N: float
    calibration_sha256: str
    session_sha256: str
    session_name: str
    state: str  # as-found: before anything was adjusted; as-left: after
    t_utc: dt.datetime


@dataclass(frozen=True, slots=True)
class StoredCheck:
    """A check as the history holds it, without its single loads."""

    id: int
    foot_id: str
    kind: str
    capacity_N: float
    calibration_sha256: str
    session_name: str
    state: str
    t_utc: dt.datetime
    zero_N: float
    zero_u_N: float
    span_pct: float
    span_u_pct: float
    zero_span_cov_N_pct: float
    loop_N: float  # NaN where not measured
    noise_N: float
    temp_C: float
    limit_span_pct: float
    limit_zero_N: float
