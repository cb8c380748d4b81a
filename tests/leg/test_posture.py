"""Geometry and rigid-body terms: the compiled code against closed forms, finite differences and Lagrange's equation."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from footcal.errors import SettingError
from footcal.leg.posture import BaseMotion, foot_jacobian_m_per_rad, foot_position_m, postures
from footcal.records import FloatArray
from tests.leg.oracle import Pose, lagrange_torque_Nm, link_poses
from tests.leg.robots import planar_leg, quadruped, random_leg, robot_of, single

STILL: Pose = (np.eye(3), np.zeros(3))


def test_two_link_arm_stands_where_the_closed_form_says() -> None:
    """The foot of a planar arm is the sum of its two turned links."""
    q = np.array([0.4, -0.9])

    foot_m = foot_position_m(single(planar_leg()), "one", q)

    # By hand: a turn about y takes (0, 0, -l) to (-l sin q, 0, -l cos q).
    assert foot_m == pytest.approx(
        [-0.2 * np.sin(0.4) - 0.2 * np.sin(-0.5), 0.0, -0.2 * np.cos(0.4) - 0.2 * np.cos(-0.5)], abs=1e-14
    )


def test_two_link_arm_needs_the_torque_of_its_closed_form() -> None:
    """Point masses at the ends of two links need the textbook torque of a double pendulum."""
    q, dq, ddq = np.array([0.4, -0.9]), np.array([2.0, -3.0]), np.array([5.0, 7.0])

    torque_Nm = postures(single(planar_leg()), "one", q, dq, ddq).torque_Nm[0]

    # Double pendulum, angles from the vertical a = q1, b = q1 + q2, masses 0.8 and 0.3 kg at the ends of links of 0.2
    # m: by hand from the Lagrangian; torque of joint 2 acts on b, that of joint 1 on both.
    m1, m2, l, g = 0.8, 0.3, 0.2, 9.81
    a, b = q[0], q[0] + q[1]
    da, db = dq[0], dq[0] + dq[1]
    dda, ddb = ddq[0], ddq[0] + ddq[1]
    about_a = (
        (m1 + m2) * l * l * dda
        + m2 * l * l * (ddb * np.cos(a - b) + db**2 * np.sin(a - b))
        + (m1 + m2) * g * l * np.sin(a)
    )
    about_b = m2 * l * l * (ddb + dda * np.cos(a - b) - da**2 * np.sin(a - b)) + m2 * g * l * np.sin(b)
    assert torque_Nm == pytest.approx([about_a + about_b, about_b], abs=1e-12)


@pytest.mark.parametrize("joints", [1, 2, 3, 4, 5, 6])
def test_random_chain_puts_its_foot_where_matrices_put_it(joints: int) -> None:
    """Any axes, origins and turns: the foot agrees with a product of scipy rotations."""
    rng = np.random.default_rng(7)
    leg = random_leg(rng, joints)
    q = rng.uniform(-3.0, 3.0, (5, joints))

    feet_m = foot_position_m(single(leg), "chain", q)

    for angles, foot_m in zip(q, feet_m, strict=True):
        R, p = link_poses(leg, STILL, angles)[-1]
        assert foot_m == pytest.approx(p + R @ np.array(leg["foot"]["xyz_m"]), abs=1e-13)


@pytest.mark.parametrize("joints", [1, 3, 6])
def test_jacobian_is_the_slope_of_the_foot(joints: int) -> None:
    """Each column is the central difference of the foot's position."""
    rng = np.random.default_rng(7)
    robot = single(random_leg(rng, joints))
    q = rng.uniform(-3.0, 3.0, joints)

    jacobian = foot_jacobian_m_per_rad(robot, "chain", q)

    step = 1e-6
    for j in range(joints):
        nudge = step * np.eye(joints)[j]
        slope = (foot_position_m(robot, "chain", q + nudge) - foot_position_m(robot, "chain", q - nudge)) / (2 * step)
        assert jacobian[:, j] == pytest.approx(slope, abs=1e-9)  # rounding of the difference: 1e-16 / 1e-6


@pytest.mark.parametrize("joints", [1, 2, 3, 4, 5, 6])
def test_torques_of_a_moving_chain_solve_lagranges_equation(joints: int) -> None:
    """On a body at rest, torques agree with finite differences of the energies."""
    rng = np.random.default_rng(7 + joints)
    leg = random_leg(rng, joints)
    q, dq, ddq = rng.uniform(-1.5, 1.5, joints), rng.uniform(-4.0, 4.0, joints), rng.uniform(-30.0, 30.0, joints)

    torque_Nm = postures(single(leg), "chain", q, dq, ddq).torque_Nm[0]

    expected_Nm = lagrange_torque_Nm(leg, lambda _: STILL, q, dq, ddq, g=9.81)
    # The differences of the oracle are good to some 1e-5 of the largest torque.
    assert torque_Nm == pytest.approx(expected_Nm, abs=3e-5 * float(np.max(np.abs(expected_Nm))))


def test_torques_on_a_turning_falling_body_solve_lagranges_equation() -> None:
    """Base rate, base angular acceleration and specific force enter with the right sign and arm."""
    rng = np.random.default_rng(7)
    leg = random_leg(rng, 3)
    q, dq, ddq = rng.uniform(-1.5, 1.5, 3), rng.uniform(-4.0, 4.0, 3), rng.uniform(-30.0, 30.0, 3)
    rate, turn_up = np.array([1.0, -2.0, 0.7]), np.array([20.0, 10.0, -15.0])
    speed, acceleration = np.array([0.5, 0.2, -0.4]), np.array([3.0, -6.0, 2.0])
    attitude = Rotation.from_euler("xyz", [0.3, -0.5, 1.1])

    def base(t: float) -> Pose:
        # rate and angular acceleration are those of the body frame at t = 0; a rotation vector w t + dw t^2/2 has
        # them there
        R = (attitude * Rotation.from_rotvec(rate * t + 0.5 * turn_up * t * t)).as_matrix()
        return R, speed * t + 0.5 * acceleration * t * t

    R_BW = attitude.as_matrix().T
    force = R_BW @ (acceleration - np.array([0.0, 0.0, -9.81]))
    motion = BaseMotion(tuple(force), tuple(rate), tuple(turn_up))

    torque_Nm = postures(single(leg), "chain", q, dq, ddq, motion).torque_Nm[0]

    expected_Nm = lagrange_torque_Nm(leg, base, q, dq, ddq, g=9.81)
    assert torque_Nm == pytest.approx(expected_Nm, abs=3e-5 * float(np.max(np.abs(expected_Nm))))


def test_what_hangs_below_the_sensor_pulls_it_down_at_rest() -> None:
    """A hanging foot reads minus the weight below its sensor, times the cosine of the lean."""
    q = np.array([[0.0, 0.0], [0.5, 0.0]])

    found = postures(single(planar_leg()), "one", q)

    # By hand: 0.1 kg * 9.81 m/s2; the sensor axis points from the sole into the leg, upwards here.
    assert found.axial_inertia_N == pytest.approx([-0.981, -0.981 * np.cos(0.5)], abs=1e-12)


def test_foot_swung_in_a_circle_presses_outwards_on_its_sensor() -> None:
    """At the bottom of a swing of radius 0.4 m and 5 rad/s, the mass below the sensor pulls by m (g + w^2 r)."""
    found = postures(single(planar_leg()), "one", np.array([0.0, 0.0]), np.array([5.0, 0.0]))

    # By hand: 0.1 * (9.81 + 25 * 0.4) = 1.981 N, away from the leg.
    assert found.axial_inertia_N == pytest.approx([-1.981], abs=1e-12)


def test_freely_falling_leg_needs_no_torque() -> None:
    """Without specific force, rates and accelerations nothing is needed."""
    motion = BaseMotion((0.0, 0.0, 0.0))

    found = postures(robot_of(quadruped()), "front_left", np.array([0.1, 0.8, -1.5]), base=motion)

    assert found.torque_Nm == pytest.approx(np.zeros((1, 3)), abs=1e-15)


@pytest.mark.parametrize(("leg", "mirror"), [("front_left", "front_right"), ("rear_left", "rear_right")])
def test_one_leg_moved_alone_shows_which_way_it_abducts(leg: str, mirror: str) -> None:
    """A positive abduction angle, about x forward, lifts a left foot outwards and swings a right foot inwards."""
    robot = robot_of(quadruped())
    bent = np.array([0.2, 0.8, -1.5])
    straight = np.array([0.0, 0.8, -1.5])

    moved_m = foot_position_m(robot, leg, bent) - foot_position_m(robot, leg, straight)
    other_m = foot_position_m(robot, mirror, bent) - foot_position_m(robot, mirror, straight)

    # By hand: a turn by +a about x takes (y, z) to (y cos a - z sin a, ...); both feet hang (z < 0), so both go to +y:
    # out on the left, in on the right.
    assert moved_m[1] > 0.02
    assert other_m[1] > 0.02
    assert foot_position_m(robot, leg, bent)[2] > foot_position_m(robot, mirror, bent)[2]


def test_ground_force_on_the_foot_does_the_work_of_the_joints() -> None:
    """Virtual work: torque -J.T F balances a force on the foot in every direction."""
    rng = np.random.default_rng(7)
    robot = robot_of(quadruped())
    q, dq = rng.uniform(-1.0, 1.0, 3), rng.uniform(-1.0, 1.0, 3)
    force_N = rng.normal(size=3)

    jacobian = foot_jacobian_m_per_rad(robot, "rear_left", q)

    step = 1e-6
    moved_m: FloatArray = foot_position_m(robot, "rear_left", q + step * dq) - foot_position_m(
        robot, "rear_left", q - step * dq
    )
    assert (jacobian.T @ force_N) @ dq == pytest.approx(force_N @ moved_m / (2 * step), abs=1e-9)


def test_wrong_number_of_angles_is_refused() -> None:
    """An array for another leg is named with the shape it should have."""
    with pytest.raises(SettingError, match=r"must be \(n, 2\)"):
        postures(single(planar_leg()), "one", np.zeros(3))


def test_unknown_leg_is_refused_with_the_near_one() -> None:
    """A mistyped leg name is answered with the right one."""
    with pytest.raises(SettingError, match="Did you mean 'front_left'"):
        foot_position_m(robot_of(quadruped()), "front_lefd", np.zeros(3))
