"""From log file to estimate: the engine's numbers, logs that lack something refused, a closed pipe is no error."""

from __future__ import annotations

import io
import subprocess
import sys
from pathlib import Path

import numpy as np
import orjson
import pandas as pd
import pytest

from footcal.errors import FileFormatError
from footcal.fusion.engine import Fusion
from footcal.fusion.estimate_files import read_estimate
from footcal.fusion.runs import fuse_to_file, fuse_to_lines
from footcal.sim.gait import simulate
from tests.fusion.ideal import ideal_calibration, log_of


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with robot.toml, four ideal feet and 1.2 s of walk."""
    place = tmp_path_factory.mktemp("walk")
    run = simulate("walk", "belt", 1.2, 5)
    (place / "robot.toml").write_text(run.robot_toml, encoding="utf-8")
    for number in range(1, 5):
        ideal_calibration(f"SIM-{number:04d}").save(place / f"SIM-{number:04d}.cal.json")
    pd.DataFrame(run.log).to_parquet(place / "log.parquet")
    return place


def test_a_fused_file_holds_what_the_engine_gives(folder: Path, tmp_path: Path) -> None:
    """File to file: one row a row, the engine's numbers, digests of robot and feet in the metadata."""
    fusion = Fusion.load(folder / "robot.toml")
    summary = fuse_to_file(fusion, folder / "log.parquet", tmp_path / "estimate.parquet")
    frame = pd.read_parquet(folder / "log.parquet")
    log = log_of({str(name): frame[name].to_numpy() for name in frame}, fusion.robot)
    direct = Fusion.load(folder / "robot.toml").run(log)
    found = read_estimate(tmp_path / "estimate.parquet", fusion.robot.leg_names)
    assert summary.rows == len(found) == 1200
    assert np.array_equal(found.force_B_N, direct.force_B_N)
    assert np.array_equal(found.t_event_s, direct.t_event_s, equal_nan=True)
    assert fusion.digests()["front_left.foot_id"] == "SIM-0001"


def test_json_lines_tell_the_same_as_the_file(folder: Path, tmp_path: Path) -> None:
    """The stream holds the file's numbers, row by row."""
    out = io.BytesIO()
    fuse_to_lines(Fusion.load(folder / "robot.toml"), folder / "log.parquet", out)
    fuse_to_file(Fusion.load(folder / "robot.toml"), folder / "log.parquet", tmp_path / "estimate.parquet")
    frame = pd.read_parquet(tmp_path / "estimate.parquet")
    lines = [orjson.loads(line) for line in out.getvalue().splitlines()]
    assert len(lines) == len(frame)
    assert lines[900]["rear_left.fz_N"] == frame["rear_left.fz_N"][900]


@pytest.mark.parametrize("column", ["rear_left.raw", "front_right.q1"])
def test_a_log_without_a_needed_column_is_refused_by_name(folder: Path, tmp_path: Path, column: str) -> None:
    """A calibrated foot or an encoder that the log lacks is an error; nothing is written."""
    pd.read_parquet(folder / "log.parquet").drop(columns=column).to_parquet(tmp_path / "log.parquet")
    with pytest.raises(FileFormatError, match=column):
        fuse_to_file(Fusion.load(folder / "robot.toml"), tmp_path / "log.parquet", tmp_path / "estimate.parquet")
    assert not (tmp_path / "estimate.parquet").exists()


def test_a_log_without_a_leg_is_refused_by_name(folder: Path, tmp_path: Path) -> None:
    """A leg of the description that the log lacks is an error that names it."""
    frame = pd.read_parquet(folder / "log.parquet")
    frame.drop(columns=[name for name in frame if name.startswith("rear_right.")]).to_parquet(tmp_path / "log.parquet")
    with pytest.raises(FileFormatError, match="rear_right"):
        fuse_to_file(Fusion.load(folder / "robot.toml"), tmp_path / "log.parquet", tmp_path / "estimate.parquet")


def test_a_reader_that_goes_away_is_no_error(folder: Path) -> None:
    """JSON lines into a pipe that is closed after one line: exit code 0, nothing on stderr."""
    arguments = ["fuse", "--robot", str(folder / "robot.toml"), "--from", str(folder / "log.parquet"), "--to", "-"]
    command = [sys.executable, "-c", f"from footcal.cli.main import run; run({arguments!r})"]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        assert process.stdout is not None
        assert process.stderr is not None
        first = process.stdout.readline()
        process.stdout.close()
        assert orjson.loads(first)["t_s"] == 0.0
        assert process.wait(timeout=240) == 0
        assert process.stderr.read() == b""
