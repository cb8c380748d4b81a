"""The whole fit of one foot: sessions in, calibration and everything a report needs out."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Final

from threadpoolctl import threadpool_limits

from footcal.calfile import Calibration
from footcal.errors import FitRefusedError
from footcal.files.session import Session
from footcal.fit.choose import Candidate, choose_terms
from footcal.fit.content import calibration_content
from footcal.fit.inputs import FitInput, read_input
from footcal.fit.lag_choice import lag_to_undo_s
from footcal.fit.leave_out import leave_out
from footcal.fit.outcome import FitOutcome, FitResult
from footcal.fit.passes import Fitted, fit_terms
from footcal.fit.pumping import with_reference
from footcal.fit.reference import Aligned
from footcal.fit.rows import Rows, join_rows
from footcal.fit.set_aside import Aside, bad_holds
from footcal.fit.shape import check_shape
from footcal.fit.terms import Terms
from footcal.fit.trust import runtime_uncertainty

ROUNDS: Final = 4  # of fitting and setting aside
MOST_ASIDE: Final = 0.3  # of all steps

__all__ = ["FitOutcome", "FitResult", "fit_sessions"]


def fit_sessions(
    sessions: Sequence[Session],
    *,
    kind: str | None = None,
    capacity_N: float | None = None,
    raw_max: float | None = None,
    on_try: Callable[[Terms], None] = lambda _: None,
) -> FitResult:
    """Fit the inverse sensor model to one or more bench sessions of one foot.

    Args:
        sessions: of the same foot; the first sets zero and mounting.
        kind: cell, resistive, magnetic, capacitive; None takes what the sessions say.
        capacity_N: full scale; None takes what the sessions say.
        raw_max: top of the converter, counts; None takes what the sessions say, or a usual converter.
        on_try: called with each choice of terms before it is tried.

    Raises:
        SessionError: the sessions do not belong together, or lack zeros or loads.
        SettingError: kind or capacity is not known.
        FitRefusedError: the data were read, but no sound model follows from them.
    """
    with threadpool_limits(limits=1):  # the factors are small: more threads only wait for each other
        return _fitted(read_input(sessions, kind=kind, capacity_N=capacity_N, raw_max=raw_max), on_try)


def _fitted(data: FitInput, on_try: Callable[[Terms], None]) -> FitResult:
    """Set bad steps aside, join the reference, choose the terms, check the shape, state the uncertainty."""
    middling, rows, asides = _without_bad_steps(data)
    aligned, pump = with_reference(data, middling)
    best = choose_terms(
        data.channel,
        data.reading,
        join_rows([rows, pump]) if pump else rows,
        kind=data.kind,
        levels=data.levels,
        temperatures=data.temperatures,
        on_try=on_try,
    )
    best, rows, asides = _looked_at_again(data, best, rows, pump, asides)
    check_shape(best.fitted, data.foot_id)
    uncertainty, covariance = runtime_uncertainty(
        best,
        rows,
        data.reading,
        data.kind,
        temperature_known=best.fitted.terms.temperature,
        reference_relative=data.place.gravity_u_m_per_s2 / data.place.gravity_m_per_s2,
    )
    lag_s = lag_to_undo_s(data.lag_s, data.channel, best.fitted, rows)
    notes = tuple(_notes(data, best, aligned, lag_s))
    outcome = FitOutcome(data, best, rows, tuple(asides), aligned, uncertainty, covariance, notes, lag_s)
    return FitResult(outcome, Calibration.from_content(calibration_content(outcome)))


def _middling_terms(data: FitInput) -> Terms:
    """A choice of terms that serves to find bad steps before the real choice is made."""
    return Terms(
        degree=max(1, min(3 if data.kind == "cell" else 4, data.levels - 2)),
        gamma=0.5 if data.kind == "resistive" else 1.0,
        temperature=data.temperatures > 1,
        curved_temperature=data.temperatures > 2,
    )


def _without_bad_steps(data: FitInput) -> tuple[Fitted, Rows, list[Aside]]:
    """Fit a middling choice of terms and set aside what does not fit it, until nothing more is found."""
    terms, rows = _middling_terms(data), data.rows
    asides: list[Aside] = []
    for _ in range(ROUNDS):
        fitted = fit_terms(data.channel, data.reading, rows, terms)
        found = bad_holds(fitted, rows, data.holds, data.capacity_N, data.place.gravity_m_per_s2)
        if not found:
            break
        asides += found
        rows = rows.without_holds({aside.hold for aside in found})
    if len(asides) > MOST_ASIDE * len(data.holds):
        raise FitRefusedError(
            data.foot_id,
            f"{len(asides)} of {len(data.holds)} steps do not fit the rest",
            "Check masses, times and the fixture, and run the session again.",
        )
    return fitted, rows, asides


def _looked_at_again(
    data: FitInput, best: Candidate, rows: Rows, pump: Rows | None, asides: list[Aside]
) -> tuple[Candidate, Rows, list[Aside]]:
    """Set aside what only the chosen terms show to be off, and fit a last time."""
    together = join_rows([rows, pump]) if pump else rows
    more = bad_holds(best.fitted, together, data.holds, data.capacity_N, data.place.gravity_m_per_s2)
    if not more:
        return best, together, asides
    together = together.without_holds({aside.hold for aside in more})
    fitted = fit_terms(data.channel, data.reading, together, best.fitted.terms)
    return Candidate(fitted, leave_out(fitted, together)), together, [*asides, *more]


def _notes(data: FitInput, best: Candidate, aligned: Aligned | None, lag_s: float) -> list[str]:
    """Say what the sessions could not tell, and what was assumed."""
    notes = list(data.assumed)
    if not any(hold.direction == "zero" for hold in data.holds):
        notes.append("no zero was recorded: below the lowest load the curve is extrapolated")
    if not data.channel.has_temperature:
        notes.append("no temperature was recorded: zero and span against temperature are not corrected")
    elif data.temperatures < 2:
        notes.append("no temperature change: zero and span against temperature are a guess")
    if not any(hold.kind == "quick" for hold in data.holds) and aligned is None:
        notes.append("no quick lifts and no pump recording: the reading while walking was not tested")
    dwell_s = max(hold.t_end_s - hold.t_load_s for hold in data.holds)
    if best.fitted.terms.creep and dwell_s < 60.0:
        notes.append(f"longest dwell {dwell_s:.0f} s: creep over minutes is extrapolated by the smooth spectrum")
    left_ms = 1e3 * (data.lag_s - lag_s)
    if left_ms > 0.05:
        notes.append(f"{left_ms:.2f} ms of the sensor's lag stay in: undoing them would add more noise than they cost")
    if data.channel.spikes_s:
        notes.append(f"{len(data.channel.spikes_s)} lone spikes in the readings were taken out")
    return notes
