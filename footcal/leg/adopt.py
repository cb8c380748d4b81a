"""Compiled: copies the constants of the legs into the state record, once after the start and after each reset."""

from __future__ import annotations

from typing import Any

from footcal.leg.compiled import inner
from footcal.leg.fields import DRIVE_ROWS, LINK_ROWS, SENSOR


@inner
def adopt(s: Any, c: Any) -> None:
    """Take over every field of `leg_constant_fields`, and the sensitive direction of each sensor."""
    adopt_joints(s, c)
    adopt_feet(s, c)
    for i in range(12):
        s.leg_imu[i] = c.leg_imu[i]
    for i in range(s.leg_set.shape[0]):
        s.leg_set[i] = c.leg_set[i]
    s.leg_ready[0] = 1


@inner
def adopt_joints(s: Any, c: Any) -> None:
    """Take over links, drives, ratios and couplings."""
    for j in range(s.leg_q.shape[0]):
        for k in range(s.leg_q.shape[1]):
            for i in range(LINK_ROWS):
                s.leg_link[i, j, k] = c.leg_link[i, j, k]
            for i in range(DRIVE_ROWS):
                s.leg_drive[i, j, k] = c.leg_drive[i, j, k]
            for i in range(s.leg_nodes.shape[1]):
                s.leg_nodes[0, i, j, k] = c.leg_nodes[0, i, j, k]
                s.leg_nodes[1, i, j, k] = c.leg_nodes[1, i, j, k]
            for i in range(s.leg_q.shape[0]):
                s.leg_M[0, i, j, k] = c.leg_M[0, i, j, k]
                s.leg_M[1, i, j, k] = c.leg_M[1, i, j, k]
            s.leg_ratio[j, k] = c.leg_nodes[0, 0, j, k]
            s.leg_dratio[j, k] = 0.0


@inner
def adopt_feet(s: Any, c: Any) -> None:
    """Take over the feet; h = sensor axis + cx * sensor x + cy * sensor y, cross-sensitivities of the calibration."""
    for k in range(s.leg_q.shape[1]):
        for i in range(s.leg_foot.shape[0]):
            s.leg_foot[i, k] = c.leg_foot[i, k]
        for i in range(3):
            s.leg_h[i, k] = (
                c.leg_foot[SENSOR + 6 + i, k]
                + c.sen_cross[0, k] * c.leg_foot[SENSOR + i, k]
                + c.sen_cross[1, k] * c.leg_foot[SENSOR + 3 + i, k]
            )
