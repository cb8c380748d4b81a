"""Truth to score against: the ground's force on each foot, from a force plate or a simulator."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Final

import numpy as np

from footcal.errors import SettingError
from footcal.files.columns import ColumnRules, expand_legs
from footcal.files.robot_log import check_times, missing_leg
from footcal.files.tables import read_table
from footcal.records import FloatArray

FRAMES: Final = ("body", "world")
_AXES: Final = ("fx_N", "fy_N", "fz_N")


@dataclass(frozen=True, slots=True, eq=False)
class Truth:
    """Ground reaction (of the ground on the foot) and contact of every leg, in the frame that is named."""

    legs: tuple[str, ...]
    frame: str  # body or world
    t_s: FloatArray  # (n,)
    force_N: FloatArray  # (n, legs, 3) in `frame`; NaN where the file does not tell
    contact: FloatArray  # (n, legs) 1 or 0; NaN where the file does not tell


def read_truth(
    path: str | os.PathLike[str],
    legs: Sequence[str],
    frame: str | None = None,
    columns: ColumnRules | None = None,
) -> Truth:
    """Return truth for the named legs (DESIGN §4, Truth). Turning world into body is left to whoever has the attitude.

    A leg may have `fz_N` alone, or `contact` alone; what is missing is NaN.

    Args:
        path: .csv, .csv.gz or .parquet with `t_s`, `<leg>.fx_N`, `fy_N`, `fz_N`, `<leg>.contact`.
        legs: in the order of the arrays.
        frame: body or world, where the file's metadata does not name it.
        columns: renames and scales, `{leg}` stands for every leg.

    Raises:
        FileFormatError: the file is missing, empty, cut or foreign; a leg has no column; text in a number; time runs
            backwards.
        SettingError: the frame is not known, unknown, or file and option differ.
    """
    path = Path(path)
    rules = expand_legs(columns or {}, legs)
    wanted = {"t_s", *(f"{leg}.{name}" for leg in legs for name in (*_AXES, "contact"))}
    table = read_table(path, rules=rules, only=wanted, required=("t_s",))
    t_s = np.array(table["t_s"], dtype=np.float64)
    check_times(path, t_s, -np.inf, 0)
    force_N = np.full((len(t_s), len(legs), 3), np.nan)
    contact = np.full((len(t_s), len(legs)), np.nan)
    for index, leg in enumerate(legs):
        there = [name for name in (*_AXES, "contact") if f"{leg}.{name}" in table]
        if not there:
            raise missing_leg(path, leg, table.attrs["names_in_file"])
        for name in there:
            values = np.asarray(table[f"{leg}.{name}"], dtype=np.float64)
            if name == "contact":
                contact[:, index] = np.where(np.isnan(values), np.nan, values > 0.5)
            else:
                force_N[:, index, _AXES.index(name)] = values
    return Truth(tuple(legs), _frame(path, table.attrs["metadata"].get("frame"), frame), t_s, force_N, contact)


def _frame(path: Path, in_file: str | None, option: str | None) -> str:
    for said, where in ((in_file, f"{path}, metadata 'frame'"), (option, "--frame")):
        if said is not None and said not in FRAMES:
            raise SettingError(where=where, what=f"{said!r} is neither body nor world", mend="Write one of the two.")
    if in_file and option and in_file != option:
        raise SettingError(
            where=str(path),
            what=f"the file says its forces are in the {in_file} frame, --frame says {option}",
            mend="Leave --frame out.",
        )
    said = in_file or option
    if said is None:
        raise SettingError(
            where=str(path),
            what="the frame of the forces is named neither in the file's metadata nor by an option",
            mend="Add --frame body or --frame world.",
        )
    return said
