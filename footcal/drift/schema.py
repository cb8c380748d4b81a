"""The history's tables: append-only by triggers, versioned, brought up to date step by step."""

from __future__ import annotations

import sqlite3
from collections.abc import Sequence
from typing import Final

from footcal.errors import FileFormatError

APPLICATION_ID: Final = 0x666F6F74  # "foot"; tells our history from any other SQLite file

_V1: Final = """
CREATE TABLE calibrations (
    sha256      TEXT PRIMARY KEY CHECK (length(sha256) > 0),
    foot_id     TEXT NOT NULL CHECK (length(foot_id) > 0),
    kind        TEXT NOT NULL CHECK (kind IN ('cell', 'resistive', 'magnetic', 'capacitive')),
    capacity_N  REAL NOT NULL CHECK (capacity_N > 0)
) STRICT, WITHOUT ROWID;
CREATE TABLE checks (
    id                   INTEGER PRIMARY KEY,
    calibration_sha256   TEXT NOT NULL REFERENCES calibrations (sha256),
    session_sha256       TEXT NOT NULL CHECK (length(session_sha256) > 0),
    session_name         TEXT NOT NULL,
    state                TEXT NOT NULL CHECK (state IN ('as-found', 'as-left')),
    t_utc                TEXT NOT NULL CHECK (t_utc GLOB '????-??-??T??:??:??*+00:00'),
    added_utc            TEXT NOT NULL,
    tool_version         TEXT NOT NULL,
    zero_N               REAL NOT NULL,
    zero_u_N             REAL NOT NULL CHECK (zero_u_N >= 0),
    span_pct             REAL NOT NULL,
    span_u_pct           REAL NOT NULL CHECK (span_u_pct >= 0),
    zero_span_cov_N_pct  REAL NOT NULL,
    loop_N               REAL CHECK (loop_N >= 0),
    noise_N              REAL CHECK (noise_N >= 0),
    temp_C               REAL,
    limit_span_pct       REAL NOT NULL CHECK (limit_span_pct > 0),
    limit_zero_N         REAL NOT NULL CHECK (limit_zero_N > 0),
    UNIQUE (session_sha256, calibration_sha256)
) STRICT;
CREATE INDEX checks_of_calibration ON checks (calibration_sha256, t_utc);
CREATE TABLE check_loads (
    check_id     INTEGER NOT NULL REFERENCES checks (id),
    step         INTEGER NOT NULL,
    direction    TEXT NOT NULL CHECK (direction IN ('zero', 'up', 'down')),
    load_N       REAL NOT NULL,
    reading_N    REAL NOT NULL,
    deviation_N  REAL NOT NULL,
    u_cal_N      REAL NOT NULL CHECK (u_cal_N >= 0),
    u_check_N    REAL NOT NULL CHECK (u_check_N >= 0),
    en           REAL NOT NULL,
    PRIMARY KEY (check_id, step)
) STRICT, WITHOUT ROWID;
"""
_TABLES_V1: Final = ("calibrations", "checks", "check_loads")


def append_only(tables: Sequence[str]) -> str:
    """Return the triggers that refuse every change and removal of a stored row."""
    return "".join(
        f"CREATE TRIGGER {table}_no_{verb.lower()} BEFORE {verb} ON {table} BEGIN "
        f"SELECT RAISE(ABORT, 'the history is append-only'); END;\n"
        for table in tables
        for verb in ("UPDATE", "DELETE")
    )


MIGRATIONS: Final[tuple[str, ...]] = (_V1 + append_only(_TABLES_V1),)  # from version k to k + 1


def migrate(connection: sqlite3.Connection, where: str, migrations: Sequence[str] = MIGRATIONS) -> None:
    """Bring a history to the newest form, all steps in one transaction; two programs may try at once.

    Args:
        connection: in autocommit mode (`isolation_level=None`).
        where: the file, for messages.
        migrations: scripts, the k-th leads from version k to k + 1.

    Raises:
        FileFormatError: the file is another program's, or of a newer version than this one knows.
    """
    if _version(connection, where, len(migrations)) == len(migrations):
        return
    connection.execute("BEGIN IMMEDIATE")
    try:
        version = _version(connection, where, len(migrations))  # the other writer may have been first
        for script in migrations[version:]:
            for statement in _statements(script):
                connection.execute(statement)
        connection.execute(f"PRAGMA user_version = {len(migrations)}")
        connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.execute("COMMIT")
    except BaseException:
        connection.execute("ROLLBACK")
        raise


def _version(connection: sqlite3.Connection, where: str, newest: int) -> int:
    version = int(connection.execute("PRAGMA user_version").fetchone()[0])
    owner = int(connection.execute("PRAGMA application_id").fetchone()[0])
    filled = connection.execute("SELECT count(*) FROM sqlite_master").fetchone()[0] > 0
    if filled and owner != APPLICATION_ID:
        raise FileFormatError(where=where, what="this SQLite file is no drift history", mend="Name another file.")
    if version > newest:
        raise FileFormatError(
            where=where,
            what=f"the history has version {version}, this footcal knows up to {newest}",
            mend="Install the footcal that wrote it.",
        )
    return version


def _statements(script: str) -> list[str]:
    statements, current = [], ""
    for line in script.splitlines():
        current += line + "\n"
        if sqlite3.complete_statement(current):
            statements.append(current)
            current = ""
    return statements
