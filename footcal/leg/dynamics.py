"""Compiled: recursive Newton-Euler for all legs on a moving base, in the body frame, and the inertia below the sensor.

Source: Luh, Walker and Paul 1980 (from memory). "Acceleration" always means acceleration minus gravity, which is what
the inertial unit reads, so gravity needs no term of its own.
"""

from __future__ import annotations

from typing import Any

from footcal.leg.compiled import inner
from footcal.leg.fields import COM, DISTAL, DISTAL_KG, INERTIA, MASS


@inner
def first_link(s: Any) -> None:
    """Motion of link 0 from that of the body."""
    wx, wy, wz = s.leg_w[0], s.leg_w[1], s.leg_w[2]
    ux, uy, uz = s.leg_dw[0], s.leg_dw[1], s.leg_dw[2]
    fx, fy, fz = s.leg_f[0], s.leg_f[1], s.leg_f[2]
    for k in range(s.leg_q.shape[1]):
        carry(s, 0, k, wx, wy, wz, ux, uy, uz, s.leg_p[0, 0, k], s.leg_p[1, 0, k], s.leg_p[2, 0, k])
        s.leg_la[0, 0, k] += fx
        s.leg_la[1, 0, k] += fy
        s.leg_la[2, 0, k] += fz


@inner
def next_link(s: Any, j: int) -> None:
    """Motion of link j from that of the link before."""
    if j < 1 or j > 5:  # never; see chain.next_joint
        return
    for k in range(s.leg_q.shape[1]):
        i = j - 1
        carry(
            s,
            j,
            k,
            s.leg_av[0, i, k],
            s.leg_av[1, i, k],
            s.leg_av[2, i, k],
            s.leg_aa[0, i, k],
            s.leg_aa[1, i, k],
            s.leg_aa[2, i, k],
            s.leg_p[0, j, k] - s.leg_p[0, i, k],
            s.leg_p[1, j, k] - s.leg_p[1, i, k],
            s.leg_p[2, j, k] - s.leg_p[2, i, k],
        )
        s.leg_la[0, j, k] += s.leg_la[0, i, k]
        s.leg_la[1, j, k] += s.leg_la[1, i, k]
        s.leg_la[2, j, k] += s.leg_la[2, i, k]


@inner
def carry(
    s: Any,
    j: int,
    k: int,
    wx: float,
    wy: float,
    wz: float,
    ux: float,
    uy: float,
    uz: float,
    rx: float,
    ry: float,
    rz: float,
) -> None:
    """Go from the part before (rate w, acceleration u, arm r) to link j; its origin gains u x r + w x (w x r)."""
    vx, vy, vz = wy * rz - wz * ry, wz * rx - wx * rz, wx * ry - wy * rx
    s.leg_la[0, j, k] = uy * rz - uz * ry + wy * vz - wz * vy
    s.leg_la[1, j, k] = uz * rx - ux * rz + wz * vx - wx * vz
    s.leg_la[2, j, k] = ux * ry - uy * rx + wx * vy - wy * vx
    zx, zy, zz = s.leg_z[0, j, k], s.leg_z[1, j, k], s.leg_z[2, j, k]
    dq, ddq = s.leg_dq[j, k], s.leg_ddq[j, k]
    s.leg_av[0, j, k] = wx + zx * dq
    s.leg_av[1, j, k] = wy + zy * dq
    s.leg_av[2, j, k] = wz + zz * dq
    s.leg_aa[0, j, k] = ux + zx * ddq + (wy * zz - wz * zy) * dq
    s.leg_aa[1, j, k] = uy + zy * ddq + (wz * zx - wx * zz) * dq
    s.leg_aa[2, j, k] = uz + zz * ddq + (wx * zy - wy * zx) * dq


@inner
def link_wrench(s: Any, j: int) -> None:
    """Force and moment at joint j: m a_c and I u + w x (I w) + r x m a_c of its link, and what joint j + 1 asks.

    The part of the moment along the axis is the motor's: tau = z . N. To be called from the last joint to the first.
    """
    if j < 0 or j > 5:  # never; see chain.next_joint
        return
    i = j + 1
    for k in range(s.leg_q.shape[1]):
        R0, R1, R2 = s.leg_R[0, j, k], s.leg_R[1, j, k], s.leg_R[2, j, k]
        R3, R4, R5 = s.leg_R[3, j, k], s.leg_R[4, j, k], s.leg_R[5, j, k]
        R6, R7, R8 = s.leg_R[6, j, k], s.leg_R[7, j, k], s.leg_R[8, j, k]
        cx, cy, cz = s.leg_link[COM, j, k], s.leg_link[COM + 1, j, k], s.leg_link[COM + 2, j, k]
        rx, ry, rz = R0 * cx + R1 * cy + R2 * cz, R3 * cx + R4 * cy + R5 * cz, R6 * cx + R7 * cy + R8 * cz
        wx, wy, wz = s.leg_av[0, j, k], s.leg_av[1, j, k], s.leg_av[2, j, k]
        ux, uy, uz = s.leg_aa[0, j, k], s.leg_aa[1, j, k], s.leg_aa[2, j, k]
        vx, vy, vz = wy * rz - wz * ry, wz * rx - wx * rz, wx * ry - wy * rx
        m = s.leg_link[MASS, j, k]
        fx = m * (s.leg_la[0, j, k] + uy * rz - uz * ry + wy * vz - wz * vy)
        fy = m * (s.leg_la[1, j, k] + uz * rx - ux * rz + wz * vx - wx * vz)
        fz = m * (s.leg_la[2, j, k] + ux * ry - uy * rx + wx * vy - wy * vx)
        ox, oy, oz = R0 * wx + R3 * wy + R6 * wz, R1 * wx + R4 * wy + R7 * wz, R2 * wx + R5 * wy + R8 * wz
        ax, ay, az = R0 * ux + R3 * uy + R6 * uz, R1 * ux + R4 * uy + R7 * uz, R2 * ux + R5 * uy + R8 * uz
        xx, yy, zz = s.leg_link[INERTIA, j, k], s.leg_link[INERTIA + 1, j, k], s.leg_link[INERTIA + 2, j, k]
        xy, xz, yz = s.leg_link[INERTIA + 3, j, k], s.leg_link[INERTIA + 4, j, k], s.leg_link[INERTIA + 5, j, k]
        hx, hy, hz = xx * ox + xy * oy + xz * oz, xy * ox + yy * oy + yz * oz, xz * ox + yz * oy + zz * oz
        nx = xx * ax + xy * ay + xz * az + oy * hz - oz * hy
        ny = xy * ax + yy * ay + yz * az + oz * hx - ox * hz
        nz = xz * ax + yz * ay + zz * az + ox * hy - oy * hx
        px = s.leg_p[0, i, k] - s.leg_p[0, j, k]
        py = s.leg_p[1, i, k] - s.leg_p[1, j, k]
        pz = s.leg_p[2, i, k] - s.leg_p[2, j, k]
        gx, gy, gz = s.leg_F[0, i, k], s.leg_F[1, i, k], s.leg_F[2, i, k]
        mx = R0 * nx + R1 * ny + R2 * nz + ry * fz - rz * fy + s.leg_N[0, i, k] + py * gz - pz * gy
        my = R3 * nx + R4 * ny + R5 * nz + rz * fx - rx * fz + s.leg_N[1, i, k] + pz * gx - px * gz
        mz = R6 * nx + R7 * ny + R8 * nz + rx * fy - ry * fx + s.leg_N[2, i, k] + px * gy - py * gx
        s.leg_F[0, j, k] = fx + gx
        s.leg_F[1, j, k] = fy + gy
        s.leg_F[2, j, k] = fz + gz
        s.leg_N[0, j, k] = mx
        s.leg_N[1, j, k] = my
        s.leg_N[2, j, k] = mz
        s.tau_rigid_Nm[j, k] = s.leg_z[0, j, k] * mx + s.leg_z[1, j, k] * my + s.leg_z[2, j, k] * mz


@inner
def below_sensor(s: Any) -> None:
    """h.m_d(g - a_c): what the mass below the sensor takes of the ground's push before the sensor feels it."""
    j = s.leg_q.shape[0] - 1
    for k in range(s.leg_q.shape[1]):
        cx, cy, cz = s.leg_foot[DISTAL, k], s.leg_foot[DISTAL + 1, k], s.leg_foot[DISTAL + 2, k]
        rx = s.leg_R[0, j, k] * cx + s.leg_R[1, j, k] * cy + s.leg_R[2, j, k] * cz
        ry = s.leg_R[3, j, k] * cx + s.leg_R[4, j, k] * cy + s.leg_R[5, j, k] * cz
        rz = s.leg_R[6, j, k] * cx + s.leg_R[7, j, k] * cy + s.leg_R[8, j, k] * cz
        wx, wy, wz = s.leg_av[0, j, k], s.leg_av[1, j, k], s.leg_av[2, j, k]
        ux, uy, uz = s.leg_aa[0, j, k], s.leg_aa[1, j, k], s.leg_aa[2, j, k]
        vx, vy, vz = wy * rz - wz * ry, wz * rx - wx * rz, wx * ry - wy * rx
        ax = s.leg_la[0, j, k] + uy * rz - uz * ry + wy * vz - wz * vy
        ay = s.leg_la[1, j, k] + uz * rx - ux * rz + wz * vx - wx * vz
        az = s.leg_la[2, j, k] + ux * ry - uy * rx + wx * vy - wy * vx
        s.axial_inertia_N[k] = -s.leg_foot[DISTAL_KG, k] * (
            s.axis_B[0, k] * ax + s.axis_B[1, k] * ay + s.axis_B[2, k] * az
        )
