"""What a motion shall be before forces are known: body path, foot places, who may carry, what holds from outside."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from footcal.records import FloatArray


@dataclass(frozen=True, slots=True)
class Stance:
    """One foot on the ground, from touchdown to lift-off."""

    start_s: float
    end_s: float
    place_m: tuple[float, float]  # x, y of the ball centre at touchdown, world
    speed_m_per_s: float  # downwards, at touchdown
    stop_s: float  # time in which the foot comes to rest


@dataclass(frozen=True, slots=True)
class MotionPlan:
    """A motion to be made consistent with Newton's law; n samples, world frame, vectors (3, n)."""

    t_s: FloatArray
    place_m: FloatArray  # (3, n) body origin as wanted
    rpy_rad: FloatArray  # (3, n) attitude as wanted
    bearing: FloatArray  # (4, n) how far each foot may carry, 0 in the air to 1
    limit_N: FloatArray  # (4, n) the most a foot carries
    impact_N: FloatArray  # (4, n) the force that stops the foot at touchdown, upwards
    outside_share: FloatArray  # (n,) share of the needed wrench given by a stand, hoist or hand
    balls_m: FloatArray | None = None  # (4, 3, n) foot places
    angles_rad: FloatArray | None = None  # (4, 3, n) leg angles, instead of foot places
    stances: tuple[tuple[Stance, ...], ...] = ((), (), (), ())  # in which the ball may roll
    push_N: FloatArray | None = None  # (3, n) a push at the body origin
    given_N: FloatArray | None = None  # (4, 3, n) forces on the feet that are known beforehand
    steps: dict[str, FloatArray] = field(default_factory=dict)  # loads of a press log, DESIGN's press.steps.csv


def smooth_step(u: FloatArray) -> FloatArray:
    """Return a step from 0 to 1 over u in 0…1 with two continuous derivatives."""
    v = np.clip(u, 0.0, 1.0)
    result: FloatArray = v**3 * (10.0 - 15.0 * v + 6.0 * v**2)
    return result


def ramp(t_s: FloatArray, start_s: float, end_s: float) -> FloatArray:
    """Return the smooth step between two times."""
    return smooth_step((t_s - start_s) / (end_s - start_s))


def slow_noise(t_s: FloatArray, rng: np.random.Generator, low_Hz: float, high_Hz: float, count: int = 4) -> FloatArray:
    """Return a sum of sines of random frequency and phase, about unit rms, (n,)."""
    rates = rng.uniform(low_Hz, high_Hz, size=count)
    phases = rng.uniform(0.0, 2.0 * np.pi, size=count)
    waves = np.sin(2.0 * np.pi * rates[:, None] * t_s + phases[:, None])
    result: FloatArray = waves.sum(axis=0) * np.sqrt(2.0 / count)
    return result


def swing_height(u: FloatArray, rise_m: float, end_m: float, fall_m: float) -> FloatArray:
    """Return the height of a swinging foot over its start.

    The sextic that starts at rest, passes `rise_m` at u = 0.45, and ends at `end_m` falling by `fall_m` per unit of u
    with no acceleration.
    """
    powers = np.array([3, 4, 5, 6])
    rows = np.array([0.45**powers, np.ones(4), powers, powers * (powers - 1)], dtype=float)
    c = np.linalg.solve(rows, np.array([rise_m, end_m, -fall_m, 0.0]))
    result: FloatArray = u**3 * (c[0] + u * (c[1] + u * (c[2] + u * c[3])))
    return result


def stopping(t_s: FloatArray, stance: Stance) -> FloatArray:
    """Return the upward acceleration that stops the foot at touchdown: a raised cosine, m/s^2."""
    u = (t_s - stance.start_s) / stance.stop_s
    inside = (u > 0.0) & (u < 1.0)
    pulse: FloatArray = np.where(inside, stance.speed_m_per_s / stance.stop_s * (1.0 - np.cos(2.0 * np.pi * u)), 0.0)
    return pulse


def sinking(t_s: FloatArray, stance: Stance) -> FloatArray:
    """Return how the foot's height changes after touchdown while it is stopped (the rubber gives), m, at most 0."""
    u = np.clip((t_s - stance.start_s) / stance.stop_s, 0.0, 1.0)
    result: FloatArray = (
        stance.speed_m_per_s * stance.stop_s * (-u + 0.5 * u**2 + (np.cos(2.0 * np.pi * u) - 1.0) / (4.0 * np.pi**2))
    )
    return result


def sunk_m(stance: Stance) -> float:
    """Return how deep the foot ends under its height at touchdown."""
    return 0.5 * stance.speed_m_per_s * stance.stop_s
