"""An oracle for rigid-body torques that shares nothing with the recursion: Lagrange's equation by finite differences.

Poses come from 4x4 matrices with scipy rotations, velocities from differences of poses. The body's own motion is a
pose that depends on time, so a moving base needs no extra formula: tau = d/dt (dT/d dq) - d(T - V)/dq.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from scipy.spatial.transform import Rotation

from footcal.records import FloatArray

Pose = tuple[FloatArray, FloatArray]  # R_WX, p_WX


def link_poses(leg: dict[str, Any], base: Pose, q: FloatArray) -> list[Pose]:
    """Return world pose of each link frame."""
    R, p = base
    poses = []
    for joint, angle in zip(leg["joint"], q, strict=True):
        p = p + R @ np.array(joint["xyz_m"])
        turned = Rotation.from_euler("xyz", joint.get("rpy_rad", [0.0, 0.0, 0.0]))
        R = R @ (turned * Rotation.from_rotvec(angle * np.array(joint["axis"]))).as_matrix()
        poses.append((R, p))
    return poses


def lagrangian(
    leg: dict[str, Any], base: Callable[[float], Pose], t: float, q: FloatArray, dq: FloatArray, g: float
) -> float:
    """Return kinetic minus potential energy of all links, world z up."""
    h = 1e-4
    before = link_poses(leg, base(t - h), q - h * dq)
    here = link_poses(leg, base(t), q)
    after = link_poses(leg, base(t + h), q + h * dq)
    total = 0.0
    for joint, a, b, z in zip(leg["joint"], before, here, after, strict=True):
        com = np.array(joint.get("com_m", [0.0, 0.0, 0.0]))
        v = ((z[1] + z[0] @ com) - (a[1] + a[0] @ com)) / (2 * h)
        w = Rotation.from_matrix(a[0].T @ z[0]).as_rotvec() / (2 * h)  # link frame
        xx, yy, zz, xy, xz, yz = joint.get("inertia_kg_m2", [0.0] * 6)
        tensor = np.array([[xx, xy, xz], [xy, yy, yz], [xz, yz, zz]])
        m = joint.get("mass_kg", 0.0)
        total += 0.5 * m * v @ v + 0.5 * w @ tensor @ w - m * g * (b[1] + b[0] @ com)[2]
    return float(total)


def lagrange_torque_Nm(
    leg: dict[str, Any], base: Callable[[float], Pose], q: FloatArray, dq: FloatArray, ddq: FloatArray, g: float
) -> FloatArray:
    """Return the joint torques along q(t) = q + dq t + ddq t^2 / 2 at t = 0."""
    h, step = 3e-4, 0.3  # energy is quadratic in the speeds, so that a long step there costs nothing

    def path(t: float) -> tuple[FloatArray, FloatArray]:
        return q + dq * t + 0.5 * ddq * t * t, dq + ddq * t

    def momentum(t: float) -> FloatArray:
        at, speed = path(t)
        return np.array(
            [
                (lagrangian(leg, base, t, at, speed + step * e, g) - lagrangian(leg, base, t, at, speed - step * e, g))
                / (2 * step)
                for e in np.eye(len(q))
            ]
        )

    slope = np.array(
        [
            (lagrangian(leg, base, 0.0, q + h * e, dq, g) - lagrangian(leg, base, 0.0, q - h * e, dq, g)) / (2 * h)
            for e in np.eye(len(q))
        ]
    )
    return np.asarray((momentum(h) - momentum(-h)) / (2 * h) - slope)
