"""Postures of one leg, in bulk, by the very code that runs in the step: geometry, rigid-body torques, axial inertia."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from hashlib import sha256
from pathlib import Path
from typing import Any

import numpy as np
from numba import njit

from footcal.errors import SettingError
from footcal.leg.adopt import adopt
from footcal.leg.constants import fill_leg_constants, fresh_leg_state
from footcal.leg.description import Robot
from footcal.leg.fields import COUPLED, leg_dtypes
from footcal.leg.motion import move_joint
from footcal.leg.step import posture
from footcal.records import FloatArray


@dataclass(frozen=True, slots=True)
class BaseMotion:
    """How the body moves; body frame, at the body origin. At rest and level the specific force is +g along z."""

    specific_force_B_m_per_s2: tuple[float, float, float] = (0.0, 0.0, 9.80665)  # acceleration minus gravity
    rate_B_rad_per_s: tuple[float, float, float] = (0.0, 0.0, 0.0)
    angular_acceleration_B_rad_per_s2: tuple[float, float, float] = (0.0, 0.0, 0.0)


@dataclass(frozen=True, slots=True)
class Postures:
    """What `postures` found for n postures of a leg with J joints; body frame."""

    foot_B_m: FloatArray  # (n, 3) ball centre
    jacobian_B_m_per_rad: FloatArray  # (n, 3, J)
    axis_B: FloatArray  # (n, 3) sensor axis, from the sole into the leg
    torque_Nm: FloatArray  # (n, J) what the joints must give with no contact
    axial_inertia_N: FloatArray  # (n,) what the sensor reads with no contact: axis . m_d (g - a)


def source_key() -> int:
    """Return a number made of all sources of this package, so that a kept compilation is never older than they."""
    text = b"".join(path.read_bytes() for path in sorted(Path(__file__).parent.glob("*.py")))
    return int(sha256(text).hexdigest()[:15], 16)


def _make(key: int) -> Callable[..., None]:
    @njit(cache=True, error_model="numpy")
    def run(q: Any, dq: Any, ddq: Any, S: Any, C: Any, out: Any) -> None:
        if key == 0:
            return
        s, c = S[0], C[0]
        adopt(s, c)
        for i in range(q.shape[0]):
            for j in range(q.shape[1]):
                s.leg_phi[j, 0] = q[i, j]
                s.leg_dphi[j, 0] = dq[i, j]
                s.leg_ddphi[j, 0] = ddq[i, j]
            for j in range(s.leg_q.shape[0]):
                move_joint(s, j)  # nothing newly read: it takes the motion as it stands
            posture(s)
            for x in range(3):
                out[i, x] = s.foot_B_m[x, 0]
                out[i, 3 + x] = s.axis_B[x, 0]
                for j in range(q.shape[1]):
                    out[i, 7 + q.shape[1] + 3 * j + x] = s.jac_B[x, j, 0]
            out[i, 6] = s.axial_inertia_N[0]
            for j in range(q.shape[1]):
                out[i, 7 + j] = s.tau_rigid_Nm[j, 0]

    return run


@lru_cache(maxsize=1)
def _runner() -> Callable[..., None]:
    return _make(source_key())


def postures(
    robot: Robot,
    leg: str,
    q_rad: FloatArray,
    dq_rad_per_s: FloatArray | None = None,
    ddq_rad_per_s2: FloatArray | None = None,
    base: BaseMotion | None = None,
) -> Postures:
    """Return geometry and rigid-body terms of a leg in many postures.

    Args:
        robot: the description.
        leg: name of the leg.
        q_rad: joint angles, shape (n, joints); after encoder sign, offset and actuator matrix.
        dq_rad_per_s: joint speeds, the same shape; still when left out.
        ddq_rad_per_s2: joint accelerations, the same shape; none when left out.
        base: motion of the body; level, at rest, under the description's gravity when left out.

    Returns:
        Arrays with n rows.

    Raises:
        SettingError: no such leg, or an array of another shape.
    """
    lane = robot.lane(leg)
    joints = robot.joint_counts[lane]
    q = _rows(q_rad, joints, "q_rad")
    zero = np.zeros_like(q)
    dq = zero if dq_rad_per_s is None else _rows(dq_rad_per_s, joints, "dq_rad_per_s")
    ddq = zero if ddq_rad_per_s2 is None else _rows(ddq_rad_per_s2, joints, "ddq_rad_per_s2")
    base = base or BaseMotion((0.0, 0.0, robot.file.gravity_m_per_s2))
    padded = robot.padded_joints
    _, state, constants = leg_dtypes(1, padded)
    S, C = np.zeros(1, state), np.zeros(1, constants)
    fill_leg_constants(robot, (None,), C, only=leg)
    fresh_leg_state(S)
    C["leg_set"][0, COUPLED] = 0.0  # angles are given on the joints here, not on the actuators
    S["leg_f"][0] = base.specific_force_B_m_per_s2
    S["leg_w"][0] = base.rate_B_rad_per_s
    S["leg_dw"][0] = base.angular_acceleration_B_rad_per_s2
    out = np.empty((len(q), 7 + 4 * padded))
    pad = ((0, 0), (0, padded - joints))
    _runner()(np.pad(q, pad), np.pad(dq, pad), np.pad(ddq, pad), S, C, out)
    jacobian = out[:, 7 + padded :].reshape(-1, padded, 3).transpose(0, 2, 1)
    return Postures(out[:, :3], jacobian[:, :, :joints], out[:, 3:6], out[:, 7 : 7 + joints], out[:, 6])


def _rows(values: FloatArray, joints: int, name: str) -> FloatArray:
    rows = np.atleast_2d(np.asarray(values, dtype=np.float64))
    if rows.ndim != 2 or rows.shape[1] != joints:
        found = f"has shape {np.shape(values)}, must be (n, {joints})"
        raise SettingError(f"postures, {name}", found, "Give one column a joint of this leg.")
    return rows


def foot_position_m(robot: Robot, leg: str, q_rad: FloatArray) -> FloatArray:
    """Return the centre of the foot's ball in the body frame.

    Args:
        robot: the description.
        leg: name of the leg.
        q_rad: joint angles, shape (joints,) or (n, joints).

    Returns:
        Metres, shape (3,) or (n, 3).

    Raises:
        SettingError: no such leg, or another number of joints.
    """
    foot = postures(robot, leg, q_rad).foot_B_m
    return foot if np.ndim(q_rad) == 2 else foot[0]


def foot_jacobian_m_per_rad(robot: Robot, leg: str, q_rad: FloatArray) -> FloatArray:
    """Return how the foot's ball moves with the joints: d foot / dq in the body frame.

    A force F of the ground on the foot asks -J.T F of the joints.

    Args:
        robot: the description.
        leg: name of the leg.
        q_rad: joint angles, shape (joints,) or (n, joints).

    Returns:
        Shape (3, joints) or (n, 3, joints).

    Raises:
        SettingError: no such leg, or another number of joints.
    """
    jacobian = postures(robot, leg, q_rad).jacobian_B_m_per_rad
    return jacobian if np.ndim(q_rad) == 2 else jacobian[0]
