"""Newton's law for the whole simulated robot and for each leg, told by mass points: no recursion, no inertia tensors.

Every rigid part is four mass points (robot.Body.points_m). The wrench the outside must give is the sum of m (a - g) and
of r x m (a - g); a joint's torque is the moment of the same quantities about its axis, over the parts beyond it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from footcal.records import FloatArray
from footcal.sim.kinematics import BasePath, LegPath, base_points, leg_angles, leg_path, leg_points
from footcal.sim.robot import GRAVITY_m_per_s2, SimLeg, SimRobot


def second_derivative(values: FloatArray, dt_s: float) -> FloatArray:
    """Return the second central difference along the last axis, the ends repeated."""
    out = np.empty_like(values)
    out[..., 1:-1] = (values[..., 2:] - 2.0 * values[..., 1:-1] + values[..., :-2]) / dt_s**2
    out[..., 0], out[..., -1] = out[..., 1], out[..., -2]
    return out


def cross(a: FloatArray, b: FloatArray) -> FloatArray:
    """Return a x b for arrays (..., 3, n)."""
    result: FloatArray = np.stack(
        [
            a[..., 1, :] * b[..., 2, :] - a[..., 2, :] * b[..., 1, :],
            a[..., 2, :] * b[..., 0, :] - a[..., 0, :] * b[..., 2, :],
            a[..., 0, :] * b[..., 1, :] - a[..., 1, :] * b[..., 0, :],
        ],
        axis=-2,
    )
    return result


@dataclass(frozen=True, slots=True)
class Limb:
    """One leg over time: where it is, and the pull (force the rest of the world must give) of each mass point."""

    angles_rad: FloatArray  # (3, n) a, h, k
    path: LegPath
    points_m: FloatArray  # (3 links, 4, 3, n)
    pull_N: FloatArray  # (3 links, 4, 3, n) m (a - g)

    def torques_Nm(self, contact_m: FloatArray, force_W_N: FloatArray) -> FloatArray:
        """Return the joint torques, (3, n), joint coordinates, under a ground force at a point, (3, n) each."""
        rows = []
        for joint in range(3):
            arm = self.points_m[joint:] - self.path.joints_m[joint]
            moment = cross(arm, self.pull_N[joint:]).sum(axis=(0, 1))
            moment -= cross(contact_m - self.path.joints_m[joint], force_W_N)
            rows.append(np.sum(self.path.axes[joint] * moment, axis=0))
        return np.stack(rows)


@dataclass(frozen=True, slots=True)
class WholeBody:
    """The whole robot over time, and the wrench it needs from outside."""

    base: BasePath
    limbs: tuple[Limb, ...]
    com_m: FloatArray  # (3, n)
    wrench: FloatArray  # (6, n) force N, moment about the centre of mass N m; world axes


def limb(leg: SimLeg, base: BasePath, angles_rad: FloatArray, dt_s: float) -> Limb:
    """Return a leg's motion and the pull of its mass points."""
    path = leg_path(leg, base, angles_rad)
    points = leg_points(leg, path)
    pull = second_derivative(points, dt_s)
    pull[:, :, 2] += GRAVITY_m_per_s2
    pull *= np.array([link.mass_kg / 4.0 for link in leg.links])[:, None, None, None]
    return Limb(angles_rad, path, points, pull)


def whole_body(
    robot: SimRobot,
    base: BasePath,
    dt_s: float,
    *,
    balls_m: FloatArray | None = None,
    angles_rad: FloatArray | None = None,
) -> WholeBody:
    """Return the robot's motion and the wrench it needs, for foot places (4, 3, n) or leg angles (4, 3, n)."""
    limbs = []
    for i, leg in enumerate(robot.legs):
        angles = (
            leg_angles(leg, base, balls_m[i])
            if balls_m is not None
            else (angles_rad if angles_rad is not None else np.empty(0))[i]
        )
        limbs.append(limb(leg, base, angles, dt_s))
    trunk = base_points(robot, base)
    trunk_pull = second_derivative(trunk, dt_s)
    trunk_pull[:, 2] += GRAVITY_m_per_s2
    trunk_pull *= robot.base.mass_kg / 4.0
    weighed = robot.base.mass_kg / 4.0 * trunk.sum(axis=0)
    force, moment = trunk_pull.sum(axis=0), cross(trunk, trunk_pull).sum(axis=0)
    for leg, part in zip(robot.legs, limbs, strict=True):
        masses = np.array([link.mass_kg / 4.0 for link in leg.links])
        weighed = weighed + np.einsum("l,lpcn->cn", masses, part.points_m)
        force = force + part.pull_N.sum(axis=(0, 1))
        moment = moment + cross(part.points_m, part.pull_N).sum(axis=(0, 1))
    com = weighed / robot.mass_kg
    return WholeBody(base, tuple(limbs), com, np.concatenate([force, moment - cross(com, force)]))
