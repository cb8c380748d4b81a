"""The history of all checks in one SQLite file: rows are added, never changed, by any number of writers."""

from __future__ import annotations

import datetime as dt
import math
import os
import sqlite3
import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Final, Self

import footcal
from footcal.drift.records import NewCheck, StoredCheck
from footcal.drift.schema import migrate
from footcal.errors import DeviceError, FileFormatError, SessionError, SettingError

STATES: Final = ("as-found", "as-left")
BUSY_s: Final = 15.0


class History:
    """An open history; use it as a context manager."""

    def __init__(self, path: str | os.PathLike[str], *, create: bool = True) -> None:
        """Open a history, made and brought up to date where needed.

        Args:
            path: the SQLite file.
            create: whether a missing file is made; else it is refused.

        Raises:
            FileFormatError: missing, no SQLite file, another program's, or of a newer version.
            SettingError: the place can't be written.
            DeviceError: another program holds the file for more than 15 s.
        """
        self._where = str(path)
        if not create and not Path(path).exists():
            raise FileFormatError(
                where=self._where, what="no such history", mend="Add a check with `footcal drift add`."
            )
        try:
            self._connection = sqlite3.connect(path, timeout=BUSY_s, isolation_level=None)
        except sqlite3.Error as error:
            raise SettingError(
                where=self._where, what=f"can't be opened ({error})", mend="Choose a folder that you may write to."
            ) from error
        try:
            with self._explained():
                self._set_up()
        except BaseException:
            self._connection.close()
            raise

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Close the file; what was added stays."""
        self._connection.close()

    def add(self, checks: Sequence[NewCheck]) -> list[bool]:
        """Add checks, all or none of them, and return for each whether it is new (False: it was there already).

        A session that was scored against the same calibration before is recognised by its digest.

        Raises:
            SessionError: the same session is there under the other state.
            SettingError: an unknown state.
            DeviceError: another writer holds the file for more than 15 s.
        """
        for check in checks:
            if check.state not in STATES:
                raise SettingError(
                    where="--state", what=f"{check.state!r} is not known", mend=f"Write {' or '.join(STATES)}."
                )
        with self._explained(), self._writing():
            return [self._add_one(check) for check in checks]

    def checks(self) -> list[StoredCheck]:
        """Return all checks, by foot and then by time."""
        with self._explained():
            rows = self._connection.execute(
                "SELECT c.id, k.foot_id, k.kind, k.capacity_N, c.calibration_sha256, c.session_name, c.state, c.t_utc, "
                "c.zero_N, c.zero_u_N, c.span_pct, c.span_u_pct, c.zero_span_cov_N_pct, c.loop_N, c.noise_N, c.temp_C, "
                "c.limit_span_pct, c.limit_zero_N "
                "FROM checks c JOIN calibrations k ON k.sha256 = c.calibration_sha256 "
                "ORDER BY k.foot_id, c.t_utc, c.id"
            ).fetchall()
        return [_stored(row) for row in rows]

    def _set_up(self) -> None:
        self._connection.execute("PRAGMA foreign_keys = ON")
        deadline = time.monotonic() + BUSY_s
        while True:  # the change to WAL does not wait for a lock by itself
            try:
                self._connection.execute("PRAGMA journal_mode = WAL")
                break
            except sqlite3.OperationalError as error:
                if "locked" not in str(error) or time.monotonic() > deadline:
                    raise
                time.sleep(0.02)
        self._connection.execute("PRAGMA synchronous = FULL")
        migrate(self._connection, self._where)

    def _add_one(self, check: NewCheck) -> bool:
        run, score = self._connection.execute, check.score
        run(
            "INSERT OR IGNORE INTO calibrations VALUES (?, ?, ?, ?)",
            (check.calibration_sha256, score.foot_id, check.kind, check.capacity_N),
        )
        known = run(
            "SELECT state FROM checks WHERE session_sha256 = ? AND calibration_sha256 = ?",
            (check.session_sha256, check.calibration_sha256),
        ).fetchone()
        if known:
            if known[0] != check.state:
                raise SessionError(
                    where=check.session_name,
                    what=f"this session is in the history already, as {known[0]}",
                    mend="A check is either as-found or as-left; record another session for the other.",
                )
            return False
        moment = check.t_utc.astimezone(dt.UTC).isoformat(timespec="seconds")
        added = dt.datetime.now(dt.UTC).isoformat(timespec="seconds")
        cursor = run(
            "INSERT INTO checks (calibration_sha256, session_sha256, session_name, state, t_utc, added_utc, "
            "tool_version, zero_N, zero_u_N, span_pct, span_u_pct, zero_span_cov_N_pct, loop_N, noise_N, temp_C, "
            "limit_span_pct, limit_zero_N) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
            (
                *(check.calibration_sha256, check.session_sha256, check.session_name, check.state, moment, added),
                *(getattr(footcal, "__version__", "unknown"), score.zero_N, score.zero_u_N, score.span_pct),
                *(score.span_u_pct, score.zero_span_cov_N_pct),
                *(_null(score.loop_N), _null(score.noise_N), _null(score.temp_C)),
                *(check.limits.span_pct, check.limits.zero_N),
            ),
        )
        self._connection.executemany(
            "INSERT INTO check_loads VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)",
            [
                (
                    *(cursor.lastrowid, load.step, load.direction, load.load_N, load.reading_N),
                    *(load.deviation_N, load.u_cal_N, load.u_check_N, load.en),
                )
                for load in score.loads
            ],
        )
        return True

    @contextmanager
    def _writing(self) -> Iterator[None]:
        self._connection.execute("BEGIN IMMEDIATE")
        try:
            yield
        except BaseException:
            self._connection.execute("ROLLBACK")
            raise
        self._connection.execute("COMMIT")

    @contextmanager
    def _explained(self) -> Iterator[None]:
        try:
            yield
        except sqlite3.OperationalError as error:
            if "locked" in str(error) or "busy" in str(error):
                raise DeviceError(
                    where=self._where,
                    what=f"another program has held the history for more than {BUSY_s:g} s",
                    mend="Wait until it has finished, then add again.",
                ) from error
            raise SettingError(
                where=self._where, what=f"the history can't be used ({error})", mend="Check path, permissions and room."
            ) from error
        except sqlite3.IntegrityError as error:
            raise SessionError(
                where=self._where,
                what=f"the history refuses the check ({error})",
                mend="Look at the session: a figure of it is missing or out of range.",
            ) from error
        except sqlite3.DatabaseError as error:
            raise FileFormatError(
                where=self._where,
                what=f"this is no whole drift history ({error})",
                mend="Name another file, or restore it from a copy.",
            ) from error


def _null(value: float) -> float | None:
    return None if math.isnan(value) else value


def _stored(row: Sequence[object]) -> StoredCheck:
    values = [math.nan if value is None else value for value in row]
    values[7] = dt.datetime.fromisoformat(str(values[7]))
    return StoredCheck(*values)  # type: ignore[arg-type]  # the query's columns stand in the record's order
