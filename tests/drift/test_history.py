"""The history: rows are added, never changed, by any number of writers."""

from __future__ import annotations

import datetime as dt
import math
import multiprocessing
import os
import signal
import sqlite3
import time
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from footcal.drift.history import History
from footcal.errors import FileFormatError, SessionError, SettingError
from tests.drift.stand_in import START, new_check
from tests.drift.writers import add_many

PROCESSES = multiprocessing.get_context("forkserver")  # a plain fork would copy the threads' locks of this process
PROCESSES.set_forkserver_preload(["tests.drift.writers"])


def test_a_check_comes_back_as_it_was_added(tmp_path: Path) -> None:
    """Every figure survives; what was not measured comes back as NaN."""
    check = new_check(1)
    with History(tmp_path / "h.sqlite") as store:
        assert store.add([check]) == [True]
        (back,) = store.checks()
    score = check.score
    assert (back.zero_N, back.zero_u_N, back.span_pct, back.span_u_pct) == (
        *(score.zero_N, score.zero_u_N, score.span_pct, score.span_u_pct),
    )
    assert math.isnan(back.loop_N)
    assert (back.foot_id, back.state, back.kind, back.capacity_N) == ("LC-1", "as-found", "cell", 500.0)
    assert back.t_utc == START + dt.timedelta(days=7)
    assert (back.limit_span_pct, back.limit_zero_N) == (1.0, 2.5)


def test_checks_come_by_foot_and_time(tmp_path: Path) -> None:
    """A check that was entered late stands where it belongs."""
    with History(tmp_path / "h.sqlite") as store:
        store.add([new_check(3), new_check(1), new_check(2, foot_id="AA", calibration="a")])
        assert [check.session_name for check in store.checks()] == ["check 2", "check 1", "check 3"]


def test_a_session_added_twice_is_recognised(tmp_path: Path) -> None:
    """The second time it is not new, and no row is doubled."""
    with History(tmp_path / "h.sqlite") as store:
        store.add([new_check(1)])
        assert store.add([new_check(1), new_check(2)]) == [False, True]
        assert len(store.checks()) == 2


def test_one_session_under_both_states_is_refused(tmp_path: Path) -> None:
    """A check is either as-found or as-left."""
    with History(tmp_path / "h.sqlite") as store:
        store.add([new_check(1)])
        with pytest.raises(SessionError, match="already, as as-found"):
            store.add([new_check(1, state="as-left")])


def test_all_checks_of_a_call_are_added_or_none(tmp_path: Path) -> None:
    """The first of the two is good, the second is refused; neither is stored."""
    with History(tmp_path / "h.sqlite") as store:
        store.add([new_check(1)])
        with pytest.raises(SessionError):
            store.add([new_check(2), new_check(1, state="as-left")])
        assert len(store.checks()) == 1


def test_an_unknown_state_is_refused(tmp_path: Path) -> None:
    """The two words that are allowed are told."""
    with History(tmp_path / "h.sqlite") as store, pytest.raises(SettingError, match="as-found or as-left"):
        store.add([new_check(1, state="found")])


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE checks SET zero_N = 0",
        "DELETE FROM checks",
        "UPDATE check_loads SET en = 0",
        "DELETE FROM check_loads",
        "UPDATE calibrations SET foot_id = 'x'",
        "DELETE FROM calibrations",
    ],
)
def test_stored_rows_can_not_be_changed(tmp_path: Path, statement: str) -> None:
    """Even another program is stopped by the file itself."""
    with History(tmp_path / "h.sqlite") as store:
        store.add([new_check(1)])
    other = sqlite3.connect(tmp_path / "h.sqlite")
    with pytest.raises(sqlite3.IntegrityError, match="append-only"):
        other.execute(statement)
    other.close()


def test_a_check_of_no_calibration_can_not_be_stored(tmp_path: Path) -> None:
    """Foreign keys are on."""
    with History(tmp_path / "h.sqlite") as store:
        store.add([new_check(1)])
        with pytest.raises(sqlite3.IntegrityError, match="FOREIGN KEY"):
            store._connection.execute(
                "INSERT INTO checks SELECT NULL, 'x', 'y', session_name, state, t_utc, added_utc, tool_version, "
                "zero_N, zero_u_N, span_pct, span_u_pct, zero_span_cov_N_pct, loop_N, noise_N, temp_C, limit_span_pct, "
                "limit_zero_N FROM checks"
            )


def test_a_figure_that_is_no_number_is_refused(tmp_path: Path) -> None:
    """The tables take no row without zero and span."""
    check = new_check(1)
    bad = replace(check, score=replace(check.score, zero_N=math.nan))
    with History(tmp_path / "h.sqlite") as store:
        with pytest.raises(SessionError, match="zero_N"):
            store.add([bad])
        assert store.checks() == []


def test_a_missing_history_is_refused_when_only_read(tmp_path: Path) -> None:
    """And none is made."""
    with pytest.raises(FileFormatError, match="no such history"):
        History(tmp_path / "h.sqlite", create=False)
    assert not (tmp_path / "h.sqlite").exists()


def test_a_file_that_is_no_database_is_refused(tmp_path: Path) -> None:
    """Its content is left alone."""
    (tmp_path / "h.sqlite").write_bytes(b"t_s,raw\n" * 200)
    with pytest.raises(FileFormatError, match="no whole drift history"):
        History(tmp_path / "h.sqlite")
    assert (tmp_path / "h.sqlite").read_bytes() == b"t_s,raw\n" * 200


def test_a_folder_that_is_not_there_is_refused(tmp_path: Path) -> None:
    """The path is named."""
    with pytest.raises(SettingError, match="nowhere"):
        History(tmp_path / "nowhere" / "h.sqlite")


def test_two_writers_lose_nothing(tmp_path: Path) -> None:
    """Two processes add 60 checks each to a file that neither has made before: 120 checks with 3 loads each."""
    history = tmp_path / "h.sqlite"
    writers = [
        PROCESSES.Process(target=add_many, args=(history, first, 60, tmp_path / f"log{first}")) for first in (0, 1000)
    ]
    for writer in writers:
        writer.start()
    for writer in writers:
        writer.join(timeout=60)
    assert [writer.exitcode for writer in writers] == [0, 0]
    assert_whole(history, [*range(60), *range(1000, 1060)])


def test_a_writer_killed_at_any_moment_leaves_no_half_row(tmp_path: Path) -> None:
    """Ten times SIGKILL at a random moment: every check that was reported as stored is there, whole, and once."""
    survive_kills(tmp_path, rounds=10)


def survive_kills(folder: Path, rounds: int) -> None:
    """Kill a writer `rounds` times at random moments and look at what it left."""
    history, log, rng = folder / "h.sqlite", folder / "log", np.random.default_rng(7)
    for round_ in range(rounds):
        writer = PROCESSES.Process(target=add_many, args=(history, 2_000 * round_, 2_000, log))
        writer.start()
        wait_for(log, f"{2_000 * round_}")
        time.sleep(rng.uniform(0.0, 0.05))
        os.kill(writer.pid or 0, signal.SIGKILL)
        writer.join(timeout=20)
        assert writer.exitcode == -signal.SIGKILL
    reported = [int(line) for line in log.read_text().split()]
    stored_names = assert_whole(history, None)
    assert set(reported) <= stored_names
    assert len(stored_names) - len(reported) <= rounds  # at most one stored but not yet reported each time


def wait_for(log: Path, word: str) -> None:
    """Wait until the writer has stored its first check."""
    deadline = time.monotonic() + 60
    while not log.exists() or word not in log.read_text().split():
        assert time.monotonic() < deadline, "the writer has not started"
        time.sleep(0.005)


def assert_whole(history: Path, numbers: list[int] | None) -> set[int]:
    """Check that the file is sound, each check there once, with its three loads; return the checks' numbers."""
    connection = sqlite3.connect(history)
    assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
    rows = connection.execute(
        "SELECT session_name, count(step) FROM checks LEFT JOIN check_loads ON check_id = id GROUP BY id"
    ).fetchall()
    connection.close()
    found = [int(name.split()[1]) for name, _ in rows]
    assert len(found) == len(set(found))
    assert {loads for _, loads in rows} == {3}
    if numbers is not None:
        assert sorted(found) == sorted(numbers)
    return set(found)
