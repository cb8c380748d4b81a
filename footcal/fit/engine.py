"""The whole fit of one foot: sessions in, calibration and everything a report needs out."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import Final

from threadpoolctl import threadpool_limits

from footcal.calfile import Calibration
from footcal.files.session import Session
from footcal.fit.bad_steps import judged, without_bad_steps
from footcal.fit.choose import Candidate, choose_terms
from footcal.fit.content import calibration_content
from footcal.fit.correct_mass import corrected
from footcal.fit.dwells import odd_dwells
from footcal.fit.inputs import FitInput, read_input
from footcal.fit.lag_choice import lag_to_undo_s
from footcal.fit.leave_out import leave_out
from footcal.fit.outcome import FitOutcome, FitResult
from footcal.fit.passes import fit_terms
from footcal.fit.pumping import with_reference
from footcal.fit.reference import Aligned
from footcal.fit.rows import Rows, join_rows
from footcal.fit.set_aside import Aside
from footcal.fit.shape import check_shape, loop_width
from footcal.fit.side_load import side_load
from footcal.fit.swing import swing_rows
from footcal.fit.terms import Terms
from footcal.fit.trust import runtime_uncertainty

WRONG_LOOP: Final = 0.001  # of full scale: a narrower loop the wrong way round is noise

__all__ = ["FitOutcome", "FitResult", "fit_sessions"]


def fit_sessions(
    sessions: Sequence[Session],
    *,
    kind: str | None = None,
    capacity_N: float | None = None,
    raw_max: float | None = None,
    correct_mass: Mapping[int, float] | Mapping[str, float] | None = None,
    on_try: Callable[[Terms], None] = lambda _: None,
) -> FitResult:
    """Fit the inverse sensor model to one or more bench sessions of one foot.

    Args:
        sessions: of the same foot; the first sets zero and mounting.
        kind: cell, resistive, magnetic, capacitive; None takes what the sessions say.
        capacity_N: full scale; None takes what the sessions say.
        raw_max: top of the converter, counts; None takes what the sessions say, or a usual converter.
        correct_mass: masses in kilograms to put in place of the entered ones, by step, or by "SESSION:STEP" where there
            are several sessions; each is told in the notes and in the provenance.
        on_try: called with each choice of terms before it is tried.

    Raises:
        SessionError: the sessions do not belong together, or lack zeros or loads.
        SettingError: kind or capacity is not known, or a mass to correct belongs to no step.
        FitRefusedError: the data were read, but no sound model follows from them.
    """
    with threadpool_limits(limits=1):  # the factors are small: more threads only wait for each other
        put_right, corrections = corrected(sessions, correct_mass or {})
        data = read_input(put_right, kind=kind, capacity_N=capacity_N, raw_max=raw_max)
        return _fitted(replace(data, corrections=corrections), on_try)


def _fitted(data: FitInput, on_try: Callable[[Terms], None]) -> FitResult:
    """Set bad steps aside, join the reference, choose the terms, check the shape, state the uncertainty."""
    middling, rows, asides = without_bad_steps(data)
    aligned, pumped = with_reference(data, middling)
    moving = [part for part in (pumped, swing_rows(data)) if part is not None]
    pump = join_rows(moving) if moving else None
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
    side = side_load(data, best.fitted, uncertainty)
    asides += side.asides if side else ()
    notes = (*_notes(data, best, aligned, lag_s), *(side.notes if side else ()))
    outcome = FitOutcome(data, best, rows, tuple(asides), aligned, uncertainty, covariance, notes, side, lag_s)
    return FitResult(outcome, Calibration.from_content(calibration_content(outcome)))


def _looked_at_again(
    data: FitInput, best: Candidate, rows: Rows, pump: Rows | None, asides: list[Aside]
) -> tuple[Candidate, Rows, list[Aside]]:
    """Judge all steps again by the chosen terms, which may find more or take some back, and fit a last time."""
    found = judged(data, best.fitted, join_rows([rows, pump]) if pump else rows, [aside.hold for aside in asides])
    if found.keys() == {aside.hold for aside in asides}:
        return best, join_rows([rows, pump]) if pump else rows, list(found.values())
    rows = data.rows.without_holds(set(found))
    together = join_rows([rows, pump]) if pump else rows
    fitted = fit_terms(data.channel, data.reading, together, best.fitted.terms)
    return Candidate(fitted, leave_out(fitted, together)), together, list(found.values())


def _notes(data: FitInput, best: Candidate, aligned: Aligned | None, lag_s: float) -> list[str]:
    """Say what the sessions could not tell, and what was assumed."""
    notes = [*data.assumed, *(f"{data.sessions[one.session].name}, {one.words()}" for one in data.corrections)]
    notes.append("reference masses are taken as exact: their class does not enter the stated uncertainty")
    notes += odd_dwells(data)
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
    if loop_width(best.fitted) < -WRONG_LOOP:
        notes.append("the fitted loop would give energy back: check the order and the directions of the steps")
    left_ms = 1e3 * (data.lag_s - lag_s)
    if left_ms > 0.05:
        notes.append(f"{left_ms:.2f} ms of the sensor's lag stay in: undoing them would add more noise than they cost")
    if data.channel.spikes_s:
        notes.append(f"{len(data.channel.spikes_s)} lone spikes in the readings were taken out")
    return notes
