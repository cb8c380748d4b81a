"""Motions on a hoist: hanging and shaken, lowered to the ground and lifted again."""

from __future__ import annotations

from typing import Final

import numpy as np

from footcal.records import FloatArray
from footcal.sim.gait_bench import posture_rad
from footcal.sim.gait_plan import MotionPlan, Stance, ramp, slow_noise, smooth_step
from footcal.sim.gait_steps import homes_m
from footcal.sim.robot import SimRobot

TAKE_UP_m: Final = 0.008  # a foot sinks in so far, by legs and floor, until it carries its share


def hang(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Hang in a hoist with all feet in the air, shaken at 1 to 5 Hz."""
    n = t_s.size
    going = ramp(t_s, 0.5, 2.0) * (0.35 + 0.65 * ramp(np.sin(2.0 * np.pi * t_s / 8.0), -0.5, 0.5))
    place = np.array([0.0, 0.0, robot.stance_m + 0.3])[:, None] + going * np.stack(
        [shaken(t_s, rng, 2.5) for _ in range(3)]
    )
    rpy = going * np.stack([shaken(t_s, rng, s) for s in (6.0, 6.0, 3.0)])
    angles = np.repeat(posture_rad(robot)[:, :, None], n, axis=2)
    angles += 0.06 * np.stack([[slow_noise(t_s, rng, 0.1, 0.6) for _ in range(3)] for _ in range(4)])
    angles += going * np.stack([[shaken(t_s, rng, 6.0) for _ in range(3)] for _ in range(4)])
    return MotionPlan(
        t_s=t_s,
        place_m=place,
        rpy_rad=rpy,
        bearing=np.zeros((4, n)),
        limit_N=np.zeros((4, n)),
        impact_N=np.zeros((4, n)),
        outside_share=np.ones(n),
        angles_rad=angles,
    )


def shaken(t_s: FloatArray, rng: np.random.Generator, accel_rms: float) -> FloatArray:
    """Return a motion at 1 to 5 Hz whose second derivative has about that rms; (n,)."""
    rates = 2.0 * np.pi * rng.uniform(1.0, 5.0, size=4)
    phases = rng.uniform(0.0, 2.0 * np.pi, size=4)
    size = accel_rms / np.sqrt(2.0) / rates**2
    result: FloatArray = np.sum(size[:, None] * np.sin(rates[:, None] * t_s + phases[:, None]), axis=0)
    return result


def hoist(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Be lowered from a hoist until the feet, one after another, carry everything; stand; be lifted again."""
    n, end_s = t_s.size, float(t_s[-1])
    lowered = ramp(t_s, 0.12 * end_s, 0.50 * end_s) * (1.0 - ramp(t_s, 0.65 * end_s, 0.95 * end_s))
    gap = 0.045 - (0.045 + TAKE_UP_m) * lowered  # between feet and floor, for a foot of nominal height
    depth = rng.uniform(0.0, 0.010, size=(4, 1)) - gap
    bears = smooth_step(depth / TAKE_UP_m)
    free = 1.0 - bears.mean(axis=0)
    sway = np.stack([0.006 * free * slow_noise(t_s, rng, 0.4, 0.8) for _ in range(2)])
    balls = np.repeat(homes_m(robot)[:, :, None], n, axis=2)
    balls[:, 2] += 0.5 * (np.sqrt(depth**2 + 0.0004**2) - depth)
    balls[:, :2] += (1.0 - ramp(depth, -0.003, 0.0))[:, None] * sway
    place = np.stack([sway[0], sway[1], robot.stance_m + gap])
    stances = tuple((Stance(-10.0, end_s + 10.0, (b[0], b[1]), 0.0, 0.01),) for b in homes_m(robot))
    return MotionPlan(
        t_s=t_s,
        place_m=place,
        rpy_rad=np.radians(0.5) * free * np.stack([slow_noise(t_s, rng, 0.3, 0.8) for _ in range(3)]),
        bearing=bears,
        limit_N=robot.weight_N * bears,
        impact_N=np.zeros((4, n)),
        outside_share=free,
        balls_m=balls,
        stances=stances,
    )
