"""From check session folders to scored checks."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace
from pathlib import Path

import pytest

from footcal.drift.scoring import read_checks
from footcal.errors import SessionError, SettingError
from footcal.files.session import write_session
from tests.drift.stand_in import START, LineCalibration, check_session


def folder(path: Path, *, start: bool = True, foot: bool = True) -> Path:
    """Write a check that is 1 % off; its time or its foot can be left out."""
    session = check_session(span_pct=1.0)
    meta = replace(
        session.meta,
        start_utc=session.meta.start_utc if start else None,
        foot_id=session.meta.foot_id if foot else None,
    )
    write_session(replace(session, meta=meta), path)
    return path


def test_a_folder_is_scored_and_dated(tmp_path: Path) -> None:
    """Name, time and digest come from the session, the limits from the kind of sensor."""
    (check,) = read_checks([folder(tmp_path / "week_01")], LineCalibration(), "as-found")
    assert check.score.span_pct == pytest.approx(1.0, abs=1e-9)
    assert (check.session_name, check.t_utc, check.state) == ("week_01", START, "as-found")
    assert len(check.session_sha256) == 64
    assert (check.limits.span_pct, check.limits.zero_N) == (1.0, 2.5)


def test_a_time_given_fills_what_the_session_leaves_open(tmp_path: Path) -> None:
    """`--date` dates a session without start_utc."""
    moment = dt.datetime(2031, 5, 1, tzinfo=dt.UTC)
    (check,) = read_checks([folder(tmp_path / "s", start=False)], LineCalibration(), "as-found", t_utc=moment)
    assert check.t_utc == moment


def test_a_session_without_any_time_is_refused(tmp_path: Path) -> None:
    """A history needs it."""
    with pytest.raises(SessionError, match="--date"):
        read_checks([folder(tmp_path / "s", start=False)], LineCalibration(), "as-found")


def test_a_foot_given_fills_what_the_session_leaves_open(tmp_path: Path) -> None:
    """`--foot` names the foot of a session without foot_id."""
    (check,) = read_checks([folder(tmp_path / "s", foot=False)], LineCalibration(), "as-found", foot_id="LC-1")
    assert check.score.foot_id == "LC-1"


def test_a_foot_given_can_not_turn_a_session_into_that_of_another(tmp_path: Path) -> None:
    """The session's own word stands."""
    with pytest.raises(SettingError, match="LC-1"):
        read_checks([folder(tmp_path / "s")], LineCalibration(foot_id="SP-9"), "as-found", foot_id="SP-9")
