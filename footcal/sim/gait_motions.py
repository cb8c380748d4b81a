"""The motions a simulated robot can make, by name."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Final

import numpy as np
from scipy.signal import lfilter

from footcal.records import FloatArray
from footcal.sim.gait_plan import MotionPlan, Stance, ramp, slow_noise
from footcal.sim.gait_steps import TROT, WALK, RUBBER_SINK_m, gait_plan
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


def homes_m(robot: SimRobot) -> FloatArray:
    """Return where the balls stand under the hips, (4, 3)."""
    rows = [
        (leg.hip_B_m[0], leg.hip_B_m[1] + leg.side * leg.offset_m, leg.foot_radius_m - RUBBER_SINK_m)
        for leg in robot.legs
    ]
    return np.array(rows)


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
    return _pushed(robot, stand(robot, t_s, rng), rng)


def trot_push(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Trot, and be pushed as in `push`."""
    return _pushed(robot, trot(robot, t_s, rng), rng)


def _pushed(robot: SimRobot, plan: MotionPlan, rng: np.random.Generator) -> MotionPlan:
    """Return the plan with pushes, and with a body path that answers them as a damped spring of 1.5 Hz."""
    t_s, force = plan.t_s, np.zeros((3, plan.t_s.size))
    start = 2.0
    while start < t_s[-1] - 1.0:
        way = rng.uniform(0.0, 2.0 * np.pi)
        shape = ramp(t_s, start, start + 0.03) * (1.0 - ramp(t_s, start + PUSH_s - 0.03, start + PUSH_s))
        force += PUSH_N * np.array([np.cos(way), np.sin(way), 0.0])[:, None] * shape
        start += rng.uniform(2.5, 4.5)
    dt_s, rate, damping = float(t_s[1] - t_s[0]), 2.0 * np.pi * 1.5, 0.6
    over = 1.0 + 2.0 * damping * rate * dt_s + (rate * dt_s) ** 2
    back = [1.0, -(2.0 + 2.0 * damping * rate * dt_s) / over, 1.0 / over]
    return replace(
        plan, push_N=force, place_m=plan.place_m + lfilter([dt_s**2 / over], back, force / robot.mass_kg, axis=1)
    )


def hang(robot: SimRobot, t_s: FloatArray, rng: np.random.Generator) -> MotionPlan:
    """Hang in a hoist with all feet in the air, shaken at 1 to 5 Hz."""
    n = t_s.size
    going = ramp(t_s, 0.5, 2.0) * (0.35 + 0.65 * ramp(np.sin(2.0 * np.pi * t_s / 8.0), -0.5, 0.5))
    place = np.array([0.0, 0.0, robot.stance_m + 0.3])[:, None] + going * np.stack(
        [_shaken(t_s, rng, 2.5) for _ in range(3)]
    )
    rpy = going * np.stack([_shaken(t_s, rng, s) for s in (6.0, 6.0, 3.0)])
    angles = np.repeat(_posture(robot)[:, :, None], n, axis=2)
    angles += 0.06 * np.stack([[slow_noise(t_s, rng, 0.1, 0.6) for _ in range(3)] for _ in range(4)])
    angles += going * np.stack([[_shaken(t_s, rng, 6.0) for _ in range(3)] for _ in range(4)])
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


def _shaken(t_s: FloatArray, rng: np.random.Generator, accel_rms: float) -> FloatArray:
    """Return a motion at 1 to 5 Hz whose second derivative has about that rms; (n,)."""
    rates = 2.0 * np.pi * rng.uniform(1.0, 5.0, size=4)
    phases = rng.uniform(0.0, 2.0 * np.pi, size=4)
    size = accel_rms / np.sqrt(2.0) / rates**2
    result: FloatArray = np.sum(size[:, None] * np.sin(rates[:, None] * t_s + phases[:, None]), axis=0)
    return result


def _posture(robot: SimRobot) -> FloatArray:
    """Return leg angles about as in standing, (4, 3)."""
    return np.array([[0.0, -0.65 * leg.knee_sign, 1.30 * leg.knee_sign] for leg in robot.legs])


MOTIONS: Final[Mapping[str, Plan]] = {
    "stand": stand,
    "walk": walk,
    "trot": trot,
    "push": push,
    "trot_push": trot_push,
    "hang": hang,
}
