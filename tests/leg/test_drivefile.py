"""The drive file: round trip, digest, refusals, and its use in the step."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from footcal.errors import FileFormatError
from footcal.leg.description import Robot
from footcal.leg.drivefile import DriveFile, load_drives
from footcal.leg.schema import RobotFile
from tests.leg.robots import planar_leg, single
from tests.leg.test_step import STANDING
from tests.leg.ticks import run


def joint(name: str, **changes: Any) -> dict[str, Any]:
    """An identified joint."""
    figures = {
        "name": name,
        "kt_Nm_per_A": 0.11,
        "coulomb_Nm": 0.5,
        "breakaway_Nm": 0.6,
        "stribeck_rad_per_s": 0.08,
        "viscous_Nms_per_rad": 0.02,
        "load_share": 0.12,
        "current_offset_A": 0.1,
        "current_noise_A": 0.05,
        "delay_s": 0.0015,
        "lag_s": 0.005,
        "u": {"kt_Nm_per_A": 0.0011, "coulomb_Nm": 0.02},
        "observable_share": 0.4,
        "covariance_keys": ["kt_Nm_per_A", "coulomb_Nm"],
        "covariance": [[1.21e-6, 0.0], [0.0, 4e-4]],
    }
    return {**figures, **changes}


def drive(**changes: Any) -> DriveFile:
    """The drive file of the planar leg."""
    content = {
        "robot_id": "test",
        "leg": "one",
        "made_utc": "2031-04-02T10:00:00Z",
        "tool_version": "0.1.0",
        "temp_C": 35.0,
        "joints": [joint("hip"), joint("knee")],
    }
    return DriveFile.model_validate({**content, **changes})


def test_drive_file_comes_back_as_written(tmp_path: Path) -> None:
    """Writing and reading loses nothing."""
    path = tmp_path / "one.drive.json"

    drive().save(path)

    assert DriveFile.load(path) == drive()
    assert json.loads(path.read_text())["sha256"] == drive().digest


def test_changed_figure_breaks_the_digest(tmp_path: Path) -> None:
    """A file edited by hand is refused."""
    path = tmp_path / "one.drive.json"
    drive().save(path)
    path.write_text(path.read_text().replace("0.11", "0.12", 1))

    with pytest.raises(FileFormatError, match="digest does not fit"):
        DriveFile.load(path)


def test_unknown_version_is_refused(tmp_path: Path) -> None:
    """A file of a later form is not guessed at."""
    path = tmp_path / "one.drive.json"
    drive(version=2).save(path)

    with pytest.raises(FileFormatError, match="version 2"):
        DriveFile.load(path)


def test_breakaway_below_coulomb_is_named_with_its_path(tmp_path: Path) -> None:
    """A value out of range says where it stands, although the digest fits."""
    path = tmp_path / "one.drive.json"
    wrong = drive().model_copy(
        update={"joints": (drive().joints[0].model_copy(update={"breakaway_Nm": 0.1}), drive().joints[1])}
    )
    wrong.save(path)

    with pytest.raises(FileFormatError, match=r"joints\[0\]: breakaway_Nm 0.1 lies below coulomb_Nm 0.5"):
        DriveFile.load(path)


@settings(max_examples=40, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(share=st.floats(0.0, 0.999))
def test_cut_file_is_always_refused(tmp_path: Path, share: float) -> None:
    """A file cut anywhere is no drive file."""
    path = tmp_path / "one.drive.json"
    drive().save(path)
    text = path.read_text().rstrip()
    path.write_text(text[: int(share * len(text))])

    with pytest.raises(FileFormatError):
        DriveFile.load(path)


def test_drive_of_another_leg_is_refused(tmp_path: Path) -> None:
    """The description names a file whose joints are not the leg's."""
    drive(joints=[joint("hip"), joint("ankle")]).save(tmp_path / "one.drive.json")
    content = single(planar_leg(drive="one.drive.json")).file.model_dump(by_alias=True)
    robot = Robot(RobotFile.model_validate(content), tmp_path / "robot.toml")

    with pytest.raises(FileFormatError, match="hip, ankle; leg 'one' has hip, knee"):
        load_drives(robot)


def test_step_uses_what_was_identified() -> None:
    """Torque constant, offset, noise and lag come from the drive file, at its temperature."""
    found = run(single(planar_leg()), STANDING, ticks=10, drive=drive())

    # By hand: 7 * 0.11 Nm/A * (1 - 0.1, -2 - 0.1) A; 0.77 * 0.05 A; 1.5 + 5 ms.
    assert found["tau_meas_Nm"][-1, :2] == pytest.approx([0.693, -1.617], abs=1e-12)
    assert found["tau_noise_Nm"][-1, 0] == pytest.approx(0.0385, abs=1e-12)
    assert found["tau_lag_s"][-1, 0] == pytest.approx(0.0065, abs=1e-12)
