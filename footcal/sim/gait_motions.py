"""The motions a simulated robot can make, by name."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Final

import numpy as np
from scipy.signal import lfilter

from footcal.records import FloatArray
from footcal.sim.gait_bench import press, swing
from footcal.sim.gait_hoist import hang, hoist
from footcal.sim.gait_plan import MotionPlan, Stance, ramp, slow_noise
from footcal.sim.gait_steps import TROT, WALK, gait_plan, homes_m
from footcal.sim.robot import SimRobot

Plan = Callable[[SimRobot, FloatArray, np.random.Generator], MotionPlan]
PUSH_N: Final = 50.0
PUSH_s: Final = 0.2


def walk(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Slow walk: 0.8 Hz, duty 0.75, one foot in the air at most times."""
    return gait_plan(robot, WALK, t_s, rng)


def trot(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Trot: 1.8 to 2.5 Hz, duty 0.52 to 0.60, diagonal feet together."""
    return gait_plan(robot, TROT, t_s, rng)


def stand(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Stand on four feet and shift the weight about, with pauses."""
    n = t_s.size
    pause = ramp(np.cos(2.0 * np.pi * t_s / 9.0 + rng.uniform(0.0, 6.0)), -0.6, 0.0)
    going = ramp(t_s, 0.2, 1.5)
    shift = np.stack(
        [0.018 * slow_noise(t_s, rng, 0.1, 0.5) for _ in range(2)] + [0.008 * slow_noise(t_s, rng, 0.1, 0.6)]
    )
    place = np.array([0.0, 0.0, robot.stance_m])[:, None] + going * pause * shift
    rpy = going * pause * np.radians(2.0) * np.stack([slow_noise(t_s, rng, 0.1, 0.6) for _ in range(3)])
    bears = np.stack([1.0 + 0.25 * np.clip(slow_noise(t_s, rng, 0.05, 0.3), -2.0, 2.0) for _ in range(4)])
    balls = np.repeat(homes_m(robot)[:, :, None], n, axis=2)
    stances = tuple((Stance(-10.0, float(t_s[-1]) + 10.0, (b[0], b[1]), 0.0, 0.01),) for b in homes_m(robot))
    return MotionPlan(
        t_s=t_s,
        place_m=place,
        rpy_rad=rpy,
        bearing=bears,
        limit_N=np.full((4, n), robot.weight_N),
        impact_N=np.zeros((4, n)),
        outside_share=np.zeros(n),
        balls_m=balls,
        stances=stances,
    )


def push(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Stand, and be pushed sideways by 50 N for 0.2 s every few seconds; the body gives way and comes back."""
    force, drift = _pushes(robot, t_s, rng, spring_Hz=2.5)
    plan = stand(robot, t_s, rng)
    return replace(plan, push_N=force, place_m=plan.place_m + drift)


def trot_push(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Trot, and be pushed as in `push`; the feet step after the body."""
    force, drift = _pushes(robot, t_s, rng, spring_Hz=0.7)
    return replace(gait_plan(robot, TROT, t_s, rng, drift[:2]), push_N=force)


def _pushes(
    robot: SimRobot, t_s: FloatArray, rng: np.random.Generator, spring_Hz: float
) -> tuple[FloatArray, FloatArray]:
    """Return pushes, (3, n), and how the body gives way to them as a damped spring, (3, n)."""
    force = np.zeros((3, t_s.size))
    start = 2.0
    while start < t_s[-1] - 1.0:
        way = rng.uniform(0.0, 2.0 * np.pi)
        shape = ramp(t_s, start, start + 0.03) * (1.0 - ramp(t_s, start + PUSH_s - 0.03, start + PUSH_s))
        force += PUSH_N * np.array([np.cos(way), np.sin(way), 0.0])[:, None] * shape
        start += rng.uniform(2.5, 4.5)
    dt_s, rate, damping = float(t_s[1] - t_s[0]), 2.0 * np.pi * spring_Hz, 0.7
    over = 1.0 + 2.0 * damping * rate * dt_s + (rate * dt_s) ** 2
    back = [1.0, -(2.0 + 2.0 * damping * rate * dt_s) / over, 1.0 / over]
    return force, lfilter([dt_s**2 / over], back, force / robot.mass_kg, axis=1)


MOTIONS: Final[Mapping[str, Plan]] = {
    "stand": stand,
    "walk": walk,
    "trot": trot,
    "push": push,
    "trot_push": trot_push,
    "hang": hang,
    "hoist": hoist,
    "swing": swing,
    "press": press,
}
