"""The simulated robot's encoders and inertial unit: true motion in, readings as sent out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from scipy.signal import butter, lfilter, lfilter_zi

from footcal.records import FloatArray
from footcal.sim.gait_plan import slow_noise
from footcal.sim.kinematics import BasePath
from footcal.sim.momentum import second_derivative
from footcal.sim.robot import GRAVITY_m_per_s2, SimLeg, SimRobot

ENCODER_STEP_rad: Final = 2.0 * np.pi / 2**17  # seen at the joint
ENCODER_NOISE_rad: Final = 1.5e-5
RATE_SPAN_s: Final = 0.003  # over which the drive takes a difference of angles
GYRO_NOISE_rad_per_s: Final = 0.002
GYRO_BIAS_rad_per_s: Final = 0.003
ACCEL_NOISE_m_per_s2: Final = 0.04
ACCEL_BIAS_m_per_s2: Final = 0.04
ACCEL_CORNER_Hz: Final = 250.0
ATTITUDE_ERROR_rad: Final = 0.004  # rms of the attitude filter's slow error


@dataclass(frozen=True, slots=True)
class ImuReadings:
    """What the inertial unit sends, and the true values behind it."""

    quat_WB: FloatArray  # (4, n) w, x, y, z, body to world
    gyro_rad_per_s: FloatArray  # (3, n) axes of the unit
    accel_m_per_s2: FloatArray  # (3, n) axes of the unit, +g up at rest


def encoder_readings(
    leg: SimLeg, joint_rad: FloatArray, dt_s: float, rng: np.random.Generator
) -> tuple[FloatArray, FloatArray]:
    """Return angles and rates as the encoders send them, (3, n) each, for joint coordinates (3, n)."""
    sign, offset = np.array(leg.encoder_sign)[:, None], np.array(leg.encoder_offset_rad)[:, None]
    shown = sign * joint_rad + offset + ENCODER_NOISE_rad * rng.standard_normal(joint_rad.shape)
    shown = np.round(shown / ENCODER_STEP_rad) * ENCODER_STEP_rad
    span = max(1, round(RATE_SPAN_s / dt_s))
    before = np.concatenate([np.repeat(shown[:, :1], span, axis=1), shown[:, :-span]], axis=1)
    return shown, (shown - before) / (span * dt_s)


def body_rate(base: BasePath, dt_s: float) -> FloatArray:
    """Return the angular rate in body axes, (3, n), from R' dR/dt."""
    change = np.gradient(base.rotation, dt_s, axis=2)
    spin = np.einsum("jin,jkn->ikn", base.rotation, change)
    return 0.5 * np.stack([spin[2, 1] - spin[1, 2], spin[0, 2] - spin[2, 0], spin[1, 0] - spin[0, 1]])


def specific_force(robot: SimRobot, base: BasePath, dt_s: float) -> FloatArray:
    """Return acceleration less gravity where the unit sits, in body axes, (3, n)."""
    pull = second_derivative(base.to_world(np.array(robot.imu_B_m)), dt_s)
    pull[2] += GRAVITY_m_per_s2
    return base.to_body(pull)


def rotation_rpy(rpy_rad: tuple[float, float, float]) -> FloatArray:
    """Return the (3, 3) rotation from a part's axes to its parent's for roll, pitch, yaw."""
    fixed = BasePath.from_rpy(np.zeros((3, 1)), np.array(rpy_rad)[:, None])
    result: FloatArray = fixed.rotation[:, :, 0]
    return result


def quaternion(rotation: FloatArray) -> FloatArray:
    """Return w, x, y, z, (4, n), of rotations (3, 3, n) that tilt by less than 90 degrees."""
    w = 0.5 * np.sqrt(np.maximum(1.0 + rotation[0, 0] + rotation[1, 1] + rotation[2, 2], 1e-12))
    x = (rotation[2, 1] - rotation[1, 2]) / (4.0 * w)
    y = (rotation[0, 2] - rotation[2, 0]) / (4.0 * w)
    z = (rotation[1, 0] - rotation[0, 1]) / (4.0 * w)
    parts: list[FloatArray] = [w, x, y, z]
    out = np.stack(parts)
    unit: FloatArray = out / np.sqrt(np.sum(out**2, axis=0))
    return unit


def imu_readings(
    robot: SimRobot, base: BasePath, rpy_rad: FloatArray, t_s: FloatArray, rng: np.random.Generator
) -> ImuReadings:
    """Return what the unit sends while the body moves along a path of attitude rpy (3, n)."""
    dt_s = float(t_s[1] - t_s[0])
    to_unit = rotation_rpy(robot.imu_rpy_rad).T
    gyro = to_unit @ body_rate(base, dt_s)
    gyro += GYRO_BIAS_rad_per_s * rng.standard_normal((3, 1)) + GYRO_NOISE_rad_per_s * rng.standard_normal(gyro.shape)
    b, a = butter(2, min(ACCEL_CORNER_Hz * 2.0 * dt_s, 0.99))
    accel = to_unit @ specific_force(robot, base, dt_s)
    accel = lfilter(b, a, accel, axis=1, zi=lfilter_zi(b, a)[None, :] * accel[:, :1])[0]
    accel += ACCEL_BIAS_m_per_s2 * rng.standard_normal((3, 1)) + ACCEL_NOISE_m_per_s2 * rng.standard_normal(accel.shape)
    error = ATTITUDE_ERROR_rad / np.sqrt(2.0) * np.stack([slow_noise(t_s, rng, 0.02, 0.2) for _ in range(3)])
    believed = BasePath.from_rpy(base.place_m, rpy_rad + error)
    return ImuReadings(quaternion(believed.rotation), gyro, accel)
