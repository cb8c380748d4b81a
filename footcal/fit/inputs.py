"""What a fit starts from: the sessions of one foot joined, holds with forces, and how the counts are to be read."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from footcal.errors import SessionError, SettingError
from footcal.files.session import Session
from footcal.fit.channel import Channel, join
from footcal.fit.correct_mass import Correction
from footcal.fit.holds import BenchPlace, bench_place, check_loads, holds_of
from footcal.fit.passes import Reading
from footcal.fit.reading import RawForm, first_press, raw_form, reading_of, temperature_levels
from footcal.fit.rows import LEVEL_SHARE, Rows, hold_rows
from footcal.fit.saturation import dead_band_N, end_notes, find_ends, within
from footcal.records import Hold, IntArray


@dataclass(frozen=True, slots=True)
class FitInput:
    """Everything read from the sessions, before any model."""

    sessions: tuple[Session, ...]
    foot_id: str
    kind: str
    capacity_N: float
    channel: Channel
    holds: tuple[Hold, ...]  # the tilted ones last
    session_of: IntArray  # session index of each hold
    rows: Rows  # of the level holds
    tilted: Rows | None  # of those on wedges: not for the curve
    form: RawForm
    reading: Reading
    place: BenchPlace
    temp_ref_C: float
    temperatures: int
    assumed: tuple[str, ...]
    saturated_from_N: float | None  # lowest load at which the reading sticks at an end
    lag_s: float  # first-order delay of the sensor, as stated
    corrections: tuple[Correction, ...] = ()  # masses put right before the fit

    @property
    def levels(self) -> int:
        """Number of different loads, zero included."""
        return len(
            {round(hold.load_N / (LEVEL_SHARE * self.capacity_N)) for hold in self.holds if hold.kind != "tilted"}
        )


def read_input(
    sessions: Sequence[Session], *, kind: str | None, capacity_N: float | None, raw_max: float | None
) -> FitInput:
    """Bring the sessions of one foot together; raises as `fit_sessions` does."""
    if not sessions:
        raise SettingError("fit", "no session was given", "Name one or more session folders.")
    foot_id = _agreed(sessions, "foot_id", None, "--foot")
    kind = _agreed(sessions, "kind", kind, "--kind")
    full_scale_N = float(_agreed(sessions, "capacity_N", capacity_N, "--capacity"))
    channel = join(list(sessions))
    places = [bench_place(session.meta) for session in sessions]
    holds, session_of, level = _all_holds(sessions, places)
    check_loads(holds[:level], sessions[0].name)
    rows = hold_rows(channel, holds[:level], session_of[:level], full_scale_N)
    tilted = hold_rows(channel, holds[level:], session_of[level:], full_scale_N) if len(holds) > level else None
    stated_max = raw_max if raw_max is not None else sessions[0].meta.raw_max
    form = raw_form(kind, channel.raw, first_press(channel, rows), stated_max)
    ends = find_ends(channel, rows, holds, form, full_scale_N)
    form = within(form, ends)
    seen, rows = rows, rows.kept(~ends.saturated)
    check_loads([holds[i] for i in np.unique(rows.hold)], f"{sessions[0].name}, less saturated steps")
    temp_ref_C, temperatures = temperature_levels(channel, rows)
    return FitInput(
        sessions=tuple(sessions),
        foot_id=foot_id,
        kind=kind,
        capacity_N=full_scale_N,
        channel=channel,
        holds=tuple(holds),
        session_of=session_of,
        rows=rows,
        tilted=None if tilted is None else replace(tilted, hold=tilted.hold + level),
        form=form,
        reading=reading_of(channel, rows, holds, form, temp_ref_C),
        place=places[0],
        temp_ref_C=temp_ref_C,
        temperatures=temperatures,
        saturated_from_N=ends.least_N,
        assumed=(
            *places[0].assumed,
            *form.assumed,
            *end_notes(ends, seen, holds, dead_band_N(channel, seen, holds, form, full_scale_N)),
        ),
        lag_s=sessions[0].meta.lag_s or 0.0,
    )


def _all_holds(sessions: Sequence[Session], places: Sequence[BenchPlace]) -> tuple[list[Hold], IntArray, int]:
    """Return the holds of all sessions, those on wedges last, the session of each, and how many are level."""
    found = [
        (hold, number)
        for number, (session, place) in enumerate(zip(sessions, places, strict=True))
        for hold in holds_of(session, place, least_loads=0)
    ]
    found.sort(key=lambda pair: pair[0].kind == "tilted")
    level = sum(hold.kind != "tilted" for hold, _ in found)
    return [hold for hold, _ in found], np.array([number for _, number in found]), level


def _agreed(sessions: Sequence[Session], name: str, option: str | float | None, flag: str) -> str:
    """Return the value that all sessions and the option agree on."""
    said = {getattr(session.meta, name) for session in sessions} - {None}
    if option is not None:
        said.add(option)
    if len(said) > 1:
        values = ", ".join(str(value) for value in sorted(said, key=str))
        raise SessionError("sessions", f"{name} differs: {values}", "Fit sessions of one foot and sensor together.")
    if not said:
        raise SettingError("fit", f"{name} is not known", f"Give {flag}, or write {name} into session.toml.")
    return said.pop()  # type: ignore[no-any-return]
