"""Compiled: where each joint, the foot and the sensor axis of every leg are, and how the foot moves with the joints.

All in the body frame. Source: any text on serial chains; the geometric Jacobian has the columns z_j x (foot - p_j).
"""

from __future__ import annotations

from typing import Any

from numba import njit


@njit(error_model="numpy")
def chain_step(s: Any, c: Any) -> None:
    """Write leg_R, leg_p, leg_z, foot_B_m, axis_B and jac_B from the sines and cosines of the joint angles."""
    first_joint(s, c)
    for j in range(1, s.leg_q.shape[0]):
        next_joint(s, c, j)
    foot_and_axis(s, c, s.leg_q.shape[0] - 1)
    jacobian(s)


@njit(error_model="numpy")
def first_joint(s: Any, c: Any) -> None:
    """Place joint 0 straight from the description."""
    for k in range(s.leg_q.shape[1]):
        for i in range(3):
            s.leg_p[0, i, k] = c.leg_p0[0, i, k]
            turn_row(s, c, 0, i, k, c.leg_R0[0, 3 * i, k], c.leg_R0[0, 3 * i + 1, k], c.leg_R0[0, 3 * i + 2, k])


@njit(error_model="numpy")
def next_joint(s: Any, c: Any, j: int) -> None:
    """Place joint j from the link before it."""
    for k in range(s.leg_q.shape[1]):
        for i in range(3):
            a = s.leg_R[j - 1, 3 * i, k]
            b = s.leg_R[j - 1, 3 * i + 1, k]
            d = s.leg_R[j - 1, 3 * i + 2, k]
            s.leg_p[j, i, k] = (
                s.leg_p[j - 1, i, k] + a * c.leg_p0[j, 0, k] + b * c.leg_p0[j, 1, k] + d * c.leg_p0[j, 2, k]
            )
            turn_row(
                s,
                c,
                j,
                i,
                k,
                a * c.leg_R0[j, 0, k] + b * c.leg_R0[j, 3, k] + d * c.leg_R0[j, 6, k],
                a * c.leg_R0[j, 1, k] + b * c.leg_R0[j, 4, k] + d * c.leg_R0[j, 7, k],
                a * c.leg_R0[j, 2, k] + b * c.leg_R0[j, 5, k] + d * c.leg_R0[j, 8, k],
            )


@njit(error_model="numpy")
def turn_row(s: Any, c: Any, j: int, i: int, k: int, a: float, b: float, d: float) -> None:
    """Row i of (frame at angle zero) times the turn about the joint's axis, after Rodrigues: row R = cos row + sin row x u + (1-cos)(row.u) u."""
    ux, uy, uz = c.leg_axis[j, 0, k], c.leg_axis[j, 1, k], c.leg_axis[j, 2, k]
    sin, cos = s.leg_sin[j, k], s.leg_cos[j, k]
    along = a * ux + b * uy + d * uz
    rest = (1.0 - cos) * along
    s.leg_R[j, 3 * i, k] = cos * a + sin * (b * uz - d * uy) + rest * ux
    s.leg_R[j, 3 * i + 1, k] = cos * b + sin * (d * ux - a * uz) + rest * uy
    s.leg_R[j, 3 * i + 2, k] = cos * d + sin * (a * uy - b * ux) + rest * uz
    s.leg_z[j, i, k] = along


@njit(error_model="numpy")
def foot_and_axis(s: Any, c: Any, j: int) -> None:
    """Ball centre, and sensor axis with the side sensitivity of the calibration, from the last link j."""
    for k in range(s.leg_q.shape[1]):
        cx, cy = c.sen_cross[0, k], c.sen_cross[1, k]
        hx = c.leg_sensor[2, 0, k] + cx * c.leg_sensor[0, 0, k] + cy * c.leg_sensor[1, 0, k]
        hy = c.leg_sensor[2, 1, k] + cx * c.leg_sensor[0, 1, k] + cy * c.leg_sensor[1, 1, k]
        hz = c.leg_sensor[2, 2, k] + cx * c.leg_sensor[0, 2, k] + cy * c.leg_sensor[1, 2, k]
        for i in range(3):
            a = s.leg_R[j, 3 * i, k]
            b = s.leg_R[j, 3 * i + 1, k]
            d = s.leg_R[j, 3 * i + 2, k]
            s.axis_B[i, k] = a * hx + b * hy + d * hz
            s.foot_B_m[i, k] = s.leg_p[j, i, k] + a * c.leg_foot[0, k] + b * c.leg_foot[1, k] + d * c.leg_foot[2, k]


@njit(error_model="numpy")
def jacobian(s: Any) -> None:
    """Columns z_j x (foot - p_j), m/rad."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            x = s.foot_B_m[0, k] - s.leg_p[j, 0, k]
            y = s.foot_B_m[1, k] - s.leg_p[j, 1, k]
            z = s.foot_B_m[2, k] - s.leg_p[j, 2, k]
            s.jac_B[0, j, k] = s.leg_z[j, 1, k] * z - s.leg_z[j, 2, k] * y
            s.jac_B[1, j, k] = s.leg_z[j, 2, k] * x - s.leg_z[j, 0, k] * z
            s.jac_B[2, j, k] = s.leg_z[j, 0, k] * y - s.leg_z[j, 1, k] * x
