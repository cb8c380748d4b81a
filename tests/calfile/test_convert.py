"""Logs to newtons, and the tare."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from footcal.calfile import Calibration
from footcal.calfile.convert import convert_log
from footcal.calfile.tare import find_tare
from footcal.errors import FileFormatError, SettingError
from footcal.fit.engine import fit_sessions
from footcal.records import Health
from footcal.sim.bench import run_session
from footcal.sim.sensors import draw_sensor
from footcal.sim.trials import stance_trial
from tests.simulated import as_session


@cache
def foot() -> tuple[Calibration, pd.DataFrame]:
    """A calibrated cheap cell and its walk on another day."""
    rng = np.random.default_rng(120)
    sensor = draw_sensor("B", rng)
    result = fit_sessions([as_session(run_session(sensor, rng, parts=("cycles", "quick")))])
    trial = stance_trial(sensor.day(rng), rng, lasts_s=10.0)
    return result.calibration, pd.DataFrame({"t_s": trial.t_s, "raw": trial.raw, "temp_C": trial.temp_C})


def test_a_log_is_converted_row_by_row(tmp_path: Path) -> None:
    """One row out for each row in, with the four columns."""
    calibration, log = foot()
    log.to_parquet(tmp_path / "raw.parquet")
    convert_log(calibration, tmp_path / "raw.parquet", tmp_path / "force.parquet")
    force = pd.read_parquet(tmp_path / "force.parquet")
    assert list(force.columns) == ["t_s", "force_N", "u_N", "flags"]
    assert force["t_s"].to_numpy() == pytest.approx(log["t_s"].to_numpy())


def test_csv_and_parquet_give_the_same_bits(tmp_path: Path) -> None:
    """The form of the log does not matter."""
    calibration, log = foot()
    log.to_parquet(tmp_path / "raw.parquet")
    log.to_csv(tmp_path / "raw.csv", index=False)
    forces = []
    for name in ("raw.parquet", "raw.csv"):
        convert_log(calibration, tmp_path / name, tmp_path / "force.parquet")
        forces.append(pd.read_parquet(tmp_path / "force.parquet")["force_N"].to_numpy().tobytes())
    assert forces[0] == forces[1]


def test_a_leg_of_a_robot_log_is_chosen_by_name(tmp_path: Path) -> None:
    """The same samples under a leg's name give the same bits."""
    calibration, log = foot()
    log.to_parquet(tmp_path / "raw.parquet")
    named = log.rename(columns={"raw": "rear_left.raw", "temp_C": "rear_left.temp_C"})
    named.to_parquet(tmp_path / "robot.parquet")
    convert_log(calibration, tmp_path / "raw.parquet", tmp_path / "one.parquet")
    convert_log(calibration, tmp_path / "robot.parquet", tmp_path / "two.parquet", leg="rear_left")
    assert (tmp_path / "one.parquet").read_bytes() == (tmp_path / "two.parquet").read_bytes()


def test_a_tare_brings_the_unloaded_foot_to_zero(tmp_path: Path) -> None:
    """The mean of the stretch is zero to a thousandth of a newton."""
    calibration, log = foot()
    log.to_parquet(tmp_path / "raw.parquet")
    convert_log(calibration, tmp_path / "raw.parquet", tmp_path / "force.parquet", tare_s=4.0)
    force = pd.read_parquet(tmp_path / "force.parquet")
    assert force.loc[force["t_s"] <= 4.0, "force_N"].mean() == pytest.approx(0.0, abs=1e-3)


def test_without_a_tare_every_sample_says_that_the_zero_is_unconfirmed(tmp_path: Path) -> None:
    """zero_unconfirmed stands until something confirms it."""
    calibration, log = foot()
    log.to_parquet(tmp_path / "raw.parquet")
    convert_log(calibration, tmp_path / "raw.parquet", tmp_path / "force.parquet")
    flags = pd.read_parquet(tmp_path / "force.parquet")["flags"].to_numpy()
    assert np.all(flags & Health.ZERO_UNCONFIRMED)


def test_a_tare_under_load_is_refused() -> None:
    """A loaded foot must not be called zero."""
    calibration, _ = foot()
    model = calibration.sensor_model
    loaded = np.full(50, model.u_zero + 0.5 * (model.u_span - model.u_zero))
    with pytest.raises(SettingError, match="it is loaded"):
        find_tare(calibration, np.arange(1, 51) * 10_000_000, loaded, np.full(50, 22.0), "log")


def test_a_missing_column_is_named_and_nothing_is_written(tmp_path: Path) -> None:
    """The message names the column; no half file is left."""
    calibration, log = foot()
    log.drop(columns="raw").to_parquet(tmp_path / "raw.parquet")
    with pytest.raises(FileFormatError, match="raw"):
        convert_log(calibration, tmp_path / "raw.parquet", tmp_path / "force.parquet")
    assert sorted(path.name for path in tmp_path.iterdir()) == ["raw.parquet"]


def test_a_log_that_breaks_half_way_leaves_the_old_result_alone(tmp_path: Path) -> None:
    """Time running backwards in the last row: the file written before is still there, whole."""
    calibration, log = foot()
    log.to_csv(tmp_path / "good.csv", index=False)
    convert_log(calibration, tmp_path / "good.csv", tmp_path / "force.parquet")
    before = (tmp_path / "force.parquet").read_bytes()
    bad = log.copy()
    bad.loc[len(bad) - 1, "t_s"] = 0.0
    bad.to_csv(tmp_path / "bad.csv", index=False)
    with pytest.raises(FileFormatError, match="backwards"):
        convert_log(calibration, tmp_path / "bad.csv", tmp_path / "force.parquet")
    assert (tmp_path / "force.parquet").read_bytes() == before
