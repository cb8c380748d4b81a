"""`footcal drift add` and `footcal drift show`, by calling the command line and reading what it prints."""

from __future__ import annotations

import json
from dataclasses import replace
from datetime import timedelta
from pathlib import Path
from typing import Any

import pytest

from footcal.calfile import Calibration
from footcal.cli.main import run
from footcal.files.session import write_session
from tests.drift.stand_in import START, LineCalibration, check_session


@pytest.fixture(autouse=True)
def straight_line(monkeypatch: pytest.MonkeyPatch) -> None:
    """Let every calibration file be the straight line, so that the answers are known."""
    monkeypatch.setattr(Calibration, "load", lambda path: LineCalibration(digest=f"{path!s:c>64}"[-64:]))


def week(tmp_path: Path, number: int, **shift: Any) -> str:
    """Write the check session of a week and return its folder."""
    session = check_session(seed=number, noise_N=0.05, **shift)
    meta = replace(session.meta, start_utc=START + timedelta(weeks=number))
    write_session(replace(session, meta=meta), tmp_path / f"week_{number:02}")
    return str(tmp_path / f"week_{number:02}")


def called(*arguments: str) -> int:
    """Return the exit code of a call of the command."""
    with pytest.raises(SystemExit) as left:
        run(["drift", *arguments])
    return int(left.value.code or 0)


def added(tmp_path: Path, *sessions: str, state: str = "as-found", extra: tuple[str, ...] = ()) -> int:
    """Return the exit code of `drift add`."""
    history = ("--history", str(tmp_path / "h.sqlite"))
    return called("add", *sessions, "--cal", "LC-1.cal.json", "--state", state, *history, *extra)


def test_a_good_foot_leaves_with_code_0(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Three quiet weeks."""
    assert added(tmp_path, *(week(tmp_path, number) for number in range(3))) == 0
    assert called("show", "--history", str(tmp_path / "h.sqlite")) == 0
    printed = capsys.readouterr()
    assert "fit for use" in printed.out
    assert "added 3 of 3" in printed.err


def test_a_foot_that_needs_action_leaves_with_code_1_and_one_json_document(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """3 % span where 1 % is allowed."""
    added(tmp_path, *(week(tmp_path, n, span_pct=3.0 if n > 2 else 0.0) for n in range(5)))
    capsys.readouterr()
    assert called("show", "--history", str(tmp_path / "h.sqlite"), "--json") == 1
    (foot,) = json.loads(capsys.readouterr().out)["feet"]
    assert (foot["foot_id"], foot["verdict"], foot["since"]) == ("LC-1", "recalibrate now", "2031-04-23")
    assert foot["span_pct"] == pytest.approx(3.0, abs=0.1)


def test_a_wider_limit_lets_it_pass(tmp_path: Path) -> None:
    """The same foot under a limit of 5 %."""
    sessions = [week(tmp_path, n, span_pct=3.0) for n in range(3)]
    assert added(tmp_path, *sessions, extra=("--limit-span-pct", "5")) == 0
    assert called("show", "--history", str(tmp_path / "h.sqlite")) == 0


def test_a_session_of_another_foot_leaves_with_code_2_and_stores_nothing(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The good session before it is not stored either, and no history is made."""
    bad = week(tmp_path, 2, foot_id="SP-9")
    assert added(tmp_path, week(tmp_path, 1), bad) == 2
    assert "SP-9" in capsys.readouterr().err
    assert not (tmp_path / "h.sqlite").exists()


@pytest.mark.parametrize("arguments", [("show",), ("add",), ("show", "--history", "nowhere.sqlite")])
def test_bad_use_leaves_with_code_2(arguments: tuple[str, ...], capsys: pytest.CaptureFixture[str]) -> None:
    """A missing option or file is told on stderr; stdout stays empty."""
    assert called(*arguments) == 2
    printed = capsys.readouterr()
    assert printed.err.startswith("error: ")
    assert not printed.out


def test_an_unknown_state_leaves_with_code_2(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The two words are told."""
    assert added(tmp_path, week(tmp_path, 1), state="found") == 2
    assert "as-found or as-left" in capsys.readouterr().err


def test_a_session_added_again_is_known(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """It is said so, and the exit code is good: a script may be run twice."""
    added(tmp_path, week(tmp_path, 1))
    assert added(tmp_path, str(tmp_path / "week_01")) == 0
    printed = capsys.readouterr()
    assert "known" in printed.out
    assert "added 0 of 1" in printed.err


def test_add_gives_json_with_every_load(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Seven loads; by hand: 2 % of 400 N are 8 N, over 2 * 0.5 N give E_n = 8."""
    added(tmp_path, week(tmp_path, 1, span_pct=2.0), extra=("--json",))
    (check,) = json.loads(capsys.readouterr().out)["checks"]
    assert len(check["loads"]) == 7
    assert check["loads"][3]["en"] == pytest.approx(8.0, abs=0.1)  # noise of 0.05 N
    assert check["new"] is True
