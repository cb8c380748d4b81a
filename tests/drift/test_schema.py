"""The history's tables and how they are brought up to date."""

from __future__ import annotations

import sqlite3
from pathlib import Path

import pytest

from footcal.drift.schema import APPLICATION_ID, MIGRATIONS, append_only, migrate
from footcal.errors import FileFormatError


def opened(path: Path) -> sqlite3.Connection:
    """Return a connection in autocommit mode."""
    return sqlite3.connect(path, isolation_level=None)


def version(connection: sqlite3.Connection) -> int:
    """Return the version that the file says it has."""
    return int(connection.execute("PRAGMA user_version").fetchone()[0])


def test_a_new_file_gets_the_newest_version_and_our_mark(tmp_path: Path) -> None:
    """Version and application id are set."""
    connection = opened(tmp_path / "h")
    migrate(connection, "h")
    assert version(connection) == len(MIGRATIONS)
    assert connection.execute("PRAGMA application_id").fetchone()[0] == APPLICATION_ID


def test_an_older_history_is_brought_up_to_date_and_keeps_its_rows(tmp_path: Path) -> None:
    """A step that a later version might bring is applied to a filled file, once."""
    connection = opened(tmp_path / "h")
    migrate(connection, "h")
    connection.execute("INSERT INTO calibrations VALUES ('c', 'SP-1', 'cell', 500.0)")
    later = (*MIGRATIONS, "CREATE TABLE wear (foot_id TEXT) STRICT;\n" + append_only(["wear"]))
    for _ in range(2):  # the second time there is nothing left to do
        migrate(connection, "h", later)
    assert version(connection) == len(MIGRATIONS) + 1
    assert connection.execute("SELECT foot_id FROM calibrations").fetchall() == [("SP-1",)]
    connection.execute("INSERT INTO wear VALUES ('SP-1')")
    with pytest.raises(sqlite3.IntegrityError, match="append-only"):
        connection.execute("DELETE FROM wear")


def test_a_step_that_fails_leaves_the_file_as_it_was(tmp_path: Path) -> None:
    """All steps are one transaction."""
    connection = opened(tmp_path / "h")
    migrate(connection, "h")
    with pytest.raises(sqlite3.OperationalError):
        migrate(
            connection, "h", (*MIGRATIONS, "CREATE TABLE wear (foot_id TEXT);\nCREATE TABLE wear (foot_id TEXT);\n")
        )
    assert version(connection) == len(MIGRATIONS)
    assert not connection.execute("SELECT * FROM sqlite_master WHERE name = 'wear'").fetchall()


def test_a_newer_history_is_refused(tmp_path: Path) -> None:
    """Its version is told."""
    connection = opened(tmp_path / "h")
    migrate(connection, "h")
    connection.execute("PRAGMA user_version = 99")
    with pytest.raises(FileFormatError, match="version 99"):
        migrate(connection, "h")


def test_the_file_of_another_program_is_refused(tmp_path: Path) -> None:
    """A SQLite file without our mark is left alone."""
    connection = opened(tmp_path / "h")
    connection.execute("CREATE TABLE songs (title TEXT)")
    with pytest.raises(FileFormatError, match="no drift history"):
        migrate(connection, "h")
    assert connection.execute("SELECT name FROM sqlite_master").fetchall() == [("songs",)]
