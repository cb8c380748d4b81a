"""Ground forces and body motion made consistent: what the feet give is what the whole robot's momentum needs.

Forces come from the plan's motion by weighted least squares over the feet that stand, within what each may carry and
inside the friction cone. What they then give too much or too little (the impact of a foot, the dip while a trot changes
feet, the tilting moment two feet cannot hold) moves the body: a correction x'' - w0^2 x = surplus / inertia is added to
its path, and the forces are taken anew. Few rounds bring the two together.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from scipy.linalg import solve_banded
from scipy.ndimage import gaussian_filter1d

from footcal.records import FloatArray
from footcal.sim.gait_plan import MotionPlan, Stance, smooth_step
from footcal.sim.kinematics import BasePath, LegPath
from footcal.sim.momentum import WholeBody, cross, whole_body
from footcal.sim.robot import SimRobot

FRICTION: Final = 0.6  # of rubber on the floor
ARM_m: Final = 0.25  # turns moments into forces where both are weighed
SLACK: Final = 3e-4  # keeps the least squares solvable where feet cannot give what is needed
LEAN_s: Final = 0.25  # over which the body leans against a moment that lasts
SIDEWAYS: Final = 0.3  # least squares: how readily a foot gives side force, over normal force
CORNERS_Hz: Final = (2.5, 1.5, 1.0, 0.7, 0.5)  # of each round: below it the feet answer, above it the body gives way


@dataclass(frozen=True, slots=True)
class Consistent:
    """A motion that obeys Newton's law."""

    whole: WholeBody
    contact_m: FloatArray  # (4, 3, n) where the ground touches each ball
    force_W_N: FloatArray  # (4, 3, n) ground on foot
    surplus: FloatArray  # (6, n) what is left over: force N, moment N m
    rpy_rad: FloatArray  # (3, n) attitude of the body


def consistent(robot: SimRobot, plan: MotionPlan, corners_Hz: tuple[float, ...] = CORNERS_Hz) -> Consistent:
    """Return the plan with ground forces, and with the body motion that goes with them."""
    dt_s = float(plan.t_s[1] - plan.t_s[0])
    give, demand = np.zeros((6, plan.t_s.size)), np.zeros((6, plan.t_s.size))
    rolled = np.zeros((4, 3, plan.t_s.size))
    inertia = _inertia(robot)
    for corner_Hz in (*corners_Hz, None):
        base = BasePath.from_rpy(plan.place_m + give[:3], plan.rpy_rad + give[3:])
        balls = None if plan.balls_m is None else plan.balls_m + rolled
        whole = whole_body(robot, base, dt_s, balls_m=balls, angles_rad=plan.angles_rad)
        contact, force, surplus = _forces(robot, plan, whole, demand)
        if corner_Hz is None or plan.given_N is not None or bool(np.all(plan.outside_share >= 1.0)):
            break
        tilting = gaussian_filter1d(surplus[3:5], LEAN_s / dt_s, axis=1)
        give[:2] += np.stack([-tilting[1], tilting[0]]) / robot.weight_N  # lean against a lasting moment
        surplus[3:5] -= tilting
        demand[3:5] -= tilting
        step = _yield(surplus / inertia[:, None], dt_s, corner_Hz)
        give += step
        demand += inertia[:, None] * (2.0 * np.pi * corner_Hz) ** 2 * step  # what the motion leaves, the feet must give
        for i, leg in enumerate(robot.legs):
            rolled[i] = _roll_m(plan.t_s, plan.stances[i], whole.limbs[i].path, leg.foot_radius_m)
    if plan.given_N is None:
        force, surplus = _closed(force, surplus, contact - whole.com_m)
    return Consistent(whole, contact, force, surplus, plan.rpy_rad + give[3:])


def _inertia(robot: SimRobot) -> FloatArray:
    """Return about how heavy the body is when it moves over standing feet: 3 masses, 3 moments of inertia."""
    legs_kg = robot.mass_kg - robot.base.mass_kg
    x2, y2 = robot.legs[0].hip_B_m[0] ** 2, (robot.legs[0].hip_B_m[1] + 0.05) ** 2
    spread = 0.6 * legs_kg * np.array([y2 + 0.008, x2 + 0.008, x2 + y2])
    return np.concatenate([np.full(3, robot.base.mass_kg + 0.6 * legs_kg), np.diag(robot.base.tensor_kg_m2()) + spread])


def _forces(
    robot: SimRobot, plan: MotionPlan, whole: WholeBody, demand: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return contact places and forces, (4, 3, n) each, and what they give beyond what is needed, (6, n)."""
    contact = np.stack([part.path.ball_m for part in whole.limbs])
    contact[:, 2] -= np.array([leg.foot_radius_m for leg in robot.legs])[:, None]
    need = whole.wrench * (1.0 - plan.outside_share)
    if plan.push_N is not None:
        need[:3] -= plan.push_N
        need[3:] -= cross(whole.base.place_m - whole.com_m, plan.push_N)
    arm = contact - whole.com_m
    if plan.given_N is not None:
        return contact, plan.given_N, np.zeros_like(need)
    force = _limited(_shared(need + demand, arm, plan.bearing), plan)
    given = np.concatenate([force.sum(axis=0), cross(arm, force).sum(axis=0)])
    held = smooth_step(plan.outside_share / 0.05)  # a hoist that carries anything also takes what the feet cannot hold
    return contact, force, (given - need) * (1.0 - held)


def _closed(force: FloatArray, surplus: FloatArray, arm: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Take the last newton of surplus force from the feet in the ratio of their loads; moments follow."""
    load = force[:, 2]
    share = load / np.maximum(load.sum(axis=0), 20.0)
    change = -share[:, None] * surplus[:3]
    change[:, 2] = np.maximum(change[:, 2], -load)
    moved = np.concatenate([change.sum(axis=0), cross(arm, change).sum(axis=0)])
    return force + change, surplus + moved


def _shared(need: FloatArray, arm: FloatArray, bearing: FloatArray) -> FloatArray:
    """Return the forces, (4, 3, n), with least sum of (f / bearing)^2 that come nearest to the wrench (6, n)."""
    n = need.shape[1]
    give = np.zeros((n, 6, 12))  # wrench of all force components, moments over ARM_m
    x, y, z = np.moveaxis(arm / ARM_m, 1, 0)
    for k in range(4):
        c = 3 * k
        give[:, 0, c] = give[:, 1, c + 1] = give[:, 2, c + 2] = 1.0
        give[:, 3, c + 1], give[:, 3, c + 2] = -z[k], y[k]
        give[:, 4, c], give[:, 4, c + 2] = z[k], -x[k]
        give[:, 5, c], give[:, 5, c + 1] = -y[k], x[k]
    ease = (bearing.T[:, :, None] ** 2 * np.array([SIDEWAYS, SIDEWAYS, 1.0])).reshape(n, 1, 12)
    weighed = give * ease
    normal = weighed @ give.transpose(0, 2, 1)
    normal[:, range(6), range(6)] += SLACK
    wanted = np.concatenate([need[:3], need[3:] / ARM_m]).T[:, :, None]
    force = weighed.transpose(0, 2, 1) @ np.linalg.solve(normal, wanted)
    return np.ascontiguousarray(force[:, :, 0].reshape(n, 4, 3).transpose(1, 2, 0))


def _limited(force: FloatArray, plan: MotionPlan) -> FloatArray:
    """Return the forces bent into what feet can do: pushing only, at most the limit, inside the friction cone."""
    soft_N = 4.0 * plan.bearing + 1e-9  # width of the bend at zero
    up = 0.5 * (force[:, 2] + np.sqrt(force[:, 2] ** 2 + soft_N**2) - soft_N)
    up = np.maximum(up, 0.0) * _within(up, plan.limit_N)
    up = np.maximum(up + plan.impact_N, 0.0)
    side = force[:, :2] * _within(np.hypot(force[:, 0], force[:, 1]), FRICTION * up)[:, None]
    return np.concatenate([side, up[:, None]], axis=1)


def _within(size: FloatArray, limit: FloatArray) -> FloatArray:
    """Return the factor that keeps a size below its limit, smoothly (a 4-norm)."""
    top = np.maximum(limit, 1e-12)
    result: FloatArray = top / (np.maximum(size, 0.0) ** 4 + top**4) ** 0.25
    return result


def _yield(surplus: FloatArray, dt_s: float, corner_Hz: float) -> FloatArray:
    """Return the motion x, (6, n), with x'' - w0^2 x = surplus and x = 0 at both ends, in second differences."""
    n = surplus.shape[1]
    bands = np.empty((3, n - 2))
    bands[0], bands[2] = 1.0 / dt_s**2, 1.0 / dt_s**2
    bands[1] = -2.0 / dt_s**2 - (2.0 * np.pi * corner_Hz) ** 2
    out = np.zeros_like(surplus)
    out[:, 1:-1] = solve_banded((1, 1), bands, surplus[:, 1:-1].T).T
    return out


def _roll_m(t_s: FloatArray, stances: tuple[Stance, ...], path: LegPath, radius_m: float) -> FloatArray:
    """Return how far a ball centre has rolled from its touchdown place, (3, n); undone in the swing that follows."""
    lean = path.frames[2][:, 2]
    turned = radius_m * np.stack([np.arctan2(lean[0], lean[2]), np.arctan2(lean[1], lean[2])])
    out = np.zeros((3, t_s.size))
    for i, stance in enumerate(stances):
        first, last = np.searchsorted(t_s, [stance.start_s, stance.end_s])
        if first >= t_s.size or last <= first:
            continue
        out[:2, first:last] = turned[:, first:last] - turned[:, first : first + 1]
        if i + 1 < len(stances) and last < t_s.size:
            until = int(np.searchsorted(t_s, stances[i + 1].start_s))
            u = (t_s[last:until] - stance.end_s) / (stances[i + 1].start_s - stance.end_s)
            out[:2, last:until] = out[:2, last - 1 : last] * (1.0 - smooth_step(u / 0.96))
    return out
