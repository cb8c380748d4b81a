"""robot.toml: what is read, and how every wrong value is named."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from footcal.errors import FileFormatError, SettingError
from footcal.leg.description import Robot
from footcal.leg.transmission import ratio_nodes

GOOD = """
robot_id = "demo"
mass_kg = 18.0
mass_u_kg = 0.05
gravity_m_per_s2 = 9.81
[imu]
xyz_m = [0.05, 0.0, 0.02]
rpy_rad = [0.0, 0.0, 1.5707963]
[[leg]]
name = "front_left"
calibration = "SP-0031.cal.json"
[[leg.joint]]
name = "thigh"
axis = [0.0, 1.0, 0.0]
xyz_m = [0.2, 0.1, 0.0]
mass_kg = 0.8
com_m = [0.0, 0.0, -0.1]
inertia_kg_m2 = [0.003, 0.003, 0.001, 0.0, 0.0, 0.0]
kv_rpm_per_V = 100.0
transmission = { kind = "ratio", ratio = 7.2 }
friction = { coulomb_Nm = 0.4, load_share = 0.1 }
[[leg.joint]]
name = "knee"
axis = [0.0, 1.0, 0.0]
xyz_m = [0.0, 0.0, -0.2]
encoder_sign = -1
mass_kg = 0.3
kt_Nm_per_A = 0.05
transmission = { kind = "table", q_rad = [-2.0, -1.0, -0.2], ratio = [9.0, 8.0, 8.5] }
friction = { coulomb_Nm = 0.3 }
[leg.foot]
xyz_m = [0.0, 0.0, -0.2]
sensor_axis = [0.0, 0.0, 1.0]
distal_mass_kg = 0.1
sample_rate_Hz = 80.0
[columns]
"{leg}.raw" = "{leg}_counts"
"front_left.i0" = { name = "fl_hip_mA", scale = 0.001 }
[source.bus]
kind = "udp"
port = 9870
[fusion]
balance = true
"""


def load(folder: Path, text: str) -> Robot:
    """Write the text and read it as a robot."""
    path = folder / "robot.toml"
    path.write_text(text, encoding="utf-8")
    return Robot.load(path)


def test_description_is_read_as_written(tmp_path: Path) -> None:
    """Every table arrives, with defaults where nothing was said."""
    robot = load(tmp_path, GOOD)

    assert (robot.robot_id, robot.leg_names, robot.joint_counts, robot.padded_joints) == (
        "demo",
        ("front_left",),
        (2,),
        3,
    )
    assert robot.weight_N == pytest.approx(176.58)  # by hand
    assert robot.leg("front_left").joints[1].encoder_sign == -1
    assert robot.file.sources["bus"]["port"] == 9870
    assert robot.file.fusion["balance"] is True


def test_paths_are_relative_to_the_description(tmp_path: Path) -> None:
    """A calibration lies beside robot.toml unless its path says otherwise; an unnamed drive file is none."""
    robot = load(tmp_path, GOOD)

    assert robot.calibration_path("front_left") == tmp_path / "SP-0031.cal.json"
    assert robot.drive_path("front_left") is None


def test_column_of_every_leg_is_spelled_out(tmp_path: Path) -> None:
    """`{leg}` stands for each leg's name in key and name; a full key carries its own scale."""
    columns = load(tmp_path, GOOD).columns()

    assert columns["front_left.raw"].name == "front_left_counts"
    assert (columns["front_left.i0"].name, columns["front_left.i0"].scale) == ("fl_hip_mA", 0.001)


def test_digest_changes_with_a_value_but_not_with_a_comment(tmp_path: Path) -> None:
    """The digest is that of the content."""
    digest = load(tmp_path, GOOD).digest

    assert load(tmp_path, GOOD + "# a remark\n").digest == digest
    assert load(tmp_path, GOOD.replace("mass_kg = 18.0", "mass_kg = 18.1")).digest != digest


def test_table_of_ratios_passes_through_its_points(tmp_path: Path) -> None:
    """The nodes of a table have the given ratio where they meet a given angle."""
    nodes = ratio_nodes(load(tmp_path, GOOD).leg("front_left").joints[1])

    assert (nodes.first_rad, nodes.ratio[0], nodes.ratio[-1]) == pytest.approx((-2.0, 9.0, 8.5))


WRONG = [  # what is changed, into what, where the error must point, what it must say
    ("mass_kg = 18.0", "mass_kg = -1.0", "robot.toml, mass_kg", "greater than 0"),
    ("mass_kg = 18.0", 'mass_kg = "18"', "robot.toml, mass_kg", "number"),
    ("mass_kg = 18.0", "mass_kg = 1.0", "robot.toml", "links weigh 1.1 kg"),
    ("mass_kg = 18.0", "mass_kg = nan", "robot.toml, mass_kg", "finite number"),
    ('robot_id = "demo"\n', "", "robot.toml, robot_id", "required"),
    ('name = "front_left"', 'name = "front left"', "robot.toml, leg[0].name", "pattern"),
    (
        "axis = [0.0, 1.0, 0.0]\nxyz_m = [0.0",
        "axis = [0.0, 2.0, 0.0]\nxyz_m = [0.0",
        "robot.toml, leg[0].joint[1]",
        "length 2",
    ),
    (
        "axis = [0.0, 1.0, 0.0]\nxyz_m = [0.0",
        "axis = [0.0, 1.0]\nxyz_m = [0.0",
        "robot.toml, leg[0].joint[1].axis[2]",
        "required",
    ),
    ("kt_Nm_per_A = 0.05", "kt_nm_per_a = 0.05", "robot.toml, leg[0].joint[1]", "Did you mean 'kt_Nm_per_A'?"),
    ("kt_Nm_per_A = 0.05", "kt_Nm_per_A = 0.05\nkv_rpm_per_V = 90", "robot.toml, leg[0].joint[1]", "both given"),
    ("ratio = 7.2", "ratio = 0.0", "robot.toml, leg[0].joint[0].transmission.ratio", "greater than 0"),
    ('kind = "ratio"', 'kind = "gear"', "robot.toml, leg[0].joint[0].transmission", "gear"),
    ("[-2.0, -1.0, -0.2]", "[-2.0, -2.0, -0.2]", "robot.toml, leg[0].joint[1].transmission", "does not rise"),
    ("[9.0, 8.0, 8.5]", "[9.0, 8.0]", "robot.toml, leg[0].joint[1].transmission", "3 angles but 2 ratios"),
    ("friction = { coulomb_Nm = 0.3 }\n", "", "robot.toml, leg[0]", "no friction"),
    (
        "[0.003, 0.003, 0.001, 0.0, 0.0, 0.0]",
        "[0.003, 0.001, 0.001, 0.0, 0.0, 0.0]",
        "leg[0].joint[0]",
        "belongs to no body",
    ),
    ("distal_mass_kg = 0.1", "distal_mass_kg = 0.5", "robot.toml, leg[0]", "exceeds the last link's mass"),
    ('name = "knee"', 'name = "thigh"', "robot.toml, leg[0]", "stands twice"),
    ("encoder_sign = -1", "encoder_sign = 2", "robot.toml, leg[0].joint[1].encoder_sign", "1 or -1"),
    ("gravity_m_per_s2 = 9.81", "gravity_m_per_s2 = 981.0", "robot.toml, gravity_m_per_s2", "less than 10"),
    ('"{leg}.raw"', '"raw of leg"', "robot.toml", "no column of a robot log"),
    ("calibration =", "actuator_matrix = [[1.0, 0.0], [1.0, 0.0]]\ncalibration =", "robot.toml, leg[0]", "no inverse"),
    ("calibration =", "actuator_matrix = [[1.0]]\ncalibration =", "robot.toml, leg[0]", "not square"),
]


@pytest.mark.parametrize(("old", "new", "where", "what"), WRONG, ids=[f"{new[:40]!r}" for _, new, _, _ in WRONG])
def test_wrong_value_is_named_with_its_path(tmp_path: Path, old: str, new: str, where: str, what: str) -> None:
    """The error says the place in the file, what is wrong there, and how to mend it."""
    assert GOOD.count(old) == 1
    with pytest.raises(FileFormatError) as caught:
        load(tmp_path, GOOD.replace(old, new))

    assert where in caught.value.where
    assert what in str(caught.value)
    assert caught.value.mend


def test_missing_file_is_said(tmp_path: Path) -> None:
    """A path to nothing."""
    with pytest.raises(FileFormatError, match="no such file"):
        Robot.load(tmp_path / "robot.toml")


def test_broken_toml_names_the_line(tmp_path: Path) -> None:
    """A line that makes no sense is named as the parser counts it."""
    with pytest.raises(FileFormatError, match=r"line 3"):
        load(tmp_path, 'robot_id = "demo"\nmass_kg = 18.0\nimu = = 1\n')


@settings(max_examples=60, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(cut=st.integers(0, len(GOOD) - 1))
def test_cut_description_is_read_or_refused_in_words(tmp_path: Path, cut: int) -> None:
    """However a file is cut, the reader gives a robot or an error of the project's own."""
    found: str
    try:
        found = load(tmp_path, GOOD[:cut]).robot_id
    except FileFormatError as error:
        found = error.mend

    assert found
    assert found == "demo" or found.endswith((".", "?"))


def test_screw_with_a_dead_centre_in_its_range_is_refused(tmp_path: Path) -> None:
    """Where the lever arm vanishes the current tells nothing: the joint is named."""
    anchors = "anchor_base_m = [0.0, 0.0, 0.1], anchor_link_m = [0.0, 0.0, -0.05]"
    screw = f'{{ kind = "screw", lead_m = 0.004, {anchors}, range_rad = [-1.0, 1.0] }}'
    robot = load(tmp_path, GOOD.replace('{ kind = "ratio", ratio = 7.2 }', screw))

    with pytest.raises(SettingError, match=r"joint thigh.*dead centre"):
        ratio_nodes(robot.leg("front_left").joints[0])
