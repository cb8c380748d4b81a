"""From a log file to an estimate file or stream: checked first, then block by block in bounded memory."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import IO

from footcal.errors import FileFormatError
from footcal.files.columns import ColumnRule
from footcal.files.robot_log import RobotLog, iter_robot_log
from footcal.fusion.engine import Fusion
from footcal.fusion.estimate import EstimateColumns
from footcal.fusion.estimate_files import estimate_writer, write_json_lines
from footcal.leg import Robot
from footcal.records import health_words

Progress = Callable[[float], None]


@dataclass(frozen=True, slots=True)
class FuseSummary:
    """What a run was."""

    rows: int
    duration_s: float
    dropped: int  # rows that were not later than the one before
    contacts: dict[str, int]  # touchdowns a leg
    health: dict[str, list[str]]  # words of every bit seen, a leg


def log_blocks(robot: Robot, path: str | Path) -> Iterator[RobotLog]:
    """Yield a robot's log block by block, columns renamed and scaled as its description says.

    Raises:
        FileFormatError: the log lacks a leg, the foot column of a calibrated leg, or an encoder column.
    """
    rules = {name: ColumnRule(rule.name, rule.scale, rule.offset) for name, rule in robot.columns().items()}
    for number, block in enumerate(iter_robot_log(path, robot.leg_names, robot.joint_counts, rules)):
        if number == 0:
            _check_columns(robot, path, block)
        yield block


def _check_columns(robot: Robot, path: str | Path, block: RobotLog) -> None:
    """Refuse a log in which a column that the description promises says nothing in the whole first block."""
    import numpy as np

    for l, leg in enumerate(robot.legs):
        wanted = [(f"{leg.name}.q{j}", block.q_rad[:, l, j]) for j in range(len(leg.joints))]
        if leg.calibration is not None:
            wanted.append((f"{leg.name}.raw", block.raw[:, l]))
        for name, values in wanted:
            if not np.isfinite(values).any() and len(block) > 1:
                raise FileFormatError(
                    where=f"{path}, column {name!r}",
                    what="the column is missing, or empty in the whole first minute",
                    mend="Log it, map it in [columns] of the robot description, or take the part out of it.",
                )


def fuse_to_file(fusion: Fusion, log: str | Path, out: str | Path, progress: Progress | None = None) -> FuseSummary:
    """Write the estimate of a whole log; the file appears only once all is written.

    Args:
        fusion: in its power-up state.
        log: .parquet, .csv or .csv.gz.
        out: .parquet or .csv.
        progress: told the seconds of log done.
    """
    tally = _Tally(fusion)
    with estimate_writer(out, fusion.digests()) as writer:
        for block in log_blocks(fusion.robot, log):
            estimate = fusion.run(block)
            writer.write(estimate)
            tally.add(estimate, progress)
    return tally.summary()


def fuse_to_lines(fusion: Fusion, log: str | Path, out: IO[bytes], progress: Progress | None = None) -> FuseSummary:
    """Write the estimate as JSON lines to an open stream, block by block."""
    tally = _Tally(fusion)
    for block in log_blocks(fusion.robot, log):
        estimate = fusion.run(block)
        write_json_lines(estimate, out)
        out.flush()
        tally.add(estimate, progress)
    return tally.summary()


class _Tally:
    """Counts what went through."""

    def __init__(self, fusion: Fusion) -> None:
        self._fusion = fusion
        self._rows, self._first_s, self._last_s = 0, 0.0, 0.0
        self._contacts = dict.fromkeys(fusion.robot.leg_names, 0)
        self._health = dict.fromkeys(fusion.robot.leg_names, 0)

    def add(self, estimate: EstimateColumns, progress: Progress | None) -> None:
        import numpy as np

        if self._rows == 0:
            self._first_s = float(estimate.t_s[0])
        self._rows += len(estimate)
        self._last_s = float(estimate.t_s[-1])
        for l, leg in enumerate(estimate.legs):
            self._contacts[leg] += int((estimate.event[:, l] == 1).sum())
            self._health[leg] |= int(np.bitwise_or.reduce(estimate.health[:, l]))
        if progress is not None:
            progress(self._last_s - self._first_s)

    def summary(self) -> FuseSummary:
        return FuseSummary(
            rows=self._rows,
            duration_s=self._last_s - self._first_s,
            dropped=self._fusion.dropped,
            contacts=self._contacts,
            health={leg: health_words(bits) for leg, bits in self._health.items()},
        )
