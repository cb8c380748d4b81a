"""The ratio between motor and joint: fixed, of a screw with a lever arm, or from a table; as nodes for the step."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.interpolate import PchipInterpolator

from footcal.errors import SettingError
from footcal.leg.fields import RATIO_NODES
from footcal.leg.rotation import about_axis
from footcal.leg.schema import Joint, RatioTransmission, ScrewTransmission, TableTransmission
from footcal.records import FloatArray


@dataclass(frozen=True, slots=True)
class RatioNodes:
    """Ratio on even nodes; between them cubic Hermite, beyond them the end value."""

    first_rad: float
    step_rad: float
    ratio: FloatArray  # (RATIO_NODES,)
    slope_per_rad: FloatArray  # (RATIO_NODES,)
    varies: bool


def ratio_nodes(joint: Joint) -> RatioNodes:
    """Return a joint's ratio (motor turns per joint turn, positive) over its angle.

    Args:
        joint: the joint with its transmission.

    Returns:
        Nodes with values and slopes.

    Raises:
        SettingError: the lever arm of a screw vanishes within the range stated.
    """
    transmission = joint.transmission
    if isinstance(transmission, RatioTransmission):
        ones = np.ones(RATIO_NODES)
        return RatioNodes(0.0, 1.0, transmission.ratio * ones, 0.0 * ones, varies=False)
    if isinstance(transmission, TableTransmission):
        curve = PchipInterpolator(transmission.q_rad, transmission.ratio)
        nodes = np.linspace(transmission.q_rad[0], transmission.q_rad[-1], RATIO_NODES)
        return RatioNodes(
            float(nodes[0]), float(nodes[1] - nodes[0]), curve(nodes), curve.derivative()(nodes), varies=True
        )
    nodes = np.linspace(*transmission.range_rad, RATIO_NODES)
    step_rad = float(nodes[1] - nodes[0])
    ratio = screw_ratio(joint, transmission, nodes)
    nudge = 1e-5
    slope = (screw_ratio(joint, transmission, nodes + nudge) - screw_ratio(joint, transmission, nodes - nudge)) / (
        2 * nudge
    )
    if not bool(np.all(np.sign(ratio) == np.sign(ratio[0]))) or ratio[0] == 0.0:
        raise SettingError(
            where=f"joint {joint.name}, transmission",
            what="the screw's lever arm vanishes within range_rad (dead centre), where the current tells nothing",
            mend="Narrow range_rad to what the leg can reach, or correct the anchor points.",
        )
    sign = float(np.sign(ratio[0]))  # a current counts positive when it drives the encoder upwards
    return RatioNodes(float(nodes[0]), step_rad, sign * ratio, sign * slope, varies=True)


def screw_ratio(joint: Joint, screw: ScrewTransmission, angle_rad: FloatArray) -> FloatArray:
    """Return motor turns per joint turn of a screw between two anchors, with the sign of lengthening.

    Law: the screw's length is l(q) = |R(q) b - a|; its lever arm is dl/dq = (R b - a).(axis x R b) / l; one turn of the
    screw is one lead. Source: plane geometry, worked out here.

    Args:
        joint: for its axis.
        screw: lead and anchors.
        angle_rad: joint angles, shape (n,).

    Returns:
        Shape (n,).
    """
    arm_m = np.empty(len(angle_rad))
    for i, angle in enumerate(angle_rad):
        turned = about_axis(joint.axis, float(angle)) @ np.array(screw.anchor_link_m)
        rod = turned - np.array(screw.anchor_base_m)
        arm_m[i] = rod @ np.cross(joint.axis, turned) / np.linalg.norm(rod)
    return screw.ratio * 2.0 * np.pi / screw.lead_m * arm_m
