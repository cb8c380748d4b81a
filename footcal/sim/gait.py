"""Logs of a simulated four-legged robot with their truth: motion, ground force, torque, current, foot sensor, IMU.

Everything is invented. The physics is the simulator's own: mass points instead of recursions, bristle friction
instead of a curve over speed, forces that the whole robot's momentum demands.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Final, Literal

import numpy as np

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.drives import DriveRun, run_drive
from footcal.sim.gait_balance import Consistent, consistent
from footcal.sim.gait_motions import MOTIONS
from footcal.sim.gait_plan import MotionPlan, slow_noise
from footcal.sim.imu import encoder_readings, imu_readings
from footcal.sim.robot import RobotPair, SimLeg, draw_robot
from footcal.sim.robot_contact import contact_truth
from footcal.sim.robot_foot import FootSensor, felt_N, slow_converter
from footcal.sim.robot_toml import robot_toml

BEFORE_s: Final = 0.5  # simulated before and after the log, so that its ends are as good as its middle
AFTER_s: Final = 0.3


@dataclass(frozen=True, slots=True)
class SimulatedRun:
    """A log as a robot would write it, the truth behind it, and the robot's description."""

    log: dict[str, FloatArray]  # columns of DESIGN's robot log
    truth: dict[str, FloatArray]  # t_s, <leg>.fx_N, fy_N, fz_N in the body frame, <leg>.contact 0/1
    robot_toml: str  # as the maker states it
    metadata: dict[str, str]  # frame of the truth, motion, drive, seed
    robot: RobotPair
    inner: dict[str, FloatArray]  # never in a real log: axial_N, side forces, torques, friction, body pose
    steps: dict[str, FloatArray] = field(default_factory=dict)  # press.steps.csv of a press log


def simulate(
    motion: str,
    drive: Literal["belt", "screw"],
    duration_s: float,
    seed: int,
    *,
    rate_Hz: float = 1000.0,
    sensors: Mapping[str, FootSensor | None] | None = None,
    rear_knees_mirrored: bool = False,
    robot: RobotPair | int = 0,
    foot_rate_Hz: float | None = None,
    foot_ids: Mapping[str, str] | None = None,
) -> SimulatedRun:
    """Return a log of one motion.

    Args:
        motion: a name in `footcal.sim.gait_motions.MOTIONS`.
        drive: "belt" or "screw".
        duration_s: length of the log.
        seed: of the motion, noise and sensors.
        rate_Hz: rows per second, 500 to 5000.
        sensors: leg name to foot sensor; without one, `<leg>.raw` is the ideal axial force in newtons.
        rear_knees_mirrored: the variant whose rear knees point forwards.
        robot: which robot of the series, or a robot drawn before (then drive and knees are the robot's own).
        foot_rate_Hz: of a slow foot converter that sends the mean of its window once; None: every row.
        foot_ids: leg name to foot_id for the robot description.

    Returns:
        Log, truth (frame: body), robot description, and the inner truth for tests.

    Raises:
        SettingError: no such motion or drive, or a duration or rate out of range.
    """
    _check(motion, duration_s, rate_Hz)
    pair = robot if isinstance(robot, RobotPair) else draw_robot(drive, robot, rear_knees_mirrored=rear_knees_mirrored)
    rng = np.random.default_rng([seed, 977])
    dt_s = 1.0 / rate_Hz
    rows = np.arange(-round(BEFORE_s * rate_Hz), round((duration_s + AFTER_s) * rate_Hz))
    t_s = rows.astype(np.float64) * dt_s
    plan = MOTIONS[motion](pair.true, t_s, rng)
    state = consistent(pair.true, plan)
    kept = slice(round(BEFORE_s * rate_Hz), round((BEFORE_s + duration_s) * rate_Hz))
    log: dict[str, FloatArray] = {"t_s": t_s}
    truth: dict[str, FloatArray] = {"t_s": t_s}
    inner: dict[str, FloatArray] = {"t_s": t_s}
    for index, leg in enumerate(pair.true.legs):
        sensor = None if sensors is None else sensors.get(leg.name)
        _add_leg(leg, index, state, t_s, rng, (log, truth, inner), sensor)
    _add_body(pair, state, plan, rng, log, inner)
    log, truth, inner = (
        {name: np.ascontiguousarray(v[kept]) for name, v in part.items()} for part in (log, truth, inner)
    )
    if foot_rate_Hz is not None:
        for leg in pair.true.legs:
            log[f"{leg.name}.raw"] = slow_converter(log["t_s"], log[f"{leg.name}.raw"], foot_rate_Hz)
    metadata = {
        "frame": "body",
        "motion": motion,
        "drive": pair.drive,
        "seed": str(seed),
        "origin": "invented, footcal simulator",
    }
    text = robot_toml(pair.stated, foot_ids=foot_ids, foot_rate_Hz=foot_rate_Hz)
    return SimulatedRun(log, truth, text, metadata, pair, inner, plan.steps)


def _check(motion: str, duration_s: float, rate_Hz: float) -> None:
    where = "simulated run"
    if motion not in MOTIONS:
        raise SettingError(where, f"no motion {motion!r}", "Choose one of " + ", ".join(MOTIONS) + ".")
    if not 1.0 <= duration_s <= 3600.0:
        raise SettingError(where, f"duration_s is {duration_s:g}, must be 1 to 3600", "Give seconds.")
    if not 500.0 <= rate_Hz <= 5000.0:
        raise SettingError(where, f"rate_Hz is {rate_Hz:g}, must be 500 to 5000", "Take 1000 and thin out the log.")


def _add_leg(
    leg: SimLeg,
    index: int,
    state: Consistent,
    t_s: FloatArray,
    rng: np.random.Generator,
    tables: tuple[dict[str, FloatArray], dict[str, FloatArray], dict[str, FloatArray]],
    sensor: FootSensor | None,
) -> None:
    """Add one leg's columns to log, truth and inner truth."""
    log, truth, inner = tables
    dt_s = float(t_s[1] - t_s[0])
    part, force_W = state.whole.limbs[index], state.force_W_N[index]
    joint = leg.joint_angles(part.angles_rad)
    load = part.torques_Nm(state.contact_m[index], force_W)
    runs = [run_drive(leg.drives[j], t_s, joint[j], load[j], rng) for j in range(3)]
    seen = joint + np.stack([run.micro_rad for run in runs])
    angle, rate = encoder_readings(leg, seen, dt_s, rng)
    felt = felt_N(leg, part.path, force_W, dt_s)
    temp_C = 26.0 + rng.uniform(-1.0, 3.0) + 0.3 * slow_noise(t_s, rng, 0.002, 0.01)
    log[f"{leg.name}.raw"] = (
        felt[2] if sensor is None else sensor.respond(t_s - t_s[0], felt[2], temp_C, rng, side_N=felt[:2].T)
    )
    log[f"{leg.name}.temp_C"] = np.round(temp_C, 2)
    for j, run in enumerate(runs):
        log[f"{leg.name}.q{j}"], log[f"{leg.name}.dq{j}"] = angle[j], rate[j]
        log[f"{leg.name}.i{j}"] = leg.encoder_sign[j] * run.current_A
        log[f"{leg.name}.motor_temp_C{j}"] = np.round(run.motor_temp_C, 1)
    force_B = state.whole.base.to_body(force_W)
    for axis, row in zip("xyz", force_B, strict=True):
        truth[f"{leg.name}.f{axis}_N"] = row
    truth[f"{leg.name}.contact"] = contact_truth(force_W[2], dt_s).astype(np.float64)
    _add_inner(leg.name, inner, joint, load, felt, force_W, runs)


def _add_inner(
    name: str,
    inner: dict[str, FloatArray],
    joint: FloatArray,
    load: FloatArray,
    felt: FloatArray,
    force_W: FloatArray,
    runs: list[DriveRun],
) -> None:
    inner[f"{name}.side_x_N"], inner[f"{name}.side_y_N"], inner[f"{name}.axial_N"] = felt
    for axis, row in zip("xyz", force_W, strict=True):
        inner[f"{name}.f{axis}_W_N"] = row
    for j, run in enumerate(runs):
        inner[f"{name}.joint_rad{j}"], inner[f"{name}.load_Nm{j}"] = joint[j], load[j]
        inner[f"{name}.motor_Nm{j}"], inner[f"{name}.friction_Nm{j}"] = run.motor_Nm, run.friction_Nm


def _add_body(
    pair: RobotPair,
    state: Consistent,
    plan: MotionPlan,
    rng: np.random.Generator,
    log: dict[str, FloatArray],
    inner: dict[str, FloatArray],
) -> None:
    """Add the inertial unit to the log, and the body's true pose to the inner truth."""
    t_s, push_N = plan.t_s, plan.push_N
    imu = imu_readings(pair.true, state.whole.base, state.rpy_rad, t_s, rng)
    for name, row in zip("wxyz", imu.quat_WB, strict=True):
        log[f"imu.q{name}"] = row
    for axis in range(3):
        log[f"imu.w{'xyz'[axis]}"] = imu.gyro_rad_per_s[axis]
        log[f"imu.a{'xyz'[axis]}"] = imu.accel_m_per_s2[axis]
        inner[f"body.{'xyz'[axis]}_m"] = state.whole.base.place_m[axis]
        inner[f"body.{('roll', 'pitch', 'yaw')[axis]}_rad"] = state.rpy_rad[axis]
        inner[f"push.{'xyz'[axis]}_N"] = np.zeros(t_s.size) if push_N is None else push_N[axis]
        inner[f"com.{'xyz'[axis]}_m"] = state.whole.com_m[axis]
        inner[f"need.{'xyz'[axis]}_N"] = state.whole.wrench[axis]
        inner[f"surplus.{'xyz'[axis]}_N"] = state.surplus[axis]
        inner[f"surplus_moment.{'xyz'[axis]}_Nm"] = state.surplus[3 + axis]
