"""Walking gaits: when each foot stands and where, and the path it takes between."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Final

import numpy as np
from scipy.ndimage import gaussian_filter1d

from footcal.records import FloatArray
from footcal.sim.gait_plan import (
    MotionPlan,
    Stance,
    ramp,
    sinking,
    slow_noise,
    smooth_step,
    stopping,
    sunk_m,
    swing_height,
)
from footcal.sim.robot import SimRobot

RUBBER_SINK_m: Final = 0.0015  # of a foot that has stood from the start
START_s: Final = 0.8  # the robot stands until then
FOOT_EFFECTIVE_kg: Final = 0.35  # what must be stopped at touchdown: shank and part of the thigh and rotors


@dataclass(frozen=True, slots=True)
class Gait:
    """Rhythm and manner of a gait."""

    stride_Hz: tuple[float, float]
    duty: tuple[float, float]
    phases: tuple[float, float, float, float]  # of the touchdowns, legs in order
    speed_m_per_s: float
    lift_m: float
    touchdown_m_per_s: tuple[float, float]
    stop_s: tuple[float, float]
    rise_s: float  # in which a foot takes its load
    fall_s: float  # in which it gives it back
    limit_share: float  # the most one foot carries in mid-stance, over the weight
    bell: float  # by how much of it the limit is lower at both ends of a stance
    sway: float  # how far the body follows the middle of the feet that stand


WALK: Final = Gait(
    stride_Hz=(0.78, 0.82),
    duty=(0.74, 0.76),
    phases=(0.25, 0.75, 0.0, 0.5),
    speed_m_per_s=0.14,
    lift_m=0.045,
    touchdown_m_per_s=(0.2, 0.4),
    stop_s=(0.006, 0.012),
    rise_s=0.030,
    fall_s=0.080,
    limit_share=0.8,
    bell=0.0,
    sway=0.75,
)
TROT: Final = Gait(
    stride_Hz=(1.8, 2.5),
    duty=(0.52, 0.60),
    phases=(0.0, 0.5, 0.5, 0.0),
    speed_m_per_s=0.35,
    lift_m=0.050,
    touchdown_m_per_s=(0.3, 0.6),
    stop_s=(0.006, 0.010),
    rise_s=0.030,
    fall_s=0.050,
    limit_share=0.85,
    bell=0.45,
    sway=0.0,
)


def homes_m(robot: SimRobot) -> FloatArray:
    """Return where the balls stand under the hips, (4, 3)."""
    rows = [
        (leg.hip_B_m[0], leg.hip_B_m[1] + leg.side * leg.offset_m, leg.foot_radius_m - RUBBER_SINK_m)
        for leg in robot.legs
    ]
    return np.array(rows)


def stance_lists(
    robot: SimRobot, gait: Gait, t_s: FloatArray, drift_m: FloatArray, rng: np.random.Generator
) -> tuple[tuple[Stance, ...], ...]:
    """Return the stances of each leg, the first from long before the start; feet step after the body's drift (2, n)."""
    end_s = float(t_s[-1])
    period_s = 1.0 / rng.uniform(*gait.stride_Hz)
    duty = rng.uniform(*gait.duty)
    starts = (
        START_s
        + period_s * (1.0 - duty)
        + np.cumsum(np.r_[0.0, period_s * rng.uniform(0.97, 1.03, int(end_s / period_s) + 3)])
    )
    lists = []
    for leg, phase in zip(robot.legs, gait.phases, strict=True):
        home = (leg.hip_B_m[0], leg.hip_B_m[1] + leg.side * leg.offset_m)
        touch = starts + phase * period_s + 0.008 * period_s * rng.uniform(-1.0, 1.0, starts.size)
        leave = touch + duty * period_s + 0.008 * period_s * rng.uniform(-1.0, 1.0, starts.size)
        stances = [Stance(-10.0, float(touch[0] - (1.0 - duty) * period_s), home, 0.0, 0.01)]
        for first, last in zip(touch, leave, strict=True):
            middle_s = 0.5 * (first + last)
            aside = [float(np.interp(middle_s, t_s, row)) for row in drift_m]
            x_m = walked_m(middle_s, gait.speed_m_per_s) + home[0] + aside[0] + 0.004 * rng.standard_normal()
            y_m = home[1] + aside[1] + 0.003 * rng.standard_normal()
            fast, stop = rng.uniform(*gait.touchdown_m_per_s), rng.uniform(*gait.stop_s)
            stances.append(Stance(float(first), float(last), (float(x_m), float(y_m)), float(fast), float(stop)))
        lists.append(tuple(stances))
    return tuple(lists)


def walked_m(t_s: FloatArray | float, speed_m_per_s: float, gain_s: float = 1.5) -> FloatArray:
    """Return how far the body has come: at rest until START_s, up to speed within `gain_s`."""
    u = np.clip((np.asarray(t_s, dtype=float) - START_s) / gain_s, 0.0, None)
    inside = np.minimum(u, 1.0)
    gained = gain_s * (inside**3 - 0.5 * inside**4)  # integral of 3u^2 - 2u^3
    result: FloatArray = speed_m_per_s * (gained + gain_s * np.maximum(u - 1.0, 0.0))
    return result


def foot_path(t_s: FloatArray, stances: tuple[Stance, ...], radius_m: float, lift_m: float) -> FloatArray:
    """Return the path of a ball centre, (3, n)."""
    path = np.empty((3, t_s.size))
    path[:, :] = np.array([*stances[0].place_m, radius_m - RUBBER_SINK_m])[:, None]
    for old, new in pairwise(stances):
        low_m = radius_m - (sunk_m(old) if old.speed_m_per_s > 0.0 else RUBBER_SINK_m)
        swing = (t_s >= old.end_s) & (t_s < new.start_s)
        span_s = new.start_s - old.end_s
        u = (t_s[swing] - old.end_s) / span_s
        across = smooth_step(u / 0.96)
        for axis in range(2):
            path[axis, swing] = old.place_m[axis] + across * (new.place_m[axis] - old.place_m[axis])
        path[2, swing] = low_m + swing_height(u, lift_m, radius_m - low_m, new.speed_m_per_s * span_s)
        stands = (t_s >= new.start_s) & (t_s < new.end_s)
        path[0, stands], path[1, stands] = new.place_m
        path[2, stands] = radius_m + sinking(t_s[stands], new)
    return path


def bearing(t_s: FloatArray, stances: tuple[Stance, ...], rise_s: float, fall_s: float) -> FloatArray:
    """Return how far a foot may carry: 0 in the air, up within `rise_s`, down within `fall_s` before lift-off; (n,)."""
    total = np.zeros(t_s.size)
    for stance in stances:
        inside = (t_s >= stance.start_s) & (t_s <= stance.end_s)
        t = t_s[inside]
        total[inside] = ramp(t, stance.start_s, stance.start_s + rise_s) * (
            1.0 - ramp(t, stance.end_s - fall_s, stance.end_s)
        )
    return total


def bell(t_s: FloatArray, stances: tuple[Stance, ...], depth: float) -> FloatArray:
    """Return 1 in mid-stance, 1 - depth at its ends, between them a half sine; (n,)."""
    total = np.ones(t_s.size)
    for stance in stances[1:]:
        inside = (t_s >= stance.start_s) & (t_s <= stance.end_s)
        u = (t_s[inside] - stance.start_s) / (stance.end_s - stance.start_s)
        total[inside] = 1.0 - depth + depth * np.sin(np.pi * u)
    return total


def impacts_N(t_s: FloatArray, stances: tuple[Stance, ...]) -> FloatArray:
    """Return the force that stops a foot at each touchdown, with the dip of the rebound after it; (n,)."""
    total = np.zeros(t_s.size)
    for stance in stances:
        first = int(np.searchsorted(t_s, stance.start_s))
        part = slice(first, int(np.searchsorted(t_s, stance.start_s + 3.0 * stance.stop_s)))
        t = t_s[part]
        total[part] += FOOT_EFFECTIVE_kg * (stopping(t, stance) - 0.15 * stopping(t - 1.1 * stance.stop_s, stance))
    return total


def gait_plan(
    robot: SimRobot, gait: Gait, t_s: FloatArray, rng: np.random.Generator, drift_m: FloatArray | None = None
) -> MotionPlan:
    """Return the plan of a walk or trot that starts from standing, drifting aside by (2, n) if given."""
    drift = np.zeros((2, t_s.size)) if drift_m is None else drift_m
    lists = stance_lists(robot, gait, t_s, drift, rng)
    balls = np.stack(
        [foot_path(t_s, s, leg.foot_radius_m, gait.lift_m) for leg, s in zip(robot.legs, lists, strict=True)]
    )
    bears = np.stack([bearing(t_s, s, gait.rise_s, gait.fall_s) for s in lists])
    place = np.stack([walked_m(t_s, gait.speed_m_per_s), np.zeros(t_s.size), np.full(t_s.size, robot.stance_m)])
    place[:2] += drift
    if gait.sway:
        middle = np.einsum("kn,kcn->cn", bears, balls[:, :2]) / np.maximum(bears.sum(axis=0), 0.3)
        wide = 0.10 / gait.stride_Hz[0] / (t_s[1] - t_s[0])
        place[:2] += gait.sway * (gaussian_filter1d(middle, wide, axis=1) - place[:2])
    going = ramp(t_s, 0.0, START_s)
    rpy = np.stack([going * np.radians(0.5) * slow_noise(t_s, rng, 0.2, 1.0) for _ in range(3)])
    return MotionPlan(
        t_s=t_s,
        place_m=place,
        rpy_rad=rpy,
        bearing=bears,
        limit_N=gait.limit_share * robot.weight_N * bears * np.stack([bell(t_s, s, gait.bell) for s in lists]),
        impact_N=np.stack([impacts_N(t_s, s) for s in lists]),
        outside_share=np.zeros(t_s.size),
        balls_m=balls,
        stances=lists,
    )
