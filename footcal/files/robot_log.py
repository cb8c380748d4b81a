"""The robot's log: every leg's readings against time, whole or in chunks of bounded memory."""

from __future__ import annotations

import os
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Final

import numpy as np
import pyarrow as pa

from footcal.errors import FileFormatError, SettingError
from footcal.files.blocks import open_blocks
from footcal.files.columns import ColumnRules, expand_legs, sources
from footcal.files.places import broken_as_file_error, missing_column, near, place_of
from footcal.files.tables import check_suffix, to_float64
from footcal.records import NS_PER_S, FloatArray, IntArray

CHUNK_ROWS: Final = 60_000  # one minute at 1 kHz
_LEG_COLUMNS: Final = {"raw": "raw", "temp_C": "temp_C"}  # name in the file after "<leg>." -> field of RobotLog
_JOINT_COLUMNS: Final = {"q": "q_rad", "dq": "dq_rad_per_s", "i": "current_A", "motor_temp_C": "motor_temp_C"}
_IMU_COLUMNS: Final = {
    "quat_WB": ("imu.qw", "imu.qx", "imu.qy", "imu.qz"),
    "gyro_B_rad_per_s": ("imu.wx", "imu.wy", "imu.wz"),
    "accel_B_m_per_s2": ("imu.ax", "imu.ay", "imu.az"),
}


@dataclass(frozen=True, slots=True, eq=False)
class RobotLog:
    """Rows of a robot log (DESIGN §4). NaN: no new reading, or no such sensor. J = the most joints a leg has."""

    legs: tuple[str, ...]
    joints: tuple[int, ...]  # of each leg; columns of a shorter leg beyond its own are NaN
    t_s: FloatArray  # (n,) from the start of the log, never decreasing
    raw: FloatArray  # (n, legs) foot sensors, as the sensor gives it
    temp_C: FloatArray  # (n, legs) at the foot sensors
    q_rad: FloatArray  # (n, legs, J) as sent: encoder sign and offset not yet applied
    dq_rad_per_s: FloatArray  # (n, legs, J)
    current_A: FloatArray  # (n, legs, J)
    motor_temp_C: FloatArray  # (n, legs, J)
    quat_WB: FloatArray  # (n, 4) w, x, y, z: body to world
    gyro_B_rad_per_s: FloatArray  # (n, 3) IMU frame as sent
    accel_B_m_per_s2: FloatArray  # (n, 3) specific force, +g up at rest, IMU frame as sent
    metadata: Mapping[str, str]

    def __len__(self) -> int:
        return len(self.t_s)

    @property
    def t_ns(self) -> IntArray:
        """Time as the step sees it, shape (n,): whole nanoseconds."""
        return np.rint(self.t_s * NS_PER_S).astype(np.int64)


def read_robot_log(
    path: str | os.PathLike[str],
    legs: Sequence[str],
    joints: Sequence[int],
    columns: ColumnRules | None = None,
) -> RobotLog:
    """Return a whole log; for long ones take `iter_robot_log`. Arguments and errors are the same."""
    chunks = list(iter_robot_log(path, legs, joints, columns))
    if len(chunks) == 1:
        return chunks[0]
    arrays = {
        field.name: np.concatenate([getattr(chunk, field.name) for chunk in chunks])
        for field in fields(RobotLog)
        if field.name not in {"legs", "joints", "metadata"}
    }
    return RobotLog(tuple(legs), tuple(joints), metadata=chunks[0].metadata, **arrays)


def iter_robot_log(
    path: str | os.PathLike[str],
    legs: Sequence[str],
    joints: Sequence[int],
    columns: ColumnRules | None = None,
    rows: int = CHUNK_ROWS,
) -> Iterator[RobotLog]:
    """Yield a log in chunks of at most `rows` rows, so that memory stays bounded however long it is.

    Args:
        path: .parquet, .csv or .csv.gz. Only the columns that are used are read.
        legs: names of the legs, in the order of the arrays.
        joints: number of joints of each leg.
        columns: our column name (`{leg}` stands for every leg) -> name, scale and offset in the file.
        rows: most rows of a chunk.

    Raises:
        FileFormatError: the file is missing, empty, cut or foreign; no `t_s`; text in a number; time runs backwards;
            a leg has none of its columns. The message names row and column, or the leg.
        SettingError: a form of file that is not supported.
    """
    path = Path(path)
    if path.name.lower().endswith(".mcap"):
        raise SettingError(
            where=str(path),
            what="logs in .mcap are not supported by this version",
            mend="Convert it to .parquet, .csv or .csv.gz with the columns of the README.",
        )
    check_suffix(path)
    rules = expand_legs(columns or {}, legs)
    with broken_as_file_error(path):
        table = open_blocks(path)
        origin = _used(path, table.names, legs, joints, rules)
        first_row, last_s = 0, -np.inf
        for block in table.blocks({name: ours for ours, name in origin.items()}, rows):
            for start in range(0, block.num_rows, rows):
                part = block.slice(start, rows)
                columns_read = {
                    ours: _column(path, ours, name, part, rules, first_row) for ours, name in origin.items()
                }
                check_times(path, columns_read["t_s"], last_s, first_row)
                first_row, last_s = first_row + part.num_rows, float(columns_read["t_s"][-1])
                yield _log(columns_read, tuple(legs), tuple(joints), table.metadata)
    if not first_row:
        raise FileFormatError(
            where=str(path), what="there is a header but no row of data", mend="Record or export it again."
        )


def check_times(path: Path, t_s: FloatArray, last_s: float, first_row: int) -> None:
    """Refuse a chunk of times with an empty cell or a step back.

    Args:
        path: the file, for the message.
        t_s: shape (n,), seconds.
        last_s: last time of the chunk before; -inf for the first.
        first_row: row of the file, from 0, where the chunk starts.

    Raises:
        FileFormatError: names the row.
    """
    back = np.diff(t_s, prepend=last_s if np.isfinite(last_s) else t_s[:1]) < 0
    bad = ~np.isfinite(t_s) | back
    if bad.any():
        row = int(np.argmax(bad))
        what = "the cell is empty, NaN or infinite"
        if np.isfinite(t_s[row]):
            what = f"time runs backwards: {t_s[row]:.9g} s after {(t_s[row - 1] if row else last_s):.9g} s"
        raise FileFormatError(
            where=f"{place_of(path, first_row + row)}, column 't_s'",
            what=what,
            mend="Sort the rows by time, or split the log where the clock was set.",
        )


def _used(
    path: Path, names: Sequence[str], legs: Sequence[str], joints: Sequence[int], rules: ColumnRules
) -> dict[str, str]:
    origin = sources(names, rules)
    if "t_s" not in origin:
        raise missing_column(path, rules["t_s"].name if "t_s" in rules else "t_s", names, "robot description")
    ours = {"t_s", *(name for group in _IMU_COLUMNS.values() for name in group)}
    for leg, count in zip(legs, joints, strict=True):
        of_leg = {f"{leg}.{name}" for name in _LEG_COLUMNS}
        of_leg |= {f"{leg}.{name}{joint}" for name in _JOINT_COLUMNS for joint in range(count)}
        if not of_leg & set(origin):
            raise missing_leg(path, leg, list(origin))
        ours |= of_leg
    return {name: file_name for name, file_name in origin.items() if name in ours}


def missing_leg(path: Path, leg: str, names: Sequence[str]) -> FileFormatError:
    """Return the error for a leg of which a file has no column, with the legs that it has."""
    there = sorted({name.split(".", 1)[0] for name in names if "." in name} - {"imu"})
    meant = near(leg, there)
    return FileFormatError(
        where=f"{path}, header",
        what=f"no column of leg {leg!r} is there (legs found: {', '.join(there) or 'none'})",
        mend=f"{f'Is {meant!r} meant? ' if meant else ''}Correct the leg's name, or map its columns in [columns].",
    )


def _column(path: Path, ours: str, name: str, part: pa.Table, rules: ColumnRules, first_row: int) -> FloatArray:
    values = to_float64(path, ours, part.column(name), first_row)
    rule = rules.get(ours)
    return rule.apply(values) if rule and rule.name == name else values


def _log(
    read: Mapping[str, FloatArray], legs: tuple[str, ...], joints: tuple[int, ...], metadata: Mapping[str, str]
) -> RobotLog:
    rows = len(read["t_s"])

    def filled(shape: tuple[int, ...], at: Mapping[tuple[int, ...], str]) -> FloatArray:
        array = np.full((rows, *shape), np.nan)
        for index, name in at.items():
            if name in read:
                key: tuple[slice | int, ...] = (slice(None), *index)
                array[key] = read[name]
        return array

    number, most = len(legs), max(joints, default=0)
    of_legs = {
        field: filled((number,), {(i,): f"{leg}.{name}" for i, leg in enumerate(legs)})
        for name, field in _LEG_COLUMNS.items()
    }
    of_joints = {
        field: filled(
            (number, most),
            {(i, j): f"{leg}.{name}{j}" for i, leg in enumerate(legs) for j in range(joints[i])},
        )
        for name, field in _JOINT_COLUMNS.items()
    }
    of_body = {
        field: filled((len(names),), {(k,): name for k, name in enumerate(names)})
        for field, names in _IMU_COLUMNS.items()
    }
    return RobotLog(legs, joints, read["t_s"], metadata=metadata, **of_legs, **of_joints, **of_body)
