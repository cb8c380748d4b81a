"""The simulated robot: mass points, kinematics and description."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from footcal.errors import SettingError
from footcal.sim.kinematics import BasePath, leg_angles, leg_path
from footcal.sim.momentum import cross, limb
from footcal.sim.robot import Body, draw_robot
from footcal.sim.robot_foot import sensor_frame


def test_four_points_have_the_mass_centre_and_inertia_of_the_body() -> None:
    """Sum of m r r over the points gives back centre and tensor (definition of the inertia tensor)."""
    body = Body(0.8, (0.01, -0.02, 0.05), (0.004, 0.003, 0.002, 0.0002, -0.0003, 0.0001))
    points = body.points_m()
    arm = points - body.com_m
    tensor = sum(0.2 * (a @ a * np.eye(3) - np.outer(a, a)) for a in arm)
    assert points.mean(axis=0) == pytest.approx(body.com_m, abs=1e-15)
    assert tensor == pytest.approx(body.tensor_kg_m2(), abs=1e-15)


@pytest.mark.parametrize("mirrored", [False, True])
def test_angles_from_a_foot_place_put_the_foot_there(mirrored: bool) -> None:  # noqa: FBT001
    """Inverse kinematics undone by forward kinematics, on a tilted body, all legs; knees bend the promised way."""
    robot = draw_robot("belt", rear_knees_mirrored=mirrored).true
    rng = np.random.default_rng(7)
    base = BasePath.from_rpy(rng.normal(size=(3, 50)), 0.3 * rng.normal(size=(3, 50)))
    for leg in robot.legs:
        wanted = base.to_world(
            np.array(leg.hip_B_m)[:, None]
            + [[0.0], [leg.side * 0.08], [-0.27]]
            + 0.03 * rng.uniform(-1.0, 1.0, size=(3, 50))
        )
        angles = leg_angles(leg, base, wanted)
        assert leg_path(leg, base, angles).ball_m == pytest.approx(wanted, abs=1e-12)
        backwards = -1 if mirrored and leg.name.startswith("rear") else 1
        assert np.all(np.sign(angles[2]) == -backwards)


def test_a_foot_place_out_of_reach_is_refused() -> None:
    """A foot 0.6 m below the hip of a 0.4 m leg: SettingError."""
    robot = draw_robot("belt").true
    base = BasePath.from_rpy(np.zeros((3, 2)), np.zeros((3, 2)))
    with pytest.raises(SettingError, match="reach"):
        leg_angles(robot.legs[0], base, np.array([[0.19], [0.13], [-0.6]]) * np.ones((1, 2)))


def test_joint_torques_do_the_work_that_legs_and_ground_receive() -> None:
    """Power of joints = change of the leg's kinetic and potential energy - power of the ground, on a still body."""
    leg = draw_robot("belt").true.legs[1]
    dt_s = 1e-4
    t_s = np.arange(20_000) * dt_s
    base = BasePath.from_rpy(np.zeros((3, t_s.size)), np.zeros((3, t_s.size)))
    mid = np.array([[0.1], [0.6], [-1.3]])
    angles = mid + 0.25 * np.sin(2.0 * np.pi * np.array([[0.7], [1.1], [1.7]]) * t_s)
    part = limb(leg, base, angles, dt_s)
    force = np.stack([3.0 * np.sin(t_s), 2.0 * np.cos(3.0 * t_s), 20.0 + 5.0 * np.sin(2.0 * t_s)])
    torque = part.torques_Nm(part.path.ball_m, force)
    rate = np.gradient(leg.joint_angles(angles), dt_s, axis=1)
    masses = np.array([link.mass_kg / 4.0 for link in leg.links])
    speed2 = np.sum(np.gradient(part.points_m, dt_s, axis=-1) ** 2, axis=2)
    energy = np.einsum("l,lpn->n", masses, 0.5 * speed2 + 9.81 * part.points_m[:, :, 2])
    ground = np.sum(force * np.gradient(part.path.ball_m, dt_s, axis=1), axis=0)
    inside = slice(10, -10)
    work = np.cumsum((np.sum(torque * rate, axis=0) + ground)[inside]) * dt_s
    # Central differences at 0.1 ms over motions below 2 Hz: relative errors of 1e-7, sums of rectangles 1e-5 J.
    assert work - work[0] == pytest.approx(energy[inside] - energy[inside][0], abs=5e-4)


def test_joint_axes_of_both_sides_mirror() -> None:
    """Equal joint coordinates on left and right put the feet at mirrored places."""
    robot = draw_robot("screw").true
    base = BasePath.from_rpy(np.zeros((3, 1)), np.zeros((3, 1)))
    joint = np.array([[0.2], [0.5], [0.1]])
    left, right = (leg_path(leg, base, leg.angles(joint)).ball_m[:, 0] for leg in robot.legs[:2])
    assert left == pytest.approx(right * [1.0, -1.0, 1.0], abs=1e-12)
    assert left[1] > 0.13  # positive abduction moves the foot outwards


def test_sensor_axes_are_right_handed_and_x_leans_least() -> None:
    """X is perpendicular to the axis and in the plane of axis and shank x; y = axis × x."""
    leg = draw_robot("belt").true.legs[2]
    x, y, axis = sensor_frame(leg)
    assert np.array([x, y, axis]) @ np.array([x, y, axis]).T == pytest.approx(np.eye(3), abs=1e-12)
    assert np.cross(axis, x) == pytest.approx(y, abs=1e-12)
    assert np.cross(axis, [1.0, 0.0, 0.0]) @ x == pytest.approx(0.0, abs=1e-12)


def test_rotations_agree_with_scipy() -> None:
    """Roll, pitch, yaw as fixed-axis turns about x, y, z in that order (scipy's "xyz")."""
    rpy = np.random.default_rng(7).normal(size=(3, 5))
    base = BasePath.from_rpy(np.zeros((3, 5)), rpy)
    assert np.moveaxis(base.rotation, 2, 0) == pytest.approx(Rotation.from_euler("xyz", rpy.T).as_matrix(), abs=1e-12)


def test_cross_product_agrees_with_numpy() -> None:
    """Same as numpy.cross along the second last axis."""
    a, b = np.random.default_rng(7).normal(size=(2, 4, 3, 6))
    assert cross(a, b) == pytest.approx(np.cross(a, b, axis=1), abs=1e-14)


def test_an_unknown_drive_is_refused() -> None:
    """Only belt and screw exist."""
    with pytest.raises(SettingError, match="no drive"):
        draw_robot("rope")  # type: ignore[arg-type]
