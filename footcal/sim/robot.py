"""The simulated robot: what it really is, and what its maker says it is. Invented; no real machine has these numbers.

Geometry of a leg, in angles of the simulator's own: abduction `a` about body x, thigh pitch `h` and knee `k` about the
leg's y, all zero for a straight leg. The joint coordinates of `robot.toml` differ on purpose: abduction counts outwards
on both sides (axis mirrored on the right), and the knee frame is turned by `knee_zero_rad`.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final, Literal

import numpy as np

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.drives import Drive, draw_drives

LEGS: Final = ("front_left", "front_right", "rear_left", "rear_right")
JOINTS: Final = ("abduction", "pitch", "knee")
GRAVITY_m_per_s2: Final = 9.81


@dataclass(frozen=True, slots=True)
class Body:
    """One rigid body: mass, centre of mass and inertia about it, in the frame it hangs in."""

    mass_kg: float
    com_m: tuple[float, float, float]
    inertia_kg_m2: tuple[float, float, float, float, float, float]  # xx, yy, zz, xy, xz, yz

    def tensor_kg_m2(self) -> FloatArray:
        """Return the inertia as a symmetric (3, 3) array."""
        xx, yy, zz, xy, xz, yz = self.inertia_kg_m2
        return np.array([[xx, xy, xz], [xy, yy, yz], [xz, yz, zz]])

    def points_m(self) -> FloatArray:
        """Return four points of a quarter of the mass each that move as the body does, (4, 3), same frame.

        Equal masses at the corners of a tetrahedron stretched along the principal axes have the body's mass, centre and
        second moments (the equimomental system of classical mechanics; from memory, shown by a test).
        """
        tensor = self.tensor_kg_m2()
        second = 0.5 * np.trace(tensor) * np.eye(3) - tensor  # the moments of mass, sum of m x x'
        values, axes = np.linalg.eigh(second)
        reach = np.sqrt(np.maximum(values, 0.0) / self.mass_kg)
        corners = np.array([[1, 1, 1], [1, -1, -1], [-1, 1, -1], [-1, -1, 1]], dtype=float)
        result: FloatArray = np.array(self.com_m) + (corners * reach) @ axes.T
        return result


@dataclass(frozen=True, slots=True)
class SimLeg:
    """One leg: where it hangs, how long, how heavy, and what drives and senses it."""

    name: str
    side: int  # +1 left, -1 right
    knee_sign: int  # sign of the knee angle k in the usual stance; -1: the knee points backwards
    hip_B_m: tuple[float, float, float]
    offset_m: float  # hip to thigh, outwards
    thigh_m: float
    shank_m: float
    knee_zero_rad: float  # knee angle k at joint coordinate zero
    links: tuple[Body, Body, Body]  # hip, thigh, shank, each in its own frame (z up the leg, y left)
    foot_radius_m: float
    sensor_axis: tuple[float, float, float]  # shank frame, from the sole into the leg
    distal_mass_kg: float  # part of the shank link, below the sensor
    distal_com_m: tuple[float, float, float]
    drives: tuple[Drive, Drive, Drive]
    encoder_sign: tuple[int, int, int]
    encoder_offset_rad: tuple[float, float, float]

    def joint_angles(self, angles_rad: FloatArray) -> FloatArray:
        """Return the joint coordinates of `robot.toml` for the angles a, h, k, (3, n)."""
        a, h, k = angles_rad
        return np.stack([self.side * a, h, k - self.knee_zero_rad])

    def angles(self, joint_rad: FloatArray) -> FloatArray:
        """Return the angles a, h, k for joint coordinates, (3, n)."""
        q0, q1, q2 = joint_rad
        return np.stack([self.side * q0, q1, q2 + self.knee_zero_rad])


@dataclass(frozen=True, slots=True)
class SimRobot:
    """A whole robot."""

    robot_id: str
    base: Body
    legs: tuple[SimLeg, SimLeg, SimLeg, SimLeg]
    imu_B_m: tuple[float, float, float]
    imu_rpy_rad: tuple[float, float, float]
    stance_m: float  # height of the hips over the ground, standing

    @property
    def mass_kg(self) -> float:
        """Mass with legs."""
        return self.base.mass_kg + sum(link.mass_kg for leg in self.legs for link in leg.links)

    @property
    def weight_N(self) -> float:
        """Weight with legs."""
        return self.mass_kg * GRAVITY_m_per_s2


@dataclass(frozen=True, slots=True)
class RobotPair:
    """The robot as built, and as its maker describes it: masses differ by 2 %, Kt by 2 %, friction by 20 to 30 %."""

    true: SimRobot
    stated: SimRobot
    drive: str
    rear_knees_mirrored: bool


def _inertia(mass_kg: float, size_m: tuple[float, float, float], skew: float) -> tuple[float, ...]:
    """Return the inertia of a box of that size, with a small product in xz."""
    x, y, z = size_m
    xx, yy, zz = (mass_kg / 12.0 * s for s in (y * y + z * z, x * x + z * z, x * x + y * y))
    return xx, yy, zz, 0.0, skew * min(xx, yy, zz), 0.0


def _body(
    mass_kg: float, com_m: tuple[float, float, float], size_m: tuple[float, float, float], skew: float = 0.05
) -> Body:
    xx, yy, zz, xy, xz, yz = _inertia(mass_kg, size_m, skew)
    return Body(mass_kg, com_m, (xx, yy, zz, xy, xz, yz))


def _unit(x: float, y: float, z: float) -> tuple[float, float, float]:
    length = float(np.sqrt(x * x + y * y + z * z))
    return x / length, y / length, z / length


def _stated_leg(name: str, drives: tuple[Drive, Drive, Drive], rng: np.random.Generator, *, mirrored: bool) -> SimLeg:
    side = 1 if name.endswith("left") else -1
    fore = 1.0 if name.startswith("front") else -1.0
    knee_sign = 1 if mirrored and fore < 0 else -1
    distal_kg = 0.062
    shank = _body(0.23, (0.004 * -knee_sign, 0.0, -0.095), (0.03, 0.025, 0.22))
    signs = rng.choice([-1, 1], size=3)
    offsets = np.round(rng.uniform(-0.8, 0.8, size=3), 4)
    return SimLeg(
        name=name,
        side=side,
        knee_sign=knee_sign,
        hip_B_m=(0.19 * fore, 0.05 * side, 0.0),
        offset_m=0.08,
        thigh_m=0.20,
        shank_m=0.20,
        knee_zero_rad=1.30 * knee_sign,
        links=(
            _body(0.55, (-0.005 * fore, 0.02 * side, 0.0), (0.09, 0.08, 0.08)),
            _body(0.74, (0.0, -0.022 * side, -0.045), (0.08, 0.07, 0.21)),
            shank,
        ),
        foot_radius_m=0.020,
        sensor_axis=_unit(0.035 * -knee_sign, 0.012 * side, 1.0),
        distal_mass_kg=distal_kg,
        distal_com_m=(0.001, 0.0, -0.192),
        drives=drives,
        encoder_sign=(int(signs[0]), int(signs[1]), int(signs[2])),
        encoder_offset_rad=(float(offsets[0]), float(offsets[1]), float(offsets[2])),
    )


def _true_body(body: Body, rng: np.random.Generator, mass_sd: float = 0.02, com_sd_m: float = 0.0015) -> Body:
    """Return the body as built: mass 2 %, centre 1.5 mm and inertia 5 % off what the maker states."""
    mass_kg = body.mass_kg * (1.0 + mass_sd * float(np.clip(rng.standard_normal(), -2.0, 2.0)))
    com = np.array(body.com_m) + com_sd_m * np.clip(rng.standard_normal(3), -2.0, 2.0)
    factor = mass_kg / body.mass_kg * (1.0 + 0.05 * float(np.clip(rng.standard_normal(), -2.0, 2.0)))
    xx, yy, zz, xy, xz, yz = (factor * v for v in body.inertia_kg_m2)
    return Body(mass_kg, (float(com[0]), float(com[1]), float(com[2])), (xx, yy, zz, xy, xz, yz))


def _true_leg(leg: SimLeg, rng: np.random.Generator) -> SimLeg:
    """Return the leg as built: sensor axis 0.5 degrees, encoder zero 3 mrad, distal mass 2 g off."""
    lean = np.array(leg.sensor_axis) + np.append(0.008 * np.clip(rng.standard_normal(2), -2.0, 2.0), 0.0)
    offset = np.array(leg.encoder_offset_rad) + 0.003 * np.clip(rng.standard_normal(3), -2.0, 2.0)
    hip, thigh, shank = (_true_body(link, rng) for link in leg.links)
    first, second, third = (drive.as_built(rng) for drive in leg.drives)
    return replace(
        leg,
        links=(hip, thigh, shank),
        sensor_axis=_unit(float(lean[0]), float(lean[1]), float(lean[2])),
        distal_mass_kg=leg.distal_mass_kg + 0.002 * float(np.clip(rng.standard_normal(), -2.0, 2.0)),
        drives=(first, second, third),
        encoder_offset_rad=(float(offset[0]), float(offset[1]), float(offset[2])),
    )


def draw_robot(drive: Literal["belt", "screw"], seed: int = 0, *, rear_knees_mirrored: bool = False) -> RobotPair:
    """Return a robot of 18 kg with legs, as built and as stated; the same seed gives the same robot.

    Args:
        drive: "belt" (ratio 7, can be driven back) or "screw" (high ratio, holds by friction).
        seed: which robot of the series.
        rear_knees_mirrored: rear knees point forwards instead of backwards.

    Raises:
        SettingError: no such drive.
    """
    if drive not in {"belt", "screw"}:
        raise SettingError("simulated robot, drive", f"no drive {drive!r}", 'Choose "belt" or "screw".')
    rng = np.random.default_rng([seed, 411, int(drive == "screw"), int(rear_knees_mirrored)])
    first, second, third, fourth = (
        _stated_leg(name, draw_drives(drive, rng), rng, mirrored=rear_knees_mirrored) for name in LEGS
    )
    legs = (first, second, third, fourth)
    legs_kg = sum(link.mass_kg for leg in legs for link in leg.links)
    stated = SimRobot(
        robot_id=f"demo_{drive}" + ("_mirrored" if rear_knees_mirrored else ""),
        base=_body(18.0 - legs_kg, (0.0, 0.0, 0.0), (0.42, 0.18, 0.12)),
        legs=legs,
        imu_B_m=(0.04, -0.015, 0.03),
        imu_rpy_rad=(0.0, 0.0, float(np.pi / 2.0)),
        stance_m=0.318,
    )
    a, b, c, d = (_true_leg(leg, rng) for leg in legs)
    base = _true_body(stated.base, rng, mass_sd=0.0, com_sd_m=0.004)
    total_kg = base.mass_kg + sum(link.mass_kg for leg in (a, b, c, d) for link in leg.links)
    base = replace(
        base, mass_kg=base.mass_kg + 18.0 + 0.02 * float(np.clip(rng.standard_normal(), -2.0, 2.0)) - total_kg
    )
    return RobotPair(replace(stated, base=base, legs=(a, b, c, d)), stated, drive, rear_knees_mirrored)
