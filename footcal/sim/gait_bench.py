"""The two logs a drive is identified from, body held by a stand: joints swung in the air, known loads on the feet."""

from __future__ import annotations

from typing import Final

import numpy as np

from footcal.records import FloatArray
from footcal.sim.gait_plan import MotionPlan, ramp, slow_noise
from footcal.sim.robot import GRAVITY_m_per_s2, SimRobot

STEP_s: Final = 2.4  # one load approached from one side and held
MOVE_s: Final = 0.7  # of it, in which joints come to the pose and the load is put on
APPROACH_rad: Final = 0.06
LOADS: Final = (  # kg, and the way the load pushes, world
    (0.0, (0.0, 0.0, 1.0)),
    (4.0, (0.0, 0.0, 1.0)),
    (8.0, (0.0, 0.0, 1.0)),
    (3.0, (0.0, 0.0, -1.0)),
    (2.0, (1.0, 0.0, 0.0)),
    (2.0, (0.0, 1.0, 0.0)),
    (2.0, (-1.0, 0.0, 0.0)),
    (2.0, (0.0, -1.0, 0.0)),
)
POSES_rad: Final = ((0.0, 0.0, 0.0), (0.15, 0.25, -0.30), (-0.12, -0.20, 0.25))  # on top of the usual posture


def posture_rad(robot: SimRobot) -> FloatArray:
    """Return leg angles a, h, k about as in standing, (4, 3)."""
    return np.array([[0.0, -0.65 * leg.knee_sign, 1.30 * leg.knee_sign] for leg in robot.legs])


def _held(
    robot: SimRobot, t_s: FloatArray, angles_rad: FloatArray, force_N: FloatArray, steps: FloatArray
) -> MotionPlan:
    """Return the plan of a body held level by a stand; `steps` has the rows of press.steps.csv."""
    n = t_s.size
    names = ("t_start_s", "t_end_s", "mass_kg", "direction_x", "direction_y", "direction_z")
    return MotionPlan(
        t_s=t_s,
        place_m=np.repeat([[0.0], [0.0], [robot.stance_m + 0.3]], n, axis=1),
        rpy_rad=np.zeros((3, n)),
        bearing=np.zeros((4, n)),
        limit_N=np.zeros((4, n)),
        impact_N=np.zeros((4, n)),
        outside_share=np.ones(n),
        angles_rad=angles_rad,
        given_N=force_N,
        steps=dict(zip(names, steps.T, strict=True)) if steps.size else {},
    )


def swing(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Feet in the air: each joint swung slowly, then fast, with other frequencies on each joint."""
    n, end_s = t_s.size, float(t_s[-1])
    angles = np.repeat(posture_rad(robot)[:, :, None], n, axis=2)
    slow = ramp(t_s, 0.3, 1.3) * (1.0 - ramp(t_s, 0.45 * end_s, 0.45 * end_s + 1.0))
    fast = ramp(t_s, 0.45 * end_s + 0.5, 0.45 * end_s + 1.5)
    for leg in range(4):
        for joint in range(3):
            wide = (0.22, 0.35, 0.35)[joint]
            angles[leg, joint] += (
                wide * slow * np.sin(2.0 * np.pi * rng.uniform(0.15, 0.35) * t_s + rng.uniform(0.0, 6.0))
            )
            angles[leg, joint] += 0.3 * wide * fast * 0.5 * slow_noise(t_s, rng, 0.8, 3.0)
    return _held(robot, t_s, angles, np.zeros((4, 3, n)), np.empty((0, 6)))


def press(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Known loads on every foot at three poses, each approached from both sides and held."""
    n = t_s.size
    angles = np.repeat(posture_rad(robot)[:, :, None], n, axis=2)
    force = np.zeros((4, 3, n))
    rows = []
    sense = np.array([[leg.side, -leg.knee_sign, -leg.knee_sign] for leg in robot.legs])[
        :, :, None
    ]  # alike on all legs
    pose, load = np.zeros(3), np.zeros(3)
    for number in range(int(np.ceil((t_s[-1] + 1.0) / STEP_s))):
        start_s, side = STEP_s * number, (-1.0) ** number
        mass_kg, way = LOADS[number // 2 % len(LOADS)]
        new_pose = np.array(POSES_rad[number // (2 * len(LOADS)) % len(POSES_rad)])
        new_load = mass_kg * GRAVITY_m_per_s2 * np.array(way)
        put = ramp(t_s, start_s, start_s + 0.4)
        come = ramp(t_s, start_s, start_s + MOVE_s / 2.0) * (1.0 - ramp(t_s, start_s + MOVE_s / 2.0, start_s + MOVE_s))
        angles += sense * ((new_pose - pose)[None, :, None] * put + side * APPROACH_rad * come)
        force += (new_load - load)[None, :, None] * put
        pose, load = new_pose, new_load
        rows.append((start_s + MOVE_s + 0.3, start_s + STEP_s - 0.05, mass_kg, *way))
    kept = [row for row in rows if row[1] < t_s[-1] - 0.3]
    angles += 1e-4 * np.stack([[slow_noise(t_s, rng, 0.2, 1.0) for _ in range(3)] for _ in range(4)])
    return _held(robot, t_s, angles, force, np.array(kept))
