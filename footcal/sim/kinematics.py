"""Where the parts of the simulated robot are: leg angles from foot places and back, and the points that carry its mass.

Vectors over time are (3, n), world frame unless said. Legs are built from the columns of their rotation, one turn after
another, with no screw or D-H formalism.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.robot import SimLeg, SimRobot


@dataclass(frozen=True, slots=True)
class BasePath:
    """Pose of the body over time."""

    place_m: FloatArray  # (3, n) body origin, world
    rotation: FloatArray  # (3, 3, n) body to world

    @classmethod
    def from_rpy(cls, place_m: FloatArray, rpy_rad: FloatArray) -> BasePath:
        """Build the path from roll, pitch, yaw (3, n): world = Rz(yaw) Ry(pitch) Rx(roll) body."""
        cr, cp, cy = np.cos(rpy_rad)
        sr, sp, sy = np.sin(rpy_rad)
        rows = [
            [cy * cp, cy * sp * sr - sy * cr, cy * sp * cr + sy * sr],
            [sy * cp, sy * sp * sr + cy * cr, sy * sp * cr - cy * sr],
            [-sp, cp * sr, cp * cr],
        ]
        return cls(place_m, np.array(rows))

    def to_world(self, point_B_m: FloatArray) -> FloatArray:
        """Return a body point, (3,) or (3, n), in the world, (3, n)."""
        point = point_B_m[:, None] if point_B_m.ndim == 1 else point_B_m
        result: FloatArray = self.place_m + turn(self.rotation, point)
        return result

    def to_body(self, vector_W: FloatArray) -> FloatArray:
        """Return a world vector (3, n) in the body frame."""
        result: FloatArray = np.einsum("jin,jn->in", self.rotation, vector_W)
        return result


def turn(rotation: FloatArray, vector: FloatArray) -> FloatArray:
    """Return rotation (3, 3, n) times vector (3, n) or (3, 1)."""
    result: FloatArray = rotation[:, 0] * vector[0] + rotation[:, 1] * vector[1] + rotation[:, 2] * vector[2]
    return result


@dataclass(frozen=True, slots=True)
class LegPath:
    """Where one leg's parts are over time, world frame."""

    joints_m: tuple[FloatArray, FloatArray, FloatArray]  # (3, n) a point on each joint axis
    axes: tuple[FloatArray, FloatArray, FloatArray]  # (3, n) joint axes, sense of the joint coordinates
    frames: tuple[FloatArray, FloatArray, FloatArray]  # (3, 3, n) link frames: columns x, y, z
    ball_m: FloatArray  # (3, n) centre of the foot ball

    def on_link(self, link: int, point_m: FloatArray) -> FloatArray:
        """Return a point given in a link's frame, (3,), in the world, (3, n)."""
        result: FloatArray = self.joints_m[link] + turn(self.frames[link], point_m[:, None])
        return result


def leg_path(leg: SimLeg, base: BasePath, angles_rad: FloatArray) -> LegPath:
    """Return where the parts of a leg are for its angles a, h, k, (3, n)."""
    a, h, k = angles_rad
    x_B, y_B, z_B = base.rotation[:, 0], base.rotation[:, 1], base.rotation[:, 2]
    hip_y = np.cos(a) * y_B + np.sin(a) * z_B
    hip_z = np.cos(a) * z_B - np.sin(a) * y_B
    thigh_x, thigh_z = np.cos(h) * x_B - np.sin(h) * hip_z, np.sin(h) * x_B + np.cos(h) * hip_z
    s = h + k
    shank_x, shank_z = np.cos(s) * x_B - np.sin(s) * hip_z, np.sin(s) * x_B + np.cos(s) * hip_z
    hip = base.to_world(np.array(leg.hip_B_m))
    top = hip + leg.side * leg.offset_m * hip_y
    knee = top - leg.thigh_m * thigh_z
    return LegPath(
        joints_m=(hip, top, knee),
        axes=(leg.side * x_B, hip_y, hip_y),
        frames=(
            np.stack([x_B, hip_y, hip_z], axis=1),
            np.stack([thigh_x, hip_y, thigh_z], axis=1),
            np.stack([shank_x, hip_y, shank_z], axis=1),
        ),
        ball_m=knee - leg.shank_m * shank_z,
    )


def leg_angles(leg: SimLeg, base: BasePath, ball_m: FloatArray) -> FloatArray:
    """Return the angles a, h, k, (3, n), that put the foot ball where it shall be, (3, n) world.

    Raises:
        SettingError: the place is out of the leg's reach.
    """
    x, y, z = base.to_body(ball_m - base.place_m) - np.array(leg.hip_B_m)[:, None]
    down2 = y * y + z * z - leg.offset_m**2
    reach2 = x * x + down2
    longest = 0.999 * (leg.thigh_m + leg.shank_m)
    if not (np.all(down2 > 0.0) and np.all(reach2 < longest**2)):
        raise SettingError(
            f"simulated motion, {leg.name}",
            f"the foot shall be {float(np.sqrt(np.max(reach2))):.3f} m from the hip, the leg reaches {longest:.3f} m",
            "Lower the body, or shorten the step.",
        )
    down = -np.sqrt(down2)
    a = np.arctan2(z, y) - np.arctan2(down, leg.side * leg.offset_m)
    a = (a + np.pi) % (2.0 * np.pi) - np.pi
    bend = (reach2 - leg.thigh_m**2 - leg.shank_m**2) / (2.0 * leg.thigh_m * leg.shank_m)
    k = leg.knee_sign * np.arccos(np.clip(bend, -1.0, 1.0))
    h = np.arctan2(-x, -down) - np.arctan2(leg.shank_m * np.sin(k), leg.thigh_m + leg.shank_m * np.cos(k))
    return np.stack([a, h, k])


def base_points(robot: SimRobot, base: BasePath) -> FloatArray:
    """Return the four points that carry the body's mass, (4, 3, n)."""
    return np.stack([base.to_world(point) for point in robot.base.points_m()])


def leg_points(leg: SimLeg, path: LegPath) -> FloatArray:
    """Return the points that carry a leg's mass, (3 links, 4 points, 3, n)."""
    return np.stack([np.stack([path.on_link(i, p) for p in link.points_m()]) for i, link in enumerate(leg.links)])
