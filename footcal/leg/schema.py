"""What `robot.toml` may hold: one frozen record a table, every value checked once, here.

Signs. A joint angle is `encoder_sign * (reading - encoder_offset_rad)`, so the offset is what the encoder reads at
joint angle zero. A current counts positive when it drives the encoder reading upwards. With `actuator_matrix` M the
encoders sit on the actuators: actuator angles = M @ joint angles, joint torques = M.T @ actuator torques.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Annotated, Any, Literal

import numpy as np
from pydantic import Field, field_validator, model_validator

from footcal.leg.problems import Table, refuse

Number = Annotated[float, Field(strict=True)]  # a number in quotes is refused
Vec3 = tuple[Number, Number, Number]
Positive = Annotated[float, Field(gt=0.0, strict=True)]
NotNegative = Annotated[float, Field(ge=0.0, strict=True)]
Name = Annotated[str, Field(pattern=r"^[A-Za-z][A-Za-z0-9_]*$")]
MAX_JOINTS = 6


def unit_vector(name: str, vector: Vec3) -> None:
    """Refuse a direction whose length is not 1 within 1e-3."""
    length = float(np.linalg.norm(vector))
    if not abs(length - 1.0) <= 1e-3:
        shown = [round(v / length, 6) for v in vector] if length > 0.0 else [0.0, 1.0, 0.0]
        refuse("direction", f"{name} has length {length:g}, must be 1", f"Write it as a unit vector, such as {shown}.")


class RatioTransmission(Table):
    """A fixed reduction: motor turns per joint turn."""

    kind: Literal["ratio"]
    ratio: Positive


class ScrewTransmission(Table):
    """A screw between two anchor points; its lever arm, and so the ratio, varies with the angle."""

    kind: Literal["screw"]
    lead_m: Positive  # travel of the nut for one turn of the screw
    anchor_base_m: Vec3  # on the part before the joint, in the joint frame at angle zero
    anchor_link_m: Vec3  # on the link after the joint, in the joint frame
    range_rad: tuple[Number, Number]  # joint angles the leg can reach
    ratio: Positive = 1.0  # of a belt or gear between motor and screw: motor turns per screw turn

    @model_validator(mode="after")
    def _range_rises(self) -> ScrewTransmission:
        rising("range_rad", self.range_rad)
        return self


class TableTransmission(Table):
    """A linkage given as a table: joint angle against ratio."""

    kind: Literal["table"]
    q_rad: Annotated[tuple[Number, ...], Field(min_length=2)]
    ratio: Annotated[tuple[Positive, ...], Field(min_length=2)]

    @model_validator(mode="after")
    def _same_length_rising(self) -> TableTransmission:
        if len(self.q_rad) != len(self.ratio):
            found = f"{len(self.q_rad)} angles but {len(self.ratio)} ratios"
            refuse("lengths", found, "Give one ratio for each angle.")
        rising("q_rad", self.q_rad)
        return self


Transmission = Annotated[RatioTransmission | ScrewTransmission | TableTransmission, Field(discriminator="kind")]


def rising(name: str, values: tuple[float, ...]) -> None:
    """Refuse values that do not rise from each to the next."""
    if not bool(np.all(np.diff(values) > 0.0)):
        refuse("order", f"{name} does not rise from value to value", "Sort it; no value may stand twice.")


class Friction(Table):
    """What is known of a joint's friction before its drive is identified; joint side."""

    coulomb_Nm: NotNegative
    viscous_Nms_per_rad: NotNegative = 0.0
    load_share: NotNegative = 0.0  # friction added per load torque; forward efficiency is 1/(1 + load_share)


class Joint(Table):
    """One joint, and the link that hangs on it; origin and axis as URDF gives them."""

    name: Name
    axis: Vec3
    xyz_m: Vec3
    rpy_rad: Vec3 = (0.0, 0.0, 0.0)
    encoder_sign: Literal[1, -1] = 1
    encoder_offset_rad: Number = 0.0
    mass_kg: NotNegative = 0.0
    com_m: Vec3 = (0.0, 0.0, 0.0)
    inertia_kg_m2: tuple[Number, Number, Number, Number, Number, Number] = (0.0, 0.0, 0.0, 0.0, 0.0, 0.0)
    kt_Nm_per_A: Positive | None = None
    kv_rpm_per_V: Positive | None = None
    kt_temp_coeff_per_K: Number = 0.0
    rotor_inertia_kg_m2: NotNegative = 0.0
    current_delay_s: NotNegative = 0.0
    current_lag_s: NotNegative = 0.0
    transmission: Transmission = RatioTransmission(kind="ratio", ratio=1.0)
    friction: Friction | None = None

    @model_validator(mode="after")
    def _sound(self) -> Joint:
        unit_vector("axis", self.axis)
        if self.kt_Nm_per_A is not None and self.kv_rpm_per_V is not None:
            refuse("both", "kt_Nm_per_A and kv_rpm_per_V are both given", "Keep one; Kt = 60/(2*pi*Kv).")
        _check_inertia(self.inertia_kg_m2)
        return self

    @property
    def has_motor(self) -> bool:
        """True where a torque constant lets the current speak."""
        return self.kt_Nm_per_A is not None or self.kv_rpm_per_V is not None


def _check_inertia(inertia_kg_m2: tuple[float, ...]) -> None:
    """Refuse a tensor no body can have: principal moments are positive, and none exceeds the sum of the others."""
    xx, yy, zz, xy, xz, yz = inertia_kg_m2
    moments = np.linalg.eigvalsh(np.array([[xx, xy, xz], [xy, yy, yz], [xz, yz, zz]]))
    slack = 1e-6 * max(float(moments[2]), 1e-12)
    if moments[0] < -slack or moments[2] > moments[0] + moments[1] + slack:
        refuse(
            "inertia",
            "inertia_kg_m2 belongs to no body: principal moments " + ", ".join(f"{m:.3g}" for m in moments),
            "Give xx, yy, zz, xy, xz, yz about the centre of mass; each moment at most the sum of the other two.",
        )


class Foot(Table):
    """The ball at the end of the last link, and the sensor in it."""

    xyz_m: Vec3  # ball centre, last joint frame
    radius_m: NotNegative = 0.0
    sensor_axis: Vec3  # unit, from the sole into the leg, last joint frame
    distal_mass_kg: NotNegative = 0.0  # what hangs below the sensor
    distal_com_m: Vec3 | None = None  # its centre of mass, last joint frame; the ball centre when left out
    sample_rate_Hz: Positive | None = None  # of the foot's converter; None: every row is a reading
    sample_window_s: NotNegative = 0.0  # over which the converter averages

    @model_validator(mode="after")
    def _sound(self) -> Foot:
        unit_vector("sensor_axis", self.sensor_axis)
        return self


class Leg(Table):
    """One leg: its chain of joints, its foot, and the files that belong to it."""

    name: Name
    calibration: str | None = None  # path of the foot's calibration file, as written in the description
    drive: str | None = None
    actuator_matrix: tuple[tuple[Number, ...], ...] | None = None
    joints: Annotated[tuple[Joint, ...], Field(alias="joint", min_length=1, max_length=MAX_JOINTS)]
    foot: Foot

    @model_validator(mode="after")
    def _sound(self) -> Leg:
        unlike("joint", [joint.name for joint in self.joints])
        if self.foot.distal_mass_kg > self.joints[-1].mass_kg + 1e-12:
            link_kg = self.joints[-1].mass_kg
            found = f"foot.distal_mass_kg {self.foot.distal_mass_kg:g} exceeds the last link's mass {link_kg:g} kg"
            refuse("distal", found, "mass_kg of the last link includes what hangs below the sensor.")
        for i, joint in enumerate(self.joints):
            if joint.has_motor and joint.friction is None and self.drive is None:
                refuse(
                    "friction",
                    f"joint[{i}] ({joint.name}) has a motor constant but no friction, and the leg names no drive file",
                    "Give friction = { coulomb_Nm = … }, or name the drive file.",
                )
        self._check_matrix()
        return self

    def _check_matrix(self) -> None:
        n = len(self.joints)
        if self.actuator_matrix is None:
            return
        if [len(row) for row in self.actuator_matrix] != [n] * n:
            refuse(
                "matrix",
                "actuator_matrix is not square",
                f"Give {n} rows of {n} values: motor angles = M * joint angles.",
            )
        if np.linalg.cond(np.array(self.actuator_matrix)) > 1e6:
            refuse(
                "matrix",
                "actuator_matrix has no inverse",
                "Each motor must turn some joint that the others leave free.",
            )


class Imu(Table):
    """Where the inertial unit sits in the body, and how it is turned."""

    xyz_m: Vec3 = (0.0, 0.0, 0.0)
    rpy_rad: Vec3 = (0.0, 0.0, 0.0)


class Column(Table):
    """Where one quantity of a log stands, and how to bring it to the unit of its name: value * scale + offset."""

    name: str
    scale: Number = 1.0
    offset: Number = 0.0


class RobotFile(Table):
    """The whole of `robot.toml`."""

    robot_id: str
    mass_kg: Positive  # with legs
    mass_u_kg: NotNegative = 0.0
    gravity_m_per_s2: Annotated[float, Field(gt=9.0, lt=10.0, strict=True)] = 9.80665
    imu: Imu = Imu()
    legs: Annotated[tuple[Leg, ...], Field(alias="leg", min_length=1)]
    columns: Mapping[str, Column] = {}
    sources: Mapping[str, Mapping[str, Any]] = Field(default={}, alias="source")
    sinks: Mapping[str, Mapping[str, Any]] = Field(default={}, alias="sink")
    fusion: Mapping[str, Any] = {}

    @field_validator("columns", mode="before")
    @classmethod
    def _name_alone(cls, given: Any) -> Any:
        if not isinstance(given, Mapping):
            return given
        return {key: {"name": rule} if isinstance(rule, str) else rule for key, rule in given.items()}

    @model_validator(mode="after")
    def _sound(self) -> RobotFile:
        unlike("leg", [leg.name for leg in self.legs])
        legs_kg = sum(joint.mass_kg for leg in self.legs for joint in leg.joints)
        if legs_kg > self.mass_kg:
            found = f"the legs' links weigh {legs_kg:g} kg, more than mass_kg = {self.mass_kg:g}"
            refuse("mass", found, "mass_kg is the whole robot, legs included.")
        for key in self.columns:
            if not re.fullmatch(r"t_s|imu\.\w+|(\{leg\}|[A-Za-z]\w*)\.\w+", key):
                refuse(
                    "column",
                    f"columns: {key!r} is no column of a robot log",
                    'Write "{leg}.raw", "front_left.q0", "imu.qw" or "t_s".',
                )
        return self


def unlike(what: str, names: list[str]) -> None:
    """Refuse a name that stands twice."""
    for name in names:
        if names.count(name) > 1:
            refuse("twice", f"the {what} name {name!r} stands twice", "Give each its own name.")
