"""A check session held against the foot's calibration: deviation at each load, zero, span, loop, noise."""

from __future__ import annotations

import math
from typing import Final, Protocol

import numpy as np

from footcal.drift.limits import placement_sd_N
from footcal.drift.records import CheckScore, LoadCheck
from footcal.errors import SessionError
from footcal.files.session import Session
from footcal.fit.holds import bench_place, holds_of
from footcal.records import FloatArray, Hold

SCORED_KINDS: Final = ("hold",)  # presses condition, quick and tilted steps test something else
_MAD_TO_SD: Final = 1.482602218505602  # of a normal distribution: 1 / Phi^-1(3/4)


class ForceReading(Protocol):
    """What a calibration makes of raw readings."""

    @property
    def force_N(self) -> FloatArray:
        """Force at each reading, shape (n,), newtons."""
        ...


class ForceCalibration(Protocol):
    """What drift needs of a calibration; `footcal.calfile.Calibration` is one."""

    @property
    def foot_id(self) -> str:
        """Serial number of the foot."""
        ...

    @property
    def digest(self) -> str:
        """SHA-256 of the content."""
        ...

    @property
    def kind(self) -> str:
        """Sensor kind."""
        ...

    @property
    def capacity_N(self) -> float:
        """Full scale, newtons."""
        ...

    def force(self, t_s: FloatArray, raw: FloatArray, temp_C: FloatArray | None = None) -> ForceReading:
        """Turn readings into newtons, from the power-up state."""
        ...

    def u_static_N(self, force_N: FloatArray) -> FloatArray:
        """Return the standard uncertainty of a settled reading at each force, newtons."""
        ...


def en_number(deviation_N: float, u_cal_N: float, u_check_N: float) -> float:
    """Return E_n = deviation / sqrt(U_cal² + U_check²), U = 2u. Source: ISO/IEC 17043, from memory.

    Without any uncertainty a deviation is infinitely far; none is 0.
    """
    expanded_N = 2.0 * math.hypot(u_cal_N, u_check_N)
    if expanded_N == 0.0:
        return math.copysign(math.inf, deviation_N) if deviation_N else 0.0
    return deviation_N / expanded_N


def score_check(session: Session, calibration: ForceCalibration) -> CheckScore:
    """Return how far a foot has moved from its calibration.

    The readings run through the calibration from its power-up state; each hold gives one deviation. Zero and span are a
    weighted line of deviation over load. Their uncertainty is that of the check: placements, reading, weights, gravity.
    The calibration's own uncertainty enters E_n only, for it is no doubt about how far the foot reads from the weights.

    Args:
        session: steps with at least a zero and two loads; `meta.foot_id` must be that of the calibration.
        calibration: of the same foot.

    Raises:
        SessionError: another foot, no foot named, several channels, or too few loads.
    """
    _check_foot(session, calibration)
    place = bench_place(session.meta)
    holds = [hold for hold in holds_of(session, place) if hold.kind in SCORED_KINDS]
    if not any(hold.direction == "zero" for hold in holds) or len({round(h.load_N, 2) for h in holds}) < 2:
        raise SessionError(
            where=f"{session.folder or session.name}, steps",
            what="a check needs a zero and a load among its steps of kind 'hold'",
            mend="Record the unloaded foot and at least one load that stands for some seconds.",
        )
    force_N = np.asarray(calibration.force(session.t_s, session.raw, session.temp_C).force_N)
    loads = tuple(_load_check(hold, session.t_s, force_N, calibration) for hold in holds)
    load_N = np.array([load.load_N for load in loads])
    place_N = placement_sd_N(calibration.kind, calibration.capacity_N, load_N)
    settling_N = np.array([load.settling_u_N for load in loads])
    deviation_N = np.array([load.deviation_N for load in loads])
    zero_N, span_pct, cov = line_of_deviation(load_N, deviation_N, np.hypot(place_N, settling_N))
    shared_pct = 100.0 * float(
        np.median([h.load_u_N / abs(h.load_N) for h in holds if h.load_u_N and h.load_N] or [0.0])
    )
    return CheckScore(
        foot_id=calibration.foot_id,
        loads=loads,
        zero_N=zero_N,
        zero_u_N=math.sqrt(cov[0, 0]),
        span_pct=span_pct,
        span_u_pct=math.hypot(math.sqrt(cov[1, 1]), shared_pct),  # gravity and weights are common to all loads
        zero_span_cov_N_pct=float(cov[0, 1]),
        loop_N=loop_width_N(loads),
        noise_N=_noise_N(holds, session.t_s, force_N),
        temp_C=float(session.temp_C.mean()),
    )


def line_of_deviation(load_N: FloatArray, deviation_N: FloatArray, sd_N: FloatArray) -> tuple[float, float, FloatArray]:
    """Return zero shift (N), span change (%) and their covariance (N², N·%, %²) by weighted least squares.

    Law: deviation = zero + span/100 · load. The covariance is multiplied by chi²/dof where that is above 1 (Birge
    ratio), so loads that scatter more than stated make the result less certain, never more.

    Args:
        load_N: shape (n,), two different loads at least.
        deviation_N: reading less load, shape (n,).
        sd_N: independent scatter of each, shape (n,), above 0.
    """
    weighted = np.stack([np.ones_like(load_N), load_N / 100.0], axis=1) / sd_N[:, None]
    q, r = np.linalg.qr(weighted)
    solution = np.linalg.solve(r, q.T @ (deviation_N / sd_N))
    r_inverse = np.linalg.inv(r)
    chi2 = float(np.sum((deviation_N / sd_N - weighted @ solution) ** 2))
    birge = max(1.0, chi2 / (len(load_N) - 2)) if len(load_N) > 2 else 1.0
    return float(solution[0]), float(solution[1]), r_inverse @ r_inverse.T * birge


def loop_width_N(loads: tuple[LoadCheck, ...]) -> float:
    """Return the largest |unloading less loading| deviation at one load, newtons; NaN where none was met both ways."""
    gaps = []
    for load_N in {round(load.load_N, 1) for load in loads if load.direction == "up"}:
        both = [
            [load.deviation_N for load in loads if load.direction == way and abs(load.load_N - load_N) < 0.15]
            for way in ("up", "down")
        ]
        if all(both):
            gaps.append(abs(float(np.mean(both[1]) - np.mean(both[0]))))
    return max(gaps, default=math.nan)


def _check_foot(session: Session, calibration: ForceCalibration) -> None:
    where = str(session.folder or session.name)
    if session.meta.foot_id is None:
        raise SessionError(
            where=where,
            what="the session does not say which foot it checks",
            mend="Add foot_id to session.toml, or --foot.",
        )
    if session.meta.foot_id != calibration.foot_id:
        raise SessionError(
            where=where,
            what=f"the session checks foot {session.meta.foot_id}, the calibration is of foot {calibration.foot_id}",
            mend="Name the calibration file of that foot.",
        )
    if session.raw.ndim != 1:
        raise SessionError(
            where=where,
            what=f"{session.raw.shape[1]} raw channels, a calibration of one channel can't read them",
            mend="Name the channel that was calibrated in [columns].",
        )


def _load_check(hold: Hold, t_s: FloatArray, force_N: FloatArray, calibration: ForceCalibration) -> LoadCheck:
    window = force_N[np.searchsorted(t_s, hold.t_start_s) : np.searchsorted(t_s, hold.t_end_s, side="right")]
    reading_N = float(window.mean())
    halves = np.array_split(window, 2)
    settling_N = float(halves[1].mean() - halves[0].mean()) if len(window) > 1 else 0.0
    settling_u_N = abs(settling_N) / (2.0 * math.sqrt(3.0))  # taken as rectangular
    u_check_N = math.hypot(hold.load_u_N, settling_u_N)
    u_cal_N = float(calibration.u_static_N(np.array([hold.load_N]))[0])
    deviation_N = reading_N - hold.load_N
    if not math.isfinite(deviation_N):
        raise SessionError(
            where=f"step {hold.step}",
            what="the calibration gives no force for it",
            mend="Look at the raw readings there.",
        )
    return LoadCheck(
        step=hold.step,
        direction=hold.direction,
        load_N=hold.load_N,
        reading_N=reading_N,
        deviation_N=deviation_N,
        u_cal_N=u_cal_N,
        u_check_N=u_check_N,
        settling_u_N=settling_u_N,
        en=en_number(deviation_N, u_cal_N, u_check_N),
    )


def _noise_N(holds: list[Hold], t_s: FloatArray, force_N: FloatArray) -> float:
    spreads = []
    for hold in holds:
        steps = np.diff(
            force_N[np.searchsorted(t_s, hold.t_start_s) : np.searchsorted(t_s, hold.t_end_s, side="right")]
        )
        if len(steps) > 4:
            spreads.append(_MAD_TO_SD * float(np.median(np.abs(steps - np.median(steps)))) / math.sqrt(2.0))
    return float(np.median(spreads)) if spreads else math.nan
