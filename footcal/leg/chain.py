"""Compiled: where each joint, the foot and the sensor axis of every leg are, and how the foot moves with the joints.

All in the body frame. Source: any text on serial chains; the geometric Jacobian has the columns z_j x (foot - p_j).
"""

from __future__ import annotations

from typing import Any

from footcal.leg.compiled import inner
from footcal.leg.fields import AXIS, BALL, P0, R0


@inner
def first_joint(s: Any) -> None:
    """Place joint 0 straight from the description."""
    for k in range(s.leg_q.shape[1]):
        for i in range(3):
            s.leg_p[i, 0, k] = s.leg_link[P0 + i, 0, k]
            turn_row(
                s,
                0,
                i,
                k,
                s.leg_link[R0 + 3 * i, 0, k],
                s.leg_link[R0 + 3 * i + 1, 0, k],
                s.leg_link[R0 + 3 * i + 2, 0, k],
            )


@inner
def next_joint(s: Any, j: int) -> None:
    """Place joint j from the link before it."""
    if j < 1 or j > 5:  # never; it tells the compiler that j - 1 needs no counting from the end
        return
    for k in range(s.leg_q.shape[1]):
        for i in range(3):
            a = s.leg_R[3 * i, j - 1, k]
            b = s.leg_R[3 * i + 1, j - 1, k]
            d = s.leg_R[3 * i + 2, j - 1, k]
            s.leg_p[i, j, k] = (
                s.leg_p[i, j - 1, k]
                + a * s.leg_link[P0, j, k]
                + b * s.leg_link[P0 + 1, j, k]
                + d * s.leg_link[P0 + 2, j, k]
            )
            turn_row(
                s,
                j,
                i,
                k,
                a * s.leg_link[R0, j, k] + b * s.leg_link[R0 + 3, j, k] + d * s.leg_link[R0 + 6, j, k],
                a * s.leg_link[R0 + 1, j, k] + b * s.leg_link[R0 + 4, j, k] + d * s.leg_link[R0 + 7, j, k],
                a * s.leg_link[R0 + 2, j, k] + b * s.leg_link[R0 + 5, j, k] + d * s.leg_link[R0 + 8, j, k],
            )


@inner
def turn_row(s: Any, j: int, i: int, k: int, a: float, b: float, d: float) -> None:
    """Turn row i of the frame at angle zero about the joint's axis u: cos row + sin row x u + (1 - cos)(row.u) u."""
    ux, uy, uz = s.leg_link[AXIS, j, k], s.leg_link[AXIS + 1, j, k], s.leg_link[AXIS + 2, j, k]
    sin, cos = s.leg_sin[j, k], s.leg_cos[j, k]
    along = a * ux + b * uy + d * uz
    rest = (1.0 - cos) * along
    s.leg_R[3 * i, j, k] = cos * a + sin * (b * uz - d * uy) + rest * ux
    s.leg_R[3 * i + 1, j, k] = cos * b + sin * (d * ux - a * uz) + rest * uy
    s.leg_R[3 * i + 2, j, k] = cos * d + sin * (a * uy - b * ux) + rest * uz
    s.leg_z[i, j, k] = along


@inner
def foot_and_axis(s: Any) -> None:
    """Ball centre, and sensor axis with the side sensitivity of the calibration, from the last link."""
    j = s.leg_q.shape[0] - 1
    for k in range(s.leg_q.shape[1]):
        hx, hy, hz = s.leg_h[0, k], s.leg_h[1, k], s.leg_h[2, k]
        px, py, pz = s.leg_foot[BALL, k], s.leg_foot[BALL + 1, k], s.leg_foot[BALL + 2, k]
        for i in range(3):
            a = s.leg_R[3 * i, j, k]
            b = s.leg_R[3 * i + 1, j, k]
            d = s.leg_R[3 * i + 2, j, k]
            s.axis_B[i, k] = a * hx + b * hy + d * hz
            s.foot_B_m[i, k] = s.leg_p[i, j, k] + a * px + b * py + d * pz


@inner
def jacobian(s: Any) -> None:
    """Columns z_j x (foot - p_j), m/rad."""
    for k in range(s.leg_q.shape[1]):
        for j in range(s.leg_q.shape[0]):
            x = s.foot_B_m[0, k] - s.leg_p[0, j, k]
            y = s.foot_B_m[1, k] - s.leg_p[1, j, k]
            z = s.foot_B_m[2, k] - s.leg_p[2, j, k]
            s.jac_B[0, j, k] = s.leg_z[1, j, k] * z - s.leg_z[2, j, k] * y
            s.jac_B[1, j, k] = s.leg_z[2, j, k] * x - s.leg_z[0, j, k] * z
            s.jac_B[2, j, k] = s.leg_z[0, j, k] * y - s.leg_z[1, j, k] * x
