"""The folder of a bench session: what was read, what was put on, and who says so."""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Final

import numpy as np
import pandas as pd

from footcal.errors import FileFormatError, SessionError
from footcal.files.atomic import replacing
from footcal.files.columns import ColumnRules
from footcal.files.digest import sha256_files
from footcal.files.places import place_of
from footcal.files.session_meta import SessionDefaults, SessionMeta, filled, meta_from_mapping, meta_text
from footcal.files.session_steps import COLUMNS, REQUIRED_COLUMNS, TEXT_COLUMNS, no_steps, normal_steps
from footcal.files.tables import SUFFIXES, read_table, write_table
from footcal.files.toml_text import read_toml
from footcal.records import NS_PER_S, SENSOR_GAP_NS, FloatArray, IntArray

MEMBERS: Final = ("readings", "steps", "reference", "temperature")
_MOST_CHANNELS: Final = 64


@dataclass(frozen=True, slots=True, eq=False)
class Session:
    """One bench session of one foot, checked and in one form."""

    folder: Path | None  # None: made in memory
    meta: SessionMeta
    t_s: FloatArray  # (n,) never decreasing
    raw: FloatArray  # (n,), or (n, channels) where the sensor has raw0, raw1, …
    temp_C: FloatArray  # (n,) at the sensor, interpolated onto t_s; NaN everywhere without a thermometer
    ref_N: FloatArray | None  # (n,) reference cell sampled alongside, NaN where it had no new reading
    reference: tuple[FloatArray, FloatArray] | None  # t_ref_s (m,), ref_N (m,): reference cell at its own rate
    steps: pd.DataFrame  # columns of session_steps.COLUMNS; no rows for a pump recording
    digest: str = ""  # SHA-256 over the files read; empty for a session made in memory

    @property
    def name(self) -> str:
        """What to call the session in tables and messages."""
        return self.folder.name if self.folder else self.meta.foot_id or "session"

    def set_of(self, t_s: FloatArray) -> IntArray:
        """Return which set, from 0, each time belongs to: a new one starts after a gap of > 60 s in the readings."""
        gap_s = SENSOR_GAP_NS / NS_PER_S
        starts_s = self.t_s[1:][np.diff(self.t_s) > gap_s]
        return np.searchsorted(starts_s, t_s, side="right").astype(np.int64)


def read_session(folder: str | os.PathLike[str], defaults: SessionDefaults | None = None) -> Session:
    """Return a session folder's content (DESIGN §4, Session): CSV, gzipped CSV or Parquet, `session.toml` optional.

    `steps` may be missing where a reference cell was recorded (a pump recording).

    Args:
        folder: holds readings, and optionally steps, reference, temperature and session.toml.
        defaults: what options or a recipe say where session.toml is silent; its `columns` rename and scale.

    Raises:
        FileFormatError: a file is missing, cut or foreign, a column is missing, a cell is wrong, time runs backwards,
            a step lies outside the readings; the message names file, row and column.
        SettingError: an option contradicts the session or is out of range.
        SessionError: there are neither steps nor a reference.
    """
    folder, defaults = Path(folder), defaults or SessionDefaults()
    if not folder.is_dir():
        raise FileFormatError(
            where=str(folder), what="no such session folder", mend="Name the folder that holds readings.csv."
        )
    paths = {member: _member(folder, member) for member in MEMBERS}
    toml = folder / "session.toml"
    meta = meta_from_mapping(read_toml(toml), str(toml)) if toml.exists() else SessionMeta()
    meta = filled(meta, defaults, folder)
    used = [path for path in (*paths.values(), toml) if path and path.exists()]
    tables = {member: _read_member(path, member, defaults.columns) for member, path in paths.items() if path}
    if "readings" not in tables:
        raise FileFormatError(
            where=f"{folder}",
            what="there is no readings.csv",
            mend="Name a session folder; readings.csv, .csv.gz or .parquet hold it.",
        )

    def place(member: str) -> Callable[[int], str]:
        path = paths[member]
        return lambda row: place_of(path, row) if path else member

    return _session(folder, meta, tables, place, sha256_files(used))


def session_from_tables(
    meta: SessionMeta,
    readings: pd.DataFrame,
    steps: pd.DataFrame | None = None,
    *,
    reference: pd.DataFrame | None = None,
    temperature: pd.DataFrame | None = None,
) -> Session:
    """Return a session made in memory (a simulation, a journal), under the same checks as one read from a folder.

    Args:
        meta: identity and conditions.
        readings: columns t_s, raw (or raw0, raw1, …), optionally temp_C, ref_N.
        steps: columns of `steps.csv`.
        reference: columns t_ref_s, ref_N.
        temperature: columns t_s, temp_C.

    Raises:
        FileFormatError: as for `read_session`; rows are counted from 1.
        SessionError: there are neither steps nor a reference.
    """
    given = {"readings": readings, "steps": steps, "reference": reference, "temperature": temperature}
    tables = {member: table for member, table in given.items() if table is not None}
    return _session(None, meta, tables, lambda member: lambda row: f"{member}, row {row + 1}", "")


def write_session(session: Session, folder: str | os.PathLike[str], suffix: str = ".csv") -> None:
    """Write a session as a folder that `read_session` gives back unchanged; each file appears whole.

    Args:
        session: what to write.
        folder: made where missing; files of the same names are replaced, session.toml comes last.
        suffix: .csv, .csv.gz or .parquet.

    Raises:
        SettingError: the folder can't be written, or holds a member in another form already.
    """
    folder = Path(folder)
    raw = session.raw.reshape(len(session.t_s), -1)
    names = ["raw"] if session.raw.ndim == 1 else [f"raw{channel}" for channel in range(raw.shape[1])]
    readings = {"t_s": session.t_s, **dict(zip(names, raw.T, strict=True))}
    if not np.isnan(session.temp_C).all():
        readings["temp_C"] = session.temp_C
    if session.ref_N is not None:
        readings["ref_N"] = session.ref_N
    tables = {"readings": pd.DataFrame(readings)}
    if len(session.steps):
        tables["steps"] = session.steps
    if session.reference is not None:
        tables["reference"] = pd.DataFrame(dict(zip(("t_ref_s", "ref_N"), session.reference, strict=True)))
    for member, table in tables.items():
        write_table(table, folder / f"{member}{suffix}")
    with replacing(folder / "session.toml") as temporary:
        temporary.write_text(meta_text(session.meta), encoding="utf-8")


def _member(folder: Path, member: str) -> Path | None:
    found = [folder / f"{member}{suffix}" for suffix in SUFFIXES if (folder / f"{member}{suffix}").exists()]
    if len(found) > 1:
        raise FileFormatError(
            where=str(folder),
            what=f"both {found[0].name} and {found[1].name} are there",
            mend="Delete or move one of them.",
        )
    return found[0] if found else None


def _read_member(path: Path, member: str, rules: ColumnRules) -> pd.DataFrame:
    if member == "steps":
        ours = {name: rule for name, rule in rules.items() if name not in {"t_s", "raw", "temp_C", "ref_N"}}
        wanted = {*COLUMNS, "void_of"}
        return read_table(path, required=REQUIRED_COLUMNS, text=TEXT_COLUMNS, rules=ours, only=wanted)
    if member == "readings":
        wanted = {"t_s", "temp_C", "ref_N", "raw", *(f"raw{channel}" for channel in range(_MOST_CHANNELS))}
        return read_table(path, required=("t_s",), rules=rules, only=wanted)
    required = {"reference": ("t_ref_s", "ref_N"), "temperature": ("t_s", "temp_C")}[member]
    return read_table(path, required=required, rules=rules, only=required, full=required)


def _session(
    folder: Path | None,
    meta: SessionMeta,
    tables: dict[str, pd.DataFrame],
    place: Callable[[str], Callable[[int], str]],
    digest: str,
) -> Session:
    readings = tables["readings"]
    at = place("readings")
    t_s, raw = _times(readings, "t_s", at), _raw(readings, at)
    ref_N = _column(readings, "ref_N") if "ref_N" in readings else None
    reference = None
    if "reference" in tables:
        reference = (_times(tables["reference"], "t_ref_s", place("reference")), _column(tables["reference"], "ref_N"))
    if "steps" in tables:
        _check_load_columns(tables["steps"], place("steps"))
        steps = normal_steps(tables["steps"], t_s, place("steps"))
    elif ref_N is None and reference is None:
        raise SessionError(
            where=str(folder or "session"),
            what="there are neither steps nor readings of a reference cell, so no load is known",
            mend="Add steps.csv, or a column ref_N to the readings.",
        )
    else:
        steps = no_steps()
    temp_C = _temperature(t_s, readings, tables.get("temperature"), place)
    return Session(folder, meta, t_s, raw, temp_C, ref_N, reference, steps, digest)


def _raw(readings: pd.DataFrame, at: Callable[[int], str]) -> FloatArray:
    columns = [str(name) for name in readings.columns]
    channels = sorted((n for n in columns if n[:3] == "raw" and n[3:].isdigit()), key=lambda name: int(name[3:]))
    names = ["raw"] if "raw" in columns else channels
    if not names:
        raise FileFormatError(
            where=at(0).rsplit(",", 1)[0] + ", header",
            what=f"column 'raw' is missing (found: {', '.join(columns)})",
            mend="Rename the column, or map it in [columns] of the recipe.",
        )
    for name in names:
        _refuse(~np.isfinite(_column(readings, name)), name, "the cell is empty, NaN or infinite", at)
    values = readings[names].to_numpy(dtype=np.float64, copy=True)
    return values[:, 0] if names == ["raw"] else values


def _times(table: pd.DataFrame, name: str, at: Callable[[int], str]) -> FloatArray:
    t_s = _column(table, name)
    _refuse(~np.isfinite(t_s), name, "the cell is empty, NaN or infinite", at)
    back = np.concatenate([[False], np.diff(t_s) < 0])
    if back.any():
        row = int(np.argmax(back))
        raise FileFormatError(
            where=f"{at(row)}, column {name!r}",
            what=f"time runs backwards: {t_s[row]:.9g} s after {t_s[row - 1]:.9g} s",
            mend="Sort the rows by time, or split the recording where the clock was set.",
        )
    return t_s


def _refuse(bad: np.ndarray, name: str, what: str, at: Callable[[int], str]) -> None:
    if bad.any():
        row = int(np.argmax(bad))
        raise FileFormatError(where=f"{at(row)}, column {name!r}", what=what, mend="Fill the cell or delete the row.")


def _column(table: pd.DataFrame, name: str) -> FloatArray:
    return np.array(table[name].to_numpy(), dtype=np.float64)


def _check_load_columns(steps: pd.DataFrame, at: Callable[[int], str]) -> None:
    if "mass_kg" not in steps and "load_N" not in steps:
        raise FileFormatError(
            where=at(0).rsplit(",", 1)[0] + ", header",
            what="neither column 'mass_kg' nor 'load_N' is there",
            mend="Add what was put on, in kilograms or newtons.",
        )


def _temperature(
    t_s: FloatArray,
    readings: pd.DataFrame,
    temperature: pd.DataFrame | None,
    place: Callable[[str], Callable[[int], str]],
) -> FloatArray:
    if temperature is not None:
        t_known_s, known_C = _times(temperature, "t_s", place("temperature")), _column(temperature, "temp_C")
    elif "temp_C" in readings:
        column = _column(readings, "temp_C")
        t_known_s, known_C = t_s[np.isfinite(column)], column[np.isfinite(column)]
    else:
        return np.full_like(t_s, np.nan)
    return np.interp(t_s, t_known_s, known_C) if len(t_known_s) else np.full_like(t_s, np.nan)
