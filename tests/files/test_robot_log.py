"""The robot's log, whole and in chunks."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from footcal.errors import FileFormatError, SettingError
from footcal.files.columns import ColumnRule
from footcal.files.robot_log import RobotLog, iter_robot_log, read_robot_log
from footcal.files.tables import SUFFIXES, write_table

LEGS, JOINTS = ("left", "right"), (3, 2)


def columns(rows: int = 100) -> dict[str, np.ndarray]:
    """Return a log of two legs in which every column holds other numbers."""
    rng = np.random.default_rng(7)
    names = [f"{leg}.{name}" for leg in LEGS for name in ("raw", "temp_C")]
    names += [f"left.{name}{j}" for name in ("q", "dq", "i", "motor_temp_C") for j in range(3)]
    names += [f"right.{name}{j}" for name in ("q", "dq", "i", "motor_temp_C") for j in range(2)]
    names += [f"imu.{name}" for name in ("qw", "qx", "qy", "qz", "wx", "wy", "wz", "ax", "ay", "az")]
    return {"t_s": np.arange(rows) / 1000} | {name: rng.normal(size=rows) for name in names}


@pytest.fixture(params=SUFFIXES)
def log_path(request: pytest.FixtureRequest, tmp_path: Path) -> Path:
    """Return the same log in each form of file."""
    path = tmp_path / f"log{request.param}"
    write_table(pd.DataFrame(columns()), path, {"t0_utc": "2031-04-02T09:30:00Z"})
    return path


def test_every_column_lands_in_its_place(log_path: Path) -> None:
    """Leg, joint and axis are the ones that the column's name says."""
    log, wanted = read_robot_log(log_path, LEGS, JOINTS), columns()
    np.testing.assert_array_equal(log.raw[:, 1], wanted["right.raw"])
    np.testing.assert_array_equal(log.temp_C[:, 0], wanted["left.temp_C"])
    np.testing.assert_array_equal(log.q_rad[:, 0, 2], wanted["left.q2"])
    np.testing.assert_array_equal(log.dq_rad_per_s[:, 1, 1], wanted["right.dq1"])
    np.testing.assert_array_equal(log.current_A[:, 1, 0], wanted["right.i0"])
    np.testing.assert_array_equal(log.motor_temp_C[:, 0, 1], wanted["left.motor_temp_C1"])
    np.testing.assert_array_equal(log.quat_WB[:, 0], wanted["imu.qw"])
    np.testing.assert_array_equal(log.gyro_B_rad_per_s[:, 2], wanted["imu.wz"])
    np.testing.assert_array_equal(log.accel_B_m_per_s2[:, 1], wanted["imu.ay"])
    assert log.metadata == {"t0_utc": "2031-04-02T09:30:00Z"}


def test_a_joint_that_a_leg_lacks_is_nan(log_path: Path) -> None:
    """The right leg has two joints, the array three."""
    assert np.isnan(read_robot_log(log_path, LEGS, JOINTS).q_rad[:, 1, 2]).all()


def test_chunks_together_are_the_whole(log_path: Path) -> None:
    """No chunk is longer than asked, none is empty, and no row is lost or doubled."""
    chunks = list(iter_robot_log(log_path, LEGS, JOINTS, rows=17))
    assert {len(chunk) for chunk in chunks} <= set(range(1, 18))
    np.testing.assert_array_equal(
        np.concatenate([chunk.q_rad for chunk in chunks]), read_robot_log(log_path, LEGS, JOINTS).q_rad
    )


def test_a_missing_column_is_a_sensor_that_is_not_there(tmp_path: Path) -> None:
    """It reads NaN; an empty cell is no new reading."""
    (tmp_path / "log.csv").write_text("t_s,a.raw\n0,\n1,5\n")
    log = read_robot_log(tmp_path / "log.csv", ["a"], [3])
    np.testing.assert_array_equal(log.raw[:, 0], [np.nan, 5.0])
    assert np.isnan(log.current_A).all()


def test_times_become_whole_nanoseconds(tmp_path: Path) -> None:
    """DESIGN §3: t_ns = round(t_s * 1e9). By hand: 0.0015 s are 1 500 000 ns."""
    (tmp_path / "log.csv").write_text("t_s,a.raw\n0,1\n0.0015,5\n")
    assert read_robot_log(tmp_path / "log.csv", ["a"], [0]).t_ns.tolist() == [0, 1_500_000]


def test_a_leg_without_any_column_is_refused_by_name(log_path: Path) -> None:
    """The message names the leg, the legs that are there, and the one that was meant."""
    with pytest.raises(FileFormatError, match=r"leg 'lefd'.*legs found: left, right.*Is 'left' meant"):
        read_robot_log(log_path, ["lefd"], [3])


def test_rules_rename_for_every_leg(tmp_path: Path) -> None:
    """`{leg}` stands for each leg; degrees become radians. By hand: 180 deg = pi rad."""
    (tmp_path / "log.csv").write_text("t_s,a_adc,b_adc,a_deg\n0,1,2,180\n")
    rules = {"{leg}.raw": ColumnRule("{leg}_adc"), "{leg}.q0": ColumnRule("{leg}_deg", scale=np.pi / 180)}
    log = read_robot_log(tmp_path / "log.csv", ["a", "b"], [1, 1], rules)
    assert log.raw.tolist() == [[1.0, 2.0]]
    assert log.q_rad[0, 0, 0] == pytest.approx(np.pi, rel=1e-15)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "empty"),
        ("t_s,a.raw\n", "no row of data"),
        ("time,a.raw\n0,1\n", "'t_s' is missing"),
        ("t_s,a.raw\n0,1\n1,x\n", r"line 3, column 'a\.raw': 'x'"),
        ("t_s,a.raw\n0,1\n,2\n", "line 3, column 't_s'"),
        ("t_s,a.raw\n0,1\n2,1\n1,1\n", "line 4.*backwards: 1 s after 2 s"),
        ("t_s,a.raw\n0,1\n1\n", "line 3: 1 cells where"),
    ],
)
def test_a_bad_log_is_refused_with_its_place(tmp_path: Path, text: str, message: str) -> None:
    """File, line and column stand in the message."""
    (tmp_path / "log.csv").write_text(text)
    with pytest.raises(FileFormatError, match=message):
        read_robot_log(tmp_path / "log.csv", ["a"], [0])


def test_a_step_back_between_two_chunks_is_seen(tmp_path: Path) -> None:
    """The last time of a chunk is remembered, and the row is counted over the whole file."""
    (tmp_path / "log.csv").write_text("t_s,a.raw\n0,1\n2,1\n1,1\n")
    with pytest.raises(FileFormatError, match="line 4"):
        list(iter_robot_log(tmp_path / "log.csv", ["a"], [0], rows=2))


def test_text_in_a_later_chunk_of_parquet_is_named_by_its_row(tmp_path: Path) -> None:
    """Rows are counted over the whole file."""
    pd.DataFrame({"t_s": [0.0, 1.0, 2.0], "a.raw": ["1", "2", "x"]}).to_parquet(tmp_path / "log.parquet")
    with pytest.raises(FileFormatError, match=r"row 3, column 'a\.raw'"):
        list(iter_robot_log(tmp_path / "log.parquet", ["a"], [0], rows=2))


@pytest.mark.parametrize("suffix", [".csv.gz", ".parquet"])
def test_a_cut_log_is_always_a_file_error(tmp_path: Path, suffix: str) -> None:
    """Cut at some hundred places, a packed log is refused in one way."""
    write_table(pd.DataFrame(columns(rows=5)), tmp_path / f"log{suffix}")
    whole = (tmp_path / f"log{suffix}").read_bytes()
    for size in range(0, len(whole), max(1, len(whole) // 150)):
        (tmp_path / f"cut{suffix}").write_bytes(whole[:size])
        with pytest.raises(FileFormatError):
            read_robot_log(tmp_path / f"cut{suffix}", LEGS, JOINTS)


def test_a_log_in_a_form_that_is_not_supported_says_what_is(tmp_path: Path) -> None:
    """The message tells which forms are read."""
    with pytest.raises(SettingError, match=r"\.parquet, \.csv or \.csv\.gz"):
        read_robot_log(tmp_path / "log.mcap", ["a"], [0])


def test_a_long_csv_is_read_in_pieces(tmp_path: Path) -> None:
    """A file of several blocks of bytes gives the rows in order, in chunks of bounded length."""
    rows = 250_000
    write_table(
        pd.DataFrame({"t_s": np.arange(rows) / 1000, "a.raw": np.arange(rows) + 0.123456789}), tmp_path / "l.csv"
    )
    assert (tmp_path / "l.csv").stat().st_size > 4 << 20  # more than one block of the reader
    chunks: list[RobotLog] = list(iter_robot_log(tmp_path / "l.csv", ["a"], [0], rows=60_000))
    assert max(len(chunk) for chunk in chunks) <= 60_000
    assert np.concatenate([chunk.raw[:, 0] for chunk in chunks]).tolist() == [k + 0.123456789 for k in range(rows)]
