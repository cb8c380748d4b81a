"""The engine: one row a log row, replay equal to live, snapshots, ticks that come twice, gaps."""

from __future__ import annotations

from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import pytest

from footcal.errors import FileFormatError, SettingError
from footcal.files.robot_log import RobotLog
from footcal.fusion.engine import Fusion, load_calibrations
from footcal.leg import Robot
from footcal.records import Health, Tick
from footcal.sim.gait import SimulatedRun, simulate
from tests.fusion.ideal import ideal_calibration, ideal_fusion, log_of, robot_of


@pytest.fixture(scope="module")
def trot() -> SimulatedRun:
    """A short trot on ideal feet."""
    return simulate("trot", "belt", 1.5, 3)


@pytest.fixture(scope="module")
def robot(trot: SimulatedRun, tmp_path_factory: pytest.TempPathFactory) -> Robot:
    """The robot of that trot."""
    return robot_of(trot, tmp_path_factory.mktemp("robot"))


@pytest.fixture(scope="module")
def log(trot: SimulatedRun, robot: Robot) -> RobotLog:
    """Its log."""
    return log_of(trot.log, robot)


def part_of(log: RobotLog, rows: slice) -> RobotLog:
    """Return some rows of a log."""
    arrays = {
        field.name: getattr(log, field.name)[rows]
        for field in fields(RobotLog)
        if field.name not in {"legs", "joints", "metadata"}
    }
    return replace(log, **arrays)


def tick_of(log: RobotLog, row: int) -> Tick:
    """Return one row as a tick."""
    return Tick(
        t_ns=int(log.t_ns[row]),
        raw=log.raw[row],
        temp_C=log.temp_C[row],
        q_rad=log.q_rad[row],
        dq_rad_per_s=log.dq_rad_per_s[row],
        current_A=log.current_A[row],
        motor_temp_C=log.motor_temp_C[row],
        quat_WB=log.quat_WB[row],
        gyro_B_rad_per_s=log.gyro_B_rad_per_s[row],
        accel_B_m_per_s2=log.accel_B_m_per_s2[row],
    )


def test_there_is_exactly_one_row_a_log_row(robot: Robot, log: RobotLog) -> None:
    """Rows and times of the estimate are those of the log."""
    estimate = ideal_fusion(robot).run(log)
    assert np.array_equal(estimate.t_s, log.t_s)
    assert estimate.force_B_N.shape == (len(log), 4, 3)


def test_replay_equals_live_bit_for_bit(robot: Robot, log: RobotLog) -> None:
    """The columns of a whole run hold the very numbers that the ticks gave one by one."""
    columns = ideal_fusion(robot).run(log)
    live = ideal_fusion(robot)
    for row in range(len(log)):
        told = live.step(tick_of(log, row))
        assert [leg.force_B_N for leg in told] == [tuple(force) for force in columns.force_B_N[row]]
        assert [leg.cov_B_N2 for leg in told] == [tuple(cov) for cov in columns.cov_B_N2[row]]
        assert [leg.p_contact for leg in told] == list(columns.p_contact[row])
        assert [(leg.contact, leg.event, int(leg.health)) for leg in told] == [
            (bool(c), e, h)
            for c, e, h in zip(columns.contact[row], columns.event[row], columns.health[row], strict=True)
        ]


def test_a_run_in_blocks_equals_the_whole_run(robot: Robot, log: RobotLog) -> None:
    """Blocks of a log, one after another, give the very rows of the whole."""
    whole = ideal_fusion(robot).run(log)
    fusion = ideal_fusion(robot)
    blocks = [fusion.run(part_of(log, slice(start, start + 400))) for start in range(0, len(log), 400)]
    assert np.array_equal(np.concatenate([block.force_B_N for block in blocks]), whole.force_B_N)
    assert np.array_equal(np.concatenate([block.health for block in blocks]), whole.health)


def test_a_restored_snapshot_goes_on_as_if_nothing_had_happened(robot: Robot, log: RobotLog) -> None:
    """State taken out after 700 rows and put into a new engine gives the same 300 rows more."""
    first = ideal_fusion(robot)
    first.run(part_of(log, slice(0, 700)))
    state = first.snapshot()
    second = ideal_fusion(robot)
    second.restore(state)
    a, b = (fusion.run(part_of(log, slice(700, 1000))) for fusion in (first, second))
    assert np.array_equal(a.force_B_N, b.force_B_N)
    assert np.array_equal(a.p_contact, b.p_contact)


def test_a_snapshot_of_another_length_is_refused(robot: Robot) -> None:
    """Bytes that are no state of this robot are an error that says both lengths."""
    with pytest.raises(SettingError, match="3 bytes"):
        ideal_fusion(robot).restore(b"abc")


def test_a_row_that_comes_twice_is_answered_with_the_last_estimate_marked_stale(robot: Robot, log: RobotLog) -> None:
    """The same time again: counted, the estimate repeated with STALE and no event, and nothing else disturbed."""
    twice = np.sort(np.concatenate([np.arange(600), [300]]))
    fields_twice = {
        field.name: getattr(log, field.name)[twice]
        for field in fields(RobotLog)
        if field.name not in {"legs", "joints", "metadata"}
    }
    fusion = ideal_fusion(robot)
    estimate = fusion.run(replace(log, **fields_twice))
    plain = ideal_fusion(robot).run(part_of(log, slice(0, 600)))
    assert fusion.dropped == 1
    assert np.array_equal(estimate.force_B_N[301], estimate.force_B_N[300])
    assert (estimate.health[301] & int(Health.STALE) != 0).all()
    assert not estimate.event[301].any()
    assert np.array_equal(np.delete(estimate.force_B_N, 301, axis=0), plain.force_B_N)


def test_each_leg_gets_its_own_contact(tmp_path: Path) -> None:
    """In a walk every leg steps at its own time: each estimate agrees best with its own leg's truth."""
    run = simulate("walk", "belt", 3.0, 4)
    robot = robot_of(run, tmp_path)
    estimate = ideal_fusion(robot).run(log_of(run.log, robot))
    truth = np.stack([run.truth[f"{leg}.contact"] for leg in robot.leg_names], axis=1)
    agreement = [[float(np.mean(estimate.contact[:, a] == truth[:, b])) for b in range(4)] for a in range(4)]
    assert [int(np.argmax(row)) for row in agreement] == [0, 1, 2, 3]


def test_a_missing_foot_leaves_the_leg_to_its_motors(robot: Robot, log: RobotLog) -> None:
    """Without calibration the foot is named uncalibrated, and torques alone still tell a standing leg's force."""
    calibrations = [None, *(ideal_calibration(f"SIM-{k:04d}") for k in (2, 3, 4))]
    estimate = Fusion(robot, calibrations).run(log)
    assert (estimate.health[:, 0] & int(Health.UNCALIBRATED) != 0).all()
    assert not (estimate.health[:, 1] & int(Health.UNCALIBRATED)).any()
    assert np.isnan(estimate.axial_N[:, 0]).all()
    assert np.isfinite(estimate.force_B_N).all()


def test_a_calibration_of_another_foot_is_refused(robot: Robot) -> None:
    """A file that is named for one foot and holds another is refused, with both serial numbers."""
    folder = robot.path.parent
    for number in (1, 2, 3, 4):
        ideal_calibration("SIM-0007" if number == 2 else f"SIM-{number:04d}").save(
            folder / f"SIM-{number:04d}.cal.json"
        )
    with pytest.raises(FileFormatError, match=r"SIM-0002.*SIM-0007"):
        load_calibrations(robot)


def test_a_wrong_number_of_calibrations_is_refused(robot: Robot) -> None:
    """Three calibrations for four legs are an error."""
    with pytest.raises(SettingError, match="3 given for 4 legs"):
        Fusion(robot, [None] * 3)


def test_a_setting_that_does_not_exist_is_refused(robot: Robot, tmp_path: Path) -> None:
    """A misspelt name in [fusion] is an error that names it and lists what there is."""
    path = tmp_path / "robot.toml"
    text = robot.path.read_text(encoding="utf-8")
    path.write_text(text + "\n[fusion]\nswing_tau = 0.004\n", encoding="utf-8")
    with pytest.raises(SettingError, match=r"swing_tau.*swing_tau_s"):
        ideal_fusion(Robot.load(path))
