"""The leg part of a tick: readings held, derivatives without lag, drive model, what the filter is told."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from footcal.leg.constants import LegSettings
from footcal.leg.drive import joint_drive
from footcal.leg.friction import friction_Nm
from footcal.leg.posture import foot_jacobian_m_per_rad, postures
from footcal.records import FloatArray
from tests.leg.robots import planar_leg, single
from tests.leg.ticks import run, swinging

STANDING = {
    "q_rad": np.tile([0.5, -1.0], (10, 1)),
    "dq_rad_per_s": np.zeros((10, 2)),
    "current_A": np.tile([1.0, -2.0], (10, 1)),
}


def test_plain_python_gives_what_the_compiled_step_gives(tmp_path: Path) -> None:
    """The same sources with the compiler switched off agree on a swinging leg with holes in every input."""
    env = {**os.environ, "NUMBA_DISABLE_JIT": "1"}
    file = tmp_path / "plain.npz"
    subprocess.run([sys.executable, "-m", "tests.leg.ticks", str(file)], check=True, env=env, timeout=120)

    compiled = run(single(planar_leg()), swinging(), ticks=60, force_N=(3.0, 0.0, 40.0), cross_axis=(0.01, -0.02))

    with np.load(file) as plain:
        assert sorted(plain.files) == sorted(compiled)
        for name in plain.files:
            # libm and the compiler may round exp differently in the last digit
            np.testing.assert_allclose(compiled[name], plain[name], rtol=1e-11, atol=1e-11, err_msg=name)


def test_current_becomes_joint_torque_by_ratio_and_constant() -> None:
    """Tau = ratio Kt i, per joint."""
    found = run(single(planar_leg()), STANDING, ticks=10)

    # By hand: 7 * 0.1 Nm/A * (1 A, -2 A).
    assert found["tau_meas_Nm"][-1, :2] == pytest.approx([0.7, -1.4], abs=1e-14)
    assert found["tau_new"][-1].tolist() == [1.0, 1.0, 0.0]


def test_warm_motor_has_the_torque_constant_of_its_temperature() -> None:
    """Kt falls by its coefficient times the warming above 25 C."""
    leg = planar_leg()
    leg["joint"][0]["kt_temp_coeff_per_K"] = -0.001
    inputs = {**STANDING, "motor_temp_C": np.full((10, 2), 75.0)}

    found = run(single(leg), inputs, ticks=10)

    # By hand: 0.7 Nm * (1 - 0.001 * 50) = 0.665 Nm; the second joint has no coefficient.
    assert found["tau_meas_Nm"][-1, :2] == pytest.approx([0.665, -1.4], abs=1e-14)


def test_encoder_that_counts_backwards_turns_angle_and_torque() -> None:
    """Angle = sign (reading - offset), and a current counts positive when it drives the reading up."""
    leg = planar_leg()
    leg["joint"][0] |= {"encoder_sign": -1, "encoder_offset_rad": 0.25}

    found = run(single(leg), STANDING, ticks=10)

    # By hand: -(0.5 - 0.25) rad; -0.7 Nm.
    assert found["leg_q"][-1, :2] == pytest.approx([-0.25, -1.0], abs=1e-15)
    assert found["tau_meas_Nm"][-1, :2] == pytest.approx([-0.7, -1.4], abs=1e-14)


def test_belt_along_the_thigh_couples_angles_and_torques() -> None:
    """Motor angles M q turn into q, motor torques into M.T tau."""
    leg = planar_leg(actuator_matrix=[[1.0, 0.0], [1.0, 1.0]])

    found = run(single(leg), STANDING, ticks=10)

    # By hand: motors at (0.5, -1.0) = (q1, q1 + q2), so q = (0.5, -1.5); torques (0.7 - 1.4, -1.4).
    assert found["leg_q"][-1, :2] == pytest.approx([0.5, -1.5], abs=1e-15)
    assert found["tau_meas_Nm"][-1, :2] == pytest.approx([-0.7, -1.4], abs=1e-14)


def test_acceleration_of_a_steady_sine_comes_without_lag() -> None:
    """At 5 Hz the derivative of joint speed is within 2 % in phase and size, 0.003 s of filter notwithstanding."""
    t = np.arange(600)[:, None] * 1e-3
    w = 2.0 * np.pi * 5.0
    inputs = {"q_rad": np.hstack([np.sin(w * t), 0 * t]), "dq_rad_per_s": np.hstack([w * np.cos(w * t), 0 * t])}

    found = run(single(planar_leg()), inputs, ticks=600)

    late = found["leg_ddq"][200:, 0]
    true = -w * w * np.sin(w * t[200:, 0])
    # By hand: transfer (1 + 2Ts)/(1 + Ts)^2 at wT = 0.094 is off by (wT)^2 = 0.9 %; a plain filter would be 9.4 % late.
    assert float(np.sqrt(np.mean((late - true) ** 2) / np.mean(true**2))) < 0.012


def test_steady_acceleration_is_exact_at_any_sample_interval() -> None:
    """A ramp of speed has the slope of the ramp, also at 80 samples a second."""
    t = np.arange(100)[:, None] * 0.0125
    inputs = {"q_rad": np.hstack([1.5 * t * t, 0 * t]), "dq_rad_per_s": np.hstack([3.0 * t, 0 * t])}

    found = run(single(planar_leg()), inputs, ticks=100, dt_s=0.0125)

    assert found["leg_ddq"][-1, 0] == pytest.approx(3.0, abs=1e-9)  # by hand


def test_speed_comes_from_the_angle_where_the_bus_sends_none() -> None:
    """Without speeds, the difference of angles is the speed."""
    t = np.arange(50)[:, None] * 1e-3
    inputs = {"q_rad": np.hstack([2.0 * t, -1.0 * t])}

    found = run(single(planar_leg()), inputs, ticks=50)

    assert found["leg_dq"][-1, :2] == pytest.approx([2.0, -1.0], abs=1e-9)  # by hand


def test_missing_readings_hold_the_last_and_grow_old() -> None:
    """An encoder that falls silent keeps its angle; its age is told and its torque is no news."""
    q = np.tile([0.5, -1.0], (80, 1))
    q[10:] = np.nan
    inputs = {"q_rad": q, "dq_rad_per_s": np.zeros((80, 2)), "current_A": np.ones((80, 2))}

    found = run(single(planar_leg()), inputs, ticks=80)

    assert found["leg_q"][-1, :2] == pytest.approx([0.5, -1.0])
    assert found["motor_age_s"][-1] == pytest.approx(0.070, abs=1e-12)  # by hand: 79 - 9 ticks of 1 ms
    assert found["tau_new"][20, 0] == 1.0  # the posture is 11 ms old
    assert found["tau_new"][-1, 0] == 0.0  # above 50 ms nothing may be built on it


def test_joint_that_never_spoke_is_not_there() -> None:
    """Without any encoder reading no torque is new and the age has no end."""
    found = run(single(planar_leg()), {"current_A": np.ones((5, 2))}, ticks=5)

    assert np.isinf(found["motor_age_s"]).all()
    assert not found["tau_new"].any()


def test_current_that_never_spoke_is_no_news() -> None:
    """Angles without currents give geometry but no torque readings."""
    found = run(single(planar_leg()), {"q_rad": STANDING["q_rad"]}, ticks=10)

    assert not found["tau_new"].any()
    assert found["leg_q"][-1, :2] == pytest.approx([0.5, -1.0])


def test_moving_joint_has_the_friction_of_the_law() -> None:
    """tau_drive of a joint at steady speed is the friction curve with the load of the last tick's force."""
    t = np.arange(300)[:, None] * 1e-3
    inputs = {"q_rad": np.hstack([0.3 * t, -1.0 - 0.2 * t]), "dq_rad_per_s": np.tile([0.3, -0.2], (300, 1))}
    robot = single(planar_leg())
    force_N = (5.0, 0.0, 60.0)

    found = run(robot, inputs, ticks=300, force_N=force_N)

    q, dq = inputs["q_rad"][-1], inputs["dq_rad_per_s"][-1]
    load_Nm: FloatArray = (
        postures(robot, "one", q, dq).torque_Nm[0] - foot_jacobian_m_per_rad(robot, "one", q).T @ force_N
    )
    for j in range(2):
        drive = joint_drive(robot.leg("one").joints[j])
        expected_Nm = friction_Nm(drive, dq[j : j + 1], load_Nm[j], LegSettings().stuck_speed_rad_per_s)
        assert found["tau_drive_Nm"][-1, j] == pytest.approx(float(expected_Nm[0]), rel=1e-8)


def test_stuck_joint_hides_more_than_a_moving_one() -> None:
    """The friction error is wide at rest, a small share of the limit when moving."""
    moving = {"q_rad": STANDING["q_rad"], "dq_rad_per_s": np.full((10, 2), 2.0), "current_A": np.zeros((10, 2))}
    leg = planar_leg()
    for joint in leg["joint"]:
        joint["friction"] = {"coulomb_Nm": 0.4}

    at_rest = run(single(leg), {**STANDING, "current_A": np.zeros((10, 2))}, ticks=10)["fric_sd_Nm"][-1, :2]
    in_motion = run(single(leg), moving, ticks=10)["fric_sd_Nm"][-1, :2]

    # By hand: 1.2 * 0.4/sqrt(3) and 0.15 * 0.4 Nm (the current is 0, so the torque constant adds nothing).
    assert at_rest == pytest.approx([0.2771281, 0.2771281], abs=1e-6)
    assert in_motion == pytest.approx([0.06, 0.06], abs=1e-6)


def test_rotor_counts_with_the_square_of_the_ratio() -> None:
    """A speeding joint needs ratio^2 J_r ddq more."""
    leg = planar_leg()
    for joint in leg["joint"]:
        joint |= {"rotor_inertia_kg_m2": 1e-4, "friction": {"coulomb_Nm": 0.0}}
    t = np.arange(100)[:, None] * 1e-3
    inputs = {"q_rad": np.hstack([5.0 * t * t, 0 * t]), "dq_rad_per_s": np.hstack([10.0 * t, 0 * t])}

    found = run(single(leg), inputs, ticks=100)

    assert found["tau_drive_Nm"][-1, 0] == pytest.approx(49 * 1e-4 * 10.0, rel=1e-6)  # by hand


def test_specific_force_is_moved_from_the_unit_to_the_body_origin() -> None:
    """A unit 0.1 m out on a body that spins at 2 rad/s reads a centripetal part the origin does not have."""
    robot = single(planar_leg())
    file = robot.file.model_copy(update={"imu": robot.file.imu.model_copy(update={"xyz_m": (0.1, 0.0, 0.0)})})
    spinning = type(robot)(file, robot.path)
    inputs = {
        "gyro_rad_per_s": np.tile([0.0, 0.0, 2.0], (10, 1)),
        "accel_m_per_s2": np.tile([-0.4, 0.0, 9.81], (10, 1)),  # by hand: -w^2 r = -0.4 m/s2 towards the axis
    }

    found = run(spinning, inputs, ticks=10)

    assert found["force_O"][-1] == pytest.approx([0.0, 0.0, 9.81], abs=1e-12)


def test_turned_unit_is_turned_back() -> None:
    """A unit mounted upside down (roll 180 degrees) reads -g along its z axis at rest."""
    robot = single(planar_leg())
    file = robot.file.model_copy(update={"imu": robot.file.imu.model_copy(update={"rpy_rad": (np.pi, 0.0, 0.0)})})

    found = run(type(robot)(file, robot.path), {"accel_m_per_s2": np.tile([0.0, 0.0, -9.81], (5, 1))}, ticks=5)

    assert found["force_O"][-1] == pytest.approx([0.0, 0.0, 9.81], abs=1e-12)


def test_without_a_unit_the_body_is_level_and_at_rest() -> None:
    """Nothing from the inertial unit: gravity of a level robot."""
    found = run(single(planar_leg()), STANDING, ticks=10)

    assert found["force_O"][-1] == pytest.approx([0.0, 0.0, 9.81], abs=1e-12)
    assert found["axial_inertia_N"][-1] == pytest.approx(-0.981 * np.cos(-0.5), abs=1e-12)  # by hand, leaning 0.5 rad


def test_attitude_alone_tilts_gravity() -> None:
    """Nose down by 30 degrees (pitch about y), the specific force points backwards and up."""
    half = np.deg2rad(30.0) / 2.0
    inputs = {"quat_WB": np.tile([np.cos(half), 0.0, np.sin(half), 0.0], (3, 1))}

    found = run(single(planar_leg()), inputs, ticks=3)

    # By hand: the world's z axis seen in the body is (-sin 30, 0, cos 30).
    assert found["force_O"][-1] == pytest.approx([-4.905, 0.0, 9.81 * np.cos(np.deg2rad(30.0))], abs=1e-12)


def test_cross_sensitivity_tilts_the_sensitive_axis() -> None:
    """H = axis + cx x + cy y, in the body frame."""
    found = run(single(planar_leg()), {"q_rad": np.zeros((3, 2))}, ticks=3, cross_axis=(0.01, -0.02))

    assert found["axis_B"][-1] == pytest.approx([0.01, -0.02, 1.0], abs=1e-15)  # by hand: the leg hangs straight


def test_noise_of_the_torque_is_that_of_the_current() -> None:
    """White noise: ratio Kt times 0.2 A; lag and delay are added up."""
    leg = planar_leg()
    leg["joint"][0] |= {"current_lag_s": 0.005, "current_delay_s": 0.0015}

    found = run(single(leg), STANDING, ticks=10)

    assert found["tau_noise_Nm"][-1, :2] == pytest.approx([0.14, 0.14], abs=1e-15)  # by hand: 0.7 Nm/A * 0.2 A
    assert found["tau_lag_s"][-1, :2] == pytest.approx([0.0065, 0.0], abs=1e-15)


def test_reset_starts_the_derivatives_afresh() -> None:
    """After a gap a jump of speed is no acceleration."""
    speed = np.zeros((20, 2))
    speed[10:] = 5.0
    inputs = {"q_rad": np.zeros((20, 2)), "dq_rad_per_s": speed}

    found = run(single(planar_leg()), inputs, ticks=20, reset_at=10)

    assert found["leg_ddq"][:, 0] == pytest.approx(np.zeros(20), abs=1e-12)


def test_screw_gives_the_lever_arm_of_its_triangle() -> None:
    """Ratio = 2 pi / lead * lever arm, at any angle; beyond the range it stays."""
    leg = planar_leg()
    leg["joint"][1]["transmission"] = {
        "kind": "screw",
        "lead_m": 0.004,
        "anchor_base_m": [0.05, 0.0, 0.12],
        "anchor_link_m": [0.04, 0.0, -0.03],
        "range_rad": [-1.2, -0.1],
    }
    angles = np.linspace(-1.2, -0.1, 12)
    inputs = {
        "q_rad": np.stack([0 * angles, angles], axis=1),
        "dq_rad_per_s": np.zeros((12, 2)),
        "current_A": np.ones((12, 2)),
    }

    found = run(single(leg), inputs, ticks=12)

    # Law of cosines, worked out apart from the code: l^2 = a^2 + b^2 - 2 a b cos(gamma), dl/dgamma = a b
    # sin(gamma)/l, where gamma is the angle at the joint between the two anchors and moves one to one with the joint.
    a, b = np.hypot(0.05, 0.12), np.hypot(0.04, 0.03)
    gamma = np.arctan2(0.05, 0.12) - (np.arctan2(0.04, -0.03) + angles)
    length = np.sqrt(a * a + b * b - 2 * a * b * np.cos(gamma))
    arm = np.abs(a * b * np.sin(gamma)) / length
    assert found["tau_meas_Nm"][:, 1] == pytest.approx(0.1 * 2 * np.pi / 0.004 * arm, rel=1e-6)
