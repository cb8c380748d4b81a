"""A leg chain read from robot.toml by the URDF rules alone, as a reference; shares nothing with the simulator."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from scipy.spatial.transform import Rotation

from footcal.records import FloatArray


class Chain:
    """Forward kinematics of every leg by 4 x 4 transforms."""

    def __init__(self, description: Mapping[str, Any]) -> None:
        self.legs = {leg["name"]: leg for leg in description["leg"]}

    def joint_rad(self, log: Mapping[str, FloatArray], leg: str, sample: int) -> FloatArray:
        """Return joint angles: sign * (reading - offset)."""
        joints = self.legs[leg]["joint"]
        return np.array(
            [j["encoder_sign"] * (log[f"{leg}.q{i}"][sample] - j["encoder_offset_rad"]) for i, j in enumerate(joints)]
        )

    def frames(self, leg: str, q: FloatArray) -> list[FloatArray]:
        """Return the frame after each joint, 4 x 4, body frame."""
        frame, out = np.eye(4), []
        for joint, angle in zip(self.legs[leg]["joint"], q, strict=True):
            fixed, moved = np.eye(4), np.eye(4)
            fixed[:3, :3], fixed[:3, 3] = Rotation.from_euler("xyz", joint["rpy_rad"]).as_matrix(), joint["xyz_m"]
            moved[:3, :3] = Rotation.from_rotvec(angle * np.array(joint["axis"])).as_matrix()
            frame = frame @ fixed @ moved
            out.append(frame)
        return out

    def ball_m(self, leg: str, q: FloatArray) -> FloatArray:
        """Return the ball centre, body frame."""
        return (self.frames(leg, q)[-1] @ [*self.legs[leg]["foot"]["xyz_m"], 1.0])[:3]

    def sensor_axis(self, leg: str, q: FloatArray) -> FloatArray:
        """Return the stated sensor axis, body frame."""
        return self.frames(leg, q)[-1][:3, :3] @ self.legs[leg]["foot"]["sensor_axis"]

    def jacobian(self, leg: str, q: FloatArray) -> FloatArray:
        """Return d ball / d q by central differences."""
        columns = [(self.ball_m(leg, q + e) - self.ball_m(leg, q - e)) / 2e-6 for e in 1e-6 * np.eye(3)]
        return np.array(columns).T

    def gravity_torque(self, leg: str, q: FloatArray, up: FloatArray) -> FloatArray:
        """Return the torques that hold the links, d potential / d q by central differences; `up` in the body frame."""

        def potential(angles: FloatArray) -> float:
            frames = self.frames(leg, angles)
            places = [(f @ [*j["com_m"], 1.0])[:3] for f, j in zip(frames, self.legs[leg]["joint"], strict=True)]
            return sum(
                9.81 * j["mass_kg"] * float(up @ p) for j, p in zip(self.legs[leg]["joint"], places, strict=True)
            )

        return np.array([(potential(q + e) - potential(q - e)) / 2e-6 for e in 1e-6 * np.eye(3)])

    @staticmethod
    def attitude(run: Any, sample: int) -> FloatArray:
        """Return the true body to world rotation of a simulated run."""
        angles = [run.inner[f"body.{a}_rad"][sample] for a in ("yaw", "pitch", "roll")]
        return Rotation.from_euler("ZYX", angles).as_matrix()

    def gravity_direction(self, run: Any, sample: int) -> FloatArray:
        """Return up in the body frame."""
        return self.attitude(run, sample).T @ [0.0, 0.0, 1.0]
