"""From check session folders to scored checks, ready for the history."""

from __future__ import annotations

import datetime as dt
import os
from collections.abc import Sequence

from footcal.drift.checks import ForceCalibration, score_check
from footcal.drift.limits import DriftLimits, drift_limits
from footcal.drift.records import NewCheck
from footcal.errors import SessionError
from footcal.files.session import Session, read_session
from footcal.files.session_meta import SessionDefaults


def read_checks(
    folders: Sequence[str | os.PathLike[str]],
    calibration: ForceCalibration,
    state: str,
    *,
    limits: DriftLimits | None = None,
    foot_id: str | None = None,
    t_utc: dt.datetime | None = None,
) -> list[NewCheck]:
    """Return the scored checks of some session folders, all of the calibration's foot.

    Args:
        folders: check sessions.
        calibration: of that foot.
        state: as-found or as-left.
        limits: instead of those usual for the kind of sensor.
        foot_id: where a session does not name its foot.
        t_utc: when it was checked, aware, where a session does not say.

    Raises:
        FootcalError: a session can't be read, is of another foot, has no time, or too few loads.
    """
    sessions = [read_session(folder, SessionDefaults(foot_id=foot_id)) for folder in folders]
    return [new_check(session, calibration, state, limits=limits, t_utc=t_utc) for session in sessions]


def new_check(
    session: Session,
    calibration: ForceCalibration,
    state: str,
    *,
    limits: DriftLimits | None = None,
    t_utc: dt.datetime | None = None,
) -> NewCheck:
    """Return one session scored against its calibration; see `read_checks`."""
    moment = session.meta.start_utc or t_utc
    if moment is None:
        raise SessionError(
            where=str(session.folder or session.name),
            what="the session does not say when it was recorded",
            mend="Add start_utc to session.toml, or --date.",
        )
    return NewCheck(
        score=score_check(session, calibration),
        limits=limits or drift_limits(calibration.kind, calibration.capacity_N),
        kind=calibration.kind,
        capacity_N=calibration.capacity_N,
        calibration_sha256=calibration.digest,
        session_sha256=session.digest,
        session_name=session.name,
        state=state,
        t_utc=moment,
    )
