"""A raw log of one foot turned into newtons, chunk by chunk, so that an hour's log needs little memory."""

from __future__ import annotations

import os
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final

import numpy as np

from footcal.calfile.calibration import Calibration
from footcal.calfile.tare import Tare, find_tare
from footcal.files.blocks import open_blocks
from footcal.files.columns import ColumnRule
from footcal.files.places import broken_as_file_error, missing_column
from footcal.files.robot_log import RobotLog, iter_robot_log
from footcal.files.writer import streamed_table
from footcal.records import FloatArray, Health
from footcal.sensor.compensator import ForceColumns

ALONE: Final = "foot"  # what a log of one foot calls its leg: its columns have no name before a dot


@dataclass(slots=True)
class ConvertSummary:
    """What was converted, counted as the chunks go by."""

    foot_id: str
    tare: Tare | None
    samples: int = 0
    sum_N: float = 0.0
    min_N: float = np.inf
    max_N: float = -np.inf
    u_max_N: float = 0.0
    u_medians_N: list[float] = field(default_factory=list)
    flags: Counter[str] = field(default_factory=Counter)

    def add(self, columns: ForceColumns) -> None:
        """Count one chunk."""
        known = np.isfinite(columns.force_N)
        self.samples += len(columns.t_s)
        if known.any():
            self.sum_N += float(columns.force_N[known].sum())
            self.min_N = min(self.min_N, float(columns.force_N[known].min()))
            self.max_N = max(self.max_N, float(columns.force_N[known].max()))
            self.u_max_N = max(self.u_max_N, float(columns.u_N[known].max()))
            self.u_medians_N.append(float(np.median(columns.u_N[known])))
        for flag in Health:
            count = int(np.count_nonzero(columns.flags & flag))
            if count and flag.name:
                self.flags[flag.name.lower()] += count

    def document(self) -> dict[str, Any]:
        """Return the summary as plain values; null where nothing was read."""
        return {
            "foot_id": self.foot_id,
            "samples": self.samples,
            "min_N": self.min_N,
            "mean_N": self.sum_N / max(self.samples, 1),
            "max_N": self.max_N,
            "u_median_N": float(np.median(self.u_medians_N)) if self.u_medians_N else float("nan"),
            "u_max_N": self.u_max_N,
            "tare_raw": self.tare.raw if self.tare else 0.0,
            "tare_N": self.tare.shift_N if self.tare else 0.0,
            "flags": dict(self.flags),
        }


def convert_log(
    calibration: Calibration,
    log: str | os.PathLike[str],
    out: str | os.PathLike[str],
    *,
    leg: str | None = None,
    tare_s: float = 0.0,
    on_share: Callable[[float], None] = lambda _: None,
) -> ConvertSummary:
    """Write t_s, force_N, u_N, flags for every row of a log.

    Args:
        calibration: of the foot.
        log: .parquet, .csv or .csv.gz with t_s, raw and temp_C, or <leg>.raw and <leg>.temp_C.
        out: file to write; it appears whole or not at all.
        leg: leg whose columns to take; None for a log of one foot alone.
        tare_s: take the first seconds, unloaded and at rest, as zero; 0 for none.
        on_share: called with the share of the rows done so far, where that is known.

    Raises:
        FileFormatError: the log is missing, cut, or lacks a column; the message names it.
        SettingError: the tare is refused, or a file form is not supported.
    """
    path = Path(log)
    rules = {} if leg else {f"{ALONE}.raw": ColumnRule("raw"), f"{ALONE}.temp_C": ColumnRule("temp_C")}
    name = leg or ALONE
    _check_raw(path, f"{leg}.raw" if leg else "raw")
    tare = _tare(calibration, path, name, rules, tare_s) if tare_s > 0.0 else None
    compensator = calibration.compensator()
    compensator.tare_raw = tare.raw if tare else 0.0
    summary = ConvertSummary(calibration.foot_id, tare)
    zero_flag = 0 if tare else int(Health.ZERO_UNCONFIRMED)
    metadata = {"footcal.calibration_sha256": calibration.digest, "footcal.foot_id": calibration.foot_id}
    rows = _row_count(path)
    with streamed_table(out, metadata) as append:
        for chunk in iter_robot_log(path, [name], [0], rules):
            found = compensator.run(chunk.t_ns, chunk.raw[:, 0], chunk.temp_C[:, 0])
            columns = ForceColumns(chunk.t_s, found.force_N, found.u_N, found.flags | zero_flag)
            append({"t_s": columns.t_s, "force_N": columns.force_N, "u_N": columns.u_N, "flags": columns.flags})
            summary.add(columns)
            if rows:
                on_share(summary.samples / rows)
    return summary


def _check_raw(path: Path, wanted: str) -> None:
    with broken_as_file_error(path):
        names = open_blocks(path).names
    if wanted not in names:
        raise missing_column(path, wanted, names)


def _row_count(path: Path) -> int | None:
    if not path.name.lower().endswith(".parquet"):
        return None
    from pyarrow import parquet

    return int(parquet.read_metadata(path).num_rows)


def _tare(calibration: Calibration, path: Path, name: str, rules: dict[str, ColumnRule], tare_s: float) -> Tare:
    """Read only as much of the log as the tare needs."""
    chunks: list[RobotLog] = []
    for chunk in iter_robot_log(path, [name], [0], rules):
        chunks.append(chunk)
        if chunk.t_s[-1] > chunks[0].t_s[0] + tare_s:
            break

    def column(attribute: str) -> FloatArray:
        return np.concatenate([np.asarray(getattr(chunk, attribute)).reshape(len(chunk)) for chunk in chunks])

    t_s = column("t_s")
    early = t_s <= t_s[0] + tare_s
    return find_tare(
        calibration,
        column("t_ns")[early].astype(np.int64),
        column("raw")[early],
        column("temp_C")[early],
        f"{path}, first {tare_s:g} s",
    )
