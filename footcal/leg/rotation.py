"""Rotations as the description writes them: roll, pitch, yaw about fixed axes (as URDF), and about an axis."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from footcal.records import FloatArray


def from_rpy(rpy_rad: Sequence[float]) -> FloatArray:
    """Return the rotation by roll about x, then pitch about y, then yaw about z, all fixed axes.

    Args:
        rpy_rad: three angles, rad.

    Returns:
        Shape (3, 3); columns are the turned frame's axes seen from the frame before.
    """
    (cr, cp, cy), (sr, sp, sy) = np.cos(rpy_rad), np.sin(rpy_rad)
    return np.array(
        [
            [cy * cp, cy * sp * sr - sy * cr, cy * sp * cr + sy * sr],
            [sy * cp, sy * sp * sr + cy * cr, sy * sp * cr - cy * sr],
            [-sp, cp * sr, cp * cr],
        ]
    )


def about_axis(axis: Sequence[float], angle_rad: float) -> FloatArray:
    """Return the rotation about a unit axis (Rodrigues' formula).

    Args:
        axis: three components, length 1.
        angle_rad: rad.

    Returns:
        Shape (3, 3).
    """
    x, y, z = axis
    cross = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    return np.asarray(np.eye(3) + np.sin(angle_rad) * cross + (1.0 - np.cos(angle_rad)) * cross @ cross)
