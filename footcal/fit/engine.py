"""The whole fit of one foot: sessions in, calibration and everything a report needs out."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Final

from footcal.calfile import Calibration
from footcal.errors import FitRefusedError
from footcal.files.session import Session
from footcal.fit.choose import Candidate, choose_terms
from footcal.fit.content import calibration_content
from footcal.fit.inputs import FitInput, read_input
from footcal.fit.leave_out import leave_out
from footcal.fit.passes import fit_terms
from footcal.fit.rows import Rows
from footcal.fit.set_aside import Aside, bad_holds
from footcal.fit.shape import check_shape
from footcal.fit.terms import Terms
from footcal.fit.trust import runtime_uncertainty
from footcal.records import FloatArray
from footcal.sensor.model import RuntimeUncertainty

ROUNDS: Final = 4  # of fitting and setting aside


@dataclass(frozen=True, slots=True)
class FitResult:
    """A finished fit."""

    data: FitInput
    best: Candidate
    rows: Rows  # those fitted
    asides: tuple[Aside, ...]
    uncertainty: RuntimeUncertainty
    covariance: FloatArray
    calibration: Calibration
    notes: tuple[str, ...] = field(default=())


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
    data = read_input(sessions, kind=kind, capacity_N=capacity_N, raw_max=raw_max)
    rows, asides = _without_bad_steps(data)
    best = choose_terms(
        data.channel,
        data.reading,
        rows,
        kind=data.kind,
        levels=data.levels,
        temperatures=data.temperatures,
        on_try=on_try,
    )
    more = bad_holds(best.fitted, rows, list(data.holds), data.capacity_N, data.place.gravity_m_per_s2)
    if more:
        rows = rows.without_holds({aside.hold for aside in more})
        fitted = fit_terms(data.channel, data.reading, rows, best.fitted.terms)
        best, asides = Candidate(fitted, leave_out(fitted, rows)), [*asides, *more]
    check_shape(best.fitted, data.foot_id)
    uncertainty, covariance = runtime_uncertainty(
        best,
        rows,
        data.reading,
        data.kind,
        temperature_known=best.fitted.terms.temperature,
        reference_relative=data.place.gravity_u_m_per_s2 / data.place.gravity_m_per_s2,
    )
    notes = _notes(data, best)
    content = calibration_content(data, best, rows, asides, uncertainty, covariance, notes)
    return FitResult(
        data, best, rows, tuple(asides), uncertainty, covariance, Calibration.from_content(content), tuple(notes)
    )


def _without_bad_steps(data: FitInput) -> tuple[Rows, list[Aside]]:
    """Fit a middling choice of terms and set aside what does not fit it, until nothing more is found."""
    levels = data.levels
    degree = max(1, min(3 if data.kind == "cell" else 4, levels - 2))
    terms = Terms(
        degree=degree,
        gamma=0.5 if data.kind == "resistive" else 1.0,
        temperature=data.temperatures > 1,
        curved_temperature=data.temperatures > 2,
    )
    rows, asides = data.rows, []
    for _ in range(ROUNDS):
        fitted = fit_terms(data.channel, data.reading, rows, terms)
        found = bad_holds(fitted, rows, list(data.holds), data.capacity_N, data.place.gravity_m_per_s2)
        if not found:
            break
        asides += found
        rows = rows.without_holds({aside.hold for aside in found})
    if len(asides) > 0.3 * len(data.holds):
        raise FitRefusedError(
            data.foot_id,
            f"{len(asides)} of {len(data.holds)} steps do not fit the rest",
            "Check masses, times and the fixture, and run the session again.",
        )
    return rows, asides


def _notes(data: FitInput, best: Candidate) -> list[str]:
    """Say what the sessions could not tell, and what was assumed."""
    notes = list(data.assumed)
    if not data.channel.has_temperature:
        notes.append("no temperature was recorded: zero and span against temperature are not corrected")
    elif data.temperatures < 2:
        notes.append("no temperature change: zero and span against temperature are a guess")
    if not any(hold.kind == "quick" for hold in data.holds) and not best.fitted.terms.creep:
        notes.append("no quick lifts: the reading while walking was not tested")
    dwell_s = max(hold.t_end_s - hold.t_load_s for hold in data.holds)
    if best.fitted.terms.creep and dwell_s < 60.0:
        notes.append(
            f"the longest dwell was {dwell_s:.0f} s: creep over minutes is extrapolated by the smooth spectrum"
        )
    if data.channel.spikes_s:
        notes.append(f"{len(data.channel.spikes_s)} lone spikes in the readings were taken out")
    return notes
